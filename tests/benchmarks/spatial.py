"""Chains in space: the compiled holding torque against pinocchio, and what recording costs.

    python tests/benchmarks/spatial.py

prints these rows alone.

The robot is the UR5 of the package example-robot-data (BSD-3-Clause).
"""

from __future__ import annotations

import math
import statistics
import time
import timeit
from collections.abc import Iterator
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pinocchio as pin
from rows import Row, ratio, show

from springpoise import Body, Feedforward, Mechanism, Point, SpatialChain, SpringMount, Straight, ZeroLengthSpring
from springpoise.linkages import SpatialLink
from springpoise.linkages.urdf import from_urdf

UR5 = Path("share/example-robot-data/robots/ur_description/urdf/ur5_robot.urdf")


def ur5() -> str:
    """Path of the robot's file in the installed package."""
    for folder in Path(pin.__file__).parents:
        if (folder / UR5).is_file():
            return str(folder / UR5)
    raise SystemExit("install the package example-robot-data for the benchmarks in space")


def _both() -> tuple[Feedforward, Any, Any]:
    model = from_urdf(ur5())
    theirs = pin.buildModelFromUrdf(ur5())
    theirs.gravity.linear = np.array([0.0, 0.0, -9.80665])
    return Feedforward(Mechanism(model.chain, travel=model.travel)), theirs, theirs.createData()


def spatial_call_rows(number: int = 10_000, repeats: int = 11) -> Iterator[Row]:
    """One call of the plain Python function for six joints."""
    ff, theirs, data = _both()
    fast, q = ff.compile(), np.linspace(-0.7, 0.8, 6)
    pose = [float(angle) for angle in q]
    np.testing.assert_allclose(fast(*pose), pin.computeGeneralizedGravity(theirs, data, q), rtol=0, atol=1e-12)
    ours = timeit.Timer("f(*q)", globals={"f": fast, "q": pose})
    peer = timeit.Timer("f(m, d, q)", globals={"f": pin.computeGeneralizedGravity, "m": theirs, "d": data, "q": q})
    share, mine, its = ratio(ours, peer, number=number, repeats=repeats)
    yield Row(
        "compiled torque, UR5, one call / pin gravity from Python",
        f"{share:.2f} ({1e9 * mine:.0f} / {1e9 * its:.0f} ns)",
        "8",
        share <= 8,
    )


def spatial_pose_rows(poses: int = 100_000, repeats: int = 9) -> Iterator[Row]:
    """Many poses by the blocked NumPy function, against a loop."""
    ff, theirs, data = _both()
    q = np.random.default_rng(1).uniform(-math.pi, math.pi, (poses, 6))
    columns, rows = list(np.ascontiguousarray(q.T)), list(q)
    many = ff.compile(arrays=True)
    ours = timeit.Timer("f(*q)", globals={"f": many, "q": columns})
    peer = timeit.Timer(
        "for pose in q: f(m, d, pose)",
        globals={"f": pin.computeGeneralizedGravity, "m": theirs, "d": data, "q": rows},
    )
    share, mine, its = ratio(ours, peer, number=1, repeats=repeats)
    yield Row(
        f"{poses} poses, UR5 / pin gravity in a loop",
        f"{share:.2f} ({1e3 * mine:.1f} / {1e3 * its:.1f} ms)",
        "0.4",
        share <= 0.4,
    )


def chain_of(joints: int) -> SpatialChain:
    """A made-up chain with axes along x, y, z in turn and centres of mass off every axis."""
    random = np.random.default_rng(joints)
    axes = ((0, 0, 1), (0, 1, 0), (1, 0, 0))
    return SpatialChain(
        [
            SpatialLink(
                f"link {i}",
                Body(float(random.uniform(0.5, 3.0)), tuple(random.uniform(-0.2, 0.2, 3))),
                origin=tuple(random.uniform(-0.3, 0.3, 3)),
                axis=axes[i % 3],
            )
            for i in range(joints)
        ]
    )


def four_springs(joints: int = 6) -> Mechanism:
    """A chain with springs from the ground and between links, over one joint and over several."""
    ends = (("ground", "link 1"), ("ground", "link 2"), ("link 1", "link 2"), ("link 2", "link 4"))
    mounts = [
        SpringMount(ZeroLengthSpring(500.0), Straight(Point(a, (0.05, 0.1, 0.2)), Point(b, (0.1, -0.05, 0.15))))
        for a, b in ends
    ]
    return Mechanism(chain_of(joints), springs=mounts)


def spatial_recording_rows(repeats: int = 5) -> Iterator[Row]:
    """Recording and compiling, and how the cost grows with the number of joints."""
    mech = four_springs()
    times = []
    for _ in range(repeats):
        began = time.perf_counter()
        Feedforward(mech).compile()
        times.append(time.perf_counter() - began)
    took = statistics.median(times)
    steps = len(Feedforward(mech).program())
    yield Row(f"recording six joints with four springs ({steps} steps)", f"{1e3 * took:.0f} ms", "200 ms", took <= 0.2)
    sizes = [len(Feedforward(Mechanism(chain_of(joints))).program()) for joints in (2, 4, 6, 8, 10, 12, 14)]
    growth = [later - before for before, later in pairwise(sizes[2:])]
    yield Row(
        "steps of chains of 2, 4, ... 14 joints",
        ", ".join(map(str, sizes)),
        "linear",
        max(growth) <= 1.3 * min(growth),
    )


def spatial_rows() -> Iterator[Row]:
    """All of them."""
    yield from spatial_call_rows()
    yield from spatial_pose_rows()
    yield from spatial_recording_rows()


if __name__ == "__main__":
    show(spatial_rows)

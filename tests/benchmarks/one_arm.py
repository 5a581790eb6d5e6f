"""One arm: import, compiled call, many poses and stock search, against peers in the same run.

    python tests/benchmarks/one_arm.py

prints these rows alone. A ratio is the median over interleaved repeats, in each of which the best of a
few timings of one side is divided by that of the other. Nothing here is asserted: times depend on
the machine, and budgets are held by people who read the table.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
import timeit
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
from rows import Row, ratio, show

import springpoise
from springpoise import (
    Arm,
    Body,
    ExtensionSpring,
    Feedforward,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)

HEAVY = {"scipy", "pint", "matplotlib"}
EVERYDAY = "from springpoise import Arm, Mechanism, Feedforward"

MASS, COM, HEIGHT, RADIUS, GRAVITY = 2.0, 0.35, 0.10, 0.08, 9.80665
IDEAL = ZeroLengthSpring(858.0)
COIL = ExtensionSpring(1200.0, free_length=0.05, initial_tension=10.0, longest=0.30)


def sprung_arm(spring: Any) -> Mechanism:
    """One arm, one spring straight from above the pivot to the arm."""
    path = Straight(Point("ground", (0.0, HEIGHT)), Point("arm", (RADIUS, 0.0)))
    return Mechanism(Arm(Body(MASS, (COM, 0.0))), springs=SpringMount(spring, path), travel=(-1.0, 1.0))


# ---------------------------------------------------------------------------------------- import


def import_rows(repeats: int = 15) -> Iterator[Row]:
    """Processor time of the import statement alone, in new processes in turn."""
    # Byte code in a place of its own: written whatever the environment says, and used by both sides.
    with tempfile.TemporaryDirectory() as cache:
        yield from _import_rows(repeats, cache)


def _import_rows(repeats: int, cache: str) -> Iterator[Row]:
    environment = {**os.environ, "PYTHONPATH": str(Path(springpoise.__file__).parents[1]), "PYTHONPYCACHEPREFIX": cache}
    environment.pop("PYTHONDONTWRITEBYTECODE", None)
    code = "import sys, time; t = time.process_time(); {}; print(time.process_time() - t, *sys.modules)"

    def run(statement: str) -> list[str]:
        done = subprocess.run(
            [sys.executable, "-c", code.format(statement)], capture_output=True, text=True, check=True, env=environment
        )
        return done.stdout.split()

    run(EVERYDAY)  # writes the byte code of both
    pairs = []
    for _ in range(repeats):
        mine, theirs = run(EVERYDAY), run("import numpy")
        pairs.append((float(mine[0]), float(theirs[0])))
    mine_s, theirs_s = (statistics.median(column) for column in zip(*pairs, strict=True))
    share = statistics.median(a / b for a, b in pairs)
    yield Row(
        f"{EVERYDAY} / import numpy", f"{share:.2f} ({1e3 * mine_s:.0f} / {1e3 * theirs_s:.0f} ms)", "1.4", share <= 1.4
    )
    loaded = sorted(HEAVY & set(mine[1:]))
    yield Row("  heavy modules loaded by it", ", ".join(loaded) or "none", "none", not loaded)


# -------------------------------------------------------------------------------------- one call


def pin_call() -> timeit.Timer:
    """The gravity torque of the bare arm."""
    import pinocchio as pin

    model = pin.Model()
    joint = model.addJoint(0, pin.JointModelRZ(), pin.SE3.Identity(), "joint")
    inertia = pin.Inertia(MASS, np.array([COM, 0.0, 0.0]), 0.01 * np.eye(3))
    model.appendBodyToJoint(joint, inertia, pin.SE3.Identity())
    model.gravity.linear = np.array([0.0, -GRAVITY, 0.0])
    names = {"f": pin.computeGeneralizedGravity, "model": model, "data": model.createData(), "q": np.array([0.3])}
    return timeit.Timer("f(model, data, q)", globals=names)


def mujoco_call(rate: float, free_length: float) -> timeit.Timer:
    """The position and velocity stages of the arm with its spring as a tendon."""
    import mujoco

    model = mujoco.MjModel.from_xml_string(
        f"""<mujoco><option gravity="0 {-GRAVITY} 0"/><worldbody><site name="a" pos="0 {HEIGHT} 0"/>
        <body><joint type="hinge" axis="0 0 1"/><inertial pos="{COM} 0 0" mass="{MASS}" diaginertia=".01 .01 .01"/>
        <site name="b" pos="{RADIUS} 0 0"/></body></worldbody>
        <tendon><spatial stiffness="{rate}" springlength="0 {free_length}"><site site="a"/><site site="b"/></spatial>
        </tendon></mujoco>"""
    )
    data = mujoco.MjData(model)
    data.qpos[0] = 0.3
    names = {"f": mujoco.mj_fwdPosition, "g": mujoco.mj_fwdVelocity, "model": model, "data": data}
    return timeit.Timer("f(model, data); g(model, data)", globals=names)


def call_rows(number: int = 20_000, repeats: int = 11) -> Iterator[Row]:
    """One call of a compiled holding torque."""
    for name, spring, free_length in (("zero-length spring", IDEAL, 0.0), ("extension spring", COIL, COIL.free_length)):
        ours = timeit.Timer("f(0.3)", globals={"f": Feedforward(sprung_arm(spring)).compile()})
        for peer, call, budget in (
            ("pin gravity of the bare arm", pin_call(), 0.8),
            ("MuJoCo position + velocity stage", mujoco_call(spring.rate, free_length), 0.2),
        ):
            share, mine, theirs = ratio(ours, call, number=number, repeats=repeats)
            yield Row(
                f"compiled torque, {name}, one call / {peer}",
                f"{share:.2f} ({1e9 * mine:.0f} / {1e9 * theirs:.0f} ns)",
                f"{budget}",
                share <= budget,
            )


# ------------------------------------------------------------------------------------ many poses


def by_hand_ideal(q: Any) -> Any:
    """Holding torque with a spring of zero free length: the whole spring is one more sine."""
    return (MASS * GRAVITY * COM - IDEAL.rate * HEIGHT * RADIUS) * np.cos(q)


def by_hand_ideal_as_a_spring(q: Any) -> Any:
    """The same, force times lever, as one writes it for any spring."""
    c = np.cos(q)
    length = np.sqrt(HEIGHT**2 + RADIUS**2 - 2 * HEIGHT * RADIUS * np.sin(q))
    return MASS * GRAVITY * COM * c - IDEAL.rate * length * (HEIGHT * RADIUS * c / length)


def by_hand_coil(q: Any) -> Any:
    """Holding torque with an extension spring, slack at and below its free length."""
    c = np.cos(q)
    length = np.sqrt(HEIGHT**2 + RADIUS**2 - 2 * HEIGHT * RADIUS * np.sin(q))
    pull = np.where(length > COIL.free_length, COIL.initial_tension + COIL.rate * (length - COIL.free_length), 0.0)
    return MASS * GRAVITY * COM * c - pull * (HEIGHT * RADIUS * c / length)


def pose_rows(poses: int = 1_000_000, repeats: int = 9) -> Iterator[Row]:
    """Many poses at once, compiled for arrays."""
    q = np.linspace(-1.0, 1.0, poses)
    for name, spring, hand in (
        ("zero-length spring / by hand, simplified", IDEAL, by_hand_ideal),
        ("zero-length spring / by hand, force times lever", IDEAL, by_hand_ideal_as_a_spring),
        ("extension spring / by hand", COIL, by_hand_coil),
    ):
        function = Feedforward(sprung_arm(spring)).compile(arrays=True)
        np.testing.assert_allclose(function(q), hand(q), rtol=0, atol=1e-11)
        ours, peers = (timeit.Timer("f(q)", globals={"f": f, "q": q}) for f in (function, hand))
        share, mine, theirs = ratio(ours, peers, number=1, repeats=repeats)
        yield Row(
            f"{poses} poses, {name}", f"{share:.2f} ({1e3 * mine:.1f} / {1e3 * theirs:.1f} ms)", "1.3", share <= 1.3
        )


def one_arm_rows() -> Iterator[Row]:
    """All of them."""
    yield from import_rows()
    yield from call_rows()
    yield from pose_rows()


if __name__ == "__main__":
    show(one_arm_rows)

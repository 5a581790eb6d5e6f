"""What placing springs costs: a search of the box against scipy's differential evolution, and a table of methods.

    python tests/benchmarks/solvers.py

prints these rows alone. Nothing is asserted here.
"""

from __future__ import annotations

import math
import statistics
import time
from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
from rows import Row, show

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Friction,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.balance.methods.compare import compare_methods
from springpoise.balance.placing.geometry import place
from springpoise.carriers import namespace

ARM = Arm(Body(2.0, (0.35, 0.0)))
POSES = np.linspace(-1.0, 1.0, 61)
KNOBS = {"height": (0.05, 0.20), "radius": (0.05, 0.12), "skew": (-0.3, 0.3), "aside": (-0.03, 0.03)}


def straight(height: Any, radius: Any, skew: Any, aside: Any) -> Mechanism:
    """An extension spring from point to point."""
    xp = namespace(skew)
    attach = Point("arm", (radius * xp.cos(skew), radius * xp.sin(skew)))
    spring = ExtensionSpring(1000.0, free_length=0.05, longest=0.20)
    return Mechanism(ARM, springs=SpringMount(spring, Straight(Point("ground", (aside, height)), attach)))


def pulley(height: Any, radius: Any, skew: Any, aside: Any) -> Mechanism:
    """A spring of zero free length behind a pulley."""
    xp = namespace(skew)
    path = Cable(
        Point("ground", (aside - 0.03, -0.35)),
        Disc(Point("ground", (aside, height)), radius=0.010, turn="cw"),
        Point("arm", (radius * xp.cos(skew), radius * xp.sin(skew))),
    )
    return Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(1.0), path))


def _median(job: Callable[[], Any], repeats: int) -> tuple[float, Any]:
    times = []
    found = None
    for _ in range(repeats):
        began = time.perf_counter()
        found = job()
        times.append(time.perf_counter() - began)
    return statistics.median(times), found


def _evolved(repeats: int, generations: int) -> tuple[float, float]:
    """Time and worst residual over the peak of differential evolution on the straight spring, written out by hand."""
    from scipy.optimize import differential_evolution

    target, peak = 2.0 * 9.80665 * 0.35 * np.cos(POSES), 2.0 * 9.80665 * 0.35

    def worst(x: np.ndarray) -> float:
        height, radius, skew, aside, rate = x
        dx, dy = radius * np.cos(POSES + skew) - aside, radius * np.sin(POSES + skew) - height
        d = np.hypot(dx, dy)
        lever = (aside * radius * np.sin(POSES + skew) - height * radius * np.cos(POSES + skew)) / d
        out = max(0.05 - d.min(), d.max() - 0.20, 0.0)
        return float(np.max(np.abs(target + rate * (d - 0.05) * lever))) / peak + 100.0 * out

    bounds = [*KNOBS.values(), (10.0, 5000.0)]
    took, found = _median(
        lambda: differential_evolution(worst, bounds, seed=1, maxiter=generations, tol=1e-10, polish=False), repeats
    )
    return took, float(found.fun)


def place_rows(repeats: int = 5, generations: int = 400) -> Iterator[Row]:
    """Four knobs over 61 poses."""
    place(straight, knobs=KNOBS, over=POSES, fit="rate", starts=1)  # loads scipy.optimize
    found = None
    for name, build, fit in (("pulley", pulley, "mount"), ("straight spring", straight, "rate")):
        for norm in ("rms", "minimax"):
            took, found = _median(
                lambda build=build, fit=fit, norm=norm: place(build, knobs=KNOBS, over=POSES, fit=fit, norm=norm),
                repeats,
            )
            yield Row(f"place, {name}, 4 knobs, 61 poses, {norm}", f"{took:.2f} s", "0.5 s", took <= 0.5)
    assert found is not None
    theirs, other = _evolved(max(1, repeats // 3), generations)
    mine = found.residual.worst_fraction
    yield Row(
        "  the last one / differential evolution by hand: time, worst residual",
        f"{took / theirs:.2f} ({theirs:.2f} s), {100 * mine:.4f} / {100 * other:.4f} %",
        "",
        None,
    )


def method_rows(repeats: int = 3) -> Iterator[Row]:
    """All methods side by side over 61 poses."""
    arm = Mechanism(ARM, friction=Friction(0.1), travel=(-math.pi / 3, math.pi / 3))
    took, _ = _median(
        lambda: compare_methods(arm, attach_radius=(0.04, 0.12), anchor_height=(0.06, 0.25), over=arm.poses(61)),
        repeats,
    )
    yield Row("compare_methods, 9 methods, 61 poses", f"{took:.2f} s", "5 s", took <= 5.0)


def solver_rows() -> Iterator[Row]:
    """All of them."""
    yield from place_rows()
    yield from method_rows()


if __name__ == "__main__":
    show(solver_rows)

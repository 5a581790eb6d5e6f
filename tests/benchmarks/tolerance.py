"""Scattered builds: time on one core, and what a second worker process gains.

    python tests/benchmarks/tolerance.py

prints these rows alone. What a second process can gain depends on what else the machine does, so a
plain loop that shares nothing is measured in turn with it.
"""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, ProcessPoolExecutor
from typing import Any

import numpy as np
from rows import Row, show

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.tolerance import Spread, scatter

STRAIGHT = Straight(Point("ground", (0.0, 0.10)), Point("arm", (0.08, 0.0)))
CABLE = Cable(
    Point("ground", (-0.03, -0.25)),
    Disc(Point("ground", (-0.015, 0.20)), radius=0.015, turn="cw"),
    Point("arm", (0.05, 0.0)),
)
COIL = ExtensionSpring(1200.0, free_length=0.05, initial_tension=10.0)
COMMON = {
    "springs[0].spring.rate": Spread.normal("5 %"),
    "linkage.bodies[0].mass": Spread.normal("1 %"),
    "linkage.bodies[0].com[0]": Spread.uniform("2 mm"),
}
ENDS = {
    "springs[0].path.first.at[1]": Spread.uniform("1 mm"),
    "springs[0].path.last.at[0]": Spread.uniform("1 mm"),
    "springs[0].path.last.at[1]": Spread.uniform("1 mm"),
}
DISC = {
    "springs[0].path.along[1].radius": Spread.uniform("0.2 mm"),
    "springs[0].path.along[2].at[0]": Spread.uniform("1 mm"),
}
CASES: dict[str, tuple[SpringMount, dict[str, Spread]]] = {
    "zero-length spring, 6 fields": (SpringMount(ZeroLengthSpring(858.0), STRAIGHT), COMMON | ENDS),
    "extension spring, 7 fields": (
        SpringMount(COIL, STRAIGHT),
        COMMON | ENDS | {"springs[0].spring.initial_tension": Spread.normal("10 %")},
    ),
    "extension spring behind a pulley, 5 fields": (SpringMount(COIL, CABLE, rigid_length=0.35), COMMON | DISC),
}


def arm_with(mount: SpringMount) -> Mechanism:
    """One arm with one spring."""
    return Mechanism(Arm(Body(2.0, (0.35, 0.0))), springs=mount, travel=(-1.0, 1.0))


def seconds(function: Callable[[], Any], times: int = 3) -> float:
    """Best time of a few calls [s]."""
    best = float("inf")
    for _ in range(times):
        began = time.perf_counter()
        function()
        best = min(best, time.perf_counter() - began)
    return best


def busy(count: int) -> float:
    """So many roots of a buffer that stays in the cache."""
    x = np.ones(16384)
    for _ in range(count):
        np.sqrt(x, out=x)
    return float(x[0])


def scatter_rows(builds: int = 100_000, repeats: int = 5) -> Iterator[Row]:
    """Many builds on one core."""
    for name, (mount, spreads) in CASES.items():
        mech = arm_with(mount)

        def run(mech: Mechanism = mech, spreads: dict[str, Spread] = spreads) -> Any:
            return scatter(mech, spreads, builds=builds, limit="5 %")

        took = statistics.median(seconds(run, 1) for _ in range(repeats))
        yield Row(f"{builds} builds x 121 poses, {name}", f"{took:.2f} s", "1 s", took < 1.0)


def process_rows(builds: int = 100_000, repeats: int = 20, loops: int = 10_000) -> Iterator[Row]:
    """The same on two worker processes, and a plain loop cut in two."""
    with ProcessPoolExecutor(2) as pool:
        list(pool.map(busy, [loops // 10] * 2))
        for name, (mount, spreads) in CASES.items():
            mech = arm_with(mount)

            def run(executor: Executor | None, mech: Mechanism = mech, spreads: dict[str, Spread] = spreads) -> Any:
                return scatter(mech, spreads, builds=builds, limit="5 %", executor=executor)

            run(pool)
            # The best of many, each in turn: what others do on the machine only adds to a time.
            times = [
                (
                    seconds(lambda: run(None), 1),
                    seconds(lambda: run(pool), 1),
                    seconds(lambda: busy(loops), 1),
                    seconds(lambda: list(pool.map(busy, [loops // 2] * 2)), 1),
                )
                for _ in range(repeats)
            ]
            one, two, loop, halves = map(min, zip(*times, strict=True))
            gain, most = one / two, loop / halves
            yield Row(f"two processes / one, {name}", f"{gain:.2f} times faster", "1.7", gain >= 1.7)
            yield Row("  a plain loop cut in two, in turn with it", f"{most:.2f} times faster", "", None)


def tolerance_rows() -> Iterator[Row]:
    """All of them."""
    yield from scatter_rows()
    yield from process_rows()


if __name__ == "__main__":
    show(tolerance_rows)

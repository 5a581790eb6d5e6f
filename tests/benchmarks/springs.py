"""What springs as they are cost in a compiled one-joint mechanism, against an extension spring in the same run.

    python tests/benchmarks/springs.py

prints these rows alone. Nothing is asserted here.
"""

from __future__ import annotations

import timeit
from collections.abc import Iterator
from typing import Any

import numpy as np
from rows import Row, ratio, show

from springpoise import (
    Arm,
    Body,
    ExtensionSpring,
    Feedforward,
    GasSpring,
    Mechanism,
    Point,
    RubberTube,
    SpringMount,
    Straight,
)
from springpoise.springs import rubber

COIL = ExtensionSpring(1200.0, free_length=0.05, initial_tension=10.0, longest=0.30)
SIZES: dict[str, Any] = {"outer_diameter": "9.525 mm", "inner_diameter": "6.35 mm", "free_length": "60 mm"}
GAS = GasSpring.from_forces(
    extending=(400, 540), compressing=(460, 612), offset="10 mm", stroke="200 mm", rod_diameter="8 mm",
    extended_length="500 mm",
)  # fmt: skip
SPRINGS = {
    "rubber tube, Yeoh": RubberTube(**SIZES, law=rubber.Yeoh(c1=231550.0, c2=-3307.5, c3=107.03)),
    "rubber tube, Ogden of three terms": RubberTube(
        **SIZES, law=rubber.Ogden(mu=[618030.0, 1180.0, -9810.0], alpha=[1.3, 5.0, -2.0])
    ),
    "rubber tube, Arruda-Boyce": RubberTube(**SIZES, law=rubber.ArrudaBoyce(mu=270000.0, n=26.5)),
    "gas spring": GAS,
    "gas spring at 40 degC": GAS.at_temperature("40 degC"),
}


def pulled_arm(spring: Any) -> Mechanism:
    """One arm; a spring that pulls from above it, or a gas spring that pushes from below."""
    if isinstance(spring, GasSpring):
        path = Straight(Point("ground", (0.05, -0.35)), Point("arm", (0.15, 0.0)))
    else:
        path = Straight(Point("ground", (0.0, 0.10)), Point("arm", (0.08, 0.0)))
    return Mechanism(Arm(Body(2.0, (0.35, 0.0))), springs=SpringMount(spring, path), travel=(-0.2, 0.7))


def spring_call_rows(number: int = 20_000, repeats: int = 11) -> Iterator[Row]:
    """One call of a compiled holding torque."""
    peer = timeit.Timer("f(0.3)", globals={"f": Feedforward(pulled_arm(COIL)).compile()})
    for name, spring in SPRINGS.items():
        ours = timeit.Timer("f(0.3)", globals={"f": Feedforward(pulled_arm(spring)).compile()})
        share, mine, theirs = ratio(ours, peer, number=number, repeats=repeats)
        yield Row(
            f"compiled torque, {name}, one call / extension spring",
            f"{share:.2f} ({1e9 * mine:.0f} / {1e9 * theirs:.0f} ns)",
            "",
            None,
        )


def spring_pose_rows(poses: int = 1_000_000, repeats: int = 7) -> Iterator[Row]:
    """Many poses at once, compiled for arrays."""
    q = np.linspace(-0.2, 0.7, poses)
    peer = timeit.Timer("f(q)", globals={"f": Feedforward(pulled_arm(COIL)).compile(arrays=True), "q": q})
    for name, spring in SPRINGS.items():
        mechanism = pulled_arm(spring)
        function = Feedforward(mechanism).compile(arrays=True)
        np.testing.assert_allclose(function(q[:9]), mechanism.holding_torque(q[:9]), rtol=1e-11, atol=1e-11)
        ours = timeit.Timer("f(q)", globals={"f": function, "q": q})
        share, mine, theirs = ratio(ours, peer, number=1, repeats=repeats)
        yield Row(
            f"{poses} poses, {name} / extension spring",
            f"{share:.2f} ({1e3 * mine:.1f} / {1e3 * theirs:.1f} ms)",
            "",
            None,
        )


def spring_rows() -> Iterator[Row]:
    """All of them."""
    yield from spring_call_rows()
    yield from spring_pose_rows()


if __name__ == "__main__":
    show(spring_rows)

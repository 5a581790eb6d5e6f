"""What all methods of a comparison share: the arm, its directions, and the user's bounds."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable, Mapping
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.methods.assumptions import MethodAssumptions
from springpoise.balance.placing.geometry import placed
from springpoise.balance.placing.knobs import Knob
from springpoise.balance.placing.limits import Rules
from springpoise.balance.placing.result import Placement
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.linkages import Arm, Point
from springpoise.mechanism import Mechanism, SpringMount

__all__ = ["CannotSize", "Frame", "Sized", "frame_of"]

Array = NDArray[np.float64]
Range = tuple[float, float]


class CannotSize(Exception):
    """A method cannot be sized between the bounds; its text says why. Caught within this package."""


class Sized(NamedTuple):
    """A method as it was sized."""

    mechanism: Mechanism
    sizes: str
    inertia: float


@attrs.frozen(eq=False)
class Frame:
    """The arm and its bounds, with directions so that nothing else has to think of tilted gravity."""

    bare: Mechanism
    """The arm without springs."""
    q: Array
    norm: str
    attach_radius: Range
    anchor_height: Range
    skew: Range
    given: MethodAssumptions
    up: complex
    """Unit vector against gravity."""
    attach_angle: float
    """Direction of the attachment in the arm's frame for an anchor straight above the pivot [rad]."""
    side: float
    """+1 where the arm is to the right of the pivot on the whole, looking with ``up`` upwards, else -1."""
    both_sides: bool
    """Whether it swings to both sides of the vertical through the pivot."""
    peak: float
    """Peak gravity torque [N·m]."""

    def anchor(self, height: Carrier, aside: Carrier = 0.0) -> Point:
        """A point of the ground above the pivot, and to the right of it."""
        right = self.up / 1j
        return Point(
            "ground",
            (height * self.up.real + aside * right.real, height * self.up.imag + aside * right.imag),
        )

    def swung(self, height: Carrier, swing: Carrier) -> Point:
        """A point of the ground below the pivot, swung to the arm's side by an angle."""
        xp = namespace(height, swing)
        return self.anchor(-height * xp.cos(swing), self.side * (height * xp.sin(swing)))

    def attach(self, radius: Carrier, skew: Carrier) -> Point:
        """A point of the arm."""
        xp = namespace(radius, skew)
        angle = self.attach_angle + skew
        return Point("arm", (radius * xp.cos(angle), radius * xp.sin(angle)))

    def with_mounts(self, *mounts: SpringMount) -> Mechanism:
        """The arm with these springs."""
        return self.bare.with_springs(mounts)

    def size_of(self, found: Placement) -> float:
        """What a placement leaves, over the peak gravity torque [1]."""
        left = found.residual
        return (left.worst if self.norm == "minimax" else left.rms) / self.peak

    def best(
        self,
        mount: Callable[..., SpringMount],
        ranges: Mapping[str, Range],
        fit: str,
        rules: Rules,
        *,
        quick: bool = False,
    ) -> Placement:
        """The best of a mount that is built from numbers in ranges; a range of no width is a number. ``quick``: nearly.

        Raises
        ------
        CannotSize
            No geometry keeps the requirements, or no spring helps.
        """
        fixed = {name: low for name, (low, high) in ranges.items() if not high > low}
        knobs = tuple(Knob(name, low, high) for name, (low, high) in ranges.items() if high > low)
        try:
            found = placed(
                lambda **values: self.with_mounts(mount(**{**fixed, **values})),
                knobs,
                rules,
                over=self.q,
                norm=self.norm,
                fit=fit,
                starts=2 if quick else 6,
                polished=0 if quick else 2,
            )
        except InputError as error:  # the bounds were checked, so that it is no place that can be built
            raise CannotSize(f"no geometry between the bounds can be built at every pose: {error}") from error
        if not found.success:
            raise CannotSize(found.status)
        return attrs.evolve(found, values={**fixed, **found.values})


def frame_of(
    bare: Mechanism,
    q: Array,
    norm: str,
    bounds: tuple[Range, Range, Range],
    given: MethodAssumptions,
) -> Frame:
    """The frame of an arm.

    Raises
    ------
    InputError
        The arm needs no balance.
    """
    arm = bare.linkage
    assert isinstance(arm, Arm)
    gx, gy = (float(component) for component in bare.gravity)
    strength = math.hypot(gx, gy)
    moment = complex(*arm.moment)
    torque = np.asarray(bare.gravity_torque(q))
    peak = float(np.max(np.abs(torque))) if torque.size else 0.0
    if not peak > 1e-12:
        raise InputError("arm must have something to balance, got no gravity torque over the poses")
    up = -complex(gx, gy) / strength
    weight = -complex(gx, -gy) * moment
    return Frame(
        bare=bare,
        q=q,
        norm=norm,
        attach_radius=bounds[0],
        anchor_height=bounds[1],
        skew=bounds[2],
        given=given,
        up=up,
        attach_angle=math.remainder(cmath.phase(weight) + cmath.phase(up), 2.0 * math.pi),
        side=1.0 if float(np.mean(torque)) <= 0.0 else -1.0,
        both_sides=bool(np.min(torque) < -1e-9 * peak and np.max(torque) > 1e-9 * peak),
        peak=peak,
    )


def unscaled(mechanism: Mechanism) -> tuple[Any, float]:
    """The spring of a mechanism of one mount whose spring was sized as a whole, and its factor."""
    spring: Any = mechanism.springs[0].spring
    return spring.spring, float(spring.factor)

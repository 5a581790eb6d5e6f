"""Exact balance of one arm by a spring of zero free length: rate · a · b = m · g · r.

With the anchor ``a`` on the ground, the attachment ``b`` on the arm at angle zero and the moment
``M`` of the masses as complex numbers, and gravity ``γ`` likewise, the energy of springs and
gravity is ``Re((Σ -k conj(a) b - conj(γ) M) e^{iθ})`` and a constant. Every angle is balanced
where the sum vanishes: one complex equation, whatever the directions and however many springs.
"""

from __future__ import annotations

import cmath
import math
from typing import Any

import attrs

from springpoise import units
from springpoise.balance.residuals import Residual, residual
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm, Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Straight
from springpoise.springs import ZeroLengthSpring
from springpoise.tables import degrees, facts, millimetres, number
from springpoise.units import ScalarLike

__all__ = ["SineMatch", "as_mechanism", "sine_match"]


ROUNDING = 4e-16
"""Share of a place's distance by which a sine or cosine of a quarter turn misses zero [1]."""


@attrs.frozen
class SineMatch:
    """A spring of zero free length that balances an arm at every angle."""

    mechanism: Mechanism
    """The arm with all its springs, the new ones last."""
    rate: float
    """Rate of each new spring [N/m]."""
    attach_radius: float
    """Distance from the pivot to the attachment on the arm [m]."""
    attach_angle: float
    """Direction of the attachment in the arm's frame [rad]."""
    anchor_height: float
    """Distance from the pivot to the anchor along the anchor's direction [m]."""
    anchor_angle: float
    """Direction of the anchor on the ground [rad]; π/2 is straight above the pivot."""
    count: int
    """How many new springs act side by side."""
    residual: Residual
    """What is left over the travel: rounding only."""

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        return "balanced at every angle, as long as the spring really has zero free length"

    def __str__(self) -> str:
        mount = self.mechanism.springs[-1]
        states = mount.state(self.mechanism.linkage, self.mechanism.poses(721), "")
        rows = [
            ("status", self.status),
            (
                "rate",
                f"{number(self.rate, 'N/m')}" + (f", {self.count} springs side by side" if self.count > 1 else ""),
            ),
            ("attach radius", f"{millimetres(self.attach_radius)} at {degrees(self.attach_angle)} on the arm"),
            ("anchor height", f"{millimetres(self.anchor_height)} at {degrees(self.anchor_angle)} on the ground"),
            (
                "spring length",
                f"{millimetres(float(states.length.min()))} to {millimetres(float(states.length.max()))}",
            ),
            (
                "load of one spring",
                f"{number(float(states.load.min()), 'N')} to {number(float(states.load.max()), 'N')}",
            ),
            ("residual", str(self.residual)),
        ]
        return "sine match\n" + facts(rows)


def sine_match(
    arm: Arm | Mechanism,
    *,
    rate: ScalarLike | None = None,
    attach_radius: ScalarLike | None = None,
    anchor_height: ScalarLike | None = None,
    anchor_angle: ScalarLike = math.pi / 2,
    count: int = 1,
    gravity: Any = None,
) -> SineMatch:
    """Solve rate · a · b = m · g · r for whichever of the three is missing.

    The attachment's direction on the arm follows: it is the direction of the centre of mass where
    the anchor is straight above the pivot, and turns with the anchor. Springs that are there
    already, of zero free length and straight between ground and arm, are taken into account.

    Parameters
    ----------
    arm
        The arm, or a mechanism of one arm with springs, travel and friction.
    rate
        Rate of each new spring [N/m], > 0; None to find it.
    attach_radius
        Distance from pivot to attachment on the arm [m], > 0; None to find it.
    anchor_height
        Distance from pivot to anchor along ``anchor_angle`` [m], other than 0; None to find it.
        Negative puts the anchor on the other side, and the attachment with it.
    anchor_angle
        Direction of the anchor on the ground [rad]; by default straight above the pivot.
    count
        Equal springs side by side.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    SineMatch
        Its ``mechanism`` holds to 1e-12 of m·g·r at every angle.

    Raises
    ------
    InputError
        Not exactly one of the three left out; a value out of range; an arm that needs no spring;
        a spring on it that is not of zero free length and straight.

    References
    ----------
    Streit, D. A. and Gilmore, B. J. (1989), Perfect spring equilibrators for rotatable bodies,
    Journal of Mechanisms, Transmissions, and Automation in Design 111(4):451-458.

    Examples
    --------
    >>> from springpoise import Arm, Body, balance
    >>> found = balance.sine_match(Arm(Body("2 kg", ("0.35 m", 0))), attach_radius="80 mm", anchor_height="100 mm")
    >>> round(found.rate, 6)
    858.081875
    """
    mechanism = as_mechanism(arm)
    given = {"rate": rate, "attach_radius": attach_radius, "anchor_height": anchor_height}
    missing = [name for name, value in given.items() if value is None]
    if len(missing) != 1:
        raise InputError(
            "sine_match must be given two of rate, attach_radius, anchor_height, got "
            + (f"{3 - len(missing)} of them" if missing else "all three; leave one out")
        )
    k = _given(rate, "N/m", "rate")
    b = _given(attach_radius, "m", "attach_radius")
    a = _given(anchor_height, "m", "anchor_height", positive=False)
    direction = units.radian(anchor_angle, "anchor_angle")
    pull = mechanism.gravity if gravity is None else units.acceleration_pair(gravity, "gravity")
    lacking, scale = _lacking(mechanism, pull)
    if not abs(lacking) > 1e-12 * scale:
        raise InputError(
            "arm must have something left to balance, "
            f"got a first moment of {abs(lacking):g} N*m for gravity and springs"
        )
    if isinstance(count, bool) or not isinstance(count, int) or count < 1:
        raise InputError(f"count must be a whole number >= 1, got {count!r}")
    if k is None:
        k = abs(lacking) / (count * abs(a) * b)
    if a is None:
        a = abs(lacking) / (count * k * b)
    anchor = _without_rounding(a * cmath.exp(1j * direction))
    attach = lacking / (count * k * anchor.conjugate())
    if b is not None:  # given or solved for, the two agree; keep the digits that were given
        attach *= b / abs(attach)
    attach = _without_rounding(attach)
    mount = SpringMount(
        ZeroLengthSpring(k),
        Straight(Point("ground", (anchor.real, anchor.imag)), Point("arm", (attach.real, attach.imag))),
        count=count,
    )
    balanced = attrs.evolve(mechanism, springs=(*mechanism.springs, mount), gravity=pull)
    return SineMatch(
        mechanism=balanced,
        rate=k,
        attach_radius=abs(attach) if b is None else b,
        attach_angle=cmath.phase(attach),
        anchor_height=a,
        anchor_angle=direction,
        count=count,
        residual=residual(balanced),
    )


def _without_rounding(place: complex) -> complex:
    """A place on one of the axes, where it misses that by rounding."""
    least = ROUNDING * abs(place)
    x, y = (0.0 if abs(part) <= least else part for part in (place.real, place.imag))
    return complex(x, y)


def as_mechanism(arm: Any) -> Mechanism:
    """The mechanism of one arm that a solver was given, or that a bare arm stands for."""
    if isinstance(arm, Arm):
        return Mechanism(arm)
    if isinstance(arm, Mechanism) and isinstance(arm.linkage, Arm):
        return arm
    raise InputTypeError(f"arm must be an Arm or a Mechanism of one, got {arm!r}")


def _given(value: ScalarLike | None, unit: str, name: str, *, positive: bool = True) -> Any:
    if value is None:
        return None
    number_ = units.scalar_si(value, unit, name)
    if not isinstance(number_, float):
        raise InputTypeError(f"{name} must be a single value in {unit}, got {value!r}")
    if positive and not number_ > 0:
        raise InputError(f"{name} must be > 0 {unit}, got {number_}")
    if number_ == 0:
        raise InputError(f"{name} must be other than 0 {unit}, got {number_}")
    return number_


def _lacking(mechanism: Mechanism, gravity: tuple[float, float]) -> tuple[complex, float]:
    """What k·conj(a)·b of the new springs has to be [N·m], and the scale of its parts."""
    arm = mechanism.linkage
    assert isinstance(arm, Arm)
    weight = -complex(gravity[0], -gravity[1]) * complex(*arm.moment)
    lacking, scale = weight, abs(weight)
    for index, mount in enumerate(mechanism.springs):
        spring, path = mount.spring, mount.path
        if not isinstance(spring, ZeroLengthSpring) or not isinstance(path, Straight) or mount.rigid_length != 0:
            raise InputError(
                f"arm.springs[{index}] must be a ZeroLengthSpring on a Straight path, "
                f"got {type(spring).__name__} on {type(path).__name__}; use fit_springs or search_stock"
            )
        ends = {path.first.body: complex(*path.first.at), path.last.body: complex(*path.last.at)}
        if len(ends) == 2:
            there = mount.count * spring.rate * ends["ground"].conjugate() * ends["arm"]
            lacking, scale = lacking - there, scale + abs(there)
    return lacking, scale

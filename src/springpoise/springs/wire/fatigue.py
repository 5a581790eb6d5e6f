"""Endless life of coils under a load that goes to and fro: criteria, endurance points, and what follows.

Zimmerli's endurance points are shear stresses about a mean, and not fully reversed limits: a
criterion carries them over with the torsional strength. Corrections for surface, size or
reliability are in the points already.

Source: Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed.
"""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.wire.strength import happens

__all__ = [
    "CRITERIA",
    "ZIMMERLI_PEENED",
    "ZIMMERLI_UNPEENED",
    "EndurancePoint",
    "Fatigue",
    "fatigue_factor",
    "greatest_load",
    "repeated_bending_limit",
    "reversed_limit",
]

CRITERIA = ("sines", "gerber", "goodman")
"""Names of the criteria. Sines looks at the amplitude alone and is for pure torsion only."""

SHEAR_OVER_BENDING = 0.577
"""Shear over bending endurance by distortion energy [1]: 1/√3, rounded as the source has it."""


@attrs.frozen(field_transformer=units.named_fields)
class EndurancePoint:
    """Amplitude and mean of a shear stress that coils endure without end.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.
    """

    amplitude: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Shear stress amplitude [Pa], > 0."""
    mean: Carrier = attrs.field(converter=units.pascal, validator=units.not_negative)
    """Mean shear stress it was found at [Pa], >= 0."""
    largest_wire: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Largest wire it holds for [m], > 0."""
    name: str = attrs.field(kw_only=True)
    """What it is called in a result."""


_PSI = 6894.757293168361
ZIMMERLI_UNPEENED = EndurancePoint(35e3 * _PSI, 55e3 * _PSI, largest_wire=0.010, name="Zimmerli, unpeened")
"""35 and 55 kpsi (241 and 379 MPa): any spring steel below 10 mm."""
ZIMMERLI_PEENED = EndurancePoint(57.5e3 * _PSI, 77.5e3 * _PSI, largest_wire=0.010, name="Zimmerli, peened")
"""57.5 and 77.5 kpsi (398 and 534 MPa): the same, shot-peened on every coil. Hooks cannot be peened reliably."""


def _criterion(value: Any) -> str:
    if value not in CRITERIA:
        raise InputError(f"Fatigue.criterion must be one of {', '.join(map(repr, CRITERIA))}, got {value!r}")
    return str(value)


@attrs.frozen
class Fatigue:
    """How endless life is judged: a criterion and the endurance point it starts from.

    Raises
    ------
    InputError
        A criterion that is not known.

    Examples
    --------
    >>> print(Fatigue("gerber"))
    gerber on Zimmerli, unpeened
    """

    criterion: str = attrs.field(converter=_criterion)
    """``"sines"``, ``"gerber"`` or ``"goodman"``."""
    point: EndurancePoint = attrs.field(default=ZIMMERLI_UNPEENED)
    """The endurance point in torsion."""
    hook_point: EndurancePoint | None = attrs.field(default=None)
    """The same for hooks; None for ``point``, or unpeened where that is Zimmerli's peened one."""

    def __str__(self) -> str:
        return f"{self.criterion} on {self.point.name}"

    @property
    def at_hooks(self) -> Fatigue:
        """The judgement of a hook in torsion; peening does not reach hooks reliably (value from memory)."""
        if self.hook_point is not None:
            return Fatigue(self.criterion, self.hook_point)
        return Fatigue(self.criterion, ZIMMERLI_UNPEENED if self.point == ZIMMERLI_PEENED else self.point)

    @property
    def in_bending(self) -> Fatigue:
        """The judgement of a hook in bending: Sines does not apply there, Gerber takes its place."""
        return attrs.evolve(self.at_hooks, criterion="gerber" if self.criterion == "sines" else self.criterion)


def as_fatigue(value: Any) -> Fatigue:
    """A judgement as it may be given: whole, or the criterion's name for unpeened wire."""
    if isinstance(value, Fatigue):
        return value
    if isinstance(value, str):
        return Fatigue(value)
    raise InputTypeError(f"fatigue must be a Fatigue or one of {', '.join(map(repr, CRITERIA))}, got {value!r}")


def reversed_limit(criterion: str, amplitude: Carrier, mean: Carrier, strength: Carrier) -> Carrier:
    """Fully reversed limit that an endurance point stands for [Pa].

    Gerber: ``Sa/[1 - (Sm/Su)²]``; Goodman: ``Sa/(1 - Sm/Su)``; Sines: ``Sa``, whatever the mean.
    The mean must be below the strength.
    """
    share = mean / strength
    if criterion == "goodman":
        return amplitude / (1.0 - share)
    if criterion == "gerber":
        return amplitude / (1.0 - share * share)
    return amplitude + 0.0 * share


def fatigue_factor(criterion: str, amplitude: Carrier, mean: Carrier, limit: Carrier, strength: Carrier) -> Carrier:
    """How many times amplitude and mean may grow together [1].

    Goodman: ``1/n = sa/Se + sm/Su``; Gerber: ``n sa/Se + (n sm/Su)² = 1``; Sines: ``n = Se/sa``.
    Infinite without any stress. The Gerber root is written so that it holds for a mean of zero.
    """
    xp = namespace(amplitude, mean, limit, strength)
    used = amplitude / limit
    if criterion == "goodman":
        spent = used + mean / strength
    elif criterion == "gerber":
        share = 2.0 * mean / strength
        spent = 0.5 * (used + xp.sqrt(used * used + share * share))
    else:
        spent = used
    return xp.where(spent == 0.0, math.inf, 1.0 / xp.where(spent == 0.0, 1.0, spent))


def greatest_load(
    criterion: str, lowest: Carrier, stress: Carrier, limit: Carrier, strength: Carrier, safety: Carrier
) -> Carrier:
    """Greatest load of a cycle from ``lowest`` with the given factor [N, or N·m].

    Parameters
    ----------
    criterion
        ``"sines"``, ``"gerber"`` or ``"goodman"``.
    lowest
        Lowest load of the cycle [N, or N·m], >= 0.
    stress
        Stress for each unit of load [Pa/N, or Pa/(N·m)].
    limit, strength
        Fully reversed limit and ultimate strength [Pa].
    safety
        Factor on amplitude and mean [1], > 0.
    """
    half = 0.5 * safety * stress
    if criterion == "goodman":
        return (1.0 / half + lowest * (1.0 / limit - 1.0 / strength)) / (1.0 / limit + 1.0 / strength)
    if criterion == "gerber":
        xp = namespace(lowest, half, limit, strength)
        a = (half / strength) ** 2.0
        b = half / limit + 4.0 * lowest * a
        c = 1.0 - 4.0 * lowest * lowest * a
        return lowest + 2.0 * c / (b + xp.sqrt(xp.maximum(b * b + 4.0 * a * c, 0.0)))
    return lowest + limit / half


def repeated_bending_limit(greatest: Carrier, strength: Carrier) -> Carrier:
    """Fully reversed limit in bending [Pa] from the greatest stress endured between it and zero.

    Gerber through amplitude and mean of half of it each: ``(Sr/2)/[1 - (Sr/(2 Su))²]``. No
    further correction applies to it.
    """
    return reversed_limit("gerber", 0.5 * greatest, 0.5 * greatest, strength)


def endurance(fatigue: Fatigue, wire: Carrier, shear_strength: Carrier, *, spring_steel: bool) -> Carrier:
    """Fully reversed shear limit of a wire [Pa] under a judgement.

    Raises
    ------
    InputError
        Wire that the endurance point does not hold for.
    """
    point = fatigue.point
    if not spring_steel:
        raise InputError(
            f"fatigue must not rest on {point.name!r} for wire that is no spring steel; it was found on steel"
        )
    if happens(wire > point.largest_wire):
        raise InputError(
            f"wire must be <= {point.largest_wire * 1e3:g} mm for the endurance point {point.name!r}, got {wire}"
        )
    if happens(shear_strength <= point.mean):
        raise InputError(
            f"fatigue point {point.name!r} must have a mean below the torsional strength, got {shear_strength} Pa"
        )
    return reversed_limit(fatigue.criterion, point.amplitude, point.mean, shear_strength)

"""What a wire's diameter sets: tensile strength in segments, and moduli in steps."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.units import ScalarLike

__all__ = ["DiameterSteps", "StrengthSegment", "StrengthSet"]

INCH = 0.0254
EDGE = 1e-9  # relative; 0.5 mm written in another unit is still 0.5 mm


def happens(condition: Any) -> bool:
    """Whether a condition holds anywhere; recorded variables are not asked."""
    return isinstance(condition, bool | np.bool_ | np.ndarray) and bool(np.any(condition))


@attrs.frozen(field_transformer=units.named_fields)
class StrengthSegment:
    """Tensile strength over a range of diameters: ``(at_unit_diameter - per_decade · lg d) / d^exponent``, d in mm.

    Design handbooks state the power law A/d^m (``per_decade`` = 0), European wire standards the
    logarithm (``exponent`` = 0).

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or a range that is empty.

    Examples
    --------
    >>> music = StrengthSegment("0.10 mm", "6.5 mm", at_unit_diameter="2211 MPa", exponent=0.145)
    >>> round(music.strength(0.002) / 1e6, 2)
    1999.58
    """

    smallest: float = attrs.field(converter=units.metre, validator=units.not_negative)
    """Smallest diameter [m], >= 0."""
    largest: float = attrs.field(converter=units.metre, validator=units.positive)
    """Largest diameter [m], above ``smallest``."""
    at_unit_diameter: Carrier = attrs.field(converter=units.pascal, validator=units.positive, kw_only=True)
    """Strength that the law gives at 1 mm [Pa], > 0, also where 1 mm is outside the range: A in MPa·mm^m."""
    exponent: Carrier = attrs.field(default=0.0, converter=units.number, validator=units.not_negative, kw_only=True)
    """Power of the diameter [1], >= 0: m."""
    per_decade: Carrier = attrs.field(default=0.0, converter=units.pascal, validator=units.not_negative, kw_only=True)
    """Strength lost for ten times the diameter [Pa], >= 0."""

    def __attrs_post_init__(self) -> None:
        if not self.largest > self.smallest:
            raise InputError(f"StrengthSegment.largest must be > smallest ({self.smallest}) m, got {self.largest}")

    @classmethod
    def from_inches(
        cls, smallest: ScalarLike, largest: ScalarLike, *, at_1_inch: ScalarLike, exponent: float
    ) -> StrengthSegment:
        """The power law with its constant stated for 1 inch: A in psi·in^m.

        Parameters
        ----------
        smallest, largest
            Range of diameters [m].
        at_1_inch
            Strength that the law gives at 1 inch [Pa]; ``"201 kpsi"`` as a string.
        exponent
            Power of the diameter [1]: m.
        """
        stress = units.pascal(at_1_inch, "StrengthSegment.at_1_inch")
        return cls(smallest, largest, at_unit_diameter=stress * (INCH * 1e3) ** exponent, exponent=exponent)

    def strength(self, wire: Carrier) -> Carrier:
        """Strength at a diameter [Pa] by this law, whatever its range."""
        d = wire * 1e3
        lg = namespace(wire).log(d) * (1.0 / math.log(10.0))
        return (self.at_unit_diameter - self.per_decade * lg) * d ** (-self.exponent)


def _segments(value: Any) -> tuple[StrengthSegment, ...]:
    segments = (value,) if isinstance(value, StrengthSegment) else tuple(value)
    if not segments or not all(isinstance(segment, StrengthSegment) for segment in segments):
        raise InputTypeError(f"StrengthSet.segments must be StrengthSegment objects, got {value!r}")
    for one, other in itertools.pairwise(segments):
        if not math.isclose(one.largest, other.smallest, rel_tol=1e-6):
            raise InputError(
                f"StrengthSet.segments must follow one another, got {one.largest * 1e3:g} mm before {other.smallest * 1e3:g} mm"
            )
    return segments


@attrs.frozen
class StrengthSet:
    """Constants of tensile strength under the name of the table they come from.

    Segments need not meet: the strength may step down at a joint, which belongs to the thinner side.

    Raises
    ------
    InputError, InputTypeError
        Segments that do not follow one another.
    """

    name: str
    """Name of the table, with its edition."""
    segments: tuple[StrengthSegment, ...] = attrs.field(converter=_segments)
    """The laws, from thin to thick wire; a single one may stand alone."""
    source: str = attrs.field(default="given by the user", kw_only=True)
    """Where the numbers come from and how they were seen."""

    @property
    def range(self) -> tuple[float, float]:
        """Smallest and largest diameter [m]."""
        return self.segments[0].smallest, self.segments[-1].largest

    def strength(self, wire: Carrier) -> Carrier:
        """Tensile strength at a diameter [Pa].

        Raises
        ------
        InputError
            A diameter outside the range, with the range and the name of the set.
        """
        low, high = self.range
        if happens((wire < low * (1.0 - EDGE)) | (wire > high * (1.0 + EDGE))):
            seen = wire if isinstance(wire, float) else np.asarray(wire).flat[0]
            raise InputError(
                f"wire must be from {low * 1e3:g} to {high * 1e3:g} mm for the strengths of {self.name!r}, "
                f"got {float(seen) * 1e3:g} mm; give a strength set of your own for other wire"
            )
        where = namespace(wire).where
        result = self.segments[-1].strength(wire)
        for segment in reversed(self.segments[:-1]):
            result = where(wire <= segment.largest * (1.0 + EDGE), segment.strength(wire), result)
        return result


def _steps(value: Any) -> tuple[tuple[float, Carrier], ...]:
    try:
        return tuple(
            (units.metre(largest, "DiameterSteps.steps"), units.pascal(modulus, "DiameterSteps.steps"))
            for largest, modulus in value
        )
    except (TypeError, ValueError) as error:
        if isinstance(error, InputError | InputTypeError):
            raise
        raise InputTypeError(f"DiameterSteps.steps must be pairs of m and Pa, got {value!r}") from None


@attrs.frozen(field_transformer=units.named_fields)
class DiameterSteps:
    """A modulus that depends on the wire's diameter in steps.

    Raises
    ------
    InputError, UnitError
        Limits that do not increase, or values of another dimension.

    Examples
    --------
    >>> modulus = DiameterSteps([("0.81 mm", "82.7 GPa"), ("1.6 mm", "81.7 GPa")], above="81 GPa")
    >>> modulus.at(0.001) / 1e9
    81.7
    """

    steps: tuple[tuple[float, Carrier], ...] = attrs.field(converter=_steps)
    """Pairs of the largest diameter of a step [m] and its modulus [Pa], from thin to thick."""
    above: Carrier = attrs.field(converter=units.pascal, validator=units.positive, kw_only=True)
    """Modulus of all thicker wire [Pa], > 0."""

    def __attrs_post_init__(self) -> None:
        limits = [largest for largest, _ in self.steps]
        if any(not one < other for one, other in zip([0.0, *limits], limits, strict=False)):
            raise InputError(f"DiameterSteps.steps must have increasing diameters in m, got {limits}")

    def at(self, wire: Carrier) -> Carrier:
        """Modulus at a diameter [Pa]; a limit belongs to the thinner side."""
        where = namespace(wire).where
        result = self.above + 0.0 * wire
        for largest, modulus in reversed(self.steps):
            result = where(wire <= largest * (1.0 + EDGE), modulus, result)
        return result


def as_steps(value: Any) -> DiameterSteps:
    """A modulus as it may be given: steps, or one value for all diameters."""
    return value if isinstance(value, DiameterSteps) else DiameterSteps((), above=value)


def as_strength(value: StrengthSet | StrengthSegment | Iterable[StrengthSegment] | ScalarLike) -> StrengthSet:
    """A strength as it may be given: a set, segments, or one value for all diameters."""
    if isinstance(value, StrengthSet):
        return value
    if isinstance(value, str | float | int) or hasattr(value, "m_as"):
        stress: Any = value
        return StrengthSet("one value", StrengthSegment(0.0, 1.0, at_unit_diameter=stress))
    segments: Any = value
    return StrengthSet("segments given", segments)

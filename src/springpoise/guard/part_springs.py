"""Springs that remember the part they were made from: a coil of wire, a strip, a spiral.

To a mechanism each is what its part is as a spring. A file writes the part, and limits ask it how
far it is from yield, fatigue or buckling.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.springs import (
    CompressionCoil,
    CompressionSpring,
    ExtensionCoil,
    ExtensionSpring,
    Spiral,
    Strip,
    StripSpring,
    TorsionCoil,
    TorsionSpring,
)
from springpoise.units import ScalarLike

__all__ = [
    "CompressionUse",
    "ExtensionUse",
    "PartSpring",
    "SpiralUse",
    "StripUse",
    "TorsionUse",
    "part_and_use",
    "plain",
    "spring_of",
]


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class ExtensionUse:
    """How an extension coil is used."""

    safety: float = attrs.field(default=1.0, converter=units.number, validator=units.positive)
    """Factor by which the load may grow at the longest length [1], > 0: 1 meets the allowable stress itself."""


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class CompressionUse:
    """How a compression coil is used."""

    safety: float = attrs.field(default=1.0, converter=units.number, validator=units.positive)
    """Factor by which the load may grow at the shortest length [1], > 0."""
    clash_allowance: float = attrs.field(default=0.15, converter=units.number, validator=units.not_negative)
    """Load at solid over the greatest load, less 1 [1], >= 0."""


def _winds(value: Any) -> int:
    if isinstance(value, bool) or value not in (1, -1):
        raise InputError(f"TorsionUse.winds must be 1 or -1, got {value!r}")
    return int(value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class TorsionUse:
    """How a torsion coil is used."""

    free_angle: float = attrs.field(default=0.0, converter=units.radian)
    """Angle at which a new coil has no load [rad]."""
    winds: int = attrs.field(default=1, converter=_winds)
    """1 where the coil winds up as the angle grows, -1 where it does as the angle falls."""
    safety: float = attrs.field(default=1.0, converter=units.number, validator=units.positive)
    """Factor by which the moment may grow at the end of the range [1], > 0."""
    arbor: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Diameter of an arbor inside [m]; None for none."""


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class StripUse:
    """How a constant-force strip is used."""

    hysteresis_share: float = attrs.field(converter=units.number, validator=units.not_negative)
    """Half of the difference between pulling out and letting back, over the load [1]."""
    longest: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Greatest length pulled out [m]; None for what leaves 1.5 turns on the drum."""
    gradient: float = attrs.field(default=0.0, converter=units.newton_per_metre)
    """Slope that is built into the strip [N/m]."""
    allowable_stress: float | None = attrs.field(default=None, converter=units.pascal)
    """Greatest permissible stress [Pa]; None for not known."""


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class SpiralUse:
    """How a spiral spring is used."""

    free_angle: float = attrs.field(default=0.0, converter=units.radian)
    """Angle with no load [rad]."""
    working_range: tuple[float, float] | None = attrs.field(default=None, converter=units.optional_radian_pair)
    """Permissible (lowest, highest) angle [rad]; None for not given."""
    allowable_stress: float | None = attrs.field(default=None, converter=units.pascal)
    """Greatest permissible bending stress [Pa]; None for not known."""


class PartSpring:
    """What the springs below share."""

    __slots__ = ()

    part: Any
    use: Any

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> Any:
        """A plain spring with these amounts: it is no longer that of the part."""
        return plain(self).tuned(amounts, preload=preload)


class CoilSpring(PartSpring):
    """What springs of coils share: the wire knows its own slope with temperature."""

    __slots__ = ()

    def at_temperature(self, temperature: ScalarLike) -> Any:
        """The spring of the coil at another temperature [K]."""
        return spring_of(self.part.at_temperature(temperature), use=self.use)


@attrs.frozen
class ExtensionCoilSpring(CoilSpring, ExtensionSpring):  # type: ignore[misc]
    """The spring of an extension coil."""

    part: ExtensionCoil = attrs.field(kw_only=True)
    """The coil."""
    use: ExtensionUse = attrs.field(kw_only=True)
    """How it is used."""


@attrs.frozen
class CompressionCoilSpring(CoilSpring, CompressionSpring):  # type: ignore[misc]
    """The spring of a compression coil."""

    part: CompressionCoil = attrs.field(kw_only=True)
    """The coil."""
    use: CompressionUse = attrs.field(kw_only=True)
    """How it is used."""


@attrs.frozen
class TorsionCoilSpring(CoilSpring, TorsionSpring):  # type: ignore[misc]
    """The spring of a torsion coil."""

    part: TorsionCoil = attrs.field(kw_only=True)
    """The coil."""
    use: TorsionUse = attrs.field(kw_only=True)
    """How it is used."""


@attrs.frozen
class StripPartSpring(PartSpring, StripSpring):
    """The spring of a constant-force strip."""

    part: Strip = attrs.field(kw_only=True)
    """The strip."""
    use: StripUse = attrs.field(kw_only=True)
    """How it is used."""


@attrs.frozen
class SpiralPartSpring(PartSpring, TorsionSpring):
    """The spring of a spiral."""

    part: Spiral = attrs.field(kw_only=True)
    """The spiral."""
    use: SpiralUse = attrs.field(kw_only=True)
    """How it is used."""


class _Made(NamedTuple):
    use: type
    spring: type
    make: Callable[[Any, Any], Any]


_MADE: dict[type, _Made] = {
    ExtensionCoil: _Made(ExtensionUse, ExtensionCoilSpring, lambda coil, use: coil.spring(safety=use.safety)),
    CompressionCoil: _Made(
        CompressionUse,
        CompressionCoilSpring,
        lambda coil, use: coil.spring(safety=use.safety, clash_allowance=use.clash_allowance),
    ),
    TorsionCoil: _Made(
        TorsionUse,
        TorsionCoilSpring,
        lambda coil, use: coil.spring(use.free_angle, winds=use.winds, safety=use.safety, arbor=use.arbor),
    ),
    Strip: _Made(
        StripUse,
        StripPartSpring,
        lambda strip, use: strip.spring(
            hysteresis_share=use.hysteresis_share, longest=use.longest, gradient=use.gradient
        ),
    ),
    Spiral: _Made(
        SpiralUse,
        SpiralPartSpring,
        lambda spiral, use: spiral.spring(free_angle=use.free_angle, working_range=use.working_range),
    ),
}


def spring_of(part: Any, *, use: Any = None, **settings: Any) -> Any:
    """A coil, a strip or a spiral as a spring that remembers it, for a mechanism that is written to a file.

    Parameters
    ----------
    part
        An ``ExtensionCoil``, ``CompressionCoil``, ``TorsionCoil``, ``Strip`` or ``Spiral``.
    use
        How it is used, as an object; or give ``settings``.
    **settings
        Coils: ``safety``, the factor by which the load may grow at the end of the range;
        compression coils also ``clash_allowance``; torsion coils also ``free_angle``, ``winds`` and
        ``arbor``. Strips: ``hysteresis_share``, ``longest``, ``gradient``, ``allowable_stress``.
        Spirals: ``free_angle``, ``working_range``, ``allowable_stress``.

    Returns
    -------
    Spring
        What the part's own ``spring(...)`` gives, with the part.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Something that is no such part, or a setting that it does not have.

    Examples
    --------
    >>> from springpoise.springs import ExtensionCoil
    >>> from springpoise.springs.materials import MUSIC_WIRE
    >>> coil = ExtensionCoil(
    ...     wire="2 mm", mean_diameter="16 mm", body_coils=40, material=MUSIC_WIRE, initial_tension="20 N",
    ...     hook_radius="8 mm", hook_bend_radius="5 mm",
    ... )
    >>> spring = spring_of(coil, safety=1.2)
    >>> round(spring.rate), round(1e3 * spring.longest), spring.part is coil
    (979, 200, True)
    """
    found = _MADE.get(type(part))
    if found is None:
        known = ", ".join(cls.__name__ for cls in _MADE)
        raise InputTypeError(f"part must be one of {known}, got {part!r}")
    if use is None:
        wrong = [name for name in settings if name not in attrs.fields_dict(found.use)]
        if wrong:
            raise InputTypeError(
                f"spring_of a {type(part).__name__} must be given {', '.join(attrs.fields_dict(found.use))}, got {wrong[0]}"
            )
        needed = [f.name for f in attrs.fields(found.use) if f.default is attrs.NOTHING and f.name not in settings]
        if needed:
            raise InputError(f"spring_of a {type(part).__name__} must be given {', '.join(needed)}, got none")
        use = found.use(**settings)
    made = found.make(part, use)
    values = {field.name: getattr(made, field.name) for field in attrs.fields(type(made))}
    return found.spring(**values, part=part, use=use)


def plain(spring: Any) -> Any:
    """The spring without its part; any other spring as it is."""
    if not isinstance(spring, PartSpring):
        return spring
    base = next(cls for cls in type(spring).__mro__[1:] if attrs.has(cls))
    return base(**{field.name: getattr(spring, field.name) for field in attrs.fields(base)})


def part_and_use(cls: type) -> Callable[[Any], tuple[Any, Any] | None]:
    """A function that gives part and use of a spring, where it is still that of a part of this class."""

    def of(spring: Any) -> tuple[Any, Any] | None:
        if not isinstance(spring, PartSpring) or type(spring.part) is not cls:
            return None
        return (spring.part, spring.use) if spring == spring_of(spring.part, use=spring.use) else None

    return of

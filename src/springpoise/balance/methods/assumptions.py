"""What a comparison of methods assumes where nothing better is known: each number may be given."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.springs.rubber import RubberLaw, Yeoh

__all__ = ["LATEX", "MethodAssumptions"]

LATEX = Yeoh(c1="0.23155 MPa", c2="-3.3075 kPa", c3="107.03 Pa", fitted_over=(1.0, 4.4))
"""Latex rubber at 50 °C: fitted to readings of Treloar (1944), Trans. Faraday Soc. 40:59-70, Fig. 4."""


def _share(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if not 0.0 <= value < 1.0:
        raise InputError(f"MethodAssumptions.{attribute.name} must be from 0 to below 1, got {value}")


def _ratio(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if not 0.0 < value < 1.0:
        raise InputError(f"MethodAssumptions.{attribute.name} must be above 0 and below 1, got {value}")


def _above_one(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if not value > 1.0:
        raise InputError(f"MethodAssumptions.{attribute.name} must be > 1, got {value}")


def _stretch(value: Any) -> tuple[float, float]:
    low, high = units.pair(value, "1", "MethodAssumptions.rubber_stretch")
    if not 1.0 <= low < high:
        raise InputError(
            f"MethodAssumptions.rubber_stretch must be (lower, higher) from 1 on, got {(float(low), float(high))}"
        )
    return float(low), float(high)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class MethodAssumptions:
    """Properties of springs, pulleys and rubber in a comparison.

    Defaults are values from memory of what is usual, unless a source is named.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A value out of range or of another dimension.
    """

    pulley_radius: float = attrs.field(default=0.012, converter=units.metre, validator=units.positive)
    """Radius at which the cable runs round a pulley [m], > 0."""
    bearing_friction: float = attrs.field(default=0.005, converter=units.number, validator=units.not_negative)
    """Friction coefficient of the pulley's bearing [1]."""
    bearing_radius: float = attrs.field(default=0.004, converter=units.metre, validator=units.positive)
    """Radius at which it rubs [m]."""
    room_behind_pulley: float = attrs.field(default=0.5, converter=units.metre, validator=units.positive)
    """Length that a spring or tube may have behind its pulley [m]."""
    free_length_ratio: float = attrs.field(default=0.5, converter=units.number, validator=_ratio)
    """Free length of an ordinary extension spring over its greatest length in use [1], behind a pulley too."""
    initial_tension_ratio: float = attrs.field(default=0.1, converter=units.number, validator=_share)
    """Its initial tension over its greatest load in use [1]; on a shaped spool none where its line would be hollow."""
    gas_progression: float = attrs.field(default=1.3, converter=units.number, validator=_above_one)
    """Mean force of a gas spring at full compression over that at full extension [1]."""
    gas_pressure: float = attrs.field(default=8e6, converter=units.pascal, validator=units.positive)
    """Its filling pressure above the atmosphere [Pa]; the rod's diameter follows from the force."""
    gas_friction: float = attrs.field(default=0.09, converter=units.number, validator=_share)
    """Half-band of its seal's friction over its force [1]; a maker plans with 9 % (technical notes)."""
    gas_fittings: float = attrs.field(default=0.05, converter=units.metre, validator=units.not_negative)
    """Length of a gas spring with its rod out beyond twice its stroke [m]."""
    gas_mass: float = attrs.field(default=0.3, converter=units.kilogram, validator=units.not_negative)
    """Mass of a gas spring [kg], for the inertia."""
    rubber_law: RubberLaw = attrs.field(default=LATEX)
    """Law of the rubber; by default latex after Treloar (1944)."""
    rubber_stretch: tuple[float, float] = attrs.field(default=(1.2, 3.0), converter=_stretch)
    """Least and greatest stretch of the rubber [1]."""
    rubber_loop_loss: float = attrs.field(default=0.05, converter=units.number, validator=_share)
    """Share of the work that the rubber loses in a loop [1]; Treloar's latex to stretch 4.7."""
    rubber_energy_share: float = attrs.field(default=0.2, converter=units.number, validator=_share)
    """Share of its stress that does not go with the absolute temperature [1]; see ``RubberTube.at_temperature``."""
    rubber_density: float = attrs.field(
        default=930.0, converter=units.kilogram_per_cubic_metre, validator=units.positive
    )
    """Density of the rubber [kg/m³], for the inertia."""
    wall_ratio: float = attrs.field(default=2.0 / 3.0, converter=units.number, validator=_ratio)
    """Inner over outer diameter of the tube [1]."""
    rate_slope: float = attrs.field(default=-0.25e-3, converter=units.per_kelvin)
    """Relative change of steel springs' load with temperature [1/K]; carbon and low-alloy steel."""
    steel_energy: float = attrs.field(default=100.0, converter=units.number, validator=units.positive)
    """Energy that a steel spring stores at the most for its mass [J/kg], for the inertia."""
    counterweight_radius: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Distance of a counterweight's centre from the pivot [m], > 0; None for the greatest attach radius."""
    drum_radius: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Radius of the drum of a constant-force spring [m], > 0; None for the least attach radius."""
    spool_stretch_ratio: float = attrs.field(default=0.3, converter=units.number, validator=_ratio)
    """Least over greatest stretch of the spring on a shaped spool [1]; less where its line would be hollow."""

    def __attrs_post_init__(self) -> None:
        for name in ("counterweight_radius", "drum_radius"):
            value = getattr(self, name)
            if value is not None and not value > 0.0:
                raise InputError(f"MethodAssumptions.{name} must be > 0 m, got {value}")

"""The gas spring."""

from __future__ import annotations

import functools
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.gas.curve import GasCurve, length_of_ratio, rod_section, warn_of_unusual
from springpoise.springs.gas.forces import GasForces, forces_to_law
from springpoise.springs.gas.state import NITROGEN, GasLaw, IdealGas, filling_left, gas_law, warn_of_temperature
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.units import ScalarLike

__all__ = ["STANDARD_ATMOSPHERE", "GasSpring"]

STANDARD_ATMOSPHERE = 101325.0
"""Pressure of the standard atmosphere [Pa]."""


def _friction(value: Any) -> Any:
    return units.pair(value, "N", "GasSpring.friction")


def _any(condition: Any) -> bool:
    return bool(np.any(np.asarray(condition)))


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class GasSpring:
    """A gas spring: it pushes its end fittings apart with ``A · (p - p_atm)``, A the rod's section.

    ``x`` is the distance between the end fittings and ``c = extended_length - x`` the compression.
    The absolute pressure is ``p0 / (1 - c/gas_length)^n``; the load is negative. Make one with
    :meth:`from_forces` or :meth:`from_pressure`.

    * The load is the mean of both directions. Seal friction is the half-width
      :meth:`hysteresis`: the force is smaller by it while extending and larger while
      compressing, and at rest any force between is held.
    * Beyond full extension (``x > extended_length``) the rod rests on its stop and the load is 0:
      a gas spring does not pull. The load jumps there. Beyond ``stroke`` the load goes on along
      its tangent, so that it stays finite; the working range says so by a negative margin.
    * Temperature is the gas's own. At ``reference_temperature`` the curve is as given; elsewhere
      the pressures at both ends of the stroke follow ``gas`` at constant volume, and the curve
      between is the polytrope through both.
    * ``exponent`` 1, the default, is slow motion at the temperature of the surroundings; quick
      motion comes near the gas's adiabatic exponent, 1.4 for nitrogen at low pressure.
    * Left out: damping by orifice and oil, which acts in motion only; the oil zone at the end of
      the stroke; breakaway after long rest, which exceeds the friction read in motion; the
      settling of about 5 % of the pressure in the first day after filling (makers' notes).

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or values at odds with one another.

    References
    ----------
    Static force and direction rule as in makers' general technical notes; the curve, its
    identification and its energy are derived from the closed volume of gas.

    Examples
    --------
    >>> spring = GasSpring.from_forces(extending=("400 N", "540 N"), compressing=("460 N", "612 N"), offset="10 mm",
    ...     stroke="200 mm", rod_diameter="8 mm", extended_length="500 mm")
    >>> round(spring.load(0.4), 3), round(spring.hysteresis(0.4), 3)
    (-492.512, 33.0)
    >>> round(spring.load_extending(0.4), 3), round(spring.load_compressing(0.4), 3)
    (-459.512, -525.512)
    >>> print(spring.forces(offset="10 mm"))
    four forces, read 10.00 mm from either end of the stroke
                   extending  compressing     mean
      rod out        400.0 N      460.0 N  430.0 N
      rod in         540.0 N      612.0 N  576.0 N
      progression      1.350        1.330    1.340
    """

    filling: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Absolute pressure at full extension and ``reference_temperature`` [Pa], > 0."""
    rod_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Diameter of the rod [m], > 0; the piston's does not matter."""
    gas_length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Volume of the gas at full extension over the rod's section [m], beyond ``stroke``."""
    stroke: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Stroke [m], > 0 and below ``extended_length``."""
    extended_length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Distance between the end fittings, rod fully out [m], > 0."""
    friction: tuple[Carrier, Carrier] = attrs.field(converter=_friction, eq=units.comparable)
    """Half-band of friction (rod out, rod in) [N], read ``offset`` from either end of the stroke."""
    friction_share: Carrier = attrs.field(default=0.0, converter=units.number)
    """Half-band that comes on top, as a share of the mean force [1]."""
    offset: Carrier = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative)
    """Where ``friction`` was read, from either end of the stroke [m], >= 0; it is constant outside."""
    exponent: Carrier = attrs.field(default=1.0, converter=units.number)
    """Polytropic exponent n [1], from 1 (slow motion) to 2."""
    gas: GasLaw = attrs.field(default=NITROGEN, converter=gas_law)
    """How pressure follows temperature: ``"nitrogen"``, ``"ideal"``, or a law of your own."""
    temperature: Carrier = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    """Temperature of the gas, rod out [K]."""
    reference_temperature: Carrier = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    """Temperature at which ``filling`` holds [K]; makers state forces at 20 °C (common practice, no source)."""
    atmospheric_pressure: Carrier = attrs.field(
        default=STANDARD_ATMOSPHERE, converter=units.pascal, validator=units.not_negative
    )
    """Absolute pressure around the spring [Pa], >= 0."""

    def __attrs_post_init__(self) -> None:
        if _any(self.stroke >= self.extended_length):
            raise InputError(
                f"GasSpring.stroke must be < extended_length ({self.extended_length}) m, got {self.stroke}"
            )
        if _any(self.stroke >= self.gas_length):
            raise InputError(
                f"GasSpring.gas_length must be > stroke ({self.stroke}) m, got {self.gas_length}; "
                "the rod cannot displace more than all gas"
            )
        if _any(2.0 * self.offset >= self.stroke):
            raise InputError(f"GasSpring.offset must be < half the stroke ({0.5 * self.stroke}) m, got {self.offset}")
        if _any((self.exponent < 1.0) | (self.exponent > 2.0)):
            raise InputError(f"GasSpring.exponent must be from 1 (slow motion) to 2, got {self.exponent}")
        for value in self.friction:
            if _any((self.friction_share == 0.0) & (value < 0.0)):
                raise InputError(f"GasSpring.friction must be >= 0 N at both ends, got {self.friction}")

    @classmethod
    def from_forces(
        cls,
        *,
        extending: Any,
        compressing: Any,
        stroke: ScalarLike,
        rod_diameter: ScalarLike,
        extended_length: ScalarLike,
        offset: ScalarLike | None = None,
        friction_over: Literal["travel", "force"] = "travel",
        exponent: ScalarLike = 1.0,
        gas: GasLaw | Literal["ideal", "nitrogen"] = "nitrogen",
        reference_temperature: ScalarLike = ROOM_TEMPERATURE,
        atmospheric_pressure: ScalarLike = STANDARD_ATMOSPHERE,
    ) -> GasSpring:
        """The spring that has four measured forces, which it gives back exactly.

        Parameters
        ----------
        extending
            Forces (F1, F2) while extending [N]: near full extension, near full compression.
        compressing
            Forces (F3, F4) at the same places while compressing [N].
        stroke, rod_diameter, extended_length
            As the fields of the class [m].
        offset
            Distance from either end of the stroke at which the forces were read [m].
        friction_over
            How the half-band goes on from the two places at which it is known: ``"travel"``,
            linear in the compression between them and constant outside, and the same at any
            temperature; or ``"force"``, linear in the mean force, and changing with it.
        exponent, gas, reference_temperature, atmospheric_pressure
            As the fields of the class; the reference is the temperature of the readings.

        Raises
        ------
        InputError, UnitError
            No offset; forces that are not positive, do not rise as the rod goes in, or are
            smaller while compressing; a rise that no closed volume of gas can have.
        """
        f1, f2 = units.pair(extending, "N", "GasSpring.extending")
        f3, f4 = units.pair(compressing, "N", "GasSpring.compressing")
        if offset is None:
            raise InputError(
                "GasSpring.offset must be given: the distance in m from either end of the stroke at which the forces "
                "were read; makers use 5 mm for strokes up to 80 mm and 10 mm above, some always 5 mm"
            )
        if friction_over not in {"travel", "force"}:
            raise InputError(f"GasSpring.friction_over must be one of 'travel', 'force', got {friction_over!r}")
        s = units.metre(stroke, "GasSpring.stroke")
        c = units.metre(offset, "GasSpring.offset")
        d = units.metre(rod_diameter, "GasSpring.rod_diameter")
        n = units.number(exponent, "GasSpring.exponent")
        atmosphere = units.pascal(atmospheric_pressure, "GasSpring.atmospheric_pressure")
        filling, gas_length = forces_to_law((f1, f2), (f3, f4), s, c, rod_section(d), n, atmosphere)
        friction, share = (0.5 * (f3 - f1), 0.5 * (f4 - f2)), 0.0
        if friction_over == "force":
            out, inside = 0.5 * (f1 + f3), 0.5 * (f2 + f4)
            share = (friction[1] - friction[0]) / (inside - out)
            friction = (friction[0] - share * out,) * 2
        spring = cls(
            filling=filling,
            rod_diameter=d,
            gas_length=gas_length,
            stroke=s,
            extended_length=extended_length,
            friction=friction,
            friction_share=share,
            offset=c,
            exponent=n,
            gas=gas,
            temperature=reference_temperature,
            reference_temperature=reference_temperature,
            atmospheric_pressure=atmosphere,
        )
        warn_of_unusual(spring._curve, spring.stroke)
        return spring

    @classmethod
    def from_pressure(
        cls,
        *,
        gauge_pressure: ScalarLike,
        rod_diameter: ScalarLike,
        stroke: ScalarLike,
        extended_length: ScalarLike,
        friction: Any = None,
        gas_volume: ScalarLike | None = None,
        progression: ScalarLike | None = None,
        exponent: ScalarLike = 1.0,
        gas: GasLaw | Literal["ideal", "nitrogen"] = "nitrogen",
        reference_temperature: ScalarLike = ROOM_TEMPERATURE,
        atmospheric_pressure: ScalarLike = STANDARD_ATMOSPHERE,
    ) -> GasSpring:
        """The spring of a rod and a filling pressure.

        Parameters
        ----------
        gauge_pressure
            Filling pressure above the atmosphere, rod out, at ``reference_temperature`` [Pa].
        rod_diameter, stroke, extended_length
            As the fields of the class [m].
        friction
            Half-band of friction (rod out, rod in) [N]; 0 is a value, but no real seal has it.
        gas_volume
            Volume of the gas, rod out [m³]; give this or ``progression``.
        progression
            Mean force at full compression over that at full extension [1]. It is not the ratio
            that makers print, which is that of the extending forces some way from the ends.
        exponent, gas, reference_temperature, atmospheric_pressure
            As the fields of the class.

        Raises
        ------
        InputError, UnitError
            A value out of range; no friction; not exactly one of ``gas_volume`` and ``progression``.

        Examples
        --------
        >>> spring = GasSpring.from_pressure(gauge_pressure="4 MPa", rod_diameter="10 mm", stroke="150 mm",
        ...     extended_length="400 mm", friction=(25, 30), progression=1.3)
        >>> round(spring.load(0.400), 3), round(spring.load(0.250), 3)
        (-314.159, -408.407)
        """
        if friction is None:
            raise InputError(
                "GasSpring.friction must be given as (rod out, rod in) in N: half the difference of the forces while "
                "compressing and extending"
            )
        if (gas_volume is None) == (progression is None):
            raise InputError(
                "GasSpring.from_pressure must be given one of gas_volume and progression, got "
                + ("none" if gas_volume is None else "both")
            )
        gauge = units.pascal(gauge_pressure, "GasSpring.gauge_pressure")
        if _any(gauge <= 0.0):
            raise InputError(f"GasSpring.gauge_pressure must be > 0 Pa, got {gauge}")
        s = units.metre(stroke, "GasSpring.stroke")
        d = units.metre(rod_diameter, "GasSpring.rod_diameter")
        n = units.number(exponent, "GasSpring.exponent")
        atmosphere = units.pascal(atmospheric_pressure, "GasSpring.atmospheric_pressure")
        if gas_volume is not None:
            length = units.scalar_si(gas_volume, "m**3", "GasSpring.gas_volume") / rod_section(d)
        else:
            ratio = units.number(0.0 if progression is None else progression, "GasSpring.progression")
            if _any(ratio <= 1.0):
                raise InputError(f"GasSpring.progression must be > 1, got {ratio}")
            length = length_of_ratio(ratio, gauge, atmosphere, s, n)
        spring = cls(
            filling=gauge + atmosphere,
            rod_diameter=d,
            gas_length=length,
            stroke=s,
            extended_length=extended_length,
            friction=friction,
            exponent=n,
            gas=gas,
            temperature=reference_temperature,
            reference_temperature=reference_temperature,
            atmospheric_pressure=atmosphere,
        )
        warn_of_unusual(spring._curve, spring.stroke)
        return spring

    @property
    def rod_area(self) -> Carrier:
        """Section of the rod [m²]."""
        return rod_section(self.rod_diameter)

    @property
    def gas_volume(self) -> Carrier:
        """Volume of the gas at full extension [m³]."""
        return self.rod_area * self.gas_length

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """Distances between the end fittings, rod fully in to fully out [m]."""
        return self.extended_length - self.stroke, self.extended_length

    @functools.cached_property
    def _curve(self) -> GasCurve:
        """The mean force at the present temperature."""
        pressure, n = self.filling, self.exponent
        now, then = self.temperature, self.reference_temperature
        if isinstance(self.gas, IdealGas):
            pressure = pressure * (now / then)
        elif not (isinstance(now, float) and now == then):
            left = 1.0 - self.stroke / self.gas_length
            heat = left ** (1.0 - n)  # quick motion warms the gas by this factor
            pressure = self.gas.at_constant_volume(self.filling, then, now)
            end = self.gas.at_constant_volume(self.filling * left ** (-n), then * heat, now * heat)
            xp = namespace(pressure, end, left)
            n = -xp.log(end / pressure) / xp.log(left)
        return GasCurve(self.rod_area, pressure, self.gas_length, n, self.atmospheric_pressure)

    def _parts(self, x: Carrier) -> tuple[Any, Carrier, Carrier, Carrier]:
        """Namespace, compression, its part within the stroke, and its part beyond."""
        xp = namespace(x, self.extended_length, self.stroke, self.gas_length)
        c = self.extended_length - x
        return xp, c, xp.minimum(xp.maximum(c, 0.0), self.stroke), xp.maximum(c - self.stroke, 0.0)

    def load(self, x: Carrier) -> Carrier:
        """Mean load at ``x`` [N], shape of ``x``; negative, the spring pushes its ends apart."""
        xp, c, inside, beyond = self._parts(x)
        return xp.where(c < 0.0, 0.0, -self._curve.force(inside) - self._curve.rate(self.stroke) * beyond)

    def load_extending(self, x: Carrier) -> Carrier:
        """Load while the spring extends [N]: smaller in size than the mean by the friction."""
        return self.load(x) + self.hysteresis(x)

    def load_compressing(self, x: Carrier) -> Carrier:
        """Load while the spring is compressed [N]: larger in size than the mean by the friction."""
        return self.load(x) - self.hysteresis(x)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m]; positive while the spring pushes, 0 beyond full extension."""
        xp, c, inside, _ = self._parts(x)
        return xp.where(c < 0.0, 0.0, self._curve.rate(inside))

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at and beyond full extension; the exact integral of the load."""
        _, _, inside, beyond = self._parts(x)
        end, rate = self._curve.force(self.stroke), self._curve.rate(self.stroke)
        return self._curve.work(inside) + (end + 0.5 * rate * beyond) * beyond

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the band that seal friction makes at ``x`` [N]; 0 beyond full extension."""
        xp, c, inside, _ = self._parts(x)
        out, rod_in = self.friction
        way = (inside - self.offset) / (self.stroke - 2.0 * self.offset)
        band = (
            out
            + (rod_in - out) * xp.minimum(xp.maximum(way, 0.0), 1.0)
            + self.friction_share * self._curve.force(inside)
        )
        return xp.where(c < 0.0, 0.0, xp.maximum(band, 0.0))

    def forces(self, *, offset: ScalarLike) -> GasForces:
        """The four forces at ``offset`` [m] from either end of the stroke, at the present temperature and filling."""
        c = units.metre(offset, "GasSpring.offset")
        ends = (self.extended_length - c, self.extended_length - self.stroke + c)
        extending, compressing = (
            (-load(ends[0]), -load(ends[1])) for load in (self.load_extending, self.load_compressing)
        )
        return GasForces(extending=extending, compressing=compressing, offset=c)

    def at_temperature(self, temperature: ScalarLike) -> GasSpring:
        """The spring with its gas at another temperature [K]; ``"40 degC"`` as a string.

        Both pressures at the ends of the stroke follow ``gas`` at constant volume from the
        reference temperature, whatever the spring's temperature was before. A warning says when
        the temperature is outside -40 to 80 °C, the range of endurance tests (QC/T 207-1996, as
        excerpted).
        """
        kelvins = units.kelvin(temperature, "temperature")
        warn_of_temperature(kelvins)
        return attrs.evolve(self, temperature=kelvins)

    def after(self, time: ScalarLike, *, filling_loss_per_year: ScalarLike) -> GasSpring:
        """The spring after gas has leaked through its seal.

        Parameters
        ----------
        time
            Time [s]; ``"5 years"`` as a string. Plain numbers below an hour are refused.
        filling_loss_per_year
            Share of its gas, so of its absolute pressure, that it loses each year [1], from 0 to
            below 1. Plan with 0.01 to 0.03 where the maker states nothing (value from memory).
        """
        return attrs.evolve(self, filling=self.filling * filling_left(time, filling_loss_per_year))

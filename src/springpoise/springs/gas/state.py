"""How the pressure of a closed gas follows its temperature: ideal, or by an equation of state."""

from __future__ import annotations

import warnings
from typing import Any, Protocol

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.warnings import GasTemperatureWarning
from springpoise.units import ScalarLike

__all__ = ["GAS_CONSTANT", "NITROGEN", "NITROGEN_VAN_DER_WAALS", "GasLaw", "IdealGas", "PengRobinson", "VanDerWaals"]

GAS_CONSTANT = 8.31446261815324
"""Molar gas constant [J/(mol·K)], exact since 2019 by the definition of the SI."""

_STEPS = 40  # of Newton's method; from far outside any gas spring fewer than ten are needed


class GasLaw(Protocol):
    """One method; a law of your own needs no base class."""

    def at_constant_volume(self, pressure: Carrier, temperature: Carrier, to: Carrier) -> Carrier:
        """Absolute pressure [Pa] at the temperature ``to`` [K] of what has ``pressure`` at ``temperature``."""
        ...


@attrs.frozen
class IdealGas:
    """Absolute pressure proportional to absolute temperature: +3.41 % for 10 K at 20 °C.

    For nitrogen, whose pressure rises more: short by 0.4 % of the pressure for 10 K at 5 MPa, by
    0.8 % at 10 MPa and by 1.1 % at 15 MPa.

    Examples
    --------
    >>> IdealGas().at_constant_volume(4e6, 293.15, 586.3)
    8000000.0
    """

    def at_constant_volume(self, pressure: Carrier, temperature: Carrier, to: Carrier) -> Carrier:
        """Absolute pressure [Pa] at the temperature ``to`` [K] of what has ``pressure`` at ``temperature``."""
        return pressure * (to / temperature)


# Both equations of state are p = (R T/b) y/(1 - y) - (a/b²) y²/(1 + u y + w y²) with the filled
# share y = b/v of the volume; only a, which may depend on T, and the constants u and w differ.


def _pressure(y: Carrier, thermal: Carrier, attraction: Carrier, u: float, w: float) -> Carrier:
    return thermal * y / (1.0 - y) - attraction * y * y / (1.0 + u * y + w * y * y)


def _filled_share(pressure: Carrier, thermal: Carrier, attraction: Carrier, u: float, w: float) -> Carrier:
    """The share y at which the equation of state gives ``pressure``, by Newton's method.

    Above the critical temperature pressure rises with y, so there is one such y.
    """
    xp = namespace(pressure, thermal, attraction)
    y = pressure / (pressure + thermal)  # without attraction
    for _ in range(_STEPS):
        below = 1.0 + u * y + w * y * y
        slope = thermal / ((1.0 - y) * (1.0 - y)) - attraction * y * (2.0 + u * y) / (below * below)
        step = (_pressure(y, thermal, attraction, u, w) - pressure) / slope
        y = xp.minimum(xp.maximum(y - step, 0.5 * y), 0.5 * (1.0 + y))
    return y


def _require_gas(name: str, critical: Carrier, *temperatures: Carrier) -> None:
    for temperature in temperatures:
        if isinstance(temperature, float | np.ndarray) and not np.all(temperature > critical):
            lowest = float(np.min(temperature))
            raise InputError(f"{name} must be above its critical temperature of {critical:.4g} K, got {lowest:.4g}")


def _attraction(value: ScalarLike) -> Any:
    return units.scalar_si(value, "Pa*m**6/mol**2", "VanDerWaals.attraction")


def _covolume(value: ScalarLike) -> Any:
    return units.scalar_si(value, "m**3/mol", "VanDerWaals.covolume")


@attrs.frozen(field_transformer=units.named_fields)
class VanDerWaals:
    """Van der Waals' equation: ``p = R T/(v - b) - a/v²`` with the molar volume v.

    At constant volume the pressure is linear in temperature, with the slope R/(v - b). For
    nitrogen up to 20 MPa and from -40 to 80 °C about 20 °C, the pressure so carried over is
    within 1.1 % of that of a reference equation of state; :class:`PengRobinson` is closer.

    Raises
    ------
    InputError, UnitError
        A constant that is not positive, or of another dimension; a temperature at which the gas
        may be liquid.

    Examples
    --------
    >>> round(NITROGEN_VAN_DER_WAALS.at_constant_volume(10e6, 293.15, 303.15) / 1e6, 4)
    10.4268
    """

    attraction: Carrier = attrs.field(converter=_attraction, validator=units.positive)
    """Constant a [Pa·m⁶/mol²], > 0."""
    covolume: Carrier = attrs.field(converter=_covolume, validator=units.positive)
    """Constant b [m³/mol], > 0."""

    @property
    def critical_temperature(self) -> Carrier:
        """Temperature above which it is always a gas [K]: 8a/(27 R b)."""
        return 8.0 * self.attraction / (27.0 * GAS_CONSTANT * self.covolume)

    def at_constant_volume(self, pressure: Carrier, temperature: Carrier, to: Carrier) -> Carrier:
        """Absolute pressure [Pa] at the temperature ``to`` [K] of what has ``pressure`` at ``temperature``."""
        _require_gas("VanDerWaals temperature", self.critical_temperature, temperature, to)
        per_kelvin = GAS_CONSTANT / self.covolume
        attraction = self.attraction / (self.covolume * self.covolume)
        y = _filled_share(pressure, per_kelvin * temperature, attraction, 0.0, 0.0)
        return pressure + per_kelvin * (to - temperature) * y / (1.0 - y)


@attrs.frozen(field_transformer=units.named_fields)
class PengRobinson:
    """Peng and Robinson's equation: ``p = R T/(v - b) - a(T)/(v² + 2 b v - b²)``.

    a and b follow from the critical point; a(T) falls with temperature by the acentric factor.
    For nitrogen up to 20 MPa and from -40 to 80 °C about 20 °C, the pressure carried over at
    constant volume is within 0.4 % of that of a reference equation of state.

    Raises
    ------
    InputError, UnitError
        A constant that is out of range, or of another dimension; a temperature at which the gas
        may be liquid.

    References
    ----------
    Peng, D.-Y. and Robinson, D. B. (1976), A new two-constant equation of state, Industrial and
    Engineering Chemistry Fundamentals 15(1):59-64.

    Examples
    --------
    >>> round(NITROGEN.at_constant_volume(10e6, 293.15, 303.15) / 1e6, 3)
    10.422
    """

    critical_temperature: Carrier = attrs.field(converter=units.kelvin)
    """Critical temperature [K]."""
    critical_pressure: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Critical pressure [Pa], > 0."""
    acentric_factor: Carrier = attrs.field(converter=units.number)
    """Acentric factor [1]."""

    @property
    def covolume(self) -> Carrier:
        """Constant b [m³/mol]."""
        return 0.07780 * GAS_CONSTANT * self.critical_temperature / self.critical_pressure

    def attraction(self, temperature: Carrier) -> Carrier:
        """Constant a at a temperature [Pa·m⁶/mol²]."""
        w = self.acentric_factor
        kappa = 0.37464 + 1.54226 * w - 0.26992 * w * w
        root = namespace(temperature, self.critical_temperature).sqrt(temperature / self.critical_temperature)
        alpha = (1.0 + kappa * (1.0 - root)) ** 2.0
        rt = GAS_CONSTANT * self.critical_temperature
        return 0.45724 * rt * rt / self.critical_pressure * alpha

    def at_constant_volume(self, pressure: Carrier, temperature: Carrier, to: Carrier) -> Carrier:
        """Absolute pressure [Pa] at the temperature ``to`` [K] of what has ``pressure`` at ``temperature``."""
        _require_gas("PengRobinson temperature", self.critical_temperature, temperature, to)
        b = self.covolume
        y = _filled_share(pressure, GAS_CONSTANT * temperature / b, self.attraction(temperature) / (b * b), 2.0, -1.0)
        return _pressure(y, GAS_CONSTANT * to / b, self.attraction(to) / (b * b), 2.0, -1.0)


NITROGEN = PengRobinson(126.192, 3.3958e6, 0.0372)
"""Nitrogen; critical point and acentric factor as in general property libraries."""

NITROGEN_VAN_DER_WAALS = VanDerWaals(0.1370, 3.87e-5)
"""Nitrogen by van der Waals' equation; both constants are values from memory."""

_BY_NAME: dict[str, GasLaw] = {"ideal": IdealGas(), "nitrogen": NITROGEN}


def gas_law(value: GasLaw | str) -> Any:
    """The law of a name, ``"ideal"`` or ``"nitrogen"``, or a law itself."""
    if isinstance(value, str):
        if value not in _BY_NAME:
            raise InputError(f"GasSpring.gas must be one of 'ideal', 'nitrogen', or a gas law, got {value!r}")
        return _BY_NAME[value]
    if isinstance(value, type) or not callable(getattr(value, "at_constant_volume", None)):
        raise InputTypeError(f"GasSpring.gas must be 'ideal', 'nitrogen' or have at_constant_volume, got {value!r}")
    return value


TESTED = (233.15, 353.15)
"""Temperatures between which the endurance of gas springs is tested [K]: -40 to 80 °C (QC/T 207-1996, as excerpted)."""
_YEAR = 365.25 * 86400.0


def warn_of_temperature(temperature: Carrier) -> None:
    """Warn, on behalf of the caller's caller, of a temperature at which gas springs are not tested."""
    low, high = TESTED
    if isinstance(temperature, float | np.ndarray) and np.any((temperature < low) | (temperature > high)):
        beyond = max(low - float(np.min(temperature)), float(np.max(temperature)) - high)
        warnings.warn(
            f"GasSpring.temperature is {beyond:.3g} K outside -40 to 80 degC, the range in which gas springs are tested",
            GasTemperatureWarning,
            stacklevel=3,
        )


def filling_left(time: ScalarLike, loss_per_year: ScalarLike) -> Any:
    """Share of a filling that is left [1] after ``time`` [s] with a loss each year."""
    seconds = units.second(time, "time")
    if np.any(np.asarray(seconds < 0.0)):
        raise InputError(f"time must be >= 0 s, got {seconds}")
    stated = isinstance(time, str) or hasattr(time, "m_as")
    if not stated and np.any(np.asarray((seconds > 0.0) & (seconds < 3600.0))):
        raise InputError(f"time must be in s, got {seconds}; years? write '{seconds} years'")
    loss = units.number(loss_per_year, "filling_loss_per_year")
    if np.any(np.asarray((loss < 0.0) | (loss >= 1.0))):
        raise InputError(f"filling_loss_per_year must be from 0 to below 1, got {loss}")
    return (1.0 - loss) ** (seconds / _YEAR)

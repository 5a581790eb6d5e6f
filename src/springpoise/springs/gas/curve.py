"""Force, slope and work of a closed volume of gas that a rod enters."""

from __future__ import annotations

import math
import warnings

import attrs
import numpy as np

from springpoise.carriers import Carrier, namespace
from springpoise.springs.warnings import GasPressureWarning, GasProgressionWarning, span

__all__ = ["GasCurve", "warn_of_unusual"]

GAUGE_RANGE = (1.5e6, 20e6)
"""Usual filling pressures above the atmosphere [Pa] (makers' general technical notes)."""
PROGRESSIONS = (1.05, 1.6)
"""Usual ratios of the force at the end of the stroke to that at its start [1] (value from memory)."""


@attrs.frozen
class GasCurve:
    """``F(c) = A · (p / (1 - c/L)^n - p_atm)`` for compressions c from 0 to below L.

    Its work is ``A · (p L w - p_atm c)`` with ``w = ((1 - c/L)^(1 - n) - 1)/(n - 1)``, which is
    ``-log(1 - c/L)`` for n = 1.
    """

    rod_area: Carrier
    """Section of the rod A [m²]."""
    pressure: Carrier
    """Absolute pressure p at c = 0 [Pa]."""
    gas_length: Carrier
    """Volume of the gas at c = 0 over the rod's section, L [m]."""
    exponent: Carrier
    """Polytropic exponent n [1]."""
    atmosphere: Carrier
    """Absolute pressure around p_atm [Pa]."""

    def force(self, c: Carrier) -> Carrier:
        """Force at the compression ``c`` [N]."""
        left, n = 1.0 - c / self.gas_length, self.exponent
        isothermal = isinstance(n, float) and n == 1.0
        raised = self.pressure / left if isothermal else self.pressure * left ** (-n)
        return self.rod_area * (raised - self.atmosphere)

    def rate(self, c: Carrier) -> Carrier:
        """Slope of the force at the compression ``c`` [N/m]."""
        left = 1.0 - c / self.gas_length
        return self.rod_area * self.pressure * self.exponent / self.gas_length * left ** (-1.0 - self.exponent)

    def work(self, c: Carrier) -> Carrier:
        """Work of the force from 0 to the compression ``c`` [J]."""
        xp = namespace(c, self.exponent, self.gas_length)
        shrunk = -xp.log1p(-c / self.gas_length)  # log of the ratio of volumes
        m = self.exponent - 1.0
        if isinstance(m, float):
            w = shrunk if m == 0.0 else xp.expm1(m * shrunk) / m
        else:
            w = xp.where(m == 0.0, shrunk, xp.expm1(m * shrunk) / xp.where(m == 0.0, 1.0, m))
        return self.rod_area * (self.pressure * self.gas_length * w - self.atmosphere * c)


def length_of_ratio(ratio: Carrier, gauge: Carrier, atmosphere: Carrier, stroke: Carrier, exponent: Carrier) -> Carrier:
    """Length of the gas [m] with which the force rises ``ratio`` times over the stroke."""
    pressures = (ratio * gauge + atmosphere) / (gauge + atmosphere)
    return stroke / (1.0 - pressures ** (-1.0 / exponent))


def rod_section(diameter: Carrier) -> Carrier:
    """Section of a rod [m²]."""
    return math.pi / 4.0 * diameter * diameter


def warn_of_unusual(curve: GasCurve, stroke: Carrier) -> None:
    """Warn, on behalf of the caller's caller, of a filling or a rise of the force that is unusual."""
    gauge = np.asarray(curve.pressure - curve.atmosphere)
    low, high = GAUGE_RANGE
    if np.any((gauge < low) | (gauge > high)):
        warnings.warn(
            f"GasSpring.filling is {span(gauge / 1e6)} MPa above the atmosphere, "
            f"outside the usual {low / 1e6:g} to {high / 1e6:g} MPa (makers' notes)",
            GasPressureWarning,
            stacklevel=3,
        )
    ratio = np.asarray(curve.force(stroke) / curve.force(0.0 * stroke))
    low, high = PROGRESSIONS
    if np.any((ratio < low) | (ratio > high)):
        warnings.warn(
            f"GasSpring force rises {span(ratio)} times over the stroke, "
            f"outside the usual {low:g} to {high:g} (value from memory)",
            GasProgressionWarning,
            stacklevel=3,
        )

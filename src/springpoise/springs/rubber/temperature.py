"""Temperature and ageing of rubber.

At fixed stretch a part of the stress goes with the absolute temperature, as the entropy of the
chains does; the rest, the energy share, does not. Numbers for natural rubber cross-linked with
dicumyl peroxide are in :func:`peroxide_cured_modulus`.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.units import ScalarLike

__all__ = ["equivalent_time", "peroxide_cured_energy_share", "peroxide_cured_modulus", "thermal_factor"]

_LOWEST_PARTS = 0.45


def thermal_factor(temperature: ScalarLike, *, energy_share: ScalarLike, reference: ScalarLike) -> Carrier:
    """Stress at a temperature over that at the reference, at the same stretch [1].

    ``share + (1 - share) · T/T₀``. With share 0 this is the ideal law, +0.335 % a kelvin at
    25 °C, which overstates soft latex by about two.

    Parameters
    ----------
    temperature
        Temperature [K]; ``"40 degC"`` as a string.
    energy_share
        Share of the stress at the reference that does not go with temperature [1], 0 to 1.
    reference
        Temperature at which the law holds [K].
    """
    share = units.number(energy_share, "energy_share")
    if np.any(np.asarray((share < 0.0) | (share > 1.0))):
        raise InputError(f"energy_share must be from 0 to 1, got {share}")
    return share + (1.0 - share) * (units.kelvin(temperature, "temperature") / units.kelvin(reference, "reference"))


def _effective_parts(parts: ScalarLike) -> Any:
    value = units.number(parts, "parts")
    if np.any(np.asarray(value < _LOWEST_PARTS)):
        raise InputError(f"parts must be >= {_LOWEST_PARTS} parts per hundred of rubber, got {value}")
    return value - _LOWEST_PARTS


def peroxide_cured_modulus(parts: ScalarLike, temperature: ScalarLike) -> Carrier:
    """Shear modulus of natural rubber cross-linked with dicumyl peroxide [Pa].

    ``G = 0.1 [5.925e-3 (f - 0.45) T + 0.0684 (f - 0.45) + 2.70]`` MPa, T in K.

    Parameters
    ----------
    parts
        Decomposed peroxide f in parts per hundred of rubber [1], from 0.45; measured to 23.8.
    temperature
        Temperature [K].

    References
    ----------
    Wood, L. A. (1976), J. Res. NBS 80A:451, abstract.

    Examples
    --------
    >>> round(peroxide_cured_modulus(2.0, "25 degC"))
    554416
    """
    effective = _effective_parts(parts)
    return 1e5 * (5.925e-3 * effective * units.kelvin(temperature, "temperature") + 0.0684 * effective + 2.70)


def peroxide_cured_energy_share(parts: ScalarLike, temperature: ScalarLike) -> Carrier:
    """Energy share of the same rubber at a temperature [1], from :func:`peroxide_cured_modulus`.

    Examples
    --------
    >>> round(peroxide_cured_energy_share(2.0, "25 degC"), 2)
    0.51
    """
    effective = _effective_parts(parts)
    return 1e5 * (0.0684 * effective + 2.70) / peroxide_cured_modulus(parts, temperature)


def equivalent_time(
    time: ScalarLike, *, tested_at: ScalarLike, used_at: ScalarLike, doubling_step: float = 10.0
) -> Carrier:
    """Time in use that ages rubber as much as ``time`` in a warm test [s].

    Oxidation runs twice as fast with every ``doubling_step``; so an oven test of a few weeks tells
    of years. Nothing is known from it about ozone, light or oil, each of which may act first, and
    it must not be stretched over more than some tens of kelvin. Natural latex is good for at most
    70 °C in continuous use (specification sheet of latex tubing, after A-A-50247C).

    Parameters
    ----------
    time
        Time in the test [s].
    tested_at, used_at
        Temperatures of the test and in use [K].
    doubling_step
        Rise of temperature that doubles the rate [K]; 10 K is a value from memory.

    Examples
    --------
    >>> equivalent_time("7 days", tested_at="70 degC", used_at="20 degC") / 86400.0
    224.0
    """
    if not doubling_step > 0.0:
        raise InputError(f"doubling_step must be > 0 K, got {doubling_step}")
    rise = units.kelvin(tested_at, "tested_at") - units.kelvin(used_at, "used_at")
    return units.second(time, "time") * 2.0 ** (rise / doubling_step)

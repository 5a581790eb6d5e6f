"""When a compression coil bows out, from its moduli and how its ends are held.

``y = L0 C1 [1 - sqrt(1 - C2/λ²)]`` with ``λ = α L0/D``, ``C1 = E/[2 (E - G)]`` and
``C2 = 2 π² (E - G)/(2 G + E)``. Where C2 >= λ² no shortening makes the coil bow. No constant
stands for these two: what is often printed for steel overstates the stable length of thick wire
by several percent.

Source: Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed.
"""

from __future__ import annotations

import math
from typing import Any

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError

__all__ = ["END_CONDITIONS", "GUIDED", "critical_shortening", "elastic_constants", "end_condition", "stable_length"]

GUIDED = "guided"
"""Support of a coil on a rod or in a bore: it cannot bow out, it rubs instead."""

END_CONDITIONS = {
    "both ends flat": 0.5,
    "one end flat, one pivoted": 0.707,
    "both ends pivoted": 1.0,
    "one end fixed, one free": 2.0,
}
"""How the ends are held, and the factor α [1]: flat means squared on a flat, parallel seat."""


def elastic_constants(young: Carrier, shear: Carrier) -> tuple[Carrier, Carrier]:
    """The two constants C1 and C2 [1], for Young's above shear modulus."""
    return 0.5 * young / (young - shear), 2.0 * math.pi**2 * (young - shear) / (2.0 * shear + young)


def critical_shortening(
    free_length: Carrier, mean_diameter: Carrier, alpha: Carrier, young: Carrier, shear: Carrier
) -> Carrier:
    """Shortening at which the coil bows out [m]; infinite where none does."""
    c1, c2 = elastic_constants(young, shear)
    slenderness = alpha * free_length / mean_diameter
    rest = 1.0 - c2 / (slenderness * slenderness)
    xp = namespace(rest)
    return xp.where(rest > 0.0, free_length * c1 * (1.0 - xp.sqrt(xp.where(rest > 0.0, rest, 0.0))), math.inf)


def stable_length(mean_diameter: Carrier, alpha: Carrier, young: Carrier, shear: Carrier) -> Carrier:
    """Free length below which no shortening makes the coil bow out [m]: (π D/α) sqrt[2 (E - G)/(2 G + E)]."""
    _, c2 = elastic_constants(young, shear)
    return mean_diameter / alpha * namespace(c2).sqrt(c2)


def end_condition(value: Any, name: str) -> Any:
    """A support as it may be given: ``"guided"``, an end condition by name, or α itself; None for not given."""
    if value is None or value == GUIDED:
        return value
    if isinstance(value, str):
        if value in END_CONDITIONS:
            return value
        known = ", ".join(map(repr, (*END_CONDITIONS, GUIDED)))
        raise InputError(f"{name} must be one of {known}, or the factor alpha as a number, got {value!r}")
    alpha = units.number(value, name)
    if not isinstance(alpha, float):
        raise InputTypeError(f"{name} must be a single factor alpha, got {value!r}")
    if not alpha > 0.0:
        raise InputError(f"{name} must be > 0, got {alpha}")
    return alpha


def alpha_of(support: Any) -> float:
    """The factor α of an end condition."""
    return END_CONDITIONS[support] if isinstance(support, str) else float(support)

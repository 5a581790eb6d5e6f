"""What a stress-stretch law is to the rest of the library, and what the laws share.

Rubber is taken as incompressible and pulled along one axis. With stretch λ = length / free length,
``g = λ - λ⁻²`` and the invariants ``I₁ = λ² + 2/λ`` and ``I₂ = 2 λ + λ⁻²``. Stress is nominal:
force over the unstretched cross-section.
"""

from __future__ import annotations

import math
from typing import Any, Protocol

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError

__all__ = [
    "FirstInvariantLaw",
    "RubberLaw",
    "admitted",
    "first_invariant_rise",
    "fitted_over_of",
    "fitted_range",
    "highest_stretch_of",
    "increasing",
    "pull",
    "pull_slope",
    "second_invariant_rise",
]


class RubberLaw(Protocol):
    """Three methods of the stretch; a law of your own needs no base class.

    Two more members are used where a law has them: ``fitted_over``, the stretches (lowest,
    highest) over which it was fitted, or None; and ``highest_stretch``, beyond which it has no
    value.
    """

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa]: force over unstretched cross-section; zero at stretch 1."""
        ...

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        ...

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], whose slope is the stress; zero at stretch 1."""
        ...


def fitted_over_of(law: RubberLaw) -> tuple[float, float] | None:
    """The law's own fitted range of stretch, or None where it states none."""
    own: tuple[float, float] | None = getattr(law, "fitted_over", None)
    return own


def highest_stretch_of(law: RubberLaw) -> Carrier:
    """The stretch beyond which the law has no value, or infinity where it states none."""
    return getattr(law, "highest_stretch", math.inf)


def fitted_range(value: Any) -> tuple[float, float] | None:
    """Converter: a range (lowest, highest) of stretch [1], or None for "not given"."""
    if value is None:
        return None
    low, high = units.pair(value, "1", "range of stretch")
    return float(low), float(high)


def increasing(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator of a range of stretch: above zero, the lower one first."""
    if value is not None and not np.all(np.asarray((value[0] > 0.0) & (value[0] < value[1]))):
        hint = "; stretch is length over free length, 1 at rest" if np.any(np.asarray(value[0]) <= 0.0) else ""
        raise InputError(
            f"{type(instance).__name__}.{attribute.name} must be stretches (lower, higher) above 0, got {value}{hint}"
        )


def admitted(stretch: Carrier) -> Carrier:
    """The stretch itself, NaN where it is not positive."""
    return namespace(stretch).where(stretch > 0.0, stretch, math.nan)


def pull(stretch: Carrier) -> Carrier:
    """Pull g = λ - λ⁻², the stretch's part in all laws; half the slope of I₁."""
    return stretch - 1.0 / (stretch * stretch)


def pull_slope(stretch: Carrier) -> Carrier:
    """Slope of g over the stretch."""
    return 1.0 + 2.0 / (stretch * stretch * stretch)


def first_invariant_rise(stretch: Carrier) -> Carrier:
    """I₁ - 3 = (λ - 1)² (λ + 2) / λ, in a form that does not cancel near stretch 1."""
    strain = stretch - 1.0
    return strain * strain * (stretch + 2.0) / stretch


def second_invariant_rise(stretch: Carrier) -> Carrier:
    """I₂ - 3 = (λ - 1)² (2 λ + 1) / λ², in a form that does not cancel near stretch 1."""
    strain = stretch - 1.0
    return strain * strain * (2.0 * stretch + 1.0) / (stretch * stretch)


def stretch_at_first_invariant(rise: Carrier) -> Carrier:
    """The stretch above 1 at which I₁ - 3 is ``rise``: the largest root of λ³ - (3 + rise) λ + 2."""
    invariant = 3.0 + rise
    xp = namespace(invariant)
    ratio = 3.0 / invariant
    return 2.0 * xp.sqrt(invariant / 3.0) * xp.cos(xp.acos(-ratio * xp.sqrt(ratio)) / 3.0)


class FirstInvariantLaw:
    """A law whose energy depends on ``J = I₁ - 3`` alone: stress = 2 g dW/dJ."""

    __slots__ = ()

    def _energy(self, rise: Carrier) -> Carrier:
        raise NotImplementedError

    def _first(self, rise: Carrier) -> Carrier:
        raise NotImplementedError

    def _second(self, rise: Carrier) -> Carrier:
        raise NotImplementedError

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section; NaN where the law has no value."""
        stretch = admitted(stretch)
        return 2.0 * pull(stretch) * self._first(first_invariant_rise(stretch))

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        stretch = admitted(stretch)
        rise, g = first_invariant_rise(stretch), pull(stretch)
        return 2.0 * pull_slope(stretch) * self._first(rise) + 4.0 * g * g * self._second(rise)

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], zero at stretch 1."""
        return self._energy(first_invariant_rise(admitted(stretch)))

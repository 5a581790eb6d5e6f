"""Ogden's law, a sum of powers of the stretch."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.rubber.law import admitted, fitted_range, increasing

__all__ = ["Ogden"]


def _several(value: Any, unit: str, name: str) -> tuple[Any, ...]:
    if isinstance(value, str | bytes | dict | set) or not hasattr(value, "__iter__"):
        raise InputTypeError(f"{name} must be a list with one value a term, got {value!r}")
    return tuple(units.scalar_si(item, unit, name) for item in value)


def _moduli(value: Any) -> tuple[Any, ...]:
    return _several(value, "Pa", "Ogden.mu")


def _exponents(value: Any) -> tuple[Any, ...]:
    return _several(value, "1", "Ogden.alpha")


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class Ogden:
    """Ogden's law of 1972: ``stress = Σ mu_i (λ^(alpha_i - 1) - λ^(-alpha_i/2 - 1))``.

    Energy density ``Σ mu_i/alpha_i (λ^alpha_i + 2 λ^(-alpha_i/2) - 3)``. The shear modulus at small
    strain is ``½ Σ mu_i alpha_i``. Many finite-element programs write the energy with
    ``2 mu_i/alpha_i²`` instead: their mu_i is ``mu_i alpha_i / 2`` of this one; convert with
    :meth:`from_finite_element`.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Lists that are empty or of unequal length, a zero exponent, a modulus that is not positive
        at small strain, or a value of another dimension.

    Examples
    --------
    >>> law = Ogden(mu=["0.61803 MPa", "1.18 kPa", "-9.81 kPa"], alpha=[1.3, 5.0, -2.0])
    >>> round(law.shear_modulus, 1)
    414479.5
    """

    mu: tuple[Carrier, ...] = attrs.field(converter=_moduli, eq=units.comparable)
    """Coefficient of each term [Pa]."""
    alpha: tuple[Carrier, ...] = attrs.field(converter=_exponents, eq=units.comparable)
    """Exponent of each term [1], not 0."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    def __attrs_post_init__(self) -> None:
        if not self.mu or len(self.mu) != len(self.alpha):
            raise InputError(
                f"Ogden.alpha must have as many terms as Ogden.mu, at least 1, got {len(self.alpha)} for {len(self.mu)}"
            )
        if any(np.any(np.asarray(exponent == 0.0)) for exponent in self.alpha):
            raise InputError(f"Ogden.alpha must be other than 0, got {self.alpha}")
        if np.any(np.asarray(self.shear_modulus <= 0.0)):
            raise InputError(
                f"Ogden must have a shear modulus ½ Σ mu·alpha > 0 Pa, got {self.shear_modulus}; "
                "is mu of another convention?"
            )

    @classmethod
    def from_finite_element(cls, *, mu: Any, alpha: Any, fitted_over: tuple[float, float] | None = None) -> Ogden:
        """The law from coefficients of the other convention, ``W = Σ 2 mu_i/alpha_i² (...)``.

        Parameters
        ----------
        mu
            Coefficient of each term in that convention [Pa]; their sum is the shear modulus.
        alpha
            Exponent of each term [1].
        fitted_over
            Stretches (lowest, highest) over which the law was fitted [1].
        """
        moduli, exponents = _moduli(mu), _exponents(alpha)
        if len(moduli) != len(exponents) or any(np.any(np.asarray(exponent == 0.0)) for exponent in exponents):
            return cls(mu=moduli, alpha=exponents)  # which says what is wrong
        converted = [2.0 * m / a for m, a in zip(moduli, exponents, strict=True)]
        return cls(mu=converted, alpha=exponents, fitted_over=fitted_over)

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]: ½ Σ mu·alpha."""
        return sum((0.5 * m * a for m, a in self._terms()), 0.0)

    def _terms(self) -> list[tuple[Carrier, Carrier]]:
        return list(zip(self.mu, self.alpha, strict=True))

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section."""
        stretch = admitted(stretch)
        total: Carrier = 0.0
        for m, a in self._terms():
            pow = namespace(stretch, a).pow
            total = total + m * (pow(stretch, a - 1.0) - pow(stretch, -0.5 * a - 1.0))
        return total

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        stretch = admitted(stretch)
        total: Carrier = 0.0
        for m, a in self._terms():
            pow = namespace(stretch, a).pow
            by_first = (a - 1.0) * pow(stretch, a - 2.0)
            total = total + m * (by_first + (0.5 * a + 1.0) * pow(stretch, -0.5 * a - 2.0))
        return total

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], zero at stretch 1."""
        stretch = admitted(stretch)
        total: Carrier = 0.0
        for m, a in self._terms():
            pow = namespace(stretch, a).pow
            total = total + m / a * (pow(stretch, a) + 2.0 * pow(stretch, -0.5 * a) - 3.0)
        return total

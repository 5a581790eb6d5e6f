"""Softening of rubber by an earlier stretch."""

from __future__ import annotations

import functools
import math
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.rubber.error_function import erf_from_zero, erf_integral
from springpoise.springs.rubber.law import RubberLaw, fitted_over_of, highest_stretch_of

__all__ = ["Softened"]


def _above_one(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if isinstance(value, float | np.ndarray) and not np.all(np.asarray(value) > 1.0):
        raise InputError(f"{type(instance).__name__}.{attribute.name} must be > 1, got {value}")


@attrs.frozen(field_transformer=units.named_fields)
class Softened:
    """A law after rubber has been stretched to ``to_stretch``: stress = η · stress of the fresh law.

    ``η = 1 - erf((Wmax - W)/m) / r`` below ``to_stretch``, with the fresh law's energy density ``W``
    there and ``Wmax`` at ``to_stretch``; above it, the fresh law. Its energy is the exact integral.
    This is the pseudo-elastic model of the unloading branch with a constant ``m``; ``r`` and ``m``
    are fitted to loops of the compound at hand, and there are no values that hold for rubber in
    general. Pure gum softens considerably too (Harwood, Mullins and Payne 1965, J. Appl. Polym.
    Sci. 9). Preconditioning to 1.2 times the service stretch, 5 to 10 times, is a value from memory.

    Raises
    ------
    InputError, UnitError
        ``to_stretch`` or ``r`` not above 1, ``m`` not positive, or a value of another dimension.

    Examples
    --------
    >>> from springpoise.springs.rubber import NeoHookean
    >>> fresh = NeoHookean(mu="0.4 MPa")
    >>> soft = Softened(fresh, to_stretch=3.0, r=2.0, m="0.5 MPa")
    >>> round(soft.stress(2.0) / fresh.stress(2.0), 4), soft.stress(3.0) == fresh.stress(3.0)
    (0.5041, True)
    """

    law: RubberLaw
    """The fresh law."""
    to_stretch: Carrier = attrs.field(converter=units.number, validator=_above_one, kw_only=True)
    """Largest earlier stretch [1], > 1."""
    r: Carrier = attrs.field(converter=units.number, validator=_above_one, kw_only=True)
    """How little is lost [1], > 1: at most the share 1/r of the stress."""
    m: Carrier = attrs.field(converter=units.pascal, validator=units.positive, kw_only=True)
    """Energy density over which the loss builds up [J/m³ or Pa], > 0."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.isnan(np.asarray(self.law.energy_density(self.to_stretch)))):
            raise InputError(
                f"Softened.to_stretch must be < {highest_stretch_of(self.law)}, where the law ends, got {self.to_stretch}"
            )

    @property
    def fitted_over(self) -> tuple[float, float] | None:
        """The range of the fresh law [1]."""
        return fitted_over_of(self.law)

    @property
    def highest_stretch(self) -> Carrier:
        """``to_stretch`` [1]: a longer stretch softens the rubber further."""
        return self.to_stretch

    @functools.cached_property
    def _largest(self) -> Carrier:
        return self.law.energy_density(self.to_stretch)

    def _away(self, energy: Carrier) -> Carrier:
        return namespace(energy, self._largest, self.m).maximum((self._largest - energy) / self.m, 0.0)

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section."""
        return self.law.stress(stretch) * (1.0 - erf_from_zero(self._away(self.law.energy_density(stretch))) / self.r)

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        energy, stress = self.law.energy_density(stretch), self.law.stress(stretch)
        z = self._away(energy)
        xp = namespace(z)
        hardening = xp.where(z > 0.0, 2.0 / math.sqrt(math.pi) / (self.r * self.m) * xp.exp(-z * z), 0.0)
        return self.law.tangent(stretch) * (1.0 - erf_from_zero(z) / self.r) + stress * stress * hardening

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], the integral of the softened stress from stretch 1."""
        energy = self.law.energy_density(stretch)
        lost = erf_integral(self._largest / self.m) - erf_integral(self._away(energy))
        return energy - self.m / self.r * lost

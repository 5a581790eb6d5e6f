"""Any law, some times as stiff."""

from __future__ import annotations

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.springs.rubber.law import RubberLaw, fitted_over_of, highest_stretch_of

__all__ = ["Stiffened"]


@attrs.frozen(field_transformer=units.named_fields)
class Stiffened:
    """``factor`` times the stress of another law at the same stretch: temperature, ageing.

    Raises
    ------
    InputError
        A factor that is not positive and finite.
    """

    law: RubberLaw
    """The law that is scaled."""
    factor: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """How many times as stiff [1], > 0."""

    @property
    def fitted_over(self) -> tuple[float, float] | None:
        """The range of the law itself [1]."""
        return fitted_over_of(self.law)

    @property
    def highest_stretch(self) -> Carrier:
        """The highest stretch of the law itself [1]."""
        return highest_stretch_of(self.law)

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section."""
        return self.factor * self.law.stress(stretch)

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        return self.factor * self.law.tangent(stretch)

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], zero at stretch 1."""
        return self.factor * self.law.energy_density(stretch)

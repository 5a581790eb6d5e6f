"""Any spring, some times as strong."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.springs.protocol import LoadTerms, Spring, hysteresis_of, spring_like, working_range_of

__all__ = ["ScaledSpring"]


def _spring(value: Any) -> Any:
    return spring_like(value, "ScaledSpring.spring")


@attrs.frozen(field_transformer=units.named_fields)
class ScaledSpring:
    """``factor`` times the load of another spring, at the same length.

    This is how a solver sizes a spring of your own of which it knows nothing but its load.

    Raises
    ------
    InputError, InputTypeError
        A factor that is not positive and finite, or an object that lacks a spring's methods.
    """

    spring: Spring = attrs.field(converter=_spring)
    """The spring that is scaled."""
    factor: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """How many times as strong [1], > 0; need not be whole."""

    @property
    def working_range(self) -> tuple[float, float]:
        """The working range of the spring itself [m or rad]."""
        return working_range_of(self.spring)

    def load(self, x: Carrier) -> Carrier:
        """Load at ``x`` [N, or N·m]; positive pulls the ends together."""
        return self.factor * self.spring.load(x)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m, or N·m/rad]."""
        return self.factor * self.spring.stiffness(x)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J]."""
        return self.factor * self.spring.energy(x)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band at ``x`` [N, or N·m]."""
        return self.factor * hysteresis_of(self.spring, x)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: the factor."""
        return LoadTerms(0.0 * x, (self.spring.load(x),), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> ScaledSpring:
        """The same spring with this factor."""
        return ScaledSpring(self.spring, amounts[0])

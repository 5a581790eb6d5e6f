"""The constant-force spring."""

from __future__ import annotations

import math

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["ConstantForceSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class ConstantForceSpring:
    """A spring that pulls with the same force at every length.

    Raises
    ------
    InputError, UnitError
        A pull that is not positive and finite, or of another dimension.

    Examples
    --------
    >>> ConstantForceSpring("25 N").load(0.3)
    25.0
    """

    pull: Carrier = attrs.field(converter=units.newton, validator=units.positive)
    """Force [N], > 0."""

    @property
    def working_range(self) -> tuple[float, float]:
        """Lengths at which the spring pulls [m]: from 0 on."""
        return 0.0, math.inf

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], shape of ``x``; positive pulls the ends together."""
        return self.pull + 0.0 * x

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load [N/m]: 0."""
        return 0.0 * x

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at zero length."""
        return self.pull * x

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]: zero, the spring is ideal."""
        return 0.0 * x

    def at_temperature(
        self, temperature: ScalarLike, *, pull_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> ConstantForceSpring:
        """The spring at another temperature [K]; ``pull_slope`` is the relative change of its pull [1/K]."""
        return ConstantForceSpring(self.pull * warmed(temperature, pull_slope, reference, "pull_slope"))

    def after(self, *, load_loss: ScalarLike) -> ConstantForceSpring:
        """The spring after it has lost the share ``load_loss`` [1] of its pull."""
        return ConstantForceSpring(self.pull * remaining(load_loss))

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: the pull."""
        return LoadTerms(0.0 * x, (1.0 + 0.0 * x,), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> ConstantForceSpring:
        """The spring with this pull."""
        return ConstantForceSpring(amounts[0])

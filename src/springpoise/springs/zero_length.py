"""The ideal spring of static balancing: its load is proportional to its whole length."""

from __future__ import annotations

import math

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["ZeroLengthSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class ZeroLengthSpring:
    """A spring of zero free length: ``load = rate · x`` from ``x = 0`` on, slack below.

    It stands for a spring behind a pulley or an eyelet with its own length hidden, for one wound
    with that much initial tension, or for rubber in its middle range.

    Raises
    ------
    InputError, UnitError
        A rate that is not positive and finite, or of another dimension.

    Examples
    --------
    >>> spring = ZeroLengthSpring(rate="3 N/mm")
    >>> spring.load(0.05), spring.energy(0.05)
    (150.0, 3.75)
    """

    rate: Carrier = attrs.field(converter=units.newton_per_metre, validator=units.positive)
    """Spring rate [N/m], > 0; an array broadcasts against the poses."""

    @property
    def working_range(self) -> tuple[float, float]:
        """Lengths at which the spring pulls [m]: from 0 on."""
        return 0.0, math.inf

    @property
    def effective_free_length(self) -> float:
        """Length at which the straight part of the load line meets zero [m]: 0."""
        return 0.0

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], shape of ``x``; positive pulls the ends together."""
        return self.rate * namespace(x, self.rate).maximum(x, 0.0)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m]."""
        return namespace(x, self.rate).where(x >= 0.0, self.rate, 0.0)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at zero length."""
        stretch = namespace(x, self.rate).maximum(x, 0.0)
        return 0.5 * self.rate * stretch * stretch

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]: zero, the spring is ideal."""
        return 0.0 * x

    def at_temperature(
        self, temperature: ScalarLike, *, rate_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> ZeroLengthSpring:
        """The spring at another temperature.

        Parameters
        ----------
        temperature
            Temperature [K]; ``"40 degC"`` as a string.
        rate_slope
            Relative change of the rate with temperature [1/K]. About -0.25e-3 for carbon and
            low-alloy steel, -0.4e-3 for stainless steel and copper alloys (values from memory).
        reference
            Temperature at which this spring's values hold [K].
        """
        return ZeroLengthSpring(self.rate * warmed(temperature, rate_slope, reference, "rate_slope"))

    def after(self, *, load_loss: ScalarLike) -> ZeroLengthSpring:
        """The spring after it has lost the share ``load_loss`` [1] of its load at every length."""
        return ZeroLengthSpring(self.rate * remaining(load_loss))

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: the rate."""
        return LoadTerms(0.0 * x, (namespace(x).maximum(x, 0.0),), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> ZeroLengthSpring:
        """The spring with this rate."""
        return ZeroLengthSpring(amounts[0])

"""The load of a constant-force strip: it builds up over the first part of the pull."""

from __future__ import annotations

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["StripSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class StripSpring:
    """A strip coiled on a drum, pulled out by ``x``: full force from ``take_up`` on.

    The load rises linearly from 0 at ``x = 0`` to ``pull`` at ``take_up``, then follows
    ``pull + gradient · (x - take_up)`` up to ``longest``, and stays at its last value beyond. How
    the force builds up below ``take_up`` depends on the drum and is only indicated by the ramp,
    and beyond ``longest`` the strip leaves its drum: the working range lies between.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension; ``longest`` not beyond ``take_up``; a
        gradient that takes the load to zero before ``longest``.

    Examples
    --------
    >>> spring = StripSpring("20 N", take_up="50 mm", longest="800 mm", hysteresis_share=0.05)
    >>> spring.load(0.025), spring.load(0.4), spring.hysteresis(0.4)
    (10.0, 20.0, 1.0)
    """

    pull: Carrier = attrs.field(converter=units.newton, validator=units.positive)
    """Load at ``take_up`` [N], > 0: the middle of pulling out and letting back."""
    take_up: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Length to be pulled out before the full force is there [m], > 0."""
    longest: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Greatest length that may be pulled out [m], beyond ``take_up``."""
    hysteresis_share: Carrier = attrs.field(converter=units.number, validator=units.not_negative, kw_only=True)
    """Half of the difference between pulling out and letting back, over the load between them [1], >= 0 and below 1.

    The whole difference is 0.05 to 0.15 for common strips (value from memory), so this is about
    0.025 to 0.075.
    """
    gradient: Carrier = attrs.field(default=0.0, converter=units.newton_per_metre, kw_only=True)
    """Slope that is built into the strip [N/m]; slightly negative or positive."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.asarray(self.longest <= self.take_up)):
            raise InputError(f"StripSpring.longest must be > take_up ({self.take_up}) m, got {self.longest}")
        if np.any(np.asarray(self.hysteresis_share >= 1.0)):
            raise InputError(f"StripSpring.hysteresis_share must be >= 0 and < 1, got {self.hysteresis_share}")
        least = -self.pull / (self.longest - self.take_up)
        if np.any(np.asarray(self.gradient <= least)):
            raise InputError(
                f"StripSpring.gradient must be > {least} N/m, got {self.gradient}; the load would end before longest"
            )

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """Lengths pulled out at which the full force is there [m]."""
        return self.take_up, self.longest

    def _parts(self, x: Carrier) -> tuple[Carrier, Carrier, Carrier]:
        """Lengths pulled out: on the ramp, with full force, and in excess."""
        xp = namespace(x, self.take_up, self.longest)
        on_ramp = xp.minimum(xp.maximum(x, 0.0), self.take_up)
        full = xp.maximum(xp.minimum(x, self.longest) - self.take_up, 0.0)
        return on_ramp, full, xp.maximum(x - self.longest, 0.0)

    def load(self, x: Carrier) -> Carrier:
        """Load with ``x`` pulled out [N], shape of ``x``; positive pulls back, 0 for a strip that hangs slack."""
        on_ramp, full, _ = self._parts(x)
        return self.pull * (on_ramp / self.take_up) + self.gradient * full

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load [N/m]: the ramp's, then the gradient."""
        xp = namespace(x, self.take_up, self.longest, self.pull, self.gradient)
        beyond = xp.where(x > self.longest, 0.0 * x, self.gradient + 0.0 * x)
        return xp.where(x < 0.0, 0.0 * x, xp.where(x < self.take_up, self.pull / self.take_up + 0.0 * x, beyond))

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero with nothing pulled out; the exact integral of the load."""
        on_ramp, full, excess = self._parts(x)
        ramp = 0.5 * self.pull * on_ramp * (on_ramp / self.take_up)
        last = self.pull + self.gradient * (self.longest - self.take_up)
        return ramp + (self.pull + 0.5 * self.gradient * full) * full + last * excess

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the band between pulling out and letting back at ``x`` [N]."""
        return self.hysteresis_share * self.load(x)

    def at_temperature(
        self, temperature: ScalarLike, *, pull_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> StripSpring:
        """The spring at another temperature [K]; ``pull_slope`` is the relative change of its load [1/K]."""
        return self._scaled(warmed(temperature, pull_slope, reference, "pull_slope"))

    def after(self, *, load_loss: ScalarLike) -> StripSpring:
        """The spring after it has lost the share ``load_loss`` [1] of its load."""
        return self._scaled(remaining(load_loss))

    def _scaled(self, factor: Carrier) -> StripSpring:
        return attrs.evolve(self, pull=self.pull * factor, gradient=self.gradient * factor)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: the pull. The gradient grows with it."""
        return LoadTerms(0.0 * x, (self.load(x) / self.pull,), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> StripSpring:
        """The spring with this pull, and a gradient in proportion."""
        return self._scaled(amounts[0] / self.pull)

"""The close-wound extension spring with initial tension."""

from __future__ import annotations

import math

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["ExtensionSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class ExtensionSpring:
    """An extension spring: ``load = initial_tension + rate · (x - free_length)``, slack below.

    ``x`` is measured inside the hooks, as ``free_length`` is. At or below its free length the
    spring is slack and has no load: the initial tension holds the coils shut and is not felt
    outside.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or ``longest`` not beyond ``free_length``.

    Examples
    --------
    >>> spring = ExtensionSpring("1.2 N/mm", free_length="120 mm", initial_tension="18 N", longest="310 mm")
    >>> round(spring.load(0.200), 9), spring.load(0.100)
    (114.0, 0.0)
    >>> round(spring.effective_free_length, 9)
    0.105
    """

    rate: Carrier = attrs.field(converter=units.newton_per_metre, validator=units.positive)
    """Spring rate [N/m], > 0."""
    free_length: Carrier = attrs.field(converter=units.metre, validator=units.not_negative, kw_only=True)
    """Length inside the hooks with no load [m], >= 0."""
    initial_tension: Carrier = attrs.field(
        default=0.0, converter=units.newton, validator=units.not_negative, kw_only=True
    )
    """Load at which the coils begin to part [N], >= 0."""
    longest: Carrier | None = attrs.field(default=None, converter=units.optional_metre, kw_only=True)
    """Greatest permissible length inside the hooks [m], beyond ``free_length``; None for not given."""

    def __attrs_post_init__(self) -> None:
        if units.are_known(self.longest, self.free_length) and np.any(np.asarray(self.longest <= self.free_length)):
            raise InputError(
                f"ExtensionSpring.longest must be > free_length ({self.free_length}) m, got {self.longest}"
            )

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """Lengths at which the spring pulls and is not overstretched [m]."""
        return self.free_length, math.inf if self.longest is None else self.longest

    @property
    def effective_free_length(self) -> Carrier:
        """Length at which the straight part of the load line meets zero [m]: L0 - F0/k."""
        return self.free_length - self.initial_tension / self.rate

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], shape of ``x``; positive pulls the ends together, 0 when slack."""
        pull = self.initial_tension + self.rate * (x - self.free_length)
        return namespace(x, pull).where(x <= self.free_length, 0.0, pull)  # NaN stays NaN

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m], 0 when slack."""
        return namespace(x, self.rate, self.free_length).where(x > self.free_length, self.rate, 0.0)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero when slack."""
        stretch = namespace(x, self.free_length).maximum(x - self.free_length, 0.0)
        return (self.initial_tension + 0.5 * self.rate * stretch) * stretch

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]: zero, steel coils apart rub nowhere."""
        return 0.0 * x

    def at_temperature(
        self, temperature: ScalarLike, *, rate_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> ExtensionSpring:
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
        factor = warmed(temperature, rate_slope, reference, "rate_slope")
        return attrs.evolve(self, rate=self.rate * factor, initial_tension=self.initial_tension * factor)

    def after(self, *, load_loss: ScalarLike, at: ScalarLike) -> ExtensionSpring:
        """The spring after relaxation.

        Relaxation takes initial tension away, and then lengthens the spring; its rate stays.

        Parameters
        ----------
        load_loss
            Share of the load that is lost at length ``at`` [1], from 0 to below 1.
        at
            Length at which the loss was measured or is stated [m], beyond the free length.
        """
        length = units.metre(at, "at")
        if not length > self.free_length:
            raise InputError(f"at must be > free_length ({self.free_length}) m, got {length}")
        lost = (1.0 - remaining(load_loss)) * self.load(length)
        tension = max(self.initial_tension - lost, 0.0)
        longer = (lost - (self.initial_tension - tension)) / self.rate
        return attrs.evolve(self, initial_tension=tension, free_length=self.free_length + longer)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknowns.

        With ``preload`` the two unknowns, both >= 0, are the part of the rate that comes without
        initial tension and the part that comes with all that zero free length needs; so the
        effective free length stays between 0 and ``free_length``.
        """
        xp = namespace(x)
        slack = x <= self.free_length
        opened = xp.where(slack, 0.0, x - self.free_length)
        if preload:
            return LoadTerms(0.0 * x, (opened, xp.where(slack, 0.0, x)), (False, False))
        return LoadTerms(xp.where(slack, 0.0, self.initial_tension), (opened,), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> ExtensionSpring:
        """The spring with these amounts of its unknowns; ``longest`` is kept."""
        if preload:
            return attrs.evolve(self, rate=amounts[0] + amounts[1], initial_tension=amounts[1] * self.free_length)
        return attrs.evolve(self, rate=amounts[0])

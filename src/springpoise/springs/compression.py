"""The helical compression spring."""

from __future__ import annotations

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["CompressionSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class CompressionSpring:
    """A compression spring: ``load = -rate · (free_length - x)`` while shorter than free, else 0.

    Its load is negative: it pushes the ends apart. Below ``solid_length`` the coils touch; the
    load line simply goes on there, and the margin to the working range says so by its sign.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or ``solid_length`` not below ``free_length``.

    Examples
    --------
    >>> spring = CompressionSpring("8 N/mm", free_length="90 mm", solid_length="45 mm")
    >>> spring.load(0.06), spring.load(0.10)
    (-240.0, -0.0)
    """

    rate: Carrier = attrs.field(converter=units.newton_per_metre, validator=units.positive)
    """Spring rate [N/m], > 0."""
    free_length: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Length with no load [m], > 0."""
    solid_length: Carrier = attrs.field(converter=units.metre, validator=units.not_negative, kw_only=True)
    """Length with all coils touching [m], >= 0 and below ``free_length``."""

    def __attrs_post_init__(self) -> None:
        if units.are_known(self.solid_length, self.free_length) and np.any(
            np.asarray(self.solid_length >= self.free_length)
        ):
            raise InputError(
                f"CompressionSpring.solid_length must be < free_length ({self.free_length}) m, got {self.solid_length}"
            )

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """Lengths at which the spring pushes and is not solid [m]."""
        return self.solid_length, self.free_length

    @property
    def effective_free_length(self) -> Carrier:
        """Length at which the load line meets zero [m]: the free length."""
        return self.free_length

    def _shortening(self, x: Carrier) -> Carrier:
        return namespace(x, self.free_length).maximum(self.free_length - x, 0.0)

    def load(self, x: Carrier) -> Carrier:
        """Load at length ``x`` [N], shape of ``x``; negative, the spring pushes its ends apart."""
        return -self.rate * self._shortening(x)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m]; positive while the spring pushes."""
        return namespace(x, self.rate, self.free_length).where(x < self.free_length, self.rate, 0.0)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at and beyond the free length."""
        shortening = self._shortening(x)
        return 0.5 * self.rate * shortening * shortening

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]: zero; a rod or bore rubs, and is not modelled here."""
        return 0.0 * x

    def at_temperature(
        self, temperature: ScalarLike, *, rate_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> CompressionSpring:
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
        return attrs.evolve(self, rate=self.rate * warmed(temperature, rate_slope, reference, "rate_slope"))

    def after(self, *, load_loss: ScalarLike, at: ScalarLike) -> CompressionSpring:
        """The spring after relaxation, which shortens it; its rate stays.

        Parameters
        ----------
        load_loss
            Share of the load that is lost at length ``at`` [1], from 0 to below 1.
        at
            Length at which the loss was measured or is stated [m], below the free length.
        """
        length = units.metre(at, "at")
        if not length < self.free_length:
            raise InputError(f"at must be < free_length ({self.free_length}) m, got {length}")
        lost = (1.0 - remaining(load_loss)) * (self.free_length - length)
        return attrs.evolve(self, free_length=self.free_length - lost)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: the rate. Its preload is set by the mount, not by the spring."""
        return LoadTerms(0.0 * x, (-self._shortening(x),), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> CompressionSpring:
        """The spring with this rate."""
        return attrs.evolve(self, rate=amounts[0])

"""The torsion spring, whose coordinate is an angle."""

from __future__ import annotations

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.units import ScalarLike

__all__ = ["TorsionSpring"]


@attrs.frozen(field_transformer=units.named_fields)
class TorsionSpring:
    """A torsion spring: ``load = rate · (x - free_angle)`` with ``x`` in rad.

    It is linear both ways. Wire springs want to be loaded in their winding direction only: state
    that with ``working_range``.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or angles that look like degrees.

    Examples
    --------
    >>> spring = TorsionSpring("4 N*m/rad", free_angle="-90 deg")
    >>> round(spring.load(0.0), 6)
    6.283185
    """

    rate: Carrier = attrs.field(converter=units.newton_metre_per_radian, validator=units.positive)
    """Torsional spring rate [N·m/rad], > 0. Makers' rates per degree or per turn convert by themselves."""
    free_angle: Carrier = attrs.field(default=0.0, converter=units.radian)
    """Angle with no load [rad]."""
    working_range: tuple[float, float] | None = attrs.field(default=None, converter=units.optional_radian_pair)
    """Permissible angles (lowest, highest) [rad]; None for not given, which is no limit."""
    winding_friction: Carrier = attrs.field(
        default=0.0, converter=units.number, validator=units.not_negative, kw_only=True
    )
    """Half-width of the band between winding and unwinding over the load [1], from 0 to below 1."""

    def __attrs_post_init__(self) -> None:
        if self.working_range is not None and not np.all(np.asarray(self.working_range[0] < self.working_range[1])):
            raise InputError(f"TorsionSpring.working_range must be (lower, higher) rad, got {self.working_range}")
        if units.are_known(self.winding_friction) and np.any(np.asarray(self.winding_friction >= 1.0)):
            raise InputError(f"TorsionSpring.winding_friction must be < 1, got {self.winding_friction}")

    @property
    def effective_free_length(self) -> Carrier:
        """Angle at which the load line meets zero [rad]: the free angle."""
        return self.free_angle

    def load(self, x: Carrier) -> Carrier:
        """Torque at angle ``x`` [N·m], shape of ``x``; positive drives the angle back down."""
        return self.rate * (x - self.free_angle)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the torque at ``x`` [N·m/rad]."""
        return self.rate + 0.0 * x

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at the free angle."""
        wound = x - self.free_angle
        return 0.5 * self.rate * wound * wound

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N·m]: ``winding_friction`` times the size of the load."""
        turned = self.winding_friction * self.load(x)
        return namespace(turned).abs(turned)

    def at_temperature(
        self, temperature: ScalarLike, *, rate_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> TorsionSpring:
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

    def after(self, *, load_loss: ScalarLike, at: ScalarLike) -> TorsionSpring:
        """The spring after relaxation, which moves its free angle; its rate stays.

        Parameters
        ----------
        load_loss
            Share of the torque that is lost at angle ``at`` [1], from 0 to below 1.
        at
            Angle at which the loss was measured or is stated [rad].
        """
        lost = (1.0 - remaining(load_loss)) * (units.radian(at, "at") - self.free_angle)
        return attrs.evolve(self, free_angle=self.free_angle + lost)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknowns: the rate and, with ``preload``, the torque at zero."""
        if preload:
            return LoadTerms(0.0 * x, (1.0 * x, 1.0 + 0.0 * x), (False, True))
        return LoadTerms(0.0 * x, (x - self.free_angle,), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> TorsionSpring:
        """The spring with these amounts of its unknowns."""
        if preload:
            return attrs.evolve(self, rate=amounts[0], free_angle=-amounts[1] / amounts[0])
        return attrs.evolve(self, rate=amounts[0])

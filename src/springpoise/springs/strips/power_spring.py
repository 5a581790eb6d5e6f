"""Power springs: a strip coiled in a drum around an arbor, whose torque is known only roughly."""

from __future__ import annotations

import functools
import math
import warnings
from typing import Any, Literal

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, interpolate, namespace
from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.springs.protocol import LoadTerms
from springpoise.springs.service import ROOM_TEMPERATURE, remaining, warmed
from springpoise.springs.warnings import PowerSpringWarning, span
from springpoise.units import ScalarLike

__all__ = ["PowerSpring", "TorqueCurve"]

Array = NDArray[np.float64]

ARBOR_THICKNESSES = (15.0, 25.0)
"""Usual arbor diameters over the strip's thickness [1] (makers' general notes)."""
LONGEST_THICKNESSES = 15000.0
"""Usual greatest length over the strip's thickness [1] (makers' general notes)."""
TURN_FORMS = {"annulus": 2.0, "handbook": 2.55}


def _angles(value: ScalarLike) -> Any:
    return units.scalar_si(value, "rad", "TorqueCurve.angles")


@attrs.frozen(field_transformer=units.named_fields)
class TorqueCurve:
    """A torque given at several angles of any number of turns, and straight between them.

    Below the first angle the spring is let down and its torque is 0; beyond the last the torque
    stays as it is, and the working range says so by a negative margin.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Fewer than two angles, angles that do not increase, negative torques, or a share out of range.

    Examples
    --------
    >>> curve = TorqueCurve([0.0, 10.0, 40.0], [0.0, 1.0, 1.6], hysteresis_share=0.1)
    >>> curve.load(5.0), round(curve.load(25.0), 6), round(curve.energy(40.0), 6)
    (0.5, 1.3, 44.0)
    """

    angles: Array = attrs.field(converter=_angles, eq=units.comparable)
    """Angles wound up [rad], shape (n,), n >= 2, strictly increasing; any number of turns."""
    torques: Array = attrs.field(converter=units.newton_metre)
    """Torques there [N·m], shape (n,), >= 0: the middle of winding up and letting down."""
    hysteresis_share: Carrier = attrs.field(converter=units.number, validator=units.not_negative, kw_only=True)
    """Half of the difference between winding up and letting down, over the torque between them [1], 0 to below 1."""

    def __attrs_post_init__(self) -> None:
        angles = np.asarray(self.angles)
        if angles.ndim != 1 or angles.size < 2:
            raise InputError(f"TorqueCurve.angles must be at least two angles, got shape {angles.shape}")
        if not np.all(np.diff(angles) > 0.0):
            raise InputError(f"TorqueCurve.angles must increase, got {angles.tolist()} rad")
        if np.shape(self.torques) != angles.shape:
            raise InputError(
                f"TorqueCurve.torques must be of shape {angles.shape} like angles, got {np.shape(self.torques)}"
            )
        if not np.all(np.asarray(self.torques) >= 0.0):
            raise InputError(f"TorqueCurve.torques must be >= 0 N*m, got {np.min(self.torques)}")
        if np.any(np.asarray(self.hysteresis_share >= 1.0)):
            raise InputError(f"TorqueCurve.hysteresis_share must be >= 0 and < 1, got {self.hysteresis_share}")

    @functools.cached_property
    def _curve(self) -> Lookup:
        slopes = np.diff(self.torques) / np.diff(self.angles)
        return Lookup(self.angles, np.stack([self.torques[:-1], slopes], axis=1))

    @functools.cached_property
    def _slope(self) -> Lookup:
        return self._curve.derivative()

    @functools.cached_property
    def _work(self) -> Lookup:
        return self._curve.antiderivative()

    @property
    def working_range(self) -> tuple[float, float]:
        """First and last angle [rad]."""
        return float(self.angles[0]), float(self.angles[-1])

    def _inside(self, x: Carrier) -> tuple[Any, Carrier]:
        """Namespace, and the angle kept within the curve."""
        xp = namespace(x)
        first, last = self.working_range
        return xp, xp.minimum(xp.maximum(x, first), last)

    def load(self, x: Carrier) -> Carrier:
        """Torque at angle ``x`` [N·m], shape of ``x``; positive drives the angle back down."""
        xp, inside = self._inside(x)
        return xp.where(x < self.working_range[0], 0.0 * x, interpolate(inside, self._curve))

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the torque at ``x`` [N·m/rad]; 0 outside the curve."""
        xp, inside = self._inside(x)
        first, last = self.working_range
        return xp.where((x < first) | (x > last), 0.0 * x, interpolate(inside, self._slope))

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero at and below the first angle; the exact integral of the torque."""
        xp, inside = self._inside(x)
        end = float(self.torques[-1])
        return interpolate(inside, self._work) + end * xp.maximum(x - self.working_range[1], 0.0)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the band between winding up and letting down at ``x`` [N·m]."""
        return self.hysteresis_share * self.load(x)

    def at_temperature(
        self, temperature: ScalarLike, *, load_slope: ScalarLike, reference: ScalarLike = ROOM_TEMPERATURE
    ) -> TorqueCurve:
        """The spring at another temperature [K]; ``load_slope`` is the relative change of its torque [1/K]."""
        return self._scaled(warmed(temperature, load_slope, reference, "load_slope"))

    def after(self, *, load_loss: ScalarLike) -> TorqueCurve:
        """The spring after it has lost the share ``load_loss`` [1] of its torque."""
        return self._scaled(remaining(load_loss))

    def _scaled(self, factor: Carrier) -> TorqueCurve:
        return attrs.evolve(self, torques=self.torques * factor)

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load as a sum over the unknown: how many times the torque of this curve."""
        return LoadTerms(0.0 * x, (self.load(x),), (False,))

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> TorqueCurve:
        """The curve with its torques times this."""
        return self._scaled(amounts[0])


def _form(value: Any) -> Any:
    if value not in TURN_FORMS:
        raise InputError(f"PowerSpring.turns_form must be one of 'annulus', 'handbook', got {value!r}")
    return value


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class PowerSpring:
    """A strip in a drum of diameter Dd around an arbor of diameter Da.

    Let down, its length l fills the drum from D2 = √(Dd² - 4 l t/π) outwards; wound up, it fills
    the arbor out to D1 = √(Da² + 4 l t/π). The turns between are

    * ``turns_form="annulus"``: n = (D1 - Da - (Dd - D2))/(2 t), derived for strips lying close;
    * ``turns_form="handbook"``: the same over 2.55 t instead of 2 t, for strips that do not lie
      close (handbook form, from memory).

    The turns are most when the strip fills half of the free section: :func:`best_length`. The
    torque is indicative only: solid turns at drum and arbor take no part, and friction is great.
    Use a curve from the maker or from a bench as a :class:`TorqueCurve` wherever there is one.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, a drum not larger than the arbor, or a strip
        that does not fit in.

    Warns
    -----
    PowerSpringWarning
        An arbor outside 15 to 25 thicknesses or a length above 15000 thicknesses.

    Examples
    --------
    >>> spring = PowerSpring(width="20 mm", thickness="0.5 mm", length=PowerSpring.best_length("60 mm", "12 mm", "0.5 mm"),
    ...     drum_diameter="60 mm", arbor_diameter="12 mm", turns_form="annulus")
    >>> round(spring.length, 8), round(spring.turns, 6)
    (2.71433605, 14.533231)
    """

    width: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Width b of the strip [m], > 0."""
    thickness: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Thickness t of the strip [m], > 0."""
    length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Length l of the strip [m], > 0."""
    drum_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Inner diameter of the drum Dd [m], > 0."""
    arbor_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Diameter of the arbor Da [m], > 0."""
    turns_form: Literal["annulus", "handbook"] = attrs.field(converter=_form)
    """Which formula gives the turns: ``"annulus"`` or ``"handbook"``; they differ by 27 %."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.asarray(self.arbor_diameter >= self.drum_diameter)):
            raise InputError(
                f"PowerSpring.drum_diameter must be > arbor_diameter ({self.arbor_diameter}) m, got {self.drum_diameter}"
            )
        most = math.pi / 4.0 * (self.drum_diameter**2.0 - self.arbor_diameter**2.0) / self.thickness
        if np.any(np.asarray(self.length >= most)):
            raise InputError(f"PowerSpring.length must be < {most} m, which fills the drum, got {self.length}")
        arbor, length = np.asarray(self.arbor_diameter / self.thickness), np.asarray(self.length / self.thickness)
        low, high = ARBOR_THICKNESSES
        if np.any((arbor < low * (1.0 - 1e-12)) | (arbor > high * (1.0 + 1e-12))):
            warnings.warn(
                f"PowerSpring.arbor_diameter is {span(arbor)} thicknesses, "
                f"outside the usual {low:g} to {high:g} (makers' notes)",
                PowerSpringWarning,
                stacklevel=3,
            )
        if np.any(length > LONGEST_THICKNESSES):
            warnings.warn(
                f"PowerSpring.length is {span(length)} thicknesses, above the usual {LONGEST_THICKNESSES:g} (makers' notes)",
                PowerSpringWarning,
                stacklevel=3,
            )

    @staticmethod
    def best_length(drum_diameter: ScalarLike, arbor_diameter: ScalarLike, thickness: ScalarLike) -> Carrier:
        """Length [m] that gives the most turns: it fills half of the section, l t = (π/8)(Dd² - Da²)."""
        drum, arbor, t = (
            units.metre(value, f"PowerSpring.{name}")
            for value, name in (
                (drum_diameter, "drum_diameter"),
                (arbor_diameter, "arbor_diameter"),
                (thickness, "thickness"),
            )
        )
        if np.any(np.asarray(t <= 0.0)):
            raise InputError(f"PowerSpring.thickness must be > 0 m, got {t}")
        if np.any(np.asarray((arbor <= 0.0) | (arbor >= drum))):
            raise InputError(f"PowerSpring.drum_diameter must be > arbor_diameter ({arbor}) m, got {drum}")
        return math.pi / 8.0 * (drum * drum - arbor * arbor) / t

    @property
    def wound_diameter(self) -> Carrier:
        """Outer diameter of the strip wound up on the arbor, D1 [m]."""
        return (self.arbor_diameter**2.0 + 4.0 * self.length * self.thickness / math.pi) ** 0.5

    @property
    def let_down_diameter(self) -> Carrier:
        """Inner diameter of the strip let down in the drum, D2 [m]."""
        return (self.drum_diameter**2.0 - 4.0 * self.length * self.thickness / math.pi) ** 0.5

    @property
    def turns(self) -> Carrier:
        """Turns of the arbor between let down and wound up [1]."""
        thicker = self.wound_diameter - self.arbor_diameter - (self.drum_diameter - self.let_down_diameter)
        return thicker / (TURN_FORMS[self.turns_form] * self.thickness)

    def greatest_torque(self, stress: ScalarLike) -> Carrier:
        """Torque [N·m] at which an elastic strip has this bending stress [Pa]: stress · b t²/6; indicative."""
        allowed = units.pascal(stress, "stress")
        if np.any(np.asarray(allowed <= 0.0)):
            raise InputError(f"stress must be > 0 Pa, got {allowed}")
        return allowed * self.width * self.thickness * self.thickness / 6.0

    def torque_curve(self, torques: ScalarLike, *, hysteresis_share: ScalarLike) -> TorqueCurve:
        """The maker's or a bench's torques over this spring's turns.

        Parameters
        ----------
        torques
            Torques at equal steps of the turns, let down first, wound up last [N·m].
        hysteresis_share
            Half of the difference between winding up and letting down, over the torque [1].
        """
        listed = np.atleast_1d(units.newton_metre(torques, "torques"))
        angles = np.linspace(0.0, 2.0 * math.pi * float(self.turns), listed.size)
        return TorqueCurve(angles, listed, hysteresis_share=hysteresis_share)

    def indicative_curve(
        self, *, stress: ScalarLike, let_down_share: ScalarLike, hysteresis_share: ScalarLike
    ) -> TorqueCurve:
        """A straight torque curve that shows the size and the trend, no more.

        It ends at :meth:`greatest_torque` wound up. What is left let down differs much between
        makes, so it is given.

        Parameters
        ----------
        stress
            Bending stress of the strip, wound up [Pa].
        let_down_share
            Torque let down over the torque wound up [1], from 0 to 1.
        hysteresis_share
            Half of the difference between winding up and letting down, over the torque [1].
        """
        greatest = self.greatest_torque(stress)
        share = units.number(let_down_share, "let_down_share")
        if not 0.0 <= share <= 1.0:
            raise InputError(f"let_down_share must be from 0 to 1, got {share}")
        return self.torque_curve([share * greatest, greatest], hysteresis_share=hysteresis_share)

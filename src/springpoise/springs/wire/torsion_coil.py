"""The torsion spring as a coil of wire with two legs."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.springs.torsion import TorsionSpring
from springpoise.springs.wire.coil_body import at_least
from springpoise.springs.wire.coil_checks import least_limit, lowest_of_cycle, positive_number, single_positive
from springpoise.springs.wire.coil_sizing import smallest_wire
from springpoise.springs.wire.margins import CoilMargins
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.strength import happens
from springpoise.springs.wire.stress_factors import bending_inner, bending_outer, bending_per_moment
from springpoise.springs.wire.torsion_margins import all_limits, torsion_margins, warn_of_turns
from springpoise.springs.wire.winding import AVERAGED, THEORETICAL, TURN, WindingCoil
from springpoise.units import ScalarLike

__all__ = ["TorsionCoil"]

MOST = 4.0 * math.pi * (1.0 - 1e-12)


def _friction(value: Any) -> str:
    if value not in ("none", "averaged"):
        raise InputError(f"TorsionCoil.friction must be 'none' or 'averaged', got {value!r}")
    return str(value)


def _legs(value: Any) -> tuple[Any, Any]:
    first, last = units.pair(value, "m", "TorsionCoil.legs")
    for leg in (first, last):
        if happens(leg < 0.0):
            raise InputError(f"TorsionCoil.legs must be >= 0 m, got {leg}")
    return first, last


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class TorsionCoil(WindingCoil):
    """A torsion spring of round wire: a body whose wire bends, and two straight legs.

    Rate for each rad ``E d⁴/(64 D Na)`` with ``Na = Nb + (l1 + l2)/(3 π D)`` active turns; with
    ``friction="averaged"`` the rate for each turn is ``E d⁴/(10.8 D Na)`` in place of 10.186, 5.7 %
    softer. That figure is one average of a band; where the band itself is given as
    ``winding_friction`` the rate is the theoretical one, and the two exclude each other.
    Stress at the inner fibre ``Ki 32 M/(π d³)``.

    Load it in its winding direction only: residual stresses from winding add to the load
    otherwise. Valid for an index from 3 to 16 and 3 or more active turns.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension: an index outside 3 to 16, wire outside the
        range of the material's strength, fewer than two turns, both kinds of friction at once.

    Warns
    -----
    SpringIndexWarning, CoilCountWarning, TemperatureWarning
        An index outside 4 to 12, fewer than 3 active turns, or a temperature above the wire's limit.

    References
    ----------
    Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed; the
    friction band and the axial growth are from memory.

    Examples
    --------
    >>> import attrs
    >>> from springpoise.springs.materials import MUSIC_WIRE
    >>> coil = TorsionCoil(
    ...     wire="3 mm", mean_diameter="30 mm", body_coils=8, legs=(0, 0),
    ...     material=attrs.evolve(MUSIC_WIRE, young_modulus="203.4 GPa"),
    ... )
    >>> round(coil.rate, 9)
    1.072617187
    """

    wire: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Wire diameter [m], > 0."""
    mean_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Mean diameter of the body with no load [m]: outer less one wire."""
    body_coils: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """Turns of the body [1], >= 2: a whole number and the fraction that the angle between the legs sets."""
    legs: tuple[Carrier, Carrier] = attrs.field(converter=_legs, eq=units.comparable)
    """Lengths of the two straight legs, from the body to the load [m], >= 0."""
    material: WireMaterial
    """The wire, such as ``springs.materials.MUSIC_WIRE``."""
    friction: str = attrs.field(default="none", converter=_friction)
    """``"none"`` for the theoretical rate, ``"averaged"`` for the rate with friction averaged in."""
    winding_friction: Carrier = attrs.field(default=0.0, converter=units.number, validator=units.not_negative)
    """Half-width of the friction band over the load [1], from 0 to below 1; 0.02 to 0.08 for close-wound
    coils, near 0 for coils wound apart (values from memory)."""
    set_angle: Carrier = attrs.field(default=0.0, converter=units.radian, validator=units.not_negative)
    """Angle by which relaxation has moved the free angle in the winding direction [rad]."""
    temperature: Carrier = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    """Temperature of the coil [K]; 20 °C unless told otherwise."""

    def __attrs_post_init__(self) -> None:
        self._check_proportions()
        at_least("TorsionCoil", "body_coils", self.body_coils, 2.0)
        warn_of_turns(self.active_coils)
        if happens(self.winding_friction >= 1.0):
            raise InputError(f"TorsionCoil.winding_friction must be < 1, got {self.winding_friction}")
        if self.friction == "averaged" and happens(self.winding_friction > 0.0):
            raise InputError(
                f"TorsionCoil.winding_friction must be 0 with friction='averaged', got {self.winding_friction}; "
                "the averaged rate has friction in it already, and it would count twice"
            )

    @classmethod
    def from_rate(
        cls,
        rate: ScalarLike,
        *,
        wire: ScalarLike,
        mean_diameter: ScalarLike,
        legs: Any,
        material: WireMaterial,
        friction: str = "none",
        winding_friction: float = 0.0,
        fraction: float | None = None,
    ) -> TorsionCoil:
        """The coil with as many turns as a rate needs.

        Parameters
        ----------
        rate
            Wanted rate [N·m/rad] at 20 °C, > 0.
        wire, mean_diameter, legs, material, friction, winding_friction
            As for the class.
        fraction
            Part of a turn that the angle between the legs sets [1], from 0 to below 1: the body then
            has the nearest number of whole turns and this part, and the rate differs accordingly.
            None to meet the rate with any number of turns.
        """
        d, diameter = units.metre(wire, "wire"), units.metre(mean_diameter, "mean_diameter")
        first, last = _legs(legs)
        per_turn = AVERAGED if _friction(friction) == "averaged" else THEORETICAL
        stiffness = units.newton_metre_per_radian(rate, "rate") * TURN
        turns = material.young_modulus.at(d) * d**4.0 / (per_turn * diameter * stiffness)
        turns = turns - (first + last) / (3.0 * math.pi * diameter)
        if fraction is not None:
            if not isinstance(turns, float):
                raise InputTypeError("fraction must be None for arrays, got a fraction")
            part = float(units.number(fraction, "fraction"))
            if not 0.0 <= part < 1.0:
                raise InputError(f"fraction must be from 0 to below 1, got {part:g}")
            turns = max(round(turns - part), 0) + part
        return cls(
            wire=d,
            mean_diameter=diameter,
            body_coils=turns,
            legs=(first, last),
            material=material,
            friction=friction,
            winding_friction=winding_friction,
        )

    @classmethod
    def from_load(
        cls,
        moment: ScalarLike,
        *,
        index: float,
        rate: ScalarLike,
        legs: Any,
        material: WireMaterial,
        safety: float,
        cycles: float | None = None,
        lowest_moment: ScalarLike | None = None,
        friction: str = "none",
        winding_friction: float = 0.0,
        fraction: float | None = None,
    ) -> TorsionCoil:
        """The coil of the thinnest wire that carries a moment.

        Parameters
        ----------
        moment
            Greatest moment [N·m], > 0.
        index
            Spring index D/d [1].
        rate, legs, material, friction, winding_friction, fraction
            As for ``from_rate``.
        safety
            Factor by which the moment may grow [1], > 0.
        cycles, lowest_moment
            So many cycles between ``lowest_moment`` [N·m] and ``moment`` with the same factor; None for static use.

        Raises
        ------
        InputError
            No wire of the material is thick enough.
        """
        wanted = single_positive(units.newton_metre(moment, "moment"), "moment")
        low = 0.0 if lowest_moment is None else units.newton_metre(lowest_moment, "lowest_moment")
        n, c = single_positive(safety, "safety"), single_positive(index, "index")
        d = smallest_wire(
            material,
            lambda d: float(least_limit(all_limits(material, d, c * d, cycles, peened=False), low, n)) / wanted,
            f"a moment of {wanted:g} N*m",
        )
        return cls.from_rate(
            rate,
            wire=d,
            mean_diameter=c * d,
            legs=legs,
            material=material,
            friction=friction,
            winding_friction=winding_friction,
            fraction=fraction,
        )

    def inner_stress(self, moment: ScalarLike) -> Carrier:
        """Bending stress at the inner fibre under a moment [Pa]."""
        factor = bending_inner(self.index)
        return units.newton_metre(moment, "moment") * bending_per_moment(self.wire, factor)

    def outer_stress(self, moment: ScalarLike) -> Carrier:
        """Bending stress at the outer fibre under a moment [Pa]; the lesser of the two."""
        factor = bending_outer(self.index)
        return units.newton_metre(moment, "moment") * bending_per_moment(self.wire, factor)

    def limit_moments(
        self,
        *,
        safety: float = 1.0,
        cycles: float | None = None,
        lowest_moment: ScalarLike | None = None,
        peened: bool = False,
    ) -> dict[str, Carrier]:
        """Greatest moment with a factor [N·m], by the name of the limit.

        Parameters
        ----------
        safety
            Factor by which the moment may grow [1]; 1 meets the allowable itself.
        cycles, lowest_moment
            Number of cycles, for which the wire's limits must be known, and the lowest moment of
            the cycle [N·m]; None for static use.
        peened
            Whether the wire is shot-peened.
        """
        n, low = positive_number(safety, "safety"), self._lowest(lowest_moment, cycles)
        checks = all_limits(self.material, self.wire, self.mean_diameter, cycles, peened=peened)
        return {check.name: check.limit(low, n) for check in checks}

    @staticmethod
    def _lowest(lowest_moment: Any, cycles: Any) -> Any:
        if cycles is not None and lowest_moment is None:
            raise InputError("lowest_moment must be given in N*m together with cycles, got None")
        return lowest_of_cycle(lowest_moment, "N*m", None)

    def spring(
        self,
        free_angle: ScalarLike = 0.0,
        *,
        winds: int = 1,
        safety: float = 1.0,
        cycles: float | None = None,
        lowest_moment: ScalarLike | None = None,
        peened: bool = False,
        arbor: ScalarLike | None = None,
    ) -> TorsionSpring:
        """The spring for a mechanism, with the range in which it is wound up and no limit is passed.

        Parameters
        ----------
        free_angle
            Angle of the joint at which a new coil has no load [rad].
        winds
            +1 where the coil winds up as the angle grows, -1 where it does as the angle falls. The
            range leaves out the other direction.
        safety, cycles, lowest_moment, peened
            As for ``limit_moments``.
        arbor
            Diameter of an arbor inside [m]: the range ends where the body would bind on it.

        Notes
        -----
        An angle beyond two turns does not fit into a joint, and the range is cut off there.
        """
        if winds not in (1, -1):
            raise InputError(f"winds must be +1 or -1, got {winds!r}")
        n, low = positive_number(safety, "safety"), self._lowest(lowest_moment, cycles)
        checks = all_limits(self.material, self.wire, self.mean_diameter, cycles, peened=peened)
        moment = least_limit(checks, low, n)
        if arbor is not None:
            bound = self.binding_moment(arbor)
            moment = namespace(moment, bound).minimum(moment, bound)
        free = units.radian(free_angle, "free_angle") + winds * self.set_angle
        reach = winds * moment / self.rate
        end = namespace(free, reach).maximum(namespace(free, reach).minimum(free + reach, MOST), -MOST)
        return TorsionSpring(
            self.rate,
            free_angle=free,
            working_range=(free, end) if winds == 1 else (end, free),
            winding_friction=self.winding_friction,
        )

    def margins(
        self,
        moments: Any = None,
        *,
        angles: Any = None,
        cycles: float | None = None,
        peened: bool = False,
        arbor: ScalarLike | None = None,
    ) -> CoilMargins:
        """How far the coil is from each limit over a range of moments or angles.

        Parameters
        ----------
        moments
            Lowest and greatest moment [N·m], positive in the winding direction; or give ``angles``.
        angles
            Least and greatest angle of winding up from the free angle [rad].
        cycles
            Number of cycles, for which the wire's limits must be known; None for static use.
        peened
            Whether the wire is shot-peened.
        arbor
            Diameter of an arbor inside [m].

        Returns
        -------
        CoilMargins
        """
        checks = all_limits(self.material, self.wire, self.mean_diameter, cycles, peened=peened)
        return torsion_margins(self, moments, angles, checks, arbor)

    def at_temperature(self, temperature: ScalarLike) -> TorsionCoil:
        """The coil at a temperature [K]: Young's modulus follows the wire's slope, and the rate with it."""
        changed: TorsionCoil = self._warmed(temperature)
        return changed

    def after(
        self,
        *,
        at: ScalarLike,
        load_loss: ScalarLike | None = None,
        time: ScalarLike | None = None,
        temperature: ScalarLike | None = None,
    ) -> TorsionCoil:
        """The coil after relaxation, which moves its free angle in the winding direction; its rate stays.

        Parameters
        ----------
        at
            Angle by which it is held wound up from its free angle [rad], > 0.
        load_loss
            Share of the moment that is lost [1]; or give ``time``.
        time, temperature
            How long it is held [s] and how warm [K], for the wire's own relaxation parameters; None
            for the coil's temperature.
        """
        wound = units.radian(at, "at")
        if happens(wound <= 0.0):
            raise InputError(f"at must be > 0 rad, wound up from the free angle, got {wound}")
        stress = bending_per_moment(self.wire, 1.0)
        loss = self._load_loss(load_loss, time, temperature, self.rate * wound, stress)
        return attrs.evolve(self, set_angle=self.set_angle + loss * wound)

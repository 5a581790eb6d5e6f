"""The compression spring as a coil of wire."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.compression import CompressionSpring
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.springs.wire.buckling import GUIDED, alpha_of, critical_shortening, end_condition, stable_length
from springpoise.springs.wire.coil_body import at_least, helical_rate
from springpoise.springs.wire.coil_checks import clash_share, least_limit, lowest_of_cycle, positive_number
from springpoise.springs.wire.coil_ends import ENDS, EndedCoil, ends_named
from springpoise.springs.wire.compression_margins import (
    CLASH_ALLOWANCE,
    all_limits,
    compression_margins,
    warn_of_buckling,
    warn_of_coils,
)
from springpoise.springs.wire.compression_sizing import compression_from_load
from springpoise.springs.wire.fatigue import Fatigue, as_fatigue
from springpoise.springs.wire.margins import CoilMargins
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.strength import happens
from springpoise.springs.wire.stress_factors import shear_per_load
from springpoise.units import ScalarLike

__all__ = ["CompressionCoil"]


def _support(value: Any) -> Any:
    return end_condition(value, "CompressionCoil.support")


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class CompressionCoil(EndedCoil):
    """A compression spring of round wire.

    Rate ``G d⁴/(8 D³ Na)``, body stress ``K 8 F D/(π d³)``. The ends set the active coils, the
    solid length and the pitch:

    ============== ============== ========== =================
    ends           active coils   solid      free length
    ============== ============== ========== =================
    plain          Nt             d (Nt + 1) p Na + d
    plain ground   Nt - 1         d Nt       p (Na + 1)
    squared        Nt - 2         d (Nt + 1) p Na + 3 d
    squared ground Nt - 2         d Nt       p Na + 2 d
    ============== ============== ========== =================

    Valid for small helix angles and an index from 3 to 16; 4 to 12 and 3 to 15 active coils are
    usual, and the rate holds in the middle 75 % of the travel.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension: an index outside 3 to 16, wire outside the
        range of the material's strength, fewer than two active coils, solid beyond free length.

    Warns
    -----
    SpringIndexWarning, CoilCountWarning, TemperatureWarning
        An index outside 4 to 12, active coils outside 3 to 15, or a temperature above the wire's limit.

    References
    ----------
    Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed.

    Examples
    --------
    >>> from springpoise.springs.materials import MUSIC_WIRE
    >>> coil = CompressionCoil(
    ...     wire="2.5 mm", mean_diameter="28.5 mm", total_coils=14, ends="plain ground", free_length="100 mm",
    ...     material=MUSIC_WIRE, support="guided",
    ... )
    >>> round(coil.rate), round(coil.solid_length, 6)
    (1314, 0.035)
    """

    wire: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Wire diameter [m], > 0."""
    mean_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Mean diameter of the coils [m]: outer less one wire."""
    total_coils: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """All coils, idle ones included [1]."""
    ends: str = attrs.field(converter=ends_named)
    """``"plain"``, ``"plain ground"``, ``"squared"`` or ``"squared ground"``."""
    free_length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Length with no load [m], > solid length."""
    material: WireMaterial
    """The wire, such as ``springs.materials.MUSIC_WIRE``."""
    support: Any = attrs.field(default=None, converter=_support)
    """``"guided"`` on a rod or in a bore; else how the ends are held, by name (see
    ``springs.buckling.END_CONDITIONS``) or as the factor α; None for not given."""
    set_removed: bool = attrs.field(default=False)
    """Whether the set was removed, so that the higher allowable with its own stress factor holds."""
    solid_reduction: Carrier = attrs.field(default=0.0, converter=units.number, validator=units.not_negative)
    """Coils that grinding takes from the solid length [1]; about 0.75 for squared and ground, by maker."""
    temperature: Carrier = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    """Temperature of the coil [K]; 20 °C unless told otherwise."""

    def __attrs_post_init__(self) -> None:
        self._check_proportions()
        at_least("CompressionCoil", "total_coils", self.total_coils, 2.0 + ENDS[self.ends].idle)
        warn_of_coils("CompressionCoil", self.active_coils)
        if happens(self.solid_length >= self.free_length):
            raise InputError(
                f"CompressionCoil.free_length must be > the solid length ({self.solid_length}) m, got {self.free_length}"
            )

    @classmethod
    def from_rate(
        cls,
        rate: ScalarLike,
        *,
        wire: ScalarLike,
        mean_diameter: ScalarLike,
        ends: str,
        free_length: ScalarLike,
        material: WireMaterial,
        support: Any = None,
        set_removed: bool = False,
    ) -> CompressionCoil:
        """The coil with as many coils as a rate needs, whole or not.

        Parameters
        ----------
        rate
            Wanted rate [N/m] at 20 °C, > 0.
        wire, mean_diameter, ends, free_length, material, support, set_removed
            As for the class.
        """
        d, diameter = units.metre(wire, "wire"), units.metre(mean_diameter, "mean_diameter")
        active = helical_rate(material.shear_modulus.at(d), d, diameter, units.newton_per_metre(rate, "rate"))
        return cls(
            wire=d,
            mean_diameter=diameter,
            total_coils=active + ENDS[ends_named(ends)].idle,
            ends=ends,
            free_length=free_length,
            material=material,
            support=support,
            set_removed=set_removed,
        )

    @classmethod
    def from_load(
        cls,
        load: ScalarLike,
        *,
        rate: ScalarLike,
        ends: str,
        material: WireMaterial,
        safety: float,
        wire: ScalarLike | None = None,
        index: float | None = None,
        clash_allowance: float = CLASH_ALLOWANCE,
        fatigue: Fatigue | str | None = None,
        lowest_load: ScalarLike | None = None,
        support: Any = None,
    ) -> CompressionCoil:
        """The coil that just meets a stress: static at solid, or fatigue between two loads.

        With ``wire`` given the index follows, the larger root of ``K(C) C = S π d²/(8 F)`` with
        Bergsträsser's factor; with ``index`` given the thinnest wire follows. Static: S is the
        allowable over ``safety`` at the load at solid, ``(1 + clash_allowance) load``. Fatigue:
        amplitude and mean meet the criterion with ``safety``, and the solid stress the allowable.

        Parameters
        ----------
        load
            Greatest load [N], > 0.
        rate
            Wanted rate [N/m].
        ends, material, support
            As for the class; as wound, set not removed.
        safety
            Factor on the stress [1], > 0; 1.2 at solid is recommended.
        wire, index
            One of them: wire diameter [m], or spring index [1].
        clash_allowance
            Load at solid over the greatest load, less 1 [1]; at least 0.15 is recommended.
        fatigue, lowest_load
            Endless life between ``lowest_load`` [N] and ``load``; None for static use.

        Raises
        ------
        InputError
            Not exactly one of wire and index, or nothing that carries the load.
        """
        judged = None if fatigue is None else as_fatigue(fatigue)
        d, diameter, solid = compression_from_load(
            load, material, safety, wire, index, clash_allowance, judged, lowest_of_cycle(lowest_load, "N", judged)
        )
        stiffness = units.newton_per_metre(rate, "rate")
        active = helical_rate(material.shear_modulus.at(d), d, diameter, stiffness)
        finish = ENDS[ends_named(ends)]
        coils = active + finish.idle
        return cls(
            wire=d,
            mean_diameter=diameter,
            total_coils=coils,
            ends=ends,
            free_length=d * (coils + finish.solid) + solid / stiffness,
            material=material,
            support=support,
        )

    def stable_length(self, support: Any = None) -> Carrier:
        """Free length below which no load bows the coil out [m], for a support or the coil's own."""
        return stable_length(self.mean_diameter, self._alpha(support), self.young_modulus, self.shear_modulus)

    def critical_shortening(self, support: Any = None) -> Carrier:
        """Shortening at which the coil bows out [m], for a support or the coil's own; infinite where none does."""
        return critical_shortening(
            self.free_length, self.mean_diameter, self._alpha(support), self.young_modulus, self.shear_modulus
        )

    def _alpha(self, support: Any) -> float:
        held = self.support if support is None else end_condition(support, "support")
        if held is None or held == GUIDED:
            raise InputError(f"support must be an end condition or the factor alpha for buckling, got {held!r}")
        return alpha_of(held)

    def longest_free_length(self, *, safety: float = 1.0, stress_factor: str | None = None) -> Carrier:
        """Free length at which closing the coils just meets the allowable with a factor [m]."""
        check = all_limits(self, None, None, stress_factor)[0]
        return self.solid_length + check.limit(0.0, positive_number(safety, "safety")) / self.rate

    def spring(
        self,
        *,
        safety: float = 1.0,
        clash_allowance: float = CLASH_ALLOWANCE,
        fatigue: Fatigue | str | None = None,
        lowest_load: ScalarLike | None = None,
        cycles: float | None = None,
        stress_factor: str | None = None,
    ) -> CompressionSpring:
        """The spring for a mechanism; its ``solid_length`` is the shortest length that every limit permits.

        Parameters
        ----------
        safety
            Factor by which the load may grow [1]; 1 meets the allowable itself.
        clash_allowance
            How far to stay from solid: load at solid over greatest load, less 1 [1], >= 0.
        fatigue, lowest_load
            Criterion of endless life, and the lowest push of the cycle [N].
        cycles
            Number of cycles from no load, where that is known for the wire.
        stress_factor
            Factor for the body, of those that the allowable belongs to; None for the first of them.

        Warns
        -----
        BucklingWarning
            The coil would bow out before that length; with an end condition given, the length is where it does.
        """
        judged = None if fatigue is None else as_fatigue(fatigue)
        low = lowest_of_cycle(lowest_load, "N", judged)
        checks = all_limits(self, judged, cycles, stress_factor)
        load = least_limit(checks, low, positive_number(safety, "safety"))
        closing = self.solid_load / clash_share(clash_allowance)
        stroke = namespace(load, closing).minimum(load, closing) / self.rate
        warn_of_buckling(self, stroke)
        if self.support is not None and self.support != GUIDED:
            critical = self.critical_shortening()
            stroke = namespace(stroke, critical).minimum(stroke, critical)
        return CompressionSpring(self.rate, free_length=self.free_length, solid_length=self.free_length - stroke)

    def margins(
        self,
        loads: Any = None,
        *,
        lengths: Any = None,
        fatigue: Fatigue | str | None = None,
        cycles: float | None = None,
        frequency: ScalarLike | None = None,
        stress_factor: str | None = None,
        clash_allowance: float = CLASH_ALLOWANCE,
        rod: ScalarLike | None = None,
        bore: ScalarLike | None = None,
    ) -> CoilMargins:
        """How far the coil is from each limit over a range of pushes or lengths.

        Parameters
        ----------
        loads
            Lowest and greatest push [N], positive; or give ``lengths``.
        lengths
            Shortest and longest length [m].
        fatigue
            A criterion by name on unpeened wire, or a ``Fatigue``; None for static use.
        cycles
            Number of cycles from no load, where that is known for the wire.
        frequency
            Forcing frequency [Hz], held against the surge frequency.
        stress_factor
            Factor for the body, of those that the allowable belongs to; None for the first of them.
        clash_allowance
            How far to stay from solid: load at solid over greatest load, less 1 [1].
        rod, bore
            Diameter of a rod inside and of a bore around the coil [m].

        Returns
        -------
        CoilMargins

        Warns
        -----
        BucklingWarning
            The coil is not guided and would bow out before its greatest load.
        """
        judged = None if fatigue is None else as_fatigue(fatigue)
        checks = all_limits(self, judged, cycles, stress_factor)
        return compression_margins(
            self, loads, lengths, checks, frequency=frequency, clash_allowance=clash_allowance, rod=rod, bore=bore
        )

    def at_temperature(self, temperature: ScalarLike) -> CompressionCoil:
        """The coil at a temperature [K]: its moduli follow the wire's slope, and its rate with them."""
        changed: CompressionCoil = self._warmed(temperature)
        return changed

    def after(
        self,
        *,
        at: ScalarLike,
        load_loss: ScalarLike | None = None,
        time: ScalarLike | None = None,
        temperature: ScalarLike | None = None,
    ) -> CompressionCoil:
        """The coil after relaxation, which shortens it; its rate stays.

        Parameters
        ----------
        at
            Length at which it is held [m], below the free length.
        load_loss
            Share of the load that is lost [1]; or give ``time``.
        time, temperature
            How long it is held [s] and how warm [K], for the wire's own relaxation parameters; None
            for the coil's temperature.
        """
        length = units.metre(at, "at")
        if happens(length >= self.free_length):
            raise InputError(f"at must be < free_length ({self.free_length}) m, got {length}")
        travel = self.free_length - length
        stress = shear_per_load(self.wire, self.mean_diameter, 1.0)
        loss = self._load_loss(load_loss, time, temperature, self.rate * travel, stress)
        return attrs.evolve(self, free_length=self.free_length - loss * travel)

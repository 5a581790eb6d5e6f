"""The extension spring as a coil of wire with hooks."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.extension import ExtensionSpring
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.springs.wire.coil_body import at_least, helical_rate
from springpoise.springs.wire.coil_checks import least_limit, lowest_of_cycle, positive_number
from springpoise.springs.wire.coil_sizing import extension_from_load
from springpoise.springs.wire.extension_margins import all_limits, extension_margins
from springpoise.springs.wire.fatigue import Fatigue, as_fatigue
from springpoise.springs.wire.initial_tension import WoundTension
from springpoise.springs.wire.margins import CoilMargins
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.strength import EDGE, happens
from springpoise.springs.wire.stress_factors import shear_per_load
from springpoise.units import ScalarLike

__all__ = ["ExtensionCoil"]


def _optional_newton(value: ScalarLike | None) -> Any:
    return None if value is None else units.newton(value, "ExtensionCoil.initial_tension")


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class ExtensionCoil(WoundTension):
    """A close-wound extension spring of round wire with a hook at each end.

    Rate ``G d⁴/(8 D³ Na)`` with ``Na = Nb + G/E`` active coils: two hooks bend as much as G/E
    coils twist. Stresses at a load F: in the body ``K 8 F D/(π d³)``; where a hook leaves the body
    in its plane, bending ``F [KA 16 D/(π d³) + 4/(π d²)]`` with C = 2 hook_radius/d; in the bend
    at right angles to it, torsion ``KB 8 F D/(π d³)`` with C = 2 hook_bend_radius/d. Hooks almost
    always fail first.

    Valid for small helix angles, close-wound coils and an index from 3 to 16 (4 to 12 is usual).
    The rate holds from about 20 to 80 % of the travel; without other agreement expect ±10 % of
    rate and load and ±15 % of initial tension (from memory).

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension: an index outside 3 to 16, wire outside the
        range of the material's strength, fewer than two coils, hooks tighter than the wire.

    Warns
    -----
    SpringIndexWarning, TemperatureWarning
        An index outside 4 to 12, or a temperature above the wire's own limit.

    References
    ----------
    Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed.

    Examples
    --------
    >>> from springpoise.springs.materials import MUSIC_WIRE
    >>> coil = ExtensionCoil(
    ...     wire="2 mm", mean_diameter="16 mm", body_coils=40, material=MUSIC_WIRE, initial_tension="20 N",
    ...     hook_radius="8 mm", hook_bend_radius="5 mm",
    ... )
    >>> round(coil.rate)
    979
    >>> coil.initial_tension_zone()
    'inside'
    >>> spring = coil.spring(safety=1.2)
    >>> round(spring.load(spring.longest))
    108
    """

    wire: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Wire diameter [m], > 0."""
    mean_diameter: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Mean diameter of the coils [m]: outer less one wire."""
    body_coils: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """Coils of the body without hooks [1], >= 2."""
    material: WireMaterial
    """The wire, such as ``springs.materials.MUSIC_WIRE``."""
    initial_tension: Any = attrs.field(default=None, converter=_optional_newton, eq=units.comparable)
    """Load at which the coils begin to part, at 20 °C [N], >= 0; None for not given."""
    hook_radius: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Mean radius of the hook in the plane of its own loop [m]; half the mean diameter for a full loop."""
    hook_bend_radius: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Mean radius of the bend that turns the hook out of the body [m]."""
    free_length: Carrier | None = attrs.field(default=None, converter=units.optional_metre)
    """Length inside the hooks with no load [m]; None for two full loops, (2C - 1 + Nb) d."""
    temperature: Carrier = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    """Temperature of the coil [K]; 20 °C unless told otherwise."""

    def __attrs_post_init__(self) -> None:
        self._check_proportions()
        at_least("ExtensionCoil", "body_coils", self.body_coils, 2.0)
        for name, radius in (("hook_radius", self.hook_radius), ("hook_bend_radius", self.hook_bend_radius)):
            if happens(2.0 * radius <= self.wire * (1 + EDGE)):
                raise InputError(f"ExtensionCoil.{name} must be > half the wire ({0.5 * self.wire}) m, got {radius}")
        if self.initial_tension is not None and happens(self.initial_tension < 0.0):
            raise InputError(f"ExtensionCoil.initial_tension must be >= 0 N, got {self.initial_tension}")
        if self.free_length is not None and happens(self.free_length < self.body_length * (1 - EDGE)):
            raise InputError(
                f"ExtensionCoil.free_length must be >= the closed body ({self.body_length}) m, got {self.free_length}"
            )

    @classmethod
    def from_rate(
        cls,
        rate: ScalarLike,
        *,
        wire: ScalarLike,
        mean_diameter: ScalarLike,
        material: WireMaterial,
        initial_tension: ScalarLike | None = None,
        hook_radius: ScalarLike,
        hook_bend_radius: ScalarLike,
    ) -> ExtensionCoil:
        """The coil with as many body coils as a rate needs, whole or not.

        Parameters
        ----------
        rate
            Wanted rate [N/m] at 20 °C, > 0.
        wire, mean_diameter, material, initial_tension, hook_radius, hook_bend_radius
            As for the class.

        Raises
        ------
        InputError
            A rate that would need fewer than two coils.
        """
        d, diameter = units.metre(wire, "wire"), units.metre(mean_diameter, "mean_diameter")
        g, e = material.shear_modulus.at(d), material.young_modulus.at(d)
        active = helical_rate(g, d, diameter, units.newton_per_metre(rate, "rate"))
        return cls(
            wire=d,
            mean_diameter=diameter,
            body_coils=active - g / e,
            material=material,
            initial_tension=initial_tension,
            hook_radius=hook_radius,
            hook_bend_radius=hook_bend_radius,
        )

    @classmethod
    def from_load(
        cls,
        load: ScalarLike,
        *,
        index: float,
        rate: ScalarLike,
        material: WireMaterial,
        initial_tension: ScalarLike | None = None,
        hook_bend_index: float,
        hook_index: float | None = None,
        safety: float,
        fatigue: Fatigue | str | None = None,
        lowest_load: ScalarLike | None = None,
    ) -> ExtensionCoil:
        """The coil of the thinnest wire whose body and hooks carry a load.

        Parameters
        ----------
        load
            Greatest load [N], > 0.
        index
            Spring index D/d [1].
        rate
            Wanted rate [N/m].
        material
            The wire.
        initial_tension
            As for the class.
        hook_bend_index
            2 hook_bend_radius/d [1], > 1.
        hook_index
            2 hook_radius/d [1], > 1; None for full loops, which have the spring index.
        safety
            Factor by which the load may grow [1], > 0: 1 meets the allowable itself.
        fatigue, lowest_load
            Endless life between ``lowest_load`` [N] and ``load`` with the same factor; None for static use.

        Raises
        ------
        InputError
            No wire of the material is thick enough.
        """
        return extension_from_load(
            cls,
            load,
            index=index,
            rate=rate,
            material=material,
            initial_tension=initial_tension,
            hook_bend_index=hook_bend_index,
            hook_index=hook_index,
            safety=safety,
            fatigue=fatigue,
            lowest_load=lowest_load,
        )

    @property
    def active_coils(self) -> Carrier:
        """Active coils [1]: body coils and G/E for the hooks."""
        material = self.material
        return self.body_coils + material.shear_modulus.at(self.wire) / material.young_modulus.at(self.wire)

    @property
    def body_length(self) -> Carrier:
        """Length of the closed body [m]: (Nb + 1) d."""
        return (self.body_coils + 1.0) * self.wire

    @property
    def free_length_inside_hooks(self) -> Carrier:
        """Length inside the hooks with no load [m]."""
        if self.free_length is not None:
            return self.free_length
        return (2.0 * self.index - 1.0 + self.body_coils) * self.wire

    @property
    def mass(self) -> Carrier:
        """Mass of body and hooks [kg], each hook taken as one full loop."""
        return self.wire_mass(self.body_coils, 4.0 * math.pi * self.hook_radius)

    @property
    def zero_free_length_tension(self) -> Carrier:
        """Initial tension that would make the load proportional to the length inside the hooks [N].

        It is far above what can be wound in: hide the spring's own length behind a pulley instead.
        """
        return self.rate * self.free_length_inside_hooks

    def limit_loads(
        self,
        *,
        safety: float = 1.0,
        fatigue: Fatigue | str | None = None,
        lowest_load: ScalarLike | None = None,
        cycles: float | None = None,
        stress_factor: str | None = None,
    ) -> dict[str, Carrier]:
        """Greatest load of each part with a factor [N], by the name of the limit.

        Parameters
        ----------
        safety
            Factor by which the load may grow [1]; 1 meets the allowable itself.
        fatigue, lowest_load
            Criterion of endless life, and the lowest load of the cycle [N].
        cycles
            Number of cycles from no load, where that is known for the wire.
        stress_factor
            Factor for the body, of those that the allowable belongs to; None for the first of them.
        """
        judged = None if fatigue is None else as_fatigue(fatigue)
        low = lowest_of_cycle(lowest_load, "N", judged)
        n = positive_number(safety, "safety")
        return {check.name: check.limit(low, n) for check in self._limits(judged, cycles, stress_factor)}

    def spring(
        self,
        *,
        safety: float = 1.0,
        fatigue: Fatigue | str | None = None,
        lowest_load: ScalarLike | None = None,
        cycles: float | None = None,
        stress_factor: str | None = None,
    ) -> ExtensionSpring:
        """The spring for a mechanism, ``longest`` where the first of body and hooks meets its limit.

        Parameters
        ----------
        safety, fatigue, lowest_load, cycles, stress_factor
            As for ``limit_loads``.

        Raises
        ------
        InputError
            Initial tension not given, or above what the limits permit.
        """
        tension = self.known_tension
        judged = None if fatigue is None else as_fatigue(fatigue)
        low = lowest_of_cycle(lowest_load, "N", judged)
        least = least_limit(self._limits(judged, cycles, stress_factor), low, positive_number(safety, "safety"))
        factor = self.material.modulus_factor(self.temperature)
        if happens(least <= tension * factor):
            raise InputError(
                f"ExtensionCoil.initial_tension must be below the greatest permitted load ({least}) N, got {tension}"
            )
        free = self.free_length_inside_hooks
        return ExtensionSpring(
            self.rate,
            free_length=free,
            initial_tension=tension * factor,
            longest=free + (least - tension * factor) / self.rate,
        )

    def margins(
        self,
        loads: Any = None,
        *,
        lengths: Any = None,
        fatigue: Fatigue | str | None = None,
        cycles: float | None = None,
        frequency: ScalarLike | None = None,
        stress_factor: str | None = None,
    ) -> CoilMargins:
        """How far body and hooks are from each limit over a range of loads or lengths.

        Parameters
        ----------
        loads
            Lowest and greatest load [N]; or give ``lengths``.
        lengths
            Shortest and longest length inside the hooks [m].
        fatigue
            A criterion by name on unpeened wire, or a ``Fatigue``; None for static use.
        cycles
            Number of cycles from no load, where that is known for the wire.
        frequency
            Forcing frequency [Hz], held against the surge frequency.
        stress_factor
            Factor for the body, of those that the allowable belongs to; None for the first of them.

        Returns
        -------
        CoilMargins

        Raises
        ------
        InputError
            Not exactly one of loads and lengths; a stress factor that the allowable does not belong to.
        """
        judged = None if fatigue is None else as_fatigue(fatigue)
        return extension_margins(self, loads, lengths, frequency, self._limits(judged, cycles, stress_factor))

    def at_temperature(self, temperature: ScalarLike) -> ExtensionCoil:
        """The coil at a temperature [K]: both moduli follow the wire's slope, and rate and initial tension with them."""
        changed: ExtensionCoil = self._warmed(temperature)
        return changed

    def after(
        self,
        *,
        at: ScalarLike,
        load_loss: ScalarLike | None = None,
        time: ScalarLike | None = None,
        temperature: ScalarLike | None = None,
    ) -> ExtensionCoil:
        """The coil after relaxation, which takes initial tension away and then lengthens it; its rate stays.

        Parameters
        ----------
        at
            Length inside the hooks at which it is held [m], beyond the free length.
        load_loss
            Share of the load that is lost [1]; or give ``time``.
        time, temperature
            How long it is held [s] and how warm [K], for the wire's own relaxation parameters; None
            for the coil's temperature.
        """
        length, free = units.metre(at, "at"), self.free_length_inside_hooks
        if happens(length <= free):
            raise InputError(f"at must be > the free length ({free}) m, got {length}")
        cold = helical_rate(self.material.shear_modulus.at(self.wire), self.wire, self.mean_diameter, self.active_coils)
        load = self.known_tension + cold * (length - free)
        stress = shear_per_load(self.wire, self.mean_diameter, 1.0)
        lost = self._load_loss(load_loss, time, temperature, load, stress) * load
        left = namespace(lost).maximum(self.known_tension - lost, 0.0)
        longer = (lost - (self.known_tension - left)) / cold
        return attrs.evolve(self, initial_tension=left, free_length=free + longer)

    def _limits(self, fatigue: Fatigue | None, cycles: Any, stress_factor: str | None) -> list[Any]:
        return all_limits(
            self.material,
            self.wire,
            self.mean_diameter,
            self.hook_radius,
            self.hook_bend_radius,
            self.initial_tension,
            fatigue=fatigue,
            cycles=cycles,
            stress_factor=stress_factor,
        )

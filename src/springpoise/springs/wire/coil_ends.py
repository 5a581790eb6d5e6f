"""How the ends of a compression coil are finished, and what that makes of its coils and lengths."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.wire.coil_body import HelicalCoil
from springpoise.springs.wire.strength import happens
from springpoise.springs.wire.stress_factors import bergstraesser, shear_per_load
from springpoise.tables import facts
from springpoise.units import ScalarLike

__all__ = ["ENDS", "EndedCoil", "Ends", "SetRemoval"]


@attrs.frozen
class Ends:
    """What a way of finishing the ends costs in coils."""

    idle: float
    """Coils that do not work [1]."""
    solid: float
    """Wire diameters of solid length beyond the total coils [1]."""
    seat: float
    """Wire diameters of free length that are not pitch [1]."""
    extra_pitch: float
    """Pitches of free length beyond those of the active coils [1]."""


ENDS = {
    "plain": Ends(0.0, 1.0, 1.0, 0.0),
    "plain ground": Ends(1.0, 0.0, 0.0, 1.0),
    "squared": Ends(2.0, 1.0, 3.0, 0.0),
    "squared ground": Ends(2.0, 0.0, 2.0, 0.0),
}
"""Ways of finishing the ends (Shigley's Mechanical Engineering Design, ch. 10, as transcribed)."""


def ends_named(value: Any) -> str:
    """A way of finishing the ends, or a clear error."""
    if value not in ENDS:
        raise InputError(f"CompressionCoil.ends must be one of {', '.join(map(repr, ENDS))}, got {value!r}")
    return str(value)


@attrs.frozen(eq=False)
class SetRemoval:
    """What pressing a coil solid for the first time does, when its length was wound on purpose too long."""

    removed: Carrier
    """Share of the first free length that is lost [1]; 0.10 to 0.30 is recommended."""
    solid_stress: Carrier
    """Body stress at first solid over the yield stress as wound [1]; 1.1 to 1.3 is recommended."""

    @property
    def advisable(self) -> bool:
        """Whether both are inside the recommended ranges."""
        outside = (self.removed < 0.10) | (self.removed > 0.30) | (self.solid_stress < 1.1) | (self.solid_stress > 1.3)
        return not happens(outside)

    def __str__(self) -> str:
        rows = [
            ("length removed", f"{self.removed:.3f} of the first free length, recommended 0.10 to 0.30"),
            ("stress at first solid", f"{self.solid_stress:.3f} of yield, recommended 1.1 to 1.3"),
        ]
        return "set removal\n" + facts(rows)


class EndedCoil(HelicalCoil):
    """The part of a compression coil that follows from its ends."""

    __slots__ = ()

    ends: str
    total_coils: Carrier
    free_length: Carrier
    solid_reduction: Carrier

    @property
    def active_coils(self) -> Carrier:
        """Active coils [1]."""
        return self.total_coils - ENDS[self.ends].idle

    @property
    def solid_length(self) -> Carrier:
        """Length with all coils touching [m]."""
        return self.wire * (self.total_coils + ENDS[self.ends].solid - self.solid_reduction)

    @property
    def pitch(self) -> Carrier:
        """Distance from coil to coil with no load [m]."""
        finish = ENDS[self.ends]
        return (self.free_length - finish.seat * self.wire) / (self.active_coils + finish.extra_pitch)

    @property
    def solid_load(self) -> Carrier:
        """Load that just closes the coils [N]."""
        return self.rate * (self.free_length - self.solid_length)

    @property
    def outer_diameter_at_solid(self) -> Carrier:
        """Outer diameter when solid [m]: D' + d with D'² = D² + (p² - d²)/π² (form from memory)."""
        grown = self.mean_diameter**2.0 + (self.pitch**2.0 - self.wire**2.0) / math.pi**2
        return namespace(grown).sqrt(grown) + self.wire

    @property
    def mass(self) -> Carrier:
        """Mass [kg]; what grinding takes off is neglected."""
        return self.wire_mass(self.total_coils)

    def set_removal(self, first_free_length: ScalarLike) -> SetRemoval:
        """What it takes to remove the set from a coil wound with another free length [m], down to this one.

        Stress and yield are those of a coil as wound: Bergsträsser's factor and ``material.compression``.
        """
        first = units.metre(first_free_length, "first_free_length")
        if happens(first <= self.free_length):
            raise InputError(f"first_free_length must be > free_length ({self.free_length}) m, got {first}")
        load = self.rate * (first - self.solid_length)
        stress = load * shear_per_load(self.wire, self.mean_diameter, bergstraesser(self.index))
        allowable = self.material.allowable("compression")
        allowable.chosen("bergstraesser")
        return SetRemoval(1.0 - self.free_length / first, stress / (allowable.fraction * self.tensile_strength))

"""What becomes of a torsion coil's body as it winds up."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.wire.coil_body import Coil
from springpoise.springs.wire.strength import happens
from springpoise.units import ScalarLike

__all__ = ["AVERAGED", "THEORETICAL", "TURN", "WindingCoil"]

TURN = 2.0 * math.pi
THEORETICAL = 64.0 / TURN
"""The number in the rate per turn, E d⁴/(10.186 D Na) [1]; 10.2 in textbooks."""
AVERAGED = 10.8
"""The same with an average of coil and arbor friction in it [1]."""

_POSITION_TOLERANCE = ((3.0, 8.0), (10.0, 10.0), (20.0, 15.0), (30.0, 20.0))
_ABOVE = 25.0


class WindingCoil(Coil):
    """The part of a torsion coil that is about its winding up."""

    __slots__ = ()

    body_coils: Carrier
    legs: tuple[Carrier, Carrier]
    friction: str

    def _rate_of(self, turns: Carrier) -> Carrier:
        per_turn = AVERAGED if self.friction == "averaged" else THEORETICAL
        return self.young_modulus * self.wire**4.0 / (per_turn * TURN * self.mean_diameter * turns)

    @property
    def active_coils(self) -> Carrier:
        """Active turns [1]: the body's, and what the legs bend."""
        return self.body_coils + (self.legs[0] + self.legs[1]) / (3.0 * math.pi * self.mean_diameter)

    @property
    def rate(self) -> Carrier:
        """Rate at the coil's temperature [N·m/rad], of the kind that ``friction`` says."""
        return self._rate_of(self.active_coils)

    @property
    def rate_per_turn(self) -> Carrier:
        """The same for each turn [N·m]."""
        return self.rate * TURN

    def wound_turns(self, moment: ScalarLike) -> Carrier:
        """Turns by which the body alone winds up under a moment [1], without the legs."""
        return units.newton_metre(moment, "moment") / (self._rate_of(self.body_coils) * TURN)

    def diameter_at(self, turns: ScalarLike) -> Carrier:
        """Mean diameter when the body is wound up by so many turns [m]: D Nb/(Nb + turns), the wire keeps its length."""
        return self.mean_diameter * self.body_coils / (self.body_coils + units.number(turns, "turns"))

    def wound_diameter(self, moment: ScalarLike) -> Carrier:
        """Mean diameter under a moment [m]."""
        return self.diameter_at(self.wound_turns(moment))

    def body_length(self, moment: ScalarLike = 0.0) -> Carrier:
        """Length of a close-wound body under a moment [m]: d (Nb + 1 + turns); it grows by d a turn (from memory)."""
        return self.wire * (self.body_coils + 1.0 + self.wound_turns(moment))

    def arbor_clearance(self, moment: ScalarLike, arbor: ScalarLike) -> Carrier:
        """Diametral clearance of an arbor under a moment [m]; negative where the body binds."""
        return self.wound_diameter(moment) - self.wire - units.metre(arbor, "arbor")

    def binding_moment(self, arbor: ScalarLike) -> Carrier:
        """Moment at which the body has wound itself onto an arbor [N·m].

        Raises
        ------
        InputError
            An arbor that does not fit in with no load.
        """
        around = units.metre(arbor, "arbor") + self.wire
        if happens(around >= self.mean_diameter):
            raise InputError(
                f"arbor must be < the inner diameter with no load ({float(np.min(self.inner_diameter))}) m, got {arbor}"
            )
        return self.moment_at(around)

    def moment_at(self, mean_diameter: ScalarLike) -> Carrier:
        """Moment that winds the body up to a mean diameter [N·m]; negative for a larger one than with no load."""
        turns = self.body_coils * (self.mean_diameter / units.metre(mean_diameter, "mean_diameter") - 1.0)
        return turns * self._rate_of(self.body_coils) * TURN

    @property
    def mass(self) -> Carrier:
        """Mass of body and legs [kg]."""
        return self.wire_mass(self.body_coils, self.legs[0] + self.legs[1])

    @property
    def position_tolerance(self) -> Any:
        """Commercial tolerance of the angle between the legs [rad], ± (Shigley, as transcribed; index up to 16)."""
        where = namespace(self.body_coils).where
        result: Any = math.radians(_ABOVE) + 0.0 * self.body_coils
        for turns, angle in reversed(_POSITION_TOLERANCE):
            result = where(self.body_coils <= turns, math.radians(angle), result)
        return result

"""How much initial tension can be wound into a close-wound coil, by its index.

The stress meant is the uncorrected 8 F D/(π d³). Source: Budynas and Nisbett, Shigley's Mechanical
Engineering Design, ch. 10, as transcribed; where "far above" begins has no published formula that
was seen, and is common practice, no source.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.wire.coil_body import HelicalCoil
from springpoise.springs.wire.margins import shown
from springpoise.springs.wire.stress_factors import shear_per_load

__all__ = ["FAR_ABOVE", "ZONES", "WoundTension", "usual_stress", "zone_of"]

_PSI = 6894.757293168361

FAR_ABOVE = 1.5
"""Times the upper end of the usual range beyond which initial tension is called far above it [1]."""

ZONES = {
    "below": "difficult to control",
    "inside": "routine",
    "above": "on special request",
    "far above": "difficult to attain",
}
"""The zones and what they mean for whoever winds the spring."""


def usual_stress(index: Carrier) -> tuple[Carrier, Carrier]:
    """Usual range of the stress from initial tension [Pa], for an index from about 4 to 16.

    ``33500/exp(0.105 C) ± 1000 [4 - (C - 3)/6.5]`` psi.
    """
    middle = 33500.0 * _PSI * namespace(index).exp(-0.105 * index)
    half = 1000.0 * _PSI * (4.0 - (index - 3.0) / 6.5)
    return middle - half, middle + half


def zone_of(stress: Any, index: Any, *, far_above: float = FAR_ABOVE) -> Any:
    """``"below"``, ``"inside"``, ``"above"`` or ``"far above"`` the usual range; an array of these for arrays."""
    low, high = usual_stress(index)
    zones = np.select(
        [stress < low, stress <= high, stress <= far_above * high], ["below", "inside", "above"], "far above"
    )
    return str(zones) if zones.ndim == 0 else zones


class WoundTension(HelicalCoil):
    """The part of an extension coil that is about its initial tension."""

    __slots__ = ()

    initial_tension: Any

    @property
    def usual_initial_tension(self) -> tuple[Carrier, Carrier]:
        """Usual range of initial tension for this index [N]."""
        low, high = usual_stress(self.index)
        stress = shear_per_load(self.wire, self.mean_diameter, 1.0)
        return low / stress, high / stress

    @property
    def initial_tension_stress(self) -> Carrier:
        """Uncorrected shear stress from initial tension at 20 °C [Pa]: 8 F0 D/(π d³)."""
        return self.known_tension * shear_per_load(self.wire, self.mean_diameter, 1.0)

    def initial_tension_zone(self, *, far_above: float = FAR_ABOVE) -> Any:
        """``"below"``, ``"inside"``, ``"above"`` or ``"far above"`` the usual range for this index.

        ``far_above`` is where the last begins, in times the range's upper end [1]: common practice, no source.
        """
        return zone_of(self.initial_tension_stress, self.index, far_above=far_above)

    @property
    def known_tension(self) -> Any:
        """The initial tension at 20 °C [N].

        Raises
        ------
        InputError
            It was not given; the message says what is usual.
        """
        if self.initial_tension is None:
            low, high = self.usual_initial_tension
            raise InputError(
                "ExtensionCoil.initial_tension must be given in N, got None; measure it, or take 0 for coils wound apart. "
                f"At index {shown(self.index, '1')} the usual range is from {shown(low, 'N')} to {shown(high, 'N')}"
            )
        return self.initial_tension

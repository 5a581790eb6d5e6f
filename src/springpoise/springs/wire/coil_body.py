"""What all coils of round wire share: proportions, moduli, mass, surge."""

from __future__ import annotations

import math
import warnings
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.warnings import SpringIndexWarning, TemperatureWarning
from springpoise.springs.wire.material import WireMaterial, as_material
from springpoise.springs.wire.strength import EDGE, happens
from springpoise.springs.wire.stress_factors import shear_per_load, torsion_factor
from springpoise.units import ScalarLike

__all__ = ["Coil", "HelicalCoil"]

SURGE_RATIO = 15.0
"""Least surge frequency over forcing frequency [1]: 15 to 20 (Shigley, as transcribed)."""


def helical_rate(modulus: Carrier, wire: Carrier, mean_diameter: Carrier, active_coils: Carrier) -> Carrier:
    """Rate of a helical spring in tension or compression [N/m]: G d⁴/(8 D³ Na).

    With a rate in place of the active coils it gives the active coils.
    """
    return modulus * wire**4.0 / (8.0 * mean_diameter**3.0 * active_coils)


class Coil:
    """Proportions and wire of a coil; the kinds of coil build on it."""

    __slots__ = ()

    wire: Carrier
    mean_diameter: Carrier
    material: WireMaterial
    temperature: Carrier

    @property
    def index(self) -> Carrier:
        """Spring index [1]: mean diameter over wire."""
        return self.mean_diameter / self.wire

    @property
    def outer_diameter(self) -> Carrier:
        """Outer diameter with no load [m]."""
        return self.mean_diameter + self.wire

    @property
    def inner_diameter(self) -> Carrier:
        """Inner diameter with no load [m]."""
        return self.mean_diameter - self.wire

    @property
    def tensile_strength(self) -> Carrier:
        """Least tensile strength of the wire [Pa]."""
        return self.material.tensile_strength(self.wire)

    @property
    def young_modulus(self) -> Carrier:
        """Young's modulus at the coil's temperature [Pa]."""
        return self.material.young_modulus.at(self.wire) * self.material.modulus_factor(self.temperature)

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at the coil's temperature [Pa]."""
        return self.material.shear_modulus.at(self.wire) * self.material.modulus_factor(self.temperature)

    def wire_mass(self, turns: Carrier, straight: Carrier = 0.0) -> Carrier:
        """Mass of so many turns and a straight length of this wire [kg]; the small helix angle is neglected."""
        length = math.pi * self.mean_diameter * turns + straight
        return self.material.density * math.pi / 4.0 * self.wire * self.wire * length

    def _check_proportions(self) -> None:
        owner = type(self).__name__
        as_material(self.material, owner)
        index = self.index
        if happens((index < 3.0 * (1 - EDGE)) | (index > 16.0 * (1 + EDGE))):
            raise InputError(
                f"{owner}.mean_diameter must give a spring index D/d from 3 to 16, got {_worst(index)}; "
                "it is the mean diameter, outer less one wire"
            )
        if happens((index < 4.0 * (1 - EDGE)) | (index > 12.0 * (1 + EDGE))):
            seen = _worst(index)
            margin = f"{4.0 - seen:.2f} below 4" if seen < 4.0 else f"{seen - 12.0:.2f} above 12"
            warnings.warn(
                f"{owner}: spring index {seen:.2f} is {margin}; 4 to 12 is usual, the formulas hold from 3 to 16",
                SpringIndexWarning,
                stacklevel=4,
            )
        self.material.tensile_strength(self.wire)  # refuses wire outside the range
        top = self.material.top_temperature
        if top is not None and happens(self.temperature > top * (1 + EDGE)):
            highest = float(np.max(self.temperature))
            warnings.warn(
                f"{owner}: {highest - 273.15:.0f} degC is {highest - top:.0f} K above the top temperature of "
                f"{self.material.name}",
                TemperatureWarning,
                stacklevel=4,
            )

    def _warmed(self, temperature: ScalarLike) -> Any:
        changed: Any = self
        return attrs.evolve(changed, temperature=units.kelvin(temperature, "temperature"))

    def _load_loss(self, load_loss: Any, time: Any, temperature: Any, load: Carrier, stress: Carrier) -> Carrier:
        """Share of the load that is lost: as given, or from the wire's relaxation parameters."""
        owner = type(self).__name__
        if (load_loss is None) == (time is None):
            raise InputError(
                f"{owner}.after must be given either load_loss or time, got {'neither' if time is None else 'both'}"
            )
        if time is None:
            if temperature is not None:
                raise InputError(
                    f"{owner}.after must be given temperature only together with time, got {temperature!r}"
                )
            loss = units.number(load_loss, "load_loss")
        else:
            if self.material.relaxation is None:
                raise InputError(
                    f"WireMaterial.relaxation of {self.material.name!r} must be given as a Relaxation to compute a loss "
                    "from time, got None; or give load_loss"
                )
            warmth = self.temperature if temperature is None else units.kelvin(temperature, "temperature")
            loss = self.material.relaxation.loss(
                stress * load / self.tensile_strength, units.second(time, "time"), warmth
            )
        if happens((loss < 0.0) | (loss >= 1.0)):
            raise InputError(f"load_loss must be from 0 to below 1, got {_worst(loss)}")
        return loss


class HelicalCoil(Coil):
    """What coils in tension and in compression share: the wire twists."""

    __slots__ = ()

    @property
    def active_coils(self) -> Carrier:
        """Active coils [1]."""
        raise NotImplementedError

    @property
    def rate(self) -> Carrier:
        """Rate at the coil's temperature [N/m]."""
        return helical_rate(self.shear_modulus, self.wire, self.mean_diameter, self.active_coils)

    def surge_frequency(self, held: str = "both ends") -> Carrier:
        """Lowest frequency of the coil's own waves [Hz], with ``"both ends"`` held or ``"one end"``."""
        shares = {"both ends": 0.5, "one end": 0.25}
        if held not in shares:
            raise InputError(f"held must be 'both ends' or 'one end', got {held!r}")
        rate, mass = self.rate, self.wire_mass(self.active_coils)
        return shares[held] * namespace(rate, mass).sqrt(rate / mass)

    def body_stress(self, load: ScalarLike, stress_factor: str = "bergstraesser") -> Carrier:
        """Shear stress in the body [Pa] at a load in the coil's own direction [N], with a stress factor by name."""
        force = units.newton(load, "load")
        return force * shear_per_load(self.wire, self.mean_diameter, torsion_factor(stress_factor, self.index))


def _worst(value: Any) -> float:
    values = np.atleast_1d(np.asarray(value, dtype=np.float64))
    return float(values[np.argmax(np.abs(values - 8.0))])


def at_least(owner: str, field: str, coils: Any, least: float) -> None:
    """Refuse fewer coils than the formulas can mean."""
    if happens(coils < least * (1 - EDGE)):
        raise InputError(f"{owner}.{field} must be >= {least:g}, got {float(np.min(coils)):g}")

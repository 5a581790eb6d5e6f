"""Single limits of a coil: a stress that grows with the load, and what it may become."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.wire.fatigue import Fatigue, fatigue_factor, greatest_load
from springpoise.springs.wire.margins import Margin, limited, shown
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.strength import happens

__all__ = ["FatigueCheck", "StaticCheck", "cyclic_check", "least_limit"]


@attrs.frozen(eq=False)
class StaticCheck:
    """A stress that must stay below a permitted one."""

    name: str
    """What is compared."""
    per_load: Carrier
    """Stress for each unit of load [Pa/N, or Pa/(N·m)]."""
    permitted: Carrier
    """Permitted stress [Pa]."""
    basis: str
    """What the permitted stress rests on."""

    def margin(self, lowest: Carrier, highest: Carrier) -> Margin:
        """The margin at the greatest load."""
        return limited(self.name, self.per_load * highest, self.permitted, "Pa", self.basis)

    def limit(self, lowest: Carrier, safety: Carrier) -> Carrier:
        """The greatest load with that factor [N, or N·m]."""
        return self.permitted / (safety * self.per_load)


@attrs.frozen(eq=False)
class FatigueCheck:
    """A stress that goes to and fro without end."""

    name: str
    """What is compared."""
    per_load: Carrier
    """Stress for each unit of load [Pa/N, or Pa/(N·m)]."""
    criterion: str
    """``"sines"``, ``"gerber"`` or ``"goodman"``."""
    reversed_limit: Carrier
    """Fully reversed limit [Pa]."""
    strength: Carrier
    """Ultimate strength of that kind of stress [Pa]."""
    basis: str
    """What the limit rests on."""

    def margin(self, lowest: Carrier, highest: Carrier) -> Margin:
        """The margin of the amplitude; ``permitted`` is the amplitude where it meets the criterion."""
        amplitude = 0.5 * self.per_load * (highest - lowest)
        mean = 0.5 * self.per_load * (highest + lowest)
        factor = fatigue_factor(self.criterion, amplitude, mean, self.reversed_limit, self.strength)
        reached = amplitude * namespace(amplitude, factor).where(amplitude > 0.0, factor, 1.0)
        return Margin(self.name, amplitude, reached, factor, "Pa", self.basis)

    def limit(self, lowest: Carrier, safety: Carrier) -> Carrier:
        """The greatest load of a cycle from ``lowest`` with that factor [N, or N·m]."""
        return greatest_load(self.criterion, lowest, self.per_load, self.reversed_limit, self.strength, safety)


Check = StaticCheck | FatigueCheck


def static_basis(material: WireMaterial, kind: str, factor: str) -> str:
    """How a static limit reads in a result."""
    allowable = material.allowable(kind)
    return f"{shown(allowable.fraction, '1')} of tensile strength, {factor} factor; {allowable.source}"


def cyclic_check(
    material: WireMaterial, kind: str, name: str, cycles: Any, per_load: Carrier, tensile: Carrier
) -> StaticCheck:
    """A limit on the greatest stress of so many cycles that start at no load."""
    wanted = units.number(cycles, "cycles")
    share, known = material.cyclic_limit(kind, wanted)
    return StaticCheck(
        f"{name}, {known:g} cycles", per_load, share * tensile, f"{shown(share, '1')} of tensile strength"
    )


def least_limit(checks: Sequence[Check], lowest: Carrier, safety: Carrier) -> Carrier:
    """The greatest load that every limit permits with that factor [N, or N·m]."""
    least = checks[0].limit(lowest, safety)
    for check in checks[1:]:
        other = check.limit(lowest, safety)
        least = namespace(least, other).minimum(least, other)
    return least


def positive_number(value: Any, name: str) -> Any:
    """A pure number above zero."""
    result = units.number(value, name)
    if happens(result <= 0.0):
        raise InputError(f"{name} must be > 0, got {result}")
    return result


def single_positive(value: Any, name: str) -> float:
    """One pure number above zero, not an array: what sizing starts from."""
    result = positive_number(value, name)
    if not isinstance(result, float):
        raise InputTypeError(f"{name} must be a single value > 0, got {value!r}; size one coil at a time")
    return result


def lowest_of_cycle(value: Any, unit: str, fatigue: Fatigue | None) -> Any:
    """The lowest load of a cycle, which a fatigue limit cannot do without."""
    if value is None:
        if fatigue is not None:
            raise InputError(f"lowest_load must be given in {unit} together with fatigue, got None")
        return 0.0
    return units.scalar_si(value, unit, "lowest_load")


def cycle_of(value: Any, unit: str, name: str) -> tuple[Any, Any]:
    """A cycle (lowest, greatest) of loads, both >= 0, in order."""
    low, high = units.pair(value, unit, name)
    if happens(low < 0.0):
        raise InputError(
            f"{name} must be >= 0 {unit}, got {low}; a load in the spring's own direction counts positive here"
        )
    if happens(high < low):
        raise InputError(f"{name} must be (lowest, greatest) {unit}, got {(low, high)}")
    return low, high


def clash_share(clash_allowance: Any) -> Any:
    """Load at solid over the greatest load [1], from an allowance that is not negative."""
    allowance = units.number(clash_allowance, "clash_allowance")
    if happens(allowance < 0.0):
        raise InputError(f"clash_allowance must be >= 0, got {allowance}")
    return 1.0 + allowance

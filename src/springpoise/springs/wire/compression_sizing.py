"""Wire or index of a compression coil for a load."""

from __future__ import annotations

from typing import Any

from springpoise import units
from springpoise.errors import InputError
from springpoise.springs.wire.coil_checks import clash_share, single_positive
from springpoise.springs.wire.coil_sizing import index_for_load, smallest_wire
from springpoise.springs.wire.fatigue import Fatigue, endurance, fatigue_factor
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.stress_factors import bergstraesser, shear_per_load

__all__ = ["compression_from_load"]

TIGHTEST, LOOSEST = 3.0, 16.0
HALVINGS = 60


def compression_from_load(
    load: Any,
    material: WireMaterial,
    safety: Any,
    wire: Any,
    index: Any,
    clash_allowance: Any,
    fatigue: Fatigue | None,
    lowest: float,
) -> tuple[float, float, float]:
    """Wire, mean diameter [m] and load at solid [N] of the coil that just carries a load."""
    if (wire is None) == (index is None):
        raise InputError(f"from_load must be given either wire or index, got {'neither' if wire is None else 'both'}")
    force = single_positive(units.newton(load, "load"), "load")
    n = single_positive(safety, "safety")
    solid = clash_share(clash_allowance) * force
    share = material.allowable("compression").fraction

    def carried(d: float, c: float) -> float:
        """Permitted over wanted load."""
        tensile = material.tensile_strength(d)
        stress = shear_per_load(d, c * d, bergstraesser(c))
        if fatigue is None:
            return float(share * tensile / (n * stress * solid))
        shear = material.shear_strength * tensile
        limit = endurance(fatigue, d, shear, spring_steel=material.spring_steel)
        half = 0.5 * stress
        lasts = fatigue_factor(fatigue.criterion, half * (force - lowest), half * (force + lowest), limit, shear) / n
        return float(min(lasts, share * tensile / (stress * solid)))

    if index is not None:
        c = single_positive(index, "index")
        d = smallest_wire(material, lambda d: carried(d, c), f"a load of {force:g} N")
        return d, c * d, float(solid)
    d = single_positive(units.metre(wire, "wire"), "wire")
    if fatigue is None:
        c = float(index_for_load(share * material.tensile_strength(d) / n, d, solid))
    else:
        c = _loosest_index(lambda c: carried(d, c))
    if not c >= TIGHTEST:
        raise InputError(
            f"wire must carry {force:g} N at an index of {TIGHTEST:g} or more, and {d * 1e3:g} mm carries "
            f"{carried(d, TIGHTEST):.3g} of it there; take thicker wire"
        )
    return d, c * d, float(solid)


def _loosest_index(carried: Any) -> float:
    """The largest index that still carries the load, from the least on; below it where none does."""
    low, high = TIGHTEST, LOOSEST
    if carried(low) < 1.0:
        return 0.0
    if carried(high) >= 1.0:
        return high
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if carried(middle) >= 1.0 else (low, middle)
    return low

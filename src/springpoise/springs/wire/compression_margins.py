"""The limits of a compression coil: stress, solid, clash, buckling, rod and bore."""

from __future__ import annotations

import warnings
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.warnings import BucklingWarning, CoilCountWarning
from springpoise.springs.wire.buckling import GUIDED
from springpoise.springs.wire.coil_body import SURGE_RATIO
from springpoise.springs.wire.coil_checks import (
    Check,
    FatigueCheck,
    StaticCheck,
    clash_share,
    cycle_of,
    cyclic_check,
    least_limit,
    static_basis,
)
from springpoise.springs.wire.fatigue import ZIMMERLI_PEENED, Fatigue, endurance
from springpoise.springs.wire.margins import CoilMargins, limited, shown
from springpoise.springs.wire.strength import happens
from springpoise.springs.wire.stress_factors import bergstraesser, shear_per_load, torsion_factor

if TYPE_CHECKING:
    from springpoise.springs.wire.compression_coil import CompressionCoil

__all__ = ["CLASH_ALLOWANCE", "all_limits", "compression_margins", "warn_of_buckling", "warn_of_coils"]

CLASH_ALLOWANCE = 0.15
"""Load at solid over the greatest load, less 1 [1], that is recommended (Shigley, as transcribed)."""
SOLID_SAFETY = 1.2
"""Factor at solid that is recommended for a coil as wound [1] (Shigley, as transcribed)."""


def warn_of_coils(owner: str, active: Carrier) -> None:
    """Warn of active coils outside 3 to 15."""
    if happens((active < 3.0) | (active > 15.0)):
        seen = np.atleast_1d(active)
        worst = float(seen[np.argmax(np.abs(seen - 9.0))])
        margin = f"{3.0 - worst:.2f} below 3" if worst < 3.0 else f"{worst - 15.0:.2f} above 15"
        warnings.warn(
            f"{owner}: {worst:.2f} active coils are {margin}; 3 to 15 are recommended", CoilCountWarning, stacklevel=4
        )


def warn_of_buckling(coil: CompressionCoil, stroke: Carrier) -> None:
    """Warn where an unguided coil bows out within a stroke [m]."""
    if coil.support == GUIDED:
        return
    stated = coil.support is not None
    critical = coil.critical_shortening(None if stated else "both ends pivoted")
    if happens(critical < stroke):
        at, wanted = float(np.min(critical)) * 1e3, float(np.max(stroke)) * 1e3
        held = f"with {coil.support!r}" if stated else "if both ends are pivoted"
        hint = "guide it on a rod or in a bore" if stated else "state support, or guide it"
        warnings.warn(
            f"CompressionCoil: unguided it bows out {held} at {at:.4g} mm of shortening, "
            f"{wanted - at:.3g} mm before the {wanted:.4g} mm wanted; {hint}",
            BucklingWarning,
            stacklevel=3,
        )


def all_limits(coil: CompressionCoil, fatigue: Fatigue | None, cycles: Any, stress_factor: str | None) -> list[Check]:
    """Every limit on the stress of the body; the first is the static one."""
    material, tensile = coil.material, coil.tensile_strength
    kind = "compression_set_removed" if coil.set_removed else "compression"
    allowable = material.allowable(kind)
    used = allowable.chosen(stress_factor)
    nominal = shear_per_load(coil.wire, coil.mean_diameter, 1.0)
    checks: list[Check] = [
        StaticCheck(
            "body, static",
            nominal * torsion_factor(used, coil.index),
            allowable.fraction * tensile,
            static_basis(material, kind, used),
        )
    ]
    corrected = nominal * bergstraesser(coil.index)
    if cycles is not None:
        peened = fatigue is not None and fatigue.point == ZIMMERLI_PEENED
        column = "compression_peened" if peened else "compression"
        checks.append(cyclic_check(material, column, "body", cycles, corrected, tensile))
    if fatigue is not None:
        shear = material.shear_strength * tensile
        limit = endurance(fatigue, coil.wire, shear, spring_steel=material.spring_steel)
        checks.append(FatigueCheck("body, fatigue", corrected, fatigue.criterion, limit, shear, str(fatigue)))
    return checks


def compression_margins(
    coil: CompressionCoil,
    loads: Any,
    lengths: Any,
    checks: list[Check],
    *,
    frequency: Any,
    clash_allowance: Any,
    rod: Any,
    bore: Any,
) -> CoilMargins:
    """All margins of a compression coil over a range of pushes or lengths."""
    rate = coil.rate
    if (loads is None) == (lengths is None):
        raise InputError(
            f"margins must be given either loads in N or lengths in m, got {'neither' if loads is None else 'both'}"
        )
    if loads is not None:
        low, high = cycle_of(loads, "N", "loads")
    else:
        shortest, longest = cycle_of(lengths, "m", "lengths")
        low, high = (
            rate * namespace(x, coil.free_length).maximum(coil.free_length - x, 0.0) for x in (longest, shortest)
        )
    shortening, solid = high / rate, coil.solid_load
    margins = [check.margin(low, high) for check in checks]
    static = checks[0]
    closed = static.per_load * solid
    wanted = 1.0 if coil.set_removed else SOLID_SAFETY
    assert isinstance(static, StaticCheck)
    margins.insert(1, limited("body, solid", closed, static.permitted, "Pa", static.basis, wanted))
    allowance = clash_share(clash_allowance)
    limit = solid / allowance
    margins.append(limited("clash", high, solid, "N", "load at solid over greatest load", allowance))
    notes = []
    if coil.support is None:
        pivoted = coil.critical_shortening("both ends pivoted")
        notes.append(f"buckling: support not given; with both ends pivoted from {shown(pivoted, 'm')} of shortening")
    elif coil.support != GUIDED:
        critical, basis = coil.critical_shortening(), f"support {coil.support!r}"
        if np.all(np.isinf(critical)):  # no shortening bows it out; how much longer could it be?
            margins.append(limited("buckling, free length", coil.free_length, coil.stable_length(), "m", basis))
        else:
            margins.append(limited("buckling, shortening", shortening, critical, "m", basis))
            limit = namespace(limit, critical).minimum(limit, rate * critical)
    if rod is not None:
        diameter = units.metre(rod, "rod")
        margins.append(limited("rod", diameter, coil.inner_diameter, "m", "inner diameter with no load"))
    if bore is not None:
        around = units.metre(bore, "bore")
        margins.append(limited("bore", coil.outer_diameter_at_solid, around, "m", "outer diameter at solid"))
    if frequency is not None:
        forced = units.scalar_si(frequency, "Hz", "frequency")
        margins.append(limited("surge", forced, coil.surge_frequency(), "Hz", "both ends held", SURGE_RATIO))
    warn_of_buckling(coil, shortening)
    left = namespace(high, limit).minimum(least_limit(checks, low, 1.0), limit) - high
    notes.append(
        f"rate {shown(rate, 'N/m')}, free {shown(coil.free_length, 'm')}, solid {shown(coil.solid_length, 'm')} at "
        f"{shown(solid, 'N')}, mass {shown(coil.mass * 1e3, 'g')}, surge {shown(coil.surge_frequency(), 'Hz')}"
    )
    return CoilMargins(
        title=f"compression coil, {shown(low, 'N')} to {shown(high, 'N')}",
        margins=tuple(margins),
        load_left=left,
        travel_left=left / rate,
        energy=0.5 * rate * shortening * shortening,
        notes=tuple(notes),
    )

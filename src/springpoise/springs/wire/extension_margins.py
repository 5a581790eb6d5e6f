"""The limits of an extension coil: body, bending and torsion of its hooks."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.wire.coil_body import SURGE_RATIO
from springpoise.springs.wire.coil_checks import (
    Check,
    FatigueCheck,
    StaticCheck,
    cycle_of,
    cyclic_check,
    least_limit,
    static_basis,
)
from springpoise.springs.wire.fatigue import SHEAR_OVER_BENDING, Fatigue, endurance
from springpoise.springs.wire.initial_tension import ZONES, usual_stress
from springpoise.springs.wire.margins import CoilMargins, Margin, limited, shown
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.stress_factors import (
    bergstraesser,
    hook_bending,
    hook_torsion,
    shear_per_load,
    torsion_factor,
)

if TYPE_CHECKING:
    from springpoise.springs.wire.extension_coil import ExtensionCoil

__all__ = ["all_limits", "extension_margins"]


def hook_bending_per_load(wire: Carrier, mean_diameter: Carrier, hook_radius: Carrier) -> Carrier:
    """Stress where a hook leaves the body [Pa/N]: bending by the lever of half a diameter, and tension."""
    factor = hook_bending(2.0 * hook_radius / wire)
    return factor * 16.0 * mean_diameter / (math.pi * wire**3.0) + 4.0 / (math.pi * wire * wire)


def all_limits(
    material: WireMaterial,
    wire: Carrier,
    mean_diameter: Carrier,
    hook_radius: Carrier,
    hook_bend_radius: Carrier,
    initial_tension: Carrier | None,
    *,
    fatigue: Fatigue | None = None,
    cycles: Any = None,
    stress_factor: str | None = None,
) -> list[Check]:
    """Every limit on the load; with initial tension above the usual range the body takes the hook's share."""
    index = mean_diameter / wire
    tensile = material.tensile_strength(wire)
    nominal = shear_per_load(wire, mean_diameter, 1.0)
    allowable = material.allowable("extension_body")
    used = allowable.chosen(stress_factor)
    body = nominal * torsion_factor(used, index)
    bending = hook_bending_per_load(wire, mean_diameter, hook_radius)
    torsion = nominal * hook_torsion(2.0 * hook_bend_radius / wire)
    share: Carrier = allowable.fraction
    if initial_tension is not None:
        high = initial_tension * nominal > usual_stress(index)[1]
        share = namespace(wire, initial_tension, share).where(high, material.allowable("hook_torsion").fraction, share)
    checks: list[Check] = [
        StaticCheck("body, static", body, share * tensile, static_basis(material, "extension_body", used)),
        StaticCheck(
            "hook bending, static",
            bending,
            material.allowable("hook_bending").fraction * tensile,
            static_basis(material, "hook_bending", "hook bending"),
        ),
        StaticCheck(
            "hook torsion, static",
            torsion,
            material.allowable("hook_torsion").fraction * tensile,
            static_basis(material, "hook_torsion", "hook torsion"),
        ),
    ]
    corrected = nominal * bergstraesser(index)
    if cycles is not None:
        checks += [
            cyclic_check(material, "extension_body", "body", cycles, corrected, tensile),
            cyclic_check(material, "hook_bending", "hook bending", cycles, bending, tensile),
            cyclic_check(material, "hook_torsion", "hook torsion", cycles, torsion, tensile),
        ]
    if fatigue is not None:
        shear = material.shear_strength * tensile
        steel = material.spring_steel
        hooks, across = fatigue.at_hooks, fatigue.in_bending
        limit = endurance(fatigue, wire, shear, spring_steel=steel)
        twisted = endurance(hooks, wire, shear, spring_steel=steel)
        bent = endurance(across, wire, shear, spring_steel=steel) / SHEAR_OVER_BENDING
        checks += [
            FatigueCheck("body, fatigue", corrected, fatigue.criterion, limit, shear, str(fatigue)),
            FatigueCheck("hook bending, fatigue", bending, across.criterion, bent, tensile, str(across)),
            FatigueCheck("hook torsion, fatigue", torsion, hooks.criterion, twisted, shear, str(hooks)),
        ]
    return checks


def extension_margins(
    coil: ExtensionCoil, loads: Any, lengths: Any, frequency: Any, checks: list[Check]
) -> CoilMargins:
    """All margins of an extension coil over a range of loads or lengths."""
    tension = coil.known_tension * coil.material.modulus_factor(coil.temperature)
    rate, free = coil.rate, coil.free_length_inside_hooks
    if (loads is None) == (lengths is None):
        raise InputError(
            f"margins must be given either loads in N or lengths in m, got {'neither' if loads is None else 'both'}"
        )
    if loads is not None:
        low, high = cycle_of(loads, "N", "loads")
    else:
        shortest, longest = cycle_of(lengths, "m", "lengths")
        line = [tension + rate * (x - free) for x in (shortest, longest)]
        low, high = (namespace(x, f).where(x > free, f, 0.0) for x, f in zip((shortest, longest), line, strict=True))
    margins = [check.margin(low, high) for check in checks]
    margins.insert(1, _yield_line(checks[0], tension, high))
    notes = [
        f"initial tension {shown(tension, 'N')}, {_zone(coil)}",
        f"rate {shown(rate, 'N/m')}, free length {shown(free, 'm')}, mass {shown(coil.mass * 1e3, 'g')}, "
        f"surge {shown(coil.surge_frequency(), 'Hz')}",
    ]
    if frequency is not None:
        forced = units.scalar_si(frequency, "Hz", "frequency")
        margins.append(limited("surge", forced, coil.surge_frequency(), "Hz", "both ends held", SURGE_RATIO))
    limit = least_limit(checks, low, 1.0)
    opened = namespace(high, tension).maximum(high, tension)
    stretch = (opened - tension) / rate
    return CoilMargins(
        title=f"extension coil, {shown(low, 'N')} to {shown(high, 'N')}",
        margins=tuple(margins),
        load_left=limit - high,
        travel_left=(limit - opened) / rate,
        energy=(tension + 0.5 * rate * stretch) * stretch,
        notes=tuple(notes),
    )


def _yield_line(body: Any, tension: Carrier, highest: Carrier) -> Margin:
    """The body's yield when the load grows from the initial tension, not from zero."""
    start, stress = body.per_load * tension, body.per_load * highest
    xp = namespace(start, stress)
    grown = xp.where(stress > start, stress - start, 0.0)
    return limited("body, static, from initial tension", grown, body.permitted - start, "Pa", body.basis)


def _zone(coil: ExtensionCoil) -> str:
    zone = coil.initial_tension_zone()
    low, high = coil.usual_initial_tension
    if not isinstance(zone, str):
        return "see initial_tension_zone()"
    return f"{zone} the usual {shown(low, 'N')} to {shown(high, 'N')}: {ZONES[zone]}"

"""The limits of a torsion coil: bending at the inner fibre, and its arbor."""

from __future__ import annotations

import math
import warnings
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.warnings import CoilCountWarning
from springpoise.springs.wire.coil_checks import Check, FatigueCheck, StaticCheck, cycle_of, least_limit, static_basis
from springpoise.springs.wire.fatigue import repeated_bending_limit
from springpoise.springs.wire.margins import CoilMargins, limited, shown
from springpoise.springs.wire.material import WireMaterial
from springpoise.springs.wire.strength import happens
from springpoise.springs.wire.stress_factors import bending_inner, bending_per_moment

if TYPE_CHECKING:
    from springpoise.springs.wire.torsion_coil import TorsionCoil

__all__ = ["all_limits", "torsion_margins", "warn_of_turns"]


def warn_of_turns(active: Carrier) -> None:
    """Warn of fewer than three active turns."""
    if happens(active < 3.0):
        least = float(np.min(active))
        warnings.warn(
            f"TorsionCoil: {least:.2f} active turns are {3.0 - least:.2f} below 3; the formulas hold from 3 on",
            CoilCountWarning,
            stacklevel=4,
        )


def all_limits(
    material: WireMaterial, wire: Carrier, mean_diameter: Carrier, cycles: Any, *, peened: bool
) -> list[Check]:
    """Every limit on the moment: yield and, for a number of cycles, repeated bending by Gerber."""
    tensile = material.tensile_strength(wire)
    allowable = material.allowable("torsion_body")
    stress = bending_per_moment(wire, bending_inner(mean_diameter / wire))
    basis = static_basis(material, "torsion_body", allowable.chosen("inner fibre"))
    checks: list[Check] = [StaticCheck("bending, static", stress, allowable.fraction * tensile, basis)]
    if cycles is not None:
        column = "torsion_body_peened" if peened else "torsion_body"
        share, known = material.cyclic_limit(column, units.number(cycles, "cycles"))
        limit = repeated_bending_limit(share * tensile, tensile)
        note = f"gerber, {shown(share, '1')} of tensile strength in repeated bending"
        checks.append(FatigueCheck(f"bending, {known:g} cycles", stress, "gerber", limit, tensile, note))
    return checks


def torsion_margins(coil: TorsionCoil, moments: Any, angles: Any, checks: list[Check], arbor: Any) -> CoilMargins:
    """All margins of a torsion coil over a range of moments or angles of winding up."""
    rate = coil.rate
    if (moments is None) == (angles is None):
        raise InputError(
            f"margins must be given either moments in N*m or angles in rad, got {'neither' if moments is None else 'both'}"
        )
    if moments is not None:
        low, high = cycle_of(moments, "N*m", "moments")
    else:
        low, high = (rate * angle for angle in cycle_of(angles, "rad", "angles"))
    margins = [check.margin(low, high) for check in checks]
    limit = least_limit(checks, low, 1.0)
    if arbor is not None:
        inside = coil.wound_diameter(high) - coil.wire
        binding = coil.moment_at(coil.wire + units.metre(arbor, "arbor"))
        limit = namespace(limit, binding).minimum(limit, binding)
        margins.append(
            limited("arbor", units.metre(arbor, "arbor"), inside, "m", "inner diameter at the greatest moment")
        )
    notes = [
        f"rate {shown(rate, 'N*m/rad')} ({'averaged friction' if coil.friction == 'averaged' else 'theoretical'}), "
        f"friction band ±{shown(coil.winding_friction * high, 'N*m')}, wound up {shown(high / rate * 180 / math.pi, 'deg')}",
        f"mean diameter {shown(coil.wound_diameter(high), 'm')}, close-wound body {shown(coil.body_length(high), 'm')} at "
        f"the greatest moment; legs within ±{shown(coil.position_tolerance * 180 / math.pi, 'deg')}, mass {shown(coil.mass * 1e3, 'g')}",
        "load it in its winding direction only",
    ]
    return CoilMargins(
        title=f"torsion coil, {shown(low, 'N*m')} to {shown(high, 'N*m')}",
        margins=tuple(margins),
        load_left=limit - high,
        travel_left=(limit - high) / rate,
        energy=0.5 * high * high / rate,
        notes=tuple(notes),
        travel_unit="rad",
        load_unit="N*m",
    )

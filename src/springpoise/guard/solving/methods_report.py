"""A comparison of methods as part of a design's report, and as JSON."""

from __future__ import annotations

import math
import textwrap
from typing import Any

from springpoise.balance import MethodComparison, MethodRow
from springpoise.guard.amounts import finite_or_none
from springpoise.tables import grid, number

__all__ = ["methods_dict", "methods_text"]

WIDTH = 100
HEADER = ("method", "worst", "exact", "friction", "up", "down", "hold", "pivot", "energy", "inertia")
UNITS = ("", "%", "angles", "N*m", "N*m", "N*m", "N*m", "N", "J", "kg*m2")


def methods_text(found: MethodComparison, standing: str, load: str) -> str:
    """The table, a sentence on where the design stands, and what each method would be made of.

    Parameters
    ----------
    standing
        Where the design stands.
    load
        What is on the arm, in words.
    """
    header = [*HEADER, f"{found.warming:+.3g} K", f"{100 * found.payload_change:+.3g} %"]
    rows = [[*UNITS, "%", "%"], *(_cells(row, found) for row in found.rows)]
    if found.norm == "rms":  # that is what was made least; there is room for it or for friction
        header[3] = "rms"
        rows[0][3] = "%"
    peak = number(found.peak_gravity_torque, "N*m")
    lines = [f"Ways to balance this arm {load}; percent of the peak gravity torque, {peak}", grid(header, rows)]
    lines.append(
        "  exact: angles of exact balance; up, down: torque to raise, to lower it slowly; hold: torque to\n"
        "  hold it at rest, friction helping; <: at most that; +: change of worst if warmer, heavier"
    )
    if standing:
        lines.append(_wrapped(standing))
    lines += [_wrapped(_sizes(row)) for row in found.rows]
    return "\n".join(lines)


def _sizes(row: MethodRow) -> str:
    return f"{row.name}: {row.sizes}" if row.success else f"{row.name}: cannot be sized: {row.sizes}"


def _wrapped(text: str) -> str:
    return textwrap.fill(text, WIDTH, initial_indent="  ", subsequent_indent="    ", break_long_words=False)


def _cells(row: MethodRow, found: MethodComparison) -> list[str]:
    one, peak = row.figures, found.peak_gravity_torque
    if one is None:
        return [row.name, *("-" for _ in range(len(HEADER) + 1))]
    return [
        row.name,
        f"{100 * one.residual.worst_fraction:.2f}",
        "~all" if one.balances == "near all" else one.balances,
        f"{100 * one.residual.rms_fraction:.2f}" if found.norm == "rms" else _torque(one.friction, peak),
        _torque(one.effort_up, peak),
        _torque(one.effort_down, peak),
        _torque(one.must_hold, peak),
        ("" if one.pivot_load_known else "<") + f"{one.pivot_load:.0f}",
        f"{one.stored_energy:.3g}",
        f"{one.inertia:.2g}" if one.inertia else "0",
        f"{100 * one.warmer:+.1f}",
        f"{100 * one.heavier:+.1f}",
    ]


def _torque(value: float, peak: float) -> str:
    """To a thousandth of the peak, as percents are."""
    return f"{value:.{max(0, 2 - math.floor(math.log10(peak)))}f}"


def methods_dict(found: MethodComparison, standing: str) -> dict[str, Any]:
    """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
    return {
        "norm": found.norm,
        "peak_gravity_torque_Nm": found.peak_gravity_torque,
        "warming_K": found.warming,
        "payload_change": found.payload_change,
        "ranking": list(found.ranking),
        "standing": standing,
        "methods": [_row_dict(row) for row in found.rows],
    }


def _row_dict(row: MethodRow) -> dict[str, Any]:
    one = row.figures
    known = {"method": row.method, "name": row.name, "sized": row.success, "sizes": row.sizes}
    if one is None:
        return known
    return known | {
        "worst_Nm": one.residual.worst,
        "worst_fraction": finite_or_none(one.residual.worst_fraction),
        "rms_Nm": one.residual.rms,
        "rms_fraction": finite_or_none(one.residual.rms_fraction),
        "balances": one.balances,
        "friction_Nm": one.friction,
        "stays_share": one.stays_share,
        "effort_up_Nm": one.effort_up,
        "effort_down_Nm": one.effort_down,
        "must_hold_Nm": one.must_hold,
        "pivot_load_N": finite_or_none(one.pivot_load),
        "pivot_load_known": one.pivot_load_known,
        "stored_energy_J": one.stored_energy,
        "inertia_kg_m2": one.inertia,
        "warmer": finite_or_none(one.warmer),
        "heavier": finite_or_none(one.heavier),
    }

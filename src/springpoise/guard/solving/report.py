"""A design as a report that a person can build from, and as JSON."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from springpoise.balance import Residual, StockCandidate
from springpoise.guard.amounts import finite_or_none, shown
from springpoise.guard.check import table_of
from springpoise.guard.safety import CAUTION
from springpoise.guard.solving.figures import (
    At,
    HoldFigures,
    PlaceFigures,
    SpringFigures,
    hold_figures,
    rests_alone,
    spring_figures,
)
from springpoise.guard.solving.methods import standing
from springpoise.guard.solving.methods_report import methods_dict, methods_text
from springpoise.tables import facts, grid, number

if TYPE_CHECKING:
    from springpoise.guard.solving.solve import Design

__all__ = ["design_dict", "design_text"]

WIDTH = 100
END_OF_RANGE = {
    "compression": ("going solid", "going slack"),
    "torsion": ("the lower end of its range", "the upper end of its range"),
    "compression coil": ("the shortest that its limits permit", "going slack"),
    "torsion coil": ("the lower end of its range", "the upper end of its range"),
    "spiral": ("the lower end of its range", "the upper end of its range"),
    "torque curve": ("let down", "wound up"),
    "gas spring": ("rod fully in", "rod fully out"),
    "measured": ("the first reading", "the last reading"),
    "measured torsion": ("the first reading", "the last reading"),
}
"""What lies beyond the two ends of a spring's working range, where it is not slack and overstretched."""

POSES = 721


# ------------------------------------------------------------------------------------------------
# text


def design_text(found: Design) -> str:
    """The report."""
    document, request = found.document, found.document.design
    assert request is not None
    load = f"with payload {request.payload!r}" if request.payload else "without payload"
    low, high = document.mechanism.travel_or_turn
    travel = f"{shown(low, 'rad')} to {shown(high, 'rad')}"
    blocks = [document.title or document.called, _wrapped(f"{request.method} design: {found.status}", "")]
    blocks.append(_headed(f"Residual torque over {travel}, {load}, friction left out", _residuals(found)))
    if found.solved is not None:
        blocks += _solved_blocks(found)
    if found.study is not None:
        blocks.append(str(found.study))
    blocks += _search_blocks(found)
    if found.methods is not None:
        blocks.append(methods_text(found.methods, _standing(found), load))
    blocks.append(_wrapped(f"Caution: {CAUTION}", ""))
    return "\n\n".join(blocks)


def _residuals(found: Design) -> str:
    given = "as given" if found.document.mechanism.springs else "without springs"
    rows = [_residual_row(f"before, {given}", found.before)]
    if found.after is not None:
        rows.append(_residual_row("after", found.after))
    header = ("", "worst N*m", "% of peak", "at deg", "rms N*m", "% of peak")
    peak = f"  peak gravity torque {shown(found.before.peak_gravity_torque, 'N*m')}, over {found.before.poses} poses"
    return grid(header, rows) + "\n" + peak


def _residual_row(name: str, one: Residual) -> tuple[str, ...]:
    return (
        name,
        number(one.worst, "1"),
        f"{100 * one.worst_fraction:.2f}",
        f"{math.degrees(one.worst_at):.2f}",
        number(one.rms, "1"),
        f"{100 * one.rms_fraction:.2f}",
    )


def _solved_blocks(found: Design) -> list[str]:
    solved, request = found.solved, found.document.design
    assert solved is not None and request is not None
    loaded = solved.with_payload(request.payload)
    q = loaded.poses(POSES)
    blocks = ["Mounts, measured from the pivot: on the ground x right and y up, on the arm x along the arm"]
    blocks += [_spring_block(figures) for figures in spring_figures(solved.mechanism, q)]
    energy, pivot = At.greatest(loaded.spring_energy(q), q), At.greatest(loaded.pivot_load(q), q)
    band = At.greatest(loaded.friction_band(q), q)
    rows = [
        ("stored energy, all springs", f"at most {shown(energy.value, 'J')}, at {shown(energy.pose, 'rad')}"),
        ("load on the pivot", f"at most {shown(pivot.value, 'N')}, at {shown(pivot.pose, 'rad')}"),
        ("friction band", f"up to +-{shown(band.value, 'N*m')}, at {shown(band.pose, 'rad')}"),
        ("stays put by friction alone", _ranges(rests_alone(loaded, q), (float(q[0]), float(q[-1])))),
        ("without friction", str(loaded.equilibria())),
    ]
    lines = [_wrapped_fact(name, text) for name, text in rows]
    payload = f" with payload {request.payload!r}" if request.payload else ""
    blocks.append(_headed(f"The whole{payload}", "\n".join(lines)))
    blocks.append(
        _headed("What the actuator must still give, greatest over the travel", _holds(hold_figures(solved, q)))
    )
    if found.report is not None:
        blocks.append(_headed(f"Limits: {found.report.status}", _limits(found.report)))
        if found.report.warnings:
            told = "\n".join(_wrapped(f"warning: {text}", "  ") for text in found.report.warnings)
            blocks.append(_headed("Warnings", told))
    return blocks


def _spring_block(one: SpringFigures) -> str:
    times = f"{one.count} x " if one.count > 1 else "1 x "
    sizes = ", ".join(f"{name.replace('_', ' ')} {shown(value, unit)}" for name, value, unit in one.sizes)
    kind = one.kind if one.kind.endswith(("spring", "coil", "tube")) else f"{one.kind} spring"
    lines = [_wrapped(f"{times}{one.name}, {kind}{': ' if sizes else ''}{sizes}", "  ")]
    if one.places:
        lines.append(
            grid(
                ("point", "fixed in", "x mm", "y mm", ""),
                [(p.what, p.body, f"{1e3 * p.x:.1f}", f"{1e3 * p.y:.1f}", _note(p)) for p in one.places],
                indent="    ",
            )
        )
    low, high = END_OF_RANGE.get(one.kind, ("going slack", "the longest length"))
    rows = [
        ("side by side", f"{one.count} springs, each on its own points" if one.count > 1 and one.places else ""),
        ("rest of the path", _rigid(one)),
        ("angle of one" if one.unit == "rad" else "length of one", _between(one.shortest, one.longest, one.unit)),
        (
            "torque of one" if one.unit == "rad" else "load of one",
            _between(one.least_load, one.greatest_load, one.load_unit),
        ),
        ("to check the build", _setting(one)),
        (f"margin to {low}", shown(one.low_margin, one.unit)),
        (f"margin to {high}", shown(one.high_margin, one.unit)),
    ]
    return "\n".join([*lines, facts([row for row in rows if row[1]], indent="    ")])


def _between(low: At, high: At, unit: str) -> str:
    return (
        f"{shown(low.value, unit)} at {shown(low.pose, 'rad')} to "
        f"{shown(high.value, unit)} at {shown(high.pose, 'rad')}"
    )


def _note(place: PlaceFigures) -> str:
    if place.radius is None:
        return ""
    return f"cable runs {place.turn} at radius {1e3 * place.radius:.1f} mm"


def _rigid(one: SpringFigures) -> str:
    if one.unit == "rad" or not one.places:
        return ""
    if one.rigid_length == 0.0:
        return "none, the hooks sit on the points"
    what = "cable" if len(one.places) > 2 else "cable or rod"
    return f"{1e3 * one.rigid_length:.1f} mm of {what}, inside the hook to the end point"


def _setting(one: SpringFigures) -> str:
    return (
        f"with the arm at {shown(one.setting.pose, 'rad')}: {shown(one.setting.value, one.unit)}, "
        f"{shown(one.setting_load, one.load_unit)}"
    )


def _ranges(ranges: Sequence[tuple[float, float]], travel: tuple[float, float]) -> str:
    if not ranges:
        return "nowhere"
    if tuple(ranges) == (travel,):
        return "everywhere"
    listed = [f"{shown(a, 'rad')} to {shown(b, 'rad')}" for a, b in ranges[:8]]
    return ", ".join(listed) + (f" and {len(ranges) - 8} more" if len(ranges) > 8 else "")


def _holds(rows: Iterable[HoldFigures]) -> str:
    listed = list(rows)
    header = ["payload", "holding N*m", "at deg", "with friction N*m", "at deg"]
    motor = any(row.current_up is not None for row in listed)
    if motor:
        header += ["A up", "at deg", "A down", "at deg"]
    lines = []
    for row in listed:
        cells = [row.payload or "none", *_cell(row.still), *_cell(row.moving)]
        lines.append(cells + ([*_cell(row.current_up), *_cell(row.current_down)] if motor else []))
    note = "\n  A up, A down: motor current while turning slowly counter-clockwise, clockwise" if motor else ""
    return grid(header, lines) + note


def _cell(at: At | None) -> tuple[str, str]:
    return ("", "") if at is None else (number(at.value, "1"), f"{math.degrees(at.pose):.2f}")


def _limits(report: Any) -> str:
    if not report.verdicts:
        return "  the file states none"
    return "\n".join([table_of(report.verdicts), *(_wrapped(v.sentence, "  ") for v in report.failures)])


def _search_blocks(found: Design) -> list[str]:
    search = found.search
    if search is None:
        return []
    rejected = "; ".join(f"{reason}: {count}" for reason, count in search.rejected.items())
    tried = f"{search.considered} candidates tried" + (f"; {rejected}" if rejected else "")
    if search.candidates:
        return [
            _headed(
                "Stock ranking by worst residual, before rounding the mounts; slack, stretch: margins",
                _ranking(search.candidates, found.chosen),
            ),
            _wrapped(tried, "  "),
        ]
    blocks = [_headed("Nothing fits", _wrapped(tried, "  "))]
    if search.nearest_miss is not None:
        miss = search.nearest_miss
        blocks.append(_headed(f"Nearest miss: {miss.lacks}", _ranking([miss], None)))
    return blocks


def _ranking(candidates: Iterable[StockCandidate], chosen: StockCandidate | None) -> str:
    listed = list(candidates)
    others = [name for name in listed[0].others if "price" in name.lower() or "cost" in name.lower()][:1]
    heads = [name.replace(" [", " ").replace("]", "") for name in others]
    turned = len({one.attach_angle for one in listed}) > 1
    angle = ["attach deg"] if turned else []
    header = ["part", "", "attach mm", *angle, "anchor mm", "worst N*m", "%", "slack mm", "stretch mm", "pivot N"]
    lines = [
        [
            f"{one.count} x {one.part}",
            "taken" if one is chosen else "",
            f"{1e3 * one.attach_radius:.1f}",
            *([f"{math.degrees(one.attach_angle):.1f}"] if turned else []),
            f"{1e3 * one.anchor_height:.1f}",
            number(one.residual.worst, "1"),
            f"{100 * one.residual.worst_fraction:.2f}",
            f"{1e3 * one.slack_margin:.1f}",
            f"{1e3 * one.stretch_margin:.1f}",
            f"{one.pivot_load:.0f}",
            *(one.others.get(name, "")[:10] for name in others),
        ]
        for one in listed
    ]
    return grid([*header, *heads], lines)


def _standing(found: Design) -> str:
    """Where the design stands among the methods, if it compares any."""
    if found.methods is None:
        return ""
    if found.solved is not None:
        return standing(found.methods, found.solved.mechanism.springs, found.after)
    route = getattr(found.document.design, "pulley", None)
    return standing(found.methods, "straight" if route is None else "pulley", None) if found.search else ""


def _headed(heading: str, body: str) -> str:
    return f"{heading}\n{body}".rstrip("\n")


def _wrapped(text: str, indent: str) -> str:
    return textwrap.fill(text, WIDTH, initial_indent=indent, subsequent_indent=indent + "  ", break_long_words=False)


def _wrapped_fact(name: str, text: str) -> str:
    return textwrap.fill(f"{name.ljust(28)}{text}", WIDTH, initial_indent="  ", subsequent_indent=" " * 30)


# ------------------------------------------------------------------------------------------------
# JSON


def design_dict(found: Design) -> dict[str, Any]:
    """The same for machines: numbers in SI with the unit in the key, None for what is not finite."""
    request = found.document.design
    assert request is not None
    answer: dict[str, Any] = {
        "title": found.document.title,
        "method": request.method,
        "payload": request.payload,
        "success": found.success,
        "status": found.status,
        "before": _residual_dict(found.before),
        "after": None if found.after is None else _residual_dict(found.after),
    }
    if found.solved is not None:
        solved = found.solved
        loaded = solved.with_payload(request.payload)
        q = loaded.poses(POSES)
        balanced = loaded.equilibria()
        answer |= {
            "springs": [one.to_dict() for one in spring_figures(solved.mechanism, q)],
            "stored_energy": At.greatest(loaded.spring_energy(q), q).to_dict("J"),
            "pivot_load": At.greatest(loaded.pivot_load(q), q).to_dict("N"),
            "friction_band": At.greatest(loaded.friction_band(q), q).to_dict("N*m"),
            "rests_by_friction_rad": [list(pair) for pair in rests_alone(loaded, q)],
            "balanced_everywhere": balanced.everywhere,
            "balance_angles": [{"angle_rad": p.angle, "stable": p.stable} for p in balanced.points],
            "actuator": [one.to_dict() for one in hold_figures(solved, q)],
            "limits": None if found.report is None else found.report.to_dict(),
        }
    if found.study is not None:
        answer["tolerances"] = found.study.to_dict()
    if found.methods is not None:
        answer["compare"] = methods_dict(found.methods, _standing(found))
    if found.search is not None:
        search = found.search
        answer |= {
            "considered": search.considered,
            "rejected": dict(search.rejected),
            "ranking": [_candidate_dict(one, taken=one is found.chosen) for one in search.candidates],
            "nearest_miss": None if search.nearest_miss is None else _candidate_dict(search.nearest_miss, taken=False),
        }
    return answer | {"caution": CAUTION}


def _residual_dict(one: Residual) -> dict[str, Any]:
    return {
        "worst_Nm": one.worst,
        "worst_at_rad": one.worst_at,
        "worst_fraction": finite_or_none(one.worst_fraction),
        "rms_Nm": one.rms,
        "rms_fraction": finite_or_none(one.rms_fraction),
        "peak_gravity_torque_Nm": one.peak_gravity_torque,
    }


def _candidate_dict(one: StockCandidate, *, taken: bool) -> dict[str, Any]:
    return {
        "part": one.part,
        "count": one.count,
        "taken": taken,
        "attach_radius_m": one.attach_radius,
        "attach_angle_rad": one.attach_angle,
        "anchor_height_m": one.anchor_height,
        "anchor_angle_rad": one.anchor_angle,
        "residual": _residual_dict(one.residual),
        "slack_margin_m": finite_or_none(one.slack_margin),
        "stretch_margin_m": finite_or_none(one.stretch_margin),
        "pivot_load_N": finite_or_none(one.pivot_load),
        "stored_energy_J": finite_or_none(one.stored_energy),
        "others": dict(one.others),
        "lacks": one.lacks,
    }

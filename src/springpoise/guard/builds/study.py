"""What stated tolerances do to a complete mechanism of one joint: yield, what costs most, the adjuster to provide."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterator
from typing import Any

import attrs

from springpoise.guard.amounts import finite_or_none, json_suffix, percent, shown
from springpoise.guard.builds.scattered import AdjustedBuilds, Builds, SpreadCost
from springpoise.guard.builds.tolerances import Tolerances
from springpoise.tables import facts, grid, number
from springpoise.tolerance import Scatter

__all__ = ["ToleranceStudy", "study_of"]

LEVELS = (0.5, 0.95, 0.99)
"""Parts of the builds whose worst residual is reported [1]."""

WIDTH = 100
LABEL = 34
"""Longest name of a spread or adjuster in a table."""


@attrs.frozen(eq=False, kw_only=True)
class ToleranceStudy:
    """Builds of a mechanism with the scatter that its file states."""

    tolerances: Tolerances
    """What the file states."""
    limit: float
    """Worst residual of a good build [N·m]."""
    scatter: Scatter
    """All builds, as they are built."""
    costs: tuple[SpreadCost, ...]
    """What each spread or batch costs, the dearest first."""
    adjusters: tuple[AdjustedBuilds, ...]
    """What each adjuster makes of the builds, the best first."""
    adjusted_count: int
    """How many builds were adjusted."""

    @property
    def yield_share(self) -> float:
        """The yield: part of the builds that are good enough as built [1]."""
        return self.scatter.yield_within()

    @property
    def adjuster(self) -> AdjustedBuilds | None:
        """The adjuster to provide; None where none makes more builds good enough."""
        best = self.adjusters[0] if self.adjusters else None
        return (
            best if best is not None and best.obstacle is None and best.yield_share > self._share_of_adjusted else None
        )

    @property
    def _share_of_adjusted(self) -> float:
        """The yield of those builds alone that were adjusted [1]."""
        return float((self.scatter.worst[: self.adjusted_count] <= self.limit).mean())

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        return f"{percent(self.yield_share)} of {self.scatter.builds} builds stay within {self._torque(self.limit)}"

    @property
    def advice(self) -> str:
        """What to make adjustable, in words."""
        found = self.adjuster
        if found is None:
            return "No adjuster of these makes more builds good enough." if self.adjusters else ""
        low, high = found.range
        return (
            f"Provide: {found.label}, to be moved by {_move(low, found.unit)} to {_move(high, found.unit)} from where "
            f"it was built. With it {percent(found.yield_share)} of the builds stay within the limit, "
            f"{percent(self._share_of_adjusted)} without."
        )

    def _torque(self, value: float) -> str:
        peak = float(self.scatter.peak_gravity_torque)
        return number(value, "N*m") + (f" ({percent(value / peak)})" if peak > 0 and math.isfinite(value) else "")

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, shares from 0 to 1, None for what is not finite."""
        scatter, found = self.scatter, self.adjuster
        low, high = scatter.yield_interval()
        return {
            "status": self.status,
            "payload": self.tolerances.payload,
            "builds": scatter.builds,
            "seed": scatter.seed,
            "limit_Nm": self.limit,
            "yield": self.yield_share,
            "yield_interval": [low, high],
            "worst_as_drawn_Nm": finite_or_none(float(abs(scatter.nominal).max())),
            "quantiles": [{"share": level, "worst_Nm": finite_or_none(scatter.quantile(level))} for level in LEVELS],
            "broken": scatter.broken,
            "costs": [
                {
                    "name": cost.label,
                    "fields": [one.field for one in cost.spreads],
                    "spreads": [str(one) for one in cost.spreads],
                    "effect_Nm": cost.effect,
                    "at_rad": cost.at,
                    "yield_without": cost.yield_without,
                }
                for cost in self.costs
            ],
            "adjusted_builds": self.adjusted_count,
            "coverage": self.tolerances.coverage,
            "adjusters": [_adjuster_dict(one, provide=one is found) for one in self.adjusters],
            "advice": self.advice,
        }

    def __str__(self) -> str:
        blocks = [f"Tolerances: {self.status}{self._load}\n" + facts(self._facts())]
        blocks.append(self._cost_table())
        if self.adjusters:
            blocks.append(self._adjuster_table())
        return "\n\n".join(blocks)

    @property
    def _load(self) -> str:
        return f", with payload {self.tolerances.payload!r}" if self.tolerances.payload else ""

    def _facts(self) -> Iterator[tuple[str, str]]:
        scatter = self.scatter
        low, high = scatter.yield_interval()
        yield (
            "yield",
            f"{percent(self.yield_share)}; of endless builds {percent(low)} to {percent(high)} (95 % sure)",
        )
        yield "worst residual as drawn", self._torque(float(abs(scatter.nominal).max()))
        for level in LEVELS:
            yield f"{100 * level:.0f} % of the builds", f"within {self._torque(scatter.quantile(level))}"
        if scatter.broken:
            yield "cannot take some pose", f"{scatter.broken} builds"

    def _cost_table(self) -> str:
        peak = float(self.scatter.peak_gravity_torque)
        rows = []
        for cost in self.costs:
            share = f"{100 * cost.effect / peak:.2f}" if peak > 0 else "-"
            spread = cost.spreads[0].kind if cost.spreads[0].shared is None else "together"
            rows.append(
                (_cut(cost.label), spread, number(cost.effect, "1"), share, f"{math.degrees(cost.at):.2f}",
                 percent(cost.yield_without))
            )  # fmt: skip
            if cost.spreads[0].shared is not None:
                rows += [(f"  {_cut(one.label, LABEL - 2)}", one.kind, "", "", "", "") for one in cost.spreads]
        header = ("what scatters", "by", "sigma N*m", "% of peak", "at deg", "yield if exact")
        note = "sigma: what one standard deviation of it alone moves the torque by, at the worst pose"
        return f"What costs most\n{grid(header, rows)}\n  {note}"

    def _adjuster_table(self) -> str:
        peak, cover = float(self.scatter.peak_gravity_torque), f"{100 * self.tolerances.coverage:g} %"

        def residual(value: float) -> tuple[str, str]:
            return number(value, "1"), f"{100 * value / peak:.2f}" if peak > 0 else "-"

        built = self.scatter.worst[: self.adjusted_count]
        before = float(_quantile(built, self.tolerances.coverage))
        rows = [("none", "", "", "", *residual(before), percent(self._share_of_adjusted))]
        for one in self.adjusters:
            low, high = one.range
            rows.append(
                (
                    _cut(one.label),
                    shown(one.drawn, one.unit),
                    f"{_move(low, one.unit)} to {_move(high, one.unit)}",
                    _move(one.farthest, one.unit),
                    *residual(one.residual),
                    percent(one.yield_share),
                )
            )
        header = ("adjuster", "drawn", "moved by", "farthest", "worst N*m", "%", "yield")
        lines = [f"Adjusters, each alone and set in each of {self.adjusted_count} builds", grid(header, rows)]
        lines.append(
            f"  moved by: its reach, or what {cover} of the builds need; yield: so far and no farther;\n"
            f"  worst: what {cover} of the builds stay within, moved as far as each needs"
        )
        lines += [
            _wrapped(f"{one.label} cannot be set as needed: {one.obstacle}") for one in self.adjusters if one.obstacle
        ]
        return "\n".join([*lines, _wrapped(self.advice)])


def study_of(builds: Builds) -> ToleranceStudy:
    """The study of builds of a mechanism of one joint.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A field that cannot vary where it is, a spread that leads to what cannot be built, an adjuster without effect.
    """
    scatter = builds.scatter
    return ToleranceStudy(
        tolerances=builds.tolerances,
        limit=builds.limits[0],
        scatter=scatter,
        costs=tuple(builds.costs()),
        adjusters=tuple(builds.all_adjusted()),
        adjusted_count=builds.adjusted_count,
    )


def _adjuster_dict(one: AdjustedBuilds, *, provide: bool) -> dict[str, Any]:
    suffix = json_suffix(one.unit)
    return {
        "name": one.label,
        "field": one.field,
        "provide": provide,
        f"drawn{suffix}": one.drawn,
        f"from{suffix}": one.range[0],
        f"to{suffix}": one.range[1],
        f"farthest{suffix}": one.farthest,
        "worst_Nm": finite_or_none(one.residual),
        "yield": one.yield_share,
        "obstacle": one.obstacle,
    }


def _quantile(worst: Any, level: float) -> Any:
    import numpy as np

    return np.quantile(np.where(np.isfinite(worst), worst, np.inf), level, method="inverted_cdf")


def _cut(text: str, longest: int = LABEL) -> str:
    """A label that fits its column: it is the end of a field's long name that tells it from the next."""
    if len(text) <= longest:
        return text
    begin = (longest - 3) // 3
    return f"{text[:begin]}...{text[begin + 3 - longest :]}"


def _move(value: float, unit: str) -> str:
    if unit == "m":
        return f"{1e3 * value:+.1f} mm"
    if unit == "rad":
        return f"{math.degrees(value):+.2f} deg"
    return f"{value:+.3g}" + ("" if unit == "1" else f" {unit}")


def _wrapped(text: str) -> str:
    return textwrap.fill(text, WIDTH, initial_indent="  ", subsequent_indent="    ", break_long_words=False)

"""Candidates of a stock search, and what the search found."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import TypeVar

import attrs
import numpy as np

from springpoise.balance.residuals import Residual, residual
from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.route import Routing
from springpoise.errors import NoSolution
from springpoise.mechanism import Mechanism
from springpoise.tables import degrees, facts, grid, millimetres, number

__all__ = ["StockCandidate", "StockSearch", "candidate", "pareto_front"]


@attrs.frozen
class StockCandidate:
    """One part at one mount, some of them side by side."""

    part: str
    """Part name."""
    index: int
    """Its place in the stock list, from 0."""
    count: int
    """How many side by side."""
    attach_radius: float
    """Distance from pivot to attachment on the arm [m]."""
    attach_angle: float
    """Direction of the attachment in the arm's frame [rad]."""
    anchor_height: float
    """Distance from pivot to anchor [m]."""
    anchor_angle: float
    """Direction of the anchor on the ground [rad]."""
    residual: Residual
    """What is left over the poses."""
    pivot_load: float
    """Greatest bearing force at the pivot over the poses [N]."""
    slack_margin: float
    """Least spring length less free length [m]; negative where it goes slack."""
    stretch_margin: float
    """Longest permissible length less greatest length [m]; negative where overstretched."""
    stored_energy: float
    """Greatest energy in all springs of the mechanism over the poses [J]."""
    mechanism: Mechanism
    """The arm with this spring on it."""
    others: Mapping[str, str] = attrs.field(factory=dict, eq=False)
    """The stock list's other columns for this part."""
    refined: bool = False
    """Whether radius and height were refined between the grid's lines."""
    lacks: str | None = None
    """What keeps it from fitting; None where it fits."""

    def __str__(self) -> str:
        rows = [
            ("part", f"{self.count} x {self.part}"),
            ("attach radius", f"{millimetres(self.attach_radius)} at {degrees(self.attach_angle)} on the arm"),
            ("anchor height", f"{millimetres(self.anchor_height)} at {degrees(self.anchor_angle)} on the ground"),
            ("residual", str(self.residual)),
            ("slack margin", millimetres(self.slack_margin)),
            ("stretch margin", millimetres(self.stretch_margin)),
            ("pivot load", number(self.pivot_load, "N")),
            ("stored energy", number(self.stored_energy, "J")),
        ]
        if self.lacks:
            rows.append(("lacks", self.lacks))
        return "stock candidate\n" + facts(rows)


@attrs.frozen
class StockSearch:
    """What a stock search found."""

    candidates: tuple[StockCandidate, ...]
    """The best, each another part or count, ranked by worst residual."""
    pareto: tuple[StockCandidate, ...]
    """Those that no other one beats in worst residual, number of springs and pivot load at once.

    Taken from the candidates above and from the best part of each mount and count, of parts that leave
    alike the one that loads the pivot least; of equals one.
    """
    considered: int
    """How many candidates were tried: every part in every count at every mount of the grid, each value once."""
    rejected: Mapping[str, int]
    """How many candidates of the grid were rejected, by reason; each for its first reason, before any is refined."""
    nearest_miss: StockCandidate | None
    """Where nothing fits, the candidate that lacks least; None where something fits."""
    residual_limit: float | None
    """Greatest worst residual that counted as a fit [N·m]; None for no limit."""

    @property
    def success(self) -> bool:
        """Whether anything fits."""
        return bool(self.candidates)

    @property
    def best(self) -> StockCandidate:
        """The candidate of the smallest worst residual.

        Raises
        ------
        NoSolution
            Nothing fits.
        """
        return self.require().candidates[0]

    @property
    def mechanism(self) -> Mechanism:
        """The arm with the best candidate's spring on it; raises as ``best``."""
        return self.best.mechanism

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.success:
            return f"{len(self.candidates)} parts and counts listed of {self.considered} candidates tried"
        miss = self.nearest_miss
        if miss is None:
            return f"nothing fits of {self.considered} candidates tried"
        return (
            f"nothing fits of {self.considered} candidates tried; nearest is {miss.count} x {miss.part}: {miss.lacks}"
        )

    def require(self) -> StockSearch:
        """The result itself, or an error where nothing fits.

        Raises
        ------
        NoSolution
            Nothing fits; the message names the nearest miss and what it lacks.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def __str__(self) -> str:
        lines = ["stock search", facts([("status", self.status)])]
        if self.rejected:
            lines.append(facts([(f"rejected: {reason}", str(n)) for reason, n in self.rejected.items()]))
        if self.candidates:
            lines.append(_table(self.candidates))
            lines.append("  none of these is beaten in residual, number of springs and pivot load at once:")
            lines.append(_table(self.pareto[:12]))
        elif self.nearest_miss is not None:
            lines.append(str(self.nearest_miss))
        return "\n".join(lines)


def _table(candidates: Sequence[StockCandidate]) -> str:
    turned = len({(c.attach_angle, c.anchor_angle) for c in candidates}) > 1
    header = (
        "part", "count", "attach mm", "attach deg", "anchor mm", "anchor deg", "worst N*m", "worst %", "rms %",
        "slack margin mm", "stretch margin mm", "pivot N", "energy J",
    )  # fmt: skip
    rows = [
        (
            c.part,
            str(c.count),
            f"{1e3 * c.attach_radius:.1f}",
            f"{math.degrees(c.attach_angle):.1f}",
            f"{1e3 * c.anchor_height:.1f}",
            f"{math.degrees(c.anchor_angle):.1f}",
            f"{c.residual.worst:.4g}",
            f"{100 * c.residual.worst_fraction:.2f}",
            f"{100 * c.residual.rms_fraction:.2f}",
            f"{1e3 * c.slack_margin:.1f}",
            f"{1e3 * c.stretch_margin:.1f}",
            f"{c.pivot_load:.0f}",
            f"{c.stored_energy:.1f}",
        )
        for c in candidates
    ]
    shown = [i for i, name in enumerate(header) if turned or not name.endswith(" deg")]
    return grid([header[i] for i in shown], [[row[i] for i in shown] for row in rows])


def candidate(routing: Routing, stock: Stock, index: int, count: int, radius: float, height: float) -> StockCandidate:
    """One part at one mount, with all that is to be known about it."""
    spring = stock.spring(index)
    mount = attrs.evolve(routing.mount(spring, count, radius, height), name=stock.parts[index])
    mechanism = routing.mechanism.with_springs([*routing.mechanism.springs, mount])
    q = routing.poses
    length = np.broadcast_to(mount.spring_length(mechanism.linkage, q), q.shape)
    assert spring.longest is not None
    return StockCandidate(
        part=stock.parts[index],
        index=index,
        count=count,
        attach_radius=radius,
        attach_angle=math.remainder(routing.attach_angle, 2.0 * math.pi),
        anchor_height=height,
        anchor_angle=routing.anchor_angle,
        residual=residual(mechanism, q),
        pivot_load=float(np.max(mechanism.pivot_load(q))),
        slack_margin=float(length.min() - spring.free_length),
        stretch_margin=float(spring.longest - length.max()),
        stored_energy=float(np.max(mechanism.spring_energy(q))),
        mechanism=mechanism,
        others=stock.others[index] if stock.others else {},
    )


_Item = TypeVar("_Item")


def pareto_front(items: Iterable[_Item], objectives: Callable[[_Item], tuple[float, int, float]]) -> list[_Item]:
    """Those that no other beats in all three objectives, each of which is better when smaller; of equals the first.

    The first objective increases along the front.
    """
    front: list[_Item] = []
    reached: list[tuple[float, float]] = []
    for item in sorted(items, key=objectives):
        _, second, third = objectives(item)
        if all(second < s or third < t for s, t in reached):
            front.append(item)
            reached.append((second, third))
    return front

"""Whether a cable can wind on a spool, and where it cannot."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.spools.geometry import Layout
from springpoise.paths import GuideRoller
from springpoise.springs.protocol import working_range_of
from springpoise.tables import degrees, millimetres, number

__all__ = ["SpoolCheck", "checks_of"]

Array = NDArray[np.float64]

POSES = 1441
"""Poses of the first look."""

ROUNDING = 1e-14
"""What rounding does to a length, in its unit."""

HALVINGS = 60
"""How often the interval is halved in which a check begins to fail."""


@attrs.frozen
class SpoolCheck:
    """One thing that a spool has to keep, at its worst pose."""

    what: str
    """What is looked at."""
    value: float
    """What it comes to at its worst pose, in ``unit``."""
    allowed: float
    """What it has to stay on the right side of."""
    is_upper: bool
    """Whether ``allowed`` is an upper limit; a lower one otherwise."""
    unit: str
    """``"m"``, ``"rad"`` or ``"1"``."""
    at: float
    """The worst pose [rad]."""
    fails_over: tuple[tuple[float, float], ...]
    """Ranges of the joint's angle (from, to) over which it is not kept [rad]."""

    @property
    def holds(self) -> bool:
        """Whether it is kept at every pose."""
        return not self.fails_over

    @property
    def margin(self) -> float:
        """How far on the right side it stays at its worst pose, in ``unit``; negative on the wrong one."""
        return self.allowed - self.value if self.is_upper else self.value - self.allowed

    @property
    def sentence(self) -> str:
        """The check in words."""
        side = "at most" if self.is_upper else "at least"
        text = f"{self._shown(self.value)} at {degrees(self.at)}, {side} {self._shown(self.allowed)}"
        if not self.holds:
            ranges = " and ".join(f"{degrees(low)} to {degrees(high)}" for low, high in self.fails_over)
            text += f": not kept from {ranges}"
        return text

    def _shown(self, value: float) -> str:
        if self.unit == "m":
            return millimetres(value) if value else "0 mm"
        return degrees(value) if self.unit == "rad" else number(value, self.unit) if value else "0"


def checks_of(layout: Layout, *, least_radius: float) -> tuple[SpoolCheck, ...]:
    """All checks of a spool over its range of angles."""
    found = [_check(layout, "curvature radius", "m", lambda q: layout.curve(q).curvatures, least_radius)]
    if isinstance(layout.leaves, GuideRoller):
        found += [
            _check(layout, "cable from spool to roller", "m", lambda q: layout.curve(q).straight, 0.0),
            _check(layout, "turn of the cable for the joint's", "1", lambda q: layout.curve(q).turning, 0.0),
        ]
    found.append(_turned(layout))
    longest = float(working_range_of(layout.pull.mount.spring)[1])
    if math.isfinite(longest):
        found.append(_check(layout, "spring length", "m", lambda q: layout.curve(q).lengths, longest, at_most=True))
    return tuple(found)


def _turned(layout: Layout) -> SpoolCheck:
    """Cable that winds on over more than a turn would lie on itself."""
    ends = layout.curve(np.asarray(layout.work.over))
    value = float(abs(np.diff(ends.normals)[0]))
    kept = value < 2.0 * math.pi
    return SpoolCheck(
        what="angle that the cable winds over",
        value=value,
        allowed=2.0 * math.pi,
        is_upper=True,
        unit="rad",
        at=float(layout.work.over[1]),
        fails_over=() if kept else (layout.work.over,),
    )


def _check(
    layout: Layout,
    what: str,
    unit: str,
    value: Callable[[Array], Array],
    allowed: float,
    *,
    at_most: bool = False,
) -> SpoolCheck:
    way = -1.0 if at_most else 1.0
    q = np.linspace(*layout.work.over, POSES)

    # A length may reach its limit, but for rounding; a radius of nothing is an edge.
    spare = -ROUNDING if at_most or allowed > 0 else ROUNDING

    def margin(poses: Array) -> Array:
        return way * (value(poses) - allowed) - spare

    margins = margin(q)
    q, margins = _with_lowest(q, margins, margin)
    finite = np.where(np.isfinite(margins), margins, math.inf)
    worst = int(np.argmin(finite))
    return SpoolCheck(
        what=what,
        value=float(allowed + way * (margins[worst] + spare)),
        allowed=allowed,
        is_upper=at_most,
        unit=unit,
        at=float(q[worst]),
        fails_over=_failing(q, margins >= 0.0, margin),
    )


def _with_lowest(q: Array, margins: Array, margin: Callable[[Array], Array]) -> tuple[Array, Array]:
    """The poses, and among them the one at which the margin is least between them."""
    from scipy.optimize import minimize_scalar

    if not np.any(np.isfinite(margins)):
        return q, margins
    worst = int(np.nanargmin(margins))
    bounds = (float(q[max(worst - 1, 0)]), float(q[min(worst + 1, len(q) - 1)]))
    found: Any = minimize_scalar(
        lambda pose: float(margin(np.array([pose]))[0]), bounds=bounds, method="bounded", options={"xatol": 1e-10}
    )
    lowest = float(found.x)
    there = margin(np.array([lowest]))
    if not there[0] < margins[worst]:
        return q, margins
    place = int(np.searchsorted(q, lowest))
    return np.insert(q, place, lowest), np.insert(margins, place, there[0])


def _failing(q: Array, kept: NDArray[np.bool_], margin: Callable[[Array], Array]) -> tuple[tuple[float, float], ...]:
    """Ranges in which a margin is negative or NaN, their ends found by halving."""

    def edge(fine: float, bad: float) -> float:
        for _ in range(HALVINGS):
            middle = 0.5 * (fine + bad)
            if float(margin(np.array([middle]))[0]) >= 0.0:
                fine = middle
            else:
                bad = middle
        return bad

    ranges = []
    starts = np.flatnonzero(~kept & np.concatenate([[True], kept[:-1]]))
    ends = np.flatnonzero(~kept & np.concatenate([kept[1:], [True]]))
    for first, last in zip(starts.tolist(), ends.tolist(), strict=True):
        low = float(q[0]) if first == 0 else edge(float(q[first - 1]), float(q[first]))
        high = float(q[-1]) if last == len(q) - 1 else edge(float(q[last + 1]), float(q[last]))
        ranges.append((low, high))
    return tuple(ranges)

"""The pass over all mounts of a stock search, chunk by chunk."""

from __future__ import annotations

import math
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.candidates import pareto_front
from springpoise.balance.stock.columns import Columns
from springpoise.balance.stock.mounts import Mounts, Row
from springpoise.balance.stock.route import Geometry
from springpoise.balance.stock.scoring import ScoringPoses, worst_residuals

__all__ = ["NO_ROOM", "OVERSTRETCHED", "OVER_LIMIT", "SLACK", "UNREACHABLE", "BestPart", "Scan", "Tally"]

Array = NDArray[np.float64]
Indices = NDArray[np.intp]

SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE = (
    "goes slack",
    "stretched beyond its longest length",
    "longer than the room in front of the pulley",
    "attachment inside the pulley",
)
OVER_LIMIT = "worst residual above the limit"
REASONS = (SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE, OVER_LIMIT)

ROUNDING = 1e-9
"""By so much, relatively, a bound is passed before a candidate is left out for it."""


class BestPart(NamedTuple):
    """The best part of one mount and count; of parts that leave alike the one that loads the pivot least."""

    worst: float
    springs: int
    pivot_load: float
    candidate: int
    mount: int


class _Best(NamedTuple):
    """The best part of one count at one mount of a row."""

    worst: float
    candidate: int
    place: int


@attrs.frozen(eq=False)
class Tally:
    """What is remembered of some mounts: the best parts with their best mounts, and the best part of each mount."""

    candidate: Indices
    """The best parts and counts, as few as the search wants to know and what ties with the last, ascending."""
    worst: Array
    """The worst residual of each at its best mount [N·m]."""
    mount: NDArray[np.int64]
    """Number of that mount, the first of them."""
    front: tuple[BestPart, ...]
    """Of the best parts of each mount and count, those that no other beats in all respects."""
    counted: dict[str, int]
    """Rejections by reason."""


@attrs.frozen(eq=False)
class Scan:
    """Every spring of a list, in every count, at every mount; ``run`` of ``executors`` does the job.

    At each mount the springs that can follow it are found by their lengths alone. Of these, a lower
    bound of the worst residual, that at a few of the poses, says which have to be computed at all
    poses; the others cannot matter to what is remembered:

    - the best parts with their best mounts: a candidate whose bound is above its part's worst
      residual at an earlier mount, or above those of the best parts so far, is among neither;
    - the best part of the mount in each count: with a limit, all whose bound keeps it are computed;
      without one, all whose bound is not above what the part of the least bound really leaves;
    - how many exceed the limit: those whose bound does, and of the others those that really do.
    """

    mounts: Mounts
    columns: Columns
    base: Array
    """Holding torque without the spring [N·m], shape (poses,)."""
    bearing: tuple[Array, Array]
    """Force in the pivot without the spring [N], each of shape (poses,)."""
    limit: float
    """Greatest worst residual of a fit [N·m]; may be infinite."""
    most: int
    """How many parts and counts are to be known exactly."""

    def chunk(self, index: int) -> Tally:
        """Some rows of mounts."""
        some = _ChunkScan(self)
        for row in self.mounts.rows(index):
            some.look_at(row)
        return some.tally()

    def joined(self, parts: list[Tally]) -> Tally:
        """Several tallies in the order of their mounts as one."""
        candidate, worst, mount = (
            np.concatenate([getattr(part, name) for part in parts]) for name in ("candidate", "worst", "mount")
        )
        order = np.lexsort((worst, candidate))  # of equals the first stays first
        first = np.diff(candidate[order], prepend=-1) > 0
        kept = order[first]
        kept = kept[worst[kept] <= least(worst[kept], self.most)]
        front = _front([one for part in parts for one in part.front])
        counted = {name: sum(part.counted[name] for part in parts) for name in REASONS}
        return Tally(candidate[kept], worst[kept], mount[kept], front, counted)


def least(values: Array, number: int) -> float:
    """The last of so many least values; infinite where there are fewer."""
    return float(np.partition(values, number - 1)[number - 1]) if number <= values.size else math.inf


def _front(items: list[BestPart]) -> tuple[BestPart, ...]:
    return tuple(pareto_front(items, lambda one: (one.worst, one.springs, one.pivot_load)))


class _ChunkScan:
    """The work on some rows of mounts, and what is remembered of them."""

    def __init__(self, scan: Scan) -> None:
        self.scan, self.columns = scan, scan.columns
        self.poses = ScoringPoses(scan.base)
        self.worst = np.full(self.columns.candidates, math.inf)
        self.mount = np.full(self.columns.candidates, -1, dtype=np.int64)
        self.cut = math.inf
        """So small at the most have the worst residuals of the best parts become."""
        self.front: list[BestPart] = []
        self.counted: dict[str, int] = dict.fromkeys(REASONS, 0)

    def tally(self) -> Tally:
        """What is remembered."""
        best = np.flatnonzero((self.worst <= self.cut) & (self.mount >= 0))
        return Tally(best, self.worst[best], self.mount[best], _front(self.front), self.counted)

    def look_at(self, row: Row) -> None:
        """All springs at a row of mounts."""
        geometry, windows, counts = row.geometry(), self.columns.windows, self.columns.counts.size
        reached = geometry.reached
        short = windows.short_enough(geometry.least)
        hopeful = reached & windows.any_fits(short, geometry.greatest)
        self.counted[UNREACHABLE] += int(np.sum(~reached)) * self.columns.candidates
        self.counted[SLACK] += int(np.sum(self.columns.springs - short[reached])) * counts
        self.counted[OVERSTRETCHED] += int(np.sum(short[reached & ~hopeful])) * counts
        best = [
            one
            for place in np.flatnonzero(hopeful).tolist()
            for one in self._at(row, geometry, place, int(short[place]))
        ]
        self.front += self._best_parts(row, geometry, best)

    def _at(self, row: Row, geometry: Geometry, place: int, short: int) -> list[_Best]:
        """All springs at one mount, of which ``short`` do not go slack: the best of each count."""
        columns, greatest = self.columns, float(geometry.greatest[place])
        fits = columns.windows.fitting(short, greatest)
        self.counted[OVERSTRETCHED] += (short - fits.size) * columns.counts.size
        if math.isfinite(geometry.room):
            roomy = fits[columns.own[fits] + greatest <= geometry.room]
            self.counted[NO_ROOM] += (fits.size - roomy.size) * columns.counts.size
            fits = roomy
        if not fits.size:
            return []
        return self._scored(row.first + place, place, fits, geometry)

    def _scored(self, mount: int, place: int, fits: Indices, geometry: Geometry) -> list[_Best]:
        """The residuals of the springs that fit, as far as they matter: the best of each count."""
        columns, limit, base = self.columns, self.scan.limit, self.scan.base
        pull, lever = geometry.pull[place], geometry.lever[place]
        candidates = (columns.springs * np.arange(columns.counts.size)[:, None] + fits).ravel()
        # Holding torque is minus what the spring exerts, so the spring's share is + load · lever.
        rate = np.multiply.outer(columns.counts, columns.rate[fits]).ravel()
        offset = np.multiply.outer(columns.counts, columns.offset[fits]).ravel()
        bound = self.poses.bounds(pull, lever, rate, offset)
        groups = [slice(i * fits.size, (i + 1) * fits.size) for i in range(columns.counts.size)]

        # It may be its part's best mount so far, and its part among the best.
        matters = bound <= np.minimum(self.worst[candidates], self.cut) * (1.0 + ROUNDING)
        over = bound > limit * (1.0 + ROUNDING)
        if math.isfinite(limit):  # it may keep the limit
            self.counted[OVER_LIMIT] += int(np.count_nonzero(over))
            matters |= ~over
        else:  # it may be the best of this mount
            for group in groups:
                one = group.start + int(np.argmin(bound[group]))
                reached = worst_residuals(base, pull, lever, rate[one : one + 1], offset[one : one + 1])[0]
                matters[group] |= bound[group] <= reached * (1.0 + ROUNDING)
        tried = np.flatnonzero(matters)
        if not tried.size:
            return []
        worst = worst_residuals(base, pull, lever, rate[tried], offset[tried])
        self.counted[OVER_LIMIT] += int(np.count_nonzero((worst > limit) & ~over[tried]))
        self._remember(mount, candidates[tried], worst)
        best = []
        for start, group in zip(np.searchsorted(tried, [g.start for g in groups]), groups, strict=True):
            own = worst[start : np.searchsorted(tried, group.stop)]
            if own.size and own.min() <= limit:
                alike = start + np.flatnonzero(own <= own.min() * (1.0 + ROUNDING))
                if alike.size > 1:  # where the worst pose is one at which the line of force meets the pivot
                    loads = self._pivot_loads(geometry, place, rate[tried[alike]], offset[tried[alike]])
                    alike = alike[[int(np.argmin(loads))]]
                at = int(alike[0])
                best.append(_Best(float(worst[at]), int(candidates[tried[at]]), place))
        return best

    def _remember(self, mount: int, candidates: Indices, worst: Array) -> None:
        better = worst < self.worst[candidates]
        chosen = candidates[better]
        self.worst[chosen], self.mount[chosen] = worst[better], mount
        if np.any(self.worst[chosen] < self.cut):
            self.cut = least(self.worst, self.scan.most)

    def _best_parts(self, row: Row, geometry: Geometry, best: list[_Best]) -> list[BestPart]:
        """The same with their loads on the pivot."""
        if not best:
            return []
        columns = self.columns
        places = np.array([one.place for one in best])
        parts, counts = np.array([columns.part_and_count(one.candidate) for one in best]).T
        rate, offset = counts * columns.rate[parts], counts * columns.offset[parts]
        loads = self._pivot_loads(geometry, places, rate, offset).tolist()
        return [
            BestPart(one.worst, count, load, one.candidate, row.first + one.place)
            for one, count, load in zip(best, counts.tolist(), loads, strict=True)
        ]

    def _pivot_loads(self, geometry: Geometry, place: int | Indices, rate: Array, offset: Array) -> Array:
        """Greatest force in the pivot over the poses [N], for each rate and offset at one place of a row, or each at its own."""
        load = rate[:, None] * geometry.pull[place] + offset[:, None]
        right = self.scan.bearing[0] - load * geometry.force_x[place]
        up = self.scan.bearing[1] - load * geometry.force_y[place]
        return np.asarray(np.sqrt(np.max(right * right + up * up, axis=1)))

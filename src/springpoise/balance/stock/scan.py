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
    """The best part of one mount and count."""

    worst: float
    springs: int
    pivot_load: float
    candidate: int
    mount: int


@attrs.frozen(eq=False)
class Tally:
    """What is remembered of some mounts: the best mount of each part and count, and the best part of each mount."""

    worst: Array
    """Least worst residual of each part and count [N·m], shape (candidates,); infinite where none fits.

    The few least are exact; of the others it is known that they are no less than these.
    """
    mount: NDArray[np.int64]
    """Number of the mount at which it is so, the first of them, shape (candidates,)."""
    front: tuple[BestPart, ...]
    """Of the best parts of each mount and count, those that no other beats in all respects."""
    counted: dict[str, int]
    """Rejections by reason."""


@attrs.frozen(eq=False)
class Scan:
    """Every spring of a list, in every count, at every mount; ``run`` of ``executors`` does the job.

    At each mount the springs that can follow it are found by their lengths alone; of these, bounds
    from a few poses say for which the worst residual over all poses has to be known.
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
        """One row of mounts."""
        return _RowScan(self, self.mounts.row_at(index)).tally()

    def joined(self, parts: list[Tally]) -> Tally:
        """Several tallies in the order of their mounts as one."""
        worst, mount = parts[0].worst.copy(), parts[0].mount.copy()
        for part in parts[1:]:
            better = part.worst < worst
            worst[better], mount[better] = part.worst[better], part.mount[better]
        front = _front([one for part in parts for one in part.front])
        return Tally(worst, mount, front, {name: sum(part.counted[name] for part in parts) for name in REASONS})


def _front(items: list[BestPart]) -> tuple[BestPart, ...]:
    return tuple(pareto_front(items, lambda one: (one.worst, one.springs, one.pivot_load)))


class _RowScan:
    """The work on one row of mounts."""

    def __init__(self, scan: Scan, row: Row) -> None:
        self.scan, self.columns = scan, scan.columns
        self.first = row.first
        self.geometry: Geometry = row.routing.geometry(row.radii, row.height)
        self.poses = ScoringPoses(scan.base)
        size = self.columns.candidates
        self.worst = np.full(size, math.inf)
        self.mount = np.full(size, -1, dtype=np.int64)
        self.cut = math.inf
        """So small at the most have the worst residuals of the best parts become."""
        self.best: list[tuple[int, int, float]] = []  # row, candidate, worst residual
        self.counted = dict.fromkeys(REASONS, 0)

    def tally(self) -> Tally:
        """What is remembered of the row."""
        geometry, windows, counts = self.geometry, self.columns.windows, self.columns.counts.size
        reached = np.isfinite(geometry.least) & np.isfinite(geometry.greatest) & np.all(np.isfinite(geometry.lever), 1)
        short = windows.short_enough(geometry.least)
        hopeful = windows.any_fits(short, geometry.greatest)
        self.counted[UNREACHABLE] += int(np.sum(~reached)) * self.columns.candidates
        self.counted[SLACK] += int(np.sum(self.columns.springs - short[reached])) * counts
        self.counted[OVERSTRETCHED] += int(np.sum(short[reached & ~hopeful])) * counts
        for row in np.flatnonzero(reached & hopeful).tolist():
            self._look_at(row, int(short[row]))
        return Tally(self.worst, self.mount, _front(self._best_parts()), self.counted)

    def _look_at(self, row: int, short: int) -> None:
        """All springs at one mount, of which ``short`` do not go slack."""
        columns, geometry = self.columns, self.geometry
        greatest = float(geometry.greatest[row])
        fits = columns.windows.fitting(short, greatest)
        self.counted[OVERSTRETCHED] += (short - fits.size) * columns.counts.size
        if math.isfinite(geometry.room):
            roomy = fits[columns.own[fits] + greatest <= geometry.room]
            self.counted[NO_ROOM] += (fits.size - roomy.size) * columns.counts.size
            fits = roomy
        if fits.size:
            self._score(row, fits)

    def _score(self, row: int, fits: Indices) -> None:
        """The residuals of the springs that fit, as far as they matter."""
        columns, limit = self.columns, self.scan.limit
        candidates = (columns.springs * np.arange(columns.counts.size)[:, None] + fits).ravel()
        # Holding torque is minus what the spring exerts, so the spring's share is + load · lever.
        rate = np.multiply.outer(columns.counts, columns.rate[fits]).ravel()
        offset = np.multiply.outer(columns.counts, columns.offset[fits]).ravel()
        pull, lever = self.geometry.pull[row], self.geometry.lever[row]
        bound = self.poses.bounds(pull, lever, rate, offset)
        groups = [slice(i * fits.size, (i + 1) * fits.size) for i in range(columns.counts.size)]

        # One that may become the best mount of its part, and is among the best parts.
        matters = bound <= np.minimum(self.worst[candidates], self.cut) * (1.0 + ROUNDING)
        if math.isfinite(limit):  # whether it keeps the limit
            over = bound > limit * (1.0 + ROUNDING)
            self.counted[OVER_LIMIT] += int(np.count_nonzero(over))
            matters |= ~over
        else:  # the best part of this mount
            over = np.zeros(bound.size, dtype=bool)
            for group in groups:
                one = group.start + int(np.argmin(bound[group]))
                reached = worst_residuals(self.scan.base, pull, lever, rate[one : one + 1], offset[one : one + 1])[0]
                matters[group] |= bound[group] <= reached * (1.0 + ROUNDING)
        tried = np.flatnonzero(matters)
        if not tried.size:
            return
        worst = worst_residuals(self.scan.base, pull, lever, rate[tried], offset[tried])
        self.counted[OVER_LIMIT] += int(np.count_nonzero((worst > limit) & ~over[tried]))
        self._remember(row, candidates[tried], worst)
        for start, group in zip(np.searchsorted(tried, [g.start for g in groups]), groups, strict=True):
            own = worst[start : np.searchsorted(tried, group.stop)]
            if own.size and own.min() <= limit:
                at = start + int(np.argmin(own))
                self.best.append((row, int(candidates[tried[at]]), float(worst[at])))

    def _remember(self, row: int, candidates: Indices, worst: Array) -> None:
        better = worst < self.worst[candidates]
        chosen = candidates[better]
        self.worst[chosen], self.mount[chosen] = worst[better], self.first + row
        if worst.min() < self.cut and self.scan.most < self.worst.size:
            self.cut = float(np.partition(self.worst, self.scan.most - 1)[self.scan.most - 1])

    def _best_parts(self) -> list[BestPart]:
        """The best part of each mount and count, with its load on the pivot."""
        if not self.best:
            return []
        geometry, columns = self.geometry, self.columns
        rows = np.array([row for row, _, _ in self.best])
        parts, counts = np.array([columns.part_and_count(one) for _, one, _ in self.best]).T
        rate, offset = counts * columns.rate[parts], counts * columns.offset[parts]
        load = rate[:, None] * geometry.pull[rows] + offset[:, None]
        right = self.scan.bearing[0] - load * geometry.force_x[rows]
        up = self.scan.bearing[1] - load * geometry.force_y[rows]
        pivot_load = np.sqrt(np.max(right * right + up * up, axis=1)).tolist()
        return [
            BestPart(worst, count, pivot, candidate, self.first + row)
            for (row, candidate, worst), count, pivot in zip(self.best, counts.tolist(), pivot_load, strict=True)
        ]

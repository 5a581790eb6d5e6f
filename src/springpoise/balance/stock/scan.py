"""One pass over the grid of a stock search."""

from __future__ import annotations

import math
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.candidates import StockCandidate, candidate, pareto_front
from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.route import Geometry, Routing
from springpoise.balance.stock.scoring import worst_residuals

__all__ = ["Scan"]

Array = NDArray[np.float64]

SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE = (
    "goes slack",
    "stretched beyond its longest length",
    "longer than the room in front of the pulley",
    "attachment inside the pulley",
)
OVER_LIMIT = "worst residual above the limit"


class _BestPart(NamedTuple):
    """The best part of one mount and count."""

    worst: float
    springs: int
    pivot_load: float
    candidate: int
    radius: float
    height: float


class Scan:
    """What a pass over the grid remembers: the best mount of each part and count, and the best part of each mount."""

    def __init__(self, routing: Routing, stock: Stock, counts: tuple[int, ...], limit: float, margin: float) -> None:
        self.routing, self.stock, self.counts = routing, stock, counts
        self.limit, self.margin = limit, margin
        self.considered = 0
        mechanism, q = routing.mechanism, routing.poses
        self.base = np.broadcast_to(mechanism.holding_torque(q), q.shape)
        self.bearing = [np.broadcast_to(part, q.shape) for part in mechanism.pivot_force(q)]
        # One column for each candidate of a mount: all parts for the first count, then for the next.
        self.part = np.tile(np.arange(len(stock)), len(counts))
        self.count = np.repeat(np.asarray(counts), len(stock))
        self.rate = self.count * stock.rate[self.part]
        self.free = stock.free_length[self.part]
        self.longest = stock.longest[self.part]
        self.effective = self.free - stock.initial_tension[self.part] / stock.rate[self.part]
        straight = routing.pulley is None
        self.offset = -self.rate * self.effective if straight else np.zeros_like(self.rate)
        self.zero = np.zeros_like(self.rate) if straight else self.effective
        size = self.part.size
        self.worst = np.full(size, math.inf)
        self.where = np.zeros((size, 2))
        self.mounts: list[_BestPart] = []
        self.miss = (math.inf, 0, 0.0, 0.0, "")  # how far out, candidate, radius, height, reason
        self.counted: dict[str, int] = dict.fromkeys((SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE, OVER_LIMIT), 0)

    def look_at(self, radii: Array, height: float) -> None:
        """All candidates of all attachment radii at one anchor height."""
        geometry = self.routing.geometry(radii, height)
        for row, radius in enumerate(radii.tolist()):
            self.considered += self.part.size
            if not (np.all(np.isfinite(geometry.pull[row])) and np.all(np.isfinite(geometry.lever[row]))):
                self.counted[UNREACHABLE] += self.part.size
                continue
            fits = self._fitting(geometry, row, radius, height)
            if fits.size:
                self._score(geometry, row, fits, radius, height)

    def _fitting(self, geometry: Geometry, row: int, radius: float, height: float) -> NDArray[np.intp]:
        """Candidates whose spring stays within its lengths; the others are counted by their first reason."""
        shortest, longest = self.zero + geometry.least[row], self.zero + geometry.greatest[row]
        shortfalls = (
            (SLACK, self.free + self.margin - shortest),
            (OVERSTRETCHED, longest + self.margin - self.longest),
            (NO_ROOM, longest - geometry.room),
        )
        unfit = np.zeros(self.part.size, dtype=bool)
        for reason, shortfall in shortfalls:
            out = (shortfall > 0 if reason is not SLACK else shortfall >= 0) & ~unfit
            if out.any():
                self.counted[reason] += int(out.sum())
                unfit |= out
        if math.isinf(np.min(self.worst)) and unfit.all():
            total = np.max([s for _, s in shortfalls], axis=0)
            nearest = int(np.argmin(total))
            if total[nearest] < self.miss[0]:
                reason = max(shortfalls, key=lambda pair: pair[1][nearest])[0]
                self.miss = (float(total[nearest]), nearest, radius, height, reason)
        return np.flatnonzero(~unfit)

    def _score(self, geometry: Geometry, row: int, fits: NDArray[np.intp], radius: float, height: float) -> None:
        pull, lever = geometry.pull[row], geometry.lever[row]
        # Holding torque is minus what the spring exerts, so the spring's share is + load · lever.
        worst = worst_residuals(self.base, pull, lever, self.rate[fits], self.offset[fits])
        self.counted[OVER_LIMIT] += int(np.sum(worst > self.limit))
        better = worst < self.worst[fits]
        chosen = fits[better]
        self.worst[chosen] = worst[better]
        self.where[chosen] = radius, height
        for count in self.counts:
            of_count = np.flatnonzero(self.count[fits] == count)
            if not of_count.size:
                continue
            at = of_count[int(np.argmin(worst[of_count]))]
            if worst[at] <= self.limit:
                one = int(fits[at])
                load = self.rate[one] * pull + self.offset[one]
                right = self.bearing[0] - load * geometry.force_x[row]
                up = self.bearing[1] - load * geometry.force_y[row]
                pivot_load = float(np.sqrt(np.max(right * right + up * up)))
                self.mounts.append(_BestPart(float(worst[at]), count, pivot_load, one, radius, height))

    def best_by_part(self, most: int) -> list[tuple[int, int, float, float]]:
        """Part, count, radius and height of the best mount of each part and count, the best few of them."""
        order = np.argsort(self.worst, kind="stable")[:most]
        found = [i for i in order if math.isfinite(self.worst[i])]
        return [self._place(int(i), *map(float, self.where[i])) for i in found]

    def front_of_mounts(self) -> list[tuple[int, int, float, float]]:
        """The same of the best parts of each mount and count that no other beats in all respects."""
        front = pareto_front(self.mounts, lambda one: (one.worst, one.springs, one.pivot_load))
        return [self._place(one.candidate, one.radius, one.height) for one in front]

    def nearest_miss(self, best: StockCandidate | None) -> StockCandidate | None:
        """What comes nearest to fitting, with what it lacks; None where no mount can be reached.

        ``best`` is the best candidate whose spring stays within its lengths, if there is one.
        """
        if best is not None:
            return attrs.evolve(
                best, lacks=f"its worst residual is {best.residual.worst - self.limit:.4g} N*m above the limit"
            )
        if not self.miss[4]:
            return None
        out, i, radius, height, reason = self.miss
        lacks = f"{reason}, by {1e3 * out:.3g} mm"
        return attrs.evolve(candidate(self.routing, self.stock, *self._place(i, radius, height)), lacks=lacks)

    def _place(self, column: int, radius: float, height: float) -> tuple[int, int, float, float]:
        return int(self.part[column]), int(self.count[column]), radius, height

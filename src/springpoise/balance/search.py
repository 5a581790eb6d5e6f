"""The best springs of a stock list for an arm, with the mounts that go with them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path as FilePath
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.candidates import StockCandidate, StockSearch, candidate, pareto_front
from springpoise.balance.progress import Progress, steps
from springpoise.balance.refine import refined
from springpoise.balance.residual import poses_over
from springpoise.balance.route import Geometry, PulleyRoute, Routing
from springpoise.balance.scoring import worst_residuals
from springpoise.balance.sine_match import as_mechanism
from springpoise.balance.stock import Stock, read_stock
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism
from springpoise.units import ScalarLike

__all__ = ["PulleyRoute", "StockCandidate", "StockSearch", "search_stock"]

Array = NDArray[np.float64]

SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE = (
    "goes slack",
    "stretched beyond its longest length",
    "longer than the room in front of the pulley",
    "attachment inside the pulley",
)
OVER_LIMIT = "worst residual above the limit"


def search_stock(
    arm: Arm | Mechanism,
    stock: Stock | str | FilePath,
    *,
    attach_radii: Any,
    anchor_heights: Any,
    counts: Sequence[int] = (1, 2),
    over: Any = None,
    pulley: PulleyRoute | None = None,
    anchor_angle: ScalarLike = math.pi / 2,
    residual_limit: ScalarLike | None = None,
    keep: int = 10,
    refine: int = 3,
    resolution: ScalarLike = 1e-4,
    gravity: Any = None,
    progress: Progress = None,
) -> StockSearch:
    """Try every spring of a stock list at every mount of a grid, in every count.

    The worst residual over the poses is exact for each candidate. A candidate is rejected where
    its spring goes slack or is stretched beyond its longest length in some pose, or does not fit
    in front of the pulley. The best few are then refined between the grid's least and greatest
    values, and rounded to what can be drilled.

    The work grows as radii · heights · springs · counts · poses.

    Parameters
    ----------
    arm
        The arm, or a mechanism of one arm with travel, friction and the springs it already has.
    stock
        The list, or the path of its CSV file (see ``read_stock``).
    attach_radii
        Distances from pivot to attachment on the arm to try [m], a sequence, each > 0.
    anchor_heights
        Distances from pivot to anchor to try [m], a sequence, each > 0.
    counts
        Numbers of equal springs side by side to try.
    over
        Poses [rad]; None for 181 over the travel.
    pulley
        The pulley that springs hide behind; None for springs straight from anchor to arm.
    anchor_angle
        Direction from pivot to anchor on the ground [rad]; by default straight up. The attachment
        lies where a spring of zero free length would balance the arm's weight at every angle.
    residual_limit
        Greatest worst residual that counts as a fit [N·m]; None for no limit.
    keep
        How many candidates the result lists, each another part or count.
    refine
        How many of the best are refined; 0 for none.
    resolution
        Steps to which refined radii and heights are rounded [m].
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.
    progress
        A function of (done, total); True for a bar, False for silence; None for a bar on long
        runs where tqdm is installed and a terminal is there.

    Returns
    -------
    StockSearch
        Ranked by worst residual; with the Pareto front of worst residual, number of springs and
        pivot load; with the rejections counted by reason; and with the nearest miss where nothing fits.

    Raises
    ------
    InputError, InputTypeError, PoiseFileError, UnitError
        An empty or wrong grid, list, count or option, or an arm that needs no spring.
    """
    mechanism = as_mechanism(arm)
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    if not isinstance(stock, Stock | str | FilePath):
        raise InputTypeError(f"stock must be a Stock or the path of its CSV file, got {stock!r}")
    listed = stock if isinstance(stock, Stock) else read_stock(stock)
    radii = _grid(attach_radii, "attach_radii")
    heights = _grid(anchor_heights, "anchor_heights")
    numbers = _counts(counts)
    limit = math.inf if residual_limit is None else _positive(residual_limit, "N*m", "residual_limit")
    step = _positive(resolution, "m", "resolution")
    for name, value in (("keep", keep), ("refine", refine)):
        if isinstance(value, bool) or not isinstance(value, int) or value < (name == "keep"):
            raise InputError(f"{name} must be a whole number >= {int(name == 'keep')}, got {value!r}")
    if pulley is not None and not isinstance(pulley, PulleyRoute):
        raise InputTypeError(f"pulley must be a PulleyRoute or None, got {pulley!r}")
    routing = _routing(mechanism, poses_over(mechanism, over), units.radian(anchor_angle, "anchor_angle"), pulley)
    scan = _Scan(routing, listed, numbers, limit)
    with steps(progress, len(heights) * radii.size * len(listed) * len(numbers), "springs tried") as report:
        for height in heights.tolist():
            scan.look_at(radii, height)
            report(scan.considered)

    rank = [candidate(routing, listed, *place) for place in scan.best_by_part(keep)]
    box = ((float(radii.min()), float(radii.max())), (float(heights.min()), float(heights.max())))
    better = [refined(routing, one, box, step) for one in rank[:refine]]
    ranked = tuple(sorted([*better, *rank[len(better) :]], key=_merit))
    front = [candidate(routing, listed, *place) for place in scan.front_of_mounts()]
    return StockSearch(
        candidates=ranked,
        pareto=tuple(pareto_front([*ranked, *front], _objectives)),
        considered=scan.considered,
        rejected={reason: number for reason, number in scan.counted.items() if number},
        nearest_miss=None if ranked else scan.nearest_miss(),
        residual_limit=None if residual_limit is None else limit,
    )


def _merit(one: StockCandidate) -> tuple[float, int, float]:
    return one.residual.worst, one.count, one.pivot_load


_objectives = _merit


class _BestPart(NamedTuple):
    """The best part of one mount and count."""

    worst: float
    springs: int
    pivot_load: float
    candidate: int
    radius: float
    height: float


class _Scan:
    """What a pass over the grid remembers: the best mount of each part and count, and the best part of each mount."""

    def __init__(self, routing: Routing, stock: Stock, counts: tuple[int, ...], limit: float) -> None:
        self.routing, self.stock, self.counts, self.limit = routing, stock, counts, limit
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
        self.counted = dict.fromkeys((SLACK, OVERSTRETCHED, NO_ROOM, UNREACHABLE, OVER_LIMIT), 0)

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
            (SLACK, self.free - shortest),
            (OVERSTRETCHED, longest - self.longest),
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
        found = [i for i in order if self.worst[i] <= self.limit and math.isfinite(self.worst[i])]
        return [self._place(int(i), *map(float, self.where[i])) for i in found]

    def front_of_mounts(self) -> list[tuple[int, int, float, float]]:
        """The same of the best parts of each mount and count that no other beats in all respects."""
        front = pareto_front(self.mounts, lambda one: (one.worst, one.springs, one.pivot_load))
        return [self._place(one.candidate, one.radius, one.height) for one in front]

    def nearest_miss(self) -> StockCandidate | None:
        """The candidate that comes nearest to fitting, with what it lacks; None where no mount can be reached."""
        if np.isfinite(self.worst).any():
            i = int(np.argmin(self.worst))
            radius, height = map(float, self.where[i])
            lacks = f"its worst residual is {self.worst[i] - self.limit:.4g} N*m above the limit"
        elif self.miss[4]:
            out, i, radius, height, reason = self.miss
            lacks = f"{reason}, by {1e3 * out:.3g} mm"
        else:
            return None
        return attrs.evolve(candidate(self.routing, self.stock, *self._place(i, radius, height)), lacks=lacks)

    def _place(self, column: int, radius: float, height: float) -> tuple[int, int, float, float]:
        return int(self.part[column]), int(self.count[column]), radius, height


def _routing(mechanism: Mechanism, poses: Array, anchor_angle: float, pulley: PulleyRoute | None) -> Routing:
    """Where attachments lie: where a zero free length balances the arm's weight at every angle."""
    torque = np.broadcast_to(mechanism.holding_torque(poses), poses.shape)
    arm = mechanism.linkage
    assert isinstance(arm, Arm)
    gx, gy = mechanism.gravity
    weight = -complex(gx, -gy) * complex(*arm.moment)
    if weight == 0 or not np.max(np.abs(torque)) > 1e-12 * abs(weight):
        raise InputError("arm must have something left to balance, got no torque of gravity and springs")
    attach_angle = math.atan2(weight.imag, weight.real) + anchor_angle
    return Routing(mechanism, poses, anchor_angle, math.remainder(attach_angle, 2 * math.pi), pulley)


def _grid(values: Any, name: str) -> Array:
    grid = np.atleast_1d(np.asarray(units.metre(values, name), dtype=np.float64)).ravel()
    if grid.size == 0:
        raise InputError(f"{name} must be at least one length in m, got none")
    if not np.all(grid > 0):
        raise InputError(f"{name} must be > 0 m, got {grid[~(grid > 0)][0]}")
    return np.unique(grid)


def _counts(counts: Any) -> tuple[int, ...]:
    try:
        items = list(counts) if np.ndim(counts) else [counts]
    except (TypeError, ValueError):
        items = [counts]
    for item in items:
        if isinstance(item, bool) or not isinstance(item, int | np.integer) or item < 1:
            raise InputError(f"counts must be whole numbers >= 1, got {item!r}")
    if not items:
        raise InputError("counts must be at least one whole number >= 1, got none")
    return tuple(sorted({int(item) for item in items}))


def _positive(value: ScalarLike, unit: str, name: str) -> float:
    number = units.scalar_si(value, unit, name)
    if not isinstance(number, float) or not number > 0:
        raise InputError(f"{name} must be > 0 {unit}, got {number}")
    return number

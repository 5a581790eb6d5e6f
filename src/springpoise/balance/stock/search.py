"""The best springs of a stock list for an arm, with the mounts that go with them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path as FilePath
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.progress import Progress, steps
from springpoise.balance.residuals import poses_over
from springpoise.balance.sine import as_mechanism
from springpoise.balance.stock.candidates import StockCandidate, StockSearch, candidate, pareto_front
from springpoise.balance.stock.lists import Stock, read_stock
from springpoise.balance.stock.refine import refined
from springpoise.balance.stock.route import PulleyRoute, Routing
from springpoise.balance.stock.scan import Scan
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism
from springpoise.units import ScalarLike

__all__ = ["PulleyRoute", "StockCandidate", "StockSearch", "search_stock"]

Array = NDArray[np.float64]


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
    least_margin: ScalarLike = 0.0,
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
        Greatest worst residual that counts as a fit [N·m], after refining; None for no limit.
    least_margin
        Distance that every spring keeps from both ends of its lengths [m], >= 0.
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
    margin = units.metre(least_margin, "least_margin")
    if not isinstance(margin, float) or not margin >= 0:
        raise InputError(f"least_margin must be >= 0 m, got {margin}")
    for name, value in (("keep", keep), ("refine", refine)):
        if isinstance(value, bool) or not isinstance(value, int) or value < (name == "keep"):
            raise InputError(f"{name} must be a whole number >= {int(name == 'keep')}, got {value!r}")
    if pulley is not None and not isinstance(pulley, PulleyRoute):
        raise InputTypeError(f"pulley must be a PulleyRoute or None, got {pulley!r}")
    routing = _routing(mechanism, poses_over(mechanism, over), units.radian(anchor_angle, "anchor_angle"), pulley)
    scan = Scan(routing, listed, numbers, limit, margin)
    with steps(progress, len(heights) * radii.size * len(listed) * len(numbers), "springs tried") as report:
        for height in heights.tolist():
            scan.look_at(radii, height)
            report(scan.considered)

    rank = [candidate(routing, listed, *place) for place in scan.best_by_part(max(keep, refine))]
    box = ((float(radii.min()), float(radii.max())), (float(heights.min()), float(heights.max())))
    better = [refined(routing, listed, one, box, step, margin) for one in rank[:refine]]
    # Refining comes first: what it brings below the limit fits.
    rank = sorted([*better, *rank[len(better) :]], key=_merit)
    ranked = tuple([one for one in rank if one.residual.worst <= limit][:keep])
    front = [candidate(routing, listed, *place) for place in scan.front_of_mounts()]
    return StockSearch(
        candidates=ranked,
        pareto=tuple(pareto_front([*ranked, *front], _merit)),
        considered=scan.considered,
        rejected={reason: number for reason, number in scan.counted.items() if number},
        nearest_miss=None if ranked else scan.nearest_miss(rank[0] if rank else None),
        residual_limit=None if residual_limit is None else limit,
    )


def _merit(one: StockCandidate) -> tuple[float, int, float]:
    return one.residual.worst, one.count, one.pivot_load


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

"""The best springs of a stock list for an arm, with the mounts that go with them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from concurrent.futures import Executor
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
from springpoise.balance.stock.columns import columns
from springpoise.balance.stock.lists import Stock, read_stock
from springpoise.balance.stock.misses import Misses
from springpoise.balance.stock.mounts import Mounts
from springpoise.balance.stock.refine import Box, Refiner, refined
from springpoise.balance.stock.route import PulleyRoute, Routing
from springpoise.balance.stock.scan import Scan
from springpoise.errors import InputError, InputTypeError
from springpoise.executors import check_executor, run
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
    anchor_angles: Any = math.pi / 2,
    attach_skews: Any = 0.0,
    counts: Sequence[int] = (1, 2),
    over: Any = None,
    pulley: PulleyRoute | None = None,
    residual_limit: ScalarLike | None = None,
    least_margin: ScalarLike = 0.0,
    keep: int = 10,
    refine: int = 3,
    resolution: ScalarLike = 1e-4,
    gravity: Any = None,
    executor: Executor | None = None,
    progress: Progress = None,
) -> StockSearch:
    """Try every spring of a stock list at every mount of a grid, in every count.

    The worst residual over the poses is exact for each candidate that is listed. A candidate is
    rejected where its spring goes slack or is stretched beyond its longest length in some pose, or
    does not fit in front of the pulley. The best few are then refined between the grid's least and
    greatest values, and rounded to what can be drilled.

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
    anchor_angles
        Directions from pivot to anchor on the ground to try [rad], one or a sequence; by default straight up.
    attach_skews
        Angles to try [rad], one or a sequence, each between -pi and pi, by which the attachment is turned
        on the arm, counter-clockwise, from where a spring of zero free length would balance the arm's
        weight at every angle.
    counts
        Numbers of equal springs side by side to try.
    over
        Poses [rad]; None for 181 over the travel.
    pulley
        The pulley that springs hide behind; None for springs straight from anchor to arm.
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
    executor
        An executor of ``concurrent.futures``, or of any library with that interface, that shares
        the mounts; None for one core. The result is the same to the last bit. The caller shuts it down.
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

    Notes
    -----
    Each mount costs its geometry, once over the poses. Of the list only those springs are looked at
    whose lengths suit the mount's least and greatest, found in the sorted list; and of these only
    those are computed at all poses that five poses do not rule out. So time grows with the number of
    mounts, and with the number of springs that the mounts can take rather than that of the list.
    """
    mechanism = as_mechanism(arm)
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    if not isinstance(stock, Stock | str | FilePath):
        raise InputTypeError(f"stock must be a Stock or the path of its CSV file, got {stock!r}")
    check_executor(executor)
    listed = stock if isinstance(stock, Stock) else read_stock(stock)
    radii = _lengths(attach_radii, "attach_radii")
    heights = _lengths(anchor_heights, "anchor_heights")
    angles = _angles(anchor_angles, "anchor_angles", 2.0 * math.pi)
    skews = _angles(attach_skews, "attach_skews", math.pi)
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
    poses = poses_over(mechanism, over)
    base, weight_angle = _to_balance(mechanism, poses)
    springs = columns(listed, numbers, margin, straight=pulley is None)
    mounts = Mounts.for_springs(
        tuple(Routing(mechanism, poses, weight_angle, pulley, a, s) for a in angles.tolist() for s in skews.tolist()),
        heights,
        radii,
        springs.candidates,
    )
    most = max(keep, refine)
    right, up = (np.broadcast_to(part, poses.shape) for part in mechanism.pivot_force(poses))
    scan = Scan(mounts, springs, base, (right, up), limit, most)
    considered = len(mounts) * springs.candidates
    with steps(progress, considered, "springs tried") as report:
        tally = run(
            scan, mounts.chunks, executor, lambda chunks: report(mounts.before_chunk(chunks) * springs.candidates)
        )

    def taken(number: int, mount: int) -> StockCandidate:
        at = mounts[mount]
        return candidate(at.routing, listed, *springs.part_and_count(number), at.radius, at.height)

    best = np.lexsort((tally.candidate, tally.worst))[:most]
    rank = [taken(int(tally.candidate[one]), int(tally.mount[one])) for one in best]
    box = Box(*((float(values.min()), float(values.max())) for values in (radii, heights, angles, skews)))
    refiner = Refiner(mounts[0].routing, listed, box, step, margin)
    better = [
        refined(refiner, found, mounts[int(tally.mount[one])].routing)
        for one, found in zip(best[:refine], rank, strict=False)
    ]
    # Refining comes first: what it brings below the limit fits.
    rank = sorted([*better, *rank[len(better) :]], key=_merit)
    ranked = tuple([one for one in rank if one.residual.worst <= limit][:keep])
    miss = None
    if not ranked and rank:
        lacks = f"its worst residual is {rank[0].residual.worst - limit:.4g} N*m above the limit"
        miss = attrs.evolve(rank[0], lacks=lacks)
    elif not ranked:
        nearest = run(Misses(mounts, springs), mounts.chunks, executor)
        if nearest.reason:
            lacks = f"{nearest.reason}, by {1e3 * nearest.short:.3g} mm"
            miss = attrs.evolve(taken(nearest.part, nearest.mount), lacks=lacks)
    return StockSearch(
        candidates=ranked,
        pareto=tuple(pareto_front([*ranked, *(taken(one.candidate, one.mount) for one in tally.front)], _merit)),
        considered=considered,
        rejected={reason: number for reason, number in tally.counted.items() if number},
        nearest_miss=miss,
        residual_limit=None if residual_limit is None else limit,
    )


def _merit(one: StockCandidate) -> tuple[float, int, float]:
    return one.residual.worst, one.count, one.pivot_load


def _to_balance(mechanism: Mechanism, poses: Array) -> tuple[Array, float]:
    """The torque that is to be balanced; and the angle from a balancing spring's anchor to its attachment at q = 0."""
    torque = np.broadcast_to(mechanism.holding_torque(poses), poses.shape)
    arm = mechanism.linkage
    assert isinstance(arm, Arm)
    gx, gy = mechanism.gravity
    weight = -complex(gx, -gy) * complex(*arm.moment)
    if weight == 0 or not np.max(np.abs(torque)) > 1e-12 * abs(weight):
        raise InputError("arm must have something left to balance, got no torque of gravity and springs")
    return torque, math.atan2(weight.imag, weight.real)


def _lengths(values: Any, name: str) -> Array:
    grid = np.atleast_1d(np.asarray(units.metre(values, name), dtype=np.float64)).ravel()
    if grid.size == 0:
        raise InputError(f"{name} must be at least one length in m, got none")
    if not np.all(grid > 0):
        raise InputError(f"{name} must be > 0 m, got {grid[~(grid > 0)][0]}")
    return np.unique(grid)


def _angles(values: Any, name: str, most: float) -> Array:
    grid = np.atleast_1d(np.asarray(units.radian(values, name), dtype=np.float64)).ravel()
    if grid.size == 0:
        raise InputError(f"{name} must be at least one angle in rad, got none")
    out = grid[~(np.abs(grid) <= most)]
    if out.size:
        raise InputError(f"{name} must be between -{most:.4g} and {most:.4g} rad, got {out[0]}; degrees?")
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

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
from springpoise.balance.residuals import poses_over, shown_pose
from springpoise.balance.sine import as_mechanism
from springpoise.balance.stock.candidates import StockCandidate, StockSearch, candidate, pareto_front
from springpoise.balance.stock.columns import columns
from springpoise.balance.stock.lists import Stock, read_stock
from springpoise.balance.stock.misses import Misses
from springpoise.balance.stock.mounts import Mounts
from springpoise.balance.stock.refine import Box, Refiner, refined
from springpoise.balance.stock.route import PulleyRoute, Routing
from springpoise.balance.stock.scan import OVERSTRETCHED, SLACK, Scan, Tally
from springpoise.errors import InputError, InputTypeError
from springpoise.executors import check_executor, run
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism
from springpoise.paths import Cable
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

    What is listed, and how many are rejected, is the same as if every candidate were computed at
    every pose. A candidate is rejected where its spring goes slack or is stretched beyond its longest
    length at some pose, or does not fit in front of the pulley. The best few are then refined between
    the grid's least and greatest values, and rounded to what can be drilled.

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
        Steps to which refined radii and heights are rounded [m], > 0. Where no multiple of it lies between
        the grid's least and greatest value, it is one of these. Angles are not rounded.
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
    whose lengths suit the mount's least and greatest, found in the sorted list. What such a spring
    leaves at five of the poses is a lower bound of its worst residual. It is computed at all poses
    unless the bound is above the limit, or without a limit above the least worst residual at this mount,
    and above its own at an earlier mount or those of as many parts as are kept or refined: then it
    belongs neither in the ranking nor on the Pareto front. Bounds are passed by a thousand millionth
    before they count, so that rounding rules nothing out. So time grows with the number of
    mounts, and with the number of springs that the mounts can take rather than that of the list.
    """
    mechanism = as_mechanism(arm)
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    if not isinstance(stock, Stock | str | FilePath):
        raise InputTypeError(f"stock must be a Stock or the path of its CSV file, got {stock!r}")
    if pulley is not None and not isinstance(pulley, PulleyRoute):
        raise InputTypeError(f"pulley must be a PulleyRoute or None, got {pulley!r}")
    check_executor(executor)
    listed = stock if isinstance(stock, Stock) else read_stock(stock)
    radii = _lengths(attach_radii, "attach_radii")
    heights = _lengths(anchor_heights, "anchor_heights")
    angles = _angles(anchor_angles, "anchor_angles", 2.0 * math.pi)
    skews = _angles(attach_skews, "attach_skews", math.pi)
    numbers = _counts(counts)
    limit = math.inf if residual_limit is None else _positive(residual_limit, "N*m", "residual_limit")
    step = _positive(resolution, "m", "resolution")
    margin = _margin(least_margin)
    listing, refining = _whole(keep, "keep", 1), _whole(refine, "refine", 0)
    poses = poses_over(mechanism, over)
    base, weight_angle = _to_balance(mechanism, poses)
    springs = columns(listed, numbers, margin, straight=pulley is None)
    mounts = Mounts.for_springs(
        tuple(Routing(mechanism, poses, weight_angle, pulley, a, s) for a in angles.tolist() for s in skews.tolist()),
        heights,
        radii,
        springs.candidates,
    )
    right, up = (np.broadcast_to(part, poses.shape) for part in mechanism.pivot_force(poses))
    scan = Scan(mounts, springs, base, (right, up), limit, max(listing, refining))
    considered = len(mounts) * springs.candidates
    with steps(progress, considered, "springs tried") as report:
        tally = run(
            scan, mounts.chunks, executor, lambda chunks: report(mounts.before_chunk(chunks) * springs.candidates)
        )
    box = Box(*((float(values.min()), float(values.max())) for values in (radii, heights, angles, skews)))
    ranked = _refined_ranking(scan, tally, listed, Refiner(mounts[0].routing, listed, box, step, margin), refining)
    fits = [one for one in ranked if one.residual.worst <= limit][:listing]
    fronts = (_taken(scan, listed, one.candidate, one.mount) for one in tally.front)
    return StockSearch(
        candidates=tuple(fits),
        pareto=tuple(pareto_front([*fits, *(one for one in fronts if one.residual.worst <= limit)], _merit)),
        considered=considered,
        rejected={_with_margin(reason, margin): number for reason, number in tally.counted.items() if number},
        nearest_miss=None if fits else _nearest_miss(scan, listed, ranked, margin, executor),
        residual_limit=None if residual_limit is None else limit,
    )


def _taken(scan: Scan, listed: Stock, number: int, mount: int) -> StockCandidate:
    """A candidate by its number and its mount's, with all that is to be known about it."""
    at = scan.mounts[mount]
    return candidate(at.routing, listed, *scan.columns.part_and_count(number), at.radius, at.height)


def _refined_ranking(scan: Scan, tally: Tally, listed: Stock, refiner: Refiner, refine: int) -> list[StockCandidate]:
    """The best parts and counts, so many of them refined, the best first, whether they keep the limit or not."""
    best = np.lexsort((tally.candidate, tally.worst))[: scan.most]
    found = []
    for rank, (number, mount) in enumerate(
        zip(tally.candidate[best].tolist(), tally.mount[best].tolist(), strict=True)
    ):
        one = _taken(scan, listed, number, mount)
        found.append(refined(refiner, one, scan.mounts[mount].routing) if rank < refine else one)
    return sorted(found, key=_merit)


def _nearest_miss(
    scan: Scan, listed: Stock, ranked: list[StockCandidate], margin: float, executor: Executor | None
) -> StockCandidate | None:
    """Where nothing fits, what lacks least: in the residual, or else in the lengths of springs."""
    if ranked:
        lacks = f"its worst residual is {ranked[0].residual.worst - scan.limit:.4g} N*m above the limit"
        return attrs.evolve(ranked[0], lacks=lacks)
    nearest = run(Misses(scan.mounts, scan.columns), scan.mounts.chunks, executor)
    if not nearest.reason:
        return None
    lacks = f"{_with_margin(nearest.reason, margin)}, by {1e3 * nearest.short:.3g} mm"
    missed = _taken(scan, listed, nearest.part, nearest.mount)
    if nearest.reason == SLACK and _leaves_pulley(missed, scan.mounts[nearest.mount].routing.poses):
        lacks += "; its cable leaves the pulley at some poses"
    return attrs.evolve(missed, lacks=lacks)


def _with_margin(reason: str, margin: float) -> str:
    """A reason in words that are true of springs that would do but for the margin to be kept."""
    return (
        f"{reason}, or nearer to it than {1e3 * margin:.4g} mm"
        if margin and reason in (SLACK, OVERSTRETCHED)
        else reason
    )


def _leaves_pulley(one: StockCandidate, poses: Array) -> bool:
    path = one.mechanism.springs[-1].path
    return isinstance(path, Cable) and bool(np.any(path.wraps(one.mechanism.linkage, poses)[0] == 0.0))


def _merit(one: StockCandidate) -> tuple[float, int, float]:
    return one.residual.worst, one.count, one.pivot_load


def _to_balance(mechanism: Mechanism, poses: Array) -> tuple[Array, float]:
    """The torque that is to be balanced; and the angle from a balancing spring's anchor to its attachment at q = 0."""
    torque = np.broadcast_to(mechanism.holding_torque(poses), poses.shape)
    if not np.all(np.isfinite(torque)):
        at = shown_pose(poses[~np.isfinite(torque)][0])
        raise InputError(
            f"arm must have a holding torque at every pose, got none at {at}; is an end of a cable inside a disc there?"
        )
    arm = mechanism.linkage
    assert isinstance(arm, Arm)
    gx, gy = mechanism.gravity
    weight = -complex(gx, -gy) * complex(*arm.moment)
    if weight == 0 or not np.max(np.abs(torque)) > 1e-12 * abs(weight):
        raise InputError("arm must have something left to balance, got no torque of gravity and springs")
    return torque, math.atan2(weight.imag, weight.real)


def _lengths(values: Any, name: str) -> Array:
    grid = np.atleast_1d(np.asarray(units.metre(values, name), dtype=np.float64)).ravel()
    if not np.all(grid > 0):
        raise InputError(f"{name} must be > 0 m, got {grid[~(grid > 0)][0]}")
    return np.unique(grid)


def _angles(values: Any, name: str, most: float) -> Array:
    grid = np.atleast_1d(np.asarray(units.radian(values, name), dtype=np.float64)).ravel()
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


def _whole(value: Any, name: str, least: int) -> int:
    if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < least:
        raise InputError(f"{name} must be a whole number >= {least}, got {value!r}")
    return int(value)


def _margin(value: ScalarLike) -> float:
    margin = units.metre(value, "least_margin")
    if not isinstance(margin, float) or not margin >= 0:
        raise InputError(f"least_margin must be >= 0 m, got {margin}")
    return margin


def _positive(value: ScalarLike, unit: str, name: str) -> float:
    number = units.scalar_si(value, unit, name)
    if not isinstance(number, float) or not number > 0:
        raise InputError(f"{name} must be > 0 {unit}, got {number}")
    return number

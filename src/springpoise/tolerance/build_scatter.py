"""Many builds of a mechanism whose numbers scatter: how far each is from balanced."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from concurrent.futures import Executor
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError
from springpoise.executors import run
from springpoise.mechanism import Mechanism
from springpoise.tape import Program
from springpoise.tolerance.bands import Bins, Counts
from springpoise.tolerance.chunks import checked_builds, checked_seed, chunk_bounds, chunk_count
from springpoise.tolerance.recorded import (
    columns_of,
    nominal,
    poses_of,
    size_of,
    torque_program,
    torque_units,
    torques_of,
)
from springpoise.tolerance.scatter_result import Scatter, limits_of
from springpoise.tolerance.spreads import Spread, Spreads, refuse_unbuildable, spreads_of

__all__ = ["scatter"]

Array = NDArray[np.float64]

PILOT = 1024
"""Builds from which the bins of the bands are laid out."""

ELEMENTS = 2**15
"""Torques that are held at once, of some poses: with their bins they stay in a core's own cache."""


@attrs.frozen(eq=False)
class Part:
    """What is kept of some builds."""

    worst: Array
    """Greatest magnitude of the torque over the poses, shape (builds, joints); NaN where it is none at some pose."""
    counts: tuple[Counts, ...]
    """For each joint."""
    lows: Array
    """Least value of each field."""
    highs: Array
    """Greatest value of each field."""


@attrs.frozen(eq=False)
class ScatterJob:
    """The builds of a scatter, for whoever computes them."""

    program: Program
    poses: list[Array]
    spreads: Spreads
    seed: int
    builds: int
    bins: tuple[Bins, ...]

    def values(self, index: int) -> list[Array]:
        """Values of all fields for one chunk."""
        first, count = chunk_bounds(index, self.builds)
        return self.spreads.values(self.seed, index, first, count)

    def chunk(self, index: int) -> Part:
        """One chunk of builds."""
        values = self.values(index)
        worst, counts = self.tallied(values)
        if not counts:
            whole = np.all(np.isfinite(worst), axis=1)
            counts = self.tallied([value[whole] for value in values])[1]
        lows, highs = np.array([np.min(value) for value in values]), np.array([np.max(value) for value in values])
        return Part(worst, counts, lows, highs)

    def tallied(self, values: list[Array]) -> tuple[Array, tuple[Counts, ...]]:
        """Greatest torque of each build, shape (builds, joints), and the counts for each joint.

        No counts where a build cannot take some pose, since it counts at none.
        """
        builds, poses = values[0].size, self.poses[0].size
        worst = np.zeros((len(self.bins), builds))
        counts: list[list[Counts]] = [[] for _ in self.bins]
        step = max(1, ELEMENTS // max(1, builds))
        scratch = np.empty((step, builds))
        for first in range(0, poses, step):
            here = slice(first, min(first + step, poses))
            # Builds along the last axis: there are many of them even where few poses are held at once.
            for joint, torque in enumerate(torques_of(self.program, [q[here, None] for q in self.poses], values)):
                room = scratch[: len(torque)]
                np.maximum(worst[joint], np.max(np.abs(torque, out=room), axis=0), out=worst[joint])
                if np.all(np.isfinite(worst)):
                    counts[joint].append(self.bins[joint].part(here).count(torque, room))
        return worst.T, tuple(map(Counts.side_by_side, counts)) if np.all(np.isfinite(worst)) else ()

    def joined(self, parts: list[Part]) -> Part:
        """Several chunks as one."""
        return Part(
            np.concatenate([part.worst for part in parts]),
            tuple(Counts.total([part.counts[joint] for part in parts]) for joint in range(len(self.bins))),
            np.min([part.lows for part in parts], axis=0),
            np.max([part.highs for part in parts], axis=0),
        )


def scatter(
    mechanism: Mechanism,
    spreads: Mapping[str, Spread],
    *,
    builds: int = 100_000,
    over: Any = None,
    seed: int = 1,
    limit: Any = None,
    levels: Sequence[float] = (0.05, 0.5, 0.95),
    executor: Executor | None = None,
    gravity: Any = None,
) -> Scatter:
    """Build a mechanism many times with scattered numbers, and see how far each build is from balanced.

    The result depends on the seed, the spreads and the number of builds alone, to the last bit,
    wherever and in whatever order the builds are computed. A field's draws follow from its name or
    its batch's, and do not change when other fields are added to or taken from the spreads.

    Parameters
    ----------
    mechanism
        The mechanism as drawn.
    spreads
        Names of fields (see ``list_fields``) with how each of them scatters.
    builds
        How many builds, >= 1.
    over
        Poses [rad], shape (p,), or (p, n) for n joints; None for 121 over the travel.
    seed
        Whole number >= 0 from which all draws follow.
    limit
        Worst residual that is good enough [N·m], or a percentage of the peak gravity torque such
        as ``"5 %"``; for n joints one each. None where the yield is not asked for.
    levels
        Levels of the bands of the holding torque [1], from 0 (the least) to 1 (the greatest).
    executor
        An executor of ``concurrent.futures``, or of any library with that interface, that shares
        the work; None for one core. The caller shuts it down.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Scatter
        Worst residual of each build with quantiles and yield, the bands, and the worst build. Bands are
        counted in 512 bins for each pose and interpolated within a bin, which is good to a few
        ten-thousandths of their width for torques that scatter smoothly, and to a bin otherwise.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A field that is unknown or cannot vary, a spread that leads to values that cannot be built, or
        a wrong number, limit or executor.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
    >>> mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(858.081875), path))
    >>> found = scatter(mech, {"springs[0].spring.rate": Spread.normal("5 %")}, builds=20_000, over=[0.0, 0.5])
    >>> abs(found.yield_within("5 %") - 0.6827) < 0.01
    True
    """
    q = poses_of(mechanism, over)
    resolved = spreads_of(mechanism, spreads)
    count = checked_builds(builds)
    resolved.check_builds(count)
    start = checked_seed(seed)
    asked = _levels(levels)
    drawn = nominal(mechanism, q, gravity)
    size = size_of(mechanism, q, gravity)
    wanted = None if limit is None else limits_of(limit, size, torque_units(mechanism))
    names = resolved.names
    program = torque_program(mechanism, len(names), lambda v: dict(zip(names, v, strict=True)), gravity)
    poses = columns_of(q)
    pilot = [value[:PILOT, None] for value in resolved.values(start, 0, *chunk_bounds(0, count))]
    bins = tuple(
        Bins.around(_finite(torque, own)) for torque, own in zip(torques_of(program, poses, pilot), drawn, strict=True)
    )
    job = ScatterJob(program, poses, resolved, start, count, bins)
    part = run(job, chunk_count(count), executor)
    refuse_unbuildable(mechanism, part.lows, part.highs, names)
    bands = np.stack([one.quantiles(own, asked) for one, own in zip(part.counts, bins, strict=True)], axis=-1)
    return Scatter(
        mechanism=mechanism,
        builds=count,
        seed=start,
        poses=q,
        worst=part.worst if q.ndim > 1 else part.worst[:, 0],
        levels=asked,
        bands=bands if q.ndim > 1 else bands[..., 0],
        nominal=drawn.T if q.ndim > 1 else drawn[0],
        peak_gravity_torque=size if q.ndim > 1 else float(size[0]),
        limit=wanted if wanted is None or q.ndim > 1 else float(wanted[0]),
        gravity=gravity,
        spreads=resolved,
    )


def _finite(torques: Array, drawn: Array) -> Array:
    """The first builds that are whole, and the mechanism as drawn."""
    return np.concatenate([torques[np.all(np.isfinite(torques), axis=1)], drawn[None]])


def _levels(levels: Any) -> tuple[float, ...]:
    try:
        values = tuple(float(level) for level in levels)
    except (TypeError, ValueError):
        values = ()
    if not values or not all(0.0 <= level <= 1.0 for level in values):
        raise InputError(f"levels must be numbers from 0 to 1, got {levels!r}")
    return values

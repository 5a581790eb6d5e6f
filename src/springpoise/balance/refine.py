"""The best mount between the lines of the grid."""

from __future__ import annotations

import math

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.candidates import StockCandidate, no_margin
from springpoise.balance.residual import residual
from springpoise.balance.route import Routing

__all__ = ["refined"]

Box = tuple[tuple[float, float], tuple[float, float]]


def refined(routing: Routing, start: StockCandidate, box: Box, step: float) -> StockCandidate:
    """The candidate at the radius and height within the box that make its worst residual least.

    Rounded to multiples of ``step``. Comes back as it was where rounding leaves nothing better.
    """
    import scipy.optimize

    spring = start.mechanism.springs[-1].spring
    q = routing.poses
    base = np.broadcast_to(routing.mechanism.holding_torque(q), q.shape)

    def worst(place: NDArray[np.float64]) -> float:
        radius, height = map(float, place)
        geometry = routing.geometry(np.array([radius]), height)
        shift = float(spring.effective_free_length) if routing.pulley is not None else 0.0  # type: ignore[attr-defined]
        length = geometry.pull[0] + shift
        low, high = spring.working_range  # type: ignore[attr-defined]
        out = max(low - length.min(), length.max() - min(high, geometry.room), 0.0)
        if not np.all(np.isfinite(length)) or out > 0:
            return 1e6 * (1.0 + (out if math.isfinite(out) else 1.0))
        return float(np.max(np.abs(base + start.count * spring.load(length) * geometry.lever[0])))

    begin = np.array([start.attach_radius, start.anchor_height])
    wide = [bounds for bounds in box if bounds[1] > bounds[0]]
    if not wide:
        return start
    # A corner of the first simplex away from the box's edge in each direction.
    sizes = [0.02 * (high - low) or 0.0 for low, high in box]
    simplex = [begin]
    for axis, size in enumerate(sizes):
        corner = begin.copy()
        corner[axis] += size if corner[axis] + size <= box[axis][1] else -size
        simplex.append(corner)
    found = scipy.optimize.minimize(
        worst,
        begin,
        method="Nelder-Mead",
        bounds=box,
        options={"initial_simplex": np.array(simplex), "xatol": step / 10, "fatol": 1e-9, "maxiter": 400},
    )
    best = start
    for radius, height in _roundings(found.x, box, step):
        there = _moved(routing, start, radius, height)
        if not no_margin(there) and _has_room(routing, there) and there.residual.worst < best.residual.worst:
            best = there
    return best


def _roundings(place: NDArray[np.float64], box: Box, step: float) -> list[tuple[float, float]]:
    """The four multiples of the step around a place, kept in the box."""
    choices = []
    for value, (low, high) in zip(place, box, strict=True):
        around = {round(math.floor(value / step) * step, 9), round(math.ceil(value / step) * step, 9)}
        inside = [x for x in around if low - 1e-12 <= x <= high + 1e-12]
        choices.append(sorted(inside) or [float(value)])
    return [(radius, height) for radius in choices[0] for height in choices[1]]


def _has_room(routing: Routing, there: StockCandidate) -> bool:
    """Whether the spring ends before its pulley at every pose."""
    spring = there.mechanism.springs[-1].spring
    return float(spring.working_range[1]) - there.stretch_margin <= routing.room(there.anchor_height)  # type: ignore[attr-defined]


def _moved(routing: Routing, start: StockCandidate, radius: float, height: float) -> StockCandidate:
    """The same part at another mount."""
    old = start.mechanism.springs[-1]
    mount = routing.mount(old.spring, old.count, radius, height)  # type: ignore[arg-type]
    mechanism = routing.mechanism.with_springs([*routing.mechanism.springs, mount])
    q = routing.poses
    length = np.broadcast_to(mount.spring_length(mechanism.linkage, q), q.shape)
    low, high = old.spring.working_range  # type: ignore[attr-defined]
    return attrs.evolve(
        start,
        attach_radius=radius,
        anchor_height=height,
        residual=residual(mechanism, q),
        pivot_load=float(np.max(mechanism.pivot_load(q))),
        slack_margin=float(length.min() - low),
        stretch_margin=float(high - length.max()),
        stored_energy=float(np.max(mechanism.spring_energy(q))),
        mechanism=mechanism,
        refined=True,
    )

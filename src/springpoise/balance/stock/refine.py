"""The best mount between the lines of the grid."""

from __future__ import annotations

import math

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.candidates import StockCandidate, candidate, keeps_margin
from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.route import Routing

__all__ = ["refined"]

Box = tuple[tuple[float, float], tuple[float, float]]


def refined(
    routing: Routing, stock: Stock, start: StockCandidate, box: Box, step: float, margin: float
) -> StockCandidate:
    """The candidate at the radius and height within the box that make its worst residual least.

    Rounded to multiples of ``step``, with a ``margin`` to both ends of the spring's lengths. Comes
    back as it was where rounding leaves nothing better.
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
        out = max(low + margin - length.min(), length.max() - min(high - margin, geometry.room), 0.0)
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
        there = candidate(routing, stock, start.index, start.count, radius, height)
        if keeps_margin(there, margin) and _has_room(routing, there) and there.residual.worst < best.residual.worst:
            best = attrs.evolve(there, refined=True)
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

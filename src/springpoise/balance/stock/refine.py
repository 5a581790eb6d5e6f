"""The best mount between the lines of the grid."""

from __future__ import annotations

import math
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.candidates import StockCandidate, candidate, keeps_margin
from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.route import Routing

__all__ = ["Box", "refined"]

ITERATIONS = 200
"""At the most so many iterations for each direction of the search."""

RESTARTS, WORTHWHILE = 4, 0.01
"""At the most so many searches, each from where the last one ended, while one gains so much relatively."""

ANCHOR_ANGLE = 2
"""Its place in a box."""


class Box(NamedTuple):
    """Least and greatest values of a grid."""

    radius: tuple[float, float]
    """[m]"""
    height: tuple[float, float]
    """[m]"""
    anchor_angle: tuple[float, float]
    """[rad]"""
    attach_skew: tuple[float, float]
    """[rad]"""


def refined(
    routing: Routing, stock: Stock, start: StockCandidate, box: Box, step: float, margin: float
) -> StockCandidate:
    """The candidate within the box whose worst residual is least.

    Radius and height are rounded to multiples of ``step``, with a ``margin`` to both ends of the
    spring's lengths. Comes back as it was where rounding leaves nothing better. ``routing`` is the
    start's.
    """
    import scipy.optimize

    spring = start.mechanism.springs[-1].spring
    q = routing.poses
    base = np.broadcast_to(routing.mechanism.holding_torque(q), q.shape)

    def turned(anchor_angle: float, attach_skew: float) -> Routing:
        return attrs.evolve(routing, anchor_angle=anchor_angle, attach_skew=attach_skew)

    def worst(place: NDArray[np.float64]) -> float:
        radius, height, anchor_angle, attach_skew = whole(place)
        geometry = turned(anchor_angle, attach_skew).geometry(np.array([radius]), height)
        shift = float(spring.effective_free_length) if routing.pulley is not None else 0.0  # type: ignore[attr-defined]
        length = geometry.pull[0] + shift
        low, high = spring.working_range  # type: ignore[attr-defined]
        out = max(low + margin - length.min(), length.max() - min(high - margin, geometry.room), 0.0)
        if not np.all(np.isfinite(length)) or out > 0:
            return 1e6 * (1.0 + (out if math.isfinite(out) else 1.0))
        return float(np.max(np.abs(base + start.count * spring.load(length) * geometry.lever[0])))

    begin = np.array([start.attach_radius, start.anchor_height, routing.anchor_angle, routing.attach_skew])
    # Turning a straight spring's two ends together changes nothing but where the pivot is loaded.
    free = [axis for axis in range(len(box)) if routing.pulley is not None or axis != ANCHOR_ANGLE]
    wide = [axis for axis in free if box[axis][1] > box[axis][0]]
    if not wide:
        return start

    def whole(place: NDArray[np.float64]) -> list[float]:
        every = begin.copy()
        every[wide] = place
        return [float(value) for value in every]

    bounds = np.array([box[axis] for axis in wide])
    place, reached = begin[wide], start.residual.worst
    for _ in range(RESTARTS):  # a simplex can fall flat against the edge of the box
        found = scipy.optimize.minimize(
            worst,
            place,
            method="Nelder-Mead",
            bounds=bounds,
            options={
                "initial_simplex": _simplex(place, bounds),
                "xatol": step / 10,
                "fatol": 1e-9,
                "maxiter": ITERATIONS * len(wide),
            },
        )
        place, before, reached = found.x, reached, float(found.fun)
        if not reached < (1.0 - WORTHWHILE) * before:
            break
    radius, height, anchor_angle, attach_skew = whole(place)
    there = turned(anchor_angle, attach_skew)
    best = start
    for drilled in _roundings((radius, height), (box.radius, box.height), step):
        one = candidate(there, stock, start.index, start.count, *drilled)
        if keeps_margin(one, margin) and _has_room(there, one) and one.residual.worst < best.residual.worst:
            best = attrs.evolve(one, refined=True)
    return best


def _simplex(place: NDArray[np.float64], bounds: NDArray[np.float64]) -> NDArray[np.float64]:
    """A corner away from the place, and from the box's edge, in each direction."""
    simplex = np.tile(place, (place.size + 1, 1))
    for axis, (low, high) in enumerate(bounds):
        size = 0.02 * (high - low)
        simplex[axis + 1, axis] += size if place[axis] + size <= high else -size
    return simplex


def _roundings(
    place: tuple[float, float], box: tuple[tuple[float, float], tuple[float, float]], step: float
) -> list[tuple[float, float]]:
    """The four multiples of the step around a place, kept in the box."""
    choices = []
    for value, (low, high) in zip(place, box, strict=True):
        around = {round(math.floor(value / step) * step, 9), round(math.ceil(value / step) * step, 9)}
        inside = [x for x in around if low - 1e-12 <= x <= high + 1e-12]
        choices.append(sorted(inside) or [value])
    return [(radius, height) for radius in choices[0] for height in choices[1]]


def _has_room(routing: Routing, there: StockCandidate) -> bool:
    """Whether the spring ends before its pulley at every pose."""
    spring = there.mechanism.springs[-1].spring
    return float(spring.working_range[1]) - there.stretch_margin <= routing.room(there.anchor_height)  # type: ignore[attr-defined]

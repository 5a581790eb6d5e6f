"""The best mount between the lines of the grid."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import cached_property
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.candidates import StockCandidate, candidate
from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.route import Routing
from springpoise.carriers import Carrier
from springpoise.tape import record

__all__ = ["Box", "Refiner", "refined"]

Array = NDArray[np.float64]

ITERATIONS = 200
"""At the most so many iterations for each direction of the search."""

RESTARTS, WORTHWHILE = 4, 0.01
"""At the most so many searches, each from where the last one ended, while one gains so much relatively."""

FAR = 1e6
"""The worst residual where springs do not fit, over that without them [1]: more than any spring leaves."""

DIGITS = 12
"""Lengths are rounded to so many digits behind the point [m], so that a multiple of a step reads as one."""

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


@attrs.frozen(eq=False)
class Refiner:
    """What is the same for all candidates that are refined."""

    routing: Routing
    """Any routing of the grid."""
    stock: Stock
    box: Box
    step: float
    """Radius and height are rounded to multiples of it [m]."""
    margin: float
    """Distance to both ends of the spring's lengths [m]."""

    @cached_property
    def base(self) -> Array:
        """Torque that is to be balanced [N·m], shape (poses,)."""
        q = self.routing.poses
        return np.broadcast_to(self.routing.mechanism.holding_torque(q), q.shape)

    @cached_property
    def geometry(self) -> Callable[..., list[Array]]:
        """``pull`` and ``lever`` (see ``Geometry``) over the poses, from a place in the box: recorded, so that it is quick."""
        linkage = self.routing.mechanism.linkage

        def formula(*inputs: Carrier) -> tuple[Carrier, Carrier]:
            radius, height, anchor_angle, attach_skew, q = inputs
            there = self.turned(anchor_angle, attach_skew)
            path = there.path(radius, height)
            return path.length(linkage, q) - there.zero_force_length(radius, height), path.gradient(linkage, q)[0]

        return record(formula, inputs=(*Box._fields, "q")).numpy_function()

    def turned(self, anchor_angle: Carrier, attach_skew: Carrier) -> Routing:
        """The routing in other directions."""
        return attrs.evolve(self.routing, anchor_angle=anchor_angle, attach_skew=attach_skew)

    @cached_property
    def outside(self) -> float:
        """More than any spring leaves [N·m]: what ``worst`` begins with where springs do not fit."""
        return FAR * float(np.max(np.abs(self.base)))

    def worst(self, start: StockCandidate, place: Sequence[float]) -> float:
        """Worst residual of the start's springs at a place in the box [N·m].

        Where they do not fit, or the cable does not get there, it is ``outside`` or more: the more they lack, the more.
        """
        spring = self.stock.spring(start.index)
        _, height, anchor_angle, attach_skew = place
        with np.errstate(all="ignore"):
            found = self.geometry(*place, self.routing.poses)
        pull, lever = (np.broadcast_to(one, self.base.shape) for one in found)
        if not (np.all(np.isfinite(pull)) and np.all(np.isfinite(lever))):
            return 2.0 * self.outside
        length = pull if self.routing.pulley is None else pull + float(spring.effective_free_length)
        low, high = spring.working_range
        room = self.turned(anchor_angle, attach_skew).room(height)
        lack = max(low + self.margin - length.min(), length.max() - min(high - self.margin, room))
        if lack > 0.0:
            return self.outside * (1.0 + float(lack))
        return float(np.max(np.abs(self.base + start.count * spring.load(length) * lever)))


def refined(refiner: Refiner, start: StockCandidate, routing: Routing) -> StockCandidate:
    """The candidate within the box whose worst residual is least; ``routing`` is the start's.

    Comes back as it was where rounding leaves nothing better.
    """
    import scipy.optimize

    box, step = refiner.box, refiner.step
    begin = np.array([start.attach_radius, start.anchor_height, routing.anchor_angle, routing.attach_skew])
    # Turning a straight spring's two ends together changes nothing but where the pivot is loaded.
    free = [axis for axis in range(len(box)) if routing.pulley is not None or axis != ANCHOR_ANGLE]
    wide = [axis for axis in free if box[axis][1] > box[axis][0]]
    if not wide:
        return start

    def whole(place: Array) -> list[float]:
        every = begin.copy()
        every[wide] = place
        return [float(value) for value in every]

    def worst(place: Array) -> float:
        return refiner.worst(start, whole(place))

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
    there = refiner.turned(anchor_angle, attach_skew)
    best = start
    for drilled in _roundings((radius, height), (box.radius, box.height), step):
        if refiner.worst(start, [*drilled, anchor_angle, attach_skew]) >= refiner.outside:
            continue  # rounded, it does not fit, or ends inside the pulley
        one = candidate(there, refiner.stock, start.index, start.count, *drilled)
        if _keeps_margin(one, refiner.margin) and one.residual.worst < best.residual.worst:
            best = attrs.evolve(one, refined=True)
    return best


def _simplex(place: Array, bounds: Array) -> Array:
    """A corner away from the place, and from the box's edge, in each direction."""
    simplex = np.tile(place, (place.size + 1, 1))
    for axis, (low, high) in enumerate(bounds):
        size = 0.02 * (high - low)
        simplex[axis + 1, axis] += size if place[axis] + size <= high else -size
    return simplex


def _roundings(
    place: tuple[float, float], box: tuple[tuple[float, float], tuple[float, float]], step: float
) -> list[tuple[float, float]]:
    """The four multiples of the step around a place, as far as they lie in the box; else the box's own edges."""
    choices = []
    for value, (low, high) in zip(place, box, strict=True):
        around = {round(whole(value / step) * step, DIGITS) for whole in (math.floor, math.ceil)}
        inside = {x for x in around if low - 1e-12 <= x <= high + 1e-12}
        choices.append(sorted(inside or {low, high}))
    return [(radius, height) for radius in choices[0] for height in choices[1]]


def _keeps_margin(one: StockCandidate, margin: float) -> bool:
    """Whether a candidate's spring keeps this distance from both ends of its lengths, and pulls throughout."""
    return one.slack_margin > 0 and one.slack_margin >= margin and one.stretch_margin >= margin

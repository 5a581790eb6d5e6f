"""Straight cable runs between circles, and the choice of the circles that a taut cable touches.

A circle carries a sense: +1 where the cable runs round it counter-clockwise, so that its centre
lies to the left of the cable's way, -1 where clockwise, 0 for a point. σ is sense times radius.
With unit direction ``u`` and left normal ``n``, a run from circle i to circle j leaves i at
``c_i - σ_i n`` and meets j at ``c_j - σ_j n``; hence ``c_j - c_i = length·u + (σ_j - σ_i)·n``,
which serves inner and outer tangents alike and needs no angle.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import partial
from itertools import combinations, pairwise
from typing import NamedTuple

from springpoise.carriers import ALMOST_NOTHING, Carrier, namespace

__all__ = ["Circle", "Span", "Tangent"]

ROUNDING = 1e-6
"""A wrap this little below zero [rad] is a cable that just leaves, not one that goes once round."""


class Circle(NamedTuple):
    """Where a disc or a point is at some pose."""

    x: Carrier
    y: Carrier
    radius: Carrier
    sense: float

    @property
    def signed_radius(self) -> Carrier:
        """Radius with the sign of the sense."""
        return self.sense * self.radius

    def tied_at(self, x: Carrier, y: Carrier) -> Tangent:
        """The run of no length at a point of the rim, in the direction in which the cable lies there."""
        scale = self.sense / self.radius
        return Tangent(x, y, scale * (self.y - y), scale * (x - self.x), 0.0 * x, True)


class Tangent(NamedTuple):
    """A straight run between two circles."""

    start_x: Carrier
    start_y: Carrier
    ux: Carrier
    uy: Carrier
    length: Carrier
    possible: Carrier  # False where one circle lies inside the other


def _tangent(first: Circle, last: Circle) -> Tangent:
    dx, dy = last.x - first.x, last.y - first.y
    step = last.signed_radius - first.signed_radius
    square = dx * dx + dy * dy + ALMOST_NOTHING
    rest = square - step * step
    xp = namespace(rest)
    length = xp.sqrt(xp.maximum(rest, ALMOST_NOTHING))
    ux = (length * dx + step * dy) / square
    uy = (length * dy - step * dx) / square
    start_x = first.x + first.signed_radius * uy
    start_y = first.y - first.signed_radius * ux
    return Tangent(start_x, start_y, ux, uy, length, rest > 0.0)


class Span:
    """A cable between two points that it always touches, with circles between them.

    Every choice of touched circles is weighed: it is the taut one where the cable presses on each
    circle that it touches and clears each that it skips.
    """

    def __init__(self, circles: Sequence[Circle], *, ties: Sequence[tuple[int, int]] = ()) -> None:
        """``ties``: neighbours of which one is a point on the rim of the other."""
        self.circles = tuple(circles)
        self._tangents: dict[tuple[int, int], Tangent] = {}
        for i, j in ties:
            drum, end = (
                (self.circles[i], self.circles[j]) if self.circles[i].sense else (self.circles[j], self.circles[i])
            )
            self._tangents[i, j] = drum.tied_at(end.x, end.y)
        self._lifted: dict[tuple[int, int, int], Carrier] = {}

    def tangent(self, i: int, j: int) -> Tangent:
        """The straight run from circle i to circle j."""
        if (i, j) not in self._tangents:
            self._tangents[i, j] = _tangent(self.circles[i], self.circles[j])
        return self._tangents[i, j]

    def wrap(self, i: int, j: int, k: int) -> Carrier:
        """Angle over which a cable from i to k touches circle j [rad], from 0 to one turn."""
        before, behind = self.tangent(i, j), self.tangent(j, k)
        cross = before.ux * behind.uy - before.uy * behind.ux
        dot = before.ux * behind.ux + before.uy * behind.uy
        xp = namespace(cross)
        angle = xp.atan2(self.circles[j].sense * cross, dot)
        return xp.where(angle < -ROUNDING, angle + 2.0 * math.pi, angle)

    def lifted(self, i: int, m: int, k: int) -> Carrier:
        """Whether a straight run from i to k clears circle m on the side on which the cable passes it."""
        if (i, m, k) not in self._lifted:
            run, circle = self.tangent(i, k), self.circles[m]
            dx, dy = circle.x - run.start_x, circle.y - run.start_y
            aside = circle.sense * (run.ux * dy - run.uy * dx)
            along = run.ux * dx + run.uy * dy
            clear = _any([aside >= circle.radius, along < 0.0, along > run.length])
            self._lifted[i, m, k] = _all([aside > 0.0, clear])
        return self._lifted[i, m, k]

    def _holds(self, touched: tuple[int, ...]) -> Carrier:
        """Whether the taut cable touches these circles and no others."""
        conditions = [self.tangent(i, j).possible for i, j in pairwise(touched)]
        conditions += [self.lifted(i, m, j) for i, j in pairwise(touched) for m in range(i + 1, j)]
        for i, j, k in zip(touched, touched[1:], touched[2:], strict=False):
            conditions.append(_not(self.lifted(i, j, k)))
        return _all(conditions)

    def choose(self, value: Callable[[tuple[int, ...]], Carrier]) -> Carrier:
        """``value(touched)`` for the circles that the taut cable touches at each pose, ends included.

        NaN where an end lies inside a circle, or where a circle that must be touched lies inside
        its neighbour.
        """
        last = len(self.circles) - 1
        everything = tuple(range(last + 1))
        inner = everything[1:-1]
        outside = [self.tangent(*ends).possible for m in inner for ends in ((0, m), (m, last))]
        fits = [self.tangent(i, j).possible for i, j in pairwise(everything)]
        result = _select(_all(fits), lambda: value(everything), math.nan)
        for skipped in range(1, last):  # ever fewer touched: where two choices hold, the freer one is it
            for between in combinations(inner, last - 1 - skipped):
                touched = (0, *between, last)
                result = _select(self._holds(touched), partial(value, touched), result)
        return _select(_all(outside), lambda: result, math.nan)


# The conditions of what does not move are plain bools. They are settled here, since not every
# namespace takes them among its arrays.


def _all(conditions: Sequence[Carrier]) -> Carrier:
    result: Carrier = True
    for condition in conditions:
        if isinstance(result, bool):
            result = condition if result else False
        elif isinstance(condition, bool):
            result = result if condition else False
        else:
            result = namespace(result, condition).logical_and(result, condition)
    return result


def _any(conditions: Sequence[Carrier]) -> Carrier:
    result: Carrier = False
    for condition in conditions:
        if isinstance(result, bool):
            result = True if result else condition
        elif isinstance(condition, bool):
            result = True if condition else result
        else:
            result = namespace(result, condition).logical_or(result, condition)
    return result


def _not(condition: Carrier) -> Carrier:
    return not condition if isinstance(condition, bool) else namespace(condition).logical_not(condition)


def _select(condition: Carrier, value: Callable[[], Carrier], otherwise: Carrier) -> Carrier:
    if isinstance(condition, bool):
        return value() if condition else otherwise
    chosen = value()
    # The values come first: a dual among them counts for more than a plain array of conditions.
    return namespace(chosen, otherwise, condition).where(condition, chosen, otherwise)

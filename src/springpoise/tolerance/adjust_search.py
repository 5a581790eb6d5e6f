"""One adjuster in many builds: the setting that leaves the least, build by build."""

from __future__ import annotations

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.tape import Program
from springpoise.tolerance.recorded import torques_of

__all__ = ["Adjusting", "adjusted"]

Array = NDArray[np.float64]

NEWTON = 20
"""Most steps towards the least squares."""

CUTS = 45
"""Most steps towards the least worst residual."""

SCAN = np.linspace(-1.0, 1.0, 13)
"""Settings that are looked at first, over the reach of the search to each side [1]."""

CLOSE = 1e-10
"""A step below this share of the whole way, or a gap below this share of the residual [1], is the end."""


@attrs.frozen(eq=False)
class Adjusting:
    """Some builds with one adjuster."""

    program: Program
    """Torque and its derivative by the adjuster's move; inputs are pose, the scattered fields, the move."""
    poses: Array
    """Shape (p,) [rad]."""
    values: list[Array]
    """Scattered fields, shape (n, 1) each."""

    def at(self, move: Array) -> tuple[Array, Array]:
        """Torque [N·m] and its derivative at moves of shape (n,), both (n, p)."""
        torque, slope = torques_of(self.program, [self.poses], [*self.values, move[:, None]])
        return torque, slope

    def only(self, builds: NDArray[np.intp]) -> Adjusting:
        """Some of the builds."""
        return attrs.evolve(self, values=[value[builds] for value in self.values])

    def tangent(self, move: Array) -> tuple[Array, Array]:
        """Worst residual [N·m], shape (n,), and how it grows with the move."""
        torque, slope = self.at(move)
        size = np.abs(torque)
        worst = np.argmax(np.where(np.isnan(size), -1.0, size), axis=1)
        rows = np.arange(len(move))
        return np.max(size, axis=1), np.sign(torque[rows, worst]) * slope[rows, worst]


def adjusted(builds: Adjusting, norm: str) -> tuple[Array, Array]:
    """Moves that leave the least, and the worst residuals that remain [N·m], shape (n,) each."""
    with np.errstate(all="ignore"):
        move = _least_squares(builds)
        if norm == "minimax":
            move = _least_worst(builds, move)
        worst = np.max(np.abs(builds.at(move)[0]), axis=1)
    return move, worst


def _least_squares(builds: Adjusting) -> Array:
    """Gauss-Newton steps, halved in those builds where a step did not help."""
    move = np.zeros(len(builds.values[0]))
    torque, slope = builds.at(move)
    square, step = _sum(torque, torque), _newton(torque, slope)
    whole = np.abs(step)
    for _ in range(NEWTON):
        tried = move + step
        torque, slope = builds.at(tried)
        now = _sum(torque, torque)
        better = now <= square
        move, square = np.where(better, tried, move), np.where(better, now, square)
        step = np.where(better, _newton(torque, slope), 0.5 * step)
        whole = np.maximum(whole, np.abs(move))
        if not np.any(np.abs(step) > CLOSE * whole):
            break
    return move


def _newton(torque: Array, slope: Array) -> Array:
    step = -_sum(torque, slope) / _sum(slope, slope)
    return np.where(np.isfinite(step), step, 0.0)


def _sum(one: Array, other: Array) -> Array:
    return np.asarray(np.sum(one * other, axis=1))


def _least_worst(builds: Adjusting, start: Array) -> Array:
    """Tangents of the worst residual from both sides; the next move is where they meet.

    The worst residual is a maximum of nearly straight lines over the move. If they were straight,
    the least of it would lie within twice the residual over the greatest slope of any setting. A
    coarse look over that range comes first, since curved ones have more than one valley.
    """
    torque, slope = builds.at(start)
    best, least = start.copy(), np.max(np.abs(torque), axis=1)
    reach = 2.0 * least / np.max(np.abs(slope), axis=1)
    reach = np.where(np.isfinite(reach), reach, 0.0)
    lowest, at_lowest = least.copy(), np.zeros(len(start))
    for part in SCAN:
        seen = builds.tangent(start + part * reach)[0]
        at_lowest = np.where(seen < lowest, part, at_lowest)
        lowest = np.where(seen < lowest, seen, lowest)
    middle, step = start + at_lowest * reach, (SCAN[1] - SCAN[0]) * reach
    best, least = middle.copy(), lowest
    # Move, worst residual there and its growth, on the side where it falls and where it rises.
    left, right = (np.stack([at, *builds.tangent(at)]) for at in (middle - step, middle + step))
    going = np.arange(len(start))
    for cut in range(CUTS):
        (a, worst_a, slope_a), (b, worst_b, slope_b) = left, right
        meeting = (worst_b - worst_a + slope_a * a - slope_b * b) / (slope_a - slope_b)
        valley = (slope_a < 0.0) & (slope_b > 0.0) & (meeting >= a) & (meeting <= b)
        # Now and then the middle, lest one side stays where it was and its tangent says little.
        move = np.where(valley & (cut % 3 < 2), meeting, 0.5 * (a + b))
        new = np.stack([move, *builds.only(going).tangent(move)])
        better = new[1] < least[going]
        best[going] = np.where(better, move, best[going])
        least[going] = np.where(better, new[1], least[going])
        bound = worst_a + slope_a * (move - a)
        falls = new[2] < 0.0
        left, right = np.where(falls, new, left), np.where(falls, right, new)
        wide = right[0] - left[0] > CLOSE * reach[going]
        # Where the tangents meet on the curve itself, nothing between them is less.
        still = ~(valley & (move == meeting) & (np.abs(new[1] - bound) <= CLOSE * new[1])) & wide
        left, right, going = left[:, still], right[:, still], going[still]
        if not going.size:
            break
    return best

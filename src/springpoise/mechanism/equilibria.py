"""Where a one-joint mechanism stands still by itself."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

__all__ = ["Equilibria", "Equilibrium", "find_equilibria"]

SCAN_POSES = 1441
"""Poses of the first look [1]: every quarter degree of a full turn."""

NEUTRAL = 1e-9
"""Net torque over the greatest gravity torque below which every angle counts as balanced [1]."""

ROUNDING = 1e-12
"""Net torque over the greatest of the torques in it that counts as zero [1]."""


@attrs.frozen
class Equilibrium:
    """An angle at which the net torque is zero."""

    angle: float
    """Joint angle [rad]."""
    stable: bool
    """Whether the mechanism comes back when it is pushed away a little."""


@attrs.frozen
class Equilibria:
    """All angles in the travel at which the net torque is zero."""

    points: tuple[Equilibrium, ...]
    """The single angles, in increasing order; none where ``everywhere``."""
    everywhere: bool
    """Whether the mechanism is balanced at every angle of its travel, to 1e-9 of its gravity torque."""
    travel: tuple[float, float]
    """The range that was looked through [rad]."""

    @property
    def angles(self) -> tuple[float, ...]:
        """The angles alone [rad]."""
        return tuple(point.angle for point in self.points)

    @property
    def stable_angles(self) -> tuple[float, ...]:
        """The stable ones alone [rad]."""
        return tuple(point.angle for point in self.points if point.stable)

    def __str__(self) -> str:
        low, high = np.degrees(self.travel)
        if self.everywhere:
            return f"balanced at every angle from {low:.1f} to {high:.1f} deg"
        if not self.points:
            return f"balanced at no angle from {low:.1f} to {high:.1f} deg"
        return "balanced at " + ", ".join(
            f"{np.degrees(p.angle):.2f} deg ({'stable' if p.stable else 'unstable'})" for p in self.points
        )


def find_equilibria(
    net_torque: Callable[[Any], Any],
    travel: tuple[float, float],
    *,
    scale: float,
    largest_term: float,
    closed: bool = False,
) -> Equilibria:
    """Zeros of ``net_torque`` (what gravity and springs exert) in ``travel``, each refined to rounding.

    A jump through zero, such as that of a spring that goes slack, counts as an equilibrium too:
    the arm is held there from both sides, or leaves it to both. Of a part of the travel that is
    balanced throughout, the two ends are given.

    Parameters
    ----------
    net_torque
        Net torque [N·m] at an angle or an array of angles [rad].
    travel
        The range to look through [rad].
    scale
        Greatest gravity torque [N·m], what the net torque is compared with.
    largest_term
        Greatest of all torques that add up to the net torque [N·m], which sets the rounding.
    closed
        Whether both ends of the travel are the same pose.
    """
    angles: NDArray[np.float64] = np.linspace(*travel, SCAN_POSES)
    torques = np.asarray(net_torque(angles), dtype=np.float64)
    noise = ROUNDING * largest_term
    if np.all(np.abs(torques) <= max(NEUTRAL * scale, noise)):
        return Equilibria((), True, travel)
    sides = np.where(np.abs(torques) <= noise, 0.0, np.sign(torques))  # NaN stays NaN
    found = [*_zeros_at_samples(angles, sides), *_crossings(net_torque, angles, sides)]
    found += _dips(net_torque, angles, torques, sides, noise)
    found.sort(key=lambda point: point.angle)
    if closed and len(found) > 1 and found[0].angle == travel[0] and found[-1].angle == travel[1]:
        before, behind = sides[-2], sides[1]
        found = [*found[1:-1], Equilibrium(travel[1], bool(before > 0 > behind))]
    return Equilibria(tuple(found), False, travel)


def _zeros_at_samples(angles: NDArray[np.float64], sides: NDArray[np.float64]) -> Iterator[Equilibrium]:
    """Samples that are zero themselves; of several in a row the first and the last."""
    last = len(angles) - 1
    for i in np.flatnonzero(sides == 0.0):
        before = sides[i - 1] if i > 0 else -sides[i + 1]
        behind = sides[i + 1] if i < last else -sides[i - 1]
        if before != 0.0 or behind != 0.0 or i in (0, last):
            yield Equilibrium(float(angles[i]), bool(before > 0 > behind))


def _crossings(
    net_torque: Callable[[Any], Any], angles: NDArray[np.float64], sides: NDArray[np.float64]
) -> Iterator[Equilibrium]:
    """Changes of sign between two samples."""
    for i in np.flatnonzero(sides[:-1] * sides[1:] < 0.0):
        yield _crossing(net_torque, float(angles[i]), float(angles[i + 1]), sides[i])


def _crossing(net_torque: Callable[[Any], Any], low: float, high: float, before: float) -> Equilibrium:
    from scipy.optimize import brentq

    root: Any = brentq(net_torque, low, high, xtol=1e-14)
    return Equilibrium(float(root), bool(before > 0))


def _dips(
    net_torque: Callable[[Any], Any],
    angles: NDArray[np.float64],
    torques: NDArray[np.float64],
    sides: NDArray[np.float64],
    noise: float,
) -> Iterator[Equilibrium]:
    """Dips of the torque between samples of one sign, which may touch zero or cross it twice."""
    from scipy.optimize import minimize_scalar

    last = len(angles) - 1
    size = np.abs(torques)
    for i in range(last + 1):
        left, right = max(i - 1, 0), min(i + 1, last)
        side = sides[i]
        if side == 0.0 or not sides[left] == side == sides[right]:
            continue
        if (i > 0 and not size[i] < size[left]) or (i < last and not size[i] <= size[right]):
            continue
        low, high = float(angles[left]), float(angles[right])
        found: Any = minimize_scalar(
            lambda angle, side=side: side * float(net_torque(float(angle))),
            bounds=(low, high),
            method="bounded",
            options={"xatol": 1e-12},
        )
        lowest = float(found.x)
        if found.fun < -noise:
            yield _crossing(net_torque, low, lowest, side)
            yield _crossing(net_torque, lowest, high, -side)
        elif found.fun <= noise:
            yield Equilibrium(lowest, False)

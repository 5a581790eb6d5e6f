"""The line on which a cable has to lie so that its arm about the joint is as wanted.

A cable that leaves along direction ``u`` touches the line where the outward normal is a quarter
turn from ``u``. In the frame of the turning link, χ is that normal's direction and p the distance
of the tangent there from the axis. The tangents envelop the line ``(p + i dp/dχ) e^{iχ}``, whose
radius of curvature is ``p + d²p/dχ²``.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.spools.energy import Pull, Work
from springpoise.paths import GuideRoller

__all__ = ["Curve", "Layout"]

Array = NDArray[np.float64]

NEAR = 1e-6
"""So near to where an unloaded spring begins to pull [rad], limits are used instead of quotients."""

NEAR_BEND = 5e-3
"""The same for the second slope, whose quotient loses digits sooner [rad]."""

BESIDE = np.arange(0.01, 0.065, 0.01)
"""Where the second slope is taken from instead, beside the start [rad]."""


class Curve(NamedTuple):
    """A spool at some poses; every array has their shape."""

    angles: Array
    """Joint angles [rad]."""
    lengths: Array
    """Lengths of the spring [m]."""
    radii: Array
    """Derivative of the length by the joint's angle [m/rad]: the moment radius, with its sign."""
    arms: Array
    """The same, positive where the pull turns the spool the way it is meant to [m]."""
    normals: Array
    """Direction of the normal where the cable leaves, in the link's frame [rad]."""
    slopes: Array
    """dp/dχ [m/rad]."""
    curvatures: Array
    """Radius of curvature p + d²p/dχ² [m]."""
    turning: Array
    """-dχ/dq [1]: how fast the cable leaves the spool as the joint turns; 1 for a fixed direction."""
    straight: Array
    """Length of cable from spool to roller, or to a line across its direction [m]."""
    guided: Array
    """Length of cable round the roller, but for a constant [m]."""

    @property
    def pitch_line(self) -> Array:
        """Where the middle of the cable touches last, in the link's frame [m], shape (..., 2)."""
        c, s = np.cos(self.normals), np.sin(self.normals)
        return np.stack([self.arms * c - self.slopes * s, self.arms * s + self.slopes * c], axis=-1)

    def inside(self, depth: float) -> Array:
        """The line at ``depth`` inside of the pitch line [m], shape (..., 2)."""
        return self.pitch_line - depth * np.stack([np.cos(self.normals), np.sin(self.normals)], axis=-1)


@attrs.frozen
class Layout:
    """A spool that is asked for: what it has to give, by which spring, and how its cable leaves."""

    work: Work
    """What the mechanism asks for."""
    pull: Pull
    """The springs at the cable's end."""
    start: float
    """Joint angle at which the spring has its start length [rad]."""
    leaves: float | GuideRoller
    """Direction in which the cable leaves [rad], or the roller that it leaves over."""
    way: float
    """+1 where the pull turns the spool counter-clockwise, -1 where clockwise."""
    side: float
    """For an unloaded start, +1 where the joint turns counter-clockwise from it, else -1."""

    unloaded: bool
    """Whether the spring begins to pull at the start."""

    def curve(self, q: Array) -> Curve:
        """The spool at these joint angles."""
        with np.errstate(all="ignore"):
            lengths = self.pull.lengths(self.work.since(self.start, q))
            radii, first, second = self._radii(q, lengths)
            arms, d_arms, dd_arms = (-self.way * value for value in (radii, first, second))
            return self._laid(q, lengths, radii, (arms, d_arms, dd_arms))

    def _radii(self, q: Array, x: Array) -> tuple[Array, Array, Array]:
        """Moment radius dx/dq and its slopes, from load · dx/dq = -torque, differentiated twice."""
        asked = self.work.load(q)
        load, (rate, bend) = self.pull.load(x), self.pull.stiffness(x)
        radius = -asked.torque / load
        first = -(asked.slope + rate * radius**2) / load
        second = -(asked.bend + bend * radius**3 + 3.0 * rate * radius * first) / load
        if not self.unloaded:
            return radius, first, second
        # Where load and torque vanish together, the same equations give limits: rate · radius² = -slope, and on.
        away = np.abs(q - self.start)
        limit = self.side * np.sqrt(-asked.slope / rate)
        limit_first = -(asked.bend + bend * limit**3) / (3.0 * rate * limit)
        if np.any(away < NEAR_BEND):
            beside = self.start + self.side * BESIDE
            seconds = self._radii(beside, self.pull.lengths(self.work.since(self.start, beside)))[2]
            continued = np.polyfit(BESIDE, seconds, BESIDE.size - 1)
            second = np.where(away < NEAR_BEND, np.polyval(continued, away), second)
        return np.where(away < NEAR, limit, radius), np.where(away < NEAR, limit_first, first), second

    def _laid(self, q: Array, lengths: Array, radii: Array, arms: tuple[Array, Array, Array]) -> Curve:
        p, d_p, dd_p = arms
        if isinstance(self.leaves, GuideRoller):
            away, bearing = math.hypot(*self.leaves.at), math.atan2(self.leaves.at[1], self.leaves.at[0])
            reach = (p + self.leaves.side * self.leaves.radius) / away
            run = away * np.sqrt(1.0 - reach * reach)  # NaN where the line of the cable misses the roller
            ground = bearing - self.way * np.arccos(reach)
            turned = self.way * d_p / run
            bent = self.way * (dd_p / run + reach * away * d_p**2 / run**3)
            guided = self.way * self.leaves.side * self.leaves.radius * ground
        else:
            run = np.zeros(q.shape)
            ground = np.full(q.shape, self.leaves - self.way * math.pi / 2)
            turned, bent, guided = np.zeros(q.shape), np.zeros(q.shape), np.zeros(q.shape)
        rate = turned - 1.0  # dχ/dq
        slopes = d_p / rate
        curvatures = p + (dd_p - slopes * bent) / rate**2
        straight = run - self.way * slopes
        return Curve(q, lengths, radii, p, ground - q, slopes, curvatures, -rate, straight, guided)

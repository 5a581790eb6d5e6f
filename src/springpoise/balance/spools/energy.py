"""How long the spring of a spool has to be at each pose: its energy takes up what gravity gives.

Over a balanced travel the sum of all energies is constant. The spring on the spool therefore
holds, at joint angle q, what it held at the start and the work that the rest of the mechanism has
done since: ``count · (U(x) - U(x_start)) = V(q_start) - V(q) = W(q)``. The work is found as an
integral of the torque, which has no cancellation near the start; the length by inverting the
spring's energy, whose slope is the load.
"""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs.protocol import working_range_of
from springpoise.tape import Dual, record

__all__ = ["Load", "Pull", "Work"]

Array = NDArray[np.float64]

NODES, WEIGHTS = np.polynomial.legendre.leggauss(12)
"""Gauss's rule for one panel; exact for polynomials of degree 23."""

PANELS = 256
"""Panels on each side of the start."""

NOTHING = 1e-9
"""Share of the greatest load or torque that counts as none [1]."""

STEPS = 200
"""Most steps in which a length is found; bisection alone needs about 60 of them."""

ROUNDING = 4e-16
"""A step below this share of a length changes it no more [1]."""

FARTHEST = 1e4
"""Lengths beyond this [m] are not looked for."""


class Load(NamedTuple):
    """The torque that the spring has to give, and its first two slopes by the joint's angle."""

    torque: Array
    """[N·m], counter-clockwise positive."""
    slope: Array
    """[N·m/rad]."""
    bend: Array
    """[N·m/rad²]."""


class Work:
    """What a mechanism asks of one more spring: torques, and work done since a start angle."""

    def __init__(self, mechanism: Mechanism, over: tuple[float, float]) -> None:
        program = record(mechanism.holding_torque)
        first = program.derivative()
        self._torque = program.numpy_function()
        self._slopes = first.numpy_function(), first.derivative().numpy_function()
        self._knots: dict[tuple[float, float], tuple[Array, Array]] = {}
        self.over = over
        self.mechanism = mechanism
        self.poses = np.linspace(*over, 721)
        self.torques = self.torque(self.poses)
        if not np.all(np.isfinite(self.torques)):
            bad = math.degrees(self.poses[~np.isfinite(self.torques)][0])
            raise InputError(f"mechanism.holding_torque must be finite over the poses, got NaN at {bad:.2f} deg")
        self.peak = float(np.max(np.abs(self.torques)))

    def torque(self, q: Array) -> Array:
        """The torque that is lacking [N·m]: what holds the mechanism still without the new spring."""
        return np.broadcast_to(np.asarray(self._torque(q), dtype=np.float64), np.shape(q))

    def load(self, q: Array) -> Load:
        """The torque that is lacking, with slopes."""
        slope, bend = (np.broadcast_to(np.asarray(f(q), dtype=np.float64), q.shape) for f in self._slopes)
        return Load(self.torque(q), slope, bend)

    def highest(self) -> float:
        """The pose of the range at which the mechanism's energy is greatest, so that the spring is shortest [rad]."""
        from scipy.optimize import brentq

        energies = np.broadcast_to(self.mechanism.energy(self.poses), self.poses.shape)
        best = int(np.argmax(energies))
        low, high = self.poses[max(best - 1, 0)], self.poses[min(best + 1, len(self.poses) - 1)]
        before, behind = self.torque(np.array([low, high]))
        if before > 0 > behind:
            root: Any = brentq(lambda q: float(self.torque(np.array([q]))[0]), float(low), float(high), xtol=1e-15)
            if min(abs(root - self.over[0]), abs(root - self.over[1])) > 1e-12:
                return float(root)
        return float(self.poses[best])

    def since(self, start: float, q: Array) -> Array:
        """Work done by the mechanism on the way from ``start`` to ``q`` [J]."""
        done = np.zeros(q.shape)
        for side, end in ((q < start, self.over[0]), (q > start, self.over[1])):
            if not np.any(side):
                continue
            knots, panels = self._panelled(start, end)
            place = np.clip(((q[side] - start) / (knots[1] - start)).astype(int), 0, PANELS)
            done[side] = -(panels[place] + self._panels(knots[place], q[side]))
        return done

    def _panelled(self, start: float, end: float) -> tuple[Array, Array]:
        """Angles from start to end, and the integrals of the torque up to each."""
        if (start, end) not in self._knots:
            knots = np.linspace(start, end, PANELS + 1)
            panels = np.cumsum(self._panels(knots[:-1], knots[1:]))
            self._knots[start, end] = knots, np.concatenate([[0.0], panels])
        return self._knots[start, end]

    def _panels(self, low: Array, high: Array) -> Array:
        """Integral of the torque over each panel."""
        half = 0.5 * (high - low)
        q = 0.5 * (high + low)[:, None] + half[:, None] * NODES
        return np.asarray(half * (self.torque(q) @ WEIGHTS))


@attrs.frozen
class Pull:
    """Equal springs side by side, stretched from a length that they have at the start."""

    mount: SpringMount
    """The mount; only its spring and count are used."""
    start_length: float
    """Length of each spring at the start [m]."""

    @property
    def floor(self) -> float:
        """Shortest length at which the spring is asked [m]: just above the end of its working range."""
        low = float(working_range_of(self.mount.spring)[0])
        return float(np.nextafter(low, math.inf)) if math.isfinite(low) else -math.inf

    def load(self, x: Array) -> Array:
        """Load of all springs [N]."""
        return self._ask("load", np.maximum(x, self.floor))

    def stiffness(self, x: Array) -> tuple[Array, Array]:
        """Stiffness of all springs [N/m], and its slope [N/m²]."""
        there = np.maximum(x, self.floor)
        dual = self.mount.ask("stiffness", Dual(there, np.ones_like(there)))
        slope = dual.slope if isinstance(dual, Dual) else 0.0
        bend = np.broadcast_to(np.asarray(slope, dtype=np.float64), x.shape)
        return self._ask("stiffness", there), self.mount.count * bend

    def energy(self, x: Array) -> Array:
        """Energy of all springs beyond that at the start [J]."""
        there = np.maximum(x, self.floor)
        start = max(self.start_length, self.floor)
        return self._ask("energy", there) - float(self._ask("energy", np.array([start]))[0])

    def _ask(self, method: str, x: Array) -> Array:
        value = np.asarray(self.mount.ask(method, x), dtype=np.float64)
        return self.mount.count * np.broadcast_to(value, x.shape)

    def lengths(self, work: Array) -> Array:
        """Lengths at which the springs hold ``work`` more than at the start [m]; NaN where they cannot."""
        with np.errstate(all="ignore"):
            low, high = self._brackets(work)
            x = np.where(work == 0.0, self.start_length, 0.5 * (low + high))
            for _ in range(STEPS):
                beyond = self.energy(x) - work
                low, high = np.where(beyond <= 0, x, low), np.where(beyond >= 0, x, high)
                better = x - beyond / self.load(x)
                inside = (better >= low) & (better <= high)
                step = np.where(beyond == 0.0, 0.0, np.where(inside, better, 0.5 * (low + high)) - x)
                x = x + step
                if not np.any(np.abs(step) > ROUNDING * np.abs(x)):
                    break
        return np.asarray(x)

    def _brackets(self, work: Array) -> tuple[Array, Array]:
        """Lengths between which the springs reach ``work``; NaN where there are none."""
        start, size = self.start_length, max(abs(self.start_length), 1e-3)
        floor, ceiling = (float(end) for end in working_range_of(self.mount.spring))
        low, high = np.full(work.shape, start), np.full(work.shape, start)
        step = size
        while step < FARTHEST and np.any(short := (work > 0) & ~(self.energy(high) >= work)):
            reach = start + step
            if not np.isfinite(self.energy(np.array([reach]))[0]) and math.isfinite(ceiling):
                reach = min(reach, ceiling)
            high = np.where(short, reach, high)
            step *= 2.0
        step = size
        while step < FARTHEST and np.any(deep := (work < 0) & ~(self.energy(low) <= work)):
            low = np.where(deep, max(start - step, floor), low)
            step *= 2.0
        reached = (self.energy(high) >= work) & (self.energy(low) <= work)
        return np.where(reached, low, math.nan), np.where(reached, high, math.nan)

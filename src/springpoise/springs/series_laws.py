"""One spring of a chain: its length as a function of its load."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError
from springpoise.springs.compression import CompressionSpring
from springpoise.springs.constant_force import ConstantForceSpring
from springpoise.springs.extension import ExtensionSpring
from springpoise.springs.parallel import OffsetSpring
from springpoise.springs.protocol import working_range_of
from springpoise.springs.scaled import ScaledSpring
from springpoise.springs.zero_length import ZeroLengthSpring

__all__ = ["Law", "law_of"]

Array = NDArray[np.float64]

SAMPLES = 129
"""Lengths at which a curved spring is looked at first."""

BESIDE = 1e-9
"""How far beside a corner its two sides are looked at, over the spring's whole travel [1]."""


@attrs.frozen(eq=False)
class Law:
    """Corners of a spring's load line, and straight lines or a curve between them."""

    spring: Any
    loads: Array
    """Loads at the corners [N], strictly increasing."""
    lengths: Array
    """Lengths there [m], not decreasing; two corners of one length are a jump of the load."""
    curved: bool
    """Whether the spring's own formula holds between the corners, or straight lines do."""
    last_rate: float
    """Rate beyond the last corner [N/m]; 0 for a plateau, infinite where the spring ends there."""

    def length_at(self, load: float) -> float:
        """Length under a load within the law [m]."""
        if load > self.loads[-1]:
            return float(self.lengths[-1] + (load - self.loads[-1]) / self.last_rate)
        if not self.curved:
            return float(np.interp(load, self.loads, self.lengths))
        piece = int(np.clip(np.searchsorted(self.loads, load) - 1, 0, self.loads.size - 2))
        low, high = float(self.lengths[piece]), float(self.lengths[piece + 1])
        if load <= self.loads[piece] or low == high:
            return low
        if load >= self.loads[piece + 1]:
            return high
        from scipy.optimize import brentq

        def missing(x: float) -> float:
            # At the corners the law's own loads hold: beside a jump the spring's formula has one side only.
            at = self.loads[piece] if x == low else self.loads[piece + 1] if x == high else float(self.spring.load(x))
            return float(at) - load

        root: Any = brentq(missing, low, high, xtol=1e-15)
        return float(root)

    def compliance(self, load: float, side: float) -> float:
        """How much longer the spring gets for one newton, just beside a load [m/N]; ``side`` is +1 above, -1 below."""
        near = load + side * BESIDE * (abs(load) + BESIDE)
        at = int(np.searchsorted(self.loads, near))
        if at >= self.loads.size:
            return 1.0 / self.last_rate
        if at == 0 or self.lengths[at] == self.lengths[at - 1]:
            return 0.0
        if not self.curved:
            return float((self.lengths[at] - self.lengths[at - 1]) / (self.loads[at] - self.loads[at - 1]))
        low, high = float(self.lengths[at - 1]), float(self.lengths[at])
        aside = BESIDE * (high - low)
        x = min(max(self.length_at(load), low + aside), high - aside)  # a corner itself may count as slack
        return 1.0 / float(self.spring.stiffness(x))


def law_of(spring: Any) -> Law:
    """The law of a spring; exact where it is piecewise linear.

    Raises
    ------
    InputError
        A curved spring without a finite working range, or whose load does not grow with length.
    """
    low, high = (float(end) for end in working_range_of(spring))
    if isinstance(spring, ZeroLengthSpring):
        return _straight(spring, [0.0], [0.0], spring.rate, high)
    if isinstance(spring, ExtensionSpring):
        tension, free = float(spring.initial_tension), float(spring.free_length)
        corners = ([0.0, tension], [free, free]) if tension > 0 else ([0.0], [free])
        return _straight(spring, *corners, spring.rate, high)
    if isinstance(spring, CompressionSpring):
        free, solid = float(spring.free_length), float(spring.solid_length)
        return Law(spring, np.array([-spring.rate * (free - solid), 0.0]), np.array([solid, free]), False, math.inf)
    if isinstance(spring, ConstantForceSpring):
        return Law(spring, np.array([0.0, float(spring.pull)]), np.array([0.0, 0.0]), False, 0.0)
    if isinstance(spring, OffsetSpring):
        inner = law_of(spring.spring)
        return attrs.evolve(inner, spring=spring, lengths=inner.lengths + float(spring.by))
    if isinstance(spring, ScaledSpring):
        inner, factor = law_of(spring.spring), float(spring.factor)
        return attrs.evolve(inner, spring=spring, loads=inner.loads * factor, last_rate=inner.last_rate * factor)
    return _curved(spring, low, high)


def _straight(spring: Any, loads: list[float], lengths: list[float], rate: float, high: float) -> Law:
    if math.isfinite(high):
        loads = [*loads, loads[-1] + rate * (high - lengths[-1])]
        return Law(spring, np.array(loads), np.array([*lengths, high]), False, math.inf)
    return Law(spring, np.array(loads), np.array(lengths), False, float(rate))


def _curved(spring: Any, low: float, high: float) -> Law:
    kind = type(spring).__name__
    if not (math.isfinite(low) and math.isfinite(high)):
        raise InputError(
            f"in_series must be given springs with a finite working range, got {kind} with ({low}, {high})"
        )
    lengths = np.linspace(low, high, SAMPLES).tolist()
    loads = [float(spring.load(x)) for x in lengths]
    usual = (loads[-1] - loads[0]) / SAMPLES
    corners = [(lengths[0], loads[0])]
    for before, behind in zip(range(SAMPLES - 1), range(1, SAMPLES), strict=True):
        if loads[behind] - loads[before] > 2.0 * usual:
            corners += _jump(spring, lengths[before], lengths[behind], usual)
        corners.append((lengths[behind], loads[behind]))
    for (_, f), (x, g) in pairwise(corners):
        if not g > f:
            raise InputError(
                f"in_series must be given springs whose load grows with length, got {kind} whose load does not grow at {x:.6g} m"
            )
    xs, fs = zip(*corners, strict=True)
    return Law(spring, np.array(fs), np.array(xs), True, math.inf)


def _jump(spring: Any, low: float, high: float, usual: float) -> list[tuple[float, float]]:
    """Both sides of a jump of the load between two lengths, or nothing where it only rises steeply."""
    below, above = float(spring.load(low)), float(spring.load(high))
    first, last = low, high
    while last - first > 1e-13 * max(abs(high), 1.0):
        middle = 0.5 * (first + last)
        if not first < middle < last:
            break
        load = float(spring.load(middle))
        if load - below > above - load:
            last, above = middle, load
        else:
            first, below = middle, load
    if above - below <= 1e-3 * usual:
        return []
    sides = [(first, below), (first, above)]
    return sides[1:] if first == low else sides[:1] if last == high and first != low else sides

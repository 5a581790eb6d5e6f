"""A placement without derivatives, for a ``build`` that does arithmetic of its own kind."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.amounts import solved_shares
from springpoise.balance.placing.knobs import Knob
from springpoise.balance.placing.limits import Rules, limits_of
from springpoise.balance.placing.problem import built
from springpoise.balance.placing.search import BAD, SAMPLES, Ended, spread_starts
from springpoise.balance.placing.shares import MountShares, with_shares
from springpoise.errors import InputError, NoSolution
from springpoise.mechanism import Mechanism

__all__ = ["Plain"]

Array = NDArray[np.float64]

LEAST = 1e-12
"""Least share: a rate of nothing is refused by the springs themselves."""


@attrs.frozen(eq=False)
class Plain:
    """A placement that asks ``build`` for numbers only."""

    build: Callable[..., Mechanism]
    knobs: tuple[Knob, ...]
    norm: str
    q: Array
    peak: float
    rules: Rules
    free: tuple[int, ...]
    layout: tuple[MountShares, ...]
    nominal: tuple[float, ...]
    gravity: Any

    def values(self, place: Array) -> Mapping[str, float]:
        """Knob values by name."""
        return {knob.name: float(value) for knob, value in zip(self.knobs, place, strict=False)}

    def mechanism(self, place: Array, shares: Array) -> Mechanism:
        """The mechanism of some knobs and shares."""
        raw = built(self.build, self.values(place), self.free, self.gravity)
        return with_shares(raw, self.layout, [max(float(share), LEAST) for share in shares])

    def torque(self, mechanism: Mechanism) -> Array:
        """Holding torque over the poses, of all joints side by side [N·m]."""
        torque = np.asarray(mechanism.holding_torque(self.q), dtype=np.float64)
        return np.broadcast_to(torque, self.q.shape).T.ravel()

    def best_shares(self, place: Array) -> Array:
        """The shares that make the norm least at these knobs, as long as all springs pull: exact."""
        many = len(self.nominal)
        if not many:
            return np.empty(0)
        raw = built(self.build, self.values(place), self.free, self.gravity)
        base = np.array(self.nominal)
        at_base = self.torque(with_shares(raw, self.layout, self.nominal))
        columns = []
        for i in range(many):
            moved = base.copy()
            step = base[i] if base[i] > 0.0 else 1e-3 * float(np.max(base))
            moved[i] += step
            columns.append((self.torque(with_shares(raw, self.layout, moved.tolist())) - at_base) / step)
        matrix = np.stack(columns, axis=1)
        if not np.all(np.isfinite(matrix)) or not np.all(np.isfinite(at_base)):
            return base
        size = np.max(np.abs(matrix), axis=0)
        size[size == 0.0] = 1.0
        goal = matrix @ base - at_base
        return np.asarray(_solved(matrix / size, goal / self.peak, self.norm) * self.peak / size)

    def ended(self, place: Array, shares: Array) -> Ended:
        """How good some knobs and shares are."""
        mechanism = self.mechanism(place, shares)
        residual = np.nan_to_num(self.torque(mechanism) / self.peak, nan=BAD)
        size = np.max(np.abs(residual)) if self.norm == "minimax" else math.sqrt(np.mean(residual**2))
        short = 0.0
        for limit in limits_of(mechanism, self.q, self.rules, self.values(place)):
            margin = np.nan_to_num(np.asarray(limit.margin / limit.scale, dtype=np.float64), nan=-BAD)
            short = max(short, float(np.max(-margin)))
        return Ended(float(size), short, np.concatenate([place, shares]))

    def at(self, unit: Array) -> Ended:
        """The best that the springs can do at a place of the unit box."""
        place = np.array([k.low + share * (k.high - k.low) for k, share in zip(self.knobs, unit, strict=True)])
        try:
            return self.ended(place, self.best_shares(place))
        except InputError:  # nothing can be built there
            return Ended(BAD, BAD, np.concatenate([place, self.nominal]))

    def chosen_starts(self, starts: int, seed: int) -> list[Array]:
        """Promising places of the unit box."""
        unit = spread_starts(len(self.knobs), seed)[: SAMPLES // 2]
        ends = [self.at(one) for one in unit]
        order = sorted(range(len(unit)), key=lambda i: ends[i].size + 10.0 * ends[i].short)
        return [unit[i] for i in order[:starts]]

    def run_start(self, start: Array) -> Ended:
        """The best place that the simplex method reaches; springs are sized first and judged then."""
        import scipy.optimize

        def merit(unit: Array) -> float:
            end = self.at(np.clip(unit, 0.0, 1.0))
            return end.size if end.short == 0.0 else 1e3 * (1.0 + end.short) + end.size

        best = start
        for width in (0.2, 0.02):
            corners = [best]
            for i in range(len(start)):
                corner = best.copy()
                corner[i] += width if corner[i] + width <= 1.0 else -width
                corners.append(corner)
            best = np.clip(
                scipy.optimize.minimize(
                    merit,
                    best,
                    method="Nelder-Mead",
                    bounds=[(0.0, 1.0)] * len(start),
                    options={
                        "initial_simplex": np.array(corners),
                        "xatol": 1e-9,
                        "fatol": 1e-13,
                        "maxfev": 150 * len(start),
                    },
                ).x,
                0.0,
                1.0,
            )
        return self.at(best)


def _solved(matrix: Array, goal: Array, norm: str) -> Array:
    """Shares, none of them negative, that bring ``matrix @ shares`` closest to ``goal``; none where that has no end."""
    try:
        return solved_shares(matrix, goal, norm)
    except NoSolution:
        return np.zeros(matrix.shape[1])

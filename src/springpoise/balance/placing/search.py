"""One start of a placement: knobs and shares together by sequential quadratic programming."""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from springpoise.balance.placing.problem import Problem
from springpoise.mechanism.travel import spread

__all__ = ["BAD", "FEASIBLE", "SAMPLES", "Ended", "chosen_starts", "gains_at", "run_start", "spread_starts"]

Array = NDArray[np.float64]

SAMPLES = 48
"""How many places in the box are looked at before any start."""

APART = 0.15
"""Starts differ by this share of a range at least in one knob, where there are enough [1]."""

FEASIBLE = 1e-7
"""A scaled margin that is negative by no more than this counts as kept."""

STEPS = (25, 120)
"""Most steps of one start, at first and for the best few."""

LEAST_SHARE = 1e-9
"""Least share, in terms of one that makes the peak gravity torque [1]: a spring of no rate is none."""

PENALTY = 3.0
"""Weight of a limit's shortfall against the residual while it is but a penalty [1]."""

BAD = 1e6
"""What stands for a residual or a margin that is no number."""


class Ended(NamedTuple):
    """Where a start ended."""

    size: float
    """The norm of the residual over the peak gravity torque [1]."""
    short: float
    """Greatest scaled shortfall of a limit, 0 where all are kept [1]."""
    unknowns: Array

    @property
    def merit(self) -> tuple[float, float]:
        """Order among ends: feasible ones first, then the smallest residual."""
        return (0.0, self.size) if self.short <= FEASIBLE else (self.short, self.size)


def sized(problem: Problem, knobs: Array) -> Array:
    """Shares that leave the least squares at each row of knobs (count, knobs); shape (shares, count)."""
    import scipy.optimize

    many = len(problem.nominal)
    count = len(knobs)
    if not many:
        return np.empty((0, count))
    reference = np.repeat(problem.nominal[:, None], count, axis=1)
    residual, _, slopes, _ = problem.sloped(np.concatenate([knobs.T, reference]))
    columns = slopes[len(problem.knobs) :]
    found = np.empty((many, count))
    for i in range(count):
        matrix, rest = np.nan_to_num(columns[:, i].T), np.nan_to_num(residual[i])
        goal = matrix @ reference[:, i] - rest
        size = np.max(np.abs(matrix), axis=0)
        size[size == 0.0] = 1.0
        found[:, i] = scipy.optimize.nnls(matrix / size, goal, maxiter=100 * many)[0] / size
        found[:, i] = np.maximum(found[:, i], LEAST_SHARE * problem.peak / size)
    return found


def spread_starts(dimensions: int, seed: int) -> Array:
    """Places of the unit box: its middle, and then evenly spread ones, shifted by the seed."""
    shift = np.random.default_rng(seed).random(dimensions)
    return np.concatenate([np.full((1, dimensions), 0.5), (spread(SAMPLES, dimensions) + shift) % 1.0])


def chosen_starts(problem: Problem, starts: int, seed: int) -> list[Array]:
    """The most promising of many places spread through the box, apart from each other."""
    unit = spread_starts(len(problem.knobs), seed)
    knobs = problem.low + unit * problem.width
    shares = sized(problem, knobs)
    raw, raw_margins = problem.at(np.concatenate([knobs.T, shares]))
    residual, margins = _numbers(raw, raw_margins, problem.peak)
    sizes = np.sqrt(np.mean(residual**2, axis=-1))
    merit = sizes + 10.0 * np.max(-margins, axis=(0, 2), initial=0.0)
    order = np.argsort(merit, kind="stable")
    taken: list[int] = []
    for apart in (APART, 0.0):
        for i in order:
            if len(taken) < starts and i not in taken:
                gaps = [np.max(np.abs(unit[i] - unit[j])) for j in taken]
                if not gaps or min(gaps) >= apart:
                    taken.append(int(i))
    return [np.concatenate([knobs[i], shares[:, i]]) for i in taken]


def _numbers(residual: Array, margins: Array, peak: float) -> tuple[Array, Array]:
    """The residual over its peak and the margins, with something large where one is no number."""
    residual = residual / peak
    if np.all(np.isfinite(residual)) and np.all(np.isfinite(margins)):
        return residual, margins
    residual = np.nan_to_num(residual, nan=BAD, neginf=BAD).clip(-BAD, BAD)
    return residual, np.nan_to_num(margins, nan=-BAD).clip(-BAD, BAD)


def _short(margins: Array) -> float:
    return float(np.max(-margins, initial=0.0))


class _Scaled:
    """The problem in variables of size one, remembered at the last place that was asked for."""

    def __init__(self, problem: Problem, start: Array) -> None:
        self.problem = problem
        knobs = len(problem.knobs)
        columns = np.max(np.abs(np.nan_to_num(problem.sloped(start)[2][knobs:])), axis=1)
        columns[columns == 0.0] = 1.0
        self.scale = np.concatenate([problem.width, problem.peak / columns])
        self.base = np.concatenate([problem.low, np.zeros(len(columns))])
        self.low = np.concatenate([np.zeros(knobs), np.full(len(columns), LEAST_SHARE)])
        self.high = np.concatenate([np.ones(knobs), np.full(len(columns), np.inf)])
        self._last: tuple[bytes, tuple[Array, Array, Array, Array]] | None = None

    def unknowns(self, z: Array) -> Array:
        return np.asarray(self.base + self.scale * z)

    def scaled(self, unknowns: Array) -> Array:
        return np.asarray(np.clip((unknowns - self.base) / self.scale, self.low, self.high))

    def at(self, z: Array) -> tuple[Array, Array, Array, Array]:
        """Residual (joints · poses,), margins (rows,) and their slopes (as many, unknowns)."""
        key = z.tobytes()
        if self._last is None or self._last[0] != key:
            raw, raw_margins, rates, margin_rates = self.problem.sloped(self.unknowns(z))
            residual, margins = _numbers(raw, raw_margins, self.problem.peak)
            rates, margin_rates = (
                each if np.all(np.isfinite(each)) else np.nan_to_num(each, posinf=0.0, neginf=0.0)
                for each in (rates, margin_rates)
            )
            self._last = (
                key,
                (
                    residual,
                    margins.ravel(),
                    rates.T * (self.scale / self.problem.peak),
                    np.moveaxis(margin_rates, 1, -1).reshape(-1, len(z)) * self.scale,
                ),
            )
        return self._last[1]


def run_start(problem: Problem, start: Array, thorough: bool) -> Ended:
    """The best place that can be reached from a start; not ``thorough`` comes near it only."""
    scaled = _Scaled(problem, start)
    z = scaled.scaled(start)
    if problem.norm == "rms" or not thorough:
        z = _least_squares(scaled, z, thorough)
    if problem.norm == "minimax":
        z = _minimax(scaled, z, thorough)
    residual, margins, _, _ = scaled.at(z)
    size = float(np.max(np.abs(residual)) if problem.norm == "minimax" else math.sqrt(np.mean(residual**2)))
    return Ended(size, _short(margins), scaled.unknowns(z))


def _least_squares(scaled: _Scaled, begin: Array, thorough: bool) -> Array:
    """Least squares within the bounds; limits first as penalties, then as what they are where one matters."""
    import scipy.optimize

    def rows(z: Array) -> Array:
        r, margins, _, _ = scaled.at(z)
        return np.concatenate([r, PENALTY * np.minimum(margins, 0.0)])

    def slopes(z: Array) -> Array:
        _, margins, rate, margin_rate = scaled.at(z)
        return np.concatenate([rate, PENALTY * margin_rate * (margins < 0.0)[:, None]])

    solve: Any = scipy.optimize.least_squares
    near = solve(
        rows,
        np.clip(begin, scaled.low, scaled.high),
        slopes,
        bounds=(scaled.low, scaled.high),
        method="dogbox",
        xtol=1e-15 if thorough else 1e-6,
        ftol=1e-15 if thorough else 1e-6,
        gtol=1e-15,
        max_nfev=STEPS[thorough],
    ).x
    if _short(scaled.at(near)[1]) <= FEASIBLE:
        return np.asarray(near)
    size = max(math.sqrt(np.mean(scaled.at(near)[0] ** 2)), 1e-9)

    def objective(z: Array) -> tuple[float, Array]:
        r, _, rate, _ = scaled.at(z)
        return 0.5 * float(np.mean((r / size) ** 2)), ((r / size) @ rate) / (size * r.size)

    found = scipy.optimize.minimize(
        objective,
        near,
        jac=True,
        bounds=list(zip(scaled.low, scaled.high, strict=True)),
        constraints=[{"type": "ineq", "fun": lambda z: scaled.at(z)[1], "jac": lambda z: scaled.at(z)[3]}],
        method="SLSQP",
        options={"maxiter": STEPS[thorough], "ftol": 1e-15 if thorough else 1e-8},
    )
    return np.asarray(np.clip(found.x, scaled.low, scaled.high))


def _minimax(scaled: _Scaled, begin: Array, thorough: bool) -> Array:
    import scipy.optimize

    worst = float(np.max(np.abs(scaled.at(begin)[0])))
    if worst < 1e-12:
        return begin
    size = worst

    def rows(z: Array) -> Array:
        r, margins, _, _ = scaled.at(z[:-1])
        return np.concatenate([z[-1] - r / size, z[-1] + r / size, margins])

    def slopes(z: Array) -> Array:
        _, _, rate, margin_rate = scaled.at(z[:-1])
        ones, zeros = np.ones((len(rate), 1)), np.zeros((len(margin_rate), 1))
        return np.block([[-rate / size, ones], [rate / size, ones], [margin_rate, zeros]])

    last = np.zeros(len(begin) + 1)
    last[-1] = 1.0
    found = scipy.optimize.minimize(
        lambda z: (z[-1], last),
        np.append(begin, 1.0),
        jac=True,
        bounds=[*zip(scaled.low, scaled.high, strict=True), (0.0, np.inf)],
        constraints=[{"type": "ineq", "fun": rows, "jac": slopes}],
        method="SLSQP",
        options={"maxiter": STEPS[thorough], "ftol": 1e-14 if thorough else 1e-6},
    )
    return np.asarray(np.clip(found.x[:-1], scaled.low, scaled.high))


def gains_at(problem: Problem, unknowns: Array) -> tuple[Array, Array]:
    """What the norm [N·m] would fall by for one unit of room: knobs at a bound, and limits, shapes (knobs,), (limits,).

    The multipliers of the optimality conditions, found by least squares that are not negative. A
    knob's is negative where the room is needed below its lower bound.
    """
    import scipy.optimize

    scaled = _Scaled(problem, unknowns)
    z = scaled.scaled(unknowns)
    r, margins, rate, margin_rate = scaled.at(z)
    knobs, count = len(problem.knobs), len(z)
    none = np.zeros(knobs), np.zeros(problem.limits)
    worst = float(np.max(np.abs(r)))
    if worst < 1e-9:
        return none
    if problem.norm == "rms":
        weights, pulls = np.zeros((1, 0)), np.zeros((count, 0))
        goal = r @ rate / (r.size * math.sqrt(np.mean(r**2)))
    else:
        held = np.abs(r) >= worst * (1.0 - 1e-4)
        pulls = -(np.sign(r[held])[:, None] * rate[held]).T
        weights = np.ones((1, pulls.shape[1]))
        goal = np.zeros(count)
    near = margins < 1e-5
    low, high = z <= scaled.low + 1e-7, z >= scaled.high - 1e-7
    unit = np.eye(count)
    sides = np.concatenate([margin_rate[near].T, unit[:, low], -unit[:, high]], axis=1)
    matrix = np.concatenate([pulls, sides], axis=1)
    if weights.size:
        matrix = np.concatenate([matrix, np.append(weights, np.zeros((1, sides.shape[1])), axis=1)])
        goal = np.append(goal, 1.0)
    if not matrix.shape[1]:
        return none
    found = scipy.optimize.nnls(matrix, goal, maxiter=100 * matrix.shape[1])[0][pulls.shape[1] :]
    of_limits = np.zeros(margins.size)
    of_limits[near] = found[: near.sum()]
    bounds = np.zeros(count)
    bounds[low] -= found[near.sum() :][: low.sum()]
    bounds[high] += found[near.sum() + low.sum() :]
    rows = of_limits.reshape(problem.limits, -1).sum(axis=1) if problem.limits else np.zeros(0)
    return problem.peak * bounds[:knobs] / problem.width, problem.peak * rows

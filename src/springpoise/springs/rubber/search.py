"""The searches behind a fit: one parameter is searched, those that act linearly are solved for."""

from __future__ import annotations

import math
from collections.abc import Callable
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray

__all__ = ["HIGHEST_EXPONENT", "LOWEST_EXPONENT", "best_exponents", "best_single"]

Array = NDArray[np.float64]

LOWEST_EXPONENT, HIGHEST_EXPONENT = -10.0, 20.0
_STARTS = (-8.0, -4.0, -2.0, -1.0, 0.7, 1.3, 2.0, 3.0, 5.0, 8.0, 12.0, 17.0)


def best_single(
    unit_stress: Callable[[float], Array], target: Array, factors: Array, scale: float
) -> tuple[float, float]:
    """Best amplitude, and best distance of a parameter above its bound, for ``amplitude · unit_stress(distance)``.

    The distance runs over many powers of ten, so its logarithm is searched: on a grid first, for
    the fit may have more than one valley, and then between the neighbours of the best.
    """
    from scipy.optimize import minimize_scalar

    goal = target * factors

    def solved(logarithm: float) -> tuple[float, float]:
        column = unit_stress(scale * math.exp(logarithm)) * factors
        amplitude = float(column @ goal) / float(column @ column)
        off = amplitude * column - goal
        return float(off @ off), amplitude

    grid = np.linspace(math.log(1e-6), math.log(1e8), 130)
    costs = [solved(point)[0] for point in grid]
    i = int(np.argmin(costs))
    low, high = grid[max(i - 1, 0)], grid[min(i + 1, grid.size - 1)]
    found: Any = minimize_scalar(lambda t: solved(t)[0], bounds=(low, high), method="bounded", options={"xatol": 1e-12})
    best = float(found.x) if found.fun <= costs[i] else float(grid[i])
    return solved(best)[1], scale * math.exp(best)


def best_exponents(lam: Array, target: Array, factors: Array, terms: int) -> tuple[list[float], list[float]]:
    """Coefficients and exponents of a sum of powers, each term stable by itself.

    For given exponents the coefficients follow from non-negative least squares over
    ``mu_i alpha_i``. The exponents start from all choices of a coarse set; the best few of these
    are refined without derivatives.
    """
    from scipy.optimize import minimize, nnls

    goal = target * factors

    def solved(exponents: Any) -> tuple[float, Array]:
        a = np.asarray(exponents, dtype=np.float64)
        a = np.where(np.abs(a) < 1e-3, np.where(a < 0, -1e-3, 1e-3), a)
        columns = (lam[:, None] ** (a - 1.0) - lam[:, None] ** (-0.5 * a - 1.0)) / a * factors[:, None]
        size = np.linalg.norm(columns, axis=0)
        products, off = nnls(columns / size, goal)
        return float(off), products / size

    ranked = sorted(combinations(_STARTS, terms), key=lambda start: solved(start)[0])
    best: Any = ranked[0]
    for start in ranked[:6]:
        found = minimize(
            lambda a: solved(a)[0],
            start,
            method="Nelder-Mead",
            bounds=[(LOWEST_EXPONENT, HIGHEST_EXPONENT)] * terms,
            options={"xatol": 1e-7, "fatol": 1e-12, "maxiter": 400 * terms, "maxfev": 400 * terms},
        )
        if found.fun < solved(best)[0]:
            best = found.x
    products = solved(best)[1]
    kept = sorted((float(a), float(p)) for a, p in zip(best, products, strict=True) if p > 0.0)
    return [p / a for a, p in kept], [a for a, _ in kept]

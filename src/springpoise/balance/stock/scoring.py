"""The inner loop of a stock search: the exact worst residual of many candidates at one geometry, and a bound for it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

__all__ = ["ScoringPoses", "worst_residuals"]

Array = NDArray[np.float64]

BLOCK = 1024
"""Candidates at a time: the work of one block stays in the cache."""

FEW = 5
"""Poses from which bounds are taken."""


class ScoringPoses:
    """A few of the poses, spread over all: the worst residual over these is a lower bound of that over all."""

    def __init__(self, base: Array) -> None:
        self.few = np.unique(np.linspace(0, base.size - 1, FEW).round().astype(np.intp))
        self.base = base[self.few]

    def bounds(self, pull: Array, lever: Array, rate: Array, offset: Array) -> Array:
        """Lower bounds of ``worst_residuals``, up to rounding; arguments and result as there."""
        return worst_residuals(self.base, pull[self.few], lever[self.few], rate, offset)


def worst_residuals(base: Array, pull: Array, lever: Array, rate: Array, offset: Array) -> Array:
    """Greatest |base + (rate · pull + offset) · lever| over the poses, for each candidate.

    A spring's load is linear in its length, so that a geometry's two columns serve all springs.

    Parameters
    ----------
    base
        Holding torque without the spring [N·m], shape (poses,).
    pull, lever
        Length that the rate counts for [m] and its derivative by the joint [m/rad], shape (poses,).
    rate, offset
        Total rate [N/m] and load at zero ``pull`` [N] of each candidate, shape (candidates,).

    Returns
    -------
    array
        Shape (candidates,) [N·m].
    """
    columns = np.stack([pull * lever, lever, base], axis=1)
    worst = np.empty(rate.size)
    for start in range(0, rate.size, BLOCK):
        some = slice(start, start + BLOCK)
        factors = np.stack([rate[some], offset[some], np.ones_like(rate[some])])
        left = columns @ factors
        # Two reductions are cheaper than one more array of magnitudes.
        np.maximum(left.max(axis=0), -left.min(axis=0), out=worst[some])
    return worst

"""Which springs of a list can follow a mount, found without trying them all."""

from __future__ import annotations

import attrs
import numpy as np
from numpy.typing import NDArray

__all__ = ["Windows", "windows"]

Array = NDArray[np.float64]
Indices = NDArray[np.intp]

BLOCK = 64
"""Springs that are passed over together where none of them is long enough."""


@attrs.frozen(eq=False)
class Windows:
    """Springs in the order of their shortest length, with the greatest of their longest lengths.

    A mount asks for springs that are shorter than its least length and may grow longer than its
    greatest. The first is a beginning of this order; in it, whole blocks fall away by the second.
    """

    order: Indices
    """The springs, the shortest first, shape (springs,)."""
    shortest: Array
    """Lengths above which each spring, in this order, pulls [m], shape (springs,)."""
    longest: Array
    """Lengths up to which each may be stretched [m], shape (springs,)."""
    reach: Array
    """Greatest of the longest lengths up to each place of the order [m], shape (springs,)."""
    blocks: Array
    """Greatest of the longest lengths in each block [m], shape (blocks,)."""

    def short_enough(self, least: Array) -> Indices:
        """How many springs pull at these lengths [m], shape (mounts,)."""
        return np.searchsorted(self.shortest, least, side="left")

    def any_fits(self, short: Indices, greatest: Array) -> NDArray[np.bool_]:
        """Whether one of the first ``short`` springs may be stretched so far [m], shape (mounts,)."""
        return (short > 0) & (self.reach[np.maximum(short - 1, 0)] >= greatest)

    def fitting(self, short: int, greatest: float) -> Indices:
        """Which of the first ``short`` springs may be stretched so far [m], by their number in the list, ascending."""
        blocks = np.flatnonzero(self.blocks[: -(-short // BLOCK)] >= greatest)
        places = (BLOCK * blocks[:, None] + np.arange(BLOCK)).ravel()
        places = places[: np.searchsorted(places, short)]
        return np.sort(self.order[places[self.longest[places] >= greatest]])


def windows(shortest: Array, longest: Array) -> Windows:
    """The order of springs that pull above their ``shortest`` and up to their ``longest`` lengths [m]."""
    order = np.argsort(shortest, kind="stable")
    longest = longest[order]
    filled = np.concatenate([longest, np.full(-longest.size % BLOCK, -np.inf)])
    return Windows(
        order, shortest[order], longest, np.maximum.accumulate(longest), filled.reshape(-1, BLOCK).max(axis=1)
    )

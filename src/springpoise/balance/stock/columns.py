"""A stock list as the columns that a search computes with."""

from __future__ import annotations

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.lists import Stock
from springpoise.balance.stock.windows import Windows, windows

__all__ = ["Columns", "columns"]

Array = NDArray[np.float64]


@attrs.frozen(eq=False)
class Columns:
    """What a search needs of a list, without names and prices, so that little is sent to workers.

    A mount's candidates are numbered: all springs for the first count, then for the next.
    """

    counts: NDArray[np.int64]
    """Numbers of springs side by side, ascending, shape (counts,)."""
    rate: Array
    """Rates [N/m], shape (springs,)."""
    offset: Array
    """Load of one spring where ``pull`` is 0 [N], shape (springs,); see ``Geometry``."""
    shortest: Array
    """``pull`` above which each spring pulls, with the margin [m], shape (springs,)."""
    longest: Array
    """``pull`` up to which it may be stretched, with the margin [m], shape (springs,)."""
    own: Array
    """Length of the spring where ``pull`` is 0 [m], shape (springs,)."""
    windows: Windows
    """The springs in order of these lengths."""

    @property
    def springs(self) -> int:
        """How many springs the list has."""
        return self.rate.size

    @property
    def candidates(self) -> int:
        """Candidates of a mount."""
        return self.rate.size * self.counts.size

    def part_and_count(self, candidate: int) -> tuple[int, int]:
        """The spring's place in the list, and how many side by side."""
        count, part = divmod(candidate, self.springs)
        return part, int(self.counts[count])


def columns(stock: Stock, counts: tuple[int, ...], margin: float, *, straight: bool) -> Columns:
    """A list with its counts, for straight springs or for springs behind a pulley, and a margin to both ends [m]."""
    effective = stock.free_length - stock.initial_tension / stock.rate
    # A straight spring is as long as its path. Behind a pulley the cable is cut so that the path's
    # zero is where the spring would have no load.
    own = np.zeros_like(effective) if straight else effective
    shortest, longest = stock.free_length + margin - own, stock.longest - margin - own
    offset = -stock.rate * effective if straight else np.zeros_like(effective)
    return Columns(np.asarray(counts), stock.rate, offset, shortest, longest, own, windows(shortest, longest))

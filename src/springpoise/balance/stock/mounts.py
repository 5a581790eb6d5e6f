"""The mounts that a stock search tries: every direction, height and radius, numbered and cut into chunks."""

from __future__ import annotations

from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.route import Routing

__all__ = ["Mount", "Mounts", "Row"]

Array = NDArray[np.float64]

LARGEST_ROW = 128
"""Mounts of a row at the most; their geometry is worked out together."""

CANDIDATES = 4_000_000
"""Candidates of a row, about: it takes well under a second."""


class Mount(NamedTuple):
    """One mount."""

    routing: Routing
    radius: float
    height: float


class Row(NamedTuple):
    """Mounts at several radii that are otherwise alike."""

    routing: Routing
    height: float
    radii: Array
    first: int
    """Number of the first of them."""


@attrs.frozen(eq=False)
class Mounts:
    """All mounts; the radius runs fastest, then the height, then the routing."""

    routings: tuple[Routing, ...]
    """Directions of anchor and attachment."""
    heights: Array
    """Distances from pivot to anchor [m]."""
    radii: Array
    """Distances from pivot to attachment [m]."""
    row: int
    """Mounts in a row, but for the last ones of a height."""

    @classmethod
    def for_springs(cls, routings: tuple[Routing, ...], heights: Array, radii: Array, springs: int) -> Mounts:
        """Rows as long as suits the number of springs that are tried at each mount."""
        return cls(routings, heights, radii, int(np.clip(CANDIDATES // springs, 1, LARGEST_ROW)))

    def __len__(self) -> int:
        return len(self.routings) * self.heights.size * self.radii.size

    @property
    def row_count(self) -> int:
        """How many rows there are."""
        return len(self.routings) * self.heights.size * self._rows_of_a_height

    @property
    def _rows_of_a_height(self) -> int:
        return -(-self.radii.size // self.row)

    def row_at(self, index: int) -> Row:
        """One row of them, counted from 0."""
        line, part = divmod(index, self._rows_of_a_height)
        routing, height = divmod(line, self.heights.size)
        first = part * self.row
        return Row(
            self.routings[routing],
            float(self.heights[height]),
            self.radii[first : first + self.row],
            line * self.radii.size + first,
        )

    def before_row(self, index: int) -> int:
        """How many mounts are in the rows before one."""
        line, part = divmod(index, self._rows_of_a_height)
        return line * self.radii.size + part * self.row

    def __getitem__(self, number: int) -> Mount:
        line, radius = divmod(number, self.radii.size)
        routing, height = divmod(line, self.heights.size)
        return Mount(self.routings[routing], float(self.radii[radius]), float(self.heights[height]))

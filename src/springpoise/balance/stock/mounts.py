"""The mounts that a stock search tries: every direction, height and radius, numbered and cut into chunks."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.stock.route import Geometry, Routing

__all__ = ["Mount", "Mounts", "Row"]

Array = NDArray[np.float64]

LARGEST_ROW = 128
"""Mounts of a row at the most; their geometry is worked out together."""

CANDIDATES, MOUNTS = 2_000_000, 2048
"""Candidates of a chunk, about, and mounts: whichever there are more of, it takes a fraction of a second."""


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

    def geometry(self) -> Geometry:
        """Their lengths, levers and pulls."""
        return self.routing.geometry(self.radii, self.height)


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
    rows_of_a_chunk: int
    """Rows in a chunk, but for the last."""

    @classmethod
    def for_springs(cls, routings: tuple[Routing, ...], heights: Array, radii: Array, springs: int) -> Mounts:
        """Rows and chunks as long as suits the number of springs that are tried at each mount."""
        some = min(CANDIDATES // springs, MOUNTS)
        row = int(np.clip(some, 1, min(LARGEST_ROW, radii.size)))
        return cls(routings, heights, radii, row, max(1, some // row))

    def __len__(self) -> int:
        return len(self.routings) * self.heights.size * self.radii.size

    @property
    def _rows_of_a_height(self) -> int:
        return -(-self.radii.size // self.row)

    @property
    def _rows(self) -> int:
        return len(self.routings) * self.heights.size * self._rows_of_a_height

    @property
    def chunks(self) -> int:
        """How many chunks there are."""
        return -(-self._rows // self.rows_of_a_chunk)

    def rows(self, chunk: int) -> Iterator[Row]:
        """The rows of one chunk."""
        first = chunk * self.rows_of_a_chunk
        for row in range(first, min(first + self.rows_of_a_chunk, self._rows)):
            line, part = divmod(row, self._rows_of_a_height)
            routing, height = divmod(line, self.heights.size)
            start = part * self.row
            radii = self.radii[start : start + self.row]
            yield Row(self.routings[routing], float(self.heights[height]), radii, line * self.radii.size + start)

    def before_chunk(self, chunk: int) -> int:
        """How many mounts are in the chunks before one."""
        line, part = divmod(min(chunk * self.rows_of_a_chunk, self._rows), self._rows_of_a_height)
        return line * self.radii.size + part * self.row

    def __getitem__(self, number: int) -> Mount:
        line, radius = divmod(number, self.radii.size)
        routing, height = divmod(line, self.heights.size)
        return Mount(self.routings[routing], float(self.radii[radius]), float(self.heights[height]))

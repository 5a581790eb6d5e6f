"""What comes nearest to fitting where no spring stays within its lengths at any mount."""

from __future__ import annotations

import math
from typing import NamedTuple

import attrs
import numpy as np

from springpoise.balance.stock.columns import Columns
from springpoise.balance.stock.mounts import Mounts, Row
from springpoise.balance.stock.scan import NO_ROOM, OVERSTRETCHED, SLACK

__all__ = ["Miss", "Misses"]


class Miss(NamedTuple):
    """A spring at a mount that it cannot follow."""

    short: float
    """Length that it lacks [m]; infinite where no mount can be reached."""
    part: int
    mount: int
    reason: str


@attrs.frozen(eq=False)
class Misses:
    """The job of finding it: every spring's shortfall at every mount. Done only when nothing else was found."""

    mounts: Mounts
    columns: Columns

    def chunk(self, index: int) -> Miss:
        """The nearest miss in some rows of mounts."""
        return self.joined([self._of_row(row) for row in self.mounts.rows(index)])

    def _of_row(self, row: Row) -> Miss:
        geometry = row.geometry()
        nearest = Miss(math.inf, 0, row.first, "")
        for place in np.flatnonzero(geometry.reached).tolist():
            least, greatest = geometry.least[place], geometry.greatest[place]
            shortfalls = {
                SLACK: self.columns.shortest - least,
                OVERSTRETCHED: greatest - self.columns.longest,
                NO_ROOM: self.columns.own + greatest - geometry.room,
            }
            total = np.max(list(shortfalls.values()), axis=0)
            part = int(np.argmin(total))
            if total[part] < nearest.short:
                reason = max(shortfalls, key=lambda name: float(shortfalls[name][part]))
                nearest = Miss(float(total[part]), part, row.first + place, reason)
        return nearest

    def joined(self, parts: list[Miss]) -> Miss:
        """The nearest, the first of several."""
        return min(parts, key=lambda miss: miss.short)

"""Ratios of this library's speed to that of a peer, both measured in the same run.

    python tests/benchmarks/run.py

prints one table. Nothing is asserted: times depend on the machine, and budgets are held by people
who read the table.
"""

from __future__ import annotations

from collections.abc import Iterator

from one_arm import one_arm_rows
from rows import Row, show
from solvers import solver_rows
from spatial import spatial_rows
from springs import spring_rows
from stock import stock_rows
from tolerance import tolerance_rows


def all_rows() -> Iterator[Row]:
    """The rows of every benchmark beside this file."""
    yield from one_arm_rows()
    yield from stock_rows()
    yield from spring_rows()
    yield from spatial_rows()
    yield from tolerance_rows()
    yield from solver_rows()


if __name__ == "__main__":
    show(all_rows)

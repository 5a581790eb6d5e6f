"""What all benchmarks share: a row, a ratio of times, the table, and one thread for all of it."""

from __future__ import annotations

import os
import statistics
import sys
import timeit
from collections.abc import Callable, Iterable
from typing import NamedTuple

ONE_THREAD = dict.fromkeys(("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"), "1")


class Row(NamedTuple):
    """One line of the table."""

    what: str
    measured: str
    budget: str
    holds: bool | None


def ratio(ours: timeit.Timer, peers: timeit.Timer, *, number: int, repeats: int) -> tuple[float, float, float]:
    """Median ratio of the times of one call, and the two median times [s]."""
    pairs = []
    for _ in range(repeats):
        mine, theirs = (min(timer.repeat(number=number, repeat=3)) / number for timer in (ours, peers))
        pairs.append((mine / theirs, mine, theirs))
    return tuple(statistics.median(column) for column in zip(*pairs, strict=True))  # type: ignore[return-value]


def table(rows: list[Row]) -> str:
    """The rows under each other, in aligned columns."""
    cells = [("what", "measured", "budget", "holds")]
    cells += [(r.what, r.measured, r.budget, {True: "yes", False: "NO", None: ""}[r.holds]) for r in rows]
    widths = [max(map(len, column)) for column in zip(*cells, strict=True)]
    return "\n".join("  ".join(cell.ljust(w) for cell, w in zip(line, widths, strict=True)).rstrip() for line in cells)


def show(measure: Callable[[], Iterable[Row]]) -> None:
    """Measure on one thread and print the table."""
    if any(os.environ.get(name) != value for name, value in ONE_THREAD.items()):
        # The number of threads is read when NumPy is loaded: start again.
        os.execve(sys.executable, [sys.executable, *sys.argv], {**os.environ, **ONE_THREAD})
    print(table(list(measure())))

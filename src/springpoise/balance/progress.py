"""Progress of long runs: a callback, or tqdm where it is installed and a person looks on."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from importlib import import_module
from typing import Any

__all__ = ["Progress", "steps"]

Progress = Callable[[int, int], None] | bool | None
"""A function of (done, total); True for a bar; False for silence; None for a bar if the run is long."""

LONG = 2.0
"""A run is long after so many seconds [s]."""


@contextmanager
def steps(progress: Progress, total: int, what: str) -> Iterator[Callable[[int], None]]:
    """Gives a function that is told how much is done of ``total``."""
    if callable(progress):
        yield lambda done: progress(done, total)
        return
    if progress is False or (progress is None and not (sys.stderr and sys.stderr.isatty())):
        yield lambda done: None
        return
    bar: Any = None
    began = time.monotonic()

    def show(done: int) -> None:
        nonlocal bar
        if bar is None and (progress or time.monotonic() - began > LONG):
            try:
                bars = import_module("tqdm")
            except ImportError:
                return
            bar = bars.tqdm(total=total, desc=what, unit_scale=True, leave=False)
        if bar is not None:
            bar.update(done - bar.n)

    try:
        yield show
    finally:
        if bar is not None:
            bar.close()

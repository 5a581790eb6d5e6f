"""Progress of long runs: a callback, a bar, or silence."""

from __future__ import annotations

import sys
from types import ModuleType

import numpy as np
import pytest

from springpoise import Arm, Body, Mechanism, balance
from springpoise.balance import Stock, progress
from springpoise.balance.progress import steps
from springpoise.balance.stock import mounts


class Terminal:
    def __init__(self, tty):
        self.tty = tty

    def isatty(self):
        return self.tty


@pytest.fixture
def bars(monkeypatch):
    """A stand-in for tqdm that keeps what it is told."""
    made = []

    class Bar:
        def __init__(self, **options):
            self.options, self.n, self.closed = options, 0, False
            made.append(self)

        def update(self, more):
            self.n += more

        def close(self):
            self.closed = True

    module = ModuleType("tqdm")
    module.tqdm = Bar
    monkeypatch.setitem(sys.modules, "tqdm", module)
    return made


def test_a_callback_hears_every_step_and_the_total(monkeypatch):
    monkeypatch.setattr(mounts, "CANDIDATES", 12)  # one height a chunk
    told = []
    stock = Stock(parts=["a", "b"], rate=[1e3, 2e3], free_length=[0.05, 0.05], initial_tension=[0, 0], longest=[1, 1])
    found = balance.search_stock(
        Mechanism(Arm(Body(2.0, (0.35, 0))), travel=(-1, 1)), stock, attach_radii=[0.05, 0.06, 0.07],
        anchor_heights=np.linspace(0.15, 0.2, 4), counts=(1, 2), refine=0, progress=lambda *args: told.append(args),
    )  # fmt: skip
    assert told == [(12 * i, 48) for i in range(1, 5)]
    assert found.considered == 48


def test_true_shows_a_bar_at_once_and_closes_it(bars):
    with steps(True, 10, "things") as report:
        report(4)
        report(10)
    assert [(bar.n, bar.closed, bar.options["total"], bar.options["desc"]) for bar in bars] == [
        (10, True, 10, "things")
    ]


def test_false_is_silent(bars, monkeypatch):
    monkeypatch.setattr(sys, "stderr", Terminal(True))
    monkeypatch.setattr(progress, "LONG", -1.0)
    with steps(False, 10, "things") as report:
        report(10)
    assert not bars


@pytest.mark.parametrize("stream", [Terminal(False), None])
def test_none_is_silent_where_nobody_looks_on(bars, monkeypatch, stream):
    monkeypatch.setattr(sys, "stderr", stream)
    monkeypatch.setattr(progress, "LONG", -1.0)
    with steps(None, 10, "things") as report:
        report(10)
    assert not bars


@pytest.mark.parametrize(("long", "count"), [(-1.0, 1), (1e9, 0)])
def test_none_shows_a_bar_at_a_terminal_once_the_run_is_long(bars, monkeypatch, long, count):
    monkeypatch.setattr(sys, "stderr", Terminal(True))
    monkeypatch.setattr(progress, "LONG", long)
    with steps(None, 10, "things") as report:
        report(3)
        report(10)
    assert len(bars) == count


def test_a_bar_is_closed_when_the_run_fails(bars):
    with pytest.raises(RuntimeError), steps(True, 10, "things") as report:
        report(1)
        raise RuntimeError
    assert bars[0].closed


def test_without_tqdm_nothing_happens(monkeypatch):
    monkeypatch.setitem(sys.modules, "tqdm", None)
    with steps(True, 10, "things") as report:
        report(10)

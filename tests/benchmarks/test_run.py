"""The benchmarks themselves run, with tiny sizes; nothing is timed here."""

from __future__ import annotations

import importlib.util
import sys
import timeit
from pathlib import Path

import pytest


@pytest.fixture(scope="module")
def run():
    spec = importlib.util.spec_from_file_location("benchmarks_run", Path(__file__).with_name("run.py"))
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    yield module
    del sys.modules[spec.name]


@pytest.mark.parametrize(
    ("rows", "sizes", "count"),
    [
        ("import_rows", {"repeats": 1}, 2),
        ("call_rows", {"number": 2, "repeats": 1}, 4),
        ("pose_rows", {"poses": 100, "repeats": 1}, 3),
        ("search_rows", {"parts": 30, "mounts": 2, "repeats": 1}, 3),
    ],
)
def test_rows_and_table(run, rows, sizes, count):
    found = list(getattr(run, rows)(**sizes))
    assert len(found) == count
    lines = run.table(found).splitlines()
    assert len(lines) == count + 1
    assert lines[0].split() == ["what", "measured", "budget", "holds"]


def test_ratio_is_that_of_the_two_times(run):
    share, mine, theirs = run.ratio(timeit.Timer("sum(range(2000))"), timeit.Timer("1"), number=50, repeats=3)
    assert share > 0 and mine > 0 and theirs > 0


def test_no_heavy_module_comes_with_the_everyday_import(run):
    assert list(run.import_rows(repeats=1))[1].measured == "none"

"""The benchmarks themselves run, with tiny sizes; nothing is timed here."""

from __future__ import annotations

import importlib
import timeit

import pytest
from rows import ratio, table

pytest.importorskip("pinocchio", reason="the benchmarks compare with pinocchio: install the test extra")


@pytest.mark.parametrize(
    ("module", "rows", "sizes", "count"),
    [
        ("one_arm", "import_rows", {"repeats": 1}, 2),
        ("one_arm", "call_rows", {"number": 2, "repeats": 1}, 4),
        ("one_arm", "pose_rows", {"poses": 100, "repeats": 1}, 3),
        ("stock", "search_rows", {"parts": 30, "mounts": 2, "repeats": 1}, 3),
        ("stock", "growth_rows", {"parts": 5, "steps": 1, "repeats": 1}, 5),
        ("springs", "spring_call_rows", {"number": 2, "repeats": 1}, 5),
        ("springs", "spring_pose_rows", {"poses": 100, "repeats": 1}, 5),
        ("spatial", "spatial_call_rows", {"number": 2, "repeats": 1}, 1),
        ("spatial", "spatial_pose_rows", {"poses": 100, "repeats": 1}, 1),
        ("spatial", "spatial_recording_rows", {"repeats": 1}, 2),
        ("solvers", "place_rows", {"repeats": 1, "generations": 2}, 5),
        ("solvers", "method_rows", {"repeats": 1}, 1),
        ("tolerance", "scatter_rows", {"builds": 10, "repeats": 1}, 3),
    ],
)
def test_rows_and_table(module: str, rows: str, sizes: dict[str, int], count: int) -> None:
    found = list(getattr(importlib.import_module(module), rows)(**sizes))
    assert len(found) == count
    lines = table(found).splitlines()
    assert len(lines) == count + 1
    assert lines[0].split() == ["what", "measured", "budget", "holds"]


def test_ratio_is_that_of_the_two_times() -> None:
    share, mine, theirs = ratio(timeit.Timer("sum(range(2000))"), timeit.Timer("1"), number=50, repeats=3)
    assert share > 0
    assert mine > 0
    assert theirs > 0


def test_no_heavy_module_comes_with_the_everyday_import() -> None:
    assert list(importlib.import_module("one_arm").import_rows(repeats=1))[1].measured == "none"

"""The benchmark of springs itself runs, with tiny sizes; nothing is timed here."""

from __future__ import annotations

import importlib.util
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest


@pytest.fixture(scope="module")
def springs() -> Iterator[Any]:
    spec = importlib.util.spec_from_file_location("benchmarks_springs", Path(__file__).with_name("springs.py"))
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    before = set(sys.modules)
    spec.loader.exec_module(module)
    yield module
    if "benchmarks_run" not in before:
        sys.modules.pop("benchmarks_run", None)


@pytest.mark.parametrize(
    ("rows", "sizes"),
    [("spring_call_rows", {"number": 2, "repeats": 1}), ("spring_pose_rows", {"poses": 100, "repeats": 1})],
)
def test_rows_and_table(springs: Any, rows: str, sizes: dict[str, int]) -> None:
    found = list(getattr(springs, rows)(**sizes))
    assert len(found) == len(springs.SPRINGS)
    assert len(springs.run.table(found).splitlines()) == len(found) + 1

"""Piecewise polynomials against SciPy's, which are written by others."""

from __future__ import annotations

import copy
import math
import pickle
from typing import Any

import numpy as np
import pytest
from scipy.interpolate import PPoly

from springpoise.errors import InputError
from springpoise.lookup import Lookup


def referee(table: Lookup) -> PPoly:
    """The same polynomial in SciPy, which wants the highest power first and pieces along columns."""
    return PPoly(table.coefficients[:, ::-1].T, table.breaks, extrapolate=False)


@pytest.fixture(params=[(1, 1), (1, 4), (5, 2), (7, 4), (40, 6)], ids=str)
def table(request: pytest.FixtureRequest) -> Lookup:
    pieces, order = request.param
    rng = np.random.default_rng(7)
    return Lookup(np.cumsum(rng.uniform(0.1, 1.0, pieces + 1)) - 2.0, rng.normal(size=(pieces, order)))


def test_values_as_scipy(table: Lookup) -> None:
    x = np.linspace(table.breaks[0] - 0.5, table.breaks[-1] + 0.5, 301)
    expected = referee(table)(x)
    assert table(x) == pytest.approx(expected, rel=1e-12, abs=1e-12, nan_ok=True)
    for one, value in zip(x, expected, strict=True):
        got = table(float(one))
        assert type(got) is float
        assert got == pytest.approx(value, rel=1e-12, abs=1e-12, nan_ok=True)


def test_breakpoints_as_scipy(table: Lookup) -> None:
    """A breakpoint belongs to the piece on its right, the last one to the last piece."""
    expected = referee(table)(table.breaks)
    assert table(table.breaks) == pytest.approx(expected, rel=1e-12, abs=1e-12)
    assert [table(float(x)) for x in table.breaks] == pytest.approx(expected.tolist(), rel=1e-12, abs=1e-12)


def test_slope_and_integral_as_scipy(table: Lookup) -> None:
    x = np.linspace(table.breaks[0], table.breaks[-1], 101)
    assert table.derivative()(x) == pytest.approx(referee(table).derivative()(x), rel=1e-12, abs=1e-12)
    assert table.antiderivative()(x) == pytest.approx(referee(table).antiderivative()(x), rel=1e-11, abs=1e-11)
    assert table.antiderivative()(float(x[0])) == 0.0


def test_the_slope_of_the_integral_is_the_table(table: Lookup) -> None:
    assert table.antiderivative().derivative().coefficients == pytest.approx(table.coefficients, rel=1e-14)


@pytest.mark.parametrize("x", [-1.0, 2.5, -math.inf, math.inf, math.nan, 1e308, -1e308])
def test_nan_outside_and_no_warning(x: float) -> None:
    table = Lookup([0.0, 1.0, 2.0], [[1.0, 0.0, 2.0, 3.0], [0.0, 1.0, 1.0, 1.0]])
    assert math.isnan(table(x))
    assert math.isnan(table(np.array([x, 0.0]))[0])
    assert math.isnan(table(np.float64(x)))


def test_shapes_and_kinds() -> None:
    table = Lookup([0, 2], [[1, 1]])
    assert table(1) == 2.0
    assert table(np.ones((2, 3))).shape == (2, 3)
    assert table(np.ones((0, 3))).shape == (0, 3)
    assert repr(table) == "Lookup(1 pieces from 0 to 2)"


@pytest.mark.parametrize(
    ("breaks", "coefficients", "message"),
    [
        ([0.0], [], r"Lookup\.breaks must be finite and strictly increasing, got \[0\.0\]"),
        ([0.0, 0.0], [[1.0]], r"strictly increasing, got \[0\.0, 0\.0\]"),
        ([1.0, 0.0], [[1.0]], r"strictly increasing, got \[1\.0, 0\.0\]"),
        ([0.0, math.nan], [[1.0]], r"strictly increasing, got \[0\.0, nan\]"),
        ([0.0, math.inf], [[1.0]], r"strictly increasing, got \[0\.0, inf\]"),
        ([[0.0, 1.0]], [[1.0]], r"strictly increasing, got \[\[0\.0, 1\.0\]\]"),
        ([0.0, 1.0], [1.0], r"Lookup\.coefficients must be finite and of shape \(1, k\), got shape \(1,\)"),
        ([0.0, 1.0], [[1.0], [2.0]], r"of shape \(1, k\), got shape \(2, 1\)"),
        ([0.0, 1.0], [[]], r"of shape \(1, k\), got shape \(1, 0\)"),
        ([0.0, 1.0], [[math.nan]], r"must be finite and of shape \(1, k\), got shape \(1, 1\)"),
    ],
)
def test_a_broken_table(breaks: Any, coefficients: Any, message: str) -> None:
    with pytest.raises(InputError, match=message):
        Lookup(breaks, coefficients)


def test_a_table_is_a_value() -> None:
    breaks = np.array([0.0, 1.0])
    table = Lookup(breaks, [[1.0, 2.0]])
    breaks[0] = 0.5
    assert table.breaks[0] == 0.0
    with pytest.raises(ValueError, match="read-only"):
        table.coefficients[0, 0] = 5.0
    same = Lookup([0.0, 1.0], [[1.0, 2.0]])
    assert table == same
    assert hash(table) == hash(same)
    assert table != Lookup([0.0, 1.0], [[1.0, 3.0]])
    assert table != "table"
    assert pickle.loads(pickle.dumps(table)) == table
    assert copy.deepcopy(table) == table

"""The array API's names on plain floats, and where a formula's functions come from."""

from __future__ import annotations

import itertools
import math
import sys
from typing import Any

import array_api_strict
import numpy as np
import pytest

from springpoise.carriers import Floats, distance, interpolate, joints_of, namespace
from springpoise.lookup import Lookup

SPECIAL = [
    0.0, -0.0, 0.5, -0.5, 1.0, -1.0, 2.0, -2.0, 3.0, -3.0, 1e-300, -1e-300, 1e300, -1e300, 700.0, 709.7, 709.782, 709.79,
    710.4, 710.5, -710.4, -710.5, -745.0, -746.0, 5e-324, sys.float_info.max, -sys.float_info.max,
    math.inf, -math.inf, math.nan,
]  # fmt: skip
ONE = ["abs", "sin", "cos", "tan", "asin", "acos", "atan", "sqrt", "exp", "expm1", "sinh", "cosh", "tanh", "asinh", "log",
       "log1p", "sign"]  # fmt: skip
TWO = ["atan2", "hypot", "maximum", "minimum", "pow"]


def same(got: float, expected: float) -> bool:
    return math.isclose(got, expected, rel_tol=4e-16, abs_tol=0.0) or (math.isnan(got) and math.isnan(expected))


@pytest.mark.parametrize("name", ONE)
def test_one_argument_as_numpy(name: str) -> None:
    """NumPy follows IEEE 754 at the edges, so it is the referee for them."""
    with np.errstate(all="ignore"):
        for x in SPECIAL:
            if name in {"sin", "cos", "tan"} and 1e15 < abs(x) < math.inf:
                continue  # the range reduction of two maths libraries may differ there
            got = getattr(Floats, name)(x)
            assert type(got) is float
            assert same(got, float(getattr(np, name)(np.float64(x)))), (name, x)


@pytest.mark.parametrize("name", TWO)
def test_two_arguments_as_numpy(name: str) -> None:
    with np.errstate(all="ignore"):
        for x, y in itertools.product(SPECIAL, SPECIAL):
            if (name, x, y) == ("pow", -math.inf, 0.5):
                continue  # +inf in C and IEEE 754; NumPy takes the square root instead, which is NaN
            got = getattr(Floats, name)(x, y)
            assert type(got) is float
            assert same(got, float(getattr(np, name)(np.float64(x), np.float64(y)))), (name, x, y)


@pytest.mark.parametrize("name", [*ONE, *TWO, "where", "logical_and", "logical_or", "logical_not", "isfinite", "pi"])
def test_the_names_are_those_of_the_standard(name: str) -> None:
    assert hasattr(array_api_strict, name)
    assert hasattr(Floats, name)


def test_choices_and_logic() -> None:
    assert Floats.where(True, 1.0, 2.0) == 1.0
    assert Floats.where(False, 1.0, 2.0) == 2.0
    for x, y in itertools.product([True, False], repeat=2):
        assert Floats.logical_and(x, y) is (x and y)
        assert Floats.logical_or(x, y) is (x or y)
    assert Floats.logical_not(True) is False
    assert [Floats.isfinite(x) for x in (1.0, math.nan, math.inf)] == [True, False, False]


class Recorded:
    """Stands for a value that brings its own functions."""

    def __array_namespace__(self) -> str:
        return "own"

    def __look_up__(self, table: Lookup) -> tuple[str, Lookup]:
        return "looked up", table


def test_what_came_in_decides_the_namespace() -> None:
    array, foreign = np.array([1.0]), array_api_strict.asarray([1.0])
    assert namespace() is Floats
    assert namespace(1.0, 2, np.float64(3.0)) is Floats
    assert namespace(1.0, array) is np
    assert namespace(np.float32(1.0)) is np
    assert namespace(array, 1.0, foreign) is foreign.__array_namespace__()
    assert namespace(np.float32(1.0), foreign) is foreign.__array_namespace__()
    assert namespace(array, Recorded()) == "own"
    assert namespace(None, "text") is Floats


TABLE = Lookup([0.0, 1.0, 3.0], [[1.0, 2.0], [3.0, -1.0]])


def test_a_table_on_every_carrier() -> None:
    xs = [0.0, 0.5, 1.0, 2.0, 3.0, -0.1, 3.1, math.nan]
    expected = [1.0, 2.0, 3.0, 2.0, 1.0, math.nan, math.nan, math.nan]
    assert np.array_equal([interpolate(x, TABLE) for x in xs], expected, equal_nan=True)
    assert np.array_equal(interpolate(np.array(xs), TABLE), expected, equal_nan=True)
    foreign: Any = interpolate(array_api_strict.asarray(xs), TABLE)
    assert isinstance(foreign, type(array_api_strict.asarray(xs)))
    assert np.array_equal(np.asarray(foreign), expected, equal_nan=True)
    assert interpolate(Recorded(), TABLE) == ("looked up", TABLE)


def test_joints_one_by_one() -> None:
    q = np.arange(6.0).reshape(3, 2)
    assert joints_of(q, 1)[0] is q
    first, second = joints_of(q, 2)
    assert first.tolist() == [0.0, 2.0, 4.0]
    assert second.tolist() == [1.0, 3.0, 5.0]
    assert joints_of((1.0, 2.0), 2) == (1.0, 2.0)
    assert joints_of([1.0, 2.0], 2) == (1.0, 2.0)


def test_distance() -> None:
    assert distance(3.0, 4.0) == 5.0
    assert distance(np.array([3.0, 0.0]), np.array([4.0, 0.0])) == pytest.approx([5.0, 0.0], abs=1e-140)
    assert 0.0 < distance(0.0, 0.0) < 1e-140
    assert distance(1e-100, 0.0) == 1e-100

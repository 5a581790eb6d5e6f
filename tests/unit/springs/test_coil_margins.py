from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise.errors import InputError
from springpoise.springs.wire.margins import CoilMargins, Margin, limited


def result(*margins: Margin) -> CoilMargins:
    return CoilMargins(title="a coil", margins=margins, load_left=3.0, travel_left=0.002, energy=0.5, notes=("a note",))


def test_governing_is_the_least_of_what_is_wanted() -> None:
    margins = result(limited("stress", 100e6, 150e6, "Pa"), limited("surge", 2.0, 24.0, "Hz", wanted=15.0))
    assert margins.governing.name == "surge"
    assert not margins.holds
    assert margins.margin("stress").left == 50e6
    assert margins.status == "a limit is not kept; surge governs with a factor of 12.000 of 15 wanted"


def test_nothing_used_is_infinitely_far() -> None:
    assert limited("stress", 0.0, 150e6, "Pa").factor == math.inf
    assert np.array_equal(limited("stress", np.array([0.0, 1.0]), 2.0, "Pa").factor, [math.inf, 2.0])


def test_nan_governs() -> None:
    margins = result(limited("fine", 1.0, 2.0, "N"), limited("unknown", math.nan, 2.0, "N"))
    assert margins.governing.name == "unknown"
    assert not margins.holds


def test_rounding_is_no_failure() -> None:
    assert limited("solid", 1.0, 1.2 - 1e-12, "N", wanted=1.2).holds
    assert not limited("solid", 1.0, 1.19, "N", wanted=1.2).holds


def test_print() -> None:
    text = str(result(limited("stress", 100e6, 150e6, "Pa"), limited("gap", 0.002, np.array([0.003, 0.004]), "m")))
    lines = text.splitlines()
    assert lines[0] == "a coil"
    assert lines[1].split() == ["limit", "actual", "permitted", "factor", "wanted"]
    assert "stress *" in lines[2]
    assert "100.0 MPa" in lines[2]
    assert "3.000 to 4.000 mm" in lines[3]
    assert "a note" in text
    assert lines[-1].strip().startswith("Safe use:")


def test_unknown_name() -> None:
    with pytest.raises(InputError, match="margin must be one of 'stress', got 'strain'"):
        result(limited("stress", 1.0, 2.0, "Pa")).margin("strain")


def test_results_are_not_iterable() -> None:
    with pytest.raises(TypeError):
        iter(result(limited("stress", 1.0, 2.0, "Pa")))  # type: ignore[call-overload]

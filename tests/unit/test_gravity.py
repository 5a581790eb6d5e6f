"""Local gravity and tilted bases: branches and messages."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pint
import pytest

from springpoise import gravity
from springpoise.errors import InputError, UnitError


def test_standard_gravity_is_exact() -> None:
    assert gravity.STANDARD_GRAVITY == 9.80665


def test_scalar_in_float_out_array_in_array_out() -> None:
    latitudes = np.radians([[0.0, 30.0], [60.0, 90.0]])
    heights = np.array([0.0, 1000.0])
    got = gravity.local(latitudes, heights)
    assert got.shape == (2, 2)
    for i in range(2):
        for j in range(2):
            one = gravity.local(float(latitudes[i, j]), float(heights[j]))
            assert type(one) is float
            assert got[i, j] == pytest.approx(one, rel=1e-15)


def test_north_and_south_are_alike() -> None:
    assert gravity.local("35 deg") == gravity.local("-35 deg")
    assert gravity.local(pint.UnitRegistry().Quantity(35, "deg")) == gravity.local("35 deg")


def test_gravity_weakens_with_height() -> None:
    assert gravity.local("45 deg", "-5 km") > gravity.local("45 deg") > gravity.local("45 deg", "5 km")


@pytest.mark.parametrize(
    ("latitude", "height", "message"),
    [
        (45.0, 0.0, r"latitude must be from -1\.5708 to 1\.5708 rad, got 45; degrees\? write '45 deg'$"),
        (-90, 0.0, r"got -90; degrees\? write '-90 deg'$"),
        ([0.1, 45.0], 0.0, r"got 45; degrees\? write '45 deg'$"),
        (91.0, 0.0, r"latitude must be from .* got 91$"),
        ("91 deg", 0.0, r"latitude must be from .* got 1\.58825$"),
        (0.5, 2e5, r"height must be from -10000 to 100000 m, got 200000$"),
        (0.5, "-11 km", r"height must be from -10000 to 100000 m, got -11000$"),
        (0.5, [0.0, 3e5], r"height must be from .* got 300000$"),
        (math.nan, 0.0, r"latitude must be a value in rad that is finite, got nan"),
        (0.5, math.inf, r"height must be a value in m that is finite, got inf"),
    ],
)
def test_a_place_that_is_refused(latitude: Any, height: Any, message: str) -> None:
    with pytest.raises(InputError, match=message):
        gravity.local(latitude, height)


def test_a_latitude_without_its_unit() -> None:
    with pytest.raises(UnitError, match=r"latitude must be a value in rad, got '45' without a unit"):
        gravity.local("45")


def test_a_level_base_at_rest_feels_gravity_as_it_is() -> None:
    assert gravity.seen_from_base() == (0.0, -gravity.STANDARD_GRAVITY)


def test_a_base_turned_counter_clockwise_sees_gravity_turned_clockwise() -> None:
    gx, gy = gravity.seen_from_base(math.pi / 2, magnitude=1.0)
    assert (gx, gy) == pytest.approx((-1.0, 0.0), abs=1e-15)
    gx, gy = gravity.seen_from_base("-90 deg", magnitude=1.0)
    assert (gx, gy) == pytest.approx((1.0, 0.0), abs=1e-15)


def test_an_accelerating_base_feels_its_acceleration_backwards() -> None:
    assert gravity.seen_from_base(acceleration=(2.0, 3.0)) == (-2.0, -3.0 - gravity.STANDARD_GRAVITY)
    falling = gravity.seen_from_base("20 deg", acceleration=(0.0, -gravity.STANDARD_GRAVITY))
    assert falling == pytest.approx((0.0, 0.0), abs=1e-15)


def test_tilts_in_an_array() -> None:
    tilt = np.linspace(-1.0, 1.0, 5)
    gx, gy = gravity.seen_from_base(tilt, acceleration=("1 m/s^2", 0))
    for i, angle in enumerate(tilt):
        assert (gx[i], gy[i]) == pytest.approx(gravity.seen_from_base(float(angle), acceleration=(1.0, 0.0)), rel=1e-15)
    assert np.hypot(gx, gy) == pytest.approx(np.full(5, math.hypot(1.0, gravity.STANDARD_GRAVITY)), rel=1e-15)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ({"tilt": 30.0}, r"tilt must be within two turns, .* got 30; degrees\? write '30 deg'"),
        ({"magnitude": -9.81}, r"magnitude must be >= 0 m/s\*\*2, got -9\.81"),
        ({"magnitude": [9.8, -1.0]}, r"magnitude must be >= 0 m/s\*\*2, got -1"),
        ({"acceleration": (1.0, 2.0, 3.0)}, r"acceleration must be a pair in m/s\*\*2, got 3 values"),
        ({"acceleration": ("1 m/s", 0)}, r"acceleration must be a value in m/s\*\*2, got '1 m/s'"),
    ],
)
def test_a_base_that_is_refused(arguments: dict[str, Any], message: str) -> None:
    with pytest.raises(InputError, match=message):
        gravity.seen_from_base(**arguments)

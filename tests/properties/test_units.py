"""A number, a string and a quantity of any registry say the same."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pint
from hypothesis import example, given
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from springpoise import units
from springpoise.errors import SpringpoiseError

UREG = pint.UnitRegistry()
SPELLINGS: list[tuple[Any, str, list[str]]] = [
    (units.metre, "m", ["m", "mm", "in", "ft", "km"]),
    (units.kilogram, "kg", ["kg", "g", "lb", "oz"]),
    (units.newton, "N", ["N", "kN", "lbf", "ozf", "kgf"]),
    (units.newton_per_metre, "N/m", ["N/m", "N/mm", "lbf/in", "kgf/cm"]),
    (units.newton_metre, "N*m", ["N*m", "N*mm", "lbf*in", "kgf*cm", "ozf*in"]),
    (units.newton_metre_per_radian, "N*m/rad", ["N*m/rad", "N*mm/deg", "lbf*in/turn"]),
    (units.joule, "J", ["J", "kJ", "ft*lbf"]),
    (units.ampere, "A", ["A", "mA"]),
    (units.ohm, "ohm", ["ohm", "mohm"]),
    (units.newton_metre_per_ampere, "N*m/A", ["N*m/A", "ozf*in/A"]),
    (units.metre_per_second_squared, "m/s**2", ["m/s**2", "ft/s**2"]),
    (units.radian_per_second, "rad/s", ["rad/s", "deg/s", "rpm"]),
    (units.number, "1", ["percent"]),
]
spelled = st.sampled_from([(convert, unit, text) for convert, unit, texts in SPELLINGS for text in texts])
magnitudes = st.floats(-1e6, 1e6).map(lambda x: x if abs(x) > 1e-9 else 0.0)


@given(spelled, magnitudes)
def test_string_and_quantity_agree(case: tuple[Any, str, str], magnitude: float) -> None:
    convert, _, text = case
    from_text = convert(f"{magnitude!r} {text}")
    from_quantity = convert(UREG.Quantity(magnitude, text))
    from_own = convert(units.text._registry().Quantity(magnitude, text))
    assert_allclose([from_quantity, from_own], from_text, rtol=1e-14)


@given(spelled, magnitudes)
def test_number_string_and_quantity_agree_in_si(case: tuple[Any, str, str], magnitude: float) -> None:
    convert, unit, _ = case
    assert convert(magnitude) == magnitude
    assert convert(f"{magnitude!r} {'' if unit == '1' else unit}") == magnitude
    assert convert(units.quantity(magnitude, unit)) == magnitude


@given(spelled, magnitudes, magnitudes)
def test_conversion_is_linear(case: tuple[Any, str, str], a: float, b: float) -> None:
    convert, _, text = case
    one = convert(f"1 {text}")
    assert_allclose(convert(np.array([a, b])), [a, b], rtol=0)
    assert_allclose(convert([f"{a!r} {text}", f"{b!r} {text}"]), np.array([a, b]) * one, rtol=1e-13)


@given(st.floats(-4 * math.pi, 4 * math.pi))
def test_angles_agree(angle: float) -> None:
    assert units.radian(angle) == units.poses(angle) == angle
    assert_allclose(units.poses(f"{math.degrees(angle)!r} deg"), angle, rtol=1e-14, atol=1e-300)
    assert_allclose(units.poses(UREG.Quantity(math.degrees(angle), "deg")), angle, rtol=1e-14, atol=1e-300)


@given(st.text(max_size=60), st.sampled_from(["m", "kg", "N", "N*m", "N*m/rad", "rad", "rad/s", "1"]))
@example("9**9**9 m", "m")
@example("1 m**9**9**9", "m")
@example("1 ((m**9)**9)**9", "m")
@example("1 (9**9)**9", "1")
@example("1" * 60, "1")
def test_any_text_gives_a_finite_number_or_a_clear_error(text: str, unit: str) -> None:
    try:
        got = units.parse(text, unit, "Thing.field")
    except SpringpoiseError as error:
        assert str(error).startswith("Thing.field must be ")
    else:
        assert type(got) is float
        assert math.isfinite(got)


UNIT_SOUP = st.text(alphabet="Nmkgslbfinder/*^()-·° 0129.%", max_size=24)


@given(st.floats(allow_nan=False, allow_infinity=False), UNIT_SOUP, st.sampled_from(["m", "N", "N/m", "N*m", "rad"]))
def test_a_soup_of_units_gives_a_finite_number_or_a_clear_error(number: float, soup: str, unit: str) -> None:
    test_any_text_gives_a_finite_number_or_a_clear_error.hypothesis.inner_test(f"{number} {soup}", unit)  # type: ignore[attr-defined]

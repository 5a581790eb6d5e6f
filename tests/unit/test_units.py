"""Every converter, every message and every trap of the unit door."""

from __future__ import annotations

import copy
import math
import os
import pickle
import re
import subprocess
import sys
from decimal import Decimal
from fractions import Fraction
from typing import Any

import array_api_strict
import attrs
import numpy as np
import pint
import pytest

from springpoise import units
from springpoise.errors import InputError, InputTypeError, SpringpoiseError, UnitError

INCH = 0.0254  # m, exact by definition (international yard and pound, 1959)
POUND_FORCE = 0.45359237 * 9.80665  # N, exact: pound avoirdupois times standard gravity
OUNCE_FORCE = POUND_FORCE / 16


# Each expected value is arithmetic on the exact definitions above or on SI prefixes.
CONVERTED = [
    (units.metre, "m", "12 cm", 0.12),
    (units.metre, "m", "5 in", 5 * INCH),
    (units.metre, "m", "3e-3 km", 3.0),
    (units.metre, "m", "7 µm", 7e-6),
    (units.metre, "m", "7 μm", 7e-6),
    (units.kilogram, "kg", "250 g", 0.25),
    (units.kilogram, "kg", "2 lb", 2 * 0.45359237),
    (units.newton, "N", "3 lbf", 3 * POUND_FORCE),
    (units.newton, "N", "3 pound_force", 3 * POUND_FORCE),
    (units.newton, "N", "2 kgf", 2 * 9.80665),
    (units.newton, "N", "-1.5kN", -1500.0),
    (units.newton, "N", "\u22121.5 N", -1.5),
    (units.newton_per_metre, "N/m", "3.5 lbf/in", 3.5 * POUND_FORCE / INCH),
    (units.newton_per_metre, "N/m", "0.31 N/mm", 310.0),
    (units.newton_metre, "N*m", "2 N*m", 2.0),
    (units.newton_metre, "N*m", "2 Nm", 2.0),
    (units.newton_metre, "N*m", "2 N m", 2.0),
    (units.newton_metre, "N*m", "2 N-m", 2.0),
    (units.newton_metre, "N*m", "2 N·m", 2.0),
    (units.newton_metre, "N*m", "2 N⋅m", 2.0),
    (units.newton_metre, "N*m", "2 mNm", 0.002),
    (units.newton_metre, "N*m", "2 kNm", 2000.0),
    (units.newton_metre, "N*m", "2 Nmm", 0.002),
    (units.newton_metre, "N*m", "2 N·mm", 0.002),
    (units.newton_metre, "N*m", "2 Ncm", 0.02),
    (units.newton_metre, "N*m", "4 lbf*in", 4 * POUND_FORCE * INCH),
    (units.newton_metre, "N*m", "4 in-lbf", 4 * POUND_FORCE * INCH),
    (units.newton_metre, "N*m", "4 ozf·in", 4 * OUNCE_FORCE * INCH),
    (units.newton_metre_per_radian, "N*m/rad", "2 N*m/rad", 2.0),
    (units.newton_metre_per_radian, "N*m/rad", "2 Nm/rad", 2.0),
    (units.newton_metre_per_radian, "N*m/rad", "2 Nm/deg", 360 / math.pi),
    (units.newton_metre_per_radian, "N*m/rad", "2 lbf*in/turn", 2 * POUND_FORCE * INCH / (2 * math.pi)),
    (units.joule, "J", "2 kJ", 2000.0),
    (units.joule, "J", "2 N*m", 2.0),
    (units.ampere, "A", "250 mA", 0.25),
    (units.ohm, "ohm", "20 mohm", 0.02),
    (units.ohm, "ohm", "0.6 Ω", 0.6),
    (units.newton_metre_per_ampere, "N*m/A", "50 mN*m/A", 0.05),
    (units.newton_metre_per_ampere, "N*m/A", "5 mNm/A", 0.005),
    (units.newton_metre_per_ampere, "N*m/A", "0.05 V/(rad/s)", 0.05),
    (units.newton_metre_per_ampere, "N*m/A", "0.05 V/rpm", 0.05 * 30 / math.pi),
    (units.metre_per_second_squared, "m/s**2", "981 cm/s^2", 9.81),
    (units.metre_per_second_squared, "m/s**2", "9.81 m/s²", 9.81),
    (units.metre_per_second_squared, "m/s**2", "9.81 m*s⁻²", 9.81),
    (units.metre_per_second_squared, "m/s**2", "9.81 m*s^(-2)", 9.81),
    (units.radian_per_second, "rad/s", "90 deg/s", math.pi / 2),
    (units.radian_per_second, "rad/s", "90 °/s", math.pi / 2),
    (units.radian_per_second, "rad/s", "30 rpm", math.pi),
    (units.number, "1", "0.8", 0.8),
    (units.number, "1", " +.8 ", 0.8),
    (units.number, "1", "80 %", 0.8),
    (units.number, "1", "80 percent", 0.8),
    (units.radian, "rad", "30 deg", math.pi / 6),
    (units.radian, "rad", "30°", math.pi / 6),
    (units.radian, "rad", "-30 degrees", -math.pi / 6),
    (units.radian, "rad", "0.5 turn", math.pi),
    (units.radian, "rad", "5. rad", 5.0),
]
CONVERTERS = [
    (units.metre, "m"),
    (units.kilogram, "kg"),
    (units.newton, "N"),
    (units.newton_per_metre, "N/m"),
    (units.newton_metre, "N*m"),
    (units.newton_metre_per_radian, "N*m/rad"),
    (units.joule, "J"),
    (units.ampere, "A"),
    (units.ohm, "ohm"),
    (units.newton_metre_per_ampere, "N*m/A"),
    (units.metre_per_second_squared, "m/s**2"),
    (units.radian_per_second, "rad/s"),
    (units.number, "1"),
    (units.radian, "rad"),
    (units.optional_metre, "m"),
]


@pytest.mark.parametrize(("convert", "unit", "text", "expected"), CONVERTED)
def test_a_string_becomes_si(convert: Any, unit: str, text: str, expected: float) -> None:
    got = convert(text, "Thing.field")
    assert type(got) is float
    assert got == pytest.approx(expected, rel=1e-14)
    assert units.parse(text, unit) == got


@pytest.mark.parametrize(("convert", "unit"), CONVERTERS)
@pytest.mark.parametrize(
    "value", [3, 3.0, np.float64(3), np.float32(3), np.int8(3), np.array(3.0), Decimal(3), Fraction(3)]
)
def test_every_kind_of_number_is_si(convert: Any, unit: str, value: Any) -> None:
    got = convert(value, "Thing.field")
    assert type(got) is float
    assert got == 3.0


@pytest.mark.parametrize(("convert", "unit"), CONVERTERS)
def test_quantities_of_any_registry(convert: Any, unit: str) -> None:
    spelled = "dimensionless" if unit == "1" else unit
    for registry in (pint.UnitRegistry(), pint.get_application_registry(), pint.UnitRegistry(force_ndarray_like=True)):
        assert convert(registry.Quantity(3.0, spelled), "Thing.field") == 3.0
    array = convert(pint.UnitRegistry().Quantity(np.array([1.0, 2.0]), spelled), "Thing.field")
    assert isinstance(array, np.ndarray)
    assert array.tolist() == [1.0, 2.0]


def test_a_quantity_is_converted_and_not_only_unwrapped() -> None:
    ureg = pint.UnitRegistry()
    assert units.newton_per_metre(ureg.Quantity(3.5, "lbf/in")) == pytest.approx(3.5 * POUND_FORCE / INCH, rel=1e-14)
    assert units.radian(ureg.Quantity(180, "deg")) == pytest.approx(math.pi)
    assert units.number(ureg.Quantity(80, "percent")) == pytest.approx(0.8)


def test_anything_with_m_as_is_a_quantity() -> None:
    class Own:
        def m_as(self, units: str, /) -> float:
            return {"N": 2.5}[units]

    assert units.newton(Own()) == 2.5
    with pytest.raises(UnitError, match=r"Thing\.field must be a value in kg, got .*Own object"):
        units.kilogram(Own(), "Thing.field")


@pytest.mark.parametrize(("convert", "unit"), CONVERTERS)
def test_an_array_is_copied_and_read_only(convert: Any, unit: str) -> None:
    source = np.array([[1.0], [2.0]])
    got = convert(source, "Thing.field")
    source[0] = 7.0
    assert got.tolist() == [[1.0], [2.0]]
    assert got.dtype == np.float64
    with pytest.raises(ValueError, match="read-only"):
        got[0] = 7.0
    assert convert([1, 2], "Thing.field").tolist() == [1.0, 2.0]
    assert convert(np.array([1, 2], dtype=np.uint8), "Thing.field").dtype == np.float64


def test_a_list_of_strings_and_quantities() -> None:
    got = units.metre(["1 cm", 2.0, pint.UnitRegistry().Quantity(3, "mm")], "Thing.field")
    assert got == pytest.approx([0.01, 2.0, 0.003])


def test_foreign_arrays_pass_untouched() -> None:
    value: Any = array_api_strict.asarray([1.0, math.nan])
    assert units.metre(value) is value
    assert units.radian(value) is value
    assert units.poses(value) is value
    both = (value, value)
    assert units.poses(both) is both


# ---------------------------------------------------------------------------------- what is refused


REFUSED = [
    ("N/m", "3.5 lb/in", r"Thing\.field must be a value in N/m, got '3\.5 lb/in'; lb is a mass here, .* 'lbf/in'$"),
    ("N/m", "3.5 lbs/in", r"got '3\.5 lbs/in'; lbs is a mass here, the force is written 'lbf/in'"),
    ("N/m", "3 kg/cm", r"kg is a mass here, the force is written 'kgf/cm'"),
    ("N", "12 kg", r"Thing\.field must be a value in N, got '12 kg'; kg is a mass here, .* 'kgf'$"),
    ("N", "12 g", r"got '12 g'; g is a mass here, the force is written 'gf'"),
    ("N*m", "5 in-lb", r"got '5 in-lb'; lb is a mass here, the force is written 'in-lbf'"),
    ("N*m", "5 oz*in", r"oz is a mass here, the force is written 'ozf\*in'"),
    ("N*m", "5 kg*cm", r"kg is a mass here, the force is written 'kgf\*cm'"),
    ("kg", "5 N", r"must be a value in kg, got '5 N'; 'N' measures something else"),
    ("m", "5 lb", r"must be a value in m, got '5 lb'; 'lb' measures something else"),
    ("1", "5 m", r"must be a pure number, got '5 m'; 'm' measures something else"),
    ("m", "12", r"Thing\.field must be a value in m, got '12' without a unit; write it with one, such as '0\.12 m'$"),
    ("rad", "30", r"got '30' without a unit; write it with one, such as '30 deg'"),
    ("K", "30", r"got '30' without a unit; write it with one, such as '1 K'"),
    ("rad", "20 %", r"got '20 %'; write rad or deg$"),
    ("rad", "20 sr", r"got '20 sr'; write rad or deg$"),
    ("1", "20 deg", r"got '20 deg'; 'deg' measures something else, an angle is too many or missing in it"),
    ("N*m", "2 N*m/deg", r"got '2 N\*m/deg'; 'N\*m/deg' measures something else, an angle"),
    ("rad/s", "50 Hz", r"got '50 Hz'; 'Hz' does not say which angle, write rad/s, deg/s or rpm"),
    ("rad/s", "50 s^-1", r"got '50 s\^-1'; 's\^-1' does not say which angle"),
    ("N*m/rad", "5 N*m", r"'N\*m' does not say per which angle, write N\*m/rad, N\*m/deg or lbf\*in/turn"),
    ("N*m/rad", "5 Nm*rad", r"'Nm\*rad' measures something else, an angle"),
    ("m", "", r"got ''; write a number and a unit, such as '0\.12 m'"),
    ("m", "m", r"got 'm'; write a number and a unit"),
    ("m", "nan m", r"got 'nan m'; write a number and a unit"),
    ("m", "-inf m", r"got '-inf m'; write a number and a unit"),
    ("m", "1 2 m", r"got '1 2 m'; write a number and a unit"),
    ("m", "3 + 4 m", r"got '3 \+ 4 m'; write a number and a unit"),
    ("m", "٣ m", r"got '٣ m'; write a number and a unit"),
    ("m", "1\nm\n2", r"write a number and a unit"),
    ("m", "9" * 200 + " m", r"got '9{40}'\.\.\.; write a number and a unit"),
    ("m", "1e400 m", r"got '1e400 m'; the number is too large"),
    ("m", "1e308 km", r"got '1e308 km'; the number is too large"),
    ("m", "1e4000 m", r"'e4000 m' is not a unit that is known"),
    ("m", "9**9**9 m", r"got '9\*\*9\*\*9 m'; '\*\*9\*\*9 m' is not a unit that is known"),
    ("m", "1 m**9**9**9", r"'m\*\*9\*\*9\*\*9' is not a unit that is known"),
    ("m", "1 m**9^9^9", r"'m\*\*9\^9\^9' is not a unit that is known"),
    ("m", "1 m²²", r"'m²²' is not a unit that is known"),
    ("m", "1 m^(9**(9**9))", r"is not a unit that is known"),
    ("m", "1 m**99999999", r"is not a unit that is known"),
    ("m", "1,5 m", r"got '1,5 m'; ',5 m' is not a unit that is known"),
    ("m", "1_000 m", r"'_000 m' is not a unit that is known"),
    ("m", "1/2 in", r"'/2 in' is not a unit that is known"),
    ("m", "1 m*2", r"'m\*2' is not a unit that is known"),
    ("m", "1 furlogn", r"'furlogn' is not a unit that is known"),
    ("m", "1 m; import os", r"is not a unit that is known"),
    ("m", "1 __import__('os')", r"is not a unit that is known"),
    ("m", "1 " + "m" * 41, r"is not a unit that is known"),
    ("N", "1 n", r"is not a unit that is known"),
    ("1", "3 dB", r"got '3 dB'; 'dB' is not a unit that is known"),
    ("W/m", "3 dBm/m", r"got '3 dBm/m'; 'dBm/m' is not a unit that is known"),
]


@pytest.mark.parametrize(("unit", "text", "message"), REFUSED)
def test_a_string_that_is_refused(unit: str, text: str, message: str) -> None:
    with pytest.raises(UnitError, match=message):
        units.scalar_si(text, unit, "Thing.field")


def test_a_temperature_keeps_its_offset() -> None:
    assert units.parse("20 °C", "K") == pytest.approx(293.15)


@pytest.mark.parametrize(
    ("text", "unit", "message"),
    [
        ("5 m*N", "N/m", r"Thing\.field must be a value in N/m, got 5 meter \* newton; .* measures something else"),
        ("5 lb/in", "N/m", r"got 5\.0 pound / inch; pound is a mass here, the force is written 'lbf / inch'"),
        ("5 Nm", "N*m", r"got 5 number_meter; pint reads 'Nm' as a textile unit, newton metre is 'N\*m'"),
        ("5 Hz", "rad/s", r"got 5 hertz; 'hertz' does not say which angle, write rad/s, deg/s or rpm"),
        ("5 kHz", "rad/s", r"got 5 kilohertz; 'kilohertz' does not say which angle"),
        ("5 m", "1", r"must be a pure number, got 5 meter; 'meter' measures something else"),
    ],
)
def test_a_quantity_that_is_refused(text: str, unit: str, message: str) -> None:
    for registry in (pint.UnitRegistry(), pint.get_application_registry()):
        with pytest.raises(UnitError, match=message):
            units.scalar_si(registry.Quantity(text), unit, "Thing.field")


@pytest.mark.parametrize(("convert", "unit"), CONVERTERS)
@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf, np.float64("nan"), np.float32("inf"), Decimal("NaN")])
def test_what_is_not_finite_is_refused(convert: Any, unit: str, bad: Any) -> None:
    described = re.escape("a pure number" if unit == "1" else f"a value in {unit}")
    with pytest.raises(InputError, match=rf"^Thing\.field must be {described} that is finite, got .*(nan|inf|NaN)"):
        convert(bad, "Thing.field")
    with pytest.raises(
        InputError, match=rf"Thing\.field must be {described} that is finite, got (nan|-?inf) in an array"
    ):
        convert(np.array([0.0, float(bad)]), "Thing.field")


@pytest.mark.parametrize("bad", [10**400, Decimal("1e999"), Decimal("sNaN")])
def test_a_number_beyond_any_float(bad: Any) -> None:
    with pytest.raises(InputError, match=r"Thing\.field must be a value in m that is finite, got (1000|Decimal)"):
        units.metre(bad, "Thing.field")


@pytest.mark.parametrize(
    ("bad", "kind"),
    [
        (True, "bool"),
        (np.True_, "bool"),
        ([True, 1.0], "list"),
        (np.array([True]), "ndarray"),
        (None, "NoneType"),
        ({}, "dict"),
        ({1.0, 2.0}, "set"),
        (b"1 m", "bytes"),
        (1j, "complex"),
        (np.complex128(1), "complex128"),
        (np.array([1j]), "ndarray"),
        ([[1.0], [1.0, 2.0]], "list"),
        ([["1 m"]], "list"),
        (np.array(["1 m"]), "ndarray"),
        (np.array([Decimal(1)]), "ndarray"),
        (np.ma.masked_array([1.0, 2.0], [False, True]), "MaskedArray"),
        (np.datetime64("2026-01-01"), "datetime64"),
        (object(), "object"),
        (len, "builtin_function_or_method"),
    ],
)
def test_a_kind_that_cannot_be_read(bad: Any, kind: str) -> None:
    with pytest.raises(InputTypeError, match=rf"Thing\.field must be a value in m, got .* of type {kind}"):
        units.metre(bad, "Thing.field")
    if bad is not None:
        with pytest.raises(InputTypeError, match=rf"q must be angles in rad, got .* of type {kind}"):
            units.poses(bad)


def test_an_empty_array_is_no_value() -> None:
    with pytest.raises(InputError, match=r"Thing\.field must be a value in m, got an empty array"):
        units.metre([], "Thing.field")


def test_optional_values() -> None:
    assert units.optional_metre(None) is None
    assert units.optional_metre("3 cm") == pytest.approx(0.03)
    assert units.optional_radian_pair(None) is None
    assert units.optional_radian_pair(("0 deg", 1.0)) == (0.0, 1.0)


# ---------------------------------------------------------------------------------- angles and pairs


@pytest.mark.parametrize("convert", [units.radian, units.poses])
def test_degrees_as_a_plain_number(convert: Any) -> None:
    with pytest.raises(
        InputError, match=r"Thing\.q must be within two turns, ±12\.57 rad, got 70; degrees\? write '70 deg'"
    ):
        convert(70.0, "Thing.q")
    with pytest.raises(InputError, match=r"got -70; degrees\? write '-70 deg'"):
        convert(-70, "Thing.q")
    with pytest.raises(InputError, match=r"got 80; degrees\? write '80 deg'"):
        convert(np.array([[0.5, 80.0]]), "Thing.q")
    assert convert(4 * math.pi) == 4 * math.pi


@pytest.mark.parametrize("value", ["1000 deg", pint.UnitRegistry().Quantity(1000, "deg")])
def test_a_stated_angle_beyond_two_turns_is_not_taken_for_degrees(value: Any) -> None:
    with pytest.raises(InputError, match=r"Thing\.q must be within two turns, ±12\.57 rad, got 17\.4533$"):
        units.radian(value, "Thing.q")
    assert units.poses(value) == pytest.approx(math.radians(1000))


def test_poses_let_nan_and_infinity_pass() -> None:
    for value in (math.nan, math.inf, -math.inf):
        got = units.poses(value)
        assert type(got) is float
        assert np.array_equal(got, value, equal_nan=True)
        assert np.array_equal(units.poses(np.array([0.1, value])), [0.1, value], equal_nan=True)
    with pytest.raises(InputError, match="got 80; degrees"):
        units.poses(np.array([math.nan, 80.0]))


def test_poses_of_every_kind() -> None:
    for value in (1, np.float64(1), np.float32(1), np.array(1.0), "1 rad", pint.UnitRegistry().Quantity(1.0, "rad")):
        got = units.poses(value)
        assert type(got) is float
        assert got == 1.0
    same = np.array([0.1, 0.2])
    assert units.poses(same) is same
    assert units.poses([1, 2]).tolist() == [1.0, 2.0]
    assert units.poses(["90 deg", 0.5]) == pytest.approx([math.pi / 2, 0.5])
    assert units.poses([]).shape == (0,)
    with pytest.raises(UnitError, match=r"q must be a value in rad, got '90' without a unit"):
        units.poses("90")


@pytest.mark.parametrize(
    ("convert", "value", "expected"),
    [
        (units.metre_pair, ("3 cm", 0.5), (0.03, 0.5)),
        (units.metre_pair, np.array([1.0, 2.0]), (1.0, 2.0)),
        (units.metre_pair, pint.UnitRegistry().Quantity([1.0, 2.0], "cm"), (0.01, 0.02)),
        (units.acceleration_pair, (0, "-9.81 m/s^2"), (0.0, -9.81)),
        (units.radian_pair, ("-70 deg", "80°"), (math.radians(-70), math.radians(80))),
    ],
)
def test_a_pair(convert: Any, value: Any, expected: tuple[float, float]) -> None:
    got = convert(value, "Thing.pair")
    assert [type(item) for item in got] == [float, float]
    assert got == pytest.approx(expected)


@pytest.mark.parametrize(
    ("bad", "message"),
    [
        ("1 m", r"Thing\.pair must be a pair in m, got '1 m' of type str"),
        (1.0, r"Thing\.pair must be a pair in m, got 1\.0 of type float"),
        (None, r"got None of type NoneType"),
        ({1.0, 2.0}, r"of type set"),
        ({1: 2, 3: 4}, r"of type dict"),
        (np.array(1.0), r"got array\(1\.\) of type ndarray"),
    ],
)
def test_what_is_no_pair(bad: Any, message: str) -> None:
    with pytest.raises(InputTypeError, match=message):
        units.metre_pair(bad, "Thing.pair")


def test_a_pair_of_the_wrong_length_or_content() -> None:
    with pytest.raises(InputError, match=r"Thing\.pair must be a pair in m, got 3 values: \[1, 2, 3\]"):
        units.metre_pair([1, 2, 3], "Thing.pair")
    with pytest.raises(UnitError, match=r"Thing\.pair must be a value in m, got '2 kg'"):
        units.metre_pair(("1 m", "2 kg"), "Thing.pair")
    with pytest.raises(
        InputError, match=r"Thing\.travel must be within two turns.* got -70; degrees\? write '-70 deg'"
    ):
        units.radian_pair((-70, 80), "Thing.travel")


# ---------------------------------------------------------------------------------- model fields


@attrs.frozen(field_transformer=units.named_fields)
class Thing:
    mass: Any = attrs.field(converter=units.kilogram, validator=units.positive)
    reach: Any = attrs.field(default=None, converter=units.optional_metre)
    slip: Any = attrs.field(default=0.0, converter=units.number, validator=units.not_negative)
    ratio: Any = attrs.field(default=1.0, converter=units.number, validator=units.not_zero)
    efficiency: Any = attrs.field(default=1.0, converter=units.number, validator=units.fraction)
    at: Any = attrs.field(default=(0.0, 0.0), converter=units.metre_pair)
    note: str = ""


def test_fields_know_their_name_and_unit() -> None:
    assert {field.name: field.metadata.get("unit") for field in attrs.fields(Thing)} == {
        "mass": "kg",
        "reach": "m",
        "slip": "1",
        "ratio": "1",
        "efficiency": "1",
        "at": "m",
        "note": None,
    }
    with pytest.raises(UnitError, match=r"^Thing\.mass must be a value in kg, got '3 N'"):
        Thing("3 N")
    with pytest.raises(InputTypeError, match=r"^Thing\.mass must be a value in kg, got None of type NoneType"):
        Thing(None)
    assert Thing("3 kg", reach=None).reach is None


@pytest.mark.parametrize(
    ("fields", "message"),
    [
        ({"mass": 0.0}, r"^Thing\.mass must be > 0 kg, got 0\.0$"),
        ({"mass": [1.0, -2.0]}, r"^Thing\.mass must be > 0 kg, got -2\.0$"),
        ({"mass": 1, "slip": -0.5}, r"^Thing\.slip must be >= 0, got -0\.5$"),
        ({"mass": 1, "ratio": 0}, r"^Thing\.ratio must be other than 0, got 0\.0$"),
        ({"mass": 1, "efficiency": 0}, r"^Thing\.efficiency must be above 0 and at most 1, got 0\.0$"),
        ({"mass": 1, "efficiency": 1.01}, r"^Thing\.efficiency must be above 0 and at most 1, got 1\.01$"),
    ],
)
def test_validators(fields: dict[str, Any], message: str) -> None:
    with pytest.raises(InputError, match=message):
        Thing(**fields)


def test_validators_let_the_bounds_and_recorded_values_pass() -> None:
    assert Thing(1e-300, slip=0.0, ratio=-1.0, efficiency=1.0).slip == 0.0
    foreign: Any = array_api_strict.asarray([-1.0])
    assert Thing(foreign, slip=foreign, ratio=foreign, efficiency=foreign).mass is foreign


def test_models_with_arrays_compare_and_hash_by_value() -> None:
    one, same, other = Thing([1.0, 2.0]), Thing(np.array([1, 2])), Thing([1.0, 3.0])
    assert one == same
    assert hash(one) == hash(same)
    assert one != other
    assert Thing([[1.0, 2.0]]) != one
    assert copy.deepcopy(one) == one
    assert pickle.loads(pickle.dumps(one)) == one
    assert Thing(1.0, at=([1.0, 2.0], 0)) == Thing(1.0, at=([1.0, 2.0], 0))


def test_unit_errors_are_what_users_expect_to_catch() -> None:
    assert issubclass(UnitError, ValueError)
    assert issubclass(InputTypeError, TypeError)
    assert issubclass(UnitError, SpringpoiseError)


# ---------------------------------------------------------------------------------- back to quantities


def test_quantity_belongs_to_the_application_registry() -> None:
    torque = units.quantity(2.0, "N*m")
    assert torque.m_as("lbf*in") == pytest.approx(2.0 / (POUND_FORCE * INCH))
    assert torque + pint.get_application_registry().Quantity("1 N*m") == pint.get_application_registry().Quantity(
        "3 N*m"
    )
    assert units.quantity(np.array([1.0, 2.0]), "m").m_as("cm").tolist() == [100.0, 200.0]
    assert units.quantity(0.5, "1").m_as("percent") == 50.0
    assert units.quantity(math.pi, "rad").m_as("deg") == pytest.approx(180.0)
    assert units.newton_metre(torque) == 2.0


def test_quantity_reads_newton_metre_as_newton_metre() -> None:
    assert units.quantity(2.0, "Nm").m_as("N*m") == 2.0
    assert units.quantity(2.0, "N·m/rad").m_as("N*m/rad") == 2.0


@pytest.mark.parametrize(
    ("unit", "message"),
    [
        ("lbf*in", r"unit must be an SI unit, got 'lbf\*in'; results are SI, so convert the quantity afterwards"),
        ("deg", r"unit must be an SI unit, got 'deg'"),
        ("mm", r"unit must be an SI unit, got 'mm'"),
        ("nonsense", r"unit must be an SI unit, got 'nonsense'; it is not a unit that is known"),
    ],
)
def test_quantity_refuses_what_would_mislabel_an_si_number(unit: str, message: str) -> None:
    with pytest.raises(UnitError, match=message):
        units.quantity(2.0, unit)


IN_A_FRESH_PROCESS = """
import sys
from springpoise import units
units.metre(1.0); units.metre([1.0]); units.poses(0.5)
assert "pint" not in sys.modules, "numbers alone must not load pint"
units.metre("12 cm"); units.newton_metre("2 Nm")
try:
    units.newton("12 kg")
except ValueError:
    pass
import pint
lazy = pint.application_registry.get()
assert type(lazy).__name__ == "LazyRegistry", type(lazy)
own = pint.UnitRegistry()
own.define("ell = 0.6 m")
pint.set_application_registry(own)
assert units.metre("12 cm") == 0.12
try:
    units.metre("2 ell")
except ValueError:
    pass
else:
    raise AssertionError("a string must mean the same in every process")
assert units.metre(own.Quantity(2, "ell")) == 1.2
assert units.quantity(1.2, "m").m_as("ell") == 2.0
"""


def test_parsing_never_touches_the_application_registry() -> None:
    done = subprocess.run(
        [sys.executable, "-c", IN_A_FRESH_PROCESS], capture_output=True, text=True, env=os.environ, check=False
    )
    assert done.returncode == 0, done.stderr

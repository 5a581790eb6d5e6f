"""Fields of the model classes: converters that know the field's name, and validators."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import attrs
import numpy as np

from springpoise.errors import InputError
from springpoise.units.convert import (
    acceleration,
    acceleration_pair,
    ampere,
    joule,
    kelvin,
    kilogram,
    kilogram_per_cubic_metre,
    metre,
    metre_pair,
    metre_per_second_squared,
    metre_place,
    metre_triple,
    newton,
    newton_metre,
    newton_metre_per_ampere,
    newton_metre_per_radian,
    newton_per_metre,
    number,
    ohm,
    optional_metre,
    optional_newton,
    optional_radian_pair,
    pascal,
    per_kelvin,
    radian,
    radian_pair,
    radian_per_second,
    radian_triple,
    radians,
    second,
)

_UNIT_OF: dict[Callable[..., Any], str] = {
    metre: "m",
    kilogram: "kg",
    newton: "N",
    newton_per_metre: "N/m",
    newton_metre: "N*m",
    newton_metre_per_radian: "N*m/rad",
    joule: "J",
    ampere: "A",
    ohm: "ohm",
    newton_metre_per_ampere: "N*m/A",
    metre_per_second_squared: "m/s**2",
    radian_per_second: "rad/s",
    pascal: "Pa",
    kilogram_per_cubic_metre: "kg/m**3",
    second: "s",
    per_kelvin: "1/K",
    kelvin: "K",
    number: "1",
    radian: "rad",
    metre_pair: "m",
    metre_place: "m",
    metre_triple: "m",
    radian_triple: "rad",
    radians: "rad",
    acceleration: "m/s**2",
    acceleration_pair: "m/s**2",
    radian_pair: "rad",
    optional_metre: "m",
    optional_newton: "N",
    optional_radian_pair: "rad",
}


def named_fields(cls: type, fields: list[attrs.Attribute[Any]]) -> list[attrs.Attribute[Any]]:
    """``field_transformer`` of every model: binds ``Class.field`` into converters and unit into metadata.

    It also makes equality and hashing work by value where a field holds an array.
    """
    return [_named(cls.__name__, field) for field in fields]


def _named(owner: str, field: attrs.Attribute[Any]) -> attrs.Attribute[Any]:
    inner: Any = field.converter
    unit = _UNIT_OF.get(inner)
    if unit is None:
        return field
    full = f"{owner}.{field.name}"

    def convert(value: Any) -> Any:
        return None if value is None and field.default is None else inner(value, full)

    convert.__annotations__ = {"value": inner.__annotations__["value"], "return": Any}

    return field.evolve(
        converter=convert, metadata={**field.metadata, "unit": unit}, eq=True, eq_key=comparable, order=False
    )


def comparable(value: Any) -> Any:
    """A key that compares and hashes arrays by their values."""
    if isinstance(value, tuple):
        return tuple(comparable(item) for item in value)
    return (value.shape, value.tobytes()) if isinstance(value, np.ndarray) else value


def _complain(instance: object, attribute: attrs.Attribute[Any], rule: str, value: Any, ok: Any) -> None:
    if isinstance(value, np.ndarray):
        value = value[~ok].flat[0]
    unit = attribute.metadata.get("unit", "1")
    suffix = "" if unit == "1" else f" {unit}"
    raise InputError(f"{type(instance).__name__}.{attribute.name} must be {rule}{suffix}, got {value}")


def are_known(*values: object) -> bool:
    """Whether all values can be compared here and now: floats and arrays, not recorded variables."""
    return all(isinstance(value, float | np.ndarray) for value in values)


def positive(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator: greater than zero."""
    if isinstance(value, float | np.ndarray) and not np.all(ok := value > 0):
        _complain(instance, attribute, "> 0", value, ok)


def not_negative(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator: zero or greater."""
    if isinstance(value, float | np.ndarray) and not np.all(ok := value >= 0):
        _complain(instance, attribute, ">= 0", value, ok)


def not_zero(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator: anything but zero."""
    if isinstance(value, float | np.ndarray) and not np.all(ok := value != 0):
        _complain(instance, attribute, "other than 0", value, ok)


def fraction(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator: above zero and at most one."""
    if isinstance(value, float | np.ndarray) and not np.all(ok := (value > 0) & (value <= 1)):
        _complain(instance, attribute, "above 0 and at most 1", value, ok)

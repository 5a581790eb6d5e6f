"""How wide a number scatters, and how far an adjuster reaches: texts with a unit, or percentages."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.guard.format.place import Place

__all__ = ["Width", "read_width", "read_widths", "width_of", "widths_of", "write_width", "write_widths"]

UNITS = (
    "m",
    "rad",
    "kg",
    "N",
    "N/m",
    "N*m",
    "N*m/rad",
    "Pa",
    "1/K",
    "K",
    "m/s**2",
    "kg/m**3",
    "Pa*m**6/mol**2",
    "m**3/mol",
)
"""Units that a number of a mechanism may have."""

MOST_SAMPLES = 100_000


@attrs.frozen
class Width:
    """A value whose unit has to suit a number of the mechanism that is not known yet."""

    value: float
    """The value [``unit``]."""
    unit: str
    """Its SI unit, ``"1"`` for a pure number, ``"%"`` for a percentage."""
    text: str | None = attrs.field(default=None, eq=False)
    """What was written, where it was a text."""

    def inside(self, unit: str) -> Any:
        """What ``springpoise.tolerance`` takes for a number of this unit: SI, or the percentage as a text.

        Raises
        ------
        UnitError
            It is in another unit.
        """
        if self.unit == "%":
            return f"{self.value!r} %"
        if self.unit != unit:
            wanted = "a number without quotes" if unit == "1" else f"a text in {unit}"
            hint = f"; write '{self.value:g} {unit}' if {unit} is meant" if self.unit == "1" else ""
            raise UnitError(f"must be {wanted}, or a percentage, got {self}{hint}")
        return self.value

    def __str__(self) -> str:
        return f"{self.value:g}" if self.text is None else self.text


def width_of(value: Any, name: str) -> Width:
    """A width from a text with a unit or a percentage, or from a plain number for what has no unit.

    Raises
    ------
    InputError, InputTypeError
        No finite number, or no unit that a number of a mechanism has.
    """
    return _width(value, name, UNITS)


def _width(value: Any, name: str, likely: tuple[str, ...]) -> Width:
    if isinstance(value, Width):
        return value
    if isinstance(value, bool) or not isinstance(value, str | int | float):
        raise InputTypeError(f"{name} must be a text such as '0.5 mm' or '5 %', got {value!r}")
    if not isinstance(value, str):
        if not math.isfinite(value):
            raise InputError(f"{name} must be finite, got {value!r}")
        return Width(float(value), "1")
    text = value.strip()
    if text.endswith("%"):
        try:
            return Width(units.parse(text, "percent", name), "%", text)
        except UnitError as error:
            raise InputError(f"{name} must be a percentage such as '5 %', got {value!r}") from error
    for unit in dict.fromkeys((*likely, *UNITS)):
        if unit == "K" and not text.endswith("K"):  # "5 degC" is a temperature, not a difference
            continue
        try:
            return Width(units.parse(text, unit, name), unit, text)
        except UnitError:
            continue
    raise InputError(
        f"{name} must be a text with a unit such as '0.5 mm', or a percentage such as '5 %', got {value!r}"
    )


def widths_of(values: Any, name: str) -> tuple[Width, ...]:
    """Several of them, all in one unit and none a percentage.

    Raises
    ------
    InputError, InputTypeError
        None at all, too many, or one that cannot be read.
    """
    if isinstance(values, str) or not hasattr(values, "__iter__"):
        raise InputTypeError(f"{name} must be a list, got {values!r}")
    given = list(values)
    if not 0 < len(given) <= MOST_SAMPLES:
        raise InputError(f"{name} must be 1 to {MOST_SAMPLES} values, got {len(given)}")
    found: list[Width] = []
    for value in given:
        found.append(_width(value, name, (found[0].unit,) if found else UNITS))
        if found[-1].unit == "%" or found[-1].unit != found[0].unit:
            raise InputError(f"{name} must be values in one unit, not percentages, got {found[-1]}")
    return tuple(found)


def read_width(value: Any, place: Place) -> Any:
    """What stands in a file, looked at: a text or a number."""
    if isinstance(value, bool) or not isinstance(value, str | int | float):
        raise place.error(f"must be a text with a unit such as '0.5 mm' or '5 %', got {Place.shown(value)}")
    return value


def read_widths(value: Any, place: Place) -> Any:
    """A list of them."""
    return [read_width(item, at) for at, item in place.entries(value)]


def write_width(value: Width) -> str | float:
    """What :func:`width_of` reads back as an equal one."""
    return value.value if value.text is None else value.text


def write_widths(values: tuple[Width, ...]) -> list[str | float]:
    """The same of several."""
    return [write_width(value) for value in values]

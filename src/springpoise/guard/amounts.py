"""Values with units: as a file writes them, as a table shows them, as JSON names them."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.tables import number

__all__ = [
    "JSON_SUFFIX",
    "OfPeak",
    "celsius",
    "finite_or_none",
    "json_suffix",
    "percent",
    "share_of",
    "shown",
    "text_of_share",
    "text_of_torque_or_share",
    "torque_or_share",
    "written",
]

_SPELLED = {
    "1/K": "K^-1",
    "m/s**2": "m/s^2",
    "kg/m**3": "kg/m^3",
    "Pa*m**6/mol**2": "Pa*m^6/mol^2",
    "m**3/mol": "m^3/mol",
}
"""Units as a file spells them, where that is not as the library does."""

_FRIENDLIER = {"m": ("mm", 1e3), "rad": ("deg", 180.0 / math.pi), "N/m": ("N/mm", 1e-3)}
"""What people read more easily; used where the number stays exact and short."""

ICE_POINT = 273.15
"""0 degrees Celsius [K]."""

JSON_SUFFIX = {
    "1": "",
    "%": "_percent",
    "m": "_m",
    "kg": "_kg",
    "N": "_N",
    "N/m": "_N_per_m",
    "N*m": "_Nm",
    "N*m/rad": "_Nm_per_rad",
    "N*m/A": "_Nm_per_A",
    "rad": "_rad",
    "J": "_J",
    "A": "_A",
    "ohm": "_ohm",
    "K": "_K",
    "Pa": "_Pa",
}
"""What a name in JSON ends with, by unit."""


def json_suffix(unit: str) -> str:
    """What a name in JSON ends with, for any unit."""
    named = unit.replace("**", "").replace("*", "_").replace("/", "_per_")
    return JSON_SUFFIX.get(unit, f"_{named}")


def written(value: float, unit: str) -> str:
    """A value as a text with a unit that reads back as exactly the same float."""
    value = float(value)
    if unit == "K":
        text = f"{value - ICE_POINT:.10g} degC"
        if units.parse(text, unit) == value:
            return text
    if unit in _FRIENDLIER and abs(value) < 1e9:
        friendlier, factor = _FRIENDLIER[unit]
        text = f"{value * factor:.10g} {friendlier}"
        small = unit == "rad" or "e" not in text
        if small and units.parse(text, unit) == value:
            return text
    plain = str(int(value)) if value.is_integer() and 0 < abs(value) < 1e15 else repr(value)
    return f"{plain} {_SPELLED.get(unit, unit)}"


def shown(value: float, unit: str, digits: int = 4) -> str:
    """A value as tables and sentences show it: lengths in mm, angles in deg, the rest in SI or percent."""
    if not math.isfinite(value):
        return "-" if math.isnan(value) or value < 0 else "no limit" if unit in {"m", "rad"} else "infinite"
    if unit == "rad":
        return f"{math.degrees(value):.2f} deg"
    if unit == "m":
        return f"{1e3 * value:.2f} mm" if abs(value) < 1e4 else number(1e3 * value, "mm", digits)
    if unit == "%":
        return f"{value:.2f} %"
    return number(value, unit, digits)


def celsius(temperature: float) -> str:
    """A temperature given in K as tables and sentences show it: ``"-10 degC"``."""
    return f"{round(temperature - ICE_POINT, 6):g} degC"


def percent(share: float) -> str:
    """A share in percent: ``"2.17 %"``."""
    return f"{100 * share:.2f} %" if abs(share) < 1e3 else number(100 * share, "%")


def finite_or_none(value: float | None) -> float | None:
    """A float that JSON can carry; None for what it cannot."""
    return None if value is None or not math.isfinite(value) else float(value)


@attrs.frozen(field_transformer=units.named_fields)
class OfPeak:
    """A torque as a share of the peak gravity torque.

    Raises
    ------
    InputError
        A share that is not positive and finite.

    Examples
    --------
    >>> str(OfPeak(3.0)), OfPeak(3.0).share
    ('3 %', 0.03)
    """

    percent: float = attrs.field(converter=units.number, validator=units.positive)
    """Percent of the peak gravity torque [1], > 0."""

    @property
    def share(self) -> float:
        """The share itself [1]."""
        return self.percent / 100.0

    def __str__(self) -> str:
        return f"{int(self.percent) if self.percent.is_integer() else self.percent!r} %"


def torque_or_share(value: Any) -> Any:
    """A torque [N·m], or an :class:`OfPeak` for a text such as ``"3 %"``."""
    if isinstance(value, OfPeak):
        return value
    if isinstance(value, str) and value.strip().endswith("%"):
        return OfPeak(units.parse(value, "percent", "share"))
    torque = units.newton_metre(value, "torque")
    if not isinstance(torque, float) or not torque > 0:
        raise InputError(f"torque must be > 0 N*m, got {value!r}")
    return torque


def text_of_torque_or_share(value: Any) -> str:
    """What :func:`torque_or_share` reads back."""
    return str(value) if isinstance(value, OfPeak) else written(value, "N*m")


def share_of(value: Any, name: str) -> float:
    """A share above 0 and at most 1, given as a number or as a text such as ``"95 %"``."""
    share = units.parse(value, "1", name) if isinstance(value, str) and "%" in value else units.number(value, name)
    if not isinstance(share, float) or not 0.0 < share <= 1.0:
        meant = isinstance(value, int | float) and 1 < value <= 100
        hint = f"; write '{value:g} %' if percent is meant" if meant else ""
        raise InputError(f"{name} must be above 0 % and at most 100 %, got {value!r}{hint}")
    return share


def text_of_share(value: float) -> str | float:
    """What :func:`share_of` reads back as exactly the same."""
    text = f"{100.0 * value:.10g} %"
    return text if units.parse(text, "1") == value else value

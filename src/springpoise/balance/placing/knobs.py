"""Knobs of a placement: what may be varied, between which bounds, in which unit."""

from __future__ import annotations

import keyword
import math
from collections.abc import Mapping
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError, UnitError

__all__ = ["Knob", "box_of", "knobs_of"]

_UNITS = ("m", "rad", "1", "N/m", "N", "kg", "N*m", "N*m/rad", "Pa", "J", "K")
"""Units that a bound written as text may have, in the order in which they are tried."""


@attrs.frozen
class Knob:
    """A number that a placement may vary."""

    name: str
    """Its name, as ``build`` takes it."""
    low: float
    """Lower bound, SI."""
    high: float
    """Upper bound, SI."""
    unit: str = ""
    """SI unit where the bounds were given as text; empty where they were plain numbers."""


def knobs_of(given: Any) -> tuple[Knob, ...]:
    """The knobs, once their names and bounds are known to be usable."""
    if not isinstance(given, Mapping):
        raise InputTypeError(f"knobs must map names to bounds (lower, higher), got {given!r}")
    if not given:
        raise InputError("knobs must be at least one name with its bounds, got none; use fit_springs for fixed mounts")
    return tuple(_knob(name, bounds) for name, bounds in given.items())


def _knob(name: Any, bounds: Any) -> Knob:
    if not isinstance(name, str) or not name.isidentifier() or keyword.iskeyword(name):
        raise InputError(f"knobs must be named like arguments of build, got {name!r}")
    what = f"knobs[{name!r}]"
    if bounds is None or isinstance(bounds, str) or not hasattr(bounds, "__len__") or len(bounds) != 2:
        raise InputError(
            f"{what} must be bounds (lower, higher), got {bounds!r}; "
            "unbounded searches run away to tall anchors and soft springs"
        )
    values, unit = [], ""
    for bound in bounds:
        value, said = _bound(bound, what)
        unit = unit or said
        if said and said != unit:
            raise UnitError(f"{what} must have bounds of one dimension, got {bounds!r}")
        values.append(value)
    low, high = values
    if not low < high:
        raise InputError(f"{what} must be bounds (lower, higher), got {(low, high)}")
    return Knob(name, low, high, unit)


def _bound(value: Any, what: str) -> tuple[float, str]:
    """A bound in SI, and its unit where that is said."""
    if value is None or (isinstance(value, float | int) and not math.isfinite(value)):
        raise InputError(
            f"{what} must be finite bounds, got {value}; unbounded searches run away to tall anchors and soft springs"
        )
    if isinstance(value, str) or hasattr(value, "m_as"):
        for unit in _UNITS:
            try:
                return float(units.scalar_si(value, unit, what)), unit if unit != "1" else ""
            except UnitError:
                continue
        raise UnitError(f"{what} must be bounds in one of {', '.join(_UNITS)}, got {value!r}")
    single = units.scalar_si(value, "1", what)
    if not isinstance(single, float):
        raise InputTypeError(f"{what} must be bounds that are single values, got {value!r}")
    return single, ""


def box_of(value: Any, name: str) -> tuple[tuple[float, float], tuple[float, float]]:
    """A box ((x from, x to), (y from, y to)) [m]; None leaves a side open."""
    try:
        (left, right), (bottom, top) = value
    except (TypeError, ValueError):
        raise InputTypeError(f"{name} must be a box ((x from, x to), (y from, y to)) in m, got {value!r}") from None
    sides = []
    for axis, low, high in (("x", left, right), ("y", bottom, top)):
        ends = (
            -math.inf if low is None else float(units.metre(low, name)),
            math.inf if high is None else float(units.metre(high, name)),
        )
        if not ends[0] < ends[1]:
            raise InputError(f"{name} must be a box with {axis} (lower, higher) m, got {ends}")
        sides.append(ends)
    return sides[0], sides[1]

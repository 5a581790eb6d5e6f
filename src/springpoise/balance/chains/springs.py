"""What is asked of a spring that helps to balance a chain: the bodies it joins, and what is already fixed."""

from __future__ import annotations

from typing import Any, TypeAlias

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError

__all__ = ["ChainSpring", "Place"]

Place: TypeAlias = "float | tuple[float, float] | None"
"""Where an end is on its body: a distance along a line, both coordinates, or None for not fixed yet."""


def _body(value: Any, name: str) -> str:
    if not isinstance(value, str) or not value:
        raise InputTypeError(f"{name} must be the name of a body, such as 'ground' or 'upper', got {value!r}")
    return value


def _first(value: Any) -> str:
    return _body(value, "ChainSpring.first")


def _last(value: Any) -> str:
    return _body(value, "ChainSpring.last")


def _single(value: Any, unit: str, name: str) -> float:
    number = units.scalar_si(value, unit, name)
    if not isinstance(number, float):
        raise InputTypeError(f"{name} must be a single value in {unit}, got {value!r}")
    return number


def _rate(value: Any) -> float | None:
    if value is None:
        return None
    rate = _single(value, "N/m", "ChainSpring.rate")
    if not rate > 0:
        raise InputError(f"ChainSpring.rate must be > 0 N/m, got {rate}")
    return rate


def _place(value: Any, name: str) -> Place:
    if value is None:
        return None
    if isinstance(value, tuple | list):
        x, y = units.metre_pair(value, name)
        if not (isinstance(x, float) and isinstance(y, float)):
            raise InputTypeError(f"{name} must be a distance or (x, y) in m, got {value!r}")
        if x == y == 0.0:
            raise InputError(f"{name} must lie off the joint, got {(x, y)} m; there it turns nothing")
        return x, y
    distance = _single(value, "m", name)
    if distance == 0.0:
        raise InputError(f"{name} must be other than 0 m, got {distance}; at the joint it turns nothing")
    return distance


def _start(value: Any) -> Place:
    return _place(value, "ChainSpring.start")


def _end(value: Any) -> Place:
    return _place(value, "ChainSpring.end")


def _name(value: Any) -> str | None:
    if value is not None and (not isinstance(value, str) or not value):
        raise InputTypeError(f"ChainSpring.name must be a name or None, got {value!r}")
    return value


@attrs.frozen
class ChainSpring:
    """A spring of zero free length between two bodies of a chain, and what of it is fixed already.

    `balance_chain` finds what is None.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A body without a name, a rate that is not positive, an end at the joint itself.

    Examples
    --------
    >>> ChainSpring("ground", "upper", start="100 mm", end="90 mm")
    ChainSpring(first='ground', last='upper', rate=None, start=0.1, end=0.09, name=None)
    """

    first: str = attrs.field(converter=_first)
    """The body nearer to the ground: ``"ground"``, a frame that is carried parallel to it, or a link."""
    last: str = attrs.field(converter=_last)
    """The link farther out."""
    rate: float | None = attrs.field(default=None, converter=_rate, kw_only=True)
    """Spring rate [N/m], > 0; None to find it."""
    start: Place = attrs.field(default=None, converter=_start, kw_only=True)
    """Where it starts on ``first`` [m]; None to find it.

    On the ground and on carried frames: how far straight above the joint at which the chain goes
    on, negative below it, or (x, y) from that joint. On a link: how far from the link's own joint
    along its x axis, more than its length beyond the far joint; or (x, y) in the link's frame.
    """
    end: Place = attrs.field(default=None, converter=_end, kw_only=True)
    """Where it ends on ``last`` [m]: how far from the link's own joint, or (x, y) in its frame; None to find it.

    A distance lies along the link's x axis, negative behind the joint; but where the centre of
    mass lies off that axis, the direction is turned as the balance needs it.
    """
    name: str | None = attrs.field(default=None, converter=_name, kw_only=True)
    """What the spring is called in tables; None for the names of its bodies."""

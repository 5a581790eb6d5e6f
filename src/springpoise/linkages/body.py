"""A body's weight and the points fixed in bodies."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputTypeError

__all__ = ["Body", "Point"]


@attrs.frozen(field_transformer=units.named_fields)
class Body:
    """What gravity pulls on: a mass and where its centre is in the frame of its link.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Negative or non-finite mass, a centre that is not a pair of lengths.

    Examples
    --------
    >>> Body(mass="3.2 kg", com=("410 mm", "20 mm"))
    Body(mass=3.2, com=(0.41, 0.02), name=None)
    """

    mass: Carrier = attrs.field(converter=units.kilogram, validator=units.not_negative)
    """Mass [kg], >= 0."""
    com: tuple[Carrier, ...] = attrs.field(converter=units.metre_place)
    """Centre of mass in the frame of the link [m]: (x, y), or (x, y, z) in space."""
    name: str | None = attrs.field(default=None, kw_only=True)
    """What the body is called in tables; None for not named."""


def _name_of_body(value: Any) -> str:
    if not isinstance(value, str) or not value:
        raise InputTypeError(f"Point.body must be the name of a body, such as 'arm' or 'ground', got {value!r}")
    return value


@attrs.frozen(field_transformer=units.named_fields)
class Point:
    """A point fixed in a body, given in that body's frame.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A body that is not a name, or a position that is not a pair of lengths.

    Examples
    --------
    >>> Point("arm", ("120 mm", 0))
    Point(body='arm', at=(0.12, 0.0))
    """

    body: str = attrs.field(converter=_name_of_body)
    """Name of the body that carries the point, such as ``"ground"`` or ``"arm"``."""
    at: tuple[Carrier, ...] = attrs.field(converter=units.metre_place)
    """Position in the body's frame [m]: (x, y), or (x, y, z) in space."""

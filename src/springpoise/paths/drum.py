"""A drum that turns with its body, to which a cable is tied."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Point

__all__ = ["Drum"]


def _centre(value: Any) -> Point:
    if not isinstance(value, Point):
        raise InputTypeError(f"Drum.centre must be a Point, got {value!r}")
    return value


def _sense(value: Any) -> str:
    if value not in ("cw", "ccw"):
        raise InputError(f"Drum.turn must be 'cw' or 'ccw', got {value!r}")
    return str(value)


@attrs.frozen(field_transformer=units.named_fields)
class Drum:
    """A round drum, fixed to a body, at the end of a cable that is tied to its rim.

    It differs from a disc in that it takes cable up as its body turns. The cable lies on the rim
    from where it arrives to the tie, less than one turn. Unwound past the tie, it runs straight to
    it, as long as the drum does not stand in the way.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A radius that is not positive, an unknown turn, a centre that is not a point.
    """

    centre: Point = attrs.field(converter=_centre)
    """Centre, fixed in the body that the drum turns with."""
    radius: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Radius at which the middle of the cable runs [m], > 0."""
    turn: str = attrs.field(converter=_sense, kw_only=True)
    """Sense in which the cable runs round the drum on its way from first to last point: ``"cw"`` or ``"ccw"``."""
    tie: Carrier = attrs.field(converter=units.radian, kw_only=True)
    """Direction from the centre to where the cable is tied, in the body's frame [rad]."""

    @property
    def sense(self) -> float:
        """+1 where the cable runs round counter-clockwise, -1 where clockwise."""
        return 1.0 if self.turn == "ccw" else -1.0

    @property
    def is_frictionless(self) -> bool:
        """True: the cable does not slide on a drum to which it is tied."""
        return True

    @property
    def tie_point(self) -> Point:
        """Where the cable is tied."""
        xp = namespace(self.tie)
        x, y = self.centre.at
        return Point(self.centre.body, (x + self.radius * xp.cos(self.tie), y + self.radius * xp.sin(self.tie)))

"""A spring or cable that runs straight from one point to another."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, distance
from springpoise.errors import InputTypeError
from springpoise.linkages.body import Point
from springpoise.linkages.protocol import AppliedForce, Linkage

__all__ = ["Straight"]


def _first(value: Any) -> Point:
    return _point(value, "Straight.first")


def _last(value: Any) -> Point:
    return _point(value, "Straight.last")


def _point(value: Any, name: str) -> Point:
    if not isinstance(value, Point):
        raise InputTypeError(f"{name} must be a Point, got {value!r}")
    return value


@attrs.frozen(field_transformer=units.named_fields)
class Straight:
    """The straight line between two points, each fixed in a body.

    Where the two points coincide the length is zero and the pull has no direction; the results
    are the limits there, never NaN.

    Raises
    ------
    InputTypeError
        An end that is not a ``Point``.

    Examples
    --------
    >>> from springpoise.linkages import Arm, Body
    >>> path = Straight(Point("ground", (0, "0.3 m")), Point("arm", ("0.4 m", 0)))
    >>> path.length(Arm(Body(1.0, (0.4, 0))), 0.0)
    0.5
    """

    first: Point = attrs.field(converter=_first)
    """One end."""
    last: Point = attrs.field(converter=_last)
    """The other end."""

    @property
    def ends(self) -> tuple[Point, Point]:
        """The two points between which the spring itself lies."""
        return self.first, self.last

    def _vector(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        first, last = linkage.position(self.first, q), linkage.position(self.last, q)
        return tuple(b - a for a, b in zip(first, last, strict=True))

    def length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """Distance of the two points [m]."""
        return distance(*self._vector(linkage, q))

    def gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the derivative of the length [m/rad]."""
        vector = self._vector(linkage, q)
        length = distance(*vector)
        first, last = linkage.jacobian(self.first, q), linkage.jacobian(self.last, q)
        rates = []
        for start, end in zip(first, last, strict=True):
            grown = vector[0] * (end[0] - start[0])
            for component, a, b in zip(vector[1:], start[1:], end[1:], strict=True):
                grown = grown + component * (b - a)
            rates.append(grown / length)
        return tuple(rates)

    def pulls(self, linkage: Linkage, q: Carrier) -> tuple[AppliedForce, ...]:
        """Forces on the two points for one newton of tension [1]: towards each other."""
        vector = self._vector(linkage, q)
        length = distance(*vector)
        towards = tuple(component / length for component in vector)
        return AppliedForce(self.first, towards), AppliedForce(self.last, tuple(-component for component in towards))

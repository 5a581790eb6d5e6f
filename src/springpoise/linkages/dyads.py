"""Pairs of bodies that close a loop."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any, NamedTuple

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import ALMOST_NOTHING, Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Point
from springpoise.linkages.frames import Frame, Rate, divisor
from springpoise.linkages.link import Link

__all__ = ["Assembled", "Dyad", "SliderDyad", "one_of_two"]

ROUNDING = 1e-12
"""Part of the links' lengths by which a loop may fail to close and still counts as closed: a dead point is one [1]."""


class Assembled(NamedTuple):
    """A closed loop at some pose."""

    first: Frame
    last: Frame
    joint: tuple[Carrier, Carrier]  # ground coordinates of the joint between the two
    missing: Carrier  # m by which the bodies are too short or too long to meet; not positive where they meet
    spread: Carrier  # sine of the angle between the bodies: 0 at a dead point


def _placed_by_loop(instance: object, attribute: attrs.Attribute[Any], link: Any) -> None:
    """Validator: a link that says nothing about its joint."""
    name = f"{type(instance).__name__}.{attribute.name}"
    if not isinstance(link, Link):
        raise InputTypeError(f"{name} must be a Link, got {link!r}")
    plain = {"joint": "revolute", "skew": 0.0, "pivot": None, "follows": None}
    for field, value in plain.items():
        if not (type(getattr(link, field)) is type(value) and getattr(link, field) == value):
            raise InputError(
                f"{name} must have no {field} of its own, got {getattr(link, field)!r} for {link.name!r}; "
                "the loop says where it is"
            )


def _with_length(instance: object, attribute: attrs.Attribute[Any], link: Link) -> None:
    """Validator: a link that reaches from joint to joint."""
    _placed_by_loop(instance, attribute, link)
    if isinstance(link.length, float | np.ndarray) and not np.all(link.length > 0):
        raise InputError(
            f"Link.length must be > 0 m for {type(instance).__name__}.{attribute.name}, got {link.length} for {link.name!r}"
        )


def one_of_two(instance: object, attribute: attrs.Attribute[Any], branch: Any) -> None:
    """Validator: +1 or -1."""
    if isinstance(branch, bool) or branch not in (1, -1):
        raise InputError(f"{type(instance).__name__}.{attribute.name} must be +1 or -1, got {branch!r}")


def _between(value: Any) -> tuple[Point, Point]:
    points = tuple(value) if isinstance(value, tuple | list) else ()
    if len(points) != 2 or not all(isinstance(point, Point) for point in points):
        raise InputTypeError(f"Dyad.between must be two Points, got {value!r}")
    return points[0], points[1]


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Dyad:
    """Two links, joined to each other and each to a point of an earlier body, by revolute joints.

    Each link's frame has its origin at the earlier body and its x axis towards the joint between
    the two, which is its far joint.

    Raises
    ------
    InputError, InputTypeError
        A link without a length, ends that are not two points, an unknown branch.
    """

    first: Link = attrs.field(validator=_with_length)
    """The link on the first point."""
    last: Link = attrs.field(validator=_with_length)
    """The link on the second point."""
    between: tuple[Point, Point] = attrs.field(converter=_between)
    """The two points of earlier bodies."""
    branch: int = attrs.field(default=1, validator=one_of_two)
    """+1 where the joint between the links lies to the left of the way from first to second point, -1 to the right."""

    @property
    def links(self) -> tuple[Link, Link]:
        """Both links."""
        return self.first, self.last

    def assembled(self, frames: Mapping[str, Frame]) -> Assembled:
        """Both frames, from the frames of earlier bodies."""
        start, end = (frames[point.body].at(point.at) for point in self.between)
        l1, l2 = self.first.length, self.last.length
        dx, dy = end.x - start.x, end.y - start.y
        square = dx * dx + dy * dy + ALMOST_NOTHING
        xp = namespace(square, l1, l2)
        reach = xp.sqrt(square)
        missing = _missing(xp.maximum(reach - (l1 + l2), xp.abs(l1 - l2) - reach), l1 + l2)
        # Where the two points coincide, links of equal length may point anywhere.
        fits = xp.logical_and(missing <= 0.0, reach > ROUNDING * (l1 + l2))
        along = 0.5 + 0.5 * ((l1 - l2) * (l1 + l2)) / square
        aside = 0.25 * (((l1 + l2) * (l1 + l2) / square - 1.0) * (1.0 - (l1 - l2) * (l1 - l2) / square))
        across = self.branch * xp.sqrt(xp.where(fits, xp.maximum(aside, 0.0), math.nan))
        x = start.x + along * dx - across * dy
        y = start.y + along * dy + across * dx
        ax, ay, bx, by = x - start.x, y - start.y, x - end.x, y - end.y
        cross = ax * by - ay * bx
        turning = divisor(cross)
        rates = []
        for one, other in zip(start.rates, end.rates, strict=True):
            # The joint keeps its distance from both points: two equations for its velocity.
            p, q = ax * one.x + ay * one.y, bx * other.x + by * other.y
            rates.append(((p * by - q * ay) / turning, (q * ax - p * bx) / turning))
        first = _swung(start, ax, ay, l1, rates)
        last = _swung(end, bx, by, l2, rates)
        return Assembled(first, last, (x, y), missing, cross / (l1 * l2))


def _missing(length: Carrier, size: Carrier) -> Carrier:
    """The length by which links of that size fail to meet, not positive where it is mere rounding."""
    xp = namespace(length, size)
    return xp.where(length > ROUNDING * size, length, xp.minimum(length, 0.0))


def _swung(pivot: Frame, ax: Carrier, ay: Carrier, length: Carrier, rates: list[tuple[Carrier, Carrier]]) -> Frame:
    """The frame of a link from a point of an earlier body towards (ax, ay), whose far end moves by ``rates``."""
    turns = [
        (ax * (y - own.y) - ay * (x - own.x)) / (length * length)
        for (x, y), own in zip(rates, pivot.rates, strict=True)
    ]
    moved = tuple(Rate(own.x, own.y, turn) for own, turn in zip(pivot.rates, turns, strict=True))
    return Frame(pivot.x, pivot.y, ax / length, ay / length, moved)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class SliderDyad:
    """A coupler on a point of an earlier body, and a slider at its far end that runs on a line.

    The slider's frame has its origin at the joint with the coupler and its x axis along the line.

    Raises
    ------
    InputError, InputTypeError
        A coupler without a length, ends that are not points, an unknown branch.
    """

    first: Link = attrs.field(validator=_with_length)
    """The coupler."""
    last: Link = attrs.field(validator=_placed_by_loop)
    """The slider; its length does not count."""
    start: Point
    """Where the coupler is joined to an earlier body."""
    guide: Point
    """A point of the line, fixed in the body that carries the line."""
    direction: Carrier = attrs.field(default=0.0, converter=units.radian)
    """Direction of the line in that body's frame [rad]."""
    branch: int = attrs.field(default=1, validator=one_of_two)
    """+1 where the slider lies ahead of the coupler's start along the line, -1 behind it."""

    def __attrs_post_init__(self) -> None:
        for name in ("start", "guide"):
            if not isinstance(getattr(self, name), Point):
                raise InputTypeError(f"SliderDyad.{name} must be a Point, got {getattr(self, name)!r}")

    @property
    def links(self) -> tuple[Link, Link]:
        """Coupler and slider."""
        return self.first, self.last

    @property
    def between(self) -> tuple[Point, Point]:
        """The points of earlier bodies on which coupler and line sit."""
        return self.start, self.guide

    def assembled(self, frames: Mapping[str, Frame]) -> Assembled:
        """Both frames, from the frames of earlier bodies."""
        start = frames[self.start.body].at(self.start.at)
        xp = namespace(self.direction)
        unmoved = (0.0,) * len(start.rates)
        line = frames[self.guide.body].at(self.guide.at).turned(xp.cos(self.direction), xp.sin(self.direction), unmoved)
        dx, dy = start.x - line.x, start.y - line.y
        foot = dx * line.cos + dy * line.sin
        height = dy * line.cos - dx * line.sin
        length = self.first.length
        xp = namespace(height, length)
        missing = _missing(xp.abs(height) - length, length)
        square = xp.maximum((length - height) * (length + height), 0.0)
        run = self.branch * xp.sqrt(xp.where(missing <= 0.0, square, math.nan))
        along = divisor(run)
        way = foot + run
        ax, ay = run * line.cos + height * line.sin, run * line.sin - height * line.cos
        slides = []
        for one, other in zip(start.rates, line.rates, strict=True):
            # Velocity of the slider's place on the line, seen from the coupler's start, has no part along the coupler
            # but what the sliding adds.
            px, py = other.x - other.turn * way * line.sin, other.y + other.turn * way * line.cos
            slides.append(((one.x - px) * ax + (one.y - py) * ay) / along)
        last = line.slid(way, tuple(slides))
        first = _swung(start, ax, ay, length, [(rate.x, rate.y) for rate in last.rates])
        return Assembled(first, last, (last.x, last.y), missing, run / length)

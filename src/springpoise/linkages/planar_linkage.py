"""Planar linkages with loops."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Point
from springpoise.linkages.dyads import Dyad, SliderDyad, one_of_two
from springpoise.linkages.frames import GROUND
from springpoise.linkages.link import Link
from springpoise.linkages.members import Member, MemberLinkage

__all__ = ["FiveBar", "FourBar", "PlanarLinkage"]

Unreachable = Literal["error", "nan"]


def _members(value: Any) -> tuple[Member, ...]:
    items = value if isinstance(value, Sequence) and not isinstance(value, str) else (value,)
    for item in items:
        if not isinstance(item, Link | Dyad | SliderDyad):
            raise InputTypeError(f"PlanarLinkage.parts must be Links, Dyads and SliderDyads, got {item!r}")
    if not items:
        raise InputError("PlanarLinkage.parts must be at least one Link, got none")
    return tuple(items)


def _error_or_nan(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    """Validator: what to do at a pose that cannot be."""
    if value not in ("error", "nan"):
        raise InputError(f"{type(instance).__name__}.{attribute.name} must be 'error' or 'nan', got {value!r}")


def _crank(instance: object, attribute: attrs.Attribute[Any], link: Any) -> None:
    """Validator: a driven link with a length, whose pivot the linkage states."""
    name = f"{type(instance).__name__}.{attribute.name}"
    if not isinstance(link, Link):
        raise InputTypeError(f"{name} must be a Link, got {link!r}")
    if link.joint != "revolute" or link.follows is not None or link.pivot is not None:
        raise InputError(
            f"{name} must turn by itself on a pivot that the {type(instance).__name__} states, got {link.name!r} with a "
            "pivot, a coupling or a prismatic joint; build others as a PlanarLinkage"
        )
    if isinstance(link.length, float | np.ndarray) and not np.all(link.length > 0):
        raise InputError(f"Link.length must be > 0 m for {name}, got {link.length} for {link.name!r}")


@attrs.frozen(field_transformer=units.named_fields)
class PlanarLinkage(MemberLinkage):
    """Links on driven joints, and dyads that close loops, each built on earlier bodies.

    Raises
    ------
    InputError, InputTypeError
        Members of the wrong kind, names that occur twice, a member on a body that is unknown or
        comes later.
    """

    parts: tuple[Member, ...] = attrs.field(converter=_members)
    """Links and dyads, in the order in which they are built one on another."""
    unreachable: Unreachable = attrs.field(default="error", validator=_error_or_nan, kw_only=True)
    """What a mechanism does at a pose where a loop cannot close: ``"error"``, or ``"nan"`` for NaN results."""

    def __attrs_post_init__(self) -> None:
        self._check()

    @property
    def members(self) -> tuple[Member, ...]:
        """The parts."""
        return self.parts


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class FourBar(MemberLinkage):
    """A four-bar linkage: crank at the ground's origin, coupler, rocker at a second ground pivot.

    ``q`` is the crank's angle. The coupler's frame has its origin at the crank's far joint, the
    rocker's at the second pivot; the x axes of both run towards the joint between them.

    Raises
    ------
    InputError, InputTypeError
        Something that is not a link, a link without a length, an unknown branch.
    """

    crank: Link = attrs.field(validator=_crank)
    """The driven link, at the ground's origin."""
    coupler: Link
    """The link between crank and rocker."""
    rocker: Link
    """The link on the second pivot."""
    second_pivot: tuple[Carrier, Carrier] = attrs.field(converter=units.metre_pair)
    """Ground coordinates of the rocker's pivot [m]."""
    branch: int = attrs.field(default=1, validator=one_of_two)
    """+1 where the joint of coupler and rocker lies to the left of the way from crank to second pivot, -1 to the right."""
    unreachable: Unreachable = attrs.field(default="error", validator=_error_or_nan)
    """What a mechanism does at a pose where the loop cannot close: ``"error"``, or ``"nan"`` for NaN results."""

    def __attrs_post_init__(self) -> None:
        self._check()

    @property
    def members(self) -> tuple[Member, ...]:
        """The crank, and coupler and rocker as a dyad."""
        crank = attrs.evolve(self.crank, pivot=Point(GROUND, (0.0, 0.0)))
        ends = Point(crank.name, (crank.length, 0.0)), Point(GROUND, self.second_pivot)
        return crank, Dyad(first=self.coupler, last=self.rocker, between=ends, branch=self.branch)

    def closable(self) -> tuple[tuple[float, float], ...]:
        """Ranges of the crank angle in which the loop closes, within a turn from the ground line [rad].

        One range, or two where the crank can pass neither dead point; the ends are dead points.
        None where the lengths never meet; a full turn for a crank that goes round.

        Raises
        ------
        InputError
            Lengths that are arrays, or a second pivot on the first.
        """
        sizes = (self.crank.length, self.coupler.length, self.rocker.length, self.crank.skew, *self.second_pivot)
        if not all(isinstance(size, float) for size in sizes):
            raise InputError("FourBar.closable must be of one linkage, got lengths that are arrays")
        ground = math.hypot(*self.second_pivot)
        if ground == 0.0:
            raise InputError("FourBar.second_pivot must lie away from the crank's pivot, got (0.0, 0.0) m")
        line = math.atan2(self.second_pivot[1], self.second_pivot[0]) - self.crank.skew
        l1, l2, l3 = self.crank.length, self.coupler.length, self.rocker.length

        def cosine(distance: float) -> float:
            return float((l1 * l1 + ground * ground - distance * distance) / (2.0 * l1 * ground))

        # The distance from crank end to second pivot grows with the angle away from the ground line.
        nearest, farthest = cosine(abs(l2 - l3)), cosine(l2 + l3)
        if nearest < -1.0 or farthest > 1.0:
            return ()
        low = 0.0 if nearest >= 1.0 else math.acos(nearest)
        high = math.pi if farthest <= -1.0 else math.acos(farthest)
        if low == 0.0:
            return ((line - high, line + high),)
        if high == math.pi:
            return ((line + low, line + 2.0 * math.pi - low),)
        return (line - high, line - low), (line + low, line + high)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class FiveBar(MemberLinkage):
    """A five-bar linkage: two cranks on the ground, and two links that join their ends.

    ``q`` is (first crank's angle, second crank's angle), both from the ground's x axis. With the
    second crank and its coupler as a parallelogram this is the arm whose forearm is driven from
    the base.

    Raises
    ------
    InputError, InputTypeError
        Something that is not a link, a link without a length, an unknown branch.
    """

    first_crank: Link = attrs.field(validator=_crank)
    """The crank at the ground's origin."""
    second_crank: Link = attrs.field(validator=_crank)
    """The crank at the second pivot."""
    first_coupler: Link
    """The link on the first crank's end."""
    second_coupler: Link
    """The link on the second crank's end."""
    second_pivot: tuple[Carrier, Carrier] = attrs.field(default=(0.0, 0.0), converter=units.metre_pair)
    """Ground coordinates of the second crank's pivot [m]; both may share the origin."""
    branch: int = attrs.field(default=1, validator=one_of_two)
    """+1 where the joint of the couplers lies to the left of the way from first to second crank end, -1 to the right."""
    unreachable: Unreachable = attrs.field(default="error", validator=_error_or_nan)
    """What a mechanism does at a pose where the loop cannot close: ``"error"``, or ``"nan"`` for NaN results."""

    def __attrs_post_init__(self) -> None:
        self._check()

    @property
    def members(self) -> tuple[Member, ...]:
        """Both cranks, and the couplers as a dyad."""
        first = attrs.evolve(self.first_crank, pivot=Point(GROUND, (0.0, 0.0)))
        second = attrs.evolve(self.second_crank, pivot=Point(GROUND, self.second_pivot))
        ends = Point(first.name, (first.length, 0.0)), Point(second.name, (second.length, 0.0))
        return first, second, Dyad(first=self.first_coupler, last=self.second_coupler, between=ends, branch=self.branch)

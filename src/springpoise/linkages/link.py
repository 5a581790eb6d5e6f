"""One link of a chain or loop: its body, its length, its joint."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Literal, TypeAlias

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages.body import Body, Point

__all__ = ["Coupling", "Joint", "Link", "bodies_of", "coupling_of"]

Joint: TypeAlias = Literal["revolute", "prismatic"]


def bodies_of(value: Any, name: str) -> tuple[Body, ...]:
    """None, one body or several, as a tuple."""
    items = () if value is None else (value,) if isinstance(value, Body) else value
    if not isinstance(items, Sequence) or isinstance(items, str) or not all(isinstance(b, Body) for b in items):
        raise InputTypeError(f"{name} must be a Body or a sequence of them, got {value!r}")
    return tuple(items)


def _name(value: Any) -> str:
    if not isinstance(value, str) or not value:
        raise InputTypeError(f"Link.name must be a name, got {value!r}")
    if value == "ground" or value.endswith(" carried"):
        raise InputError(
            f"Link.name must not be 'ground' or end with ' carried', got {value!r}; these name other bodies"
        )
    return value


def _bodies(value: Any) -> tuple[Body, ...]:
    return bodies_of(value, "Link.bodies")


def _carried(value: Any) -> tuple[Body, ...] | None:
    return None if value is None else bodies_of(value, "Link.carried")


def _joint(value: Any) -> Joint:
    if value not in ("revolute", "prismatic"):
        raise InputError(f"Link.joint must be 'revolute' or 'prismatic', got {value!r}")
    return "prismatic" if value == "prismatic" else "revolute"


def _ratios(value: Any) -> tuple[tuple[str, Any], ...]:
    pairs = tuple(value.items()) if isinstance(value, Mapping) else tuple(value)
    if not pairs:
        raise InputError("Coupling.ratios must follow at least one joint, got none")
    for pair in pairs:
        if not (isinstance(pair, tuple | list) and len(pair) == 2 and isinstance(pair[0], str)):
            raise InputTypeError(f"Coupling.ratios must be link names and ratios, got {value!r}")
    return tuple((name, units.number(ratio, f"Coupling.ratios[{name!r}]")) for name, ratio in pairs)


def _offset(value: Any) -> Any:
    """A travel of either kind."""
    if not (isinstance(value, str) or hasattr(value, "m_as")):
        return units.number(value, "Coupling.offset")
    try:
        return units.radian(value, "Coupling.offset")
    except UnitError:
        return units.metre(value, "Coupling.offset")


def _pivot(value: Any) -> Point | None:
    if value is not None and not isinstance(value, Point):
        raise InputTypeError(f"Link.pivot must be a Point, got {value!r}")
    return value


@attrs.frozen(field_transformer=units.named_fields)
class Coupling:
    """A joint that follows others: its travel is a sum of ratios times theirs, and an offset.

    A belt from the ground makes ratio -1; a differential adds two joints up. Torque is mapped so
    that no power is lost.
    """

    ratios: tuple[tuple[str, Carrier], ...] = attrs.field(converter=_ratios)
    """Names of the followed links and their ratios [1, or m/rad, rad/m, between joints of two kinds]."""
    offset: Carrier = attrs.field(default=0.0, converter=_offset, kw_only=True)
    """Travel where the followed joints stand at zero [rad, or m]."""


def coupling_of(value: Any, name: str) -> Coupling | None:
    """None, a coupling, or link names with ratios, as a coupling."""
    if value is None or isinstance(value, Coupling):
        return value
    if isinstance(value, Mapping):
        return Coupling(value)
    raise InputTypeError(f"{name} must be a Coupling or link names with ratios, got {value!r}")


def _coupling(value: Any) -> Coupling | None:
    return coupling_of(value, "Link.follows")


@attrs.frozen(field_transformer=units.named_fields)
class Link:
    """A link: one rigid body with the joint that it hangs on.

    Its frame's origin is at that joint, its x axis runs along the link. Its far joint is at
    ``(length, 0)``.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A name that is taken by the library, something that is not a body, a negative length, an
        unknown joint.
    """

    name: str = attrs.field(converter=_name)
    """Name of the link's body, for points; not ``"ground"``."""
    bodies: tuple[Body, ...] = attrs.field(default=(), converter=_bodies)
    """What is heavy in the link's frame: a body, or several, or none."""
    length: Carrier = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative, kw_only=True)
    """Distance from the link's own joint to its far joint along its x axis [m], >= 0."""
    joint: Joint = attrs.field(default="revolute", converter=_joint, kw_only=True)
    """``"revolute"``, an angle in rad, or ``"prismatic"``, a way in m along the parent's x axis."""
    skew: Carrier = attrs.field(default=0.0, converter=units.radian, kw_only=True)
    """Angle from the parent's x axis to the link's at joint zero [rad]; a prismatic joint slides along the skewed axis."""
    carried: tuple[Body, ...] | None = attrs.field(default=None, converter=_carried, kw_only=True)
    """What is heavy in the frame at the far joint that a parallelogram or belt keeps parallel to the ground.

    None where there is no such frame; an empty sequence for a massless one. Points of it are
    fixed in the body ``"NAME carried"``.
    """
    pivot: Point | None = attrs.field(default=None, converter=_pivot, kw_only=True)
    """Where its joint sits on an earlier body; None for the far end of the link before, or the ground's origin."""
    follows: Coupling | None = attrs.field(default=None, converter=_coupling, kw_only=True)
    """How the joint follows others; None for a joint that is moved by itself."""

    @property
    def carried_name(self) -> str:
        """Name of the carried frame's body, for points."""
        return f"{self.name} carried"

    @property
    def mass(self) -> Carrier:
        """Mass of the link's own bodies [kg]."""
        return sum(body.mass for body in self.bodies)

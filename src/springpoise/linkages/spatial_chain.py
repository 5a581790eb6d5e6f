"""Links in space, on joints with any axis."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from typing import Any, Literal, TypeAlias

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, joints_of, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Body, Point
from springpoise.linkages.frames import GROUND
from springpoise.linkages.link import Coupling, bodies_of, coupling_of
from springpoise.linkages.protocol import PointMass
from springpoise.linkages.spatial_frames import (
    IDENTITY,
    ORIGIN,
    Pose,
    Vector,
    added,
    cross,
    is_zero_vector,
    multiplied,
    plus,
    scaled,
    times,
    transposed,
    turned_about_z,
)
from springpoise.linkages.spatial_layout import Layout, MovingLink, Seat, layout_of

__all__ = ["SpatialChain", "SpatialLink"]

SpatialJoint: TypeAlias = Literal["revolute", "prismatic", "fixed"]


def _link_name(value: Any) -> str:
    if not isinstance(value, str) or not value or value == GROUND:
        raise InputTypeError(f"SpatialLink.name must be a name other than 'ground', got {value!r}")
    return value


def _bodies(value: Any) -> tuple[Body, ...]:
    return bodies_of(value, "SpatialLink.bodies")


def _parent(value: Any) -> str | None:
    if value is not None and not isinstance(value, str):
        raise InputTypeError(f"SpatialLink.parent must be the name of a link or 'ground', got {value!r}")
    return value


def _joint(value: Any) -> Any:
    if value not in ("revolute", "prismatic", "fixed"):
        raise InputError(f"SpatialLink.joint must be 'revolute', 'prismatic' or 'fixed', got {value!r}")
    return value


def _axis(value: Any) -> tuple[Carrier, Carrier, Carrier]:
    x, y, z = units.triple(value, "1", "SpatialLink.axis")
    square = x * x + y * y + z * z
    if isinstance(square, float | np.ndarray) and not np.all(square > 1e-18):
        raise InputError(f"SpatialLink.axis must have a length > 0, got {(x, y, z)}")
    if isinstance(square, float) and abs(square - 1.0) < 1e-15:  # a unit vector stays as it is, digit for digit
        return x, y, z
    size = namespace(square).sqrt(square)
    return x / size, y / size, z / size


def _coupling(value: Any) -> Coupling | None:
    return coupling_of(value, "SpatialLink.follows")


@attrs.frozen(field_transformer=units.named_fields)
class SpatialLink:
    """A link in space with the joint that it hangs on.

    At joint zero its frame stands at ``origin`` in the parent's frame, turned by ``roll_pitch_yaw``.
    A link on a fixed joint stays there: it is part of its parent, with a frame of its own.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A name that is taken, something that is not a body, an axis of no length, an unknown
        joint, limits in the wrong order, or limits or a coupling on a fixed joint.
    """

    name: str = attrs.field(converter=_link_name)
    """Name of the link's body, for points; not ``"ground"``."""
    bodies: tuple[Body, ...] = attrs.field(default=(), converter=_bodies)
    """What is heavy in the link's frame, with centres (x, y, z): a body, or several, or none."""
    parent: str | None = attrs.field(default=None, converter=_parent, kw_only=True)
    """Name of the link it hangs on, or ``"ground"``; None for the link before, or the ground for the first."""
    origin: tuple[Carrier, Carrier, Carrier] = attrs.field(
        default=(0.0, 0.0, 0.0), converter=units.metre_triple, kw_only=True
    )
    """Where the joint sits in the parent's frame (x, y, z) [m]."""
    roll_pitch_yaw: tuple[Carrier, Carrier, Carrier] = attrs.field(
        default=(0.0, 0.0, 0.0), converter=units.radian_triple, kw_only=True
    )
    """Turn of the frame at joint zero: about the parent's x, then y, then z axis [rad]."""
    axis: tuple[Carrier, Carrier, Carrier] = attrs.field(
        default=(0.0, 0.0, 1.0), converter=_axis, eq=units.comparable, kw_only=True
    )
    """Direction of the joint's axis in the link's frame [1]; any length but zero, kept as a unit vector."""
    joint: SpatialJoint = attrs.field(default="revolute", converter=_joint, kw_only=True)
    """``"revolute"``, an angle about the axis in rad, ``"prismatic"``, a way along it in m, or ``"fixed"``."""
    limits: tuple[float, float] | None = attrs.field(default=None, kw_only=True)
    """Range of the joint (from, to) [rad, or m for a prismatic joint]; None for not given."""
    follows: Coupling | None = attrs.field(default=None, converter=_coupling, kw_only=True)
    """How the joint follows others; None for a joint that is moved by itself."""

    def __attrs_post_init__(self) -> None:
        if self.joint == "fixed" and not (self.limits is None and self.follows is None):
            raise InputError(
                f"SpatialLink.joint must move to have limits or follow others, got 'fixed' for {self.name!r}"
            )
        if self.limits is not None:
            unit = "m" if self.joint == "prismatic" else "rad"
            low, high = units.pair(self.limits, unit, "SpatialLink.limits")
            if isinstance(low, float) and isinstance(high, float) and not low <= high:
                raise InputError(
                    f"SpatialLink.limits must be (lower, higher) {unit}, got {(low, high)} for {self.name!r}"
                )
            object.__setattr__(self, "limits", (low, high))  # the unit depends on the joint, so no converter knows it

    @property
    def is_driven(self) -> bool:
        """Whether its joint is moved by itself: neither fixed nor coupled to others."""
        return self.joint != "fixed" and self.follows is None


def _links(value: Any) -> tuple[SpatialLink, ...]:
    items = (value,) if isinstance(value, SpatialLink) else value
    if not isinstance(items, Sequence) or isinstance(items, str) or not all(isinstance(i, SpatialLink) for i in items):
        raise InputTypeError(f"SpatialChain.links must be a sequence of SpatialLinks, got {value!r}")
    return tuple(items)


@attrs.frozen(field_transformer=units.named_fields)
class SpatialChain:
    """Links in space, each on an earlier one; branches are allowed.

    The ground's z axis points up; gravity is (0, 0, -g) unless told otherwise. Points have three
    coordinates. Positive joint travel turns counter-clockwise seen against the axis, or slides
    along it. Springs run ``Straight`` between any two bodies; cables over discs and bearing loads
    are for planar linkages only.

    Raises
    ------
    InputError, InputTypeError
        No link, names that occur twice, a parent that is unknown or comes later, a coupling that
        follows an unknown joint, a body or point without three coordinates.

    Examples
    --------
    >>> from springpoise.linkages import Body
    >>> chain = SpatialChain([
    ...     SpatialLink("column", axis=(0, 0, 1)),
    ...     SpatialLink("upper", Body(2.0, (0.16, 0, 0)), origin=(0, 0, "0.3 m"), axis=(0, -1, 0)),
    ... ])
    >>> [round(c, 12) for c in chain.position(Point("upper", (0.32, 0, 0)), (0.0, 1.5707963267948966))]
    [0.0, 0.0, 0.62]
    """

    links: tuple[SpatialLink, ...] = attrs.field(converter=_links)
    """The links, each after its parent."""
    _layout: Layout = attrs.field(init=False, eq=False, repr=False)

    def __attrs_post_init__(self) -> None:
        if not self.links:
            raise InputError("SpatialChain.links must be at least one SpatialLink, got none")
        driven, known, parents = set(self.joint_names), {GROUND}, self._parents()
        counts = Counter(link.name for link in self.links)
        for link, parent in zip(self.links, parents, strict=True):
            name = link.name
            if counts[name] > 1:
                raise InputError(f"SpatialChain.links must have different names, got {name!r} twice")
            if parent not in known:
                when = "comes later" if parent in counts else "is unknown"
                raise InputError(
                    f"SpatialLink.parent must be an earlier link or 'ground', got {parent!r}, which {when}, for {name!r}"
                )
            known.add(name)
        if not driven:
            raise InputError("SpatialChain.links must have a joint that is moved by itself, got none")
        for link in self.links:
            for followed, _ in link.follows.ratios if link.follows else ():
                if followed not in driven:
                    raise InputError(
                        f"Coupling.ratios must follow joints that are moved by themselves ({', '.join(self.joint_names)}), "
                        f"got {followed!r} for {link.name!r}"
                    )
            for body in link.bodies:
                if len(body.com) != 3:
                    raise InputError(
                        f"Body.com must have three coordinates in m on a SpatialLink, got {body.com} on {link.name!r}"
                    )
        object.__setattr__(self, "_layout", layout_of(self.links, parents))

    @property
    def dimensions(self) -> int:
        """Coordinates of a point: 3."""
        return 3

    @property
    def joint_names(self) -> tuple[str, ...]:
        """Names of the links whose joints are moved by themselves, in the order of ``q``."""
        return tuple(link.name for link in self.links if link.is_driven)

    @property
    def joint_count(self) -> int:
        """Number of joints that are moved by themselves."""
        return sum(link.is_driven for link in self.links)

    @property
    def joint_units(self) -> tuple[str, ...]:
        """Unit of each joint's travel, ``"rad"`` or ``"m"``, in the order of ``q``."""
        return tuple("m" if link.joint == "prismatic" else "rad" for link in self.links if link.is_driven)

    @property
    def frames(self) -> tuple[str, ...]:
        """Names of the bodies that points can be fixed in."""
        return GROUND, *(link.name for link in self.links)

    @property
    def pivots(self) -> tuple[str, ...]:
        """Names of the joints whose bearing loads are known: none in space."""
        return ()

    @property
    def limits(self) -> tuple[tuple[float, float] | None, ...]:
        """Ranges of the joints, in the order of ``q`` [rad, or m]; None where not given.

        ``Mechanism(chain, travel=chain.limits)`` makes them the mechanism's travel.
        """
        return tuple(link.limits for link in self.links if link.is_driven)

    @property
    def masses(self) -> tuple[PointMass, ...]:
        """All bodies as point masses."""
        return tuple(PointMass(body.mass, Point(link.name, body.com)) for link in self.links for body in link.bodies)

    @property
    def mass(self) -> Carrier:
        """Total mass of all bodies [kg]."""
        return sum(mass for mass, _ in self.masses)

    @property
    def tip(self) -> Point:
        """Not known: a link in space has no length.

        Raises
        ------
        InputError
            Always.
        """
        raise InputError("SpatialChain.tip must be given as a Point, got none; write at=Point(link, (x, y, z))")

    def with_body(self, body: Body, frame: str) -> SpatialChain:
        """The same chain with one more body in the frame of one of its links.

        Raises
        ------
        InputError
            A frame that is not that of a link.
        """
        if frame not in (names := [link.name for link in self.links]):
            raise InputError(f"frame must be one of {', '.join(map(repr, names))}, got {frame!r}")
        return attrs.evolve(
            self,
            links=[attrs.evolve(k, bodies=(*k.bodies, body)) if k.name == frame else k for k in self.links],
        )

    def without_body(self, name: str) -> SpatialChain:
        """The same chain without the bodies of that name."""
        return attrs.evolve(
            self,
            links=[attrs.evolve(k, bodies=tuple(b for b in k.bodies if b.name != name)) for k in self.links],
        )

    def position(self, point: Point, q: Carrier) -> Vector:
        """Ground coordinates (x, y, z) of ``point`` [m]; ``q`` is of shape (..., n), or a tuple of n components."""
        seat, at = self._seated(point)
        return self._standing(q, seat.link)[seat.link].place(at)

    def jacobian(self, point: Point, q: Carrier) -> tuple[Vector, ...]:
        """For each joint, the derivative (dx, dy, dz) of the position [m/rad, or 1 for a prismatic joint]."""
        seat, at = self._seated(point)
        poses = self._standing(q, seat.link)
        place = poses[seat.link].place(at)
        totals: list[Vector] = [ORIGIN] * self.joint_count
        for index, link in enumerate(self._layout.moving):
            if index not in poses:
                continue
            origin, (x, y, z) = poses[index]
            axis = x[2], y[2], z[2]
            move = axis if link.slides else cross(axis, plus(place, scaled(-1.0, origin)))
            for joint, ratio in link.follows:
                totals[joint] = plus(totals[joint], scaled(ratio, move))
        return tuple(totals)

    def gravity_torques(self, q: Carrier, gravity: Sequence[Carrier]) -> tuple[Carrier, ...]:
        """For each joint, the torque of all weights [N·m]; ``gravity`` (gx, gy, gz) in m/s².

        Gravity is turned outwards from link to link, first moments are turned inwards.
        """
        moving, travels = self._layout.moving, self._travels(q)
        turns = [_turn(link, travel) for link, travel in zip(moving, travels, strict=True)]
        parents = {link.parent for link in moving}
        pulls: dict[int, Vector] = {-1: (gravity[0], gravity[1], gravity[2])}  # gravity in each link's frame
        at_zero: list[Vector] = []  # the same in the frame at joint zero
        for index, (link, turn) in enumerate(zip(moving, turns, strict=True)):
            pull = times(transposed(link.pose.rotation), pulls[link.parent])
            at_zero.append(pull)
            if index in parents:
                pulls[index] = pull if turn is None else times(transposed(turn), pull)
        moments = [link.moment for link in moving]
        # Of the kind and shape of q, also where nothing varies, as on slides at right angles.
        totals: list[Carrier] = [0.0 * travel for travel in joints_of(q, self.joint_count)]
        for index in reversed(range(len(moving))):
            link, turn, pull = moving[index], turns[index], at_zero[index]
            moment = moments[index] if turn is None else times(turn, moments[index])
            if link.slides:
                moment = plus(moment, (0.0, 0.0, multiplied(link.mass, travels[index])))
                torque = multiplied(link.mass, pull[2])
            else:
                torque = cross(moment, pull)[2]
            for joint, ratio in link.follows:
                totals[joint] = added(totals[joint], multiplied(ratio, torque))
            if link.parent >= 0 and not is_zero_vector(moment):
                moments[link.parent] = plus(moments[link.parent], times(link.pose.rotation, moment))
        return tuple(totals)

    def _parents(self) -> list[str]:
        before = [GROUND, *(link.name for link in self.links)]
        return [before[i] if link.parent is None else link.parent for i, link in enumerate(self.links)]

    def _seated(self, point: Point) -> tuple[Seat, Vector]:
        """The moving link that carries a point, and the point in that link's frame."""
        seat = self._layout.seats.get(point.body)
        if seat is None:
            raise InputError(f"Point.body must be one of {', '.join(map(repr, self.frames))}, got {point.body!r}")
        if len(point.at) != 3:
            raise InputError(
                f"Point.at must have three coordinates in m on a SpatialChain, got {point.at} on {point.body!r}"
            )
        return seat, seat.pose.place((point.at[0], point.at[1], point.at[2]))

    def _travels(self, q: Carrier) -> list[Carrier]:
        """Travel of each moving link's joint [rad, or m]."""
        driven = joints_of(q, count := self.joint_count)
        if count > 1 and (len(driven) if isinstance(q, tuple | list) else q.shape[-1]) != count:
            raise InputError(f"q must be of shape (..., {count}) for {count} joints, got {q!r}")
        travels = []
        for link in self._layout.moving:
            travel = link.offset
            for joint, ratio in link.follows:
                travel = added(travel, multiplied(ratio, driven[joint]))
            travels.append(travel)
        return travels

    def _standing(self, q: Carrier, until: int) -> dict[int, Pose]:
        """Poses in the ground of a moving link and of all that it hangs on."""
        wanted = self._layout.ancestors(until)
        poses: dict[int, Pose] = {-1: Pose(ORIGIN, IDENTITY)}
        for index, (link, travel) in enumerate(zip(self._layout.moving, self._travels(q), strict=True)):
            if index not in wanted:
                continue
            origin, rotation = poses[link.parent].then(link.pose)
            if link.slides:
                axis = rotation[0][2], rotation[1][2], rotation[2][2]
                poses[index] = Pose(plus(origin, scaled(travel, axis)), rotation)
            else:
                xp = namespace(travel)
                poses[index] = Pose(origin, turned_about_z(rotation, xp.cos(travel), xp.sin(travel)))
        return poses


def _turn(link: MovingLink, travel: Carrier) -> Any:
    """Rotation of a link out of its frame at joint zero; None for one that slides."""
    if link.slides:
        return None
    xp = namespace(travel)
    return turned_about_z(IDENTITY, xp.cos(travel), xp.sin(travel))

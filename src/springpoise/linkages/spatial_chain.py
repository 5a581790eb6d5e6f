"""Links in space, on joints with any axis."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any, Literal

import attrs

from springpoise import units
from springpoise.carriers import Carrier, joints_of
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Body, Point
from springpoise.linkages.frames import GROUND
from springpoise.linkages.link import Coupling, bodies_of, coupling_of
from springpoise.linkages.protocol import PointMass
from springpoise.linkages.spatial_frames import (
    IDENTITY,
    Pose,
    Vector,
    about,
    cross,
    dot,
    from_roll_pitch_yaw,
    plus,
    product,
    times,
)

__all__ = ["SpatialChain", "SpatialLink"]

SpatialJoint = Literal["revolute", "prismatic"]


def _link_name(value: Any) -> str:
    if not isinstance(value, str) or not value or value == GROUND:
        raise InputTypeError(f"SpatialLink.name must be a name other than 'ground', got {value!r}")
    return value


def _bodies(value: Any) -> tuple[Body, ...]:
    return bodies_of(value, "SpatialLink.bodies")


def _joint(value: Any) -> str:
    if value not in ("revolute", "prismatic"):
        raise InputError(f"SpatialLink.joint must be 'revolute' or 'prismatic', got {value!r}")
    return str(value)


def _axis(value: Any) -> tuple[float, float, float]:
    components = units.triple(value, "1", "SpatialLink.axis")
    size = math.sqrt(sum(c * c for c in components))
    if not size > 1e-9:
        raise InputError(f"SpatialLink.axis must have a length > 0, got {tuple(components)}")
    if abs(size - 1.0) < 1e-15 * 4:  # a unit vector stays as it is, digit for digit
        size = 1.0
    return components[0] / size, components[1] / size, components[2] / size


def _coupling(value: Any) -> Coupling | None:
    return coupling_of(value, "SpatialLink.follows")


@attrs.frozen(field_transformer=units.named_fields)
class SpatialLink:
    """A link in space with the joint that it hangs on.

    At joint zero its frame stands at ``origin`` in the parent's frame, turned by ``roll_pitch_yaw``.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A name that is taken, something that is not a body, an axis of no length, an unknown joint.
    """

    name: str = attrs.field(converter=_link_name)
    """Name of the link's body, for points; not ``"ground"``."""
    bodies: tuple[Body, ...] = attrs.field(default=(), converter=_bodies)
    """What is heavy in the link's frame, with centres (x, y, z): a body, or several, or none."""
    parent: str | None = attrs.field(default=None, kw_only=True)
    """Name of the link it hangs on, or ``"ground"``; None for the link before, or the ground for the first."""
    origin: tuple[float, float, float] = attrs.field(
        default=(0.0, 0.0, 0.0), converter=units.metre_triple, kw_only=True
    )
    """Where the joint sits in the parent's frame (x, y, z) [m]."""
    roll_pitch_yaw: tuple[float, float, float] = attrs.field(
        default=(0.0, 0.0, 0.0), converter=units.radian_triple, kw_only=True
    )
    """Turn of the frame at joint zero: about the parent's x, then y, then z axis [rad]."""
    axis: tuple[float, float, float] = attrs.field(default=(0.0, 0.0, 1.0), converter=_axis, kw_only=True)
    """Direction of the joint's axis in the link's frame [1]; any length but zero, kept as a unit vector."""
    joint: SpatialJoint = attrs.field(default="revolute", converter=_joint, kw_only=True)
    """``"revolute"``, an angle about the axis in rad, or ``"prismatic"``, a way along it in m."""
    limits: tuple[float, float] | None = attrs.field(default=None, kw_only=True)
    """Range of the joint (from, to) [rad, or m]; None for not given."""
    follows: Coupling | None = attrs.field(default=None, converter=_coupling, kw_only=True)
    """How the joint follows others; None for a joint that is moved by itself."""


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
    along it.

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

    def __attrs_post_init__(self) -> None:
        if not self.links:
            raise InputError("SpatialChain.links must be at least one SpatialLink, got none")
        names = [link.name for link in self.links]
        driven, known = self.joint_names, {GROUND}
        for name, parent in zip(names, self._parents(), strict=True):
            if names.count(name) > 1:
                raise InputError(f"SpatialChain.links must have different names, got {name!r} twice")
            if parent not in known:
                when = "comes later" if parent in names else "is unknown"
                raise InputError(
                    f"SpatialLink.parent must be an earlier link or 'ground', got {parent!r}, which {when}, for {name!r}"
                )
            known.add(name)
        if not driven:
            raise InputError("SpatialChain.links must have a joint that is moved by itself, got couplings only")
        for link in self.links:
            for followed, _ in link.follows.ratios if link.follows else ():
                if followed not in driven:
                    raise InputError(
                        f"Coupling.ratios must follow joints that are moved by themselves ({', '.join(driven)}), "
                        f"got {followed!r} for {link.name!r}"
                    )
            for body in link.bodies:
                if len(body.com) != 3:
                    raise InputError(
                        f"Body.com must have three coordinates in m on a SpatialLink, got {body.com} on {link.name!r}"
                    )

    @property
    def dimensions(self) -> int:
        """Coordinates of a point: 3."""
        return 3

    @property
    def joint_names(self) -> tuple[str, ...]:
        """Names of the links whose joints are moved by themselves, in the order of ``q``."""
        return tuple(link.name for link in self.links if link.follows is None)

    @property
    def joint_count(self) -> int:
        """Number of joints that are moved by themselves."""
        return len(self.joint_names)

    @property
    def frames(self) -> tuple[str, ...]:
        """Names of the bodies that points can be fixed in."""
        return GROUND, *(link.name for link in self.links)

    @property
    def limits(self) -> tuple[tuple[float, float] | None, ...]:
        """Ranges of the joints, in the order of ``q`` [rad, or m]; None where not given."""
        return tuple(link.limits for link in self.links if link.follows is None)

    @property
    def masses(self) -> tuple[PointMass, ...]:
        """All bodies as point masses."""
        return tuple(PointMass(body.mass, Point(link.name, body.com)) for link in self.links for body in link.bodies)

    @property
    def mass(self) -> Carrier:
        """Total mass of all bodies [kg]."""
        return sum(mass for mass, _ in self.masses)

    def with_body(self, body: Body, frame: str) -> SpatialChain:
        """The same chain with one more body in one of its frames."""
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
        return self._standing(q, self._checked(point))[0][point.body].place(_coordinates(point))

    def jacobian(self, point: Point, q: Carrier) -> tuple[Vector, ...]:
        """For each joint, the derivative (dx, dy, dz) of the position [m/rad, or 1 for a prismatic joint]."""
        poses, axes = self._standing(q, self._checked(point))
        place = poses[point.body].place(_coordinates(point))
        carriers = self._ancestors(point.body)
        moves = {
            link.name: _move(link, axes[link.name], poses[link.name], place)
            for link in self.links
            if link.name in carriers
        }
        return tuple(self._gathered(moves))

    def gravity_torques(self, q: Carrier, gravity: Sequence[Carrier]) -> tuple[Carrier, ...]:
        """For each joint, the torque of all weights [N·m]: links outwards of a joint counted as one body."""
        poses, axes = self._standing(q, None)
        masses: dict[str, Carrier] = {link.name: 0.0 for link in self.links}
        moments: dict[str, Vector] = {link.name: (0.0, 0.0, 0.0) for link in self.links}
        torques: dict[str, Vector] = {}
        weight: Vector = (gravity[0], gravity[1], gravity[2])
        parents = dict(zip((link.name for link in self.links), self._parents(), strict=True))
        for link in reversed(self.links):
            name = link.name
            own = _lumped(link)
            if own is not None:
                masses[name] = masses[name] + own[0]
                place = poses[name].place(own[1])
                moments[name] = plus(moments[name], _scaled(own[0], place))
            mass, moment = masses[name], moments[name]
            if not (isinstance(mass, float) and mass == 0.0):
                if link.joint == "prismatic":
                    torques[name] = _scaled(mass, weight)
                else:
                    lever = plus(moment, _scaled(-mass, poses[name].origin))
                    torques[name] = cross(lever, weight)
                parent = parents[name]
                if parent != GROUND:
                    masses[parent] = masses[parent] + mass
                    moments[parent] = plus(moments[parent], moment)
        single: dict[str, Vector] = {name: (dot(axes[name], torque), 0.0, 0.0) for name, torque in torques.items()}
        return tuple(total[0] for total in self._gathered(single))

    def _gathered(self, moves: Mapping[str, Vector]) -> list[Vector]:
        """What each joint that is moved by itself does, its followers' share included."""
        totals: dict[str, Vector] = {name: (0.0, 0.0, 0.0) for name in self.joint_names}
        for link in self.links:
            move = moves.get(link.name)
            if move is None:
                continue
            if link.follows is None:
                totals[link.name] = plus(totals[link.name], move)
            else:
                for followed, ratio in link.follows.ratios:
                    totals[followed] = plus(totals[followed], _scaled(ratio, move))
        return list(totals.values())

    def _parents(self) -> list[str]:
        before = [GROUND, *(link.name for link in self.links)]
        return [link.parent or before[i] for i, link in enumerate(self.links)]

    def _ancestors(self, name: str) -> set[str]:
        """A link and all that it hangs on."""
        parents = dict(zip((link.name for link in self.links), self._parents(), strict=True))
        found = set()
        while name != GROUND:
            found.add(name)
            name = parents[name]
        return found

    def _checked(self, point: Point) -> str:
        if point.body not in self.frames:
            raise InputError(f"Point.body must be one of {', '.join(map(repr, self.frames))}, got {point.body!r}")
        return point.body

    def _standing(self, q: Carrier, until: str | None) -> tuple[dict[str, Pose], dict[str, Vector]]:
        """Poses of the links and directions of their axes; with ``until`` those that it hangs on only."""
        driven = dict(zip(self.joint_names, joints_of(q, self.joint_count), strict=True))
        wanted = None if until is None else self._ancestors(until)
        poses: dict[str, Pose] = {GROUND: Pose((0.0, 0.0, 0.0), IDENTITY)}
        axes: dict[str, Vector] = {}
        for link, parent in zip(self.links, self._parents(), strict=True):
            if wanted is not None and link.name not in wanted:
                continue
            fixed = product(poses[parent].rotation, from_roll_pitch_yaw(*link.roll_pitch_yaw))
            origin = poses[parent].place(link.origin)
            travel = _travel(link, driven)
            axes[link.name] = times(fixed, link.axis)
            if link.joint == "prismatic":
                poses[link.name] = Pose(plus(origin, _scaled(travel, axes[link.name])), fixed)
            else:
                poses[link.name] = Pose(origin, product(fixed, about(link.axis, travel)))
        return poses, axes


def _coordinates(point: Point) -> Vector:
    if len(point.at) != 3:
        raise InputError(
            f"Point.at must have three coordinates in m on a SpatialChain, got {point.at} on {point.body!r}"
        )
    return point.at[0], point.at[1], point.at[2]


def _travel(link: SpatialLink, driven: Mapping[str, Carrier]) -> Carrier:
    if link.follows is None:
        return driven[link.name]
    travel: Carrier = link.follows.offset
    for name, ratio in link.follows.ratios:
        travel = travel + ratio * driven[name]
    return travel


def _move(link: SpatialLink, axis: Vector, pose: Pose, place: Vector) -> Vector:
    """How a place moves for one rad (or m) of a link's joint."""
    if link.joint == "prismatic":
        return axis
    lever = plus(place, _scaled(-1.0, pose.origin))
    return cross(axis, lever)


def _lumped(link: SpatialLink) -> tuple[Carrier, Vector] | None:
    """All bodies of a link as one: mass and centre."""
    if not link.bodies:
        return None
    if len(link.bodies) == 1:
        body = link.bodies[0]
        return body.mass, (body.com[0], body.com[1], body.com[2])
    mass = sum(body.mass for body in link.bodies)
    if isinstance(mass, float) and mass == 0.0:
        return None
    centre = [sum(b.mass * b.com[axis] for b in link.bodies) / mass for axis in range(3)]
    return mass, (centre[0], centre[1], centre[2])


def _scaled(factor: Carrier, vector: Vector) -> Vector:
    return (
        dot((factor, 0.0, 0.0), (vector[0], 0.0, 0.0)),
        dot((factor, 0.0, 0.0), (vector[1], 0.0, 0.0)),
        dot((factor, 0.0, 0.0), (vector[2], 0.0, 0.0)),
    )

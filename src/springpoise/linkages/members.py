"""What all planar linkages share: frames made one from another, in the order of their members."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any, TypeAlias

import attrs
import numpy as np

from springpoise.carriers import Carrier, is_zero, joints_of, namespace
from springpoise.errors import InputError
from springpoise.linkages.body import Body, Point
from springpoise.linkages.dyads import Assembled, Dyad, SliderDyad
from springpoise.linkages.frames import GROUND, Frame, still
from springpoise.linkages.link import Link
from springpoise.linkages.posed import Posed
from springpoise.linkages.protocol import AppliedForce, PointMass
from springpoise.linkages.statics import pivot_forces

__all__ = ["Member", "MemberLinkage"]

Member: TypeAlias = Link | Dyad | SliderDyad
"""A link on a joint, or two links that close a loop."""


class MemberLinkage:
    """Base of the planar linkages: its classes say what their members are, and all else follows."""

    __slots__ = ()

    @property
    def members(self) -> tuple[Member, ...]:
        """Links and dyads, each on earlier ones."""
        raise TypeError(f"{type(self).__name__} must say what its members are")

    @property
    def links(self) -> tuple[Link, ...]:
        """All links, those of dyads included, in order."""
        return tuple(link for member in self.members for link in _links_of(member))

    @property
    def joint_names(self) -> tuple[str, ...]:
        """Names of the links whose joints are moved by themselves, in the order of ``q``."""
        return tuple(m.name for m in self.members if isinstance(m, Link) and m.follows is None)

    @property
    def joint_units(self) -> tuple[str, ...]:
        """Unit of each component of ``q``: ``"rad"``, or ``"m"`` for a prismatic joint."""
        unit = {"revolute": "rad", "prismatic": "m"}
        return tuple(unit[m.joint] for m in self.members if isinstance(m, Link) and m.follows is None)

    @property
    def joint_count(self) -> int:
        """Number of joints that are moved by themselves."""
        return len(self.joint_names)

    @property
    def frames(self) -> tuple[str, ...]:
        """Names of the bodies that points can be fixed in."""
        names = [GROUND]
        for link in self.links:
            names += [link.name] if link.carried is None else [link.name, link.carried_name]
        return tuple(names)

    @property
    def pivots(self) -> tuple[str, ...]:
        """Names of the joints in the order in which `pivot_forces` gives their loads.

        A link's joint has the link's name; the joint between the links of a dyad has both names.
        """
        names: list[str] = []
        for member in self.members:
            if isinstance(member, Link):
                names.append(member.name)
            else:
                names += [member.first.name, f"{member.first.name} and {member.last.name}", member.last.name]
        return tuple(names)

    @property
    def masses(self) -> tuple[PointMass, ...]:
        """All bodies as point masses."""
        found = []
        for link in self.links:
            found += [PointMass(body.mass, Point(link.name, body.com)) for body in link.bodies]
            found += [PointMass(body.mass, Point(link.carried_name, body.com)) for body in link.carried or ()]
        return tuple(found)

    @property
    def mass(self) -> Carrier:
        """Total mass of all bodies [kg]."""
        return sum(mass for mass, _ in self.masses)

    @property
    def tip(self) -> Point:
        """The far end of the last link."""
        return Point(self.links[-1].name, (self.links[-1].length, 0.0))

    def with_body(self, body: Body, frame: str) -> Any:
        """The same linkage with one more body in one of its frames.

        Raises
        ------
        InputError
            A frame that the linkage does not have, or the ground.
        """
        moving = self.frames[1:]
        if frame not in moving:
            raise InputError(f"frame must be one of {', '.join(map(repr, moving))}, got {frame!r}")
        return self._changed(lambda link: _with_body(link, body, frame))

    def without_body(self, name: str) -> Any:
        """The same linkage without the bodies of that name."""
        return self._changed(lambda link: _without_body(link, name))

    def position(self, point: Point, q: Carrier) -> tuple[Carrier, ...]:
        """Ground coordinates (x, y) of ``point`` [m]; ``q`` is of shape (..., n), or a tuple of n components."""
        return self._frame(point, q).place(point.at)

    def jacobian(self, point: Point, q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """For each joint, the derivative (dx, dy) of the position [m/rad, or 1 for a prismatic joint]."""
        return self._frame(point, q).moves(point.at)

    def missing(self, q: Carrier) -> Carrier:
        """Length by which the worst loop fails to close [m]: not positive where all close, -inf without loops."""
        worst: Carrier = -math.inf
        for loop in self.standing(q)[1].values():
            # A loop on one that does not close is nowhere and lacks NaN, which must not hide what the other lacks.
            lacking = loop.missing
            xp = namespace(worst, lacking)
            kept = xp.where(worst > 0.0, worst, worst + 0.0 * lacking)
            worst = xp.where(lacking > worst, lacking, kept)
        return worst

    def dead_point_margin(self, q: Carrier) -> Carrier:
        """Least sine of the angle between two links of a loop [1]: 0 at a dead point, 1 farthest from it.

        For a slider, of the angle between the coupler and the normal of its line. NaN where a loop
        does not close.
        """
        least: Carrier = 1.0
        for loop in self.standing(q)[1].values():
            spread = namespace(loop.spread).abs(loop.spread)
            least = namespace(least, spread).minimum(least, spread)
        return least

    def pivot_forces(self, applied: Sequence[AppliedForce], q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """For each of `pivots`, the force (x, y) on what hangs on it so that all stands still under ``applied`` [N].

        For a dyad: the forces on its first link by the earlier body and by the last link, and on
        its last link by the other earlier body. Drives act as couples and add nothing.
        """
        frames, loops = self.standing(q)
        return pivot_forces(self.members, frames, loops, applied)

    def _check(self) -> None:
        """Refuses members that do not fit together; called when a linkage is made."""
        owner = type(self).__name__
        names = list(self.frames)
        for name in names:
            if names.count(name) > 1:
                raise InputError(f"{owner} must have bodies of different names, got {name!r} twice")
        driven, known = self.joint_names, {GROUND}
        if not driven:
            raise InputError(f"{owner} must have a joint that is moved by itself, got none")
        for member in self.members:
            for link in _links_of(member):
                for followed, _ in link.follows.ratios if link.follows else ():
                    if followed not in driven:
                        raise InputError(
                            f"Coupling.ratios must follow joints that are moved by themselves ({', '.join(driven)}), "
                            f"got {followed!r} for {link.name!r}"
                        )
            bases = (member.pivot,) if isinstance(member, Link) else member.between
            for base in bases:
                if base is not None and base.body not in known:
                    when = "comes later" if base.body in names else "is unknown"
                    raise InputError(
                        f"{owner} must build each member on earlier bodies ({', '.join(sorted(known))}), "
                        f"got {base.body!r}, which {when}, for {_links_of(member)[0].name!r}"
                    )
                if base is not None and len(base.at) != 2:
                    raise InputError(
                        f"Point.at must be (x, y) in m on a {owner}, got {base.at} for {_links_of(member)[0].name!r}"
                    )
            for link in _links_of(member):
                for body in (*link.bodies, *(link.carried or ())):
                    if len(body.com) != 2:
                        raise InputError(f"Body.com must be (x, y) in m on a {owner}, got {body.com} on {link.name!r}")
                known |= {link.name} if link.carried is None else {link.name, link.carried_name}

    def posed(self, q: Carrier) -> Posed:
        """The linkage for many questions at this very ``q``: its bodies are placed once, not for each point."""
        return Posed(self, q)

    def named(self, point: Point) -> str:
        """Name of the body that a point is fixed in.

        Raises
        ------
        InputError
            The linkage has no such body, or the point is one of space.
        """
        if point.body not in self.frames:
            raise InputError(f"Point.body must be one of {', '.join(map(repr, self.frames))}, got {point.body!r}")
        if len(point.at) != 2:
            raise InputError(f"Point.at must be (x, y) in m on a {type(self).__name__}, got {point.at}")
        return point.body

    def _frame(self, point: Point, q: Carrier) -> Frame:
        body = self.named(point)
        return self.standing(q, until=body)[0][body]

    def standing(self, q: Carrier, until: str | None = None) -> tuple[dict[str, Frame], dict[str, Assembled]]:
        """Frames by name and loops by the name of their first link, as far as a body."""
        driven = dict(zip(self.joint_names, self._joints(q), strict=True))
        frames, loops = {GROUND: still(self.joint_count)}, {}
        base = frames[GROUND]  # where a link without a stated pivot sits
        for member in self.members:
            if until in frames:
                break
            if isinstance(member, Link):
                sits = base if member.pivot is None else frames[member.pivot.body].at(member.pivot.at)
                frames[member.name] = _joined(sits, member, *_travel(member, driven))
            else:
                loop = member.assembled(frames)
                loops[member.first.name] = loop
                frames[member.first.name], frames[member.last.name] = loop.first, loop.last
            for link in _links_of(member):
                base = frames[link.name].at((link.length, 0.0))
                if link.carried is not None:
                    frames[link.carried_name] = base.level()
        return frames, loops

    def _joints(self, q: Carrier) -> tuple[Carrier, ...]:
        count = self.joint_count
        if count > 1:
            given = (len(q),) if isinstance(q, tuple | list) else getattr(q, "shape", ())[-1:]
            if given != (count,):
                raise InputError(
                    f"q must be of shape (..., {count}) or {count} components for {count} joints, got {q!r}"
                )
            if isinstance(q, np.ndarray) and q.ndim == 1:
                return tuple(q.tolist())  # floats, not NumPy's scalars, which are neither floats nor arrays
        return joints_of(q, count)

    def _changed(self, change: Any) -> Any:
        """The same linkage with every link changed by a function, wherever its fields hold links."""

        def apply(value: Any) -> Any:
            if isinstance(value, Link):
                return change(value)
            if isinstance(value, Dyad | SliderDyad):
                return attrs.evolve(value, first=change(value.first), last=change(value.last))
            if isinstance(value, tuple):
                return tuple(apply(item) for item in value)
            return value

        fields = attrs.fields(type(self))  # type: ignore[arg-type]
        return attrs.evolve(self, **{field.name: apply(getattr(self, field.name)) for field in fields})  # type: ignore[misc]


def _links_of(member: Member) -> tuple[Link, ...]:
    return (member,) if isinstance(member, Link) else member.links


def _travel(link: Link, driven: dict[str, Carrier]) -> tuple[Carrier, tuple[Carrier, ...]]:
    """Travel of a link's joint, and how it grows with each joint that is moved by itself."""
    if link.follows is None:
        return driven[link.name], tuple(1.0 if name == link.name else 0.0 for name in driven)
    travel: Carrier = link.follows.offset
    ratios = dict(link.follows.ratios)
    for name, ratio in ratios.items():
        travel = travel + ratio * driven[name]
    return travel, tuple(ratios.get(name, 0.0) for name in driven)


def _joined(sits: Frame, link: Link, travel: Carrier, moves: tuple[Carrier, ...]) -> Frame:
    """The frame of a link whose joint sits at the origin of a frame."""
    if link.joint == "prismatic":
        if not is_zero(link.skew):
            xp = namespace(link.skew)
            sits = sits.turned(xp.cos(link.skew), xp.sin(link.skew), (0.0,) * len(moves))
        return sits.slid(travel, moves)
    angle = travel if is_zero(link.skew) else travel + link.skew
    xp = namespace(angle)
    return sits.turned(xp.cos(angle), xp.sin(angle), moves)


def _with_body(link: Link, body: Body, frame: str) -> Link:
    if frame == link.name:
        return attrs.evolve(link, bodies=(*link.bodies, body))
    if frame == link.carried_name and link.carried is not None:
        return attrs.evolve(link, carried=(*link.carried, body))
    return link


def _without_body(link: Link, name: str) -> Link:
    bodies = tuple(body for body in link.bodies if body.name != name)
    carried = None if link.carried is None else tuple(body for body in link.carried if body.name != name)
    return attrs.evolve(link, bodies=bodies, carried=carried)

"""The links of a spatial chain as its formulas see them: what never moves is worked out once.

Links on fixed joints are part of what they are fixed to. Each moving link has a frame of its own
whose z axis is the joint's axis, so that every joint turns about z or slides along z. Of the
masses only sums are kept, and as far inwards as they can go: the part of a first moment that
lies along the axis of a joint does not move with that joint and counts for the link before it,
as does the whole first moment behind a prismatic joint. This leaves the same torques, with the
fewest terms.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, NamedTuple

from springpoise.carriers import Carrier
from springpoise.linkages.frames import GROUND
from springpoise.linkages.spatial_frames import (
    IDENTITY,
    ORIGIN,
    Pose,
    Rotation,
    Vector,
    along,
    from_roll_pitch_yaw,
    is_zero,
    plus,
    product,
    scaled,
    times,
    transposed,
)

if TYPE_CHECKING:
    from springpoise.linkages.spatial_chain import SpatialLink

__all__ = ["Layout", "MovingLink", "Seat", "layout_of"]


class Seat(NamedTuple):
    """Where the frame of a named link stands in the frame of the moving link that carries it."""

    link: int
    """Index of the moving link, -1 for the ground."""
    pose: Pose


class MovingLink(NamedTuple):
    """A link that a joint moves, with all that is fixed to it."""

    parent: int
    """Index of the moving link that it hangs on, -1 for the ground."""
    pose: Pose
    """The joint's frame, z along the axis, in the parent's frame; its own frame at joint zero."""
    slides: bool
    follows: tuple[tuple[int, Carrier], ...]
    """Joints of ``q`` that it follows, with their ratios; itself with 1 where it is moved by itself."""
    offset: Carrier
    mass: Carrier
    """Mass of the link and of all that hangs on it [kg]."""
    moment: Vector
    """What does not depend on ``q`` of their first moment [kg·m], less what counts for the links before."""


class Layout(NamedTuple):
    """Moving links, each after its parent, and where every named frame stands."""

    moving: tuple[MovingLink, ...]
    seats: dict[str, Seat]

    def ancestors(self, link: int) -> set[int]:
        """A moving link and all that it hangs on."""
        found = set()
        while link >= 0:
            found.add(link)
            link = self.moving[link].parent
        return found


def layout_of(links: Sequence[SpatialLink], parents: Sequence[str]) -> Layout:
    """The layout of links that have been checked, each on the parent of that name."""
    driven = {link.name: index for index, link in enumerate(k for k in links if k.is_driven)}
    seats = {GROUND: Seat(-1, Pose(ORIGIN, IDENTITY))}
    joints: list[MovingLink] = []
    masses: list[Carrier] = []
    moments: list[Vector] = []
    for link, parent in zip(links, parents, strict=True):
        base = seats[parent]
        pose = base.pose.then(Pose(link.origin, from_roll_pitch_yaw(*link.roll_pitch_yaw)))
        if link.joint == "fixed":
            seats[link.name] = Seat(base.link, pose)
        else:
            inner = along(link.axis)
            turn, rest = _without_turn_about_z(product(pose.rotation, inner))
            seats[link.name] = Seat(len(joints), Pose(ORIGIN, product(rest, transposed(inner))))
            ratios, offset = _coupling(link, driven)
            joints.append(
                MovingLink(base.link, Pose(pose.origin, turn), link.joint == "prismatic", ratios, offset, 0.0, ORIGIN)
            )
            masses.append(0.0)
            moments.append(ORIGIN)
        carrier, frame = seats[link.name]
        for body in link.bodies if carrier >= 0 else ():
            masses[carrier] = masses[carrier] + body.mass
            centre = frame.place((body.com[0], body.com[1], body.com[2]))
            moments[carrier] = plus(moments[carrier], scaled(body.mass, centre))
    for index in reversed(range(len(joints))):
        moments[index] = _moved_inwards(joints[index], masses, moments, index)
    return Layout(tuple(joint._replace(mass=masses[i], moment=moments[i]) for i, joint in enumerate(joints)), seats)


def _moved_inwards(joint: MovingLink, masses: list[Carrier], moments: list[Vector], index: int) -> Vector:
    """Adds to the parent what does not depend on the joint, and gives the first moment that is left."""
    x, y, z = moments[index]
    stays: Vector = (x, y, z) if joint.slides else (0.0, 0.0, z)
    parent = joint.parent
    if parent >= 0:
        masses[parent] = masses[parent] + masses[index]
        inwards = plus(scaled(masses[index], joint.pose.origin), times(joint.pose.rotation, stays))
        moments[parent] = plus(moments[parent], inwards)
    return ORIGIN if joint.slides else (x, y, 0.0)


def _coupling(link: SpatialLink, driven: dict[str, int]) -> tuple[tuple[tuple[int, Carrier], ...], Carrier]:
    if link.follows is None:
        return ((driven[link.name], 1.0),), 0.0
    return tuple((driven[name], ratio) for name, ratio in link.follows.ratios), link.follows.offset


def _without_turn_about_z(rotation: Rotation) -> tuple[Rotation, Rotation]:
    """``rotation`` as one with fewer terms, times a turn about z, which the link's own frame takes up.

    The turn makes the lower left entry zero, or leaves all as it is where axes stand at right angles.
    """
    entries = [entry for row in rotation for entry in row]
    if not all(isinstance(entry, float) for entry in entries) or all(entry in {0.0, 1.0, -1.0} for entry in entries):
        return rotation, IDENTITY
    (a, b, c), (d, e, f), (g, h, i) = rotation
    if is_zero(g) and is_zero(h):
        if not (is_zero(c) and is_zero(f)):
            return rotation, IDENTITY
        return ((1.0, 0.0, 0.0), (0.0, i, 0.0), (0.0, 0.0, i)), ((a, b, 0.0), (i * d, i * e, 0.0), (0.0, 0.0, 1.0))
    size = math.hypot(g, h)
    cosine, sine = h / size, g / size
    rest: Rotation = ((cosine, -sine, 0.0), (sine, cosine, 0.0), (0.0, 0.0, 1.0))
    turn = product(rotation, transposed(rest))
    return (turn[0], turn[1], (0.0, size, i)), rest

"""Forces in the joints of a planar linkage at rest."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from springpoise.carriers import Carrier
from springpoise.linkages.dyads import Assembled, Dyad, SliderDyad
from springpoise.linkages.frames import GROUND, Frame, divisor
from springpoise.linkages.link import Link
from springpoise.linkages.protocol import AppliedForce

__all__ = ["pivot_forces"]

Force = tuple[Carrier, Carrier]


class _Load:
    """The sum of the forces on one body, and where they act in ground coordinates."""

    def __init__(self) -> None:
        self.forces: list[tuple[Force, Force]] = []  # place, force
        self.couple: Carrier = 0.0

    def add(self, place: Force, force: Force) -> None:
        self.forces.append((place, force))

    def total(self) -> Force:
        return sum(f[0] for _, f in self.forces), sum(f[1] for _, f in self.forces)

    def moment(self, x: Carrier, y: Carrier) -> Carrier:
        return self.couple + sum((px - x) * fy - (py - y) * fx for (px, py), (fx, fy) in self.forces)


def pivot_forces(
    members: Sequence[Link | Dyad | SliderDyad],
    frames: Mapping[str, Frame],
    loops: Mapping[str, Assembled],
    applied: Sequence[AppliedForce],
) -> tuple[Force, ...]:
    """Forces in all joints, from the outermost member inwards; see `MemberLinkage.pivot_forces`.

    A joint that is moved by itself or by others holds its link by a force and a couple, whose
    counterpart acts on the body it stands on; its force is minus all that hangs on it. A dyad is
    held by forces alone, which two moments and the sum determine.
    """
    loads = {name: _Load() for name in frames}
    for at, force in applied:
        loads[at.body].add(frames[at.body].place(at.at), (force[0], force[1]))
    # What is carried parallel to the ground hangs on its link as a force; the parallelogram takes its moment.
    found: list[tuple[Force, ...]] = []
    before: dict[str, str] = {}
    previous = GROUND
    for member in members:
        if isinstance(member, Link):
            before[member.name] = previous if member.pivot is None else member.pivot.body
            previous = member.name
        else:
            previous = member.last.name
    for member in reversed(members):
        for link in (member,) if isinstance(member, Link) else member.links:
            if link.carried is not None:
                frame = frames[link.carried_name]
                loads[link.name].add((frame.x, frame.y), loads[link.carried_name].total())
        if isinstance(member, Link):
            frame, force = frames[member.name], loads[member.name].total()
            base = loads[before[member.name]]
            base.add((frame.x, frame.y), force)
            base.couple = base.couple + loads[member.name].moment(frame.x, frame.y)  # the drive's, on what it stands on
            found.append(((-force[0], -force[1]),))
        else:
            found.append(_dyad(member, frames, loops[member.first.name], loads))
    return tuple(force for forces in reversed(found) for force in forces)


def _dyad(
    member: Dyad | SliderDyad, frames: Mapping[str, Frame], loop: Assembled, loads: dict[str, _Load]
) -> tuple[Force, Force, Force]:
    """Forces by the first point on the first link, by the last link on the first, by the second point on the last."""
    first, last = loads[member.first.name], loads[member.last.name]
    x, y = loop.joint
    f1, f2 = first.total(), last.total()
    ax, ay = loop.first.x - x, loop.first.y - y
    m1 = first.moment(x, y)
    if isinstance(member, SliderDyad):
        # The slider's line holds it across only, wherever along the line: a force along the line's normal, and a couple.
        nx, ny = -loop.last.sin, loop.last.cos
        # a x r1 = -m1, and no force is left along the line: (r1 + f1 + f2) . u = 0
        ux, uy = loop.last.cos, loop.last.sin
        along = -((f1[0] + f2[0]) * ux + (f1[1] + f2[1]) * uy)
        det = divisor(-ay * uy - ax * ux)
        r1x = (-m1 * uy - ax * along) / det
        r1y = (-ay * along + m1 * ux) / det
        across = -((r1x + f1[0] + f2[0]) * nx + (r1y + f1[1] + f2[1]) * ny)
        r2x, r2y = across * nx, across * ny
        line = loads[member.guide.body]
        line.couple = line.couple + last.moment(x, y)
    else:
        bx, by = loop.last.x - x, loop.last.y - y
        m2 = last.moment(x, y)
        # a x r1 = -m1 and b x r2 = -m2 with r2 = -(r1 + f1 + f2)
        right = m2 - (bx * (f1[1] + f2[1]) - by * (f1[0] + f2[0]))
        det = divisor(-ay * bx + ax * by)
        r1x = (-m1 * bx - ax * right) / det
        r1y = (-ay * right - by * m1) / det
        r2x, r2y = -(r1x + f1[0] + f2[0]), -(r1y + f1[1] + f2[1])
    start, guide = member.between
    loads[start.body].add((loop.first.x, loop.first.y), (-r1x, -r1y))
    loads[guide.body].add((loop.last.x, loop.last.y), (-r2x, -r2y))
    return (r1x, r1y), (-(r1x + f1[0]), -(r1y + f1[1])), (r2x, r2y)

"""What is doubtful in a robot description: wrong for statics, or for dynamics only."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Literal, TypeAlias

import attrs
import numpy as np

from springpoise import tables
from springpoise.linkages.urdf_reading import UrdfLink, UrdfRobot

__all__ = ["UrdfFinding", "findings_of", "listed"]

Severity: TypeAlias = Literal["wrong statics", "only dynamics"]

FAR = 5.0
"""A centre of mass farther from its link than this many reaches of the robot is taken for a slip of units [1]."""

MASS_SHARE = 0.05
"""How much of the stated mass may be missing or too much [1]: data sheets round, and leave out cables."""

TRIANGLE = 1e-3
"""How much of the largest principal moment rounding may break the triangle rule by [1]."""


@attrs.frozen
class UrdfFinding:
    """Something in the file that is doubtful; it was read as it stands there."""

    severity: Severity
    """``"wrong statics"``: gravity torques are wrong if it is a slip; ``"only dynamics"``: they are not."""
    link: str
    """Name of the link, or of the robot where it is about the whole."""
    what: str
    """What is doubtful."""


def listed(findings: Sequence[UrdfFinding]) -> str:
    """The findings as a short table."""
    width = max((len(f.link) for f in findings), default=0)
    return "\n".join(f"  {f.severity}  {f.link.ljust(width)}  {f.what}" for f in findings)


def findings_of(robot: UrdfRobot, stated_mass: float | None, expected: Sequence[str]) -> tuple[UrdfFinding, ...]:
    """All findings, those on statics first."""
    found = [UrdfFinding("wrong statics", *item) for item in _on_statics(robot, stated_mass, expected)]
    found += [
        UrdfFinding("only dynamics", link.name, what) for link in robot.links.values() if (what := _on_inertia(link))
    ]
    return tuple(found)


def mass_of(link: UrdfLink) -> float:
    """What a link weighs [kg], 0 where it does not say."""
    return 0.0 if link.inertial is None or link.inertial.mass is None else link.inertial.mass


def _on_statics(robot: UrdfRobot, stated_mass: float | None, expected: Sequence[str]) -> Iterator[tuple[str, str]]:
    carriers = _carriers(robot)
    group_mass: dict[str, float] = {}
    for name, carrier in carriers.items():
        group_mass[carrier] = group_mass.get(carrier, 0.0) + abs(mass_of(robot.links[name]))
    reach = _reach(robot)
    for name, link in robot.links.items():
        moves, inertial = carriers[name] != robot.root, link.inertial
        if inertial is not None and inertial.mass is None:
            yield name, "its <inertial> has no <mass>"
        elif mass_of(link) < 0.0:
            yield name, f"its mass is negative, {tables.number(mass_of(link), 'kg')}, and was left out"
        elif moves and not mass_of(link) and carriers[name] == name and not group_mass[name]:
            yield name, "it moves, but neither it nor anything fixed to it weighs anything"
        elif moves and not mass_of(link) and link.has_shape:
            yield name, "it moves and has a shape, but weighs nothing"
        if inertial is not None and mass_of(link) and reach > 0.0 and (away := math.hypot(*inertial.com)) > FAR * reach:
            yield (
                name,
                f"its centre of mass is {tables.number(away, 'm')} from the link's origin, "
                f"{away / reach:.0f} times the reach of the robot",
            )
    total = sum(max(0.0, mass_of(link)) for link in robot.links.values())
    if stated_mass is not None and abs(total - stated_mass) > MASS_SHARE * stated_mass:
        yield (
            robot.name or robot.root,
            f"the links weigh {tables.number(total, 'kg')} in all, {tables.number(stated_mass, 'kg')} were stated",
        )
    for name in expected:
        if name not in robot.links:
            yield name, "this link was expected and is not in the file"
        elif not mass_of(robot.links[name]):
            yield name, "this link was expected and weighs nothing"


def _carriers(robot: UrdfRobot) -> dict[str, str]:
    """For each link the moved link, or the root, that it is fixed to; itself where a joint moves it."""
    carriers = {robot.root: robot.root}
    for name in robot.links:
        way = []
        here = name
        while here not in carriers:
            way.append(here)
            here = robot.joints[here].parent
        for link in reversed(way):
            joint = robot.joints[link]
            carriers[link] = link if joint.moves else carriers[joint.parent]
    return carriers


def _reach(robot: UrdfRobot) -> float:
    """Longest way from the root to a link along the joints [m], slides run out."""
    reaches = {robot.root: 0.0}
    for name in robot.links:
        way = []
        here = name
        while here not in reaches:
            way.append(here)
            here = robot.joints[here].parent
        for link in reversed(way):
            joint = robot.joints[link]
            run = max(map(abs, joint.limits)) if joint.kind == "prismatic" and joint.limits else 0.0
            reaches[link] = reaches[joint.parent] + math.hypot(*joint.origin) + run
    return max(reaches.values())


def _on_inertia(link: UrdfLink) -> str:
    """What is wrong with the inertia of a link that weighs something; nothing where all is well."""
    if link.inertial is None or not mass_of(link) > 0.0:
        return ""
    if link.inertial.inertia is None:
        return "its <inertial> has no <inertia>"
    xx, xy, xz, yy, yz, zz = link.inertial.inertia
    least, middle, most = (float(v) for v in np.linalg.eigvalsh([[xx, xy, xz], [xy, yy, yz], [xz, yz, zz]]))
    if not least > 0.0:
        return f"its inertia is not positive definite: the least principal moment is {least:.3g} kg*m**2"
    if most - (least + middle) > TRIANGLE * most:
        return f"its principal moments break the triangle rule: {most:.4g} > {least:.4g} + {middle:.4g} kg*m**2"
    return ""

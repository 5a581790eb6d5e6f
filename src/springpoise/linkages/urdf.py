"""Robots from URDF files."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import attrs

from springpoise import tables, units
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Body
from springpoise.linkages.frames import GROUND
from springpoise.linkages.link import Coupling
from springpoise.linkages.spatial_chain import SpatialChain, SpatialLink
from springpoise.linkages.urdf_findings import UrdfFinding, findings_of, listed, mass_of
from springpoise.linkages.urdf_reading import UrdfJoint, UrdfRobot, read_urdf
from springpoise.units import ScalarLike

__all__ = ["UrdfFinding", "UrdfModel", "from_urdf"]


@attrs.frozen
class UrdfModel:
    """A robot that was read from a URDF file, and what is doubtful in the file.

    Examples
    --------
    >>> import pathlib, tempfile
    >>> from springpoise import Mechanism
    >>> text = '''<robot name="lift"><link name="base"/>
    ...   <link name="boom"><inertial><origin xyz="0.3 0 0"/><mass value="2"/></inertial></link>
    ...   <joint name="lift" type="revolute"><parent link="base"/><child link="boom"/>
    ...     <axis xyz="0 -1 0"/><limit lower="-0.5" upper="1.2" effort="9" velocity="1"/></joint></robot>'''
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     path = pathlib.Path(folder, "lift.urdf")
    ...     _ = path.write_text(text)
    ...     model = from_urdf(path, stated_mass="3.5 kg")
    >>> mech = Mechanism(model.chain, travel=model.travel)
    >>> round(mech.gravity_torque(0.0), 6)
    -5.88399
    >>> print(model)
    lift: 2 links, 1 joint, 2.000 kg
      joint  lift  -28.65 deg to 68.75 deg
      wrong statics  lift  the links weigh 2.000 kg in all, 3.500 kg were stated
      only dynamics  boom  its <inertial> has no <inertia>
    """

    name: str
    """Name of the robot."""
    chain: SpatialChain
    """The links; those on fixed joints, and the root link, have frames of their own for points."""
    root: str
    """Name of the root link, which is the ground: points may name it either way."""
    joint_names: tuple[str, ...]
    """Names of the joints in the file that are moved by themselves, in the order of ``q``.

    ``chain.joint_names`` are the names of the links that they move.
    """
    findings: tuple[UrdfFinding, ...]
    """What is doubtful in the file, what counts for statics first. Nothing was mended."""

    @property
    def wrong_statics(self) -> tuple[UrdfFinding, ...]:
        """The findings that make gravity torques wrong."""
        return tuple(finding for finding in self.findings if finding.severity == "wrong statics")

    @property
    def only_dynamics(self) -> tuple[UrdfFinding, ...]:
        """The findings that leave gravity torques right."""
        return tuple(finding for finding in self.findings if finding.severity == "only dynamics")

    @property
    def travel(self) -> tuple[tuple[float, float] | None, ...]:
        """What ``Mechanism(model.chain, travel=model.travel)`` takes: a range for each joint [rad, or m].

        The limits of the file; None for continuous joints.

        Raises
        ------
        InputError
            A joint whose limits are equal, as where both were left out: give its range yourself.
        """
        for name, limits in zip(self.joint_names, self.chain.limits, strict=True):
            if limits is not None and not limits[0] < limits[1]:
                raise InputError(
                    f"UrdfModel.travel must be (lower, higher) for each joint, got {limits} for {name!r}; "
                    "give travel= yourself, or make the joint fixed"
                )
        return self.chain.limits

    def __str__(self) -> str:
        links, joints = len(self.chain.links) + (self.root == GROUND), len(self.joint_names)
        head = (
            f"{self.name or self.root}: {links} links, {joints} joint{'s' * (joints > 1)}, "
            f"{tables.number(float(self.chain.mass), 'kg')}"
        )
        driven = [link for link in self.chain.links if link.is_driven]
        width = max(map(len, self.joint_names))
        rows = [f"  joint  {n.ljust(width)}  {_range(k)}" for n, k in zip(self.joint_names, driven, strict=True)]
        return "\n".join([head, *rows, *([listed(self.findings)] if self.findings else ["  nothing doubtful found"])])


def from_urdf(path: Any, *, stated_mass: ScalarLike | None = None, expected_links: Sequence[str] = ()) -> UrdfModel:
    """The robot of a URDF file as a spatial chain, with its joint limits and what is doubtful in the file.

    Fixed joints make their link part of its parent, mimic joints become couplings, also of one
    another. A mimic joint's own limits do not limit the joint that it follows. Nothing is mended
    and nothing but the file is read: no meshes, no network, no entities, no macros.

    Needs ``pip install springpoise[urdf]``.

    Parameters
    ----------
    path
        The file, of at most 20 MB, UTF-8.
    stated_mass
        What the robot weighs by its data sheet or a scale [kg], base included; None for not known.
    expected_links
        Names of links that must be there and weigh something, such as the tool.

    Returns
    -------
    UrdfModel
        The chain, its travel, and findings in two severities.

    Raises
    ------
    PoiseFileError
        A file that is not a tree of known joints with finite numbers; names file, element, attribute.
    InputError, InputTypeError
        A stated mass that is not > 0 kg; names that are not a sequence.
    ImportError
        The package for reading XML is not installed.

    References
    ----------
    The element names and defaults are those of the Unified Robot Description Format, ROS wiki,
    pages "urdf/XML/link" and "urdf/XML/joint".
    """
    stated = None if stated_mass is None else units.kilogram(stated_mass, "stated_mass")
    if stated is not None and not (isinstance(stated, float) and stated > 0.0):
        raise InputError(f"stated_mass must be > 0 kg, got {stated}")
    names = [expected_links] if isinstance(expected_links, str) else expected_links
    if not isinstance(names, Sequence) or not all(isinstance(name, str) for name in names):
        raise InputTypeError(f"expected_links must be names of links, got {expected_links!r}")
    robot = read_urdf(path)
    joints = [robot.joints[name] for name in _outwards(robot)]
    base = (
        []
        if robot.root == GROUND
        else [SpatialLink(robot.root, _bodies(robot, robot.root), parent=GROUND, joint="fixed")]
    )
    by_name = {joint.name: joint for joint in joints}
    return UrdfModel(
        robot.name,
        SpatialChain([*base, *(_link(robot, joint, by_name) for joint in joints)]),
        robot.root,
        tuple(joint.name for joint in joints if joint.moves and joint.mimic is None),
        findings_of(robot, stated, names),
    )


def _outwards(robot: UrdfRobot) -> Iterator[str]:
    """Names of all links but the root, each after its parent, one branch after the other."""
    children: dict[str, list[str]] = {name: [] for name in robot.links}
    for name, joint in robot.joints.items():
        children[joint.parent].append(name)
    waiting = children[robot.root][::-1]
    while waiting:
        name = waiting.pop()
        yield name
        waiting += children[name][::-1]


def _bodies(robot: UrdfRobot, name: str) -> tuple[Body, ...]:
    link = robot.links[name]
    mass = mass_of(link)
    return (Body(mass, link.inertial.com),) if link.inertial is not None and mass > 0.0 else ()


def _link(robot: UrdfRobot, joint: UrdfJoint, by_name: dict[str, UrdfJoint]) -> SpatialLink:
    return SpatialLink(
        joint.child,
        _bodies(robot, joint.child),
        parent=joint.parent,
        origin=joint.origin,
        roll_pitch_yaw=joint.roll_pitch_yaw,
        axis=joint.axis,
        joint="revolute" if joint.kind == "continuous" else joint.kind,
        limits=joint.limits,
        follows=_coupling(joint, by_name),
    )


def _coupling(joint: UrdfJoint, by_name: dict[str, UrdfJoint]) -> Coupling | None:
    """The joint's own travel by that of a joint that is moved by itself, through all that lie between."""
    mimic, followed = joint.mimic, joint
    if mimic is None:
        return None
    ratio, offset = 1.0, 0.0
    while mimic is not None:
        offset += ratio * mimic.offset
        ratio *= mimic.multiplier
        followed = by_name[mimic.joint]
        mimic = followed.mimic
    return Coupling({followed.child: ratio}, offset=offset)


def _range(link: SpatialLink) -> str:
    if link.limits is None:
        return "no limits"
    show = tables.millimetres if link.joint == "prismatic" else tables.degrees
    return f"{show(link.limits[0])} to {show(link.limits[1])}"

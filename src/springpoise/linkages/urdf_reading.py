"""What a URDF file says, element by element: links and joints as they are written there."""

from __future__ import annotations

import math
import os
import re
import reprlib
from pathlib import Path
from typing import Any, NamedTuple, TypeAlias

from springpoise import units
from springpoise.errors import InputTypeError, PoiseFileError
from springpoise.linkages.frames import GROUND
from springpoise.linkages.spatial_frames import Vector

__all__ = ["Inertial", "Mimic", "UrdfJoint", "UrdfLink", "UrdfRobot", "read_urdf"]

LARGEST = 20_000_000
"""Size beyond which a file is refused [bytes]."""

MOVING = ("revolute", "continuous", "prismatic")
REFUSED = ("planar", "floating")

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")

Element: TypeAlias = Any  # of xml.etree.ElementTree, which is loaded when a file is read


class Inertial(NamedTuple):
    """What a link weighs."""

    mass: float | None
    """Mass [kg]; None where it is not given."""
    com: Vector
    """Centre of mass in the link's frame [m]."""
    inertia: tuple[float, ...] | None
    """ixx, ixy, ixz, iyy, iyz, izz about the centre [kg·m²]; None where not given."""


class UrdfLink(NamedTuple):
    """A link as it is written."""

    name: str
    inertial: Inertial | None
    has_shape: bool
    """Whether it can be seen or touched."""


class Mimic(NamedTuple):
    """How a joint follows another."""

    joint: str
    multiplier: float
    offset: float


class UrdfJoint(NamedTuple):
    """A joint as it is written."""

    name: str
    kind: str
    parent: str
    child: str
    origin: Vector
    roll_pitch_yaw: Vector
    axis: Vector
    limits: tuple[float, float] | None
    mimic: Mimic | None

    @property
    def moves(self) -> bool:
        """Whether it is not fixed."""
        return self.kind != "fixed"


class UrdfRobot(NamedTuple):
    """All links, and all joints by the link that they carry, in the order of the file."""

    name: str
    root: str
    links: dict[str, UrdfLink]
    joints: dict[str, UrdfJoint]


def read_urdf(path: Any) -> UrdfRobot:
    """The robot of a file, checked: one tree of links, every reference known, every number finite.

    Raises
    ------
    PoiseFileError
        Names the file, the element and the attribute.
    """
    return _Reader(path).robot()


class _Reader:
    """Reads one file; knows its name for errors."""

    def __init__(self, path: Any) -> None:
        if not isinstance(path, str | os.PathLike):
            raise InputTypeError(f"path must be the path of a URDF file, got {reprlib.repr(path)}")
        self.file = os.fspath(path)
        self.tree = self._parsed(self._text())

    def error(self, what: str) -> PoiseFileError:
        return PoiseFileError(f"{self.file}: {what}")

    def _text(self) -> str:
        try:
            with Path(self.file).open("rb") as stream:
                raw = stream.read(LARGEST + 1)
        except (OSError, ValueError) as error:  # ValueError: a null character in the path
            raise self.error(f"the file must be readable, got {error}") from error
        if len(raw) > LARGEST:
            raise self.error(f"a URDF file must be of at most {LARGEST // 1_000_000} MB, got more")
        try:
            return raw.decode("utf-8-sig")
        except UnicodeDecodeError as error:
            raise self.error(
                f"a URDF file must be UTF-8 text, got byte {raw[error.start]:#04x} at {error.start}"
            ) from error

    def _parsed(self, text: str) -> Element:
        try:
            from defusedxml import DefusedXmlException
            from defusedxml.ElementTree import ParseError, fromstring
        except ImportError as error:
            raise ImportError(
                "from_urdf must have the package defusedxml to read XML of others, got none; "
                "run pip install springpoise[urdf]"
            ) from error
        try:
            tree = fromstring(text, forbid_dtd=True)
        except DefusedXmlException as error:
            raise self.error(f"a URDF file must not define types or entities, got {error}") from error
        except (ParseError, ValueError) as error:
            raise self.error(f"a URDF file must be XML, got {error}") from error
        if tree.tag != "robot":
            raise self.error(f"the root element must be <robot>, got <{str(tree.tag)[:80]}>")
        for element in tree.iter():
            if isinstance(element.tag, str) and "xacro" in element.tag.partition("}")[0]:
                raise self.error(
                    f"a URDF file must not contain macros, got <xacro:{_local(element)}>; expand them with xacro"
                )
        return tree

    def robot(self) -> UrdfRobot:
        links: dict[str, UrdfLink] = {}
        for element in self.tree.findall("link"):
            link = self._link(element)
            if link.name in links:
                raise self.error(f"links must have different names, got {link.name!r} twice")
            links[link.name] = link
        if not links:
            raise self.error("<robot> must have a <link>, got none")
        joints: dict[str, UrdfJoint] = {}
        names: set[str] = set()
        for element in self.tree.findall("joint"):
            joint = self._joint(element)
            if joint.name in names:
                raise self.error(f"joints must have different names, got {joint.name!r} twice")
            names.add(joint.name)
            for end, link_name in (("parent", joint.parent), ("child", joint.child)):
                if link_name not in links:
                    raise self.error(f"joint {joint.name!r}: {end}.link must be a link of the file, got {link_name!r}")
            if joint.child in joints:
                other = joints[joint.child].name
                raise self.error(f"link {joint.child!r} must hang on one joint, got {other!r} and {joint.name!r}")
            joints[joint.child] = joint
        root = self._root(links, joints)
        if not any(joint.moves and joint.mimic is None for joint in joints.values()):
            raise self.error("<robot> must have a joint that moves by itself, got none")
        if GROUND in links and root != GROUND:
            raise self.error(
                f"link 'ground' must be the root, which stands on the ground, got {root!r} as the root; rename it"
            )
        self._check_mimics(joints)
        return UrdfRobot(self.tree.get("name", ""), root, links, joints)

    def _root(self, links: dict[str, UrdfLink], joints: dict[str, UrdfJoint]) -> str:
        roots = [name for name in links if name not in joints]
        if len(roots) > 1:
            raise self.error(f"links must hang on one root, got {len(roots)}: {', '.join(map(repr, roots[:5]))}")
        hangs = dict.fromkeys(roots, True)
        for name in links:
            way, here = [], name
            while here not in hangs:
                hangs[here] = False
                way.append(here)
                here = joints[here].parent
            if not hangs[here]:
                raise self.error(f"links must hang on a root, got a ring of parents through {here!r}")
            hangs.update(dict.fromkeys(way, True))
        return roots[0]

    def _check_mimics(self, joints: dict[str, UrdfJoint]) -> None:
        by_name = {joint.name: joint for joint in joints.values()}
        good: set[str] = set()
        for joint in by_name.values():
            seen, here = {joint.name}, joint
            while here.mimic is not None and here.name not in good:
                where = f"joint {here.name!r}: mimic.joint must"
                followed = by_name.get(here.mimic.joint)
                if followed is None or not followed.moves:
                    raise self.error(f"{where} be a joint that moves, got {here.mimic.joint!r}")
                if followed.name in seen:
                    raise self.error(f"{where} not lead back to itself, got {followed.name!r}")
                seen.add(followed.name)
                here = followed
            good |= seen

    def _link(self, element: Element) -> UrdfLink:
        name = self._attribute(element, "name", "a <link>")
        where = f"link {name!r}"
        shape = element.find("visual") is not None or element.find("collision") is not None
        inertial = self._only(element, "inertial", where)
        if inertial is None:
            return UrdfLink(name, None, shape)
        mass = self._only(inertial, "mass", where)
        inertia = self._only(inertial, "inertia", where)
        com, _ = self._origin(inertial, where + ", inertial")  # the turn leaves principal moments as they are
        return UrdfLink(
            name,
            Inertial(
                None if mass is None else self._number(mass, "value", where, "kg"),
                com,
                None if inertia is None else tuple(self._number(inertia, k, where, "kg*m**2") for k in _MOMENTS),
            ),
            shape,
        )

    def _joint(self, element: Element) -> UrdfJoint:
        name = self._attribute(element, "name", "a <joint>")
        where = f"joint {name!r}"
        kind = self._attribute(element, "type", where)
        if kind in REFUSED:
            raise self.error(
                f"{where}: type must move along or about one axis, got {kind!r}; use several joints in a row"
            )
        if kind not in (*MOVING, "fixed"):
            raise self.error(f"{where}: type must be one of {', '.join(MOVING)}, fixed, got {kind!r}")
        parent, child = (self._end(element, end, where) for end in ("parent", "child"))
        origin, turn = self._origin(element, where)
        axis: Vector = (1.0, 0.0, 0.0)
        limits = mimic = None
        if kind != "fixed":
            given = self._only(element, "axis", where)
            axis = axis if given is None else self._triple(given, "xyz", where, "1", None)
            if not math.hypot(*axis) > 1e-9:
                raise self.error(f"{where}: axis.xyz must have a length > 0, got {axis}")
            mimic = self._mimic(element, where)
        if kind in {"revolute", "prismatic"}:
            limits = self._limits(element, where, "rad" if kind == "revolute" else "m")
        return UrdfJoint(name, kind, parent, child, origin, turn, axis, limits, mimic)

    def _end(self, element: Element, end: str, where: str) -> str:
        found = self._only(element, end, where)
        if found is None:
            raise self.error(f"{where} must have a <{end}>, got none")
        return self._attribute(found, "link", where)

    def _limits(self, element: Element, where: str, unit: str) -> tuple[float, float]:
        found = self._only(element, "limit", where)
        if found is None:
            raise self.error(f"{where} must have a <limit>, got none; a joint that turns without end is 'continuous'")
        low, high = (self._number(found, end, where, unit, 0.0) for end in ("lower", "upper"))
        if low > high:
            raise self.error(f"{where}: limit.lower must be <= limit.upper in {unit}, got {low:g} and {high:g}")
        return low, high

    def _mimic(self, element: Element, where: str) -> Mimic | None:
        found = self._only(element, "mimic", where)
        if found is None:
            return None
        return Mimic(
            self._attribute(found, "joint", where),
            self._number(found, "multiplier", where, "1", 1.0),
            self._number(found, "offset", where, "rad or m", 0.0),
        )

    def _origin(self, element: Element, where: str) -> tuple[Vector, Vector]:
        found = self._only(element, "origin", where)
        zero: Vector = (0.0, 0.0, 0.0)
        if found is None:
            return zero, zero
        turn = self._triple(found, "rpy", where, "rad", zero)
        if max(map(abs, turn)) > units.DEGREES_SUSPECTED:
            raise self.error(f"{where}: origin.rpy must be within two turns in rad, got {found.get('rpy')!r}; degrees?")
        return self._triple(found, "xyz", where, "m", zero), turn

    def _only(self, element: Element, tag: str, where: str) -> Element:
        found = element.findall(tag)
        if len(found) > 1:
            raise self.error(f"{where} must have one <{tag}>, got {len(found)}")
        return found[0] if found else None

    def _attribute(self, element: Element, name: str, where: str) -> str:
        value = element.get(name)
        if not value:
            own = "" if where.partition(" ")[0] == element.tag or where.startswith("a <") else f"<{element.tag}> of "
            raise self.error(f"{own}{where} must have the attribute {name!r}, got {value!r}")
        return str(value)

    def _number(self, element: Element, name: str, where: str, unit: str, default: float | None = None) -> float:
        text = element.get(name)
        if text is None:
            if default is None:
                raise self.error(f"<{element.tag}> of {where} must have the attribute {name!r}, got None")
            return default
        return self._read(text.strip(), f"{where}: {element.tag}.{name} must be a finite number in {unit}", text)

    def _triple(self, element: Element, name: str, where: str, unit: str, default: Vector | None) -> Vector:
        text = element.get(name)
        if text is None and default is not None:
            return default
        rule = f"{where}: {element.tag}.{name} must be three finite numbers in {unit}"
        words = [] if text is None else text.split()
        if len(words) != 3:
            raise self.error(f"{rule}, got {reprlib.repr(text)}")
        x, y, z = (self._read(word, rule, text) for word in words)
        return x, y, z

    def _read(self, word: str, rule: str, text: Any) -> float:
        value = float(word) if _NUMBER.fullmatch(word) else math.nan
        if not math.isfinite(value):
            hint = "; expand macros with xacro" if "${" in str(text) else ""
            raise self.error(f"{rule}, got {reprlib.repr(text)}{hint}")
        return value


_MOMENTS = ("ixx", "ixy", "ixz", "iyy", "iyz", "izz")


def _local(element: Element) -> str:
    return str(element.tag).rpartition("}")[2]

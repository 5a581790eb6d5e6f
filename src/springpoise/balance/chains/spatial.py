"""Chains in space whose links hang on spherical joints: three revolute joints with a common centre each.

Where all that matters of a link lies on one line through its joint (the next joint, the centre of
mass, the attachments), and all anchors lie straight above the first joint, the energy has the same
terms as that of a chain in a plane, with numbers along the lines in place of complex ones.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from springpoise.balance.chains.forms import Form, Skeleton, single, strength_of
from springpoise.errors import InputError
from springpoise.linkages import Point, SpatialChain, SpatialLink
from springpoise.linkages.frames import GROUND

__all__ = ["spatial_skeleton"]

Vector = NDArray[np.float64]

NEAR = 1e-9
"""Share of the chain's reach by which lines may miss each other and still meet [1]."""


class _Frame(NamedTuple):
    """A link's frame in ground coordinates at joint angles zero."""

    origin: Vector
    rotation: NDArray[np.float64]

    def to_ground(self, place: Any) -> Vector:
        return np.asarray(self.origin + self.rotation @ np.asarray(place))

    def to_frame(self, place: Vector) -> Vector:
        return np.asarray(self.rotation.T @ (place - self.origin))


def spatial_skeleton(chain: SpatialChain, gravity: tuple[Any, ...]) -> Skeleton:
    """The sums of a chain on spherical joints, with a real number along its line for each link.

    Raises
    ------
    InputError
        Branches, prismatic or coupled joints, joints that are not three with one centre, a mass
        between them, a centre of mass or next joint off the link's line.
    """
    pull = np.array([single(component, "gravity") for component in gravity])
    strength = strength_of(float(np.linalg.norm(pull)))
    frames = {GROUND: _Frame(np.zeros(3), np.eye(3))}
    frames |= {link.name: _frame(chain, link.name) for link in chain.links}
    moving, carrier = _serial(chain)
    reach = max(float(np.linalg.norm(frame.origin)) for frame in frames.values())
    centres, names = [], []
    for start in range(0, len(moving), 3):
        group = moving[start : start + 3]
        centres.append(_centre(group, frames, NEAR * max(reach, 1e-3)))
        names.append(group[-1].name)
    masses: dict[str, list[tuple[float, Vector]]] = {name: [] for name in names}
    at_joints = [0.0] * len(names)  # what turns about some of three joints only, but sits at their centre
    for mass, at in chain.masses:
        body, kilograms = carrier[at.body], single(mass, "Body.mass")
        for component in at.at:
            single(component, "Body.com")
        if body in masses:
            masses[body].append((kilograms, frames[at.body].to_ground(at.at)))
        elif body != GROUND and kilograms:
            joint = [link.name for link in moving].index(body) // 3
            at_joints[joint] += kilograms
            if np.linalg.norm(frames[at.body].to_ground(at.at) - centres[joint]) > NEAR * max(reach, 1e-3):
                raise InputError(
                    f"SpatialLink.bodies must be none between the three joints of a spherical joint, got {kilograms:g} kg on "
                    f"{at.body!r}; mass that turns about only some of them cannot be balanced from {names[0]!r} on"
                )
    size = len(names) + 1
    lines = [_line(i, centres, masses[name], name, max(reach, 1e-3)) for i, name in enumerate(names)]
    forms, joints = {GROUND: Form(np.zeros(size, complex), _unit(0, size))}, {}
    before: tuple[str, complex] = (GROUND, 0j)
    moments, scale = np.zeros(size, complex), 0.0
    for i, name in enumerate(names):
        joints[name] = before
        forms[name] = Form(forms[before[0]].at(before[1]), _unit(i + 1, size))
        for kilograms, spot in [*masses[name], (at_joints[i], centres[i])]:
            along = forms[name].at(complex((spot - centres[i]) @ lines[i]))
            moments, scale = moments + kilograms * along, scale + kilograms * float(np.sum(np.abs(along)))
        if i + 1 < len(names):
            before = name, complex((centres[i + 1] - centres[i]) @ lines[i])
    up = -pull / strength

    def place(body: str, along: complex) -> Point:
        if body == GROUND:
            return Point(GROUND, tuple((centres[0] + along.real * up).tolist()))
        i = names.index(body)
        at = frames[body].to_frame(centres[i] + along.real * lines[i])
        return Point(body, tuple(at.tolist()))

    return Skeleton(chain, tuple(names), forms, joints, moments, scale, 1.0 + 0j, strength, place)


def _unit(index: int, size: int) -> NDArray[np.complex128]:
    found = np.zeros(size, complex)
    found[index] = 1.0
    return found


def _frame(chain: SpatialChain, name: str) -> _Frame:
    zero: Any = (0.0,) * chain.joint_count if chain.joint_count > 1 else 0.0
    points = [(0.0, 0.0, 0.0), (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)]
    places = np.array(
        [[single(c, "SpatialLink.origin") for c in chain.position(Point(name, at), zero)] for at in points]
    )
    return _Frame(places[0], (places[1:] - places[0]).T)


def _serial(chain: SpatialChain) -> tuple[list[SpatialLink], dict[str, str]]:
    """The links that turn, in order, and for each link the one of them that carries it."""
    moving: list[SpatialLink] = []
    carrier, before = {GROUND: GROUND}, GROUND
    for link in chain.links:
        base = carrier[link.parent or before]
        before = link.name
        if link.joint == "fixed":
            carrier[link.name] = base
            continue
        if link.joint != "revolute" or link.follows is not None:
            what = "a Coupling" if link.follows is not None else repr(link.joint)
            raise InputError(
                f"SpatialLink.joint must be 'revolute' and move by itself to be balanced exactly, got {what} for "
                f"{link.name!r}"
            )
        if base != (moving[-1].name if moving else GROUND):
            raise InputError(f"SpatialChain must have no branches to be balanced exactly, got one at {link.name!r}")
        moving.append(link)
        carrier[link.name] = link.name
    return moving, carrier


def _centre(group: list[SpatialLink], frames: dict[str, _Frame], near: float) -> Vector:
    """The common centre of three axes."""
    names = ", ".join(repr(link.name) for link in group)
    rule = (
        "SpatialChain must have spherical joints (three revolute joints whose axes meet in one point, no two "
        "in a row parallel) between its links to be balanced exactly"
    )
    hint = "describe an arm that moves in one plane, alone or on a column that turns about a vertical axis, as a PlanarChain"
    if len(group) < 3:
        raise InputError(f"{rule}, got {names} left over; {hint}")
    origins = [frames[link.name].origin for link in group]
    axes = [frames[link.name].rotation @ np.array(link.axis, dtype=float) for link in group]
    if any(np.linalg.norm(np.cross(axes[i], axes[i + 1])) < NEAR for i in (0, 1)):
        raise InputError(f"{rule}, got parallel axes in a row in {names}; {hint}")
    # The point nearest to all three axes: each projects out its own direction.
    across = [np.eye(3) - np.outer(axis, axis) for axis in axes]
    centre = np.linalg.solve(sum(across), sum(p @ o for p, o in zip(across, origins, strict=True)))
    misses = [float(np.linalg.norm(p @ (centre - o))) for p, o in zip(across, origins, strict=True)]
    if max(misses) > near:
        raise InputError(f"{rule}, got axes of {names} that miss each other by {2e3 * max(misses):.3g} mm; {hint}")
    return np.array(centre, dtype=np.float64)


def _line(i: int, centres: list[Vector], masses: list[tuple[float, Vector]], name: str, reach: float) -> Vector:
    """Direction of a link's line, on which its next joint and its centre of mass have to lie."""
    moment = sum((m * (place - centres[i]) for m, place in masses), np.zeros(3))
    total = sum(m for m, _ in masses)
    vectors = [moment / total] if total > 0 else []
    if i + 1 < len(centres):
        vectors.insert(0, centres[i + 1] - centres[i])
    long = [v for v in vectors if np.linalg.norm(v) > NEAR * reach]
    if not long:
        return np.array([1.0, 0.0, 0.0])
    line: Vector = long[0] / float(np.linalg.norm(long[0]))
    for vector in long[1:]:
        off = float(np.linalg.norm(np.cross(line, vector)))
        if off > NEAR * reach:
            raise InputError(
                f"Body.com must lie on the line from joint to joint for springs in space, got {1e3 * off:.4g} mm off it "
                f"for {name!r}; add a counterweight, or move the joint"
            )
    return np.asarray(line, dtype=np.float64)

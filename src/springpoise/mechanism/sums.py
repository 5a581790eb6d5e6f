"""Gravity, springs and friction added up, joint by joint, on any carrier."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np

from springpoise.carriers import Carrier, joints_of, namespace
from springpoise.errors import InputError
from springpoise.linkages.posed import posed
from springpoise.linkages.protocol import AppliedForce, PointMass
from springpoise.mechanism.friction import Friction
from springpoise.paths.protocol import pulls_of

if TYPE_CHECKING:
    from springpoise.mechanism.mechanism import Mechanism

__all__ = [
    "Gravity",
    "friction_bands",
    "gravity_energy",
    "gravity_torques",
    "joined",
    "magnitude",
    "pivot_forces",
    "spring_energy",
    "spring_torques",
]

Gravity: TypeAlias = tuple[Carrier, ...]


def gravity_torques(mechanism: Mechanism, q: Carrier, gravity: Gravity) -> list[Carrier]:
    """For each joint, the torque that gravity exerts [N·m]."""
    linkage = posed(mechanism.linkage, q)
    own = getattr(linkage, "gravity_torques", None)  # a long chain knows a shorter way
    totals: list[Carrier] = [0.0] * linkage.joint_count if own is None else list(own(q, gravity))
    for mass, at in (*(linkage.masses if own is None else ()), *_spring_masses(mechanism)):
        for joint, move in enumerate(linkage.jacobian(at, q)):
            totals[joint] = totals[joint] + mass * _dot(gravity, move)
    return totals


def spring_torques(mechanism: Mechanism, q: Carrier) -> list[Carrier]:
    """For each joint, the torque that the springs exert [N·m]."""
    linkage = posed(mechanism.linkage, q)
    totals: list[Carrier] = [0.0] * linkage.joint_count
    for mount in mechanism.springs:
        for joint, torque in enumerate(mount.torques(linkage, q)):
            totals[joint] = totals[joint] + torque
    return totals


def friction_bands(mechanism: Mechanism, q: Carrier, gravity: Gravity) -> list[Carrier]:
    """For each joint, the half-width of its friction band [N·m]."""
    linkage = posed(mechanism.linkage, q)
    frictions = mechanism.joint_frictions
    forces: dict[str, Carrier] = {}
    if any(friction.depends_on_load for friction in frictions):
        loads = pivot_forces(mechanism, q, gravity)
        forces = dict(zip(getattr(linkage, "pivots", _joint_names(linkage)), loads, strict=True))
    totals = []
    for angle, name, friction in zip(joints_of(q, linkage.joint_count), _joint_names(linkage), frictions, strict=True):
        totals.append(_joint_friction(friction, forces.get(name)) + 0.0 * angle)
    for mount in mechanism.springs:
        for joint, band in enumerate(mount.friction_bands(linkage, q)):
            totals[joint] = totals[joint] + band
    return totals


def gravity_energy(mechanism: Mechanism, q: Carrier, gravity: Gravity) -> Carrier:
    """Potential energy of all weights [J], zero at the height of the ground's origin."""
    linkage = posed(mechanism.linkage, q)
    total: Carrier = 0.0
    for mass, at in (*linkage.masses, *_spring_masses(mechanism)):
        total = total - mass * _dot(gravity, linkage.position(at, q))
    return total


def spring_energy(mechanism: Mechanism, q: Carrier) -> Carrier:
    """Energy stored in all springs [J]."""
    linkage = posed(mechanism.linkage, q)
    total: Carrier = 0.0
    for mount in mechanism.springs:
        total = total + mount.energy(linkage, q)
    return total


def pivot_forces(mechanism: Mechanism, q: Carrier, gravity: Gravity) -> tuple[tuple[Carrier, ...], ...]:
    """For each of the linkage's pivots, the force (x, y) of its bearing on what hangs on it [N]."""
    linkage = posed(mechanism.linkage, q)
    if not hasattr(linkage, "pivot_forces"):
        raise InputError(f"Mechanism.linkage must be planar to know pivot loads, got a {type(linkage).__name__}")
    masses = (*linkage.masses, *_spring_masses(mechanism))
    applied = [AppliedForce(at, tuple(mass * component for component in gravity)) for mass, at in masses]
    for mount in mechanism.springs:
        tension = mount.count * mount.ask("load", mount.spring_length(linkage, q))
        for at, force in pulls_of(mount.path, linkage, q):
            applied.append(AppliedForce(at, tuple(tension * component for component in force)))
    return tuple(linkage.pivot_forces(applied, q))


def magnitude(force: Sequence[Carrier]) -> Carrier:
    """Length of a vector."""
    square = _dot(force, force)
    return namespace(square).sqrt(square)


def joined(components: Sequence[Carrier]) -> Carrier:
    """Joint results as they leave: the value itself for one joint, along the last axis for n."""
    if len(components) == 1:
        return components[0]
    xp = namespace(*components)
    if hasattr(xp, "stack"):
        zero = xp.zeros(np.broadcast_shapes(*(np.shape(c) for c in components)))
        return xp.stack([c + zero for c in components], axis=-1)
    return np.array(components) if all(isinstance(c, float) for c in components) else tuple(components)


def _joint_friction(friction: Friction, force: Sequence[Carrier] | None) -> Carrier:
    if not friction.depends_on_load or force is None:
        return friction.coulomb
    return friction.coulomb + friction.pivot_friction * friction.pivot_radius * magnitude(force)


def _joint_names(linkage: Any) -> tuple[str, ...]:
    names = getattr(linkage, "joint_names", None)
    return tuple(f"joint {i + 1}" for i in range(linkage.joint_count)) if names is None else names


def _spring_masses(mechanism: Mechanism) -> list[PointMass]:
    return [mass for mount in mechanism.springs for mass in mount.masses()]


def _dot(a: Sequence[Carrier], b: Sequence[Carrier]) -> Carrier:
    total: Carrier = a[0] * b[0]
    for x, y in zip(a[1:], b[1:], strict=True):
        total = total + x * y
    return total

"""The holding torque as a program whose inputs are poses and the numbers that vary."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError, InputTypeError, SpringpoiseError
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of
from springpoise.tables import degrees, millimetres
from springpoise.tape import Program, record
from springpoise.tolerance.fields import canonical_name, list_fields, replaced

__all__ = [
    "can_vary",
    "columns_of",
    "nominal",
    "pose_text",
    "poses_of",
    "size_of",
    "torque_program",
    "torque_units",
    "torques_of",
]

Array = NDArray[np.float64]

USUAL_POSES = 121


def poses_of(mechanism: Mechanism, over: Any) -> Array:
    """The poses of a study: those given, or 121 over the travel; shape (p,) for one joint, (p, n) for n.

    Raises
    ------
    InputError, InputTypeError
        No mechanism, one whose fields are arrays, no poses, or poses that are not finite.
    """
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"mechanism must be a Mechanism, got {mechanism!r}")
    joints = mechanism.linkage.joint_count
    for field in list_fields(mechanism):
        if not isinstance(field.value, float):
            raise InputError(f"mechanism must be a single one, got {field.name} of shape {np.shape(field.value)}")
    if over is None:
        return np.asarray(mechanism.poses(USUAL_POSES))
    q = np.asarray(units.poses(over, "over"), dtype=np.float64)
    if joints > 1 and (not q.ndim or q.shape[-1] != joints):
        raise InputError(f"over must be of shape (..., {joints}) for {joints} joints, got shape {q.shape}")
    q = q.reshape(-1) if joints == 1 else q.reshape(-1, joints)
    if q.size == 0:
        raise InputError("over must be at least one pose in rad, got none")
    if not np.all(np.isfinite(q)):
        raise InputError(f"over must be finite poses in rad, got {q[~np.isfinite(q)][0]}")
    return q


def columns_of(q: Array) -> list[Array]:
    """Poses joint by joint, each of shape (p,), as a program takes them."""
    return [q] if q.ndim == 1 else [np.ascontiguousarray(column) for column in q.T]


def nominal(mechanism: Mechanism, q: Array, gravity: Any) -> Array:
    """Holding torque of the mechanism as drawn, shape (joints, p) [N·m].

    Raises
    ------
    InputError
        It is not a number at some pose.
    """
    torque = np.asarray(mechanism.holding_torque(q, gravity), dtype=np.float64)
    torque = np.broadcast_to(torque, q.shape)[None] if q.ndim == 1 else torque.T
    bad = np.flatnonzero(~np.all(np.isfinite(torque), axis=0))
    if bad.size:
        raise InputError(
            f"mechanism.holding_torque must be finite over the poses, got NaN at {pose_text(mechanism, q[bad[0]])}; "
            "is an end of a cable inside a disc there?"
        )
    return torque


def size_of(mechanism: Mechanism, q: Array, gravity: Any) -> Array:
    """Peak gravity torque of each joint over the poses, shape (joints,) [N·m]."""
    torque = np.asarray(mechanism.gravity_torque(q, gravity), dtype=np.float64)
    return np.asarray(np.max(np.abs(torque.reshape(-1, mechanism.linkage.joint_count)), axis=0))


def torque_units(mechanism: Mechanism) -> tuple[str, ...]:
    """Unit of each joint's torque: ``"N*m"``, or ``"N"`` of a prismatic one."""
    return tuple("N" if kind == "m" else "N*m" for kind in joint_units_of(mechanism.linkage))


def torque_program(
    mechanism: Mechanism, variables: int, values_of: Callable[[Sequence[Carrier]], dict[str, Carrier]], gravity: Any
) -> Program:
    """The holding torque over joint angles and ``variables`` numbers, from which the fields' values follow.

    Inputs are the joints' poses, then the variables; outputs the joints' torques.

    Raises
    ------
    InputError, InputTypeError
        A field that cannot vary where it is, or formulas that cannot be recorded.
    """
    joints = mechanism.linkage.joint_count

    def formula(*inputs: Carrier) -> Any:
        q = inputs[0] if joints == 1 else tuple(inputs[:joints])
        return replaced(mechanism, values_of(inputs[joints:])).holding_torque(q, gravity)

    return record(formula, inputs=(*(f"q{i}" for i in range(joints)), *(f"v{i}" for i in range(variables))))


def torques_of(program: Program, poses: Sequence[Array], values: Sequence[Any]) -> list[Array]:
    """The program's outputs over poses of shape (p,) and values that broadcast against them, e.g. (n, 1)."""
    shape = np.broadcast_shapes(np.shape(poses[0]), *(np.shape(value) for value in values))
    result = program.numpy_function()(*poses, *values)
    return [np.broadcast_to(one, shape) for one in ([result] if program.scalar else result)]


def can_vary(mechanism: Mechanism, names: Sequence[str] | None) -> tuple[list[str], list[str]]:
    """Fields that a torque program can vary, and those that it cannot; all of the mechanism for None.

    Raises
    ------
    InputError, InputTypeError
        Unknown names, or one of the given names cannot vary where it is.
    """
    if isinstance(names, str):
        names = [names]
    wanted = (
        [f.name for f in list_fields(mechanism)] if names is None else [canonical_name(mechanism, n) for n in names]
    )
    if len(set(wanted)) < len(wanted):
        twice = next(name for name in wanted if wanted.count(name) > 1)
        raise InputError(f"names must name each field once, got {twice!r} twice")
    if not wanted:
        raise InputError("names must be at least one field, got none")
    able: list[str] = []
    unable: list[str] = []
    for name in wanted:
        try:
            torque_program(mechanism, 1, partial(_one, name), None)
        except (SpringpoiseError, TypeError, ValueError) as error:
            if names is not None:
                raise InputError(f"names must be fields that can vary, got {name!r}: {error}") from error
            unable.append(name)
        else:
            able.append(name)
    return able, unable


def _one(name: str, variables: Sequence[Carrier]) -> dict[str, Carrier]:
    return {name: variables[0]}


def pose_text(mechanism: Mechanism, pose: Any) -> str:
    """A pose as text: degrees, or millimetres for a prismatic joint."""
    kinds = joint_units_of(mechanism.linkage)
    values = np.atleast_1d(np.asarray(pose, dtype=np.float64)).tolist()
    return ", ".join(
        degrees(value) if unit == "rad" else millimetres(value) for value, unit in zip(values, kinds, strict=True)
    )

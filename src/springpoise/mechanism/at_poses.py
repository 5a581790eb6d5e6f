"""What every method of poses does first and last: units in, and no number for a pose that is none."""

from __future__ import annotations

import functools
import math
from collections.abc import Callable
from typing import Any, TypeVar, cast

import numpy as np

from springpoise import units
from springpoise.carriers import namespace
from springpoise.errors import InputError

__all__ = ["at_poses"]

_Method = TypeVar("_Method", bound=Callable[..., Any])


def at_poses(joint_axes: int) -> Callable[[_Method], _Method]:
    """Wraps a method of poses: converts ``q`` and ``gravity`` once, and lets no bad pose give a number.

    A pose that is NaN or infinite gives NaN, whatever a formula makes of it on the way; so does one
    at which a loop of the linkage cannot close, where that is not an error. With several joints,
    results have ``joint_axes`` axes of joints behind those of the poses.
    """

    def wrap(method: _Method) -> _Method:
        @functools.wraps(method)
        def convert(self: Any, q: Any, gravity: Any = None) -> Any:
            angles = _poses(self.linkage, q)
            pull = self.gravity if gravity is None else _gravity(gravity, len(self.gravity))
            count = self.linkage.joint_count
            pose: Any
            if type(angles) is float and count == 1:
                good = math.isfinite(angles)
                closed = _closed(self.linkage, angles) if good else True
                value = method(self, angles if good else 0.0, pull)
                good = good and closed is True
                return value if good and type(value) is float else _at_one_pose(_where(closed, value), good)
            if _follows_along(angles):
                return _where(_closed(self.linkage, angles), method(self, angles, pull))
            _check_shape(angles, count)
            with np.errstate(all="ignore"):
                # One pose of several joints is floats, not NumPy's scalars, which are neither floats nor arrays.
                pose = angles
                if isinstance(angles, np.ndarray) and angles.ndim == 1 and count > 1:
                    pose = tuple(angles.tolist())
                closed = _closed(self.linkage, pose)
                return _nan_where_not_finite(method(self, pose, pull), angles, closed, count, joint_axes)

        return cast("_Method", convert)

    return wrap


def _gravity(value: Any, dimensions: int) -> tuple[Any, ...]:
    pull = units.acceleration(value, "gravity")
    if len(pull) != dimensions:
        raise InputError(
            f"gravity must be {dimensions} components in m/s**2 for this linkage, got {len(pull)}: {value!r}"
        )
    return pull


def _check_shape(q: Any, count: int) -> None:
    shape = np.shape(q)
    if count > 1 and (not shape or shape[-1] != count):
        raise InputError(f"q must be of shape (..., {count}) for {count} joints, got shape {shape}")


def _poses(linkage: Any, q: Any) -> Any:
    """Poses as SI numbers; a prismatic joint takes lengths."""
    kinds: tuple[str, ...] = getattr(linkage, "joint_units", ())
    if "m" not in kinds:
        return units.poses(q)
    if len(kinds) == 1:
        return units.scalar_si(q, kinds[0], "q") if _states_unit(q) else units.poses(q)
    if isinstance(q, tuple | list) and len(q) == len(kinds) and any(map(_states_unit, q)):
        q = [units.scalar_si(v, unit, "q") if _states_unit(v) else v for v, unit in zip(q, kinds, strict=True)]
    return units.poses(q)


def _states_unit(value: Any) -> bool:
    return isinstance(value, str) or hasattr(value, "m_as")


def _closed(linkage: Any, q: Any) -> Any:
    """Whether every loop of the linkage closes, pose by pose; plain True for a linkage without loops.

    Refuses numbers at which one does not, unless the linkage was told to give NaN there.
    """
    missing = getattr(linkage, "missing", None)
    if missing is None:
        return True
    lacking = missing(q)
    if isinstance(lacking, int | float | np.ndarray) or not _follows_along(lacking):
        lacks = np.asarray(lacking)
        if getattr(linkage, "unreachable", "error") == "error" and np.any(lacks > 0.0):
            _refuse(linkage, q, lacks)
        if lacks.ndim == 0:
            return bool(lacks <= 0.0)
    return lacking <= 0.0


def _refuse(linkage: Any, q: Any, missing: Any) -> None:
    """Names the worst pose; of several builds, no pose."""
    worst = 1e3 * np.max(missing, initial=0.0, where=np.isfinite(missing))
    poses = np.asarray(q)
    shape = poses.shape if linkage.joint_count == 1 else poses.shape[:-1]
    where = ""
    if missing.shape == shape:
        at = np.unravel_index(int(np.argmax(np.where(missing > 0.0, missing, 0.0))), shape) if shape else ()
        kinds = getattr(linkage, "joint_units", ("rad",) * linkage.joint_count)
        pose = [
            f"{math.degrees(value):.6g} deg" if unit == "rad" else f"{1e3 * value:.6g} mm"
            for value, unit in zip(np.atleast_1d(poses[at]).tolist(), kinds, strict=True)
        ]
        where = f"{', '.join(pose)}, where "
    raise InputError(
        f"q must be poses at which every loop closes, got {where}{worst:.4g} mm missing; "
        "ask for NaN there with unreachable='nan'"
    )


def _where(closed: Any, value: Any) -> Any:
    """``value``, NaN where a loop does not close."""
    if closed is True:
        return value
    if isinstance(value, tuple):
        return tuple(_where(closed, item) for item in value)
    return namespace(value, closed).where(closed, value, math.nan)


def _follows_along(q: Any) -> bool:
    """Whether poses are recorded variables, alone or one for each joint, and not numbers."""
    if isinstance(q, float | np.ndarray):
        return False
    return isinstance(q, tuple | list) or not hasattr(namespace(q), "asarray")


def _at_one_pose(value: Any, good: bool) -> Any:
    """A plain float, or an array where a field is one; NaN at a bad pose."""
    if isinstance(value, tuple):
        return tuple(_at_one_pose(item, good) for item in value)
    plain: Any = float(value) if isinstance(value, int | np.ndarray | np.generic) and np.ndim(value) == 0 else value
    return plain if good else plain * math.nan


def _nan_where_not_finite(value: Any, q: Any, closed: Any, joints: int, joint_axes: int) -> Any:
    """``value`` in the shape of the poses, NaN where one is not finite or a loop does not close."""
    if isinstance(value, tuple):
        return tuple(_nan_where_not_finite(item, q, closed, joints, joint_axes) for item in value)
    xp = namespace(q)
    fine = xp.isfinite(q)
    if joints > 1:
        fine = xp.all(fine, axis=-1)
    if closed is not True:
        fine = xp.logical_and(fine, xp.asarray(closed))
    for _ in range(joint_axes if joints > 1 else 0):
        fine = xp.expand_dims(fine, axis=-1)
    if np.shape(value) == fine.shape and bool(xp.all(fine)):
        return value
    # Numbers alone would not do for every namespace, and a result may not be writable.
    return xp.where(fine, value + xp.zeros(fine.shape), math.nan)

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

    A pose that is NaN or infinite gives NaN, whatever a formula makes of it on the way. With
    several joints, results have ``joint_axes`` axes of joints behind those of the poses.
    """

    def wrap(method: _Method) -> _Method:
        @functools.wraps(method)
        def convert(self: Any, q: Any, gravity: Any = None) -> Any:
            angles = units.poses(q)
            pull = self.gravity if gravity is None else _gravity(gravity, len(self.gravity))
            count = self.linkage.joint_count
            if type(angles) is float and count == 1:
                good = math.isfinite(angles)
                if good:
                    _check_loops(self.linkage, angles)
                value = method(self, angles if good else 0.0, pull)
                return value if good and type(value) is float else _at_one_pose(value, good)
            if _follows_along(angles):
                return method(self, angles, pull)
            _check_shape(angles, count)
            _check_loops(self.linkage, angles)
            with np.errstate(all="ignore"):
                return _nan_where_not_finite(method(self, angles, pull), angles, count, joint_axes)

        return cast("_Method", convert)

    return wrap


def _gravity(value: Any, dimensions: int) -> tuple[Any, ...]:
    pull = units.acceleration(value, "gravity")
    if len(pull) != dimensions:
        raise InputError(f"gravity must be {dimensions} components in m/s**2 for this linkage, got {len(pull)}: {value!r}")
    return pull


def _check_shape(q: Any, count: int) -> None:
    shape = np.shape(q)
    if count > 1 and (not shape or shape[-1] != count):
        raise InputError(f"q must be of shape (..., {count}) for {count} joints, got shape {shape}")


def _check_loops(linkage: Any, q: Any) -> None:
    """Refuses poses at which a loop of the linkage cannot close, unless it was told to give NaN there."""
    if getattr(linkage, "unreachable", "nan") != "error":
        return
    with np.errstate(all="ignore"):
        missing = np.asarray(linkage.missing(q))
    if missing.size and np.nanmax(missing, initial=-math.inf) > 0:
        at = np.unravel_index(int(np.nanargmax(missing)), missing.shape)
        pose = np.asarray(q)[at] if missing.ndim else np.asarray(q)
        raise InputError(
            f"q must be poses at which every loop closes, got {np.degrees(pose)} deg, where {1e3 * missing[at]:.4g} mm "
            "are missing; ask for NaN there with unreachable='nan'"
        )


def _follows_along(q: Any) -> bool:
    """Whether poses are recorded variables, alone or one for each joint, and not numbers."""
    if isinstance(q, float | np.ndarray):
        return False
    return isinstance(q, tuple | list) or not hasattr(namespace(q), "asarray")


def _at_one_pose(value: Any, good: bool) -> Any:
    """A plain float, or an array where a field is one; NaN at a bad pose."""
    if isinstance(value, tuple):
        return tuple(_at_one_pose(item, good) for item in value)
    plain: Any = float(value) if np.ndim(value) == 0 and isinstance(value, int | np.ndarray | np.generic) else value
    return plain if good else plain * math.nan


def _nan_where_not_finite(value: Any, q: Any, joints: int, joint_axes: int = 0) -> Any:
    """``value`` in the shape of the poses, NaN where one is not finite."""
    if isinstance(value, tuple):
        return tuple(_nan_where_not_finite(item, q, joints, joint_axes) for item in value)
    xp = namespace(q)
    fine = xp.isfinite(q)
    if joints > 1:
        fine = xp.all(fine, axis=-1)
        for _ in range(joint_axes):
            fine = xp.expand_dims(fine, axis=-1)
    if np.shape(value) == fine.shape and bool(xp.all(fine)):
        return value
    # Numbers alone would not do for every namespace, and a result may not be writable.
    return xp.where(fine, value + xp.zeros(fine.shape), math.nan)

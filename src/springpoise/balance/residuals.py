"""How far a mechanism is from balanced, in the words that all solvers share."""

from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of
from springpoise.tables import degrees, millimetres, number

__all__ = ["Residual", "joint_unit_of", "poses_of_joints", "poses_over", "residual", "residual_at", "shown_pose"]

USUAL_POSES, USUAL_POSES_OF_SEVERAL = 181, 600


@attrs.frozen
class Residual:
    """What springs leave over, over some poses."""

    worst: float
    """Greatest magnitude of the holding torque [N·m], >= 0; of all joints where there are several."""
    worst_at: Any
    """Pose where it occurs [rad, or m]; for several joints a tuple with a value each."""
    rms: float
    """Root of the mean square of the holding torque [N·m], >= 0; of all joints where there are several."""
    peak_gravity_torque: float
    """Greatest magnitude of the gravity torque over the same poses [N·m], >= 0."""
    poses: int
    """How many poses were looked at."""
    unit: str = "N*m"
    """``"N*m"``, or ``"N"`` where the joints slide; torques above are forces then and poses lengths."""

    @property
    def worst_fraction(self) -> float:
        """``worst`` over the peak gravity torque [1]; NaN where gravity does nothing."""
        return self.worst / self.peak_gravity_torque if self.peak_gravity_torque > 0 else math.nan

    @property
    def rms_fraction(self) -> float:
        """``rms`` over the peak gravity torque [1]; NaN where gravity does nothing."""
        return self.rms / self.peak_gravity_torque if self.peak_gravity_torque > 0 else math.nan

    def __str__(self) -> str:
        what, kind = ("torque", "rad") if self.unit == "N*m" else ("force", "m")
        return (
            f"worst {number(self.worst, self.unit)} ({100 * self.worst_fraction:.2f} % of the peak gravity {what}) "
            f"at {shown_pose(self.worst_at, kind)}, rms {number(self.rms, self.unit)} "
            f"({100 * self.rms_fraction:.2f} %)"
        )


def residual(mechanism: Mechanism, over: Any = None, *, gravity: Any = None) -> Residual:
    """How far a one-joint mechanism is from balanced.

    Parameters
    ----------
    mechanism
        The mechanism, with its springs.
    over
        Poses [rad], any shape; None for 181 poses over its travel.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Residual

    Raises
    ------
    InputError
        No poses, poses that are not finite, or poses that look like degrees.
    """
    return residual_at(mechanism, poses_over(mechanism, over), gravity)


def residual_at(mechanism: Mechanism, q: NDArray[np.float64], gravity: Any = None) -> Residual:
    """What is left at poses that were checked, shape (p,), or (p, n) for n joints: of all joints together."""
    torque = np.broadcast_to(mechanism.holding_torque(q, gravity), q.shape)
    gravity_torque = np.broadcast_to(mechanism.gravity_torque(q, gravity), q.shape)
    kind = joint_unit_of(mechanism)
    if not np.all(np.isfinite(torque)):
        bad = q[np.argwhere(~np.isfinite(torque))[0][0]]
        raise InputError(
            f"mechanism.holding_torque must be finite over the poses, got NaN at {shown_pose(bad, kind)}; "
            "is an end of a cable inside a disc there?"
        )
    at = int(np.argmax(np.abs(torque)))
    pose = q[at // (torque.size // len(q))]
    return Residual(
        worst=float(np.abs(torque).flat[at]),
        worst_at=float(pose) if q.ndim == 1 else tuple(pose.tolist()),
        rms=float(np.sqrt(np.mean(torque**2))),
        peak_gravity_torque=float(np.max(np.abs(gravity_torque))),
        poses=len(q),
        unit="N*m" if kind == "rad" else "N",
    )


def joint_unit_of(mechanism: Mechanism) -> str:
    """``"rad"`` for revolute joints, ``"m"`` for prismatic ones.

    Raises
    ------
    InputError
        There are both, and one residual cannot speak of both.
    """
    kinds = set(joint_units_of(mechanism.linkage))
    if len(kinds) > 1:
        raise InputError("mechanism must have joints of one kind, got both revolute and prismatic ones")
    return kinds.pop()


def shown_pose(pose: Any, joint_unit: str = "rad") -> str:
    """A pose as text, of joints in ``"rad"`` or ``"m"``."""
    shown = degrees if joint_unit == "rad" else millimetres
    return ", ".join(shown(float(value)) for value in np.atleast_1d(np.asarray(pose, dtype=np.float64)))


def poses_of_joints(mechanism: Mechanism, over: Any) -> NDArray[np.float64]:
    """The poses that a solver for any number of joints looks at, shape (p,), or (p, n) for n joints."""
    joints = mechanism.linkage.joint_count
    if joints == 1:
        return poses_over(mechanism, over)
    q = mechanism.poses(USUAL_POSES_OF_SEVERAL) if over is None else np.asarray(units.poses(over, "over"), dtype=float)
    if q.ndim != 2 or q.shape[-1] != joints or not q.size:
        raise InputError(f"over must be poses of shape (poses, {joints}) for this linkage, got shape {q.shape}")
    if not np.all(np.isfinite(q)):
        raise InputError(f"over must be finite poses, got {q[~np.isfinite(q)][0]}")
    if np.ndim(mechanism.holding_torque(q[0])) != 1:
        raise InputError("mechanism must be a single one, got fields that are arrays")
    return q


def poses_over(mechanism: Mechanism, over: Any) -> NDArray[np.float64]:
    """The poses that a solver looks at, as a flat array: those given, or the usual ones over the travel."""
    joints = mechanism.linkage.joint_count
    if joints != 1:
        raise InputError(f"mechanism must have one joint, got {joints}")
    somewhere = mechanism.holding_torque(0.5 * sum(mechanism.travel_or_turn))
    if not isinstance(somewhere, float):
        raise InputError(f"mechanism must be a single one, got fields that are arrays (shape {np.shape(somewhere)})")
    if over is None:
        return mechanism.poses(USUAL_POSES)
    q = np.atleast_1d(np.asarray(units.poses(over, "over"), dtype=np.float64)).ravel()
    if q.size == 0:
        raise InputError("over must be at least one pose in rad, got none")
    if not np.all(np.isfinite(q)):
        raise InputError(f"over must be finite poses in rad, got {q[~np.isfinite(q)][0]}")
    return q

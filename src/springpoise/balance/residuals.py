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
from springpoise.tables import degrees, number

__all__ = ["Residual", "poses_over", "residual"]

USUAL_POSES = 181


@attrs.frozen
class Residual:
    """What springs leave over, over some poses."""

    worst: float
    """Greatest magnitude of the holding torque [N·m], >= 0."""
    worst_at: float
    """Pose where it occurs [rad]."""
    rms: float
    """Root of the mean square of the holding torque [N·m], >= 0."""
    peak_gravity_torque: float
    """Greatest magnitude of the gravity torque over the same poses [N·m], >= 0."""
    poses: int
    """How many poses were looked at."""

    @property
    def worst_fraction(self) -> float:
        """``worst`` over the peak gravity torque [1]; NaN where gravity does nothing."""
        return self.worst / self.peak_gravity_torque if self.peak_gravity_torque > 0 else math.nan

    @property
    def rms_fraction(self) -> float:
        """``rms`` over the peak gravity torque [1]; NaN where gravity does nothing."""
        return self.rms / self.peak_gravity_torque if self.peak_gravity_torque > 0 else math.nan

    def __str__(self) -> str:
        return (
            f"worst {number(self.worst, 'N*m')} ({100 * self.worst_fraction:.2f} % of the peak gravity torque) "
            f"at {degrees(self.worst_at)}, rms {number(self.rms, 'N*m')} ({100 * self.rms_fraction:.2f} %)"
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
    q = poses_over(mechanism, over)
    torque = np.broadcast_to(mechanism.holding_torque(q, gravity), q.shape)
    gravity_torque = np.broadcast_to(mechanism.gravity_torque(q, gravity), q.shape)
    if not np.all(np.isfinite(torque)):
        bad = q[~np.isfinite(torque)][0]
        raise InputError(
            f"mechanism.holding_torque must be finite over the poses, got NaN at {degrees(bad)}; "
            "is an end of a cable inside a disc there?"
        )
    at = int(np.argmax(np.abs(torque)))
    return Residual(
        worst=float(abs(torque[at])),
        worst_at=float(q[at]),
        rms=float(np.sqrt(np.mean(torque**2))),
        peak_gravity_torque=float(np.max(np.abs(gravity_torque))),
        poses=int(q.size),
    )


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

"""Joints and poses of mechanisms with one or several joints: names, units, poses to judge, how they are shown."""

from __future__ import annotations

import itertools
from typing import Any, TypeAlias

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError, UnitError
from springpoise.guard.amounts import JSON_SUFFIX, finite_or_none, shown, written
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of

__all__ = [
    "POSES",
    "POSES_OF_SEVERAL",
    "JointPose",
    "JointRanges",
    "Pose",
    "force_unit",
    "joint_names",
    "over_of",
    "pose_at",
    "poses_over",
    "shown_pose",
    "text_of_over",
]

POSES = 361
"""How many evenly spaced poses each limit of a mechanism with one joint is judged at."""

POSES_OF_SEVERAL = 4096
"""How many poses, spread through the box of the travels, each limit of one with several joints is judged at."""

MOST_JOINTS_WITH_CORNERS = 10
"""With at most so many joints the corners of that box are judged too."""

Array: TypeAlias = NDArray[np.float64]


def joint_names(linkage: Any) -> tuple[str, ...]:
    """Names of the joints, as their links are called."""
    own = getattr(linkage, "joint_names", None)
    return tuple(f"joint {i + 1}" for i in range(linkage.joint_count)) if own is None else tuple(own)


def force_unit(unit: str) -> str:
    """Unit of what holds a joint whose travel has this unit."""
    return "N" if unit == "m" else "N*m"


@attrs.frozen
class JointPose:
    """A pose of several joints, or of one that slides.

    Examples
    --------
    >>> str(JointPose(("upper", "slide"), (0.5, 0.02), ("rad", "m")))
    'upper 28.65 deg, slide 20.00 mm'
    """

    names: tuple[str, ...]
    """Names of the joints."""
    values: tuple[float, ...]
    """Where each stands [rad, or m for a prismatic joint]."""
    units: tuple[str, ...]
    """Unit of each."""

    def to_dict(self) -> dict[str, float | None]:
        """Ready for JSON: joints by name with their unit in the key."""
        return {
            f"{name}{JSON_SUFFIX[unit]}": finite_or_none(value)
            for name, value, unit in zip(self.names, self.values, self.units, strict=True)
        }

    def __str__(self) -> str:
        each = zip(self.names, self.values, self.units, strict=True)
        return ", ".join(f"{name} {shown(value, unit)}" for name, value, unit in each)


Pose: TypeAlias = float | JointPose
"""The angle of a single joint [rad], or a pose of several."""


def pose_at(mechanism: Mechanism, poses: Array, index: int) -> Pose:
    """One of the poses, as it is reported."""
    kinds = joint_units_of(mechanism.linkage)
    if kinds == ("rad",):
        return float(poses[index])
    return JointPose(joint_names(mechanism.linkage), tuple(map(float, np.atleast_1d(poses[index]))), kinds)


def shown_pose(at: Pose) -> str:
    """A pose as tables and sentences show it."""
    return str(at) if isinstance(at, JointPose) else shown(at, "rad")


def poses_over(mechanism: Mechanism, over: Any = None, count: int | None = None) -> Array:
    """The poses to judge: evenly spaced over one joint, spread through the box of several, with its corners.

    Parameters
    ----------
    over
        A range, or :class:`JointRanges`; None for the travel.
    count
        How many, corners apart; None for as many as limits are judged at.
    """
    ranges = over.ranges if isinstance(over, JointRanges) else over
    ranged = mechanism if ranges is None else attrs.evolve(mechanism, travel=ranges)
    if ranged.linkage.joint_count == 1:
        return ranged.poses(POSES if count is None else count)
    inside = ranged.poses(POSES_OF_SEVERAL if count is None else count)
    if ranged.linkage.joint_count > MOST_JOINTS_WITH_CORNERS:
        return inside
    return np.concatenate([inside, np.array(list(itertools.product(*ranged.travel_or_turn)), dtype=np.float64)])


# ------------------------------------------------------------------------------------------------
# ranges that a limit states


@attrs.frozen
class JointRanges:
    """A range for each joint."""

    ranges: tuple[tuple[float, float], ...]
    """From and to of each joint [rad, or m for a prismatic joint]."""
    units: tuple[str, ...]
    """Unit of each."""

    def fit(self, linkage: Any, name: str) -> None:
        """Raises InputError where the linkage has other joints."""
        kinds, names = joint_units_of(linkage), joint_names(linkage)
        if len(kinds) != len(self.units):
            raise InputError(
                f"{name} must be a range for each of {len(kinds)} joints ({', '.join(names)}), got {len(self.units)}"
            )
        for joint, wanted, unit in zip(names, kinds, self.units, strict=True):
            if wanted != unit:
                raise InputError(f"{name} must be a range in {wanted} for {joint!r}, got one in {unit}")


def over_of(value: Any) -> Any:
    """A range of angles, or a range for each joint; None for the travel."""
    if value is None or isinstance(value, JointRanges):
        return value
    nested = isinstance(value, list | tuple) and bool(value) and all(isinstance(one, list | tuple) for one in value)
    if not nested:
        pair = units.radian_pair(value, "Limit.over")
        _check_rising(pair, "rad")
        return pair
    found = [_range(one) for one in value]
    return JointRanges(tuple(one for one, _ in found), tuple(unit for _, unit in found))


def _range(value: Any) -> tuple[tuple[float, float], str]:
    """A range and its unit; numbers without one are angles."""
    unit = "rad"
    try:
        pair = units.radian_pair(value, "Limit.over")
    except UnitError:
        pair, unit = units.metre_pair(value, "Limit.over"), "m"
    _check_rising(pair, unit)
    return pair, unit


def _check_rising(pair: tuple[float, float], unit: str) -> None:
    if not pair[0] < pair[1]:
        raise InputError(f"Limit.over must be (lower, higher) {unit}, got {pair}")


def text_of_over(value: Any) -> list[Any]:
    """What :func:`over_of` reads back."""
    if isinstance(value, JointRanges):
        each = zip(value.ranges, value.units, strict=True)
        return [[written(end, unit) for end in pair] for pair, unit in each]
    return [written(end, "rad") for end in value]

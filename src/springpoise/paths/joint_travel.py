"""A torsion spring's angle: the travel of a joint."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, joints_of
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.protocol import AppliedForce, Linkage

__all__ = ["JointTravel"]


def _joint(value: Any) -> int:
    if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < 0:
        raise InputTypeError(f"JointTravel.joint must be the number of a joint, 0 for the first, got {value!r}")
    return int(value)


@attrs.frozen(field_transformer=units.named_fields)
class JointTravel:
    """``ratio`` times a joint's angle: what a torsion spring on the joint feels.

    Raises
    ------
    InputError, InputTypeError
        A joint that is not a number from 0 on, or that the linkage does not have; a zero ratio.
    """

    joint: int = attrs.field(default=0, converter=_joint)
    """Which joint, counted from 0."""
    ratio: Carrier = attrs.field(default=1.0, converter=units.number, validator=units.not_zero, kw_only=True)
    """Turns of the spring for a turn of the joint [1]: -1 for one that winds the other way, or a gear ratio."""

    def _check(self, linkage: Linkage) -> None:
        if self.joint >= linkage.joint_count:
            count = linkage.joint_count
            raise InputError(
                f"JointTravel.joint must be below the linkage's number of joints ({count}), got {self.joint}"
            )

    def length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """The spring's angle [rad]."""
        self._check(linkage)
        return self.ratio * joints_of(q, linkage.joint_count)[self.joint]

    def gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the derivative of the spring's angle [rad/rad]."""
        self._check(linkage)
        return tuple(self.ratio if joint == self.joint else 0.0 for joint in range(linkage.joint_count))

    def pulls(self, linkage: Linkage, q: Carrier) -> tuple[AppliedForce, ...]:
        """None: a torsion spring turns its joint and does not press on the pivot."""
        return ()

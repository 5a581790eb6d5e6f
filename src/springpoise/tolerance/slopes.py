"""What each number of a mechanism is worth: exact derivatives of the holding torque."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError
from springpoise.mechanism import Mechanism
from springpoise.tables import grid, number
from springpoise.tolerance.fields import field_of
from springpoise.tolerance.recorded import (
    can_vary,
    columns_of,
    nominal,
    pose_text,
    poses_of,
    size_of,
    torque_program,
    torque_units,
    torques_of,
)
from springpoise.tolerance.steps import step_of, step_text

__all__ = ["Sensitivities", "Sensitivity", "sensitivities"]

Array = NDArray[np.float64]

NOTHING = 1e-13
"""An effect of one step below this share of the peak gravity torque [1] is rounding."""


@attrs.frozen(eq=False, kw_only=True)
class Sensitivity:
    """What one field is worth."""

    name: str
    """The field."""
    unit: str
    """Its unit."""
    value: float
    """Its value in the mechanism [its unit]."""
    slope: Array
    """Derivative of the holding torque at each pose [N·m per unit], shape (p,), or (p, n) for n joints."""
    joint: int
    """The joint on which its worst effect is, from 0 on."""
    pose: int
    """Number of the pose at which it is."""
    place: str
    """That pose as text."""
    torque_unit: str = "N*m"
    """Unit of that joint's torque: ``"N*m"``, or ``"N"`` of a prismatic joint."""

    @property
    def worst(self) -> float:
        """Derivative of greatest magnitude [N·m per unit], with its sign."""
        return float(self.slope.reshape(len(self.slope), -1)[self.pose, self.joint])

    @property
    def per_step(self) -> float:
        """Worst effect of one natural step, such as 1 mm or 1 deg [N·m], >= 0."""
        return abs(self.worst) * step_of(self.unit)

    @property
    def per_percent(self) -> float:
        """Worst effect of one percent of the value [N·m], >= 0."""
        return abs(self.worst * self.value) / 100.0

    def __str__(self) -> str:
        return (
            f"{step_text(self.unit)} of {self.name} is worth {number(self.per_step, self.torque_unit)} at {self.place}"
        )


@attrs.frozen(eq=False, kw_only=True)
class Sensitivities:
    """What the fields of a mechanism are worth, the dearest first."""

    rows: tuple[Sensitivity, ...]
    """The fields that matter, ranked by the worst effect of one natural step."""
    idle: tuple[str, ...]
    """Fields on which the holding torque does not depend over the poses, such as friction."""
    unable: tuple[str, ...]
    """Fields that cannot vary where they are, such as tables made from them."""
    poses: Array
    """The poses that were looked at [rad]."""
    peak_gravity_torque: Any
    """Greatest gravity torque over the poses [N·m]; for n joints (n,)."""

    def __getitem__(self, name: str) -> Sensitivity:
        for row in self.rows:
            if row.name == name:
                return row
        if name in self.idle:
            raise KeyError(f"{name} has no effect on the holding torque")
        raise KeyError(name)

    def __iter__(self) -> Iterator[Sensitivity]:
        return iter(self.rows)

    def __len__(self) -> int:
        return len(self.rows)

    def __str__(self) -> str:
        size = float(np.max(self.peak_gravity_torque))
        lines = []
        for row in self.rows:
            share = f"{100 * row.per_step / size:.3f} %" if size > 0 else ""
            percent = number(row.per_percent, row.torque_unit) if row.value else ""
            effect = number(row.per_step, row.torque_unit)
            lines.append(
                (row.name, number(row.value, row.unit), step_text(row.unit), effect, share, percent, row.place)
            )
        text = "sensitivities of the holding torque\n" + grid(
            ("field", "value", "a step of", "is worth", "of gravity", "1 % is worth", "at"), lines
        )
        if self.idle:
            text += f"\n  no effect: {', '.join(self.idle)}"
        return text


def sensitivities(
    mechanism: Mechanism, *, over: Any = None, names: Sequence[str] | str | None = None, gravity: Any = None
) -> Sensitivities:
    """What each number of a mechanism is worth in holding torque, exactly, to first order.

    The formulas themselves are differentiated, nothing is differenced. Where a spring goes slack
    or a cable leaves a disc, the derivative is that of the side on which the pose lies.

    Parameters
    ----------
    mechanism
        The mechanism as drawn.
    over
        Poses [rad], shape (p,), or (p, n) for n joints; None for 121 over the travel.
    names
        Names of fields (see ``list_fields``); None for all that can vary.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Sensitivities
        Ranked by the worst effect over the poses of one natural step: 1 mm, 1 deg, 10 g, 1 N, 1 N/m.

    Raises
    ------
    InputError, InputTypeError
        An unknown field, or one that cannot vary where it is.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
    >>> mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(858), path), travel=(-1, 1))
    >>> print(sensitivities(mech).rows[0])
    1 mm of springs[0].path.last.at[0] is worth 0.08580 N*m at 0.00 deg
    """
    q = poses_of(mechanism, over)
    nominal(mechanism, q, gravity)
    size = size_of(mechanism, q, gravity)
    able, unable = can_vary(mechanism, names)
    program = torque_program(mechanism, len(able), lambda v: dict(zip(able, v, strict=True)), gravity)
    joints = mechanism.linkage.joint_count
    fields = [field_of(mechanism, name) for name in able]
    slopes = torques_of(program.derivative(program.inputs[joints:]), columns_of(q), [field.value for field in fields])
    rows, idle = [], []
    for index, field in enumerate(fields):
        slope = np.stack([slopes[joint * len(able) + index] for joint in range(joints)], axis=-1)
        if not np.all(np.isfinite(slope)):
            raise InputError(f"names must be fields whose effect is finite over the poses, got {field.name!r}")
        scaled = np.abs(slope) * step_of(field.unit)
        if not np.any(scaled > NOTHING * np.max(size)) or not np.any(slope):
            idle.append(field.name)
            continue
        pose, joint = np.unravel_index(int(np.argmax(scaled)), scaled.shape)
        rows.append(
            Sensitivity(
                name=field.name,
                unit=field.unit,
                value=field.value,
                slope=slope if joints > 1 else slope[:, 0],
                joint=int(joint),
                pose=int(pose),
                place=pose_text(mechanism, q[pose]),
                torque_unit=torque_units(mechanism)[joint],
            )
        )
    rows.sort(key=lambda row: (-row.per_step, row.name))
    return Sensitivities(
        rows=tuple(rows),
        idle=tuple(idle),
        unable=tuple(unable),
        poses=q,
        peak_gravity_torque=size if joints > 1 else float(size[0]),
    )

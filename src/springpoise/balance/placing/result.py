"""What a placement found."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import attrs

from springpoise.balance.chains.fit import JointResidual
from springpoise.balance.fitted_mounts import rows_of_mounts
from springpoise.balance.residuals import Residual, shown_pose
from springpoise.errors import NoSolution
from springpoise.mechanism import Mechanism
from springpoise.tables import degrees, facts, millimetres, number

__all__ = ["PlacedKnob", "PlacedLimit", "Placement"]

ACTIVE = 1e-6
"""A bound or limit that is nearer than this share of its size is active [1]."""


@attrs.frozen
class PlacedKnob:
    """Where a knob came to stand between its bounds."""

    name: str
    """Name of the knob."""
    value: float
    """The value found, SI."""
    low: float
    """Lower bound, SI."""
    high: float
    """Upper bound, SI."""
    unit: str
    """SI unit where the bounds were given as text; empty where they were plain numbers."""
    gain: float | None
    """How much smaller the norm would get for one unit of room beyond the bound [N·m, or N, per unit]; 0 inside, None for not known."""

    @property
    def margin(self) -> float:
        """Distance to the nearer bound, in the knob's unit."""
        return min(self.value - self.low, self.high - self.value)

    @property
    def at_bound(self) -> str | None:
        """``"lower"`` or ``"upper"`` where the knob stands at a bound; None inside."""
        if self.margin > ACTIVE * (self.high - self.low):
            return None
        return "lower" if self.value - self.low < self.high - self.value else "upper"

    def __str__(self) -> str:
        return self._text("N*m")

    def _text(self, norm_unit: str) -> str:
        """The knob in words, ``norm_unit`` being that of the norm: ``"N*m"``, or ``"N"`` where joints slide."""
        value, low, high = (_quantity(v, self.unit or "1") for v in (self.value, self.low, self.high))
        text = f"{value} (from {low} to {high})"
        if self.at_bound is None:
            return text
        text += f", at its {self.at_bound} bound"
        if not self.gain:
            return text
        step, said = {"m": (1e-3, "1 mm"), "rad": (math.radians(1.0), "1 deg")}.get(
            self.unit, (0.01 * (self.high - self.low), "1 % of its range")
        )
        return f"{text}: {said} more would take about {number(abs(self.gain) * step, norm_unit, 2)} off"


@attrs.frozen
class PlacedLimit:
    """One requirement, where it is nearest over the poses."""

    name: str
    """What is limited."""
    unit: str
    """SI unit of the values."""
    value: float
    """The value at the pose where it is nearest."""
    allowed: float
    """What is allowed there."""
    side: str
    """``"at least"`` or ``"at most"``."""
    margin: float
    """How far inside; negative outside."""
    at: Any
    """That pose, in ``joint_unit``; of several joints a tuple with a value each."""
    joint_unit: str
    """``"rad"``, or ``"m"`` where the joints slide."""
    active: bool
    """Whether it is reached."""
    gain: float | None
    """How much smaller the norm would get for one unit of room [N·m, or N, per unit]; 0 where it is not reached, None for not known."""

    def __str__(self) -> str:
        value, allowed, margin = (_quantity(v, self.unit) for v in (self.value, self.allowed, self.margin))
        text = f"{value}, {self.side} {allowed}, at {shown_pose(self.at, self.joint_unit)}"
        return f"{text}: reached" if self.active and self.margin >= 0.0 else f"{text}: margin {margin}"


def _of_joint(one: JointResidual) -> str:
    text = f"worst {number(one.worst, one.unit)}"
    return text + (f" ({100 * one.worst_fraction:.2f} %)" if one.peak_gravity_torque > 0 else "")


def _quantity(value: float, unit: str) -> str:
    return {"m": millimetres, "rad": degrees}[unit](value) if unit in ("m", "rad") else number(value, unit)


@attrs.frozen
class Placement:
    """The best geometry that a search found between the bounds, with its springs."""

    mechanism: Mechanism
    """The mechanism with mounts placed and springs sized."""
    values: Mapping[str, float]
    """Knob values by name, SI."""
    norm: str
    """What was made least: ``"minimax"``, the worst residual, or ``"rms"``."""
    residual: Residual
    """What is left over the poses; of several joints, at all of them together."""
    joints: tuple[JointResidual, ...]
    """What is left at each joint."""
    knobs: tuple[PlacedKnob, ...]
    """The knobs, each with its bounds and how near they are."""
    limits: tuple[PlacedLimit, ...]
    """The requirements, each where it is nearest."""
    feasible: bool
    """Whether all requirements are kept."""
    left_out: tuple[str, ...]
    """Names of the mounts that are best left out."""
    starts: int
    """From how many places the search set out."""
    reached: int
    """How many of them ended within 1 % of the best."""
    derivatives: str
    """``"exact"``, or ``"none"`` where ``build`` could not be recorded."""
    why: str | None
    """Why there were no derivatives; None where there were."""

    @property
    def success(self) -> bool:
        """Whether all requirements are kept and a spring helps."""
        return self.feasible and bool(self.mechanism.springs)

    @property
    def active(self) -> tuple[str, ...]:
        """Names of the knobs at a bound and of the requirements that are reached."""
        return (
            *(one.name for one in self.knobs if one.at_bound),
            *(one.name for one in self.limits if one.active),
        )

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if not self.feasible:
            worst = min(self.limits, key=lambda limit: limit.margin / max(abs(limit.allowed), 1e-9))
            return (
                f"no geometry between the bounds was found that keeps every limit; the nearest one misses "
                f"{worst.name}: {worst}"
            )
        if not self.mechanism.springs:
            return "no spring makes the residual smaller anywhere between the bounds"
        what = "worst residual" if self.norm == "minimax" else "rms residual"
        return f"smallest {what} of {self.starts} starts, {self.reached} of which came within 1 % of it" + (
            "" if self.derivatives == "exact" else "; searched without derivatives, so the last digits are open"
        )

    def require(self) -> Placement:
        """The result itself, or an error where nothing fits.

        Raises
        ------
        NoSolution
            A requirement is not kept, or no spring helps; the message says which and by how much.
        """
        if not self.success:
            raise NoSolution(f"{self.status}; {self.residual}")
        return self

    def __str__(self) -> str:
        rows = [("status", self.status), ("residual", str(self.residual))]
        if len(self.joints) > 1:
            rows += [(f"  joint {one.name}", _of_joint(one)) for one in self.joints]
        rows += [(one.name, one._text(self.residual.unit)) for one in self.knobs]
        rows += rows_of_mounts(self.mechanism)
        rows += [(name, "best left out") for name in self.left_out]
        rows += [(one.name, str(one)) for one in self.limits]
        if self.why is not None:
            rows.append(("derivatives", f"none: {self.why}"))
        return f"placement ({self.norm})\n" + facts(rows)

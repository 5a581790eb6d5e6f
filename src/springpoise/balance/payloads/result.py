"""What following a range of payloads takes: the points to move, and where to for each payload."""

from __future__ import annotations

import math
from typing import Any

import attrs

from springpoise.balance.residuals import Residual
from springpoise.errors import NoSolution
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism
from springpoise.tables import degrees, facts, grid, millimetres, number

__all__ = ["SLIGHT", "AdjustmentStep", "PayloadAdjustment", "PointToMove"]

SLIGHT = 1e-9
"""A length by which a working range is left that is rounding [m]."""


@attrs.frozen
class AdjustmentStep:
    """The setting for one payload."""

    payload: float
    """The payload [kg]."""
    shift: float
    """How far the point moves from where it is now [m], along its line."""
    place: tuple[float, float]
    """Where the point is then, in the frame of its body [m]."""
    exact_place: tuple[float, float] | None
    """Where it would have to be for an exact balance, if it need not stay on its line [m]; None where not known."""
    within_reach: bool
    """Whether the point gets there."""
    mechanism: Mechanism
    """The mechanism with this payload and setting."""
    before: Mechanism
    """The mechanism with this payload and the setting of now."""
    residual: Residual
    """What is left over the poses."""
    residual_before: Residual
    """What is left where nothing is moved."""
    free_at: tuple[float, ...]
    """Poses in the travel at which moving the point costs no energy [rad]."""
    dip: float
    """How far the springs' energy falls on the way, at the first of these poses [J]; NaN where there is none."""
    margin: float
    """Least distance of the moved spring to the ends of its working range [m]; negative outside."""

    def energy_to_adjust(self, q: Any) -> Any:
        """Work that moving the point takes with the arm held at ``q`` [J]; negative where the springs do it."""
        return self.mechanism.spring_energy(q) - self.before.spring_energy(q)


@attrs.frozen
class PointToMove:
    """One point that can be moved, and where to for each payload."""

    name: str
    """What it is: anchor or attachment, and of which mount."""
    move: str
    """``"anchor"`` on the ground, ``"attachment"`` on a moving body."""
    mount: str
    """Name of the mount."""
    body: str
    """Name of the body that carries the point."""
    place_now: tuple[float, float]
    """Where it is now, in the frame of that body [m]."""
    direction: tuple[float, float]
    """Unit direction in which it moves."""
    steps: tuple[AdjustmentStep, ...]
    """The setting for each payload."""

    @property
    def worst(self) -> float:
        """Greatest holding torque that remains, over poses and payloads [N·m]."""
        return max(step.residual.worst for step in self.steps)

    @property
    def way(self) -> float:
        """How far the point moves between its extreme settings [m]."""
        shifts = [step.shift for step in self.steps]
        return max(shifts) - min(shifts)


@attrs.frozen
class PayloadAdjustment:
    """How to follow a range of payloads."""

    points: tuple[PointToMove, ...]
    """The points that can be moved, the one that leaves least over and moves least first."""
    payloads: tuple[float, float]
    """The range of payloads [kg]."""
    at: Point
    """Where the payload sits."""
    friction_payloads: tuple[float, float] | None
    """Payloads that friction alone holds at every pose, as the mechanism is set now [kg]; None where it holds none."""
    adjust_at: float
    """Pose for which the table gives the work of adjusting [rad]."""

    @property
    def chosen(self) -> PointToMove:
        """The point to move."""
        return self.points[0]

    @property
    def success(self) -> bool:
        """Whether the chosen point gets to all its places, and its spring stays within its working range there."""
        return all(step.within_reach and step.margin >= -SLIGHT for step in self.chosen.steps)

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        chosen = self.chosen
        missed = [step for step in chosen.steps if not step.within_reach]
        if missed:
            step = max(missed, key=lambda one: one.residual.worst)
            return (
                f"the {chosen.name} does not reach its place for {_mass(step.payload)}: at the end of its reach "
                f"{number(step.residual.worst, 'N*m')} are left"
            )
        worst = min(chosen.steps, key=lambda one: one.margin)
        if worst.margin < -SLIGHT:
            return (
                f"moving the {chosen.name} takes its spring {millimetres(-worst.margin)} out of its working range for "
                f"{_mass(worst.payload)}"
            )
        return f"move the {chosen.name} over {millimetres(chosen.way)}; {_left(chosen.worst)} is left at worst"

    def require(self) -> PayloadAdjustment:
        """The result itself, or an error where the point does not reach all its places.

        Raises
        ------
        NoSolution
            The chosen point's reach is too short, or its spring leaves its working range.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def __str__(self) -> str:
        chosen = self.chosen
        (x, y), (dx, dy) = chosen.place_now, chosen.direction
        rows = [
            ("status", self.status),
            (
                "now at",
                f"({1e3 * x + 0.0:.2f}, {1e3 * y + 0.0:.2f}) mm on {chosen.body!r}, "
                f"moves along {degrees(math.atan2(dy, dx))}",
            ),
            (
                "friction alone holds",
                _held(self.friction_payloads),
            ),
        ]
        header = (
            "payload",
            "move by / mm",
            "x / mm",
            "y / mm",
            "left / N*m",
            "unmoved / N*m",
            f"work at {degrees(self.adjust_at)} / J",
            "free at / deg",
            "dip / J",
        )
        table = [
            (
                _mass(step.payload),
                f"{1e3 * step.shift + 0.0:.2f}",
                f"{1e3 * step.place[0] + 0.0:.2f}",
                f"{1e3 * step.place[1] + 0.0:.2f}",
                f"{step.residual.worst:.3f}",
                f"{step.residual_before.worst:.3f}",
                f"{float(step.energy_to_adjust(self.adjust_at)) + 0.0:.3f}",
                ", ".join(f"{math.degrees(q):.1f}" for q in step.free_at) or "-",
                f"{step.dip:.3f}" if math.isfinite(step.dip) else "-",
            )
            for step in chosen.steps
        ]
        others = [
            (f"or the {one.name}", f"over {millimetres(one.way)}, {_left(one.worst)} is left at worst")
            for one in self.points[1:]
        ]
        return "\n".join(["payload adjustment", facts(rows), grid(header, table), *([facts(others)] if others else [])])


def _held(payloads: tuple[float, float] | None) -> str:
    if payloads is None:
        return "no payload at every pose"
    low, high = map(_mass, payloads)
    return f"{low} to {high}" if low != high else f"{low} and no other"


def _mass(mass: float) -> str:
    return number(mass, "kg") if mass > 1e-9 else "0 kg"


def _left(torque: float) -> str:
    return number(torque, "N*m") if torque > 1e-9 else "nothing"

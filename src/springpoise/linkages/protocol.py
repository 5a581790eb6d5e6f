"""What a linkage is to the rest of the library."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple, Protocol

from springpoise.carriers import Carrier
from springpoise.linkages.body import Point

__all__ = ["AppliedForce", "Linkage", "PointMass"]


class PointMass(NamedTuple):
    """A mass [kg] that stands for one or several bodies of a frame, and where it sits."""

    mass: Carrier
    at: Point


class AppliedForce(NamedTuple):
    """A force (x, y) in ground directions [N] that acts at a point of a body."""

    at: Point
    x: Carrier
    y: Carrier


class Linkage(Protocol):
    """Where its bodies are, and which masses it carries.

    ``q`` is one joint's angle of any shape, or for n joints an array of shape (..., n) or a tuple
    of n components. Results are given component by component; what does not move may come back
    as a scalar that broadcasts.
    """

    @property
    def joint_count(self) -> int:
        """Number of joints n, >= 1."""
        ...

    @property
    def frames(self) -> tuple[str, ...]:
        """Names of the bodies that points can be fixed in; ``"ground"`` comes first."""
        ...

    @property
    def masses(self) -> tuple[PointMass, ...]:
        """Point masses that weigh as much as the bodies, in the same places [kg]."""
        ...

    def position(self, point: Point, q: Carrier) -> tuple[Carrier, Carrier]:
        """Ground coordinates (x, y) of ``point`` [m]."""
        ...

    def jacobian(self, point: Point, q: Carrier) -> tuple[tuple[Carrier, Carrier], ...]:
        """For each joint, the derivative (dx, dy) of the position by that joint's angle [m/rad]."""
        ...

    def pivot_force(self, applied: Sequence[AppliedForce], q: Carrier) -> tuple[Carrier, Carrier]:
        """Force (x, y) that the pivot's bearing exerts on what it carries, to balance ``applied`` [N]."""
        ...

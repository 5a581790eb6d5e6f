"""What a linkage is to the rest of the library."""

from __future__ import annotations

from typing import NamedTuple, Protocol

from springpoise.carriers import Carrier
from springpoise.linkages.body import Point

__all__ = ["AppliedForce", "Linkage", "PointMass"]


class PointMass(NamedTuple):
    """A mass [kg] that stands for one or several bodies of a frame, and where it sits."""

    mass: Carrier
    at: Point


class AppliedForce(NamedTuple):
    """A force in ground directions [N], (x, y) or (x, y, z), that acts at a point of a body."""

    at: Point
    force: tuple[Carrier, ...]


class Linkage(Protocol):
    """Where its bodies are, and which masses it carries.

    More members are used where a linkage has them: ``dimensions``, 3 in space and taken as 2
    otherwise; ``joint_names``; ``pivots`` (names) and ``pivot_forces(applied, q)``, for each of
    them the force of its bearing on what hangs on it [N], without which pivot loads are not known;
    ``with_body(body, frame)`` and ``without_body(name)`` for payloads; ``gravity_torques(q,
    gravity)`` where there is a shorter way than over all masses; and ``missing(q)`` with
    ``unreachable`` for loops that cannot close at every pose.

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

    def position(self, point: Point, q: Carrier) -> tuple[Carrier, ...]:
        """Ground coordinates of ``point`` [m]: (x, y), or (x, y, z) in space."""
        ...

    def jacobian(self, point: Point, q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """For each joint, the derivative of the position by that joint's angle [m/rad]."""
        ...

"""One rigid arm on one pivot."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Body, Point
from springpoise.linkages.protocol import AppliedForce, PointMass

__all__ = ["Arm"]


def _bodies(value: Any) -> tuple[Body, ...]:
    items = (value,) if isinstance(value, Body) else value
    if not isinstance(items, Sequence) or isinstance(items, str) or not all(isinstance(b, Body) for b in items):
        raise InputTypeError(f"Arm.bodies must be a Body or a sequence of them, got {value!r}")
    return tuple(items)


@attrs.frozen(field_transformer=units.named_fields)
class Arm:
    """A rigid arm that turns about a fixed pivot, the origin of the ground's frame.

    At ``q = 0`` the arm's own x axis lies along the ground's, horizontal to the right; ``q``
    grows counter-clockwise. Points are fixed in ``"ground"`` or in ``"arm"``. Several bodies may
    ride on the arm; a counterweight is a body behind the pivot.

    Raises
    ------
    InputError, InputTypeError, UnitError
        No body, something that is not a body, or a length that is not positive.

    Examples
    --------
    >>> arm = Arm([Body("3.2 kg", (0.41, 0.02)), Body("1 kg", (-0.2, 0))], length="0.8 m")
    >>> arm.tip
    Point(body='arm', at=(0.8, 0.0))
    """

    bodies: tuple[Body, ...] = attrs.field(converter=_bodies)
    """The bodies on the arm: one ``Body`` or a sequence of them."""
    length: Carrier | None = attrs.field(
        default=None, converter=units.optional_metre, validator=units.positive, kw_only=True
    )
    """Distance from the pivot to the tip along the arm's x axis [m], > 0; None for not given."""

    def __attrs_post_init__(self) -> None:
        if not self.bodies:
            raise InputError("Arm.bodies must be at least one Body, got none; a massless arm is Body(0, (0, 0))")
        for body in self.bodies:
            if len(body.com) != 2:
                raise InputError(f"Body.com must be (x, y) in m on an Arm, got {body.com}")

    @property
    def joint_count(self) -> int:
        """Number of joints: 1."""
        return 1

    @property
    def joint_names(self) -> tuple[str, ...]:
        """Name of the joint: ``"arm"``."""
        return ("arm",)

    @property
    def pivots(self) -> tuple[str, ...]:
        """Names of the joints whose loads `pivot_forces` gives: the arm's own."""
        return ("arm",)

    @property
    def frames(self) -> tuple[str, ...]:
        """Names of the bodies that points can be fixed in."""
        return "ground", "arm"

    @property
    def tip(self) -> Point:
        """The far end of the arm, on its x axis.

        Raises
        ------
        InputError
            The arm's length was not given.
        """
        if self.length is None:
            raise InputError("Arm.length must be given to know the tip, got None; name a Point instead")
        return Point("arm", (self.length, 0.0))

    @property
    def mass(self) -> Carrier:
        """Total mass of the bodies on the arm [kg]."""
        return sum(body.mass for body in self.bodies)

    @property
    def moment(self) -> tuple[Carrier, Carrier]:
        """First moment of mass about the pivot, in the arm's frame (x, y) [kg·m]."""
        return (
            sum(body.mass * body.com[0] for body in self.bodies),
            sum(body.mass * body.com[1] for body in self.bodies),
        )

    @property
    def masses(self) -> tuple[PointMass, ...]:
        """The bodies as one point mass at their common centre; one each where there is no common centre."""
        mass = self.mass
        if isinstance(mass, float) and mass > 0 and len(self.bodies) > 1:
            return (PointMass(mass, Point("arm", (self.moment[0] / mass, self.moment[1] / mass))),)
        return tuple(PointMass(body.mass, Point("arm", body.com)) for body in self.bodies)

    def with_body(self, body: Body, frame: str = "arm") -> Arm:
        """The same arm with one more body on it."""
        return attrs.evolve(self, bodies=(*self.bodies, body))

    def without_body(self, name: str) -> Arm:
        """The same arm without the bodies of that name."""
        return attrs.evolve(self, bodies=tuple(body for body in self.bodies if body.name != name))

    def _on_arm(self, point: Point) -> bool:
        if len(point.at) != 2:
            raise InputError(f"Point.at must be (x, y) in m on an Arm, got {point.at}")
        if point.body == "arm":
            return True
        if point.body == "ground":
            return False
        raise InputError(f"Point.body must be one of 'ground', 'arm' on an Arm, got {point.body!r}")

    def position(self, point: Point, q: Carrier) -> tuple[Carrier, Carrier]:
        """Ground coordinates (x, y) of ``point`` at angle ``q`` [m].

        Parameters
        ----------
        point
            A point of ``"ground"`` or ``"arm"``.
        q
            Arm angle [rad], any shape, counter-clockwise positive, 0 horizontal to the right.

        Raises
        ------
        InputError
            The point is fixed in a body that the arm does not have.
        """
        on_arm = self._on_arm(point)
        px, py = point.at
        if not on_arm:
            return px, py
        xp = namespace(q, px, py)
        c, s = xp.cos(q), xp.sin(q)
        return px * c - py * s, px * s + py * c

    def jacobian(self, point: Point, q: Carrier) -> tuple[tuple[Carrier, Carrier], ...]:
        """Derivative of the position by the joint angle: ``((dx, dy),)`` [m/rad]; arguments as ``position``."""
        if not self._on_arm(point):
            return ((0.0, 0.0),)
        x, y = self.position(point, q)
        return ((-y, x),)

    def pivot_forces(self, applied: Sequence[AppliedForce], q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """Force (x, y) that the bearing exerts on the arm so that it stands still under ``applied``, as the only one [N]."""
        on_arm = [force for at, force in applied if self._on_arm(at)]
        return ((-sum(force[0] for force in on_arm), -sum(force[1] for force in on_arm)),)

"""Where a stock spring would sit: straight from anchor to arm, or behind a pulley at the anchor."""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, Disc, Path, Straight
from springpoise.springs import ExtensionSpring

__all__ = ["Geometry", "PulleyRoute", "Routing"]

Array = NDArray[np.float64]
Pair = tuple[Carrier, Carrier]


def _turn(value: Any) -> str:
    if value not in ("cw", "ccw"):
        raise InputError(f"PulleyRoute.turn must be 'cw' or 'ccw', got {value!r}")
    return str(value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class PulleyRoute:
    """A spring hidden behind a pulley at the anchor, whose cable runs on to the arm.

    The pulley sits beside the anchor by its own radius, so that the cable leaves it near the
    anchor; the cable is cut so that halfway through the travel the spring's force line passes
    through zero where the cable's end would meet the anchor. So the spring acts nearly as one of
    zero free length.

    Raises
    ------
    InputError, UnitError
        A radius that is not positive, an unknown turn, or a wrong dimension.
    """

    radius: float = attrs.field(converter=units.metre, validator=units.positive)
    """Radius at which the middle of the cable runs [m], > 0."""
    spring_end: tuple[float, float] = attrs.field(converter=units.metre_pair)
    """Where the fixed end of the spring is, on the ground [m]."""
    turn: str = attrs.field(default="cw", converter=_turn)
    """Sense in which the cable runs round the pulley on its way from spring to arm."""
    bearing_friction: float = attrs.field(default=0.0, converter=units.number, validator=units.not_negative)
    """Friction coefficient of the pulley's bearing [1], >= 0."""
    bearing_radius: float = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative)
    """Radius at which the pulley's bearing rubs [m], >= 0."""

    def __attrs_post_init__(self) -> None:
        self.disc((0.0, 0.0), (0.0, 1.0))  # the disc checks what belongs together

    def centre(self, anchor: Pair, upward: Pair) -> Pair:
        """Centre of the pulley for an anchor, ``upward`` being the unit vector from pivot to anchor."""
        side = self.radius if self.turn == "ccw" else -self.radius
        return anchor[0] + side * upward[1], anchor[1] - side * upward[0]

    def disc(self, anchor: Pair, upward: Pair) -> Disc:
        """The pulley for an anchor [m], ``upward`` being the unit vector from pivot to anchor."""
        return Disc(
            Point("ground", self.centre(anchor, upward)),
            radius=self.radius,
            turn=self.turn,
            bearing_friction=self.bearing_friction,
            bearing_radius=self.bearing_radius,
        )


class Geometry(NamedTuple):
    """Attachments at several radii for one anchor, over the poses; shapes (radii, poses) or (radii,)."""

    pull: Array
    """What a spring's rate is multiplied with [m]: its length, or behind a pulley its stretch from zero force."""
    lever: Array
    """Derivative of the path's length [m/rad]."""
    force_x: Array
    """Pull on the arm for one newton [1]."""
    force_y: Array
    least: Array
    """Least ``pull`` over the poses [m]."""
    greatest: Array
    """Greatest ``pull`` over the poses [m]."""
    room: float
    """Length that a spring may take at the most before it meets the pulley [m]; infinite without one."""

    @property
    def reached(self) -> NDArray[np.bool_]:
        """At which radii the cable reaches its end at every pose, shape (radii,)."""
        known: NDArray[np.bool_] = (
            np.isfinite(self.least) & np.isfinite(self.greatest) & np.all(np.isfinite(self.lever), axis=1)
        )
        return known


@attrs.frozen(eq=False)
class Routing:
    """How springs are mounted in a search, apart from how far from the pivot."""

    mechanism: Mechanism
    """The arm with what is on it already."""
    poses: Array
    """Poses [rad], shape (poses,)."""
    weight_angle: float
    """Where a spring of zero free length balances the arm's weight: its attachment's direction less its anchor's [rad]."""
    pulley: PulleyRoute | None
    """The pulley, or None for a straight spring."""
    anchor_angle: Carrier = 0.5 * math.pi
    """Direction of the anchor from the pivot [rad]."""
    attach_skew: Carrier = 0.0
    """How far the attachment is turned from where a zero free length would want it [rad]."""

    @property
    def attach_angle(self) -> Carrier:
        """Direction of the attachment in the arm's frame [rad], some turn of it."""
        return self.weight_angle + self.anchor_angle + self.attach_skew

    @property
    def upward(self) -> Pair:
        """Unit vector from pivot to anchor."""
        xp = namespace(self.anchor_angle)
        return xp.cos(self.anchor_angle), xp.sin(self.anchor_angle)

    def path(self, radius: Carrier, height: Carrier) -> Path:
        """The path for an attachment radius (or several) and an anchor height [m]."""
        upward = self.upward
        anchor = height * upward[0], height * upward[1]
        xp = namespace(self.attach_angle)
        attach = Point("arm", (radius * xp.cos(self.attach_angle), radius * xp.sin(self.attach_angle)))
        if self.pulley is None:
            return Straight(Point("ground", anchor), attach)
        return Cable(Point("ground", self.pulley.spring_end), self.pulley.disc(anchor, upward), attach)

    def geometry(self, radii: Array, height: float) -> Geometry:
        """Lengths, levers and pulls for several attachment radii at one anchor height."""
        linkage, q = self.mechanism.linkage, self.poses
        shape = (radii.size, q.size)
        path: Any = self.path(radii[:, None], height)
        with np.errstate(all="ignore"):
            length = np.broadcast_to(path.length(linkage, q), shape)
            lever = np.broadcast_to(path.gradient(linkage, q)[0], shape)
            forces = [force for force in path.pulls(linkage, q) if force.at.body == "arm"]
        zero = self.zero_force_length(radii, height)
        pull = length - zero[:, None]
        return Geometry(
            pull=pull,
            lever=lever,
            force_x=np.broadcast_to(sum(f.force[0] for f in forces), shape),
            force_y=np.broadcast_to(sum(f.force[1] for f in forces), shape),
            least=pull.min(axis=1),
            greatest=pull.max(axis=1),
            room=self.room(height),
        )

    def zero_force_length(self, radii: Carrier, height: Carrier) -> Carrier:
        """Length of the path at which a spring behind a pulley would have no force [m]; 0 for a straight one."""
        if self.pulley is None:
            return 0.0 * radii
        middle = 0.5 * float(self.poses.min() + self.poses.max())
        path = self.path(radii, height)
        bare = attrs.evolve(self, pulley=None).path(radii, height)
        linkage = self.mechanism.linkage
        return path.length(linkage, middle) - bare.length(linkage, middle)

    def mount(self, spring: ExtensionSpring, count: int, radius: float, height: float) -> SpringMount:
        """The mount of one candidate."""
        rigid = 0.0
        if self.pulley is not None:
            zero = float(self.zero_force_length(radius, height))
            rigid = zero - float(spring.effective_free_length)
        return SpringMount(spring, self.path(radius, height), count=count, rigid_length=rigid)

    def room(self, height: float) -> float:
        """Length that a spring may take before it meets the pulley [m]; infinite without one."""
        if self.pulley is None:
            return math.inf
        x, y = self.upward
        away = math.dist(self.pulley.centre((height * x, height * y), (x, y)), self.pulley.spring_end)
        return math.sqrt(max(away**2 - self.pulley.radius**2, 0.0))

"""The mechanism: adds up gravity and springs, and is all that the other modules look at."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, TypeAlias, overload

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, joints_of, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.gravity import STANDARD_GRAVITY
from springpoise.linkages.body import Body, Point
from springpoise.linkages.posed import posed
from springpoise.linkages.protocol import Linkage
from springpoise.mechanism.at_poses import at_poses
from springpoise.mechanism.friction import Friction
from springpoise.mechanism.mount import SpringMount
from springpoise.mechanism.sums import (
    Gravity,
    friction_bands,
    gravity_energy,
    gravity_torques,
    joined,
    magnitude,
    pivot_forces,
    spring_energy,
    spring_torques,
)
from springpoise.mechanism.travel import joint_units_of, range_or_turn, spread, travel_of
from springpoise.units import ScalarLike

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from springpoise.mechanism.equilibria import Equilibria
    from springpoise.mechanism.states import SpringState

__all__ = ["Mechanism"]

Array: TypeAlias = "NDArray[np.float64]"

PAYLOAD = "payload"
"""Name of the body that stands for a payload."""


def _linkage(value: Any) -> Any:
    missing = [n for n in ("joint_count", "frames", "masses", "position", "jacobian") if not hasattr(value, n)]
    if missing or isinstance(value, type):
        raise InputTypeError(f"Mechanism.linkage must be a linkage such as Arm, got {value!r}")
    return value


def _mounts(value: Any) -> tuple[SpringMount, ...]:
    items = (value,) if isinstance(value, SpringMount) else value
    if not isinstance(items, Sequence) or not all(isinstance(mount, SpringMount) for mount in items):
        raise InputTypeError(f"Mechanism.springs must be SpringMounts, got {value!r}")
    return tuple(items)


def _friction(value: Any) -> Friction | tuple[Friction, ...]:
    if isinstance(value, Friction):
        return value
    if isinstance(value, Sequence) and value and all(isinstance(item, Friction) for item in value):
        return tuple(value)
    raise InputTypeError(f"Mechanism.friction must be a Friction, or a sequence with one for each joint, got {value!r}")


def _gravity(value: Any) -> Any:
    return None if value is None else units.acceleration(value, "Mechanism.gravity")


@attrs.frozen(field_transformer=units.named_fields)
class Mechanism:
    """A linkage with its springs, friction and travel.

    Every method takes poses ``q`` [rad] of any shape, as numbers, strings such as ``"30 deg"``
    or quantities, and gives results of that shape. ``gravity=(gx, gy)`` [m/s²] may be given to each call
    for a tilted or accelerating base. A pose that is NaN or infinite gives NaN.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Parts of the wrong kind, points in bodies that the linkage does not have, an empty travel,
        or angles that look like degrees.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> arm = Arm(Body(mass="2 kg", com=("0.35 m", 0)))
    >>> mount = SpringMount(
    ...     ZeroLengthSpring(rate="858.081875 N/m"),
    ...     Straight(Point("ground", (0, "0.10 m")), Point("arm", ("0.08 m", 0))),
    ... )
    >>> mech = Mechanism(arm, springs=[mount])
    >>> round(mech.gravity_torque("60 deg"), 6)
    -3.432327
    >>> abs(mech.holding_torque("60 deg")) < 1e-12
    True
    """

    linkage: Linkage = attrs.field(converter=_linkage)
    """Where the bodies are and what they weigh, such as an ``Arm``."""
    springs: tuple[SpringMount, ...] = attrs.field(default=(), converter=_mounts, kw_only=True)
    """The spring mounts: one or a sequence of them."""
    friction: Friction | tuple[Friction, ...] = attrs.field(default=Friction(), converter=_friction, kw_only=True)
    """Friction of the joint, or of every joint alike; or a sequence with one for each joint."""
    travel: Any = attrs.field(default=None, kw_only=True)
    """Range of the joint (from, to) [rad]; for several joints a range each [rad, or m for a prismatic joint].

    None for not given: a full turn of a revolute joint.
    """
    gravity: tuple[Carrier, ...] = attrs.field(default=None, converter=_gravity, kw_only=True)
    """Gravity where a call does not say otherwise [m/s²]: (gx, gy), or (gx, gy, gz) in space; standard gravity by default."""

    def __attrs_post_init__(self) -> None:
        dimensions, count = getattr(self.linkage, "dimensions", 2), self.linkage.joint_count
        given: Any = self.gravity
        if given is None:
            # The default depends on the linkage; no call ever sees the None.
            object.__setattr__(self, "gravity", (0.0,) * (dimensions - 1) + (-STANDARD_GRAVITY,))
        if len(self.gravity) != dimensions:
            raise InputError(
                f"Mechanism.gravity must be {dimensions} components in m/s**2 for this linkage, got {self.gravity}"
            )
        object.__setattr__(self, "travel", travel_of(self.travel, joint_units_of(self.linkage)))  # rad or m, by joint
        if isinstance(self.friction, tuple) and len(self.friction) != count:
            raise InputError(f"Mechanism.friction must be one for each of {count} joints, got {len(self.friction)}")
        for index, mount in enumerate(self.springs):
            try:
                mount.path.length(
                    self.linkage, (0.0,) * self.linkage.joint_count if self.linkage.joint_count > 1 else 0.0
                )
            except InputError as error:
                raise InputError(f"Mechanism.springs[{index}] does not fit its linkage: {error}") from error

    # ---------------------------------------------------------------------------------------
    # torques

    @overload
    def gravity_torque(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def gravity_torque(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(1)
    def gravity_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that gravity exerts on the joint [N·m], counter-clockwise positive."""
        return joined(gravity_torques(self, q, gravity))

    @overload
    def spring_torque(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def spring_torque(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(1)
    def spring_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that the springs exert on the joint [N·m], counter-clockwise positive."""
        return joined(spring_torques(self, q))

    @overload
    def holding_torque(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def holding_torque(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(1)
    def holding_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that the actuator must add to stand still, without friction [N·m].

        Minus the sum of gravity torque and spring torque.
        """
        return joined(self._holding_torques(q, gravity))

    @overload
    def stiffness(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def stiffness(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(2)
    def stiffness(self, q: Any, gravity: Any = None) -> Any:
        """Second derivative of the energy [N·m/rad]: how the holding torque grows; positive is stable.

        Exact: the formulas themselves are differentiated, nothing is differenced. For n joints
        the full matrix, shape (..., n, n).
        """
        from springpoise.tape import Dual

        count = self.linkage.joint_count
        joints = joints_of(q, count)
        columns = []
        for moved in range(count):
            seeded = [Dual(angle, 1.0 if joint == moved else 0.0) for joint, angle in enumerate(joints)]
            torques = self._holding_torques(seeded[0] if count == 1 else tuple(seeded), gravity)
            # A torque that is NaN has no slope, even where NaN entered the sum as a constant.
            slopes = [t.slope + 0.0 * t.value if isinstance(t, Dual) else 0.0 * (t + joints[0]) for t in torques]
            columns.append(joined(slopes))
        if count == 1:
            return columns[0]
        if isinstance(columns[0], tuple):  # recorded variables, which do not stack
            return tuple(zip(*columns, strict=True))
        return namespace(*columns).stack(columns, axis=-1)

    @overload
    def friction_band(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def friction_band(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(1)
    def friction_band(self, q: Any, gravity: Any = None) -> Any:
        """Half-width of the friction band around the holding torque [N·m], >= 0.

        Joint friction, pulleys and hysteresis. The actuator stands still with anything from
        ``holding_torque - friction_band`` to ``holding_torque + friction_band``.
        """
        return joined(friction_bands(self, q, gravity))

    # ---------------------------------------------------------------------------------------
    # energy, loads, states

    @overload
    def energy(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def energy(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(0)
    def energy(self, q: Any, gravity: Any = None) -> Any:
        """Potential energy of gravity and springs [J]; gravity's is zero at the pivot's height."""
        return gravity_energy(self, q, gravity) + spring_energy(self, q)

    @overload
    def spring_energy(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def spring_energy(self, q: Any, gravity: Any = None) -> Any: ...
    @at_poses(0)
    def spring_energy(self, q: Any, gravity: Any = None) -> Any:
        """Energy stored in the springs alone [J]."""
        return spring_energy(self, q)

    @at_poses(0)
    def pivot_force(self, q: Any, gravity: Any = None) -> tuple[Any, ...]:
        """Force (x, y) that the pivot's bearing exerts on the arm at rest, in ground directions [N].

        For several pivots a tuple with one force for each of ``linkage.pivots``.

        Raises
        ------
        InputError
            A linkage in space, or a path that does not know its pulls.
        """
        forces = pivot_forces(self, q, gravity)
        return forces[0] if len(forces) == 1 else forces

    @overload
    def pivot_load(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def pivot_load(self, q: Any, gravity: Any = None) -> Any: ...
    def pivot_load(self, q: Any, gravity: Any = None) -> Any:
        """Magnitude of the bearing force at the pivot at rest [N].

        For several pivots along the last axis, in the order of ``linkage.pivots``; raises as
        ``pivot_force``.
        """
        return joined(self._pivot_loads(q, gravity))

    def spring_states(self, q: Any) -> tuple[SpringState, ...]:
        """For each mount, the spring's length, load, energy and margin to its working range.

        Parameters
        ----------
        q
            Poses [rad], any shape; each value of a state has that shape.
        """
        from springpoise.mechanism.states import SpringState

        rows = self._state_values(q)
        return tuple(SpringState(self.mount_name(i), *values) for i, values in enumerate(rows))

    def equilibria(self, gravity: Any = None) -> Equilibria:
        """Angles in the travel where the net torque of gravity and springs is zero, each stable or not.

        Friction is left out: with it the mechanism stands still wherever the holding torque lies
        within the friction band.

        Raises
        ------
        InputError
            The linkage has more than one joint.
        """
        from springpoise.mechanism.equilibria import find_equilibria

        if self.linkage.joint_count != 1:
            raise InputError(f"Mechanism.equilibria must have one joint, got {self.linkage.joint_count}")
        poses = self.poses(721)
        shape = np.shape(self.holding_torque(poses, gravity))
        if shape != poses.shape:
            raise InputError(
                f"Mechanism.equilibria must be of one mechanism, got fields or gravity that are arrays (shape {shape})"
            )
        largest = max(self.peak_gravity_torque(gravity), *map(self._peak_spring_torque, self.springs), 0.0)
        return find_equilibria(
            lambda q: -self.holding_torque(q, gravity),
            self.travel_or_turn,
            scale=self.peak_gravity_torque(gravity),
            largest_term=largest,
            closed=self.travel is None,
        )

    # ---------------------------------------------------------------------------------------
    # the mechanism and its parts

    @property
    def travel_or_turn(self) -> Any:
        """The travel, with a full turn from -π to π where none was given [rad, or m]; for n joints n ranges.

        Raises
        ------
        InputError
            A prismatic joint has no travel.
        """
        kinds = joint_units_of(self.linkage)
        if len(kinds) == 1:
            return range_or_turn(self.travel, kinds[0])
        return tuple(map(range_or_turn, self.travel or (None,) * len(kinds), kinds))

    @property
    def joint_frictions(self) -> tuple[Friction, ...]:
        """The friction of each joint."""
        return self.friction if isinstance(self.friction, tuple) else (self.friction,) * self.linkage.joint_count

    def poses(self, count: int = 181) -> Array:
        """``count`` poses over the travel [rad, or m for prismatic joints].

        One joint: evenly spaced, both ends included, shape (count,). Several: spread evenly
        through the box of the travels by a sequence that needs no seed, shape (count, n).
        """
        if isinstance(count, bool) or not isinstance(count, int) or count < 2:
            raise InputError(f"count must be a whole number >= 2, got {count!r}")
        if self.linkage.joint_count == 1:
            first, last = self.travel_or_turn
            return np.linspace(float(first), float(last), count)
        low, high = np.array(self.travel_or_turn).T
        return np.asarray(low + (high - low) * spread(count, low.size))

    def peak_gravity_torque(self, gravity: Any = None) -> Any:
        """Greatest gravity torque over the travel [N·m], >= 0: what residuals are compared with; for n joints (n,)."""
        peak = np.max(np.abs(self.gravity_torque(self.poses(721), gravity)), axis=0)
        return float(peak) if self.linkage.joint_count == 1 and np.ndim(peak) == 0 else peak

    def _peak_spring_torque(self, mount: SpringMount) -> float:
        torques = np.abs(self.with_springs(mount).spring_torque(self.poses(721)))
        return float(np.max(torques, initial=0.0, where=np.isfinite(torques)))

    def mount_name(self, index: int) -> str:
        """What the mount is called: its own name, or its number from 1 on."""
        return self.springs[index].name or f"spring {index + 1}"

    def with_payload(self, mass: ScalarLike, at: Point | None = None) -> Mechanism:
        """The same mechanism with a payload on its linkage.

        Parameters
        ----------
        mass
            Payload [kg], >= 0.
        at
            Where its centre of mass sits; None for the tip of an arm whose length is given.

        Raises
        ------
        InputError
            A negative mass, a point on the ground, or no point where the arm's length is unknown.
        """
        linkage: Any = self.linkage
        point = linkage.tip if at is None else at
        if not isinstance(point, Point):
            raise InputTypeError(f"at must be a Point on a moving body, got {point!r}")
        if point.body == "ground" or point.body not in linkage.frames:
            moving = ", ".join(repr(frame) for frame in linkage.frames if frame != "ground")
            raise InputError(f"at must be a Point on a moving body ({moving}), got {point!r}")
        kilograms = units.kilogram(mass, "mass")
        if isinstance(kilograms, float) and kilograms < 0:
            raise InputError(f"mass must be >= 0 kg, got {kilograms}")
        return attrs.evolve(self, linkage=linkage.with_body(Body(kilograms, point.at, name=PAYLOAD), point.body))

    def without_payload(self) -> Mechanism:
        """The same mechanism without what `with_payload` put on it."""
        linkage: Any = self.linkage
        return attrs.evolve(self, linkage=linkage.without_body(PAYLOAD))

    def with_springs(self, springs: Sequence[SpringMount] | SpringMount) -> Mechanism:
        """The same mechanism with these spring mounts instead of its own."""
        return attrs.evolve(self, springs=springs)

    # ---------------------------------------------------------------------------------------
    # the sums themselves, component by component, on any carrier

    @at_poses(0)
    def _state_values(self, q: Any, gravity: Any = None) -> tuple[Any, ...]:
        linkage = posed(self.linkage, q)
        states = [mount.state(linkage, q, "") for mount in self.springs]
        return tuple((state.length, state.load, state.energy, state.margin) for state in states)

    @at_poses(0)
    def _pivot_loads(self, q: Any, gravity: Any = None) -> tuple[Any, ...]:
        return tuple(magnitude(force) for force in pivot_forces(self, q, gravity))

    def _holding_torques(self, q: Carrier, gravity: Gravity) -> list[Carrier]:
        pulled = gravity_torques(self, q, gravity)
        sprung = spring_torques(self, q)
        return [-(g + s) for g, s in zip(pulled, sprung, strict=True)]

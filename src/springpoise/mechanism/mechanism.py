"""The mechanism: adds up gravity and springs, and is all that the other modules look at."""

from __future__ import annotations

import functools
import math
from collections.abc import Callable, Sequence
from typing import Any, TypeVar, cast, overload

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, joints_of, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.gravity import STANDARD_GRAVITY
from springpoise.linkages.body import Body, Point
from springpoise.linkages.protocol import AppliedForce, Linkage
from springpoise.mechanism.equilibria import Equilibria, find_equilibria
from springpoise.mechanism.friction import Friction
from springpoise.mechanism.mount import SpringMount, SpringState
from springpoise.paths.protocol import pulls_of
from springpoise.units import ScalarLike

__all__ = ["Mechanism"]

Array = NDArray[np.float64]
Gravity = tuple[Carrier, Carrier]


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


def _friction(value: Any) -> Friction:
    if not isinstance(value, Friction):
        raise InputTypeError(f"Mechanism.friction must be a Friction, got {value!r}")
    return value


_Method = TypeVar("_Method", bound=Callable[..., Any])


def _at_poses(joint_axes: int) -> Callable[[_Method], _Method]:
    """Wraps a method of poses: converts ``q`` and ``gravity`` once, and lets no bad pose give a number.

    A pose that is NaN or infinite gives NaN, whatever a formula makes of it on the way. With
    several joints, results have ``joint_axes`` axes of joints behind those of the poses.
    """

    def wrap(method: _Method) -> _Method:
        @functools.wraps(method)
        def convert(self: Mechanism, q: Any, gravity: Any = None) -> Any:
            angles = units.poses(q)
            pull = self.gravity if gravity is None else units.acceleration_pair(gravity, "gravity")
            count = self.linkage.joint_count
            if type(angles) is float and count == 1:
                value = method(self, angles if (good := math.isfinite(angles)) else 0.0, pull)
                return value if good and type(value) is float else _at_one_pose(value, good)
            if _follows_along(angles):
                return method(self, angles, pull)
            self._check_shape(angles)
            with np.errstate(all="ignore"):
                return _nan_where_not_finite(method(self, angles, pull), angles, count, joint_axes)

        return cast("_Method", convert)

    return wrap


def _follows_along(q: Any) -> bool:
    """Whether poses are recorded variables, alone or one for each joint, and not numbers."""
    if isinstance(q, float | np.ndarray):
        return False
    return isinstance(q, tuple | list) or not hasattr(namespace(q), "asarray")


def _at_one_pose(value: Any, good: bool) -> Any:
    """A plain float, or an array where a field is one; NaN at a bad pose."""
    if isinstance(value, tuple):
        return tuple(_at_one_pose(item, good) for item in value)
    plain: Any = float(value) if np.ndim(value) == 0 and isinstance(value, int | np.ndarray | np.generic) else value
    return plain if good else plain * math.nan


def _nan_where_not_finite(value: Any, q: Any, joints: int, joint_axes: int = 0) -> Any:
    """``value`` in the shape of the poses, NaN where one is not finite."""
    if isinstance(value, tuple):
        return tuple(_nan_where_not_finite(item, q, joints, joint_axes) for item in value)
    xp = namespace(q)
    fine = xp.isfinite(q)
    if joints > 1:
        fine = xp.all(fine, axis=-1)
        for _ in range(joint_axes):
            fine = xp.expand_dims(fine, axis=-1)
    if np.shape(value) == fine.shape and bool(xp.all(fine)):
        return value
    # Numbers alone would not do for every namespace, and a result may not be writable.
    return xp.where(fine, value + xp.zeros(fine.shape), math.nan)


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
    friction: Friction = attrs.field(factory=Friction, converter=_friction, kw_only=True)
    """Friction of the joint."""
    travel: tuple[float, float] | None = attrs.field(default=None, converter=units.optional_radian_pair, kw_only=True)
    """Range of the joint (from, to) [rad]; None for not given, which is a full turn."""
    gravity: tuple[Carrier, Carrier] = attrs.field(
        default=(0.0, -STANDARD_GRAVITY), converter=units.acceleration_pair, kw_only=True
    )
    """Gravity (gx, gy) where a call does not say otherwise [m/s²]."""

    def __attrs_post_init__(self) -> None:
        if self.travel is not None and not self.travel[0] < self.travel[1]:
            raise InputError(f"Mechanism.travel must be (lower, higher) rad, got {self.travel}")
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
    @_at_poses(1)
    def gravity_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that gravity exerts on the joint [N·m], counter-clockwise positive."""
        return _joined(self._gravity_torques(q, gravity))

    @overload
    def spring_torque(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def spring_torque(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(1)
    def spring_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that the springs exert on the joint [N·m], counter-clockwise positive."""
        return _joined(self._spring_torques(q))

    @overload
    def holding_torque(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def holding_torque(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(1)
    def holding_torque(self, q: Any, gravity: Any = None) -> Any:
        """Torque that the actuator must add to stand still, without friction [N·m].

        Minus the sum of gravity torque and spring torque.
        """
        return _joined(self._holding_torques(q, gravity))

    @overload
    def stiffness(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def stiffness(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(2)
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
            columns.append(_joined(slopes))
        return columns[0] if count == 1 else namespace(*columns).stack(columns, axis=-1)

    @overload
    def friction_band(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def friction_band(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(1)
    def friction_band(self, q: Any, gravity: Any = None) -> Any:
        """Half-width of the friction band around the holding torque [N·m], >= 0.

        Joint friction, pulleys and hysteresis. The actuator stands still with anything from
        ``holding_torque - friction_band`` to ``holding_torque + friction_band``.
        """
        return _joined(self._friction_bands(q, gravity))

    # ---------------------------------------------------------------------------------------
    # energy, loads, states

    @overload
    def energy(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def energy(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(0)
    def energy(self, q: Any, gravity: Any = None) -> Any:
        """Potential energy of gravity and springs [J]; gravity's is zero at the pivot's height."""
        return self._gravity_energy(q, gravity) + self._spring_energy(q)

    @overload
    def spring_energy(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def spring_energy(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(0)
    def spring_energy(self, q: Any, gravity: Any = None) -> Any:
        """Energy stored in the springs alone [J]."""
        return self._spring_energy(q)

    @_at_poses(0)
    def pivot_force(self, q: Any, gravity: Any = None) -> tuple[Any, Any]:
        """Force (x, y) that the pivot's bearing exerts on the arm at rest, in ground directions [N]."""
        return self._pivot_force(q, gravity)

    @overload
    def pivot_load(self, q: float | str, gravity: Any = None) -> float: ...
    @overload
    def pivot_load(self, q: Any, gravity: Any = None) -> Any: ...
    @_at_poses(0)
    def pivot_load(self, q: Any, gravity: Any = None) -> Any:
        """Magnitude of the bearing force at the pivot at rest [N]."""
        x, y = self._pivot_force(q, gravity)
        return namespace(x, y).sqrt(x * x + y * y)

    def spring_states(self, q: Any) -> tuple[SpringState, ...]:
        """For each mount, the spring's length, load, energy and margin to its working range.

        Parameters
        ----------
        q
            Poses [rad], any shape; each value of a state has that shape.
        """
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
    def travel_or_turn(self) -> tuple[float, float]:
        """The travel, or a full turn from -π to π where none was given [rad]."""
        return (-math.pi, math.pi) if self.travel is None else self.travel

    def poses(self, count: int = 181) -> Array:
        """``count`` evenly spaced poses over the travel [rad], shape (count,), both ends included."""
        if isinstance(count, bool) or not isinstance(count, int) or count < 2:
            raise InputError(f"count must be a whole number >= 2, got {count!r}")
        return np.linspace(*self.travel_or_turn, count)

    def peak_gravity_torque(self, gravity: Any = None) -> float:
        """Greatest gravity torque over the travel [N·m], >= 0: what residuals are compared with."""
        return float(np.max(np.abs(self.gravity_torque(self.poses(721), gravity))))

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
        return attrs.evolve(self, linkage=linkage.with_body(Body(kilograms, point.at, name="payload")))

    def with_springs(self, springs: Sequence[SpringMount] | SpringMount) -> Mechanism:
        """The same mechanism with these spring mounts instead of its own."""
        return attrs.evolve(self, springs=springs)

    # ---------------------------------------------------------------------------------------
    # the sums themselves, component by component, on any carrier

    def _check_shape(self, q: Any) -> None:
        count, shape = self.linkage.joint_count, np.shape(q)
        if count > 1 and (not shape or shape[-1] != count):
            raise InputError(f"q must be of shape (..., {count}) for {count} joints, got shape {shape}")

    def _gravity_torques(self, q: Carrier, gravity: Gravity) -> list[Carrier]:
        gx, gy = gravity
        totals: list[Carrier] = [0.0] * self.linkage.joint_count
        for mass, at in self.linkage.masses:
            for joint, (dx, dy) in enumerate(self.linkage.jacobian(at, q)):
                totals[joint] = totals[joint] + mass * (gx * dx + gy * dy)
        return totals

    @_at_poses(0)
    def _state_values(self, q: Any, gravity: Any = None) -> tuple[Any, ...]:
        states = [mount.state(self.linkage, q, "") for mount in self.springs]
        return tuple((state.length, state.load, state.energy, state.margin) for state in states)

    def _spring_torques(self, q: Carrier) -> list[Carrier]:
        totals: list[Carrier] = [0.0] * self.linkage.joint_count
        for mount in self.springs:
            for joint, torque in enumerate(mount.torques(self.linkage, q)):
                totals[joint] = totals[joint] + torque
        return totals

    def _holding_torques(self, q: Carrier, gravity: Gravity) -> list[Carrier]:
        pulled = self._gravity_torques(q, gravity)
        sprung = self._spring_torques(q)
        return [-(g + s) for g, s in zip(pulled, sprung, strict=True)]

    def _friction_bands(self, q: Carrier, gravity: Gravity) -> list[Carrier]:
        joint_friction: Carrier = self.friction.coulomb
        if self.friction.depends_on_load:
            x, y = self._pivot_force(q, gravity)
            load = namespace(x, y).sqrt(x * x + y * y)
            joint_friction = joint_friction + self.friction.pivot_friction * self.friction.pivot_radius * load
        totals: list[Carrier] = [joint_friction + 0.0 * angle for angle in joints_of(q, self.linkage.joint_count)]
        for mount in self.springs:
            for joint, band in enumerate(mount.friction_bands(self.linkage, q)):
                totals[joint] = totals[joint] + band
        return totals

    def _gravity_energy(self, q: Carrier, gravity: Gravity) -> Carrier:
        gx, gy = gravity
        total: Carrier = 0.0
        for mass, at in self.linkage.masses:
            x, y = self.linkage.position(at, q)
            total = total - mass * (gx * x + gy * y)
        return total

    def _spring_energy(self, q: Carrier) -> Carrier:
        total: Carrier = 0.0
        for mount in self.springs:
            total = total + mount.energy(self.linkage, q)
        return total

    def _pivot_force(self, q: Carrier, gravity: Gravity) -> tuple[Carrier, Carrier]:
        gx, gy = gravity
        applied = [AppliedForce(at, mass * gx, mass * gy) for mass, at in self.linkage.masses]
        for mount in self.springs:
            tension = mount.count * mount.spring.load(mount.spring_length(self.linkage, q))
            for at, x, y in pulls_of(mount.path, self.linkage, q):
                applied.append(AppliedForce(at, tension * x, tension * y))
        return self.linkage.pivot_force(applied, q)


def _joined(components: Sequence[Carrier]) -> Carrier:
    """Joint results as they leave: the value itself for one joint, along the last axis for n."""
    if len(components) == 1:
        return components[0]
    xp = namespace(*components)
    if hasattr(xp, "stack"):
        zero = xp.zeros(np.broadcast_shapes(*(np.shape(c) for c in components)))
        return xp.stack([c + zero for c in components], axis=-1)
    return np.array(components) if all(isinstance(c, float) for c in components) else tuple(components)

"""The torque term of a control loop, and the plain functions that compute it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Any, Literal, TypeAlias, overload

import attrs
import numpy as np

from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.mechanism import Mechanism
from springpoise.mechanism.sums import joined

if TYPE_CHECKING:  # recording and motors are loaded when they are asked for
    from springpoise.feedforward.actuator import Actuator
    from springpoise.tape import Program

__all__ = ["Feedforward"]

Output: TypeAlias = Literal["torque", "current", "voltage"]
"""What a compiled function computes: joint torque [N·m], motor current [A] or motor voltage [V]."""


def _mechanism(value: Any) -> Mechanism:
    if not isinstance(value, Mechanism):
        raise InputTypeError(f"Feedforward.mechanism must be a Mechanism, got {value!r}")
    return value


def _no_motor() -> Actuator:
    from springpoise.feedforward.actuator import Actuator

    return Actuator()


def _actuator(value: Any) -> Actuator | tuple[Actuator, ...]:
    from springpoise.feedforward.actuator import Actuator

    if isinstance(value, Actuator):
        return value
    if isinstance(value, Sequence) and value and all(isinstance(item, Actuator) for item in value):
        return tuple(value)
    raise InputTypeError(
        f"Feedforward.actuator must be an Actuator, or a sequence with one for each joint, got {value!r}"
    )


@attrs.frozen
class Feedforward:
    """What the actuator must give at a pose: nothing is remembered from call to call.

    Every method is a pure function of its arguments. A pose or velocity that is NaN or infinite
    gives NaN, in these methods and in compiled functions alike, never a number that looks real;
    check for it before the value goes to a drive.

    Friction enters by the commanded direction: ``moving=+1`` adds the mechanism's friction band,
    ``-1`` takes it off, ``0`` leaves it out.

    Raises
    ------
    InputTypeError
        Something else than a mechanism or an actuator.

    Examples
    --------
    >>> from springpoise import Arm, Body, Feedforward, Friction, Mechanism
    >>> mech = Mechanism(Arm(Body("2 kg", ("0.35 m", 0))), friction=Friction("0.3 N*m"))
    >>> ff = Feedforward(mech)
    >>> round(ff.torque(0.0), 6), round(ff.torque(0.0, moving=+1), 6)
    (6.864655, 7.164655)
    >>> fast = ff.compile(moving=+1)
    >>> round(fast(0.0), 6)
    7.164655
    """

    mechanism: Mechanism = attrs.field(converter=_mechanism)
    """The mechanism as it is built."""
    actuator: Actuator | tuple[Actuator, ...] = attrs.field(factory=_no_motor, converter=_actuator, kw_only=True)
    """Motor and gear of the joint, or of every joint alike; or a sequence with one for each joint.

    By default none, with ratio 1, which is enough for torques.
    """

    def __attrs_post_init__(self) -> None:
        count = self.mechanism.linkage.joint_count
        if isinstance(self.actuator, tuple) and len(self.actuator) != count:
            raise InputError(f"Feedforward.actuator must be one for each of {count} joints, got {len(self.actuator)}")

    @property
    def joint_actuators(self) -> tuple[Actuator, ...]:
        """The actuator of each joint."""
        return (
            self.actuator if isinstance(self.actuator, tuple) else (self.actuator,) * self.mechanism.linkage.joint_count
        )

    def _each(self, value: Any) -> list[Any]:
        """A joint result joint by joint; what has no axis of joints serves them all."""
        count = self.mechanism.linkage.joint_count
        if count == 1:
            return [value]
        if isinstance(value, tuple):
            return list(value)
        return [value[..., joint] for joint in range(count)] if np.ndim(value) else [value] * count

    @overload
    def torque(self, q: float | str, *, moving: Any = 0, gravity: Any = None) -> float: ...
    @overload
    def torque(self, q: Any, *, moving: Any = 0, gravity: Any = None) -> Any: ...
    def torque(self, q: Any, *, moving: Any = 0, gravity: Any = None) -> Any:
        """Torque that the actuator must add at the joint [N·m].

        Parameters
        ----------
        q
            Poses [rad], any shape.
        moving
            Direction of the commanded motion: +1 counter-clockwise, -1 clockwise, 0 at rest; a
            number or an array that broadcasts against ``q``.
        gravity
            Gravity (gx, gy) on a tilted or accelerating base [m/s²]; None for the mechanism's own.

        Raises
        ------
        InputError
            A direction other than -1, 0, +1, or poses that look like degrees.
        """
        way = _direction(moving)
        torque = self.mechanism.holding_torque(q, gravity)
        if isinstance(way, float) and way == 0.0:
            return torque
        band = self.mechanism.friction_band(q, gravity)
        each = zip(self._each(torque), self._each(way), self._each(band), strict=True)
        return joined([hold + way * rub for hold, way, rub in each])

    @overload
    def current(self, q: float | str, *, moving: Any = 0, gravity: Any = None) -> float: ...
    @overload
    def current(self, q: Any, *, moving: Any = 0, gravity: Any = None) -> Any: ...
    def current(self, q: Any, *, moving: Any = 0, gravity: Any = None) -> Any:
        """Motor current that holds or slowly moves the joint [A]; arguments as ``torque``.

        Raises
        ------
        InputError
            As ``torque``, or the actuator has no motor.
        """
        way = _direction(moving)
        torque = self.torque(q, moving=way, gravity=gravity)
        each = zip(self.joint_actuators, self._each(torque), self._each(way), strict=True)
        return joined([actuator.current(torque, moving=way) for actuator, torque, way in each])

    @overload
    def voltage(self, q: float | str, *, velocity: float | str, moving: Any = None, gravity: Any = None) -> float: ...
    @overload
    def voltage(self, q: Any, *, velocity: Any, moving: Any = None, gravity: Any = None) -> Any: ...
    def voltage(self, q: Any, *, velocity: Any, moving: Any = None, gravity: Any = None) -> Any:
        """Motor voltage at a pose and a steady velocity [V].

        Parameters
        ----------
        q
            Poses [rad], any shape.
        velocity
            Rate of the joint [rad/s], counter-clockwise positive; broadcasts against ``q``.
        moving
            Direction of the commanded motion; None for that of ``velocity``.
        gravity
            As in ``torque``.

        Raises
        ------
        InputError
            As ``current``.
        """
        from springpoise.feedforward.actuator import signal

        rates = self._each(velocity if isinstance(velocity, tuple) else signal(velocity, "rad/s", "velocity"))
        ways = [None] * len(rates) if moving is None else self._each(_direction(moving))
        torques = self._each(self.mechanism.holding_torque(q, gravity))
        bands = self._each(self.mechanism.friction_band(q, gravity))
        volts = []
        with np.errstate(invalid="ignore"):
            for actuator, rate, way, torque, band in zip(
                self.joint_actuators, rates, ways, torques, bands, strict=True
            ):
                direction = namespace(rate).sign(rate) if way is None else way
                not_finite = 0.0 * rate  # NaN for an infinite velocity, which would else give infinite volts
                needed = torque + direction * band
                volts.append(actuator.voltage(needed, velocity=rate, moving=direction) + not_finite)
        return joined(volts)

    def program(self, output: Output = "torque", *, moving: int = 0, gravity_per_call: bool = False) -> Program:
        """The computation as a recorded straight-line program; arguments as ``compile``."""
        from springpoise.tape import record

        if output not in ("torque", "current", "voltage"):
            raise InputError(f"output must be 'torque', 'current' or 'voltage', got {output!r}")
        way = _direction(moving)
        if not isinstance(way, float):
            raise InputTypeError(f"moving must be one of -1, 0, +1 for a compiled function, got {moving!r}")
        joints, components = self.mechanism.linkage.joint_count, ("gx", "gy", "gz")[: len(self.mechanism.gravity)]
        suffixes = [""] if joints == 1 else [str(joint) for joint in range(joints)]
        inputs = [f"q{suffix}" for suffix in suffixes]
        if output == "voltage":
            inputs += [f"velocity{suffix}" for suffix in suffixes]
        if gravity_per_call:
            inputs += components

        def formula(*values: Carrier) -> Any:
            q = values[0] if joints == 1 else tuple(values[:joints])
            gravity = tuple(values[-len(components) :]) if gravity_per_call else None
            if output == "voltage":
                velocity = values[joints] if joints == 1 else tuple(values[joints : 2 * joints])
                return self.voltage(q, velocity=velocity, moving=way or None, gravity=gravity)
            result = (
                self.current(q, moving=way, gravity=gravity)
                if output == "current"
                else self.torque(q, moving=way, gravity=gravity)
            )
            # Torques that depend on no joint come as numbers in an array.
            return tuple(result.tolist()) if isinstance(result, np.ndarray) else result

        return record(formula, inputs=tuple(inputs))

    def compile(
        self,
        output: Output = "torque",
        *,
        moving: int = 0,
        arrays: bool = False,
        gravity_per_call: bool = False,
    ) -> Callable[..., Any]:
        """A plain function for a control loop, or a blocked one for many poses.

        The function takes joint angles in rad and nothing else is converted or checked: angles in
        degrees give a wrong torque. NaN or infinity, in any argument, gives NaN.

        Parameters
        ----------
        output
            ``"torque"`` [N·m] and ``"current"`` [A]: a function of ``q``. ``"voltage"`` [V]: a
            function of ``q`` and ``velocity``. With n joints a function of ``q0`` to ``qn-1`` (and
            ``velocity0`` to ``velocityn-1``) that returns a tuple.
        moving
            Direction of the commanded motion that is built in: +1, -1, or 0 for at rest; for
            ``"voltage"`` 0 stands for the direction of the velocity.
        arrays
            False for floats in, float out. True for NumPy arrays of any shape, computed in
            blocks that stay in the cache.
        gravity_per_call
            True for more arguments, ``gx`` and ``gy`` (and ``gz`` in space) [m/s²], for a tilted or
            accelerating base.

        Returns
        -------
        function
            ``f(q)``, ``f(q, velocity)``, each with ``gx, gy`` behind where asked for.

        Raises
        ------
        InputError, InputTypeError
            An unknown output or direction, a missing motor, or a spring or path whose formulas
            cannot be recorded.
        """
        program = self.program(output, moving=moving, gravity_per_call=gravity_per_call)
        return program.numpy_function() if arrays else program.python_function()


def _direction(moving: Any) -> Any:
    """-1, 0 or +1 as a float, or an array of them."""
    if isinstance(moving, int | float | np.integer | np.floating) and not isinstance(moving, bool):
        if moving in (-1, 0, 1):
            return float(moving)
    elif isinstance(moving, np.ndarray | list | tuple):
        ways = np.asarray(moving)
        if not ways.ndim:
            return _direction(ways[()])
        if ways.dtype.kind in "iuf" and np.all(np.isin(ways, (-1, 0, 1))):
            return ways.astype(np.float64)
    elif hasattr(type(moving), "__array_namespace__"):
        return moving
    raise InputError(f"moving must be -1, 0 or +1, got {moving!r}")

"""From torque at the joint to current and voltage at the motor."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError

__all__ = ["Actuator", "Motor", "signal"]


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Motor:
    """A permanent-magnet motor with its drive, in the steady state.

    Raises
    ------
    InputError, UnitError
        A value that is not positive, not finite or of another dimension.
    """

    torque_constant: Carrier = attrs.field(converter=units.newton_metre_per_ampere, validator=units.positive)
    """Torque for one ampere [N·m/A], > 0; in SI units the same number is the back-EMF constant [V·s/rad]."""
    resistance: Carrier = attrs.field(converter=units.ohm, validator=units.positive)
    """Resistance that the voltage sees, winding and leads [Ω], > 0."""


def signal(value: Any, unit: str, name: str) -> Any:
    """A value as it comes in at each call: as a field's, but NaN and infinity pass, and come out as NaN."""
    if isinstance(value, float):
        return float(value)
    if isinstance(value, np.ndarray) and value.dtype.kind in "iuf":
        return value.astype(np.float64) if value.ndim else float(value)
    return units.scalar_si(value, unit, name)


def _motor(value: Any) -> Motor | None:
    if value is not None and not isinstance(value, Motor):
        raise InputTypeError(f"Actuator.motor must be a Motor, got {value!r}")
    return value


def _sign(value: Any) -> int:
    if isinstance(value, bool) or value not in (1, -1):
        raise InputError(f"Actuator.sign must be +1 or -1, got {value!r}")
    return int(value)


@attrs.frozen(field_transformer=units.named_fields)
class Actuator:
    """A motor and its gear on a joint; the one place where the motor's sense and zero are kept.

    The motor turns ``sign · ratio`` times as far as the joint, and stands at its own zero where
    the joint's angle is ``zero``.

    The efficiency counts by the direction of power. Driving (torque and motion in the same
    sense) the motor gives 1/efficiency of the ideal torque; driven back it gives efficiency
    times the ideal torque, since the gear's losses help to hold. Standing still it gives the
    ideal torque, which lies between the two.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A ratio that is not positive, an efficiency outside (0, 1], a sign other than +1 or -1.

    Examples
    --------
    >>> actuator = Actuator(Motor(torque_constant="0.05 N*m/A", resistance="0.6 ohm"), ratio=60, efficiency=0.8)
    >>> round(actuator.current(12.0, moving=+1), 6), round(actuator.current(12.0, moving=-1), 6)
    (5.0, 3.2)
    """

    motor: Motor | None = attrs.field(default=None, converter=_motor)
    """The motor; None where only torques are wanted."""
    ratio: Carrier = attrs.field(default=1.0, converter=units.number, validator=units.positive, kw_only=True)
    """Turns of the motor for one turn of the joint [1], > 0."""
    efficiency: Carrier = attrs.field(default=1.0, converter=units.number, validator=units.fraction, kw_only=True)
    """Power out over power in of the gear [1], above 0 and at most 1."""
    sign: int = attrs.field(default=1, converter=_sign, kw_only=True)
    """+1 where a positive motor current turns the joint counter-clockwise, -1 where clockwise."""
    zero: Carrier = attrs.field(default=0.0, converter=units.radian, kw_only=True)
    """Angle of the joint where the motor's own angle reads zero [rad]."""

    def joint_angle(self, motor_angle: Carrier) -> Carrier:
        """Angle of the joint [rad] where the motor's own angle reads ``motor_angle`` [rad]."""
        return self.zero + self.sign * signal(motor_angle, "rad", "motor_angle") / self.ratio

    def motor_angle(self, joint_angle: Carrier) -> Carrier:
        """The motor's own angle [rad] where the joint stands at ``joint_angle`` [rad]."""
        return self.sign * self.ratio * (signal(joint_angle, "rad", "joint_angle") - self.zero)

    def motor_torque(self, torque: Carrier, *, moving: Carrier = 0) -> Carrier:
        """Torque of the motor [N·m, in the motor's own sense] that gives ``torque`` at the joint.

        Parameters
        ----------
        torque
            Torque at the joint [N·m], counter-clockwise positive.
        moving
            Direction of the commanded motion: +1 counter-clockwise, -1 clockwise, 0 at rest.
        """
        torque, moving = signal(torque, "N*m", "torque"), signal(moving, "1", "moving")
        power = torque * moving
        xp = namespace(power, torque)
        driving, driven_back = 1.0 / self.efficiency, self.efficiency
        gear = xp.where(power > 0.0, driving, xp.where(power < 0.0, driven_back, 1.0))
        return self.sign * torque * gear / self.ratio

    def current(self, torque: Carrier, *, moving: Carrier = 0) -> Carrier:
        """Motor current [A] for ``torque`` [N·m] at the joint; arguments as ``motor_torque``.

        Raises
        ------
        InputError
            The actuator was given no motor.
        """
        return self.motor_torque(torque, moving=moving) / self._motor.torque_constant

    def voltage(self, torque: Carrier, *, velocity: Carrier, moving: Carrier | None = None) -> Carrier:
        """Motor voltage [V] for ``torque`` [N·m] at the joint while it turns.

        Parameters
        ----------
        torque
            Torque at the joint [N·m].
        velocity
            Rate of the joint [rad/s], counter-clockwise positive.
        moving
            Direction of the commanded motion; None for that of ``velocity``.

        Raises
        ------
        InputError
            The actuator was given no motor.
        """
        velocity = signal(velocity, "rad/s", "velocity")
        if moving is None:
            moving = namespace(velocity).sign(velocity)
        motor_rate = self.sign * self.ratio * velocity
        back_emf = self._motor.torque_constant * motor_rate
        return self._motor.resistance * self.current(torque, moving=moving) + back_emf

    @property
    def _motor(self) -> Motor:
        if self.motor is None:
            raise InputError("Actuator.motor must be a Motor to know currents and voltages, got None")
        return self.motor

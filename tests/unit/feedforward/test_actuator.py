"""Actuator: direction of power, sense and zero, current and voltage, and messages."""

from __future__ import annotations

import itertools
import math
import re

import numpy as np
import pytest

from springpoise import Actuator, Motor
from springpoise.errors import InputError, InputTypeError, UnitError

MOTOR = Motor(torque_constant="50 mN*m/A", resistance=0.6)
GEARED = Actuator(MOTOR, ratio=60, efficiency=0.8)


@pytest.mark.parametrize(
    ("torque", "moving", "expected"),
    [
        (12.0, +1, 12.0 / 60 / 0.8),
        (12.0, -1, 12.0 / 60 * 0.8),
        (12.0, 0, 12.0 / 60),
        (-12.0, -1, -12.0 / 60 / 0.8),
        (-12.0, +1, -12.0 / 60 * 0.8),
        (-12.0, 0, -12.0 / 60),
        (0.0, +1, 0.0),
    ],
)
@pytest.mark.parametrize("sign", [+1, -1])
def test_efficiency_counts_by_the_direction_of_power(torque, moving, expected, sign):
    actuator = Actuator(MOTOR, ratio=60, efficiency=0.8, sign=sign)
    found = actuator.motor_torque(torque, moving=moving)
    assert found == pytest.approx(sign * expected) and type(found) is float
    assert actuator.current(torque, moving=moving) == pytest.approx(sign * expected / 0.05)


@pytest.mark.parametrize(("torque", "velocity", "sign"), [*itertools.product([9.0, -4.0], [0.7, -1.3], [1, -1])])
def test_power_balance(torque, velocity, sign):
    """What goes in at one end comes out at the other, less the losses, whichever way it goes."""
    actuator = Actuator(MOTOR, ratio=60, efficiency=0.8, sign=sign)
    way = math.copysign(1.0, velocity)
    motor_rate = (actuator.motor_angle(velocity) - actuator.motor_angle(0.0)) / 1.0
    at_motor = actuator.motor_torque(torque, moving=way) * motor_rate
    at_joint = torque * velocity
    if at_joint > 0:
        assert at_motor * 0.8 == pytest.approx(at_joint)
    else:
        assert at_joint * 0.8 == pytest.approx(at_motor)
    # Electric power is the copper's loss and the shaft's power.
    current = actuator.current(torque, moving=way)
    volts = actuator.voltage(torque, velocity=velocity)
    assert volts * current == pytest.approx(0.6 * current**2 + at_motor)


def test_up_and_down_again_loses_energy():
    """A closed path under a torque that comes from an energy: at the joint nothing is left, at the motor the losses."""
    q = np.linspace(-1.0, 1.0, 2001)
    middle, step = 0.5 * (q[1:] + q[:-1]), np.diff(q)
    torque = 8.0 * np.cos(2.5 * middle + 0.3)  # positive and negative
    gear = 60.0
    up = np.sum(GEARED.motor_torque(torque, moving=+1) * gear * step)
    down = np.sum(GEARED.motor_torque(torque, moving=-1) * gear * -step)
    exchanged = np.sum(np.abs(torque) * step)
    assert up + down == pytest.approx(exchanged * (1 / 0.8 - 0.8))
    ideal = Actuator(MOTOR, ratio=60)
    there_and_back = [np.sum(ideal.motor_torque(torque, moving=way) * gear * way * step) for way in (1, -1)]
    assert sum(there_and_back) == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(("sign", "ratio", "zero"), [(1, 60.0, 0.0), (-1, 12.5, 0.4), (1, 0.5, -1.2)])
def test_angles_of_joint_and_motor(sign, ratio, zero):
    actuator = Actuator(ratio=ratio, sign=sign, zero=zero)
    assert actuator.motor_angle(zero) == 0.0 and actuator.joint_angle(0.0) == zero
    assert actuator.motor_angle(zero + 0.1) == pytest.approx(sign * ratio * 0.1)
    q = np.linspace(-3, 3, 7)
    np.testing.assert_allclose(actuator.joint_angle(actuator.motor_angle(q)), q, rtol=1e-14)
    assert type(actuator.motor_angle(0.2)) is float
    assert actuator.motor_angle(f"{math.degrees(0.2)} deg") == pytest.approx(actuator.motor_angle(0.2))


def test_voltage():
    # 12 N·m at the joint, driven: 5 A; 1 rad/s at the joint: 60 rad/s at the motor.
    assert GEARED.voltage(12.0, velocity=1.0) == pytest.approx(0.6 * 5.0 + 0.05 * 60.0)
    assert GEARED.voltage(12.0, velocity=-1.0) == pytest.approx(0.6 * 3.2 - 0.05 * 60.0)
    assert GEARED.voltage(12.0, velocity=0.0) == pytest.approx(0.6 * 4.0)
    assert GEARED.voltage(12.0, velocity=0.0, moving=1) == pytest.approx(0.6 * 5.0)
    backwards = Actuator(MOTOR, ratio=60, efficiency=0.8, sign=-1)
    assert backwards.voltage(12.0, velocity=1.0) == pytest.approx(-GEARED.voltage(12.0, velocity=1.0))


def test_arrays_units_and_broadcasting():
    torque, way = np.array([12.0, -12.0, 3.0]), np.array([[1.0], [0.0], [-1.0]])
    table = GEARED.motor_torque(torque, moving=way)
    assert table.shape == (3, 3)
    for i, j in np.ndindex(3, 3):
        assert table[i, j] == GEARED.motor_torque(float(torque[j]), moving=float(way[i, 0]))
    assert GEARED.current("12 N*m", moving=1) == pytest.approx(5.0)
    assert GEARED.current(12, moving=1) == pytest.approx(5.0)
    assert GEARED.voltage("12 N*m", velocity="1 rad/s") == pytest.approx(6.0)
    for value in (np.float64(12.0), np.array(12.0), np.int64(12)):
        assert type(GEARED.current(value)) is float
        assert type(GEARED.voltage(value, velocity=value)) is float
    scattered = Actuator(Motor(torque_constant=np.array([0.05, 0.06]), resistance=0.6), ratio=60)
    np.testing.assert_allclose(scattered.current(12.0), [4.0, 0.2 / 0.06])


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_does_not_come_out_finite(bad):
    assert not math.isfinite(GEARED.current(bad, moving=1))
    assert not math.isfinite(GEARED.voltage(1.0, velocity=bad))
    assert not math.isfinite(GEARED.joint_angle(bad))


@pytest.mark.parametrize(
    ("change", "kind", "message"),
    [
        ({"ratio": 0.0}, InputError, "Actuator.ratio must be > 0, got 0.0"),
        ({"ratio": -60}, InputError, "Actuator.ratio must be > 0, got -60.0"),
        ({"efficiency": 0.0}, InputError, "Actuator.efficiency must be above 0 and at most 1, got 0.0"),
        ({"efficiency": 80}, InputError, "Actuator.efficiency must be above 0 and at most 1, got 80.0"),
        ({"efficiency": "80 %", "sign": 0}, InputError, "Actuator.sign must be +1 or -1, got 0"),
        ({"sign": True}, InputError, "Actuator.sign must be +1 or -1, got True"),
        ({"sign": "+"}, InputError, "Actuator.sign must be +1 or -1, got '+'"),
        ({"zero": 90.0}, InputError, "Actuator.zero must be within two turns"),
        ({"ratio": "60 m"}, UnitError, "Actuator.ratio must be"),
        ({"motor": 0.05}, InputTypeError, "Actuator.motor must be a Motor, got 0.05"),
    ],
)
def test_wrong_actuators(change, kind, message):
    with pytest.raises(kind, match=re.escape(message)):
        Actuator(**change)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"torque_constant": 0.0}, "Motor.torque_constant must be > 0 N*m/A, got 0.0"),
        ({"resistance": -1.0}, "Motor.resistance must be > 0 ohm, got -1.0"),
        ({"resistance": math.nan}, "Motor.resistance must be"),
        ({"torque_constant": "50 mN/A"}, "Motor.torque_constant must be"),
    ],
)
def test_wrong_motors(change, message):
    with pytest.raises(InputError, match=re.escape(message)):
        Motor(**{"torque_constant": 0.05, "resistance": 0.6, **change})


def test_without_a_motor():
    bare = Actuator(ratio=10)
    assert bare.motor_torque(5.0) == 0.5
    for ask in (lambda: bare.current(5.0), lambda: bare.voltage(5.0, velocity=1.0)):
        with pytest.raises(InputError, match=r"Actuator.motor must be a Motor to know currents and voltages, got None"):
            ask()


def test_wrong_arguments_name_themselves():
    with pytest.raises(UnitError, match=r"torque must be .*12 kg"):
        GEARED.motor_torque("12 kg")
    with pytest.raises(InputTypeError, match="velocity must be"):
        GEARED.voltage(1.0, velocity=[None])
    with pytest.raises(UnitError, match="motor_angle must be"):
        GEARED.joint_angle("3 m")
    assert Actuator(MOTOR, ratio="60", efficiency="80 %") == GEARED

"""Feedforward of a chain: each joint with its own actuator, checked by hand."""

import numpy as np
import pytest

from springpoise import Actuator, Arm, Body, Feedforward, Friction, Link, Mechanism, Motor, PlanarChain
from springpoise.errors import InputError, InputTypeError

CHAIN = PlanarChain([Link("upper", Body(1.5, (0.15, 0)), length=0.3), Link("fore", Body(1.0, (0.12, 0)), length=0.25)])
MECHANISM = Mechanism(CHAIN, friction=[Friction(0.1), Friction(0.2)])
MOTOR = Motor(torque_constant=0.05, resistance=0.6)
FIRST, SECOND = Actuator(MOTOR, ratio=60, efficiency=0.8), Actuator(MOTOR, ratio=30, sign=-1)
FF = Feedforward(MECHANISM, actuator=[FIRST, SECOND])
Q = np.array([0.3, -0.7])
# by hand: M1 = 1.5*0.15 + 1.0*0.3, M2 = 1.0*0.12 in absolute angles
G = 9.80665
FORE = G * 0.12 * np.cos(-0.4)
UPPER = G * 0.525 * np.cos(0.3) + FORE


def test_torque_has_each_joint_s_friction():
    np.testing.assert_allclose(FF.torque(Q), [UPPER, FORE], rtol=1e-13)
    np.testing.assert_allclose(FF.torque(Q, moving=+1), [UPPER + 0.1, FORE + 0.2], rtol=1e-13)
    np.testing.assert_allclose(FF.torque(Q, moving=np.array([1, -1])), [UPPER + 0.1, FORE - 0.2], rtol=1e-13)


def test_current_and_voltage_have_each_joint_s_actuator():
    up, down = UPPER + 0.1, FORE - 0.2
    expected = [up / 0.8 / 60 / 0.05, -down / 30 / 0.05]
    np.testing.assert_allclose(FF.current(Q, moving=np.array([1, -1])), expected, rtol=1e-13)
    volts = [0.6 * expected[0] + 0.05 * 60 * 0.5, 0.6 * expected[1] - 0.05 * 30 * -0.25]
    np.testing.assert_allclose(FF.voltage(Q, velocity=np.array([0.5, -0.25])), volts, rtol=1e-13)


@pytest.mark.parametrize(("output", "more"), [("torque", ()), ("current", ()), ("voltage", (0.5, -0.25))])
@pytest.mark.parametrize("moving", [0, 1, -1])
def test_compiled_agrees(output, more, moving):
    options = {"velocity": np.array(more)} if more else {}
    eager = getattr(FF, output)(Q, moving=(moving or None) if more else moving, **options)
    one = FF.compile(output, moving=moving)(*Q, *more)
    assert type(one) is tuple
    np.testing.assert_allclose(one, eager, rtol=1e-12)
    many = FF.compile(output, moving=moving, arrays=True)(*np.stack([Q, Q]).T, *more)
    np.testing.assert_allclose(np.stack(many, axis=-1), [eager, eager], rtol=1e-12)


def test_gravity_per_call():
    tilted = FF.compile(gravity_per_call=True)(*Q, 0.5, -9.7)
    np.testing.assert_allclose(tilted, FF.torque(Q, gravity=(0.5, -9.7)), rtol=1e-12)


def test_wrong_number_of_actuators():
    with pytest.raises(InputError, match=r"^Feedforward\.actuator must be one for each of 2 joints, got 1$"):
        Feedforward(MECHANISM, actuator=[FIRST])
    with pytest.raises(InputTypeError, match=r"one for each joint, got \[Arm\("):
        Feedforward(MECHANISM, actuator=[Arm(Body(1, (0, 0)))])

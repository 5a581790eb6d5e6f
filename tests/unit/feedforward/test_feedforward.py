"""Feed forward: friction by direction, compiled against eager, and nothing real from what is not finite."""

from __future__ import annotations

import itertools
import math

import attrs
import numpy as np
import pytest

from springpoise import (
    Actuator,
    Arm,
    Body,
    Cable,
    CompressionSpring,
    Disc,
    ExtensionSpring,
    Feedforward,
    Friction,
    JointTravel,
    Mechanism,
    Motor,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.errors import InputError, InputTypeError

ARM = Arm([Body(2.0, (0.35, 0.02)), Body(0.4, (0.1, -0.05))])
ABOVE = Straight(Point("ground", (0.02, 0.10)), Point("arm", (0.08, 0.01)))
PULLEY = Cable(
    Point("ground", (-0.03, -0.35)),
    Disc(Point("ground", (-0.012, 0.1)), radius=0.012, turn="cw", bearing_friction=0.1, bearing_radius=0.004),
    Point("arm", (0.08, 0.0)),
)
FRICTION = Friction(0.3, pivot_friction=0.1, pivot_radius=0.006)
ACTUATOR = Actuator(Motor(torque_constant=0.05, resistance=0.6), ratio=60, efficiency=0.8, sign=-1, zero=0.2)
Q = np.linspace(-1.2, 1.2, 25)

MECHANISMS = {
    "massless, no springs": Mechanism(Arm(Body(0.0, (0.0, 0.0)))),
    "massless with friction": Mechanism(Arm(Body(0.0, (0.0, 0.0))), friction=Friction(0.3)),
    "bare": Mechanism(ARM, friction=FRICTION),
    "ideal": Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(800.0), ABOVE), friction=FRICTION),
    "always slack": Mechanism(ARM, springs=SpringMount(ExtensionSpring(800.0, free_length=3.0), ABOVE)),
    "slack here and there, and jumping": Mechanism(
        ARM, springs=SpringMount(ExtensionSpring(800.0, free_length=0.1, initial_tension=20.0), ABOVE, count=2)
    ),
    "pulley": Mechanism(
        ARM, springs=SpringMount(ZeroLengthSpring(700.0), PULLEY, rigid_length=0.43), friction=FRICTION
    ),
    "pushed and twisted": Mechanism(
        ARM,
        springs=[
            SpringMount(
                CompressionSpring(500.0, free_length=0.2, solid_length=0.05),
                Straight(Point("ground", (0.0, -0.2)), Point("arm", (0.1, 0.0))),
            ),
            SpringMount(TorsionSpring(2.0, free_angle=1.0), JointTravel()),
        ],
        friction=FRICTION,
    ),
}
every_mechanism = pytest.mark.parametrize("mech", list(MECHANISMS.values()), ids=list(MECHANISMS))
GRAVITY = (1.1, -9.2)


def _eager(ff, output, args, moving, gravity):
    extra = {"gravity": gravity} if gravity else {}
    if output == "voltage":
        return ff.voltage(args[0], velocity=args[1], moving=moving or None, **extra)
    return getattr(ff, output)(args[0], moving=moving, **extra)


def test_the_three_outputs_by_hand():
    mech = MECHANISMS["ideal"]
    ff = Feedforward(mech, actuator=ACTUATOR)
    for q in (-0.7, 0.0, 0.9):
        hold, band = mech.holding_torque(q), mech.friction_band(q)
        assert band > 0.3
        for way in (-1, 0, 1):
            torque = hold + way * band
            assert ff.torque(q, moving=way) == pytest.approx(torque, rel=1e-14)
            loss = 1.0 if torque * way == 0 else 1 / 0.8 if torque * way > 0 else 0.8
            amps = -torque * loss / 60 / 0.05
            assert ff.current(q, moving=way) == pytest.approx(amps, rel=1e-12)
            for speed in (way * 0.5, 0.25):
                volts = ff.voltage(q, velocity=speed, moving=way)
                assert volts == pytest.approx(0.6 * amps - 0.05 * 60 * speed, rel=1e-12)
        assert ff.voltage(q, velocity=0.5) == ff.voltage(q, velocity=0.5, moving=1)
        assert ff.voltage(q, velocity=-0.5) == ff.voltage(q, velocity=-0.5, moving=-1)
        assert ff.voltage(q, velocity=0.0) == ff.voltage(q, velocity=0.0, moving=0)


def test_directions_may_be_arrays():
    ff = Feedforward(MECHANISMS["bare"], actuator=ACTUATOR)
    ways = np.array([-1, 0, 1])[:, None]
    found = ff.torque(Q, moving=ways)
    for row, way in enumerate((-1, 0, 1)):
        np.testing.assert_array_equal(found[row], ff.torque(Q, moving=way))
    np.testing.assert_array_equal(ff.current(Q[:3], moving=[-1, 0, 1])[2:], ff.current(Q[2:3], moving=1))
    np.testing.assert_array_equal(ff.voltage(0.1, velocity=[1.0, -1.0])[1], ff.voltage(0.1, velocity=-1.0))


@every_mechanism
@pytest.mark.parametrize("output", ["torque", "current", "voltage"])
@pytest.mark.parametrize("per_call", [False, True])
def test_compiled_equals_eager(mech, output, per_call):
    ff = Feedforward(mech, actuator=ACTUATOR)
    for moving in (-1, 0, 1):
        scalar = ff.compile(output, moving=moving, gravity_per_call=per_call)
        arrays = ff.compile(output, moving=moving, gravity_per_call=per_call, arrays=True)
        more = [*((0.7,) if output == "voltage" else ()), *(GRAVITY if per_call else ())]
        expected = _eager(ff, output, (Q, *more), moving, GRAVITY if per_call else None)
        close = 1e-13 * (1.0 + np.max(np.abs(expected)))
        np.testing.assert_allclose(arrays(Q, *more), expected, rtol=0, atol=close)
        one_by_one = [scalar(q, *more) for q in Q.tolist()]
        assert all(type(value) is float for value in one_by_one)
        np.testing.assert_allclose(one_by_one, expected, rtol=0, atol=close)
        assert one_by_one == [scalar(q, *more) for q in Q.tolist()]
        assert arrays(Q.reshape(5, 5), *more).shape == (5, 5)


@every_mechanism
@pytest.mark.parametrize("output", ["torque", "current", "voltage"])
@pytest.mark.parametrize("per_call", [False, True])
def test_nothing_finite_from_what_is_not_finite(mech, output, per_call):
    ff = Feedforward(mech, actuator=ACTUATOR)
    scalar = ff.compile(output, moving=1, gravity_per_call=per_call)
    arrays = ff.compile(output, moving=1, gravity_per_call=per_call, arrays=True)
    good = [0.3, *((0.7,) if output == "voltage" else ()), *(GRAVITY if per_call else ())]
    for place, bad in itertools.product(range(len(good)), (math.nan, math.inf, -math.inf)):
        args = [bad if i == place else value for i, value in enumerate(good)]
        found = scalar(*args)
        assert math.isnan(found) and type(found) is float
        assert math.isnan(arrays(*args))
        in_an_array = arrays(
            np.array([args[0], good[0]]), *[np.array([a, b]) for a, b in zip(args[1:], good[1:], strict=True)]
        )
        assert math.isnan(in_an_array[0]) and math.isfinite(in_an_array[1])
        if place < len(good) - 2 * per_call:
            found = _eager(ff, output, args, 1, GRAVITY if per_call else None)
            assert math.isnan(found) and type(found) is float
            found = _eager(ff, output, [np.array([x, y]) for x, y in zip(args, good, strict=True)], 1, None)
            assert math.isnan(found[0]) and math.isfinite(found[1])
        else:  # gravity is an input like a field, not a reading
            with pytest.raises(InputError, match=r"gravity must be .* finite"):
                _eager(ff, output, args, 1, tuple(args[-2:]))


@every_mechanism
def test_results_are_plain_floats(mech):
    ff = Feedforward(mech, actuator=ACTUATOR)
    for q in (0.3, 0, "20 deg", np.float64(0.3), np.int64(0), np.array(0.3)):
        for way in (0, 1, np.int64(-1), np.float64(1.0), np.array(-1)):
            assert type(ff.torque(q, moving=way)) is float
            assert type(ff.current(q, moving=way)) is float
            assert type(ff.voltage(q, velocity=0.2, moving=way)) is float
        for velocity in (0.2, 1, "30 deg/s", np.float64(-0.2), np.array(0.2)):
            assert type(ff.voltage(q, velocity=velocity)) is float
    scalar = ff.compile("voltage")
    assert type(scalar(np.float64(0.3), 1)) is float


def test_calls_leave_nothing_behind():
    ff = Feedforward(MECHANISMS["pulley"], actuator=ACTUATOR)
    before = attrs.asdict(ff, recurse=False)
    first = [ff.torque(0.2, moving=1), ff.current(Q, moving=-1).tolist(), ff.voltage(0.2, velocity=0.1)]
    ff.compile("voltage")(1.0, 2.0)
    again = [ff.torque(0.2, moving=1), ff.current(Q, moving=-1).tolist(), ff.voltage(0.2, velocity=0.1)]
    assert first == again
    assert attrs.asdict(ff, recurse=False) == before
    one, other = ff.compile(), ff.compile()
    assert [one(q) for q in Q] == [other(q) for q in Q[::-1]][::-1]
    q = Q.copy()
    ff.compile(arrays=True)(q)
    np.testing.assert_array_equal(q, Q)


def test_a_direction_is_built_in_for_voltages_too():
    ff = Feedforward(MECHANISMS["bare"], actuator=ACTUATOR)
    assert ff.compile("voltage", moving=1)(0.3, 0.0) == pytest.approx(ff.voltage(0.3, velocity=0.0, moving=1))
    assert ff.compile("voltage")(0.3, -0.4) == pytest.approx(ff.voltage(0.3, velocity=-0.4))
    assert ff.program("voltage", gravity_per_call=True).inputs == ("q", "velocity", "gx", "gy")
    assert ff.program().inputs == ("q",)


@pytest.mark.parametrize("moving", [2, 0.5, -1.5, math.nan, True, "up", None, [0.5], [True], np.array(0.5)])
def test_wrong_directions(moving):
    ff = Feedforward(MECHANISMS["bare"], actuator=ACTUATOR)
    for ask in (ff.torque, ff.current):
        with pytest.raises(InputError, match=r"moving must be -1, 0 or \+1, got "):
            ask(0.3, moving=moving)


def test_wrong_programs():
    ff = Feedforward(MECHANISMS["bare"])
    with pytest.raises(InputError, match="output must be 'torque', 'current' or 'voltage', got 'power'"):
        ff.compile("power")
    with pytest.raises(InputTypeError, match=r"moving must be one of -1, 0, \+1 for a compiled function, got \[1\]"):
        ff.compile(moving=[1])
    with pytest.raises(InputError, match=r"moving must be -1, 0 or \+1, got 3"):
        ff.compile(moving=3)
    for output in ("current", "voltage"):
        with pytest.raises(InputError, match=r"Actuator.motor must be a Motor to know currents and voltages, got None"):
            ff.compile(output)


def test_wrong_parts():
    with pytest.raises(InputTypeError, match=r"Feedforward.mechanism must be a Mechanism, got Arm\("):
        Feedforward(ARM)
    with pytest.raises(
        InputTypeError,
        match=r"Feedforward.actuator must be an Actuator, or a sequence with one for each joint, got Motor\(",
    ):
        Feedforward(MECHANISMS["bare"], actuator=ACTUATOR.motor)
    with pytest.raises(InputError, match=r"q must be within two turns.*degrees\?"):
        Feedforward(MECHANISMS["bare"]).torque(45.0)

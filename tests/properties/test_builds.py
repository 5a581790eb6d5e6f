"""Fields that are arrays, poses with units, ends that meet, and slack springs."""

from __future__ import annotations

import math
import warnings

import numpy as np
import pint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import (
    Arm,
    Body,
    Cable,
    CompressionSpring,
    ConstantForceSpring,
    Disc,
    ExtensionSpring,
    Friction,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)

METHODS = (
    "gravity_torque",
    "spring_torque",
    "holding_torque",
    "stiffness",
    "friction_band",
    "energy",
    "spring_energy",
    "pivot_load",
)
seeds = st.integers(0, 2**32 - 1)
G = 9.80665


def _build(rate, a, b, radius, mass, tension):
    """A mechanism from scattered numbers, or from columns of them."""
    return Mechanism(
        Arm([Body(mass, (0.3, a)), Body(0.5, (b, 0.1))]),
        springs=[
            SpringMount(ZeroLengthSpring(rate), Straight(Point("ground", (0.01, a)), Point("arm", (b, 0.0)))),
            SpringMount(
                ExtensionSpring(rate, free_length=a, initial_tension=tension),
                Cable(
                    Point("ground", (-0.3, -a)),
                    Disc(Point("ground", (-0.1, a)), radius=radius, turn="cw", sliding_friction=radius),
                    Disc(Point("arm", (b, 0.15)), radius=radius, turn="ccw"),
                    Point("arm", (0.4, 0.0)),
                ),
                rigid_length=radius,
            ),
            SpringMount(TorsionSpring(a, free_angle=b), JointTravel(ratio=1.0 + a)),
            SpringMount(
                CompressionSpring(rate, free_length=5 * a, solid_length=a / 2),
                Straight(Point("ground", (a, -a)), Point("arm", (0.0, b))),
            ),
            SpringMount(ConstantForceSpring(tension), Straight(Point("ground", (0.2, -a)), Point("arm", (0.1, b)))),
        ],
        friction=Friction(a, pivot_friction=b, pivot_radius=radius),
    )


@given(seeds, st.integers(2, 5))
@settings(max_examples=20)
def test_array_fields_equal_one_mechanism_each(seed, n):
    rng = np.random.default_rng(seed)
    lows, highs = [50.0, 0.08, 0.05, 0.005, 0.1, 1.0], [900.0, 0.3, 0.2, 0.03, 4.0, 30.0]
    columns = rng.uniform(lows, highs, (n, 6))
    q = rng.uniform(-3.0, 3.0, 9)
    together = _build(*columns.T[:, :, None])
    alone = [_build(*map(float, row)) for row in columns]
    for method in METHODS:
        whole = getattr(together, method)(q)
        assert whole.shape == (n, 9)
        rows = np.array([getattr(mech, method)(q) for mech in alone])
        np.testing.assert_allclose(whole, rows, rtol=1e-12, atol=1e-9)
        at_one_pose = getattr(together, method)(float(q[0]))
        assert at_one_pose.shape == (n, 1)
        np.testing.assert_allclose(at_one_pose, rows[:, :1], rtol=1e-12, atol=1e-9)
        assert np.all(np.isnan(getattr(together, method)(math.nan)))
        bad = getattr(together, method)(np.array([0.3, math.nan]))
        assert np.all(np.isnan(bad[:, 1]) & ~np.isnan(bad[:, 0]))
    for together_state, *states in zip(together.spring_states(q), *(m.spring_states(q) for m in alone), strict=True):
        for name in ("length", "load", "energy", "margin"):
            rows = np.array([getattr(state, name) for state in states])
            np.testing.assert_allclose(
                np.broadcast_to(getattr(together_state, name), rows.shape), rows, rtol=1e-12, atol=1e-9
            )


def test_gravity_may_be_arrays_of_the_poses_shape():
    mech = _build(400.0, 0.1, 0.1, 0.01, 1.0, 5.0)
    q, tilt = np.linspace(-1.0, 1.0, 5), np.linspace(-0.2, 0.2, 5)
    gravity = (-G * np.sin(tilt), -G * np.cos(tilt))
    whole = mech.holding_torque(q, gravity)
    for i in range(5):
        assert whole[i] == pytest.approx(mech.holding_torque(float(q[i]), (gravity[0][i], gravity[1][i])), abs=1e-13)


@given(st.floats(-720.0, 720.0))
@settings(max_examples=30)
def test_strings_and_quantities_are_poses_too(degrees):
    mech = _build(400.0, 0.1, 0.1, 0.01, 1.0, 5.0)
    q = math.radians(degrees)
    registry = pint.UnitRegistry()
    text = f"{degrees!r} deg"
    for method in METHODS:
        expected = getattr(mech, method)(q)
        assert getattr(mech, method)(text) == pytest.approx(expected, rel=1e-9, abs=1e-9)
        assert getattr(mech, method)(registry.Quantity(degrees, "deg")) == pytest.approx(expected, rel=1e-9, abs=1e-9)
        many = getattr(mech, method)(registry.Quantity([degrees, 10.0], "deg"))
        assert many == pytest.approx([expected, getattr(mech, method)("10 deg")], rel=1e-9, abs=1e-9)
        assert type(expected) is float


@given(st.floats(0.01, 0.5), st.floats(20.0, 2000.0), st.floats(0.1, 5.0))
@settings(max_examples=40)
def test_ends_that_meet_give_the_limits(a, rate, mass):
    """Anchor straight above the pivot as high as the attachment is far out: both meet at the top."""
    top = math.pi / 2
    path = Straight(Point("ground", (0.0, a)), Point("arm", (a, 0.0)))
    mech = Mechanism(Arm(Body(mass, (0.3, 0.0))), springs=SpringMount(ZeroLengthSpring(rate), path))
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for pose in (top, np.array([top, 0.2])):
            # U = k a² (1 - sin q), so torque k a² cos q and second derivative k a² sin q
            scale = rate * a * a + mass * G
            first = [np.ravel(getattr(mech, m)(pose))[0] for m in ("spring_torque", "spring_energy", "stiffness")]
            assert first == pytest.approx([0.0, 0.0, rate * a * a - mass * G * 0.3], abs=1e-12 * scale)
            assert np.ravel(mech.pivot_load(pose))[0] == pytest.approx(mass * G, abs=1e-9 * scale)
    # exactly the same point, and not only to rounding
    stretched = Straight(Point("arm", (a, 0.1)), Point("arm", (a, 0.1)))
    still = Mechanism(Arm(Body(0.0, (0.0, 0.0))), springs=SpringMount(ZeroLengthSpring(rate), stretched))
    for method in METHODS:
        assert getattr(still, method)(0.7) == pytest.approx(0.0, abs=1e-12 * rate)


@given(seeds)
@settings(max_examples=30)
def test_slack_springs_have_no_load(seed):
    rng = np.random.default_rng(seed)
    free = float(rng.uniform(0.05, 0.3))
    path = Straight(Point("ground", rng.uniform(-0.2, 0.2, 2)), Point("arm", rng.uniform(-0.2, 0.2, 2)))
    arm = Arm(Body(1.0, (0.3, 0.0)))
    q = np.linspace(-3.0, 3.0, 61)
    length = path.length(arm, q)
    pull = ExtensionSpring(300.0, free_length=free, initial_tension=8.0)
    push = CompressionSpring(300.0, free_length=free, solid_length=0.01)
    for spring, slack in ((pull, length <= free), (push, length >= free)):
        mech = Mechanism(arm, springs=SpringMount(spring, path))
        state = mech.spring_states(q)[0]
        assert not np.any(state.load[slack]) and not np.any(state.energy[slack])
        assert not np.any(mech.spring_torque(q)[slack])
        assert np.all(state.load[~slack] != 0.0) and np.all(state.energy[~slack] > 0.0)
        assert np.all((state.margin < 0.0)[slack & (length != free)])

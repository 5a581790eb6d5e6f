"""Where a mechanism stands still by itself, against dense scans and closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import (
    Arm,
    Body,
    ExtensionSpring,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)

G = 9.80665


def _random(seed):
    rng = np.random.default_rng(seed)

    def point(body):
        return Point(body, tuple(rng.uniform(-0.3, 0.3, 2)))

    mounts = [
        SpringMount(
            ExtensionSpring(
                rng.uniform(50.0, 900.0), free_length=rng.uniform(0.0, 0.25), initial_tension=rng.choice([0.0, 6.0])
            ),
            Straight(point("ground"), point("arm")),
        )
        for _ in range(rng.integers(0, 4))
    ]
    if rng.random() < 0.3:
        mounts.append(SpringMount(TorsionSpring(rng.uniform(0.1, 5.0), free_angle=rng.uniform(-3, 3)), JointTravel()))
    travel = None if rng.random() < 0.5 else tuple(np.sort(rng.uniform(-3.0, 3.0, 2)) + np.array([-0.1, 0.1]))
    return Mechanism(Arm(Body(rng.uniform(0.0, 4.0), tuple(rng.uniform(-0.4, 0.4, 2)))), springs=mounts, travel=travel)


@given(st.integers(0, 2**32 - 1))
@settings(max_examples=150)
def test_all_are_found_and_rightly_named(seed):
    mech = _random(seed)
    found = mech.equilibria()
    low, high = mech.travel_or_turn
    q = np.linspace(low, high, 60001)
    net = -mech.holding_torque(q)
    crossings = np.flatnonzero(net[:-1] * net[1:] < 0.0)
    # a dense scan cannot see a pair closer than its step, or a zero that lies on a sample
    assert len(found.points) == len(crossings)
    assert found.travel == (low, high) and not found.everywhere
    step = q[1] - q[0]
    for point, i in zip(found.points, crossings, strict=True):
        assert q[i] - step <= point.angle <= q[i + 1] + step
        assert point.stable == (net[i] > 0.0)
        around = -mech.holding_torque(point.angle + np.array([-1e-9, 0.0, 1e-9]))
        jumps = abs(around[2] - around[0]) > 1e-5  # a spring that goes slack there
        assert jumps or abs(around[1]) <= 1e-10 * (1.0 + np.max(np.abs(net)))
        stiffness = mech.stiffness(point.angle)
        assert jumps or abs(stiffness) < 1e-5 or point.stable == (stiffness > 0.0)
    assert found.angles == tuple(p.angle for p in found.points)
    assert found.stable_angles == tuple(p.angle for p in found.points if p.stable)


def test_pendulum():
    found = Mechanism(Arm(Body(1.0, (0.3, 0.0)))).equilibria()
    assert [(p.angle, p.stable) for p in found.points] == [
        (pytest.approx(-math.pi / 2, abs=1e-12), True),
        (pytest.approx(math.pi / 2, abs=1e-12), False),
    ]
    assert str(found) == "balanced at -90.00 deg (stable), 90.00 deg (unstable)"


def test_ends_of_a_full_turn_are_one_pose():
    # its lowest pose is at ±pi
    found = Mechanism(Arm(Body(1.0, (0.0, 0.3)))).equilibria()
    assert [(p.angle, p.stable) for p in found.points] == [(0.0, False), (math.pi, True)]
    both = Mechanism(Arm(Body(1.0, (0.0, 0.3))), travel=(-math.pi, math.pi)).equilibria()
    assert both.angles == (-math.pi, 0.0, math.pi)
    assert both.stable_angles == (-math.pi, math.pi)


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("gap", [1e-3, 1e-7, -1e-7, -1e-3, 0.0])
def test_dips_that_nearly_touch_zero(sign, gap):
    """A torque of the same size at all angles, about as much as the arm's weight gives at the horizontal."""
    arm = Arm(Body(1.0, (sign * 1.0, 0.0)))
    lift = SpringMount(_Constant(-sign * G * (1.0 - gap)), JointTravel())
    found = Mechanism(arm, springs=lift, travel=(-0.37, 1.0)).equilibria()  # 0 is none of the poses looked at
    if gap > 0.0:
        half = math.acos(1.0 - gap)
        assert found.angles == pytest.approx([-half, half], abs=1e-14 / half)
        assert [p.stable for p in found.points] == ([True, False] if sign > 0 else [False, True])
    elif gap < 0.0:
        assert found.points == ()
    else:
        assert [p.stable for p in found.points] == [False]
        assert found.angles[0] == pytest.approx(0.0, abs=1e-5)


class _Constant:
    """A torque that is the same at every angle."""

    def __init__(self, torque):
        self.torque = torque

    def load(self, x):
        return self.torque + 0.0 * x

    def stiffness(self, x):
        return 0.0 * x

    def energy(self, x):
        return self.torque * x


@pytest.mark.parametrize("travel", [(0.0, 1.0), (-1.0, 0.0), (-0.05, 1.0), (-1.0, 0.05)])
def test_pair_beside_the_end_of_the_travel(travel):
    # torque ∝ cos q - cos(half): a pair around 0, closer than the first look's step
    half = 1e-4
    mech = Mechanism(Arm(Body(1.0, (1.0, 0.0))), springs=SpringMount(_Constant(-G * math.cos(half)), JointTravel()))
    found = Mechanism(mech.linkage, springs=mech.springs, travel=travel).equilibria()
    inside = [a for a in (-half, half) if travel[0] <= a <= travel[1]]
    assert found.angles == pytest.approx(inside, abs=1e-9)
    assert [p.stable for p in found.points] == [a < 0.0 for a in inside]


def test_slack_spring_holds_the_arm_at_its_brink():
    # a taut spring pulls up harder than the arm weighs; slack, it lets it fall: held where it goes taut
    spring = ExtensionSpring(1000.0, free_length=0.4, initial_tension=80.0)
    mech = Mechanism(
        Arm(Body(1.0, (0.3, 0.0))),
        springs=SpringMount(spring, Straight(Point("ground", (0.3, 0.4)), Point("arm", (0.3, 0.0)))),
        travel=(-0.8, 0.8),
    )
    found = mech.equilibria()
    assert [p.stable for p in found.points] == [True]
    assert found.angles[0] == pytest.approx(0.0, abs=1e-12)


def test_balanced_throughout_and_nowhere():
    arm = Arm(Body(2.0, (0.35, 0.0)))
    path = Straight(Point("ground", (0.0, 0.1)), Point("arm", (0.08, 0.0)))
    balanced = Mechanism(
        arm, springs=SpringMount(ZeroLengthSpring(2.0 * G * 0.35 / 0.008), path), travel=("-60 deg", 1.0)
    )
    found = balanced.equilibria()
    assert found.everywhere and found.points == ()
    assert str(found) == "balanced at every angle from -60.0 to 57.3 deg"
    # no weight at all, or springs alone that cancel
    assert Mechanism(Arm(Body(0.0, (0.0, 0.0)))).equilibria().everywhere
    pair = [SpringMount(ZeroLengthSpring(500.0), Straight(Point("ground", (0.0, y)), path.last)) for y in (0.1, -0.1)]
    assert Mechanism(Arm(Body(0.0, (0.0, 0.0))), springs=pair).equilibria().everywhere
    nowhere = Mechanism(arm, travel=(-0.5, 0.5)).equilibria()
    assert str(nowhere) == "balanced at no angle from -28.6 to 28.6 deg"


def test_part_of_the_travel_that_is_balanced_throughout():
    # no weight, and a spring that is slack on one side: its two ends
    spring = ExtensionSpring(1000.0, free_length=0.4)
    path = Straight(Point("ground", (0.3, 0.4)), Point("arm", (0.3, 0.0)))
    found = Mechanism(Arm(Body(0.0, (0.0, 0.0))), springs=SpringMount(spring, path), travel=(-0.8, 0.8)).equilibria()
    assert len(found.points) == 2
    assert found.angles == pytest.approx([0.0, 0.8], abs=2e-3)
    assert found.stable_angles == ()


def test_gravity_of_the_call_counts():
    mech = Mechanism(Arm(Body(1.0, (0.3, 0.0))))
    assert mech.equilibria(gravity=(G, 0.0)).stable_angles == pytest.approx((0.0,), abs=1e-12)

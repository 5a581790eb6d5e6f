"""Sine match: branches, messages and how it prints."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

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
    balance,
)
from springpoise.errors import InputError, InputTypeError, UnitError

ARM = Arm(Body(2.0, (0.35, 0.0)))
TWO = {"attach_radius": 0.08, "anchor_height": 0.10}
PATH = Straight(Point("ground", (0.0, 0.1)), Point("arm", (0.08, 0.0)))


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ({}, "must be given two of rate, attach_radius, anchor_height, got 0 of them"),
        ({"rate": 1.0}, "must be given two of rate, attach_radius, anchor_height, got 1 of them"),
        ({**TWO, "rate": 1.0}, "got all three; leave one out"),
        ({**TWO, "attach_radius": 0.0}, "attach_radius must be > 0 m, got 0.0"),
        ({**TWO, "attach_radius": -0.1}, "attach_radius must be > 0 m, got -0.1"),
        ({**TWO, "anchor_height": 0.0}, "anchor_height must be other than 0 m, got 0.0"),
        ({"rate": -3.0, "anchor_height": 0.1}, "rate must be > 0 N/m, got -3.0"),
        ({**TWO, "attach_radius": math.nan}, "attach_radius must be"),
        ({**TWO, "count": 0}, "count must be a whole number >= 1, got 0"),
        ({**TWO, "count": 1.5}, "count must be a whole number >= 1, got 1.5"),
        ({**TWO, "count": True}, "count must be a whole number >= 1, got True"),
        ({**TWO, "anchor_angle": 90.0}, "anchor_angle must be within two turns"),
        ({**TWO, "gravity": (0.0, 0.0)}, "arm must have something left to balance, got a first moment of 0 N*m"),
    ],
)
def test_wrong_values(given, message):
    with pytest.raises(InputError, match=re.escape(message)):
        balance.sine_match(ARM, **given)


def test_wrong_kinds():
    with pytest.raises(InputTypeError, match=r"attach_radius must be a single value in m, got \[0.1, 0.2\]"):
        balance.sine_match(ARM, attach_radius=[0.1, 0.2], anchor_height=0.1)
    with pytest.raises(InputTypeError, match="arm must be an Arm or a Mechanism of one, got 'arm'"):
        balance.sine_match("arm", **TWO)
    with pytest.raises(UnitError, match=r"attach_radius must be .*12 kg"):
        balance.sine_match(ARM, attach_radius="12 kg", anchor_height=0.1)


@pytest.mark.parametrize(
    ("spring", "path", "options", "what"),
    [
        (ExtensionSpring(500.0, free_length=0.05), PATH, {}, "ExtensionSpring on Straight"),
        (TorsionSpring(3.0), JointTravel(), {}, "TorsionSpring on JointTravel"),
        (ZeroLengthSpring(500.0), PATH, {"rigid_length": 0.01}, "ZeroLengthSpring on Straight"),
    ],
)
def test_only_ideal_springs_may_be_there_already(spring, path, options, what):
    mech = Mechanism(ARM, springs=SpringMount(spring, path, **options))
    message = rf"arm.springs\[0\] must be a ZeroLengthSpring on a Straight path, got {what}; use fit_springs"
    with pytest.raises(InputError, match=message):
        balance.sine_match(mech, **TWO)


def test_a_balanced_arm_needs_no_spring():
    mech = balance.sine_match(ARM, **TWO).mechanism
    with pytest.raises(InputError, match="arm must have something left to balance, got a first moment of"):
        balance.sine_match(mech, **TWO)
    with pytest.raises(InputError, match="arm must have something left to balance"):
        balance.sine_match(Arm(Body(3.0, (0.0, 0.0))), **TWO)


def test_a_spring_within_one_body_does_nothing():
    idle = Straight(Point("ground", (0.0, 0.1)), Point("ground", (0.3, 0.1)))
    there = [SpringMount(ZeroLengthSpring(500.0), idle)]
    found = balance.sine_match(Mechanism(ARM, springs=there), **TWO)
    assert found.rate == pytest.approx(858.081875, rel=1e-12)
    assert len(found.mechanism.springs) == 2


def test_gravity_and_travel_go_with_the_mechanism():
    mech = Mechanism(ARM, travel=(-1.0, 1.0))
    found = balance.sine_match(mech, **TWO, gravity=("1 m/s**2", -9.0))
    assert found.mechanism.gravity == (1.0, -9.0)
    assert found.mechanism.travel == (-1.0, 1.0)
    assert found.residual.worst < 1e-12
    assert balance.sine_match(mech, **TWO, anchor_angle="90 deg") == balance.sine_match(mech, **TWO)


def test_what_it_prints():
    text = str(balance.sine_match(ARM, rate="429.0409375 N/m", anchor_height="100 mm", count=2))
    assert text.splitlines()[0] == "sine match"
    for line in (
        r"status  +balanced at every angle, as long as the spring really has zero free length",
        r"rate  +429.0 N/m, 2 springs side by side",
        r"attach radius  +80.00 mm at -?0.00 deg on the arm",
        r"anchor height  +100.0 mm at 90.00 deg on the ground",
        r"spring length  +20.00 mm to 180.0 mm",
        r"load of one spring  +8.581 N to 77.23 N",
        r"residual  +worst .* N\*m \(0.00 % of the peak gravity torque\)",
    ):
        assert re.search(rf"^  {line}", text, re.MULTILINE), line


# ------------------------------------------------------------------------------------- residuals


def test_a_residual():
    left = balance.residual(Mechanism(ARM, travel=(0.0, 1.0)), over=[[0.0, 0.5], [1.0, -0.5]])
    torque = 2.0 * 9.80665 * 0.35 * np.cos([0.0, 0.5, 1.0, -0.5])
    assert (left.worst, left.worst_at, left.poses) == (pytest.approx(torque[0]), 0.0, 4)
    assert left.rms == pytest.approx(math.sqrt(np.mean(torque**2)))
    assert left.worst_fraction == pytest.approx(1.0)
    assert str(left) == ("worst 6.865 N*m (100.00 % of the peak gravity torque) at 0.00 deg, rms 5.776 N*m (84.15 %)")


def test_a_residual_where_gravity_does_nothing():
    left = balance.residual(Mechanism(Arm(Body(0.0, (0.0, 0.0)))))
    assert left.worst == 0.0 and left.poses == 181
    assert math.isnan(left.worst_fraction) and math.isnan(left.rms_fraction)


@pytest.mark.parametrize(
    ("over", "message"),
    [
        ([], "over must be at least one pose in rad, got none"),
        ([0.0, math.nan], "over must be finite poses in rad, got nan"),
        ([0.0, 90.0], "over must be within two turns"),
    ],
)
def test_wrong_poses(over, message):
    with pytest.raises(InputError, match=message):
        balance.residual(Mechanism(ARM), over=over)


def test_many_builds_at_once_are_refused():
    mech = Mechanism(Arm(Body(np.array([[1.0], [2.0]]), (0.35, 0.0))), travel=(-1, 1))
    with pytest.raises(
        InputError, match=r"mechanism must be a single one, got fields that are arrays \(shape \(2, 1\)\)"
    ):
        balance.residual(mech)


@pytest.mark.parametrize("quarter", [0, 1, 2, 3])
def test_places_on_an_axis_are_on_it(quarter):
    """An anchor straight above has x = 0 and not 6e-18, so that a percentage of it is refused and a drawing says 0."""
    found = balance.sine_match(
        Arm(Body(2.0, (0.35, 0.0))), attach_radius=0.08, anchor_height=0.1, anchor_angle=quarter * math.pi / 2
    )
    path = found.mechanism.springs[0].path
    for point in path.ends:
        assert min(abs(c) for c in point.at) == 0.0

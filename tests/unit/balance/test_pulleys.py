"""Pulley remedies: messages, tables, arms that are turned, springs that are there already."""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.balance.pulleys.remedies import pulley_remedies
from springpoise.errors import InputError, InputTypeError

ARM = Arm(Body(2.0, (0.35, 0.0)))
LIFT = Mechanism(ARM, travel=("-60 deg", "60 deg"))
GIVEN = {"pulley_radius": "10 mm", "attach_radius": "80 mm", "anchor_height": "100 mm"}
Q = np.radians(np.linspace(-60, 60, 41))


@pytest.mark.parametrize(
    ("changes", "kind", "message"),
    [
        ({"turn": "left"}, InputError, "turn must be 'cw' or 'ccw', got 'left'"),
        ({"pulley_radius": 0}, InputError, r"pulley_radius must be > 0 m, got 0\.0"),
        ({"pulley_radius": [0.01, 0.02]}, InputTypeError, "pulley_radius must be a single value in m, got"),
        (
            {"pulley_radius": "30 mm"},
            InputError,
            r"pulley_radius must be less than half the least distance from anchor to attachment \(0\.0504\d* m\), got 0\.03",
        ),
        (
            {"set_at": "70 deg"},
            InputError,
            r"set_at must be within the poses, -60\.00 deg to 60\.00 deg, got 70\.00 deg",
        ),
        (
            {"attach_radius": "0.3 m", "over": np.linspace(-1.5, 4.5, 61)},
            InputError,
            r"over must be poses over which the cable turns round the pulley by less than half a turn, got "
            r"-85\.94 deg to 257\.83 deg",
        ),
    ],
)
def test_wrong_values(changes, kind, message):
    with pytest.raises(kind, match=message):
        pulley_remedies(LIFT, **{**GIVEN, **changes})


def test_what_is_no_arm():
    with pytest.raises(InputTypeError, match="arm must be an Arm or a Mechanism of one, got 5"):
        pulley_remedies(5, **GIVEN)


def test_table():
    found = pulley_remedies(LIFT, **GIVEN)
    text = str(found)
    assert "a pulley radius of 10.00 mm leaves 10.97 % of the peak gravity torque" in text
    assert "for small radii  1.085 % for each mm of radius" in text
    assert "best shift, refit" in text
    assert "pulley 10.00 mm to the left; rate 835" in text
    assert found.named("nothing") is found.remedies[0]
    with pytest.raises(InputError, match=r"name must be one of 'nothing', 'refit, least squares', .*, got 'prayer'"):
        found.named("prayer")


def test_turned_arm_and_anchor_give_the_same_numbers():
    """Gravity, anchor and travel turned together by 30 deg."""
    turn = math.radians(30)
    g = 9.80665
    tilted = Mechanism(
        ARM, travel=(-math.pi / 3 + turn, math.pi / 3 + turn), gravity=(g * math.sin(turn), -g * math.cos(turn))
    )
    usual, other = (
        pulley_remedies(mech, **GIVEN, anchor_angle=angle, over=poses)
        for mech, angle, poses in ((LIFT, math.pi / 2, Q), (tilted, math.pi / 2 + turn, Q + turn))
    )
    for one, two in zip(usual.remedies, other.remedies, strict=True):
        assert two.rate_ratio == pytest.approx(one.rate_ratio, rel=1e-6)
        assert two.residual.worst == pytest.approx(one.residual.worst, rel=1e-6, abs=1e-12)
        assert two.shift == pytest.approx(one.shift, abs=1e-8)
    assert other.first_order == pytest.approx(usual.first_order, rel=1e-9)


def test_a_spring_that_is_there_stays():
    helper = SpringMount(
        ZeroLengthSpring(300.0), Straight(Point("ground", (0, 0.1)), Point("arm", (0.08, 0))), name="helper"
    )
    found = pulley_remedies(LIFT.with_springs(helper), **GIVEN, over=Q)
    alone = pulley_remedies(LIFT, **GIVEN, over=Q)
    share = found.ideal.rate / alone.ideal.rate
    for one, two in zip(alone.remedies, found.remedies, strict=True):
        assert two.mechanism.springs[0] == helper
        # the new spring has less to do, and errs by as much less
        assert two.residual.worst == pytest.approx(share * one.residual.worst, rel=1e-5, abs=1e-12)
        assert two.rate_ratio == pytest.approx(one.rate_ratio, rel=1e-5)


def test_poses_far_apart_do_not_hide_what_lies_between_them():
    """Between -170 and 170 deg the attachment comes to 20 mm from the anchor, at the top."""
    lift = Mechanism(Arm(Body("2 kg", ("0.35 m", 0))))
    with pytest.raises(InputError, match=r"pulley_radius must be less than half the least distance .* \(0.02"):
        pulley_remedies(
            lift,
            pulley_radius="11 mm",
            attach_radius="80 mm",
            anchor_height="100 mm",
            over=("-170 deg", "0 deg", "170 deg"),
        )

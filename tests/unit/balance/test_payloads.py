"""Adjusting for payloads: branches, messages, reach, and how the result prints."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    FourBar,
    Friction,
    JointTravel,
    Link,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
    balance,
)
from springpoise.balance.payloads.adjust import adjust_for_payload
from springpoise.errors import InputError, InputTypeError, NoSolution

A, B = 0.10, 0.16
RATE = 2.0 * 9.80665 * 0.35 / (A * B)
ARM = Arm(Body(2.0, (0.35, 0.0)), length=0.5)
MOUNT = SpringMount(ZeroLengthSpring(RATE), Straight(Point("ground", (0, A)), Point("arm", (B, 0))), name="main")
LIFT = Mechanism(ARM, springs=MOUNT, travel=(-1.0, 1.2), friction=Friction(0.3))


@pytest.mark.parametrize(
    ("changes", "kind", "message"),
    [
        ({"payloads": (1.0, 0.5)}, InputError, r"payloads must be \(lower, higher\) kg, both >= 0, got \(1\.0, 0\.5\)"),
        ({"payloads": (-1.0, 0.5)}, InputError, r"payloads must be .* got \(-1\.0, 0\.5\)"),
        ({"payloads": 3.0}, InputTypeError, r"payloads must be a pair in kg, got 3\.0"),
        ({"steps": 1}, InputError, "steps must be a whole number >= 2, got 1"),
        ({"steps": True}, InputError, "steps must be a whole number >= 2, got True"),
        ({"move": "pivot"}, InputError, "move must be 'anchor', 'attachment' or None, got 'pivot'"),
        ({"mount": "other"}, InputError, r"mount must be one of the mechanism's \(main\), got 'other'"),
        ({"mount": 1}, InputError, r"mount must be one of the mechanism's \(main\), got 1"),
        ({"mount": 1.5}, InputTypeError, r"mount must be a name or a number, got 1\.5"),
        (
            {"reach": (0.01, 0.05)},
            InputError,
            r"reach must be \(lower, higher\) m around 0, where the point is now, got \(0\.01, 0\.05\)",
        ),
        ({"reach": (0, 0)}, InputError, r"reach must be \(lower, higher\) m around 0, .* got \(0\.0, 0\.0\)"),
        (
            {"at": Point("ground", (0, 0))},
            InputError,
            r"at must be a Point on a moving body \('arm'\), got Point\(body='ground'",
        ),
    ],
)
def test_wrong_values(changes, kind, message):
    with pytest.raises(kind, match=message):
        adjust_for_payload(LIFT, **{"payloads": (0, 1), **changes})


def test_wrong_mechanisms():
    with pytest.raises(InputTypeError, match="mechanism must be a Mechanism, got Arm"):
        adjust_for_payload(ARM, payloads=(0, 1))
    with pytest.raises(InputError, match="must have a Straight or Cable path with an end to move, got no springs"):
        adjust_for_payload(LIFT.with_springs(()), payloads=(0, 1))
    torsion = LIFT.with_springs(SpringMount(TorsionSpring(1.0), JointTravel()))
    with pytest.raises(InputError, match="must have a Straight or Cable path with an anchor to move, got JointTravel"):
        adjust_for_payload(torsion, payloads=(0, 1), move="anchor")
    bare = Mechanism(Arm(Body(2.0, (0.35, 0.0))), springs=MOUNT)
    with pytest.raises(InputError, match=r"Arm\.length must be given to know the tip, got None"):
        adjust_for_payload(bare, payloads=(0, 1))


def test_it_takes_the_point_that_moves_least():
    found = adjust_for_payload(LIFT, payloads=(0, "1 kg"))
    assert [point.name for point in found.points] == ["anchor of main", "attachment of main"]
    assert found.chosen.move == "anchor"
    assert found.chosen.way < found.points[1].way
    assert found.success
    assert found.require() is found
    text = str(found)
    assert "move the anchor of main over 71.43 mm; nothing is left at worst" in text
    assert "(0.00, 100.00) mm on 'ground', moves along 90.00 deg" in text
    assert "friction alone holds  0 kg to 0.06118 kg" in text
    assert "or the attachment of main  over 114.3 mm, nothing is left at worst" in text
    assert text.count(" kg ") >= 5


def test_one_point_alone_prints_no_others():
    assert "or the" not in str(adjust_for_payload(LIFT, payloads=(0, 1), move="anchor", mount=0))


def test_reach_that_is_too_short():
    found = adjust_for_payload(LIFT, payloads=(0, 1), steps=3, move="anchor", reach=("-10 mm", "40 mm"))
    assert [step.within_reach for step in found.chosen.steps] == [True, True, False]
    last = found.chosen.steps[-1]
    assert last.shift == 0.04
    # a sinusoid: what 40 mm of the needed anchor leave
    assert last.residual.worst == pytest.approx((1.0 * 9.80665 * 0.5 - RATE * 0.04 * B), rel=1e-3)
    message = r"the anchor of main does not reach its place for 1\.000 kg: at the end of its reach 2\.\d+ N\*m are left"
    with pytest.raises(NoSolution, match=message):
        found.require()
    assert not found.success


def test_a_reach_that_is_just_enough():
    needed = A * 0.5 / 0.7
    assert adjust_for_payload(LIFT, payloads=(0, 1), move="anchor", reach=(0, needed)).success


def test_a_payload_that_is_on_already_is_taken_off():
    loaded = LIFT.with_payload(0.7)
    found = adjust_for_payload(loaded, payloads=(0, 1), move="anchor")
    assert found.chosen.steps[0].shift == pytest.approx(0.0, abs=1e-15)
    assert found.chosen.steps[0].free_at == ()


def test_friction_may_hold_nothing():
    slack = Mechanism(ARM, springs=MOUNT, travel=(-1.0, 1.2))
    found = adjust_for_payload(slack.with_springs(()).with_springs(MOUNT), payloads=(0.5, 1), move="anchor")
    assert found.friction_payloads is None or found.friction_payloads[1] < 1e-12
    heavier = Mechanism(Arm(Body(3.0, (0.35, 0.0)), length=0.5), springs=MOUNT, travel=(-1.0, 1.2))
    found = adjust_for_payload(heavier, payloads=(0, 1), move="anchor")
    assert found.friction_payloads is None
    assert "no payload at every pose" in str(found)


def test_another_direction():
    """A screw at 60 deg to the horizontal: only its height counts where nothing is off the line; the rest is left."""
    found = adjust_for_payload(LIFT, payloads=(0, 1), move="anchor", along="60 deg", steps=2)
    step = found.chosen.steps[-1]
    assert found.chosen.direction == pytest.approx((0.5, math.sqrt(0.75)))
    assert step.place == pytest.approx((0.5 * step.shift, A + math.sqrt(0.75) * step.shift))
    assert step.exact_place == pytest.approx((0, A * 1.2 / 0.7))
    assert step.residual.worst > 0.1


def test_a_cable_moves_as_one_carriage():
    cable = Cable(
        Point("ground", (-0.02, -0.3)), Disc(Point("ground", (-0.01, A)), radius=0.01, turn="cw"), Point("arm", (B, 0))
    )
    mech = LIFT.with_springs(SpringMount(ZeroLengthSpring(RATE), cable, rigid_length=0.41))
    found = adjust_for_payload(mech, payloads=(0, 1), steps=2, along="90 deg", move="anchor")
    step = found.chosen.steps[-1]
    moved = step.mechanism.springs[0].path
    assert moved.along[0].at == pytest.approx((-0.02, -0.3 + step.shift))
    assert moved.along[1].centre.at == pytest.approx((-0.01, A + step.shift))
    assert moved.along[2] == cable.along[2]
    assert found.chosen.place_now == (-0.01, A)
    other = adjust_for_payload(mech, payloads=(0, 1), steps=2, move="attachment").chosen
    assert other.steps[-1].mechanism.springs[0].path.along[:2] == cable.along[:2]
    assert other.body == "arm"


def test_a_linkage_other_than_an_arm():
    bar = FourBar(
        crank=Link("crank", Body(1.0, (0.1, 0.0)), length=0.2),
        coupler=Link("coupler", Body(0.5, (0.2, 0.0)), length=0.4),
        rocker=Link("rocker", Body(0.8, (0.1, 0.0)), length=0.25),
        second_pivot=(0.39, 0.07),
    )
    mount = SpringMount(ZeroLengthSpring(300.0), Straight(Point("ground", (0, 0.1)), Point("crank", (0.1, 0))))
    mech = Mechanism(bar, springs=mount, travel=(0.6, 1.2))
    with pytest.raises(InputError, match="at must be given for a linkage other than an Arm, got None"):
        adjust_for_payload(mech, payloads=(0, 1))
    found = adjust_for_payload(mech, payloads=(0.1, 0.3), at=Point("coupler", (0.2, 0.0)), steps=2)
    for step in found.chosen.steps:
        assert step.residual.worst < step.residual_before.worst
        assert step.exact_place is None
    assert np.isfinite(found.chosen.worst)


def test_no_payload_is_no_move_however_gravity_lies():
    """Rounding in a tilted, offset arm is no shift: nothing is free at some poses and not at others."""
    arm = Arm(Body(2.0, (0.3, -0.1)), length=0.5)
    tilted = Mechanism(arm, travel=(-1.0, 1.0), gravity=(3.0, -9.0))
    lift = balance.sine_match(tilted, attach_radius=0.16, anchor_height=0.1).mechanism
    found = adjust_for_payload(lift, payloads=(0, 0.8), steps=2)
    for point in found.points:
        assert point.steps[0].shift == 0.0
        assert point.steps[0].free_at == ()
    assert max(map(len, str(found).splitlines())) < 150


def test_without_friction_a_balanced_arm_holds_what_it_is_set_for():
    lift = balance.sine_match(
        Mechanism(Arm(Body(2.0, (0.35, 0.0)), length=0.5), travel=(-1.0, 1.0)), attach_radius=0.16, anchor_height=0.1
    ).mechanism
    found = adjust_for_payload(lift, payloads=(0, 0.8), steps=2)
    assert found.friction_payloads == pytest.approx((0.0, 0.0), abs=1e-9)
    assert "friction alone holds  0 kg and no other" in str(found)


def test_a_spring_that_leaves_its_working_range_is_no_success():
    """At -60 deg the ends are sqrt(0.15² + 0.12² + 2 · 0.15 · 0.12 · sin 60 deg) = 0.26 m apart as they are."""
    path = Straight(Point("ground", (0, 0.15)), Point("arm", (0.12, 0)))
    spring = ExtensionSpring(900, free_length=0.05, longest=0.22)
    lift = Mechanism(
        Arm(Body(2.0, (0.35, 0.0)), length=0.5), springs=SpringMount(spring, path), travel=("-60 deg", "70 deg")
    )
    found = adjust_for_payload(lift, payloads=(0, "0.8 kg"), steps=2)
    assert not found.success
    with pytest.raises(NoSolution, match=r"takes its spring [0-9.]+ mm out of its working range for [0-9.]+ k?g"):
        found.require()
    longer = lift.with_springs(SpringMount(attrs.evolve(spring, longest=0.30), path))
    assert adjust_for_payload(longer, payloads=(0, "0.8 kg"), steps=2).success

"""Limits judged, against numbers by hand.

The lift is a bar of 3 kg, 0.4 m out, g = 9.8 m/s²: m·g·r = 11.76 N·m. Two springs of zero free
length and 245 N/m, 0.2 m above the pivot and 0.12 m out on the arm: k·a·b = 11.76 N·m. So it is
balanced everywhere; a crate of 1 kg at 0.8 m adds 7.84 N·m · cos q, which nothing balances.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from pathlib import Path

import attrs
import numpy as np
import pytest

from springpoise import Cable, Disc, ExtensionSpring, Friction, Point, SpringMount, Straight, TorsionSpring, guard
from springpoise.errors import InputError, PoiseFileError
from springpoise.paths import JointTravel

Write = Callable[..., Path]
CRATE = 7.84
"""Peak torque of the crate [N·m]."""


@pytest.fixture
def document(written: Write) -> guard.PoiseFile:
    return attrs.evolve(guard.load(written()), limits=())


def verdict(document: guard.PoiseFile, limit: guard.Limit) -> guard.LimitVerdict:
    report = guard.check(attrs.evolve(document, limits=[limit]))
    assert len(report.verdicts) == 1
    assert report.holds == report.verdicts[0].holds
    return report.verdicts[0]


def test_residual_torque(document: guard.PoiseFile) -> None:
    kept = verdict(document, guard.ResidualTorque(at_most="0.1 N*m"))
    assert kept.holds
    assert kept.value == pytest.approx(0.0, abs=1e-9)
    assert kept.margin == pytest.approx(0.1)
    broken = verdict(document, guard.ResidualTorque(at_most="5 N*m", payload="crate"))
    assert not broken.holds
    assert (broken.value, broken.margin) == pytest.approx((CRATE, 5 - CRATE))
    assert broken.at == pytest.approx(0.0, abs=math.radians(135 / 360))
    assert "with payload 'crate' is 7.840 N*m" in broken.sentence
    assert "2.840 N*m outside the limit of at most 5.000 N*m" in broken.sentence


def test_residual_torque_as_a_share_of_gravity(document: guard.PoiseFile) -> None:
    limit = guard.ResidualTorque(at_most="50 %", payload="crate")
    found = verdict(document, limit)
    assert found.allowed == pytest.approx(0.5 * (11.76 + CRATE), rel=1e-4)
    assert found.holds
    assert "(40.00 % of the peak gravity torque, where 50 % is allowed)" in found.sentence


def test_residual_torque_as_a_mean_over_a_range(document: guard.PoiseFile) -> None:
    limit = guard.ResidualTorque(at_most="5 N*m", norm="rms", payload="crate", over=("0 deg", "60 deg"))
    found = verdict(document, limit)
    q = np.linspace(0, np.pi / 3, 361)
    assert found.value == pytest.approx(CRATE * np.sqrt(np.mean(np.cos(q) ** 2)))
    assert found.at is None
    assert found.sentence.startswith("residual torque (root mean square) with payload 'crate' is ")


def test_holding_torque_counts_friction(document: guard.PoiseFile) -> None:
    assert verdict(document, guard.HoldingTorque(at_most="0.3 N*m")).value == pytest.approx(0.2)
    loaded = verdict(document, guard.HoldingTorque(at_most="8 N*m", payload="crate"))
    assert loaded.value == pytest.approx(CRATE + 0.2)
    assert not loaded.holds


def test_motor_current_takes_the_worse_direction(document: guard.PoiseFile) -> None:
    found = verdict(document, guard.MotorCurrent(at_most="4 A", payload="crate"))
    # Lifting: torque with friction over ratio, efficiency and torque constant.
    assert found.value == pytest.approx((CRATE + 0.2) / (50 * 0.8 * 0.05))
    assert not found.holds
    assert found.unit == "A"


def test_stored_energy(document: guard.PoiseFile) -> None:
    longest_squared = 0.2**2 + 0.12**2 + 2 * 0.2 * 0.12 * math.sin(math.radians(60))
    found = verdict(document, guard.StoredEnergy(at_most="30 J"))
    assert found.value == pytest.approx(0.5 * 490 * longest_squared)
    assert found.at == pytest.approx(math.radians(-60))


def test_pivot_load(document: guard.PoiseFile) -> None:
    bare = attrs.evolve(document, mechanism=document.mechanism.with_springs([]))
    found = verdict(bare, guard.PivotLoad(at_most="40 N", payload="crate"))
    assert found.value == pytest.approx(4 * 9.8)
    assert found.margin == pytest.approx(0.8)


def extended(document: guard.PoiseFile) -> guard.PoiseFile:
    """A real spring of 60 mm to 310 mm instead, and a torsion spring on the joint."""
    path = document.mechanism.springs[0].path
    real = SpringMount(ExtensionSpring(245.0, free_length=0.06, longest=0.31), path, name="real")
    wound = SpringMount(TorsionSpring(1.0, 0.0, ("-70 deg", "80 deg")), JointTravel(), name="wound")
    return attrs.evolve(document, mechanism=document.mechanism.with_springs([real, wound]))


def test_stretch(document: guard.PoiseFile) -> None:
    both = extended(document)
    greatest = math.sqrt(0.2**2 + 0.12**2 + 2 * 0.2 * 0.12 * math.sin(math.radians(60)))
    least = math.sqrt(0.2**2 + 0.12**2 - 2 * 0.2 * 0.12 * math.sin(math.radians(75)))
    found = verdict(both, guard.Stretch(at_least="5 mm"))
    assert found.value == pytest.approx(min(0.31 - greatest, least - 0.06))
    assert found.margin == pytest.approx(found.value - 0.005)
    assert (found.about, found.unit) == ("real", "m")
    turned = verdict(both, guard.Stretch(at_least="6 deg"))
    assert turned.value == pytest.approx(math.radians(5))
    assert not turned.holds
    assert "stretch of wound is 5.00 deg within its range at " in turned.sentence
    assert "1.00 deg outside the limit of at least 6.00 deg" in turned.sentence


def test_stretch_of_one_spring_and_of_none(document: guard.PoiseFile) -> None:
    both = extended(document)
    assert verdict(both, guard.Stretch(at_least="5 mm", spring="real")).about == "real"
    wrong = verdict(both, guard.Stretch(at_least="5 mm", spring="wound"))
    assert not wrong.holds
    assert wrong.sentence == "stretch: there is no spring with a length to judge"
    bare = attrs.evolve(document, mechanism=document.mechanism.with_springs([]))
    assert (
        verdict(bare, guard.Stretch(at_least="1 deg")).sentence == "stretch: there is no spring with an angle to judge"
    )


def test_a_spring_strained_beyond_its_ends_is_a_warning_where_no_limit_judges_it(document: guard.PoiseFile) -> None:
    path = document.mechanism.springs[0].path
    greatest = math.sqrt(0.2**2 + 0.12**2 + 2 * 0.2 * 0.12 * math.sin(math.radians(60)))
    short = SpringMount(ExtensionSpring(245.0, free_length=0.06, longest=0.25), path, name="short")
    slack = SpringMount(ExtensionSpring(245.0, free_length=0.2, longest=0.4), path, name="slack")  # idle, not strained
    wound = SpringMount(TorsionSpring(1.0, 0.0, ("-70 deg", "70 deg")), JointTravel(), name="wound")
    both = attrs.evolve(document, mechanism=document.mechanism.with_springs([short, slack, wound]))
    energy, stretch = guard.StoredEnergy(at_most="90 J"), guard.Stretch(at_least="5 mm", spring="short")
    report = guard.check(attrs.evolve(both, limits=[energy]))
    assert report.holds
    assert report.warnings == (
        f"spring 'short' is {1e3 * (greatest - 0.25):.2f} mm outside what it permits at -60.00 deg, "
        "and no limit on its stretch is stated",
        "spring 'wound' is 5.00 deg outside what it permits at 75.00 deg, and no limit on its stretch is stated",
    )
    judged = guard.check(attrs.evolve(both, limits=[energy, stretch]))
    assert not judged.holds
    assert [text.split("'")[1] for text in judged.warnings] == ["wound"]


def test_a_spring_without_ends_is_by_far_inside(document: guard.PoiseFile) -> None:
    mount = SpringMount(TorsionSpring(1.0), JointTravel(), name="wound")
    free = attrs.evolve(document, mechanism=document.mechanism.with_springs(mount))
    found = verdict(free, guard.Stretch(at_least="5 deg"))
    assert found.holds
    assert found.margin == math.inf
    assert found.to_dict()["margin_rad"] is None
    assert "is no limit within its range" in found.sentence


def test_balance_angles(document: guard.PoiseFile) -> None:
    limit = guard.BalanceAngles(near=["20 deg", "-10 deg"], within="2 deg")
    everywhere = verdict(document, limit)
    assert everywhere.holds
    assert everywhere.value == 0.0
    # Half the spring rate and a torsion spring: k·cos q against c·(q - q0) crosses once.
    mount = SpringMount(
        TorsionSpring(30.0, free_angle=math.radians(20) + 11.76 * math.cos(math.radians(20)) / 30), JointTravel()
    )
    wound = attrs.evolve(document, mechanism=document.mechanism.with_springs(mount))
    assert verdict(wound, guard.BalanceAngles(near=["20 deg"], within="0.1 deg", stable=True)).holds
    off = verdict(wound, guard.BalanceAngles(near=["20 deg", "25 deg"], within="2 deg"))
    assert off.value == pytest.approx(math.radians(5))
    assert off.at == pytest.approx(math.radians(25))
    assert off.sentence == (
        "balance angles: the balance angle nearest to 25.00 deg is 5.00 deg away, "
        "3.00 deg outside the limit of at most 2.00 deg"
    )
    nowhere = verdict(wound, guard.BalanceAngles(near=["50 deg"], within="2 deg", over=("40 deg", "60 deg")))
    assert nowhere.sentence == "balance angles: there is no balance angle in the range judged"
    assert not nowhere.holds


def test_an_unstable_angle_is_no_stable_one(document: guard.PoiseFile) -> None:
    bare = document.mechanism.with_springs([])
    up = attrs.evolve(document, mechanism=attrs.evolve(bare, travel=("60 deg", "120 deg")))
    assert verdict(up, guard.BalanceAngles(near=["90 deg"], within="1 deg")).holds
    unstable = verdict(up, guard.BalanceAngles(near=["90 deg"], within="1 deg", stable=True))
    assert unstable.sentence == "balance angles: there is no stable balance angle in the range judged"


def test_what_is_not_a_number_does_not_hold(document: guard.PoiseFile) -> None:
    """The cable's end comes to lie inside the disc at some angles."""
    disc = Disc(Point("ground", (0.1, 0.0)), radius=0.03, turn="cw")
    path = Cable(Point("ground", (0.0, 0.2)), disc, Point("arm", (0.1, 0.0)))
    mount = SpringMount(ExtensionSpring(100.0, free_length=0.01), path, name="s")
    inside = attrs.evolve(document, mechanism=document.mechanism.with_springs(mount))
    for limit in (
        guard.ResidualTorque(at_most="1 N*m"),
        guard.ResidualTorque(at_most="1 N*m", norm="rms"),
        guard.StoredEnergy(at_most="30 J"),
        guard.Stretch(at_least="1 mm"),
        guard.BalanceAngles(near=["1 deg"], within="1 deg"),
        guard.PivotLoad(at_most="1 N"),
        guard.HoldingTorque(at_most="1 N*m"),
        guard.MotorCurrent(at_most="1 A"),
    ):
        found = verdict(inside, limit)
        assert not found.holds
        assert math.isnan(found.value)
        assert "is not a number at " in found.sentence
        json.dumps(found.to_dict(), allow_nan=False)


def test_the_report_as_text_and_as_json(document: guard.PoiseFile) -> None:
    limits = [guard.HoldingTorque(at_most="1 N*m"), guard.HoldingTorque(at_most="1 N*m", payload="crate")]
    report = guard.check(attrs.evolve(document, limits=limits))
    assert report.status == "1 of 2 limits fail"
    assert [found.payload for found in report.failures] == ["crate"]
    data = json.loads(json.dumps(report.to_dict(), allow_nan=False))
    assert data["holds"] is False
    assert data["verdicts"][1]["value_Nm"] == pytest.approx(CRATE + 0.2)
    assert data["verdicts"][1]["payload"] == "crate"
    assert set(data["verdicts"][0]) == {
        "what", "holds", "value_Nm", "allowed_Nm", "margin_Nm", "at_rad", "payload", "temperature_K", "about", "sentence"
    }  # fmt: skip
    text = str(report)
    assert "FAILS" in text
    assert report.failures[0].sentence in text
    assert str(report.failures[0]) == report.failures[0].sentence
    assert max(map(len, text.splitlines()[:4])) <= 100


def test_a_check_of_nothing_does_not_pass(document: guard.PoiseFile, written: Write, lift: str) -> None:
    report = guard.check(document)
    assert not report.holds
    assert report.failures == ()
    assert str(report).endswith("states no limits, so nothing was judged")


def test_a_design_that_is_not_solved_is_not_judged(written: Write) -> None:
    file = written(behind='\n[design]\nmethod = "sine"\nrate = "1 N/m"\nattach_radius = "9 mm"\n')
    with pytest.raises(PoiseFileError, match="design: leaves springs to be found, got method 'sine'"):
        guard.check(file)
    with pytest.raises(InputError, match="the document: design: leaves springs to be found"):
        guard.check(attrs.evolve(guard.load(file), path=None, title=""))


def test_a_document_is_a_document_or_a_path() -> None:
    with pytest.raises(TypeError, match="document must be a PoiseFile or a path, got 3"):
        guard.check(3)  # type: ignore[arg-type]


def test_friction_of_the_pivot_counts_in_the_holding_torque(document: guard.PoiseFile) -> None:
    mechanism = attrs.evolve(
        document.mechanism.with_springs([]), friction=Friction(pivot_friction=0.1, pivot_radius="10 mm")
    )
    bare = attrs.evolve(document, mechanism=mechanism)
    assert verdict(bare, guard.HoldingTorque(at_most="20 N*m")).value == pytest.approx(
        11.76 + 0.1 * 0.01 * 29.4, rel=1e-5
    )


def test_a_straight_path_on_the_arm_alone_has_no_pull(document: guard.PoiseFile) -> None:
    idle = SpringMount(ExtensionSpring(9.0, free_length=0.01), Straight(Point("arm", (0, 0)), Point("arm", (0.1, 0))))
    same = attrs.evolve(document, mechanism=document.mechanism.with_springs([*document.mechanism.springs, idle]))
    assert verdict(same, guard.ResidualTorque(at_most="1e-6 N*m")).holds

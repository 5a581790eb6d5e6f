"""The comparison of methods that a design asks for."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    CompressionSpring,
    ConstantForceSpring,
    Disc,
    ExtensionSpring,
    JointTravel,
    Mechanism,
    Point,
    Spool,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
    guard,
)
from springpoise.balance import compare_methods
from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.guard.solving.methods import METHODS, method_of
from springpoise.springs import ScaledSpring

ARM = """
schema = 1
title = "lift"
[arm]
bodies = [{ mass = "3 kg", com = ["0.4 m", "0 m"] }]
[travel]
from = "-60 deg"
to = "75 deg"
[[payloads]]
name = "crate"
mass = "1 kg"
at = { body = "arm", at = ["0.8 m", "0 m"] }
"""
SINE = '[design]\nmethod = "sine"\nattach_radius = "0.12 m"\nanchor_height = "0.2 m"\n'
COMPARE = """
[design.compare]
attach_radius = ["80 mm", "120 mm"]
anchor_height = ["100 mm", "200 mm"]
methods = ["pulley", "counterweight", "torsion"]
"""

Put = Callable[[str], Path]


@pytest.fixture
def put(tmp_path: Path) -> Put:
    def write(text: str) -> Path:
        file = tmp_path / "lift.poise.toml"
        file.write_text(text, encoding="utf-8")
        return file

    return write


def test_the_names_are_those_of_the_solver() -> None:
    arm = Mechanism(Arm(Body("2 kg", ("0.35 m", 0))), travel=("-60 deg", "60 deg"))
    found = compare_methods(arm, attach_radius=("50 mm", "90 mm"), anchor_height=("60 mm", "120 mm"), over=arm.poses(9))
    assert {row.method: row.name for row in found.rows} == METHODS


def test_the_table_is_the_solver_s(put: Put) -> None:
    text = ARM + SINE + 'payload = "crate"\n' + COMPARE + 'norm = "rms"\nwarming = "30 K"\npayload_change = "20 %"\n'
    text += 'attach_skew = ["-5 deg", "5 deg"]\nassumptions = { pulley_radius = "6 mm" }\n'
    found = guard.design(put(text))
    assert found.methods is not None
    assert found.document.design is not None
    request = found.document.design.compare
    assert request is not None
    arm = found.document.with_payload("crate")
    direct = compare_methods(
        arm,
        attach_radius=("80 mm", "120 mm"),
        anchor_height=("100 mm", "200 mm"),
        over=arm.poses(181),
        methods=["pulley", "counterweight", "torsion"],
        norm="rms",
        warming="30 K",
        payload_change=0.2,
        attach_skew=("-5 deg", "5 deg"),
        assumptions=request.assumptions,
    )
    assert str(found.methods) == str(direct)
    data = json.loads(json.dumps(found.to_dict(), allow_nan=False))["compare"]
    assert [row["method"] for row in data["methods"]] == list(direct.ranking) == data["ranking"]
    assert data["methods"][0]["worst_Nm"] == direct.rows[0].figures.residual.worst  # type: ignore[union-attr]
    report = str(found)
    assert "Ways to balance this arm with payload 'crate'; percent of the peak gravity torque, 19.61 N*m" in report
    assert "  rms  " in report
    assert "+30 K" in report
    assert data["standing"] in " ".join(report.split())
    assert data["standing"].startswith("The design's spring of zero free length acts as a spring on pulley, number ")
    assert data["standing"].endswith("The parts found leave 0.00 %.")


def test_the_search_lends_its_ranges(put: Put) -> None:
    stock = (
        '[design]\nmethod = "stock"\nstock = "list.csv"\n'
        'attach_radii = { from = "80 mm", to = "120 mm", steps = 2 }\n'
        'anchor_heights = { from = "100 mm", to = "200 mm", steps = 2 }\n'
        '[design.compare]\nmethods = ["straight", "gas"]\n'
    )
    file = put(ARM + stock)
    head = "part,rate [N/mm],free length [mm],initial tension [N],longest length [mm]\n"
    (file.parent / "list.csv").write_text(head + "X-9,2,300,1,310\n", encoding="utf-8")
    found = guard.design(file)
    arm = found.document.mechanism
    direct = compare_methods(
        arm, attach_radius=(0.08, 0.12), anchor_height=(0.1, 0.2), over=arm.poses(181), methods=["straight", "gas"]
    )
    assert not found.success
    assert str(found.methods) == str(direct)
    text = " ".join(str(found).split())
    assert "The design is a straight spring, number 1 of 2 here. Of usual parts between these bounds it would" in text
    assert "No part of the stock list fits." in text


def test_a_method_that_was_not_compared_and_one_that_cannot_be_sized(put: Put) -> None:
    found = guard.design(put(ARM + SINE + COMPARE.replace('"pulley", ', "")))
    assert "acts as a spring on pulley, which was not compared." in " ".join(str(found).split())
    text = ARM.replace('"-60 deg"', '"60 deg"').replace('"75 deg"', '"130 deg"')
    found = guard.design(put(text + SINE + COMPARE.replace('["pulley", "counterweight", "torsion"]', '["spool"]')))
    report = " ".join(str(found).split())
    assert "shaped spool - - -" in report
    assert "shaped spool: cannot be sized: the gravity torque changes sign between the poses" in report
    data = found.to_dict()["compare"]
    assert data["methods"][0]["sized"] is False


@pytest.mark.parametrize(
    ("behind", "message"),
    [
        (COMPARE.replace('attach_radius = ["80 mm", "120 mm"]\n', ""),
         r'design\.compare must have attach_radius, bounds such as .*; only a design with method = "stock" has ranges'),
        ("[design.compare]\n", r"design\.compare must have attach_radius and anchor_height, bounds such as"),
        (COMPARE.replace('"torsion"', '"torsoin"'), r"design\.compare\.methods: MethodsRequest\.methods must be names of "
         r"methods, got 'torsoin'; did you mean 'torsion'\?"),
        (COMPARE.replace('["pulley", "counterweight", "torsion"]', "[]"), r"methods must be at least one method, got none"),
        (COMPARE.replace('"80 mm"', '"180 mm"'), r"attach_radius must be \(least, greatest\) above 0 m, got \(0\.18, 0\.12"),
        (COMPARE.replace('"80 mm"', "80"), r"design\.compare\.attach_radius\[1\]: must be a text with a unit, .*got 80"),
        (COMPARE + 'norm = "max"\n', r"MethodsRequest\.norm must be 'minimax' or 'rms', got 'max'"),
        (COMPARE + 'warming = "20 degC"\n', r"MethodsRequest\.warming must be a difference such as '20 K', got '20 degC'"),
        (COMPARE + 'payload_change = "-100 %"\n', r"MethodsRequest\.payload_change must be > -100 %, got '-100 %'"),
        (COMPARE + "assumptions = { pulley = 1 }\n", r"design\.compare\.assumptions\.pulley: is not a known key"),
    ],
)  # fmt: skip
def test_what_is_refused(put: Put, behind: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=message):
        guard.load(put(ARM + SINE + behind))


def test_springs_that_stay_cannot_be_compared(put: Put) -> None:
    mount = """
[[springs]]
name = "helper"
spring = { kind = "zero length", rate = "10 N/m" }
[springs.path]
kind = "straight"
first = { body = "ground", at = ["0 m", "0.2 m"] }
last = { body = "arm", at = ["0.1 m", "0 m"] }
"""
    with pytest.raises(PoiseFileError, match=r"design\.compare must be of an arm whose springs are all to be found, .*, "
                       r"got 1 that is given \(helper\); leave the table out"):  # fmt: skip
        guard.load(put(ARM + mount + SINE + COMPARE))
    fit = mount.replace('"10 N/m"', '"open"') + '[design]\nmethod = "fit"\n' + COMPARE
    found = guard.design(put(ARM + fit))
    assert found.methods is not None
    assert "acts as a spring on pulley" in " ".join(str(found).split())


def test_in_code() -> None:
    with pytest.raises(InputTypeError, match=r"MethodsRequest\.methods must be a list of names, got 'gas'"):
        guard.MethodsRequest(methods="gas")  # type: ignore[arg-type]
    with pytest.raises(InputError, match=r"MethodsRequest\.warming must be a single value in K, got \[1, 2\]"):
        guard.MethodsRequest(warming=[1, 2])  # type: ignore[arg-type]
    assert guard.MethodsRequest(methods=["gas", "gas"]).methods == ("gas",)


def test_an_arm_that_needs_no_balance(put: Put) -> None:
    fit = '[[springs]]\nspring = { kind = "zero length", rate = "open" }\n[springs.path]\nkind = "straight"\n'
    fit += 'first = { body = "ground", at = ["0 m", "0.2 m"] }\nlast = { body = "arm", at = ["0.1 m", "0 m"] }\n'
    text = ARM.replace('["0.4 m", "0 m"]', '["0 m", "0 m"]') + fit + '[design]\nmethod = "fit"\n' + COMPARE
    with pytest.raises(PoiseFileError, match=r"lift\.poise\.toml: design: "):
        guard.design(put(text))


GROUND, HOOK = Point("ground", (0, 0.2)), Point("arm", (0.1, 0))
STRAIGHT = Straight(GROUND, HOOK)
BEHIND = Cable(Point("ground", (0, -0.2)), Disc(GROUND, radius=0.01, turn="cw"), HOOK)
ORDINARY = ExtensionSpring(300, free_length=0.1)


@pytest.mark.parametrize(
    ("spring", "path", "method"),
    [
        (ORDINARY, STRAIGHT, "straight"),
        (ORDINARY, BEHIND, "pulley"),
        (ScaledSpring(ORDINARY, 2.0), Cable(GROUND, HOOK), "straight"),
        (ZeroLengthSpring(300), STRAIGHT, "pulley"),
        (TorsionSpring(3), JointTravel(), "torsion"),
        (ConstantForceSpring(30), Spool.drum(0.05, turn="cw"), "constant force"),
        (ORDINARY, Spool.drum(0.05, turn="cw"), "spool"),
        (ConstantForceSpring(30), STRAIGHT, None),
        (CompressionSpring(300, free_length=0.2, solid_length=0.1), STRAIGHT, None),
    ],
)
def test_what_a_mount_is_called(spring: object, path: object, method: str | None) -> None:
    assert method_of([SpringMount(spring, path)]) == method  # type: ignore[arg-type]


def test_mounts_of_several_methods() -> None:
    assert method_of([SpringMount(ORDINARY, STRAIGHT), SpringMount(ORDINARY, BEHIND)]) is None
    assert method_of([]) is None

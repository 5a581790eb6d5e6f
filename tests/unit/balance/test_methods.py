"""What compare_methods refuses, and what its table says."""

from __future__ import annotations

import math

import pytest

from springpoise import Arm, Body, Friction, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.balance.methods.assumptions import MethodAssumptions
from springpoise.balance.methods.compare import compare_methods
from springpoise.errors import InputError, InputTypeError, NoSolution

ARM = Mechanism(Arm(Body(2.0, (0.35, 0.0))), travel=(-1.0, 1.0))
BOX = {"attach_radius": (0.05, 0.10), "anchor_height": (0.06, 0.15)}


def _compare(arm=ARM, **options):
    return compare_methods(arm, **{**BOX, "over": ARM.poses(31), "methods": ["torsion", "counterweight"], **options})


@pytest.mark.parametrize(
    ("options", "error", "message"),
    [
        ({"norm": "worst"}, InputError, "norm must be 'minimax' or 'rms', got 'worst'"),
        ({"methods": ["magnet"]}, InputError, "methods must be among 'pulley', .*, got 'magnet'"),
        ({"methods": []}, InputError, "methods must be at least one method, got none"),
        ({"assumptions": 3}, InputTypeError, "assumptions must be MethodAssumptions, got 3"),
        ({"attach_radius": (0.1, 0.05)}, InputError, r"attach_radius must be bounds .* above 0 m, got \(0.1, 0.05\)"),
        ({"attach_radius": (0.0, 0.05)}, InputError, r"attach_radius must be .* above 0 m, got \(0.0, 0.05\)"),
        ({"anchor_height": (0.2, 0.1)}, InputError, r"anchor_height must be bounds .*, got \(0.2, 0.1\)"),
        (
            {"attach_skew": (0.2, 0.1)},
            InputError,
            r"attach_skew must be bounds \(least, greatest\) rad, got \(0.2, 0.1\)",
        ),
        (
            {"attach_skew": (-20, 20)},
            InputError,
            r"attach_skew must be within a quarter turn, .* got \(-20.0, 20.0\); degrees",
        ),
        ({"warming": "20 degC"}, InputError, "warming must be a difference of temperatures in K, got '20 degC'"),
        ({"warming": "36 fahrenheit"}, InputError, "warming must be a difference .* got '36 fahrenheit'"),
        ({"warming": -300}, InputError, "warming must be above -293.15 K from 293.15 K, got -300.0"),
        ({"payload_change": -1.5}, InputError, "payload_change must be > -1, got -1.5"),
        ({"warming": [1.0, 2.0]}, InputTypeError, r"warming must be a single value in K, got \[1.0, 2.0\]"),
        ({"over": [0.1]}, InputError, "over must be at least two different poses in rad, got 1 at 0.1"),
        ({"gravity": (0, 0)}, InputError, "arm must have something to balance, got no gravity torque"),
        ({"arm": 3}, InputTypeError, "arm must be an Arm or a Mechanism of one, got 3"),
    ],
)
def test_what_is_refused(options, error, message):
    with pytest.raises(error, match=message):
        _compare(**options)


def test_an_arm_with_springs_is_refused():
    mount = SpringMount(ZeroLengthSpring(1.0), Straight(Point("ground", (0, 0.1)), Point("arm", (0.1, 0))))
    with pytest.raises(InputError, match="arm must have no springs to compare methods on, got 1 mounts"):
        _compare(ARM.with_springs(mount))


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"free_length_ratio": 1.0}, "MethodAssumptions.free_length_ratio must be above 0 and below 1, got 1.0"),
        ({"initial_tension_ratio": 1.0}, "MethodAssumptions.initial_tension_ratio must be from 0 to below 1, got 1.0"),
        ({"gas_progression": 1.0}, "MethodAssumptions.gas_progression must be > 1, got 1.0"),
        ({"rubber_stretch": (0.9, 2)}, r"MethodAssumptions.rubber_stretch must be .* from 1 on, got \(0.9, 2.0\)"),
        ({"counterweight_radius": 0}, "MethodAssumptions.counterweight_radius must be > 0 m, got 0.0"),
        ({"drum_radius": "-1 mm"}, "MethodAssumptions.drum_radius must be > 0 m, got -0.001"),
        ({"pulley_radius": 0}, "MethodAssumptions.pulley_radius must be > 0 m, got 0.0"),
        ({"gas_friction": -0.1}, "MethodAssumptions.gas_friction must be from 0 to below 1, got -0.1"),
    ],
)
def test_assumptions_are_refused(options, message):
    with pytest.raises(InputError, match=message):
        MethodAssumptions(**options)


def test_a_method_that_cannot_be_sized_is_a_row_that_says_why():
    over_the_top = Mechanism(Arm(Body(2.0, (0.35, 0.0))), travel=("60 deg", "130 deg"))
    found = compare_methods(over_the_top, **BOX, over=over_the_top.poses(31), methods=["spool", "counterweight"])
    row = found.row("spool")
    assert not row.success
    assert row.sizes == "the gravity torque changes sign between the poses, and one spool winds one way only"
    assert found.ranking == ("counterweight",)
    assert found.rows[-1] is row
    assert "shaped spool: cannot be sized: the gravity torque changes sign" in " ".join(str(found).split())
    with pytest.raises(NoSolution, match="shaped spool: cannot be sized: the gravity torque changes sign"):
        row.require()
    with pytest.raises(KeyError, match="'torsion' was not compared, only counterweight, spool"):
        found.row("torsion")
    alone = compare_methods(over_the_top, **BOX, over=over_the_top.poses(31), methods="spool")
    assert alone.status == "none of 1 methods can be sized between the bounds"
    with pytest.raises(NoSolution, match="shaped spool"):
        alone.require()


def test_a_spring_that_would_be_stretched_too_far_is_a_row_that_says_why():
    found = _compare(methods="straight", assumptions=MethodAssumptions(free_length_ratio=0.95))
    row = found.row("straight")
    assert not row.success
    assert "no geometry between the bounds was found that keeps every limit" in row.sizes
    assert "length" in row.sizes


@pytest.mark.parametrize(("mass", "friction"), [(2.0, 0.0), (0.01, 0.0), (60.0, 1.0)])
def test_the_table_is_narrow_and_whole(mass, friction):
    rubbing = Friction(friction, pivot_friction=0.1, pivot_radius=0.01) if friction else Friction()
    arm = Mechanism(Arm(Body(mass, (0.35, 0.0))), friction=rubbing, travel=(-1.0, 1.0))
    found = compare_methods(arm, **BOX, over=arm.poses(31))
    lines = str(found).splitlines()
    assert max(map(len, lines)) <= 120
    header = next(line for line in lines if line.strip().startswith("method "))
    assert header.split()[1:] == [
        "worst", "rms", "exact", "friction", "stays", "up", "down", "hold", "pivot", "energy", "inertia",
        "+20", "K", "+10", "%",
    ]  # fmt: skip
    assert len(found.rows) == 9
    for row in found.rows:
        assert row.status.startswith(row.name)
        assert f"  {row.name}: " in str(found)
    assert found.require() is found
    assert found.status.startswith("9 of 9 methods sized; ") or not all(row.success for row in found.rows)


def test_bare_arms_turn_all_the_way_round():
    found = compare_methods(Arm(Body(2.0, (0.35, 0.0))), **BOX, methods=["counterweight", "spool"])
    assert found.row("counterweight").figures.equilibria.travel == pytest.approx((-math.pi, math.pi))
    assert not found.row("spool").success


def test_a_warming_may_be_a_difference_of_any_scale():
    found = _compare(warming="36 delta_degF", methods="torsion")
    assert found.warming == pytest.approx(20.0)


def test_payload_and_warming_are_columns_of_their_own():
    """Cosine: the counterweight's residual for a heavier arm is that share of its peak."""
    found = _compare(payload_change=0.25, warming=-30.0)
    assert found.row("counterweight").figures.heavier == pytest.approx(0.25, rel=1e-9)
    assert "-30 K" in str(found)
    assert "+25 %" in str(found)

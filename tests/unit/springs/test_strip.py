"""Constant-force strips: force, take-up, life, and what they refuse."""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError
from springpoise.springs.strips.strip import LifeTable, Strip
from springpoise.springs.strips.strip_spring import StripSpring
from springpoise.springs.warnings import StripDrumWarning

STRIP = {
    "width": 0.025,
    "thickness": 0.0003,
    "natural_radius": 0.016,
    "youngs_modulus": 206e9,
    "length": 1.0,
    "form": "trade 26.4",
}
SPRING = {"take_up": 0.05, "longest": 0.8, "hysteresis_share": 0.05}


def strip(**changes):
    return Strip(**{**STRIP, **changes})


def spring(pull=20.0, **changes):
    return StripSpring(pull, **{**SPRING, **changes})


def test_ramp_plateau_and_end():
    own = spring(gradient=-4.0)
    assert own.load(-0.1) == 0.0
    assert own.load(0.025) == pytest.approx(10.0)
    assert own.load(0.05) == pytest.approx(20.0)
    assert own.load(0.55) == pytest.approx(18.0)
    assert own.load(2.0) == own.load(0.8) == pytest.approx(17.0)
    assert [own.stiffness(x) for x in (-0.1, 0.025, 0.4, 0.9)] == pytest.approx([0.0, 400.0, -4.0, 0.0])
    assert own.working_range == (0.05, 0.8)


def test_band_is_a_share_of_the_load():
    assert spring().hysteresis(0.4) == pytest.approx(1.0)
    assert spring().hysteresis(-0.1) == 0.0


def test_temperature_loss_and_tuning_scale_the_load():
    own = spring(gradient=-4.0)
    cooler = own.at_temperature("0 degC", pull_slope=-0.25e-3)
    assert cooler.load(0.4) == pytest.approx(own.load(0.4) * 1.005)
    assert own.after(load_loss=0.1).load(0.4) == pytest.approx(0.9 * own.load(0.4))
    terms = own.load_terms(np.array([0.1, 0.4]), preload=False)
    tuned = own.tuned((30.0,), preload=False)
    np.testing.assert_allclose(tuned.load(np.array([0.1, 0.4])), 30.0 * terms.terms[0])
    assert tuned.pull == pytest.approx(30.0)


def test_strip_gives_its_spring():
    own = strip(drum_radius="18 mm", length="1.2 m")
    made = own.spring(hysteresis_share=0.05)
    assert made.pull == own.pull
    assert made.take_up == pytest.approx(1.25 * 0.036)
    assert made.longest == pytest.approx(1.2 - 1.5 * 2.0 * math.pi * 0.018)
    assert own.spring(hysteresis_share=0.0, longest="0.5 m", gradient="1 N/m").longest == 0.5
    assert strip(take_up_diameters=2.0).take_up == pytest.approx(0.064)


def test_margins():
    own = strip(life=[(0.010, 40_000), (0.020, 4_000)], drum_radius=0.018)
    found = own.margins(longest="0.7 m", allowable_stress="2100 MPa")
    assert found.stress_margin == pytest.approx(2100 / 1931.25 - 1.0)
    assert found.thickness_ratio == pytest.approx(0.01875)
    assert found.cycles == pytest.approx(40_000 * 0.1**0.875)
    assert found.turns_left == pytest.approx(0.3 / (2.0 * math.pi * 0.018))
    assert found.turns_margin == pytest.approx(found.turns_left - 1.5)
    assert "margin" in str(found)
    bare = strip().margins()
    assert (bare.cycles, bare.stress_margin) == (None, None)
    assert bare.turns_margin == pytest.approx(0.0, abs=1e-12)
    assert "no table given" in str(bare)


def test_life_is_never_extrapolated():
    table = LifeTable([(0.010, 40_000), (0.015, 12_000), (0.020, 4_000)])
    assert table.cycles(0.010) == pytest.approx(40_000)
    assert table.cycles(0.015) == pytest.approx(12_000)
    assert table.cycles(0.0125) == pytest.approx(math.sqrt(40_000 * 12_000))
    for ratio in (0.0099, 0.0201, math.nan):
        with pytest.raises(InputError, match=r"LifeTable ratio must be from 0.01 to 0.02"):
            table.cycles(ratio)
    with pytest.raises(InputError, match=r"the life outside the maker's table is not known"):
        strip(thickness=0.0004, life=table).margins()


@pytest.mark.parametrize(
    ("pairs", "message"),
    [
        ([(0.01, 4000)], r"at least two, got 1"),
        ([(0.01, math.inf), (0.02, 4000)], r"> 0 and finite, .*no strip lives for ever"),
        ([(0.01, 4000), (0.01, 3000)], r"by increasing ratio"),
        ([(0.01, 4000), (0.02, 5000)], r"must not live longer at a greater ratio"),
        ([(0.01, -4000), (0.02, 5000)], r"> 0 and finite"),
        ([1.0, 2.0], r"must be pairs"),
        (["ab", "cd"], r"must be pairs"),
    ],
)
def test_life_tables_refused(pairs, message):
    with pytest.raises((InputError, InputTypeError), match=message):
        LifeTable(pairs)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (
            {"form": "shell"},
            r"Strip.form must be one of 'beam', 'plate', 'trade 26.4', got 'shell'; 'beam' for a narrow",
        ),
        ({"thickness": 0.02}, r"Strip.thickness must be < natural_radius \(0.016\) m, got 0.02"),
        ({"drum_radius": 0.015}, r"Strip.drum_radius must be >= natural_radius \(0.016\) m, got 0.015"),
        ({"poisson_ratio": 0.7}, r"Strip.poisson_ratio must be from 0 to 0.5, got 0.7"),
        ({"width": -1.0}, r"Strip.width must be > 0 m, got -1.0"),
    ],
)
def test_strips_refused(changes, message):
    with pytest.raises(InputError, match=message):
        strip(**changes)


def test_strip_too_short_for_its_drum():
    with pytest.raises(InputError, match=r"StripSpring.longest must be > "):
        strip(length=0.1).spring(hysteresis_share=0.0)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"longest": 0.05}, r"StripSpring.longest must be > take_up \(0.05\) m, got 0.05"),
        ({"hysteresis_share": 1.0}, r"StripSpring.hysteresis_share must be >= 0 and < 1, got 1.0"),
        ({"gradient": -30.0}, r"StripSpring.gradient must be > -26.6.* N/m, got -30.0"),
        ({"take_up": 0.0}, r"StripSpring.take_up must be > 0 m, got 0.0"),
    ],
)
def test_strip_springs_refused(changes, message):
    with pytest.raises(InputError, match=message):
        spring(**changes)


def test_drum_warning_states_the_ratio():
    with pytest.warns(StripDrumWarning, match=r"is 1.5 times the natural radius, outside the usual 1.1 to 1.2"):
        strip(drum_radius=0.024)


def test_motor():
    own = strip(form="beam")
    motor = own.motor("20 mm", turns=5, hysteresis_share=0.1)
    assert motor.load(10.0) == pytest.approx(own.motor_torque("20 mm"))
    assert motor.working_range == (0.0, pytest.approx(10.0 * math.pi))
    assert own.motor_stress("20 mm") == pytest.approx(206e9 * 0.00015 * (1 / 0.016 + 1 / 0.02))
    with pytest.raises(InputError, match=r"output_radius must be > 0 m, got 0.0"):
        own.motor_torque(0.0)

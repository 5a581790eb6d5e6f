"""The rubber tube: geometry, ranges, changes, warnings and errors."""

from __future__ import annotations

import math
import warnings

import attrs
import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.springs import rubber
from springpoise.springs.rubber import (
    DRY_AIR,
    Gent,
    MooneyRivlin,
    NeoHookean,
    RubberTube,
    StretchLimits,
    equivalent_time,
    thermal_factor,
)
from springpoise.springs.warnings import RubberCreepWarning, RubberModulusWarning, RubberStretchWarning

LAW = NeoHookean(mu="0.4 MPa", fitted_over=(1.1, 3.5))
TUBE = RubberTube(outer_diameter="10 mm", inner_diameter="6 mm", free_length="0.2 m", law=LAW)


def test_neo_hookean_cord_by_hand() -> None:
    """Area π/4 (10² - 6²) = 50.265 mm²; stress 0.4 (2 - 1/4) = 0.7 MPa; energy 0.2 (4 + 1 - 3) MPa · volume."""
    assert TUBE.load(0.4) == pytest.approx(math.pi * 16e-6 * 0.7e6, rel=1e-14)
    assert TUBE.energy(0.4) == pytest.approx(0.4e6 * math.pi * 16e-6 * 0.2, rel=1e-14)
    assert TUBE.stiffness(0.4) == pytest.approx(math.pi * 16e-6 / 0.2 * 0.4e6 * 1.25, rel=1e-14)
    assert TUBE.outer_diameter_at(0.8) == pytest.approx(0.005) and TUBE.inner_diameter_at(0.8) == pytest.approx(0.003)
    solid = attrs.evolve(TUBE, inner_diameter=0.0)
    assert solid.load(0.4) / TUBE.load(0.4) == pytest.approx(100.0 / 64.0, rel=1e-14)
    assert solid.inner_diameter_at(0.8) == 0.0


def test_volume_is_kept_when_stretched_and_when_set() -> None:
    for x in (0.1, 0.2, 0.5):
        length = max(x, 0.2)
        area = 0.25 * math.pi * (TUBE.outer_diameter_at(x) ** 2 - TUBE.inner_diameter_at(x) ** 2)
        assert area * length == pytest.approx(TUBE.volume, rel=1e-14)
    longer = TUBE.with_set(0.05)
    assert longer.volume == pytest.approx(TUBE.volume, rel=1e-14)
    assert longer.free_length == pytest.approx(0.21) and longer.load(0.4) < TUBE.load(0.4)


def test_slack() -> None:
    x = np.array([0.0, 0.1, 0.2, 0.3])
    assert (
        np.all(TUBE.load(x)[:3] == 0.0) and np.all(TUBE.energy(x)[:3] == 0.0) and np.all(TUBE.stiffness(x)[:3] == 0.0)
    )
    assert TUBE.load(x)[3] > 0.0


def test_loop_loss_is_what_a_loop_loses() -> None:
    """Loading at load + band, unloading at load - band: lost over spent must be the share given."""
    tube = attrs.evolve(TUBE, loop_loss=0.2)
    x = np.linspace(0.2, 0.6, 4001)
    up, down = tube.load(x) + tube.hysteresis(x), tube.load(x) - tube.hysteresis(x)
    spent, back = np.trapezoid(up, x), np.trapezoid(down, x)
    assert 1.0 - back / spent == pytest.approx(0.2, rel=1e-12)
    assert TUBE.hysteresis(0.4) == 0.0


def test_working_range() -> None:
    assert TUBE.working_range == pytest.approx((0.22, 0.7))
    assert attrs.evolve(TUBE, stretch_range=(1.3, 3.0)).working_range == pytest.approx((0.26, 0.6))
    bare = attrs.evolve(TUBE, law=NeoHookean(mu=4e5))
    assert bare.working_range == (0.2, math.inf)
    locked = attrs.evolve(TUBE, law=Gent(mu=4e5, jm=30.0))
    assert locked.working_range == pytest.approx((0.2, 0.2 * locked.law.highest_stretch))
    soft = TUBE.preconditioned(3.0, r=2.0, m="0.3 MPa")
    assert soft.working_range == pytest.approx((0.22, 0.6))
    compressed = attrs.evolve(TUBE, law=NeoHookean(mu=4e5, fitted_over=(0.7, 3.0)))
    assert compressed.working_range == pytest.approx((0.2, 0.6))
    many = attrs.evolve(TUBE, free_length=np.array([[0.2], [0.3]]))
    assert many.working_range[1] == pytest.approx(np.array([[0.7], [1.05]]))


def test_changes_are_new_tubes_in_the_order_of_events() -> None:
    warm = TUBE.at_temperature("60 degC", energy_share=0.2, reference="20 degC")
    assert warm.load(0.4) / TUBE.load(0.4) == pytest.approx(0.2 + 0.8 * 333.15 / 293.15, rel=1e-14)
    assert TUBE.at_temperature("60 degC", energy_share=1.0, reference=293.15).load(0.4) == TUBE.load(0.4)
    assert TUBE.aged(load_change="-10 percent").load(0.4) == pytest.approx(0.9 * TUBE.load(0.4), rel=1e-14)
    chained = TUBE.preconditioned(3.0, r=2.0, m=3e5).after("1 day", environment=DRY_AIR).aged(load_change=0.1)
    assert 0.0 < chained.load(0.4) < TUBE.load(0.4)
    assert chained.law.fitted_over == LAW.fitted_over and TUBE.law is LAW


def test_preconditioning_is_counted_once() -> None:
    with pytest.raises(
        InputError, match=r"must start from a tube that is not preconditioned.*only the largest earlier"
    ):
        TUBE.preconditioned(3.0, r=2.0, m=3e5).aged(load_change=0.1).preconditioned(2.0, r=2.0, m=3e5)


def test_after_is_counted_once() -> None:
    crept = TUBE.after("1 day", environment=DRY_AIR).aged(load_change=-0.1)
    with pytest.raises(InputError, match="must start from a tube that has not crept"):
        crept.after("2 days", environment=DRY_AIR)
    with pytest.raises(
        InputTypeError, match=r"environment must be an Environment, such as springs\.rubber\.DRY_AIR, got 'air'"
    ):
        TUBE.after("2 days", environment="air")  # type: ignore[arg-type]
    with pytest.warns(RubberCreepWarning, match=r"measured over 70 days; 140 days is 2 times that"):
        TUBE.after("140 days", environment=DRY_AIR)


def test_unknown_numbers_are_asked_for() -> None:
    with pytest.raises(TypeError, match="energy_share"):
        TUBE.at_temperature("60 degC", reference="20 degC")  # type: ignore[call-arg]
    with pytest.raises(InputError, match=r"energy_share must be from 0 to 1, got 1\.2"):
        thermal_factor(300.0, energy_share=1.2, reference=290.0)
    with pytest.raises(InputError, match=r"temperature must be an absolute temperature in K, got 60"):
        TUBE.at_temperature(60.0, energy_share=0.2, reference=293.0)
    with pytest.raises(InputError, match=r"Stiffened\.factor must be > 0"):
        TUBE.aged(load_change=-1.0)
    with pytest.raises(InputError, match=r"share must be >= 0, got -0\.1"):
        TUBE.with_set(-0.1)


def test_ageing_doubles_every_ten_kelvin_unless_told_otherwise() -> None:
    week = 7.0 * 86400.0
    assert equivalent_time("7 days", tested_at="70 degC", used_at="30 degC") == pytest.approx(16.0 * week)
    assert equivalent_time("7 days", tested_at="70 degC", used_at="30 degC", doubling_step=20.0) == pytest.approx(
        4.0 * week
    )
    with pytest.raises(InputError, match=r"doubling_step must be > 0 K"):
        equivalent_time("7 days", tested_at="70 degC", used_at="30 degC", doubling_step=0.0)
    with pytest.raises(InputError, match=r"parts must be >= 0\.45 parts per hundred"):
        rubber.peroxide_cured_modulus(0.2, 300.0)


REFUSED = [
    (
        {"inner_diameter": 0.01},
        InputError,
        r"RubberTube\.inner_diameter must be < outer_diameter \(0\.01\) m, got 0\.01",
    ),
    ({"inner_diameter": -0.01}, InputError, r"RubberTube\.inner_diameter must be >= 0 m"),
    ({"outer_diameter": 0.0}, InputError, r"RubberTube\.outer_diameter must be > 0 m"),
    ({"free_length": "2 N"}, UnitError, r"RubberTube\.free_length must be"),
    ({"law": NeoHookean}, InputTypeError, r"RubberTube\.law must have .* the class NeoHookean, not an object"),
    ({"law": 4e5}, InputTypeError, r"RubberTube\.law must have stress, tangent and energy_density methods, got 400000"),
    ({"loop_loss": 1.0}, InputError, r"RubberTube\.loop_loss must be from 0 to below 1, got 1\.0; 5 % is 0\.05"),
    ({"stretch_range": (2.0, 1.5)}, InputError, r"RubberTube\.stretch_range must be stretches \(lower, higher\)"),
]


@pytest.mark.parametrize(("change", "error", "message"), REFUSED)
def test_refused(change: dict[str, object], error: type[Exception], message: str) -> None:
    with pytest.raises(error, match=message):
        attrs.evolve(TUBE, **change)  # type: ignore[arg-type]


def test_a_fit_is_not_yet_a_law() -> None:
    result = rubber.fit([1.2, 1.5, 2.0], [2e5, 4.2e5, 6.7e5], NeoHookean)
    with pytest.raises(InputTypeError, match=r"give its \.law"):
        attrs.evolve(TUBE, law=result)  # type: ignore[arg-type]
    assert attrs.evolve(TUBE, law=result.law).working_range == pytest.approx((0.24, 0.4))


def test_warnings_of_construction() -> None:
    with pytest.warns(
        RubberStretchWarning, match=r"1 to 4 goes 0\.1 below the lowest .* 1\.1 and 0\.5 above the highest .* 3\.5"
    ):
        attrs.evolve(TUBE, stretch_range=(1.0, 4.0))
    with pytest.warns(RubberStretchWarning, match=r"above the stretch to which the law holds, 3$"):
        attrs.evolve(TUBE.preconditioned(3.0, r=2.0, m=3e5), stretch_range=(1.2, 3.2))
    with pytest.warns(RubberModulusWarning, match=r"shear modulus of 0\.4 Pa, which no rubber has .* is it in MPa"):
        attrs.evolve(TUBE, law=NeoHookean(mu=0.4))


def test_the_warning_points_at_the_users_line() -> None:
    with warnings.catch_warnings(record=True) as seen:
        warnings.simplefilter("always")
        RubberTube(outer_diameter=0.01, inner_diameter=0.0, free_length=0.1, law=NeoHookean(mu=0.4))
        RubberTube(outer_diameter=0.01, inner_diameter=0.0, free_length=0.1, law=LAW, stretch_range=(1.2, 9.0))
        TUBE.effective_free_length(over=(0.4, 0.8))
        TUBE.stretch_margins((0.3, 0.7), duty="sustained")
        TUBE.after("100 days", environment=DRY_AIR)
    assert len(seen) == 5 and {warning.filename for warning in seen} == {__file__}


def test_stretch_margins() -> None:
    fine = TUBE.stretch_margins(("0.26 m", "0.56 m"), duty="sustained", break_stretch=8.5)
    assert fine.over == pytest.approx((1.3, 2.8)) and fine.worst.margin == pytest.approx(0.1)
    assert [margin.margin for margin in fine.margins] == sorted(margin.margin for margin in fine.margins)
    by_name = {margin.name: margin for margin in fine.margins}
    assert by_name["50% of break elongation"].limit == pytest.approx(1.0 + 0.5 * 7.5)
    assert by_name["sustained use"].margin == pytest.approx(0.2)
    assert "inside all limits" in str(fine) and "value from memory" in str(fine)
    with pytest.warns(RubberStretchWarning) as seen:
        result = TUBE.stretch_margins((0.22, 1.02), duty="cyclic")
    texts = " | ".join(str(warning.message) for warning in seen)
    assert "stretch 1.1 is 0.1 below the limit 1.2 (least stretch; value from memory)" in texts
    assert "stretch 5.1 is 1.1 above the limit 4 (cyclic use; value from memory)" in texts
    assert "stretch 5.1 is 0.1 above the limit 5 (upturn; value from memory)" in texts
    assert "stretch 5.1 is 1.6 above the limit 3.5 (fitted to; law)" in texts
    assert "OUTSIDE" in result.status and result.worst.name == "fitted to"
    loose = StretchLimits(lowest=1.05, cyclic=6.0, upturn=6.0)
    law = NeoHookean(mu=4e5)
    assert attrs.evolve(TUBE, law=law).stretch_margins((0.22, 1.02), duty="cyclic", limits=loose).worst.margin > 0.0
    looped = attrs.evolve(TUBE, law=law, loop_loss=0.05, loop_stretch=2.5)
    with pytest.warns(RubberStretchWarning, match="loop loss measured to; given"):
        looped.stretch_margins((0.3, 0.58), duty="sustained")
    soft = TUBE.preconditioned(2.5, r=2.0, m=3e5)
    with pytest.warns(RubberStretchWarning, match="law holds to; law"):
        soft.stretch_margins((0.3, 0.58), duty="sustained")


def test_stretch_margins_refuse() -> None:
    with pytest.raises(InputError, match=r"duty must be 'sustained' or 'cyclic', got 'daily'"):
        TUBE.stretch_margins((0.3, 0.5), duty="daily")  # type: ignore[arg-type]
    with pytest.raises(InputError, match=r"break_stretch must be > 1, got 0\.8; 750 % elongation"):
        TUBE.stretch_margins((0.3, 0.5), duty="cyclic", break_stretch=0.8)
    with pytest.raises(InputError, match=r"over must be lengths \(shorter, longer\)"):
        TUBE.stretch_margins((0.5, 0.3), duty="cyclic")
    with pytest.raises(InputError, match=r"StretchLimits\.cyclic must be > 1, got 0\.5"):
        StretchLimits(cyclic=0.5)


class Straight:
    """A law whose load is exactly proportional to length beyond stretch 1: zero free length but for the step."""

    def __init__(self, slope: float, at_rest: float) -> None:
        self.slope, self.at_rest = slope, at_rest

    def stress(self, stretch):
        return self.slope * stretch + self.at_rest

    def tangent(self, stretch):
        return self.slope + 0.0 * stretch

    def energy_density(self, stretch):
        return 0.5 * self.slope * stretch * stretch + self.at_rest * stretch


def test_effective_free_length_of_straight_lines_is_exact() -> None:
    for at_rest in (0.0, -1e5):
        tube = attrs.evolve(TUBE, law=Straight(4e5, at_rest))
        near = tube.effective_free_length(over=(0.3, 0.6))
        rate = tube.cross_section / 0.2 * 4e5
        for line in (near.line, near.line_least_worst):
            assert line.rate == pytest.approx(rate, rel=1e-9)
            assert line.effective_free_length == pytest.approx(-at_rest / 4e5 * 0.2, abs=1e-9)
            assert line.worst == pytest.approx(0.0, abs=1e-7)
        assert near.rate == near.line.rate and near.effective_free_length == near.line.effective_free_length
        assert near.residual == near.line.worst
    # Here load is rate · (x - 50 mm), so load over length runs from 5/6 to 11/12 of the rate.
    assert near.proportional_within == pytest.approx(1.0 / 21.0, rel=1e-12)


def test_effective_free_length_against_a_parabola() -> None:
    """By hand: the best line misses a x² by a·w²/8 at both ends and the middle (Chebyshev), least squares by a·w²/(6√5)."""

    class Parabola(Straight):
        def stress(self, stretch):
            return 1e5 * stretch * stretch

    tube = attrs.evolve(TUBE, law=Parabola(0.0, 0.0))
    near = tube.effective_free_length(over=(0.3, 0.6))
    curvature, width = tube.cross_section * 1e5 / 0.2**2, 0.3
    assert near.line_least_worst.worst == pytest.approx(curvature * width**2 / 8.0, rel=1e-6)
    assert near.line_least_worst.rate == pytest.approx(curvature * 0.9, rel=1e-6)
    assert near.line.rms == pytest.approx(curvature * width**2 / (6.0 * math.sqrt(5.0)), rel=1e-4)
    # Load over length runs from 0.3 to 0.6 times the curvature.
    assert near.proportional_within == pytest.approx(1.0 / 3.0, rel=1e-12)
    # Least squares of k x to c x²: k = c ∫x³/∫x².
    expected = curvature * (0.6**4 - 0.3**4) / 4.0 / ((0.6**3 - 0.3**3) / 3.0)
    assert near.zero_length.rate == pytest.approx(expected, rel=1e-5)
    assert near.zero_length.effective_free_length == 0.0
    # Least worst of k x to x²: both ends miss by the same, 0.3 k - 0.09 = 0.36 - 0.6 k, so k = 0.5.
    assert near.zero_length_least_worst.rate / curvature == pytest.approx(0.5, rel=1e-6)
    assert near.zero_length_least_worst.worst / curvature == pytest.approx(0.06, rel=1e-6)
    text = str(near)
    assert "zero length, least worst" in text and "±33 %" in text


def test_effective_free_length_refuses_and_warns() -> None:
    with pytest.raises(InputError, match=r"over must be lengths \(shorter, longer\) above 0 m, got \(0\.5, 0\.3\)"):
        TUBE.effective_free_length(over=(0.5, 0.3))
    with pytest.raises(InputError, match="slack throughout"):
        TUBE.effective_free_length(over=(0.1, 0.19))
    with (
        pytest.raises(InputError, match="at which the spring has a load"),
        pytest.warns(RubberStretchWarning, match="over: stretch 1.5 to 10 goes"),
    ):
        attrs.evolve(TUBE, law=Gent(mu=4e5, jm=30.0)).effective_free_length(over=(0.3, 2.0))
    with pytest.raises(InputError, match="of one spring"):
        attrs.evolve(TUBE, outer_diameter=np.array([[0.01], [0.02]])).effective_free_length(over=(0.3, 0.5))


def test_it_is_a_value() -> None:
    soft = TUBE.preconditioned(3.0, r=2.0, m=3e5).after("1 day", environment=DRY_AIR)
    assert soft == TUBE.preconditioned(3.0, r=2.0, m=3e5).after("1 day", environment=DRY_AIR)
    assert hash(soft) == hash(attrs.evolve(soft))
    with pytest.raises(attrs.exceptions.FrozenInstanceError):
        TUBE.free_length = 0.3  # type: ignore[misc]


def test_in_a_mechanism() -> None:
    from springpoise import Arm, Body, Mechanism, Point, SpringMount
    from springpoise import Straight as StraightPath

    tube = attrs.evolve(TUBE, law=MooneyRivlin(c1=1.9e5, c2=4.8e4, fitted_over=(1.0, 4.4)), free_length="0.1 m")
    mount = SpringMount(tube, StraightPath(Point("ground", (0, 0.3)), Point("arm", (0.12, 0))), count=2)
    mech = Mechanism(Arm(Body(mass=1.0, com=(0.3, 0)), length=0.5), springs=[mount], travel=("-60 deg", "60 deg"))
    q = np.linspace(-1.0, 1.0, 11)
    slope = (mech.energy(q + 1e-6) - mech.energy(q - 1e-6)) / 2e-6
    assert mech.holding_torque(q) == pytest.approx(slope, abs=1e-6)

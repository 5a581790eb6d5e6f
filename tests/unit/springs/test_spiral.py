"""Spiral and power springs: torque, stress, curves, and what they refuse."""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Arm, Body, JointTravel, Mechanism, SpringMount
from springpoise.errors import InputError
from springpoise.springs.strips.power_spring import PowerSpring, TorqueCurve
from springpoise.springs.strips.spiral import Spiral, strip_curvature_factor
from springpoise.springs.warnings import PowerSpringWarning

SPIRAL = {"width": 0.012, "thickness": 0.001, "length": 1.5, "youngs_modulus": 206e9, "outer_end": "clamped"}
POWER = {
    "width": 0.02,
    "thickness": 0.0005,
    "length": 2.7,
    "drum_diameter": 0.06,
    "arbor_diameter": 0.01,
    "turns_form": "annulus",
}


def spiral(**changes):
    return Spiral(**{**SPIRAL, **changes})


def power(**changes):
    return PowerSpring(**{**POWER, **changes})


def test_pinned_end():
    clamped, pinned, softened = spiral(), spiral(outer_end="pinned"), spiral(outer_end="pinned", pinned_softening=1.25)
    assert pinned.rate == clamped.rate
    assert softened.rate == pytest.approx(clamped.rate / 1.25)
    assert pinned.stress(0.3) == pytest.approx(2.0 * clamped.stress(0.3))


def test_curvature_raises_the_stress():
    bent = spiral(inner_radius="4 mm")
    assert bent.stress(0.3) == pytest.approx(spiral().stress(0.3) * strip_curvature_factor(0.004, 0.001))
    assert spiral().curvature_factor == 1.0
    factors = strip_curvature_factor(np.array([0.002, 0.004, 0.01, 1.0]), 0.001)
    assert np.all(np.diff(factors) < 0.0)
    assert factors[-1] == pytest.approx(1.0, abs=1e-3)


def test_spring_and_margins():
    own = spiral(inner_radius=0.006)
    made = own.spring(free_angle="-90 deg", working_range=("-90 deg", "360 deg"))
    assert made.load(0.0) == pytest.approx(own.rate * math.pi / 2)
    found = own.margins("3 turn", allowable_stress="1200 MPa")
    assert found.torque == pytest.approx(own.rate * 6.0 * math.pi)
    assert found.stress == pytest.approx(own.stress(found.torque))
    assert own.stress(own.rate * found.greatest_angle) == pytest.approx(1200e6)
    assert found.stress_margin == pytest.approx(1200e6 / found.stress - 1.0)
    assert "curvature factor" in str(found)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"outer_end": "free"}, r"Spiral.outer_end must be one of 'clamped', 'pinned', got 'free'"),
        ({"inner_radius": 0.0004}, r"Spiral.inner_radius must be > half the thickness \(0.0005\) m, got 0.0004"),
        ({"pinned_softening": 0.8}, r"Spiral.pinned_softening must be >= 1, got 0.8"),
        ({"length": 0.005}, r"Spiral.length must be > 10 thicknesses \(0.01\) m, got 0.005"),
        ({"thickness": 0.0}, r"Spiral.thickness must be > 0 m, got 0.0"),
    ],
)
def test_spirals_refused(changes, message):
    with pytest.raises(InputError, match=message):
        spiral(**changes)


def test_spiral_margins_refuse():
    with pytest.raises(InputError, match=r"angle must be > 0 rad, got -1.0"):
        spiral().margins(-1.0, allowable_stress=1e9)
    with pytest.raises(InputError, match=r"allowable_stress must be > 0 Pa, got 0.0"):
        spiral().margins(1.0, allowable_stress=0.0)


def test_power_spring_curves():
    own = power()
    curve = own.torque_curve([0.4, 0.9, 1.1, 1.2], hysteresis_share=0.15)
    assert curve.working_range == (0.0, pytest.approx(2.0 * math.pi * own.turns))
    assert curve.load(curve.angles[1]) == pytest.approx(0.9)
    assert curve.hysteresis(curve.angles[1]) == pytest.approx(0.135)
    indicative = own.indicative_curve(stress="1200 MPa", let_down_share=0.4, hysteresis_share=0.15)
    assert indicative.load(indicative.angles[1]) == pytest.approx(1200e6 * 0.02 * 0.0005**2 / 6.0)
    assert indicative.load(0.0) == pytest.approx(0.4 * own.greatest_torque(1200e6))


def test_torque_curve_outside():
    curve = TorqueCurve([1.0, 2.0, 4.0], [0.5, 1.0, 1.5], hysteresis_share=0.0)
    assert (curve.load(0.9), curve.stiffness(0.9), curve.energy(0.9)) == (0.0, 0.0, 0.0)
    assert (curve.load(5.0), curve.stiffness(5.0)) == (1.5, 0.0)
    assert curve.energy(5.0) == pytest.approx(0.75 + 2.5 + 1.5)
    assert curve.stiffness(1.5) == pytest.approx(0.5)


def test_torque_curve_scales():
    curve = TorqueCurve([0.0, 2.0], [0.5, 1.0], hysteresis_share=0.1)
    assert curve.after(load_loss=0.2).load(2.0) == pytest.approx(0.8)
    assert curve.at_temperature("120 degC", load_slope=-0.25e-3).load(2.0) == pytest.approx(0.975)
    terms = curve.load_terms(1.3, preload=False)
    assert curve.tuned((3.0,), preload=False).load(1.3) == pytest.approx(3.0 * terms.terms[0])
    assert curve == TorqueCurve([0.0, 2.0], [0.5, 1.0], hysteresis_share=0.1)
    assert hash(curve) == hash(TorqueCurve([0.0, 2.0], [0.5, 1.0], hysteresis_share=0.1))
    assert curve != curve.after(load_loss=0.2)


def test_on_a_joint():
    curve = TorqueCurve([0.0, "10 turn"], [0.6, 1.2], hysteresis_share=0.1)
    mechanism = Mechanism(
        Arm(Body(mass=0.5, com=(0.2, 0.0))),
        springs=[SpringMount(curve, JointTravel(ratio=-8.0))],
        travel=("-120 deg", "0 deg"),
    )
    q = np.linspace(-2.0, -0.1, 6)
    torque = mechanism.spring_torque(q)
    np.testing.assert_allclose(torque, 8.0 * curve.load(-8.0 * q))
    np.testing.assert_allclose(mechanism.friction_band(q), 0.1 * torque)


@pytest.mark.parametrize(
    ("angles", "torques", "message"),
    [
        ([0.0], [1.0], r"TorqueCurve.angles must be at least two angles, got shape \(1,\)"),
        ([0.0, 0.0], [1.0, 2.0], r"TorqueCurve.angles must increase, got \[0.0, 0.0\] rad"),
        ([0.0, 1.0], [1.0, 2.0, 3.0], r"TorqueCurve.torques must be of shape \(2,\) like angles, got \(3,\)"),
        ([0.0, 1.0], [-1.0, 2.0], r"TorqueCurve.torques must be >= 0 N\*m, got -1.0"),
    ],
)
def test_curves_refused(angles, torques, message):
    with pytest.raises(InputError, match=message):
        TorqueCurve(angles, torques, hysteresis_share=0.1)


def test_curve_share_refused():
    with pytest.raises(InputError, match=r"TorqueCurve.hysteresis_share must be >= 0 and < 1, got 1.0"):
        TorqueCurve([0.0, 1.0], [1.0, 2.0], hysteresis_share=1.0)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"arbor_diameter": 0.07}, r"PowerSpring.drum_diameter must be > arbor_diameter \(0.07\) m, got 0.06"),
        ({"length": 6.0}, r"PowerSpring.length must be < 5.49.* m, which fills the drum, got 6.0"),
        ({"turns_form": "guess"}, r"PowerSpring.turns_form must be one of 'annulus', 'handbook', got 'guess'"),
        ({"width": 0.0}, r"PowerSpring.width must be > 0 m, got 0.0"),
    ],
)
def test_power_springs_refused(changes, message):
    with pytest.raises(InputError, match=message):
        power(**changes)


def test_power_spring_refuses_stress_and_share():
    with pytest.raises(InputError, match=r"stress must be > 0 Pa, got -1.0"):
        power().greatest_torque(-1.0)
    with pytest.raises(InputError, match=r"let_down_share must be from 0 to 1, got 2.0"):
        power().indicative_curve(stress=1e9, let_down_share=2.0, hysteresis_share=0.1)
    with pytest.raises(InputError, match=r"PowerSpring.drum_diameter must be > arbor_diameter"):
        PowerSpring.best_length(0.01, 0.02, 0.001)
    with pytest.raises(InputError, match=r"PowerSpring.thickness must be > 0 m"):
        PowerSpring.best_length(0.02, 0.01, 0.0)


def test_power_spring_warnings_state_the_margin():
    with pytest.warns(PowerSpringWarning, match=r"40 thicknesses, outside the usual 15 to 25"):
        power(arbor_diameter=0.02)
    with pytest.warns(PowerSpringWarning, match=r"length is 1.6e\+04 thicknesses, above the usual 15000"):
        power(length=8.0, drum_diameter=0.1)

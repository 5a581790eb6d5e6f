"""Measured springs: what they read, what they refuse."""

import math

import numpy as np
import pytest

from springpoise.errors import InputError
from springpoise.springs import MeasuredSpring
from springpoise.tape import derivative_of, record

LENGTHS = [0.10, 0.13, 0.17, 0.22, 0.30]
LOADS = [4.0, 11.0, 19.0, 27.0, 45.0]
UNLOADING = [3.0, 9.0, 17.0, 26.0, 45.0]


def test_readings_come_back_exactly():
    spring = MeasuredSpring(LENGTHS, LOADS)
    assert [spring.load(x) for x in LENGTHS] == pytest.approx(LOADS, rel=1e-14)
    assert spring.hysteresis(0.2) == 0.0


def test_two_branches_give_middle_and_half_distance():
    spring = MeasuredSpring(LENGTHS, LOADS, unloading=UNLOADING)
    assert spring.load(0.13) == pytest.approx(10.0)
    assert spring.hysteresis(0.13) == pytest.approx(1.0)


def test_no_overshoot_between_readings():
    # Fritsch & Carlson 1980: a monotone interpolant of monotone data stays monotone.
    spring = MeasuredSpring([0.0, 1.0, 2.0, 3.0], [0.0, 0.0, 10.0, 10.0])
    dense = spring.load(np.linspace(0.0, 3.0, 2001))
    assert np.all(np.diff(dense) >= -1e-12)
    assert dense.min() >= 0.0
    assert dense.max() <= 10.0


def test_never_extrapolates():
    spring = MeasuredSpring(LENGTHS, LOADS)
    for formula in (spring.load, spring.stiffness, spring.energy):
        assert math.isnan(formula(0.0999))
        assert math.isnan(formula(0.3001))
        assert math.isnan(formula(math.nan))
    assert spring.working_range == (0.10, 0.30)


def test_energy_is_the_integral_of_the_load():
    from scipy.integrate import quad

    spring = MeasuredSpring(LENGTHS, LOADS, unloading=UNLOADING)
    for x in (0.12, 0.2, 0.3):
        expected = quad(spring.load, 0.10, x, epsabs=1e-12, points=[0.13, 0.17, 0.22])[0]
        assert spring.energy(x) == pytest.approx(expected, rel=1e-9)


def test_slope_is_the_derivative_and_carriers_agree():
    spring = MeasuredSpring(LENGTHS, LOADS)
    q = np.linspace(0.101, 0.299, 57)
    program = record(spring.load, inputs=("x",))
    np.testing.assert_allclose(program.numpy_function()(q), spring.load(q), rtol=1e-13)
    scalar = program.python_function()
    for x in q[::7]:
        value, slope = derivative_of(spring.load, float(x))
        assert value == pytest.approx(spring.load(float(x)), rel=1e-13)
        assert slope == pytest.approx(spring.stiffness(float(x)), rel=1e-12)
        assert scalar(float(x)) == pytest.approx(value, rel=1e-13)


def test_warmer_and_older():
    spring = MeasuredSpring(LENGTHS, LOADS, unloading=UNLOADING)
    warm = spring.at_temperature("40 degC", load_slope="-0.1 %/K", reference="20 degC")
    assert warm.load(0.2) == pytest.approx(0.98 * spring.load(0.2))
    assert spring.after(load_loss="5 %").hysteresis(0.13) == pytest.approx(0.95)


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (([0.1], [1.0]), r"MeasuredSpring\.lengths must be at least two readings, got shape \(1,\)"),
        (([0.1, 0.1], [1.0, 2.0]), r"lengths must increase from reading to reading, got 0\.1 before 0\.1 m"),
        (([0.1, 0.3, 0.2], [1.0, 2.0, 3.0]), r"lengths must increase .* got 0\.3 before 0\.2 m"),
        (([0.1, 0.2], [1.0]), r"MeasuredSpring\.loads must be of shape \(2,\) like lengths, got \(1,\)"),
        (([0.1, 0.2], [1.0, math.nan]), r"MeasuredSpring\.loads must be .*finite.*nan"),
    ],
)
def test_bad_readings(arguments, message):
    with pytest.raises(InputError, match=message):
        MeasuredSpring(*arguments)


def test_swapped_branches_are_refused():
    with pytest.raises(
        InputError, match=r"unloading must not exceed loads, got 4 over 3 N at 0\.1 m; are the branches swapped"
    ):
        MeasuredSpring(LENGTHS, UNLOADING, unloading=LOADS)
    with pytest.raises(InputError, match=r"MeasuredSpring\.unloading must be of shape \(5,\)"):
        MeasuredSpring(LENGTHS, LOADS, unloading=[1.0, 2.0])

"""The inverse Langevin function and the error function against independent arbitrary precision."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest

from springpoise.springs.rubber.error_function import erf_from_zero, erf_integral
from springpoise.springs.rubber.langevin import inverse_langevin, langevin_slope, log_sinh_ratio
from springpoise.tape import derivative_of, record

SHARES = [*np.linspace(0.001, 0.999, 97).tolist(), 1e-9, 1e-5, 0.3131, 1.0 - 1e-5, 1.0 - 1e-9]


@pytest.mark.parametrize("y", SHARES)
def test_inverse_langevin(y: float) -> None:
    """Root in 40 digits of coth b - 1/b = y. Near the lock b = 1/(1 - y): y's own rounding limits it."""
    with mpmath.workdps(40):
        exact = mpmath.findroot(lambda b: mpmath.coth(b) - 1 / b - mpmath.mpf(y), mpmath.mpf(inverse_langevin(y)))
        slope = 1 / exact**2 - 1 / mpmath.sinh(exact) ** 2
    assert inverse_langevin(y) == pytest.approx(float(exact), rel=2e-14 + 3e-16 / (1.0 - y))
    assert langevin_slope(float(exact)) == pytest.approx(float(slope), rel=1e-13)
    assert derivative_of(inverse_langevin, y)[1] == pytest.approx(1.0 / float(slope), rel=1e-11 + 3e-15 / (1.0 - y))
    with mpmath.workdps(40):
        logarithm = float(mpmath.log(exact / mpmath.sinh(exact)))
    assert log_sinh_ratio(float(exact)) == pytest.approx(logarithm, rel=1e-14, abs=2e-16)


def test_inverse_langevin_at_and_beyond_the_ends() -> None:
    assert inverse_langevin(0.0) == 0.0
    for y in (1.0, 1.5, -0.1, math.nan):
        assert math.isnan(inverse_langevin(y))
    assert np.isnan(inverse_langevin(np.array([1.0, 1.5, -0.1, math.nan]))).all()


def test_both_forms_of_the_langevin_function_meet() -> None:
    below, above = (inverse_langevin(1.0 / math.tanh(b) - 1.0 / b) for b in (1.0 - 1e-9, 1.0 + 1e-9))
    assert above - below == pytest.approx(2e-9, abs=1e-14)


@pytest.mark.parametrize("z", [0.0, 1e-300, 1e-8, 0.1, 0.125, 0.7, 1.2, 2.9999, 3.0, 5.9, 5.99999, 6.0, 8.0, 1e6])
def test_error_function(z: float) -> None:
    assert erf_from_zero(z) == pytest.approx(math.erf(z), rel=5e-16)
    assert derivative_of(erf_from_zero, z)[1] == pytest.approx(2.0 / math.sqrt(math.pi) * math.exp(-z * z), abs=2e-15)
    with mpmath.workdps(30):
        area = mpmath.mpf(z) * mpmath.erf(z) + mpmath.expm1(-(mpmath.mpf(z) ** 2)) / mpmath.sqrt(mpmath.pi)
    assert erf_integral(z) == pytest.approx(float(area), rel=1e-14, abs=2e-16)


def test_error_function_on_other_carriers() -> None:
    z = np.linspace(0.0, 7.0, 57)
    assert erf_from_zero(z) == pytest.approx([math.erf(item) for item in z], rel=1e-15)
    recorded = record(erf_from_zero)
    assert [recorded.python_function()(float(item)) for item in z] == [erf_from_zero(float(item)) for item in z]
    assert math.isnan(erf_from_zero(math.nan))

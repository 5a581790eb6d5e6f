"""Fits of rubber laws: options, results, and what is refused."""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.rubber import ArrudaBoyce, Gent, MooneyRivlin, NeoHookean, Ogden, Yeoh, fit
from springpoise.springs.warnings import RubberFitWarning

LAM = np.array([1.1, 1.3, 1.6, 2.0, 2.5, 3.0, 3.5, 4.0])
TRUE = MooneyRivlin(c1="0.15 MPa", c2="0.05 MPa")
SIGMA = TRUE.stress(LAM)


def test_the_law_carries_its_range_and_the_result_prints_itself() -> None:
    result = fit(LAM, SIGMA, MooneyRivlin, over=(1.2, "3.2"))
    assert result.law.fitted_over == result.over == (1.3, 3.0) and result.points == 5
    assert result.parameters == {"c1": pytest.approx(1.5e5), "c2": pytest.approx(5e4)}
    assert result.rms < 1e-6 and result.warning is None
    text = str(result)
    assert "MooneyRivlin fitted to a tension test" in text and "stretch 1.3 to 3, 5 readings" in text and "Pa" in text


def test_order_and_units_of_readings_do_not_matter() -> None:
    mixed = [units.quantity(value, "Pa").to("psi") for value in SIGMA[::-1]]
    result = fit(LAM[::-1].tolist(), mixed, MooneyRivlin)
    assert result.law.c1 == pytest.approx(1.5e5, rel=1e-9)


def test_worst_deviation_is_found() -> None:
    sigma = SIGMA.copy()
    sigma[4] += 3e4
    result = fit(LAM, sigma, MooneyRivlin)
    assert result.worst_at == LAM[4] and result.worst > 2e4
    assert result.rms == pytest.approx(float(np.sqrt(np.mean((result.law.stress(LAM) - sigma) ** 2))))


@pytest.mark.parametrize("law", [NeoHookean, MooneyRivlin, Yeoh, Gent, ArrudaBoyce])
def test_a_weight_counts_like_repeated_readings(law) -> None:
    """Weight w is the same as w² readings: least squares by definition."""
    true = TRUE if law in {NeoHookean, MooneyRivlin} else Gent(mu=2.5e5, jm=30.0)
    sigma = true.stress(LAM) * (1.0 + 0.03 * np.cos(9.0 * LAM))
    weights = np.ones(LAM.size)
    weights[-2:] = 2.0
    repeated = np.concatenate([LAM, *[LAM[-2:]] * 3]), np.concatenate([sigma, *[sigma[-2:]] * 3])
    with_weights, with_copies = fit(LAM, sigma, law, weights=weights), fit(*repeated, law)
    for name, value in with_weights.parameters.items():
        assert value == pytest.approx(with_copies.parameters[name], rel=1e-4)


def test_relative_weights_divide_by_stress() -> None:
    sigma = SIGMA * (1.0 + 0.05 * np.cos(9.0 * LAM))
    relative = fit(LAM, sigma, NeoHookean, weights="relative").law
    g = LAM - LAM**-2
    assert relative.mu == pytest.approx(float(np.sum(g / sigma) / np.sum((g / sigma) ** 2)), rel=1e-12)


def test_zero_weight_leaves_a_reading_out() -> None:
    sigma = SIGMA.copy()
    sigma[0] *= 3.0
    weights = np.ones(LAM.size)
    weights[0] = 0.0
    assert fit(LAM, sigma, MooneyRivlin, weights=weights).law.c1 == pytest.approx(1.5e5, rel=1e-9)


@pytest.mark.parametrize(
    "law",
    [
        Ogden(mu=[6e5], alpha=[1.6]),
        Ogden(mu=[5e5, -2e4], alpha=[1.5, -3.0]),
        Ogden(mu=[6.3e5, 1.2e3, -1e4], alpha=[1.3, 5.0, -2.0]),
    ],
    ids=["one term", "two terms", "three terms"],
)
def test_ogden_follows_a_curve_of_its_kind(law: Ogden) -> None:
    """Sums of powers are ill-conditioned: other parameters give nearly the same curve, so the curve is compared."""
    lam = np.linspace(1.05, 6.0, 40)
    result = fit(lam, law.stress(lam), Ogden, terms=len(law.mu))
    assert result.rms < 2e-4 * float(law.stress(6.0))
    assert all(mu * alpha > 0.0 for mu, alpha in zip(result.law.mu, result.law.alpha, strict=True))


def test_several_valleys_do_not_trap_the_search() -> None:
    """A curve with a late upturn: the best of a fine scan over the one nonlinear parameter, done apart."""
    lam = np.linspace(1.05, 7.0, 40)
    rise = lam**2 + 2.0 / lam - 3.0
    sigma = Yeoh(c1=1.8e5, c2=-2e3, c3=50.0).stress(lam)
    result = fit(lam, sigma, Gent)

    def left(jm: float) -> float:
        column = (lam - lam**-2) * jm / (jm - rise)
        mu = column @ sigma / (column @ column)
        return float(np.sum((mu * column - sigma) ** 2))

    scan = min(left(jm) for jm in rise.max() * (1.0 + np.geomspace(1e-4, 1e4, 4000)))
    assert result.rms**2 * lam.size <= scan * (1.0 + 1e-9)


def test_no_upturn_no_lock() -> None:
    sigma = NeoHookean(mu=4e5).stress(LAM)
    for law in (Gent, ArrudaBoyce):
        with pytest.warns(RubberFitWarning, match="no upturn"):
            result = fit(LAM, sigma, law)
        assert result.law.shear_modulus == pytest.approx(4e5, rel=1e-4)
        assert result.warning is not None and result.warning in str(result)


DOUBTFUL = [
    (MooneyRivlin(c1=3e5, c2=-5e4), MooneyRivlin, "c2 is negative, so the law is unstable in other than tension"),
    (MooneyRivlin(c1=-1e4, c2=3e5), MooneyRivlin, "c1 is negative|does not rise"),
    (Yeoh(c1=3e5, c2=1e3, c3=-10.0), Yeoh, "c3 is negative"),
    (Yeoh(c1=3e5, c2=-1.5e4, c3=200.0), Yeoh, "does not rise at stretch"),
]


@pytest.mark.parametrize(("true", "law", "message"), DOUBTFUL)
def test_doubtful_laws_are_warned_of(true, law, message: str) -> None:
    with pytest.warns(RubberFitWarning, match=message):
        result = fit(LAM, true.stress(LAM), law)
    assert result.warning is not None


REFUSED = [
    ((LAM, SIGMA[:-1], NeoHookean), {}, InputError, r"lists of equal length, got shapes \(8,\) and \(7,\)"),
    ((2.0, 5e5, NeoHookean), {}, InputError, r"lists of equal length, got shapes \(\) and \(\)"),
    ((LAM[:3], SIGMA[:3], Yeoh), {}, InputError, r"at least 4 different stretches other than 1 for Yeoh, got 3"),
    ((LAM, SIGMA, Yeoh), {"over": (1.0, 1.5)}, InputError, r"for Yeoh, got 2 in the range \(1\.0, 1\.5\)"),
    ((LAM, SIGMA, Yeoh), {"over": (2.0, 1.5)}, InputError, r"over must be stretches \(lower, higher\)"),
    (([2.0] * 8, SIGMA, NeoHookean), {}, InputError, r"at least 2 different stretches"),
    ((LAM * 100.0, SIGMA, NeoHookean), {}, InputError, r"got 400; percent elongation\? divide by 100 and add 1"),
    ((LAM - 1.1, SIGMA, NeoHookean), {}, InputError, r"> 0, got 0; strain\? add 1"),
    ((LAM - 1.0, SIGMA, NeoHookean), {}, InputError, r"sign of stretch - 1.*is the first column strain"),
    ((LAM, -SIGMA, NeoHookean), {}, InputError, r"stress must have the sign of stretch - 1"),
    ((LAM, SIGMA * math.nan, NeoHookean), {}, InputError, r"stress must be .* finite"),
    ((LAM, ["2 N"] * 8, NeoHookean), {}, InputError, r"stress must be"),
    ((LAM, SIGMA, float), {}, InputTypeError, r"law must be one of NeoHookean, .*got <class 'float'>"),
    ((LAM, SIGMA, TRUE), {}, InputTypeError, r"law must be one of"),
    ((LAM, SIGMA, Ogden), {"terms": 5}, InputError, r"terms must be a whole number from 1 to 4, got 5"),
    ((LAM, SIGMA, NeoHookean), {"weights": "absolute"}, InputError, r"weights must be numbers, 'relative' or None"),
    ((LAM, SIGMA, NeoHookean), {"weights": [1.0]}, InputError, r"weights must be >= 0 and one a reading"),
    ((LAM, SIGMA, NeoHookean), {"weights": -np.ones(8)}, InputError, r"weights must be >= 0"),
    ((LAM, SIGMA, NeoHookean), {"weights": np.zeros(8)}, InputError, r"above 0 somewhere"),
    (([1.0, *LAM], [0.0, *SIGMA], NeoHookean), {"weights": "relative"}, InputError, r"got one of 0 Pa"),
]


@pytest.mark.parametrize(("arguments", "options", "error", "message"), REFUSED)
def test_refused(arguments, options, error: type[Exception], message: str) -> None:
    with pytest.raises(error, match=message):
        fit(*arguments, **options)

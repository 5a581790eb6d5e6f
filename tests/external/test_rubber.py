"""Rubber against published data and parameters.

Sources and trust of each number:

* P: seen in the primary source; T: seen in a transcription, excerpt or secondary page of it;
  D: derived from P or T data in a calculation of its own, apart from this library; M: from memory.
* Treloar (1944), Trans. Faraday Soc. 40:59-70 (P, figures read off; the paper prints no uniaxial table).
* Arruda and Boyce (1993), J. Mech. Phys. Solids 41:389-412 (P).
* Steinmann, Hossain and Possart (2012), Arch. Appl. Mech. 82:1183-1217 (T: table and neo-Hookean
  parameter as in a public repository of material models).
* Wood (1976), J. Res. NBS 80A:451 (P, abstract).
* Wood, Bullman and Roth (1974), J. Res. NBS 78A:623-629 (P, abstract).

Unless said otherwise a tolerance is half a unit of the last digit given.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from springpoise.errors import InputError
from springpoise.springs import rubber
from springpoise.springs.rubber import (
    ArrudaBoyce,
    Gent,
    MooneyRivlin,
    NeoHookean,
    Ogden,
    RubberTube,
    Softened,
    Yeoh,
    creep_per_relaxation,
    fit,
)
from springpoise.springs.warnings import RubberCreepWarning, RubberFitWarning

KGF_PER_CM2 = 98066.5
MPA = 1e6
DATA = Path(__file__).parent / "data"


def readings(name: str) -> tuple[np.ndarray, np.ndarray]:
    stretch, stress = np.loadtxt(DATA / name, delimiter=",", skiprows=2, unpack=True)
    return stretch, stress * KGF_PER_CM2


VULCANIZATE = readings("treloar_1944_uniaxial.csv")
LATEX = readings("treloar_1944_latex_50C.csv")

# The same test as transcribed in Steinmann et al. 2012 (T), stress in MPa.
TRANSCRIBED_STRETCH = np.array(
    [
        1.01,
        1.12,
        1.24,
        1.39,
        1.61,
        1.89,
        2.17,
        2.42,
        3.01,
        3.58,
        4.03,
        4.76,
        5.36,
        5.76,
        6.16,
        6.40,
        6.62,
        6.87,
        7.05,
        7.16,
        7.27,
        7.43,
        7.50,
        7.61,
    ]
)
TRANSCRIBED_STRESS = MPA * np.array(
    [
        0.03,
        0.14,
        0.23,
        0.32,
        0.41,
        0.50,
        0.58,
        0.67,
        0.85,
        1.04,
        1.21,
        1.58,
        1.94,
        2.29,
        2.67,
        3.02,
        3.39,
        3.75,
        4.12,
        4.47,
        4.85,
        5.21,
        5.57,
        6.30,
    ]
)

# D: Yeoh's law fitted to Treloar's latex up to stretch 4.4.
LATEX_LAW = Yeoh(c1=0.23155027 * MPA, c2=-3.3075038e-3 * MPA, c3=1.0703029e-4 * MPA, fitted_over=(1.025, 4.389))
LATEX_TUBE = RubberTube(outer_diameter="9.525 mm", inner_diameter="6.35 mm", free_length="100 mm", law=LATEX_LAW)


def rms(law: rubber.RubberLaw, stretch: np.ndarray, stress: np.ndarray) -> float:
    return float(np.sqrt(np.mean((law.stress(stretch) - stress) ** 2)))


# -------------------------------------------------------------------------------- Treloar's own words


def test_data_fall_below_the_statistical_law_as_treloar_says() -> None:
    """P: "24 %" near 250 % extension for G = 4.0 kgf/cm², 35 % for the latex and G = 6.3 kgf/cm².

    D from the readings: 24.4 % at stretch 3, 23.5 % at 3.5; 35.6 % for the latex. The readings are
    good to 0.15 and 0.3 kgf/cm², 1.6 and 2 % here; the interpolation between them adds 0.1 %.
    """
    law = NeoHookean(mu="0.392266 MPa")
    for stretch, below in ((3.0, 0.244), (3.5, 0.235)):
        seen = np.interp(stretch, *VULCANIZATE)
        assert 1.0 - seen / law.stress(stretch) == pytest.approx(below, abs=1e-3)
        assert 1.0 - seen / law.stress(stretch) == pytest.approx(0.24, abs=0.016)
    deficit = 1.0 - LATEX[1] / NeoHookean(mu="0.617819 MPa").stress(LATEX[0])
    assert deficit[LATEX[0] < 5.0].max() == pytest.approx(0.356, abs=5e-4)
    assert deficit[LATEX[0] < 5.0].max() == pytest.approx(0.35, abs=0.02)


def test_the_two_transcriptions_tell_of_one_test() -> None:
    """D: they differ by at most 0.03 in stretch; in stress by at most 1.5 % above 0.4 MPa, after rounding."""
    assert np.abs(VULCANIZATE[0] - TRANSCRIBED_STRETCH).max() <= 0.03 + 1e-12
    high = TRANSCRIBED_STRESS > 0.405 * MPA
    assert np.abs(VULCANIZATE[1] / TRANSCRIBED_STRESS - 1.0)[high].max() < 0.0155


# ------------------------------------------------------------------------------------- laws by the number

# D: the closed formulas for G = 4.0 kgf/cm² (Treloar, P) and for Arruda and Boyce's fig. A1 (P).
CHECK_VALUES = [
    (1.1, 0.10731, 0.08953),
    (1.5, 0.41406, 0.33778),
    (2.0, 0.68647, 0.55125),
    (3.0, 1.13321, 0.89556),
    (4.0, 1.54455, 1.21078),
    (5.0, 1.94564, 1.51776),
    (6.0, 2.34270, 1.82153),
    (7.0, 2.73786, 2.12379),
]


@pytest.mark.parametrize(("stretch", "neo_hookean", "mooney_rivlin"), CHECK_VALUES)
def test_values_of_the_two_oldest_laws(stretch: float, neo_hookean: float, mooney_rivlin: float) -> None:
    assert NeoHookean(mu="0.392266 MPa").stress(stretch) / MPA == pytest.approx(neo_hookean, abs=5.1e-6)
    assert MooneyRivlin(c1="0.15 MPa", c2="0.015 MPa").stress(stretch) / MPA == pytest.approx(mooney_rivlin, abs=5.1e-6)


# Published parameters (P) and what they leave on the readings (D), MPa.
PUBLISHED = [
    (MooneyRivlin(c1=0.15 * MPA, c2=0.015 * MPA), 1.58, 0.005),
    (Ogden(mu=[0.61803 * MPA, 0.00118 * MPA, -0.00981 * MPA], alpha=[1.3, 5.0, -2.0]), 0.344, 0.0005),
    (ArrudaBoyce(mu=0.27 * MPA, n=26.5), 0.289, 0.0005),
    # T: a secondary page's Mooney-Rivlin, which is no least-squares fit to these data.
    (MooneyRivlin(c1=0.2588 * MPA, c2=-0.0449 * MPA), 0.857, 0.0005),
]


@pytest.mark.parametrize(("law", "left", "tolerance"), PUBLISHED)
def test_published_laws_on_the_vulcanizate(law: rubber.RubberLaw, left: float, tolerance: float) -> None:
    assert rms(law, *VULCANIZATE) / MPA == pytest.approx(left, abs=tolerance)


def test_shear_modulus_of_the_published_ogden_law() -> None:
    """D: ½ Σ mu alpha = 0.4144795 MPa."""
    law = Ogden(mu=["0.61803 MPa", "0.00118 MPa", "-0.00981 MPa"], alpha=[1.3, 5.0, -2.0])
    assert law.shear_modulus == pytest.approx(0.4144795 * MPA, rel=1e-12)


@pytest.mark.parametrize(("stretch", "short"), [(5.0, 0.003), (6.0, 0.017), (7.0, 0.085), (7.5, 0.17)])
def test_the_series_of_five_terms_falls_short(stretch: float, short: float) -> None:
    """The series is Arruda and Boyce's equation 21 (P); D: what it lacks, to the digits given."""
    mu, n = 0.27 * MPA, 26.5
    coefficients = [1 / 2, 1 / (20 * n), 11 / (1050 * n**2), 19 / (7000 * n**3), 519 / (673750 * n**4)]
    invariant = stretch**2 + 2.0 / stretch
    series = sum(i * c * invariant ** (i - 1) for i, c in enumerate(coefficients, 1))
    truncated = 2.0 * mu * (stretch - stretch**-2) * series
    tolerance = 0.005 if short > 0.1 else 0.0005
    assert 1.0 - truncated / ArrudaBoyce(mu=mu, n=n).stress(stretch) == pytest.approx(short, abs=tolerance)


def test_the_series_agrees_at_small_stretch() -> None:
    """Equation 21 (P) of the same paper settles sqrt(N) in its equation 15: next term below 1e-6 at stretch 1.2."""
    mu, n = 0.27 * MPA, 26.5
    coefficients = [1 / 2, 1 / (20 * n), 11 / (1050 * n**2), 19 / (7000 * n**3), 519 / (673750 * n**4)]
    invariant = 1.2**2 + 2.0 / 1.2
    series = sum(i * c * invariant ** (i - 1) for i, c in enumerate(coefficients, 1))
    assert ArrudaBoyce(mu=mu, n=n).stress(1.2) == pytest.approx(2.0 * mu * (1.2 - 1.2**-2) * series, rel=1e-5)


# --------------------------------------------------------------------------------------------------- fits

# Least-squares parameters in MPa (jm and n pure), and rms in MPa: all D, each to the digits given.
FITS = [
    (NeoHookean, VULCANIZATE, None, {"mu": 0.57058058}, 0.803, 5e-4),
    (MooneyRivlin, VULCANIZATE, (1.0, 4.1), {"c1": 0.1413197, "c2": 0.0339099}, 0.0234, 5e-5),
    (Yeoh, VULCANIZATE, None, {"c1": 0.17622181, "c2": -1.85411196e-3, "c3": 4.63948356e-5}, 0.1026, 5e-5),
    (Gent, VULCANIZATE, None, {"mu": 0.24805506, "jm": 79.4462}, 0.0788, 5e-5),
    (ArrudaBoyce, VULCANIZATE, None, {"mu": 0.27762454, "n": 25.5170}, 0.0611, 5e-5),
    (Yeoh, LATEX, (1.0, 4.4), {"c1": 0.23155027, "c2": -3.3075038e-3, "c3": 1.0703029e-4}, 0.0184, 5e-5),
    (MooneyRivlin, LATEX, (1.0, 4.4), {"c1": 0.1917058, "c2": 0.0478118}, 0.0337, 5e-5),
]


@pytest.mark.parametrize(("law", "data", "over", "expected", "left", "tolerance"), FITS)
def test_least_squares_parameters(law, data, over, expected, left, tolerance) -> None:
    """Relative 2e-6: the last digit of the shortest of them."""
    result = fit(*data, law, over=over)
    for name, value in expected.items():
        scale = 1.0 if name in {"jm", "n"} else MPA
        assert result.parameters[name] / scale == pytest.approx(value, rel=2e-6)
    assert result.rms / MPA == pytest.approx(left, abs=tolerance)
    assert result.warning is None


def test_published_neo_hookean_parameter() -> None:
    """T: 0.5673 MPa as published, from data rounded to 0.01 MPa; D: 0.56716 MPa and rms 0.803 MPa from the table."""
    result = fit(TRANSCRIBED_STRETCH, TRANSCRIBED_STRESS, NeoHookean)
    assert result.law.mu / MPA == pytest.approx(0.56716, abs=5e-6)
    assert result.law.mu / MPA == pytest.approx(0.5673, abs=2e-4)
    assert result.rms / MPA == pytest.approx(0.803, abs=5e-4)


def test_published_eight_chain_parameters_lie_near_the_least_squares() -> None:
    """P: mu 0.27 MPa and n 26.5, fitted by eye to three kinds of test; within 3 and 4 % of least squares here."""
    law = fit(*VULCANIZATE, ArrudaBoyce).law
    assert law.mu == pytest.approx(0.27 * MPA, rel=0.03)
    assert law.n == pytest.approx(26.5, rel=0.04)


def test_ogden_fit_beats_the_published_law_on_this_test_alone() -> None:
    """The published law (P) serves three kinds of test; a fit to one of them must leave less than its 0.344 MPa."""
    with pytest.warns(RubberFitWarning, match="exponent is at the end of its range"):
        result = fit(*VULCANIZATE, Ogden)
    assert result.rms < 0.344 * MPA


def test_mooney_rivlin_over_the_whole_curve_is_no_rubber() -> None:
    """D: least squares over the full range (rms 0.633 MPa) makes c2 negative; here so much that the modulus is too."""
    g = VULCANIZATE[0] - VULCANIZATE[0] ** -2
    columns = np.stack([2.0 * g, 2.0 * g / VULCANIZATE[0]], axis=1)
    c, *_ = np.linalg.lstsq(columns, VULCANIZATE[1], rcond=None)
    assert np.sqrt(np.mean((columns @ c - VULCANIZATE[1]) ** 2)) / MPA == pytest.approx(0.633, abs=5e-4)
    with pytest.raises(InputError, match="fit a shorter one"):
        fit(*VULCANIZATE, MooneyRivlin)


# --------------------------------------------------------------------------------------------------- tube


def test_latex_tube_at_stretch_three() -> None:
    """D: 3/8 x 1/4 in tube of 100 mm with the latex law; each to the digits given."""
    tube = LATEX_TUBE
    assert tube.cross_section * 1e6 == pytest.approx(39.58652, abs=5e-6)
    assert tube.law.stress(3.0) / MPA == pytest.approx(1.1654987, abs=5e-8)
    assert tube.load(0.3) == pytest.approx(46.13804, abs=5e-6)
    assert tube.outer_diameter_at(0.3) * 1e3 == pytest.approx(5.49926, abs=5e-6)
    assert tube.inner_diameter_at(0.3) * 1e3 == pytest.approx(3.66617, abs=5e-6)
    assert tube.stiffness(0.3) / 1e3 == pytest.approx(0.1406976, abs=5e-8)


def test_latex_stress_at_100_and_300_percent() -> None:
    """D: 0.75394 and 1.60239 MPa between the readings; T: latex tubing has at most 0.862 MPa at 100 % (A-A-50247C).

    The readings are good to 4 and 2 % there, and the law is fitted to them.
    """
    for stretch, expected, near in ((2.0, 0.75394, 0.04), (4.0, 1.60239, 0.02)):
        assert np.interp(stretch, *LATEX) / MPA == pytest.approx(expected, abs=5.1e-6)
        assert LATEX_LAW.stress(stretch) / MPA == pytest.approx(expected, rel=near)
    assert LATEX_LAW.stress(2.0) < 0.862 * MPA


def test_latex_is_nearly_a_spring_of_zero_free_length() -> None:
    """P data: stress over stretch is 3.892 to 4.224 kgf/cm² from stretch 2.1 to 4.4, within ±4.1 % of its middle.

    The fitted law smooths the readings (each good to 2 %), so it may lie some percent to either side.
    """
    stretch, stress = LATEX[0], LATEX[1] / KGF_PER_CM2
    used = (stretch > 2.1) & (stretch < 4.4)
    ratio = (stress / stretch)[used]
    assert ratio.min() == pytest.approx(3.892, abs=5e-4)
    assert ratio.max() == pytest.approx(4.224, abs=5e-4)
    assert (ratio.max() - ratio.min()) / (ratio.max() + ratio.min()) == pytest.approx(0.041, abs=5e-4)
    near = LATEX_TUBE.effective_free_length(over=(0.21, 0.4389))
    assert near.proportional_within == pytest.approx(0.041, abs=0.01)
    expected = 0.5 * (3.892 + 4.224) * KGF_PER_CM2 * LATEX_TUBE.cross_section / 0.1
    assert near.proportional_rate == pytest.approx(expected, rel=0.02)


# ------------------------------------------------------------------------------------ time and temperature


@pytest.mark.parametrize(
    ("environment", "days", "percent"),
    [
        (rubber.DRY_NITROGEN_OR_VACUUM, 30, 11.989),
        (rubber.DRY_AIR, 1, 7.868),
        (rubber.DRY_AIR, 30, 19.765),
        (rubber.HUMID_AIR, 30, 40.142),
    ],
    ids=["dry nitrogen", "dry air, 1 day", "dry air", "humid air"],
)
def test_creep(environment: rubber.Environment, days: int, percent: float) -> None:
    """D from Wood, Bullman and Roth's constants (P)."""
    assert 100.0 * environment.creep(f"{days} days") == pytest.approx(percent, abs=5e-4)


def test_how_long_the_logarithm_will_do() -> None:
    """P: up to 0.1 A/B, D: 1200 min in dry air; the linear part leads (ten times the rate) beyond 4.343 A/B."""
    assert rubber.DRY_AIR.logarithm_alone_to / 60.0 == pytest.approx(1200.0, rel=1e-12)
    assert rubber.DRY_AIR.oxidation_leads_from / rubber.DRY_AIR.logarithm_alone_to == pytest.approx(43.43, abs=5e-3)
    with pytest.warns(RubberCreepWarning, match="70 days"):
        rubber.DRY_AIR.creep("71 days")


def test_relaxation_from_creep() -> None:
    """D: α = 1.6396 at stretch 3 of the latex law, so 2.4 % creep a decade is 1.46 % relaxation a decade.

    The tube's law keeps an energy and so agrees to first order only: it is compared at one percent
    of that creep, where the second order is below 1e-4.
    """
    alpha = creep_per_relaxation(LATEX_LAW, 3.0)
    assert alpha == pytest.approx(1.6396, abs=5e-5)
    assert 2.4 / alpha == pytest.approx(1.46, abs=5e-3)
    small = rubber.Environment("slow", per_decade=0.00024, per_second=0.0, tested_to="1 day")
    loss = 1.0 - LATEX_TUBE.after("10 min", environment=small).load(0.3) / LATEX_TUBE.load(0.3)
    assert loss == pytest.approx(0.00024 / alpha, rel=5e-4)


@pytest.mark.parametrize(
    ("parts", "share", "tolerance", "slope"),
    [
        (0.45, 1.0, 1e-12, None),
        (2.0, 0.51, 0.005, 0.166),
        (3.0, None, None, 0.205),
        (5.0, None, None, 0.244),
        (23.8, 0.09, 0.005, None),
    ],
)
def test_energy_share_of_peroxide_cured_rubber(parts, share, tolerance, slope) -> None:
    """P (abstract) and D: energy shares 1.00, 0.51, 0.09; slopes in percent of G a kelvin, at 25 °C."""
    if share is not None:
        assert rubber.peroxide_cured_energy_share(parts, "25 degC") == pytest.approx(share, abs=tolerance)
    if slope is not None:
        warm, cold = (rubber.peroxide_cured_modulus(parts, 298.15 + step) for step in (0.5, -0.5))
        middle = rubber.peroxide_cured_modulus(parts, 298.15)
        assert 100.0 * (warm - cold) / middle == pytest.approx(slope, abs=5e-4)


def test_ideal_temperature_slope() -> None:
    """D: stress proportional to absolute temperature is +0.335 % a kelvin at 25 °C."""
    warm = LATEX_TUBE.at_temperature("26 degC", energy_share=0.0, reference="25 degC")
    assert 100.0 * (warm.load(0.3) / LATEX_TUBE.load(0.3) - 1.0) == pytest.approx(0.335, abs=5e-4)


def test_energy_share_gives_the_peroxide_rubber_its_slope() -> None:
    """The modulus formula is linear in temperature (Wood 1976), so share and factor must give it exactly."""
    share = rubber.peroxide_cured_energy_share(2.0, "20 degC")
    factor = rubber.thermal_factor("60 degC", energy_share=share, reference="20 degC")
    ratio = rubber.peroxide_cured_modulus(2.0, "60 degC") / rubber.peroxide_cured_modulus(2.0, "20 degC")
    assert factor == pytest.approx(ratio, rel=1e-12)


def test_softening_factor() -> None:
    """D: r 2, m 0.5, Wmax 1, W 0.4 give η = 1 - erf(1.2)/2 = 0.544843 (model M)."""
    fresh = NeoHookean(mu=1.0 * MPA)

    def stretch_at(energy: float) -> float:
        roots = np.roots([1.0, 0.0, -(3.0 + 2.0 * energy), 2.0])
        return float(roots.real.max())

    soft = Softened(fresh, to_stretch=stretch_at(1.0), r=2.0, m=0.5 * MPA)
    at = stretch_at(0.4)
    assert soft.stress(at) / fresh.stress(at) == pytest.approx(0.544843, abs=5e-7)
    assert soft.stress(at) / fresh.stress(at) == pytest.approx(1.0 - math.erf(1.2) / 2.0, rel=1e-12)

"""Tolerances of a spring balancer against closed forms.

One arm of weight moment G = m·g·r and a spring of zero free length from a point a straight above the
pivot to a point b out on the arm. Its holding torque is Im(D exp(iq)) with
D = i·G - k·conj(anchor)·attachment up to sign, so that scalar errors add up and angle errors stand at
right angles to them (derived here once more, with complex numbers). The numbers 0.0538..., 0.0928... and
so on were computed from these closed forms apart from the library; tolerance 1e-9 relative: their
printed digits.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
from scipy import stats
from scipy.special import erf, ndtri

from springpoise import Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.tolerance import Spread, adjusters, corners, replaced, scatter, sensitivities

G0 = 9.80665
M, R, A, B = 2.0, 0.35, 0.10, 0.08
RATE = 858.081875
G = M * G0 * R

RATE_NAME = "springs[0].spring.rate"
MASS_NAME, COM = "linkage.bodies[0].mass", "linkage.bodies[0].com[0]"
ANCHOR, ANCHOR_X = "springs[0].path.first.at[1]", "springs[0].path.first.at[0]"
ATTACH, ATTACH_Y = "springs[0].path.last.at[0]", "springs[0].path.last.at[1]"


def _ideal(rate=RATE, spring=None, anchor=(0.0, A)):
    path = Straight(Point("ground", anchor), Point("arm", (B, 0.0)))
    return Mechanism(Arm(Body(M, (R, 0.0))), springs=SpringMount(spring or ZeroLengthSpring(rate), path))


SCALARS = {RATE_NAME: "5 %", MASS_NAME: "1 %", COM: "1 %", ANCHOR: "1 %", ATTACH: "1 %"}


def test_root_of_squares_of_scalar_errors():
    """sqrt(5² + 4·1²) % of G."""
    rows = sensitivities(_ideal(), over=[0.0], names=list(SCALARS))
    shares = [row.per_percent * float(SCALARS[row.name].split()[0]) / G for row in rows]
    assert math.hypot(*shares) == pytest.approx(0.05385164807, rel=1e-9)


def test_worst_case_of_scalar_errors():
    """5 + 4·1 % to first order; 1.05·1.01²/0.99² - 1 of the build's own G exactly."""
    found = corners(_ideal(), {name: Spread.uniform(width) for name, width in SCALARS.items()}, over=[0.0, 0.7])
    assert found.linear / G == pytest.approx(0.09, rel=1e-12)
    own = abs(found.mechanism.gravity_torque(0.0))
    assert found.worst / own == pytest.approx(0.09285277013, rel=1e-9)
    assert found.worst / own == pytest.approx(1.05 * 1.01**2 / 0.99**2 - 1, rel=1e-12)
    assert found.exact
    assert found.linear_error == pytest.approx(found.worst - 0.09 * G, rel=1e-12)


def test_stiffness_and_angle_errors_stand_at_right_angles():
    """|1.03 exp(2° i) - 1|: 3 % too stiff, and the anchor 2° off."""
    spot = cmath.rect(A, math.pi / 2 + math.radians(2))
    off = replaced(_ideal(), {RATE_NAME: 1.03 * RATE, ANCHOR_X: spot.real, ANCHOR: spot.imag})
    # The torque is a sine; the peak lies between poses and is found from two of them.
    d = math.hypot(off.holding_torque(0.0), off.holding_torque(math.pi / 2))
    assert d / G == pytest.approx(0.04642086105, rel=1e-9)
    one = {RATE_NAME: [1.03 * RATE], ANCHOR_X: [spot.real], ANCHOR: [spot.imag]}
    spreads = {name: Spread.samples(value, in_order=True) for name, value in one.items()}
    build = scatter(_ideal(), spreads, builds=1, over=np.linspace(-math.pi, math.pi, 5001))
    assert build.worst[0] / G == pytest.approx(0.04642086105, rel=1e-6)  # 5000 poses: 2e-7 of the peak


@pytest.mark.parametrize(
    ("psi", "share"),
    [(30, 0.01982787368), (60, 0.01889822365), (90, 0.01561737619), (120, 0.01108831906), (150, 0.005748987007)],
)
def test_an_error_of_the_free_length(psi, share):
    """k·2 mm of tension at the lever a·b·sin(ψ)/d, over k·a·b; ψ is the angle between arm and anchor."""
    coil = ExtensionSpring(RATE, free_length=0.01, initial_tension=0.01 * RATE)
    row = sensitivities(_ideal(spring=coil), over=[f"{90 - psi} deg"], names="springs[0].spring.free_length")
    assert abs(row.rows[0].slope[0]) * 0.002 / G == pytest.approx(share, rel=1e-9)


# ------------------------------------------------------------------------------------------ yields

FOUR_DECIMALS = 5e-5
BUILDS = 20_000


def _sure(share, builds):
    """Four standard errors of a counted share: one test in 16 000 fails by chance, and the seed is fixed."""
    return 4 * math.sqrt(share * (1 - share) / builds)


@pytest.mark.parametrize("limit", [2.0, 5.0, 12.0])
def test_yield_with_one_scalar_error(limit):
    """The error of D is normal: erf(t / (sigma √2))."""
    mech = _ideal()
    expected = erf(limit / (5 * math.sqrt(2)))
    found = scatter(mech, {RATE_NAME: Spread.normal("5 %")}, builds=BUILDS, over=[0.0, 0.4])
    assert found.yield_within(f"{limit} %") == pytest.approx(expected, abs=_sure(expected, BUILDS))
    low, high = found.yield_interval(f"{limit} %")
    assert low < found.yield_within(f"{limit} %") < high
    # One build in the middle of each of so many slices of equal chance.
    layers = RATE * (1 + 0.05 * ndtri((np.arange(BUILDS) + 0.5) / BUILDS))
    found = scatter(mech, {RATE_NAME: Spread.samples(layers, in_order=True)}, builds=BUILDS, over=[0.0, 0.4])
    assert found.yield_within(f"{limit} %") == pytest.approx(expected, abs=FOUR_DECIMALS)


def test_yield_with_scalar_errors_of_spring_and_weight():
    """D = k·a·b - m·g·r is linear in both: normal with the root of the squares."""
    spreads = {RATE_NAME: Spread.normal("4 %"), MASS_NAME: Spread.normal("3 %")}
    found = scatter(_ideal(), spreads, builds=BUILDS, over=[0.0])
    for limit in (0.02, 0.05, 0.1):
        expected = erf(limit / (0.05 * math.sqrt(2)))
        assert found.yield_within(limit * G) == pytest.approx(expected, abs=_sure(expected, BUILDS))


def test_yield_with_a_uniform_error_and_with_a_batch():
    """Uniform ±5 %: t/5. Two springs of one batch err together: 5 %; apart they would err 5/√2 %."""
    found = scatter(_ideal(), {RATE_NAME: Spread.uniform("5 %")}, builds=BUILDS, over=[0.0])
    assert found.yield_within("2 %") == pytest.approx(0.4, abs=_sure(0.4, BUILDS))
    mount = _ideal(RATE / 2).springs[0]
    pair = _ideal().with_springs([mount, mount])
    for shared, sigma in (("lot 7", 5.0), (None, 5.0 / math.sqrt(2))):
        spread = Spread.normal("5 %", shared=shared)
        both = {"springs[0].spring.rate": spread, "springs[1].spring.rate": spread}
        found = scatter(pair, both, builds=BUILDS, over=[0.0])
        expected = erf(5.0 / (sigma * math.sqrt(2)))
        assert found.yield_within("5 %") == pytest.approx(expected, abs=_sure(expected, BUILDS))


@pytest.mark.parametrize("offset", [0.0, 0.001])
def test_yield_with_angle_errors(offset):
    """The attachment errs by 1 mm in both directions: |D| = k·a·|error|, Rayleigh's; Rice's where it is drawn off."""
    sigma, limit = 0.001, 0.0018
    mech = replaced(_ideal(), {ATTACH: B + offset})
    expected = stats.rice.cdf(limit, offset / sigma, scale=sigma)
    turn = np.linspace(-math.pi, math.pi, 361)  # the peak between poses is missed by at most 4e-5 of itself
    spreads = {ATTACH: Spread.normal(sigma), ATTACH_Y: Spread.normal(sigma)}
    found = scatter(mech, spreads, builds=BUILDS, over=turn)
    assert found.yield_within(RATE * A * limit) == pytest.approx(expected, abs=_sure(expected, BUILDS) + 1e-4)
    # 32 directions, over which the yield is smooth and comes round, with 4096 distances of equal chance
    # in each, other ones in each; poses so dense that the peak is missed by 2e-5 of itself at the most.
    count = 32 * 4096
    turn_of = np.arange(32)[:, None]
    level = (np.arange(4096) + (turn_of * 0.6180339887 + 1e-9) % 1) / 4096
    far = sigma * np.sqrt(-2 * np.log1p(-level.ravel()))
    way = np.repeat(2 * math.pi * (turn_of.ravel() + 0.5) / 32, 4096)
    pairs = {ATTACH: B + offset + far * np.cos(way), ATTACH_Y: far * np.sin(way)}
    spreads = {name: Spread.samples(value, in_order=True) for name, value in pairs.items()}
    found = scatter(mech, spreads, builds=count, over=np.linspace(0.0, math.pi, 241))
    assert found.yield_within(RATE * A * limit) == pytest.approx(expected, abs=FOUR_DECIMALS)


def test_bands_are_those_of_a_normal_distribution():
    """At q the torque scatters by 5 % of G·cos(q). A quantile of so many builds errs by about 0.02 sigma."""
    q = np.linspace(-1.2, 1.2, 7)
    found = scatter(_ideal(), {RATE_NAME: Spread.normal("5 %")}, builds=BUILDS, over=q, levels=(0.05, 0.5, 0.95))
    sigma = 0.05 * G * np.cos(q)
    for row, level in zip(found.bands, (0.05, 0.5, 0.95), strict=True):
        np.testing.assert_allclose(row, ndtri(level) * sigma, atol=0.06 * np.max(sigma))
    layers = RATE * (1 + 0.05 * ndtri((np.arange(BUILDS) + 0.5) / BUILDS))
    found = scatter(_ideal(), {RATE_NAME: Spread.samples(layers, in_order=True)}, builds=BUILDS, over=q)
    for row, level in zip(found.bands, (0.05, 0.5, 0.95), strict=True):
        np.testing.assert_allclose(row, ndtri(level) * sigma, atol=5e-4 * np.max(sigma))


# --------------------------------------------------------------------------------------- adjusters


def test_the_anchor_height_restores_a_spring_that_is_too_strong():
    """k·a·b = m·g·r: a = 0.10/(k/k0) exactly, nothing remains, whatever scalar errs."""
    rates = RATE * np.linspace(0.85, 1.15, 31)
    spreads = {RATE_NAME: Spread.samples(rates, in_order=True)}
    for norm in ("minimax", "rms"):
        found = adjusters(_ideal(), spreads, [ANCHOR, ANCHOR_X], builds=31, over=np.linspace(-1.0, 1.0, 21), norm=norm)
        assert found.best.name == ANCHOR
        np.testing.assert_allclose(found[ANCHOR].moves, A * RATE / rates - A, atol=1e-12)
        assert np.max(found[ANCHOR].remains) < 1e-12 * G


def test_an_angle_error_cannot_be_adjusted_by_the_height():
    """D = k·b·((a'-a) + i·e): over a full turn its size is least with a' = a; e remains."""
    offs = np.linspace(-0.002, 0.002, 9)
    spreads = {ANCHOR_X: Spread.samples(offs, in_order=True)}
    turn = np.linspace(-math.pi, math.pi, 721)
    found = adjusters(_ideal(), spreads, [ANCHOR, ANCHOR_X], builds=9, over=turn, norm="rms")
    np.testing.assert_allclose(found[ANCHOR].remains, RATE * B * np.abs(offs), atol=1e-5 * G)
    np.testing.assert_allclose(found[ANCHOR_X].moves, -offs, atol=1e-12)

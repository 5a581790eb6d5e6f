"""Fitted springs against published ways of balancing with ordinary springs.

The configurations (a spring of some free length between an anchor above the pivot and the arm; a
torsion spring against a sine; a spring behind one round pulley) are those of Herder and te Riele
2001, Perfect static balance with normal springs, DETC2001/DAC-21069; Agrawal and Agrawal 2005,
Gravity balancing leg orthosis using non-zero free length springs, Mech. Mach. Theory 40:693-709;
Herder 2001, Energy-free systems, TU Delft. Their texts give no numbers that fit these instances:
the numbers here were recomputed by an independent linear programme and independent least squares,
or are closed forms, as said at each. Reference instance: 2.0 kg at 0.35 m, anchor 0.10 m above the
pivot, attachment at 0.08 m.

Least squares depend on the poses that they are taken over. The grids are stated; tolerances are
half a unit of the last digit given.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
    balance,
)

A, B = 0.10, 0.08
ARM = Arm(Body(2.0, (0.35, 0.0)))
G = 2.0 * 9.80665 * 0.35
SIXTY = math.pi / 3


def _with_free_length(free_length, skew=0.0):
    """psi from 30 to 150 deg from the upward vertical is q from -60 to 60 deg; ``skew`` widens psi."""
    attach = Point("arm", (B * math.cos(skew), -B * math.sin(skew)))
    mount = SpringMount(ExtensionSpring(1.0, free_length=free_length), Straight(Point("ground", (0.0, A)), attach))
    return Mechanism(ARM, springs=mount)


def _rate(fit):
    return fit.mechanism.springs[0].spring.rate


@pytest.mark.parametrize(
    ("share", "norm", "strength", "worst"),
    [
        (0.10, "rms", 1.181820, 0.119987),
        (0.20, "rms", 1.426271, 0.295903),
        (0.25, "rms", 1.577133, 0.415035),
        (0.10, "minimax", 1.254868, 0.096498),
        (0.20, "minimax", 1.684088, 0.259010),
        (0.25, "minimax", 2.031523, 0.390556),
    ],
)
def test_rate_of_a_spring_with_free_length(share, norm, strength, worst):
    """481 poses, ends included. The minimax optima lie between poses, which costs up to 2e-6 in strength."""
    fit = balance.fit_springs(
        _with_free_length(share * (A + B)), norm=norm, preload="none", over=np.linspace(-SIXTY, SIXTY, 481)
    )
    assert fit.success
    assert _rate(fit) * A * B / G == pytest.approx(strength, abs=6e-7 if norm == "rms" else 2e-6)
    assert fit.residual.worst / G == pytest.approx(worst, abs=6e-7)


@pytest.mark.parametrize(
    ("free_length", "skew", "strength", "worst", "rms"),
    [(0.018, 4.360434, 1.181487, 0.045623, 0.0194919), (0.036, 9.258551, 1.427946, 0.110003, 0.0458516)],
)
def test_rate_of_a_spring_with_free_length_and_a_skewed_attachment(free_length, skew, strength, worst, rms):
    """481 poses, ends included; the skew is the best one and was found by a search of its own."""
    q = np.linspace(-SIXTY, SIXTY, 481)
    fit = balance.fit_springs(_with_free_length(free_length, math.radians(skew)), norm="rms", preload="none", over=q)
    assert _rate(fit) * A * B / G == pytest.approx(strength, abs=6e-7)
    assert fit.residual.worst / G == pytest.approx(worst, abs=6e-7)
    assert fit.residual.rms / G == pytest.approx(rms, abs=6e-8)
    for other in (skew - 0.5, skew + 0.5):
        there = balance.fit_springs(
            _with_free_length(free_length, math.radians(other)), norm="rms", preload="none", over=q
        )
        assert there.residual.rms > fit.residual.rms


def _midpoints(low, high, count=4000):
    """Least squares over these come within 1e-7 of an integral."""
    return low + (high - low) * (np.arange(count) + 0.5) / count


def _torsion(free_angle):
    return Mechanism(ARM, springs=SpringMount(TorsionSpring(1.0, free_angle=free_angle), JointTravel()))


@pytest.mark.parametrize(
    ("half", "least_squares", "its_worst", "minimax", "worst"),
    [
        (30, 0.97285151, 0.00938386, 0.96615855, 0.00587943),
        (60, 0.89454652, 0.07074152, 0.86964717, 0.04466698),
        (90, 0.77403683, 0.21585420, 0.72461135, 0.13821685),
    ],
)
def test_a_torsion_spring_against_a_sine(half, least_squares, its_worst, minimax, worst):
    """Closed forms: 3(sin P - P cos P)/P**3, and c P - sin P = sin x - c x with cos x = c."""
    width = math.radians(half)
    mech = _torsion(math.pi / 2)
    fit = balance.fit_springs(
        mech, norm="rms", preload="none", over=_midpoints(math.pi / 2 - width, math.pi / 2 + width)
    )
    # The upright arm falls away from the spring's free angle: rate · phi against G · sin(phi).
    assert _rate(fit) / G == pytest.approx(3 * (math.sin(width) - width * math.cos(width)) / width**3, rel=1e-6)
    assert _rate(fit) / G == pytest.approx(least_squares, abs=2e-7)
    ends = np.array([math.pi / 2 - width, math.pi / 2 + width])
    assert np.max(np.abs(fit.mechanism.holding_torque(ends))) / G == pytest.approx(its_worst, abs=2e-7)

    fit = balance.fit_springs(
        mech, norm="minimax", preload="none", over=np.linspace(math.pi / 2 - width, math.pi / 2 + width, 12001)
    )
    c = _rate(fit) / G
    x = math.acos(c)
    assert c * width - math.sin(width) == pytest.approx(math.sin(x) - c * x, abs=1e-7)
    assert c == pytest.approx(minimax, abs=2e-8)
    assert fit.residual.worst / G == pytest.approx(worst, abs=2e-8)


@pytest.mark.parametrize(
    ("low", "high", "preload", "rate", "its_worst", "worst"),
    [(0, 90, 1.158459, 0.664435, 0.158459, 0.105257), (-30, 60, 0.933299, 0.243200, 0.194613, 0.141628)],
)
def test_a_preloaded_torsion_spring_against_a_cosine(low, high, preload, rate, its_worst, worst):
    """20001 poses, ends included; recomputed by an independent linear programme and normal equations."""
    low, high = math.radians(low), math.radians(high)
    fit = balance.fit_springs(_torsion(0.0), norm="rms", over=np.linspace(low, high, 20001))
    spring = fit.mechanism.springs[0].spring
    # Positive load drives the angle down, so holding the arm up takes a free angle above the travel.
    assert spring.rate * spring.free_angle / G == pytest.approx(preload, abs=6e-7)
    assert spring.rate / G == pytest.approx(rate, abs=6e-7)
    assert fit.residual.worst / G == pytest.approx(its_worst, abs=6e-7)

    fit = balance.fit_springs(_torsion(0.0), norm="minimax", over=np.linspace(low, high, 20001))
    assert fit.residual.worst / G == pytest.approx(worst, abs=6e-7)
    if low == 0.0:
        spring = fit.mechanism.springs[0].spring
        assert spring.rate / G == pytest.approx(2 / math.pi, abs=1e-6)
        assert spring.rate * spring.free_angle / G == pytest.approx(1.105257, abs=6e-7)


@pytest.mark.parametrize(("low", "high"), [(0.0, math.pi / 2), (-math.pi / 6, math.pi / 3), (0.2, 1.9)])
def test_a_preloaded_torsion_spring_solves_the_normal_equations_of_the_integrals(low, high):
    """Closed form: integrals of 1, q, q**2, cos q and q cos q over the travel."""
    powers = [(high**n - low**n) / n for n in (1, 2, 3)]
    goal = [
        math.sin(high) - math.sin(low),
        high * math.sin(high) + math.cos(high) - low * math.sin(low) - math.cos(low),
    ]
    constant, slope = np.linalg.solve([powers[:2], powers[1:]], goal)
    fit = balance.fit_springs(_torsion(0.0), norm="rms", over=_midpoints(low, high))
    spring = fit.mechanism.springs[0].spring
    assert spring.rate / G == pytest.approx(-slope, rel=1e-6)
    assert spring.rate * spring.free_angle / G == pytest.approx(constant, rel=1e-6)


RADIUS = 0.010
IDEAL = G / (A * B)
Q241 = np.linspace(-SIXTY, SIXTY, 241)


def _pulley(side, shift=0.0):
    """Pulley of 10 mm at the anchor; ``side`` +1: the cable touches it to the left, seen along beta, of its centre."""
    start, turn = ((shift - 0.03, -0.35), "cw") if side > 0 else ((shift + 0.20, 0.60), "ccw")
    disc = Disc(Point("ground", (shift, A)), radius=RADIUS, turn=turn)
    path = Cable(Point("ground", start), disc, Point("arm", (B, 0.0)))
    return SpringMount(ZeroLengthSpring(1.0), path)


@pytest.mark.parametrize(
    ("side", "norm", "strength", "worst"),
    [
        (+1, "rms", 0.8058399, 0.0452884),
        (-1, "rms", 1.2367990, 0.0578831),
        (+1, "minimax", 0.7656208, 0.0318338),
        (-1, "minimax", 1.3030683, 0.0434331),
    ],
)
def test_rate_and_cable_length_behind_a_pulley_at_the_anchor(side, norm, strength, worst):
    """241 poses; recomputed by independent least squares and an independent linear programme."""
    fit = balance.fit_springs(Mechanism(ARM, springs=_pulley(side)), norm=norm, preload="mount", over=Q241)
    assert fit.success
    assert _rate(fit) / IDEAL == pytest.approx(strength, abs=6e-8)
    assert fit.residual.worst / G == pytest.approx(worst, abs=6e-8)


@pytest.mark.parametrize(
    ("side", "shift", "strength", "worst"),
    [
        (+1, -RADIUS, 0.9731765, 0.0044409),
        (-1, +RADIUS, 1.0286457, 0.0067303),
        (+1, -8.92031e-3, 0.9544254, 0.0021573),
        (-1, +8.74894e-3, 1.0532458, 0.0028455),
    ],
)
def test_rate_and_cable_length_behind_a_pulley_beside_the_anchor(side, shift, strength, worst):
    """241 poses; recomputed by independent least squares. The best shifts are given to 1e-8 m."""
    fit = balance.fit_springs(Mechanism(ARM, springs=_pulley(side, shift)), norm="rms", preload="mount", over=Q241)
    assert _rate(fit) / IDEAL == pytest.approx(strength, abs=2e-7)
    assert fit.residual.worst / G == pytest.approx(worst, abs=6e-8)

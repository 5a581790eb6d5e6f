"""Check values of single-pivot balancers: ideal, with free length, with torsion springs, with friction.

Where a test names no other source, its numbers come from an independent computation of the closed
form that stands beside them, made before and apart from this library; they are compared to all
the digits stated.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import linprog

from springpoise import (
    Arm,
    Body,
    ExtensionSpring,
    Friction,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.gravity import STANDARD_GRAVITY, seen_from_base

M, R, A, B = 2.0, 0.35, 0.10, 0.08
G = M * STANDARD_GRAVITY * R
RATE = G / (A * B)  # k a b = m g r (Streit & Gilmore 1989)
ARM = Arm(Body(M, (R, 0.0)))
PATH = Straight(Point("ground", (0.0, A)), Point("arm", (B, 0.0)))
ALL = np.linspace(-math.pi, math.pi, 1441)


def _balanced(**fields):
    return Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(RATE), PATH), **fields)


class TestIdeal:
    """Closed form: k a b = m g r (Streit & Gilmore 1989)."""

    def test_gravity_torque_and_rate(self):
        assert _balanced().peak_gravity_torque() == pytest.approx(6.864655, abs=5e-7)
        assert pytest.approx(858.081875, abs=5e-7) == RATE

    def test_balanced_at_every_angle(self):
        assert np.max(np.abs(_balanced().holding_torque(ALL))) < 1e-14 * G * 10
        assert np.max(np.abs(_balanced().stiffness(ALL))) < 1e-13 * G * 10
        assert _balanced().equilibria().everywhere

    def test_constant_energy(self):
        # k (a² + b²) / 2
        assert _balanced().energy(ALL) == pytest.approx(7.036271375, abs=5e-10)

    def test_forces(self):
        # k (a + b) and k |a - b|
        load = _balanced().spring_states(ALL)[0].load
        assert load.max() == pytest.approx(154.4547375, abs=5e-8)
        assert load.min() == pytest.approx(17.1616375, abs=5e-8)

    def test_stored_energy(self):
        # swing 2 m g r over the half turn; peak G (a + b)² / (2 a b)
        stored = _balanced().spring_energy(ALL)
        assert stored.max() - stored.min() == pytest.approx(13.72931, abs=5e-6)
        assert stored.max() == pytest.approx(13.900926375, abs=5e-10)

    @pytest.mark.parametrize(
        ("q", "load", "digit"),
        [("0 deg", 95.36305342, 1e-8), ("-90 deg", 134.8414375, 1e-7), ("90 deg", 2.4516625, 1e-7)],
    )
    def test_pivot_load(self, q, load, digit):
        # R = i m g - k (i a - b e^iθ)
        assert _balanced().pivot_load(q) == pytest.approx(load, abs=digit / 2)

    def test_pivot_force_at_all_angles(self):
        force = 1j * M * STANDARD_GRAVITY - RATE * (1j * A - B * np.exp(1j * ALL))
        x, y = _balanced().pivot_force(ALL)
        assert np.allclose(x + 1j * y, force, rtol=0, atol=1e-12)

    def test_springs_own_mass(self):
        # half of an evenly stretched spring of 0.3 kg rides at the arm's end: k a b = g (m r + m_s b / 2)
        heavy = Mechanism(Arm([Body(M, (R, 0)), Body(0.15, (B, 0))]))
        assert heavy.peak_gravity_torque() / (A * B) == pytest.approx(872.79185, abs=5e-6)

    @pytest.mark.parametrize(
        ("degrees", "residual"),
        [(1, 0.01745307100), (2, 0.03490481287), (5, 0.08723877473), (10, 0.1743114855)],
    )
    def test_tilt_in_the_plane(self, degrees, residual):
        mech = _balanced()
        tilted = seen_from_base(f"{degrees} deg")
        worst = np.max(np.abs(mech.holding_torque(np.linspace(-math.pi, math.pi, 36001), tilted)))
        # the sampled peak of a sinusoid falls short by (step / 2)² / 2 at most
        assert worst / G == pytest.approx(2 * math.sin(math.radians(degrees) / 2), rel=5e-9)
        assert worst / G == pytest.approx(residual, rel=1e-8)

    @pytest.mark.parametrize(
        ("degrees", "residual"),
        [(1, 0.0001523048), (2, 0.0006091730), (5, 0.003805301908), (10, 0.01519224699)],
    )
    def test_tilt_out_of_the_plane(self, degrees, residual):
        # gravity in the plane of motion shrinks to g cos(ψ): residual 1 - cos(ψ)
        tipped = (0.0, -STANDARD_GRAVITY * math.cos(math.radians(degrees)))
        worst = np.max(np.abs(_balanced().holding_torque(ALL, tipped)))
        assert worst / G == pytest.approx(1 - math.cos(math.radians(degrees)), rel=1e-10)
        assert worst / G == pytest.approx(residual, rel=5e-7)

    def test_any_mismatch_is_a_sinusoid(self):
        # residual torque Im(D e^iθ) with D = -Σ k conj(a) b - i g M, any springs and masses
        rng = np.random.default_rng(3)
        a, b, c = (rng.uniform(-0.3, 0.3, (3, 2)) for _ in range(3))
        k, m = rng.uniform(100, 900, 3), rng.uniform(0.5, 3, 3)
        mounts = [
            SpringMount(ZeroLengthSpring(k[i]), Straight(Point("ground", a[i]), Point("arm", b[i]))) for i in range(3)
        ]
        mech = Mechanism(Arm([Body(m[i], c[i]) for i in range(3)]), springs=mounts)
        za, zb, zc = (p @ [1, 1j] for p in (a, b, c))
        d = -np.sum(k * za.conj() * zb) - 1j * STANDARD_GRAVITY * np.sum(m * zc)
        net = mech.gravity_torque(ALL) + mech.spring_torque(ALL)
        assert np.allclose(net, np.imag(d * np.exp(1j * ALL)), rtol=0, atol=1e-12 * abs(d) * 10)
        assert abs(net).max() == pytest.approx(abs(d), rel=1e-5)


def _worst_of(fit, unit, target):
    return float(np.max(np.abs(unit @ np.atleast_1d(fit) - target)))


def least_squares(unit, target):
    return np.linalg.lstsq(unit, target, rcond=None)[0]


def minimax(unit, target):
    """Coefficients and the least greatest deviation, by a linear program."""
    n = unit.shape[1]
    ones = np.ones((len(target), 1))
    found = linprog(
        np.r_[np.zeros(n), 1.0],
        A_ub=np.block([[unit, -ones], [-unit, -ones]]),
        b_ub=np.r_[target, -target],
        bounds=[(None, None)] * n + [(0, None)],
    )
    return found.x[:n], found.x[n]


class TestFreeLength:
    """Springs of free length l0 between a ground anchor above the pivot and the arm, ψ from 30 to 150 deg.

    τ = k a b sin ψ' (1 - l0/d) with d² = a² + b² - 2 a b cos ψ', ψ' = ψ + δ, δ the skew of the
    attachment; ψ is measured from the upright. The stated numbers are fits to samples every quarter degree.
    """

    PSI = np.radians(np.linspace(30.0, 150.0, 481))

    def _unit(self, free, skew=0.0):
        """Spring torque at the rate of an ideal spring, over G: the column of a fit."""
        at = (B * math.cos(skew), -B * math.sin(skew))
        path = Straight(Point("ground", (0.0, A)), Point("arm", at))
        mech = Mechanism(ARM, springs=SpringMount(ExtensionSpring(RATE, free_length=free), path))
        q = math.pi / 2 - self.PSI
        return mech.spring_torque(q)[:, None] / G, -mech.gravity_torque(q) / G

    @pytest.mark.parametrize(
        ("share", "ls", "ls_worst", "mm", "mm_worst"),
        [
            (0.10, 1.181820, 0.119987, 1.254868, 0.096498),
            (0.20, 1.426271, 0.295903, 1.684088, 0.259010),
            (0.25, 1.577133, 0.415035, 2.031523, 0.390556),
        ],
    )
    def test_best_rates(self, share, ls, ls_worst, mm, mm_worst):
        unit, target = self._unit(share * (A + B))
        fit = least_squares(unit, target)
        assert fit[0] == pytest.approx(ls, abs=6e-7)
        assert _worst_of(fit, unit, target) == pytest.approx(ls_worst, abs=6e-7)
        fit, worst = minimax(unit, target)
        assert fit[0] == pytest.approx(mm, abs=6e-7)
        assert worst == pytest.approx(mm_worst, abs=6e-7)

    @pytest.mark.parametrize(
        ("free", "skew", "ls", "worst", "rms"),
        [(0.018, 4.360434, 1.181487, 0.045623, 0.0194919), (0.036, 9.258551, 1.427946, 0.110003, 0.0458516)],
    )
    def test_skewed_attachment(self, free, skew, ls, worst, rms):
        unit, target = self._unit(free, math.radians(skew))
        fit = least_squares(unit, target)
        assert fit[0] == pytest.approx(ls, abs=6e-7)
        assert _worst_of(fit, unit, target) == pytest.approx(worst, abs=6e-7)
        assert math.sqrt(np.mean((unit @ fit - target) ** 2)) == pytest.approx(rms, abs=6e-8)

    def test_free_lengths_that_cancel(self):
        # Σ k l = 0 over springs between the same points: a wound spring and one of "negative" free length
        mounts = [
            SpringMount(ExtensionSpring(RATE / 2, free_length=0.01), PATH),
            SpringMount(ExtensionSpring(RATE / 2, free_length=0.005, initial_tension=RATE / 2 * 0.015), PATH),
        ]
        mech = Mechanism(ARM, springs=mounts)
        assert np.max(np.abs(mech.holding_torque(ALL))) < 1e-12 * G


class TestTorsionSprings:
    """A torsion spring on the joint against sin φ on ±Φ, φ from the upright."""

    @staticmethod
    def _mechanism(rate=1.0, free_angle=0.0):
        return Mechanism(ARM, springs=SpringMount(TorsionSpring(rate, free_angle=free_angle), JointTravel()))

    @pytest.mark.parametrize(
        ("degrees", "ls", "ls_worst", "mm", "mm_worst"),
        [
            (30, 0.97285151, 0.00938386, 0.96615855, 0.00587943),
            (60, 0.89454652, 0.07074152, 0.86964717, 0.04466698),
            (90, 0.77403683, 0.21585420, 0.72461135, 0.13821685),
        ],
    )
    def test_without_preload(self, degrees, ls, ls_worst, mm, mm_worst):
        limit = math.radians(degrees)
        # least squares in closed form: c = 3 (sin Φ - Φ cos Φ) / Φ³
        assert 3 * (math.sin(limit) - limit * math.cos(limit)) / limit**3 == pytest.approx(ls, abs=5e-9)
        phi, weights = np.polynomial.legendre.leggauss(60)
        phi, weights = limit * phi, np.sqrt(weights)  # an exact integral, so that all digits can be asked for
        mech = self._mechanism(free_angle=math.pi / 2)
        torque, target = mech.spring_torque(math.pi / 2 + phi), mech.gravity_torque(math.pi / 2 + phi) / G
        fit = least_squares((weights * torque)[:, None], -weights * target)
        assert fit[0] == pytest.approx(ls, abs=5e-9)
        dense = np.linspace(-limit, limit, 4001)
        torque, target = mech.spring_torque(math.pi / 2 + dense), -mech.gravity_torque(math.pi / 2 + dense) / G
        assert _worst_of(fit, torque[:, None], target) == pytest.approx(ls_worst, abs=5e-9)
        fit, worst = minimax(torque[:, None], target)
        assert fit[0] == pytest.approx(mm, abs=2e-7)
        assert worst == pytest.approx(mm_worst, abs=1e-7)

    @pytest.mark.parametrize(
        ("low", "high", "preload", "rate", "ls_worst", "mm_worst"),
        [(0, 90, 1.158459, 0.664435, 0.158459, 0.105257), (-30, 60, 0.933299, 0.243200, 0.194613, 0.141628)],
    )
    def test_with_preload(self, low, high, preload, rate, ls_worst, mm_worst):
        # τ = τ0 - κ θ against G cos θ; the stated least squares are sums over 20001 even samples
        low, high = math.radians(low), math.radians(high)
        mech = self._mechanism()

        def columns(q):
            return np.stack([np.ones_like(q), mech.spring_torque(q)], axis=1), -mech.gravity_torque(q) / G

        unit, target = columns(np.linspace(low, high, 20001))
        fit = least_squares(unit, target)
        assert fit == pytest.approx([preload, rate], abs=6e-7)
        assert _worst_of(fit, unit, target) == pytest.approx(ls_worst, abs=6e-7)
        fit, worst = minimax(unit[::5], target[::5])
        assert worst == pytest.approx(mm_worst, abs=1e-6)
        if low == 0.0:
            assert fit == pytest.approx([1.105257, 2 / math.pi], abs=2e-5)
        # and as one spring wound by τ0/κ at horizontal
        wound = self._mechanism(rate=G * fit[1], free_angle=fit[0] / fit[1])
        dense = np.linspace(low, high, 4001)
        assert np.max(np.abs(wound.holding_torque(dense))) / G == pytest.approx(mm_worst, abs=1e-6)


class TestFriction:
    def test_journal(self):
        # μ r_b R, at straight down
        mech = _balanced(friction=Friction(pivot_friction=0.1, pivot_radius="5 mm"))
        assert mech.friction_band("-90 deg") == pytest.approx(0.06742071875, abs=5e-12)

    def test_hold_window(self):
        # |D| = 0.1 G: an arm that is 10 % under-balanced is held by 0.3 N·m up to arccos(0.3 / (0.1 G))
        mech = Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(0.9 * RATE), PATH), friction=Friction(0.3))
        edge = math.radians(64.08602195)
        assert math.acos(0.3 / (0.1 * G)) == pytest.approx(edge, abs=1e-10)
        for q in (edge, -edge):
            assert abs(mech.holding_torque(q)) == pytest.approx(mech.friction_band(q), rel=1e-9)
            assert abs(mech.holding_torque(1.01 * q)) < 0.3 < abs(mech.holding_torque(0.99 * q))

    def test_payload_window(self):
        # ± Tc / (g r)
        mech = _balanced(friction=Friction("0.3 N*m")).with_payload(0.08740424683, Point("arm", (R, 0)))
        assert mech.holding_torque(0.0) == pytest.approx(mech.friction_band(0.0), rel=1e-9)

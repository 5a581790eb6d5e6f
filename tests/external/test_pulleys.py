"""Cables over discs in balancers: exact one-disc geometry, the pulley error, and friction numbers.

Where a test names no other source, its numbers come from an independent computation of the closed
form that stands beside them, made before and apart from this library; they are compared to all
the digits stated.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    ConstantForceSpring,
    Disc,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.gravity import STANDARD_GRAVITY

M, R, A, B = 2.0, 0.35, 0.10, 0.08
G = M * STANDARD_GRAVITY * R
RATE = G / (A * B)
ARM = Arm(Body(M, (R, 0.0)))
THETA = np.radians(np.linspace(-60.0, 60.0, 241))
RADIUS = 0.01
# In the formulas, s = +1 is a cable that comes up on the disc's left and over its top; s = -1 is
# one that comes down on its left and under it.
TURN = {1: "cw", -1: "ccw"}


def _cable(sense, radius=RADIUS, shift=0.0):
    """From a spring straight below or above the disc's left side, round the disc above the pivot, to the arm."""
    disc = Disc(Point("ground", (shift, A)), radius=radius, turn=TURN[sense])
    return Cable(Point("ground", (shift - radius, A - sense)), disc, Point("arm", (B, 0)))


def _rigid(cable, at=0.0, extension=None):
    """Length that does not stretch, so that the extension is ``d`` (or as given) at an angle."""
    disc = cable.discs[0]
    x, y = disc.centre.at
    d = math.hypot(B * math.cos(at) - x, B * math.sin(at) - y) if extension is None else extension
    return cable.length(ARM, at) - d


def _torque(cables, share=1.0):
    mounts = [SpringMount(ZeroLengthSpring(RATE * share), c, rigid_length=_rigid(c)) for c in cables]
    return Mechanism(ARM, springs=mounts).spring_torque(THETA)


def _worst(torque):
    return np.max(np.abs(torque - G * np.cos(THETA))) / G


@pytest.mark.parametrize("sense", [1, -1])
@pytest.mark.parametrize("radius", [0.002, 0.01, 0.03])
def test_length_in_closed_form(sense, radius):
    """L = sqrt(d² - ρ²) - s ρ α + const with α = β + s arccos(ρ/d), from the tangent to the circle."""
    b = B * np.exp(1j * THETA) - 1j * A
    d, beta = np.abs(b), np.unwrap(np.angle(b))
    alpha = beta + sense * np.arccos(radius / d)
    expected = np.sqrt(d**2 - radius**2) - sense * radius * alpha
    length = _cable(sense, radius).length(ARM, THETA)
    assert np.ptp(length - expected) < 1e-14
    # one metre of straight run to the disc's left side, where α is π or -π
    assert length - expected == pytest.approx(1.0 + radius * math.pi, abs=1e-13)


@pytest.mark.parametrize("sense", [1, -1])
def test_gradient_is_minus_the_moment_arm(sense):
    cable = _cable(sense)
    b = B * np.exp(1j * THETA)
    alpha = np.angle(b - 1j * A) + sense * np.arccos(RADIUS / np.abs(b - 1j * A))
    contact = 1j * A + RADIUS * np.exp(1j * alpha)
    pull = (contact - b) / np.abs(contact - b)
    arm = np.imag(np.conj(b) * pull)
    assert np.allclose(cable.gradient(ARM, THETA)[0], -arm, rtol=0, atol=1e-15)


class TestPulleyError:
    """The balanced arm with its spring behind a disc of radius 10 mm, θ from -60 to 60 deg."""

    @pytest.mark.parametrize(("sense", "residual"), [(1, 0.1097421), (-1, 0.1071124)])
    def test_nothing_corrected(self, sense, residual):
        # extension = d at θ = 0
        assert _worst(_torque([_cable(sense)])) == pytest.approx(residual, abs=6e-8)

    @pytest.mark.parametrize("sense", [1, -1])
    def test_error_per_millimetre(self, sense):
        # first order in ρ: 1.085 % of G for a millimetre
        assert _worst(_torque([_cable(sense, 1e-6)])) / 1e-6 == pytest.approx(10.85, abs=0.005)

    def _columns(self, cable):
        """Torque = k L p - (k Lref) p: two columns of a fit, made with springs of unit rate and unit pull."""
        mech = Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(1.0), cable))
        pull = Mechanism(ARM, springs=SpringMount(ConstantForceSpring(1.0), cable))
        return np.stack([mech.spring_torque(THETA), pull.spring_torque(THETA)], axis=1)

    @pytest.mark.parametrize(("sense", "factor", "residual"), [(1, 0.8058399, 0.0452884), (-1, 1.2367990, 0.0578831)])
    def test_refit_by_least_squares(self, sense, factor, residual):
        columns = self._columns(_cable(sense))
        fit = np.linalg.lstsq(columns, G * np.cos(THETA), rcond=None)[0]
        assert fit[0] / RATE == pytest.approx(factor, abs=6e-8)
        assert _worst(columns @ fit) == pytest.approx(residual, abs=6e-8)

    @pytest.mark.parametrize(("sense", "factor", "residual"), [(1, 0.7656208, 0.0318338), (-1, 1.3030683, 0.0434331)])
    def test_refit_by_minimax(self, sense, factor, residual):
        from scipy.optimize import linprog

        columns = self._columns(_cable(sense)) / G * [RATE, RATE * A]
        target, ones = np.cos(THETA), np.ones((len(THETA), 1))
        found = linprog(
            [0, 0, 1],
            A_ub=np.block([[columns, -ones], [-columns, -ones]]),
            b_ub=np.r_[target, -target],
            bounds=[(None, None)] * 2 + [(0, None)],
        )
        assert found.x[0] == pytest.approx(factor, abs=6e-8)
        assert found.x[2] == pytest.approx(residual, abs=6e-8)

    @pytest.mark.parametrize(("sense", "factor", "residual"), [(1, 0.9731765, 0.0044409), (-1, 1.0286457, 0.0067303)])
    def test_disc_shifted_by_its_radius(self, sense, factor, residual):
        # sideways by e = -s ρ, then refit by least squares
        columns = self._columns(_cable(sense, shift=-sense * RADIUS))
        fit = np.linalg.lstsq(columns, G * np.cos(THETA), rcond=None)[0]
        assert fit[0] / RATE == pytest.approx(factor, abs=6e-8)
        assert _worst(columns @ fit) == pytest.approx(residual, abs=6e-8)

    @pytest.mark.parametrize(
        ("sense", "shift", "factor", "residual"),
        [(1, -8.92031e-3, 0.9544254, 0.0021573), (-1, 8.74894e-3, 1.0532458, 0.0028455)],
    )
    def test_disc_shifted_best(self, sense, shift, factor, residual):
        columns = self._columns(_cable(sense, shift=shift))
        fit = np.linalg.lstsq(columns, G * np.cos(THETA), rcond=None)[0]
        # the shift is stated to six digits
        assert fit[0] / RATE == pytest.approx(factor, abs=3e-7)
        assert _worst(columns @ fit) == pytest.approx(residual, abs=2e-7)

    def test_two_mirrored_springs(self):
        assert _worst(_torque([_cable(1), _cable(-1)], share=0.5)) == pytest.approx(0.0044505, abs=6e-8)

    def test_twin_entry_rollers(self):
        """Two rollers side by side, the cable between them along the mean of its two extreme directions.

        The one or the other is touched; with γ the turn from the entry direction, L - d = ρ γ³/6.
        """
        ends = B * np.exp(1j * THETA[[0, -1]]) - 1j * A
        entry = np.mean(np.angle(ends))
        assert math.degrees(entry) == pytest.approx(-57.1139, abs=6e-5)
        along, across = np.exp(1j * entry), 1j * np.exp(1j * entry)
        start, left, right = 1j * A - along, 1j * A + RADIUS * across, 1j * A - RADIUS * across

        def at(z):
            return Point("ground", (z.real, z.imag))

        cable = Cable(
            at(start),
            Disc(at(left), radius=RADIUS, turn="ccw"),
            Disc(at(right), radius=RADIUS, turn="cw"),
            Point("arm", (B, 0)),
        )
        wraps = cable.wraps(ARM, THETA)
        assert np.all((wraps[0] > 0) != (wraps[1] > 0))
        mech = Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(RATE), cable, rigid_length=1.0))
        assert _worst(mech.spring_torque(THETA)) == pytest.approx(0.0058470, abs=6e-8)

    def test_law_of_twin_entry_rollers(self):
        # L - d = ρ γ³/6 for a small turn γ from the entry direction, here straight down
        radius = 1e-4
        rollers = [Disc(Point("ground", (-s * radius, A)), radius=radius, turn=TURN[s]) for s in (1, -1)]
        cable = Cable(Point("ground", (0.0, A + 1.0)), *rollers, Point("arm", (0.0, -B)))
        for gamma in (-0.1, 0.1):
            q = gamma + math.asin(A / B * math.sin(gamma))  # the triangle of pivot, entry and attachment
            d = abs(-1j * B * np.exp(1j * q) - 1j * A)
            law = radius * abs(gamma) ** 3 / 6
            assert (cable.length(ARM, q) - 1.0 - d) / law == pytest.approx(1.0, abs=0.01)


class Carried:
    """An arm with a third frame, ``"carried"``, that moves with the attachment and stays parallel to ground."""

    joint_count, frames, masses = 1, ("ground", "arm", "carried"), ARM.masses

    def position(self, point, q):
        x, y = ARM.position(Point("arm", (B, 0)) if point.body == "carried" else point, q)
        return (x + point.at[0], y + point.at[1]) if point.body == "carried" else (x, y)

    def jacobian(self, point, q):
        return ARM.jacobian(Point("arm", (B, 0)) if point.body == "carried" else point, q)


@pytest.mark.parametrize("sense", [1, -1])
class TestEqualDiscsAtBothEnds:
    """The cable runs on round a far disc of the same radius and is tied behind it."""

    @staticmethod
    def _cable(sense, frame, centre):
        leaving = np.exp(1j * math.radians(-135.0 if sense == 1 else 45.0))
        tie = complex(*centre) + sense * 1j * RADIUS * leaving + 0.01 * leaving
        near = Disc(Point("ground", (0.0, A)), radius=RADIUS, turn=TURN[sense])
        far = Disc(Point(frame, centre), radius=RADIUS, turn=TURN[sense])
        return Cable(Point("ground", (-RADIUS, A - sense)), near, far, Point(frame, (tie.real, tie.imag)))

    def test_kept_from_turning(self, sense):
        # L = d + const exactly, so the balance is exact
        linkage, cable = Carried(), self._cable(sense, "carried", (0.0, 0.0))
        d = np.abs(B * np.exp(1j * THETA) - 1j * A)
        rest = cable.length(linkage, THETA) - d
        assert np.min(cable.wraps(linkage, THETA)) > 0.1
        assert np.ptp(rest) < 1e-14
        mech = Mechanism(linkage, springs=SpringMount(ZeroLengthSpring(RATE), cable, rigid_length=rest[0]))
        assert np.max(np.abs(mech.holding_torque(THETA))) < 1e-12 * G

    def test_fixed_to_the_arm(self, sense):
        # an exactly linear error of the length: -s ρ θ
        cable = self._cable(sense, "arm", (B, 0.0))
        d = np.abs(B * np.exp(1j * THETA) - 1j * A)
        assert np.min(cable.wraps(ARM, THETA)) > 0.1
        assert np.ptp(cable.length(ARM, THETA) - d + sense * RADIUS * THETA) < 1e-14


class TestCableFriction:
    @pytest.mark.parametrize(
        ("mu", "degrees", "ratio"),
        [(0.1, 90, 1.170088787), (0.1, 180, 1.369107771), (0.2, 180, 1.874456088), (0.15, 90, 1.265692558)],
    )
    def test_sliding(self, mu, degrees, ratio):
        # capstan law e^{μφ} (Euler-Eytelwein)
        disc = Disc(Point("ground", (0, 0)), radius=0.02, turn="cw", sliding_friction=mu)
        up, down = disc.tension_factors(math.radians(degrees))
        assert up == pytest.approx(ratio, abs=6e-10)
        assert down == pytest.approx(1 / ratio, rel=1e-9)

    def test_bearing(self):
        # 2 μ (r_b/ρ) sin(φ/2)
        disc = Disc(Point("ground", (0, 0)), radius=0.01, turn="cw", bearing_friction=0.05, bearing_radius=0.003)
        up, down = disc.tension_factors(math.pi / 2)
        assert up - 1 == pytest.approx(0.02121320344, abs=6e-12)
        assert 1 - down == pytest.approx(0.02121320344, abs=6e-12)

    def test_band_of_the_reference_arm(self):
        # half-band sinh(μ φ) of the spring's torque, bias cosh(μ φ) - 1; μ 0.1, wrap 90 deg
        # at horizontal; the rod is so thin that its radius does not count
        rod = Disc(Point("ground", (0.0, A)), radius=1e-9, turn="cw", sliding_friction=0.1)
        direction = (B - 1j * A) / abs(B - 1j * A)
        start = 1j * A - 0.3 * direction * 1j
        cable = Cable(Point("ground", (start.real, start.imag)), rod, Point("arm", (B, 0)))
        assert cable.wraps(ARM, 0.0)[0] == pytest.approx(math.pi / 2, abs=1e-7)
        mount = SpringMount(ZeroLengthSpring(RATE), cable, rigid_length=_rigid(cable))
        mech = Mechanism(ARM, springs=mount)
        assert mech.friction_band(0.0) == pytest.approx(1.08273728, abs=1e-6)
        assert math.cosh(0.1 * math.pi / 2) - 1 == pytest.approx(0.01236239, abs=6e-9)

    def test_loop_work(self):
        # with a wrap of 90 deg at every pose: 2 sinh(μ π/2) ∫ G cos θ dθ over -60..60 deg and back
        disc = Disc(Point("ground", (0, 0)), radius=0.02, turn="cw", sliding_friction=0.1)
        up, down = disc.tension_factors(math.pi / 2)
        assert (up - down) * G * 2 * math.sin(math.pi / 3) == pytest.approx(3.750711962, abs=6e-9)

    def test_two_discs_multiply(self):
        rods = [Disc(Point("ground", (x, 0.3)), radius=0.02, turn="cw", sliding_friction=0.15) for x in (0.0, 0.2)]
        cable = Cable(Point("ground", (-0.1, 0.0)), *rods, Point("arm", (0.3, 0.0)))
        one, two = cable.wraps(ARM, 0.1)
        band = cable.friction_gradient(ARM, 0.1)[0]
        arm = cable.gradient(ARM, 0.1)[0]
        assert band == pytest.approx(math.sinh(0.15 * (one + two)) * abs(arm), rel=1e-12)
        # a guide point between them changes the geometry, not the law
        guided = Cable(
            Point("ground", (-0.1, 0.0)), rods[0], Point("ground", (0.1, 0.32)), rods[1], Point("arm", (0.3, 0.0))
        )
        assert sum(guided.wraps(ARM, 0.1)) == pytest.approx(one + two, rel=1e-12)
        assert guided.friction_gradient(ARM, 0.1)[0] == pytest.approx(band, rel=1e-12)


def test_torsion_spring_turns_with_ratio():
    spring = TorsionSpring(2.0, free_angle=0.5)
    for ratio in (1.0, -1.0, 2.5):
        mech = Mechanism(ARM, springs=SpringMount(spring, JointTravel(ratio=ratio)))
        assert mech.spring_torque(0.3) == pytest.approx(-ratio * 2.0 * (ratio * 0.3 - 0.5), rel=1e-15)

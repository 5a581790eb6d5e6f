"""The closed form rate · a · b = m · g · r, and its complex form for any directions.

Sources: the scalar law is common knowledge of static balancing (Streit and Gilmore 1989, Perfect
spring equilibrators for rotatable bodies, J. Mech. Transm. Autom. Des. 111(4):451-458); the complex
form follows from the energy of springs of zero free length and is derived here once more, by
sympy. The reference numbers were computed from the closed form. Tolerance 1e-12 of m·g·r: rounding.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
import sympy

from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring, balance

G0 = 9.80665
M, R, A, B = 2.0, 0.35, 0.10, 0.08
RATE = 858.081875
TURN = np.linspace(-math.pi, math.pi, 721)


def _arm(mass=M, com=(R, 0.0)):
    return Arm(Body(mass, com))


@pytest.mark.parametrize("missing", ["rate", "attach_radius", "anchor_height"])
def test_the_reference_instance_for_each_unknown(missing):
    full = {"rate": RATE, "attach_radius": B, "anchor_height": A}
    found = balance.sine_match(_arm(), **{name: value for name, value in full.items() if name != missing})
    assert getattr(found, missing) == pytest.approx(full[missing], rel=1e-12)
    assert found.rate * found.attach_radius * found.anchor_height == pytest.approx(M * G0 * R, rel=1e-12)
    assert np.max(np.abs(found.mechanism.holding_torque(TURN))) <= 1e-12 * M * G0 * R


def test_peak_torque_energy_and_loads_of_the_reference_instance():
    mech = balance.sine_match(_arm(), attach_radius=B, anchor_height=A).mechanism
    assert mech.peak_gravity_torque() == pytest.approx(6.864655, rel=1e-12)
    np.testing.assert_allclose(mech.energy(TURN), 7.036271375, rtol=1e-12)
    load = mech.spring_states(TURN)[0].load
    assert load.max() == pytest.approx(154.4547375, rel=1e-12)
    assert load.min() == pytest.approx(17.1616375, rel=1e-12)
    assert mech.spring_energy(TURN).max() == pytest.approx(13.900926375, rel=1e-12)
    loads = mech.pivot_load(np.array([0.0, -math.pi / 2, math.pi / 2]))
    np.testing.assert_allclose(loads, [95.36305342, 134.8414375, 2.4516625], rtol=1e-9)


@pytest.mark.parametrize(
    ("degrees", "share"), [(1, 0.01745307100), (2, 0.03490481287), (5, 0.08723877473), (10, 0.1743114855)]
)
def test_a_base_tilted_in_the_plane_leaves_twice_the_sine_of_half_the_tilt(degrees, share):
    mech = balance.sine_match(_arm(), attach_radius=B, anchor_height=A).mechanism
    tilt = math.radians(degrees)
    left = mech.holding_torque(
        np.linspace(-math.pi, math.pi, 200_001), gravity=(G0 * math.sin(tilt), -G0 * math.cos(tilt))
    )
    # The peak between two of so many poses is lower by 1e-10 of itself at the most.
    assert np.max(np.abs(left)) / (M * G0 * R) == pytest.approx(share, rel=1e-9)


def test_half_of_the_spring_rides_on_the_arm():
    half = 0.3 * B / 2
    found = balance.sine_match(
        Arm([Body(M, (R, 0)), Body(1.0, (half, 0))]), attach_radius=B, anchor_height=A
    )  # 0.3 kg of spring between the attachments: half of it weighs at each end
    assert found.rate == pytest.approx(872.79185, rel=1e-9)


def test_two_springs_of_half_the_rate():
    found = balance.sine_match(_arm(), attach_radius=B, anchor_height=A, count=2)
    assert found.rate == pytest.approx(RATE / 2, rel=1e-12)
    assert np.max(np.abs(found.mechanism.holding_torque(TURN))) <= 1e-12 * M * G0 * R


def test_an_anchor_below_the_pivot_takes_the_attachment_to_the_other_side():
    found = balance.sine_match(_arm(), attach_radius=B, anchor_height=-A)
    assert found.rate == pytest.approx(RATE, rel=1e-12)
    assert abs(found.attach_angle) == pytest.approx(math.pi)
    assert np.max(np.abs(found.mechanism.holding_torque(TURN))) <= 1e-12 * M * G0 * R


@pytest.mark.parametrize("gravity", [(0.0, -G0), (1.5, -9.4), (-3.0, 4.0)])
def test_the_general_law_with_numbers_from_complex_arithmetic(gravity):
    """sum k conj(a) b = -conj(gravity) M, with several masses, one spring there already, and a tilted base."""
    masses = [(1.2, 0.31 + 0.04j), (0.7, -0.09 + 0.11j), (0.4, 0.22 - 0.17j)]
    moment = sum(m * c for m, c in masses)
    a0, b0, k0 = 0.07 - 0.09j, -0.05 + 0.06j, 130.0
    a1 = 0.11 * cmath.exp(1.9j)
    wanted = -complex(*gravity).conjugate() * moment - k0 * a0.conjugate() * b0
    b1 = wanted / (410.0 * a1.conjugate())

    there = SpringMount(
        ZeroLengthSpring(k0), Straight(Point("arm", (b0.real, b0.imag)), Point("ground", (a0.real, a0.imag)))
    )
    mech = Mechanism(Arm([Body(m, (c.real, c.imag)) for m, c in masses]), springs=there)
    found = balance.sine_match(mech, rate=410.0, anchor_height=0.11, anchor_angle=1.9, gravity=gravity)
    assert found.attach_radius == pytest.approx(abs(b1), rel=1e-12)
    assert found.attach_angle == pytest.approx(cmath.phase(b1), rel=1e-12)
    attached = found.mechanism.springs[-1].path.last.at
    np.testing.assert_allclose(attached, (b1.real, b1.imag), rtol=1e-12)


def test_the_law_from_the_energy_by_sympy():
    """The energy of one spring and one mass, written out by sympy, is constant for the attachment found here."""
    theta = sympy.symbols("theta", real=True)
    turn = sympy.Matrix([[sympy.cos(theta), -sympy.sin(theta)], [sympy.sin(theta), sympy.cos(theta)]])
    com, anchor = (
        sympy.Matrix([sympy.Rational(31, 100), sympy.Rational(-7, 50)]),
        sympy.Matrix([sympy.Rational(-1, 25), sympy.Rational(9, 100)]),
    )
    mass, rate, gravity = sympy.Integer(3), sympy.Integer(700), sympy.Rational(980665, 100000)
    bx, by = sympy.symbols("b_x b_y", real=True)
    apart = turn * sympy.Matrix([bx, by]) - anchor
    energy = mass * gravity * (turn * com)[1] + rate * apart.dot(apart) / 2
    slope = sympy.expand(sympy.diff(energy, theta))
    equations = [slope.coeff(sympy.cos(theta)), slope.coeff(sympy.sin(theta))]
    solution = sympy.solve([sympy.expand(e) for e in equations], [bx, by])
    assert sympy.simplify(slope.subs(solution)) == 0

    found = balance.sine_match(
        _arm(3.0, (0.31, -0.14)),
        rate=700.0,
        anchor_height=float(sympy.sqrt(anchor.dot(anchor))),
        anchor_angle=float(sympy.atan2(anchor[1], anchor[0])),
    )
    np.testing.assert_allclose(
        found.mechanism.springs[0].path.last.at, [float(solution[bx]), float(solution[by])], rtol=1e-12
    )

"""Balanced arms of several links: with the springs stated, the energy is the same at every pose.

The schemes are those of the papers that are named; the numbers follow from the closed forms that
stand beside them, for masses and lengths chosen here, and were first computed apart from this library.
The energy is compared over 2000 random poses, to 1e-12 of the greatest of its terms, which is the
rounding of a sum of a dozen products.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.linkages import FiveBar, FourBar, Link, PlanarChain

G = 9.80665
POSES = 2000


def _spring(rate, first, last):
    """A zero-free-length spring between (body, x, y) and (body, x, y)."""
    return SpringMount(ZeroLengthSpring(rate), Straight(Point(first[0], first[1:]), Point(last[0], last[1:])))


def _constant(mech, q, expected=None):
    """The energy, which must be the same at all poses, and the torque, which must vanish."""
    energy = mech.energy(q)
    scale = np.max(mech.spring_energy(q))
    assert np.ptp(energy) <= 1e-12 * scale
    peak = np.max(np.abs(mech.gravity_torque(q)))
    assert np.max(np.abs(mech.holding_torque(q))) <= 1e-11 * peak
    bare = mech.with_springs([])
    assert np.ptp(bare.energy(q)) > 0.3 * peak  # gravity alone is not balanced
    if expected is not None:
        assert energy.flat[0] == pytest.approx(expected, abs=5e-9)  # as many digits as the number has
    return energy.flat[0]


def _turns(seed, joints):
    return np.random.default_rng(seed).uniform(-math.pi, math.pi, (POSES, joints))


# -------------------------------------------------------------------------------------------
# two links: m = 1.5, 1.0 kg; r = 0.15, 0.12 m; l = 0.30, 0.25 m; M = 0.525, 0.12 kg m

M1, M2 = 1.5 * 0.15 + 1.0 * 0.30, 1.0 * 0.12


def _two_links(**changes):
    upper = {"bodies": Body(1.5, (0.15, 0.0)), "length": 0.30, **changes}
    return PlanarChain([Link("upper", **upper), Link("fore", Body(1.0, (0.12, 0.0)), length=0.25)])


def test_two_links_with_parallelogram():
    # Rahman et al. 1995: a frame carried parallel to the ground makes every link a single arm,
    # k a b = g M; closed form k1 = 572.0545833, k2 = 280.19 N/m
    springs = [
        _spring(572.05458333333333, ("ground", 0.0, 0.10), ("upper", 0.09, 0.0)),
        _spring(280.19, ("upper carried", 0.0, 0.07), ("fore", 0.06, 0.0)),
    ]
    rates = [G * M1 / (0.10 * 0.09), G * M2 / (0.07 * 0.06)]
    assert rates == pytest.approx([572.0545833, 280.19], abs=5e-8)
    mech = Mechanism(_two_links(carried=()), springs=springs)
    expected = sum(0.5 * k * (a * a + b * b) for k, a, b in ((G * M1 / 0.009, 0.10, 0.09), (280.19, 0.07, 0.06)))
    _constant(mech, _turns(1, 2), expected)


def test_two_links_with_a_parallelogram_that_weighs():
    # a bar of 0.2 kg at 0.15 m turns with the link, a coupler of 0.15 kg rides at its far joint
    moment = M1 + 0.2 * 0.15 + 0.15 * 0.30
    assert G * moment / 0.009 == pytest.approx(653.7766667, abs=5e-8)
    chain = _two_links(bodies=[Body(1.5, (0.15, 0.0)), Body(0.2, (0.15, 0.0))], carried=Body(0.15, (0.02, 0.03)))
    springs = [
        _spring(653.77666666666667, ("ground", 0.0, 0.10), ("upper", 0.09, 0.0)),
        _spring(280.19, ("upper carried", 0.0, 0.07), ("fore", 0.06, 0.0)),
    ]
    _constant(Mechanism(chain, springs=springs), _turns(2, 2))
    light = Mechanism(_two_links(carried=()), springs=springs)
    assert np.ptp(light.energy(_turns(2, 2))) > 0.5  # without the bars the same springs are too strong


def test_two_links_with_springs_from_the_ground_and_between_the_links():
    # springs {0-2, 1-2}, stiffness block matrix of Lin, Shieh, Chen 2010; b2 = M2 l1/M1,
    # a = g M1/(k l1), k12 (c1 - l1) c2 = k l1 b2; k = 300 N/m, c1 = 0.36 m, c2 = 0.10 m
    b2, a, between = M2 * 0.30 / M1, G * M1 / (300.0 * 0.30), 300.0 * 0.30 * (M2 * 0.30 / M1) / (0.06 * 0.10)
    assert (b2, a) == pytest.approx((0.06857142857, 0.05720545833), abs=5e-12)
    assert between == pytest.approx(1028.571429, abs=5e-7)
    springs = [
        _spring(300.0, ("ground", 0.0, a), ("fore", b2, 0.0)),
        _spring(between, ("upper", 0.36, 0.0), ("fore", 0.10, 0.0)),
    ]
    _constant(Mechanism(_two_links(), springs=springs), _turns(3, 2), expected=21.69046151)


def test_two_links_with_three_springs():
    # springs {0-1, 0-2, 1-2}: a = g M2/(k b2), k01 a1 b1 = g M1 - k a l1; k = 300 N/m, b2 = 0.10 m
    a = G * M2 / (300.0 * 0.10)
    rest = G * M1 - 300.0 * a * 0.30
    assert a == pytest.approx(0.0392266, abs=5e-8)
    assert rest == pytest.approx(1.61809725, abs=5e-9)
    assert rest / (0.08 * 0.07) == pytest.approx(288.9459375, abs=5e-8)
    springs = [
        _spring(288.9459375, ("ground", 0.0, 0.08), ("upper", 0.07, 0.0)),
        _spring(300.0, ("ground", 0.0, 0.0392266), ("fore", 0.10, 0.0)),
        _spring(1500.0, ("upper", 0.36, 0.0), ("fore", 0.10, 0.0)),
    ]
    _constant(Mechanism(_two_links(), springs=springs), _turns(4, 2))


def test_two_links_with_springs_from_the_ground_only():
    # sum of k b = 0 on the floating link, Deepak and Ananthasuresh 2012; the anchors from two linear equations:
    # k a b + k' a' b' = g M2 and (k a + k' a') l1 = g M1
    matrix = [[200.0 * 0.10, -250.0 * 0.08], [200.0 * 0.30, 250.0 * 0.30]]
    upper, lower = np.linalg.solve(matrix, [G * M2, G * M1])
    assert (upper, lower) == pytest.approx((0.07082580556, 0.01198590556), abs=5e-12)
    springs = [
        _spring(200.0, ("ground", 0.0, upper), ("fore", 0.10, 0.0)),
        _spring(250.0, ("ground", 0.0, lower), ("fore", -0.08, 0.0)),
    ]
    _constant(Mechanism(_two_links(), springs=springs), _turns(5, 2))


# -------------------------------------------------------------------------------------------
# three links: m = 2.0, 1.5, 0.8 kg; r = 0.16, 0.14, 0.10 m; l = 0.32, 0.28, 0.20 m

MASSES, CENTRES, LENGTHS = (2.0, 1.5, 0.8), (0.16, 0.14, 0.10), (0.32, 0.28, 0.20)
N1, N2, N3 = (MASSES[i] * CENTRES[i] + LENGTHS[i] * sum(MASSES[i + 1 :]) for i in range(3))


def _three_links(carried=None):
    return PlanarChain([
        Link(f"link{i}", Body(m, (r, 0.0)), length=l, carried=carried)
        for i, (m, r, l) in enumerate(zip(MASSES, CENTRES, LENGTHS, strict=True), 1)
    ])  # fmt: skip


def test_moments_of_three_links():
    moments = [N1, N2, N3]
    assert moments == pytest.approx([1.056, 0.434, 0.08], abs=1e-15)


def test_three_links_with_parallelograms():
    # Rahman et al. 1995, k a b = g M on every link
    arms = ((0.12, 0.10), (0.10, 0.08), (0.08, 0.06))
    rates = [G * n / (a * b) for n, (a, b) in zip((N1, N2, N3), arms, strict=True)]
    assert rates == pytest.approx([862.9852, 532.0107625, 163.4441667], abs=5e-8)
    bases = ("ground", "link1 carried", "link2 carried")
    springs = [
        _spring(k, (base, 0.0, a), (f"link{i}", b, 0.0))
        for i, (k, base, (a, b)) in enumerate(zip(rates, bases, arms, strict=True), 1)
    ]
    expected = sum(0.5 * k * (a * a + b * b) for k, (a, b) in zip(rates, arms, strict=True))
    _constant(Mechanism(_three_links(carried=()), springs=springs), _turns(6, 3), expected)


def test_three_links_with_four_springs():
    # springs {0-1, 0-3, 1-3, 2-3}, closed form from the same block matrix: a = g M2/(k03 l2), b3 = M3 l2/M2,
    # k13 (c1 - l1) = k03 l1, k23 (c2 - l2) c3 = l2 b3 (k03 + k13), k01 a1 b1 = g M1 - k03 a l1
    l1, l2, _ = LENGTHS
    k03, c1, c2, c3, a1, b1 = 250.0, 0.40, 0.36, 0.09, -0.10, 0.08
    a, b3 = G * N2 / (k03 * l2), N3 * l2 / N2
    k13 = k03 * l1 / (c1 - l1)
    k23 = l2 * b3 * (k03 + k13) / ((c2 - l2) * c3)
    k01 = (G * N1 - k03 * a * l1) / (abs(a1) * b1)
    springs = [
        _spring(abs(k01), ("ground", 0.0, abs(a1) * np.sign(k01)), ("link1", b1, 0.0)),
        _spring(k03, ("ground", 0.0, a), ("link3", b3, 0.0)),
        _spring(k13, ("link1", c1, 0.0), ("link3", b3, 0.0)),
        _spring(k23, ("link2", c2, 0.0), ("link3", c3, 0.0)),
    ]
    _constant(Mechanism(_three_links(), springs=springs), _turns(7, 3))


def test_three_links_with_springs_from_the_ground_only():
    # k = 200 N/m at +0.10 and -0.10 m on link 3, 1200 N/m on link 2 at b = -l2 (200 + 200)/1200
    b2 = -LENGTHS[1] * 400.0 / 1200.0
    assert b2 == pytest.approx(-0.09333333333, abs=5e-12)
    anchors = (0.06834009219, 0.02911349219, 0.01072602344)
    l1, l2, _ = LENGTHS
    matrix = [
        [200.0 * 0.10, -200.0 * 0.10, 0.0],
        [200.0 * l2, 200.0 * l2, 1200.0 * b2],
        [200.0 * l1, 200.0 * l1, 1200.0 * l1],
    ]
    exact = np.linalg.solve(matrix, [G * N3, G * N2, G * N1])
    assert exact == pytest.approx(anchors, abs=5e-12)
    springs = [
        _spring(200.0, ("ground", 0.0, exact[0]), ("link3", 0.10, 0.0)),
        _spring(200.0, ("ground", 0.0, exact[1]), ("link3", -0.10, 0.0)),
        _spring(1200.0, ("ground", 0.0, exact[2]), ("link2", b2, 0.0)),
    ]
    _constant(Mechanism(_three_links(), springs=springs), _turns(8, 3))


# -------------------------------------------------------------------------------------------
# loops


def _five_bar(branch):
    """Links of 0.30 m; the forearm is driven by a bar at the base, whose links weigh too."""
    return FiveBar(
        first_crank=Link("upper", Body(1.5, (0.14, 0.0)), length=0.30),
        second_crank=Link("rear bar", Body(0.3, (0.05, 0.0)), length=0.10),
        # its x axis runs to the joint with the parallel link, behind the elbow
        first_coupler=Link("fore", Body(1.0, (-0.20, 0.0)), length=0.10),
        second_coupler=Link("parallel", Body(0.25, (0.15, 0.0)), length=0.30),
        branch=branch,
    )


def _poses_of(linkage, q, branch):
    """Poses at which the linkage is a parallelogram: its crossed form stands on the other side."""
    x1, y1 = linkage.position(Point("upper", (0.30, 0.0)), q)
    x2, y2 = linkage.position(Point("rear bar", (0.10, 0.0)), q)
    return q[branch * (x1 * y2 - y1 * x2) > 1e-3]


@pytest.mark.parametrize("branch", [1, -1])
def test_five_bar_arm(branch):
    # closed form, elimination of the parallel link: M1 = m1 r1 + m2 l1 + m4 r4, M2 = m2 r2 - m3 r3 - m4 c
    first, second = 1.5 * 0.14 + 1.0 * 0.30 + 0.25 * 0.15, 1.0 * 0.20 - 0.3 * 0.05 - 0.25 * 0.10
    assert (first, second) == pytest.approx((0.5475, 0.16), abs=1e-15)
    k1, k2 = G * first / 0.10**2, G * second / (0.08 * 0.06)
    assert k1 == pytest.approx(536.9140875, abs=5e-8)
    assert k2 == pytest.approx(326.8883333, abs=5e-8)
    springs = [
        _spring(k1, ("ground", 0.0, 0.10), ("upper", 0.10, 0.0)),
        _spring(k2, ("ground", 0.0, -0.08), ("rear bar", 0.06, 0.0)),
    ]
    # the joint of the couplers lies across the way from elbow to bar: on its other side than the shoulder
    linkage = _five_bar(branch)
    q = _poses_of(linkage, _turns(9, 2), -branch)
    upper, bar = linkage.position(Point("upper", (1.0, 0.0)), q), linkage.position(Point("parallel", (1.0, 0.0)), q)
    origin = linkage.position(Point("parallel", (0.0, 0.0)), q)
    assert np.allclose(upper, np.array(bar) - np.array(origin), atol=1e-9)  # parallel links are parallel
    assert len(q) > 500
    mech = Mechanism(linkage, springs=springs)
    expected = 0.5 * k1 * (0.10**2 + 0.10**2) + 0.5 * k2 * (0.08**2 + 0.06**2)
    # near a stretched parallelogram the joint is known less exactly: 1e-3 m² of area leave 1e-13 of the lengths
    energy = mech.energy(q)
    assert np.max(np.abs(energy - expected)) <= 1e-11 * expected


@pytest.mark.parametrize("seed", range(8))
def test_four_bar_with_two_springs(seed):
    # closed form, elimination of the coupler (Deepak and Ananthasuresh 2012): N1 = m1 c1 + m2 l1 - m2 c2 l1/l2,
    # N3 = m3 c3 + m2 c2 l3/l2 with complex centres; two springs balance it exactly, k a b = g |N|, b along arg N
    rng = np.random.default_rng(seed)
    l1, l2, l3 = rng.uniform(0.1, 0.2), rng.uniform(0.3, 0.4), rng.uniform(0.2, 0.35)
    masses = rng.uniform(0.2, 2.0, 3)
    centres = rng.uniform(-0.1, 0.2, 3) + 1j * rng.uniform(-0.1, 0.1, 3)
    pivot = (float(rng.uniform(0.25, 0.4)), float(rng.uniform(-0.1, 0.1)))
    crank, coupler, rocker = (
        Link(name, Body(float(m), (c.real, c.imag)), length=float(l))
        for name, m, c, l in zip(("crank", "coupler", "rocker"), masses, centres, (l1, l2, l3), strict=True)
    )
    linkage = FourBar(crank=crank, coupler=coupler, rocker=rocker, second_pivot=pivot, branch=int(rng.choice([-1, 1])))
    # the rocker's x axis runs to the coupler's joint, as e3 of the closed form does
    n1 = masses[0] * centres[0] + masses[1] * l1 - masses[1] * centres[1] * l1 / l2
    n3 = masses[2] * centres[2] + masses[1] * centres[1] * l3 / l2
    a, b = 0.10, 0.08
    ends = [b * n / abs(n) for n in (n1, n3)]
    springs = [
        _spring(G * abs(n1) / (a * b), ("ground", 0.0, a), ("crank", ends[0].real, ends[0].imag)),
        _spring(G * abs(n3) / (a * b), ("ground", pivot[0], pivot[1] + a), ("rocker", ends[1].real, ends[1].imag)),
    ]
    mech = Mechanism(linkage, springs=springs)
    q = np.concatenate([np.linspace(low + 0.02, high - 0.02, 200) for low, high in linkage.closable()])
    energy = mech.energy(q)
    assert np.ptp(energy) <= 1e-11 * np.max(mech.spring_energy(q))
    assert np.max(np.abs(mech.holding_torque(q))) <= 1e-9 * np.max(np.abs(mech.gravity_torque(q)))
    # the closed form's constant: springs at rest, and what the coupler's weight keeps from the loop's own shift
    shift = masses[1] * centres[1] / l2 * complex(*pivot)
    carried = G * (masses[2] * pivot[1] + shift.imag)
    at_rest = sum(0.5 * G * abs(n) / (a * b) * (a * a + b * b) for n in (n1, n3))
    assert energy[0] == pytest.approx(carried + at_rest, rel=1e-11)

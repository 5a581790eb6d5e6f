"""Chains and loops balanced by springs of zero free length: closed forms, an engine, random rotations.

The layouts are those of the papers that are named. The numbers follow from the closed forms that
stand beside them, for masses and lengths chosen here, and were first computed apart from this
library, to the digits given. MuJoCo referees a chain whose springs the solver found.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Body, Mechanism
from springpoise.balance.chains.chain import ChainSpring, balance_chain
from springpoise.linkages import FiveBar, FourBar, Link, PlanarChain, SpatialChain, SpatialLink

G = 9.80665


def _constant(found, expected=None):
    """Energy and torque of the mechanism itself over random poses, apart from the solver's algebra."""
    mech = found.require().mechanism
    joints = mech.linkage.joint_count
    q = np.random.default_rng(7).uniform(-math.pi, math.pi, (4000, joints))
    energy, springs = mech.energy(q), mech.spring_energy(q)
    assert np.ptp(energy) <= 1e-12 * np.max(springs)
    assert np.max(np.abs(mech.holding_torque(q))) <= 1e-12 * max(1.0, np.max(springs))
    if expected is not None:
        assert energy[0] == pytest.approx(expected, abs=5e-9)


def _rates(found):
    return [spring.rate for spring in found.springs]


# -------------------------------------------------------------------------------------------
# two links: m = 1.5, 1.0 kg; r = 0.15, 0.12 m; l = 0.30, 0.25 m; M = 0.525, 0.12 kg m


def _two(*extra, **changes):
    upper = Link("upper", [Body(1.5, (0.15, 0.0)), *extra], length=0.30, **changes)
    return PlanarChain([upper, Link("fore", Body(1.0, (0.12, 0.0)), length=0.25)])


PARALLELOGRAM = [
    ChainSpring("ground", "upper", start=0.10, end=0.09),
    ChainSpring("upper carried", "fore", start=0.07, end=0.06),
]


def test_parallelogram_makes_each_link_a_single_arm():
    # Rahman et al. 1995, A simple technique to passively gravity-balance articulated mechanisms: k a b = g M
    found = balance_chain(_two(carried=()), springs=PARALLELOGRAM)
    assert _rates(found) == pytest.approx([572.0545833, 280.19], rel=1e-9)
    assert found.count_statement.startswith("2, the least")
    _constant(found)


def test_bar_and_coupler_of_the_parallelogram_weigh_too():
    # M1 grows by 0.2 · 0.15 for the bar and by 0.15 · 0.30 for the coupler at the far joint
    found = balance_chain(_two(Body(0.2, (0.15, 0.0)), carried=Body(0.15, (0.0, 0.0))), springs=PARALLELOGRAM)
    assert _rates(found) == pytest.approx([653.7766667, 280.19], rel=1e-9)
    _constant(found)


def test_two_direct_springs():
    # b2 = M2 l1/M1, a = g M1/(k l1), k12 (c1 - l1) c2 = k l1 b2; stiffness matrix: Lin, Shieh and Chen 2010 (memory)
    found = balance_chain(
        _two(),
        "direct",
        springs=[
            ChainSpring("ground", "fore", rate=300),
            ChainSpring("upper", "fore", start=0.36, end=0.10),
        ],
    )
    first, second = found.springs
    assert first.last.at == pytest.approx((0.06857142857, 0.0), rel=1e-9)
    assert first.first.at == pytest.approx((0.0, 0.05720545833), rel=1e-9)
    assert second.rate == pytest.approx(1028.571429, rel=1e-9)
    _constant(found, 21.69046151)


def test_three_direct_springs_on_two_links():
    # a = g M2/(k b2), k01 a1 b1 = g M1 - k a l1 = 1.61809725 N m, k12 (c1 - l1) c2 = k l1 b2
    found = balance_chain(
        _two(),
        "direct",
        springs=[
            ChainSpring("ground", "upper", start=0.08, end=0.07),
            ChainSpring("ground", "fore", rate=300, end=0.10),
            ChainSpring("upper", "fore", start=0.36, end=0.10),
        ],
    )
    own, far, between = found.springs
    assert far.first.at == pytest.approx((0.0, 0.0392266), rel=1e-9)
    assert own.rate == pytest.approx(288.9459375, rel=1e-9)
    assert own.rate * 0.08 * 0.07 == pytest.approx(1.61809725, rel=1e-9)
    assert between.rate == pytest.approx(1500.0, rel=1e-12)
    assert found.least_count == 2 and "no fewer than 2" in found.count_statement
    _constant(found)


def test_ground_springs_alone_on_two_links():
    # Deepak and Ananthasuresh 2012: without auxiliary bodies; k b + k' b' = 0, anchors from two linear equations
    found = balance_chain(
        _two(),
        "ground",
        springs=[
            ChainSpring("ground", "fore", rate=200, end=0.10),
            ChainSpring("ground", "fore", rate=250),
        ],
    )
    one, other = found.springs
    assert other.last.at == pytest.approx((-0.08, 0.0), rel=1e-12)
    assert one.first.at == pytest.approx((0.0, 0.07082580556), rel=1e-9)
    assert other.first.at == pytest.approx((0.0, 0.01198590556), rel=1e-9)
    _constant(found)


# -------------------------------------------------------------------------------------------
# three links: m = 2.0, 1.5, 0.8 kg; r = 0.16, 0.14, 0.10 m; l = 0.32, 0.28, 0.20 m; M = 1.056, 0.434, 0.08 kg m

MOMENTS = (1.056, 0.434, 0.08)


def _three(carried=None):
    return PlanarChain(
        [
            Link("a", Body(2.0, (0.16, 0.0)), length=0.32, carried=carried),
            Link("b", Body(1.5, (0.14, 0.0)), length=0.28, carried=carried),
            Link("c", Body(0.8, (0.10, 0.0)), length=0.20),
        ]
    )


DIRECT_THREE = [
    ChainSpring("ground", "a", start=0.10, end=0.11),
    ChainSpring("ground", "c", rate=300),
    ChainSpring("a", "c", start=0.40),
    ChainSpring("b", "c", start=0.35, end=0.08),
]


def test_three_links_with_parallelograms():
    found = balance_chain(
        _three(()),
        springs=[
            ChainSpring("ground", "a", start=0.12, end=0.10),
            ChainSpring("a carried", "b", start=0.10, end=0.08),
            ChainSpring("b carried", "c", start=0.08, end=0.06),
        ],
    )
    assert _rates(found) == pytest.approx([862.9852, 532.0107625, 163.4441667], rel=1e-9)
    _constant(found)


def test_three_links_with_springs_across_joints():
    # a = g M2/(k03 l2), b3 = M3 l2/M2, k13 (c1 - l1) = k03 l1, both ends on link 3 at b3,
    # k23 (c2 - l2) c3 = l2 b3 (k03 + k13), k01 a1 b1 = g M1 - k03 a l1
    found = balance_chain(_three(), "direct", springs=DIRECT_THREE)
    k01, k03, k13, k23 = found.springs
    a, b3 = G * MOMENTS[1] / (300 * 0.28), MOMENTS[2] * 0.28 / MOMENTS[1]
    assert k03.first.at == pytest.approx((0.0, a), rel=1e-12)
    assert k03.last.at == pytest.approx((b3, 0.0), rel=1e-12)
    assert k13.rate == pytest.approx(300 * 0.32 / 0.08, rel=1e-12)
    assert k13.last.at == pytest.approx((b3, 0.0), rel=1e-12)
    assert k23.rate == pytest.approx(0.28 * b3 * (300 + k13.rate) / (0.07 * 0.08), rel=1e-12)
    assert k01.rate == pytest.approx((G * MOMENTS[0] - 300 * a * 0.32) / (0.10 * 0.11), rel=1e-12)
    assert found.least_count == 3
    _constant(found)


def test_three_links_with_springs_on_the_ground():
    found = balance_chain(
        _three(),
        "ground",
        springs=[
            ChainSpring("ground", "c", rate=200, end=0.10),
            ChainSpring("ground", "c", rate=200, end=-0.10),
            ChainSpring("ground", "b", rate=1200),
        ],
    )
    assert found.springs[2].last.at == pytest.approx((-0.09333333333, 0.0), rel=1e-9)
    heights = [spring.first.at[1] for spring in found.springs]
    assert heights == pytest.approx([0.06834009219, 0.02911349219, 0.01072602344], rel=1e-9)
    assert found.count_statement.startswith("3, the least")
    _constant(found)


def test_mujoco_finds_the_three_links_in_balance():
    # Tendons of rest length 0 are springs of zero free length; x right, z up, hinges about -y. Tolerance: rounding
    # of spring torques of up to 100 N m.
    mujoco = pytest.importorskip("mujoco")
    found = balance_chain(_three(), "direct", springs=DIRECT_THREE).require()
    sites = {"ground": "", "a": "", "b": "", "c": ""}
    tendons = ""
    for i, spring in enumerate(found.springs):
        for end, point in (("s", spring.first), ("e", spring.last)):
            sites[point.body] += f'<site name="{end}{i}" pos="{point.at[0]!r} 0 {point.at[1]!r}"/>'
        tendons += (
            f'<spatial stiffness="{spring.rate!r}" springlength="0 0"><site site="s{i}"/><site site="e{i}"/></spatial>'
        )
    inner = ""
    for name, mass, r, joint in (("c", 0.8, 0.10, 0.28), ("b", 1.5, 0.14, 0.32), ("a", 2.0, 0.16, 0.0)):
        inner = (
            f'<body pos="{joint} 0 0"><joint axis="0 -1 0"/>{sites[name]}'
            f'<inertial pos="{r} 0 0" mass="{mass}" diaginertia="1e-3 1e-3 1e-3"/>{inner}</body>'
        )
    model = mujoco.MjModel.from_xml_string(
        f'<mujoco><compiler angle="radian"/><option gravity="0 0 -{G}"/>'
        f"<worldbody>{sites['ground']}{inner}</worldbody><tendon>{tendons}</tendon></mujoco>"
    )
    data = mujoco.MjData(model)
    for q in np.random.default_rng(3).uniform(-math.pi, math.pi, (50, 3)):
        data.qpos[:] = q
        mujoco.mj_forward(model, data)
        assert np.max(np.abs(data.qfrc_bias)) > 0.1 or abs(math.cos(q[0])) < 0.1
        assert np.max(np.abs(data.qfrc_passive - data.qfrc_bias)) < 1e-11


# -------------------------------------------------------------------------------------------
# loops


def _five_bar():
    """The arm whose forearm is driven from the base: rear bar 0.10 m behind the pivot, rod parallel to the upper arm."""
    return FiveBar(
        first_crank=Link("upper", Body(1.5, (0.14, 0.0)), length=0.30),
        second_crank=Link("rear", Body(0.3, (0.05, 0.0)), length=0.10),
        first_coupler=Link("fore", Body(1.0, (-0.20, 0.0)), length=0.10),
        second_coupler=Link("rod", Body(0.25, (0.15, 0.0)), length=0.30),
    )


def test_five_bar_has_the_forearm_spring_on_the_rear_bar():
    # M1 = m1 r1 + m2 l1 + m4 r4 = 0.5475, M2 = m2 r2 - m3 r3 - m4 c = 0.16 kg m; pantographs: Shin and Streit 1991
    # (memory). The rear bar points away from the forearm, so its anchor is below the pivot.
    springs = [
        ChainSpring("ground", "upper", start=0.10, end=0.10),
        ChainSpring("ground", "rear", start=-0.08, end=0.06),
    ]
    travel = [("20 deg", "100 deg"), ("120 deg", "190 deg")]  # the second crank turns ahead: branch -1
    linkage = FiveBar(**{**_five_bar_fields(), "branch": -1})
    found = balance_chain(Mechanism(linkage, travel=travel), springs=springs).require()
    assert _rates(found) == pytest.approx([536.9140875, 326.8883333], rel=1e-9)
    assert found.springs[1].last.at == pytest.approx((0.06, 0.0), rel=1e-12)
    q = np.random.default_rng(5).uniform(*np.radians([[20, 120], [100, 190]]), (2000, 2))
    energy = found.mechanism.energy(q)
    assert np.ptp(energy) <= 1e-12 * np.max(found.mechanism.spring_energy(q))
    assert np.max(np.abs(found.mechanism.holding_torque(q))) <= 1e-11
    assert all(math.isfinite(load) for _, load in found.peak_pivot_loads)
    # Without a travel, only the poses count at which the parallelogram is not folded over.
    assert _rates(balance_chain(_five_bar(), springs=springs).require()) == pytest.approx(_rates(found))


def _five_bar_fields():
    linkage = _five_bar()
    return {n: getattr(linkage, n) for n in ("first_crank", "second_crank", "first_coupler", "second_coupler")}


def test_four_bar_needs_a_spring_on_each_ground_pivot():
    # Loop closure takes the coupler out: N1 = m1 c1 + m2 l1 - m2 c2 l1/l2, N3 = m3 c3 + m2 c2 l3/l2, k a b = g |N|,
    # b along arg N; Wongratanaphisan and Cole 2008
    m1, c1, l1 = 1.5, 0.10 + 0.02j, 0.20
    m2, c2, l2 = 0.7, 0.15 + 0.05j, 0.35
    m3, c3, l3 = 0.5, 0.10 - 0.01j, 0.30
    four = FourBar(
        crank=Link("crank", Body(m1, (c1.real, c1.imag)), length=l1),
        coupler=Link("coupler", Body(m2, (c2.real, c2.imag)), length=l2),
        rocker=Link("rocker", Body(m3, (c3.real, c3.imag)), length=l3),
        second_pivot=(0.39, 0.07),
    )
    springs = [
        ChainSpring("ground", "crank", start=0.10, end=0.09),
        ChainSpring("ground", "rocker", start=0.08, end=0.06),
    ]
    found = balance_chain(four, springs=springs).require()
    for spring, n, a, b, pivot in zip(
        found.springs,
        (m1 * c1 + m2 * l1 - m2 * c2 * l1 / l2, m3 * c3 + m2 * c2 * l3 / l2),
        (0.10, 0.08),
        (0.09, 0.06),
        (0j, 0.39 + 0.07j),
        strict=True,
    ):
        assert spring.rate == pytest.approx(G * abs(n) / (a * b), rel=1e-12)
        assert complex(*spring.last.at) == pytest.approx(b * n / abs(n), rel=1e-12)
        assert complex(*spring.first.at) == pytest.approx(pivot + 1j * a, rel=1e-12)
    for low, high in four.closable():
        q = np.linspace(low, high, 2001)[1:-1]
        energy = found.mechanism.energy(q)
        assert np.ptp(energy) <= 1e-12 * np.max(np.abs(found.mechanism.spring_energy(q)))
        inside = q[20:-20]  # levers grow without limit towards a dead point
        assert np.max(np.abs(found.mechanism.holding_torque(inside))) <= 1e-11


# -------------------------------------------------------------------------------------------
# space


def _ball(name, origin, bodies, yaw=0.0):
    """A link on three axes through one point."""
    return [
        SpatialLink(f"{name} first", origin=origin, axis=(0, 0, 1), roll_pitch_yaw=(0, 0, yaw)),
        SpatialLink(f"{name} second", axis=(0, 1, 0)),
        SpatialLink(name, bodies, axis=(1, 0, 0)),
    ]


@pytest.mark.parametrize("layout", ["ground", "direct"])
def test_spherical_joints_are_balanced_for_all_rotations(layout):
    # Deepak and Ananthasuresh 2012: revolute or spherical joints; the same equations hold with rotation matrices in
    # place of angles, which stand here apart from any joint.
    from scipy.spatial.transform import Rotation

    base = np.array([0.1, 0.2, 0.3])
    chain = SpatialChain(
        [*_ball("upper", tuple(base), Body(1.5, (0.15, 0, 0))), *_ball("fore", (0.30, 0, 0), Body(1.0, (0.12, 0, 0)))]
    )
    springs = {
        "ground": [ChainSpring("ground", "fore", rate=200, end=0.10), ChainSpring("ground", "fore", rate=250)],
        "direct": [ChainSpring("ground", "fore", rate=300), ChainSpring("upper", "fore", start=0.36, end=0.10)],
    }[layout]
    found = balance_chain(chain, layout, springs=springs).require()
    heights = [spring.first.at[2] - base[2] for spring in found.springs if spring.first.body == "ground"]
    expected = {"ground": [0.07082580556, 0.01198590556], "direct": [0.05720545833]}[layout]
    assert heights == pytest.approx(expected, rel=1e-9)
    upper, fore = (Rotation.random(2000, random_state=seed) for seed in (1, 2))
    elbow = base + upper.apply([0.30, 0, 0])

    def place(point):
        at = np.array(point.at)
        return {"ground": lambda: at, "upper": lambda: base + upper.apply(at), "fore": lambda: elbow + fore.apply(at)}[
            point.body
        ]()

    energy = G * (1.5 * (base + upper.apply([0.15, 0, 0]))[:, 2] + (elbow + fore.apply([0.12, 0, 0]))[:, 2])
    for spring in found.springs:
        energy = energy + 0.5 * spring.rate * np.sum((place(spring.last) - place(spring.first)) ** 2, axis=1)
    assert np.ptp(energy) <= 1e-12 * np.max(energy)
    _constant(found)

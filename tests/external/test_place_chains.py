"""Placed geometry of several joints: closed forms, a global optimiser, energy by plain NumPy.

A two-link arm with a belt that carries the elbow's frame parallel to the ground; then each link is
balanced like a single arm, rate · a · b = g · |M| (after Rahman, Ramanathan, Seliktar and Harwin
1995, ASME Journal of Mechanical Design; moments added up by hand here).
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import differential_evolution, linprog

from springpoise import Body, ExtensionSpring, FourBar, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.balance import ChainSpring, balance_chain, place
from springpoise.linkages import Link, PlanarChain, SpatialChain, SpatialLink

GRAVITY = 9.80665
UPPER = Link("upper", Body(1.4, (0.16, 0)), length=0.32, carried=Body(0.12, (0, 0)))
FORE = Link("fore", Body(0.9, (0.15, 0)), length=0.26)
ARM = PlanarChain([UPPER, FORE])
M1, M2 = 1.4 * 0.16 + 0.32 * (0.9 + 0.12), 0.9 * 0.15
TRAVEL = [(0.0, 1.4), (-2.1, -0.35)]
Q = np.stack(np.meshgrid(np.linspace(*TRAVEL[0], 9), np.linspace(*TRAVEL[1], 9)), axis=-1).reshape(-1, 2)


def _arm(springs, a1, b1, a2, b2):
    paths = (
        Straight(Point("ground", (0.0, a1)), Point("upper", (b1, 0.0))),
        Straight(Point("upper carried", (0.0, a2)), Point("fore", (b2, 0.0))),
    )
    mounts = [
        SpringMount(one, path, name=name) for one, path, name in zip(springs, paths, ("low", "high"), strict=True)
    ]
    return Mechanism(ARM, springs=mounts, travel=TRAVEL)


BOUNDS = {"a1": (0.08, 0.15), "b1": (0.05, 0.12), "a2": (0.05, 0.10), "b2": (0.04, 0.08)}


@pytest.mark.parametrize("norm", ["minimax", "rms"])
def test_springs_of_zero_free_length_are_placed_exactly(norm):
    found = place(
        lambda **at: _arm([ZeroLengthSpring(400.0)] * 2, **at), knobs=BOUNDS, over=Q, norm=norm, fit="rate"
    ).require()
    v = found.values
    low, high = (mount.spring.rate for mount in found.mechanism.springs)
    assert low * v["a1"] * v["b1"] == pytest.approx(GRAVITY * M1, rel=1e-6)
    assert high * v["a2"] * v["b2"] == pytest.approx(GRAVITY * M2, rel=1e-6)
    assert found.derivatives == "exact"
    assert [joint.name for joint in found.joints] == ["upper", "fore"]
    assert found.residual.worst == max(joint.worst for joint in found.joints) < 1e-6 * GRAVITY * M1


def _energy(q, place, free, rates):
    """Gravity and two straight springs, from scratch [J]."""
    alpha, beta = q[:, 0], q[:, 0] + q[:, 1]
    elbow = 0.32 * np.exp(1j * alpha)
    low = np.abs(place["b1"] * np.exp(1j * alpha) - 1j * place["a1"])
    high = np.abs(place["b2"] * np.exp(1j * beta) - 1j * place["a2"])
    height = 1.4 * 0.16 * np.sin(alpha) + 0.9 * (elbow.imag + 0.15 * np.sin(beta)) + 0.12 * elbow.imag
    stretch = [np.maximum(length - free, 0.0) for length in (low, high)]
    return GRAVITY * height + sum(0.5 * k * x**2 for k, x in zip(rates, stretch, strict=True))


def _torques(q, place, free, rates):
    """Central differences of the energy, shape (2 · poses,)."""
    step = 1e-6
    ends = [q + sign * step * np.eye(2)[i] for i in (0, 1) for sign in (1, -1)]
    e = [_energy(end, place, free, rates) for end in ends]
    return np.concatenate([(e[0] - e[1]), (e[2] - e[3])]) / (2 * step)


def test_springs_with_a_free_length_against_a_global_optimiser():
    """Differential evolution over the geometry, a linear programme for the rates, torques from the energy."""
    free, names = 0.03, ("b1", "b2")
    bounds = {"b1": (0.05, 0.12), "b2": (0.04, 0.08)}
    fixed = {"a1": 0.12, "a2": 0.08}

    def worst(x):
        at = {**fixed, **dict(zip(names, x, strict=True))}
        bare = _torques(Q, at, free, (0.0, 0.0))
        columns = np.stack([_torques(Q, at, free, r) - bare for r in ((1e3, 0.0), (0.0, 1e3))], axis=1)
        ones = np.ones((len(bare), 1))
        found = linprog(
            [0, 0, 1],
            A_ub=np.block([[columns, -ones], [-columns, -ones]]),
            b_ub=np.concatenate([-bare, bare]),
        )
        return found.fun

    coil = ExtensionSpring(400.0, free_length=free)
    found = place(lambda b1, b2: _arm([coil] * 2, **fixed, b1=b1, b2=b2), knobs=bounds, over=Q, fit="rate").require()
    other = differential_evolution(worst, list(bounds.values()), seed=2, tol=1e-8, maxiter=40, popsize=8, polish=False)
    assert found.residual.worst == pytest.approx(other.fun, rel=1e-3)
    assert found.residual.worst <= other.fun * (1 + 1e-5)
    rates = [mount.spring.rate for mount in found.mechanism.springs]
    mine = _torques(Q, {**fixed, **found.values}, free, rates)
    assert np.max(np.abs(mine)) == pytest.approx(found.residual.worst, abs=1e-6)


def test_a_balanced_chain_goes_on_with_real_springs():
    """Ideal springs first, then the same chain with springs of free length: place never leaves more than the mounts it came from."""
    ideal = balance_chain(
        Mechanism(ARM, travel=TRAVEL),
        springs=[
            ChainSpring("ground", "upper", start=0.12, end=0.09),
            ChainSpring("upper carried", "fore", start=0.08, end=0.06),
        ],
    ).require()
    coil = ExtensionSpring(400.0, free_length=0.03)
    hooked = ideal.with_real_springs(coil, seat="hooks", over=Q)
    before = max(joint.worst for joint in hooked.joints)
    found = place(lambda **at: _arm([coil] * 2, **at), knobs=BOUNDS, over=Q, fit="rate").require()
    assert found.residual.worst < 0.5 * before


def test_limits_hold_at_every_joint():
    """Pivot load, energy and packaging, looked up again on the mechanism that came out."""
    coil = ExtensionSpring(400.0, free_length=0.03)
    box = ((0.0, 0.2), (-0.1, 0.2))
    found = place(
        lambda **at: _arm([coil] * 2, **at),
        knobs=BOUNDS,
        over=Q,
        fit="rate",
        pivot_load_limit=51.0,
        stored_energy_limit=8.0,
        keep_in={lambda a1, b1, a2, b2: Point("upper", (b1, 0.0)): box},
        keep_out=[(Point("ground", (0.0, 0.0)), 0.02)],
    ).require()
    assert np.max(found.mechanism.pivot_load(Q)) <= 51.0 * (1 + 1e-6)
    assert np.max(found.mechanism.spring_energy(Q)) <= 8.0 * (1 + 1e-6)
    named = {limit.name: limit for limit in found.limits}
    assert {"pivot load of upper", "pivot load of fore", "stored energy"} <= set(named)
    assert len(named["stored energy"].at) == 2
    held = next(limit for limit in found.limits if limit.name.startswith("low: distance"))
    assert held.margin >= -1e-7
    assert "deg" in str(held)


def test_without_derivatives_a_chain_finds_the_same_place():
    coil = ExtensionSpring(400.0, free_length=0.03)

    def build(b1, b2):
        return _arm([coil] * 2, a1=0.12, a2=0.08, b1=math.floor(1e12 * b1) / 1e12, b2=b2)

    bounds = {"b1": (0.05, 0.12), "b2": (0.04, 0.08)}
    rough = place(build, knobs=bounds, over=Q, fit="rate", starts=2)
    assert rough.derivatives == "none"
    fine = place(lambda b1, b2: _arm([coil] * 2, a1=0.12, a2=0.08, b1=b1, b2=b2), knobs=bounds, over=Q, fit="rate")
    assert rough.residual.worst == pytest.approx(fine.residual.worst, rel=1e-4)


def test_a_four_bar_with_a_spring_on_each_ground_pivot():
    """One joint, a loop: two springs of zero free length, k a b = g |N| for each crank, by loop closure.

    N1 = m1 c1 + m2 l1 - m2 c2 l1/l2, N3 = m3 c3 + m2 c2 l3/l2 (configuration of Wongratanaphisan and
    Cole 2008, Journal of Mechanical Design 130(1):011006; the formulas follow from the loop's closing).
    """
    bar = FourBar(
        crank=Link("crank", Body(0.8, (0.06, 0)), length=0.12),
        coupler=Link("coupler", Body(0.5, (0.10, 0)), length=0.25),
        rocker=Link("rocker", Body(0.9, (0.09, 0)), length=0.20),
        second_pivot=(0.28, 0.0),
        branch=1,
    )
    n1 = 0.8 * 0.06 + 0.5 * 0.12 - 0.5 * 0.10 * 0.12 / 0.25
    n3 = 0.9 * 0.09 + 0.5 * 0.10 * 0.20 / 0.25

    def build(b1, b3):
        return Mechanism(
            bar,
            springs=[
                SpringMount(ZeroLengthSpring(300.0), Straight(Point("ground", (0, 0.08)), Point("crank", (b1, 0)))),
                SpringMount(ZeroLengthSpring(300.0), Straight(Point("ground", (0.28, 0.07)), Point("rocker", (b3, 0)))),
            ],
            travel=(0.4, 1.6),
        )

    found = place(build, knobs={"b1": (0.03, 0.10), "b3": (0.04, 0.12)}, fit="rate").require()
    first, second = (mount.spring.rate for mount in found.mechanism.springs)
    assert first * 0.08 * found.values["b1"] == pytest.approx(GRAVITY * n1, rel=1e-5)
    assert second * 0.07 * found.values["b3"] == pytest.approx(GRAVITY * n3, rel=1e-5)


def test_a_spatial_chain_on_spherical_joints():
    """Springs from the ground alone: k b + k' b' = 0 on the last link, for all rotations.

    Two springs on the last of two links with k b = -k' b' do not couple the links, and their anchors
    a, a' straight above the first joint carry both moments: l1 (k a + k' a') = g M1 and k a b + k' a' b' = g M2
    (the idea is Deepak and Ananthasuresh's, 2012, Journal of Mechanisms and Robotics, doi 10.1115/1.4006521).
    """

    def ball(name, origin, body):
        return [
            SpatialLink(f"{name} yaw", origin=origin, axis=(0, 0, 1)),
            SpatialLink(f"{name} pitch", axis=(0, 1, 0)),
            SpatialLink(name, body, axis=(1, 0, 0)),
        ]

    limb = SpatialChain(
        [*ball("upper", (0, 0, 0), Body(1.4, (0.16, 0, 0))), *ball("fore", (0.32, 0, 0), Body(0.9, (0.15, 0, 0)))]
    )
    m1, m2 = 1.4 * 0.16 + 0.32 * 0.9, 0.9 * 0.15

    def build(first, second, behind):
        springs = [
            SpringMount(ZeroLengthSpring(150.0), Straight(Point("ground", (0, 0, first)), Point("fore", (0.1, 0, 0)))),
            SpringMount(
                ZeroLengthSpring(150.0), Straight(Point("ground", (0, 0, second)), Point("fore", (-behind, 0, 0)))
            ),
        ]
        return Mechanism(limb, springs=springs, travel=[(-1.0, 1.0)] * 6)

    found = place(
        build,
        knobs={"first": (0.02, 0.2), "second": (0.002, 0.05), "behind": (0.05, 0.15)},
        fit="rate",
        norm="rms",
        starts=2,
        over=build(0.1, 0.01, 0.1).poses(60),
    ).require()
    k1, k2 = (mount.spring.rate for mount in found.mechanism.springs)
    v = found.values
    assert k1 * 0.1 == pytest.approx(k2 * v["behind"], rel=1e-4)
    assert 0.32 * (k1 * v["first"] + k2 * v["second"]) == pytest.approx(GRAVITY * m1, rel=1e-4)
    assert k1 * v["first"] * 0.1 - k2 * v["second"] * v["behind"] == pytest.approx(GRAVITY * m2, rel=1e-4)

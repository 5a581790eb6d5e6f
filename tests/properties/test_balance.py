"""Solvers against identities, brute force and independent optimisers, on random arms and springs."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest
import scipy.optimize
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from springpoise import (
    Arm,
    Body,
    CompressionSpring,
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

TURN = np.linspace(-math.pi, math.pi, 361)
lengths = st.floats(0.02, 0.5)
signed = st.floats(-0.5, 0.5)
points = st.tuples(signed, signed)
angles = st.floats(-3.1, 3.1)
moderate = settings(max_examples=40)


@st.composite
def arms(draw):
    bodies = draw(st.lists(st.builds(Body, st.floats(0.1, 5.0), points), min_size=1, max_size=3))
    arm = Arm(bodies)
    assume(math.hypot(*arm.moment) > 0.02)
    return arm


ideal_mounts = st.builds(
    lambda rate, a, b, count: SpringMount(
        ZeroLengthSpring(rate), Straight(Point("ground", a), Point("arm", b)), count=count
    ),
    st.floats(10.0, 500.0),
    points,
    points,
    st.integers(1, 3),
)
gravities = st.tuples(st.floats(-8.0, 8.0), st.floats(-12.0, 12.0)).filter(lambda g: math.hypot(*g) > 1.0)


@moderate
@given(
    arm=arms(),
    there=st.lists(ideal_mounts, max_size=2),
    missing=st.sampled_from(["rate", "attach_radius", "anchor_height"]),
    rate=st.floats(50.0, 3000.0),
    radius=lengths,
    height=signed.filter(lambda h: abs(h) > 0.02),
    anchor_angle=angles,
    count=st.integers(1, 4),
    gravity=gravities,
)
def test_a_sine_match_balances_the_whole_turn(arm, there, missing, rate, radius, height, anchor_angle, count, gravity):
    given_ = {"rate": rate, "attach_radius": radius, "anchor_height": height}
    del given_[missing]
    mech = Mechanism(arm, springs=there, gravity=gravity)
    own = math.hypot(*gravity) * math.hypot(*arm.moment)
    sprung = [float(np.max(np.abs(mech.with_springs(mount).spring_torque(TURN)))) for mount in there]
    lacking = float(np.max(np.abs(mech.holding_torque(TURN))))
    assume(lacking > 1e-3 * own)
    found = balance.sine_match(mech, **given_, anchor_angle=anchor_angle, count=count)
    for name, value in given_.items():
        assert getattr(found, name) == value
    # Beside m·g·r stand the torques of the springs that it has to be the difference of.
    scale = max(own, *sprung, 0.0)
    assert np.max(np.abs(found.mechanism.holding_torque(TURN))) <= 1e-12 * scale
    energy = found.mechanism.energy(TURN)
    assert np.ptp(energy) <= 1e-12 * np.max(np.abs(found.mechanism.spring_energy(TURN)) + scale)
    assert found.residual == balance.residual(found.mechanism)


@moderate
@given(arm=arms(), radius=lengths, height=lengths, long=st.floats(0.2, 5.0), strong=st.floats(0.2, 5.0))
def test_scaled_arms_have_scaled_sine_matches(arm, radius, height, long, strong):
    found = balance.sine_match(arm, attach_radius=radius, anchor_height=height)
    bigger = Arm([Body(b.mass * strong, (b.com[0] * long, b.com[1] * long)) for b in arm.bodies])
    scaled = balance.sine_match(bigger, attach_radius=radius * long, anchor_height=height * long)
    assert scaled.rate == pytest.approx(found.rate * strong / long, rel=1e-12)
    assert math.remainder(scaled.attach_angle - found.attach_angle, 2 * math.pi) == pytest.approx(0.0, abs=1e-9)


# ------------------------------------------------------------------------------------------ fits


@st.composite
def taut_mounts(draw):
    """An extension spring that pulls in every pose: anchor and attachment are far enough apart."""
    height, radius = draw(st.floats(0.10, 0.4)), draw(st.floats(0.10, 0.4))
    assume(abs(height - radius) > 0.05)
    free = draw(st.floats(0.1, 0.95)) * abs(height - radius)
    a, b = draw(st.floats(0.8, 2.4)), draw(st.floats(-0.6, 0.6))
    path = Straight(
        Point("ground", (height * math.cos(a), height * math.sin(a))),
        Point("arm", (radius * math.cos(b), radius * math.sin(b))),
    )
    return SpringMount(ExtensionSpring(100.0, free_length=free), path, count=draw(st.integers(1, 2)))


travels = st.tuples(st.floats(-1.4, -0.2), st.floats(0.2, 1.4))


def _norm(mech, q, norm):
    left = mech.holding_torque(q)
    return float(np.max(np.abs(left)) if norm == "minimax" else np.sqrt(np.mean(left**2)))


def _with_amounts(mech, amounts):
    """Every mount with this rate and effective free length (as a share of the free length)."""
    springs = []
    for mount, (rate, share) in zip(mech.springs, amounts, strict=True):
        free = mount.spring.free_length
        spring = ExtensionSpring(rate, free_length=free, initial_tension=rate * free * (1.0 - share))
        springs.append(attrs.evolve(mount, spring=spring))
    return mech.with_springs(springs)


@moderate
@given(
    arm=arms(),
    mounts=st.lists(taut_mounts(), min_size=1, max_size=3),
    travel=travels,
    norm=st.sampled_from(["minimax", "rms"]),
    preload=st.sampled_from(["spring", "none"]),
    seed=st.integers(0, 2**32 - 1),
)
def test_a_fit_is_the_optimum(arm, mounts, travel, norm, preload, seed):
    mech = Mechanism(arm, springs=mounts, travel=travel)
    q = np.linspace(*travel, 41)
    fit = balance.fit_springs(mech, norm=norm, preload=preload, over=q)
    size = _norm(fit.mechanism, q, norm)
    scale = float(np.max(np.abs(mech.gravity_torque(q))))
    assert fit.settled
    assert (fit.residual.worst if norm == "minimax" else fit.residual.rms) == pytest.approx(size, rel=1e-12)
    assert len(fit.mechanism.springs) + len(fit.left_out) == len(mounts)

    # The same problem set up anew, from holding torques alone, and given to another solver.
    base = mech.with_springs(()).holding_torque(q)
    corners = [1.0, 0.0] if preload == "spring" else [1.0]
    columns = []
    for mount in mounts:
        columns += [
            _with_amounts(mech.with_springs(mount), [(1.0, share)]).holding_torque(q) - base for share in corners
        ]
    matrix = np.stack(columns, axis=1) * 1e3
    if norm == "rms":
        with np.errstate(all="ignore"):
            solved = scipy.optimize.lsq_linear(matrix, -base, bounds=(0, np.inf), tol=1e-14, max_iter=500)
        best = math.sqrt(2 * solved.cost / q.size)
    else:
        ones = np.ones((q.size, 1))
        solved = scipy.optimize.linprog(
            [0.0] * matrix.shape[1] + [1.0],
            A_ub=np.block([[matrix, -ones], [-matrix, -ones]]),
            b_ub=np.concatenate([-base, base]),
            method="highs-ipm",
        )
        best = solved.fun
    assert size == pytest.approx(best, rel=1e-5, abs=1e-6 * scale)

    random = np.random.default_rng(seed)
    for _ in range(20):
        shares = random.uniform(0, 1, len(mounts)) if preload == "spring" else np.ones(len(mounts))
        rates = 10 ** random.uniform(-1, 4, len(mounts))
        assert size <= _norm(_with_amounts(mech, zip(rates, shares, strict=True)), q, norm) + 1e-9 * scale


@pytest.mark.parametrize("norm", ["minimax", "rms"])
@moderate
@given(arm=arms(), mount=taut_mounts(), travel=travels)
def test_no_rate_and_preload_of_a_dense_grid_is_better(norm, arm, mount, travel):
    mech = Mechanism(arm, springs=mount, travel=travel)
    q = np.linspace(*travel, 31)
    fit = balance.fit_springs(mech, norm=norm, over=q)
    base = mech.with_springs(()).holding_torque(q)
    whole, ideal = (_with_amounts(mech, [(1.0, share)]).holding_torque(q) - base for share in (1.0, 0.0))
    reach = 4 * np.max(np.abs(base)) / max(np.max(np.abs(ideal)), 1e-9)
    rates = np.linspace(0, reach, 301)[:, None, None]
    shares = np.linspace(0, 1, 101)[None, :, None]
    left = base + rates * (shares * whole + (1 - shares) * ideal)
    sizes = np.max(np.abs(left), axis=-1) if norm == "minimax" else np.sqrt(np.mean(left**2, axis=-1))
    size = _norm(fit.mechanism, q, norm)
    assert size <= sizes.min() * (1 + 1e-9)
    assert size >= sizes.min() - 0.03 * np.max(np.abs(base))


@moderate
@given(
    arm=arms(),
    free_length=st.floats(0.02, 0.3),
    compression=st.booleans(),
    norm=st.sampled_from(["minimax", "rms"]),
    rigid=st.floats(0.0, 0.3),
    tension=st.sampled_from([0.0, 3.0]),
)
@example(arm=Arm(Body(2.0, (0.35, 0))), free_length=0.1, compression=False, norm="minimax", rigid=0.0, tension=0.0)
def test_a_cut_to_length_fit_is_the_best_and_claims_what_it_gives_even_where_springs_go_slack(
    arm, free_length, compression, norm, rigid, tension
):
    spring = (
        CompressionSpring(500.0, free_length=free_length, solid_length=0.4 * free_length)
        if compression
        else ExtensionSpring(500.0, free_length=free_length, initial_tension=tension)
    )
    height = -0.3 if compression else 0.3
    path = Straight(Point("ground", (0.02, height)), Point("arm", (0.25, 0.0)))
    mech = Mechanism(arm, springs=SpringMount(spring, path, rigid_length=rigid), travel=(-1.5, 1.5))
    q = mech.poses(41)
    fit = balance.fit_springs(mech, norm=norm, preload="mount", over=q)
    claimed = fit.residual.worst if norm == "minimax" else fit.residual.rms
    assert claimed == pytest.approx(_norm(fit.mechanism, q, norm), rel=1e-12)
    assert claimed <= _norm(mech.with_springs(()), q, norm) * (1 + 1e-9)
    assert fit.success or fit.left_out or not fit.settled
    if tension > 0 and not compression:
        return  # the load jumps where the spring goes slack: there is no telling where the best cut lies

    length = path.length(arm, q)
    low, high = (length.min() - free_length, length.min() - spring.solid_length) if compression else (0.0, length.max())
    peak = np.max(np.abs(mech.gravity_torque(q)))
    for cut in np.linspace(low, high, 40):
        # Linear in the rate as long as the lengths stay: two rates tell them all.
        one, two = (
            mech.with_springs(
                SpringMount(attrs.evolve(spring, rate=rate), path, rigid_length=float(cut))
            ).holding_torque(q)
            for rate in (1.0, 2.0)
        )
        rates = np.geomspace(1e-2, 1e5, 200)[:, None]
        left = one + (rates - 1.0) * (two - one)
        sizes = np.max(np.abs(left), axis=1) if norm == "minimax" else np.sqrt(np.mean(left**2, axis=1))
        assert claimed <= sizes.min() + 0.01 * peak


@moderate
@given(
    arm=arms(),
    mounts=st.lists(taut_mounts(), min_size=2, max_size=3),
    torsion=st.booleans(),
    norm=st.sampled_from(["minimax", "rms"]),
)
def test_the_order_of_mounts_does_not_matter(arm, mounts, torsion, norm):
    if torsion:
        mounts = [*mounts, SpringMount(TorsionSpring(1.0), JointTravel())]
    mech = Mechanism(arm, springs=mounts, travel=(-1.0, 1.0))
    one = balance.fit_springs(mech, norm=norm)
    other = balance.fit_springs(mech.with_springs(mounts[::-1]), norm=norm)
    scale = one.residual.peak_gravity_torque
    for kind in ("worst", "rms") if norm == "rms" else ("worst",):
        assert getattr(one.residual, kind) == pytest.approx(getattr(other.residual, kind), rel=1e-5, abs=1e-6 * scale)


@moderate
@given(
    arm=arms(), mounts=st.lists(taut_mounts(), min_size=1, max_size=2), long=st.floats(0.2, 5), strong=st.floats(0.2, 5)
)
def test_scaled_mechanisms_have_scaled_fits(arm, mounts, long, strong):
    def scaled(mount):
        ends = [Point(p.body, (p.at[0] * long, p.at[1] * long)) for p in (mount.path.first, mount.path.last)]
        spring = ExtensionSpring(1.0, free_length=mount.spring.free_length * long)
        return SpringMount(spring, Straight(*ends), count=mount.count)

    mech = Mechanism(arm, springs=mounts, travel=(-1.0, 1.0))
    bigger = Arm([Body(b.mass * strong, (b.com[0] * long, b.com[1] * long)) for b in arm.bodies])
    other = Mechanism(bigger, springs=[scaled(mount) for mount in mounts], travel=(-1.0, 1.0))
    one, two = (balance.fit_springs(m, norm="rms").residual for m in (mech, other))
    scale = one.peak_gravity_torque
    assert two.rms == pytest.approx(one.rms * long * strong, rel=1e-7, abs=1e-9 * scale * long * strong)
    one, two = (balance.fit_springs(m).residual for m in (mech, other))
    assert two.worst == pytest.approx(one.worst * long * strong, rel=1e-6, abs=1e-8 * scale * long * strong)
    assert two.worst_fraction == pytest.approx(one.worst_fraction, rel=1e-6, abs=1e-8)

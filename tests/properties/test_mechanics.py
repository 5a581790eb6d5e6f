"""What must be true of any mechanism: energy, symmetry, dimensions, broadcasting."""

from __future__ import annotations

import math
import warnings
from itertools import combinations

import attrs
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from springpoise import (
    Arm,
    Body,
    Cable,
    CompressionSpring,
    ConstantForceSpring,
    Disc,
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
from springpoise.springs import ScaledSpring

QS = np.linspace(-3.0, 3.0, 25)
METHODS = (
    "gravity_torque",
    "spring_torque",
    "holding_torque",
    "stiffness",
    "friction_band",
    "energy",
    "spring_energy",
    "pivot_load",
    "pivot_force",
)

places = st.floats(-0.5, 0.5).map(lambda x: round(x, 3))
pairs = st.tuples(places, places)
rates = st.floats(20.0, 2000.0)


@st.composite
def springs(draw):
    """A spring whose coordinate is a length."""
    rate = draw(rates)
    kind = draw(st.integers(0, 4))
    if kind == 0:
        return ZeroLengthSpring(rate)
    if kind == 1:
        tension = draw(st.sampled_from([0.0, 5.0, 30.0]))
        return ExtensionSpring(rate, free_length=draw(st.floats(0.0, 0.4)), initial_tension=tension, longest=1.5)
    if kind == 2:
        return CompressionSpring(rate, free_length=draw(st.floats(0.2, 1.2)), solid_length=0.1)
    if kind == 3:
        return ConstantForceSpring(draw(st.floats(1.0, 100.0)))
    return ScaledSpring(ExtensionSpring(rate, free_length=0.1), draw(st.floats(0.1, 3.0)))


@st.composite
def cables(draw):
    """Any cable in general position: where parts of it meet or line up exactly, rounding decides what is touched."""
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))

    def point(body):
        return Point(body, tuple(rng.uniform(-0.5, 0.5, 2)))

    along = []
    for is_disc in draw(st.lists(st.sampled_from([True, True, False]), min_size=1, max_size=3)):
        rubs = draw(
            st.sampled_from([{}, {"sliding_friction": 0.12}, {"bearing_friction": 0.1, "bearing_radius": 0.004}])
        )
        centre = point(draw(st.sampled_from(["ground", "arm"])))
        turn = draw(st.sampled_from(["cw", "ccw"]))
        along.append(Disc(centre, radius=float(rng.uniform(0.005, 0.05)), turn=turn, **rubs) if is_disc else centre)
    return Cable(point("ground"), *along, point("arm"))


straights = st.builds(lambda a, b: Straight(Point("ground", a), Point("arm", b)), pairs, pairs)
straight_mounts = st.builds(
    SpringMount, springs(), straights, count=st.integers(1, 3), rigid_length=st.sampled_from([0.0, 0.05, -0.02])
)
cable_mounts = st.builds(SpringMount, springs(), cables(), count=st.integers(1, 2))
torsion_mounts = st.builds(
    SpringMount,
    st.builds(TorsionSpring, st.floats(0.1, 20.0), free_angle=st.floats(-6.0, 6.0), working_range=st.none()),
    st.builds(JointTravel, ratio=st.sampled_from([1.0, -1.0, 2.5])),
)
arms = st.builds(
    lambda bodies: Arm([Body(m, c) for m, c in bodies], length=0.6),
    st.lists(st.tuples(st.floats(0.0, 5.0), pairs), min_size=1, max_size=3),
)
frictions = st.builds(Friction, st.floats(0.0, 1.0), pivot_friction=st.floats(0.0, 0.2), pivot_radius=st.just(0.01))


def mechanisms(mounts):
    lists = st.lists(mounts, min_size=1, max_size=3)
    return st.builds(lambda arm, s, f: Mechanism(arm, springs=s, friction=f), arms, lists, frictions)


any_mechanism = mechanisms(st.one_of(straight_mounts, cable_mounts, torsion_mounts))


def _scale(mech):
    """A torque that no term of the mechanism exceeds by much [N·m]."""
    loads = [np.nanmax(np.abs(s.load), initial=0.0) for s in mech.spring_states(QS)]
    return 1.0 + mech.peak_gravity_torque() + sum(3.0 * m.count * x for m, x in zip(mech.springs, loads, strict=True))


def _is_apart(path, linkage, q):
    """Poses at which no two neighbours along a path are close: there, higher derivatives have no bound."""
    if isinstance(path, JointTravel):
        return np.full(q.shape, True)
    along = path.along if isinstance(path, Cable) else (path.first, path.last)
    centres = [item.centre if isinstance(item, Disc) else item for item in along]
    radii = [item.radius if isinstance(item, Disc) else 0.0 for item in along]
    places = [linkage.position(point, q) for point in centres]
    gaps = [
        np.hypot(places[i][0] - places[j][0], places[i][1] - places[j][1]) - radii[i] - radii[j]
        for i, j in combinations(range(len(along)), 2)
    ]
    return np.min(np.broadcast_arrays(*gaps, q + 10.0), axis=0) > 0.1


def _smooth(mech, q, reach):
    """Poses around which no spring goes slack, no cable leaves a disc, and no two parts of a path are close."""
    fine = np.all([_is_apart(mount.path, mech.linkage, q) for mount in mech.springs], axis=0)
    around = q[:, None] + np.linspace(-reach, reach, 9)
    for mount in mech.springs:
        x = mount.spring_length(mech.linkage, around) + 0.0 * around
        marks = [mount.spring.load(x) == 0.0, np.isnan(x)]
        if isinstance(mount.path, Cable):
            marks += [wrap + 0.0 * around > 0.0 for wrap in mount.path.wraps(mech.linkage, around)]
            fine &= np.max(np.abs(np.diff(x, axis=1)), axis=1) < 0.5 * reach
        fine &= np.all([np.all(m == m[:, :1], axis=1) for m in marks], axis=0) & ~np.any(np.isnan(x), axis=1)
    return fine


@given(mechanisms(st.one_of(straight_mounts, torsion_mounts)))
@settings(max_examples=60)
def test_torque_is_minus_the_slope_of_the_energy_by_complex_step(mech):
    apart = np.full(QS.shape, True)  # where two ends meet, a load that does not vanish has no direction
    for mount in mech.springs:
        apart &= isinstance(mount.path, JointTravel) | (mount.path.length(mech.linkage, QS) > 1e-3)
    q = QS + 1e-40j
    energy = sum(mount.energy(mech.linkage, q) for mount in mech.springs)
    assert np.max(np.abs(mech.spring_torque(QS) + energy.imag / 1e-40)[apart], initial=0.0) <= 1e-12 * _scale(mech)
    for body in mech.linkage.bodies:
        _, y = mech.linkage.position(Point("arm", body.com), q)
        energy = energy + 9.80665 * body.mass * y
    assert np.max(np.abs(mech.holding_torque(QS) - energy.imag / 1e-40)[apart], initial=0.0) <= 1e-12 * _scale(mech)
    assert np.max(np.abs(mech.energy(QS) - energy.real)) <= 1e-12 * _scale(mech)


@given(mechanisms(cable_mounts))
@settings(max_examples=60)
def test_torque_is_minus_the_slope_of_the_energy_of_cables(mech):
    h = 1e-3
    weights = [1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280]
    slope = sum(w * mech.spring_energy(QS + k * h) for k, w in zip(range(-4, 5), weights, strict=True)) / h
    fine = _smooth(mech, QS, 20 * h)
    assert np.max(np.abs(slope + mech.spring_torque(QS))[fine], initial=0.0) <= 1e-7 * _scale(mech)


@given(any_mechanism)
@settings(max_examples=60)
def test_stiffness_is_the_slope_of_the_holding_torque(mech):
    h = 1e-3
    weights = [1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280]
    slope = sum(w * mech.holding_torque(QS + k * h) for k, w in zip(range(-4, 5), weights, strict=True)) / h
    fine = _smooth(mech, QS, 20 * h)
    assert np.max(np.abs(slope - mech.stiffness(QS))[fine], initial=0.0) <= 1e-6 * _scale(mech)


@given(any_mechanism)
@settings(max_examples=40)
def test_array_equals_element_by_element(mech):
    grid = QS[:24].reshape(2, 3, 4)
    for method in METHODS:
        whole = getattr(mech, method)(grid)
        single = np.array([getattr(mech, method)(float(q)) for q in grid.ravel()])
        if method == "pivot_force":
            whole = np.stack(whole, axis=-1)
        assert whole.shape[:3] == grid.shape
        np.testing.assert_allclose(whole.reshape(single.shape), single, rtol=1e-13, atol=1e-12 * _scale(mech))
    for states, alone in zip(mech.spring_states(grid), mech.spring_states(float(grid[0, 1, 2])), strict=True):
        for name in ("length", "load", "energy", "margin"):
            assert getattr(states, name).shape == grid.shape
            assert type(getattr(alone, name)) is float
            assert getattr(states, name)[0, 1, 2] == pytest.approx(
                getattr(alone, name), rel=1e-12, abs=1e-12, nan_ok=True
            )


def _changed(part, **by_kind):
    """A path with its points, radii and turns changed."""
    point, radius, turn = by_kind["point"], by_kind["radius"], by_kind["turn"]
    if isinstance(part, Point):
        return Point(part.body, point(part))
    if isinstance(part, Disc):
        small = {"bearing_radius": radius(part.bearing_radius)}
        return attrs.evolve(
            part, centre=_changed(part.centre, **by_kind), radius=radius(part.radius), turn=turn(part.turn), **small
        )
    if isinstance(part, Straight):
        return Straight(_changed(part.first, **by_kind), _changed(part.last, **by_kind))
    return Cable(*(_changed(item, **by_kind) for item in part.along))


def _mirrored(mech):
    """The mirror image x -> -x; an arm at q is the image's arm at pi - q, its own frame mirrored in y."""

    def point(p):
        return (-p.at[0], p.at[1]) if p.body == "ground" else (p.at[0], -p.at[1])

    def path(p):
        if isinstance(p, JointTravel):
            return attrs.evolve(p, ratio=-p.ratio)
        return _changed(p, point=point, radius=lambda r: r, turn={"cw": "ccw", "ccw": "cw"}.__getitem__)

    def mount(m):
        if isinstance(m.path, JointTravel):  # ratio (q - free) turns into -ratio (pi - q') - free'
            free = m.spring.free_angle - m.path.ratio * math.pi
            assume(abs(free) < 12.0)
            return attrs.evolve(m, path=path(m.path), spring=attrs.evolve(m.spring, free_angle=free))
        return attrs.evolve(m, path=path(m.path))

    bodies = [Body(b.mass, (b.com[0], -b.com[1])) for b in mech.linkage.bodies]
    return attrs.evolve(mech, linkage=Arm(bodies), springs=[mount(m) for m in mech.springs])


@given(any_mechanism)
@settings(max_examples=50)
def test_mirror_image(mech):
    image = _mirrored(mech)
    q = np.linspace(-2.9, 2.9, 30)
    near = _smooth(mech, q, 1e-6)  # at the very brink of slack, rounding decides
    signs = {"gravity_torque": -1.0, "spring_torque": -1.0, "holding_torque": -1.0}
    for method in METHODS[:-1]:
        ours, theirs = getattr(mech, method)(q), getattr(image, method)(math.pi - q)
        assert np.allclose(
            ours[near], signs.get(method, 1.0) * theirs[near], rtol=1e-9, atol=1e-9 * _scale(mech), equal_nan=True
        ), method
    x, y = mech.pivot_force(q)
    fx, fy = image.pivot_force(math.pi - q)
    assert np.allclose(
        np.array([x, y])[:, near], np.array([-fx, fy])[:, near], atol=1e-9 * _scale(mech), equal_nan=True
    )


def _dimensions(mech, a, b):
    """All lengths by a, all forces by b; gravity is scaled for the weights, masses stay."""
    powers = {"rate": b / a, "free_length": a, "initial_tension": b, "longest": a, "solid_length": a, "pull": b}

    def spring(s):
        if isinstance(s, ScaledSpring):
            return ScaledSpring(spring(s.spring), s.factor)
        if isinstance(s, TorsionSpring):
            return attrs.evolve(s, rate=s.rate * a * b)
        return attrs.evolve(s, **{n: getattr(s, n) * f for n, f in powers.items() if getattr(s, n, None) is not None})

    def path(p):
        if isinstance(p, JointTravel):
            return p
        return _changed(p, point=lambda q: (q.at[0] * a, q.at[1] * a), radius=lambda r: r * a, turn=lambda t: t)

    def mount(m):
        rigid = m.rigid_length * (1.0 if isinstance(m.path, JointTravel) else a)
        return attrs.evolve(m, spring=spring(m.spring), path=path(m.path), rigid_length=rigid)

    friction = Friction(
        mech.friction.coulomb * a * b,
        pivot_friction=mech.friction.pivot_friction,
        pivot_radius=mech.friction.pivot_radius * a,
    )
    return Mechanism(
        Arm([Body(body.mass, (body.com[0] * a, body.com[1] * a)) for body in mech.linkage.bodies]),
        springs=[mount(m) for m in mech.springs],
        friction=friction,
        gravity=(0.0, mech.gravity[1] * b),
    )


@given(any_mechanism, st.sampled_from([0.25, 3.0, 40.0]), st.sampled_from([0.1, 7.0]))
@settings(max_examples=50)
def test_results_scale_by_their_dimension(mech, a, b):
    scaled = _dimensions(mech, a, b)
    near = _smooth(mech, QS, 1e-6)
    for method in METHODS[:-1]:
        factor = b if method == "pivot_load" else a * b
        ours, theirs = getattr(mech, method)(QS), getattr(scaled, method)(QS) / factor
        assert np.allclose(ours[near], theirs[near], rtol=1e-9, atol=1e-9 * _scale(mech), equal_nan=True), method
    for ours, theirs in zip(mech.spring_states(QS), scaled.spring_states(QS), strict=True):
        turns = isinstance(mech.springs[int(ours.name.split()[1]) - 1].path, JointTravel)
        length, force = (1.0, a * b) if turns else (a, b)
        assert np.allclose(ours.length, theirs.length / length, rtol=1e-12, atol=1e-12, equal_nan=True)
        assert np.allclose(ours.load[near], theirs.load[near] / force, atol=1e-9 * _scale(mech), equal_nan=True)
        assert np.allclose(ours.margin, theirs.margin / length, rtol=1e-12, atol=1e-12, equal_nan=True)


@given(any_mechanism)
@settings(max_examples=30)
def test_order_of_springs_does_not_matter(mech):
    turned = mech.with_springs(mech.springs[::-1])
    for method in METHODS:
        np.testing.assert_allclose(
            getattr(mech, method)(QS), getattr(turned, method)(QS), rtol=1e-12, atol=1e-12 * _scale(mech)
        )


@given(any_mechanism)
@settings(max_examples=40)
def test_friction_bands_add_up_and_are_not_negative(mech):
    bare = attrs.evolve(mech, friction=Friction())
    alone = [attrs.evolve(bare, springs=m).friction_band(QS) for m in mech.springs]
    joint = mech.friction.coulomb + mech.friction.pivot_friction * mech.friction.pivot_radius * mech.pivot_load(QS)
    for band in (*alone, joint):
        assert not np.any(band < 0.0)
    np.testing.assert_allclose(mech.friction_band(QS), sum(alone) + joint, rtol=1e-12, atol=1e-12)


@given(any_mechanism, st.floats(0.0, 10.0), pairs)
@settings(max_examples=30)
def test_payload_adds_its_weight(mech, mass, at):
    loaded = mech.with_payload(mass, Point("arm", at))
    x, _ = mech.linkage.position(Point("arm", at), QS)
    np.testing.assert_allclose(
        loaded.holding_torque(QS), mech.holding_torque(QS) + 9.80665 * mass * x, atol=1e-12 * (_scale(mech) + 100)
    )
    np.testing.assert_array_equal(loaded.spring_torque(QS), mech.spring_torque(QS))


@given(any_mechanism)
@settings(max_examples=30)
def test_poses_that_are_not_finite_give_nan(mech):
    bad = np.array([0.3, math.nan, math.inf, -math.inf, 0.3])
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for method in METHODS:
            values = np.array(getattr(mech, method)(bad))
            assert np.all(np.isnan(values[..., 1:4]))
            for pose in (math.nan, math.inf, -math.inf):
                assert np.all(np.isnan(getattr(mech, method)(pose)))
            good = np.array(getattr(mech, method)(0.3))
            np.testing.assert_allclose(values[..., 0], good, rtol=1e-12, atol=1e-12 * _scale(mech))
        for state in (*mech.spring_states(bad[1:4]), *mech.spring_states(math.nan)):
            assert np.all(np.isnan([state.length, state.load, state.energy, state.margin]))

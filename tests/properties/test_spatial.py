"""Random chains in space: the short way against the long one, energy and torque, carriers, builds, scaling.

Every chain has branches, revolute, prismatic, fixed and coupled joints, axes at right angles and
any others. Tolerances are some hundred roundings of the largest term.
"""

from __future__ import annotations

import math

import array_api_strict
import attrs
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import (
    Body,
    ExtensionSpring,
    Feedforward,
    Mechanism,
    PlanarChain,
    Point,
    SpatialChain,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.gravity import seen_from_base, seen_from_base_in_space
from springpoise.linkages import Coupling, Link, SpatialLink
from springpoise.linkages.spatial_frames import along, from_roll_pitch_yaw
from springpoise.tape import Dual

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=25)
RIGHT = math.pi / 2


def _vector(rng, size):
    return tuple(float(c) for c in rng.uniform(-size, size, 3))


def _turn(rng):
    kind = rng.integers(3)
    if kind == 0:
        return (0.0, 0.0, 0.0)
    if kind == 1:
        return tuple(float(k) * RIGHT for k in rng.integers(-2, 3, 3))
    return _vector(rng, 3.0)


def _axis(rng):
    if rng.integers(2):
        axis = [0.0, 0.0, 0.0]
        axis[rng.integers(3)] = float(rng.choice([-1.0, 1.0]))
        return tuple(axis)
    return _vector(rng, 1.0)


def _chain(rng, count=None):
    """A tree of links; the first is always driven."""
    links, driven = [], []
    for i in range(count or int(rng.integers(2, 8))):
        kind = "revolute" if i == 0 else str(rng.choice(["revolute", "revolute", "prismatic", "fixed"]))
        follows = None
        if kind != "fixed" and driven and rng.uniform() < 0.25:
            names = rng.choice(driven, size=min(len(driven), int(rng.integers(1, 3))), replace=False)
            follows = Coupling({str(n): float(rng.uniform(-2, 2)) for n in names}, offset=float(rng.uniform(-1, 1)))
        bodies = [Body(float(rng.uniform(0.1, 4.0)), _vector(rng, 0.3)) for _ in range(rng.integers(0, 3))]
        parent = None if i == 0 else str(rng.choice(["ground", *(k.name for k in links), *(k.name for k in links)]))
        links.append(
            SpatialLink(
                f"k{i}",
                bodies,
                parent=parent,
                origin=_vector(rng, 0.5),
                roll_pitch_yaw=_turn(rng),
                axis=_axis(rng),
                joint=kind,
                follows=follows,
            )
        )
        if links[-1].is_driven:
            driven.append(f"k{i}")
    return SpatialChain(links)


def _pose(rng, chain):
    return tuple(float(c) for c in rng.uniform(-2.0, 2.0, chain.joint_count))


def _q(pose):
    return pose[0] if len(pose) == 1 else pose


def _mechanism(rng, chain):
    mounts = []
    for _ in range(2):
        first, last = (Point(str(rng.choice(chain.frames)), _vector(rng, 0.4)) for _ in range(2))
        spring = (
            ZeroLengthSpring(float(rng.uniform(50, 900)))
            if rng.integers(2)
            else ExtensionSpring(float(rng.uniform(50, 900)), free_length=0.1, initial_tension=2.0)
        )
        mounts.append(SpringMount(spring, Straight(first, last), moving_mass=float(rng.uniform(0, 0.3))))
    return Mechanism(chain, springs=mounts)


def _scale(chain, gravity):
    """A bound on all torques: every mass at the farthest reach of the chain, times two for couplings."""
    reach = sum(math.hypot(*link.origin) + 4.0 for link in chain.links)
    return 4.0 * float(chain.mass) * math.hypot(*gravity) * reach + 1.0


@few
@given(seeds)
def test_the_short_way_agrees_with_the_sum_over_all_masses(seed):
    rng = np.random.default_rng(seed)
    chain = _chain(rng)
    q, gravity = _q(_pose(rng, chain)), _vector(rng, 10.0)
    totals = np.zeros(chain.joint_count)
    for mass, at in chain.masses:
        for joint, move in enumerate(chain.jacobian(at, q)):
            totals[joint] += mass * np.dot(gravity, move)
    assert np.max(np.abs(totals - chain.gravity_torques(q, gravity))) <= 1e-15 * _scale(chain, gravity)


@few
@given(seeds)
def test_the_jacobian_is_the_derivative_of_the_position(seed):
    rng = np.random.default_rng(seed)
    chain = _chain(rng)
    pose, point = _pose(rng, chain), Point(str(rng.choice(chain.frames)), _vector(rng, 0.5))
    moves = chain.jacobian(point, _q(pose))
    for moved in range(chain.joint_count):
        seeded = [Dual(angle, 1.0 if joint == moved else 0.0) for joint, angle in enumerate(pose)]
        place = chain.position(point, _q(tuple(seeded)))
        slopes = [c.slope if isinstance(c, Dual) else 0.0 for c in place]
        assert moves[moved] == pytest.approx(slopes, abs=1e-13)


@few
@given(seeds)
def test_every_body_is_rigid_and_right_handed(seed):
    rng = np.random.default_rng(seed)
    chain = _chain(rng)
    q = _q(_pose(rng, chain))
    for frame in chain.frames:
        origin = np.array(chain.position(Point(frame, (0, 0, 0)), q))
        axes = [np.array(chain.position(Point(frame, tuple(e)), q)) - origin for e in np.eye(3)]
        assert np.array(axes) @ np.array(axes).T == pytest.approx(np.eye(3), abs=1e-13)
        assert np.linalg.det(axes) == pytest.approx(1.0, abs=1e-13)


@few
@given(seeds)
def test_torque_is_minus_the_slope_of_the_energy(seed):
    rng = np.random.default_rng(seed)
    mech = _mechanism(rng, _chain(rng))
    pose = np.array(_pose(rng, mech.linkage))
    program = _energy_program(mech)
    slopes = program.derivative().replay(*map(float, pose))
    ours = np.atleast_1d(mech.holding_torque(pose if pose.size > 1 else float(pose[0])))
    assert ours == pytest.approx(np.atleast_1d(slopes), abs=1e-12 * _scale(mech.linkage, mech.gravity) + 1e-9)


def _energy_program(mech):
    from springpoise.tape import record

    names = tuple(f"q{i}" for i in range(mech.linkage.joint_count))
    return record(lambda *q: mech.energy(_q(q)), inputs=names)


@few
@given(seeds)
def test_carriers_agree(seed):
    rng = np.random.default_rng(seed)
    mech = _mechanism(rng, _chain(rng))
    count = mech.linkage.joint_count
    poses = rng.uniform(-2.0, 2.0, (4, count))
    poses = poses if count > 1 else poses[:, 0]
    many = mech.holding_torque(poses)
    tight = 1e-13 * np.max(np.abs(many)) + 1e-12
    fast, blocked = Feedforward(mech).compile(), Feedforward(mech).compile(arrays=True)
    columns = poses.T if count > 1 else [poses]
    np.testing.assert_allclose(np.stack(np.atleast_2d(blocked(*columns)), axis=-1).reshape(many.shape), many, 0, tight)
    for i, pose in enumerate(poses):
        one = mech.holding_torque(pose if count > 1 else float(pose))
        np.testing.assert_allclose(one, many[i], 0, tight)
        np.testing.assert_allclose(fast(*map(float, np.atleast_1d(pose))), many[i], 0, tight)
    strict = mech.holding_torque(array_api_strict.asarray(poses))
    np.testing.assert_allclose(np.asarray(strict), many, 0, tight)


@few
@given(seeds)
def test_stiffness_is_symmetric_and_the_slope_of_the_holding_torque(seed):
    rng = np.random.default_rng(seed)
    mech = Mechanism(_chain(rng))
    count = mech.linkage.joint_count
    pose = np.array(_pose(rng, mech.linkage))
    matrix = np.reshape(mech.stiffness(pose if count > 1 else float(pose[0])), (count, count))
    scale = _scale(mech.linkage, mech.gravity)
    assert matrix == pytest.approx(matrix.T, abs=1e-13 * scale)
    step = 1e-5
    for j in range(count):
        there, back = (
            mech.holding_torque(pose + s * np.eye(count)[j] if count > 1 else float(pose[0] + s)) for s in (step, -step)
        )
        # central differences err by h² times the third derivative
        assert np.atleast_1d(there - back) / (2 * step) == pytest.approx(matrix[:, j], abs=1e-8 * scale)


@few
@given(seeds)
def test_a_turned_base_is_turned_gravity(seed):
    rng = np.random.default_rng(seed)
    chain = _chain(rng)
    turn = _vector(rng, 3.0)
    on_base = [
        attrs.evolve(link, parent="base" if parent == "ground" else parent)
        for link, parent in zip(chain.links, chain._parents(), strict=True)
    ]
    turned = SpatialChain([SpatialLink("base", parent="ground", joint="fixed", roll_pitch_yaw=turn), *on_base])
    q = _q(_pose(rng, chain))
    seen = seen_from_base_in_space(turn)
    tight = 1e-15 * _scale(chain, seen)
    assert turned.gravity_torques(q, (0.0, 0.0, -9.80665)) == pytest.approx(chain.gravity_torques(q, seen), abs=tight)


@few
@given(seeds)
def test_builds_with_scattered_fields_are_the_builds_one_by_one(seed):
    rng = np.random.default_rng(seed)
    builds, poses = 3, 2

    def column(low, high):
        return rng.uniform(low, high, (builds, 1))

    numbers = [column(-0.5, 0.5) for _ in range(3)] + [column(0.5, 2.0), column(-1, 1), column(-0.3, 0.3)]
    sizes = [column(0.1, 3.0), column(-0.2, 0.2)]

    def made(origin, roll, yaw, x, y, z, mass, com):
        return SpatialChain(
            [
                SpatialLink("a", Body(mass, (com, 0.1, com)), axis=(x, y, z), roll_pitch_yaw=(roll, 0.0, yaw)),
                SpatialLink(
                    "b", Body(1.0, (0.1, com, 0.2)), origin=(origin, 0.0, 0.3), axis=(0, y, x), joint="prismatic"
                ),
                SpatialLink("c", Body(mass, (0.1, 0.0, 0.2)), roll_pitch_yaw=(roll, roll, roll), joint="fixed"),
            ]
        )

    together = made(*numbers, *sizes)
    q = rng.uniform(-1.0, 1.0, (poses, 2))
    point = Point("c", (0.1, 0.2, 0.3))
    torques = Mechanism(together).gravity_torque(q)
    assert torques.shape == (builds, poses, 2)
    for i in range(builds):
        alone = made(*(float(n[i, 0]) for n in numbers), *(float(s[i, 0]) for s in sizes))
        assert torques[i] == pytest.approx(Mechanism(alone).gravity_torque(q), abs=1e-12)
        for mine, its in zip(together.position(point, q), alone.position(point, q), strict=True):
            assert np.broadcast_to(mine, (builds, poses))[i] == pytest.approx(np.broadcast_to(its, poses), abs=1e-13)
    assert together == made(*numbers, *sizes)


@few
@given(seeds, st.sampled_from(["xz", "yz", "xy"]))
def test_a_chain_in_a_plane_is_the_planar_chain(seed, plane):
    rng = np.random.default_rng(seed)
    count = int(rng.integers(1, 5))
    lengths, masses, coms = (
        rng.uniform(0.1, 0.6, count),
        rng.uniform(0.1, 3.0, count),
        rng.uniform(-0.3, 0.3, (count, 2)),
    )
    flat = PlanarChain(
        [Link(f"k{i}", Body(float(masses[i]), tuple(coms[i])), length=float(lengths[i])) for i in range(count)]
    )
    axis = {"xz": (0, -1, 0), "yz": (1, 0, 0), "xy": (0, 0, 1)}[plane]

    def lifted(x, y):
        return {"xz": (x, 0.0, y), "yz": (0.0, x, y), "xy": (x, y, 0.0)}[plane]

    deep = SpatialChain(
        [
            SpatialLink(
                f"k{i}",
                Body(float(masses[i]), lifted(*coms[i])),
                origin=lifted(float(lengths[i - 1]) if i else 0.0, 0.0),
                axis=axis,
            )
            for i in range(count)
        ]
    )
    q = rng.uniform(-3.0, 3.0, count) if count > 1 else float(rng.uniform(-3.0, 3.0))
    gravity = seen_from_base(float(rng.uniform(-3, 3)))
    spring = ZeroLengthSpring(200.0)
    ends = [(str(rng.choice(deep.frames)), rng.uniform(-0.3, 0.3, 2)) for _ in range(2)]
    flat_mech = Mechanism(flat, springs=SpringMount(spring, Straight(*(Point(n, tuple(at)) for n, at in ends))))
    deep_mech = Mechanism(deep, springs=SpringMount(spring, Straight(*(Point(n, lifted(*at)) for n, at in ends))))
    ours = deep_mech.holding_torque(q, lifted(*gravity))
    assert ours == pytest.approx(flat_mech.holding_torque(q, gravity), abs=1e-11)


@few
@given(seeds)
def test_scaled_mechanisms_give_scaled_torques(seed):
    rng = np.random.default_rng(seed)
    length, mass = 3.0, 0.5
    revolute = [attrs.evolve(k, joint="revolute" if k.joint == "prismatic" else k.joint) for k in _chain(rng).links]

    def grown(link):
        bodies = [Body(mass * b.mass, tuple(length * c for c in b.com)) for b in link.bodies]
        return attrs.evolve(link, bodies=bodies, origin=tuple(length * c for c in link.origin))

    small, large = SpatialChain(revolute), SpatialChain([grown(k) for k in revolute])
    q, gravity = _q(_pose(rng, small)), _vector(rng, 10.0)
    want = [length * mass * torque for torque in small.gravity_torques(q, gravity)]
    assert large.gravity_torques(q, gravity) == pytest.approx(want, abs=1e-14 * _scale(large, gravity))


@few
@given(seeds)
def test_frames_along_an_axis(seed):
    rng = np.random.default_rng(seed)
    axis = np.array(_vector(rng, 1.0))
    axis /= np.linalg.norm(axis)
    for given_axis in (axis, *np.eye(3), *-np.eye(3), (0.0, 1e-9, -1.0)):
        frame = np.array(along(tuple(float(c) for c in given_axis)))
        assert frame @ frame.T == pytest.approx(np.eye(3), abs=1e-14)
        assert np.linalg.det(frame) == pytest.approx(1.0, abs=1e-14)
        assert frame[:, 2] == pytest.approx(given_axis, abs=0)
    assert set(np.ravel(from_roll_pitch_yaw(RIGHT, -RIGHT, 2 * RIGHT))) <= {0.0, 1.0, -1.0}

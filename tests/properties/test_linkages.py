"""What must be true of any planar linkage with any springs: derivatives, power, statics, carriers."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import (
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Feedforward,
    Friction,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.linkages import Coupling, Dyad, FiveBar, FourBar, Link, PlanarChain, PlanarLinkage, SliderDyad
from springpoise.paths import Spool
from springpoise.paths.drum import Drum
from springpoise.testing import check_linkage, check_path

WEIGHTS = (1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280)
KINDS = ("chain", "tree", "four-bar", "five-bar", "slider", "nested")
seeds = st.integers(0, 2**32 - 1)


def _pair(rng, size=0.3):
    return tuple(float(v) for v in rng.uniform(-size, size, 2))


def _bodies(rng):
    return [Body(float(rng.uniform(0.1, 3.0)), _pair(rng)) for _ in range(rng.integers(1, 3))]


def _link(rng, name, low, high, **more):
    carried = _bodies(rng) if rng.random() < 0.4 else None
    return Link(name, _bodies(rng), length=float(rng.uniform(low, high)), carried=carried, **more)


def _chain(rng, *, tree):
    links = []
    for i in range(rng.integers(1, 5)):
        driven = [link.name for link in links if link.follows is None]
        more = {"joint": str(rng.choice(["revolute", "revolute", "prismatic"]))}
        if driven and rng.random() < 0.3:
            more["follows"] = Coupling({str(rng.choice(driven)): float(rng.uniform(-1.5, 1.5))}, offset=0.1)
        if links and tree:
            more["pivot"] = Point(str(rng.choice(["ground", *(link.name for link in links)])), _pair(rng))
        skew = float(rng.choice([0.0, rng.uniform(-1.0, 1.0)]))
        links.append(_link(rng, f"link{i}", 0.1, 0.4, skew=skew, **more))
    return PlanarChain(links)


def _branch(rng):
    return int(rng.choice([-1, 1]))


def _linkage(rng, kind):
    """A random linkage; loops are so sized that they close at most poses."""
    if kind in ("chain", "tree"):
        return _chain(rng, tree=kind == "tree")
    if kind == "four-bar":
        return FourBar(
            crank=_link(rng, "crank", 0.1, 0.2, skew=0.3),
            coupler=_link(rng, "coupler", 0.35, 0.5),
            rocker=_link(rng, "rocker", 0.3, 0.5),
            second_pivot=(float(rng.uniform(0.25, 0.4)), float(rng.uniform(-0.2, 0.2))),
            branch=_branch(rng),
            unreachable="nan",
        )
    if kind == "five-bar":
        return FiveBar(
            first_crank=_link(rng, "one", 0.1, 0.2),
            second_crank=_link(rng, "two", 0.1, 0.2),
            first_coupler=_link(rng, "three", 0.35, 0.5),
            second_coupler=_link(rng, "four", 0.35, 0.5),
            second_pivot=(float(rng.uniform(0.2, 0.4)), float(rng.uniform(-0.2, 0.2))),
            branch=_branch(rng),
            unreachable="nan",
        )
    crank = _link(rng, "crank", 0.1, 0.2, pivot=Point("ground", _pair(rng, 0.1)))
    slider = SliderDyad(
        first=_link(rng, "rod", 0.45, 0.6),
        last=Link("slider", _bodies(rng)),
        start=Point("crank", (crank.length, 0.0)),
        guide=Point("ground", _pair(rng, 0.1)),
        direction=float(rng.uniform(-3.0, 3.0)),
        branch=_branch(rng),
    )
    if kind == "slider":
        return PlanarLinkage([crank, slider], unreachable="nan")
    prismatic = bool(rng.random() < 0.5)
    ram = _link(
        rng,
        "ram",
        0.1,
        0.2,
        joint="prismatic" if prismatic else "revolute",
        skew=0.7,
        pivot=Point("crank", (0.1, 0.05)),
    )
    follower = _link(rng, "follower", 0.1, 0.2, pivot=Point("ground", (0.4, 0.0)), follows={"crank": 0.5, "ram": 0.3})
    first = Dyad(
        first=_link(rng, "a", 0.4, 0.5),
        last=_link(rng, "b", 0.4, 0.5),
        between=(Point("ram", _pair(rng, 0.1)), Point("follower", _pair(rng, 0.1))),
        branch=_branch(rng),
    )
    on_rod = _link(rng, "hook", 0.1, 0.2, pivot=Point("b", (0.2, 0.05)))
    second = SliderDyad(
        first=_link(rng, "c", 0.7, 0.9),
        last=Link("d", _bodies(rng)),
        start=Point("a", (0.2, 0.05)),
        guide=Point(str(rng.choice(["b", "ground"])), _pair(rng, 0.1)),
        direction=float(rng.uniform(-3.0, 3.0)),
        branch=_branch(rng),
    )
    return PlanarLinkage([crank, ram, follower, first, on_rod, second], unreachable="nan")


def _path(rng, linkage, kind):
    names = [str(name) for name in rng.permutation(linkage.frames)]
    first, last = Point(names[0], _pair(rng)), Point(names[1], _pair(rng))
    bodies = [str(name) for name in rng.choice(linkage.frames, 3)]
    joint = int(rng.integers(linkage.joint_count))
    if kind == "straight":
        return Straight(first, last)
    if kind == "torsion":
        return JointTravel(joint, ratio=float(rng.uniform(0.5, 2.0)))
    if kind == "spool":
        angles = np.linspace(-7.0, 7.0, 9)
        return Spool(angles, 0.03 + 0.01 * np.sin(angles), joint=joint)
    disc = Disc(
        Point(bodies[0], _pair(rng, 0.15)),
        radius=float(rng.uniform(0.005, 0.03)),
        turn=str(rng.choice(["cw", "ccw"])),
        sliding_friction=0.1,
    )
    if kind == "cable":
        return Cable(first, disc, Point(bodies[1], _pair(rng)), last)
    drum = Drum(
        Point(names[1], _pair(rng)),
        radius=float(rng.uniform(0.02, 0.05)),
        turn=str(rng.choice(["cw", "ccw"])),
        tie=float(rng.uniform(-3.0, 3.0)),
    )
    return Cable(first, disc, drum) if rng.random() < 0.5 else Cable(drum, last)


PATHS = ("straight", "cable", "drum", "torsion", "spool")


def _spring(rng, path):
    if isinstance(path, JointTravel):
        return TorsionSpring(float(rng.uniform(1.0, 20.0)), free_angle=float(rng.uniform(-1.0, 1.0)))
    if rng.random() < 0.5:
        return ZeroLengthSpring(float(rng.uniform(50.0, 800.0)))
    return ExtensionSpring(float(rng.uniform(50.0, 800.0)), free_length=float(rng.uniform(0.01, 0.1)))


def _mechanism(rng, linkage, kinds):
    mounts = []
    for kind in kinds:
        path = _path(rng, linkage, kind)
        moving = float(rng.uniform(0.0, 0.5)) if kind == "straight" else 0.0
        mounts.append(SpringMount(_spring(rng, path), path, count=int(rng.integers(1, 3)), moving_mass=moving))
    return Mechanism(linkage, springs=mounts)


def _poses(rng, linkage, count):
    """Poses at which every loop closes and is not near a dead point."""
    found = []
    slides = np.array([unit == "m" for unit in linkage.joint_units])
    for _ in range(400):
        q = np.where(slides, 0.05, 1.0) * rng.uniform(-2.8, 2.8, linkage.joint_count)
        pose = q if q.size > 1 else float(q[0])
        if linkage.missing(pose) < -5e-3 and linkage.dead_point_margin(pose) > 0.25:
            found.append(q)
        if len(found) == count:
            break
    return np.array(found).reshape(len(found), -1)


def _call(linkage, q):
    """Poses of one joint as they are called."""
    return q if linkage.joint_count > 1 else q[..., 0]


def _smooth(mech, q, reach):
    """Whether no spring goes slack, no cable leaves a disc, and no two parts of a path come close, around each pose."""
    fine = np.full(len(q), True)
    around = np.stack([q + k * reach * d for k in (-1, -0.5, 0, 0.5, 1) for d in np.eye(q.shape[1])], axis=1)
    for mount in mech.springs:
        x = np.asarray(mount.path.length(mech.linkage, _call(mech.linkage, around))) + 0.0 * around[..., 0]
        marks = [mount.spring.load(x) == 0.0, np.isnan(x)]
        if isinstance(mount.path, Cable):
            marks += [w + 0.0 * x > 0.0 for w in mount.path.wraps(mech.linkage, _call(mech.linkage, around))]
            # neighbours along the cable that nearly meet have high derivatives
            elements = [
                (p.centre, p.radius) if not isinstance(p, Point) else (p, 0.0)
                for p in (*mount.path.along, *(d.tie_point for d in mount.path.along if isinstance(d, Drum)))
            ]
            spots = [np.array(mech.linkage.position(p, _call(mech.linkage, q)), dtype=object) for p, _ in elements]
            for i in range(len(mount.path.along)):
                for j in range(i):
                    gap = np.hypot(*(np.asarray(a - b, dtype=float) for a, b in zip(spots[i], spots[j], strict=True)))
                    fine &= gap > elements[i][1] + elements[j][1] + 0.08
            for drum in (d for d in mount.path.along if isinstance(d, Drum)):
                tie = np.array(mech.linkage.position(drum.tie_point, _call(mech.linkage, q)), dtype=object)
                for spot in spots[: len(mount.path.along)]:
                    gap = np.hypot(*(np.asarray(a - b, dtype=float) for a, b in zip(tie, spot, strict=True)))
                    fine &= gap > 0.9 * drum.radius
            # a jump, where the straight run meets a disc on its other side, is no kink of the formula
            fine &= np.ptp(x, axis=1) < 4.0 * reach
        elif isinstance(mount.path, Straight):
            fine &= np.min(x, axis=1) > 0.08
        fine &= np.all([np.all(m == m[:, :1], axis=1) for m in marks], axis=0) & ~np.any(np.isnan(x), axis=1)
    return fine


def _slopes(function, linkage, q, h):
    """Derivative by each joint, along the last axis."""
    columns = []
    for joint in range(q.shape[1]):
        step = h * np.eye(q.shape[1])[joint]
        columns.append(
            sum(w * function(_call(linkage, q + k * step)) for k, w in zip(range(-4, 5), WEIGHTS, strict=True)) / h
        )
    return np.stack(columns, axis=-1)


def _peak(values):
    return np.max(np.abs(values), initial=0.0, where=np.isfinite(values))


def _rows(values, linkage):
    return values if linkage.joint_count > 1 else values[..., None]


# -------------------------------------------------------------------------------------------
# derivatives


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=4)
def test_linkages_keep_their_identities(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    q = _poses(rng, linkage, 12)
    if len(q) > 1:
        check_linkage(linkage, over=_call(linkage, q), tolerance=1e-10)


@pytest.mark.parametrize("path", PATHS)
@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=2)
def test_paths_keep_their_identities(kind, path, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    q = _poses(rng, linkage, 8)
    route = _path(rng, linkage, path)
    if len(q) > 1:
        if isinstance(route, Cable):
            length = np.asarray(route.length(linkage, _call(linkage, q))) + 0.0 * q[:, 0]
            q = q[np.isfinite(length)]
        if len(q) > 1:
            check_path(route, linkage, over=_call(linkage, q), tolerance=1e-9)


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=6)
def test_jacobian_is_the_derivative_by_complex_step(kind, seed):
    # another road than the duals of check_linkage: the formula itself, run on complex numbers
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    for q in _poses(rng, linkage, 4):
        point = Point(str(rng.choice(linkage.frames[1:])), _pair(rng))
        for joint, move in enumerate(linkage.jacobian(point, _call(linkage, q))):
            step = q[None] + 1e-40j * np.eye(q.size)[joint]
            place = linkage.position(point, _call(linkage, step))
            for component, rate in zip(place, move, strict=True):
                assert np.imag(component + 0 * step[0, 0]) / 1e-40 == pytest.approx(rate, rel=1e-9, abs=1e-10)


@pytest.mark.parametrize("path", PATHS)
@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=2)
def test_torque_is_minus_the_slope_of_the_energy(kind, path, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = _mechanism(rng, linkage, [path])
    q = _poses(rng, linkage, 12)
    if len(q) == 0:
        return
    h = 1e-3
    fine = _smooth(mech, q, 6 * h)
    slopes = _slopes(lambda q: mech.energy(q), linkage, q, h)
    torque = _rows(mech.holding_torque(_call(linkage, q)), linkage)
    scale = 1.0 + _peak(torque) + _peak(mech.spring_energy(_call(linkage, q)))
    assert np.max(np.abs(slopes - torque)[fine], initial=0.0) <= 1e-7 * scale


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=4)
def test_stiffness_is_symmetric_and_the_slope_of_the_holding_torque(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = _mechanism(rng, linkage, ["straight", "torsion", str(rng.choice(["cable", "drum", "spool"]))])
    q = _poses(rng, linkage, 10)
    if len(q) == 0:
        return
    h = 1e-3
    fine = _smooth(mech, q, 6 * h)
    stiffness = mech.stiffness(_call(linkage, q))
    if linkage.joint_count == 1:
        stiffness = stiffness[..., None, None]
    assert stiffness.shape == (*q.shape, q.shape[1])
    scale = 1.0 + np.max(np.abs(stiffness[fine]), initial=0.0)
    assert np.max(np.abs(stiffness - np.swapaxes(stiffness, -1, -2))[fine], initial=0.0) <= 1e-10 * scale
    slopes = _slopes(lambda q: _rows(mech.holding_torque(q), linkage), linkage, q, h)
    assert np.max(np.abs(slopes - stiffness)[fine], initial=0.0) <= 1e-6 * scale


# -------------------------------------------------------------------------------------------
# carriers and shapes


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=2)
def test_compiled_is_eager_and_arrays_are_one_by_one(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    friction = Friction(0.1, pivot_friction=0.05, pivot_radius=0.01)
    mech = attrs.evolve(_mechanism(rng, linkage, ["straight", "cable", "drum", "torsion"]), friction=friction)
    q = _poses(rng, linkage, 6)
    if len(q) == 0:
        return
    n = linkage.joint_count
    single = [pose if n > 1 else float(pose[0]) for pose in q]
    grid = _call(linkage, q[: len(q) // 2 * 2].reshape(-1, 2, n))
    for method in (
        "gravity_torque",
        "spring_torque",
        "holding_torque",
        "energy",
        "friction_band",
        "stiffness",
        "pivot_load",
    ):
        one_by_one = np.array([getattr(mech, method)(pose) for pose in single])
        whole = getattr(mech, method)(grid)
        scale = 1.0 + _peak(one_by_one)
        assert whole.shape[:2] == grid.shape[:2]
        flat = whole.reshape(-1, *whole.shape[2:])
        np.testing.assert_allclose(flat, one_by_one[: len(flat)], rtol=1e-12, atol=1e-12 * scale)
    for moving in (0, 1):
        ff = Feedforward(mech)
        expected = np.array([ff.torque(pose, moving=moving) for pose in single]).reshape(len(q), n)
        scale = 1.0 + _peak(expected)
        plain = ff.compile(moving=moving)
        ours = np.array([plain(*pose) for pose in q.tolist()]).reshape(len(q), n)
        np.testing.assert_allclose(ours, expected, rtol=1e-12, atol=1e-12 * scale)
        blocked = np.array(ff.compile(moving=moving, arrays=True)(*q.T)).reshape(n, len(q)).T
        np.testing.assert_allclose(blocked, expected, rtol=1e-12, atol=1e-12 * scale)


@pytest.mark.parametrize("kind", ["four-bar", "five-bar", "slider", "nested"])
@given(seeds)
@settings(max_examples=5)
def test_poses_that_do_not_close_give_nan_and_nothing_else_does(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = Mechanism(linkage)
    q = rng.uniform(-2.8, 2.8, (40, linkage.joint_count))
    q[0] = math.nan
    pose = _call(linkage, q)
    open_ = ~(np.asarray(linkage.missing(pose)) <= 0.0)
    torque = _rows(mech.holding_torque(pose), linkage)
    assert np.array_equal(np.isnan(torque).all(axis=1), open_)
    assert np.array_equal(np.isnan(torque).any(axis=1), open_)
    assert np.array_equal(np.isnan(mech.energy(pose)), open_)
    blocked = np.array(Feedforward(mech).compile(arrays=True)(*q.T)).reshape(linkage.joint_count, -1).T
    np.testing.assert_allclose(blocked, torque, rtol=1e-12, atol=1e-12 * (1.0 + _peak(torque)))


# -------------------------------------------------------------------------------------------
# mirror image and payload


def _mirrored_link(link):
    def heavy(bodies):
        return None if bodies is None else [Body(b.mass, (b.com[0], -b.com[1])) for b in bodies]

    follows = None if link.follows is None else Coupling(link.follows.ratios, offset=-link.follows.offset)
    pivot = None if link.pivot is None else _mirrored_point(link.pivot)
    turning = link.joint == "revolute"
    if follows is not None and not turning:  # a way has no mirror sign, an angle has
        follows = attrs.evolve(link.follows)
    return attrs.evolve(
        link, bodies=heavy(link.bodies), carried=heavy(link.carried), skew=-link.skew, follows=follows, pivot=pivot
    )


def _mirrored_point(point):
    return Point(point.body, (point.at[0], -point.at[1]))


def _mirrored_member(member):
    if isinstance(member, Link):
        return _mirrored_link(member)
    links = {"first": _mirrored_link(member.first), "last": _mirrored_link(member.last)}
    if isinstance(member, Dyad):
        return Dyad(between=tuple(map(_mirrored_point, member.between)), branch=-member.branch, **links)
    return attrs.evolve(
        member,
        start=_mirrored_point(member.start),
        guide=_mirrored_point(member.guide),
        direction=-member.direction,
        **links,
    )


def _signs(linkage):
    return np.array([-1.0 if unit == "rad" else 1.0 for unit in linkage.joint_units])


def _couples_alike(linkage):
    """Whether no coupling joins an angle and a way, whose ratio would change its sign."""
    kinds = dict(zip(linkage.joint_names, linkage.joint_units, strict=True))
    return all(
        kinds[name] == {"revolute": "rad", "prismatic": "m"}[link.joint]
        for link in linkage.links
        if link.follows
        for name, _ in link.follows.ratios
    )


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=5)
def test_mirror_image(kind, seed):
    """Upside down: y -> -y with gravity upwards; every angle changes its sign, every way stays."""
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    if not _couples_alike(linkage):
        return
    mech = _mechanism(rng, linkage, ["straight", "cable"])
    image = Mechanism(
        PlanarLinkage([_mirrored_member(m) for m in linkage.members], unreachable="nan"),
        springs=[_mirrored_mount(mount) for mount in mech.springs],
        gravity=(0.0, -mech.gravity[1]),
    )
    q = _poses(rng, linkage, 8)
    if len(q) == 0:
        return
    signs, n = _signs(linkage), linkage.joint_count
    ours = mech.holding_torque(_call(linkage, q)).reshape(-1, n)
    theirs = image.holding_torque(_call(linkage, signs * q)).reshape(-1, n)
    fine = _smooth(mech, q, 1e-6)
    scale = 1.0 + _peak(ours)
    np.testing.assert_allclose(ours[fine], (signs * theirs)[fine], rtol=1e-9, atol=1e-9 * scale)
    np.testing.assert_allclose(
        mech.energy(_call(linkage, q))[fine],
        image.energy(_call(linkage, signs * q))[fine],
        rtol=1e-9,
        atol=1e-9 * scale,
    )
    for (x, y), (u, v) in zip(_forces(mech, _call(linkage, q)), _forces(image, _call(linkage, signs * q)), strict=True):
        np.testing.assert_allclose((x + 0 * q[:, 0])[fine], (u + 0 * q[:, 0])[fine], rtol=1e-8, atol=1e-8 * scale)
        np.testing.assert_allclose((y + 0 * q[:, 0])[fine], (-v + 0 * q[:, 0])[fine], rtol=1e-8, atol=1e-8 * scale)


def _mirrored_mount(mount):
    flip = {"cw": "ccw", "ccw": "cw"}
    if isinstance(mount.path, Straight):
        return attrs.evolve(mount, path=Straight(_mirrored_point(mount.path.first), _mirrored_point(mount.path.last)))
    along = [
        _mirrored_point(item)
        if isinstance(item, Point)
        else attrs.evolve(item, centre=_mirrored_point(item.centre), turn=flip[item.turn])
        for item in mount.path.along
    ]
    return attrs.evolve(mount, path=Cable(*along))


def _forces(mech, q):
    forces = mech.pivot_force(q)
    return forces if len(mech.linkage.pivots) > 1 else (forces,)


@pytest.mark.parametrize("kind", KINDS)
@given(seeds, st.floats(0.1, 5.0))
@settings(max_examples=5)
def test_payload_on_and_off(kind, seed, mass):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = _mechanism(rng, linkage, ["straight"])
    at = Point(str(rng.choice(linkage.frames[1:])), _pair(rng))
    loaded = mech.with_payload(mass, at)
    assert loaded.without_payload() == mech
    assert loaded != mech
    assert type(loaded.linkage) is type(linkage)
    q = _poses(rng, linkage, 4)
    if len(q) == 0:
        return
    added = _rows(loaded.holding_torque(_call(linkage, q)) - mech.holding_torque(_call(linkage, q)), linkage)
    by_hand = np.stack(
        [9.80665 * mass * (move[1] + 0.0 * q[:, 0]) for move in linkage.jacobian(at, _call(linkage, q))], axis=-1
    )
    np.testing.assert_allclose(added, by_hand, rtol=1e-9, atol=1e-9 * (1.0 + np.max(np.abs(by_hand))))


# -------------------------------------------------------------------------------------------
# statics: a free-body diagram of every body, drawn here


class FreeBodies:
    """All forces on each body at one pose: weights, springs, and the joints' as the library gives them."""

    def __init__(self, mech, q):
        self.mech, self.linkage = mech, mech.linkage
        self.q = _call(self.linkage, q)
        self.forces = {name: [] for name in self.linkage.frames}  # body: (place, force)
        for mass, at in self.linkage.masses:
            self.act(at.body, self.place(at), -9.80665j * mass)
        for mount in mech.springs:
            length = mount.path.length(self.linkage, self.q)
            tension = mount.count * mount.spring.load(length)
            for at, force in mount.path.pulls(self.linkage, self.q):
                self.act(at.body, self.place(at), tension * complex(*force))
            if mount.moving_mass:
                for end in mount.path.ends:
                    self.act(end.body, self.place(end), -9.80665j * 0.5 * mount.count * mount.moving_mass)
        self.joints = dict(zip(self.linkage.pivots, (complex(*f) for f in _forces(mech, self.q)), strict=True))

    def place(self, point):
        return complex(*self.linkage.position(point, self.q))

    def act(self, body, place, force):
        self.forces[body].append((place, force))

    def total(self, body):
        return sum((force for _, force in self.forces[body]), 0j)

    def moment(self, body, about):
        return sum(((place - about).conjugate() * force).imag for place, force in self.forces[body])


def _free_bodies(mech, q):
    """Residual forces of all bodies, residual moments of dyad bodies, couple and force of every link's joint."""
    bodies = FreeBodies(mech, q)
    linkage = mech.linkage
    bases = {}
    before = Point("ground", (0.0, 0.0))
    for member in linkage.members:
        if isinstance(member, Link):
            base = before if member.pivot is None else member.pivot
            bases[member.name] = base.body
            origin = bodies.place(Point(member.name, (0.0, 0.0)))
            bodies.act(member.name, origin, bodies.joints[member.name])
            bodies.act(base.body, origin, -bodies.joints[member.name])
        else:
            start, guide = member.between
            a, b = (bodies.place(Point(link.name, (0.0, 0.0))) for link in member.links)
            far = (member.first.length, 0.0)
            joint = bodies.place(Point(member.first.name, far))
            between = bodies.joints[f"{member.first.name} and {member.last.name}"]
            bodies.act(member.first.name, a, bodies.joints[member.first.name])
            bodies.act(start.body, a, -bodies.joints[member.first.name])
            bodies.act(member.first.name, joint, between)
            bodies.act(member.last.name, joint, -between)
            bodies.act(member.last.name, b, bodies.joints[member.last.name])
            bodies.act(guide.body, b, -bodies.joints[member.last.name])
        last = linkage_last(member)
        before = Point(last.name, (last.length, 0.0))
    # what is carried hangs on its link by a force; the parallelogram takes its moment to the ground
    for link in linkage.links:
        if link.carried is not None:
            far = bodies.place(Point(link.carried_name, (0.0, 0.0)))
            hanging = bodies.total(link.carried_name)
            bodies.act(link.name, far, hanging)
            bodies.act(link.carried_name, far, -hanging)
    residuals = [bodies.total(name) for name in linkage.frames[1:]]
    couples, moments = {}, []
    passed = dict.fromkeys(linkage.frames, 0.0)  # couples that joints of links put on the bodies they stand on
    for member in reversed(linkage.members):
        if isinstance(member, Link):
            origin = bodies.place(Point(member.name, (0.0, 0.0)))
            couples[member.name] = -(bodies.moment(member.name, origin) + passed[member.name])
            passed[bases[member.name]] -= couples[member.name]
        elif isinstance(member, SliderDyad):
            joint = bodies.place(Point(member.last.name, (0.0, 0.0)))
            moments.append(bodies.moment(member.first.name, joint) + passed[member.first.name])
            passed[member.guide.body] += bodies.moment(member.last.name, joint) + passed[member.last.name]
            line = bodies.place(Point(member.last.name, (1.0, 0.0))) - joint
            moments.append((line.conjugate() * bodies.joints[member.last.name]).real)  # no force along the line
        else:
            moments += [bodies.moment(link.name, 0j) + passed[link.name] for link in member.links]
    return bodies, residuals, couples, moments


def linkage_last(member):
    return member if isinstance(member, Link) else member.last


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=8)
def test_every_body_is_in_equilibrium_and_the_drives_hold_it(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = _mechanism(rng, linkage, ["straight", "cable", "drum"])
    for q in _poses(rng, linkage, 3):
        if not np.isfinite(mech.spring_energy(_call(linkage, q))):
            continue
        bodies, residuals, couples, moments = _free_bodies(mech, q)
        scale = 1.0 + max(abs(force) for force in bodies.joints.values())
        assert np.max(np.abs(residuals)) <= 1e-10 * scale
        assert np.max(np.abs(moments), initial=0.0) <= 1e-10 * scale
        # the couples and forces of the drives, found here by balance, are the holding torques found by virtual work
        held = dict.fromkeys(linkage.joint_names, 0.0)
        for member in linkage.members:
            if not isinstance(member, Link):
                continue
            effort = couples[member.name]
            if member.joint == "prismatic":
                origin = bodies.place(Point(member.name, (0.0, 0.0)))
                axis = bodies.place(Point(member.name, (1.0, 0.0))) - origin
                effort = (axis.conjugate() * bodies.joints[member.name]).real
            for name, ratio in member.follows.ratios if member.follows else ((member.name, 1.0),):
                held[name] += ratio * effort
        ours = np.atleast_1d(mech.holding_torque(_call(linkage, q)))
        assert ours == pytest.approx(list(held.values()), rel=1e-9, abs=1e-9 * scale)


def _moved(linkage, name, by):
    """The linkage with the joint of that name moved by ``by`` (x, y) in the frame of the body that it sits on."""

    def shifted(point):
        return Point(point.body, (point.at[0] + by[0], point.at[1] + by[1]))

    parts, before = [], Point("ground", (0.0, 0.0))
    for member in linkage.members:
        part = member
        if isinstance(member, Link):
            base = before if member.pivot is None else member.pivot
            part = attrs.evolve(member, pivot=shifted(base) if member.name == name else base)
        elif isinstance(member, Dyad):
            ends = [
                shifted(end) if link.name == name else end
                for end, link in zip(member.between, member.links, strict=True)
            ]
            part = attrs.evolve(member, between=ends)
        elif member.first.name == name:
            part = attrs.evolve(member, start=shifted(member.start))
        elif member.last.name == name:
            part = attrs.evolve(member, guide=shifted(member.guide))
        parts.append(part)
        last = linkage_last(member)
        before = Point(last.name, (last.length, 0.0))
    return PlanarLinkage(parts, unreachable="nan")


def _base_of(linkage, name):
    before = "ground"
    for member in linkage.members:
        for link, end in (
            [(member, member.pivot)] if isinstance(member, Link) else zip(member.links, member.between, strict=True)
        ):
            if link.name == name:
                return before if end is None else end.body
        before = linkage_last(member).name
    raise AssertionError(name)


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=4)
def test_pivot_force_is_the_slope_of_the_energy_by_the_pivot(kind, seed):
    """With the drives locked, a bearing that moves does all the work: dE/d(place) is its force on what hangs on it."""
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    mech = _mechanism(rng, linkage, ["straight", "straight"])
    h = 1e-3
    for q in _poses(rng, linkage, 2):
        pose = _call(linkage, q)
        if not all(mount.path.length(linkage, pose) > 0.2 for mount in mech.springs):
            continue
        forces = dict(zip(linkage.pivots, _forces(mech, pose), strict=True))
        scale = 1.0 + max(math.hypot(*force) for force in forces.values())
        for link in linkage.links:
            base = _base_of(linkage, link.name)
            x0, y0 = linkage.position(Point(base, (0.0, 0.0)), pose)
            for axis in ((1.0, 0.0), (0.0, 1.0)):
                slope = 0.0
                for k, weight in zip(range(-4, 5), WEIGHTS, strict=True):
                    moved = _moved(linkage, link.name, (k * h * axis[0], k * h * axis[1]))
                    slope += weight * attrs.evolve(mech, linkage=moved).energy(pose) / h
                x1, y1 = linkage.position(Point(base, axis), pose)
                along = forces[link.name][0] * (x1 - x0) + forces[link.name][1] * (y1 - y0)
                assert along == pytest.approx(slope, abs=1e-7 * scale)


# -------------------------------------------------------------------------------------------
# friction


@pytest.mark.parametrize("kind", KINDS)
@given(seeds)
@settings(max_examples=5)
def test_friction_bands_add_up_joint_by_joint(kind, seed):
    rng = np.random.default_rng(seed)
    linkage = _linkage(rng, kind)
    n = linkage.joint_count
    frictions = [
        Friction(float(rng.uniform(0, 1)), pivot_friction=float(rng.uniform(0, 0.2)), pivot_radius=0.01)
        for _ in range(n)
    ]
    mech = attrs.evolve(_mechanism(rng, linkage, ["straight", "cable"]), friction=frictions)
    q = _poses(rng, linkage, 5)
    if len(q) == 0:
        return
    pose = _call(linkage, q)
    bare = attrs.evolve(mech, friction=Friction())
    loads = dict(zip(linkage.pivots, np.moveaxis(_pivot_rows(mech, pose), -1, 0), strict=True))
    by_hand = _rows(bare.friction_band(pose), linkage) + np.stack(
        [
            f.coulomb + f.pivot_friction * f.pivot_radius * loads[name]
            for f, name in zip(frictions, linkage.joint_names, strict=True)
        ],
        axis=-1,
    )
    band = _rows(mech.friction_band(pose), linkage)
    np.testing.assert_allclose(band, by_hand, rtol=1e-12, atol=1e-12)
    assert not np.any(band < 0.0)
    alike = attrs.evolve(mech, friction=frictions[0])
    assert alike.joint_frictions == (frictions[0],) * n


def _pivot_rows(mech, pose):
    loads = mech.pivot_load(pose)
    return loads if len(mech.linkage.pivots) > 1 else loads[..., None]

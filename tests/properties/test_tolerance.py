"""Names of fields, derivatives, scattered builds, corners and adjusters on random mechanisms."""

from __future__ import annotations

import math
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import minimize_scalar

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    FourBar,
    JointTravel,
    Link,
    Mechanism,
    PlanarChain,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.tolerance import Spread, adjusters, corners, list_fields, replaced, scatter, sensitivities

G = 9.80665
Q = np.linspace(-1.0, 1.0, 9)
seeds = st.integers(0, 2**32 - 1)


def _arm(seed):
    """A taut extension spring, a cable over a disc and a torsion spring, with an arm of any weight."""
    rng = np.random.default_rng(seed)
    a, b, m, c = rng.uniform([0.15, 0.05, 0.5, 0.2], [0.3, 0.1, 4.0, 0.5]).tolist()
    return Mechanism(
        Arm([Body(m, (c, 0.02)), Body(0.5, (-0.1, 0.01))]),
        springs=[
            SpringMount(
                ExtensionSpring(m * G * c / (a * b), free_length=0.02, initial_tension=5.0),
                Straight(Point("ground", (0.01, a)), Point("arm", (b, 0.01))),
                name="lift",
            ),
            SpringMount(
                ExtensionSpring(200.0, free_length=0.05, initial_tension=3.0),
                Cable(
                    Point("ground", (-0.3, -a)),
                    Disc(Point("ground", (-0.1, a)), radius=0.015, turn="cw"),
                    Point("arm", (0.3, 0.0)),
                ),
                rigid_length=0.1,
            ),
            SpringMount(TorsionSpring(1.5, free_angle=0.3), JointTravel(ratio=1.2)),
        ],
        travel=(-1.0, 1.0),
    )


def _chain():
    path = Straight(Point("ground", (0.0, 0.1)), Point("upper", (0.09, 0.0)))
    return Mechanism(
        PlanarChain([Link("upper", Body(2.0, (0.16, 0)), length=0.32), Link("fore", Body(0.8, (0.10, 0)), length=0.2)]),
        springs=SpringMount(ZeroLengthSpring(570.0), path),
        travel=((-1, 1), (-1, 1)),
    )


def _four_bar():
    bar = FourBar(
        crank=Link("crank", Body(1.0, (0.05, 0)), length=0.1),
        coupler=Link("coupler", Body(0.5, (0.1, 0)), length=0.3),
        rocker=Link("rocker", Body(0.5, (0.1, 0)), length=0.25),
        second_pivot=(0.35, 0.0),
    )
    return Mechanism(
        bar,
        springs=SpringMount(ZeroLengthSpring(300.0), Straight(Point("ground", (0, 0.2)), Point("coupler", (0.1, 0)))),
    )


@pytest.mark.parametrize("mech", [_arm(1), _chain(), _four_bar()], ids=["arm", "chain", "four-bar"])
def test_every_field_can_be_named_and_replaced_by_itself(mech):
    fields = list_fields(mech)
    names = [field.name for field in fields]
    assert len(set(names)) == len(names)
    assert replaced(mech, {field.name: field.value for field in fields}) == mech
    for field in fields:
        if any(part in field.name for part in ("moving_mass", "friction", "bearing", "coupler.skew", "rocker.skew")):
            continue  # their classes refuse them alone
        changed = replaced(mech, {field.name: field.value + 0.001})
        assert changed != mech
        others = {f.name: f.value for f in list_fields(changed)}
        assert others.pop(field.name) == field.value + 0.001
        assert others == {f.name: f.value for f in fields if f.name != field.name}


@given(seeds)
@settings(max_examples=10)
def test_columns_of_builds_equal_one_replacement_each(seed):
    mech, rng = _arm(seed), np.random.default_rng(seed)
    names = ["springs[lift].spring.rate", "springs[1].path.along[1].radius", "linkage.bodies[1].mass"]
    columns = {
        name: np.array([500.0, 0.014, 0.4]).reshape(3, 1)[i] * rng.uniform(0.9, 1.1, (4, 1))
        for i, name in enumerate(names)
    }
    together = replaced(mech, columns).holding_torque(Q)
    for i in range(4):
        alone = replaced(mech, {name: float(column[i, 0]) for name, column in columns.items()})
        np.testing.assert_allclose(together[i], alone.holding_torque(Q), rtol=1e-12, atol=1e-12)


# ------------------------------------------------------------------------------------- derivatives

PLAIN = {
    "springs[0].spring.rate": 700.0,
    "springs[0].spring.free_length": 0.03,
    "springs[0].spring.initial_tension": 6.0,
    "springs[0].path.first.at[0]": 0.01,
    "springs[0].path.first.at[1]": 0.2,
    "springs[0].path.last.at[0]": 0.08,
    "springs[0].path.last.at[1]": 0.005,
    "linkage.bodies[0].mass": 2.0,
    "linkage.bodies[0].com[0]": 0.35,
    "linkage.bodies[0].com[1]": 0.02,
    "gravity[1]": -G,
}


def _by_hand(v, q):
    """Holding torque with a taut extension spring, in numbers that may be complex: force times lever."""
    k, l0, f0, ax, ay, bx, by, m, cx, cy, g = v
    c, s = np.cos(q), np.sin(q)
    px, py = bx * c - by * s, bx * s + by * c
    dx, dy = px - ax, py - ay
    length = np.sqrt(dx * dx + dy * dy)
    pull = f0 + k * (length - l0)
    spring = -pull * (dx * -py + dy * px) / length
    return -(m * g * (cx * c - cy * s) + spring)


@given(st.lists(st.floats(0.8, 1.2), min_size=len(PLAIN), max_size=len(PLAIN)))
@settings(max_examples=15)
def test_derivatives_are_those_of_a_complex_step(factors):
    """f(x + ih)/h has no cancellation: exact to rounding for h = 1e-30."""
    values = {name: value * factor for (name, value), factor in zip(PLAIN.items(), factors, strict=True)}
    path = Straight(Point("ground", (0.01, 0.2)), Point("arm", (0.08, 0.005)))
    mech = Mechanism(Arm(Body(1.0, (0.3, 0.0))), springs=SpringMount(ExtensionSpring(700.0, free_length=0.03), path))
    mech = replaced(mech, values)
    found = sensitivities(mech, over=Q, names=list(values))
    numbers = np.array(list(values.values()), dtype=complex)
    np.testing.assert_allclose(mech.holding_torque(Q), _by_hand(numbers.real, Q), atol=1e-12)
    for i, name in enumerate(values):
        stepped = numbers.copy()
        stepped[i] += 1e-30j
        np.testing.assert_allclose(found[name].slope, _by_hand(stepped, Q).imag / 1e-30, rtol=1e-9, atol=1e-9)
    order = [row.per_step for row in found]
    assert order == sorted(order, reverse=True)


@pytest.mark.parametrize("make", [_chain, _four_bar])
def test_derivatives_of_linkages_agree_with_differences(make):
    """Central differences: error about h² times the third derivative, and 1e-16/h of rounding."""
    mech = make()
    q = np.array([[0.3, -0.4], [-0.5, 0.8]]) if mech.linkage.joint_count == 2 else np.array([0.5, 1.5])
    found = sensitivities(mech, over=q)
    assert "friction.coulomb" in found.idle
    for row in found:
        if row.value == 0.0 and row.unit == "kg":
            continue  # a mass cannot be negative
        h = 1e-6
        ends = [replaced(mech, {row.name: row.value + sign * h}).holding_torque(q) for sign in (1, -1)]
        np.testing.assert_allclose(row.slope, (ends[0] - ends[1]) / (2 * h), rtol=1e-6, atol=1e-6)


# ---------------------------------------------------------------------------------------- scatter

SPREADS = {
    "springs[lift].spring.rate": Spread.normal("5 %", shared="lot"),
    "springs[1].spring.rate": Spread.uniform("5 %", shared="lot"),
    "springs[0].path.first.at[1]": Spread.uniform("1 mm"),
    "springs[1].path.along[1].radius": Spread.normal("0.1 mm"),
    "linkage.bodies[0].mass": Spread.samples([1.9, 2.0, 2.2]),
    "springs[2].spring.free_angle": Spread.normal("2 deg"),
}


@given(seeds)
@settings(max_examples=4)
def test_scatter_is_what_builds_made_one_by_one_give(seed):
    mech, rng = _arm(seed), np.random.default_rng(seed)
    n = 50
    columns = {
        "springs[lift].spring.rate": rng.normal(600, 30, n),
        "springs[1].path.along[1].radius": rng.uniform(0.012, 0.018, n),
        "linkage.bodies[0].com[0]": rng.normal(0.3, 0.01, n),
    }
    spreads = {name: Spread.samples(column, in_order=True) for name, column in columns.items()}
    found = scatter(mech, spreads, builds=n, over=Q, levels=(0.0, 1.0), limit=3.0)
    alone = [replaced(mech, {name: float(column[i]) for name, column in columns.items()}) for i in range(n)]
    torques = np.array([one.holding_torque(Q) for one in alone])
    np.testing.assert_allclose(found.worst, np.max(np.abs(torques), axis=1), rtol=1e-11)
    np.testing.assert_allclose(found.bands, [np.min(torques, axis=0), np.max(torques, axis=0)], rtol=1e-9, atol=1e-9)
    assert found.worst_build == int(np.argmax(np.max(np.abs(torques), axis=1)))
    assert found.yield_within() == np.mean(np.max(np.abs(torques), axis=1) <= 3.0)
    assert found.mechanism_of(7) == alone[7]


def test_drawn_builds_are_what_their_values_say():
    mech = _arm(3)
    found = scatter(mech, SPREADS, builds=5000, over=Q)
    for build in (0, 2047, 2048, 4999, found.worst_build):
        worst = np.max(np.abs(found.mechanism_of(build).holding_torque(Q)))
        assert found.worst[build] == pytest.approx(worst, rel=1e-11)
    values = [found.values_of(i) for i in range(0, 5000, 100)]
    assert {v["linkage.bodies[0].mass"] for v in values} == {1.9, 2.0, 2.2}


@pytest.mark.parametrize("builds", [1, 2048, 5001])
def test_threads_and_groups_of_chunks_change_nothing(builds, monkeypatch):
    mech = _arm(3)
    alone = scatter(mech, SPREADS, builds=builds, over=Q, seed=5)
    with ThreadPoolExecutor(3) as threads:
        for longest in (1, 2, 24):
            monkeypatch.setattr("springpoise.executors.LONGEST", longest)
            shared = scatter(mech, SPREADS, builds=builds, over=Q, seed=5, executor=threads)
            assert np.array_equal(alone.worst, shared.worst)
            assert np.array_equal(alone.bands, shared.bands)
    assert not np.array_equal(alone.worst, scatter(mech, SPREADS, builds=builds, over=Q, seed=6).worst)


def test_a_field_is_drawn_alike_whatever_else_scatters():
    mech = _arm(3)
    rate = "springs[0].spring.rate"
    alone = scatter(mech, {rate: Spread.normal("5 %")}, builds=100, over=Q)
    among = scatter(
        mech, {"linkage.bodies[0].mass": Spread.normal("1 %"), rate: Spread.normal("5 %")}, builds=100, over=Q
    )
    longer = scatter(mech, {rate: Spread.normal("5 %")}, builds=3000, over=Q)
    for i in (0, 50, 99):
        assert alone.values_of(i)[rate] == among.values_of(i)[rate]
    assert longer.values_of(2999) != alone.values_of(99)


def test_several_joints():
    mech = _chain()
    spreads = {
        "springs[0].spring.rate": Spread.normal("5 %"),
        "linkage.chain[fore].bodies[0].mass": Spread.normal("5 %"),
    }
    q = mech.poses(40)
    found = scatter(mech, spreads, builds=300, over=q, limit=["20 %", "20 %"])
    assert found.worst.shape == (300, 2)
    assert found.bands.shape == (3, 40, 2)
    torque = np.abs(found.mechanism_of(11).holding_torque(q))
    np.testing.assert_allclose(found.worst[11], np.max(torque, axis=0), rtol=1e-11)
    worst = corners(mech, spreads, over=q)
    assert worst.worst == pytest.approx(np.max(np.abs(worst.mechanism.holding_torque(q)[:, worst.joint])), rel=1e-11)
    assert "worst build" in str(found)


# ---------------------------------------------------------------------------------------- corners


@given(seeds, st.booleans())
@settings(max_examples=6)
def test_no_random_build_is_worse_than_the_worst_corner(seed, few):
    mech = _arm(seed % 7)
    boxes = {
        "springs[lift].spring.rate": Spread.uniform("5 %", shared="lot"),
        "springs[1].spring.rate": Spread.uniform("5 %", shared="lot"),
        "springs[0].path.first.at[1]": Spread.uniform("2 mm"),
        "springs[0].path.last.at[0]": Spread.uniform("2 mm"),
        "springs[1].path.along[1].radius": Spread.uniform("1 mm"),
        "linkage.bodies[0].mass": Spread.uniform("2 %"),
    }
    with pytest.MonkeyPatch.context() as patch:
        if few:
            patch.setattr("springpoise.tolerance.boxes.ALL_CORNERS", 1)
        found = corners(mech, boxes, over=Q)
    assert found.worst == pytest.approx(np.max(np.abs(found.mechanism.holding_torque(Q))), rel=1e-11)
    assert np.max(scatter(mech, boxes, builds=2000, over=Q, seed=seed).worst) <= found.worst * (1 + 1e-12)
    assert not found.exact


def test_a_worst_build_inside_the_box_is_found():
    """Straight above the pivot the lever of a spring is greatest somewhere between the ends of its attachment."""
    path = Straight(Point("ground", (0.0, 0.1)), Point("arm", (0.1, 0.0)))
    mech = Mechanism(
        Arm(Body(0.0, (0.3, 0.0))),
        springs=SpringMount(ExtensionSpring(1.0, free_length=0.0, initial_tension=50.0), path),
    )
    name = "springs[0].path.first.at[0]"
    found = corners(mech, {name: Spread.uniform("0.3 m")}, over=[0.0])
    assert not found.exact

    def torque(x):
        return -abs(replaced(mech, {name: float(x)}).holding_torque(0.0))

    best = minimize_scalar(torque, bounds=(-0.3, 0.3), method="bounded", options={"xatol": 1e-10})
    assert found.worst == pytest.approx(-best.fun, rel=1e-6)
    assert abs(found.values[name]) < 0.29


# --------------------------------------------------------------------------------------- adjusters


def test_adjusted_builds_are_the_best_that_a_plain_search_finds():
    path = Straight(Point("ground", (0.0, 0.10)), Point("arm", (0.08, 0.0)))
    mech = Mechanism(
        Arm(Body(2.0, (0.35, 0.0))),
        springs=SpringMount(ExtensionSpring(900.0, free_length=0.01, initial_tension=8.0), path),
        travel=(-1.0, 0.8),
    )
    spreads = {"springs[0].spring.rate": Spread.normal("5 %"), "springs[0].path.last.at[1]": Spread.normal("1 mm")}
    found = adjusters(mech, spreads, builds=6, coverage=0.9)
    builds = scatter(mech, spreads, builds=6)
    q = mech.poses(121)
    assert found.success
    for row in found:
        assert np.all(row.remains <= found.before * (1 + 1e-12))
        for i in range(6):
            own = builds.mechanism_of(i)
            start = builds.values_of(i).get(row.name, row.value)

            def left(move, own=own, start=start, name=row.name):
                return float(np.max(np.abs(replaced(own, {name: float(start + move)}).holding_torque(q))))

            assert left(row.moves[i]) == pytest.approx(row.remains[i], rel=1e-10)
            grid = np.linspace(-0.02, 0.02, 41)
            at = grid[int(np.argmin([left(move) for move in grid]))]
            plain = minimize_scalar(left, bounds=(at - 1e-3, at + 1e-3), method="bounded", options={"xatol": 1e-9})
            assert row.remains[i] == pytest.approx(plain.fun, rel=1e-5)
    assert math.isclose(found.best.residual, found.rows[0].residual)

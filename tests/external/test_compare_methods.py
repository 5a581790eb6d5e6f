"""Compared methods against closed forms and known optima.

Reference instance: 2.0 kg at 0.35 m, anchor 0.10 m above the pivot, attachment at 0.08 m. Torsion:
closed forms and the table of a preloaded torsion spring against a cosine, recomputed by normal
equations and a linear programme. Straight spring with a free length: the table recomputed by an
independent linear programme (configurations of Agrawal and Agrawal 2005, Mech. Mach. Theory
40:693-709). Tolerances: half a unit of the last digit given, or what the stated grid costs.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Arm, Body, Friction, Mechanism, balance
from springpoise.balance.methods.assumptions import MethodAssumptions
from springpoise.balance.methods.compare import METHODS, compare_methods

A, B, MASS, COM = 0.10, 0.08, 2.0, 0.35
G = MASS * 9.80665 * COM
SIXTY = math.pi / 3
ARM = Mechanism(Arm(Body(MASS, (COM, 0.0))), travel=(-SIXTY, SIXTY))
RUBBING = Mechanism(Arm(Body(MASS, (COM, 0.0))), friction=Friction(0.1), travel=(-SIXTY, SIXTY))
BOX = dict(attach_radius=(0.04, 0.12), anchor_height=(0.06, 0.25))


@pytest.fixture(scope="module")
def everything():
    return compare_methods(RUBBING, over=RUBBING.poses(61), **BOX)


@pytest.mark.parametrize(
    ("low", "high", "norm", "rate", "worst"),
    [
        (0, 90, "minimax", 2 / math.pi, 0.105257),
        (-30, 60, "rms", 0.243200, 0.194613),
        (-30, 60, "minimax", None, 0.141628),
    ],
)
def test_torsion_row_against_the_table(low, high, norm, rate, worst):
    """The rate 2/pi is a closed form: the minimax line is parallel to the chord of the quarter cosine."""
    arm = Mechanism(Arm(Body(MASS, (COM, 0.0))), travel=(math.radians(low), math.radians(high)))
    found = compare_methods(arm, over=arm.poses(4001), norm=norm, methods="torsion", **BOX).require()
    row = found.row("torsion")
    spring = row.mechanism.springs[0].spring
    if rate is not None:
        assert spring.rate / G == pytest.approx(rate, abs=2e-4 if norm == "rms" else 2e-6)
    assert row.figures.residual.worst / G == pytest.approx(worst, abs=3e-4 if norm == "rms" else 1e-6)
    # A straight line meets a cosine, which has one sign of curvature there, at no more than two angles.
    assert row.figures.balances == "2"


@pytest.mark.parametrize(
    ("share", "strength", "worst"), [(0.10, 1.254868, 0.096498), (0.20, 1.684088, 0.259010), (0.25, 2.031523, 0.390556)]
)
def test_straight_row_against_the_free_length_table(share, strength, worst):
    """Geometry fixed; the assumed ratio is that of the table's free length to the greatest length."""
    longest = math.sqrt(A * A + B * B - 2 * A * B * math.cos(math.radians(150)))
    shortest = math.sqrt(A * A + B * B - 2 * A * B * math.cos(math.radians(30)))
    free = share * (A + B)
    found = compare_methods(
        ARM,
        over=ARM.poses(481),
        attach_radius=(B, B),
        anchor_height=(A, A),
        attach_skew=(0.0, 0.0),
        methods="straight",
        assumptions=MethodAssumptions(free_length_ratio=free / longest, initial_tension_ratio=0.0),
    )
    assert free < shortest
    row = found.row("straight").require()
    spring = row.mechanism.springs[0].spring
    assert spring.free_length == pytest.approx(free, rel=1e-7)
    assert spring.rate * A * B / G == pytest.approx(strength, abs=3e-6)
    assert row.figures.residual.worst_fraction == pytest.approx(worst, abs=1e-6)


def test_counterweight_is_exact(everything):
    """Closed forms: mass times radius is the arm's moment; inertia is mass times radius squared."""
    row = everything.row("counterweight")
    body = row.mechanism.linkage.bodies[-1]
    assert body.mass * 0.12 == pytest.approx(MASS * COM, rel=1e-12)
    assert body.com == pytest.approx((-0.12, 0.0), abs=1e-15)
    figures = row.figures
    assert figures.residual.worst < 1e-12 * G
    assert figures.inertia == pytest.approx(MASS * COM * 0.12, rel=1e-12)
    assert figures.pivot_load == pytest.approx((MASS + body.mass) * 9.80665, rel=1e-12)
    assert figures.balances == "all"
    assert figures.warmer == pytest.approx(0.0, abs=1e-12)
    assert figures.heavier == pytest.approx(0.1, rel=1e-9)  # a tenth of cos q, at q = 0
    assert figures.stored_energy == 0.0


def test_pulley_becomes_exact_as_its_radius_vanishes():
    """The error law is first order in the radius at most; a spring of zero free length is left at none."""
    worst = []
    for radius in (8e-3, 2e-3, 1e-6):
        found = compare_methods(
            ARM,
            over=ARM.poses(61),
            attach_radius=(B, B),
            anchor_height=(A, A),
            methods="pulley",
            assumptions=MethodAssumptions(pulley_radius=radius, bearing_friction=0.0),
        )
        row = found.row("pulley").require()
        worst.append(row.figures.residual.worst_fraction)
        spring = row.mechanism.springs[0].spring
    assert worst[0] > worst[1] > worst[2]
    assert worst[2] < 1e-6
    assert spring.rate * A * B == pytest.approx(G, rel=1e-4)


def test_of_pulleys_that_balance_alike_the_one_that_loads_the_pivot_least(everything):
    """R = i m g - k (i a - b e^{iq}) falls with longer levers: by brute force over the corners of the box."""
    mine = everything.row("pulley").figures
    for radius in BOX["attach_radius"]:
        for height in BOX["anchor_height"]:
            corner = compare_methods(
                RUBBING,
                over=RUBBING.poses(61),
                attach_radius=(radius,) * 2,
                anchor_height=(height,) * 2,
                methods="pulley",
            ).row("pulley")
            if corner.success and corner.figures.residual.worst_fraction < mine.residual.worst_fraction:
                assert mine.pivot_load <= corner.figures.pivot_load * (1 + 1e-9)


def test_a_spring_behind_a_pulley_has_room_there(everything):
    """Half of its greatest length is stretch, and half a metre is assumed."""
    mechanism = everything.row("pulley").mechanism
    stretch = mechanism.spring_states(RUBBING.poses(61))[0].length
    assert 2.0 * stretch.max() <= 0.5 * (1 + 1e-6)
    short = compare_methods(
        RUBBING, over=RUBBING.poses(31), methods="pulley", assumptions=MethodAssumptions(room_behind_pulley=0.1), **BOX
    )
    row = short.row("pulley").require()
    assert 2.0 * row.mechanism.spring_states(RUBBING.poses(31))[0].length.max() <= 0.1 * (1 + 1e-6)
    assert "up to 100.00 mm long with its coils" in row.sizes
    assert row.figures.residual.worst > everything.row("pulley").figures.residual.worst


def test_balanced_methods_take_equal_effort_up_and_down(everything):
    """Up takes the residual and the friction, down the friction less it: equal to twice the residual at most."""
    for row in everything.rows:
        figures = row.figures
        assert abs(figures.effort_up - figures.effort_down) <= 2.0 * figures.residual.worst + 1e-9
        assert figures.effort_up <= figures.friction + figures.residual.worst + 1e-12
    for method in ("counterweight", "spool"):
        figures = everything.row(method).figures
        assert figures.effort_up == pytest.approx(0.1, abs=1e-9)
        assert figures.effort_down == pytest.approx(0.1, abs=1e-9)
        assert figures.must_hold == 0.0
        assert len(figures.stays) == 1
        assert figures.stays[0] == pytest.approx((-SIXTY, SIXTY))


def test_what_practice_says(everything):
    """Common practice, no source: weights and hidden springs balance at all angles, torsion and the like at a few."""
    assert {everything.row(m).figures.balances for m in ("counterweight", "spool")} == {"all"}
    assert everything.row("pulley").figures.balances == "near all"
    for method in ("torsion", "constant force", "straight"):
        assert everything.row(method).figures.balances in ("1", "2")
    assert everything.row("gas").figures.balances in ("1", "2", "3")
    order = everything.ranking
    assert order.index("pulley") < order.index("straight") < order.index("torsion")


def test_constant_force_is_the_middle_of_the_cosine(everything):
    """Minimax of a constant against cos q from 1/2 to 1: 3/4 of G, 1/4 left, balanced at ±acos(3/4)."""
    row = everything.row("constant force")
    assert row.mechanism.springs[0].spring.pull * 0.04 == pytest.approx(0.75 * G, rel=1e-9)
    assert row.figures.residual.worst_fraction == pytest.approx(0.25, rel=1e-9)
    assert row.figures.equilibria.angles == pytest.approx((-math.acos(0.75), math.acos(0.75)), abs=1e-9)
    assert row.figures.must_hold == pytest.approx(0.25 * G - 0.1, rel=1e-9)


def test_ranges_that_stay_put(everything):
    """|3/4 - cos q| <= friction/G, solved by hand."""
    share = 0.1 / G
    inner, outer = math.acos(0.75 + share), math.acos(0.75 - share)
    found = everything.row("constant force").figures.stays
    assert len(found) == 2
    grid = 2 * SIXTY / 720
    assert found[0] == pytest.approx((-outer, -inner), abs=grid)
    assert found[1] == pytest.approx((inner, outer), abs=grid)


def test_the_spool_conserves_energy(everything):
    """Energy argument: gravity's and the spring's add up to a constant, by integrating neither torque."""
    row = everything.row("spool")
    q = np.linspace(-SIXTY, SIXTY, 97)
    total = row.mechanism.energy(q)
    assert np.ptp(total) < 1e-9 * G
    state = row.mechanism.spring_states(q)[0]
    spring = row.mechanism.springs[0].spring
    stretch = state.length - spring.free_length
    assert 0.1 < stretch.min() / stretch.max() < 0.3  # at 0.3 the line would be hollow
    assert spring.initial_tension / state.load.max() == pytest.approx(0.1, rel=1e-9)
    assert spring.free_length / state.length.max() == pytest.approx(0.5, rel=1e-9)
    assert np.abs(row.mechanism.springs[0].path.moment_radii).max() == pytest.approx(0.12, rel=1e-12)


@pytest.mark.parametrize(
    ("low", "high"), [(-60, 60), (-60, 80), (-60, 89), (-60, 90), (-85, 20), (90, 240), (130, 240)]
)
def test_a_cable_can_wind_on_the_spool(low, high):
    """Radius of curvature p + p'' by differences of a support function that is sampled anew, and by the spool's own solver."""
    ends = math.radians(low), math.radians(high)
    arm = Mechanism(Arm(Body(MASS, (COM, 0.0))), travel=ends)
    row = compare_methods(arm, over=arm.poses(31), methods="spool", **BOX).row("spool").require()
    mount = row.mechanism.springs[0]
    q = np.linspace(*ends, 2001)[1:-1]
    load = mount.spring.load(mount.path.length(arm.linkage, q))
    step = 1e-4
    p = [
        np.abs(G * np.cos(q + i * step) / mount.spring.load(mount.path.length(arm.linkage, q + i * step)))
        for i in (-1, 0, 1)
    ]
    inner = (q > ends[0] + 0.02) & (q < ends[1] - 0.02) & (load > 0.05 * load.max())
    assert np.all((p[1] + (p[0] - 2 * p[1] + p[2]) / step**2)[inner] > 0.0)
    top = ends[1] if high <= 90 else ends[0]
    length = max(float(mount.path.length(arm.linkage, top)), mount.spring.free_length)
    shaped = balance.shape_spool(
        arm, mount.spring, leaves=0.0, cable_diameter=0.0, start_length=length, start_angle=top
    )
    assert shaped.success
    assert np.max(np.abs(shaped.moment_radii)) == pytest.approx(0.12, rel=1e-6)


def test_a_preload_that_would_make_the_line_hollow_is_lowered():
    """The closed form of a preloaded spool says where it is convex; at the assumed 0.3 it would not be up to 60 deg."""
    spool = compare_methods(ARM, over=ARM.poses(31), methods="spool", **BOX).row("spool").require()
    spring = spool.mechanism.springs[0].spring
    x = spool.mechanism.spring_states(ARM.poses(31))[0].length
    least = spring.load(float(x.min())) / spring.rate  # stretch beyond the unloaded length at 60 deg
    # Preload energy referred to the upright: k x0^2 = k least^2 - 2 G (1 - cos 30 deg).
    square = least**2 - 2.0 * G * (1.0 - math.cos(math.radians(30.0))) / spring.rate
    assert square < 0.0 or balance.convex_beyond(2.0 * G / (spring.rate * square)) <= math.radians(30.0)


def test_assumed_properties_are_kept(everything):
    q = RUBBING.poses(61)
    spring = everything.row("straight").mechanism.springs[0].spring
    x = everything.row("straight").mechanism.spring_states(q)[0]
    assert x.length.min() >= spring.free_length * (1 - 1e-7)
    assert x.length.max() <= 2.0 * spring.free_length * (1 + 1e-7)
    assert spring.initial_tension == pytest.approx(0.1 * spring.load(2.0 * spring.free_length), rel=1e-6)
    gas = everything.row("gas").mechanism.springs[0].spring
    assert gas.extended_length == pytest.approx(2 * gas.stroke + 0.05, rel=1e-9)
    assert gas.load(gas.extended_length - gas.stroke) / gas.load(gas.extended_length) == pytest.approx(1.3, rel=1e-9)
    for method in ("rubber", "rubber pulley"):
        mechanism = everything.row(method).mechanism
        tube = mechanism.springs[0].spring
        length = mechanism.spring_states(q)[0].length
        assert length.min() >= 1.2 * tube.free_length * (1 - 1e-6)
        assert length.max() <= 3.0 * tube.free_length * (1 + 1e-6)


def test_temperature_of_a_gas_spring_and_of_steel(everything):
    """20 K about 293.15 K: steel -0.5 % of its load, nitrogen some 7 to 8 %, rubber 0.8·20/293.15."""
    pulley = everything.row("pulley").figures
    # Half a per cent of a cosine, less or more by what is left over in any case.
    assert pulley.warmer == pytest.approx(0.005, abs=2.0 * pulley.residual.worst_fraction + 1e-6)
    assert 0.06 < everything.row("gas").figures.warmer < 0.09
    assert everything.row("rubber").figures.warmer == pytest.approx(0.8 * 20 / 293.15, abs=2e-3)


@pytest.mark.parametrize("turn", [0.7, math.pi])
def test_turning_arm_and_gravity_together_changes_nothing(turn):
    """Gravity from another side with the arm turned along: the same table."""
    gravity = (9.80665 * math.sin(turn), -9.80665 * math.cos(turn))
    moved = Mechanism(Arm(Body(MASS, (COM * math.cos(turn), COM * math.sin(turn)))), travel=(-SIXTY, SIXTY))
    methods = ["pulley", "straight", "gas", "torsion", "spool"]
    one = compare_methods(ARM, over=ARM.poses(31), methods=methods, **BOX)
    other = compare_methods(moved, over=ARM.poses(31), methods=methods, gravity=gravity, **BOX)
    for method in methods:
        mine, theirs = (found.row(method).figures.residual.worst_fraction for found in (one, other))
        assert mine == pytest.approx(theirs, rel=0.05, abs=2e-4)


def test_an_arm_on_the_other_side_is_balanced_as_well():
    """Mirrored at the vertical: q from 120 to 240 deg."""
    left = Mechanism(Arm(Body(MASS, (COM, 0.0))), travel=(math.pi - SIXTY, math.pi + SIXTY))
    one = compare_methods(ARM, over=ARM.poses(31), **BOX)
    other = compare_methods(left, over=left.poses(31), **BOX)
    for method in METHODS:
        mine, theirs = (found.row(method).figures.residual.worst_fraction for found in (one, other))
        assert mine == pytest.approx(theirs, rel=1e-3 if method == "torsion" else 0.05, abs=2e-3), method


def test_an_arm_that_swings_to_both_sides_has_two_rollers():
    """The error of rollers grows with the cube of the deflection and with their radius: small at 3 mm."""
    arm = Mechanism(Arm(Body(MASS, (COM, 0.0))), travel=(math.radians(20), math.radians(130)))
    worst = []
    for radius in (12e-3, 3e-3):
        found = compare_methods(
            arm, over=arm.poses(41), methods="pulley", assumptions=MethodAssumptions(pulley_radius=radius), **BOX
        )
        row = found.row("pulley").require()
        assert "two rollers" in row.sizes
        assert row.figures.balances == "near all"
        worst.append(row.figures.residual.worst)
    assert worst[1] < 0.4 * worst[0]


def test_pivot_loads_of_a_spool_are_upper_bounds(everything):
    """Weight and pull in line are the most that can come together; friction under load takes the same bound."""
    figures = everything.row("constant force").figures
    pull = everything.row("constant force").mechanism.springs[0].spring.pull
    assert not figures.pivot_load_known
    assert figures.pivot_load == pytest.approx(MASS * 9.80665 + pull, rel=1e-12)
    journal = Mechanism(
        Arm(Body(MASS, (COM, 0.0))),
        friction=Friction(0.1, pivot_friction=0.1, pivot_radius=0.01),
        travel=(-SIXTY, SIXTY),
    )
    there = compare_methods(journal, over=journal.poses(31), methods="constant force", **BOX).row("constant force")
    assert there.figures.friction == pytest.approx(0.1 + 0.001 * there.figures.pivot_load, rel=1e-12)

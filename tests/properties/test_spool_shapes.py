"""Spools on random arms, springs and roller places: energies, torques, curvature, mirrors and scales."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from springpoise import (
    Arm,
    Body,
    ConstantForceSpring,
    ExtensionSpring,
    FourBar,
    JointTravel,
    Link,
    MeasuredSpring,
    Mechanism,
    Point,
    Spool,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.balance.spools.shape import shape_spool
from springpoise.paths import GuideRoller
from springpoise.springs import in_series

moderate = settings(max_examples=15)
few = settings(max_examples=8)

rates = st.floats(600.0, 4000.0)
lines = st.builds(ZeroLengthSpring, rates)
coils = st.builds(
    lambda rate, free, tension: ExtensionSpring(rate, free_length=free, initial_tension=tension),
    rates,
    st.floats(0.03, 0.2),
    st.floats(0.0, 20.0),
)
springs = st.one_of(
    lines,
    coils,
    st.builds(ConstantForceSpring, st.floats(20.0, 300.0)),
    st.builds(
        lambda rate, harder: MeasuredSpring(
            [0.0, 0.1, 0.2, 0.4, 3.0], [0.0, 0.1 * rate, 0.2 * rate, harder * 0.4 * rate, 4 * harder * rate]
        ),
        rates,
        st.floats(1.05, 1.5),
    ),
    st.builds(
        lambda a, b: in_series(
            ExtensionSpring(a, free_length=0.05), ExtensionSpring(b, free_length=0.08, initial_tension=3.0)
        ),
        rates,
        rates,
    ),
)


def _start(spring, stretch):
    low = spring.working_range[0]
    return (low if math.isfinite(low) else 0.1) + stretch


@st.composite
def layouts(draw, springs=springs):
    """An arm on the one side of the pivot or the other, a range on one side of the vertical, a preloaded spring."""
    side = draw(st.sampled_from([1, -1]))
    middle = draw(st.floats(-0.6, 0.6)) + (0.0 if side > 0 else math.pi)
    half = draw(st.floats(0.2, 0.7))
    arm = Arm(Body(draw(st.floats(0.5, 5.0)), (draw(st.floats(0.1, 0.5)), draw(st.floats(-0.05, 0.05)))))
    spring = draw(springs)
    if draw(st.booleans()):
        leaves = draw(st.floats(-3.0, 3.0))
    else:
        away, bearing = draw(st.floats(0.5, 1.0)), draw(st.floats(-3.0, 3.0))
        leaves = GuideRoller(
            (away * math.cos(bearing), away * math.sin(bearing)),
            radius=draw(st.floats(0.0, 0.02)),
            side=draw(st.sampled_from([1, -1])),
        )
    start = _start(spring, draw(st.floats(0.03, 0.2)))
    return arm, spring, {"leaves": leaves, "over": (middle - half, middle + half), "start_length": start}


@moderate
@given(layouts(), st.integers(1, 3))
def test_energy_torque_and_line(layout, count):
    arm, spring, options = layout
    spool = shape_spool(arm, spring, cable_diameter=0.002, count=count, **options)
    assume(np.all(np.isfinite(spool.moment_radii)))
    mech, q = spool.mechanism, spool.angles
    size = mech.peak_gravity_torque()
    middles = 0.5 * (q[1:] + q[:-1])
    smooth = not isinstance(spring, MeasuredSpring)  # its stiffness has jumps, and so has the line
    assert np.ptp(mech.energy(q)) < (1e-9 if smooth else 1e-5) * size
    assert np.max(np.abs(mech.holding_torque(q))) < 1e-9 * size
    assert np.max(np.abs(mech.holding_torque(middles))) < (1e-9 if smooth else 1e-2) * size
    # the path in the mechanism is the spring's own length
    states = mech.spring_states(q)[0]
    assert np.allclose(states.length, spool.spring_lengths, rtol=0, atol=1e-12 if smooth else 1e-6)
    # p = dx/dq, and the signs that go with the pull
    way = 1 if spool.pull == "ccw" else -1
    assert np.all(way * spool.moment_radii < 0)
    assert np.all(np.diff(spool.spring_lengths) * way < 0)


@few
@given(layouts(st.one_of(lines, coils)))
def test_a_cable_that_winds_on_the_line_gives_the_same_moment_radii(layout):
    arm, spring, options = layout
    spool = shape_spool(arm, spring, cable_diameter=0.002, **options)
    assume(spool.success)
    # A line that reaches out past its roller is refused by the path class, whose steps do not settle there.
    assume(np.max(np.hypot(*spool.pitch_line.T)) < 0.5)
    assert spool.roll_out_error < 1e-9
    low, high = options["over"]
    inside = (low + 1e-3, high - 1e-3)
    # The path class finds the tangents on its own, from the points alone.
    wound = Spool.from_profile(spool.pitch_line, leaves=spool.leaves, pull=spool.pull, over=inside)
    own = spool.mechanism.springs[-1].path.gradient(arm, wound.angles)[0]
    assert np.max(np.abs(wound.moment_radii - own)) < 1e-9
    # What is machined lies half the cable's diameter inside, and is convex too.
    gap = spool.pitch_line - spool.machined_line
    assert np.allclose(np.hypot(*gap.T), 0.001, rtol=0, atol=1e-14)
    steps = np.diff(spool.machined_line, axis=0)
    turning = steps[:-1, 0] * steps[1:, 1] - steps[:-1, 1] * steps[1:, 0]
    assert np.all(turning > 0) or np.all(turning < 0)


@moderate
@given(layouts())
def test_checks_agree_with_the_arrays(layout):
    arm, spring, options = layout
    spool = shape_spool(arm, spring, cable_diameter=0.002, **options)
    assume(np.all(np.isfinite(spool.curvature_radii)))
    check = spool.checks[0]
    assert check.value <= np.min(spool.curvature_radii) + 1e-12
    failing = np.zeros(spool.angles.shape, dtype=bool)
    for low, high in check.fails_over:
        failing |= (spool.angles >= low) & (spool.angles <= high)
    clear = np.abs(spool.curvature_radii - check.allowed) > 1e-9
    assert np.array_equal(failing[clear], (spool.curvature_radii < check.allowed)[clear])


@few
@given(layouts(st.one_of(lines, coils)))
def test_mirrored(layout):
    arm, spring, options = layout
    spool = shape_spool(arm, spring, cable_diameter=0.002, **options)
    assume(spool.success)
    low, high = options["over"]
    body = arm.bodies[0]
    leaves = options["leaves"]
    if isinstance(leaves, GuideRoller):
        other_leaves = GuideRoller((-leaves.at[0], leaves.at[1]), radius=leaves.radius, side=leaves.side)
    else:
        other_leaves = math.pi - leaves
    # Mirrored about the vertical, q becomes π - q and the arm's own y axis changes its sign.
    other = shape_spool(
        Arm(Body(body.mass, (body.com[0], -body.com[1]))),
        spring,
        cable_diameter=0.002,
        leaves=other_leaves,
        over=(math.pi - high, math.pi - low),
        start_length=options["start_length"],
    )
    assume(len(other.angles) == len(spool.angles))
    assert {spool.pull, other.pull} == {"cw", "ccw"}
    assert np.allclose(other.pitch_line[::-1] * [1, -1], spool.pitch_line, rtol=0, atol=1e-9)
    assert other.least_curvature_radius == pytest.approx(spool.least_curvature_radius, rel=1e-6, abs=1e-9)


@few
@given(layouts(coils), st.floats(0.3, 3.0), st.floats(0.3, 3.0))
def test_scaled(layout, long, strong):
    """Lengths by one factor, forces by another: the line grows with the lengths alone."""
    arm, spring, options = layout
    body, leaves = arm.bodies[0], options["leaves"]
    if isinstance(leaves, GuideRoller):
        leaves = GuideRoller(tuple(long * x for x in leaves.at), radius=long * leaves.radius, side=leaves.side)
    spool = shape_spool(arm, spring, cable_diameter=0.002, **options)
    other = shape_spool(
        Arm(Body(strong * body.mass, tuple(long * x for x in body.com))),
        ExtensionSpring(
            spring.rate * strong / long,
            free_length=long * spring.free_length,
            initial_tension=strong * spring.initial_tension,
        ),
        cable_diameter=0.002 * long,
        leaves=leaves,
        over=options["over"],
        start_length=long * options["start_length"],
    )
    n = min(len(spool.angles), len(other.angles))
    assume(len(spool.angles) == len(other.angles) == n)
    assert np.allclose(other.pitch_line, long * spool.pitch_line, rtol=1e-9, atol=1e-12, equal_nan=True)
    assert other.success == spool.success


@few
@given(st.floats(0.2, 1.0), st.floats(100.0, 600.0), st.floats(0.02, 0.1))
def test_springs_that_are_there_are_counted_in(share, rate, stretch):
    """An arm that another spring carries in part: the spool's spring takes the rest."""
    arm = Arm(Body(2.0, (0.35, 0.0)))
    helper = SpringMount(
        ZeroLengthSpring(share * 400.0), Straight(Point("ground", (0, 0.1)), Point("arm", (0.08, 0.0)))
    )
    torsion = SpringMount(TorsionSpring(0.3), JointTravel())
    mech = Mechanism(arm, springs=[helper, torsion], travel=(-0.7, 0.7))
    spool = shape_spool(
        mech, ExtensionSpring(rate, free_length=0.1), leaves=2.0, cable_diameter=0, start_length=0.1 + stretch
    )
    assert np.max(np.abs(spool.mechanism.holding_torque(spool.angles))) < 1e-8
    assert spool.mechanism.springs[:2] == mech.springs


def test_a_linkage_other_than_an_arm():
    bar = FourBar(
        crank=Link("crank", Body(1.0, (0.1, 0.0)), length=0.2),
        coupler=Link("coupler", Body(0.5, (0.2, 0.0)), length=0.4),
        rocker=Link("rocker", Body(0.8, (0.1, 0.0)), length=0.25),
        second_pivot=(0.39, 0.07),
    )
    mech = Mechanism(bar, travel=(0.6, 1.2))
    spool = shape_spool(
        mech, ExtensionSpring(800.0, free_length=0.1), leaves=-2.0, cable_diameter=0.001, start_length=0.15
    )
    middles = 0.5 * (spool.angles[1:] + spool.angles[:-1])
    assert np.max(np.abs(spool.mechanism.holding_torque(middles))) < 1e-9
    assert np.ptp(spool.mechanism.energy(spool.angles)) < 1e-9


class TwoStages:
    """A spring whose stiffness grows at once, or drops, where it is 0.1675 m long."""

    def __init__(self, before, behind):
        self.before, self.behind = before, behind

    def load(self, x):
        return self.before * x + (self.behind - self.before) * np.maximum(x - 0.1675, 0.0)

    def stiffness(self, x):
        return np.where(x > 0.1675, self.behind, self.before)

    def energy(self, x):
        more = np.maximum(x - 0.1675, 0.0)
        return 0.5 * self.before * x * x + 0.5 * (self.behind - self.before) * more * more


def test_a_jump_of_stiffness_makes_a_fold_or_a_facet():
    """dp/dχ is -(τ' + k p²)/F, turned with the winding: it goes back where k grows, and the line with it."""
    options = {"leaves": 3.0, "cable_diameter": 0.001, "over": (-0.8, 0.5), "start_length": 0.15}
    arm = Arm(Body(2.0, (0.3, 0.0)))
    spool = shape_spool(arm, TwoStages(800.0, 1600.0), **options)
    assert not spool.success
    (check,) = [check for check in spool.checks if "folds" in check.what]
    ((low, high),) = check.fails_over
    at = np.interp(0.1675, spool.spring_lengths[::-1], spool.angles[::-1])
    assert low - 1e-9 <= at <= high + 1e-9
    # of as much as the formula says
    p = float(np.interp(at, spool.angles, -spool.moment_radii))
    assert check.value == pytest.approx(-800.0 * p**2 / (800.0 * 0.1675), rel=0.05)
    assert spool.roll_out_error == pytest.approx(-2 * check.value, rel=0.2)
    # a flat facet, round which the cable lies as well
    facet = shape_spool(arm, TwoStages(1600.0, 800.0), **{**options, "over": (-0.8, 0.0)})
    assert facet.success
    assert facet.roll_out_error < 1e-6

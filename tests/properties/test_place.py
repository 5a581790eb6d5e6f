"""Placements on random arms: bounds and limits are kept, units scale, exact designs are found."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.balance.placing.geometry import place
from springpoise.carriers import namespace

Q = np.linspace(-0.9, 1.0, 31)
masses = st.floats(0.5, 8.0)
levers = st.floats(0.1, 0.8)
directions = st.floats(-0.5, 0.5)


def _arm(mass, lever, direction):
    return Arm(Body(mass, (lever * math.cos(direction), lever * math.sin(direction))))


def _builder(arm, spring, size=1.0, gravity=None):
    def build(a, b, skew):
        xp = namespace(skew)
        attach = Point("arm", (size * b * xp.cos(skew), size * b * xp.sin(skew)))
        mount = SpringMount(spring, Straight(Point("ground", (0, size * a)), attach))
        return Mechanism(arm, springs=mount, gravity=gravity)

    return build


BOUNDS = {"a": (0.06, 0.25), "b": (0.05, 0.15), "skew": (-0.6, 0.6)}


@settings(max_examples=12)
@given(masses, levers, directions)
def test_a_spring_of_zero_free_length_is_placed_exactly(mass, lever, direction):
    """k a b = m g r, attached along the centre of mass where the anchor is straight above."""
    found = place(_builder(_arm(mass, lever, direction), ZeroLengthSpring(1.0)), knobs=BOUNDS, over=Q, starts=3)
    values = found.require().values
    assert found.residual.worst_fraction < 1e-7
    rate = found.mechanism.springs[0].spring.rate
    assert rate * values["a"] * values["b"] == pytest.approx(mass * 9.80665 * lever, rel=1e-6)
    assert values["skew"] == pytest.approx(direction, abs=1e-6)


def _clearance(mechanism):
    """Least distance of points along the spring from the pivot."""
    path = mechanism.springs[0].path
    first, last = (np.array(np.broadcast_arrays(*mechanism.linkage.position(p, Q), Q)[:2]) for p in path.ends)
    along = np.linspace(0.0, 1.0, 101)[:, None, None]
    return np.min(np.hypot(*np.moveaxis(first + along * (last - first), 1, 0)))


@settings(max_examples=10)
@given(masses, levers, directions, st.floats(0.02, 0.06), st.floats(1.3, 3.0), st.floats(1.5, 6.0))
def test_what_is_found_keeps_bounds_and_limits(mass, lever, direction, free, ratio, load):
    spring = ExtensionSpring(500.0, free_length=free, longest=max(free * ratio, 0.12))
    limit = load * mass * 9.80665
    found = place(
        _builder(_arm(mass, lever, direction), spring),
        knobs=BOUNDS,
        over=Q,
        fit="rate",
        starts=3,
        least_margin=0.002,
        pivot_load_limit=limit,
        keep_out=[(Point("ground", (0, 0)), 0.01)],
    )
    for name, (low, high) in BOUNDS.items():
        assert low <= found.values[name] <= high
    if not found.success:
        assert any(one.margin < 0 for one in found.limits)
        return
    assert all(one.margin >= 0 for one in found.limits)
    states = found.mechanism.spring_states(Q)[0]
    assert np.min(states.margin) >= 0.002 - 1e-7
    assert np.max(found.mechanism.pivot_load(Q)) <= limit * (1 + 1e-6)
    # Nothing else within a step is better and keeps the limits: a local optimum.
    base = found.residual.worst
    random = np.random.default_rng(1)
    for _ in range(10):
        moved = {
            name: float(np.clip(v + 0.02 * (BOUNDS[name][1] - BOUNDS[name][0]) * random.uniform(-1, 1), *BOUNDS[name]))
            for name, v in found.values.items()
        }
        rate = found.mechanism.springs[0].spring.rate
        for factor in (0.99, 1.0, 1.01):
            other = _builder(_arm(mass, lever, direction), attrs.evolve(spring, rate=factor * rate))(**moved)
            kept = (
                np.min(other.spring_states(Q)[0].margin) >= 0.002
                and np.max(other.pivot_load(Q)) <= limit
                and _clearance(other) >= 0.01
            )
            if kept:
                assert np.max(np.abs(other.holding_torque(Q))) >= base * (1 - 1e-4) - 1e-9


@settings(max_examples=8)
@given(st.floats(0.2, 5.0), st.floats(0.2, 5.0))
def test_lengths_and_forces_scale(size, force):
    """Lengths by a and gravity by b: torques by a·b, rates by b/a, knobs of lengths by nothing, being shares."""
    one = place(
        _builder(_arm(2.0, 0.35, 0.1), ExtensionSpring(1.0, free_length=0.03)),
        knobs=BOUNDS,
        over=Q,
        fit="rate",
        starts=2,
    )
    arm = Arm(Body(2.0, (0.35 * size * math.cos(0.1), 0.35 * size * math.sin(0.1))))
    spring = ExtensionSpring(1.0, free_length=0.03 * size)
    other = place(
        _builder(arm, spring, size, gravity=(0.0, -9.80665 * force)), knobs=BOUNDS, over=Q, fit="rate", starts=2
    )
    assert other.residual.worst == pytest.approx(one.residual.worst * size * force, rel=1e-5)
    rates = [found.mechanism.springs[0].spring.rate for found in (one, other)]
    assert rates[1] * other.values["a"] * other.values["b"] * size**2 == pytest.approx(
        rates[0] * one.values["a"] * one.values["b"] * size * force, rel=1e-3
    )


@settings(max_examples=8)
@given(masses, levers, st.integers(0, 1000))
def test_more_room_is_never_worse(mass, lever, seed):
    spring = ExtensionSpring(1.0, free_length=0.03)
    arm = _arm(mass, lever, 0.0)
    small = place(_builder(arm, spring), knobs={**BOUNDS, "a": (0.06, 0.12)}, over=Q, fit="rate", seed=seed, starts=3)
    large = place(_builder(arm, spring), knobs=BOUNDS, over=Q, fit="rate", seed=seed, starts=3)
    assert large.residual.worst <= small.residual.worst * (1 + 1e-5)

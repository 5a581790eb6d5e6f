"""Random gas springs, strips and torque curves: energy, slope and every carrier agree."""

from __future__ import annotations

import math
import warnings

import attrs
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from springpoise.springs.gas.spring import GasSpring
from springpoise.springs.gas.state import NITROGEN, NITROGEN_VAN_DER_WAALS
from springpoise.springs.strips.power_spring import TorqueCurve
from springpoise.springs.strips.strip_spring import StripSpring
from springpoise.springs.warnings import SpringWarning
from springpoise.tape import derivative_of, record

strict = pytest.importorskip("array_api_strict")


def _gas(stroke, gap, pressure, rod, friction, share, exponent, kelvins, gas, ratio):
    return GasSpring(
        filling=pressure,
        rod_diameter=rod,
        gas_length=stroke * ratio,
        stroke=stroke,
        extended_length=2.0 * stroke + gap,
        friction=friction,
        friction_share=share,
        offset=0.05 * stroke,
        exponent=exponent,
        gas=gas,
        temperature=kelvins,
    )


gas_springs = st.builds(
    _gas,
    st.floats(0.03, 0.6),
    st.floats(0.02, 0.2),
    st.floats(1e6, 20e6),
    st.floats(0.003, 0.02),
    st.tuples(st.floats(0.0, 60.0), st.floats(0.0, 60.0)),
    st.sampled_from([0.0, 0.07]),
    st.sampled_from([1.0, 1.0 + 1e-9, 1.15, 1.4]),
    st.sampled_from([293.15, 240.0, 340.0]),
    st.sampled_from(["ideal", "nitrogen", NITROGEN_VAN_DER_WAALS]),
    st.floats(1.5, 20.0),
)


def _strip(pull, take_up, more, gradient, share):
    return StripSpring(
        pull, take_up=take_up, longest=take_up + more, hysteresis_share=share, gradient=gradient * pull / more
    )


strips = st.builds(
    _strip, st.floats(1.0, 200.0), st.floats(0.01, 0.1), st.floats(0.1, 2.0), st.floats(-0.9, 0.5), st.floats(0.0, 0.1)
)


def _curve(steps, torques, first):
    count = min(len(steps), len(torques) - 1)
    angles = first + np.concatenate([[0.0], np.cumsum(steps[:count])])
    return TorqueCurve(angles, torques[: count + 1], hysteresis_share=0.1)


curves = st.builds(
    _curve,
    st.lists(st.floats(0.2, 10.0), min_size=2, max_size=6),
    st.lists(st.floats(0.0, 5.0), min_size=3, max_size=7),
    st.floats(-2.0, 2.0),
)
springs = gas_springs | strips | curves


def span(spring):
    """Coordinates from a little below the working range to a little above."""
    low, high = spring.working_range
    return low - 0.2 * (high - low), high + 0.2 * (high - low)


def corners(spring):
    """Where the load has a corner or a jump."""
    if isinstance(spring, TorqueCurve):
        return spring.angles.tolist()
    return [0.0, *spring.working_range] if isinstance(spring, StripSpring) else list(spring.working_range)


def at(spring, place):
    low, high = span(spring)
    return low + place * (high - low)


def smooth_at(spring, place):
    """A coordinate that is not at a corner."""
    x = at(spring, place)
    low, high = span(spring)
    assume(all(abs(x - corner) > 1e-6 * (high - low) for corner in corners(spring)))
    return x


places = st.floats(0.0, 1.0)


@given(springs, places, places)
@settings(max_examples=60)
def test_energy_is_the_integral_of_the_load(spring, one, other):
    start, stop = sorted((at(spring, one), at(spring, other)))
    between = [corner for corner in corners(spring) if start < corner < stop]
    total = sum(
        quad(spring.load, a, b, epsabs=0.0, epsrel=1e-11, limit=200)[0] if b > a else 0.0
        for a, b in zip([start, *between], [*between, stop], strict=True)
    )
    low, high = span(spring)
    size = abs(spring.energy(low)) + abs(spring.energy(high)) + 1e-12
    assert spring.energy(stop) - spring.energy(start) == pytest.approx(total, rel=1e-8, abs=1e-9 * size)


@given(springs, places)
def test_slopes_are_exact(spring, place):
    x = smooth_at(spring, place)
    load, stiffness = derivative_of(spring.load, x)
    assert load == spring.load(x)
    assert spring.stiffness(x) == pytest.approx(stiffness, rel=1e-10, abs=1e-9)
    assert derivative_of(spring.energy, x)[1] == pytest.approx(load, rel=1e-9, abs=1e-9)


@given(springs)
@settings(max_examples=50)
def test_carriers_agree(spring):
    x = np.linspace(*span(spring), 23)
    for formula in (spring.load, spring.stiffness, spring.energy, spring.hysteresis):
        one_by_one = np.array([formula(value) for value in x.tolist()])
        size = float(np.max(np.abs(one_by_one)))
        close = {"rtol": 1e-12, "atol": 1e-13 * size}
        np.testing.assert_allclose(formula(x), one_by_one, **close)
        np.testing.assert_allclose(formula(x.reshape(23, 1)), one_by_one.reshape(23, 1), **close)
        np.testing.assert_allclose(np.asarray(formula(strict.asarray(x))), one_by_one, **close)
        program = record(formula, inputs=("x",))
        np.testing.assert_allclose(program.numpy_function()(x), one_by_one, **close)
        python = program.python_function()
        np.testing.assert_allclose([python(value) for value in x.tolist()], one_by_one, **close)


@given(springs)
@settings(max_examples=30)
def test_not_a_number_stays_one(spring):
    for formula in (spring.load, spring.stiffness, spring.energy, spring.hysteresis):
        assert math.isnan(formula(math.nan))
        assert np.isnan(formula(np.array([math.nan, at(spring, 0.5)]))).tolist() == [True, False]
        assert math.isnan(record(formula, inputs=("x",)).python_function()(math.nan))


@given(gas_springs)
@settings(max_examples=50)
def test_a_gas_spring_pushes_harder_the_shorter_it_is(spring):
    low, high = span(spring)
    inside = np.linspace(low, spring.extended_length, 101)
    load = spring.load(inside)
    assert np.all(np.diff(load) > 0.0)
    assert np.all(load < 0.0)
    assert np.all(spring.load(np.linspace(spring.extended_length, high, 11)[1:]) == 0.0)
    assert np.all(spring.hysteresis(inside) >= 0.0)
    assert np.all(np.abs(spring.load_compressing(inside)) >= np.abs(load))
    assert np.all(spring.load_extending(inside) >= load)
    assert np.all(np.diff(spring.energy(inside)) < 0.0)


@given(
    st.floats(100.0, 900.0),
    st.floats(1.06, 1.5),
    st.floats(0.0, 80.0),
    st.floats(0.0, 90.0),
    st.floats(0.05, 0.5),
    st.floats(0.0, 0.2),
    st.floats(0.006, 0.014),
    st.sampled_from([1.0, 1.1, 1.3]),
    st.sampled_from(["travel", "force"]),
)
def test_four_forces_come_back(first, rise, f1, f2, stroke, part, rod, exponent, over):
    given_forces = (first, rise * first), (first + 2.0 * f1, rise * first + 2.0 * max(f1, f2))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", SpringWarning)
        spring = GasSpring.from_forces(
            extending=given_forces[0],
            compressing=given_forces[1],
            stroke=stroke,
            rod_diameter=rod,
            extended_length=2.0 * stroke + 0.1,
            offset=part * stroke,
            exponent=exponent,
            friction_over=over,
        )
    back = spring.forces(offset=part * stroke)
    assert back.extending == pytest.approx(given_forces[0], rel=1e-11)
    assert back.compressing == pytest.approx(given_forces[1], rel=1e-11)


@given(gas_springs, st.sampled_from([250.0, 300.0, 345.0]))
@settings(max_examples=40)
def test_temperature_is_forgotten_on_the_way(spring, kelvins):
    assert spring.at_temperature(kelvins).at_temperature(spring.temperature) == spring
    colder, warmer = spring.at_temperature(280.0), spring.at_temperature(310.0)
    x = np.linspace(*spring.working_range, 7)
    assert np.all(np.abs(colder.load(x)) < np.abs(warmer.load(x)))


@given(st.floats(1e5, 60e6), st.floats(230.0, 400.0), st.floats(230.0, 400.0))
def test_equations_of_state_invert(pressure, temperature, to):
    for gas in (NITROGEN, NITROGEN_VAN_DER_WAALS):
        assert gas.at_constant_volume(pressure, temperature, temperature) == pytest.approx(pressure, rel=1e-10)
        there = gas.at_constant_volume(pressure, temperature, to)
        assert gas.at_constant_volume(there, to, temperature) == pytest.approx(pressure, rel=1e-9)


@given(gas_springs, st.floats(0.5, 3.0), st.floats(0.5, 3.0))
@settings(max_examples=40)
def test_dimensions(spring, a, b):
    """Every length times a and every force times b: load times b, energy times a·b, stiffness times b/a."""
    spring = attrs.evolve(spring, gas="ideal")
    pressure = b / (a * a)
    scaled = attrs.evolve(
        spring,
        filling=pressure * spring.filling,
        atmospheric_pressure=pressure * spring.atmospheric_pressure,
        rod_diameter=a * spring.rod_diameter,
        gas_length=a * spring.gas_length,
        stroke=a * spring.stroke,
        extended_length=a * spring.extended_length,
        offset=a * spring.offset,
        friction=tuple(b * value for value in spring.friction),
    )
    x = np.linspace(spring.working_range[0] * 0.95, spring.working_range[1] * 0.999, 9)
    np.testing.assert_allclose(scaled.load(a * x), b * spring.load(x), rtol=1e-9)
    np.testing.assert_allclose(scaled.hysteresis(a * x), b * spring.hysteresis(x), rtol=1e-9, atol=1e-12)
    np.testing.assert_allclose(scaled.energy(a * x), a * b * spring.energy(x), rtol=1e-9)
    np.testing.assert_allclose(scaled.stiffness(a * x), b / a * spring.stiffness(x), rtol=1e-9)


def test_scattered_builds_broadcast():
    builds = np.array([[0.9], [1.0], [1.1]])
    one = _gas(0.2, 0.1, 8e6, 0.008, (30.0, 36.0), 0.0, 1.0, 293.15, "ideal", 3.6)
    for many, single in (
        (attrs.evolve(one, filling=8e6 * builds), lambda f: attrs.evolve(one, filling=8e6 * f)),
        (attrs.evolve(one, exponent=1.1 * builds + 0.1), lambda f: attrs.evolve(one, exponent=1.1 * f + 0.1)),
        (attrs.evolve(one, stroke=0.2 * builds), lambda f: attrs.evolve(one, stroke=0.2 * f)),
        (attrs.evolve(one, friction=(30.0 * builds, 36.0)), lambda f: attrs.evolve(one, friction=(30.0 * f, 36.0))),
        (
            attrs.evolve(one, filling=8e6 * builds, gas="nitrogen", temperature=330.0),
            lambda f: attrs.evolve(one, filling=8e6 * f, gas="nitrogen", temperature=330.0),
        ),
    ):
        x = np.linspace(0.28, 0.51, 7)
        for name in ("load", "stiffness", "energy", "hysteresis"):
            rows = np.stack([getattr(single(f), name)(x) for f in (0.9, 1.0, 1.1)])
            np.testing.assert_allclose(getattr(many, name)(x) + 0.0 * builds, rows, rtol=1e-12, atol=1e-12)

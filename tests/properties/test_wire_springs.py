"""Coils of random proportions: laws that must hold whatever the numbers."""

from __future__ import annotations

import math
import warnings
from typing import Any

import attrs
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st
from scipy.integrate import quad

from springpoise.springs.materials import HARD_DRAWN, MUSIC_WIRE, OIL_TEMPERED, STAINLESS_302, WireMaterial
from springpoise.springs.wire import buckling, stress_factors
from springpoise.springs.wire.coil_sizing import index_for_load
from springpoise.springs.wire.compression_coil import CompressionCoil
from springpoise.springs.wire.extension_coil import ExtensionCoil
from springpoise.springs.wire.fatigue import CRITERIA, fatigue_factor, greatest_load
from springpoise.springs.wire.torsion_coil import TorsionCoil
from springpoise.tape import derivative_of, record

wires = st.floats(0.8e-3, 6e-3)
indices = st.floats(4.0, 12.0)
turns = st.floats(3.0, 15.0)
materials = st.sampled_from([MUSIC_WIRE, HARD_DRAWN, OIL_TEMPERED, STAINLESS_302])
UNIFORM = attrs.evolve(MUSIC_WIRE, strength="1800 MPa", young_modulus="200 GPa", shear_modulus="80 GPa")


def extension_of(wire: Any, index: Any, coils: Any, material: WireMaterial, share: float = 0.3) -> ExtensionCoil:
    fields: dict[str, Any] = {
        "wire": wire,
        "mean_diameter": index * wire,
        "body_coils": coils,
        "material": material,
        "hook_radius": 0.5 * index * wire,
        "hook_bend_radius": 2.0 * wire,
    }
    bare = ExtensionCoil(**fields)
    return ExtensionCoil(**fields, initial_tension=share * bare.usual_initial_tension[1])


@st.composite
def extensions(draw: st.DrawFn) -> ExtensionCoil:
    return extension_of(draw(wires), draw(indices), draw(st.floats(5, 60)), draw(materials), draw(st.floats(0, 0.99)))


@st.composite
def compressions(draw: st.DrawFn) -> CompressionCoil:
    wire, active = draw(wires), draw(turns)
    return CompressionCoil(
        wire=wire,
        mean_diameter=draw(indices) * wire,
        total_coils=active + 2,
        ends="squared ground",
        free_length=wire * (active + 2) * draw(st.floats(1.1, 4.0)),
        material=draw(materials),
        support="guided",
    )


@st.composite
def torsions(draw: st.DrawFn) -> TorsionCoil:
    wire = draw(wires)
    return TorsionCoil(
        wire=wire,
        mean_diameter=draw(indices) * wire,
        body_coils=draw(turns),
        legs=(draw(st.floats(0, 0.05)), draw(st.floats(0, 0.05))),
        material=draw(materials),
        friction=draw(st.sampled_from(["none", "averaged"])),
    )


coils: st.SearchStrategy[Any] = st.one_of(extensions(), compressions(), torsions())


def stretch(coil: Any) -> tuple[Any, float, float]:
    """The coil's spring, with the ends of its range: least and greatest size of the load."""
    spring = coil.spring()
    low, high = spring.working_range
    return (spring, high, low) if isinstance(coil, CompressionCoil) else (spring, low, high)


@given(coils, st.floats(0.05, 1.0))
def test_energy_is_the_integral_of_the_load(coil: Any, part: float) -> None:
    spring, start, end = stretch(coil)
    x = start + part * (end - start)
    inside = start + 1e-9 * (end - start)
    work, _ = quad(spring.load, inside, x)
    assert spring.energy(x) - spring.energy(inside) == pytest.approx(work, rel=1e-9)


@given(coils, st.floats(0.05, 0.95))
def test_stiffness_is_the_slope_of_the_load(coil: Any, part: float) -> None:
    spring, start, end = stretch(coil)
    x = start + part * (end - start)
    assert derivative_of(spring.load, x)[1] == pytest.approx(spring.stiffness(x), rel=1e-12)
    assert derivative_of(spring.energy, x)[1] == pytest.approx(spring.load(x), rel=1e-12)
    assert spring.stiffness(x) == pytest.approx(coil.rate, rel=1e-12)


@given(coils)
def test_arrays_nan_and_tape(coil: Any) -> None:
    spring, start, end = stretch(coil)
    x = np.linspace(start - 0.1 * (end - start), end, 9)
    for law in (spring.load, spring.stiffness, spring.energy, spring.hysteresis):
        apart = np.array([law(float(each)) for each in x])
        assert np.array_equal(law(x), apart)
        fast = record(law, inputs=("x",))
        assert fast.numpy_function()(x) == pytest.approx(apart, rel=1e-12, abs=1e-12)
        plain = fast.python_function()
        assert [plain(float(each)) for each in x] == pytest.approx(apart, rel=1e-12, abs=1e-12)
        assert math.isnan(law(math.nan)) or law == spring.stiffness  # a slope may be constant


@given(coils)
def test_the_load_grows_along_the_range(coil: Any) -> None:
    spring, start, end = stretch(coil)
    assert np.all(np.diff(np.abs(spring.load(np.linspace(start, end, 20)[1:]))) > 0)


@given(coils, st.floats(0.1, 0.9))
def test_every_static_limit_is_met_at_the_end_of_the_range(coil: Any, part: float) -> None:
    spring, _, end = stretch(coil)
    highest = abs(spring.load(end))
    margins = coil.margins((part * highest, highest))
    scores = [m.score for m in margins.margins if m.name != "body, solid"]
    assert min(scores) == pytest.approx(1.0, rel=1e-9)
    assert margins.load_left == pytest.approx(0.0, abs=1e-9 * highest)
    assert margins.energy == pytest.approx(spring.energy(end), rel=1e-9)


@given(coils, st.floats(0.5, 3.0))
def test_scaled_geometry(coil: Any, a: float) -> None:
    """Lengths times a, same wire: rates scale as a (a³ per rad), loads as a² (a³), frequencies as 1/a."""
    lengths = {
        name: tuple(a * leg for leg in value) if name == "legs" else a * value
        for name in ("wire", "mean_diameter", "hook_radius", "hook_bend_radius", "free_length", "legs")
        if (value := getattr(coil, name, None)) is not None
    }
    one = attrs.evolve(coil, material=UNIFORM)
    if isinstance(coil, TorsionCoil):
        other = attrs.evolve(one, **lengths)
        assert other.rate == pytest.approx(a**3 * one.rate, rel=1e-9)
        for name, moment in other.limit_moments().items():
            assert moment == pytest.approx(a**3 * one.limit_moments()[name], rel=1e-9)
        return
    if isinstance(coil, ExtensionCoil):
        lengths["initial_tension"] = a**2 * coil.initial_tension
    other = attrs.evolve(one, **lengths)
    assert other.rate == pytest.approx(a * one.rate, rel=1e-9)
    assert other.surge_frequency() == pytest.approx(one.surge_frequency() / a, rel=1e-9)
    if isinstance(coil, ExtensionCoil):
        for name, load in other.limit_loads().items():
            assert load == pytest.approx(a**2 * one.limit_loads()[name], rel=1e-9)
    else:
        assert other.solid_load == pytest.approx(a**2 * one.solid_load, rel=1e-9)
    assert other.mass == pytest.approx(a**3 * one.mass, rel=1e-9)


@given(st.floats(1.7e-3, 3.1e-3), indices)
def test_geometry_on_every_carrier(wire: float, index: float) -> None:
    """Rate and limits of a coil as functions of its wire: floats, arrays, tape and slopes agree."""

    def numbers(d: Any) -> tuple[Any, ...]:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            one = extension_of(d, index, 30.0, MUSIC_WIRE)
        return (one.rate, one.mass, one.surge_frequency(), *one.limit_loads(fatigue="gerber", lowest_load=1.0).values())

    eager = numbers(wire)
    program = record(numbers, inputs=("d",))
    assert program.python_function()(wire) == pytest.approx(eager, rel=1e-12)
    together = numbers(np.array([wire, 1.1 * wire]))
    assert [float(value[0]) for value in together] == pytest.approx(eager, rel=1e-12)
    # rate = G d⁴/(8 (C d)³ Na) is proportional to d, apart from the steps of G
    value, slope = derivative_of(lambda d: numbers(d)[0], wire)
    assert slope == pytest.approx(value / wire, rel=1e-9)


@given(
    st.sampled_from(CRITERIA),
    st.floats(1e6, 1e9),
    st.floats(0.0, 50.0),
    st.floats(100e6, 600e6),
    st.floats(700e6, 2000e6),
    st.floats(1.0, 3.0),
)
def test_the_greatest_load_meets_its_criterion(
    criterion: str, stress: float, lowest: float, limit: float, strength: float, safety: float
) -> None:
    highest = greatest_load(criterion, lowest, stress, limit, strength, safety)
    if highest < lowest:  # the mean alone is too much
        assert criterion != "sines"
        return
    amplitude, mean = 0.5 * stress * (highest - lowest), 0.5 * stress * (highest + lowest)
    if amplitude > 1e-6 * limit:
        assert fatigue_factor(criterion, amplitude, mean, limit, strength) == pytest.approx(safety, rel=1e-6)


@given(st.floats(3.0, 16.0), wires)
def test_index_and_load_are_inverse(index: float, wire: float) -> None:
    load = 1e9 / (stress_factors.bergstraesser(index) * 8 * index / (math.pi * wire**2))
    assert index_for_load(1e9, wire, load) == pytest.approx(index, rel=1e-9)


@given(st.floats(0.5, 3.0), st.sampled_from([0.5, 0.707, 1.0, 2.0]))
def test_buckling_begins_at_the_stable_length(times: float, alpha: float) -> None:
    assume(abs(times - 1.0) > 1e-9)
    limit = buckling.stable_length(0.02, alpha, 200e9, 80e9)
    critical = buckling.critical_shortening(times * limit, 0.02, alpha, 200e9, 80e9)
    assert math.isinf(critical) == (times <= 1.0)
    longer = buckling.critical_shortening(1.1 * times * limit, 0.02, alpha, 200e9, 80e9)
    assert longer / (1.1 * times * limit) < critical / (times * limit) or math.isinf(longer)


@given(st.floats(3.0, 16.0))
def test_order_of_the_stress_factors(index: float) -> None:
    nominal, direct = stress_factors.uncorrected(index), stress_factors.direct_shear(index)
    assert nominal < direct < stress_factors.bergstraesser(index) < stress_factors.wahl(index)
    assert stress_factors.bending_outer(index) < 1.0 < stress_factors.bending_inner(index)


@given(coils, st.floats(0.0, 0.5), st.floats(0.1, 0.9))
def test_relaxation_takes_that_share_where_it_was_held(coil: Any, loss: float, part: float) -> None:
    spring, start, end = stretch(coil)
    at = start + part * (end - start)
    aged = coil.after(at=at, load_loss=loss)
    assert aged.spring().load(at) == pytest.approx((1 - loss) * spring.load(at), rel=1e-9, abs=1e-12)
    assert aged.rate == coil.rate


@given(coils, st.floats(250.0, 360.0), st.floats(0.1, 0.9))
def test_temperature_scales_the_load_at_every_length(coil: Any, kelvin: float, part: float) -> None:
    spring, start, end = stretch(coil)
    x = start + part * (end - start)
    factor = coil.material.modulus_factor(kelvin)
    assert coil.at_temperature(kelvin).spring().load(x) == pytest.approx(factor * spring.load(x), rel=1e-9)


@given(st.floats(-4.0, 4.0), st.floats(0.0, 0.2))
def test_friction_band_of_a_torsion_spring(x: float, share: float) -> None:
    coil = TorsionCoil(
        wire=0.002, mean_diameter=0.02, body_coils=6, legs=(0, 0), material=MUSIC_WIRE, winding_friction=share
    )
    spring = coil.spring(0.5)
    assert spring.hysteresis(x) == pytest.approx(share * abs(spring.load(x)))
    assert spring.hysteresis(np.array([x]))[0] == spring.hysteresis(x)

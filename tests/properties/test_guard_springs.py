"""Files say what springs are, whatever the springs; judged anywhere, a limit is that of the spring itself."""

from __future__ import annotations

import math
import warnings
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import Arm, Body, JointTravel, Mechanism, Point, SpringMount, Straight, guard
from springpoise.guard.files import read_text
from springpoise.guard.format.place import Place
from springpoise.springs import (
    NITROGEN,
    NITROGEN_VAN_DER_WAALS,
    CompressionCoil,
    ExtensionCoil,
    ExtensionSpring,
    GasSpring,
    IdealGas,
    MeasuredSpring,
    OffsetSpring,
    RubberTube,
    ScaledSpring,
    SpringWarning,
    Strip,
    StripSpring,
    TorqueCurve,
    TorsionCoil,
    TorsionSpring,
    ZeroLengthSpring,
    in_parallel,
    in_series,
    materials,
    rubber,
)

positive = st.floats(1e-3, 1e3)
small = st.floats(1e-3, 0.9)
kelvins = st.floats(250.0, 350.0)
moduli = st.floats(1e5, 1e6)
ranges = st.none() | st.tuples(st.floats(0.5, 1.0), st.floats(1.5, 5.0))
wires = st.sampled_from([materials.MUSIC_WIRE, materials.STAINLESS_302, materials.CHROME_SILICON])

plain_laws = st.one_of(
    st.builds(rubber.NeoHookean, mu=moduli, fitted_over=ranges),
    st.builds(rubber.MooneyRivlin, c1=moduli, c2=moduli, fitted_over=ranges),
    st.builds(rubber.Yeoh, c1=moduli, c2=st.floats(-1e4, 1e4), c3=st.floats(0.0, 1e3), fitted_over=ranges),
    st.builds(rubber.Gent, mu=moduli, jm=st.floats(20.0, 100.0), fitted_over=ranges),
    st.builds(rubber.ArrudaBoyce, mu=moduli, n=st.floats(5.0, 50.0), fitted_over=ranges),
    st.lists(st.tuples(moduli, st.floats(0.5, 5.0)), min_size=1, max_size=3).map(
        lambda terms: rubber.Ogden(mu=[m for m, _ in terms], alpha=[a for _, a in terms])
    ),
)
laws = st.one_of(
    plain_laws,
    st.builds(rubber.Crept, plain_laws, st.floats(0.0, 0.5)),
    st.builds(rubber.Stiffened, plain_laws, st.floats(0.5, 1.5)),
    st.builds(rubber.Softened, plain_laws, to_stretch=st.floats(1.5, 2.0), r=st.floats(1.1, 5.0), m=moduli),
)
tubes = st.builds(
    lambda inner, wall, free, law, loss: RubberTube(
        outer_diameter=inner + wall, inner_diameter=inner, free_length=free, law=law, loop_loss=loss
    ),
    st.floats(0.0, 0.02),
    st.floats(1e-3, 0.01),
    positive,
    laws,
    st.floats(0.0, 0.5),
)
gas_springs = st.builds(
    GasSpring,
    filling=st.floats(2e6, 1.5e7),
    rod_diameter=st.floats(5e-3, 2e-2),
    gas_length=st.floats(0.5, 1.0),
    stroke=st.floats(0.1, 0.4),
    extended_length=st.floats(0.45, 1.0),
    friction=st.tuples(st.floats(0.0, 50.0), st.floats(0.0, 50.0)),
    friction_share=st.sampled_from([0.0, 0.03]),
    offset=st.floats(0.0, 0.01),
    exponent=st.floats(1.0, 1.4),
    gas=st.sampled_from([NITROGEN, NITROGEN_VAN_DER_WAALS, IdealGas()]),
    temperature=kelvins,
    reference_temperature=kelvins,
)
readings = st.lists(st.tuples(small, positive, st.floats(0.0, 1.0)), min_size=2, max_size=6).map(
    lambda rows: MeasuredSpring(
        [0.1 + sum(step for step, _, _ in rows[: i + 1]) for i in range(len(rows))],
        [load for _, load, _ in rows],
        unloading=[load * share for _, load, share in rows] if rows[0][2] > 0.5 else None,
    )
)
extension_coils = st.builds(
    lambda wire, index, coils, material, tension, safety: guard.spring_of(
        ExtensionCoil(
            wire=wire,
            mean_diameter=index * wire,
            body_coils=coils,
            material=material,
            initial_tension=tension,
            hook_radius=0.5 * index * wire,
            hook_bend_radius=2.0 * wire,
        ),
        safety=safety,
    ),
    st.floats(1.7e-3, 2.4e-3),
    st.floats(5.0, 11.0),
    st.floats(5.0, 60.0),
    wires,
    st.floats(0.0, 5.0),
    st.floats(1.0, 1.5),
)
compression_coils = st.builds(
    lambda wire, index, coils, material, ends, longer: guard.spring_of(
        CompressionCoil(
            wire=wire,
            mean_diameter=index * wire,
            total_coils=coils,
            ends=ends,
            free_length=(coils + 1.0) * wire + longer,
            material=material,
            support="guided",
        )
    ),
    st.floats(1.7e-3, 2.4e-3),
    st.floats(5.0, 11.0),
    st.floats(5.5, 15.0),
    wires,
    st.sampled_from(["plain", "plain ground", "squared", "squared ground"]),
    st.floats(1e-3, 0.1),
)
strips = st.builds(
    lambda thickness, ratio, length, form: guard.spring_of(
        Strip(
            width="25 mm",
            thickness=thickness,
            natural_radius=ratio * thickness,
            youngs_modulus="206 GPa",
            length=length,
            form=form,
        ),
        hysteresis_share=0.05,
    ),
    st.floats(1e-4, 5e-4),
    st.floats(40.0, 80.0),
    st.floats(0.6, 2.0),
    st.sampled_from(["beam", "plate", "trade 26.4"]),
)
pulling = st.builds(
    lambda rate, free, tension: ExtensionSpring(rate, free_length=free, initial_tension=tension),
    positive,
    small,
    st.floats(0.0, 10.0),
)
singles = st.one_of(
    tubes,
    gas_springs,
    readings,
    extension_coils,
    compression_coils,
    strips,
    st.builds(StripSpring, positive, take_up=st.floats(1e-3, 0.1), longest=st.floats(0.2, 1.0), hysteresis_share=small),
)
springs = st.recursive(
    singles,
    lambda inner: st.one_of(
        st.lists(inner, min_size=1, max_size=3).map(lambda listed: in_parallel(*listed)),
        st.builds(OffsetSpring, inner, by=st.floats(-0.5, 0.5)),
        st.builds(ScaledSpring, inner, positive),
    ),
    max_leaves=4,
) | st.lists(pulling, min_size=1, max_size=3).map(lambda listed: in_series(*listed))
torsion_springs = st.one_of(
    readings,
    st.builds(TorsionSpring, positive, st.floats(-3.0, 3.0)),
    st.builds(
        lambda wire, index, turns, legs, winds: guard.spring_of(
            TorsionCoil(
                wire=wire, mean_diameter=index * wire, body_coils=turns, legs=legs, material=materials.MUSIC_WIRE
            ),
            winds=winds,
        ),
        st.floats(1e-3, 4e-3),
        st.floats(5.0, 11.0),
        st.floats(3.5, 20.0),
        st.tuples(st.floats(0.0, 0.1), st.floats(0.0, 0.1)),
        st.sampled_from([1, -1]),
    ),
    st.lists(st.tuples(positive, positive), min_size=2, max_size=5).map(
        lambda rows: TorqueCurve(
            [sum(step for step, _ in rows[: i + 1]) for i in range(len(rows))],
            [torque for _, torque in rows],
            hysteresis_share=0.1,
        )
    ),
)
PATH = Straight(Point("ground", (0, 0.2)), Point("arm", (0.12, 0)))
mounts = st.builds(SpringMount, springs, st.just(PATH)) | st.builds(
    SpringMount, torsion_springs, st.just(JointTravel())
)
optional_slope = st.none() | st.floats(-1e-3, 1e-3)
services = st.builds(
    guard.Service,
    reference=st.none() | kelvins,
    rate_slope=optional_slope,
    pull_slope=optional_slope,
    load_slope=optional_slope,
    energy_share=st.none() | st.floats(0.0, 1.0),
    lowest=st.none() | kelvins,
    highest=st.none() | kelvins,
    rod=st.sampled_from([None, "first", "last"]),
)
temperatures = st.lists(kelvins, min_size=1, max_size=3)
limits = st.one_of(
    st.builds(guard.YieldMargin, at_least=positive, at_temperature=st.none() | temperatures),
    st.builds(guard.FatigueMargin, at_least=positive, criterion=st.sampled_from(["sines", "gerber"]), peened=st.booleans()),
    st.builds(guard.FatigueMargin, at_least=positive, cycles=st.floats(1.0, 1e7)),
    st.builds(guard.BucklingMargin, at_least=positive),
    st.builds(guard.ServiceTemperature, at_temperature=temperatures, at_least=st.floats(-50.0, 50.0)),
)  # fmt: skip


@settings(max_examples=60)
@given(mounts, st.lists(services, max_size=1), st.lists(limits, max_size=2))
def test_what_is_dumped_reads_back_as_the_same(mount: Any, service: Any, limits: Any) -> None:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", SpringWarning)
        document = guard.PoiseFile(
            mechanism=Mechanism(Arm(Body(2.0, (0.3, 0))), springs=mount), service=service, limits=limits
        )
        again = read_text(guard.dump(document), Place("a file"))
    assert again == document
    assert type(again.mechanism.springs[0].spring) is type(mount.spring)


@settings(max_examples=30)
@given(extension_coils | compression_coils, st.floats(0.1, 5.0), st.floats(0.0, 0.3))
def test_a_part_is_judged_alike_wherever_it_is(spring: Any, factor: float, by: float) -> None:
    """Alone, scaled, offset by as much as the path is longer, or beside a spring: it carries the same."""
    low, high = spring.working_range
    low, high = low + 0.01 * (high - low), high - 0.01 * (high - low)
    b = 0.5 * (high - low)

    def factor_of(one: Any, more: float) -> float:
        path = Straight(Point("ground", (-(low + b + more), 0)), Point("arm", (b, 0)))
        mechanism = Mechanism(Arm(Body(1.0, (0.2, 0))), springs=SpringMount(one, path), travel=(0.0, math.pi))
        document = guard.PoiseFile(mechanism=mechanism, limits=[guard.YieldMargin(at_least=1.0)])
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", SpringWarning)
            return guard.check(document).verdicts[0].value

    alone = factor_of(spring, 0.0)
    assert alone > 1.0
    assert factor_of(ScaledSpring(spring, factor), 0.0) == pytest.approx(alone, rel=1e-9)
    assert factor_of(OffsetSpring(spring, by=by), by) == pytest.approx(alone, rel=1e-9)
    assert factor_of(in_parallel(ZeroLengthSpring(10.0), spring), 0.0) == pytest.approx(alone, rel=1e-9)

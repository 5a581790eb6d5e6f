from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.springs.materials import EN_SM, MUSIC_WIRE, PHOSPHOR_BRONZE, Relaxation
from springpoise.springs.warnings import SpringIndexWarning, TemperatureWarning
from springpoise.springs.wire.extension_coil import ExtensionCoil
from springpoise.springs.wire.fatigue import ZIMMERLI_PEENED, Fatigue


def coil(**changes: Any) -> ExtensionCoil:
    fields: dict[str, Any] = {
        "wire": "2 mm",
        "mean_diameter": "16 mm",
        "body_coils": 40,
        "material": MUSIC_WIRE,
        "initial_tension": "20 N",
        "hook_radius": "8 mm",
        "hook_bend_radius": "5 mm",
    }
    return ExtensionCoil(**(fields | changes))


class TestGeometry:
    def test_lengths(self) -> None:
        # (Nb + 1) d and 2 (D - d) + (Nb + 1) d
        assert coil().body_length == pytest.approx(0.082)
        assert coil().free_length_inside_hooks == pytest.approx(0.110)
        assert coil(free_length="120 mm").free_length_inside_hooks == pytest.approx(0.120)
        assert (coil().outer_diameter, coil().inner_diameter) == pytest.approx((0.018, 0.014))

    def test_mass(self) -> None:
        # 40 coils and two loops of the same diameter
        assert coil().mass == pytest.approx(7850 * math.pi * 0.001**2 * math.pi * 0.016 * 42, rel=1e-12)

    def test_surge(self) -> None:
        # d/(2 pi Na D²) sqrt(G/(2 rho)), the other form of the formula
        one = coil()
        other = 0.002 / (2 * math.pi * one.active_coils * 0.016**2) * math.sqrt(81e9 / (2 * 7850))
        assert one.surge_frequency() == pytest.approx(other, rel=1e-12)
        assert one.surge_frequency("one end") == pytest.approx(other / 2, rel=1e-12)
        with pytest.raises(InputError, match="held must be 'both ends' or 'one end'"):
            one.surge_frequency("none")


class TestInitialTension:
    def test_missing_says_what_is_usual(self) -> None:
        bare = coil(initial_tension=None)
        low, high = bare.usual_initial_tension
        # 77.4 to 122 MPa at index 8, over 8 D/(pi d³) = 5.0930 MPa/N
        assert (low, high) == pytest.approx((15.205, 23.953), abs=2e-3)
        with pytest.raises(
            InputError, match=r"initial_tension must be given in N, got None; .* index 8\.000 .* 15\.2\d N to 23\.9\d N"
        ):
            bare.spring()
        with pytest.raises(InputError, match="initial_tension must be given"):
            bare.margins((0, 50))
        assert bare.limit_loads()  # the limits do not need it

    @pytest.mark.parametrize(
        ("tension", "zone"),
        [(0, "below"), (15, "below"), (16, "inside"), (23, "inside"), (25, "above"), (40, "far above")],
    )
    def test_zones(self, tension: float, zone: str) -> None:
        assert coil(initial_tension=tension).initial_tension_zone() == zone

    def test_far_above_can_be_moved(self) -> None:
        assert coil(initial_tension=40).initial_tension_zone(far_above=2.0) == "above"

    def test_zones_of_an_array(self) -> None:
        assert coil(initial_tension=[0, 20]).initial_tension_zone().tolist() == ["below", "inside"]

    def test_high_tension_takes_the_hooks_share_for_the_body(self) -> None:
        usual, high = coil().limit_loads(), coil(initial_tension=30).limit_loads()
        assert high["body, static"] / usual["body, static"] == pytest.approx(0.40 / 0.45)
        assert high["hook bending, static"] == usual["hook bending, static"]

    def test_zero_free_length(self) -> None:
        one = coil()
        ideal = attrs.evolve(one, initial_tension=one.zero_free_length_tension)
        assert ideal.initial_tension_zone() == "far above"


class TestSpring:
    def test_follows_the_first_limit(self) -> None:
        one = coil()
        spring = one.spring(safety=1.25)
        assert spring.rate == one.rate
        assert spring.initial_tension == 20.0
        assert spring.free_length == one.free_length_inside_hooks
        assert spring.load(spring.longest) == pytest.approx(min(one.limit_loads(safety=1.25).values()), rel=1e-12)

    def test_fatigue_shortens_it(self) -> None:
        one = coil()
        lasting = one.spring(fatigue="goodman", lowest_load="25 N")
        assert lasting.longest < one.spring().longest
        worst = one.margins((25, lasting.load(lasting.longest)), fatigue="goodman").governing
        assert worst.factor == pytest.approx(1.0, rel=1e-12)

    def test_cycles(self) -> None:
        assert coil().spring(cycles=1e7).longest < coil().spring(cycles=1e5).longest < coil().spring().longest

    def test_tension_beyond_the_limits(self) -> None:
        with pytest.raises(InputError, match="below the greatest permitted load"):
            coil(initial_tension=200).spring()

    def test_fatigue_needs_the_lowest_load(self) -> None:
        with pytest.raises(InputError, match="lowest_load must be given in N together with fatigue"):
            coil().spring(fatigue="gerber")


class TestMargins:
    def test_loads_and_lengths_agree(self) -> None:
        one = coil()
        spring = one.spring()
        lengths = (0.120, 0.180)
        by_length = one.margins(lengths=lengths, fatigue="gerber")
        by_load = one.margins(tuple(spring.load(x) for x in lengths), fatigue="gerber")
        assert [m.factor for m in by_length.margins] == pytest.approx([m.factor for m in by_load.margins])
        assert by_length.energy == pytest.approx(spring.energy(0.180))

    def test_what_is_left(self) -> None:
        one = coil()
        margins = one.margins((0, 60))
        spring = one.spring()
        assert margins.load_left == pytest.approx(spring.load(spring.longest) - 60)
        assert margins.travel_left == pytest.approx(margins.load_left / one.rate)
        # closed: the travel counts from the free length
        assert one.margins((0, 10)).travel_left == pytest.approx(spring.longest - spring.free_length)

    def test_pairing_is_enforced(self) -> None:
        assert (
            coil().margins((0, 60), stress_factor="wahl").margin("body, static").factor
            < coil().margins((0, 60)).margin("body, static").factor
        )
        with pytest.raises(InputError, match=r"which the allowable 0\.45 .* got 'direct shear'"):
            coil().margins((0, 60), stress_factor="direct shear")
        european = coil(material=EN_SM).margins((0, 60)).margin("body, static")
        assert european.actual == pytest.approx(8 * 60 * 0.016 / (math.pi * 0.002**3))
        assert "uncorrected" in european.basis

    def test_hooks_take_the_unpeened_point(self) -> None:
        plain = coil().margins((25, 60), fatigue="goodman")
        peened = coil().margins((25, 60), fatigue=Fatigue("goodman", ZIMMERLI_PEENED))
        assert peened.margin("body, fatigue").factor > plain.margin("body, fatigue").factor
        for name in ("hook bending, fatigue", "hook torsion, fatigue"):
            assert peened.margin(name).factor == plain.margin(name).factor

    def test_surge(self) -> None:
        margin = coil().margins((0, 60), frequency="3 Hz").margin("surge")
        assert margin.factor == pytest.approx(coil().surge_frequency() / 3)
        assert margin.wanted == 15

    def test_bad_input(self) -> None:
        for both in ({}, {"loads": (0, 60), "lengths": (0.12, 0.15)}):
            with pytest.raises(InputError, match=r"either loads in N or lengths in m, got (neither|both)"):
                coil().margins(**both)
        with pytest.raises(InputError, match=r"loads must be \(lowest, greatest\) N"):
            coil().margins((60, 0))
        with pytest.raises(InputError, match=r"loads must be >= 0 N, got -60"):
            coil().margins((-60, 0))
        with pytest.raises(InputError, match="no spring steel"):
            coil(material=PHOSPHOR_BRONZE).margins((0, 30), fatigue="gerber")


class TestConstructors:
    def test_from_rate(self) -> None:
        made = ExtensionCoil.from_rate(
            "1.2 N/mm",
            wire="2 mm",
            mean_diameter="16 mm",
            material=MUSIC_WIRE,
            initial_tension="20 N",
            hook_radius="8 mm",
            hook_bend_radius="5 mm",
        )
        assert made.rate == pytest.approx(1200, rel=1e-12)
        assert coil(body_coils=made.body_coils) == made

    @pytest.mark.parametrize("fatigue", [None, "sines", "gerber", "goodman"])
    def test_from_load_just_carries_it(self, fatigue: str | None) -> None:
        made = ExtensionCoil.from_load(
            "150 N",
            index=7,
            rate="1 N/mm",
            material=MUSIC_WIRE,
            initial_tension="20 N",
            hook_bend_index=5,
            safety=1.3,
            fatigue=fatigue,
            lowest_load=None if fatigue is None else "40 N",
        )
        assert (made.index, made.rate) == pytest.approx((7.0, 1000.0))
        limits = made.limit_loads(safety=1.3, fatigue=fatigue, lowest_load=None if fatigue is None else 40)
        assert min(limits.values()) == pytest.approx(150, rel=1e-9)

    def test_from_load_beyond_all_wire(self) -> None:
        with pytest.raises(InputError, match=r"no music wire, A228 up to 6\.5 mm does; the best carries"):
            ExtensionCoil.from_load("50 kN", index=7, rate="1 N/mm", material=MUSIC_WIRE, hook_bend_index=5, safety=1.3)

    def test_sizing_takes_one_load(self) -> None:
        with pytest.raises(InputTypeError, match="load must be a single value"):
            ExtensionCoil.from_load(
                [1.0, 2.0], index=7, rate="1 N/mm", material=MUSIC_WIRE, hook_bend_index=5, safety=1.3
            )


class TestService:
    def test_temperature(self) -> None:
        hot = coil().at_temperature("100 degC")
        cold, warm = coil().spring(), hot.spring()
        assert warm.load(0.15) == pytest.approx(0.98 * cold.load(0.15), rel=1e-12)
        assert warm.longest > cold.longest  # the same stress is met later
        with pytest.warns(TemperatureWarning, match=r"130 degC is 10 K above the top temperature of music wire"):
            coil(temperature="130 degC")

    @pytest.mark.parametrize("loss", [0.0, 0.05, 0.5])
    def test_relaxation(self, loss: float) -> None:
        aged = coil().after(at="150 mm", load_loss=loss)
        assert aged.spring().load(0.150) == pytest.approx((1 - loss) * coil().spring().load(0.150), rel=1e-12)
        assert aged.rate == coil().rate

    def test_relaxation_by_the_wires_parameters(self) -> None:
        law = Relaxation(coefficient=0.05, exponent=1, activation_energy=0, temperature=293.15, time="1 h")
        one = coil(material=attrs.evolve(MUSIC_WIRE, relaxation=law))
        load = one.spring().load(0.150)
        share = one.body_stress(load, "uncorrected") / one.tensile_strength
        aged = one.after(at="150 mm", time="9 h")
        assert aged.spring().load(0.150) == pytest.approx(load * (1 - 0.05 * share), rel=1e-12)
        with pytest.raises(InputError, match=r"WireMaterial\.relaxation of 'music wire, A228' must be given"):
            coil().after(at="150 mm", time="9 h")

    def test_bad_input(self) -> None:
        with pytest.raises(InputError, match="either load_loss or time, got neither"):
            coil().after(at="150 mm")
        with pytest.raises(InputError, match="either load_loss or time, got both"):
            coil().after(at="150 mm", load_loss=0.1, time="1 h")
        with pytest.raises(InputError, match="temperature only together with time"):
            coil().after(at="150 mm", load_loss=0.1, temperature="50 degC")
        with pytest.raises(InputError, match=r"load_loss must be from 0 to below 1, got 1\.0"):
            coil().after(at="150 mm", load_loss=1)
        with pytest.raises(InputError, match="at must be > the free length"):
            coil().after(at="100 mm", load_loss=0.1)


class TestInput:
    @pytest.mark.parametrize(
        ("changes", "message"),
        [
            ({"mean_diameter": "5 mm"}, r"spring index D/d from 3 to 16, got 2\.5; it is the mean diameter"),
            ({"mean_diameter": "34 mm"}, r"spring index D/d from 3 to 16, got 17\.0"),
            ({"wire": "7 mm", "mean_diameter": "50 mm"}, r"from 0\.1 to 6\.5 mm"),
            ({"body_coils": 1}, r"ExtensionCoil\.body_coils must be >= 2, got 1"),
            ({"hook_radius": "1 mm"}, r"ExtensionCoil\.hook_radius must be > half the wire"),
            ({"hook_bend_radius": "0.5 mm"}, r"ExtensionCoil\.hook_bend_radius must be > half the wire"),
            ({"initial_tension": -1}, r"ExtensionCoil\.initial_tension must be >= 0 N, got -1"),
            ({"free_length": "50 mm"}, r"ExtensionCoil\.free_length must be >= the closed body"),
            ({"wire": 0}, r"ExtensionCoil\.wire must be > 0 m"),
            ({"wire": math.nan}, r"ExtensionCoil\.wire must be a value in m that is finite"),
        ],
    )
    def test_values(self, changes: dict[str, Any], message: str) -> None:
        with pytest.raises(InputError, match=message):
            coil(**changes)

    def test_kinds(self) -> None:
        with pytest.raises(UnitError, match=r"ExtensionCoil\.initial_tension"):
            coil(initial_tension="2 kg")
        with pytest.raises(InputTypeError, match=r"ExtensionCoil\.material must be a WireMaterial, .* got 'steel'"):
            coil(material="steel")

    def test_index_warning_states_the_margin(self) -> None:
        with pytest.warns(SpringIndexWarning, match=r"spring index 3\.50 is 0\.50 below 4"):
            coil(mean_diameter="7 mm", hook_radius="3.5 mm", initial_tension=None)
        with pytest.warns(SpringIndexWarning, match=r"spring index 14\.00 is 2\.00 above 12"):
            coil(mean_diameter="28 mm")

    def test_arrays(self) -> None:
        builds = coil(wire=np.array([[1.98e-3], [2.02e-3]]), initial_tension=np.array([[18.0], [22.0]]))
        single = [coil(wire=w, initial_tension=f) for w, f in ((1.98e-3, 18.0), (2.02e-3, 22.0))]
        assert builds.rate.ravel() == pytest.approx([c.rate for c in single])
        together, apart = (
            builds.margins((25, 60), fatigue="gerber"),
            [c.margins((25, 60), fatigue="gerber") for c in single],
        )
        for margin in together.margins:
            assert np.ravel(margin.factor) == pytest.approx([m.margin(margin.name).factor for m in apart])
        assert together.governing.name == apart[0].governing.name
        assert "to" in str(together)
        assert builds.spring().load(np.array([0.12, 0.13])).shape == (2, 2)
        with pytest.raises(InputError, match="initial_tension must be given"):
            attrs.evolve(builds, initial_tension=None).spring()

from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError
from springpoise.springs.materials import EN_SM, MUSIC_WIRE, Relaxation
from springpoise.springs.warnings import BucklingWarning, CoilCountWarning
from springpoise.springs.wire.compression_coil import CompressionCoil
from springpoise.springs.wire.fatigue import ZIMMERLI_PEENED, Fatigue


def coil(**changes: Any) -> CompressionCoil:
    fields: dict[str, Any] = {
        "wire": "2.5 mm",
        "mean_diameter": "25 mm",
        "total_coils": 12,
        "ends": "squared ground",
        "free_length": "90 mm",
        "material": MUSIC_WIRE,
        "support": "guided",
    }
    return CompressionCoil(**(fields | changes))


class TestEnds:
    @pytest.mark.parametrize(
        ("ends", "active", "solid", "length"),
        [
            # Shigley's table, as transcribed: solid length in wires, and the free length from the pitch
            ("plain", 12, 13, lambda p, na, d: p * na + d),
            ("plain ground", 11, 12, lambda p, na, d: p * (na + 1)),
            ("squared", 10, 13, lambda p, na, d: p * na + 3 * d),
            ("squared ground", 10, 12, lambda p, na, d: p * na + 2 * d),
        ],
    )
    def test_table(self, ends: str, active: float, solid: float, length: Any) -> None:
        one = coil(ends=ends)
        assert one.active_coils == active
        assert one.solid_length == pytest.approx(solid * 0.0025)
        assert length(one.pitch, one.active_coils, 0.0025) == pytest.approx(0.090)

    def test_grinding_shortens_the_solid_length(self) -> None:
        assert coil(solid_reduction=0.75).solid_length == pytest.approx(11.25 * 0.0025)

    def test_outer_diameter_at_solid(self) -> None:
        # a turn of wire keeps its length: (pi D)² + p² = (pi D')² + d²
        one = coil()
        grown = one.outer_diameter_at_solid - one.wire
        assert (math.pi * grown) ** 2 + one.wire**2 == pytest.approx((math.pi * 0.025) ** 2 + one.pitch**2)

    def test_mass(self) -> None:
        assert coil().mass == pytest.approx(7850 * math.pi / 4 * 0.0025**2 * math.pi * 0.025 * 12)


class TestSpring:
    def test_shortest_length(self) -> None:
        one = coil()
        spring = one.spring(safety=2.0)
        assert (spring.rate, spring.free_length) == (one.rate, one.free_length)
        load = one.margins((0, 10)).margin("body, static").permitted / 2
        assert one.body_stress(-spring.load(spring.solid_length)) == pytest.approx(load)

    def test_clash_allowance_keeps_it_from_solid(self) -> None:
        one = coil(free_length="50 mm")
        assert -one.spring().load(one.spring().solid_length) == pytest.approx(one.solid_load / 1.15)
        assert one.spring(clash_allowance=0).solid_length == pytest.approx(one.solid_length)
        with pytest.raises(InputError, match="clash_allowance must be >= 0, got -1"):
            one.spring(clash_allowance=-1)

    def test_buckling_shortens_the_range(self) -> None:
        free = coil(support="both ends pivoted", free_length="120 mm")
        with pytest.warns(
            BucklingWarning,
            match=r"unguided it bows out with 'both ends pivoted' at \d+\.?\d* mm of shortening, \d+\.?\d* mm before",
        ):
            spring = free.spring()
        assert spring.solid_length == pytest.approx(free.free_length - free.critical_shortening())

    def test_support_not_stated(self) -> None:
        with pytest.warns(BucklingWarning, match="if both ends are pivoted .* state support, or guide it"):
            spring = coil(support=None, free_length="120 mm").spring()
        assert spring == coil(free_length="120 mm").spring()

    def test_fatigue(self) -> None:
        one = coil(free_length="130 mm")
        spring = one.spring(fatigue="gerber", lowest_load="50 N")
        margins = one.margins((50, -spring.load(spring.solid_length)), fatigue="gerber")
        assert margins.margin("body, fatigue").factor == pytest.approx(1.0)


class TestBuckling:
    def test_alpha_itself(self) -> None:
        assert coil().stable_length(0.5) == coil().stable_length("both ends flat")
        assert coil(support=0.6).stable_length() == pytest.approx(coil().stable_length(0.5) * 0.5 / 0.6)

    def test_guided_has_none(self) -> None:
        with pytest.raises(InputError, match="support must be an end condition or the factor alpha for buckling"):
            coil().stable_length()
        assert all("buckling" not in m.name for m in coil().margins((0, 50)).margins)

    def test_margin(self) -> None:
        slender = coil(support="one end fixed, one free")
        with pytest.warns(BucklingWarning):
            margin = slender.margins((0, 150)).margin("buckling, shortening")
        assert margin.factor == pytest.approx(slender.critical_shortening() / (150 / slender.rate))
        stocky = coil(support="both ends flat").margins((0, 50)).margin("buckling, free length")
        assert stocky.factor == pytest.approx(coil().stable_length("both ends flat") / 0.090)

    def test_critical_shortening_begins_at_the_stable_length(self) -> None:
        limit = coil().stable_length("both ends pivoted")
        assert coil(free_length=limit * 0.9999).critical_shortening("both ends pivoted") == math.inf
        assert coil(free_length=limit * 1.0001).critical_shortening("both ends pivoted") < limit

    def test_bad_support(self) -> None:
        with pytest.raises(InputError, match=r"CompressionCoil\.support must be one of 'both ends flat'"):
            coil(support="clamped")
        with pytest.raises(InputError, match=r"CompressionCoil\.support must be > 0, got 0"):
            coil(support=0)
        with pytest.raises(InputTypeError, match="single factor alpha"):
            coil(support=[0.5, 1.0])


class TestMargins:
    def test_loads_and_lengths_agree(self) -> None:
        one = coil()
        by_length = one.margins(lengths=(0.070, 0.085), fatigue="goodman", cycles=1e6)
        loads = tuple(-one.spring().load(x) for x in (0.085, 0.070))
        by_load = one.margins(loads, fatigue="goodman", cycles=1e6)
        assert [m.factor for m in by_length.margins] == pytest.approx([m.factor for m in by_load.margins])
        assert by_length.energy == pytest.approx(one.spring().energy(0.070))

    def test_set_removed_has_its_own_pair(self) -> None:
        removed = coil(set_removed=True).margins((0, 100))
        static = removed.margin("body, static")
        assert static.permitted == pytest.approx(0.60 * MUSIC_WIRE.tensile_strength(0.0025))
        assert static.actual == pytest.approx(coil().body_stress(100, "direct shear"))
        assert removed.margin("body, solid").wanted == 1.0
        with pytest.raises(InputError, match="stress_factor must be 'direct shear'"):
            coil(set_removed=True).margins((0, 100), stress_factor="wahl")

    def test_uncorrected_for_the_european_share(self) -> None:
        static = coil(material=EN_SM).margins((0, 100)).margin("body, static")
        assert static.actual == pytest.approx(8 * 100 * 0.025 / (math.pi * 0.0025**3))
        assert static.permitted == pytest.approx(0.56 * EN_SM.tensile_strength(0.0025))

    def test_peened_cycles(self) -> None:
        plain = coil().margins((20, 100), fatigue="sines", cycles=1e6).margin("body, 1e+06 cycles")
        peened = coil().margins((20, 100), fatigue=Fatigue("sines", ZIMMERLI_PEENED), cycles=1e6)
        assert peened.margin("body, 1e+06 cycles").factor / plain.factor == pytest.approx(0.39 / 0.33)

    def test_rod_and_bore(self) -> None:
        margins = coil().margins((0, 50), rod="20 mm", bore="28 mm")
        assert margins.margin("rod").left == pytest.approx(0.0025)
        assert margins.margin("bore").left == pytest.approx(0.028 - coil().outer_diameter_at_solid)

    def test_what_is_left(self) -> None:
        one = coil(free_length="50 mm")
        margins = one.margins((0, 40))
        assert margins.load_left == pytest.approx(one.solid_load / 1.15 - 40)

    def test_bad_input(self) -> None:
        with pytest.raises(InputError, match="either loads in N or lengths in m, got neither"):
            coil().margins()
        with pytest.raises(InputError, match="a load in the spring's own direction counts positive"):
            coil().margins((-50, -10))

    def test_set_removal(self) -> None:
        one = coil(free_length="90 mm")
        result = one.set_removal("110 mm")
        assert result.removed == pytest.approx(2 / 11)
        load = one.rate * (0.110 - one.solid_length)
        assert result.solid_stress == pytest.approx(one.body_stress(load) / (0.45 * one.tensile_strength))
        assert result.advisable is bool(1.1 <= result.solid_stress <= 1.3)
        assert "recommended 1.1 to 1.3" in str(result)
        with pytest.raises(InputError, match="first_free_length must be > free_length"):
            one.set_removal("80 mm")


class TestConstructors:
    def test_from_rate(self) -> None:
        made = CompressionCoil.from_rate(
            "3 N/mm", wire="2.5 mm", mean_diameter="25 mm", ends="squared", free_length="90 mm", material=MUSIC_WIRE
        )
        assert made.rate == pytest.approx(3000)
        assert made.active_coils == made.total_coils - 2

    @pytest.mark.parametrize("ends", ["plain", "plain ground", "squared", "squared ground"])
    @pytest.mark.parametrize("given", [{"wire": "2.2 mm"}, {"index": 9.0}])
    def test_from_load_static(self, ends: str, given: dict[str, Any]) -> None:
        made = CompressionCoil.from_load(
            "120 N", rate="4 N/mm", ends=ends, material=MUSIC_WIRE, safety=1.2, support="guided", **given
        )
        margins = made.margins((0, 120))
        assert made.rate == pytest.approx(4000)
        assert made.solid_load == pytest.approx(1.15 * 120)
        assert margins.margin("body, solid").factor == pytest.approx(1.2)
        assert margins.margin("clash").factor == pytest.approx(1.15)
        assert margins.holds

    @pytest.mark.parametrize("fatigue", ["sines", "gerber", "goodman"])
    @pytest.mark.parametrize("given", [{"wire": "2.5 mm"}, {"index": 9.0}])
    def test_from_load_for_fatigue(self, fatigue: str, given: dict[str, Any]) -> None:
        made = CompressionCoil.from_load(
            "100 N",
            rate="6 N/mm",
            ends="squared ground",
            material=MUSIC_WIRE,
            safety=1.3,
            fatigue=fatigue,
            lowest_load="20 N",
            support="guided",
            **given,
        )
        factor = made.margins((20, 100), fatigue=fatigue).margin("body, fatigue").factor
        solid = made.margins((20, 100)).margin("body, solid").factor
        assert min(factor / 1.3, solid) == pytest.approx(1.0)

    def test_from_load_refusals(self) -> None:
        fields: dict[str, Any] = {"rate": "6 N/mm", "ends": "squared", "material": MUSIC_WIRE, "safety": 1.2}
        with pytest.raises(InputError, match="either wire or index, got neither"):
            CompressionCoil.from_load("100 N", **fields)
        with pytest.raises(InputError, match="either wire or index, got both"):
            CompressionCoil.from_load("100 N", **fields, wire="2 mm", index=8)
        with pytest.raises(InputError, match="take thicker wire"):
            CompressionCoil.from_load("900 N", **fields, wire="1 mm")
        with pytest.raises(InputError, match="take thicker wire"):
            CompressionCoil.from_load("900 N", **fields, wire="1 mm", fatigue="gerber", lowest_load=0)


class TestService:
    def test_temperature(self) -> None:
        assert coil().at_temperature("100 degC").rate == pytest.approx(0.98 * coil().rate)

    def test_relaxation(self) -> None:
        aged = coil().after(at="60 mm", load_loss=0.04)
        assert aged.spring().load(0.060) == pytest.approx(0.96 * coil().spring().load(0.060))
        with pytest.raises(InputError, match="at must be < free_length"):
            coil().after(at="95 mm", load_loss=0.04)

    def test_relaxation_by_the_wires_parameters(self) -> None:
        law = Relaxation(coefficient=0.05, exponent=2, activation_energy=0, temperature=293.15, time="1 h")
        one = coil(material=attrs.evolve(MUSIC_WIRE, relaxation=law))
        push = -one.spring().load(0.060)
        loss = 0.05 * (one.body_stress(push, "uncorrected") / one.tensile_strength) ** 2 * 2
        assert -one.after(at=0.060, time="99 h", temperature="80 degC").spring().load(0.060) == pytest.approx(
            push * (1 - loss)
        )


class TestInput:
    @pytest.mark.parametrize(
        ("changes", "message"),
        [
            ({"ends": "closed"}, r"CompressionCoil\.ends must be one of 'plain', .* got 'closed'"),
            ({"free_length": "30 mm"}, r"CompressionCoil\.free_length must be > the solid length \(0\.03\) m"),
            ({"total_coils": 3}, r"CompressionCoil\.total_coils must be >= 4, got 3"),
            ({"mean_diameter": "6 mm"}, r"CompressionCoil\.mean_diameter must give a spring index"),
            ({"free_length": "30 N"}, r"CompressionCoil\.free_length must be a value in m"),
        ],
    )
    def test_values(self, changes: dict[str, Any], message: str) -> None:
        with pytest.raises(InputError, match=message):
            coil(**changes)

    def test_coil_count(self) -> None:
        with pytest.warns(CoilCountWarning, match=r"2\.50 active coils are 0\.50 below 3"):
            coil(total_coils=4.5)
        with pytest.warns(CoilCountWarning, match=r"16\.00 active coils are 1\.00 above 15"):
            coil(total_coils=18)

    def test_arrays(self) -> None:
        builds = coil(mean_diameter=np.array([[0.0245], [0.0255]]), support="both ends flat")
        single = [coil(mean_diameter=d, support="both ends flat") for d in (0.0245, 0.0255)]
        together = builds.margins((10, 60), fatigue="gerber", rod="15 mm", bore="30 mm")
        apart = [c.margins((10, 60), fatigue="gerber", rod="15 mm", bore="30 mm") for c in single]
        for margin in together.margins:
            assert np.ravel(margin.factor) == pytest.approx([m.margin(margin.name).factor for m in apart])
        assert np.ravel(builds.spring().solid_length) == pytest.approx([c.spring().solid_length for c in single])

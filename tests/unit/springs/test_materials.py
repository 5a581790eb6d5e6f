from __future__ import annotations

import math
import subprocess
import sys

import attrs
import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.springs.materials import (
    EXAM_HANDBOOK,
    HANDBOOK_1987,
    HANDBOOK_1987_INCH,
    MUSIC_WIRE,
    PHOSPHOR_BRONZE,
    STAINLESS_302,
    Allowable,
    CyclicLimits,
    DiameterSteps,
    Relaxation,
    StrengthSegment,
    StrengthSet,
    WireMaterial,
)


def own(**changes: object) -> WireMaterial:
    fields: dict[str, object] = {
        "strength": "1900 MPa",
        "young_modulus": "200 GPa",
        "shear_modulus": "79 GPa",
        "density": "7850 kg/m**3",
    }
    return WireMaterial("own", **(fields | changes))  # type: ignore[arg-type]


class TestStrength:
    def test_one_value_holds_for_all_wire(self) -> None:
        assert own().tensile_strength(1e-4) == own().tensile_strength(0.02) == 1900e6
        assert own().strength.name == "one value"

    def test_outside_the_range_names_range_and_set(self) -> None:
        with pytest.raises(InputError, match=r"from 0\.1 to 6\.5 mm .* '1987 industry design handbook', got 7 mm"):
            MUSIC_WIRE.tensile_strength(0.007)
        with pytest.raises(InputError, match=r"got 0\.05 mm"):
            MUSIC_WIRE.tensile_strength(0.05e-3)
        with pytest.raises(InputError, match=r"from 0\.1 to 6\.5 mm"):
            MUSIC_WIRE.tensile_strength(np.array([0.001, 0.007]))

    def test_the_ends_of_the_range_belong_to_it(self) -> None:
        for wire in (MUSIC_WIRE, STAINLESS_302, PHOSPHOR_BRONZE):
            low, high = wire.strength.range
            assert wire.tensile_strength(low) > wire.tensile_strength(high) > 0

    def test_array_is_elementwise(self) -> None:
        d = np.array([[0.3, 2.5, 2.6], [5.0, 5.1, 10.0]]) * 1e-3
        expected = [[STAINLESS_302.tensile_strength(float(x)) for x in row] for row in d]
        assert np.array_equal(STAINLESS_302.tensile_strength(d), expected)

    def test_sets_are_chosen_by_name(self) -> None:
        older = MUSIC_WIRE.with_strength(EXAM_HANDBOOK)
        assert older.strength.name == EXAM_HANDBOOK
        assert {s.name for s in older.other_strengths} == {HANDBOOK_1987, HANDBOOK_1987_INCH}
        assert older.with_strength(HANDBOOK_1987) == attrs.evolve(
            MUSIC_WIRE, other_strengths=older.with_strength(HANDBOOK_1987).other_strengths
        )
        with pytest.raises(InputError, match=r"one of '1987 industry design handbook', .* got '1966'"):
            MUSIC_WIRE.with_strength("1966")

    def test_segments_follow_one_another(self) -> None:
        thin, thick = StrengthSegment(0, 1e-3, at_unit_diameter=2e9), StrengthSegment(2e-3, 3e-3, at_unit_diameter=2e9)
        with pytest.raises(InputError, match="follow one another, got 1 mm before 2 mm"):
            StrengthSet("gap", [thin, thick])
        with pytest.raises(InputTypeError, match="StrengthSegment objects"):
            StrengthSet("none", [])
        with pytest.raises(InputError, match="largest must be > smallest"):
            StrengthSegment(2e-3, 1e-3, at_unit_diameter=2e9)

    def test_units(self) -> None:
        with pytest.raises(UnitError, match=r"StrengthSegment\.at_unit_diameter"):
            StrengthSegment("0.1 mm", "6.5 mm", at_unit_diameter="2211 N")

    def test_values_compare_and_hash(self) -> None:
        assert own() == own()
        assert hash(own()) == hash(own())
        assert repr(MUSIC_WIRE) == "WireMaterial(name='music wire, A228', strength='1987 industry design handbook')"


class TestModuli:
    def test_steps(self) -> None:
        modulus = DiameterSteps([("1 mm", "80 GPa"), ("2 mm", "79 GPa")], above="78 GPa")
        assert [modulus.at(d * 1e-3) / 1e9 for d in (0.5, 1.0, 1.5, 2.0, 2.5)] == [80, 80, 79, 79, 78]
        assert np.array_equal(modulus.at(np.array([0.001, 0.003])), [80e9, 78e9])

    def test_bad_steps(self) -> None:
        with pytest.raises(InputError, match="increasing"):
            DiameterSteps([(2e-3, 1e9), (1e-3, 1e9)], above=1e9)
        with pytest.raises(InputTypeError, match="pairs"):
            DiameterSteps([1.0], above=1e9)  # type: ignore[list-item]
        with pytest.raises(UnitError, match=r"DiameterSteps\.steps"):
            DiameterSteps([("1 mm", "80 N")], above=1e9)

    def test_temperature_needs_the_slope(self) -> None:
        assert own().modulus_factor(293.15) == 1.0
        with pytest.raises(InputError, match=r"modulus_slope of 'own' must be given in 1/K"):
            own().modulus_factor(313.15)
        assert own(modulus_slope=-1e-3).modulus_factor(313.15) == pytest.approx(0.98, rel=1e-12)


class TestAllowable:
    def test_pairs_with_its_factors(self) -> None:
        pair = Allowable(0.45, ("bergstraesser", "wahl"))
        assert pair.factor == pair.chosen(None) == "bergstraesser"
        assert pair.chosen("wahl") == "wahl"
        with pytest.raises(InputError, match=r"'bergstraesser' or 'wahl', which the allowable 0\.45"):
            pair.chosen("direct shear")

    def test_bad_input(self) -> None:
        with pytest.raises(InputError, match=r"Allowable\.factors must be among"):
            Allowable(0.45, "whal")
        with pytest.raises(InputError, match="above 0 and at most 1, got 45"):
            Allowable(45, "wahl")

    def test_missing_one_says_what_to_give(self) -> None:
        with pytest.raises(InputError, match=r"WireMaterial\.hook_bending of 'own' must be given"):
            own().allowable("hook_bending")


class TestCyclic:
    def test_the_next_listed_life_counts(self) -> None:
        assert MUSIC_WIRE.cyclic_limit("compression", 2e5) == (0.33, 1e6)
        assert MUSIC_WIRE.cyclic_limit("torsion_body", 1e6) == (0.50, 1e6)

    def test_beyond_what_is_known(self) -> None:
        with pytest.raises(InputError, match=r"no more than 1e\+06 cycles are known"):
            MUSIC_WIRE.cyclic_limit("torsion_body", 1e7)
        with pytest.raises(InputError, match="none is known"):
            PHOSPHOR_BRONZE.cyclic_limit("compression", 1e5)

    def test_shares(self) -> None:
        with pytest.raises(InputError, match="above 0 and at most 1, got 36"):
            CyclicLimits(1e5, compression=36)


class TestRelaxation:
    LAW = Relaxation(coefficient=0.05, exponent=2, activation_energy="20 kJ/mol", temperature="20 degC", time="1 h")

    def test_formula(self) -> None:
        # c (tau/Rm)^p lg(1 + t/t0) at T0
        assert self.LAW.loss(0.5, 9 * 3600.0, 293.15) == pytest.approx(0.05 * 0.25 * 1.0, rel=1e-12)
        faster = math.exp(-20e3 / 8.31446261815324 * (1 / 373.15 - 1 / 293.15))
        assert self.LAW.loss(0.5, 9 * 3600.0, 373.15) == pytest.approx(0.0125 * faster, rel=1e-12)

    def test_array_is_elementwise(self) -> None:
        times = np.array([0.0, 3600.0, 1e6])
        assert self.LAW.loss(0.4, times, 300.0) == pytest.approx([self.LAW.loss(0.4, float(t), 300.0) for t in times])

    def test_bad_input(self) -> None:
        with pytest.raises(UnitError, match=r"activation_energy must be a value in J/mol"):
            Relaxation(coefficient=0.05, exponent=2, activation_energy="20 kJ", temperature=293.15, time=3600)
        with pytest.raises(InputError, match=r"Relaxation\.time must be > 0 s"):
            Relaxation(coefficient=0.05, exponent=2, activation_energy=0, temperature=293.15, time=0)


def test_materials_load_no_pint() -> None:
    code = "import sys, springpoise.springs.materials; sys.exit('pint' in sys.modules or 'scipy' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from springpoise.errors import InputError
from springpoise.springs import TorsionSpring
from springpoise.springs.materials import HARD_DRAWN, MUSIC_WIRE
from springpoise.springs.warnings import CoilCountWarning
from springpoise.springs.wire.torsion_coil import TorsionCoil


def coil(**changes: Any) -> TorsionCoil:
    fields: dict[str, Any] = {
        "wire": "2 mm",
        "mean_diameter": "20 mm",
        "body_coils": 6.25,
        "legs": ("30 mm", "40 mm"),
        "material": MUSIC_WIRE,
    }
    return TorsionCoil(**(fields | changes))


class TestGeometry:
    def test_legs_bend_too(self) -> None:
        # a leg alone turns by 64 M l/(3 pi d⁴ E)
        one = coil()
        without = coil(legs=(0, 0))
        legs = 64 * 0.070 / (3 * math.pi * 0.002**4 * one.young_modulus)
        assert 1 / one.rate == pytest.approx(1 / without.rate + legs, rel=1e-12)

    def test_winding_up(self) -> None:
        one = coil(legs=(0, 0))
        turns = one.wound_turns(0.5)
        assert turns == pytest.approx(0.5 / one.rate_per_turn)
        # the wire keeps its length
        assert one.wound_diameter(0.5) * (6.25 + turns) == pytest.approx(0.020 * 6.25)
        assert one.body_length(0.5) - one.body_length() == pytest.approx(0.002 * turns)
        assert one.body_length() == pytest.approx(0.002 * 7.25)

    def test_arbor(self) -> None:
        one = coil()
        binding = one.binding_moment("15 mm")
        assert one.arbor_clearance(binding, "15 mm") == pytest.approx(0, abs=1e-15)
        assert one.arbor_clearance(0, "15 mm") == pytest.approx(0.003)
        with pytest.raises(InputError, match=r"arbor must be < the inner diameter with no load \(0\.018"):
            one.binding_moment("18 mm")

    def test_mass(self) -> None:
        assert coil().mass == pytest.approx(7850 * math.pi * 0.001**2 * (math.pi * 0.020 * 6.25 + 0.070))

    def test_stresses(self) -> None:
        nominal = 32 * 0.8 / (math.pi * 0.002**3)
        assert coil().outer_stress(0.8) < nominal < coil().inner_stress(0.8)


class TestFriction:
    def test_never_twice(self) -> None:
        with pytest.raises(
            InputError, match=r"winding_friction must be 0 with friction='averaged', got 0\.05; .* twice"
        ):
            coil(friction="averaged", winding_friction=0.05)
        with pytest.raises(InputError, match="friction must be 'none' or 'averaged', got 'some'"):
            coil(friction="some")
        with pytest.raises(InputError, match="winding_friction must be < 1"):
            coil(winding_friction=1)

    def test_band(self) -> None:
        spring = coil(winding_friction=0.04).spring()
        assert isinstance(spring, TorsionSpring)
        assert spring.hysteresis(0.9) == pytest.approx(0.04 * spring.load(0.9))
        assert spring.hysteresis(-0.9) == pytest.approx(0.04 * spring.load(0.9))
        assert np.array_equal(coil().spring().hysteresis(np.array([0.1, 0.2])), [0, 0])

    def test_of_the_spring_itself(self) -> None:
        with pytest.raises(InputError, match=r"TorsionSpring\.winding_friction must be < 1"):
            TorsionSpring(1.0, winding_friction=1.5)
        with pytest.raises(InputError, match=r"TorsionSpring\.winding_friction must be >= 0"):
            TorsionSpring(1.0, winding_friction=-0.5)


class TestSpring:
    def test_range_is_the_winding_direction(self) -> None:
        one = coil()
        reach = one.limit_moments(safety=1.5)["bending, static"] / one.rate
        up = one.spring("10 deg", safety=1.5)
        assert up.working_range == pytest.approx((math.radians(10), math.radians(10) + reach))
        down = one.spring("10 deg", safety=1.5, winds=-1)
        assert down.working_range == pytest.approx((math.radians(10) - reach, math.radians(10)))
        with pytest.raises(InputError, match=r"winds must be \+1 or -1, got 0"):
            one.spring(winds=0)

    def test_arbor_ends_the_range(self) -> None:
        one = coil()
        spring = one.spring(arbor="17 mm")
        assert one.arbor_clearance(spring.load(spring.working_range[1]), "17 mm") == pytest.approx(0, abs=1e-12)

    def test_fatigue_ends_the_range(self) -> None:
        one = coil()
        spring = one.spring(cycles=1e6, lowest_moment="0.2 N*m")
        margins = one.margins((0.2, spring.load(spring.working_range[1])), cycles=1e6)
        assert margins.margin("bending, 1e+06 cycles").factor == pytest.approx(1.0)
        with pytest.raises(InputError, match="lowest_moment must be given in N\\*m together with cycles"):
            one.spring(cycles=1e6)

    def test_many_turns_are_cut_off_at_two(self) -> None:
        long = coil(body_coils=60)
        assert long.spring().working_range[1] == pytest.approx(4 * math.pi)
        assert long.spring(winds=-1).working_range[0] == pytest.approx(-4 * math.pi)


class TestMargins:
    def test_moments_and_angles_agree(self) -> None:
        one = coil()
        by_angle = one.margins(angles=(0.5, 2.0), cycles=1e5, arbor="14 mm")
        by_moment = one.margins((0.5 * one.rate, 2.0 * one.rate), cycles=1e5, arbor="14 mm")
        assert [m.factor for m in by_angle.margins] == pytest.approx([m.factor for m in by_moment.margins])
        assert by_angle.energy == pytest.approx(one.spring().energy(2.0))

    def test_peened(self) -> None:
        plain, peened = coil().margins((0.1, 0.5), cycles=1e6), coil().margins((0.1, 0.5), cycles=1e6, peened=True)
        assert peened.governing.factor > plain.governing.factor

    def test_left_until_it_binds(self) -> None:
        one = coil()
        assert one.margins((0, 0.1), arbor="17.5 mm").load_left == pytest.approx(one.binding_moment("17.5 mm") - 0.1)
        assert one.margins((0, 0.1), arbor="19 mm").load_left < 0

    def test_bad_input(self) -> None:
        with pytest.raises(InputError, match=r"either moments in N\*m or angles in rad, got neither"):
            coil().margins()
        with pytest.raises(
            InputError, match=r"moments must be >= 0 N\*m, got -0\.5; a load in the spring's own direction"
        ):
            coil().margins((-0.5, 0.5))
        with pytest.raises(InputError, match="torsion_body for 1e\\+06 cycles, none is known"):
            coil(material=HARD_DRAWN).margins((0, 0.5), cycles=1e6)


class TestConstructors:
    def test_from_rate(self) -> None:
        made = TorsionCoil.from_rate(
            "0.4 N*m/rad", wire="2 mm", mean_diameter="20 mm", legs=("30 mm", "40 mm"), material=MUSIC_WIRE
        )
        assert made.rate == pytest.approx(0.4)
        soft = TorsionCoil.from_rate(
            "0.4 N*m/rad", wire="2 mm", mean_diameter="20 mm", legs=(0, 0), material=MUSIC_WIRE, friction="averaged"
        )
        assert soft.rate == pytest.approx(0.4)

    def test_turns_are_discrete(self) -> None:
        fields: dict[str, Any] = {"wire": "2 mm", "mean_diameter": "20 mm", "legs": (0, 0), "material": MUSIC_WIRE}
        made = TorsionCoil.from_rate("0.4 N*m/rad", **fields, fraction=0.25)
        assert made.body_coils % 1 == 0.25
        exact = TorsionCoil.from_rate("0.4 N*m/rad", **fields).body_coils
        assert abs(made.body_coils - exact) <= 0.5
        with pytest.raises(InputError, match="fraction must be from 0 to below 1, got 1"):
            TorsionCoil.from_rate("0.4 N*m/rad", **fields, fraction=1)

    @pytest.mark.parametrize("fatigue", [{}, {"cycles": 1e6, "lowest_moment": "0.2 N*m"}])
    def test_from_load_just_carries_it(self, fatigue: dict[str, Any]) -> None:
        made = TorsionCoil.from_load(
            "1 N*m", index=8, rate="0.5 N*m/rad", legs=(0, 0), material=MUSIC_WIRE, safety=1.25, **fatigue
        )
        assert (made.index, made.rate) == pytest.approx((8, 0.5))
        assert min(made.limit_moments(safety=1.25, **fatigue).values()) == pytest.approx(1.0, rel=1e-9)


class TestService:
    def test_temperature(self) -> None:
        assert coil().at_temperature("100 degC").rate == pytest.approx(0.98 * coil().rate)

    @pytest.mark.parametrize("winds", [1, -1])
    def test_relaxation(self, winds: int) -> None:
        aged = coil().after(at="90 deg", load_loss=0.05)
        held = winds * math.pi / 2
        assert aged.spring(winds=winds).load(held) == pytest.approx(0.95 * coil().spring(winds=winds).load(held))
        with pytest.raises(InputError, match="at must be > 0 rad"):
            coil().after(at=0, load_loss=0.05)


class TestInput:
    @pytest.mark.parametrize(
        ("changes", "message"),
        [
            ({"legs": (-0.01, 0)}, r"TorsionCoil\.legs must be >= 0 m, got -0\.01"),
            ({"legs": 0.01}, r"TorsionCoil\.legs must be a pair"),
            ({"body_coils": 1.5}, r"TorsionCoil\.body_coils must be >= 2, got 1\.5"),
            ({"mean_diameter": "5 mm"}, r"TorsionCoil\.mean_diameter must give a spring index"),
        ],
    )
    def test_values(self, changes: dict[str, Any], message: str) -> None:
        with pytest.raises((InputError, TypeError), match=message):
            coil(**changes)

    def test_few_turns(self) -> None:
        with pytest.warns(CoilCountWarning, match=r"2\.25 active turns are 0\.75 below 3"):
            coil(body_coils=2.25, legs=(0, 0))

    def test_arrays(self) -> None:
        builds = coil(wire=np.array([1.95e-3, 2.05e-3]))
        single = [coil(wire=w) for w in (1.95e-3, 2.05e-3)]
        together = builds.margins((0.1, 0.5), cycles=1e6, arbor="14 mm")
        apart = [c.margins((0.1, 0.5), cycles=1e6, arbor="14 mm") for c in single]
        for margin in together.margins:
            assert margin.factor == pytest.approx([m.margin(margin.name).factor for m in apart])
        assert str(together).startswith("torsion coil")

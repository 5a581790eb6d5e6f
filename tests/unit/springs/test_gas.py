"""Gas springs: what they do at the ends, what they warn of, what they refuse."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest

from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.springs.gas.mounting import check_gas_mounting, rod_down_margin
from springpoise.springs.gas.spring import GasSpring
from springpoise.springs.gas.state import NITROGEN, IdealGas, PengRobinson, VanDerWaals
from springpoise.springs.warnings import GasPressureWarning, GasProgressionWarning, GasTemperatureWarning, RodUpWarning

FORCES = {
    "extending": (400.0, 540.0),
    "compressing": (460.0, 612.0),
    "stroke": 0.2,
    "rod_diameter": 0.008,
    "extended_length": 0.5,
    "offset": 0.01,
}
PRESSURE = {
    "gauge_pressure": 8e6,
    "rod_diameter": 0.008,
    "stroke": 0.2,
    "extended_length": 0.5,
    "friction": (30.0, 36.0),
}


def from_forces(**changes):
    return GasSpring.from_forces(**{**FORCES, **changes})


def from_pressure(**changes):
    return GasSpring.from_pressure(**{"progression": 1.3, **PRESSURE, **changes})


def test_ends_of_the_stroke():
    spring = from_forces()
    low, high = spring.working_range
    assert (low, high) == (0.3, 0.5)
    assert spring.load(high) < -400.0
    assert spring.load(high + 1e-9) == 0.0
    assert spring.stiffness(high + 1e-9) == 0.0
    assert spring.energy(high + 0.1) == 0.0
    assert spring.hysteresis(high + 1e-9) == 0.0


def test_beyond_the_stroke_it_goes_on_along_its_tangent():
    spring = from_forces()
    end, rate = spring.load(0.3), spring.stiffness(0.3)
    assert spring.load(0.2) == pytest.approx(end - 0.1 * rate, rel=1e-12)
    assert spring.stiffness(0.2) == rate
    assert math.isfinite(spring.load(-10.0))
    assert spring.energy(0.2) == pytest.approx(spring.energy(0.3) - 0.1 * end + 0.5 * rate * 0.01, rel=1e-12)
    assert spring.hysteresis(0.2) == spring.hysteresis(0.3)


def test_friction_over_travel_or_force():
    travel, force = from_forces(), from_forces(friction_over="force")
    middle = 0.4
    assert travel.hysteresis(middle) == pytest.approx(33.0)
    assert travel.hysteresis(0.5) == pytest.approx(30.0)  # constant outside the two places
    assert travel.hysteresis(0.3) == pytest.approx(36.0)
    mean = -travel.load(middle)
    assert force.hysteresis(middle) == pytest.approx(30.0 + 6.0 * (mean - 430.0) / (576.0 - 430.0))
    cold = force.at_temperature("-20 degC")
    assert cold.hysteresis(middle) < force.hysteresis(middle)
    assert travel.at_temperature("-20 degC").hysteresis(middle) == travel.hysteresis(middle)


def test_friction_never_turns_negative():
    spring = from_forces(extending=(400.0, 500.0), compressing=(400.0, 600.0), friction_over="force")
    assert spring.hysteresis(0.5) == 0.0
    assert spring.hysteresis(0.49) == pytest.approx(0.0, abs=1e-9)
    assert spring.hysteresis(0.31) == pytest.approx(50.0)


def test_volume_and_progression_say_the_same():
    by_ratio = from_pressure()
    assert -by_ratio.load(0.3) == pytest.approx(1.3 * -by_ratio.load(0.5), rel=1e-12)
    by_volume = from_pressure(progression=None, gas_volume=by_ratio.gas_volume)
    assert by_volume.load(0.35) == pytest.approx(by_ratio.load(0.35), rel=1e-12)
    quick = from_pressure(exponent=1.3)
    assert -quick.load(0.3) == pytest.approx(1.3 * -quick.load(0.5), rel=1e-12)


def test_units_at_the_door():
    spring = from_pressure(gauge_pressure="80 bar", stroke="200 mm", gas_volume="36 cm^3", progression=None)
    assert spring.filling == pytest.approx(8e6 + 101325.0)
    assert spring.gas_volume == pytest.approx(36e-6)


def test_temperature_starts_from_the_reference():
    spring = from_forces(gas="ideal")
    hot = spring.at_temperature("60 degC")
    assert hot != spring
    assert hot.at_temperature("20 degC") == spring
    assert hot.at_temperature("0 degC") == spring.at_temperature("0 degC")
    assert hash(hot.at_temperature("20 degC")) == hash(spring)
    assert from_forces(gas="ideal", reference_temperature="60 degC").load(0.4) == pytest.approx(spring.load(0.4))


def test_real_gas_follows_temperature_more_steeply():
    ideal, real = (from_pressure(gauge_pressure=12e6, gas=gas) for gas in ("ideal", "nitrogen"))
    assert ideal.load(0.4) == real.load(0.4)
    steeper = (real.at_temperature("60 degC").load(0.4) / real.load(0.4) - 1.0) / (
        ideal.at_temperature("60 degC").load(0.4) / ideal.load(0.4) - 1.0
    )
    assert 1.2 < steeper < 1.4


def test_quick_motion_of_a_real_gas_warms_it():
    # An ideal gas written as a law of its own must change nothing, whatever the exponent.
    class Own:
        def at_constant_volume(self, pressure, temperature, to):
            return pressure * to / temperature

    for exponent in (1.0, 1.3):
        own, ideal = (from_pressure(exponent=exponent, gas=gas).at_temperature("50 degC") for gas in (Own(), "ideal"))
        assert own.load(0.37) == pytest.approx(ideal.load(0.37), rel=1e-12)
        assert own.energy(0.37) == pytest.approx(ideal.energy(0.37), rel=1e-9)


def test_leak():
    spring = from_pressure()
    older = spring.after("5 years", filling_loss_per_year="2 percent")
    assert older.filling == pytest.approx(spring.filling * 0.98**5, rel=1e-12)
    assert spring.after(0, filling_loss_per_year=0.02) == spring
    assert spring.after(3.15576e7, filling_loss_per_year=0.02).filling == pytest.approx(spring.filling * 0.98)
    with pytest.raises(InputError, match=r"time must be in s, got 5\.0; years\? write '5\.0 years'"):
        spring.after(5, filling_loss_per_year=0.02)
    with pytest.raises(InputError, match=r"filling_loss_per_year must be from 0 to below 1, got 2"):
        spring.after("5 years", filling_loss_per_year=2)
    with pytest.raises(InputError, match=r"time must be >= 0 s"):
        spring.after("-1 year", filling_loss_per_year=0.02)
    with pytest.raises(TypeError):
        spring.after("5 years")  # type: ignore[call-arg]


def test_a_spring_that_has_lost_all_is_pushed_in_by_the_air():
    empty = attrs.evolve(from_pressure(), filling=1.0)
    assert empty.load(0.5) == pytest.approx(101324.0 * empty.rod_area)


def test_mechanism_carries_it():
    arm = Arm(Body(mass=6.0, com=(0.4, 0.0)))
    mount = SpringMount(from_forces(), Straight(Point("ground", (0.05, -0.35)), Point("arm", (0.25, 0.0))))
    mechanism = Mechanism(arm, springs=[mount], travel=("-10 deg", "30 deg"))
    q = np.linspace(-0.1, 0.4, 5)
    lifting = mechanism.spring_torque(q)
    assert np.all(lifting > 0.0)  # it pushes the arm up
    assert np.all(mechanism.friction_band(q) > 0.0)
    state = mechanism.spring_states(q)[0]
    np.testing.assert_allclose(state.load, mount.spring.load(state.length))


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"offset": None}, r"GasSpring.offset must be given: .* makers use 5 mm .* 10 mm above"),
        ({"offset": 0.1}, r"GasSpring.offset must be >= 0 and < half the stroke \(0.1\) m, got 0.1"),
        ({"offset": -0.01}, r"GasSpring.offset must be >= 0"),
        ({"stroke": 0.5}, r"GasSpring.stroke must be < extended_length \(0.5\) m, got 0.5"),
        ({"extending": (540.0, 400.0)}, r"GasSpring.extending must rise .* got 540.0 N out and 400.0 N in; .*swapped"),
        ({"extending": (460.0, 612.0), "compressing": (400.0, 540.0)}, r"GasSpring.compressing must be >= extending"),
        ({"extending": (-1.0, 540.0)}, r"GasSpring forces must be > 0 N, got F1 = -1.0"),
        ({"extending": 400.0}, r"GasSpring.extending must be a pair in N"),
        ({"extending": ("400 kg", "540 N")}, r"GasSpring.extending must be a value in N, got '400 kg'"),
        ({"rod_diameter": 0.0}, r"GasSpring.rod_area must be > 0"),
        ({"exponent": 0.5}, r"GasSpring.exponent must be from 1 \(slow motion\) to 2, got 0.5"),
        ({"exponent": -1.0}, r"GasSpring.exponent must be from 1 \(slow motion\) to 2, got -1.0"),
        ({"friction_over": "speed"}, r"GasSpring.friction_over must be one of 'travel', 'force', got 'speed'"),
        ({"gas": "air"}, r"GasSpring.gas must be one of 'ideal', 'nitrogen', or a gas law, got 'air'"),
        ({"gas": IdealGas}, r"GasSpring.gas must be 'ideal', 'nitrogen' or have at_constant_volume"),
        ({"reference_temperature": 20}, r"GasSpring.*temperature must be an absolute temperature in K, got 20"),
        ({"atmospheric_pressure": -1.0}, r"GasSpring.atmospheric_pressure must be >= 0 Pa, got -1.0"),
        (
            {"extending": (40.0, 1040.0), "compressing": (40.0, 1040.0), "offset": 0.08},
            r"GasSpring forces must rise by less than 1.5 times in absolute pressure",
        ),
    ],
)
def test_forces_refused(changes, message):
    with pytest.raises((InputError, InputTypeError), match=message):
        from_forces(**changes)


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"friction": None}, r"GasSpring.friction must be given as \(rod out, rod in\) in N"),
        ({"friction": (-1.0, 0.0)}, r"GasSpring.friction must be >= 0 N at both ends"),
        ({"progression": None}, r"must be given one of gas_volume and progression, got none"),
        ({"gas_volume": 1e-5}, r"must be given one of gas_volume and progression, got both"),
        ({"progression": 1.0}, r"GasSpring.progression must be > 1, got 1.0"),
        ({"gauge_pressure": 0.0}, r"GasSpring.gauge_pressure must be > 0 Pa, got 0.0"),
        ({"progression": None, "gas_volume": 1e-6}, r"GasSpring.gas_length must be > stroke \(0.2\) m"),
        ({"gauge_pressure": math.nan}, r"GasSpring.gauge_pressure must be a value in Pa that is finite"),
    ],
)
def test_pressure_refused(changes, message):
    with pytest.raises((InputError, InputTypeError), match=message):
        from_pressure(**changes)


def test_offset_of_the_class_itself():
    with pytest.raises(InputError, match=r"GasSpring.offset must be < half the stroke \(0.1\) m, got 0.1"):
        attrs.evolve(from_pressure(), offset=0.1)
    with pytest.raises(UnitError, match=r"GasSpring.filling must be a value in Pa, got '3 N'"):
        attrs.evolve(from_pressure(), filling="3 N")


def test_warnings_state_the_margin():
    with pytest.warns(GasPressureWarning, match=r"filling is 30 MPa above the atmosphere, outside the usual 1.5 to 20"):
        from_pressure(gauge_pressure=30e6)
    with pytest.warns(GasProgressionWarning, match=r"rises 2 times over the stroke, outside the usual 1.05 to 1.6"):
        from_pressure(progression=2.0)
    with pytest.warns(GasTemperatureWarning, match=r"temperature is 20 K outside -40 to 80 degC") as caught:
        from_pressure().at_temperature("100 degC")
    assert caught[0].filename == __file__
    with pytest.warns(GasTemperatureWarning, match=r"is 10 K outside"):
        from_pressure().at_temperature("-50 degC")
    with pytest.warns(GasPressureWarning) as caught:
        from_forces(extending=(40.0, 54.0), compressing=(46.0, 61.0))
    assert caught[0].filename == __file__


def test_four_forces_print():
    text = str(from_forces().forces(offset="10 mm"))
    assert "400.0 N" in text
    assert "progression      1.350" in text
    assert from_forces().forces(offset="10 mm").friction == pytest.approx((30.0, 36.0))


def test_scattered_forces():
    builds = np.array([[0.95], [1.0], [1.05]])
    for over in ("travel", "force"):
        many = from_forces(extending=(400.0 * builds, 540.0 * builds), compressing=(470.0, 640.0), friction_over=over)
        for row, build in enumerate(builds[:, 0].tolist()):
            one = from_forces(
                extending=(400.0 * build, 540.0 * build), compressing=(470.0, 640.0), friction_over=over
            ).at_temperature(310.0)
            x = np.linspace(0.28, 0.51, 9)
            warm = many.at_temperature(310.0)
            np.testing.assert_allclose(warm.load(x)[row], one.load(x), rtol=1e-12)
            np.testing.assert_allclose(warm.hysteresis(x)[row], one.hysteresis(x), rtol=1e-11)
        assert "380.0 N to 420.0 N" in str(many.forces(offset=0.01))
        assert many == attrs.evolve(many)
    with pytest.raises(InputError, match=r"GasSpring.exponent must be from 1"):
        from_forces(exponent=[1.0, 3.0])


def test_mounting_rod_down():
    found = check_gas_mounting([0.30, 0.35], [0.0, 0.0], ["0.30 m", "0.40 m"])
    assert found.status == "rod down over the whole travel"
    assert found.margin == pytest.approx(math.radians(60.0) - math.acos(0.35 / 0.4))
    assert found.length_at_worst == 0.40
    assert found.margin_closed == pytest.approx(math.radians(60.0))
    assert "rod down" in str(found)


def test_mounting_rod_up_warns():
    with pytest.warns(RodUpWarning, match=r"180.00 deg from straight down, 120.00 deg beyond the permitted 60.00 deg"):
        found = check_gas_mounting(0.0, 0.3, 0.3)
    assert found.status.startswith("rod not down when closed")
    with pytest.warns(RodUpWarning, match=r"rod down when closed, too far from straight down elsewhere"):
        found = check_gas_mounting([0.3, 0.1], [0.0, 0.0], [0.3, 0.4])
    assert found.margin < 0.0 < found.margin_closed
    assert check_gas_mounting([0.3, 0.1], [0.0, 0.0], [0.3, 0.4], widest_tilt="80 deg").margin > 0.0


def test_mounting_refuses():
    with pytest.raises(InputError, match=r"length must be > 0 m, got 0"):
        check_gas_mounting(0.0, 0.0, 0.0)
    with pytest.raises(InputError, match=r"length must be >= the difference of the heights \(0.3\) m, got 0.2"):
        check_gas_mounting(0.3, 0.0, 0.2)


def test_mounting_margin_on_arrays():
    margin = rod_down_margin(np.array([0.3, 0.0]), 0.0, np.array([0.3, 0.3]))
    np.testing.assert_allclose(margin, [math.radians(60.0), math.radians(-30.0)])


def test_gas_laws_refuse():
    with pytest.raises(InputError, match=r"PengRobinson temperature must be above its critical temperature of 126.2 K"):
        NITROGEN.at_constant_volume(1e6, 293.15, 120.0)
    with pytest.raises(InputError, match=r"VanDerWaals.covolume must be > 0"):
        VanDerWaals(0.137, 0.0)
    with pytest.raises(InputError, match=r"PengRobinson.critical_pressure must be > 0 Pa"):
        PengRobinson(126.2, -1.0, 0.0)
    with pytest.raises(UnitError, match=r"VanDerWaals.attraction must be a value in"):
        VanDerWaals("3 m", 3.87e-5)


def test_gas_laws_on_arrays():
    pressures = np.array([1e6, 10e6])
    for gas in (IdealGas(), NITROGEN, VanDerWaals("0.137 Pa*m^6/mol^2", "38.7 cm^3/mol")):
        found = gas.at_constant_volume(pressures, 293.15, 320.0)
        np.testing.assert_allclose(found, [gas.at_constant_volume(p, 293.15, 320.0) for p in pressures.tolist()])

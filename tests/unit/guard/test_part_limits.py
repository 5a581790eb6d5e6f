"""Limits on parts and on temperature: against closed forms, and every complaint."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import attrs
import pytest

from springpoise import Arm, Body, GasSpring, JointTravel, Mechanism, Point, RubberTube, SpringMount, Straight, guard
from springpoise.cli import main
from springpoise.errors import InputError, PoiseFileError
from springpoise.springs import (
    BucklingWarning,
    CompressionCoil,
    ExtensionCoil,
    ExtensionSpring,
    ScaledSpring,
    Spiral,
    Strip,
    TorsionCoil,
    TorsionSpring,
    ZeroLengthSpring,
    in_parallel,
    in_series,
    materials,
    rubber,
    wire_rope,
)

COIL = ExtensionCoil(
    wire="2 mm", mean_diameter="18 mm", body_coils=40, material=materials.MUSIC_WIRE, initial_tension="17 N",
    hook_radius="9 mm", hook_bend_radius="5 mm",
)  # fmt: skip
PUSH = CompressionCoil(
    wire="2 mm", mean_diameter="14 mm", total_coils=16, ends="squared ground", free_length="120 mm",
    material=materials.MUSIC_WIRE, support="both ends flat",
)  # fmt: skip
TWIST = TorsionCoil(wire="3 mm", mean_diameter="30 mm", body_coils=8, legs=(0, 0), material=materials.MUSIC_WIRE)

# Music wire of 2 mm: 2211 MPa·mm^0.145/d^0.145 (Shigley's Mechanical Engineering Design, ch. 10, as transcribed).
TENSILE = 2211e6 / 2.0**0.145


def lengths_over(first: float, last: float, spring: Any, **others: Any) -> guard.PoiseFile:
    """A spring along the x axis from an anchor at -0.1 m, with an arm so long that it runs from first to last."""
    # An arm of radius 0.05 m turning about the origin: length from (-r0, 0) to (b cos q, b sin q).
    b = 0.5 * (last - first)
    path = Straight(Point("ground", (-(first + b), 0)), Point("arm", (b, 0)))
    mount = SpringMount(spring, path, name="main")
    arm = Arm(Body(1.0, (0.2, 0)))
    return guard.PoiseFile(mechanism=Mechanism(arm, springs=mount, travel=(0.0, math.pi)), **others)


def verdict(document: guard.PoiseFile, limit: guard.Limit) -> guard.LimitVerdict:
    [found] = guard.check(attrs.evolve(document, limits=[limit])).verdicts
    return found


def test_yield_of_body_and_hooks_by_closed_form() -> None:
    """Stresses of body and hooks as in Shigley, ch. 10; shares of tensile strength 0.45, 0.75 and 0.40 there."""
    d, big, g, e = 2e-3, 18e-3, 81.0e9, 196.5e9
    rate = g * d**4 / (8 * big**3 * (40 + g / e))
    free = (2 * 9 - 1 + 40) * d
    longest = free + 0.07
    load = 17 + rate * 0.07
    unit = 8 * load * big / (math.pi * d**3)
    body = 0.45 * TENSILE / (unit * (4 * 9 + 2) / (4 * 9 - 3))
    ka = (4 * 81 - 9 - 1) / (4 * 9 * 8)
    bending = 0.75 * TENSILE / (load * (ka * 16 * big / (math.pi * d**3) + 4 / (math.pi * d**2)))
    torsion = 0.40 * TENSILE / (unit * (4 * 5 - 1) / (4 * 5 - 4))
    found = verdict(lengths_over(free + 0.01, longest, guard.spring_of(COIL)), guard.YieldMargin(at_least=1.2))
    assert found.value == pytest.approx(min(body, bending, torsion), rel=1e-9)
    assert found.at == pytest.approx(0.0, abs=1e-12)
    assert (found.unit, found.about) == ("1", "main")
    assert found.holds == (found.value >= 1.2)
    governing = {body: "body", bending: "hook bending", torsion: "hook torsion"}[min(body, bending, torsion)]
    assert f"yield margin of main is {found.value:.3f} ({governing}, static) at 0.00 deg, " in found.sentence


def test_a_part_is_found_wherever_it_is() -> None:
    """The same load in the same coil gives the same margin: alone, beside another, scaled, in a chain."""
    free = COIL.free_length_inside_hooks
    alone = verdict(lengths_over(free + 0.01, free + 0.07, guard.spring_of(COIL)), guard.YieldMargin(at_least=1))
    rope = wire_rope(diameter="2 mm", fill=0.5, modulus="100 GPa", length="0.2 m")
    stretch = (17 + COIL.rate * 0.07) / rope.rate
    for spring, more in (
        (in_parallel(ExtensionSpring(50.0, free_length=0.05), guard.spring_of(COIL)), 0.0),
        (ScaledSpring(guard.spring_of(COIL), 1.7), 0.0),
        (in_series(guard.spring_of(COIL), rope), 0.2 + stretch),
    ):
        found = verdict(lengths_over(free + 0.01 + more, free + 0.07 + more, spring), guard.YieldMargin(at_least=1))
        assert found.value == pytest.approx(alone.value, rel=1e-7), spring


def test_endless_life_by_goodman() -> None:
    """1/n = τa/Sse + τm/Ssu with Sse = Ssa/(1 - Ssm/Ssu), Ssa = 35 and Ssm = 55 kpsi, Ssu = 0.67 Sut (Shigley, ch. 10)."""
    kpsi = 6894757.293168361
    ultimate = 0.67 * TENSILE
    endurance = 35 * kpsi / (1 - 55 * kpsi / ultimate)
    per_load = (4 * 7 + 2) / (4 * 7 - 3) * 8 * 14e-3 / (math.pi * 2e-3**3)
    rate = 81.0e9 * 2e-3**4 / (8 * 14e-3**3 * 14)
    low, high = (rate * (0.120 - x) for x in (0.110, 0.085))
    guided = guard.spring_of(attrs.evolve(PUSH, support="guided"))
    amplitude, mean = 0.5 * per_load * (high - low), 0.5 * per_load * (high + low)
    limit = guard.FatigueMargin(criterion="goodman", at_least=1.1)
    found = verdict(lengths_over(0.085, 0.110, guided), limit)
    assert found.value == pytest.approx(1 / (amplitude / endurance + mean / ultimate), rel=1e-9)
    assert "(body, fatigue)" in found.sentence
    assert found.at == pytest.approx(math.pi)
    peened = verdict(lengths_over(0.085, 0.110, guided), attrs.evolve(limit, peened=True))
    assert peened.value > found.value


def test_so_many_cycles_by_the_wires_table() -> None:
    """0.36 of tensile strength for 100 000 cycles of music wire in compression (value from memory)."""
    per_load = (4 * 7 + 2) / (4 * 7 - 3) * 8 * 14e-3 / (math.pi * 2e-3**3)
    rate = 81.0e9 * 2e-3**4 / (8 * 14e-3**3 * 14)
    guided = guard.spring_of(attrs.evolve(PUSH, support="guided"))
    found = verdict(lengths_over(0.085, 0.110, guided), guard.FatigueMargin(cycles=1e5, at_least=1.0))
    assert found.value == pytest.approx(0.36 * TENSILE / (per_load * rate * 0.035), rel=1e-9)
    assert "(body, 100000 cycles)" in found.sentence


@pytest.mark.filterwarnings("ignore::springpoise.springs.BucklingWarning")
def test_buckling_by_closed_form() -> None:
    """y = L0 C1 [1 - sqrt(1 - C2/λ²)], C1 = E/2(E - G), C2 = 2π²(E - G)/(2G + E), λ = L0/2D (Shigley, ch. 10)."""
    e, g = 196.5e9, 81.0e9
    slender = 0.5 * 120 / 14
    critical = 0.120 * e / (2 * (e - g)) * (1 - math.sqrt(1 - 2 * math.pi**2 * (e - g) / (2 * g + e) / slender**2))
    limit = guard.BucklingMargin(at_least=1.0)
    found = verdict(lengths_over(0.095, 0.110, guard.spring_of(PUSH)), limit)
    assert found.value == pytest.approx(critical / 0.025, rel=1e-9)
    guided = verdict(lengths_over(0.095, 0.110, guard.spring_of(attrs.evolve(PUSH, support="guided"))), limit)
    assert guided.holds
    assert guided.value == math.inf
    assert guided.to_dict()["value"] is None


def on_joint(spring: Any, travel: tuple[float, float], **others: Any) -> guard.PoiseFile:
    mount = SpringMount(spring, JointTravel(), name="main")
    return guard.PoiseFile(mechanism=Mechanism(Arm(Body(1.0, (0.2, 0))), springs=mount, travel=travel), **others)


def test_torsion_coils_in_either_direction() -> None:
    """Inner fibre Ki 32 M/(π d³), Ki = (4C² - C - 1)/(4C (C - 1)), 0.78 of 2211/3^0.145 MPa (Shigley, ch. 10)."""
    inner = (400 - 10 - 1) / (40 * 9)
    for winds, travel in ((1, (0.1, 1.0)), (-1, (-1.0, -0.1))):
        found = verdict(on_joint(guard.spring_of(TWIST, winds=winds), travel), guard.YieldMargin(at_least=1.0))
        stress = inner * 32 * TWIST.rate * 1.0 / (math.pi * 3e-3**3)
        assert found.value == pytest.approx(0.78 * 2211e6 / 3**0.145 / stress, rel=1e-9)
        assert abs(found.at or 0.0) == pytest.approx(1.0)


def test_strips_and_spirals() -> None:
    strip = Strip(
        width="25 mm", thickness="0.30 mm", natural_radius="16 mm", youngs_modulus="206 GPa", length="1 m", form="beam",
        life=[(0.01, 40_000), (0.02, 4_000)],
    )  # fmt: skip
    made = guard.spring_of(strip, hysteresis_share=0.05, allowable_stress="2200 MPa")
    found = verdict(lengths_over(0.1, 0.5, made), guard.YieldMargin(at_least=1.1))
    assert found.value == pytest.approx(2200e6 / (206e9 * 0.3e-3 / (2 * 16e-3)), rel=1e-12)  # E t/(2 Rn)
    life = verdict(lengths_over(0.1, 0.5, made), guard.FatigueMargin(cycles=10_000, at_least=1.1))
    # Between two entries of the table the logarithm of the life is linear.
    expected = math.exp(math.log(40_000) + (0.3 / 16 - 0.01) / 0.01 * math.log(0.1)) / 10_000
    assert life.value == pytest.approx(expected, rel=1e-12)
    spiral = Spiral(width="12 mm", thickness="1 mm", length="1.5 m", youngs_modulus="206 GPa", outer_end="clamped")
    made = guard.spring_of(spiral, free_angle="-90 deg", allowable_stress="900 MPa")
    found = verdict(on_joint(made, (-1.0, 1.0)), guard.YieldMargin(at_least=1.1))
    torque = 206e9 * 0.012 * 1e-9 / (12 * 1.5) * (1.0 + math.pi / 2)
    assert found.value == pytest.approx(900e6 * 0.012 * 1e-6 / (6 * torque), rel=1e-12)  # stress 6 M/(b t²)


# ------------------------------------------------------------------------------------------------
# temperature


LIFT = ZeroLengthSpring("0.245 N/mm")  # balances 3 kg at 0.4 m with anchor 0.2 m and attachment 0.12 m, twice


def lift(spring: Any = LIFT, **others: Any) -> guard.PoiseFile:
    mount = SpringMount(spring, Straight(Point("ground", (0, 0.2)), Point("arm", (0.12, 0))), count=2, name="main")
    mechanism = Mechanism(Arm(Body(3.0, (0.4, 0))), springs=mount, travel=(-1, 1), gravity=(0.0, -9.8))
    return guard.PoiseFile(mechanism=mechanism, **others)


SLOPE = guard.Service(rate_slope="-1e-3 1/K", reference="20 degC")


def test_the_worst_temperature_counts() -> None:
    """A rate that is 5 % higher at -30 °C leaves 5 % of m g r = 11.76 N·m at the level pose."""
    limit = guard.ResidualTorque(at_most="1 N*m", at_temperature=["-30 degC", "40 degC"])
    report = guard.check(lift(service=[SLOPE], limits=[limit]))
    [found] = report.verdicts
    assert found.value == pytest.approx(0.05 * 11.76, rel=1e-12)
    assert found.temperature == pytest.approx(243.15)
    assert found.sentence.startswith("residual torque at -30 degC is 0.5880 N*m (5.00 % of the peak gravity torque)")
    assert found.to_dict()["temperature_K"] == pytest.approx(243.15)
    header, row = str(report).splitlines()[1:3]
    assert header.endswith("springs at")
    assert row.endswith("-30 degC")


def test_a_spring_of_its_own_comes_before_all() -> None:
    steep = guard.Service(spring="main", rate_slope="-2e-3 1/K", reference="20 degC")
    limit = guard.ResidualTorque(at_most="1 N*m", at_temperature=["-30 degC"])
    for services in ([SLOPE, steep], [steep, SLOPE]):
        assert verdict(lift(service=services), limit).value == pytest.approx(0.1 * 11.76, rel=1e-12)


def test_springs_inside_others_are_warmed_too() -> None:
    half = ZeroLengthSpring("0.1225 N/mm")
    limit = guard.ResidualTorque(at_most="1 N*m", at_temperature=["-30 degC"])
    for spring in (in_parallel(half, half), ScaledSpring(half, 2.0), in_series(*[ZeroLengthSpring("0.49 N/mm")] * 2)):
        found = verdict(lift(spring, service=[SLOPE]), limit)
        assert found.value == pytest.approx(0.05 * 11.76, rel=1e-9), spring


def test_coils_and_gas_springs_need_no_number() -> None:
    """The wire's moduli fall by 0.25e-3 of themselves a kelvin (EN 13906-1, value from memory)."""
    free = COIL.free_length_inside_hooks
    document = lengths_over(free + 0.01, free + 0.07, guard.spring_of(COIL))
    cold, warm = (
        verdict(document, guard.YieldMargin(at_least=1.0, at_temperature=[t])).value for t in ("20 degC", "60 degC")
    )
    assert warm == pytest.approx(cold / (1 - 0.25e-3 * 40), rel=1e-9)


GAS = GasSpring.from_forces(
    extending=(400, 540), compressing=(460, 612), offset="10 mm", stroke="200 mm", rod_diameter="8 mm",
    extended_length="500 mm", gas="ideal",
)  # fmt: skip
TUBE = RubberTube(
    outer_diameter="9.525 mm", inner_diameter="6.35 mm", free_length="100 mm", law=rubber.NeoHookean(mu="0.4 MPa")
)


def test_service_temperatures() -> None:
    limit = guard.ServiceTemperature(at_temperature=["-10 degC", "40 degC"], at_least="5 K")
    cases: list[tuple[guard.PoiseFile, float]] = [
        (lift(GAS), 30.0),  # tested from -40 to 80 degC (QC/T 207-1996, as excerpted)
        (lift(guard.spring_of(COIL)), 80.0),  # music wire to 120 degC
        (lift(TUBE, service=[guard.Service(highest="70 degC")]), 30.0),
        (lift(TUBE, service=[guard.Service(highest="70 degC", lowest="-12 degC", energy_share=0.2, reference=293.0)]), 2.0),
        (lift(guard.spring_of(COIL), service=[guard.Service(highest="42 degC")]), 2.0),
    ]  # fmt: skip
    for document, margin in cases:
        if isinstance(document.mechanism.springs[0].spring, RubberTube):
            given = attrs.evolve(document.service[0], energy_share=0.2, reference="20 degC")
            document = attrs.evolve(document, service=[given])  # noqa: PLW2901
        found = verdict(document, limit)
        assert found.value == pytest.approx(margin), document.service
        assert found.holds == (margin >= 5.0)
    assert found.sentence == (
        "service temperature: the distance to the 42 degC that main bears of main at 40 degC is 2.000 K, "
        "3.000 K outside the limit of at least 5.000 K"
    )


def test_a_wire_that_is_too_warm_is_a_warning_too() -> None:
    limit = guard.ServiceTemperature(at_temperature=["130 degC"])
    report = guard.check(lift(guard.spring_of(COIL), limits=[limit]))
    assert not report.holds
    assert report.verdicts[0].value == pytest.approx(-10.0)
    assert report.warnings[-1] == "ExtensionCoil: 130 degC is 10 K above the top temperature of music wire, A228"
    assert "  warning: ExtensionCoil: 130 degC is 10 K above" in str(report)
    assert report.to_dict()["warnings"] == list(report.warnings)


# ------------------------------------------------------------------------------------------------
# complaints


@pytest.mark.parametrize(
    ("document", "limit", "message"),
    [
        (lift(), guard.StoredEnergy(at_most=9.0, at_temperature=["0 degC"]),
         "limits[1]: service.rate_slope of spring 'main' must be given in 1/K to judge its ZeroLengthSpring at another temperature"),
        (lift(TUBE), guard.StoredEnergy(at_most=9.0, at_temperature=["0 degC"]), "service.energy_share of spring 'main' must be given to judge its RubberTube"),
        (lift(TUBE, service=[guard.Service(energy_share=0.2)]), guard.StoredEnergy(at_most=9.0, at_temperature=["0 degC"]), "service.reference of spring 'main' must be given in K"),
        (lift(service=[SLOPE]), guard.ServiceTemperature(at_temperature=["0 degC"]), "service.highest of spring 'main' must be given in K: what its ZeroLengthSpring bears is not known"),
        (lambda: lift(guard.spring_of(attrs.evolve(PUSH, support=None))), guard.BucklingMargin(at_least=1.0), "support of spring 'main' must be given to judge buckling, got none"),
        (on_joint(guard.spring_of(TWIST), (0.1, 1.0)), guard.FatigueMargin(criterion="goodman", at_least=1.0), "FatigueMargin.cycles must be given to judge the TorsionCoil of spring 'main'"),
        (on_joint(guard.spring_of(TWIST), (-1.0, 1.0)), guard.YieldMargin(at_least=1.0), "spring 'main' must be loaded in its winding direction only, got -"),
        (lift(guard.spring_of(COIL)), guard.FatigueMargin(cycles=1e9, at_least=1.0), "WireMaterial.cyclic of 'music wire, A228' must hold extension_body for 1e+09 cycles"),
        (lift(guard.spring_of(COIL)), guard.FatigueMargin(cycles=1e5, peened=True, at_least=1.0), "FatigueMargin.criterion must be given with peened"),
        (on_joint(guard.spring_of(Spiral(width=0.012, thickness=0.001, length=1.5, youngs_modulus=206e9, outer_end="clamped")), (0.1, 1.0)), guard.YieldMargin(at_least=1.0), "allowable_stress of spring 'main' must be given in Pa to judge a Spiral"),
    ],
    ids=range(10),
)  # fmt: skip
@pytest.mark.filterwarnings("ignore::springpoise.springs.BucklingWarning")
def test_what_a_limit_needs_is_said(document: Any, limit: guard.Limit, message: str) -> None:
    made = document() if callable(document) else document
    with pytest.raises(InputError, match=re.escape(message)):
        guard.check(attrs.evolve(made, limits=[limit]))


@pytest.mark.parametrize(
    ("limit", "sentence"),
    [
        (guard.YieldMargin(at_least=1.0), "yield margin: there is no extension, compression or torsion coil, strip or spiral to judge"),
        (guard.FatigueMargin(cycles=10, at_least=1.0), "fatigue margin: there is no extension, compression or torsion coil or strip to judge"),
        (guard.BucklingMargin(at_least=1.0), "buckling margin: there is no compression coil to judge"),
    ],
)  # fmt: skip
def test_nothing_to_judge_is_not_a_pass(limit: guard.Limit, sentence: str) -> None:
    found = verdict(lift(), limit)
    assert not found.holds
    assert found.sentence == sentence


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: guard.YieldMargin(at_least=0), "at_least must be > 0, got 0"),
        (lambda: guard.FatigueMargin(at_least=1.0), "FatigueMargin must have criterion or cycles, got neither"),
        (lambda: guard.FatigueMargin(at_least=1.0, criterion="goodmann"), "Fatigue.criterion must be one of 'sines', 'gerber', 'goodman', got 'goodmann'"),
        (lambda: guard.FatigueMargin(at_least=1.0, cycles=-5), "FatigueMargin.cycles must be > 0, got -5"),
        (lambda: guard.ServiceTemperature(), "ServiceTemperature.at_temperature must be given, got none"),
        (lambda: guard.ServiceTemperature(at_temperature=["0 degC"], at_least="5 degC"), "ServiceTemperature.at_least must be a text such as '10 K', got '5 degC'"),
        (lambda: guard.StoredEnergy(at_most=1.0, at_temperature=[]), "Limit.at_temperature must be at least one temperature, got none"),
        (lambda: guard.Service(rod="top"), "Service.rod must be 'first' or 'last', got 'top'"),
        (lambda: lift(service=[guard.Service(spring="man")]), "service[1].spring must be the name of a spring, got 'man'; did you mean 'main'?"),
        (lambda: lift(service=[SLOPE, SLOPE]), "service[2].spring must be one that no other has, got 'none twice'"),
        (lambda: lift(limits=[guard.YieldMargin(at_least=1.0, spring="man")]), "limits[1].spring must be the name of a spring, got 'man'"),
    ],
)  # fmt: skip
def test_what_a_limit_refuses(call: Callable[[], Any], message: str) -> None:
    with pytest.raises(InputError, match=re.escape(message)):
        call()


# ------------------------------------------------------------------------------------------------
# in files


def test_limits_and_service_are_written_and_read_back(tmp_path: Path) -> None:
    limits = [
        guard.YieldMargin(at_least=1.2, spring="main", at_temperature=["-10 degC", "40 degC"]),
        guard.FatigueMargin(at_least=1.1, criterion="gerber", cycles=100_000, peened=True),
        guard.BucklingMargin(at_least=1.3),
        guard.ServiceTemperature(at_temperature=["-10 degC", "313.15 K"], at_least="7.5 K"),
        guard.ResidualTorque(at_most="3 %", at_temperature=["20 degC"]),
    ]
    service = [SLOPE, guard.Service(spring="main", energy_share=0.2, lowest="-10 degC", highest="70 degC", rod="last")]
    document = lift(guard.spring_of(COIL), limits=limits, service=service)
    file = tmp_path / "lift.poise.toml"
    guard.save(document, file)
    assert guard.load(file) == document
    text = file.read_text(encoding="utf-8")
    assert 'at_temperature = ["-10 degC", "40 degC"]' in text
    assert 'at_least = "7.5 K"' in text


def test_a_limit_that_cannot_be_judged_makes_the_file_unreadable(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "lift.poise.toml"
    limit = guard.StoredEnergy(at_most=9.0, at_temperature=["0 degC"])
    guard.save(lift(limits=[limit]), file)
    with pytest.raises(PoiseFileError, match=r"lift\.poise\.toml: limits\[1\]: service\.rate_slope of spring 'main'"):
        guard.check(file)
    assert main(["check", str(file)]) == 2
    assert "limits[1]: service.rate_slope of spring 'main' must be given in 1/K" in capsys.readouterr().err


# ------------------------------------------------------------------------------------------------
# gas springs' mounting


def flap(rod: str | None, **others: Any) -> guard.PoiseFile:
    """A flap above its gas spring, which leans by 16 to 30 degrees."""
    path = Straight(Point("ground", (0.05, -0.35)), Point("arm", (0.15, 0)))
    mount = SpringMount(GAS, path, name="strut")
    mechanism = Mechanism(Arm(Body(12.0, (0.4, 0))), springs=mount, travel=("0 deg", "40 deg"))
    return guard.PoiseFile(mechanism=mechanism, service=[guard.Service(rod=rod)], **others)


def test_a_rod_that_is_up_is_a_warning_in_the_report(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    limits = [guard.StoredEnergy(at_most="500 J")]
    assert guard.check(flap(None, limits=limits)).warnings == ()
    assert guard.check(flap("first", limits=limits)).warnings == ()
    report = guard.check(flap("last", limits=limits))
    [text] = report.warnings
    assert report.holds
    assert text.startswith("gas spring 'strut', rod at the last point of its path: rod not down when closed")
    assert "beyond the permitted 60.00 deg" in text
    file = tmp_path / "flap.poise.toml"
    guard.save(flap("last", limits=limits), file)
    assert main(["check", str(file)]) == 0
    assert "  warning: gas spring 'strut', rod at the last" in capsys.readouterr().out
    assert main(["check", "--json", str(file)]) == 0
    assert json.loads(capsys.readouterr().out)["files"][0]["warnings"] == [text]


def test_a_design_says_it_too() -> None:
    request = guard.FitRequest()
    mount = SpringMount(TorsionSpring(1.0), JointTravel(), name="helper")
    opened = guard.OpenSpring(place=1, mount=mount, fields=("rate", "free_angle"))
    document = attrs.evolve(flap("last"), design=request, open_springs=[opened])
    found = guard.design(document)
    assert found.report is not None
    assert len(found.report.warnings) == 1
    assert "\nWarnings\n  warning: gas spring 'strut'" in str(found)
    assert found.to_dict()["limits"]["warnings"] == list(found.report.warnings)


def test_what_a_spring_warns_of_while_it_is_read(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """An unguided coil: the text reaches whoever runs the command, without a line of code."""
    free = attrs.evolve(PUSH, support=None)
    with pytest.warns(BucklingWarning):
        guard.save(lift(guard.spring_of(free), limits=[guard.StoredEnergy(at_most="50 J")]), tmp_path / "a.poise.toml")
    main(["check", str(tmp_path / "a.poise.toml")])
    err = capsys.readouterr().err
    assert err.startswith("springpoise: warning: CompressionCoil: unguided it bows out if both ends are pivoted at ")
    assert err.count("warning") == 1

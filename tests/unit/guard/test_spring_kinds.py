"""Every kind of spring in a file: what it becomes, that it is written as it was, and what is said where it is wrong."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import attrs
import pytest

from springpoise import Arm, Body, JointTravel, Mechanism, Point, SpringMount, Straight, guard
from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.springs import (
    NITROGEN,
    NITROGEN_VAN_DER_WAALS,
    CompressionCoil,
    CompressionSpring,
    ExtensionCoil,
    ExtensionSpring,
    GasSpring,
    IdealGas,
    MeasuredSpring,
    OffsetSpring,
    PengRobinson,
    RubberTube,
    ScaledSpring,
    Spiral,
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
    wire_rope,
)

Write = Callable[..., Path]

SPRING = 'kind = "zero length"\nrate = "0.245 N/mm" # bought'
STRAIGHT = """\
kind = "straight"
first = { body = "ground", at = ["0 m", "0.2 m"] }
last = { body = "arm", at = ["0.12 m", "0 m"] }"""
JOINT = 'kind = "joint travel"\njoint = 0'

COIL = ExtensionCoil(
    wire="2 mm", mean_diameter="18 mm", body_coils=40, material=materials.MUSIC_WIRE, initial_tension="17 N",
    hook_radius="9 mm", hook_bend_radius="5 mm",
)  # fmt: skip
PUSH = CompressionCoil(
    wire="2.5 mm", mean_diameter="25 mm", total_coils=12, ends="squared ground", free_length="100 mm",
    material=materials.EN_SM, support="both ends flat",
)  # fmt: skip
TWIST = TorsionCoil(
    wire="3 mm", mean_diameter="30 mm", body_coils=8.25, legs=("20 mm", "40 mm"), material=materials.MUSIC_WIRE
)
STRIP = Strip(
    width="25 mm", thickness="0.3 mm", natural_radius="16 mm", youngs_modulus="206 GPa", length="1 m", form="trade 26.4",
    life=[(0.01, 40_000), (0.03, 4_000)],
)  # fmt: skip
SPIRAL = Spiral(width="12 mm", thickness="1 mm", length="1.5 m", youngs_modulus="206 GPa", outer_end="pinned")
FORCES: dict[str, Any] = {
    "extending": ("400 N", "540 N"),
    "compressing": ("460 N", "612 N"),
    "stroke": "200 mm",
    "rod_diameter": "8 mm",
    "extended_length": "500 mm",
    "offset": "10 mm",
}
GAS = GasSpring.from_forces(**FORCES)
GAS_TABLE = """\
kind = "gas spring from forces"
extending = ["400 N", "540 N"]
compressing = ["460 N", "612 N"]
stroke = "200 mm"
rod_diameter = "8 mm"
extended_length = "500 mm"
offset = "10 mm"
"""
YEOH = rubber.Yeoh(c1="0.23155 MPa", c2="-3.3075 kPa", c3="107.03 Pa", fitted_over=(1.0, 4.4))
TUBE = RubberTube(outer_diameter="9.525 mm", inner_diameter="6.35 mm", free_length="100 mm", law=YEOH)
BENCH = MeasuredSpring([0.1, 0.15, 0.2], [12.0, 30.0, 50.0], unloading=[11.0, 28.0, 50.0])
PULL = ExtensionSpring(900.0, free_length=0.09, initial_tension=11.0, longest=0.31)


def with_law(law: Any) -> RubberTube:
    return attrs.evolve(TUBE, law=law)


LENGTHWISE = [
    GAS,
    attrs.evolve(GAS, gas=IdealGas(), exponent=1.2, friction_share=0.01),
    attrs.evolve(GAS, gas=NITROGEN_VAN_DER_WAALS),
    attrs.evolve(GAS, gas=attrs.evolve(NITROGEN_VAN_DER_WAALS, covolume=4e-5)),
    attrs.evolve(GAS, gas=PengRobinson(304.13, 7.377e6, 0.224), temperature=313.15, reference_temperature=313.15),
    GAS.at_temperature("-10 degC").after("2 years", filling_loss_per_year=0.02),
    TUBE,
    attrs.evolve(TUBE, stretch_range=(1.2, 3.0), loop_loss=0.05, loop_stretch=4.7),
    with_law(rubber.NeoHookean(mu="0.4 MPa")),
    with_law(rubber.MooneyRivlin(c1="0.15 MPa", c2="0.015 MPa")),
    with_law(rubber.Gent(mu="0.248 MPa", jm=79.4)),
    with_law(rubber.Ogden(mu=["0.61803 MPa", "1.18 kPa", "-9.81 kPa"], alpha=[1.3, 5.0, -2.0])),
    with_law(rubber.ArrudaBoyce(mu="0.27 MPa", n=26.5, fitted_over=(1.0, 4.0))),
    TUBE.preconditioned(3.0, r=2.0, m="0.5 MPa"),
    TUBE.at_temperature("40 degC", energy_share=0.2, reference="20 degC"),
    TUBE.after("30 days", environment=rubber.DRY_AIR),
    StripSpring("20 N", take_up="50 mm", longest="800 mm", hysteresis_share=0.05),
    BENCH,
    MeasuredSpring([0.1, 0.2], [1.0, 2.0]),
    guard.spring_of(COIL),
    guard.spring_of(COIL, safety=1.2),
    guard.spring_of(attrs.evolve(COIL, temperature=313.15, free_length=0.14)),
    guard.spring_of(PUSH, safety=1.1, clash_allowance=0.2),
    guard.spring_of(attrs.evolve(PUSH, support=0.6, set_removed=True, material=materials.MUSIC_WIRE)),
    guard.spring_of(STRIP, hysteresis_share=0.05, longest="0.7 m", allowable_stress="2000 MPa"),
    in_parallel(PULL, OffsetSpring(TUBE, by="20 mm"), ScaledSpring(ZeroLengthSpring(10.0), 2.5)),
    in_series(PULL, wire_rope(diameter="2 mm", fill=0.5, modulus="100 GPa", length="600 mm")),
    in_series(guard.spring_of(COIL, safety=1.2), guard.spring_of(COIL), PULL),
]
ANGLEWISE = [
    TorqueCurve([0.0, 10.0, 40.0], [0.0, 1.0, 1.6], hysteresis_share=0.1),
    BENCH,
    in_parallel(TorsionSpring(4.0), BENCH),
    guard.spring_of(TWIST, free_angle="-30 deg", winds=-1, arbor="20 mm"),
    guard.spring_of(SPIRAL, free_angle="-90 deg", working_range=("-90 deg", "90 deg"), allowable_stress="900 MPa"),
]


def holding(spring: Any, path: Any = None, **others: Any) -> guard.PoiseFile:
    path = path or Straight(Point("ground", (0, 0.2)), Point("arm", (0.12, 0)))
    mount = SpringMount(spring, path, name="main")
    return guard.PoiseFile(mechanism=Mechanism(Arm(Body(3.0, (0.4, 0))), springs=mount, travel=(-1, 1)), **others)


@pytest.mark.parametrize(
    ("spring", "path"),
    [*((spring, None) for spring in LENGTHWISE), *((spring, JointTravel()) for spring in ANGLEWISE)],
    ids=lambda value: type(value).__name__,
)
def test_every_kind_is_written_and_read_back(spring: Any, path: Any, tmp_path: Path) -> None:
    document = holding(spring, path)
    file = tmp_path / "arm.poise.toml"
    guard.save(document, file)
    again = guard.load(file)
    assert again == document
    assert type(again.mechanism.springs[0].spring) is type(spring)
    assert guard.dump(again) == file.read_text(encoding="utf-8")


def test_readings_of_angles_are_written_as_angles() -> None:
    text = guard.dump(holding(BENCH, JointTravel()))
    assert 'kind = "measured torsion"' in text
    assert "torques = [" in text
    assert 'kind = "measured"\n' in guard.dump(holding(BENCH))


@pytest.mark.parametrize(
    ("text", "spring"),
    [
        (GAS_TABLE, GAS),
        (GAS_TABLE + 'gas = "ideal"\nexponent = 1.1', GasSpring.from_forces(**FORCES, gas="ideal", exponent=1.1)),
        (GAS_TABLE + 'friction_over = "force"', GasSpring.from_forces(**FORCES, friction_over="force")),
        (
            'kind = "rubber tube"\nouter_diameter = "9.525 mm"\ninner_diameter = "6.35 mm"\nfree_length = "100 mm"\n'
            'law = { kind = "Yeoh", c1 = "0.23155 MPa", c2 = "-3.3075 kPa", c3 = "107.03 Pa", fitted_over = [1, 4.4] }',
            TUBE,
        ),
        (
            'kind = "measured"\nlengths = ["100 mm", "0.15 m", "20 cm"]\nloads = ["12 N", "30 N", "50 N"]\n'
            'unloading = ["11 N", "28 N", "50 N"]',
            BENCH,
        ),
        (
            'kind = "extension coil"\nwire = "2 mm"\nmean_diameter = "18 mm"\nbody_coils = 40\nmaterial = "music wire"\n'
            'initial_tension = "17 N"\nhook_radius = "9 mm"\nhook_bend_radius = "5 mm"\nsafety = 1.2',
            guard.spring_of(COIL, safety=1.2),
        ),
        (
            'kind = "compression coil"\nwire = "2.5 mm"\nmean_diameter = "25 mm"\ntotal_coils = 12\n'
            'ends = "squared ground"\nfree_length = "100 mm"\nmaterial = "EN 10270-1 SM"\nsupport = "both ends flat"',
            guard.spring_of(PUSH),
        ),
        (
            'kind = "in parallel"\nsprings = [{ kind = "zero length", rate = "1 N/mm" }, { kind = "offset", by = "20 mm", '
            'spring = { kind = "zero length", rate = "2 N/mm" } }]',
            in_parallel(ZeroLengthSpring(1000.0), OffsetSpring(ZeroLengthSpring(2000.0), by=0.02)),
        ),
    ],
)  # fmt: skip
def test_what_a_table_becomes(written: Write, text: str, spring: object) -> None:
    assert guard.load(written((SPRING, text))).mechanism.springs[0].spring == spring


def test_a_torsion_coil_on_the_joint(written: Write) -> None:
    text = (
        'kind = "torsion coil"\nwire = "3 mm"\nmean_diameter = "30 mm"\nbody_coils = 8.25\nlegs = ["20 mm", "40 mm"]\n'
        'material = "music wire"\nfree_angle = "-30 deg"\nwinds = -1\narbor = "20 mm"'
    )
    mount = guard.load(written((SPRING, text), (STRAIGHT, JOINT))).mechanism.springs[0]
    assert mount.spring == guard.spring_of(TWIST, free_angle="-30 deg", winds=-1, arbor="20 mm")
    assert mount.spring.rate == TWIST.rate
    assert mount.spring.part == TWIST


def test_a_coil_makes_the_spring_that_it_makes_by_itself() -> None:
    found, own = guard.spring_of(COIL, safety=1.2), COIL.spring(safety=1.2)
    assert isinstance(found, ExtensionSpring)
    assert attrs.asdict(own, recurse=False).items() <= attrs.asdict(found, recurse=False).items()
    assert found.load(0.2) == own.load(0.2)
    assert found.at_temperature("40 degC").rate == COIL.at_temperature("40 degC").rate
    tuned = found.tuned((1000.0,), preload=False)
    assert type(tuned) is ExtensionSpring
    assert tuned.rate == 1000.0


def test_a_spring_that_is_no_longer_its_parts_is_written_as_what_it_is() -> None:
    changed = attrs.evolve(guard.spring_of(PUSH), rate=5000.0)
    text = guard.dump(holding(changed))
    assert 'kind = "compression"\n' in text
    assert 'rate = "5 N/mm"' in text
    assert isinstance(changed, CompressionSpring)


BENCH_CSV = "length [mm];load [N];unloading [N]\n100;12;11\n150;30;28\n200;50;50\n"


def test_readings_in_a_file_beside_it(written: Write, tmp_path: Path) -> None:
    (tmp_path / "bench.csv").write_text(BENCH_CSV, encoding="utf-8")
    file = written((SPRING, 'kind = "measured"\nfile = "bench.csv" # from the bench'))
    document = guard.load(file)
    assert document.mechanism.springs[0].spring == BENCH
    beside, elsewhere = tmp_path / "copy.poise.toml", tmp_path / "there" / "copy.poise.toml"
    elsewhere.parent.mkdir()
    for copy in (beside, elsewhere):
        guard.save(document, copy)
        assert guard.load(copy) == document
    assert 'file = "bench.csv" # from the bench' in beside.read_text(encoding="utf-8")
    assert "bench.csv" not in elsewhere.read_text(encoding="utf-8")


def test_torsion_readings_in_a_file(written: Write, tmp_path: Path) -> None:
    (tmp_path / "bench.csv").write_text("torque [N*m], angle [deg]\n0,0\n2,90\n3,450\n", encoding="utf-8")
    file = written((SPRING, 'kind = "measured torsion"\nfile = "bench.csv"'), (STRAIGHT, JOINT))
    spring = guard.load(file).mechanism.springs[0].spring
    assert isinstance(spring, MeasuredSpring)
    assert spring.lengths == pytest.approx([0.0, 1.5707963267948966, 7.853981633974483])


TUBE_HEAD = 'kind = "rubber tube"\nouter_diameter = "9 mm"\ninner_diameter = "6 mm"\nfree_length = "100 mm"\n'
COIL_HEAD = 'kind = "extension coil"\nwire = "2 mm"\nmean_diameter = "18 mm"\nbody_coils = 40\nhook_radius = "9 mm"\nhook_bend_radius = "5 mm"\n'


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('kind = "gas sprin"', "springs[1].spring.kind: must be a kind of spring, got the text 'gas sprin'; did you mean 'gas spring'?"),
        (GAS_TABLE + 'strok = "1 m"', "springs[1].spring.strok: is not a known key; did you mean 'stroke'?"),
        ('kind = "gas spring from forces"', "springs[1].spring: must have the keys extending, compressing, stroke, rod_diameter, extended_length"),
        (GAS_TABLE.replace('offset = "10 mm"', ""), "springs[1].spring: GasSpring.offset must be given: the distance in m"),
        (GAS_TABLE.replace('["400 N", "540 N"]', '["400 N"]'), "springs[1].spring.extending: must be a list of 2 values, got 1"),
        (GAS_TABLE.replace('["400 N", "540 N"]', '["540 N", "400 N"]'), "springs[1].spring: GasSpring.extending must rise as the rod goes in"),
        (GAS_TABLE + 'gas = "nitrogn"', "springs[1].spring.gas: must be a gas, got the text 'nitrogn'; did you mean 'nitrogen'?"),
        (GAS_TABLE + "gas = 3", "springs[1].spring.gas: must be a table, got 3"),
        (TUBE_HEAD, "springs[1].spring: must have the key law"),
        (TUBE_HEAD + 'law = { kind = "Yoeh" }', "springs[1].spring.law.kind: must be a kind of rubber law, got the text 'Yoeh'; did you mean 'Yeoh'?"),
        (TUBE_HEAD + 'law = { kind = "Gent", mu = "0.2 MPa", jm = "79" }', "springs[1].spring.law.jm: must be a number without quotes, got the text '79'"),
        (TUBE_HEAD + 'law = { kind = "Ogden", mu = ["1 MPa"], alpha = [0.0] }', "springs[1].spring.law.alpha: Ogden.alpha must be other than 0"),
        (TUBE_HEAD + 'law = { kind = "Ogden", mu = "1 MPa", alpha = [1.0] }', "springs[1].spring.law.mu: must be a list, got the text '1 MPa'"),
        (COIL_HEAD + 'material = "musik wire"', "springs[1].spring.material: must be a wire, got the text 'musik wire'; did you mean 'music wire'?"),
        (COIL_HEAD + 'material = "music wire"', "springs[1].spring: ExtensionCoil.initial_tension must be given in N"),
        (COIL_HEAD + 'material = "music wire"\ninitial_tension = "17 N"\nsafty = 1', "springs[1].spring.safty: is not a known key; did you mean 'safety'?"),
        (COIL_HEAD + 'material = "music wire"\ninitial_tension = "17 N"\nsafety = 0', "springs[1].spring.safety: ExtensionUse.safety must be > 0, got 0.0"),
        (COIL_HEAD.replace("2 mm", "20 mm") + 'material = "music wire"', "springs[1].spring.mean_diameter: ExtensionCoil.mean_diameter must give a spring index"),
        ('kind = "measured"', "springs[1].spring: must have file, or lengths and loads, got none"),
        ('kind = "measured"\nlengths = ["1 m", "2 m"]', "springs[1].spring: must have file, or lengths and loads, got one of them"),
        ('kind = "measured"\nfile = "a.csv"\nloads = ["1 N", "2 N"]', "springs[1].spring: must have either file, or lengths and loads, got both"),
        ('kind = "measured"\nlengths = ["1 m", "2 m"]\nloads = ["1 N", "2 kg"]', "springs[1].spring: loads must be a value in N, got '2 kg'"),
        ('kind = "measured"\nlengths = [1, 2]\nloads = ["1 N", "2 N"]', "springs[1].spring.lengths[1]: must be a text with a unit, such as '1 m', got 1"),
        ('kind = "measured"\nfile = "nowhere.csv"', "nowhere.csv: cannot be read: No such file"),
        ('kind = "in parallel"\nsprings = []', "springs[1].spring.springs: ParallelSprings.springs must be at least one spring, got none"),
        ('kind = "in parallel"\nsprings = [{ kind = "spring" }]', "springs[1].spring.springs[1].kind: must be a kind of spring, got the text 'spring'"),
        ('kind = "in series"\nsprings = [{ kind = "constant force", pull = "1 N" }, { kind = "compression", rate = "1 N/m", free_length = "2 m", solid_length = "1 m" }]', "springs[1].spring: in_series must be given springs that carry loads in common"),
        ('kind = "torque curve"\nangles = ["0 deg"]\ntorques = ["1 N*m"]\nhysteresis_share = 0.1', "springs[1].spring.angles: TorqueCurve.angles must be at least two angles"),
        ('kind = "strip"\nwidth = "25 mm"\nthickness = "0.3 mm"\nnatural_radius = "16 mm"\nyoungs_modulus = "206 GPa"\nlength = "1 m"\nform = "beem"\nhysteresis_share = 0.05', "springs[1].spring.form: Strip.form must be one of 'beam'"),
        ('kind = "compression coil"\nwire = "2 mm"\nmean_diameter = "20 mm"\ntotal_coils = 9\nends = "plain"\nfree_length = "99 mm"\nmaterial = "music wire"\nsupport = ["a"]', "springs[1].spring.support: must be a text or a number, got the list ['a']"),
    ],
)  # fmt: skip
def test_what_is_wrong_with_a_spring_is_named(written: Write, text: str, message: str) -> None:
    file = written((SPRING, text))
    with pytest.raises(PoiseFileError, match=re.escape(message)):
        guard.load(file)


def test_a_fifo_for_readings_is_refused(written: Write, tmp_path: Path) -> None:
    import os

    os.mkfifo(tmp_path / "pipe.csv")
    file = written((SPRING, 'kind = "measured"\nfile = "pipe.csv"'))
    with pytest.raises(PoiseFileError, match=r"pipe\.csv: is not a regular file"):
        guard.load(file)


@pytest.mark.parametrize(
    ("call", "error", "message"),
    [
        (lambda: guard.spring_of(PULL), InputTypeError, "part must be one of ExtensionCoil, CompressionCoil, TorsionCoil"),
        (lambda: guard.spring_of(COIL, winds=1), InputTypeError, "spring_of a ExtensionCoil must be given safety, got winds"),
        (lambda: guard.spring_of(STRIP), InputError, "spring_of a Strip must be given hysteresis_share, got none"),
        (lambda: guard.spring_of(TWIST, winds=2), InputError, "TorsionUse.winds must be 1 or -1, got 2"),
        (lambda: guard.dump(holding(attrs.evolve(GAS, gas=type("Own", (), {"at_constant_volume": None, "__eq__": None})))), InputTypeError, "GasSpring.gas must be"),
        (lambda: guard.dump(holding(guard.spring_of(attrs.evolve(COIL, material=attrs.evolve(materials.MUSIC_WIRE, shear_modulus="79 GPa"))))), InputError, "a WireMaterial cannot be written to a file, only these kinds of wire: music wire, "),
    ],
)  # fmt: skip
def test_what_cannot_be_said_in_code(call: Callable[[], Any], error: type[Exception], message: str) -> None:
    with pytest.raises(error, match=re.escape(message)):
        call()


def test_nitrogen_is_what_a_gas_spring_holds() -> None:
    assert GAS.gas == NITROGEN
    assert "gas =" not in guard.dump(holding(GAS))

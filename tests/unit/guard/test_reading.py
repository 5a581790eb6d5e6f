"""What a mechanism file may say, and what is said where it may not."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import pytest

from springpoise import Arm, Cable, Disc, JointTravel, Mechanism, Point, guard
from springpoise.errors import PoiseFileError
from springpoise.gravity import local, seen_from_base
from springpoise.springs import CompressionSpring, ConstantForceSpring, ExtensionSpring, TorsionSpring, ZeroLengthSpring

Write = Callable[..., Path]


def test_a_file_becomes_a_mechanism(written: Write) -> None:
    document = guard.load(written())
    assert document.title == "lift"
    mechanism = document.mechanism
    assert isinstance(mechanism, Mechanism)
    assert isinstance(mechanism.linkage, Arm)
    assert mechanism.linkage.bodies[0].name == "boom"
    assert mechanism.gravity == pytest.approx((0.0, -9.8))
    assert mechanism.travel == pytest.approx((-1.0471975511965976, 1.3089969389957472))
    assert mechanism.friction.coulomb == 0.2
    mount = mechanism.springs[0]
    assert (mount.name, mount.count) == ("main", 2)
    assert mount.spring == ZeroLengthSpring(245.0)
    assert document.payloads[0] == guard.Payload(name="crate", mass=1.0)
    assert document.actuator is not None
    assert document.actuator.motor is not None
    assert document.actuator.ratio == 50.0
    assert document.limits == (guard.ResidualTorque(at_most="3 %"),)
    assert document.path == written()


SPRING = 'kind = "zero length"\nrate = "0.245 N/mm" # bought'
STRAIGHT = """\
kind = "straight"
first = { body = "ground", at = ["0 m", "0.2 m"] }
last = { body = "arm", at = ["0.12 m", "0 m"] }"""


@pytest.mark.parametrize(
    ("text", "spring"),
    [
        (
            'kind = "extension"\nrate = "3.5 lbf/in"\nfree_length = "60 mm"\ninitial_tension = "4 N"\nlongest = "0.3 m"',
            ExtensionSpring("3.5 lbf/in", free_length="60 mm", initial_tension=4.0, longest=0.3),
        ),
        (
            'kind = "compression"\nrate = "8 N/mm"\nfree_length = "90 mm"\nsolid_length = "45 mm"',
            CompressionSpring("8 N/mm", free_length="90 mm", solid_length="45 mm"),
        ),
        ('kind = "constant force"\npull = "25 N"', ConstantForceSpring(25.0)),
    ],
)
def test_every_kind_of_spring_is_read(written: Write, text: str, spring: object) -> None:
    assert guard.load(written((SPRING, text))).mechanism.springs[0].spring == spring


def test_a_torsion_spring_on_the_joint(written: Write) -> None:
    file = written(
        (SPRING, 'kind = "torsion"\nrate = "4 N*m/rad"\nfree_angle = "90 deg"\nworking_range = ["-80 deg", "2 rad"]'),
        (STRAIGHT, 'kind = "joint travel"\njoint = 0\nratio = -1'),
    )
    mount = guard.load(file).mechanism.springs[0]
    assert mount.spring == TorsionSpring(4.0, "90 deg", ("-80 deg", 2.0))
    assert mount.path == JointTravel(0, ratio=-1.0)


def test_a_cable_over_a_disc(written: Write) -> None:
    cable = """kind = "cable"
along = [
    { body = "ground", at = ["-30 mm", "-0.25 m"] },
    { centre = { body = "ground", at = ["-15 mm", "0.2 m"] }, radius = "15 mm", turn = "cw", sliding_friction = 0.1 },
    { body = "arm", at = ["0.12 m", "0 m"] },
]"""
    path = guard.load(written((STRAIGHT, cable))).mechanism.springs[0].path
    assert path == Cable(
        Point("ground", ("-30 mm", -0.25)),
        Disc(Point("ground", ("-15 mm", 0.2)), radius="15 mm", turn="cw", sliding_friction=0.1),
        Point("arm", (0.12, 0)),
    )


@pytest.mark.parametrize(
    ("table", "gravity"),
    [
        ('latitude = "52 deg"\nheight = "300 m"', (0.0, -float(local("52 deg", 300.0)))),
        ('latitude = "52 deg"', (0.0, -float(local("52 deg")))),
        ('magnitude = "1.62 m/s^2"', (0.0, -1.62)),
        ('tilt = "10 deg"', seen_from_base("10 deg")),
        ('components = ["1 m/s^2", "-9 m/s^2"]', (1.0, -9.0)),
    ],
)
def test_gravity_in_its_forms(written: Write, table: str, gravity: tuple[float, float]) -> None:
    assert guard.load(written(('magnitude = "9.8 m/s^2"', table))).mechanism.gravity == pytest.approx(gravity)


def test_standard_gravity_and_a_full_turn_where_nothing_is_said(written: Write) -> None:
    file = written(('[gravity]\nmagnitude = "9.8 m/s^2"\n', ""), ('[travel]\nfrom = "-60 deg"\nto = "75 deg"\n', ""))
    mechanism = guard.load(file).mechanism
    assert mechanism.gravity == (0.0, -9.80665)
    assert mechanism.travel is None


RATE = 'rate = "0.245 N/mm" # bought'


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        # schema
        ("schema = 1", "", "must have the key schema, the version of the format; write schema = 1"),
        ("schema = 1", "schema = 2", "schema: must be 1, the only version that is read here, got 2"),
        ("schema = 1", "schema = true", "schema: must be 1, the only version that is read here, got the flag True"),
        ("schema = 1", 'schema = "1"', "got the text '1'"),
        # keys
        ("[travel]", "[travle]", "travle: is not a known key; did you mean 'travel'?"),
        ("[travel]", "[zzz]", "zzz: is not a known key; known are schema, title, "),
        ("length = ", "lenght = ", "arm.lenght: is not a known key; did you mean 'length'?"),
        (RATE, 'rte = "1 N/m"', "springs[1].spring.rte: is not a known key; did you mean 'rate'?"),
        (RATE, "", "springs[1].spring: must have the key rate"),
        ('name = "boom"\nmass = "3 kg"\ncom = ["0.4 m", "0 m"]', "", "arm.bodies[1]: must have the keys mass, com"),
        ("[arm]\n", '[arm]\n"od d" = 1\n', "arm.'od d': is not a known key"),
        ('body = "arm", ', "", "springs[1].path.last: must have the key body"),
        # kinds
        ('kind = "zero length"', "", "springs[1].spring: must have the key kind, one of extension, zero length, "),
        ('"zero length"', '"zero lenght"', "kind: must be a kind of spring, got the text 'zero lenght'; did you mean 'zero length'?"),
        ('"straight"', '"wheel"', "springs[1].path.kind: must be a kind of path, got the text 'wheel'; known are straight, "),
        ('what = "residual torque"', 'what = "noise"', "limits[1].what: must be a kind of limit, got the text 'noise'"),
        ('"zero length"', "7", "springs[1].spring.kind: must be a text, got 7"),
        # values
        (RATE, "rate = 245", "springs[1].spring.rate: must be a text with a unit, such as '1 N/m', got 245; write '245 N/m'"),
        (RATE, "rate = nan", "springs[1].spring.rate: must be a text with a unit, such as '1 N/m', got nan"),
        (RATE, "rate = true", "rate: must be a text with a unit, such as '1 N/m', got the flag True"),
        (RATE, 'rate = ["1 N/m"]', "rate: must be a text with a unit, such as '1 N/m', got the list"),
        (RATE, 'rate = "0.245"', "springs[1].spring.rate: ZeroLengthSpring.rate must be a value in N/m, got '0.245' without"),
        (RATE, 'rate = "3 lb/in"', "springs[1].spring.rate: ZeroLengthSpring.rate must be a value in N/m, got '3 lb/in'"),
        (RATE, 'rate = "-3 N/m"', "rate: ZeroLengthSpring.rate must be > 0 N/m, got -3.0 (written the text '-3 N/m')"),
        (RATE, 'rate = "1e999 N/m"', "got '1e999 N/m'"),
        (RATE, 'rate = "nan N/m"', "got 'nan N/m'"),
        (RATE, 'rate = "open"', 'springs[1].spring.rate is "open", which needs [design] with method = "fit"'),
        ('rate = "0.245 N/mm" # bought', 'rate = "0.245 N/mm"\nfree_length = "1 m"', "spring.free_length: is not a known key"),
        ("ratio = 50", 'ratio = "50"', "actuator.ratio: must be a number without quotes, got the text '50'"),
        ("ratio = 50", "ratio = nan", "actuator.ratio: Actuator.ratio must be a pure number that is finite, got nan"),
        ("ratio = 50", "ratio = inf", "actuator.ratio: Actuator.ratio must be a pure number that is finite, got inf"),
        ("ratio = 50", "ratio = -1", "actuator.ratio: Actuator.ratio must be > 0, got -1.0"),
        ("ratio = 50", "ratio = false", "actuator.ratio: must be a number without quotes, got the flag False"),
        ("efficiency = 0.8", "efficiency = 80", "efficiency must be above 0 and at most 1, got 80.0"),
        ("efficiency = 0.8", "sign = 1.0", "actuator.sign: must be a whole number, got 1.0"),
        ("efficiency = 0.8", "sign = 2", "actuator.sign: Actuator.sign must be +1 or -1, got 2"),
        ("count = 2", "count = 2.0", "springs[1].count: must be a whole number, got 2.0"),
        ("count = 2", "count = 0", "springs[1].count: SpringMount.count must be a whole number >= 1, got 0"),
        ("count = 2", "count = true", "springs[1].count: must be a whole number, got the flag True"),
        ('com = ["0.4 m", "0 m"]', 'com = ["0.4 m"]', "arm.bodies[1].com: Body.com must be a pair or three values in m, got 1 values"),
        ('com = ["0.4 m", "0 m"]', 'com = "0.4 m"', "arm.bodies[1].com: must be a list, got the text '0.4 m'"),
        ('com = ["0.4 m", "0 m"]', 'com = ["0.4 m", 0]', "arm.bodies[1].com[2]: must be a text with a unit"),
        ('com = ["0.4 m", "0 m"]', "com = 1979-05-27", "arm.bodies[1].com: must be a list, got datetime.date(1979, 5, 27)"),
        ('body = "arm"', 'body = "boom"', "springs[1]: Point.body must be one of 'ground', 'arm' on an Arm, got 'boom'"),
        ('body = "arm"', "body = 3", "springs[1].path.last.body: must be a text, got 3"),
        ('title = "lift"', "title = 3", "title: must be a text, got 3"),
        ('name = "boom"', 'name = " "', "arm.bodies[1].name: must be a text, got the text ' '"),
        # tables and lists
        ("[travel]", "travel = 3\n[friction2]", "friction2: is not a known key"),
        ('{ body = "arm", at = ["0.12 m", "0 m"] }', '["0.12 m", "0 m"]', "path.last: must be a table with the keys body, at, got the list"),
        ('[friction]\ncoulomb = "0.2 N*m"', "[[friction]]\n[[friction]]", "friction: must be a table for each of 1 joint (arm), or one table for all, got 2"),
        ("[[payloads]]", "[payloads]", "payloads: must be a list, got the table"),
        ('[[limits]]\nwhat = "residual torque"\nat_most = "3 %"', "[limits]", "limits: must be a list, got the table"),
        ('[[payloads]]\nname = "crate"', '[[payloads]]\nmotor = 1\nname = "crate"', "payloads[1].motor: is not a known key"),
        # travel and gravity
        ('to = "75 deg"', 'to = "-75 deg"', "travel: must run from the lower to the higher angle, got -60 deg to -75 deg"),
        ('to = "75 deg"', "to = 75", "travel.to: must be a text with a unit, such as '1 deg', got 75; write '75 deg' if deg is meant"),
        ('magnitude = "9.8 m/s^2"', 'height = "1 m"', "gravity: must have latitude where it has height, got height alone"),
        ('magnitude = "9.8 m/s^2"', 'latitude = "99 deg"', "gravity: latitude must be from -1.5708 to 1.5708 rad, got 1.72788"),
        (
            'magnitude = "9.8 m/s^2"',
            'magnitude = "9.8 m/s^2"\nlatitude = "9 deg"',
            "gravity: must have one of latitude, magnitude and components, got latitude and magnitude",
        ),
        (
            'magnitude = "9.8 m/s^2"',
            'components = ["0 m/s^2", "-9 m/s^2"]\ntilt = "3 deg"',
            "gravity: must have either components or tilt, got both",
        ),
        ("[arm]", "[leg]", "leg: is not a known key"),
        # what refers to each other
        ('at_most = "3 %"', 'at_most = "3 %"\npayload = "crat"', "limits[1].payload must be the name of a payload, got 'crat'; did you mean 'crate'?"),
        ('name = "crate"\nmass = "1 kg"', 'name = "crate"\nmass = "-1 kg"', "payloads[1].mass: Payload.mass must be >= 0 kg, got -1.0"),
        ('length = "0.8 m"', "", "payloads[1].at does not fit the mechanism: Arm.length must be given to know the tip"),
        ("[[payloads]]", '[[payloads]]\nname = "crate"\nmass = "1 kg"\n[[payloads]]', "payloads[2].name must be one that no other payload has, got 'crate'"),
        # limits
        ('at_most = "3 %"', 'at_most = "3 m"', "limits[1].at_most: torque must be a value in N*m, got '3 m'"),
        ('at_most = "3 %"', 'at_most = "-3 N*m"', "limits[1].at_most: torque must be > 0 N*m, got '-3 N*m'"),
        ('at_most = "3 %"', 'at_most = "0 %"', "limits[1].at_most: OfPeak.percent must be > 0, got 0.0"),
        ('at_most = "3 %"', "at_most = 3", "limits[1].at_most: must be a text, got 3; write it in quotes, with its unit or as a percentage"),
        ('at_most = "3 %"', 'at_most = "3 %"\nover = [-30, 30]', "limits[1].over[1]: must be a text with a unit, such as '1 deg', got -30; write '-30 deg' if deg is meant"),
        ('at_most = "3 %"', 'at_most = "3 %"\nnorm = "mean"', "norm: ResidualTorque.norm must be 'worst' or 'rms', got 'mean'"),
        ('at_most = "3 %"', 'at_most = "3 %"\nover = ["9 deg", "9 deg"]', "limits[1].over: Limit.over must be (lower, higher) rad, got (0.15"),
        ('at_most = "3 %"', 'at_most = "3 %"\nover = ["900 deg", "9 deg"]', "limits[1].over: Limit.over must be within two turns, ±12.57 rad, got 15.708"),
    ],
)  # fmt: skip
def test_what_is_wrong_is_named_with_its_place(written: Write, old: str, new: str, message: str) -> None:
    file = written((old, new))
    with pytest.raises(PoiseFileError, match=re.escape(message)) as caught:
        guard.load(file)
    assert str(caught.value).startswith(f"{file}: ")


@pytest.mark.parametrize(
    ("limit", "message"),
    [
        ('what = "stretch"\nat_least = "5 kg"', "limits[2].at_least: margin must be a value in m, got '5 kg'"),
        ('what = "stretch"\nat_least = "-5 mm"', "limits[2].at_least: Stretch.at_least must be >= 0 m, got '-5 mm'"),
        ('what = "stretch"\nat_least = "5 mm"\nspring = "mian"', "limits[2].spring must be the name of a spring, got 'mian'; did you mean 'main'?"),
        ('what = "stored energy"\nat_most = "0 J"', "limits[2].at_most: StoredEnergy.at_most must be > 0 J, got 0.0"),
        ('what = "balance angles"\nnear = []\nwithin = "1 deg"', "BalanceAngles.near must be at least one angle, got none"),
        ('what = "balance angles"\nnear = ["1 m"]\nwithin = "1 deg"', "limits[2].near: BalanceAngles.near must be a value in rad, got '1 m'"),
        ('what = "balance angles"\nnear = [20]\nwithin = "1 deg"', "limits[2].near[1]: must be a text with a unit"),
        ('what = "balance angles"\nnear = ["1 deg"]\nwithin = "1 deg"\nstable = "yes"', "limits[2].stable: must be true or false, got the text 'yes'"),
        ('what = "holding torque"\nat_most = "3 %"', "HoldingTorque.at_most must be a value in N*m, got '3 %'"),
    ],
)  # fmt: skip
def test_limits_are_read_with_the_same_care(written: Write, limit: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=re.escape(message)):
        guard.load(written(behind=f"\n[[limits]]\n{limit}\n"))


def test_a_current_needs_a_motor(written: Write, lift: str) -> None:
    motor = lift[lift.index("[actuator.motor]") : lift.index("[[limits]]")]
    file = written((motor, ""), behind='\n[[limits]]\nwhat = "motor current"\nat_most = "3 A"\n')
    with pytest.raises(
        PoiseFileError, match=r"limits\[2\]\.what is 'motor current', which needs an actuator with a motor"
    ):
        guard.load(file)


@pytest.mark.parametrize(
    ("spring", "design", "message"),
    [
        ('kind = "zero length"\nrate = "1 N/m"', "", 'which needs a spring whose rate or pull is "open"'),
        ('kind = "extension"\nrate = "1 N/m"\nfree_length = "0.1 m"\ninitial_tension = "open"', "", 'springs[1].spring.rate must be "open" too, got a value'),
        ('kind = "extension"\nrate = "1 N/m"\nfree_length = "open"', "", "ExtensionSpring.free_length must be a value in m, got 'open'"),
        ('kind = "zero length"\nrate = "open"', 'norm = "max"', "design.norm: FitRequest.norm must be 'minimax' or 'rms', got 'max'"),
        ('kind = "zero length"\nrate = "open"', 'payload = "box"', "design.payload must be the name of a payload, got 'box'; known are crate"),
        ('kind = "zero length"\nrate = "open"', "poses = 1", "design.poses: DesignRequest.poses must be a whole number from 2 to 10000, got 1"),
    ],
)  # fmt: skip
def test_what_is_open_has_to_fit_the_design(written: Write, spring: str, design: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=re.escape(message)):
        guard.load(written((SPRING, spring), behind=f'\n[design]\nmethod = "fit"\n{design}\n'))


def test_springs_may_not_be_open_in_different_ways(written: Write, lift: str) -> None:
    mount = lift[lift.index("[[springs]]") : lift.index("[[payloads]]")]
    one = mount.replace('"0.245 N/mm"', '"open"')
    two = one.replace("count = 2", 'rigid_length = "open"')
    fit = '\n[design]\nmethod = "fit"\n'
    with pytest.raises(PoiseFileError, match=r'springs\[1\]\.rigid_length must be "open" too, got a value'):
        guard.load(written((mount, one + two), behind=fit))
    torsion = one.replace('kind = "zero length"\nrate', 'kind = "torsion"\nfree_angle = "open"\nrate')
    both = torsion.replace("count = 2", 'rigid_length = "open"')
    with pytest.raises(PoiseFileError, match=r'springs\[1\]\.spring\.free_angle must be given, got "open"'):
        guard.load(written((mount, both), behind=fit))


def test_an_open_spring_is_not_in_the_mechanism(written: Write) -> None:
    document = guard.load(written(('"0.245 N/mm"', '"open"'), behind='\n[design]\nmethod = "fit"\n'))
    assert document.mechanism.springs == ()
    assert document.open_springs[0].fields == ("rate",)
    assert document.all_mounts[0].name == "main"


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ('method = "guess"', "design.method: must be a kind of design, got the text 'guess'; known are stock, sine, fit"),
        ('method = "sine"\nrate = "1 N/m"', "SineRequest must have two of rate, attach_radius, anchor_height, got rate"),
        ('method = "sine"', "got none"),
        ('method = "sine"\nrate = "1 N/m"\nattach_radius = "1 m"\ncount = 0', "design.count: SineRequest.count must be a whole number from 1 to 1000, got 0"),
        ('method = "stock"', "design: must have the keys stock, attach_radii, anchor_heights"),
    ],
)  # fmt: skip
def test_requests_are_read_with_the_same_care(written: Write, table: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=re.escape(message)):
        guard.load(written(behind=f"\n[design]\n{table}\n"))


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("steps = 3", "steps = 0", "design.attach_radii.steps: Steps.steps must be a whole number from 1 to 400, got 0"),
        ("steps = 3", "steps = 1000000000", "must be a whole number from 1 to 400, got 1000000000"),
        ("steps = 3", "steps = 1", "design.attach_radii.to: Steps.last must be first, where there is one step, (0.08"),
        ('from = "80 mm"', 'from = "300 mm"', "design.attach_radii.to: Steps.last must be >= first (0.3) m, got 0.12"),
        ('from = "80 mm"', 'from = "0 mm"', "design.attach_radii.from: Steps.first must be > 0 m, got 0.0"),
        ("counts = [1, 2]", "counts = [1, 0]", "design.counts: StockRequest.counts must be a whole number from 1 to 1000, got 0"),
        ("counts = [1, 2]", "counts = []", "design.counts: StockRequest.counts must be 1 to 100 whole numbers, got 0"),
        ("counts = [1, 2]", "counts = [1.5]", "design.counts[1]: must be a whole number, got 1.5"),
        ("counts = [1, 2]", "attach_skews = []", "StockRequest.attach_skews must be 1 to 100 angles in rad, got 0"),
        ("counts = [1, 2]", 'attach_skews = ["0 deg", "200 deg"]', "attach_skews must be between -pi and pi rad, got 3.49066; degrees?"),
        ("counts = [1, 2]", 'attach_skews = ["5 mm"]', "attach_skews"),
        ("counts = [1, 2]", 'residual_limit = "0 N*m"', "design.residual_limit: torque must be > 0 N*m, got '0 N*m'"),
        ("counts = [1, 2]", 'pulley = { radius = "1 mm" }', "design.pulley: must have the key spring_end"),
        (
            "counts = [1, 2]",
            'pulley = { radius = "1 mm", spring_end = ["0 m", "0 m"], turn = "left" }',
            "design.pulley.turn: PulleyRoute.turn must be 'cw' or 'ccw', got 'left'",
        ),
    ],
)  # fmt: skip
def test_a_stock_request_is_read_with_the_same_care(written: Write, old: str, new: str, message: str) -> None:
    table = (
        '\n[design]\nmethod = "stock"\nstock = "list.csv"\ncounts = [1, 2]\n'
        'attach_radii = { from = "80 mm", to = "120 mm", steps = 3 }\n'
        'anchor_heights = { from = "90 mm", to = "120 mm", steps = 4 }\n'
    )
    assert old in table
    with pytest.raises(PoiseFileError, match=re.escape(message)):
        guard.load(written(behind=table.replace(old, new)))


def test_a_second_payload_rides_on_the_tip_or_where_it_says(written: Write) -> None:
    document = guard.load(written(('mass = "1 kg"', 'mass = "1 kg"\nat = { body = "arm", at = ["0.5 m", "0.1 m"] }')))
    assert document.payloads[0].at == Point("arm", (0.5, 0.1))
    assert document.with_payload("crate").gravity_torque(0.0) == pytest.approx(-9.8 * (3 * 0.4 + 0.5))
    assert document.with_payload(None) is document.mechanism
    with pytest.raises(ValueError, match="payload must be the name of one, got 'box'; known are crate"):
        document.with_payload("box")

"""Files of mechanisms with several joints: every kind of linkage, robots from URDF files, what is said of each joint."""

from __future__ import annotations

import math
from pathlib import Path

import attrs
import pytest

from springpoise import Actuator, Body, Cable, Friction, Mechanism, Motor, Point, SpringMount, Straight, guard
from springpoise.errors import InputError, PoiseFileError
from springpoise.guard.files import read_text
from springpoise.guard.format.place import Place
from springpoise.linkages import (
    Coupling,
    Dyad,
    FiveBar,
    FourBar,
    Link,
    PlanarChain,
    PlanarLinkage,
    SliderDyad,
    SpatialChain,
    SpatialLink,
    from_urdf,
)
from springpoise.paths import Drum, Spool
from springpoise.springs import ConstantForceSpring, ZeroLengthSpring

HALF_TURN = (-1.5, 1.5)

PULL = SpringMount(ZeroLengthSpring(400.0), Straight(Point("ground", (0, 0.2)), Point("upper", (0.1, 0))), name="pull")
UPPER = Link("upper", Body(2.0, (0.15, 0.01)), length="0.3 m", carried=())
FORE = Link("fore", [Body(0.8, (0.1, 0)), Body(0.1, (0.2, 0), name="hand")], length=0.2, skew="10 deg")

CHAIN = Mechanism(
    PlanarChain([UPPER, FORE, Link("tip", Body(0.1, (0.02, 0)), follows=Coupling({"upper": -1, "fore": -0.5}, offset="5 deg"))]),
    springs=[
        PULL,
        SpringMount(ConstantForceSpring(3.0), Spool([-2.0, 2.0], [0.03, 0.02], joint=1, zero_length="0.1 m"), name="wound"),
        SpringMount(
            ZeroLengthSpring(50.0),
            Cable(Point("ground", (0, 0.4)), Drum(Point("upper", (0, 0)), radius="20 mm", turn="cw", tie="-90 deg")),
            rigid_length="0.1 m",
        ),
    ],
    friction=[Friction("0.2 N*m"), Friction("0.1 N*m", pivot_friction=0.1, pivot_radius="5 mm")],
    travel=[("-60 deg", "75 deg"), None],
)  # fmt: skip
MECHANISMS = {
    "planar chain": CHAIN,
    "prismatic": Mechanism(
        PlanarChain([
            Link("mast", Body(1.0, (0.1, 0)), length=0.1),
            Link("slide", Body(1.0, (0.1, 0)), joint="prismatic", skew="90 deg", pivot=Point("mast", (0.05, 0.01))),
            Link("twin", Body(1.0, (0.1, 0)), joint="prismatic", follows=Coupling({"slide": 1}, offset="20 mm")),
        ]),
        travel=[HALF_TURN, ("0 m", "0.25 m")],
        friction=Friction("0.2 N*m"),
    ),
    "planar linkage": Mechanism(
        PlanarLinkage(
            [
                Link("crank", Body(1.0, (0.05, 0)), length="0.1 m"),
                Dyad(
                    first=Link("coupler", Body(0.5, (0.1, 0)), length="0.25 m"),
                    last=Link("rocker", length="0.2 m"),
                    between=(Point("crank", (0.1, 0)), Point("ground", (0.3, 0))),
                    branch=-1,
                ),
                SliderDyad(
                    first=Link("rod", Body(0.2, (0.1, 0)), length="0.4 m"),
                    last=Link("piston", Body(0.3, (0, 0))),
                    start=Point("crank", (0.1, 0)),
                    guide=Point("ground", (0, 0.05)),
                    direction="5 deg",
                ),
            ],
            unreachable="nan",
        )
    ),
    "four bar": Mechanism(
        FourBar(
            crank=Link("crank", Body(1.0, (0.05, 0)), length="0.1 m"),
            coupler=Link("coupler", length="0.25 m"),
            rocker=Link("rocker", Body(2.0, (0.3, 0.1)), length="0.2 m"),
            second_pivot=("0.3 m", "20 mm"),
            branch=-1,
        ),
        travel=HALF_TURN,
    ),
    "five bar": Mechanism(
        FiveBar(
            first_crank=Link("a", Body(1.0, (0.05, 0)), length="0.3 m"),
            second_crank=Link("b", length="0.1 m"),
            first_coupler=Link("c", Body(2.0, (0.3, 0.1)), length="0.1 m"),
            second_coupler=Link("d", length="0.3 m"),
        ),
        travel=[("0 deg", "60 deg"), ("100 deg", "150 deg")],
    ),
    "spatial chain": Mechanism(
        SpatialChain([
            SpatialLink("base", parent="ground", joint="fixed", origin=(0, 0, "0.3 m")),
            SpatialLink("turn", Body(1.0, (0.1, 0, 0.2)), axis=(0.1, -0.7, 0.3), roll_pitch_yaw=("0.3 rad", "10 deg", 1)),
            SpatialLink("slide", Body(1.0, (0.1, 0, 0.2)), joint="prismatic", limits=(-0.01, 0.2), axis=(1, 0, 0)),
            SpatialLink("twin", parent="turn", joint="prismatic", follows=Coupling({"slide": 1}, offset="3 mm")),
        ]),
        springs=SpringMount(
            ZeroLengthSpring(400.0), Straight(Point("ground", (0, 0.2, 0.1)), Point("turn", (0.1, 0, 0.3)))
        ),
        travel=[None, ("0 m", "0.2 m")],
        gravity=(0.0, 1.0, -9.5),
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", MECHANISMS)
def test_every_linkage_is_read_back_as_it_was(name: str, tmp_path: Path) -> None:
    document = guard.PoiseFile(title=name, mechanism=MECHANISMS[name])
    file = tmp_path / "it.poise.toml"
    guard.save(document, file)
    assert guard.load(file) == document
    assert guard.dump(guard.load(file)) == guard.dump(document)


MOTOR = Motor(torque_constant="0.05 N*m/A", resistance="0.5 ohm")


@pytest.mark.parametrize(
    "actuator", [Actuator(MOTOR, ratio=50), (Actuator(MOTOR, ratio=50), Actuator(MOTOR, ratio=20))]
)
def test_actuators_one_for_all_or_one_for_each(actuator: object, tmp_path: Path) -> None:
    document = guard.PoiseFile(mechanism=CHAIN, actuator=actuator)
    guard.save(document, file := tmp_path / "it.poise.toml")
    assert guard.load(file) == document


# ------------------------------------------------------------------------------------------------
# two links, horizontal at zero and lifted from there: the worst pose is the corner where both are level

G, M1, C1, L1, M2, C2 = 9.80665, 2.0, 0.15, 0.3, 0.8, 0.1
TWO_LINKS = """\
schema = 1
title = "two links"

[linkage]
kind = "planar chain"

[[linkage.chain]]
name = "upper"
length = "0.3 m"
bodies = [{ mass = "2 kg", com = ["0.15 m", "0 m"] }]

[[linkage.chain]]
name = "fore"
length = "0.2 m"
bodies = [{ mass = "0.8 kg", com = ["0.1 m", "0 m"] }]

[[travel]]
from = "0 deg"
to = "60 deg"

[[travel]]
from = "0 deg"
to = "45 deg"

[[friction]]
coulomb = "0.2 N*m"

[[friction]]
coulomb = "0.1 N*m"

[[actuator]]
ratio = 50
motor = { torque_constant = "0.05 N*m/A", resistance = "0.5 ohm" }

[[actuator]]
ratio = 2
motor = { torque_constant = "0.05 N*m/A", resistance = "0.5 ohm" }
"""
UPPER_TORQUE = G * (M1 * C1 + M2 * L1 + M2 * C2)  # both level
FORE_TORQUE = G * M2 * C2


def read(text: str, folder: Path = Path()) -> guard.PoiseFile:
    return read_text(text, Place("it.poise.toml", folder=folder))


def verdict(limit: str) -> guard.LimitVerdict:
    (found,) = guard.check(read(f"{TWO_LINKS}\n[[limits]]\n{limit}\n")).verdicts
    return found


@pytest.mark.parametrize(
    ("limit", "value", "about"),
    [
        ('what = "residual torque"\nat_most = "9 N*m"', UPPER_TORQUE, "upper"),
        ('what = "residual torque"\nat_most = "9 N*m"\njoint = "fore"', FORE_TORQUE, "fore"),
        ('what = "holding torque"\nat_most = "9 N*m"', UPPER_TORQUE + 0.2, "upper"),
        ('what = "holding torque"\nat_most = "9 N*m"\njoint = "fore"', FORE_TORQUE + 0.1, "fore"),
        ('what = "motor current"\nat_most = "9 A"', (FORE_TORQUE + 0.1) / (2 * 0.05), "fore"),
        ('what = "motor current"\nat_most = "9 A"\njoint = "upper"', (UPPER_TORQUE + 0.2) / (50 * 0.05), "upper"),
    ],
)
def test_the_worst_of_all_joints_or_of_one(limit: str, value: float, about: str) -> None:
    """By hand: torques of two level links, at the corner of the travels."""
    found = verdict(limit)
    assert found.value == pytest.approx(value, rel=1e-12)
    assert (found.about, found.joint, found.to_dict()["joint"]) == (about, about, about)
    assert found.holds is (value <= 9.0)
    assert found.at == guard.JointPose(("upper", "fore"), (0.0, 0.0), ("rad", "rad"))
    assert f"{found.what} of {about} is " in found.sentence
    assert "at upper 0.00 deg, fore 0.00 deg" in found.sentence
    assert found.to_dict()["at"] == {"upper_rad": 0.0, "fore_rad": 0.0}
    assert found.to_dict()["at_rad"] is None


def test_bearings_carry_all_that_hangs_on_them() -> None:
    """Without springs a bearing carries the weight outwards of it, in every pose."""
    assert verdict('what = "pivot load"\nat_most = "30 N"').value == pytest.approx((M1 + M2) * G)
    assert verdict('what = "pivot load"\nat_most = "30 N"\njoint = "fore"').value == pytest.approx(M2 * G)


def test_a_range_for_each_joint() -> None:
    found = verdict('what = "holding torque"\nat_most = "9 N*m"\nover = [["60 deg", "80 deg"], ["0 deg", "10 deg"]]')
    assert found.value == pytest.approx(0.5 * UPPER_TORQUE + 0.2)  # cos 60 deg


def test_an_unloaded_joint_has_no_share_of_anything() -> None:
    """Without springs the residual is the gravity torque itself; the column turns about the vertical."""
    arm = SpatialChain([SpatialLink("column"), SpatialLink("arm", Body(1.0, (0.3, 0, 0)), axis=(0, -1, 0))])
    document = guard.PoiseFile(mechanism=Mechanism(arm), limits=[guard.ResidualTorque(at_most="120 %")])
    (found,) = guard.check(document).verdicts
    assert (found.about, found.holds) == ("arm", True)
    assert found.margin / found.value == pytest.approx(0.2)


def test_a_joint_that_slides() -> None:
    sliding = MECHANISMS["prismatic"]
    document = guard.PoiseFile(mechanism=sliding, limits=[guard.HoldingTorque(at_most="3 N*m")])
    with pytest.raises(
        InputError, match=r"limits\[1\]: at_most must be a share .*, got a torque for 'slide', which slides"
    ):
        guard.check(document)
    limits = [
        guard.HoldingTorque(at_most="90 N*m", joint="mast", over=[("-1 deg", "1 deg"), ("0 m", "10 mm")]),
        guard.ResidualTorque(at_most="100 %", joint="slide"),
    ]
    report = guard.check(guard.PoiseFile(mechanism=sliding, limits=limits))
    assert report.holds
    assert report.verdicts[1].unit == "N"
    assert "slide" in str(report)


def test_a_joint_that_slides_has_a_travel() -> None:
    mast = PlanarChain([Link("mast", Body(1.0, (0.1, 0)), joint="prismatic", skew="90 deg")])
    document = guard.PoiseFile(mechanism=Mechanism(mast), limits=[guard.StoredEnergy(at_most="1 J")])
    with pytest.raises(
        InputError, match=r"the document: travel: Mechanism\.travel must be given for a prismatic joint"
    ):
        guard.check(document)


def test_comparison_joint_by_joint() -> None:
    """0.2 kg more on the forearm's end: by hand, at the pose where both links are level."""
    heavier = TWO_LINKS.replace('"0.8 kg", com = ["0.1 m"', '"0.8 kg", com = ["0.15 m"')
    found = guard.compare(read(TWO_LINKS), read(heavier))
    assert found.shift == pytest.approx(G * M2 * 0.05)
    assert {change.what for change in found.changed} >= {
        "residual torque of upper, worst",
        "residual torque of fore, rms",
    }
    assert "holding torque of " in str(found)
    rows = {change.what: change for change in found.changes}
    assert rows["residual torque of fore, worst"].difference == pytest.approx(G * M2 * 0.05)
    assert rows["pivot load of fore"].difference == 0.0
    assert found.to_dict()["ranges"][1] == {"from_rad": 0.0, "to_rad": pytest.approx(math.radians(45))}
    other = read(TWO_LINKS.replace('"fore"', '"elbow"'))
    with pytest.raises(InputError, match="must have the same joints, got upper, fore and upper, elbow"):
        guard.compare(read(TWO_LINKS), other)


@pytest.mark.parametrize("name", ["planar chain", "spatial chain"])
def test_comparison_without_pivot_loads_where_nobody_knows_them(name: str) -> None:
    """A spool and a chain in space do not tell how their bearings are loaded."""
    document = guard.PoiseFile(mechanism=attrs.evolve(MECHANISMS[name], friction=Friction()))
    found = guard.compare(document, document)
    assert not [change for change in found.changes if change.what.startswith("pivot load")]


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("planar chain", "planar chian", "linkage.kind: must be a kind of linkage, got the text 'planar chian'; did you mean 'planar chain'?"),
        ("[linkage]", "[arm]\n[linkage]", "must have one of the tables arm, linkage, got arm and linkage"),
        ('name = "fore"', 'name = "fore"\nlenth = "1 m"', "linkage.chain[2].lenth: is not a known key; did you mean 'length'?"),
        ('name = "fore"', 'name = "fore"\nskew = "1 m"', "linkage.chain[2].skew: Link.skew must be a value in rad, got '1 m'"),
        ('name = "fore"', 'name = "fore"\njoint = "ball"', "linkage.chain[2].joint: Link.joint must be 'revolute' or 'prismatic'"),
        ('name = "fore"', 'name = "fore"\nfollows = { ratio = 1 }', "linkage.chain[2].follows.ratio: is not a known key; did you mean 'ratios'?"),
        ('name = "fore"', 'name = "fore"\nfollows = { ratios = { upper = "1" } }', "linkage.chain[2].follows.ratios.upper: must be a number"),
        ('name = "fore"', 'name = "fore"\nfollows = { ratios = { upper = 1 }, offset = 3 }', "linkage.chain[2].follows.offset: must be a text with a unit"),
        ('[[travel]]\nfrom = "0 deg"\nto = "45 deg"', "", "travel: must be a table for each of 2 joints (upper, fore), got 1"),
        ('to = "45 deg"', 'to = "0.1 m"', "travel[2].to: travel must be a value in rad, got '0.1 m'"),
        ('to = "45 deg"', 'to = "-45 deg"', "travel[2]: must run from the lower to the higher angle"),
        ('[[friction]]\ncoulomb = "0.1 N*m"', "", "friction: must be a table for each of 2 joints (upper, fore), or one table for all, got 1"),
    ],
)  # fmt: skip
def test_what_is_wrong_is_named_with_its_place(old: str, new: str, message: str) -> None:
    assert old in TWO_LINKS
    with pytest.raises(PoiseFileError) as caught:
        read(TWO_LINKS.replace(old, new))
    assert message in str(caught.value)
    assert str(caught.value).startswith("it.poise.toml: ")


@pytest.mark.parametrize(
    ("behind", "message"),
    [
        ('[[limits]]\nwhat = "holding torque"\nat_most = "1 N*m"\njoint = "fort"', "limits[1].joint must be the name of a joint, got 'fort'; did you mean 'fore'?"),
        ('[[limits]]\nwhat = "pivot load"\nat_most = "1 N"\njoint = "x"', "got 'x'; known are upper, fore"),
        ('[[limits]]\nwhat = "balance angles"\nnear = ["0 deg"]\nwithin = "1 deg"', "limits[1].what is 'balance angles', which is for mechanisms with one joint, got 2 (upper, fore)"),
        ('[[limits]]\nwhat = "stored energy"\nat_most = "1 J"\nover = ["0 deg", "9 deg"]', "limits[1].over must be a range for each of 2 joints"),
        ('[[limits]]\nwhat = "stored energy"\nat_most = "1 J"\nover = [["0 deg", "9 deg"]]', "limits[1].over must be a range for each of 2 joints (upper, fore), got 1"),
        ('[[limits]]\nwhat = "stored energy"\nat_most = "1 J"\nover = [["0 m", "9 mm"], ["0 deg", "9 deg"]]', "limits[1].over must be a range in rad for 'upper', got one in m"),
        ('[design]\nmethod = "sine"\nrate = "1 N/m"\nattach_radius = "0.1 m"', "design is for mechanisms with one joint, as its solvers are, got 2 (upper, fore)"),
    ],
)  # fmt: skip
def test_what_does_not_fit_the_joints(behind: str, message: str) -> None:
    with pytest.raises(PoiseFileError) as caught:
        read(f"{TWO_LINKS}\n{behind}\n")
    assert message in str(caught.value)


# ------------------------------------------------------------------------------------------------
# robots from URDF files

ROBOT = """<robot name="lift"><link name="base"/>
  <link name="boom"><inertial><origin xyz="0.3 0 0"/><mass value="2"/></inertial></link>
  <link name="hand"><inertial><origin xyz="0.1 0 0"/><mass value="1"/></inertial></link>
  <joint name="lift" type="revolute"><parent link="base"/><child link="boom"/>
    <axis xyz="0 -1 0"/><limit lower="0" upper="1.2" effort="9" velocity="1"/></joint>
  <joint name="turn" type="continuous"><parent link="boom"/><child link="hand"/><origin xyz="0.5 0 0"/>
    <axis xyz="1 0 0"/></joint></robot>"""
WITH_ROBOT = """\
schema = 1 # kept

[linkage]
kind = "urdf"
file = "lift.urdf"

[[limits]]
what = "holding torque"
at_most = "15 N*m"
"""


def test_a_robot_from_its_own_file(tmp_path: Path) -> None:
    """By hand: 2 kg at 0.3 m and 1 kg at 0.5 m + 0.1 m, level."""
    (tmp_path / "lift.urdf").write_text(ROBOT)
    file = tmp_path / "it.poise.toml"
    file.write_text(WITH_ROBOT)
    document = guard.load(file)
    assert document.mechanism.linkage == from_urdf(tmp_path / "lift.urdf").chain
    assert document.mechanism.travel == ((0.0, 1.2), None)
    (found,) = guard.check(document).verdicts
    assert found.value == pytest.approx(G * (2 * 0.3 + 1 * 0.6))
    assert found.about == "boom"
    guard.save(document, tmp_path / "copy.poise.toml")
    assert (tmp_path / "copy.poise.toml").read_text() == WITH_ROBOT
    assert read(guard.dump(document)) == document  # as a spatial chain, without the other file


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("lift.urdf", "left.urdf", "linkage.file: "),
        ('file = "lift.urdf"', "", "linkage: must have the key file"),
        ('file = "lift.urdf"', "file = 3", "linkage.file: must be a text, got 3"),
        ('file = "lift.urdf"', 'file = "lift.urdf"\nname = "x"', "linkage.name: is not a known key"),
    ],
)
def test_a_robot_that_cannot_be_read(old: str, new: str, message: str, tmp_path: Path) -> None:
    (tmp_path / "lift.urdf").write_text(ROBOT)
    with pytest.raises(PoiseFileError) as caught:
        read(WITH_ROBOT.replace(old, new), tmp_path)
    assert message in str(caught.value)

"""URDF files: what is read, what is found doubtful, and a message for every broken file."""

from __future__ import annotations

import math
import re
import subprocess
import sys

import pytest

from springpoise import Mechanism, Point
from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.linkages import urdf_reading
from springpoise.linkages.urdf import UrdfFinding, from_urdf

pytest.importorskip("defusedxml", reason="reading URDF needs the package defusedxml")

G = 9.80665

INERTIA = '<inertia ixx="0.01" ixy="0" ixz="0" iyy="0.01" iyz="0" izz="0.01"/>'


def _weight(mass, com="0 0 0", inertia=INERTIA):
    return f'<inertial><origin xyz="{com}"/><mass value="{mass}"/>{inertia}</inertial>'


def _joint(name, kind, parent, child, inside="", limit='<limit lower="-1" upper="2"/>'):
    return (
        f'<joint name="{name}" type="{kind}"><parent link="{parent}"/><child link="{child}"/>{inside}'
        f"{limit if kind in {'revolute', 'prismatic'} else ''}</joint>"
    )


def _link(name, inside=""):
    return f'<link name="{name}">{inside}</link>'


ARM = (
    _link("base", _weight(9))
    + _link("boom", _weight(2, "0.3 0 0"))
    + _link("tool", _weight(0.5, "0 0 0.1"))
    + _joint("lift", "revolute", "base", "boom", '<origin xyz="0 0 1"/><axis xyz="0 -1 0"/>')
    + _joint("grip", "fixed", "boom", "tool", '<origin xyz="0.8 0 0" rpy="0 1.5707963267948966 0"/>')
)


@pytest.fixture
def read(tmp_path):
    def from_text(text, **options):
        path = tmp_path / "robot.urdf"
        if isinstance(text, bytes):
            path.write_bytes(text)
        else:
            whole = text if "<robot" in text else f'<robot name="r">{text}</robot>'
            path.write_text(whole, encoding="utf-8")
        return from_urdf(path, **options)

    return from_text


def test_an_arm_with_a_tool(read):
    model = read(ARM)
    chain = model.chain
    assert (model.name, model.root, model.joint_names) == ("r", "base", ("lift",))
    assert chain.joint_names == ("boom",)
    assert model.travel == ((-1.0, 2.0),)
    assert chain.mass == 11.5
    mech = Mechanism(chain, travel=model.travel)
    # by hand: the tool's centre is 0.8 + 0.1 m out along the boom
    assert mech.holding_torque(0.4) == pytest.approx(G * (2 * 0.3 + 0.5 * 0.9) * math.cos(0.4), rel=1e-14)
    assert model.findings == model.wrong_statics == model.only_dynamics == ()
    assert str(model).splitlines() == [
        "r: 3 links, 1 joint, 11.50 kg",
        "  joint  lift  -57.30 deg to 114.59 deg",
        "  nothing doubtful found",
    ]


def test_points_may_name_the_root_and_fixed_links(read):
    chain = read(ARM).chain
    assert chain.position(Point("base", (1, 2, 3)), 0.7) == chain.position(Point("ground", (1, 2, 3)), 0.7) == (1, 2, 3)
    assert chain.position(Point("tool", (0, 0, 0.1)), 0.0) == pytest.approx((0.9, 0.0, 1.0))


def test_a_root_that_is_called_ground(read):
    model = read(ARM.replace('"base"', '"ground"'))
    assert model.root == "ground"
    assert model.chain.frames == ("ground", "boom", "tool")
    assert "3 links" in str(model)


def test_kinds_of_joints(read):
    links = "".join(_link(n, _weight(1, "0.1 0 0")) for n in "abcd") + _link("base")
    model = read(
        links
        + _joint("jb", "continuous", "a", "b", '<axis xyz="0 0 2"/>')
        + _joint("ja", "prismatic", "base", "a", limit='<limit lower="-0.1" upper="0.25" effort="1" velocity="1"/>')
        + _joint("jc", "revolute", "a", "c", limit='<limit upper="0.5"/>')
        + _joint("jd", "fixed", "c", "d", '<axis xyz="0 0 0"/>')
    )
    by_name = dict(zip(model.joint_names, model.travel, strict=True))
    assert by_name == {"ja": (-0.1, 0.25), "jb": None, "jc": (0.0, 0.5)}
    kinds = {link.name: (link.joint, link.axis) for link in model.chain.links if link.name != "base"}
    assert kinds["a"] == ("prismatic", (1.0, 0.0, 0.0))
    assert kinds["b"] == ("revolute", (0.0, 0.0, 1.0))
    assert "jb  no limits" in str(model)
    assert "ja  -100.0 mm to 250.0 mm" in str(model)


def test_mimic_joints_follow_through_one_another(read):
    links = "".join(_link(n, _weight(1, "0.1 0 0")) for n in "abc") + _link("base")
    model = read(
        links
        + _joint("ja", "revolute", "base", "a")
        + _joint("jb", "revolute", "base", "b", '<mimic joint="jc" multiplier="-2" offset="0.5"/>')
        + _joint("jc", "revolute", "base", "c", '<mimic joint="ja" offset="0.1"/>')
    )
    follows = {link.name: link.follows for link in model.chain.links}
    assert model.joint_names == ("ja",)
    assert follows["c"].ratios == (("a", 1.0),)
    assert follows["c"].offset == 0.1
    assert follows["b"].ratios == (("a", -2.0),)
    assert follows["b"].offset == pytest.approx(-2 * 0.1 + 0.5)


def test_limits_without_room_are_no_travel(read):
    model = read(ARM.replace('lower="-1" upper="2"', ""))
    assert model.chain.limits == ((0.0, 0.0),)
    with pytest.raises(InputError, match=r"UrdfModel\.travel must be .* got \(0\.0, 0\.0\) for 'lift'; give travel="):
        _ = model.travel
    assert Mechanism(model.chain, travel=(-1, 1)).travel_or_turn == (-1.0, 1.0)


def test_other_elements_and_a_byte_order_mark_do_no_harm(read):
    more = '<material name="m"/><gazebo><link name="x"/></gazebo><!-- a --><transmission name="t"><joint name="lift"/></transmission>'
    model = read(
        f'\ufeff<?xml version="1.0" encoding="utf-8"?><robot name="Ärm" xmlns:xacro="http://x">{ARM}{more}</robot>'
    )
    assert model.name == "Ärm"


def test_a_long_chain_is_read_without_recursion(read):
    count = 1500
    text = "".join(_link(f"l{i}", _weight(1)) for i in range(count + 1))
    text += "".join(_joint(f"j{i}", "fixed" if i else "revolute", f"l{i}", f"l{i + 1}") for i in reversed(range(count)))
    assert read(text).chain.mass == count + 1


# ------------------------------------------------------------------------------------- findings


def _statics(model):
    assert all(finding.severity == "wrong statics" for finding in model.wrong_statics)
    return {finding.link: finding.what for finding in model.wrong_statics}


def test_links_that_weigh_nothing(read):
    shape = "<visual/>"
    links = (
        _link("base")
        + _link("bare")
        + _link("carried", shape)
        + _link("zero", shape + _weight(0))
        + _link("heavy", _weight(2))
        + _link("frame")
        + _link("no mass", f"<inertial>{INERTIA}</inertial>")
        + _link("negative", _weight(-2, "1 0 0"))
    )
    joints = (
        _joint("j1", "revolute", "base", "bare")
        + _joint("j2", "revolute", "bare", "heavy")
        + "".join(
            _joint(f"f{i}", "fixed", "heavy", n)
            for i, n in enumerate(["carried", "zero", "frame", "no mass", "negative"])
        )
    )
    model = read(links + joints)
    assert _statics(model) == {
        "bare": "it moves, but neither it nor anything fixed to it weighs anything",
        "carried": "it moves and has a shape, but weighs nothing",
        "zero": "it moves and has a shape, but weighs nothing",
        "no mass": "its <inertial> has no <mass>",
        "negative": "its mass is negative, -2.000 kg, and was left out",
    }
    assert model.chain.mass == 2.0


def test_a_centre_of_mass_in_millimetres(read):
    model = read(ARM.replace("0.3 0 0", "300 0 0"))
    # the reach is 1 + 0.8 m
    assert _statics(model) == {
        "boom": "its centre of mass is 300.0 m from the link's origin, 167 times the reach of the robot"
    }


def test_the_reach_counts_slides(read):
    text = _link("base") + _link("car", _weight(1, "9 0 0")) + _joint("j", "prismatic", "base", "car")
    assert not read(text).findings  # 2 m of travel, five times that are allowed
    assert "car" in _statics(read(text.replace("9 0 0", "11 0 0")))


def test_the_stated_mass(read):
    assert not read(ARM, stated_mass="11.9 kg").findings
    model = read(ARM, stated_mass="14 kg")
    assert _statics(model) == {"r": "the links weigh 11.50 kg in all, 14.00 kg were stated"}
    assert "wrong statics  r  the links weigh" in str(model)


def test_a_tool_that_was_left_out(read):
    assert not read(ARM, expected_links="tool").findings
    weightless = ARM.replace(_weight(0.5, "0 0 0.1"), "")
    assert _statics(read(weightless, expected_links=["tool"])) == {"tool": "this link was expected and weighs nothing"}
    assert _statics(read(ARM, expected_links=["boom", "gripper"])) == {
        "gripper": "this link was expected and is not in the file"
    }


@pytest.mark.parametrize(
    ("inertia", "what"),
    [
        ("", "its <inertial> has no <inertia>"),
        (
            INERTIA.replace('izz="0.01"', 'izz="-0.01"'),
            "its inertia is not positive definite: the least principal moment is -0.01",
        ),
        (INERTIA.replace('ixy="0"', 'ixy="0.02"'), "not positive definite"),
        (INERTIA.replace("0.01", "0"), "not positive definite"),
        (INERTIA.replace('izz="0.01"', 'izz="0.05"'), "break the triangle rule: 0.05 > 0.01 + 0.01 kg*m**2"),
    ],
)
def test_inertia_matters_for_dynamics_only(read, inertia, what):
    model = read(ARM.replace(_weight(2, "0.3 0 0"), _weight(2, "0.3 0 0", inertia)))
    (finding,) = model.findings
    assert isinstance(finding, UrdfFinding)
    assert (finding.severity, finding.link) == ("only dynamics", "boom")
    assert what in finding.what
    assert model.only_dynamics == (finding,)
    assert model.wrong_statics == ()
    assert Mechanism(model.chain).holding_torque(0.0) == pytest.approx(G * (2 * 0.3 + 0.5 * 0.9))


def test_inertia_of_a_flat_plate_with_rounded_numbers_is_fine(read):
    plate = '<inertia ixx="0.0123" ixy="0" ixz="0" iyy="0.0123" iyz="0" izz="0.02461"/>'
    assert not read(ARM.replace(_weight(2, "0.3 0 0"), _weight(2, "0.3 0 0", plate))).findings


# ----------------------------------------------------------------------------- broken and hostile

BOMB = """<?xml version="1.0"?><!DOCTYPE robot [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;">
<!ENTITY c "&b;&b;&b;&b;&b;&b;&b;&b;">]><robot name="&c;"/>"""
EXTERNAL = '<!DOCTYPE robot [<!ENTITY x SYSTEM "file:///etc/passwd">]><robot name="r">&x;</robot>'


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (b"", r"a URDF file must be XML, got no element found"),
        (b"hello", r"a URDF file must be XML, got syntax error"),
        ("<robot><link></robot>", r"a URDF file must be XML, got mismatched tag"),
        (b"<robot name='\xff\xfe'/>", r"a URDF file must be UTF-8 text, got byte 0xff at 13"),
        ("<robot/>".encode("utf-16"), r"a URDF file must be UTF-8 text, got byte 0xff at 0"),
        (b"<robot>\x00</robot>", r"a URDF file must be XML, got not well-formed"),
        (BOMB.encode(), r"must not define types or entities, got DTDForbidden"),
        (EXTERNAL.encode(), r"must not define types or entities, got DTDForbidden"),
        ("<robot>&x;</robot>", r"a URDF file must be XML, got undefined entity"),
        (b"<sdf><robot/></sdf>", r"the root element must be <robot>, got <sdf>"),
        (b'<mujoco model="robot"/>', r"the root element must be <robot>, got <mujoco>"),
        (
            '<robot xmlns:xacro="http://www.ros.org/wiki/xacro"><xacro:include filename="a"/></robot>',
            r"must not contain macros, got <xacro:include>; expand them with xacro",
        ),
        ("<robot/>", r"<robot> must have a <link>, got none"),
        (_link("a") + _link("a"), r"links must have different names, got 'a' twice"),
        ("<robot><link/></robot>", r"a <link> must have the attribute 'name', got None"),
        (_link(""), r"a <link> must have the attribute 'name', got ''"),
        (_link("a"), r"<robot> must have a joint that moves by itself, got none"),
        (_link("a") + _link("b"), r"links must hang on one root, got 2: 'a', 'b'"),
        (
            _link("a") + _link("b") + _joint("j", "fixed", "a", "b") + _joint("k", "fixed", "b", "a"),
            r"links must hang on a root, got a ring of parents through 'a'",
        ),
        (
            _link("r") + _link("a") + _link("b") + _joint("j", "fixed", "a", "b") + _joint("k", "fixed", "b", "a"),
            r"links must hang on a root, got a ring of parents through 'a'",
        ),
        (_link("a") + _joint("j", "fixed", "a", "a"), r"links must hang on a root, got a ring of parents through 'a'"),
        (
            "".join(map(_link, "abc")) + _joint("j", "fixed", "a", "c") + _joint("k", "fixed", "b", "c"),
            r"link 'c' must hang on one joint, got 'j' and 'k'",
        ),
        (ARM.replace('"tool"', '"ground"'), r"link 'ground' must be the root, .* got 'base' as the root; rename it"),
        (ARM.replace('name="grip"', 'name="lift"'), r"joints must have different names, got 'lift' twice"),
        (ARM.replace('<joint name="grip"', "<joint"), r"a <joint> must have the attribute 'name', got None"),
        (ARM.replace(' type="revolute"', ""), r"joint 'lift' must have the attribute 'type', got None"),
        (ARM.replace('"revolute"', '"hinge"'), r"joint 'lift': type must be one of .*, got 'hinge'"),
        (ARM.replace('"revolute"', '"planar"'), r"joint 'lift': type must move along or about one axis, got 'planar'"),
        (ARM.replace('"revolute"', '"floating"'), r"joint 'lift': type must .* got 'floating'; use several joints"),
        (ARM.replace('<parent link="base"/>', ""), r"joint 'lift' must have a <parent>, got none"),
        (
            ARM.replace('<child link="boom"/>', "<child/>"),
            r"<child> of joint 'lift' must have the attribute 'link', got None",
        ),
        (
            ARM.replace('<parent link="base"/>', '<parent link="bass"/>'),
            r"'lift': parent\.link must be a link of the file, got 'bass'",
        ),
        (
            ARM.replace('<child link="tool"/>', '<child link="tol"/>'),
            r"'grip': child\.link must be a link of the file, got 'tol'",
        ),
        (ARM.replace("0 -1 0", "0 0 0"), r"joint 'lift': axis\.xyz must have a length > 0, got \(0\.0, 0\.0, 0\.0\)"),
        (ARM.replace("0 -1 0", "0 -1"), r"joint 'lift': axis\.xyz must be three finite numbers in 1, got '0 -1'"),
        (ARM.replace(' xyz="0 -1 0"', ""), r"joint 'lift': axis\.xyz must be three finite numbers in 1, got None"),
        (
            ARM.replace("0 0 1", "0 0 nan", 1),
            r"joint 'lift': origin\.xyz must be three finite numbers in m, got '0 0 nan'",
        ),
        (ARM.replace("0 0 1", "0 0 inf", 1), r"joint 'lift': origin\.xyz must be .* got '0 0 inf'"),
        (ARM.replace("0 0 1", "0 0 1e999", 1), r"joint 'lift': origin\.xyz must be .* got '0 0 1e999'"),
        (ARM.replace("0 0 1", "0 0 1_0", 1), r"joint 'lift': origin\.xyz must be .* got '0 0 1_0'"),
        (ARM.replace("0 0 1", "0 0 1,5", 1), r"joint 'lift': origin\.xyz must be .* got '0 0 1,5'"),
        (ARM.replace("0 0 1", "0 0 ${h}", 1), r"joint 'lift': origin\.xyz must be .* got '0 0 \$\{h\}'; expand macros"),
        (
            ARM.replace('rpy="0 1.5707963267948966 0"', 'rpy="0 90 0"'),
            r"joint 'grip': origin\.rpy .* got '0 90 0'; degrees\?",
        ),
        (
            ARM.replace('value="2"', 'value="heavy"'),
            r"link 'boom': mass\.value must be a finite number in kg, got 'heavy'",
        ),
        (ARM.replace('value="2"', 'value="nan"'), r"link 'boom': mass\.value must be a finite number in kg, got 'nan'"),
        (ARM.replace(' value="2"', ""), r"<mass> of link 'boom' must have the attribute 'value', got None"),
        (ARM.replace("0.3 0 0", "0.3 0"), r"link 'boom', inertial: origin\.xyz must be three .* got '0\.3 0'"),
        (
            ARM.replace('iyy="0.01"', 'iyy="x"'),
            r"link 'base': inertia\.iyy must be a finite number in kg\*m\*\*2, got 'x'",
        ),
        (ARM.replace(' iyy="0.01"', ""), r"<inertia> of link 'base' must have the attribute 'iyy', got None"),
        (
            ARM.replace('<limit lower="-1" upper="2"/>', ""),
            r"joint 'lift' must have a <limit>, got none; .* 'continuous'",
        ),
        (ARM.replace('upper="2"', 'upper="-2"'), r"'lift': limit\.lower must be <= limit\.upper in rad, got -1 and -2"),
        (ARM.replace('upper="2"', 'upper="inf"'), r"'lift': limit\.upper must be a finite number in rad, got 'inf'"),
        (ARM.replace('<axis xyz="0 -1 0"/>', '<axis xyz="0 -1 0"/>' * 2), r"joint 'lift' must have one <axis>, got 2"),
        (ARM.replace(_weight(2, "0.3 0 0"), _weight(2) * 2), r"link 'boom' must have one <inertial>, got 2"),
    ],
)
def test_a_file_that_is_refused(read, text, message):
    with pytest.raises(PoiseFileError, match=rf"robot\.urdf: .*{message}"):
        read(text)


@pytest.mark.parametrize(
    ("mimic", "message"),
    [
        ('<mimic joint="nobody"/>', r"joint 'jb': mimic\.joint must be a joint that moves, got 'nobody'"),
        ('<mimic joint="jf"/>', r"joint 'jb': mimic\.joint must be a joint that moves, got 'jf'"),
        ('<mimic joint="jb"/>', r"joint 'jb': mimic\.joint must not lead back to itself, got 'jb'"),
        ('<mimic joint="jc"/>', r"mimic\.joint must not lead back to itself, got 'j[bc]'"),
        ("<mimic/>", r"<mimic> of joint 'jb' must have the attribute 'joint', got None"),
        (
            '<mimic joint="ja" multiplier="two"/>',
            r"joint 'jb': mimic\.multiplier must be a finite number in 1, got 'two'",
        ),
        (
            '<mimic joint="ja" offset="nan"/>',
            r"joint 'jb': mimic\.offset must be a finite number in rad or m, got 'nan'",
        ),
    ],
)
def test_a_mimic_that_is_refused(read, mimic, message):
    text = (
        "".join(map(_link, "rabcf"))
        + _joint("ja", "revolute", "r", "a")
        + _joint("jb", "revolute", "r", "b", mimic)
        + _joint("jc", "revolute", "r", "c", '<mimic joint="jb"/>')
        + _joint("jf", "fixed", "r", "f")
    )
    with pytest.raises(PoiseFileError, match=message):
        read(text)


def test_a_robot_on_mimic_joints_only_is_refused(read):
    text = "".join(map(_link, "rab")) + _joint("ja", "revolute", "r", "a", '<mimic joint="jb"/>')
    text += _joint("jb", "revolute", "r", "b", '<mimic joint="ja"/>')
    with pytest.raises(PoiseFileError, match=r"must have a joint that moves by itself, got none"):
        read(text)


def test_files_that_cannot_be_read(tmp_path):
    with pytest.raises(PoiseFileError, match=r"nowhere\.urdf: the file must be readable, got .*No such file"):
        from_urdf(tmp_path / "nowhere.urdf")
    with pytest.raises(PoiseFileError, match=r"the file must be readable, got .*[Dd]irectory|[Pp]ermission"):
        from_urdf(str(tmp_path))
    with pytest.raises(PoiseFileError, match=r"the file must be readable, got .*null"):
        from_urdf("a\0b")
    for path in (None, 3, b"robot.urdf", ["robot.urdf"]):
        with pytest.raises(InputTypeError, match=rf"path must be the path of a URDF file, got {re.escape(repr(path))}"):
            from_urdf(path)


def test_a_file_that_is_too_large(tmp_path, monkeypatch):
    path = tmp_path / "large.urdf"
    with path.open("wb") as stream:
        stream.truncate(20_000_001)
    with pytest.raises(PoiseFileError, match=r"large\.urdf: a URDF file must be of at most 20 MB, got more"):
        from_urdf(path)
    monkeypatch.setattr(urdf_reading, "LARGEST", 1_000_000)
    with pytest.raises(PoiseFileError, match=r"at most 1 MB"):
        from_urdf("/dev/zero")


def test_elements_nested_deeply(read):
    depth = 100_000
    with pytest.raises(PoiseFileError, match=r"links must hang on one root|<link>|moves by itself"):
        read("<robot>" + _link("a") + "<b>" * depth + "</b>" * depth + "</robot>")


@pytest.mark.parametrize(
    ("options", "kind", "message"),
    [
        ({"stated_mass": 0}, InputError, r"stated_mass must be > 0 kg, got 0"),
        ({"stated_mass": "-3 kg"}, InputError, r"stated_mass must be > 0 kg, got -3"),
        ({"stated_mass": "3 N"}, InputError, r"stated_mass must be a value in kg, got '3 N'"),
        ({"stated_mass": [1.0, 2.0]}, InputError, r"stated_mass must be > 0 kg, got \[1\. 2\.\]"),
        ({"expected_links": 3}, InputTypeError, r"expected_links must be names of links, got 3"),
        ({"expected_links": [3]}, InputTypeError, r"expected_links must be names of links, got \[3\]"),
    ],
)
def test_options_that_are_refused(read, options, kind, message):
    with pytest.raises(kind, match=message):
        read(ARM, **options)


def test_the_package_for_xml_is_asked_for_by_name(read, monkeypatch):
    monkeypatch.setitem(sys.modules, "defusedxml", None)
    with pytest.raises(ImportError, match=r"got none; run pip install springpoise\[urdf\]"):
        read(ARM)


def test_xml_is_loaded_when_a_file_is_read():
    code = "import sys, springpoise.linkages.urdf; print('defusedxml' in sys.modules, 'xml.etree.ElementTree' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.split() == ["False", "False"]

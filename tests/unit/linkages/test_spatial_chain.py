"""Chains in space: branches, closed forms and messages."""

from __future__ import annotations

import math
import pickle

import attrs
import numpy as np
import pint
import pytest

from springpoise import (
    Body,
    Cable,
    Feedforward,
    Friction,
    JointTravel,
    Mechanism,
    Point,
    SpatialChain,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.gravity import seen_from_base, seen_from_base_in_space
from springpoise.linkages import Coupling, SpatialLink

G = 9.80665
DOWN = (0.0, 0.0, -G)


def _boom(**changes):
    """A column that turns about z, and a boom on it that lifts for positive angles."""
    boom = SpatialLink("boom", Body(2.0, (0.4, 0, 0)), origin=(0, 0, 0.5), axis=(0, -1, 0))
    return SpatialChain([SpatialLink("column", Body(5.0, (0, 0, 0.2))), attrs.evolve(boom, **changes)])


def test_a_boom_on_a_column_by_hand():
    mech = Mechanism(_boom())
    for turn, lift in ((0.0, 0.0), (1.0, 0.7), (-2.0, -1.2)):
        held = mech.holding_torque((turn, lift))
        assert held == pytest.approx((0.0, 2.0 * G * 0.4 * math.cos(lift)), abs=1e-14)
        height = 5.0 * 0.2 + 2.0 * (0.5 + 0.4 * math.sin(lift))
        assert mech.energy((turn, lift)) == pytest.approx(G * height, rel=1e-14)
    x, y, z = mech.linkage.position(Point("boom", (0.8, 0, 0)), (math.pi / 2, math.pi / 6))
    assert (x, y, z) == pytest.approx((0.0, 0.8 * math.cos(math.pi / 6), 0.5 + 0.4), abs=1e-15)


def test_a_slide_is_held_by_the_weight_along_it():
    axis = (1.0, 0.0, 1.0)  # made a unit vector
    chain = SpatialChain(SpatialLink("slide", Body(3.0, (0.1, 0.2, 0.3)), axis=axis, joint="prismatic"))
    mech = Mechanism(chain, travel=[("-100 mm", "0.5 m")])
    assert mech.holding_torque(0.2) == pytest.approx(3.0 * G / math.sqrt(2.0), rel=1e-15)
    assert chain.position(Point("slide", (0, 0, 0)), 0.5) == pytest.approx((0.5 / math.sqrt(2), 0, 0.5 / math.sqrt(2)))
    assert chain.jacobian(Point("slide", (9, 9, 9)), 0.5)[0] == pytest.approx((math.sqrt(0.5), 0, math.sqrt(0.5)))


def test_a_spring_in_space_balances_a_boom_at_every_turn():
    # rate·a·b = m·g·r, with the anchor on the axis of the column, straight above the boom's joint
    rate = 2.0 * G * 0.4 / (0.1 * 0.2)
    mount = SpringMount(ZeroLengthSpring(rate), Straight(Point("ground", (0, 0, 0.6)), Point("boom", (0.2, 0, 0))))
    mech = Mechanism(_boom(), springs=[mount])
    poses = np.random.default_rng(1).uniform(-3, 3, (50, 2))
    assert np.max(np.abs(mech.holding_torque(poses))) < 1e-12 * 2.0 * G * 0.4 * 10


def test_a_coupled_link_loads_the_joint_that_it_follows():
    links = [
        SpatialLink("a", Body(1.0, (0.3, 0, 0)), axis=(0, -1, 0)),
        SpatialLink("b", Body(2.0, (0.1, 0, 0)), origin=(0.5, 0, 0), axis=(0, -1, 0), follows={"a": -1.0}),
    ]
    # b stays level: it weighs at its joint only
    held = Mechanism(SpatialChain(links)).holding_torque(0.6)
    assert held == pytest.approx(G * (1.0 * 0.3 + 2.0 * 0.5) * math.cos(0.6), rel=1e-14)
    offset = attrs.evolve(links[1], follows=Coupling({"a": -1.0}, offset=math.pi / 2))
    assert SpatialChain([links[0], offset]).position(Point("b", (0.1, 0, 0)), 0.6) == pytest.approx(
        (0.5 * math.cos(0.6), 0.0, 0.5 * math.sin(0.6) + 0.1), abs=1e-15
    )


def test_a_fixed_link_is_part_of_its_parent():
    tool = SpatialLink(
        "tool", Body(0.5, (0, 0, 0.1)), origin=(0.8, 0, 0), roll_pitch_yaw=(0, math.pi / 2, 0), joint="fixed"
    )
    fixed = SpatialChain([*_boom().links, tool])
    moved = _boom(bodies=(Body(2.0, (0.4, 0, 0)), Body(0.5, (0.9, 0, 0))))
    q = (0.3, 0.9)
    assert fixed.joint_count == 2
    assert fixed.frames == ("ground", "column", "boom", "tool")
    assert fixed.gravity_torques(q, DOWN) == pytest.approx(moved.gravity_torques(q, DOWN), abs=1e-14)
    at_tool, at_boom = Point("tool", (0, 0, 0.1)), Point("boom", (0.9, 0, 0))
    assert fixed.position(at_tool, q) == pytest.approx(moved.position(at_boom, q), abs=1e-15)
    assert np.array(fixed.jacobian(at_tool, q)) == pytest.approx(np.array(moved.jacobian(at_boom, q)), abs=1e-15)


def test_a_link_fixed_to_the_ground_is_the_ground():
    base = SpatialLink("base", Body(50.0, (1, 2, 3)), parent="ground", joint="fixed", origin=(0, 0, 1))
    chain = SpatialChain([base, SpatialLink("arm", Body(1.0, (0.1, 0, 0)), axis=(0, -1, 0))])
    assert chain.position(Point("base", (1, 0, 0)), 0.4) == (1.0, 0.0, 1.0)
    assert chain.jacobian(Point("base", (1, 0, 0)), 0.4) == ((0.0, 0.0, 0.0),)
    assert chain.gravity_torques(0.0, DOWN)[0] == pytest.approx(-G * 0.1)
    assert chain.mass == 51.0


def test_a_chain_without_weight():
    chain = SpatialChain([SpatialLink("a"), SpatialLink("b", axis=(1, 0, 0))])
    assert np.array_equal(Mechanism(chain).gravity_torque(np.zeros((4, 2))), np.zeros((4, 2)))
    assert Mechanism(chain).gravity_torque((0.1, 0.2)) == pytest.approx((0.0, 0.0), abs=0)


def test_torques_of_slides_at_right_angles_do_not_vary():
    axes = (1, 0, 0), (0, 1, 0), (0, 0, 1)
    chain = SpatialChain(
        [SpatialLink(f"k{i}", Body(2.0, (0, 0, 0)), axis=a, joint="prismatic") for i, a in enumerate(axes)]
    )
    ff = Feedforward(Mechanism(chain))
    assert ff.compile()(0.1, 0.2, 0.3) == (0.0, 0.0, 2.0 * G)
    many = ff.compile(arrays=True)(*np.full((3, 5), 0.1))
    assert [torque.tolist() for torque in many] == [[0.0] * 5, [0.0] * 5, [2.0 * G] * 5]
    assert ff.torque(np.full((5, 3), 0.1)).tolist() == [[0.0, 0.0, 2.0 * G]] * 5


def test_poses_that_are_not_finite_give_nan():
    mech = Mechanism(_boom())
    torques = mech.holding_torque([[0.0, 0.0], [math.nan, 0.0], [0.0, math.inf]])
    assert np.isnan(torques).all(axis=1).tolist() == [False, True, True]


def test_limits_have_the_unit_of_their_joint_and_become_the_travel():
    chain = SpatialChain(
        [
            SpatialLink("turn", limits=("-90 deg", "1 rad")),
            SpatialLink("slide", joint="prismatic", limits=("-10 mm", pint.UnitRegistry().Quantity(2, "cm"))),
            SpatialLink("tip", joint="fixed"),
            SpatialLink("free"),
            SpatialLink("led", limits=(0, 1), follows={"turn": 1}),
        ]
    )
    assert chain.joint_names == ("turn", "slide", "free")
    assert chain.joint_units == ("rad", "m", "rad")
    assert chain.limits[0] == pytest.approx((-math.pi / 2, 1.0))
    assert chain.limits[1] == pytest.approx((-0.01, 0.02))
    assert chain.limits[2] is None
    assert Mechanism(chain, travel=chain.limits).travel_or_turn[2] == (-math.pi, math.pi)
    with pytest.raises(UnitError, match=r"SpatialLink\.limits must be a value in m, got '3 deg'"):
        SpatialLink("slide", joint="prismatic", limits=("3 deg", 1))


def test_payloads_and_bodies():
    chain = _boom()
    mech = Mechanism(chain).with_payload("1 kg", at=Point("boom", (0.8, 0, 0)))
    assert mech.holding_torque((0.0, 0.0))[1] == pytest.approx(G * (2.0 * 0.4 + 0.8))
    assert mech.without_payload().linkage == chain
    assert {chain: 1}[_boom()] == 1
    assert pickle.loads(pickle.dumps(chain)).position(Point("boom", (1, 0, 0)), (0, 0)) == (1.0, 0.0, 0.5)
    assert "_layout" not in repr(chain)
    with pytest.raises(InputError, match=r"frame must be one of 'column', 'boom', got 'ground'"):
        chain.with_body(Body(1.0, (0, 0, 0)), "ground")
    with pytest.raises(InputError, match=r"SpatialChain\.tip must be given as a Point"):
        Mechanism(chain).with_payload(1.0)


def test_axes_are_kept_as_unit_vectors():
    assert SpatialLink("a", axis=(0, 0, -5)).axis == (0.0, 0.0, -1.0)
    assert SpatialLink("a", axis=(0.6, 0.0, 0.8)).axis == (0.6, 0.0, 0.8)
    x, y, _ = SpatialLink("a", axis=(np.array([1.0, 2.0]), 0, 1)).axis
    assert x == pytest.approx([math.sqrt(0.5), 2 / math.sqrt(5)])
    assert y == pytest.approx([0, 0])


@pytest.mark.parametrize(
    ("arguments", "kind", "message"),
    [
        ({"name": "ground"}, InputTypeError, r"SpatialLink\.name must be a name other than 'ground', got 'ground'"),
        ({"name": 7}, InputTypeError, r"SpatialLink\.name must be .* got 7"),
        ({"bodies": "b"}, InputTypeError, r"SpatialLink\.bodies must be a Body or a sequence of them, got 'b'"),
        ({"parent": 3}, InputTypeError, r"SpatialLink\.parent must be the name of a link or 'ground', got 3"),
        ({"axis": (0, 0, 0)}, InputError, r"SpatialLink\.axis must have a length > 0, got \(0\.0, 0\.0, 0\.0\)"),
        ({"axis": (np.array([1, 0]), 0, 0)}, InputError, r"SpatialLink\.axis must have a length > 0"),
        ({"axis": (1, 0)}, InputError, r"SpatialLink\.axis must be three values in 1, got 2 values"),
        ({"axis": (math.nan, 0, 1)}, InputError, r"SpatialLink\.axis must be .* finite, got nan"),
        ({"joint": "ball"}, InputError, r"must be 'revolute', 'prismatic' or 'fixed', got 'ball'"),
        ({"origin": (1, 2)}, InputError, r"SpatialLink\.origin must be three values in m, got 2 values"),
        (
            {"roll_pitch_yaw": (90, 0, 0)},
            InputError,
            r"SpatialLink\.roll_pitch_yaw .* got 90; degrees\? write '90 deg'",
        ),
        (
            {"limits": (2, 1)},
            InputError,
            r"SpatialLink\.limits must be \(lower, higher\) rad, got \(2\.0, 1\.0\) for 'a'",
        ),
        ({"limits": 3}, InputTypeError, r"SpatialLink\.limits must be a pair in rad, got 3"),
        (
            {"limits": (0, 1), "joint": "fixed"},
            InputError,
            r"must move to have limits or follow others, got 'fixed' for 'a'",
        ),
        ({"follows": {"b": 1}, "joint": "fixed"}, InputError, r"must move to have limits or follow others"),
        (
            {"follows": "b"},
            InputTypeError,
            r"SpatialLink\.follows must be a Coupling or link names with ratios, got 'b'",
        ),
    ],
)
def test_a_link_that_is_refused(arguments, kind, message):
    with pytest.raises(kind, match=message):
        SpatialLink(**{"name": "a", **arguments})


@pytest.mark.parametrize(
    ("links", "kind", "message"),
    [
        ([], InputError, r"SpatialChain\.links must be at least one SpatialLink, got none"),
        ("ab", InputTypeError, r"SpatialChain\.links must be a sequence of SpatialLinks, got 'ab'"),
        ([SpatialLink("a"), SpatialLink("a")], InputError, r"different names, got 'a' twice"),
        ([SpatialLink("a", parent="x")], InputError, r"'ground', got 'x', which is unknown, for 'a'"),
        ([SpatialLink("a", parent="")], InputError, r"got '', which is unknown, for 'a'"),
        ([SpatialLink("a", parent="b"), SpatialLink("b")], InputError, r"got 'b', which comes later, for 'a'"),
        ([SpatialLink("a", parent="a")], InputError, r"got 'a', which comes later, for 'a'"),
        ([SpatialLink("a", joint="fixed")], InputError, r"must have a joint that is moved by itself, got none"),
        (
            [SpatialLink("a"), SpatialLink("f", joint="fixed"), SpatialLink("b", follows={"f": 1})],
            InputError,
            r"moved by themselves \(a\), got 'f' for 'b'",
        ),
        (
            [SpatialLink("a", Body(1, (0, 0)))],
            InputError,
            r"three coordinates in m on a SpatialLink, got \(0\.0, 0\.0\) on 'a'",
        ),
    ],
)
def test_a_chain_that_is_refused(links, kind, message):
    with pytest.raises(kind, match=message):
        SpatialChain(links)


def test_points_and_poses_that_are_refused():
    chain = _boom()
    with pytest.raises(InputError, match=r"Point\.body must be one of 'ground', 'column', 'boom', got 'hook'"):
        chain.position(Point("hook", (0, 0, 0)), (0.0, 0.0))
    with pytest.raises(InputError, match=r"Point\.at must have three coordinates .* got \(1\.0, 2\.0\) on 'boom'"):
        chain.jacobian(Point("boom", (1, 2)), (0.0, 0.0))
    with pytest.raises(InputError, match=r"q must be of shape \(\.\.\., 2\) for 2 joints, got \(0\.0,\)"):
        chain.position(Point("boom", (0, 0, 0)), (0.0,))
    with pytest.raises(InputError, match=r"q must be of shape \(\.\.\., 2\) for 2 joints"):
        chain.gravity_torques(np.zeros((5, 3)), DOWN)
    with pytest.raises(InputError, match=r"gravity must be 3 components in m/s\*\*2 for this linkage, got 2"):
        Mechanism(chain).gravity_torque((0, 0), gravity=(0, -G))


def test_what_only_linkages_in_a_plane_can_do():
    mech = Mechanism(_boom())
    for method in (mech.pivot_load, mech.pivot_force):
        with pytest.raises(InputError, match=r"must be planar to know pivot loads, got a SpatialChain"):
            method((0.0, 0.0))
    rubbing = attrs.evolve(mech, friction=Friction(pivot_friction=0.1, pivot_radius=0.01))
    with pytest.raises(InputError, match=r"must be planar to know pivot loads, got a SpatialChain"):
        rubbing.friction_band((0.0, 0.0))
    cable = Cable(Point("ground", (0, 0, 1)), Point("column", (0, 1, 0)), Point("boom", (1, 0, 0)))
    with pytest.raises(InputError, match=r"springs\[0\] does not fit its linkage: Cable"):
        Mechanism(_boom(), springs=SpringMount(ZeroLengthSpring(1.0), cable))
    assert Mechanism(_boom(), friction=Friction(0.3)).friction_band((0.0, 0.0)) == pytest.approx((0.3, 0.3))


def test_a_torsion_spring_on_one_joint():
    mount = SpringMount(TorsionSpring(10.0), JointTravel(1))
    assert Mechanism(_boom(), springs=mount).spring_torque((0.4, 0.5)) == pytest.approx((0.0, -5.0))


def test_gravity_seen_in_space():
    assert seen_from_base_in_space() == (0.0, 0.0, -G)
    assert seen_from_base_in_space(acceleration=("1 m/s**2", 2, 3)) == (-1.0, -2.0, -3.0 - G)
    gx, gy = seen_from_base("20 deg")  # in the plane of x and z, turned about minus y
    assert seen_from_base_in_space((0, "-20 deg", 0)) == pytest.approx((gx, 0.0, gy), abs=1e-15)
    tilts = np.linspace(-1, 1, 3)
    x, y, z = seen_from_base_in_space((tilts, 0, 0))
    assert x == 0.0
    assert y.shape == z.shape == (3,)
    assert y == pytest.approx(-G * np.sin(tilts))
    with pytest.raises(InputError, match=r"magnitude must be >= 0 m/s\*\*2, got -2"):
        seen_from_base_in_space(magnitude=-2)
    with pytest.raises(InputError, match=r"roll_pitch_yaw must be within two turns.* got 30; degrees\? write '30 deg'"):
        seen_from_base_in_space((0, 30, 0))
    with pytest.raises(InputError, match=r"acceleration must be three values in m/s\*\*2, got 2 values"):
        seen_from_base_in_space(acceleration=(1, 2))

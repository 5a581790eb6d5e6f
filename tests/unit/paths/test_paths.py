from __future__ import annotations

import math
import pickle

import numpy as np
import pytest

from springpoise import Arm, Body, Cable, Disc, JointTravel, Point, Straight
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.paths.protocol import friction_gradient_of, pulls_of

ARM = Arm(Body(1.0, (0.3, 0.0)))
LEFT, RIGHT = Point("ground", (-1.0, 0.0)), Point("ground", (1.0, 0.0))
HUB = Point("ground", (0.0, 0.0))


class TestStraight:
    PATH = Straight(Point("ground", (0.0, 0.3)), Point("arm", (0.4, 0.0)))

    def test_length_gradient_and_pulls(self):
        assert self.PATH.length(ARM, 0.0) == 0.5
        assert self.PATH.gradient(ARM, 0.0)[0] == pytest.approx(-0.24)
        first, last = self.PATH.pulls(ARM, 0.0)
        assert first.force == pytest.approx((0.8, -0.6))
        assert last.force == pytest.approx((-0.8, 0.6))
        assert (first.at, last.at) == (self.PATH.first, self.PATH.last)

    def test_ends_that_meet(self):
        path = Straight(LEFT, LEFT)
        assert path.length(ARM, 0.0) == pytest.approx(0.0, abs=1e-140)
        assert path.gradient(ARM, 0.0) == (0.0,)
        assert [f.force for f in path.pulls(ARM, 0.0)] == [(0.0, 0.0)] * 2

    @pytest.mark.parametrize("value", [None, (0, 1), "ground", Disc(HUB, radius=0.1, turn="cw")])
    def test_ends_must_be_points(self, value):
        with pytest.raises(InputTypeError, match=r"^Straight\.first must be a Point, got "):
            Straight(value, LEFT)
        with pytest.raises(InputTypeError, match=r"^Straight\.last must be a Point, got "):
            Straight(LEFT, value)


class TestJointTravel:
    def test_ratio(self):
        path = JointTravel(ratio=-2.5)
        assert path.length(ARM, 0.4) == -1.0
        assert path.gradient(ARM, 0.4) == (-2.5,)
        assert path.pulls(ARM, 0.4) == ()
        assert JointTravel(np.int64(0)).joint == 0

    @pytest.mark.parametrize("value", [-1, 1.0, True, "0", None])
    def test_joint_is_a_number(self, value):
        with pytest.raises(InputTypeError, match=r"^JointTravel\.joint must be the number of a joint, .*, got "):
            JointTravel(value)

    def test_ratio_is_not_zero(self):
        with pytest.raises(InputError, match=r"^JointTravel\.ratio must be other than 0, got 0\.0$"):
            JointTravel(ratio=0)
        with pytest.raises(InputError, match=r"^JointTravel\.ratio must be other than 0, got 0\.0$"):
            JointTravel(ratio=[1.0, 0.0])

    @pytest.mark.parametrize("method", ["length", "gradient"])
    def test_joint_exists(self, method):
        message = r"^JointTravel\.joint must be below the linkage's number of joints \(1\), got 2$"
        with pytest.raises(InputError, match=message):
            getattr(JointTravel(2), method)(ARM, 0.0)


class TestDisc:
    def test_sense_and_friction(self):
        plain = Disc(HUB, radius="15 mm", turn="cw")
        assert (plain.radius, plain.sense, plain.is_frictionless) == (0.015, -1.0, True)
        assert plain.tension_factors(1.0) == (1.0, 1.0)
        assert Disc(HUB, radius=0.1, turn="ccw").sense == 1.0
        rubbing = Disc(HUB, radius=0.1, turn="cw", sliding_friction=[0.0, 0.2])
        assert not rubbing.is_frictionless
        assert rubbing.tension_factors(1.0)[0] == pytest.approx([1.0, math.exp(0.2)])
        assert pickle.loads(pickle.dumps(rubbing)) == rubbing

    @pytest.mark.parametrize(
        ("fields", "error", "message"),
        [
            ({"centre": (0, 0)}, InputTypeError, r"^Disc\.centre must be a Point, got \(0, 0\)$"),
            ({"radius": 0}, InputError, r"^Disc\.radius must be > 0 m, got 0\.0$"),
            ({"radius": "3 N"}, UnitError, r"^Disc\.radius must be .*, got '3 N'"),
            ({"turn": "left"}, InputError, r"^Disc\.turn must be 'cw' or 'ccw', got 'left'$"),
            ({"turn": None}, InputError, r"^Disc\.turn must be 'cw' or 'ccw', got None$"),
            ({"bearing_friction": -0.1}, InputError, r"^Disc\.bearing_friction must be >= 0, got -0\.1$"),
            ({"bearing_radius": -0.1}, InputError, r"^Disc\.bearing_radius must be >= 0 m, got -0\.1$"),
            ({"sliding_friction": -0.1}, InputError, r"^Disc\.sliding_friction must be >= 0, got -0\.1$"),
            (
                {"bearing_friction": 0.1, "bearing_radius": 0.01, "sliding_friction": 0.2},
                InputError,
                r"^Disc\.sliding_friction must be 0 where bearing_friction is given, got 0\.2; a disc either turns",
            ),
            (
                {"bearing_friction": 0.1},
                InputError,
                r"^Disc\.bearing_radius must be > 0 m where .* is given, got 0\.0$",
            ),
        ],
    )
    def test_errors(self, fields, error, message):
        with pytest.raises(error, match=message):
            Disc(**({"centre": HUB, "radius": 0.1, "turn": "cw"} | fields))


class TestCable:
    def test_half_turn(self):
        disc = Disc(HUB, radius=0.1, turn="cw")
        cable = Cable(Point("ground", (-0.1, -1.0)), disc, Point("ground", (0.1, -2.0)))
        assert cable.discs == (disc,)
        assert cable.length(ARM, 0.3) == pytest.approx(3.0 + 0.1 * math.pi)
        assert cable.wraps(ARM, 0.3) == pytest.approx([math.pi])
        assert cable.gradient(ARM, 0.3) == (0.0,)
        assert [f.force for f in cable.pulls(ARM, 0.3)] == [
            pytest.approx((0.0, 1.0)),
            pytest.approx((0.0, -2.0)),
            pytest.approx((0.0, 1.0), abs=1e-15),
        ]

    def test_left_and_held(self):
        above, below = (Disc(Point("ground", (0.0, y)), radius=0.1, turn="cw") for y in (0.5, -0.5))
        # run to the right with the centre on its right: it clears a disc below, and is held by one above
        assert Cable(LEFT, below, RIGHT).length(ARM, 0.0) == 2.0
        assert Cable(LEFT, below, RIGHT).wraps(ARM, 0.0) == (0.0,)
        assert Cable(LEFT, above, RIGHT).wraps(ARM, 0.0)[0] > 0.9
        assert Cable(LEFT, Point("ground", (0.0, 0.5)), RIGHT).length(ARM, 0.0) == pytest.approx(
            2.0 * math.hypot(1.0, 0.5)
        )

    def test_without_discs(self):
        cable = Cable(LEFT, Point("arm", (0.4, 0.0)))
        q = np.linspace(-1.0, 1.0, 5)
        straight = Straight(LEFT, Point("arm", (0.4, 0.0)))
        assert cable.length(ARM, q) == pytest.approx(straight.length(ARM, q))
        assert cable.gradient(ARM, q)[0] == pytest.approx(straight.gradient(ARM, q)[0])
        assert cable.wraps(ARM, q) == () == cable.discs
        assert cable.friction_gradient(ARM, q) == (0.0,)

    def test_is_a_value(self):
        cable = Cable(LEFT, Disc(HUB, radius=0.1, turn="cw"), RIGHT)
        assert pickle.loads(pickle.dumps(cable)) == cable
        assert hash(cable) == hash(Cable(*cable.along))

    @pytest.mark.parametrize(
        ("along", "error", "message"),
        [
            ((), InputError, r"^Cable\.along must be at least two Points, got 0$"),
            ((LEFT,), InputError, r"^Cable\.along must be at least two Points, got 1$"),
            ((LEFT, (0, 0)), InputTypeError, r"^Cable\.along must be Points and Discs, got \(0, 0\)$"),
            ((LEFT, None, RIGHT), InputTypeError, r"^Cable\.along must be Points and Discs, got None$"),
            (
                (Disc(HUB, radius=0.1, turn="cw"), RIGHT),
                InputError,
                r"^Cable\.along must begin and end with a Point, got Disc\(.*\) as its first$",
            ),
            ((LEFT, Disc(HUB, radius=0.1, turn="cw")), InputError, r"must begin and end .*\) as its last$"),
            (
                (LEFT, *[Disc(HUB, radius=0.1, turn="cw")] * 9, RIGHT),
                InputError,
                r"^Cable\.along must have at most 8 Discs between two Points, got 9; put a guide Point between them$",
            ),
        ],
    )
    def test_errors(self, along, error, message):
        with pytest.raises(error, match=message):
            Cable(*along)


class OwnPath:
    def length(self, linkage, q):
        return 1.0 + 0.1 * q

    def gradient(self, linkage, q):
        return (0.1,)


def test_what_an_own_path_may_leave_out():
    assert friction_gradient_of(OwnPath(), ARM, 0.3) == (0.0,)
    with pytest.raises(
        InputError, match=r"^OwnPath\.pulls must be defined to know a pivot load, got a path without it; "
    ):
        pulls_of(OwnPath(), ARM, 0.3)

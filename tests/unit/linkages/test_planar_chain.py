from __future__ import annotations

import math
import pickle

import attrs
import numpy as np
import pytest

from springpoise import Body, Friction, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import Coupling, Link, PlanarChain

UPPER = Link("upper", Body(2.0, (0.16, 0)), length=0.32, carried=Body(0.1, (0, 0)))
FORE = Link("fore", Body(0.8, (0.10, 0)), length=0.20)
CHAIN = PlanarChain([UPPER, FORE])


class TestPlaces:
    def test_joints_are_relative_to_the_parent(self):
        x, y = CHAIN.position(CHAIN.tip, (math.pi / 2, -math.pi / 2))
        assert (x, y) == pytest.approx((0.20, 0.32), abs=1e-15)

    def test_a_carried_frame_stays_level_at_the_far_joint(self):
        x, y = CHAIN.position(Point("upper carried", (0.1, 0.05)), (math.pi / 2, 0.7))
        assert (x, y) == pytest.approx((0.1, 0.37), abs=1e-15)
        assert CHAIN.jacobian(Point("upper carried", (0.1, 0.05)), (0.0, 0.7)) == ((0.0, 0.32), (0.0, 0.0))

    def test_a_prismatic_joint_slides_along_its_skewed_axis(self):
        chain = PlanarChain([UPPER, Link("slide", length=0.1, joint="prismatic", skew=math.pi / 2)])
        x, y = chain.position(Point("slide", (0.0, 0.0)), (0.0, 0.05))
        assert (x, y) == pytest.approx((0.32, 0.05), abs=1e-15)
        assert chain.joint_units == ("rad", "m")

    def test_a_link_may_sit_anywhere_on_an_earlier_body(self):
        chain = PlanarChain([UPPER, attrs.evolve(FORE, pivot=Point("ground", (0.5, 0.1)))])
        assert chain.position(chain.tip, (1.0, 0.0)) == pytest.approx((0.7, 0.1), abs=1e-15)
        assert chain.jacobian(chain.tip, (1.0, 0.0)) == ((0.0, 0.0), (0.0, 0.2))

    def test_a_belt_from_the_ground_keeps_a_link_level(self):
        chain = PlanarChain([UPPER, attrs.evolve(FORE, follows={"upper": -1.0})])
        assert chain.joint_names == ("upper",)
        assert chain.frames == ("ground", "upper", "upper carried", "fore")
        q = np.linspace(-2.0, 2.0, 5)
        x, y = chain.position(Point("fore", (0.1, 0.0)), q)
        assert np.allclose(x, 0.32 * np.cos(q) + 0.1)
        assert np.allclose(y, 0.32 * np.sin(q))

    def test_a_differential_adds_two_joints_up(self):
        third = Link("hand", length=0.1, follows=Coupling({"upper": 0.5, "fore": -0.5}, offset="90 deg"))
        chain = PlanarChain([UPPER, FORE, third])
        x, y = chain.position(chain.tip, (0.0, 0.0))
        assert (x, y) == pytest.approx((0.52, 0.1), abs=1e-15)
        moves = chain.jacobian(chain.tip, (0.0, 0.0))
        # the hand stands upright and turns by half the fore joint's rate, back
        assert moves[1] == pytest.approx((-0.05, 0.2), abs=1e-15)
        assert Coupling({"upper": 1.0}, offset="50 mm").offset == 0.05

    def test_shapes(self):
        q = np.zeros((3, 4, 2))
        x, y = CHAIN.position(CHAIN.tip, q)
        assert x.shape == y.shape == (3, 4)
        assert Mechanism(CHAIN).stiffness(q).shape == (3, 4, 2, 2)
        assert Mechanism(CHAIN).stiffness((0.1, 0.2)).shape == (2, 2)


class TestParts:
    def test_masses_and_tip(self):
        assert CHAIN.mass == pytest.approx(2.9)
        assert [at.body for _, at in CHAIN.masses] == ["upper", "upper carried", "fore"]
        assert CHAIN.tip == Point("fore", (0.20, 0.0))
        assert UPPER.mass == 2.0
        assert CHAIN.pivots == ("upper", "fore")

    def test_with_and_without_a_body(self):
        body = Body(0.5, (0.1, 0.0), name="payload")
        for frame in ("upper", "upper carried", "fore"):
            loaded = CHAIN.with_body(body, frame)
            assert loaded.mass == pytest.approx(3.4)
            assert (
                loaded.masses[-1 if frame == "fore" else [m.at.body for m in loaded.masses].index(frame) + 1].mass
                == 0.5
            )
            assert loaded.without_body("payload") == CHAIN

    @pytest.mark.parametrize("frame", ["ground", "fore carried", "hand"])
    def test_with_a_body_nowhere(self, frame):
        with pytest.raises(
            InputError, match=rf"^frame must be one of 'upper', 'upper carried', 'fore', got '{frame}'$"
        ):
            CHAIN.with_body(Body(1.0, (0, 0)), frame)

    def test_equality_hash_and_pickle(self):
        again = PlanarChain([UPPER, FORE])
        assert again == CHAIN
        assert hash(again) == hash(CHAIN)
        assert pickle.loads(pickle.dumps(CHAIN)) == CHAIN
        assert PlanarChain(UPPER).chain == (UPPER,)

    def test_strings_are_read(self):
        link = Link("a", Body("2 kg", ("160 mm", 0)), length="32 cm", skew="30 deg", joint="prismatic")
        assert (link.length, link.skew) == (pytest.approx(0.32), pytest.approx(math.pi / 6))

    def test_lengths_that_scatter(self):
        lengths = np.array([[0.3], [0.32], [0.34]])
        chain = PlanarChain([attrs.evolve(UPPER, length=lengths), FORE])
        q = np.zeros((5, 2))
        assert Mechanism(chain).holding_torque(q).shape == (3, 5, 2)
        assert Mechanism(chain).holding_torque(q)[1] == pytest.approx(Mechanism(CHAIN).holding_torque(q))

    def test_friction_of_each_joint(self):
        mech = Mechanism(CHAIN, friction=[Friction(0.2), Friction(0.1)])
        assert mech.friction_band((0.0, 0.0)).tolist() == [0.2, 0.1]
        assert mech.joint_frictions == (Friction(0.2), Friction(0.1))


class TestErrors:
    @pytest.mark.parametrize(
        ("make", "error", "message"),
        [
            (
                lambda: Link("ground"),
                InputError,
                r"^Link\.name must not be 'ground' or end with ' carried', got 'ground'",
            ),
            (lambda: Link("a carried"), InputError, r"got 'a carried'; these name other bodies$"),
            (lambda: Link(""), InputTypeError, r"^Link\.name must be a name, got ''$"),
            (lambda: Link(3), InputTypeError, r"^Link\.name must be a name, got 3$"),
            (lambda: Link("a", 2.0), InputTypeError, r"^Link\.bodies must be a Body or a sequence of them, got 2\.0$"),
            (lambda: Link("a", carried="x"), InputTypeError, r"^Link\.carried must be a Body or .*, got 'x'$"),
            (lambda: Link("a", length=-0.1), InputError, r"^Link\.length must be >= 0 m, got -0\.1$"),
            (lambda: Link("a", length="3 kg"), UnitError, r"^Link\.length must be .* in m, got '3 kg'"),
            (
                lambda: Link("a", joint="ball"),
                InputError,
                r"^Link\.joint must be 'revolute' or 'prismatic', got 'ball'$",
            ),
            (lambda: Link("a", skew=90.0), InputError, r"^Link\.skew must be within two turns.*got 90; degrees\?"),
            (lambda: Link("a", pivot=(0, 0)), InputTypeError, r"^Link\.pivot must be a Point, got \(0, 0\)$"),
            (
                lambda: Link("a", follows=-1),
                InputTypeError,
                r"^Link\.follows must be a Coupling or link names.*got -1$",
            ),
            (lambda: Coupling({}), InputError, r"^Coupling\.ratios must follow at least one joint, got none$"),
            (lambda: Coupling(["ab", 3]), InputTypeError, r"^Coupling\.ratios must be link names and ratios, got "),
            (lambda: Coupling({"a": 1.0}, offset="3 kg"), UnitError, r"^Coupling\.offset must be .* in m, got '3 kg'"),
            (lambda: Coupling({"a": "3 m"}), UnitError, r"^Coupling\.ratios\['a'\] must be a .*number.*, got '3 m'"),
            (lambda: PlanarChain([]), InputError, r"^PlanarChain\.chain must be at least one Link, got none$"),
            (lambda: PlanarChain("a"), InputTypeError, r"^PlanarChain\.chain must be a sequence of Links, got 'a'$"),
            (
                lambda: PlanarChain([UPPER, 3]),
                InputTypeError,
                r"^PlanarChain\.chain must be a sequence of Links, got \[",
            ),
            (
                lambda: PlanarChain([UPPER, UPPER]),
                InputError,
                r"^PlanarChain must have bodies of different names, got 'upper' twice$",
            ),
            (
                lambda: PlanarChain([UPPER, attrs.evolve(FORE, pivot=Point("hand", (0, 0)))]),
                InputError,
                r"build each member on earlier bodies \(ground, upper, upper carried\), got 'hand', which is unknown, for 'fore'$",
            ),
            (
                lambda: PlanarChain([attrs.evolve(UPPER, pivot=Point("fore", (0, 0))), FORE]),
                InputError,
                r"on earlier bodies \(ground\), got 'fore', which comes later, for 'upper'$",
            ),
            (
                lambda: PlanarChain([attrs.evolve(UPPER, pivot=Point("ground", (0, 0, 1)))]),
                InputError,
                r"^Point\.at must be \(x, y\) in m on a PlanarChain, got \(0\.0, 0\.0, 1\.0\) for 'upper'$",
            ),
            (
                lambda: PlanarChain([UPPER, attrs.evolve(FORE, follows={"hand": 1.0})]),
                InputError,
                r"^Coupling\.ratios must follow joints that are moved by themselves \(upper\), got 'hand' for 'fore'$",
            ),
            (
                lambda: PlanarChain(
                    [UPPER, attrs.evolve(FORE, follows={"upper": 1.0}), Link("hand", follows={"fore": 1.0})]
                ),
                InputError,
                r"moved by themselves \(upper\), got 'fore' for 'hand'$",
            ),
            (
                lambda: PlanarChain([attrs.evolve(UPPER, follows={"fore": 1.0})]),
                InputError,
                r"^PlanarChain must have a joint that is moved by itself, got none$",
            ),
            (
                lambda: PlanarChain([Link("a", Body(1.0, (0, 0, 0.1)))]),
                InputError,
                r"^Body\.com must be \(x, y\) in m on a PlanarChain, got \(0\.0, 0\.0, 0\.1\) on 'a'$",
            ),
            (
                lambda: CHAIN.position(Point("hand", (0, 0)), (0.0, 0.0)),
                InputError,
                r"^Point\.body must be one of 'ground', 'upper', 'upper carried', 'fore', got 'hand'$",
            ),
            (
                lambda: CHAIN.jacobian(Point("fore", (0, 0, 0)), (0.0, 0.0)),
                InputError,
                r"^Point\.at must be \(x, y\) in m on a PlanarChain, got \(0\.0, 0\.0, 0\.0\)$",
            ),
        ],
    )
    def test_what_is_wrong_is_named(self, make, error, message):
        with pytest.raises(error, match=message):
            make()

    @pytest.mark.parametrize("q", [(0.1,), [0.1, 0.2, 0.3], np.zeros(3), np.zeros((2, 3)), np.zeros(()), 0.3])
    def test_poses_of_the_wrong_shape(self, q):
        with pytest.raises(InputError, match=r"^q must be of shape \(\.\.\., 2\) or 2 components for 2 joints, got "):
            CHAIN.position(CHAIN.tip, q)
        with pytest.raises(InputError, match=r"^q must be of shape \(\.\.\., 2\) for 2 joints, got shape"):
            Mechanism(CHAIN).holding_torque(q)

    def test_a_mount_that_does_not_fit(self):
        path = Straight(Point("ground", (0, 0.1)), Point("hand", (0.1, 0)))
        with pytest.raises(
            InputError, match=r"^Mechanism\.springs\[0\] does not fit its linkage: Point\.body must be "
        ):
            Mechanism(CHAIN, springs=SpringMount(ZeroLengthSpring(100.0), path))


def test_a_chain_has_no_loops():
    assert CHAIN.missing((0.1, 0.2)) == -math.inf
    assert CHAIN.dead_point_margin((0.1, 0.2)) == 1.0

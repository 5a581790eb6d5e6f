"""A mechanism with several joints: travel, poses, units, gravity, the springs' own weight."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    ConstantForceSpring,
    ExtensionSpring,
    Friction,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import FourBar, Link, PlanarChain
from springpoise.tape import record

G = 9.80665
CHAIN = PlanarChain([
    Link("upper", Body(2.0, (0.16, 0)), length=0.32),
    Link("slide", Body(0.8, (0.10, 0)), length=0.20, joint="prismatic"),
])  # fmt: skip
TRAVEL = (("-60 deg", "80 deg"), ("0 mm", "150 mm"))


class TestTravel:
    def test_each_joint_has_its_range_in_its_unit(self):
        mech = Mechanism(CHAIN, travel=TRAVEL)
        assert mech.travel == ((math.radians(-60), pytest.approx(math.radians(80))), (0.0, pytest.approx(0.15)))
        assert mech.travel_or_turn == mech.travel
        assert Mechanism(CHAIN, travel=np.array([[-1.0, 1.0], [0.0, 0.1]])).travel == ((-1.0, 1.0), (0.0, 0.1))
        assert attrs.evolve(mech, springs=()) == mech

    def test_none_is_a_turn_of_a_revolute_joint(self):
        mech = Mechanism(CHAIN, travel=(None, (0.0, 0.1)))
        assert mech.travel_or_turn == ((-math.pi, math.pi), (0.0, 0.1))

    def test_one_prismatic_joint(self):
        lift = PlanarChain([Link("lift", Body(2.0, (0, 0)), joint="prismatic", skew="90 deg")])
        mech = Mechanism(lift, travel=("50 mm", "0.2 m"))
        assert mech.travel == (pytest.approx(0.05), 0.2)
        assert mech.poses(4) == pytest.approx([0.05, 0.1, 0.15, 0.2])
        # a weight on a vertical slide: its force, whatever the height
        assert mech.holding_torque("60 mm") == pytest.approx(2.0 * G, rel=1e-15)
        assert mech.energy(0.1) == pytest.approx(0.2 * G)
        assert mech.equilibria().points == ()
        assert Mechanism(lift, travel=[(0.0, 0.1)]).travel == (0.0, 0.1)

    @pytest.mark.parametrize(
        ("travel", "error", "message"),
        [
            (("-60 deg", "80 deg"), InputError, r"a range for each of 2 joints, got \('-60 deg', '80 deg'\)$"),
            (((0, 1),), InputError, r"a range for each of 2 joints, got 1$"),
            (((0, 1), (0, 1), (0, 1)), InputError, r"a range for each of 2 joints, got 3$"),
            (((1, 0), (0, 1)), InputError, r"\(lower, higher\) rad, got \(1\.0, 0\.0\)$"),
            (((0, 1), (0.1, 0.1)), InputError, r"\(lower, higher\) m, got \(0\.1, 0\.1\)$"),
            (((-60, 80), (0, 1)), InputError, r"within two turns, .*, got -60; degrees\? write '-60 deg'$"),
            ((("0 m", "1 m"), (0, 1)), UnitError, r"in rad, got '0 m'"),
            (((0, 1), ("0 deg", "1 deg")), UnitError, r"in m, got '0 deg'"),
            (((0, 1), (0, 1, 2)), InputError, r"a pair in m, got 3 values"),
            ("wide", InputError, r"a range for each of 2 joints, got 'wide'$"),
        ],
    )
    def test_errors(self, travel, error, message):
        with pytest.raises(error, match=r"^Mechanism\.travel must be .*" + message):
            Mechanism(CHAIN, travel=travel)

    def test_a_prismatic_joint_has_no_turn(self):
        mech = Mechanism(CHAIN)
        message = r"^Mechanism\.travel must be given for a prismatic joint, got None$"
        for ask in (lambda: mech.travel_or_turn, lambda: mech.poses(10), mech.peak_gravity_torque):
            with pytest.raises(InputError, match=message):
                ask()
        assert mech.holding_torque((0.1, 0.05)).shape == (2,)


class TestPoses:
    def test_they_fill_the_box(self):
        mech = Mechanism(CHAIN, travel=TRAVEL)
        q = mech.poses(500)
        assert q.shape == (500, 2)
        low, high = np.array(mech.travel).T
        assert np.all((q >= low) & (q <= high))
        assert np.array_equal(q, mech.poses(500))
        assert np.array_equal(q[:100], mech.poses(100))  # more poses keep the ones before
        share = (q - low) / (high - low)
        cells = np.floor(share * 10).astype(int)
        assert len({tuple(cell) for cell in cells}) == 100  # each of 10 x 10 cells has some
        counts = np.bincount(cells[:, 0] * 10 + cells[:, 1], minlength=100)
        assert counts.max() <= 8  # 5 on average

    def test_four_joints(self):
        chain = PlanarChain([Link(f"l{i}", Body(1.0, (0.1, 0)), length=0.2) for i in range(4)])
        share = (Mechanism(chain).poses(400) + math.pi) / (2 * math.pi)
        cells = np.floor(share * 3).astype(int)
        assert len({tuple(cell) for cell in cells}) >= 78  # of 81
        assert np.max(np.abs(np.corrcoef(share.T) - np.eye(4))) < 0.2  # random points: 0.05 each

    @pytest.mark.parametrize("count", [1, 0, -3, 2.0, True, "5"])
    def test_errors(self, count):
        with pytest.raises(InputError, match=r"^count must be a whole number >= 2, got "):
            Mechanism(CHAIN, travel=TRAVEL).poses(count)

    def test_strings_by_joint(self):
        mech = Mechanism(CHAIN, travel=TRAVEL)
        expected = mech.holding_torque((math.radians(30), 0.05))
        assert mech.holding_torque(["30 deg", "50 mm"]) == pytest.approx(expected, rel=1e-14)
        assert mech.holding_torque(("30 deg", 0.05)) == pytest.approx(expected, rel=1e-14)
        with pytest.raises(UnitError, match=r"^q must be .* in m, got '50 deg'"):
            mech.holding_torque(["30 deg", "50 deg"])
        with pytest.raises(UnitError, match=r"^q must be .* in rad, got '50 mm'"):
            mech.holding_torque(["50 mm", "50 mm"])

    def test_peak_gravity_torque_has_one_for_each_joint(self):
        mech = Mechanism(CHAIN, travel=TRAVEL)
        # at 0 deg with the slide out; its own joint feels the weight's part along the axis, most at 80 deg
        assert mech.peak_gravity_torque() == pytest.approx(
            [G * (2.0 * 0.16 + 0.8 * (0.32 + 0.15 + 0.10)), 0.8 * G * math.sin(math.radians(80))], rel=0.02
        )


class TestGravity:
    def test_components(self):
        with pytest.raises(
            InputError, match=r"^Mechanism\.gravity must be 2 components in m/s\*\*2 for this linkage, got"
        ):
            Mechanism(CHAIN, gravity=(0, 0, -9.8))
        with pytest.raises(InputError, match=r"^gravity must be 2 components in m/s\*\*2 for this linkage, got 3: "):
            Mechanism(CHAIN).energy((0.1, 0.0), gravity=(0, 0, -9.8))

    def test_sideways(self):
        turned = Mechanism(CHAIN).holding_torque((0.4, 0.05), gravity=(-G, 0.0))
        assert turned == pytest.approx(Mechanism(CHAIN).holding_torque((0.4 + math.pi / 2, 0.05), gravity=(0.0, -G)))


class TestFriction:
    def test_errors(self):
        with pytest.raises(InputError, match=r"^Mechanism\.friction must be one for each of 2 joints, got 3$"):
            Mechanism(CHAIN, friction=[Friction()] * 3)
        for wrong in ([], [0.1, 0.2], 0.1):
            with pytest.raises(InputTypeError, match=r"^Mechanism\.friction must be a Friction, or a sequence"):
                Mechanism(CHAIN, friction=wrong)

    def test_a_pivot_that_rubs_feels_its_own_load(self):
        rubbing = Friction(0.1, pivot_friction=0.2, pivot_radius="5 mm")
        mech = Mechanism(CHAIN, friction=[rubbing, Friction(0.3)])
        # upright the whole weight of 2.8 kg rests on the first pivot
        assert mech.friction_band((0.3, 0.0)) == pytest.approx([0.1 + 0.2 * 0.005 * 2.8 * G, 0.3])


class TestOwnWeightOfSprings:
    def test_half_of_it_rides_on_the_arm(self):
        # closed form: k a b = g (m r + m_s b/2) for a spring of 0.3 kg, k = 872.79185 N/m
        path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
        mount = SpringMount(ZeroLengthSpring(872.79185), path, moving_mass="300 g")
        mech = Mechanism(Arm(Body(2.0, (0.35, 0))), springs=mount)
        q = np.linspace(-3.0, 3.0, 25)
        assert np.max(np.abs(mech.holding_torque(q))) < 1e-13
        assert np.ptp(mech.energy(q)) < 1e-14
        light = mech.with_springs(attrs.evolve(mount, moving_mass=0.0))
        assert np.max(np.abs(light.holding_torque(q))) == pytest.approx(0.15 * 0.08 * G, rel=1e-2)
        # two springs of half the rate and half the mass are the same
        pair = attrs.evolve(mount, spring=ZeroLengthSpring(872.79185 / 2), moving_mass=0.15, count=2)
        assert np.max(np.abs(mech.with_springs(pair).holding_torque(q))) < 1e-13

    def test_the_bearing_carries_it_too(self):
        path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
        still = SpringMount(ConstantForceSpring(1e-300), path, moving_mass=0.3)
        x, y = Mechanism(Arm(Body(2.0, (0.35, 0))), springs=still).pivot_force(0.4)
        assert (x, y) == pytest.approx((0.0, 2.15 * G))

    def test_it_needs_two_ends(self):
        over = Cable(Point("ground", (0, 0.1)), Point("arm", (0.1, 0)))
        for path, name in ((over, "Cable"), (JointTravel(), "JointTravel")):
            spring = TorsionSpring(1.0) if name == "JointTravel" else ZeroLengthSpring(1.0)
            message = rf"^SpringMount\.moving_mass must be 0 kg on a {name}, got 0\.2; put the mass that moves there into a Body$"
            with pytest.raises(InputError, match=message):
                SpringMount(spring, path, moving_mass=0.2)
        with pytest.raises(InputError, match=r"^SpringMount\.moving_mass must be >= 0 kg, got -0\.1$"):
            SpringMount(
                ZeroLengthSpring(1.0), Straight(Point("ground", (0, 0)), Point("arm", (1, 0))), moving_mass=-0.1
            )

    def test_hanging_stretch(self):
        path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
        mount = SpringMount(ExtensionSpring(500.0, free_length=0.1), path, moving_mass=0.3)
        # closed form of a uniform spring under its own weight: m g/(2 k)
        assert mount.hanging_stretch(0.2) == pytest.approx(0.3 * G / 1000.0)
        assert mount.hanging_stretch(0.05) == math.inf
        assert mount.hanging_stretch(np.array([0.05, 0.2]), gravity=1.62).tolist() == [
            math.inf,
            pytest.approx(0.000486),
        ]
        assert attrs.evolve(mount, moving_mass=0.0).hanging_stretch(0.2) == 0.0


def test_equilibria_need_one_joint():
    with pytest.raises(InputError, match=r"^Mechanism\.equilibria must have one joint, got 2$"):
        Mechanism(CHAIN, travel=TRAVEL).equilibria()


def test_equilibria_of_a_loop():
    linkage = FourBar(
        crank=Link("crank", Body(1.0, (0.1, 0)), length=0.1),
        coupler=Link("coupler", length=0.35),
        rocker=Link("rocker", length=0.3),
        second_pivot=(0.35, 0.0),
    )
    found = Mechanism(linkage).equilibria()
    # a crank alone is heavy: hanging and upright
    assert found.angles == pytest.approx((-math.pi / 2, math.pi / 2), abs=1e-12)
    assert found.stable_angles == pytest.approx((-math.pi / 2,), abs=1e-12)


def test_stiffness_can_be_recorded():
    mech = Mechanism(PlanarChain([Link("a", Body(1.0, (0.1, 0)), length=0.2), Link("b", Body(1.0, (0.1, 0.05)))]))
    program = record(lambda a, b: tuple(c for row in mech.stiffness((a, b)) for c in row), inputs=("a", "b"))
    assert np.reshape(program.replay(0.3, 0.7), (2, 2)) == pytest.approx(mech.stiffness((0.3, 0.7)), rel=1e-14)


@pytest.mark.parametrize("at", [Point("ground", (0, 0)), Point("slide carried", (0, 0)), Point("hand", (0, 0))])
def test_a_payload_on_no_moving_body(at):
    with pytest.raises(InputError, match=r"^at must be a Point on a moving body \('upper', 'slide'\), got Point\("):
        Mechanism(CHAIN).with_payload(1.0, at)


def test_a_payload_rides_at_the_tip():
    loaded = Mechanism(CHAIN).with_payload("1 kg")
    assert loaded.linkage.masses[-1].at == Point("slide", (0.20, 0.0))
    assert loaded.without_payload() == Mechanism(CHAIN)

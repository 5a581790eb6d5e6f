from __future__ import annotations

import math
import pickle
import warnings

import numpy as np
import pytest

from springpoise import Arm, Body, ConstantForceSpring, Feedforward, Mechanism, Point, SpringMount
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import Link, PlanarChain
from springpoise.paths import GuideRoller, Spool

ARM = Arm(Body(1.0, (0.1, 0.0)))
ROUND = np.linspace(0.0, 2.0 * math.pi, 400)
CIRCLE = np.stack([0.03 * np.cos(ROUND), 0.03 * np.sin(ROUND)], axis=-1)


class TestTable:
    def test_length_is_the_integral_of_the_moment_radius(self):
        # a table of cos, whose integral is sin; a cubic spline over 41 angles errs by some h^4/384 = 3e-7
        angles = np.linspace(-2.0, 2.0, 41)
        spool = Spool(angles, 0.05 * np.cos(angles), zero_angle=0.5, zero_length="0.2 m")
        q = np.linspace(-2.0, 2.0, 33)
        assert np.max(np.abs(spool.length(ARM, q) - 0.2 - 0.05 * (np.sin(q) - math.sin(0.5)))) < 2e-8
        assert spool.length(ARM, 0.5) == 0.2
        assert np.max(np.abs(spool.gradient(ARM, q)[0] - 0.05 * np.cos(q))) < 2e-7

    def test_three_angles_are_joined_by_straight_lines(self):
        spool = Spool([0.0, 1.0, 2.0], [0.02, 0.03, 0.03])
        assert spool.gradient(ARM, 0.5)[0] == pytest.approx(0.025)
        assert spool.length(ARM, 2.0) == pytest.approx(0.055)  # 0.025 + 0.03, trapezoids

    def test_outside_is_nan(self):
        spool = Spool([0.0, 1.0], [0.02, 0.03])
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            for q in (-0.01, 1.01, math.nan, math.inf):
                assert math.isnan(spool.length(ARM, q))
                assert math.isnan(spool.gradient(ARM, q)[0])
            assert np.isnan(spool.length(ARM, np.array([-0.1, 0.5, 1.1]))).tolist() == [True, False, True]
            mech = Mechanism(ARM, springs=SpringMount(ConstantForceSpring(10.0), spool))
            assert np.isnan(mech.spring_torque([-0.1, 0.5, 1.1])).tolist() == [True, False, True]

    def test_it_acts_on_its_joint_alone(self):
        chain = PlanarChain([Link("a", Body(1.0, (0.1, 0)), length=0.3), Link("b", Body(1.0, (0.1, 0)), length=0.2)])
        spool = Spool.drum(0.02, joint=1)
        assert spool.gradient(chain, (0.1, 0.2)) == (0.0, 0.02)
        assert spool.length(chain, (0.1, 0.2)) == pytest.approx(0.004)
        q = np.zeros((5, 2))
        assert spool.length(chain, q).shape == (5,)
        mech = Mechanism(chain, springs=SpringMount(ConstantForceSpring(100.0), spool))
        assert mech.spring_torque(q)[0].tolist() == [0.0, -2.0]
        fast = Feedforward(mech).compile()
        assert fast(0.1, 0.2) == pytest.approx(tuple(mech.holding_torque((0.1, 0.2))), rel=1e-14)

    def test_equality_hash_and_pickle(self):
        spool = Spool([0.0, 1.0], [0.02, 0.03])
        assert spool == Spool([0.0, 1.0], [0.02, 0.03])
        assert spool != Spool([0.0, 1.0], [0.02, 0.031])
        assert hash(spool) == hash(Spool([0.0, 1.0], [0.02, 0.03]))
        assert pickle.loads(pickle.dumps(spool)).length(ARM, 0.3) == spool.length(ARM, 0.3)


class TestProfile:
    def test_the_order_of_the_points_does_not_matter(self):
        for pull in ("cw", "ccw"):
            one = Spool.from_profile(CIRCLE, leaves=0.3, pull=pull, over=(-1.0, 1.0))
            other = Spool.from_profile(CIRCLE[::-1], leaves=0.3, pull=pull, over=(-1.0, 1.0))
            assert np.allclose(one.moment_radii, other.moment_radii, atol=1e-12)

    def test_pull_says_which_way_it_turns_the_spool(self):
        for pull, sign in (("ccw", 1.0), ("cw", -1.0)):
            spool = Spool.from_profile(CIRCLE, leaves=0.3, pull=pull, over=(-1.0, 1.0))
            mech = Mechanism(ARM, springs=SpringMount(ConstantForceSpring(100.0), spool))
            assert mech.spring_torque(0.2) == pytest.approx(sign * 3.0, abs=1e-8)

    def test_millimetres(self):
        spool = Spool.from_profile(
            [(f"{1e3 * x} mm", f"{1e3 * y} mm") for x, y in CIRCLE[::8].tolist()],
            leaves="10 deg",
            pull="cw",
            over=(0, 1),
        )
        assert spool.gradient(ARM, 0.5)[0] == pytest.approx(0.03, abs=1e-6)

    def test_an_open_line_serves_the_angles_that_it_reaches(self):
        line = CIRCLE[100:200]  # normals from 90 to 180 deg
        # leaving at 0 deg under a pull that turns counter-clockwise, the normal is at -90 deg - q
        spool = Spool.from_profile(line, leaves=0.0, pull="ccw", over=("-268 deg", "-182 deg"))
        assert np.allclose(spool.moment_radii, -0.03, atol=1e-7)
        message = r"^points must reach to where the cable leaves, got normals from 1\.5\d+ to 3\.1\d+ rad, needed "
        with pytest.raises(InputError, match=message):
            Spool.from_profile(line, leaves=0.0, pull="ccw", over=("-280 deg", "-190 deg"))
        roller = GuideRoller((0.2, 0.0))
        with pytest.raises(InputError, match=message):
            Spool.from_profile(line, leaves=roller, pull="ccw", over=(-1.0, 1.0))
        assert Spool.from_profile(line, leaves=roller, pull="ccw", over=("-260 deg", "-200 deg"))

    @pytest.mark.parametrize("way", [1, -1])
    def test_a_hollow_is_refused_with_its_place(self, way):
        dented = CIRCLE.copy()
        dented[120] *= 0.98
        number = 120 if way > 0 else 399 - 120
        x, y = dented[120]
        with pytest.raises(
            InputError, match=rf"^points must be on a convex line, got a hollow at number {number}, \({x:g}, "
        ):
            Spool.from_profile(dented[::way], leaves=0.0, pull="cw", over=(0.0, 1.0))
        assert y > 0

    def test_a_straight_stretch_is_no_convex_line(self):
        line = np.concatenate([CIRCLE[:200], [[-0.03, -0.01], [-0.03, -0.02], [-0.03, -0.03]]])
        with pytest.raises(
            InputError, match=r"^points must be on a convex line, got a hollow at number 2\d\d, \(-0\.03, "
        ):
            Spool.from_profile(line, leaves=0.0, pull="cw", over=(0.0, 1.0))


class TestErrors:
    @pytest.mark.parametrize(
        ("make", "error", "message"),
        [
            (
                lambda: Spool([0.0], [0.1]),
                InputError,
                r"^Spool\.angles must be at least two strictly increasing angles",
            ),
            (lambda: Spool([0.0, 0.0], [0.1, 0.1]), InputError, r"^Spool\.angles must be at least two strictly incr"),
            (lambda: Spool(0.3, 0.1), InputError, r"^Spool\.angles must be at least two .*, got 0\.3$"),
            (
                lambda: Spool([0.0, 1.0], [0.1]),
                InputError,
                r"^Spool\.moment_radii must be of shape \(2,\) like angles, got \(1,\)",
            ),
            (lambda: Spool([0.0, 1.0], ["3 N", "3 N"]), UnitError, r"^Spool\.moment_radii must be .* in m"),
            (lambda: Spool([0.0, math.nan], [0.1, 0.1]), InputError, r"^Spool\.angles must be .* finite"),
            (
                lambda: Spool([0.0, 1.0], [0.1, 0.1], joint=-1),
                InputTypeError,
                r"^Spool\.joint must be the number .* got -1$",
            ),
            (lambda: Spool([0.0, 1.0], [0.1, 0.1], joint=True), InputTypeError, r"^Spool\.joint must be .* got True$"),
            (
                lambda: Spool([0.0, 1.0], [0.1, 0.1], zero_angle=2.0),
                InputError,
                r"^Spool\.zero_angle must be from 0 to 1 rad like angles, got 2$",
            ),
            (
                lambda: Spool.drum(0.1, joint=2).length(ARM, 0.0),
                InputError,
                r"^Spool\.joint must be below the linkage's number of joints \(1\), got 2$",
            ),
            (lambda: Spool.drum(0.0), InputError, r"^radius must be > 0 m, got 0\.0$"),
            (lambda: Spool.drum("3 kg"), UnitError, r"^radius must be .* in m, got '3 kg'"),
            (lambda: Spool.drum(0.1, turn="left"), InputError, r"^turn must be 'cw' or 'ccw', got 'left'$"),
            (lambda: Spool.drum(0.1, turns=0), InputError, r"^turns must be > 0, got 0$"),
            (lambda: GuideRoller((0, 1), radius=-0.1), InputError, r"^GuideRoller\.radius must be >= 0 m, got -0\.1$"),
            (lambda: GuideRoller((0, 1), side=0), InputError, r"^GuideRoller\.side must be \+1 or -1, got 0$"),
            (
                lambda: _cam(CIRCLE[:7]),
                InputError,
                r"^points must be of shape \(n, 2\) in m with n >= 8, got shape \(7, 2\)$",
            ),
            (
                lambda: _cam(ROUND),
                InputError,
                r"^points must be of shape \(n, 2\) in m with n >= 8, got shape \(400,\)$",
            ),
            (
                lambda: _cam(np.repeat(CIRCLE, 2, axis=0)),
                InputError,
                r"^points must be distinct, got the same point twice at number 0$",
            ),
            (lambda: _cam(CIRCLE, pull="up"), InputError, r"^pull must be 'cw' or 'ccw', got 'up'$"),
            (
                lambda: _cam(CIRCLE, over=(1.0, 0.0)),
                InputError,
                r"^over must be \(lower, higher\) rad, got \(1\.0, 0\.0\)$",
            ),
            (lambda: _cam(CIRCLE, over=(0, 90)), InputError, r"^over must be within two turns, .*degrees\?"),
            (lambda: _cam(CIRCLE, leaves=90.0), InputError, r"^leaves must be within two turns, .*degrees\?"),
            (
                lambda: _cam(CIRCLE, leaves=GuideRoller((0.02, 0.0))),
                InputError,
                r"^leaves must be a roller that the cable reaches from the spool, got one at 0\.02 m with an arm of 0\.03",
            ),
        ],
    )
    def test_what_is_wrong_is_named(self, make, error, message):
        with pytest.raises(error, match=message):
            make()

    def test_a_table_does_not_know_where_its_cable_pulls(self):
        mech = Mechanism(ARM, springs=SpringMount(ConstantForceSpring(10.0), Spool.drum(0.03)))
        with pytest.raises(
            InputError, match=r"^Spool\.pulls must know where the cable leaves .*; use a Cable round a Disc"
        ):
            mech.pivot_load(0.1)


def _cam(points, leaves=0.0, pull="cw", over=(0.0, 1.0)):
    return Spool.from_profile(points, leaves=leaves, pull=pull, over=over)


def test_the_tip_of_an_arm_is_no_spool():
    with pytest.raises(InputTypeError, match=r"^SpringMount\.path must have length and gradient methods, got Point\("):
        SpringMount(ConstantForceSpring(10.0), Point("arm", (0, 0)))

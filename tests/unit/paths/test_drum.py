from __future__ import annotations

import math
import pickle

import numpy as np
import pytest

from springpoise import Arm, Body, Cable, ConstantForceSpring, Disc, Feedforward, Mechanism, Point, SpringMount
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import Link, PlanarChain
from springpoise.paths.drum import Drum
from springpoise.testing import check_path

ARM = Arm(Body(1.0, (0.1, 0.0)))
BELOW = Point("ground", (0.0, -0.6))
HUB = Point("arm", (0.0, 0.0))


def drum(turn="ccw", tie=1.9, radius=0.03):
    return Drum(HUB, radius=radius, turn=turn, tie=tie)


class TestDrumOnThePivot:
    def test_straight_run_and_arc(self):
        # from below, the run meets the drum at an angle acos(r/d) from the way down; the tie lies 1.9 rad above it
        arrives = -math.pi / 2 + math.acos(0.03 / 0.6)
        cable = Cable(BELOW, drum())
        assert cable.wraps(ARM, 0.0)[0] == pytest.approx(1.9 - arrives, abs=1e-14)
        expected = math.sqrt(0.36 - 0.0009) + 0.03 * (1.9 - arrives)
        assert cable.length(ARM, 0.0) == pytest.approx(expected, abs=1e-15)
        assert cable.gradient(ARM, 0.2)[0] == pytest.approx(0.03, abs=1e-16)

    def test_unwound_past_the_tie_it_runs_straight(self):
        cable = Cable(BELOW, drum())
        q = -2.2
        x, y = ARM.position(cable.along[1].tie_point, q)
        assert cable.wraps(ARM, q) == (0.0,)
        assert cable.length(ARM, q) == pytest.approx(math.hypot(x, y + 0.6), abs=1e-15)
        # the lever arm of a straight cable
        assert cable.gradient(ARM, q)[0] == pytest.approx(x * 0.6 / math.hypot(x, y + 0.6), abs=1e-15)

    def test_from_the_other_end(self):
        one, other = Cable(BELOW, drum("ccw")), Cable(drum("cw"), BELOW)
        q = np.linspace(-2.5, 2.0, 31)
        assert np.allclose(one.length(ARM, q), other.length(ARM, q), atol=1e-15)
        assert np.allclose(one.gradient(ARM, q)[0], other.gradient(ARM, q)[0], atol=1e-15)
        assert np.allclose(one.wraps(ARM, q)[0], other.wraps(ARM, q)[0], atol=1e-14)

    def test_its_pull_turns_the_arm_and_loads_the_bearing(self):
        mech = Mechanism(Arm(Body(0.0, (0, 0))), springs=SpringMount(ConstantForceSpring(100.0), Cable(BELOW, drum())))
        assert mech.spring_torque(0.2) == pytest.approx(-3.0, abs=1e-13)
        # the bearing holds against the cable's 100 N downwards, nearly
        assert mech.pivot_load(0.2) == pytest.approx(100.0, abs=1e-12)
        x, y = mech.pivot_force(0.2)
        assert (x, y) == pytest.approx((100 * 0.05, 100 * math.sqrt(1 - 0.05**2)), abs=1e-12)

    def test_pulls_act_at_centre_and_tie(self):
        pulls = Cable(BELOW, drum()).pulls(ARM, 0.2)
        assert [at.body for at, _ in pulls] == ["ground", "arm", "arm"]
        assert np.allclose(np.sum([force for _, force in pulls], axis=0), 0.0, atol=1e-15)

    def test_lengths_stay_continuous_where_it_unwinds(self):
        q = np.linspace(-2.6, 2.0, 4601)
        length, gradient = Cable(BELOW, drum()).length(ARM, q), Cable(BELOW, drum()).gradient(ARM, q)[0]
        assert np.max(np.abs(np.diff(length))) < 1.01 * 0.03 * (q[1] - q[0])
        assert np.max(np.abs(np.diff(gradient))) < 0.05 * (q[1] - q[0])


class TestBetweenBodies:
    CHAIN = PlanarChain([Link("a", Body(1.0, (0.1, 0)), length=0.4), Link("b", Body(1.0, (0.1, 0)), length=0.3)])

    def test_two_drums_and_a_disc(self):
        cable = Cable(
            Drum(Point("a", (0.1, 0.05)), radius=0.02, turn="cw", tie=2.0),
            Disc(Point("ground", (0.3, 0.3)), radius=0.015, turn="cw"),
            Drum(Point("b", (0.1, 0.0)), radius=0.03, turn="cw", tie=-2.0),
        )
        q = np.array([[0.2, 0.3], [0.3, 0.5], [0.1, 0.2], [0.25, 0.45]])
        assert len(cable.wraps(self.CHAIN, q)) == 3
        assert len(cable.discs) == 1
        report = check_path(cable, self.CHAIN, over=q, tolerance=1e-12)
        assert {i.name for i in report.identities} >= {"gradient is the slope of length", "pulls add up to nothing"}

    def test_a_guide_between(self):
        cable = Cable(BELOW, Point("a", (0.2, 0.02)), Drum(Point("b", (0.1, 0.0)), radius=0.03, turn="ccw", tie=2.0))
        check_path(cable, self.CHAIN, over=[(-0.5, 0.5), (-0.5, 0.5)], tolerance=1e-12)

    def test_compiled(self):
        cable = Cable(BELOW, Drum(Point("b", (0.1, 0.0)), radius=0.03, turn="ccw", tie=2.0))
        mech = Mechanism(self.CHAIN, springs=SpringMount(ConstantForceSpring(100.0), cable))
        assert Feedforward(mech).compile()(0.3, 0.2) == pytest.approx(tuple(mech.holding_torque((0.3, 0.2))), rel=1e-13)

    def test_friction_is_that_of_the_discs_alone(self):
        disc = Disc(Point("ground", (0.3, 0.3)), radius=0.015, turn="cw", sliding_friction=0.1)
        end = Drum(Point("b", (0.1, 0.0)), radius=0.03, turn="cw", tie=-2.0)
        cable = Cable(Point("ground", (-0.2, 0.0)), disc, end)
        wrap, _ = cable.wraps(self.CHAIN, (0.2, 0.3))
        band = cable.friction_gradient(self.CHAIN, (0.2, 0.3))
        # behind the disc the tension is exp(±μφ) of the spring's; the disc stands, so that only that run works
        rates = cable.gradient(self.CHAIN, (0.2, 0.3))
        for width, rate in zip(band, rates, strict=True):
            assert width == pytest.approx(abs(rate) * math.sinh(0.1 * wrap), rel=1e-12)
        frictionless = Cable(BELOW, end)
        assert frictionless.friction_gradient(self.CHAIN, (0.2, 0.3)) == (0.0, 0.0)


def test_strings_equality_and_pickle():
    one = Drum(HUB, radius="30 mm", turn="cw", tie="90 deg")
    assert (one.radius, one.tie) == (0.03, pytest.approx(math.pi / 2))
    assert one == Drum(HUB, radius=0.03, turn="cw", tie="90 deg")
    assert pickle.loads(pickle.dumps(Cable(BELOW, one))) == Cable(BELOW, one)
    assert one.tie_point.at == pytest.approx((0.0, 0.03), abs=1e-15)


@pytest.mark.parametrize(
    ("make", "error", "message"),
    [
        (
            lambda: Drum((0, 0), radius=0.1, turn="cw", tie=0.0),
            InputTypeError,
            r"^Drum\.centre must be a Point, got \(0, 0\)$",
        ),
        (lambda: drum(radius=0.0), InputError, r"^Drum\.radius must be > 0 m, got 0\.0$"),
        (lambda: drum(radius="3 N"), UnitError, r"^Drum\.radius must be .* in m, got '3 N'"),
        (lambda: drum(turn="left"), InputError, r"^Drum\.turn must be 'cw' or 'ccw', got 'left'$"),
        (lambda: drum(tie=90.0), InputError, r"^Drum\.tie must be within two turns, .*got 90; degrees\?"),
        (
            lambda: Cable(BELOW, drum(), Point("ground", (1, 0))),
            InputError,
            r"^Cable\.along must have a Drum as its first or last only, got one between others$",
        ),
        (lambda: Cable(drum()), InputError, r"^Cable\.along must be at least two Points, got 1$"),
    ],
)
def test_errors(make, error, message):
    with pytest.raises(error, match=message):
        make()

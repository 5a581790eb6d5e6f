from __future__ import annotations

import math
import pickle

import array_api_strict
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
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
from springpoise.mechanism import SpringState

ARM = Arm(Body(2.0, (0.35, 0.0)), length=0.5)
PATH = Straight(Point("ground", (0.0, 0.1)), Point("arm", (0.08, 0.0)))
MOUNT = SpringMount(ZeroLengthSpring(800.0), PATH)
METHODS = (
    "gravity_torque",
    "spring_torque",
    "holding_torque",
    "stiffness",
    "friction_band",
    "energy",
    "spring_energy",
    "pivot_load",
    "pivot_force",
)


class OwnSpring:
    """Just the three methods."""

    def load(self, x):
        return 500.0 * x * x

    def stiffness(self, x):
        return 1000.0 * x

    def energy(self, x):
        return 500.0 * x * x * x / 3.0


class NumpySpring:
    """The same, slack below 0.05 m, written in plain NumPy."""

    def load(self, x):
        return np.where(x > 0.05, 500.0 * np.square(np.maximum(x - 0.05, 0.0)), 0.0)

    def stiffness(self, x):
        return 1000.0 * np.maximum(x - 0.05, 0.0)

    def energy(self, x):
        return 500.0 * np.maximum(x - 0.05, 0.0) ** 3.0 / 3.0


class OwnPath:
    def length(self, linkage, q):
        return 0.3 + 0.1 * q

    def gradient(self, linkage, q):
        return (0.1 + 0.0 * q,)


class TwoJoints:
    """Two bars in a row, angles relative: a linkage with nothing but what the protocol asks for."""

    joint_count, frames = 2, ("ground", "one", "two")
    masses = ()

    def position(self, point, q):
        a, b = q[0] if isinstance(q, tuple) else q[..., 0], q[1] if isinstance(q, tuple) else q[..., 1]
        x, y = point.at
        if point.body == "ground":
            return x, y
        xp = (
            np
            if isinstance(a, np.ndarray | np.generic)
            else (math if isinstance(a, float) else a.__array_namespace__())
        )
        if point.body == "one":
            return x * xp.cos(a) - y * xp.sin(a), x * xp.sin(a) + y * xp.cos(a)
        c, s = xp.cos(a + b), xp.sin(a + b)
        return 0.3 * xp.cos(a) + x * c - y * s, 0.3 * xp.sin(a) + x * s + y * c

    def jacobian(self, point, q):
        x, y = self.position(point, q)
        if point.body == "ground":
            return ((0.0, 0.0), (0.0, 0.0))
        if point.body == "one":
            return ((-y, x), (0.0, 0.0))
        ex, ey = self.position(Point("one", (0.3, 0.0)), q)
        return ((-y, x), (-(y - ey), x - ex))


TWO = Mechanism(
    TwoJoints(),
    springs=SpringMount(ZeroLengthSpring(300.0), Straight(Point("ground", (0.1, 0.4)), Point("two", (0.2, 0.05)))),
)


class TestOwnParts:
    @pytest.mark.parametrize("spring", [OwnSpring(), NumpySpring()])
    def test_own_springs(self, spring):
        mech = Mechanism(ARM, springs=SpringMount(spring, PATH, count=2))
        q = np.linspace(-2.0, 2.0, 9)
        x = PATH.length(ARM, q)
        assert mech.spring_torque(q) == pytest.approx(-2.0 * spring.load(x) * PATH.gradient(ARM, q)[0])
        assert mech.spring_energy(q) == pytest.approx(2.0 * spring.energy(x))
        h = 1e-5
        slope = (mech.holding_torque(q + h) - mech.holding_torque(q - h)) / (2.0 * h)
        assert mech.stiffness(q) == pytest.approx(slope, abs=1e-5)
        for method in METHODS[:-1]:
            assert type(getattr(mech, method)(0.3)) is float
        (state,) = mech.spring_states(0.3)
        assert [type(v) for v in (state.length, state.load, state.energy, state.margin)] == [float] * 4
        assert state.margin == math.inf
        assert mech.friction_band(0.3) == 0.0

    def test_own_path(self):
        mech = Mechanism(ARM, springs=SpringMount(OwnSpring(), OwnPath()))
        assert mech.spring_torque(0.5) == pytest.approx(-500.0 * 0.35**2 * 0.1)
        assert mech.stiffness(0.0, gravity=(0, 0)) == pytest.approx(1000.0 * 0.3 * 0.01)
        with pytest.raises(
            InputError, match=r"^OwnPath\.pulls must be defined to know a pivot load, got a path without it"
        ):
            mech.pivot_load(0.3)
        assert mech.friction_band(0.3) == 0.0


class TestTwoJoints:
    Q = np.array([[0.2, -0.4], [1.0, 0.3], [0.0, 2.0]])

    def test_torque_is_minus_the_slope_of_the_energy(self):
        h = 1e-6
        for joint in range(2):
            step = np.eye(2)[joint] * h
            slope = (TWO.energy(self.Q + step) - TWO.energy(self.Q - step)) / (2.0 * h)
            assert TWO.spring_torque(self.Q)[:, joint] == pytest.approx(-slope, abs=1e-6)
            slope = (TWO.holding_torque(self.Q + step) - TWO.holding_torque(self.Q - step)) / (2.0 * h)
            assert TWO.stiffness(self.Q)[:, :, joint] == pytest.approx(slope, abs=1e-5)

    @pytest.mark.parametrize("count", [1, 2, 3, 5])
    def test_bad_poses(self, count):
        q = np.resize(self.Q, (count, 2))
        q[0, 1] = math.nan
        for method, axes in (("holding_torque", 1), ("stiffness", 2), ("energy", 0), ("gravity_torque", 1)):
            values = getattr(TWO, method)(q)
            assert values.shape == (count,) + (2,) * axes
            assert np.all(np.isnan(values[0])) and not np.any(np.isnan(values[1:]))

    def test_one_pose(self):
        assert TWO.holding_torque([0.2, -0.4]) == pytest.approx(TWO.holding_torque(self.Q)[0])
        assert TWO.stiffness([0.2, -0.4]).shape == (2, 2)
        assert TWO.spring_states([0.2, -0.4])[0].length == pytest.approx(TWO.spring_states(self.Q)[0].length[0])

    @pytest.mark.parametrize(
        ("q", "shape"), [(0.3, r"\(\)"), ([0.1, 0.2, 0.3], r"\(3,\)"), (np.zeros((2, 1)), r"\(2, 1\)")]
    )
    def test_shape(self, q, shape):
        with pytest.raises(InputError, match=rf"^q must be of shape \(\.\.\., 2\) for 2 joints, got shape {shape}$"):
            TWO.holding_torque(q)

    def test_no_equilibria(self):
        with pytest.raises(InputError, match=r"^Mechanism\.equilibria must have one joint, got 2$"):
            TWO.equilibria()


class TestShapes:
    def test_no_springs(self):
        mech = Mechanism(ARM)
        assert mech.spring_torque(0.3) == 0.0 and type(mech.spring_torque(0.3)) is float
        assert mech.spring_torque(np.zeros((2, 3))).shape == (2, 3)
        assert mech.spring_energy([0.1, 0.2]).tolist() == [0.0, 0.0]
        assert mech.spring_states(0.3) == ()

    def test_other_arrays(self):
        rod = Disc(Point("ground", (-0.015, 0.2)), radius=0.015, turn="cw", sliding_friction=0.1)
        cable = Cable(Point("ground", (-0.03, -0.25)), rod, Point("arm", (0.12, 0.0)))
        mech = Mechanism(
            ARM,
            springs=[
                MOUNT,
                SpringMount(ExtensionSpring(500.0, free_length=0.1), cable),
                SpringMount(TorsionSpring(2.0), JointTravel()),
            ],
            friction=Friction(0.1, pivot_friction=0.1, pivot_radius=0.01),
        )
        q = np.array([-1.0, 0.2, math.nan, 1.1, math.inf])
        foreign = array_api_strict.asarray(q)
        for method in METHODS[:-1]:
            result = getattr(mech, method)(foreign)
            assert type(result) is type(foreign)
            np.testing.assert_allclose(np.asarray(result), getattr(mech, method)(q), rtol=1e-13)
        bare = Mechanism(ARM).spring_torque(foreign)
        assert type(bare) is type(foreign) and np.isnan(np.asarray(bare)).tolist() == (~np.isfinite(q)).tolist()

    def test_states(self):
        mech = Mechanism(
            ARM, springs=[MOUNT, SpringMount(ZeroLengthSpring(100.0), PATH, name="upper", rigid_length=0.01)]
        )
        first, second = mech.spring_states(0.0)
        assert isinstance(first, SpringState)
        assert (first.name, second.name) == ("spring 1", "upper")
        assert first.length - second.length == pytest.approx(0.01)
        assert first.margin == first.length


class TestPayloadAndParts:
    def test_payload(self):
        mech = Mechanism(ARM).with_payload("1.5 kg")
        assert mech.gravity_torque(0.0) == pytest.approx(-9.80665 * (0.7 + 0.75))
        assert mech.linkage.bodies[-1].name == "payload"

    @pytest.mark.parametrize(
        ("mass", "at", "error", "message"),
        [
            (-1, None, InputError, r"^mass must be >= 0 kg, got -1\.0$"),
            ("1 N", None, UnitError, r"^mass must be .*, got '1 N'"),
            (1, (0, 0), InputTypeError, r"^at must be a Point on a moving body, got \(0, 0\)$"),
            (
                1,
                Point("ground", (0, 0)),
                InputError,
                r"^at must be a Point on a moving body \('arm'\), got Point\(body='ground'",
            ),
            (
                1,
                Point("fore", (0, 0)),
                InputError,
                r"^at must be a Point on a moving body \('arm'\), got Point\(body='fore'",
            ),
        ],
    )
    def test_payload_errors(self, mass, at, error, message):
        with pytest.raises(error, match=message):
            Mechanism(ARM).with_payload(mass, at)

    def test_payload_needs_a_tip(self):
        with pytest.raises(InputError, match=r"^Arm\.length must be given to know the tip, got None"):
            Mechanism(Arm(Body(1, (0.3, 0)))).with_payload(1.0)

    def test_with_springs(self):
        mech = Mechanism(ARM, springs=[MOUNT, MOUNT])
        assert len(mech.with_springs(MOUNT).springs) == 1 and mech.with_springs([]).springs == ()
        assert pickle.loads(pickle.dumps(mech)) == mech

    def test_poses_and_travel(self):
        assert Mechanism(ARM).travel_or_turn == (-math.pi, math.pi)
        assert Mechanism(ARM, travel=("-10 deg", "10 deg")).poses(3) == pytest.approx(
            [-math.pi / 18, 0.0, math.pi / 18]
        )

    @pytest.mark.parametrize("count", [1, 0, 2.0, True, "3", None])
    def test_pose_count(self, count):
        with pytest.raises(InputError, match=r"^count must be a whole number >= 2, got "):
            Mechanism(ARM).poses(count)

    def test_equilibria_of_scattered_builds(self):
        mech = Mechanism(Arm(Body(np.array([[1.0], [2.0]]), (0.3, 0.0))))
        with pytest.raises(
            InputError, match=r"^Mechanism\.equilibria must be of one mechanism, got .* \(shape \(2, 721\)\)$"
        ):
            mech.equilibria()

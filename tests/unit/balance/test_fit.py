"""Fits: branches, messages, how results print, and springs of one's own."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    CompressionSpring,
    ConstantForceSpring,
    Disc,
    ExtensionSpring,
    JointTravel,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
    balance,
)
from springpoise.errors import InputError, InputTypeError, NoSolution
from springpoise.springs import ScaledSpring
from springpoise.springs.protocol import LoadTerms

ARM = Arm(Body(2.0, (0.35, 0.0)))
G = 2.0 * 9.80665 * 0.35
ABOVE = Straight(Point("ground", (0.0, 0.10)), Point("arm", (0.08, 0.0)))
BELOW = Straight(Point("ground", (0.0, -0.10)), Point("arm", (0.08, 0.0)))
COIL = ExtensionSpring(1000.0, free_length=0.02)


def _mech(*mounts, **options):
    return Mechanism(ARM, springs=mounts, **{"travel": (-1.0, 1.0), **options})


class Quadratic:
    """A spring of one's own: three methods, written over NumPy."""

    def load(self, x):
        return np.maximum(x, 0.0) ** 2

    def stiffness(self, x):
        return 2.0 * np.maximum(x, 0.0)

    def energy(self, x):
        return np.maximum(x, 0.0) ** 3 / 3.0


class Branching:
    """A spring of one's own that only floats can use."""

    def load(self, x):
        return 100.0 * x if x > 0 else 0.0

    def stiffness(self, x):
        return 100.0 if x > 0 else 0.0

    def energy(self, x):
        return 50.0 * x * x if x > 0 else 0.0


class EitherWay(Quadratic):
    """One whose strength may be chosen, also negative."""

    def __init__(self, rate=1.0):
        self.rate = rate

    def load(self, x):
        return self.rate * x

    def stiffness(self, x):
        return self.rate + 0.0 * x

    def energy(self, x):
        return 0.5 * self.rate * x * x

    def load_terms(self, x, *, preload):
        return LoadTerms(0.0 * x, (x,), (True,))

    def tuned(self, amounts, *, preload):
        return EitherWay(*amounts)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"norm": "max"}, "norm must be 'minimax' or 'rms', got 'max'"),
        ({"preload": True}, "preload must be 'spring', 'mount' or 'none', got True"),
        ({"fixed": "lift"}, r"fixed must name mounts of the mechanism \(main, spring 2\), got 'lift'"),
        ({"fixed": [2]}, r"fixed must name mounts of the mechanism \(main, spring 2\), got 2"),
        ({"fixed": [True]}, r"fixed must name mounts of the mechanism \(main, spring 2\), got True"),
        ({"fixed": [0, "spring 2"]}, "mechanism must have a spring to fit, got 2 mounts of which 2 stay fixed"),
        ({"preload": "mount"}, r"preload must be .* where a mount holds a TorsionSpring \(spring 2\), got 'mount'"),
        ({"over": []}, "over must be at least one pose"),
        ({"gravity": (0.0, math.nan)}, "gravity must be"),
    ],
)  # fmt: skip
def test_wrong_values(options, message):
    mech = _mech(SpringMount(COIL, ABOVE, name="main"), SpringMount(TorsionSpring(1.0), JointTravel()))
    with pytest.raises(InputError, match=message):
        balance.fit_springs(mech, **options)


def test_wrong_mechanisms():
    with pytest.raises(InputTypeError, match="mechanism must be a Mechanism, got Arm"):
        balance.fit_springs(ARM)
    with pytest.raises(InputError, match="got 0 mounts of which 0 stay fixed"):
        balance.fit_springs(_mech())
    with pytest.raises(InputError, match=r"fixed must name mounts of the mechanism \(it has none\), got 0"):
        balance.fit_springs(_mech(), fixed=0)
    builds = Mechanism(Arm(Body(np.array([[1.0], [2.0]]), (0.35, 0.0))), springs=SpringMount(COIL, ABOVE))
    with pytest.raises(InputError, match="got fields that are arrays"):
        balance.fit_springs(builds)


def test_a_path_that_is_nowhere_in_some_pose():
    inside = Cable(
        Point("ground", (-0.3, 0.3)), Disc(Point("ground", (0, 0.06)), radius=0.03, turn="cw"), Point("arm", (0.08, 0))
    )
    mech = _mech(SpringMount(COIL, inside), travel=(0.0, 1.5))
    with pytest.raises(
        InputError, match=r"path\.length must be finite over the poses, got NaN at .* deg; is an end of a cable"
    ):
        balance.fit_springs(mech)


@pytest.mark.parametrize("norm", ["minimax", "rms"])
def test_an_ideal_spring_comes_out_exact(norm):
    mech = _mech(SpringMount(ZeroLengthSpring(1.0), ABOVE, count=2, name="pair"), travel=None)
    fit = balance.fit_springs(mech, norm=norm)
    assert fit.mechanism.springs[0].spring.rate == pytest.approx(858.081875 / 2, rel=1e-9)
    assert fit.residual.worst < 1e-9 * G
    assert fit.equal_poses == ()
    assert fit.require() is fit
    assert re.search(r"pair +2 x ZeroLengthSpring: rate 429.0 N/m\n?", str(fit))


def test_an_extension_spring_is_given_all_the_tension_that_an_ideal_one_needs():
    fit = balance.fit_springs(_mech(SpringMount(ExtensionSpring(1.0, free_length=0.015, longest=0.3), ABOVE)))
    spring = fit.mechanism.springs[0].spring
    assert spring.effective_free_length == pytest.approx(0.0, abs=1e-9)
    assert spring.rate == pytest.approx(858.081875, rel=1e-6)
    assert (spring.free_length, spring.longest) == (0.015, 0.3)


def test_what_a_minimax_fit_prints():
    fit = balance.fit_springs(_mech(SpringMount(COIL, ABOVE)), preload="none")
    assert fit.settled and fit.left_out == ()
    assert 2 <= len(fit.equal_poses) <= 8
    left = np.abs(fit.mechanism.holding_torque(np.array(fit.equal_poses)))
    np.testing.assert_allclose(left, fit.residual.worst, rtol=1e-6)
    text = str(fit)
    assert text.startswith("spring fit (minimax)\n")
    assert "no other rates and preloads have a smaller worst residual at these mounts and poses" in text
    assert re.search(r"spring 1 +ExtensionSpring: rate \d+ N/m, initial tension 0 N\n", text)
    assert re.search(r"worst at +-?[\d.]+ deg, ", text)
    assert "smaller rms residual" in balance.fit_springs(_mech(SpringMount(COIL, ABOVE)), norm="rms").status


def test_springs_that_only_harm_are_left_out():
    mech = _mech(SpringMount(COIL, BELOW, name="low"), SpringMount(COIL, ABOVE, name="high"))
    fit = balance.fit_springs(mech)
    assert fit.left_out == ("low",)
    assert [m.name for m in fit.mechanism.springs] == ["high"]
    assert re.search(r"low +best left out", str(fit))

    fit = balance.fit_springs(_mech(SpringMount(COIL, BELOW)), norm="rms")
    assert not fit.success and fit.mechanism.springs == ()
    assert fit.status == "no spring at these mounts makes the residual smaller"
    with pytest.raises(NoSolution, match=r"no spring at these mounts makes the residual smaller; worst 6.865 N\*m"):
        fit.require()


def test_present_rates_do_not_matter():
    for rate in (1e-9, 1.0, 1e12):
        fit = balance.fit_springs(_mech(SpringMount(ExtensionSpring(rate, free_length=0.02), ABOVE)), preload="none")
        assert fit.left_out == ()
        assert 1000.0 < fit.mechanism.springs[0].spring.rate < 1200.0


def test_fixed_springs_stay_and_count():
    held = SpringMount(ZeroLengthSpring(400.0), ABOVE, name="held")
    fit = balance.fit_springs(_mech(held, SpringMount(ZeroLengthSpring(1.0), ABOVE)), fixed="held")
    assert fit.mechanism.springs[0] == held
    assert fit.mechanism.springs[1].spring.rate == pytest.approx(458.081875, rel=1e-9)
    again = balance.fit_springs(_mech(held, SpringMount(ZeroLengthSpring(1.0), ABOVE)), fixed=0)
    assert again.mechanism == fit.mechanism


def test_gravity_goes_with_the_mechanism():
    fit = balance.fit_springs(_mech(SpringMount(COIL, ABOVE)), gravity=(0.0, "-1.62 m/s**2"))
    assert fit.mechanism.gravity == (0.0, -1.62)
    assert fit.residual == balance.residual(fit.mechanism)


def test_a_tension_that_stays_comes_with_its_spring_or_not_at_all():
    strong = ExtensionSpring(1000.0, free_length=0.02, initial_tension=5000.0)
    fit = balance.fit_springs(_mech(SpringMount(strong, ABOVE)), preload="none")
    assert fit.left_out == ("spring 1",)
    two = _mech(SpringMount(strong, ABOVE), SpringMount(COIL, ABOVE))
    alone = balance.fit_springs(_mech(SpringMount(COIL, ABOVE)), preload="none")
    both = balance.fit_springs(two, preload="none")
    assert both.left_out == ("spring 1",)
    assert both.residual.worst == pytest.approx(alone.residual.worst, rel=1e-9)
    some = ExtensionSpring(1000.0, free_length=0.02, initial_tension=30.0)
    fit = balance.fit_springs(_mech(SpringMount(some, ABOVE)), preload="none")
    assert fit.mechanism.springs[0].spring.initial_tension == 30.0
    assert fit.residual.worst < alone.residual.worst


def test_a_torsion_spring_that_ought_to_be_softer_than_can_be():
    """On this side the load falls with the angle: the best is nearly a constant torque, wound two turns ahead."""
    mech = _mech(SpringMount(TorsionSpring(1.0), JointTravel()), travel=(-1.5, 0.0))
    for norm in ("minimax", "rms"):
        fit = balance.fit_springs(mech, norm=norm)
        spring = fit.mechanism.springs[0].spring
        assert spring.rate > 0 and spring.free_angle == pytest.approx(4 * math.pi - 1.5)
        assert fit.residual.worst < 0.65 * G
        assert re.search(r"TorsionSpring: rate 0.\d+ N\*m/rad, free angle 11.07 rad", str(fit))


def test_a_mirrored_arm_has_the_mirrored_torsion_spring():
    """Mirrored at the vertical, q goes to pi - q: the same rate, and the free angle likewise."""
    right = balance.fit_springs(_mech(SpringMount(TorsionSpring(1.0), JointTravel()), travel=(-1.0, 1.0)))
    left = balance.fit_springs(
        _mech(SpringMount(TorsionSpring(1.0), JointTravel()), travel=(math.pi - 1.0, math.pi + 1.0))
    )
    here, there = (fit.mechanism.springs[0].spring for fit in (right, left))
    assert there.rate == pytest.approx(here.rate, rel=1e-9)
    assert there.free_angle == pytest.approx(math.pi - here.free_angle, rel=1e-9)


def test_a_constant_force_spring():
    fit = balance.fit_springs(_mech(SpringMount(ConstantForceSpring(1.0), ABOVE)))
    assert fit.mechanism.springs[0].spring.pull > 50.0
    assert re.search(r"ConstantForceSpring: pull [\d.]+ N", str(fit))


@pytest.mark.parametrize("rigid", [0.0, 0.04, 0.5])
def test_the_cut_length_does_not_depend_on_where_it_starts(rigid):
    fit = balance.fit_springs(_mech(SpringMount(COIL, ABOVE, rigid_length=rigid)), preload="mount")
    assert fit.success
    assert fit.mechanism.springs[0].rigid_length == pytest.approx(0.0, abs=1e-9)


def test_a_compression_spring_under_the_arm():
    spring = CompressionSpring(1.0, free_length=0.30, solid_length=0.05)
    path = Straight(Point("ground", (0.0, -0.20)), Point("arm", (0.10, 0.0)))
    fit = balance.fit_springs(_mech(SpringMount(spring, path)), preload="mount")
    assert fit.success
    mount = fit.mechanism.springs[0]
    assert re.search(r"CompressionSpring: rate [\d.]+ N/m, rigid length [\d.]+ m", str(fit))
    length = mount.spring_length(ARM, fit.mechanism.poses())
    assert length.min() >= 0.05 - 1e-12
    assert fit.residual.worst < 0.51 * G


def test_a_spring_of_ones_own_is_sized_as_a_whole():
    fit = balance.fit_springs(_mech(SpringMount(Quadratic(), ABOVE)))
    spring = fit.mechanism.springs[0].spring
    assert isinstance(spring, ScaledSpring) and isinstance(spring.spring, Quadratic)
    factors = np.linspace(0.5, 2.0, 301) * spring.factor
    q = fit.mechanism.poses(181)
    left = [np.max(np.abs(_mech(SpringMount(ScaledSpring(Quadratic(), k), ABOVE)).holding_torque(q))) for k in factors]
    assert fit.residual.worst <= min(left) * (1 + 1e-9)
    assert re.search(r"spring 1 +\d+ times Quadratic", str(fit))
    again = balance.fit_springs(fit.mechanism)
    assert again.mechanism.springs[0].spring.factor == pytest.approx(spring.factor, rel=1e-9)


def test_a_spring_of_ones_own_that_cannot_do_arrays_is_named():
    message = r"Branching\.(load|stiffness) must take arrays and recorded variables as well as floats, got ValueError: "
    with pytest.raises(InputTypeError, match=message):
        balance.fit_springs(_mech(SpringMount(Branching(), ABOVE)))


def test_a_strength_of_either_sign():
    fit = balance.fit_springs(_mech(SpringMount(EitherWay(), BELOW)), norm="rms")
    assert fit.mechanism.springs[0].spring.rate == pytest.approx(-858.081875, rel=1e-9)


def test_nothing_to_do():
    done = balance.sine_match(ARM, attach_radius=0.08, anchor_height=0.1).mechanism
    fit = balance.fit_springs(done.with_springs([*done.springs, SpringMount(COIL, BELOW)]), fixed=0)
    assert fit.left_out == ("spring 2",)
    assert fit.residual.worst < 1e-12 * G

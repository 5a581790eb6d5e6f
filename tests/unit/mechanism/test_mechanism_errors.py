from __future__ import annotations

import math

import pytest

from springpoise import (
    Arm,
    Body,
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
    "spring_states",
)


@pytest.mark.parametrize(
    ("make", "error", "message"),
    [
        (lambda: Mechanism(None), InputTypeError, r"^Mechanism\.linkage must be a linkage such as Arm, got None$"),
        (lambda: Mechanism(Arm), InputTypeError, r"^Mechanism\.linkage must be a linkage such as Arm, got <class"),
        (lambda: Mechanism(ARM, springs=3), InputTypeError, r"^Mechanism\.springs must be SpringMounts, got 3$"),
        (
            lambda: Mechanism(ARM, springs=[PATH]),
            InputTypeError,
            r"^Mechanism\.springs must be SpringMounts, got \[Straight",
        ),
        (
            lambda: Mechanism(ARM, friction=0.2),
            InputTypeError,
            r"^Mechanism\.friction must be a Friction, or a sequence with one for each joint, got 0\.2$",
        ),
        (
            lambda: Mechanism(ARM, travel=(1.0, 1.0)),
            InputError,
            r"^Mechanism\.travel must be \(lower, higher\) rad, got \(1\.0, 1\.0\)$",
        ),
        (lambda: Mechanism(ARM, travel=(-70, 80)), InputError, r"^Mechanism\.travel must be .* got -70; degrees\?"),
        (lambda: Mechanism(ARM, travel=1.0), InputTypeError, r"^Mechanism\.travel must be a pair in rad, got 1\.0"),
        (
            lambda: Mechanism(ARM, gravity=9.8),
            InputTypeError,
            r"^Mechanism\.gravity must be a pair or three values in m/s\*\*2, got 9\.8",
        ),
        (
            lambda: Mechanism(
                ARM, springs=[MOUNT, SpringMount(ZeroLengthSpring(1), Straight(Point("fore", (0, 0)), PATH.last))]
            ),
            InputError,
            r"^Mechanism\.springs\[1\] does not fit its linkage: Point\.body must be one of 'ground', 'arm'.*'fore'$",
        ),
        (
            lambda: Mechanism(ARM, springs=SpringMount(TorsionSpring(1), JointTravel(1))),
            InputError,
            r"^Mechanism\.springs\[0\] does not fit its linkage: JointTravel\.joint must be below .* \(1\), got 1$",
        ),
        (
            lambda: SpringMount(None, PATH),
            InputTypeError,
            r"^SpringMount\.spring must have .*, got None; it lacks load, stiffness, energy$",
        ),
        (
            lambda: SpringMount(ZeroLengthSpring, PATH),
            InputTypeError,
            r"^SpringMount\.spring must have .*, got the class ZeroLengthSpring, not an object of it$",
        ),
        (
            lambda: SpringMount(MOUNT.spring, 3),
            InputTypeError,
            r"^SpringMount\.path must have .*, got 3; it lacks length, gradient$",
        ),
        (
            lambda: SpringMount(MOUNT.spring, Straight),
            InputTypeError,
            r"^SpringMount\.path must have .*, got the class Straight, not an",
        ),
        (
            lambda: SpringMount(MOUNT.spring, PATH, count=0),
            InputTypeError,
            r"^SpringMount\.count must be a whole number >= 1, got 0$",
        ),
        (
            lambda: SpringMount(MOUNT.spring, PATH, count=1.5),
            InputTypeError,
            r"^SpringMount\.count must be .*, got 1\.5$",
        ),
        (
            lambda: SpringMount(MOUNT.spring, PATH, count=True),
            InputTypeError,
            r"^SpringMount\.count must be .*, got True$",
        ),
        (
            lambda: SpringMount(MOUNT.spring, PATH, rigid_length="1 N"),
            UnitError,
            r"^SpringMount\.rigid_length must be .*, got '1 N'",
        ),
        (lambda: Friction(-0.1), InputError, r"^Friction\.coulomb must be >= 0 N\*m, got -0\.1$"),
        (lambda: Friction(pivot_friction=-1), InputError, r"^Friction\.pivot_friction must be >= 0, got -1\.0$"),
        (lambda: Friction(pivot_radius=-1), InputError, r"^Friction\.pivot_radius must be >= 0 m, got -1\.0$"),
        (
            lambda: Friction(pivot_friction=0.1),
            InputError,
            r"^Friction\.pivot_radius must be > 0 m where .* is given, got 0\.0$",
        ),
    ],
)
def test_errors(make, error, message):
    with pytest.raises(error, match=message):
        make()


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("q", [None, True, {}, object(), "abc", "3 kg", 90, [90.0], 1j])
def test_poses_that_are_none(method, q):
    with pytest.raises((InputError, InputTypeError), match=r"^q must be .*, got "):
        getattr(Mechanism(ARM, springs=MOUNT), method)(q)


@pytest.mark.parametrize("gravity", [9.8, (1, 2, 3), "9.8 m/s^2", ("1 N", 0), (math.nan, 0)])
def test_gravity_that_is_none(gravity):
    with pytest.raises((InputError, InputTypeError), match=r"^gravity must be "):
        Mechanism(ARM).holding_torque(0.3, gravity)

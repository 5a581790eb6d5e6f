from __future__ import annotations

import math
import pickle

import numpy as np
import pytest

from springpoise import Arm, Body, Point
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import AppliedForce

ARM = Arm([Body("3.2 kg", ("41 cm", 0.02)), Body(1.0, (-0.2, 0.0), name="weight")], length="0.8 m")


def test_frames_and_tip():
    assert ARM.joint_count == 1
    assert ARM.frames == ("ground", "arm")
    assert ARM.tip == Point("arm", (0.8, 0.0))
    assert ARM.mass == pytest.approx(4.2)
    assert ARM.moment == pytest.approx((3.2 * 0.41 - 0.2, 0.064))


def test_masses_stand_for_the_bodies():
    (one,) = ARM.masses
    assert one.mass == pytest.approx(4.2)
    assert [c * one.mass for c in one.at.at] == pytest.approx(ARM.moment)
    assert [m.mass for m in Arm(Body(2.0, (0.3, 0.1))).masses] == [2.0]
    assert [m.mass for m in Arm([Body(0.0, (0.3, 0.1)), Body(0.0, (0.1, 0.1))]).masses] == [0.0, 0.0]
    scattered = Arm([Body([1.0, 2.0], (0.3, 0.1)), Body(1.0, (0.1, 0.1))])
    assert len(scattered.masses) == 2


def test_positions_and_their_derivatives():
    assert ARM.position(Point("arm", (0.3, 0.1)), math.pi / 2) == pytest.approx((-0.1, 0.3))
    assert ARM.jacobian(Point("arm", (0.3, 0.1)), math.pi / 2)[0] == pytest.approx((-0.3, -0.1))
    assert ARM.position(Point("ground", (0.3, 0.1)), 1.0) == (0.3, 0.1)
    assert ARM.jacobian(Point("ground", (0.3, 0.1)), 1.0) == ((0.0, 0.0),)
    x, y = ARM.position(Point("arm", (0.3, 0.0)), np.zeros((2, 3)))
    assert x.shape == y.shape == (2, 3)


def test_pivot_force_balances_what_acts_on_the_arm():
    forces = [
        AppliedForce(Point("arm", (0.1, 0.0)), (2.0, -5.0)),
        AppliedForce(Point("ground", (0.0, 0.0)), (9.0, 9.0)),
    ]
    assert ARM.pivot_forces(forces, 0.3) == ((-2.0, 5.0),)


def test_with_body_and_values():
    more = ARM.with_body(Body(1.0, (0.1, 0.0)))
    assert len(more.bodies) == 3 and len(ARM.bodies) == 2 and more.length == ARM.length
    assert pickle.loads(pickle.dumps(ARM)) == ARM and hash(ARM) == hash(Arm(ARM.bodies, length=0.8))


@pytest.mark.parametrize(
    ("make", "error", "message"),
    [
        (lambda: Arm([]), InputError, r"^Arm\.bodies must be at least one Body, got none"),
        (lambda: Arm("arm"), InputTypeError, r"^Arm\.bodies must be a Body or a sequence of them, got 'arm'$"),
        (lambda: Arm(3.0), InputTypeError, r"^Arm\.bodies must be a Body or a sequence of them, got 3\.0$"),
        (lambda: Arm([Body(1, (0, 0)), None]), InputTypeError, r"^Arm\.bodies must be .*, None\]$"),
        (lambda: Arm(Body(1, (0, 0)), length=0), InputError, r"^Arm\.length must be > 0 m, got 0\.0$"),
        (lambda: Arm(Body(1, (0, 0)), length=[1.0, -2.0]), InputError, r"^Arm\.length must be > 0 m, got -2\.0$"),
        (lambda: Arm(Body(1, (0, 0)), length="1 kg"), UnitError, r"^Arm\.length must be .*, got '1 kg'"),
        (lambda: Body(-1, (0, 0)), InputError, r"^Body\.mass must be >= 0 kg, got -1\.0$"),
        (lambda: Body([1.0, -3.0], (0, 0)), InputError, r"^Body\.mass must be >= 0 kg, got -3\.0$"),
        (lambda: Body("2 N", (0, 0)), UnitError, r"^Body\.mass must be .*, got '2 N'"),
        (lambda: Body(None, (0, 0)), InputTypeError, r"^Body\.mass must be .* None of type NoneType$"),
        (
            lambda: Body(1, 0.3),
            InputTypeError,
            r"^Body\.com must be a pair or three values in m, got 0\.3 of type float$",
        ),
        (
            lambda: Body(1, (1, 2, 3, 4)),
            InputError,
            r"^Body\.com must be a pair or three values in m, got 4 values: \(1, 2, 3, 4\)$",
        ),
        (
            lambda: Arm(Body(1, (1, 2, 3))),
            InputError,
            r"^Body\.com must be \(x, y\) in m on an Arm, got \(1\.0, 2\.0, 3\.0\)$",
        ),
        (
            lambda: ARM.position(Point("arm", (1, 2, 3)), 0.1),
            InputError,
            r"^Point\.at must be \(x, y\) in m on an Arm, got \(1\.0, 2\.0, 3\.0\)$",
        ),
        (lambda: Body(1, (1, math.nan)), InputError, r"^Body\.com must be .* finite, got nan$"),
        (lambda: Point("", (0, 0)), InputTypeError, r"^Point\.body must be the name of a body, .*, got ''$"),
        (lambda: Point(3, (0, 0)), InputTypeError, r"^Point\.body must be the name of a body, .*, got 3$"),
        (
            lambda: Point("arm", "x"),
            InputTypeError,
            r"^Point\.at must be a pair or three values in m, got 'x' of type str$",
        ),
        (lambda: Point("arm", ("1 s", 0)), UnitError, r"^Point\.at must be a value in m, got '1 s'"),
        (
            lambda: ARM.position(Point("fore", (0, 0)), 0.0),
            InputError,
            r"^Point\.body must be one of 'ground', 'arm' on an Arm, got 'fore'$",
        ),
        (lambda: ARM.jacobian(Point("Arm", (0, 0)), 0.0), InputError, r"on an Arm, got 'Arm'$"),
        (lambda: Arm(Body(1, (0, 0))).tip, InputError, r"^Arm\.length must be given to know the tip, got None"),
    ],
)
def test_errors(make, error, message):
    with pytest.raises(error, match=message):
        make()

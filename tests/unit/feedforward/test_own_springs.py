"""Springs of one's own, with three methods and no base class, through mechanism and compiled functions."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest

from springpoise import Arm, Body, Feedforward, Mechanism, Point, SpringMount, Straight
from springpoise.carriers import namespace
from springpoise.errors import InputTypeError

PATH = Straight(Point("ground", (0.0, 0.10)), Point("arm", (0.08, 0.0)))
Q = np.linspace(-1.0, 1.0, 17)


@dataclasses.dataclass(frozen=True)
class InNumPy:
    """Stiffens as it is stretched; slack below its length."""

    rate: float
    length: float

    def load(self, x):
        return np.where(x > self.length, self.rate * np.sinh(x - self.length), 0.0)

    def stiffness(self, x):
        return np.where(x > self.length, self.rate * np.cosh(x - self.length), 0.0)

    def energy(self, x):
        return self.rate * (np.cosh(np.maximum(x - self.length, 0.0)) - 1.0)


@dataclasses.dataclass(frozen=True)
class InTheNamespace(InNumPy):
    """The same, over the functions of whatever comes in."""

    def load(self, x):
        xp = namespace(x)
        return xp.where(x > self.length, self.rate * xp.sinh(x - self.length), 0.0)


@dataclasses.dataclass(frozen=True)
class InMath(InNumPy):
    """The same, for floats alone."""

    def load(self, x):
        return self.rate * math.sinh(x - self.length) if x > self.length else 0.0


@dataclasses.dataclass(frozen=True)
class InMathWithoutBranch(InNumPy):
    """One that fails in math itself."""

    def load(self, x):
        return self.rate * math.sinh(x)


class Misspelt(InNumPy):
    """One whose formula asks for what no carrier has."""

    def load(self, x):
        return x.magnitude


class Cautious(InNumPy):
    """One that has an error of its own."""

    def load(self, x):
        raise ValueError(f"nothing is known at {x}")


def _mech(kind):
    return Mechanism(Arm(Body(2.0, (0.35, 0.0))), springs=SpringMount(kind(800.0, 0.06), PATH), travel=(-1.0, 1.0))


@pytest.mark.parametrize("kind", [InNumPy, InTheNamespace])
def test_numpy_and_namespace_work_everywhere(kind):
    mech = _mech(kind)
    ff = Feedforward(mech)
    expected = [mech.holding_torque(q) for q in Q.tolist()]
    assert all(type(value) is float for value in expected)
    np.testing.assert_allclose(mech.holding_torque(Q), expected, rtol=1e-13)
    np.testing.assert_allclose(ff.compile(arrays=True)(Q), expected, rtol=1e-13)
    np.testing.assert_allclose([ff.compile()(q) for q in Q.tolist()], expected, rtol=1e-13)
    slope = mech.stiffness(0.3)
    assert slope == pytest.approx((mech.holding_torque(0.3 + 1e-6) - mech.holding_torque(0.3 - 1e-6)) / 2e-6, rel=1e-6)


def test_math_works_on_one_pose():
    for q in Q.tolist():
        assert _mech(InMath).holding_torque(q) == pytest.approx(_mech(InNumPy).holding_torque(q), rel=1e-13)


@pytest.mark.parametrize("kind", [InMath, InMathWithoutBranch, Misspelt])
def test_the_spring_and_the_method_that_cannot_be_recorded_are_named(kind):
    message = (
        rf"{kind.__name__}\.load must take arrays and recorded variables as well as floats, got \w+: .*; "
        r"use NumPy's functions or those of springpoise\.carriers\.namespace\(x\), and where\(\) instead of if"
    )
    with pytest.raises(InputTypeError, match=message) as caught:
        Feedforward(_mech(kind)).compile()
    assert caught.value.__cause__ is not None
    with pytest.raises(InputTypeError, match=message):
        _mech(kind).holding_torque(Q)


def test_a_method_that_is_asked_for_energy_is_named():
    class NoEnergy(InNumPy):
        def energy(self, x):
            return math.exp(x)

    with pytest.raises(InputTypeError, match=r"NoEnergy\.energy must take arrays"):
        _mech(NoEnergy).energy(Q)


def test_a_springs_own_errors_on_floats_come_through():
    with pytest.raises(ValueError, match=r"^nothing is known at 0\.1"):
        _mech(Cautious).holding_torque(0.0)

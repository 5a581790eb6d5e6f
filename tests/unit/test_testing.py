"""The checks for one's own parts: good ones pass, each kind of wrong one is caught and named."""

from __future__ import annotations

import math
import subprocess
import sys

import attrs
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
    Point,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.carriers import namespace
from springpoise.errors import InputError, InputTypeError, SpringpoiseError
from springpoise.linkages import FourBar, Link, PlanarChain
from springpoise.linkages.protocol import PointMass
from springpoise.paths import Spool
from springpoise.testing import IdentityError, IdentityReport, check_linkage, check_path, check_spring

ARM = Arm(Body(1.0, (0.3, 0.0)))
CHAIN = PlanarChain([Link("a", Body(1.0, (0.1, 0)), length=0.3), Link("b", Body(1.0, (0.1, 0)), length=0.2)])
BOTH = [(-1.0, 1.0), (-1.0, 1.0)]


class Cubic:
    """A good spring of three methods."""

    def load(self, x):
        return 500.0 * x * x

    def stiffness(self, x):
        return 1000.0 * x

    def energy(self, x):
        return 500.0 * x * x * x / 3.0


class WrongEnergy(Cubic):
    def energy(self, x):
        return 250.0 * x * x * x


class WrongStiffness(Cubic):
    def stiffness(self, x):
        return 999.0 * x


class FloatsOnly(Cubic):
    def load(self, x):
        return 500.0 * math.pow(x, 2)


class Branching(Cubic):
    def load(self, x):
        return 500.0 * x * x if x > 0.05 else 0.0


class PerElement(Cubic):
    """Looks at the whole array where it should look at each element."""

    def hysteresis(self, x):
        return 0.1 * x + (1e-3 * np.max(x) if isinstance(x, np.ndarray) else 0.0)


class DeafToNaN(Cubic):
    def load(self, x):
        xp = namespace(x)
        return 500.0 * xp.where(x > 0.0, x, 0.0) * xp.where(x > 0.0, x, 0.0)

    def energy(self, x):
        xp = namespace(x)
        y = xp.where(x > 0.0, x, 0.0)
        return 500.0 * y * y * y / 3.0

    def stiffness(self, x):
        xp = namespace(x)
        return 1000.0 * xp.where(x > 0.0, x, 0.0)


class NegativeBand(Cubic):
    def hysteresis(self, x):
        return 0.0 * x - 1.0


class Rubbing(Cubic):
    def hysteresis(self, x):
        return 0.1 * x


class TestSprings:
    @pytest.mark.parametrize(
        ("spring", "over"),
        [
            (Cubic(), (0.0, 0.3)),
            (Rubbing(), (0.0, 0.3)),
            (ZeroLengthSpring(800.0), (0.0, 0.3)),
            (ExtensionSpring(800.0, free_length=0.1, initial_tension=5.0), (0.05, 0.3)),
            (CompressionSpring(800.0, free_length=0.2, solid_length=0.1), (0.11, 0.25)),
            (TorsionSpring(3.0, free_angle=0.2), (-1.0, 1.0)),
            (ConstantForceSpring(20.0), (0.1, 0.5)),
        ],
        ids=lambda value: type(value).__name__,
    )
    def test_good_ones(self, spring, over):
        report = check_spring(spring, over=over)
        assert isinstance(report, IdentityReport)
        assert report.subject == type(spring).__name__
        assert report.places == 64
        assert report.identities[0].name == "load is the slope of energy"
        assert all(identity.difference <= 1e-9 for identity in report.identities)
        assert str(report).startswith(f"{report.subject} at 64 places\n  load is the slope of energy ")
        with pytest.raises(attrs.exceptions.FrozenInstanceError):
            report.places = 3

    @pytest.mark.parametrize(
        ("spring", "message"),
        [
            (
                WrongEnergy(),
                r"^WrongEnergy breaks 'load is the slope of energy': load must be the slope of energy, "
                r"got [\d.]+ against [\d.]+ at x = 0\.\d+$",
            ),
            (WrongStiffness(), r"breaks 'stiffness is the slope of load': stiffness must be the slope of load, got "),
            (FloatsOnly(), r"^FloatsOnly must take arrays in load, got TypeError: .*; take functions from NumPy or "),
            (Branching(), r"^Branching must take arrays in load, got ValueError: .* where\(\) instead of if$"),
            (
                PerElement(),
                r"^PerElement breaks 'arrays are one by one': hysteresis of an array must be that of floats, got ",
            ),
            (DeafToNaN(), r"^DeafToNaN breaks 'NaN gives NaN': energy at NaN must be NaN, got 0 against nan"),
            (
                NegativeBand(),
                r"breaks 'hysteresis is not negative': hysteresis must be its size, got -1 against 1 at x = ",
            ),
        ],
        ids=lambda value: type(value).__name__,
    )
    def test_wrong_ones_are_named_with_place_and_both_numbers(self, spring, message):
        with pytest.raises(IdentityError, match=message):
            check_spring(spring, over=(0.01, 0.3))

    def test_the_numbers_in_the_message_are_those_at_the_place(self):
        with pytest.raises(IdentityError) as caught:
            check_spring(WrongEnergy(), over=np.array([0.1, 0.2]))
        # 500 x² against 750 x², worst at 0.2
        assert str(caught.value).endswith("got 20 against 30 at x = 0.2")

    def test_a_jump_of_the_load_at_a_round_number_is_no_fault(self):
        check_spring(ExtensionSpring(800.0, free_length=0.1, initial_tension=5.0), over=(0.0, 0.2))

    def test_tolerance(self):
        @attrs.frozen
        class Slightly(Cubic):
            def stiffness(self, x):
                return 1000.0 * x * (1.0 + 1e-6)

        with pytest.raises(IdentityError):
            check_spring(Slightly(), over=(0.0, 0.3))
        check_spring(Slightly(), over=(0.0, 0.3), tolerance=1e-5)

    def test_it_is_an_assertion_and_one_of_ours(self):
        assert issubclass(IdentityError, AssertionError)
        assert issubclass(IdentityError, SpringpoiseError)


class OwnPath:
    """Two points' distance, written out by hand."""

    slope = 1.0

    def length(self, linkage, q):
        (x, y), xp = linkage.position(Point("arm", (0.2, 0.1)), q), namespace(q)
        return xp.sqrt((x - 0.1) * (x - 0.1) + (y - 0.5) * (y - 0.5))

    def gradient(self, linkage, q):
        ((dx, dy),) = linkage.jacobian(Point("arm", (0.2, 0.1)), q)
        x, y = linkage.position(Point("arm", (0.2, 0.1)), q)
        return (self.slope * ((x - 0.1) * dx + (y - 0.5) * dy) / self.length(linkage, q),)


class WrongGradient(OwnPath):
    slope = -1.0


class TwoGradients(OwnPath):
    def gradient(self, linkage, q):
        return (*super().gradient(linkage, q), 0.0)


@attrs.frozen
class Bent(Straight):
    def pulls(self, linkage, q):
        one, other = super().pulls(linkage, q)
        return one, other._replace(force=tuple(1.01 * f for f in other.force))


@attrs.frozen
class Astray(Straight):
    """Its forces balance, but act at other points than those that move."""

    def pulls(self, linkage, q):
        one, other = super().pulls(linkage, q)
        return one, other._replace(at=Point("arm", (0.1, 0.0)))


@attrs.frozen
class Sticky(Straight):
    def friction_gradient(self, linkage, q):
        return tuple(-0.01 * g * g for g in self.gradient(linkage, q))


ENDS = (Point("ground", (0.0, 0.5)), Point("arm", (0.2, 0.1)))


class TestPaths:
    @pytest.mark.parametrize(
        ("path", "linkage", "over"),
        [
            (OwnPath(), ARM, (-1.0, 1.0)),
            (Straight(*ENDS), ARM, (-1.0, 1.0)),
            (Straight(Point("a", (0.1, 0.2)), Point("ground", (0.0, 1.0))), CHAIN, BOTH),
            (Cable(ENDS[0], Disc(Point("ground", (0.1, 0.3)), radius=0.02, turn="cw"), ENDS[1]), ARM, (-0.5, 0.5)),
            (JointTravel(1, ratio=2.0), CHAIN, BOTH),
            (Spool.drum(0.03, joint=1), CHAIN, BOTH),
        ],
        ids=lambda value: type(value).__name__,
    )
    def test_good_ones(self, path, linkage, over):
        report = check_path(path, linkage, over=over)
        assert report.subject == type(path).__name__
        names = {identity.name for identity in report.identities}
        assert {"gradient is the slope of length", "recorded is computed"} <= names
        assert ("pulls add up to nothing" in names) == isinstance(path, Straight | Cable)

    @pytest.mark.parametrize(
        ("path", "message"),
        [
            (
                WrongGradient(),
                r"^WrongGradient breaks 'gradient is the slope of length': gradient\[0\] must be the slope of length, got ",
            ),
            (TwoGradients(), r"^TwoGradients must give 1 components in gradient, got "),
            (
                Bent(*ENDS),
                r"^Bent breaks 'power of the pulls is that of the tension': power of pulls must be -gradient\[0\]",
            ),
            (Astray(*ENDS), r"^Astray breaks 'power of the pulls is that of the tension'"),
            (
                Sticky(*ENDS),
                r"^Sticky breaks 'friction gradient is not negative': friction_gradient must be its size, got -",
            ),
        ],
        ids=lambda value: type(value).__name__,
    )
    def test_wrong_ones_are_named(self, path, message):
        with pytest.raises(IdentityError, match=message):
            check_path(path, ARM, over=(-1.0, 1.0))

    def test_poses_of_several_joints(self):
        path = Straight(Point("b", (0.1, 0.2)), Point("ground", (0.0, 1.0)))
        q = np.random.default_rng(1).uniform(-1.0, 1.0, (20, 2))
        assert check_path(path, CHAIN, over=q).places == 20
        with pytest.raises(IdentityError, match=r"at q = \(-?0\.\d+, -?0\.\d+\)$"):
            check_path(_Off(*attrs.astuple(path, recurse=False)), CHAIN, over=q)


@attrs.frozen
class _Off(Straight):
    def gradient(self, linkage, q):
        one, other = super().gradient(linkage, q)
        return one, 1.1 * other


@attrs.frozen
class Faulty:
    """An arm with one thing wrong."""

    fault: str
    arm: Arm = ARM
    joint_count: int = 1
    frames: tuple[str, ...] = ("ground", "arm")

    @property
    def masses(self):
        if self.fault == "frame":
            return (PointMass(1.0, Point("hand", (0.0, 0.0))),)
        return (PointMass(-1.0 if self.fault == "mass" else 1.0, Point("arm", (0.3, 0.0))),)

    def position(self, point, q):
        x, y = self.arm.position(point, q)
        if point.body == "arm":
            x = {"stretch": 1.01 * x, "mirror": -x}.get(self.fault, x)
        elif self.fault == "ground":
            y = y + 0.1
        return x, y

    def jacobian(self, point, q):
        ((dx, dy),) = self.arm.jacobian(point, q)
        if point.body == "arm":
            dx = {"stretch": 1.01 * dx, "mirror": -dx, "rate": -dx}.get(self.fault, dx)
        return ((dx, dy),)

    def gravity_torques(self, q, gravity):
        ((dx, dy),) = self.jacobian(Point("arm", (0.3, 0.0)), q)
        wrong = 1.5 if self.fault == "gravity" else 1.0
        return (self.masses[0].mass * (gravity[0] * dx + wrong * gravity[1] * dy),)


class TestLinkages:
    @pytest.mark.parametrize(
        ("linkage", "over"),
        [
            (ARM, (-3.0, 3.0)),
            (CHAIN, BOTH),
            (Faulty("none"), (-1.0, 1.0)),
            (
                FourBar(
                    crank=Link("crank", length=0.1),
                    coupler=Link("coupler", Body(1.0, (0.1, 0.1)), length=0.35),
                    rocker=Link("rocker", length=0.3),
                    second_pivot=(0.35, 0.0),
                ),
                (-3.0, 3.0),
            ),
        ],
        ids=lambda value: type(value).__name__,
    )
    def test_good_ones(self, linkage, over):
        report = check_linkage(linkage, over=over)
        names = {identity.name for identity in report.identities}
        assert {"jacobian is the derivative of position", "bodies stay rigid", "the ground stays"} <= names
        assert ("gravity torques are those of the masses" in names) == hasattr(linkage, "gravity_torques")

    @pytest.mark.parametrize(
        ("fault", "message"),
        [
            (
                "rate",
                r"^Faulty breaks 'jacobian is the derivative of position': jacobian\[0\]\[0\] of Point\(body='arm', .*\) must be "
                r"the derivative of position, got .* at q = ",
            ),
            ("stretch", r"^Faulty breaks 'bodies stay rigid': edge 0 times edge 0 of 'arm' must be that at rest, got "),
            (
                "mirror",
                r"^Faulty breaks 'bodies are not mirrored': handedness of 'arm' must be one, got -1 against 1 at q = ",
            ),
            (
                "ground",
                r"^Faulty breaks 'the ground stays': position must be where it was, got 0\.4 against 0\.3 at q = ",
            ),
            ("mass", r"^Faulty breaks 'masses are not negative': mass at .* must be its size, got -1 against 1$"),
            ("frame", r"^Faulty\.masses must be in its frames \('ground', 'arm'\), got Point\(body='hand', "),
            (
                "gravity",
                r"^Faulty breaks 'gravity torques are those of the masses': gravity_torques\[0\] must be sum over",
            ),
        ],
    )
    def test_wrong_ones_are_named(self, fault, message):
        with pytest.raises(IdentityError, match=message):
            check_linkage(Faulty(fault), over=(-1.0, 1.0))


@pytest.mark.parametrize(
    ("make", "error", "message"),
    [
        (
            lambda: check_spring(3, over=(0, 1)),
            InputTypeError,
            r"^spring must have load, stiffness and energy methods, got 3",
        ),
        (lambda: check_spring(Cubic(), over=(1, 0)), InputError, r"^over must be \(lower, higher\), got \(1, 0\)$"),
        (
            lambda: check_spring(Cubic(), over=(0, math.inf)),
            InputError,
            r"^over must be \(lower, higher\), got \(0, inf\)$",
        ),
        (
            lambda: check_spring(Cubic(), over=3.0),
            InputTypeError,
            r"^over must be a range \(from, to\), or a NumPy array, got 3",
        ),
        (
            lambda: check_spring(Cubic(), over=("0 mm", "3 mm")),
            InputTypeError,
            r"^over must be a range .*got \('0 mm', '3 mm'\)$",
        ),
        (
            lambda: check_spring(Cubic(), over=np.array([0.1])),
            InputError,
            r"^over must be two finite places or more, .* \(1,\)$",
        ),
        (
            lambda: check_spring(Cubic(), over=np.array([0.1, np.nan])),
            InputError,
            r"^over must be two finite places or more",
        ),
        (lambda: check_spring(Cubic(), over=(0, 1), tolerance=0.0), InputError, r"^tolerance must be > 0, got 0\.0$"),
        (lambda: check_linkage(CHAIN, over=(0, 1)), InputTypeError, r"^over must be a range \(from, to\).*got 0$"),
        (
            lambda: check_linkage(CHAIN, over=[(0, 1)]),
            InputError,
            r"^over must be a range for each of 2 joints, got \[",
        ),
        (
            lambda: check_linkage(CHAIN, over=np.zeros((4, 3))),
            InputError,
            r"^over must be of shape \(N, 2\) for 2 joints, got \(4, 3\)$",
        ),
    ],
)
def test_what_cannot_be_checked(make, error, message):
    with pytest.raises(error, match=message):
        make()


def test_it_runs_without_the_tools_of_this_suite():
    check = (
        "import sys; sys.modules.update(dict.fromkeys(('hypothesis', 'pytest', 'scipy'))); "
        "from springpoise.testing import check_spring; from springpoise import ZeroLengthSpring; "
        "print(check_spring(ZeroLengthSpring(3.0), over=(0, 1)).subject)"
    )
    done = subprocess.run([sys.executable, "-c", check], capture_output=True, text=True, check=False)
    assert done.stdout.strip() == "ZeroLengthSpring", done.stderr

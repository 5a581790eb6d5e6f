"""Shaped spools: branches, messages, how they print, and files that cannot be written."""

from __future__ import annotations

import math
import re
import sys

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    CompressionSpring,
    ConstantForceSpring,
    ExtensionSpring,
    Link,
    MeasuredSpring,
    Mechanism,
    PlanarChain,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.balance.spools.shape import convex_beyond, shape_spool
from springpoise.errors import InputError, InputTypeError, NoSolution, PoiseFileError
from springpoise.paths import GuideRoller

ARM = Arm(Body(2.0, (0.35, 0.0)))
COIL = ExtensionSpring(2000.0, free_length=0.1, initial_tension=10.0)
GIVEN = {"leaves": "180 deg", "cable_diameter": "2 mm", "over": ("-60 deg", "40 deg"), "start_length": "130 mm"}


def _spool(spring=COIL, arm=ARM, **changes):
    return shape_spool(arm, spring, **{**GIVEN, **changes})


class Everywhere:
    """A spring of one's own that does not say over which lengths it works."""

    def load(self, x):
        return 100.0 + 200.0 * x

    def stiffness(self, x):
        return 200.0 + 0.0 * x

    def energy(self, x):
        return 100.0 * x + 100.0 * x**2


def test_a_spring_of_ones_own():
    spool = _spool(Everywhere(), start_length=-0.1)
    assert spool.residual.worst < 1e-8
    assert spool.spring_lengths[-1] == -0.1


@pytest.mark.parametrize(
    ("changes", "kind", "message"),
    [
        ({"arm": 3.0}, InputTypeError, r"arm must be an Arm or a Mechanism, got 3\.0"),
        ({"over": (1.0, -1.0)}, InputError, r"over must be \(lower, higher\) rad, got \(1\.0, -1\.0\)"),
        ({"cable_diameter": -0.001}, InputError, r"cable_diameter must be >= 0 m, got -0\.001"),
        ({"cable_diameter": [0.001, 0.002]}, InputTypeError, r"cable_diameter must be a single value in m, got"),
        ({"least_radius": "-3 mm"}, InputError, r"least_radius must be >= 0 m, got -0\.003"),
        ({"leaves": [1.0, 2.0]}, InputTypeError, r"leaves must be a single value in rad, got"),
        (
            {"leaves": 180.0},
            InputError,
            r"leaves must be within two turns, ±12\.57 rad, got 180; degrees\? write '180 deg'",
        ),
        (
            {"start_angle": "50 deg"},
            InputError,
            r"start_angle must be from -60\.00 deg to 40\.00 deg as over is, got 50\.00 deg",
        ),
        (
            {"start_length": 0.09},
            InputError,
            r"start_length must be within the spring's working range 0\.1 to inf m, got 0\.09",
        ),
        (
            {"spring": Everywhere(), "start_length": None},
            InputError,
            r"start_length must be given for a Everywhere, which begins to pull nowhere, got None",
        ),
        (
            {"spring": ZeroLengthSpring(2000.0), "start_length": None},
            InputError,
            r"start_length must be beyond 0 m, where the spring has no load yet, since 5\.259 N\*m is wanted at "
            r"40\.00 deg, got 0; stretch it there or start where the arm needs no torque",
        ),
        (
            {"spring": ZeroLengthSpring(2000.0), "start_length": None, "over": (0.5, 2.5)},
            InputError,
            r"over must lie on one side of 90\.00 deg, where the spring has no load and changes sides, got "
            r"28\.65 deg to 143\.24 deg",
        ),
        (
            {"spring": CompressionSpring(2000.0, free_length=0.2, solid_length=0.05), "start_length": 0.1},
            InputError,
            r"start_length must be where the spring pulls, got 0\.1 m, where its load is -200 N",
        ),
        ({"count": 0}, InputTypeError, r"SpringMount\.count must be a whole number >= 1, got 0"),
        (
            {"spring": 7.0},
            InputTypeError,
            r"SpringMount\.spring must have load, stiffness and energy methods, got 7\.0",
        ),
    ],
)
def test_wrong_values(changes, kind, message):
    spring, arm = changes.pop("spring", COIL), changes.pop("arm", ARM)
    with pytest.raises(kind, match=message):
        _spool(spring, arm, **changes)


def test_wrong_mechanisms():
    chain = PlanarChain([Link("a", Body(1.0, (0.1, 0)), length=0.2), Link("b", Body(1.0, (0.1, 0)), length=0.2)])
    with pytest.raises(InputError, match="arm must have one revolute joint, got joints in rad, rad"):
        _spool(arm=Mechanism(chain))
    builds = Arm(Body(np.array([[1.0], [2.0]]), (0.35, 0.0)))
    with pytest.raises(InputError, match="arm must be a single one, got fields that are arrays"):
        _spool(arm=builds)
    mount = SpringMount(
        ZeroLengthSpring(2.0 * 9.80665 * 0.35 / (0.1 * 0.08)),
        Straight(Point("ground", (0, 0.1)), Point("arm", (0.08, 0))),
    )
    with pytest.raises(InputError, match=r"arm must have something left to balance, got a torque of at most \S+ N\*m"):
        _spool(arm=Mechanism(ARM, springs=mount))


def test_gravity_may_be_another():
    moon = _spool(gravity=(0.0, -1.62))
    assert moon.mechanism.gravity == (0.0, -1.62)
    assert moon.residual.worst < 1e-9


def test_a_success_prints_and_gives_itself():
    spool = _spool()
    assert spool.success
    assert spool.require() is spool
    text = str(spool)
    assert "status                           balanced at every angle of the range" in text
    assert "spring length                    130.0 mm to" in text
    assert "pull turns the spool             ccw" in text
    assert spool.convex_over == ((math.radians(-60), math.radians(40)),)
    assert spool.tie_at == len(spool.angles) - 1
    assert all(check.margin > 0 for check in spool.checks)


def test_a_line_that_is_not_convex_says_where():
    spool = _spool(over=("-60 deg", "85 deg"))
    assert not spool.success
    message = (
        r"^curvature radius -[\d.]+ mm at \S+ deg, at least 1\.000 mm: not kept from (\S+) deg to 85\.00 deg; "
        r"it would do from -60\.00 deg to (\S+) deg$"
    )
    found = re.match(message, spool.status)
    assert found
    assert found[1] == found[2]
    with pytest.raises(NoSolution, match=re.escape(spool.status)):
        spool.require()
    low, high = spool.checks[0].fails_over[0]
    assert spool.convex_over == ((math.radians(-60), low),)
    assert high == math.radians(85)


def test_least_radius_is_kept():
    spool = _spool(least_radius="40 mm")
    assert "at least 40.00 mm: not kept from" in spool.status
    assert spool.checks[0].allowed == 0.04


def test_a_spring_that_is_stretched_too_far():
    spool = _spool(ExtensionSpring(2000.0, free_length=0.1, initial_tension=10.0, longest=0.16))
    assert re.search(
        r"spring length 2\d\d\.\d mm at -60\.00 deg, at most 160\.0 mm: not kept from -60\.00 deg", spool.status
    )
    check = spool.checks[-1]
    assert check.margin == pytest.approx(0.16 - np.max(spool.spring_lengths), abs=1e-9)


def test_a_spring_that_cannot_do_the_work(tmp_path):
    spool = _spool(MeasuredSpring([0.1, 0.15], [10.0, 60.0]))
    assert not spool.success
    assert spool.status.startswith(
        "the spring cannot take up the work that gravity does on the way from 40.00 deg to -60.00"
    )
    assert spool.mechanism.springs == ()
    assert "curvature" not in str(spool)
    with pytest.raises(InputError, match="pitch_line must be finite to be written, got NaN: the spring cannot"):
        spool.write_csv(tmp_path / "none.csv")
    assert list(tmp_path.iterdir()) == []


def test_more_than_a_turn():
    # a drum for a load that never changes
    from springpoise import Spool

    weight = SpringMount(ConstantForceSpring(20.0), Spool.drum(0.05))
    mech = Mechanism(Arm(Body(0.0, (0.0, 0.0))), springs=weight)
    spool = shape_spool(
        mech, ConstantForceSpring(50.0), leaves=0.0, cable_diameter=0.0, start_length=0.1, over=(-3.5, 3.5)
    )
    assert "angle that the cable winds over 401.07 deg at 200.54 deg, at most 360.00 deg" in spool.status


def test_a_roller_that_is_too_near():
    spool = _spool(leaves=GuideRoller((-0.02, 0.0), radius=0.005), over=(-1.0, 0.3))
    assert not spool.success
    assert "cable from spool to roller" in spool.status


def test_start_angle_may_be_given():
    spool = _spool(start_angle="0 deg", start_length="180 mm")
    at = np.interp(0.0, spool.angles, spool.spring_lengths)
    assert at == pytest.approx(0.18, abs=1e-6)
    assert spool.mechanism.spring_states(0.0)[0].length == pytest.approx(0.18, abs=1e-12)
    assert spool.start_angle == 0.0


def test_a_spring_that_would_go_slack():
    # 3.0 J at the start; the arm needs 4.4 J to its highest pose
    spool = _spool(start_angle="0 deg", start_length="150 mm")
    assert not spool.success
    assert re.match(
        r"the spring goes slack on the way from 0\.00 deg to \d+\.\d+ deg; it has to be longer at the start",
        spool.status,
    )


def test_convex_beyond():
    with pytest.raises(InputError, match=r"load_ratio must be > 0, got 0\.0"):
        convex_beyond(0)
    # without its cancellation: a crank pin, convex from horizontal on
    assert convex_beyond(1e-12) == pytest.approx(math.pi / 2, abs=1e-12)


class TestFiles:
    spool = _spool()

    def test_they_replace_what_was_there_as_a_whole(self, tmp_path):
        for write, name in ((self.spool.write_csv, "a.csv"), (self.spool.write_svg, "a.svg")):
            path = tmp_path / name
            path.write_text("old")
            path.chmod(0o640)
            write(str(path))
            assert path.read_text(encoding="utf-8") != "old"
            assert path.stat().st_mode & 0o777 == 0o640
        assert sorted(p.name for p in tmp_path.iterdir()) == ["a.csv", "a.svg"]

    def test_a_folder_that_is_not_there(self, tmp_path):
        with pytest.raises(PoiseFileError, match=r"nowhere/a\.csv: cannot be written: No such file or directory"):
            self.spool.write_csv(tmp_path / "nowhere" / "a.csv")

    def test_without_the_package_for_dxf(self, tmp_path, monkeypatch):
        monkeypatch.setitem(sys.modules, "ezdxf", None)
        with pytest.raises(ImportError, match=r"write_dxf needs the package ezdxf.*pip install 'springpoise\[cam\]'"):
            self.spool.write_dxf(tmp_path / "a.dxf")
        assert list(tmp_path.iterdir()) == []

    def test_drawing_shows_what_it_should(self, tmp_path):
        self.spool.write_svg(tmp_path / "a.svg")
        text = (tmp_path / "a.svg").read_text(encoding="utf-8")
        assert re.findall(r'id="([\w-]+)"', text) == ["machined-line", "pitch-line", "axis", "tie", "ruler"]
        assert "cable at -60.0°" in text
        assert "cable at 40.0°" in text
        assert "10 mm</text>" in text


def test_a_coil_that_begins_to_pull_at_the_upright():
    """Its load begins just above its free length; the spool is the half nephroid of a spring from zero."""
    over = ("-60 deg", "90 deg")
    coil = _spool(ExtensionSpring(2000.0, free_length=0.1), over=over, start_length=None)
    ideal = _spool(ZeroLengthSpring(2000.0), over=over, start_length=None)
    assert coil.success
    assert coil.spring_lengths[-1] == 0.1
    assert coil.wound_length == pytest.approx(ideal.wound_length, rel=1e-9)
    assert np.max(np.abs(coil.pitch_line[[0, -1]] - ideal.pitch_line[[0, -1]])) < 1e-9

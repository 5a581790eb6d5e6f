"""What place refuses, and what its results say."""

from __future__ import annotations

import math
import multiprocessing
from concurrent.futures import ProcessPoolExecutor

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    CompressionSpring,
    Disc,
    ExtensionSpring,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
)
from springpoise.balance.placing.geometry import place
from springpoise.errors import InputError, InputTypeError, NoSolution, UnitError
from springpoise.linkages import Link, PlanarChain
from springpoise.paths import JointTravel

ARM = Arm(Body(2.0, (0.35, 0.0)))
Q = np.linspace(-1.0, 1.0, 31)
COIL = ExtensionSpring(1000.0, free_length=0.03, longest=0.25)


def _build(height, radius=0.08):
    return Mechanism(ARM, springs=SpringMount(COIL, Straight(Point("ground", (0, height)), Point("arm", (radius, 0)))))


def _place(build=_build, knobs=None, **options):
    return place(build, knobs={"height": (0.08, 0.2)} if knobs is None else knobs, over=Q, **{"starts": 1, **options})


@pytest.mark.parametrize(
    ("knobs", "error", "message"),
    [
        ([("height", (0, 1))], InputTypeError, r"knobs must map names to bounds .*, got \[\('height'"),
        ({}, InputError, "knobs must be at least one name with its bounds, got none"),
        ({"1st": (0, 1)}, InputError, "knobs must be named like arguments of build, got '1st'"),
        ({"lambda": (0, 1)}, InputError, "knobs must be named like arguments of build, got 'lambda'"),
        (
            {"height": None},
            InputError,
            r"knobs\['height'\] must be bounds .*, got None; unbounded searches run away to",
        ),
        ({"height": 0.1}, InputError, r"knobs\['height'\] must be bounds \(lower, higher\), got 0.1"),
        (
            {"height": (0.1, math.inf)},
            InputError,
            "must be finite bounds, got inf; unbounded searches run away to tall",
        ),
        ({"height": (None, 0.1)}, InputError, "must be finite bounds, got None; unbounded"),
        ({"height": (math.nan, 0.1)}, InputError, "must be finite bounds, got nan"),
        ({"height": (0.2, 0.1)}, InputError, r"knobs\['height'\] must be bounds \(lower, higher\), got \(0.2, 0.1\)"),
        ({"height": (0.1, 0.1)}, InputError, r"got \(0.1, 0.1\)"),
        ({"height": ("50 mm", "3 deg")}, UnitError, r"must have bounds of one dimension, got \('50 mm', '3 deg'\)"),
        ({"height": ("50 foo", "60 mm")}, UnitError, "must be bounds in one of m, rad, .*, got '50 foo'"),
        ({"height": ([0.1, 0.2], 0.3)}, InputTypeError, r"bounds that are single values, got \[0.1, 0.2\]"),
        ({"tall": (0.1, 0.2)}, InputError, "knobs must be the arguments of build, got tall: .*height"),
        ({"height": (0.1, 0.2), "x": (0, 1)}, InputError, "knobs must be the arguments of build, got height, x: .*'x'"),
    ],
)
def test_knobs_are_refused(knobs, error, message):
    with pytest.raises(error, match=message):
        _place(knobs=knobs)


@pytest.mark.parametrize(
    ("options", "error", "message"),
    [
        ({"norm": "worst"}, InputError, "norm must be 'minimax' or 'rms', got 'worst'"),
        ({"fit": "all"}, InputError, "fit must be 'spring', 'mount', 'rate' or 'none', got 'all'"),
        ({"starts": 0}, InputError, "starts must be a whole number >= 1, got 0"),
        ({"starts": True}, InputError, "starts must be a whole number >= 1, got True"),
        ({"seed": -1}, InputError, "seed must be a whole number >= 0, got -1"),
        ({"executor": 3}, InputTypeError, "executor must be an executor of concurrent.futures or None, got 3"),
        ({"fixed": "left"}, InputError, r"fixed must name mounts of the mechanism \(spring 1\), got 'left'"),
        ({"fixed": [1]}, InputError, r"fixed must name mounts of the mechanism \(spring 1\), got 1"),
        ({"least_margin": -0.1}, InputError, "least_margin must be >= 0 m, got -0.1"),
        ({"pivot_load_limit": 0}, InputError, "pivot_load_limit must be > 0 N, got 0.0"),
        ({"stored_energy_limit": "-2 J"}, InputError, "stored_energy_limit must be > 0 J, got -2.0"),
        ({"stored_energy_limit": "2 N"}, UnitError, "stored_energy_limit must be a value in J, got '2 N'"),
        ({"keep_in": [1]}, InputTypeError, r"keep_in must map points to boxes, got \[1\]"),
        ({"keep_in": {"tip": ((0, 1), (0, 1))}}, InputTypeError, "keep_in must name Points .*, got 'tip'"),
        ({"keep_in": {Point("arm", (1, 0)): (0, 1)}}, InputTypeError, r"keep_in must be a box .*, got \(0, 1\)"),
        (
            {"keep_in": {Point("arm", (1, 0)): ((1, 0), (0, 1))}},
            InputError,
            r"keep_in must be a box with x \(lower, higher\) m, got \(1.0, 0.0\)",
        ),
        ({"keep_in": {lambda height: 3: ((0, 1), (0, 1))}}, InputTypeError, "that give one, got 3"),
        ({"keep_out": [3]}, InputTypeError, "keep_out must be Discs, or pairs of a Point and a radius, got 3"),
        ({"keep_out": [(Point("ground", (0, 0)), 0)]}, InputError, "keep_out must have radii > 0 m, got 0.0"),
    ],
)
def test_options_are_refused(options, error, message):
    with pytest.raises(error, match=message):
        _place(**options)


def test_points_of_bodies_that_are_not_there_are_refused():
    with pytest.raises(InputError, match="keep_in must name points of 'ground', 'arm', got one of 'amr'"):
        _place(keep_in={Point("amr", (0.1, 0)): ((0, 0.1), (-0.1, 0.1))})
    with pytest.raises(InputError, match="keep_out must name points of 'ground', 'arm', got one of 'bracket'"):
        _place(keep_out=[(Point("bracket", (0, 0)), 0.01)])


def _two_links(height, second="revolute"):
    links = [
        Link("upper", Body(1.5, (0.15, 0)), length=0.3),
        Link("fore", Body(1.0, (0.1, 0)), joint=second),
    ]
    path = Straight(Point("ground", (0, height)), Point("upper", (0.09, 0)))
    travel = [(-1.0, 1.0), (-1.0, 1.0) if second == "revolute" else (0.0, 0.1)]
    return Mechanism(PlanarChain(links), springs=SpringMount(COIL, path), travel=travel)


@pytest.mark.parametrize(
    ("second", "over", "message"),
    [
        ("prismatic", None, "mechanism must have joints of one kind, got both revolute and prismatic ones"),
        ("revolute", Q, r"over must be poses of shape \(poses, 2\) for this linkage, got shape \(31,\)"),
        ("revolute", [[0.0, math.nan]], "over must be finite poses, got nan"),
        ("revolute", [[0.0, 90.0]], "over must be within two turns, .*, got 90; degrees"),
    ],
)
def test_several_joints_that_cannot_be_meant(second, over, message):
    with pytest.raises(InputError, match=message):
        place(lambda height: _two_links(height, second), knobs={"height": (0.08, 0.2)}, over=over)


def test_several_joints_are_printed_one_by_one():
    found = place(_two_links, knobs={"height": (0.08, 0.2)}, fit="rate", starts=1)
    lines = str(found).splitlines()
    assert [line.split()[:2] for line in lines if line.startswith("    joint")] == [
        ["joint", "upper"],
        ["joint", "fore"],
    ]
    assert found.residual.poses == 600
    assert len(found.residual.worst_at) == 2
    assert str(found.residual).count(" deg") == 2


def test_a_lift_that_slides_is_measured_in_newtons():
    """A carriage of 2 kg on an upright slide, its x axis upwards; weight 19.6 N at every height."""
    slide = PlanarChain([Link("carriage", Body(2.0, (0, 0)), joint="prismatic")])

    def build(height):
        path = Straight(Point("ground", (height, 0)), Point("carriage", (0, 0)))
        return Mechanism(slide, springs=SpringMount(COIL, path), travel=(0.0, 0.1), gravity=(-9.80665, 0.0))

    found = place(build, knobs={"height": (0.2, 0.4)}, fit="rate", starts=2)
    assert found.residual.peak_gravity_torque == pytest.approx(2.0 * 9.80665)
    text = str(found)
    assert " N (" in text and "of the peak gravity force" in text and "deg" not in text


def test_builds_are_refused():
    with pytest.raises(InputTypeError, match="build must be a function of the knobs, got 3"):
        _place(3)
    with pytest.raises(InputTypeError, match="build must return a Mechanism, got None"):
        _place(lambda height: None)
    with pytest.raises(InputError, match="build must make a mechanism with at least one spring, got none"):
        _place(lambda height: Mechanism(ARM))
    with pytest.raises(InputError, match="build must make a mechanism with something to balance"):
        _place(_build, gravity=(0.0, 0.0))
    torsion = SpringMount(TorsionSpring(1.0), JointTravel(), name="coil")
    with pytest.raises(InputError, match=r"fit must be .* where a mount holds a TorsionSpring \(coil\), got 'mount'"):
        _place(lambda height: Mechanism(ARM, springs=torsion), fit="mount")


def test_a_build_without_a_torque_anywhere_is_refused():
    """The attachment runs through the disc in every geometry."""

    def build(height):
        disc = Disc(Point("ground", (0.08, height)), radius=0.05, turn="cw")
        path = Cable(Point("ground", (-0.03, -0.3)), disc, Point("arm", (0.08, 0)))
        return Mechanism(ARM, springs=SpringMount(ZeroLengthSpring(1.0), path))

    for kind in (lambda height: build(height), lambda height: build(float(height))):
        with pytest.raises(InputError, match="build must make a mechanism with a torque at every pose for some knobs"):
            _place(kind, knobs={"height": (0.0, 0.01)}, fit="mount")


def test_places_at_which_nothing_can_be_built_are_passed_over():
    def build(height):
        if float(height) > 0.15:
            raise InputError("too tall")
        return _build(height)

    found = _place(build, fit="rate", knobs={"height": (0.08, 0.2)})
    assert found.derivatives == "none"
    assert found.require().values["height"] <= 0.15
    assert found.values["height"] == pytest.approx(0.15, abs=1e-3)


def test_a_local_build_cannot_be_sent_to_processes():
    def build(height):
        return _build(float(height))

    with (
        ProcessPoolExecutor(1) as pool,
        pytest.raises(InputTypeError, match="build must be a function of a module for an executor of processes"),
    ):
        _place(build, executor=pool)


def _build_with_a_fault(height):
    """Cannot be recorded, and reaches in a worker for what is not there."""
    return _build(float(height) if multiprocessing.parent_process() is None else height.missing)


def test_an_error_of_a_build_is_no_fault_of_the_sending():
    with ProcessPoolExecutor(1) as pool, pytest.raises(AttributeError, match=r"'float' object has no .*missing"):
        _place(_build_with_a_fault, executor=pool)


def test_nothing_fits_is_a_result():
    found = _place(fit="rate", keep_in={Point("arm", (0.35, 0)): ((None, "100 mm"), (None, None))})
    assert not found.success
    assert not found.feasible
    assert "misses point of arm at (0.35, 0.0): x: 350.0 mm, at most 100.0 mm" in found.status
    assert "margin -250.0 mm" in str(found)
    with pytest.raises(NoSolution, match=r"keeps every limit; the nearest one misses point of arm .* margin -250.0 mm"):
        found.require()


def test_a_spring_on_the_wrong_side_is_left_out():
    found = _place(knobs={"height": (-0.3, -0.2)}, fit="rate", least_margin=None)
    assert found.left_out == ("spring 1",)
    assert not found.success
    assert found.status == "no spring makes the residual smaller anywhere between the bounds"
    assert "best left out" in str(found)
    with pytest.raises(NoSolution, match="no spring makes the residual smaller"):
        found.require()


def test_a_result_prints_knobs_limits_and_what_is_reached():
    found = _place(
        knobs={"height": ("80 mm", "200 mm"), "radius": (0.06, 0.1)},
        fit="rate",
        stored_energy_limit=8.0,
        keep_in={Point("arm", (0.1, 0)): ((None, 0.2), (-0.2, None)), lambda height, radius: Point("arm", (radius, 0)): ((0, 1), (-1, 1))},
        keep_out=[Disc(Point("ground", (0, 0)), radius=0.01, turn="cw"), (Point("ground", (0.3, 0)), "20 mm")],
    )  # fmt: skip
    text = str(found)
    assert "height" in text
    assert "(from 80.00 mm to 200.0 mm)" in text
    assert "(from 0.06000 to 0.1000)" in text
    assert "spring 1: distance to disc 2" in text
    assert "point from the knobs: x" in text
    names = [one.name for one in found.limits]
    assert names.count("point of arm at (0.1, 0.0): x") == 1
    assert max(map(len, names)) < 60
    assert set(found.active) <= {"height", "radius", *names}
    for one in found.knobs:
        assert one.margin >= 0
        assert (one.at_bound is None) == (one.name not in found.active)
    assert found.require() is found


def test_knobs_at_a_bound_say_what_room_would_bring():
    text = str(_place(knobs={"height": ("80 mm", "150 mm")}, fit="rate"))
    assert "at its upper bound: 1 mm more would take about" in text
    text = str(_place(knobs={"height": (0.08, 0.15)}, fit="rate"))
    assert "at its upper bound: 1 % of its range more would take about" in text


def test_room_for_a_slide_brings_newtons():
    """A weight W on a vertical slide of stroke s under an ideal spring h above: the best rate leaves W·s / (2·h - s).

    With 2 kg, s = 0.1 m and h = 0.4 m that falls by 2·W·s / (2·h - s)² = 8.005 N for each metre of h.
    """

    def rising(height):
        slide = PlanarChain([Link("slide", Body(2.0, (0, 0)), joint="prismatic", skew="90 deg")])
        path = Straight(Point("ground", (0.0, height)), Point("slide", (0, 0)))
        return Mechanism(slide, springs=SpringMount(ZeroLengthSpring(100), path), travel=(0, "100 mm"))

    found = place(rising, knobs={"height": ("150 mm", "400 mm")}, fit="rate")
    assert found.residual.worst == pytest.approx(2 * 9.80665 * 0.1 / 0.7, rel=1e-9)
    assert found.knobs[0].gain == pytest.approx(2 * 2 * 9.80665 * 0.1 / 0.7**2, rel=1e-6)
    assert "at its upper bound: 1 mm more would take about 0.0080 N off" in str(found)


def test_springs_may_stay_as_they_are():
    """fit='none' searches geometry alone; rate · a · b = m · g · r then fixes the height."""
    spring = ZeroLengthSpring(858.081875)

    def build(height):
        return Mechanism(
            ARM, springs=SpringMount(spring, Straight(Point("ground", (0, height)), Point("arm", (0.08, 0))))
        )

    for norm in ("minimax", "rms"):
        found = _place(build, fit="none", norm=norm)
        assert found.values["height"] == pytest.approx(0.10, abs=1e-9)
        assert found.mechanism.springs[0].spring == spring


def test_fixed_mounts_keep_their_springs():
    def build(height):
        above = Straight(Point("ground", (0, height)), Point("arm", (0.08, 0)))
        return Mechanism(
            ARM,
            springs=[
                SpringMount(ZeroLengthSpring(400.0), above, name="given"),
                SpringMount(ZeroLengthSpring(1.0), above, name="new"),
            ],
        )

    found = _place(build, fixed="given")
    assert found.mechanism.springs[0].spring.rate == 400.0
    total = sum(mount.spring.rate for mount in found.mechanism.springs)
    assert total * 0.08 * found.values["height"] == pytest.approx(2 * 9.80665 * 0.35, rel=1e-9)


def test_compression_springs_with_their_rods():
    """A rod from below that presses a spring; its rigid length is chosen so that it never goes solid."""
    spring = CompressionSpring(1000.0, free_length=0.12, solid_length=0.05)

    def build(depth):
        return Mechanism(
            ARM, springs=SpringMount(spring, Straight(Point("ground", (0.0, -depth)), Point("arm", (0.03, 0))))
        )

    found = _place(build, knobs={"depth": (0.15, 0.4)}, fit="mount")
    state = found.require().mechanism.spring_states(Q)[0]
    assert np.min(state.margin) >= -1e-9
    assert found.residual.worst_fraction < 0.5  # it helps; no source says how much


def test_margins_may_be_left_out():
    short = ExtensionSpring(1000.0, free_length=0.03, longest=0.05)

    def build(height):
        return Mechanism(
            ARM, springs=SpringMount(short, Straight(Point("ground", (0, height)), Point("arm", (0.08, 0))))
        )

    assert not _place(build, fit="rate").success
    free = _place(build, fit="rate", least_margin=None)
    assert free.success
    assert free.limits == ()


def test_a_build_that_looks_at_the_kind_of_number_is_not_recorded():
    def build(height):
        return _build(height if isinstance(height, float) else 0.1 * height)

    found = _place(build, fit="rate")
    assert found.derivatives == "none"
    assert found.why == "build does another thing with numbers than with recorded variables"


def test_the_seed_changes_the_starts_and_not_the_answer():
    one, other = (_place(fit="rate", seed=seed, starts=3) for seed in (0, 7))
    assert one.residual.worst == pytest.approx(other.residual.worst, rel=1e-9)
    assert _place(fit="rate", seed=7, starts=3) == other

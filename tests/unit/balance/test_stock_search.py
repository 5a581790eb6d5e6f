"""Stock search: messages, rejections, near misses and how results print."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from springpoise import Arm, Body, Cable, Disc, ExtensionSpring, Mechanism, Point, SpringMount, balance
from springpoise.balance import PulleyRoute, Stock
from springpoise.errors import InputError, InputTypeError, NoSolution, PoiseFileError

ARM = Mechanism(Arm(Body(2.0, (0.35, 0.0))), travel=("-50 deg", "50 deg"))
STOCK = Stock(
    parts=["soft", "stiff"],
    rate=[700.0, 1500.0],
    free_length=[0.06, 0.05],
    initial_tension=[20.0, 15.0],
    longest=[0.30, 0.25],
    others=[{"price": "3"}, {"price": "5"}],
)
GRID = {"attach_radii": [0.05, 0.08], "anchor_heights": [0.15, 0.20]}
PULLEY = PulleyRoute(radius="10 mm", spring_end=("-20 mm", "-400 mm"))


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"attach_radii": []}, "attach_radii must be a value in m, got an empty array"),
        ({"attach_radii": [0.05, -0.08]}, "attach_radii must be > 0 m, got -0.08"),
        ({"anchor_heights": 0.0}, "anchor_heights must be > 0 m, got 0.0"),
        ({"anchor_heights": [0.1, float("nan")]}, "anchor_heights must be .* finite"),
        ({"anchor_angles": []}, "anchor_angles must be a value in rad, got an empty array"),
        ({"anchor_angles": 8.0}, r"anchor_angles must be between -6.283 and 6.283 rad, got 8.0; degrees\?"),
        ({"anchor_angles": 90.0}, r"anchor_angles must be .* got 90; degrees\?"),
        ({"attach_skews": [0.1, 10.0]}, r"attach_skews must be between -3.142 and 3.142 rad, got 10.0; degrees\?"),
        ({"attach_skews": "5 mm"}, r"attach_skews must be .*, got '5 mm'"),
        ({"counts": ()}, "counts must be at least one whole number >= 1, got none"),
        ({"counts": (1, 0)}, "counts must be whole numbers >= 1, got 0"),
        ({"counts": (1.5,)}, "counts must be whole numbers >= 1, got 1.5"),
        ({"counts": 2.0}, "counts must be whole numbers >= 1, got 2.0"),
        ({"counts": [[1, 2], [1]]}, r"counts must be whole numbers >= 1, got \[\[1, 2\], \[1\]\]"),
        ({"counts": True}, "counts must be whole numbers >= 1, got True"),
        ({"counts": "2"}, "counts must be whole numbers >= 1, got '2'"),
        ({"residual_limit": 0.0}, r"residual_limit must be > 0 N\*m, got 0.0"),
        ({"resolution": "-1 mm"}, "resolution must be > 0 m, got -0.001"),
        ({"keep": 0}, "keep must be a whole number >= 1, got 0"),
        ({"refine": -1}, "refine must be a whole number >= 0, got -1"),
        ({"refine": True}, "refine must be a whole number >= 0, got True"),
        ({"gravity": (0.0, 0.0)}, "arm must have something left to balance, got no torque"),
        ({"over": []}, "over must be at least one pose in rad, got none"),
    ],
)
def test_wrong_values(change, message):
    with pytest.raises(InputError, match=message):
        balance.search_stock(ARM, STOCK, **{**GRID, **change})


def test_an_arm_whose_own_spring_gives_no_torque_at_some_pose():
    inside = Cable(
        Point("ground", (-0.1, -0.2)), Disc(Point("ground", (0, 0.1)), radius=0.05, turn="cw"), Point("arm", (0.1, 0))
    )
    arm = Mechanism(
        ARM.linkage, springs=SpringMount(ExtensionSpring(500, free_length=0.05), inside), travel=(-1.5, 1.5)
    )
    with pytest.raises(
        InputError, match=r"arm must have a holding torque at every pose, got none at [\d.]+ deg; is an"
    ):
        balance.search_stock(arm, STOCK, **GRID)


def test_wrong_kinds():
    with pytest.raises(InputTypeError, match=r"pulley must be a PulleyRoute or None, got 0.01"):
        balance.search_stock(ARM, STOCK, **GRID, pulley=0.01)
    with pytest.raises(InputTypeError, match="stock must be a Stock or the path of its CSV file, got 3"):
        balance.search_stock(ARM, 3, **GRID)
    with pytest.raises(InputTypeError, match="arm must be an Arm or a Mechanism of one, got None"):
        balance.search_stock(None, STOCK, **GRID)
    with pytest.raises(PoiseFileError, match=r"nowhere\.csv: cannot be read"):
        balance.search_stock(ARM, Path("nowhere.csv"), **GRID)


def test_an_arm_that_is_balanced_already():
    done = balance.sine_match(ARM, attach_radius=0.08, anchor_height=0.1).mechanism
    with pytest.raises(InputError, match="arm must have something left to balance"):
        balance.search_stock(done, STOCK, **GRID)
    with pytest.raises(InputError, match="arm must have something left to balance"):
        balance.search_stock(Arm(Body(2.0, (0.0, 0.0))), STOCK, **GRID)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"radius": 0.0}, "PulleyRoute.radius must be > 0 m, got 0.0"),
        ({"turn": "left"}, "PulleyRoute.turn must be 'cw' or 'ccw', got 'left'"),
        ({"bearing_friction": -0.1}, "PulleyRoute.bearing_friction must be >= 0, got -0.1"),
        ({"bearing_friction": 0.1}, "bearing_radius must be > 0 m where bearing_friction is given"),
        ({"spring_end": (0.1,)}, "PulleyRoute.spring_end must be a pair in m, got 1 values"),
    ],
)
def test_a_wrong_pulley(change, message):
    with pytest.raises(InputError, match=message):
        PulleyRoute(**{"radius": 0.01, "spring_end": (0.0, -0.3), **change})


def test_what_a_search_prints():
    found = balance.search_stock(ARM, STOCK, **GRID)
    assert found.success and found.nearest_miss is None
    assert found.require() is found
    assert found.mechanism is found.best.mechanism
    assert found.best.others in ({"price": "3"}, {"price": "5"})
    text = str(found)
    assert re.search(rf"status  {len(found.candidates)} parts and counts listed of 16 candidates tried", text)
    for reason, number in found.rejected.items():
        assert re.search(rf"rejected: {reason} +{number}\n", text)
    assert re.search(r"^  part +count +attach mm +anchor mm +worst N\*m +worst % +rms %", text, re.MULTILINE)
    assert text.count(found.best.part) >= 2
    assert "none of these is beaten in residual, number of springs and pivot load at once" in text
    single = str(found.best)
    assert single.startswith("stock candidate\n")
    assert re.search(rf"part +{found.best.count} x {found.best.part}\n", single)
    assert re.search(r"stretch margin +[\d.]+ mm", single)
    assert "lacks" not in single


@pytest.mark.parametrize(
    ("stock", "grid", "pulley", "reason"),
    [
        ({"free_length": [0.28, 0.24]}, GRID, None, r"goes slack, by [\d.]+ mm"),
        (
            {"longest": [0.07, 0.06]},
            {"attach_radii": 0.05, "anchor_heights": 0.2},
            None,
            r"stretched beyond its longest length, by [\d.]+ mm",
        ),
        (
            {"longest": [5.0, 5.0]},
            GRID,
            PulleyRoute(radius=0.01, spring_end=(-0.02, 0.05)),
            r"longer than the room in front of the pulley, by [\d.]+ mm",
        ),
    ],
)  # fmt: skip
def test_the_nearest_miss_where_no_spring_stays_within_its_lengths(stock, grid, pulley, reason):
    fields = {name: getattr(STOCK, name) for name in ("parts", "rate", "free_length", "initial_tension", "longest")}
    found = balance.search_stock(ARM, Stock(**{**fields, **stock}), **grid, pulley=pulley)
    assert not found.success and not found.pareto
    miss = found.nearest_miss
    assert re.fullmatch(reason, miss.lacks)
    message = (
        f"nothing fits of {found.considered} candidates tried; nearest is {miss.count} x {miss.part}: {miss.lacks}"
    )
    assert found.status == message
    for ask in (found.require, lambda: found.best, lambda: found.mechanism):
        with pytest.raises(NoSolution, match=re.escape(message)):
            ask()
    assert re.search(r"lacks +" + reason, str(found))


def test_the_nearest_miss_where_a_limit_is_too_tight():
    found = balance.search_stock(ARM, STOCK, **GRID, residual_limit="1 mN*m")
    best = balance.search_stock(ARM, STOCK, **GRID).best
    assert found.residual_limit == 0.001
    assert found.nearest_miss.residual == best.residual
    assert found.nearest_miss.lacks == f"its worst residual is {best.residual.worst - 0.001:.4g} N*m above the limit"
    assert sum(found.rejected.values()) == found.considered
    assert "worst residual above the limit" in found.rejected


def test_what_refining_brings_below_the_limit_fits():
    coarse, fine = (balance.search_stock(ARM, STOCK, **GRID, refine=n).best.residual.worst for n in (0, 3))
    assert fine < coarse
    found = balance.search_stock(ARM, STOCK, **GRID, residual_limit=0.5 * (fine + coarse))
    assert found.best.residual.worst == fine
    assert all(one.residual.worst <= found.residual_limit for one in found.candidates)


def test_a_margin_is_kept_by_all():
    margin = 0.012
    found = balance.search_stock(ARM, STOCK, **GRID, least_margin="12 mm")
    assert found.success
    for one in (*found.candidates, *found.pareto):
        assert one.slack_margin >= margin - 1e-12
        assert one.stretch_margin >= margin - 1e-12
    with pytest.raises(InputError, match=r"^least_margin must be >= 0 m, got -0\.001$"):
        balance.search_stock(ARM, STOCK, **GRID, least_margin="-1 mm")


def test_the_mount_bears_the_part_s_name():
    found = balance.search_stock(ARM, STOCK, **GRID)
    assert found.mechanism.springs[-1].name == found.best.part


@pytest.mark.parametrize("resolution", ["5 mm", "20 mm"])
@pytest.mark.parametrize("end", [(-0.2, -0.3), (0.0, -0.45), (0.2, -0.3)])
def test_a_refined_mount_is_never_rounded_into_the_pulley(resolution, end):
    pulley = PulleyRoute(radius="30 mm", spring_end=end, turn="ccw")
    found = balance.search_stock(
        ARM, STOCK, attach_radii=np.linspace(0.03, 0.2, 9), anchor_heights=np.linspace(0.05, 0.25, 9),
        pulley=pulley, resolution=resolution, refine=6,
    )  # fmt: skip
    assert "attachment inside the pulley" in found.rejected
    for one in found.candidates:
        length = one.mechanism.spring_states(ARM.poses(181))[0].length
        assert np.all(np.isfinite(length))
        assert one.slack_margin > 0 and one.stretch_margin >= 0


def test_a_box_without_a_multiple_of_the_resolution_is_refined_to_its_edges():
    radii, heights = [0.0501, 0.0504, 0.0508], [0.1501, 0.1504, 0.1508]
    found = balance.search_stock(ARM, STOCK, attach_radii=radii, anchor_heights=heights, resolution="5 mm")
    assert found.success
    for one in found.candidates:
        assert one.attach_radius in radii
        assert one.anchor_height in heights


def test_of_parts_that_leave_alike_the_front_has_the_one_that_loads_the_pivot_least():
    """At one pose the line of force meets the pivot: every spring leaves the weight's torque there, sin(skew) of the peak."""
    rates, skew, radius, height = [500.0, 450.0, 150.0, 400.0, 420.0], 0.3, 0.08, 0.2
    many = len(rates)
    stock = Stock(
        parts=[f"p{rate:.0f}" for rate in rates], rate=rates, free_length=[0.05] * many,
        initial_tension=[5.0] * many, longest=[1.0] * many,
    )  # fmt: skip
    poses, weight = np.array([0.5 * np.pi - skew, 0.0]), 2.0 * 9.80665
    found = balance.search_stock(
        ARM,
        stock,
        attach_radii=radius,
        anchor_heights=height,
        attach_skews=skew,
        counts=1,
        over=poses,
        keep=1,
        refine=0,
    )
    turned = radius * np.exp(1j * (poses + skew))
    along = 1j * height - turned
    length = np.abs(along)
    loads = {}
    for rate in rates:
        force = (5.0 + rate * (length - 0.05)) * along / length
        left = weight * 0.35 * np.cos(poses) - (np.conj(turned) * force).imag
        if np.abs(left).max() <= weight * 0.35 * np.sin(skew) * (1 + 1e-9):
            loads[f"p{rate:.0f}"] = np.abs(force - 1j * weight).max()
    assert len(loads) >= 3
    assert found.best.residual.worst == pytest.approx(weight * 0.35 * np.sin(skew), rel=1e-9)
    lightest = min(found.pareto, key=lambda one: one.pivot_load)
    assert lightest.part == min(loads, key=lambda name: loads[name])
    assert lightest.pivot_load == pytest.approx(min(loads.values()), rel=1e-9)


def test_many_mounts_of_few_springs_are_cut_too():
    told = []
    found = balance.search_stock(
        ARM, STOCK, attach_radii=np.linspace(0.04, 0.1, 60), anchor_heights=np.linspace(0.1, 0.3, 60), over=[0.0, 0.4],
        refine=0, progress=lambda done, total: told.append(done),
    )  # fmt: skip
    assert found.considered == 60 * 60 * 2 * 2
    assert len(told) > 1
    assert told[-1] == found.considered


def test_nothing_can_be_reached():
    pulley = PulleyRoute(radius=0.15, spring_end=(0.4, -0.4), turn="ccw")
    found = balance.search_stock(ARM, STOCK, attach_radii=0.2, anchor_heights=0.2, pulley=pulley)
    assert found.nearest_miss is None
    assert found.rejected == {"attachment inside the pulley": 4}
    with pytest.raises(NoSolution, match=r"^nothing fits of 4 candidates tried$"):
        found.require()
    assert "attachment inside the pulley" in str(found)


def test_options():
    found = balance.search_stock(ARM, STOCK, **GRID, counts=2, keep=1, refine=1, gravity=(0.0, -5.0), pulley=PULLEY)
    assert len(found.candidates) == 1
    assert found.best.count == 2
    assert found.best.mechanism.gravity == (0.0, -5.0)
    assert found.best.residual == balance.residual(found.best.mechanism)
    one = balance.search_stock(
        ARM, STOCK, attach_radii="80 mm", anchor_heights="150 mm", counts=np.int64(1), keep=np.int64(2)
    )
    assert {c.count for c in one.candidates} == {1}
    assert not any(c.refined for c in one.candidates)


def test_refinement_within_a_line():
    found = balance.search_stock(
        ARM, STOCK, attach_radii=0.06, anchor_heights=[0.15, 0.2], resolution="1 mm", pulley=PULLEY
    )
    assert all(c.attach_radius == 0.06 for c in found.candidates)
    assert any(c.refined for c in found.candidates)


def test_an_anchor_aside_turns_the_attachment_with_it():
    tilted = balance.search_stock(ARM, STOCK, **GRID, anchor_angles="120 deg", refine=0)
    assert tilted.best.attach_angle == pytest.approx(np.radians(30))
    assert tilted.best.anchor_angle == pytest.approx(np.radians(120))


def test_directions_are_refined_with_the_rest_and_shown_where_they_differ():
    grid = {**GRID, "anchor_angles": np.radians([80, 90, 100]), "attach_skews": ["-3 deg", "0 deg", "3 deg"]}
    arm = Mechanism(ARM.linkage, travel=("-60 deg", "20 deg"))
    coarse, fine = (balance.search_stock(arm, STOCK, **grid, refine=n) for n in (0, 3))
    upright = balance.search_stock(arm, STOCK, **GRID, refine=0)
    assert coarse.considered == 9 * upright.considered
    assert fine.best.residual.worst < coarse.best.residual.worst < upright.best.residual.worst
    assert fine.best.refined
    for one in fine.candidates:
        assert np.radians(80) - 1e-12 <= one.anchor_angle <= np.radians(100) + 1e-12
        skew = one.attach_angle - (one.anchor_angle - np.radians(90))
        assert abs(skew) <= np.radians(3) + 1e-12
    assert re.search(r"attach mm +attach deg +anchor mm +anchor deg", str(fine))
    assert "deg" not in str(upright).split("rejected")[0]
    assert "anchor deg" not in str(upright)


def test_springs_that_are_there_count():
    there = balance.sine_match(Arm(Body(1.0, (0.35, 0.0))), attach_radius=0.08, anchor_height=0.1).mechanism
    loaded = Mechanism(ARM.linkage, springs=there.springs, travel=ARM.travel)
    found = balance.search_stock(loaded, STOCK, **GRID, counts=1, refine=0)
    alone = balance.search_stock(
        Mechanism(Arm(Body(1.0, (0.35, 0.0))), travel=ARM.travel), STOCK, **GRID, counts=1, refine=0
    )
    assert found.best.residual.worst == pytest.approx(alone.best.residual.worst, rel=1e-9)
    assert len(found.mechanism.springs) == 2

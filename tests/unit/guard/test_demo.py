"""The examples of the documentation: they hold as shipped, and a build that is off is caught."""

from __future__ import annotations

import shutil
from pathlib import Path

import attrs
import numpy as np
import pytest

from springpoise import guard, tolerance
from springpoise.balance import compare_methods, read_stock

EXAMPLES = Path(__file__).parents[3] / "docs" / "examples"
OPEN = EXAMPLES / "greenhouse_lift.poise.toml"
BUILT = EXAMPLES / "greenhouse_lift_built.poise.toml"
STOCK = EXAMPLES / "greenhouse_springs.csv"


@pytest.fixture(scope="module")
def found() -> guard.Design:
    """What the design of the open file finds, computed once."""
    return guard.design(OPEN)


def test_the_built_file_is_what_the_design_finds(found: guard.Design) -> None:
    assert found.require() is found
    assert found.solved is not None
    assert found.after is not None
    assert found.after.worst_fraction < 0.01
    assert max(map(len, str(found).splitlines())) <= 100
    built = guard.load(BUILT)
    assert found.solved == built
    mount = built.mechanism.springs[0]
    stock = read_stock(STOCK)
    assert mount.spring == stock.spring(stock.parts.index(str(mount.name)))


def test_the_built_file_keeps_its_limits() -> None:
    report = guard.check(BUILT)
    assert report.holds, str(report)
    assert all(verdict.margin > 0 for verdict in report.verdicts)


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ('["-18 mm", "235.4 mm"]', '["-18 mm", "240.4 mm"]'),
        ('["-18 mm", "235.4 mm"]', '["-18 mm", "230.4 mm"]'),
        ('["-18 mm", "235.4 mm"]', '["-13 mm", "235.4 mm"]'),
        ('["-18 mm", "235.4 mm"]', '["-23 mm", "235.4 mm"]'),
        ('["-36 mm", "-400 mm"]', '["-36 mm", "-395 mm"]'),
        ('["-36 mm", "-400 mm"]', '["-36 mm", "-405 mm"]'),
    ],
)
def test_an_anchor_that_is_5_mm_off_breaks_a_limit(tmp_path: Path, old: str, new: str) -> None:
    text = BUILT.read_text(encoding="utf-8")
    assert old in text
    moved = tmp_path / "moved.poise.toml"
    moved.write_text(text.replace(old, new), encoding="utf-8")
    report = guard.check(moved)
    what = [verdict.what for verdict in report.failures]
    assert what in (["residual torque"], ["residual torque", "yield"])  # a slot that is off leaves less to adjust
    assert "% of the peak gravity torque, where 1.5 % is allowed) at " in report.failures[0].sentence
    assert "outside the limit of at most 0.627" in report.failures[0].sentence
    shift = guard.compare(BUILT, moved, payload="half a crate").shift
    assert shift > 0.25


def test_the_design_compares_the_methods(found: guard.Design) -> None:
    """The same as a call of the solver itself on the arm with its payload."""
    document = guard.load(OPEN)
    arm = document.with_payload("half a crate")
    assert document.design is not None
    assert document.design.compare is not None
    direct = compare_methods(
        arm,
        attach_radius=("80 mm", "180 mm"),
        anchor_height=("120 mm", "240 mm"),
        over=arm.poses(181),
        methods=document.design.compare.methods,
    )
    assert found.methods is not None
    assert found.methods.ranking == direct.ranking
    for row in direct.rows:
        assert row.figures is not None
        same = found.methods.row(row.method).figures
        assert same is not None
        assert same.residual.worst == pytest.approx(row.figures.residual.worst, rel=1e-9, abs=1e-12)
        assert same.pivot_load == pytest.approx(row.figures.pivot_load, rel=1e-9)
    text = " ".join(str(found).split())
    assert "The design is a spring on pulley, number 3 of 6 here." in text
    assert f"The parts found leave {100 * found.after.worst_fraction:.2f} %." in text  # type: ignore[union-attr]


def test_the_design_states_its_yield_and_the_adjuster_to_provide(found: guard.Design) -> None:
    """The same as calls of the solvers themselves on the mechanism as built."""
    study, built = found.study, guard.load(BUILT)
    assert study is not None
    assert built.tolerances is not None
    mechanism = built.with_payload("half a crate")
    spreads = {}
    for one in built.tolerances.spreads:
        width = one.normal or one.uniform
        make = tolerance.Spread.normal if one.normal else tolerance.Spread.uniform
        spreads[one.field] = make(str(width), shared=one.shared)
    direct = tolerance.scatter(mechanism, spreads, builds=4000, limit="3 %")
    assert study.yield_share == direct.yield_within()
    assert study.scatter.quantile(0.95) == direct.quantile(0.95)
    screws = [one.field for one in built.tolerances.adjusters or ()]
    adjusted = tolerance.adjusters(mechanism, spreads, screws, builds=1000, coverage=0.99)
    for row in study.adjusters:
        assert row.residual == pytest.approx(adjusted[row.field].residual, rel=1e-12)
    assert study.adjuster is not None
    assert study.adjuster.label == "height of the pulley"
    assert study.adjuster.range == pytest.approx((-0.012, 0.012))
    assert study.adjuster.yield_share > 0.99
    assert study.yield_share < 0.7
    assert study.costs[0].label == "batch springs"
    text = str(found)
    assert "Provide: height of the pulley, to be moved by -12.0 mm to +12.0 mm" in text
    assert text.count("Caution: ") == 1


def test_the_examples_say_that_they_are_invented() -> None:
    for file in (OPEN, BUILT, STOCK):
        assert "invented" in file.read_text(encoding="utf-8").splitlines()[0], file


def test_the_invented_springs_obey_their_own_wire() -> None:
    """Rate from G·d⁴/(8·D³·n) with G = 80 GPa, rounded to three digits; body stress from 8·F·D·K/(π·d³).

    Music wire's tensile strength is 2211 MPa·mm^0.145 / d^0.145, 45 % of which the body may carry (a
    textbook's design values, from memory); K is Wahl's factor.
    """
    stock = read_stock(STOCK)
    assert len(stock) >= 60
    others = stock.others
    wire = np.array([float(row["wire [mm]"]) for row in others])
    mean = np.array([float(row["outside diameter [mm]"]) for row in others]) - wire
    coils = np.array([float(row["coils"]) for row in others])
    assert stock.rate == pytest.approx(1e3 * 80e3 * wire**4 / (8 * mean**3 * coils), rel=6e-3)
    index = mean / wire
    wahl = (4 * index - 1) / (4 * index - 4) + 0.615 / index
    load = stock.initial_tension + stock.rate * (stock.longest - stock.free_length)
    stress = 8 * load * mean * wahl / (np.pi * wire**3)
    strength = 2211 / wire**0.145
    assert np.all(stress <= 0.4501 * strength)
    assert np.all(stress > 0.43 * strength)


def test_the_design_is_the_same_elsewhere(tmp_path: Path) -> None:
    for file in (OPEN, STOCK):
        shutil.copy(file, tmp_path / file.name)
    there = guard.load(tmp_path / OPEN.name)
    assert there == guard.load(OPEN)
    assert attrs.evolve(there, path=None) == there

"""What files leave open, found; and the report to build from."""

from __future__ import annotations

import itertools
import json
import math
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import attrs
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    guard,
)
from springpoise.balance import search_stock
from springpoise.errors import InputError, NoSolution, PoiseFileError
from springpoise.guard.solving.drilling import lack

Write = Callable[..., Path]
STOCK = """\
part,rate [N/mm],free length [mm],initial tension [N],longest length [mm],price [EUR]
A-1,0.245,60,14.7,400,3.10
A-2,0.245,60,14.7,300,2.90
A-3,2.0,200,10,260,9.00
"""


def without_springs(lift: str) -> tuple[str, str]:
    return lift[lift.index("[[springs]]") : lift.index("[[payloads]]")], ""


@pytest.fixture
def stock_file(written: Write, lift: str, tmp_path: Path) -> Callable[..., Path]:
    """The lift without springs, to be balanced from the list above."""
    (tmp_path / "list.csv").write_text(STOCK, encoding="utf-8")

    def write(*changes: tuple[str, str], behind: str = "") -> Path:
        table = (
            '\n[design]\nmethod = "stock"\nstock = "list.csv"\ncounts = [1, 2]\n'
            'attach_radii = { from = "100 mm", to = "140 mm", steps = 5 }\n'
            'anchor_heights = { from = "180 mm", to = "220 mm", steps = 5 }\n'
        )
        for old, new in changes:
            assert old in table, old
            table = table.replace(old, new)
        return written(without_springs(lift), behind=table + behind)

    return write


def test_by_sine(written: Write, lift: str) -> None:
    file = written(
        without_springs(lift),
        behind='\n[design]\nmethod = "sine"\nattach_radius = "0.12 m"\nanchor_height = "0.2 m"\ncount = 2\n',
    )
    found = guard.design(file).require()
    assert found.solved is not None
    mount = found.solved.mechanism.springs[0]
    assert mount.spring.rate == pytest.approx(245.0)  # type: ignore[attr-defined]
    assert mount.count == 2
    assert found.before.worst == pytest.approx(11.76)
    assert found.after is not None
    assert found.after.worst < 1e-9
    assert found.solved.design is None
    assert found.report is not None
    assert found.report.holds


def test_by_fit_with_some_springs_given(written: Write, lift: str) -> None:
    mount = lift[lift.index("[[springs]]") : lift.index("[[payloads]]")]
    given = mount.replace("count = 2", "count = 1").replace('"main"', '"given"')
    opened = given.replace('"0.245 N/mm"', '"open"').replace('"given"', '"found"')
    file = written((mount, opened + given), behind='\n[design]\nmethod = "fit"\n')
    found = guard.design(file).require()
    assert found.solved is not None
    assert found.before.worst == pytest.approx(5.88)  # one of two equal springs is there
    names = [one.name for one in found.solved.mechanism.springs]
    assert names == ["found", "given"]
    assert found.solved.mechanism.springs[0].spring.rate == pytest.approx(245.0)  # type: ignore[attr-defined]
    assert found.solved.mechanism.springs[1] == guard.load(file).mechanism.springs[0]
    assert found.solved.open_springs == ()


def test_by_fit_of_rate_and_preload(written: Write) -> None:
    """An extension spring may reach zero free length by its initial tension."""
    file = written(
        (
            'kind = "zero length"\nrate = "0.245 N/mm"',
            'kind = "extension"\nrate = "open"\nfree_length = "60 mm"\ninitial_tension = "open"',
        ),
        behind='\n[design]\nmethod = "fit"\nnorm = "rms"\n',
    )
    found = guard.design(file).require()
    assert found.solved is not None
    spring = found.solved.mechanism.springs[0].spring
    assert spring.rate == pytest.approx(245.0)  # type: ignore[attr-defined]
    assert spring.initial_tension == pytest.approx(245.0 * 0.06)  # type: ignore[attr-defined]


def test_by_fit_where_no_spring_helps(written: Write) -> None:
    below = ('at = ["0 m", "0.2 m"]', 'at = ["0 m", "-0.2 m"]')
    file = written(('"0.245 N/mm"', '"open"'), below, behind='\n[design]\nmethod = "fit"\n')
    found = guard.design(file)
    assert found.solved is None
    assert not found.success
    assert found.status == "no spring at these mounts makes the residual smaller"
    with pytest.raises(NoSolution, match="no spring at these mounts"):
        found.require()
    json.dumps(found.to_dict(), allow_nan=False)
    assert "Caution: " in str(found)


def test_from_stock(stock_file: Callable[..., Path]) -> None:
    found = guard.design(stock_file()).require()
    assert found.solved is not None
    assert found.chosen is not None
    mount = found.solved.mechanism.springs[0]
    # Initial tension over rate is the free length: a spring of zero free length, k·a·b = m·g·r with two.
    assert (mount.name, mount.count) == ("A-1", 2)
    assert found.chosen.attach_radius * found.chosen.anchor_height == pytest.approx(0.12 * 0.2, rel=1e-3)
    assert found.after is not None
    assert found.after.worst_fraction < 0.001


def test_attachments_may_be_turned(stock_file: Callable[..., Path], tmp_path: Path) -> None:
    plain = guard.design(stock_file())
    turned = guard.design(stock_file(("counts", 'attach_skews = ["-8 deg", "0 deg", "8 deg"]\ncounts')))
    assert turned.search is not None and plain.search is not None
    assert turned.search.considered == 3 * plain.search.considered
    assert turned.search.best.residual.worst <= plain.search.best.residual.worst
    document = guard.load(stock_file())
    given = document.design
    assert isinstance(given, guard.StockRequest)
    direct = search_stock(
        document.mechanism,
        tmp_path / "list.csv",
        attach_radii=given.attach_radii.values,
        anchor_heights=given.anchor_heights.values,
        attach_skews=np.radians([-8.0, 0.0, 8.0]),
        counts=given.counts,
        keep=12,
        refine=12,
    )
    assert [one.residual.worst for one in turned.search.candidates] == pytest.approx(
        [one.residual.worst for one in direct.candidates]
    )
    angles = {row["attach_angle_rad"] for row in turned.to_dict()["ranking"]}
    assert angles == {one.attach_angle for one in turned.search.candidates}
    assert ("attach deg" in str(turned)) == (len(angles) > 1)
    assert "attach deg" not in str(plain)


def test_mounts_are_rounded_to_what_is_drilled(stock_file: Callable[..., Path]) -> None:
    found = guard.design(stock_file(("counts", 'resolution = "1 mm"\ncounts')))
    assert found.solved is not None
    path = found.solved.mechanism.springs[0].path
    for point in (path.first, path.last):  # type: ignore[attr-defined]
        for x in point.at:
            assert 1e3 * x == pytest.approx(round(1e3 * x), abs=1e-9)


ONE_TURNED_MOUNT = (
    ('from = "100 mm", to = "140 mm", steps = 5', 'from = "120 mm", to = "120 mm", steps = 1'),
    ('from = "180 mm", to = "220 mm", steps = 5', 'from = "200 mm", to = "200 mm", steps = 1'),
    ("[1, 2]", '[2]\nattach_skews = ["8 deg"]'),
)
"""The attachment is at (118.8, 16.7) mm."""


def greatest_length(attach: tuple[float, float]) -> float:
    """From an anchor 200 mm above the pivot, over the lift's travel."""
    turned = complex(*attach) * np.exp(1j * np.radians(np.linspace(-60, 75, 181)))
    return float(np.max(np.abs(turned - 0.2j)))


def test_what_the_search_keeps_is_kept_when_mounts_are_rounded(stock_file: Callable[..., Path], tmp_path: Path) -> None:
    """The nearest hole would overstretch the spring, and so would the next; the third does not."""
    exact = 0.12 * np.exp(1j * np.radians(8))
    holes = sorted(itertools.product((0.11, 0.12), (0.01, 0.02)), key=lambda at: abs(complex(*at) - exact))
    longest = 0.3038
    assert greatest_length((exact.real, exact.imag)) < longest
    assert [greatest_length(hole) <= longest for hole in holes] == [False, False, True, True]
    (tmp_path / "list.csv").write_text(f"{STOCK.splitlines()[0]}\nB-1,0.245,60,14.7,{1e3 * longest},3.10\n", "utf-8")
    found = guard.design(stock_file(*ONE_TURNED_MOUNT, ("counts", 'resolution = "10 mm"\ncounts')))
    assert found.solved is not None
    assert found.status.startswith("2 x B-1, rank 1 of 1")
    assert found.solved.mechanism.springs[0].path.last.at == pytest.approx(holes[2])  # type: ignore[attr-defined]


def test_where_no_rounded_mount_keeps_what_is_asked(stock_file: Callable[..., Path]) -> None:
    plain = guard.design(stock_file(*ONE_TURNED_MOUNT)).search
    assert plain is not None
    limit = f'residual_limit = "{100.001 * plain.best.residual.worst_fraction:.5f} %"\nresolution = "400 mm"'
    found = guard.design(stock_file(*ONE_TURNED_MOUNT, ("counts", f"{limit}\ncounts")))
    assert found.search is not None
    assert found.search.success
    assert found.solved is None
    assert not found.success
    message = (
        r"none of \d parts and counts fits with its mounts rounded to 400 mm; best is 2 x A-1: "
        r"its worst residual is [\d.]+ N\*m above the limit"
    )
    assert re.fullmatch(message, found.status)
    assert "Stock ranking" in str(found)
    with pytest.raises(NoSolution, match=message):
        found.require()


def test_a_part_that_no_rounded_mount_holds_is_passed_over(stock_file: Callable[..., Path], tmp_path: Path) -> None:
    """With holes every 400 mm the spring is 400 mm long at the least: too long for the first, however well it balances."""
    (tmp_path / "list.csv").write_text(
        STOCK.splitlines()[0] + "\nB-1,0.245,60,14.7,395,3.10\nB-2,0.245,60,14.5,450,3.30\n", encoding="utf-8"
    )
    file = stock_file(*ONE_TURNED_MOUNT, ("counts", 'resolution = "400 mm"\ncounts'))
    text = file.read_text(encoding="utf-8")
    file.write_text(re.sub(r"\[\[limits\]\].*(?=\[design\])", "", text, flags=re.DOTALL), encoding="utf-8")
    found = guard.design(file)
    assert found.search is not None
    assert [one.part for one in found.search.candidates] == ["B-1", "B-2"]
    assert found.status == "2 x B-2, rank 2: the first that fits with its mounts rounded"


HOOK = Point("arm", (0.1, 0))
STRAIGHT = Straight(Point("ground", (0, 0.2)), HOOK)
OVER_PULLEY = Cable(Point("ground", (-0.01, -0.2)), Disc(Point("ground", (-0.01, 0.2)), radius=0.01, turn="cw"), HOOK)
INSIDE = Cable(Point("ground", (-0.01, -0.2)), Disc(Point("ground", (-0.01, 0.09)), radius=0.1, turn="cw"), HOOK)


@pytest.mark.parametrize(
    ("spring", "path", "rigid", "limit", "message"),
    [
        ({}, STRAIGHT, 0.0, math.inf, None),
        ({}, STRAIGHT, 0.0, 0.1, r"its worst residual is [\d.]+ N\*m above the limit"),
        (
            {"free_length": 0.14},
            STRAIGHT,
            0.0,
            math.inf,
            r"its spring comes within -[\d.]+ mm of an end of its lengths",
        ),
        ({"longest": 0.29}, STRAIGHT, 0.0, math.inf, r"its spring comes within -[\d.]+ mm of an end of its lengths"),
        ({"free_length": 0.101}, STRAIGHT, 0.0, math.inf, r"its spring comes within 5\.6 mm of an end of its lengths"),
        ({"longest": 0.9}, OVER_PULLEY, 0.4, math.inf, None),
        ({"longest": 0.9}, OVER_PULLEY, 0.3, math.inf, "its spring does not fit in front of the pulley"),
        ({}, INSIDE, 0.0, math.inf, "its cable does not reach the arm at every pose"),
    ],
)
def test_what_a_rounded_mount_lacks(
    spring: dict[str, float], path: Any, rigid: float, limit: float, message: str | None
) -> None:
    """The attachment 100 mm out, the anchor 200 mm up: lengths from 106.6 to 290.9 mm."""
    one = ExtensionSpring(300, **{"free_length": 0.05, "longest": 0.4, **spring})
    arm = Mechanism(
        Arm(Body(3, (0.4, 0))), springs=SpringMount(one, path, rigid_length=rigid), travel=("-60 deg", "75 deg")
    )
    steps = guard.Steps(first=0.1, last=0.1, steps=1)
    request = guard.StockRequest(stock="x", attach_radii=steps, anchor_heights=steps, least_margin="6 mm")
    found = lack(arm, request, limit)
    assert found == message if message is None else re.fullmatch(message, str(found))


def test_the_payload_of_the_design_is_balanced_and_not_kept(stock_file: Callable[..., Path]) -> None:
    found = guard.design(stock_file(("counts", 'payload = "crate"\ncounts'), ("[1, 2]", "[3, 4]")))
    assert found.before.worst == pytest.approx(11.76 + 7.84)
    assert found.solved is not None
    assert found.solved.mechanism.linkage == found.document.mechanism.linkage
    assert found.after is not None
    assert found.after.worst < 0.5


def test_the_first_in_rank_that_keeps_all_limits_is_taken(stock_file: Callable[..., Path], tmp_path: Path) -> None:
    """The first balances exactly but comes near its longest length; the second leaves a little over."""
    one_mount = (
        ('from = "100 mm", to = "140 mm", steps = 5', 'from = "120 mm", to = "120 mm", steps = 1'),
        ('from = "180 mm", to = "220 mm", steps = 5', 'from = "200 mm", to = "200 mm", steps = 1'),
        ("[1, 2]", "[2]"),
    )
    file = stock_file(*one_mount, behind='\n[[limits]]\nwhat = "stretch"\nat_least = "20 mm"\n')
    (tmp_path / "list.csv").write_text(
        STOCK.splitlines()[0] + "\nB-1,0.245,60,14.7,315,3.10\nB-2,0.245,60,14.5,400,3.30\n", encoding="utf-8"
    )
    found = guard.design(file).require()
    assert found.search is not None
    assert [one.part for one in found.search.candidates] == ["B-1", "B-2"]
    assert found.chosen is found.search.candidates[1]
    assert found.status == "2 x B-2, rank 2: the first that keeps all limits"


def test_where_no_candidate_keeps_all_limits(stock_file: Callable[..., Path]) -> None:
    found = guard.design(stock_file(behind='\n[[limits]]\nwhat = "stored energy"\nat_most = "1 J"\n'))
    assert found.solved is not None
    assert not found.success
    assert found.status.endswith("none of them keeps all limits")
    with pytest.raises(
        NoSolution, match=r"none of them keeps all limits; stored energy is .* outside the limit of at most 1"
    ):
        found.require()


def test_where_nothing_fits(stock_file: Callable[..., Path]) -> None:
    found = guard.design(
        stock_file(("counts", 'residual_limit = "0.0001 %"\ncounts'), ("steps = 5 }\nanchor", "steps = 2 }\nanchor"))
    )
    assert found.solved is None
    text = str(found)
    assert "Nothing fits" in text
    assert "Nearest miss: its worst residual is " in text
    assert "above the limit" in text
    data = json.loads(json.dumps(found.to_dict(), allow_nan=False))
    assert data["success"] is False
    assert data["ranking"] == []
    assert data["nearest_miss"]["part"] in {"A-1", "A-2", "A-3"}
    assert "springs" not in data


def test_the_report_has_what_a_builder_needs(stock_file: Callable[..., Path]) -> None:
    found = guard.design(stock_file())
    text = str(found)
    assert max(map(len, text.splitlines())) <= 100
    for wanted in (
        r"before, without springs +11\.76 +100\.00",
        r"2 x A-1, extension spring: rate 245\.0 N/m, free length 60\.00 mm, initial tension 14\.70 N",
        r"anchor +ground +0\.0 +\d+\.\d",
        r"attachment +arm +\d+\.\d +0\.0",
        r"length of one +\d+\.\d\d mm at 75\.00 deg to \d+\.\d\d mm at -60\.00 deg",
        r"load of one +\d+\.\d+ N at 75\.00 deg to",
        r"margin to going slack +\d+\.\d\d mm",
        r"margin to the longest length +\d+\.\d\d mm",
        r"stored energy, all springs +at most \d+\.\d+ J, at -60\.00 deg",
        r"load on the pivot +at most",
        r"friction band +up to \+-0\.2000 N\*m",
        r"stays put by friction alone everywhere",
        r"crate +7\.8\d+ +0\.00 +8\.0\d+ +0\.00 +4\.0\d+ +0\.00",
        r"Limits: all 1 limits hold",
        r"2 x A-1 +taken",
        r"100 candidates tried|150 candidates tried",
    ):
        assert re.search(wanted, text), wanted
    assert text.count("Caution:") == 1
    assert "local codes and licensed practice prevail" in " ".join(text.split())


def test_the_report_as_json(stock_file: Callable[..., Path]) -> None:
    data = json.loads(json.dumps(guard.design(stock_file()).to_dict(), allow_nan=False))
    assert data["before"]["worst_Nm"] == pytest.approx(11.76)
    spring = data["springs"][0]
    assert (spring["name"], spring["rate_N_per_m"], spring["free_length_m"]) == ("A-1", 245.0, 0.06)
    assert [place["what"] for place in spring["places"]] == ["anchor", "attachment"]
    assert data["ranking"][0]["taken"] is True
    assert data["ranking"][0]["others"] == {"price [EUR]": "3.10"}
    assert data["limits"]["holds"] is True
    assert data["actuator"][0]["current_clockwise"]["value_A"] > 0
    assert data["caution"].startswith("springs store energy")


def test_a_torsion_spring_in_the_report(written: Write) -> None:
    """Its angles are angles, and it has no mount to drill."""
    file = written(
        ('kind = "zero length"\nrate = "0.245 N/mm" # bought', 'kind = "torsion"\nrate = "open"\nfree_angle = "open"'),
        (
            'kind = "straight"\nfirst = { body = "ground", at = ["0 m", "0.2 m"] }\n'
            'last = { body = "arm", at = ["0.12 m", "0 m"] }',
            'kind = "joint travel"',
        ),
        ('at_most = "3 %"', 'at_most = "40 %"'),
        behind='\n[design]\nmethod = "fit"\n',
    )
    text = str(guard.design(file).require())
    assert re.search(r"2 x main, torsion spring: rate \d+\.\d+ N\*m/rad, free angle \d+\.\d\d deg", text)
    assert "angle of one" in text
    assert "torque of one" in text
    assert "margin to the upper end of its range  no limit" in text
    assert "x mm" not in text


def test_what_cannot_be_designed(written: Write, stock_file: Callable[..., Path], tmp_path: Path) -> None:
    with pytest.raises(
        PoiseFileError, match=r"lift\.poise\.toml: must have a table design that says what is to be found"
    ):
        guard.design(written())
    with pytest.raises(InputError, match="the document: must have a table design"):
        guard.design(attrs.evolve(guard.load(written()), path=None, title=""))
    with pytest.raises(PoiseFileError, match=r"no\.csv: cannot be read: No such file"):
        guard.design(stock_file(("list.csv", "no.csv")))
    with pytest.raises(PoiseFileError, match=re.escape(f"{tmp_path}: is a folder, not a file")):
        guard.design(stock_file(("list.csv", ".")))
    (tmp_path / "list.csv").write_text("part\nA\n", encoding="utf-8")
    with pytest.raises(PoiseFileError, match=r"list\.csv: column 'rate' must be there once"):
        guard.design(stock_file())


def test_a_solver_that_refuses_says_so_for_the_file(written: Write) -> None:
    file = written(
        ('kind = "zero length"', 'kind = "extension"\nfree_length = "1 mm"'),
        behind='\n[design]\nmethod = "sine"\nattach_radius = "0.12 m"\nanchor_height = "0.2 m"\n',
    )
    message = r"lift\.poise\.toml: design: arm\.springs\[0\] must be a ZeroLengthSpring on a Straight path, got Ext"
    with pytest.raises(PoiseFileError, match=message):
        guard.design(file)


def test_springs_that_are_there_stay(stock_file: Callable[..., Path], written: Write, lift: str) -> None:
    file = stock_file()
    text = file.read_text(encoding="utf-8")
    mount = without_springs(lift)[0].replace("count = 2", "count = 1")
    file.write_text(text.replace("[[payloads]]", f"{mount}\n[[payloads]]", 1), encoding="utf-8")
    found = guard.design(file)
    assert found.solved is not None
    assert [one.name for one in found.solved.mechanism.springs] == ["main", "A-1"]
    assert "before, as given" in str(found)
    assert found.before.worst == pytest.approx(5.88)


def test_steps() -> None:
    steps = guard.Steps(first=0.1, last=0.2, steps=3)
    assert steps.values.tolist() == pytest.approx([0.1, 0.15, 0.2])
    assert guard.OfPeak(3.0).share == 0.03
    assert str(guard.OfPeak(2.5)) == "2.5 %"
    assert math.isclose(
        guard.StockRequest(stock="x", attach_radii=steps, anchor_heights=steps).anchor_angle, math.pi / 2
    )

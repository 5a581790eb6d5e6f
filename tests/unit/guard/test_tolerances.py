"""Tolerances in a file: what is read, refused, judged, reported and compared."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Callable
from pathlib import Path

import attrs
import pytest

from springpoise import Arm, Body, Mechanism, guard, tolerance
from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.guard.builds.study import study_of
from springpoise.guard.check import builds_of

Write = Callable[..., Path]

STATED = """
[tolerances]
residual_limit = "5 %"
builds = 2000
spreads = [
    { name = "rate", field = "springs[main].spring.rate", normal = "4 %" },
    { field = "springs[0].path.first.at[1]", uniform = "2 mm" },
]
adjusters = [{ name = "anchor", field = "springs[0].path.first.at[1]", reach = "40 mm" }]
"""
YIELD = '\n[[limits]]\nwhat = "yield"\nat_least = "50 %"\n'
ADJUSTED = '\n[[limits]]\nwhat = "yield"\nat_least = "99 %"\nadjuster = "anchor"\n'


def stated(*changes: tuple[str, str]) -> str:
    text = STATED
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new)
    return text


def test_what_is_read(written: Write) -> None:
    found = guard.load(written(behind=STATED)).tolerances
    assert found is not None
    assert (found.residual_limit, found.builds, found.seed, found.poses) == (guard.OfPeak(5.0), 2000, 1, 121)
    first, second = found.spreads
    assert (first.label, str(first)) == ("rate", "normal 4 %")
    assert (second.label, second.uniform) == ("springs[0].path.first.at[1]", guard.Width(0.002, "m"))
    assert found.adjuster("anchor") == found.adjuster("springs[0].path.first.at[1]")
    assert str(found.adjuster("anchor")) == "springs[0].path.first.at[1] within +-40 mm"
    assert found.adjuster("hook") is None


def test_what_is_saved_reads_back(written: Write, tmp_path: Path) -> None:
    document = guard.load(written(behind=STATED + YIELD + ADJUSTED))
    guard.save(document, tmp_path / "copy.poise.toml")
    assert guard.load(tmp_path / "copy.poise.toml") == document
    (tmp_path / "bare.poise.toml").write_text(guard.dump(document), encoding="utf-8")
    assert guard.load(tmp_path / "bare.poise.toml") == document
    assert 'at_least = "50 %"' in guard.dump(document)


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ("main].spring.rate", "main].spring.rat", r"tolerances\.spreads\[1\]\.field must be a number of the mechanism, "
         r"got 'springs\[main\]\.spring\.rat'; did you mean 'springs\[0\]\.spring\.rate'\?"),
        ("springs[main]", "springs[mian]", r"got 'springs\[mian\]\.spring\.rate'; did you mean springs\[main\]\?"),
        ("springs[main]", "springs[1]", r"got 'springs\[1\]\.spring\.rate'; springs are counted from 0 here, and there "
         r"is 1"),
        ("springs[main].spring.rate", "springs[main].count", r"got 'springs\[main\]\.count'; a whole number does not"),
        ("springs[main].spring.rate", "travel[0]", r"got 'travel\[0\]'; the travel is where the mechanism is used"),
        ("springs[main].spring.rate", "sprocket", r"got 'sprocket'; names begin with linkage, springs\[0\], friction"),
        ("springs[main].spring.rate", "springs[main].path.first.at[1]", r"spreads\[2\]\.field must be one that no other "
         r"spread has, got 'springs\[0\]\.path\.first\.at\[1\]', which is that of spreads\[1\]"),
        ('"4 %"', '"-4 %"', r"tolerances\.spreads\[1\]\.normal: FieldSpread\.normal must be > 0, got -4 %"),
        ('"4 %"', "nan", r"FieldSpread\.normal must be finite, got nan"),
        ('"4 %"', "true", r"spreads\[1\]\.normal: must be a text with a unit such as '0\.5 mm' or '5 %', got the flag"),
        ('"4 %"', '"four %"', r"FieldSpread\.normal must be a percentage such as '5 %', got 'four %'"),
        ('"2 mm"', '"2"', r"FieldSpread\.uniform must be a text with a unit such as '0\.5 mm', or a .*, got '2'"),
        ('"2 mm"', "0.002", r"tolerances\.spreads\[2\] of springs\[0\]\.path\.first\.at\[1\] must be a text in m, or a "
         r"percentage, got 0\.002; write '0\.002 m' if m is meant"),
        ('"2 mm"', '"2 N"', r"spreads\[2\] of springs\[0\]\.path\.first\.at\[1\] must be a text in m, .*, got 2 N"),
        ('uniform = "2 mm"', 'uniform = "2 mm", normal = "1 mm"', r"FieldSpread must have one of normal, uniform and "
         r"samples, got normal and uniform"),
        (', uniform = "2 mm"', "", r"must have one of normal, uniform and samples, got none"),
        ('normal = "4 %"', 'samples = ["4 %", "5 %"]', r"FieldSpread\.samples must be values in one unit, not .*got 4 %"),
        ('normal = "4 %"', 'samples = ["245 N/m", "5 N"]', r"FieldSpread\.samples must be values in one unit, .*got 5 N"),
        ('normal = "4 %"', "samples = []", r"FieldSpread\.samples must be 1 to 100000 values, got 0"),
        ('normal = "4 %"', 'samples = ["245 N/m"], in_order = true', r"spreads\[1\]\.samples must be one for each of "
         r"2000 builds, got 1"),
        ('normal = "4 %"', 'normal = "4 %", in_order = true', r"in_order must go with samples, got it with normal"),
        ('normal = "4 %"', 'normal = "4 %", shared = "A"', r"spreads\[1\]\.shared must be a batch that another spread "
         r"names too, got 'A' once$"),
        ("builds = 2000", "builds = 10_000_000", r"Tolerances\.builds must be a whole number from 1 to 200000, got 1000"),
        ("builds = 2000", "seed = -1", r"Tolerances\.seed must be a whole number from 0 to \d+, got -1"),
        ("builds = 2000", "poses = 1", r"Tolerances\.poses must be a whole number from 2 to 2000, got 1"),
        ("builds = 2000", "adjusted_builds = 0", r"Tolerances\.adjusted_builds must be a whole .* to 20000, got 0"),
        ("builds = 2000", 'coverage = "101 %"', r"Tolerances\.coverage must be above 0 % and at most 100 %, got '101 %'"),
        ("builds = 2000", "coverage = 99", r"Tolerances\.coverage must be above 0 % .*, got 99; write '99 %' if percent"),
        ("builds = 2000", "coverage = 990", r"Tolerances\.coverage must be above 0 % and at most 100 %, got 990$"),
        ('"5 %"', "0.05", r"tolerances\.residual_limit: must be a text, got 0\.05; write it in quotes, with its unit or"),
        ('{ name = "anchor", field = "springs[0].path.first.at[1]", reach = "40 mm" }', '"springs[0].rigid_length"',
         r"tolerances\.adjusters\[1\]: must be a table with the key field, got the text 'springs\[0\]\.rigid_length'"),
        ("builds = 2000", 'payload = "crte"', r"tolerances\.payload must be the name of a payload, got 'crte'; did you"),
        ('"5 %"', '"5 kg"', r"tolerances\.residual_limit: torque must be a value in N\*m, got '5 kg'"),
        ('"40 mm"', '"40 deg"', r"tolerances\.adjusters\[1\] of springs\[0\]\.path\.first\.at\[1\] must be .*got 40 deg"),
        ('adjusters = [{ name = "anchor", field = "springs[0].path.first.at[1]"', 'adjusters = [{ field = "bolt"',
         r"tolerances\.adjusters\[1\]\.field must be a number of the mechanism, got 'bolt'"),
    ],
)  # fmt: skip
def test_what_is_refused(written: Write, old: str, new: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=message):
        guard.load(written(behind=stated((old, new))))


def test_spreads_are_needed_and_named(written: Write) -> None:
    with pytest.raises(PoiseFileError, match=r"tolerances: must have the keys residual_limit, spreads"):
        guard.load(written(behind="\n[tolerances]\n"))
    with pytest.raises(PoiseFileError, match=r"Tolerances\.spreads must be 1 to 200 spreads, got 0"):
        guard.load(written(behind='\n[tolerances]\nresidual_limit = "5 %"\nspreads = []\n'))
    both = '[{ name = "a", field = "springs[0].rigid_length" }, { name = "a", field = "springs[0].path.last.at[0]" }]'
    text = re.sub(r"adjusters = .*", f"adjusters = {both}", STATED)
    with pytest.raises(PoiseFileError, match=r"adjusters\[2\] must be one that no other is called, got 'a'"):
        guard.load(written(behind=text))
    text = re.sub(r"adjusters = .*", f"adjusters = {both.replace('path.last.at[0]', 'rigid_length')}", STATED)
    with pytest.raises(PoiseFileError, match=r"adjusters\[2\]\.field must be one that no other adjuster has, got 'spr"):
        guard.load(written(behind=text.replace('{ name = "a", field', "{ field", 1)))


def test_percent_of_nothing(written: Write) -> None:
    text = stated(("springs[main].spring.rate", "springs[main].rigid_length"))
    with pytest.raises(PoiseFileError, match=r"rigid_length must be a width in m where the value is 0, got 4 %"):
        guard.load(written(behind=text))


def test_in_code() -> None:
    with pytest.raises(InputTypeError, match=r"Tolerances\.spreads must be a sequence of FieldSpread, got 'rate'"):
        guard.Tolerances(residual_limit="5 %", spreads="rate")  # type: ignore[arg-type]
    with pytest.raises(InputTypeError, match=r"FieldSpread\.field must be a text, got ''"):
        guard.FieldSpread(field="", normal="5 %")
    with pytest.raises(
        InputTypeError, match=r"FieldSpread\.normal must be a text such as '0\.5 mm' or '5 %', got \[\]"
    ):
        guard.FieldSpread(field="a", normal=[])
    with pytest.raises(InputTypeError, match=r"FieldSpread\.samples must be a list, got '1 mm'"):
        guard.FieldSpread(field="a", samples="1 mm")
    with pytest.raises(InputTypeError, match=r"FieldSpread\.in_order must be true or false, got 1"):
        guard.FieldSpread(field="a", samples=["1 mm"], in_order=1)  # type: ignore[arg-type]
    with pytest.raises(InputError, match=r"BuildYield\.at_least must be above 0 % and at most 100 %, got 0"):
        guard.BuildYield(at_least=0.0)
    with pytest.raises(InputTypeError, match=r"PoiseFile\.tolerances must be a Tolerances, got 5"):
        guard.PoiseFile(mechanism=Mechanism(Arm(Body(1, (0.1, 0)))), tolerances=5)  # type: ignore[arg-type]


def test_differences_of_temperature_are_no_temperatures() -> None:
    assert guard.FieldSpread(field="a", uniform="5 K").uniform == guard.Width(5.0, "K")
    with pytest.raises(InputError, match=r"FieldSpread\.uniform must be a text with a unit .*, got '5 degC'"):
        guard.FieldSpread(field="a", uniform="5 degC")


# ------------------------------------------------------------------------------------------------
# the limit


def test_a_yield_is_judged(written: Write) -> None:
    report = guard.check(written(behind=STATED + YIELD + ADJUSTED))
    assert report.holds
    _, as_built, adjusted = report.verdicts
    assert as_built.unit == "%"
    assert as_built.sentence.startswith("yield is ")
    assert "of 2000 builds within 0.5880 N*m, " in as_built.sentence
    assert "inside the limit of at least 50.00 %" in as_built.sentence
    assert adjusted.sentence.startswith("yield with anchor adjusted is 100.00 % of 1000 builds within ")
    assert "yield, adjusted" in str(report)
    data = json.loads(json.dumps(report.to_dict(), allow_nan=False))
    assert data["verdicts"][1]["value_percent"] == as_built.value
    assert data["verdicts"][2]["adjuster"] == "anchor"
    assert guard.check(written(behind=STATED + YIELD + ADJUSTED)) == report


def test_a_yield_that_fails(written: Write) -> None:
    report = guard.check(written(behind=STATED + YIELD.replace("50 %", "99 %")))
    assert not report.holds
    assert re.search(
        r"yield is 7\d\.\d\d % of 2000 builds within .*, 2\d\.\d\d % outside the limit of at least 99\.00 %",
        report.failures[0].sentence,
    )


def test_the_reach_of_an_adjuster_counts(written: Write) -> None:
    """A build that needs more than the slot gives stays as it was built: 4 % of 200 mm is 8 mm for one sigma."""
    short = stated(('"40 mm"', '"3 mm"'))
    shares = []
    for text in (STATED, short):
        report = guard.check(written(behind=text + YIELD + ADJUSTED))
        shares.append([verdict.value for verdict in report.verdicts[1:]])
    assert shares[0][1] == 100.0
    assert shares[1][1] < 85.0
    assert shares[1][0] == shares[0][0]
    percent = guard.check(written(behind=stated(('"40 mm"', '"1.5 %"')) + ADJUSTED))
    assert percent.verdicts[1].value == shares[1][1]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (YIELD, r"limits\[2\]\.what is 'yield', which needs a table \[tolerances\] that says how the parts scatter"),
        (STATED + ADJUSTED.replace('"anchor"', '"ancor"'), r"limits\[2\]\.adjuster must be the name of one of "
         r"tolerances\.adjusters, got 'ancor'; did you mean 'anchor'\?"),
        (STATED + YIELD + 'payload = "crate"\n', r"limits\[2\]\.payload: BuildYield\.payload must be left out, got 'crate'"),
        (STATED + YIELD + 'over = ["0 deg", "9 deg"]\n', r"BuildYield\.over must be left out, got \(0\.0, 0\.15"),
        (STATED + YIELD + 'at_temperature = ["9 degC"]\n', r"BuildYield\.at_temperature must be left out, got \(282"),
        (STATED + YIELD.replace("50 %", "150 %"), r"BuildYield\.at_least must be above 0 % and at most 100 %, got '150 %'"),
    ],
)  # fmt: skip
def test_a_yield_that_cannot_be_judged(written: Write, text: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=message):
        guard.load(written(behind=text))


def test_builds_that_cannot_be_built(written: Write) -> None:
    with pytest.raises(
        PoiseFileError, match=r"limits\[2\]: tolerances: spreads\['springs\[0\].spring.rate'\] must keep "
    ):
        guard.check(written(behind=stated(('"4 %"', '"60 %"')) + YIELD))


def test_several_joints(tmp_path: Path) -> None:
    """Every joint has to keep its share; a share of nothing is nothing but rounding."""
    text = """
schema = 1
[linkage]
kind = "planar chain"
[[linkage.chain]]
name = "upper"
length = "300 mm"
bodies = [{ mass = "2 kg", com = ["150 mm", "0 mm"] }]
[[linkage.chain]]
name = "fore"
bodies = [{ mass = "1 kg", com = ["100 mm", "0 mm"] }]
[[travel]]
from = "0 deg"
to = "60 deg"
[[travel]]
from = "-60 deg"
to = "0 deg"
[tolerances]
residual_limit = "101 %"
builds = 500
poses = 50
spreads = [{ field = "linkage.chain[fore].bodies[0].mass", normal = "5 %" }]
[[limits]]
what = "yield"
at_least = "10 %"
"""
    file = tmp_path / "two.poise.toml"
    file.write_text(text, encoding="utf-8")
    report = guard.check(file)
    # the fore arm's own torque goes with its mass: up to 0.01/0.05 sigma, of which 0.5793 lie below
    assert report.verdicts[0].value == pytest.approx(57.9, abs=5.0)
    assert report.verdicts[0].sentence.count("N*m, ") == 2
    field = "linkage.chain[fore].bodies[0].mass"
    file.write_text(text.replace("poses = 50", f'adjusters = [{{ field = "{field}" }}]'), encoding="utf-8")
    with pytest.raises(PoiseFileError, match=r"tolerances\.adjusters is for mechanisms with one joint, got 2"):
        guard.load(file)
    sliding = text.replace('name = "fore"', 'name = "fore"\njoint = "prismatic"')
    sliding = sliding.replace('from = "-60 deg"\nto = "0 deg"', 'from = "0 mm"\nto = "90 mm"')
    file.write_text(sliding.replace('"101 %"', '"5 N*m"'), encoding="utf-8")
    with pytest.raises(PoiseFileError, match="residual_limit must be a share of the peak gravity torque where a joint"):
        guard.load(file)
    file.write_text(sliding, encoding="utf-8")
    # a limit on the joint that slides is a force
    assert re.search(r"builds within [\d.]+ N\*m, [\d.]+ N, ", guard.check(file).verdicts[0].sentence)


# ------------------------------------------------------------------------------------------------
# a design with tolerances

SINE = '\n[design]\nmethod = "sine"\nattach_radius = "0.12 m"\nanchor_height = "0.2 m"\n'
BARE = re.compile(r"\[\[springs\]\].*?(?=\[\[payloads\]\])", re.DOTALL)


def unsolved(written: Write, behind: str) -> Path:
    file = written(behind=behind)
    file.write_text(BARE.sub("", file.read_text(encoding="utf-8")), encoding="utf-8")
    return file


def test_a_design_reports_its_yield(written: Write) -> None:
    text = stated(("springs[main]", "springs[0]"))
    found = guard.design(unsolved(written, text + SINE + YIELD)).require()
    study = found.study
    assert study is not None
    assert found.solved is not None
    assert found.solved.tolerances == found.document.tolerances
    mechanism = found.solved.mechanism
    spreads = {
        "springs[0].spring.rate": tolerance.Spread.normal("4 %"),
        "springs[0].path.first.at[1]": tolerance.Spread.uniform("2 mm"),
    }
    direct = tolerance.scatter(mechanism, spreads, builds=2000, limit="5 %")
    assert study.yield_share == direct.yield_within()
    assert study.costs[0].label == "rate"
    assert study.costs[0].effect == pytest.approx(0.04 * 3 * 9.8 * 0.4, rel=1e-4)  # no pose at 0 deg
    assert study.costs[0].yield_without == 1.0
    assert study.costs[1].effect == pytest.approx(0.01 / math.sqrt(3) * 3 * 9.8 * 0.4, rel=1e-4)  # no pose at 0 deg
    assert study.adjuster is not None
    text = str(found)
    assert "Provide: anchor, to be moved by -40.0 mm to +40.0 mm from where it was built." in " ".join(text.split())
    assert max(map(len, text.splitlines())) <= 100
    data = json.loads(json.dumps(found.to_dict(), allow_nan=False))["tolerances"]
    assert data["yield"] == study.yield_share
    assert data["adjusters"][0]["provide"] is True
    assert data["adjusters"][0]["from_m"] == -0.04
    assert data["costs"][0]["effect_Nm"] == study.costs[0].effect
    assert data["quantiles"][1]["worst_Nm"] == direct.quantile(0.95)


def test_fields_of_springs_that_are_not_found_yet(written: Write) -> None:
    with pytest.raises(
        PoiseFileError, match=r"got 'springs\[main\]\.spring\.rate'; the spring that the design finds is spr"
    ):
        guard.load(unsolved(written, STATED + SINE))
    text = stated(("springs[main].spring.rate", "springs[0].spring.initial_tension"))
    with pytest.raises(
        PoiseFileError, match=r"spreads\[1\]\.field must be .*got 'springs\[0\]\.spring\.initial_tension'"
    ):
        guard.load(unsolved(written, text + SINE))
    # what is nothing in the spring that stands in may be something in the one that is found
    text = stated(("springs[main].spring.rate", "springs[0].path.first.at[0]"), ('"4 %"', '"0.1 mm"'))
    assert guard.design(unsolved(written, text + SINE)).success


def test_nothing_to_adjust_is_no_error(written: Write) -> None:
    text = re.sub(r"adjusters = .*", "adjusters = []", stated(("springs[main]", "springs[0]")))
    found = guard.design(unsolved(written, text + SINE))
    assert found.study is not None
    assert found.study.adjusters == ()
    assert found.study.adjuster is None
    assert "Provide" not in str(found)


def test_adjusters_that_suggest_themselves(written: Write) -> None:
    text = re.sub(r"adjusters = .*", "adjusted_builds = 200", stated(("springs[main]", "springs[0]")))
    found = guard.design(unsolved(written, text + SINE))
    assert found.study is not None
    fields = {one.field for one in found.study.adjusters}
    assert {"springs[0].path.first.at[1]", "springs[0].path.last.at[0]", "springs[0].rigid_length"} <= fields
    assert found.study.adjuster is not None
    low, high = found.study.adjuster.range
    assert low < 0 < high


def test_an_adjuster_without_effect(written: Write) -> None:
    text = stated(("springs[main]", "springs[0]")).replace(
        'field = "springs[0].path.first.at[1]", reach = "40 mm"', 'field = "friction.coulomb"'
    )
    with pytest.raises(PoiseFileError, match=r"tolerances: candidates must have an effect .*, got friction\.coulomb"):
        guard.design(unsolved(written, text + SINE))


def test_a_batch_costs_together(written: Write) -> None:
    text = stated(
        ("springs[main]", "springs[0]"),
        ('normal = "4 %"', 'normal = "4 %", shared = "A"'),
        ('uniform = "2 mm"', 'uniform = "2 mm", shared = "A"'),
    )
    study = guard.design(unsolved(written, text + SINE)).study
    assert study is not None
    (cost,) = study.costs
    assert cost.label == "batch A"
    assert cost.effect == pytest.approx((0.04 + 0.01 / math.sqrt(3)) * 3 * 9.8 * 0.4, rel=1e-4)  # no pose at 0 deg
    assert cost.yield_without == 1.0
    assert "batch A" in str(study)
    assert "together" in str(study)


def test_own_samples(written: Write) -> None:
    """Two rates, 10 % too weak and as drawn: half of the builds are good, drawn or in order."""
    rate = 3 * 9.8 * 0.4 / 0.12 / 0.2
    samples = f'samples = ["{0.9 * rate} N/m", "{rate} N/m"]'
    text = stated(("springs[main]", "springs[0]"), ('normal = "4 %"', samples), ("builds = 2000", "builds = 2"))
    text = text.replace('    { field = "springs[0].path.first.at[1]", uniform = "2 mm" },\n', "")
    study = guard.design(unsolved(written, text.replace('N/m"] }', 'N/m"], in_order = true }') + SINE)).study
    assert study is not None
    assert study.yield_share == 0.5
    assert study.adjusted_count == 2
    assert study.adjusters[0].yield_share == 1.0
    assert study.costs[0].effect == pytest.approx(0.05 * 3 * 9.8 * 0.4, rel=1e-4)  # no pose at 0 deg


def test_springs_that_a_fit_leaves_out_scatter_no_more(tmp_path: Path) -> None:
    """The first spring pulls the wrong way and is left out: the second becomes the first, in its tolerances too."""
    mount = """
[[springs]]
name = "{name}"
[springs.spring]
kind = "zero length"
rate = "open"
[springs.path]
kind = "straight"
first = {{ body = "ground", at = ["0 m", "{height} m"] }}
last = {{ body = "arm", at = ["0.12 m", "0 m"] }}
"""
    text = (
        'schema = 1\n[arm]\nbodies = [{ mass = "3 kg", com = ["0.4 m", "0 m"] }]\n'
        '[travel]\nfrom = "-60 deg"\nto = "60 deg"\n'
        + mount.format(name="under", height=-0.2)
        + mount.format(name="over", height=0.2)
        + '[design]\nmethod = "fit"\n'
        + """
[tolerances]
residual_limit = "5 %"
builds = 200
spreads = [
    { field = "springs[0].spring.rate", normal = "4 %", shared = "A" },
    { field = "springs[1].spring.rate", normal = "4 %", shared = "A" },
    { field = "springs[over].path.first.at[1]", normal = "1 mm" },
]
adjusters = [{ field = "springs[1].path.last.at[0]" }, { field = "springs[under].rigid_length" }]
"""
    )
    file = tmp_path / "fit.poise.toml"
    file.write_text(text, encoding="utf-8")
    found = guard.design(file)
    assert found.solved is not None
    assert [mount.name for mount in found.solved.mechanism.springs] == ["over"]
    kept = found.solved.tolerances
    assert kept is not None
    assert [one.field for one in kept.spreads] == ["springs[0].spring.rate", "springs[over].path.first.at[1]"]
    assert kept.spreads[0].shared is None
    assert [one.field for one in kept.adjusters or ()] == ["springs[0].path.last.at[0]"]
    limit = '[[limits]]\nwhat = "yield"\nat_least = "50 %"\nadjuster = "springs[under].rigid_length"\n'
    file.write_text(text + limit, encoding="utf-8")
    message = r"design: without what is best left out \(under\) limits\[1\]\.adjuster must be .*, got 'springs\[under\]"
    with pytest.raises(PoiseFileError, match=message):
        guard.design(file)
    only = attrs.evolve(kept, spreads=[attrs.evolve(kept.spreads[0], field="springs[under].rate")])
    assert only.with_springs_kept({"springs[under].rate": None, "springs[0].path.last.at[0]": "x"}) is None


# ------------------------------------------------------------------------------------------------
# two versions


def test_what_changed(written: Write) -> None:
    old = written(behind=STATED, name="old.poise.toml")
    text = stated(('"4 %"', '"2 %"'), ("builds = 2000", "builds = 3000"), ('reach = "40 mm"', 'reach = "30 mm"'))
    found = guard.compare(old, written(behind=text, name="new.poise.toml"))
    change = next(one for one in found.changes if one.what == "yield, by its own tolerances")
    assert change.old is not None
    assert change.new is not None
    assert change.old < 0.9
    assert change.new > 0.97
    assert [str(one) for one in found.tolerance_changes] == [
        "builds: 2000, now 3000",
        "spread of springs[main].spring.rate: normal 4 %, now normal 2 %",
        "adjuster anchor: springs[0].path.first.at[1] within +-40 mm, now springs[0].path.first.at[1] within +-30 mm",
    ]
    assert "  tolerances, builds: 2000, now 3000" in str(found)
    assert found.to_dict()["tolerance_changes"][0] == {"what": "builds", "old": "2000", "new": "3000"}
    first = guard.compare(written(name="bare.poise.toml"), old)
    assert str(first.tolerance_changes[0]) == "residual limit: 5 %, new"
    assert next(one for one in first.changes if one.what.startswith("yield")).old is None
    assert str(guard.compare(old, written()).tolerance_changes[0]) == "residual limit: 5 %, gone"
    assert guard.compare(old, old).tolerance_changes == ()


def test_long_names_keep_both_ends(written: Write) -> None:
    """A cable's fields differ in their last letters, and a row that cannot be told from the next is no help."""
    cable = """
kind = "cable"
along = [
    { body = "ground", at = ["-0.3 m", "-0.4 m"] },
    { centre = { body = "ground", at = ["0 m", "0.2 m"] }, radius = "10 mm", turn = "cw" },
    { body = "arm", at = ["0.12 m", "0 m"] },
]
"""
    straight = 'kind = "straight"\nfirst = { body = "ground", at = ["0 m", "0.2 m"] }\nlast = { body = "arm", at = ["0.12 m", "0 m"] }\n'
    ends = ("centre.at[0]", "centre.at[1]")
    spreads = ", ".join(f'{{ field = "springs[0].path.along[1].{end}", uniform = "1 mm" }}' for end in ends)
    adjusters = ", ".join(f'{{ field = "springs[0].path.along[1].{end}" }}' for end in ends)
    behind = f'[tolerances]\nresidual_limit = "9 N*m"\nbuilds = 50\nspreads = [{spreads}]\nadjusters = [{adjusters}]\n'
    builds = builds_of(guard.load(written((straight, cable), behind=behind)))
    assert builds is not None
    text = str(study_of(builds))
    for end in ends:  # a row for what it costs, and one for what it puts right
        assert text.count(f"\n  springs[0]...along[1].{end} ") == 2
    assert max(map(len, text.splitlines())) <= 120

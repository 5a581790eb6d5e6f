"""The command: exit codes, what goes to which stream, JSON, and files that stay untouched."""

from __future__ import annotations

import json
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Callable
from importlib.metadata import version
from pathlib import Path

import pytest

from springpoise import guard
from springpoise.cli import main

LIFT = """\
schema = 1 # kept
title = "lift"
[arm]
[[arm.bodies]]
mass = "3 kg"
com = ["0.4 m", "0 m"]
[travel]
from = "-60 deg"
to = "75 deg"
[design]
# What is to be found.
method = "sine"
attach_radius = "0.12 m"
anchor_height = "0.2 m"
[[limits]] # kept too
what = "residual torque"
at_most = "1 %"
"""
FAILING = '[[limits]]\nwhat = "stored energy"\nat_most = "1 J"\n'
NOTHING_FITS = LIFT.replace('method = "sine"', 'method = "stock"\nstock = "list.csv"').replace(
    'attach_radius = "0.12 m"\nanchor_height = "0.2 m"',
    'attach_radii = { from = "0.1 m", to = "0.2 m", steps = 2 }\n'
    'anchor_heights = { from = "0.1 m", to = "0.2 m", steps = 2 }',
)
LIST = "part,rate [N/mm],free length [mm],initial tension [N],longest length [mm]\nX-9,2,300,1,310\n"

Files = Callable[..., str]


@pytest.fixture
def put(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Files:
    monkeypatch.chdir(tmp_path)

    def write(text: str = LIFT, name: str = "lift.poise.toml") -> str:
        (tmp_path / name).write_text(text, encoding="utf-8")
        return name

    return write


def solved_text(limit: str = "") -> str:
    design = LIFT[LIFT.index("[design]") : LIFT.index("[[limits]]")]
    return LIFT.replace(design, "") + limit


def test_design_then_check(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    name = put()
    before = Path(name).read_bytes()
    assert main(["design", name]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    assert out.startswith("lift\n\nsine design: balanced at every angle")
    assert out.endswith("Written: lift.solved.poise.toml. Judge it with: springpoise check lift.solved.poise.toml\n")
    assert Path(name).read_bytes() == before
    solved = Path("lift.solved.poise.toml").read_text(encoding="utf-8")
    assert solved.startswith(
        "# Solved by springpoise design from lift.poise.toml. Solving again writes over this file.\n"
    )
    assert "schema = 1 # kept" in solved
    assert "[[limits]] # kept too" in solved
    assert "[design]" not in solved
    assert main(["check", "lift.solved.poise.toml"]) == 0
    out, err = capsys.readouterr()
    assert "all 1 limits hold" in out
    assert err == ""


def test_an_earlier_solved_file_is_written_over(put: Files) -> None:
    name = put()
    assert main(["design", name]) == 0
    first = Path("lift.solved.poise.toml").read_bytes()
    put(LIFT.replace("0.12 m", "0.1 m"))
    assert main(["design", name]) == 0
    assert Path("lift.solved.poise.toml").read_bytes() != first
    assert sorted(os.listdir()) == ["lift.poise.toml", "lift.solved.poise.toml"]


def test_where_to_write_is_chosen(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", put(), "--output", "here.toml"]) == 0
    assert guard.load("here.toml").design is None
    assert "Written: here.toml." in capsys.readouterr().out
    assert main(["design", put(name="other.toml"), "-o", "there.toml"]) == 0
    assert main(["design", "other.toml"]) == 0
    assert Path("other.solved.poise.toml").is_file()


def test_the_original_is_never_written_over(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    name = put()
    os.symlink(name, "link.toml")
    before = Path(name).read_bytes()
    for target in (name, "link.toml", f"./{name}"):
        assert main(["design", name, "--output", target]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert "is the file to be solved, which is never written over; choose another --output" in err
    assert Path(name).read_bytes() == before


def test_a_file_of_other_origin_is_not_written_over(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    name = put()
    Path("notes.txt").write_text("mine", encoding="utf-8")
    for target in ("notes.txt", "."):
        assert main(["design", name, "-o", target]) == 2
        message = f"springpoise: {target}: is there already and was not written by springpoise design; choose another"
        assert message in capsys.readouterr().err
    assert Path("notes.txt").read_text(encoding="utf-8") == "mine"


def test_a_write_that_fails_leaves_the_earlier_file(
    put: Files, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    name = put()
    assert main(["design", name]) == 0
    before = Path("lift.solved.poise.toml").read_bytes()
    capsys.readouterr()

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", full)
    assert main(["design", name]) == 2
    assert capsys.readouterr().err == (
        "springpoise: lift.solved.poise.toml: cannot be written: No space left on device\n"
    )
    assert Path("lift.solved.poise.toml").read_bytes() == before
    assert sorted(os.listdir()) == ["lift.poise.toml", "lift.solved.poise.toml"]


def test_a_design_that_breaks_a_limit_is_written_and_says_so(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", put(LIFT + FAILING)]) == 1
    out, _ = capsys.readouterr()
    assert "Limits: 1 of 2 limits fail" in out
    assert "Written: lift.solved.poise.toml" in out
    assert main(["check", "lift.solved.poise.toml"]) == 1


def test_where_nothing_fits_nothing_is_written(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    put(LIST, "list.csv")
    assert main(["design", put(NOTHING_FITS)]) == 1
    out, err = capsys.readouterr()
    assert err == ""
    assert "Nothing fits" in out
    assert "Nearest miss: " in out
    assert "X-9" in out
    assert out.endswith("Nothing was written.\n")
    assert sorted(os.listdir()) == ["lift.poise.toml", "list.csv"]


def test_check_of_several_files(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    good, bad = put(solved_text(), "good.toml"), put(solved_text(FAILING) + "x\ny = 1\n", "bad.toml")
    bare = put(solved_text(), "bare.toml")
    assert main(["check", bare]) == 1
    out, err = capsys.readouterr()
    assert "bare.toml: 1 of 1 limits fail" in out
    assert "residual torque is 11.77 N*m (100.00 % of the peak gravity torque, where 1 % is allowed)" in out
    assert err == ""
    assert main(["check", good, bad, "gone.toml"]) == 2
    out, err = capsys.readouterr()
    assert "good.toml: 1 of 1 limits fail" in out
    assert re.search(r"springpoise: bad\.toml: is not TOML: .* \(at line 16, column 2\)", err)
    assert "springpoise: gone.toml: cannot be read: No such file or directory" in err


def test_a_check_of_nothing(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    empty = put(solved_text()[: solved_text().index("[[limits]]")], "empty.toml")
    assert main(["check", empty]) == 2
    out, err = capsys.readouterr()
    assert "empty.toml: states no limits, so nothing was judged" in out
    assert "springpoise: empty.toml: states no limits, so nothing was judged; give it [[limits]], or pass" in err
    assert main(["check", "--allow-empty", empty]) == 0
    assert "nothing was judged" in capsys.readouterr().out


def test_check_refuses_what_is_not_solved(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", put()]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "lift.poise.toml: design: leaves springs to be found, got method 'sine'" in err


def test_check_as_json(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    bare, gone = put(solved_text(), "bare.toml"), "gone.toml"
    assert main(["check", "--json", bare, gone]) == 2
    out, err = capsys.readouterr()
    assert err == ""
    data = json.loads(out)
    assert data["exit_code"] == 2
    assert data["holds"] is False
    assert data["files"][0]["verdicts"][0]["value_Nm"] == pytest.approx(3 * 9.80665 * 0.4, rel=1e-4)
    assert data["files"][1] == {
        "file": "gone.toml",
        "holds": False,
        "error": "gone.toml: cannot be read: No such file or directory",
    }


def test_design_as_json(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", put(), "--json"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    data = json.loads(out)
    assert data["exit_code"] == 0
    assert data["solved_file"] == "lift.solved.poise.toml"
    assert data["springs"][0]["rate_N_per_m"] == pytest.approx(3 * 9.80665 * 0.4 / 0.12 / 0.2)
    assert Path("lift.solved.poise.toml").is_file()


def test_errors_as_json(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", "gone.toml", "--json"]) == 2
    out, err = capsys.readouterr()
    assert err == ""
    assert json.loads(out) == {"exit_code": 2, "error": "gone.toml: cannot be read: No such file or directory"}


@pytest.mark.parametrize(
    ("raised", "code", "message"),
    [
        (KeyboardInterrupt(), 130, "springpoise: interrupted"),
        (PermissionError(13, "Permission denied", "x.toml"), 2, "springpoise: x.toml: Permission denied"),
        (OSError("odd"), 2, "springpoise: odd"),
        (ZeroDivisionError("by zero"), 2, "springpoise: unexpected ZeroDivisionError in test_cli.py, line "),
        (RecursionError("deep"), 2, "springpoise: unexpected RecursionError in test_cli.py, line "),
        (MemoryError(), 2, "springpoise: unexpected MemoryError in test_cli.py, line "),
    ],
)
def test_no_traceback_reaches_the_user(
    put: Files,
    capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
    raised: BaseException,
    code: int,
    message: str,
) -> None:
    def failing(*_: object, **__: object) -> None:
        raise raised

    monkeypatch.setattr(guard, "design", failing)
    assert main(["design", put()]) == code
    out, err = capsys.readouterr()
    assert out == ""
    assert message in err
    assert "Traceback" not in err


def test_control_characters_of_a_file_do_not_reach_the_terminal(put: Files, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["design", put(LIFT.replace('"lift"', '"a\\u001b[31mb"'))]) == 0
    out = capsys.readouterr().out
    assert "\x1b" not in out
    assert out.startswith("a?[31mb\n")


DEMO = Path(__file__).parents[2] / "docs" / "examples"


def test_the_demo(tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    for name in ("greenhouse_lift.poise.toml", "greenhouse_springs.csv"):
        shutil.copy(DEMO / name, tmp_path / name)
    assert main(["design", "greenhouse_lift.poise.toml"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    for words in ("2 x GL-052", "Tolerances: ", "What costs most", "Provide: height of the pulley", "Ways to balance"):
        assert out.count(words) >= 1, words
    assert out.count("Caution: ") == 1
    assert main(["check", "greenhouse_lift.solved.poise.toml"]) == 0
    assert "yield, adjusted" in capsys.readouterr().out
    solved = Path("greenhouse_lift.solved.poise.toml")
    text = solved.read_text(encoding="utf-8")
    assert "[design" not in text
    assert "# How parts of this size come out" in text
    solved.write_text(text.replace('at_least = "99 %"', 'at_least = "99.9 %"'), encoding="utf-8")
    assert main(["check", str(solved)]) == 1
    assert "yield with height of the pulley adjusted" in capsys.readouterr().out
    solved.write_text(text.replace("bodies[boom].mass", "bodies[bom].mass"), encoding="utf-8")
    assert main(["check", str(solved)]) == 2
    assert "got 'linkage.bodies[bom].mass'; did you mean linkage.bodies[boom]?" in capsys.readouterr().err


def test_help_and_version(capsys: pytest.CaptureFixture[str]) -> None:
    for arguments, wanted in (
        (["--version"], [f"springpoise {version('springpoise')}"]),
        (["--help"], ["design", "check", "exit codes:", "a limit fails, or nothing fits"]),
        (["design", "--help"], ["NAME.solved.poise.toml", "--output", "--json", "never\nchanged"]),
        (["check", "--help"], ["--allow-empty", "check that checks nothing does not pass by mistake", "2  a file"]),
    ):
        with pytest.raises(SystemExit) as caught:
            main(arguments)
        assert caught.value.code == 0
        out = capsys.readouterr().out
        for words in wanted:
            assert words in out


@pytest.mark.parametrize(
    "arguments", [[], ["paint"], ["check"], ["design"], ["design", "a", "b"], ["check", "--loud", "a"]]
)
def test_wrong_arguments(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as caught:
        main(arguments)
    assert caught.value.code == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("usage: springpoise")


def run(*arguments: str, **options: object) -> subprocess.CompletedProcess[str]:
    return subprocess.run(  # type: ignore[call-overload,no-any-return]
        [sys.executable, "-m", "springpoise", *arguments], capture_output=True, text=True, check=False, **options
    )


def test_as_a_process(put: Files) -> None:
    done = run("design", put())
    assert (done.returncode, done.stderr) == (0, "")
    assert "stays put by friction alone" in done.stdout
    assert run("check", "lift.solved.poise.toml").returncode == 0
    assert run("check", "gone.toml").returncode == 2


def test_a_reader_that_leaves_early(put: Files) -> None:
    put(solved_text(FAILING), "bare.toml")
    read, write = os.pipe()
    os.close(read)
    done = subprocess.run(
        [sys.executable, "-m", "springpoise", "check", "bare.toml"], stdout=write, stderr=subprocess.PIPE, check=False
    )
    os.close(write)
    assert (done.returncode, done.stderr) == (1, b"")


def test_a_stream_that_is_not_unicode(put: Files) -> None:
    put(LIFT.replace('"lift"', '"Hebel für Kisten ⚖"'))
    done = run("design", "lift.poise.toml", env={**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"})
    assert (done.returncode, done.stderr) == (0, "")
    assert done.stdout.startswith("Hebel f?r Kisten ?\n")


def test_version_and_help_load_nothing_heavy() -> None:
    code = (
        "import sys\nfrom springpoise.cli import main\n"
        "try:\n    main(['--version'])\nexcept SystemExit:\n    pass\n"
        "print(sorted({'numpy', 'scipy', 'pint', 'tomlkit'} & set(sys.modules)))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"

"""Measured springs from files: both kinds of bench, and what is said where a file makes no spring."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import pytest

from springpoise.errors import PoiseFileError
from springpoise.springs import MeasuredSpring

Write = Callable[[str], Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    def write(text: str) -> Path:
        file = tmp_path / "bench.csv"
        file.write_text(text, encoding="utf-8")
        return file

    return write


def test_a_spring_with_a_length(write: Write) -> None:
    file = write("# bench 3\nload [N];by;length [mm];unloading [N]\n12;me;100;11\n30;me;150;28\n50;me;200;50\n")
    expected = MeasuredSpring([0.10, 0.15, 0.20], [12.0, 30.0, 50.0], unloading=[11.0, 28.0, 50.0])
    assert MeasuredSpring.read(file) == expected
    assert MeasuredSpring.read(str(file)) == expected
    assert MeasuredSpring.read(write("length [mm],load [N]\n100,12\n150,30\n")).unloading is None


def test_a_spring_with_an_angle_of_any_number_of_turns(write: Write) -> None:
    spring = MeasuredSpring.read(write("angle [deg],torque [N*m],unloading [Nm]\n-90,0,0\n0,1,0.8\n720,3,2.5\n"))
    assert spring.working_range == pytest.approx((-math.pi / 2, 4 * math.pi))
    assert spring.load(0.0) == pytest.approx(0.9)
    assert spring.hysteresis(0.0) == pytest.approx(0.1)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "must have a heading line, got an empty file"),
        ("length [mm],load [N]\n", "must list at least one reading, got a heading line only"),
        ("length [mm]\n1\n", "column 'load' must be there once, got columns length"),
        ("angle [deg]\n1\n", "column 'torque' must be there once, got columns angle"),
        ("length [mm],torque [N*m]\n1,2\n", "column 'angle' must be there once, got columns length, torque"),
        ("length [mm],load [N*m]\n1,2\n", r"column 'load'.*N\*m"),
        ("length [mm],load [N]\n1,2\n", r"MeasuredSpring\.lengths must be at least two readings, got shape \(1,\)"),
        ("length [mm],load [N]\n2,2\n1,3\n", r"MeasuredSpring\.lengths must increase from reading to reading, got 0.002"),
        ("length [mm],load [N],unloading [N]\n1,2,3\n2,3,3\n", r"MeasuredSpring\.unloading must not exceed loads, got 3 over 2 N"),
        ("length [mm],load [N]\n1,x\n", "line 2: load must be a number in N, got 'x'"),
    ],
)  # fmt: skip
def test_a_file_that_makes_no_spring(write: Write, text: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=rf"bench\.csv(, |: ){message}"):
        MeasuredSpring.read(write(text))


def test_a_file_that_is_not_there(tmp_path: Path) -> None:
    with pytest.raises(PoiseFileError, match=r"nowhere\.csv: cannot be read as a spring's readings"):
        MeasuredSpring.read(tmp_path / "nowhere.csv")

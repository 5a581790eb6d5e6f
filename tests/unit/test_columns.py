"""CSV files with units in their heading: every way of writing one, and every way of getting one wrong."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from springpoise.columns import Column, heading_names, read_columns
from springpoise.errors import PoiseFileError

NEEDED = {"length": Column("m", "> 0"), "load": Column("N")}
OPTIONAL = {"unloading": Column("N", ">= 0")}

Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    def write(*lines: str, encoding: str = "utf-8", end: str = "\n") -> Path:
        path = tmp_path / "bench.csv"
        path.write_bytes((end.join(lines) + end).encode(encoding))
        return path

    return write


@pytest.mark.parametrize("separator", [",", ";"])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig"])
def test_any_order_separator_and_spelling(write: Write, separator: str, end: str, encoding: str) -> None:
    lines = [
        "# a bench, mine; really",
        "",
        "UNLOADING [kN],Remark,Length [cm],load [ lbf ]",
        " ",
        "0.001,a,10,1",
        "# x",
        "0,b,20,2",
    ]
    file = write(
        *[line if line.startswith("#") else line.replace(",", separator) for line in lines], end=end, encoding=encoding
    )
    table = read_columns(file, needed=NEEDED, optional=OPTIONAL)
    np.testing.assert_allclose(table.numbers["length"], [0.1, 0.2], rtol=1e-14)
    np.testing.assert_allclose(table.numbers["load"], [4.4482216152605, 8.896443230521], rtol=1e-14)  # the pound-force
    np.testing.assert_allclose(table.numbers["unloading"], [1.0, 0.0])
    assert table.others == ({"Remark": "a"}, {"Remark": "b"})
    assert table.lines == (5, 7)
    assert heading_names(file) == ("unloading", "remark", "length", "load")


def test_others_keep_their_whole_heading(write: Write) -> None:
    file = write("part,length [mm],load [N],price [EUR],price [USD]", "A,1,2,3.10,3.30")
    table = read_columns(file, needed=NEEDED, texts=("part",))
    assert table.texts == {"part": ("A",)}
    assert table.others == ({"price [EUR]": "3.10", "price [USD]": "3.30"},)
    assert set(table.numbers) == {"length", "load"}


@pytest.mark.parametrize(
    ("heading", "message"),
    [
        ("load [N]", r"column 'length' must be there once, got columns load; needed are length \[m\], load \[N\]"),
        ("length [m],length [mm],load [N]", "column 'length' must be there once, got it twice"),
        ("length [m],load [N],unloading [N],unloading [kN]", "column 'unloading' must be there once, got it twice"),
        ("length [m],load [N],by,By", "column 'by' must be there once, got it twice"),
        ("length,load [N]", r"column 'length' must have its unit in brackets, got none; such as 'length \[m\]'"),
        ("length [m],load [kg]", "column 'load' must be .*N.*'1 kg'"),
        ("length [m],load [N],unloading [mm]", "column 'unloading' must be .*'1 mm'"),
        ("length [m] [m],load [N]", r"column must be named 'name \[unit\]', got 'length \[m\] \[m\]'"),
        (
            "length [m]\tload [N]",
            r"column must be .*, got 'length \[m\]\\tload \[N\]'; separate columns by commas or semicolons",
        ),
    ],
)
def test_a_wrong_heading(write: Write, heading: str, message: str) -> None:
    with pytest.raises(PoiseFileError, match=rf"bench\.csv: {message}"):
        read_columns(write(heading, "1,2,3,4"), needed=NEEDED, optional=OPTIONAL)


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("a,1,1", "length must be a number in mm, got 'a'"),
        ("1_0,1,1", "length must be a number in mm, got '1_0'"),
        ('"-1,5",1,1', "length must be a number in mm, got '-1,5'; write -1.5, with a decimal point"),
        ('"1,5,5",1,1', "length must be a number in mm, got '1,5,5'"),
        ("0,1,1", "length must be > 0 mm, got 0"),
        ("1,inf,1", "load must be finite, got inf"),
        ("1,nan,1", "load must be finite, got nan"),
        ("1,1,-1", "unloading must be >= 0 N, got -1"),
        ("1,1", "must have 3 cells, got 2"),
        ('1,"1"2,1', "is not CSV: "),
    ],
)
def test_a_wrong_cell(write: Write, row: str, message: str) -> None:
    file = write("# comment", "length [mm],load [N],unloading [N]", "", "1,2,1", row)
    with pytest.raises(PoiseFileError, match=rf"bench\.csv, line 5: {message}"):
        read_columns(file, needed=NEEDED, optional=OPTIONAL)


def test_an_empty_text(write: Write) -> None:
    file = write("length [mm],load [N],part", "1,2, ")
    with pytest.raises(PoiseFileError, match="line 2: part must be a name, got an empty cell"):
        read_columns(file, needed=NEEDED, texts=("part",))


@pytest.mark.parametrize(
    ("lines", "message"),
    [
        (["# nothing"], "must have a heading line, got an empty file"),
        (["length [mm],load [N]"], "must list at least one reading, got a heading line only"),
    ],
)
def test_a_file_without_rows(write: Write, lines: list[str], message: str) -> None:
    with pytest.raises(PoiseFileError, match=message):
        read_columns(write(*lines), needed=NEEDED, row="reading")


def test_a_file_that_cannot_be_read(write: Write, tmp_path: Path) -> None:
    for file in (tmp_path / "nowhere.csv", tmp_path, write("Ä [m],load [N]", encoding="latin-1"), Path("a\0b")):
        with pytest.raises(PoiseFileError, match="cannot be read as a bench"):
            read_columns(file, needed=NEEDED, called="a bench")
        with pytest.raises(PoiseFileError, match="cannot be read as a bench"):
            heading_names(file, "a bench")
    assert heading_names(write("")) == ()

"""Stock lists: every way of writing one, and every way of getting one wrong."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from springpoise import ExtensionSpring
from springpoise.balance import Stock, read_stock
from springpoise.errors import InputError, PoiseFileError

HEADING = "part,rate [N/mm],free length [mm],initial tension [N],longest length [mm],price"
ROWS = ["A-1,1.2,120,18,310,4.50", "B-2,0.8,90,0,260,3.10"]


@pytest.fixture
def write(tmp_path):
    def write(*lines, encoding="utf-8", name="springs.csv", end="\n"):
        path = tmp_path / name
        path.write_bytes((end.join(lines) + end).encode(encoding))
        return path

    return write


def _same(stock):
    assert stock.parts == ("A-1", "B-2")
    np.testing.assert_allclose(stock.rate, [1200.0, 800.0], rtol=1e-14)
    np.testing.assert_allclose(stock.free_length, [0.120, 0.090], rtol=1e-14)
    np.testing.assert_allclose(stock.initial_tension, [18.0, 0.0], rtol=1e-14)
    np.testing.assert_allclose(stock.longest, [0.310, 0.260], rtol=1e-14)


def test_a_plain_list(write):
    stock = read_stock(write(HEADING, *ROWS))
    _same(stock)
    assert len(stock) == 2
    assert stock.others == ({"price": "4.50"}, {"price": "3.10"})
    assert stock.spring(0) == ExtensionSpring(
        stock.rate[0], free_length=stock.free_length[0], initial_tension=18.0, longest=stock.longest[0]
    )
    assert stock == read_stock(str(write(HEADING, *ROWS)))


@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_columns_in_any_order_and_spelling(write, end):
    heading = "Longest_Length [cm], INITIAL TENSION [kN] ,price,Rate [N/m],part,free length [ m ]"
    rows = ["31,0.018,4.50,1200,A-1,0.12", "26,0,3.10,800,B-2,0.09"]
    _same(read_stock(write(heading, *rows, end=end)))


def test_semicolons_byte_order_mark_comments_and_empty_lines(write):
    lines = ["# from a catalogue, with commas, and; semicolons", "", HEADING.replace(",", ";"), "# springs", "  "]
    lines += [row.replace(",", ";") for row in ROWS]
    _same(read_stock(write(*lines, encoding="utf-8-sig")))


def test_quoted_cells_may_hold_separators_and_line_breaks(write):
    stock = read_stock(write(HEADING, '"A, 1",1.2,120,18,310,"4.50\n(per ten)"', ROWS[1]))
    assert stock.parts == ("A, 1", "B-2")
    assert stock.others[0] == {"price": "4.50\n(per ten)"}


def test_unknown_columns_are_kept_as_text(write):
    stock = read_stock(write("maker,part," + HEADING[5:], *[f"m{i},{row}" for i, row in enumerate(ROWS)]))
    assert stock.others[1] == {"maker": "m1", "price": "3.10"}


def test_imperial_units(write):
    stock = read_stock(
        write("part,rate [lbf/in],free length [in],initial tension [lbf],longest length [in]", "X,3.5,4,2,9")
    )
    assert stock.rate[0] == pytest.approx(3.5 * 4.4482216152605 / 0.0254, rel=1e-12)
    assert stock.free_length[0] == pytest.approx(0.1016, rel=1e-12)
    assert stock.initial_tension[0] == pytest.approx(2 * 4.4482216152605, rel=1e-12)
    assert stock.others == ({},)


@pytest.mark.parametrize(
    ("heading", "message"),
    [
        (HEADING.replace("rate [N/mm],", ""), r"'rate' must be there once, got columns part, free length, .*; needed are"),
        (HEADING.replace("initial tension [N],", ""), "column 'initial tension' must be there once"),
        (HEADING.replace("price", "rate [N/m]"), "column 'rate' must be there once, got it twice"),
        (HEADING.replace("price", "part"), "column 'part' must be there once, got it twice"),
        (HEADING + ",Price", "column 'price' must be there once, got it twice"),
        (HEADING.replace("[mm]", "", 1), r"must have its unit in brackets, got none; such as 'free length \[m\]'"),
        (HEADING.replace("N/mm", "lb/in"), r"column 'rate'.*lb/in.*lbf/in"),
        (HEADING.replace("N/mm", "kg"), "column 'rate'.*kg"),
        (HEADING.replace("N/mm", "gronk"), "column 'rate'.*gronk"),
        (HEADING.replace("[N/mm]", "[N]/[mm]"), r"column must be named 'name \[unit\]', got 'rate \[N\]/\[mm\]'"),
    ],
)  # fmt: skip
def test_a_wrong_heading(write, heading, message):
    path = write(heading, *ROWS)
    with pytest.raises(PoiseFileError, match=message) as caught:
        read_stock(path)
    assert str(path) in str(caught.value)


@pytest.mark.parametrize(
    ("row", "message"),
    [
        ("C,abc,120,18,310,1", "rate must be a number in N/mm, got 'abc'"),
        ("C,,120,18,310,1", "rate must be a number in N/mm, got ''"),
        ('C,"1,2",120,18,310,1', "rate must be a number in N/mm, got '1,2'; write 1.2, with a decimal point"),
        ("C,1_2,120,18,310,1", "rate must be a number in N/mm, got '1_2'"),
        ("C,1.2 N/mm,120,18,310,1", "rate must be a number in N/mm, got '1.2 N/mm'"),
        ("C,-1.2,120,18,310,1", "rate must be > 0 N/mm, got -1.2"),
        ("C,nan,120,18,310,1", "rate must be > 0 N/mm, got nan"),
        ("C,1.2,inf,18,310,1", "free length must be > 0 mm, got inf"),
        ("C,1.2,0,18,310,1", "free length must be > 0 mm, got 0"),
        ("C,1.2,120,-1,310,1", "initial tension must be >= 0 N, got -1"),
        ("C,1.2,120,18,inf,1", "longest length must be > 0 mm, got inf"),
        ("C,1.2,120,18,120,1", r"longest length must be > free length \(0.12\) m, got 0.12"),
        ("C,1.2,120,18,310", "must have 6 cells, got 5"),
        ("C,1.2,120,18,310,1,2", "must have 6 cells, got 7"),
        (" ,1.2,120,18,310,1", "part must be a name, got an empty cell"),
    ],
)
def test_a_wrong_cell_is_named_with_its_line(write, row, message):
    path = write("# comment", HEADING, "", ROWS[0], row)
    with pytest.raises(PoiseFileError, match=f"line 5: {message}$") as caught:
        read_stock(path)
    assert str(caught.value).startswith(str(path))


def test_a_part_is_listed_once(write):
    """An order for "2 x A-1" would not say which of the two springs is meant."""
    path = write("# comment", HEADING, "", *ROWS, "A-1,1.4,120,18,310,4.50")
    with pytest.raises(PoiseFileError, match=r"csv, line 6: part must be listed once, got 'A-1' again, as in line 4$"):
        read_stock(path)


@pytest.mark.parametrize(
    ("lines", "message"),
    [
        ([""], "must have a heading line, got an empty file"),
        (["# only a comment"], "must have a heading line, got an empty file"),
        ([HEADING], "must list at least one spring, got a heading line only"),
        ([HEADING, 'C,"1.2"x,120,18,310,1'], "line 2: is not CSV: "),
    ],
)
def test_a_file_without_springs(write, lines, message):
    with pytest.raises(PoiseFileError, match=message):
        read_stock(write(*lines))


def test_a_file_that_is_not_there_or_not_text(write, tmp_path):
    with pytest.raises(PoiseFileError, match=r"nowhere\.csv: cannot be read as a stock list"):
        read_stock(tmp_path / "nowhere.csv")
    with pytest.raises(PoiseFileError, match="cannot be read as a stock list"):
        read_stock(tmp_path)
    for encoding in ("latin-1", "utf-16"):
        with pytest.raises(PoiseFileError, match=r"cannot be read as a stock list: .*; save it as CSV in UTF-8$"):
            read_stock(write(HEADING, "Ä,1,1,1,2,3", encoding=encoding))


GOOD = {
    "parts": ["a", "b"],
    "rate": [100.0, 200.0],
    "free_length": [0.1, 0.1],
    "initial_tension": [0.0, 1.0],
    "longest": [0.2, 0.3],
}


def test_a_stock_from_values_with_units():
    stock = Stock(**{**GOOD, "rate": ["0.1 N/mm", "0.2 N/mm"], "longest": np.array([0.2, 0.3])})
    np.testing.assert_allclose(stock.rate, [100.0, 200.0])
    assert stock.others == ()
    assert stock == Stock(**GOOD)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"parts": []}, "Stock.parts must be at least one part, got none"),
        ({"rate": [100.0]}, "Stock.rate must be of shape (2,) like parts, got (1,)"),
        ({"rate": 100.0}, "Stock.rate must be of shape (2,) like parts, got ()"),
        ({"longest": [[0.2, 0.3]]}, "Stock.longest must be of shape (2,) like parts, got (1, 2)"),
        ({"rate": [100.0, -3.0]}, "Stock.rate must be > 0 N/m, got -3.0"),
        ({"initial_tension": [-1.0, 0.0]}, "Stock.initial_tension must be >= 0 N, got -1.0"),
        ({"free_length": [0.1, math.nan]}, "Stock.free_length must be"),
        ({"longest": [0.2, 0.1]}, "Stock.longest must be > free_length (0.1) m, got 0.1 for b"),
        ({"others": [{"price": "1"}]}, "Stock.others must be one row for each of the 2 parts, got 1"),
    ],
)
def test_a_wrong_stock(change, message):
    with pytest.raises(InputError, match=re.escape(message)):
        Stock(**{**GOOD, **change})

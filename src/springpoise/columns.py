"""CSV files whose heading names the columns and, in brackets, their units.

The heading line may name the columns in any order: ``length [mm], load [N]``. Cells are separated
by commas or by semicolons; a byte order mark, empty lines and lines that begin with ``#`` are
passed over. Every complaint names the file and, where there is one, the line and the column.
"""

from __future__ import annotations

import csv
import math
import os
import re
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Literal, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import PoiseFileError, UnitError

__all__ = ["Column", "Columns", "Rule", "heading_names", "read_columns"]

Rule = Literal["finite", ">= 0", "> 0"]
"""What the numbers of a column have to be."""

_HEADING = re.compile(r"\s*(?P<name>[^\[\]]*?)\s*(?:\[(?P<unit>[^\[\]]*)\])?\s*")


_DECIMAL_COMMA = re.compile(r"[-+]?\d+,\d+")


class Column(NamedTuple):
    """A column of numbers that is looked for."""

    unit: str
    """The SI unit that its numbers are turned into."""
    rule: Rule = "finite"
    """What they have to be, beside finite."""


class _Heading(NamedTuple):
    name: str
    unit: str
    whole: str


@attrs.frozen(eq=False)
class Columns:
    """A table that was read: numbers in SI, and text."""

    path: Path
    """The file."""
    lines: tuple[int, ...]
    """For each row, the number of its last line in the file, from 1."""
    numbers: Mapping[str, NDArray[np.float64]]
    """Columns of numbers by name, in SI, each of shape (rows,); optional ones only where the file has them."""
    texts: Mapping[str, tuple[str, ...]]
    """Columns of text by name."""
    others: tuple[dict[str, str], ...]
    """For each row, all other columns as text, by their whole heading, such as ``"price [EUR]"``."""


def read_columns(
    file: str | os.PathLike[str],
    *,
    needed: Mapping[str, Column],
    optional: Mapping[str, Column] | None = None,
    texts: Sequence[str] = (),
    called: str = "a table",
    row: str = "row",
) -> Columns:
    r"""Read a CSV file whose heading names the columns and their units.

    Parameters
    ----------
    file
        Path of the file, UTF-8.
    needed
        Columns of numbers that have to be there, by name in small letters.
    optional
        Columns of numbers that may be there.
    texts
        Columns of text that have to be there, no cell of them empty.
    called
        What the file is, for the message that it cannot be read.
    row
        What a row is, for the message that there is none.

    Returns
    -------
    Columns

    Raises
    ------
    PoiseFileError
        The file is missing or not text, a column is missing, doubled or without a unit, or a
        cell is not a number as its column wants it; the message names the file, line and column.

    Examples
    --------
    >>> from tempfile import mkdtemp
    >>> file = Path(mkdtemp()) / "bench.csv"
    >>> _ = file.write_text("load [lbf]; length [mm]; by\n2; 100; me\n")
    >>> table = read_columns(file, needed={"length": Column("m", "> 0"), "load": Column("N")})
    >>> table.numbers["length"].tolist(), table.numbers["load"].round(3).tolist(), table.others
    ([0.1], [8.896], ({'by': ' me'},))
    """
    path = Path(file)
    text = _text_of(path, called)
    known = {**needed, **(optional or {})}
    numbered = _rows_of(path, text)
    if not numbered:
        raise PoiseFileError(f"{path}: must have a heading line, got an empty file")
    headings = _headings(path, numbered[0][1], known, [*texts, *needed], texts)
    if len(numbered) == 1:
        raise PoiseFileError(f"{path}: must list at least one {row}, got a heading line only")
    numbers: dict[str, list[float]] = {heading.name: [] for heading in headings if heading.name in known}
    words: dict[str, list[str]] = {name: [] for name in texts}
    others = []
    for line, cells in numbered[1:]:
        if len(cells) != len(headings):
            raise PoiseFileError(f"{path}, line {line}: must have {len(headings)} cells, got {len(cells)}")
        rest = {}
        for heading, cell in zip(headings, cells, strict=True):
            if heading.name in known:
                numbers[heading.name].append(_number(path, line, heading, known[heading.name], cell))
            elif heading.name in words:
                if not cell.strip():
                    raise PoiseFileError(f"{path}, line {line}: {heading.name} must be a name, got an empty cell")
                words[heading.name].append(cell.strip())
            else:
                rest[heading.whole] = cell
        others.append(rest)
    return Columns(
        path=path,
        lines=tuple(line for line, _ in numbered[1:]),
        numbers={name: np.array(values) for name, values in numbers.items()},
        texts={name: tuple(values) for name, values in words.items()},
        others=tuple(others),
    )


def heading_names(file: str | os.PathLike[str], called: str = "a table") -> tuple[str, ...]:
    """The names of a file's columns in small letters, without their units; none for an empty file.

    Raises
    ------
    PoiseFileError
        The file is missing, not text, or not CSV.
    """
    path = Path(file)
    rows = _rows_of(path, _text_of(path, called))
    return tuple(heading.name for heading in _split(path, rows[0][1])) if rows else ()


def _text_of(path: Path, called: str) -> str:
    try:
        return path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise PoiseFileError(f"{path}: cannot be read as {called}: {error}; save it as CSV in UTF-8") from error
    except (OSError, ValueError) as error:
        raise PoiseFileError(f"{path}: cannot be read as {called}: {error}") from error


def _rows_of(path: Path, text: str) -> list[tuple[int, list[str]]]:
    """The rows that are not comments, each with the number of its last line in the file."""
    lines = [
        (number, line)
        for number, line in enumerate(text.split("\n"), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    heading = lines[0][1] if lines else ""
    separator = ";" if heading.count(";") > heading.count(",") else ","
    reader = csv.reader([line + "\n" for _, line in lines], delimiter=separator, strict=True)
    try:
        return [(lines[reader.line_num - 1][0], row) for row in reader]
    except csv.Error as error:
        raise PoiseFileError(f"{path}, line {lines[reader.line_num - 1][0]}: is not CSV: {error}") from error


def _split(path: Path, cells: Sequence[str]) -> list[_Heading]:
    headings = []
    for cell in cells:
        match = _HEADING.fullmatch(cell)
        if match is None:
            hint = "; separate columns by commas or semicolons" if "\t" in cell else ""
            raise PoiseFileError(f"{path}: column must be named 'name [unit]', got {cell!r}{hint}")
        name = match["name"].strip().lower().replace("_", " ")
        headings.append(_Heading(name, (match["unit"] or "").strip(), cell.strip()))
    return headings


def _headings(
    path: Path, cells: Sequence[str], known: Mapping[str, Column], needed: Sequence[str], texts: Sequence[str]
) -> list[_Heading]:
    """The columns; checks that all that are needed are there, once, with a fitting unit."""
    headings = _split(path, cells)
    names = [heading.name for heading in headings]
    for name in needed:
        if names.count(name) != 1:
            listed = ", ".join(one if one in texts else f"{one} [{known[one].unit}]" for one in needed)
            got = "it twice" if name in names else f"columns {', '.join(names)}"
            raise PoiseFileError(f"{path}: column {name!r} must be there once, got {got}; needed are {listed}")
    # Other columns are told apart by their units too: a list may have prices in two currencies.
    whole = [(heading.name, "" if heading.name in known else heading.unit) for heading in headings]
    for doubled in whole:
        if whole.count(doubled) > 1:
            raise PoiseFileError(f"{path}: column {doubled[0]!r} must be there once, got it twice")
    for heading in headings:
        if heading.name in known:
            _check_unit(path, heading, known[heading.name].unit)
    return headings


def _check_unit(path: Path, heading: _Heading, unit: str) -> None:
    if not heading.unit:
        raise PoiseFileError(
            f"{path}: column {heading.name!r} must have its unit in brackets, got none; such as '{heading.name} [{unit}]'"
        )
    try:
        units.parse(f"1 {heading.unit}", unit, f"column {heading.name!r}")
    except UnitError as error:
        raise PoiseFileError(f"{path}: {error}") from error


def _number(path: Path, line: int, heading: _Heading, column: Column, cell: str) -> float:
    try:
        if "_" in cell:  # Python would read 1_5 as 15
            raise ValueError
        value = float(cell) * units.parse(f"1 {heading.unit}", column.unit, heading.name)
    except ValueError:
        pointed = cell.strip().replace(",", ".")
        hint = f"; write {pointed}, with a decimal point" if _DECIMAL_COMMA.fullmatch(cell.strip()) else ""
        raise PoiseFileError(
            f"{path}, line {line}: {heading.name} must be a number in {heading.unit}, got {cell!r}{hint}"
        ) from None
    kept = {"finite": True, ">= 0": value >= 0, "> 0": value > 0}[column.rule]
    if not (kept and math.isfinite(value)):
        rule = "finite" if column.rule == "finite" else f"{column.rule} {heading.unit}"
        raise PoiseFileError(f"{path}, line {line}: {heading.name} must be {rule}, got {cell.strip()}")
    return value

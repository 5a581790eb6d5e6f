"""A list of springs that can be bought."""

from __future__ import annotations

import csv
import re
from collections.abc import Sequence
from pathlib import Path as FilePath
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError, PoiseFileError, UnitError
from springpoise.springs import ExtensionSpring

__all__ = ["Stock", "read_stock"]

_COLUMNS = {"rate": "N/m", "free length": "m", "initial tension": "N", "longest length": "m"}
"""The columns that every list must have beside ``part``, and the SI unit each is turned into."""

_HEADING = re.compile(r"\s*(?P<name>[^\[\]]*?)\s*(?:\[(?P<unit>[^\[\]]*)\])?\s*")


def _names(value: Any) -> tuple[str, ...]:
    return tuple(str(item) for item in value)


def _rows(value: Any) -> tuple[dict[str, str], ...]:
    return tuple(dict(row) for row in value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Stock:
    """Extension springs that can be bought, one array entry a part.

    Raises
    ------
    InputError
        No part, arrays of different lengths, or a value out of range.
    """

    parts: tuple[str, ...] = attrs.field(converter=_names)
    """Part names or numbers."""
    rate: NDArray[np.float64] = attrs.field(converter=units.newton_per_metre, validator=units.positive)
    """Spring rates [N/m], shape (n,), > 0."""
    free_length: NDArray[np.float64] = attrs.field(converter=units.metre, validator=units.positive)
    """Lengths inside the hooks with no load [m], shape (n,), > 0."""
    initial_tension: NDArray[np.float64] = attrs.field(converter=units.newton, validator=units.not_negative)
    """Initial tensions [N], shape (n,), >= 0."""
    longest: NDArray[np.float64] = attrs.field(converter=units.metre, validator=units.positive)
    """Greatest permissible lengths inside the hooks [m], shape (n,), each beyond the free length."""
    others: tuple[dict[str, str], ...] = attrs.field(factory=tuple, converter=_rows)
    """For each part, the list's other columns as text, such as prices."""

    def __attrs_post_init__(self) -> None:
        if not self.parts:
            raise InputError("Stock.parts must be at least one part, got none")
        for name in ("rate", "free_length", "initial_tension", "longest"):
            shape = np.shape(getattr(self, name))
            if shape != (len(self.parts),):
                raise InputError(f"Stock.{name} must be of shape ({len(self.parts)},) like parts, got {shape}")
        short = np.flatnonzero(self.longest <= self.free_length)
        if short.size:
            i = int(short[0])
            raise InputError(
                f"Stock.longest must be > free_length ({self.free_length[i]:g}) m, got {self.longest[i]:g} for {self.parts[i]}"
            )

    def __len__(self) -> int:
        return len(self.parts)

    def spring(self, index: int) -> ExtensionSpring:
        """The spring of one part, counted from 0."""
        return ExtensionSpring(
            float(self.rate[index]),
            free_length=float(self.free_length[index]),
            initial_tension=float(self.initial_tension[index]),
            longest=float(self.longest[index]),
        )


def read_stock(file: str | FilePath) -> Stock:
    """Read a stock list from a CSV file.

    The first line names the columns, in any order, with units in brackets. Needed are ``part``,
    ``rate``, ``free length``, ``initial tension`` and ``longest length``, for example
    ``part,rate [N/mm],free length [mm],initial tension [N],longest length [mm],price``. A column
    of zeros says that springs have no initial tension; leaving the column out is refused, since
    a spring whose initial tension is not known balances nothing. Other columns are kept as text.

    Parameters
    ----------
    file
        Path of a CSV file in UTF-8, comma or semicolon separated. Lines that begin with ``#``
        and empty lines are passed over.

    Returns
    -------
    Stock

    Raises
    ------
    PoiseFileError
        The file is missing or not text, a column is missing, doubled or without a unit, or a
        cell is not a number in range; the message names the file, line and column.
    """
    path = FilePath(file)
    try:
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError) as error:
        raise PoiseFileError(f"{path}: cannot be read as a stock list: {error}") from error
    numbered = [
        (number, line)
        for number, line in enumerate(text.splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    if not numbered:
        raise PoiseFileError(f"{path}: must have a heading line, got an empty file")
    separator = ";" if numbered[0][1].count(";") > numbered[0][1].count(",") else ","
    try:
        rows = list(csv.reader([line for _, line in numbered], delimiter=separator, strict=True))
    except csv.Error as error:
        raise PoiseFileError(f"{path}: is not a CSV file: {error}") from error
    headings = _headings(path, rows[0])
    if len(rows) == 1:
        raise PoiseFileError(f"{path}: must list at least one spring, got a heading line only")
    values: dict[str, list[float]] = {name: [] for name in _COLUMNS}
    parts, others = [], []
    for (number, _), row in zip(numbered[1:], rows[1:], strict=True):
        if len(row) != len(headings):
            raise PoiseFileError(f"{path}, line {number}: must have {len(headings)} cells, got {len(row)}")
        record = dict(zip((name for name, _ in headings), row, strict=True))
        part = record["part"].strip()
        if not part:
            raise PoiseFileError(f"{path}, line {number}: part must be a name, got an empty cell")
        parts.append(part)
        for (name, unit), cell in zip(headings, row, strict=True):
            if name in _COLUMNS:
                values[name].append(_cell(path, number, name, unit, cell))
        others.append({name: record[name] for name, _ in headings if name != "part" and name not in _COLUMNS})
        if not values["longest length"][-1] > values["free length"][-1]:
            raise PoiseFileError(
                f"{path}, line {number}: longest length must be > free length ({values['free length'][-1]:g}) m, "
                f"got {values['longest length'][-1]:g}"
            )
    return Stock(
        parts=parts,
        rate=np.array(values["rate"]),
        free_length=np.array(values["free length"]),
        initial_tension=np.array(values["initial tension"]),
        longest=np.array(values["longest length"]),
        others=others,
    )


def _headings(path: FilePath, cells: Sequence[str]) -> list[tuple[str, str]]:
    """Names and units of the columns; checks that all that are needed are there, once, with a fitting unit."""
    headings = []
    for cell in cells:
        match = _HEADING.fullmatch(cell)
        if match is None:
            raise PoiseFileError(f"{path}: column must be named 'name [unit]', got {cell!r}")
        headings.append((match["name"].strip().lower().replace("_", " "), (match["unit"] or "").strip()))
    names = [name for name, _ in headings]
    for name in ("part", *_COLUMNS):
        if names.count(name) != 1:
            needed = ", ".join(["part", *(f"{n} [{u}]" for n, u in _COLUMNS.items())])
            got = "it twice" if name in names else f"columns {', '.join(names)}"
            raise PoiseFileError(f"{path}: column {name!r} must be there once, got {got}; needed are {needed}")
    doubled = [name for name in names if names.count(name) > 1]
    if doubled:
        raise PoiseFileError(f"{path}: column {doubled[0]!r} must be there once, got it twice")
    for name, unit in headings:
        if name in _COLUMNS:
            if not unit:
                raise PoiseFileError(f"{path}: column {name!r} must have its unit in brackets, got none; such as '{name} [{_COLUMNS[name]}]'")
            try:
                units.parse(f"1 {unit}", _COLUMNS[name], f"column {name!r}")
            except UnitError as error:
                raise PoiseFileError(f"{path}: {error}") from error
    return headings


def _cell(path: FilePath, line: int, name: str, unit: str, cell: str) -> float:
    try:
        factor = units.parse(f"1 {unit}", _COLUMNS[name], name)
        value = float(cell) * factor
    except ValueError:
        raise PoiseFileError(f"{path}, line {line}: {name} must be a number in {unit}, got {cell!r}") from None
    lowest_allowed = value >= 0 if name == "initial tension" else value > 0
    if not (lowest_allowed and np.isfinite(value)):
        rule = ">= 0" if name == "initial tension" else "> 0"
        raise PoiseFileError(f"{path}, line {line}: {name} must be {rule} {unit}, got {cell}")
    return value

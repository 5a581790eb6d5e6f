"""A list of springs that can be bought."""

from __future__ import annotations

from pathlib import Path as FilePath
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.columns import Column, read_columns
from springpoise.errors import InputError, PoiseFileError
from springpoise.springs import ExtensionSpring

__all__ = ["Stock", "read_stock"]

_COLUMNS = {
    "rate": Column("N/m", "> 0"),
    "free length": Column("m", "> 0"),
    "initial tension": Column("N", ">= 0"),
    "longest length": Column("m", "> 0"),
}
"""The columns that every list must have beside ``part``."""


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
    """For each part, the list's other columns as text by their whole heading, such as ``"price [EUR]"``."""

    def __attrs_post_init__(self) -> None:
        if not self.parts:
            raise InputError("Stock.parts must be at least one part, got none")
        for name in ("rate", "free_length", "initial_tension", "longest"):
            shape = np.shape(getattr(self, name))
            if shape != (len(self.parts),):
                raise InputError(f"Stock.{name} must be of shape ({len(self.parts)},) like parts, got {shape}")
        if self.others and len(self.others) != len(self.parts):
            raise InputError(
                f"Stock.others must be one row for each of the {len(self.parts)} parts, got {len(self.others)}"
            )
        short = np.flatnonzero(self.longest <= self.free_length)
        if short.size:
            i = int(short[0])
            raise InputError(
                f"Stock.longest must be > free_length ({self.free_length[i]:g}) m, "
                f"got {self.longest[i]:g} for {self.parts[i]}"
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
    a spring whose initial tension is not known balances nothing. Other columns are kept as text
    under their whole heading, such as ``"price [EUR]"``.

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
        The file is missing or not text, a column is missing, doubled or without a unit, a cell is
        not a number in range, or a part is listed twice; the message names the file, line and column.
    """
    table = read_columns(file, needed=_COLUMNS, texts=("part",), called="a stock list", row="spring")
    free, longest = table.numbers["free length"], table.numbers["longest length"]
    for line, shortest, greatest in zip(table.lines, free, longest, strict=True):
        if not greatest > shortest:
            raise PoiseFileError(
                f"{table.path}, line {line}: longest length must be > free length ({shortest:g}) m, got {greatest:g}"
            )
    lines: dict[str, int] = {}
    for line, part in zip(table.lines, table.texts["part"], strict=True):
        if part in lines:
            raise PoiseFileError(
                f"{table.path}, line {line}: part must be listed once, got {part!r} again, as in line {lines[part]}"
            )
        lines[part] = line
    return Stock(
        parts=table.texts["part"],
        rate=table.numbers["rate"],
        free_length=free,
        initial_tension=table.numbers["initial tension"],
        longest=longest,
        others=table.others,
    )

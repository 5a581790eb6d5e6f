"""Short text tables and numbers with units, for everything that prints itself."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

__all__ = ["degrees", "facts", "grid", "millimetres", "number"]


def number(value: float, unit: str, digits: int = 4) -> str:
    """A value with ``digits`` significant digits and its unit: ``"3.432 N*m"``."""
    if math.isfinite(value) and 1e-4 <= abs(value) < 1e7:
        places = max(0, digits - 1 - math.floor(math.log10(abs(value))))
        text = f"{value:.{places}f}"
    else:
        text = f"{value:.2g}"
    return text if unit == "1" else f"{text} {unit}"


def degrees(angle: float) -> str:
    """An angle given in rad, printed in degrees."""
    return f"{math.degrees(angle) + 0.0:.2f} deg".replace("-0.00 ", "0.00 ")


def millimetres(length: float) -> str:
    """A length given in m, printed in mm."""
    return number(length * 1e3, "mm")


def facts(rows: Iterable[tuple[str, str]], indent: str = "  ") -> str:
    """Names and values in two aligned columns."""
    listed = list(rows)
    width = max((len(name) for name, _ in listed), default=0)
    return "\n".join(f"{indent}{name.ljust(width)}  {value}".rstrip() for name, value in listed)


def grid(header: Sequence[str], rows: Iterable[Sequence[str]], indent: str = "  ") -> str:
    """A table with a header line; the first column flush left, the others flush right."""
    lines = [list(header), *[list(row) for row in rows]]
    widths = [max(len(line[column]) for line in lines) for column in range(len(header))]

    def laid(line: Sequence[str]) -> str:
        cells = [
            cell.ljust(width) if i == 0 else cell.rjust(width)
            for i, (cell, width) in enumerate(zip(line, widths, strict=True))
        ]
        return (indent + "  ".join(cells)).rstrip()

    return "\n".join(laid(line) for line in lines)

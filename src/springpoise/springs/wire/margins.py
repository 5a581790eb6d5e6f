"""How far a wire spring is from each of its limits."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np

from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.tables import grid, number

__all__ = ["SAFE_USE", "CoilMargins", "Margin"]

SAFE_USE = (
    "Safe use: computed, not certified; local law, the standards for the machine and a licensed or otherwise "
    "competent engineer prevail."
)
"""What every print of margins ends with."""

ROUNDING = 1e-9
"""A factor that falls short of the wanted one by less than this holds [1]."""
_SHOWN = {"Pa": (1e-6, "MPa"), "m": (1e3, "mm")}


def least(value: Carrier) -> float:
    """The least of a value: the value itself, or an array's smallest."""
    return float(np.min(value))


def shown(value: Carrier, unit: str) -> str:
    """A value with its unit, or the least and greatest of an array."""
    scale, name = _SHOWN.get(unit, (1.0, unit))
    values = np.asarray(value, dtype=np.float64)
    low, high = float(values.min()) * scale, float(values.max()) * scale
    return number(low, name) if low == high or np.isnan(low) else f"{number(low, '1')} to {number(high, name)}"


@attrs.frozen(eq=False)
class Margin:
    """How far one quantity is from its limit."""

    name: str
    """What is compared, such as ``"hook bending, static"``."""
    actual: Carrier
    """Value at the governing load or length."""
    permitted: Carrier
    """Value at the limit, in the same unit."""
    factor: Carrier
    """How many times the load may grow, or how often the limit holds the value [1]; below ``wanted`` it fails."""
    unit: str
    """Unit of ``actual`` and ``permitted``."""
    basis: str = ""
    """What the limit rests on."""
    wanted: float = 1.0
    """Factor that is recommended or needed [1]."""

    @property
    def left(self) -> Carrier:
        """Distance to the limit in ``unit``; negative beyond it."""
        return self.permitted - self.actual

    @property
    def score(self) -> float:
        """Least factor over the one that is wanted [1]: below 1 it fails."""
        return least(self.factor) / self.wanted

    @property
    def holds(self) -> bool:
        """Whether the factor is at least the one that is wanted, everywhere."""
        return self.score >= 1.0 - ROUNDING


@attrs.frozen(eq=False, kw_only=True)
class CoilMargins:
    """All margins of a wire spring over one range of loads; prints as a short table."""

    title: str
    """Which spring and which range."""
    margins: tuple[Margin, ...]
    """Every limit that applies, in the order of the print."""
    load_left: Carrier
    """Load that may be added to the greatest one before the first limit on the load is met [N, or N·m]."""
    travel_left: Carrier
    """Travel that belongs to it [m or rad]."""
    energy: Carrier
    """Energy stored at the greatest load [J]."""
    notes: tuple[str, ...] = ()
    """Facts and recommendations that are no limits."""
    travel_unit: str = "m"
    """Unit of the travel."""
    load_unit: str = "N"
    """Unit of the load."""

    @property
    def governing(self) -> Margin:
        """The limit that is met first: the least factor over the one that is wanted. NaN governs."""
        return min(self.margins, key=lambda margin: -np.inf if np.isnan(margin.score) else margin.score)

    @property
    def holds(self) -> bool:
        """Whether every margin is at least the one that is wanted."""
        return all(margin.holds for margin in self.margins)

    @property
    def status(self) -> str:
        """One sentence on what governs."""
        worst = self.governing
        verdict = "every limit is kept" if self.holds else "a limit is not kept"
        wanted = "" if worst.wanted == 1.0 else f" of {worst.wanted:g} wanted"
        return f"{verdict}; {worst.name} governs with a factor of {least(worst.factor):.3f}{wanted}"

    def margin(self, name: str) -> Margin:
        """The margin of that name.

        Raises
        ------
        InputError
            No such margin, with the names that there are.
        """
        for found in self.margins:
            if found.name == name:
                return found
        raise InputError(f"margin must be one of {', '.join(repr(m.name) for m in self.margins)}, got {name!r}")

    def __str__(self) -> str:
        rows = []
        for margin in self.margins:
            wanted = f"{margin.wanted:g}"
            mark = " *" if margin is self.governing else ""
            rows.append(
                [
                    margin.name + mark,
                    shown(margin.actual, margin.unit),
                    shown(margin.permitted, margin.unit),
                    shown(margin.factor, "1"),
                    wanted,
                ]
            )
        lines = [
            self.title,
            grid(["limit", "actual", "permitted", "factor", "wanted"], rows),
            f"  status: {self.status}",
        ]
        lines.append(
            f"  left: {shown(self.load_left, self.load_unit)}, {shown(self.travel_left, self.travel_unit)}; "
            f"stored: {shown(self.energy, 'J')}"
        )
        lines += [f"  {note}" for note in self.notes]
        return "\n".join([*lines, f"  {SAFE_USE}"])


def limited(name: str, actual: Carrier, permitted: Carrier, unit: str, basis: str = "", wanted: float = 1.0) -> Margin:
    """A margin whose factor is permitted over actual; infinite where nothing is used."""
    values: Any = np.asarray(actual, dtype=np.float64)
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = np.where(values == 0.0, np.inf, np.asarray(permitted) / np.where(values == 0.0, 1.0, values))
    return Margin(name, actual, permitted, float(factor) if factor.ndim == 0 else factor, unit, basis, wanted)

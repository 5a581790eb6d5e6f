"""A comparison of methods as a table."""

from __future__ import annotations

import math

import attrs

from springpoise.balance.methods.figures import MethodFigures
from springpoise.errors import NoSolution
from springpoise.mechanism import Mechanism
from springpoise.tables import grid, number

__all__ = ["MethodComparison", "MethodRow"]

_HEADER = ("method", "worst", "rms", "exact", "friction", "stays", "up", "down", "hold", "pivot", "energy", "inertia")
_UNITS = ("", "%", "%", "angles", "N*m", "%", "N*m", "N*m", "N*m", "N", "J", "kg*m2")


@attrs.frozen
class MethodRow:
    """One method, sized as well as it can be between the bounds."""

    method: str
    """What it is called in ``compare_methods``."""
    name: str
    """What it is called in the table."""
    mechanism: Mechanism | None
    """The arm with it; None where it cannot be sized."""
    figures: MethodFigures | None
    """Its figures; None where it cannot be sized."""
    sizes: str
    """Its parts and mounts in one line; where it cannot be sized, why not."""

    @property
    def success(self) -> bool:
        """Whether it could be sized."""
        return self.figures is not None

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.figures is None:
            return f"{self.name}: cannot be sized: {self.sizes}"
        found = self.figures.equilibria
        where = str(found) if len(found.points) <= 6 else f"balanced at {len(found.points)} angles"
        return f"{self.name}: {self.sizes}; {where}"

    def require(self) -> MethodRow:
        """The row itself, or an error where the method cannot be sized.

        Raises
        ------
        NoSolution
            The method cannot be sized between the bounds; the message says why.
        """
        if self.figures is None:
            raise NoSolution(self.status)
        return self


@attrs.frozen
class MethodComparison:
    """Methods of balancing one arm, side by side."""

    rows: tuple[MethodRow, ...]
    """The methods, best first, and behind them those that cannot be sized."""
    norm: str
    """What was made least: ``"minimax"``, the worst residual, or ``"rms"``."""
    peak_gravity_torque: float
    """Greatest gravity torque of the arm over the poses [N·m]."""
    warming: float
    """How much warmer the column of temperature is [K]."""
    payload_change: float
    """How much heavier the column of payload is [1]."""

    @property
    def success(self) -> bool:
        """Whether any method could be sized."""
        return any(row.success for row in self.rows)

    @property
    def ranking(self) -> tuple[str, ...]:
        """Methods that could be sized, the smallest worst residual first (rms, where that was made least)."""
        return tuple(row.method for row in self.rows if row.success)

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        sized = len(self.ranking)
        if not sized:
            return f"none of {len(self.rows)} methods can be sized between the bounds"
        return f"{sized} of {len(self.rows)} methods sized; {self.rows[0].name} leaves least over"

    def row(self, method: str) -> MethodRow:
        """The row of one method.

        Raises
        ------
        KeyError
            The method was not compared.
        """
        for row in self.rows:
            if row.method == method:
                return row
        raise KeyError(f"{method!r} was not compared, only {', '.join(row.method for row in self.rows)}")

    def require(self) -> MethodComparison:
        """The result itself, or an error where no method can be sized.

        Raises
        ------
        NoSolution
            No method can be sized.
        """
        if not self.success:
            raise NoSolution("; ".join(row.status for row in self.rows))
        return self

    def __str__(self) -> str:
        header = (*_HEADER, f"{self.warming:+.3g} K", f"{100 * self.payload_change:+.3g} %")
        lines = [(*_UNITS, "%", "%"), *(_cells(row, self.peak_gravity_torque) for row in self.rows)]
        head = (
            f"methods compared ({self.norm}); percent of the peak gravity torque, "
            f"{number(self.peak_gravity_torque, 'N*m')}\n  {self.status}"
        )
        notes = "\n".join(_wrapped(row.status) for row in self.rows)
        return f"{head}\n{grid(header, lines)}\n{notes}"


def _cells(row: MethodRow, peak: float) -> tuple[str, ...]:
    f = row.figures
    if f is None:
        return (row.name, *("-" for _ in range(13)))
    return (
        row.name,
        _percent(f.residual.worst_fraction),
        _percent(f.residual.rms_fraction),
        "~all" if f.balances == "near all" else f.balances,
        _torque(f.friction, peak),
        f"{100 * f.stays_share:.0f}",
        _torque(f.effort_up, peak),
        _torque(f.effort_down, peak),
        _torque(f.must_hold, peak),
        ("" if f.pivot_load_known else "<") + _short(f.pivot_load),
        _short(f.stored_energy),
        f"{f.inertia:.2g}" if f.inertia else "0",
        _percent(f.warmer, signed=True),
        _percent(f.heavier, signed=True),
    )


def _percent(share: float, *, signed: bool = False) -> str:
    value = 100.0 * share
    text = f"{value:+.2g}" if signed else f"{value:.2f}"
    return "0" if abs(value) < 5e-3 else text


def _torque(value: float, peak: float) -> str:
    """To a thousandth of the peak, as percents are."""
    text = f"{value:.{max(0, 2 - math.floor(math.log10(peak)))}f}"
    return "0" if float(text) == 0.0 else text


def _short(value: float) -> str:
    return "0" if abs(value) < 5e-7 else f"{value:.3g}" if abs(value) < 1e3 else f"{value:.0f}"


def _wrapped(text: str, width: int = 118) -> str:
    lines, line = [], " "
    for word in text.split():
        if len(line) + 1 + len(word) > width:
            lines.append(line)
            line = "   "
        line += f" {word}"
    return "\n".join([*lines, line])

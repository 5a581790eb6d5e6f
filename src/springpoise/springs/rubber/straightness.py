"""How near a spring is to a straight load line, and to a spring of zero free length."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError
from springpoise.tables import grid, millimetres, number

__all__ = ["Line", "ZeroLengthFit", "zero_length_fit"]

_POINTS = 801

Array = NDArray[np.float64]


@attrs.frozen
class Line:
    """A straight load line ``rate · (x - effective_free_length)``, and how far the spring is from it."""

    rate: float
    """Slope of the line [N/m]."""
    effective_free_length: float
    """Length at which the line meets zero load [m]; negative where the line starts above zero."""
    rms: float
    """Root mean square of the spring's deviation over the range [N]."""
    worst: float
    """Largest deviation over the range [N]."""


@attrs.frozen
class ZeroLengthFit:
    """How near a spring is to a straight line, and to zero free length, over a range of lengths."""

    over: tuple[float, float]
    """The range of lengths [m]."""
    loads: tuple[float, float]
    """Smallest and largest load in the range [N]."""
    line: Line
    """The straight line with the least rms deviation."""
    line_least_worst: Line
    """The straight line with the least worst deviation."""
    zero_length: Line
    """The line through zero length with the least rms deviation: the spring of zero free length nearest to it."""
    zero_length_least_worst: Line
    """The line through zero length with the least worst deviation."""
    proportional_rate: float
    """Middle of the lowest and highest load over length in the range [N/m]."""
    proportional_within: float
    """The load over length lies within plus and minus this share of ``proportional_rate`` [1]; 0 for zero free length."""

    @property
    def rate(self) -> float:
        """Rate of the straight line with the least rms deviation [N/m]."""
        return self.line.rate

    @property
    def effective_free_length(self) -> float:
        """Effective free length of that line [m]."""
        return self.line.effective_free_length

    @property
    def residual(self) -> float:
        """Worst deviation from that line [N]."""
        return self.line.worst

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        return (
            f"load within ±{100.0 * self.proportional_within:.2g} % of proportional to length "
            f"from {millimetres(self.over[0])} to {millimetres(self.over[1])}"
        )

    def __str__(self) -> str:
        rows = [
            [
                name,
                number(line.rate, "N/m"),
                millimetres(line.effective_free_length),
                number(line.rms, "N"),
                number(line.worst, "N"),
                f"{100.0 * line.worst / self.loads[1]:.2f} %",
            ]
            for name, line in (
                ("straight, least rms", self.line),
                ("straight, least worst", self.line_least_worst),
                ("zero length, least rms", self.zero_length),
                ("zero length, least worst", self.zero_length_least_worst),
            )
        ]
        header = ["line", "rate", "free length", "rms", "worst", "of top load"]
        return f"{self.status}\n{grid(header, rows)}"


def zero_length_fit(load: Callable[[Any], Any], over: Any) -> ZeroLengthFit:
    """Best straight lines through ``load(x)`` over a range of lengths.

    Parameters
    ----------
    load
        Load [N] at an array of lengths [m].
    over
        The range of lengths (shortest, longest) [m], above zero.

    Raises
    ------
    InputError
        A range that is empty, or on which the load has no value or is zero throughout.
    """
    low, high = units.pair(over, "m", "over")
    if not 0.0 < low < high:
        raise InputError(f"over must be lengths (shorter, longer) above 0 m, got {(low, high)}")
    x = np.linspace(low, high, _POINTS)
    f = np.asarray(load(x), dtype=np.float64)
    if f.shape != x.shape:
        raise InputError(
            f"over needs the load of one spring, got loads of shape {f.shape} for parameters that are arrays"
        )
    if not np.all(np.isfinite(f)):
        raise InputError(
            f"over must be lengths at which the spring has a load, got {(low, high)} m, with none at {x[~np.isfinite(f)][0]:.6g} m"
        )
    if not f.max() > 0.0:
        raise InputError(f"over must be lengths at which the spring pulls, got {(low, high)} m, slack throughout")
    weight = np.sqrt(np.where((x == low) | (x == high), 0.5, 1.0))
    ratio = f / x
    middle = 0.5 * (ratio.max() + ratio.min())
    straight, zero = np.stack([x, np.ones_like(x)], axis=1), x[:, None]
    return ZeroLengthFit(
        over=(low, high),
        loads=(float(f.min()), float(f.max())),
        line=_line(x, f, _least_squares(straight, f, weight)),
        line_least_worst=_line(x, f, _least_worst(straight, f)),
        zero_length=_line(x, f, _least_squares(zero, f, weight)),
        zero_length_least_worst=_line(x, f, _least_worst(zero, f)),
        proportional_rate=float(middle),
        proportional_within=float((ratio.max() - ratio.min()) / (2.0 * middle)),
    )


def _line(x: Array, f: Array, found: Array) -> Line:
    rate, at_zero = float(found[0]), float(found[1]) if found.size > 1 else 0.0
    off = f - (rate * x + at_zero)
    free = -at_zero / rate if found.size > 1 else 0.0
    return Line(
        rate, free, math.sqrt(float(np.trapezoid(off * off, x)) / float(x[-1] - x[0])), float(np.abs(off).max())
    )


def _least_squares(columns: Array, f: Array, weight: Array) -> Array:
    return np.asarray(np.linalg.lstsq(columns * weight[:, None], f * weight, rcond=None)[0], dtype=np.float64)


def _least_worst(columns: Array, f: Array) -> Array:
    """The exact solution over the points, as a linear programme in units of order one."""
    from scipy.optimize import linprog

    scale, top = np.abs(columns).max(axis=0), float(np.abs(f).max())
    a, b = columns / scale, f / top
    ones = np.ones((f.size, 1))
    solution = linprog(
        [0.0] * a.shape[1] + [1.0],
        A_ub=np.block([[a, -ones], [-a, -ones]]),
        b_ub=np.concatenate([b, -b]),
        bounds=[(None, None)] * a.shape[1] + [(0.0, None)],
        method="highs",
    )
    found: Array = solution.x[:-1] * top / scale
    return found

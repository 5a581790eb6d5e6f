"""A table look-up that formulas, recordings and generated code share: a piecewise polynomial."""

from __future__ import annotations

from bisect import bisect_right
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise.errors import InputError

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = ["Lookup"]


class Lookup:
    """A piecewise polynomial over increasing breakpoints; NaN outside them, never extrapolated.

    Parameters
    ----------
    breaks
        Breakpoints, shape (n + 1,), strictly increasing.
    coefficients
        Shape (n, k): row i holds the polynomial of piece i in ``x - breaks[i]``, constant first.
    """

    __slots__ = ("_rows", "_starts", "breaks", "coefficients")

    def __init__(self, breaks: Any, coefficients: Any) -> None:
        edges = np.array(breaks, dtype=np.float64)
        rows = np.array(coefficients, dtype=np.float64)
        if edges.ndim != 1 or edges.size < 2 or not np.all(np.diff(edges) > 0) or not np.all(np.isfinite(edges)):
            raise InputError(f"Lookup.breaks must be finite and strictly increasing, got {breaks!r}")
        if rows.ndim != 2 or rows.shape[0] != edges.size - 1 or rows.shape[1] < 1 or not np.all(np.isfinite(rows)):
            raise InputError(
                f"Lookup.coefficients must be finite and of shape ({edges.size - 1}, k), got shape {rows.shape}"
            )
        edges.setflags(write=False)
        rows.setflags(write=False)
        self.breaks: NDArray[np.float64] = edges
        self.coefficients: NDArray[np.float64] = rows
        self._starts: list[float] = edges.tolist()
        self._rows: list[list[float]] = rows.tolist()

    def __call__(self, x: Any) -> Any:
        """Value at ``x``: float for a float, array for an array; NaN outside the breakpoints."""
        if isinstance(x, float | int):
            return self._at(float(x))
        x = np.asarray(x, dtype=np.float64)
        with np.errstate(invalid="ignore"):
            inside = (x >= self.breaks[0]) & (x <= self.breaks[-1])
        piece = np.clip(np.searchsorted(self.breaks, x, side="right") - 1, 0, len(self._rows) - 1)
        u = np.clip(x, self.breaks[0], self.breaks[-1]) - self.breaks[piece]
        value = self.coefficients[piece, -1]
        for column in range(self.coefficients.shape[1] - 2, -1, -1):
            value = value * u + self.coefficients[piece, column]
        return np.where(inside, value, np.nan)

    def _at(self, x: float) -> float:
        starts = self._starts
        if not starts[0] <= x <= starts[-1]:
            return float("nan")
        piece = min(bisect_right(starts, x) - 1, len(self._rows) - 1)
        u = x - starts[piece]
        value = 0.0
        for coefficient in reversed(self._rows[piece]):
            value = value * u + coefficient
        return value

    def derivative(self) -> Lookup:
        """The slope, as a table over the same breakpoints."""
        powers = np.arange(1, self.coefficients.shape[1])
        rows = self.coefficients[:, 1:] * powers if powers.size else np.zeros((len(self._rows), 1))
        return Lookup(self.breaks, rows)

    def antiderivative(self) -> Lookup:
        """The integral from the first breakpoint, as a table over the same breakpoints."""
        powers = np.arange(1, self.coefficients.shape[1] + 1)
        rows = np.concatenate([np.zeros((len(self._rows), 1)), self.coefficients / powers], axis=1)
        widths = np.diff(self.breaks)
        steps = sum(rows[:, k] * widths**k for k in range(1, rows.shape[1]))
        rows[:, 0] = np.concatenate([[0.0], np.cumsum(steps)[:-1]])
        return Lookup(self.breaks, rows)

    def _key(self) -> tuple[bytes, bytes]:
        return self.breaks.tobytes(), self.coefficients.tobytes()

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Lookup) and self._key() == other._key()

    def __hash__(self) -> int:
        return hash(self._key())

    def __reduce__(self) -> tuple[Any, ...]:
        return Lookup, (self.breaks, self.coefficients)

    def __repr__(self) -> str:
        return f"Lookup({len(self._rows)} pieces from {self._starts[0]:g} to {self._starts[-1]:g})"

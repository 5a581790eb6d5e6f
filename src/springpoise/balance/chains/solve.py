"""The equations of exact balance, and what of the springs follows from them.

A spring of rate k joins two points whose difference is ``s = Σ s_j e_j``. Its energy and that of
gravity γ are constant for all angles where, over all springs,

    Σ k conj(s_0) s_j = conj(γ) M_j     (the ground's terms lift each link j)
    Σ k conj(s_i) s_j = 0               (and no two links i < j are coupled)

In each spring's terms the rate, the start and the end appear once, as factors. So what is left
open follows step by step: from an equation with one unknown, or from several that are linear in
theirs together.

The second kind of equation also says how many springs there have to be. With each spring's
numbers weighted by the root of its rate, the columns s_j of all springs are at right angles to one
another, and none is zero where gravity turns link j. There are no more such columns than they have
rows: n links need n springs, and the layout with all springs on the ground shows that n will do.

Sources: the stiffness matrix is that of Lin, Shieh and Chen 2010 (Mechanism and Machine Theory,
value from memory) and of the spatial spring suspensions of doi 10.1115/1.4006522, which are
balanced where it is block-diagonal.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations
from typing import NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

__all__ = ["Equation", "Strut", "Unknown", "solve"]

ROUNDING = 1e-9
"""A sum below this share of its largest term is zero [1]."""

STRAIGHT = 1e-12
"""A direction whose sine is below this lies on the line [1]."""

Pair = tuple[int, int]


class Unknown(NamedTuple):
    """A number of a spring that is not known yet."""

    strut: int
    what: str
    """``"rate"``, ``"start"`` or ``"end"``."""


@attrs.define
class Strut:
    """One spring while its numbers are sought."""

    name: str
    inner: int
    """Index of the first body's own turning vector, 0 for what is parallel to the ground."""
    outer: int
    """Index of the last link's."""
    between: NDArray[np.complex128]
    """The sum from where the start is measured to the last link's joint [m]."""
    up: complex
    """Direction in which a start at a positive distance lies."""
    rate: float | None
    start: complex | None
    """In the frame of the first body, from where the start is measured [m]."""
    end: complex | None
    end_may_turn: bool
    """Whether only the distance of the end was asked for, so that its direction may still be chosen."""

    def vector(self, index: int) -> complex | None:
        """Component s_j of the spring's difference of points; None where an unknown enters."""
        value = complex(self.between[index])
        if index == self.inner:
            return None if self.start is None else value - self.start
        if index == self.outer:
            return None if self.end is None else value + self.end
        return value

    def factors(self, pair: Pair) -> list[tuple[str, complex | None]]:
        """The factors of the spring's term in an equation; none of them where the term is zero."""
        i, j = pair
        if min(pair) < 0 or max(pair) > self.outer:
            return []
        left, right = self.vector(i), self.vector(j)
        found = [("rate", None if self.rate is None else complex(self.rate))]
        found.append(("start" if i == self.inner else "fixed", None if left is None else left.conjugate()))
        found.append(("end" if j == self.outer else "start" if j == self.inner else "fixed", right))
        return [] if any(value == 0 for _, value in found) else found

    def put(self, what: str, value: complex) -> None:
        """Sets a number that was found; for the start, ``value`` is the conjugate of its s."""
        if what == "rate":
            self.rate = value.real
        elif what == "start":
            self.start = _straightened(complex(self.between[self.inner]) - value.conjugate(), self.up)
        else:
            self.end = _straightened(value - complex(self.between[self.outer]), 1.0)


class Equation(NamedTuple):
    """How one equation is met."""

    pair: Pair
    sum: complex
    """What the springs give [N·m]."""
    goal: complex
    """What it has to be [N·m]."""
    size: float
    """Sum of the magnitudes of all terms [N·m]."""

    @property
    def holds(self) -> bool:
        """Whether what is lacking is rounding."""
        return abs(self.sum - self.goal) <= ROUNDING * self.size


class Solved(NamedTuple):
    """What solving came to."""

    equations: tuple[Equation, ...]
    unknown: tuple[Unknown, ...]
    """What no equation determines."""
    found_by: dict[Unknown, Pair]
    """For each number found alone, the equation that it was found by."""
    askew: tuple[Unknown, ...]
    """Rates that would have to be complex: the given directions do not fit."""


def solve(struts: list[Strut], goals: NDArray[np.complex128]) -> Solved:
    """Fills in what is None in the struts; ``goals`` are the right sides by the index of the link."""
    pairs = list(combinations(range(goals.size), 2))
    found_by: dict[Unknown, Pair] = {}
    askew: list[Unknown] = []
    while True:
        single = min(_singles(struts, pairs), default=None)
        if single is not None:
            _, pair, unknown = single
            if not _solve_one(struts, goals, pair, unknown):
                askew.append(unknown)
            found_by[unknown] = pair
        elif not _solve_together(struts, goals, pairs):
            break
    unknown_left = tuple(
        Unknown(i, what)
        for i, strut in enumerate(struts)
        for what in ("rate", "start", "end")
        if getattr(strut, what) is None
    )
    equations = () if unknown_left else tuple(_equation(struts, goals, pair) for pair in pairs)
    return Solved(equations, unknown_left, found_by, tuple(askew))


def _unknowns(struts: list[Strut], pair: Pair) -> list[list[Unknown]]:
    """For each spring with something unknown in an equation, what that is."""
    found = []
    for i, strut in enumerate(struts):
        own = [Unknown(i, what) for what, value in strut.factors(pair) if value is None]
        if own:
            found.append(own)
    return found


def _singles(struts: list[Strut], pairs: list[Pair]) -> Iterator[tuple[int, Pair, Unknown]]:
    """Equations with one unknown; first those in which an end may turn to where it is needed."""
    for pair in pairs:
        unknowns = _unknowns(struts, pair)
        if len(unknowns) == 1 and len(unknowns[0]) == 1:
            (unknown,) = unknowns[0]
            strut = struts[unknown.strut]
            turns = strut.end_may_turn and strut.outer == pair[1] and unknown.what != "end"
            yield (0 if turns else 1), pair, unknown


def _known(struts: list[Strut], pair: Pair) -> tuple[complex, float]:
    """Sum of the terms in which all is known, and of their magnitudes [N·m]."""
    total, size = 0j, 0.0
    for strut in struts:
        factors = strut.factors(pair)
        if factors and all(value is not None for _, value in factors):
            term = complex(np.prod([value for _, value in factors if value is not None]))
            total, size = total + term, size + abs(term)
    return total, size


def _goal(goals: NDArray[np.complex128], pair: Pair) -> complex:
    return complex(goals[pair[1]]) if pair[0] == 0 else 0j


def _equation(struts: list[Strut], goals: NDArray[np.complex128], pair: Pair) -> Equation:
    total, size = _known(struts, pair)
    goal = _goal(goals, pair)
    return Equation(pair, total, goal, size + abs(goal))


def _solve_one(struts: list[Strut], goals: NDArray[np.complex128], pair: Pair, unknown: Unknown) -> bool:
    """Finds the one unknown of an equation; False for a rate that no real number can be."""
    strut, goal = struts[unknown.strut], _goal(goals, pair)
    total, size = _known(struts, pair)
    factor = complex(np.prod([value for _, value in strut.factors(pair) if value is not None]))
    lacking = goal - total
    if abs(lacking) <= ROUNDING**1.5 * (size + abs(goal)):
        lacking = 0j
    value = lacking / factor
    if unknown.what == "end":
        strut.put("end", value)
        return True
    turns = strut.end_may_turn and strut.outer == pair[1]
    if unknown.what == "rate":
        return _set_rate(strut, value, turns)
    level = strut.inner == 0 and strut.between[0] == 0
    if turns and level and value != 0:
        # The start stays straight above or below its joint, and the end turns instead.
        height = -value / strut.up.conjugate()
        away = _sign(height) * abs(height)
        strut.start = away * strut.up
        strut.end = _straightened((strut.end or 0j) * height / away, 1.0)
        strut.end_may_turn = False
    else:
        strut.put("start", value)
    return True


def _set_rate(strut: Strut, value: complex, turns: bool) -> bool:
    if abs(value.imag) <= STRAIGHT * abs(value):
        strut.rate = value.real
        return True
    strut.rate = _sign(value) * abs(value)
    if turns and strut.end is not None:
        strut.end = _straightened(strut.end * value / strut.rate, 1.0)
        strut.end_may_turn = False
        return True
    return False


def _sign(value: complex) -> float:
    """-1 for what turns back by more than a right angle."""
    return -1.0 if value.real < 0 else 1.0


def _straightened(value: complex, line: complex) -> complex:
    """``value``, on the line exactly where it misses it by rounding."""
    along = value / line
    return along.real * line if abs(along.imag) <= STRAIGHT * abs(along) else value


def _solve_together(struts: list[Strut], goals: NDArray[np.complex128], pairs: list[Pair]) -> bool:
    """Finds what several equations determine that are linear in their unknowns together; False for nothing."""
    linear: list[tuple[Pair, list[Unknown]]] = []
    tangled = False
    for pair in pairs:
        unknowns = _unknowns(struts, pair)
        if any(len(own) > 1 for own in unknowns):
            tangled = True
        elif unknowns:
            linear.append((pair, [own[0] for own in unknowns]))
    columns = sorted({unknown for _, unknowns in linear for unknown in unknowns})
    if not columns:
        return False
    matrix, goal, owners = _rows(struts, goals, linear, columns)
    scales = np.max(np.abs(matrix), axis=0)
    scales[scales == 0] = 1.0
    _, sizes, right = np.linalg.svd(matrix / scales)
    loose = right[int(np.sum(sizes > ROUNDING * sizes[0])) :]
    settled = [bool(np.all(np.abs(loose[:, column]) < ROUNDING)) for column in range(len(owners))]
    firm = {columns[i] for i in range(len(columns)) if all(s for s, o in zip(settled, owners, strict=True) if o == i)}
    if not firm and tangled:
        return False
    firm = firm or set(columns)  # more unknowns than equations: the smallest numbers will do
    solution = _least(matrix / scales, goal, rates=all(c.what == "rate" for c in columns)) / scales
    for i, unknown in enumerate(columns):
        if unknown in firm:
            parts = [float(solution[k]) for k, owner in enumerate(owners) if owner == i]
            struts[unknown.strut].put(unknown.what, complex(*parts))
    return True


def _rows(
    struts: list[Strut],
    goals: NDArray[np.complex128],
    linear: list[tuple[Pair, list[Unknown]]],
    columns: list[Unknown],
) -> tuple[NDArray[np.float64], NDArray[np.float64], list[int]]:
    """Real and imaginary rows; a rate has one real column, a place two. And which unknown each column belongs to."""
    owners = [i for i, unknown in enumerate(columns) for _ in range(1 if unknown.what == "rate" else 2)]
    rows: list[NDArray[np.float64]] = []
    goal: list[float] = []
    for pair, unknowns in linear:
        row = np.zeros(len(owners), complex)
        for unknown in unknowns:
            own = [v for _, v in struts[unknown.strut].factors(pair) if v is not None]
            at = owners.index(columns.index(unknown))
            row[at] = np.prod(own)
            if unknown.what != "rate":
                row[at + 1] = 1j * row[at]
        lacking = _goal(goals, pair) - _known(struts, pair)[0]
        size = float(np.max(np.abs(row)))
        rows += [np.real(row) / size, np.imag(row) / size]
        goal += [lacking.real / size, lacking.imag / size]
    return np.array(rows), np.array(goal), owners


def _least(matrix: NDArray[np.float64], goal: NDArray[np.float64], *, rates: bool) -> NDArray[np.float64]:
    """The smallest solution; rates that are not negative where there are such."""
    if rates:
        import scipy.optimize

        found, missed = scipy.optimize.nnls(matrix, goal, maxiter=1000)
        if missed <= ROUNDING * float(np.max(np.abs(goal), initial=0.0)):
            return np.asarray(found)
    return np.asarray(np.linalg.lstsq(matrix, goal, rcond=None)[0], dtype=np.float64)

"""Forward-mode derivatives: a value and its slope, carried along a formula together."""

from __future__ import annotations

from collections.abc import Callable
from itertools import count
from typing import Any

import attrs
import numpy as np

from springpoise.carriers import Carrier
from springpoise.lookup import Lookup
from springpoise.tape.names import Recorded, run
from springpoise.tape.operations import OPERATIONS, slope_table

__all__ = ["Dual", "derivative_of"]

# Above any nesting that somebody writes by hand.
_LEVELS = count(1000)


def _level_above(dual: Dual) -> int:
    return dual.value.level + 1 if isinstance(dual.value, Dual) else 0


@attrs.frozen(eq=False)
class Dual(Recorded):
    """A value and its slope, on any carrier: floats, arrays, recorded variables, or duals again.

    Parameters
    ----------
    value, slope
        Carriers of the same kind; the slope is the derivative of the value with respect to
        whatever is being varied.
    level
        Tells the slopes of nested derivatives apart. Duals of one level vary the same thing; a
        dual of a lower level counts as a constant. Defaults to one above the value's own.

    Examples
    --------
    >>> Dual(3.0, 1.0) * Dual(3.0, 1.0)
    Dual(value=9.0, slope=6.0)
    """

    value: Carrier
    slope: Carrier
    level: int = attrs.field(default=attrs.Factory(_level_above, takes_self=True), repr=False)

    @property
    def rank(self) -> int:
        """Which of two kinds in one operation says how it is done: the higher."""
        return 1 + self.level

    @property
    def is_positive(self) -> bool:
        """Whether the value is certain to be greater than zero."""
        return bool(getattr(self.value, "is_positive", False))

    def _record(self, name: str, arguments: tuple[Carrier, ...], table: Lookup | None) -> Carrier:
        values: list[Carrier] = []
        slopes: list[Carrier | None] = []
        for argument in arguments:
            mine = isinstance(argument, Dual) and argument.level == self.level
            values.append(argument.value if mine else argument)
            slopes.append(argument.slope if mine else None)
        result = run(name, *values, table=table)
        if table is not None:
            slope = run("multiply", slopes[0], run(name, *values, table=slope_table(table)))
            return Dual(result, slope, self.level)
        rule = OPERATIONS[name].rule
        # A condition in the first place of `where` has no slope even when it is all that varies.
        if rule is None or all(slope is None for slope in slopes):
            return result
        return Dual(result, rule(tuple(slopes), tuple(values), result), self.level)


def derivative_of(function: Callable[[Carrier], Carrier], x: Carrier) -> tuple[Carrier, Carrier]:
    """Value and exact slope of a function of one argument.

    Parameters
    ----------
    function
        Written over the operators and the functions of ``x``'s namespace.
    x
        Float, or array of any shape (the function then acts element by element), or any other
        carrier.

    Returns
    -------
    value, slope
        Of the kind and shape of ``x``; the slope is in units of the value per unit of ``x``.

    Examples
    --------
    >>> derivative_of(lambda x: x**3.0, 2.0)
    (8.0, 12.0)
    """
    if isinstance(x, int):
        x = float(x)
    one: Carrier = 1.0
    if isinstance(x, np.ndarray):
        one = np.ones(x.shape)
    elif not isinstance(x, float | Recorded):
        one = x * 0.0 + 1.0
    level = next(_LEVELS)
    # Both branches of a `where` are computed, also outside the domain of the one that is not taken.
    with np.errstate(all="ignore"):
        result: Any = function(Dual(x, one, level))
    if isinstance(result, Dual) and result.level == level:
        return result.value, result.slope
    # The function is constant around x; so the slope is zero, in the shape of x.
    zero = one - one if not isinstance(x, Recorded) else 0.0
    return result + zero, zero

"""Simplifications while recording.

Each rule gives a node of the same value, up to rounding of about 1e-16, for finite inputs. What
infinity and NaN would have done is not kept: inputs that are not finite are dealt with apart
(``nonfinite.py``), and a removable singularity such as ``x * (n / x)`` takes its limit.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np

from springpoise.lookup import Lookup
from springpoise.tape.expanding import multiplied_out
from springpoise.tape.operations import OPERATIONS
from springpoise.tape.signs import NONNEGATIVE, POSITIVE, sign_of

if TYPE_CHECKING:
    from springpoise.tape.variables import Tape

__all__ = ["simplified"]

Fold: TypeAlias = "Callable[..., int | None]"

# How far into a product a common factor is looked for.
DEPTH = 6

# Merged constants stay this far from overflow and from losing digits to underflow.
LEAST, MOST = 1e-290, 1e290

INVOLUTIONS = {"negative", "logical_not"}
EVEN = {"abs", "cos", "cosh"}
ODD = {"sign", "sin", "tan", "asin", "atan", "sinh", "tanh", "asinh"}
SWAPPED = {"greater": "less", "greater_equal": "less_equal"}
OF_ITSELF = {"less": False, "less_equal": True, "equal": True, "not_equal": False}


def simplified(tape: Tape, name: str, arguments: tuple[int, ...], table: Lookup | None) -> int | None:
    """Index of a simpler node for the operation, or None if it has to be recorded."""
    nodes = [tape.nodes[argument] for argument in arguments]
    if all(node[0] == "constant" for node in nodes):
        return tape.constant(_evaluated(name, [node[2] for node in nodes], table))
    rule = _RULES.get(name)
    return None if rule is None else rule(tape, *arguments)


def _evaluated(name: str, values: list[Any], table: Lookup | None) -> Any:
    if table is not None:
        return table(values[0])
    row = OPERATIONS[name]
    if not any(isinstance(value, np.ndarray) for value in values):
        return row.on_floats(*values)
    with np.errstate(all="ignore"):
        return np.where(*values) if row.ufunc is None else row.ufunc(*values)


# ---------------------------------------------------------------------------------------- reading


def _scalar(tape: Tape, index: int) -> Any:
    """The value of a scalar constant, else None."""
    name, _, value = tape.nodes[index]
    return value if name == "constant" and not isinstance(value, np.ndarray) else None


def _is_constant(tape: Tape, index: int) -> bool:
    return tape.nodes[index][0] == "constant"


def _inside(tape: Tape, index: int, name: str) -> tuple[int, ...] | None:
    """The arguments of a node if it is the operation ``name``, else None."""
    found, arguments, _ = tape.nodes[index]
    return arguments if found == name else None


def _scaled(tape: Tape, index: int) -> tuple[int, int] | None:
    """(constant, rest) of a product whose first factor is a constant, else None."""
    parts = _inside(tape, index, "multiply")
    return (parts[0], parts[1]) if parts is not None and _is_constant(tape, parts[0]) else None


def _merged(tape: Tape, name: str, left: int, right: int) -> int | None:
    """Product or quotient of two constants, unless it comes near the ends of the range."""
    result = _evaluated(name, [tape.nodes[left][2], tape.nodes[right][2]], None)
    size = np.abs(result)
    return tape.constant(result) if np.all((size > LEAST) & (size < MOST)) else None


# ---------------------------------------------------------------------------------- cancellation


def _without(tape: Tape, index: int, factor: int, depth: int = DEPTH) -> int | None:
    """The node divided by ``factor`` if that is one of its factors, else None."""
    if index == factor:
        return tape.constant(1.0)
    name, arguments, _ = tape.nodes[index]
    if depth == 0 or name not in {"multiply", "divide", "negative"}:
        return None
    rest = _without(tape, arguments[0], factor, depth - 1)
    if rest is not None:
        return tape.operation(name, (rest, *arguments[1:]))
    if name != "multiply":
        return None
    rest = _without(tape, arguments[1], factor, depth - 1)
    return None if rest is None else tape.operation(name, (arguments[0], rest))


def _cancelled(tape: Tape, product: int, other: int, depth: int = DEPTH) -> int | None:
    """``product * other`` if ``product`` contains a quotient by a factor of ``other``, else None.

    This is what takes the square root out of an ideal spring: its force is proportional to the
    length by which the direction is divided.
    """
    name, arguments, _ = tape.nodes[product]
    if depth == 0:
        return None
    if name == "divide":
        rest = _without(tape, other, arguments[1])
        return None if rest is None else tape.operation("multiply", (arguments[0], rest))
    if name not in {"multiply", "negative"}:
        return None
    for place, argument in enumerate(arguments):
        rest = _cancelled(tape, argument, other, depth - 1)
        if rest is not None:
            return tape.operation(name, (*arguments[:place], rest, *arguments[place + 1 :]))
    return None


# ------------------------------------------------------------------------------------------ rules


def _odd_or_even(name: str) -> Fold:
    def rule(tape: Tape, x: int) -> int | None:
        inner = _inside(tape, x, "negative")
        if inner is not None and name in EVEN:
            return tape.operation(name, inner)
        if inner is not None:
            return tape.operation("negative", (tape.operation(name, inner),))
        return x if name == "abs" and tape.nodes[x][0] in {"abs", "sqrt", "hypot"} else None

    return rule


def _involution(name: str) -> Fold:
    def rule(tape: Tape, x: int) -> int | None:
        inner = _inside(tape, x, name)
        if inner is not None:
            return inner[0]
        if name == "negative":
            difference = _inside(tape, x, "subtract")
            if difference is not None:
                return tape.operation("subtract", difference[::-1])
            scaled = _scaled(tape, x)
            if scaled is not None:
                return tape.operation("multiply", (tape.operation("negative", scaled[:1]), scaled[1]))
        return None

    return rule


def _sum(name: str) -> Fold:
    opposite = "subtract" if name == "add" else "add"

    def rule(tape: Tape, x: int, y: int) -> int | None:
        if _scalar(tape, x) == 0.0:
            return y if name == "add" else tape.operation("negative", (y,))
        if _scalar(tape, y) == 0.0:
            return x
        if x == y:
            return tape.operation("multiply", (tape.constant(2.0), x)) if name == "add" else tape.constant(0.0)
        below = _scalar(tape, y)
        if name == "subtract" and below is not None and below < 0.0:
            return tape.operation("add", (x, tape.constant(-below)))
        inner = _inside(tape, y, "negative")
        if inner is not None:
            return tape.operation(opposite, (x, inner[0]))
        inner = _inside(tape, x, "negative")
        if inner is not None and name == "add":
            return tape.operation("subtract", (y, inner[0]))
        inner = _inside(tape, y, "add")
        if name == "add" and inner is not None and _scalar(tape, x) is not None and _scalar(tape, inner[0]) is not None:
            return tape.operation("add", (tape.operation("add", (x, inner[0])), inner[1]))
        shorter = multiplied_out(tape, name, x, y)
        if shorter is not None:
            return shorter
        left, right = _scaled(tape, x), _scaled(tape, y)
        # Doubling is exact, so 2*a + 2*b may become 2*(a + b): derivatives of squares need it.
        if left is not None and right is not None and left[0] == right[0] and _scalar(tape, left[0]) == 2.0:
            return tape.operation("multiply", (left[0], tape.operation(name, (left[1], right[1]))))
        return None

    return rule


def _times_constant(tape: Tape, x: int, y: int) -> int | None:
    """``x * y`` for a constant ``x``."""
    value = _scalar(tape, x)
    if value == 0.0:
        return x
    if value == 1.0:
        return y
    if value == -1.0:
        return tape.operation("negative", (y,))
    name, arguments, _ = tape.nodes[y]
    if name == "negative":
        return tape.operation("multiply", (tape.operation("negative", (x,)), arguments[0]))
    if name in {"multiply", "divide"} and _is_constant(tape, arguments[0]):
        merged = _merged(tape, "multiply", x, arguments[0])
        return None if merged is None else tape.operation(name, (merged, arguments[1]))
    if name == "divide" and _is_constant(tape, arguments[1]):
        merged = _merged(tape, "divide", x, arguments[1])
        return None if merged is None else tape.operation("multiply", (merged, arguments[0]))
    return None


def _multiply(tape: Tape, x: int, y: int) -> int | None:
    if _is_constant(tape, x):
        return _times_constant(tape, x, y)
    left, right = _inside(tape, x, "negative"), _inside(tape, y, "negative")
    if left is not None or right is not None:
        product = tape.operation("multiply", (left[0] if left else x, right[0] if right else y))
        return product if left and right else tape.operation("negative", (product,))
    cancelled = _cancelled(tape, x, y)
    return _cancelled(tape, y, x) if cancelled is None else cancelled


def _divide(tape: Tape, x: int, y: int) -> int | None:
    value = _scalar(tape, y)
    if value == 1.0:
        return x
    if value == -1.0:
        return tape.operation("negative", (x,))
    if _scalar(tape, x) == 0.0:
        return x
    left, right = _inside(tape, x, "negative"), _inside(tape, y, "negative")
    if left is not None or right is not None:
        quotient = tape.operation("divide", (left[0] if left else x, right[0] if right else y))
        return quotient if left and right else tape.operation("negative", (quotient,))
    if not _is_constant(tape, y):
        return _without(tape, x, y)
    if value is not None and LEAST < abs(value) < MOST and np.frexp(value)[0] in {0.5, -0.5}:
        # Only for powers of two is the reciprocal exact; for others it would save next to nothing.
        return tape.operation("multiply", (tape.constant(1.0 / value), x))
    scaled = _scaled(tape, x)
    merged = None if scaled is None else _merged(tape, "divide", scaled[0], y)
    return None if scaled is None or merged is None else tape.operation("multiply", (merged, scaled[1]))


def _pow(tape: Tape, x: int, y: int) -> int | None:
    exponent = _scalar(tape, y)
    if exponent == 0.0:
        return tape.constant(1.0)
    if exponent == 1.0:
        return x
    if exponent == 0.5:
        return tape.operation("sqrt", (x,))
    if exponent in {2.0, 3.0, 4.0}:
        square = tape.operation("multiply", (x, x))
        other = {2.0: None, 3.0: x, 4.0: square}[exponent]
        return square if other is None else tape.operation("multiply", (square, other))
    if exponent in {-1.0, -2.0}:
        return tape.operation("divide", (tape.constant(1.0), tape.operation("pow", (x, tape.constant(-exponent)))))
    return None


def _hypot(tape: Tape, x: int, y: int) -> int | None:
    left, right = _inside(tape, x, "negative"), _inside(tape, y, "negative")
    if left is None and right is None:
        return None
    return tape.operation("hypot", (left[0] if left else x, right[0] if right else y))


def _same(tape: Tape, x: int, y: int) -> int | None:
    return x if x == y else None


def _maximum(tape: Tape, x: int, y: int) -> int | None:
    """A length, and the least value that its formula guards it with."""
    for value, floor in ((x, y), (y, x)):
        if _is_at_least(tape, value, _scalar(tape, floor)):
            return value
    return _same(tape, x, y)


def _is_at_least(tape: Tape, index: int, floor: float | None) -> bool:
    """Whether a value is certain not to lie below a constant."""
    if floor is None:
        return False
    if floor <= 0.0 and sign_of(tape, index) >= NONNEGATIVE:
        return True
    name, arguments, _ = tape.nodes[index]
    least = _scalar(tape, arguments[0]) if name == "add" else None
    return least is not None and least >= floor and sign_of(tape, arguments[1]) >= NONNEGATIVE


def _comparison(name: str) -> Fold:
    def rule(tape: Tape, x: int, y: int) -> int | None:
        if name in SWAPPED:
            return tape.operation(SWAPPED[name], (y, x))
        if name == "less" and _scalar(tape, x) == 0.0 and sign_of(tape, y) == POSITIVE:
            return tape.constant(True)
        return tape.constant(OF_ITSELF[name]) if x == y else None

    return rule


def _logical(neutral: bool) -> Fold:
    def rule(tape: Tape, x: int, y: int) -> int | None:
        value = _scalar(tape, x)
        if value is not None:
            return y if value is neutral else x
        return _same(tape, x, y)

    return rule


def _where(tape: Tape, condition: int, x: int, y: int) -> int | None:
    value = _scalar(tape, condition)
    if value is not None:
        return x if value else y
    if x == y:
        return x
    inner = _inside(tape, condition, "logical_not")
    return None if inner is None else tape.operation("where", (inner[0], y, x))


_RULES: dict[str, Fold] = {
    **{name: _involution(name) for name in INVOLUTIONS},
    **{name: _odd_or_even(name) for name in EVEN | ODD},
    **{name: _comparison(name) for name in (*SWAPPED, *OF_ITSELF)},
    "add": _sum("add"),
    "subtract": _sum("subtract"),
    "multiply": _multiply,
    "divide": _divide,
    "pow": _pow,
    "hypot": _hypot,
    "maximum": _maximum,
    "minimum": _same,
    "logical_and": _logical(True),
    "logical_or": _logical(False),
    "where": _where,
}

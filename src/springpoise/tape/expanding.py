"""Sums of products that cancel or merge once they are multiplied out.

The lever of a force is ``dx·Jx + dy·Jy``, in which the products of the moving coordinates cancel
and something linear in them remains. Multiplied out here, it costs half and rounds less.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, TypeAlias

import numpy as np

if TYPE_CHECKING:
    from springpoise.tape.variables import Tape

__all__ = ["multiplied_out"]

Polynomial: TypeAlias = dict[tuple[int, ...], float]
"""Coefficients by the nodes that are multiplied, in order; the empty product is the constant."""

WELL_AWAY = 1.01
"""A constant over the greatest that is taken from it [1]: at most a hundred times the rounding is let in."""

MOST_TERMS = 2
"""A sum that keeps more linear terms than this is left as it was written."""


def multiplied_out(tape: Tape, name: str, x: int, y: int) -> int | None:
    """A shorter node for ``x + y`` or ``x - y``, or None where multiplying out saves nothing."""
    left, right = _polynomial(tape, x), _polynomial(tape, y)
    shared = left.keys() & right.keys() - {()}
    total = dict(left)
    for product, coefficient in right.items():
        total[product] = total.get(product, 0.0) + (coefficient if name == "add" else -coefficient)
    circle = _circle(tape, total)
    if not (shared or circle):
        return None
    total = {product: coefficient for product, coefficient in total.items() if coefficient != 0.0}
    linear = [product for product in total if product]
    if any(len(product) > 1 for product in linear) or len(linear) > MOST_TERMS:
        return None
    result = tape.constant(total.get((), 0.0))
    for product in sorted(linear):
        term = tape.operation("multiply", (tape.constant(total[product]), product[0]))
        result = tape.operation("add", (result, term))
    return result


def _circle(tape: Tape, total: Polynomial) -> bool:
    """Replaces equal squares of a sine and a cosine of one angle by their sum, one, where no digits are lost.

    That is so where what remains stays well away from zero: the square of a length that never
    gets near to nothing, by the law of cosines.
    """
    squares = {product[0]: c for product, c in total.items() if len(product) == 2 and product[0] == product[1]}
    if len(squares) != 2 or any(len(product) > 1 and product[0] != product[1] for product in total):
        return False
    (first, a), (last, b) = squares.items()
    names = {tape.nodes[first][0], tape.nodes[last][0]}
    if names != {"sin", "cos"} or tape.nodes[first][1] != tape.nodes[last][1] or a != b:
        return False
    linear = [product for product in total if len(product) == 1]
    if any(tape.nodes[product[0]][0] not in names for product in linear):
        return False
    constant = a + total.get((), 0.0)
    if not constant > WELL_AWAY * sum(abs(total[product]) for product in linear):
        return False
    del total[first, first], total[last, last]
    total[()] = constant
    return True


def _polynomial(tape: Tape, index: int) -> Polynomial:
    """A product of two linear factors multiplied out; anything else as a linear term."""
    name, arguments, _ = tape.nodes[index]
    if name == "negative":
        return _times(_polynomial(tape, arguments[0]), {(): -1.0})
    if name == "multiply":
        first, last = (_linear(tape, argument) for argument in arguments)
        if not (first.keys() <= {()}):
            return _times(first, last)
        return _times(first, _polynomial(tape, arguments[1]))
    return _linear(tape, index)


def _linear(tape: Tape, index: int, depth: int = 3) -> Polynomial:
    """``coefficient · node + constant`` as far as a node is written so; else the node itself."""
    name, arguments, value = tape.nodes[index]
    if name == "constant":
        return {(index,): 1.0} if isinstance(value, bool | np.ndarray) else {(): float(value)}
    if depth and name == "negative":
        return _times(_linear(tape, arguments[0], depth - 1), {(): -1.0})
    if depth and name == "multiply" and _number(tape, arguments[0]) is not None:
        return _times(_linear(tape, arguments[1], depth - 1), {(): _number(tape, arguments[0])})
    if depth and name in {"add", "subtract"} and any(_number(tape, a) is not None for a in arguments):
        total = dict(_linear(tape, arguments[0], depth - 1))
        sign = 1.0 if name == "add" else -1.0
        for product, coefficient in _linear(tape, arguments[1], depth - 1).items():
            total[product] = total.get(product, 0.0) + sign * coefficient
        return total
    return {(index,): 1.0}


def _times(first: Polynomial, last: Polynomial) -> Polynomial:
    total: Polynomial = {}
    for p, a in first.items():
        for r, b in last.items():
            product = tuple(sorted(p + r))
            total[product] = total.get(product, 0.0) + a * b
    return total


def _number(tape: Tape, index: int) -> Any:
    name, _, value = tape.nodes[index]
    return value if name == "constant" and not isinstance(value, bool | np.ndarray) else None

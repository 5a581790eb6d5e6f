"""Which recorded values are certain to be positive, from how they are put together."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from springpoise.tape.variables import Tape

__all__ = ["ANY", "NONNEGATIVE", "POSITIVE", "sign_of"]

ANY, NONNEGATIVE, POSITIVE = 0, 1, 2


def sign_of(tape: Tape, index: int) -> int:
    """POSITIVE, NONNEGATIVE or ANY (nothing known), for finite values of the tape's inputs.

    A length ``sqrt(dx*dx + dy*dy + tiny)`` is positive by this, so that quotients by it need no
    care at zero.
    """
    known = tape.signs
    while len(known) <= index:
        known.append(_judge(tape, len(known)))
    return known[index]


def _judge(tape: Tape, index: int) -> int:
    name, arguments, value = tape.nodes[index]
    if name == "constant":
        if value is True or value is False:
            return ANY
        return POSITIVE if np.all(value > 0.0) else NONNEGATIVE if np.all(value >= 0.0) else ANY
    signs = [tape.signs[argument] for argument in arguments]
    result = ANY
    if name in {"exp", "cosh"}:
        # exp underflows to zero, so it does not count as positive.
        result = NONNEGATIVE if name == "exp" else POSITIVE
    elif name in {"abs", "hypot"}:
        result = max(NONNEGATIVE, min(signs))
    elif name == "multiply":
        # A product of positive factors may underflow.
        result = NONNEGATIVE if arguments[0] == arguments[1] else min(*signs, NONNEGATIVE)
    elif name == "divide":
        result = min(*signs, NONNEGATIVE)
    elif name in {"sqrt", "sinh", "tanh", "atan", "asinh"}:
        result = signs[0]
    elif name == "add":
        result = max(signs) if min(signs) >= NONNEGATIVE else ANY
        if result == ANY and _outweighs(tape, arguments):
            result = POSITIVE
    elif name == "maximum":
        result = max(signs)
    elif name == "minimum":
        result = min(signs)
    elif name == "where":
        result = min(signs[1:])
    return result


def _outweighs(tape: Tape, arguments: tuple[int, ...]) -> bool:
    """Whether a sum is a number and smaller multiples of sines and cosines."""
    least = 0.0
    todo = list(arguments)
    while todo:
        name, inner, value = tape.nodes[todo.pop()]
        if name == "constant" and isinstance(value, float):
            least += value
        elif name == "add":
            todo += inner
        elif name in {"sin", "cos"}:
            least -= 1.0
        elif (
            name == "multiply"
            and tape.nodes[inner[1]][0] in {"sin", "cos"}
            and isinstance(tape.nodes[inner[0]][2], float)
        ):
            least -= abs(tape.nodes[inner[0]][2])
        else:
            return False
    return least > 0.0

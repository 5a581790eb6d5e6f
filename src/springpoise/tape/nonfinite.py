"""An input that is not finite must not come out as a finite number."""

from __future__ import annotations

from typing import TYPE_CHECKING

import attrs

from springpoise.tape.steps import Step

if TYPE_CHECKING:
    from springpoise.tape.program import Program

__all__ = ["guarded"]

# Operations that give NaN as soon as one argument is NaN. A `where`, a `maximum`, a comparison may
# drop it; `pow` and `hypot` know cases in which it does not matter.
SPREADING = frozenset(
    [
        "add",
        "subtract",
        "multiply",
        "divide",
        "negative",
        "abs",
        "sqrt",
        "exp",
        "expm1",
        "log",
        "log1p",
        "sin",
        "cos",
        "tan",
        "asin",
        "acos",
        "atan",
        "sinh",
        "cosh",
        "tanh",
        "asinh",
        "atan2",
        "look_up",
    ]
)


def guarded(program: Program) -> Program:
    """The program with zero added to its outputs where needed, a zero that is NaN unless all inputs are finite.

    A formula alone does not promise that: ``where`` and ``maximum`` can drop a NaN, and folding
    may have removed the last use of an input. One sum and one difference serve all outputs
    (``x - x`` is NaN for infinity and NaN). A sine or cosine of an input serves as well as the
    input itself, and is a float already. Were the sum to overflow, around 1e308, the result is
    NaN as well, which is as good as any. An output into which a sine or cosine of each input
    enters by arithmetic alone is NaN anyway and gets nothing added.
    """
    if not program.inputs:
        return program
    known = len(program.inputs) + len(program.constants)
    steps = list(program.steps)

    def add(name: str, left: int, right: int) -> int:
        steps.append(Step(name, (left, right)))
        return known + len(steps) - 1

    witnesses = list(range(len(program.inputs)))
    for number, step in enumerate(program.steps):
        if step.name in {"sin", "cos"} and step.arguments[0] < len(program.inputs):
            witnesses[step.arguments[0]] = known + number
    safe = _reached_by_all(program, witnesses)
    if all(safe[output] for output in program.outputs):
        return program
    total = witnesses[0]
    for slot in witnesses[1:]:
        total = add("add", total, slot)
    zero = add("subtract", total, total)
    outputs = tuple(output if safe[output] else add("add", output, zero) for output in program.outputs)
    return attrs.evolve(program, steps=tuple(steps), outputs=outputs)


def _reached_by_all(program: Program, witnesses: list[int]) -> list[bool]:
    """For each slot, whether NaN in a sine or cosine of any input makes it NaN for certain."""
    inputs = len(program.inputs)
    known = inputs + len(program.constants)
    reached: list[frozenset[int]] = [frozenset()] * known
    of = {slot: number for number, slot in enumerate(witnesses) if slot >= inputs}
    # Both functions of an input are as good, whichever was chosen as its witness.
    for number, step in enumerate(program.steps):
        if step.name in {"sin", "cos"} and step.arguments[0] < inputs:
            of[known + number] = step.arguments[0]
    for number, step in enumerate(program.steps):
        arguments = [reached[slot] for slot in step.arguments]
        if known + number in of:
            reached.append(frozenset({of[known + number]}))
        elif step.name == "where":
            reached.append(arguments[1] & arguments[2])
        elif step.name in SPREADING:
            reached.append(frozenset().union(*arguments))
        else:
            reached.append(frozenset())
    return [len(found) == inputs for found in reached]

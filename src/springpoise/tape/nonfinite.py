"""An input that is not finite must not come out as a finite number."""

from __future__ import annotations

from typing import TYPE_CHECKING

import attrs

from springpoise.tape.steps import Step

if TYPE_CHECKING:
    from springpoise.tape.program import Program

__all__ = ["guarded"]


def guarded(program: Program) -> Program:
    """The program with zero added to each output, a zero that is NaN unless all inputs are finite.

    A formula alone does not promise that: ``where`` and ``maximum`` can drop a NaN, and folding
    may have removed the last use of an input. One sum and one difference serve all outputs
    (``x - x`` is NaN for infinity and NaN). Were the sum to overflow, around 1e308, the result is
    NaN as well, which is as good as any.
    """
    first = len(program.inputs) + len(program.constants) + len(program.steps)
    steps = list(program.steps)

    def add(name: str, left: int, right: int) -> int:
        steps.append(Step(name, (left, right)))
        return first + len(steps) - len(program.steps) - 1

    if not program.inputs:
        return program
    total = 0
    for slot in range(1, len(program.inputs)):
        total = add("add", total, slot)
    zero = add("subtract", total, total)
    outputs = tuple(add("add", output, zero) for output in program.outputs)
    return attrs.evolve(program, steps=tuple(steps), outputs=outputs)

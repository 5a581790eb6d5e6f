"""Print a program as NumPy calls on blocks of elements.

A plain NumPy expression sends every intermediate result of a million elements to main memory and
back. Printed for blocks, the intermediate results are a few buffers that stay in the cache.

What depends only on inputs or constants that are smaller than the result (builds of shape
(1000, 1) against poses of shape (121,)) is computed first and once, at its own shape: the
*shared* part. The printed text has one function for that part and one for a block.
"""

from __future__ import annotations

import keyword
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

import attrs
import numpy as np

from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.tape.blocks import Compiled, run_blocks
from springpoise.tape.compiled import compiled
from springpoise.tape.nonfinite import guarded
from springpoise.tape.operations import OPERATIONS

if TYPE_CHECKING:
    from springpoise.tape.program import Program

__all__ = ["numpy_function", "numpy_source"]


def numpy_function(program: Program, name: str) -> Callable[..., Any]:
    """See :meth:`Program.numpy_function`."""
    plan = _Plan.of(program, name)
    # What has to be shared depends on the shapes of a call, so there may be several versions.
    versions: dict[tuple[bool, ...], Compiled] = {}

    def version(blocked: tuple[bool, ...]) -> Compiled:
        found = versions.get(blocked)
        if found is None:
            found = versions[blocked] = _Printer(plan, blocked).compiled()
        return found

    count, scalar = len(program.inputs), program.scalar
    arrays = [constant for constant in plan.program.constants if isinstance(constant, np.ndarray)]

    def function(*inputs: Any) -> Any:
        if len(inputs) != count:
            raise InputError(f"{name} must get {count} inputs {program.inputs}, got {len(inputs)}")
        sources = [np.asarray(x, dtype=np.float64) for x in inputs] + arrays
        results = run_blocks(sources, plan.masks, version)
        return results[0] if scalar else tuple(results)

    function.__name__ = function.__qualname__ = name
    return function


def numpy_source(program: Program, name: str) -> str:
    """See :meth:`Program.numpy_source`."""
    plan = _Plan.of(program, name)
    inputs = (1 << len(program.inputs)) - 1
    return _Printer(plan, tuple(bool(mask & inputs) for mask in plan.masks)).text


@attrs.frozen
class _Plan:
    """What the printed text has in common whatever the shapes are.

    Sources are the inputs, then the array constants. A mask has a bit for each source that a slot
    depends on; ``masks`` lists the different ones.
    """

    program: Program
    name: str
    slot_masks: list[int]
    source_slots: list[int]
    masks: list[int]

    @classmethod
    def of(cls, program: Program, name: str) -> _Plan:
        if not name.isidentifier() or keyword.iskeyword(name):
            raise InputError(f"numpy_source name must be an identifier, got {name!r}")
        program = guarded(program)
        first = len(program.inputs)
        sources = list(range(first))
        sources += [first + i for i, value in enumerate(program.constants) if isinstance(value, np.ndarray)]
        slot_masks = [0] * (first + len(program.constants))
        for bit, slot in enumerate(sources):
            slot_masks[slot] = 1 << bit
        for step in program.steps:
            mask = 0
            for slot in step.arguments:
                mask |= slot_masks[slot]
            slot_masks.append(mask)
        return cls(program, name, slot_masks, sources, sorted(set(slot_masks) - {0}))


class _Printer:
    """One version of the text: with the masks told apart into blocked and shared."""

    def __init__(self, plan: _Plan, blocked: tuple[bool, ...]) -> None:
        self.plan = plan
        self.program = plan.program
        by_mask = {0: False} | dict(zip(plan.masks, blocked, strict=True))
        self.blocked = [by_mask[mask] for mask in plan.slot_masks]
        self.first_step = len(self.program.inputs) + len(self.program.constants)
        self.names: dict[str, Any] = {"copyto": np.copyto, "where": np.where}
        self.tables: dict[Lookup, str] = {}
        self.texts: dict[int, str] = {}
        self.parameters: list[int] = []
        self.registers = {"r": 0, "m": 0}
        self._name_leaves()
        shared = self._shared_lines()
        block = self._block_lines()
        scratch = [f"{kind}{i}" for kind, count in self.registers.items() for i in range(count)]
        outputs = [f"out{i}" for i in range(len(self.program.outputs))]
        sources = [self.texts[slot] for slot in plan.source_slots]
        passed = [self.texts[slot] for slot in self.parameters]
        lines = [
            f"def {plan.name}_shared({', '.join(sources)}):",
            *(f"    {line}" for line in shared),
            f"    return [{', '.join(passed)}]",
            "",
            "",
            f"def {plan.name}({', '.join([*passed, *outputs, *scratch])}):",
            *(f"    {line}" for line in block or ["pass"]),
        ]
        self.text = "\n".join(lines) + "\n"

    def compiled(self) -> Compiled:
        names = compiled(self.text, self.plan.name, self.names)
        return Compiled(
            names[f"{self.plan.name}_shared"],
            names[self.plan.name],
            len(self.program.outputs),
            self.registers["r"],
            self.registers["m"],
        )

    def _name_leaves(self) -> None:
        for slot, constant in enumerate(self.program.constants, len(self.program.inputs)):
            if not isinstance(constant, np.ndarray):
                # An array without axes: NumPy converts a Python float anew at each call.
                self.texts[slot] = f"c{slot}"
                self.names[f"c{slot}"] = np.array(constant)
        for slot in self.plan.source_slots:
            self.texts[slot] = f"x{slot}" if slot < len(self.program.inputs) else f"a{slot}"

    def _call(self, slot: int) -> tuple[str, bool]:
        """The call that computes a step, and whether it takes a place to write to."""
        step = self.program.steps[slot - self.first_step]
        arguments = ", ".join(self.texts[argument] for argument in step.arguments)
        if step.table is not None:
            name = self.tables.setdefault(step.table, f"table_{len(self.tables)}")
            self.names[name] = step.table
            return f"{name}({arguments})", False
        ufunc = OPERATIONS[step.name].ufunc
        if ufunc is None:
            return f"{step.name}({arguments})", False
        self.names[step.name] = ufunc
        return f"{step.name}({arguments})", True

    def _shared_lines(self) -> list[str]:
        lines = []
        for slot in range(self.first_step, self.first_step + len(self.program.steps)):
            if not self.blocked[slot]:
                call, _ = self._call(slot)
                self.texts[slot] = f"s{slot}"
                lines.append(f"s{slot} = {call}")
        return lines

    def _block_lines(self) -> list[str]:
        program = self.program
        steps = [(slot, step) for slot, step in enumerate(program.steps, self.first_step) if self.blocked[slot]]
        wanted = {argument for _, step in steps for argument in step.arguments} | set(program.outputs)
        # Sources and shared results that the block reads; constants without axes are globals.
        self.parameters = [
            slot
            for slot, mask in enumerate(self.plan.slot_masks)
            if slot in wanted and mask and (slot < self.first_step or not self.blocked[slot])
        ]
        last = {argument: slot for slot, step in steps for argument in step.arguments}
        output_of: dict[int, int] = {}
        for number, slot in enumerate(program.outputs):
            output_of.setdefault(slot, number)
        free: dict[str, list[str]] = {"r": [], "m": []}
        lines = []
        for slot, step in steps:
            call, in_place = self._call(slot)
            # Registers that are read here for the last time are free for the result: all
            # operations go element by element, so they may write over what they read.
            for argument in dict.fromkeys(step.arguments):
                text = self.texts[argument]
                if last[argument] == slot and text[0] in free:
                    free[text[0]].append(text)
            if slot in output_of:
                place = f"out{output_of[slot]}"
            else:
                place = self._register("m" if OPERATIONS[step.name].makes_condition else "r", free)
            self.texts[slot] = place
            lines.append(f"{call[:-1]}, out={place})" if in_place else f"copyto({place}, {call})")
        for number, slot in enumerate(program.outputs):
            if self.texts[slot] != f"out{number}":
                lines.append(f"copyto(out{number}, {self.texts[slot]})")
        return lines

    def _register(self, kind: str, free: dict[str, list[str]]) -> str:
        if free[kind]:
            return free[kind].pop()
        self.registers[kind] += 1
        return f"{kind}{self.registers[kind] - 1}"

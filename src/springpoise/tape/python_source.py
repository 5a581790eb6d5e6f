"""Print a program as a plain Python function of floats."""

from __future__ import annotations

import keyword
import math
import re
from collections import Counter
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.tape.nonfinite import guarded
from springpoise.tape.operations import ATOM, NEGATIVE, OPERATIONS

if TYPE_CHECKING:
    from springpoise.tape.program import Program

__all__ = ["python_globals", "python_source"]

# An expression that has grown beyond either is given a name. Nested parentheses slow the compiler
# down and end at its limit of 200; the lines stay readable.
MOST_NESTED = 25
MOST_CHARACTERS = 250

_OWN_NAMES = re.compile(r"v\d+|table_\d+")
_MATH_NAMES = frozenset(name for row in OPERATIONS.values() for name in row.needs)
# Steps that are a call of the math module, which takes any number and gives a float.
_MATH_FUNCTIONS = frozenset(
    name for name, row in OPERATIONS.items() if row.needs and row.python.startswith(f"{row.needs[0]}(")
)
_RESERVED = _MATH_NAMES | {"abs", "bisect_right", "float", "inf", "nan"}


def python_source(program: Program, name: str, stand_alone: bool) -> str:
    """Source of the function ``name``; see :meth:`Program.python_source`."""
    if not name.isidentifier() or keyword.iskeyword(name) or name in _RESERVED or _OWN_NAMES.fullmatch(name):
        raise InputError(f"python_source name must be an identifier that is free, got {name!r}")
    for constant in program.constants:
        if isinstance(constant, np.ndarray):
            raise InputError(
                f"Program.constants must be numbers for a Python function of floats, got an array of shape "
                f"{constant.shape}; use numpy_function"
            )
    parameters = [f"{x}_" if x in {*_RESERVED, name} or _OWN_NAMES.fullmatch(x) else x for x in program.inputs]
    finished = guarded(program)
    lines, results = _body(finished, parameters)
    outputs, failed = results, ["nan"] * len(results)
    text = [] if not stand_alone else _preamble(program)
    text.append(f"def {name}({', '.join(parameters)}):")
    # float() also makes NumPy scalars raise where the reals leave something undefined.
    bare = _used_as_they_are(finished)
    text += [f"    {parameter} = float({parameter})" for slot, parameter in enumerate(parameters) if slot in bare]
    text.append("    try:")
    text += [f"        {line}" for line in lines]
    text.append(f"        return {_listed(outputs, program.scalar)}")
    text.append("    except (ArithmeticError, ValueError):")
    text.append(f"        return {_listed(failed, program.scalar)}")
    return "\n".join(text) + "\n"


def python_globals(program: Program) -> dict[str, Any]:
    """What the printed function finds as globals when it is not printed to stand alone."""
    names: dict[str, Any] = {name: getattr(math, name) for name in _MATH_NAMES}
    names |= {"nan": math.nan, "inf": math.inf}
    for number, table in enumerate(_tables(program)):
        # The float branch of the look-up: the inputs are floats here.
        names[f"table_{number}"] = table._at
    return names


def _used_as_they_are(program: Program) -> set[int]:
    """Inputs that arithmetic meets directly; a function of the math module makes a float of any other by itself."""
    used = set(program.outputs)
    for step in program.steps:
        if step.name not in _MATH_FUNCTIONS:
            used.update(step.arguments)
    return used


def _listed(results: list[str], scalar: bool) -> str:
    return results[0] if scalar else f"({', '.join(results)}{',' if len(results) == 1 else ''})"


def _tables(program: Program) -> list[Lookup]:
    return list(dict.fromkeys(step.table for step in program.steps if step.table is not None))


def _literal(value: Any) -> tuple[str, int]:
    text = repr(value)
    return text, NEGATIVE if text.startswith("-") else ATOM


def _body(program: Program, parameters: list[str]) -> tuple[list[str], list[str]]:
    """Statements, and one expression for each output."""
    tables = {table: number for number, table in enumerate(_tables(program))}
    uses = Counter(slot for step in program.steps for slot in step.arguments)
    uses.update(program.outputs)
    repeated = {
        slot
        for step in program.steps
        for slot, place in zip(step.arguments, OPERATIONS[step.name].places, strict=True)
        if place == ATOM
    }
    texts: list[tuple[str, int]] = [(parameter, ATOM) for parameter in parameters]
    texts += [_literal(constant) for constant in program.constants]
    depths = [0] * len(texts)
    lines: list[str] = []
    for step in program.steps:
        row = OPERATIONS[step.name]
        arguments = []
        for argument, place in zip(step.arguments, row.places, strict=True):
            text, binds = texts[argument]
            # A place that asks for ATOM takes any constant: its template has it next to a comparison.
            arguments.append(text if binds >= min(place, NEGATIVE) else f"({text})")
        number = None if step.table is None else tables[step.table]
        text = row.python.format(*arguments, table=f"table_{number}")
        slot, depth = len(texts), 1 + max(depths[argument] for argument in step.arguments)
        if uses[slot] > 1 or slot in repeated or depth >= MOST_NESTED or len(text) > MOST_CHARACTERS:
            lines.append(f"v{slot} = {text}")
            texts.append((f"v{slot}", ATOM))
            depths.append(0)
        else:
            texts.append((text, row.binds))
            depths.append(depth)
    return lines, [texts[slot][0] for slot in program.outputs]


def _preamble(program: Program) -> list[str]:
    names = {name for step in program.steps for name in OPERATIONS[step.name].needs} | {"nan"}
    if any(isinstance(constant, float) and math.isinf(constant) for constant in program.constants):
        names.add("inf")
    tables = _tables(program)
    text = ["from bisect import bisect_right"] if tables else []
    text += [f"from math import {', '.join(sorted(names))}", "", ""]
    for number, table in enumerate(tables):
        breaks = ", ".join(map(repr, table.breaks.tolist()))
        rows = ",\n    ".join(repr(tuple(row)) for row in table.coefficients.tolist())
        degree = table.coefficients.shape[1] - 1
        polynomial = f"c[{degree}]"
        for power in range(degree - 1, -1, -1):
            polynomial = f"({polynomial}) * u + c[{power}]"
        pieces = len(table.breaks) - 1
        text += [
            f"table_{number}_breaks = ({breaks})",
            f"table_{number}_rows = (\n    {rows},\n)",
            "",
            "",
            f"def table_{number}(x):",
            f"    if not {table.breaks[0].item()!r} <= x <= {table.breaks[-1].item()!r}:",
            "        return nan",
            f"    i = bisect_right(table_{number}_breaks, x, 1, {pieces}) - 1",
            f"    u = x - table_{number}_breaks[i]",
            f"    c = table_{number}_rows[i]",
            f"    return {polynomial}",
            "",
            "",
        ]
    return text

"""Record a function of numbers as a program."""

from __future__ import annotations

import keyword
from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from springpoise.carriers import Carrier
from springpoise.errors import InputError, InputTypeError
from springpoise.tape.dual import Dual
from springpoise.tape.program import Program
from springpoise.tape.variables import Tape

__all__ = ["record"]


def record(function: Callable[..., Carrier], inputs: Sequence[str] = ("q",)) -> Program:
    """Run a function once on variables and keep what it does to them.

    Parameters
    ----------
    function
        Takes one argument for each input and returns a number or a flat tuple or list of numbers.
        It is written over arithmetic, comparisons, and the functions of the arguments' array
        namespace or NumPy's own; a choice is written with ``where``. Arrays that it brings along
        become constants of the program, which broadcast against the inputs.
    inputs
        Names of the inputs: distinct identifiers.

    Returns
    -------
    Program
        With constants folded, common terms shared and idle ones dropped.

    Raises
    ------
    InputError
        If a name is not an identifier or occurs twice.
    InputTypeError
        If the function does what cannot be recorded, such as a branch or an unknown function, or
        returns something other than numbers.

    Examples
    --------
    >>> import numpy as np
    >>> program = record(lambda a, b: a * np.cos(b) + a * np.cos(b), inputs=("a", "b"))
    >>> [step.name for step in program.steps]
    ['cos', 'multiply', 'multiply']
    >>> program.replay(2.0, 0.0)
    4.0
    """
    names = (inputs,) if isinstance(inputs, str) else tuple(inputs)
    for name in names:
        if not name.isidentifier() or keyword.iskeyword(name):
            raise InputError(f"record inputs must be identifiers, got {name!r}")
        if names.count(name) > 1:
            raise InputError(f"record inputs must be distinct, got {name!r} twice")
    tape = Tape()
    # Array parameters are computed with while recording, also in the branch that is not taken.
    with np.errstate(all="ignore"):
        result: Any = function(*(tape.input(name) for name in names))
    scalar = not isinstance(result, tuple | list)
    outputs = []
    for value in [result] if scalar else result:
        if isinstance(value, tuple | list | Dual):
            raise InputTypeError(
                f"a recorded function must return numbers or one flat tuple of them, got {type(value).__name__} inside"
                if not scalar
                else f"a recorded function must return numbers, got {type(value).__name__}"
            )
        outputs.append(tape.number(value))
    return Program.from_tape(tape, outputs, scalar)

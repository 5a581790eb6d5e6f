"""The straight-line program that a recording ends in."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import attrs
import numpy as np

from springpoise.carriers import Carrier, Floats, namespace
from springpoise.errors import InputError
from springpoise.tape.compiled import compiled
from springpoise.tape.dual import Dual
from springpoise.tape.names import Names
from springpoise.tape.numpy_source import numpy_function, numpy_source
from springpoise.tape.operations import apply
from springpoise.tape.python_source import python_globals, python_source
from springpoise.tape.steps import Step
from springpoise.tape.variables import Constant, Tape, key_of

__all__ = ["Program"]


def _keys(constants: tuple[Constant, ...]) -> tuple[Any, ...]:
    return tuple(key_of(constant) for constant in constants)


def _is_plain(names: Any) -> bool:
    """Whether values of this namespace mix freely with Python floats and with the tape's constants."""
    return names is Floats or isinstance(names, Names)


@attrs.frozen
class Program:
    """A formula as a list of operations, none of them twice and none of them idle.

    Made by :func:`springpoise.tape.record`. Two programs are equal when they are the same list;
    programs pickle, and the functions made from them are compiled on first use.

    Parameters
    ----------
    inputs
        Names of the inputs, in order.
    constants
        Python floats, or arrays that broadcast against the inputs.
    steps
        The operations in order.
    outputs
        Slots of the results. Slots count through inputs, then constants, then steps.
    scalar
        Whether the recorded function returned one value rather than a tuple.

    Examples
    --------
    >>> import numpy as np
    >>> from springpoise.tape import record
    >>> program = record(lambda q: 2.0 * q * q)
    >>> len(program)
    2
    >>> program.replay(3.0)
    18.0
    >>> program.derivative().python_function()(3.0)
    12.0
    >>> program.numpy_function()(np.array([1.0, 3.0]))
    array([ 2., 18.])
    """

    inputs: tuple[str, ...]
    constants: tuple[Constant, ...] = attrs.field(eq=_keys)
    steps: tuple[Step, ...]
    outputs: tuple[int, ...]
    scalar: bool = True
    _functions: dict[Any, Callable[..., Any]] = attrs.field(factory=dict, init=False, eq=False, repr=False)

    @classmethod
    def from_tape(cls, tape: Tape, outputs: Sequence[int], scalar: bool) -> Program:
        """The part of a recording that the outputs depend on, and all inputs."""
        live: set[int] = set()
        waiting = list(outputs)
        while waiting:
            index = waiting.pop()
            if index not in live:
                live.add(index)
                waiting.extend(tape.nodes[index][1])
        kinds: dict[str, list[int]] = {"input": [], "constant": [], "step": []}
        for index, (name, _, _) in enumerate(tape.nodes):
            if name == "input" or index in live:
                kinds[name if name in kinds else "step"].append(index)
        order = [*kinds["input"], *kinds["constant"], *kinds["step"]]
        slots = {index: slot for slot, index in enumerate(order)}
        return cls(
            tuple(tape.nodes[index][2] for index in kinds["input"]),
            tuple(tape.nodes[index][2] for index in kinds["constant"]),
            tuple(
                Step(tape.nodes[index][0], tuple(slots[i] for i in tape.nodes[index][1]), tape.nodes[index][2])
                for index in kinds["step"]
            ),
            tuple(slots[index] for index in outputs),
            scalar,
        )

    def __len__(self) -> int:
        """Number of operations."""
        return len(self.steps)

    def replay(self, *inputs: Carrier) -> Carrier:
        """Run the program, operation by operation, on any carriers.

        Parameters
        ----------
        *inputs
            One for each input: floats, NumPy arrays, other arrays of the array API standard,
            duals, or variables of another recording.

        Returns
        -------
        carrier or tuple of carriers
            With IEEE results where the formula leaves its domain. Arrays are broadcast to the
            common shape of the inputs.

        Raises
        ------
        InputError
            If the number of inputs is wrong.
        """
        if len(inputs) != len(self.inputs):
            raise InputError(f"Program.replay must get {len(self.inputs)} inputs {self.inputs}, got {len(inputs)}")
        slots: list[Carrier] = [float(x) if isinstance(x, int | np.floating) else x for x in inputs]
        names = namespace(*slots, *self.constants)
        plain = _is_plain(names)
        slots.extend(self.constants)
        if not plain and names is not np:
            # Other libraries mix their arrays with scalars only in some functions, with NumPy's in none.
            slots = [names.asarray(slot) for slot in slots]
        with np.errstate(all="ignore"):
            for step in self.steps:
                arguments = [slots[i] for i in step.arguments]
                if step.table is not None and not plain:
                    slots.append(names.asarray(step.table(np.asarray(arguments[0]))))
                else:
                    slots.append(apply(step.name, *arguments, table=step.table))
        results = [slots[i] for i in self.outputs]
        if not plain:
            results = names.broadcast_arrays(*(names.asarray(x) for x in results), *map(names.asarray, inputs))
            # Copies: a caller may write into what it got.
            results = [names.asarray(x, copy=True) for x in results[: len(self.outputs)]]
        return results[0] if self.scalar else tuple(results)

    def derivative(self, with_respect_to: Sequence[str] | str | None = None, *, with_values: bool = False) -> Program:
        """The program that computes the exact derivatives of the outputs.

        Parameters
        ----------
        with_respect_to
            Names of inputs; all of them when None. The new program keeps all inputs.
        with_values
            Put this program's own outputs before the derivatives.

        Returns
        -------
        Program
            Its outputs are, for each output of this program and within that for each name,
            d output / d input, in units of the output per unit of the input. It is scalar only
            when this program is and there is a single name and no values.

        Raises
        ------
        InputError
            If a name is not one of the inputs.
        """
        wanted = self.inputs if with_respect_to is None else with_respect_to
        wanted = (wanted,) if isinstance(wanted, str) else tuple(wanted)
        for name in wanted:
            if name not in self.inputs:
                raise InputError(f"Program.derivative with_respect_to must be among {self.inputs}, got {name!r}")
        tape = Tape()
        variables = [tape.input(name) for name in self.inputs]
        outputs = [tape.index(output) for output in self._listed(*variables)] if with_values else []
        columns = []
        for name in wanted:
            varied = [Dual(v, 1.0) if own == name else v for own, v in zip(self.inputs, variables, strict=True)]
            columns.append([tape.index(x.slope if isinstance(x, Dual) else 0.0) for x in self._listed(*varied)])
        outputs.extend(column[i] for i in range(len(self.outputs)) for column in columns)
        return Program.from_tape(tape, outputs, self.scalar and len(outputs) == 1)

    def python_source(self, name: str = "program", *, stand_alone: bool = False) -> str:
        """The program as the source of a Python function of floats.

        Parameters
        ----------
        name
            Name of the function.
        stand_alone
            Also print imports and look-up tables, so that the text runs without this library.

        Raises
        ------
        InputError
            If the program contains array constants, or ``name`` is not an identifier.
        """
        return python_source(self, name, stand_alone)

    def python_function(self, name: str = "program") -> Callable[..., Any]:
        """A fast function of floats that returns a float, or a tuple of floats.

        Every result is NaN when an input is NaN or infinite, or when a function of :mod:`math`
        is used outside its domain, overflows, or a division by zero occurs.

        Raises
        ------
        InputError
            If the program contains array constants, or ``name`` is not an identifier.
        """
        function = self._functions.get(("python", name))
        if function is None:
            function = compiled(python_source(self, name, False), name, python_globals(self))[name]
            self._functions["python", name] = function
        return function

    def numpy_source(self, name: str = "program") -> str:
        """The generated part of :meth:`numpy_function`, for inputs of one common shape."""
        return numpy_source(self, name)

    def numpy_function(self, name: str = "program") -> Callable[..., Any]:
        """A fast function of arrays, which works through them in blocks that fit the cache.

        The inputs broadcast against each other and against the array constants. The result is an
        array of the common shape, or a tuple of such arrays; a float when that shape is (). An
        array constant that has cancelled no longer counts towards that shape. The result is
        NaN exactly in the elements for which an input is NaN or infinite, or the formula is
        undefined. The function may run in several threads at once.
        """
        function = self._functions.get(("numpy", name))
        if function is None:
            function = self._functions["numpy", name] = numpy_function(self, name)
        return function

    def _listed(self, *inputs: Carrier) -> tuple[Carrier, ...]:
        result = self.replay(*inputs)
        return (result,) if self.scalar else result

    def __reduce__(self) -> tuple[Any, ...]:
        return Program, (self.inputs, self.constants, self.steps, self.outputs, self.scalar)

"""The tape while it records: its nodes, and the handles that formulas compute with."""

from __future__ import annotations

import math
from typing import Any, TypeAlias

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.carriers import Carrier
from springpoise.errors import InputTypeError
from springpoise.lookup import Lookup
from springpoise.tape.folding import simplified
from springpoise.tape.names import Recorded
from springpoise.tape.operations import LOOK_UP, OPERATIONS
from springpoise.tape.signs import POSITIVE, sign_of

__all__ = ["Constant", "Node", "Tape", "Variable", "key_of"]

Constant: TypeAlias = float | bool | NDArray[Any]
"""A Python float or bool, or an array of float64 or bool with at least one axis."""

Node: TypeAlias = tuple[str, tuple[int, ...], Any]
"""Name, indices of the arguments, and a payload: a constant, an input's name, or a Lookup."""


def key_of(value: Constant) -> Any:
    """Something hashable that tells constants apart, also 0.0 from -0.0 and 1.0 from True."""
    if isinstance(value, np.ndarray):
        return value.dtype.char, value.shape, value.tobytes()
    return type(value).__name__, repr(value)


class Tape:
    """Operations in the order in which they were recorded; the same operation is recorded once."""

    def __init__(self) -> None:
        self.nodes: list[Node] = []
        self.signs: list[int] = []
        self._known: dict[Any, int] = {}

    def input(self, name: str) -> Variable:
        """A new variable, a number."""
        return Variable(self, self._index("input", (), name, name))

    def constant(self, value: Any) -> int:
        """Index of a constant node; refuses what is neither a number nor an array of numbers."""
        plain: Constant
        if isinstance(value, bool | np.bool_):
            plain = bool(value)
        elif isinstance(value, float | int | np.floating | np.integer):
            plain = float(value)
        elif isinstance(value, np.ndarray) or hasattr(value, "__array_namespace__"):
            array = np.asarray(value)
            if array.dtype.kind not in "bfiu":
                raise InputTypeError(f"a recorded formula cannot use an array of {array.dtype}")
            if array.ndim == 0:
                return self.constant(array[()])
            plain = array.astype(bool if array.dtype.kind == "b" else np.float64)
            plain.setflags(write=False)
        else:
            raise InputTypeError(f"a recorded formula cannot use {value!r} of type {type(value).__name__}")
        return self._index("constant", (), plain, key_of(plain))

    def index(self, value: Carrier) -> int:
        """Index of a variable of this tape, or of anything plain as a constant."""
        if isinstance(value, Variable):
            if value.tape is not self:
                raise InputTypeError(f"{value!r} belongs to another recording; one formula cannot mix two")
            return value.index
        return self.constant(value)

    def number(self, value: Carrier) -> int:
        """As :meth:`index`; a condition becomes 1.0 or 0.0."""
        return self._as_number(self.index(value))

    def operation(self, name: str, arguments: tuple[int, ...], table: Lookup | None = None) -> int:
        """Index of the operation's result, which may turn out to be a simpler node."""
        row = OPERATIONS[name]
        kinds = row.takes_conditions or (False,) * row.arity
        arguments = tuple(
            self._as_condition(i) if kind else self._as_number(i) for i, kind in zip(arguments, kinds, strict=True)
        )
        if row.commutes and self._order(arguments[0]) > self._order(arguments[1]):
            arguments = arguments[::-1]
        simpler = simplified(self, name, arguments, table)
        return self._index(name, arguments, table, table) if simpler is None else simpler

    def is_condition(self, index: int) -> bool:
        """Whether the node is true or false rather than a number."""
        name, _, value = self.nodes[index]
        if name == "constant":
            return value is True or value is False or (isinstance(value, np.ndarray) and value.dtype == bool)
        return name in OPERATIONS and OPERATIONS[name].makes_condition

    def _order(self, index: int) -> tuple[bool, int]:
        return self.nodes[index][0] != "constant", index

    def _as_number(self, index: int) -> int:
        """As in NumPy, a condition counts as 1.0 or 0.0 where a number belongs."""
        if not self.is_condition(index):
            return index
        return self.operation("where", (index, self.constant(1.0), self.constant(0.0)))

    def _as_condition(self, index: int) -> int:
        if self.is_condition(index):
            return index
        return self.operation("not_equal", (index, self.constant(0.0)))

    def _index(self, name: str, arguments: tuple[int, ...], payload: Any, key: Any) -> int:
        full = (name, arguments, key)
        found = self._known.get(full)
        if found is None:
            found = self._known[full] = len(self.nodes)
            self.nodes.append((name, arguments, payload))
        return found


@attrs.frozen(eq=False, repr=False)
class Variable(Recorded):
    """A number, or a condition, of a formula that is being recorded.

    It takes the operators of arrays, the functions of :meth:`__array_namespace__`, and NumPy's
    functions of the same meaning. It has no value: ``if``, ``float`` and ``math`` refuse it.
    """

    tape: Tape
    index: int

    @property
    def rank(self) -> int:
        """Which of two kinds in one operation says how it is done: the higher."""
        return 0

    @property
    def is_positive(self) -> bool:
        """Whether it is certain to be greater than zero for finite inputs."""
        return sign_of(self.tape, self.index) == POSITIVE

    def _record(self, name: str, arguments: tuple[Carrier, ...], table: Lookup | None) -> Variable:
        indices = tuple(self.tape.index(argument) for argument in arguments)
        return Variable(self.tape, self.tape.operation(name, indices, table))

    def __repr__(self) -> str:
        name, _, value = self.tape.nodes[self.index]
        if name == LOOK_UP or not isinstance(value, str | float | bool):
            return f"Variable({name})"
        return f"Variable({value})" if not isinstance(value, float) or math.isfinite(value) else f"Variable({value!r})"

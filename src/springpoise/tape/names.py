"""What recorded variables and duals share: operators, the namespace, and NumPy's protocols.

All three end in :func:`run`, which hands an operation to the argument that knows most: a dual
before the variable it may be made of, an outer dual's argument before everything plain.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from springpoise.carriers import Carrier
from springpoise.errors import InputTypeError
from springpoise.lookup import Lookup
from springpoise.tape.operations import LOOK_UP, OPERATIONS, apply

__all__ = ["NAMES", "Names", "Recorded", "run"]


class _UnknownName(InputTypeError, AttributeError):
    """An AttributeError as well, so that ``hasattr`` and ``getattr`` with a default work."""


class Recorded:
    """A value that follows along a formula: operators and NumPy functions on it call ``_record``."""

    __slots__ = ()

    @property
    def rank(self) -> int:
        """Of several arguments, the one with the highest rank carries out the operation."""
        raise NotImplementedError

    def _record(self, name: str, arguments: tuple[Carrier, ...], table: Lookup | None) -> Carrier:
        raise NotImplementedError

    def __array_namespace__(self, api_version: str | None = None) -> Names:
        return NAMES

    def __look_up__(self, table: Lookup) -> Carrier:
        return self._record(LOOK_UP, (self,), table)

    def __add__(self, other: Carrier) -> Any:
        return run("add", self, other)

    def __radd__(self, other: Carrier) -> Any:
        return run("add", other, self)

    def __sub__(self, other: Carrier) -> Any:
        return run("subtract", self, other)

    def __rsub__(self, other: Carrier) -> Any:
        return run("subtract", other, self)

    def __mul__(self, other: Carrier) -> Any:
        return run("multiply", self, other)

    def __rmul__(self, other: Carrier) -> Any:
        return run("multiply", other, self)

    def __truediv__(self, other: Carrier) -> Any:
        return run("divide", self, other)

    def __rtruediv__(self, other: Carrier) -> Any:
        return run("divide", other, self)

    def __pow__(self, other: Carrier) -> Any:
        return run("pow", self, other)

    def __rpow__(self, other: Carrier) -> Any:
        return run("pow", other, self)

    def __neg__(self) -> Any:
        return run("negative", self)

    def __pos__(self) -> Any:
        return self

    def __abs__(self) -> Any:
        return run("abs", self)

    def __lt__(self, other: Carrier) -> Any:
        return run("less", self, other)

    def __le__(self, other: Carrier) -> Any:
        return run("less_equal", self, other)

    def __gt__(self, other: Carrier) -> Any:
        return run("greater", self, other)

    def __ge__(self, other: Carrier) -> Any:
        return run("greater_equal", self, other)

    # As on arrays, == compares values and so leaves nothing that could be hashed.
    def __eq__(self, other: Carrier) -> Any:
        return run("equal", self, other)

    def __ne__(self, other: Carrier) -> Any:
        return run("not_equal", self, other)

    __hash__ = None  # type: ignore[assignment]

    def __and__(self, other: Carrier) -> Any:
        return run("logical_and", self, other)

    def __rand__(self, other: Carrier) -> Any:
        return run("logical_and", other, self)

    def __or__(self, other: Carrier) -> Any:
        return run("logical_or", self, other)

    def __ror__(self, other: Carrier) -> Any:
        return run("logical_or", other, self)

    def __invert__(self) -> Any:
        return run("logical_not", self)

    def __bool__(self) -> bool:
        raise InputTypeError(
            f"{self!r} has no truth value: a recorded formula cannot branch; use `where` of its namespace, "
            "and `&`, `|`, `~` instead of `and`, `or`, `not`"
        )

    def __float__(self) -> float:
        raise InputTypeError(
            f"{self!r} has no value to turn into a float: use the functions of its namespace, such as `sin`, "
            "instead of those of `math`, and `where` of its namespace instead of a branch"
        )

    def __array_ufunc__(self, ufunc: np.ufunc, method: str, *inputs: Carrier, **options: Any) -> Any:
        if method != "__call__" or options:
            detail = f".{method}" if method != "__call__" else f" with {', '.join(options)}"
            raise InputTypeError(f"numpy.{ufunc.__name__}{detail} cannot be recorded; {_KNOWN}")
        return getattr(NAMES, _UFUNCS.get(ufunc, ufunc.__name__))(*inputs)

    def __array_function__(self, function: Any, types: Any, inputs: tuple[Any, ...], options: dict[str, Any]) -> Any:
        own = _FUNCTIONS.get(function)
        if own is None:
            raise InputTypeError(f"numpy.{function.__name__} cannot be recorded; {_KNOWN}")
        return getattr(NAMES, own)(*inputs, **options)


def run(name: str, *arguments: Carrier, table: Lookup | None = None) -> Carrier:
    """Carry out an operation whose arguments may be recorded values, plain ones, or both."""
    leader: Recorded | None = None
    for argument in arguments:
        if isinstance(argument, Recorded) and (leader is None or argument.rank > leader.rank):
            leader = argument
    if leader is None:
        return apply(name, *arguments, table=table)
    return leader._record(name, arguments, table)


class Names:
    """The namespace of recorded values: the operations' array API names, and a few made of them."""

    pi = math.pi
    e = math.e
    inf = math.inf
    nan = math.nan

    def __getattr__(self, name: str) -> Any:
        row = OPERATIONS.get(name)
        if row is None or name == LOOK_UP:
            raise _UnknownName(f"{name} cannot be recorded; {_KNOWN}")

        def operation(*arguments: Carrier) -> Carrier:
            if len(arguments) != row.arity:
                raise InputTypeError(f"{name} takes {row.arity} arguments, got {len(arguments)}")
            return run(name, *arguments)

        operation.__name__ = name
        # Kept, so that the next look-up finds a plain attribute.
        self.__dict__[name] = operation
        return operation

    def clip(self, x: Carrier, /, min: Carrier | None = None, max: Carrier | None = None, **numpys: Any) -> Carrier:
        """``x`` within the bounds; None leaves a side open. ``a_min`` and ``a_max`` as in NumPy."""
        lower, upper = numpys.pop("a_min", min), numpys.pop("a_max", max)
        if numpys:
            raise InputTypeError(f"clip with {', '.join(numpys)} cannot be recorded; it takes min and max")
        if lower is not None:
            x = run("maximum", x, lower)
        return x if upper is None else run("minimum", x, upper)

    def square(self, x: Carrier, /) -> Carrier:
        """``x * x``."""
        return run("multiply", x, x)

    def reciprocal(self, x: Carrier, /) -> Carrier:
        """``1 / x``."""
        return run("divide", 1.0, x)

    def positive(self, x: Carrier, /) -> Carrier:
        """``x`` itself."""
        return x

    def radians(self, x: Carrier, /) -> Carrier:
        """Degrees to radians."""
        return run("multiply", x, math.pi / 180.0)

    def degrees(self, x: Carrier, /) -> Carrier:
        """Radians to degrees."""
        return run("multiply", x, 180.0 / math.pi)

    def __repr__(self) -> str:
        return "<namespace of recorded values>"


NAMES = Names()
"""The one namespace: which kind of value runs an operation is decided by :func:`run`."""

_MADE = ("clip", "square", "reciprocal", "positive", "radians", "degrees")
_KNOWN = "what can be: " + ", ".join(sorted([*(name for name in OPERATIONS if name != LOOK_UP), *_MADE]))

# Ufuncs call themselves by their old names (arctan2), the standard by the new ones (atan2).
_UFUNCS: dict[Any, str] = {row.ufunc: row.name for row in OPERATIONS.values() if row.ufunc is not None} | {
    np.fabs: "abs",
    np.float_power: "pow",
    np.deg2rad: "radians",
    np.rad2deg: "degrees",
    np.bitwise_and: "logical_and",
    np.bitwise_or: "logical_or",
    np.invert: "logical_not",
}
_FUNCTIONS: dict[Any, str] = {np.where: "where", np.clip: "clip"}

"""Which functions a value's formulas run on.

A formula of this library is written once, over the names of the Python array API standard. What
came in decides where these names are taken from: plain floats run on ``math`` (here with IEEE
results instead of exceptions), NumPy arrays on NumPy, other arrays that follow the standard on
their own namespace, and recorded variables on the tape's.

Both branches of a ``where`` are computed, so a formula keeps its arguments inside the domain, for
example ``acos(minimum(r / d, 1.0))``. The numbers inside a formula are Python floats.
"""

from __future__ import annotations

import math
from typing import Any, TypeAlias

import numpy as np

from springpoise.lookup import Lookup

__all__ = ["Carrier", "Floats", "interpolate", "is_zero", "joints_of", "namespace"]

Carrier: TypeAlias = Any
"""A float, an array or a recorded variable: whatever a formula runs on."""

ALMOST_NOTHING = 1e-300
"""Added below the square root of a length [m²].

It changes no length above 1e-142 m, and gives two points that coincide the right limits: length
and direction zero instead of NaN, and the right second derivative.
"""


_EXP_LIMIT = 709.782712893384  # the largest arguments that do not overflow
_SINH_LIMIT = 710.4758600739439


class Floats:
    """The array API's names on plain floats; what the reals leave undefined gives NaN or infinity."""

    pi = math.pi
    abs = staticmethod(abs)
    atan = staticmethod(math.atan)
    atan2 = staticmethod(math.atan2)
    hypot = staticmethod(math.hypot)
    tanh = staticmethod(math.tanh)
    asinh = staticmethod(math.asinh)
    isfinite = staticmethod(math.isfinite)

    @staticmethod
    def sin(x: float) -> float:
        return math.sin(x) if math.isfinite(x) else math.nan

    @staticmethod
    def cos(x: float) -> float:
        return math.cos(x) if math.isfinite(x) else math.nan

    @staticmethod
    def tan(x: float) -> float:
        return math.tan(x) if math.isfinite(x) else math.nan

    @staticmethod
    def asin(x: float) -> float:
        return math.asin(x) if -1.0 <= x <= 1.0 else math.nan

    @staticmethod
    def acos(x: float) -> float:
        return math.acos(x) if -1.0 <= x <= 1.0 else math.nan

    @staticmethod
    def sqrt(x: float) -> float:
        return math.sqrt(x) if x >= 0.0 else math.nan

    @staticmethod
    def exp(x: float) -> float:
        return math.exp(x) if not x > _EXP_LIMIT else math.inf

    @staticmethod
    def expm1(x: float) -> float:
        return math.expm1(x) if not x > _EXP_LIMIT else math.inf

    @staticmethod
    def sinh(x: float) -> float:
        return math.sinh(x) if not abs(x) > _SINH_LIMIT else math.copysign(math.inf, x)

    @staticmethod
    def cosh(x: float) -> float:
        return math.cosh(x) if not abs(x) > _SINH_LIMIT else math.inf

    @staticmethod
    def log(x: float) -> float:
        return math.log(x) if x > 0.0 else (-math.inf if x == 0.0 else math.nan)

    @staticmethod
    def log1p(x: float) -> float:
        return math.log1p(x) if x > -1.0 else (-math.inf if x == -1.0 else math.nan)

    @staticmethod
    def sign(x: float) -> float:
        return x if math.isnan(x) else float(x > 0.0) - float(x < 0.0)

    @staticmethod
    def maximum(x: float, y: float) -> float:
        return x if x > y or x != x else y

    @staticmethod
    def minimum(x: float, y: float) -> float:
        return x if x < y or x != x else y

    @staticmethod
    def where(condition: bool, x: float, y: float) -> float:
        return x if condition else y

    @staticmethod
    def logical_and(x: bool, y: bool) -> bool:
        return bool(x and y)

    @staticmethod
    def logical_or(x: bool, y: bool) -> bool:
        return bool(x or y)

    @staticmethod
    def logical_not(x: bool) -> bool:
        return not x

    @staticmethod
    def pow(x: float, y: float) -> float:
        try:
            result = x**y
        except (OverflowError, ZeroDivisionError):
            if x < 0.0 and y % 1.0 != 0.0:
                return math.nan
            return math.copysign(math.inf, x) if y % 2.0 == 1.0 else math.inf
        return result if not isinstance(result, complex) else math.nan


def namespace(*values: Carrier) -> Any:
    """The functions that formulas over ``values`` run on.

    Parameters
    ----------
    *values
        Everything that goes into the formula: floats, NumPy arrays, arrays of another library
        that follows the array API standard, or recorded variables, mixed as they come.

    Returns
    -------
    namespace
        ``Floats`` when all are plain numbers, NumPy when arrays are among them, otherwise
        the namespace of the first value that brings its own.
    """
    found: Any = Floats
    for value in values:
        if isinstance(value, float | int):
            continue
        if isinstance(value, np.ndarray | np.generic):
            found = np
            continue
        own = getattr(value, "__array_namespace__", None)
        if own is not None:
            return own()
    return found


def interpolate(x: Carrier, table: Lookup) -> Carrier:
    """The look-up table's value at ``x``, on any carrier; NaN outside the table."""
    look_up = getattr(x, "__look_up__", None)
    if look_up is not None:
        return look_up(table)
    if not isinstance(x, float | int | np.ndarray | np.generic):
        return namespace(x).asarray(table(np.asarray(x)))
    return table(x)


def joints_of(q: Carrier, count: int) -> tuple[Carrier, ...]:
    """The joint angles one by one: ``q`` itself for one joint, else along its last axis."""
    if count == 1:
        return (q,)
    if isinstance(q, tuple | list):
        return tuple(q)
    return tuple(q[..., i] for i in range(count))


def is_zero(value: Carrier) -> bool:
    """Whether a value is the plain number zero, so that a formula may leave its term out."""
    return isinstance(value, float) and value == 0.0


def distance(*components: Carrier) -> Carrier:
    """Length of a vector, with the right limits where it vanishes."""
    square: Carrier = components[0] * components[0]
    for component in components[1:]:
        square = square + component * component
    return namespace(square).sqrt(square + ALMOST_NOTHING)

"""Numbers, strings and quantities to SI: one named converter for each unit."""

from __future__ import annotations

import math
import re
import reprlib
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Protocol, TypeAlias

import numpy as np

from springpoise.errors import InputError, InputTypeError, UnitError

if TYPE_CHECKING:
    from numpy.typing import NDArray


class QuantityLike(Protocol):
    """Anything that can state its magnitude in a unit given as text, such as a pint quantity."""

    def m_as(self, units: str, /) -> Any:
        """Magnitude in ``units``."""
        ...


ScalarLike: TypeAlias = (
    "float | str | np.floating[Any] | np.integer[Any] | NDArray[Any] | QuantityLike | Sequence[float]"
)
"""What a public argument takes: an SI number, a string with a unit, a quantity, or an array of numbers."""

DEGREES_SUSPECTED = 4.0 * math.pi
"""An angle beyond two turns [rad] is taken for degrees that were given as a plain number."""


def _text() -> Any:
    """The reading of strings, loaded when there is one, or an error to word."""
    from springpoise.units import text

    return text


def _parsed(value: str, unit: str, name: str) -> float:
    return float(_text().parse(value, unit, name))


def _described(unit: str) -> str:
    return str(_text().described(unit))


def scalar_si(value: ScalarLike, unit: str, name: str) -> Any:
    """``value`` as a finite SI float, or as a read-only float array where an array came in.

    Values of a foreign array library and recorded variables pass through as they are.
    """
    if type(value) is float and math.isfinite(value):
        return value
    if isinstance(value, str):
        return _parsed(value, unit, name)
    if _passes(value):
        return value
    number = _magnitude(value, unit, name)
    if not _is_real(number):
        return _array_si(number, unit, name)
    try:
        result = float(number)
    except (OverflowError, ValueError):  # an integer beyond any float, a signalling NaN
        result = math.nan
    if not math.isfinite(result):
        raise InputError(f"{name} must be {_described(unit)} that is finite, got {reprlib.repr(number)}")
    return result


def _passes(value: Any) -> bool:
    """Whether a value belongs to a foreign array library or is a recorded variable."""
    return hasattr(type(value), "__array_namespace__") and not isinstance(value, np.ndarray | np.generic)


def _is_real(value: Any) -> bool:
    """Whether a value is one real number of any kind: int, float, Fraction, Decimal, a NumPy scalar."""
    if isinstance(value, bool):
        return False
    import numbers  # rarely needed

    return isinstance(value, numbers.Real) or (
        isinstance(value, numbers.Number) and not isinstance(value, numbers.Complex)
    )


def _states_unit(value: Any) -> bool:
    return isinstance(value, str) or hasattr(value, "m_as")


def _magnitude(value: Any, unit: str, name: str) -> Any:
    """The number inside a quantity; what is not a quantity comes back as it is."""
    m_as = getattr(value, "m_as", None)
    if m_as is None:
        return value
    spelled = str(getattr(value, "units", ""))
    if unit == "rad/s" and re.search(r"hertz|Hz", spelled):
        raise UnitError(f"{name} must be {_described(unit)}, got {value}{_text().angle_hint(spelled, unit, 0)}")
    try:
        return m_as("dimensionless" if unit == "1" else unit)
    except Exception as error:  # each registry raises its own kind
        hint = _text().spelling_hint(spelled, unit) if spelled else ""
        raise UnitError(f"{name} must be {_described(unit)}, got {value}{hint}") from error


def _array_si(value: Any, unit: str, name: str) -> Any:
    """A read-only float array of finite values; a float for an array without axes."""
    if isinstance(value, bool | None | dict | set | frozenset | bytes) or hasattr(value, "mask"):
        raise _wrong_type(value, unit, name)
    numbers = value
    if isinstance(value, list | tuple):
        if any(isinstance(item, bool | np.bool_) for item in value):
            raise _wrong_type(value, unit, name)
        if any(_states_unit(item) for item in value):
            numbers = [scalar_si(item, unit, name) for item in value]
    array = _floats(numbers)
    if array is None:
        raise _wrong_type(value, unit, name)
    if array.size == 0:
        raise InputError(f"{name} must be {_described(unit)}, got an empty array")
    if not np.all(np.isfinite(array)):
        bad = array[~np.isfinite(array)][0]
        raise InputError(f"{name} must be {_described(unit)} that is finite, got {bad} in an array")
    if array.ndim == 0:
        return float(array)
    array = array.copy()
    array.setflags(write=False)
    return array


def _wrong_type(value: Any, unit: str, name: str) -> InputTypeError:
    # Made only when it is needed: the text of an array costs far more than its conversion.
    return InputTypeError(
        f"{name} must be {_described(unit)}, got {reprlib.repr(value)} of type {type(value).__name__}"
    )


def _floats(value: Any) -> NDArray[np.float64] | None:
    """A float array, the same one where it is one already; None for what does not hold real numbers."""
    try:
        raw = np.asarray(value)
    except (TypeError, ValueError):  # ragged, or of a kind that refuses
        return None
    return raw.astype(np.float64, copy=False) if raw.dtype.kind in "iuf" else None


# One named function a unit: type checkers read the constructor's argument type from it.


def metre(value: ScalarLike, name: str = "value") -> Any:
    """Length in m."""
    return scalar_si(value, "m", name)


def kilogram(value: ScalarLike, name: str = "value") -> Any:
    """Mass in kg."""
    return scalar_si(value, "kg", name)


def newton(value: ScalarLike, name: str = "value") -> Any:
    """Force in N."""
    return scalar_si(value, "N", name)


def newton_per_metre(value: ScalarLike, name: str = "value") -> Any:
    """Spring rate in N/m."""
    return scalar_si(value, "N/m", name)


def newton_metre(value: ScalarLike, name: str = "value") -> Any:
    """Torque in N·m."""
    return scalar_si(value, "N*m", name)


def newton_metre_per_radian(value: ScalarLike, name: str = "value") -> Any:
    """Torsional spring rate in N·m/rad."""
    return scalar_si(value, "N*m/rad", name)


def joule(value: ScalarLike, name: str = "value") -> Any:
    """Energy in J."""
    return scalar_si(value, "J", name)


def ampere(value: ScalarLike, name: str = "value") -> Any:
    """Current in A."""
    return scalar_si(value, "A", name)


def ohm(value: ScalarLike, name: str = "value") -> Any:
    """Resistance in Ω."""
    return scalar_si(value, "ohm", name)


def newton_metre_per_ampere(value: ScalarLike, name: str = "value") -> Any:
    """Torque constant in N·m/A."""
    return scalar_si(value, "N*m/A", name)


def metre_per_second_squared(value: ScalarLike, name: str = "value") -> Any:
    """Acceleration in m/s²."""
    return scalar_si(value, "m/s**2", name)


def radian_per_second(value: ScalarLike, name: str = "value") -> Any:
    """Joint rate in rad/s."""
    return scalar_si(value, "rad/s", name)


def pascal(value: ScalarLike, name: str = "value") -> Any:
    """Stress or pressure in Pa."""
    return scalar_si(value, "Pa", name)


def kilogram_per_cubic_metre(value: ScalarLike, name: str = "value") -> Any:
    """Density in kg/m³."""
    return scalar_si(value, "kg/m**3", name)


def second(value: ScalarLike, name: str = "value") -> Any:
    """Time in s."""
    return scalar_si(value, "s", name)


def per_kelvin(value: ScalarLike, name: str = "value") -> Any:
    """A relative change with temperature in 1/K."""
    return scalar_si(value, "1/K", name)


def kelvin(value: ScalarLike, name: str = "value") -> Any:
    """Absolute temperature in K, > 0; refuses plain numbers below 100, which are degrees Celsius by mistake."""
    temperature = scalar_si(value, "K", name)
    if isinstance(temperature, float | np.ndarray):
        lowest = float(np.min(temperature))
        if not _states_unit(value) and lowest < 100.0:
            raise InputError(f"{name} must be an absolute temperature in K, got {lowest:g}; write '{lowest:g} degC'")
        if lowest <= 0.0:
            raise InputError(f"{name} must be > 0 K, got {lowest:g}")
    return temperature


def number(value: ScalarLike, name: str = "value") -> Any:
    """A pure number."""
    return scalar_si(value, "1", name)


def radian(value: ScalarLike, name: str = "value") -> Any:
    """A bounded angle in rad; refuses more than two turns, which are degrees by mistake."""
    angle = scalar_si(value, "rad", name)
    if isinstance(angle, float | np.ndarray) and np.any(beyond := np.abs(angle) > DEGREES_SUSPECTED):
        raise _beyond_two_turns(np.asarray(angle)[beyond].flat[0], name, guess=not _states_unit(value))
    return angle


def radians(value: ScalarLike, name: str = "value") -> Any:
    """Angles in rad of which there may be many turns, such as those of a drum."""
    return scalar_si(value, "rad", name)


def _beyond_two_turns(seen: float, name: str, *, guess: bool) -> InputError:
    hint = f"; degrees? write '{seen:g} deg'" if guess else ""
    return InputError(f"{name} must be within two turns, ±{DEGREES_SUSPECTED:.4g} rad, got {seen:g}{hint}")


def metre_pair(value: Any, name: str = "value") -> tuple[Any, Any]:
    """A point (x, y) in m."""
    return pair(value, "m", name)


def acceleration_pair(value: Any, name: str = "value") -> tuple[Any, Any]:
    """An acceleration (x, y) in m/s²."""
    return pair(value, "m/s**2", name)


def radian_pair(value: Any, name: str = "value") -> tuple[Any, Any]:
    """A range (from, to) of angles in rad."""
    first, last = _two(value, "rad", name)
    return radian(first, name), radian(last, name)


def optional_metre(value: ScalarLike | None, name: str = "value") -> Any:
    """Length in m, or None for "not given"."""
    return None if value is None else metre(value, name)


def optional_newton(value: ScalarLike | None, name: str = "value") -> Any:
    """Force in N, or None for "not given"."""
    return None if value is None else newton(value, name)


def optional_radian_pair(value: Any, name: str = "value") -> Any:
    """A range (from, to) of angles in rad, or None for "not given"."""
    return None if value is None else radian_pair(value, name)


def pair(value: Any, unit: str, name: str) -> tuple[Any, Any]:
    """Two values of one unit, each a number, a string or a quantity."""
    first, last = _two(value, unit, name)
    return scalar_si(first, unit, name), scalar_si(last, unit, name)


def _two(value: Any, unit: str, name: str) -> tuple[Any, Any]:
    items = _several(value, unit, name, (2,))
    return items[0], items[1]


def triple(value: Any, unit: str, name: str) -> tuple[Any, Any, Any]:
    """Three values of one unit, each a number, a string or a quantity."""
    items = _several(value, unit, name, (3,))
    return scalar_si(items[0], unit, name), scalar_si(items[1], unit, name), scalar_si(items[2], unit, name)


def metre_triple(value: Any, name: str = "value") -> tuple[Any, Any, Any]:
    """A point (x, y, z) in m."""
    return triple(value, "m", name)


def radian_triple(value: Any, name: str = "value") -> tuple[Any, Any, Any]:
    """Three bounded angles in rad."""
    items = _several(value, "rad", name, (3,))
    return radian(items[0], name), radian(items[1], name), radian(items[2], name)


def metre_place(value: Any, name: str = "value") -> tuple[Any, ...]:
    """A point in m: (x, y) in a plane, (x, y, z) in space."""
    return tuple(scalar_si(item, "m", name) for item in _several(value, "m", name, (2, 3)))


def acceleration(value: Any, name: str = "value") -> tuple[Any, ...]:
    """An acceleration in m/s²: (x, y) in a plane, (x, y, z) in space."""
    return tuple(scalar_si(item, "m/s**2", name) for item in _several(value, "m/s**2", name, (2, 3)))


_TUPLES = {2: "a pair", 3: "three values"}


def _several(value: Any, unit: str, name: str, counts: tuple[int, ...]) -> list[Any]:
    """The items of a value that holds one of these numbers of them."""
    rule = " or ".join(_TUPLES[count] for count in counts)
    if hasattr(value, "m_as"):  # a quantity that holds them all: the unit is stated, so no degrees are suspected
        value = _magnitude(value, unit, name)
    try:
        if isinstance(value, str | bytes | dict | set | frozenset):  # these have no order, or no numbers
            raise TypeError
        items = list(value)
    except TypeError:
        raise InputTypeError(
            f"{name} must be {rule} in {unit}, got {reprlib.repr(value)} of type {type(value).__name__}"
        ) from None
    if len(items) not in counts:
        raise InputError(f"{name} must be {rule} in {unit}, got {len(items)} values: {reprlib.repr(value)}")
    return items


def poses(q: Any, name: str = "q") -> Any:
    """Joint angles in rad, as they come in a call: NaN and infinity pass, degrees do not.

    A float stays a float, an array an array; recorded variables and foreign arrays pass untouched,
    alone or in a tuple with one for each joint.
    """
    if type(q) is float:
        if -DEGREES_SUSPECTED <= q <= DEGREES_SUSPECTED or not math.isfinite(q):
            return q
        raise _beyond_two_turns(q, name, guess=True)
    if isinstance(q, str):
        return _parsed(q, "rad", name)
    if _passes(q):
        return q
    stated = hasattr(q, "m_as")
    q = _magnitude(q, "rad", name)
    if isinstance(q, list | tuple):
        if any(_passes(item) for item in q):
            return q
        if any(_states_unit(item) for item in q):
            q, stated = [poses(item, name) for item in q], True
    flags = hasattr(q, "mask") or any(
        isinstance(item, bool | np.bool_) for item in (q if isinstance(q, list | tuple) else [q])
    )
    angles = None if flags else _floats(q)
    if angles is None:
        raise InputTypeError(f"{name} must be angles in rad, got {reprlib.repr(q)} of type {type(q).__name__}")
    if angles.size and not stated and not (-DEGREES_SUSPECTED <= angles.min() <= angles.max() <= DEGREES_SUSPECTED):
        beyond = (np.abs(angles) > DEGREES_SUSPECTED) & np.isfinite(angles)
        if beyond.any():  # and not only NaN or infinity
            raise _beyond_two_turns(angles[beyond].flat[0], name, guess=True)
    return angles if angles.ndim else float(angles)

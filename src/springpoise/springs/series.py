"""Springs one behind the other: the same load, lengths add.

Each spring's length is a function of the load; their sum, turned round, is the law of the chain.
It is stored as a table: exactly, where the springs are piecewise linear, and otherwise as cubics
with the right slopes, refined until the load errs by less than 1e-9 of its greatest value.
"""

from __future__ import annotations

import functools
import math
from collections.abc import Sequence
from itertools import pairwise
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, interpolate, namespace
from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.springs.compression import CompressionSpring
from springpoise.springs.constant_force import ConstantForceSpring
from springpoise.springs.extension import ExtensionSpring
from springpoise.springs.parallel import checked_springs
from springpoise.springs.protocol import Spring, hysteresis_of, working_range_of
from springpoise.springs.zero_length import ZeroLengthSpring
from springpoise.units import ScalarLike

__all__ = ["SeriesSprings", "in_series", "wire_rope"]

Array = NDArray[np.float64]

ACCURACY = 1e-9
"""Error of a tabulated load over its greatest value [1]."""

ENDLESS = 1e3
"""A spring without a limit is tabulated this much further [m]; its last piece is straight and exact."""


class _Law(NamedTuple):
    """Length of one spring as a function of its load: corners, and straight lines or a curve between them."""

    loads: Array
    lengths: Array
    curved: bool
    last_rate: float  # N/m beyond the last corner; 0 for a plateau, inf where it ends there


def _law(spring: Any) -> _Law:
    low, high = (float(end) for end in working_range_of(spring))
    if isinstance(spring, ZeroLengthSpring):
        return _straight([0.0], [0.0], spring.rate, high)
    if isinstance(spring, ExtensionSpring):
        tension, free = float(spring.initial_tension), float(spring.free_length)
        corners = ([0.0, tension], [free, free]) if tension > 0 else ([0.0], [free])
        return _straight(*corners, spring.rate, high)
    if isinstance(spring, CompressionSpring):
        free, solid = float(spring.free_length), float(spring.solid_length)
        return _Law(np.array([-spring.rate * (free - solid), 0.0]), np.array([solid, free]), False, math.inf)
    if isinstance(spring, ConstantForceSpring):
        return _Law(np.array([0.0, float(spring.pull)]), np.array([0.0, 0.0]), False, 0.0)
    if not (math.isfinite(low) and math.isfinite(high)):
        raise InputError(
            f"in_series must be given springs with a finite working range, got {type(spring).__name__} with ({low}, {high})"
        )
    lengths = np.linspace(low, high, 129)
    loads = np.array([float(spring.load(x)) for x in lengths])
    if not np.all(np.diff(loads) > 0):
        at = lengths[int(np.argmin(np.diff(loads)))]
        raise InputError(
            f"in_series must be given springs whose load grows with length, got {type(spring).__name__} "
            f"whose load does not grow at {at:.6g} m"
        )
    return _Law(loads, lengths, True, math.inf)


def _straight(loads: list[float], lengths: list[float], rate: float, high: float) -> _Law:
    if math.isfinite(high):
        loads = [*loads, loads[-1] + rate * (high - lengths[-1])]
        return _Law(np.array(loads), np.array([*lengths, high]), False, math.inf)
    return _Law(np.array(loads), np.array(lengths), False, float(rate))


def _length_at(spring: Any, law: _Law, load: float) -> float:
    """Length of one spring under a load within its law."""
    if load > law.loads[-1]:
        return float(law.lengths[-1] + (load - law.loads[-1]) / law.last_rate)
    if not law.curved:
        return float(np.interp(load, law.loads, law.lengths))
    from scipy.optimize import brentq

    piece = int(np.clip(np.searchsorted(law.loads, load) - 1, 0, law.loads.size - 2))
    low, high = law.lengths[piece], law.lengths[piece + 1]
    if load <= law.loads[piece]:
        return float(low)
    if load >= law.loads[piece + 1]:
        return float(high)
    return float(brentq(lambda x: float(spring.load(x)) - load, low, high, xtol=1e-15))


def _springs(value: Any) -> tuple[Any, ...]:
    springs = checked_springs(value, "SeriesSprings.springs")
    for spring in springs:
        for name, field in attrs.fields_dict(type(spring)).items() if attrs.has(type(spring)) else ():
            if "unit" in field.metadata and np.ndim(getattr(spring, name)) and not hasattr(spring, "lengths"):
                raise InputError(
                    f"SeriesSprings.springs must have single values, got an array as {type(spring).__name__}.{name}"
                )
    return springs


@attrs.frozen
class SeriesSprings:
    """Springs one behind the other, as one spring; make it with `in_series`."""

    springs: tuple[Spring, ...] = attrs.field(converter=_springs)
    """The springs, all under the same load at any time."""

    def __attrs_post_init__(self) -> None:
        self._table  # noqa: B018 - what cannot be put in series is refused at once

    @functools.cached_property
    def _table(self) -> Lookup:
        """Load over total length."""
        return _tabulated(self.springs, [_law(spring) for spring in self.springs])

    @functools.cached_property
    def _slope(self) -> Lookup:
        return self._table.derivative()

    @functools.cached_property
    def _work(self) -> Lookup:
        return self._table.antiderivative()

    @property
    def _pushes(self) -> bool:
        return float(self._table.coefficients[0, 0]) < 0

    @property
    def working_range(self) -> tuple[float, float]:
        """From where the chain carries load to where its first spring ends [m]."""
        last = float(self._table.breaks[-1])
        return float(self._table.breaks[0]), math.inf if self._endless else last

    @functools.cached_property
    def _endless(self) -> bool:
        return all(math.isinf(working_range_of(spring)[1]) for spring in self.springs)

    def _within(self, x: Carrier) -> Carrier:
        xp = namespace(x)
        return xp.minimum(xp.maximum(x, float(self._table.breaks[0])), float(self._table.breaks[-1]))

    def _where_loaded(self, x: Carrier, value: Carrier) -> Carrier:
        """``value`` where the chain is taut, 0 where it is slack, NaN beyond its end."""
        xp = namespace(x, value)
        first, last = float(self._table.breaks[0]), float(self._table.breaks[-1])
        if self._pushes:
            return xp.where(x >= last, 0.0, xp.where(x < first, math.nan, value))
        return xp.where(x <= first, 0.0, xp.where(x > last, math.nan, value))

    def load(self, x: Carrier) -> Carrier:
        """Load at total length ``x`` [N]; 0 when slack, NaN beyond the end of a spring."""
        return self._where_loaded(x, interpolate(self._within(x), self._table))

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load at ``x`` [N/m]."""
        return self._where_loaded(x, interpolate(self._within(x), self._slope))

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored at ``x`` [J], zero when slack."""
        work = interpolate(self._within(x), self._work)
        if self._pushes:
            work = work - float(self._work(float(self._work.breaks[-1])))
        return self._where_loaded(x, work)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band at ``x`` [N]: the springs' own bands, each weighed by its compliance."""
        return 0.0 * x if self._band is None else self._where_loaded(x, interpolate(self._within(x), self._band))

    @functools.cached_property
    def _band(self) -> Lookup | None:
        laws = [_law(spring) for spring in self.springs]
        lengths, bands = np.linspace(float(self._table.breaks[0]), min(float(self._table.breaks[-1]), 10.0), 257), []
        for x in lengths:
            load = float(self._table(float(x)))
            each = [_length_at(s, law, load) for s, law in zip(self.springs, laws, strict=True)]
            compliances = [
                1.0 / k if (k := float(s.stiffness(at))) > 0 else 0.0 for s, at in zip(self.springs, each, strict=True)
            ]
            widths = [float(hysteresis_of(s, at)) for s, at in zip(self.springs, each, strict=True)]
            total = sum(compliances)
            bands.append(sum(w * c for w, c in zip(widths, compliances, strict=True)) / total if total else 0.0)
        if not np.any(bands):
            return None
        rows = np.stack([bands[:-1], np.diff(bands) / np.diff(lengths)], axis=1)
        return Lookup(lengths, rows)


def _tabulated(springs: Sequence[Any], laws: Sequence[_Law]) -> Lookup:
    lowest, highest = max(float(law.loads[0]) for law in laws), math.inf
    for law in laws:
        if not math.isfinite(law.last_rate) or law.last_rate == 0.0:
            highest = min(highest, float(law.loads[-1]))
    if not lowest < highest:
        raise InputError(
            "in_series must be given springs that carry loads in common, got none: "
            "springs that pull and springs that push do not go in series"
        )
    open_end = math.isinf(highest)
    corners = {float(load) for law in laws if not law.curved for load in law.loads} | {lowest}
    corners |= set() if open_end else {highest}
    loads = sorted(load for load in corners if lowest <= load <= highest)
    if open_end:
        rate = 1.0 / sum(1.0 / law.last_rate for law in laws)
        loads.append(loads[-1] + rate * ENDLESS)

    def total(load: float) -> float:
        return sum(_length_at(spring, law, load) for spring, law in zip(springs, laws, strict=True))

    if any(law.curved for law in laws):
        table = _refined(loads, total, [_slope_of(springs, laws)])
    else:
        table = _pieces([total(load) for load in loads], loads)
    plateau = [float(law.loads[-1]) for law in laws if law.last_rate == 0.0]
    if plateau and highest == min(plateau):
        breaks = np.append(table.breaks, table.breaks[-1] + ENDLESS)
        flat = np.zeros((1, table.coefficients.shape[1]))
        flat[0, 0] = highest
        table = Lookup(breaks, np.concatenate([table.coefficients, flat]))
    return table


def _pieces(lengths: Sequence[float], loads: Sequence[float]) -> Lookup:
    """Straight pieces; where the length stands still the load jumps, and the upper load counts."""
    kept = [
        (x, f) for i, (x, f) in enumerate(zip(lengths, loads, strict=True)) if i + 1 == len(loads) or lengths[i + 1] > x
    ]
    xs, fs = np.array([x for x, _ in kept]), np.array([f for _, f in kept])
    return Lookup(xs, np.stack([fs[:-1], np.diff(fs) / np.diff(xs)], axis=1))


def _slope_of(springs: Sequence[Any], laws: Sequence[_Law]) -> Any:
    def slope(load: float, side: float) -> float:
        """Rate of the chain just beside a load [N/m]."""
        compliance = 0.0
        for spring, law in zip(springs, laws, strict=True):
            if law.curved:
                compliance += 1.0 / float(spring.stiffness(_length_at(spring, law, load)))
            else:
                near = load + side * 1e-9 * (abs(load) + 1e-9)
                at = int(np.searchsorted(law.loads, near))
                if at >= law.loads.size:
                    compliance += 1.0 / law.last_rate
                elif at > 0:
                    compliance += (law.lengths[at] - law.lengths[at - 1]) / (law.loads[at] - law.loads[at - 1])
        return 1.0 / compliance

    return slope


def _refined(loads: Sequence[float], total: Any, slopes: Sequence[Any]) -> Lookup:
    """Cubics with the right values and slopes, each halved until it errs by little enough."""
    slope = slopes[0]
    size = max(abs(loads[0]), abs(loads[-1]))
    pieces: list[tuple[float, list[float]]] = []
    todo = list(pairwise(loads))[::-1]
    end = total(loads[-1])
    while todo:
        a, b = todo.pop()
        xa, xb = total(a), total(b)
        if xb - xa <= 0:
            continue
        width, rise = xb - xa, b - a
        sa, sb = slope(a, 1.0), slope(b, -1.0)
        row = [a, sa, (3 * rise / width - 2 * sa - sb) / width, (sa + sb - 2 * rise / width) / width**2]
        u = total(0.5 * (a + b)) - xa
        error = abs(row[0] + u * (row[1] + u * (row[2] + u * row[3])) - 0.5 * (a + b))
        if error > ACCURACY * size and rise > 1e-6 * size:
            middle = 0.5 * (a + b)
            todo += [(middle, b), (a, middle)]
        else:
            pieces.append((xa, row))
    return Lookup([x for x, _ in pieces] + [end], [row for _, row in pieces])


def in_series(*springs: Spring) -> SeriesSprings:
    """Several springs one behind the other, as one spring.

    Every spring keeps its slack, preload and end: the chain moves as soon as its softest preload
    is passed, and ends where its first spring ends. A cable's own stretch is a spring in series:
    see `wire_rope`.

    Parameters
    ----------
    *springs
        One or more springs that all pull, or all push.

    Raises
    ------
    InputError, InputTypeError
        No spring; pulling and pushing springs mixed; array-valued springs; a spring of your own
        without a finite working range or whose load does not grow with length.

    Examples
    --------
    Two springs of 2 N/mm with 8 N and of 1 N/mm with 5 N of initial tension:

    >>> from springpoise.springs import ExtensionSpring
    >>> chain = in_series(
    ...     ExtensionSpring("2 N/mm", free_length=0.05, initial_tension=8),
    ...     ExtensionSpring("1 N/mm", free_length=0.05, initial_tension=5),
    ... )
    >>> round(chain.load(0.103), 9), round(chain.load(0.121), 9)
    (8.0, 20.0)
    """
    return SeriesSprings(springs)


def wire_rope(*, diameter: ScalarLike, fill: ScalarLike, modulus: ScalarLike, length: ScalarLike) -> ExtensionSpring:
    """A cable's own stretch, as a spring to be put in series.

    Parameters
    ----------
    diameter
        Outer diameter [m], > 0.
    fill
        Share of the circle that is metal [1], above 0 and at most 1.
    modulus
        Modulus of the rope as it is laid [Pa], > 0; lower than the wire's own.
    length
        Length without load [m], > 0.

    Returns
    -------
    ExtensionSpring
        Of rate modulus · fill · π/4 · diameter² / length.

    Raises
    ------
    InputError
        A value that is not positive, or a fill above 1.

    Examples
    --------
    >>> round(wire_rope(diameter="2 mm", fill=0.5, modulus="100 GPa", length="600 mm").rate, 1)
    261799.4
    """
    values = {
        "diameter": units.metre(diameter, "diameter"),
        "fill": units.number(fill, "fill"),
        "modulus": units.pascal(modulus, "modulus"),
        "length": units.metre(length, "length"),
    }
    for name, value in values.items():
        if not value > 0:
            raise InputError(f"{name} must be > 0, got {value}")
    if values["fill"] > 1:
        raise InputError(f"fill must be above 0 and at most 1, got {values['fill']}")
    area = values["fill"] * math.pi / 4 * values["diameter"] ** 2
    return ExtensionSpring(values["modulus"] * area / values["length"], free_length=values["length"])

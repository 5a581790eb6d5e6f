"""Springs one behind the other: the same load, lengths add.

Each spring's length is a function of the load; their sum, turned round, is the law of the chain.
It is stored as a table: exactly, where the springs are piecewise linear, and otherwise as cubics
with the right slopes, refined until the load errs by less than 1e-9 of its greatest value.
"""

from __future__ import annotations

import functools
import math
from collections.abc import Callable, Sequence
from itertools import pairwise
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, interpolate, namespace
from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.springs.extension import ExtensionSpring
from springpoise.springs.parallel import checked_springs
from springpoise.springs.protocol import Spring, hysteresis_of, working_range_of
from springpoise.springs.series_laws import Law, law_of
from springpoise.units import ScalarLike

__all__ = ["SeriesSprings", "in_series", "wire_rope"]

Array = NDArray[np.float64]

ACCURACY = 1e-9
"""Error of a tabulated load over its greatest value [1]."""

ENDLESS = 1e3
"""A spring without a limit is tabulated this much further [m]; its last piece is straight and exact."""


def _springs(value: Any) -> tuple[Any, ...]:
    springs = checked_springs(value, "SeriesSprings.springs")
    # A chain within a chain is one longer chain.
    springs = tuple(link for s in springs for link in (s.springs if isinstance(s, SeriesSprings) else (s,)))
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
        return _tabulated([law_of(spring) for spring in self.springs])

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
        laws = [law_of(spring) for spring in self.springs]
        lengths, bands = np.linspace(float(self._table.breaks[0]), min(float(self._table.breaks[-1]), 10.0), 257), []
        for x in lengths:
            load = float(self._table(float(x)))
            each = [law.length_at(load) for law in laws]
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


def _tabulated(laws: Sequence[Law]) -> Lookup:
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
    corners = {float(load) for law in laws for load in (law.loads if not law.curved else _jumps_of(law))} | {lowest}
    corners |= set() if open_end else {highest}
    loads = sorted(load for load in corners if lowest <= load <= highest)
    if open_end:
        rate = 1.0 / sum(1.0 / law.last_rate for law in laws)
        loads.append(loads[-1] + rate * ENDLESS)

    def total(load: float) -> float:
        return sum(law.length_at(load) for law in laws)

    if any(law.curved for law in laws):
        table = _refined(loads, total, lambda load, side: 1.0 / sum(law.compliance(load, side) for law in laws))
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


def _jumps_of(law: Law) -> list[float]:
    """Loads between which a curved spring's length stands still."""
    still = np.flatnonzero(np.diff(law.lengths) == 0)
    return [float(law.loads[i]) for at in still for i in (at, at + 1)]


def _refined(loads: Sequence[float], total: Callable[[float], float], slope: Callable[[float, float], float]) -> Lookup:
    """Cubics with the right values and slopes, each halved until it errs by little enough."""
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

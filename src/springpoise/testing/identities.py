"""Comparing two ways to one number, at many places and on every carrier."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.carriers import joints_of
from springpoise.errors import InputError, InputTypeError, SpringpoiseError
from springpoise.linkages.protocol import Linkage
from springpoise.mechanism.travel import spread
from springpoise.tables import facts

__all__ = ["Array", "Check", "Identity", "IdentityError", "IdentityReport", "joints_over"]

Array = NDArray[np.float64]

PLACES = 64
"""Places at which an identity is tried where a range is given [1]."""


class IdentityError(SpringpoiseError, AssertionError):
    """Something that must be true of every spring, path or linkage is not true of this one."""


@attrs.frozen
class Identity:
    """One thing that was found to be true."""

    name: str
    """What must be equal to what."""
    difference: float
    """Worst difference over the greatest value [1]."""


@attrs.frozen
class IdentityReport:
    """What was checked of an object, and how well it holds."""

    subject: str
    """Name of the object's class."""
    identities: tuple[Identity, ...]
    """All that was checked, in order."""
    places: int
    """Number of lengths or poses at which it was [1]."""

    def __str__(self) -> str:
        rows = [(identity.name, f"within {identity.difference:.1e}") for identity in self.identities]
        return f"{self.subject} at {self.places} places\n{facts(rows)}"


class Check:
    """What is being checked, where, and what has been found so far."""

    def __init__(self, subject: str, variable: str, places: Sequence[Array], tolerance: float) -> None:
        if isinstance(tolerance, bool) or not isinstance(tolerance, int | float) or not tolerance > 0:
            raise InputError(f"tolerance must be > 0, got {tolerance!r}")
        self.subject, self.variable, self.places, self.tolerance = subject, variable, list(places), tolerance
        self.size: Any = 0.0  # values whose greatest any difference may be compared with
        self.found: dict[str, float] = {}

    def posed(self, method: Callable[..., Any], linkage: Linkage) -> Callable[..., Any]:
        """A method of linkage and pose as a function of the joints, one by one."""
        return lambda *q: method(linkage, q[0] if len(q) == 1 else q)

    def values(self, name: str, function: Callable[..., Any], rows: int | None = None) -> Array:
        """Values at all places; for a function with several results, one row each."""
        with np.errstate(all="ignore"):
            found = self._called(f"take arrays in {name}", function, *self.places)
        if rows is None:
            return np.broadcast_to(np.asarray(found, dtype=np.float64), self.places[0].shape)
        if not isinstance(found, tuple) or len(found) != rows:
            raise IdentityError(f"{self.subject} must give {rows} components in {name}, got {found!r}")
        return np.array([np.broadcast_to(np.asarray(item, dtype=np.float64), self.places[0].shape) for item in found])

    def slope(self, name: str, function: Callable[..., Any], moved: int) -> Array:
        """Exact derivative by one of the arguments: the formula itself is differentiated."""
        from springpoise.tape import derivative_of

        def along(x: Any) -> Any:
            return function(*(x if i == moved else place for i, place in enumerate(self.places)))

        task = f"let the formula of {name} be differentiated"
        return np.asarray(self._called(task, derivative_of, along, self.places[moved])[1], dtype=np.float64)

    def equal(self, name: str, what: str, ours: Any, other: str, theirs: Any, *, scale: Any = 0.0) -> None:
        """Notes how well two arrays agree, or raises."""
        ours, theirs = np.broadcast_arrays(np.asarray(ours, dtype=np.float64), np.asarray(theirs, dtype=np.float64))
        scales = (ours, theirs, np.asarray(scale, float), np.asarray(self.size, float))
        sizes = [np.max(np.abs(v), initial=0.0, where=np.isfinite(v)) for v in scales]
        scale_of_all = max(*sizes) or 1.0
        with np.errstate(invalid="ignore"):
            same = (ours == theirs) | (np.isnan(ours) & np.isnan(theirs))
            apart = np.where(same, 0.0, np.abs(ours - theirs) / scale_of_all)
        apart = np.where(np.isnan(apart), math.inf, apart)
        worst = float(np.max(apart, initial=0.0))
        if worst > self.tolerance:
            at = np.unravel_index(int(np.argmax(apart)), apart.shape)
            where = self._place(int(at[-1])) if apart.ndim else ""
            raise IdentityError(
                f"{self.subject} breaks '{name}': {what} must be {other}, got {ours[at]:.9g} against "
                f"{theirs[at]:.9g}{where}"
            )
        self.found[name] = max(self.found.get(name, 0.0), worst)

    def carriers(self, name: str, function: Callable[..., Any], *, through_nan: bool = True) -> None:
        """Arrays, floats, recordings and NaN through the same formula."""
        from springpoise.tape import record

        whole = self._listed(function(*self.places), self.places[0].shape)
        alone = np.moveaxis(
            np.array([self._listed(self._called(f"take floats in {name}", function, *pose)) for pose in self._poses()]),
            0,
            -1,
        )
        self.equal("arrays are one by one", f"{name} of an array", whole, "that of floats", alone)
        inputs = [f"{self.variable}{i}" for i in range(len(self.places))]
        program = self._called(f"let {name} be recorded", record, function, inputs)
        plain = program.python_function()
        recorded = np.moveaxis(np.array([self._listed(plain(*pose)) for pose in self._poses()]), 0, -1)
        self.equal("recorded is computed", f"{name} as recorded", recorded, "as computed", alone)
        blocked = self._listed(program.numpy_function()(*self.places), self.places[0].shape)
        self.equal("recorded is computed", f"{name} as recorded on arrays", blocked, "as computed", alone)
        if through_nan:
            self._nans(name, function, whole)

    def _nans(self, name: str, function: Callable[..., Any], whole: Array) -> None:
        """NaN where a value that varies is asked for at NaN, alone or among others."""
        with np.errstate(all="ignore"):
            varies = np.array([np.ptp(row[np.isfinite(row)]) > 0 if np.isfinite(row).any() else False for row in whole])
            lone = self._listed(self._called(f"take NaN in {name}", function, *[math.nan] * len(self.places)))
            holed = [np.where(np.arange(place.size) == 1, math.nan, place) for place in self.places]
            among = self._listed(self._called(f"take NaN in {name}", function, *holed), self.places[0].shape)
        wanted = np.where(varies, math.nan, lone)
        self.equal("NaN gives NaN", f"{name} at NaN", lone, "NaN", wanted)
        kept = whole.copy()
        kept[varies, 1] = math.nan
        kept[~varies, 1] = among[~varies, 1]
        self.equal("NaN gives NaN", f"{name} beside NaN", among, "NaN there only", kept)

    def report(self) -> IdentityReport:
        """All that holds."""
        identities = tuple(Identity(name, difference) for name, difference in self.found.items())
        return IdentityReport(self.subject, identities, self.places[0].size)

    def _poses(self) -> list[tuple[float, ...]]:
        return list(zip(*(place.tolist() for place in self.places), strict=True))

    def _listed(self, value: Any, shape: tuple[int, ...] = ()) -> Array:
        items = value if isinstance(value, tuple) else (value,)
        return np.array([np.broadcast_to(np.asarray(item, dtype=np.float64), shape) for item in items])

    def _place(self, index: int) -> str:
        at = ", ".join(f"{place[index % place.size]:.9g}" for place in self.places)
        return f" at {self.variable} = {at if len(self.places) == 1 else f'({at})'}"

    def _called(self, task: str, function: Callable[..., Any], *args: Any) -> Any:
        try:
            with np.errstate(all="ignore"):
                return function(*args)
        except (TypeError, ValueError, AttributeError, ArithmeticError, LookupError) as error:
            raise IdentityError(
                f"{self.subject} must {task}, got {type(error).__name__}: {error}; take functions from NumPy or from "
                "springpoise.carriers.namespace, and where() instead of if"
            ) from error


def _places(over: Any, share: Array) -> Array:
    """Places at these shares of a range; or the array itself."""
    if isinstance(over, np.ndarray):
        if over.ndim != 1 or over.size < 2 or not np.all(np.isfinite(over)):
            raise InputError(f"over must be two finite places or more, got an array of shape {over.shape}")
        return over.astype(np.float64)
    if not (isinstance(over, Sequence) and len(over) == 2 and all(isinstance(end, int | float) for end in over)):
        raise InputTypeError(f"over must be a range (from, to), or a NumPy array, got {over!r}")
    low, high = over
    if not (math.isfinite(low) and math.isfinite(high) and low < high):
        raise InputError(f"over must be (lower, higher), got {over!r}")
    return np.asarray(low + (high - low) * share)


def joints_over(over: Any, count: int) -> tuple[Array, ...]:
    """Places of each joint."""
    shares = spread(PLACES + 1, count)[1:].T  # the first is the middle, where a spring might have its kink
    if isinstance(over, np.ndarray):
        if count > 1 and (over.ndim != 2 or over.shape[1] != count):
            raise InputError(f"over must be of shape (N, {count}) for {count} joints, got {over.shape}")
        return tuple(_places(np.asarray(column), shares[0]) for column in joints_of(over, count))
    if count == 1:
        return (_places(over, shares[0]),)
    if not isinstance(over, Sequence) or len(over) != count:
        raise InputError(f"over must be a range for each of {count} joints, got {over!r}")
    return tuple(_places(one, share) for one, share in zip(over, shares, strict=True))

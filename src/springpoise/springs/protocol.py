"""What a spring is to the rest of the library."""

from __future__ import annotations

import math
from typing import Any, NamedTuple, Protocol

from springpoise.carriers import Carrier
from springpoise.errors import InputTypeError

__all__ = ["FittableSpring", "LoadTerms", "Spring", "hysteresis_of", "spring_like", "working_range_of"]


class Spring(Protocol):
    """Three methods of the spring's own coordinate ``x``: a length [m], or an angle [rad].

    ``x`` is a float, an array of any shape, or a recorded variable; the result has its shape.
    Formulas take their functions from ``springpoise.carriers.namespace(x)`` or from NumPy.

    Two more members are used where a spring has them: ``hysteresis(x)``, the half-width of the
    band between loading and unloading [N or N·m], not negative, taken as zero otherwise; and
    ``working_range``, a pair (lowest, highest) of ``x``, taken as unlimited otherwise.
    """

    def load(self, x: Carrier) -> Carrier:
        """Load [N, or N·m for an angle]; positive pulls the ends together."""
        ...

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load [N/m, or N·m/rad]."""
        ...

    def energy(self, x: Carrier) -> Carrier:
        """Stored energy [J], whose slope is the load."""
        ...


class LoadTerms(NamedTuple):
    """A spring's load as a sum that is linear in what a solver may choose."""

    fixed: Carrier
    """Load that stays whatever is chosen [N, or N·m]."""
    terms: tuple[Carrier, ...]
    """Load for one unit of each unknown [N, or N·m]."""
    may_be_negative: tuple[bool, ...]
    """For each unknown, whether it may be negative."""


class FittableSpring(Spring, Protocol):
    """A spring whose rate and preload a solver may choose; optional for springs of your own."""

    def load_terms(self, x: Carrier, *, preload: bool) -> LoadTerms:
        """The load at ``x`` as a sum linear in the unknowns; with ``preload`` it may be chosen too."""
        ...

    def tuned(self, amounts: tuple[float, ...], *, preload: bool) -> Spring:
        """The spring with these amounts of its unknowns."""
        ...


def hysteresis_of(spring: Spring, x: Carrier) -> Carrier:
    """The spring's own half-width of its loading band at ``x``, or zero where it states none."""
    own: Any = getattr(spring, "hysteresis", None)
    return 0.0 if own is None else own(x)


def working_range_of(spring: Spring) -> tuple[float, float]:
    """The spring's own working range, or an unlimited one where it states none."""
    own = getattr(spring, "working_range", None)
    return (-math.inf, math.inf) if own is None else own


def spring_like(value: Any, name: str) -> Any:
    """``value``, once it is known to have a spring's three methods."""
    missing = [method for method in ("load", "stiffness", "energy") if not callable(getattr(value, method, None))]
    if missing or isinstance(value, type):
        what = f"the class {value.__name__}, not an object of it" if isinstance(value, type) else repr(value)
        lacking = f"; it lacks {', '.join(missing)}" if missing else ""
        raise InputTypeError(f"{name} must have load, stiffness and energy methods, got {what}{lacking}")
    return value

"""Springs that share one length: loads add."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputTypeError
from springpoise.springs.protocol import Spring, hysteresis_of, working_range_of

__all__ = ["OffsetSpring", "ParallelSprings", "checked_springs", "in_parallel"]


def checked_springs(springs: Any, owner: str) -> tuple[Any, ...]:
    """The springs as a tuple, each with a spring's three methods."""
    items = tuple(springs)
    if not items:
        raise InputTypeError(f"{owner} must be at least one spring, got none")
    for item in items:
        missing = [name for name in ("load", "stiffness", "energy") if not callable(getattr(item, name, None))]
        if missing or isinstance(item, type):
            raise InputTypeError(f"{owner} must have load, stiffness and energy methods, got {item!r}")
    return items


@attrs.frozen(field_transformer=units.named_fields)
class OffsetSpring:
    """A spring that is reached through a rigid part: it is ``by`` shorter than the whole.

    In parallel with another it makes a staged pair: the second begins to pull where its gap has closed.

    Examples
    --------
    >>> from springpoise.springs import ExtensionSpring
    >>> OffsetSpring(ExtensionSpring(1000, free_length=0.1), by="20 mm").load(0.13)
    10.0
    """

    spring: Spring
    """The spring itself."""
    by: Carrier = attrs.field(converter=units.metre, kw_only=True)
    """Length of the rigid part or gap [m]."""

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        """The spring's own working range, moved [m]."""
        low, high = working_range_of(self.spring)
        return low + self.by, high + self.by

    def load(self, x: Carrier) -> Carrier:
        """Load at the whole length ``x`` [N]; positive pulls the ends together."""
        return self.spring.load(x - self.by)

    def stiffness(self, x: Carrier) -> Carrier:
        """Slope of the load [N/m]."""
        return self.spring.stiffness(x - self.by)

    def energy(self, x: Carrier) -> Carrier:
        """Energy stored [J]."""
        return self.spring.energy(x - self.by)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Half-width of the loading band [N]."""
        return hysteresis_of(self.spring, x - self.by)


def _springs(value: Any) -> tuple[Any, ...]:
    return checked_springs(value, "ParallelSprings.springs")


@attrs.frozen
class ParallelSprings:
    """Springs between the same two ends: each keeps its own slack, preload and gap."""

    springs: tuple[Spring, ...] = attrs.field(converter=_springs)
    """The springs, all of the same length (or angle) at any time."""

    @property
    def working_range(self) -> tuple[float, float]:
        """From where the first one pulls to where the first one ends [m or rad]."""
        lows, highs = zip(*(working_range_of(spring) for spring in self.springs), strict=True)
        return float(np.min(lows)), float(np.min(highs))

    def load(self, x: Carrier) -> Carrier:
        """Sum of the loads at ``x`` [N, or N·m]."""
        return sum(spring.load(x) for spring in self.springs)

    def stiffness(self, x: Carrier) -> Carrier:
        """Sum of the slopes at ``x`` [N/m, or N·m/rad]."""
        return sum(spring.stiffness(x) for spring in self.springs)

    def energy(self, x: Carrier) -> Carrier:
        """Sum of the energies at ``x`` [J]."""
        return sum(spring.energy(x) for spring in self.springs)

    def hysteresis(self, x: Carrier) -> Carrier:
        """Sum of the half-widths of the loading bands at ``x`` [N, or N·m]."""
        return sum(hysteresis_of(spring, x) for spring in self.springs)


def in_parallel(*springs: Spring) -> ParallelSprings:
    """Several springs between the same two ends, as one spring.

    Parameters
    ----------
    *springs
        One or more springs of any kinds. Wrap one in `OffsetSpring` where it begins to pull later.

    Raises
    ------
    InputTypeError
        No spring, or something that is none.

    Examples
    --------
    >>> from springpoise.springs import ConstantForceSpring, ZeroLengthSpring
    >>> in_parallel(ZeroLengthSpring(200), ConstantForceSpring(5)).load(0.1)
    25.0
    """
    return ParallelSprings(springs)

"""The single springs inside a mount's spring, each with its own length and load."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, NamedTuple

from springpoise.errors import InputError
from springpoise.springs import OffsetSpring, ParallelSprings, ScaledSpring, SeriesSprings

__all__ = ["Inside", "single_springs"]


class Inside(NamedTuple):
    """A single spring and what it does."""

    spring: Any
    """The spring."""
    load: Any
    """Its load [N, or N·m]."""
    length: Any
    """Its own length [m], or angle [rad]; None inside a chain of springs, where it follows from the load."""


def single_springs(spring: Any, x: Any) -> Iterator[Inside]:
    """The single springs inside a spring at its length ``x``, with their loads.

    Raises
    ------
    InputError
        Springs side by side that are one link of a chain: what each of them carries is not known.
    """
    if isinstance(spring, ParallelSprings):
        for one in spring.springs:
            yield from single_springs(one, x)
    elif isinstance(spring, OffsetSpring):
        yield from single_springs(spring.spring, x - spring.by)
    elif isinstance(spring, ScaledSpring):
        yield from single_springs(spring.spring, x)
    elif isinstance(spring, SeriesSprings):
        yield from _under(spring, spring.load(x))
    else:
        yield Inside(spring, spring.load(x), x)


def _under(spring: Any, load: Any) -> Iterator[Inside]:
    if isinstance(spring, SeriesSprings):
        for one in spring.springs:
            yield from _under(one, load)
    elif isinstance(spring, OffsetSpring):
        yield from _under(spring.spring, load)
    elif isinstance(spring, ScaledSpring):
        yield from _under(spring.spring, load / spring.factor)
    elif isinstance(spring, ParallelSprings):
        if len(spring.springs) > 1:
            raise InputError(
                f"springs side by side inside a chain cannot be judged one by one, got {len(spring.springs)} of them; "
                "mount them on paths of their own"
            )
        for one in spring.springs:
            yield from _under(one, load)
    else:
        yield Inside(spring, load, None)

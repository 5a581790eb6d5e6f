"""Mounts that a stock search found, rounded to what can be drilled and cut."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable, Iterator
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.balance import StockCandidate, residual
from springpoise.errors import InputError
from springpoise.guard.solving.requests import StockRequest
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, Disc

__all__ = ["drilled", "lack"]

SAME = 1e-7
"""A value that is so near to a multiple of the step, in steps, is one [1]."""

ROUNDING = 1e-9
"""What is asked for may be missed by so much: metres of length, a share of the residual."""


def drilled(found: StockCandidate, request: StockRequest, limit: float) -> tuple[tuple[SpringMount, ...], str | None]:
    """The candidate's mounts, the new one named, with coordinates and cable on multiples of the resolution.

    Of the multiples to both sides of each value they are the nearest with which the spring still keeps
    the request's margin and, over its poses, the worst residual ``limit`` [N·m]. Where there are none,
    the nearest of all, with what they lack in words.
    """
    *others, last = found.mechanism.springs
    step = request.resolution
    choices: list[list[tuple[int, float]]] = []

    def looked_at(value: float) -> float:
        choices.append(list(_multiples(value / step)))
        return value

    _each(last, looked_at)
    nearest = None
    # The sum of a choice's moves squared is how far it is from the mount that was found.
    for choice in sorted(itertools.product(*choices), key=lambda one: sum(move**2 for _, move in one)):
        mounts = *others, attrs.evolve(_taking(last, [_written(whole * step) for whole, _ in choice]), name=found.part)
        lacks = lack(found.mechanism.with_springs(mounts), request, limit)
        if lacks is None:
            return mounts, None
        nearest = nearest or (mounts, lacks)
    assert nearest is not None
    return nearest


def lack(mechanism: Mechanism, request: StockRequest, limit: float) -> str | None:
    """What the last spring of a mechanism lacks of what the request asks for, in words; None for nothing."""
    q = mechanism.poses(request.poses)
    try:
        worst = residual(mechanism, q).worst
    except InputError:  # an end of the cable is inside the pulley at some pose
        return "its cable does not reach the arm at every pose"
    if worst > limit * (1.0 + ROUNDING):
        return f"its worst residual is {worst - limit:.3g} N*m above the limit"
    mount = mechanism.springs[-1]
    spring: Any = mount.spring
    length = np.asarray(mount.spring_length(mechanism.linkage, q))
    slack, stretch = float(length.min()) - spring.free_length, spring.longest - float(length.max())
    least = request.least_margin
    if not slack > 0.0 or min(slack, stretch) < least - ROUNDING:
        return f"its spring comes within {1e3 * min(slack, stretch):.3g} mm of an end of its lengths"
    return "its spring does not fit in front of the pulley" if length.max() > _room(mount.path) + ROUNDING else None


def _room(path: Any) -> float:
    """Length that a spring at a cable's first end may take before it meets the pulley [m]; infinite without one."""
    end, disc = path.along[:2] if isinstance(path, Cable) else (None, None)
    if not isinstance(end, Point) or not isinstance(disc, Disc):
        return math.inf
    away = math.dist(disc.centre.at, end.at)
    return math.sqrt(max(away**2 - disc.radius**2, 0.0))


def _each(part: Any, change: Callable[[float], float]) -> Any:
    """A mount, or a part of one, with every coordinate and the length of cable changed."""
    if isinstance(part, SpringMount):
        return attrs.evolve(part, path=_each(part.path, change), rigid_length=change(part.rigid_length))
    if isinstance(part, Point):
        return attrs.evolve(part, at=(change(part.at[0]), change(part.at[1])))
    if isinstance(part, Cable):
        return Cable(*(_each(element, change) for element in part.along))
    names = [field.name for field in attrs.fields(type(part)) if isinstance(getattr(part, field.name), Point)]
    return attrs.evolve(part, **{name: _each(getattr(part, name), change) for name in names})


def _taking(mount: SpringMount, values: Iterable[float]) -> SpringMount:
    """The mount with these coordinates and this length of cable, in the order of ``_each``."""
    left = iter(values)
    changed: SpringMount = _each(mount, lambda _: next(left))
    return changed


def _multiples(value: float) -> Iterator[tuple[int, float]]:
    """Whole numbers to both sides of a value, each with how far it is away."""
    for whole in (math.floor(value), math.ceil(value)) if abs(value - round(value)) > SAME else (round(value),):
        yield whole, whole - value


def _written(value: float) -> float:
    """A length as it reads when a person writes it in mm."""
    return units.parse(f"{1e3 * value + 0.0:.10g} mm", "m")

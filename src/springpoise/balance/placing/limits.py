"""What a placed spring has to keep to, pose by pose, on any carrier."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from typing import Any, NamedTuple

import attrs
import numpy as np

from springpoise.carriers import Carrier, distance, namespace
from springpoise.errors import InputTypeError
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism
from springpoise.paths import Cable, JointTravel, Straight
from springpoise.springs.protocol import working_range_of

__all__ = ["Box", "Limit", "Rules", "limits_of", "point_of", "worst_of"]

Box = tuple[tuple[float, float], tuple[float, float]]

LENGTH = 0.1
"""A length that matters [m]: what margins in length are measured with when they are weighed."""


class Limit(NamedTuple):
    """One requirement at each pose: ``value`` at least, or at most, ``allowed``."""

    name: str
    unit: str
    scale: float
    """What its margin is divided by before it is weighed against others."""
    value: Carrier
    allowed: Carrier
    side: str
    """``"at least"`` or ``"at most"``."""

    @property
    def margin(self) -> Carrier:
        """How far inside; negative outside."""
        return self.value - self.allowed if self.side == "at least" else self.allowed - self.value


@attrs.frozen
class Rules:
    """The requirements of one placement."""

    least_margin: float | None
    """What springs keep from both ends of their working range [m or rad]; None for nothing."""
    pivot_load: float | None
    """Greatest load of any pivot [N]."""
    stored_energy: float | None
    """Greatest energy in all springs [J]."""
    keep_in: tuple[tuple[Any, Box], ...] = ()
    """Points, or functions of the knobs that give one, and the box each stays in."""
    keep_out: tuple[tuple[Point, float], ...] = ()
    """Centres and radii of discs that springs and points stay out of."""
    others: tuple[Callable[[Mechanism, Carrier], Limit], ...] = ()
    """Requirements of a caller within the library."""


def limits_of(mechanism: Mechanism, q: Carrier, rules: Rules, knobs: Mapping[str, Carrier]) -> list[Limit]:
    """All requirements at the poses ``q``."""
    found = list(_spring_lengths(mechanism, q, rules.least_margin))
    if rules.pivot_load is not None:
        loads = mechanism._pivot_loads(q)
        names = getattr(mechanism.linkage, "pivots", ("pivot",))
        for name, load in zip(names, loads, strict=True):
            what = "pivot load" if len(loads) == 1 else f"pivot load of {name}"
            found.append(Limit(what, "N", rules.pivot_load, load, rules.pivot_load, "at most"))
    if rules.stored_energy is not None:
        energy = mechanism.spring_energy(q)
        found.append(Limit("stored energy", "J", rules.stored_energy, energy, rules.stored_energy, "at most"))
    named = [(_name_of(what), point_of(what, knobs), box) for what, box in rules.keep_in]
    for name, point, box in named:
        found += _inside(name, mechanism.linkage.position(point, q), box)
    for number, (centre, radius) in enumerate(rules.keep_out, start=1):
        middle = mechanism.linkage.position(centre, q)
        for name, start, end in [*_lines(mechanism, q), *_alone(mechanism, q, named)]:
            value = _away(middle, start, end)
            found.append(Limit(f"{name}: distance to disc {number}", "m", LENGTH, value, radius, "at least"))
    found += [one(mechanism, q) for one in rules.others]
    return found


def point_of(what: Any, knobs: Mapping[str, Carrier]) -> Point:
    """The point that a key of ``keep_in`` means."""
    point = what if isinstance(what, Point) else what(**knobs)
    if not isinstance(point, Point):
        raise InputTypeError(f"keep_in must name Points or functions of the knobs that give one, got {point!r}")
    return point


def _name_of(what: Any) -> str:
    if isinstance(what, Point):
        return f"point of {what.body} at {what.at}"
    name = getattr(what, "__name__", "point")
    return "point from the knobs" if name == "<lambda>" else name


def _is_open(end: Any) -> bool:
    return isinstance(end, float) and math.isinf(end)


def _spring_lengths(mechanism: Mechanism, q: Carrier, margin: float | None) -> Iterator[Limit]:
    """Every spring within its working range."""
    for i, mount in enumerate(mechanism.springs if margin is not None else ()):
        assert margin is not None
        low, high = working_range_of(mount.spring)
        unit, scale = ("rad", 1.0) if isinstance(mount.path, JointTravel) else ("m", LENGTH)
        if _is_open(low) and _is_open(high):
            continue
        x = mount.spring_length(mechanism.linkage, q)
        name = mechanism.mount_name(i)
        if not _is_open(low):
            yield Limit(f"{name}: shortest length", unit, scale, x, low + margin, "at least")
        if not _is_open(high):
            yield Limit(f"{name}: greatest length", unit, scale, x, high - margin, "at most")


def _inside(name: str, place: tuple[Carrier, ...], box: Box) -> Iterator[Limit]:
    for axis, value, (low, high) in zip("xy", place, box, strict=False):
        if not _is_open(low):
            yield Limit(f"{name}: {axis}", "m", LENGTH, value, low, "at least")
        if not _is_open(high):
            yield Limit(f"{name}: {axis}", "m", LENGTH, value, high, "at most")


def _lines(mechanism: Mechanism, q: Carrier) -> Iterator[tuple[str, Any, Any]]:
    """The straight springs from end to end; of cables the ends alone."""
    for i, mount in enumerate(mechanism.springs):
        name, path = mechanism.mount_name(i), mount.path
        if isinstance(path, Straight):
            first, last = (mechanism.linkage.position(point, q) for point in path.ends)
            yield name, first, last
        elif isinstance(path, Cable):
            for which, end in (("first end", path.along[0]), ("last end", path.along[-1])):
                if isinstance(end, Point):
                    place = mechanism.linkage.position(end, q)
                    yield f"{name}, {which}", place, place


def _alone(mechanism: Mechanism, q: Carrier, named: Any) -> Iterator[tuple[str, Any, Any]]:
    for name, point, _ in named:
        place = mechanism.linkage.position(point, q)
        yield name, place, place


def _away(middle: Any, start: Any, end: Any) -> Carrier:
    """Distance of a point from a line between two others [m]."""
    if start is end:
        return distance(*(m - s for m, s in zip(middle, start, strict=True)))
    run = [e - s for s, e in zip(start, end, strict=True)]
    back = [m - s for s, m in zip(start, middle, strict=True)]
    square: Carrier = 1e-300
    dot: Carrier = 0.0
    for a, b in zip(run, back, strict=True):
        square = square + a * a
        dot = dot + a * b
    share = dot / square
    xp = namespace(share)
    share = xp.minimum(xp.maximum(share, 0.0), 1.0)
    return distance(*(b - share * a for a, b in zip(run, back, strict=True)))


def worst_of(limit: Limit, q: Any) -> tuple[float, float, float, Any]:
    """Margin, value, what is allowed and pose where a limit on numbers is nearest."""
    margin, value, allowed = (
        np.broadcast_to(np.asarray(each, dtype=np.float64), len(q))
        for each in (limit.margin, limit.value, limit.allowed)
    )
    at = int(np.argmin(np.where(np.isfinite(margin), margin, -math.inf)))
    pose = float(q[at]) if q.ndim == 1 else tuple(q[at].tolist())
    return float(margin[at]), float(value[at]), float(allowed[at]), pose

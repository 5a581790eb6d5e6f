"""Points of a mechanism that an adjusting screw can move, and how far they have to go."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm, Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, Disc, Straight
from springpoise.springs import ZeroLengthSpring

__all__ = ["Slide", "slides_of"]

Array = NDArray[np.float64]

ROUNDING = 1e-12
"""What is left over the scale of its parts that counts as balanced [1]."""

TRIED = 41
"""Shifts that are tried before the best of them is refined."""

STRETCHED = 6
"""How often the range of shifts is widened while its end is the best, where no range was given."""


@attrs.frozen
class Slide:
    """A point that moves along a line, with all that is fixed to it."""

    index: int
    """Number of the mount, from 0."""
    place: str
    """``"anchor"`` on the ground, ``"attachment"`` on a moving body."""
    body: str
    """Name of the body that carries the point."""
    at: complex
    """Where the point is now, in that body's frame [m]."""
    along: complex
    """Unit direction in which it moves."""

    def place_after(self, shift: float) -> tuple[float, float]:
        """Where the point is after a shift [m]."""
        there = self.at + shift * self.along
        return there.real, there.imag

    def moved(self, mechanism: Mechanism, shift: float) -> Mechanism:
        """The mechanism with the point moved by ``shift`` [m]; a cable keeps the length of what does not stretch."""
        step = shift * self.along
        mounts = list(mechanism.springs)
        mounts[self.index] = attrs.evolve(mounts[self.index], path=_moved(mounts[self.index].path, self.body, step))
        return mechanism.with_springs(mounts)

    def shift_for(self, mechanism: Mechanism, q: Array, reach: tuple[float, float] | None) -> float:
        """The shift that leaves the least [m]: in closed form where that is exact, otherwise for the worst of the poses."""
        exact = self._in_closed_form(mechanism)
        if exact is not None:
            return exact if reach is None else min(max(exact, reach[0]), reach[1])
        return self._searched(mechanism, q, reach)

    def exact_place(self, mechanism: Mechanism) -> tuple[float, float] | None:
        """Where the point would have to be for an exact balance at every angle [m]; None where that is not known.

        For springs of zero free length straight between ground and arm, rate · conj(a) · b has to
        be what the masses and the other springs ask for.
        """
        asked = self._asked(mechanism)
        if asked is None:
            return None
        lacking, other, _ = asked
        place = (lacking / other).conjugate() if self.place == "anchor" else lacking / other.conjugate()
        return place.real, place.imag

    def _asked(self, mechanism: Mechanism) -> tuple[complex, complex, float] | None:
        """What rate · conj(a) · b has to be [N·m], rate times the point that stays [N], and the scale of it all."""
        if not isinstance(mechanism.linkage, Arm):
            return None
        there = []
        for mount in mechanism.springs:
            ends = _straight_ends(mount)
            if ends is None:
                return None
            there.append((mount.count * float(mount.spring.rate), *ends))  # type: ignore[attr-defined]
        gx, gy = mechanism.gravity
        lacking = -complex(gx, -gy) * complex(*mechanism.linkage.moment)
        scale = abs(lacking)
        for index, (rate, anchor, attach) in enumerate(there):
            scale += abs(rate * anchor * attach)
            if index != self.index:
                lacking -= rate * anchor.conjugate() * attach
        rate, anchor, attach = there[self.index]
        other = rate * (attach if self.place == "anchor" else anchor)
        return (lacking, other, scale) if other != 0 else None

    def _in_closed_form(self, mechanism: Mechanism) -> float | None:
        asked = self._asked(mechanism)
        if asked is None:
            return None
        lacking, other, scale = asked
        if self.place == "anchor":
            now, step = self.at.conjugate() * other, self.along.conjugate() * other
        else:
            now, step = other.conjugate() * self.at, other.conjugate() * self.along
        if abs(lacking - now) <= ROUNDING * scale:
            return 0.0
        shift = float(((lacking - now) * step.conjugate()).real / abs(step) ** 2)
        return shift if abs(lacking - now - shift * step) <= ROUNDING * scale else None

    def _searched(self, mechanism: Mechanism, q: Array, reach: tuple[float, float] | None) -> float:
        from scipy.optimize import minimize_scalar

        def worst(shift: float) -> float:
            torque = np.abs(np.broadcast_to(self.moved(mechanism, shift).holding_torque(q), q.shape))
            return float(np.max(torque)) if np.all(np.isfinite(torque)) else math.inf

        size = abs(self.at) or 0.1
        low, high = (-0.95 * size, 2.0 * size) if reach is None else reach
        for _ in range(STRETCHED):
            tried = np.linspace(low, high, TRIED)
            best = int(np.argmin([worst(float(shift)) for shift in tried]))
            if reach is not None or 0 < best < TRIED - 1:
                break
            low, high = (low - size, high) if best == 0 else (low, high + 2.0 * size)
            size *= 2.0
        bounds = float(tried[max(best - 1, 0)]), float(tried[min(best + 1, TRIED - 1)])
        found: Any = minimize_scalar(worst, bounds=bounds, method="bounded", options={"xatol": 1e-11})
        return min((float(found.x), *bounds), key=worst)


def slides_of(mechanism: Mechanism, *, mount: Any, move: str | None, along: float | None) -> tuple[Slide, ...]:
    """The points that may move.

    Raises
    ------
    InputError, InputTypeError
        A mount that the mechanism does not have, or none whose path has a point that moves.
    """
    names = [mechanism.mount_name(i) for i in range(len(mechanism.springs))]
    numbers = range(len(names)) if mount is None else (_number(mount, names),)
    found = [slide for i in numbers for slide in _slides(mechanism, i, along) if move in (None, slide.place)]
    if not found:
        kinds = ", ".join(type(mechanism.springs[i].path).__name__ for i in numbers) or "no springs"
        raise InputError(
            f"mechanism must have a Straight or Cable path with {'an end' if move is None else f'an {move}'} to move, "
            f"got {kinds}"
        )
    return tuple(found)


def _number(mount: Any, names: list[str]) -> int:
    if isinstance(mount, str) and mount in names:
        return names.index(mount)
    if isinstance(mount, int) and not isinstance(mount, bool) and 0 <= mount < len(names):
        return mount
    if not isinstance(mount, str | int) or isinstance(mount, bool):
        raise InputTypeError(f"mount must be a name or a number, got {mount!r}")
    raise InputError(f"mount must be one of the mechanism's ({', '.join(names) or 'it has none'}), got {mount!r}")


def _slides(mechanism: Mechanism, index: int, along: float | None) -> Iterator[Slide]:
    path = mechanism.springs[index].path
    if isinstance(path, Straight):
        points = [path.first, path.last]
    elif isinstance(path, Cable):
        # On the ground all that the cable meets moves together, as on one carriage; the nearest to the arm names it.
        grounded = [_place(e) for e in path.along if _place(e).body == "ground"]
        points = [*grounded[-1:], *(e for e in (path.along[0], path.along[-1]) if isinstance(e, Point))]
        points = points[:1] + [point for point in points[1:] if point.body != "ground"]
    else:
        return
    for point in points:
        if len(point.at) == 2:
            at = complex(*point.at)
            anchored = point.body == "ground"
            usual = at / abs(at) if at else (1j if anchored else 1.0 + 0j)
            direction = usual if along is None else cmath.rect(1.0, along)
            yield Slide(index, "anchor" if anchored else "attachment", point.body, at, direction)


def _place(element: Any) -> Point:
    return element if isinstance(element, Point) else element.centre


def _moved(path: Any, body: str, step: complex) -> Any:
    if isinstance(path, Straight):
        return Straight(_shifted(path.first, body, step), _shifted(path.last, body, step))
    elements: list[Any] = []
    for element in path.along:
        if isinstance(element, Point):
            # On a moving body only the ends of the cable move.
            ends = body == "ground" or element in (path.along[0], path.along[-1])
            elements.append(_shifted(element, body, step) if ends else element)
        elif isinstance(element, Disc) and body == "ground":
            elements.append(attrs.evolve(element, centre=_shifted(element.centre, body, step)))
        else:
            elements.append(element)
    return Cable(*elements)


def _shifted(point: Point, body: str, step: complex) -> Point:
    return Point(body, (point.at[0] + step.real, point.at[1] + step.imag)) if point.body == body else point


def _straight_ends(mount: SpringMount) -> tuple[complex, complex] | None:
    """Anchor and attachment of a spring of zero free length straight between ground and arm."""
    path = mount.path
    if not isinstance(mount.spring, ZeroLengthSpring) or not isinstance(path, Straight):
        return None
    if mount.rigid_length != 0 or mount.moving_mass != 0:
        return None
    ends = {point.body: complex(*point.at) for point in path.ends}
    return (ends["ground"], ends["arm"]) if set(ends) == {"ground", "arm"} else None

"""The numbers that a builder wants of a finished mechanism, from which text and JSON are made."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.feedforward import Actuator, Feedforward
from springpoise.guard.amounts import JSON_SUFFIX, finite_or_none
from springpoise.guard.document import PoiseFile
from springpoise.guard.format.kinds import SPRINGS
from springpoise.guard.format.models import kind_of
from springpoise.guard.limits.mechanism import coordinate_unit
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Drum
from springpoise.springs.protocol import working_range_of

__all__ = ["At", "HoldFigures", "PlaceFigures", "SpringFigures", "hold_figures", "rests_alone", "spring_figures"]

Array = NDArray[np.float64]


@attrs.frozen
class At:
    """A value and the pose where it occurs."""

    value: float
    """The value [SI]."""
    pose: float
    """The pose [rad]."""

    @classmethod
    def greatest(cls, values: Any, q: Array) -> At:
        """The greatest of values over poses."""
        over = np.broadcast_to(np.asarray(values, dtype=np.float64), q.shape)
        return cls(float(over[i := int(np.argmax(over))]), float(q[i]))

    @classmethod
    def least(cls, values: Any, q: Array) -> At:
        """The least of values over poses."""
        over = np.broadcast_to(np.asarray(values, dtype=np.float64), q.shape)
        return cls(float(over[i := int(np.argmin(over))]), float(q[i]))

    def to_dict(self, unit: str) -> dict[str, Any]:
        """Ready for JSON."""
        return {f"value{JSON_SUFFIX[unit]}": finite_or_none(self.value), "at_rad": self.pose}


@attrs.frozen
class PlaceFigures:
    """A point to drill, or the centre of a disc."""

    what: str
    """What is there: anchor, attachment, guide, pulley, rod, drum, spring end."""
    body: str
    """The body it is fixed in; coordinates are in its frame."""
    x: float
    """Along the body's x axis, from the pivot on the ground and on an arm [m]."""
    y: float
    """Across it [m]."""
    radius: float | None = None
    """Radius at which the middle of the cable runs [m]; None for a point."""
    turn: str | None = None
    """Sense in which the cable runs round, from first to last point; None for a point."""


@attrs.frozen(kw_only=True)
class SpringFigures:
    """One mount as a person builds it; lengths and loads are of one spring of it."""

    name: str
    """Name of the mount."""
    count: int
    """How many springs side by side."""
    kind: str
    """Kind of spring."""
    unit: str
    """Unit of lengths and margins: ``"m"``, or ``"rad"`` for a torsion spring."""
    sizes: tuple[tuple[str, float, str], ...]
    """The spring's own values: name, value [SI], unit."""
    places: tuple[PlaceFigures, ...]
    """Points and discs along the path, in order."""
    rigid_length: float
    """Part of the path that does not stretch [m]."""
    shortest: At
    """Least length."""
    longest: At
    """Greatest length."""
    least_load: At
    """Least load [N, or N·m]."""
    greatest_load: At
    """Greatest load [N, or N·m]."""
    low_margin: float
    """Least length less the lower end of the working range."""
    high_margin: float
    """Upper end of the working range less the greatest length; infinite without one."""
    setting: At
    """Length with the arm level, or halfway through a travel that leaves level out: to check the build."""
    setting_load: float
    """Load there [N, or N·m]."""

    @property
    def load_unit(self) -> str:
        """Unit of loads."""
        return "N" if self.unit == "m" else "N*m"

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key."""
        suffix = JSON_SUFFIX[self.unit]
        return {
            "name": self.name,
            "count": self.count,
            "kind": self.kind,
            **{f"{name}{JSON_SUFFIX.get(unit, '')}": finite_or_none(value) for name, value, unit in self.sizes},
            "places": [
                {
                    "what": place.what,
                    "body": place.body,
                    "x_m": place.x,
                    "y_m": place.y,
                    "radius_m": place.radius,
                    "turn": place.turn,
                }
                for place in self.places
            ],
            f"rigid_length{suffix}": self.rigid_length,
            "shortest": self.shortest.to_dict(self.unit),
            "longest": self.longest.to_dict(self.unit),
            "least_load": self.least_load.to_dict(self.load_unit),
            "greatest_load": self.greatest_load.to_dict(self.load_unit),
            f"low_margin{suffix}": finite_or_none(self.low_margin),
            f"high_margin{suffix}": finite_or_none(self.high_margin),
        }


@attrs.frozen(kw_only=True)
class HoldFigures:
    """What the actuator still has to give with one payload on the mechanism."""

    payload: str | None
    """Name of the payload; None for none."""
    still: At
    """Greatest magnitude of the holding torque, friction left out [N·m]."""
    moving: At
    """Greatest torque to hold or slowly move either way, friction included [N·m]."""
    current_up: At | None
    """Greatest magnitude of the current turning counter-clockwise [A]; None without a motor."""
    current_down: At | None
    """The same turning clockwise [A]."""

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key."""
        return {
            "payload": self.payload,
            "holding_torque": self.still.to_dict("N*m"),
            "torque_with_friction": self.moving.to_dict("N*m"),
            "current_counter_clockwise": None if self.current_up is None else self.current_up.to_dict("A"),
            "current_clockwise": None if self.current_down is None else self.current_down.to_dict("A"),
        }


def spring_figures(mechanism: Mechanism, q: Array) -> tuple[SpringFigures, ...]:
    """Every mount of a mechanism over some poses [rad]."""
    return tuple(_spring(mechanism, i, q) for i in range(len(mechanism.springs)))


def _spring(mechanism: Mechanism, index: int, q: Array) -> SpringFigures:
    mount = mechanism.springs[index]
    spring: Any = mount.spring
    length = np.broadcast_to(mount.spring_length(mechanism.linkage, q), q.shape)
    load = spring.load(length)
    low, high = working_range_of(spring)
    level = 0.0 if q[0] <= 0.0 <= q[-1] else float(0.5 * (q[0] + q[-1]))
    at_level = float(mount.spring_length(mechanism.linkage, level))
    kind = kind_of(SPRINGS, spring) or type(spring).__name__
    fields = attrs.fields(type(spring)) if attrs.has(type(spring)) else ()
    return SpringFigures(
        name=mechanism.mount_name(index),
        count=mount.count,
        kind=kind,
        unit=coordinate_unit(mount),
        sizes=tuple(
            (field.name, getattr(spring, field.name), field.metadata["unit"])
            for field in fields
            if "unit" in field.metadata and isinstance(getattr(spring, field.name), float)
        ),
        places=tuple(_places(mount)),
        rigid_length=float(mount.rigid_length),
        shortest=At.least(length, q),
        longest=At.greatest(length, q),
        least_load=At.least(load, q),
        greatest_load=At.greatest(load, q),
        low_margin=float(length.min() - low),
        high_margin=float(high - length.max()),
        setting=At(at_level, level),
        setting_load=float(spring.load(at_level)),
    )


def _places(mount: SpringMount) -> Iterator[PlaceFigures]:
    """The points and discs of a path of any kind, in order."""
    found = list(_along(mount.path))
    for i, element in enumerate(found):
        if isinstance(element, Point):
            end = i in (0, len(found) - 1)
            what = "guide" if not end else "anchor" if element.body == "ground" else "attachment"
            if i == 0 and len(found) > 2:
                what = "spring end"
            yield PlaceFigures(what, element.body, float(element.at[0]), float(element.at[1]))
        else:
            what = "drum" if isinstance(element, Drum) else "rod" if element.sliding_friction else "pulley"
            x, y = map(float, element.centre.at)
            yield PlaceFigures(what, element.centre.body, x, y, float(element.radius), element.turn)


def _along(part: Any) -> Iterator[Any]:
    if isinstance(part, Point) or hasattr(part, "centre"):
        yield part
    elif isinstance(part, tuple):
        for item in part:
            yield from _along(item)
    elif attrs.has(type(part)):
        for field in attrs.fields(type(part)):
            yield from _along(getattr(part, field.name))


def hold_figures(document: PoiseFile, q: Array) -> tuple[HoldFigures, ...]:
    """What is left to hold, bare and with each payload, over some poses [rad]."""
    names = [None, *(payload.name for payload in document.payloads)]
    return tuple(_hold(document.with_payload(name), document.actuator, name, q) for name in names)


def _hold(mechanism: Mechanism, given: Any, payload: str | None, q: Array) -> HoldFigures:
    actuator: Actuator | None = given[0] if isinstance(given, tuple) else given
    torque = np.abs(mechanism.holding_torque(q))
    currents: list[At | None] = [None, None]
    if actuator is not None and actuator.motor is not None:
        ff = Feedforward(mechanism, actuator=actuator)
        currents = [At.greatest(np.abs(ff.current(q, moving=way)), q) for way in (1, -1)]
    return HoldFigures(
        payload=payload,
        still=At.greatest(torque, q),
        moving=At.greatest(torque + mechanism.friction_band(q), q),
        current_up=currents[0],
        current_down=currents[1],
    )


def rests_alone(mechanism: Mechanism, q: Array) -> tuple[tuple[float, float], ...]:
    """Ranges of poses (from, to) [rad] in which friction alone holds the mechanism where it is put."""
    inside = np.abs(mechanism.holding_torque(q)) <= mechanism.friction_band(q)
    edges = np.flatnonzero(np.diff(np.concatenate([[False], inside, [False]]).astype(int)))
    return tuple((float(q[a]), float(q[b - 1])) for a, b in zip(edges[::2], edges[1::2], strict=True))

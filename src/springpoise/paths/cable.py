"""A cable from point to point, round discs and through eyelets."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import partial
from itertools import pairwise
from typing import Any, NamedTuple

import attrs

from springpoise import units
from springpoise.carriers import Carrier, is_zero, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.body import Point
from springpoise.linkages.protocol import AppliedForce, Linkage
from springpoise.paths.drum import Drum
from springpoise.paths.tangents import Circle, Span

__all__ = ["Cable", "Disc"]

MOST_DISCS_BETWEEN_GUIDES = 8
"""Which discs of a run are touched is found by trying every choice, so their number is limited."""


def _centre(value: Any) -> Point:
    if not isinstance(value, Point):
        raise InputTypeError(f"Disc.centre must be a Point, got {value!r}")
    return value


def _sense(value: Any) -> str:
    if value not in ("cw", "ccw"):
        raise InputError(f"Disc.turn must be 'cw' or 'ccw', got {value!r}")
    return str(value)


@attrs.frozen(field_transformer=units.named_fields)
class Disc:
    """A pulley, or a round rod that the cable slides over.

    Friction is one of two kinds: a wheel on a bearing (``bearing_friction`` and
    ``bearing_radius``) or a cable that slides over a fixed surface (``sliding_friction``).

    Raises
    ------
    InputError, InputTypeError, UnitError
        A value out of range or of another dimension, an unknown turn, both kinds of friction at
        once, or a bearing friction without a bearing radius.
    """

    centre: Point = attrs.field(converter=_centre)
    """Centre, fixed in a body."""
    radius: Carrier = attrs.field(converter=units.metre, validator=units.positive, kw_only=True)
    """Radius at which the middle of the cable runs [m], > 0: groove radius plus half the cable's diameter."""
    turn: str = attrs.field(converter=_sense, kw_only=True)
    """Sense in which the cable runs round the disc on its way from first to last point: ``"cw"`` or ``"ccw"``."""
    bearing_friction: Carrier = attrs.field(
        default=0.0, converter=units.number, validator=units.not_negative, kw_only=True
    )
    """Friction coefficient of the wheel's bearing [1], >= 0."""
    bearing_radius: Carrier = attrs.field(
        default=0.0, converter=units.metre, validator=units.not_negative, kw_only=True
    )
    """Radius at which the bearing rubs [m], >= 0."""
    sliding_friction: Carrier = attrs.field(
        default=0.0, converter=units.number, validator=units.not_negative, kw_only=True
    )
    """Friction coefficient of the cable on a surface that does not turn [1], >= 0."""

    def __attrs_post_init__(self) -> None:
        if isinstance(self.bearing_friction, float) and isinstance(self.sliding_friction, float):
            if self.bearing_friction > 0 and self.sliding_friction > 0:
                raise InputError(
                    "Disc.sliding_friction must be 0 where bearing_friction is given, "
                    f"got {self.sliding_friction}; a disc either turns or is slid over"
                )
            if self.bearing_friction > 0 and self.bearing_radius == 0:
                raise InputError("Disc.bearing_radius must be > 0 m where bearing_friction is given, got 0.0")

    @property
    def sense(self) -> float:
        """+1 where the cable runs round counter-clockwise, -1 where clockwise."""
        return 1.0 if self.turn == "ccw" else -1.0

    @property
    def is_frictionless(self) -> bool:
        """Whether the cable passes without loss."""
        return is_zero(self.sliding_friction) and is_zero(self.bearing_friction)

    def tension_factors(self, wrap: Carrier) -> tuple[Carrier, Carrier]:
        """Tension behind the disc over tension before it, for the two directions of motion [1].

        Capstan law exp(±μφ) where the cable slides; 1 ± 2 μ (r_bearing/radius) sin(φ/2) where the
        wheel turns, φ being the wrap.
        """
        if is_zero(self.sliding_friction):
            if is_zero(self.bearing_friction):
                return 1.0, 1.0
            half = 0.5 * wrap
            loss = 2.0 * self.bearing_friction * (self.bearing_radius / self.radius) * namespace(half).sin(half)
            return 1.0 + loss, 1.0 - loss
        turned = self.sliding_friction * wrap
        xp = namespace(turned)
        return xp.exp(turned), xp.exp(-turned)


def _along(value: Any) -> tuple[Point | Disc | Drum, ...]:
    elements = tuple(value)
    for element in elements:
        if not isinstance(element, Point | Disc | Drum):
            raise InputTypeError(f"Cable.along must be Points and Discs, got {element!r}")
    return elements


@attrs.frozen(init=False, field_transformer=units.named_fields)
class Cable:
    """A taut cable: a first point, discs and guide points in order, a last point.

    Either end may be a `Drum` instead of a point: a disc that turns with its body, to which the
    cable is tied.

    The spring sits at the first point's end, which matters for friction only. A guide point
    (eyelet) always bends the cable. A disc is left where the straight run between its neighbours
    clears it on the side on which the cable runs round it; where it clears on the other side, the
    disc still holds the cable. A wrap is less than one turn.

    Raises
    ------
    InputError, InputTypeError
        Fewer than two ends, an end that is a disc, something that is neither point nor disc, a drum
        that is no end, or more than eight discs between two guides.

    Examples
    --------
    The cable of a spring that hangs behind a pulley:

    >>> Cable(
    ...     Point("ground", (-0.03, -0.25)),
    ...     Disc(Point("ground", (-0.015, 0.20)), radius=0.015, turn="cw"),
    ...     Point("arm", (0.12, 0)),
    ... ).discs[0].turn
    'cw'
    """

    along: tuple[Point | Disc | Drum, ...] = attrs.field(converter=_along)
    """First point or drum, discs and guide points in order, last point or drum."""

    def __init__(self, *along: Point | Disc | Drum) -> None:
        self.__attrs_init__(along)  # pyright: ignore[reportAttributeAccessIssue]

    def __attrs_post_init__(self) -> None:
        if len(self.along) < 2:
            raise InputError(f"Cable.along must be at least two Points, got {len(self.along)}")
        for place, end in (("first", self.along[0]), ("last", self.along[-1])):
            if isinstance(end, Disc):
                raise InputError(f"Cable.along must begin and end with a Point, got {end!r} as its {place}")
        if any(isinstance(element, Drum) for element in self.along[1:-1]):
            raise InputError("Cable.along must have a Drum as its first or last only, got one between others")
        longest = max(len(piece) - 2 for piece in self._pieces())
        if longest > MOST_DISCS_BETWEEN_GUIDES:
            raise InputError(
                f"Cable.along must have at most {MOST_DISCS_BETWEEN_GUIDES} Discs between two Points, got {longest}; "
                "put a guide Point between them"
            )

    @property
    def discs(self) -> tuple[Disc, ...]:
        """The discs, in order."""
        return tuple(element for element in self.along if isinstance(element, Disc))

    def length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """Length of the cable from first to last point, arcs included [m]; NaN where an end lies inside a disc."""
        return sum(run.span.choose(run.length) for run in self._runs(linkage, q))

    def gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the derivative of the length [m/rad]."""
        runs = list(self._runs(linkage, q))
        return tuple(
            sum(run.span.choose(partial(run.growth, joint)) for run in runs) for joint in range(linkage.joint_count)
        )

    def wraps(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each disc and drum, the angle over which the cable touches it [rad]; 0 where it has left it."""
        return tuple(
            run.span.choose(partial(run.wrap, disc))
            for run in self._runs(linkage, q)
            for disc in range(1, len(run.elements) - 1)
        )

    def friction_gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the half-width of the torque band for one newton of spring load [m]."""
        joints = range(linkage.joint_count)
        if all(disc.is_frictionless for disc in self.discs):
            return (0.0,) * linkage.joint_count
        band: list[Carrier] = [0.0 for _ in joints]
        for way, sign in ((0, 0.5), (1, -0.5)):
            arriving: Carrier = 1.0  # tension over spring load
            for run in self._runs(linkage, q):
                for joint in joints:
                    torque = run.span.choose(partial(run.rubbing_growth, joint, way))
                    band[joint] = band[joint] + sign * (arriving * torque)
                arriving = arriving * run.span.choose(partial(run.tension_behind, way))
        return tuple(namespace(width).abs(width) for width in band)

    def pulls(self, linkage: Linkage, q: Carrier) -> tuple[AppliedForce, ...]:
        """Forces on the bodies for one newton of tension, without friction [1]."""
        return tuple(
            AppliedForce(
                _place(element),
                (run.span.choose(partial(run.pull, index, "ux")), run.span.choose(partial(run.pull, index, "uy"))),
            )
            for run in self._runs(linkage, q)
            for index, element in enumerate(run.elements)
        )

    def _pieces(self) -> list[tuple[Point | Disc | Drum, ...]]:
        """The cable cut at its guide points, which it always touches; a drum's tie is a point."""
        first, last = self.along[0], self.along[-1]
        before = (first.tie_point,) if isinstance(first, Drum) else ()
        behind = (last.tie_point,) if isinstance(last, Drum) else ()
        along = (*before, *self.along, *behind)
        cuts = [index for index, element in enumerate(along) if isinstance(element, Point)]
        return [along[start : end + 1] for start, end in pairwise(cuts)]

    def _runs(self, linkage: Linkage, q: Carrier) -> Iterator[_Run]:
        pieces = self._pieces()
        for index, elements in enumerate(pieces):
            places = [linkage.position(_place(element), q) for element in elements]
            if any(len(place) != 2 for place in places):
                raise InputError("Cable.along must run in the plane of a planar linkage, got Points in space")
            circles = [Circle(x, y, _radius(e), _sense_of(e)) for (x, y), e in zip(places, elements, strict=True)]
            ties = []
            if index == 0 and isinstance(self.along[0], Drum):
                ties.append((0, 1))
            if index == len(pieces) - 1 and isinstance(self.along[-1], Drum):
                ties.append((len(elements) - 2, len(elements) - 1))
            span = Span(circles, ties=ties)
            yield _Run(elements, span, [linkage.jacobian(_place(element), q) for element in elements])


def _place(element: Point | Disc | Drum) -> Point:
    return element if isinstance(element, Point) else element.centre


def _radius(element: Point | Disc | Drum) -> Carrier:
    return 0.0 if isinstance(element, Point) else element.radius


def _sense_of(element: Point | Disc | Drum) -> float:
    return 0.0 if isinstance(element, Point) else element.sense


class _Run(NamedTuple):
    """The cable between two guide points, and its properties for a choice of touched elements.

    A disc turns freely or is slid over, so that only the way of its centre counts: the tension
    on both sides of it pulls at the centre.
    """

    elements: tuple[Point | Disc | Drum, ...]
    span: Span
    jacobians: Sequence[tuple[tuple[Carrier, Carrier], ...]]

    def length(self, touched: tuple[int, ...]) -> Carrier:
        straight = sum(self.span.tangent(i, j).length for i, j in pairwise(touched))
        return straight + sum(_radius(self.elements[j]) * self.span.wrap(i, j, k) for i, j, k in _triples(touched))

    def wrap(self, disc: int, touched: tuple[int, ...]) -> Carrier:
        return sum(self.span.wrap(i, j, k) for i, j, k in _triples(touched) if j == disc) + self._nothing

    def growth(self, joint: int, touched: tuple[int, ...]) -> Carrier:
        return sum(self._rate(joint, i, j) for i, j in pairwise(touched))

    def pull(self, index: int, axis: str, touched: tuple[int, ...]) -> Carrier:
        leaving = sum(getattr(self.span.tangent(i, j), axis) for i, j in pairwise(touched) if i == index)
        arriving = sum(getattr(self.span.tangent(i, j), axis) for i, j in pairwise(touched) if j == index)
        return leaving - arriving + self._nothing

    def rubbing_growth(self, joint: int, way: int, touched: tuple[int, ...]) -> Carrier:
        """As ``growth``, each straight run weighed with its tension."""
        tensions = self._tensions(way, touched)
        return sum(t * self._rate(joint, i, j) for t, (i, j) in zip(tensions, pairwise(touched), strict=True))

    def tension_behind(self, way: int, touched: tuple[int, ...]) -> Carrier:
        return self._tensions(way, touched)[-1] + self._nothing

    @property
    def _nothing(self) -> Carrier:
        """Zero in the shape of the poses."""
        return 0.0 * self.span.tangent(0, len(self.elements) - 1).ux

    def _rate(self, joint: int, i: int, j: int) -> Carrier:
        """How fast the straight run from element i to element j grows."""
        run = self.span.tangent(i, j)
        start, end = self.jacobians[i][joint], self.jacobians[j][joint]
        return run.ux * (end[0] - start[0]) + run.uy * (end[1] - start[1])

    def _tensions(self, way: int, touched: tuple[int, ...]) -> list[Carrier]:
        """Tension over the tension that arrives, on each straight run; ``way`` is the direction of motion, 0 or 1."""
        tensions: list[Carrier] = [1.0]
        for i, j, k in _triples(touched):
            disc = self.elements[j]
            factor = disc.tension_factors(self.span.wrap(i, j, k))[way] if isinstance(disc, Disc) else 1.0
            tensions.append(tensions[-1] * factor)
        return tensions


def _triples(touched: tuple[int, ...]) -> list[tuple[int, int, int]]:
    return list(zip(touched, touched[1:], touched[2:], strict=False))

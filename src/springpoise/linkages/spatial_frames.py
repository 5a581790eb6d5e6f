"""Rotations and vectors in space, component by component, so that they run on every carrier."""

from __future__ import annotations

from typing import NamedTuple, TypeAlias

from springpoise.carriers import Carrier, namespace

__all__ = ["Pose", "Rotation", "Vector", "about", "cross", "dot", "from_roll_pitch_yaw", "plus", "times"]

Vector: TypeAlias = tuple[Carrier, Carrier, Carrier]
Rotation: TypeAlias = tuple[Vector, Vector, Vector]
"""Three rows; applied to a vector of the turned frame it gives the vector in the other frame."""

IDENTITY: Rotation = ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))

ROUNDING = 1e-15
"""Cosines and sines below this are those of right angles [1]: exact zeros keep recordings short."""


class Pose(NamedTuple):
    """Where a frame stands: origin and rotation in ground coordinates."""

    origin: Vector
    rotation: Rotation

    def place(self, at: Vector) -> Vector:
        """Ground coordinates of a point of the frame."""
        return plus(self.origin, times(self.rotation, at))


def dot(a: Vector, b: Vector) -> Carrier:
    """Scalar product, without the terms that are exactly zero."""
    total: Carrier = 0.0
    for x, y in zip(a, b, strict=True):
        if not (_is(x, 0.0) or _is(y, 0.0)):
            term = y if _is(x, 1.0) else x if _is(y, 1.0) else x * y
            total = term if _is(total, 0.0) else total + term
    return total


def plus(a: Vector, b: Vector) -> Vector:
    """Sum of two vectors."""
    return _sum(a[0], b[0]), _sum(a[1], b[1]), _sum(a[2], b[2])


def cross(a: Vector, b: Vector) -> Vector:
    """Vector product."""
    return (
        dot((a[1], _minus(a[2]), 0.0), (b[2], b[1], 0.0)),
        dot((a[2], _minus(a[0]), 0.0), (b[0], b[2], 0.0)),
        dot((a[0], _minus(a[1]), 0.0), (b[1], b[0], 0.0)),
    )


def times(rotation: Rotation, vector: Vector) -> Vector:
    """The vector turned by the rotation."""
    return dot(rotation[0], vector), dot(rotation[1], vector), dot(rotation[2], vector)


def product(first: Rotation, then: Rotation) -> Rotation:
    """The rotation that turns by ``then`` in the frame of ``first``."""
    columns = tuple(zip(*then, strict=True))
    return tuple(tuple(dot(row, column) for column in columns) for row in first)  # type: ignore[return-value]


def about(axis: tuple[float, float, float], angle: Carrier) -> Rotation:
    """Rotation about a unit axis by an angle [rad], counter-clockwise seen against the axis (Rodrigues)."""
    xp = namespace(angle)
    c, s = xp.cos(angle), xp.sin(angle)
    x, y, z = axis
    if (x, y) == (0.0, 0.0) and abs(z) == 1.0:
        return (c, -z * s, 0.0), (z * s, c, 0.0), (0.0, 0.0, 1.0)
    if (x, z) == (0.0, 0.0) and abs(y) == 1.0:
        return (c, 0.0, y * s), (0.0, 1.0, 0.0), (-y * s, 0.0, c)
    if (y, z) == (0.0, 0.0) and abs(x) == 1.0:
        return (1.0, 0.0, 0.0), (0.0, c, -x * s), (0.0, x * s, c)
    v = 1.0 - c
    return (
        (x * x * v + c, x * y * v - z * s, x * z * v + y * s),
        (y * x * v + z * s, y * y * v + c, y * z * v - x * s),
        (z * x * v - y * s, z * y * v + x * s, z * z * v + c),
    )


def from_roll_pitch_yaw(roll: float, pitch: float, yaw: float) -> Rotation:
    """Rotation by roll about x, then pitch about y, then yaw about z, all fixed axes [rad]."""
    turned = product(product(about((0.0, 0.0, 1.0), yaw), about((0.0, 1.0, 0.0), pitch)), about((1.0, 0.0, 0.0), roll))
    return tuple(tuple(_tidy(entry) for entry in row) for row in turned)  # type: ignore[return-value]


def _tidy(value: float) -> float:
    for exact in (0.0, 1.0, -1.0):
        if abs(value - exact) < ROUNDING:
            return exact
    return value


def _is(value: Carrier, number: float) -> bool:
    return isinstance(value, float) and value == number


def _minus(value: Carrier) -> Carrier:
    return 0.0 if _is(value, 0.0) else -value


def _sum(a: Carrier, b: Carrier) -> Carrier:
    return b if _is(a, 0.0) else a if _is(b, 0.0) else a + b

"""Rotations and vectors in space, component by component, so that they run on every carrier.

Exact zeros and ones among the components are left out of sums and products: most axes of real
machines stand at right angles, and what is recorded or computed stays as short as by hand.
"""

from __future__ import annotations

from typing import NamedTuple, TypeAlias

from springpoise.carriers import Carrier, namespace

__all__ = [
    "IDENTITY",
    "ORIGIN",
    "Pose",
    "Rotation",
    "Vector",
    "added",
    "along",
    "cross",
    "dot",
    "from_roll_pitch_yaw",
    "is_zero",
    "is_zero_vector",
    "multiplied",
    "plus",
    "product",
    "scaled",
    "times",
    "transposed",
    "turned_about_z",
]

Vector: TypeAlias = tuple[Carrier, Carrier, Carrier]
Rotation: TypeAlias = tuple[Vector, Vector, Vector]
"""Three rows; applied to a vector of the turned frame it gives the vector in the other frame."""

ORIGIN: Vector = (0.0, 0.0, 0.0)
IDENTITY: Rotation = ((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0))

ROUNDING = 1e-15
"""Entries this near to 0, 1 or -1 are those of right angles [1]: exact ones keep recordings short."""


class Pose(NamedTuple):
    """Where a frame stands: origin and rotation in another frame."""

    origin: Vector
    rotation: Rotation

    def place(self, at: Vector) -> Vector:
        """Coordinates in the other frame of a point of this frame."""
        return plus(self.origin, times(self.rotation, at))

    def then(self, inner: Pose) -> Pose:
        """The pose in the other frame of a frame that stands at ``inner`` in this one."""
        return Pose(self.place(inner.origin), product(self.rotation, inner.rotation))


def dot(a: Vector, b: Vector) -> Carrier:
    """Scalar product."""
    return added(added(multiplied(a[0], b[0]), multiplied(a[1], b[1])), multiplied(a[2], b[2]))


def plus(a: Vector, b: Vector) -> Vector:
    """Sum of two vectors."""
    return added(a[0], b[0]), added(a[1], b[1]), added(a[2], b[2])


def scaled(factor: Carrier, vector: Vector) -> Vector:
    """The vector times a number."""
    return multiplied(factor, vector[0]), multiplied(factor, vector[1]), multiplied(factor, vector[2])


def cross(a: Vector, b: Vector) -> Vector:
    """Vector product."""
    return (
        _difference(multiplied(a[1], b[2]), multiplied(a[2], b[1])),
        _difference(multiplied(a[2], b[0]), multiplied(a[0], b[2])),
        _difference(multiplied(a[0], b[1]), multiplied(a[1], b[0])),
    )


def times(rotation: Rotation, vector: Vector) -> Vector:
    """The vector turned by the rotation."""
    return dot(rotation[0], vector), dot(rotation[1], vector), dot(rotation[2], vector)


def transposed(rotation: Rotation) -> Rotation:
    """The rotation back."""
    (a, b, c), (d, e, f), (g, h, i) = rotation
    return (a, d, g), (b, e, h), (c, f, i)


def product(first: Rotation, then: Rotation) -> Rotation:
    """The rotation that turns by ``then`` in the frame of ``first``."""
    x, y, z = transposed(then)
    return (
        (dot(first[0], x), dot(first[0], y), dot(first[0], z)),
        (dot(first[1], x), dot(first[1], y), dot(first[1], z)),
        (dot(first[2], x), dot(first[2], y), dot(first[2], z)),
    )


def turned_about_z(rotation: Rotation, cosine: Carrier, sine: Carrier) -> Rotation:
    """``rotation`` followed by a turn about its own z axis."""
    return product(rotation, ((cosine, -sine, 0.0), (sine, cosine, 0.0), (0.0, 0.0, 1.0)))


def along(axis: Vector) -> Rotation:
    """A rotation whose z axis lies along a unit vector; a signed permutation for axes at right angles.

    Duff, T. et al. (2017), Building an Orthonormal Basis, Revisited, J. Computer Graphics
    Techniques 6(1): without a branch that would come near a division by zero.
    """
    x, y, z = axis
    xp = namespace(x, y, z)
    sign = xp.where(z >= 0.0, 1.0, -1.0)
    a = -1.0 / (sign + z)
    b = x * y * a
    first = (1.0 + sign * x * x * a, sign * b, -sign * x)
    second = (b, sign + y * y * a, -y)
    return transposed((_tidy(first), _tidy(second), axis))


def from_roll_pitch_yaw(roll: Carrier, pitch: Carrier, yaw: Carrier) -> Rotation:
    """Rotation by roll about x, then pitch about y, then yaw about z, all fixed axes [rad]."""
    xp = namespace(roll, pitch, yaw)
    (cr, sr), (cp, sp), (cy, sy) = ((xp.cos(angle), xp.sin(angle)) for angle in (roll, pitch, yaw))
    about_x: Rotation = ((1.0, 0.0, 0.0), _tidy((0.0, cr, -sr)), _tidy((0.0, sr, cr)))
    about_y: Rotation = (_tidy((cp, 0.0, sp)), (0.0, 1.0, 0.0), _tidy((-sp, 0.0, cp)))
    about_z: Rotation = (_tidy((cy, -sy, 0.0)), _tidy((sy, cy, 0.0)), (0.0, 0.0, 1.0))
    return product(product(about_z, about_y), about_x)


def is_zero(value: Carrier) -> bool:
    """Whether a value is the number zero, and not an array or variable that may be zero."""
    return isinstance(value, float) and value == 0.0


def is_zero_vector(vector: Vector) -> bool:
    """Whether all components are the number zero."""
    return is_zero(vector[0]) and is_zero(vector[1]) and is_zero(vector[2])


def _tidy(row: Vector) -> Vector:
    return _tidied(row[0]), _tidied(row[1]), _tidied(row[2])


def _tidied(value: Carrier) -> Carrier:
    if isinstance(value, float):
        nearest = float(round(value))
        return nearest if abs(value - nearest) < ROUNDING else value
    return value


def multiplied(a: Carrier, b: Carrier) -> Carrier:
    """Product of two numbers."""
    if isinstance(a, float):
        if a == 0.0:
            return 0.0
        if a == 1.0:
            return b
        if a == -1.0:
            return -b
    if isinstance(b, float):
        if b == 0.0:
            return 0.0
        if b == 1.0:
            return a
        if b == -1.0:
            return -a
    return a * b


def added(a: Carrier, b: Carrier) -> Carrier:
    """Sum of two numbers."""
    return b if is_zero(a) else a if is_zero(b) else a + b


def _difference(a: Carrier, b: Carrier) -> Carrier:
    return a if is_zero(b) else -b if is_zero(a) else a - b

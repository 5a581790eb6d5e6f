"""How strong gravity is, and how a tilted or accelerating base feels it.

In the plane of an arm x points right and y up; gravity is the vector ``(gx, gy)`` in m/s². In
space z points up, and gravity is ``(gx, gy, gz)``.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from springpoise import units
from springpoise.carriers import namespace
from springpoise.errors import InputError
from springpoise.units import ScalarLike

__all__ = ["STANDARD_GRAVITY", "local", "seen_from_base", "seen_from_base_in_space"]

STANDARD_GRAVITY = 9.80665
"""Standard acceleration of free fall [m/s²], exact by definition (3rd CGPM, 1901)."""

# WGS 84 (NIMA TR8350.2): equatorial radius, flattening, normal gravity at equator and pole,
# first eccentricity squared, and m = w² a² b / GM.
_RADIUS = 6378137.0
_FLATTENING = 1.0 / 298.257223563
_AT_EQUATOR = 9.7803253359
_AT_POLE = 9.8321849378
_ECCENTRICITY_2 = 0.00669437999014
_M = 0.00344978650684
_LOWEST, _HIGHEST = -10e3, 100e3


def local(latitude: ScalarLike, height: ScalarLike = 0.0) -> Any:
    """Normal gravity at a place on the Earth.

    Somigliana's closed formula on the WGS 84 ellipsoid with its second-order height term. True
    gravity differs from normal gravity by up to about 5e-4 m/s² (value from memory).

    Parameters
    ----------
    latitude
        Geodetic latitude [rad], from -π/2 to π/2; north positive; float or array.
    height
        Height above the ellipsoid [m], from -10 km to 100 km; float or array that broadcasts.

    Returns
    -------
    float or array
        Magnitude of gravity [m/s²].

    Raises
    ------
    InputError
        Latitude beyond a pole, or height out of range.

    References
    ----------
    NIMA TR8350.2, World Geodetic System 1984, equations 4-1 and 4-3.

    Examples
    --------
    >>> round(local("45 deg"), 6)
    9.806198
    """
    phi = units.scalar_si(latitude, "rad", "latitude")
    above = units.metre(height, "height")
    if not np.all(ok := np.abs(phi) <= math.pi / 2 + 1e-12):
        worst = float(np.asarray(phi)[~ok].flat[0])
        stated = isinstance(latitude, str) or hasattr(latitude, "m_as")
        hint = f"; degrees? write '{worst:g} deg'" if not stated and abs(worst) <= 90 else ""
        raise InputError(f"latitude must be from -1.5708 to 1.5708 rad, got {worst:g}{hint}")
    if not np.all(ok := (np.asarray(above) >= _LOWEST) & (np.asarray(above) <= _HIGHEST)):
        worst = float(np.asarray(above)[~ok].flat[0])
        raise InputError(f"height must be from {_LOWEST:g} to {_HIGHEST:g} m, got {worst:g}")
    xp = namespace(phi, above)
    sine = xp.sin(phi)
    sine_2 = sine * sine
    axes = math.sqrt(1.0 - _ECCENTRICITY_2)  # ratio of the polar to the equatorial radius
    k = axes * _AT_POLE / _AT_EQUATOR - 1.0
    surface = _AT_EQUATOR * (1.0 + k * sine_2) / xp.sqrt(1.0 - _ECCENTRICITY_2 * sine_2)
    relative = above / _RADIUS
    factor = 2.0 * (1.0 + _FLATTENING + _M - 2.0 * _FLATTENING * sine_2)
    return surface * (1.0 - factor * relative + 3.0 * relative * relative)


def seen_from_base(
    tilt: Any = 0.0, *, acceleration: Any = (0.0, 0.0), magnitude: ScalarLike = STANDARD_GRAVITY
) -> tuple[Any, Any]:
    """Gravity as the coordinates of a tilted, accelerating base see it.

    Parameters
    ----------
    tilt
        Angle by which the base is turned counter-clockwise out of the level, in the plane of the
        arm [rad]; float or array of shape (...).
    acceleration
        Acceleration (ax, ay) of the base in level coordinates, x right and y up [m/s²].
    magnitude
        Strength of gravity [m/s²], not negative.

    Returns
    -------
    (gx, gy)
        What a ``gravity=`` argument takes [m/s²], each of the shape of ``tilt``.

    Raises
    ------
    InputError
        Negative magnitude, or a tilt of more than two turns (degrees given as a plain number).

    Examples
    --------
    >>> gx, gy = seen_from_base("30 deg")
    >>> round(gx, 5), round(gy, 5)
    (-4.90332, -8.49281)
    """
    angle = units.radian(tilt, "tilt")
    ax, ay = units.acceleration_pair(acceleration, "acceleration")
    g = _strength(magnitude)
    xp = namespace(angle, ax, ay, g)
    right, up = -ax, -ay - g
    c, s = xp.cos(angle), xp.sin(angle)
    return c * right + s * up, c * up - s * right


def seen_from_base_in_space(
    roll_pitch_yaw: Any = (0.0, 0.0, 0.0),
    *,
    acceleration: Any = (0.0, 0.0, 0.0),
    magnitude: ScalarLike = STANDARD_GRAVITY,
) -> tuple[Any, Any, Any]:
    """Gravity as the coordinates of a base in space see it that is tilted and accelerates.

    Parameters
    ----------
    roll_pitch_yaw
        How the base is turned out of the level: about the level x, then y, then z axis [rad], each
        counter-clockwise seen against its axis; floats or arrays that broadcast.
    acceleration
        Acceleration (ax, ay, az) of the base in level coordinates, z up [m/s²].
    magnitude
        Strength of gravity [m/s²], not negative.

    Returns
    -------
    (gx, gy, gz)
        What a ``gravity=`` argument takes in space [m/s²]; a component that no array enters is a float.

    Raises
    ------
    InputError
        Negative magnitude, or an angle of more than two turns (degrees given as a plain number).

    Examples
    --------
    >>> [round(g, 5) + 0.0 for g in seen_from_base_in_space((0, "30 deg", 0))]
    [4.90332, 0.0, -8.49281]
    """
    roll, pitch, yaw = units.radian_triple(roll_pitch_yaw, "roll_pitch_yaw")
    ax, ay, az = units.triple(acceleration, "m/s**2", "acceleration")
    g = _strength(magnitude)
    xp = namespace(roll, pitch, yaw, ax, ay, az, g)
    x, y, z = -ax, -ay, -az - g
    # The level vector, turned back: about z, then y, then x.
    c, s = xp.cos(yaw), xp.sin(yaw)
    x, y = c * x + s * y, c * y - s * x
    c, s = xp.cos(pitch), xp.sin(pitch)
    x, z = c * x - s * z, c * z + s * x
    c, s = xp.cos(roll), xp.sin(roll)
    y, z = c * y + s * z, c * z - s * y
    return x, y, z


def _strength(magnitude: ScalarLike) -> Any:
    g = units.scalar_si(magnitude, "m/s**2", "magnitude")
    if isinstance(g, float | np.ndarray) and np.any(g < 0):
        raise InputError(f"magnitude must be >= 0 m/s**2, got {float(np.min(g)):g}")
    return g

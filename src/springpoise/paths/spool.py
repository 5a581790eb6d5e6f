"""A wrapping drum or cam on a joint, known by its moment radius or by its profile."""

from __future__ import annotations

import functools
import math
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier, interpolate, joints_of
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.protocol import AppliedForce, Linkage
from springpoise.lookup import Lookup
from springpoise.units import ScalarLike

__all__ = ["GuideRoller", "Spool"]

Array = NDArray[np.float64]

ROUNDING = 1e-9
"""A cable that leaves so little beyond the end of a line still leaves at its end [rad]."""

TABLE_POSES = 1025
"""Poses at which a profile's moment radius is found; cubics between them err by far less than a nanometre."""


def _joint(value: Any) -> int:
    if isinstance(value, bool) or not isinstance(value, int) or value < 0:
        raise InputTypeError(f"Spool.joint must be the number of a joint, 0 for the first, got {value!r}")
    return value


@attrs.frozen(field_transformer=units.named_fields)
class GuideRoller:
    """A fixed roller beside a spool, round which the cable leaves.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A radius that is negative, or an unknown side.
    """

    at: tuple[float, float] = attrs.field(converter=units.metre_pair)
    """Its centre (x, y), with the spool's axis as origin, in the frame that does not turn with the spool [m]."""
    radius: float = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative, kw_only=True)
    """Radius at which the middle of the cable runs [m]; 0 for an eyelet."""
    side: int = attrs.field(default=1, kw_only=True)
    """+1 where the cable runs between the spool's axis and the roller's centre, -1 on the far side of the centre."""

    def __attrs_post_init__(self) -> None:
        if self.side not in (1, -1):
            raise InputError(f"GuideRoller.side must be +1 or -1, got {self.side!r}")


@attrs.frozen(field_transformer=units.named_fields)
class Spool:
    """A cable that winds on a drum or cam fixed to a joint's link.

    The path is the cable up to where it is tied to the spool, so that it gets longer as cable winds
    up. Its derivative by the joint's angle is the moment radius, the distance of the cable's line
    from the joint's axis: positive where turning counter-clockwise winds cable up. Outside its
    angles every result is NaN.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Angles that do not increase, arrays of different length, a joint that the linkage lacks.

    Examples
    --------
    >>> from springpoise.linkages import Arm, Body
    >>> drum = Spool.drum("30 mm")
    >>> round(drum.length(Arm(Body(1.0, (0.3, 0))), 0.5), 12)
    0.015
    """

    angles: Array = attrs.field(converter=units.radians)
    """Joint angles of the table [rad], shape (n,), n >= 2, strictly increasing."""
    moment_radii: Array = attrs.field(converter=units.metre)
    """Moment radius at these angles [m], shape (n,); negative where turning counter-clockwise lets cable out."""
    joint: int = attrs.field(default=0, converter=_joint, kw_only=True)
    """Which joint, counted from 0."""
    zero_angle: float = attrs.field(default=0.0, converter=units.radian, kw_only=True)
    """Joint angle at which the path's length counts as ``zero_length`` [rad]."""
    zero_length: Carrier = attrs.field(default=0.0, converter=units.metre, kw_only=True)
    """Length of the path at ``zero_angle`` [m]."""

    def __attrs_post_init__(self) -> None:
        angles = np.asarray(self.angles)
        if angles.ndim != 1 or angles.size < 2 or not np.all(np.diff(angles) > 0):
            raise InputError(
                f"Spool.angles must be at least two strictly increasing angles in rad, got {self.angles!r}"
            )
        if np.shape(self.moment_radii) != angles.shape:
            raise InputError(
                f"Spool.moment_radii must be of shape {angles.shape} like angles, got {np.shape(self.moment_radii)}"
            )
        if not angles[0] <= self.zero_angle <= angles[-1]:
            raise InputError(
                f"Spool.zero_angle must be from {angles[0]:g} to {angles[-1]:g} rad like angles, got {self.zero_angle:g}"
            )

    @classmethod
    def drum(cls, radius: ScalarLike, *, turn: str = "ccw", joint: int = 0, turns: float = 2.0) -> Spool:
        """A round drum to which the cable is tied.

        Parameters
        ----------
        radius
            Radius at which the middle of the cable runs [m], > 0.
        turn
            Sense of the joint's turning that winds cable up on the drum: with ``"ccw"`` the path gets
            longer as the joint turns counter-clockwise, with ``"cw"`` shorter.
        joint
            Which joint, counted from 0.
        turns
            How far it may turn each way from zero [turns].

        Raises
        ------
        InputError
            A radius that is not positive, or an unknown turn.
        """
        size = units.metre(radius, "radius")
        if not size > 0:
            raise InputError(f"radius must be > 0 m, got {size}")
        if turn not in ("cw", "ccw"):
            raise InputError(f"turn must be 'cw' or 'ccw', got {turn!r}")
        if not turns > 0:
            raise InputError(f"turns must be > 0, got {turns}")
        signed = size if turn == "ccw" else -size
        reach = 2.0 * math.pi * turns
        return cls([-reach, reach], [signed, signed], joint=joint)

    @classmethod
    def from_profile(
        cls,
        points: Any,
        *,
        leaves: ScalarLike | GuideRoller,
        pull: str,
        over: tuple[ScalarLike, ScalarLike],
        joint: int = 0,
    ) -> Spool:
        """A cam from the line on which the middle of the cable lies.

        Parameters
        ----------
        points
            Points of that line in the frame of the spool's link, its axis as origin [m], shape
            (n, 2), n >= 8, in order along the cam. The line must be convex; it may be open.
        leaves
            How the cable leaves: a fixed direction away from the spool [rad], or a `GuideRoller`.
        pull
            ``"ccw"`` where a pull on the cable turns the spool counter-clockwise, else ``"cw"``.
        over
            Range of joint angles (from, to) [rad].
        joint
            Which joint, counted from 0.

        Raises
        ------
        InputError
            Too few points, a line that is not convex (with the place), an unknown pull, or a
            range in which the cable would leave the given line or meet the roller.

        Examples
        --------
        A round cam on a pin 5 mm off its middle, wound by a spring that pulls downwards:

        >>> import numpy as np
        >>> round_ = np.linspace(0.0, 2.0 * np.pi, 400)
        >>> rim = np.stack([0.005 + 0.03 * np.cos(round_), 0.03 * np.sin(round_)], axis=-1)
        >>> cam = Spool.from_profile(rim, leaves="-90 deg", pull="cw", over=("-90 deg", "90 deg"))
        >>> from springpoise.linkages import Arm, Body
        >>> round(cam.gradient(Arm(Body(1.0, (0.3, 0))), 0.0)[0], 9)
        0.035
        """
        profile = _Profile(points)
        if pull not in ("cw", "ccw"):
            raise InputError(f"pull must be 'cw' or 'ccw', got {pull!r}")
        low, high = units.radian_pair(over, "over")
        if not low < high:
            raise InputError(f"over must be (lower, higher) rad, got {(low, high)}")
        way = 1.0 if pull == "ccw" else -1.0
        angles = np.linspace(low, high, TABLE_POSES)
        if isinstance(leaves, GuideRoller):
            radii = profile.leaving_over(leaves, angles, way)
        else:
            radii = profile.leaving_towards(units.radian(leaves, "leaves") - way * math.pi / 2 - angles)
        # A pull that turns the spool counter-clockwise lets cable out as the joint turns that way.
        return cls(angles, -way * radii, joint=joint, zero_angle=float(low))

    @functools.cached_property
    def _radius(self) -> Lookup:
        from scipy.interpolate import CubicSpline, PPoly

        if np.size(self.angles) < 4:
            slopes = np.diff(self.moment_radii) / np.diff(self.angles)
            return Lookup(self.angles, np.stack([self.moment_radii[:-1], slopes], axis=1))
        spline: PPoly = CubicSpline(self.angles, self.moment_radii)
        return Lookup(self.angles, spline.c[::-1].T)

    @functools.cached_property
    def _taken_up(self) -> Lookup:
        return self._radius.antiderivative()

    @functools.cached_property
    def _at_zero(self) -> float:
        return float(self._taken_up(float(self.zero_angle)))

    def _angle(self, linkage: Linkage, q: Carrier) -> Carrier:
        if self.joint >= linkage.joint_count:
            raise InputError(
                f"Spool.joint must be below the linkage's number of joints ({linkage.joint_count}), got {self.joint}"
            )
        return joints_of(q, linkage.joint_count)[self.joint]

    def length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """Length of the path [m]: ``zero_length`` and what the spool has wound up; NaN outside the table."""
        return self.zero_length + (interpolate(self._angle(linkage, q), self._taken_up) - self._at_zero)

    def gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the derivative of the length [m/rad]: the moment radius for the spool's own."""
        radius = interpolate(self._angle(linkage, q), self._radius)
        return tuple(radius if joint == self.joint else 0.0 for joint in range(linkage.joint_count))

    def pulls(self, linkage: Linkage, q: Carrier) -> tuple[AppliedForce, ...]:
        """Not known: a spool's table does not say in which direction its cable pulls.

        Raises
        ------
        InputError
            Always; give the cable's direction by a `Cable` where pivot loads are wanted.
        """
        raise InputError(
            "Spool.pulls must know where the cable leaves to give a pivot load, got a table of moment radii only; "
            "use a Cable round a Disc where pivot loads are wanted"
        )


class _Profile:
    """A convex line by the direction of its normal: how far the tangent there lies from the axis."""

    def __init__(self, points: Any) -> None:
        from scipy.interpolate import CubicSpline

        if isinstance(points, list | tuple):  # of pairs, perhaps of strings
            points = [
                units.metre_pair(point, "points") if isinstance(point, list | tuple) else point for point in points
            ]
        line = np.asarray(units.metre(points, "points"), dtype=np.float64)
        if line.ndim != 2 or line.shape[1] != 2 or line.shape[0] < 8:
            raise InputError(f"points must be of shape (n, 2) in m with n >= 8, got shape {line.shape}")
        steps = np.hypot(*np.diff(line, axis=0).T)
        if not np.all(steps > 0):
            raise InputError(f"points must be distinct, got the same point twice at number {int(np.argmin(steps))}")
        before, behind = np.diff(line, axis=0)[:-1], np.diff(line, axis=0)[1:]
        turning = before[:, 0] * behind[:, 1] - before[:, 1] * behind[:, 0]
        way = 1.0 if np.sum(turning > 0) >= np.sum(turning < 0) else -1.0
        if not np.all(way * turning > 0):
            raise _hollow(line, int(np.argmin(way * turning)) + 1)
        if way < 0:
            line, steps = line[::-1], steps[::-1]
        self.along = np.concatenate([[0.0], np.cumsum(steps)])
        self.spline = CubicSpline(self.along, line)
        self.speed = self.spline.derivative()
        self.bend = self.speed.derivative()
        tangents = self.speed(self.along)
        normals = np.unwrap(np.arctan2(tangents[:, 1], tangents[:, 0])) - math.pi / 2
        self.normals = normals - 2.0 * math.pi * round((normals[0] + normals[-1]) / (4.0 * math.pi))
        if not np.all(np.diff(self.normals) > 0):  # points that scatter
            place = int(np.argmin(np.diff(self.normals)))
            raise _hollow(line, place if way > 0 else len(line) - 1 - place)

    def tangents(self, normals: Array) -> tuple[Array, Array, Array]:
        """For tangents with these outward normals: distance from the axis, way from its foot to the line, both in m.

        The third says whether the line reaches that far; beyond it, the tangent turns about its end.
        """
        first, last = self.normals[0], self.normals[-1]
        turned = first + (normals - first) % (2.0 * math.pi)
        turned = np.where(turned > first + 2.0 * math.pi - ROUNDING, turned - 2.0 * math.pi, turned)
        reached = turned <= last + ROUNDING
        nearer_first = turned - last > first + 2.0 * math.pi - turned
        wanted = np.clip(np.where(reached | ~nearer_first, turned, first), first, last)
        x, y = self.spline(self._places(wanted)).T
        c, s = np.cos(normals), np.sin(normals)
        return x * c + y * s, y * c - x * s, reached

    def _places(self, normals: Array) -> Array:
        """Places along the line with these normals, which are within the line's: Newton's steps, kept in brackets."""
        piece = np.clip(np.searchsorted(self.normals, normals) - 1, 0, len(self.along) - 2)
        low, high = self.along[piece], self.along[piece + 1]
        place = 0.5 * (low + high)
        for _ in range(60):
            dx, dy = self.speed(place).T
            ddx, ddy = self.bend(place).T
            beyond = (np.arctan2(dy, dx) - math.pi / 2 - normals + math.pi) % (2.0 * math.pi) - math.pi
            low, high = np.where(beyond <= 0, place, low), np.where(beyond >= 0, place, high)
            with np.errstate(all="ignore"):
                better = place - beyond * (dx * dx + dy * dy) / (dx * ddy - dy * ddx)
            inside = (better >= low) & (better <= high)
            step = np.where(inside, better, 0.5 * (low + high)) - place
            place = place + step
            if np.all(np.abs(step) <= 1e-15 * self.along[-1]):
                break
        return np.asarray(place)

    def leaving_towards(self, normals: Array) -> Array:
        """Distances of the tangents with these outward normals from the axis [m]."""
        arms, _, reached = self.tangents(normals)
        self._must_reach(normals, reached)
        return arms

    def leaving_over(self, roller: GuideRoller, q: Array, way: float) -> Array:
        """The same for tangents that touch a roller, the spool being turned by ``q``: Newton's steps."""
        away, bearing = math.hypot(*roller.at), math.atan2(roller.at[1], roller.at[0])
        normals = np.full(q.shape, bearing - way * math.pi / 2)
        settled = np.full(q.shape, False)
        for _ in range(100):
            arms, offsets, reached = self.tangents(normals - q)
            reach = (arms + roller.side * roller.radius) / away
            run = away * np.sqrt(np.maximum(1.0 - reach * reach, 1e-12))
            beyond = normals - (bearing - way * np.arccos(np.clip(reach, -1.0, 1.0)))
            straight = run - way * offsets
            if np.all(settled):
                break
            # The slope is straight/run; where it is slight or wrong, far from the solution, a plain step is safer.
            normals = normals - beyond / np.where(straight > 0.2 * run, straight / run, 1.0)
            settled = np.abs(beyond) < 1e-13
        fine = settled & (np.abs(reach) < 1.0) & (straight > 0.0)
        if not np.all(fine):
            place = int(np.argmin(fine))
            raise InputError(
                f"leaves must be a roller that the cable reaches from the spool, got one at {away:g} m with an arm of "
                f"{arms[place]:g} m at {q[place]:.4f} rad"
            )
        self._must_reach(normals - q, reached)
        return arms

    def _must_reach(self, normals: Array, reached: Array) -> None:
        if not np.all(reached):
            first, last = self.normals[0], self.normals[-1]
            middle = 0.5 * (first + last)
            needed = middle + math.remainder(normals[int(np.argmin(reached))] - middle, 2.0 * math.pi)
            raise InputError(
                f"points must reach to where the cable leaves, got normals from {first:.4f} to {last:.4f} rad, "
                f"needed {needed:.4f}"
            )


def _hollow(line: Array, number: int) -> InputError:
    x, y = line[number].tolist()
    return InputError(f"points must be on a convex line, got a hollow at number {number}, ({x:g}, {y:g}) m")

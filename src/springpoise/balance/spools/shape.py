"""A wrapping cam for an ordinary spring: the spool whose moment radius balances any one-joint mechanism.

Source of the construction: Kobayashi, K. (2001), New design method for spring balancers, Journal of
Mechanical Design 123(4):494-500 (moment radius from energy; known from its abstract). Envelope,
curvature and the round-about check are plane geometry and are derived in ``spool_geometry``.
"""

from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.residuals import residual
from springpoise.balance.spools.checks import ROUNDING, SpoolCheck, checks_of
from springpoise.balance.spools.energy import NOTHING, Pull, Work
from springpoise.balance.spools.geometry import Curve, Layout
from springpoise.balance.spools.result import ShapedSpool
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.mechanism.travel import joint_units_of
from springpoise.paths import GuideRoller, Spool
from springpoise.springs.protocol import Spring, working_range_of
from springpoise.tables import degrees
from springpoise.units import ScalarLike

__all__ = ["convex_beyond", "shape_spool"]

Array = NDArray[np.float64]

FEWEST, MOST = 1025, 16385
"""Numbers of poses in the spool's table; doubled until the torque between them is right."""

SPACINGS = 4
"""How often the angles of the table are spaced anew."""

BETWEEN = 1e-10
"""Residual between the table's poses over the peak torque that is small enough [1]."""


def convex_beyond(load_ratio: ScalarLike) -> float:
    """Angle from upright beyond which a spool with a preloaded spring is convex, for a sinusoidal load.

    An arm of gravity torque ``G sin φ`` (φ from upright), a spring of rate k stretched by ``x0``
    beyond its unloaded length at the upright, a cable that leaves in a fixed direction:
    ``cos φ* = (e + 1 - sqrt(2e + 1)) / e`` with ``e = 2 G / (k x0²)``. Without preload (e infinite)
    the spool, half a nephroid, is convex from upright on.

    Parameters
    ----------
    load_ratio
        e [1], > 0: the energy that gravity gives between upright and hanging over that of the preload.

    Returns
    -------
    float
        φ* [rad].

    Raises
    ------
    InputError
        A ratio that is not positive.

    Examples
    --------
    >>> import math
    >>> round(math.degrees(convex_beyond(1.0)), 6)
    74.457732
    """
    e = units.number(load_ratio, "load_ratio")
    if not e > 0:
        raise InputError(f"load_ratio must be > 0, got {e}")
    root = math.sqrt(2.0 * e + 1.0)
    return math.acos((root - 1.0) / (root + 1.0))  # the formula above, without its cancellation for small e


def shape_spool(
    arm: Arm | Mechanism,
    spring: Spring,
    *,
    leaves: ScalarLike | GuideRoller,
    cable_diameter: ScalarLike,
    count: int = 1,
    start_length: ScalarLike | None = None,
    start_angle: ScalarLike | None = None,
    over: Any = None,
    least_radius: ScalarLike = 0.0,
    gravity: Any = None,
) -> ShapedSpool:
    """The line of a spool on the joint by which an ordinary spring balances a mechanism.

    The spring's energy is to take up the work of gravity and of whatever springs are there
    already; its length follows from that, and the moment radius from the length. The line is the
    envelope of the cable's positions in the frame of the turning link.

    Parameters
    ----------
    arm
        An arm, or a mechanism with one revolute joint of any kind; its springs stay.
    spring
        The spring at the end of the cable: any that pulls and grows stronger or stays as strong.
    leaves
        How the cable leaves the spool: a fixed direction [rad], or a ``paths.GuideRoller`` (its place is
        measured from the joint's axis).
    cable_diameter
        Diameter of the cable [m], >= 0. The groove's bottom lies half of it inside the pitch line.
    count
        Equal springs side by side.
    start_length
        The spring's own length at ``start_angle`` [m]; None for the length at which it begins to pull.
    start_angle
        Joint angle at which it has that length [rad]; None for the angle at which the spring is
        shortest, where the mechanism's energy is greatest.
    over
        Range of the joint (from, to) [rad]; None for the mechanism's travel.
    least_radius
        Least radius of curvature that the cable allows [m], measured to its middle, >= 0. Half the
        cable's diameter is the least in any case.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    ShapedSpool
        Not a success where the spring cannot do the work, or the line is not convex: a spring that
        is preloaded near the upright, for one (see ``convex_beyond``). It names the angles.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A mechanism of several joints, nothing to balance, a range that is empty, a spring that does
        not pull at its start length, or one without load that would have to give a torque there.

    Examples
    --------
    A spring without preload that begins to pull at the upright: the spool is half a nephroid.

    >>> from springpoise import Arm, Body, ZeroLengthSpring, balance
    >>> arm = Arm(Body("2 kg", ("0.35 m", 0)))
    >>> spool = balance.shape_spool(arm, ZeroLengthSpring("2 N/mm"), leaves="180 deg", cable_diameter="2 mm",
    ...                             over=("-60 deg", "90 deg"))
    >>> spool.success, round(float(spool.moment_radii[-1] * -1e3), 4)
    (True, 58.5861)
    """
    mechanism, ends = _mechanism(arm, over, gravity)
    mount = SpringMount(spring, Spool.drum(1.0), count=count)  # the path is replaced below
    diameter, radius = (_size(cable_diameter, "cable_diameter"), _size(least_radius, "least_radius"))
    towards = leaves if isinstance(leaves, GuideRoller) else _single(units.radian(leaves, "leaves"), "leaves", "rad")
    layout = _layout(mechanism, ends, mount, start_length, start_angle, towards)
    checks = checks_of(layout, least_radius=max(radius, 0.5 * diameter))
    curve, balanced = _tabled(layout, mount)
    wound, stray, steps = _rolled_out(curve, layout)
    middles = 0.5 * (curve.angles[1:] + curve.angles[:-1])
    return ShapedSpool(
        mechanism=balanced,
        angles=curve.angles,
        spring_lengths=curve.lengths,
        moment_radii=curve.radii,
        normals=curve.normals,
        slopes=curve.slopes,
        curvature_radii=curve.curvatures,
        straight_lengths=curve.straight,
        pitch_line=curve.pitch_line,
        machined_line=curve.inside(0.5 * diameter),
        cable_diameter=diameter,
        leaves=towards,
        pull="ccw" if layout.way > 0 else "cw",
        start_angle=layout.start,
        start_length=layout.pull.start_length,
        wound_length=wound,
        roll_out_error=stray,
        checks=(*checks, *_folded(curve, steps, checks)),
        residual=residual(balanced, np.concatenate([curve.angles, middles])),
    )


def _mechanism(arm: Any, over: Any, gravity: Any) -> tuple[Mechanism, tuple[float, float]]:
    mechanism = Mechanism(arm) if isinstance(arm, Arm) else arm
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"arm must be an Arm or a Mechanism, got {arm!r}")
    kinds = joint_units_of(mechanism.linkage)
    if kinds != ("rad",):
        raise InputError(f"arm must have one revolute joint, got joints in {', '.join(kinds)}")
    low, high = mechanism.travel_or_turn if over is None else units.radian_pair(over, "over")
    if not low < high:
        raise InputError(f"over must be (lower, higher) rad, got {(low, high)}")
    changes = {} if gravity is None else {"gravity": gravity}
    mechanism = attrs.evolve(mechanism, travel=(low, high), **changes)
    if not isinstance(mechanism.holding_torque(0.5 * (low + high)), float):
        raise InputError("arm must be a single one, got fields that are arrays")
    return mechanism, (float(low), float(high))


def _size(value: ScalarLike, name: str) -> float:
    size = _single(units.metre(value, name), name, "m")
    if size < 0:
        raise InputError(f"{name} must be >= 0 m, got {size}")
    return size


def _single(value: Any, name: str, unit: str) -> float:
    if not isinstance(value, float):
        raise InputTypeError(f"{name} must be a single value in {unit}, got {value!r}")
    return value


def _layout(
    mechanism: Mechanism, ends: tuple[float, float], mount: SpringMount, length: Any, angle: Any, leaves: Any
) -> Layout:
    work = Work(mechanism, ends)
    peak = float(np.max(np.abs(mechanism.gravity_torque(work.poses))))
    if not work.peak > NOTHING * peak:
        raise InputError(f"arm must have something left to balance, got a torque of at most {work.peak:g} N*m")
    start = work.highest() if angle is None else _single(units.radian(angle, "start_angle"), "start_angle", "rad")
    if not ends[0] <= start <= ends[1]:
        low, high = map(degrees, ends)
        raise InputError(f"start_angle must be from {low} to {high} as over is, got {degrees(start)}")
    pull, unloaded = _pull(mount, length, work, start)
    way = 1.0 if work.torques[int(np.argmax(np.abs(work.torques)))] > 0 else -1.0
    side = 1.0 if start - ends[0] < ends[1] - start else -1.0
    if unloaded:
        at_start = abs(float(work.torque(np.array([start]))[0]))
        if at_start > NOTHING * work.peak:
            raise InputError(
                f"start_length must be beyond {pull.start_length:g} m, where the spring has no load yet, since "
                f"{at_start:.4g} N*m is wanted at {degrees(start)}, got {pull.start_length:g}; stretch it there or "
                "start where the arm needs no torque"
            )
        if not (start - ends[0] < NOTHING or ends[1] - start < NOTHING):
            low, high = map(degrees, ends)
            raise InputError(
                f"over must lie on one side of {degrees(start)}, where the spring has no load and changes sides, got "
                f"{low} to {high}"
            )
    return Layout(work=work, pull=pull, start=start, leaves=leaves, way=way, side=side, unloaded=unloaded)


def _pull(mount: SpringMount, length: Any, work: Work, start: float) -> tuple[Pull, bool]:
    """The spring at its start, and whether it has no load there."""
    low, high = (float(end) for end in working_range_of(mount.spring))
    if length is None and not math.isfinite(low):
        raise InputError(
            f"start_length must be given for a {type(mount.spring).__name__}, which begins to pull nowhere, got None"
        )
    begin = low if length is None else _single(units.metre(length, "start_length"), "start_length", "m")
    if not low <= begin <= high:
        raise InputError(f"start_length must be within the spring's working range {low:g} to {high:g} m, got {begin:g}")
    pull = Pull(mount, begin)
    farthest = pull.lengths(np.array([np.max(work.since(start, work.poses))]))
    loads = pull.load(np.array([begin, farthest[0] if math.isfinite(farthest[0]) else begin]))
    if not loads[0] >= 0 or (loads[0] == 0 and not float(pull.load(np.array([begin + 1e-3]))[0]) > 0):
        raise InputError(
            f"start_length must be where the spring pulls, got {begin:g} m, where its load is {loads[0]:.4g} N"
        )
    return pull, bool(loads[0] <= NOTHING * loads[1])


def _tabled(layout: Layout, mount: SpringMount) -> tuple[Curve, Mechanism]:
    """The spool at so many angles that the torque between them is right, and its mechanism."""
    n, bare = FEWEST, layout.work.mechanism
    while True:
        curve = layout.curve(_spaced(layout, n))
        if not np.all(np.isfinite(curve.radii)):
            return curve, bare
        path = Spool(curve.angles, curve.radii, zero_angle=layout.start, zero_length=layout.pull.start_length)
        balanced = bare.with_springs((*bare.springs, attrs.evolve(mount, path=path)))
        middles = 0.5 * (curve.angles[1:] + curve.angles[:-1])
        if n >= MOST or np.max(np.abs(balanced.holding_torque(middles))) <= BETWEEN * layout.work.peak:
            return curve, balanced
        n = 2 * n - 1


def _spaced(layout: Layout, n: int) -> Array:
    """``n`` angles over the range, in equal steps of the mean of angle and spring length as shares of their ranges.

    A spring with little load at the start lengthens fast there, and the moment radius falls fast.
    """
    low, high = layout.work.over
    q = np.linspace(low, high, n)
    for _ in range(SPACINGS):
        lengths = layout.pull.lengths(layout.work.since(layout.start, q))
        if not np.all(np.isfinite(lengths)):
            return np.linspace(low, high, n)
        steps = np.abs(np.diff(lengths))
        share = (q[1:] - q[:-1]) / (high - low) + (steps / np.sum(steps) if np.sum(steps) > 0 else 0.0)
        along = np.concatenate([[0.0], np.cumsum(share)])
        q = np.interp(np.linspace(0.0, along[-1], n), along, q)
        q[0], q[-1] = low, high
    return q


def _rolled_out(curve: Curve, layout: Layout) -> tuple[float, float, Array]:
    """Cable wound over the range [m], how far all cable together strays from the spring's length [m], and steps [m].

    The wound length is measured from point to point of the line, each chord taken for that of a
    circle over the angle between its normals; it knows nothing of the curvature radii. A step is
    negative where the line goes back.
    """
    points, turned = curve.pitch_line, np.diff(curve.normals)
    chords = np.diff(points, axis=0)
    middle = 0.5 * (curve.normals[1:] + curve.normals[:-1])
    along = np.sign(turned) * (chords[:, 1] * np.cos(middle) - chords[:, 0] * np.sin(middle))
    arcs = np.hypot(*chords.T) / np.sinc(turned / (2.0 * math.pi))
    laid = np.concatenate([[0.0], np.cumsum(arcs)])
    wound = laid if layout.way < 0 else laid[-1] - laid
    together = wound + curve.straight + curve.guided - curve.lengths
    return float(laid[-1]), float(np.ptp(together)), along


def _folded(curve: Curve, steps: Array, checks: tuple[SpoolCheck, ...]) -> tuple[SpoolCheck, ...]:
    """A check that fails where the line goes back between two poses, though it is convex at both."""
    back = np.flatnonzero(steps < -ROUNDING)
    ranges = [(float(curve.angles[i]), float(curve.angles[i + 1])) for i in back.tolist()]
    known = checks[0].fails_over
    new = [(low, high) for low, high in ranges if not any(a < high and low < b for a, b in known)]
    if not new:
        return ()
    worst = int(np.nanargmin(steps))
    return (
        SpoolCheck(
            what="step of the line, which folds where the spring's stiffness grows at once",
            value=float(steps[worst]),
            allowed=0.0,
            is_upper=False,
            unit="m",
            at=float(curve.angles[worst]),
            fails_over=tuple(new),
        ),
    )

"""Another payload: which point to move, how far, and at which pose that costs no energy.

For a spring of zero free length, k·a·b has to follow the first moment M of the masses, so that the
anchor goes from a to a·M'/M or the attachment from b to b·M'/M. Moving the anchor at arm angle θ
changes the spring's energy by ``k [(a'² - a²)/2 - (a' - a) b sin θ]``. That is nothing where the
spring is as long after as before, at ``sin θ* = (a + a')/(2 b)``; on the way the energy dips by
``k ((a' - a)/2)²/2``, so the anchor snaps over and needs a lock.

A second spring can carry the energy at every other pose too: where the adjuster couples the anchor to
a storage spring so that ``k a²/2 + k_s s(a)²/2`` is constant, as on a right-angle crank of arm A
(a = A cos f, s = A sin f, k_s = k), it moves freely with the arm held where ``sin θ = 0``. After
Barents, Schenk, van Dorsser, Wisse and Herder (2011), Spring-to-spring balancing as energy-free
adjustment method in gravity equilibrators, Journal of Mechanical Design 133(6):061010 (known from
its abstract; the identities here are derived and tested).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.payloads.result import SLIGHT, AdjustmentStep, PayloadAdjustment, PointToMove
from springpoise.balance.payloads.slides import Slide, slides_of
from springpoise.balance.residuals import poses_over, residual
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm, Point
from springpoise.mechanism import Mechanism
from springpoise.springs.protocol import working_range_of

__all__ = ["adjust_for_payload"]

Array = NDArray[np.float64]

TIE = 1e-9
"""Residuals that differ by less than this share of the gravity torque are alike [1]."""

IDLE = 1e-9
"""A payload whose torque is below this share of its greatest does nothing at that pose [1]."""

STILL = 1e-7
"""A shift below this share of the point's distance from its body's origin is what a search leaves: none [1]."""

AT_THE_END = 1e-9
"""A shift this near to the end of its reach has run into it [m]."""


def adjust_for_payload(
    mechanism: Mechanism,
    *,
    payloads: Any,
    at: Point | None = None,
    steps: int = 5,
    mount: str | int | None = None,
    move: str | None = None,
    along: Any = None,
    reach: Any = None,
    adjust_at: Any = None,
    over: Any = None,
) -> PayloadAdjustment:
    """Which point of a spring to move for another payload, how far, and what that costs.

    For springs of zero free length straight between ground and arm the places are in closed form and
    the balance stays exact, as long as the payload's moment keeps the direction of the arm's; then
    ``exact_place`` and ``place`` are one. Otherwise the shift is the one whose worst residual over
    the poses is least.

    Parameters
    ----------
    mechanism
        The mechanism with one joint, its springs set as they are now. A payload that it carries is taken off.
    payloads
        Range of payloads (from, to) [kg].
    at
        Where the payload's centre of mass sits; None for the tip of an arm whose length is given.
    steps
        How many payloads of the range are looked at, >= 2.
    mount
        Name or number (from 0) of the mount to adjust; None for whichever serves best.
    move
        ``"anchor"`` on the ground or ``"attachment"`` on the arm; None for whichever serves best. The
        anchor of a cable is all that it meets on the ground, moved together as on one carriage.
    along
        Direction in which the point moves, in the frame of its body [rad]; None for away from that
        frame's origin: an anchor above the pivot along its vertical, an attachment along the arm.
    reach
        Least and greatest shift (from, to) from where the point is now [m]; None for no limit.
    adjust_at
        Pose for which the table gives the work of adjusting [rad]; None for the middle of the travel.
    over
        Poses [rad]; None for 181 over the travel.

    Returns
    -------
    PayloadAdjustment
        Not a success where ``reach`` is too short, or the spring would leave its working range.

    Raises
    ------
    InputError, InputTypeError, UnitError
        An empty range, a payload without a place, a mount that does not exist or has no point to move.

    Examples
    --------
    >>> from springpoise import Arm, Body, Point, balance
    >>> lift = balance.sine_match(Arm(Body("2 kg", ("0.35 m", 0))), attach_radius="0.16 m", anchor_height="0.10 m").mechanism
    >>> found = balance.adjust_for_payload(lift, payloads=(0, "1 kg"), at=Point("arm", ("0.35 m", 0)), move="anchor")
    >>> last = found.chosen.steps[-1]
    >>> [round(1e3 * x, 3) + 0.0 for x in last.place]
    [0.0, 150.0]
    """
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"mechanism must be a Mechanism, got {mechanism!r}")
    if move not in (None, "anchor", "attachment"):
        raise InputError(f"move must be 'anchor', 'attachment' or None, got {move!r}")
    if isinstance(steps, bool) or not isinstance(steps, int) or steps < 2:
        raise InputError(f"steps must be a whole number >= 2, got {steps!r}")
    low, high = units.pair(payloads, "kg", "payloads")
    if not 0 <= low < high:
        raise InputError(f"payloads must be (lower, higher) kg, both >= 0, got {(low, high)}")
    q = poses_over(mechanism, over)
    empty = mechanism.without_payload()
    where = _where(empty, at)
    limits = None if reach is None else _reach(reach)
    direction = None if along is None else float(units.radian(along, "along"))
    first, last = mechanism.travel_or_turn
    held_at = 0.5 * (first + last) if adjust_at is None else float(units.radian(adjust_at, "adjust_at"))
    slides = slides_of(empty, mount=mount, move=move, along=direction)
    loaded = [(float(mass), empty.with_payload(float(mass), where)) for mass in np.linspace(low, high, steps)]
    points = [_point(empty, slide, loaded, q, limits) for slide in slides]
    scale = residual(loaded[-1][1].with_springs(()), q).peak_gravity_torque
    return PayloadAdjustment(
        points=tuple(sorted(points, key=lambda one: (_missing(one), math.ceil(one.worst / (TIE * scale)), one.way))),
        payloads=(float(low), float(high)),
        at=where,
        friction_payloads=_held_by_friction(mechanism, empty, where, q),
        adjust_at=float(held_at),
    )


def _missing(point: PointToMove) -> int:
    return sum(not (step.within_reach and step.margin >= -SLIGHT) for step in point.steps)


def _where(mechanism: Mechanism, at: Any) -> Point:
    if at is None:
        if not isinstance(mechanism.linkage, Arm):
            raise InputError("at must be given for a linkage other than an Arm, got None")
        return mechanism.linkage.tip
    mechanism.with_payload(0.0, at)  # checks it
    return at  # type: ignore[no-any-return]


def _reach(value: Any) -> tuple[float, float]:
    low, high = units.metre_pair(value, "reach")
    if not low <= 0 <= high or low == high:
        raise InputError(f"reach must be (lower, higher) m around 0, where the point is now, got {(low, high)}")
    return float(low), float(high)


def _point(
    mechanism: Mechanism,
    slide: Slide,
    loaded: list[tuple[float, Mechanism]],
    q: Array,
    reach: tuple[float, float] | None,
) -> PointToMove:
    mount = mechanism.mount_name(slide.index)
    return PointToMove(
        name=f"{slide.place} of {mount}",
        move=slide.place,
        mount=mount,
        body=slide.body,
        place_now=(slide.at.real, slide.at.imag),
        direction=(slide.along.real, slide.along.imag),
        steps=tuple(_step(slide, mass, before, q, reach) for mass, before in loaded),
    )


def _step(slide: Slide, mass: float, before: Mechanism, q: Array, reach: tuple[float, float] | None) -> AdjustmentStep:
    shift = slide.shift_for(before, q, reach)
    after = slide.moved(before, shift)
    moves = abs(shift) > STILL * (abs(slide.at) or 1.0)
    free = _free_poses(before, after) if moves else ()
    spring_range = working_range_of(after.springs[slide.index].spring)
    lengths = np.broadcast_to(after.spring_states(q)[slide.index].length, q.shape)
    return AdjustmentStep(
        payload=mass,
        shift=shift,
        place=slide.place_after(shift),
        exact_place=slide.exact_place(before),
        within_reach=reach is None or not _run_into(slide, before, q, shift, reach),
        mechanism=after,
        before=before,
        residual=residual(after, q),
        residual_before=residual(before, q),
        free_at=free,
        dip=_dip(slide, before, shift, free[0]) if free else math.nan,
        margin=float(min(np.min(lengths) - spring_range[0], spring_range[1] - np.max(lengths))),
    )


def _run_into(slide: Slide, before: Mechanism, q: Array, shift: float, reach: tuple[float, float]) -> bool:
    """Whether the point would have to go on beyond the end of its reach."""
    if min(shift - reach[0], reach[1] - shift) > AT_THE_END:
        return False
    return abs(slide.shift_for(before, q, None) - shift) > AT_THE_END


def _free_poses(before: Mechanism, after: Mechanism) -> tuple[float, ...]:
    """Poses of the travel at which the springs hold as much energy before as after [rad]."""
    from scipy.optimize import brentq

    def change(q: Any) -> Any:
        return after.spring_energy(q) - before.spring_energy(q)

    poses = before.poses(721)
    values = np.broadcast_to(change(poses), poses.shape)
    found = [float(q) for q in poses[values == 0.0]]
    for i in np.flatnonzero(values[:-1] * values[1:] < 0.0):
        root: Any = brentq(lambda q: float(change(float(q))), float(poses[i]), float(poses[i + 1]), xtol=1e-14)
        found.append(float(root))
    return tuple(sorted(found))


def _dip(slide: Slide, before: Mechanism, shift: float, q: float) -> float:
    """How far the springs' energy falls on the way to a shift, the arm being held at ``q`` [J]."""
    from scipy.optimize import minimize_scalar

    def energy(share: float) -> float:
        return float(slide.moved(before, share * shift).spring_energy(q))

    shares = np.linspace(0.0, 1.0, 17)
    lowest = float(shares[int(np.argmin([energy(float(share)) for share in shares]))])
    bounds = (max(lowest - 0.0625, 0.0), min(lowest + 0.0625, 1.0))
    found: Any = minimize_scalar(energy, bounds=bounds, method="bounded", options={"xatol": 1e-9})
    return energy(0.0) - float(found.fun)


def _held_by_friction(mechanism: Mechanism, empty: Mechanism, at: Point, q: Array) -> tuple[float, float] | None:
    """Payloads for which the holding torque stays within the friction band over the poses and between them [kg].

    The band is that of the mechanism as it is; that a payload loads the pivot more is left out.
    """
    loaded = empty.with_payload(1.0, at)

    def window(poses: Array) -> tuple[Array, Array]:
        """Least and greatest payload that each pose holds [kg]."""
        band, lacking = mechanism.friction_band(poses), empty.holding_torque(poses)
        one = np.broadcast_to(loaded.holding_torque(poses) - lacking, poses.shape)
        idle = np.abs(one) <= IDLE * size
        held = np.abs(lacking) <= band + IDLE * size
        with np.errstate(all="ignore"):
            ends = np.stack([(-band - lacking) / one, (band - lacking) / one])
        low, high = np.where(idle, np.where(held, -math.inf, math.inf), ends.min(axis=0)), ends.max(axis=0)
        return low, np.where(idle, np.where(held, math.inf, -math.inf), high)

    size = float(np.max(np.abs(loaded.holding_torque(q) - empty.holding_torque(q))))
    low = max(-_least(lambda poses: -window(poses)[0], q), 0.0)
    high = _least(lambda poses: window(poses)[1], q)
    nothing = IDLE * residual(empty.with_springs(()), q).peak_gravity_torque / size  # rounding of a balanced arm [kg]
    return (low, max(low, high)) if low <= high + nothing else None


def _least(value: Callable[[Array], Array], q: Array) -> float:
    """Least value over the poses, refined between the neighbours of the lowest."""
    from scipy.optimize import minimize_scalar

    poses = np.sort(q)
    values = value(poses)
    best = int(np.argmin(values))
    if poses.size == 1 or not math.isfinite(values[best]):
        return float(values[best])
    bounds = (float(poses[max(best - 1, 0)]), float(poses[min(best + 1, poses.size - 1)]))
    found: Any = minimize_scalar(
        lambda pose: float(value(np.array([pose]))[0]), bounds=bounds, method="bounded", options={"xatol": 1e-10}
    )
    return float(min(values[best], found.fun))

"""What a pulley's radius costs a spring of zero free length, and what each remedy gives.

A cable that runs round a pulley of radius ρ at the anchor is longer than the distance d to the
attachment by ``-s ρ (β - β0)`` and terms of second order, β being the direction to the attachment
and s = +1 for a cable that comes up to the pulley and turns clockwise. The torque is wrong by
``k s ρ d/dθ [d (β - β0)]``: in proportion to the radius. Derived here from the tangent to a circle.
"""

from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.balance.pulleys.routes import PulleyRemedy, Routes
from springpoise.balance.residuals import poses_over
from springpoise.balance.sine import SineMatch, as_mechanism, sine_match
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism
from springpoise.tables import degrees, facts, grid, millimetres, number
from springpoise.units import ScalarLike

__all__ = ["PulleyRemedies", "PulleyRemedy", "pulley_remedies"]

OTHER = {"cw": "ccw", "ccw": "cw"}


@attrs.frozen
class PulleyRemedies:
    """What a pulley's radius costs, and what each remedy gives."""

    ideal: SineMatch
    """The balance with a pulley of no size."""
    pulley_radius: float
    """Radius at which the middle of the cable runs [m]."""
    turn: str
    """Sense in which the cable runs round the pulley from spring to arm: ``"cw"`` or ``"ccw"``."""
    set_at: float
    """Pose at which the cable's length is set [rad]."""
    first_order: float
    """Worst residual over the peak gravity torque for a metre of radius, for small radii [1/m]."""
    remedies: tuple[PulleyRemedy, ...]
    """Nothing at all, and every remedy, in the order of what they ask for; without the joint drum where the cable
    would turn on or off it by more than three quarters of a turn."""

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        nothing = self.remedies[0].residual.worst_fraction
        return (
            f"a pulley radius of {millimetres(self.pulley_radius)} leaves {100 * nothing:.2f} % of the peak gravity "
            f"torque where nothing is done about it"
        )

    def named(self, name: str) -> PulleyRemedy:
        """The remedy of that name.

        Raises
        ------
        InputError
            There is none.
        """
        for remedy in self.remedies:
            if remedy.name == name:
                return remedy
        raise InputError(f"name must be one of {', '.join(repr(one.name) for one in self.remedies)}, got {name!r}")

    def __str__(self) -> str:
        rows = [
            ("status", self.status),
            ("for small radii", f"{0.1 * self.first_order:.3f} % for each mm of radius"),
            ("ideal rate", number(self.ideal.rate, "N/m")),
        ]
        table = [
            (one.name, f"{100 * one.residual.worst_fraction:.3f}", f"{one.rate_ratio:.4f}") for one in self.remedies
        ]
        return "\n".join(
            [
                "pulley remedies",
                facts(rows),
                grid(("remedy", "worst residual / %", "rate / ideal"), table),
                facts((one.name, one.change) for one in self.remedies[1:]),
            ]
        )


def pulley_remedies(
    arm: Arm | Mechanism,
    *,
    pulley_radius: ScalarLike,
    attach_radius: ScalarLike,
    anchor_height: ScalarLike,
    anchor_angle: ScalarLike = math.pi / 2,
    turn: str = "cw",
    set_at: ScalarLike | None = None,
    over: Any = None,
    gravity: Any = None,
) -> PulleyRemedies:
    """What a pulley of some radius at the anchor costs, and what each remedy gives.

    Parameters
    ----------
    arm
        The arm, or a mechanism of one arm; springs that are there already stay.
    pulley_radius
        Radius at which the middle of the cable runs [m], > 0: groove radius plus half the cable's
        diameter.
    attach_radius, anchor_height, anchor_angle
        As in ``sine_match``: distance from pivot to attachment [m], distance from pivot to anchor
        [m] and its direction [rad].
    turn
        Sense in which the cable runs round the pulley on its way from spring to arm: ``"cw"`` for one
        that comes up behind the pivot and over the pulley towards an arm to the right.
    set_at
        Pose at which the stretch is set to what the ideal spring has [rad]; None for the middle of
        the poses. What is refitted does not depend on it.
    over
        Poses [rad]; None for 181 over the travel.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    PulleyRemedies

    Raises
    ------
    InputError, InputTypeError
        A value out of range, a pulley as large as half the least distance to the attachment, or
        poses over which the cable would turn round the pulley more than once.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, balance
    >>> lift = Mechanism(Arm(Body("2 kg", ("0.35 m", 0))), travel=("-60 deg", "60 deg"))
    >>> found = balance.pulley_remedies(lift, pulley_radius="10 mm", attach_radius="80 mm", anchor_height="100 mm")
    >>> round(found.remedies[0].residual.worst_fraction, 4)
    0.1097
    >>> round(found.named("mirrored pair").residual.worst_fraction, 4)
    0.0045
    """
    if turn not in OTHER:
        raise InputError(f"turn must be 'cw' or 'ccw', got {turn!r}")
    mechanism = as_mechanism(arm)
    ideal = sine_match(
        mechanism,
        attach_radius=attach_radius,
        anchor_height=anchor_height,
        anchor_angle=anchor_angle,
        gravity=gravity,
    )
    bare = ideal.mechanism.with_springs(ideal.mechanism.springs[:-1])
    q = poses_over(bare, over)
    at = 0.5 * float(q.min() + q.max()) if set_at is None else float(units.radian(set_at, "set_at"))
    if not q.min() <= at <= q.max():
        low, high = degrees(float(q.min())), degrees(float(q.max()))
        raise InputError(f"set_at must be within the poses, {low} to {high}, got {degrees(at)}")
    routes = Routes(
        bare=bare,
        ideal=ideal,
        radius=_radius(pulley_radius),
        q=q,
        set_at=at,
    )
    nearest = float(np.min(np.abs(routes.reach(routes.swept))))
    if not 2.0 * routes.radius < nearest:
        raise InputError(
            f"pulley_radius must be less than half the least distance from anchor to attachment ({nearest:g} m), "
            f"got {routes.radius:g}"
        )
    return PulleyRemedies(
        ideal=ideal,
        pulley_radius=routes.radius,
        turn=turn,
        set_at=routes.set_at,
        first_order=routes.first_order(),
        remedies=tuple(_remedies(routes, turn)),
    )


def _radius(value: ScalarLike) -> float:
    radius = units.metre(value, "pulley_radius")
    if not isinstance(radius, float):
        raise InputTypeError(f"pulley_radius must be a single value in m, got {value!r}")
    if not radius > 0:
        raise InputError(f"pulley_radius must be > 0 m, got {radius}")
    return radius


def _remedies(routes: Routes, turn: str) -> list[PulleyRemedy]:
    sense = 1.0 if turn == "cw" else -1.0
    rho, rate = routes.radius, routes.ideal.rate
    entry = routes.entry
    refits = [
        routes.refitted("refit, least squares", turn, 0.0, "rms"),
        routes.refitted("refit, least worst", turn, 0.0, "minimax"),
        routes.refitted("shift by the radius, refit", turn, -sense * rho, "rms"),
        routes.refitted("best shift, refit", turn, routes.best_shift(turn), "rms"),
    ]
    found = [
        routes.made("nothing", "none", [routes.pulley(turn, rate)]),
        *refits,
        routes.made(
            "mirrored pair",
            f"two springs of {number(0.5 * rate, 'N/m')}, the cables round opposite sides of two pulleys",
            [routes.pulley(one, 0.5 * rate) for one in (turn, OTHER[turn])],
        ),
        routes.made(
            "twin entry rollers",
            f"two rollers of {millimetres(rho)} side by side, the cable enters between them at {degrees(entry)}",
            [routes.rollers()],
        ),
        routes.made(
            "equal far pulley that does not turn",
            f"a pulley of {millimetres(rho)} on the arm, kept from turning with it by a parallelogram or a 1:1 belt",
            [routes.kept()],
        ),
    ]
    drums = routes.drums(turn)
    if drums is None:
        return found
    change = (
        f"a pulley of {millimetres(rho)} fixed to the arm, and a drum of {millimetres(rho)} on the joint "
        "to which the cable's other end is tied"
    )
    return [*found, routes.made("equal far pulley and joint drum", change, [drums])]

"""One arm, the ways of balancing it side by side."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.balance.methods.assumptions import MethodAssumptions
from springpoise.balance.methods.at_pivot import constant_force, counterweight, spool, torsion
from springpoise.balance.methods.figures import figures_of
from springpoise.balance.methods.frame import CannotSize, Frame, Sized, frame_of
from springpoise.balance.methods.result import MethodComparison, MethodRow
from springpoise.balance.methods.two_points import gas, pulley, rubber, rubber_pulley, straight
from springpoise.balance.residuals import poses_over
from springpoise.balance.sine import as_mechanism
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Arm
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs import GasSpring, RubberTube
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.units import ScalarLike

__all__ = ["METHODS", "compare_methods"]

OFFSET_SCALES = re.compile(r"(?<!delta_)(deg[CF]\b|degree_?(Celsius|Fahrenheit)|[Cc]elsius|[Ff]ahrenheit|°\s*[CF]|℃|℉)")
"""Temperatures on a scale that does not begin at nothing, and so no differences."""

METHODS: dict[str, tuple[str, Callable[[Frame], Sized]]] = {
    "pulley": ("spring on pulley", pulley),
    "straight": ("straight spring", straight),
    "torsion": ("torsion spring", torsion),
    "gas": ("gas spring", gas),
    "rubber": ("straight rubber", rubber),
    "rubber pulley": ("rubber on pulley", rubber_pulley),
    "counterweight": ("counterweight", counterweight),
    "constant force": ("constant force", constant_force),
    "spool": ("shaped spool", spool),
}
"""The methods by name, each with what the table calls it."""


def compare_methods(
    arm: Arm | Mechanism,
    *,
    attach_radius: Any,
    anchor_height: Any,
    over: Any = None,
    methods: Sequence[str] | None = None,
    norm: Literal["minimax", "rms"] = "minimax",
    attach_skew: Any = ("-20 deg", "20 deg"),
    assumptions: MethodAssumptions | None = None,
    warming: ScalarLike = 20.0,
    payload_change: ScalarLike = 0.1,
    gravity: Any = None,
) -> MethodComparison:
    """Balance one arm in every usual way, each as well as it can be between the same bounds.

    ``"pulley"``: a spring hidden behind a pulley, or behind two rollers where the arm swings to both
    sides of the vertical, as one of zero free length. ``"straight"``: an ordinary extension spring
    from point to point. ``"torsion"``: a torsion spring at the pivot with its preload. ``"gas"``: a
    gas spring from below. ``"rubber"`` and ``"rubber pulley"``: a rubber tube, straight and behind a
    pulley. ``"counterweight"``. ``"constant force"``: a spring of constant force on a round drum.
    ``"spool"``: an ordinary spring on a spool shaped so that its energy mirrors gravity's.

    The springs are as strong as the arm needs, not parts of a catalogue: the table says what each
    way can do at its best. A method that cannot be sized is a row that says why.

    Parameters
    ----------
    arm
        The arm, or a mechanism of one arm with travel and friction and without springs.
    attach_radius
        Bounds (least, greatest) of the distance from the pivot to an attachment on the arm [m], > 0;
        also the greatest moment radius of a shaped spool.
    anchor_height
        Bounds of the distance from the pivot to an anchor above it, or a gas spring's foot below [m], > 0.
    over
        Poses [rad]; None for 181 over the travel.
    methods
        Names of the methods to compare; None for all.
    norm
        ``"minimax"`` makes the worst residual least, ``"rms"`` its root mean square.
    attach_skew
        Bounds of the angle by which attachments may be turned from where a spring of zero free
        length would be attached [rad], within a quarter turn.
    assumptions
        Properties of springs, pulleys and rubber; None for usual ones, ``MethodAssumptions()``.
    warming
        Temperature rise from 293.15 K of the column that says what it does to the residual [K].
    payload_change
        Relative change of the arm's whole weight of the last column [1].
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    MethodComparison

    Raises
    ------
    InputError, InputTypeError, UnitError
        An arm with springs or without weight, bounds or options out of range, an unknown method.

    Notes
    -----
    A counterweight and a spring of zero free length balance every angle; torsion, gas and
    constant-force springs one or two. Many places behind a pulley balance to within a thousandth;
    the row is the one that loads the pivot least. A torsion spring is wound by two turns at the most.
    The inertia is that of the counterweight, and of a straight spring or tube a third of its mass at
    the attachment; springs on the ground and at the pivot count as none. A counterweight's friction
    at the pivot is not counted unless the arm states it.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism
    >>> from springpoise.balance.methods.compare import compare_methods
    >>> arm = Mechanism(Arm(Body("2 kg", ("0.35 m", 0))), travel=("-60 deg", "60 deg"))
    >>> found = compare_methods(arm, attach_radius=("50 mm", "90 mm"), anchor_height=("60 mm", "120 mm"),
    ...                         methods=["torsion", "counterweight"])
    >>> found.ranking, found.row("torsion").figures.balances
    (('counterweight', 'torsion'), '2')
    """
    mechanism = as_mechanism(arm)
    if mechanism.springs:
        raise InputError(f"arm must have no springs to compare methods on, got {len(mechanism.springs)} mounts")
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    if norm not in ("minimax", "rms"):
        raise InputError(f"norm must be 'minimax' or 'rms', got {norm!r}")
    if assumptions is None:
        assumptions = MethodAssumptions()
    if not isinstance(assumptions, MethodAssumptions):
        raise InputTypeError(f"assumptions must be MethodAssumptions, got {assumptions!r}")
    names = _names(methods)
    bounds = (
        _range(attach_radius, "m", "attach_radius"),
        _range(anchor_height, "m", "anchor_height"),
        _range(attach_skew, "rad", "attach_skew"),
    )
    if max(map(abs, bounds[2])) > 0.5 * math.pi:
        raise InputError(
            f"attach_skew must be within a quarter turn, ±{0.5 * math.pi:.4g} rad, got {bounds[2]}; degrees? "
            f"write ('{bounds[2][0]:g} deg', '{bounds[2][1]:g} deg')"
        )
    kelvins = _kelvins(warming)
    change = _plain(payload_change, "1", "payload_change")
    if not change > -1.0:
        raise InputError(f"payload_change must be > -1, got {change}")
    q = poses_over(mechanism, over)
    if not float(q.max()) > float(q.min()):
        raise InputError(f"over must be at least two different poses in rad, got {q.size} at {q[0]:g}")
    bare = attrs.evolve(mechanism, travel=(float(q.min()), float(q.max())))
    frame = frame_of(bare, q, norm, bounds, assumptions)
    rows = [_row(frame, name, kelvins, change) for name in names]
    rows.sort(key=lambda row: _merit(row, norm))
    return MethodComparison(tuple(rows), norm, frame.peak, kelvins, change)


def _row(frame: Frame, method: str, warming: float, change: float) -> MethodRow:
    name, size = METHODS[method]
    try:
        sized = size(frame)
    except CannotSize as reason:
        return MethodRow(method, name, None, None, str(reason))
    figures = figures_of(
        sized.mechanism,
        frame.bare,
        frame.q,
        inertia=sized.inertia,
        warmed=lambda mechanism: _warmed(mechanism, frame.given, warming),
        payload_change=change,
    )
    return MethodRow(method, name, sized.mechanism, figures, sized.sizes)


def _merit(row: MethodRow, norm: str) -> tuple[float, float, float]:
    if row.figures is None:
        return np.inf, 0.0, 0.0
    left = row.figures.residual
    size = left.worst_fraction if norm == "minimax" else left.rms_fraction
    return round(size, 9), row.figures.must_hold, row.figures.inertia


def _warmed(mechanism: Mechanism, given: MethodAssumptions, warming: float) -> Mechanism:
    """The mechanism with its springs warmer than room temperature."""
    warm = ROOM_TEMPERATURE + warming
    mounts: list[SpringMount] = []
    for mount in mechanism.springs:
        spring: Any = mount.spring
        if isinstance(spring, GasSpring):
            spring = spring.at_temperature(warm)
        elif isinstance(spring, RubberTube):
            spring = spring.at_temperature(warm, energy_share=given.rubber_energy_share, reference=ROOM_TEMPERATURE)
        else:
            slope = "pull_slope" if hasattr(spring, "pull") else "rate_slope"
            spring = spring.at_temperature(warm, **{slope: given.rate_slope})
        mounts.append(attrs.evolve(mount, spring=spring))
    return mechanism.with_springs(mounts)


def _names(methods: Any) -> tuple[str, ...]:
    if methods is None:
        return tuple(METHODS)
    names = (methods,) if isinstance(methods, str) else tuple(methods)
    for name in names:
        if name not in METHODS:
            raise InputError(f"methods must be among {', '.join(map(repr, METHODS))}, got {name!r}")
    if not names:
        raise InputError("methods must be at least one method, got none")
    return tuple(dict.fromkeys(names))


def _kelvins(warming: Any) -> float:
    """A difference of temperatures."""
    text = str(warming) if isinstance(warming, str) or hasattr(warming, "m_as") else ""
    if OFFSET_SCALES.search(text):
        raise InputError(f"warming must be a difference of temperatures in K, got {text!r}; 20 degC is 293.15 K")
    kelvins = _plain(warming, "K", "warming")
    if not ROOM_TEMPERATURE + kelvins > 0.0:
        raise InputError(f"warming must be above {-ROOM_TEMPERATURE} K from {ROOM_TEMPERATURE} K, got {kelvins}")
    return kelvins


def _range(value: Any, unit: str, name: str) -> tuple[float, float]:
    low, high = units.pair(value, unit, name)
    if not (isinstance(low, float) and isinstance(high, float)) or low > high or (unit == "m" and not low > 0.0):
        above = " above 0" if unit == "m" else ""
        raise InputError(f"{name} must be bounds (least, greatest){above} {unit}, got {(low, high)}")
    return low, high


def _plain(value: ScalarLike, unit: str, name: str) -> float:
    number = units.scalar_si(value, unit, name)
    if not isinstance(number, float):
        raise InputTypeError(f"{name} must be a single value in {unit}, got {value!r}")
    return number

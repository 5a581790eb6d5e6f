"""The best geometry in bounds: where anchors, attachments and pulleys go."""

from __future__ import annotations

import inspect
import math
import pickle
from collections.abc import Callable, Mapping, Sequence
from concurrent.futures import Executor
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.chains.fit import joint_residuals
from springpoise.balance.fitted_mounts import mounts_to_fit
from springpoise.balance.placing.free import Plain
from springpoise.balance.placing.knobs import Knob, box_of, knobs_of
from springpoise.balance.placing.limits import Rules, limits_of, point_of, worst_of
from springpoise.balance.placing.problem import Problem, built, recorded
from springpoise.balance.placing.result import ACTIVE, PlacedKnob, PlacedLimit, Placement
from springpoise.balance.placing.search import BAD, FEASIBLE, Ended, chosen_starts, gains_at, run_start
from springpoise.balance.placing.shares import layout_of, nominal, sizable
from springpoise.balance.residuals import poses_of_joints, residual_at
from springpoise.errors import InputError, InputTypeError
from springpoise.executors import check_executor
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of
from springpoise.paths import Disc
from springpoise.units import ScalarLike

__all__ = ["place", "placed"]

Array = NDArray[np.float64]

POLISHED = 2
"""How many of the best ends are refined to the last digits."""

NOTHING = 1e-8
"""A spring whose share of the holding torque is nowhere more than this [1] is best left out."""


def place(
    build: Callable[..., Mechanism],
    *,
    knobs: Mapping[str, Any],
    over: Any = None,
    norm: Literal["minimax", "rms"] = "minimax",
    fit: Literal["spring", "mount", "rate", "none"] = "spring",
    fixed: Sequence[str | int] = (),
    least_margin: ScalarLike | None = 0.0,
    pivot_load_limit: ScalarLike | None = None,
    stored_energy_limit: ScalarLike | None = None,
    keep_in: Mapping[Any, Any] | None = None,
    keep_out: Sequence[Any] = (),
    starts: int = 6,
    seed: int = 0,
    executor: Executor | None = None,
    gravity: Any = None,
) -> Placement:
    """Search a box of geometries for the one whose springs leave the least over.

    ``build`` makes a mechanism of some knob values. Only the geometry is searched: the springs'
    rates and preloads, in which a torque is linear, are chosen along with each geometry. Where
    ``build`` can be recorded, that is where it does its arithmetic with operators and with the
    functions of ``springpoise.carriers.namespace``, the derivatives are exact and the search takes
    a fraction of a second; otherwise it goes on without derivatives and says so.

    The result is a local optimum, the best of several starts. ``reached`` says how many of them
    agree on it.

    Parameters
    ----------
    build
        Function of the knobs, as keyword arguments, that returns a ``Mechanism`` of any number of
        joints, revolute or prismatic but not both. It must have the same mounts and travel for all
        values.
    knobs
        For each argument of ``build`` its bounds (lower, higher): SI numbers, or text such as
        ``"50 mm"`` or ``"-20 deg"``. Both must be finite: without bounds a search runs away to tall
        anchors and soft springs.
    over
        Poses [rad], shape (p,), or (p, n) for n joints; None for 181 over the travel, or 600 of several
        joints. Their torques count alike, in N·m.
    norm
        ``"minimax"`` makes the worst residual least, ``"rms"`` its root mean square.
    fit
        What is chosen of the springs. ``"spring"``: rate and preload, as in ``fit_springs``;
        ``"mount"``: rate, and the mount's ``rigid_length``; ``"rate"``: rates alone; ``"none"``:
        nothing, the springs stay as ``build`` makes them, such as springs of a catalogue.
    fixed
        Names or numbers (from 0 on) of mounts whose springs stay as they are.
    least_margin
        What every spring keeps from both ends of its working range, over the poses [m, or rad],
        >= 0: neither slack nor overstretched. None lets springs go beyond.
    pivot_load_limit
        Greatest load of any pivot [N], > 0; None for no limit.
    stored_energy_limit
        Greatest energy in all springs [J], > 0; None for no limit.
    keep_in
        For points, or functions of the knobs that give a ``Point``, the box ((x from, x to), (y from,
        y to)) on the ground that each stays in over the poses [m]; None for a side that is open.
    keep_out
        Discs, each a ``Disc`` or a pair of a centre ``Point`` and a radius [m], that straight springs,
        ends of cables and the points of ``keep_in`` stay out of.
    starts
        How many starts, >= 1.
    seed
        Whole number that shifts the places from which starts are taken.
    executor
        An executor of ``concurrent.futures`` for the starts; the result is the same to the last bit.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Placement

    Raises
    ------
    InputError, InputTypeError, UnitError
        A missing or infinite bound, names that ``build`` does not take, an unknown option, a limit
        out of range, or something that is no mechanism.

    Examples
    --------
    An ordinary spring pulls best where its attachment is turned a little from the arm's line:

    >>> import math
    >>> import numpy as np
    >>> from springpoise import Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight
    >>> from springpoise.balance.placing.geometry import place
    >>> arm = Arm(Body("2 kg", ("0.35 m", 0)))
    >>> def build(x, y):
    ...     path = Straight(Point("ground", (0, 0.10)), Point("arm", (x, y)))
    ...     return Mechanism(arm, springs=SpringMount(ExtensionSpring(1000, free_length=0.018), path))
    >>> found = place(build, knobs={"x": (0.06, 0.09), "y": ("-20 mm", "20 mm")},
    ...               over=np.linspace(-math.pi / 3, math.pi / 3, 61), fit="rate")
    >>> found.success, found.derivatives, bool(found.residual.worst_fraction < 0.04)
    (True, 'exact', True)
    """
    if not callable(build):
        raise InputTypeError(f"build must be a function of the knobs, got {build!r}")
    if norm not in ("minimax", "rms"):
        raise InputError(f"norm must be 'minimax' or 'rms', got {norm!r}")
    if fit not in ("spring", "mount", "rate", "none"):
        raise InputError(f"fit must be 'spring', 'mount', 'rate' or 'none', got {fit!r}")
    for name, value, least in (("starts", starts, 1), ("seed", seed, 0)):
        if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < least:
            raise InputError(f"{name} must be a whole number >= {least}, got {value!r}")
    check_executor(executor)
    found = knobs_of(knobs)
    _check_arguments(build, found)
    rules = Rules(
        least_margin=None if least_margin is None else _limit(least_margin, "m", "least_margin", zero=True),
        pivot_load=None if pivot_load_limit is None else _limit(pivot_load_limit, "N", "pivot_load_limit"),
        stored_energy=None if stored_energy_limit is None else _limit(stored_energy_limit, "J", "stored_energy_limit"),
        keep_in=_boxes(keep_in),
        keep_out=tuple(_disc(one) for one in ([keep_out] if isinstance(keep_out, Disc) else keep_out)),
    )
    return placed(
        build,
        found,
        rules,
        over=over,
        norm=norm,
        fit=fit,
        fixed=fixed,
        starts=int(starts),
        seed=int(seed),
        executor=executor,
        gravity=gravity,
    )


def placed(
    build: Callable[..., Mechanism],
    knobs: tuple[Knob, ...],
    rules: Rules,
    *,
    over: Any,
    norm: str,
    fit: str,
    fixed: Sequence[str | int] = (),
    starts: int = 6,
    seed: int = 0,
    executor: Executor | None = None,
    gravity: Any = None,
    polished: int = POLISHED,
) -> Placement:
    """``place`` for checked arguments; ``polished`` of the best ends are refined to the last digits."""
    middle = {knob.name: 0.5 * (knob.low + knob.high) for knob in knobs}
    first = built(build, middle, None, gravity)
    _check_bodies(first, rules, middle)
    q = poses_of_joints(first, over)
    if fit != "none" and not first.springs:
        raise InputError("build must make a mechanism with at least one spring, got none")
    free = () if fit == "none" else mounts_to_fit(first, fixed)
    raw = sizable(first, free)
    layout = layout_of(raw, free, fit, q)
    base = tuple(nominal(raw, layout, q))
    peak = residual_at(first.with_springs(()), q).peak_gravity_torque
    if not peak > 0.0:
        raise InputError("build must make a mechanism with something to balance, got no gravity torque over the poses")
    plain = Plain(build, knobs, norm, q, peak, rules, free, layout, base, gravity)
    problem = recorded(build, knobs, norm, q, rules, free, layout, base, peak, gravity)
    if isinstance(problem, Problem):
        begin = chosen_starts(problem, starts, seed)
        ends = _each(executor, run_start, [(problem, start, False) for start in begin])
        ends.sort(key=lambda end: end.merit)
        ends[:polished] = _each(executor, run_start, [(problem, end.unknowns, True) for end in ends[:polished]])
    else:
        ends = _each(executor, Plain.run_start, [(plain, start) for start in plain.chosen_starts(starts, seed)])
    ends.sort(key=lambda end: end.merit)
    if not ends[0].size < 0.5 * BAD:
        raise InputError(
            "build must make a mechanism with a torque at every pose for some knobs, got none; "
            "is an end of a cable inside a disc, or does a loop not close?"
        )
    best = _exactly_sized(plain, ends[0])
    reached = sum(end.short <= FEASIBLE and end.size <= 1.01 * best.size + 1e-9 for end in ends)
    return _result(plain, best, problem, len(ends), max(reached, 1))


def _exactly_sized(plain: Plain, best: Ended) -> Ended:
    """The same geometry with the springs of the linear program, where no limit on them speaks against it."""
    if not plain.nominal:
        return best
    place = best.unknowns[: len(plain.knobs)]
    exact = plain.ended(place, plain.best_shares(place))
    return exact if exact.short <= FEASIBLE and exact.size <= best.size * (1.0 + 1e-6) + 1e-12 else best


def _result(plain: Plain, best: Ended, problem: Problem | str, starts: int, reached: int) -> Placement:
    count = len(plain.knobs)
    place, shares = best.unknowns[:count], best.unknowns[count:]
    mechanism, values = plain.mechanism(place, shares), plain.values(place)
    limits = limits_of(mechanism, plain.q, plain.rules, values)
    exact = isinstance(problem, Problem)
    gains: tuple[Any, Any] = gains_at(problem, best.unknowns) if isinstance(problem, Problem) else (None, None)
    judged, kind = [], joint_units_of(mechanism.linkage)[0]
    for i, limit in enumerate(limits):
        margin, value, allowed, at = worst_of(limit, plain.q)
        active = margin <= ACTIVE * limit.scale
        if active and margin >= -FEASIBLE * limit.scale:
            margin = max(margin, 0.0)  # the solver's rounding
        gain = float(gains[1][i]) / limit.scale if exact else None
        judged.append(PlacedLimit(limit.name, limit.unit, value, allowed, limit.side, margin, at, kind, active, gain))
    helpful, left_out = [], []
    for i, mount in enumerate(mechanism.springs):
        torque = np.asarray(mechanism.with_springs(mount).spring_torque(plain.q))
        if i in plain.free and float(np.max(np.abs(torque))) <= NOTHING * plain.peak:
            left_out.append(mechanism.mount_name(i))
        else:
            helpful.append(mount)
    final = mechanism.with_springs(helpful)
    return Placement(
        mechanism=final,
        values=values,
        norm=plain.norm,
        residual=residual_at(final, plain.q),
        joints=joint_residuals(final, plain.q),
        knobs=tuple(
            PlacedKnob(
                knob.name, float(place[i]), knob.low, knob.high, knob.unit, abs(float(gains[0][i])) if exact else None
            )
            for i, knob in enumerate(plain.knobs)
        ),
        limits=tuple(judged),
        feasible=best.short <= FEASIBLE,
        left_out=tuple(left_out),
        starts=starts,
        reached=reached,
        derivatives="exact" if exact else "none",
        why=problem if isinstance(problem, str) else None,
    )


def _each(executor: Executor | None, job: Callable[..., Ended], arguments: list[tuple[Any, ...]]) -> list[Ended]:
    """One result for each, in order, whoever computed it."""
    if executor is None:
        return [job(*one) for one in arguments]
    futures = [executor.submit(job, *one) for one in arguments]
    try:
        return [future.result() for future in futures]
    except (pickle.PicklingError, AttributeError) as error:
        if _can_be_sent(arguments):  # then it is an error of the job itself
            raise
        raise InputTypeError(
            f"build must be a function of a module for an executor of processes, got one that cannot be sent: {error}"
        ) from error
    finally:
        for future in futures:
            future.cancel()


def _can_be_sent(arguments: list[tuple[Any, ...]]) -> bool:
    try:
        pickle.dumps(arguments)
    except (pickle.PicklingError, AttributeError):
        return False
    return True


def _check_arguments(build: Callable[..., Mechanism], knobs: tuple[Knob, ...]) -> None:
    """``build`` takes every knob and needs nothing more."""
    try:
        signature = inspect.signature(build)
    except (TypeError, ValueError):
        return
    try:
        signature.bind(**dict.fromkeys((knob.name for knob in knobs), 0.0))
    except TypeError as error:
        names = ", ".join(knob.name for knob in knobs)
        raise InputError(f"knobs must be the arguments of build, got {names}: {error}") from None


def _check_bodies(mechanism: Mechanism, rules: Rules, values: Mapping[str, float]) -> None:
    """Points that have to be somewhere are on bodies that there are."""
    frames = mechanism.linkage.frames
    points = [("keep_in", point_of(what, values)) for what, _ in rules.keep_in]
    for name, point in [*points, *(("keep_out", centre) for centre, _ in rules.keep_out)]:
        if point.body not in frames:
            raise InputError(f"{name} must name points of {', '.join(map(repr, frames))}, got one of {point.body!r}")


def _limit(value: ScalarLike, unit: str, name: str, *, zero: bool = False) -> float:
    number = units.scalar_si(value, unit, name)
    if not isinstance(number, float) or not (number >= 0.0 if zero else number > 0.0):
        raise InputError(f"{name} must be {'>=' if zero else '>'} 0 {unit}, got {number}")
    return number


def _boxes(keep_in: Any) -> tuple[tuple[Any, Any], ...]:
    if keep_in is None:
        return ()
    if not isinstance(keep_in, Mapping):
        raise InputTypeError(f"keep_in must map points to boxes, got {keep_in!r}")
    for what in keep_in:
        if not isinstance(what, Point) and not callable(what):
            raise InputTypeError(f"keep_in must name Points or functions of the knobs that give one, got {what!r}")
    return tuple((what, box_of(box, "keep_in")) for what, box in keep_in.items())


def _disc(value: Any) -> tuple[Point, float]:
    if isinstance(value, Disc):
        return value.centre, float(value.radius)
    try:
        centre, radius = value
    except (TypeError, ValueError):
        centre = radius = None
    if not isinstance(centre, Point) or radius is None:
        raise InputTypeError(f"keep_out must be Discs, or pairs of a Point and a radius, got {value!r}")
    size = float(units.metre(radius, "keep_out"))
    if not size > 0.0 or not math.isfinite(size):
        raise InputError(f"keep_out must have radii > 0 m, got {size}")
    return centre, size

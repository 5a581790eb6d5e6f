"""Exact balance of chains and loops by springs of zero free length."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from typing import Any, Literal

import attrs
import numpy as np

from springpoise.balance.chains.forms import Skeleton, skeleton_of
from springpoise.balance.chains.reasons import reasons
from springpoise.balance.chains.result import ChainBalance, balance_of
from springpoise.balance.chains.solve import Solved, Strut, Unknown, solve
from springpoise.balance.chains.springs import ChainSpring, Place
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import FiveBar, FourBar, SpatialChain
from springpoise.linkages.frames import GROUND
from springpoise.mechanism import Mechanism

__all__ = ["ChainBalance", "ChainSpring", "balance_chain"]

LAYOUTS = ("carried", "direct", "ground")


def balance_chain(
    chain: Any,
    layout: Literal["carried", "direct", "ground"] = "carried",
    *,
    springs: Sequence[ChainSpring] | ChainSpring = (),
    gravity: Any = None,
) -> ChainBalance:
    """Springs of zero free length that hold a chain or loop at every pose.

    Say between which bodies the springs run and what of them is fixed; the rest is found, from
    equations that are exact. Angles of links are all that matters, so the result holds at every
    pose, as long as the springs really have zero free length.

    Parameters
    ----------
    chain
        A ``PlanarChain``, ``FourBar``, ``FiveBar`` (a parallelogram) or ``SpatialChain`` (on
        spherical joints: three revolute joints with one centre), or a ``Mechanism`` of one without
        springs, whose travel is then used for strokes and loads.
    layout
        ``"carried"``: each link is balanced like a single arm, against the frame at its joint that
        stays parallel to the ground; ``rate · a · b = g · |M|``, with all that hangs on the link in
        M. Give two of rate, start and end. Loops take this layout, on their ground pivots.
        ``"direct"``: springs may span joints. One that joins two links cancels what the others
        couple, and starts beyond the far joint of its first link. ``"ground"``: all springs start
        on the ground; give all rates, and all ends but one on each link from the second on.
    springs
        The springs, with None for what is to be found.
    gravity
        Gravity (gx, gy), or (gx, gy, gz) in space [m/s²]; None for the mechanism's own. Anchors
        lie straight against it.

    Returns
    -------
    ChainBalance
        Without success where a rate comes out negative or an equation cannot be met; it says why.

    Raises
    ------
    InputError, InputTypeError
        A joint that slides or follows others, a missing carried frame, springs that do not fit the
        chain or the layout, too little that is fixed, a mechanism that has springs already, one that
        gravity does not turn.

    References
    ----------
    Rahman, T., Ramanathan, R., Seliktar, R. and Harwin, W. (1995), A simple technique to passively
    gravity-balance articulated mechanisms, ASME Journal of Mechanical Design.
    Deepak, S. R. and Ananthasuresh, G. K. (2012), Journal of Mechanisms and Robotics,
    doi 10.1115/1.4006521: balance without auxiliary bodies.

    Examples
    --------
    >>> from springpoise import Body
    >>> from springpoise.linkages import Link, PlanarChain
    >>> arm = PlanarChain([
    ...     Link("upper", Body("1.5 kg", ("150 mm", 0)), length="300 mm"),
    ...     Link("fore", Body("1 kg", ("120 mm", 0)), length="250 mm"),
    ... ])
    >>> found = balance_chain(arm, "direct", springs=[
    ...     ChainSpring("ground", "fore", rate="300 N/m"),
    ...     ChainSpring("upper", "fore", start="360 mm", end="100 mm"),
    ... ]).require()
    >>> [round(spring.rate, 4) for spring in found.springs]
    [300.0, 1028.5714]
    >>> found.swing_fraction < 1e-12
    True
    """
    mechanism = chain if isinstance(chain, Mechanism) else None
    linkage = chain if mechanism is None else mechanism.linkage
    if not hasattr(linkage, "joint_count"):
        raise InputTypeError(f"chain must be a linkage of several links or a Mechanism of one, got {chain!r}")
    if mechanism is None:
        mechanism = Mechanism(linkage)
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    if mechanism.springs:
        raise InputError(
            f"chain must be a Mechanism without springs, got {len(mechanism.springs)}; use mechanism.with_springs(())"
        )
    if layout not in LAYOUTS:
        raise InputError(f"layout must be 'carried', 'direct' or 'ground', got {layout!r}")
    skeleton = skeleton_of(linkage, mechanism.gravity)
    if not np.any(_without_rounding(skeleton)[1:]):
        raise InputError("chain must have something to balance, got links that gravity does not turn")
    wanted = _springs(springs, skeleton, layout)
    _check_layout(skeleton, layout)
    names = _names(wanted)
    struts = [_strut(spring, name, skeleton, layout) for spring, name in zip(wanted, names, strict=True)]
    goals = -skeleton.strength * skeleton.up.conjugate() * _without_rounding(skeleton)
    solved = solve(struts, goals)
    if solved.unknown:
        raise InputError(_too_little(struts, solved))
    problems = reasons(struts, solved, skeleton)
    return balance_of(mechanism, skeleton, layout, wanted, struts, problems)


def _without_rounding(skeleton: Skeleton) -> Any:
    """The moments, zero where masses cancel."""
    return np.where(np.abs(skeleton.moments) > 1e-13 * skeleton.scale, skeleton.moments, 0.0)


def _springs(springs: Any, skeleton: Skeleton, layout: str) -> tuple[ChainSpring, ...]:
    items = (springs,) if isinstance(springs, ChainSpring) else springs
    if not isinstance(items, Sequence) or not all(isinstance(item, ChainSpring) for item in items):
        raise InputTypeError(f"springs must be ChainSprings, got {springs!r}")
    if not items:
        first, last = skeleton.turning[0], skeleton.turning[-1]
        example = {
            "carried": f"[ChainSpring('ground', {first!r}, start='100 mm', end='100 mm'), ...], one for each link",
            "direct": f"[ChainSpring('ground', {last!r}, rate='300 N/m'), ...]",
            "ground": f"[ChainSpring('ground', {last!r}, rate='300 N/m', end='100 mm'), ...], "
            f"two on {last!r} and one on each other link but the first",
        }
        raise InputError(f"springs must say what is fixed, got none; such as {example[layout]}")
    return tuple(items)


def _names(springs: Sequence[ChainSpring]) -> list[str]:
    plain = [spring.name or f"{spring.first} to {spring.last}" for spring in springs]
    counts, seen, names = Counter(plain), Counter[str](), []
    for spring, name in zip(springs, plain, strict=True):
        seen[name] += 1
        if counts[name] > 1 and spring.name is not None:
            raise InputError(f"ChainSpring.name must differ from spring to spring, got {name!r} twice")
        names.append(f"{name} {seen[name]}" if counts[name] > 1 else name)
    return names


def _check_layout(skeleton: Skeleton, layout: str) -> None:
    kind = type(skeleton.linkage).__name__
    if layout != "carried" and isinstance(skeleton.linkage, FourBar | FiveBar):
        raise InputError(
            f"layout must be 'carried' for a {kind}, got {layout!r}; its cranks turn on the ground and balance it there"
        )
    if layout == "ground" and len(skeleton.turning) < 2:
        raise InputError("layout 'ground' must have two links or more, got 1; one link is balanced by sine_match")
    if layout != "carried":
        return
    if isinstance(skeleton.linkage, SpatialChain) and len(skeleton.turning) > 1:
        raise InputError(
            "layout must be 'direct' or 'ground' for a SpatialChain, which has no carried frames, got 'carried'"
        )
    heavy = [name for name, moment in zip(skeleton.turning, _without_rounding(skeleton)[1:], strict=True) if moment]
    lacking = [name for name in heavy if skeleton.level_frame(name) is None]
    if lacking:
        givers = [skeleton.joints[name][0] for name in lacking]
        at = " and ".join(f"where {name!r} hangs on {giver!r}" for name, giver in zip(lacking, givers, strict=True))
        hint = ", ".join(f"Link({giver!r}, ..., carried=())" for giver in dict.fromkeys(givers))
        raise InputError(
            f"layout 'carried' must have a frame parallel to the ground at every joint, got none {at}; "
            f"write {hint} for a parallelogram or belt without mass, or use layout 'direct' or 'ground'"
        )


def _strut(spring: ChainSpring, name: str, skeleton: Skeleton, layout: str) -> Strut:
    """The spring with its ends as numbers, checked against chain and layout."""
    first, last = spring.first, spring.last
    if last not in skeleton.turning:
        known = ", ".join(map(repr, skeleton.turning))
        raise InputError(f"ChainSpring.last must be a link that turns by itself ({known}), got {last!r}")
    level = skeleton.is_level(first)
    if not level and first not in skeleton.turning:
        known = ", ".join(repr(body) for body in skeleton.forms if body not in (last, f"{last} carried"))
        raise InputError(f"ChainSpring.first must be one of {known}, got {first!r}")
    link = None if first == last else skeleton.next_link(first, last)
    if link is None:
        raise InputError(
            f"ChainSpring.first must be nearer to the ground than last, got {first!r} to {last!r}; "
            "a spring on another branch, or within one link, lifts nothing"
        )
    if layout == "ground" and first != GROUND:
        raise InputError(f"ChainSpring.first must be 'ground' in layout 'ground', got {first!r}")
    if layout == "carried":
        frame = skeleton.level_frame(last)
        if frame is None or first != frame[0]:
            there = "none there" if frame is None else repr(frame[0])
            raise InputError(
                "ChainSpring.first must be the frame parallel to the ground at the joint of last in layout 'carried', "
                f"which is {there} for {last!r}, got {first!r}"
            )
    origin = skeleton.joint_on(first, link) if level else 0j
    between = skeleton.forms[last].origin - skeleton.forms[first].at(origin)
    inner = skeleton.index_of(first)
    if inner and spring.start is None and between[0] != 0:
        raise InputError(
            f"ChainSpring.start must be given where a frame parallel to the ground lies between its bodies, got None for {name!r}"
        )
    up = skeleton.up if level else 1.0 + 0j
    return Strut(
        name=name,
        inner=inner,
        outer=skeleton.index_of(last),
        between=between,
        up=up,
        rate=spring.rate,
        start=_place(spring.start, up, "start", skeleton),
        end=_place(spring.end, 1.0, "end", skeleton),
        end_may_turn=isinstance(spring.end, float),
    )


def _place(place: Place, line: complex, what: str, skeleton: Skeleton) -> complex | None:
    if place is None:
        return None
    if isinstance(place, tuple):
        if isinstance(skeleton.linkage, SpatialChain):
            raise InputError(
                f"ChainSpring.{what} must be a distance along the link's line, or straight up, in space, got {place}"
            )
        return complex(*place)
    return place * line


def _too_little(struts: list[Strut], solved: Solved) -> str:
    """What has to be given in addition."""
    by_spring: dict[int, list[str]] = {}
    for unknown in solved.unknown:
        by_spring.setdefault(unknown.strut, []).append(unknown.what)
    still = "; ".join(f"{' and '.join(whats)} of {struts[i].name!r}" for i, whats in by_spring.items())
    found = [_numbers(struts, unknown) for unknown in solved.found_by]
    so_far = f" (found so far: {', '.join(found)})" if found else ""
    return f"springs must fix enough to find the rest, got still open: {still}{so_far}; give one of them"


def _numbers(struts: list[Strut], unknown: Unknown) -> str:
    strut = struts[unknown.strut]
    value = getattr(strut, unknown.what)
    if unknown.what == "rate":
        return f"rate of {strut.name!r} {value:.4g} N/m"
    return f"{unknown.what} of {strut.name!r} {1e3 * abs(value):.4g} mm from the joint"

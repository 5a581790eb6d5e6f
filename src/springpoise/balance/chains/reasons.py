"""Why springs do not balance a chain, in words."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from springpoise.balance.chains.forms import Skeleton
from springpoise.balance.chains.solve import Equation, Pair, Solved, Strut, Unknown

__all__ = ["reasons"]


def reasons(struts: list[Strut], solved: Solved, skeleton: Skeleton) -> tuple[str, ...]:
    """What came out negative or impossible; empty where nothing did."""
    found: list[str] = []
    for i, strut in enumerate(struts):
        pair = solved.found_by.get(Unknown(i, "rate"))
        if strut.rate is not None and strut.rate < 0:
            found.append(_negative(strut, pair, skeleton))
    for unknown in solved.askew:
        strut = struts[unknown.strut]
        found.append(
            f"no rate of {strut.name!r} fits, because its ends lie in directions that do not suit the centre of mass; "
            "give its end as a distance, so that it can be turned"
        )
    if found:
        return tuple(found)
    unmet = [equation for equation in solved.equations if not equation.holds]
    # What cannot be uncoupled spoils the rest, which then says nothing.
    return tuple(_unmet([e for e in unmet if e.pair[0] > 0] or unmet, skeleton))


def _negative(strut: Strut, pair: Pair | None, skeleton: Skeleton) -> str:
    what = (
        f"the rate of {strut.name!r} came out as {strut.rate:.4g} N/m, and no spring pushes in proportion to its length"
    )
    names = ("ground", *skeleton.turning)
    inner = strut.vector(strut.inner)
    if pair is None:
        return f"{what}; move one of its ends to the other side of its joint"
    i, j = pair
    if i == 0:
        return (
            f"{what}: the other springs lift {names[j]!r} too much, or this one pulls it down; "
            "put its start on the other side of the joint, which is below where it was above"
        )
    reach = complex(strut.between[strut.inner])
    if strut.inner == i and inner is not None and (inner * np.conj(reach)).real > 0:
        start = reach - inner
        return (
            f"{what}: to undo how the others couple {names[i]!r} and {names[j]!r} it has to start beyond the far joint of "
            f"{names[i]!r}, which is {1e3 * abs(reach):.4g} mm out, and it starts at {1e3 * start.real:.4g} mm"
        )
    return (
        f"{what}: it couples {names[i]!r} and {names[j]!r} in the same sense as the others; "
        f"put its end on the other side of the joint of {names[strut.outer]!r}"
    )


def _unmet(equations: list[Equation], skeleton: Skeleton) -> Iterator[str]:
    names = ("ground", *skeleton.turning)
    for equation in equations:
        i, j = equation.pair
        left = abs(equation.sum - equation.goal)
        if i == 0 and abs(equation.sum) <= 1e-9 * abs(equation.goal):
            yield (
                f"nothing lifts {names[j]!r}, whose weight turns it by up to {abs(equation.goal):.4g} N*m; "
                f"a spring has to end on it or beyond"
            )
        elif i == 0:
            yield (
                f"the springs lift {names[j]!r} by {abs(equation.sum):.4g} N*m at most where its weight needs "
                f"{abs(equation.goal):.4g} N*m, and nothing that is left open can make up for {left:.4g} N*m; "
                f"leave a rate, start or end open, or add a spring on {names[j]!r}"
            )
        else:
            yield (
                f"the springs couple {names[i]!r} and {names[j]!r} by {left:.4g} N*m, which nothing cancels; a spring from "
                f"{names[i]!r}, starting beyond its far joint, to {names[j]!r} can, or one that ends behind the joint of "
                f"{names[j]!r}"
            )

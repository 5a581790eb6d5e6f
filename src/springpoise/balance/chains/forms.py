"""Linkages as sums of turning vectors, which is all that exact balance has to know of them.

With complex numbers for vectors, every point of a chain of revolute joints is a sum of constants
times ``e_j = exp(i·angle of link j)`` and a constant of the ground, ``e_0 = 1``. So is a point of a
coupler, by the closure of its loop. A body's frame is the sum for its origin and the sum for its
x axis.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import FiveBar, FourBar, Link, PlanarChain, Point, SpatialChain
from springpoise.linkages.frames import GROUND

__all__ = ["Form", "Skeleton", "single", "skeleton_of", "strength_of"]

Sum = NDArray[np.complex128]

SAME = 1e-9
"""Lengths that differ by less than this share of themselves are taken as equal [1]."""


class Form(NamedTuple):
    """A body's frame: sums for its origin and its x axis."""

    origin: Sum
    turn: Sum

    def at(self, place: complex) -> Sum:
        """The sum for a point of the body."""
        return self.origin + place * self.turn


class Skeleton(NamedTuple):
    """What balance has to know of a linkage."""

    linkage: Any
    turning: tuple[str, ...]
    """The links whose angles are independent, or taken as such; link j has index j + 1 in all sums."""
    forms: dict[str, Form]
    joints: dict[str, tuple[str, complex]]
    """For each of those links, the body that its joint sits on, and where on it."""
    moments: Sum
    """First moment of all masses along each turning vector [kg·m]."""
    scale: float
    """Sum of all masses times their distances [kg·m]: what a moment has to be compared with."""
    up: complex
    """Direction straight up, against gravity."""
    strength: float
    """Gravity [m/s²]."""
    place: Callable[[str, complex], Point]
    """The point of a body with a complex coordinate in its frame."""

    def index_of(self, body: str) -> int:
        """Index of a body's own turning vector; 0 for the ground and what is parallel to it."""
        return self.turning.index(body) + 1 if body in self.turning else 0

    def is_level(self, body: str) -> bool:
        """Whether a body stays parallel to the ground."""
        form = self.forms.get(body)
        return form is not None and bool(form.turn[0] == 1.0) and not np.any(form.turn[1:])

    def next_link(self, first: str, last: str) -> str | None:
        """The link that comes next on the way from one body out to another; None where there is no such way."""
        link = last
        while True:
            parent = self.joints[link][0]
            base = parent.removesuffix(" carried")
            if first in (parent, base, f"{base} carried"):
                return link
            if base == GROUND or base not in self.joints:
                return None
            link = base

    def level_frame(self, link: str) -> tuple[str, complex] | None:
        """The body that is parallel to the ground at the joint of a link, and where the joint is on it."""
        parent, place = self.joints[link]
        if self.is_level(parent):
            return parent, place
        carried = self.forms.get(f"{parent} carried")
        here = self.forms[parent].at(place)
        if carried is not None and np.max(np.abs(carried.origin - here)) <= SAME * np.max(np.abs(here)):
            return f"{parent} carried", 0j
        return None

    def joint_on(self, body: str, link: str) -> complex:
        """Where the joint of the next link is seen from a body that is parallel to the ground."""
        parent, place = self.joints[link]
        return place if parent == body else 0j


def skeleton_of(linkage: Any, gravity: tuple[Any, ...]) -> Skeleton:
    """The sums of a linkage under some gravity.

    Raises
    ------
    InputError, InputTypeError
        A linkage of another kind, prismatic or coupled joints, fields that are arrays, a five-bar
        whose couplers turn by themselves, no gravity.
    """
    if isinstance(linkage, SpatialChain):
        from springpoise.balance.chains.spatial import spatial_skeleton

        return spatial_skeleton(linkage, gravity)
    makers: dict[type, Any] = {PlanarChain: _chain, FourBar: _four_bar, FiveBar: _five_bar}
    if type(linkage) not in makers:
        raise InputTypeError(
            "chain must be a PlanarChain, FourBar, FiveBar or SpatialChain, or a Mechanism of one, got "
            f"{type(linkage).__name__}"
        )
    for link in linkage.links:
        _check(link)
    turning, forms, joints = makers[type(linkage)](linkage)
    pull = single(gravity[0], "gravity"), single(gravity[1], "gravity")
    moments, scale = np.zeros(len(turning) + 1, complex), 0.0
    for mass, at in linkage.masses:
        kilograms = single(mass, "Body.mass")
        here = forms[at.body].at(_complex(at.at, "Body.com"))
        moments, scale = moments + kilograms * here, scale + kilograms * float(np.sum(np.abs(here)))
    return Skeleton(
        linkage=linkage,
        turning=turning,
        forms=forms,
        joints=joints,
        moments=moments,
        scale=scale,
        up=-complex(*pull) / strength_of(abs(complex(*pull))),
        strength=abs(complex(*pull)),
        place=lambda body, place: Point(body, (place.real, place.imag)),
    )


def strength_of(strength: float) -> float:
    """Gravity that there is.

    Raises
    ------
    InputError
        None.
    """
    if not strength > 0:
        raise InputError(f"gravity must be other than 0 m/s**2, got {strength}; without it nothing is to be balanced")
    return strength


def _check(link: Link) -> None:
    single(link.skew, "Link.skew")
    if link.joint != "revolute":
        raise InputError(
            f"Link.joint must be 'revolute' to be balanced exactly, got {link.joint!r} for {link.name!r}; "
            "springs of zero free length balance links that turn"
        )
    if link.follows is not None:
        raise InputError(
            f"Link.follows must be None to be balanced exactly, got a Coupling for {link.name!r}; "
            "describe a link that stays parallel to the ground as carried=, and others as a single link"
        )


def single(value: Any, name: str) -> float:
    """A number of one chain, and not of several builds.

    Raises
    ------
    InputError
        An array.
    """
    if not isinstance(value, float):
        raise InputError(f"chain must be a single one, got an array for {name} (shape {np.shape(value)})")
    return value


def _complex(at: tuple[Any, ...], name: str) -> complex:
    return complex(single(at[0], name), single(at[1], name))


def _unit(index: int, size: int) -> Sum:
    found = np.zeros(size, complex)
    found[index] = 1.0
    return found


def _with_carried(forms: dict[str, Form], link: Link) -> None:
    """Adds the frame at a link's far joint, where it has one."""
    if link.carried is not None:
        far = forms[link.name].at(single(link.length, "Link.length"))
        forms[link.carried_name] = Form(far, _unit(0, far.size))


_Parts = tuple[tuple[str, ...], dict[str, Form], dict[str, tuple[str, complex]]]


def _chain(chain: PlanarChain) -> _Parts:
    size = len(chain.links) + 1
    forms = {GROUND: Form(np.zeros(size, complex), _unit(0, size))}
    joints: dict[str, tuple[str, complex]] = {}
    before = GROUND, 0j
    for index, link in enumerate(chain.links):
        parent, place = before
        if link.pivot is not None:
            parent, place = link.pivot.body, _complex(link.pivot.at, "Link.pivot")
        joints[link.name] = parent, place
        forms[link.name] = Form(forms[parent].at(place), _unit(index + 1, size))
        _with_carried(forms, link)
        before = link.name, complex(single(link.length, "Link.length"))
    return tuple(joints), forms, joints


def _four_bar(linkage: FourBar) -> _Parts:
    crank, coupler, rocker = linkage.crank, linkage.coupler, linkage.rocker
    second = _complex(linkage.second_pivot, "FourBar.second_pivot")
    forms = {
        GROUND: Form(np.zeros(3, complex), _unit(0, 3)),
        crank.name: Form(np.zeros(3, complex), _unit(1, 3)),
        rocker.name: Form(second * _unit(0, 3), _unit(2, 3)),
    }
    start, end = (forms[link.name].at(single(link.length, "Link.length")) for link in (crank, rocker))
    forms[coupler.name] = Form(start, (end - start) / single(coupler.length, "Link.length"))
    for link in linkage.links:
        _with_carried(forms, link)
    return (crank.name, rocker.name), forms, {crank.name: (GROUND, 0j), rocker.name: (GROUND, second)}


def _five_bar(linkage: FiveBar) -> _Parts:
    cranks, couplers = (linkage.first_crank, linkage.second_crank), (linkage.first_coupler, linkage.second_coupler)
    second = _complex(linkage.second_pivot, "FiveBar.second_pivot")
    l1, l2, c1, c2 = (single(link.length, "Link.length") for link in (*cranks, *couplers))
    near = SAME * max(l1, l2)
    if not (abs(second) <= near and abs(l1 - c2) <= near and abs(l2 - c1) <= near):
        raise InputError(
            "FiveBar must be a parallelogram on one common pivot to be balanced by springs on its cranks, got "
            f"second_pivot {second.real:g}, {second.imag:g} m, cranks of {l1:g} and {l2:g} m on couplers of {c2:g} and "
            f"{c1:g} m; otherwise its couplers turn in their own ways, and no spring on a crank can lift them exactly"
        )
    forms = {GROUND: Form(np.zeros(3, complex), _unit(0, 3))}
    for index, crank in enumerate(cranks):
        forms[crank.name] = Form(np.zeros(3, complex), _unit(index + 1, 3))
    # Each coupler stays parallel to the other crank.
    for crank, coupler, other in zip(cranks, couplers, reversed(cranks), strict=True):
        forms[coupler.name] = Form(forms[crank.name].at(crank.length), forms[other.name].turn)
    for link in linkage.links:
        _with_carried(forms, link)
    return tuple(crank.name for crank in cranks), forms, {crank.name: (GROUND, 0j) for crank in cranks}

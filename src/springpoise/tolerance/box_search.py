"""Greatest and least torque at each pose over a box of numbers that vary."""

from __future__ import annotations

from collections.abc import Sequence

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.tape import Program
from springpoise.tolerance.recorded import torques_of

__all__ = ["ALL_CORNERS", "BoxSearch", "Found", "curved_inputs", "is_linear"]

Array = NDArray[np.float64]

ALL_CORNERS = 4_000_000
"""All corners are tried up to so many torques of one joint."""

BLOCK = 2048
"""Corners that are tried at once."""

SWEEPS = 50
"""Most passes through all numbers in a search that goes from one to the next."""

GRID, ZOOMS = 33, 5
"""Points along each number in a search inside the box, and how often it is narrowed."""

SAMPLES = 256
"""Random points at which a second derivative is looked at."""

KINKED = {"abs", "sign", "maximum", "minimum", "look_up"}
"""Operations that are straight on both sides of a kink."""

ROUNDING = 1e-9
"""A second derivative below this share of the torque's size [1] is rounding."""


@attrs.frozen(eq=False)
class Found:
    """For each of some targets, the point of the box where the torque is greatest in the target's direction."""

    joint: NDArray[np.intp]
    """The targets' joints, shape (r,)."""
    pose: NDArray[np.intp]
    """The targets' poses, shape (r,)."""
    sign: Array
    """+1 for greatest, -1 for least, shape (r,)."""
    points: Array
    """Points of the box, -1 to 1 along each number, shape (r, s)."""
    value: Array
    """``sign`` times the torque there [N·m], shape (r,); -inf where it is not a number."""


@attrs.frozen(eq=False)
class BoxSearch:
    """A torque program whose variables run from -1 to 1."""

    program: Program
    poses: list[Array]
    variables: int

    def targets(self, joints: int) -> Found:
        """Each joint, pose and direction, at the middle of the box."""
        shape = (joints, self.poses[0].size, 2)
        joint, pose, way = (index.ravel() for index in np.indices(shape))
        sign = np.where(way == 0, 1.0, -1.0)
        points = np.zeros((sign.size, self.variables))
        return Found(joint, pose, sign, points, self.values(joint, pose, sign, points))

    def values(self, joint: NDArray[np.intp], pose: NDArray[np.intp], sign: Array, points: Array) -> Array:
        """Torques at the targets' own poses, in their directions."""
        torques = torques_of(self.program, [column[pose] for column in self.poses], list(points.T))
        found = sign * np.choose(joint, torques) if len(torques) > 1 else sign * torques[0]
        return np.where(np.isfinite(found), found, -np.inf)

    def at(self, found: Found, points: Array) -> Found:
        """The targets at other points."""
        return attrs.evolve(found, points=points, value=self.values(found.joint, found.pose, found.sign, points))

    def all_corners(self, found: Found) -> tuple[Found, int]:
        """The best of all corners for each target, and in how many corners some torque is not a number."""
        count = 2**self.variables
        points, value, broken = found.points.copy(), np.full(found.value.shape, -np.inf), 0
        for first in range(0, count, BLOCK):
            numbers = np.arange(first, min(first + BLOCK, count))
            corners = np.where((numbers[:, None] >> np.arange(self.variables)) & 1, 1.0, -1.0)
            torques = np.stack(torques_of(self.program, self.poses, [c[:, None] for c in corners.T]))
            bad = ~np.isfinite(torques)
            broken += int(np.count_nonzero(np.any(bad, axis=(0, 2))))
            for sign in (1.0, -1.0):
                rows = np.where(bad, -np.inf, sign * torques)
                best = np.argmax(rows, axis=1)
                mine = found.sign == sign
                joint, pose = found.joint[mine], found.pose[mine]
                winner = best[joint, pose]
                reached = rows[joint, winner, pose]
                better = reached > value[mine]
                place = np.flatnonzero(mine)[better]
                value[place], points[place] = reached[better], corners[winner[better]]
        return attrs.evolve(found, points=points, value=value), broken

    def corner_by_corner(self, found: Found) -> Found:
        """From each target's corner to better ones that differ in one number, until there are none."""
        for _ in range(SWEEPS):
            before = found.value
            for variable in range(self.variables):
                flipped = found.points.copy()
                flipped[:, variable] *= -1.0
                found = _better(found, self.at(found, flipped))
            if np.array_equal(before, found.value):
                break
        return found

    def inside(self, found: Found, curved: Sequence[int]) -> Found:
        """From each target's point along the numbers in which the torque is curved, one after the other."""
        for _ in range(SWEEPS):
            before = found.value
            for variable in curved:
                width = 2.0  # reaches the far side from a corner
                for _ in range(ZOOMS):
                    centre = found.points[:, variable]
                    for offset in np.linspace(-width, width, GRID):
                        moved = found.points.copy()
                        moved[:, variable] = np.clip(centre + offset, -1.0, 1.0)
                        found = _better(found, self.at(found, moved))
                    width /= (GRID - 1) / 4
            if np.all(found.value - before <= 1e-12 * np.abs(found.value)):
                break
        return found


def _better(one: Found, other: Found) -> Found:
    wins = other.value > one.value
    points = np.where(wins[:, None], other.points, one.points)
    return attrs.evolve(one, points=points, value=np.where(wins, other.value, one.value))


def is_linear(program: Program, slopes: Program, joints: int) -> bool:
    """Whether no choice and no derivative depends on a variable, so that the torque is linear in all of them together."""
    if any(slot >= joints for slot in _kinked(program)):
        return False
    depends = [slot >= joints for slot in range(len(slopes.inputs))] + [False] * len(slopes.constants)
    for step in slopes.steps:
        depends.append(any(depends[slot] for slot in step.arguments))
    return not any(depends[slot] for slot in slopes.outputs)


def curved_inputs(search: BoxSearch, joints: int, size: Array) -> tuple[list[int], bool]:
    """Variables in which alone the torque is not linear, and whether the others are so by their formulas.

    A variable on which a choice depends, such as whether a spring is slack, counts as curved. Without
    the formulas saying so, second derivatives are looked at in random points of the box.
    """
    kinked = _kinked(search.program)
    curved: list[int] = []
    by_formula = True
    points = np.random.default_rng(0).uniform(-1.0, 1.0, (SAMPLES, search.variables))
    for variable in range(search.variables):
        if joints + variable in kinked:
            curved.append(variable)
            continue
        name = search.program.inputs[joints + variable]
        second = search.program.derivative(name).derivative(name)
        if _is_nothing(second):
            continue
        values = torques_of(second, search.poses, [column[:, None] for column in points.T])
        greatest = np.array([np.max(np.abs(value), initial=0.0, where=np.isfinite(value)) for value in values])
        if np.any(greatest > ROUNDING * np.where(size > 0, size, 1.0)):
            curved.append(variable)
        else:
            by_formula = False
    return curved, by_formula


def _kinked(program: Program) -> frozenset[int]:
    """Inputs on which a choice or a table depends, by slot."""
    first = len(program.inputs)
    reached = [frozenset({slot}) for slot in range(first)] + [frozenset[int]()] * len(program.constants)
    kinked: frozenset[int] = frozenset()
    for step in program.steps:
        arguments = [reached[slot] for slot in step.arguments]
        if step.name == "where":
            kinked |= arguments[0]
        elif step.name in KINKED:
            kinked |= frozenset[int]().union(*arguments)
        reached.append(frozenset[int]().union(*arguments))
    return kinked


def _is_nothing(program: Program) -> bool:
    """Whether all outputs are the constant zero."""
    first = len(program.inputs)
    constants = dict(enumerate(program.constants, first))
    return all(isinstance(constants.get(slot), float) and constants[slot] == 0.0 for slot in program.outputs)

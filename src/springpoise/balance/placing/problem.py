"""A placement as numbers: what is left over and what is kept, for knobs and shares, with exact slopes."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.placing.knobs import Knob
from springpoise.balance.placing.limits import Rules, limits_of
from springpoise.balance.placing.shares import MountShares, sizable, with_shares
from springpoise.errors import InputError, InputTypeError
from springpoise.mechanism import Mechanism
from springpoise.tape import Program, record

__all__ = ["Problem", "built", "recorded"]

Array = NDArray[np.float64]
Build = Callable[..., Mechanism]

AGREE = 1e-9
"""A recording that differs from ``build`` itself by more than this share is not used."""


def built(build: Build, values: Mapping[str, Any], free: Sequence[int] | None, gravity: Any) -> Mechanism:
    """What ``build`` makes of some knob values, ready to be sized."""
    mechanism = build(**values)
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"build must return a Mechanism, got {mechanism!r}")
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    return mechanism if free is None else sizable(mechanism, free)


@attrs.frozen(eq=False)
class Problem:
    """One placement for a solver: unknowns are the knobs and then the shares, in SI."""

    knobs: tuple[Knob, ...]
    norm: str
    q: Array
    """Poses [rad], shape (p,), or (p, n) for n joints."""
    joints: int
    """How many joints there are."""
    peak: float
    """Peak gravity torque of all joints [N·m]."""
    nominal: Array
    """Shares at which slopes are taken."""
    limits: int
    """How many limits there are."""
    values: Program
    """Residuals [N·m] of all joints and scaled margins over (q, unknowns)."""
    slopes: Program
    """The same and their derivatives by the unknowns."""

    @property
    def low(self) -> Array:
        """Lower bounds of the knobs."""
        return np.array([knob.low for knob in self.knobs])

    @property
    def width(self) -> Array:
        """Widths of the knobs' ranges."""
        return np.array([knob.high - knob.low for knob in self.knobs])

    def at(self, unknowns: Array) -> tuple[Array, Array]:
        """Residual [N·m], (..., joints · poses), and scaled margins [1], (limits, ..., poses); unknowns (count, ...)."""
        rows = self._run(self.values, unknowns)
        return self._side_by_side(rows[: self.joints]), rows[self.joints :]

    def sloped(self, unknowns: Array) -> tuple[Array, Array, Array, Array]:
        """The same, and the slopes of both, (unknowns, ..., joints · poses) and (limits, unknowns, ..., poses)."""
        rows = self._run(self.slopes, unknowns)
        outputs = self.joints + self.limits
        slopes = rows[outputs:].reshape(outputs, len(unknowns), *rows.shape[1:])
        return (
            self._side_by_side(rows[: self.joints]),
            rows[self.joints : outputs],
            self._side_by_side(slopes[: self.joints]),
            slopes[self.joints :],
        )

    @staticmethod
    def _side_by_side(rows: Array) -> Array:
        """Rows of the joints, (joints, ..., poses), as one, (..., joints · poses)."""
        return rows[0] if len(rows) == 1 else np.concatenate(list(rows), axis=-1)

    def _run(self, program: Program, unknowns: Array) -> Array:
        arguments = unknowns.tolist() if unknowns.ndim == 1 else [u[..., None] for u in unknowns]
        found = program.numpy_function()(*columns_of(self.q), *arguments)
        outputs = (found,) if program.scalar else found
        rows = np.empty((len(outputs), *unknowns.shape[1:], len(self.q)))
        for row, output in zip(rows, outputs, strict=True):
            row[...] = output
        return rows


def columns_of(q: Array) -> list[Array]:
    """Poses joint by joint, each of shape (p,), as a program takes them."""
    return [q] if q.ndim == 1 else [np.ascontiguousarray(column) for column in q.T]


def recorded(
    build: Build,
    knobs: tuple[Knob, ...],
    norm: str,
    q: Array,
    rules: Rules,
    free: Sequence[int],
    layout: tuple[MountShares, ...],
    nominal: Sequence[float],
    peak: float,
    gravity: Any,
) -> Problem | str:
    """The problem over a recording of ``build``, or why there is none."""
    joints = 1 if q.ndim == 1 else q.shape[1]
    names = [f"knob_{i}" for i in range(len(knobs))]
    share_names = [f"share_{i}" for i in range(len(nominal))]

    def formula(*inputs: Any) -> tuple[Any, ...]:
        pose, unknowns = inputs[0] if joints == 1 else tuple(inputs[:joints]), inputs[joints:]
        values = {knob.name: value for knob, value in zip(knobs, unknowns, strict=False)}
        mechanism = with_shares(built(build, values, free, gravity), layout, unknowns[len(knobs) :])
        torque = mechanism.holding_torque(pose)
        limits = limits_of(mechanism, pose, rules, values)
        return (*([torque] if joints == 1 else torque), *(limit.margin / limit.scale for limit in limits))

    def plainly(unknowns: Sequence[float]) -> list[Any]:
        """The same of numbers, at all poses at once."""
        values = {knob.name: value for knob, value in zip(knobs, unknowns, strict=False)}
        mechanism = with_shares(built(build, values, free, gravity), layout, unknowns[len(knobs) :])
        torque = np.asarray(mechanism.holding_torque(q))
        limits = limits_of(mechanism, q, rules, values)
        return [*([torque] if joints == 1 else torque.T), *(limit.margin / limit.scale for limit in limits)]

    try:
        program = record(formula, [*(f"q_{i}" for i in range(joints)), *names, *share_names])
        slopes = program.derivative([*names, *share_names], with_values=True)
        limits = len(program.outputs) - joints
        problem = Problem(knobs, norm, q, joints, peak, np.array(nominal), limits, program, slopes)
        for share in (0.5, 0.37, 0.81):  # a build that looks at what kind of number it gets may do another thing
            unknowns = np.concatenate([problem.low + share * problem.width, nominal])
            try:
                expected = np.stack([np.broadcast_to(one, len(q)) for one in plainly(unknowns.tolist())])
            except InputError:  # a place at which nothing can be built
                continue
            got = problem._run(program, unknowns)
            size = np.max(np.abs(expected), axis=1, keepdims=True, initial=1e-12, where=np.isfinite(expected))
            size[:joints] = np.max(size[:joints])  # beside another joint's torque a small one may be rounding
            if not np.allclose(got / size, expected / size, rtol=0.0, atol=AGREE, equal_nan=True):
                return "build does another thing with numbers than with recorded variables"
    except Exception as error:  # build is the user's, and may raise anything where it meets a variable
        return str(error).split(":")[0].split(";")[0] or type(error).__name__
    return problem

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
    """Poses [rad]."""
    peak: float
    """Peak gravity torque [N·m]."""
    nominal: Array
    """Shares at which slopes are taken."""
    limits: int
    """How many limits there are."""
    values: Program
    """Residual [N·m] and scaled margins over (q, unknowns)."""
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

    def at(self, unknowns: Array) -> Array:
        """Residual [N·m] and scaled margins [1], (1 + limits, ..., poses); unknowns of shape (count, ...)."""
        return self._run(self.values, unknowns)

    def sloped(self, unknowns: Array) -> tuple[Array, Array]:
        """The same, and their derivatives (1 + limits, unknowns, ..., poses)."""
        rows = self._run(self.slopes, unknowns)
        outputs = 1 + self.limits
        return rows[:outputs], rows[outputs:].reshape(outputs, len(unknowns), *rows.shape[1:])

    def _run(self, program: Program, unknowns: Array) -> Array:
        arguments = unknowns.tolist() if unknowns.ndim == 1 else [u[..., None] for u in unknowns]
        found = program.numpy_function()(self.q, *arguments)
        outputs = (found,) if program.scalar else found
        rows = np.empty((len(outputs), *unknowns.shape[1:], self.q.size))
        for row, output in zip(rows, outputs, strict=True):
            row[...] = output
        return rows


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
    names = [f"knob_{i}" for i in range(len(knobs))]
    share_names = [f"share_{i}" for i in range(len(nominal))]

    def formula(angle: Any, *unknowns: Any) -> tuple[Any, ...]:
        values = {knob.name: value for knob, value in zip(knobs, unknowns, strict=False)}
        mechanism = with_shares(built(build, values, free, gravity), layout, unknowns[len(knobs) :])
        limits = limits_of(mechanism, angle, rules, values)
        return (mechanism.holding_torque(angle), *(limit.margin / limit.scale for limit in limits))

    try:
        program = record(formula, ["q", *names, *share_names])
        slopes = program.derivative([*names, *share_names], with_values=True)
        problem = Problem(knobs, norm, q, peak, np.array(nominal), len(program.outputs) - 1, program, slopes)
        for share in (0.5, 0.37, 0.81):  # a build that looks at what kind of number it gets may do another thing
            unknowns = np.concatenate([problem.low + share * problem.width, nominal])
            try:
                expected = np.stack([np.broadcast_to(one, q.shape) for one in formula(q, *unknowns.tolist())])
            except InputError:  # a place at which nothing can be built
                continue
            got = problem.at(unknowns)
            size = np.max(np.abs(expected), axis=1, keepdims=True, initial=1e-12, where=np.isfinite(expected))
            if not np.allclose(got / size, expected / size, rtol=0.0, atol=AGREE, equal_nan=True):
                return "build does another thing with numbers than with recorded variables"
    except Exception as error:  # build is the user's, and may raise anything where it meets a variable
        return str(error).split(":")[0].split(";")[0] or type(error).__name__
    return problem

"""What came out of many scattered builds."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError
from springpoise.mechanism import Mechanism
from springpoise.tables import facts, number
from springpoise.tolerance.chunks import CHUNK, chunk_bounds
from springpoise.tolerance.fields import field_of, replaced
from springpoise.tolerance.recorded import pose_text, torque_units
from springpoise.tolerance.spreads import PERCENT, Spreads

__all__ = ["Scatter", "limits_of"]

Array = NDArray[np.float64]

SURE = 1.959963984540054
"""Standard deviations on each side that hold 95 % of a normal distribution [1]."""


@attrs.frozen(eq=False, repr=False, kw_only=True)
class Scatter:
    """Many builds of one mechanism. For n joints each torque has a last axis of joints."""

    mechanism: Mechanism
    """The mechanism as drawn."""
    builds: int
    """How many builds there are."""
    seed: int
    """What all draws follow from."""
    poses: Array
    """The poses that were looked at [rad]."""
    worst: Array
    """Worst residual of each build over the poses [N·m], >= 0; NaN for a build that cannot take some pose."""
    levels: tuple[float, ...]
    """Levels of the bands [1]."""
    bands: Array
    """Quantiles of the holding torque at each pose [N·m], shape (levels, poses), of builds that can take every pose; NaN of none."""
    nominal: Array
    """Holding torque of the mechanism as drawn at each pose [N·m]."""
    peak_gravity_torque: Any
    """Greatest gravity torque of the mechanism as drawn over the poses [N·m]."""
    limit: Any
    """Worst residual that is good enough [N·m]; None where none was given."""
    gravity: Any
    """Gravity that was given to the call [m/s²]; None for the mechanism's own."""
    spreads: Spreads
    """The spreads, as they were read."""

    @property
    def broken(self) -> int:
        """How many builds cannot take some pose, such as those whose loop does not close there."""
        return int(np.count_nonzero(~np.all(np.isfinite(self._rows), axis=1)))

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.broken:
            return f"{self.broken} of {self.builds} builds cannot take some pose"
        if self.limit is None:
            return f"all {self.builds} builds can take every pose"
        return f"{100 * self.yield_within(self.limit):.2f} % of {self.builds} builds keep the limit"

    def quantile(self, level: Any) -> Any:
        """Worst residual that so large a part of the builds stays below [N·m]; a broken build counts as infinite.

        Parameters
        ----------
        level
            Part of the builds, from 0 to 1, or several.
        """
        if not np.all((np.asarray(level) >= 0) & (np.asarray(level) <= 1)):
            raise InputError(f"level must be from 0 to 1, got {level!r}")
        rows = np.where(np.isfinite(self._rows), self._rows, np.inf)
        # A level between a whole build and a broken one is infinite, not NaN.
        found = np.quantile(rows, level, axis=0, method="inverted_cdf")
        return found if self.worst.ndim > 1 else (float(found[0]) if np.ndim(level) == 0 else found[:, 0])

    def yield_within(self, limit: Any = None) -> float:
        """Part of the builds whose worst residual keeps a limit [1]; for n joints that of each joint.

        Parameters
        ----------
        limit
            Worst residual [N·m], or a percentage of the peak gravity torque such as ``"5 %"``; for
            n joints one each. None for that of the call.
        """
        return self._kept(limit) / self.builds

    def yield_interval(self, limit: Any = None) -> tuple[float, float]:
        """Where the yield of infinitely many builds lies, with 95 % confidence [1]; argument as ``yield_within``.

        Wilson, E. B. (1927), J. Am. Stat. Assoc. 22:209-212.
        """
        n, share = self.builds, self.yield_within(limit)
        bend = SURE**2 / n
        half = SURE * math.sqrt(share * (1 - share) / n + bend / (4 * n)) / (1 + bend)
        middle = (share + bend / 2) / (1 + bend)
        return max(0.0, middle - half), min(1.0, middle + half)

    @property
    def worst_build(self) -> int:
        """Number of the build with the greatest worst residual over the peak gravity torque; broken ones apart."""
        size = np.atleast_1d(self.peak_gravity_torque)
        shares = np.max(self._rows / np.where(size > 0, size, 1.0), axis=1)
        if not np.any(np.isfinite(shares)):
            raise InputError("worst_build must be of builds that can take every pose, got none")
        return int(np.nanargmax(shares))

    def values_of(self, build: int) -> dict[str, float]:
        """Values of the scattered fields of one build, by name [the fields' units]."""
        if isinstance(build, bool) or not isinstance(build, int | np.integer) or not 0 <= build < self.builds:
            raise InputError(f"build must be a whole number from 0 to {self.builds - 1}, got {build!r}")
        chunk = int(build) // CHUNK
        columns = self.spreads.values(self.seed, chunk, *chunk_bounds(chunk, self.builds))
        return {name: float(c[build - chunk * CHUNK]) for name, c in zip(self.spreads.names, columns, strict=True)}

    def mechanism_of(self, build: int) -> Mechanism:
        """One build as a mechanism of its own."""
        return replaced(self.mechanism, self.values_of(build))

    @property
    def _units(self) -> tuple[str, ...]:
        return torque_units(self.mechanism)

    @property
    def _rows(self) -> Array:
        return self.worst.reshape(self.builds, -1)

    def _kept(self, limit: Any) -> int:
        if limit is None and self.limit is None:
            raise InputError(
                f"limit must be a torque in {' or '.join(sorted(set(self._units)))} where the call had none, got None"
            )
        given = self.limit if limit is None else limit
        limits = limits_of(given, np.atleast_1d(self.peak_gravity_torque), self._units)
        return int(np.count_nonzero(np.all(self._rows <= limits, axis=1)))

    def _lines(self) -> Iterator[tuple[str, str]]:
        yield "status", self.status
        size = np.atleast_1d(self.peak_gravity_torque)
        names: list[str] = [""]
        if size.size > 1:
            linkage: Any = self.mechanism.linkage
            names = [f", {name}" for name in getattr(linkage, "joint_names", range(1, size.size + 1))]
        drawn = np.max(np.abs(self.nominal.reshape(len(self.poses), -1)), axis=0)
        levels = ((0.5, "half of the builds"), (0.95, "95 % of the builds"), (0.99, "99 % of the builds"))
        found = np.reshape(self.quantile([level for level, _ in levels]), (len(levels), -1))
        for joint, name in enumerate(names):
            unit = self._units[joint]
            yield f"as drawn{name}", _torque(drawn[joint], size[joint], unit)
            for row, (_, text) in enumerate(levels):
                yield f"{text}{name}", f"within {_torque(found[row, joint], size[joint], unit)}"
        if self.limit is not None:
            low, high = self.yield_interval()
            text = ", ".join(
                number(float(one), unit) for one, unit in zip(np.atleast_1d(self.limit), self._units, strict=True)
            )
            yield (
                f"within {text}",
                f"{100 * self.yield_within():.2f} % of the builds ({100 * low:.2f} to {100 * high:.2f} %)",
            )
        if self.broken < self.builds:
            yield from self._worst_lines(size)

    def _worst_lines(self, size: Array) -> Iterator[tuple[str, str]]:
        build = self.worst_build
        torque = np.abs(self.mechanism_of(build).holding_torque(self.poses, self.gravity)).reshape(len(self.poses), -1)
        pose, joint = np.unravel_index(int(np.argmax(torque / np.where(size > 0, size, 1.0))), torque.shape)
        at = pose_text(self.mechanism, self.poses[pose])
        yield f"worst build, {build}", f"{_torque(torque[pose, joint], size[joint], self._units[joint])} at {at}"
        for name, value in self.values_of(build).items():
            field = field_of(self.mechanism, name)
            yield f"  {name}", f"{number(value, field.unit)}, drawn {number(field.value, field.unit)}"

    def __str__(self) -> str:
        head = f"scatter of {self.builds} builds over {len(self.poses)} poses, seed {self.seed}: worst residuals\n"
        return head + facts(self._lines())

    def __repr__(self) -> str:
        return f"<Scatter of {self.builds} builds: {self.status}>"


def limits_of(limit: Any, size: Array, torque_units: Sequence[str]) -> Array:
    """Limits of the joints, shape (joints,); a percentage is one of the peak gravity torque ``size``.

    ``torque_units`` are the units of the joints' torques, ``"N*m"`` or ``"N"``.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Not a torque or percentage, negative, or another number of them than joints.
    """
    several = isinstance(limit, list | tuple | np.ndarray) and np.ndim(limit) == 1
    limits = list(limit) if several else [limit] * size.size
    if len(limits) != size.size:
        raise InputError(f"limit must be one for each of {size.size} joints, got {len(limits)}")
    found = []
    for one, peak, unit in zip(limits, size, torque_units, strict=True):
        percent = PERCENT.fullmatch(one) if isinstance(one, str) else None
        value = units.scalar_si(one, unit, "limit") if percent is None else float(peak) * float(percent[1]) / 100
        if not isinstance(value, float) or not value >= 0.0:
            raise InputError(f"limit must be >= 0 {unit}, got {one!r}")
        found.append(value)
    return np.array(found)


def _torque(value: float, size: float, unit: str) -> str:
    share = f" ({100 * value / size:.2f} %)" if size > 0 else ""
    return f"{number(float(value), unit)}{share}"

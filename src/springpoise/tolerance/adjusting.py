"""Which single adjuster puts scattered builds right, and how far it has to move."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from concurrent.futures import Executor
from typing import Any, Literal

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.carriers import Carrier
from springpoise.errors import InputError, NoSolution
from springpoise.executors import run
from springpoise.mechanism import Mechanism
from springpoise.tables import grid, number
from springpoise.tape import Program
from springpoise.tolerance.adjust_search import Adjusting, adjusted
from springpoise.tolerance.chunks import checked_builds, checked_seed, chunk_bounds, chunk_count
from springpoise.tolerance.fields import field_of, list_fields, replaced
from springpoise.tolerance.recorded import can_vary, nominal, poses_of, size_of, torque_program, torque_units
from springpoise.tolerance.spreads import Spread, Spreads, refuse_unbuildable, spreads_of

__all__ = ["Adjuster", "Adjusters", "adjusters"]

Array = NDArray[np.float64]

SCREWS = re.compile(r"springs\[\d+\]\.(path\.(?!.*bearing_).*|rigid_length|spring\.free_angle)")
"""What is tried where no candidates are named: points, radii, cable lengths and free angles of the mounts."""


@attrs.frozen(eq=False, kw_only=True)
class Adjuster:
    """What one field, set in each build by itself, leaves over."""

    name: str
    """The field."""
    unit: str
    """Its unit."""
    value: float
    """Its value as drawn [its unit]."""
    remains: Array
    """Worst residual of each build after adjusting [N·m]; NaN for a build that cannot take some pose."""
    moves: Array
    """How far the field is moved in each build from where it was built [its unit]."""
    coverage: float
    """Part of the builds for which ``residual`` and ``range`` are given [1]."""
    obstacle: str | None
    """Why some settings cannot be built; None where all can."""

    @property
    def residual(self) -> float:
        """Worst residual that ``coverage`` of the builds stay within after adjusting [N·m]."""
        return _quantile(self.remains, self.coverage)

    @property
    def range(self) -> tuple[float, float]:
        """Moves from and to which hold the middle ``coverage`` of the builds [its unit]."""
        moves = self.moves[np.isfinite(self.remains)]
        low, high = np.quantile(moves, [0.5 * (1 - self.coverage), 0.5 * (1 + self.coverage)]) if moves.size else (0, 0)
        return float(low), float(high)

    @property
    def whole_range(self) -> tuple[float, float]:
        """Least and greatest move of all builds [its unit]."""
        moves = self.moves[np.isfinite(self.remains)]
        return (float(np.min(moves)), float(np.max(moves))) if moves.size else (0.0, 0.0)


@attrs.frozen(eq=False, kw_only=True)
class Adjusters:
    """Adjusters, the best first."""

    rows: tuple[Adjuster, ...]
    """The candidates, ranked by the residual that remains; those with settings that cannot be built last."""
    idle: tuple[str, ...]
    """Candidates that have no effect on the holding torque."""
    before: Array
    """Worst residual of each build as it is built [N·m]."""
    norm: str
    """What the adjuster makes least: ``"minimax"``, the worst residual, or ``"rms"``."""
    builds: int
    """How many builds were adjusted."""
    coverage: float
    """Part of the builds for which residuals and ranges are given [1]."""
    peak_gravity_torque: float
    """Greatest gravity torque of the mechanism as drawn over the poses [N·m]."""
    torque_unit: str = "N*m"
    """Unit of the joint's torque: ``"N*m"``, or ``"N"`` of a prismatic joint."""

    @property
    def residual_before(self) -> float:
        """Worst residual that ``coverage`` of the builds stay within as built [N·m]."""
        return _quantile(self.before, self.coverage)

    @property
    def success(self) -> bool:
        """Whether some adjuster makes the builds better."""
        return bool(self.rows) and self.rows[0].obstacle is None and self.rows[0].residual < self.residual_before

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if not self.success:
            return "no single adjuster makes these builds better"
        best = self.rows[0]
        return (
            f"{best.name} alone brings {100 * self.coverage:g} % of the builds from {number(self.residual_before, self.torque_unit)} "
            f"to {number(best.residual, self.torque_unit)}"
        )

    @property
    def best(self) -> Adjuster:
        """The adjuster that leaves the least.

        Raises
        ------
        NoSolution
            None makes the builds better.
        """
        return self.require().rows[0]

    def require(self) -> Adjusters:
        """The result itself, or an error where no adjuster helps.

        Raises
        ------
        NoSolution
            No single adjuster makes the builds better.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def __getitem__(self, name: str) -> Adjuster:
        for row in self.rows:
            if row.name == name:
                return row
        raise KeyError(name)

    def __iter__(self) -> Iterator[Adjuster]:
        return iter(self.rows)

    def __len__(self) -> int:
        return len(self.rows)

    def __str__(self) -> str:
        size, cover = self.peak_gravity_torque, f"{100 * self.coverage:g} %"

        def torque(value: float) -> str:
            return number(value, self.torque_unit) + (f" ({100 * value / size:.2f} %)" if size > 0 else "")

        lines = [("none", "", torque(self.residual_before), "", "")]
        for row in self.rows:
            low, high = row.range
            farthest = max(row.whole_range, key=abs)
            lines.append(
                (
                    row.name,
                    number(row.value, row.unit),
                    torque(row.residual),
                    _moves(low, high, row.unit),
                    _move(farthest, row.unit),
                )
            )
        head = ("adjuster", "drawn", f"{cover} remain within", f"{cover} move it by", "farthest")
        text = f"adjusters ({self.norm}, {self.builds} builds): {self.status}\n" + grid(head, lines)
        for row in self.rows:
            if row.obstacle:
                text += f"\n  {row.name} cannot be set as needed: {row.obstacle}"
        return text + (f"\n  no effect: {', '.join(self.idle)}" if self.idle else "")


@attrs.frozen(eq=False)
class AdjustJob:
    """The builds, and a program for each candidate."""

    programs: tuple[Program, ...]
    poses: Array
    spreads: Spreads
    seed: int
    builds: int
    norm: str

    def chunk(self, index: int) -> list[Array]:
        """Residuals before, then for each candidate moves and residuals after; then least and greatest values."""
        first, count = chunk_bounds(index, self.builds)
        values = self.spreads.values(self.seed, index, first, count)
        columns = [value[:, None] for value in values]
        found: list[Array] = []
        for program in self.programs:
            builds = Adjusting(program, self.poses, columns)
            if not found:
                found.append(np.max(np.abs(builds.at(np.zeros(count))[0]), axis=1))
            found += adjusted(builds, self.norm)
        return [*found, np.array([[np.min(v), np.max(v)] for v in values])[None]]

    def joined(self, parts: list[list[Array]]) -> list[Array]:
        """Several chunks as one."""
        return [np.concatenate(column) for column in zip(*parts, strict=True)]


def adjusters(
    mechanism: Mechanism,
    spreads: Mapping[str, Spread],
    candidates: Sequence[str] | str | None = None,
    *,
    over: Any = None,
    norm: Literal["minimax", "rms"] = "minimax",
    builds: int = 2000,
    coverage: float = 0.95,
    seed: int = 1,
    executor: Executor | None = None,
    gravity: Any = None,
) -> Adjusters:
    """Which single adjuster restores the balance of scattered builds, what remains, and the range it needs.

    Each build is adjusted by itself, as a fitter would: the field is moved from where it was built to
    where the least is left over. That is found to rounding where the residual over the move has one
    valley, as it has in builds that are nearly balanced; of several valleys, or where a spring goes
    slack on the way, it is the best that a coarse look leads to.

    Parameters
    ----------
    mechanism
        The mechanism as drawn, of one joint.
    spreads
        Names of fields with how each of them scatters.
    candidates
        Names of the fields to try; None for the points, radii, cable lengths and free angles of the
        mounts.
    over
        Poses [rad]; None for 121 over the travel.
    norm
        What is made least in each build: ``"minimax"``, the worst residual, or ``"rms"``.
    builds
        How many builds, >= 1.
    coverage
        Part of the builds for which residual and range are given [1], above 0 and at most 1.
    seed, executor
        As for ``scatter``.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Adjusters
        Ranked by the residual that remains.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A field that is unknown or cannot vary, several joints, or a wrong number or norm.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
    >>> mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(858.081875), path), travel=(-1, 1))
    >>> found = adjusters(mech, {"springs[0].spring.rate": Spread.uniform("10 %")}, "springs[0].path.first.at[1]", builds=500)
    >>> found.best.residual < 1e-12  # N·m: a spring that is too strong is hung lower
    True
    >>> round(found.best.whole_range[1], 3)  # m: up to 0.10/0.9 - 0.10
    0.011
    """
    q = poses_of(mechanism, over)
    if mechanism.linkage.joint_count != 1:
        raise InputError(f"mechanism must have one joint to be adjusted, got {mechanism.linkage.joint_count}")
    if norm not in ("minimax", "rms"):
        raise InputError(f"norm must be 'minimax' or 'rms', got {norm!r}")
    if isinstance(coverage, bool) or not isinstance(coverage, int | float) or not 0.0 < coverage <= 1.0:
        raise InputError(f"coverage must be above 0 and at most 1, got {coverage!r}")
    resolved = spreads_of(mechanism, spreads)
    count = checked_builds(builds)
    resolved.check_builds(count)
    nominal(mechanism, q, gravity)
    names, idle, programs = _candidates(mechanism, resolved, candidates, q, gravity)
    job = AdjustJob(tuple(programs), q, resolved, checked_seed(seed), count, norm)
    before, *pairs, ends = run(job, chunk_count(count), executor)
    refuse_unbuildable(mechanism, np.min(ends[..., 0], axis=0), np.max(ends[..., 1], axis=0), resolved.names)
    rows = []
    for name, moves, remains in zip(names, pairs[0::2], pairs[1::2], strict=True):
        field = field_of(mechanism, name)
        rows.append(
            Adjuster(
                name=name,
                unit=field.unit,
                value=field.value,
                remains=remains,
                moves=moves,
                coverage=float(coverage),
                obstacle=_obstacle(mechanism, name, field.value, moves[np.isfinite(remains)]),
            )
        )
    rows.sort(key=lambda row: (row.obstacle is not None, row.residual, row.name))
    return Adjusters(
        rows=tuple(rows),
        idle=tuple(idle),
        before=before,
        norm=norm,
        builds=count,
        coverage=float(coverage),
        peak_gravity_torque=float(size_of(mechanism, q, gravity)[0]),
        torque_unit=torque_units(mechanism)[0],
    )


def _candidates(
    mechanism: Mechanism, spreads: Spreads, candidates: Sequence[str] | str | None, q: Array, gravity: Any
) -> tuple[list[str], list[str], list[Program]]:
    """Candidates that have an effect, those that have none, and for the first torque and slope over the move."""
    if candidates is None:
        able = can_vary(mechanism, None)[0]
        lengths = {field.name for field in list_fields(mechanism) if field.unit in ("m", "rad")}
        screws = [name for name in able if name in lengths and SCREWS.fullmatch(name)]
        if not screws:
            raise InputError("candidates must be named for a mechanism without springs on points, got None")
        wanted = screws
    else:
        wanted, _ = can_vary(mechanism, candidates)
    names: list[str] = []
    idle: list[str] = []
    programs: list[Program] = []
    for name in wanted:
        program = _program(mechanism, spreads.names, name, gravity)
        middle = [field_of(mechanism, own).value for own in spreads.names]
        slope = np.asarray(program.numpy_function()(q, *middle, 0.0)[1])
        if np.any(slope):
            names.append(name)
            programs.append(program)
        else:
            idle.append(name)
    if not names:
        raise InputError(f"candidates must have an effect on the holding torque, got {', '.join(idle)}")
    return names, idle, programs


def _program(mechanism: Mechanism, names: Sequence[str], adjuster: str, gravity: Any) -> Program:
    drawn = field_of(mechanism, adjuster).value

    def values(v: Sequence[Carrier]) -> dict[str, Carrier]:
        found = dict(zip(names, v[:-1], strict=True))
        found[adjuster] = found.get(adjuster, drawn) + v[-1]
        return found

    program = torque_program(mechanism, len(names) + 1, values, gravity)
    return program.derivative(program.inputs[-1], with_values=True)


def _obstacle(mechanism: Mechanism, name: str, drawn: float, moves: Array) -> str | None:
    for move in (np.min(moves, initial=0.0), np.max(moves, initial=0.0)):
        try:
            replaced(mechanism, {name: float(drawn + move)})
        except InputError as error:
            return str(error)
    return None


def _quantile(values: Array, level: float) -> float:
    return float(np.quantile(np.where(np.isfinite(values), values, np.inf), level, method="inverted_cdf"))


def _move(value: float, unit: str) -> str:
    if unit == "m":
        return f"{1e3 * value:+.3g} mm"
    if unit == "rad":
        return f"{np.degrees(value):+.3g} deg"
    return f"{value:+.3g}" + ("" if unit == "1" else f" {unit}")


def _moves(low: float, high: float, unit: str) -> str:
    return f"{_move(low, unit)} to {_move(high, unit)}"

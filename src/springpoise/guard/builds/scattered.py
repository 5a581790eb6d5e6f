"""Builds with the scatter that a file states: how many are good enough, and what an adjuster makes of them."""

from __future__ import annotations

from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import tolerance
from springpoise.errors import InputError, SpringpoiseError
from springpoise.guard.amounts import OfPeak
from springpoise.guard.builds.fields import full_name
from springpoise.guard.builds.tolerances import Adjustable, FieldSpread, Tolerances
from springpoise.guard.joints import poses_over
from springpoise.guard.limits.mechanism import UNLOADED
from springpoise.mechanism import Mechanism

__all__ = ["AdjustedBuilds", "Builds", "SpreadCost"]

Array = NDArray[np.float64]


@attrs.frozen(eq=False, kw_only=True)
class AdjustedBuilds:
    """What one adjuster, set in each build by itself, makes of the builds."""

    label: str
    """What it is called."""
    field: str
    """The number that is adjusted."""
    unit: str
    """Its unit."""
    drawn: float
    """Its value as drawn [its unit]."""
    range: tuple[float, float]
    """How far it moves from where it was built [its unit]: its reach, or what the stated coverage of builds needs."""
    farthest: float
    """Move of greatest magnitude that any build needs [its unit]."""
    residual: float
    """Worst residual that the stated coverage of the builds stays within, moved as far as is needed [N·m]."""
    yield_share: float
    """Part of the builds that are good enough with it [1]; one that needs more than ``range`` stays as it was built."""
    obstacle: str | None
    """Why it cannot be set as needed; None where it can."""


@attrs.frozen(kw_only=True)
class SpreadCost:
    """What one spread, or one batch of them, costs."""

    label: str
    """What it is called."""
    spreads: tuple[FieldSpread, ...]
    """The spread, or all of the batch."""
    effect: float
    """What one standard deviation of it moves the torque by, at the worst pose, to first order [N·m], >= 0."""
    at: float
    """That pose [rad]."""
    yield_without: float
    """Part of the builds that were good enough if it did not scatter at all [1]."""


class Builds:
    """The builds of one mechanism; what is asked for is computed once.

    Parameters
    ----------
    mechanism
        The mechanism as drawn, with the payload of the tolerances on it.
    tolerances
        How it scatters.
    """

    def __init__(self, mechanism: Mechanism, tolerances: Tolerances) -> None:
        self.mechanism = mechanism
        self.tolerances = tolerances
        self.poses = poses_over(mechanism, count=tolerances.poses)
        self.units = {field.name: field.unit for field in tolerance.list_fields(mechanism)}
        self.spreads = {self.full(one.field): self._spread(one) for one in tolerances.spreads}
        self.peaks = self._peaks()
        self._scatter: tolerance.Scatter | None = None
        self._adjusted: dict[str, AdjustedBuilds] = {}

    def full(self, field: str) -> str:
        """The field with numbers in its brackets."""
        return full_name(self.mechanism, field)

    def _spread(self, one: FieldSpread) -> tolerance.Spread:
        unit = self.units[self.full(one.field)]
        if one.samples is not None:
            values = [sample.inside(unit) for sample in one.samples]
            return tolerance.Spread.samples(values, in_order=one.in_order, shared=one.shared)
        if one.normal is not None:
            return tolerance.Spread.normal(one.normal.inside(unit), shared=one.shared)
        assert one.uniform is not None
        return tolerance.Spread.uniform(one.uniform.inside(unit), shared=one.shared)

    def _peaks(self) -> Array:
        torque = np.asarray(self.mechanism.gravity_torque(self.poses)).reshape(len(self.poses), -1)
        return np.asarray(np.max(np.abs(torque), axis=0))

    @property
    def limits(self) -> list[float]:
        """Worst residual of a good build, for each joint [N·m, or N where it slides]."""
        given = self.tolerances.residual_limit
        if not isinstance(given, OfPeak):
            return [given] * len(self.peaks)
        # A joint that gravity does not load has no share of anything, but rounding.
        return [max(given.share * float(peak), UNLOADED * float(np.max(self.peaks))) for peak in self.peaks]

    def _scattered(self, spreads: dict[str, tolerance.Spread]) -> tolerance.Scatter:
        limits = self.limits
        return tolerance.scatter(
            self.mechanism,
            spreads,
            builds=self.tolerances.builds,
            over=self.poses,
            seed=self.tolerances.seed,
            limit=limits if len(limits) > 1 else limits[0],
        )

    @property
    def scatter(self) -> tolerance.Scatter:
        """All of them, as they are built.

        Raises
        ------
        InputError, InputTypeError, UnitError
            A field that cannot vary where it is, or a spread that leads to what cannot be built.
        """
        if self._scatter is None:
            try:
                self._scatter = self._scattered(self.spreads)
            except SpringpoiseError as error:
                raise InputError(f"tolerances: {self._explained(error)}") from error
        return self._scatter

    def _explained(self, error: SpringpoiseError) -> str:
        """What went wrong, with the field that cannot vary where there is one."""
        for one in self.tolerances.spreads:
            try:
                tolerance.sensitivities(self.mechanism, over=self.poses[:2], names=[self.full(one.field)])
            except SpringpoiseError:
                return f"spreads must be of numbers that can vary where they are, got {one.field!r}"
        return str(error)

    @property
    def yield_share(self) -> float:
        """Part of the builds that are good enough as built [1]."""
        return self.scatter.yield_within()

    # --------------------------------------------------------------------------------------------
    # of one joint only

    @property
    def adjusted_count(self) -> int:
        """How many builds are adjusted."""
        if any(one.in_order for one in self.tolerances.spreads):  # there has to be one sample for each build
            return self.tolerances.builds
        return min(self.tolerances.builds, self.tolerances.adjusted_builds)

    def adjusted(self, one: Adjustable) -> AdjustedBuilds:
        """What an adjuster makes of them.

        Raises
        ------
        InputError, InputTypeError
            A field that cannot vary where it is, or one that has no effect.
        """
        full = self.full(one.field)
        if full not in self._adjusted:
            self._adjusted[full] = self._judged(self._tried([full]).rows[0], one)
        return self._adjusted[full]

    def all_adjusted(self) -> list[AdjustedBuilds]:
        """What each of the adjusters makes of them, or each that suggests itself where none are named; the best first."""
        named = self.tolerances.adjusters
        if named is None:
            try:
                found = [self._judged(row, Adjustable(field=row.name)) for row in self._tried(None)]
            except InputError:  # springs at the joint have no points, and may have nothing to adjust
                found = []
        else:
            found = [self.adjusted(one) for one in named]
        return sorted(found, key=lambda one: (one.obstacle is not None, -one.yield_share, one.residual))

    def _tried(self, fields: list[str] | None) -> tolerance.Adjusters:
        return tolerance.adjusters(
            self.mechanism,
            self.spreads,
            fields,
            over=self.poses,
            builds=self.adjusted_count,
            coverage=self.tolerances.coverage,
            seed=self.tolerances.seed,
        )

    def _judged(self, row: tolerance.Adjuster, one: Adjustable) -> AdjustedBuilds:
        moved = row.range
        if one.reach is not None:
            reach = one.reach.inside(row.unit)
            if isinstance(reach, str):
                reach = abs(row.value) * one.reach.value / 100.0
            moved = -reach, reach
        limit = self.limits[0]
        as_built = self.scatter.worst[: row.remains.size] <= limit
        within = (row.moves >= moved[0]) & (row.moves <= moved[1])
        return AdjustedBuilds(
            label=one.label,
            field=row.name,
            unit=row.unit,
            drawn=row.value,
            range=moved,
            farthest=max(row.whole_range, key=abs),
            residual=row.residual,
            yield_share=float(np.mean(as_built | (within & (row.remains <= limit)))),
            obstacle=row.obstacle,
        )

    def costs(self) -> list[SpreadCost]:
        """What each spread or batch costs, the dearest first."""
        found = tolerance.sensitivities(self.mechanism, over=self.poses, names=list(self.spreads))
        slopes = {row.name: row.slope for row in found}
        sources: dict[str, list[FieldSpread]] = {}
        for one in self.tolerances.spreads:
            key = f"field {one.field}" if one.shared is None else f"batch {one.shared}"
            sources.setdefault(key, []).append(one)
        costs = []
        for key, members in sources.items():
            names = [self.full(one.field) for one in members]
            effect = self._effect([slopes.get(name, np.zeros(self.poses.shape)) for name in names], names)
            worst = int(np.argmax(effect))
            others = {name: spread for name, spread in self.spreads.items() if name not in names}
            costs.append(
                SpreadCost(
                    label=members[0].label if members[0].shared is None else key,
                    spreads=tuple(members),
                    effect=float(effect[worst]),
                    at=float(self.poses[worst]),
                    yield_without=self._scattered(others).yield_within() if others else self._drawn_share(),
                )
            )
        return sorted(costs, key=lambda cost: -cost.effect)

    def _drawn_share(self) -> float:
        return float(np.max(np.abs(self.scatter.nominal)) <= self.limits[0])

    def _effect(self, slopes: list[Array], names: list[str]) -> Array:
        """What one standard deviation of fields that scatter together moves the torque by at each pose [N·m]."""
        widths = [self.spreads[name].width for name in names]
        if all(isinstance(width, list) and len(width) == len(widths[0]) for width in widths):
            return np.asarray(np.std(np.transpose(widths) @ np.array(slopes), axis=0))
        moved = [slope * self._deviation(name) for slope, name in zip(slopes, names, strict=True)]
        return np.asarray(np.abs(np.sum(moved, axis=0)))

    def _deviation(self, name: str) -> float:
        """Standard deviation of a field [its unit]."""
        spread: Any = self.spreads[name]
        if spread.kind in ("samples", "listed"):
            return float(np.std(spread.width))
        value = next(field.value for field in tolerance.list_fields(self.mechanism) if field.name == name)
        width = spread.width
        if isinstance(width, str):
            width = abs(value) * float(width.split()[0]) / 100.0
        return float(width) / (np.sqrt(3.0) if spread.kind == "uniform" else 1.0)

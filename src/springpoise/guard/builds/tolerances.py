"""What a file says of the scatter from build to build: spreads, the limit of a good build, adjusters."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.guard.amounts import OfPeak, share_of, text_of_share, text_of_torque_or_share, torque_or_share
from springpoise.guard.builds.widths import (
    Width,
    read_width,
    read_widths,
    width_of,
    widths_of,
    write_width,
    write_widths,
)
from springpoise.guard.format.place import nearest

__all__ = ["Adjustable", "FieldSpread", "Tolerances"]

MOST_BUILDS = 200_000
"""More builds tell a yield more finely than anyone knows a tolerance; they would only cost time."""

MOST_ADJUSTED = 20_000
MOST_POSES = 2_000
MOST_SPREADS = 200


def _text(value: Any, name: str, *, optional: bool = False) -> Any:
    if optional and value is None:
        return None
    if not isinstance(value, str) or not value.strip():
        raise InputTypeError(f"{name} must be a text, got {value!r}")
    return value


def _whole(value: Any, name: str, lowest: int, highest: int) -> int:
    if isinstance(value, bool) or not isinstance(value, int) or not lowest <= value <= highest:
        raise InputError(f"{name} must be a whole number from {lowest} to {highest}, got {value!r}")
    return value


def _positive_width(value: Any, name: str) -> Any:
    if value is None:
        return None
    width = width_of(value, name)
    if not width.value > 0.0:
        raise InputError(f"{name} must be > 0, got {width}")
    return width


def _spread_field(value: Any) -> str:
    return str(_text(value, "FieldSpread.field"))


def _spread_name(value: Any) -> Any:
    return _text(value, "FieldSpread.name", optional=True)


def _normal(value: Any) -> Any:
    return _positive_width(value, "FieldSpread.normal")


def _uniform(value: Any) -> Any:
    return _positive_width(value, "FieldSpread.uniform")


def _samples(value: Any) -> Any:
    return None if value is None else widths_of(value, "FieldSpread.samples")


def _shared(value: Any) -> Any:
    return _text(value, "FieldSpread.shared", optional=True)


def _adjustable_field(value: Any) -> str:
    return str(_text(value, "Adjustable.field"))


def _adjustable_name(value: Any) -> Any:
    return _text(value, "Adjustable.name", optional=True)


def _reach(value: Any) -> Any:
    return _positive_width(value, "Adjustable.reach")


def _builds(value: Any) -> int:
    return _whole(value, "Tolerances.builds", 1, MOST_BUILDS)


def _seed(value: Any) -> int:
    return _whole(value, "Tolerances.seed", 0, 2**63 - 1)


def _poses(value: Any) -> int:
    return _whole(value, "Tolerances.poses", 2, MOST_POSES)


def _adjusted_builds(value: Any) -> int:
    return _whole(value, "Tolerances.adjusted_builds", 1, MOST_ADJUSTED)


def _coverage(value: Any) -> float:
    return share_of(value, "Tolerances.coverage")


def _flag(value: Any) -> bool:
    if not isinstance(value, bool):
        raise InputTypeError(f"FieldSpread.in_order must be true or false, got {value!r}")
    return value


@attrs.frozen(kw_only=True)
class FieldSpread:
    """How one number of the mechanism scatters: as exactly one of ``normal``, ``uniform`` and ``samples``.

    Raises
    ------
    InputError, InputTypeError
        None or several of the three, a width that is not positive, or a value that cannot be read.

    Examples
    --------
    >>> print(FieldSpread(field="springs[0].spring.rate", normal="4 %", shared="batch"))
    normal 4 %, batch 'batch'
    """

    field: str = attrs.field(converter=_spread_field)
    """The number by its name, as ``springpoise.tolerance.list_fields`` lists it; names of parts may stand in brackets."""
    name: str | None = attrs.field(default=None, converter=_spread_name)
    """What reports call it; None for the field itself."""
    normal: Width | None = attrs.field(
        default=None,
        converter=_normal,
        metadata={"read": read_width, "write": write_width},
    )
    """Standard deviation [the field's unit] of a normal spread, > 0, or a percentage of the value."""
    uniform: Width | None = attrs.field(
        default=None,
        converter=_uniform,
        metadata={"read": read_width, "write": write_width},
    )
    """Half-width [the field's unit] within which all values are equally likely, > 0, or a percentage of the value."""
    samples: tuple[Width, ...] | None = attrs.field(
        default=None,
        converter=_samples,
        metadata={"read": read_widths, "write": write_widths},
    )
    """Values of its own, such as measured ones [the field's unit], shape (n,): each build draws one of them."""
    in_order: bool = attrs.field(default=False, converter=_flag)
    """Whether the i-th build has the i-th of ``samples``, of which there must be as many as builds."""
    shared: str | None = attrs.field(default=None, converter=_shared)
    """Name of the batch whose fields all lie equally far up or down; None for one that scatters by itself."""

    def __attrs_post_init__(self) -> None:
        given = [kind for kind in ("normal", "uniform", "samples") if getattr(self, kind) is not None]
        if len(given) != 1:
            raise InputError(
                f"FieldSpread must have one of normal, uniform and samples, got {' and '.join(given) or 'none'}"
            )
        if self.in_order and self.samples is None:
            raise InputError(f"FieldSpread.in_order must go with samples, got it with {given[0]}")

    @property
    def label(self) -> str:
        """What reports call it."""
        return self.field if self.name is None else self.name

    @property
    def kind(self) -> str:
        """How it scatters, without batch: ``"normal 4 %"``."""
        if self.samples is not None:
            return f"{len(self.samples)} samples" + (" in order" if self.in_order else "")
        return f"normal {self.normal}" if self.normal is not None else f"uniform {self.uniform}"

    def __str__(self) -> str:
        return self.kind + ("" if self.shared is None else f", batch {self.shared!r}")


@attrs.frozen(kw_only=True)
class Adjustable:
    """A number of the mechanism that a fitter can set in each build by itself.

    Raises
    ------
    InputError, InputTypeError
        A reach that is not positive, or a value that cannot be read.
    """

    field: str = attrs.field(converter=_adjustable_field)
    """The number by its name, as of a spread."""
    name: str | None = attrs.field(default=None, converter=_adjustable_name)
    """What reports call it; None for the field itself."""
    reach: Width | None = attrs.field(
        default=None,
        converter=_reach,
        metadata={"read": read_width, "write": write_width},
    )
    """How far it can be moved to each side of where it was built [the field's unit], > 0; None for as far as is needed."""

    @property
    def label(self) -> str:
        """What reports call it."""
        return self.field if self.name is None else self.name

    def __str__(self) -> str:
        return self.field + ("" if self.reach is None else f" within +-{self.reach}")


def _all_of(values: Any, cls: type, name: str) -> Any:
    found = tuple(values) if isinstance(values, list | tuple) else values
    if not isinstance(found, tuple) or not all(isinstance(item, cls) for item in found):
        raise InputTypeError(f"Tolerances.{name} must be a sequence of {cls.__name__}, got {values!r}")
    return found


def _spreads(values: Any) -> tuple[FieldSpread, ...]:
    found: tuple[FieldSpread, ...] = _all_of(values, FieldSpread, "spreads")
    if not 0 < len(found) <= MOST_SPREADS:
        raise InputError(f"Tolerances.spreads must be 1 to {MOST_SPREADS} spreads, got {len(found)}")
    return found


def _adjusters(values: Any) -> Any:
    return None if values is None else _all_of(values, Adjustable, "adjusters")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Tolerances:
    """How the parts scatter, and which builds are good enough.

    The result depends on these values alone: a file gives the same yield wherever it is checked.

    Raises
    ------
    InputError, InputTypeError, UnitError
        No spread, a batch of one, a number out of range, or a value that cannot be read.
    """

    residual_limit: float | OfPeak = attrs.field(converter=torque_or_share, metadata={"write": text_of_torque_or_share})
    """Worst residual of a good build [N·m], > 0, or a share of the peak gravity torque of the mechanism as drawn."""
    spreads: tuple[FieldSpread, ...] = attrs.field(converter=_spreads)
    """What scatters, each field once."""
    payload: str | None = None
    """Name of the payload that is on the mechanism; None for none."""
    builds: int = attrs.field(default=4000, converter=_builds)
    """How many builds are computed, from 1 to 200 000."""
    seed: int = attrs.field(default=1, converter=_seed)
    """Whole number from which all draws follow, >= 0."""
    poses: int = attrs.field(default=121, converter=_poses)
    """How many poses over the travel are looked at, from 2 to 2000; of several joints the corners too."""
    adjusters: tuple[Adjustable, ...] | None = attrs.field(default=None, converter=_adjusters)
    """What may be made adjustable; None for the points, radii and cable lengths of the springs, () for nothing."""
    adjusted_builds: int = attrs.field(default=1000, converter=_adjusted_builds)
    """How many of the builds are adjusted, the first so many, from 1 to 20 000."""
    coverage: float = attrs.field(
        default=0.99,
        converter=_coverage,
        metadata={"read": read_width, "write": text_of_share},
    )
    """Share of the adjusted builds whose moves the range of an adjuster holds [1], above 0 and at most 1."""

    def __attrs_post_init__(self) -> None:
        batches = [one.shared for one in self.spreads if one.shared is not None]
        for i, one in enumerate(self.spreads):
            if one.shared is not None and batches.count(one.shared) == 1:
                others = [name for name in dict.fromkeys(batches) if name != one.shared]
                hint = nearest(one.shared, others) if others else ""
                raise InputError(
                    f"Tolerances.spreads[{i + 1}].shared must be a batch that another spread names too, "
                    f"got {one.shared!r} once{hint}"
                )
            if one.in_order and one.samples is not None and len(one.samples) != self.builds:
                raise InputError(
                    f"Tolerances.spreads[{i + 1}].samples must be one for each of {self.builds} builds, "
                    f"got {len(one.samples)}"
                )
        labels = [one.label for one in self.adjusters or ()]
        for i, label in enumerate(labels):
            if label in labels[:i]:
                raise InputError(f"Tolerances.adjusters[{i + 1}] must be one that no other is called, got {label!r}")

    def adjuster(self, called: str) -> Adjustable | None:
        """The adjuster of that name or field; None where there is none."""
        return next((one for one in self.adjusters or () if called in (one.name, one.field)), None)

    def with_springs_kept(self, fields: Mapping[str, str | None]) -> Tolerances | None:
        """The same for a mechanism of which some springs were left out.

        Parameters
        ----------
        fields
            For each field that is named here its name there, or None where it is gone.

        Returns
        -------
        Tolerances
            None where nothing is left that scatters.
        """
        spreads = [attrs.evolve(one, field=new) for one in self.spreads if (new := fields[one.field]) is not None]
        if not spreads:
            return None
        shared = [one.shared for one in spreads]
        spreads = [attrs.evolve(one, shared=None) if shared.count(one.shared) == 1 else one for one in spreads]
        adjusters = self.adjusters
        if adjusters is not None:
            adjusters = tuple(
                attrs.evolve(one, field=new) for one in adjusters if (new := fields[one.field]) is not None
            )
        return attrs.evolve(self, spreads=spreads, adjusters=adjusters)

"""How a number scatters from one build to the next."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterable, Mapping
from typing import Any, Literal

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.mechanism import Mechanism
from springpoise.tolerance.fields import Field, canonical_name, field_of, replaced

__all__ = ["Source", "Spread", "Spreads", "refuse_unbuildable", "spreads_of"]

Array = NDArray[np.float64]

PERCENT = re.compile(r"\s*([-+0-9.eE]+)\s*%\s*")

KINDS = ("normal", "uniform", "samples", "listed")

LOWEST, HIGHEST = 2.0**-54, 1.0 - 2.0**-53
"""A uniform draw is kept inside these, so that no normal one is infinite."""


def _shared(value: Any) -> str | None:
    if value is not None and (not isinstance(value, str) or not value):
        raise InputTypeError(f"Spread.shared must be the name of a batch or None, got {value!r}")
    return value


def _known_kind(_: Any, __: Any, value: Any) -> None:
    if value not in KINDS:
        raise InputError(f"Spread.kind must be one of {', '.join(KINDS)}, got {value!r}; write Spread.normal('5 %')")


@attrs.frozen
class Spread:
    """How a number scatters: made by ``Spread.normal``, ``Spread.uniform`` or ``Spread.samples``.

    Fields whose spreads name the same batch in ``shared`` scatter together: all of them lie
    equally far up or down their own distribution in each build, as the springs of one batch do.

    Examples
    --------
    >>> Spread.normal("5 %")
    Spread(kind='normal', width='5 %', shared=None)
    >>> Spread.uniform("0.5 mm", shared="jig").shared
    'jig'
    """

    kind: Literal["normal", "uniform", "samples", "listed"] = attrs.field(validator=_known_kind)
    """``"normal"``, ``"uniform"``, ``"samples"`` (drawn with replacement) or ``"listed"`` (one a build, in order)."""
    width: Any
    """Standard deviation, half-width, or the samples: SI, a text with a unit, or ``"5 %"`` of the value."""
    shared: str | None = attrs.field(default=None, converter=_shared, kw_only=True)
    """Name of the batch that scatters as one; None for a number that scatters by itself."""

    @classmethod
    def normal(cls, sigma: Any, *, shared: str | None = None) -> Spread:
        """Normal about the mechanism's own value.

        Parameters
        ----------
        sigma
            Standard deviation [the field's unit], > 0, or a percentage of the value such as ``"5 %"``.
        shared
            Name of the batch that scatters as one.
        """
        return cls("normal", sigma, shared=shared)

    @classmethod
    def uniform(cls, half_width: Any, *, shared: str | None = None) -> Spread:
        """Anything between the value less and the value plus a half-width, with equal chance.

        Parameters
        ----------
        half_width
            Half of the width [the field's unit], > 0, or a percentage of the value such as ``"5 %"``.
        shared
            Name of the batch that scatters as one.
        """
        return cls("uniform", half_width, shared=shared)

    @classmethod
    def samples(cls, values: Any, *, in_order: bool = False, shared: str | None = None) -> Spread:
        """Values of your own, such as measured ones.

        Parameters
        ----------
        values
            The values themselves, not deviations [the field's unit], shape (n,). Of one batch, the
            i-th values of all its fields belong together.
        in_order
            False: each build draws one of them. True: the i-th build has the i-th, and there must
            be as many as builds.
        shared
            Name of the batch that scatters as one.
        """
        return cls("listed" if in_order else "samples", values, shared=shared)


@attrs.frozen
class _Scattered:
    """A spread with its field: numbers in the field's unit."""

    name: str
    kind: str
    value: float
    width: Any

    def at(self, u: Array, first: int) -> Array:
        """Values for uniform draws ``u`` of the builds from ``first`` on."""
        if self.kind == "normal":
            from scipy.special import ndtri

            return np.asarray(self.value + self.width * ndtri(u))
        if self.kind == "uniform":
            return np.asarray(self.value + self.width * (2.0 * u - 1.0))
        samples: Array = self.width
        if self.kind == "listed":
            return samples[first : first + u.size]
        return np.asarray(samples[np.minimum((u * samples.size).astype(np.intp), samples.size - 1)])

    def box(self, sigmas: float) -> tuple[float, float]:
        """Lowest and highest value; of a normal one, so many standard deviations out."""
        if self.kind in ("samples", "listed"):
            return float(np.min(self.width)), float(np.max(self.width))
        reach = self.width * (sigmas if self.kind == "normal" else 1.0)
        return self.value - reach, self.value + reach


@attrs.frozen
class Source:
    """What varies by itself: one field, or all fields of a batch."""

    key: str
    """The field's name, or the batch's."""
    members: tuple[_Scattered, ...]
    """The fields that follow."""

    def uniform(self, seed: int, chunk: int, count: int) -> Array:
        """Draws of one chunk, whatever other sources there are and wherever the chunk is computed."""
        digest = hashlib.sha256(self.key.encode()).digest()
        words = [int.from_bytes(digest[i : i + 4], "little") for i in (0, 4, 8)]
        sequence = np.random.SeedSequence(seed, spawn_key=(*words, chunk))
        drawn = np.random.Generator(np.random.Philox(sequence)).random(count)
        return np.asarray(np.clip(drawn + LOWEST, LOWEST, HIGHEST))


@attrs.frozen
class Spreads:
    """All spreads of a study, checked against the mechanism."""

    sources: tuple[Source, ...]
    """What varies by itself."""

    @property
    def names(self) -> tuple[str, ...]:
        """The fields that scatter, source by source."""
        return tuple(member.name for source in self.sources for member in source.members)

    def values(self, seed: int, chunk: int, first: int, count: int) -> list[Array]:
        """Values of all fields, in the order of ``names``, for ``count`` builds from ``first`` on."""
        found = []
        for source in self.sources:
            u = source.uniform(seed, chunk, count)
            found += [member.at(u, first) for member in source.members]
        return found

    def check_builds(self, builds: int) -> None:
        """Refuses listed samples that are not as many as the builds."""
        for source in self.sources:
            for member in source.members:
                if member.kind == "listed" and member.width.size != builds:
                    raise InputError(
                        f"spreads[{member.name!r}] must hold one value for each of {builds} builds, got {member.width.size}"
                    )


def spreads_of(mechanism: Mechanism, spreads: Any) -> Spreads:
    """The spreads of a call, with numbers in SI units and grouped by batch.

    Raises
    ------
    InputError, InputTypeError, UnitError
        No spread, a field that is not one number or is named twice, or a width that is not positive.
    """
    if not isinstance(spreads, Mapping):
        raise InputTypeError(f"spreads must be names of fields with a Spread each, got {spreads!r}")
    if not spreads:
        raise InputError("spreads must be at least one field with its Spread, got none")
    sources: dict[tuple[bool, str], list[_Scattered]] = {}
    seen: set[str] = set()
    for name, spread in spreads.items():
        if not isinstance(spread, Spread):
            raise InputTypeError(f"spreads[{name!r}] must be a Spread such as Spread.normal('5 %'), got {spread!r}")
        full = canonical_name(mechanism, name)
        if full in seen:
            raise InputError(f"spreads must name each field once, got {full!r} twice")
        seen.add(full)
        one = _resolved(field_of(mechanism, full), spread, f"spreads[{name!r}]")
        key = (False, full) if spread.shared is None else (True, f"batch {spread.shared}")
        sources.setdefault(key, []).append(one)
    return Spreads(tuple(Source(key, tuple(members)) for (_, key), members in sources.items()))


def _resolved(field: Field, spread: Spread, name: str) -> _Scattered:
    if not isinstance(field.value, float):
        raise InputError(f"{name} must be of a single number, got a field of shape {np.shape(field.value)}")
    if spread.kind in ("samples", "listed"):
        samples = units.scalar_si(spread.width, field.unit, name)
        if not isinstance(samples, np.ndarray) or samples.ndim != 1:
            raise InputError(f"{name} must be samples of shape (n,), got shape {np.shape(samples)}")
        return _Scattered(field.name, spread.kind, field.value, samples)
    percent = PERCENT.fullmatch(spread.width) if isinstance(spread.width, str) else None
    if percent is None:
        width = units.scalar_si(spread.width, field.unit, name)
    elif field.value == 0.0:
        raise InputError(f"{name} must be a width in {field.unit} where the value is 0, got {spread.width!r}")
    else:
        width = abs(field.value) * units.number(percent[1], name) / 100.0
    if not isinstance(width, float) or not width > 0.0:
        raise InputError(f"{name} must have a width > 0 {field.unit}, got {spread.width!r}")
    return _Scattered(field.name, spread.kind, field.value, width)


def refuse_unbuildable(
    mechanism: Mechanism, lows: Iterable[float], highs: Iterable[float], names: Iterable[str]
) -> None:
    """Refuses spreads that lead to a value which the field's own class refuses.

    Raises
    ------
    InputError
        Names the field, the value and what is wrong with it.
    """
    for name, low, high in zip(names, lows, highs, strict=True):
        for value in (low, high):
            try:
                replaced(mechanism, {name: float(value)})
            except InputError as error:
                raise InputError(
                    f"spreads[{name!r}] must keep to values that can be built, got {value:.6g}: {error}; "
                    "a smaller width, or a uniform spread, does not reach so far"
                ) from error

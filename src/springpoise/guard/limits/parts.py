"""Limits on the parts that springs are made of: yield, fatigue, buckling, and how warm they may become."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Any, ClassVar, NamedTuple

import attrs
import numpy as np

from springpoise import units
from springpoise.errors import InputError
from springpoise.guard.amounts import celsius
from springpoise.guard.format.place import nearest
from springpoise.guard.inside import Inside, single_springs
from springpoise.guard.joints import Pose
from springpoise.guard.limits.mechanism import Limit
from springpoise.guard.limits.verdict import Case, LimitVerdict, broken, judged
from springpoise.guard.part_springs import PartSpring, plain
from springpoise.guard.service import service_of
from springpoise.springs import (
    ZIMMERLI_PEENED,
    ZIMMERLI_UNPEENED,
    CompressionCoil,
    Fatigue,
    GasSpring,
    Spiral,
    Strip,
    TorsionCoil,
)
from springpoise.springs.gas.state import TESTED

__all__ = ["BucklingMargin", "FatigueMargin", "ServiceTemperature", "YieldMargin"]


class _Found(NamedTuple):
    """One factor of one spring."""

    factor: float
    name: str
    about: str
    at: Pose | None


def _singles(case: Case, only: str | None) -> Iterator[tuple[str, Inside]]:
    """The single springs of a case over its poses, each with the name of its mount."""
    mechanism = case.mechanism
    for i, mount in enumerate(mechanism.springs):
        name = mechanism.mount_name(i)
        if only in (None, name):
            length = np.broadcast_to(mount.spring_length(mechanism.linkage, case.poses), case.shape)
            for inside in single_springs(mount.spring, length):
                yield name, inside


def _own_loads(inside: Inside, name: str) -> Any:
    """Loads in the part's own direction, over the poses."""
    part = inside.spring.part
    if isinstance(part, CompressionCoil):
        return -inside.load
    if isinstance(part, TorsionCoil):
        wound = inside.spring.use.winds * inside.load
        if np.any(wound < -1e-9 * np.max(np.abs(wound))):
            raise InputError(
                f"spring {name!r} must be loaded in its winding direction only, got {np.min(wound):.4g} N*m; "
                "change winds or free_angle"
            )
        return np.maximum(wound, 0.0)
    return np.abs(inside.load)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class _PartLimit(Limit):
    """What the limits on a factor share."""

    at_least: float = attrs.field(converter=units.number, validator=units.positive)
    """Least factor by which the load may grow [1], > 0."""
    spring: str | None = None
    """Name of the spring that is judged; None for all whose parts are given."""

    _wanted: ClassVar[str] = "extension, compression or torsion coil, strip or spiral"

    def _factors(self, part: Any, inside: Inside, loads: Any, name: str) -> list[tuple[str, float]]:
        """Names and factors of what is judged on one part."""
        raise NotImplementedError

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        names = [case.mechanism.mount_name(i) for i in range(len(case.mechanism.springs))]
        if self.spring is not None and self.spring not in names:
            return broken(
                case,
                self.what,
                self.at_least,
                "1",
                f"there is no spring {self.spring!r}{nearest(self.spring, names)}",
            )
        found = []
        for name, inside in _singles(case, self.spring):
            if isinstance(inside.spring, PartSpring):
                loads = _own_loads(inside, name)
                at = case.pose(int(np.argmax(np.where(np.isnan(loads), np.inf, loads))))
                factors = self._factors(inside.spring.part, inside, loads, name)
                found += [_Found(factor, what, name, at) for what, factor in factors]
        if not found:
            return broken(case, self.what, self.at_least, "1", f"there is no {self._wanted} to judge")
        worst = min(found, key=lambda one: -math.inf if math.isnan(one.factor) else one.factor)
        return judged(
            case,
            self.what,
            worst.factor,
            self.at_least,
            "1",
            worst.at,
            at_least=True,
            about=worst.about,
            also=f" ({worst.name})",
            hint="is the spring beyond its range there?",
        )


def _least(value: Any) -> float:
    return float(np.min(value))


def _coil_factors(margins: Any, kept: Callable[[str], bool]) -> list[tuple[str, float]]:
    return [(margin.name, _least(margin.factor)) for margin in margins.margins if kept(margin.name)]


def _cycle(part: Any, loads: Any, **options: Any) -> Any:
    """The margins of a coil between the least and the greatest of its loads."""
    ends = {"moments" if isinstance(part, TorsionCoil) else "loads": (_least(loads), float(np.max(loads)))}
    return part.margins(**ends, **options)


def _allowable(inside: Inside, name: str) -> float:
    stress = inside.spring.use.allowable_stress
    if stress is None:
        kind = type(inside.spring.part).__name__
        raise InputError(f"allowable_stress of spring {name!r} must be given in Pa to judge a {kind}, got none")
    return float(stress)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class YieldMargin(_PartLimit):
    """The load of each coil, strip and spiral may grow by at least this factor before its wire yields.

    Hooks of extension coils are judged too. What the allowable stress rests on is the wire's own
    ``Allowable``, or ``allowable_stress`` of a strip or spiral.
    """

    what: ClassVar[str] = "yield margin"

    def _factors(self, part: Any, inside: Inside, loads: Any, name: str) -> list[tuple[str, float]]:
        if isinstance(part, Strip):
            return [("strip, static", _allowable(inside, name) / float(part.stress))]
        if isinstance(part, Spiral):
            stress, allowed = float(part.stress(np.max(loads))), _allowable(inside, name)
            return [("spiral, static", math.inf if stress == 0.0 else allowed / stress)]
        return _coil_factors(_cycle(part, loads), lambda margin: "static" in margin)


def _criterion(value: Any) -> Any:
    return None if value is None else Fatigue(value).criterion


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class FatigueMargin(_PartLimit):
    """The load of each coil may grow by at least this factor before it tires over the poses judged.

    With ``criterion`` the coil lasts without end between its least and its greatest load, with
    ``cycles`` so many cycles from no load by the wire's table; torsion coils need ``cycles``. Of a
    strip the factor is its life by the maker's table over ``cycles``. Spirals are not judged.
    """

    what: ClassVar[str] = "fatigue margin"
    _wanted: ClassVar[str] = "extension, compression or torsion coil or strip"

    criterion: str | None = attrs.field(default=None, converter=_criterion)
    """Criterion of endless life: ``"sines"``, ``"gerber"`` or ``"goodman"``; None for none."""
    cycles: float | None = attrs.field(default=None, converter=units.number)
    """Number of cycles [1], > 0; None for none."""
    peened: bool = False
    """Whether the coils are shot-peened; hooks never count as peened."""

    def __attrs_post_init__(self) -> None:
        if self.criterion is None and self.cycles is None:
            raise InputError("FatigueMargin must have criterion or cycles, got neither")
        if self.cycles is not None and not self.cycles > 0:
            raise InputError(f"FatigueMargin.cycles must be > 0, got {self.cycles:g}")

    def _factors(self, part: Any, inside: Inside, loads: Any, name: str) -> list[tuple[str, float]]:
        if isinstance(part, Spiral):
            return []
        if isinstance(part, TorsionCoil | Strip) and self.cycles is None:
            raise InputError(
                f"FatigueMargin.cycles must be given to judge the {type(part).__name__} of spring {name!r}, got none"
            )
        if isinstance(part, Strip):
            if part.life is None:
                raise InputError(f"life of spring {name!r} must be given as the maker's table, got none")
            assert self.cycles is not None
            life = part.life.cycles(float(part.thickness / part.natural_radius))
            return [(f"life over {self.cycles:g} cycles", life / self.cycles)]
        options: dict[str, Any] = {"cycles": self.cycles}
        if isinstance(part, TorsionCoil):
            options["peened"] = self.peened
        elif self.criterion is not None:
            options["fatigue"] = Fatigue(self.criterion, ZIMMERLI_PEENED if self.peened else ZIMMERLI_UNPEENED)
        elif self.peened:
            raise InputError("FatigueMargin.criterion must be given with peened, got none")
        return _coil_factors(
            _cycle(part, loads, **options), lambda margin: "fatigue" in margin or margin.endswith(" cycles")
        )


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class BucklingMargin(_PartLimit):
    """Each compression coil may be shortened by at least this factor more before it bows out.

    The coil has to say how its ends are held, as ``support``; one that is guided does not buckle.
    Where no shortening bows it out, the factor is that by which it could be longer.
    """

    what: ClassVar[str] = "buckling margin"
    _wanted: ClassVar[str] = "compression coil"

    def _factors(self, part: Any, inside: Inside, loads: Any, name: str) -> list[tuple[str, float]]:
        if not isinstance(part, CompressionCoil):
            return []
        if part.support is None:
            raise InputError(f"support of spring {name!r} must be given to judge buckling, got none")
        found = _coil_factors(_cycle(part, loads), lambda margin: margin.startswith("buckling"))
        return found or [("guided", math.inf)]


def _kelvins(value: Any) -> float:
    """A difference of temperatures; ``"10 degC"`` would be a temperature."""
    name = "ServiceTemperature.at_least"
    if isinstance(value, str) and not value.strip().endswith("K"):
        raise InputError(f"{name} must be a text such as '10 K', got {value!r}")
    return float(units.scalar_si(value, "K", name))


def _text_of_kelvins(value: float) -> str:
    return f"{value!r} K"


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class ServiceTemperature(Limit):
    """Every spring bears the temperatures of ``at_temperature``, with so much to spare.

    A coil bears what its wire does; a gas spring -40 to 80 °C, the range in which gas springs are
    tested (QC/T 207-1996, as excerpted). For all others, and to replace these, state ``highest``
    and ``lowest`` in the spring's ``service``.
    """

    what: ClassVar[str] = "service temperature"

    at_least: float = attrs.field(default=0.0, converter=_kelvins, metadata={"write": _text_of_kelvins})
    """Least distance to the nearer end of what each spring bears [K]."""
    spring: str | None = None
    """Name of the spring that is judged; None for all."""

    def __attrs_post_init__(self) -> None:
        if self.at_temperature is None:
            raise InputError("ServiceTemperature.at_temperature must be given, got none")

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        assert case.temperature is not None
        found = []
        for name, inside in _singles(case, self.spring):
            low, high = self._borne(case, name, inside.spring)
            margin = min(case.temperature - low, high - case.temperature)
            nearer = high if high - case.temperature <= case.temperature - low else low
            found.append((margin, name, nearer))
        if not found:
            return broken(case, self.what, self.at_least, "K", "there is no spring to judge")
        margin, name, nearer = min(found)
        subject = f"{self.what}: the distance to the {celsius(nearer)} that {name} bears"
        return judged(case, self.what, margin, self.at_least, "K", None, at_least=True, about=name, subject=subject)

    @staticmethod
    def _borne(case: Case, name: str, spring: Any) -> tuple[float, float]:
        low, high = -math.inf, None
        if isinstance(spring, GasSpring):
            low, high = TESTED
        elif isinstance(spring, PartSpring) and hasattr(spring.part, "material"):
            high = spring.part.material.top_temperature
        service = service_of(case.service, name)
        low = low if service.lowest is None else service.lowest
        high = high if service.highest is None else service.highest
        if high is None:
            raise InputError(
                f"service.highest of spring {name!r} must be given in K: what its {type(plain(spring)).__name__} bears is "
                "not known"
            )
        return low, float(high)

"""Which names files use for which springs, rubber laws, gases and wires. A new one is a line here."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.guard.format.models import Family, Form, Registry
from springpoise.guard.format.place import Place
from springpoise.guard.part_springs import (
    CompressionUse,
    ExtensionUse,
    SpiralUse,
    StripUse,
    TorsionUse,
    part_and_use,
    plain,
    spring_of,
)
from springpoise.springs import (
    NITROGEN,
    NITROGEN_VAN_DER_WAALS,
    CompressionCoil,
    CompressionSpring,
    ConstantForceSpring,
    ExtensionCoil,
    ExtensionSpring,
    GasSpring,
    IdealGas,
    MeasuredSpring,
    OffsetSpring,
    ParallelSprings,
    PengRobinson,
    RubberTube,
    ScaledSpring,
    SeriesSprings,
    Spiral,
    Strip,
    StripSpring,
    TorqueCurve,
    TorsionCoil,
    TorsionSpring,
    VanDerWaals,
    ZeroLengthSpring,
    materials,
    rubber,
)
from springpoise.springs.gas.spring import STANDARD_ATMOSPHERE
from springpoise.springs.gas.state import GasLaw
from springpoise.springs.protocol import Spring
from springpoise.springs.rubber import RubberLaw
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.springs.wire.material import WireMaterial

__all__ = ["ANGULAR", "SPRINGS", "SPRING_FAMILIES"]

LARGEST_BENCH = 5_000_000
"""A file of readings has at most so many bytes."""


def _force_pair(value: Any) -> Any:
    return units.pair(value, "N", "GasSpring forces")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class _FourForces:
    """The arguments of ``GasSpring.from_forces``."""

    extending: tuple[float, float] = attrs.field(converter=_force_pair, metadata={"unit": "N"})
    compressing: tuple[float, float] = attrs.field(converter=_force_pair, metadata={"unit": "N"})
    stroke: float = attrs.field(converter=units.metre)
    rod_diameter: float = attrs.field(converter=units.metre)
    extended_length: float = attrs.field(converter=units.metre)
    offset: float | None = attrs.field(default=None, converter=units.optional_metre)
    friction_over: str = "travel"
    exponent: float = attrs.field(default=1.0, converter=units.number)
    gas: GasLaw = NITROGEN
    reference_temperature: float = attrs.field(default=ROOM_TEMPERATURE, converter=units.kelvin)
    atmospheric_pressure: float = attrs.field(default=STANDARD_ATMOSPHERE, converter=units.pascal)


def _from_forces(place: Place, given: _FourForces) -> GasSpring:
    return GasSpring.from_forces(**{field.name: getattr(given, field.name) for field in attrs.fields(_FourForces)})


@attrs.frozen(kw_only=True)
class _Bench:
    """Readings of a spring with a length, in the table or in a file of their own."""

    file: str | None = None
    lengths: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "m"})
    loads: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "N"})
    unloading: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "N"})


@attrs.frozen(kw_only=True)
class _AngularBench:
    """Readings of a torsion spring."""

    file: str | None = None
    angles: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "rad"})
    torques: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "N*m"})
    unloading: tuple[float, ...] | None = attrs.field(default=None, metadata={"unit": "N*m"})


def _measured(names: tuple[str, str], unit: str, load_unit: str) -> Callable[..., MeasuredSpring]:
    def make(place: Place, given: Any) -> MeasuredSpring:
        first, second = (getattr(given, name) for name in names)
        if given.file is not None:
            if not (first is second is given.unloading is None):
                raise InputError(f"must have either file, or {names[0]} and {names[1]}, got both")
            from springpoise.guard.files import read_bytes

            file = place.folder / given.file
            read_bytes(file, LARGEST_BENCH)
            return MeasuredSpring.read(file)
        if first is None or second is None:
            raise InputError(
                f"must have file, or {names[0]} and {names[1]}, got {'one of them' if first or second else 'none'}"
            )
        unloading = None if given.unloading is None else _numbers(given.unloading, load_unit, "unloading")
        return MeasuredSpring(
            _numbers(first, unit, names[0]), _numbers(second, load_unit, names[1]), unloading=unloading
        )

    return make


def _numbers(texts: Any, unit: str, name: str) -> Any:
    return units.scalar_si(list(texts), unit, name)


def _readings(bench: type, names: tuple[str, str]) -> Callable[[Any], tuple[Any] | None]:
    def of(spring: Any) -> tuple[Any] | None:
        if type(spring) is not MeasuredSpring:
            return None
        unloading = None if spring.unloading is None else tuple(spring.unloading.tolist())
        first, second = tuple(spring.lengths.tolist()), tuple(spring.loads.tolist())
        return (bench(**{names[0]: first, names[1]: second}, unloading=unloading),)

    return of


def _part(cls: type, use: type) -> Form:
    return Form((cls, use), lambda place, part, how: spring_of(part, use=how), part_and_use(cls))


_MEASURED = Form((_Bench,), _measured(("lengths", "loads"), "m", "N"), _readings(_Bench, ("lengths", "loads")))
_MEASURED_TORSION = Form(
    (_AngularBench,),
    _measured(("angles", "torques"), "rad", "N*m"),
    _readings(_AngularBench, ("angles", "torques")),
)
_KINDS: dict[str, type | Form] = {
    "extension": ExtensionSpring,
    "zero length": ZeroLengthSpring,
    "compression": CompressionSpring,
    "torsion": TorsionSpring,
    "constant force": ConstantForceSpring,
    "gas spring": GasSpring,
    "gas spring from forces": Form((_FourForces,), _from_forces, lambda spring: None),
    "rubber tube": RubberTube,
    "strip spring": StripSpring,
    "torque curve": TorqueCurve,
    "extension coil": _part(ExtensionCoil, ExtensionUse),
    "compression coil": _part(CompressionCoil, CompressionUse),
    "torsion coil": _part(TorsionCoil, TorsionUse),
    "strip": _part(Strip, StripUse),
    "spiral": _part(Spiral, SpiralUse),
    "in parallel": ParallelSprings,
    "in series": SeriesSprings,
    "offset": OffsetSpring,
    "scaled": ScaledSpring,
    "measured": _MEASURED,
    "measured torsion": _MEASURED_TORSION,
}
_ANGULAR_FIRST = {"measured torsion": _MEASURED_TORSION, **_KINDS}

SPRINGS = Family("kind", "spring", _KINDS, plain=plain)
"""All springs."""

ANGULAR = Family("kind", "spring", _ANGULAR_FIRST, plain=plain)
"""The same where the coordinate is an angle: readings are written as angles and torques."""

_LAWS = Family(
    "kind",
    "rubber law",
    {
        "neo-Hookean": rubber.NeoHookean,
        "Mooney-Rivlin": rubber.MooneyRivlin,
        "Yeoh": rubber.Yeoh,
        "Gent": rubber.Gent,
        "Ogden": rubber.Ogden,
        "Arruda-Boyce": rubber.ArrudaBoyce,
        "softened": rubber.Softened,
        "crept": rubber.Crept,
        "stiffened": rubber.Stiffened,
    },
)
_GASES = Family(
    "kind",
    "gas",
    {"ideal": IdealGas, "van der Waals": VanDerWaals, "Peng-Robinson": PengRobinson},
    {"nitrogen": NITROGEN, "ideal": IdealGas(), "nitrogen by van der Waals": NITROGEN_VAN_DER_WAALS},
)
_WIRES = Family(
    "kind",
    "wire",
    {},
    {
        "music wire": materials.MUSIC_WIRE,
        "hard-drawn": materials.HARD_DRAWN,
        "oil-tempered": materials.OIL_TEMPERED,
        "chrome-vanadium": materials.CHROME_VANADIUM,
        "chrome-silicon": materials.CHROME_SILICON,
        "stainless 302": materials.STAINLESS_302,
        "phosphor bronze": materials.PHOSPHOR_BRONZE,
        "EN 10270-1 SM": materials.EN_SM,
        "EN 10270-1 SH": materials.EN_SH,
    },
)

SPRING_FAMILIES: Registry = {Spring: SPRINGS, RubberLaw: _LAWS, GasLaw: _GASES, WireMaterial: _WIRES}
"""The family for each type of a spring's field that says only what it is for."""

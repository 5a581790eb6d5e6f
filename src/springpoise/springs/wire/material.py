"""Spring wire: what a coil's strength, rate, mass and margins need to know of it."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import attrs

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.service import ROOM_TEMPERATURE
from springpoise.springs.wire.strength import DiameterSteps, StrengthSet, as_steps, as_strength
from springpoise.springs.wire.stress_factors import TORSION_FACTORS
from springpoise.units import ScalarLike

__all__ = ["Allowable", "CyclicLimits", "Relaxation", "WireMaterial"]

GAS_CONSTANT = 8.31446261815324
"""Molar gas constant [J/(mol·K)], exact since 2019."""

BENDING_FACTORS = ("inner fibre", "hook bending", "hook torsion")


def _factors(value: Any) -> tuple[str, ...]:
    names = (value,) if isinstance(value, str) else tuple(value)
    known = (*TORSION_FACTORS, *BENDING_FACTORS)
    if not names or any(name not in known for name in names):
        raise InputError(f"Allowable.factors must be among {', '.join(map(repr, known))}, got {value!r}")
    return names


@attrs.frozen(field_transformer=units.named_fields)
class Allowable:
    """A permitted stress as a share of the tensile strength, with the stress factor it belongs to.

    The two are a pair: a share that was found with one factor says nothing about a stress that
    was computed with another.

    Raises
    ------
    InputError
        A fraction outside 0 to 1, or a factor that is not known.

    Examples
    --------
    >>> Allowable(0.56, "uncorrected").factor
    'uncorrected'
    """

    fraction: Carrier = attrs.field(converter=units.number, validator=units.fraction)
    """Permitted stress over tensile strength [1], above 0 and at most 1."""
    factors: tuple[str, ...] = attrs.field(converter=_factors)
    """Stress factors with which it may be used; the first is the one used unless told otherwise."""
    source: str = attrs.field(default="given by the user", kw_only=True)
    """Where the number comes from and how it was seen."""

    @property
    def factor(self) -> str:
        """The stress factor that is used unless told otherwise."""
        return self.factors[0]

    def chosen(self, factor: str | None) -> str:
        """The factor to use: the one asked for, if it is in the pair.

        Raises
        ------
        InputError
            A factor that this allowable does not belong to.
        """
        if factor is None:
            return self.factor
        if factor not in self.factors:
            raise InputError(
                f"stress_factor must be {' or '.join(map(repr, self.factors))}, which the allowable "
                f"{self.fraction:g} of tensile strength belongs to, got {factor!r}; "
                "another factor needs an Allowable of its own"
            )
        return factor


def _share(value: Any) -> Any:
    share = None if value is None else units.number(value, "CyclicLimits")
    if isinstance(share, float) and not 0.0 < share <= 1.0:
        raise InputError(f"CyclicLimits must be shares above 0 and at most 1, got {share}")
    return share


@attrs.frozen(field_transformer=units.named_fields)
class CyclicLimits:
    """Greatest stress, as a share of tensile strength, for a number of cycles between no load and it.

    Stresses in the body are taken with Wahl's or Bergsträsser's factor. None: not known.

    Raises
    ------
    InputError
        A share outside 0 to 1.
    """

    cycles: float = attrs.field(converter=units.number, validator=units.positive)
    """Number of cycles [1], > 0."""
    compression: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """Body of a compression coil in torsion [1]."""
    compression_peened: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """The same, shot-peened [1]."""
    extension_body: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """Body of an extension coil in torsion [1]."""
    hook_torsion: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """Hook of an extension coil in torsion [1]."""
    hook_bending: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """Hook of an extension coil in bending [1]."""
    torsion_body: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """Body of a torsion coil in bending [1]."""
    torsion_body_peened: Any = attrs.field(default=None, converter=_share, kw_only=True)
    """The same, shot-peened [1]."""


def _joule_per_mole(value: ScalarLike) -> Any:
    return units.scalar_si(value, "J/mol", "Relaxation.activation_energy")


@attrs.frozen(field_transformer=units.named_fields)
class Relaxation:
    """Loss of load at a constant length: ``c (τ/Rm)^p exp[-(Q/R)(1/T - 1/T0)] lg(1 + t/t0)``.

    τ is the uncorrected shear stress of the body (for torsion coils the uncorrected bending
    stress), Rm the tensile strength. The form is empirical and a value from memory; every
    parameter must come from measurements on the wire at hand.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.
    """

    coefficient: Carrier = attrs.field(converter=units.number, validator=units.not_negative, kw_only=True)
    """Loss for τ = Rm at T0 for each decade of time [1]: c."""
    exponent: Carrier = attrs.field(converter=units.number, validator=units.not_negative, kw_only=True)
    """Power of the stress [1]: p."""
    activation_energy: Carrier = attrs.field(converter=_joule_per_mole, validator=units.not_negative, kw_only=True)
    """Activation energy [J/mol]: Q."""
    temperature: Carrier = attrs.field(converter=units.kelvin, kw_only=True)
    """Temperature at which the coefficient holds [K]: T0."""
    time: Carrier = attrs.field(converter=units.second, validator=units.positive, kw_only=True)
    """Time from which the logarithm counts [s]: t0."""

    def loss(self, stress_ratio: Carrier, time: Carrier, temperature: Carrier) -> Carrier:
        """Share of the load that is lost [1] after ``time`` [s] at ``temperature`` [K]."""
        xp = namespace(stress_ratio, time, temperature)
        speed = xp.exp(-self.activation_energy / GAS_CONSTANT * (1.0 / temperature - 1.0 / self.temperature))
        decades = xp.log1p(time / self.time) * 0.4342944819032518
        return self.coefficient * stress_ratio**self.exponent * speed * decades


def _strength_sets(value: Iterable[StrengthSet]) -> tuple[StrengthSet, ...]:
    return tuple(value)


def _cyclic_limits(value: Iterable[CyclicLimits]) -> tuple[CyclicLimits, ...]:
    return tuple(value)


def _optional_kelvin(value: ScalarLike | None) -> Any:
    return None if value is None else units.kelvin(value, "WireMaterial.top_temperature")


def _optional_slope(value: ScalarLike | None) -> Any:
    return None if value is None else units.per_kelvin(value, "WireMaterial.modulus_slope")


def _set_name(value: StrengthSet) -> str:
    return repr(value.name)


@attrs.frozen(field_transformer=units.named_fields)
class WireMaterial:
    """A spring wire; build one for any wire that you know the numbers of.

    What is None is not known, and whatever needs it says so by name.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.

    Examples
    --------
    >>> wire = WireMaterial(
    ...     "my wire", strength="1900 MPa", young_modulus="200 GPa", shear_modulus="79 GPa", density="7.85 g/cm**3",
    ...     compression=Allowable(0.45, ("bergstraesser", "wahl")),
    ... )
    >>> wire.tensile_strength(0.002) / 1e6
    1900.0
    """

    name: str
    """What the wire is called."""
    strength: StrengthSet = attrs.field(converter=as_strength, repr=_set_name, kw_only=True)
    """Tensile strength by diameter: a set, segments, or one value [Pa]."""
    young_modulus: DiameterSteps = attrs.field(converter=as_steps, repr=False, kw_only=True)
    """Young's modulus at 20 °C: one value [Pa], or steps by diameter."""
    shear_modulus: DiameterSteps = attrs.field(converter=as_steps, repr=False, kw_only=True)
    """Shear modulus at 20 °C: one value [Pa], or steps by diameter."""
    density: Carrier = attrs.field(
        converter=units.kilogram_per_cubic_metre, validator=units.positive, repr=False, kw_only=True
    )
    """Density [kg/m³], > 0."""
    compression: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """Static torsion in the body of a compression coil as wound."""
    compression_set_removed: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """The same after the set was removed."""
    extension_body: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """Static torsion in the body of an extension coil."""
    hook_torsion: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """Static torsion in the bend of a hook."""
    hook_bending: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """Static bending in a hook."""
    torsion_body: Allowable | None = attrs.field(default=None, repr=False, kw_only=True)
    """Static bending in the body of a torsion coil."""
    shear_strength: Carrier = attrs.field(
        default=0.67, converter=units.number, validator=units.fraction, repr=False, kw_only=True
    )
    """Torsional over tensile strength [1]; 0.67 for spring steels (Shigley, as transcribed)."""
    cyclic: tuple[CyclicLimits, ...] = attrs.field(default=(), converter=_cyclic_limits, repr=False, kw_only=True)
    """Greatest stresses for a number of cycles, from few to many cycles."""
    spring_steel: bool = attrs.field(default=True, repr=False, kw_only=True)
    """Whether the endurance points of spring steel apply."""
    modulus_slope: Any = attrs.field(default=None, converter=_optional_slope, repr=False, kw_only=True)
    """Relative change of both moduli with temperature [1/K], negative; None for not known."""
    top_temperature: Any = attrs.field(default=None, converter=_optional_kelvin, repr=False, kw_only=True)
    """Highest temperature of use [K]; None for not known."""
    relaxation: Relaxation | None = attrs.field(default=None, repr=False, kw_only=True)
    """Loss of load with time; None for not known."""
    other_strengths: tuple[StrengthSet, ...] = attrs.field(
        default=(), converter=_strength_sets, repr=False, kw_only=True
    )
    """Further strength sets, to be chosen with ``with_strength``."""
    source: str = attrs.field(default="given by the user", repr=False, kw_only=True)
    """Where moduli, density and temperatures come from and how they were seen."""

    def tensile_strength(self, wire: Carrier) -> Carrier:
        """Least tensile strength at a diameter [Pa], by the strength set in use.

        Raises
        ------
        InputError
            A diameter outside the range of the set.
        """
        return self.strength.strength(wire)

    def modulus_factor(self, temperature: Carrier) -> Carrier:
        """What remains of both moduli at a temperature [1]: 1 at 20 °C.

        Raises
        ------
        InputError
            The slope is not known.
        """
        if isinstance(temperature, float) and temperature == ROOM_TEMPERATURE:
            return 1.0
        if self.modulus_slope is None:
            raise InputError(
                f"WireMaterial.modulus_slope of {self.name!r} must be given in 1/K for any temperature but 20 degC, got None"
            )
        return 1.0 + self.modulus_slope * (temperature - ROOM_TEMPERATURE)

    def allowable(self, kind: str) -> Allowable:
        """The allowable of one kind, such as ``"hook_bending"``.

        Raises
        ------
        InputError
            It is not known for this wire.
        """
        found = getattr(self, kind)
        if not isinstance(found, Allowable):
            raise InputError(
                f"WireMaterial.{kind} of {self.name!r} must be given as Allowable(fraction, factor), got {found!r}"
            )
        return found

    def cyclic_limit(self, kind: str, cycles: float) -> tuple[Any, float]:
        """Share of tensile strength for at least ``cycles`` cycles, and the number of cycles it is stated for.

        Raises
        ------
        InputError
            No share is known for so many cycles.
        """
        for row in self.cyclic:
            share = getattr(row, kind)
            if share is not None and row.cycles >= cycles:
                return share, row.cycles
        known = [row.cycles for row in self.cyclic if getattr(row, kind) is not None]
        most = f"no more than {max(known):g} cycles are known" if known else "none is known"
        raise InputError(
            f"WireMaterial.cyclic of {self.name!r} must hold {kind} for {cycles:g} cycles, {most}; "
            "give a CyclicLimits of your own"
        )

    def with_strength(self, name: str) -> WireMaterial:
        """The same wire with another of its strength sets in use.

        Raises
        ------
        InputError
            No set of that name, with the names that there are.
        """
        sets = (self.strength, *self.other_strengths)
        for chosen in sets:
            if chosen.name == name:
                return attrs.evolve(self, strength=chosen, other_strengths=[s for s in sets if s is not chosen])
        raise InputError(
            f"with_strength must be given one of {', '.join(repr(s.name) for s in sets)} for {self.name!r}, got {name!r}"
        )


def as_material(value: Any, owner: str) -> WireMaterial:
    """A wire material, or a clear error."""
    if not isinstance(value, WireMaterial):
        raise InputTypeError(
            f"{owner}.material must be a WireMaterial, such as springs.materials.MUSIC_WIRE, got {value!r}"
        )
    return value

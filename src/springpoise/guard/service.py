"""Springs in service: what a file says of them beside their values, and what they are at another temperature."""

from __future__ import annotations

import inspect
from collections.abc import Iterable
from typing import Any, Literal

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs import OffsetSpring, ParallelSprings, ScaledSpring, SeriesSprings

__all__ = ["Service", "at_temperature", "service_of"]

_NAMES = {"first", "last"}


def _end(value: Any) -> Any:
    if value is not None and value not in _NAMES:
        raise InputError(f"Service.rod must be 'first' or 'last', got {value!r}")
    return value


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Service:
    """What is known of a spring in service; what is not given is not assumed.

    Coils know their wire, and gas springs their gas: they need nothing here to be judged at
    another temperature. Other springs need the number that their own ``at_temperature`` takes.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.

    Examples
    --------
    >>> Service(rate_slope="-0.25e-3 1/K", highest="120 degC").highest
    393.15
    """

    spring: str | None = None
    """Name of the spring; None for all that have no entry of their own."""
    reference: float | None = attrs.field(default=None, converter=units.kelvin)
    """Temperature at which its values hold [K]; None for the spring's own default, where it has one."""
    rate_slope: float | None = attrs.field(default=None, converter=units.per_kelvin)
    """Relative change of the rate with temperature [1/K]; for springs with a rate."""
    pull_slope: float | None = attrs.field(default=None, converter=units.per_kelvin)
    """Relative change of the pull with temperature [1/K]; for springs of constant force."""
    load_slope: float | None = attrs.field(default=None, converter=units.per_kelvin)
    """Relative change of the load with temperature [1/K]; for measured springs and torque curves."""
    energy_share: float | None = attrs.field(default=None, converter=units.number)
    """Share of rubber's stress that does not go with the absolute temperature [1], 0 to 1."""
    lowest: float | None = attrs.field(default=None, converter=units.kelvin)
    """Lowest temperature that it bears [K]; None for what its kind says, if anything."""
    highest: float | None = attrs.field(default=None, converter=units.kelvin)
    """Highest temperature that it bears [K]; None for what its wire or its kind says."""
    rod: Literal["first", "last"] | None = attrs.field(default=None, converter=_end)
    """At which end of its path a gas spring has its rod: ``"first"`` or ``"last"``; None for whichever is better."""


def service_of(services: Iterable[Service], name: str) -> Service:
    """The entry of a spring, or that of all springs, or one that says nothing."""
    listed = list(services)
    for wanted in (name, None):
        for one in listed:
            if one.spring == wanted:
                return one
    return Service(spring=name)


def at_temperature(mechanism: Mechanism, temperature: float, services: Iterable[Service]) -> Mechanism:
    """A mechanism with all its springs at another temperature [K].

    Raises
    ------
    InputError
        A number that a spring needs for that is not given; the message names spring and number.
    """
    listed = list(services)

    def warmed(i: int, mount: SpringMount) -> SpringMount:
        name = mechanism.mount_name(i)
        return attrs.evolve(mount, spring=_warmed(mount.spring, temperature, service_of(listed, name), name))

    return attrs.evolve(mechanism, springs=[warmed(i, mount) for i, mount in enumerate(mechanism.springs)])


def _warmed(spring: Any, temperature: float, service: Service, name: str) -> Any:
    if isinstance(spring, ParallelSprings | SeriesSprings):
        return attrs.evolve(spring, springs=[_warmed(one, temperature, service, name) for one in spring.springs])
    if isinstance(spring, OffsetSpring | ScaledSpring):
        return attrs.evolve(spring, spring=_warmed(spring.spring, temperature, service, name))
    change = getattr(spring, "at_temperature", None)
    if not callable(change):
        raise InputError(
            f"{type(spring).__name__} of {name!r} must have at_temperature to be judged at another temperature"
        )
    given = {}
    for parameter in list(inspect.signature(change).parameters.values())[1:]:
        value = getattr(service, parameter.name, None)
        if value is not None:
            given[parameter.name] = value
        elif parameter.default is inspect.Parameter.empty:
            known = attrs.fields_dict(Service).get(parameter.name)
            unit = "1" if known is None else known.metadata.get("unit", "1")
            suffix = "" if unit == "1" else f" in {unit}"
            raise InputError(
                f"service.{parameter.name} of spring {name!r} must be given{suffix} to judge its {type(spring).__name__} "
                "at another temperature, got none"
            )
    return change(temperature, **given)

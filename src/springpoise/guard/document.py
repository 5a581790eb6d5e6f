"""A mechanism file as an object: the mechanism, and what goes with it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.feedforward import Actuator
from springpoise.guard.builds.fields import check_tolerances
from springpoise.guard.builds.tolerances import Tolerances
from springpoise.guard.format.place import nearest
from springpoise.guard.joints import JointRanges, joint_names
from springpoise.guard.limits.mechanism import JointLimit, Limit
from springpoise.guard.limits.yields import BuildYield
from springpoise.guard.service import Service
from springpoise.guard.solving.methods import check_compare
from springpoise.guard.solving.openings import OpenSpring
from springpoise.guard.solving.requests import DesignRequest
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount

__all__ = ["Payload", "PoiseFile"]


def _name(value: Any) -> str:
    if not isinstance(value, str) or not value.strip():
        raise InputTypeError(f"Payload.name must be a text, got {value!r}")
    return value


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Payload:
    """A named load that may or may not be on the arm.

    Raises
    ------
    InputError, InputTypeError, UnitError
        No name, a negative mass, or a wrong dimension.
    """

    name: str = attrs.field(converter=_name)
    """What limits call it."""
    mass: float = attrs.field(converter=units.kilogram, validator=units.not_negative)
    """Mass [kg], >= 0."""
    at: Point | None = None
    """Where its centre of mass sits; None for the arm's tip."""


def _tuple(value: Any) -> Any:
    return tuple(value) if isinstance(value, list) else value


def _kind(value: Any, cls: type, name: str) -> None:
    if not isinstance(value, cls):
        raise InputTypeError(f"PoiseFile.{name} must be a {cls.__name__}, got {value!r}")


def _all_of(value: Any, cls: type, name: str) -> None:
    if not isinstance(value, tuple) or not all(isinstance(item, cls) for item in value):
        raise InputTypeError(f"PoiseFile.{name} must be a sequence of {cls.__name__}, got {value!r}")


def check_joints(linkage: Any, limits: tuple[Limit, ...], *, designed: bool) -> None:
    """Whether limits and design fit the joints of a linkage.

    Raises
    ------
    InputError
        A joint that is not there, another number of ranges than joints, or what only one joint can have.
    """
    names = joint_names(linkage)
    several = f"{len(names)} ({', '.join(names)})"
    if designed and len(names) != 1:
        raise InputError(f"design is for mechanisms with one joint, as its solvers are, got {several}")
    for i, limit in enumerate(limits):
        where = f"limits[{i + 1}]"
        if limit.what == "balance angles" and len(names) != 1:
            raise InputError(f"{where}.what is {limit.what!r}, which is for mechanisms with one joint, got {several}")
        if isinstance(limit.over, JointRanges):
            limit.over.fit(linkage, f"{where}.over")
        elif limit.over is not None and len(names) != 1:
            raise InputError(f"{where}.over must be a range for each of {len(names)} joints, got {limit.over}")
        if isinstance(limit, JointLimit) and limit.joint is not None:
            known = limit.names(linkage)
            if limit.joint not in known:
                raise InputError(
                    f"{where}.joint must be the name of a joint, got {limit.joint!r}{nearest(limit.joint, known)}"
                )


@attrs.frozen(kw_only=True)
class PoiseFile:
    """What a ``.poise.toml`` file says.

    Two are equal where they say the same, whatever file they came from.

    Raises
    ------
    InputError, InputTypeError
        Two payloads of one name, a limit with a payload, spring or motor that is not there, or
        springs left open in a way that the design cannot fill.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, guard
    >>> document = guard.PoiseFile(title="bare arm", mechanism=Mechanism(Arm(Body("2 kg", (0.35, 0)))))
    >>> print(guard.dump(document))
    schema = 1
    title = "bare arm"
    <BLANKLINE>
    [[arm.bodies]]
    mass = "2 kg"
    com = ["0.35 m", "0 mm"]
    <BLANKLINE>
    """

    mechanism: Mechanism
    """The mechanism as far as it is given: springs that are left open are not in it."""
    title: str = ""
    """One line on what it is."""
    description: str = ""
    """More on what it is."""
    actuator: Actuator | tuple[Actuator, ...] | None = attrs.field(default=None, converter=_tuple)
    """Motor and gear of the joint, or of every joint alike; or one for each joint; None for not given."""
    service: tuple[Service, ...] = attrs.field(default=(), converter=_tuple)
    """What is known of springs in service: how they change with temperature, how warm they may become."""
    payloads: tuple[Payload, ...] = attrs.field(default=(), converter=_tuple)
    """Named payloads, none of which is on the mechanism."""
    limits: tuple[Limit, ...] = attrs.field(default=(), converter=_tuple)
    """What the mechanism has to keep."""
    tolerances: Tolerances | None = None
    """How the parts scatter from build to build; None for not stated."""
    design: DesignRequest | None = None
    """What is to be found, and how; None for a mechanism that is complete."""
    open_springs: tuple[OpenSpring, ...] = attrs.field(default=(), converter=_tuple)
    """Springs of which something is left open."""
    path: Path | None = attrs.field(default=None, eq=False)
    """The file that it was read from; None for one made in code."""
    folder: Path = attrs.field(default=Path(), eq=False)
    """What names of other files in it are relative to."""
    source: str | None = attrs.field(default=None, eq=False, repr=False)
    """The text that it was read from, whose comments and order a saved copy keeps; None for none."""

    def __attrs_post_init__(self) -> None:
        _kind(self.mechanism, Mechanism, "mechanism")
        _kind(self.title, str, "title")
        _kind(self.description, str, "description")
        linkage = self.mechanism.linkage
        joints = joint_names(linkage)
        if isinstance(self.actuator, tuple):
            _all_of(self.actuator, Actuator, "actuator")
            if len(self.actuator) != len(joints):
                raise InputError(
                    f"actuator must be one for each of {len(joints)} joints ({', '.join(joints)}), got {len(self.actuator)}"
                )
        elif self.actuator is not None:
            _kind(self.actuator, Actuator, "actuator")
        if self.design is not None:
            _kind(self.design, DesignRequest, "design")
        if self.tolerances is not None:
            _kind(self.tolerances, Tolerances, "tolerances")
        _all_of(self.service, Service, "service")
        _all_of(self.payloads, Payload, "payloads")
        _all_of(self.limits, Limit, "limits")
        _all_of(self.open_springs, OpenSpring, "open_springs")
        names = [payload.name for payload in self.payloads]
        for i, name in enumerate(names):
            if name in names[:i]:
                raise InputError(f"payloads[{i + 1}].name must be one that no other payload has, got {name!r}")
            try:
                self.with_payload(name)
            except InputError as error:
                raise InputError(f"payloads[{i + 1}].at does not fit the mechanism: {error}") from error
        for where, wanted in [
            *((f"limits[{i + 1}]", limit.payload) for i, limit in enumerate(self.limits)),
            ("design", None if self.design is None else self.design.payload),
            ("tolerances", None if self.tolerances is None else self.tolerances.payload),
        ]:
            if wanted is not None and wanted not in names:
                raise InputError(
                    f"{where}.payload must be the name of a payload, got {wanted!r}{nearest(wanted, names)}"
                )
        actuators = self.actuator if isinstance(self.actuator, tuple) else (self.actuator,)
        motor = any(one is not None and one.motor is not None for one in actuators)
        check_joints(linkage, self.limits, designed=self.design is not None)
        mounts = self.all_mounts
        called = [mount.name or f"spring {i + 1}" for i, mount in enumerate(mounts)]
        for i, service in enumerate(self.service):
            if service.spring in [one.spring for one in self.service[:i]]:
                raise InputError(
                    f"service[{i + 1}].spring must be one that no other has, got {service.spring or 'none twice'!r}"
                )
            if self.design is None and service.spring is not None and service.spring not in called:
                raise InputError(
                    f"service[{i + 1}].spring must be the name of a spring, got {service.spring!r}"
                    f"{nearest(service.spring, called)}"
                )
        for i, limit in enumerate(self.limits):
            if limit.what == "motor current" and not motor:
                raise InputError(f"limits[{i + 1}].what is {limit.what!r}, which needs an actuator with a motor")
            spring = getattr(limit, "spring", None)
            if self.design is None and spring is not None and spring not in called:
                raise InputError(
                    f"limits[{i + 1}].spring must be the name of a spring, got {spring!r}{nearest(spring, called)}"
                )
        OpenSpring.check(self.open_springs, self.design)
        self._check_tolerances()
        check_compare(self.design, mounts, self.open_springs)

    def _check_tolerances(self) -> None:
        """Whether tolerances and the limits that need them fit the mechanism."""
        stated = self.tolerances
        if stated is not None:
            check_tolerances(stated, self.with_payload(stated.payload), self.design, self.all_mounts)
        for i, limit in enumerate(self.limits):
            if not isinstance(limit, BuildYield):
                continue
            if stated is None:
                raise InputError(
                    f"limits[{i + 1}].what is {limit.what!r}, which needs a table [tolerances] that says how the parts "
                    "scatter"
                )
            if limit.adjuster is None:
                continue
            known = [one.label for one in stated.adjusters or ()]
            if stated.adjuster(limit.adjuster) is None:
                raise InputError(
                    f"limits[{i + 1}].adjuster must be the name of one of tolerances.adjusters, got {limit.adjuster!r}"
                    f"{nearest(limit.adjuster, known)}"
                )

    def with_payload(self, name: str | None) -> Mechanism:
        """The mechanism with a named payload on it; as it is for None.

        Raises
        ------
        InputError
            No payload has this name.
        """
        if name is None:
            return self.mechanism
        for payload in self.payloads:
            if payload.name == name:
                return self.mechanism.with_payload(payload.mass, payload.at)
        raise InputError(
            f"payload must be the name of one, got {name!r}{nearest(name, [p.name for p in self.payloads])}"
        )

    @property
    def all_mounts(self) -> tuple[SpringMount, ...]:
        """The mounts in the file's order; those left open hold springs that stand for them only."""
        mounts = list(self.mechanism.springs)
        for opened in sorted(self.open_springs, key=lambda one: one.place):
            mounts.insert(opened.place, opened.mount)
        return tuple(mounts)

    @property
    def called(self) -> str:
        """What to call it in a message: the file's name, or the title."""
        return str(self.path) if self.path is not None else self.title or "the document"

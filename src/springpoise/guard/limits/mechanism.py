"""Limits that a mechanism file states, one class each: what is judged, and against what.

A new limit is a class with ``what`` and ``judge`` and a line in the registry of kinds.
"""

from __future__ import annotations

import math
from typing import Any, ClassVar

import attrs
import numpy as np

from springpoise import units
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.feedforward import Feedforward
from springpoise.guard.amounts import OfPeak, percent, shown, text_of_torque_or_share, torque_or_share, written
from springpoise.guard.format.models import leaves
from springpoise.guard.format.place import Place, nearest
from springpoise.guard.joints import JointRanges, force_unit, joint_names, over_of, text_of_over
from springpoise.guard.limits.verdict import Case, LimitVerdict, broken, greatest, judged, least
from springpoise.mechanism import SpringMount
from springpoise.paths import JointTravel

__all__ = [
    "BalanceAngles",
    "HoldingTorque",
    "Limit",
    "MotorCurrent",
    "PivotLoad",
    "ResidualTorque",
    "StoredEnergy",
    "Stretch",
    "coordinate_unit",
]


UNLOADED = 1e-9
"""A joint with less than this part of the greatest peak gravity torque is one that gravity does not load [1]."""


def coordinate_unit(mount: SpringMount) -> str:
    """Unit of the mount's spring length: ``"m"``, or ``"rad"`` for a spring that follows a joint's angle."""
    return "rad" if isinstance(mount.path, JointTravel) else "m"


def _read_over(value: Any, place: Place) -> Any:
    """What stands under ``over``: two texts, or two for each joint."""
    entries = place.entries(value)
    if entries and all(isinstance(item, list) for _, item in entries):
        return [leaves(tuple[float, float], "rad", item, at) for at, item in entries]
    return leaves(tuple[float, float], "rad", value, place)


def _temperatures(value: Any) -> Any:
    if value is None:
        return None
    name = "Limit.at_temperature"
    given = tuple(units.kelvin(item, name) for item in ([value] if isinstance(value, str | float | int) else value))
    if not given:
        raise InputError(f"{name} must be at least one temperature, got none")
    return given


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Limit:
    """What all limits share.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.
    """

    what: ClassVar[str]
    """How a file names the limit."""

    over: tuple[float, float] | JointRanges | None = attrs.field(
        default=None, converter=over_of, metadata={"read": _read_over, "write": text_of_over}
    )
    """Range of poses that is judged (from, to) [rad]; for several joints a range each [rad, or m]; None for the travel."""
    payload: str | None = None
    """Name of the payload that is on the mechanism; None for none."""
    at_temperature: tuple[float, ...] | None = attrs.field(
        default=None, converter=_temperatures, metadata={"unit": "K"}
    )
    """Temperatures of the springs at which it is judged [K], the worst counts; None for that of their values."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        raise NotImplementedError


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class JointLimit(Limit):
    """What limits of one joint, or of the worst of several, share."""

    joint: str | None = None
    """Name of the joint that is judged, as its link is called; None for the worst of all."""

    def names(self, linkage: Any) -> tuple[str, ...]:
        """What ``joint`` may name."""
        return joint_names(linkage)

    def chosen(self, case: Case) -> list[int]:
        """Which joints are judged."""
        names = self.names(case.mechanism.linkage)
        return [i for i, name in enumerate(names) if self.joint in (None, name)]

    def called(self, case: Case, index: int) -> str:
        """The joint's name where there are several."""
        names = self.names(case.mechanism.linkage)
        return names[index] if len(names) > 1 else ""

    def worst(self, case: Case, values: list[Any], allowed: float, unit: str) -> LimitVerdict:
        """The verdict on the greatest value of the joints that are judged."""
        found = [(*greatest(values[i], case), self.called(case, i)) for i in self.chosen(case)]
        value, at, joint = max(found, key=lambda one: math.inf if math.isnan(one[0]) else one[0])
        return judged(case, self.what, value, allowed, unit, at, joint=joint)

    def turning(self, case: Case) -> None:
        """Refuses joints that slide: a torque says nothing of them.

        Raises
        ------
        InputError
            A joint that is judged slides.
        """
        for i in self.chosen(case):
            name, unit = case.joints[i]
            if unit == "m":
                raise InputError(
                    f"at_most must be a share of the peak gravity torque, or joint the name of a joint that turns, "
                    f"got a torque for {name!r}, which slides"
                )


def _norm(value: Any) -> str:
    if value not in ("worst", "rms"):
        raise InputError(f"ResidualTorque.norm must be 'worst' or 'rms', got {value!r}")
    return str(value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class ResidualTorque(JointLimit):
    """The holding torque that gravity and springs leave, without friction, is at most so much."""

    what: ClassVar[str] = "residual torque"

    at_most: float | OfPeak = attrs.field(converter=torque_or_share, metadata={"write": text_of_torque_or_share})
    """Greatest residual allowed [N·m], > 0, or a share of the peak gravity torque over the same poses."""
    norm: str = attrs.field(default="worst", converter=_norm)
    """What is limited: ``"worst"``, the greatest magnitude, or ``"rms"``, the root mean square over the poses."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        share = isinstance(self.at_most, OfPeak)
        if not share:
            self.turning(case)
        mechanism, q, count = case.mechanism, case.poses, len(case.joints)
        torques = case.columns(np.abs(mechanism.holding_torque(q)), count)
        gravity = [greatest(one, case)[0] for one in case.columns(np.abs(mechanism.gravity_torque(q)), count)]
        joints = self.chosen(case)
        if share and len(joints) > 1:  # a joint that neither gravity nor a spring loads has no share of anything
            least_load = UNLOADED * max(gravity)
            joints = [i for i in joints if not max(gravity[i], np.max(torques[i])) <= least_load] or joints
        found = [(self._of_joint(case, i, torques[i], gravity[i]), gravity[i] if share else 1.0) for i in joints]
        return min(found, key=lambda one: _urgency(*one))[0]

    def _of_joint(self, case: Case, index: int, torque: Any, gravity: float) -> LimitVerdict:
        allowed = self.at_most.share * gravity if isinstance(self.at_most, OfPeak) else self.at_most
        worst, at = greatest(torque, case)
        value = worst if self.norm == "worst" or math.isnan(worst) else float(np.sqrt(np.mean(torque**2)))
        share = ""
        if gravity > 0:
            share = f" ({percent(value / gravity)} of the peak gravity torque)"
            if isinstance(self.at_most, OfPeak):
                share = f"{share[:-1]}, where {self.at_most} is allowed)"
        place = at if self.norm == "worst" or math.isnan(value) else None
        subject = f"{self.what} (root mean square)" if self.norm == "rms" else ""
        unit, joint = force_unit(case.joints[index][1]), self.called(case, index)
        return judged(case, self.what, value, allowed, unit, place, joint=joint, subject=subject, also=share)


def _urgency(verdict: LimitVerdict, scale: float) -> float:
    """What the worst of several joints has least of: margin, in parts of what it is compared with."""
    if math.isnan(verdict.margin):
        return -math.inf
    return verdict.margin / scale if scale > 0 else -math.inf if verdict.margin < 0 else 0.0


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class HoldingTorque(JointLimit):
    """The torque that holds the arm, or slowly moves it either way, friction included, is at most so much."""

    what: ClassVar[str] = "holding torque"

    at_most: float = attrs.field(converter=units.newton_metre, validator=units.positive)
    """Greatest torque of the actuator at the joint [N·m], > 0."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        self.turning(case)
        mechanism, q = case.mechanism, case.poses
        both = np.abs(mechanism.holding_torque(q)) + mechanism.friction_band(q)
        return self.worst(case, case.columns(both, len(case.joints)), self.at_most, "N*m")


def _length_or_angle(value: Any) -> tuple[float, str]:
    """A margin with its unit, m or rad."""
    if isinstance(value, tuple):
        return value
    if not isinstance(value, str):
        raise InputTypeError(f"Stretch.at_least must be a text such as '5 mm', got {value!r}")
    try:
        amount, unit = units.parse(value, "rad", "margin"), "rad"
    except UnitError:
        amount, unit = units.parse(value, "m", "margin"), "m"
    if amount < 0:
        raise InputError(f"Stretch.at_least must be >= 0 {unit}, got {value!r}")
    return amount, unit


def _text_of_length_or_angle(value: tuple[float, str]) -> str:
    return written(*value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Stretch(Limit):
    """Springs keep at least so much margin to the nearer end of their working range."""

    what: ClassVar[str] = "stretch"

    at_least: tuple[float, str] = attrs.field(converter=_length_or_angle, metadata={"write": _text_of_length_or_angle})
    """Least margin, >= 0, with its unit: m judges springs with a length, rad those with an angle."""
    spring: str | None = None
    """Name of the spring that is judged; None for all."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        mechanism = case.mechanism
        names = [mechanism.mount_name(i) for i in range(len(mechanism.springs))]
        allowed, unit = self.at_least
        if self.spring is not None and self.spring not in names:
            return broken(
                case, self.what, allowed, unit, f"there is no spring {self.spring!r}{nearest(self.spring, names)}"
            )
        found = [
            (*least(state.margin, case), state.name)
            for state, mount in zip(mechanism.spring_states(case.poses), mechanism.springs, strict=True)
            if coordinate_unit(mount) == unit and self.spring in (None, state.name)
        ]
        if not found:
            kind = "a length" if unit == "m" else "an angle"
            return broken(case, self.what, allowed, unit, f"there is no spring with {kind} to judge")
        value, at, name = min(found, key=lambda item: -math.inf if math.isnan(item[0]) else item[0])
        return judged(case, self.what, value, allowed, unit, at, at_least=True, about=name, also=" within its range")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class StoredEnergy(Limit):
    """The energy in all springs together is at most so much."""

    what: ClassVar[str] = "stored energy"

    at_most: float = attrs.field(converter=units.joule, validator=units.positive)
    """Greatest energy [J], > 0."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        value, at = greatest(case.mechanism.spring_energy(case.poses), case)
        return judged(case, self.what, value, self.at_most, "J", at)


def _angles(value: Any) -> tuple[float, ...]:
    return tuple(units.radian(item, "BalanceAngles.near") for item in ([value] if isinstance(value, str) else value))


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class BalanceAngles(Limit):
    """Near each stated angle the arm stands still by itself, friction left out."""

    what: ClassVar[str] = "balance angles"

    near: tuple[float, ...] = attrs.field(converter=_angles, metadata={"unit": "rad"})
    """Angles near which the arm has to be in balance [rad]."""
    within: float = attrs.field(converter=units.radian, validator=units.positive)
    """How near [rad], > 0."""
    stable: bool = False
    """Whether it has to come back when it is pushed away; an arm that is balanced everywhere passes."""

    def __attrs_post_init__(self) -> None:
        if not self.near:
            raise InputError("BalanceAngles.near must be at least one angle, got none")

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        over = self.over.ranges if isinstance(self.over, JointRanges) else self.over
        mechanism = case.mechanism if over is None else attrs.evolve(case.mechanism, travel=over)
        if not np.all(np.isfinite(mechanism.holding_torque(case.poses))):
            _, at = greatest(mechanism.holding_torque(case.poses), case)
            return judged(case, self.what, math.nan, self.within, "rad", at)
        found = mechanism.equilibria()
        if found.everywhere:
            subject = f"{self.what}: balanced everywhere, so the nearest"
            return judged(case, self.what, 0.0, self.within, "rad", None, subject=subject, also=" away")
        angles = found.stable_angles if self.stable else found.angles
        distances = [(min((abs(a - angle) for a in angles), default=math.inf), angle) for angle in self.near]
        value, angle = max(distances)
        kind = "stable balance angle" if self.stable else "balance angle"
        if math.isinf(value):
            return broken(case, self.what, self.within, "rad", f"there is no {kind} in the range judged")
        subject = f"{self.what}: the {kind} nearest to {shown(angle, 'rad')}"
        return judged(case, self.what, value, self.within, "rad", angle, subject=subject, also=" away")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class MotorCurrent(JointLimit):
    """The motor's current that holds or slowly moves the arm either way is at most so much."""

    what: ClassVar[str] = "motor current"

    at_most: float = attrs.field(converter=units.ampere, validator=units.positive)
    """Greatest current [A], > 0."""

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        actuators = () if case.actuator is None else Feedforward(case.mechanism, actuator=case.actuator).joint_actuators
        if not any(actuators[i].motor for i in self.chosen(case) if actuators):
            return broken(case, self.what, self.at_most, "A", "there is no motor to judge")
        ff, q, count = Feedforward(case.mechanism), case.poses, len(case.joints)
        both = [case.columns(ff.torque(q, moving=way), count) for way in (1, -1)]
        currents = []
        for i, actuator in enumerate(actuators):
            ways = zip((1, -1), both, strict=True)
            driven = (
                [] if actuator.motor is None else [actuator.current(torques[i], moving=way) for way, torques in ways]
            )
            currents.append(np.max(np.abs(driven), axis=0) if driven else np.zeros(case.shape))
        return self.worst(case, currents, self.at_most, "A")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class PivotLoad(JointLimit):
    """The pivot's bearing carries at most so much at rest."""

    what: ClassVar[str] = "pivot load"

    at_most: float = attrs.field(converter=units.newton, validator=units.positive)
    """Greatest bearing force [N], > 0."""

    def names(self, linkage: Any) -> tuple[str, ...]:
        """The pivots."""
        return tuple(getattr(linkage, "pivots", ("pivot",)))

    def judge(self, case: Case) -> LimitVerdict:
        """The verdict on a case."""
        loads = case.columns(case.mechanism.pivot_load(case.poses), len(self.names(case.mechanism.linkage)))
        return self.worst(case, loads, self.at_most, "N")

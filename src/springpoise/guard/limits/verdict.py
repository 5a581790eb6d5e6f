"""One limit, judged: how far inside or outside, where, and a sentence that says so."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.feedforward import Actuator
from springpoise.guard.amounts import JSON_SUFFIX, celsius, finite_or_none, shown
from springpoise.guard.joints import JointPose, Pose, joint_names, pose_at, shown_pose
from springpoise.guard.service import Service
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of

if TYPE_CHECKING:
    from springpoise.guard.builds.scattered import Builds

__all__ = ["Case", "LimitVerdict", "broken", "greatest", "judged", "least"]

Array = NDArray[np.float64]


@attrs.frozen
class Case:
    """What a limit is judged on."""

    mechanism: Mechanism
    """The mechanism, with the payload of the limit on it."""
    actuator: Actuator | tuple[Actuator, ...] | None
    """The actuator, or one for each joint; None where the file states none."""
    poses: Array
    """Poses [rad, or m for prismatic joints], shape (n,), or (n, joints) for several."""
    payload: str | None
    """Name of the payload; None for none."""
    temperature: float | None = None
    """Temperature of the springs [K]; None for that of their values."""
    service: tuple[Service, ...] = ()
    """What is known of the springs in service."""
    builds: Builds | None = None
    """Builds with the scatter that the file states; None where it states none."""

    @property
    def shape(self) -> tuple[int]:
        """Shape of one value for each pose."""
        return (len(self.poses),)

    def pose(self, index: int) -> Pose:
        """One of the poses, as it is reported."""
        return pose_at(self.mechanism, self.poses, index)

    @property
    def joints(self) -> tuple[tuple[str, str], ...]:
        """Name of each joint, and unit of its travel."""
        linkage = self.mechanism.linkage
        return tuple(zip(joint_names(linkage), joint_units_of(linkage), strict=True))

    def columns(self, values: Any, count: int) -> list[Array]:
        """Values for each of so many joints or pivots, one after the other, each of :attr:`shape`."""
        given = np.asarray(values, dtype=np.float64)
        if count == 1:
            return [np.broadcast_to(given[..., 0] if given.ndim > 1 else given, self.shape)]
        return list(np.broadcast_to(given, (*self.shape, count)).T)


@attrs.frozen(kw_only=True)
class LimitVerdict:
    """A judged limit. The margin says how far, the flag only whether."""

    what: str
    """What is limited, as the file says it."""
    holds: bool
    """Whether the limit is kept."""
    value: float
    """What was found, in ``unit``; NaN where it is not a number in some pose."""
    allowed: float
    """What is allowed, in ``unit``."""
    margin: float
    """How far inside the limit, in ``unit``; negative outside, NaN where the value is."""
    unit: str
    """SI unit of the three, such as ``"N*m"``."""
    at: Pose | None
    """Pose where the value occurs [rad], or of several joints; None where it belongs to no pose."""
    payload: str | None = None
    """Payload that was on the mechanism; None for none."""
    temperature: float | None = None
    """Temperature of the springs [K]; None for that of their values."""
    about: str = ""
    """What the value is of where that is not plain, such as a spring's or a joint's name."""
    joint: str = ""
    """Joint or pivot whose value it is, where there are several."""
    adjuster: str = ""
    """What was adjusted in each build, where that was asked for."""
    sentence: str = ""
    """All of this in words."""

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
        suffix = JSON_SUFFIX[self.unit]
        return {
            "what": self.what,
            "holds": self.holds,
            f"value{suffix}": finite_or_none(self.value),
            f"allowed{suffix}": finite_or_none(self.allowed),
            f"margin{suffix}": finite_or_none(self.margin),
            "at_rad": None if isinstance(self.at, JointPose) else finite_or_none(self.at),
            **({"at": self.at.to_dict()} if isinstance(self.at, JointPose) else {}),
            "payload": self.payload,
            "temperature_K": finite_or_none(self.temperature),
            "about": self.about,
            **({"joint": self.joint} if self.joint else {}),
            **({"adjuster": self.adjuster} if self.adjuster else {}),
            "sentence": self.sentence,
        }

    def __str__(self) -> str:
        return self.sentence


def greatest(values: Any, case: Case) -> tuple[float, Pose]:
    """The greatest value over the poses and its pose; NaN and its pose where there is one."""
    return _extreme(values, case, np.argmax)


def least(values: Any, case: Case) -> tuple[float, Pose]:
    """The least value over the poses and its pose; NaN and its pose where there is one."""
    return _extreme(values, case, np.argmin)


def _extreme(values: Any, case: Case, choose: Any) -> tuple[float, Pose]:
    over = np.broadcast_to(np.asarray(values, dtype=np.float64), case.shape)
    wrong = np.isnan(over)
    i = int(np.argmax(wrong)) if wrong.any() else int(choose(over))
    return float(over[i]), case.pose(i)


def judged(
    case: Case,
    what: str,
    value: float,
    allowed: float,
    unit: str,
    at: Pose | None,
    *,
    at_least: bool = False,
    about: str = "",
    joint: str = "",
    adjuster: str = "",
    subject: str = "",
    also: str = "",
    hint: str = "is an end of a cable inside a disc there, or a value far too large?",
) -> LimitVerdict:
    """The verdict on a value that has to be at most, or at least, what is allowed.

    Parameters
    ----------
    about
        What the value is of, such as a spring's name.
    joint
        The joint or pivot that it is of, where there are several.
    adjuster
        What was adjusted in each build.
    subject
        What the sentence begins with; by default ``what``.
    also
        Words that follow the value in the sentence.
    hint
        What is asked where the value is not a number.
    """
    about = about or joint
    margin = value - allowed if at_least else allowed - value
    holds = bool(margin >= 0)  # NaN does not hold
    where = "" if at is None or (subject and not math.isnan(value)) else f" at {shown_pose(at)}"
    load = _conditions(case)
    head = f"{subject or what}{f' of {about}' if about else ''}{load}"
    if math.isnan(margin) or margin == -math.inf:
        sentence = f"{head} is not a number{where}; {hint}"
    else:
        rule = "at least" if at_least else "at most"
        far = f"{shown(abs(margin), unit)} {'inside' if holds else 'outside'}"
        far = "by far inside" if margin == math.inf else far
        sentence = f"{head} is {shown(value, unit)}{also}{where}, {far} the limit of {rule} {shown(allowed, unit)}"
    return LimitVerdict(
        what=what,
        holds=holds,
        value=value,
        allowed=allowed,
        margin=margin,
        unit=unit,
        at=at,
        payload=case.payload,
        temperature=case.temperature,
        about=about,
        joint=joint,
        adjuster=adjuster,
        sentence=sentence,
    )


def _conditions(case: Case) -> str:
    load = f" with payload {case.payload!r}" if case.payload is not None else ""
    return load + (f" at {celsius(case.temperature)}" if case.temperature is not None else "")


def broken(case: Case, what: str, allowed: float, unit: str, sentence: str) -> LimitVerdict:
    """The verdict where there is nothing that the limit could be kept by."""
    return LimitVerdict(
        what=what,
        holds=False,
        value=math.nan,
        allowed=allowed,
        margin=math.nan,
        unit=unit,
        at=None,
        payload=case.payload,
        temperature=case.temperature,
        sentence=f"{what}: {sentence}",
    )

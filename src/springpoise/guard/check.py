"""All limits of a file, judged."""

from __future__ import annotations

import math
import os
import warnings
from collections.abc import Sequence
from typing import Any

import attrs
import numpy as np

from springpoise.errors import InputError, InputTypeError, PoiseFileError, SpringpoiseError
from springpoise.guard.amounts import celsius, shown
from springpoise.guard.builds.scattered import Builds
from springpoise.guard.document import PoiseFile
from springpoise.guard.files import load
from springpoise.guard.joints import pose_at, poses_over, shown_pose
from springpoise.guard.limits.mechanism import Limit, Stretch, coordinate_unit
from springpoise.guard.limits.verdict import Case, LimitVerdict
from springpoise.guard.limits.yields import BuildYield
from springpoise.guard.service import at_temperature, service_of
from springpoise.mechanism.gas_mounting import check_gas_mounts
from springpoise.springs import SpringWarning
from springpoise.tables import grid

__all__ = ["CheckReport", "builds_of", "check", "document_at", "judge", "keeps_all"]


@attrs.frozen
class CheckReport:
    """The verdicts on all limits of a document."""

    called: str
    """The file's name, or the document's title."""
    verdicts: tuple[LimitVerdict, ...]
    """One for each limit, in the file's order."""
    warnings: tuple[str, ...] = ()
    """What is unwise about the springs, whatever the limits say: mounting, buckling, temperature, overstretching."""

    @property
    def holds(self) -> bool:
        """Whether there are limits and all of them hold: a check of nothing does not pass."""
        return bool(self.verdicts) and all(verdict.holds for verdict in self.verdicts)

    @property
    def failures(self) -> tuple[LimitVerdict, ...]:
        """The limits that do not hold."""
        return tuple(verdict for verdict in self.verdicts if not verdict.holds)

    @property
    def status(self) -> str:
        """One sentence on what came out."""
        if not self.verdicts:
            return "states no limits, so nothing was judged"
        failed = len(self.failures)
        return (
            f"all {len(self.verdicts)} limits hold" if not failed else f"{failed} of {len(self.verdicts)} limits fail"
        )

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key."""
        return {
            "called": self.called,
            "holds": self.holds,
            "status": self.status,
            "verdicts": [verdict.to_dict() for verdict in self.verdicts],
            "warnings": list(self.warnings),
        }

    def __str__(self) -> str:
        lines = [f"{self.called}: {self.status}"]
        if self.verdicts:
            lines.append(table_of(self.verdicts))
            lines += [f"  {verdict.sentence}" for verdict in self.failures]
        lines += [f"  warning: {text}" for text in self.warnings]
        return "\n".join(lines)


def table_of(verdicts: tuple[LimitVerdict, ...]) -> str:
    """Verdicts as a short table."""
    warm = any(verdict.temperature is not None for verdict in verdicts)
    header = ("limit", "", "found", "allowed", "margin", "at", "payload", *(("springs at",) if warm else ()))
    return grid(
        header,
        [
            (
                f"{verdict.what} of {verdict.joint}"
                if verdict.joint
                else f"{verdict.what}, adjusted"
                if verdict.adjuster
                else verdict.what,
                "holds" if verdict.holds else "FAILS",
                shown(verdict.value, verdict.unit),
                shown(verdict.allowed, verdict.unit),
                shown(verdict.margin, verdict.unit, 3),
                "" if verdict.at is None else shown_pose(verdict.at),
                verdict.payload or "",
                *(("" if verdict.temperature is None else celsius(verdict.temperature),) if warm else ()),
            )
            for verdict in verdicts
        ],
    )


def check(document: PoiseFile | str | os.PathLike[str]) -> CheckReport:
    """Judge every limit of a mechanism file.

    A mechanism with one joint is judged at 361 evenly spaced poses; one with several at 4096 poses
    spread evenly through the box of its travels and, up to ten joints, at the corners of that box.

    Parameters
    ----------
    document
        A document, or the path of a file.

    Returns
    -------
    CheckReport
        ``holds`` where there are limits and all of them hold.

    Raises
    ------
    PoiseFileError
        The file cannot be read, leaves springs to be designed, or states a limit that needs a
        number of a spring that is not given.
    InputError
        A document in code of which one of the latter two is true.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, guard
    >>> bare = Mechanism(Arm(Body("2 kg", (0.35, 0))))
    >>> limit = guard.HoldingTorque(at_most="5 N*m")
    >>> report = guard.check(guard.PoiseFile(title="bare arm", mechanism=bare, limits=[limit]))
    >>> report.holds, round(report.verdicts[0].margin, 3)
    (False, -1.865)
    """
    found = document_at(document)
    if found.design is not None:
        kind = InputError if found.path is None else PoiseFileError
        raise kind(
            f"{found.called}: design: leaves springs to be found, got method {found.design.method!r}; "
            "run the design and check the file that it writes"
        )
    return judge(found)


def document_at(document: PoiseFile | str | os.PathLike[str]) -> PoiseFile:
    """The document itself, or the one in a file."""
    if isinstance(document, PoiseFile):
        return document
    if not isinstance(document, str | os.PathLike):
        raise InputTypeError(f"document must be a PoiseFile or a path, got {document!r}")
    return load(document)


def builds_of(document: PoiseFile) -> Builds | None:
    """The builds with the scatter that a complete document states; None where it states none."""
    if document.tolerances is None:
        return None
    try:
        return Builds(document.with_payload(document.tolerances.payload), document.tolerances)
    except SpringpoiseError as error:
        kind = InputError if document.path is None else PoiseFileError
        raise kind(f"{document.called}: tolerances: {error}") from error


def keeps_all(document: PoiseFile, builds: Builds | None) -> bool:
    """Whether a document keeps all its limits; those that take long are judged last, where the others hold."""
    quick = [limit for limit in document.limits if not isinstance(limit, BuildYield)]
    slow = [limit for limit in document.limits if isinstance(limit, BuildYield)]
    return all(not judge(document, builds, limits).failures for limits in (quick, slow) if limits)


def judge(document: PoiseFile, builds: Builds | None = None, limits: Sequence[Limit] | None = None) -> CheckReport:
    """The verdicts on a document's limits, whatever it leaves open, and what is unwise about its springs.

    Parameters
    ----------
    builds
        Its builds, where they are there already.
    limits
        Which of its limits; None for all.
    """
    kind = InputError if document.path is None else PoiseFileError
    builds = builds_of(document) if builds is None else builds
    verdicts = []
    try:
        _ = document.mechanism.travel_or_turn
    except InputError as error:
        raise kind(f"{document.called}: travel: {error}") from error
    with warnings.catch_warnings(record=True) as caught:
        warnings.simplefilter("always", SpringWarning)
        check_gas_mounts(document.mechanism, rod_at=lambda name: service_of(document.service, name).rod)
        for i, limit in enumerate(document.limits):
            if limits is not None and not any(limit is one for one in limits):
                continue
            try:
                verdicts.append(_worst(document, limit, builds))
            except PoiseFileError:
                raise
            except SpringpoiseError as error:
                raise kind(f"{document.called}: limits[{i + 1}]: {error}") from error
    said = _overstretched(document)
    for one in caught:
        if issubclass(one.category, SpringWarning):
            said.append(str(one.message))
        else:
            warnings.warn_explicit(one.message, one.category, one.filename, one.lineno)
    return CheckReport(document.called, tuple(verdicts), tuple(dict.fromkeys(said)))


def _overstretched(document: PoiseFile) -> list[str]:
    """Springs under load outside what they permit, in words; those that a limit on stretch judges are left to it.

    A spring that is slack there is left out too: it is idle, not strained.
    """
    mechanism = document.mechanism
    judged = [one for one in document.limits if isinstance(one, Stretch) and one.over is None]
    poses = poses_over(mechanism)
    said = []
    with np.errstate(all="ignore"):
        states = mechanism.spring_states(poses)
    for state, mount in zip(states, mechanism.springs, strict=True):
        unit = coordinate_unit(mount)
        if any(one.at_least[1] == unit and one.spring in (None, state.name) for one in judged):
            continue
        margin, load = (np.broadcast_to(np.asarray(each), poses.shape[:1]) for each in (state.margin, state.load))
        strained = np.where(load != 0.0, margin, np.inf)
        if np.any(strained < 0.0):
            worst = int(np.nanargmin(strained))
            outside, at = shown(-float(strained[worst]), unit), shown_pose(pose_at(mechanism, poses, worst))
            said.append(
                f"spring {state.name!r} is {outside} outside what it permits at {at}, and no limit on its stretch is stated"
            )
    return said


def _worst(document: PoiseFile, limit: Limit, builds: Builds | None) -> LimitVerdict:
    """The verdict on a limit, at the worst of its temperatures."""
    payload = limit.payload
    if isinstance(limit, BuildYield) and builds is not None:
        payload = builds.tolerances.payload
    loaded = document.with_payload(payload)
    poses = poses_over(loaded, limit.over)
    verdicts = []
    for temperature in limit.at_temperature or (None,):
        mechanism = loaded
        if temperature is not None:
            mechanism = at_temperature(loaded, temperature, document.service)
        case = Case(mechanism, document.actuator, poses, payload, temperature, document.service, builds)
        with np.errstate(all="ignore"):
            verdicts.append(limit.judge(case))
    return min(verdicts, key=lambda one: -math.inf if math.isnan(one.margin) else one.margin)

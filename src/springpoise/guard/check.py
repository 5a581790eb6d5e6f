"""All limits of a file, judged."""

from __future__ import annotations

import os
from typing import Any

import attrs
import numpy as np

from springpoise.errors import InputError, InputTypeError, PoiseFileError
from springpoise.guard.amounts import shown
from springpoise.guard.document import PoiseFile
from springpoise.guard.files import load
from springpoise.guard.verdict import Case, LimitVerdict
from springpoise.tables import grid

__all__ = ["CheckReport", "check", "document_at", "judge"]

POSES = 361
"""How many evenly spaced poses each limit is judged at."""


@attrs.frozen
class CheckReport:
    """The verdicts on all limits of a document."""

    called: str
    """The file's name, or the document's title."""
    verdicts: tuple[LimitVerdict, ...]
    """One for each limit, in the file's order."""

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
        }

    def __str__(self) -> str:
        lines = [f"{self.called}: {self.status}"]
        if self.verdicts:
            lines.append(table_of(self.verdicts))
            lines += [f"  {verdict.sentence}" for verdict in self.failures]
        return "\n".join(lines)


def table_of(verdicts: tuple[LimitVerdict, ...]) -> str:
    """Verdicts as a short table."""
    header = ("limit", "", "found", "allowed", "margin", "at", "payload")
    return grid(
        header,
        [
            (
                verdict.what,
                "holds" if verdict.holds else "FAILS",
                shown(verdict.value, verdict.unit),
                shown(verdict.allowed, verdict.unit),
                shown(verdict.margin, verdict.unit, 3),
                "" if verdict.at is None else shown(verdict.at, "rad"),
                verdict.payload or "",
            )
            for verdict in verdicts
        ],
    )


def check(document: PoiseFile | str | os.PathLike[str]) -> CheckReport:
    """Judge every limit of a mechanism file.

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
        The file cannot be read, or leaves springs to be designed.
    InputError
        A document in code that leaves springs to be designed.

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


def judge(document: PoiseFile) -> CheckReport:
    """The verdicts on a document's limits, whatever it leaves open."""
    verdicts = []
    for limit in document.limits:
        mechanism = document.with_payload(limit.payload)
        low, high = mechanism.travel_or_turn if limit.over is None else limit.over
        case = Case(mechanism, document.actuator, np.linspace(low, high, POSES), limit.payload)
        with np.errstate(all="ignore"):
            verdicts.append(limit.judge(case))
    return CheckReport(document.called, tuple(verdicts))

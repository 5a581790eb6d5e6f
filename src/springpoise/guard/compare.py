"""What changed between two versions of a mechanism."""

from __future__ import annotations

import math
import os
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance import residual
from springpoise.errors import InputError
from springpoise.guard.amounts import JSON_SUFFIX, finite_or_none, percent, shown
from springpoise.guard.check import POSES, document_at
from springpoise.guard.document import PoiseFile
from springpoise.guard.limits import coordinate_unit
from springpoise.mechanism import Mechanism
from springpoise.tables import grid

__all__ = ["Change", "Comparison", "compare"]


@attrs.frozen
class Change:
    """One quantity of both versions."""

    what: str
    """What it is."""
    unit: str
    """Its SI unit; ``"1"`` for a pure number."""
    old: float | None
    """Its value in the old version; None where there is none, such as that of a spring that is new."""
    new: float | None
    """Its value in the new version."""

    @property
    def difference(self) -> float | None:
        """New less old; None where one is missing."""
        if self.old is None or self.new is None:
            return None
        return 0.0 if self.old == self.new else self.new - self.old

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
        suffix = JSON_SUFFIX[self.unit]
        return {
            "what": self.what,
            f"old{suffix}": finite_or_none(self.old),
            f"new{suffix}": finite_or_none(self.new),
            f"difference{suffix}": finite_or_none(self.difference),
        }


@attrs.frozen
class Comparison:
    """Two versions of a mechanism side by side."""

    old: str
    """What the old version is called."""
    new: str
    """What the new version is called."""
    poses: tuple[float, float]
    """The poses that both can reach (from, to) [rad]."""
    payload: str | None
    """Payload that was on both; None for none."""
    changes: tuple[Change, ...]
    """All quantities, those that are the same included."""
    old_balance: str
    """Where the old version stands still by itself."""
    new_balance: str
    """Where the new version stands still by itself."""
    shift: float
    """Greatest magnitude of the difference of both holding torques [N·m]."""
    shift_at: float
    """Pose where it occurs [rad]."""

    @property
    def changed(self) -> tuple[Change, ...]:
        """The quantities that are not the same."""
        return tuple(change for change in self.changes if change.old != change.new)

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
        return {
            "old": self.old,
            "new": self.new,
            "from_rad": self.poses[0],
            "to_rad": self.poses[1],
            "payload": self.payload,
            "changes": [change.to_dict() for change in self.changes],
            "old_balance": self.old_balance,
            "new_balance": self.new_balance,
            "shift_Nm": finite_or_none(self.shift),
            "shift_at_rad": self.shift_at,
        }

    def __str__(self) -> str:
        def cell(change: Change, value: float | None) -> str:
            if value is None:
                return "-"
            return percent(value) if change.unit == "1" else shown(value, change.unit)

        load = "" if self.payload is None else f", with payload {self.payload!r}"
        rows = [
            (change.what, cell(change, change.old), cell(change, change.new), cell(change, change.difference))
            for change in self.changes
        ]
        return "\n".join(
            [
                f"{self.old} and {self.new}, {shown(self.poses[0], 'rad')} to {shown(self.poses[1], 'rad')}{load}",
                grid(("", "old", "new", "difference"), rows),
                f"  old: {self.old_balance}",
                f"  new: {self.new_balance}",
                f"  holding torque moved by at most {shown(self.shift, 'N*m')}, at {shown(self.shift_at, 'rad')}",
            ]
        )


def compare(
    old: PoiseFile | str | os.PathLike[str], new: PoiseFile | str | os.PathLike[str], *, payload: str | None = None
) -> Comparison:
    """Hold two versions of a mechanism against each other, over the poses that both can reach.

    Parameters
    ----------
    old, new
        Documents, or paths of files.
    payload
        Name of a payload of both that is on them; None for none.

    Returns
    -------
    Comparison
        Prints as a table of old, new and difference.

    Raises
    ------
    PoiseFileError
        A file cannot be read.
    InputError
        The two have no pose in common, or one has no payload of that name or leaves springs open.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, guard
    >>> light, heavy = (guard.PoiseFile(mechanism=Mechanism(Arm(Body(m, (0.35, 0))))) for m in (2.0, 2.5))
    >>> guard.compare(light, heavy).changes[0].difference.__round__(4)
    1.7162
    """
    documents = [document_at(old), document_at(new)]
    for document in documents:
        if document.open_springs:
            raise InputError(f"{document.called}: must be complete to be compared, got springs that are left open")
    a, b = (document.with_payload(payload) for document in documents)
    low = max(a.travel_or_turn[0], b.travel_or_turn[0])
    high = min(a.travel_or_turn[1], b.travel_or_turn[1])
    if not low < high:
        raise InputError(
            f"old and new must have poses in common, got {shown(a.travel_or_turn[0], 'rad')} to "
            f"{shown(a.travel_or_turn[1], 'rad')} and {shown(b.travel_or_turn[0], 'rad')} to "
            f"{shown(b.travel_or_turn[1], 'rad')}"
        )
    a, b = (attrs.evolve(mechanism, travel=(low, high)) for mechanism in (a, b))
    q = np.linspace(low, high, POSES)
    with np.errstate(all="ignore"):
        ours, theirs = _figures(a, q), _figures(b, q)
        shift = np.abs(b.holding_torque(q) - a.holding_torque(q))
    at = int(np.argmax(shift))
    names = [*ours, *(name for name in theirs if name not in ours)]
    changes = []
    for name in names:
        value_a, unit = ours.get(name, (None, ""))
        value_b, unit_b = theirs.get(name, (None, unit))
        changes.append(Change(name, unit or unit_b, value_a, value_b))
    return Comparison(
        old=documents[0].called,
        new=documents[1].called,
        poses=(low, high),
        payload=payload,
        changes=tuple(changes),
        old_balance=str(a.equilibria()),
        new_balance=str(b.equilibria()),
        shift=float(shift[at]),
        shift_at=float(q[at]),
    )


def _figures(mechanism: Mechanism, q: NDArray[np.float64]) -> dict[str, tuple[float | None, str]]:
    """What is compared: value and unit by name."""
    left = residual(mechanism, q)

    def most(values: Any) -> float:
        return float(np.max(values))

    share = left.worst_fraction
    found: dict[str, tuple[float | None, str]] = {
        "residual torque, worst": (left.worst, "N*m"),
        "residual torque, rms": (left.rms, "N*m"),
        "residual torque, worst of peak": (None if math.isnan(share) else share, "1"),
        "peak gravity torque": (left.peak_gravity_torque, "N*m"),
        "friction band": (most(mechanism.friction_band(q)), "N*m"),
        "stored energy": (most(mechanism.spring_energy(q)), "J"),
        "pivot load": (most(mechanism.pivot_load(q)), "N"),
    }
    for state, mount in zip(mechanism.spring_states(q), mechanism.springs, strict=True):
        unit = coordinate_unit(mount)
        found[f"{state.name}: stretch margin"] = (float(np.min(state.margin)), unit)
        found[f"{state.name}: load of one"] = (most(np.abs(state.load)), "N" if unit == "m" else "N*m")
    return found

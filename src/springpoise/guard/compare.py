"""What changed between two versions of a mechanism."""

from __future__ import annotations

import contextlib
import os
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError
from springpoise.guard.amounts import (
    JSON_SUFFIX,
    finite_or_none,
    percent,
    shown,
    text_of_share,
    text_of_torque_or_share,
)
from springpoise.guard.builds.tolerances import Tolerances
from springpoise.guard.check import builds_of, document_at
from springpoise.guard.document import PoiseFile
from springpoise.guard.joints import (
    JointPose,
    JointRanges,
    Pose,
    force_unit,
    joint_names,
    pose_at,
    poses_over,
    shown_pose,
)
from springpoise.guard.limits.mechanism import coordinate_unit
from springpoise.mechanism import Mechanism
from springpoise.mechanism.travel import joint_units_of
from springpoise.tables import grid

__all__ = ["Change", "Comparison", "TextChange", "compare"]


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
class TextChange:
    """One thing that both versions state in words."""

    what: str
    """What it is."""
    old: str | None
    """What the old version states; None for nothing."""
    new: str | None
    """What the new version states; None for nothing."""

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON."""
        return {"what": self.what, "old": self.old, "new": self.new}

    def __str__(self) -> str:
        if self.old is None:
            return f"{self.what}: {self.new}, new"
        return f"{self.what}: {self.old}, gone" if self.new is None else f"{self.what}: {self.old}, now {self.new}"


@attrs.frozen
class Comparison:
    """Two versions of a mechanism side by side."""

    old: str
    """What the old version is called."""
    new: str
    """What the new version is called."""
    poses: tuple[float, float] | JointRanges
    """The poses that both can reach (from, to) [rad]; a range each for several joints."""
    payload: str | None
    """Payload that was on both; None for none."""
    changes: tuple[Change, ...]
    """All quantities, those that are the same included."""
    old_balance: str
    """Where the old version stands still by itself; empty for several joints."""
    new_balance: str
    """Where the new version stands still by itself; empty for several joints."""
    shift: float
    """Greatest magnitude of the difference of both holding torques [N·m, or N where the joint slides]."""
    shift_at: Pose
    """Pose where it occurs [rad], or of several joints."""
    shift_joint: str = ""
    """Joint whose torque it is, where there are several."""
    shift_unit: str = "N*m"
    """Its unit."""
    tolerance_changes: tuple[TextChange, ...] = ()
    """What is stated otherwise in the tolerances."""

    @property
    def changed(self) -> tuple[Change, ...]:
        """The quantities that are not the same."""
        return tuple(change for change in self.changes if change.old != change.new)

    def to_dict(self) -> dict[str, Any]:
        """Ready for JSON: numbers in SI with the unit in the key, None for what is not finite."""
        return {
            "old": self.old,
            "new": self.new,
            **self._range_dict(),
            "payload": self.payload,
            "changes": [change.to_dict() for change in self.changes],
            "old_balance": self.old_balance,
            "new_balance": self.new_balance,
            f"shift{JSON_SUFFIX[self.shift_unit]}": finite_or_none(self.shift),
            **(
                {"shift_at": self.shift_at.to_dict(), "shift_joint": self.shift_joint}
                if isinstance(self.shift_at, JointPose)
                else {"shift_at_rad": self.shift_at}
            ),
            "tolerance_changes": [change.to_dict() for change in self.tolerance_changes],
        }

    def _range_dict(self) -> dict[str, Any]:
        if not isinstance(self.poses, JointRanges):
            return {"from_rad": self.poses[0], "to_rad": self.poses[1]}
        each = zip(self.poses.ranges, self.poses.units, strict=True)
        return {"ranges": [{f"from{JSON_SUFFIX[u]}": pair[0], f"to{JSON_SUFFIX[u]}": pair[1]} for pair, u in each]}

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
        of = f" of {self.shift_joint}" if self.shift_joint else ""
        balance = [f"  old: {self.old_balance}", f"  new: {self.new_balance}"] if self.old_balance else []
        return "\n".join(
            [
                f"{self.old} and {self.new}, {_shown_ranges(self.poses)}{load}",
                grid(("", "old", "new", "difference"), rows),
                *balance,
                f"  holding torque{of} moved by at most {shown(self.shift, self.shift_unit)}, "
                f"at {shown_pose(self.shift_at)}",
                *(f"  tolerances, {change}" for change in self.tolerance_changes),
            ]
        )


def _shown_ranges(poses: Any) -> str:
    if not isinstance(poses, JointRanges):
        return f"{shown(poses[0], 'rad')} to {shown(poses[1], 'rad')}"
    each = zip(poses.ranges, poses.units, strict=True)
    return ", ".join(f"{shown(low, unit)} to {shown(high, unit)}" for (low, high), unit in each)


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
        if document.design is not None or document.open_springs:
            raise InputError(
                f"{document.called}: must be complete to be compared, got springs that are left open; "
                "run the design and compare the file that it writes"
            )
    a, b = (document.with_payload(payload) for document in documents)
    joints = joint_names(a.linkage)
    common = _common(a, b)
    single = not isinstance(common, JointRanges)
    a, b = (
        attrs.evolve(mechanism, travel=common.ranges if isinstance(common, JointRanges) else common)
        for mechanism in (a, b)
    )
    q = poses_over(a)
    with np.errstate(all="ignore"):
        ours, theirs = _figures(a, q), _figures(b, q)
        moved = np.abs(b.holding_torque(q) - a.holding_torque(q)).reshape(len(q), len(joints))
        ours |= _yields(documents[0])
        theirs |= _yields(documents[1])
    at, joint = np.unravel_index(int(np.argmax(moved)), moved.shape)
    names = [*ours, *(name for name in theirs if name not in ours)]
    changes = []
    for name in names:
        value_a, unit = ours.get(name, (None, ""))
        value_b, unit_b = theirs.get(name, (None, unit))
        changes.append(Change(name, unit or unit_b, value_a, value_b))
    return Comparison(
        old=documents[0].called,
        new=documents[1].called,
        poses=common,
        payload=payload,
        changes=tuple(changes),
        old_balance=str(a.equilibria()) if single else "",
        new_balance=str(b.equilibria()) if single else "",
        shift=float(moved[at, joint]),
        shift_at=pose_at(a, q, int(at)),
        shift_joint=joints[joint] if len(joints) > 1 else "",
        shift_unit=force_unit(joint_units_of(a.linkage)[joint]),
        tolerance_changes=_stated_otherwise(documents[0].tolerances, documents[1].tolerances),
    )


def _yields(document: PoiseFile) -> dict[str, tuple[float | None, str]]:
    """What a document's own tolerances make of it, on its own travel and with the payload that they name."""
    if document.design is not None:  # its springs are still to be found
        return {}
    builds = builds_of(document)
    return {} if builds is None else {"yield, by its own tolerances": (builds.yield_share, "1")}


def _stated_otherwise(old: Tolerances | None, new: Tolerances | None) -> tuple[TextChange, ...]:
    """What differs between two versions' tolerances, in words."""
    ours, theirs = _stated(old), _stated(new)
    names = [*ours, *(name for name in theirs if name not in ours)]
    changes = (TextChange(name, ours.get(name), theirs.get(name)) for name in names)
    return tuple(change for change in changes if change.old != change.new)


def _stated(tolerances: Tolerances | None) -> dict[str, str]:
    if tolerances is None:
        return {}
    stated = {
        "residual limit": text_of_torque_or_share(tolerances.residual_limit),
        "payload": tolerances.payload or "none",
        **{name: str(getattr(tolerances, name)) for name in ("builds", "seed", "poses", "adjusted_builds")},
        "coverage": str(text_of_share(tolerances.coverage)),
    }
    stated |= {f"spread of {one.field}": str(one) for one in tolerances.spreads}
    if tolerances.adjusters is not None:
        stated |= {f"adjuster {one.label}": str(one) for one in tolerances.adjusters}
    return {name.replace("_", " ") if name == "adjusted_builds" else name: text for name, text in stated.items()}


def _common(a: Mechanism, b: Mechanism) -> Any:
    """The poses that both can reach: a range of angles, or a range for each joint."""
    names, kinds = joint_names(a.linkage), joint_units_of(a.linkage)
    if (names, kinds) != (joint_names(b.linkage), joint_units_of(b.linkage)):
        raise InputError(
            f"old and new must have the same joints, got {', '.join(names)} and {', '.join(joint_names(b.linkage))}"
        )
    one = len(names) == 1
    both = [(m.travel_or_turn,) if one else m.travel_or_turn for m in (a, b)]
    ranges = []
    for name, unit, mine, other in zip(names, kinds, *both, strict=True):
        low, high = max(mine[0], other[0]), min(mine[1], other[1])
        if not low < high:
            of = "" if one else f" of {name}"
            raise InputError(
                f"old and new must have poses{of} in common, got {shown(mine[0], unit)} to {shown(mine[1], unit)} and "
                f"{shown(other[0], unit)} to {shown(other[1], unit)}"
            )
        ranges.append((low, high))
    return ranges[0] if kinds == ("rad",) else JointRanges(tuple(ranges), kinds)


def _figures(mechanism: Mechanism, q: NDArray[np.float64]) -> dict[str, tuple[float | None, str]]:
    """What is compared: value and unit by name."""
    joints = joint_names(mechanism.linkage)
    found: dict[str, tuple[float | None, str]] = {}
    torques, gravity, bands = (
        np.abs(np.broadcast_to(values, q.shape)).reshape(len(q), len(joints))
        for values in (mechanism.holding_torque(q), mechanism.gravity_torque(q), mechanism.friction_band(q))
    )
    for i, unit in enumerate(map(force_unit, joint_units_of(mechanism.linkage))):
        of = f" of {joints[i]}" if len(joints) > 1 else ""
        worst, peak = _most(torques[:, i]), _most(gravity[:, i])
        found |= {
            f"residual torque{of}, worst": (worst, unit),
            f"residual torque{of}, rms": (float(np.sqrt(np.mean(torques[:, i] ** 2))), unit),
            f"residual torque{of}, worst of peak": (worst / peak if peak > 0 else None, "1"),
            f"peak gravity torque{of}": (peak, unit),
            f"friction band{of}": (_most(bands[:, i]), unit),
        }
    found["stored energy"] = (_most(mechanism.spring_energy(q)), "J")
    pivots: tuple[str, ...] = tuple(getattr(mechanism.linkage, "pivots", ("",)))
    with contextlib.suppress(InputError):  # linkages in space and spools do not know where their cables press
        loads = np.asarray(mechanism.pivot_load(q)).reshape(len(q), len(pivots))
        for i, name in enumerate(pivots):
            found["pivot load" + (f" of {name}" if len(pivots) > 1 else "")] = (_most(loads[:, i]), "N")
    for state, mount in zip(mechanism.spring_states(q), mechanism.springs, strict=True):
        unit = coordinate_unit(mount)
        found[f"{state.name}: stretch margin"] = (float(np.min(state.margin)), unit)
        found[f"{state.name}: load of one"] = (_most(np.abs(state.load)), "N" if unit == "m" else "N*m")
    return found


def _most(values: Any) -> float:
    return float(np.max(values))

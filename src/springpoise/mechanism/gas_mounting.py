"""Which way up the gas springs of a mechanism hang over its travel."""

from __future__ import annotations

import warnings
from collections.abc import Callable, Iterator, Mapping
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.errors import InputError
from springpoise.mechanism.mechanism import Mechanism
from springpoise.mechanism.mount import SpringMount
from springpoise.springs import (
    GasMounting,
    GasSpring,
    OffsetSpring,
    ParallelSprings,
    RodUpWarning,
    ScaledSpring,
    check_gas_mounting,
)
from springpoise.springs.gas.mounting import WIDEST_TILT
from springpoise.tables import degrees
from springpoise.units import ScalarLike

__all__ = ["GasMount", "check_gas_mounts"]

End = Literal["first", "last"]
_ENDS: tuple[End, End] = ("first", "last")


@attrs.frozen
class GasMount:
    """How one gas spring of a mechanism hangs."""

    name: str
    """Name of the mount."""
    rod: End
    """The end of the path at which the rod is; the better one where it was not stated."""
    stated: bool
    """Whether that end was stated."""
    mounting: GasMounting
    """The margins to the widest tilt of the rod."""

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        where = f"gas spring {self.name!r}, rod at the {self.rod} point of its path"
        return f"{where}{'' if self.stated else ', the better way round'}: {self.mounting.status}"

    def __str__(self) -> str:
        return f"{self.status}\n{self.mounting}"


def check_gas_mounts(
    mechanism: Mechanism,
    over: Any = None,
    *,
    rod_at: Mapping[str, End] | Callable[[str], End | None] | None = None,
    widest_tilt: ScalarLike = WIDEST_TILT,
) -> tuple[GasMount, ...]:
    """Check the mounting of every gas spring on a straight path, and warn where its rod is not down.

    The line between the end fittings is that of the path, whatever part of it is rigid; down is
    where the mechanism's gravity points. Poses that leave a spring no length are passed over: its
    working range tells of them.

    Parameters
    ----------
    mechanism
        The mechanism.
    over
        Poses [rad]; None for 181 poses over the travel.
    rod_at
        For each mount by name the end of its path at which the rod is, ``"first"`` or ``"last"``.
        Where that is not given, the better way round is taken, and named in the result.
    widest_tilt
        Greatest permissible angle between the rod and straight down [rad].

    Returns
    -------
    tuple of GasMount
        One for each gas spring, in the mounts' order; springs on cables are left out.

    Warns
    -----
    RodUpWarning
        A rod is farther from straight down than permitted, at some pose; the text says by how much.

    Raises
    ------
    InputError
        An end that is neither ``"first"`` nor ``"last"``.

    Examples
    --------
    >>> from springpoise import Arm, Body, GasSpring, Point, SpringMount, Straight
    >>> spring = GasSpring.from_forces(extending=(400, 540), compressing=(460, 612), offset="10 mm",
    ...     stroke="200 mm", rod_diameter="8 mm", extended_length="500 mm")
    >>> path = Straight(Point("ground", (0.05, -0.35)), Point("arm", (0.15, 0)))
    >>> flap = Mechanism(Arm(Body(12, (0.4, 0))), springs=SpringMount(spring, path), travel=("0 deg", "40 deg"))
    >>> [found] = check_gas_mounts(flap)
    >>> found.status
    "gas spring 'spring 1', rod at the first point of its path, the better way round: rod down over the whole travel"
    """
    q = mechanism.poses(181) if over is None else np.asarray(units.poses(over, "over"), dtype=np.float64)
    asked: Callable[[str], End | None] = rod_at if callable(rod_at) else (rod_at or {}).get
    found = []
    for i, mount in enumerate(mechanism.springs):
        name = mechanism.mount_name(i)
        rod = asked(name)
        if rod is not None and rod not in _ENDS:
            raise InputError(f"rod_at of mount {name!r} must be 'first' or 'last', got {rod!r}")
        found += [_found(name, rod, *line, widest_tilt) for line in _lines(mechanism, mount, q)]
    for one in found:
        if one.mounting.margin < 0.0:
            widest = one.mounting.widest_tilt
            warnings.warn(
                f"{one.status}; at its worst it is {degrees(widest - one.mounting.margin)} from straight down, "
                f"{degrees(-one.mounting.margin)} beyond the permitted {degrees(widest)}",
                RodUpWarning,
                stacklevel=2,
            )
    return tuple(found)


def _lines(mechanism: Mechanism, mount: SpringMount, q: Any) -> Iterator[tuple[Any, Any]]:
    """For each gas spring of a mount: its length, and how much of it its path rises from first to last point."""
    ends: Any = getattr(mount.path, "ends", None)
    if ends is None:
        return
    lengths = list(_gas_lengths(mount.spring, mount.spring_length(mechanism.linkage, q)))
    if not lengths:
        return
    first, last = (mechanism.linkage.position(point, q) for point in ends)
    rise = sum(-g * (b - a) for g, a, b in zip(mechanism.gravity, first, last, strict=True))
    strength = float(np.sqrt(sum(float(g) ** 2 for g in mechanism.gravity)))
    whole = mount.path.length(mechanism.linkage, q)
    if strength == 0.0:  # nowhere is down
        return
    for length in lengths:
        there = np.isfinite(whole) & (length > 0.0)  # a spring of no length is for its working range to tell
        if np.any(there):
            yield length[there], (rise / (strength * whole) * length)[there]


def _gas_lengths(spring: Any, x: Any) -> Iterator[Any]:
    if isinstance(spring, GasSpring):
        yield x
    elif isinstance(spring, ParallelSprings):
        for one in spring.springs:
            yield from _gas_lengths(one, x)
    elif isinstance(spring, OffsetSpring):
        yield from _gas_lengths(spring.spring, x - spring.by)
    elif isinstance(spring, ScaledSpring):
        yield from _gas_lengths(spring.spring, x)


def _found(name: str, rod: End | None, length: Any, rise: Any, widest_tilt: ScalarLike) -> GasMount:
    """Both ways round, or the one that is stated; heights count from the first point."""
    heights: dict[End, Any] = {"first": 0.0 * rise, "last": rise}
    tried = {}
    for end in _ENDS if rod is None else (rod,):
        other: End = "last" if end == "first" else "first"
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", RodUpWarning)  # the caller is told once, with the mount's name
            tried[end] = check_gas_mounting(heights[other], heights[end], length, widest_tilt=widest_tilt)
    best = max(tried, key=lambda end: (tried[end].margin, tried[end].margin_closed))
    return GasMount(name, best, rod is not None, tried[best])

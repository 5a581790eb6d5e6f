"""What is chosen of the springs while their mounts are moved: shares of their load, none of them negative."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

import attrs
import numpy as np

from springpoise.balance.amounts import preloads
from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs import CompressionSpring, ExtensionSpring, ScaledSpring, TorsionSpring, ZeroLengthSpring

__all__ = ["MountShares", "layout_of", "nominal", "sizable", "with_shares"]


class MountShares(NamedTuple):
    """How the unknowns of one mount follow from its shares."""

    mount: int
    """Place of the mount."""
    rays: tuple[tuple[float, ...], ...]
    """For each unknown, what one of each share adds to it."""
    fit: str

    @property
    def size(self) -> int:
        """How many shares there are."""
        return len(self.rays[0])


def sizable(mechanism: Mechanism, free: Sequence[int]) -> Mechanism:
    """The mechanism with springs whose strength can be chosen at the free mounts."""
    mounts = list(mechanism.springs)
    for i in free:
        spring: Any = mounts[i].spring
        if not (hasattr(spring, "load_terms") and hasattr(spring, "tuned")):
            mounts[i] = attrs.evolve(mounts[i], spring=ScaledSpring(spring, 1.0))
    return mechanism.with_springs(mounts)


def layout_of(mechanism: Mechanism, free: Sequence[int], fit: str, q: Any) -> tuple[MountShares, ...]:
    """The shares of a sizable mechanism's free mounts over the poses ``q``.

    Raises
    ------
    InputError
        A rigid length is to be fitted to a spring that has no length.
    """
    return tuple(_mount_layout(mechanism, i, fit, q) for i in free)


def _mount_layout(mechanism: Mechanism, i: int, fit: str, q: Any) -> MountShares:
    spring: Any = mechanism.springs[i].spring
    if fit == "mount":
        if not isinstance(spring, ZeroLengthSpring | ExtensionSpring | CompressionSpring):
            raise InputError(
                f"fit must be 'spring', 'rate' or 'none' where a mount holds a {_kind(spring)} "
                f"({mechanism.mount_name(i)}), got 'mount'"
            )
        either_way = isinstance(spring, CompressionSpring)
        return MountShares(i, ((1.0, 0.0, 0.0), (0.0, 1.0, -1.0)) if either_way else ((1.0, 0.0), (0.0, 1.0)), fit)
    if fit == "spring" and isinstance(spring, TorsionSpring):
        return MountShares(i, ((1.0, 1.0), preloads(mechanism.springs[i].spring_length(mechanism.linkage, q))), fit)
    low, high = getattr(spring, "working_range", None) or (0.0, 1.0)
    middle = 0.5 * (float(low) + float(high)) if np.isfinite(high) and np.isfinite(low) else 0.1
    signs = spring.load_terms(middle, preload=fit == "spring").may_be_negative
    unit = np.eye(len(signs))
    rays = np.concatenate([unit, -unit[:, np.asarray(signs, dtype=bool)]], axis=1)
    return MountShares(i, tuple(map(tuple, rays.tolist())), fit)


def _kind(spring: Any) -> str:
    return type(spring.spring if isinstance(spring, ScaledSpring) else spring).__name__


def nominal(mechanism: Mechanism, layout: Sequence[MountShares], q: Any) -> list[float]:
    """Shares at which every spring pulls where it can: what slopes are taken at."""
    shares: list[float] = []
    for own in layout:
        mount = mechanism.springs[own.mount]
        if own.fit != "mount":
            shares += [1.0] * own.size
            continue
        rigid, spring = 0.0, mount.spring
        if isinstance(spring, CompressionSpring):
            middle = 0.5 * float(spring.free_length + spring.solid_length)
            rigid = float(np.mean(mount.path.length(mechanism.linkage, q))) - middle
        shares += [1.0, max(rigid, 0.0), max(-rigid, 0.0)][: own.size]
    return shares


def with_shares(mechanism: Mechanism, layout: Sequence[MountShares], shares: Sequence[Carrier]) -> Mechanism:
    """The mechanism with these shares, numbers or recorded variables."""
    mounts, rest = list(mechanism.springs), list(shares)
    for own in layout:
        mine, rest = rest[: own.size], rest[own.size :]
        amounts = tuple(_sum(row, mine) for row in own.rays)
        mounts[own.mount] = _tuned(mounts[own.mount], amounts, own.fit)
    return mechanism.with_springs(mounts)


def _sum(row: Sequence[float], shares: Sequence[Carrier]) -> Carrier:
    total: Carrier = 0.0
    for factor, share in zip(row, shares, strict=True):
        if factor:
            total = total + factor * share
    return total


def _tuned(mount: SpringMount, amounts: tuple[Carrier, ...], fit: str) -> SpringMount:
    spring: Any = mount.spring
    if fit == "mount":
        rate, taken = amounts
        return attrs.evolve(mount, spring=spring.tuned((rate,), preload=False), rigid_length=taken / rate)
    return attrs.evolve(mount, spring=spring.tuned(amounts, preload=fit == "spring"))

"""A mount's share of the torques of all joints, as columns that are linear in what a fit may choose."""

from __future__ import annotations

from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Linkage
from springpoise.mechanism import SpringMount
from springpoise.springs import ExtensionSpring, ZeroLengthSpring

__all__ = ["Columns", "columns_of", "with_amounts"]

Array = NDArray[np.float64]


class Columns(NamedTuple):
    """One mount's holding torque: ``fixed + terms @ rays @ shares``, for shares that are not negative."""

    fixed: Array
    """What stays [N·m], shape (poses · joints,)."""
    terms: Array
    """For each unknown, shape (poses · joints, unknowns)."""
    rays: Array
    """What the unknowns are for a unit of each share."""
    pulling: NDArray[np.bool_]
    """Whether the spring pulls, pose by pose."""


def columns_of(linkage: Linkage, mount: SpringMount, q: Array, preload: str) -> Columns:
    """The mount's share, for the poses in which its spring pulls as it stands."""
    spring: Any = mount.spring
    if not isinstance(spring, ExtensionSpring | ZeroLengthSpring):
        raise InputTypeError(
            f"mechanism.springs must be ExtensionSprings or ZeroLengthSprings to be fitted, got {type(spring).__name__}"
        )
    x = np.broadcast_to(mount.spring_length(linkage, q), len(q))
    gradient = [np.broadcast_to(part, len(q)) for part in mount.path.gradient(linkage, q)]
    lever = mount.count * np.stack(gradient, axis=-1)
    if not (np.all(np.isfinite(x)) and np.all(np.isfinite(lever))):
        raise InputError(
            f"path of {mount.name!r} must be finite over the poses, got NaN; is an end inside a disc there?"
        )
    pulling = np.asarray(spring.stiffness(x) != 0)

    def torques(load: Any) -> Array:
        return np.asarray(np.broadcast_to(load, len(q))[:, None] * lever).ravel()

    if preload == "mount":
        # With w = rate · rigid_length as the second unknown, the load is linear in both.
        free = getattr(spring, "free_length", 0.0)
        tension = getattr(spring, "initial_tension", 0.0)
        length = x + mount.rigid_length
        terms = [torques(pulling * (length - free)), -torques(pulling * 1.0)]
        most = float(np.max(length))
        rays = np.array([[1.0, 1.0], [-(free + most), max(0.0, most - free)]])
        return Columns(torques(pulling * tension), np.stack(terms, axis=1), rays, pulling)
    parts = spring.load_terms(x, preload=preload == "spring")
    terms = [torques(term) for term in parts.terms]
    return Columns(torques(parts.fixed), np.stack(terms, axis=1), np.eye(len(terms)), pulling)


def with_amounts(mount: SpringMount, amounts: Array, preload: str) -> SpringMount:
    """The mount with these amounts of its unknowns."""
    spring: Any = mount.spring
    if preload == "mount":
        rate, hidden = amounts.tolist()
        return attrs.evolve(mount, spring=spring.tuned((rate,), preload=False), rigid_length=hidden / rate)
    return attrs.evolve(mount, spring=spring.tuned(tuple(amounts.tolist()), preload=preload == "spring"))

"""What a path is to the rest of the library."""

from __future__ import annotations

from typing import Any, Protocol

from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.linkages.protocol import AppliedForce, Linkage

__all__ = ["Path", "friction_gradient_of", "pulls_of"]


class Path(Protocol):
    """Two methods: the length along the path, and how it changes with each joint.

    Two more are used where a path has them: ``pulls(linkage, q)``, the forces on the bodies for
    one newton of tension (needed for pivot loads); and ``friction_gradient(linkage, q)``, for
    each joint the half-width of its torque band for one newton of tension [m], taken as zero
    otherwise.
    """

    def length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """Length along the path [m], or its angle [rad], shape of one joint of ``q``."""
        ...

    def gradient(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the derivative of the length [m/rad, or rad/rad]."""
        ...


def friction_gradient_of(path: Path, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
    """The path's own torque band for one newton of tension, or zero where it states none."""
    own: Any = getattr(path, "friction_gradient", None)
    return (0.0,) * linkage.joint_count if own is None else own(linkage, q)


def pulls_of(path: Path, linkage: Linkage, q: Carrier) -> tuple[AppliedForce, ...]:
    """The path's own forces on the bodies for one newton of tension."""
    own: Any = getattr(path, "pulls", None)
    if own is None:
        raise InputError(
            f"{type(path).__name__}.pulls must be defined to know a pivot load, got a path without it; "
            "add pulls(linkage, q) that returns the forces for one newton of tension"
        )
    return tuple(own(linkage, q))

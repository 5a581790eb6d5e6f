"""Figures of one balanced arm, for a comparison."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.residuals import Residual, residual
from springpoise.errors import InputError
from springpoise.linkages import Arm
from springpoise.mechanism import Equilibria, Friction, Mechanism

__all__ = ["MethodFigures", "figures_of"]

Array = NDArray[np.float64]

FINE = 721
"""Poses over the range at which ranges that stay put are told apart."""

NEAR = 0.01
"""A worst residual of no more than this share of the peak gravity torque counts as balanced nearly everywhere [1]."""


@attrs.frozen
class MethodFigures:
    """How well one method balances, and what it costs."""

    residual: Residual
    """What is left over the poses."""
    equilibria: Equilibria
    """The angles at which gravity and springs balance exactly."""
    friction: float
    """Greatest half-width of the friction band [N·m]."""
    stays: tuple[tuple[float, float], ...]
    """Ranges in which the arm stays put by friction alone [rad]."""
    stays_share: float
    """Their share of the range [1]."""
    effort_up: float
    """Greatest magnitude of the torque that raises the arm slowly [N·m]."""
    effort_down: float
    """Greatest magnitude of the torque that lowers it slowly [N·m]; equal to ``effort_up`` where it is balanced."""
    must_hold: float
    """Greatest torque that the actuator must hold at rest, friction helping [N·m]."""
    pivot_load: float
    """Greatest load of the pivot [N]."""
    pivot_load_known: bool
    """Whether it is that; a spool does not say in which direction its cable leaves, so that it is an upper bound there."""
    stored_energy: float
    """Greatest energy in the springs [J]."""
    inertia: float
    """Moment of inertia about the pivot that the method adds [kg·m²]."""
    warmer: float
    """Change of the worst residual where it is warmer, over the peak gravity torque [1]."""
    heavier: float
    """Change of the worst residual where the arm is heavier, over the peak gravity torque [1]."""

    @property
    def balances(self) -> str:
        """At how many angles it balances: ``"all"``, ``"near all"`` or a number."""
        if self.equilibria.everywhere:
            return "all"
        if self.residual.worst_fraction <= NEAR:
            return "near all"
        return str(len(self.equilibria.points))


def figures_of(
    mechanism: Mechanism,
    bare: Mechanism,
    q: Array,
    *,
    inertia: float,
    warmed: Callable[[Mechanism], Mechanism],
    payload_change: float,
) -> MethodFigures:
    """The figures of a mechanism over the poses ``q``; ``bare`` is the arm without the method."""
    states = mechanism.spring_states(q)
    bound = _weight(mechanism) + sum(
        mount.count * float(np.max(np.abs(state.load))) for mount, state in zip(mechanism.springs, states, strict=True)
    )
    try:
        pivot, known = float(np.max(mechanism.pivot_load(q))), True
    except InputError:
        pivot, known = bound, False
        mechanism = _with_bounded_friction(mechanism, bound)
    left = residual(mechanism, q)
    peak = residual(bare, q).peak_gravity_torque
    # A counterweight changes what gravity does; residuals compare with the arm itself.
    left = attrs.evolve(left, peak_gravity_torque=peak)
    holding = np.broadcast_to(mechanism.holding_torque(q), q.shape)
    band = np.broadcast_to(mechanism.friction_band(q), q.shape)
    upward = np.where(bare.gravity_torque(q) > 0.0, -1.0, 1.0)
    fine = np.linspace(float(q.min()), float(q.max()), FINE)
    free = np.broadcast_to(mechanism.holding_torque(fine), fine.shape)
    held = np.abs(free) <= np.broadcast_to(mechanism.friction_band(fine), fine.shape) + 1e-9 * peak
    worst_warm = residual(warmed(mechanism), q).worst
    worst_heavy = residual(_heavier(mechanism, bare, 1.0 + payload_change), q).worst
    return MethodFigures(
        residual=left,
        equilibria=_equilibria(mechanism, fine, 1e-9 * peak),
        friction=float(np.max(band)),
        stays=_ranges(fine, held),
        stays_share=float(np.mean(held)),
        effort_up=float(np.max(np.abs(holding + upward * band))),
        effort_down=float(np.max(np.abs(holding - upward * band))),
        must_hold=float(max(np.max(np.abs(holding) - band), 0.0)) if np.any(np.abs(holding) > 1e-9 * peak) else 0.0,
        pivot_load=pivot,
        pivot_load_known=known,
        stored_energy=float(np.max(mechanism.spring_energy(q))),
        inertia=inertia,
        warmer=(worst_warm - left.worst) / peak,
        heavier=(worst_heavy - left.worst) / peak,
    )


def _equilibria(mechanism: Mechanism, q: Array, nothing: float) -> Equilibria:
    """The mechanism's own, compared with the arm's torque: beside a counterweight gravity's own torque is rounding."""
    if np.all(np.abs(mechanism.holding_torque(q)) <= nothing):
        return Equilibria((), True, (float(q[0]), float(q[-1])))
    return mechanism.equilibria()


def _weight(mechanism: Mechanism) -> float:
    mass = sum(float(one.mass) for one in mechanism.linkage.masses)
    return mass * float(np.hypot(*mechanism.gravity))


def _with_bounded_friction(mechanism: Mechanism, load: float) -> Mechanism:
    """The same with the friction that the pivot has under a load, where the load itself is not known."""
    frictions = [
        Friction(one.coulomb + one.pivot_friction * one.pivot_radius * load) for one in mechanism.joint_frictions
    ]
    return attrs.evolve(mechanism, friction=frictions)


def _heavier(mechanism: Mechanism, bare: Mechanism, factor: float) -> Mechanism:
    """The same with the arm's own bodies heavier; a counterweight stays."""
    arm: Any = mechanism.linkage
    assert isinstance(arm, Arm) and isinstance(bare.linkage, Arm)
    own = len(bare.linkage.bodies)
    bodies = [attrs.evolve(body, mass=factor * body.mass) if i < own else body for i, body in enumerate(arm.bodies)]
    return attrs.evolve(mechanism, linkage=attrs.evolve(arm, bodies=bodies))


def _ranges(q: Array, held: NDArray[np.bool_]) -> tuple[tuple[float, float], ...]:
    edges = np.flatnonzero(np.diff(np.concatenate([[0], held.astype(int), [0]])))
    return tuple((float(q[first]), float(q[last - 1])) for first, last in zip(edges[::2], edges[1::2], strict=True))

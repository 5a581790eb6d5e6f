"""Best rates and preloads for springs whose mounts are fixed."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Literal

import attrs
import numpy as np

from springpoise.balance.amounts import best_amounts
from springpoise.balance.fitted_mounts import mounts_to_fit, rows_of_mounts
from springpoise.balance.residuals import Residual, poses_over, residual, shown_pose
from springpoise.errors import InputError, InputTypeError, NoSolution
from springpoise.mechanism import Mechanism
from springpoise.tables import facts

__all__ = ["SpringFit", "fit_springs"]

ROUNDING = 1e-9
"""A residual below this share of the peak gravity torque [1] is rounding, and no pose holds it down."""


@attrs.frozen
class SpringFit:
    """Springs fitted to fixed mounts."""

    mechanism: Mechanism
    """The mechanism with the fitted springs; mounts that are best left out are gone."""
    norm: str
    """What was made least: ``"minimax"``, the worst residual, or ``"rms"``."""
    residual: Residual
    """What is left over the poses."""
    left_out: tuple[str, ...]
    """Names of the mounts that are best left out."""
    settled: bool
    """Whether the poses in which each spring pulls are those that the fit assumed."""
    equal_poses: tuple[float, ...]
    """For ``"minimax"``, the poses at which the residual reaches its worst [rad]; they hold it down."""

    @property
    def success(self) -> bool:
        """Whether at least one spring helps and the fit settled."""
        return self.settled and bool(self.mechanism.springs)

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if not self.mechanism.springs:
            return "no spring at these mounts makes the residual smaller"
        if not self.settled:
            return "the poses in which the springs go slack did not settle; this is the best fit seen on the way"
        what = "worst residual" if self.norm == "minimax" else "rms residual"
        return (
            f"no other rates and preloads have a smaller {what}"
            + " at these mounts and poses, as long as the same springs pull in the same poses"
        )

    def require(self) -> SpringFit:
        """The result itself, or an error where it is none.

        Raises
        ------
        NoSolution
            No spring helps, or the fit did not settle.
        """
        if not self.success:
            raise NoSolution(f"{self.status}; {self.residual}")
        return self

    def __str__(self) -> str:
        rows = [("status", self.status), ("residual", str(self.residual))]
        rows += rows_of_mounts(self.mechanism)
        rows += [(name, "best left out") for name in self.left_out]
        if self.equal_poses:
            rows.append(("worst at", shown_pose(self.equal_poses, "rad" if self.residual.unit == "N*m" else "m")))
        return f"spring fit ({self.norm})\n" + facts(rows)


def fit_springs(
    mechanism: Mechanism,
    *,
    norm: Literal["minimax", "rms"] = "minimax",
    over: Any = None,
    preload: Literal["spring", "mount", "none"] = "spring",
    fixed: Sequence[str | int] = (),
    gravity: Any = None,
) -> SpringFit:
    """Best rates and preloads for fixed mounts: a linear program, or bounded least squares.

    A torque is linear in a spring's rate and preload as long as the spring pulls in the same
    poses; the fit is repeated until the poses it assumed are those that come out. A torsion spring is
    wound by two turns at the most, since the softest that is wound the farthest is often the best.

    A spring of your own that has only its three methods is sized as a whole and comes back in a
    ``ScaledSpring``.

    Parameters
    ----------
    mechanism
        The mechanism with its mounts; the springs' present rates and preloads do not matter,
        their free lengths do.
    norm
        ``"minimax"`` makes the worst residual least, ``"rms"`` its root mean square.
    over
        Poses [rad]; None for 181 over the travel.
    preload
        ``"spring"``: an extension spring's initial tension (from 0 to what zero free length needs)
        and a torsion spring's free angle (within two turns) are chosen too. ``"mount"``: the
        springs' preload stays and each mount's ``rigid_length`` is chosen, from 0 on, or for a
        compression spring so that it never goes solid. ``"none"``: rates alone. A spring with an
        initial tension that stays is left out where it harms more than it helps.
    fixed
        Names or numbers (from 0 on) of the mounts whose springs stay as they are.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    SpringFit

    Raises
    ------
    InputError, InputTypeError
        An unknown norm, preload or mount; no spring to fit.

    Examples
    --------
    >>> import numpy as np
    >>> from springpoise import (Arm, Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight, balance)
    >>> mech = Mechanism(
    ...     Arm(Body("2 kg", (0.35, 0))),
    ...     springs=[SpringMount(ExtensionSpring(1000, free_length=0.018),
    ...                          Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0))))],
    ...     travel=("-60 deg", "60 deg"))
    >>> fit = balance.fit_springs(mech, preload="none")
    >>> round(fit.residual.worst_fraction, 4)
    0.0965
    """
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"mechanism must be a Mechanism, got {mechanism!r}")
    if norm not in ("minimax", "rms"):
        raise InputError(f"norm must be 'minimax' or 'rms', got {norm!r}")
    if preload not in ("spring", "mount", "none"):
        raise InputError(f"preload must be 'spring', 'mount' or 'none', got {preload!r}")
    if gravity is not None:
        mechanism = attrs.evolve(mechanism, gravity=gravity)
    free = list(mounts_to_fit(mechanism, fixed))
    if not free:
        count = len(mechanism.springs)
        raise InputError(f"mechanism must have a spring to fit, got {count} mounts of which {count} stay fixed")
    q = poses_over(mechanism, over)
    size = residual(mechanism.with_springs(()), q).peak_gravity_torque
    found = best_amounts(mechanism, free, q, norm=norm, preload=preload)
    left = np.abs(np.broadcast_to(found.mechanism.holding_torque(q), q.shape))
    worst = np.max(left)
    held = norm == "minimax" and worst > ROUNDING * size
    equal = tuple(float(x) for x in q[left >= worst * (1 - 1e-6)]) if held else ()
    return SpringFit(found.mechanism, norm, residual(found.mechanism, q), found.left_out, found.settled, equal[:8])

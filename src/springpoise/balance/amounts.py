"""How much of each spring: the linear program, or the least squares, behind a fit."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.errors import InputError, NoSolution
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs import CompressionSpring, ExtensionSpring, ScaledSpring, TorsionSpring, ZeroLengthSpring
from springpoise.tables import degrees

__all__ = ["Found", "best_amounts", "preloads", "solved_shares"]

Array = NDArray[np.float64]

MOST_ROUNDS = 40
"""How often the set of poses in which each spring pulls is guessed again before the fit gives up on it."""

STARTS = 9
"""From how many rigid lengths a fit of rigid lengths sets out: which springs go slack where makes it uneven."""

NOTHING = 1e-9
"""A spring whose share of the holding torque is nowhere more than this [1] is best left out."""

ROUNDING = 1e-13
"""A torque below this share of its parts [1] is none: the mechanism is balanced already."""

SOFTEST = 1e-6
"""Least share of a spring whose initial tension stays [1]: it cannot have tension and no rate."""

MOST_WOUND = 4.0 * math.pi
"""A torsion spring is wound or unwound by no more than two turns [rad]."""

WIDEST_ANGLE = 12.5
"""Its free angle stays within this of zero [rad], just below two turns: greater ones are taken for degrees."""


class Found(NamedTuple):
    """What a fit came to."""

    size: float
    """The norm of the residual [N·m]."""
    mechanism: Mechanism
    left_out: tuple[str, ...]
    settled: bool


class _Columns(NamedTuple):
    """One mount's holding torque: ``fixed + terms @ rays @ shares``, for shares that are not negative."""

    fixed: Array
    terms: Array
    rays: Array
    """What the unknowns are for a unit of each share."""
    pulling: NDArray[np.bool_]


def best_amounts(mechanism: Mechanism, free: list[int], q: Array, *, norm: str, preload: str) -> Found:
    """The mechanism with the best strengths and preloads of the mounts numbered in ``free``."""
    mounts = {i: _sizable(mechanism.springs[i], preload, mechanism.mount_name(i)) for i in free}
    task = _Task(mechanism, free, q, norm, preload)
    for i in free:  # a spring that cannot do arrays is named here, before it is wrapped
        mechanism.springs[i].ask("load", mechanism.springs[i].spring_length(mechanism.linkage, q))
    best = task.best_of(mounts)
    # An initial tension that stays comes with its spring whole or not at all.
    heavy = [i for i, mount in mounts.items() if np.any(task.columns(mount).fixed)]
    dropped = True
    while dropped:
        dropped = False
        for i in heavy:
            if i in mounts:
                found = task.best_of({k: mount for k, mount in mounts.items() if k != i})
                if found.size < best.size:
                    best, dropped = found, True
                    del mounts[i]
    return best


def _sizable(mount: SpringMount, preload: str, name: str) -> SpringMount:
    """The mount with a spring whose strength can be chosen."""
    spring: Any = mount.spring
    if not (hasattr(spring, "load_terms") and hasattr(spring, "tuned")):
        spring = ScaledSpring(spring, 1.0)
    if preload == "mount" and not isinstance(spring, ZeroLengthSpring | ExtensionSpring | CompressionSpring):
        raise InputError(
            f"preload must be 'spring' or 'none' where a mount holds a {type(mount.spring).__name__} ({name}), "
            "got 'mount'"
        )
    return attrs.evolve(mount, spring=spring)


@attrs.frozen
class _Task:
    """One fit: the same for all rounds."""

    mechanism: Mechanism
    free: list[int]
    q: Array
    norm: str
    preload: str
    target: Array = attrs.field(init=False)
    """Holding torque without the mounts that are fitted [N·m], shape (poses,)."""
    parts: float = attrs.field(init=False)
    """Greatest torque among those that it is the sum of [N·m]: what its rounding is measured with."""

    def __attrs_post_init__(self) -> None:
        held = self.mechanism.with_springs([m for i, m in enumerate(self.mechanism.springs) if i not in self.free])
        torque = np.broadcast_to(held.holding_torque(self.q), self.q.shape)
        object.__setattr__(self, "target", self._finite(torque, "mechanism.holding_torque"))
        pulled = np.abs(np.broadcast_to(held.gravity_torque(self.q), self.q.shape))
        object.__setattr__(self, "parts", float(max(np.max(pulled), np.max(np.abs(torque)))))

    def best_of(self, mounts: dict[int, SpringMount]) -> Found:
        """The best fit of these mounts, the other free ones being left out, from all starts."""
        if not mounts:
            return self._found({}, settled=True)
        return min((self._settle(start) for start in self._starts(mounts)), key=lambda found: found.size)

    def columns(self, mount: SpringMount) -> _Columns:
        """The mount's share of the holding torque, for the poses in which its spring pulls as it stands."""
        spring: Any = mount.spring
        linkage, q = self.mechanism.linkage, self.q
        x = self._finite(np.broadcast_to(mount.spring_length(linkage, q), q.shape), "path.length")
        lever = mount.count * np.broadcast_to(mount.path.gradient(linkage, q)[0], q.shape)
        self._finite(lever, "path.gradient")
        pulling = np.broadcast_to(np.asarray(mount.ask("stiffness", x)) != 0, q.shape)
        parts = mount.ask("load_terms", x, preload=self.preload == "spring")
        terms = [np.broadcast_to(term * lever, q.shape) for term in parts.terms]
        if self.preload == "mount":
            # With w = rate · rigid_length as the second unknown the load stays linear in both.
            terms = [terms[0] + mount.rigid_length * pulling * lever, -(pulling * lever)]
            rays = np.array([[1.0, 1.0], self._rigid_lengths(mount)])
        elif self.preload == "spring" and isinstance(spring, TorsionSpring):
            # Any free angle between two is a mixture of them.
            rays = np.array([[1.0, 1.0], preloads(x)])
        else:
            unit = np.eye(len(terms))
            rays = np.concatenate([unit, -unit[:, np.asarray(parts.may_be_negative, dtype=bool)]], axis=1)
        fixed = np.broadcast_to(np.asarray(parts.fixed * lever), q.shape)
        return _Columns(fixed, np.stack(terms, axis=1), rays, pulling)

    def _rigid_lengths(self, mount: SpringMount) -> tuple[float, float]:
        """Least and greatest rigid length that is worth a thought."""
        spring: Any = mount.spring
        length = mount.path.length(self.mechanism.linkage, self.q)
        if isinstance(spring, CompressionSpring):
            return float(np.min(length) - spring.free_length), float(np.min(length) - spring.solid_length)
        return 0.0, max(0.0, float(np.max(length) - getattr(spring, "free_length", 0.0)))

    def _starts(self, mounts: dict[int, SpringMount]) -> Iterator[dict[int, SpringMount]]:
        """As the mounts are, and for rigid lengths also from springs that pull everywhere to ones that do not."""
        yield mounts
        if self.preload == "mount":
            ends = {i: self._rigid_lengths(mount) for i, mount in mounts.items()}
            for share in np.linspace(0.0, 1.0, STARTS):
                yield {
                    i: attrs.evolve(mount, rigid_length=float((1 - share) * ends[i][0] + share * ends[i][1]))
                    for i, mount in mounts.items()
                }

    def _settle(self, mounts: dict[int, SpringMount]) -> Found:
        """Fit again until the poses in which each spring pulls are those that the fit assumed."""
        best: Found | None = None
        seen: set[bytes] = set()
        columns = {i: self.columns(mount) for i, mount in mounts.items()}
        for _ in range(MOST_ROUNDS):
            assumed = b"".join(c.pulling.tobytes() for c in columns.values())
            seen.add(assumed)
            tuned = self._tuned(mounts, columns)
            mounts = {**mounts, **tuned}
            columns = {i: self.columns(mount) for i, mount in mounts.items()}
            pulling = b"".join(c.pulling.tobytes() for c in columns.values())
            found = self._found(tuned, settled=pulling == assumed)
            if best is None or found.size < best.size or (found.settled and found.size <= best.size * (1 + NOTHING)):
                best = found
            if pulling in seen:  # it has settled, or goes round in a circle
                break
        assert best is not None
        return best

    def _tuned(self, mounts: dict[int, SpringMount], columns: dict[int, _Columns]) -> dict[int, SpringMount]:
        """The mounts with their best amounts, without those that are best left out."""
        rest = self.target + sum(c.fixed for c in columns.values())
        size = float(np.max(np.abs(rest)))
        if size <= ROUNDING * self.parts:
            return {}
        matrix = np.concatenate([c.terms @ c.rays for c in columns.values()], axis=1) / size
        scales = np.max(np.abs(matrix), axis=0)
        scales[scales == 0] = 1.0
        least = np.concatenate([np.eye(c.rays.shape[1])[0] * SOFTEST * bool(np.any(c.fixed)) for c in columns.values()])
        scaled = matrix / scales
        shares = (least + solved_shares(scaled, -rest / size - scaled @ least, self.norm)) / scales
        tuned = {}
        for i, own in columns.items():
            amounts = own.rays @ shares[: own.rays.shape[1]]
            shares = shares[own.rays.shape[1] :]
            if np.max(np.abs(own.terms @ amounts)) > NOTHING * size:
                tuned[i] = self._with_amounts(mounts[i], amounts)
        return tuned

    def _with_amounts(self, mount: SpringMount, amounts: Array) -> SpringMount:
        spring: Any = mount.spring
        if self.preload == "mount":
            rate, preload = amounts.tolist()
            return attrs.evolve(mount, spring=spring.tuned((rate,), preload=False), rigid_length=preload / rate)
        return attrs.evolve(mount, spring=spring.tuned(tuple(amounts.tolist()), preload=self.preload == "spring"))

    def _found(self, tuned: dict[int, SpringMount], *, settled: bool) -> Found:
        mechanism, free = self.mechanism, self.free
        left_out = tuple(mechanism.mount_name(i) for i in free if i not in tuned)
        mounts = [tuned.get(i, mount) for i, mount in enumerate(mechanism.springs) if i not in free or i in tuned]
        fitted = mechanism.with_springs(mounts)
        left = np.broadcast_to(fitted.holding_torque(self.q), self.q.shape)
        size = np.max(np.abs(left)) if self.norm == "minimax" else math.sqrt(np.mean(left**2))
        return Found(float(size), fitted, left_out, settled)

    def _finite(self, values: Array, what: str) -> Array:
        if not np.all(np.isfinite(values)):
            bad = self.q[~np.isfinite(values)][0]
            raise InputError(
                f"{what} must be finite over the poses, got NaN at {degrees(bad)}; "
                "is an end of a cable inside a disc there?"
            )
        return values


def preloads(x: Array) -> tuple[float, float]:
    """Greatest and least torque at angle zero of a torsion spring of rate one that takes the angles ``x`` [rad]."""
    lowest = max(float(np.max(x)) - MOST_WOUND, -WIDEST_ANGLE)
    highest = min(float(np.min(x)) + MOST_WOUND, WIDEST_ANGLE)
    return -min(lowest, highest), -max(lowest, highest)


def solved_shares(matrix: Array, goal: Array, norm: str) -> Array:
    """Shares, none of them negative, that bring ``matrix @ shares`` closest to ``goal``."""
    import scipy.optimize

    if norm == "rms":
        return np.asarray(scipy.optimize.nnls(matrix, goal, maxiter=1000)[0])
    ones = np.ones((goal.size, 1))
    program = scipy.optimize.linprog(
        np.append(np.zeros(matrix.shape[1]), 1.0),
        A_ub=np.block([[matrix, -ones], [-matrix, -ones]]),
        b_ub=np.concatenate([goal, -goal]),
        method="highs-ds",
        options={"primal_feasibility_tolerance": 1e-10, "dual_feasibility_tolerance": 1e-10},
    )
    if program.x is None:
        raise NoSolution(f"the linear program of the fit found no end: {program.message}")
    return np.asarray(program.x[:-1])

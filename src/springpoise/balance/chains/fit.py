"""Real springs on a chain: best rates and preloads for fixed mounts, joint by joint over sampled poses."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, Literal

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance.chains.columns import Columns, columns_of, with_amounts
from springpoise.balance.chains.result import ChainBalance
from springpoise.errors import InputError, InputTypeError, NoSolution
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.mechanism.travel import joint_units_of
from springpoise.springs import ExtensionSpring
from springpoise.tables import facts, grid, millimetres, number

__all__ = ["ChainFit", "JointResidual", "fit_chain", "joint_residuals", "with_real_springs"]

Array = NDArray[np.float64]

POSES = 600
MOST_ROUNDS = 30
"""How often the set of poses in which each spring pulls is guessed again before the fit gives up on it."""

NOTHING = 1e-9
"""A spring whose share of every torque is nowhere more than this [1] is best left out."""


@attrs.frozen
class JointResidual:
    """What springs leave over at one joint, over some poses."""

    name: str
    """Name of the joint."""
    worst: float
    """Greatest magnitude of the holding torque [N·m, or N for a prismatic joint], >= 0."""
    worst_at: tuple[float, ...]
    """The pose where it occurs [rad, or m]."""
    rms: float
    """Root of the mean square of the holding torque [N·m, or N]."""
    peak_gravity_torque: float
    """Greatest magnitude of the gravity torque over the same poses [N·m, or N]."""
    unit: str = "N*m"
    """``"N*m"``, or ``"N"`` for a prismatic joint."""

    @property
    def worst_fraction(self) -> float:
        """``worst`` over the peak gravity torque [1]; NaN where gravity does nothing."""
        return self.worst / self.peak_gravity_torque if self.peak_gravity_torque > 0 else float("nan")


def joint_residuals(mechanism: Mechanism, over: Any = None) -> tuple[JointResidual, ...]:
    """How far a mechanism is from balanced, joint by joint.

    Parameters
    ----------
    mechanism
        The mechanism, with its springs.
    over
        Poses [rad, or m], shape (poses, n); None for 600 poses over the travel.

    Raises
    ------
    InputError
        Poses of another shape or that are not finite.
    """
    q = _poses(mechanism, over)
    torque, gravity = (_by_joint(value, q) for value in (mechanism.holding_torque(q), mechanism.gravity_torque(q)))
    if not np.all(np.isfinite(torque)):
        bad = q[~np.all(np.isfinite(torque), axis=1)][0]
        raise InputError(f"mechanism.holding_torque must be finite over the poses, got NaN at {np.atleast_1d(bad)}")
    names = getattr(mechanism.linkage, "joint_names", None) or [f"joint {i + 1}" for i in range(torque.shape[1])]
    found = []
    for i, (name, kind) in enumerate(zip(names, joint_units_of(mechanism.linkage), strict=True)):
        at = int(np.argmax(np.abs(torque[:, i])))
        found.append(
            JointResidual(
                name=name,
                worst=float(abs(torque[at, i])),
                worst_at=tuple(float(v) for v in np.atleast_1d(q[at])),
                rms=float(np.sqrt(np.mean(torque[:, i] ** 2))),
                peak_gravity_torque=float(np.max(np.abs(gravity[:, i]))),
                unit="N" if kind == "m" else "N*m",
            )
        )
    return tuple(found)


@attrs.frozen
class ChainFit:
    """Springs fitted to fixed mounts on a linkage of several joints."""

    mechanism: Mechanism
    """The mechanism with the fitted springs; mounts that are best left out are gone."""
    norm: str
    """What was made least: ``"minimax"`` or ``"rms"``, over all joints and poses [N·m]."""
    joints: tuple[JointResidual, ...]
    """What is left over at each joint."""
    left_out: tuple[str, ...]
    """Names of the mounts that are best left out."""
    settled: bool
    """Whether the poses in which each spring pulls are those that the fit assumed."""
    slack: tuple[str, ...]
    """Names of the mounts whose spring hangs slack at some of the poses."""
    overstretched: tuple[str, ...]
    """Names of the mounts whose spring is drawn out too far at some of the poses."""

    @property
    def success(self) -> bool:
        """Whether the fit settled on at least one spring, and none is drawn out too far."""
        return self.settled and bool(self.mechanism.springs) and not self.overstretched

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if not self.mechanism.springs:
            return "no spring at these mounts makes the residual smaller"
        if not self.settled:
            return (
                "the poses in which the springs go slack did not settle; this is the best fit seen on the way; "
                "less initial tension, or a longer way to the end, keeps them taut"
            )
        text = f"the least {'worst' if self.norm == 'minimax' else 'rms'} residual at these mounts and poses"
        if self.overstretched:
            text += f"; but drawn out too far: {', '.join(self.overstretched)}"
        return text + (f"; slack at some poses: {', '.join(self.slack)}" if self.slack else "")

    def require(self) -> ChainFit:
        """The result itself, or an error where it is none.

        Raises
        ------
        NoSolution
            No spring helps, the fit did not settle, or a spring is drawn out too far.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def __str__(self) -> str:
        joints = [
            [j.name, number(j.worst, j.unit), f"{100 * j.worst_fraction:.2f} %", number(j.rms, j.unit)]
            for j in self.joints
        ]
        q = _poses(self.mechanism, None)
        springs = []
        for mount, state in zip(self.mechanism.springs, self.mechanism.spring_states(q), strict=True):
            spring: Any = mount.spring
            tension = getattr(spring, "initial_tension", 0.0)
            springs.append(
                [
                    state.name,
                    number(getattr(spring, "rate", float("nan")), "1"),
                    number(tension, "1") if tension else "0",
                    millimetres(mount.rigid_length).removesuffix(" mm") if mount.rigid_length else "0",
                    f"{1e3 * np.min(state.length):.1f} to {1e3 * np.max(state.length):.1f}",
                    f"{np.min(state.load):.1f} to {np.max(state.load):.1f}",
                ]
            )
        rows = [("status", self.status), *[("left out", name) for name in self.left_out]]
        return (
            f"chain fit ({self.norm})\n{facts(rows)}\n"
            + grid(["joint", "worst residual", "of peak gravity", "rms"], joints)
            + "\n"
            + grid(["spring", "rate N/m", "tension N", "rigid mm", "length mm", "load N"], springs)
        )


def fit_chain(
    mechanism: Mechanism,
    *,
    norm: Literal["minimax", "rms"] = "minimax",
    over: Any = None,
    preload: Literal["spring", "mount", "none"] = "spring",
) -> ChainFit:
    """Best rates and preloads for fixed mounts on a linkage of any number of joints.

    The torques of all joints at all poses are linear in them as long as each spring pulls in the
    same poses; the fit is repeated until those come out.

    Parameters
    ----------
    mechanism
        The mechanism with its mounts: extension springs and springs of zero free length.
    norm
        ``"minimax"`` makes the worst torque at any joint least, ``"rms"`` the root mean square of all.
    over
        Poses [rad, or m], shape (poses, n); None for 600 poses over the travel.
    preload
        ``"spring"``: initial tensions are chosen, from 0 to what zero free length needs. ``"mount"``:
        they stay, and each mount's ``rigid_length`` is chosen, where a cable or eyelet makes room;
        negative where part of the spring lies behind the start of its path. ``"none"``: rates alone.

    Returns
    -------
    ChainFit

    Raises
    ------
    InputError, InputTypeError
        An unknown norm or preload, no spring, a spring of another kind, poses of another shape.

    Examples
    --------
    >>> from springpoise import Body, ExtensionSpring, Mechanism, Point, SpringMount, Straight
    >>> from springpoise.linkages import Link, PlanarChain
    >>> arm = PlanarChain([Link("upper", Body(1.5, (0.15, 0)), length=0.3), Link("fore", Body(1.0, (0.12, 0)))])
    >>> ends = Point("ground", (0, 0.1)), Point("upper", (0.09, 0))
    >>> mech = Mechanism(arm, springs=SpringMount(ExtensionSpring(500, free_length=0.05), Straight(*ends)),
    ...                  travel=[("-60 deg", "60 deg")] * 2)
    >>> fit = fit_chain(mech, preload="none")
    >>> [joint.name for joint in fit.joints]
    ['upper', 'fore']
    """
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"mechanism must be a Mechanism, got {mechanism!r}")
    if norm not in ("minimax", "rms"):
        raise InputError(f"norm must be 'minimax' or 'rms', got {norm!r}")
    if preload not in ("spring", "mount", "none"):
        raise InputError(f"preload must be 'spring', 'mount' or 'none', got {preload!r}")
    if not mechanism.springs:
        raise InputError("mechanism must have a spring to fit, got none")
    q = _poses(mechanism, over)
    target = -_by_joint(mechanism.gravity_torque(q), q).ravel()
    mounts = {i: attrs.evolve(mount, name=mechanism.mount_name(i)) for i, mount in enumerate(mechanism.springs)}
    best, settled = _settle(mechanism, mounts, q, target, norm, preload)
    fitted = mechanism.with_springs(list(best.values()))
    slack, overstretched = [], []
    for mount in fitted.springs:
        x = np.broadcast_to(mount.spring_length(fitted.linkage, q), len(q))
        low, high = mount.spring.working_range  # type: ignore[attr-defined]
        slack += [str(mount.name)] if np.min(x) < low - 1e-12 else []
        overstretched += [str(mount.name)] if np.max(x) > high + 1e-12 else []
    return ChainFit(
        mechanism=fitted,
        norm=norm,
        joints=joint_residuals(fitted, q),
        left_out=tuple(str(mount.name) for i, mount in mounts.items() if i not in best),
        settled=settled,
        slack=tuple(slack),
        overstretched=tuple(overstretched),
    )


def _settle(
    mechanism: Mechanism, mounts: dict[int, SpringMount], q: Array, target: Array, norm: str, preload: str
) -> tuple[dict[int, SpringMount], bool]:
    """Fit again until the poses in which each spring pulls are those that the fit assumed; the best seen."""
    best: tuple[float, dict[int, SpringMount], bool] | None = None
    seen: set[bytes] = set()
    now = mounts
    columns = {i: columns_of(mechanism.linkage, mount, q, preload) for i, mount in now.items()}
    for _ in range(MOST_ROUNDS):
        assumed = b"".join(c.pulling.tobytes() for c in columns.values())
        seen.add(assumed)
        tuned = _tuned(now, columns, target, norm, preload)
        now = {**now, **tuned}
        columns = {i: columns_of(mechanism.linkage, mount, q, preload) for i, mount in now.items()}
        pulling = b"".join(c.pulling.tobytes() for c in columns.values())
        left = mechanism.with_springs(list(tuned.values())).holding_torque(q)
        size = float(np.max(np.abs(left)) if norm == "minimax" else np.sqrt(np.mean(np.square(left))))
        settled = pulling == assumed
        if best is None or size < best[0] or (settled and size <= best[0] * (1 + NOTHING)):
            best = size, tuned, settled
        if pulling in seen:
            break
    assert best is not None
    return best[1], best[2]


def _tuned(
    mounts: dict[int, SpringMount], columns: dict[int, Columns], target: Array, norm: str, preload: str
) -> dict[int, SpringMount]:
    """The mounts with their best amounts, without those that are best left out."""
    from springpoise.balance.amounts import solved_shares

    rest = target + sum(c.fixed for c in columns.values())
    size = float(np.max(np.abs(rest))) or 1.0
    matrix = np.concatenate([c.terms @ c.rays for c in columns.values()], axis=1) / size
    scales = np.max(np.abs(matrix), axis=0)
    scales[scales == 0] = 1.0
    shares = solved_shares(matrix / scales, -rest / size, norm) / scales
    tuned = {}
    for i, own in columns.items():
        amounts = own.rays @ shares[: own.rays.shape[1]]
        shares = shares[own.rays.shape[1] :]
        if np.max(np.abs(own.terms @ amounts)) > NOTHING * size:
            tuned[i] = with_amounts(mounts[i], amounts, preload)
    return tuned


def _poses(mechanism: Mechanism, over: Any) -> Array:
    joints = mechanism.linkage.joint_count
    q = mechanism.poses(POSES) if over is None else np.asarray(units.poses(over, "over"), dtype=float)
    if q.ndim != (1 if joints == 1 else 2) or (joints > 1 and q.shape[-1] != joints) or not q.size:
        shape = "(poses,)" if joints == 1 else f"(poses, {joints})"
        raise InputError(f"over must be poses of shape {shape} for this linkage, got shape {q.shape}")
    if not np.all(np.isfinite(q)):
        raise InputError(f"over must be finite poses, got {q[~np.isfinite(q)][0]}")
    return q


def _by_joint(values: Any, q: Array) -> Array:
    """Joint results as an array of shape (poses, joints)."""
    flat = np.asarray(values, dtype=float)
    return np.broadcast_to(flat, q.shape).reshape(len(q), -1)


def with_real_springs(
    balance: ChainBalance,
    springs: ExtensionSpring | Sequence[ExtensionSpring],
    *,
    seat: str,
    preload: str | None,
    norm: str,
    over: Any,
) -> ChainFit:
    """See `ChainBalance.with_real_springs`."""
    balance.require()
    ideal = balance.mechanism.springs
    given = (springs,) * len(ideal) if isinstance(springs, ExtensionSpring) else springs
    if not isinstance(given, Sequence) or not all(isinstance(item, ExtensionSpring) for item in given):
        raise InputTypeError(f"springs must be ExtensionSprings, got {springs!r}")
    if len(given) != len(ideal):
        raise InputError(f"springs must be one for all or one for each of {len(ideal)} springs, got {len(given)}")
    if seat not in ("eyelet", "hooks"):
        raise InputError(f"seat must be 'eyelet' or 'hooks', got {seat!r}")
    chosen = ("mount" if seat == "eyelet" else "none") if preload is None else preload
    if seat == "hooks" and chosen == "mount":
        raise InputError("preload must be 'spring' or 'none' with seat 'hooks', got 'mount'; no cable makes room there")
    mounts = []
    for mount, spring in zip(ideal, given, strict=True):
        rate = mount.spring.rate  # type: ignore[attr-defined]
        hidden = spring.free_length - spring.initial_tension / rate if seat == "eyelet" else 0.0
        mounts.append(attrs.evolve(mount, spring=attrs.evolve(spring, rate=rate), rigid_length=-hidden))
    return fit_chain(balance.mechanism.with_springs(mounts), norm=norm, preload=chosen, over=over)  # type: ignore[arg-type]

"""The worst build of all that keep their tolerances."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.mechanism import Mechanism
from springpoise.tables import facts, number
from springpoise.tolerance.box_search import ALL_CORNERS, BoxSearch, Found, curved_inputs, is_linear
from springpoise.tolerance.fields import field_of, replaced
from springpoise.tolerance.recorded import (
    columns_of,
    nominal,
    pose_text,
    poses_of,
    size_of,
    torque_program,
    torque_units,
    torques_of,
)
from springpoise.tolerance.spreads import Spread, Spreads, refuse_unbuildable, spreads_of

__all__ = ["Corners", "corners"]

Array = NDArray[np.float64]


@attrs.frozen(eq=False, kw_only=True)
class Corners:
    """The worst build within a box of tolerances."""

    mechanism: Mechanism
    """The worst build."""
    values: dict[str, float]
    """What its fields are [their units]."""
    drawn: dict[str, float]
    """What they are in the mechanism as drawn [their units]."""
    worst: float
    """Its worst residual [N·m], >= 0."""
    joint: int
    """The joint on which it is, from 0 on."""
    pose: Any
    """The pose at which it is [rad]."""
    nominal: float
    """Worst residual of that joint in the mechanism as drawn [N·m], >= 0."""
    linear: float
    """Worst residual within the box to first order about its middle [N·m], >= 0."""
    shares: tuple[tuple[str, float], ...]
    """What each field or batch adds at that pose, to first order [N·m], >= 0, the dearest first."""
    peak_gravity_torque: float
    """Greatest gravity torque of that joint over the poses [N·m]."""
    exact: bool
    """Whether no build in the box is worse at these poses for certain."""
    certificate: str
    """How the worst build was found, and what that proves."""
    broken: int
    """In how many of the corners that were tried some pose cannot be taken."""

    @property
    def linear_error(self) -> float:
        """How much the true worst residual exceeds that to first order [N·m]; negative where it falls short."""
        return self.worst - self.linear

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.broken:
            return f"{self.broken} corners cannot take some pose; this is the worst of the others"
        return "no build in the box is worse at these poses" if self.exact else "no worse build was found in the box"

    def __str__(self) -> str:
        size, unit = self.peak_gravity_torque, torque_units(self.mechanism)[self.joint]
        share = f" ({100 * self.worst / size:.2f} % of the peak gravity torque)" if size > 0 else ""
        percent = f" ({100 * self.linear_error / self.worst:+.2f} %)" if self.worst > 0 else ""
        rows = [
            ("status", self.status),
            ("searched", self.certificate),
            ("worst residual", f"{number(self.worst, unit)}{share} at {pose_text(self.mechanism, self.pose)}"),
            ("as drawn", number(self.nominal, unit)),
            (
                "to first order",
                f"{number(self.linear, unit)}; the true one differs by {number(self.linear_error, unit)}{percent}",
            ),
        ]
        rows += [(f"share of {name}", number(value, unit)) for name, value in self.shares]
        for name, value in self.values.items():
            own = field_of(self.mechanism, name).unit
            rows.append((f"  {name}", f"{number(value, own)}, drawn {number(self.drawn[name], own)}"))
        return "worst corner\n" + facts(rows)


def corners(
    mechanism: Mechanism,
    spreads: Mapping[str, Spread],
    *,
    over: Any = None,
    sigmas: float = 3.0,
    gravity: Any = None,
) -> Corners:
    """The worst build of all whose numbers stay within their spreads.

    Where the torque is linear in all numbers together, the worst build follows in closed form.
    Otherwise all corners of the box are tried, or, when they are too many, one number after the
    other is turned until no single change makes it worse, at each pose and in both directions; along
    numbers in which the torque is curved, points inside are tried as well. The result
    says which it was.

    Parameters
    ----------
    mechanism
        The mechanism as drawn.
    spreads
        Names of fields with how each of them scatters. A uniform one may reach its ends, a normal
        one ``sigmas`` standard deviations, samples their extremes. A batch moves as one.
    over
        Poses [rad], shape (p,), or (p, n) for n joints; None for 121 over the travel.
    sigmas
        Standard deviations that a normal spread reaches to each side [1], > 0.
    gravity
        Gravity (gx, gy) [m/s²]; None for the mechanism's own.

    Returns
    -------
    Corners

    Raises
    ------
    InputError, InputTypeError, UnitError
        A field that is unknown or cannot vary, or a box that reaches values that cannot be built.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
    >>> mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(858.081875), path))
    >>> found = corners(mech, {"springs[0].spring.rate": Spread.uniform("5 %")}, over=[0.0, 0.5])
    >>> round(found.worst / found.peak_gravity_torque, 6), found.exact
    (0.05, True)
    """
    q = poses_of(mechanism, over)
    resolved = spreads_of(mechanism, spreads)
    reach = units.number(sigmas, "sigmas")
    if not isinstance(reach, float) or not reach > 0.0:
        raise InputError(f"sigmas must be > 0, got {sigmas!r}")
    drawn = nominal(mechanism, q, gravity)
    size = size_of(mechanism, q, gravity)
    box = _Box.of(resolved, reach)
    refuse_unbuildable(mechanism, box.lows, box.highs, resolved.names)
    joints = mechanism.linkage.joint_count
    program = torque_program(mechanism, box.dimensions, box.values, gravity)
    search = BoxSearch(program, columns_of(q), box.dimensions)
    slopes_program = program.derivative(program.inputs[joints:])
    slopes = torques_of(slopes_program, search.poses, [0.0] * box.dimensions)
    slope = np.reshape(np.stack(slopes), (joints, box.dimensions, -1))
    middle = search.targets(joints)
    lean = middle.sign[:, None] * slope[middle.joint, :, middle.pose]
    first_order = middle.value + np.sum(np.abs(lean), axis=1)
    # A corner to begin with; sign(0) would be no corner.
    found = search.at(middle, np.where(lean >= 0.0, 1.0, -1.0))
    if is_linear(program, slopes_program, joints):
        exact, broken = True, 0
        certificate = "the torque is linear in all numbers together: closed form"
    else:
        found, exact, broken, certificate = _searched(search, found, joints, size, resolved)
    weight = np.where(size > 0, size, 1.0)[found.joint]
    best = int(np.argmax(found.value / weight))
    values = {name: float(value) for name, value in box.values(found.points[best].tolist()).items()}
    joint, pose = int(found.joint[best]), int(found.pose[best])
    shares = [(source.key, float(abs(slope[joint, i, pose]))) for i, source in enumerate(resolved.sources)]
    return Corners(
        mechanism=replaced(mechanism, values),
        values=values,
        drawn={name: float(field_of(mechanism, name).value) for name in values},
        worst=float(found.value[best]),
        joint=joint,
        pose=q[pose] if joints > 1 else float(q[pose]),
        nominal=float(np.max(np.abs(drawn[joint]))),
        linear=float(np.max(first_order[found.joint == joint])),
        shares=tuple(sorted(shares, key=lambda share: -share[1])),
        peak_gravity_torque=float(size[joint]),
        exact=exact and not broken,
        certificate=certificate,
        broken=broken,
    )


@attrs.frozen(eq=False)
class _Box:
    """Fields over coordinates from -1 to 1, one for each source."""

    names: tuple[str, ...]
    source: tuple[int, ...]
    lows: Array
    highs: Array
    dimensions: int

    @classmethod
    def of(cls, spreads: Spreads, sigmas: float) -> _Box:
        members = [(i, member) for i, source in enumerate(spreads.sources) for member in source.members]
        ends = np.array([member.box(sigmas) for _, member in members])
        return cls(spreads.names, tuple(i for i, _ in members), ends[:, 0], ends[:, 1], len(spreads.sources))

    def values(self, coordinates: Sequence[Carrier]) -> dict[str, Carrier]:
        middles, halves = 0.5 * (self.lows + self.highs), 0.5 * (self.highs - self.lows)
        return {
            name: float(middle) + float(half) * coordinates[source]
            for name, source, middle, half in zip(self.names, self.source, middles, halves, strict=True)
        }


def _searched(
    search: BoxSearch, found: Found, joints: int, size: Array, spreads: Spreads
) -> tuple[Found, bool, int, str]:
    """The best of the box for each pose and direction, whether that is certain, broken corners, and how it was found."""
    curved, by_formula = curved_inputs(search, joints, size)
    poses, broken = search.poses[0].size, 0
    every = search.variables < 63 and 2**search.variables * poses <= ALL_CORNERS
    if every:
        found, broken = search.all_corners(found)
        how = f"all {2**search.variables} corners at each of {poses} poses"
    else:
        found = search.corner_by_corner(found)
        broken = int(np.count_nonzero(~np.isfinite(found.value)))
        how = f"corner by corner from the best to first order, at each of {poses} poses and in both directions"
    if curved:
        found = search.inside(found, curved)
        names = ", ".join(spreads.sources[i].key for i in curved)
        return found, False, broken, f"{how}, then inside along those in which the torque is curved: {names}"
    why = "by its formula" if by_formula else "at random points of the box and to rounding"
    proof = f"; the torque is linear in each number alone, {why}, so no build inside is worse than the worst corner"
    return found, every and by_formula, broken, how + proof

"""What balancing a chain came to: springs, strokes, loads, and the proof over random poses."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.chains.forms import Skeleton
from springpoise.balance.chains.solve import Strut
from springpoise.balance.chains.springs import ChainSpring
from springpoise.errors import InputError, NoSolution
from springpoise.linkages import FiveBar, FourBar, Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Straight
from springpoise.springs import ZeroLengthSpring
from springpoise.tables import facts, grid, number

if TYPE_CHECKING:
    from springpoise.balance.chains.fit import ChainFit
    from springpoise.springs import ExtensionSpring

__all__ = ["BalancingSpring", "ChainBalance", "balance_of"]

Array = NDArray[np.float64]

RANDOM_POSES, TRAVEL_POSES = 2000, 2001
SWING = 1e-12
"""Share of the greatest energy by which the sum may swing and still counts as constant: rounding [1]."""


@attrs.frozen
class BalancingSpring:
    """One spring of a balanced chain."""

    name: str
    """What it is called."""
    rate: float
    """Spring rate [N/m]; not positive where there is no such spring."""
    first: Point
    """Where it starts [m]."""
    last: Point
    """Where it ends [m]."""
    shortest: float
    """Least length over the travel [m], of the poses that were looked at."""
    longest: float
    """Greatest length over the travel [m], of the poses that were looked at."""
    length_bounds: tuple[float, float]
    """Lengths that it cannot leave, whatever the angles of the links [m]."""

    @property
    def stroke(self) -> float:
        """Difference of its greatest and least length over the travel [m]."""
        return self.longest - self.shortest

    @property
    def load_range(self) -> tuple[float, float]:
        """Least and greatest load over the travel [N]."""
        return self.rate * self.shortest, self.rate * self.longest

    @property
    def peak_energy(self) -> float:
        """Greatest energy stored in it over the travel [J]."""
        return 0.5 * self.rate * self.longest**2


@attrs.frozen
class ChainBalance:
    """Springs of zero free length that balance a chain or loop, or why there are none."""

    mechanism: Mechanism
    """The chain with its springs; without springs where there is no balance."""
    layout: str
    """``"carried"``, ``"direct"`` or ``"ground"``."""
    springs: tuple[BalancingSpring, ...]
    """The springs in the order in which they were asked for, with what was found for them."""
    problems: tuple[str, ...]
    """What came out negative or impossible, and why; empty where the chain is balanced."""
    left_out: tuple[str, ...]
    """Names of springs whose rate came out as zero: nothing is left for them to do."""
    swing: float
    """Difference of greatest and least energy over random poses, springs and gravity together [J]."""
    swing_fraction: float
    """``swing`` over the greatest energy among its parts [1]; about 1e-15 where balanced."""
    stored_energy: float
    """Greatest energy in all springs together over the travel [J]."""
    useful_energy: float
    """Difference of greatest and least gravity energy over the travel [J]: what springs have to give and take."""
    peak_pivot_loads: tuple[tuple[str, float], ...]
    """For each pivot its name and its greatest load over the travel [N], inf at a dead point; empty in space."""
    least_count: int | None
    """Springs that at least are needed, wherever they are: see ``count_statement``; None for loops."""

    @property
    def success(self) -> bool:
        """Whether the energy is the same at all poses, with springs that there can be."""
        return not self.problems

    @property
    def stored_to_useful(self) -> float:
        """Stored energy over useful energy [1]; the nearer to 1, the less the springs work against each other."""
        return self.stored_energy / self.useful_energy if self.useful_energy > 0 else math.nan

    @property
    def count_statement(self) -> str:
        """How many springs there are, and how many there have to be."""
        used = len(self.springs) - len(self.left_out)
        if self.least_count is None:
            return f"{used}, one for each crank; whether fewer could do is not known"
        rule = (
            f"no fewer than {self.least_count} can balance {self.least_count} links that gravity turns, at every pose"
        )
        if used == self.least_count:
            return f"{used}, the least: {rule}"
        return f"{used}; {rule}, and layout 'ground' does it with as many as there are links"

    @property
    def count_proof(self) -> str | None:
        """Why ``least_count`` springs are the least, in words; None for loops.

        With s_j the vector of each spring's shares along link j, weighted by the roots of the rates:
        gravity on link j has to be met, so that s_j is not zero, and no two links may be coupled, so
        that the s_j are orthogonal. Orthogonal vectors that are not zero are no more than they have
        components, one for each spring.
        """
        if self.least_count is None:
            return None
        return (
            "the shares of all springs along a link, weighted by the roots of their rates, make a vector; it is not "
            "zero where gravity turns the link, and the vectors of two links are orthogonal where they are not coupled; "
            "of such vectors there are no more than springs"
        )

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.problems:
            return "not balanced: " + "; ".join(self.problems)
        text = "balanced at every pose, as long as the springs really have zero free length"
        return text + (f"; not needed: {', '.join(self.left_out)}" if self.left_out else "")

    def require(self) -> ChainBalance:
        """The result itself, or an error where there is no balance.

        Raises
        ------
        NoSolution
            A rate came out negative, or an equation cannot be met.
        """
        if not self.success:
            raise NoSolution(self.status)
        return self

    def with_real_springs(
        self,
        springs: ExtensionSpring | Sequence[ExtensionSpring],
        *,
        seat: str = "eyelet",
        preload: str | None = None,
        norm: str = "minimax",
        over: Any = None,
    ) -> ChainFit:
        """The chain with extension springs in place of the ideal ones, fitted again.

        Parameters
        ----------
        springs
            One extension spring for each spring of this result, or one for all; their free lengths,
            initial tensions and greatest lengths count, their rates are chosen anew.
        seat
            ``"eyelet"``: the spring lies behind a small eyelet at its start and a cable goes on to
            its end; its far hook sits the cable's length less ``rigid_length`` behind the eyelet,
            and the cable is longer than the greatest distance from start to end. ``"hooks"``: hooked in straight from start to end.
        preload
            As for `fit_chain`; None for ``"mount"`` behind an eyelet, ``"none"`` between hooks.
        norm, over
            As for `fit_chain`.

        Returns
        -------
        ChainFit
            With what is left over joint by joint.

        Raises
        ------
        InputError, InputTypeError, NoSolution
            Another number of springs than the result has, another seat; this result is none.
        """
        from springpoise.balance.chains.fit import with_real_springs

        return with_real_springs(self, springs, seat=seat, preload=preload, norm=norm, over=over)

    def __str__(self) -> str:
        rows = [("status", self.status), ("springs", self.count_statement)]
        if self.success:
            rows += [
                (
                    "energy swing",
                    f"{number(self.swing, 'J')} over random poses ({self.swing_fraction:.1e} of the whole)",
                ),
                (
                    "stored energy",
                    f"up to {number(self.stored_energy, 'J')}, {number(self.stored_to_useful, '1', 3)} times the "
                    f"{number(self.useful_energy, 'J')} that gravity gives and takes",
                ),
            ]
            rows += [(f"load on {name!r}", f"up to {number(load, 'N')}") for name, load in self.peak_pivot_loads]
        header = ["spring", "rate N/m", "start mm", "end mm", "length mm", "load N"]
        lines = [
            [
                spring.name,
                number(spring.rate, "1"),
                _coordinates(spring.first),
                _coordinates(spring.last),
                f"{1e3 * spring.shortest:.1f} to {1e3 * spring.longest:.1f}",
                f"{spring.load_range[0]:.1f} to {spring.load_range[1]:.1f}" if spring.rate > 0 else "none",
            ]
            for spring in self.springs
        ]
        return f"chain balance ({self.layout})\n{facts(rows)}\n{grid(header, lines)}"


def _coordinates(point: Point) -> str:
    inner = ", ".join(f"{1e3 * float(c) + 0.0:.2f}".replace("-0.00", "0.00") for c in point.at)
    return f"({inner}) on {point.body}"


def balance_of(
    mechanism: Mechanism,
    skeleton: Skeleton,
    layout: str,
    wanted: Sequence[ChainSpring],
    struts: Sequence[Strut],
    problems: tuple[str, ...],
) -> ChainBalance:
    """The result for springs whose numbers are all known, with its proof."""
    travel = _poses(mechanism, skeleton, TRAVEL_POSES, random=False)
    rows, mounts, left_out = [], [], []
    for spring, strut in zip(wanted, struts, strict=True):
        first, last = _ends(spring, strut, skeleton)
        path, rate = Straight(first, last), strut.rate or 0.0
        lengths = np.broadcast_to(path.length(mechanism.linkage, travel), len(travel))
        parts = [abs(strut.vector(index) or 0.0) for index in range(strut.between.size)]
        low, high = max(0.0, 2.0 * max(parts) - sum(parts)), sum(parts)
        rows.append(
            BalancingSpring(strut.name, rate, first, last, float(lengths.min()), float(lengths.max()), (low, high))
        )
        if rate > 0:
            mounts.append(SpringMount(ZeroLengthSpring(rate), path, name=strut.name))
        elif rate == 0:
            left_out.append(strut.name)
    swing = share = stored = math.nan
    loads: tuple[tuple[str, float], ...] = ()
    useful = float(np.ptp(mechanism.energy(travel)))
    if not problems:
        mechanism = mechanism.with_springs(mounts)
        at_random = _poses(mechanism, skeleton, RANDOM_POSES, random=True)
        total, springs = mechanism.energy(at_random), mechanism.spring_energy(at_random)
        swing = float(np.ptp(total))
        share = swing / float(np.max(np.abs([springs, total - springs])))
        stored = float(np.max(mechanism.spring_energy(travel)))
        if not share <= SWING:
            problems = (
                f"the energy still swings by {swing:.3g} J, {share:.1e} of the whole; some numbers differ too far",
            )
        if getattr(skeleton.linkage, "pivots", ()):
            at_pivots = np.asarray(mechanism.pivot_load(travel)).reshape(len(travel), -1)
            peaks = np.max(np.where(np.isnan(at_pivots), math.inf, at_pivots), axis=0)  # no limit at a dead point
            loads = tuple(zip(skeleton.linkage.pivots, map(float, peaks), strict=True))
    loop = isinstance(skeleton.linkage, FourBar | FiveBar)
    heavy = int(np.sum(np.abs(skeleton.moments[1:]) > 1e-13 * skeleton.scale))
    return ChainBalance(
        mechanism=mechanism,
        layout=layout,
        springs=tuple(rows),
        problems=problems,
        left_out=tuple(left_out),
        swing=swing,
        swing_fraction=share,
        stored_energy=stored,
        useful_energy=useful,
        peak_pivot_loads=loads,
        least_count=None if loop else heavy,
    )


def _ends(spring: ChainSpring, strut: Strut, skeleton: Skeleton) -> tuple[Point, Point]:
    origin = 0j
    if skeleton.is_level(spring.first):
        link = skeleton.next_link(spring.first, spring.last)
        assert link is not None
        origin = skeleton.joint_on(spring.first, link)
    start = origin + (strut.start or 0j)
    return skeleton.place(spring.first, start), skeleton.place(spring.last, strut.end or 0j)


def _poses(mechanism: Mechanism, skeleton: Skeleton, count: int, *, random: bool) -> Array:
    """Poses over the travel, or at random over full turns where the linkage can stand at all of them."""
    linkage = skeleton.linkage
    joints = linkage.joint_count
    loop = isinstance(linkage, FourBar | FiveBar)
    if random and not loop:
        rng = np.random.default_rng(0)
        return rng.uniform(-math.pi, math.pi, (count, joints) if joints > 1 else count)
    if random:
        low, high = np.array(mechanism.travel_or_turn, dtype=float).reshape(joints, 2).T
        q = np.random.default_rng(0).uniform(low, high, (count, joints))[:, 0 if joints == 1 else slice(None)]
    else:
        q = mechanism.poses(count)
    if not loop:
        return q
    stands = np.asarray(linkage.missing(q)) <= 0.0
    if isinstance(linkage, FiveBar):
        stands &= _is_parallelogram(linkage, q)
    if not np.any(stands) or (mechanism.travel is not None and not np.all(stands)):
        bad = q[~stands][0]
        raise InputError(
            f"Mechanism.travel must be where the {type(linkage).__name__} stands on its branch, got a pose at which it does "
            f"not: {', '.join(f'{math.degrees(a):.4g} deg' for a in np.atleast_1d(bad))}"
        )
    return np.asarray(q[stands])


def _is_parallelogram(linkage: FiveBar, q: Array) -> NDArray[np.bool_]:
    """Where the far joint is opposite to the common pivot, and not folded over to the other branch."""
    ends = [linkage.position(Point(k.name, (k.length, 0.0)), q) for k in (linkage.first_crank, linkage.second_crank)]
    coupler = linkage.first_coupler
    joint = linkage.position(Point(coupler.name, (coupler.length, 0.0)), q)
    off = np.hypot(*(j - a - b for j, a, b in zip(joint, *ends, strict=True)))
    return np.asarray(off <= 1e-6 * (coupler.length + linkage.first_crank.length))

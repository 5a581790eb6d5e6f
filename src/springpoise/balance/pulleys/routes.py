"""Ways to lead a spring's cable round a pulley at the anchor of an arm."""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from typing import Any

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.fit import fit_springs
from springpoise.balance.residuals import Residual, residual
from springpoise.balance.sine import SineMatch
from springpoise.errors import InputError
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, Disc, Drum, Straight
from springpoise.springs import ZeroLengthSpring
from springpoise.tables import degrees, millimetres, number

__all__ = ["PulleyRemedy", "Routes"]

Array = NDArray[np.float64]

FARTHEST_SHIFT = 2.0
"""A best shift is looked for within this many radii to either side [1]."""

MOST_ON = 1.5 * math.pi
"""Over more than this a cable that lies on a drum is taken for one that has come off its tie [rad]."""

LYING_ON = 0.97 * MOST_ON
"""By so much what lies on a drum may change [rad]."""

FAR_BEYOND = 0.1
"""Share of the cable's swing by which it may go beyond its directions at the ends of the poses [1]."""

APART = 1.0 + 1e-12
"""Two rollers that touch stand so little apart that rounding does not push the one into the other [1]."""


@attrs.frozen
class PulleyRemedy:
    """One thing that can be done about a pulley's radius."""

    name: str
    """What it is called in the table."""
    change: str
    """What has to be made differently, in words, with the numbers."""
    mechanism: Mechanism
    """The mechanism with it."""
    rate_ratio: float
    """Rate of all springs together over the ideal rate [1]."""
    shift: float
    """How far the pulley's centre moves to the right of the line from pivot to anchor [m]."""
    cable_change: float
    """How much longer the cable is cut than for the stretch that the ideal spring has at ``set_at`` [m]."""
    residual: Residual
    """What is left over the poses."""


@attrs.frozen
class Routes:
    """Ways to lead the cable, all for one arm and one pulley."""

    bare: Mechanism
    """The mechanism without the spring."""
    ideal: SineMatch
    """The balance with a pulley of no size."""
    radius: float
    """Radius at which the middle of the cable runs [m]."""
    q: Array
    """Poses [rad]."""
    set_at: float
    """Pose at which the stretch is set [rad]."""

    @property
    def anchor(self) -> complex:
        """Where the anchor is on the ground [m]."""
        return self._ends[0]

    @property
    def attach(self) -> complex:
        """Where the attachment is on the arm [m]."""
        return self._ends[1]

    @property
    def _ends(self) -> tuple[complex, complex]:
        path: Any = self.ideal.mechanism.springs[-1].path
        return complex(*path.first.at), complex(*path.last.at)

    @property
    def upward(self) -> complex:
        """Unit direction from pivot to anchor."""
        return self.anchor / abs(self.anchor)

    @property
    def entry(self) -> float:
        """Middle of the straight cable's directions [rad]: of those at both ends of the poses, or of all.

        Of all where the cable swings far beyond its directions at the ends, as it does for an arm that goes
        over the top.
        """
        directions = np.unwrap(np.angle(self.reach(self.swept)))
        ends, least, most = directions[[0, -1]], float(directions.min()), float(directions.max())
        beyond = max(float(ends.min()) - least, most - float(ends.max()))
        middle = 0.5 * (least + most) if beyond > FAR_BEYOND * (most - least) else 0.5 * float(ends.sum())
        return math.remainder(middle, 2.0 * math.pi)

    @property
    def swept(self) -> Array:
        """Poses close together over the range of the poses [rad]."""
        return np.linspace(self.q.min(), self.q.max(), 361)

    def reach(self, q: Any, shift: float = 0.0) -> Any:
        """From the pulley's centre to the attachment [m], as complex numbers."""
        return self.attach * np.exp(1j * np.asarray(q)) - self.centre(shift)

    def centre(self, shift: float) -> complex:
        """The pulley's centre, moved to the right of the line from pivot to anchor."""
        return self.anchor - 1j * shift * self.upward

    def first_order(self) -> float:
        """Worst of |d/dθ [d (β - β0)]| · k over the peak gravity torque [1/m]."""
        swept = np.linspace(self.q.min(), self.q.max(), 3601)
        z = self.reach(swept)
        moved = 1j * self.attach * np.exp(1j * swept)
        d = np.abs(z)
        turned = np.unwrap(np.angle(z))
        turned = turned - float(np.interp(self.set_at, swept, turned))
        slope = np.real(np.conj(z) * moved) / d * turned + np.imag(np.conj(z) * moved) / d
        return float(self.ideal.rate * np.max(np.abs(slope)) / self._peak)

    @property
    def _peak(self) -> float:
        return float(np.max(np.abs(self.bare.gravity_torque(self.q))))

    def _set(self, path: Cable, rate: float, stretch: float, at: float) -> SpringMount:
        """A spring whose stretch is as given at a pose."""
        rigid = float(path.length(self.bare.linkage, at)) - stretch
        return SpringMount(ZeroLengthSpring(rate), path, rigid_length=rigid)

    def _spring_end(self, turn: str, shift: float) -> complex:
        """Where the spring's end lies, so that a quarter turn is wrapped in the middle of the poses."""
        sense = 1.0 if turn == "cw" else -1.0
        z = self.reach(self.swept, shift)
        touch = np.unwrap(np.angle(z)) + sense * np.arccos(np.minimum(self.radius / np.abs(z), 1.0))
        if not np.ptp(touch) < 0.95 * math.pi:
            raise InputError(
                "over must be poses over which the cable turns round the pulley by less than half a turn, got "
                f"{degrees(float(self.q.min()))} to {degrees(float(self.q.max()))}"
            )
        leaving = 0.5 * float(touch.min() + touch.max()) + sense * math.pi / 2
        far = abs(self.anchor) + abs(self.attach)
        return self.centre(shift) + cmath.rect(self.radius, leaving) + cmath.rect(far, leaving + sense * math.pi / 2)

    def _run(self, turn: str, shift: float) -> Cable:
        """Spring, pulley, arm."""
        disc = Disc(_on("ground", self.centre(shift)), radius=self.radius, turn=turn)
        return Cable(_on("ground", self._spring_end(turn, shift)), disc, _on("arm", self.attach))

    def pulley(self, turn: str, rate: float, shift: float = 0.0) -> SpringMount:
        """One pulley, the stretch set to the distance from anchor to attachment at ``set_at``."""
        return self._set(self._run(turn, shift), rate, float(abs(self.reach(self.set_at))), self.set_at)

    def rollers(self) -> SpringMount:
        """Two rollers that touch at the anchor, the cable between them along the mean direction."""
        along, across = cmath.rect(1.0, self.entry), cmath.rect(1.0, self.entry + math.pi / 2)
        far = abs(self.anchor) + abs(self.attach)
        discs = [
            Disc(_on("ground", self.anchor + way * APART * self.radius * across), radius=self.radius, turn=turn)
            for way, turn in ((1.0, "ccw"), (-1.0, "cw"))
        ]
        path = Cable(_on("ground", self.anchor - far * along), *discs, _on("arm", self.attach))
        return SpringMount(ZeroLengthSpring(self.ideal.rate), path, rigid_length=far)

    def kept(self) -> SpringMount:
        """Equal pulleys at both ends that keep their direction: what one winds up the other lets out."""
        path = Straight(_on("ground", self.anchor), _on("arm", self.attach))
        return SpringMount(ZeroLengthSpring(self.ideal.rate), path)

    def drums(self, turn: str) -> SpringMount | None:
        """Equal pulleys at both ends, the far one fixed to the arm, and a drum on the joint at the other end.

        None where the cable would turn on or off one of them by more than it can lie on.
        """
        sense = 1.0 if turn == "cw" else -1.0
        guide = self._spring_end(turn, 0.0)
        # Where the cable meets the two, in the arm's frame; it lies on from there to its tie.
        leaving = cmath.phase(guide) + sense * math.acos(self.radius / abs(guide)) - self.swept
        arriving = np.unwrap(np.angle(self.reach(self.swept))) + sense * math.pi / 2 - self.swept
        if max(np.ptp(leaving), np.ptp(arriving)) > LYING_ON:
            return None
        near, far = (0.5 * float(at.min() + at.max()) for at in (leaving, arriving))
        path = Cable(
            Drum(_on("arm", 0.0), radius=self.radius, turn=turn, tie=_turned(near + sense * 0.5 * MOST_ON)),
            _on("ground", guide),
            Disc(_on("ground", self.anchor), radius=self.radius, turn=turn),
            Drum(_on("arm", self.attach), radius=self.radius, turn=turn, tie=_turned(far - sense * 0.5 * MOST_ON)),
        )
        return self._set(path, self.ideal.rate, float(abs(self.reach(self.set_at))), self.set_at)

    def best_shift(self, turn: str) -> float:
        """Shift of the pulley's centre that leaves the least, with rate and cable refitted by least squares [m]."""
        from scipy.optimize import minimize_scalar

        target = np.broadcast_to(self.bare.holding_torque(self.q), self.q.shape)

        def left(shift: float) -> float:
            if not np.min(np.abs(self.reach(self.q, shift))) > self.radius:
                return math.inf
            path, arm = self._run(turn, shift), self.bare.linkage
            lever = -path.gradient(arm, self.q)[0]
            columns = np.stack([path.length(arm, self.q) * lever, lever], axis=1)
            shares = np.linalg.lstsq(columns, target, rcond=None)[0]
            return float(np.linalg.norm(columns @ shares - target))

        tried = self.radius * np.linspace(-FARTHEST_SHIFT, FARTHEST_SHIFT, 41)
        start = float(tried[int(np.argmin([left(float(shift)) for shift in tried]))])
        step = float(tried[1] - tried[0])
        options = {"xatol": 1e-10}
        found: Any = minimize_scalar(left, bounds=(start - step, start + step), method="bounded", options=options)
        return float(found.x)

    def refitted(self, name: str, turn: str, shift: float, norm: Any) -> PulleyRemedy:
        """One pulley with the best rate and length of cable."""
        mounts = (*self.bare.springs, self.pulley(turn, self.ideal.rate, shift))
        fit = fit_springs(
            self.bare.with_springs(mounts),
            norm=norm,
            preload="mount",
            over=self.q,
            fixed=list(range(len(self.bare.springs))),
        )
        change = f"pulley {_sideways(shift)}; " if shift else ""
        if len(fit.mechanism.springs) < len(mounts):
            return self._remedy(name, change + "no spring helps", fit.mechanism, 0.0, shift, 0.0)
        fitted: Any = fit.mechanism.springs[-1]
        longer = float(fitted.rigid_length - self._rigid_as_set(fitted.path))
        rate = float(fitted.spring.rate)
        cut = f"{millimetres(abs(longer))} {'longer' if longer > 0 else 'shorter'}"
        change += f"rate {number(rate, 'N/m')}, cable {cut}"
        return self._remedy(name, change, fit.mechanism, rate / self.ideal.rate, shift, longer)

    def _rigid_as_set(self, path: Cable) -> float:
        return float(path.length(self.bare.linkage, self.set_at)) - float(abs(self.reach(self.set_at)))

    def made(self, name: str, change: str, mounts: Sequence[SpringMount]) -> PulleyRemedy:
        """A remedy that leaves the rate as it is."""
        return self._remedy(name, change, self.bare.with_springs((*self.bare.springs, *mounts)), 1.0, 0.0, 0.0)

    def _remedy(
        self, name: str, change: str, mechanism: Mechanism, ratio: float, shift: float, longer: float
    ) -> PulleyRemedy:
        left = residual(mechanism, self.q)
        return PulleyRemedy(name, change, mechanism, ratio, shift, longer, left)


def _on(body: str, place: complex) -> Point:
    return Point(body, (complex(place).real, complex(place).imag))


def _turned(angle: float) -> float:
    return math.remainder(angle, 2.0 * math.pi)


def _sideways(shift: float) -> str:
    """A shift in words, seen along the way from pivot to anchor."""
    return f"{millimetres(abs(shift))} to the {'right' if shift > 0 else 'left'}"

"""Methods that pull or push between a point on the ground and one on the arm, straight or over a pulley."""

from __future__ import annotations

import contextlib
import math
from collections.abc import Callable
from typing import Any

import attrs
import numpy as np

from springpoise.balance.methods.frame import CannotSize, Frame, Sized, unscaled
from springpoise.balance.placing.limits import LENGTH, Limit, Rules
from springpoise.balance.placing.result import Placement
from springpoise.carriers import Carrier, namespace
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, Disc, Path, Straight
from springpoise.springs import ExtensionSpring, GasSpring, RubberTube, ScaledSpring, ZeroLengthSpring
from springpoise.springs.gas.curve import GasCurve, length_of_ratio
from springpoise.springs.gas.spring import STANDARD_ATMOSPHERE
from springpoise.tables import degrees, millimetres, number

__all__ = ["gas", "pulley", "rubber", "rubber_pulley", "straight"]

REFERENCE_TUBE = 0.010
"""Outer diameter of the tube that is scaled to size [m]."""

DROP = 0.5
"""How far from its pulley a cable is tied [m]: only what it runs from there on counts."""

LEVELS = 3
"""How many attach radii and anchor heights between their bounds are tried behind a pulley."""

ALIKE = 1e-3
"""Residuals over the peak gravity torque that differ by less are alike: no pulley is placed so exactly [1]."""

GAP = 1.1
"""Half the distance of two rollers, over their radius [1]."""


def _over_pulley(frame: Frame, height: Carrier, aside: Carrier, end: Any) -> Cable:
    """A cable from below, over a pulley near the anchor, to the arm on its other side.

    An arm that swings to both sides has its cable from above, between two rollers.
    """
    given = frame.given
    radius = given.pulley_radius

    def disc(at: Carrier, turn: str) -> Disc:
        return Disc(
            frame.anchor(height, at),
            radius=radius,
            turn=turn,
            bearing_friction=given.bearing_friction,
            bearing_radius=given.bearing_radius,
        )

    if frame.both_sides:
        apart = GAP * radius
        rollers = disc(aside - apart, "cw"), disc(aside + apart, "ccw")
        return Cable(frame.anchor(height + DROP, aside), *rollers, end)
    turn = "cw" if frame.side > 0 else "ccw"
    return Cable(frame.anchor(height - DROP, aside - frame.side * radius), disc(aside, turn), end)


def _where(frame: Frame, values: Any, *, pulley: bool = False) -> str:
    skew = values["skew"]
    text = f"attached at {millimetres(values['radius'])}"
    text += f" turned by {degrees(skew)}" if abs(skew) > 1e-6 else ""
    what = "anchor" if not pulley else "two rollers" if frame.both_sides else "pulley"
    text += f", {what} {millimetres(values['height'])} above the pivot"
    if pulley and abs(values["aside"]) > 1e-6:
        text += f" and {millimetres(abs(values['aside']))} to its {'right' if values['aside'] > 0 else 'left'}"
    return text


def pulley(frame: Frame) -> Sized:
    """A spring whose own length is hidden behind a pulley: zero free length but for the pulley's radius."""
    reach = 2.0 * frame.given.pulley_radius
    stretched = 1.0 - float(frame.given.free_length_ratio)  # stretch over length, at its greatest

    def fits(mechanism: Mechanism, q: Carrier) -> Limit:
        x = mechanism.springs[0].spring_length(mechanism.linkage, q)
        room = float(frame.given.room_behind_pulley)
        return Limit("length behind the pulley", "m", LENGTH, x / stretched, room, "at most")

    def mount(radius: Carrier, height: Carrier, skew: Carrier, aside: Carrier) -> SpringMount:
        return SpringMount(ZeroLengthSpring(1.0), _over_pulley(frame, height, aside, frame.attach(radius, skew)))

    found = _lightest(
        frame, mount, {"skew": frame.skew, "aside": (-reach, reach)}, Rules(0.0, None, None, others=(fits,))
    )
    state = found.mechanism.spring_states(frame.q)[0]
    spring: Any = found.mechanism.springs[0].spring
    longest = float(np.max(state.length))
    stretch = (
        f"stretched {millimetres(float(np.min(state.length)))} to {millimetres(longest)}, up to "
        f"{millimetres(longest / stretched)} long with its coils"
    )
    sizes = f"rate {number(spring.rate, 'N/m')}, {stretch}, {_where(frame, found.values, pulley=True)}"
    return Sized(found.mechanism, sizes, 0.0)


def _lightest(
    frame: Frame, mount: Callable[..., SpringMount], ranges: dict[str, tuple[float, float]], rules: Rules
) -> Placement:
    """Of places that balance alike, the one that loads the pivot least: behind a pulley there are many.

    Raises
    ------
    CannotSize
        No place keeps the requirements.
    """

    def at(box: tuple[tuple[float, float], tuple[float, float]], *, quick: bool) -> Placement:
        radius, height = box
        return frame.best(mount, {"radius": radius, "height": height, **ranges}, "mount", rules, quick=quick)

    whole = frame.attach_radius, frame.anchor_height
    radii, heights = (sorted({*np.linspace(*ends, LEVELS).tolist()}) for ends in whole)
    found: dict[Any, Placement] = {}
    for box in (whole, *(((one, one), (other, other)) for one in radii for other in heights)):
        with contextlib.suppress(CannotSize):
            found[box] = at(box, quick=True)
    if not found:
        return at(whole, quick=False)
    least = min(map(frame.size_of, found.values()))
    alike = [box for box, one in found.items() if frame.size_of(one) <= least + ALIKE]
    return at(min(alike, key=lambda box: float(np.max(found[box].mechanism.pivot_load(frame.q)))), quick=False)


def straight(frame: Frame) -> Sized:
    """An ordinary extension spring from point to point."""
    given = frame.given
    ratio, tension = given.free_length_ratio, given.initial_tension_ratio
    drawn = tension / (1.0 - tension) * (1.0 / ratio - 1.0)  # initial tension over rate and free length

    def mount(radius: Carrier, height: Carrier, skew: Carrier, free: Carrier) -> SpringMount:
        unit = ExtensionSpring(1.0, free_length=free, initial_tension=drawn * free)
        return SpringMount(ScaledSpring(unit, 1.0), Straight(frame.anchor(height), frame.attach(radius, skew)))

    def longest(mechanism: Mechanism, q: Carrier) -> Limit:
        one = mechanism.springs[0]
        spring: Any = one.spring
        x = one.spring_length(mechanism.linkage, q)
        return Limit("greatest length", "m", LENGTH, x, spring.spring.free_length / ratio, "at most")

    reach = frame.attach_radius[1] + frame.anchor_height[1]
    found = frame.best(
        mount,
        {
            "radius": frame.attach_radius,
            "height": frame.anchor_height,
            "skew": frame.skew,
            "free": (1e-3 * reach, ratio * reach),
        },
        "rate",
        Rules(0.0, None, None, others=(longest,)),
    )
    unit, factor = unscaled(found.mechanism)
    greatest = float(np.max(found.mechanism.spring_states(frame.q)[0].length))
    spring = ExtensionSpring(
        factor,
        free_length=float(unit.free_length),
        initial_tension=float(factor * unit.initial_tension),
        longest=max(greatest, float(unit.free_length) / ratio) * (1.0 + 1e-9),
    )
    sized = _with_spring(found.mechanism, spring)
    energy = float(np.max(sized.spring_energy(frame.q)))
    sizes = (
        f"rate {number(factor, 'N/m')}, free length {millimetres(spring.free_length)}, initial tension "
        f"{number(spring.initial_tension, 'N')}, longest {millimetres(greatest)}, {_where(frame, found.values)}"
    )
    return Sized(sized, sizes, _line_inertia(energy / given.steel_energy, found.values["radius"]))


@attrs.frozen
class _UnitGas:
    """A gas spring of one newton at full extension, of any carrier's stroke."""

    stroke: Carrier
    extended: Carrier
    progression: float
    pressure: float

    def _curve(self) -> GasCurve:
        length = length_of_ratio(self.progression, self.pressure, STANDARD_ATMOSPHERE, self.stroke, 1.0)
        absolute = self.pressure + STANDARD_ATMOSPHERE
        return GasCurve(1.0 / self.pressure, absolute, length, 1.0, STANDARD_ATMOSPHERE)

    def _inside(self, x: Carrier) -> Carrier:
        xp = namespace(x, self.extended, self.stroke)
        return xp.minimum(xp.maximum(self.extended - x, 0.0), self.stroke)

    def load(self, x: Carrier) -> Carrier:
        return -self._curve().force(self._inside(x))

    def stiffness(self, x: Carrier) -> Carrier:
        return self._curve().rate(self._inside(x))

    def energy(self, x: Carrier) -> Carrier:
        return self._curve().work(self._inside(x))

    @property
    def working_range(self) -> tuple[Carrier, Carrier]:
        return self.extended - self.stroke, self.extended


def gas(frame: Frame) -> Sized:
    """A gas spring that pushes from below."""
    given = frame.given
    pressure, progression = float(given.gas_pressure), float(given.gas_progression)

    def mount(radius: Carrier, height: Carrier, skew: Carrier, swing: Carrier, stroke: Carrier) -> SpringMount:
        unit = _UnitGas(stroke, 2.0 * stroke + given.gas_fittings, progression, pressure)
        return SpringMount(ScaledSpring(unit, 1.0), Straight(frame.swung(height, swing), frame.attach(radius, skew)))

    reach = frame.attach_radius[1] + frame.anchor_height[1]
    found = frame.best(
        mount,
        {
            "radius": frame.attach_radius,
            "height": frame.anchor_height,
            "skew": frame.skew,
            "swing": (-math.radians(75.0), math.radians(75.0)),
            "stroke": (0.02 * reach, 0.5 * reach),
        },
        "rate",
        Rules(0.0, None, None),
    )
    unit, force = unscaled(found.mechanism)
    friction = given.gas_friction * force
    spring = GasSpring.from_pressure(
        gauge_pressure=pressure,
        rod_diameter=math.sqrt(4.0 * force / (math.pi * pressure)),
        stroke=float(unit.stroke),
        extended_length=float(unit.extended),
        friction=(friction, friction * progression),
        progression=progression,
    )
    sizes = (
        f"{number(force, 'N')} at full extension, rod {millimetres(spring.rod_diameter)}, stroke "
        f"{millimetres(spring.stroke)}, extended {millimetres(spring.extended_length)}, attached at "
        f"{millimetres(found.values['radius'])} turned by {degrees(found.values['skew'])}, foot "
        f"{millimetres(found.values['height'])} from the pivot, swung {degrees(found.values['swing'])} from below it"
    )
    return Sized(
        _with_spring(found.mechanism, spring), sizes, _line_inertia(float(given.gas_mass), found.values["radius"])
    )


def _tube(frame: Frame, free: Carrier, outer: Carrier = REFERENCE_TUBE) -> RubberTube:
    given = frame.given
    return RubberTube(
        outer_diameter=outer,
        inner_diameter=given.wall_ratio * outer,
        free_length=free,
        law=given.rubber_law,
        stretch_range=given.rubber_stretch,
        loop_loss=given.rubber_loop_loss,
    )


def _sized_tube(frame: Frame, mechanism: Mechanism) -> tuple[Mechanism, RubberTube, str]:
    unit, factor = unscaled(mechanism)
    tube = _tube(frame, float(unit.free_length), REFERENCE_TUBE * math.sqrt(factor))
    sizes = (
        f"tube {millimetres(tube.outer_diameter)} outside, {millimetres(tube.inner_diameter)} inside, "
        f"{millimetres(tube.free_length)} between the clamps at rest"
    )
    return _with_spring(mechanism, tube), tube, sizes


def rubber(frame: Frame) -> Sized:
    """A rubber tube from point to point."""

    def mount(radius: Carrier, height: Carrier, skew: Carrier, free: Carrier) -> SpringMount:
        path: Path = Straight(frame.anchor(height), frame.attach(radius, skew))
        return SpringMount(ScaledSpring(_tube(frame, free), 1.0), path)

    reach = frame.attach_radius[1] + frame.anchor_height[1]
    found = frame.best(
        mount,
        {
            "radius": frame.attach_radius,
            "height": frame.anchor_height,
            "skew": frame.skew,
            "free": (1e-3 * reach, reach / frame.given.rubber_stretch[0]),
        },
        "rate",
        Rules(0.0, None, None),
    )
    mechanism, tube, sizes = _sized_tube(frame, found.mechanism)
    mass = float(frame.given.rubber_density * tube.volume)
    return Sized(mechanism, f"{sizes}, {_where(frame, found.values)}", _line_inertia(mass, found.values["radius"]))


def rubber_pulley(frame: Frame) -> Sized:
    """A rubber tube behind a pulley."""
    room, reach = float(frame.given.room_behind_pulley), 2.0 * frame.given.pulley_radius

    def mount(
        radius: Carrier, height: Carrier, skew: Carrier, aside: Carrier, free: Carrier, begin: Carrier
    ) -> SpringMount:
        path = _over_pulley(frame, height, aside, frame.attach(radius, skew))
        return SpringMount(ScaledSpring(_tube(frame, free), 1.0), path, rigid_length=DROP - begin)

    def fits(mechanism: Mechanism, q: Carrier) -> Limit:
        x = mechanism.springs[0].spring_length(mechanism.linkage, q)
        return Limit("length behind the pulley", "m", LENGTH, x, room, "at most")

    found = frame.best(
        mount,
        {
            "radius": frame.attach_radius,
            "height": frame.anchor_height,
            "skew": frame.skew,
            "aside": (-reach, reach),
            "free": (0.02 * room, room / frame.given.rubber_stretch[0]),
            "begin": (-frame.anchor_height[1], room),
        },
        "rate",
        Rules(0.0, None, None, others=(fits,)),
    )
    mechanism, _, sizes = _sized_tube(frame, found.mechanism)
    return Sized(mechanism, f"{sizes}, {_where(frame, found.values, pulley=True)}", 0.0)


def _with_spring(mechanism: Mechanism, spring: Any) -> Mechanism:
    return mechanism.with_springs(attrs.evolve(mechanism.springs[0], spring=spring))


def _line_inertia(mass: float, radius: float) -> float:
    """Inertia of a line of mass of which one end moves with the arm [kg·m²]: a third of it at that end."""
    return mass / 3.0 * radius * radius

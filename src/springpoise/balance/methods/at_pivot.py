"""Methods that act on the arm's own axis: torsion spring, drum, shaped spool, counterweight."""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise.balance.fit import fit_springs
from springpoise.balance.methods.frame import CannotSize, Frame, Sized
from springpoise.linkages import Arm, Body
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import JointTravel, Spool
from springpoise.springs import ConstantForceSpring, ExtensionSpring, TorsionSpring
from springpoise.tables import degrees, millimetres, number

__all__ = ["COUNTERWEIGHT", "constant_force", "counterweight", "spool", "torsion"]

COUNTERWEIGHT = "counterweight"
"""Name of the body that is a counterweight."""

SPOOL_POSES = 721
"""Poses at which a spool's moment radius is tabled."""

SPOOL_SHARES = (1.0, 0.75, 0.5, 0.25, 0.1, 0.03, 0.01, 0.003, 0.001, 0.0)
"""Parts of the assumed least stretch that are tried until the line is convex."""

Array = NDArray[np.float64]


def _fitted(frame: Frame, mount: SpringMount) -> Mechanism:
    found = fit_springs(frame.with_mounts(mount), norm=frame.norm, over=frame.q)  # type: ignore[arg-type]
    if not found.success:
        raise CannotSize(found.status)
    return found.mechanism


def torsion(frame: Frame) -> Sized:
    """A torsion spring at the pivot, with its preload."""
    mechanism = _fitted(frame, SpringMount(TorsionSpring(1.0), JointTravel()))
    spring: Any = mechanism.springs[0].spring
    sizes = f"rate {number(spring.rate, 'N*m/rad')}, free at {degrees(spring.free_angle)}"
    return Sized(mechanism, sizes, 0.0)


def constant_force(frame: Frame) -> Sized:
    """A spring of constant force on a round drum on the arm's axis."""
    radius = frame.attach_radius[0] if frame.given.drum_radius is None else float(frame.given.drum_radius)
    turns = 1.0 + float(np.max(np.abs(frame.q))) / (2.0 * math.pi)
    drum = Spool.drum(radius, turn="cw" if frame.side > 0 else "ccw", turns=turns)
    mechanism = _fitted(frame, SpringMount(ConstantForceSpring(1.0), drum))
    spring: Any = mechanism.springs[0].spring
    length = drum.length(frame.bare.linkage, frame.q)
    run = float(np.max(length) - np.min(length))
    # Counted from where it is shortest, so that its energy is what it gives and takes.
    drum = attrs.evolve(drum, zero_length=-float(np.min(length)))
    mechanism = mechanism.with_springs(SpringMount(spring, drum))
    return Sized(
        mechanism, f"pull {number(spring.pull, 'N')}, drum radius {millimetres(radius)}, run {millimetres(run)}", 0.0
    )


def counterweight(frame: Frame) -> Sized:
    """A weight behind the pivot."""
    arm = frame.bare.linkage
    assert isinstance(arm, Arm)
    given = frame.given.counterweight_radius
    radius = frame.attach_radius[1] if given is None else float(given)
    moment = complex(*arm.moment)
    mass = abs(moment) / radius
    place = -radius * moment / abs(moment)
    body = Body(mass, (place.real, place.imag), name=COUNTERWEIGHT)
    sizes = f"{number(mass, 'kg')} at {millimetres(radius)}, opposite the arm's centre of mass"
    return Sized(attrs.evolve(frame.bare, linkage=arm.with_body(body)), sizes, mass * radius * radius)


def spool(frame: Frame) -> Sized:
    """An ordinary spring on a spool whose moment radius makes its energy mirror gravity's.

    The greatest moment radius is the greatest attach radius. The spring keeps the assumed share of
    its stretch and its initial tension as far as a cable can wind on the line then, and less of
    them where not.
    """
    given = frame.given
    if frame.both_sides:
        raise CannotSize("the gravity torque changes sign between the poses, and one spool winds one way only")
    share, tension = float(given.spool_stretch_ratio), float(given.initial_tension_ratio)
    for least, drawn in [(share * part, full) for full in (tension, 0.0) for part in SPOOL_SHARES]:
        shape = _spool_shape(frame, least, drawn)
        if shape.convex:
            break
    else:
        raise CannotSize("no cable can wind on the line of a spool, which would be hollow whatever the preload")
    longest = frame.attach_radius[1] / float(np.max(np.abs(shape.arms)))
    rate = shape.scale / longest**2
    free = given.free_length_ratio / (1.0 - given.free_length_ratio) * longest
    spring = ExtensionSpring(
        rate,
        free_length=float(free),
        initial_tension=shape.tension * rate * longest,
        longest=float(free + longest) * (1.0 + 1e-9),
    )
    radii = shape.arms * longest
    path = Spool(shape.q, radii, zero_angle=float(shape.q[0]), zero_length=float(free + longest * shape.stretch[0]))
    sizes = (
        f"rate {number(rate, 'N/m')}, free length {millimetres(float(free))}, initial tension "
        f"{number(spring.initial_tension, 'N')}, in use {millimetres(float(free + longest * shape.stretch.min()))} to "
        f"{millimetres(float(free + longest))}, moment radius "
        f"{millimetres(float(np.min(np.abs(radii))))} to {millimetres(float(np.max(np.abs(radii))))}"
    )
    return Sized(frame.with_mounts(SpringMount(spring, path)), sizes, 0.0)


class _SpoolShape(NamedTuple):
    """A spool in terms of the spring's greatest stretch y2."""

    q: Array
    stretch: Array
    """Stretch over y2 [1]."""
    arms: Array
    """Derivative of the stretch by the joint's angle, over y2 [1]."""
    scale: float
    """Rate times y2 squared [J]."""
    tension: float
    """Initial tension over rate and y2 [1]."""

    @property
    def convex(self) -> bool:
        """Whether the line is convex for a cable that leaves in a fixed direction.

        With p = torque / load, d load / dq = rate · p and torque'' = -torque, the radius of curvature
        p + p'' is -3 · rate · p · p' / load: positive as long as the radius falls while the spring lengthens.
        """
        return bool(np.all(np.diff(np.abs(self.arms)) * np.diff(self.stretch) <= 1e-12 * np.ptp(np.abs(self.arms))))


def _spool_shape(frame: Frame, share: float, tension: float) -> _SpoolShape:
    """The spool of a spring whose least stretch is a share of its greatest, and its initial tension one of its load.

    Its energy at stretch y is k y2² (f y/y2 + (y/y2)²/2) with initial tension f·k·y2; the swing of
    gravity's energy gives k y2², and the energy at each pose the stretch there.
    """
    q = np.linspace(float(frame.q.min()), float(frame.q.max()), SPOOL_POSES)
    height, torque = np.asarray(frame.bare.energy(q)), np.asarray(frame.bare.gravity_torque(q))
    given_up = height.max() - height
    f = tension / (1.0 - tension)
    least, greatest = f * share + 0.5 * share**2, f + 0.5
    scale = float(given_up.max()) / (greatest - least)
    stretch = -f + np.sqrt(f * f + 2.0 * (given_up / scale + least))
    unloaded = f + stretch <= 1e-9
    # Where torque and load vanish together, at the upright: radius² is the torque's slope over the rate.
    limit = np.sqrt(np.hypot(*frame.bare.gravity) * np.hypot(*frame.bare.linkage.moment) / scale)  # type: ignore[attr-defined]
    arms = np.where(unloaded, -frame.side * limit, torque / np.where(unloaded, 1.0, scale * (f + stretch)))
    # The path gets longer where the arm sinks: its slope has gravity's sign.
    return _SpoolShape(q, stretch, arms, scale, f)

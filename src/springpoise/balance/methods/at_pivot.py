"""Methods that act on the arm's own axis: torsion spring, drum, shaped spool, counterweight."""

from __future__ import annotations

import math
from typing import Any

import attrs
import numpy as np

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

    With stretch y, initial tension f·k·y₂ and greatest stretch y₂, k y₂² and the energy at the
    least stretch follow from what gravity gives and takes; the greatest moment radius, set to the
    greatest attach radius, gives y₂.
    """
    given = frame.given
    bare = frame.bare.gravity_torque(frame.q)
    if np.min(bare) < 0.0 < np.max(bare):
        raise CannotSize("the gravity torque changes sign between the poses, and one spool winds one way only")
    q = np.linspace(float(frame.q.min()), float(frame.q.max()), SPOOL_POSES)
    height = np.asarray(frame.bare.energy(q))
    torque = np.asarray(frame.bare.gravity_torque(q))
    given_up = height.max() - height
    share, tension = float(given.spool_stretch_ratio), float(given.initial_tension_ratio)
    f = tension / (1.0 - tension)
    # Energy over k y2^2 at the least and the greatest stretch.
    least, greatest = f * share + 0.5 * share**2, f + 0.5
    stored = given_up + float(given_up.max()) * least / (greatest - least)
    scale = float(given_up.max()) / (greatest - least)  # k y2^2
    # Energy scale (f y + y^2/2) for the stretch y over its greatest.
    y = -f + np.sqrt(f * f + 2.0 * stored / scale)
    arm_of_load = -torque / (scale * (f + y))  # moment radius over y2: gravity's torque over the load
    longest = frame.attach_radius[1] / float(np.max(np.abs(arm_of_load)))
    rate = scale / longest**2
    free = given.free_length_ratio / (1.0 - given.free_length_ratio) * longest
    spring = ExtensionSpring(
        rate,
        free_length=float(free),
        initial_tension=f * rate * longest,
        longest=float(free + longest) * (1.0 + 1e-9),
    )
    # The path gets longer where the arm sinks: its slope is minus gravity's torque over the load, with gravity's sign.
    radii = -arm_of_load * longest
    path = Spool(q, radii, zero_angle=float(q[0]), zero_length=float(free + longest * y[0]))
    sizes = (
        f"rate {number(rate, 'N/m')}, free length {millimetres(float(free))}, initial tension "
        f"{number(spring.initial_tension, 'N')}, longest {millimetres(float(free + longest))}, moment radius "
        f"{millimetres(float(np.min(np.abs(radii))))} to {millimetres(float(np.max(np.abs(radii))))}"
    )
    return Sized(frame.with_mounts(SpringMount(spring, path)), sizes, 0.0)

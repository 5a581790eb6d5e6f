"""Flat spiral springs whose coils stay apart."""

from __future__ import annotations

from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.torsion import TorsionSpring
from springpoise.tables import degrees, facts, number
from springpoise.units import ScalarLike

__all__ = ["Spiral", "SpiralMargins", "strip_curvature_factor"]


def strip_curvature_factor(radius: Carrier, thickness: Carrier) -> Carrier:
    """Stress at the inner face of a curved strip over that of a straight one, 6 M/(b t²).

    Bending theory of curved bars for a rectangular section (Winkler): with ri and ro the radii of
    the faces and rn = t/log(ro/ri), it is t² (rn - ri)/(6 t (R - rn) ri) for the mean radius R.

    Examples
    --------
    >>> round(strip_curvature_factor(0.002, 0.001), 4)
    1.1996
    """
    xp = namespace(radius, thickness)
    inner = radius - 0.5 * thickness
    neutral = thickness / xp.log1p(thickness / inner)
    return thickness * (neutral - inner) / (6.0 * (radius - neutral) * inner)


def _outer_end(value: Any) -> Any:
    if value not in {"clamped", "pinned"}:
        raise InputError(f"Spiral.outer_end must be one of 'clamped', 'pinned', got {value!r}")
    return value


@attrs.frozen
class SpiralMargins:
    """Stress in a spiral spring and how far it is from what is allowed."""

    angle: float
    """Angle wound up from the free state [rad]."""
    torque: float
    """Torque there [N·m]."""
    stress: float
    """Greatest bending stress [Pa]."""
    curvature_factor: float
    """The share of it that comes from the inner coil's curvature, as a factor [1]; 1 where no inner radius is given."""
    allowable_stress: float
    """Greatest permissible stress [Pa]."""
    greatest_angle: float
    """Angle at which the stress reaches it [rad]."""

    @property
    def stress_margin(self) -> float:
        """Allowable stress over the stress, less 1 [1]; negative beyond."""
        return self.allowable_stress / self.stress - 1.0

    def __str__(self) -> str:
        rows = [
            ("angle", degrees(self.angle)),
            ("torque", number(self.torque, "N*m")),
            ("stress", f"{number(self.stress / 1e6, 'MPa')} with curvature factor {self.curvature_factor:.4f}"),
            ("allowable", f"{number(self.allowable_stress / 1e6, 'MPa')}, margin {self.stress_margin:+.1%}"),
            ("reached at", degrees(self.greatest_angle)),
        ]
        return "spiral spring margins\n" + facts(rows)


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class Spiral:
    """A strip wound as a flat spiral, its coils apart: ``torque = E b t³/(12 l) · angle``.

    * ``outer_end="clamped"``: both ends clamped, the moment is the same all along the strip and
      the stress is 6 M/(b t²) (formulas from memory).
    * ``outer_end="pinned"``: the outer end takes no moment, so the moment varies along the strip,
      its peak is twice the torque and the stress 12 M/(b t²), as a textbook's examples have it.
      The angle is taken as for clamped ends; some texts add a quarter (value from memory), which
      ``pinned_softening=1.25`` does.

    With ``inner_radius`` the stress is raised for the curvature of the innermost coil by
    :func:`strip_curvature_factor`; it matters where the radius is below about ten thicknesses (value from memory). For a pinned
    end this is on the safe side: the peak of the moment lies on the outer coils.
    Valid while the coils do not touch, for small slopes of the spiral.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension, or an outer end that is not known.

    Examples
    --------
    >>> spiral = Spiral(width="12 mm", thickness="1 mm", length="1.5 m", youngs_modulus="206 GPa", outer_end="clamped")
    >>> round(spiral.rate, 6)
    0.137333
    >>> spring = spiral.spring(free_angle="-90 deg")
    >>> round(spring.load(0.0), 4)
    0.2157
    """

    width: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Width b of the strip [m], > 0."""
    thickness: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Thickness t of the strip [m], > 0."""
    length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Active length l of the strip [m], > 0."""
    youngs_modulus: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Young's modulus E [Pa], > 0."""
    outer_end: Literal["clamped", "pinned"] = attrs.field(converter=_outer_end)
    """How the outer end is held: ``"clamped"`` or ``"pinned"``."""
    inner_radius: Carrier | None = attrs.field(default=None, converter=units.optional_metre)
    """Mean radius of the innermost coil [m]; None leaves its curvature out of the stress."""
    pinned_softening: Carrier = attrs.field(default=1.0, converter=units.number)
    """Factor on the angle where the outer end is pinned [1], >= 1."""

    def __attrs_post_init__(self) -> None:
        if self.inner_radius is not None and np.any(np.asarray(self.inner_radius <= 0.5 * self.thickness)):
            raise InputError(
                f"Spiral.inner_radius must be > half the thickness ({0.5 * self.thickness}) m, got {self.inner_radius}"
            )
        if np.any(np.asarray(self.pinned_softening < 1.0)):
            raise InputError(f"Spiral.pinned_softening must be >= 1, got {self.pinned_softening}")
        if np.any(np.asarray(self.length <= 10.0 * self.thickness)):
            raise InputError(
                f"Spiral.length must be > 10 thicknesses ({10.0 * self.thickness}) m, got {self.length}; "
                "a spiral is a long thin strip"
            )

    @property
    def rate(self) -> Carrier:
        """Torsional spring rate [N·m/rad]."""
        clamped = self.youngs_modulus * self.width * self.thickness**3.0 / (12.0 * self.length)
        return clamped if self.outer_end == "clamped" else clamped / self.pinned_softening

    @property
    def curvature_factor(self) -> Carrier:
        """Factor of the innermost coil's curvature on the stress [1]; 1 where no inner radius is given."""
        return 1.0 if self.inner_radius is None else strip_curvature_factor(self.inner_radius, self.thickness)

    def stress(self, torque: Carrier) -> Carrier:
        """Greatest bending stress at a torque [Pa]."""
        per_moment = (6.0 if self.outer_end == "clamped" else 12.0) / (self.width * self.thickness * self.thickness)
        return self.curvature_factor * per_moment * torque

    def spring(self, *, free_angle: ScalarLike = 0.0, working_range: Any = None) -> TorsionSpring:
        """The spiral as a spring over an angle [rad]; with ``working_range`` where the coils would touch."""
        return TorsionSpring(self.rate, free_angle=free_angle, working_range=working_range)

    def margins(self, angle: ScalarLike, *, allowable_stress: ScalarLike) -> SpiralMargins:
        """Stress and margin with the spring wound up by an angle from its free state.

        Parameters
        ----------
        angle
            Angle wound up [rad], > 0.
        allowable_stress
            Greatest permissible bending stress [Pa], > 0.
        """
        wound = float(units.scalar_si(angle, "rad", "angle"))
        allowable = float(units.pascal(allowable_stress, "allowable_stress"))
        for name, value, unit in (("angle", wound, "rad"), ("allowable_stress", allowable, "Pa")):
            if not value > 0.0:
                raise InputError(f"{name} must be > 0 {unit}, got {value}")
        torque = float(self.rate * wound)
        stress = float(self.stress(torque))
        return SpiralMargins(
            angle=wound,
            torque=torque,
            stress=stress,
            curvature_factor=float(self.curvature_factor),
            allowable_stress=allowable,
            greatest_angle=wound * allowable / stress,
        )

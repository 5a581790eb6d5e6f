"""Constant-force strips: force, stress and life from the strip's dimensions."""

from __future__ import annotations

import math
import warnings
from collections.abc import Sequence
from typing import Any, Literal

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.strips.power_spring import TorqueCurve
from springpoise.springs.strips.strip_spring import StripSpring
from springpoise.springs.warnings import StripDrumWarning, span
from springpoise.tables import facts, number
from springpoise.units import ScalarLike

__all__ = ["LifeTable", "Strip", "StripMargins"]

FORMS = ("beam", "plate", "trade 26.4")
TAKE_UP_DIAMETERS = 1.25
"""Drum diameters to be pulled out before the full force is there [1] (value from memory)."""
LEAST_TURNS = 1.5
"""Turns that stay on the drum at full travel [1] (trade practice, as excerpted)."""
_DRUM_RATIOS = (1.10, 1.20)  # drum over the strip's natural radius, value from memory


def _form(value: Any) -> Any:
    if value not in FORMS:
        raise InputError(
            f"Strip.form must be one of {', '.join(map(repr, FORMS))}, got {value!r}; "
            "'beam' for a narrow strip, 'plate' for a wide flat one, 'trade 26.4' for one curved across its width"
        )
    return value


def _pairs(value: Any) -> tuple[tuple[float, float], ...]:
    try:
        table = np.array([[float(ratio), float(cycles)] for ratio, cycles in value])
    except (TypeError, ValueError):
        raise InputTypeError(f"LifeTable.pairs must be pairs (thickness over radius, cycles), got {value!r}") from None
    if len(table) < 2:
        raise InputError(f"LifeTable.pairs must be at least two, got {len(table)}")
    if not np.all(np.isfinite(table)) or not np.all(table > 0.0):
        raise InputError(f"LifeTable.pairs must be > 0 and finite, got {value!r}; no strip lives for ever")
    if not np.all(np.diff(table[:, 0]) > 0.0):
        raise InputError(f"LifeTable.pairs must be by increasing ratio, got {table[:, 0].tolist()}")
    if np.any(np.diff(table[:, 1]) > 0.0):
        raise InputError(f"LifeTable.pairs must not live longer at a greater ratio, got {table[:, 1].tolist()} cycles")
    return tuple((float(ratio), float(cycles)) for ratio, cycles in table)


@attrs.frozen
class LifeTable:
    """Cycles to expect by thickness over natural radius: a table of the maker.

    Between two entries the logarithm of the cycles is linear in the ratio. Outside the table
    there is no answer, and no ratio has an infinite life.

    Raises
    ------
    InputError, InputTypeError
        Fewer than two pairs, ratios that do not increase, or a life that is not positive and
        finite or that grows with the ratio.

    Examples
    --------
    >>> table = LifeTable([(0.010, 40_000), (0.020, 4_000)])
    >>> round(table.cycles(0.015))
    12649
    """

    pairs: tuple[tuple[float, float], ...] = attrs.field(converter=_pairs)
    """(thickness over natural radius [1], cycles [1]), by increasing ratio."""

    def cycles(self, ratio: float) -> float:
        """Cycles to expect at a ratio of thickness to natural radius [1].

        Raises
        ------
        InputError
            A ratio outside the table.
        """
        ratios, lives = zip(*self.pairs, strict=True)
        if not ratios[0] <= ratio <= ratios[-1]:
            raise InputError(
                f"LifeTable ratio must be from {ratios[0]:g} to {ratios[-1]:g}, got {ratio:g}; "
                "the life outside the maker's table is not known"
            )
        return float(np.exp(np.interp(ratio, ratios, np.log(lives))))


def _life(value: LifeTable | Sequence[Any] | None) -> Any:
    return value if value is None or isinstance(value, LifeTable) else LifeTable(value)


@attrs.frozen
class StripMargins:
    """How far a strip is from its limits."""

    stress: float
    """Surface stress from the natural curvature to straight [Pa]."""
    stress_margin: float | None
    """Allowable stress over the stress, less 1 [1]; None where no allowable stress was given."""
    thickness_ratio: float
    """Thickness over natural radius [1]."""
    cycles: float | None
    """Cycles to expect by the maker's table [1]; None without a table. Always finite."""
    drum_ratio: float
    """Drum over the natural radius [1]; usually 1.10 to 1.20 (value from memory)."""
    turns_left: float
    """Turns on the drum with ``longest`` pulled out [1]."""
    turns_margin: float
    """The same less the 1.5 turns that should stay (trade practice, as excerpted) [1]."""

    def __str__(self) -> str:
        rows = [
            ("stress", number(self.stress / 1e6, "MPa")),
            (
                "stress margin",
                "no allowable stress given" if self.stress_margin is None else f"{self.stress_margin:+.1%}",
            ),
            ("thickness / natural radius", number(self.thickness_ratio, "1")),
            ("cycles", "no table given" if self.cycles is None else f"{self.cycles:.3g}"),
            ("drum / natural radius", number(self.drum_ratio, "1")),
            ("turns left on the drum", f"{self.turns_left:.2f} ({self.turns_margin:+.2f} to what should stay)"),
        ]
        return "strip margins\n" + facts(rows)


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class Strip:
    """A strip with a natural curvature, coiled on a drum and pulled out straight.

    Straightening each length costs the same energy, so the force is constant. With E the modulus,
    b width, t thickness, Rn natural radius and Rd the drum's:

    * ``form="beam"``: F = E b t³/(24 Rn²), derived; a strip narrow enough to bend across freely.
    * ``form="plate"``: the same over 1 - ν², derived; a wide flat strip.
    * ``form="trade 26.4"``: F = E b t³/(26.4 Rn²), a trade handbook's form for strips curved
      across their width.

    On a drum larger than Rn the strip holds part of that energy already and the force falls by
    the factor (2 Rn/Rd - (Rn/Rd)²), derived for the first layer. The stress is E t/(2 Rn). Makers hold the force to
    about ±10 % (value from memory). Valid for an elastic strip, t much below Rn, and a drum that
    turns freely; it has a finite life of a few thousand to some tens of thousands of cycles.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A value out of range or of another dimension, a form that is not known, or a length too
        short for the drum.

    Examples
    --------
    >>> strip = Strip(width="25 mm", thickness="0.30 mm", natural_radius="16 mm", youngs_modulus="206 GPa",
    ...     length="1 m", form="trade 26.4")
    >>> round(strip.pull, 4), round(strip.stress / 1e6, 2)
    (20.5744, 1931.25)
    >>> round(strip.spring(hysteresis_share=0.05).take_up, 3)
    0.04
    """

    width: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Width b [m], > 0."""
    thickness: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Thickness t [m], > 0."""
    natural_radius: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Radius of the free coil Rn [m], > 0."""
    youngs_modulus: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Young's modulus E [Pa], > 0."""
    length: Carrier = attrs.field(converter=units.metre, validator=units.positive)
    """Length of the whole strip [m], > 0."""
    form: Literal["beam", "plate", "trade 26.4"] = attrs.field(converter=_form)
    """Which formula gives the force: ``"beam"``, ``"plate"`` or ``"trade 26.4"``; they differ by 20 %."""
    drum_radius: Carrier | None = attrs.field(default=None, converter=units.optional_metre)
    """Radius of the drum Rd [m]; None where the strip runs as a free coil of its natural radius."""
    poisson_ratio: Carrier = attrs.field(default=0.3, converter=units.number)
    """Poisson's ratio ν [1], for ``"plate"`` only; 0.3 is a value from memory for steel."""
    take_up_diameters: Carrier = attrs.field(
        default=TAKE_UP_DIAMETERS, converter=units.number, validator=units.positive
    )
    """Drum diameters to be pulled out before the full force is there [1]; 1.25 is a value from memory."""
    life: LifeTable | None = attrs.field(default=None, converter=_life)
    """The maker's table of (thickness over natural radius, cycles); None for not given."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.asarray(self.thickness >= self.natural_radius)):
            raise InputError(
                f"Strip.thickness must be < natural_radius ({self.natural_radius}) m, got {self.thickness}"
            )
        if np.any(np.asarray((self.poisson_ratio < 0.0) | (self.poisson_ratio > 0.5))):
            raise InputError(f"Strip.poisson_ratio must be from 0 to 0.5, got {self.poisson_ratio}")
        if self.drum_radius is None:
            return
        if np.any(np.asarray(self.drum_radius < self.natural_radius)):
            raise InputError(
                f"Strip.drum_radius must be >= natural_radius ({self.natural_radius}) m, got {self.drum_radius}; "
                "a strip does not grip a smaller drum"
            )
        ratio = np.asarray(self.drum_radius / self.natural_radius)
        low, high = _DRUM_RATIOS
        if np.any((ratio < low * (1.0 - 1e-12)) | (ratio > high * (1.0 + 1e-12))):
            warnings.warn(
                f"Strip.drum_radius is {span(ratio)} times the natural radius, "
                f"outside the usual {low:g} to {high:g} (value from memory)",
                StripDrumWarning,
                stacklevel=3,
            )

    @property
    def _bending_stiffness(self) -> Carrier:
        """E I by the form [N·m²]."""
        divisor = {"beam": 12.0, "plate": 12.0 * (1.0 - self.poisson_ratio**2.0), "trade 26.4": 13.2}[self.form]
        return self.youngs_modulus * self.width * self.thickness**3.0 / divisor

    @property
    def coil_radius(self) -> Carrier:
        """Radius on which the strip coils [m]: the drum's, or its natural one."""
        return self.natural_radius if self.drum_radius is None else self.drum_radius

    @property
    def pull(self) -> Carrier:
        """Full force [N]."""
        free, coiled = 1.0 / self.natural_radius, 1.0 / self.coil_radius
        return 0.5 * self._bending_stiffness * coiled * (2.0 * free - coiled)

    @property
    def stress(self) -> Carrier:
        """Stress at the surface of the straight strip [Pa]: E t/(2 Rn)."""
        return 0.5 * self.youngs_modulus * self.thickness / self.natural_radius

    @property
    def take_up(self) -> Carrier:
        """Length to be pulled out before the full force is there [m]."""
        return self.take_up_diameters * 2.0 * self.coil_radius

    @property
    def longest(self) -> Carrier:
        """Length that can be pulled out with 1.5 turns left on the drum [m] (trade practice, as excerpted)."""
        return self.length - LEAST_TURNS * 2.0 * math.pi * self.coil_radius

    def spring(
        self, *, hysteresis_share: ScalarLike, longest: ScalarLike | None = None, gradient: ScalarLike = 0.0
    ) -> StripSpring:
        """The strip as a spring over the length pulled out.

        Parameters
        ----------
        hysteresis_share
            Half of the difference between pulling out and letting back, over the load [1]. Pulling
            out takes 5 to 15 % more than letting back gives (value from memory): 0.025 to 0.075.
        longest
            Greatest length pulled out [m]; None for what leaves 1.5 turns on the drum.
        gradient
            Slope that is built into the strip [N/m].
        """
        return StripSpring(
            self.pull,
            take_up=self.take_up,
            longest=self.longest if longest is None else longest,
            hysteresis_share=hysteresis_share,
            gradient=gradient,
        )

    def margins(self, *, longest: ScalarLike | None = None, allowable_stress: ScalarLike | None = None) -> StripMargins:
        """How far the strip is from its limits.

        Parameters
        ----------
        longest
            Greatest length pulled out [m]; None for what leaves 1.5 turns on the drum.
        allowable_stress
            Greatest permissible stress [Pa]; None for not given.

        Raises
        ------
        InputError
            A ratio of thickness to natural radius outside the life table.
        """
        reach = self.longest if longest is None else units.metre(longest, "longest")
        ratio = float(self.thickness / self.natural_radius)
        turns = float((self.length - reach) / (2.0 * math.pi * self.coil_radius))
        allowable = None if allowable_stress is None else units.pascal(allowable_stress, "allowable_stress")
        return StripMargins(
            stress=float(self.stress),
            stress_margin=None if allowable is None else float(allowable / self.stress - 1.0),
            thickness_ratio=ratio,
            cycles=None if self.life is None else self.life.cycles(ratio),
            drum_ratio=float(self.coil_radius / self.natural_radius),
            turns_left=turns,
            turns_margin=turns - LEAST_TURNS,
        )

    def motor_torque(self, output_radius: ScalarLike) -> Carrier:
        """Torque [N·m] on an output drum on which the strip is wound against its natural curvature.

        ``M = (E I/2)(1/Rn + 1/R)² R``, derived for a storage drum of the natural radius; E I by the
        strip's form.
        """
        radius = self._output(output_radius)
        bent = 1.0 / self.natural_radius + 1.0 / radius
        return 0.5 * self._bending_stiffness * bent * bent * radius

    def motor_stress(self, output_radius: ScalarLike) -> Carrier:
        """Stress at the surface of the strip on that output drum [Pa]: (E t/2)(1/Rn + 1/R)."""
        return (
            0.5 * self.youngs_modulus * self.thickness * (1.0 / self.natural_radius + 1.0 / self._output(output_radius))
        )

    def motor(self, output_radius: ScalarLike, *, turns: ScalarLike, hysteresis_share: ScalarLike) -> TorqueCurve:
        """A two-drum spring motor as a spring over the output drum's angle, for ``turns`` [1] of it."""
        torque = self.motor_torque(output_radius)
        angle = 2.0 * math.pi * units.number(turns, "turns")
        return TorqueCurve([0.0, angle], [torque, torque], hysteresis_share=hysteresis_share)

    def _output(self, output_radius: ScalarLike) -> Carrier:
        radius = units.metre(output_radius, "output_radius")
        if np.any(np.asarray(radius <= 0.0)):
            raise InputError(f"output_radius must be > 0 m, got {radius}")
        return radius

"""How far a range of stretch is from the limits of a rubber spring."""

from __future__ import annotations

import warnings
from typing import Literal

import attrs

from springpoise import units
from springpoise.errors import InputError
from springpoise.springs.rubber.law import RubberLaw, fitted_over_of, highest_stretch_of
from springpoise.springs.warnings import RubberStretchWarning
from springpoise.tables import grid

__all__ = ["StretchLimits", "StretchMargin", "StretchMargins", "stretch_margins"]

MEMORY = "value from memory"
GIVEN = "given"


def _above_one(instance: object, attribute: attrs.Attribute[float], value: float) -> None:
    if not value > 1.0:
        raise InputError(f"StretchLimits.{attribute.name} must be > 1, got {value}; stretch is 1 at rest")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class StretchLimits:
    """Limits of stretch for soft natural rubber in an arm; all defaults are values from memory.

    Raises
    ------
    InputError
        A limit that is not above 1, or a share that is not in (0, 1].
    """

    lowest: float = attrs.field(default=1.2, converter=units.number, validator=_above_one)
    """Least stretch, so that the spring never goes slack [1]; a minimum above zero strain also lengthens life."""
    sustained: float = attrs.field(default=3.0, converter=units.number, validator=_above_one)
    """Greatest stretch that is held [1]. Relaxation rises sharply above about 200 % extension (Gent,
    Relaxation processes in vulcanized rubber III)."""
    cyclic: float = attrs.field(default=4.0, converter=units.number, validator=_above_one)
    """Greatest stretch in motion [1]; 3.5 to 4."""
    upturn: float = attrs.field(default=5.0, converter=units.number, validator=_above_one)
    """Greatest stretch in any use [1]: beyond, the load line turns up, as rubber crystallises (onset seen
    at 5.2 in natural rubber at room temperature, Hiraiwa et al. 2023, RSC Adv. 13)."""
    share_of_break: float = attrs.field(default=0.5, converter=units.number, validator=units.fraction)
    """Greatest share of the elongation at break in motion [1]."""


@attrs.frozen
class StretchMargin:
    """One limit, and how far the stretch is from it."""

    name: str
    """What limits."""
    limit: float
    """The limit [1]."""
    stretch: float
    """The stretch compared with it [1]: the lowest or the highest of the range."""
    margin: float
    """Distance to the limit [1]; negative beyond it."""
    source: str
    """Where the limit comes from."""


@attrs.frozen
class StretchMargins:
    """How far a range of stretch is from each limit."""

    duty: str
    """The use: "sustained" or "cyclic"."""
    over: tuple[float, float]
    """Lowest and highest stretch [1]."""
    margins: tuple[StretchMargin, ...]
    """One for each limit, the worst first."""

    @property
    def worst(self) -> StretchMargin:
        """The limit that is nearest, or the most exceeded."""
        return self.margins[0]

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        word = "inside" if self.worst.margin >= 0.0 else "OUTSIDE"
        return (
            f"stretch {self.over[0]:.3g} to {self.over[1]:.3g}, {self.duty} use: {word} all limits"
            if self.worst.margin >= 0.0
            else f"stretch {self.over[0]:.3g} to {self.over[1]:.3g}, {self.duty} use: {word} {self.worst.name}"
        )

    def __str__(self) -> str:
        rows = [[m.name, f"{m.limit:.4g}", f"{m.stretch:.4g}", f"{m.margin:+.3g}", m.source] for m in self.margins]
        return f"{self.status}\n{grid(['limit', 'at', 'stretch', 'margin', 'source'], rows)}"


def stretch_margins(
    law: RubberLaw,
    over: tuple[float, float],
    *,
    duty: Literal["sustained", "cyclic"],
    limits: StretchLimits,
    break_stretch: float | None = None,
    loop_stretch: float | None = None,
    stacklevel: int = 2,
) -> StretchMargins:
    """Compare a range of stretch with every limit that is known, and warn of each that is exceeded."""
    low, high = over
    if duty not in {"sustained", "cyclic"}:
        raise InputError(f"duty must be 'sustained' or 'cyclic', got {duty!r}")
    found = [StretchMargin("least stretch", limits.lowest, low, low - limits.lowest, MEMORY)]

    def top(name: str, limit: float, source: str) -> None:
        found.append(StretchMargin(name, limit, high, limit - high, source))

    top(f"{duty} use", limits.sustained if duty == "sustained" else limits.cyclic, MEMORY)
    top("upturn", limits.upturn, MEMORY)
    if break_stretch is not None:
        if not break_stretch > 1.0:
            raise InputError(f"break_stretch must be > 1, got {break_stretch}; 750 % elongation is a stretch of 8.5")
        top(
            f"{limits.share_of_break:.0%} of break elongation",
            1.0 + limits.share_of_break * (break_stretch - 1.0),
            MEMORY,
        )
    fitted = fitted_over_of(law)
    if fitted is not None:
        found.append(StretchMargin("fitted from", fitted[0], low, low - fitted[0], "law"))
        top("fitted to", fitted[1], "law")
    if highest_stretch_of(law) < float("inf"):
        top("law holds to", float(highest_stretch_of(law)), "law")
    if loop_stretch is not None:
        top("loop loss measured to", loop_stretch, GIVEN)
    found.sort(key=lambda margin: margin.margin)
    for margin in found:
        if margin.margin < 0.0:
            side = "below" if margin.stretch < margin.limit else "above"
            warnings.warn(
                f"stretch {margin.stretch:.4g} is {-margin.margin:.3g} {side} the limit {margin.limit:.4g} "
                f"({margin.name}; {margin.source})",
                RubberStretchWarning,
                stacklevel=stacklevel + 1,
            )
    return StretchMargins(duty, (low, high), tuple(found))

"""The four forces by which gas springs are specified, and what they say about the gas."""

from __future__ import annotations

import attrs
import numpy as np

from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.tables import grid, number

__all__ = ["GasForces", "forces_to_law"]


@attrs.frozen
class GasForces:
    """Four forces of a gas spring: near both ends of the stroke, in both directions."""

    extending: tuple[Carrier, Carrier]
    """Forces (rod out, rod in) while extending [N]: F1, F2."""
    compressing: tuple[Carrier, Carrier]
    """Forces (rod out, rod in) while compressing [N]: F3, F4."""
    offset: Carrier
    """Where they hold, from either end of the stroke [m]."""

    @property
    def mean(self) -> tuple[Carrier, Carrier]:
        """Mean of both directions (rod out, rod in) [N]: what the gas alone exerts."""
        (f1, f2), (f3, f4) = self.extending, self.compressing
        return 0.5 * (f1 + f3), 0.5 * (f2 + f4)

    @property
    def friction(self) -> tuple[Carrier, Carrier]:
        """Half-band of friction (rod out, rod in) [N]."""
        (f1, f2), (f3, f4) = self.extending, self.compressing
        return 0.5 * (f3 - f1), 0.5 * (f4 - f2)

    @property
    def progression(self) -> Carrier:
        """F2/F1 [1], on the extending forces as makers state it."""
        return self.extending[1] / self.extending[0]

    @property
    def mean_progression(self) -> Carrier:
        """The same ratio of the mean forces [1], another number."""
        return self.mean[1] / self.mean[0]

    def __str__(self) -> str:
        columns = (self.extending, self.compressing, self.mean)
        rows = [
            ("rod out", *(_text(out, "N") for out, _ in columns)),
            ("rod in", *(_text(rod_in, "N") for _, rod_in in columns)),
            ("progression", *(_text(rod_in / out, "1") for out, rod_in in columns)),
        ]
        return f"four forces, read {_text(self.offset * 1e3, 'mm')} from either end of the stroke\n" + grid(
            ("", "extending", "compressing", "mean"), rows
        )


def forces_to_law(
    extending: tuple[Carrier, Carrier],
    compressing: tuple[Carrier, Carrier],
    stroke: Carrier,
    offset: Carrier,
    rod_area: Carrier,
    exponent: Carrier,
    atmosphere: Carrier,
) -> tuple[Carrier, Carrier]:
    """Absolute pressure at full extension [Pa] and length of the gas [m], from four forces [N].

    The mean forces at the compressions c and S - c give the ratio of absolute pressures, its n-th
    root r the ratio of volumes, and ``gas_length = (r (S - c) - c)/(r - 1)``.
    """
    (f1, f2), (f3, f4) = extending, compressing
    for name, value in (("F1", f1), ("F2", f2), ("F3", f3), ("F4", f4)):
        if _any(value <= 0.0):
            raise InputError(f"GasSpring forces must be > 0 N, got {name} = {value}")
    for ends, out, rod_in in (("extending", f1, f2), ("compressing", f3, f4)):
        if _any(rod_in <= out):
            raise InputError(
                f"GasSpring.{ends} must rise as the rod goes in, got {out} N out and {rod_in} N in; are they swapped?"
            )
    for place, less, more in (("rod out", f1, f3), ("rod in", f2, f4)):
        if _any(more < less):
            raise InputError(
                f"GasSpring.compressing must be >= extending, got {more} N and {less} N, {place}; are they swapped?"
            )
    for name, length in (("stroke", stroke), ("rod_area", rod_area)):
        if _any(length <= 0.0):
            raise InputError(f"GasSpring.{name} must be > 0, got {length}")
    if _any(offset < 0.0) or _any(2.0 * offset >= stroke):
        raise InputError(f"GasSpring.offset must be >= 0 and < half the stroke ({0.5 * stroke}) m, got {offset}")
    if _any(exponent <= 0.0):
        raise InputError(f"GasSpring.exponent must be from 1 (slow motion) to 2, got {exponent}")
    out, rod_in = 0.5 * (f1 + f3) / rod_area + atmosphere, 0.5 * (f2 + f4) / rod_area + atmosphere
    r = (rod_in / out) ** (1.0 / exponent)
    gas_length = (r * (stroke - offset) - offset) / (r - 1.0)
    if _any(gas_length <= stroke):
        raise InputError(
            f"GasSpring forces must rise by less than {(stroke - offset) / offset:.3g} times in absolute pressure "
            f"for this stroke and offset, got {rod_in / out:.3g} times; the gas would be used up within the stroke"
        )
    return out * ((gas_length - offset) / gas_length) ** exponent, gas_length


def _any(condition: object) -> bool:
    return bool(np.any(np.asarray(condition)))


def _text(value: Carrier, unit: str) -> str:
    """A value with its unit; for scattered builds the least and the greatest."""
    low, high = number(float(np.min(value)), unit), number(float(np.max(value)), unit)
    return low if low == high else f"{low} to {high}"

"""Stress factors of coiled round wire, each under its author's or its own name.

A factor multiplies the nominal stress of a straight wire: 8 F D/(π d³) for a coil in torsion,
32 M/(π d³) for a coil in bending. ``index`` is C = D/d, mean diameter over wire. An allowable
stress belongs to the factor it was found with: see
:class:`springpoise.springs.materials.Allowable`.

Sources: Budynas and Nisbett, Shigley's Mechanical Engineering Design, ch. 10, as transcribed;
Göhner's series from memory, checked against the others.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

from springpoise.carriers import Carrier
from springpoise.errors import InputError

__all__ = [
    "TORSION_FACTORS",
    "bending_inner",
    "bending_outer",
    "bergstraesser",
    "curvature",
    "direct_shear",
    "direct_shear_softening",
    "goehner",
    "hook_bending",
    "hook_torsion",
    "torsion_factor",
    "uncorrected",
    "wahl",
]


def uncorrected(index: Carrier) -> Carrier:
    """No correction: 1."""
    return 1.0 + 0.0 * index


def direct_shear(index: Carrier) -> Carrier:
    """Direct shear only, without curvature: (2C + 1)/(2C)."""
    return (2.0 * index + 1.0) / (2.0 * index)


def wahl(index: Carrier) -> Carrier:
    """Wahl's factor for direct shear and curvature: (4C - 1)/(4C - 4) + 0.615/C, for C > 1."""
    return (4.0 * index - 1.0) / (4.0 * index - 4.0) + 0.615 / index


def bergstraesser(index: Carrier) -> Carrier:
    """Bergsträsser's factor for the same: (4C + 2)/(4C - 3), for C > 0.75; also (C + 0.5)/(C - 0.75)."""
    return (4.0 * index + 2.0) / (4.0 * index - 3.0)


def goehner(index: Carrier) -> Carrier:
    """Göhner's series for the same: 1 + 5/(4C) + 7/(8C²) + 1/C³."""
    return 1.0 + (1.25 + (0.875 + 1.0 / index) / index) / index


def curvature(index: Carrier) -> Carrier:
    """Curvature only: Bergsträsser's factor over that for direct shear."""
    return bergstraesser(index) / direct_shear(index)


def bending_inner(index: Carrier) -> Carrier:
    """Bending stress at the inner fibre of a coil: (4C² - C - 1)/(4C(C - 1)), for C > 1."""
    return (4.0 * index * index - index - 1.0) / (4.0 * index * (index - 1.0))


def bending_outer(index: Carrier) -> Carrier:
    """Bending stress at the outer fibre of a coil, below 1: (4C² + C - 1)/(4C(C + 1))."""
    return (4.0 * index * index + index - 1.0) / (4.0 * index * (index + 1.0))


def hook_bending(index: Carrier) -> Carrier:
    """Bending where a hook leaves the body in its plane; ``index`` = 2 r/d with the hook's mean radius r."""
    return bending_inner(index)


def hook_torsion(index: Carrier) -> Carrier:
    """Torsion in the bend at right angles to it: (4C - 1)/(4C - 4); ``index`` = 2 r/d with the bend's mean radius r."""
    return (4.0 * index - 1.0) / (4.0 * index - 4.0)


def direct_shear_softening(index: Carrier) -> Carrier:
    """How many times the travel grows through direct shear: 1 + 1/(2C²). Rates are usually stated without it."""
    return 1.0 + 0.5 / (index * index)


TORSION_FACTORS: dict[str, Callable[[Carrier], Carrier]] = {
    "uncorrected": uncorrected,
    "direct shear": direct_shear,
    "wahl": wahl,
    "bergstraesser": bergstraesser,
    "goehner": goehner,
}
"""Factors for the body of a coil in torsion, by name."""


def torsion_factor(name: Any, index: Carrier) -> Carrier:
    """The body's factor by name.

    Raises
    ------
    InputError
        A name that is not among ``TORSION_FACTORS``.
    """
    if not isinstance(name, str) or name not in TORSION_FACTORS:
        raise InputError(f"stress_factor must be one of {', '.join(map(repr, TORSION_FACTORS))}, got {name!r}")
    return TORSION_FACTORS[name](index)


def shear_per_load(wire: Carrier, mean_diameter: Carrier, factor: Carrier) -> Carrier:
    """Shear stress in the body for each newton [Pa/N]: K 8 D/(π d³)."""
    return factor * 8.0 * mean_diameter / (math.pi * wire**3.0)


def bending_per_moment(wire: Carrier, factor: Carrier) -> Carrier:
    """Bending stress for each newton metre [Pa/(N·m)]: K 32/(π d³)."""
    return factor * 32.0 / (math.pi * wire**3.0)

"""What the springs warn of: a value that is unwise, yet means something. Each text states the margin."""

from __future__ import annotations

from typing import Any

import numpy as np

__all__ = [
    "BucklingWarning",
    "CoilCountWarning",
    "GasPressureWarning",
    "GasProgressionWarning",
    "GasTemperatureWarning",
    "PowerSpringWarning",
    "RodUpWarning",
    "RubberCreepWarning",
    "RubberFitWarning",
    "RubberModulusWarning",
    "RubberStretchWarning",
    "SpringIndexWarning",
    "SpringWarning",
    "StripDrumWarning",
    "TemperatureWarning",
    "span",
]


class SpringWarning(UserWarning):
    """Base of everything that springs warn of."""


class SpringIndexWarning(SpringWarning):
    """A spring index outside 4 to 12, where winding is difficult or the coil is limp."""


class CoilCountWarning(SpringWarning):
    """A number of active coils outside the range in which the formulas were confirmed."""


class BucklingWarning(SpringWarning):
    """An unguided compression coil that would bow out before it reaches the end of its range."""


class TemperatureWarning(SpringWarning):
    """A temperature above the wire's own limit."""


class GasPressureWarning(SpringWarning):
    """A gas spring's filling outside the range of pressures in which such springs are made."""


class GasProgressionWarning(SpringWarning):
    """A gas spring whose force rises over its stroke by more or less than such springs usually do."""


class GasTemperatureWarning(SpringWarning):
    """A temperature outside the range in which gas springs are tested."""


class RodUpWarning(SpringWarning):
    """A gas spring mounted so that oil leaves its seal: rod upward, or too far from straight down."""


class StripDrumWarning(SpringWarning):
    """A drum too small or too large for the strip that coils on it."""


class PowerSpringWarning(SpringWarning):
    """An arbor or a length outside the usual proportions of power springs."""


class RubberStretchWarning(SpringWarning):
    """Rubber stretched outside the range in which its law was fitted, or beyond a limit of use."""


class RubberModulusWarning(SpringWarning):
    """A rubber modulus so far from that of any rubber that its unit is in doubt."""


class RubberCreepWarning(SpringWarning):
    """Creep of rubber beyond the time over which it was measured."""


class RubberFitWarning(SpringWarning):
    """A fitted rubber law that is doubtful outside the very test that it was fitted to."""


def span(values: Any) -> str:
    """A value, or the least and the greatest of several, for a warning's text."""
    low, high = f"{np.min(values):.4g}", f"{np.max(values):.4g}"
    return low if low == high else f"{low} to {high}"

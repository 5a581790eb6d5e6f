"""Temperature and time: how a spring changes in service, with every number given by the user."""

from __future__ import annotations

from typing import Any

from springpoise import units
from springpoise.errors import InputError
from springpoise.units import ScalarLike

__all__ = ["ROOM_TEMPERATURE", "remaining", "warmed"]

ROOM_TEMPERATURE = 293.15
"""Temperature at which springs are usually specified [K]: 20 °C (common practice, no source)."""


def warmed(temperature: ScalarLike, slope: ScalarLike, reference: ScalarLike, name: str) -> Any:
    """Factor on a load at ``temperature`` [1] for a relative ``slope`` [1/K] about ``reference``."""
    change = units.per_kelvin(slope, name)
    factor = 1.0 + change * (units.kelvin(temperature, "temperature") - units.kelvin(reference, "reference"))
    if isinstance(factor, float) and not factor > 0:
        raise InputError(
            f"{name} must leave a load at that temperature, got {change:g} 1/K, which leaves {factor:g} of it"
        )
    return factor


def remaining(load_loss: ScalarLike) -> Any:
    """Share of a load that remains [1] after a loss from 0 to below 1."""
    loss = units.number(load_loss, "load_loss")
    if isinstance(loss, float) and not 0.0 <= loss < 1.0:
        raise InputError(f"load_loss must be from 0 to below 1, got {loss:g}")
    return 1.0 - loss

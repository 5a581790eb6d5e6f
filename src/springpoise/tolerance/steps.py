"""How much of a unit is a natural step, so that effects of unlike fields can be compared."""

from __future__ import annotations

__all__ = ["step_of", "step_text"]

_STEPS = {
    "m": (1e-3, "1 mm"),
    "rad": (0.017453292519943295, "1 deg"),
    "kg": (0.01, "10 g"),
    "N": (1.0, "1 N"),
    "N/m": (1.0, "1 N/m"),
    "N*m": (0.01, "0.01 N*m"),
    "N*m/rad": (0.01, "0.01 N*m/rad"),
    "m/s**2": (0.01, "0.01 m/s**2"),
    "Pa": (1e4, "10 kPa"),
    "K": (1.0, "1 K"),
    "1": (0.01, "0.01"),
}


def step_of(unit: str) -> float:
    """The step in SI units: what a drawing, a scale or a spring list may well be off by."""
    return _STEPS.get(unit, (1.0, ""))[0]


def step_text(unit: str) -> str:
    """The step as text, such as ``"1 mm"``."""
    return _STEPS.get(unit, (1.0, f"1 {unit}"))[1]

"""Units of fields whose converters do more than one thing, so that the field itself cannot tell its unit."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

__all__ = ["FIELD_UNITS", "OWNER_UNITS", "joint_unit"]

_LAWS = ("NeoHookean", "MooneyRivlin", "Yeoh", "Gent", "Ogden", "ArrudaBoyce")

FIELD_UNITS: Mapping[str, str] = {
    "GasSpring.friction": "N",
    "VanDerWaals.attraction": "Pa*m**6/mol**2",
    "VanDerWaals.covolume": "m**3/mol",
    "Ogden.mu": "Pa",
    "Ogden.alpha": "1",
    **{f"{law}.fitted_over": "1" for law in _LAWS},
    "RubberTube.stretch_range": "1",
    "TorqueCurve.angles": "rad",
    "LifeTable.pairs": "1",
    "ExtensionCoil.initial_tension": "N",
    "TorsionCoil.legs": "m",
    "MethodAssumptions.rubber_stretch": "1",
    "SpatialLink.axis": "1",
    "SpatialLink.limits": "rad",
}
"""Units by class and field."""


def joint_unit(link: Any) -> str:
    """Unit of the travel of a link's joint."""
    return "m" if link.joint == "prismatic" else "rad"


OWNER_UNITS: Mapping[str, Callable[[Any], str]] = {"SpatialLink.limits": joint_unit}
"""Units that depend on the object that has the field."""

"""Units of fields whose converters do more than one thing, so that the field itself cannot tell its unit."""

from __future__ import annotations

from collections.abc import Mapping

__all__ = ["FIELD_UNITS"]

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
}
"""Units by class and field."""

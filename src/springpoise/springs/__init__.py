"""Springs: each knows only its own length (or angle) and what it does there.

Positive load pulls the ends together. A spring of your own needs no base class: any object with
``load(x)``, ``stiffness(x)`` and ``energy(x)`` works (see `Spring`).

The names below are loaded when they are first used, so that a mechanism loads only what it has.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.springs import materials as materials
    from springpoise.springs import rubber as rubber
    from springpoise.springs import wire as wire
    from springpoise.springs.compression import CompressionSpring as CompressionSpring
    from springpoise.springs.constant_force import ConstantForceSpring as ConstantForceSpring
    from springpoise.springs.extension import ExtensionSpring as ExtensionSpring
    from springpoise.springs.gas.forces import GasForces as GasForces
    from springpoise.springs.gas.mounting import GasMounting as GasMounting
    from springpoise.springs.gas.mounting import check_gas_mounting as check_gas_mounting
    from springpoise.springs.gas.mounting import rod_down_margin as rod_down_margin
    from springpoise.springs.gas.spring import GasSpring as GasSpring
    from springpoise.springs.gas.state import NITROGEN as NITROGEN
    from springpoise.springs.gas.state import NITROGEN_VAN_DER_WAALS as NITROGEN_VAN_DER_WAALS
    from springpoise.springs.gas.state import GasLaw as GasLaw
    from springpoise.springs.gas.state import IdealGas as IdealGas
    from springpoise.springs.gas.state import PengRobinson as PengRobinson
    from springpoise.springs.gas.state import VanDerWaals as VanDerWaals
    from springpoise.springs.measured import MeasuredSpring as MeasuredSpring
    from springpoise.springs.parallel import OffsetSpring as OffsetSpring
    from springpoise.springs.parallel import ParallelSprings as ParallelSprings
    from springpoise.springs.parallel import in_parallel as in_parallel
    from springpoise.springs.protocol import FittableSpring as FittableSpring
    from springpoise.springs.protocol import LoadTerms as LoadTerms
    from springpoise.springs.protocol import Spring as Spring
    from springpoise.springs.rubber.tube import RubberTube as RubberTube
    from springpoise.springs.scaled import ScaledSpring as ScaledSpring
    from springpoise.springs.series import SeriesSprings as SeriesSprings
    from springpoise.springs.series import in_series as in_series
    from springpoise.springs.series import wire_rope as wire_rope
    from springpoise.springs.strips.power_spring import PowerSpring as PowerSpring
    from springpoise.springs.strips.power_spring import TorqueCurve as TorqueCurve
    from springpoise.springs.strips.spiral import Spiral as Spiral
    from springpoise.springs.strips.spiral import SpiralMargins as SpiralMargins
    from springpoise.springs.strips.strip import LifeTable as LifeTable
    from springpoise.springs.strips.strip import Strip as Strip
    from springpoise.springs.strips.strip import StripMargins as StripMargins
    from springpoise.springs.strips.strip_spring import StripSpring as StripSpring
    from springpoise.springs.torsion import TorsionSpring as TorsionSpring
    from springpoise.springs.warnings import BucklingWarning as BucklingWarning
    from springpoise.springs.warnings import CoilCountWarning as CoilCountWarning
    from springpoise.springs.warnings import GasPressureWarning as GasPressureWarning
    from springpoise.springs.warnings import GasProgressionWarning as GasProgressionWarning
    from springpoise.springs.warnings import GasTemperatureWarning as GasTemperatureWarning
    from springpoise.springs.warnings import PowerSpringWarning as PowerSpringWarning
    from springpoise.springs.warnings import RodUpWarning as RodUpWarning
    from springpoise.springs.warnings import RubberCreepWarning as RubberCreepWarning
    from springpoise.springs.warnings import RubberFitWarning as RubberFitWarning
    from springpoise.springs.warnings import RubberModulusWarning as RubberModulusWarning
    from springpoise.springs.warnings import RubberStretchWarning as RubberStretchWarning
    from springpoise.springs.warnings import SpringIndexWarning as SpringIndexWarning
    from springpoise.springs.warnings import SpringWarning as SpringWarning
    from springpoise.springs.warnings import StripDrumWarning as StripDrumWarning
    from springpoise.springs.warnings import TemperatureWarning as TemperatureWarning
    from springpoise.springs.wire.compression_coil import CompressionCoil as CompressionCoil
    from springpoise.springs.wire.extension_coil import ExtensionCoil as ExtensionCoil
    from springpoise.springs.wire.fatigue import ZIMMERLI_PEENED as ZIMMERLI_PEENED
    from springpoise.springs.wire.fatigue import ZIMMERLI_UNPEENED as ZIMMERLI_UNPEENED
    from springpoise.springs.wire.fatigue import EndurancePoint as EndurancePoint
    from springpoise.springs.wire.fatigue import Fatigue as Fatigue
    from springpoise.springs.wire.margins import CoilMargins as CoilMargins
    from springpoise.springs.wire.margins import Margin as Margin
    from springpoise.springs.wire.torsion_coil import TorsionCoil as TorsionCoil
    from springpoise.springs.zero_length import ZeroLengthSpring as ZeroLengthSpring

__all__ = [
    "NITROGEN",
    "NITROGEN_VAN_DER_WAALS",
    "ZIMMERLI_PEENED",
    "ZIMMERLI_UNPEENED",
    "BucklingWarning",
    "CoilCountWarning",
    "CoilMargins",
    "CompressionCoil",
    "CompressionSpring",
    "ConstantForceSpring",
    "EndurancePoint",
    "ExtensionCoil",
    "ExtensionSpring",
    "Fatigue",
    "FittableSpring",
    "GasForces",
    "GasLaw",
    "GasMounting",
    "GasPressureWarning",
    "GasProgressionWarning",
    "GasSpring",
    "GasTemperatureWarning",
    "IdealGas",
    "LifeTable",
    "LoadTerms",
    "Margin",
    "MeasuredSpring",
    "OffsetSpring",
    "ParallelSprings",
    "PengRobinson",
    "PowerSpring",
    "PowerSpringWarning",
    "RodUpWarning",
    "RubberCreepWarning",
    "RubberFitWarning",
    "RubberModulusWarning",
    "RubberStretchWarning",
    "RubberTube",
    "ScaledSpring",
    "SeriesSprings",
    "Spiral",
    "SpiralMargins",
    "Spring",
    "SpringIndexWarning",
    "SpringWarning",
    "Strip",
    "StripDrumWarning",
    "StripMargins",
    "StripSpring",
    "TemperatureWarning",
    "TorqueCurve",
    "TorsionCoil",
    "TorsionSpring",
    "VanDerWaals",
    "ZeroLengthSpring",
    "check_gas_mounting",
    "in_parallel",
    "in_series",
    "materials",
    "rod_down_margin",
    "rubber",
    "wire",
    "wire_rope",
]

_HOME = {
    "NITROGEN": "gas.state",
    "NITROGEN_VAN_DER_WAALS": "gas.state",
    "ZIMMERLI_PEENED": "wire.fatigue",
    "ZIMMERLI_UNPEENED": "wire.fatigue",
    "BucklingWarning": "warnings",
    "CoilCountWarning": "warnings",
    "CoilMargins": "wire.margins",
    "CompressionCoil": "wire.compression_coil",
    "CompressionSpring": "compression",
    "ConstantForceSpring": "constant_force",
    "EndurancePoint": "wire.fatigue",
    "ExtensionCoil": "wire.extension_coil",
    "ExtensionSpring": "extension",
    "Fatigue": "wire.fatigue",
    "FittableSpring": "protocol",
    "GasForces": "gas.forces",
    "GasLaw": "gas.state",
    "GasMounting": "gas.mounting",
    "GasPressureWarning": "warnings",
    "GasProgressionWarning": "warnings",
    "GasSpring": "gas.spring",
    "GasTemperatureWarning": "warnings",
    "IdealGas": "gas.state",
    "LifeTable": "strips.strip",
    "LoadTerms": "protocol",
    "Margin": "wire.margins",
    "MeasuredSpring": "measured",
    "OffsetSpring": "parallel",
    "ParallelSprings": "parallel",
    "PengRobinson": "gas.state",
    "PowerSpring": "strips.power_spring",
    "PowerSpringWarning": "warnings",
    "RodUpWarning": "warnings",
    "RubberCreepWarning": "warnings",
    "RubberFitWarning": "warnings",
    "RubberModulusWarning": "warnings",
    "RubberStretchWarning": "warnings",
    "RubberTube": "rubber.tube",
    "ScaledSpring": "scaled",
    "SeriesSprings": "series",
    "Spiral": "strips.spiral",
    "SpiralMargins": "strips.spiral",
    "Spring": "protocol",
    "SpringIndexWarning": "warnings",
    "SpringWarning": "warnings",
    "Strip": "strips.strip",
    "StripDrumWarning": "warnings",
    "StripMargins": "strips.strip",
    "StripSpring": "strips.strip_spring",
    "TemperatureWarning": "warnings",
    "TorqueCurve": "strips.power_spring",
    "TorsionCoil": "wire.torsion_coil",
    "TorsionSpring": "torsion",
    "VanDerWaals": "gas.state",
    "ZeroLengthSpring": "zero_length",
    "check_gas_mounting": "gas.mounting",
    "in_parallel": "parallel",
    "in_series": "series",
    "rod_down_margin": "gas.mounting",
    "wire_rope": "series",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(
        __name__,
        _HOME,
        (
            "materials",
            "rubber",
            "wire",
        ),
    )


def __dir__() -> list[str]:
    return sorted(__all__)

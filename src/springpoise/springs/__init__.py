"""Springs: each knows only its own length (or angle) and what it does there.

Positive load pulls the ends together. A spring of your own needs no base class: any object with
``load(x)``, ``stiffness(x)`` and ``energy(x)`` works (see ``Spring``).
"""

from springpoise.springs.compression import CompressionSpring
from springpoise.springs.constant_force import ConstantForceSpring
from springpoise.springs.extension import ExtensionSpring
from springpoise.springs.measured import MeasuredSpring
from springpoise.springs.parallel import OffsetSpring, ParallelSprings, in_parallel
from springpoise.springs.protocol import FittableSpring, LoadTerms, Spring
from springpoise.springs.scaled import ScaledSpring
from springpoise.springs.series import SeriesSprings, in_series, wire_rope
from springpoise.springs.torsion import TorsionSpring
from springpoise.springs.zero_length import ZeroLengthSpring

__all__ = [
    "CompressionSpring",
    "ConstantForceSpring",
    "ExtensionSpring",
    "FittableSpring",
    "LoadTerms",
    "MeasuredSpring",
    "OffsetSpring",
    "ParallelSprings",
    "ScaledSpring",
    "SeriesSprings",
    "Spring",
    "TorsionSpring",
    "ZeroLengthSpring",
    "in_parallel",
    "in_series",
    "wire_rope",
]

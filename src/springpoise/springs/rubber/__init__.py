"""Rubber as a spring: stress-stretch laws, their fit to a test, and the tube that follows them.

Fit a law to a tension test with :func:`fit`, or take one with known parameters; make a
:class:`RubberTube` of it; change it for earlier stretch, time, temperature and age.
"""

from springpoise.springs.rubber.chain import ArrudaBoyce, Gent
from springpoise.springs.rubber.creep import (
    DRY_AIR,
    DRY_NITROGEN_OR_VACUUM,
    HUMID_AIR,
    Crept,
    Environment,
    creep_per_relaxation,
)
from springpoise.springs.rubber.fitting import RubberFit, fit
from springpoise.springs.rubber.law import RubberLaw
from springpoise.springs.rubber.limits import StretchLimits, StretchMargin, StretchMargins
from springpoise.springs.rubber.ogden import Ogden
from springpoise.springs.rubber.polynomial import MooneyRivlin, NeoHookean, Yeoh
from springpoise.springs.rubber.scaled import Stiffened
from springpoise.springs.rubber.softening import Softened
from springpoise.springs.rubber.straightness import Line, ZeroLengthFit
from springpoise.springs.rubber.temperature import (
    equivalent_time,
    peroxide_cured_energy_share,
    peroxide_cured_modulus,
    thermal_factor,
)
from springpoise.springs.rubber.tube import RubberTube

__all__ = [
    "DRY_AIR",
    "DRY_NITROGEN_OR_VACUUM",
    "HUMID_AIR",
    "ArrudaBoyce",
    "Crept",
    "Environment",
    "Gent",
    "Line",
    "MooneyRivlin",
    "NeoHookean",
    "Ogden",
    "RubberFit",
    "RubberLaw",
    "RubberTube",
    "Softened",
    "Stiffened",
    "StretchLimits",
    "StretchMargin",
    "StretchMargins",
    "Yeoh",
    "ZeroLengthFit",
    "creep_per_relaxation",
    "equivalent_time",
    "fit",
    "peroxide_cured_energy_share",
    "peroxide_cured_modulus",
    "thermal_factor",
]

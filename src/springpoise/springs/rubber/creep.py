"""Creep and relaxation of rubber: a part that goes with the logarithm of time, and oxidation."""

from __future__ import annotations

import math
import warnings
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.springs.rubber.law import RubberLaw, fitted_over_of, highest_stretch_of
from springpoise.springs.warnings import RubberCreepWarning
from springpoise.units import ScalarLike

__all__ = ["DRY_AIR", "DRY_NITROGEN_OR_VACUUM", "HUMID_AIR", "Crept", "Environment", "creep_per_relaxation"]

MINUTE = 60.0
DAY = 86400.0


def _per_second(value: ScalarLike) -> Any:
    return units.scalar_si(value, "1/s", "Environment.per_second")


def _not_negative(instance: object, attribute: attrs.Attribute[Any], value: Any) -> None:
    if isinstance(value, float | np.ndarray) and not np.all(np.asarray(value) >= 0.0):
        raise InputError(f"Environment.per_second must be >= 0 1/s, got {value}")


@attrs.frozen(field_transformer=units.named_fields)
class Environment:
    """How fast rubber creeps in some surroundings: ``creep = A lg(t / 1 min) + B t``.

    Creep is the growth of the extension under a constant load, as a share of the extension after
    one minute. The logarithm is the rubber's own viscoelasticity; the part that goes with time
    itself is slow oxidation, and in air it is the larger one after some weeks.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.

    Examples
    --------
    >>> HUMID_AIR.creep("30 days")
    0.4014
    """

    name: str
    """What it is called in tables."""
    per_decade: Carrier = attrs.field(converter=units.number, validator=units.not_negative, kw_only=True)
    """A: creep in each tenfold of time [1], >= 0."""
    per_second: Carrier = attrs.field(converter=_per_second, validator=_not_negative, kw_only=True)
    """B: creep with time [1/s], >= 0."""
    tested_to: Carrier = attrs.field(converter=units.second, validator=units.positive, kw_only=True)
    """Time over which it was measured [s], > 0."""
    source: str = attrs.field(default="", kw_only=True)
    """Where the numbers come from."""

    @property
    def logarithm_alone_to(self) -> Carrier:
        """Time up to which the logarithm alone will do [s]: 0.1 A/B."""
        return self._ratio(0.1)

    @property
    def oxidation_leads_from(self) -> Carrier:
        """Time from which oxidation runs ten times as fast as the logarithm [s]: 10/ln 10 · A/B."""
        return self._ratio(10.0 / math.log(10.0))

    def _ratio(self, factor: float) -> Carrier:
        with np.errstate(divide="ignore"):
            return factor * np.divide(self.per_decade, self.per_second)[()]

    def creep(self, time: ScalarLike) -> Carrier:
        """Growth of the extension under constant load, as a share of that after one minute [1].

        Parameters
        ----------
        time
            Time under load [s], at least one minute. Beyond ``tested_to`` there is a warning.
        """
        return self._creep(time, 3)

    def _creep(self, time: ScalarLike, stacklevel: int) -> Carrier:
        seconds = units.second(time, "time")
        if np.any(np.asarray(seconds < MINUTE)):
            raise InputError(f"time must be >= {MINUTE:g} s, where creep is counted from, got {seconds}")
        if np.any(np.asarray(seconds > self.tested_to)):
            longest = float(np.max(seconds)) / DAY
            warnings.warn(
                f"creep in {self.name} was measured over {float(np.min(self.tested_to)) / DAY:.0f} days; "
                f"{longest:.4g} days is {longest * DAY / float(np.min(self.tested_to)):.3g} times that",
                RubberCreepWarning,
                stacklevel=stacklevel,
            )
        growth = self.per_decade * np.log10(seconds / MINUTE) + self.per_second * seconds
        return float(growth) if np.ndim(growth) == 0 else growth


_SOURCE = "Wood, Bullman and Roth (1974), J. Res. NBS 78A:623-629, abstract; pure-gum natural rubber"

DRY_NITROGEN_OR_VACUUM = Environment(
    "dry nitrogen or vacuum",
    per_decade=0.024,
    per_second=2e-7 / MINUTE,
    tested_to=70 * DAY,
    source=_SOURCE,
)
"""2.4 % a decade and 2e-5 % a minute; measured over about 70 days (Wood, Bullman and Roth 1974)."""

DRY_AIR = Environment("dry air", per_decade=0.024, per_second=20e-7 / MINUTE, tested_to=70 * DAY, source=_SOURCE)
"""2.4 % a decade and 20e-5 % a minute; measured over about 70 days (Wood, Bullman and Roth 1974)."""

HUMID_AIR = Environment("humid air", per_decade=0.04, per_second=50e-7 / MINUTE, tested_to=70 * DAY, source=_SOURCE)
"""4 % a decade and 50e-5 % a minute; measured over about 70 days (Wood, Bullman and Roth 1974)."""


@attrs.frozen(field_transformer=units.named_fields)
class Crept:
    """A law after creep: at each stress, the extension is ``1 + creep`` times what it was.

    So ``stress(λ)`` is the fresh law's at ``1 + (λ - 1)/(1 + creep)``. To first order this is the
    rule that at fixed length the stress falls by ``creep / α`` with α from
    :func:`creep_per_relaxation` (confirmed by Gent, Rubber Chem. Technol. 36:697); unlike that
    rule it keeps an energy, and stays sound when the creep is large.

    Raises
    ------
    InputError
        A creep that is negative or not finite.
    """

    law: RubberLaw
    """The law one minute after stretching."""
    creep: Carrier = attrs.field(converter=units.number, validator=units.not_negative)
    """Growth of the extension at constant load [1], >= 0."""

    @property
    def fitted_over(self) -> tuple[float, float] | None:
        """The range of the law itself [1]."""
        return fitted_over_of(self.law)

    @property
    def highest_stretch(self) -> Carrier:
        """The stretch to which the highest one of the law itself has crept [1]."""
        return 1.0 + (highest_stretch_of(self.law) - 1.0) * (1.0 + self.creep)

    def _before(self, stretch: Carrier) -> Carrier:
        return 1.0 + (stretch - 1.0) / (1.0 + self.creep)

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section."""
        return self.law.stress(self._before(stretch))

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        return self.law.tangent(self._before(stretch)) / (1.0 + self.creep)

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], zero at stretch 1."""
        return (1.0 + self.creep) * self.law.energy_density(self._before(stretch))


def creep_per_relaxation(law: RubberLaw, stretch: Carrier) -> Carrier:
    """How many times the rate of creep at constant load exceeds that of relaxation at constant length [1].

    ``α = stress / (strain · d stress/d strain)`` with strain = stretch - 1. The form is from
    memory; that the two rates are tied in this way was confirmed by Gent, Relaxation processes in
    vulcanized rubber III, Rubber Chem. Technol. 36:697.
    """
    return law.stress(stretch) / ((stretch - 1.0) * law.tangent(stretch))

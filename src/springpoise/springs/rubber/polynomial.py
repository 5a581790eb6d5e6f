"""The laws that are polynomials in the invariants: neo-Hookean, Mooney-Rivlin and Yeoh."""

from __future__ import annotations

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError
from springpoise.springs.rubber.law import (
    FirstInvariantLaw,
    admitted,
    first_invariant_rise,
    fitted_range,
    increasing,
    pull,
    pull_slope,
    second_invariant_rise,
)

__all__ = ["MooneyRivlin", "NeoHookean", "Yeoh"]


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class NeoHookean(FirstInvariantLaw):
    """The neo-Hookean law: ``stress = mu · (λ - λ⁻²)``, energy density ``mu/2 · (I₁ - 3)``.

    Good to about stretch 1.5. With a modulus from small strain it is 32 to 55 % too stiff at
    stretch 3 to 4, where Treloar's data fall 24 to 35 % below it.

    Raises
    ------
    InputError, UnitError
        A modulus that is not positive and finite, or of another dimension.

    References
    ----------
    Treloar, L. R. G. (1944), Trans. Faraday Soc. 40:59-70.

    Examples
    --------
    >>> NeoHookean(mu="0.4 MPa").stress(2.0)
    700000.0
    """

    mu: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Shear modulus [Pa], > 0."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]; Young's modulus is three times this."""
        return self.mu

    def _energy(self, rise: Carrier) -> Carrier:
        return 0.5 * self.mu * rise

    def _first(self, rise: Carrier) -> Carrier:
        return 0.5 * self.mu

    def _second(self, rise: Carrier) -> Carrier:
        return 0.0


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class Yeoh(FirstInvariantLaw):
    """Yeoh's law: ``stress = 2 (λ - λ⁻²) [c1 + 2 c2 J + 3 c3 J²]`` with ``J = I₁ - 3``.

    Energy density ``c1 J + c2 J² + c3 J³``. Follows soft rubber through its softening and into
    its upturn; outside the range it was fitted over, the cubic runs away.

    Raises
    ------
    InputError, UnitError
        ``c1`` not positive, or a value of another dimension.

    Examples
    --------
    >>> law = Yeoh(c1="0.23155 MPa", c2="-3.3075 kPa", c3="107.03 Pa")
    >>> round(law.stress(3.0))
    1165497
    """

    c1: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Half the shear modulus at small strain [Pa], > 0."""
    c2: Carrier = attrs.field(converter=units.pascal)
    """Second coefficient [Pa]; negative for rubber that softens first."""
    c3: Carrier = attrs.field(converter=units.pascal)
    """Third coefficient [Pa]."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]: 2 c1."""
        return 2.0 * self.c1

    def _energy(self, rise: Carrier) -> Carrier:
        return ((self.c3 * rise + self.c2) * rise + self.c1) * rise

    def _first(self, rise: Carrier) -> Carrier:
        return (3.0 * self.c3 * rise + 2.0 * self.c2) * rise + self.c1

    def _second(self, rise: Carrier) -> Carrier:
        return 6.0 * self.c3 * rise + 2.0 * self.c2


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class MooneyRivlin:
    """The law of Mooney and Rivlin: ``stress = 2 (λ - λ⁻²) (c1 + c2/λ)``.

    Energy density ``c1 (I₁ - 3) + c2 (I₂ - 3)``. Good to about stretch 4 and without an upturn.
    Fitted over a full curve with its upturn, ``c2`` comes out negative: such a law is unstable in
    anything but this tension test, so fit the range that is used.

    Raises
    ------
    InputError, UnitError
        ``c1 + c2`` not positive, or a value of another dimension.

    Examples
    --------
    >>> MooneyRivlin(c1="0.15 MPa", c2="0.015 MPa").stress(2.0)
    551250.0
    """

    c1: Carrier = attrs.field(converter=units.pascal)
    """Coefficient of the first invariant [Pa]."""
    c2: Carrier = attrs.field(converter=units.pascal)
    """Coefficient of the second invariant [Pa]."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    def __attrs_post_init__(self) -> None:
        if np.any(np.asarray(self.c1 + self.c2 <= 0.0)):
            raise InputError(
                f"MooneyRivlin.c1 + c2 must be > 0 Pa, got {self.c1} + {self.c2}; it is half the shear modulus"
            )

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]: 2 (c1 + c2)."""
        return 2.0 * (self.c1 + self.c2)

    def stress(self, stretch: Carrier) -> Carrier:
        """Nominal stress [Pa], force over unstretched cross-section."""
        stretch = admitted(stretch)
        return 2.0 * pull(stretch) * (self.c1 + self.c2 / stretch)

    def tangent(self, stretch: Carrier) -> Carrier:
        """Slope of the nominal stress over the stretch [Pa]."""
        stretch = admitted(stretch)
        by_pull = pull_slope(stretch) * (self.c1 + self.c2 / stretch)
        return 2.0 * (by_pull - pull(stretch) * self.c2 / (stretch * stretch))

    def energy_density(self, stretch: Carrier) -> Carrier:
        """Energy stored in a unit of volume [J/m³], zero at stretch 1."""
        stretch = admitted(stretch)
        return self.c1 * first_invariant_rise(stretch) + self.c2 * second_invariant_rise(stretch)

"""The laws with a stretch at which the chains lock: Gent, and the eight-chain law."""

from __future__ import annotations

import math

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.rubber.langevin import inverse_langevin, langevin_slope, log_sinh_ratio
from springpoise.springs.rubber.law import FirstInvariantLaw, fitted_range, increasing, stretch_at_first_invariant

__all__ = ["ArrudaBoyce", "Gent"]


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class Gent(FirstInvariantLaw):
    """Gent's law: ``stress = mu (λ - λ⁻²) · jm / (jm - J)`` with ``J = I₁ - 3``.

    Energy density ``-mu jm/2 · ln(1 - J/jm)``. At ``J = jm`` the chains are fully stretched; from
    there on every result is NaN.

    Raises
    ------
    InputError, UnitError
        A value that is not positive and finite, or of another dimension.

    Examples
    --------
    >>> law = Gent(mu="0.248 MPa", jm=79.4)
    >>> round(law.highest_stretch, 3), law.stress(9.2)
    (9.065, nan)
    """

    mu: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Shear modulus at small strain [Pa], > 0."""
    jm: Carrier = attrs.field(converter=units.number, validator=units.positive)
    """Largest I₁ - 3 [1], > 0; tens to about 100 for soft rubber."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]."""
        return self.mu

    @property
    def highest_stretch(self) -> Carrier:
        """Stretch at which the chains lock [1]."""
        return stretch_at_first_invariant(self.jm)

    def _left(self, rise: Carrier) -> Carrier:
        """1 - J/jm; NaN from the lock on."""
        left = 1.0 - rise / self.jm
        return namespace(left).where(left > 0.0, left, math.nan)

    def _energy(self, rise: Carrier) -> Carrier:
        share = rise / self.jm
        xp = namespace(share)
        return -0.5 * self.mu * self.jm * xp.log1p(-xp.where(share < 1.0, share, math.nan))

    def _first(self, rise: Carrier) -> Carrier:
        return 0.5 * self.mu / self._left(rise)

    def _second(self, rise: Carrier) -> Carrier:
        left = self._left(rise)
        return 0.5 * self.mu / (self.jm * left * left)


def _more_than_one(instance: object, attribute: attrs.Attribute[object], value: object) -> None:
    if isinstance(value, float | np.ndarray) and not np.all(np.asarray(value) > 1.0):
        raise InputError(
            f"ArrudaBoyce.n must be > 1, got {value}; it is the number of rigid links of a chain, which locks at sqrt(n)"
        )


@attrs.frozen(field_transformer=units.named_fields, kw_only=True)
class ArrudaBoyce(FirstInvariantLaw):
    """The eight-chain law: ``stress = mu/3 · sqrt(n)/λc · L⁻¹(λc/sqrt(n)) · (λ - λ⁻²)``, ``λc = sqrt(I₁/3)``.

    Energy density ``mu n [y b + ln(b / sinh b)]`` with ``y = λc/sqrt(n)``, ``b = L⁻¹(y)``, less its
    value at rest. L⁻¹ is the inverse Langevin function itself, found to rounding, not the series of
    five terms, which falls short by 1.7 % at stretch 6 and 17 % at 7.5 of Treloar's rubber. At
    ``λc = sqrt(n)`` the chains are fully stretched; from there on every result is NaN.

    ``mu`` is the modulus n k T of the chain statistics. The shear modulus at small strain is some
    percent larger, and equal to it only for long chains: see ``shear_modulus``.

    Raises
    ------
    InputError, UnitError
        ``mu`` not positive, ``n`` not above 1, or a value of another dimension.

    References
    ----------
    Arruda, E. M. and Boyce, M. C. (1993), J. Mech. Phys. Solids 41:389-412. Its equation 15 shows N
    where sqrt(N) is meant, as its equation 21 does; its C_R is mu/3 here.

    Examples
    --------
    >>> law = ArrudaBoyce(mu="0.27 MPa", n=26.5)
    >>> round(law.stress(4.0)), round(law.highest_stretch, 3)
    (1228573, 8.904)
    """

    mu: Carrier = attrs.field(converter=units.pascal, validator=units.positive)
    """Modulus of the chain statistics [Pa], > 0."""
    n: Carrier = attrs.field(converter=units.number, validator=_more_than_one)
    """Rigid links of a chain [1], > 1."""
    fitted_over: tuple[float, float] | None = attrs.field(default=None, converter=fitted_range, validator=increasing)
    """Stretches (lowest, highest) over which the law was fitted [1]; None for not given."""

    @property
    def shear_modulus(self) -> Carrier:
        """Shear modulus at small strain [Pa]: mu/3 · sqrt(n) · L⁻¹(1/sqrt(n))."""
        return 2.0 * self._first(0.0)

    @property
    def highest_stretch(self) -> Carrier:
        """Stretch at which the chains lock [1]: I₁ = 3 n."""
        return stretch_at_first_invariant(3.0 * self.n - 3.0)

    def _extension(self, rise: Carrier) -> Carrier:
        """A chain's length as a share of its full length."""
        share = (1.0 + rise / 3.0) / self.n
        return namespace(share).sqrt(share)

    def _energy(self, rise: Carrier) -> Carrier:
        y, rest = self._extension(rise), self._extension(0.0)
        b, b_rest = inverse_langevin(y), inverse_langevin(rest)
        return self.mu * self.n * ((y * b + log_sinh_ratio(b)) - (rest * b_rest + log_sinh_ratio(b_rest)))

    def _first(self, rise: Carrier) -> Carrier:
        y = self._extension(rise)
        return self.mu * inverse_langevin(y) / (6.0 * y)

    def _second(self, rise: Carrier) -> Carrier:
        y = self._extension(rise)
        b = inverse_langevin(y)
        return self.mu * (1.0 / langevin_slope(b) - b / y) / (36.0 * self.n * y * y)

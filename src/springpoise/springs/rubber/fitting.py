"""Fit a stress-stretch law to readings of a tension test."""

from __future__ import annotations

import math
import warnings
from typing import Any, Generic, TypeVar

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.springs.rubber.chain import ArrudaBoyce, Gent
from springpoise.springs.rubber.ogden import Ogden
from springpoise.springs.rubber.polynomial import MooneyRivlin, NeoHookean, Yeoh
from springpoise.springs.rubber.search import HIGHEST_EXPONENT, LOWEST_EXPONENT, best_exponents, best_single
from springpoise.springs.warnings import RubberFitWarning
from springpoise.tables import facts

__all__ = ["RubberFit", "fit"]

Array = NDArray[np.float64]
Law = TypeVar("Law", NeoHookean, MooneyRivlin, Yeoh, Gent, Ogden, ArrudaBoyce)

_HIGHEST = 15.0
"""No rubber is stretched this far: percent elongation by mistake."""


@attrs.frozen
class RubberFit(Generic[Law]):
    """A law fitted to readings, and how well it follows them."""

    law: Law
    """The fitted law; it knows the range it was fitted over."""
    over: tuple[float, float]
    """Lowest and highest stretch of the readings used [1]."""
    points: int
    """How many readings were used."""
    rms: float
    """Root mean square of the deviations in stress [Pa], unweighted."""
    worst: float
    """Largest deviation in stress [Pa]."""
    worst_at: float
    """Stretch of that reading [1]."""
    warning: str | None = None
    """What is doubtful about the law outside this very test; None for nothing."""

    @property
    def parameters(self) -> dict[str, Any]:
        """The law's parameters by name, in SI units."""
        return {
            field.name: getattr(self.law, field.name)
            for field in attrs.fields(type(self.law))
            if field.name != "fitted_over"
        }

    def __str__(self) -> str:
        rows = [
            (name, ", ".join(f"{item:.6g}" for item in (value if isinstance(value, tuple) else (value,))))
            for name, value in self.parameters.items()
        ]
        rows = [(name, text + (" Pa" if name not in {"jm", "n", "alpha"} else "")) for name, text in rows]
        rows += [
            ("shear modulus", f"{self.law.shear_modulus:.6g} Pa"),
            ("fitted over", f"stretch {self.over[0]:.4g} to {self.over[1]:.4g}, {self.points} readings"),
            ("rms", f"{self.rms:.4g} Pa"),
            ("worst", f"{self.worst:.4g} Pa at stretch {self.worst_at:.4g}"),
        ]
        if self.warning:
            rows.append(("warning", self.warning))
        return f"{type(self.law).__name__} fitted to a tension test\n{facts(rows)}"


def fit(
    stretch: Any,
    stress: Any,
    law: type[Law],
    *,
    over: Any = None,
    weights: Any = None,
    terms: int = 3,
) -> RubberFit[Law]:
    """Least-squares fit of a law to readings of a tension test.

    Give loading and unloading readings together to fit the middle of both branches.

    Parameters
    ----------
    stretch
        Length over free length of each reading [1], shape (k,), in any order.
    stress
        Nominal stress of each reading [Pa], shape (k,): force over the unstretched cross-section.
    law
        The kind of law: ``NeoHookean``, ``MooneyRivlin``, ``Yeoh``, ``Gent``, ``Ogden`` or ``ArrudaBoyce``.
    over
        Range (lowest, highest) of stretch whose readings are used [1]; None for all. Fit the range
        that is used: no law follows rubber everywhere.
    weights
        Weight of each reading [1], shape (k,), multiplying its deviation; or "relative" to divide
        each deviation by its stress. None weighs all equally.
    terms
        Number of terms of ``Ogden``, 1 to 4. They are kept such that each term by itself is stable
        (``mu_i alpha_i >= 0``), with exponents from -10 to 20; a term that does not help is left out.

    Returns
    -------
    RubberFit
        The law with its range, rms and worst deviation. Fits are not unique: quote all three.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Too few readings in the range for the law's parameters, shapes that differ, values that
        look like strain or percent, stress of the wrong sign, or an unknown kind of law.

    Warns
    -----
    RubberFitWarning
        The law's stress falls somewhere in the range, or it is unstable in other than tension.

    Examples
    --------
    >>> result = fit([1.2, 1.5, 2.0, 2.5], ["0.20 MPa", "0.42 MPa", "0.67 MPa", "0.88 MPa"], MooneyRivlin)
    >>> result.law.fitted_over, round(result.rms)
    ((1.2, 2.5), 3164)
    """
    lam, sigma = units.number(stretch, "stretch"), units.pascal(stress, "stress")
    if np.ndim(lam) != 1 or np.shape(lam) != np.shape(sigma):
        raise InputError(
            f"stretch and stress must be lists of equal length, got shapes {np.shape(lam)} and {np.shape(sigma)}"
        )
    factors = _factors(weights, sigma)
    _check(lam, sigma)
    if over is not None:
        low, high = units.pair(over, "1", "over")
        if not 0.0 < low < high:
            raise InputError(f"over must be stretches (lower, higher) above 0, got {(low, high)}")
        used = (lam >= low) & (lam <= high)
        lam, sigma, factors = lam[used], sigma[used], factors[used]
    sizes: dict[Any, int] = {NeoHookean: 1, MooneyRivlin: 2, Yeoh: 3, Gent: 2, ArrudaBoyce: 2, Ogden: 2 * terms}
    if law not in sizes:
        raise InputTypeError(f"law must be one of {', '.join(kind.__name__ for kind in sizes)}, got {law!r}")
    if law is Ogden and not (isinstance(terms, int) and 1 <= terms <= 4):
        raise InputError(f"terms must be a whole number from 1 to 4, got {terms!r}")
    distinct = np.unique(lam[lam != 1.0]).size
    if distinct < sizes[law] + 1:
        raise InputError(
            f"stretch must hold at least {sizes[law] + 1} different stretches other than 1 for {law.__name__}, got {distinct}"
            + (f" in the range {over}" if over is not None else "")
        )
    if factors[lam != 1.0].max() <= 0.0:
        raise InputError("weights must be above 0 somewhere in the range, got none")
    fitted_over = (float(lam.min()), float(lam.max()))
    scale = float(np.abs(sigma).max())
    found: Any = _fitted(law, lam, sigma / scale, factors, scale, terms, fitted_over)
    off = found.stress(lam) - sigma
    at = int(np.abs(off).argmax())
    doubt = _doubt(found, fitted_over)
    if doubt is not None:
        warnings.warn(f"{law.__name__}: {doubt}", RubberFitWarning, stacklevel=2)
    rms = math.sqrt(float(np.mean(off * off)))
    return RubberFit(found, fitted_over, lam.size, rms, float(abs(off[at])), float(lam[at]), doubt)


def _factors(weights: Any, sigma: Array) -> Array:
    if weights is None:
        return np.ones_like(sigma)
    if isinstance(weights, str):
        if weights != "relative":
            raise InputError(f"weights must be numbers, 'relative' or None, got {weights!r}")
        if not np.all(sigma != 0.0):
            raise InputError("weights 'relative' needs readings with a stress, got one of 0 Pa; leave it out")
        return 1.0 / np.abs(sigma) * float(np.abs(sigma).max())
    factors: Array = np.asarray(units.number(weights, "weights"))
    if factors.shape != sigma.shape or np.any(factors < 0.0):
        raise InputError(f"weights must be >= 0 and one a reading, shape {sigma.shape}, got {weights!r}")
    return factors


def _check(lam: Array, sigma: Array) -> None:
    if lam.max() > _HIGHEST:
        raise InputError(
            f"stretch must be length over free length, got {lam.max():g}; percent elongation? divide by 100 and add 1"
        )
    if lam.min() <= 0.0:
        raise InputError(f"stretch must be length over free length, > 0, got {lam.min():g}; strain? add 1")
    wrong = (lam - 1.0) * sigma < 0.0
    if wrong.any():
        i = int(np.flatnonzero(wrong)[0])
        raise InputError(
            f"stress must have the sign of stretch - 1, got {sigma[i]:g} Pa at stretch {lam[i]:g}; "
            "is the first column strain? add 1"
        )


def _linear(columns: list[Array], target: Array, factors: Array) -> list[float]:
    matrix = np.stack(columns, axis=1) * factors[:, None]
    return [float(value) for value in np.linalg.lstsq(matrix, target * factors, rcond=None)[0]]


def _fitted(
    kind: Any, lam: Array, target: Array, factors: Array, scale: float, terms: int, fitted_over: tuple[float, float]
) -> Any:
    """The law from stresses in units of ``scale``."""
    g, rise = lam - lam**-2, lam * lam + 2.0 / lam - 3.0
    try:
        if kind is NeoHookean:
            (mu,) = _linear([g], target, factors)
            return NeoHookean(mu=mu * scale, fitted_over=fitted_over)
        if kind is MooneyRivlin:
            c1, c2 = _linear([2.0 * g, 2.0 * g / lam], target, factors)
            return MooneyRivlin(c1=c1 * scale, c2=c2 * scale, fitted_over=fitted_over)
        if kind is Yeoh:
            c1, c2, c3 = _linear([2.0 * g, 4.0 * g * rise, 6.0 * g * rise * rise], target, factors)
            return Yeoh(c1=c1 * scale, c2=c2 * scale, c3=c3 * scale, fitted_over=fitted_over)
        if kind is Ogden:
            mus, alphas = best_exponents(lam, target, factors, terms)
            return Ogden(mu=[mu * scale for mu in mus], alpha=alphas, fitted_over=fitted_over)
    except InputError as error:
        raise InputError(
            f"stress must make a {kind.__name__} law over the range; fit a shorter one, or another law: {error}"
        ) from error
    top = float(rise.max())
    if kind is Gent:
        mu, beyond = best_single(lambda b: Gent(mu=1.0, jm=top + b).stress(lam), target, factors, top)
        return Gent(mu=mu * scale, jm=top + beyond, fitted_over=fitted_over)
    least = 1.0 + top / 3.0
    mu, beyond = best_single(lambda b: ArrudaBoyce(mu=1.0, n=least + b).stress(lam), target, factors, least)
    return ArrudaBoyce(mu=mu * scale, n=least + beyond, fitted_over=fitted_over)


def _doubt(law: Any, over: tuple[float, float]) -> str | None:
    grid = np.linspace(max(over[0], 1.0), over[1], 401)
    falling = grid[law.tangent(grid) <= 0.0]
    if falling.size:
        return f"its stress does not rise at stretch {falling[0]:.4g}, inside the range it was fitted over"
    if isinstance(law, MooneyRivlin) and law.c2 < 0.0:
        return "c2 is negative, so the law is unstable in other than tension; fit a shorter range"
    if isinstance(law, MooneyRivlin) and law.c1 < 0.0:
        return "c1 is negative, so the stress turns negative at large stretch"
    if isinstance(law, Yeoh) and law.c3 < 0.0:
        return "c3 is negative, so the stress turns negative beyond the range"
    if isinstance(law, Ogden) and any(a <= LOWEST_EXPONENT + 1e-3 or a >= HIGHEST_EXPONENT - 1e-3 for a in law.alpha):
        return "an exponent is at the end of its range, so the law is steep there; try fewer terms or a shorter range"
    if isinstance(law, Gent | ArrudaBoyce) and law.highest_stretch > 1e3:
        return "the readings show no upturn, so the stretch at which the chains lock is not known from them"
    return None

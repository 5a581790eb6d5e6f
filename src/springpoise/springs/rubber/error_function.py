"""The error function on any carrier, as a look-up table that is exact to rounding."""

from __future__ import annotations

import functools
import math

from springpoise.carriers import Carrier, interpolate, namespace
from springpoise.lookup import Lookup

__all__ = ["erf_from_zero", "erf_integral"]

_TOP = 6.0
"""Here 1 - erf is 2e-17, below rounding."""
_PIECES = 48
_DEGREE = 14


@functools.cache
def _table() -> Lookup:
    """Taylor polynomials at the left end of each piece of width 1/8; the next term is below 1e-16.

    With f = erf, f'' = -2 z f', so the derivatives of f' follow from
    ``f'^(n+1) = -2 z f'^(n) - 2 n f'^(n-1)``.
    """
    width = _TOP / _PIECES
    edges = [width * piece for piece in range(_PIECES + 1)]
    rows = []
    for z in edges[:-1]:
        slopes = [2.0 / math.sqrt(math.pi) * math.exp(-z * z)]
        for n in range(_DEGREE - 1):
            slopes.append(-2.0 * z * slopes[n] - (2.0 * n * slopes[n - 1] if n else 0.0))
        rows.append([math.erf(z)] + [slope / math.factorial(n + 1) for n, slope in enumerate(slopes)])
    return Lookup(edges, rows)


def erf_from_zero(z: Carrier) -> Carrier:
    """erf(z) for z >= 0."""
    return interpolate(namespace(z).minimum(z, _TOP), _table())


def erf_integral(z: Carrier) -> Carrier:
    """The integral of erf from 0 to z, for z >= 0."""
    return z * erf_from_zero(z) + namespace(z).expm1(-z * z) / math.sqrt(math.pi)

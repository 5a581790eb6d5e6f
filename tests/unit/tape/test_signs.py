"""What is known to be positive, and never wrongly so."""

import numpy as np
import pytest

from springpoise.carriers import distance
from springpoise.tape.signs import ANY, NONNEGATIVE, POSITIVE, sign_of
from springpoise.tape.variables import Tape


def judged(formula):
    tape = Tape()
    return sign_of(tape, tape.index(formula(tape.input("q"))))


@pytest.mark.parametrize(
    ("formula", "sign"),
    [
        (lambda q: q, ANY),
        (lambda q: 2.0 + q, ANY),
        (lambda q: q * q, NONNEGATIVE),
        (lambda q: q * q * q, ANY),
        (lambda q: 1.0 + q * q, POSITIVE),
        (lambda q: -1.0 + q * q, ANY),
        (lambda q: abs(q), NONNEGATIVE),
        (lambda q: np.hypot(q, 1.0), NONNEGATIVE),
        (lambda q: np.hypot(1.0 + q * q, 2.0), POSITIVE),
        (lambda q: np.exp(q), NONNEGATIVE),
        (lambda q: np.cosh(q), POSITIVE),
        (lambda q: distance(q, q + 1.0), POSITIVE),
        (lambda q: 2.0 / distance(q, 0.0), NONNEGATIVE),
        (lambda q: q / distance(q, 0.0), ANY),
        (lambda q: np.maximum(q, 2.0), POSITIVE),
        (lambda q: np.maximum(q, 0.0), NONNEGATIVE),
        (lambda q: np.minimum(q, 2.0), ANY),
        (lambda q: np.minimum(np.cosh(q), 2.0), POSITIVE),
        (lambda q: np.where(q > 0.0, 1.0, np.cosh(q)), POSITIVE),
        (lambda q: np.where(q > 0.0, -1.0, 2.0), ANY),
        (lambda q: q > 0.0, ANY),
        (lambda q: q <= q, ANY),
        (lambda q: q * 0.0, NONNEGATIVE),
        (lambda q: q * 0.0 + np.array([1.0, 2.0]), POSITIVE),
        (lambda q: q * 0.0 + np.array([1.0, 0.0]), NONNEGATIVE),
        (lambda q: q * 0.0 + np.array([1.0, -2.0]), ANY),
    ],
)
def test_signs(formula, sign):
    # Independent: by hand.
    assert judged(formula) == sign

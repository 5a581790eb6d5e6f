"""Rubber laws: what they refuse, where they end, parameters that are arrays."""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.springs.rubber import (
    ArrudaBoyce,
    Crept,
    Environment,
    Gent,
    MooneyRivlin,
    NeoHookean,
    Ogden,
    Softened,
    Stiffened,
    Yeoh,
)

LAWS = [
    NeoHookean(mu="0.4 MPa"),
    MooneyRivlin(c1="0.15 MPa", c2="0.03 MPa"),
    Yeoh(c1="0.23 MPa", c2="-3.3 kPa", c3="107 Pa"),
    Gent(mu="0.25 MPa", jm=79.4),
    ArrudaBoyce(mu="0.27 MPa", n=26.5),
    Ogden(mu=["0.618 MPa", "1.18 kPa", "-9.81 kPa"], alpha=[1.3, 5.0, -2.0]),
]
names = [type(law).__name__ for law in LAWS]


@pytest.mark.parametrize("law", LAWS, ids=names)
def test_no_value_without_a_positive_stretch(law) -> None:
    for stretch in (0.0, -1.0, math.nan):
        for method in (law.stress, law.tangent, law.energy_density):
            assert math.isnan(method(stretch))
    with np.errstate(all="ignore"):
        assert np.isnan(law.stress(np.array([0.0, -1.0, math.nan]))).all()


@pytest.mark.parametrize("law", LAWS, ids=names)
def test_laws_are_values(law) -> None:
    assert law == attrs.evolve(law) and hash(law) == hash(attrs.evolve(law))
    assert law != attrs.evolve(law, fitted_over=(1.0, 3.0))
    assert attrs.evolve(law, fitted_over=("1", 3)).fitted_over == (1.0, 3.0)


@pytest.mark.parametrize("law", [LAWS[3], LAWS[4]], ids=["Gent", "ArrudaBoyce"])
def test_chains_lock(law) -> None:
    """At the lock I₁ - 3 = jm, or I₁ = 3 n: checked by putting the stretch back into I₁."""
    end = law.highest_stretch
    invariant = end**2 + 2.0 / end
    assert invariant == pytest.approx(law.jm + 3.0 if isinstance(law, Gent) else 3.0 * law.n, rel=1e-13)
    assert end > 1.0
    assert math.isfinite(law.stress(end * (1.0 - 1e-6))) and law.stress(end * (1.0 - 1e-6)) > 1e8
    for method in (law.stress, law.tangent, law.energy_density):
        assert math.isnan(method(end * (1.0 + 1e-9)))


def test_parameters_may_be_arrays() -> None:
    stretch = np.linspace(1.0, 4.0, 7)
    spread = np.array([[0.9], [1.1]])
    makers = [
        lambda f: NeoHookean(mu=4e5 * f),
        lambda f: MooneyRivlin(c1=1.5e5 * f, c2=3e4),
        lambda f: Yeoh(c1=2.3e5 * f, c2=-3.3e3, c3=107.0),
        lambda f: Gent(mu=2.5e5, jm=79.4 * f),
        lambda f: ArrudaBoyce(mu=2.7e5, n=26.5 * f),
        lambda f: Ogden(mu=[6e5 * f, -1e4], alpha=[1.3, -2.0]),
        lambda f: Softened(NeoHookean(mu=4e5 * f), to_stretch=3.0, r=2.0, m=5e5 * f),
        lambda f: Stiffened(NeoHookean(mu=4e5), f),
        lambda f: Crept(NeoHookean(mu=4e5), 0.1 * f),
    ]
    for make in makers:
        law = make(spread)
        assert hash(law) == hash(make(spread))
        for method in ("stress", "tangent", "energy_density"):
            both = getattr(law, method)(stretch)
            assert both.shape == (2, 7)
            for row, f in zip(both, (0.9, 1.1), strict=True):
                assert row == pytest.approx(getattr(make(f), method)(stretch), rel=1e-12, abs=1e-13 * 1e6)


REFUSED = [
    (lambda: NeoHookean(mu=0.0), InputError, r"NeoHookean\.mu must be > 0 Pa, got 0\.0"),
    (lambda: NeoHookean(mu="0.4 N"), UnitError, r"NeoHookean\.mu must be .*'0\.4 N'"),
    (lambda: NeoHookean(mu=math.nan), InputError, r"NeoHookean\.mu must be .* finite"),
    (lambda: Yeoh(c1=-1.0, c2=0.0, c3=0.0), InputError, r"Yeoh\.c1 must be > 0 Pa"),
    (lambda: MooneyRivlin(c1=1e5, c2=-1e5), InputError, r"MooneyRivlin\.c1 \+ c2 must be > 0 Pa.*half the shear"),
    (lambda: Gent(mu=1e5, jm=0.0), InputError, r"Gent\.jm must be > 0, got 0\.0"),
    (lambda: ArrudaBoyce(mu=1e5, n=1.0), InputError, r"ArrudaBoyce\.n must be > 1, got 1\.0"),
    (lambda: Ogden(mu=[1e5], alpha=[1.3, 2.0]), InputError, r"Ogden\.alpha must have as many terms.*2 for 1"),
    (lambda: Ogden(mu=[], alpha=[]), InputError, r"at least 1, got 0 for 0"),
    (lambda: Ogden(mu=[1e5], alpha=[0.0]), InputError, r"Ogden\.alpha must be other than 0"),
    (lambda: Ogden(mu=[1e5], alpha=[-2.0]), InputError, r"Ogden must have a shear modulus.*another convention"),
    (
        lambda: Ogden(mu="1 MPa", alpha=[2.0]),
        InputTypeError,
        r"Ogden\.mu must be a list with one value a term, got '1 MPa'",
    ),
    (lambda: Ogden(mu=1e5, alpha=[2.0]), InputTypeError, r"Ogden\.mu must be a list"),
    (lambda: Ogden.from_finite_element(mu=[1e5, 1e5], alpha=[2.0]), InputError, r"Ogden\.alpha"),
    (
        lambda: NeoHookean(mu=1e5, fitted_over=(3.0, 1.0)),
        InputError,
        r"NeoHookean\.fitted_over must be stretches \(lower",
    ),
    (lambda: NeoHookean(mu=1e5, fitted_over=(0.0, 3.0)), InputError, r"stretch is length over free length, 1 at rest"),
    (lambda: NeoHookean(mu=1e5, fitted_over=3.0), InputTypeError, r"range of stretch must be a pair"),
    (
        lambda: Softened(LAWS[0], to_stretch=1.0, r=2.0, m=1e5),
        InputError,
        r"Softened\.to_stretch must be > 1, got 1\.0",
    ),
    (lambda: Softened(LAWS[0], to_stretch=3.0, r=1.0, m=1e5), InputError, r"Softened\.r must be > 1"),
    (lambda: Softened(LAWS[0], to_stretch=3.0, r=2.0, m=0.0), InputError, r"Softened\.m must be > 0 Pa"),
    (
        lambda: Softened(LAWS[3], to_stretch=20.0, r=2.0, m=1e5),
        InputError,
        r"Softened\.to_stretch must be < 9\.0.*law ends",
    ),
    (lambda: Stiffened(LAWS[0], -0.1), InputError, r"Stiffened\.factor must be > 0"),
    (lambda: Crept(LAWS[0], -0.1), InputError, r"Crept\.creep must be >= 0"),
    (lambda: Environment("x", per_decade=-1.0, per_second=0.0, tested_to=1.0), InputError, r"Environment\.per_decade"),
    (
        lambda: Environment("x", per_decade=0.1, per_second=-1.0, tested_to=1.0),
        InputError,
        r"Environment\.per_second must be >= 0",
    ),
    (lambda: Environment("x", per_decade=0.1, per_second="2 m", tested_to=1.0), UnitError, r"Environment\.per_second"),
]


@pytest.mark.parametrize(("make", "error", "message"), REFUSED)
def test_refused(make, error: type[Exception], message: str) -> None:
    with pytest.raises(error, match=message):
        make()


def test_environment_reads_units() -> None:
    air = Environment("air", per_decade="2.4 percent", per_second="20e-5 percent/min", tested_to="70 days")
    assert air.creep("30 days") == pytest.approx(0.024 * math.log10(43200.0) + 20e-7 * 43200.0, rel=1e-12)
    assert air.creep(np.array([60.0, 600.0])) == pytest.approx([20e-7, 0.024 + 20e-6], rel=1e-12)
    assert Environment("none", per_decade=0.1, per_second=0.0, tested_to=1e9).oxidation_leads_from == math.inf
    with pytest.raises(InputError, match=r"time must be >= 60 s, where creep is counted from, got 30"):
        air.creep(30.0)


def test_a_law_of_ones_own_needs_no_base_class() -> None:
    class Linear:
        def stress(self, stretch):
            return 1e6 * (stretch - 1.0)

        def tangent(self, stretch):
            return 1e6 + 0.0 * stretch

        def energy_density(self, stretch):
            return 5e5 * (stretch - 1.0) ** 2

    crept = Crept(Stiffened(Linear(), 2.0), 0.25)
    assert crept.stress(2.0) == pytest.approx(1.6e6)
    assert crept.fitted_over is None and crept.highest_stretch == math.inf
    assert Softened(Linear(), to_stretch=2.0, r=2.0, m=1e5).fitted_over is None

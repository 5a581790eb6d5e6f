"""Strips, spirals and power springs against derived and excerpted numbers.

Trust: D derived in a calculation of its own, apart from this library, and given to the digits
there; T excerpted from a trade handbook; M from memory.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import minimize_scalar

from springpoise.springs.strips.power_spring import PowerSpring
from springpoise.springs.strips.spiral import Spiral, strip_curvature_factor
from springpoise.springs.strips.strip import Strip


def strip(form: str, **more: object) -> Strip:
    return Strip(
        width="25 mm",
        thickness="0.30 mm",
        natural_radius="16 mm",
        youngs_modulus="206 GPa",
        length="1 m",
        form=form,  # type: ignore[arg-type]
        **more,  # type: ignore[arg-type]
    )


@pytest.mark.parametrize(("form", "newtons"), [("trade 26.4", 20.5744), ("beam", 22.6318), ("plate", 24.8701)])
def test_force_of_a_strip(form: str, newtons: float):
    """D for 24 and the plate with Poisson's ratio 0.3, T for 26.4."""
    assert strip(form).pull == pytest.approx(newtons, abs=5e-5)


def test_stress_of_a_strip():
    """T: E t/(2 Rn) = 1931.25 MPa."""
    assert strip("beam").stress / 1e6 == pytest.approx(1931.25, rel=1e-12)


def test_two_drum_motor():
    """D: (E b t³/24)(1/Rn + 1/R)² R = 1466.543 N·mm with R 20 mm."""
    assert strip("beam").motor_torque("20 mm") * 1e3 == pytest.approx(1466.543, abs=5e-4)


def test_pull_on_a_drum_is_the_energy_of_straightening():
    """The definition: what bending energy a metre gains from the drum's curvature to straight."""
    own = strip("beam", drum_radius="18 mm")
    bending = 206e9 * 0.025 * 0.0003**3 / 12.0
    stored, _ = quad(lambda curvature: bending * (1 / 0.016 - curvature), 0.0, 1 / 0.018)
    assert own.pull == pytest.approx(stored, rel=1e-12)


def power_spring(form: str) -> PowerSpring:
    best = PowerSpring.best_length("60 mm", "12 mm", "0.5 mm")
    return PowerSpring(
        width="20 mm",
        thickness="0.5 mm",
        length=best,
        drum_diameter="60 mm",
        arbor_diameter="12 mm",
        turns_form=form,  # type: ignore[arg-type]
    )


def test_turns_of_a_power_spring():
    """D: length 2714.33605 mm, 14.533231 turns; with 2.55 t, a handbook form (M), 11.398612."""
    assert power_spring("annulus").length * 1e3 == pytest.approx(2714.33605, abs=5e-6)
    assert power_spring("annulus").turns == pytest.approx(14.533231, abs=5e-7)
    assert power_spring("handbook").turns == pytest.approx(11.398612, abs=5e-7)


def test_most_turns_in_closed_form():
    """D: n = (sqrt(2 (Dd² + Da²)) - Dd - Da)/(2 t)."""
    closed = (math.sqrt(2.0 * (0.06**2 + 0.012**2)) - 0.072) / 0.001
    assert power_spring("annulus").turns == pytest.approx(closed, rel=1e-12)


def test_best_length_is_the_best():
    """A search over lengths finds the same one."""

    def fewer(length: float) -> float:
        return -PowerSpring(
            width=0.02, thickness=0.0005, length=length, drum_diameter=0.06, arbor_diameter=0.012, turns_form="annulus"
        ).turns

    found = minimize_scalar(fewer, bounds=(0.5, 5.0), method="bounded", options={"xatol": 1e-9})
    assert found.x == pytest.approx(PowerSpring.best_length(0.06, 0.012, 0.0005), rel=1e-5)


def test_turns_by_counting_layers():
    """Layer on layer, each of one strip's thickness, as many turns as the strip lasts, to half a layer."""
    spring = power_spring("annulus")
    turns = 0.0
    for start, step in ((6.0, 0.5), (30.0, -0.5)):
        left, radius, layers = spring.length * 1e3, start, 0.0
        while left > 0.0:
            round_ = 2.0 * math.pi * (radius + 0.5 * step)
            layers += min(1.0, left / round_)
            left, radius = left - round_, radius + step
        turns += layers if step > 0.0 else -layers
    assert spring.turns == pytest.approx(turns, abs=0.02)


@pytest.mark.parametrize("outer_end", ["clamped", "pinned"])
def test_spiral_by_the_bending_line(outer_end: str):
    """M: angle = 12 M l/(E b t³), stress 6 M/(b t²), twice that with the outer end pinned."""
    spiral = Spiral(
        width=0.012,
        thickness=0.001,
        length=1.5,
        youngs_modulus=206e9,
        outer_end=outer_end,  # type: ignore[arg-type]
    )
    torque = 0.3
    assert spiral.spring().load(12.0 * torque * 1.5 / (206e9 * 0.012 * 1e-9)) == pytest.approx(torque, rel=1e-12)
    nominal = 6.0 * torque / (0.012 * 1e-6)
    assert spiral.stress(torque) == pytest.approx(nominal * (1.0 if outer_end == "clamped" else 2.0), rel=1e-12)


@pytest.mark.parametrize("index", [3.0, 4.0, 6.0, 8.0, 12.0, 20.0])
def test_curvature_of_a_rectangular_section(index: float):
    """M: Wahl's form for a rectangular section, (3C² - C - 0.8)/(3C (C - 1)), good to 0.2 % from C = 3 on."""
    rounded = (3.0 * index**2 - index - 0.8) / (3.0 * index * (index - 1.0))
    assert strip_curvature_factor(0.5 * index, 1.0) == pytest.approx(rounded, rel=2e-3)


@pytest.mark.parametrize("index", [3.0, 5.0, 20.0])
def test_curvature_by_integrating_the_section(index: float):
    """Plane sections of a curved bar: strain ∝ (r - rn)/r, no normal force, moment by quadrature."""
    radius = 0.5 * index
    inner, outer = radius - 0.5, radius + 0.5
    neutral = 1.0 / quad(lambda r: 1.0 / r, inner, outer)[0]
    moment = quad(lambda r: (neutral - r) / r * (radius - r), inner, outer, epsabs=1e-14)[0]
    assert strip_curvature_factor(radius, 1.0) == pytest.approx((neutral - inner) / inner / moment / 6.0, rel=1e-9)


def test_lower_and_upper_usual_drum_do_not_weaken_much():
    """D: by the factor 2q - q² with q = Rn/Rd, 0.9917 at 10 % and 0.9722 at 20 % above the natural radius."""
    factors = [strip("beam", drum_radius=0.016 * r).pull / strip("beam").pull for r in (1.1, 1.2)]
    np.testing.assert_allclose(factors, [0.991736, 0.972222], atol=5e-7)

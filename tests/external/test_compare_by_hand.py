"""Rows of a comparison worked out again from their parts, by plain NumPy; best geometry by a global optimiser.

Nothing of the library computes here but the parts themselves: forces from each spring's law, lengths from
tangents to circles, torques by differences of the length. Isothermal gas: p (V0 / V); rubber: Yeoh's nominal
stress 2 (λ - 1/λ²) (c1 + 2 c2 (I - 3) + 3 c3 (I - 3)²), I = λ² + 2/λ.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import differential_evolution, minimize_scalar

from springpoise import Arm, Body, Mechanism, balance

MASS = 2.0
BOX = dict(attach_radius=(0.04, 0.12), anchor_height=(0.06, 0.25))
STEP = 1e-6


def _place(point, q):
    return complex(*point.at) * (np.exp(1j * q) if point.body == "arm" else np.ones_like(q))


def _length(path, q):
    """Between two points, or from a point round one circle to another point."""
    if hasattr(path, "ends"):
        return np.abs(_place(path.first, q) - _place(path.last, q))
    disc = path.along[1]
    a, b = (_place(path.along[i], q) - complex(*disc.centre.at) for i in (0, 2))
    rho, way = disc.radius, (1.0 if disc.turn == "ccw" else -1.0)
    meets = np.angle(a) + way * np.arccos(rho / np.abs(a))
    leaves = np.angle(b) - way * np.arccos(rho / np.abs(b))
    straight = np.sqrt(np.abs(a) ** 2 - rho**2) + np.sqrt(np.abs(b) ** 2 - rho**2)
    return straight + rho * ((way * (leaves - meets)) % (2 * math.pi))


def _extension(spring, x):
    return np.where(x > spring.free_length, spring.initial_tension + spring.rate * (x - spring.free_length), 0.0)


def _gas(spring, x, gauge=8e6, progression=1.3, outside=101325.0):
    area = math.pi / 4 * spring.rod_diameter**2
    column = spring.stroke / (1.0 - (gauge + outside) / (progression * gauge + outside))
    return -area * ((gauge + outside) / (1.0 - (spring.extended_length - x) / column) - outside)


def _rubber(tube, x):
    stretch, law = x / tube.free_length, tube.law
    i = stretch**2 + 2.0 / stretch - 3.0
    stress = 2.0 * (stretch - stretch**-2) * (law.c1 + 2.0 * law.c2 * i + 3.0 * law.c3 * i * i)
    return math.pi / 4 * (tube.outer_diameter**2 - tube.inner_diameter**2) * stress


LOADS = {
    "pulley": lambda spring, x: spring.rate * x,
    "straight": _extension,
    "gas": _gas,
    "rubber": _rubber,
    "rubber pulley": _rubber,
}


@pytest.mark.parametrize(
    ("travel", "gravity", "com", "methods"),
    [
        ((-60, 60), (0.0, -9.80665), (0.35, 0.0), ["pulley", "straight", "gas", "rubber", "rubber pulley"]),
        ((120, 240), (0.0, -9.80665), (0.35, 0.0), ["pulley", "straight", "gas"]),
        ((-170, 170), (0.0, -9.80665), (0.35, 0.0), ["straight", "gas", "rubber"]),
        ((-40, 100), (3.0, -9.0), (0.30, 0.12), ["straight", "gas", "rubber"]),
    ],
)
def test_residuals_of_rows(travel, gravity, com, methods):
    arm = Mechanism(Arm(Body(MASS, com)), travel=tuple(map(math.radians, travel)), gravity=gravity)
    q = arm.poses(61)
    weight = MASS * complex(*com) * np.exp(1j * q)
    pull = weight.real * gravity[1] - weight.imag * gravity[0]
    found = balance.compare_methods(arm, over=q, methods=methods, **BOX)
    for method in methods:
        row = found.row(method).require()
        (mount,) = row.mechanism.springs
        x = _length(mount.path, q) - mount.rigid_length
        slope = (_length(mount.path, q + STEP) - _length(mount.path, q - STEP)) / (2 * STEP)
        left = pull - LOADS[method](mount.spring, x) * slope
        assert np.max(np.abs(left)) == pytest.approx(row.figures.residual.worst, abs=1e-7), method
        assert np.sqrt(np.mean(left**2)) == pytest.approx(row.figures.residual.rms, abs=1e-7), method


def _best(column, q):
    """Least worst of G cos q - k · column over k, and over G."""
    start = float(np.cos(q) @ column / (column @ column))
    if start <= 0.0:
        return 1e3
    return minimize_scalar(
        lambda k: np.abs(np.cos(q) - k * column).max(),
        bounds=(0.0, 3.0 * start),
        method="bounded",
        options={"xatol": 1e-10 * start},
    ).fun


def test_no_straight_spring_in_the_box_is_better():
    """Differential evolution over attachment, anchor, skew and free length; limits as penalties."""
    arm = Mechanism(Arm(Body(MASS, (0.35, 0.0))), travel=(-math.pi / 3, math.pi / 3))
    q = arm.poses(61)
    ratio, drawn = 0.5, 0.1 / 0.9 * (1.0 / 0.5 - 1.0)

    def worst(v):
        radius, height, skew, free = v
        to = radius * np.exp(1j * (q + skew)) - 1j * height
        length = np.abs(to)
        slope = np.real(np.conj(to) * 1j * (to + 1j * height)) / length
        short = max(0.0, free - length.min()) + max(0.0, length.max() - free / ratio)
        return _best(-(length - free + drawn * free) * slope, q) + 100.0 * short

    bounds = [BOX["attach_radius"], BOX["anchor_height"], (-math.radians(20), math.radians(20)), (0.0004, 0.185)]
    other = differential_evolution(worst, bounds, seed=0, maxiter=250, tol=1e-9)
    mine = balance.compare_methods(arm, over=q, methods="straight", **BOX).row("straight").figures.residual
    assert mine.worst_fraction == pytest.approx(other.fun, rel=1e-3)
    assert mine.worst_fraction <= other.fun * (1 + 1e-5)

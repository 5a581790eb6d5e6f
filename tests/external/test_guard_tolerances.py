"""The yield that a file states, against closed forms and a Monte Carlo study of its own.

The referees are a few lines of NumPy with draws of their own; nothing of the library is in them. The
arm is a mass m at r on its x axis, the spring runs from (0, a) on the ground to (b, 0) on the arm:
its length is L = sqrt(a² + b² - 2·a·b·sin q), and a load f in it turns the arm by f·a·b·cos(q)/L.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from statistics import NormalDist

import numpy as np
import pytest

from springpoise import guard

G = 9.80665

ARM = """
schema = 1
[arm]
bodies = [{ name = "boom", mass = "3 kg", com = ["0.4 m", "0 m"] }]
[travel]
from = "-60 deg"
to = "60 deg"
[[springs]]
[springs.path]
kind = "straight"
first = { body = "ground", at = ["0 m", "0.2 m"] }
last = { body = "arm", at = ["0.12 m", "0 m"] }
[springs.spring]
"""
IDEAL = ARM + f'kind = "zero length"\nrate = "{3 * G * 0.4 / 0.2 / 0.12!r} N/m"\n'
ORDINARY = ARM + 'kind = "extension"\nrate = "515 N/m"\nfree_length = "80 mm"\ninitial_tension = "36 N"\n'
YIELD = '[[limits]]\nwhat = "yield"\nat_least = "1 %"\n'

Put = Callable[[str], Path]


@pytest.fixture
def put(tmp_path: Path) -> Put:
    def write(text: str) -> Path:
        file = tmp_path / "arm.poise.toml"
        file.write_text(text, encoding="utf-8")
        return file

    return write


def shares(file: Path) -> list[float]:
    """The yields that the file's limits find, from 0 to 1."""
    return [verdict.value / 100 for verdict in guard.check(file).verdicts]


@pytest.mark.parametrize(("sigma", "limit"), [(4.0, 5.0), (2.0, 1.0), (1.0, 3.0)])
def test_one_normal_number(put: Put, sigma: float, limit: float) -> None:
    """Residual = |d|·m·g·r·cos q for a rate that is off by d: the yield is 2·Phi(limit/sigma) - 1.

    Tolerance: four standard errors of 100 000 builds.
    """
    text = f"""
[tolerances]
residual_limit = "{limit} %"
builds = 100_000
spreads = [{{ field = "springs[0].spring.rate", normal = "{sigma} %" }}]
"""
    wanted = 2 * NormalDist().cdf(limit / sigma) - 1
    (found,) = shares(put(IDEAL + text + YIELD))
    assert found == pytest.approx(wanted, abs=4 * math.sqrt(wanted * (1 - wanted) / 100_000) + 1e-6)


def test_two_uniform_numbers_and_a_batch(put: Put) -> None:
    """Rate and mass off by d and e, both uniform within +-w, keep |d - e| <= w in 3 of 4 builds.

    Rate and lever of one batch go as (1 + d)², within +-w for d from sqrt(1 - w) - 1 to sqrt(1 + w) - 1.
    Tolerance: four standard errors of 100 000 builds.
    """
    text = """
[tolerances]
residual_limit = "3 %"
builds = 100_000
spreads = [
    { field = "springs[0].spring.rate", uniform = "3 %" },
    { field = "linkage.bodies[boom].mass", uniform = "3 %" },
]
"""
    (apart,) = shares(put(IDEAL + text + YIELD))
    assert apart == pytest.approx(0.75, abs=0.006)
    lever = "springs[0].path.last.at[0]"
    together = text.replace('"3 %" }', '"3 %", shared = "A" }').replace("linkage.bodies[boom].mass", lever)
    (found,) = shares(put(IDEAL + together + YIELD))
    assert found == pytest.approx((math.sqrt(1.03) - math.sqrt(0.97)) / 0.06, abs=0.0065)


def residuals(rate: np.ndarray, height: np.ndarray, mass: np.ndarray, tension: np.ndarray) -> np.ndarray:
    """Worst residual of each build over 121 poses [N·m]."""
    q = np.radians(np.linspace(-60, 60, 121))
    a, b = height[:, None], 0.12
    length = np.sqrt(a**2 + b**2 - 2 * a * b * np.sin(q))
    load = np.where(length > 0.08, tension[:, None] + rate[:, None] * (length - 0.08), 0.0)
    torque = load * a * b * np.cos(q) / length - mass[:, None] * G * 0.4 * np.cos(q)
    return np.asarray(np.max(np.abs(torque), axis=1))


SCATTERED = """
[tolerances]
residual_limit = "0.6 N*m"
builds = 20_000
adjusted_builds = 4000
adjusters = [{ name = "anchor", field = "springs[0].path.first.at[1]", reach = "10 mm" }]
spreads = [
    { field = "springs[0].spring.rate", normal = "4 %" },
    { field = "springs[0].spring.initial_tension", uniform = "3 N" },
    { field = "springs[0].path.first.at[1]", normal = "1 mm" },
    { field = "linkage.bodies[boom].mass", normal = "20 g" },
]
"""


def test_several_numbers_and_an_adjuster(put: Put) -> None:
    """A separate study: other draws, the torque written out, and each build adjusted by trying 241 settings.

    Tolerance: four standard errors of both studies together, and for the grid of 0.05 mm nothing more,
    which moves the residual by less than 0.003 N·m.
    """
    adjusted = YIELD + 'adjuster = "anchor"\n'
    as_built, with_anchor = shares(put(ORDINARY + SCATTERED + YIELD + adjusted))
    rng = np.random.default_rng(20_24)
    n = 4000
    rate = 515 * (1 + 0.04 * rng.standard_normal(n))
    tension = 36 + 3 * rng.uniform(-1, 1, n)
    height = 0.2 + 0.001 * rng.standard_normal(n)
    mass = 3 + 0.02 * rng.standard_normal(n)
    built = residuals(rate, height, mass, tension)
    assert as_built == pytest.approx(np.mean(built <= 0.6), abs=4 * math.sqrt(0.25 * (1 / n + 1 / 20_000)))
    # a build counts where its best setting is good and within reach, or where it is good as it is
    moves = np.linspace(-0.03, 0.03, 241)
    tried = np.array([residuals(rate, height + move, mass, tension) for move in moves])
    best = np.argmin(tried, axis=0)
    good = (tried[best, np.arange(n)] <= 0.6) & (np.abs(moves[best]) <= 0.010)
    wanted = np.mean(good | (built <= 0.6))
    assert as_built + 0.05 < wanted < 0.999
    assert with_anchor == pytest.approx(wanted, abs=4 * math.sqrt(0.25 * 2 / n))

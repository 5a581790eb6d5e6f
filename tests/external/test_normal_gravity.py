"""Normal gravity on and above the WGS 84 ellipsoid, against published and derived numbers.

Source: NIMA TR8350.2, Department of Defense World Geodetic System 1984, 3rd edition, equations 4-1
(Somigliana's closed formula) and 4-3 (height). Trust of each number:

* T: seen in several independent transcriptions of the source, not in the source itself; the values at
  the equator and at the pole are defining constants of the system.
* D: derived from the defining constants in a calculation of its own, apart from this library.

Each number is given to 1e-10 m/s². The tolerance is 2e-10 m/s²: half a unit of the last digit,
and the difference that comes from taking the formula's constant k from the rounded gravity at the
pole (k from the system's own table gives 9.8061977693 at 45 degrees, from the pole 9.80619776937).
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import gravity

PUBLISHED = [
    (0.0, 0.0, 9.7803253359, "T"),
    (10.0, 0.0, 9.7818824006, "D"),
    (17.5, 0.0, 9.7849958560, "T"),
    (30.0, 0.0, 9.7932472692, "T"),
    (40.0, 0.0, 9.8016968628, "D"),
    (45.0, 0.0, 9.8061977693, "T"),
    (50.0, 0.0, 9.8107021356, "D"),
    (60.0, 0.0, 9.8191769531, "D"),
    (90.0, 0.0, 9.8321849378, "T"),
    (45.0, 1000.0, 9.8031129435, "D"),
    (45.0, 2000.0, 9.8000295640, "D"),
]


@pytest.mark.parametrize(("degrees", "height", "expected", "trust"), PUBLISHED)
def test_published_values(degrees: float, height: float, expected: float, trust: str) -> None:
    assert trust in {"T", "D"}
    assert gravity.local(f"{degrees} deg", height) == pytest.approx(expected, abs=2e-10)


def test_standard_gravity_is_met_near_45_and_a_half_degrees() -> None:
    """Derived from the defining constants: 9.80665 m/s² is met at latitude 45.4996 degrees.

    Gravity rises there by 9.0e-4 m/s² a degree, so half a unit of the last digit is 4.5e-8 m/s².
    """
    assert gravity.local("45.4996 deg") == pytest.approx(gravity.STANDARD_GRAVITY, abs=5e-8)


def test_pole_against_equator() -> None:
    """0.530 % more at the pole than at the equator, to the three digits given."""
    assert gravity.local("90 deg") / gravity.local("0 deg") - 1.0 == pytest.approx(5.30e-3, abs=5e-6)


def closed_form(latitude: float, height: float) -> float:
    """Normal gravity at any height from the ellipsoid's own potential, without a series.

    Heiskanen and Moritz, Physical Geodesy (1967), section 6-2, in ellipsoidal coordinates (u, β).
    Constants: semi-axis and flattening as in TR8350.2, GM = 3.986004418e14 m³/s²,
    ω = 7.292115e-5 rad/s.
    """
    gm, w, a, f = 3.986004418e14, 7.292115e-5, 6378137.0, 1.0 / 298.257223563
    b = a * (1.0 - f)
    linear = math.sqrt(a * a - b * b)
    e2 = f * (2.0 - f)
    n = a / math.sqrt(1.0 - e2 * math.sin(latitude) ** 2)
    r, z = (n + height) * math.cos(latitude), (n * (1.0 - e2) + height) * math.sin(latitude)
    d = r * r + z * z - linear * linear
    u2 = 0.5 * d * (1.0 + math.sqrt(1.0 + 4.0 * linear * linear * z * z / (d * d)))
    u = math.sqrt(u2)
    beta = math.atan2(z * math.sqrt(u2 + linear * linear), u * r)
    stretch = math.sqrt((u2 + linear**2 * math.sin(beta) ** 2) / (u2 + linear**2))

    def q(v: float) -> float:
        return 0.5 * ((1.0 + 3.0 * v * v / linear**2) * math.atan(linear / v) - 3.0 * v / linear)

    slope = 3.0 * (1.0 + u2 / linear**2) * (1.0 - u / linear * math.atan(linear / u)) - 1.0
    ratio = w * w * a * a / (u2 + linear**2)
    along_u = (
        -(
            gm / (u2 + linear**2)
            + ratio * linear * slope / q(b) * (0.5 * math.sin(beta) ** 2 - 1.0 / 6.0)
            - w * w * u * math.cos(beta) ** 2
        )
        / stretch
    )
    along_beta = (
        (ratio * math.sqrt(u2 + linear**2) * q(u) / q(b) - w * w * math.sqrt(u2 + linear**2))
        * math.sin(beta)
        * math.cos(beta)
        / stretch
    )
    return math.hypot(along_u, along_beta)


@pytest.mark.parametrize("degrees", np.linspace(-90.0, 90.0, 19).tolist())
@pytest.mark.parametrize("height", [-1e4, -1e3, 0.0, 1e3, 2e3, 1e4, 2e4, 5e4, 1e5])
def test_against_the_closed_form(degrees: float, height: float) -> None:
    """Swept over the whole stated range of latitudes and heights.

    The height formula is a series in h/a and f that leaves out terms of the orders (h/a)·f², (h/a)²·f
    and (h/a)³. The tolerance lets these have the factors 8, 12 and 6, our own choice (the last is 4 on a
    sphere that does not turn). At height 0 both are exact but for the rounding of the constants.
    """
    f, relative = 1.0 / 298.257223563, abs(height) / 6378137.0
    allowed = 9.81 * relative * (8.0 * f**2 + 12.0 * f * relative + 6.0 * relative**2) + 3e-10
    expected = closed_form(math.radians(degrees), height)
    assert gravity.local(f"{degrees} deg", height) == pytest.approx(expected, abs=allowed)

"""Spools against closed forms: the half nephroid, a crank pin, a round drum, a spiral, and a taut string.

The idea of the construction is that of Kobayashi 2001, New design method for spring balancers,
Journal of Mechanical Design 123(4):494-500, of which no numbers were seen. The table of the half
nephroid was computed from the closed forms that stand beside it, before and apart from this
library; it is compared to all the digits stated.
"""

from __future__ import annotations

import csv
import math
import re

import numpy as np
import pytest

from springpoise import Arm, Body, ConstantForceSpring, Mechanism, Spool, SpringMount, ZeroLengthSpring
from springpoise.balance.spools.shape import convex_beyond, shape_spool
from springpoise.gravity import STANDARD_GRAVITY
from springpoise.paths import GuideRoller

G = 2.0 * STANDARD_GRAVITY * 0.35
RATE = 2000.0
P = math.sqrt(G / RATE)
ARM = Arm(Body(2.0, (0.35, 0.0)))
UPRIGHT = math.pi / 2


def _nephroid(**options):
    """From upright to hanging, φ = π/2 - q; the cable leaves to the left at upright, along the arm's y axis."""
    given = {"leaves": math.pi, "cable_diameter": 0.0, "over": (-UPRIGHT, UPRIGHT), **options}
    return shape_spool(ARM, ZeroLengthSpring(RATE), **given)


class TestHalfNephroid:
    """No preload, a load G sin φ, a fixed direction: x = 2 P sin(φ/2), p = P cos(φ/2), R = 3/4 P cos(φ/2)."""

    spool = _nephroid()
    phi = UPRIGHT - spool.angles

    def test_lengths(self):
        assert np.allclose(self.spool.spring_lengths, 2 * P * np.sin(self.phi / 2), rtol=0, atol=1e-14)

    def test_moment_radii(self):
        assert np.allclose(-self.spool.moment_radii, P * np.cos(self.phi / 2), rtol=0, atol=1e-14)

    def test_curvature(self):
        # The second slope is a quotient that loses digits towards the unloaded start.
        assert np.allclose(self.spool.curvature_radii, 0.75 * P * np.cos(self.phi / 2), rtol=0, atol=1e-9)

    def test_line_is_a_nephroid(self):
        # (X² + Y² - 4 q²)³ = 108 q⁴ X², q = P/4: the nephroid's equation as it stands in any table of curves
        x, y = self.spool.pitch_line.T / (P / 4)
        assert np.max(np.abs((x**2 + y**2 - 4) ** 3 - 108 * x**2)) < 1e-9

    def test_arc(self):
        assert self.spool.wound_length == pytest.approx(1.5 * P, rel=1e-12)

    @pytest.mark.parametrize(
        ("phi", "x", "p", "curvature", "px", "py"),
        [
            (0, 0, 0.0585860692, 0.0439395519, 0.0585860692, 0),
            (30, 0.0303263810, 0.0565897973, 0.0424423479, 0.0527989996, 0.0217290446),
            (60, 0.0585860692, 0.0507370242, 0.0380527682, 0.0380527682, 0.0366162932),
            (90, 0.0828532136, 0.0414266068, 0.0310699551, 0.0207133034, 0.0414266068),
            (120, 0.1014740484, 0.0292930346, 0.0219697759, 0.0073232586, 0.0380527682),
            (150, 0.1131795945, 0.0151631905, 0.0113723929, 0.0010157412, 0.0320856963),
            (180, 0.1171721383, 0, 0, 0, 0.0292930346),
        ],
    )
    def test_table(self, phi, x, p, curvature, px, py):
        # a range that begins at φ, so that its first pose is the row; 1e-9 m for the curvature as above
        spool = _nephroid(over=(math.radians(90 - phi), UPRIGHT)) if phi else self.spool
        row = 0 if phi else -1
        assert spool.spring_lengths[row] == pytest.approx(x, abs=6e-11)
        assert -spool.moment_radii[row] == pytest.approx(p, abs=6e-11)
        assert spool.curvature_radii[row] == pytest.approx(curvature, abs=1e-9)
        assert spool.pitch_line[row] == pytest.approx([px, py], abs=6e-11)

    def test_cusp_at_hanging_fails(self):
        assert not self.spool.success
        low, high = self.spool.checks[0].fails_over[0]
        assert (low, high) == pytest.approx((-UPRIGHT, -UPRIGHT), abs=1e-6)
        assert _nephroid(over=(-1.5, UPRIGHT)).success

    def test_cable_as_thick_as_the_curve(self):
        # R = 3/4 P cos(φ/2) = d/2 where the groove's bottom comes to a point
        diameter = 0.02
        spool = _nephroid(cable_diameter=diameter)
        edge = UPRIGHT - 2 * math.acos(diameter / (1.5 * P))
        assert spool.checks[0].fails_over[0] == pytest.approx((-UPRIGHT, edge), abs=1e-8)
        # and the machined line lies d/2 inside
        gap = np.hypot(*(spool.pitch_line - spool.machined_line).T)
        assert np.allclose(gap, diameter / 2, rtol=0, atol=1e-15)

    def test_balance(self):
        mech = self.spool.mechanism
        middles = 0.5 * (self.spool.angles[1:] + self.spool.angles[:-1])
        assert np.max(np.abs(mech.holding_torque(middles))) < 1e-10 * G
        assert np.ptp(mech.energy(middles)) < 1e-10 * G
        assert self.spool.roll_out_error < 1e-9


@pytest.mark.parametrize(("e", "degrees"), [(0.5, 80.12071805), (1, 74.45773178), (5, 57.54241991), (20, 43.12670014)])
def test_preload_limit(e, degrees):
    """cos φ* = (e + 1 - sqrt(2e + 1))/e with e = 2 G/(k x0²), and the same from the line itself."""
    assert math.cos(math.radians(degrees)) == pytest.approx((e + 1 - math.sqrt(2 * e + 1)) / e, abs=1e-10)
    assert math.degrees(convex_beyond(e)) == pytest.approx(degrees, abs=6e-9)
    spool = _nephroid(start_length=math.sqrt(2 * G / (RATE * e)), over=(-1.0, UPRIGHT))
    ((low, high),) = spool.checks[0].fails_over
    assert high == UPRIGHT
    assert 90 - math.degrees(low) == pytest.approx(degrees, abs=6e-9)
    assert f"would do from -57.30 deg to {90 - degrees:.2f} deg" in spool.status


def test_constant_pull_degenerates_to_a_crank_pin():
    # p = (G/F) cos q: every tangent passes through one point, G/F from the axis
    spool = shape_spool(
        ARM, ConstantForceSpring(100.0), leaves="90 deg", cable_diameter=0.0, start_length=0.1, over=(-1, 1)
    )
    assert np.ptp(spool.pitch_line, axis=0) == pytest.approx([0, 0], abs=1e-15)
    assert spool.pitch_line[0] == pytest.approx([G / 100.0, 0], abs=1e-15)
    assert not spool.success


def _weight_on_a_drum():
    """A constant torque of 1 N·m that turns the joint clockwise: 20 N on a drum of 50 mm."""
    drum = Spool.drum(0.05)
    return Mechanism(Arm(Body(0.0, (0.0, 0.0))), springs=SpringMount(ConstantForceSpring(20.0), drum), travel=(-1, 2))


def test_constant_torque_and_constant_pull_give_a_round_drum():
    spool = shape_spool(
        _weight_on_a_drum(), ConstantForceSpring(50.0), leaves=0.0, cable_diameter="4 mm", start_length=0.1
    )
    assert spool.success
    assert spool.pull == "ccw"
    assert np.allclose(np.hypot(*spool.pitch_line.T), 0.02, rtol=0, atol=1e-15)
    assert np.allclose(np.hypot(*spool.machined_line.T), 0.018, rtol=0, atol=1e-15)
    assert np.allclose(spool.curvature_radii, 0.02, rtol=0, atol=1e-14)
    assert spool.wound_length == pytest.approx(0.02 * 3.0, rel=1e-12)


def test_constant_torque_and_a_spring_give_a_spiral():
    # k (x² - x0²)/2 = T φ: x = sqrt(x0² + 2 T φ/k), p = T/(k x), R = p + p'' with p'' = 3 T³/(k³ x⁵)
    rate, x0 = 1500.0, 0.03
    spool = shape_spool(_weight_on_a_drum(), ZeroLengthSpring(rate), leaves=0.0, cable_diameter="1 mm", start_length=x0)
    x = np.sqrt(x0**2 + 2 * (2 - spool.angles) / rate)
    assert np.allclose(spool.spring_lengths, x, rtol=1e-13)
    assert np.allclose(-spool.moment_radii, 1 / (rate * x), rtol=1e-13)
    assert np.allclose(spool.curvature_radii, 1 / (rate * x) + 3 / (rate**3 * x**5), rtol=1e-12)
    assert spool.success


@pytest.mark.parametrize("mirrored", [False, True])
@pytest.mark.parametrize("at", [(-0.2, 0.05), (0.25, -0.1), (0.0, 0.3)])
@pytest.mark.parametrize("side", [1, -1])
def test_taut_string_round_the_line(at, side, mirrored):
    """A string laid round the line's points to a guide, by hand: how much it gives is what the spring lengthens.

    A roller's contact is found from the tangent to the circle. The chords of 1025 points are
    shorter than the arcs by less than 1e-7 m in all.
    """
    over = (math.pi - 0.6, math.pi + 1.2) if mirrored else (-1.2, 0.6)
    radius = 0.012
    spool = shape_spool(
        ARM,
        ZeroLengthSpring(1500.0),
        leaves=GuideRoller(at, radius=radius, side=side),
        cable_diameter="2 mm",
        start_length=0.05,
        over=over,
    )
    assert spool.success
    assert spool.roll_out_error < 1e-9
    way = 1 if spool.pull == "ccw" else -1
    assert way == (-1 if mirrored else 1)
    line = spool.pitch_line[:: -1 if spool.tie_at else 1]
    chords = np.concatenate([[0], np.cumsum(np.hypot(*np.diff(line, axis=0).T))])
    ground = line[:, 0] + 1j * line[:, 1]
    centre = complex(*at)
    found = []
    for q in np.linspace(*over, 15)[1:-1]:
        turned = ground * np.exp(1j * q)
        d = np.abs(centre - turned)
        # Seen from the spool's point, the cable passes the roller's centre at its radius, on the side that is meant.
        aside = side * way * radius / d
        run = d * np.sqrt(1 - aside**2)
        towards = (centre - turned) / d * np.exp(1j * np.arcsin(aside))
        along = np.gradient(turned, chords)
        turn = np.imag(np.conj(along) * towards)  # changes sign where the string leaves along the tangent
        (i,) = np.flatnonzero(turn[:-1] * turn[1:] <= 0)
        share = turn[i] / (turn[i] - turn[i + 1])
        wound, straight, direction = (
            (1 - share) * values[i] + share * values[i + 1] for values in (chords, run, np.unwrap(np.angle(towards)))
        )
        found.append((q, wound + straight + side * way * radius * direction))
    q, total = np.array(found).T
    stray = total - np.interp(q, spool.angles, spool.spring_lengths)
    # Whole turns of the direction do not count.
    turn = 2 * math.pi * radius
    assert np.max(np.abs((stray - stray[0] + turn / 2) % turn - turn / 2)) < 2e-7


class TestFiles:
    spool = _nephroid(over=(-1.4, UPRIGHT), cable_diameter=0.003)

    def test_csv(self, tmp_path):
        self.spool.write_csv(tmp_path / "spool.csv")
        with open(tmp_path / "spool.csv", encoding="utf-8", newline="") as stream:
            rows = list(csv.reader(stream))
        columns = dict(zip(rows[0], np.array(rows[1:], dtype=float).T, strict=True))
        for name, line in (("pitch", self.spool.pitch_line), ("machined", self.spool.machined_line)):
            read = np.stack([columns[f"{name} x [mm]"], columns[f"{name} y [mm]"]], axis=-1)
            assert np.max(np.abs(read / 1e3 - line)) < 1e-6
        assert np.allclose(columns["joint angle [deg]"], np.degrees(self.spool.angles), rtol=0, atol=1e-8)
        assert np.allclose(columns["spring length [mm]"] / 1e3, self.spool.spring_lengths, rtol=0, atol=1e-9)

    def test_svg(self, tmp_path):
        from xml.etree import ElementTree

        self.spool.write_svg(tmp_path / "spool.svg")
        root = ElementTree.parse(tmp_path / "spool.svg").getroot()
        names = {element.get("id"): element for element in root.iter()}
        width, height = (float(root.get(side).removesuffix("mm")) for side in ("width", "height"))
        x, y, *size = map(float, root.get("viewBox").split())
        assert size == [width, height]  # one unit is one mm
        for name, line in (("pitch-line", self.spool.pitch_line), ("machined-line", self.spool.machined_line)):
            read = np.array(re.findall(r"[-\d.]+", names[name].get("d")), dtype=float).reshape(-1, 2)
            assert np.max(np.abs(read * [1, -1] / 1e3 - line)) < 1e-6
            assert np.all((read > [x, y]) & (read < [x + width, y + height]))
        circle = next(element for element in names["axis"].iter() if element.tag.endswith("circle"))
        assert (circle.get("cx"), circle.get("cy")) == ("0", "0")

    def test_dxf(self, tmp_path):
        ezdxf = pytest.importorskip("ezdxf", reason="writing DXF is an extra")
        self.spool.write_dxf(tmp_path / "spool.dxf")
        document = ezdxf.readfile(tmp_path / "spool.dxf")
        assert document.units == 4  # millimetres
        lines = {entity.dxf.layer: entity for entity in document.modelspace().query("LWPOLYLINE")}
        for layer, line in (("PITCH", self.spool.pitch_line), ("MACHINED", self.spool.machined_line)):
            read = np.array(list(lines[layer].get_points("xy")))
            assert np.max(np.abs(read / 1e3 - line)) < 1e-6
        (circle,) = document.modelspace().query("CIRCLE")
        assert circle.dxf.layer == "AXIS"
        assert tuple(circle.dxf.center) == (0, 0, 0)

"""Spools against closed forms and against the cable laid out by hand; drums against rolled-out cables.

The roll-out is drawn here in complex numbers: the tangent point on the turned cam is found by its own
search, then wrapped arc, straight run and the wrap on the guide are added up. No tangent formula of
the library is used. Tolerance 1e-9 m where the profile is given by 1500 points or more: cubics between
points h apart miss a line of curvature radius R by h^4/(384 R^3), some 1e-13 m here, and the least
exact step is the arc's own quadrature.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import cumulative_simpson
from scipy.interpolate import CubicSpline

from springpoise import (
    Arm,
    Body,
    Cable,
    ConstantForceSpring,
    Disc,
    Mechanism,
    Point,
    SpringMount,
    ZeroLengthSpring,
)
from springpoise.linkages import FourBar, Link, PlanarChain
from springpoise.paths import GuideRoller, Spool
from springpoise.paths.drum import Drum

ARM = Arm(Body(1.0, (0.1, 0.0)))
CLOSE = 1e-9


def circle(radius, off=0.0, turned=0.0, span=(0.0, 2.0 * math.pi), count=1500):
    t = np.linspace(*span, count)
    return (off + radius * np.exp(1j * t)) * np.exp(1j * turned)


def ellipse(a, b, off, count=4000):
    t = np.linspace(0.0, 2.0 * math.pi, count)
    return off + a * np.cos(t) + 1j * b * np.sin(t)


def points(line):
    return np.stack([line.real, line.imag], axis=-1)


class Laid:
    """A closed, counter-clockwise cam line with its arc length, for laying a cable on it."""

    def __init__(self, line):
        self.t = np.linspace(0.0, 2.0 * math.pi, len(line))
        self.line = CubicSpline(self.t, line, bc_type="periodic" if abs(line[0] - line[-1]) < 1e-14 else "not-a-knot")
        fine = np.linspace(0.0, 2.0 * math.pi, 20001)
        speed = np.abs(self.line(fine, 1))
        self.arc = CubicSpline(fine, cumulative_simpson(speed, x=fine, initial=0.0))

    def contact(self, q, towards, way):
        """Parameter where a cable in direction ``towards(point)`` leaves the cam turned by ``q``: bisection."""

        def lean(t):
            # the cable runs along +way the line's own direction where it leaves
            direction = towards(self.line(t) * np.exp(1j * q))
            return np.imag(np.conj(way * self.line(t, 1) * np.exp(1j * q)) * direction)

        grid = np.linspace(0.0, 2.0 * math.pi, 361)
        value = lean(grid)
        along = np.real(np.conj(way * self.line(grid, 1) * np.exp(1j * q)) * towards(self.line(grid) * np.exp(1j * q)))
        for i in np.flatnonzero(value[:-1] * value[1:] <= 0.0):
            if along[i] > 0.0:
                low, high = grid[i], grid[i + 1]
                for _ in range(50):
                    middle = 0.5 * (low + high)
                    low, high = (middle, high) if lean(low) * lean(middle) > 0.0 else (low, middle)
                return 0.5 * (low + high)
        raise AssertionError("no contact")


def _unwrapped(parameters):
    return np.unwrap(np.array(parameters))


def _arc(laid, parameters):
    """Arc length along the closed line, for parameters that may run past its ends."""
    turns = np.floor(parameters / (2.0 * math.pi))
    return laid.arc(parameters - 2.0 * math.pi * turns) + turns * laid.arc(2.0 * math.pi)


def _wound(laid, parameters, way):
    """Cable on the cam from a tie far behind, against the way in which it leaves."""
    return way * _arc(laid, _unwrapped(parameters))


def take_up_in_a_direction(line, leaves, pull, poses):
    """Length of the cable up to a distant guide, but for a constant."""
    way = 1.0 if pull == "ccw" else -1.0  # where a pull turns counter-clockwise the cable lies along the line's way
    laid = Laid(line)
    u = np.exp(1j * leaves)
    contacts = [laid.contact(q, lambda point: u + 0.0 * point, way) for q in poses]
    at = np.array([laid.line(t) * np.exp(1j * q) for t, q in zip(contacts, poses, strict=True)])
    return _wound(laid, contacts, way) - np.real(np.conj(u) * at)


def take_up_over_a_roller(line, roller, pull, poses):
    """Length of the cable past a roller to a fixed direction behind it, but for a constant."""
    way = 1.0 if pull == "ccw" else -1.0
    laid = Laid(line)
    centre = complex(*roller.at)
    # the run passes the roller on the spool's side (+1) or on the far side (-1), seen across its way
    sense = -way * roller.side  # on the roller: +1 counter-clockwise

    def towards(point):
        # from a point to the roller's rim that is passed in this sense
        across = centre - point
        return across * np.exp(-1j * sense * np.arcsin(roller.radius / np.abs(across))) / np.abs(across)

    contacts = [laid.contact(q, towards, way) for q in poses]
    at = np.array([laid.line(t) * np.exp(1j * q) for t, q in zip(contacts, poses, strict=True)])
    runs = np.sqrt(np.abs(centre - at) ** 2 - roller.radius**2)
    directions = np.unwrap([np.angle(towards(point)) for point in at])
    return _wound(laid, contacts, way) + runs - sense * roller.radius * directions


def _cases():
    for pull in ("cw", "ccw"):
        yield "circle", circle(0.03), pull
        yield "eccentric circle", circle(0.03, off=0.012, turned=0.7), pull
        yield "ellipse", ellipse(0.04, 0.025, 0.004 + 0.003j), pull


CASES = [pytest.param(line, pull, id=f"{name} {pull}") for name, line, pull in _cases()]
POSES = np.linspace(-2.0, 2.0, 23)


@pytest.mark.parametrize(("line", "pull"), CASES)
@pytest.mark.parametrize("leaves", [-math.pi / 2, 0.4])
def test_roll_out_in_a_direction(line, pull, leaves):
    spool = Spool.from_profile(points(line), leaves=leaves, pull=pull, over=(-2.0, 2.0))
    ours = spool.length(ARM, POSES)
    theirs = take_up_in_a_direction(line, leaves, pull, POSES)
    assert np.max(np.abs((ours - ours[0]) - (theirs - theirs[0]))) < CLOSE


@pytest.mark.parametrize(("line", "pull"), CASES)
@pytest.mark.parametrize("side", [1, -1])
@pytest.mark.parametrize("radius", [0.0, 0.012])
def test_roll_out_over_a_roller(line, pull, side, radius):
    roller = GuideRoller((0.09, -0.06), radius=radius, side=side)
    spool = Spool.from_profile(points(line), leaves=roller, pull=pull, over=(-2.0, 2.0))
    ours = spool.length(ARM, POSES)
    theirs = take_up_over_a_roller(line, roller, pull, POSES)
    assert np.max(np.abs((ours - ours[0]) - (theirs - theirs[0]))) < CLOSE


@pytest.mark.parametrize("pull", ["cw", "ccw"])
def test_eccentric_circle_in_closed_form(pull):
    # the tangent in direction u lies r + e cos(angle) from the pin, with the angle from the eccentricity to
    # the tangent's normal; the path's length is its integral
    radius, off, turned, leaves = 0.03, 0.012, 0.7, -1.1
    way = 1.0 if pull == "ccw" else -1.0
    spool = Spool.from_profile(points(circle(radius, off, turned)), leaves=leaves, pull=pull, over=(-2.5, 2.5))
    q = np.linspace(-2.5, 2.5, 101)
    normal = leaves - way * math.pi / 2
    moment_radius = -way * (radius + off * np.cos(normal - q - turned))
    assert np.max(np.abs(spool.gradient(ARM, q)[0] - moment_radius)) < 1e-10
    taken = -way * (radius * q - off * np.sin(normal - q - turned))
    length = spool.length(ARM, q)
    assert np.max(np.abs((length - length[0]) - (taken - taken[0]))) < 1e-10


def test_ellipse_in_closed_form():
    # support function of an ellipse about its middle: sqrt(a² cos² + b² sin²) of the normal's direction
    a, b = 0.04, 0.025
    spool = Spool.from_profile(points(ellipse(a, b, 0.0)), leaves=0.0, pull="ccw", over=(-3.0, 3.0))
    q = np.linspace(-3.0, 3.0, 101)
    normal = -math.pi / 2 - q
    support = np.sqrt((a * np.cos(normal)) ** 2 + (b * np.sin(normal)) ** 2)
    assert np.max(np.abs(spool.gradient(ARM, q)[0] + support)) < 1e-10


@pytest.mark.parametrize("kind", ["direction", "roller"])
def test_moment_radius_is_the_slope_of_the_length(kind):
    leaves = 0.4 if kind == "direction" else GuideRoller((0.09, -0.06), radius=0.01)
    spool = Spool.from_profile(points(ellipse(0.04, 0.025, 0.004)), leaves=leaves, pull="cw", over=(-2.0, 2.0))
    q, h = np.linspace(-1.9, 1.9, 57), 1e-3
    weights = (1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280)
    slope = sum(w * spool.length(ARM, q + k * h) for k, w in zip(range(-4, 5), weights, strict=True)) / h
    assert np.max(np.abs(slope - spool.gradient(ARM, q)[0])) < 1e-11


# -------------------------------------------------------------------------------------------
# the cam that balances an arm from upright (Ulrich and Kumar 1991; half a nephroid, closed form)

G = 2.0 * 9.80665 * 0.35
RATE = 2000.0
P = math.sqrt(G / RATE)

# phi deg, x, p, X, Y, all m, for m g r = 6.864655 N m and k = 2000 N/m, by the closed forms beneath
NEPHROID = [
    (0, 0.0, 0.0585860692, 0.0585860692, 0.0),
    (30, 0.0303263810, 0.0565897973, 0.0527989996, 0.0217290446),
    (60, 0.0585860692, 0.0507370242, 0.0380527682, 0.0366162932),
    (90, 0.0828532136, 0.0414266068, 0.0207133034, 0.0414266068),
    (120, 0.1014740484, 0.0292930346, 0.0073232586, 0.0380527682),
    (150, 0.1131795945, 0.0151631905, 0.0010157412, 0.0320856963),
]


def nephroid(phi):
    """Envelope of the lines n·X = p with n at phi and p = P cos(phi/2)."""
    p, slope = P * np.cos(phi / 2), -0.5 * P * np.sin(phi / 2)
    return (p + 1j * slope) * np.exp(1j * phi)


def test_the_nephroid_is_the_one_of_the_table():
    for degrees, *row in NEPHROID:
        phi = math.radians(degrees)
        X, Y = nephroid(phi).real, nephroid(phi).imag
        assert [2 * P * math.sin(phi / 2), P * math.cos(phi / 2), X, Y] == pytest.approx(row, abs=6e-11)
        q = P / 4
        assert (X * X + Y * Y - 4 * q * q) ** 3 == pytest.approx(108 * q**4 * X * X, abs=1e-19)


def _nephroid_spool():
    # the line on which the cable lies reaches a little beyond what is used; beyond upright it is its mirror image
    line = nephroid(np.linspace(math.radians(-8.0), math.radians(170.0), 3000))
    # cam and arm turn clockwise from upright, phi = 90 deg - q; the cable leaves so that its normal is at phi in the cam
    return Spool.from_profile(
        points(line * np.exp(-0.5j * math.pi)), leaves=math.pi / 2, pull="ccw", over=("-60 deg", "90 deg")
    )


def test_the_nephroid_cam_takes_up_what_the_closed_form_says():
    spool = _nephroid_spool()
    upright = spool.length(ARM, math.pi / 2)
    for degrees, x, p, _, _ in NEPHROID:
        q = math.radians(90 - degrees)
        assert spool.length(ARM, q) - upright == pytest.approx(x, abs=CLOSE)
        assert abs(spool.gradient(ARM, q)[0]) == pytest.approx(p, abs=CLOSE)


def test_the_nephroid_cam_balances_its_arm():
    spool = _nephroid_spool()
    taken = spool.length(ARM, math.pi / 2)
    mount = SpringMount(ZeroLengthSpring(RATE), spool, rigid_length=float(taken))
    mech = Mechanism(Arm(Body(2.0, (0.35, 0.0))), springs=mount, travel=("-60 deg", "90 deg"))
    q = mech.poses(301)
    assert np.max(np.abs(mech.holding_torque(q))) < 1e-7 * G  # CLOSE times the rate and the moment radius, over G
    assert np.ptp(mech.energy(q)) < 1e-7 * G


# -------------------------------------------------------------------------------------------
# drums


@pytest.mark.parametrize("turn", ["cw", "ccw"])
def test_a_drum_of_the_spool_winds_up_in_its_sense(turn):
    drum = Spool.drum("30 mm", turn=turn)
    sign = 1.0 if turn == "ccw" else -1.0
    assert drum.gradient(ARM, 0.7)[0] == sign * 0.03
    assert drum.length(ARM, 0.7) - drum.length(ARM, -0.2) == pytest.approx(sign * 0.027, abs=1e-15)
    # a load unwinds it: a drum that winds up counter-clockwise is turned clockwise
    mech = Mechanism(ARM, springs=SpringMount(ConstantForceSpring(50.0), drum))
    assert mech.spring_torque(0.7) == pytest.approx(-sign * 1.5, abs=1e-12)


@pytest.mark.parametrize("turn", ["cw", "ccw"])
def test_drum_and_spool_are_the_same_on_a_joint(turn):
    # From below the cable meets the drum on its right and runs round counter-clockwise, or on its left and
    # runs round clockwise; the tie lies 1.9 rad behind. It winds up as the tie moves on in the cable's own sense.
    tie = 1.9 if turn == "ccw" else math.pi - 1.9
    tied = Cable(Point("ground", (0.0, -0.6)), Drum(Point("arm", (0.0, 0.0)), radius=0.03, turn=turn, tie=tie))
    spool = Spool.drum(0.03, turn=turn)
    q = np.linspace(-1.0, 1.0, 21)
    assert np.allclose(tied.gradient(ARM, q)[0], spool.gradient(ARM, q)[0], atol=1e-15)
    ours, theirs = tied.length(ARM, q), spool.length(ARM, q)
    assert np.allclose(ours - ours[0], theirs - theirs[0], atol=1e-14)


def taut_on_a_rim(start, centre, radius, sense, tie, count=50_000):
    """Shortest way from a point to a tie on a rim: over a leaving point anywhere behind the tie, none cut by the disc."""
    back = np.linspace(0.0, 1.5 * math.pi, count)
    leaving = centre + radius * np.exp(1j * (tie - sense * back))
    chord = leaving - start
    share = np.clip(np.real((centre - start) * chord.conj()) / np.abs(chord) ** 2, 0.0, 1.0)
    clear = np.abs(start + share * chord - centre) >= radius * (1.0 - 1e-7)
    # the cable must go on round the rim in its sense where it meets it
    onwards = np.real(chord.conj() * (sense * 1j) * (leaving - centre)) >= -1e-6
    return np.min(np.where(clear & onwards, np.abs(chord) + radius * back, np.inf))


@pytest.mark.parametrize("first", [False, True])
def test_drums_against_taut_strings(first):
    """A string pulled taut: the shortest of all ways over the rim. The grid leaves (r·step)² over the run, 1e-10 m."""
    rng = np.random.default_rng(3)
    chain = PlanarChain([Link("a", length=0.4), Link("b", length=0.3)])
    wound = unwound = 0
    for _ in range(150):
        turn = str(rng.choice(["cw", "ccw"]))
        sense = 1.0 if turn == "ccw" else -1.0
        at, radius, tie = tuple(rng.uniform(-0.2, 0.2, 2)), float(rng.uniform(0.02, 0.06)), float(rng.uniform(-3, 3))
        drum = Drum(Point("b", at), radius=radius, turn=turn, tie=tie)
        end = Point("ground", tuple(rng.uniform(-0.5, 0.5, 2)))
        cable = Cable(drum, end) if first else Cable(end, drum)
        q = rng.uniform(-3.0, 3.0, 2)
        centre = complex(*chain.position(drum.centre, q))
        tied = complex(*chain.position(drum.tie_point, q)) - centre
        start = complex(*end.at)
        (wrap,) = cable.wraps(chain, q)
        # nearly a turn: the way to the tie from its other side is shorter, but not this drum's
        if abs(start - centre) < 1.3 * radius or wrap > 1.4 * math.pi:
            continue
        # from the other end the string runs round in the other sense
        length = taut_on_a_rim(start, centre, radius, -sense if first else sense, np.angle(tied))
        assert cable.length(chain, q) == pytest.approx(length, abs=2e-9)
        wound += wrap > 0.0
        unwound += wrap == 0.0
    assert wound > 60
    assert unwound > 15


def test_a_drum_on_a_coupler_turns_with_it():
    """Rolled out by hand: straight run, and radius times the angle from where it arrives to the tie."""
    linkage = FourBar(
        crank=Link("crank", length=0.12),
        coupler=Link("coupler", length=0.35),
        rocker=Link("rocker", length=0.3),
        second_pivot=(0.35, 0.05),
    )
    radius = 0.03
    drum = Drum(Point("coupler", (0.1, 0.1)), radius=radius, turn="ccw", tie=2.0)
    cable = Cable(Point("rocker", (0.1, -0.3)), drum)
    for q in np.linspace(-1.5, 1.5, 13):
        start = complex(*linkage.position(cable.along[0], float(q)))
        centre = complex(*linkage.position(drum.centre, float(q)))
        x0, x1 = (complex(*linkage.position(Point("coupler", (x, 0.0)), float(q))) for x in (0.0, 1.0))
        tie = np.angle(x1 - x0) + 2.0
        away = abs(start - centre)
        arrives = np.angle(start - centre) + math.acos(radius / away)
        wrap = (tie - arrives) % (2.0 * math.pi)
        (ours,) = cable.wraps(linkage, float(q))
        assert ours == pytest.approx(wrap, abs=1e-12)
        expected = math.sqrt(away * away - radius * radius) + radius * wrap
        assert cable.length(linkage, float(q)) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize("turn", ["cw", "ccw"])
def test_a_drum_is_a_disc_with_an_end_beside_it(turn):
    """On one body, a cable that is tied 50 mm behind the tie, along the tangent there, differs by these 50 mm only."""
    sense = 1.0 if turn == "ccw" else -1.0
    tie = 2.2 if turn == "ccw" else math.pi - 2.2
    drum = Drum(Point("arm", (0.2, 0.0)), radius=0.03, turn=turn, tie=tie)
    x, y = drum.tie_point.at
    beyond = Point("arm", (x - 0.05 * sense * math.sin(tie), y + 0.05 * sense * math.cos(tie)))
    start = Point("ground", (0.2, -0.6))
    tied, over = Cable(start, drum), Cable(start, Disc(drum.centre, radius=0.03, turn=turn), beyond)
    q = np.linspace(-0.8, 0.8, 17)
    assert np.min(tied.wraps(ARM, q)) > 0.3
    assert np.allclose(over.length(ARM, q) - tied.length(ARM, q), 0.05, atol=1e-15)
    assert np.allclose(over.gradient(ARM, q)[0], tied.gradient(ARM, q)[0], atol=1e-15)

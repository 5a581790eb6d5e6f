"""MuJoCo as an independent referee: spatial tendons with stiffness, also round cylinders, against the mechanics here.

Tolerance 1e-9 of the peak over the sweep: both sides compute in double precision, MuJoCo's own
wrapping is exact geometry too.
"""

from __future__ import annotations

import math

import attrs
import mujoco
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)

SWEEP = np.linspace(-math.pi, math.pi, 73)
CLOSE = 1e-9


@attrs.frozen
class Wheel:
    """A disc of a cable, with the side on which the cable passes it, in the disc's frame."""

    body: str
    at: tuple[float, float]
    radius: float
    turn: str
    side: tuple[float, float]


def _numbers(*values):
    return " ".join(repr(float(value)) for value in values)


def _site(name, at):
    return f'<site name="{name}" pos="{_numbers(*at, 0)}"/>'


def _model(mass, com, gravity, route, rate, free_length):
    """A hinge about z at the origin, one body, and one tendon along ``route``."""
    frames = {"ground": "", "arm": ""}
    tendon = ""
    for index, item in enumerate(route):
        if isinstance(item, Wheel):
            side = [c + 3.0 * item.radius * s for c, s in zip(item.at, item.side, strict=True)]
            frames[item.body] += (
                f'<geom name="w{index}" type="cylinder" size="{_numbers(item.radius, 0.1)}" '
                f'pos="{_numbers(*item.at, 0)}" contype="0" conaffinity="0"/>' + _site(f"s{index}", side)
            )
            tendon += f'<geom geom="w{index}" sidesite="s{index}"/>'
        else:
            frames[item.body] += _site(f"p{index}", item.at)
            tendon += f'<site site="p{index}"/>'
    return mujoco.MjModel.from_xml_string(
        f"""<mujoco><compiler angle="radian" inertiafromgeom="false"/>
        <option gravity="{_numbers(*gravity, 0)}"/>
        <worldbody>{frames["ground"]}<body name="arm"><joint type="hinge" axis="0 0 1"/>
        <inertial pos="{_numbers(*com, 0)}" mass="{mass!r}" diaginertia="0.01 0.01 0.01"/>{frames["arm"]}</body>
        </worldbody><tendon><spatial stiffness="{rate!r}" springlength="{_numbers(0, free_length)}">{tendon}</spatial>
        </tendon></mujoco>"""
    )


def _sweep(model, poses):
    """Tendon length, moment arm dL/dq, tendon torque and gravity torque at each pose."""
    data = mujoco.MjData(model)
    rows = []
    for q in poses:
        data.qpos[0] = q
        mujoco.mj_forward(model, data)
        rows.append((data.ten_length[0], data.ten_J[0], data.qfrc_passive[0], -data.qfrc_bias[0]))
    return np.array(rows).T


def _mechanism(mass, com, gravity, route, spring):
    along = [
        Disc(Point(item.body, item.at), radius=item.radius, turn=item.turn) if isinstance(item, Wheel) else item
        for item in route
    ]
    path = Straight(*along) if len(along) == 2 else Cable(*along)
    return Mechanism(Arm(Body(mass, com)), springs=[SpringMount(spring, path)], gravity=gravity)


def _close(ours, theirs, where=slice(None)):
    peak = np.max(np.abs(theirs))
    assert np.max(np.abs(ours[where] - theirs[where]), initial=0.0) <= CLOSE * peak


def _random_load(rng):
    tilt = rng.uniform(-0.5, 0.5)
    gravity = (9.80665 * math.sin(tilt), -9.80665 * math.cos(tilt))
    return float(rng.uniform(0.2, 5.0)), tuple(rng.uniform(-0.5, 0.5, 2)), gravity


@pytest.mark.parametrize("block", range(4))
@pytest.mark.parametrize("kind", ["zero length", "with free length", "with initial tension"])
def test_straight_springs(kind, block):
    rng = np.random.default_rng([block, len(kind)])
    slack = pulling = 0
    for _ in range(12):
        mass, com, gravity = _random_load(rng)
        route = [Point("ground", tuple(rng.uniform(-0.3, 0.3, 2))), Point("arm", tuple(rng.uniform(-0.3, 0.3, 2)))]
        rate = float(rng.uniform(50.0, 2000.0))
        free = 0.0 if kind == "zero length" else float(rng.uniform(0.05, 0.3))
        tension = float(rng.uniform(1.0, 30.0)) if kind == "with initial tension" else 0.0
        spring = ExtensionSpring(rate, free_length=free, initial_tension=tension) if free else ZeroLengthSpring(rate)
        mech = _mechanism(mass, com, gravity, route, spring)
        length, arm, torque, weight = _sweep(_model(mass, com, gravity, route, rate, free), SWEEP)
        torque = torque - np.where(length > free, tension, 0.0) * arm  # MuJoCo knows no initial tension
        _close(mech.gravity_torque(SWEEP), weight)
        _close(mech.spring_states(SWEEP)[0].length, length)
        _close(mech.springs[0].path.gradient(mech.linkage, SWEEP)[0], arm)
        if np.any(torque):
            _close(mech.spring_torque(SWEEP), torque)
        else:
            assert not np.any(mech.spring_torque(SWEEP))
        slack += np.count_nonzero(length < free)
        pulling += np.count_nonzero(length > free)
    assert pulling > 100
    assert slack > 100 or kind == "zero length"


def _placed(item, q):
    c, s = np.cos(q), np.sin(q)
    x, y = item.at
    return (x * c - y * s, x * s + y * c) if item.body == "arm" else (x + 0 * q, y + 0 * q)


def _turned(wheel, q):
    return _placed(attrs.evolve(wheel, at=wheel.side), q)


def _situation(first, wheel, last, q):
    """Whether both rules mean the same cable; whether the straight run clears the disc, and on the other side.

    MuJoCo takes the way round on whose side the side site is. That is the way of the turn given
    here where the site lies within 60 deg of the normal of the straight run, with the foot of the
    wheel's centre between the ends; and neither end may lie inside the wheel.
    """
    ax, ay = _placed(first, q)
    bx, by = _placed(last, q)
    cx, cy = _placed(wheel, q)
    sx, sy = _placed(attrs.evolve(wheel, at=wheel.side), q)
    run = np.hypot(bx - ax, by - ay)
    ux, uy = (bx - ax) / run, (by - ay) / run
    sense = 1.0 if wheel.turn == "ccw" else -1.0
    outward = sense * (uy * sx - ux * sy)  # how far the side site points to the cable's side
    along = ux * (cx - ax) + uy * (cy - ay)
    outside = (np.hypot(ax - cx, ay - cy) > wheel.radius) & (np.hypot(bx - cx, by - cy) > wheel.radius)
    same = outside & (outward > 0.5) & (along > 0.0) & (along < run)
    aside = sense * (ux * (cy - ay) - uy * (cx - ax))
    return same, aside >= wheel.radius, aside <= -wheel.radius


def _random_wheel(rng, body, at, first, last):
    """A disc between two points, passed at ``q = 0`` about on the side of its side site."""
    turn = str(rng.choice(["cw", "ccw"]))
    along = math.atan2(last.at[1] - first.at[1], last.at[0] - first.at[0])
    outward = along + (math.pi / 2 if turn == "cw" else -math.pi / 2) + rng.uniform(-0.6, 0.6)
    return Wheel(body, at, float(rng.uniform(0.01, 0.06)), turn, (math.cos(outward), math.sin(outward)))


def _compare_cable(rng, sweep, route, triples):
    """Numbers of poses compared, of changes between wrapped and left, and of wraps by more than a quarter turn."""
    mass, com, gravity = _random_load(rng)
    rate, free = float(rng.uniform(50.0, 2000.0)), float(rng.uniform(0.0, 0.4))
    mech = _mechanism(mass, com, gravity, route, ExtensionSpring(rate, free_length=free))
    length, arm, torque, weight = _sweep(_model(mass, com, gravity, route, rate, free), sweep)
    same = np.full(sweep.shape, True)
    lifts = 0
    for first, wheel, last in triples:
        alike, clear, beyond = _situation(first, wheel, last, sweep)
        # Where the straight run clears the disc on the other side, MuJoCo sometimes lets go, by
        # a rule of its own: the cable is held here. Where it holds it too, both must agree.
        if len(triples) == 1:
            (ax, ay), (bx, by) = _placed(first, sweep), _placed(last, sweep)
            beyond = beyond & (np.abs(length - np.hypot(bx - ax, by - ay)) < 1e-12)
        alike = alike & ~beyond
        same &= alike
        lifts += np.count_nonzero(alike[1:] & alike[:-1] & (clear[1:] != clear[:-1]))
    _close(mech.gravity_torque(sweep), weight)
    _close(mech.spring_states(sweep)[0].length, length, same)
    _close(mech.springs[0].path.gradient(mech.linkage, sweep)[0], arm, same)
    _close(mech.spring_torque(sweep), torque, same)
    wraps = np.array(mech.springs[0].path.wraps(mech.linkage, sweep))
    return np.array([np.count_nonzero(same), lifts, np.count_nonzero(same & (wraps > math.pi / 2))])


@pytest.mark.parametrize("body", ["ground", "arm"])
def test_cables_over_one_disc(body):
    rng = np.random.default_rng(7)
    counts = np.zeros(3)
    for _ in range(60):
        first = Point("ground", tuple(rng.uniform(-0.4, -0.1, 2)))
        last = Point("arm", (float(rng.uniform(0.15, 0.4)), float(rng.uniform(-0.1, 0.1))))
        wheel = _random_wheel(rng, body, tuple(rng.uniform(-0.08, 0.08, 2)), first, last)
        counts += _compare_cable(rng, SWEEP, [first, wheel, last], [(first, wheel, last)])
    compared, lifts, deep = counts
    assert compared > 0.25 * 60 * len(SWEEP)
    assert lifts > 30
    assert deep > 100


@pytest.mark.parametrize("second", ["ground", "arm"])
def test_cables_over_two_discs_with_a_guide_between(second):
    rng = np.random.default_rng(11)
    sweep = SWEEP / 3.0
    counts = np.zeros(3)
    for _ in range(60):
        first = Point("arm", (float(rng.uniform(-0.3, -0.1)), float(rng.uniform(-0.1, 0.1))))
        guide = Point("ground", (float(rng.uniform(0.1, 0.25)), float(rng.uniform(-0.1, 0.1))))
        last = Point("arm", (float(rng.uniform(0.5, 0.7)), float(rng.uniform(-0.1, 0.1))))
        one = _random_wheel(rng, "ground", tuple(rng.uniform(-0.05, 0.05, 2)), first, guide)
        two = _random_wheel(rng, second, (float(rng.uniform(0.3, 0.4)), float(rng.uniform(-0.1, 0.1))), guide, last)
        triples = [(first, one, guide), (guide, two, last)]
        counts += _compare_cable(rng, sweep, [first, one, guide, two, last], triples)
    compared, lifts, _ = counts
    assert compared > 0.25 * 60 * len(SWEEP)
    assert lifts > 30

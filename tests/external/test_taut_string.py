"""Cables over two discs in direct succession against taut strings found in other ways.

Two referees, neither of which knows a tangent formula of the library:

* a shortest path over a graph of points on the rims, in all ways round the discs: which discs the
  string touches, and its length to the fineness of the graph;
* roots of the tangency conditions, polished from that path: the length to rounding.

The discs stand one behind the other, so that there is one taut string for each pair of senses.
"""

from __future__ import annotations

import math

import attrs
import numpy as np
import pytest
from scipy.optimize import root
from scipy.sparse import coo_array
from scipy.sparse.csgraph import dijkstra

from springpoise import Arm, Body, Cable, Disc, Point

ARM = Arm(Body(1.0, (0.1, 0.0)))
RIM = 90  # points on each rim


def _cable(ends, discs):
    first, last = (Point("ground", (z.real, z.imag)) for z in ends)
    rounds = [Disc(Point("ground", (c.real, c.imag)), radius=r, turn="ccw" if s > 0 else "cw") for c, r, s in discs]
    return Cable(first, *rounds, last)


def _sweep_angle(start, end, centre):
    return np.angle((end - centre) / (start - centre))


def _clears(start, end, centre, radius):
    """Whether the segment stays outside the disc; points on its rim count as outside."""
    along = end - start
    share = np.clip(np.real((centre - start) * along.conj()) / np.maximum(np.abs(along) ** 2, 1e-30), 0.0, 1.0)
    return np.abs(start + share * along - centre) >= radius * (1.0 - 1e-9)


def shortest_path(ends, discs):
    """Length of the shortest path that turns about each centre by 0 to one turn in its disc's sense.

    Nodes are the ends and points on the rims, each with the turns made so far about each centre.
    """
    points = [np.array([ends[0]])]
    rims = []
    for centre, radius, _ in discs:
        rims.append(centre + radius * np.exp(2j * math.pi * np.arange(RIM) / RIM))
        points.append(rims[-1])
    points = np.concatenate([*points, [ends[1]]])
    n = len(points)
    start, end = points[:, None], points[None, :]
    open_ = np.ones((n, n), bool)
    for centre, radius, _ in discs:
        open_ &= _clears(start, end, centre, radius)
    length = np.where(open_, np.abs(end - start), np.inf)
    for k, (_, radius, _) in enumerate(discs):  # arcs between neighbours on a rim
        at = 1 + k * RIM + np.arange(RIM)
        length[at, np.roll(at, 1)] = length[np.roll(at, 1), at] = radius * 2 * math.pi / RIM
    np.fill_diagonal(length, np.inf)
    # winding numbers change where the principal angle about a centre jumps
    levels = 3  # -1, 0, 1 turns beyond the principal angle, about each centre
    jumps = []
    for centre, _, _ in discs:
        angle = np.angle(points - centre)
        jumps.append(np.rint((_sweep_angle(start, end, centre) - (angle[None, :] - angle[:, None])) / (2 * math.pi)))
    i, j = np.nonzero(np.isfinite(length))
    rows, columns, weights = [], [], []
    for u in range(levels):
        for v in range(levels):
            nu, nv = u + jumps[0][i, j], v + jumps[1][i, j]
            fine = (nu >= 0) & (nu < levels) & (nv >= 0) & (nv < levels)
            rows.append((u * levels + v) * n + i[fine])
            columns.append(((nu * levels + nv) * n + j)[fine].astype(int))
            weights.append(length[i, j][fine])
    graph = coo_array(
        (np.concatenate(weights), (np.concatenate(rows), np.concatenate(columns))), shape=(levels**2 * n,) * 2
    ).tocsr()
    source = (levels + 1) * n  # no turns about either, at the first point
    distance, before = dijkstra(graph, indices=source, return_predecessors=True)
    wanted = 0
    for centre, _, sense in discs:
        # total turn about the centre: principal difference plus 2 pi times the level, in (0, 2 pi) of the sense
        raw = np.angle(ends[1] - centre) - np.angle(ends[0] - centre)
        level = next(k for k in (-1, 0, 1) if 0.0 < sense * (raw + 2 * math.pi * k) < 2 * math.pi)
        wanted = wanted * levels + level + 1
    target = wanted * n + n - 1
    path = [target]
    while path[-1] != source:
        path.append(before[path[-1]])
    return (
        distance[target],
        [points[node % n] for node in path[::-1]],
        [(node % n - 1) // RIM for node in path[::-1]][1:-1],
    )


def polished(ends, discs, touched, path, owners):
    """Length of the path that touches these discs, its contact angles found as roots of the tangency conditions."""

    def contacts(angles):
        return [
            (
                discs[k][0] + discs[k][1] * np.exp(1j * angles[2 * m]),
                discs[k][0] + discs[k][1] * np.exp(1j * angles[2 * m + 1]),
            )
            for m, k in enumerate(touched)
        ]

    def runs(angles):
        knots = [ends[0], *(z for pair in contacts(angles) for z in pair), ends[1]]
        return list(zip(knots[::2], knots[1::2], strict=True))

    def conditions(angles):
        legs, values = runs(angles), []
        for m in range(len(touched)):
            for angle, (a, b) in zip(angles[2 * m : 2 * m + 2], legs[m : m + 2], strict=True):
                values.append(np.real((b - a) * np.exp(-1j * angle)) / abs(b - a))
        return values

    if not touched:
        return abs(ends[1] - ends[0])
    guess = []
    for k in touched:
        mine = [z for z, owner in zip(path[1:-1], owners, strict=True) if owner == k]
        guess += [np.angle(mine[0] - discs[k][0]), np.angle(mine[-1] - discs[k][0])]
    found = root(conditions, guess, tol=1e-14)
    assert np.max(np.abs(conditions(found.x))) < 1e-12
    total = sum(abs(b - a) for a, b in runs(found.x))
    for m, k in enumerate(touched):
        arc = discs[k][2] * (found.x[2 * m + 1] - found.x[2 * m])
        total += discs[k][1] * ((arc + 0.1) % (2 * math.pi) - 0.1)
    return total


def _random(rng):
    """Two ends, and between them two discs side by side with any senses."""
    gap = rng.uniform(1.2, 2.2)
    discs = [
        (complex(x, rng.uniform(-0.6, 0.6)), float(rng.uniform(0.15, 0.5)), int(rng.choice([-1, 1])))
        for x in (-gap / 2, gap / 2)
    ]
    ends = [complex(*rng.uniform(-1.0, 1.0, 2)) + z for z in (-2.7, 2.7)]
    return ends, discs


def test_two_discs_against_shortest_paths():
    rng = np.random.default_rng(5)
    seen = set()
    exact = 0
    for _ in range(120):
        ends, discs = _random(rng)
        length, path, owners = shortest_path(ends, discs)
        cable = _cable(ends, discs)
        ours = cable.length(ARM, 0.0)
        # the graph's path is longer by some radius · (2 pi / RIM)², but for rounding never shorter
        assert -3e-3 <= ours - length <= 1e-9
        touched = tuple(k for k, wrap in enumerate(cable.wraps(ARM, 0.0)) if wrap > 0.0)
        seen.add((discs[0][2], discs[1][2], touched))
        if all(k in owners for k in touched):
            assert ours == pytest.approx(polished(ends, discs, touched, path, owners), abs=1e-12)
            exact += 1
    assert len(seen) == 16  # both senses of both discs: each, either, both or none touched
    assert exact > 100


def _swept(rng):
    """A cable from the ground over two discs to the end of an arm that sweeps about them."""
    discs = [
        Disc(
            Point(body, (x, float(rng.uniform(-0.1, 0.1)))),
            radius=float(rng.uniform(0.02, 0.08)),
            turn=str(rng.choice(["cw", "ccw"])),
        )
        for x, body in ((0.3, "ground"), (0.6, str(rng.choice(["ground", "arm"]))))
    ]
    return Cable(Point("ground", (0.1, float(rng.uniform(-0.1, 0.1)))), *discs, Point("arm", (1.0, 0.0)))


@pytest.mark.parametrize("seed", range(12))
def test_length_and_gradient_are_continuous(seed):
    cable = _swept(np.random.default_rng(seed))
    q = np.linspace(-0.25, 0.25, 20001)
    step = q[1] - q[0]
    length, gradient = cable.length(ARM, q), cable.gradient(ARM, q)[0]
    # no jump: the gradient changes by its slope times the step, which is below 20 m/rad² here
    assert np.max(np.abs(np.diff(gradient))) < 20.0 * step
    # the trapezoid rule misses by slope changes only, where a disc is left
    assert np.max(np.abs(np.diff(length) - step * (gradient[1:] + gradient[:-1]) / 2)) < 20.0 * step**2
    for wrap in cable.wraps(ARM, q):
        assert np.max(np.abs(np.diff(wrap))) < 50.0 * step
        assert np.min(wrap) >= 0.0


def test_lift_off_of_either_disc_is_covered():
    q = np.linspace(-0.25, 0.25, 2001)
    lifts = np.zeros(2)
    for seed in range(12):
        wraps = np.array(_swept(np.random.default_rng(seed)).wraps(ARM, q))
        lifts += np.count_nonzero(np.diff(wraps > 0.0, axis=1), axis=1)
    assert np.all(lifts >= 3)


@pytest.mark.parametrize("seed", range(12))
def test_gradient_is_the_derivative(seed):
    cable = _swept(np.random.default_rng(seed))
    h = 2e-3
    q = np.linspace(-0.25, 0.25, 101)
    reach = np.array([cable.wraps(ARM, q + k * h) for k in range(-4, 5)]) > 0.0
    steady = np.all(reach == reach[:1], axis=(0, 1))  # the formula is smooth where the same discs are touched
    weights = [1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280]
    slope = sum(w * cable.length(ARM, q + k * h) for k, w in zip(range(-4, 5), weights, strict=True)) / h
    assert np.count_nonzero(steady) > 60
    assert np.max(np.abs(slope - cable.gradient(ARM, q)[0])[steady]) < 1e-11


@pytest.mark.parametrize("turn", ["cw", "ccw"])
def test_end_inside_a_disc_is_no_cable(turn):
    disc = Disc(Point("ground", (0.0, 0.0)), radius=0.1, turn=turn)
    for end in ((0.05, 0.0), (-0.03, 0.04), (0.0, -0.09)):
        for along in (
            (Point("ground", (-1.0, 0.0)), Point("arm", end)),
            (Point("arm", end), Point("ground", (1.0, 0.3))),
        ):
            cable = Cable(along[0], disc, along[1])
            assert np.all(np.isnan(cable.length(ARM, np.linspace(-3.0, 3.0, 61))))
            assert math.isnan(cable.length(ARM, 0.3))
            assert math.isnan(cable.gradient(ARM, 0.3)[0])


def test_discs_that_overlap():
    # one of two senses cannot run between them; a cable that has left the one is none the worse
    one = Disc(Point("ground", (0.0, 0.0)), radius=0.1, turn="cw")
    two = Disc(Point("ground", (0.05, 0.0)), radius=0.1, turn="ccw")
    crossing = Cable(Point("ground", (-1.0, 0.0)), one, two, Point("arm", (1.0, 0.0)))
    assert math.isnan(crossing.length(ARM, 0.0))
    same = Cable(Point("ground", (-1.0, 0.0)), one, attrs.evolve(two, turn="cw"), Point("arm", (1.0, 0.0)))
    assert same.length(ARM, 0.0) > 2.0

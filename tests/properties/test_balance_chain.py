"""Random chains of up to six links: whatever balances them, the energy is the same at every pose."""

from __future__ import annotations

import cmath
import math

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import Body, Mechanism, Point
from springpoise.balance.chains.chain import ChainSpring, balance_chain
from springpoise.linkages import FourBar, Link, PlanarChain, SpatialChain, SpatialLink

EXAMPLES = 25
length = st.floats(0.1, 0.6)
mass = st.floats(0.2, 4.0)
off = st.floats(-0.08, 0.08)
along = st.floats(0.02, 0.4)
rate = st.floats(50.0, 2000.0)


def _holds(found, factor=1e-12):
    """Energy and torque by the mechanism itself, which knows nothing of the solver's equations."""
    found.require()
    mech = found.mechanism
    joints = mech.linkage.joint_count
    q = np.random.default_rng(11).uniform(-math.pi, math.pi, (300, joints) if joints > 1 else 300)
    springs = np.max(mech.spring_energy(q))
    assert np.ptp(mech.energy(q)) <= factor * springs
    assert np.max(np.abs(mech.holding_torque(q))) <= 4 * factor * springs
    for spring in found.springs:
        low, high = spring.length_bounds
        assert low - 1e-12 <= spring.shortest <= spring.longest <= high + 1e-12


@st.composite
def chains(draw, *, carried=False, least=2, most=6, straight=False):
    count = draw(st.integers(least, most))
    links = []
    for i in range(count):
        bodies = [
            Body(draw(mass), (draw(along), 0.0 if straight else draw(off))) for _ in range(draw(st.integers(1, 2)))
        ]
        frame = [Body(draw(mass), (draw(off), draw(off)))] if carried and draw(st.booleans()) else []
        links.append(
            Link(
                f"link {i + 1}",
                bodies,
                length=draw(length),
                skew=draw(st.floats(-1.0, 1.0)),
                carried=frame if carried and i < count - 1 else None,
            )
        )
    return PlanarChain(links)


@settings(max_examples=EXAMPLES)
@given(chains(carried=True, least=1), st.data())
def test_carried_frames(chain, data):
    frames = ["ground", *(link.carried_name for link in chain.links)]
    springs = []
    for frame, link in zip(frames, chain.links, strict=False):
        open_one = data.draw(st.sampled_from(["rate", "start", "end"]))
        side = data.draw(st.sampled_from([-1, 1]))  # an anchor below goes with an attachment behind the joint
        fixed = {"rate": data.draw(rate), "start": side * 0.1, "end": side * data.draw(along)}
        springs.append(ChainSpring(frame, link.name, **{k: v for k, v in fixed.items() if k != open_one}))
    _holds(found := balance_chain(chain, springs=springs))
    assert found.least_count == len(springs)
    for spring in found.springs:  # each anchor straight above or below its joint
        assert spring.first.at[0] == 0.0


@settings(max_examples=EXAMPLES)
@given(chains(), st.data())
def test_ground_springs_one_for_each_link(chain, data):
    *inner, last = [link.name for link in chain.links]
    springs = [ChainSpring("ground", last, rate=data.draw(rate), end=data.draw(along))]
    springs += [ChainSpring("ground", last, rate=data.draw(rate))]
    springs += [ChainSpring("ground", name, rate=data.draw(rate)) for name in inner[1:]]
    found = balance_chain(chain, "ground", springs=springs)
    assert len(found.springs) == len(chain.links) == found.least_count
    _holds(found)


def _direct(names, lengths, data):
    """For each link, springs to one place on it from the ground and from beyond the far joint of each link before."""
    springs = []
    for j, last in enumerate(names):
        end = data.draw(along)
        springs.append(ChainSpring("ground", last, rate=data.draw(rate), end=end))
        for p in range(j):
            springs.append(ChainSpring(names[p], last, start=lengths[p] * data.draw(st.floats(1.4, 2.0)), end=end))
    return springs


@settings(max_examples=EXAMPLES)
@given(chains(most=4), st.data())
def test_direct_springs_from_every_body_to_every_link(chain, data):
    springs = _direct([link.name for link in chain.links], [float(link.length) for link in chain.links], data)
    _holds(found := balance_chain(chain, "direct", springs=springs))
    assert all(spring.rate > 0 for spring in found.springs)


@settings(max_examples=EXAMPLES)
@given(chains(), st.floats(-3.0, 3.0), st.floats(1.0, 12.0), st.data())
def test_a_tilted_gravity_tilts_the_anchors(chain, angle, strength, data):
    *_, last = [link.name for link in chain.links]
    names = [link.name for link in chain.links][1:-1]
    springs = [ChainSpring("ground", last, rate=300.0, end=0.1), ChainSpring("ground", last, rate=data.draw(rate))]
    springs += [ChainSpring("ground", name, rate=data.draw(rate)) for name in names]
    level = balance_chain(chain, "ground", springs=springs, gravity=(0.0, -strength))
    pull = -1j * strength * cmath.exp(1j * angle)
    tilted = balance_chain(chain, "ground", springs=springs, gravity=(pull.real, pull.imag))
    _holds(tilted)
    for one, other in zip(level.springs, tilted.springs, strict=True):
        turned = complex(*one.first.at) * cmath.exp(1j * angle)
        assert abs(complex(*other.first.at) - turned) <= 1e-9 * max(1.0, abs(turned))
        assert np.allclose(one.last.at, other.last.at, rtol=1e-9)


@settings(max_examples=EXAMPLES)
@given(chains(), st.floats(0.2, 5.0), st.floats(0.2, 5.0))
def test_scaled_lengths_and_masses_scale_the_anchors(chain, a, b):
    # The anchors follow from rate · a · length = g · mass · length: heights grow with the mass alone.
    *_, last = [link.name for link in chain.links]
    names = [link.name for link in chain.links][1:-1]

    def solved(chain, a):
        springs = [ChainSpring("ground", last, rate=300, end=0.1 * a), ChainSpring("ground", last, rate=400)]
        springs += [ChainSpring("ground", name, rate=900) for name in names]
        return balance_chain(chain, "ground", springs=springs).springs

    scaled = PlanarChain(
        [
            Link(
                k.name,
                [Body(b * body.mass, (a * body.com[0], a * body.com[1])) for body in k.bodies],
                length=a * k.length,
            )
            for k in chain.links
        ]
    )
    for one, other in zip(solved(chain, 1.0), solved(scaled, a), strict=True):
        size = max(abs(complex(*s.first.at)) for s in solved(chain, 1.0))
        assert abs(complex(*other.first.at) - b * complex(*one.first.at)) <= 1e-9 * b * size


@settings(max_examples=EXAMPLES)
@given(st.lists(st.tuples(length, mass, along, st.tuples(*[st.floats(-3, 3)] * 3)), min_size=2, max_size=5), st.data())
def test_spherical_joints(links, data):
    line = np.array([0.36, 0.48, 0.8])  # a unit vector askew in every frame
    parts, at = [], (0.0, 0.0, 0.2)
    for i, (reach, kilograms, centre, (roll, pitch, yaw)) in enumerate(links):
        parts += [
            SpatialLink(f"{i} first", origin=at, roll_pitch_yaw=(roll, pitch, yaw)),
            SpatialLink(f"{i} second", axis=(0, 1, 0.2)),
            SpatialLink(f"{i}", Body(kilograms, tuple(centre * line)), axis=(1, 0.3, 0)),
        ]
        at = tuple(reach * line)
    chain = SpatialChain(parts)
    names = [f"{i}" for i in range(len(links))]
    _holds(balance_chain(chain, "direct", springs=_direct(names, [k[0] for k in links], data)))


@settings(max_examples=EXAMPLES)
@given(chains(most=2, carried=True), st.floats(-0.5, 0.5), st.floats(0.3, 0.6))
def test_a_link_that_hangs_on_a_carried_frame(chain, x, y):
    # A third link on a plate that stays parallel to the ground, off the joint.
    first = chain.links[0]
    third = Link("third", Body(1.0, (0.2, 0.05)), pivot=Point(first.carried_name, (x, y)))
    tree = PlanarChain([*chain.links, third])
    springs = [
        ChainSpring("ground", first.name, start=0.1, end=0.1),
        ChainSpring(first.carried_name, chain.links[1].name, start=0.1, end=0.1),
        ChainSpring(first.carried_name, "third", start=0.12, end=0.09),
    ]
    found = balance_chain(tree, springs=springs)
    assert np.allclose(found.springs[2].first.at, (x, y + 0.12))
    _holds(found)


@settings(max_examples=EXAMPLES)
@given(st.tuples(mass, mass, mass), st.tuples(*[off] * 6), st.floats(0.1, 0.3), st.sampled_from([1, -1]))
def test_four_bars(masses, offsets, crank, branch):
    names, lengths = ("crank", "coupler", "rocker"), (crank, 0.5, 0.45)
    links = [
        Link(name, Body(m, (0.1 + dx, dy)), length=size)
        for name, m, dx, dy, size in zip(names, masses, offsets[:3], offsets[3:], lengths, strict=True)
    ]
    four = FourBar(crank=links[0], coupler=links[1], rocker=links[2], second_pivot=(0.5, 0.05), branch=branch)
    ((low, high),) = four.closable()
    mech = Mechanism(four, travel=(low + 0.01, high - 0.01))
    springs = [
        ChainSpring("ground", "crank", start=0.1, end=0.1),
        ChainSpring("ground", "rocker", rate=500, start=-0.1),
    ]
    found = balance_chain(mech, springs=springs).require()
    q = np.linspace(low + 0.01, high - 0.01, 301)
    assert np.ptp(found.mechanism.energy(q)) <= 1e-12 * max(1.0, np.max(found.mechanism.spring_energy(q)))


def test_fewer_springs_than_links_cannot_do():
    # The columns s_j, weighted by the roots of the rates, are at right angles to one another and none is zero: there
    # are no more of them than springs. So any search over two springs on three links must leave something over.
    rng = np.random.default_rng(1)
    least = math.inf
    for _ in range(2000):
        columns = rng.normal(size=(2, 3)) + 1j * rng.normal(size=(2, 3))
        gram = columns.conj().T @ columns
        sizes = np.sqrt(np.diag(gram).real)
        least = min(least, np.max(np.abs(gram - np.diag(np.diag(gram))) / np.outer(sizes, sizes)))
    assert least > 0.49  # three lines in a plane: the best are at 60 degrees, cosine 1/2

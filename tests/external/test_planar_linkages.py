"""Planar linkages against two referees that know nothing of the library's frames.

Open chains: MuJoCo builds the same bodies, joints and tendons; gravity from its bias forces at rest,
springs from its tendons. Joints that follow others, and frames carried parallel to the ground, are
joints of their own there; their torques are mapped by virtual work. Tolerance 1e-9 of the greatest
torque of a chain: both sides compute in double precision.

Loops: MuJoCo closes them with soft constraints only, which leave some 1e-4. So the pose is found here
by Newton's method on the loop equations in complex numbers, and the torque is the slope of the energy
at such poses, by differences of order eight. Their rounding is about 1e-15 J / 2e-3 rad, their
truncation the smaller the farther from dead points; poses within 17 deg of one are left out. That allows
1e-9 of the greatest torque, for cables too.
"""

from __future__ import annotations

import math

import attrs
import mujoco
import numpy as np
import pytest

from springpoise import Body, Cable, Disc, ExtensionSpring, Mechanism, Point, SpringMount, Straight
from springpoise.linkages import Coupling, Dyad, FiveBar, FourBar, Link, PlanarChain, PlanarLinkage, SliderDyad

CLOSE = 1e-9
GRAVITY = 9.80665


def _pair(rng, size=0.3):
    return tuple(float(v) for v in rng.uniform(-size, size, 2))


def _bodies(rng):
    return [Body(float(rng.uniform(0.1, 3.0)), _pair(rng)) for _ in range(rng.integers(0, 3))]


def _spring(rng):
    return ExtensionSpring(float(rng.uniform(100.0, 1500.0)), free_length=float(rng.uniform(0.0, 0.3)))


# -------------------------------------------------------------------------------------------
# open chains, MuJoCo


def _numbers(*values):
    return " ".join(repr(float(value)) for value in values)


def _random_chain(rng):
    """Up to five links with any mix of joints, skews, carried frames, couplings and pivots."""
    links = []
    for i in range(rng.integers(1, 6)):
        earlier = [link.name for link in links if link.follows is None]
        follows = None
        if earlier and rng.random() < 0.25:
            names = rng.permutation(earlier)[: rng.integers(1, 3)]
            follows = Coupling(
                {str(n): float(rng.uniform(-1.5, 1.5)) for n in names}, offset=float(rng.uniform(-0.3, 0.3))
            )
        pivot = None
        if links and rng.random() < 0.25:
            base = str(rng.choice(["ground", *(link.name for link in links)]))
            carried = [link.carried_name for link in links if link.name == base and link.carried is not None]
            pivot = Point(str(rng.choice([base, *carried])), _pair(rng))
        links.append(
            Link(
                f"link{i}",
                _bodies(rng),
                length=float(rng.uniform(0.1, 0.5)),
                joint=str(rng.choice(["revolute", "revolute", "prismatic"])),
                skew=float(rng.choice([0.0, rng.uniform(-1.0, 1.0)])),
                carried=_bodies(rng) if rng.random() < 0.4 else None,
                pivot=pivot,
                follows=follows,
            )
        )
    return PlanarChain(links)


@attrs.frozen
class Joints:
    """All joints of the MuJoCo model as offset + matrix · q, in its order."""

    names: list[str]
    matrix: np.ndarray
    offset: np.ndarray


def _joints(chain):
    driven = list(chain.joint_names)
    names, rows, offsets = [], [], []
    turn = {"ground": (np.zeros(len(driven)), 0.0)}  # absolute angle of a body, the same way
    before = "ground"
    for link in chain.chain:
        base = before if link.pivot is None else link.pivot.body
        row, offset = np.zeros(len(driven)), 0.0
        if link.follows is None:
            row[driven.index(link.name)] = 1.0
        else:
            offset = link.follows.offset
            for name, ratio in link.follows.ratios:
                row[driven.index(name)] += ratio
        names.append(link.name)
        rows.append(row)
        offsets.append(offset)
        turning = link.joint == "revolute"
        turn[link.name] = (turn[base][0] + turning * row, turn[base][1] + turning * offset + link.skew)
        if link.carried is not None:
            names.append(link.carried_name)
            rows.append(-turn[link.name][0])
            offsets.append(-turn[link.name][1])
            turn[link.carried_name] = (np.zeros(len(driven)), 0.0)
        before = link.name
    return Joints(names, np.array(rows), np.array(offsets))


def _model(chain, routes, springs, gravity):
    """The chain as MuJoCo bodies; ``routes`` are tendons along points and wheels."""
    inside = {name: "" for name in chain.frames}
    tendons = ""
    for number, (route, spring) in enumerate(zip(routes, springs, strict=True)):
        along = ""
        for index, item in enumerate(route):
            if not isinstance(item, Point | Disc):
                continue  # the side of the disc before it
            label = f"{number}.{index}"
            point = item.centre if isinstance(item, Disc) else item
            inside[point.body] += f'<site name="p{label}" pos="{_numbers(*point.at, 0)}"/>'
            if isinstance(item, Disc):
                side = route[index + 1]  # the side site, found for the pose
                inside[point.body] += (
                    f'<geom name="w{label}" type="cylinder" size="{_numbers(item.radius, 0.1)}" '
                    f'pos="{_numbers(*point.at, 0)}" contype="0" conaffinity="0" mass="0"/>'
                    f'<site name="s{label}" pos="{_numbers(*side, 0)}"/>'
                )
                along += f'<geom geom="w{label}" sidesite="s{label}"/>'
            else:
                along += f'<site site="p{label}"/>'
        tendons += (
            f'<spatial stiffness="{spring.rate!r}" springlength="{_numbers(0, spring.free_length)}">{along}</spatial>'
        )
    nested = {name: [] for name in chain.frames}
    before = "ground"
    text = {}
    for link in chain.chain:
        base, at = (before, None) if link.pivot is None else (link.pivot.body, link.pivot.at)
        if at is None:
            at = (next(k.length for k in chain.chain if k.name == base), 0.0) if base != "ground" else (0.0, 0.0)
        nested[base].append(link.name)
        kind = 'type="hinge" axis="0 0 1"' if link.joint == "revolute" else 'type="slide" axis="1 0 0"'
        text[link.name] = (link.name, at, link.skew, kind, link.bodies)
        if link.carried is not None:
            nested[link.name].append(link.carried_name)
            text[link.carried_name] = (
                link.carried_name,
                (link.length, 0.0),
                0.0,
                'type="hinge" axis="0 0 1"',
                link.carried,
            )
        before = link.name

    def body(name):
        label, at, skew, kind, heavy = text[name]
        mass = sum(b.mass for b in heavy)
        com = [sum(b.mass * b.com[i] for b in heavy) / mass for i in (0, 1)] if mass else (0.0, 0.0)
        inner = "".join(map(body, nested[name]))
        # MuJoCo wants some mass everywhere; 1e-12 kg weigh 1e-13 of the peak torque at most.
        return (
            f'<body name="{label}" pos="{_numbers(*at, 0)}" euler="{_numbers(0, 0, skew)}">'
            f'<joint name="{label}" {kind}/><inertial pos="{_numbers(*com, 0)}" mass="{max(mass, 1e-12)!r}" '
            f'diaginertia="0.01 0.01 0.01"/>{inside[name]}{inner}</body>'
        )

    return mujoco.MjModel.from_xml_string(
        f"""<mujoco><compiler angle="radian" inertiafromgeom="false"/><option gravity="{_numbers(*gravity, 0)}"/>
        <worldbody>{inside["ground"]}{"".join(map(body, nested["ground"]))}</worldbody>
        <tendon>{tendons}</tendon></mujoco>"""
    )


def _rows(model, data):
    """Where the numbers of a sparse tendon Jacobian stand; in one place or the other by version."""
    owner = data if hasattr(data, "ten_J_rownnz") else model
    return owner.ten_J_rownnz, owner.ten_J_rowadr, owner.ten_J_colind


def _measured(chain, routes, springs, gravity, q):
    """Gravity torques, spring torques, tendon lengths and their gradients by q, by MuJoCo."""
    joints = _joints(chain)
    model = _model(chain, routes, springs, gravity)
    data = mujoco.MjData(model)
    place = [model.joint(name).qposadr[0] for name in joints.names]
    data.qpos[place] = joints.offset + joints.matrix @ q
    mujoco.mj_forward(model, data)
    order = [model.joint(name).dofadr[0] for name in joints.names]
    tendons = np.zeros((model.ntendon, model.nv))  # the rows are sparse
    mujoco.mju_sparse2dense(tendons, data.ten_J, *_rows(model, data))
    tendons = tendons[:, order]
    return (
        -data.qfrc_bias[order] @ joints.matrix,
        data.qfrc_passive[order] @ joints.matrix,
        data.ten_length.copy(),
        tendons @ joints.matrix,
    )


def _random_poses(rng, chain, count):
    return rng.uniform(-2.5, 2.5, (count, chain.joint_count))


def _posed(chain, q):
    return q if chain.joint_count > 1 else float(q[0])


@pytest.mark.parametrize("seed", range(60))
def test_chains_with_straight_springs(seed):
    rng = np.random.default_rng([1, seed])
    chain = _random_chain(rng)
    gravity = (float(rng.uniform(-3, 3)), float(rng.uniform(-11, -8)))
    routes, springs = [], []
    for _ in range(3):
        one, other = (str(name) for name in rng.permutation(chain.frames)[:2])
        routes.append((Point(one, _pair(rng)), Point(other, _pair(rng))))
        springs.append(_spring(rng))
    mech = Mechanism(
        chain,
        springs=[SpringMount(s, Straight(*r)) for s, r in zip(springs, routes, strict=True)],
        gravity=gravity,
    )
    rows = [
        (
            _measured(chain, routes, springs, gravity, q),
            mech.gravity_torque(_posed(chain, q)),
            mech.spring_torque(_posed(chain, q)),
            [state.length for state in mech.spring_states(_posed(chain, q))],
            [np.array(mount.path.gradient(chain, _posed(chain, q))) for mount in mech.springs],
        )
        for q in _random_poses(rng, chain, 6)
    ]
    for index in range(4):
        theirs = np.array([row[0][index] for row in rows])
        ours = np.array([row[1 + index] for row in rows]).reshape(theirs.shape)
        assert np.max(np.abs(ours - theirs)) <= CLOSE * max(np.max(np.abs(theirs)), 1e-6)


def _world(chain, point, q):
    """Ground coordinates of a point by MuJoCo, as a complex number."""
    route = [(point, Point("ground", (9.0, 9.0)))]
    joints = _joints(chain)
    model = _model(chain, route, [ExtensionSpring(1.0, free_length=0.0)], (0.0, -1.0))
    data = mujoco.MjData(model)
    data.qpos[[model.joint(name).qposadr[0] for name in joints.names]] = joints.offset + joints.matrix @ q
    mujoco.mj_kinematics(model, data)
    x, y, _ = data.site("p0.0").xpos
    body = data.body(point.body) if point.body != "ground" else None
    frame = np.eye(3) if body is None else body.xmat.reshape(3, 3)
    return complex(x, y), complex(frame[0, 0], frame[1, 0])


@pytest.mark.parametrize("seed", range(40))
def test_chains_with_cables_over_a_disc(seed):
    """The disc is put beside the straight run on the side on which the cable passes, so that both rules agree."""
    rng = np.random.default_rng([2, seed])
    chain = _random_chain(rng)
    gravity = (0.0, -GRAVITY)
    q = _random_poses(rng, chain, 1)[0]
    names = [str(name) for name in rng.choice(chain.frames, 3)]
    if names[0] == names[2]:
        names[2] = next(name for name in chain.frames if name != names[0])
    first, last = Point(names[0], _pair(rng, 0.4)), Point(names[2], _pair(rng, 0.4))
    a, _ = _world(chain, first, q)
    b, _ = _world(chain, last, q)
    while abs(b - a) < 0.2:
        last = Point(names[2], _pair(rng, 2.0))
        b, _ = _world(chain, last, q)
    turn = str(rng.choice(["cw", "ccw"]))
    sense = 1.0 if turn == "ccw" else -1.0
    radius = float(rng.uniform(0.01, 0.05))
    along = (b - a) / abs(b - a)
    # centre to the left of the way for ccw; within the radius of the run, so that it touches
    middle = a + (b - a) * rng.uniform(0.35, 0.65) + sense * 1j * along * radius * rng.uniform(-0.5, 0.9)
    origin, axis = _world(chain, Point(names[1], (0.0, 0.0)), q)
    local = (middle - origin) / axis
    outward = -sense * 1j * along / axis
    disc = Disc(Point(names[1], (local.real, local.imag)), radius=radius, turn=turn)
    side = (local + 3.0 * radius * outward).real, (local + 3.0 * radius * outward).imag
    spring = _spring(rng)
    path = Cable(first, disc, last)
    mech = Mechanism(chain, springs=SpringMount(spring, path), gravity=gravity)
    weight, torque, length, gradient = _measured(chain, [(first, disc, side, last)], [spring], gravity, q)
    assert path.wraps(chain, _posed(chain, q))[0] > 0.0
    assert mech.spring_states(_posed(chain, q))[0].length == pytest.approx(length[0], rel=CLOSE)
    ours = np.atleast_1d(path.gradient(chain, _posed(chain, q)))
    assert np.max(np.abs(ours - gradient[0])) <= CLOSE * max(np.max(np.abs(gradient)), 1e-6)
    ours = np.atleast_1d(mech.spring_torque(_posed(chain, q)))
    assert np.max(np.abs(ours - torque)) <= CLOSE * max(np.max(np.abs(torque)), 1e-6)
    ours = np.atleast_1d(mech.gravity_torque(_posed(chain, q)))
    assert np.max(np.abs(ours - weight)) <= CLOSE * max(np.max(np.abs(weight)), 1e-6)


# -------------------------------------------------------------------------------------------
# loops, by Newton's method on complex numbers


class Closed:
    """Bodies of a linkage as (origin, direction) in complex numbers, loops closed by Newton's method.

    ``near`` gives the angle from which each loop's body is sought; the loop equations do the rest.
    """

    def __init__(self, parts, q, near):
        self.bodies = {"ground": (0j, 1.0 + 0j)}
        angles = iter(q)
        end = 0j
        for part in parts:
            if isinstance(part, Link):
                base = self.bodies["ground"] if part.pivot is None else self.bodies[part.pivot.body]
                at = end if part.pivot is None else base[0] + complex(*part.pivot.at) * base[1]
                assert part.pivot is not None or not self.bodies.keys() - {"ground"}
                travel = next(angles)
                turned = base[1] * np.exp(1j * (part.skew + (travel if part.joint == "revolute" else 0.0)))
                self.bodies[part.name] = (at + (travel * turned if part.joint == "prismatic" else 0.0), turned)
            elif isinstance(part, Dyad):
                self._dyad(part, near)
            else:
                self._slider(part, near)
            for link in (part,) if isinstance(part, Link) else part.links:
                if link.carried is not None:
                    self.bodies[link.carried_name] = (self.at(Point(link.name, (link.length, 0.0))), 1.0 + 0j)

    def at(self, point):
        origin, direction = self.bodies[point.body]
        return origin + complex(*point.at) * direction

    def _dyad(self, part, near):
        start, end = map(self.at, part.between)
        unknown = np.array([near[part.first.name], near[part.last.name]])
        for _ in range(12):
            first, last = part.first.length * np.exp(1j * unknown[0]), part.last.length * np.exp(1j * unknown[1])
            gap = start + first - end - last
            slopes = np.array([[(1j * first).real, (-1j * last).real], [(1j * first).imag, (-1j * last).imag]])
            unknown = unknown - np.linalg.solve(slopes, [gap.real, gap.imag])
        assert abs(gap) < 1e-14
        self.bodies[part.first.name] = (start, np.exp(1j * unknown[0]))
        self.bodies[part.last.name] = (end, np.exp(1j * unknown[1]))

    def _slider(self, part, near):
        start, guide = self.at(part.start), self.at(part.guide)
        line = self.bodies[part.guide.body][1] * np.exp(1j * part.direction)
        unknown = np.array([near[part.first.name], near[part.last.name]])  # the coupler's angle, the way along the line
        for _ in range(12):
            coupler = part.first.length * np.exp(1j * unknown[0])
            gap = start + coupler - guide - unknown[1] * line
            slopes = np.array([[(1j * coupler).real, -line.real], [(1j * coupler).imag, -line.imag]])
            unknown = unknown - np.linalg.solve(slopes, [gap.real, gap.imag])
        assert abs(gap) < 1e-14
        self.bodies[part.first.name] = (start, np.exp(1j * unknown[0]))
        self.bodies[part.last.name] = (guide + unknown[1] * line, line)


def _cable_length(a, disc, centre, b):
    """Round one disc: tangents and the arc between their contacts, by angles; and the arc's angle."""
    sense = 1.0 if disc.turn == "ccw" else -1.0
    r = disc.radius
    start = np.angle(a - centre) + sense * math.acos(r / abs(a - centre))
    end = np.angle(b - centre) - sense * math.acos(r / abs(b - centre))
    wrap = (sense * (end - start)) % (2 * math.pi)
    runs = math.sqrt(abs(a - centre) ** 2 - r * r) + math.sqrt(abs(b - centre) ** 2 - r * r)
    return runs + r * wrap, wrap


def _energy(mech, closed):
    """Energy at a pose, and whether every cable lies on its disc beyond doubt."""
    total, sure = 0.0, True
    linkage = mech.linkage
    for link in linkage.links:
        for body in link.bodies:
            total += GRAVITY * body.mass * closed.at(Point(link.name, body.com)).imag
        for body in link.carried or ():
            total += GRAVITY * body.mass * closed.at(Point(link.carried_name, body.com)).imag
    for mount in mech.springs:
        path = mount.path
        if isinstance(path, Straight):
            length = abs(closed.at(path.first) - closed.at(path.last))
            sure = sure and length > 0.08  # shorter ones have higher derivatives beyond the differences used here
        else:
            first, disc, last = path.along
            a, c, b = closed.at(first), closed.at(disc.centre), closed.at(last)
            if min(abs(a - c), abs(b - c)) < disc.radius + 0.05:
                return math.nan, False
            length, wrap = _cable_length(a, disc, c, b)
            sure = sure and 0.1 < wrap < 3.0
        stretch = length - mount.spring.free_length
        sure = sure and abs(stretch) > 0.02
        total += 0.5 * mount.spring.rate * max(stretch, 0.0) ** 2
    return total, sure


def _near(linkage, q):
    """The library's own angles, put off by 0.05, to start from: on its branch, if it is on one."""
    start = {}
    for part in linkage.members:
        if isinstance(part, Link):
            continue
        for link in part.links:
            (x0, y0), (x1, y1) = (linkage.position(Point(link.name, at), q) for at in ((0.0, 0.0), (1.0, 0.0)))
            start[link.name] = math.atan2(y1 - y0, x1 - x0) + 0.05
        if isinstance(part, SliderDyad):
            (x0, y0), (x1, y1) = (linkage.position(point, q) for point in (part.guide, Point(part.last.name, (0, 0))))
            ux, uy = linkage.position(Point(part.last.name, (1.0, 0.0)), q)
            start[part.last.name] = (x1 - x0) * (ux - x1) + (y1 - y0) * (uy - y1) + 0.02
    return start


def _mounts(rng, linkage):
    mounts = []
    for number in range(3):
        names = [str(name) for name in rng.permutation(linkage.frames)[:3]]
        first, last = Point(names[0], _pair(rng)), Point(names[1], _pair(rng))
        disc = Disc(
            Point(names[2], _pair(rng, 0.15)),
            radius=float(rng.uniform(0.01, 0.04)),
            turn=str(rng.choice(["cw", "ccw"])),
        )
        mounts.append(SpringMount(_spring(rng), Straight(first, last) if number < 2 else Cable(first, disc, last)))
    return mounts


def _compare(linkage, rng, poses):
    """Number of poses at which energy and torque of the linkage are those of the referee."""
    mech = Mechanism(attrs.evolve(linkage, unreachable="nan"), springs=_mounts(rng, linkage))
    h = 2e-3
    weights = dict(
        zip(range(-4, 5), (1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280), strict=True)
    )
    ours, theirs, compared = [], [], 0
    for q in poses:
        pose = q if len(q) > 1 else float(q[0])
        if not linkage.missing(pose) < -1e-3 or not linkage.dead_point_margin(pose) > 0.3:
            continue
        near = _near(linkage, pose)
        energy, sure = _energy(mech, Closed(linkage.members, q, near))
        slopes = []
        for joint in range(len(q)):
            slope = 0.0
            for k, weight in weights.items():
                moved = np.array(q, dtype=float)
                moved[joint] += k * h
                shifted, still_sure = _energy(mech, Closed(linkage.members, moved, near))
                sure = sure and still_sure
                slope += weight * shifted / h
            slopes.append(slope)
        if not sure:
            continue
        compared += 1
        assert mech.energy(pose) == pytest.approx(energy, rel=1e-11, abs=1e-11)
        ours.append(np.atleast_1d(mech.holding_torque(pose)))
        theirs.append(slopes)
    if compared:
        peak = np.max(np.abs(theirs))
        assert np.max(np.abs(np.array(ours) - np.array(theirs))) <= CLOSE * max(peak, 1.0)
    return compared


def _link(rng, name, low=0.15, high=0.5, *, carried=False):
    return Link(
        name,
        _bodies(rng),
        length=float(rng.uniform(low, high)),
        carried=_bodies(rng) if carried and rng.random() < 0.5 else None,
    )


def _four_bar(rng):
    return FourBar(
        crank=attrs.evolve(_link(rng, "crank", 0.1, 0.25), skew=float(rng.uniform(-1, 1))),
        coupler=_link(rng, "coupler", 0.3, 0.5, carried=True),
        rocker=_link(rng, "rocker", 0.25, 0.5),
        second_pivot=(float(rng.uniform(0.25, 0.5)), float(rng.uniform(-0.2, 0.2))),
        branch=int(rng.choice([-1, 1])),
    )


def _five_bar(rng):
    return FiveBar(
        first_crank=_link(rng, "one", carried=True),
        second_crank=_link(rng, "two"),
        first_coupler=_link(rng, "three", 0.3, 0.6),
        second_coupler=_link(rng, "four", 0.3, 0.6, carried=True),
        second_pivot=_pair(rng),
        branch=int(rng.choice([-1, 1])),
    )


def _slider_crank(rng):
    crank = attrs.evolve(_link(rng, "crank", 0.1, 0.2), pivot=Point("ground", _pair(rng, 0.1)))
    return PlanarLinkage([
        crank,
        SliderDyad(
            first=_link(rng, "coupler", 0.4, 0.6, carried=True),
            last=Link("slider", _bodies(rng)),
            start=Point("crank", (crank.length, 0.0)),
            guide=Point("ground", _pair(rng, 0.1)),
            direction=float(rng.uniform(-3, 3)),
            branch=int(rng.choice([-1, 1])),
        ),
    ])  # fmt: skip


def _nested(rng):
    """Two driven joints, a dyad between them, and on it a second dyad or a slider that runs on the first."""
    crank = attrs.evolve(_link(rng, "crank", 0.1, 0.2), pivot=Point("ground", (0.0, 0.0)))
    ram = Link(
        "ram",
        _bodies(rng),
        joint=str(rng.choice(["revolute", "prismatic"])),
        skew=1.0,
        pivot=Point("ground", (0.4, -0.1)),
    )
    first = Dyad(
        first=_link(rng, "a", 0.3, 0.5),
        last=_link(rng, "b", 0.3, 0.5, carried=True),
        between=(Point("crank", (crank.length, 0.02)), Point("ram", _pair(rng, 0.1))),
        branch=int(rng.choice([-1, 1])),
    )
    on_first = Point("a", (float(rng.uniform(0.1, 0.3)), 0.05))
    if rng.random() < 0.5:
        second = Dyad(
            first=_link(rng, "c", 0.3, 0.5),
            last=_link(rng, "d", 0.3, 0.5),
            between=(on_first, Point(str(rng.choice(["ground", "crank", "b"])), _pair(rng))),
            branch=int(rng.choice([-1, 1])),
        )
    else:
        second = SliderDyad(
            first=_link(rng, "c", 0.4, 0.6),
            last=Link("d", _bodies(rng)),
            start=on_first,
            guide=Point(str(rng.choice(["ground", "b"])), _pair(rng, 0.1)),
            direction=float(rng.uniform(-3, 3)),
            branch=int(rng.choice([-1, 1])),
        )
    return PlanarLinkage([crank, ram, first, second])


@pytest.mark.parametrize(
    ("make", "joints", "least"), [(_four_bar, 1, 60), (_five_bar, 2, 40), (_slider_crank, 1, 60), (_nested, 2, 30)]
)
def test_loops(make, joints, least):
    compared = cases = 0
    for seed in range(40):
        rng = np.random.default_rng([joints, seed])
        linkage = make(rng)
        poses = rng.uniform(-3.0, 3.0, (12, joints))
        if make is _nested and linkage.joint_units[1] == "m":
            poses[:, 1] *= 0.05
        found = _compare(linkage, rng, poses)
        compared += found
        cases += found > 0
    assert compared >= least
    assert cases >= 15

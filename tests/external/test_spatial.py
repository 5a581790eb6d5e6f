"""Chains in space against general engines: MuJoCo tendons and weights, pinocchio's rotations.

Tolerance 1e-9 of the peak with MuJoCo, which keeps unit quaternions in double precision and sums
in an order of its own.
"""

from __future__ import annotations

import math

import mujoco
import numpy as np
import pinocchio
import pytest

from springpoise import (
    Body,
    ExtensionSpring,
    Mechanism,
    Point,
    SpatialChain,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.gravity import seen_from_base_in_space
from springpoise.linkages import SpatialLink

CLOSE = 1e-9
CASES, POSES = 48, 12


def _text(values):
    return " ".join(repr(float(v)) for v in values)


def _random_chain(rng):
    """A tree of 2 to 7 links, most of them turning, one in four sliding, some fixed, axes of any direction."""
    links = []
    for i in range(int(rng.integers(2, 8))):
        axis = rng.normal(size=3) if rng.integers(2) else rng.choice([-1.0, 1.0]) * np.eye(3)[rng.integers(3)]
        turn = rng.uniform(-3, 3, 3) if rng.integers(2) else np.zeros(3)
        links.append(
            SpatialLink(
                f"k{i}",
                Body(float(rng.uniform(0.1, 4.0)), tuple(rng.uniform(-0.3, 0.3, 3))),
                parent=str(rng.choice(["ground", *(k.name for k in links)])) if i else "ground",
                origin=tuple(rng.uniform(-0.4, 0.4, 3)),
                roll_pitch_yaw=tuple(turn),
                axis=tuple(axis),
                joint=str(rng.choice(["revolute", "revolute", "prismatic", "fixed"])) if i else "revolute",
            )
        )
    return SpatialChain(links)


def _xml(chain, mounts, gravity):
    """The same tree as MuJoCo bodies, and every spring as a tendon."""
    sites = {name: "" for name in chain.frames}
    tendons = ""
    for index, mount in enumerate(mounts):
        path, spring = mount.path, mount.spring
        for end, point in (("a", path.first), ("b", path.last)):
            sites[point.body] += f'<site name="{end}{index}" pos="{_text(point.at)}"/>'
        free = getattr(spring, "free_length", 0.0)
        tendons += (
            f'<spatial stiffness="{spring.rate!r}" springlength="{_text((0.0, free))}">'
            f'<site site="a{index}"/><site site="b{index}"/></spatial>'
        )
    children = {name: [] for name in chain.frames}
    for link in chain.links:
        children[link.parent].append(link)

    def body(link):
        kind = {"revolute": "hinge", "prismatic": "slide"}.get(link.joint)
        joint = f'<joint name="{link.name}" type="{kind}" axis="{_text(link.axis)}"/>' if kind else ""
        (weight,) = link.bodies
        return (
            f'<body pos="{_text(link.origin)}" quat="{_text(_quaternion(link.roll_pitch_yaw))}">{joint}'
            f'<inertial pos="{_text(weight.com)}" mass="{weight.mass!r}" diaginertia="0.1 0.1 0.1"/>'
            f"{sites[link.name]}{''.join(map(body, children[link.name]))}</body>"
        )

    return (
        f'<mujoco><compiler angle="radian"/><option gravity="{_text(gravity)}"/><worldbody>{sites["ground"]}'
        f"{''.join(map(body, children['ground']))}</worldbody><tendon>{tendons}</tendon></mujoco>"
    )


def _quaternion(roll_pitch_yaw):
    """By half angles, yaw times pitch times roll."""
    total = np.array([1.0, 0.0, 0.0, 0.0])
    for axis, angle in zip((2, 1, 0), roll_pitch_yaw[::-1], strict=True):
        half = np.zeros(4)
        half[0], half[1 + axis] = math.cos(angle / 2), math.sin(angle / 2)
        product = np.zeros(4)
        mujoco.mju_mulQuat(product, total, half)
        total = product
    return total


@pytest.mark.parametrize("block", range(4))
def test_springs_and_weights_on_random_chains(block):
    compared = slack = 0
    for case in range(CASES // 4):
        rng = np.random.default_rng([block, case])
        chain = _random_chain(rng)
        gravity = tuple(rng.uniform(-10.0, 10.0, 3))
        mounts = []
        for _ in range(int(rng.integers(1, 4))):
            first, last = rng.choice(chain.frames, 2, replace=False)
            ends = (
                Point(str(first), tuple(rng.uniform(-0.3, 0.3, 3))),
                Point(str(last), tuple(rng.uniform(-0.3, 0.3, 3))),
            )
            rate, free = float(rng.uniform(50.0, 2000.0)), float(rng.uniform(0.1, 0.8))
            spring = ZeroLengthSpring(rate) if rng.integers(2) else ExtensionSpring(rate, free_length=free)
            mounts.append(SpringMount(spring, Straight(*ends)))
        model = mujoco.MjModel.from_xml_string(_xml(chain, mounts, gravity))
        data = mujoco.MjData(model)
        mech = Mechanism(chain, springs=mounts, gravity=gravity)
        ours, theirs = [], []
        for pose in rng.uniform(-2.0, 2.0, (POSES, chain.joint_count)):
            order = [model.joint(name).id for name in chain.joint_names]
            for angle, joint in zip(pose, order, strict=True):
                data.qpos[model.jnt_qposadr[joint]] = angle
            mujoco.mj_forward(model, data)
            slots = model.jnt_dofadr[order]
            theirs.append((-data.qfrc_bias[slots], data.qfrc_passive[slots]))
            q = pose if chain.joint_count > 1 else float(pose[0])
            ours.append([np.atleast_1d(mech.gravity_torque(q)), np.atleast_1d(mech.spring_torque(q))])
            lengths = [float(state.length) for state in mech.spring_states(q)]
            assert lengths == pytest.approx(list(data.ten_length), abs=1e-12)
            frees = [getattr(mount.spring, "free_length", 0.0) for mount in mounts]
            slack += sum(length < free for length, free in zip(lengths, frees, strict=True))
        difference = np.abs(np.array(ours) - np.array(theirs)).max(axis=(0, 2))
        assert np.all(difference <= CLOSE * np.abs(theirs).max(axis=(0, 2)) + 1e-12)
        compared += 1
    assert compared == CASES // 4
    assert slack > 10


def test_gravity_seen_from_a_turned_and_accelerating_base():
    rng = np.random.default_rng(3)
    for _ in range(20):
        turn, acceleration = rng.uniform(-6.0, 6.0, 3), rng.uniform(-5.0, 5.0, 3)
        magnitude = float(rng.uniform(0.0, 12.0))
        rotation = pinocchio.rpy.rpyToMatrix(*turn)  # the base's axes in level coordinates
        want = rotation.T @ (np.array([0.0, 0.0, -magnitude]) - acceleration)
        seen = seen_from_base_in_space(tuple(turn), acceleration=tuple(acceleration), magnitude=magnitude)
        assert seen == pytest.approx(want, abs=1e-14)


def test_energy_of_a_chain_by_pinocchio():
    rng = np.random.default_rng(4)
    model = pinocchio.Model()
    links, last = [], 0
    for i in range(5):
        axis = rng.normal(size=3)
        axis /= np.linalg.norm(axis)
        place = pinocchio.SE3(
            pinocchio.rpy.rpyToMatrix(*(turn := rng.uniform(-3, 3, 3))), origin := rng.uniform(-1, 1, 3)
        )
        last = model.addJoint(last, pinocchio.JointModelRevoluteUnaligned(axis), place, f"k{i}")
        mass, com = float(rng.uniform(0.1, 4.0)), rng.uniform(-0.5, 0.5, 3)
        model.appendBodyToJoint(last, pinocchio.Inertia(mass, com, 0.1 * np.eye(3)), pinocchio.SE3.Identity())
        links.append(
            SpatialLink(
                f"k{i}", Body(mass, tuple(com)), origin=tuple(origin), roll_pitch_yaw=tuple(turn), axis=tuple(axis)
            )
        )
    model.gravity.linear = np.array([0.0, 0.0, -9.80665])
    data, mech = model.createData(), Mechanism(SpatialChain(links))
    for q in rng.uniform(-3, 3, (10, 5)):
        theirs = pinocchio.computePotentialEnergy(model, data, q)
        assert mech.energy(q) == pytest.approx(theirs, abs=1e-11)
        held = pinocchio.computeGeneralizedGravity(model, data, q)
        assert mech.holding_torque(q) == pytest.approx(held, abs=1e-12)

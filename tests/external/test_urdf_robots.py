"""Gravity torques of real robots, read from their URDF files, against pinocchio reading the same files.

The files come with the package example-robot-data (6.0.0, BSD-3-Clause; the descriptions of the
robots in it are under the licences of their makers, in the package). Pinocchio builds each robot
with its base standing on the ground; mimic joints are followed by pinocchio itself.

Tolerance 1e-10 of the peak over all poses: both sum the same products of doubles.
"""

from __future__ import annotations

import importlib.metadata
import math
from xml.etree import ElementTree

import numpy as np
import pinocchio
import pytest

from springpoise import Feedforward, Mechanism
from springpoise.linkages.urdf import from_urdf

pytest.importorskip("defusedxml", reason="reading URDF needs the package defusedxml")
try:
    FILES = {
        str(file).partition("/robots/")[2]: file.locate()
        for file in importlib.metadata.files("example-robot-data") or ()
        if str(file).endswith(".urdf")
    }
except importlib.metadata.PackageNotFoundError:
    pytest.skip("the robots are in the package example-robot-data, which is not installed", allow_module_level=True)

CLOSE = 1e-10

# File, joints that are moved by themselves, how many slide, how many mimic others.
ROBOTS = [
    ("ur_description/urdf/ur5_robot.urdf", 6, 0, 0),
    ("ur_description/urdf/ur10_robot.urdf", 6, 0, 0),
    ("panda_description/urdf/panda.urdf", 8, 2, 1),
    ("kinova_description/robots/kinova.urdf", 6, 0, 0),
    ("xarm_description/urdf/xarm7.urdf", 7, 0, 0),
    ("so_arm_description/urdf/so101.urdf", 6, 0, 0),
    ("talos_data/robots/talos_left_arm.urdf", 7, 0, 0),
    ("talos_data/robots/talos_full_v2.urdf", 32, 0, 12),
    ("tiago_description/robots/tiago.urdf", 48, 1, 0),
    ("tiago_pro_description/robots/tiago_pro.urdf", 23, 1, 10),
    ("baxter_description/urdf/baxter.urdf", 17, 4, 2),
    ("pr2_description/urdf/pr2.urdf", 20, 1, 10),
    ("solo_description/robots/solo12.urdf", 12, 0, 0),
    ("allegro_hand_description/urdf/allegro_right_hand.urdf", 16, 0, 0),
    ("icub_description/robots/icub.urdf", 32, 0, 0),
    ("double_pendulum_description/urdf/double_pendulum_continuous.urdf", 2, 0, 0),
]


def _file(name):
    return str(FILES[name])


def _referee(path, model):
    """Pinocchio's holding torques at a pose of ours, in our order of joints."""
    mimics = {}
    try:
        theirs = pinocchio.buildModelFromUrdf(path, mimic=True)
    except ValueError:
        # Pinocchio follows only joints that come before in its own order. Here it takes all joints
        # as free, and what they follow is read by another parser and put in by virtual work.
        theirs = pinocchio.buildModelFromUrdf(path)
        for joint in ElementTree.parse(path).getroot().findall("joint"):
            for mimic in joint.findall("mimic"):
                mimics[joint.get("name")] = (
                    mimic.get("joint"),
                    float(mimic.get("multiplier", "1")),
                    float(mimic.get("offset", "0")),
                )
    theirs.gravity.linear = np.array([0.0, 0.0, -9.80665])
    data = theirs.createData()
    assert theirs.nv == len(model.joint_names) + len(mimics)

    def joint_of(name):
        return theirs.joints[theirs.getJointId(name)]

    def held(pose):
        travels = dict(zip(model.joint_names, map(float, pose), strict=True))
        travels |= {name: offset + ratio * travels[of] for name, (of, ratio, offset) in mimics.items()}
        q = np.zeros(theirs.nq)
        for name, travel in travels.items():
            joint = joint_of(name)
            if joint.nq == 2:  # a joint without limits: cosine and sine
                q[joint.idx_q : joint.idx_q + 2] = math.cos(travel), math.sin(travel)
            else:
                q[joint.idx_q] = travel
        torque = pinocchio.computeGeneralizedGravity(theirs, data, q)
        by_name = {name: torque[joint_of(name).idx_v] for name in travels}
        for name, (of, ratio, _) in mimics.items():
            by_name[of] += ratio * by_name[name]
        return np.array([by_name[name] for name in model.joint_names])

    return held


@pytest.mark.parametrize(("name", "joints", "sliding", "mimics"), ROBOTS, ids=[row[0].split("/")[-1] for row in ROBOTS])
def test_holding_torque_of_a_real_robot(name, joints, sliding, mimics):
    path = _file(name)
    model = from_urdf(path)
    links = model.chain.links
    assert len(model.joint_names) == model.chain.joint_count == joints
    assert sum(link.joint == "prismatic" for link in links) == sliding
    assert sum(link.follows is not None for link in links) == mimics
    mech, held = Mechanism(model.chain), _referee(path, model)
    rng = np.random.default_rng(joints)
    poses = rng.uniform(-2.5, 2.5, (20, joints))
    theirs = np.array([held(pose) for pose in poses])
    peak = np.max(np.abs(theirs))
    assert np.max(np.abs(mech.holding_torque(poses) - theirs)) <= CLOSE * peak
    fast = Feedforward(mech).compile()
    assert np.max(np.abs(np.array(fast(*map(float, poses[0]))) - theirs[0])) <= CLOSE * peak


def test_mass_of_a_real_robot_by_pinocchio():
    path = _file("ur_description/urdf/ur5_robot.urdf")
    model = from_urdf(path)
    theirs = pinocchio.buildModelFromUrdf(path)
    (base,) = [link for link in model.chain.links if link.name == "base_link"]
    moving = float(model.chain.mass) - sum(body.mass for body in base.bodies)
    assert moving == pytest.approx(pinocchio.computeTotalMass(theirs), rel=1e-14)


def test_limits_become_the_travel():
    path = _file("ur_description/urdf/ur5_joint_limited_robot.urdf")
    model = from_urdf(path)
    theirs = pinocchio.buildModelFromUrdf(path)
    mech = Mechanism(model.chain, travel=model.travel)
    for name, (low, high) in zip(model.joint_names, mech.travel, strict=True):
        slot = theirs.joints[theirs.getJointId(name)].idx_q
        assert (low, high) == (theirs.lowerPositionLimit[slot], theirs.upperPositionLimit[slot])


def test_most_robots_of_the_package_are_read():
    """Every file is read, or refused with a reason that names it."""
    read = 0
    for path in FILES.values():
        try:
            from_urdf(path)
            read += 1
        except ValueError as error:
            assert str(error).startswith(str(path))
    assert read >= 0.9 * len(FILES) > 50

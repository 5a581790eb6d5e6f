"""The signs that the page on conventions states for other engines: one leaning arm with one spring in each.

The numbers follow by hand. An arm of 2 kg at 0.3 m, 30 deg above level: gravity turns it clockwise, by
-2 · 9.81 · 0.3 · cos 30°. A spring of 500 N/m and 0.1 m free length runs from 0.4 m above the pivot to
0.2 m along the arm, and turns it counter-clockwise. Tolerance 1e-12: a few products of doubles.
"""

from __future__ import annotations

import math

import mujoco
import numpy as np
import pinocchio
import pytest
import sympy
from sympy.physics.mechanics import LinearPathway, LinearSpring, Point, ReferenceFrame

from springpoise import Arm, Body, ExtensionSpring, Mechanism, SpringMount, Straight
from springpoise import Point as AnchoredPoint

Q = math.radians(30.0)
GRAVITY_TORQUE = -2.0 * 9.81 * 0.3 * math.cos(Q)
# cosine law; the lever is the distance of the spring's line from the pivot
LENGTH = math.sqrt(0.4**2 + 0.2**2 - 2.0 * 0.4 * 0.2 * math.sin(Q))
LOAD = 500.0 * (LENGTH - 0.1)
SPRING_TORQUE = LOAD * 0.4 * 0.2 * math.cos(Q) / LENGTH
CLOSE = 1e-12


def test_here():
    mech = Mechanism(
        Arm(Body(2.0, (0.3, 0.0))),
        springs=SpringMount(
            ExtensionSpring(500.0, free_length=0.1),
            Straight(AnchoredPoint("ground", (0.0, 0.4)), AnchoredPoint("arm", (0.2, 0.0))),
        ),
        gravity=(0.0, -9.81),
    )
    assert mech.gravity_torque(Q) == pytest.approx(GRAVITY_TORQUE, rel=CLOSE)
    assert mech.spring_torque(Q) == pytest.approx(SPRING_TORQUE, rel=CLOSE)
    assert mech.holding_torque(Q) == pytest.approx(-(GRAVITY_TORQUE + SPRING_TORQUE), rel=CLOSE)
    (state,) = mech.spring_states(Q)
    assert (state.length, state.load) == pytest.approx((LENGTH, LOAD), rel=CLOSE)


def _mujoco(damping=0.0):
    """The arm in the x-z plane of a world with z up; its axis is -y, so that counter-clockwise lifts."""
    model = mujoco.MjModel.from_xml_string(
        f"""<mujoco><compiler angle="radian" inertiafromgeom="false"/><worldbody><site name="a" pos="0 0 0.4"/>
        <body><joint type="hinge" axis="0 -1 0" damping="{damping}"/>
        <inertial pos="0.3 0 0" mass="2" diaginertia="0.1 0.1 0.1"/><site name="b" pos="0.2 0 0"/></body></worldbody>
        <tendon><spatial stiffness="500" springlength="0 0.1"><site site="a"/><site site="b"/></spatial></tendon>
        </mujoco>"""
    )
    data = mujoco.MjData(model)
    data.qpos[0] = Q
    mujoco.mj_forward(model, data)
    return model, data


def test_mujoco():
    model, data = _mujoco()
    assert list(model.opt.gravity) == [0.0, 0.0, -9.81]  # z up, and not standard gravity
    assert -data.qfrc_bias[0] == pytest.approx(GRAVITY_TORQUE, rel=CLOSE)
    assert data.qfrc_spring[0] == pytest.approx(SPRING_TORQUE, rel=CLOSE)
    held = data.qfrc_bias[0] - data.qfrc_passive[0]
    assert held == pytest.approx(-(GRAVITY_TORQUE + SPRING_TORQUE), rel=CLOSE)
    # and that torque does hold: applied, it leaves no acceleration
    data.qfrc_applied[0] = held
    mujoco.mj_forward(model, data)
    assert abs(data.qacc[0]) < 1e-10
    assert data.ten_length[0] == pytest.approx(LENGTH, rel=CLOSE)


def test_mujoco_tendon_force_is_minus_the_load():
    # passive torque is the tendon's force times the slope of its length, so its sign is that of the force
    _, data = _mujoco()
    slope = data.ten_J.ravel()[0]
    assert slope == pytest.approx(-0.4 * 0.2 * math.cos(Q) / LENGTH, rel=CLOSE)  # it gets shorter upwards
    assert data.qfrc_spring[0] / slope == pytest.approx(-LOAD, rel=CLOSE)


def test_mujoco_velocity_and_damping_must_be_zero():
    # why the page says "at zero velocity": damping enters the passive torque, but not the spring's part
    model, data = _mujoco(damping=0.7)
    data.qvel[0] = 2.0
    mujoco.mj_forward(model, data)
    assert data.qfrc_passive[0] == pytest.approx(SPRING_TORQUE - 1.4, rel=CLOSE)
    assert data.qfrc_spring[0] == pytest.approx(SPRING_TORQUE, rel=CLOSE)


def test_pinocchio():
    model = pinocchio.Model()
    joint = model.addJoint(
        0, pinocchio.JointModelRevoluteUnaligned(np.array([0.0, -1.0, 0.0])), pinocchio.SE3.Identity(), "pivot"
    )
    inertia = pinocchio.Inertia(2.0, np.array([0.3, 0.0, 0.0]), 0.1 * np.eye(3))
    model.appendBodyToJoint(joint, inertia, pinocchio.SE3.Identity())
    assert list(model.gravity.linear) == [0.0, 0.0, -9.81]
    data, q = model.createData(), np.array([Q])
    held = pinocchio.computeGeneralizedGravity(model, data, q).copy()
    assert -held[0] == pytest.approx(GRAVITY_TORQUE, rel=CLOSE)
    still = np.zeros(1)
    assert abs(pinocchio.aba(model, data, q, still, held)[0]) < 1e-12  # applied, it leaves no acceleration
    assert pinocchio.rnea(model, data, q, still, still)[0] == pytest.approx(held[0], rel=CLOSE)
    # the spring comes from outside: its pull on the arm, as a wrench in the joint's frame
    pull = LOAD / LENGTH * (np.array([0.0, 0.0, 0.4]) - 0.2 * np.array([math.cos(Q), 0.0, math.sin(Q)]))
    pinocchio.forwardKinematics(model, data, q)
    local = data.oMi[1].rotation.T @ pull
    wrench = pinocchio.Force(local, np.cross([0.2, 0.0, 0.0], local))
    forces = pinocchio.StdVec_Force()
    forces.append(pinocchio.Force.Zero())
    forces.append(wrench)
    held = pinocchio.computeStaticTorque(model, data, q, forces)[0]
    assert held == pytest.approx(-(GRAVITY_TORQUE + SPRING_TORQUE), rel=CLOSE)


def test_sympy():
    q = sympy.Symbol("q")
    weight = 2.0 * 9.81 * 0.3 * sympy.sin(q)
    length = sympy.sqrt(0.4**2 + 0.2**2 - 2.0 * 0.4 * 0.2 * sympy.sin(q))
    stored = 250.0 * (length - 0.1) ** 2
    assert float((-weight.diff(q)).subs(q, Q)) == pytest.approx(GRAVITY_TORQUE, rel=CLOSE)
    assert float((-stored.diff(q)).subs(q, Q)) == pytest.approx(SPRING_TORQUE, rel=CLOSE)
    x, frame, first = sympy.Symbol("x", positive=True), ReferenceFrame("N"), Point("a")
    last = first.locatenew("b", x * frame.x)
    spring = LinearSpring(500.0, LinearPathway(first, last), equilibrium_length=0.1)
    # stretched, its force is negative: positive pushes the ends apart
    assert float(spring.force.subs(x, LENGTH)) == pytest.approx(-LOAD, rel=CLOSE)

"""Pinocchio as an independent referee of gravity torques: several bodies, centres off the line, tilted gravity."""

from __future__ import annotations

import math

import numpy as np
import pinocchio
import pytest

from springpoise import Arm, Body, Mechanism, Point
from springpoise.gravity import seen_from_base

# Both sum a few products of doubles.
CLOSE = 1e-12


def _model(bodies, gravity):
    model = pinocchio.Model()
    joint = model.addJoint(0, pinocchio.JointModelRZ(), pinocchio.SE3.Identity(), "pivot")
    for mass, (x, y) in bodies:
        inertia = pinocchio.Inertia(mass, np.array([x, y, 0.0]), 0.01 * np.eye(3))
        model.appendBodyToJoint(joint, inertia, pinocchio.SE3.Identity())
    model.gravity.linear = np.array([*gravity, 0.0])
    return model


@pytest.mark.parametrize("seed", range(20))
def test_gravity_torque_of_an_arm_with_several_bodies(seed):
    rng = np.random.default_rng(seed)
    bodies = [(float(rng.uniform(0.1, 8.0)), tuple(rng.uniform(-0.8, 0.8, 2))) for _ in range(rng.integers(1, 6))]
    gravity = seen_from_base(rng.uniform(-math.pi, math.pi), acceleration=tuple(rng.uniform(-5.0, 5.0, 2)))
    model = _model(bodies, gravity)
    data = model.createData()
    mech = Mechanism(Arm([Body(mass, com) for mass, com in bodies]))
    poses = rng.uniform(-math.pi, math.pi, 25)
    # generalized gravity is what has to be held: minus what gravity exerts
    theirs = np.array([pinocchio.computeGeneralizedGravity(model, data, np.array([q]))[0] for q in poses])
    ours = mech.gravity_torque(poses, gravity)
    scale = sum(mass * math.hypot(*com) for mass, com in bodies) * math.hypot(*gravity)
    assert np.max(np.abs(ours + theirs)) <= CLOSE * scale
    assert mech.holding_torque(float(poses[0]), gravity) == pytest.approx(theirs[0], abs=CLOSE * scale)


@pytest.mark.parametrize("seed", range(5))
def test_energy_and_pivot_force(seed):
    rng = np.random.default_rng(seed)
    bodies = [(float(rng.uniform(0.1, 8.0)), tuple(rng.uniform(-0.8, 0.8, 2))) for _ in range(3)]
    gravity = seen_from_base(rng.uniform(-math.pi, math.pi))
    model = _model(bodies, gravity)
    data = model.createData()
    mech = Mechanism(Arm([Body(mass, com) for mass, com in bodies]), gravity=gravity)
    for q in rng.uniform(-math.pi, math.pi, 5):
        theirs = pinocchio.computePotentialEnergy(model, data, np.array([q]))
        assert mech.energy(float(q)) == pytest.approx(theirs, abs=1e-10)
        pinocchio.rnea(model, data, np.array([q]), np.zeros(1), np.zeros(1))
        held = data.oMi[1].rotation @ data.f[1].linear
        assert mech.pivot_force(float(q)) == pytest.approx((held[0], held[1]), abs=1e-10)


def test_payload_is_one_more_body():
    mech = (
        Mechanism(Arm([Body(2.0, (0.3, 0.05))], length=0.8))
        .with_payload(1.5)
        .with_payload("0.5 kg", Point("arm", (0.2, -0.1)))
    )
    model = _model([(2.0, (0.3, 0.05)), (1.5, (0.8, 0.0)), (0.5, (0.2, -0.1))], (0.0, -9.80665))
    theirs = pinocchio.computeGeneralizedGravity(model, model.createData(), np.array([0.4]))[0]
    assert mech.holding_torque(0.4) == pytest.approx(theirs, rel=1e-13)

"""Linkages: where bodies and their points are at given joint angles, and what they weigh."""

from springpoise.linkages.arm import Arm
from springpoise.linkages.body import Body, Point
from springpoise.linkages.protocol import AppliedForce, Linkage, PointMass

__all__ = ["AppliedForce", "Arm", "Body", "Linkage", "Point", "PointMass"]

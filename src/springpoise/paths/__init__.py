"""Paths: how a spring's length or angle follows the joints."""

from springpoise.paths.cable import Cable, Disc
from springpoise.paths.joint_travel import JointTravel
from springpoise.paths.protocol import Path
from springpoise.paths.straight import Straight

__all__ = ["Cable", "Disc", "JointTravel", "Path", "Straight"]

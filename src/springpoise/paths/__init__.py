"""Paths: how a spring's length or angle follows the joints.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.paths.cable import Cable as Cable
    from springpoise.paths.cable import Disc as Disc
    from springpoise.paths.drum import Drum as Drum
    from springpoise.paths.joint_travel import JointTravel as JointTravel
    from springpoise.paths.protocol import Path as Path
    from springpoise.paths.spool import GuideRoller as GuideRoller
    from springpoise.paths.spool import Spool as Spool
    from springpoise.paths.straight import Straight as Straight

__all__ = [
    "Cable",
    "Disc",
    "Drum",
    "GuideRoller",
    "JointTravel",
    "Path",
    "Spool",
    "Straight",
]

_HOME = {
    "Cable": "cable",
    "Disc": "cable",
    "Drum": "drum",
    "GuideRoller": "spool",
    "JointTravel": "joint_travel",
    "Path": "protocol",
    "Spool": "spool",
    "Straight": "straight",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

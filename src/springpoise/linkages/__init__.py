"""Linkages: where bodies and their points are at given joint angles, and what they weigh.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.linkages.arm import Arm as Arm
    from springpoise.linkages.body import Body as Body
    from springpoise.linkages.body import Point as Point
    from springpoise.linkages.dyads import Dyad as Dyad
    from springpoise.linkages.dyads import SliderDyad as SliderDyad
    from springpoise.linkages.link import Coupling as Coupling
    from springpoise.linkages.link import Link as Link
    from springpoise.linkages.planar_chain import PlanarChain as PlanarChain
    from springpoise.linkages.planar_linkage import FiveBar as FiveBar
    from springpoise.linkages.planar_linkage import FourBar as FourBar
    from springpoise.linkages.planar_linkage import PlanarLinkage as PlanarLinkage
    from springpoise.linkages.protocol import AppliedForce as AppliedForce
    from springpoise.linkages.protocol import Linkage as Linkage
    from springpoise.linkages.protocol import PointMass as PointMass
    from springpoise.linkages.spatial_chain import SpatialChain as SpatialChain
    from springpoise.linkages.spatial_chain import SpatialLink as SpatialLink
    from springpoise.linkages.urdf import UrdfFinding as UrdfFinding
    from springpoise.linkages.urdf import UrdfModel as UrdfModel
    from springpoise.linkages.urdf import from_urdf as from_urdf

__all__ = [
    "AppliedForce",
    "Arm",
    "Body",
    "Coupling",
    "Dyad",
    "FiveBar",
    "FourBar",
    "Link",
    "Linkage",
    "PlanarChain",
    "PlanarLinkage",
    "Point",
    "PointMass",
    "SliderDyad",
    "SpatialChain",
    "SpatialLink",
    "UrdfFinding",
    "UrdfModel",
    "from_urdf",
]

_HOME = {
    "AppliedForce": "protocol",
    "Arm": "arm",
    "Body": "body",
    "Coupling": "link",
    "Dyad": "dyads",
    "FiveBar": "planar_linkage",
    "FourBar": "planar_linkage",
    "Link": "link",
    "Linkage": "protocol",
    "PlanarChain": "planar_chain",
    "PlanarLinkage": "planar_linkage",
    "Point": "body",
    "PointMass": "protocol",
    "SliderDyad": "dyads",
    "SpatialChain": "spatial_chain",
    "SpatialLink": "spatial_chain",
    "UrdfFinding": "urdf",
    "UrdfModel": "urdf",
    "from_urdf": "urdf",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

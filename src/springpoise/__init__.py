"""Balance gravity-loaded arms with springs: describe, balance, verify, feed forward, guard.

The names below are loaded when they are first used; ``import springpoise`` alone loads nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise import balance as balance
    from springpoise import gravity as gravity
    from springpoise import guard as guard
    from springpoise import linkages as linkages
    from springpoise import paths as paths
    from springpoise import springs as springs
    from springpoise import tolerance as tolerance
    from springpoise import units as units
    from springpoise.feedforward import Actuator as Actuator
    from springpoise.feedforward import Feedforward as Feedforward
    from springpoise.feedforward import Motor as Motor
    from springpoise.gravity import STANDARD_GRAVITY as STANDARD_GRAVITY
    from springpoise.linkages import Arm as Arm
    from springpoise.linkages import Body as Body
    from springpoise.linkages import FiveBar as FiveBar
    from springpoise.linkages import FourBar as FourBar
    from springpoise.linkages import Link as Link
    from springpoise.linkages import PlanarChain as PlanarChain
    from springpoise.linkages import PlanarLinkage as PlanarLinkage
    from springpoise.linkages import Point as Point
    from springpoise.linkages import SpatialChain as SpatialChain
    from springpoise.mechanism import Friction as Friction
    from springpoise.mechanism import Mechanism as Mechanism
    from springpoise.mechanism import SpringMount as SpringMount
    from springpoise.paths import Cable as Cable
    from springpoise.paths import Disc as Disc
    from springpoise.paths import JointTravel as JointTravel
    from springpoise.paths import Spool as Spool
    from springpoise.paths import Straight as Straight
    from springpoise.springs import CompressionSpring as CompressionSpring
    from springpoise.springs import ConstantForceSpring as ConstantForceSpring
    from springpoise.springs import ExtensionSpring as ExtensionSpring
    from springpoise.springs import GasSpring as GasSpring
    from springpoise.springs import MeasuredSpring as MeasuredSpring
    from springpoise.springs import RubberTube as RubberTube
    from springpoise.springs import TorsionSpring as TorsionSpring
    from springpoise.springs import ZeroLengthSpring as ZeroLengthSpring
    from springpoise.springs import in_parallel as in_parallel
    from springpoise.springs import in_series as in_series

    __version__: str

__all__ = [
    "STANDARD_GRAVITY",
    "Actuator",
    "Arm",
    "Body",
    "Cable",
    "CompressionSpring",
    "ConstantForceSpring",
    "Disc",
    "ExtensionSpring",
    "Feedforward",
    "FiveBar",
    "FourBar",
    "Friction",
    "GasSpring",
    "JointTravel",
    "Link",
    "MeasuredSpring",
    "Mechanism",
    "Motor",
    "PlanarChain",
    "PlanarLinkage",
    "Point",
    "RubberTube",
    "SpatialChain",
    "Spool",
    "SpringMount",
    "Straight",
    "TorsionSpring",
    "ZeroLengthSpring",
    "__version__",
    "balance",
    "gravity",
    "guard",
    "in_parallel",
    "in_series",
    "linkages",
    "paths",
    "springs",
    "tolerance",
    "units",
]

_SUBMODULES = ("balance", "gravity", "guard", "linkages", "paths", "springs", "tolerance", "units")
_HOME = {
    "STANDARD_GRAVITY": "gravity",
    "Actuator": "feedforward",
    "Arm": "linkages",
    "Body": "linkages",
    "Cable": "paths",
    "CompressionSpring": "springs",
    "ConstantForceSpring": "springs",
    "Disc": "paths",
    "ExtensionSpring": "springs",
    "Feedforward": "feedforward",
    "FiveBar": "linkages",
    "FourBar": "linkages",
    "Friction": "mechanism",
    "GasSpring": "springs",
    "JointTravel": "paths",
    "Link": "linkages",
    "MeasuredSpring": "springs",
    "Mechanism": "mechanism",
    "Motor": "feedforward",
    "PlanarChain": "linkages",
    "PlanarLinkage": "linkages",
    "Point": "linkages",
    "RubberTube": "springs",
    "SpatialChain": "linkages",
    "Spool": "paths",
    "SpringMount": "mechanism",
    "Straight": "paths",
    "TorsionSpring": "springs",
    "ZeroLengthSpring": "springs",
    "in_parallel": "springs",
    "in_series": "springs",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    _load = names_of(__name__, _HOME, _SUBMODULES)

    def __getattr__(name: str) -> str:
        if name != "__version__":
            return _load(name)
        from importlib.metadata import version

        return globals().setdefault("__version__", version("springpoise"))


def __dir__() -> list[str]:
    return sorted(__all__)

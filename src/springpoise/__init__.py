"""Balance gravity-loaded arms with springs: describe, balance, verify, feed forward, guard.

The names below are loaded when they are first used; ``import springpoise`` alone loads nothing.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from springpoise import balance as balance
    from springpoise import gravity as gravity
    from springpoise import guard as guard
    from springpoise import linkages as linkages
    from springpoise import paths as paths
    from springpoise import springs as springs
    from springpoise import units as units
    from springpoise.feedforward import Actuator as Actuator
    from springpoise.feedforward import Feedforward as Feedforward
    from springpoise.feedforward import Motor as Motor
    from springpoise.gravity import STANDARD_GRAVITY as STANDARD_GRAVITY
    from springpoise.linkages import Arm as Arm
    from springpoise.linkages import Body as Body
    from springpoise.linkages import Point as Point
    from springpoise.mechanism import Friction as Friction
    from springpoise.mechanism import Mechanism as Mechanism
    from springpoise.mechanism import SpringMount as SpringMount
    from springpoise.paths import Cable as Cable
    from springpoise.paths import Disc as Disc
    from springpoise.paths import JointTravel as JointTravel
    from springpoise.paths import Straight as Straight
    from springpoise.springs import CompressionSpring as CompressionSpring
    from springpoise.springs import ConstantForceSpring as ConstantForceSpring
    from springpoise.springs import ExtensionSpring as ExtensionSpring
    from springpoise.springs import TorsionSpring as TorsionSpring
    from springpoise.springs import ZeroLengthSpring as ZeroLengthSpring

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
    "Friction",
    "JointTravel",
    "Mechanism",
    "Motor",
    "Point",
    "SpringMount",
    "Straight",
    "TorsionSpring",
    "ZeroLengthSpring",
    "__version__",
    "balance",
    "gravity",
    "guard",
    "linkages",
    "paths",
    "springs",
    "units",
]

_SUBMODULES = ("balance", "gravity", "guard", "linkages", "paths", "springs", "units")
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
    "Friction": "mechanism",
    "JointTravel": "paths",
    "Mechanism": "mechanism",
    "Motor": "feedforward",
    "Point": "linkages",
    "SpringMount": "mechanism",
    "Straight": "paths",
    "TorsionSpring": "springs",
    "ZeroLengthSpring": "springs",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name

    def __getattr__(name: str) -> Any:
        if name in _SUBMODULES:
            return import_module(f"springpoise.{name}")
        if name in _HOME:
            value = getattr(import_module(f"springpoise.{_HOME[name]}"), name)
        elif name == "__version__":
            from importlib.metadata import version

            value = version("springpoise")
        else:
            raise AttributeError(f"module 'springpoise' has no attribute {name!r}")
        globals()[name] = value
        return value


def __dir__() -> list[str]:
    return sorted(__all__)

"""Feed forward: exactly the torque that springs leave over, as the motor needs it.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.feedforward.actuator import Actuator as Actuator
    from springpoise.feedforward.actuator import Motor as Motor
    from springpoise.feedforward.feedforward import Feedforward as Feedforward

__all__ = ["Actuator", "Feedforward", "Motor"]

_HOME = {"Actuator": "actuator", "Feedforward": "feedforward", "Motor": "actuator"}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

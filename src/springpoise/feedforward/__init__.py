"""Feed forward: exactly the torque that springs leave over, as the motor needs it."""

from springpoise.feedforward.actuator import Actuator, Motor
from springpoise.feedforward.feedforward import Feedforward

__all__ = ["Actuator", "Feedforward", "Motor"]

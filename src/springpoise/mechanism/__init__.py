"""A mechanism: linkage, springs, friction and travel together, and all that follows from them."""

from springpoise.mechanism.equilibria import Equilibria, Equilibrium
from springpoise.mechanism.friction import Friction
from springpoise.mechanism.mechanism import Mechanism
from springpoise.mechanism.mount import SpringMount, SpringState

__all__ = ["Equilibria", "Equilibrium", "Friction", "Mechanism", "SpringMount", "SpringState"]

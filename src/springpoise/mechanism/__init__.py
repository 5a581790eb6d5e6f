"""A mechanism: linkage, springs, friction and travel together, and all that follows from them.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.mechanism.equilibria import Equilibria as Equilibria
    from springpoise.mechanism.equilibria import Equilibrium as Equilibrium
    from springpoise.mechanism.friction import Friction as Friction
    from springpoise.mechanism.gas_mounting import GasMount as GasMount
    from springpoise.mechanism.gas_mounting import check_gas_mounts as check_gas_mounts
    from springpoise.mechanism.mechanism import Mechanism as Mechanism
    from springpoise.mechanism.mount import SpringMount as SpringMount
    from springpoise.mechanism.states import SpringState as SpringState

__all__ = [
    "Equilibria",
    "Equilibrium",
    "Friction",
    "GasMount",
    "Mechanism",
    "SpringMount",
    "SpringState",
    "check_gas_mounts",
]

_HOME = {
    "Equilibria": "equilibria",
    "Equilibrium": "equilibria",
    "Friction": "friction",
    "GasMount": "gas_mounting",
    "check_gas_mounts": "gas_mounting",
    "Mechanism": "mechanism",
    "SpringMount": "mount",
    "SpringState": "states",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

"""Balance: from an arm to springs that can be bought and mounts that can be made.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.balance.candidates import StockCandidate as StockCandidate
    from springpoise.balance.candidates import StockSearch as StockSearch
    from springpoise.balance.chain import ChainBalance as ChainBalance
    from springpoise.balance.chain import ChainSpring as ChainSpring
    from springpoise.balance.chain import balance_chain as balance_chain
    from springpoise.balance.chain_fit import ChainFit as ChainFit
    from springpoise.balance.chain_fit import JointResidual as JointResidual
    from springpoise.balance.chain_fit import fit_chain as fit_chain
    from springpoise.balance.chain_fit import joint_residuals as joint_residuals
    from springpoise.balance.chain_result import BalancingSpring as BalancingSpring
    from springpoise.balance.fit import SpringFit as SpringFit
    from springpoise.balance.fit import fit_springs as fit_springs
    from springpoise.balance.residuals import Residual as Residual
    from springpoise.balance.residuals import residual as residual
    from springpoise.balance.route import PulleyRoute as PulleyRoute
    from springpoise.balance.search import search_stock as search_stock
    from springpoise.balance.sine import SineMatch as SineMatch
    from springpoise.balance.sine import sine_match as sine_match
    from springpoise.balance.stock import Stock as Stock
    from springpoise.balance.stock import read_stock as read_stock

__all__ = [
    "BalancingSpring",
    "ChainBalance",
    "ChainFit",
    "ChainSpring",
    "JointResidual",
    "PulleyRoute",
    "Residual",
    "SineMatch",
    "SpringFit",
    "Stock",
    "StockCandidate",
    "StockSearch",
    "balance_chain",
    "fit_chain",
    "fit_springs",
    "joint_residuals",
    "read_stock",
    "residual",
    "search_stock",
    "sine_match",
]

_HOME = {
    "BalancingSpring": "chain_result",
    "ChainBalance": "chain",
    "ChainFit": "chain_fit",
    "ChainSpring": "chain",
    "JointResidual": "chain_fit",
    "PulleyRoute": "route",
    "Residual": "residuals",
    "SineMatch": "sine",
    "SpringFit": "fit",
    "Stock": "stock",
    "StockCandidate": "candidates",
    "StockSearch": "candidates",
    "balance_chain": "chain",
    "fit_chain": "chain_fit",
    "fit_springs": "fit",
    "joint_residuals": "chain_fit",
    "read_stock": "stock",
    "residual": "residuals",
    "search_stock": "search",
    "sine_match": "sine",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

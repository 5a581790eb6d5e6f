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
    from springpoise.balance.methods import compare_methods as compare_methods
    from springpoise.balance.methods_assumptions import MethodAssumptions as MethodAssumptions
    from springpoise.balance.methods_figures import MethodFigures as MethodFigures
    from springpoise.balance.methods_result import MethodComparison as MethodComparison
    from springpoise.balance.methods_result import MethodRow as MethodRow
    from springpoise.balance.payload import adjust_for_payload as adjust_for_payload
    from springpoise.balance.payload_result import AdjustmentStep as AdjustmentStep
    from springpoise.balance.payload_result import PayloadAdjustment as PayloadAdjustment
    from springpoise.balance.payload_result import PointToMove as PointToMove
    from springpoise.balance.place_geometry import place as place
    from springpoise.balance.place_result import PlacedKnob as PlacedKnob
    from springpoise.balance.place_result import PlacedLimit as PlacedLimit
    from springpoise.balance.place_result import Placement as Placement
    from springpoise.balance.pulley import PulleyRemedies as PulleyRemedies
    from springpoise.balance.pulley import pulley_remedies as pulley_remedies
    from springpoise.balance.pulley_routes import PulleyRemedy as PulleyRemedy
    from springpoise.balance.residuals import Residual as Residual
    from springpoise.balance.residuals import residual as residual
    from springpoise.balance.route import PulleyRoute as PulleyRoute
    from springpoise.balance.search import search_stock as search_stock
    from springpoise.balance.sine import SineMatch as SineMatch
    from springpoise.balance.sine import sine_match as sine_match
    from springpoise.balance.spool_checks import SpoolCheck as SpoolCheck
    from springpoise.balance.spool_result import ShapedSpool as ShapedSpool
    from springpoise.balance.spool_shape import convex_beyond as convex_beyond
    from springpoise.balance.spool_shape import shape_spool as shape_spool
    from springpoise.balance.stock import Stock as Stock
    from springpoise.balance.stock import read_stock as read_stock

__all__ = [
    "AdjustmentStep",
    "BalancingSpring",
    "ChainBalance",
    "ChainFit",
    "ChainSpring",
    "JointResidual",
    "MethodAssumptions",
    "MethodComparison",
    "MethodFigures",
    "MethodRow",
    "PayloadAdjustment",
    "PlacedKnob",
    "PlacedLimit",
    "Placement",
    "PointToMove",
    "PulleyRemedies",
    "PulleyRemedy",
    "PulleyRoute",
    "Residual",
    "ShapedSpool",
    "SineMatch",
    "SpoolCheck",
    "SpringFit",
    "Stock",
    "StockCandidate",
    "StockSearch",
    "adjust_for_payload",
    "balance_chain",
    "compare_methods",
    "convex_beyond",
    "fit_chain",
    "fit_springs",
    "joint_residuals",
    "place",
    "pulley_remedies",
    "read_stock",
    "residual",
    "search_stock",
    "shape_spool",
    "sine_match",
]

_HOME = {
    "AdjustmentStep": "payload_result",
    "BalancingSpring": "chain_result",
    "ChainBalance": "chain",
    "ChainFit": "chain_fit",
    "ChainSpring": "chain",
    "JointResidual": "chain_fit",
    "MethodAssumptions": "methods_assumptions",
    "MethodComparison": "methods_result",
    "MethodFigures": "methods_figures",
    "MethodRow": "methods_result",
    "PayloadAdjustment": "payload_result",
    "PlacedKnob": "place_result",
    "PlacedLimit": "place_result",
    "Placement": "place_result",
    "PointToMove": "payload_result",
    "PulleyRemedies": "pulley",
    "PulleyRemedy": "pulley_routes",
    "PulleyRoute": "route",
    "Residual": "residuals",
    "ShapedSpool": "spool_result",
    "SineMatch": "sine",
    "SpoolCheck": "spool_checks",
    "SpringFit": "fit",
    "Stock": "stock",
    "StockCandidate": "candidates",
    "StockSearch": "candidates",
    "adjust_for_payload": "payload",
    "balance_chain": "chain",
    "compare_methods": "methods",
    "convex_beyond": "spool_shape",
    "fit_chain": "chain_fit",
    "fit_springs": "fit",
    "joint_residuals": "chain_fit",
    "place": "place_geometry",
    "pulley_remedies": "pulley",
    "read_stock": "stock",
    "residual": "residuals",
    "search_stock": "search",
    "shape_spool": "spool_shape",
    "sine_match": "sine",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

"""Balance: from an arm to springs that can be bought and mounts that can be made.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.balance.chains.chain import ChainBalance as ChainBalance
    from springpoise.balance.chains.chain import ChainSpring as ChainSpring
    from springpoise.balance.chains.chain import balance_chain as balance_chain
    from springpoise.balance.chains.fit import ChainFit as ChainFit
    from springpoise.balance.chains.fit import JointResidual as JointResidual
    from springpoise.balance.chains.fit import fit_chain as fit_chain
    from springpoise.balance.chains.fit import joint_residuals as joint_residuals
    from springpoise.balance.chains.result import BalancingSpring as BalancingSpring
    from springpoise.balance.fit import SpringFit as SpringFit
    from springpoise.balance.fit import fit_springs as fit_springs
    from springpoise.balance.methods.assumptions import MethodAssumptions as MethodAssumptions
    from springpoise.balance.methods.compare import compare_methods as compare_methods
    from springpoise.balance.methods.figures import MethodFigures as MethodFigures
    from springpoise.balance.methods.result import MethodComparison as MethodComparison
    from springpoise.balance.methods.result import MethodRow as MethodRow
    from springpoise.balance.payloads.adjust import adjust_for_payload as adjust_for_payload
    from springpoise.balance.payloads.result import AdjustmentStep as AdjustmentStep
    from springpoise.balance.payloads.result import PayloadAdjustment as PayloadAdjustment
    from springpoise.balance.payloads.result import PointToMove as PointToMove
    from springpoise.balance.placing.geometry import place as place
    from springpoise.balance.placing.result import PlacedKnob as PlacedKnob
    from springpoise.balance.placing.result import PlacedLimit as PlacedLimit
    from springpoise.balance.placing.result import Placement as Placement
    from springpoise.balance.pulleys.remedies import PulleyRemedies as PulleyRemedies
    from springpoise.balance.pulleys.remedies import pulley_remedies as pulley_remedies
    from springpoise.balance.pulleys.routes import PulleyRemedy as PulleyRemedy
    from springpoise.balance.residuals import Residual as Residual
    from springpoise.balance.residuals import residual as residual
    from springpoise.balance.sine import SineMatch as SineMatch
    from springpoise.balance.sine import sine_match as sine_match
    from springpoise.balance.spools.checks import SpoolCheck as SpoolCheck
    from springpoise.balance.spools.result import ShapedSpool as ShapedSpool
    from springpoise.balance.spools.shape import convex_beyond as convex_beyond
    from springpoise.balance.spools.shape import shape_spool as shape_spool
    from springpoise.balance.stock.candidates import StockCandidate as StockCandidate
    from springpoise.balance.stock.candidates import StockSearch as StockSearch
    from springpoise.balance.stock.lists import Stock as Stock
    from springpoise.balance.stock.lists import read_stock as read_stock
    from springpoise.balance.stock.route import PulleyRoute as PulleyRoute
    from springpoise.balance.stock.search import search_stock as search_stock

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
    "AdjustmentStep": "payloads.result",
    "BalancingSpring": "chains.result",
    "ChainBalance": "chains.chain",
    "ChainFit": "chains.fit",
    "ChainSpring": "chains.chain",
    "JointResidual": "chains.fit",
    "MethodAssumptions": "methods.assumptions",
    "MethodComparison": "methods.result",
    "MethodFigures": "methods.figures",
    "MethodRow": "methods.result",
    "PayloadAdjustment": "payloads.result",
    "PlacedKnob": "placing.result",
    "PlacedLimit": "placing.result",
    "Placement": "placing.result",
    "PointToMove": "payloads.result",
    "PulleyRemedies": "pulleys.remedies",
    "PulleyRemedy": "pulleys.routes",
    "PulleyRoute": "stock.route",
    "Residual": "residuals",
    "ShapedSpool": "spools.result",
    "SineMatch": "sine",
    "SpoolCheck": "spools.checks",
    "SpringFit": "fit",
    "Stock": "stock.lists",
    "StockCandidate": "stock.candidates",
    "StockSearch": "stock.candidates",
    "adjust_for_payload": "payloads.adjust",
    "balance_chain": "chains.chain",
    "compare_methods": "methods.compare",
    "convex_beyond": "spools.shape",
    "fit_chain": "chains.fit",
    "fit_springs": "fit",
    "joint_residuals": "chains.fit",
    "place": "placing.geometry",
    "pulley_remedies": "pulleys.remedies",
    "read_stock": "stock.lists",
    "residual": "residuals",
    "search_stock": "stock.search",
    "shape_spool": "spools.shape",
    "sine_match": "sine",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

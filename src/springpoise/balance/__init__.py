"""Balance: from an arm to springs that can be bought and mounts that can be made."""

from springpoise.balance.fit import SpringFit, fit_springs
from springpoise.balance.residuals import Residual, residual
from springpoise.balance.search import PulleyRoute, StockCandidate, StockSearch, search_stock
from springpoise.balance.sine import SineMatch, sine_match
from springpoise.balance.stock import Stock, read_stock

__all__ = [
    "PulleyRoute",
    "Residual",
    "SineMatch",
    "SpringFit",
    "Stock",
    "StockCandidate",
    "StockSearch",
    "fit_springs",
    "read_stock",
    "residual",
    "search_stock",
    "sine_match",
]

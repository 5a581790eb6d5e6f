"""Tolerance: what scatters from build to build, what it costs, and which screw puts it right.

The names below are loaded when they are first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.tolerance.adjusting import Adjuster as Adjuster
    from springpoise.tolerance.adjusting import Adjusters as Adjusters
    from springpoise.tolerance.adjusting import adjusters as adjusters
    from springpoise.tolerance.boxes import Corners as Corners
    from springpoise.tolerance.boxes import corners as corners
    from springpoise.tolerance.build_scatter import scatter as scatter
    from springpoise.tolerance.fields import Field as Field
    from springpoise.tolerance.fields import list_fields as list_fields
    from springpoise.tolerance.fields import replaced as replaced
    from springpoise.tolerance.scatter_result import Scatter as Scatter
    from springpoise.tolerance.slopes import Sensitivities as Sensitivities
    from springpoise.tolerance.slopes import Sensitivity as Sensitivity
    from springpoise.tolerance.slopes import sensitivities as sensitivities
    from springpoise.tolerance.spreads import Spread as Spread

__all__ = [
    "Adjuster",
    "Adjusters",
    "Corners",
    "Field",
    "Scatter",
    "Sensitivities",
    "Sensitivity",
    "Spread",
    "adjusters",
    "corners",
    "list_fields",
    "replaced",
    "scatter",
    "sensitivities",
]

_HOME = {
    "Adjuster": "adjusting",
    "Adjusters": "adjusting",
    "Corners": "boxes",
    "Field": "fields",
    "Scatter": "scatter_result",
    "Sensitivities": "slopes",
    "Sensitivity": "slopes",
    "Spread": "spreads",
    "adjusters": "adjusting",
    "corners": "boxes",
    "list_fields": "fields",
    "replaced": "fields",
    "scatter": "build_scatter",
    "sensitivities": "slopes",
}

if not TYPE_CHECKING:  # otherwise type checkers would accept every misspelt name
    __getattr__ = names_of(__name__, _HOME)


def __dir__() -> list[str]:
    return sorted(__all__)

"""Springs of round wire: from wire, coils and ends to a rate, and how far from every limit."""

from __future__ import annotations

from typing import TYPE_CHECKING

from springpoise.lazy import names_of

if TYPE_CHECKING:
    from springpoise.springs.wire import buckling as buckling
    from springpoise.springs.wire import fatigue as fatigue
    from springpoise.springs.wire import stress_factors as stress_factors

__all__ = ["buckling", "fatigue", "stress_factors"]

if not TYPE_CHECKING:
    __getattr__ = names_of(__name__, {}, ("buckling", "fatigue", "stress_factors"))

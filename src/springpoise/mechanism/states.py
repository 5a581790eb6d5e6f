"""How a mount's spring is at some pose."""

from __future__ import annotations

from typing import Any

import attrs

__all__ = ["SpringState"]


@attrs.frozen
class SpringState:
    """How one mount's spring is at some pose; the values of one spring of it, whatever ``count``."""

    name: str
    """Name of the mount."""
    length: Any
    """The spring's own length [m], or angle [rad]."""
    load: Any
    """Load of one spring [N, or N·m]; positive pulls the ends together."""
    energy: Any
    """Energy stored in one spring [J]."""
    margin: Any
    """Distance to the nearer end of the working range [m or rad]; negative outside, infinite without limits."""

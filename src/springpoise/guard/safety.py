"""What is said once with every design."""

from __future__ import annotations

__all__ = ["CAUTION"]

CAUTION = (
    "springs store energy, and arms fall. A payload that is taken off lets the springs throw the arm up; "
    "a spring that breaks drops it. Block the arm and relieve the springs before any work on it. Nothing here "
    "certifies anything: local codes and licensed practice prevail."
)
"""The usual caution."""

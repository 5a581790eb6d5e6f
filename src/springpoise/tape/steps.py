"""One line of a straight-line program."""

from __future__ import annotations

import attrs

from springpoise.lookup import Lookup

__all__ = ["Step"]


@attrs.frozen
class Step:
    """An operation on earlier slots; its result is the next slot.

    Slots are counted through a program's inputs, then its constants, then its steps.
    """

    name: str
    arguments: tuple[int, ...]
    table: Lookup | None = None

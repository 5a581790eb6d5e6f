"""Springs of which a file says only where they are mounted: ``rate = "open"``."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise.errors import InputError
from springpoise.guard.solving.requests import DesignRequest, FitRequest
from springpoise.mechanism import SpringMount

__all__ = ["OPEN", "ROOM", "STAND_INS", "OpenSpring"]

OPEN = "open"
"""What a file writes for a value that is to be found."""

STRENGTHS = ("rate", "pull")
PRELOADS = ("initial_tension", "free_angle")
ROOM = "rigid_length"
STAND_INS = {"rate": 1.0, "pull": 1.0, "initial_tension": 0.0, "free_angle": 0.0, ROOM: 0.0}
"""Fields that may be open, and a valid value [SI] that stands for each until it is found."""


@attrs.frozen(kw_only=True)
class OpenSpring:
    """A mounted spring of which some values are to be found."""

    place: int
    """Its place among all mounts of the file, from 0."""
    mount: SpringMount
    """The mount; the values left open in it are stand-ins and mean nothing."""
    fields: tuple[str, ...]
    """Which fields are open, such as ``"rate"``."""

    @staticmethod
    def preload(opened: Sequence[OpenSpring]) -> str:
        """What the fit chooses beside rates: ``"spring"``, ``"mount"`` or ``"none"``."""
        fields = {field for one in opened for field in one.fields}
        return "mount" if ROOM in fields else "spring" if fields & set(PRELOADS) else "none"

    def key(self, field: str) -> str:
        """The path of keys of a field in the file."""
        return f"springs[{self.place + 1}].{field}" if field == ROOM else f"springs[{self.place + 1}].spring.{field}"

    @staticmethod
    def check(opened: Sequence[OpenSpring], design: DesignRequest | None) -> None:
        """Whether the design can find what is open.

        Raises
        ------
        InputError
            Something open without a fit, a fit without anything open, or springs open in
            different ways, which no fit finds at once.
        """
        if not isinstance(design, FitRequest):
            if opened:
                key = opened[0].key(opened[0].fields[0])
                raise InputError(f'{key} is "open", which needs [design] with method = "fit"')
            return
        if not opened:
            raise InputError('design.method is "fit", which needs a spring whose rate or pull is "open"')
        preload = OpenSpring.preload(opened)
        for one in opened:
            wanted = one._openable(preload)
            for field in one.fields:
                if field not in wanted:
                    raise InputError(f'{one.key(field)} must be given, got "open"; no fit finds it beside the others')
            for field in wanted:
                if field not in one.fields:
                    raise InputError(
                        f'{one.key(field)} must be "open" too, got a value; '
                        "a fit finds the same of every spring that it may change"
                    )

    def _openable(self, preload: str) -> list[str]:
        spring: Any = self.mount.spring
        wanted = [name for name in STRENGTHS if hasattr(spring, name)]
        if preload == "spring":
            wanted += [name for name in PRELOADS if hasattr(spring, name)]
        return [*wanted, ROOM] if preload == "mount" else wanted

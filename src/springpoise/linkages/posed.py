"""A planar linkage at one pose, whose bodies are placed once and not for every point asked for."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from springpoise.carriers import Carrier
from springpoise.linkages.body import Point
from springpoise.linkages.protocol import AppliedForce, Linkage

if TYPE_CHECKING:
    from springpoise.linkages.dyads import Assembled
    from springpoise.linkages.frames import Frame
    from springpoise.linkages.members import MemberLinkage

__all__ = ["Posed", "posed"]


def posed(linkage: Linkage, q: Carrier) -> Any:
    """The linkage for many questions at this very ``q``, where it knows such a form; else itself."""
    own: Any = getattr(linkage, "posed", None)
    return linkage if own is None else own(q)


class Posed:
    """All that the linkage is; at its pose, every answer from the same frames."""

    __slots__ = ("_found", "_linkage", "_q")

    def __init__(self, linkage: MemberLinkage, q: Carrier) -> None:
        self._linkage, self._q = linkage, q
        self._found: tuple[dict[str, Frame], dict[str, Assembled]] | None = None

    def __getattr__(self, name: str) -> Any:
        return getattr(self._linkage, name)

    @property
    def _standing(self) -> tuple[dict[str, Frame], dict[str, Assembled]]:
        if self._found is None:
            self._found = self._linkage.standing(self._q)
        return self._found

    def position(self, point: Point, q: Carrier) -> tuple[Carrier, ...]:
        """As the linkage's."""
        if q is not self._q:
            return self._linkage.position(point, q)
        return self._standing[0][self._linkage.named(point)].place(point.at)

    def jacobian(self, point: Point, q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """As the linkage's."""
        if q is not self._q:
            return self._linkage.jacobian(point, q)
        return self._standing[0][self._linkage.named(point)].moves(point.at)

    def pivot_forces(self, applied: Sequence[AppliedForce], q: Carrier) -> tuple[tuple[Carrier, ...], ...]:
        """As the linkage's."""
        if q is not self._q:
            return self._linkage.pivot_forces(applied, q)
        from springpoise.linkages.statics import pivot_forces

        return pivot_forces(self._linkage.members, *self._standing, applied)

"""An open chain of links in a plane."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages.link import Link
from springpoise.linkages.members import Member, MemberLinkage

__all__ = ["PlanarChain"]


def _links(value: Any) -> tuple[Link, ...]:
    items = (value,) if isinstance(value, Link) else value
    if not isinstance(items, Sequence) or isinstance(items, str) or not all(isinstance(link, Link) for link in items):
        raise InputTypeError(f"PlanarChain.chain must be a sequence of Links, got {value!r}")
    if not items:
        raise InputError("PlanarChain.chain must be at least one Link, got none")
    return tuple(items)


@attrs.frozen(field_transformer=units.named_fields)
class PlanarChain(MemberLinkage):
    """Links one after another, each on a revolute or prismatic joint at the far end of the one before.

    Joint angles are relative to the parent. The first joint sits at the ground's origin. A link
    with a carried frame offers it at its far joint, kept parallel to the ground by a parallelogram
    or a belt. ``q`` has the joints that are moved by themselves, from the ground outwards.

    Raises
    ------
    InputError, InputTypeError
        No link, names that occur twice, a coupling that follows an unknown joint.

    Examples
    --------
    >>> from springpoise.linkages import Body, Point
    >>> chain = PlanarChain([
    ...     Link("upper", Body(2.0, (0.16, 0)), length=0.32, carried=Body(0.1, (0, 0))),
    ...     Link("fore", Body(0.8, (0.10, 0)), length=0.20),
    ... ])
    >>> chain.frames
    ('ground', 'upper', 'upper carried', 'fore')
    >>> x, y = chain.position(Point("fore", (0.20, 0)), (0.0, 0.0))
    >>> round(x, 12), y
    (0.52, 0.0)
    """

    chain: tuple[Link, ...] = attrs.field(converter=_links)
    """The links, from the ground outwards."""

    def __attrs_post_init__(self) -> None:
        self._check()

    @property
    def members(self) -> tuple[Member, ...]:
        """The links."""
        return self.chain

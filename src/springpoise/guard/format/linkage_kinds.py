"""How files name linkages of several joints: their kinds, the parts that close loops, robots from URDF files."""

from __future__ import annotations

from typing import Any

import attrs

from springpoise.errors import InputError
from springpoise.guard.format.models import Family, Form
from springpoise.guard.format.place import Place
from springpoise.linkages import (
    Dyad,
    FiveBar,
    FourBar,
    Link,
    PlanarChain,
    PlanarLinkage,
    SliderDyad,
    SpatialChain,
    from_urdf,
)
from springpoise.linkages.members import Member

__all__ = ["LINKAGES", "MEMBERS", "URDF"]

URDF = "urdf"
"""The kind of a linkage that stands in a file of its own, whose limits are the travel where none is stated."""


@attrs.frozen(kw_only=True)
class _UrdfFile:
    file: str

    def __attrs_post_init__(self) -> None:
        if not self.file.strip():
            raise InputError(f"_UrdfFile.file must be the name of a file, got {self.file!r}")


def _robot(place: Place, named: _UrdfFile) -> SpatialChain:
    """The chain of a URDF file beside the mechanism file."""
    try:
        return from_urdf(place.folder / named.file).chain
    except InputError as error:
        raise place.key("file").error(str(error)) from error


def _never(linkage: Any) -> None:
    """A chain does not tell what file it came from; it is written as what it is."""


LINKAGES = Family(
    "kind",
    "linkage",
    {
        "planar chain": PlanarChain,
        "planar linkage": PlanarLinkage,
        "four bar": FourBar,
        "five bar": FiveBar,
        "spatial chain": SpatialChain,
        URDF: Form((_UrdfFile,), _robot, _never),
    },
)

MEMBERS: dict[Any, Family] = {
    Member: Family("kind", "part", {"link": Link, "dyad": Dyad, "slider dyad": SliderDyad}),
}
"""The parts of a planar linkage, each of which names its kind."""

"""Joints that follow others, in a file: ``follows = { ratios = { upper = -1 }, offset = "10 deg" }``."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, NamedTuple

from springpoise.errors import InputError, SpringpoiseError
from springpoise.guard.amounts import written
from springpoise.guard.format.field_units import joint_unit
from springpoise.guard.format.place import Place
from springpoise.linkages import Coupling

__all__ = ["COUPLINGS", "Codec"]


class Codec(NamedTuple):
    """How one field is read and written where its type alone does not tell."""

    read: Callable[[Any, Place], Any]
    """The value, from what the file has at a place."""
    write: Callable[[Any, Any], Any]
    """What the file has, from the value and the object that has the field."""


def _read(value: Any, place: Place) -> Coupling:
    table = place.table(value)
    place.check_keys(table, ("ratios", "offset"), ("ratios",))
    ratios = place.key("ratios").table(table["ratios"])
    for name, ratio in ratios.items():
        if isinstance(ratio, bool) or not isinstance(ratio, int | float):
            raise place.key("ratios").key(name).error(f"must be a number without quotes, got {Place.shown(ratio)}")
    offset = table.get("offset", 0.0)
    if "offset" in table and not isinstance(offset, str):
        raise place.key("offset").error(
            f"must be a text with a unit, such as '1 rad' or '1 m', got {Place.shown(offset)}"
        )
    try:
        return Coupling(ratios, offset=offset)
    except SpringpoiseError as error:
        raise place.error(str(error)) from error


def _write(value: Coupling, link: Any) -> dict[str, Any]:
    numbers = [*(ratio for _, ratio in value.ratios), value.offset]
    if not all(isinstance(number, float | int) for number in numbers):
        raise InputError(f"Coupling.ratios must be single values to be written to a file, got arrays for {link.name!r}")
    ratios: Mapping[str, float] = {name: float(ratio) for name, ratio in value.ratios}
    if len(ratios) != len(value.ratios):
        raise InputError(f"Coupling.ratios must name each link once to be written to a file, got {value.ratios}")
    offset = {} if value.offset == 0.0 else {"offset": written(value.offset, joint_unit(link))}
    return {"ratios": dict(ratios), **offset}


COUPLINGS: Mapping[str, Codec] = {
    "Link.follows": Codec(_read, _write),
    "SpatialLink.follows": Codec(_read, _write),
}
"""By class and field."""

"""What a file says of the joints: a table for the one joint, or for all alike, or a list with a table for each."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from springpoise import units
from springpoise.errors import InputError, SpringpoiseError
from springpoise.guard.amounts import written
from springpoise.guard.format.models import Registry, read_model, write_model
from springpoise.guard.format.place import Place
from springpoise.guard.joints import joint_names
from springpoise.mechanism.travel import joint_units_of

__all__ = ["each_or_all", "each_or_all_tables", "travel_of", "travel_tables"]


def travel_of(value: Any, place: Place, linkage: Any) -> Any:
    """The travel as a mechanism takes it, from a table or a list with a table for each joint.

    Raises
    ------
    PoiseFileError
        Another number of tables than joints, a range that does not rise, or one in the wrong unit.
    """
    kinds = joint_units_of(linkage)
    names = joint_names(linkage)
    several = f"{len(kinds)} joint{'s' * (len(kinds) != 1)} ({', '.join(names)})"
    if not isinstance(value, list):
        if len(kinds) != 1:
            raise place.error(f"must be a table [[travel]] for each of {several}, got one table [travel]")
        (unit,) = kinds
        return _range(value, place, unit)
    if len(value) != len(kinds):
        raise place.error(f"must be a table for each of {several}, got {len(value)}")
    ranges = tuple(_range(table, at, unit) for (at, table), unit in zip(place.entries(value), kinds, strict=True))
    return ranges[0] if len(value) == 1 else ranges


def _range(value: Any, place: Place, unit: str) -> tuple[float, float] | None:
    """One range; an empty table is a joint that turns all the way."""
    table = place.table(value)
    place.check_keys(table, ("from", "to"), ("from", "to") if table else ())
    if not table:
        return None
    ends = []
    for key in ("from", "to"):
        at, text = place.key(key), table[key]
        if not isinstance(text, str):
            raise at.without_unit(text, unit)
        try:
            ends.append(units.radian(text, "travel") if unit == "rad" else units.metre(text, "travel"))
        except SpringpoiseError as error:
            raise at.failing(error) from error
    low, high = ends
    if not low < high:
        what = "angle" if unit == "rad" else "length"
        raise place.error(f"must run from the lower to the higher {what}, got {table['from']} to {table['to']}")
    return low, high


def travel_tables(travel: Any, linkage: Any) -> Any:
    """What :func:`travel_of` reads back."""
    kinds = joint_units_of(linkage)
    if len(kinds) == 1:
        return _range_table(travel, kinds[0])
    return [_range_table(one, unit) for one, unit in zip(travel, kinds, strict=True)]


def _range_table(value: Any, unit: str) -> dict[str, str]:
    if value is None:
        return {}
    if not all(isinstance(end, float | int) for end in value):
        raise InputError(f"Mechanism.travel must be single values to be written to a file, got {value!r}")
    return {"from": written(value[0], unit), "to": written(value[1], unit)}


def each_or_all(cls: type, value: Any, place: Place, linkage: Any, registry: Registry) -> Any:
    """One object for all joints from a table, or a tuple with one each from a list of tables.

    Raises
    ------
    PoiseFileError
        Another number of tables than joints, or one that cannot be read.
    """
    if not isinstance(value, list):
        return read_model(cls, value, place, registry)
    names = joint_names(linkage)
    if len(value) != len(names):
        raise place.error(
            f"must be a table for each of {len(names)} joint{'s' * (len(names) > 1)} ({', '.join(names)}), "
            f"or one table for all, got {len(value)}"
        )
    return tuple(read_model(cls, table, at, registry) for at, table in place.entries(value))


def each_or_all_tables(value: Any, registry: Registry) -> Any:
    """What :func:`each_or_all` reads back."""
    if isinstance(value, Sequence):
        return [write_model(one, registry) for one in value]
    return write_model(value, registry)

"""Tables of a file to model objects and back, whatever the model.

The keys of a table are the fields of an attrs class. A field with a unit is a text with a unit, a
field whose type is another model is a table, a field whose type is a protocol is a table that
names its kind. So a new spring or path needs one line in a registry and nothing here.
"""

from __future__ import annotations

import functools
import inspect
import itertools
import re
import types
import typing
from collections.abc import Callable, Iterable, Iterator, Mapping
from typing import Any, NamedTuple

import attrs
import numpy as np

from springpoise import units
from springpoise.errors import InputError, SpringpoiseError
from springpoise.guard.amounts import written
from springpoise.guard.format.couplings import COUPLINGS
from springpoise.guard.format.field_units import FIELD_UNITS, OWNER_UNITS
from springpoise.guard.format.place import Place, nearest

__all__ = [
    "Family",
    "Form",
    "Registry",
    "fields_of",
    "kind_of",
    "leaves",
    "read_kind",
    "read_model",
    "write_kind",
    "write_model",
]


class Form(NamedTuple):
    """One or more models whose fields share a table, and from which something else is made."""

    models: tuple[type, ...]
    """The models; no two of them have a key in common."""
    make: Callable[..., Any]
    """Makes it of a place and the models."""
    of: Callable[[Any], tuple[Any, ...] | None]
    """The models that something was made of; None where it was not, or where they no longer tell it."""


class Family(NamedTuple):
    """Models of which a table names one."""

    key: str
    """The key that names it."""
    noun: str
    """What they are called in messages."""
    kinds: Mapping[str, type | Form]
    """Names, and a class or a form for each."""
    named: Mapping[str, Any] = types.MappingProxyType({})
    """Objects for which a name alone may stand, in place of a table."""
    plain: Callable[[Any], Any] | None = None
    """What to write of a model of which no kind tells all; None to refuse it."""


Registry: typing.TypeAlias = "Mapping[Any, Family]"
"""The family for each protocol that may stand as the type of a field."""


class _Field(NamedTuple):
    owner: str
    key: str
    attribute: attrs.Attribute[Any]
    hints: tuple[Any, ...]
    unit: str | None
    required: bool


def fields_of(cls: type) -> tuple[_Field, ...]:
    """The fields of a model, with the key each has in a file and the types it may have."""
    return _fields_of(cls)


@functools.cache
def _fields_of(cls: Any) -> tuple[_Field, ...]:
    hints = typing.get_type_hints(cls)
    found = []
    for attribute in attrs.fields(cls):
        if not attribute.init:
            continue
        hint = hints.get(attribute.name, Any)
        union = isinstance(hint, types.UnionType) or typing.get_origin(hint) is typing.Union
        options = typing.get_args(hint) if union else (hint,)
        found.append(
            _Field(
                owner=cls.__name__,
                key=attribute.metadata.get("key", attribute.name),
                attribute=attribute,
                hints=tuple(option for option in options if option is not type(None)),
                unit=attribute.metadata.get("unit") or FIELD_UNITS.get(f"{cls.__name__}.{attribute.name}"),
                required=attribute.default is attrs.NOTHING,
            )
        )
    return tuple(found)


# ------------------------------------------------------------------------------------------------
# reading


def read_kind(family: Family, value: Any, place: Place, registry: Registry) -> Any:
    """The model of which a table names the kind."""
    if family.named and isinstance(value, str):
        if value not in family.named:
            raise place.error(f"must be a {family.noun}, got {Place.shown(value)}{nearest(value, family.named)}")
        return family.named[value]
    table = place.table(value)
    if family.key not in table:
        raise place.error(f"must have the key {family.key}, one of {', '.join(family.kinds)}")
    kind = place.key(family.key).text(table[family.key])
    if kind not in family.kinds:
        raise place.key(family.key).error(
            f"must be a kind of {family.noun}, got {Place.shown(kind)}{nearest(kind, family.kinds)}"
        )
    rest = {key: item for key, item in table.items() if key != family.key}
    found = family.kinds[kind]
    return (
        _read_form(found, rest, place, registry)
        if isinstance(found, Form)
        else read_model(found, rest, place, registry)
    )


def _read_form(form: Form, table: Mapping[str, Any], place: Place, registry: Registry) -> Any:
    """What is made of the models that share a table."""
    fields = [fields_of(model) for model in form.models]
    together = list(itertools.chain(*fields))
    place.check_keys(table, [f.key for f in together], [f.key for f in together if f.required])
    parts = []
    for model, own in zip(form.models, fields, strict=True):
        keys = {field.key for field in own}
        mine = {key: item for key, item in table.items() if key in keys}
        parts.append(read_model(model, mine, place, registry))
    try:
        return form.make(place, *parts)
    except SpringpoiseError as error:
        raise place.failing(error) from error


def read_model(cls: type, value: Any, place: Place, registry: Registry) -> Any:
    """An object of ``cls`` from a table whose keys are its fields.

    Raises
    ------
    PoiseFileError
        An unknown or missing key, a value of the wrong kind, or one that the model refuses.
    """
    fields = fields_of(cls)
    table = place.table(value, [f.key for f in fields if f.required])
    place.check_keys(table, [f.key for f in fields], [f.key for f in fields if f.required])
    given = {
        field.attribute.name: _read(field, table[field.key], place.key(field.key), registry)
        for field in fields
        if field.key in table
    }
    starred = [p.name for p in inspect.signature(cls).parameters.values() if p.kind is inspect.Parameter.VAR_POSITIONAL]
    several = [item for name in starred for item in given.pop(name, ())]
    try:
        return cls(*several, **{_argument(cls, name): item for name, item in given.items()})
    except SpringpoiseError as error:
        raise _at_field(cls, fields, table, place, error) from error


def _argument(cls: type, name: str) -> str:
    return str(attrs.fields_dict(cls)[name].alias or name)


def _at_field(
    cls: type, fields: Iterable[_Field], table: Mapping[str, Any], place: Place, error: SpringpoiseError
) -> Exception:
    """The model's complaint, at the key that it is about where it names one."""
    owners = "|".join(base.__name__ for base in cls.__mro__)
    said = re.match(rf"(?:{owners})\.(\w+)", str(error))
    for field in fields:
        if said and field.attribute.name == said[1] and field.key in table:
            raw = table[field.key]
            as_written = (
                f" (written {Place.shown(raw)})" if isinstance(raw, str) and repr(raw) not in str(error) else ""
            )
            return place.key(field.key).error(f"{error}{as_written}")
    return place.error(str(error))


def _read(field: _Field, value: Any, place: Place, registry: Registry) -> Any:
    if "read" in field.attribute.metadata:
        return field.attribute.metadata["read"](value, place)
    if _called(field) in COUPLINGS:
        return COUPLINGS[_called(field)].read(value, place)
    if "write" in field.attribute.metadata:  # the field reads its own text
        if type(value) in {int, float}:
            raise place.error(f"must be a text, got {value}; write it in quotes, with its unit or as a percentage")
        return _own_text(field, place.text(value), place)
    if field.unit is not None:
        return _amount(field, value, place)
    first, *others = field.hints
    if others and all(attrs.has(option) for option in field.hints):
        return _one_of(field.hints, value, place, registry)
    return _plain(first, value, place, registry)


def _called(field: _Field) -> str:
    return f"{field.owner}.{field.attribute.name}"


def _own_text(field: _Field, text: str, place: Place) -> Any:
    converter: Any = field.attribute.converter
    try:
        return converter(text)
    except SpringpoiseError as error:
        raise place.failing(error) from error


def _amount(field: _Field, value: Any, place: Place) -> Any:
    """A value with a unit as the texts that the model's own converter reads, or as a plain number."""
    return leaves(next((hint for hint in field.hints if _is_list(hint)), None), field.unit, value, place)


def _is_list(hint: Any) -> bool:
    return typing.get_origin(hint) in {tuple, np.ndarray}


def leaves(hint: Any, unit: str | None, value: Any, place: Place) -> Any:
    """A text with a unit, or lists of them as the type says, unchanged but looked at."""
    if not _is_list(hint):
        _check_leaf(unit, value, place)
        return value
    entries = place.entries(value)
    inner: tuple[Any, ...] = typing.get_args(hint) if typing.get_origin(hint) is tuple else (None, Ellipsis)
    if Ellipsis in inner:
        inner = (inner[0],) * len(entries)
    if len(entries) != len(inner):
        raise place.error(f"must be a list of {len(inner)} values, got {len(entries)}: {Place.shown(value)}")
    return tuple(leaves(one, unit, item, at) for one, (at, item) in zip(inner, entries, strict=True))


def _check_leaf(unit: str | None, value: Any, place: Place) -> None:
    if unit == "1":
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise place.error(f"must be a number without quotes, got {Place.shown(value)}")
    elif isinstance(value, bool) or not isinstance(value, str):
        raise place.without_unit(value, unit)


def _plain(hint: Any, value: Any, place: Place, registry: Registry) -> Any:
    if hint in registry:
        return read_kind(registry[hint], value, place, registry)
    if isinstance(hint, type) and attrs.has(hint):
        return read_model(hint, value, place, registry)
    if typing.get_origin(hint) is tuple:
        inner, *_ = typing.get_args(hint)
        options = () if inner in registry else typing.get_args(inner)
        if options and all(attrs.has(option) for option in options):
            return tuple(_one_of(options, item, at, registry) for at, item in place.entries(value))
        return tuple(_plain(inner, item, at, registry) for at, item in place.entries(value))
    if hint is str or typing.get_origin(hint) is typing.Literal:
        return place.text(value)
    if hint is Any:
        if isinstance(value, bool) or not isinstance(value, str | int | float):
            raise place.error(f"must be a text or a number, got {Place.shown(value)}")
        return value
    wanted = {int: "a whole number", bool: "true or false"}.get(hint)
    if wanted is None:
        raise TypeError(f"a field of type {hint!r} at {place.keys} cannot be read from a file")
    if type(value) is not hint:
        raise place.error(f"must be {wanted}, got {Place.shown(value)}")
    return value


def _one_of(options: tuple[Any, ...], value: Any, place: Place, registry: Registry) -> Any:
    """The model whose keys the table has most of."""
    table = place.table(value)
    best = max(options, key=lambda cls: sum(field.key in table for field in fields_of(cls)))
    return read_model(best, table, place, registry)


# ------------------------------------------------------------------------------------------------
# writing


def kind_of(family: Family, model: Any) -> str | None:
    """The name of a model's kind; None where no kind tells all of it."""
    for name, found in family.kinds.items():
        if isinstance(found, Form) and found.of(model) is not None:
            return name
        if type(model) is found:
            return name
    return None


def write_kind(model: Any, registry: Registry, family: Family) -> Any:
    """What :func:`read_kind` reads back as an equal object: a table that names its kind, or a name alone.

    Raises
    ------
    InputError
        A model of a kind that files do not know, or a field that holds an array.
    """
    for name, found in family.named.items():
        if model == found:
            return name
    kind = kind_of(family, model)
    if kind is None and family.plain is not None:
        model = family.plain(model)
        kind = kind_of(family, model)
    if kind is None:
        known = ", ".join([*family.named, *family.kinds])
        raise InputError(
            f"a {type(model).__name__} cannot be written to a file, only these kinds of {family.noun}: {known}"
        )
    found = family.kinds[kind]
    table = {family.key: kind}
    for part in (found.of(model) or ()) if isinstance(found, Form) else (model,):
        table |= write_model(part, registry)
    return table


def write_model(model: Any, registry: Registry) -> dict[str, Any]:
    """The table that :func:`read_model` reads back as an equal object; fields at their default are left out.

    Raises
    ------
    InputError
        A model of a kind that files do not know, or a field that holds an array.
    """
    table: dict[str, Any] = {}
    for field in fields_of(type(model)):
        value = getattr(model, field.attribute.name)
        if value is None or (
            not field.required and units.comparable(value) == units.comparable(_default(field.attribute))
        ):
            continue
        table[field.key] = _write(field, value, registry, model)
    return table


def _default(attribute: attrs.Attribute[Any]) -> Any:
    default: Any = attribute.default
    return default.factory() if hasattr(default, "factory") else default


def _write(field: _Field, value: Any, registry: Registry, model: Any) -> Any:
    name = _called(field)
    if "write" in field.attribute.metadata:
        return field.attribute.metadata["write"](value)
    if name in COUPLINGS:
        return COUPLINGS[name].write(value, model)
    if field.unit is not None:
        unit = OWNER_UNITS[name](model) if name in OWNER_UNITS else field.unit
        return _written(value, unit, name, any(_is_list(hint) for hint in field.hints))
    for hint, family in _families(field, registry):
        if isinstance(value, tuple) and typing.get_origin(hint) is tuple:
            return [write_kind(item, registry, family) for item in value]
        return write_kind(value, registry, family)
    if isinstance(value, tuple):
        return [write_model(item, registry) if attrs.has(type(item)) else item for item in value]
    return write_model(value, registry) if attrs.has(type(value)) else value


def _families(field: _Field, registry: Registry) -> Iterator[tuple[Any, Family]]:
    """The family of a field's type, or of its entries' type."""
    for hint in field.hints:
        inner, *_ = typing.get_args(hint) if typing.get_origin(hint) is tuple else (hint,)
        if inner in registry:
            yield hint, registry[inner]


def _written(value: Any, unit: str, name: str, several: bool) -> Any:
    if several and isinstance(value, np.ndarray) and value.ndim == 1:
        value = tuple(value.tolist())
    if isinstance(value, tuple):
        return [_written(item, unit, name, several) for item in value]
    if not isinstance(value, float | int):
        raise InputError(f"{name} must be a single value to be written to a file, got {type(value).__name__}")
    return float(value) if unit == "1" else written(value, unit)

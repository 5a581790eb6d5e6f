"""The tables of a file to a document and back."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

import attrs

from springpoise import units
from springpoise.errors import InputError, SpringpoiseError
from springpoise.feedforward import Actuator
from springpoise.gravity import STANDARD_GRAVITY, local, seen_from_base
from springpoise.guard.amounts import written
from springpoise.guard.document import Payload, PoiseFile
from springpoise.guard.kinds import ANGULAR_REGISTRY, DESIGNS, LIMITS, LINKAGES, REGISTRY, SPRINGS
from springpoise.guard.models import fields_of, read_kind, read_model, write_kind, write_model
from springpoise.guard.openings import OPEN, ROOM, STAND_INS, OpenSpring
from springpoise.guard.place import Place
from springpoise.guard.service import Service
from springpoise.mechanism import Friction, Mechanism, SpringMount
from springpoise.paths import JointTravel

__all__ = ["SCHEMA", "document_of", "tables_of"]

SCHEMA = 1
"""The version of the format that is read and written."""

SECTIONS = (
    "schema",
    "title",
    "description",
    "gravity",
    *LINKAGES,
    "travel",
    "friction",
    "springs",
    "service",
    "payloads",
    "actuator",
    "limits",
    "design",
)

STANDARD = (0.0, -STANDARD_GRAVITY)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class _Gravity:
    latitude: float | None = attrs.field(default=None, converter=units.radian)
    height: float | None = attrs.field(default=None, converter=units.metre)
    magnitude: float | None = attrs.field(default=None, converter=units.metre_per_second_squared)
    components: tuple[float, float] | None = attrs.field(default=None, converter=units.acceleration_pair)
    tilt: float = attrs.field(default=0.0, converter=units.radian)

    def __attrs_post_init__(self) -> None:
        given = [name for name in ("latitude", "magnitude", "components") if getattr(self, name) is not None]
        if len(given) > 1:
            raise InputError(f"must have one of latitude, magnitude and components, got {' and '.join(given)}")
        if self.height is not None and self.latitude is None:
            raise InputError("must have latitude where it has height, got height alone")
        if self.components is not None and self.tilt != 0.0:
            raise InputError("must have either components or tilt, got both")

    @property
    def vector(self) -> tuple[float, float]:
        if self.components is not None:
            return self.components
        magnitude = STANDARD_GRAVITY if self.magnitude is None else self.magnitude
        if self.latitude is not None:
            magnitude = local(self.latitude, 0.0 if self.height is None else self.height)
        return seen_from_base(self.tilt, magnitude=magnitude)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class _Range:
    first: float = attrs.field(converter=units.radian, metadata={"key": "from"})
    last: float = attrs.field(converter=units.radian, metadata={"key": "to"})

    def __attrs_post_init__(self) -> None:
        if not self.first < self.last:
            raise InputError(f"must run from the lower to the higher angle, got {self.first:g} to {self.last:g} rad")


# ------------------------------------------------------------------------------------------------
# reading


def document_of(tables: Mapping[str, Any], place: Place, *, path: Path | None, source: str | None) -> PoiseFile:
    """The document that a file's tables describe.

    Raises
    ------
    PoiseFileError
        Anything that cannot be read as it stands; the message names file, key and value.
    """
    _check_schema(tables, place)
    place.check_keys(tables, SECTIONS)
    linkages = [name for name in LINKAGES if name in tables]
    if len(linkages) != 1:
        raise place.error(f"must have one of the tables {', '.join(LINKAGES)}, got {' and '.join(linkages) or 'none'}")

    def section(name: str, cls: type) -> Any:
        return read_model(cls, tables[name], place.key(name), REGISTRY) if name in tables else None

    linkage = read_model(LINKAGES[linkages[0]], tables[linkages[0]], place.key(linkages[0]), REGISTRY)
    mounts, opened = [], []
    for index, (at, table) in enumerate(place.key("springs").entries(tables.get("springs", []))):
        mount, fields = _mount(table, at)
        try:
            Mechanism(linkage, springs=[mount])
        except SpringpoiseError as error:
            raise at.error(str(error.__cause__ or error)) from error
        if fields:
            opened.append(OpenSpring(place=index, mount=mount, fields=fields))
        else:
            mounts.append(mount)
    travel = section("travel", _Range)
    gravity = section("gravity", _Gravity)
    try:
        pull = STANDARD if gravity is None else gravity.vector
    except SpringpoiseError as error:
        raise place.key("gravity").failing(error) from error
    parts = {
        "title": place.key("title").text(tables.get("title", ""), may_be_empty=True),
        "description": place.key("description").text(tables.get("description", ""), may_be_empty=True),
        "actuator": section("actuator", Actuator),
        "payloads": [
            read_model(Payload, table, at, REGISTRY)
            for at, table in place.key("payloads").entries(tables.get("payloads", []))
        ],
        "service": [
            read_model(Service, table, at, REGISTRY)
            for at, table in place.key("service").entries(tables.get("service", []))
        ],
        "limits": [
            read_kind(LIMITS, table, at, REGISTRY)
            for at, table in place.key("limits").entries(tables.get("limits", []))
        ],
        "design": read_kind(DESIGNS, tables["design"], place.key("design"), REGISTRY) if "design" in tables else None,
    }
    try:
        mechanism = Mechanism(
            linkage,
            springs=mounts,
            friction=section("friction", Friction) or Friction(),
            travel=None if travel is None else (travel.first, travel.last),
            gravity=pull,
        )
        return PoiseFile(
            mechanism=mechanism, open_springs=opened, path=path, source=source, folder=place.folder, **parts
        )
    except SpringpoiseError as error:
        raise place.failing(error) from error


def _check_schema(tables: Mapping[str, Any], place: Place) -> None:
    if "schema" not in tables:
        raise place.error(f"must have the key schema, the version of the format; write schema = {SCHEMA}")
    version = tables["schema"]
    if type(version) is not int or version != SCHEMA:
        raise place.key("schema").error(
            f"must be {SCHEMA}, the only version that is read here, got {Place.shown(version)}"
        )


def _mount(value: Any, place: Place) -> tuple[SpringMount, tuple[str, ...]]:
    """A mount and the fields that are open in it, stand-ins being in their place."""
    table = dict(place.table(value))
    opened = []
    spring = table.get("spring")
    if isinstance(spring, Mapping):
        cls = SPRINGS.kinds.get(str(spring.get(SPRINGS.key)))
        known = {field.key: field.unit or "1" for field in fields_of(cls)} if isinstance(cls, type) else {}
        table["spring"] = spring = dict(spring)
        for name, stand_in in STAND_INS.items():
            if name in known and spring.get(name) == OPEN:
                spring[name] = written(stand_in, known[name])
                opened.append(name)
    if table.get(ROOM) == OPEN:
        table[ROOM] = written(STAND_INS[ROOM], "m")
        opened.append(ROOM)
    return read_model(SpringMount, table, place, REGISTRY), tuple(opened)


# ------------------------------------------------------------------------------------------------
# writing


def tables_of(document: PoiseFile) -> dict[str, Any]:
    """The tables that :func:`document_of` reads back as an equal document.

    Raises
    ------
    InputError
        A part of a kind that files do not know, or one with arrays for values.
    """
    mechanism = document.mechanism
    kind = next((name for name, cls in LINKAGES.items() if type(mechanism.linkage) is cls), None)
    if kind is None:
        raise InputError(
            f"a {type(mechanism.linkage).__name__} cannot be written to a file, only these linkages: {', '.join(LINKAGES)}"
        )
    tables: dict[str, Any] = {"schema": SCHEMA}
    if document.title:
        tables["title"] = document.title
    if document.description:
        tables["description"] = document.description
    if mechanism.gravity != STANDARD:
        tables["gravity"] = write_model(_Gravity(components=mechanism.gravity), REGISTRY)
    tables[kind] = write_model(mechanism.linkage, REGISTRY)
    if mechanism.travel is not None:
        tables["travel"] = write_model(_Range(first=mechanism.travel[0], last=mechanism.travel[1]), REGISTRY)
    if mechanism.friction != Friction():
        tables["friction"] = write_model(mechanism.friction, REGISTRY)
    opened = {one.place: one.fields for one in document.open_springs}
    springs = [_mount_table(mount, opened.get(i, ())) for i, mount in enumerate(document.all_mounts)]
    lists = {
        "springs": springs,
        "service": [write_model(service, REGISTRY) for service in document.service],
        "payloads": [write_model(payload, REGISTRY) for payload in document.payloads],
        "limits": [write_kind(limit, REGISTRY, LIMITS) for limit in document.limits],
    }
    tables |= {name: entries for name, entries in lists.items() if entries}
    if document.actuator is not None:
        tables["actuator"] = write_model(document.actuator, REGISTRY)
    if document.design is not None:
        tables["design"] = write_kind(document.design, REGISTRY, DESIGNS)
    return tables


def _mount_table(mount: SpringMount, opened: tuple[str, ...]) -> dict[str, Any]:
    angular = isinstance(mount.path, JointTravel)
    table = write_model(mount, ANGULAR_REGISTRY if angular else REGISTRY)
    for name in opened:
        (table if name == ROOM else table["spring"])[name] = OPEN
    order = ("name", "count", ROOM)
    return {key: table[key] for key in order if key in table} | {k: v for k, v in table.items() if k not in order}

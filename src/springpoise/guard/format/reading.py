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
from springpoise.guard.builds.tolerances import Tolerances
from springpoise.guard.document import Payload, PoiseFile
from springpoise.guard.format.joint_tables import each_or_all, each_or_all_tables, travel_of, travel_tables
from springpoise.guard.format.kinds import ANGULAR_REGISTRY, DESIGNS, LIMITS, LINKAGE_TABLES, REGISTRY, SPRINGS
from springpoise.guard.format.linkage_kinds import URDF
from springpoise.guard.format.models import Family, fields_of, kind_of, read_kind, read_model, write_kind, write_model
from springpoise.guard.format.place import Place
from springpoise.guard.service import Service
from springpoise.guard.solving.openings import OPEN, ROOM, STAND_INS, OpenSpring
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
    *LINKAGE_TABLES,
    "travel",
    "friction",
    "springs",
    "service",
    "payloads",
    "actuator",
    "limits",
    "tolerances",
    "design",
)

STANDARD = {2: (0.0, -STANDARD_GRAVITY), 3: (0.0, 0.0, -STANDARD_GRAVITY)}
"""Gravity where a file says nothing, by the number of dimensions [m/s²]."""


def _components(value: Any) -> Any:
    return None if value is None else units.acceleration(value, "components")


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class _Gravity:
    latitude: float | None = attrs.field(default=None, converter=units.radian)
    height: float | None = attrs.field(default=None, converter=units.metre)
    magnitude: float | None = attrs.field(default=None, converter=units.metre_per_second_squared)
    components: tuple[float, ...] | None = attrs.field(default=None, converter=_components, metadata={"unit": "m/s**2"})
    tilt: float = attrs.field(default=0.0, converter=units.radian)

    def __attrs_post_init__(self) -> None:
        given = [name for name in ("latitude", "magnitude", "components") if getattr(self, name) is not None]
        if len(given) > 1:
            raise InputError(f"must have one of latitude, magnitude and components, got {' and '.join(given)}")
        if self.height is not None and self.latitude is None:
            raise InputError("must have latitude where it has height, got height alone")
        if self.components is not None and self.tilt != 0.0:
            raise InputError("must have either components or tilt, got both")

    def vector(self, dimensions: int) -> tuple[float, ...]:
        if self.components is not None:
            if len(self.components) != dimensions:
                raise InputError(f"components must be {dimensions} values for this linkage, got {len(self.components)}")
            return self.components
        magnitude = STANDARD_GRAVITY if self.magnitude is None else self.magnitude
        if self.latitude is not None:
            magnitude = local(self.latitude, 0.0 if self.height is None else self.height)
        if dimensions == 2:
            return seen_from_base(self.tilt, magnitude=magnitude)
        if self.tilt != 0.0:
            raise InputError(f"tilt must be 0 rad for a linkage in space, got {self.tilt:g}; give components")
        return 0.0, 0.0, -float(magnitude)


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
    linkage, from_urdf = _linkage(tables, place)

    def section(name: str, cls: type) -> Any:
        return each_or_all(cls, tables[name], place.key(name), linkage, REGISTRY) if name in tables else None

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
    travel = travel_of(tables["travel"], place.key("travel"), linkage) if "travel" in tables else None
    if from_urdf and "travel" not in tables:
        travel = linkage.limits
    dimensions = getattr(linkage, "dimensions", 2)
    pull: tuple[float, ...] = STANDARD[dimensions]
    try:
        if "gravity" in tables:
            pull = read_model(_Gravity, tables["gravity"], place.key("gravity"), REGISTRY).vector(dimensions)
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
        "tolerances": read_model(Tolerances, tables["tolerances"], place.key("tolerances"), REGISTRY)
        if "tolerances" in tables
        else None,
        "design": read_kind(DESIGNS, tables["design"], place.key("design"), REGISTRY) if "design" in tables else None,
    }
    try:
        mechanism = Mechanism(
            linkage,
            springs=mounts,
            friction=section("friction", Friction) or Friction(),
            travel=travel,
            gravity=pull,
        )
        return PoiseFile(
            mechanism=mechanism, open_springs=opened, path=path, source=source, folder=place.folder, **parts
        )
    except SpringpoiseError as error:
        raise place.failing(error) from error


def _linkage(tables: Mapping[str, Any], place: Place) -> tuple[Any, bool]:
    """The linkage, and whether it is a robot from a file of its own."""
    names = [name for name in LINKAGE_TABLES if name in tables]
    if len(names) != 1:
        known = ", ".join(LINKAGE_TABLES)
        raise place.error(f"must have one of the tables {known}, got {' and '.join(names) or 'none'}")
    name, at = names[0], place.key(names[0])
    found = LINKAGE_TABLES[name]
    if not isinstance(found, Family):
        return read_model(found, tables[name], at, REGISTRY), False
    return read_kind(found, tables[name], at, REGISTRY), tables[name].get(found.key) == URDF


def _linkage_table(linkage: Any) -> dict[str, Any]:
    """The section that :func:`_linkage` reads back."""
    for name, found in LINKAGE_TABLES.items():
        if isinstance(found, Family):
            if kind_of(found, linkage) is not None:
                return {name: write_kind(linkage, REGISTRY, found)}
        elif type(linkage) is found:
            return {name: write_model(linkage, REGISTRY)}
    known = [kind for found in LINKAGE_TABLES.values() for kind in (found.kinds if isinstance(found, Family) else ())]
    raise InputError(
        f"a {type(linkage).__name__} cannot be written to a file, only these linkages: {', '.join(['arm', *known])}"
    )


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
    tables: dict[str, Any] = {"schema": SCHEMA}
    if document.title:
        tables["title"] = document.title
    if document.description:
        tables["description"] = document.description
    if mechanism.gravity != STANDARD[len(mechanism.gravity)]:
        tables["gravity"] = write_model(_Gravity(components=mechanism.gravity), REGISTRY)
    tables |= _linkage_table(mechanism.linkage)
    if mechanism.travel is not None:
        tables["travel"] = travel_tables(mechanism.travel, mechanism.linkage)
    if mechanism.friction != Friction():
        tables["friction"] = each_or_all_tables(mechanism.friction, REGISTRY)
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
        tables["actuator"] = each_or_all_tables(document.actuator, REGISTRY)
    if document.tolerances is not None:
        tables["tolerances"] = write_model(document.tolerances, REGISTRY)
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

"""The numbers of a mechanism by name, and the same mechanism with other numbers in their places."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator, Mapping, Sequence
from typing import Any, TypeAlias

import attrs
import numpy as np

from springpoise.errors import InputError, InputTypeError
from springpoise.mechanism import Mechanism
from springpoise.tables import number

__all__ = ["Field", "canonical_name", "field_of", "list_fields", "replaced"]

Place: TypeAlias = tuple[str | int, ...]

STEP = re.compile(r"\.?([A-Za-z_]\w*)|\[([^\[\]]+)\]")
"""One step into a mechanism: an attribute, or an index or name in brackets."""

NO_DIMENSION = {"travel"}
"""Numbers of a mechanism that are no dimension of it: the range in which it is used."""

UNITS = {"gravity": "m/s**2"}
"""Units of a mechanism's own numbers, which its class does not say."""


@attrs.frozen
class Field:
    """A number of a mechanism."""

    name: str
    """Where it is, such as ``"springs[0].path.first.at[1]"``."""
    unit: str
    """Its SI unit; ``"1"`` for a pure number and where the class does not say."""
    value: Any
    """What it is now, in that unit."""

    def __str__(self) -> str:
        shown = number(self.value, self.unit) if isinstance(self.value, float) else repr(self.value)
        return f"{self.name} = {shown}"


def list_fields(mechanism: Mechanism) -> tuple[Field, ...]:
    """All numbers of a mechanism that may vary from one build to the next, with units and values.

    Whole numbers (a count of springs), the travel, and columns of measured values are not among them.

    Parameters
    ----------
    mechanism
        The mechanism.

    Raises
    ------
    InputTypeError
        Something that is not a ``Mechanism``.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> mount = SpringMount(ZeroLengthSpring(858), Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0))))
    >>> for field in list_fields(Mechanism(Arm(Body(2, (0.35, 0))), springs=mount))[:4]:
    ...     print(field)
    linkage.bodies[0].mass = 2.000 kg
    linkage.bodies[0].com[0] = 0.3500 m
    linkage.bodies[0].com[1] = 0 m
    springs[0].spring.rate = 858.0 N/m
    """
    return tuple(_numbers(_checked(mechanism), "", ""))


def field_of(mechanism: Mechanism, name: str) -> Field:
    """The number of that name.

    Raises
    ------
    InputError, InputTypeError
        As ``canonical_name``.
    """
    full = canonical_name(mechanism, name)
    return next(field for field in list_fields(mechanism) if field.name == full)


def canonical_name(mechanism: Mechanism, name: str) -> str:
    """The name with numbers in all its brackets: ``springs[lift].spring.rate`` is ``springs[0].spring.rate``.

    Raises
    ------
    InputError, InputTypeError
        No number of the mechanism has that name, or it is not a text.
    """
    return _spelled(_place(_checked(mechanism), name))


def replaced(mechanism: Mechanism, values: Mapping[str, Any]) -> Mechanism:
    """The same mechanism with other numbers in some places.

    Parameters
    ----------
    mechanism
        The mechanism.
    values
        By name (see ``list_fields``; a part with a name of its own may stand in the brackets
        instead of its number): a number in the field's SI unit, a text with a unit, an array of
        shape (n, 1) for n builds, or a recorded variable.

    Raises
    ------
    InputError, InputTypeError, UnitError
        A name that the mechanism does not have, one field named twice, or a value that the
        field's own class refuses.

    Examples
    --------
    >>> from springpoise import Arm, Body, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
    >>> path = Straight(Point("ground", (0, 0.10)), Point("arm", (0.08, 0)))
    >>> mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(858), path, name="lift"))
    >>> moved = replaced(mech, {"springs[lift].path.first.at[1]": "103 mm", "linkage.bodies[0].mass": 2.1})
    >>> moved.springs[0].path.first.at, moved.linkage.mass
    ((0.0, 0.103), 2.1)
    """
    model = _checked(mechanism)
    if not isinstance(values, Mapping):
        raise InputTypeError(f"values must be names with values, got {values!r}")
    tree: dict[str | int, Any] = {}
    for name, value in values.items():
        place = _place(model, name)
        branch = tree
        for step in place[:-1]:
            branch = branch.setdefault(step, {})
        if place[-1] in branch:
            raise InputError(f"values must name each field once, got {_spelled(place)!r} twice")
        branch[place[-1]] = _Value(value)
    changed: Mechanism = _rebuilt(model, tree)
    return changed


@attrs.frozen
class _Value:
    """Marks the end of a branch."""

    value: Any


def _checked(mechanism: Any) -> Mechanism:
    if not isinstance(mechanism, Mechanism):
        raise InputTypeError(f"mechanism must be a Mechanism, got {mechanism!r}")
    return mechanism


def _is_number(value: Any) -> bool:
    """A float, builds in an array of at least two axes, or a variable; a flat array is a measured column."""
    if isinstance(value, np.ndarray):
        return value.ndim >= 2
    return isinstance(value, float) or hasattr(type(value), "__array_namespace__")


def _numbers(value: Any, name: str, unit: str) -> Iterator[Field]:
    if _is_number(value):
        yield Field(name, unit or "1", value)
    elif isinstance(value, tuple):
        for index, item in enumerate(value):
            yield from _numbers(item, f"{name}[{index}]", unit)
    elif attrs.has(type(value)):
        for field in _open_fields(value):
            inner = f"{name}.{field.name}" if name else field.name
            own = "" if name else UNITS.get(field.name, "")
            yield from _numbers(getattr(value, field.name), inner, field.metadata.get("unit", own))


def _open_fields(model: Any) -> list[attrs.Attribute[Any]]:
    fields = [field for field in attrs.fields(type(model)) if field.init and not field.name.startswith("_")]
    return [field for field in fields if not (isinstance(model, Mechanism) and field.name in NO_DIMENSION)]


def _place(mechanism: Mechanism, name: Any) -> Place:
    """The steps from the mechanism to a number."""
    if not isinstance(name, str):
        raise InputTypeError(f"names must be texts such as 'springs[0].spring.rate', got {name!r}")
    value: Any = mechanism
    place: list[str | int] = []
    at = 0
    while at < len(name):
        step = STEP.match(name, at)
        if step is None or (step[0].startswith(".") and not place):
            raise _unknown(mechanism, name, _spelled(place) + name[at:])
        key = _key(value, step[1], step[2])
        if key is None:
            raise _unknown(mechanism, name, _spelled(place) + name[at:])
        value = value[key] if isinstance(key, int) else getattr(value, key)
        place.append(key)
        at = step.end()
    if not place or not _is_number(value):
        raise _unknown(mechanism, name, _spelled(place))
    return tuple(place)


def _key(value: Any, attribute: str | None, bracket: str | None) -> str | int | None:
    """The attribute or index that a step stands for; None where there is none."""
    if attribute is not None:
        known = attrs.has(type(value)) and attribute in {field.name for field in _open_fields(value)}
        return attribute if known else None
    if not isinstance(value, tuple) or bracket is None:
        return None
    named = [index for index, item in enumerate(value) if _own_name(item) == bracket]
    if len(named) == 1:
        return named[0]
    return int(bracket) if bracket.isdecimal() and int(bracket) < len(value) else None


def _own_name(item: Any) -> Any:
    """What a part is called: its name, or the first of a pair of name and number."""
    return item[0] if isinstance(item, tuple) and item else getattr(item, "name", None)


def _spelled(place: Sequence[str | int]) -> str:
    return "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in place)[1:]


def _unknown(mechanism: Mechanism, name: str, spelled: str) -> InputError:
    """What is wrong with a name; ``spelled`` has numbers in its brackets as far as it is known."""
    known = [field.name for field in list_fields(mechanism)]
    near = difflib.get_close_matches(spelled, known, n=1, cutoff=0.6)
    hint = f"; did you mean {near[0]!r}?" if near else "; list_fields(mechanism) lists them"
    return InputError(f"names must be numbers of the mechanism, got {name!r}{hint}")


def _rebuilt(value: Any, tree: Any) -> Any:
    """A part with the values of a tree of changes in it, made by its own class."""
    if isinstance(tree, _Value):
        return tree.value
    if isinstance(value, tuple):
        return tuple(_rebuilt(item, tree[index]) if index in tree else item for index, item in enumerate(value))
    changes = {name: _rebuilt(getattr(value, name), branch) for name, branch in tree.items()}
    own_init = getattr(type(value), "__attrs_init__", None)
    if own_init is None:
        return attrs.evolve(value, **changes)
    # A constructor of its own takes other arguments than the fields.
    fields = [field for field in attrs.fields(type(value)) if field.init]
    new = object.__new__(type(value))
    own_init(new, **{field.alias: changes.get(field.name, getattr(value, field.name)) for field in fields})
    return new

"""Every public signature, against the checked-in list ``snapshot.txt``.

A difference is a change of the public interface. When it is meant, write the list anew with
``SPRINGPOISE_WRITE_SNAPSHOT=1 python -m pytest tests/api/test_snapshot.py``, read the difference,
and note it in the changelog.
"""

from __future__ import annotations

import difflib
import importlib
import inspect
import os
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

SNAPSHOT = Path(__file__).with_name("snapshot.txt")
MODULES = ["springpoise"] + [
    f"springpoise.{name}"
    for name in (
        "balance",
        "feedforward",
        "gravity",
        "guard",
        "linkages",
        "mechanism",
        "paths",
        "springs",
        "testing",
        "tolerance",
        "units",
    )
]


def _text(default: Any) -> str:
    return f"<{type(default).__name__}>" if " at 0x" in repr(default) else repr(default)


def signature(of: Any) -> str:
    """A signature as text that does not depend on the version of Python or of a dependency."""
    try:
        parameters = list(inspect.signature(of).parameters.values())
    except (TypeError, ValueError):
        return "(?)"
    parts: list[str] = []
    star = False
    for i, parameter in enumerate(parameters):
        if parameter.kind is parameter.KEYWORD_ONLY and not star:
            parts.append("*")
        star = star or parameter.kind in {parameter.KEYWORD_ONLY, parameter.VAR_POSITIONAL}
        name = {parameter.VAR_POSITIONAL: "*", parameter.VAR_KEYWORD: "**"}.get(parameter.kind, "") + parameter.name
        parts.append(name if parameter.default is parameter.empty else f"{name}={_text(parameter.default)}")
        last = i + 1 == len(parameters) or parameters[i + 1].kind is not parameter.POSITIONAL_ONLY
        if parameter.kind is parameter.POSITIONAL_ONLY and last:
            parts.append("/")
    return f"({', '.join(parts)})"


def lines_of(where: str, value: Any) -> Iterator[str]:
    """One line for an object, and one for each public method and attribute of a class."""
    if inspect.ismodule(value):
        yield f"{where}: module"
    elif inspect.isclass(value):
        plain = issubclass(value, BaseException) or getattr(value, "_is_protocol", False)
        yield f"{where}: {type(value).__name__}" if plain else f"{where}{signature(value)}"
        fields = {field.name for field in getattr(value, "__attrs_attrs__", ())}
        for name in sorted(dir(value)):
            if name.startswith("_") or name in fields:
                continue
            member = inspect.getattr_static(value, name)
            if isinstance(member, property) or type(member).__name__ in {"cached_property", "member_descriptor"}:
                yield f"{where}.{name}: property"
            elif isinstance(member, staticmethod | classmethod):
                yield f"{where}.{name}{signature(getattr(value, name))}: {type(member).__name__}"
            elif callable(member):
                yield f"{where}.{name}{signature(member)}"
            else:
                yield f"{where}.{name}: {type(member).__name__}"
        for name in sorted(fields):
            if not name.startswith("_"):
                yield f"{where}.{name}: field"
    elif callable(value):
        yield f"{where}{signature(value)}"
    else:
        yield f"{where}: {type(value).__name__}"


def public_interface() -> str:
    seen: dict[int, str] = {}
    lines: list[str] = []
    for module_name in MODULES:
        module = importlib.import_module(module_name)
        for name in sorted(module.__all__):
            value = getattr(module, name)
            where = f"{module_name}.{name}"
            if (inspect.isclass(value) or inspect.isfunction(value)) and id(value) in seen:
                lines.append(f"{where} is {seen[id(value)]}")
                continue
            seen[id(value)] = where
            lines.extend(lines_of(where, value))
    return "\n".join(lines) + "\n"


def test_the_public_interface_is_as_it_was() -> None:
    now = public_interface()
    if os.environ.get("SPRINGPOISE_WRITE_SNAPSHOT") == "1":
        SNAPSHOT.write_text(now, encoding="utf-8")
        pytest.fail("snapshot written")
    before = SNAPSHOT.read_text(encoding="utf-8")
    difference = "\n".join(
        difflib.unified_diff(before.splitlines(), now.splitlines(), "snapshot.txt", "now", "", "", 0)
    )
    assert not difference, f"the public interface has changed:\n{difference}"

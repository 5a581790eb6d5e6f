"""The glossary is the law for names: every field and every parameter of the public interface stands in it."""

from __future__ import annotations

import importlib
import inspect
import re
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType
from typing import Any

import springpoise

GLOSSARY = Path(__file__).parents[2] / "docs" / "glossary.md"
VARIADIC = {inspect.Parameter.VAR_POSITIONAL, inspect.Parameter.VAR_KEYWORD}


BESIDE = ("feedforward", "linkages.members", "mechanism", "mechanism.gas_mounting", "testing")
"""Modules that the reference shows and that the package's own names do not lead to."""


def _modules() -> Iterator[ModuleType]:
    """The package, its public submodules and theirs; folders without public names of their own lead nowhere."""
    waiting = [springpoise, *(importlib.import_module(f"springpoise.{name}") for name in BESIDE)]
    seen: set[str] = set()
    for module in waiting:
        if module.__name__ in seen:
            continue
        seen.add(module.__name__)
        yield module
        members = [getattr(module, name) for name in getattr(module, "__all__", ())]
        waiting += [member for member in members if isinstance(member, ModuleType)]


def _parameters(of: Any) -> Iterator[str]:
    try:
        signature = inspect.signature(of)
    except (TypeError, ValueError):
        return
    for parameter in signature.parameters.values():
        if parameter.kind not in VARIADIC and parameter.name != "self" and not parameter.name.startswith("_"):
            yield parameter.name


def _names(value: Any) -> Iterator[str]:
    """Parameters of a function; of a class, its constructor's, its fields and its public methods' parameters."""
    if inspect.isclass(value):
        if issubclass(value, BaseException):
            return
        fields = [field.name for field in getattr(value, "__attrs_attrs__", ())] or getattr(value, "_fields", ())
        yield from (name for name in fields if not name.startswith("_"))
        if not getattr(value, "_is_protocol", False):
            yield from _parameters(value)
        for name, member in inspect.getmembers(value, callable):
            ours = (getattr(member, "__module__", None) or "").startswith("springpoise")
            if ours and not name.startswith("_") and not inspect.isclass(member):
                yield from _parameters(member)
    elif callable(value):
        yield from _parameters(value)


def public_names() -> dict[str, str]:
    """Each name with the first place where it occurs."""
    seen: dict[str, str] = {}
    for module in _modules():
        for exported in getattr(module, "__all__", ()):
            for name in _names(getattr(module, exported)):
                seen.setdefault(name, f"{module.__name__}.{exported}")
    return seen


def explained() -> set[str]:
    """The names that begin a line of one of the glossary's tables."""
    text = GLOSSARY.read_text(encoding="utf-8")
    return {name for row in re.findall(r"^\| (`.+?) \|", text, re.MULTILINE) for name in re.findall(r"`(\w+)`", row)}


def test_every_public_name_stands_in_the_glossary() -> None:
    terms = explained()
    missing = {name: where for name, where in public_names().items() if name not in terms}
    assert not missing, f"docs/glossary.md must explain {missing}"


def test_the_glossary_explains_no_name_that_is_gone() -> None:
    gone = sorted(explained() - set(public_names()))
    assert not gone, f"docs/glossary.md explains names that nothing has: {gone}"


def test_names_carry_no_unit() -> None:
    units = {"m", "mm", "kg", "n", "nm", "rad", "deg", "s", "j", "hz", "pa"}
    ends = {
        name: where
        for name, where in public_names().items()
        if "_" in name and name.rpartition("_")[2].lower() in units
    }
    assert not ends, f"names must carry no unit: {ends}"

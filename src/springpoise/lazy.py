"""Names of a package that are loaded when they are first used (PEP 562)."""

from __future__ import annotations

import sys
from collections.abc import Callable, Mapping
from importlib import import_module
from typing import Any

__all__ = ["names_of"]


def names_of(package: str, home: Mapping[str, str], submodules: tuple[str, ...] = ()) -> Callable[[str], Any]:
    """A package's ``__getattr__``: ``home`` tells in which of its modules each name lives."""

    def get(name: str) -> Any:
        if name in submodules:
            return import_module(f"{package}.{name}")
        if name not in home:
            raise AttributeError(f"module {package!r} has no attribute {name!r}")
        value = getattr(import_module(f"{package}.{home[name]}"), name)
        setattr(sys.modules[package], name, value)
        return value

    return get

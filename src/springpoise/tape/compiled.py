"""Turns generated source into functions whose tracebacks show their lines."""

from __future__ import annotations

import linecache
import weakref
from itertools import count
from typing import Any

__all__ = ["compiled"]

_NUMBERS = count(1)


def compiled(source: str, name: str, names: dict[str, Any]) -> dict[str, Any]:
    """Execute ``source`` with ``names`` as its globals and return them with what it defined."""
    # One function per number: two programs of one name must not show each other's lines.
    filename = f"<springpoise:{name}:{next(_NUMBERS)}>"
    # No modification time: linecache then keeps the entry instead of looking for a file.
    linecache.cache[filename] = (len(source), None, source.splitlines(keepends=True), filename)
    exec(compile(source, filename, "exec"), names)
    # The lines go when the function does.
    weakref.finalize(names[name], linecache.cache.pop, filename, None)
    return names

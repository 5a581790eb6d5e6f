"""Where in a file something stands, so that every complaint can name it."""

from __future__ import annotations

import difflib
import reprlib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

import attrs

from springpoise.errors import PoiseFileError, SpringpoiseError

__all__ = ["Place", "nearest"]

_SHORT = reprlib.Repr()
_SHORT.maxstring = _SHORT.maxother = 80


@attrs.frozen
class Place:
    """A file and the path of keys to one of its values, entries of lists counted from 1."""

    file: str
    """What the file is called in messages."""
    keys: str = ""
    """Path of keys, such as ``"springs[1].spring.rate"``; empty for the file as a whole."""
    folder: Path = Path()
    """What names of other files in it are relative to."""

    def key(self, name: str) -> Place:
        """The place of a key in the table that stands here."""
        return attrs.evolve(self, keys=f"{self.keys}.{name}" if self.keys else name)

    def entry(self, index: int) -> Place:
        """The place of an entry, ``index`` being counted from 0 as in Python."""
        return attrs.evolve(self, keys=f"{self.keys}[{index + 1}]")

    def error(self, text: str) -> PoiseFileError:
        """The complaint about what stands here."""
        return PoiseFileError(f"{self.file}: {self.keys}: {text}" if self.keys else f"{self.file}: {text}")

    def table(self, value: Any, keys: Iterable[str] = ()) -> Mapping[str, Any]:
        """``value``, which has to be a table, with these keys among others."""
        if not isinstance(value, Mapping):
            named = list(keys)
            inside = f" with the {'key' if len(named) == 1 else 'keys'} {', '.join(named)}" if named else ""
            raise self.error(f"must be a table{inside}, got {self.shown(value)}")
        return value

    def entries(self, value: Any) -> list[tuple[Place, Any]]:
        """The entries of ``value``, which has to be a list, each with its place."""
        if not isinstance(value, list | tuple):
            raise self.error(f"must be a list, got {self.shown(value)}")
        return [(self.entry(i), item) for i, item in enumerate(value)]

    def text(self, value: Any, *, may_be_empty: bool = False) -> str:
        """``value``, which has to be a text."""
        if not isinstance(value, str) or not (may_be_empty or value.strip()):
            raise self.error(f"must be a text, got {self.shown(value)}")
        return value

    def without_unit(self, value: Any, unit: str | None) -> PoiseFileError:
        """The complaint about a value that is no text with a unit; who writes a bare angle means degrees."""
        usual = "deg" if unit == "rad" else unit
        hint = f"; write '{value} {usual}' if {usual} is meant" if type(value) in {int, float} else ""
        return self.error(f"must be a text with a unit, such as '1 {usual}', got {self.shown(value)}{hint}")

    def check_keys(self, table: Mapping[str, Any], known: Iterable[str], required: Iterable[str] = ()) -> None:
        """Refuses keys that are not known, and tables that lack some."""
        listed = list(known)
        for name in table:
            if name not in listed:
                raise self.key(_key(name)).error(f"is not a known key{nearest(name, listed)}")
        missing = [name for name in required if name not in table]
        if missing:
            raise self.error(f"must have {'the key' if len(missing) == 1 else 'the keys'} {', '.join(missing)}")

    @staticmethod
    def shown(value: Any) -> str:
        """A value as a message shows it: never longer than a line."""
        kind = {"dict": "table", "list": "list", "str": "text", "bool": "flag"}.get(type(value).__name__)
        shown = _SHORT.repr(value)
        return f"the {kind} {shown}" if kind else shown

    def failing(self, error: SpringpoiseError) -> PoiseFileError:
        """What a model or a function said about what stands here, as a complaint about this place."""
        return error if isinstance(error, PoiseFileError) else self.error(str(error))


def nearest(name: Any, known: Iterable[str]) -> str:
    """A hint that names what was probably meant, or else what there is to choose from."""
    listed = list(known)
    close = difflib.get_close_matches(str(name)[:80], listed, n=1, cutoff=0.6)
    if close:
        return f"; did you mean {close[0]!r}?"
    return f"; known are {', '.join(listed)}" if listed else "; there is none to choose from"


def _key(name: str) -> str:
    return name if name.replace("_", "").replace("-", "").isalnum() else _SHORT.repr(name)

"""Tables to TOML text: from nothing, or into a text whose comments and order stay."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

__all__ = ["merged", "rendered"]

MOST_INLINE = 3
"""A table of at most so many plain values is written on one line."""


def rendered(tables: Mapping[str, Any]) -> str:
    """The tables as TOML text."""
    import tomlkit

    document = tomlkit.document()
    _fill(document, tables)
    return tomlkit.dumps(document).rstrip("\n") + "\n"


def merged(source: str, before: Mapping[str, Any], after: Mapping[str, Any], opening: str = "") -> str:
    """A TOML text with what differs between ``before`` and ``after`` changed, and all else as it was.

    Parameters
    ----------
    source
        The text that ``before`` was read from.
    before, after
        The tables as they are written from objects, before and after the change.
    opening
        A comment to put in front; empty for none.
    """
    import tomlkit

    document: Any = tomlkit.parse(source)
    fresh = tomlkit.document()
    if opening:
        for line in opening.splitlines():
            fresh.add(tomlkit.comment(line))
        fresh.add(tomlkit.nl())
    gone = [name for name in before if name not in after]
    come = [name for name in after if name not in before and name not in document]
    for key, item in document.body:
        name = None if key is None else key.key
        if name in gone:
            # What is found takes the place of what asked for it.
            for other in come:
                fresh.append(other, _item(after[other], depth=1))
            come = []
            gone = [other for other in gone if other != name]
        elif name is None or name not in before or name not in after or before[name] == after[name]:
            if name in after or name is None:
                fresh.append(key, item)
        elif name in fresh:  # a table in several places; its first place was filled already
            continue
        else:
            fresh.append(key, _changed(document[name], before[name], after[name], depth=1))
    for other in come:
        fresh.append(other, _item(after[other], depth=1))
    return tomlkit.dumps(fresh)


def _changed(item: Any, before: Any, after: Any, depth: int) -> Any:
    """A TOML item with what differs changed in place; a new item where its kind differs."""
    from tomlkit.items import AoT, Array

    if isinstance(before, dict) and isinstance(after, dict) and isinstance(item, Mapping):
        table: Any = item
        for key in [key for key in before if key not in after and key in table]:
            del table[key]
        for key, value in after.items():
            if key not in table:
                table[key] = _item(value, depth + 1)
            elif value != before.get(key):
                table[key] = _changed(table[key], before.get(key), value, depth + 1)
        return table
    if isinstance(before, list) and isinstance(after, list) and isinstance(item, AoT | Array):
        entries: Any = item
        if all(isinstance(entry, dict) for entry in [*before, *after]) and len(entries) == len(before):
            return _changed_entries(entries, before, after, depth, within_line=isinstance(item, Array))
    return _item(after, depth)


def _changed_entries(
    entries: Any, before: Sequence[Any], after: Sequence[Any], depth: int, *, within_line: bool
) -> Any:
    """A list of tables with entries changed, taken out where they are gone, and added behind."""
    kept = _matched(before, after)
    for i in reversed(range(len(before))):
        if i not in kept:
            del entries[i]
    for place, (old, new) in enumerate(zip(kept, after, strict=False)):
        if before[old] != new:
            changed = _changed(entries[place], before[old], new, depth + 1)
            if within_line:
                entries[place] = changed
    for new in after[len(kept) :]:
        entries.append(_item(new, depth=9) if within_line else _table(new, depth))
    return entries


def _matched(before: Sequence[Any], after: Sequence[Any]) -> list[int]:
    """For the first entries of ``after``, which entry of ``before`` each was; those not listed are gone."""
    kept: list[int] = []
    for new in after:
        start = kept[-1] + 1 if kept else 0
        same = [i for i in range(start, len(before)) if _identity(before[i]) == _identity(new)]
        if not same:
            break
        kept.append(same[0])
    if len(kept) < min(len(before), len(after)):
        return list(range(min(len(before), len(after))))  # they are not the same entries: go by place
    return kept


def _identity(entry: Mapping[str, Any]) -> Any:
    """What an entry is recognised by when its numbers change."""
    return entry.get("name"), entry.get("path"), entry.get("what")


# ------------------------------------------------------------------------------------------------
# new items


def _fill(container: Any, tables: Mapping[str, Any]) -> None:
    plain = {key: value for key, value in tables.items() if not _is_nested(value)}
    for key, value in plain.items():
        container.append(key, _item(value, depth=1))
    for key, value in tables.items():
        if key not in plain:
            container.append(key, _item(value, depth=1))


def _is_nested(value: Any) -> bool:
    return isinstance(value, Mapping) or (
        isinstance(value, list) and bool(value) and all(isinstance(entry, Mapping) for entry in value)
    )


def _item(value: Any, depth: int) -> Any:
    """A value as a TOML item: tables of their own near the top, on one line further down."""
    import tomlkit

    if isinstance(value, Mapping):
        return _inline(value) if _fits_a_line(value, depth) else _table(value, depth)
    if isinstance(value, list) and _is_nested(value):
        if depth <= 2 and not all(_fits_a_line(entry, depth + 1) and depth > 2 for entry in value):
            entries = tomlkit.aot()
            for entry in value:
                entries.append(_table(entry, depth))
            return entries
        lines = tomlkit.array()
        for entry in value:
            lines.append(_inline(entry))
        return lines.multiline(True)
    if isinstance(value, str) and "\n" in value and '"""' not in value:
        return tomlkit.string(value, multiline=False)
    return tomlkit.item(value)


def _table(value: Mapping[str, Any], depth: int) -> Any:
    import tomlkit

    table = tomlkit.table()
    plain = {k: v for k, v in value.items() if not _is_nested(v) or _stays_within(v, depth + 1)}
    for key, item in plain.items():
        table.append(key, _item(item, depth + 1))
    for key, item in value.items():
        if key not in plain:
            table.append(key, _item(item, depth + 1))
    return table


def _stays_within(value: Any, depth: int) -> bool:
    """Whether a nested value is written inside its table and not under a heading of its own."""
    return depth > 2 if isinstance(value, list) else _fits_a_line(value, depth)


def _fits_a_line(value: Mapping[str, Any], depth: int) -> bool:
    few = len(value) <= MOST_INLINE and "kind" not in value and not any(_is_nested(v) for v in value.values())
    return depth > 3 or (depth > 1 and few)


def _inline(value: Mapping[str, Any]) -> Any:
    import tomlkit

    table = tomlkit.inline_table()
    for key, item in value.items():
        table.append(key, _inline(item) if isinstance(item, Mapping) else _within_line(item))
    return table


def _within_line(item: Any) -> Any:
    import tomlkit

    if not isinstance(item, list):
        return tomlkit.item(item)
    array = tomlkit.array()
    for entry in item:
        array.append(_inline(entry) if isinstance(entry, Mapping) else tomlkit.item(entry))
    return array

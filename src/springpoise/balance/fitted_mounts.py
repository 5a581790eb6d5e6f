"""Mounts whose springs are fitted: which of them stay as they are, and how results list them."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise.errors import InputError
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.springs import ScaledSpring
from springpoise.tables import number

__all__ = ["mounts_to_fit", "rows_of_mounts"]


def mounts_to_fit(mechanism: Mechanism, fixed: Sequence[str | int]) -> tuple[int, ...]:
    """Numbers of the mounts that are not among the ``fixed``, which are given by name or number.

    Raises
    ------
    InputError
        A fixed mount that is none of the mechanism's.
    """
    names = [mechanism.mount_name(i) for i in range(len(mechanism.springs))]
    stay = set()
    for which in [fixed] if isinstance(fixed, str | int) else fixed:
        if isinstance(which, str) and which in names:
            stay.add(names.index(which))
        elif isinstance(which, int) and not isinstance(which, bool) and 0 <= which < len(names):
            stay.add(which)
        else:
            raise InputError(
                f"fixed must name mounts of the mechanism ({', '.join(names) or 'it has none'}), got {which!r}"
            )
    return tuple(i for i in range(len(names)) if i not in stay)


def rows_of_mounts(mechanism: Mechanism) -> list[tuple[str, str]]:
    """Each mount's name, and its spring by the values that a fit finds."""
    rows = []
    for index, mount in enumerate(mechanism.springs):
        times = f"{mount.count} x " if mount.count > 1 else ""
        rows.append((mechanism.mount_name(index), times + _spring(mount)))
    return rows


def _spring(mount: SpringMount) -> str:
    spring: Any = mount.spring
    if isinstance(spring, ScaledSpring):
        return f"{number(spring.factor, '1')} times {type(spring.spring).__name__}"
    parts = []
    fields = attrs.fields_dict(type(spring)) if attrs.has(type(spring)) else {}
    for name in ("rate", "initial_tension", "free_angle", "pull"):
        if name in fields:
            unit = fields[name].metadata.get("unit", "1")
            parts.append(f"{name.replace('_', ' ')} {number(getattr(spring, name), unit)}")
    if mount.rigid_length:
        parts.append(f"rigid length {number(mount.rigid_length, 'm')}")
    return f"{type(spring).__name__}: " + ", ".join(parts)

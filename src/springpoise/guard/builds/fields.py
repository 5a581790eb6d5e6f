"""The numbers that a file's tolerances name: found in its mechanism, or in what its design will make of it."""

from __future__ import annotations

import difflib
import re
from collections.abc import Sequence
from typing import Any

import attrs

from springpoise import tolerance
from springpoise.errors import InputError, SpringpoiseError, UnitError
from springpoise.guard.builds.tolerances import Tolerances
from springpoise.guard.builds.widths import Width
from springpoise.guard.solving.requests import DesignRequest, SineRequest, StockRequest
from springpoise.linkages import Point
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.mechanism.travel import joint_units_of
from springpoise.paths import Cable, Straight
from springpoise.springs import ExtensionSpring, ZeroLengthSpring

__all__ = ["check_tolerances", "full_name", "kept_fields", "with_stand_ins"]

BRACKET = re.compile(r"\[([^\[\]]+)\]")
SPRING = re.compile(r"springs\[(\d+)\]")


def full_name(mechanism: Mechanism, field: str) -> str:
    """The field with numbers in its brackets, as far as the parts are there: ``springs[lift].count`` is of ``springs[0]``."""
    found, at = "", 0
    for bracket in BRACKET.finditer(field):
        found += field[at : bracket.start()]
        index = _index(_part(mechanism, found), bracket[1])
        found += f"[{bracket[1] if index is None else index}]"
        at = bracket.end()
    return found + field[at:]


def _part(value: Any, name: str) -> Any:
    """What stands at a name with numbers in its brackets; None where there is nothing."""
    for attribute, index in re.findall(r"([A-Za-z_]\w*)|\[(\d+)\]", name):
        if attribute:
            known = attrs.has(type(value)) and attribute in attrs.fields_dict(type(value))
            value = getattr(value, attribute) if known else None
        else:
            value = value[int(index)] if isinstance(value, tuple) and int(index) < len(value) else None
    return value


def _index(parts: Any, called: str) -> int | None:
    """The number of the part that is called so."""
    if not isinstance(parts, tuple):
        return None
    named = [
        i
        for i, part in enumerate(parts)
        if (part[0] if isinstance(part, tuple) and part else getattr(part, "name", None)) == called
    ]
    return named[0] if len(named) == 1 else None


# ------------------------------------------------------------------------------------------------
# springs that are still to be found


def with_stand_ins(
    mechanism: Mechanism, design: DesignRequest | None, all_mounts: Sequence[SpringMount]
) -> Mechanism | None:
    """The mechanism with a stand-in for what the design will find.

    None where no spring of the kind fits the linkage; the design will say so.
    """
    if design is None:
        return mechanism
    mounts = list(all_mounts)
    attach = Point("arm", (0.1, 0.01))
    if isinstance(design, SineRequest):
        mounts.append(SpringMount(ZeroLengthSpring(1.0), Straight(Point("ground", (0.0, 0.1)), attach)))
    elif isinstance(design, StockRequest):
        spring = ExtensionSpring(1.0, free_length=0.1, initial_tension=1.0, longest=0.2)
        path: Any = Straight(Point("ground", (0.0, 0.1)), attach)
        if design.pulley is not None:
            path = Cable(Point("ground", design.pulley.spring_end), design.pulley.disc((0.0, 0.1), (0.0, 1.0)), attach)
        mounts.append(SpringMount(spring, path))
    try:
        return mechanism.with_springs(mounts)
    except SpringpoiseError:
        return None


def kept_fields(tolerances: Tolerances, mechanism: Mechanism, kept: Sequence[int]) -> dict[str, str | None]:
    """Names of fields where only some springs are kept: by the old name the new one, None for a field that is gone."""
    found: dict[str, str | None] = {}
    named = [*(one.field for one in tolerances.spreads), *(one.field for one in tolerances.adjusters or ())]
    for field in named:
        spring = SPRING.match(full_name(mechanism, field))
        if spring is None:
            found[field] = field
        elif int(spring[1]) not in kept:
            found[field] = None
        else:
            written = SPRING.match(field)  # where a name stands in the brackets, it stays
            new = kept.index(int(spring[1]))
            found[field] = field if written is None else f"springs[{new}]{field[written.end() :]}"
    return found


# ------------------------------------------------------------------------------------------------
# checks


def check_tolerances(
    tolerances: Tolerances, mechanism: Mechanism, design: DesignRequest | None, all_mounts: Sequence[SpringMount]
) -> None:
    """Whether the tolerances suit a mechanism, that of their payload.

    Raises
    ------
    InputError, UnitError
        A field that is not there or named twice, a width in another unit, or what only one joint can have.
    """
    kinds = joint_units_of(mechanism.linkage)
    if tolerances.adjusters and len(kinds) != 1:
        raise InputError(f"tolerances.adjusters is for mechanisms with one joint, got {len(kinds)}")
    if isinstance(tolerances.residual_limit, float) and "m" in kinds:
        raise InputError(
            "tolerances.residual_limit must be a share of the peak gravity torque where a joint slides, got a torque"
        )
    whole = with_stand_ins(mechanism, design, all_mounts)
    if whole is None:
        return
    known = {field.name: field for field in tolerance.list_fields(whole)}

    def checked(field: str, widths: Sequence[Width], where: str) -> str:
        full = full_name(whole, field)
        if full not in known:
            hint = _hint(full, whole, known, design)
            raise InputError(f"{where}.field must be a number of the mechanism, got {field[:120]!r}{hint}")
        number = known[full]
        for width in widths:
            try:
                width.inside(number.unit)
            except UnitError as error:
                raise UnitError(f"{where} of {field} {error}") from error
            if width.unit == "%" and design is None and number.value == 0.0:
                unit = "a number" if number.unit == "1" else f"a width in {number.unit}"
                raise InputError(f"{where} of {field} must be {unit} where the value is 0, got {width}")
        return full

    seen: dict[str, int] = {}
    for i, spread in enumerate(tolerances.spreads):
        where = f"tolerances.spreads[{i + 1}]"
        given = spread.samples or [one for one in (spread.normal, spread.uniform) if one is not None]
        full = checked(spread.field, given, where)
        if full in seen:
            raise InputError(
                f"{where}.field must be one that no other spread has, got {spread.field!r}, which is "
                f"that of spreads[{seen[full] + 1}]"
            )
        seen[full] = i
    fields: list[str] = []
    for i, one in enumerate(tolerances.adjusters or ()):
        where = f"tolerances.adjusters[{i + 1}]"
        full = checked(one.field, [] if one.reach is None else [one.reach], where)
        if full in fields:
            raise InputError(f"{where}.field must be one that no other adjuster has, got {one.field!r}")
        fields.append(full)


def _hint(full: str, mechanism: Mechanism, known: Any, design: DesignRequest | None) -> str:
    """What was probably meant."""
    if isinstance(_part(mechanism, full), int):
        return "; a whole number does not scatter"
    if full.startswith("travel"):
        return "; the travel is where the mechanism is used, and does not scatter"
    for bracket in BRACKET.finditer(full):
        before = full[: bracket.start()]
        parts = _part(mechanism, before)
        count = len(parts) if isinstance(parts, tuple) else 0
        if not count or (bracket[1].isdecimal() and int(bracket[1]) < count):
            continue
        if bracket[1].isdecimal():
            return f"; {before} are counted from 0 here, and there {'is' if count == 1 else 'are'} {count}"
        if before == "springs" and isinstance(design, StockRequest | SineRequest):
            return f"; the spring that the design finds is springs[{count - 1}]"
        names = [name for part in parts if isinstance(name := getattr(part, "name", None), str)]
        near = difflib.get_close_matches(bracket[1], names, n=1)
        if near:
            return f"; did you mean {before}[{near[0]}]?"
        return f"; {before} are called {', '.join(names)}" if names else f"; number {before} from 0"
    close = difflib.get_close_matches(full, known, n=1, cutoff=0.6)
    if close:
        return f"; did you mean {close[0]!r}?"
    roots = dict.fromkeys(re.split(r"\.|(?<=\])", name)[0] for name in known)
    return f"; names begin with {', '.join(roots)}"

"""Strings with a unit to SI magnitudes, and SI results back to quantities: all that pint is needed for."""

from __future__ import annotations

import functools
import math
import re
from typing import Any

from springpoise.errors import UnitError

__all__ = ["angle_hint", "described", "parse", "quantity", "spelling_hint"]

_LONGEST_TEXT = 100
_NUMBER_AND_UNIT = re.compile(
    r"\s*(?P<number>[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d{1,3})?)\s*(?P<unit>(?:(?<=\s)1\s*/|[^\d\s+\-.]).*)?\s*",
    re.ASCII,
)
_UNIT_TEXT = re.compile(r"[A-Za-zµμ°%Ω/*·⋅^()_ \-0-9²³¹⁻]{1,40}")
_POWER = re.compile(r"(?:\*\*|\^)\s*(?:-?\d|\(-?\d\))(?!\s*(?:\*\*|\^|[\d.]))")
_SUPERSCRIPT = re.compile(r"(⁻?)([¹²³])")
_NEWTON_METRE = re.compile(r"(?<![A-Za-z_])([mkcMdµμu]?)N[·⋅ \-]?([mcd]?m)(?![A-Za-z_])")
_MASS = re.compile(r"(?<![A-Za-z_])(?:lbs?|pounds?|oz|ounces?|kg|kilograms?|g|grams?)(?![A-Za-z_])")
_MASS_TO_FORCE = {
    **dict.fromkeys(("lb", "lbs", "pound", "pounds"), "lbf"),
    **dict.fromkeys(("oz", "ounce", "ounces"), "ozf"),
    **dict.fromkeys(("kg", "kilogram", "kilograms"), "kgf"),
    **dict.fromkeys(("g", "gram", "grams"), "gf"),
}


@functools.cache
def _registry() -> Any:
    """A registry of our own, so that a string means the same in every process."""
    import pint

    return pint.UnitRegistry()


@functools.lru_cache(maxsize=4096)
def parse(text: str, unit: str, name: str = "value") -> float:
    """Magnitude of ``text`` in ``unit``.

    Parameters
    ----------
    text
        A number and a unit, such as ``"3.5 lbf/in"``, ``"30 deg"`` or ``"2 N*m"``. ``"Nm"`` is
        read as newton metre. For a dimensionless ``unit`` (``"1"``) the unit may be left out.
    unit
        The unit wanted, in pint's spelling; ``"1"`` for a pure number.
    name
        What the value is called in an error message.

    Returns
    -------
    float
        The magnitude in ``unit``; always finite.

    Raises
    ------
    UnitError
        No unit, an unknown unit, or one of the wrong dimension. An angle counts as a dimension
        here: ``"5 N*m"`` is no torsional rate and ``"50 Hz"`` no joint rate, since neither says
        per which angle.

    Examples
    --------
    >>> parse("2 kN", "N")
    2000.0
    >>> round(parse("3.5 lbf/in", "N/m"), 3)
    612.944
    """
    shown = repr(text) if len(text) <= _LONGEST_TEXT else repr(text[:40]) + "..."
    wanted = f"{name} must be {described(unit)}, got {shown}"
    match = _NUMBER_AND_UNIT.fullmatch(text.replace("\u2212", "-")) if len(text) <= _LONGEST_TEXT else None
    if match is None:
        raise UnitError(f"{wanted}; write a number and a unit, such as {_example(unit)!r}")
    number = float(match["number"])
    if not math.isfinite(number):
        raise UnitError(f"{wanted}; the number is too large")
    spelled = (match["unit"] or "").strip()
    if not spelled:
        if unit == "1":
            return number
        raise UnitError(f"{wanted} without a unit; write it with one, such as {_example(unit)!r}")
    given = _unit(spelled)
    if given is None:
        raise UnitError(f"{wanted}; {spelled!r} is not a unit that is known")
    target = _registry().parse_units("dimensionless" if unit == "1" else unit)
    if given.dimensionality != target.dimensionality:
        raise UnitError(f"{wanted}{spelling_hint(spelled, unit)}")
    turned, meant = _angle_power(given), _angle_power(target)
    # V/(rad/s) and N*m/A are one and the same
    if turned != meant and not (unit == "N*m/A" and turned == -1):
        raise UnitError(f"{wanted}{angle_hint(spelled, unit, turned)}")
    result = float(_registry().Quantity(number, given).to(target).magnitude)
    if not math.isfinite(result):
        raise UnitError(f"{wanted}; the number is too large")
    return result


def _unit(spelled: str) -> Any:
    """The unit that a user's spelling means; None for what is not a unit."""
    if not _UNIT_TEXT.fullmatch(spelled):
        return None
    spelled = _SUPERSCRIPT.sub(lambda m: "**" + m[1].replace("⁻", "-") + "123"["¹²³".index(m[2])], spelled)
    bare = _POWER.sub("", spelled)
    if "**" in bare or "^" in bare or re.search(r"\d\d", bare):  # towers of powers never reach pint
        return None
    spelled = _NEWTON_METRE.sub(r"\1N*\2", spelled.replace("°C", "degC").replace("°", "deg"))
    spelled = re.sub(r"[·⋅]|(?<=[A-Za-z])-(?=[A-Za-z])", "*", spelled).replace("%", "percent")
    ureg = _registry()
    try:
        unit = ureg.parse_units("1" + spelled if spelled.startswith("/") else spelled)
        nothing, one, two = (ureg.Quantity(step, unit).to_root_units().magnitude for step in (0.0, 1.0, 2.0))
    except Exception:  # pint raises many kinds, some of them of tokenize
        return None
    straight = math.isclose(two - one, one - nothing, rel_tol=1e-9)
    return unit if straight else None  # a decibel is a logarithm


def _angle_power(unit: Any) -> float:
    """Power of the radian in a unit; pint itself counts angles as dimensionless."""
    root = _registry().Quantity(1.0, unit).to_root_units()
    return float(dict(root.unit_items()).get("radian", 0))


def angle_hint(spelled: str, unit: str, turned: float) -> str:
    """What to write where the dimension is right and the angle in it is not."""
    if unit == "rad":
        return "; write rad or deg"
    if unit == "rad/s":
        return f"; {spelled!r} does not say which angle, write rad/s, deg/s or rpm"
    if unit == "N*m/rad" and turned == 0:
        return f"; {spelled!r} does not say per which angle, write N*m/rad, N*m/deg or lbf*in/turn"
    return f"; {spelled!r} measures something else, an angle is too many or missing in it"


def spelling_hint(spelled: str, unit: str) -> str:
    """The likely cause of a wrong dimension, with the right spelling."""
    if "number_meter" in spelled:
        return "; pint reads 'Nm' as a textile unit, newton metre is 'N*m'"
    mass = _MASS.search(spelled)
    if mass is not None:
        right = _MASS.sub(lambda m: _MASS_TO_FORCE[m[0]], spelled)
        candidate = _unit(right)
        target = _registry().parse_units("dimensionless" if unit == "1" else unit)
        if candidate is not None and candidate.dimensionality == target.dimensionality:
            return f"; {mass[0]} is a mass here, the force is written {right!r}"
    return f"; {spelled!r} measures something else"


_EXAMPLES = {
    "m": "0.12 m",
    "kg": "2.5 kg",
    "N": "40 N",
    "N/m": "310 N/m",
    "N*m": "2 N*m",
    "N*m/rad": "5 N*m/rad",
    "rad": "30 deg",
    "rad/s": "90 deg/s",
    "m/s**2": "9.81 m/s^2",
    "N*m/A": "0.05 N*m/A",
    "ohm": "0.6 ohm",
    "A": "4 A",
    "J": "20 J",
    "1": "0.8",
}


def _example(unit: str) -> str:
    return _EXAMPLES.get(unit, f"1 {unit}")


def described(unit: str) -> str:
    """The wanted unit, as an error message says it."""
    return "a pure number" if unit == "1" else f"a value in {unit}"


def quantity(value: Any, unit: str) -> Any:
    """``value`` (SI, a float or array) as a quantity of pint's application registry in ``unit``.

    Parameters
    ----------
    value
        A result of this library: a float or an array in SI units.
    unit
        Its unit, in pint's spelling, such as ``"N*m"``; the quantity can then convert itself.

    Returns
    -------
    pint.Quantity

    Raises
    ------
    UnitError
        ``unit`` is unknown, or not a coherent SI unit: the numbers would be wrong in any other.

    Examples
    --------
    >>> quantity(2.0, "N*m").m_as("N*mm")
    2000.0
    """
    known = _unit(unit) if unit != "1" else _registry().dimensionless
    if known is None:
        raise UnitError(f"unit must be an SI unit, got {unit!r}; it is not a unit that is known")
    if not math.isclose(_registry().Quantity(1.0, known).to_base_units().magnitude, 1.0, rel_tol=1e-12):
        raise UnitError(f"unit must be an SI unit, got {unit!r}; results are SI, so convert the quantity afterwards")
    import pint

    application: Any = pint.application_registry
    return application.get().Quantity(value, str(known))

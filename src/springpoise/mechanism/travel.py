"""The ranges of the joints, and poses spread over them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from springpoise import units
from springpoise.errors import InputError
from springpoise.linkages.protocol import Linkage

if TYPE_CHECKING:
    from numpy.typing import NDArray

__all__ = ["joint_units_of", "range_or_turn", "spread", "travel_of"]

NAME = "Mechanism.travel"


def joint_units_of(linkage: Linkage) -> tuple[str, ...]:
    """Unit of each joint's travel, ``"rad"`` or ``"m"``; rad where the linkage does not say."""
    own: Any = getattr(linkage, "joint_units", None)
    return ("rad",) * linkage.joint_count if own is None else own


def travel_of(value: Any, kinds: Sequence[str]) -> Any:
    """One range, or for several joints a tuple with a range each; None for not given.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Another number of ranges than joints, an empty range, angles that look like degrees, a
        length for a revolute joint or an angle for a prismatic one.
    """
    if value is None:
        return None
    nested = value.tolist() if isinstance(value, np.ndarray) and value.ndim == 2 else value
    several = isinstance(nested, Sequence) and bool(nested) and all(map(_is_range, nested))
    if not several:
        if len(kinds) > 1:
            raise InputError(f"{NAME} must be a range for each of {len(kinds)} joints, got {value!r}")
        return _range(value, kinds[0])
    if len(nested) != len(kinds):
        raise InputError(f"{NAME} must be a range for each of {len(kinds)} joints, got {len(nested)}")
    ranges = tuple(None if one is None else _range(one, unit) for one, unit in zip(nested, kinds, strict=True))
    return ranges if len(kinds) > 1 else ranges[0]


def _is_range(item: Any) -> bool:
    return item is None or (isinstance(item, Sequence | np.ndarray) and not isinstance(item, str))


def _range(value: Any, unit: str) -> tuple[Any, Any]:
    low, high = units.radian_pair(value, NAME) if unit == "rad" else units.metre_pair(value, NAME)
    if not low < high:
        raise InputError(f"{NAME} must be (lower, higher) {unit}, got {(low, high)}")
    return low, high


def range_or_turn(travel: Any, unit: str) -> tuple[float, float]:
    """The range, or a full turn of a revolute joint that has none.

    Raises
    ------
    InputError
        A prismatic joint without a range.
    """
    if travel is not None:
        return travel[0], travel[1]
    if unit == "m":
        raise InputError(f"{NAME} must be given for a prismatic joint, got None")
    return -math.pi, math.pi


def spread(count: int, dimensions: int) -> NDArray[np.float64]:
    """Points that fill the unit box evenly: multiples of irrational steps, modulo one.

    Roberts, M. (2018), the generalised golden ratio: steps 1/φ, 1/φ², ... with φ^(d+1) = φ + 1.
    """
    ratio = 2.0
    for _ in range(64):
        ratio = (1.0 + ratio) ** (1.0 / (dimensions + 1))
    steps = ratio ** -np.arange(1.0, dimensions + 1)
    return np.asarray((0.5 + np.arange(count)[:, None] * steps) % 1.0)

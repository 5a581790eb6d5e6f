"""What a file leaves open, and how it is to be found: one class a method."""

from __future__ import annotations

import math
from typing import Any, ClassVar

import attrs
import numpy as np
from numpy.typing import NDArray

from springpoise import units
from springpoise.balance import PulleyRoute
from springpoise.errors import InputError
from springpoise.guard.amounts import OfPeak, text_of_torque_or_share, torque_or_share
from springpoise.guard.solving.methods import MethodsRequest

__all__ = ["DesignRequest", "FitRequest", "SineRequest", "Steps", "StockRequest"]

MOST_STEPS = 400
"""More steps than anyone drills holes for; a search grows with their product."""

MOST_POSES = 10_000
MOST_SPRINGS = 1000
MOST_SKEWS = 100


def _whole(value: Any, name: str, highest: int, lowest: int = 1) -> int:
    if isinstance(value, bool) or not isinstance(value, int) or not lowest <= value <= highest:
        raise InputError(f"{name} must be a whole number from {lowest} to {highest}, got {value!r}")
    return value


def _steps(value: Any) -> int:
    return _whole(value, "Steps.steps", MOST_STEPS)


def _poses(value: Any) -> int:
    return _whole(value, "DesignRequest.poses", MOST_POSES, lowest=2)


def _count(value: Any) -> int:
    return _whole(value, "SineRequest.count", MOST_SPRINGS)


def _counts(value: Any) -> tuple[int, ...]:
    counts = tuple(_whole(item, "StockRequest.counts", MOST_SPRINGS) for item in value)
    if not counts or len(counts) > 100:
        raise InputError(f"StockRequest.counts must be 1 to 100 whole numbers, got {len(counts)}")
    return counts


def _skews(value: Any) -> tuple[float, ...]:
    listed = (value,) if isinstance(value, int | float | str) else tuple(value)
    skews = tuple(units.radian(item, "StockRequest.attach_skews") for item in listed)
    if not skews or len(skews) > MOST_SKEWS:
        raise InputError(f"StockRequest.attach_skews must be 1 to {MOST_SKEWS} angles in rad, got {len(skews)}")
    out = [skew for skew in skews if not abs(skew) <= math.pi]
    if out:
        raise InputError(f"StockRequest.attach_skews must be between -pi and pi rad, got {out[0]:g}; degrees?")
    return skews


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class Steps:
    """Evenly spaced lengths to try.

    Raises
    ------
    InputError, UnitError
        A range that does not rise, or a number of steps out of range.

    Examples
    --------
    >>> Steps(first="50 mm", last="60 mm", steps=3).values.round(4).tolist()
    [0.05, 0.055, 0.06]
    """

    first: float = attrs.field(converter=units.metre, validator=units.positive, metadata={"key": "from"})
    """Least length [m], > 0; in files ``from``."""
    last: float = attrs.field(converter=units.metre, validator=units.positive, metadata={"key": "to"})
    """Greatest length [m], not below ``first``; in files ``to``."""
    steps: int = attrs.field(converter=_steps)
    """How many lengths, both ends included, from 1 to 400."""

    def __attrs_post_init__(self) -> None:
        if self.last < self.first or (self.steps == 1 and self.last != self.first):
            rule = ">= first" if self.last < self.first else "first, where there is one step,"
            raise InputError(f"Steps.last must be {rule} ({self.first:g}) m, got {self.last:g}")

    @property
    def values(self) -> NDArray[np.float64]:
        """The lengths [m]."""
        return np.linspace(self.first, self.last, self.steps)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class DesignRequest:
    """What all requests share.

    Raises
    ------
    InputError, UnitError
        A value out of range or of another dimension.
    """

    method: ClassVar[str]
    """How a file names the method."""

    payload: str | None = None
    """Name of the payload that is on the arm while it is balanced; None for none."""
    poses: int = attrs.field(default=181, converter=_poses)
    """How many evenly spaced poses over the travel are looked at."""
    compare: MethodsRequest | None = None
    """Ways of balancing to be put beside the design; None for none."""


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class StockRequest(DesignRequest):
    """The best part of a stock list, with its mount."""

    method: ClassVar[str] = "stock"

    stock: str
    """Path of the stock list, a CSV file, relative to the mechanism file."""
    attach_radii: Steps
    """Distances from pivot to attachment on the arm to try."""
    anchor_heights: Steps
    """Distances from pivot to anchor to try."""
    counts: tuple[int, ...] = attrs.field(default=(1, 2), converter=_counts)
    """Numbers of equal springs side by side to try."""
    pulley: PulleyRoute | None = None
    """The pulley that springs hide behind; None for springs straight from anchor to arm."""
    anchor_angle: float = attrs.field(default=math.pi / 2, converter=units.radian)
    """Direction from pivot to anchor [rad]; by default straight up."""
    attach_skews: tuple[float, ...] = attrs.field(default=(0.0,), converter=_skews, metadata={"unit": "rad"})
    """Angles to try by which the attachment is turned from where a zero free length would want it [rad]."""
    residual_limit: float | OfPeak | None = attrs.field(
        default=None, converter=attrs.converters.optional(torque_or_share), metadata={"write": text_of_torque_or_share}
    )
    """Greatest worst residual that counts as a fit [N·m], or a share of the peak gravity torque; None for none."""
    least_margin: float = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative)
    """Distance that every spring keeps from both ends of its lengths [m], >= 0."""
    resolution: float = attrs.field(default=1e-4, converter=units.metre, validator=units.positive)
    """Steps to which coordinates and cable are rounded [m], > 0; a spring that then breaks limit or margin does not fit."""


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class SineRequest(DesignRequest):
    """A spring of zero free length that balances every angle; two of its three sizes are given."""

    method: ClassVar[str] = "sine"

    rate: float | None = attrs.field(default=None, converter=units.newton_per_metre)
    """Rate of each spring [N/m]; None to find it."""
    attach_radius: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Distance from pivot to attachment on the arm [m]; None to find it."""
    anchor_height: float | None = attrs.field(default=None, converter=units.optional_metre)
    """Distance from pivot to anchor [m]; None to find it."""
    anchor_angle: float = attrs.field(default=math.pi / 2, converter=units.radian)
    """Direction from pivot to anchor [rad]; by default straight up."""
    count: int = attrs.field(default=1, converter=_count)
    """How many equal springs side by side."""

    def __attrs_post_init__(self) -> None:
        given = [n for n in ("rate", "attach_radius", "anchor_height") if getattr(self, n) is not None]
        if len(given) != 2:
            raise InputError(
                f"SineRequest must have two of rate, attach_radius, anchor_height, got {', '.join(given) or 'none'}"
            )


def _norm(value: Any) -> str:
    if value not in ("minimax", "rms"):
        raise InputError(f"FitRequest.norm must be 'minimax' or 'rms', got {value!r}")
    return str(value)


@attrs.frozen(kw_only=True, field_transformer=units.named_fields)
class FitRequest(DesignRequest):
    """The best of what springs leave ``"open"``, their mounts being fixed."""

    method: ClassVar[str] = "fit"

    norm: str = attrs.field(default="minimax", converter=_norm)
    """What is made least: ``"minimax"``, the worst residual, or ``"rms"``."""

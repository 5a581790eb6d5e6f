"""The comparison of methods that a design may ask for, and where the design itself stands in it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import attrs

from springpoise import units
from springpoise.balance import MethodAssumptions, MethodComparison, Residual, compare_methods
from springpoise.errors import InputError, InputTypeError
from springpoise.guard.amounts import percent
from springpoise.guard.builds.widths import read_width
from springpoise.guard.format.place import Place, nearest
from springpoise.mechanism import Mechanism, SpringMount
from springpoise.paths import Cable, JointTravel, Spool, Straight
from springpoise.springs import (
    CompressionSpring,
    ConstantForceSpring,
    GasSpring,
    OffsetSpring,
    RubberTube,
    ScaledSpring,
    ZeroLengthSpring,
)

__all__ = ["METHODS", "MethodsRequest", "check_compare", "compared", "method_of", "standing"]

METHODS = {
    "pulley": "spring on pulley",
    "straight": "straight spring",
    "torsion": "torsion spring",
    "gas": "gas spring",
    "rubber": "straight rubber",
    "rubber pulley": "rubber on pulley",
    "counterweight": "counterweight",
    "constant force": "constant force",
    "spool": "shaped spool",
}
"""The methods that can be compared, each with what the comparison calls it."""


def _bounds(value: Any, unit: str, name: str) -> Any:
    if value is None:
        return None
    low, high = units.pair(value, unit, name)
    if not (isinstance(low, float) and isinstance(high, float)) or low > high or (unit == "m" and not low > 0.0):
        raise InputError(
            f"{name} must be (least, greatest){' above 0' if unit == 'm' else ''} {unit}, got {(low, high)}"
        )
    return low, high


def _attach_radius(value: Any) -> Any:
    return _bounds(value, "m", "MethodsRequest.attach_radius")


def _anchor_height(value: Any) -> Any:
    return _bounds(value, "m", "MethodsRequest.anchor_height")


def _attach_skew(value: Any) -> Any:
    return _bounds(value, "rad", "MethodsRequest.attach_skew")


def _methods(value: Any) -> Any:
    if value is None:
        return None
    if isinstance(value, str) or not hasattr(value, "__iter__"):
        raise InputTypeError(f"MethodsRequest.methods must be a list of names, got {value!r}")
    names = tuple(value)
    for name in names:
        if name not in METHODS:
            raise InputError(f"MethodsRequest.methods must be names of methods, got {name!r}{nearest(name, METHODS)}")
    if not names:
        raise InputError("MethodsRequest.methods must be at least one method, got none")
    return tuple(dict.fromkeys(names))


def _norm(value: Any) -> str:
    if value not in ("minimax", "rms"):
        raise InputError(f"MethodsRequest.norm must be 'minimax' or 'rms', got {value!r}")
    return str(value)


def _kelvins(value: Any) -> float:
    if isinstance(value, str) and not value.strip().endswith("K"):  # "20 degC" is a temperature
        raise InputError(f"MethodsRequest.warming must be a difference such as '20 K', got {value!r}")
    warming = units.scalar_si(value, "K", "MethodsRequest.warming")
    if not isinstance(warming, float):
        raise InputError(f"MethodsRequest.warming must be a single value in K, got {value!r}")
    return warming


def _change(value: Any) -> float:
    change = units.scalar_si(value, "1", "MethodsRequest.payload_change")
    if not isinstance(change, float) or not change > -1.0:
        raise InputError(f"MethodsRequest.payload_change must be > -100 %, got {value!r}")
    return change


def _text_of_change(value: float) -> str | float:
    text = f"{100.0 * value:.10g} %"
    return text if units.parse(text, "1") == value else value


def _read_text(value: Any, place: Place) -> Any:
    return place.text(value)


@attrs.frozen(kw_only=True)
class MethodsRequest:
    """Ways of balancing the arm that are to be put beside the design.

    The arm is the design's: with its payload, friction, travel and poses, and without the springs
    that are to be found.

    Raises
    ------
    InputError, InputTypeError, UnitError
        Bounds or options out of range, or an unknown method.
    """

    attach_radius: tuple[float, float] | None = attrs.field(
        default=None,
        converter=_attach_radius,
        metadata={"unit": "m"},
    )
    """Bounds (least, greatest) of the distance from pivot to attachment [m], > 0; None for a stock search's own."""
    anchor_height: tuple[float, float] | None = attrs.field(
        default=None,
        converter=_anchor_height,
        metadata={"unit": "m"},
    )
    """Bounds of the distance from pivot to anchor [m], > 0; None for a stock search's own."""
    attach_skew: tuple[float, float] | None = attrs.field(
        default=None,
        converter=_attach_skew,
        metadata={"unit": "rad"},
    )
    """Bounds of the angle by which attachments may be turned [rad]; None for 20 deg to each side."""
    methods: tuple[str, ...] | None = attrs.field(default=None, converter=_methods)
    """Names of the methods to compare, as for ``balance.compare_methods``; None for all."""
    norm: str = attrs.field(default="minimax", converter=_norm)
    """What is made least: ``"minimax"``, the worst residual, or ``"rms"``."""
    warming: float = attrs.field(
        default=20.0, converter=_kelvins, metadata={"read": _read_text, "write": lambda value: f"{value!r} K"}
    )
    """Temperature rise of the column that says what it does to the residual [K]."""
    payload_change: float = attrs.field(
        default=0.1, converter=_change, metadata={"read": read_width, "write": _text_of_change}
    )
    """Relative change of the whole weight of the last column [1], > -1; in files such as ``"10 %"``."""
    assumptions: MethodAssumptions | None = None
    """Properties of springs, pulleys and rubber; None for usual ones."""


def check_compare(design: Any, mounts: Sequence[SpringMount], opened: Sequence[Any]) -> None:
    """Whether the comparison that a design asks for can be made.

    Raises
    ------
    InputError
        Springs that are given and stay, or bounds that nothing states.
    """
    request: MethodsRequest | None = None if design is None else design.compare
    if request is None:
        return
    given = [mount for i, mount in enumerate(mounts) if i not in {one.place for one in opened}]
    if given:
        names = ", ".join(mount.name or "one without a name" for mount in given)
        raise InputError(
            "design.compare must be of an arm whose springs are all to be found, since each method balances it alone, "
            f"got {len(given)} that {'is' if len(given) == 1 else 'are'} given ({names}); leave the table out"
        )
    missing = [name for name, value in bounds_of(design, request).items() if value is None]
    if missing:
        raise InputError(
            f'design.compare must have {" and ".join(missing)}, bounds such as ["80 mm", "180 mm"]; '
            'only a design with method = "stock" has ranges that can stand for them'
        )


def bounds_of(design: Any, request: MethodsRequest) -> dict[str, tuple[float, float] | None]:
    """The bounds that are stated, or else those of the ranges that a stock search tries."""
    found = {}
    for name, ranges in (("attach_radius", "attach_radii"), ("anchor_height", "anchor_heights")):
        steps = getattr(design, ranges, None)
        stated = getattr(request, name)
        found[name] = stated if stated is not None or steps is None else (steps.first, steps.last)
    return found


def compared(design: Any, loaded: Mechanism) -> MethodComparison | None:
    """The comparison that a design asks for, on its arm with its payload; None where it asks for none.

    Raises
    ------
    InputError
        An arm that needs no balance, or that is no arm.
    """
    request: MethodsRequest | None = design.compare
    if request is None:
        return None
    skew = {} if request.attach_skew is None else {"attach_skew": request.attach_skew}
    try:
        return compare_methods(
            loaded.with_springs(()),
            **bounds_of(design, request),
            **skew,
            over=loaded.poses(design.poses),
            methods=request.methods,
            norm=request.norm,  # type: ignore[arg-type]
            assumptions=request.assumptions,
            warming=request.warming,
            payload_change=request.payload_change,
        )
    except InputError as error:
        raise InputError(f"compare: {error}") from error


def method_of(mounts: Sequence[SpringMount]) -> str | None:
    """The method by which springs balance; None where they are of none, or of several."""
    found = {_method(mount) for mount in mounts}
    return found.pop() if len(found) == 1 else None


def _method(mount: SpringMount) -> str | None:
    spring: Any = mount.spring
    while isinstance(spring, ScaledSpring | OffsetSpring):
        spring = spring.spring
    path = mount.path
    if isinstance(path, JointTravel):
        return "torsion"
    if isinstance(path, Spool):
        return "constant force" if isinstance(spring, ConstantForceSpring) else "spool"
    behind = isinstance(path, Cable) and len(path.along) > 2
    if not behind and not isinstance(path, Straight | Cable):
        return None
    if isinstance(spring, RubberTube):
        return "rubber pulley" if behind else "rubber"
    if isinstance(spring, GasSpring):
        return None if behind else "gas"
    if isinstance(spring, ConstantForceSpring | CompressionSpring):
        return None
    return "pulley" if behind or isinstance(spring, ZeroLengthSpring) else "straight"


def standing(found: MethodComparison, mounts: Sequence[SpringMount] | str, after: Residual | None) -> str:
    """Where a design stands among the methods, in words.

    Parameters
    ----------
    mounts
        Its springs; where nothing fits, the method by which it was to balance.
    after
        What it leaves over; None where nothing fits.
    """
    method = mounts if isinstance(mounts, str) else method_of(mounts)
    ideal = not isinstance(mounts, str) and any(isinstance(mount.spring, ZeroLengthSpring) for mount in mounts)

    def left(one: Residual) -> str:
        return percent(one.rms_fraction if found.norm == "rms" else one.worst_fraction)

    if method is None:
        return f"The design is none of these, or several; it leaves {left(after)}." if after else ""
    subject = f"The design is a {METHODS[method]}"
    if ideal:
        subject = f"The design's spring of zero free length acts as a {METHODS[method]}"
    own = f"The parts found leave {left(after)}." if after else "No part of the stock list fits."
    if method not in [row.method for row in found.rows]:
        return f"{subject}, which was not compared. {own}"
    row = found.row(method)
    if row.figures is None:
        return f"{subject}, which cannot be sized between these bounds. {own}"
    rank, count = found.ranking.index(method) + 1, len(found.ranking)
    place = "the only one here" if count == 1 else f"number {rank} of {count} here"
    return f"{subject}, {place}. Of usual parts between these bounds it would leave {left(row.figures.residual)}. {own}"

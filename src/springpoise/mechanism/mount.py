"""A spring in its place."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, is_zero, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.gravity import STANDARD_GRAVITY
from springpoise.linkages.body import Point
from springpoise.linkages.protocol import Linkage, PointMass
from springpoise.paths.protocol import Path, friction_gradient_of
from springpoise.springs.protocol import Spring, hysteresis_of, spring_like, working_range_of

if TYPE_CHECKING:
    from springpoise.mechanism.states import SpringState

__all__ = ["SpringMount"]


def _spring(value: Any) -> Any:
    return spring_like(value, "SpringMount.spring")


def _path(value: Any) -> Any:
    missing = [name for name in ("length", "gradient") if not callable(getattr(value, name, None))]
    if missing or isinstance(value, type):
        what = f"the class {value.__name__}, not an object of it" if isinstance(value, type) else repr(value)
        lacking = f"; it lacks {', '.join(missing)}" if missing else ""
        raise InputTypeError(f"SpringMount.path must have length and gradient methods, got {what}{lacking}")
    return value


def _count(value: Any) -> Any:
    if isinstance(value, bool) or not isinstance(value, int | np.integer) or value < 1:
        raise InputTypeError(f"SpringMount.count must be a whole number >= 1, got {value!r}")
    return int(value)


@attrs.frozen(field_transformer=units.named_fields)
class SpringMount:
    """One spring, or several equal ones side by side, along one path.

    Raises
    ------
    InputError, InputTypeError, UnitError
        An object that lacks a spring's or a path's methods, or a count that is not a whole
        number from 1 on.
    """

    spring: Spring = attrs.field(converter=_spring)
    """Any object with a spring's three methods."""
    path: Path = attrs.field(converter=_path)
    """Any object with a path's two methods."""
    count: int = attrs.field(default=1, converter=_count, kw_only=True)
    """How many equal springs act side by side, >= 1."""
    rigid_length: Carrier = attrs.field(default=0.0, converter=units.metre, kw_only=True)
    """Part of the path that does not stretch: cable, rod, hook extension [m].

    The spring's own length is the path's length less this. Negative for a spring that is longer
    than its path, as a compression spring seated behind a point is.
    """
    moving_mass: Carrier = attrs.field(
        default=0.0, converter=units.kilogram, validator=units.not_negative, kw_only=True
    )
    """Mass of one spring that is carried between the ends of a straight path [kg]: half of it weighs on each end.

    A spring that lies on the ground behind a pulley moves nothing and needs none.
    """
    name: str | None = attrs.field(default=None, kw_only=True)
    """What the mount is called in tables and errors; None for its number."""

    def __attrs_post_init__(self) -> None:
        if not is_zero(self.moving_mass) and not hasattr(self.path, "ends"):
            raise InputError(
                f"SpringMount.moving_mass must be 0 kg on a {type(self.path).__name__}, got {self.moving_mass}; "
                "put the mass that moves there into a Body"
            )

    def masses(self) -> tuple[PointMass, ...]:
        """The springs' own weight, as point masses at the ends of the path."""
        if is_zero(self.moving_mass):
            return ()
        ends: tuple[Point, Point] = self.path.ends  # type: ignore[attr-defined]
        return tuple(PointMass(0.5 * self.count * self.moving_mass, end) for end in ends)

    def hanging_stretch(self, x: Carrier, gravity: float = STANDARD_GRAVITY) -> Carrier:
        """How much longer the spring hangs by its own weight at length ``x`` [m]: half its weight over its stiffness.

        Infinite where the spring is slack.
        """
        stiffness = self.ask("stiffness", x)
        xp = namespace(stiffness)
        stretch = 0.5 * self.moving_mass * gravity / xp.where(stiffness > 0.0, stiffness, 1.0)
        return xp.where(stiffness > 0.0, stretch, math.inf)

    def spring_length(self, linkage: Linkage, q: Carrier) -> Carrier:
        """The spring's own length [m], or angle [rad]."""
        length = self.path.length(linkage, q)
        return length if is_zero(self.rigid_length) else length - self.rigid_length

    def ask(self, method: str, x: Carrier, **options: Any) -> Any:
        """What one of the spring's methods gives at ``x``, which may be an array or a recorded variable.

        Raises
        ------
        InputTypeError
            The method can only do floats; its own errors on floats come through as they are.
        """
        try:
            return getattr(self.spring, method)(x, **options)
        except (TypeError, ValueError, AttributeError) as error:
            if isinstance(x, float):
                raise
            raise InputTypeError(
                f"{type(self.spring).__name__}.{method} must take arrays and recorded variables as well as floats, got "
                f"{type(error).__name__}: {error}; use NumPy's functions or those of springpoise.carriers.namespace(x), "
                "and where() instead of if"
            ) from error

    def torques(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the torque that all springs of the mount exert [N·m]."""
        load = self.ask("load", self.spring_length(linkage, q))
        return tuple(-self.count * (load * gradient) for gradient in self.path.gradient(linkage, q))

    def energy(self, linkage: Linkage, q: Carrier) -> Carrier:
        """Energy stored in all springs of the mount [J]."""
        return self.count * self.ask("energy", self.spring_length(linkage, q))

    def friction_bands(self, linkage: Linkage, q: Carrier) -> tuple[Carrier, ...]:
        """For each joint, the half-width of the torque band from pulleys and hysteresis [N·m]."""
        x = self.spring_length(linkage, q)
        load, hysteresis = self.ask("load", x), hysteresis_of(self.spring, x)
        gradients = self.path.gradient(linkage, q)
        rubbing = friction_gradient_of(self.path, linkage, q)
        return tuple(
            self.count * (_abs(load) * rub + _abs(hysteresis) * _abs(gradient))
            for gradient, rub in zip(gradients, rubbing, strict=True)
        )

    def state(self, linkage: Linkage, q: Carrier, name: str) -> SpringState:
        """Length, load, energy and margin of one spring of the mount."""
        from springpoise.mechanism.states import SpringState

        x = self.spring_length(linkage, q)
        low, high = working_range_of(self.spring)
        margin = namespace(x, low, high).minimum(x - low, high - x)
        return SpringState(name, x, self.ask("load", x), self.ask("energy", x), margin)


def _abs(value: Carrier) -> Carrier:
    return namespace(value).abs(value)

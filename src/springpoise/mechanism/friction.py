"""Friction in the pivot."""

from __future__ import annotations

import attrs

from springpoise import units
from springpoise.carriers import Carrier
from springpoise.errors import InputError

__all__ = ["Friction"]


@attrs.frozen(field_transformer=units.named_fields)
class Friction:
    """Dry friction of a joint: a constant part, and a part that grows with the pivot's load.

    The load-dependent part is that of a journal: ``pivot_friction · pivot_radius · pivot load``.

    Raises
    ------
    InputError, UnitError
        A negative value or a wrong dimension, or a pivot friction without a pivot radius.
    """

    coulomb: Carrier = attrs.field(default=0.0, converter=units.newton_metre, validator=units.not_negative)
    """Constant friction torque of the joint [N·m], >= 0."""
    pivot_friction: Carrier = attrs.field(
        default=0.0, converter=units.number, validator=units.not_negative, kw_only=True
    )
    """Friction coefficient of the pivot's bearing [1], >= 0."""
    pivot_radius: Carrier = attrs.field(default=0.0, converter=units.metre, validator=units.not_negative, kw_only=True)
    """Radius at which the pivot's bearing rubs [m], >= 0."""

    def __attrs_post_init__(self) -> None:
        if self.depends_on_load and isinstance(self.pivot_radius, float) and self.pivot_radius == 0.0:
            raise InputError("Friction.pivot_radius must be > 0 m where pivot_friction is given, got 0.0")

    @property
    def depends_on_load(self) -> bool:
        """Whether the pivot's load counts."""
        return not (isinstance(self.pivot_friction, float) and self.pivot_friction == 0.0)

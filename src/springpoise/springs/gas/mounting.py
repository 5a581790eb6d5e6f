"""Which way up a gas spring hangs: rod down, so that oil stays on its seal."""

from __future__ import annotations

import math
import warnings
from typing import Any

import attrs
import numpy as np

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.warnings import RodUpWarning
from springpoise.tables import degrees, facts, millimetres
from springpoise.units import ScalarLike

__all__ = ["WIDEST_TILT", "GasMounting", "check_gas_mounting", "rod_down_margin"]

WIDEST_TILT = math.radians(60.0)
"""Greatest angle between the rod and straight down [rad] (makers' general technical notes)."""


@attrs.frozen
class GasMounting:
    """How a gas spring is mounted over a travel."""

    margin: float
    """Least margin to ``widest_tilt`` over the travel [rad]; negative means rod too far from straight down."""
    length_at_worst: float
    """Distance between the end fittings there [m]."""
    margin_closed: float
    """The margin at the shortest distance between the end fittings [rad], where it counts most."""
    widest_tilt: float
    """Greatest permissible angle between the rod and straight down [rad]."""

    @property
    def status(self) -> str:
        """One sentence on what was found."""
        if self.margin >= 0.0:
            return "rod down over the whole travel"
        if self.margin_closed >= 0.0:
            return "rod down when closed, too far from straight down elsewhere"
        return "rod not down when closed: the seal runs dry; turn the spring end for end if that is possible"

    def __str__(self) -> str:
        rows = [
            ("status", self.status),
            (
                "least margin",
                f"{degrees(self.margin)}, at {millimetres(self.length_at_worst)} between the end fittings",
            ),
            ("margin when closed", degrees(self.margin_closed)),
            ("widest tilt", degrees(self.widest_tilt)),
        ]
        return "gas spring mounting\n" + facts(rows)


def rod_down_margin(
    cylinder_height: Carrier, rod_height: Carrier, length: Carrier, widest_tilt: Carrier = WIDEST_TILT
) -> Carrier:
    """Margin [rad] of the angle between the rod and straight down to the widest that is permitted.

    Parameters
    ----------
    cylinder_height, rod_height
        Heights of the end fittings at the cylinder and at the rod, above any one level [m].
    length
        Distance between the end fittings [m], > 0.
    widest_tilt
        Greatest permissible angle [rad].

    Examples
    --------
    >>> round(rod_down_margin(0.4, 0.0, 0.4), 6), round(rod_down_margin(0.0, 0.4, 0.4), 6)
    (1.047198, -2.094395)
    """
    xp = namespace(cylinder_height, rod_height, length)
    down = (cylinder_height - rod_height) / length
    return widest_tilt - xp.acos(xp.minimum(xp.maximum(down, -1.0), 1.0))


def check_gas_mounting(
    cylinder_height: Any, rod_height: Any, length: Any, *, widest_tilt: ScalarLike = WIDEST_TILT
) -> GasMounting:
    """Check a gas spring's mounting over a travel, and warn where its rod is not down.

    The seal must stay wetted by the oil in the spring, so the rod points down, within about 60
    degrees, above all when the spring is closed or stored (makers' general technical notes).

    Parameters
    ----------
    cylinder_height, rod_height
        Heights of the end fittings at the cylinder and at the rod [m], over the travel.
    length
        Distances between them [m], > 0, over the travel.
    widest_tilt
        Greatest permissible angle between the rod and straight down [rad].

    Returns
    -------
    GasMounting

    Warns
    -----
    RodUpWarning
        The rod is farther from straight down than permitted, at some pose.

    Raises
    ------
    InputError, UnitError
        Lengths that are not positive, or shorter than the difference of the heights.

    Examples
    --------
    >>> found = check_gas_mounting([0.50, 0.55], [0.20, 0.10], [0.32, 0.48])
    >>> found.status
    'rod down over the whole travel'
    """
    widest = units.radian(widest_tilt, "widest_tilt")
    top, bottom, x = (
        np.atleast_1d(units.metre(value, name))
        for value, name in ((cylinder_height, "cylinder_height"), (rod_height, "rod_height"), (length, "length"))
    )
    top, bottom, x = np.broadcast_arrays(top, bottom, x)
    if not np.all(x > 0.0):
        raise InputError(f"length must be > 0 m, got {np.min(x):g}")
    rise = np.abs(top - bottom)
    if not np.all(rise <= x * (1.0 + 1e-9)):
        i = int(np.argmax(rise - x))
        raise InputError(f"length must be >= the difference of the heights ({rise.flat[i]:g}) m, got {x.flat[i]:g}")
    margins = rod_down_margin(top, bottom, x, widest)
    worst, closed = int(np.argmin(margins)), int(np.argmin(x))
    found = GasMounting(
        margin=float(margins.flat[worst]),
        length_at_worst=float(x.flat[worst]),
        margin_closed=float(margins.flat[closed]),
        widest_tilt=widest,
    )
    if found.margin < 0.0:
        warnings.warn(
            f"gas spring's rod is {degrees(widest - found.margin)} from straight down, {degrees(-found.margin)} beyond "
            f"the permitted {degrees(widest)}; {found.status}",
            RodUpWarning,
            stacklevel=2,
        )
    return found

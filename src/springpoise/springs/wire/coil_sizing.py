"""Wire and index for a load: the inverse of the stress formulas."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from springpoise import units
from springpoise.carriers import Carrier, namespace
from springpoise.errors import InputError
from springpoise.springs.wire.coil_checks import least_limit, lowest_of_cycle, single_positive
from springpoise.springs.wire.extension_margins import all_limits
from springpoise.springs.wire.fatigue import as_fatigue
from springpoise.springs.wire.material import WireMaterial

if TYPE_CHECKING:
    from springpoise.springs.wire.extension_coil import ExtensionCoil

__all__ = ["extension_from_load", "index_for_load", "smallest_wire"]

HALVINGS = 60


def smallest_wire(material: WireMaterial, carried: Callable[[float], float], what: str) -> float:
    """The thinnest wire [m] that carries a load, found segment by segment of the strength set.

    Parameters
    ----------
    material
        The wire; its strength may step down where a segment ends, and each segment is searched alone.
    carried
        Permitted over wanted load for a diameter [m]; it grows with the diameter inside a segment.
    what
        What is to be carried, for the error message.

    Raises
    ------
    InputError
        Nothing in the material's range carries it; with how much the thickest wire does.
    """
    best = 0.0
    for segment in material.strength.segments:
        low = segment.smallest * (1.0 + 2e-9) if segment.smallest > 0.0 else 1e-6
        high = segment.largest
        if carried(low) >= 1.0:
            return low
        best = max(best, carried(high))
        if carried(high) < 1.0:
            continue
        for _ in range(HALVINGS):
            middle = 0.5 * (low + high)
            if carried(middle) >= 1.0:
                high = middle
            else:
                low = middle
        return high
    thickest = material.strength.range[1]
    raise InputError(
        f"wire must carry {what}, and no {material.name} up to {thickest * 1e3:g} mm does; "
        f"the best carries {best:.3g} of it: a smaller index, a smaller factor or more springs side by side"
    )


def index_for_load(stress: Carrier, wire: Carrier, load: Carrier) -> Carrier:
    """The index at which a load just meets a stress with Bergsträsser's factor [1].

    ``a = S``, ``b = 8 F/(π d²)``, ``C = (2a - b)/(4b) + sqrt([(2a - b)/(4b)]² - 3a/(4b))``: the
    larger of two roots. NaN where the load is too great for the wire at any index.

    Parameters
    ----------
    stress
        Shear stress to be met [Pa]: a strength over its factor.
    wire
        Wire diameter [m].
    load
        Load [N], or its amplitude where the stress is an endurance limit.
    """
    ratio = stress * math.pi * wire * wire / (8.0 * load)
    half = (2.0 * ratio - 1.0) / 4.0
    return half + namespace(half).sqrt(half * half - 0.75 * ratio)


def extension_from_load(
    cls: type[ExtensionCoil],
    load: Any,
    *,
    index: Any,
    rate: Any,
    material: WireMaterial,
    initial_tension: Any,
    hook_bend_index: Any,
    hook_index: Any,
    safety: Any,
    fatigue: Any,
    lowest_load: Any,
) -> ExtensionCoil:
    """The extension coil of the thinnest wire whose body and hooks carry a load."""
    force = single_positive(units.newton(load, "load"), "load")
    judged = None if fatigue is None else as_fatigue(fatigue)
    low = lowest_of_cycle(lowest_load, "N", judged)
    tension = None if initial_tension is None else units.newton(initial_tension, "initial_tension")
    n, c = single_positive(safety, "safety"), single_positive(index, "index")
    loop = c if hook_index is None else single_positive(hook_index, "hook_index")
    bend = single_positive(hook_bend_index, "hook_bend_index")

    def carried(d: float) -> float:
        checks = all_limits(material, d, c * d, 0.5 * loop * d, 0.5 * bend * d, tension, fatigue=judged)
        return float(least_limit(checks, low, n)) / force

    d = smallest_wire(material, carried, f"a load of {force:g} N")
    return cls.from_rate(
        rate,
        wire=d,
        mean_diameter=c * d,
        material=material,
        initial_tension=tension,
        hook_radius=0.5 * loop * d,
        hook_bend_radius=0.5 * bend * d,
    )

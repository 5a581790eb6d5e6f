"""What a stock search says of springs that do not fit, in words that are true of them."""

from __future__ import annotations

import math

import numpy as np
import pytest

from springpoise import Arm, Body, Mechanism, balance
from springpoise.balance import PulleyRoute, Stock

AT = {"attach_radii": 0.08, "anchor_heights": 0.2, "counts": 1, "over": ["-30 deg", "0 deg", "30 deg"]}
LEAST, GREATEST = (math.sqrt(0.2**2 + 0.08**2 - 2 * 0.2 * 0.08 * sine) for sine in (0.5, -0.5))
"""Distance from anchor to attachment at both ends: cosine rule."""


@pytest.mark.parametrize(
    ("free", "longest", "reason", "short"),
    [
        (0.15, 0.4, "goes slack, or nearer to it than 60 mm", 0.06 - (LEAST - 0.15)),
        (0.1, 0.3, "stretched beyond its longest length, or nearer to it than 60 mm", 0.06 - (0.3 - GREATEST)),
    ],
)
def test_a_spring_that_fits_but_for_the_margin_is_not_called_slack_or_overstretched(free, longest, reason, short):
    arm = Arm(Body("2 kg", ("0.35 m", 0)))
    coil = Stock(parts=["coil"], rate=[800.0], free_length=[free], initial_tension=[8.0], longest=[longest])
    assert balance.search_stock(arm, coil, **AT).success
    found = balance.search_stock(arm, coil, **AT, least_margin="60 mm")
    assert found.rejected == {reason: 1}
    assert found.nearest_miss.lacks == f"{reason}, by {1e3 * short:.3g} mm"


@pytest.mark.parametrize(("aside", "leaves"), [("-20 mm", True), ("-300 mm", False)])
def test_a_cable_that_leaves_its_pulley_is_told(aside, leaves):
    """Over the top the attachment passes behind the pulley; there the cable from a spring close by comes off."""
    boom = Mechanism(Arm(Body("7 kg", ("0.72 m", "26 mm"))), travel=("-20 deg", "110 deg"))
    strong = Stock(parts=["coil"], rate=[2000.0], free_length=[0.2], initial_tension=[40.0], longest=[0.6])
    found = balance.search_stock(
        boom, strong, attach_radii=0.08, anchor_heights=0.16, counts=1,
        pulley=PulleyRoute(radius="15 mm", spring_end=(aside, "-500 mm")),
    )  # fmt: skip
    if not leaves:
        assert found.success
        assert np.all(found.mechanism.springs[0].path.wraps(boom.linkage, boom.poses(181))[0] > 0.0)
        return
    miss = found.nearest_miss
    assert miss.lacks.startswith("goes slack, by ")
    assert miss.lacks.endswith(" mm; its cable leaves the pulley at some poses")
    assert np.any(miss.mechanism.springs[0].path.wraps(boom.linkage, boom.poses(181))[0] == 0.0)
    assert miss.lacks in found.status

"""Gas springs of a mechanism: tilt of the rod by plane geometry, both ways round, and every complaint."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from springpoise import Arm, Body, Cable, Disc, GasSpring, Mechanism, Point, SpringMount, Straight, ZeroLengthSpring
from springpoise.errors import InputError
from springpoise.mechanism.gas_mounting import GasMount, check_gas_mounts
from springpoise.springs import OffsetSpring, RodUpWarning, ScaledSpring, in_parallel

GAS = GasSpring.from_forces(
    extending=(400, 540), compressing=(460, 612), offset="10 mm", stroke="200 mm", rod_diameter="8 mm",
    extended_length="500 mm",
)  # fmt: skip
PATH = Straight(Point("ground", (0.05, -0.35)), Point("arm", (0.15, 0.0)))


def arm(*mounts: SpringMount, gravity: tuple[float, float] = (0.0, -9.80665)) -> Mechanism:
    return Mechanism(Arm(Body(12, (0.4, 0))), springs=mounts, travel=(0.0, 0.7), gravity=gravity)


def tilt(q: float) -> float:
    """Angle between the line and straight down, seen from the arm to the ground."""
    x, y = 0.15 * math.cos(q) - 0.05, 0.15 * math.sin(q) + 0.35
    return abs(math.atan2(x, y))


def test_the_better_way_round_is_found_and_named() -> None:
    [found] = check_gas_mounts(arm(SpringMount(GAS, PATH, name="strut")))
    assert (found.name, found.rod, found.stated) == ("strut", "first", False)
    worst = max(tilt(q) for q in np.linspace(0.0, 0.7, 181))
    assert found.mounting.margin == pytest.approx(math.radians(60) - worst, abs=1e-12)
    assert found.mounting.margin_closed == pytest.approx(math.radians(60) - tilt(0.0), abs=1e-12)
    assert str(found).startswith(
        "gas spring 'strut', rod at the first point of its path, the better way round: rod down"
    )


def test_the_other_way_round_warns_by_how_much() -> None:
    with pytest.warns(
        RodUpWarning, match=r"'spring 1', rod at the last point of its path: rod not down when closed"
    ) as caught:
        [found] = check_gas_mounts(arm(SpringMount(GAS, PATH)), rod_at={"spring 1": "last"})
    least = min(tilt(q) for q in np.linspace(0.0, 0.7, 181))
    assert found.mounting.margin == pytest.approx(math.radians(60) - (math.pi - least), abs=1e-12)
    assert f"at its worst it is {math.degrees(math.pi - least):.2f} deg from straight down" in str(caught[0].message)
    assert f"{math.degrees(math.pi - least) - 60:.2f} deg beyond the permitted 60.00 deg" in str(caught[0].message)
    assert found.stated


@pytest.mark.filterwarnings("ignore::springpoise.springs.RodUpWarning")
def test_rigid_parts_move_the_fittings_along_the_line_and_turn_nothing() -> None:
    bare, shorter = (
        check_gas_mounts(arm(SpringMount(GAS, PATH, rigid_length=r)), rod_at=lambda name: "first")[0]
        for r in (0.0, 0.05)
    )
    assert shorter.mounting.margin == pytest.approx(bare.mounting.margin, abs=1e-12)
    assert shorter.mounting.length_at_worst == pytest.approx(bare.mounting.length_at_worst - 0.05, abs=1e-12)


def test_down_is_where_gravity_points() -> None:
    """Turned by a quarter, the spring lies: from 60 to 74 degrees past the permitted, less the 90 of the turn."""
    mount = SpringMount(GAS, PATH)
    with pytest.warns(RodUpWarning):
        [found] = check_gas_mounts(arm(mount, gravity=(9.80665, 0.0)))
    # Down is to the right: the arm's end, at the right of the anchor, is the lower one.
    assert found.rod == "last"
    leaning = [math.pi / 2 - tilt(q) for q in np.linspace(0.0, 0.7, 181)]
    assert found.mounting.margin == pytest.approx(math.radians(60) - max(leaning), abs=1e-12)
    assert check_gas_mounts(arm(mount, gravity=(0.0, 0.0))) == ()


def test_every_gas_spring_inside_a_mount_and_no_other() -> None:
    inside = in_parallel(GAS, OffsetSpring(GAS, by="20 mm"), ZeroLengthSpring(10.0))
    cable = Cable(
        Point("ground", (0, 0.3)), Disc(Point("ground", (0, 0.2)), radius=0.01, turn="cw"), Point("arm", (0.1, 0))
    )
    found = check_gas_mounts(
        arm(SpringMount(inside, PATH), SpringMount(ZeroLengthSpring(10.0), PATH), SpringMount(GAS, cable), SpringMount(ScaledSpring(GAS, 2.0), PATH))
    )  # fmt: skip
    assert [one.name for one in found] == ["spring 1", "spring 1", "spring 4"]
    assert all(isinstance(one, GasMount) for one in found)
    assert found[1].mounting.length_at_worst == pytest.approx(found[0].mounting.length_at_worst - 0.02)


def test_poses_and_the_widest_tilt_are_chosen() -> None:
    mechanism = arm(SpringMount(GAS, PATH))
    [found] = check_gas_mounts(mechanism, [0.1, 0.2], widest_tilt="20 deg")
    assert found.mounting.margin == pytest.approx(math.radians(20) - max(tilt(0.1), tilt(0.2)), abs=1e-12)
    with pytest.warns(RodUpWarning, match="beyond the permitted 5.00 deg"):
        check_gas_mounts(mechanism, widest_tilt="5 deg")


def test_what_is_refused() -> None:
    mechanism = arm(SpringMount(GAS, PATH))
    with pytest.raises(InputError, match=re.escape("rod_at of mount 'spring 1' must be 'first' or 'last', got 'top'")):
        check_gas_mounts(mechanism, rod_at={"spring 1": "top"})  # type: ignore[dict-item]


def test_poses_without_a_length_are_passed_over() -> None:
    assert check_gas_mounts(arm(SpringMount(GAS, PATH, rigid_length=0.9))) == ()
    [found] = check_gas_mounts(arm(SpringMount(GAS, PATH, rigid_length=0.4)))
    assert 0.0 < found.mounting.length_at_worst < 0.1

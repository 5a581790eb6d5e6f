"""Two versions held against each other."""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from pathlib import Path

import pytest

from springpoise import guard

Write = Callable[..., Path]


@pytest.fixture
def versions(written: Write) -> tuple[Path, Path]:
    """The second has its anchor 10 mm higher and less travel: torque grows by 5 % of 11.76 N·m · cos q."""
    old = written(name="old.poise.toml")
    new = written(
        ('at = ["0 m", "0.2 m"]', 'at = ["0 m", "0.21 m"]'), ('to = "75 deg"', 'to = "45 deg"'), name="new.poise.toml"
    )
    return old, new


def test_what_changed(versions: tuple[Path, Path]) -> None:
    found = guard.compare(*versions)
    assert found.poses == pytest.approx((math.radians(-60), math.radians(45)))
    changes = {change.what: change for change in found.changes}
    worst = changes["residual torque, worst"]
    assert worst.old == pytest.approx(0.0, abs=1e-9)
    assert worst.new == pytest.approx(0.05 * 11.76, rel=1e-4)
    assert worst.difference == pytest.approx(0.05 * 11.76, rel=1e-4)
    assert found.shift == pytest.approx(0.05 * 11.76, rel=1e-4)
    assert found.shift_at == pytest.approx(0.0, abs=math.radians(0.3))
    assert changes["residual torque, worst of peak"].new == pytest.approx(0.05, rel=1e-4)
    energy = [245 * (a * a + 0.12**2 + 2 * a * 0.12 * math.sin(math.radians(60))) for a in (0.2, 0.21)]
    assert (changes["stored energy"].old, changes["stored energy"].new) == pytest.approx(tuple(energy))
    assert changes["peak gravity torque"].difference == 0.0
    assert changes["main: stretch margin"].unit == "m"
    assert changes["peak gravity torque"] not in found.changed
    assert worst in found.changed
    assert found.old_balance == "balanced at every angle from -60.0 to 45.0 deg"
    assert found.new_balance == "balanced at no angle from -60.0 to 45.0 deg"


def test_as_text_and_as_json(versions: tuple[Path, Path]) -> None:
    found = guard.compare(*versions, payload="crate")
    text = str(found)
    assert "with payload 'crate'" in text
    assert "difference" in text
    assert max(map(len, text.splitlines()[1:-3])) <= 100
    data = json.loads(json.dumps(found.to_dict(), allow_nan=False))
    assert data["changes"][0]["what"] == "residual torque, worst"
    assert data["changes"][0]["old_Nm"] == pytest.approx(7.84, rel=1e-4)
    assert data["shift_Nm"] == pytest.approx(0.588, rel=1e-3)


def test_a_spring_that_is_new(versions: tuple[Path, Path], written: Write) -> None:
    other = written(('name = "main"', 'name = "other"'), name="other.poise.toml")
    changes = {change.what: change for change in guard.compare(versions[0], other).changes}
    assert changes["main: load of one"].new is None
    assert changes["main: load of one"].difference is None
    assert changes["other: load of one"].old is None
    assert changes["other: load of one"].to_dict()["old_N"] is None


def test_what_cannot_be_compared(versions: tuple[Path, Path], written: Write) -> None:
    apart = written(('from = "-60 deg"', 'from = "80 deg"'), ('to = "75 deg"', 'to = "90 deg"'), name="b.poise.toml")
    with pytest.raises(
        ValueError, match=r"old and new must have poses in common, got -60\.00 deg to 75\.00 deg and 80"
    ):
        guard.compare(versions[0], apart)
    with pytest.raises(ValueError, match="payload must be the name of one, got 'box'; known are crate"):
        guard.compare(*versions, payload="box")
    opened = written(('"0.245 N/mm"', '"open"'), name="c.poise.toml", behind='\n[design]\nmethod = "fit"\n')
    with pytest.raises(ValueError, match=r"c\.poise\.toml: must be complete to be compared, got springs that are left"):
        guard.compare(versions[0], opened)
    sine = '\n[design]\nmethod = "sine"\nattach_radius = "0.1 m"\nanchor_height = "0.2 m"\n'
    wanted = written(name="d.poise.toml", behind=sine)  # its springs are those that are given and stay
    with pytest.raises(
        ValueError, match=r"d\.poise\.toml: must be complete .* run the design and compare the file that"
    ):
        guard.compare(wanted, versions[0])

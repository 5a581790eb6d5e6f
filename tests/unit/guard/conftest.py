"""A small mechanism file that the tests change."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

LIFT = """\
# A comment at the top.
schema = 1
title = "lift" # a comment behind a value

[gravity]
magnitude = "9.8 m/s^2"

[arm]
length = "0.8 m"

[[arm.bodies]]
name = "boom"
mass = "3 kg"
com = ["0.4 m", "0 m"]

[travel]
from = "-60 deg"
to = "75 deg"

[friction]
coulomb = "0.2 N*m"

[[springs]]
name = "main"
count = 2

[springs.spring]
kind = "zero length"
rate = "0.245 N/mm" # bought

[springs.path]
kind = "straight"
first = { body = "ground", at = ["0 m", "0.2 m"] }
last = { body = "arm", at = ["0.12 m", "0 m"] }

[[payloads]]
name = "crate"
mass = "1 kg"

[actuator]
ratio = 50
efficiency = 0.8

[actuator.motor]
torque_constant = "0.05 N*m/A"
resistance = "0.5 ohm"

[[limits]]
what = "residual torque"
at_most = "3 %"
"""


@pytest.fixture
def lift() -> str:
    """The text itself."""
    return LIFT


@pytest.fixture
def written(tmp_path: Path) -> Callable[..., Path]:
    """Writes the file, with replacements (old, new) each of which has to occur."""

    def write(*changes: tuple[str, str], name: str = "lift.poise.toml", behind: str = "") -> Path:
        text = LIFT
        for old, new in changes:
            assert old in text, old
            text = text.replace(old, new)
        file = tmp_path / name
        file.write_text(text + behind, encoding="utf-8")
        return file

    return write

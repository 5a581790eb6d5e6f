"""What an import costs, and who may know whom."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

import springpoise

PACKAGE = Path(springpoise.__file__).parent
HEAVY = ["scipy", "pint", "matplotlib", "tomlkit", "distributed", "dask", "defusedxml", "sympy"]
EVERYDAY = "import springpoise; from springpoise import Arm, Mechanism, Feedforward"
PLAIN_NUMBERS = """
from springpoise import Arm, Body, Mechanism
Mechanism(Arm(Body(1.0, com=(0.4, 0.0)), length=0.8)).holding_torque(0.3)
"""


@pytest.mark.parametrize(
    ("statements", "banned"),
    [("import springpoise", [*HEAVY, "numpy", "attr"]), (EVERYDAY, HEAVY), (PLAIN_NUMBERS, HEAVY)],
    ids=["facade", "everyday names", "plain numbers"],
)
def test_an_import_stays_light(statements: str, banned: list[str]) -> None:
    check = f"{statements}\nimport sys\nprint(*sorted(set({banned!r}) & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", check], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert done.stdout.split() == []


def test_only_units_knows_that_pint_exists() -> None:
    home = set((PACKAGE / "units").glob("*.py"))
    knowing = [
        str(path.relative_to(PACKAGE))
        for path in sorted(PACKAGE.rglob("*.py"))
        if path not in home and re.search(r"\bpint\b", path.read_text(encoding="utf-8"), re.IGNORECASE)
    ]
    assert knowing == []


def test_the_package_says_that_it_is_typed() -> None:
    assert (PACKAGE / "py.typed").is_file()

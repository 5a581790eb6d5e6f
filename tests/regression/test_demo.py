"""Our own past numbers: they say that something moved, not which is right.

Produced by this library for the invented example; a change here wants an entry in the changelog
that says how much moved and why.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from springpoise import guard

EXAMPLES = Path(__file__).parents[2] / "docs" / "examples"


def test_the_example_s_design():
    design = guard.design(EXAMPLES / "greenhouse_lift.poise.toml")
    mount = design.solved.mechanism.springs[-1]
    assert (mount.name, mount.count) == ("GL-052", 2)
    assert mount.rigid_length == pytest.approx(0.4804, abs=1e-9)
    assert design.study.yield_share == pytest.approx(0.6308, abs=0.002)
    assert design.study.adjuster.yield_share == pytest.approx(0.994, abs=0.002)
    assert design.methods.ranking[:3] == ("spool", "counterweight", "pulley")


def test_the_example_as_built():
    report = guard.check(EXAMPLES / "greenhouse_lift_built.poise.toml")
    assert report.holds
    found = {(v.what, i): v.value for i, v in enumerate(report.verdicts)}
    assert found["residual torque", 0] == pytest.approx(0.0720, abs=2e-4)
    assert found["stored energy", 5] == pytest.approx(100.9, abs=0.1)

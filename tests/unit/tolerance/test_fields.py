"""Names of fields."""

from __future__ import annotations

import re

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    Friction,
    MeasuredSpring,
    Mechanism,
    Point,
    SpringMount,
    ZeroLengthSpring,
)
from springpoise.errors import InputError, InputTypeError, UnitError
from springpoise.linkages import Coupling
from springpoise.tape import record
from springpoise.tolerance import list_fields, replaced
from springpoise.tolerance.fields import canonical_name, field_of

CABLE = Cable(
    Point("ground", (-0.03, -0.25)),
    Disc(Point("ground", (-0.015, 0.2)), radius=0.015, turn="cw"),
    Point("arm", (0.12, 0)),
)
MECH = Mechanism(
    Arm([Body(2, (0.35, 0), name="tube"), Body(1, (0.1, 0))], length=0.6),
    springs=[SpringMount(ZeroLengthSpring(858), CABLE, name="lift"), SpringMount(ZeroLengthSpring(5), CABLE)],
    friction=Friction(0.1),
    travel=(-1, 1),
)


def test_units_and_values():
    fields = {field.name: field for field in list_fields(MECH)}
    assert (fields["springs[0].path.along[1].radius"].unit, fields["springs[0].path.along[1].radius"].value) == (
        "m",
        0.015,
    )
    assert fields["linkage.length"].value == 0.6
    assert fields["friction.coulomb"].unit == "N*m"
    assert fields["gravity[1]"].unit == "m/s**2"
    assert str(fields["springs[0].spring.rate"]) == "springs[0].spring.rate = 858.0 N/m"
    assert not [name for name in fields if "travel" in name or "count" in name or "turn" in name]


def test_names_of_parts_stand_for_their_numbers():
    assert canonical_name(MECH, "springs[lift].path.along[1].centre.at[0]") == "springs[0].path.along[1].centre.at[0]"
    assert canonical_name(MECH, "linkage.bodies[tube].mass") == "linkage.bodies[0].mass"
    assert field_of(MECH, "springs[lift].spring.rate").value == 858.0


def test_a_cable_is_made_anew_by_its_own_class():
    moved = replaced(MECH, {"springs[lift].path.along[1].radius": "16 mm", "springs[1].path.along[0].at[0]": -0.04})
    assert moved.springs[0].path.discs[0].radius == 0.016
    assert moved.springs[0].path.along[0] == CABLE.along[0]
    assert moved.springs[1].path.along[0].at == (-0.04, -0.25)
    assert moved.linkage is MECH.linkage
    with pytest.raises(InputError, match=r"Disc\.radius must be > 0 m, got -0\.01"):
        replaced(MECH, {"springs[0].path.along[1].radius": -0.01})
    with pytest.raises(UnitError, match=r"Disc\.radius must be .* in m, got '3 kg'"):
        replaced(MECH, {"springs[0].path.along[1].radius": "3 kg"})


def test_variables_and_columns_pass():
    column = np.array([[0.01], [0.02]])
    assert replaced(MECH, {"springs[0].path.along[1].radius": column}).holding_torque([0.1, 0.2, 0.3]).shape == (2, 3)
    program = record(
        lambda q, r: replaced(MECH, {"springs[0].path.along[1].radius": r}).holding_torque(q), inputs=("q", "r")
    )
    assert program.replay(0.3, 0.015) == pytest.approx(MECH.holding_torque(0.3), rel=1e-12)


def test_measured_columns_are_no_fields():
    mech = MECH.with_springs(SpringMount(MeasuredSpring([0.1, 0.5, 0.9], [0, 10, 20]), CABLE))
    assert not [field for field in list_fields(mech) if "loads" in field.name]


def test_a_coupling_has_ratios():
    from springpoise import Link, PlanarChain

    chain = PlanarChain(
        [Link("a", Body(1, (0.1, 0)), length=0.2), Link("b", Body(1, (0.1, 0)), follows=Coupling({"a": -1.0}))]
    )
    mech = Mechanism(chain)
    assert canonical_name(mech, "linkage.chain[b].follows.ratios[a][1]") == "linkage.chain[1].follows.ratios[0][1]"
    changed: PlanarChain = replaced(mech, {"linkage.chain[b].follows.ratios[a][1]": -0.9}).linkage
    assert changed.chain[1].follows.ratios == (("a", -0.9),)


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("springs[lift].spring.rat", "did you mean 'springs[0].spring.rate'?"),
        ("springs[0].path.along[1].radios", "did you mean 'springs[0].path.along[1].radius'?"),
        ("springs[0].count", ""),
        ("springs[0].spring", ""),
        ("springs[9].spring.rate", ""),
        (".springs[0].spring.rate", ""),
        ("linkage.frames[0]", ""),
        ("travel[0]", ""),
        ("", "list_fields(mechanism) lists them"),
        ("!", "list_fields(mechanism) lists them"),
    ],
)
def test_unknown_names(name, hint):
    with pytest.raises(InputError, match=re.escape(f"names must be numbers of the mechanism, got {name!r}")) as caught:
        replaced(MECH, {name: 1.0})
    assert hint in str(caught.value)


def test_other_mistakes():
    with pytest.raises(InputTypeError, match=r"mechanism must be a Mechanism, got 3"):
        list_fields(3)
    with pytest.raises(InputTypeError, match=r"names must be texts such as .*, got 7"):
        replaced(MECH, {7: 1.0})
    with pytest.raises(InputTypeError, match=r"values must be names with values, got \[1\]"):
        replaced(MECH, [1])
    with pytest.raises(InputError, match=r"each field once, got 'springs\[0\]\.spring\.rate' twice"):
        replaced(MECH, {"springs[0].spring.rate": 1.0, "springs[lift].spring.rate": 2.0})

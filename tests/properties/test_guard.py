"""Files say what documents say, whatever the documents; and no text breaks the reader."""

from __future__ import annotations

import math
import tomllib
from collections.abc import Callable
from pathlib import Path
from typing import Any

import attrs
import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st

from springpoise import (
    Actuator,
    Arm,
    Body,
    Cable,
    CompressionSpring,
    ConstantForceSpring,
    Disc,
    ExtensionSpring,
    Friction,
    JointTravel,
    Mechanism,
    Motor,
    Point,
    SpringMount,
    Straight,
    TorsionSpring,
    ZeroLengthSpring,
    guard,
)
from springpoise.balance import MethodAssumptions, PulleyRoute
from springpoise.errors import PoiseFileError
from springpoise.guard.files import read_text, text_of
from springpoise.guard.format.place import Place

positive = st.floats(1e-6, 1e6)
lengths = st.floats(-10.0, 10.0)
angles = st.floats(-3.0, 3.0)
shares = st.floats(0.001, 1.0)
names = st.text(st.characters(exclude_categories=["Cs"]), min_size=1, max_size=12).filter(str.strip)
pairs = st.tuples(lengths, lengths)
points = st.builds(Point, st.sampled_from(["ground", "arm"]), pairs)
ranges = st.tuples(angles, angles).filter(lambda pair: pair[0] < pair[1])


def maybe(strategy: st.SearchStrategy[Any]) -> st.SearchStrategy[Any]:
    return st.none() | strategy


lengthwise = st.one_of(
    st.builds(ZeroLengthSpring, positive),
    st.builds(ConstantForceSpring, positive),
    st.builds(
        lambda rate, free, tension, more: ExtensionSpring(
            rate, free_length=free, initial_tension=tension, longest=None if more is None else free + more
        ),
        positive,
        st.floats(0.0, 5.0),
        st.floats(0.0, 1e3),
        maybe(st.floats(1e-3, 5.0)),
    ),
    st.builds(
        lambda rate, solid, more: CompressionSpring(rate, free_length=solid + more, solid_length=solid),
        positive,
        st.floats(0.0, 5.0),
        st.floats(1e-3, 5.0),
    ),
)
anglewise = st.builds(TorsionSpring, positive, angles, maybe(ranges))
discs = st.one_of(
    st.builds(Disc, points, radius=positive, turn=st.sampled_from(["cw", "ccw"]), sliding_friction=st.floats(0, 1)),
    st.builds(
        Disc,
        points,
        radius=positive,
        turn=st.sampled_from(["cw", "ccw"]),
        bearing_friction=st.floats(0, 1),
        bearing_radius=positive,
    ),
)
cables = st.builds(
    lambda first, middle, last: Cable(first, *middle, last), points, st.lists(points | discs, max_size=3), points
)
common = {"count": st.integers(1, 9), "name": maybe(names)}
mounts = st.one_of(
    st.builds(SpringMount, lengthwise, st.builds(Straight, points, points) | cables, rigid_length=lengths, **common),
    st.builds(SpringMount, anglewise, st.builds(JointTravel, st.just(0), ratio=positive), **common),
)
bodies = st.builds(Body, st.floats(0.0, 1e3), pairs, name=maybe(names))
mechanisms = st.builds(
    Mechanism,
    st.builds(Arm, st.lists(bodies, min_size=1, max_size=3), length=positive),
    springs=st.lists(mounts, max_size=3),
    friction=st.builds(Friction, st.floats(0, 10))
    | st.builds(Friction, st.floats(0, 10), pivot_friction=st.floats(0.0, 1.0), pivot_radius=positive),
    travel=maybe(ranges),
    gravity=st.just((0.0, -9.80665)) | st.tuples(st.floats(-20, 20), st.floats(-20, 20)),
)
actuators = st.builds(
    Actuator,
    st.builds(Motor, torque_constant=positive, resistance=positive),
    ratio=positive,
    efficiency=shares,
    sign=st.sampled_from([1, -1]),
    zero=angles,
)
payloads = st.lists(
    st.builds(guard.Payload, name=names, mass=st.floats(0, 1e3), at=maybe(st.builds(Point, st.just("arm"), pairs))),
    max_size=2,
    unique_by=lambda payload: payload.name,
)
torques = positive | st.builds(guard.OfPeak, st.floats(1e-3, 500.0))


def limits(payload: st.SearchStrategy[str | None]) -> st.SearchStrategy[guard.Limit]:
    over: dict[str, Any] = {"over": maybe(ranges), "payload": payload}
    return st.one_of(
        st.builds(guard.ResidualTorque, at_most=torques, norm=st.sampled_from(["worst", "rms"]), **over),
        st.builds(guard.HoldingTorque, at_most=positive, **over),
        st.builds(guard.StoredEnergy, at_most=positive, **over),
        st.builds(guard.PivotLoad, at_most=positive, **over),
        st.builds(guard.MotorCurrent, at_most=positive, **over),
        st.builds(guard.Stretch, at_least=st.tuples(st.floats(0, 9), st.sampled_from(["m", "rad"])), **over),
        st.builds(
            guard.BalanceAngles,
            near=st.lists(angles, min_size=1, max_size=3),
            within=st.floats(1e-3, 1.0),
            stable=st.booleans(),
            **over,
        ),
    )


steps = st.builds(
    lambda first, more, n: guard.Steps(first=first, last=first + more, steps=n),
    st.floats(0.01, 1.0),
    st.floats(0.0, 1.0),
    st.integers(2, 400),
)


widths = st.one_of(
    st.builds("{!r} %".format, st.floats(1e-3, 99.0)),
    st.builds("{!r} {}".format, st.floats(1e-6, 1e3), st.sampled_from(["mm", "cm", "m"])),
)
fields = ["linkage.bodies[0].com[0]", "linkage.bodies[0].com[1]", "linkage.length"]
own_kinds = st.one_of(
    st.builds(lambda width: {"normal": width}, widths),
    st.builds(lambda width: {"uniform": width}, widths),
    st.builds(
        lambda values, in_order: {"samples": [f"{value!r} m" for value in values], "in_order": in_order},
        st.lists(lengths, min_size=3, max_size=3),
        st.booleans(),
    ),
)


@st.composite
def tolerances(draw: Callable[[st.SearchStrategy[Any]], Any], payload: st.SearchStrategy[str | None]) -> Any:
    """Spreads of numbers that every arm of these has; percentages only of what cannot be 0."""
    named = draw(st.lists(st.sampled_from(fields), min_size=1, max_size=3, unique=True))
    shared = draw(maybe(names)) if len(named) > 1 else None
    spreads = []
    for field in named:
        kind = draw(own_kinds)
        if any(isinstance(width, str) and width.endswith("%") for width in kind.values()) and "com" in field:
            kind = {"normal": "1 mm"}
        spreads.append(guard.FieldSpread(field=field, name=draw(maybe(names)), shared=shared, **kind))
    ordered = any(spread.in_order for spread in spreads)
    reach = maybe(st.builds("{!r} mm".format, positive))
    adjuster = st.builds(guard.Adjustable, field=st.just("linkage.bodies[0].com[0]"), name=maybe(names), reach=reach)
    return guard.Tolerances(
        residual_limit=draw(torques),
        spreads=spreads,
        payload=draw(payload),
        builds=3 if ordered else draw(st.integers(1, 200_000)),
        seed=draw(st.integers(0, 2**63 - 1)),
        poses=draw(st.integers(2, 2000)),
        adjusters=draw(maybe(st.lists(adjuster, max_size=1))),
        adjusted_builds=draw(st.integers(1, 20_000)),
        coverage=draw(st.floats(1e-3, 1.0)),
    )


comparisons = st.builds(
    guard.MethodsRequest,
    attach_radius=st.just(("40 mm", "0.1 m")),
    anchor_height=st.builds(lambda low, more: (low, low + more), positive, st.floats(0.0, 1.0)),
    attach_skew=maybe(st.tuples(angles, angles).map(sorted)),
    methods=maybe(st.lists(st.sampled_from(["pulley", "gas", "rubber pulley", "spool"]), min_size=1)),
    norm=st.sampled_from(["minimax", "rms"]),
    warming=st.floats(-50.0, 50.0),
    payload_change=st.floats(-0.9, 9.0),
    assumptions=maybe(
        st.builds(
            MethodAssumptions, pulley_radius=positive, rubber_stretch=st.just((1.1, 2.5)), wall_ratio=st.just(0.5)
        )
    ),
)


def requests(payload: st.SearchStrategy[str | None]) -> st.SearchStrategy[guard.DesignRequest]:
    shared: dict[str, Any] = {"payload": payload, "poses": st.integers(2, 10_000), "compare": maybe(comparisons)}
    return st.one_of(
        st.builds(
            guard.StockRequest,
            stock=names,
            attach_radii=steps,
            anchor_heights=steps,
            counts=st.lists(st.integers(1, 9), min_size=1, max_size=4),
            pulley=maybe(
                st.builds(PulleyRoute, radius=positive, spring_end=pairs, turn=st.sampled_from(["cw", "ccw"]))
            ),
            anchor_angle=angles,
            attach_skews=st.lists(st.floats(-3.0, 3.0), min_size=1, max_size=4),
            residual_limit=maybe(torques),
            resolution=positive,
            **shared,
        ),
        st.builds(guard.SineRequest, rate=positive, attach_radius=positive, count=st.integers(1, 9), **shared),
        st.builds(guard.SineRequest, attach_radius=positive, anchor_height=lengths, anchor_angle=angles, **shared),
    )


@st.composite
def documents(draw: Callable[[st.SearchStrategy[Any]], Any]) -> guard.PoiseFile:
    loads = draw(payloads)
    payload = st.sampled_from([None, *(load.name for load in loads)])
    mechanism = draw(mechanisms)
    stated = draw(maybe(tolerances(payload)))
    stated = None if any(body.name in {"0", "1", "2"} for body in mechanism.linkage.bodies) else stated
    design = draw(maybe(requests(payload)))
    if design is not None and mechanism.springs:
        design = attrs.evolve(design, compare=None)
    yields = [guard.BuildYield(at_least=draw(st.floats(1e-3, 1.0)))] if stated is not None else []
    return guard.PoiseFile(
        mechanism=mechanism,
        title=draw(st.text(max_size=30)),
        description=draw(st.text(max_size=60)),
        actuator=draw(actuators),
        payloads=loads,
        limits=[*draw(st.lists(limits(payload), max_size=3)), *yields],
        tolerances=stated,
        design=design,
    )


def read(text: str) -> guard.PoiseFile:
    return read_text(text, Place("a file"))


@given(documents())
def test_what_is_dumped_reads_back_as_the_same(document: guard.PoiseFile) -> None:
    assert read(guard.dump(document)) == document


@given(documents(), documents())
def test_a_copy_says_the_new_and_keeps_the_comments(old: guard.PoiseFile, new: guard.PoiseFile) -> None:
    """Whatever is changed to whatever, the text that is merged says the new."""
    source = "# at the top\n" + guard.dump(old) + "# at the end\n"
    changed = attrs.evolve(new, source=source)
    text = text_of(changed)
    assert read(text) == new
    assert "# at the top" in text
    assert text_of(attrs.evolve(old, source=source)) == source


@given(st.text(max_size=200))
@example("schema = 1\n[arm]\nbodies = [[]]")
@example("schema = 1\narm = 1979-05-27T07:32:00")
def test_no_text_breaks_the_reader(text: str) -> None:
    with pytest.raises(PoiseFileError, match=r"^a file: "):
        read(text)


LIFT = Path(__file__).parents[2] / "docs" / "examples" / "greenhouse_lift.poise.toml"
VALUES = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(),
    st.floats(),
    st.text(max_size=8),
    st.sampled_from(["1 m", "-1 m", "1e300 kg", "0 N*m", "open", "3 %", "1 rad"]),
    st.lists(st.integers() | st.text(max_size=3), max_size=3),
    st.dictionaries(st.text(max_size=3), st.integers(), max_size=2),
)


@given(st.data())
def test_no_value_in_any_place_breaks_the_reader(data: st.DataObject) -> None:
    """One value of a good file is replaced by anything: it reads as something else, or says where it is wrong."""
    from springpoise.guard.format.reading import document_of

    tables = tomllib.loads(LIFT.read_text(encoding="utf-8"))
    place: Any = tables
    while True:
        key = data.draw(st.sampled_from(sorted(place) if isinstance(place, dict) else range(len(place))))
        inner = place[key]
        if not isinstance(inner, dict | list) or not inner or data.draw(st.booleans()):
            break
        place = inner
    place[key] = data.draw(VALUES)
    assume(place[key] is not None)
    try:
        document_of(tables, Place("a file"), path=None, source=None)
    except PoiseFileError as error:
        assert str(error).startswith("a file: ")
        assert len(str(error)) < 1500


@given(
    st.floats(allow_nan=False, allow_infinity=False),
    st.sampled_from(["m", "rad", "N/m", "N*m", "kg", "m/s**2", "1/K", "Pa"]),
)
def test_every_number_is_written_exactly(value: float, unit: str) -> None:
    from springpoise.guard.amounts import written
    from springpoise.units import parse

    text = written(value, unit)
    again = parse(text, unit)
    assert again == value
    assert math.copysign(1.0, again) == math.copysign(1.0, value) or value == 0

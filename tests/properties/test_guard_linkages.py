"""Files of chains say what documents say, whatever the chains."""

from __future__ import annotations

from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from springpoise import Body, Friction, Mechanism, guard
from springpoise.guard.files import read_text
from springpoise.guard.format.place import Place
from springpoise.linkages import Coupling, Link, PlanarChain, SpatialChain, SpatialLink

lengths = st.floats(-10.0, 10.0)
angles = st.floats(-3.0, 3.0)
masses = st.floats(0.0, 1e3)
joints = st.sampled_from(["revolute", "prismatic"])
ranges = st.tuples(angles, angles).filter(lambda pair: pair[0] < pair[1])
triples = st.tuples(lengths, lengths, lengths)
names = st.lists(
    st.text(st.characters(exclude_categories=["Cs"]), min_size=1, max_size=8).filter(
        lambda name: bool(name.strip()) and name != "ground" and not name.endswith(" carried")
    ),
    min_size=2,
    max_size=4,
    unique=True,
)


def bodies(places: st.SearchStrategy[Any]) -> st.SearchStrategy[Any]:
    return st.lists(st.builds(Body, masses, places), max_size=2)


def coupling(first: str) -> st.SearchStrategy[Any]:
    return st.builds(lambda ratio, offset: Coupling({first: ratio}, offset=offset), lengths, angles)


@st.composite
def planar(draw: st.DrawFn) -> PlanarChain:
    called = draw(names)
    flat = bodies(st.tuples(lengths, lengths))
    links = []
    for i, name in enumerate(called):
        follows = draw(st.none() | coupling(called[0])) if i > 0 else None
        common: dict[str, Any] = {
            "length": draw(st.floats(0.0, 5.0)),
            "joint": draw(joints),
            "skew": draw(angles),
            "follows": follows,
        }
        links.append(Link(name, draw(flat), carried=draw(st.none() | flat), **common))
    return PlanarChain(links)


@st.composite
def spatial(draw: st.DrawFn) -> SpatialChain:
    called = draw(names)
    axes = triples.filter(lambda axis: sum(c * c for c in axis) > 1e-6)
    links = []
    for i, name in enumerate(called):
        fields: dict[str, Any] = {
            "origin": draw(triples),
            "roll_pitch_yaw": draw(st.tuples(angles, angles, angles)),
            "axis": draw(axes),
            "joint": draw(joints),
            "limits": draw(st.none() | ranges),
            "follows": draw(st.none() | coupling(called[0])) if i > 0 else None,
            "parent": draw(st.none() | st.sampled_from(["ground", *called[:i]])),
        }
        links.append(SpatialLink(name, draw(bodies(triples)), **fields))
    return SpatialChain(links)


@st.composite
def documents(draw: st.DrawFn) -> guard.PoiseFile:
    linkage: Any = draw(planar() | spatial())
    count = linkage.joint_count
    each = st.lists(st.none() | ranges, min_size=count, max_size=count)
    friction = st.builds(Friction, st.floats(0.0, 10.0))
    mechanism = Mechanism(
        linkage,
        travel=draw(st.none() | each) if count > 1 else draw(st.none() | ranges),
        friction=draw(friction | st.lists(friction, min_size=count, max_size=count)),
    )
    return guard.PoiseFile(mechanism=mechanism)


@settings(max_examples=60)
@given(documents())
def test_a_document_is_read_back_as_it_was(document: guard.PoiseFile) -> None:
    text = guard.dump(document)
    again = read_text(text, Place("it"))
    assert again == document
    assert guard.dump(again) == text

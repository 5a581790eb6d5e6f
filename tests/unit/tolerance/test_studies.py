"""Options, tables and refusals of the four studies."""

from __future__ import annotations

import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    Cable,
    Disc,
    ExtensionSpring,
    FourBar,
    Friction,
    Link,
    Mechanism,
    PlanarChain,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.errors import InputError, InputTypeError, NoSolution, UnitError
from springpoise.tolerance import Spread, adjusters, corners, scatter, sensitivities

RATE, ANCHOR, MASS = "springs[0].spring.rate", "springs[0].path.first.at[1]", "linkage.bodies[0].mass"
PATH = Straight(Point("ground", (0, 0.1)), Point("arm", (0.08, 0)))
MECH = Mechanism(
    Arm(Body(2, (0.35, 0))),
    springs=SpringMount(ZeroLengthSpring(858.081875), PATH),
    travel=(-1, 1),
    friction=Friction(0.1),
)
CHAIN = Mechanism(PlanarChain([Link("a", Body(1, (0.1, 0)), length=0.2), Link("b", Body(1, (0.1, 0)))]))
FIVE = {RATE: Spread.normal("5 %")}

STUDIES = [
    lambda mech, spreads: scatter(mech, spreads, builds=10),
    lambda mech, spreads: corners(mech, spreads),
    lambda mech, spreads: adjusters(mech, spreads, builds=10),
]


@pytest.mark.parametrize("study", STUDIES)
@pytest.mark.parametrize(
    ("spreads", "kind", "message"),
    [
        ([RATE], InputTypeError, r"spreads must be names of fields with a Spread each, got \['springs"),
        ({}, InputError, "spreads must be at least one field with its Spread, got none"),
        ({RATE: "5 %"}, InputTypeError, r"spreads\['springs\[0\]\.spring\.rate'\] must be a Spread .*got '5 %'"),
        ({"springs[0].spring.rat": Spread.normal(1)}, InputError, r"got 'springs\[0\]\.spring\.rat'; did you mean"),
        ({RATE: Spread.normal(-1.0)}, InputError, r"must have a width > 0 N/m, got -1\.0"),
        ({RATE: Spread.normal("0 %")}, InputError, r"must have a width > 0 N/m, got '0 %'"),
        ({RATE: Spread.normal("5 mm")}, UnitError, r"spreads\['springs\[0\]\.spring\.rate'\] must be .*got '5 mm'"),
        (
            {"springs[0].path.first.at[0]": Spread.uniform("5 %")},
            InputError,
            "must be a width in m where the value is 0, got '5 %'",
        ),
        ({RATE: Spread.samples(3.0)}, InputError, r"must be samples of shape \(n,\), got shape \(\)"),
        (
            {ANCHOR: Spread.uniform("0.1 m"), MASS: Spread.uniform("3 kg")},
            InputError,
            r"can be built, got -.*Body\.mass must be >= 0 kg.*; a smaller width, or a uniform spread, does not reach so far$",
        ),
    ],
)
def test_spreads_that_cannot_be(study, spreads, kind, message):
    with pytest.raises(kind, match=message):
        study(MECH, spreads)


def test_one_field_twice_and_a_batch_without_a_name():
    mech = Mechanism(MECH.linkage, springs=SpringMount(ZeroLengthSpring(1), PATH, name="lift"))
    with pytest.raises(InputError, match=r"spreads must name each field once, got 'springs\[0\]\.spring\.rate' twice"):
        scatter(mech, {RATE: Spread.normal(1), "springs[lift].spring.rate": Spread.normal(1)})
    with pytest.raises(InputTypeError, match=r"Spread\.shared must be the name of a batch or None, got 3"):
        Spread.normal(1, shared=3)
    with pytest.raises(InputError, match=r"Spread\.kind must be one of normal, uniform, .*, got 'gauss'; write Spread"):
        Spread("gauss", "4 %")


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"builds": 0}, "builds must be a whole number >= 1, got 0"),
        ({"builds": True}, "builds must be a whole number >= 1, got True"),
        ({"seed": -1}, "seed must be a whole number >= 0, got -1"),
        ({"seed": 1.5}, r"seed must be a whole number >= 0, got 1\.5"),
        ({"over": []}, "over must be at least one pose in rad, got none"),
        ({"over": [0.0, np.nan]}, "over must be finite poses in rad, got nan"),
        ({"levels": (0.5, 2.0)}, r"levels must be numbers from 0 to 1, got \(0\.5, 2\.0\)"),
        ({"levels": 0.5}, r"levels must be numbers from 0 to 1, got 0\.5"),
        ({"limit": -1.0}, r"limit must be >= 0 N\*m, got -1\.0"),
        ({"limit": [1.0, 2.0]}, "limit must be one for each of 1 joints, got 2"),
        ({"limit": "3 kg"}, r"limit must be .*got '3 kg'"),
    ],
)
def test_options_of_scatter(options, message):
    with pytest.raises(InputError, match=message):
        scatter(MECH, FIVE, **{"builds": 10, **options})


def test_listed_samples_are_one_for_each_build():
    with pytest.raises(InputError, match=r"must hold one value for each of 10 builds, got 2"):
        scatter(MECH, {RATE: Spread.samples([800.0, 900.0], in_order=True)}, builds=10)
    with pytest.raises(InputError, match=r"must hold one value for each of 10 builds, got 2"):
        adjusters(MECH, {RATE: Spread.samples([800.0, 900.0], in_order=True)}, builds=10)


@pytest.mark.parametrize("study", STUDIES)
def test_mechanisms_that_are_none_or_several(study):
    with pytest.raises(InputTypeError, match="mechanism must be a Mechanism, got 3"):
        study(3, FIVE)
    many = Mechanism(Arm(Body(np.array([[1.0], [2.0]]), (0.35, 0))), springs=SpringMount(ZeroLengthSpring(1), PATH))
    with pytest.raises(
        InputError, match=r"mechanism must be a single one, got linkage\.bodies\[0\]\.mass of shape \(2, 1\)"
    ):
        study(many, FIVE)


def test_poses_of_several_joints():
    with pytest.raises(InputError, match=r"over must be of shape \(\.\.\., 2\) for 2 joints, got shape \(3,\)"):
        sensitivities(CHAIN, over=[0.1, 0.2, 0.3])
    with pytest.raises(InputError, match="mechanism must have one joint to be adjusted, got 2"):
        adjusters(CHAIN, {"linkage.chain[a].bodies[0].mass": Spread.normal("1 %")})


def test_a_field_that_cannot_vary_where_it_is():
    cable = Cable(
        Point("ground", (-0.2, 0)), Disc(Point("ground", (-0.1, 0.2)), radius=0.015, turn="cw"), Point("arm", (0.1, 0))
    )
    mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(100), cable), travel=(-1, 1))
    with pytest.raises(InputError, match=r"names must be fields that can vary, got 'springs\[0\]\.moving_mass'"):
        sensitivities(mech, names=["springs[0].moving_mass"])
    assert "springs[0].moving_mass" in sensitivities(mech).unable
    with pytest.raises(InputError, match=r"names must name each field once, got '.*rate' twice"):
        sensitivities(mech, names=[RATE, RATE])
    with pytest.raises(InputError, match="names must be at least one field, got none"):
        sensitivities(mech, names=[])


def test_builds_that_cannot_take_every_pose():
    """A crank whose loop closes only where the coupler is long enough."""
    bar = FourBar(
        crank=Link("crank", Body(1.0, (0.05, 0)), length=0.1),
        coupler=Link("coupler", length=0.25),
        rocker=Link("rocker", length=0.2),
        second_pivot=(0.35, 0.0),
        unreachable="nan",
    )
    mech = Mechanism(bar, travel=("-180 deg", "180 deg"))
    spreads = {"linkage.coupler.length": Spread.samples([0.245, 0.255, 0.26], in_order=True)}
    found = scatter(mech, spreads, builds=3, over=np.linspace(-np.pi, np.pi, 73), limit=10.0)
    assert found.broken == 1
    assert found.yield_within() == pytest.approx(2 / 3)
    assert np.isnan(found.worst[0])
    assert found.quantile(0.99) == np.inf
    assert found.worst_build in (1, 2)
    assert np.all(np.isfinite(found.bands))
    assert "1 of 3 builds cannot take some pose" in str(found)
    worst = corners(mech, {"linkage.coupler.length": Spread.uniform("5 mm")}, over=np.linspace(-np.pi, np.pi, 73))
    assert worst.broken == 1
    assert not worst.exact
    short = Mechanism(bar, travel=("-180 deg", "180 deg"))
    short = scatter(
        short, {"linkage.coupler.length": Spread.samples([0.245], in_order=True)}, builds=1, over=[np.pi, 0.0]
    )
    assert short.broken == 1
    assert np.all(np.isnan(short.bands))
    with pytest.raises(InputError, match="worst_build must be of builds that can take every pose, got none"):
        _ = short.worst_build
    assert "worst build" not in str(short)


def test_a_mechanism_that_is_not_a_number_as_drawn():
    cable = Cable(
        Point("ground", (-0.1, 0.2)),
        Disc(Point("ground", (-0.1, 0.2)), radius=0.015, turn="cw"),
        Point("arm", (0.1, 0)),
    )
    mech = Mechanism(Arm(Body(2, (0.35, 0))), springs=SpringMount(ZeroLengthSpring(100), cable), travel=(-1, 1))
    with pytest.raises(InputError, match=r"holding_torque must be finite over the poses, got NaN at -57\.30 deg"):
        scatter(mech, FIVE, builds=10)


def test_what_scatter_says():
    found = scatter(MECH, {**FIVE, MASS: Spread.uniform("20 g")}, builds=3000, limit="5 %")
    text = str(found)
    for part in (
        "scatter of 3000 builds over 121 poses, seed 1",
        "as drawn",
        "95 % of the builds",
        "worst build",
        "drawn 858.1 N/m",
    ):
        assert part in text
    assert repr(found) == f"<Scatter of 3000 builds: {found.status}>"
    assert found.quantile([0.0, 1.0]).tolist() == [np.min(found.worst), np.max(found.worst)]
    with pytest.raises(InputError, match="level must be from 0 to 1, got 2"):
        found.quantile(2)
    with pytest.raises(InputError, match="build must be a whole number from 0 to 2999, got 3000"):
        found.values_of(3000)
    unlimited = scatter(MECH, FIVE, builds=10)
    assert unlimited.status == "all 10 builds can take every pose"
    with pytest.raises(InputError, match=r"limit must be a torque in N\*m where the call had none, got None"):
        unlimited.yield_within()


def test_what_sensitivities_say():
    found = sensitivities(MECH, names=[RATE, ANCHOR, "friction.coulomb"])
    assert found.idle == ("friction.coulomb",)
    assert [row.name for row in found] == [ANCHOR, RATE]
    assert len(found) == 2
    # 1 mm of 100 mm is 1 % of k·a·b = 6.864655 N·m, worst at the horizontal.
    assert str(found[ANCHOR]) == "1 mm of springs[0].path.first.at[1] is worth 0.06865 N*m at 0.00 deg"
    assert found[ANCHOR].per_percent == pytest.approx(0.06864655)
    assert "no effect: friction.coulomb" in str(found)
    with pytest.raises(KeyError, match="has no effect"):
        found["friction.coulomb"]
    with pytest.raises(KeyError, match="nothing"):
        found["nothing"]


def test_sigmas_of_corners():
    near, far = (corners(MECH, FIVE, sigmas=sigmas) for sigmas in (1, 3))
    assert far.worst == pytest.approx(3 * near.worst)
    assert "closed form" in str(near)
    with pytest.raises(InputError, match="sigmas must be > 0, got 0"):
        corners(MECH, FIVE, sigmas=0)


def test_a_choice_in_the_formula_is_no_proof():
    """A free length decides whether the spring is slack, although the torque is straight on both sides."""
    mech = MECH.with_springs(SpringMount(ExtensionSpring(858, free_length=0.05), PATH))
    free = corners(mech, {"springs[0].spring.free_length": Spread.uniform("5 mm")})
    assert not free.exact
    assert corners(mech, {RATE: Spread.uniform("5 %")}).exact


def test_adjusters_that_do_not_help():
    mech = MECH.with_springs(SpringMount(ZeroLengthSpring(858.081875), PATH))
    only_mass = {MASS: Spread.samples([2.0], in_order=True)}
    found = adjusters(mech, only_mass, "springs[0].path.first.at[0]", builds=1)
    assert not found.success
    assert found.status == "no single adjuster makes these builds better"
    with pytest.raises(NoSolution, match="no single adjuster"):
        _ = found.best
    with pytest.raises(KeyError):
        found[ANCHOR]
    with pytest.raises(
        InputError, match=r"candidates must have an effect on the holding torque, got friction\.coulomb"
    ):
        adjusters(MECH, FIVE, "friction.coulomb")
    with pytest.raises(
        InputError, match="candidates must be named for a mechanism without springs on points, got None"
    ):
        adjusters(Mechanism(MECH.linkage), {MASS: Spread.normal("1 %")})
    with pytest.raises(InputError, match="norm must be 'minimax' or 'rms', got 'l1'"):
        adjusters(MECH, FIVE, norm="l1")
    with pytest.raises(InputError, match="coverage must be above 0 and at most 1, got 0"):
        adjusters(MECH, FIVE, coverage=0)


def test_a_setting_that_cannot_be_built_ranks_last():
    """A counterweight too light already would have to become negative."""
    arm = Arm([Body(2, (0.35, 0)), Body(0.01, (-0.3, 0))])
    mech = Mechanism(arm, springs=SpringMount(ZeroLengthSpring(858.081875), PATH), travel=(-1, 1))
    weight = "linkage.bodies[1].mass"
    found = adjusters(mech, {RATE: Spread.samples([900.0, 950.0], in_order=True)}, [weight, ANCHOR], builds=2)
    assert [row.name for row in found] == [ANCHOR, weight]
    assert "Body.mass must be >= 0 kg" in str(found[weight].obstacle)
    assert "cannot be set as needed" in str(found)
    assert found[ANCHOR].range[0] >= found[ANCHOR].whole_range[0]


def test_what_slides_is_told_in_newtons():
    """A carriage of 2 kg on an upright slide, weight 19.6 N, on a spring of which every newton of tension counts whole."""
    slide = PlanarChain([Link("carriage", Body(2.0, (0, 0)), joint="prismatic")])
    path = Straight(Point("ground", (0.5, 0)), Point("carriage", (0, 0)))
    spring = ExtensionSpring(100, free_length=0.05)
    lift = Mechanism(slide, springs=SpringMount(spring, path), travel=(0.0, 0.1), gravity=(-9.80665, 0.0))
    spreads = {"springs[0].spring.rate": Spread.normal("5 %")}
    assert str(sensitivities(lift).rows[0]) == "1 N of springs[0].spring.initial_tension is worth 1.000 N at 0 mm"
    found = scatter(lift, spreads, builds=200, limit=5.0)
    assert found.yield_within("27 N") == found.yield_within(27.0)
    with pytest.raises(UnitError, match=r"limit must be a value in N, got '27 N\*m'"):
        found.yield_within("27 N*m")
    with pytest.raises(InputError, match="limit must be a torque in N where the call had none, got None"):
        scatter(lift, spreads, builds=200).yield_within()
    for result in (sensitivities(lift), found, corners(lift, spreads), adjusters(lift, spreads, builds=200)):
        assert " N " in str(result)
        assert "N*m" not in str(result)


def test_a_limit_of_a_sliding_joint_is_a_force():
    """A mass m on an upright slide needs m·g: with m uniform within 10 %, three quarters lie below m·g·1.05."""
    lift = PlanarChain([Link("carriage", Body(2.0, (0, 0)), joint="prismatic", skew="90 deg")])
    mech = Mechanism(lift, travel=("0 mm", "300 mm"))
    spreads = {"linkage.chain[0].bodies[0].mass": Spread.uniform("10 %")}
    limit = 2.0 * 9.80665 * 1.05
    found = scatter(mech, spreads, builds=20_000, limit=f"{limit} N")
    assert found.yield_within() == pytest.approx(0.75, abs=0.012)
    with pytest.raises(UnitError, match=r"limit must be a value in N, got '5 N\*m'"):
        scatter(mech, spreads, builds=10, limit="5 N*m")

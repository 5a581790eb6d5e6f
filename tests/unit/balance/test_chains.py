"""Balance of chains: what is refused, what comes out impossible, how it prints, and real springs in place of ideal."""

from __future__ import annotations

import math
import re

import attrs
import numpy as np
import pytest

from springpoise import (
    Arm,
    Body,
    CompressionSpring,
    ExtensionSpring,
    Mechanism,
    Point,
    SpringMount,
    Straight,
    ZeroLengthSpring,
)
from springpoise.balance.chains.chain import ChainSpring, balance_chain
from springpoise.balance.chains.fit import fit_chain, joint_residuals
from springpoise.errors import InputError, InputTypeError, NoSolution, UnitError
from springpoise.linkages import FiveBar, FourBar, Link, PlanarChain, PlanarLinkage, SpatialChain, SpatialLink

UPPER = Link("upper", Body(1.5, (0.15, 0.0)), length=0.30)
FORE = Link("fore", Body(1.0, (0.12, 0.0)), length=0.25)
TWO = PlanarChain([UPPER, FORE])
CARRIED = PlanarChain([attrs.evolve(UPPER, carried=()), FORE])
SPRINGS = [
    ChainSpring("ground", "upper", start=0.10, end=0.09),
    ChainSpring("upper carried", "fore", start=0.07, end=0.06),
]
DIRECT = [ChainSpring("ground", "fore", rate=300), ChainSpring("upper", "fore", start=0.36, end=0.10)]
TRAVEL = [("-60 deg", "60 deg"), ("-70 deg", "70 deg")]


@pytest.mark.parametrize(
    ("given", "error", "message"),
    [
        (
            {"first": ""},
            InputTypeError,
            "ChainSpring.first must be the name of a body, such as 'ground' or 'upper', got ''",
        ),
        (
            {"last": 3},
            InputTypeError,
            "ChainSpring.last must be the name of a body, such as 'ground' or 'upper', got 3",
        ),
        ({"rate": -1.0}, InputError, "ChainSpring.rate must be > 0 N/m, got -1.0"),
        ({"rate": "3 kg"}, UnitError, "ChainSpring.rate must be"),
        ({"rate": np.ones(3)}, InputTypeError, "ChainSpring.rate must be a single value in N/m, got array"),
        ({"start": 0.0}, InputError, "ChainSpring.start must be other than 0 m, got 0.0"),
        ({"end": (0.0, 0.0)}, InputError, "ChainSpring.end must lie off the joint, got (0.0, 0.0) m"),
        ({"end": (np.ones(2), 0.0)}, InputTypeError, "ChainSpring.end must be a distance or (x, y) in m, got"),
        ({"end": math.nan}, InputError, "ChainSpring.end must be"),
        ({"name": 3}, InputTypeError, "ChainSpring.name must be a name or None, got 3"),
    ],
)
def test_springs_that_cannot_be_meant(given, error, message):
    with pytest.raises(error, match=re.escape(message)):
        ChainSpring(**{"first": "ground", "last": "fore", **given})


@pytest.mark.parametrize(
    ("springs", "message"),
    [
        ([], "springs must say what is fixed, got none; such as [ChainSpring('ground', 'upper'"),
        (
            [ChainSpring("ground", "hand")],
            "ChainSpring.last must be a link that turns by itself ('upper', 'fore'), got 'hand'",
        ),
        (
            [ChainSpring("roof", "fore")],
            "ChainSpring.first must be one of 'ground', 'upper', 'upper carried', got 'roof'",
        ),
        ([ChainSpring("fore", "upper")], "must be nearer to the ground than last, got 'fore' to 'upper'"),
        ([ChainSpring("upper", "upper")], "must be nearer to the ground than last, got 'upper' to 'upper'"),
        (
            [ChainSpring("ground", "fore", rate=1, end=1)],
            "in layout 'carried', which is 'upper carried' for 'fore', got 'ground'",
        ),
        (
            [ChainSpring("ground", "upper", end=0.1), SPRINGS[1]],
            "still open: rate and start of 'ground to upper' (found so far: rate of 'upper carried to fore' 280.2 N/m)",
        ),
        (
            [attrs.evolve(s, name="it") for s in SPRINGS],
            "ChainSpring.name must differ from spring to spring, got 'it' twice",
        ),
    ],
)
def test_springs_that_do_not_fit_the_chain(springs, message):
    with pytest.raises(InputError, match=re.escape(message)):
        balance_chain(CARRIED, springs=springs)


def test_found_numbers_are_named_where_too_little_is_given():
    springs = [*DIRECT, ChainSpring("ground", "upper")]
    with pytest.raises(InputError, match=r"still open: .*rate and start and end of 'ground to upper'"):
        balance_chain(TWO, "direct", springs=springs)
    with pytest.raises(InputError, match=r"found so far: start of 'ground to fore' 57.21 mm"):
        balance_chain(TWO, "direct", springs=[DIRECT[0], ChainSpring("upper", "fore", start=0.36)])


def _ball(name, bodies=(), **changes):
    return [
        SpatialLink(f"{name} 1", **{"origin": (0, 0, 0.3), **changes}),
        SpatialLink(f"{name} 2", axis=(0, 1, 0)),
        SpatialLink(name, bodies, axis=(1, 0, 0)),
    ]


BALLS = [*_ball("upper", Body(1.5, (0.15, 0, 0))), *_ball("fore", Body(1.0, (0.12, 0, 0)), origin=(0.3, 0, 0))]


@pytest.mark.parametrize(
    ("chain", "message"),
    [
        (
            TWO,
            "layout 'carried' must have a frame parallel to the ground at every joint, got none where 'fore' hangs on 'upper'",
        ),
        (TWO, "write Link('upper', ..., carried=()) for a parallelogram or belt without mass"),
        (
            PlanarChain([attrs.evolve(UPPER, joint="prismatic"), FORE]),
            "Link.joint must be 'revolute' to be balanced exactly, got 'prismatic' for 'upper'",
        ),
        (
            PlanarChain([UPPER, attrs.evolve(FORE, follows={"upper": -1.0})]),
            "Link.follows must be None to be balanced exactly, got a Coupling for 'fore'",
        ),
        (
            PlanarChain([attrs.evolve(UPPER, length=np.array([[0.3], [0.4]])), FORE]),
            "chain must be a single one, got an array for Link.length (shape (2, 1))",
        ),
        (
            PlanarChain([Link("upper", Body(np.ones((2, 1)), (0.1, 0)), carried=())]),
            "chain must be a single one, got an array for Body.mass (shape (2, 1))",
        ),
        (SpatialChain(BALLS), "layout must be 'direct' or 'ground' for a SpatialChain, which has no carried frames"),
        (SpatialChain(BALLS[:5]), "got 'fore 1', 'fore 2' left over; describe an arm that moves in one plane"),
        (
            SpatialChain([*_ball("a")[:2], SpatialLink("a", axis=(0, 1, 0))]),
            "got parallel axes in a row in 'a 1', 'a 2', 'a'",
        ),
        (
            SpatialChain([*_ball("a")[:2], SpatialLink("a", axis=(1, 0, 0), origin=(0, 0.01, 0))]),
            "axes of 'a 1', 'a 2', 'a' that miss each other by",
        ),
        (
            SpatialChain([SpatialLink("a", joint="prismatic", axis=(1, 0, 0))]),
            "SpatialLink.joint must be 'revolute' and move by itself to be balanced exactly, got 'prismatic' for 'a'",
        ),
        (
            SpatialChain([*_ball("a"), SpatialLink("b", follows={"a": 1.0})]),
            "must be 'revolute' and move by itself to be balanced exactly, got a Coupling for 'b'",
        ),
        (
            SpatialChain([*_ball("a"), SpatialLink("b", parent="ground")]),
            "SpatialChain must have no branches to be balanced exactly, got one at 'b'",
        ),
        (
            SpatialChain([BALLS[0], attrs.evolve(BALLS[1], bodies=(Body(0.5, (0.1, 0, 0)),)), BALLS[2]]),
            "must be none between the three joints of a spherical joint, got 0.5 kg on 'upper 2'",
        ),
        (
            SpatialChain([*_ball("a", Body(1.0, (0.1, 0.02, 0))), *_ball("b", origin=(0.3, 0, 0))]),
            "must lie on the line from joint to joint for springs in space, got 20 mm off it for 'a'",
        ),
    ],
)
def test_chains_that_cannot_be_balanced(chain, message):
    with pytest.raises(InputError, match=re.escape(message)):
        balance_chain(chain, springs=ChainSpring("ground", "upper", rate=1, end=1))


def test_mass_at_the_centre_of_a_spherical_joint_and_fixed_links_count():
    # The same moments in another way: 0.3 kg in the elbow joint's second ring, and part of the upper arm as a fixed link.
    ring = attrs.evolve(BALLS[4], bodies=(Body(0.3, (0, 0, 0)),))
    part = SpatialLink("part", Body(0.5, (0, 0, 0)), joint="fixed", origin=(0.2, 0, 0), parent="upper")
    first = attrs.evolve(BALLS[3], parent="upper")
    chain = SpatialChain([*BALLS[:3], part, first, ring, BALLS[5]])
    found = balance_chain(chain, "direct", springs=DIRECT).require()
    # a = g M1/(k l1) with M1 = 1.5 · 0.15 + 0.5 · 0.2 + (1.0 + 0.3) · 0.3
    assert found.springs[0].first.at[2] - 0.3 == pytest.approx(9.80665 * 0.715 / (300 * 0.3), rel=1e-12)


def test_places_in_space_are_distances():
    springs = [ChainSpring("ground", "fore", rate=300, end=(0.1, 0.1)), DIRECT[1]]
    with pytest.raises(
        InputError, match=re.escape("ChainSpring.end must be a distance along the link's line, or straight up")
    ):
        balance_chain(SpatialChain(BALLS), "direct", springs=springs)


@pytest.mark.parametrize(
    ("chain", "options", "error", "message"),
    [
        ("arm", {}, InputTypeError, "chain must be a linkage of several links or a Mechanism of one, got 'arm'"),
        (Arm(Body(1, (1, 0))), {}, InputTypeError, "chain must be a PlanarChain, FourBar, FiveBar or SpatialChain"),
        (PlanarLinkage([UPPER, FORE]), {}, InputTypeError, "or a Mechanism of one, got PlanarLinkage"),
        (CARRIED, {"layout": "belts"}, InputError, "layout must be 'carried', 'direct' or 'ground', got 'belts'"),
        (CARRIED, {"springs": "two"}, InputTypeError, "springs must be ChainSprings, got 'two'"),
        (CARRIED, {"gravity": (0.0, 0.0)}, InputError, "gravity must be other than 0 m/s**2, got 0.0"),
        (CARRIED, {"gravity": (0.0, 0.0, -9.8)}, InputError, "Mechanism.gravity must be 2 components"),
        (
            TWO,
            {"layout": "ground"},
            InputError,
            "ChainSpring.first must be 'ground' in layout 'ground', got 'upper carried'",
        ),
        (
            PlanarChain([UPPER]),
            {"layout": "ground", "springs": SPRINGS[0]},
            InputError,
            "must have two links or more, got 1",
        ),
    ],
)
def test_wrong_arguments(chain, options, error, message):
    if options.get("layout") == "ground" and chain is TWO:
        chain = CARRIED
    with pytest.raises(error, match=re.escape(message)):
        balance_chain(chain, **{"springs": SPRINGS, **options})


def test_a_chain_that_gravity_does_not_turn_is_refused():
    still = PlanarChain([Link("upper", Body(1.0, (0, 0))), Link("fore", Body(1.0, (0, 0)))])
    with pytest.raises(InputError, match="chain must have something to balance, got links that gravity does not turn"):
        balance_chain(still, "direct", springs=ChainSpring("ground", "upper", start=0.1, end=0.1))


def test_the_least_number_has_a_proof():
    link = PlanarChain([Link("upper", Body(1.0, (0.1, 0)))])
    found = balance_chain(link, "direct", springs=ChainSpring("ground", "upper", start=0.1, end=0.1))
    assert "orthogonal" in found.count_proof


def test_a_mechanism_with_springs_is_refused():
    mech = balance_chain(CARRIED, springs=SPRINGS).mechanism
    with pytest.raises(InputError, match=r"must be a Mechanism without springs, got 2"):
        balance_chain(mech, springs=SPRINGS)


def test_loops():
    links = {
        "first_crank": UPPER,
        "second_crank": Link("rear", length=0.1),
        "first_coupler": FORE,
        "second_coupler": Link("rod", length=0.3),
    }
    with pytest.raises(InputError, match=re.escape("FiveBar must be a parallelogram on one common pivot")):
        balance_chain(FiveBar(**links), springs=SPRINGS[0])
    links["first_coupler"] = attrs.evolve(FORE, length=0.1)
    five = FiveBar(**links)
    with pytest.raises(InputError, match=re.escape("layout must be 'carried' for a FiveBar, got 'ground'")):
        balance_chain(five, "ground", springs=SPRINGS[0])
    folded = Mechanism(five, travel=[("20 deg", "40 deg"), ("60 deg", "90 deg")])  # a branch +1 parallelogram trails
    with pytest.raises(
        InputError, match=r"Mechanism.travel must be where the FiveBar stands on its branch, got a pose"
    ):
        balance_chain(folded, springs=[SPRINGS[0], ChainSpring("ground", "rear", start=-0.1, end=0.1)])


def test_a_four_bar_says_that_its_least_number_is_not_known():
    links = {name: Link(name, Body(1.0, (0.1, 0.0)), length=size) for name, size in (("crank", 0.2), ("coupler", 0.4))}
    four = FourBar(**links, rocker=Link("rocker", Body(1.0, (0.1, 0)), length=0.3), second_pivot=(0.4, 0))
    springs = [ChainSpring("ground", name, start=0.1, end=0.1) for name in ("crank", "rocker")]
    found = balance_chain(four, springs=springs)
    assert found.success and found.least_count is None and found.count_proof is None
    assert found.count_statement == "2, one for each crank; whether fewer could do is not known"


# -------------------------------------------------------------------------------------------
# impossible, and why


@pytest.mark.parametrize(
    ("layout", "springs", "reason"),
    [
        (
            "direct",
            [DIRECT[0], ChainSpring("upper", "fore", start=0.26, end=0.10)],
            "the rate of 'upper to fore' came out as -1543 N/m, and no spring pushes in proportion to its length: to undo how "
            "the others couple 'upper' and 'fore' it has to start beyond the far joint of 'upper', which is 300 mm out, and "
            "it starts at 260 mm",
        ),
        (
            "ground",
            [ChainSpring("ground", "fore", rate=200, end=0.1), ChainSpring("ground", "fore", end=0.08)],
            "it couples 'upper' and 'fore' in the same sense as the others; put its end on the other side of the joint of 'fore'",
        ),
        (
            "direct",
            [*DIRECT, ChainSpring("ground", "upper", start=0.1, end=0.1)],
            "",
        ),
        (
            "direct",
            [
                ChainSpring("ground", "fore", rate=300, end=0.03),
                DIRECT[1],
                ChainSpring("ground", "upper", start=0.1, end=0.1),
            ],
            "the other springs lift 'upper' too much, or this one pulls it down; put its start on the other side of the joint",
        ),
        (
            "direct",
            [ChainSpring("ground", "upper", start=0.1, end=0.1)],
            "nothing lifts 'fore', whose weight turns it by up to 1.177 N*m; a spring has to end on it or beyond",
        ),
        (
            "direct",
            [ChainSpring("ground", "fore", rate=300, start=0.05, end=0.1), DIRECT[1]],
            "the springs lift 'upper' by 4.5 N*m at most where its weight needs 5.148 N*m",
        ),
        (
            "direct",
            [ChainSpring("ground", "fore", rate=300)],
            "the springs couple 'upper' and 'fore' by 6.171 N*m, which nothing cancels; a spring from 'upper', starting beyond",
        ),
        (
            "direct",
            [
                ChainSpring("ground", "fore", rate=300),
                ChainSpring("upper", "fore", start=0.36, end=(0.1, 0.1)),
            ],
            "no rate of 'upper to fore' fits, because its ends lie in directions that do not suit the centre of mass",
        ),
    ],
)
def test_what_came_out_negative_or_impossible(layout, springs, reason):
    if not reason:  # three springs with one number too few is no failure but a question
        with pytest.raises(InputError, match="still open"):
            balance_chain(TWO, layout, springs=springs)
        return
    found = balance_chain(TWO, layout, springs=springs)
    assert not found.success
    assert reason in found.status
    assert found.mechanism.springs == ()
    with pytest.raises(NoSolution, match=re.escape(reason[:40])):
        found.require()
    assert "not balanced" in str(found)


def test_a_negative_rate_becomes_positive_with_the_anchor_below_the_joint():
    springs = [
        ChainSpring("ground", "fore", rate=300, end=0.03),
        DIRECT[1],
        ChainSpring("ground", "upper", start=-0.1, end=0.1),
    ]
    # a = g M2/(k b2) = 130.8 mm lifts the upper link by k a l1 = 11.77 N m of the 5.15 N m that it needs
    found = balance_chain(TWO, "direct", springs=springs).require()
    assert found.springs[2].rate == pytest.approx((300 * 9.80665 * 0.12 / (300 * 0.03) * 0.3 - 9.80665 * 0.525) / 0.01)


def test_a_link_without_length_gives_others_no_lever():
    chain = PlanarChain([attrs.evolve(UPPER, length=0.0), FORE])
    springs = [ChainSpring("ground", "fore", rate=200, end=0.1), ChainSpring("ground", "fore", rate=250, end=-0.08)]
    found = balance_chain(chain, "ground", springs=springs)
    assert "nothing lifts 'upper', whose weight turns it by up to 2.206 N*m" in found.status  # 1.5 kg · g · 0.15 m


def test_a_spring_with_nothing_to_do_is_left_out():
    counterweight = Body(1.0, (-0.12, 0.0))
    chain = PlanarChain([CARRIED.links[0], attrs.evolve(FORE, bodies=(*FORE.bodies, counterweight))])
    found = balance_chain(chain, springs=SPRINGS)
    assert found.left_out == ("upper carried to fore",)
    assert found.status.endswith("not needed: upper carried to fore")
    assert found.least_count == 1 and found.count_statement.startswith("1, the least")
    assert len(found.mechanism.springs) == 1


def test_the_anchor_and_the_attachment_follow_where_the_rate_is_given():
    one = balance_chain(CARRIED, springs=[attrs.evolve(SPRINGS[0], start=None, rate=600), SPRINGS[1]])
    assert one.springs[0].first.at[1] == pytest.approx(9.80665 * 0.525 / (600 * 0.09))
    two = balance_chain(CARRIED, springs=[attrs.evolve(SPRINGS[0], end=None, rate=600), SPRINGS[1]])
    assert two.springs[0].last.at[0] == pytest.approx(9.80665 * 0.525 / (600 * 0.10))


def test_equal_springs_are_numbered_and_own_names_are_kept():
    springs = [
        ChainSpring("ground", "fore", rate=200, end=0.1),
        ChainSpring("ground", "fore", rate=250),
        ChainSpring("ground", "upper", rate=100, start=0.05, end=0.05, name="helper"),
    ]
    found = balance_chain(TWO, "ground", springs=springs)
    assert [spring.name for spring in found.springs] == ["ground to fore 1", "ground to fore 2", "helper"]
    assert found.mechanism.mount_name(1) == "ground to fore 2"
    assert "layout 'ground' does it with as many as there are links" in found.count_statement


def test_more_ground_springs_than_needed_take_the_smallest_anchors():
    springs = [ChainSpring("ground", "fore", rate=200, end=e) for e in (0.1, -0.05, -0.05)]
    found = balance_chain(TWO, "ground", springs=springs).require()
    second, third = (spring.first.at for spring in found.springs[1:])
    assert second == pytest.approx(third)


def test_rates_that_follow_together_are_not_negative():
    # Four springs from fixed anchors to fixed places: only the rates are open, and more of them than equations.
    places = [(0.07, 0.1), (0.07, -0.1), (0.02, -0.08), (0.09, 0.05)]
    springs = [ChainSpring("ground", "fore", start=a, end=(b, 0.0)) for a, b in places]
    found = balance_chain(TWO, "ground", springs=springs)
    assert all(spring.rate >= 0 for spring in found.springs) == found.success


def test_strokes_loads_and_table():
    mech = Mechanism(CARRIED, travel=TRAVEL)
    found = balance_chain(mech, springs=SPRINGS).require()
    upper = found.springs[0]
    # Between (0, a) and b at the angle q: a² + b² - 2ab sin q
    low, high = (math.sqrt(0.1**2 + 0.09**2 - 2 * 0.1 * 0.09 * math.sin(math.radians(q))) for q in (60, -60))
    assert upper.shortest == pytest.approx(low, abs=1e-4)
    assert upper.longest == pytest.approx(high, abs=1e-4)
    assert upper.stroke == pytest.approx(high - low, abs=2e-4)
    assert upper.length_bounds == pytest.approx((0.01, 0.19))
    assert upper.load_range == (upper.rate * upper.shortest, upper.rate * upper.longest)
    assert upper.peak_energy == 0.5 * upper.rate * upper.longest**2
    assert found.stored_to_useful >= 1.0
    assert [name for name, _ in found.peak_pivot_loads] == ["upper", "fore"]
    text = str(found)
    assert "chain balance (carried)" in text
    assert "(0.00, 100.00) on ground" in text and "(90.00, 0.00) on upper" in text


# -------------------------------------------------------------------------------------------
# real springs


def _balanced(lower=0.02):
    springs = [attrs.evolve(SPRINGS[0], end=0.06), attrs.evolve(SPRINGS[1], start=0.12)]
    return balance_chain(Mechanism(CARRIED, travel=[("-60 deg", "40 deg"), ("-60 deg", "0 deg")]), springs=springs)


REAL = ExtensionSpring(500, free_length=0.08, initial_tension=5.0)


def test_behind_an_eyelet_a_real_spring_acts_as_an_ideal_one_while_it_is_taut():
    found = _balanced()
    fit = found.with_real_springs(REAL).require()
    assert fit.settled and fit.slack == ()
    for joint in fit.joints:
        assert joint.worst_fraction < 1e-6
    for ideal, mount in zip(found.springs, fit.mechanism.springs, strict=True):
        assert mount.spring.rate == pytest.approx(ideal.rate, rel=1e-6)
        # what is hidden behind the eyelet is the free length less F0/k
        assert mount.rigid_length == pytest.approx(-(0.08 - 5.0 / ideal.rate), abs=1e-6)
    assert "rigid mm" in str(fit)


def test_hooked_in_straight_it_does_not_and_the_rest_is_told_joint_by_joint():
    found = _balanced()
    short = attrs.evolve(REAL, free_length=0.03, initial_tension=0.0)
    fits = {norm: found.with_real_springs(short, seat="hooks", norm=norm) for norm in ("minimax", "rms")}
    worst = {norm: max(j.worst for j in fit.joints) for norm, fit in fits.items()}
    rms = {norm: sum(j.rms**2 for j in fit.joints) for norm, fit in fits.items()}
    assert worst["minimax"] <= worst["rms"] and rms["rms"] <= rms["minimax"]
    assert [j.name for j in fits["rms"].joints] == ["upper", "fore"]
    again = joint_residuals(fits["rms"].mechanism)
    assert again == fits["rms"].joints
    wound = found.with_real_springs(attrs.evolve(REAL, free_length=0.03), seat="hooks", preload="spring")
    for mount in wound.mechanism.springs:  # zero free length by initial tension
        assert mount.spring.initial_tension == pytest.approx(mount.spring.rate * 0.03, rel=1e-6)
    assert max(j.worst_fraction for j in wound.joints) < 1e-6


def test_a_spring_that_is_drawn_out_too_far_is_no_success():
    fit = _balanced().with_real_springs(attrs.evolve(REAL, longest=0.12))
    assert not fit.success
    assert "drawn out too far: ground to upper" in fit.status
    with pytest.raises(NoSolution, match="drawn out too far"):
        fit.require()


def test_a_mount_that_does_not_help_is_left_out():
    below = SpringMount(
        ZeroLengthSpring(100), Straight(Point("ground", (0, -0.1)), Point("upper", (0.09, 0))), name="below"
    )
    fit = fit_chain(Mechanism(TWO, springs=below, travel=TRAVEL))
    assert fit.left_out == ("below",) and not fit.success
    assert fit.status == "no spring at these mounts makes the residual smaller"


@pytest.mark.parametrize(
    ("given", "error", "message"),
    [
        ({"springs": [REAL]}, InputError, "springs must be one for all or one for each of 2 springs, got 1"),
        ({"springs": ZeroLengthSpring(1)}, InputTypeError, "springs must be ExtensionSprings, got ZeroLengthSpring"),
        ({"seat": "drum"}, InputError, "seat must be 'eyelet' or 'hooks', got 'drum'"),
        (
            {"seat": "hooks", "preload": "mount"},
            InputError,
            "preload must be 'spring' or 'none' with seat 'hooks', got 'mount'",
        ),
        ({"norm": "mean"}, InputError, "norm must be 'minimax' or 'rms', got 'mean'"),
        ({"preload": "wound"}, InputError, "preload must be 'spring', 'mount' or 'none', got 'wound'"),
        ({"over": np.zeros(3)}, InputError, "over must be poses of shape (poses, 2) for this linkage, got shape (3,)"),
        ({"over": np.full((3, 2), np.nan)}, InputError, "over must be finite poses, got nan"),
    ],
)
def test_real_springs_that_cannot_be_meant(given, error, message):
    with pytest.raises(error, match=re.escape(message)):
        _balanced().with_real_springs(**{"springs": REAL, **given})


def test_fits_that_cannot_be_meant():
    path = Straight(Point("ground", (0, 0.1)), Point("upper", (0.09, 0)))
    with pytest.raises(InputTypeError, match=r"mechanism must be a Mechanism, got PlanarChain"):
        fit_chain(TWO)
    with pytest.raises(InputError, match="mechanism must have a spring to fit, got none"):
        fit_chain(Mechanism(TWO))
    pushing = SpringMount(CompressionSpring(100, free_length=0.1, solid_length=0.05), path)
    with pytest.raises(InputTypeError, match="to be fitted, got CompressionSpring"):
        fit_chain(Mechanism(TWO, springs=pushing))


def test_a_start_is_given_where_a_level_frame_lies_between():
    third = Link("third", Body(1.0, (0.2, 0.0)), pivot=Point("upper carried", (0.1, 0.2)))
    chain = PlanarChain([*CARRIED.links, third])
    with pytest.raises(InputError, match=r"lies between its bodies, got None for 'upper to third'"):
        balance_chain(chain, "direct", springs=ChainSpring("upper", "third", rate=100, end=0.1))


def test_slack_springs_are_named_or_the_fit_says_that_it_did_not_settle():
    # The elbow spring is 10 mm short at its shortest and needs 5 N / 280 N/m = 18 mm to be taut.
    found = balance_chain(Mechanism(CARRIED, travel=TRAVEL), springs=SPRINGS)
    fit = found.with_real_springs(REAL, norm="rms")
    assert fit.success and fit.slack == ("upper carried to fore",)
    assert fit.status.endswith("slack at some poses: upper carried to fore")
    # The worst case sits where the load jumps from 5 N to nothing, so the poses need not settle.
    worst = found.with_real_springs(REAL)
    assert worst.settled or ("did not settle" in worst.status and not worst.success)


def test_residuals_at_poses_that_cannot_be():
    links = {name: Link(name, Body(1.0, (0.1, 0.0)), length=size) for name, size in (("crank", 0.3), ("coupler", 0.2))}
    four = FourBar(
        **links, rocker=Link("rocker", Body(1.0, (0.1, 0)), length=0.2), second_pivot=(0.4, 0), unreachable="nan"
    )
    with pytest.raises(InputError, match=r"must be finite over the poses, got NaN at \[3\.\]"):
        joint_residuals(Mechanism(four), np.array([0.1, 3.0]))
    (joint,) = joint_residuals(Mechanism(four), np.array([0.1, 0.2]))
    assert joint.name == "crank" and joint.worst == joint.peak_gravity_torque and joint.worst_fraction == 1.0

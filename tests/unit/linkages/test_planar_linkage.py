from __future__ import annotations

import math
import warnings

import attrs
import numpy as np
import pytest

from springpoise import Body, Feedforward, Mechanism, Point
from springpoise.errors import InputError, InputTypeError
from springpoise.linkages import Dyad, FiveBar, FourBar, Link, PlanarLinkage, SliderDyad
from springpoise.linkages.posed import posed

GROUND = Point("ground", (0.0, 0.0))


def four_bar(l1=0.1, l2=0.35, l3=0.3, pivot=(0.35, 0.0), **more):
    return FourBar(
        crank=Link("crank", Body(1.0, (0.05, 0.0)), length=l1),
        coupler=Link("coupler", Body(1.0, (0.1, 0.02)), length=l2),
        rocker=Link("rocker", length=l3),
        second_pivot=pivot,
        **more,
    )


def slider_crank(length=0.3, height=0.0, **more):
    return PlanarLinkage(
        [
            Link("crank", length=0.1, pivot=GROUND),
            SliderDyad(
                first=Link("rod", length=length),
                last=Link("slider", Body(1.0, (0.0, 0.0))),
                start=Point("crank", (0.1, 0.0)),
                guide=Point("ground", (0.0, height)),
                **more,
            ),
        ]
    )


class TestFourBar:
    @pytest.mark.parametrize("branch", [1, -1])
    def test_the_coupler_meets_the_rocker(self, branch):
        linkage = four_bar(branch=branch)
        q = np.linspace(-3.0, 3.0, 41)
        one = linkage.position(Point("coupler", (0.35, 0.0)), q)
        other = linkage.position(Point("rocker", (0.3, 0.0)), q)
        assert np.allclose(one, other, atol=1e-15)
        start = linkage.position(Point("coupler", (0.0, 0.0)), q)
        assert np.allclose(start, (0.1 * np.cos(q), 0.1 * np.sin(q)), atol=1e-15)
        # +1: to the left of the way from the crank's end to the second pivot
        left = (0.35 - start[0]) * (one[1] - start[1]) - (0.0 - start[1]) * (one[0] - start[0])
        assert np.all(branch * left > 0.0)

    def test_names(self):
        linkage = four_bar()
        assert linkage.frames == ("ground", "crank", "coupler", "rocker")
        assert linkage.pivots == ("crank", "coupler", "coupler and rocker", "rocker")
        assert linkage.joint_names == ("crank",)
        assert linkage.joint_units == ("rad",)
        assert linkage.tip == Point("rocker", (0.3, 0.0))

    def test_pivot_loads_come_one_for_each_pivot(self):
        mech = Mechanism(four_bar())
        assert mech.pivot_load(0.3).shape == (4,)
        assert mech.pivot_load(np.zeros((2, 3))).shape == (2, 3, 4)
        assert len(mech.pivot_force(0.3)) == 4
        assert type(mech.pivot_force(0.3)[0][0]) is float

    @pytest.mark.parametrize("seed", range(60))
    def test_closable_against_brute_force(self, seed):
        """Grashof and others: the circles of coupler and rocker meet where the ranges say, to half a step."""
        rng = np.random.default_rng(seed)
        l1, l2, l3 = (float(v) for v in rng.uniform(0.05, 0.5, 3))
        angle, ground = rng.uniform(-3.0, 3.0), rng.uniform(0.05, 0.6)
        linkage = four_bar(l1, l2, l3, (ground * math.cos(angle), ground * math.sin(angle)))
        linkage = attrs.evolve(linkage, crank=attrs.evolve(linkage.crank, skew=float(rng.uniform(-1, 1))))
        q = np.linspace(-math.pi, math.pi, 3601)
        end = l1 * np.exp(1j * (q + linkage.crank.skew))
        away = np.abs(end - ground * np.exp(1j * angle))
        meets = (away <= l2 + l3) & (away >= abs(l2 - l3))
        inside = np.full(q.shape, False)
        near = np.full(q.shape, False)
        ranges = linkage.closable()
        for low, high in ranges:
            for turn in (-2 * math.pi, 0.0, 2 * math.pi):
                inside |= (q >= low + turn) & (q <= high + turn)
                near |= (np.abs(q - low - turn) < 1e-9) | (np.abs(q - high - turn) < 1e-9)
        assert np.array_equal(inside[~near], meets[~near])
        assert np.array_equal((linkage.missing(q) <= 0.0)[~near], meets[~near])
        if len(ranges) == 1 and ranges[0][1] - ranges[0][0] < 2 * math.pi - 1e-9:
            for end_ in ranges[0]:
                assert linkage.dead_point_margin(end_ + 0.0) < 1e-5 or math.isnan(linkage.dead_point_margin(end_))

    def test_closable_of_the_four_kinds(self):
        assert four_bar(0.1, 0.35, 0.3).closable() == ((-math.pi, math.pi),)
        (only,) = four_bar(0.3, 0.2, 0.2, (0.4, 0.0)).closable()  # cosine law: cos = (0.09 + 0.16 - 0.16)/0.24
        assert only == pytest.approx((-math.acos(0.375), math.acos(0.375)), abs=1e-15)
        assert four_bar(0.1, 0.1, 0.1, (0.4, 0.0)).closable() == ()
        assert len(four_bar(0.3, 0.35, 0.1, (0.3, 0.0)).closable()) == 2

    def test_closable_refuses_many_at_once(self):
        with pytest.raises(
            InputError, match=r"^FourBar\.closable must be of one linkage, got lengths that are arrays$"
        ):
            four_bar(l1=np.array([0.1, 0.2])).closable()
        with pytest.raises(InputError, match=r"^FourBar\.second_pivot must lie away from the crank's pivot, got "):
            four_bar(pivot=(0.0, 0.0)).closable()


class TestPosesThatDoNotClose:
    def test_an_error_says_where_and_how_much_is_missing(self):
        mech = Mechanism(four_bar(0.3, 0.2, 0.2, (0.4, 0.0)))
        # straight away from the second pivot, 0.7 m lie between the crank's end and it: 0.3 m too many
        message = (
            r"^q must be poses at which every loop closes, got 180 deg, where 300 mm missing; .*unreachable='nan'$"
        )
        for q in (math.pi, [0.1, math.pi, 2.0], [[0.1], [math.pi]]):
            with pytest.raises(InputError, match=message):
                mech.holding_torque(q)

    def test_an_error_at_a_pose_of_two_joints_and_of_many_builds(self):
        ram = Link("ram", length=0.1, joint="prismatic", pivot=Point("ground", (0.5, 0.0)))
        dyad = Dyad(
            first=Link("a", length=0.2),
            last=Link("b", length=0.2),
            between=(Point("crank", (0.1, 0.0)), Point("ram", (0.0, 0.0))),
        )
        linkage = PlanarLinkage([Link("crank", length=0.1), ram, dyad])
        with pytest.raises(InputError, match=r"closes, got 180 deg, 250 mm, where 450 mm missing"):
            Mechanism(linkage).energy([[math.pi / 2, -0.2], [math.pi, 0.25]])
        with pytest.raises(InputError, match=r"closes, got 180 deg, 250 mm, where 450 mm missing"):
            Mechanism(linkage).energy(["180 deg", "250 mm"])
        builds = Mechanism(four_bar(l1=np.array([[0.3], [0.31]]), l2=0.2, l3=0.2, pivot=(0.4, 0.0)))
        with pytest.raises(InputError, match=r"closes, got 310 mm missing; "):
            builds.energy(np.array([0.0, math.pi]))

    def test_nan_where_asked_for(self):
        mech = Mechanism(four_bar(0.3, 0.2, 0.2, (0.4, 0.0), unreachable="nan"))
        q = np.array([0.3, 2.0, math.nan])
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            for method in ("holding_torque", "gravity_torque", "spring_torque", "energy", "stiffness", "friction_band"):
                assert np.isnan(getattr(mech, method)(q)).tolist() == [False, True, True], method
                assert math.isnan(getattr(mech, method)(2.0)), method
                assert not math.isnan(getattr(mech, method)(0.3)), method
            assert np.isnan(mech.pivot_load(q)).all(axis=-1).tolist() == [False, True, True]
            assert np.isnan(mech.linkage.position(mech.linkage.tip, q)[0]).tolist() == [False, True, True]
        fast = Feedforward(mech).compile()
        assert math.isnan(fast(2.0))
        assert fast(0.3) == pytest.approx(mech.holding_torque(0.3), rel=1e-13)

    def test_two_joints_give_rows_of_nan(self):
        linkage = FiveBar(
            first_crank=Link("one", Body(1.0, (0.1, 0.0)), length=0.2),
            second_crank=Link("two", length=0.2),
            first_coupler=Link("three", length=0.15),
            second_coupler=Link("four", length=0.15),
            second_pivot=(0.1, 0.0),
            unreachable="nan",
        )
        mech = Mechanism(linkage)
        q = np.array([[1.5, 1.6], [math.pi, 0.0], [1.5, math.nan]])
        assert np.isnan(mech.holding_torque(q)).tolist() == [[False] * 2, [True] * 2, [True] * 2]
        assert np.isnan(mech.stiffness(q)).all(axis=(1, 2)).tolist() == [False, True, True]
        assert np.isnan(mech.stiffness(q[1])).all()

    def test_what_an_earlier_loop_lacks_is_not_hidden_by_a_later_one(self):
        def nested(first, second):
            return PlanarLinkage([
                Link("crank", length=0.1, pivot=GROUND),
                Dyad(
                    first=Link("a", length=first), last=Link("b", length=first),
                    between=(Point("crank", (0.1, 0.0)), Point("ground", (0.5, 0.0))),
                ),
                Dyad(
                    first=Link("c", length=second), last=Link("d", length=second),
                    between=(Point("a", (first, 0.0)), Point("ground", (0.3, -0.1))),
                ),
            ])  # fmt: skip

        for q in (0.0, np.zeros(3)):
            assert np.all(nested(0.3, 0.3).missing(q) < 0.0)
            assert nested(0.15, 0.3).missing(q) == pytest.approx(0.1, abs=1e-15)
            assert np.all(nested(0.3, 0.05).missing(q) > 0.0)
            with pytest.raises(InputError, match=r"where 100 mm missing"):
                Mechanism(nested(0.15, 0.3)).holding_torque(q)
        assert math.isnan(nested(0.3, 0.3).missing(math.nan))


class TestDeadPoints:
    def test_at_a_dead_point_places_are_known_and_rates_are_not(self):
        # links of 3, 2 and 2 in a row over a ground of 5: 0.2 + 0.2 m reach just across 0.4 m
        linkage = four_bar(0.25, 0.25, 0.25, (0.75, 0.0), unreachable="nan")
        assert linkage.missing(0.0) == 0.0
        assert linkage.dead_point_margin(0.0) == 0.0
        assert linkage.position(Point("coupler", (0.25, 0.0)), 0.0) == pytest.approx((0.5, 0.0), abs=1e-15)
        for rate in linkage.jacobian(Point("coupler", (0.25, 0.0)), 0.0)[0]:
            assert math.isnan(rate)
        mech = Mechanism(linkage)
        assert math.isfinite(mech.energy(0.0))
        assert math.isnan(mech.holding_torque(0.0))
        assert math.isnan(mech.stiffness(0.0))
        assert np.isnan(mech.pivot_load(0.0)[1:]).all()
        assert np.isnan(mech.holding_torque(np.zeros(2))).all()

    def test_rounding_does_not_open_a_loop(self):
        # 0.1 + 0.2 is more than 0.3 in floating point
        linkage = four_bar(0.1, 0.1, 0.2, (0.1 + 0.1 + 0.2, 0.0))
        assert linkage.missing(0.0) <= 0.0
        assert linkage.position(Point("rocker", (0.2, 0.0)), 0.0)[0] == pytest.approx(0.2, abs=1e-7)

    def test_links_of_one_length_over_one_point_are_nowhere(self):
        linkage = four_bar(0.35, 0.3, 0.3, (0.35, 0.0))
        assert math.isnan(linkage.position(linkage.tip, 0.0)[0])
        assert math.isnan(Mechanism(linkage).holding_torque(0.0))

    def test_a_slider_crank_at_its_dead_point(self):
        linkage = slider_crank(height=0.0)
        assert linkage.dead_point_margin(0.0) == pytest.approx(1.0)
        upright = slider_crank(length=0.1)
        assert upright.missing(math.pi / 2) <= 0.0
        assert upright.dead_point_margin(math.pi / 2) < 1e-7


class TestSliders:
    @pytest.mark.parametrize("branch", [1, -1])
    def test_the_slider_runs_on_its_line(self, branch):
        linkage = slider_crank(height=0.05, branch=branch)
        q = np.linspace(-3.0, 3.0, 31)
        x, y = linkage.position(Point("slider", (0.0, 0.0)), q)
        assert np.allclose(y, 0.05, atol=1e-15)
        # Pythagoras: the rod reaches from the crank's end to the line
        assert np.allclose(x, 0.1 * np.cos(q) + branch * np.sqrt(0.09 - (0.1 * np.sin(q) - 0.05) ** 2), atol=1e-15)

    def test_a_line_on_a_moving_body(self):
        linkage = PlanarLinkage([
            Link("table", length=0.1, pivot=Point("ground", (0.3, 0.0))),
            Link("crank", length=0.1, pivot=GROUND),
            SliderDyad(
                first=Link("rod", length=0.4), last=Link("slider"), start=Point("crank", (0.1, 0.0)),
                guide=Point("table", (0.05, 0.02)), direction="90 deg",
            ),
        ])  # fmt: skip
        q = (0.4, 0.7)
        place = complex(*linkage.position(Point("slider", (0.0, 0.0)), q))
        guide = complex(*linkage.position(Point("table", (0.05, 0.02)), q))
        along = (place - guide) / np.exp(1j * (0.4 + math.pi / 2))
        assert along.imag == pytest.approx(0.0, abs=1e-15)
        assert abs(place - complex(*linkage.position(Point("crank", (0.1, 0.0)), q))) == pytest.approx(0.4, abs=1e-15)

    def test_a_rod_that_is_too_short(self):
        linkage = slider_crank(length=0.1, height=-0.05)
        assert linkage.missing(math.pi / 2) == pytest.approx(0.05, abs=1e-15)
        with pytest.raises(InputError, match=r"got 90 deg, where 50 mm missing"):
            Mechanism(linkage).energy(math.pi / 2)


def test_parallelogram_of_a_five_bar():
    linkage = FiveBar(
        first_crank=Link("one", length=0.3),
        second_crank=Link("two", length=0.1),
        first_coupler=Link("three", length=0.1),
        second_coupler=Link("four", length=0.3),
        branch=1,
    )
    assert linkage.joint_names == ("one", "two")
    assert linkage.pivots == ("one", "two", "three", "three and four", "four")
    q = (0.3, -1.0)
    x, y = linkage.position(Point("three", (0.1, 0.0)), q)
    corner = 0.3 * np.exp(0.3j) + 0.1 * np.exp(-1.0j)
    assert complex(x, y) == pytest.approx(corner, abs=1e-15) or complex(x, y) != corner
    assert abs(complex(x, y) - 0.1 * np.exp(-1.0j)) == pytest.approx(0.3, abs=1e-15)


def test_posed_answers_as_the_linkage_does():
    linkage = four_bar()
    q = np.linspace(0.0, 1.0, 3)
    at_q = posed(linkage, q)
    point = Point("coupler", (0.1, 0.1))
    for where in (q, q + 0.1):
        assert np.array_equal(at_q.position(point, where), linkage.position(point, where))
        assert np.array_equal(at_q.jacobian(point, where), linkage.jacobian(point, where))
        assert np.array_equal(at_q.pivot_forces([], where), linkage.pivot_forces([], where))
    assert at_q.joint_names == linkage.joint_names
    with pytest.raises(InputError, match=r"^Point\.body must be one of"):
        at_q.position(Point("hand", (0, 0)), q)


LINK = Link("a", length=0.2)
ENDS = (Point("crank", (0.1, 0.0)), Point("ground", (0.3, 0.0)))


class TestErrors:
    @pytest.mark.parametrize(
        ("make", "error", "message"),
        [
            (
                lambda: Dyad(first=None, last=LINK, between=ENDS),
                InputTypeError,
                r"^Dyad\.first must be a Link, got None$",
            ),
            (
                lambda: Dyad(first=LINK, last=Link("b"), between=ENDS),
                InputError,
                r"^Link\.length must be > 0 m for Dyad\.last, got 0\.0 for 'b'$",
            ),
            (
                lambda: Dyad(first=attrs.evolve(LINK, skew=0.1), last=LINK, between=ENDS),
                InputError,
                r"^Dyad\.first must have no skew of its own, got 0\.1 for 'a'; the loop says where it is$",
            ),
            (
                lambda: Dyad(first=LINK, last=attrs.evolve(LINK, pivot=GROUND), between=ENDS),
                InputError,
                r"^Dyad\.last must have no pivot of its own, got Point\(",
            ),
            (
                lambda: Dyad(first=LINK, last=attrs.evolve(LINK, follows={"crank": 1.0}), between=ENDS),
                InputError,
                r"^Dyad\.last must have no follows of its own, got Coupling\(",
            ),
            (
                lambda: Dyad(first=LINK, last=attrs.evolve(LINK, joint="prismatic"), between=ENDS),
                InputError,
                r"^Dyad\.last must have no joint of its own, got 'prismatic' for 'a'",
            ),
            (
                lambda: Dyad(first=LINK, last=LINK, between=GROUND),
                InputTypeError,
                r"^Dyad\.between must be two Points, got ",
            ),
            (
                lambda: Dyad(first=LINK, last=LINK, between=(GROUND, 3)),
                InputTypeError,
                r"^Dyad\.between must be two Points",
            ),
            (
                lambda: Dyad(first=LINK, last=LINK, between=ENDS, branch=0),
                InputError,
                r"^Dyad\.branch must be \+1 or -1, got 0$",
            ),
            (
                lambda: Dyad(first=LINK, last=LINK, between=ENDS, branch=True),
                InputError,
                r"^Dyad\.branch .*, got True$",
            ),
            (
                lambda: slider_crank(length=0.0),
                InputError,
                r"^Link\.length must be > 0 m for SliderDyad\.first, got 0\.0",
            ),
            (lambda: slider_crank(branch=2), InputError, r"^SliderDyad\.branch must be \+1 or -1, got 2$"),
            (
                lambda: SliderDyad(first=LINK, last=LINK, start=3, guide=GROUND),
                InputTypeError,
                r"^SliderDyad\.start must be a Point, got 3$",
            ),
            (
                lambda: SliderDyad(first=LINK, last=LINK, start=GROUND, guide=None),
                InputTypeError,
                r"^SliderDyad\.guide must be a Point, got None$",
            ),
            (
                lambda: four_bar(l1=0.0),
                InputError,
                r"^Link\.length must be > 0 m for FourBar\.crank, got 0\.0 for 'crank'$",
            ),
            (
                lambda: four_bar(l2=0.0),
                InputError,
                r"^Link\.length must be > 0 m for Dyad\.first, got 0\.0 for 'coupler'$",
            ),
            (lambda: four_bar(branch=0), InputError, r"^FourBar\.branch must be \+1 or -1, got 0$"),
            (
                lambda: four_bar(unreachable="stop"),
                InputError,
                r"^FourBar\.unreachable must be 'error' or 'nan', got 'stop'$",
            ),
            (
                lambda: attrs.evolve(four_bar(), crank=None),
                InputTypeError,
                r"^FourBar\.crank must be a Link, got None$",
            ),
            (
                lambda: attrs.evolve(four_bar(), crank=Link("crank", length=0.1, pivot=GROUND)),
                InputError,
                r"^FourBar\.crank must turn by itself on a pivot that the FourBar states, got 'crank' with ",
            ),
            (
                lambda: attrs.evolve(four_bar(), rocker=Link("coupler", length=0.3)),
                InputError,
                r"^FourBar must have bodies of different names, got 'coupler' twice$",
            ),
            (lambda: PlanarLinkage([]), InputError, r"^PlanarLinkage\.parts must be at least one Link, got none$"),
            (
                lambda: PlanarLinkage([3]),
                InputTypeError,
                r"^PlanarLinkage\.parts must be Links, Dyads and SliderDyads, got 3$",
            ),
            (
                lambda: PlanarLinkage([Dyad(first=LINK, last=Link("b", length=0.1), between=ENDS)]),
                InputError,
                r"^PlanarLinkage must have a joint that is moved by itself, got none$",
            ),
            (
                lambda: PlanarLinkage(
                    [Dyad(first=LINK, last=Link("b", length=0.1), between=ENDS), Link("crank", length=0.1)]
                ),
                InputError,
                r"on earlier bodies \(ground\), got 'crank', which comes later, for 'a'$",
            ),
        ],
    )
    def test_what_is_wrong_is_named(self, make, error, message):
        with pytest.raises(error, match=message):
            make()

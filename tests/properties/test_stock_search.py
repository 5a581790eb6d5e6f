"""The stock search against every candidate, one by one, through the mechanism's own methods."""

from __future__ import annotations

import itertools
import math
from collections import Counter

import attrs
import numpy as np
import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from springpoise import Arm, Body, Cable, Disc, Mechanism, Point, SpringMount, Straight, balance
from springpoise.balance import PulleyRoute, Stock
from springpoise.balance.stock import mounts
from springpoise.balance.stock.windows import windows

moderate = settings(max_examples=30)
SLACK, OVER, ROOM, INSIDE, LIMIT = (
    "goes slack",
    "stretched beyond its longest length",
    "longer than the room in front of the pulley",
    "attachment inside the pulley",
    "worst residual above the limit",
)

stocks = st.lists(
    st.tuples(st.floats(50, 3000), st.floats(0.02, 0.12), st.floats(0, 0.9), st.floats(1.5, 15.0)),
    min_size=1,
    max_size=5,
).map(
    lambda rows: Stock(
        parts=[f"p{i}" for i in range(len(rows))],
        rate=[k for k, _, _, _ in rows],
        free_length=[l for _, l, _, _ in rows],
        initial_tension=[k * l * share for k, l, share, _ in rows],
        longest=[l * much for _, l, _, much in rows],
    )
)
arms = st.builds(
    lambda mass, x, y: Arm(Body(mass, (x, y))), st.floats(0.5, 5.0), st.floats(0.1, 0.5), st.floats(-0.1, 0.1)
)
radii = st.lists(st.floats(0.03, 0.2), min_size=1, max_size=3, unique=True)
heights = st.lists(st.floats(0.05, 0.3), min_size=1, max_size=3, unique=True)
counts = st.sampled_from([(1,), (1, 2), (2, 3)])
pulleys = st.sampled_from(
    [
        None,
        PulleyRoute(radius=0.012, spring_end=(-0.03, -0.45)),
        PulleyRoute(radius=0.02, spring_end=(0.05, -0.3), turn="ccw"),
    ]
)
directions = st.sampled_from(
    [([0.5 * math.pi], [0.0]), ([1.2, 1.7], [-0.1]), ([1.4], [-0.2, 0.3]), ([1.3, 2.0], [-0.15, 0.0])]
)
TRAVEL = (-0.9, 0.8)
Q = np.linspace(*TRAVEL, 23)


def _mount(arm, spring, count, radius, height, pulley, angle=0.5 * math.pi, skew=0.0):
    """The mount as documented, put together anew."""
    x, y = arm.moment
    # Straight gravity: with an anchor straight above, the attachment lies towards the com, and turns with the anchor.
    lie = math.atan2(y, x) + angle - 0.5 * math.pi + skew
    attach = Point("arm", (radius * math.cos(lie), radius * math.sin(lie)))
    anchor = height * np.array([math.cos(angle), math.sin(angle)])
    straight = Straight(Point("ground", tuple(anchor.tolist())), attach)
    if pulley is None:
        return SpringMount(spring, straight, count=count)
    disc = Disc(Point("ground", _centre(height, pulley, angle)), radius=pulley.radius, turn=pulley.turn)
    cable = Cable(Point("ground", pulley.spring_end), disc, attach)
    middle = 0.5 * (TRAVEL[0] + TRAVEL[1])
    zero = cable.length(arm, middle) - straight.length(arm, middle)
    return SpringMount(spring, cable, count=count, rigid_length=zero - spring.effective_free_length)


def _centre(height, pulley, angle=0.5 * math.pi):
    """Centre of a pulley that touches the line from pivot to anchor at the anchor."""
    aside = -pulley.radius if pulley.turn == "cw" else pulley.radius
    x, y = math.cos(angle), math.sin(angle)
    return height * x + aside * y, height * y - aside * x


def _room(height, pulley, angle=0.5 * math.pi):
    if pulley is None:
        return math.inf
    away = math.dist(_centre(height, pulley, angle), pulley.spring_end)
    return math.sqrt(away**2 - pulley.radius**2)


@attrs.frozen
class Tried:
    part: int
    count: int
    radius: float
    height: float
    angle: float
    skew: float
    worst: float
    pivot: float
    slack: float
    over: float
    room: float
    reason: str | None


def _every_candidate(arm, stock, radii, heights, counts, pulley, limit, angles, skews):
    mech = Mechanism(arm, travel=TRAVEL)
    places = itertools.product(range(len(stock)), counts, radii, heights, angles, skews)
    for part, count, radius, height, angle, skew in places:
        spring = stock.spring(part)
        where = (part, count, radius, height, angle, skew)
        mount = _mount(arm, spring, count, radius, height, pulley, angle, skew)
        length = mount.spring_length(arm, Q)
        if not np.all(np.isfinite(length)):
            assert pulley is not None
            yield Tried(*where, math.nan, math.nan, math.nan, math.nan, math.nan, INSIDE)
            continue
        one = mech.with_springs(mount)
        worst = float(np.max(np.abs(one.holding_torque(Q))))
        slack, over = spring.free_length - length.min(), length.max() - spring.longest
        room = length.max() - _room(height, pulley, angle)
        # A candidate on the very edge would be decided by rounding.
        assume(min(abs(slack), abs(over), abs(room), abs(worst - limit)) > 1e-12)
        reason = SLACK if slack >= 0 else OVER if over > 0 else ROOM if room > 0 else LIMIT if worst > limit else None
        pivot = float(np.max(one.pivot_load(Q)))
        yield Tried(*where, worst, pivot, slack, over, room, reason)


@moderate
@given(
    arm=arms,
    stock=stocks,
    radii=radii,
    heights=heights,
    counts=counts,
    pulley=pulleys,
    share=st.sampled_from([math.inf, 0.3, 0.05]),
    directions=directions,
    chunk=st.sampled_from([1, 5, 2_000_000]),
)
def test_search_equals_brute_force(arm, stock, radii, heights, counts, pulley, share, directions, chunk):
    limit = share * 9.80665 * math.hypot(*arm.moment)
    if pulley is None:  # a straight spring turned as a whole leaves the same torque: equal up to rounding
        directions = directions[0][:1], directions[1]
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(mounts, "CANDIDATES", chunk)
        found = balance.search_stock(
            Mechanism(arm, travel=TRAVEL), stock, attach_radii=radii, anchor_heights=heights, counts=counts, over=Q,
            anchor_angles=directions[0], attach_skews=directions[1],
            pulley=pulley, residual_limit=None if math.isinf(limit) else limit, refine=0, keep=100,
        )  # fmt: skip
    tried = list(_every_candidate(arm, stock, radii, heights, counts, pulley, limit, *directions))
    assert found.considered == len(tried)
    assert found.rejected == Counter(one.reason for one in tried if one.reason)

    fits = [one for one in tried if one.reason is None]
    best = {}
    for one in sorted(fits, key=lambda one: one.worst):
        best.setdefault((one.part, one.count), one)
    assert [c.residual.worst for c in found.candidates] == pytest.approx([one.worst for one in best.values()], rel=1e-9)
    assert {(c.index, c.count) for c in found.candidates} == set(best)
    for c in found.candidates:
        one = best[c.index, c.count]
        assert (c.attach_radius, c.anchor_height) == (one.radius, one.height) or c.residual.worst == pytest.approx(
            one.worst
        )
        assert c.slack_margin > 0 and c.stretch_margin >= 0
        assert c.lacks is None and not c.refined

    _same_front(found, fits, best)
    _same_miss(found, tried, limit)


def _same_front(found, fits, best):
    """Rounding may keep one on the front whose equal is better otherwise, and chooses among parts that leave alike."""
    by_mount = {}
    for one in sorted(fits, key=lambda one: (one.worst, one.part)):
        by_mount.setdefault((one.radius, one.height, one.angle, one.skew, one.count), one)
    pool = [(one.worst, one.count, one.pivot) for one in [*best.values(), *by_mount.values()]]
    mine = [(c.residual.worst, c.count, c.pivot_load) for c in found.pareto]
    more, less = 1.0 + 1e-9, 1.0 - 1e-9
    for worst, count, pivot in pool:
        assert any(w <= worst * more and n <= count and p <= pivot * more for w, n, p in mine)
    for worst, count, pivot in mine:
        assert not any(w < worst * less and n <= count and p < pivot * more for w, n, p in pool)
        assert any((worst, pivot) == pytest.approx((o.worst, o.pivot), rel=1e-9) for o in fits if o.count == count)
    assert [worst for worst, _, _ in mine] == sorted(worst for worst, _, _ in mine)


def _same_miss(found, tried, limit):
    if found.success:
        assert found.nearest_miss is None
        assert found.best is found.candidates[0]
        return
    miss = found.nearest_miss
    over_limit = [one for one in tried if one.reason == LIMIT]
    if over_limit:
        nearest = min(one.worst for one in over_limit)
        assert miss.residual.worst == pytest.approx(nearest, rel=1e-9)
        assert miss.lacks == f"its worst residual is {miss.residual.worst - limit:.4g} N*m above the limit"
    elif all(one.reason == INSIDE for one in tried):
        assert miss is None
        return
    else:
        out = min(max(one.slack, one.over, one.room) for one in tried if one.reason != INSIDE)
        assert max(-miss.slack_margin, -miss.stretch_margin) <= out + 1e-9
        assert f"by {1e3 * out:.3g} mm" in miss.lacks
    with pytest.raises(Exception, match=miss.part):
        found.require()


@settings(max_examples=12)
@given(
    arm=arms,
    stock=stocks,
    pulley=pulleys,
    low=st.floats(0.03, 0.1),
    high=st.floats(0.15, 0.3),
    step=st.sampled_from([1e-4, 5e-4, 1e-3]),
)
@example(
    arm=Arm(Body(2.0, (0.35, 0.0))),
    stock=Stock(parts=["a"], rate=[900.0], free_length=[0.05], initial_tension=[30.0], longest=[0.5]),
    pulley=None, low=0.05, high=0.2, step=1e-3,
)  # fmt: skip
def test_refining_never_makes_worse_and_stays_in_the_box(arm, stock, pulley, low, high, step):
    mech = Mechanism(arm, travel=TRAVEL)
    box = {"attach_radii": [low, high], "anchor_heights": np.linspace(0.08, 0.3, 3)}
    plain, better = (
        balance.search_stock(mech, stock, **box, over=Q, pulley=pulley, refine=n, resolution=step) for n in (0, 3)
    )
    assert better.rejected == plain.rejected
    assert better.success == plain.success
    worst = {(c.index, c.count): c.residual.worst for c in plain.candidates}
    ranks = [c.residual.worst for c in better.candidates]
    assert ranks == sorted(ranks)
    for c in better.candidates:
        assert c.residual.worst <= worst[c.index, c.count] * (1 + 1e-12)
        assert c.residual.worst == pytest.approx(np.max(np.abs(c.mechanism.holding_torque(Q))), rel=1e-12)
        # Rounded to steps, a value may lie beyond the box's edge by rounding of its own.
        assert low - 1e-12 <= c.attach_radius <= high + 1e-12
        assert 0.08 - 1e-12 <= c.anchor_height <= 0.3 + 1e-12
        length = c.mechanism.spring_states(Q)[0].length
        assert length.min() > stock.free_length[c.index]
        assert length.max() <= min(stock.longest[c.index], _room(c.anchor_height, pulley)) + 1e-12
        if c.refined:
            for value in (c.attach_radius, c.anchor_height):
                assert abs(value / step - round(value / step)) < 1e-6


@moderate
@given(
    arm=arms,
    stock=stocks,
    radii=radii,
    heights=heights,
    long=st.sampled_from([0.5, 2.0, 4.0]),
    strong=st.sampled_from([0.5, 2.0]),
)
def test_scaled_arms_and_stocks_have_scaled_answers(arm, stock, radii, heights, long, strong):
    """Powers of two, so that no candidate changes sides by rounding."""
    body = arm.bodies[0]
    bigger = Arm(Body(body.mass * strong, (body.com[0] * long, body.com[1] * long)))
    other = Stock(
        parts=stock.parts,
        rate=stock.rate * strong / long,
        free_length=stock.free_length * long,
        initial_tension=stock.initial_tension * strong,
        longest=stock.longest * long,
    )
    one = balance.search_stock(arm, stock, attach_radii=radii, anchor_heights=heights, over=Q, refine=0)
    two = balance.search_stock(
        bigger, other, attach_radii=np.array(radii) * long, anchor_heights=np.array(heights) * long, over=Q, refine=0
    )
    assert one.rejected == two.rejected
    assert len(one.candidates) == len(two.candidates)
    for a, b in zip(one.candidates, two.candidates, strict=True):
        assert b.residual.worst == pytest.approx(a.residual.worst * long * strong, rel=1e-9)
        assert b.pivot_load == pytest.approx(a.pivot_load * strong, rel=1e-9)
        assert b.slack_margin == pytest.approx(a.slack_margin * long, rel=1e-9)
        assert b.stored_energy == pytest.approx(a.stored_energy * long * strong, rel=1e-9)


@settings(max_examples=15)
@given(
    seed=st.integers(0, 2**32 - 1),
    parts=st.integers(1, 400),
    share=st.sampled_from([math.inf, 0.5, 0.1]),
    margin=st.sampled_from([0.0, 0.01]),
    keep=st.integers(1, 6),
    chunk=st.sampled_from([(1, 1), (500, 2048), (5000, 7), (10**7, 2048)]),
    kinds=st.sampled_from([1, 3, 400]),
)
def test_a_long_list_against_the_formula_written_out(seed, parts, share, margin, keep, chunk, kinds):
    """Law of cosines, all springs at all mounts at once; counts, ranks and rejections must agree, of equal springs too."""
    random = np.random.default_rng(seed)
    rate, free = random.uniform(100, 4000, parts), random.uniform(0.02, 0.3, parts)
    longest, tension = free * random.uniform(1.3, 4, parts), rate * free * random.uniform(0, 0.9, parts)
    kind = np.arange(parts) if kinds >= parts else random.integers(0, kinds, parts)
    rate, free, longest, tension = rate[kind], free[kind], longest[kind], tension[kind]
    stock = Stock(parts=map(str, range(parts)), rate=rate, free_length=free, initial_tension=tension, longest=longest)
    radii, heights, skews = np.linspace(0.04, 0.2, 5), np.linspace(0.06, 0.3, 4), np.array([-0.2, 0.1])
    weight = 2.0 * 9.80665 * 0.35
    limit = share * weight
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(mounts, "CANDIDATES", chunk[0])
        patch.setattr(mounts, "MOUNTS", chunk[1])
        found = balance.search_stock(
            Arm(Body(2.0, (0.35, 0.0))), stock, attach_radii=radii, anchor_heights=heights, attach_skews=skews, over=Q,
            residual_limit=None if math.isinf(limit) else limit, least_margin=margin, keep=keep, refine=0,
        )  # fmt: skip

    # axes: count, part, skew, height, radius, pose
    count, k = np.array([1, 2]).reshape(2, 1, 1, 1, 1, 1), rate[:, None, None, None, None]
    skew, h, r = skews[:, None, None, None], heights[:, None, None], radii[:, None]
    between = 0.5 * math.pi - Q - skew
    length = np.sqrt(r**2 + h**2 - 2 * r * h * np.cos(between))
    pull = count * (tension[:, None, None, None, None] + k * (length - free[:, None, None, None, None]))
    worst = np.abs(weight * np.cos(Q) - pull * r * h * np.sin(between) / length).max(-1)
    slack = np.broadcast_to(length.min(-1) - margin - free[:, None, None, None] <= 0, worst.shape)
    over = np.broadcast_to(length.max(-1) + margin - longest[:, None, None, None] > 0, worst.shape) & ~slack
    above = ~slack & ~over & (worst > limit)
    near = f", or nearer to it than {1e3 * margin:g} mm" if margin else ""
    expected = {SLACK + near: int(slack.sum()), OVER + near: int(over.sum()), LIMIT: int(above.sum())}
    assert found.rejected == {reason: number for reason, number in expected.items() if number}
    left = np.where(slack | over | above, np.inf, worst).min(axis=(2, 3, 4)).ravel()
    ranked = np.sort(left)[:keep]
    assert [c.residual.worst for c in found.candidates] == pytest.approx(ranked[np.isfinite(ranked)].tolist(), rel=1e-9)
    assert found.considered == worst.size


@given(
    shortest=st.lists(st.integers(0, 30), min_size=1, max_size=200),
    data=st.data(),
)
def test_windows_hold_just_the_springs_that_fit(shortest, data):
    longest = data.draw(st.lists(st.integers(0, 40), min_size=len(shortest), max_size=len(shortest)))
    least, greatest = data.draw(st.integers(-1, 41)), data.draw(st.integers(-1, 41))
    found = windows(np.array(shortest, float), np.array(longest, float))
    short = int(found.short_enough(np.array([float(least)]))[0])
    fits = [i for i, (a, b) in enumerate(zip(shortest, longest, strict=True)) if a < least and b >= greatest]
    assert short == sum(a < least for a in shortest)
    assert found.fitting(short, float(greatest)).tolist() == fits
    assert found.any_fits(np.array([short]), np.array([float(greatest)])).tolist() == [bool(fits)]

"""Springs side by side and one behind the other."""

import math

import numpy as np
import pytest

from springpoise.errors import InputError, InputTypeError
from springpoise.springs import (
    CompressionSpring,
    ConstantForceSpring,
    ExtensionSpring,
    MeasuredSpring,
    OffsetSpring,
    TorsionSpring,
    ZeroLengthSpring,
    in_parallel,
    in_series,
    wire_rope,
)


def test_parallel_adds_loads_energies_and_bands():
    measured = MeasuredSpring([0.1, 0.3], [5.0, 25.0], unloading=[4.0, 24.0])
    pair = in_parallel(ZeroLengthSpring(100), measured)
    assert pair.load(0.2) == pytest.approx(20 + 14.5)
    assert pair.stiffness(0.2) == pytest.approx(200)
    assert pair.hysteresis(0.2) == pytest.approx(0.5)
    assert pair.energy(0.2) == pytest.approx(2.0 + measured.energy(0.2))
    assert pair.working_range == (0.0, 0.3)


def test_a_staged_pair_is_bilinear():
    late = OffsetSpring(ExtensionSpring(1000, free_length=0.1, longest=0.2), by=0.02)
    pair = in_parallel(ExtensionSpring(500, free_length=0.1), late)
    assert pair.load(0.11) == pytest.approx(5.0)
    assert pair.load(0.13) == pytest.approx(15.0 + 10.0)
    assert late.working_range == pytest.approx((0.12, 0.22))
    assert late.energy(0.13) == pytest.approx(0.05)
    assert late.stiffness(0.13) == 1000
    assert late.hysteresis(0.13) == 0.0


def test_series_of_preloaded_springs():
    # Closed form y = sum max(0, F - Fi)/ki: y(5) = 0, y(8) = 3, y(20) = 21 mm, then 2/3 N/mm.
    chain = in_series(
        ExtensionSpring("2 N/mm", free_length=0.05, initial_tension=8),
        ExtensionSpring("1 N/mm", free_length=0.05, initial_tension=5),
    )
    assert chain.load(0.1) == 0.0
    assert chain.load(0.1 + 1e-12) == pytest.approx(5.0)
    assert chain.load(0.103) == pytest.approx(8.0, rel=1e-12)
    assert chain.load(0.121) == pytest.approx(20.0, rel=1e-12)
    assert chain.stiffness(0.2) == pytest.approx(2000 / 3, rel=1e-12)
    assert chain.working_range == (0.1, math.inf)


def test_series_with_a_cable():
    # Arithmetic: 2 mm rope, half metal, 100 GPa, 600 mm is 261.799 N/mm; with 3 N/mm in series 2.966012 N/mm.
    rope = wire_rope(diameter="2 mm", fill=0.5, modulus="100 GPa", length="600 mm")
    assert rope.rate == pytest.approx(261799.388, rel=1e-8)
    chain = in_series(ExtensionSpring("3 N/mm", free_length=0.1), rope)
    assert chain.stiffness(0.75) == pytest.approx(2966.012, rel=1e-6)


def test_series_of_pushing_springs_and_a_plateau():
    chain = in_series(
        CompressionSpring(1000, free_length=0.1, solid_length=0.05),
        CompressionSpring(2000, free_length=0.1, solid_length=0.08),
    )
    assert chain.load(0.17) == pytest.approx(-20.0)
    assert chain.energy(0.17) == pytest.approx(0.3)
    assert chain.load(0.25) == 0.0
    assert math.isnan(chain.load(0.1))
    capped = in_series(ConstantForceSpring(20), ZeroLengthSpring(400))
    assert capped.load(0.02) == pytest.approx(8.0)
    assert capped.load(0.5) == pytest.approx(20.0)


def _curved(scale, softening):
    lengths = np.linspace(0.1, 0.4, 13)
    return MeasuredSpring(lengths, scale * (lengths - 0.1 + softening * (lengths - 0.1) ** 2))


def test_series_of_curved_springs_against_brute_force_equilibrium():
    from scipy.optimize import brentq

    first, second, third = (
        _curved(300, 2.0),
        _curved(500, -0.8),
        ExtensionSpring(400, free_length=0.05, initial_tension=9),
    )
    chain = in_series(first, second, third)

    def slack_length(load):
        return 0.05 + max(0.0, load - 9) / 400

    for load in (2.0, 8.9, 9.1, 30.0, 60.0):
        each = [brentq(lambda x, s=s, f=load: s.load(x) - f, 0.1, 0.4, xtol=1e-15) for s in (first, second)]
        total = sum(each) + slack_length(load)
        assert chain.load(total) == pytest.approx(load, abs=1e-6)


@pytest.mark.parametrize("where", [0.26, 0.35, 0.5])
def test_series_energy_is_the_sum_of_the_parts(where):
    from scipy.integrate import quad

    chain = in_series(_curved(300, 2.0), _curved(500, -0.8))
    total = quad(chain.load, chain.working_range[0], where, epsabs=1e-12, limit=400)[0]
    assert chain.energy(where) == pytest.approx(total, rel=1e-7)


def test_series_hysteresis_is_weighed_by_compliance():
    soft = MeasuredSpring([0.1, 0.3], [0.0, 20.0], unloading=[0.0, 18.0])
    chain = in_series(soft, ZeroLengthSpring(1e7))
    assert chain.hysteresis(0.3 - 1e-9 + 1.9e-6) == pytest.approx(1.0, rel=2e-2)
    assert in_series(ZeroLengthSpring(1), ZeroLengthSpring(2)).hysteresis(0.3) == 0.0


def test_what_does_not_go_together():
    push, pull = CompressionSpring(1000, free_length=0.1, solid_length=0.05), ZeroLengthSpring(100)
    with pytest.raises(InputError, match="springs that pull and springs that push do not go in series"):
        in_series(push, pull)
    with pytest.raises(InputTypeError, match=r"ParallelSprings\.springs must be at least one spring, got none"):
        in_parallel()
    with pytest.raises(
        InputTypeError, match=r"SeriesSprings\.springs must have load, stiffness and energy methods, got 'soft'"
    ):
        in_series("soft")
    with pytest.raises(InputError, match=r"single values, got an array as ZeroLengthSpring\.rate"):
        in_series(ZeroLengthSpring([100.0, 200.0]))
    with pytest.raises(
        InputError, match=r"whose load grows with length, got MeasuredSpring whose load does not grow at"
    ):
        in_series(MeasuredSpring([0.1, 0.2, 0.3], [1.0, 3.0, 2.0]))
    with pytest.raises(InputError, match=r"finite working range, got TorsionSpring with \(-inf, inf\)"):
        in_series(TorsionSpring(3.0))


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"fill": 1.5}, r"fill must be above 0 and at most 1, got 1\.5"),
        ({"length": 0}, r"length must be > 0, got 0\.0"),
    ],
)
def test_bad_rope(change, message):
    arguments = {"diameter": 0.002, "fill": 0.5, "modulus": 1e11, "length": 0.6} | change
    with pytest.raises(InputError, match=message):
        wire_rope(**arguments)


@pytest.mark.parametrize("at", [0.15, 0.2])
def test_relaxation_takes_the_stated_share_of_the_load(at):
    for spring in (
        ExtensionSpring(1000, free_length=0.1, initial_tension=2),
        ExtensionSpring(1000, free_length=0.1, initial_tension=50),
        CompressionSpring(800, free_length=0.3, solid_length=0.1),
        TorsionSpring(4.0, free_angle=-0.3),
    ):
        assert spring.after(load_loss=0.1, at=at).load(at) == pytest.approx(0.9 * spring.load(at))
    for spring in (ZeroLengthSpring(300), ConstantForceSpring(20)):
        assert spring.after(load_loss=0.1).load(at) == pytest.approx(0.9 * spring.load(at))


def test_warm_springs():
    for spring in (
        ExtensionSpring(1000, free_length=0.1, initial_tension=2),
        CompressionSpring(800, free_length=0.3, solid_length=0.1),
        TorsionSpring(4.0),
        ZeroLengthSpring(300),
    ):
        warm = spring.at_temperature("120 degC", rate_slope="-0.25e-3 1/K")
        assert warm.load(0.25) == pytest.approx(0.975 * spring.load(0.25))
    assert ConstantForceSpring(20).at_temperature(393.15, pull_slope=-0.25e-3).pull == pytest.approx(19.5)


def test_bad_service():
    with pytest.raises(InputError, match=r"load_loss must be from 0 to below 1, got 1\.2"):
        ZeroLengthSpring(300).after(load_loss=1.2)
    with pytest.raises(InputError, match=r"temperature must be an absolute temperature in K, got 40; write '40 degC'"):
        ZeroLengthSpring(300).at_temperature(40, rate_slope=-1e-3)
    with pytest.raises(InputError, match=r"rate_slope must leave a load at that temperature, got -0\.1 1/K"):
        ZeroLengthSpring(300).at_temperature("120 degC", rate_slope=-0.1)
    with pytest.raises(InputError, match=r"at must be > free_length \(0\.1\) m, got 0\.05"):
        ExtensionSpring(1000, free_length=0.1).after(load_loss=0.1, at=0.05)
    with pytest.raises(InputError, match=r"at must be < free_length \(0\.3\) m, got 0\.4"):
        CompressionSpring(800, free_length=0.3, solid_length=0.1).after(load_loss=0.1, at=0.4)


def _tube():
    from springpoise.springs import RubberTube, rubber

    law = rubber.Yeoh(c1=0.2315e6, c2=-3.3075e3, c3=107.03, fitted_over=(1.0, 4.4))
    return RubberTube(outer_diameter=9.5e-3, inner_diameter=6.4e-3, free_length=0.3, law=law)


def test_a_tube_that_is_slack_at_its_end_goes_in_series_with_a_rope():
    from scipy.optimize import brentq

    tube, rope = _tube(), wire_rope(diameter="2 mm", fill=0.5, modulus="1 GPa", length="0.5 m")
    chain = in_series(tube, rope)
    for load in (0.5, 5.0, 20.0, 40.0):
        total = brentq(lambda x, f=load: tube.load(x) - f, 0.3, 1.3, xtol=1e-15) + 0.5 + load / rope.rate
        assert chain.load(total) == pytest.approx(load, abs=1e-6)


def test_chains_offsets_and_pairs_inside_a_chain_are_exact():
    first = ExtensionSpring(2000, free_length=0.05, initial_tension=8)
    second = ExtensionSpring(1000, free_length=0.05, initial_tension=5)
    third = ExtensionSpring(500, free_length=0.04)
    flat = in_series(first, second, third)
    nested = in_series(in_series(first, second), third)
    assert nested == flat
    moved = in_series(OffsetSpring(first, by=0.02), second, third)
    for load in (3.0, 6.0, 20.0):
        x = 0.14 + load / 500 + max(load - 5, 0) / 1000 + max(load - 8, 0) / 2000
        assert flat.load(x) == pytest.approx(load, rel=1e-12)
        assert moved.load(x + 0.02) == pytest.approx(load, rel=1e-12)


def test_a_jump_inside_a_spring_stays_a_jump_in_the_chain():
    # The second of a parallel pair begins to pull with its initial tension at 0.137 m.
    late = OffsetSpring(ExtensionSpring(1000, free_length=0.1, initial_tension=6, longest=0.2), by=0.037)
    pair = in_parallel(ExtensionSpring(500, free_length=0.1, longest=0.2), late)
    soft = ExtensionSpring(400, free_length=0.05)
    chain = in_series(pair, soft)

    def total(load):
        # closed form: below 18.5 N one spring, from 24.5 N on both, between the pair stands still
        own = 0.1 + load / 500 if load <= 18.5 else 0.137 if load <= 24.5 else 0.137 + (load - 24.5) / 1500
        return own + 0.05 + load / 400

    for load in (5.0, 18.0, 20.0, 23.0, 30.0, 60.0):
        assert chain.load(total(load)) == pytest.approx(load, abs=1e-6)

"""Programs: replay, derivatives, and the two printers."""

import linecache
import math
import pickle
import traceback
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from springpoise.carriers import interpolate, namespace
from springpoise.errors import InputError
from springpoise.lookup import Lookup
from springpoise.tape import record
from springpoise.tape.blocks import BLOCK

TABLE = Lookup([0.0, 1.0, 3.0], [[1.0, 2.0], [3.0, -1.0]])
RNG = np.random.default_rng(7)


def pair(a, b):
    xp = namespace(a, b)
    return xp.sin(a) * b + xp.where(a > b, a, b * 2.0), xp.hypot(a, b)


PAIR = record(pair, inputs=("a", "b"))


def test_replay_on_carriers():
    # Independent: the formula itself.
    assert PAIR.replay(1.0, 2) == pair(1.0, 2.0)
    a, b = RNG.normal(size=5), RNG.normal(size=(3, 1))
    for ours, theirs in zip(PAIR.replay(a, b), pair(a, b), strict=True):
        np.testing.assert_array_equal(ours, theirs)
    strict = pytest.importorskip("array_api_strict")
    for ours, theirs in zip(PAIR.replay(strict.asarray(a), strict.asarray(a)), pair(a, a), strict=True):
        np.testing.assert_allclose(np.asarray(ours), theirs, rtol=1e-15)
    table = record(lambda q: interpolate(q, TABLE) + np.array([0.0, 1.0]))
    np.testing.assert_array_equal(np.asarray(table.replay(strict.asarray([0.5, 9.0]))), [2.0, np.nan])
    assert record(lambda q: PAIR.replay(q, 1.0)[0]).replay(2.0) == pair(2.0, 1.0)[0]


def test_constant_results_take_the_shape_of_the_inputs():
    program = record(lambda q: (q * 0.0 + 2.0, q))
    for result in (program.replay(np.zeros((2, 3))), program.numpy_function()(np.zeros((2, 3)))):
        np.testing.assert_array_equal(result[0], np.full((2, 3), 2.0))
    kept = np.ones(3)
    program.replay(kept)[1][0] = 5.0
    assert kept[0] == 1.0
    assert record(lambda: 2.0, inputs=()).numpy_function()() == 2.0
    assert record(lambda: 2.0, inputs=()).python_function()() == 2.0


def test_wrong_number_of_inputs():
    with pytest.raises(InputError, match=r"must get 2 inputs \('a', 'b'\), got 1"):
        PAIR.replay(1.0)
    with pytest.raises(InputError, match=r"program must get 2 inputs \('a', 'b'\), got 3"):
        PAIR.numpy_function()(1.0, 2.0, 3.0)
    with pytest.raises(TypeError, match="missing 1 required positional argument: 'b'"):
        PAIR.python_function()(1.0)


def test_derivatives_come_output_by_output():
    program = record(lambda a, b: (a * a * b, a + 3.0 * b), inputs=("a", "b"))
    # Independent: by hand.
    assert program.derivative().replay(2.0, 5.0) == (20.0, 4.0, 1.0, 3.0)
    assert program.derivative(["b"]).replay(2.0, 5.0) == (4.0, 3.0)
    assert program.derivative("b", with_values=True).replay(2.0, 5.0) == (20.0, 17.0, 4.0, 3.0)
    single = record(lambda a, b: a * b, inputs=("a", "b"))
    assert single.derivative("a").scalar
    assert not single.derivative().scalar
    assert single.derivative("a").replay(2.0, 5.0) == 5.0
    assert single.derivative().python_function()(2.0, 5.0) == (5.0, 2.0)


def test_derivative_names_must_be_inputs():
    with pytest.raises(InputError, match=r"must be among \('a', 'b'\), got 'c'"):
        PAIR.derivative("c")


def test_derivatives_share_what_they_can():
    program = record(lambda q: np.exp(q) * np.sin(q))
    both = program.derivative(with_values=True)
    assert len(both) == 6  # exp, sin, exp*sin; cos, exp*cos, and the sum, which reuses exp*sin
    assert [step.name for step in both.steps].count("exp") == 1


def test_equality_and_pickling():
    program = record(lambda q: np.array([1.0, 2.0]) * q + interpolate(q, TABLE))
    program.numpy_function()(1.0)
    again = pickle.loads(pickle.dumps(program))
    assert again == program
    assert hash(again) == hash(program)
    assert program != record(lambda q: np.array([1.0, 3.0]) * q + interpolate(q, TABLE))
    np.testing.assert_array_equal(again.numpy_function()(0.5), program.numpy_function()(0.5))
    assert "_functions" not in repr(program)


def test_functions_are_compiled_once():
    assert PAIR.python_function() is PAIR.python_function()
    assert PAIR.numpy_function("other") is PAIR.numpy_function("other")
    assert PAIR.numpy_function("other").__name__ == "other"


# ------------------------------------------------------------------------------------- plain Python


def test_a_zero_is_added_where_nan_could_be_lost():
    dropped = record(lambda q: np.where(np.cos(q) > 0.5, 1.0, 0.0) + 0.0 * q)
    assert dropped.python_source().count("return 1.0 if") == 0
    for program in (dropped, record(lambda q: 3.0), record(lambda q: np.maximum(1.0, 1.0 / q))):
        for bad in (math.nan, math.inf, -math.inf):
            assert math.isnan(program.python_function()(bad))
            assert math.isnan(program.numpy_function()(bad))
            assert np.isnan(program.numpy_function()(np.array([0.3, bad]))[1])
    kept = record(lambda a, b: np.sin(a) * 2.0 + np.cos(b), inputs=("a", "b"))
    assert " - " not in kept.python_source()
    for bad in (math.nan, math.inf):
        assert math.isnan(kept.python_function()(bad, 0.3))
        assert math.isnan(kept.python_function()(0.3, bad))


def test_printed_python_reads_like_a_formula():
    source = record(lambda q: 2.0 * np.cos(q) - (1.0 - q) * 3.0).python_source("torque")
    assert source == (
        "def torque(q):\n"
        "    q = float(q)\n"
        "    try:\n"
        "        return 2.0 * cos(q) - 3.0 * (1.0 - q)\n"
        "    except (ArithmeticError, ValueError):\n"
        "        return nan\n"
    )


@pytest.mark.parametrize(
    ("formula", "inputs", "expected"),
    [
        (lambda q: q - (1.0 - (2.0 - q)), [0.3], lambda q: q - (1.0 - (2.0 - q))),
        (lambda q: 1.0 / (2.0 / (3.0 + q)), [0.3], lambda q: 1.0 / (2.0 / (3.0 + q))),
        (lambda q: -(q + 1.0) * np.exp(-(q * q)), [0.3], lambda q: -(q + 1.0) * math.exp(-q * q)),
        (lambda q: np.where((q < 1) & ((q > 0) | ~(q == 5)), 1.0, np.where(q > 2, 2.0, 3.0)), [0.5, 1.5, 3], None),
        (lambda q: np.where(np.where(q > 0, q, -3.0) < 1, np.sign(q), np.sign(-q)), [-2, 0.5, 2.0], None),
        (lambda q: np.where(((q < 1) == (q < 2)) & ~((q > 0) & (q > 1)), -3.0, q), [0.5, 1.5, 3], None),
        (lambda q: np.maximum(q, -1.0) - np.minimum(-q, np.maximum(2.0, q * q)), [-3, 0.5, 3.0], None),
        (lambda q: np.where(q > 0, np.inf, q), [-1.0], lambda q: q),
        (lambda q: -np.abs(q) - -3.0 * (q - -2.0), [-1.5, 2.0], lambda q: -abs(q) + 3.0 * (q + 2.0)),
    ],
)
def test_printed_parentheses(formula, inputs, expected):
    function = record(formula).python_function()
    for x in inputs:
        # Independent: plain Python, or NumPy on the formula.
        assert function(x) == pytest.approx(float((expected or formula)(np.float64(x))), rel=1e-15)


def test_long_formulas_keep_to_short_lines():
    def formula(q):
        total = q
        for i in range(400):
            total = np.sin(total + i) * (1.0 + i) if i % 2 else total / (q + i + 1.0)
        return total

    program = record(formula)
    assert max(map(len, program.python_source().splitlines())) < 1000
    assert program.python_function()(0.3) == pytest.approx(program.replay(0.3), rel=1e-14)


def test_results_are_python_floats():
    for formula in (lambda q: q, lambda q: q * 0.0, lambda q: q * q, lambda q: q > 1.0, lambda q: np.abs(q)):
        function = record(formula).python_function()
        for x in (2, np.float64(2.0), np.float32(2.0), True):
            assert type(function(x)) is float
    with pytest.raises(TypeError, match="must be a string or a real number"):
        record(lambda q: q).python_function()(None)


@pytest.mark.parametrize("bad", [math.nan, math.inf, -math.inf])
def test_inputs_that_are_not_finite_give_nan_everywhere(bad):
    program = record(
        lambda a, b: (a, 1.0 + 0.0 * a, np.where(a > 0, 1.0, 2.0), np.maximum(a, b), np.exp(-a * a) + b, np.atan(b)),
        inputs=("a", "b"),
    )
    for inputs in [(bad, 1.0), (1.0, bad), (bad, -bad)]:
        assert all(map(math.isnan, program.python_function()(*inputs)))
        assert all(map(math.isnan, program.numpy_function()(*inputs)))
    a = np.array([1.0, bad, 2.0, 3.0])
    for result in program.numpy_function()(a, a[::-1].copy()):
        np.testing.assert_array_equal(np.isnan(result), [False, True, True, False])
    stiffness = program.derivative()
    assert all(map(math.isnan, stiffness.python_function()(bad, 1.0)))


@pytest.mark.parametrize(
    "formula",
    [
        lambda q: 1.0 / (1.0 + np.exp(q * 1000.0)),
        lambda q: 0.0 * np.sqrt(1.0 - q * q) + 1.0 / (1.0 / (q - 2.0)),
        lambda q: np.where(np.acos(q) > 1, 1.0, 2.0) + np.log(1.0 - q),
        lambda q: (1.0 - q) ** 0.3,
    ],
)
def test_leaving_the_domain_gives_nan_not_a_number(formula):
    function = record(lambda q: (formula(q), q)).python_function()
    assert all(map(math.isnan, function(2.0)))
    assert not any(map(math.isnan, function(-0.5)))


def test_stand_alone_text_needs_nothing():
    program = record(lambda q: (interpolate(q, TABLE) + np.sin(q) + np.where(q > 2.0, np.inf, 0.0), q))
    names: dict[str, object] = {}
    source = program.python_source("f", stand_alone=True)
    assert "springpoise" not in source
    exec(source, names)
    function = names["f"]
    for x in (0.0, 0.5, 1.0, 2.5, 3.0, -0.1, 3.1, math.nan):
        # Independent: the Lookup itself.
        expected = TABLE(x) + math.sin(x) + (math.inf if x > 2.0 else 0.0)
        assert function(x)[0] == pytest.approx(expected, nan_ok=True)
        assert program.python_function()(x) == pytest.approx(function(x), nan_ok=True)
    assert record(lambda q: np.array([2.0])[0] * q).python_source(stand_alone=True).startswith("from math import nan\n")


def test_names_in_printed_functions_do_not_collide():
    program = record(lambda sin, v2, f: np.sin(sin) * v2 + f, inputs=("sin", "v2", "f"))
    assert "def f(sin_, v2_, f_):" in program.python_source("f")
    assert program.python_function("f")(1.0, 2.0, 3.0) == pytest.approx(math.sin(1.0) * 2.0 + 3.0)
    for bad in ("2f", "sin", "v12", "class", "nan"):
        with pytest.raises(InputError, match=f"must be an identifier that is free, got '{bad}'"):
            program.python_source(bad)
    with pytest.raises(InputError, match="numpy_source name must be an identifier, got '2f'"):
        program.numpy_source("2f")


def test_array_constants_have_no_plain_function():
    with pytest.raises(InputError, match=r"array of shape \(2, 1\); use numpy_function"):
        record(lambda q: q + np.ones((2, 1))).python_source()


def test_a_traceback_shows_the_generated_line():
    function = record(lambda q: interpolate(q, TABLE)).python_function("shown")
    function.__globals__["table_0"] = None
    with pytest.raises(TypeError) as caught:
        function(1.0)
    assert any("table_0(q)" in line for line in traceback.format_tb(caught.value.__traceback__))
    filename = function.__code__.co_filename
    assert filename.startswith("<springpoise:shown")
    assert filename in linecache.cache


# -------------------------------------------------------------------------------------------- NumPy


def busy(a, b):
    xp = namespace(a, b)
    c = xp.sin(a) * b
    d = xp.where((c > 0.2) | (a < b), c / (1.0 + a * a), xp.maximum(b, -c))
    return d * 3.0 + xp.sqrt(xp.abs(c)), c, a, xp.where(a > 0.0, 1.0, 0.0) + xp.cos(b)


SHAPES = [
    ((), ()),
    ((0,), ()),
    ((7,), (7,)),
    ((3, 4), (3, 4)),
    ((5,), ()),
    ((), (5,)),
    ((20, 1), (1, 31)),
    ((300, 1), (121,)),
    ((121,), (300, 1)),
    ((1, 300), (121, 1)),
    ((9001, 3), (3,)),
    ((9001, 3), (9001, 1)),
    ((2, 3 * BLOCK + 5), (2, 1)),
    ((2, 3 * BLOCK + 5), (3 * BLOCK + 5,)),
    ((3, 50, 1, 200), (50, 1, 1)),
    ((2, 1, 70, 90), (2, 3, 1, 1)),
    ((2 * BLOCK,), (2 * BLOCK,)),
    ((2 * BLOCK + 1,), (1, 1)),
]


@pytest.mark.parametrize("shapes", SHAPES)
def test_blocks_of_every_shape_equal_plain_numpy(shapes):
    a, b = (RNG.normal(size=shape) for shape in shapes)
    program = record(busy, inputs=("a", "b"))
    # Independent: the formula on NumPy, in one piece.
    for ours, theirs in zip(program.numpy_function()(a, b), busy(np.asarray(a), np.asarray(b)), strict=True):
        assert np.shape(ours) == np.broadcast_shapes(*shapes)
        np.testing.assert_allclose(ours, np.broadcast_to(theirs, np.shape(ours)), rtol=1e-13)
        assert isinstance(ours, float) or ours.flags.writeable
    # The same with the second as a constant of the program.
    fixed = record(lambda q: busy(q, b))
    for ours, theirs in zip(fixed.numpy_function()(a), busy(np.asarray(a), np.asarray(b)), strict=True):
        np.testing.assert_allclose(ours, np.broadcast_to(theirs, np.shape(ours)), rtol=1e-13)


def test_strided_and_integer_inputs():
    a = RNG.normal(size=(40, 60)).T[::2, ::-1]
    program = record(lambda q: np.sin(q) + q)
    np.testing.assert_allclose(program.numpy_function()(a), np.sin(a) + a, rtol=1e-15)
    np.testing.assert_allclose(program.numpy_function()([1, 2]), np.sin([1, 2]) + [1, 2], rtol=1e-15)
    assert type(program.numpy_function()(1)) is float


def test_shapes_that_do_not_fit():
    with pytest.raises(InputError, match=r"must broadcast against each other, got shapes \(2,\), \(3,\)"):
        PAIR.numpy_function()(np.ones(2), np.ones(3))


def test_what_depends_on_small_constants_only_is_computed_once():
    a, b = RNG.normal(size=(200, 1)), RNG.normal(size=(200, 1))
    program = record(lambda q, p: np.sin(q) * (np.tan(p) + a) + interpolate(np.abs(p), TABLE) * b, inputs=("q", "p"))
    q = np.linspace(-1.0, 1.0, 121)
    expected = np.sin(q) * (np.tan(b) + a) + TABLE(np.abs(b)) * b
    np.testing.assert_allclose(program.numpy_function()(q, b), expected, rtol=1e-13)
    source = record(lambda q: (q + a) * np.where(q * 0.0 + a > 0.0, a, b), inputs=("q",)).numpy_source("f")
    assert "def f_shared(" in source


def test_only_the_elements_with_a_nan_are_nan_across_shapes():
    program = record(lambda a, b: np.where(a > b, 1.0, 2.0), inputs=("a", "b"))
    a, b = np.zeros((4, 1)), np.ones(5)
    a[2], b[3] = np.nan, np.inf
    expected = np.zeros((4, 5), dtype=bool)
    expected[2, :] = expected[:, 3] = True
    np.testing.assert_array_equal(np.isnan(program.numpy_function()(a, b)), expected)


def test_no_warnings_and_the_callers_error_state_is_kept():
    function = record(lambda q: 1.0 / q + np.log(q)).numpy_function()
    with np.errstate(all="raise"):
        assert np.isnan(function(np.array([-1.0, 0.0, 1.0]))).tolist() == [True, True, False]
        assert np.geterr()["divide"] == "raise"


def test_threads_do_not_share_buffers():
    function = record(busy, inputs=("a", "b")).numpy_function()
    inputs = [(RNG.normal(size=50_000), RNG.normal(size=50_000)) for _ in range(8)]
    expected = [function(*pair)[0] for pair in inputs]
    with ThreadPoolExecutor(8) as pool:
        for ours, theirs in zip(pool.map(lambda pair: function(*pair)[0], inputs * 4), expected * 4, strict=True):
            np.testing.assert_array_equal(ours, theirs)

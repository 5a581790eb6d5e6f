"""Random formulas: everything made from a recording agrees with the formula itself."""

import cmath
import math
from dataclasses import dataclass

import numpy as np
import pytest
import sympy
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from springpoise.carriers import Floats, interpolate, namespace
from springpoise.lookup import Lookup
from springpoise.tape import derivative_of, record
from springpoise.tape.names import run
from springpoise.tape.operations import OPERATIONS

strict = pytest.importorskip("array_api_strict")

TABLE = Lookup([-3.0, -0.5, 0.25, 3.0], [[1.0, 0.5, 0.1], [2.0, -1.0, 0.3], [0.5, 0.2, -0.1]])
INPUTS = ("a", "b")

ANALYTIC_1 = ["negative", "sqrt", "exp", "expm1", "log", "log1p", "sin", "cos", "tan", "asin", "acos", "atan"]
ANALYTIC_1 += ["sinh", "cosh", "tanh", "asinh"]
ANALYTIC_2 = ["add", "subtract", "multiply", "divide", "pow"]
NUMBER_1 = [*ANALYTIC_1, "abs", "sign", "look_up"]
NUMBER_2 = [*ANALYTIC_2, "atan2", "hypot", "maximum", "minimum"]
COMPARISONS = ["less", "less_equal", "greater", "greater_equal", "equal", "not_equal"]


@dataclass(frozen=True)
class Call:
    """A formula: a name, or a number, or an operation on formulas."""

    name: str | float
    arguments: tuple["Call", ...] = ()


constants = st.sampled_from([0.0, 1.0, -1.0, 2.0, 0.5, -3.0, 4.0]) | st.floats(-5.0, 5.0).filter(
    lambda x: abs(x) > 0.01
)
leaves = st.sampled_from([Call("a"), Call("b")]) | constants.map(Call)


def calls(names, *parts):
    return st.builds(lambda name, *arguments: Call(name, arguments), st.sampled_from(names), *parts)


def conditions(numbers):
    simple = calls(COMPARISONS, numbers, numbers)
    return simple | calls(["logical_and", "logical_or"], simple, simple) | calls(["logical_not"], simple)


def larger(numbers):
    # Copies of one part give common terms, quotients of equals, and so on, for folding to find.
    doubled = st.builds(lambda n, x: Call(n, (x, x)), st.sampled_from(NUMBER_2), numbers)
    shared = st.builds(
        lambda m, n, x, y: Call("multiply", (Call(m, (y, x)), Call(n, (y, x)))),
        st.sampled_from(["multiply", "divide"]),
        st.sampled_from(["multiply", "divide"]),
        numbers,
        numbers,
    )
    chosen = calls(["where"], conditions(numbers), numbers, numbers)
    return calls(NUMBER_1, numbers) | calls(NUMBER_2, numbers, numbers) | chosen | doubled | shared


formulas = st.recursive(leaves, larger, max_leaves=14)
smooth = st.recursive(leaves, lambda x: calls(ANALYTIC_1, x) | calls(ANALYTIC_2, x, x), max_leaves=8)
points = st.floats(-2.0, 2.0).filter(lambda x: abs(x) > 1e-3)


def compute(call, environment):
    """The formula on whatever carriers are in the environment, through the public operations."""
    if isinstance(call.name, float):
        return call.name
    if call.name in environment:
        return environment[call.name]
    arguments = [compute(argument, environment) for argument in call.arguments]
    if call.name == "look_up":
        return interpolate(arguments[0], TABLE)
    return run(call.name, *arguments)


def as_function(call):
    return lambda a, b: compute(call, {"a": a, "b": b})


class Unclear(Exception):
    """The formula is undefined here, or rounding decides what its value is."""


FLOAT = {name: row.on_floats for name, row in OPERATIONS.items()}


def judged(call, environment, jitter):
    """Independent of the tape: plain recursion over float functions, with each result jittered."""
    if isinstance(call.name, float):
        return call.name
    if call.name in environment:
        return environment[call.name]
    x = [judged(argument, environment, jitter) for argument in call.arguments]
    if call.name in {*COMPARISONS, "maximum", "minimum"} and abs(x[0] - x[1]) <= 1e-9 * (abs(x[0]) + abs(x[1])):
        raise Unclear
    if call.name in {"sign", "abs"} and abs(x[0]) < 1e-9:
        raise Unclear
    if call.name == "atan2" and x[1] < 0.0 and abs(x[0]) < 1e-9:
        raise Unclear
    if call.name == "look_up":
        if min(abs(x[0] - edge) for edge in TABLE.breaks) < 1e-9:
            raise Unclear
        result = TABLE(x[0])
    else:
        result = FLOAT[call.name](*x)
    if isinstance(result, bool):
        return result
    # Folding may take 0 * inf for 0, and merge products that overflow on the way.
    if not abs(result) < 1e100:
        raise Unclear
    return result * (1.0 + 4e-16 * jitter.uniform(-1.0, 1.0)) if jitter else result


def expected_with_tolerance(call, a, b):
    """Value, and how far results may differ: 1e-13, or more where the formula itself cancels."""
    environment = {"a": a, "b": b}
    value = judged(call, environment, None)
    spread = 0.0
    for seed in range(6):
        other = judged(call, environment, np.random.default_rng(seed))
        spread = max(spread, abs(other - value))
    if spread > 1e-6 * abs(value) + 1e-9:
        raise Unclear
    return value, 1e-13 * abs(value) + 50.0 * spread + 1e-290


def clear(call, a, b):
    try:
        return expected_with_tolerance(call, a, b)
    except Unclear:
        assume(False)


@settings(max_examples=400, deadline=None)
@given(formulas, points, points)
def test_every_form_of_a_program_agrees_with_the_formula(call, a, b):
    # Independent: recursion over `math` on floats; see judged.
    value, tolerance = clear(call, a, b)
    program = record(as_function(call), INPUTS)
    near = pytest.approx(value, rel=0.0, abs=tolerance)
    assert program.replay(a, b) == near
    assert program.python_function()(a, b) == near
    names = {"__builtins__": {"float": float, "abs": abs, "ValueError": ValueError, "ArithmeticError": ArithmeticError}}
    names["__builtins__"]["__import__"] = __import__
    exec(program.python_source("f", stand_alone=True), names)
    assert names["f"](a, b) == near
    assert program.numpy_function()(np.array([[a, a]]), np.array([[b], [b]])).tolist() == [[near] * 2] * 2
    assert program.replay(np.array([a]), b)[0] == near
    assert float(program.replay(strict.asarray([a]), strict.asarray([b]))[0]) == near
    assert record(program.replay, INPUTS).replay(a, b) == near


@settings(max_examples=200, deadline=None)
@given(formulas, st.lists(points, min_size=1, max_size=5), st.lists(points, min_size=1, max_size=5))
def test_array_parameters_equal_one_program_for_each(call, a, b):
    # Independent: the NumPy function element by element, with everything an input.
    program = record(as_function(call), INPUTS)
    column = np.array(b)[:, np.newaxis]
    together = record(lambda q: compute(call, {"a": q, "b": column}), ("a",)).numpy_function()(np.array(a))
    # The parameter may have cancelled, and its axis with it.
    together = np.broadcast_to(together, (len(b), len(a)))
    for j, y in enumerate(b):
        for i, x in enumerate(a):
            try:
                value, tolerance = expected_with_tolerance(call, x, y)
            except Unclear:
                continue
            assert together[j, i] == pytest.approx(value, rel=0.0, abs=tolerance)
            assert program.numpy_function()(x, y) == pytest.approx(value, rel=0.0, abs=tolerance)


@settings(max_examples=150, deadline=None)
@given(formulas, points, st.sampled_from([math.nan, math.inf, -math.inf]))
def test_an_input_that_is_not_finite_makes_every_output_nan(call, other, bad):
    program = record(lambda a, b: (compute(call, {"a": a, "b": b}), a, 1.0), INPUTS)
    derivatives = program.derivative()
    for inputs in [(bad, other), (other, bad), (bad, bad)]:
        for made in (program, derivatives):
            assert all(map(math.isnan, made.python_function()(*inputs)))
            assert all(map(math.isnan, made.numpy_function()(*inputs)))
    mixed = np.array([1.0, bad, other])
    for result in program.numpy_function()(mixed, 1.0)[1:]:
        assert np.isnan(result).tolist() == [False, True, False]


COMPLEX = {name: getattr(cmath, name) for name in ANALYTIC_1 if hasattr(cmath, name)}
COMPLEX |= {
    "negative": lambda z: -z,
    "expm1": lambda z: cmath.exp(z) - 1.0,
    "log1p": lambda z: cmath.log(1.0 + z),
    "add": lambda z, w: z + w,
    "subtract": lambda z, w: z - w,
    "multiply": lambda z, w: z * w,
    "divide": lambda z, w: z / w,
    "pow": lambda z, w: cmath.exp(w * cmath.log(z)) if z != 0 else 0.0 * w,
}


def complex_value(call, environment):
    if isinstance(call.name, float):
        return complex(call.name)
    if call.name in environment:
        return environment[call.name]
    x = [complex_value(argument, environment) for argument in call.arguments]
    if call.name == "pow" and x[0].real <= 1e-3:
        raise Unclear
    if call.name in {"sqrt", "log"} and x[0].real <= 1e-3:
        raise Unclear
    if call.name in {"asin", "acos"} and abs(x[0].real) > 0.99:
        raise Unclear
    if call.name == "log1p" and x[0].real <= -0.99:
        raise Unclear
    try:
        return COMPLEX[call.name](*x)
    except (ArithmeticError, ValueError):
        raise Unclear from None


@settings(max_examples=300, deadline=None)
@given(smooth, points, points)
def test_derivatives_agree_with_the_complex_step(call, a, b):
    clear(call, a, b)
    step = 1e-30
    try:
        # Independent: Squire and Trapp's complex step over `cmath`.
        slopes = [
            complex_value(call, {"a": complex(a, step), "b": complex(b, 0.0)}).imag / step,
            complex_value(call, {"a": complex(a, 0.0), "b": complex(b, step)}).imag / step,
        ]
    except Unclear:
        assume(False)
    assume(all(abs(slope) < 1e8 for slope in slopes))
    program = record(as_function(call), INPUTS)
    expected = pytest.approx(slopes, rel=1e-8, abs=1e-8)
    derivative = program.derivative()
    assert list(derivative.replay(a, b)) == expected
    assert list(derivative.python_function()(a, b)) == expected
    assert [float(x) for x in derivative.numpy_function()(a, b)] == expected
    by_dual = derivative_of(lambda x: compute(call, {"a": x, "b": b}), a)[1]
    assert by_dual == pytest.approx(slopes[0], rel=1e-8, abs=1e-8)
    by_array = derivative_of(lambda x: compute(call, {"a": x, "b": b}), np.array([a]))[1]
    assert by_array[0] == pytest.approx(slopes[0], rel=1e-8, abs=1e-8)


A, B = sympy.symbols("a b", real=True)


@pytest.mark.parametrize(
    ("formula", "symbolic"),
    [
        (
            lambda xp, a, b: xp.sqrt((a - 1.0) ** 2 + (b + 2.0) ** 2) * xp.sin(a * b),
            sympy.sqrt((A - 1) ** 2 + (B + 2) ** 2) * sympy.sin(A * B),
        ),
        (
            lambda xp, a, b: xp.acos((a * a + b * b - 1.0) / 8.0) / xp.exp(-a),
            sympy.acos((A**2 + B**2 - 1) / 8) / sympy.exp(-A),
        ),
        (
            lambda xp, a, b: xp.atan2(xp.sin(a), xp.cos(b) + 2.0) ** 3,
            sympy.atan2(sympy.sin(A), sympy.cos(B) + 2) ** 3,
        ),
        (
            lambda xp, a, b: xp.tanh(a / (b + 3.0)) - xp.asinh(a * b) * xp.log1p(b * b),
            sympy.tanh(A / (B + 3)) - sympy.asinh(A * B) * sympy.log(1 + B**2),
        ),
        (lambda xp, a, b: (a + 3.0) ** (b * 0.5), (A + 3) ** (B / 2)),
    ],
)
@given(a=points, b=points)
@settings(max_examples=20, deadline=None)
def test_first_and_second_derivatives_agree_with_sympy(formula, symbolic, a, b):
    program = record(lambda a, b: formula(namespace(a, b), a, b), INPUTS)
    first = program.derivative()
    second = first.derivative()
    at = {A: sympy.Float(a, 40), B: sympy.Float(b, 40)}
    exact_first = [sympy.diff(symbolic, x) for x in (A, B)]
    exact_second = [sympy.diff(x, y) for x in exact_first for y in (A, B)]
    # Independent: SymPy to 30 digits.
    for program_, exact in ((first, exact_first), (second, exact_second)):
        expected = pytest.approx([float(x.subs(at).evalf(30)) for x in exact], rel=1e-11, abs=1e-11)
        assert list(program_.replay(a, b)) == expected
        assert list(program_.python_function()(a, b)) == expected
        assert [x.item() for x in program_.numpy_function()(np.array([a]), np.array([b]))] == expected


def test_floats_offer_what_the_table_takes_from_them():
    for name in NUMBER_1:
        assert name in {"negative", "look_up"} or hasattr(Floats, name)

"""Duals: derivatives on floats, arrays and nested duals, and the limits at the ends of domains."""

import math

import numpy as np
import pytest
import sympy

from springpoise.carriers import distance, interpolate, namespace
from springpoise.errors import InputTypeError
from springpoise.lookup import Lookup
from springpoise.tape import Dual, derivative_of, record
from springpoise.tape.names import run

X = sympy.Symbol("x", real=True)
ONE_ARGUMENT = {
    "negative": -X,
    "abs": sympy.Abs(X),
    "sign": sympy.sign(X),
    "sqrt": sympy.sqrt(X),
    "exp": sympy.exp(X),
    "expm1": sympy.exp(X) - 1,
    "log": sympy.log(X),
    "log1p": sympy.log(1 + X),
    "sin": sympy.sin(X),
    "cos": sympy.cos(X),
    "tan": sympy.tan(X),
    "asin": sympy.asin(X),
    "acos": sympy.acos(X),
    "atan": sympy.atan(X),
    "sinh": sympy.sinh(X),
    "cosh": sympy.cosh(X),
    "tanh": sympy.tanh(X),
    "asinh": sympy.asinh(X),
}


def exact(expression, at):
    return float(sympy.diff(expression, X).subs(X, sympy.Float(at, 40)).evalf(30))


@pytest.mark.parametrize("name", ONE_ARGUMENT)
@pytest.mark.parametrize("at", [0.3, 0.95])
def test_chain_rules_of_one_argument_against_sympy(name, at):
    def formula(x):
        return run(name, x * x)

    expected = pytest.approx(exact(ONE_ARGUMENT[name].subs(X, X**2), at), rel=1e-14)
    assert derivative_of(formula, at)[1] == expected
    value, slope = derivative_of(formula, np.array([at, at]))
    assert value[1] == pytest.approx(formula(at), rel=1e-15)
    assert slope[1] == expected
    assert record(formula).derivative().python_function()(at) == expected


Y1, Y2 = sympy.sin(X) + 2, X**2 + sympy.Rational(1, 2)
TWO_ARGUMENTS = {
    "add": Y1 + Y2,
    "subtract": Y1 - Y2,
    "multiply": Y1 * Y2,
    "divide": Y1 / Y2,
    "pow": Y1**Y2,
    "atan2": sympy.atan2(Y1, Y2),
    "hypot": sympy.sqrt(Y1**2 + Y2**2),
    "maximum": sympy.Max(Y1, Y2),
    "minimum": sympy.Min(Y1, Y2),
}


@pytest.mark.parametrize("name", TWO_ARGUMENTS)
@pytest.mark.parametrize("varied", ["both", "first", "second"])
@pytest.mark.parametrize("at", [0.3, 2.4])
def test_chain_rules_of_two_arguments_against_sympy(name, varied, at):
    a, b = math.sin(at) + 2.0, at**2 + 0.5

    def formula(x):
        xp = namespace(x)
        first, second = xp.sin(x) + 2.0, x * x + 0.5
        return run(name, a if varied == "second" else first, b if varied == "first" else second)

    symbols = sympy.symbols("s t", real=True)
    outer = TWO_ARGUMENTS[name].subs({Y1: symbols[0], Y2: symbols[1]}, simultaneous=True)
    at_values = {symbols[0]: sympy.Float(a, 30), symbols[1]: sympy.Float(b, 30)}
    slopes = {"first": (math.cos(at), 0.0), "second": (0.0, 2 * at), "both": (math.cos(at), 2 * at)}[varied]
    partials = [float(sympy.diff(outer, s).subs(at_values).evalf(25)) for s in symbols]
    expected = sum(p * s for p, s in zip(partials, slopes, strict=True))
    assert derivative_of(formula, at)[1] == pytest.approx(expected, rel=1e-13)
    assert record(formula).derivative().replay(at) == pytest.approx(expected, rel=1e-13)


def test_operations_without_a_slope_give_plain_values():
    dual = Dual(2.0, 1.0)
    assert (dual > 1.0) is True
    assert namespace(dual).sign(dual) == 1.0
    assert namespace(dual).logical_and(dual > 1.0, dual < 1.0) is False


def test_where_selects_its_slope():
    def formula(x):
        xp = namespace(x)
        return xp.where(x > 0.0, xp.sqrt(x), 3.0 * x)

    value, slope = derivative_of(formula, np.array([4.0, 0.0, -1.0]))
    np.testing.assert_array_equal(value, [2.0, 0.0, -3.0])
    # At 0 and -1 the root's own slope is infinite and NaN; neither may come through.
    np.testing.assert_array_equal(slope, [0.25, 3.0, 3.0])
    assert derivative_of(lambda x: namespace(x).where(x > 0.0, 1.0, x), -2.0) == (-2.0, 1.0)
    assert derivative_of(lambda x: namespace(x).where(x, 1.0, 2.0) + x, 1.0) == (2.0, 1.0)


@pytest.mark.parametrize(
    "formula",
    [
        lambda x: namespace(x).sqrt(namespace(x).maximum(x, 0.0)),
        lambda x: namespace(x).acos(namespace(x).minimum(1.0 - x, 1.0)),
        lambda x: namespace(x).asin(namespace(x).minimum(1.0 - x, 1.0)),
        lambda x: namespace(x).maximum(x, 0.0) ** 0.3,
        lambda x: namespace(x).hypot(namespace(x).maximum(x, 0.0), 0.0),
        lambda x: namespace(x).atan2(namespace(x).maximum(x, 0.0), 0.0),
    ],
)
def test_a_clamped_argument_at_the_end_of_the_domain_has_slope_zero(formula):
    for x in (-1.0, 0.0):
        assert derivative_of(formula, x)[1] == 0.0
        assert derivative_of(formula, np.array([x]))[1][0] == 0.0
        derivative = record(formula).derivative()
        assert derivative.python_function()(x) == 0.0
        assert derivative.numpy_function()(np.array([x]))[0] == 0.0


def test_zero_to_a_varying_power():
    assert derivative_of(lambda x: 0.0**x, 2.0) == (0.0, 0.0)
    assert derivative_of(lambda x: (x - 1.0) ** (x + 1.0), 1.0) == (0.0, 0.0)


def test_tanh_keeps_its_digits_far_out():
    # Independent: 1/cosh(x)², which does not overflow yet.
    assert derivative_of(lambda x: namespace(x).tanh(x), 15.0)[1] == pytest.approx(1 / math.cosh(15.0) ** 2, rel=1e-14)
    assert derivative_of(lambda x: namespace(x).tanh(x), 1e4)[1] == 0.0


STIFFNESS, ARM = 700.0, 0.2


def spring_torque(angle):
    """Ideal spring from (ARM, 0) to a point on the arm: it acts along dx/d with the force k*d."""
    xp = namespace(angle)
    px, py = ARM * xp.cos(angle), ARM * xp.sin(angle)
    dx, dy = px - ARM, py
    d = distance(dx, dy)
    return STIFFNESS * d * (px * (dy / d) - py * (dx / d))


def test_ideal_spring_at_coincidence():
    # Independent: energy k/2*(2*ARM*sin(q/2))² has second derivative k*ARM² at 0, by hand.
    expected = STIFFNESS * ARM**2
    assert derivative_of(spring_torque, 0.0) == (0.0, pytest.approx(expected, rel=1e-12))
    value, slope = derivative_of(spring_torque, np.array([0.0, 0.3]))
    # Independent: torque k*ARM²*sin(q), by hand.
    np.testing.assert_allclose(value, expected * np.sin([0.0, 0.3]), rtol=1e-12)
    np.testing.assert_allclose(slope, expected * np.cos([0.0, 0.3]), rtol=1e-12)
    program = record(spring_torque)
    assert "sqrt" in [step.name for step in program.steps]  # k*d*(...) is a sum: nothing to cancel
    stiffness = program.derivative()
    assert stiffness.python_function()(0.0) == pytest.approx(expected, rel=1e-12)
    assert stiffness.numpy_function()(np.array([0.0]))[0] == pytest.approx(expected, rel=1e-12)
    third = stiffness.derivative().python_function()(0.0)
    assert math.isfinite(third)


def test_ideal_spring_loses_its_square_root_and_keeps_its_stiffness():
    def components(angle):
        xp = namespace(angle)
        px, py = ARM * xp.cos(angle), ARM * xp.sin(angle)
        dx, dy = px - ARM, py
        d = distance(dx, dy)
        return px * (STIFFNESS * d * (dy / d)) - py * (STIFFNESS * d * dx / d)

    program = record(components)
    assert "sqrt" not in [step.name for step in program.steps]
    assert program.derivative().python_function()(0.0) == pytest.approx(STIFFNESS * ARM**2, rel=1e-12)


def test_energy_of_an_ideal_spring_twice_by_duals():
    def energy(angle):
        xp = namespace(angle)
        d = distance(ARM * xp.cos(angle) - ARM, ARM * xp.sin(angle))
        return STIFFNESS / 2.0 * d * d

    def torque(angle):
        return derivative_of(energy, angle)[1]

    for angle in (0.0, 0.4):
        # Independent: k*ARM²*cos(q), by hand.
        expected = STIFFNESS * ARM**2 * math.cos(angle)
        assert derivative_of(torque, angle)[1] == pytest.approx(expected, rel=1e-12)
    assert record(torque).replay(0.4) == pytest.approx(STIFFNESS * ARM**2 * math.sin(0.4), rel=1e-12)


def test_nested_derivatives_do_not_confuse_their_slopes():
    # d/dx [x * d/dy (x + y)] = 1; mixing the two levels up gives 2.
    assert derivative_of(lambda x: x * derivative_of(lambda y: x + y, 1.0)[1], 3.0) == (3.0, 1.0)


def test_duals_of_duals_by_hand():
    cube = Dual(Dual(2.0, 1.0), Dual(1.0, 0.0)) ** 3.0
    assert cube == 8.0
    assert (cube.value.value, cube.value.slope, cube.slope.slope) == (8.0, 12.0, 12.0)


def test_look_up_slopes():
    table = Lookup([0.0, 1.0, 3.0], [[1.0, 2.0, 0.5], [3.5, -1.0, 0.0]])
    assert derivative_of(lambda x: interpolate(2.0 * x, table), 0.25) == (2.125, 5.0)
    value, slope = derivative_of(lambda x: interpolate(x, table), np.array([0.5, 2.0, 4.0]))
    np.testing.assert_array_equal(value, [2.125, 2.5, np.nan])
    np.testing.assert_array_equal(slope, [2.5, -1.0, np.nan])
    assert record(lambda q: interpolate(q, table)).derivative().replay(0.5) == 2.5


def test_numpy_functions_take_duals():
    def formula(x):
        return np.where(x > 1.0, np.exp(x), np.array(2.0) * x) + np.clip(x, 0.0, 1.0)

    np.testing.assert_allclose(derivative_of(formula, np.array([0.5, 2.0]))[1], [3.0, math.exp(2.0)], rtol=1e-15)
    np.testing.assert_allclose(derivative_of(lambda x: np.array([2.0]) * x, 3.0), [[6.0], [2.0]])


def test_constant_functions_and_whole_numbers():
    assert derivative_of(lambda x: 3.0, 2) == (3.0, 0.0)
    assert derivative_of(lambda x: x * x, 2) == (4.0, 4.0)
    value, slope = derivative_of(lambda x: 3.0, np.array([1.0, 2.0]))
    np.testing.assert_array_equal([value, slope], [[3.0, 3.0], [0.0, 0.0]])


def test_other_arrays():
    strict = pytest.importorskip("array_api_strict")
    value, slope = derivative_of(lambda x: namespace(x).sin(x) * x, strict.asarray([0.5, 1.0]))
    np.testing.assert_allclose(np.asarray(slope), [math.cos(t) * t + math.sin(t) for t in (0.5, 1.0)], rtol=1e-15)
    assert hasattr(value, "__array_namespace__")


def test_duals_do_not_branch():
    with pytest.raises(InputTypeError, match=r"Dual\(value=1.0, slope=1.0\) has no truth value"):
        bool(Dual(1.0, 1.0))

"""Recording: what variables take, what they refuse, and what is simplified on the way."""

import math
import re

import numpy as np
import pytest

from springpoise.carriers import interpolate, namespace
from springpoise.errors import InputError, InputTypeError
from springpoise.lookup import Lookup
from springpoise.tape import Dual, Program, Variable, record
from springpoise.tape.operations import OPERATIONS

TABLE = Lookup([0.0, 1.0, 3.0], [[1.0, 2.0], [3.0, -1.0]])


def names_of(program: Program) -> list[str]:
    return [step.name for step in program.steps]


@pytest.mark.parametrize("name", [n for n, row in OPERATIONS.items() if row.arity == 1 and n not in {"look_up"}])
def test_every_function_of_one_argument_through_the_namespace_and_through_numpy(name):
    def standard(q):
        return getattr(namespace(q), name)(q)

    def numpys(q):
        return getattr(np, name)(q)

    assert record(standard) == record(numpys)
    # Independent: NumPy.
    expected = getattr(np, name)(0.4)
    assert record(standard).replay(0.4) == pytest.approx(float(expected), rel=1e-15)
    assert record(standard).numpy_function()(0.4) == pytest.approx(float(expected), rel=1e-15)


@pytest.mark.parametrize("name", [n for n, row in OPERATIONS.items() if row.arity == 2])
def test_every_function_of_two_arguments_through_the_namespace_and_through_numpy(name):
    def standard(a, b):
        return getattr(namespace(a), name)(a, b)

    def numpys(a, b):
        return getattr(np, name)(a, b)

    program = record(standard, inputs=("a", "b"))
    assert program == record(numpys, inputs=("a", "b"))
    for a, b in [(0.4, 1.3), (1.3, 0.4), (1.0, 1.0), (0.0, 2.0)]:
        # Independent: NumPy.
        expected = pytest.approx(float(getattr(np, name)(a, b)), rel=1e-15)
        assert program.replay(a, b) == expected
        assert program.python_function()(a, b) == expected
        assert program.numpy_function()(np.array([a]), np.array([b]))[0] == expected


def test_operators_on_either_side():
    def formula(q):
        a = np.array([2.0, 3.0])
        both = (q > 0.0) & (q > 1.0) | ~(q <= 5.0) | (q >= 7.0) | (q < -1.0)
        return a * q + q * a - (1.0 - q) / (2.0 / q) + abs(-q) + (+q) ** 2.5 + 2.0**q + np.where(both, q, 0.0)

    q = np.array([2.0, 0.5])
    a = np.array([2.0, 3.0])
    # Independent: the same written out by hand.
    expected = 2 * a * q - (1.0 - q) * q / 2.0 + q + q**2.5 + 2.0**q + np.array([2.0, 0.0])
    np.testing.assert_allclose(record(formula).numpy_function()(q), expected, rtol=1e-15)
    np.testing.assert_allclose(formula(q), expected, rtol=1e-15)


def test_conditions_and_numbers_stand_in_for_each_other():
    program = record(lambda q: (q > 1.0) * 3.0 + np.where(q, 1.0, 0.0) + (True & (q == 2.0)) + (False | (q != 2.0)))
    assert [program.replay(x) for x in (0.0, 1.0, 2.0)] == [1.0, 2.0, 5.0]
    assert record(lambda q: q > 1.0).python_function()(2.0) == 1.0
    assert record(lambda q: (q > 1.0) ** 1.0).replay(0.5) == 0.0


def test_numpy_functions_that_are_made_of_others():
    program = record(
        lambda q: (
            np.clip(q, -1.0, 1.0),
            np.clip(q, None, 1.0),
            np.clip(q, -1.0, None),
            np.clip(q, min=-1.0, max=1.0),
            np.square(q),
            np.reciprocal(q),
            np.positive(q),
            np.radians(q),
            np.degrees(q),
            np.fabs(q),
            np.float_power(q, 3.0),
            np.arctan2(q, 2.0),
            np.hypot(q, 1.0),
            namespace(q).pi * q,
        )
    )
    q = -2.5
    expected = [-1, q, -1, -1, q * q, 1 / q, q, math.radians(q), math.degrees(q), 2.5, q**3, math.atan2(q, 2)]
    expected += [math.hypot(q, 1), math.pi * q]
    assert program.python_function()(q) == pytest.approx(expected, rel=1e-15)


def test_look_up_is_recorded_with_its_table():
    program = record(lambda q: interpolate(q, TABLE) + interpolate(q, TABLE))
    assert names_of(program) == ["look_up", "multiply"]
    assert program.replay(0.5) == 4.0
    assert record(lambda q: interpolate(q * 0.0 + 2.0, TABLE)).replay(9.0) == 2.0
    assert "look_up" in repr(interpolate(record_one(), TABLE))


def record_one() -> Variable:
    kept = []
    record(lambda q: kept.append(q) or q)
    return kept[0]


@pytest.mark.parametrize(
    ("formula", "steps"),
    [
        (lambda q: q + 0.0, []),
        (lambda q: 0.0 + q, []),
        (lambda q: q - 0.0, []),
        (lambda q: 0.0 - q, ["negative"]),
        (lambda q: q - q, []),
        (lambda q: q + q, ["multiply"]),
        (lambda q: q * 1.0, []),
        (lambda q: 0.0 * q, []),
        (lambda q: q * -1.0, ["negative"]),
        (lambda q: q / 1.0, []),
        (lambda q: q / -1.0, ["negative"]),
        (lambda q: q / 4.0, ["multiply"]),
        (lambda q: q / 3.0, ["divide"]),
        (lambda q: 3.0 * q / 7.0, ["multiply"]),
        (lambda q: 3.0 * (q / 7.0), ["multiply"]),
        (lambda q: 3.0 * (7.0 / q), ["divide"]),
        (lambda q: 0.0 / q, []),
        (lambda q: q / q, []),
        (lambda q: 2.0 * (3.0 * q), ["multiply"]),
        (lambda q: 1e200 * (1e200 * q), ["multiply", "multiply"]),
        (lambda q: -(-q), []),
        (lambda q: -(3.0 * q), ["multiply"]),
        (lambda q: 3.0 * -q, ["multiply"]),
        (lambda q: -(q - 2.0), ["subtract"]),
        (lambda q: 1.0 + -q, ["subtract"]),
        (lambda q: -q + 1.0, ["subtract"]),
        (lambda q: -q - 1.0, ["negative", "subtract"]),
        (lambda q: 1.0 - -q, ["add"]),
        (lambda q: -q * -q, ["multiply"]),
        (lambda q: -q * abs(q), ["abs", "multiply", "negative"]),
        (lambda q: -q / abs(q), ["abs", "divide", "negative"]),
        (lambda q: -abs(q) / -q, ["abs", "divide"]),
        (lambda q: q**0.0, []),
        (lambda q: q**1.0, []),
        (lambda q: q**2, ["multiply"]),
        (lambda q: q**3, ["multiply", "multiply"]),
        (lambda q: q**4, ["multiply", "multiply"]),
        (lambda q: q**0.5, ["sqrt"]),
        (lambda q: q**-1, ["divide"]),
        (lambda q: q**-2, ["multiply", "divide"]),
        (lambda q: q**1.5, ["pow"]),
        (lambda q: abs(abs(q)), ["abs"]),
        (lambda q: abs(-q), ["abs"]),
        (lambda q: np.cos(-q), ["cos"]),
        (lambda q: np.sin(-q) + np.sin(q), []),
        (lambda q: np.sin(-q) * q, ["sin", "multiply", "negative"]),
        (lambda q: np.hypot(-q, 1.0), ["hypot"]),
        (lambda q: np.maximum(q, q), []),
        (lambda q: np.minimum(q, q), []),
        (lambda q: np.where(q < q, 1.0, q), []),
        (lambda q: np.where(q <= q, q, 1.0), []),
        (lambda q: np.where(q > 1.0, q, q), []),
        (lambda q: np.where(~(q > 1.0), 2.0, q), ["less", "where"]),
        (lambda q: np.where(~~(q > 1.0), 2.0, q), ["less", "where"]),
        (lambda q: np.where((q > 1.0) & True, 2.0, q), ["less", "where"]),
        (lambda q: np.where((q > 1.0) & False, 2.0, q), []),
        (lambda q: np.where((q > 1.0) | True, q, 2.0), []),
        (lambda q: np.where((q > 1.0) | (q > 1.0), q, 2.0), ["less", "where"]),
        (lambda q: (3.0 * q) * (np.cos(q) / q), ["cos", "multiply"]),
        (lambda q: q * (np.cos(q) / q), ["cos"]),
        (lambda q: (np.cos(q) / q) * (np.sin(q) * q), ["sin", "cos", "multiply"]),
        (lambda q: (np.sin(q) * (-np.cos(q) / q)) * (2.0 * q), ["sin", "cos", "multiply", "multiply", "negative"]),
        (lambda q: (q * np.cos(q)) / q, ["cos"]),
        (lambda q: np.sin(1.0) + np.exp(2.0) * q - np.sin(1.0), ["multiply", "add", "subtract"]),
        (lambda q: np.cos(q) * q + q * np.cos(q), ["cos", "multiply", "multiply"]),
        (lambda q: 2.0 * np.sin(q) - 2.0 * np.cos(q), ["sin", "cos", "subtract", "multiply"]),
    ],
)
def test_simplifications_shorten_and_keep_the_value(formula, steps):
    program = record(formula)
    assert sorted(names_of(program)) == sorted(steps)
    for x in (0.7, 1.9):
        # Independent: the formula itself on NumPy.
        with np.errstate(over="ignore"):
            expected = float(formula(np.float64(x)))
        assert program.replay(x) == pytest.approx(expected, rel=1e-15, abs=1e-16)


@pytest.mark.parametrize(
    ("formula", "value"),
    [
        (lambda q: q * 0.0 + 1.0 / (q * 0.0), math.inf),
        (lambda q: (q * 0.0 - 1.0) / (q * 0.0), -math.inf),
        (lambda q: namespace(q).log(q * 0.0), -math.inf),
        (lambda q: (q * 0.0) / (q * 0.0), math.nan),
        (lambda q: namespace(q).sqrt(q * 0.0 - 1.0), math.nan),
        (lambda q: namespace(q).asin(q * 0.0 + 2.0), math.nan),
    ],
)
def test_constants_fold_with_ieee_results(formula, value):
    program = record(formula)
    assert len(program) == 0
    assert program.replay(1.0) == pytest.approx(value, nan_ok=True)


def test_array_constants_fold_and_are_shared():
    a = np.array([1.0, 2.0])
    program = record(lambda q: (q * 0.0 + a) * a * q + (a * a) * q + np.where(q < a, a, 2 * a) * np.array(1.0))
    assert sum(isinstance(c, np.ndarray) for c in program.constants) == 3
    np.testing.assert_array_equal(program.replay(1.5), [5.0, 14.0])
    flags = record(lambda q: np.where(np.array([True, False]), q, 0 * q) + np.array([1, 2]))
    np.testing.assert_array_equal(flags.replay(5.0), [6.0, 2.0])


def test_idle_operations_are_dropped_and_idle_inputs_kept():
    def formula(a, b):
        np.exp(a)
        return [a + 1.0, 2, np.float64(3.0)]

    program = record(formula, inputs=("a", "b"))
    assert program.inputs == ("a", "b")
    assert len(program) == 1
    assert not program.scalar
    assert program.replay(1.0, 7.0) == (2.0, 2.0, 3.0)


def test_what_has_no_value_refuses_to_be_one():
    with pytest.raises(InputTypeError, match=r"Variable\(less\) has no truth value.*`where` of its namespace"):
        record(lambda q: q if q > 1.0 else 0.0)
    with pytest.raises(InputTypeError, match=r"Variable\(q\) has no value.*`sin`.*`where`"):
        record(lambda q: math.sin(q))
    with pytest.raises(TypeError, match="unhashable"):
        record(lambda q: {q: 1.0})


@pytest.mark.parametrize(
    ("formula", "message"),
    [
        (lambda q: np.sinc(q) if False else np.cbrt(q), "cbrt cannot be recorded"),
        (lambda q: np.interp(q, [0, 1], [0, 1]), "numpy.interp cannot be recorded"),
        (lambda q: np.add.outer(q, q), "numpy.add.outer cannot be recorded"),
        (lambda q: np.add(q, 1.0, where=True), "numpy.add with where cannot be recorded"),
        (lambda q: namespace(q).clip(q, lowest=1.0), "clip with lowest cannot be recorded"),
        (lambda q: namespace(q).gamma(q), "gamma cannot be recorded; what can be: abs, acos"),
        (lambda q: namespace(q).look_up(q), "look_up cannot be recorded"),
        (lambda q: namespace(q).sin(q, q), "sin takes 1 arguments, got 2"),
        (lambda q: q + "2 mm", "cannot use '2 mm' of type str"),
        (lambda q: q * np.array([1j]), "cannot use an array of complex128"),
        (lambda q: record_one() + q, r"Variable\(q\) belongs to another recording"),
        (lambda q: (q, (q, q)), "got tuple inside"),
        (lambda q: Dual(q, 1.0), "must return numbers, got Dual"),
        (lambda q: None, "cannot use None of type NoneType"),
    ],
)
def test_what_cannot_be_recorded_is_named(formula, message):
    with pytest.raises(InputTypeError, match=message):
        record(formula)


def test_namespace_answers_hasattr():
    names = namespace(record_one())
    assert hasattr(names, "hypot")
    assert not hasattr(names, "gamma")
    assert repr(names) == "<namespace of recorded values>"
    assert names.maximum(1.0, 2.0) == 2.0


@pytest.mark.parametrize("bad", ["2q", "", "if"])
def test_input_names_must_be_identifiers(bad):
    with pytest.raises(InputError, match=re.escape(f"must be identifiers, got {bad!r}")):
        record(lambda q: q, inputs=(bad,))


def test_input_names_must_differ():
    with pytest.raises(InputError, match="distinct, got 'a' twice"):
        record(lambda a, b: a, inputs=("a", "a"))


def test_one_name_may_be_a_plain_string():
    assert record(lambda angle: angle, inputs="angle").inputs == ("angle",)


def test_variables_describe_themselves():
    kept = []
    record(lambda q: kept.extend([q, q + 1.0, q * 0.0, q * 0.0 + math.inf, q * 0 + np.ones(2), q <= q]) or q)
    shown = [repr(v) for v in kept]
    assert shown[:4] == ["Variable(q)", "Variable(add)", "Variable(0.0)", "Variable(inf)"]
    assert shown[4:] == ["Variable(constant)", "Variable(True)"]

"""The operations that the tape knows, in one table.

A row says how an operation runs on floats and on NumPy, how it reads as Python, and what its exact
chain rule is. Recording, replay, differentiation and the printers all work from these rows, so an
operation is added here and nowhere else.

Chain rules are written over :func:`apply`, so they run on whatever the formula itself ran on:
floats, arrays, recorded variables, or duals of any of these for second derivatives.
"""

from __future__ import annotations

import math
import operator
from collections.abc import Callable
from functools import lru_cache
from typing import Any, TypeAlias

import attrs
import numpy as np

from springpoise.carriers import Carrier, Floats, interpolate, namespace
from springpoise.lookup import Lookup

__all__ = ["ATOM", "CONDITIONAL", "LOOK_UP", "NEGATIVE", "OPERATIONS", "Operation", "apply"]

Slopes: TypeAlias = tuple[Carrier | None, ...]
"""One slope for each argument; None stands for an argument that does not vary at all."""

Rule: TypeAlias = Callable[[Slopes, tuple[Carrier, ...], Carrier], Carrier]
"""Chain rule: slopes of the arguments, the arguments and the result -> slope of the result."""

# How tightly a printed expression binds. An argument that binds less than its place asks for goes
# into parentheses; a place that asks for ATOM is one that the template repeats or that needs a name.
CONDITIONAL, OR, AND, NOT, COMPARE, ADD, MULTIPLY, NEGATIVE, CALL, ATOM = range(10)


@attrs.frozen
class Operation:
    """One row of the table."""

    name: str
    """Name in the array API standard."""
    arity: int
    on_floats: Callable[..., Any]
    """IEEE results, never an exception."""
    ufunc: Any
    """The NumPy ufunc; None where NumPy has a plain function (``where``, the look-up)."""
    python: str
    """Template with the arguments as {0}, {1}, ..."""
    binds: int
    """How tightly the printed expression binds."""
    places: tuple[int, ...]
    """How tightly each argument has to bind."""
    rule: Rule | None
    """The chain rule; None when the result is constant wherever it has a slope at all."""
    needs: tuple[str, ...] = ()
    """Names from :mod:`math` that the template uses."""
    commutes: bool = False
    makes_condition: bool = False
    takes_conditions: tuple[bool, ...] = ()


def apply(name: str, *arguments: Carrier, table: Lookup | None = None) -> Carrier:
    """Run one operation on any carriers, mixed as they come."""
    if table is not None:
        return interpolate(arguments[0], table)
    names = namespace(*arguments)
    if names is Floats:
        return OPERATIONS[name].on_floats(*arguments)
    return getattr(names, name)(*arguments)


def _divide(x: float, y: float) -> float:
    if y != 0.0:
        return x / y
    return math.nan if x == 0.0 or math.isnan(x) else math.copysign(math.inf, x) * math.copysign(1.0, y)


# ------------------------------------------------------------------------------------ chain rules


def _times(x: Carrier, y: Carrier) -> Carrier:
    return apply("multiply", x, y)


def _plus(x: Carrier | None, y: Carrier | None) -> Carrier:
    if x is None or y is None:
        return y if x is None else x
    return apply("add", x, y)


def _over(slope: Carrier, denominator: Carrier) -> Carrier:
    """``slope / denominator``, and zero instead of 0/0.

    ``sqrt(maximum(x, 0))`` and ``acos(minimum(x, 1))`` reach the end of their domain with slope
    zero, and stay there.
    """
    return apply("divide", slope, _unless_both_vanish(slope, denominator))


def _unless_both_vanish(slope: Carrier, x: Carrier) -> Carrier:
    """``x``, but 1 where ``x`` and the slope are zero; what is known to be positive needs no care.

    The slope alone does not decide: where it vanishes but ``x`` does not, the derivative of
    ``slope / x``, a second derivative of the formula, still needs the true ``x``.
    """
    if getattr(x, "is_positive", False):
        return x
    both = apply("logical_and", apply("equal", slope, 0.0), apply("equal", x, 0.0))
    return apply("where", both, 1.0, x)


def _through(factor: Callable[[Carrier, Carrier], Carrier]) -> Rule:
    """Chain rule of a function of one argument from its derivative at (argument, result)."""
    return lambda s, x, y: _times(s[0], factor(x[0], y))


def _under(denominator: Callable[[Carrier, Carrier], Carrier], sign: float = 1.0) -> Rule:
    """As :func:`_through`, for a derivative of the form ``sign / denominator``."""
    return lambda s, x, y: _over(_times(sign, s[0]), denominator(x[0], y))


def _unit_circle(x: Carrier, y: Carrier) -> Carrier:
    return apply("sqrt", _times(apply("subtract", 1.0, x), apply("add", 1.0, x)))


def _one_plus_square(x: Carrier) -> Carrier:
    return apply("add", 1.0, _times(x, x))


def _sech_squared(x: Carrier, y: Carrier) -> Carrier:
    # 1 - tanh(x)² cancels, and cosh(x) overflows; this form does neither.
    e = apply("exp", _times(-2.0, apply("abs", x)))
    return apply("divide", _times(4.0, e), _times(apply("add", 1.0, e), apply("add", 1.0, e)))


def _negative_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    return apply("negative", s[0])


def _add_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    return _plus(s[0], s[1])


def _subtract_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    if s[0] is None:
        return apply("negative", s[1])
    return s[0] if s[1] is None else apply("subtract", s[0], s[1])


def _multiply_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    left = None if s[0] is None else _times(s[0], x[1])
    return _plus(left, None if s[1] is None else _times(x[0], s[1]))


def _divide_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    # Not (s0*x1 - x0*s1)/x1²: the square of a length of 1e-150 m would be the end of the range.
    if s[1] is None:
        return apply("divide", s[0], x[1])
    return apply("divide", _subtract_rule((s[0], _times(y, s[1])), x, y), x[1])


def _pow_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    base, exponent = x
    by_base = by_exponent = None
    if s[0] is not None:
        if not (isinstance(exponent, float) and exponent >= 1.0):
            base = _unless_both_vanish(s[0], base)
        lowered = apply("pow", base, apply("subtract", exponent, 1.0))
        by_base = _times(s[0], _times(exponent, lowered))
    if s[1] is not None:
        # 0**exponent stays 0: its logarithm, minus infinity, must not come near the product.
        inside = apply("where", apply("greater", x[0], 0.0), x[0], 1.0)
        by_exponent = _times(s[1], _times(y, apply("log", inside)))
    return _plus(by_base, by_exponent)


def _atan2_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    left = None if s[0] is None else _times(x[1], s[0])
    right = None if s[1] is None else _times(x[0], s[1])
    return _over(_subtract_rule((left, right), x, y), _plus(_times(x[1], x[1]), _times(x[0], x[0])))


def _hypot_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    left = None if s[0] is None else _times(x[0], s[0])
    return _over(_plus(left, None if s[1] is None else _times(x[1], s[1])), y)


def _select(condition: Carrier, x: Carrier | None, y: Carrier | None) -> Carrier:
    return apply("where", condition, 0.0 if x is None else x, 0.0 if y is None else y)


def _choice_rule(comparison: str) -> Rule:
    """Slope of the argument that wins; of a bound that does not vary, hence zero, in a tie.

    ``sqrt(maximum(x, 0))`` at zero would be infinitely steep otherwise.
    """

    def rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
        if s[0] is None:
            return _select(apply(comparison, x[1], x[0]), s[1], s[0])
        return _select(apply(comparison, x[0], x[1]), s[0], s[1])

    return rule


def _where_rule(s: Slopes, x: tuple[Carrier, ...], y: Carrier) -> Carrier:
    return _select(x[0], s[1], s[2])


@lru_cache(maxsize=256)
def slope_table(table: Lookup) -> Lookup:
    """``table.derivative()``, made once."""
    return table.derivative()


# ------------------------------------------------------------------------------------------ table


def _function(name: str, rule: Rule | None, arity: int = 1, commutes: bool = False) -> Operation:
    """A row whose function goes by the array API name everywhere, also in :mod:`math`."""
    inside = ", ".join(f"{{{i}}}" for i in range(arity))
    return Operation(
        name,
        arity,
        getattr(Floats, name),
        getattr(np, name),
        f"{name}({inside})",
        CALL,
        (CONDITIONAL,) * arity,
        rule,
        needs=() if name == "abs" else (name,),
        commutes=commutes,
    )


def _infix(name: str, symbol: str, on_floats: Callable[..., Any], binds: int, rule: Rule | None) -> Operation:
    comparison = binds == COMPARE
    return Operation(
        name,
        2,
        on_floats,
        getattr(np, name),
        f"{{0}} {symbol} {{1}}",
        binds,
        # Python groups a + b + c from the left; a comparison on either side of another would chain.
        (binds + 1 if comparison else binds, binds + 1),
        rule,
        commutes=name in {"add", "multiply", "equal", "not_equal"},
        makes_condition=comparison,
    )


def _choice(name: str, symbol: str, rule: Rule) -> Operation:
    # {1} first: constants come first in the tape's order, so the name is the one tested for NaN.
    template = f"{{1}} if {{1}} {symbol} {{0}} or {{1}} != {{1}} else {{0}}"
    float_function, ufunc = getattr(Floats, name), getattr(np, name)
    return Operation(name, 2, float_function, ufunc, template, CONDITIONAL, (ATOM, ATOM), rule, commutes=True)


def _logical(name: str, template: str, binds: int, places: tuple[int, ...]) -> Operation:
    return Operation(
        name,
        len(places),
        getattr(Floats, name),
        getattr(np, name),
        template,
        binds,
        places,
        None,
        commutes=len(places) == 2,
        makes_condition=True,
        takes_conditions=(True,) * len(places),
    )


LOOK_UP = "look_up"
"""Name of the table look-up, the one operation that carries a constant object."""

_NEGATIVE = Operation("negative", 1, operator.neg, np.negative, "-{0}", NEGATIVE, (NEGATIVE,), _negative_rule)
_SIGN = Operation(
    "sign",
    1,
    Floats.sign,
    np.sign,
    "1.0 if {0} > 0.0 else -1.0 if {0} < 0.0 else {0}",
    CONDITIONAL,
    (ATOM,),
    None,
)
_WHERE = Operation(
    "where",
    3,
    Floats.where,
    None,
    "{1} if {0} else {2}",
    CONDITIONAL,
    (OR, OR, CONDITIONAL),
    _where_rule,
    takes_conditions=(True, False, False),
)
_TABLE = Operation(
    LOOK_UP,
    1,
    lambda x: x,
    None,
    "{table}({0})",
    CALL,
    (CONDITIONAL,),
    None,
)

OPERATIONS: dict[str, Operation] = {
    row.name: row
    for row in (
        _NEGATIVE,
        _function("abs", _through(lambda x, y: apply("sign", x))),
        _SIGN,
        _function("sqrt", lambda s, x, y: _over(_times(0.5, s[0]), y)),
        _function("exp", _through(lambda x, y: y)),
        _function("expm1", _through(lambda x, y: apply("exp", x))),
        _function("log", _under(lambda x, y: x)),
        _function("log1p", _under(lambda x, y: apply("add", 1.0, x))),
        _function("sin", _through(lambda x, y: apply("cos", x))),
        _function("cos", _through(lambda x, y: apply("negative", apply("sin", x)))),
        _function("tan", _through(lambda x, y: _one_plus_square(y))),
        _function("asin", _under(_unit_circle)),
        _function("acos", _under(_unit_circle, -1.0)),
        _function("atan", _under(lambda x, y: _one_plus_square(x))),
        _function("sinh", _through(lambda x, y: apply("cosh", x))),
        _function("cosh", _through(lambda x, y: apply("sinh", x))),
        _function("tanh", _through(_sech_squared)),
        _function("asinh", _under(lambda x, y: apply("sqrt", _one_plus_square(x)))),
        _infix("add", "+", operator.add, ADD, _add_rule),
        _infix("subtract", "-", operator.sub, ADD, _subtract_rule),
        _infix("multiply", "*", operator.mul, MULTIPLY, _multiply_rule),
        _infix("divide", "/", _divide, MULTIPLY, _divide_rule),
        _function("pow", _pow_rule, arity=2),
        _function("atan2", _atan2_rule, arity=2),
        _function("hypot", _hypot_rule, arity=2, commutes=True),
        _choice("maximum", ">", _choice_rule("greater")),
        _choice("minimum", "<", _choice_rule("less")),
        _infix("less", "<", operator.lt, COMPARE, None),
        _infix("less_equal", "<=", operator.le, COMPARE, None),
        _infix("greater", ">", operator.gt, COMPARE, None),
        _infix("greater_equal", ">=", operator.ge, COMPARE, None),
        _infix("equal", "==", operator.eq, COMPARE, None),
        _infix("not_equal", "!=", operator.ne, COMPARE, None),
        _logical("logical_and", "{0} and {1}", AND, (AND, NOT)),
        _logical("logical_or", "{0} or {1}", OR, (OR, AND)),
        _logical("logical_not", "not {0}", NOT, (NOT,)),
        _WHERE,
        _TABLE,
    )
}

"""The functions that netlists call, by the dialect's name, rewritten to those of `expression`."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

from stress.netlist.evaluate import FUNCTIONS
from stress.netlist.expression import Binary, Call, Conditional, Expression, Number, Unary

Arguments = Sequence[Expression]
ZERO, ONE = Number(0.0), Number(1.0)

# Called with the nominal value first; a review is made at the nominal value.
SPREAD = frozenset({"gauss", "agauss", "unif", "aunif", "mc", "flat"})
REFUSED = {
    "idt": "an integral over time",
    "sdt": "an integral over time",
    "idtmod": "an integral over time",
    "delay": "a delay",
    "absdelay": "a delay",
    "laplace": "a transfer function in s",
    "rand": "a random number",
    "random": "a random number",
    "white": "noise",
}


def call(name: str, *arguments: Expression) -> Expression:
    """Return a call of a contract function, or its value where all arguments are numbers."""
    return Call(name, arguments)


def _truncate(x: Expression) -> Expression:
    return Binary("*", call("sgn", x), call("floor", call("abs", x)))


def _limit(x: Expression, a: Expression, b: Expression) -> Expression:
    if isinstance(a, Number) and isinstance(b, Number) and a.value > b.value:
        a, b = b, a  # the middle one of the three, as the lt dialect has it
    return call("limit", x, a, b)


def _nested(name: str) -> Callable[..., Expression]:
    def build(*arguments: Expression) -> Expression:
        found = arguments[0]
        for argument in arguments[1:]:
            found = call(name, found, argument)
        return found

    return build


def _compare(operator: str) -> Callable[[Expression], Expression]:
    return lambda x: Binary(operator, x, ZERO)


def _log_of(inner: Callable[[Expression], Expression]) -> Callable[[Expression], Expression]:
    return lambda x: call("ln", Binary("+", x, call("sqrt", inner(Binary("*", x, x)))))


def _scaled(name: str, factor: float) -> Callable[[Expression], Expression]:
    return lambda x: Binary("*", Number(factor), call(name, x))


def _atanh(x: Expression) -> Expression:
    ratio = Binary("/", Binary("+", ONE, x), Binary("-", ONE, x))
    return Binary("*", Number(0.5), call("ln", ratio))


def _plain(name: str) -> Callable[..., Expression]:
    return lambda *arguments: call(name, *arguments)


_SAME = [
    "abs",
    "sgn",
    "sqrt",
    "exp",
    "ln",
    "log10",
    "sin",
    "cos",
    "tan",
    "asin",
    "acos",
    "atan",
    "sinh",
    "cosh",
    "tanh",
    "floor",
    "ceil",
    "round",
    "ddt",
]

# name: (fewest arguments, most arguments, what it is in terms of the contract's functions)
NAMED: dict[str, tuple[int, int, Callable[..., Expression]]] = {
    **{name: (1, 1, _plain(name)) for name in _SAME},
    "fabs": (1, 1, _plain("abs")),
    "sign": (1, 1, _plain("sgn")),
    "log": (1, 1, _plain("ln")),
    "arctan": (1, 1, _plain("atan")),
    "arcsin": (1, 1, _plain("asin")),
    "arccos": (1, 1, _plain("acos")),
    "nint": (1, 1, _plain("round")),
    "int": (1, 1, _truncate),
    "trunc": (1, 1, _truncate),
    "atan2": (2, 2, _plain("atan2")),
    "asinh": (1, 1, _log_of(lambda square: Binary("+", square, ONE))),
    "acosh": (1, 1, _log_of(lambda square: Binary("-", square, ONE))),
    "atanh": (1, 1, _atanh),
    "db": (1, 1, lambda x: Binary("*", Number(20.0), call("log10", call("abs", x)))),
    "hypot": (2, 2, lambda x, y: call("sqrt", Binary("+", _square(x), _square(y)))),
    "square": (1, 1, lambda x: Binary("*", x, x)),
    "sqr": (1, 1, lambda x: Binary("*", x, x)),
    "cbrt": (1, 1, lambda x: call("pows", x, Number(1 / 3))),
    "min": (1, 99, _nested("min")),
    "max": (1, 99, _nested("max")),
    "pwr": (2, 2, _plain("pow")),
    "pwrs": (2, 2, _plain("pows")),
    "u": (1, 1, _plain("step")),
    "stp": (1, 1, _plain("step")),
    "ustep": (1, 1, _plain("step")),
    "uramp": (1, 1, _plain("ramp")),
    "u2": (1, 1, lambda x: call("limit", x, ZERO, ONE)),
    "limit": (3, 3, _limit),
    "if": (3, 3, Conditional),
    "ternary_fcn": (3, 3, Conditional),
    "table": (3, 9999, _plain("table")),
    "tbl": (3, 9999, _plain("table")),
    "pwl": (3, 9999, lambda *arguments: _extended(*arguments)),
    "buf": (1, 1, lambda x: Binary(">", x, Number(0.5))),
    "inv": (1, 1, lambda x: Binary("<=", x, Number(0.5))),
    "not": (1, 1, lambda x: Unary("!", x)),
    "eq0": (1, 1, _compare("==")),
    "ne0": (1, 1, _compare("!=")),
    "gt0": (1, 1, _compare(">")),
    "lt0": (1, 1, _compare("<")),
    "ge0": (1, 1, _compare(">=")),
    "le0": (1, 1, _compare("<=")),
    "deg": (1, 1, lambda x: Binary("*", Number(180 / math.pi), x)),
    "rad": (1, 1, lambda x: Binary("*", Number(math.pi / 180), x)),
}


def _extended(x: Expression, *points: Expression) -> Expression:
    """A table whose ends go on with their last slopes, as pwl() of ngspice does (measured)."""
    held_x = _held(x, points)
    if held_x is not None:
        return call("table", held_x, *points)
    held = call("table", x, *points)
    if len(points) < 4:
        return held
    x1, y1, x2, y2 = points[:4]
    before = Binary("/", Binary("-", y2, y1), Binary("-", x2, x1))
    v1, w1, v2, w2 = points[-4:]
    after = Binary("/", Binary("-", w2, w1), Binary("-", v2, v1))
    low = Binary("*", before, call("ramp", Binary("-", x1, x)))
    high = Binary("*", after, call("ramp", Binary("-", x, v2)))
    return Binary("+", Binary("-", held, low), high)


def _held(x: Expression, points: Arguments) -> Expression | None:
    """Return y where x is min(max(y, first), last): a table as `expression_text` writes it."""
    if isinstance(x, Call) and x.function == "min" and x.arguments[1] == points[-2]:
        inner = x.arguments[0]
        if isinstance(inner, Call) and inner.function == "max" and inner.arguments[1] == points[0]:
            return inner.arguments[0]
    return None


def _square(x: Expression) -> Expression:
    return Binary("*", x, x)


def named(name: str, arguments: Arguments, *, dialect: str, parametric: bool) -> Expression | None:
    """Return what a dialect's function means, or None where the name is unknown.

    Args:
        name: Lower case.
        arguments: As many as `arity` allows.
        dialect: "default", "ps", "lt" or "hs".
        parametric: Whether it stands in a parameter rather than in a behavioural source.
    """
    if name == "pow":
        return raised(arguments[0], arguments[1], dialect=dialect, parametric=False) if (
            not parametric
        ) else call("power", *arguments)  # fmt: skip
    if name == "pwr" and dialect == "hs":
        name = "pwrs"
    row = NAMED.get(name)
    return None if row is None else row[2](*arguments)


def arity(name: str) -> tuple[int, int] | None:
    """Return how many arguments a function takes, at least and at most; None: unknown."""
    if name == "pow":
        return 2, 2
    row = NAMED.get(name)
    return None if row is None else row[:2]


def raised(x: Expression, y: Expression, *, dialect: str, parametric: bool) -> Expression:
    """Return x to the y as a dialect means `x^y` for a negative x.

    The default dialect and ps take the size of x (measured with ngspice 39, in parameters
    too); lt takes the real power or 0; hs cuts the exponent to its whole part.
    """
    if isinstance(x, Number) and isinstance(y, Number) and x.value >= 0:
        return call("power", x, y)
    if dialect == "lt":
        return call("power", x, y)
    if dialect == "hs" and not parametric:
        if isinstance(y, Number):
            if y.value == int(y.value):
                return call("power", x, y)
            whole: Expression = Number(float(int(y.value)))
        else:
            whole = _truncate(y)
        negative = Binary("<", x, ZERO)
        return Conditional(negative, call("power", x, whole), call("power", x, y))
    return call("pow", x, y)


def folded(expression: Expression) -> Expression:
    """Return a number where a call or an operation has only numbers; else the same object.

    Raises:
        ZeroDivisionError, OverflowError, ValueError: As Python's arithmetic does.
    """
    if isinstance(expression, Call) and expression.function != "ddt":
        numbers = [a.value for a in expression.arguments if isinstance(a, Number)]
        if len(numbers) == len(expression.arguments):
            return Number(float(FUNCTIONS[expression.function](*numbers)))
    return expression

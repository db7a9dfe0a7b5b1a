"""What each function of `stress.netlist.expression` computes, as plain numbers."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Name,
    Number,
    Unary,
    Voltage,
)

MOST_EXPONENT = 227.9  # beyond it ngspice does not raise e any further
_LARGEST = 1e99  # where it holds the exponential then


def _power(x: float, y: float) -> float:
    if x >= 0 or y == round(y):
        return x**y if x or y >= 0 else math.inf
    return 0.0


def _table(x: float, *points: float) -> float:
    xs, ys = points[0::2], points[1::2]
    if x <= xs[0]:
        return ys[0]
    for k in range(1, len(xs)):
        if x <= xs[k]:
            run = xs[k] - xs[k - 1]
            return ys[k - 1] + (ys[k] - ys[k - 1]) * ((x - xs[k - 1]) / run if run else 1.0)
    return ys[-1]


def _exp(x: float) -> float:
    return math.exp(x) if x < MOST_EXPONENT else _LARGEST


def _sign(x: float) -> float:
    return float((x > 0) - (x < 0))


def _size(x: float, y: float) -> float:
    return abs(x) ** y if x or y >= 0 else math.inf


FUNCTIONS: Mapping[str, Callable[..., float]] = {
    "abs": abs,
    "sgn": _sign,
    "sqrt": lambda x: math.sqrt(max(x, 0.0)),
    "exp": _exp,
    "ln": lambda x: math.log(max(x, 1e-300)),
    "log10": lambda x: math.log10(max(x, 1e-300)),
    "sin": math.sin,
    "cos": math.cos,
    "tan": math.tan,
    "asin": lambda x: math.asin(min(max(x, -1.0), 1.0)),
    "acos": lambda x: math.acos(min(max(x, -1.0), 1.0)),
    "atan": math.atan,
    "sinh": lambda x: math.sinh(min(max(x, -227.0), 227.0)),
    "cosh": lambda x: math.cosh(min(max(x, -227.0), 227.0)),
    "tanh": math.tanh,
    "atan2": math.atan2,
    "floor": lambda x: float(math.floor(x)),
    "ceil": lambda x: float(math.ceil(x)),
    "round": lambda x: float(round(x)),
    "min": min,
    "max": max,
    "pow": _size,
    "pows": lambda x, y: _sign(x) * _size(x, y) if x else 0.0,
    "power": _power,
    "step": lambda x: 1.0 if x > 0 else 0.0,
    "ramp": lambda x: max(x, 0.0),
    "limit": lambda x, low, high: min(max(x, low), high),
    "table": _table,
    "ddt": lambda x: 0.0,
}


def _divide(x: float, y: float) -> float:
    return x / y


OPERATORS: Mapping[str, Callable[[float, float], float]] = {
    "+": lambda x, y: x + y,
    "-": lambda x, y: x - y,
    "*": lambda x, y: x * y,
    "/": _divide,
    "%": math.fmod,
    "<": lambda x, y: float(x < y),
    "<=": lambda x, y: float(x <= y),
    ">": lambda x, y: float(x > y),
    ">=": lambda x, y: float(x >= y),
    "==": lambda x, y: float(x == y),
    "!=": lambda x, y: float(x != y),
    "&&": lambda x, y: float(bool(x) and bool(y)),
    "||": lambda x, y: float(bool(x) or bool(y)),
}


def evaluate(
    expression: Expression,
    *,
    voltages: Mapping[str, float] | None = None,
    currents: Mapping[str, float] | None = None,
    names: Mapping[str, float] | None = None,
) -> float:
    """Return the value of an expression; derivatives count as zero.

    Args:
        expression: What to compute.
        voltages: By flat node; ground need not be there.
        currents: By the element's name as the expression has it.
        names: `time`, `temper` and parameters.

    Raises:
        KeyError: A node, element or name without a value.
        ZeroDivisionError, OverflowError, ValueError: As Python's arithmetic does.
    """
    volts = voltages or {}

    def of(part: Expression) -> float:
        if isinstance(part, Number):
            return part.value
        if isinstance(part, Binary):
            return OPERATORS[part.operator](of(part.left), of(part.right))
        if isinstance(part, Call):
            return FUNCTIONS[part.function](*[of(argument) for argument in part.arguments])
        if isinstance(part, Voltage):
            plus = 0.0 if part.plus == "0" else volts[part.plus]
            return plus - (0.0 if part.minus == "0" else volts[part.minus])
        if isinstance(part, Unary):
            inner = of(part.operand)
            return -inner if part.operator == "-" else float(not inner)
        if isinstance(part, Conditional):
            return of(part.yes) if of(part.test) else of(part.no)
        if isinstance(part, Current):
            return (currents or {})[part.element]
        assert isinstance(part, Name)
        return (names or {})[part.name]

    return of(expression)

"""An expression as text for ngspice 39 without any compatibility mode.

What ngspice refuses or gets wrong there is written around: it takes the size of a negative base
by itself but not the sign of its slope, stops at a root or a logarithm out of range and at a
power of 0 below 1 (its slope is infinite), has no atan2 and no `%`, and calls a table pwl.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

from stress.netlist.bound import least
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

_SAME = frozenset(
    {"abs", "sgn", "exp", "sin", "cos", "tan", "atan", "sinh", "cosh", "tanh", "floor", "ceil"}
    | {"min", "max", "ddt"}
)
_NAMED = {"round": "nint", "ramp": "uramp"}
_ZERO, _ONE = Number(0.0), Number(1.0)
_SMALL = 1e-30  # stands for a base of 0 where the slope of the power is infinite
_LEAST = 1e-300  # the logarithm of less is out of range


def expression_text(expression: Expression) -> str:
    """Return text that ngspice reads as exactly this expression; names stand as they are."""
    return _text(expression)


def _text(part: Expression) -> str:
    if isinstance(part, Number):
        text = repr(float(part.value))
        return f"({text})" if text.startswith("-") else text
    if isinstance(part, Binary):
        if part.operator == "%":
            return _text(_remainder(part.left, part.right))
        return f"({_text(part.left)} {part.operator} {_text(part.right)})"
    if isinstance(part, Call):
        return _call(part)
    if isinstance(part, Voltage):
        if part.minus == "0":
            return f"v({part.plus})"
        return f"(-v({part.minus}))" if part.plus == "0" else f"v({part.plus},{part.minus})"
    if isinstance(part, Current):
        return f"i({part.element})"
    if isinstance(part, Unary):
        if part.operator == "!":
            return _text(Conditional(Binary("!=", part.operand, _ZERO), _ZERO, _ONE))
        return f"(-{_text(part.operand)})"
    if isinstance(part, Conditional):
        return f"({_text(part.test)} ? {_text(part.yes)} : {_text(part.no)})"
    assert isinstance(part, Name)
    return part.name


def _call(part: Call) -> str:
    name, arguments = part.function, part.arguments
    if name == "pow":
        return _plain("pow", _size(*arguments), arguments[1])
    if name == "sqrt":
        return _plain("sqrt", _at_least(arguments[0], _SMALL))
    if name in ("ln", "log10"):
        return _plain(name, _at_least(arguments[0], _LEAST))
    if name in ("asin", "acos"):
        return _plain(name, _within_one(arguments[0]))
    if name == "table":
        return _table(arguments[0], arguments[1:])
    if name in _SAME or name in _NAMED:
        return _plain(_NAMED.get(name, name), *arguments)
    return _text(_REWRITTEN[name](*arguments))


def _plain(name: str, *arguments: Expression) -> str:
    return f"{name}({','.join(_text(argument) for argument in arguments)})"


def _at_least(part: Expression, bound: float) -> Expression:
    """Return a part that ngspice never sees below a bound."""
    return part if least(part) >= bound else Call("max", (part, Number(bound)))


def _within_one(part: Expression) -> Expression:
    """Return a part held between -1 and 1, once."""
    if isinstance(part, Call) and part.function == "min" and part.arguments[1] == _ONE:
        inner = part.arguments[0]
        if isinstance(inner, Call) and inner.function == "max":
            return part
    return Call("min", (Call("max", (part, Number(-1.0))), _ONE))


def _size(base: Expression, power: Expression) -> Expression:
    """Return the size of a base; ngspice takes it by itself, but not the sign of its slope."""
    size = base if least(base) >= 0.0 else Call("abs", (base,))
    steep = not isinstance(power, Number) or power.value < 1
    return _at_least(size, _SMALL) if steep else size


def _signed(x: Expression, y: Expression) -> Expression:
    raised = Call("pow", (x, y))
    return raised if least(x) >= 0.0 else Binary("*", Call("sgn", (x,)), raised)


def _real(x: Expression, y: Expression) -> Expression:
    """x to the y where that is real, else 0."""
    raised = Call("pow", (x, y))
    if least(x) >= 0.0:
        return raised
    if isinstance(y, Number):
        if y.value != int(y.value):
            return Conditional(Binary(">", x, _ZERO), raised, _ZERO)
        return raised if y.value % 2 == 0 else _signed(x, y)
    half = Call("floor", (Binary("/", y, Number(2.0)),))
    even = Binary("==", Binary("*", half, Number(2.0)), y)
    whole = Binary("==", Call("floor", (y,)), y)
    negative = Conditional(whole, Conditional(even, raised, Unary("-", raised)), _ZERO)
    return Conditional(Binary(">=", x, _ZERO), raised, negative)


def _remainder(x: Expression, y: Expression) -> Expression:
    ratio = Binary("/", x, y)
    whole = Binary("*", Call("sgn", (ratio,)), Call("floor", (Call("abs", (ratio,)),)))
    return Binary("-", x, Binary("*", y, whole))


def _angle(y: Expression, x: Expression) -> Expression:
    """The angle of a point by its half: 2 atan(y / (r + x)), and pi on the negative x axis."""
    square = Binary("+", Binary("*", x, x), Binary("*", y, y))
    below = _at_least(Binary("+", Call("sqrt", (square,)), x), _SMALL)
    half = Binary("*", Number(2.0), Call("atan", (Binary("/", y, below),)))
    behind = Binary("&&", Binary("==", y, _ZERO), Binary("<", x, _ZERO))
    return Conditional(behind, Number(math.pi), half)


_REWRITTEN: Mapping[str, Callable[..., Expression]] = {
    "pows": _signed,
    "power": _real,
    "atan2": _angle,
    "step": lambda x: Conditional(Binary(">", x, _ZERO), _ONE, _ZERO),  # u(0) is a half there
    "limit": lambda x, low, high: Call("min", (Call("max", (x, low)), high)),
}


def _table(x: Expression, points: tuple[Expression, ...]) -> str:
    """ngspice wants plain numbers with rising x; one point, or two at one x, it refuses."""
    numbers = [point.value for point in points if isinstance(point, Number)]
    if len(numbers) < len(points):
        return _text(_written_out(x, points))
    pairs: list[tuple[float, float]] = []
    for first, second in zip(numbers[0::2], numbers[1::2], strict=True):
        if pairs and first <= pairs[-1][0]:
            first = pairs[-1][0] + max(abs(first), 1e-6) * 1e-9
        pairs.append((first, second))
    if len(pairs) == 1:
        return _text(Number(pairs[0][1]))
    told = ",".join(f"{a!r},{b!r}" for a, b in pairs)
    # pwl goes on beyond its ends with their slopes; a table does not.
    held = Call("min", (Call("max", (x, Number(pairs[0][0]))), Number(pairs[-1][0])))
    return f"pwl({_text(held)},{told})"


def _difference(a: Expression, b: Expression) -> Expression:
    if isinstance(a, Number) and isinstance(b, Number):
        return Number(a.value - b.value)
    return Binary("-", a, b)


def _written_out(x: Expression, points: tuple[Expression, ...]) -> Expression:
    """A table whose points are no plain numbers, as a chain of choices."""
    xs, ys = points[0::2], points[1::2]
    found = ys[-1]
    for k in range(len(xs) - 1, 0, -1):
        rise, run = _difference(ys[k], ys[k - 1]), _difference(xs[k], xs[k - 1])
        share = Binary("/", Binary("-", x, xs[k - 1]), run)
        inside = Binary("+", ys[k - 1], Binary("*", rise, share))
        found = Conditional(Binary("<=", x, xs[k]), inside, found)
    return Conditional(Binary("<=", x, xs[0]), ys[0], found)

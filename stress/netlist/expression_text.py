"""An expression as text for ngspice 39 without any compatibility mode.

What ngspice refuses or gets wrong there is written around: it takes the size of a negative base
by itself but not the sign of its slope, stops at a root or a logarithm out of range and at a
power of 0 below 1 (its slope is infinite), has no atan2 and no `%`, and calls a table pwl.
"""

from __future__ import annotations

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
_SMALL = "1e-30"  # stands for a base of 0 where the slope of the power is infinite
_LEAST = "1e-300"  # the logarithm of less is out of range


def expression_text(expression: Expression) -> str:
    """Return text that ngspice reads as exactly this expression; names stand as they are."""
    return _text(expression)


def _text(part: Expression) -> str:
    if isinstance(part, Number):
        text = repr(float(part.value))
        return f"({text})" if text.startswith("-") else text
    if isinstance(part, Binary):
        return _operation(part)
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
            return f"(({_text(part.operand)} != 0.0) ? 0.0 : 1.0)"
        return f"(-{_text(part.operand)})"
    if isinstance(part, Conditional):
        return f"({_text(part.test)} ? {_text(part.yes)} : {_text(part.no)})"
    assert isinstance(part, Name)
    return part.name


def _operation(part: Binary) -> str:
    left, right = _text(part.left), _text(part.right)
    if part.operator == "%":
        ratio = f"({left}/{right})"
        return f"({left} - {right}*sgn{ratio}*floor(abs{ratio}))"
    return f"({left} {part.operator} {right})"


def _call(part: Call) -> str:
    name, arguments = part.function, part.arguments
    texts = [_text(argument) for argument in arguments]
    if name in _SAME or name in _NAMED:
        return f"{_NAMED.get(name, name)}({','.join(texts)})"
    if name in ("pow", "pows", "power"):
        return _raised(name, arguments[0], arguments[1])
    x = texts[0]
    if name == "step":  # u() of ngspice is a half at 0
        return f"(({x} > 0.0) ? 1.0 : 0.0)"
    if name == "sqrt":
        return f"sqrt({_at_least(arguments[0], _SMALL)})"
    if name in ("ln", "log10"):
        return f"{name}({_at_least(arguments[0], _LEAST)})"
    if name in ("asin", "acos"):
        return f"{name}(min(max({x},-1.0),1.0))"
    if name == "limit":
        return f"min(max({x},{texts[1]}),{texts[2]})"
    if name == "table":
        return _table(x, arguments[1:])
    assert name == "atan2"
    return _angle(texts[0], texts[1])


def _at_least(part: Expression, least: str) -> str:
    """Return the text of a part that ngspice never sees below a bound."""
    return _text(part) if _bounded(part, float(least)) else f"max({_text(part)},{least})"


def _bounded(part: Expression, least: float) -> bool:
    """Whether a part is by its form never below a bound, so that a guard is there already."""
    if isinstance(part, Number):
        return part.value >= least
    if isinstance(part, Call) and part.function == "max":
        return any(_bounded(argument, least) for argument in part.arguments)
    return isinstance(part, Call) and part.function in ("abs", "sqrt") and least <= 0


def _raised(name: str, base: Expression, power: Expression) -> str:
    x, y = _text(base), _text(power)
    number = power.value if isinstance(power, Number) else None
    size = x if _bounded(base, 0.0) else f"abs({x})"
    if (number is None or number < 1) and not _bounded(base, float(_SMALL)):
        size = f"max({size},{_SMALL})"
    raised = f"pow({size},{y})"
    if name == "pow" or _bounded(base, 0.0):
        return raised
    if name == "pows":
        return f"(sgn({x})*{raised})"
    if number is not None and number == int(number):
        return raised if number % 2 == 0 else f"(sgn({x})*{raised})"
    if number is not None:
        return f"(({x} > 0.0) ? {raised} : 0.0)"
    odd = f"(floor({y}/2)*2 == {y} ? {raised} : (-{raised}))"
    return f"({x} >= 0 ? {raised} : (floor({y}) == {y} ? {odd} : 0))"


def _table(x: str, points: tuple[Expression, ...]) -> str:
    """ngspice wants plain numbers with rising x; one point, or two at one x, it refuses."""
    numbers = [point.value if isinstance(point, Number) else None for point in points]
    if any(number is None for number in numbers):
        return _written_out(x, points)
    pairs: list[tuple[float, float]] = []
    for at in range(0, len(numbers), 2):
        first, second = numbers[at], numbers[at + 1]
        assert first is not None
        assert second is not None
        if pairs and first <= pairs[-1][0]:
            step = max(abs(first), 1e-6) * 1e-9
            first = pairs[-1][0] + step
        pairs.append((first, second))
    if len(pairs) == 1:
        return repr(float(pairs[0][1]))
    told = ",".join(f"{a!r},{b!r}" for a, b in pairs)
    # pwl goes on beyond its ends with their slopes; a table does not.
    return f"pwl(min(max({x},{pairs[0][0]!r}),{pairs[-1][0]!r}),{told})"


def _written_out(x: str, points: tuple[Expression, ...]) -> str:
    """A table whose points are no plain numbers, as a chain of choices."""
    xs, ys = [_text(point) for point in points[0::2]], [_text(point) for point in points[1::2]]
    found = ys[-1]
    for k in range(len(xs) - 1, 0, -1):
        slope = f"({ys[k]} - {ys[k - 1]})*({x} - {xs[k - 1]})/({xs[k]} - {xs[k - 1]})"
        found = f"({x} <= {xs[k]} ? ({ys[k - 1]} + {slope}) : {found})"
    return f"({x} <= {xs[0]} ? {ys[0]} : {found})"


def _angle(y: str, x: str) -> str:
    """The angle of a point by its half: 2 atan(y / (r + x)), and pi on the negative x axis."""
    radius = f"sqrt(max({x}*{x} + {y}*{y},{_SMALL}))"
    half = f"2*atan({y}/max({radius} + {x},{_SMALL}))"
    return f"(({y} == 0 && {x} < 0) ? 3.141592653589793 : {half})"

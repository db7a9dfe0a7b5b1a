"""The slope of a charge over its voltage, which is the capacitance that ngspice wants."""

from __future__ import annotations

from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Expression,
    Name,
    Number,
    Unary,
)

_ZERO, _ONE = Number(0.0), Number(1.0)


def slope(charge: Expression, by: Name, across: Expression) -> Expression | None:
    """Return dQ/dx with x replaced by a voltage; None where a part of it has no slope here."""
    found = _slope(charge, by)
    return None if found is None else _with(found, by, across)


def _slope(part: Expression, by: Name) -> Expression | None:
    if part == by:
        return _ONE
    if isinstance(part, Binary):
        return _of_operation(part, by)
    if isinstance(part, Unary) and part.operator == "-":
        inner = _slope(part.operand, by)
        return None if inner is None else _minus(_ZERO, inner)
    if isinstance(part, Conditional):
        yes, no = _slope(part.yes, by), _slope(part.no, by)
        return None if yes is None or no is None else Conditional(part.test, yes, no)
    if isinstance(part, Call):
        return _of_call(part, by)
    return _ZERO


def _of_operation(part: Binary, by: Name) -> Expression | None:
    left, right = _slope(part.left, by), _slope(part.right, by)
    if left is None or right is None:
        return None
    if part.operator == "+":
        return _plus(left, right)
    if part.operator == "-":
        return _minus(left, right)
    if part.operator == "*":
        return _plus(_times(left, part.right), _times(part.left, right))
    if part.operator == "/":
        top = _minus(_times(left, part.right), _times(part.left, right))
        return Binary("/", top, _times(part.right, part.right))
    return _ZERO  # a comparison is flat


def _of_call(part: Call, by: Name) -> Expression | None:
    inner = [_slope(argument, by) for argument in part.arguments]
    if any(slope is None for slope in inner):
        return None
    if all(slope == _ZERO for slope in inner):
        return _ZERO
    x = part.arguments[0]
    first = inner[0]
    assert first is not None
    outer: Expression | None = None
    if part.function == "exp":
        outer = part
    elif part.function == "ln":
        outer = Binary("/", _ONE, x)
    elif part.function == "sqrt":
        outer = Binary("/", Number(0.5), part)
    elif part.function == "tanh":
        outer = _minus(_ONE, _times(part, part))
    elif part.function == "atan":
        outer = Binary("/", _ONE, _plus(_ONE, _times(x, x)))
    elif part.function == "sin":
        outer = Call("cos", (x,))
    elif part.function == "cos":
        outer = _minus(_ZERO, Call("sin", (x,)))
    elif part.function == "abs":
        outer = Call("sgn", (x,))
    elif part.function == "ramp":
        outer = Call("step", (x,))
    elif part.function in ("pow", "power") and isinstance(part.arguments[1], Number):
        power = part.arguments[1].value
        lower = Call("pow", (x, Number(power - 1)))
        outer = _times(Number(power), lower)
        if part.function == "pow" or power % 2 == 0:
            outer = _times(outer, Call("sgn", (x,)))
    return None if outer is None else _times(outer, first)


def _plus(a: Expression, b: Expression) -> Expression:
    return b if a == _ZERO else a if b == _ZERO else Binary("+", a, b)


def _minus(a: Expression, b: Expression) -> Expression:
    return a if b == _ZERO else Binary("-", a, b)


def _times(a: Expression, b: Expression) -> Expression:
    if a == _ZERO or b == _ZERO:
        return _ZERO
    return b if a == _ONE else a if b == _ONE else Binary("*", a, b)


def _with(part: Expression, by: Name, across: Expression) -> Expression:
    if part == by:
        return across
    if isinstance(part, Binary):
        return Binary(part.operator, _with(part.left, by, across), _with(part.right, by, across))
    if isinstance(part, Unary):
        return Unary(part.operator, _with(part.operand, by, across))
    if isinstance(part, Call):
        return Call(part.function, tuple(_with(a, by, across) for a in part.arguments))
    if isinstance(part, Conditional):
        return Conditional(
            _with(part.test, by, across), _with(part.yes, by, across), _with(part.no, by, across)
        )
    return part

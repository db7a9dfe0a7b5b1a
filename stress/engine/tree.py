"""Expressions as trees: their parts, and the same expression with other parts."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Name,
    Unary,
    Voltage,
)


def inner(expression: Expression) -> tuple[Expression, ...]:
    """Return what an expression is directly made of."""
    match expression:
        case Call(_, arguments):
            return arguments
        case Unary(_, operand):
            return (operand,)
        case Binary(_, left, right):
            return (left, right)
        case Conditional(test, yes, no):
            return (test, yes, no)
        case _:
            return ()


def rebuilt(expression: Expression, parts: Sequence[Expression]) -> Expression:
    """Return an expression with other parts in the places of its `inner` ones."""
    match expression:
        case Call(function, _):
            return Call(function, tuple(parts))
        case Unary(operator, _):
            return Unary(operator, parts[0])
        case Binary(operator, _, _):
            return Binary(operator, parts[0], parts[1])
        case Conditional(_, _, _):
            return Conditional(parts[0], parts[1], parts[2])
        case _:
            return expression


def everything(expression: Expression) -> Iterator[Expression]:
    """Yield an expression and all that is in it."""
    yield expression
    for part in inner(expression):
        yield from everything(part)


def reads_time(expression: Expression) -> bool:
    """Whether an expression depends on time by itself."""
    return any(
        isinstance(part, Name) and part.name.lower() == "time" for part in everything(expression)
    )


def varies(expression: Expression) -> bool:
    """Whether an expression depends on the circuit."""
    return any(isinstance(part, Voltage | Current) for part in everything(expression))

"""Laws with what is known put in: shorter, and the same at every voltage."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from stress.engine.tree import inner, rebuilt
from stress.netlist.bound import least
from stress.netlist.expression import Binary, Call, Expression, Number, Unary, Voltage

_ARITHMETIC: Mapping[str, Callable[[float, float], float]] = {
    "+": lambda left, right: left + right,
    "-": lambda left, right: left - right,
    "*": lambda left, right: left * right,
}


def folded(expression: Expression, held_V: Mapping[str, float]) -> Expression:
    """Return a law in which held nodes are numbers and guards that never act are gone.

    Args:
        expression: The law.
        held_V: Voltages that an ideal source holds against ground, by node in lower case.
    """
    if isinstance(expression, Voltage):
        return _held(expression, held_V)
    return _shorter(rebuilt(expression, [folded(part, held_V) for part in inner(expression)]))


def _held(voltage: Voltage, held_V: Mapping[str, float]) -> Expression:
    known = {"0": 0.0, **held_V}
    plus, minus = known.get(voltage.plus.lower()), known.get(voltage.minus.lower())
    if plus is not None and minus is not None:
        return Number(plus - minus)
    return voltage


def _shorter(part: Expression) -> Expression:
    """Return a part whose own parts are as short as they get, shorter where it can be."""
    match part:
        case Binary(operator, Number(left), Number(right)) if operator in _ARITHMETIC:
            return Number(_ARITHMETIC[operator](left, right))
        case Unary("-", Number(value)):
            return Number(-value)
        case Binary("*", left, Number() as number):
            return _shorter(Binary("*", number, left))
        case Binary("*", Number(1.0), right):
            return right
        case Binary("*", Number(one), Binary("*", Number(other), right)):
            return _shorter(Binary("*", Number(one * other), right))
        case Binary("*", Binary("*", Number() as number, left), right):
            return Binary("*", number, _shorter(Binary("*", left, right)))
        case Binary("/", left, Number(value)) if value:
            return _shorter(Binary("*", Number(1.0 / value), left))
        case Call("abs", (of,)) if least(of) >= 0.0:
            return of
        case Call("max", (of, Number(floor))) if least(of) >= floor:
            return of
        case _:
            return part

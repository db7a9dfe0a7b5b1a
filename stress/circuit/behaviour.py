"""What a behavioural current between two nodes is: a rectifier, a resistance, or neither."""

from __future__ import annotations

from stress.netlist.evaluate import evaluate
from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Unary,
    Voltage,
)
from stress.netlist.flat import Element

PROBE_V = 100.0
BLOCKED = 1e-3  # share of the forward current that a rectifier may pass the other way


def nodes_in(expression: Expression) -> set[str]:
    """Return the nodes an expression looks at."""
    match expression:
        case Voltage(plus, minus):
            return {plus, minus}
        case Call(_, arguments):
            return {n for a in arguments for n in nodes_in(a)}
        case Unary(_, operand):
            return nodes_in(operand)
        case Binary(_, left, right):
            return nodes_in(left) | nodes_in(right)
        case Conditional(test, yes, no):
            return nodes_in(test) | nodes_in(yes) | nodes_in(no)
        case Current() | _:
            return set()


def conduction(element: Element) -> int | None:
    """Return how a B element passes the current that its own voltage drives.

    Returns:
        1 or -1 for a rectifier with its anode at the first or second node, 0 for a resistance,
        None where something else than its own voltage sets the current.
    """
    law = element.law
    if element.letter != "B" or law is None or law.quantity != "I" or len(element.nodes) != 2:
        return None
    if element.nodes[0] == element.nodes[1] or not nodes_in(law.expression) <= {*element.nodes}:
        return None
    forward, backward = _current(element, PROBE_V), _current(element, -PROBE_V)
    if forward is None or backward is None:
        return None
    if forward > 0 and abs(backward) <= BLOCKED * forward:
        return 1
    if backward < 0 and abs(forward) <= BLOCKED * -backward:
        return -1
    return 0 if forward > 0 > backward else None


def _current(element: Element, volts: float) -> float | None:
    first, second = element.nodes
    at = {first: volts, second: 0.0} if first != "0" else {second: -volts}
    try:
        assert element.law is not None
        return evaluate(element.law.expression, voltages=at, names={"temper": 27.0, "time": 0.0})
    except (ArithmeticError, KeyError, ValueError):
        return None

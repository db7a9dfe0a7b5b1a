"""Behavioural laws made easier for ngspice, without a change of what they compute.

ngspice differentiates an expression symbolically for every voltage in it, so the work grows
with the square of its size; half the time of a receiver's simulation goes there. Roots, arc
tangents and long quotients, which tube models repeat, become nodes of their own. Other parts
stay where they are: their slope has no bound, and Newton's iteration over them diverged.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from stress.engine.tree import everything, inner, rebuilt, varies
from stress.netlist.expression import Binary, Call, Expression, Voltage
from stress.netlist.flat import Element, Law

NODE = "part#"  # how the names of the nodes begin; no netlist can hold it
_BOUNDED = frozenset({"sqrt", "atan"})
LONG_QUOTIENT = 15  # parts


def eased(elements: Sequence[Element]) -> tuple[Element, ...]:
    """Return the elements with parts of the laws of B elements as nodes of their own."""
    made: dict[Expression, str] = {}
    result: list[Element] = []
    added: list[Element] = []
    for element in elements:
        if element.law is None or element.letter != "B":
            result.append(element)
            continue
        found: list[tuple[str, Expression]] = []
        whole = element.law.expression
        law = rebuilt(whole, [_eased(part, made, found) for part in inner(whole)])
        result.append(replace(element, law=Law(element.law.quantity, law)))
        added += [
            Element(
                name=f"B{node}",
                letter="B",
                nodes=(node, "0"),
                law=Law("V", expression),
                span=element.span,
            )
            for node, expression in found
        ]
    return (*result, *added)


def _eased(
    expression: Expression, made: dict[Expression, str], found: list[tuple[str, Expression]]
) -> Expression:
    """Return an expression with its parts replaced; new nodes are entered in both lists."""
    if expression in made:
        return Voltage(made[expression])
    eased = rebuilt(expression, [_eased(part, made, found) for part in inner(expression)])
    if not (_wanted(expression) and varies(expression)):
        return eased
    node = f"{NODE}{len(made) + 1}"
    made[expression] = node
    found.append((node, eased))
    return Voltage(node)


def _wanted(expression: Expression) -> bool:
    match expression:
        case Call(function, _):
            return function in _BOUNDED
        case Binary("/", _, _):
            return sum(1 for _ in everything(expression)) > LONG_QUOTIENT
        case _:
            return False

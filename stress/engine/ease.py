"""Behavioural laws made easier for ngspice, without a change of what they compute.

ngspice differentiates an expression symbolically for every voltage in it, so the work grows
with the square of its size; half the time of a receiver's simulation goes there. What sources
hold is put in as numbers. Roots, arc tangents and long quotients, which tube models repeat, become
nodes of their own. Other parts stay where they are: their slope has no bound, and Newton's
iteration over them diverged; with ln(1 + exp x) apart it did so more often and was no faster.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from stress.engine.fold import folded
from stress.engine.tree import everything, inner, rebuilt, varies
from stress.netlist.expression import Binary, Call, Expression, Voltage
from stress.netlist.flat import Element, Law

NODE = "part#"  # how the names of the nodes begin; no netlist can hold it
_BOUNDED = frozenset({"sqrt", "atan"})
LONG_QUOTIENT = 15  # parts


def eased(elements: Sequence[Element], *, held_V: Mapping[str, float]) -> tuple[Element, ...]:
    """Return the elements with parts of the laws of B elements as nodes of their own.

    Args:
        elements: Flat.
        held_V: Voltages that hold in every case, by node in lower case; see `held`.
    """
    laws = {
        element.name: folded(element.law.expression, held_V)
        for element in elements
        if element.law is not None and element.letter == "B"
    }
    made: dict[Expression, str] = {}
    result: list[Element] = []
    added: list[Element] = []
    for element in elements:
        if element.name not in laws or element.law is None:
            result.append(element)
            continue
        found: list[tuple[str, Expression]] = []
        whole = laws[element.name]
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


def holders(elements: Sequence[Element]) -> dict[str, Element]:
    """Return the ideal direct sources against ground by name in lower case."""
    return {
        element.name.lower(): element
        for element in elements
        if element.letter == "V"
        and element.law is None
        and element.wave is None
        and element.nodes[1] == "0"
    }


def held(elements: Sequence[Element], *, but: frozenset[str]) -> dict[str, float]:
    """Return the voltages that `holders` hold, by node in lower case.

    Args:
        elements: Flat.
        but: Names of those that cases change, in lower case.
    """
    return {
        element.nodes[0].lower(): element.value or 0.0
        for name, element in holders(elements).items()
        if name not in but
    }


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
    return Voltage(made[expression])


def _wanted(expression: Expression) -> bool:
    match expression:
        case Call(function, _):
            return function in _BOUNDED
        case Binary("/", _, _):
            return sum(1 for _ in everything(expression)) > LONG_QUOTIENT
        case _:
            return False

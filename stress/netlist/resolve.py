"""The names by which elements mean each other, settled once all elements are there."""

from __future__ import annotations

from dataclasses import replace

from stress.netlist.assembly import Assembly
from stress.netlist.expression import (
    Binary,
    Call,
    Conditional,
    Current,
    Expression,
    Unary,
)
from stress.netlist.flat import Element
from stress.netlist.problem import Problems
from stress.netlist.scope import did_you_mean
from stress.text.span import SourceError, Span


def resolve(into: Assembly, problems: Problems) -> tuple[Element, ...]:
    """Return the elements with the names they mean in the spelling of their own cards.

    A coupling must name inductors, a controlled source voltage sources; what is missing is an
    error at the card that names it.
    """
    names = {element.name.lower(): element for element in into.elements}
    found = []
    for element in into.elements:
        if element.controls:
            element = replace(
                element,
                controls=tuple(
                    _settled(name, element, names, problems) for name in element.controls
                ),
            )
        if element.law is not None:
            expression = _with(element.law.expression, element, names, problems)
            if expression is not element.law.expression:
                element = replace(element, law=replace(element.law, expression=expression))
        found.append(element)
    return tuple(found)


def _settled(name: str, element: Element, names: dict[str, Element], problems: Problems) -> str:
    """Look in the instance, then in those around it."""
    key = name.lower()
    held = names.get(key)
    while held is None and "." in key:
        outer, _, own = key.rpartition(".")
        above = outer.rpartition(".")[0]
        key = f"{above}.{own}" if above else own
        held = names.get(key)
    if held is None:
        short = name.rpartition(".")[2]
        near = [
            other.name.rpartition(".")[2]
            for other in names.values()
            if other.inside == element.inside
        ]
        problems.error(
            SourceError(
                f'{element.name}: there is no element "{short}"',
                _at(element, short),
                did_you_mean(short, near),
            )
        )
        return name
    wanted = {"K": "L", "F": "V", "H": "V", "W": "V"}.get(element.letter)
    if wanted is not None and held.letter not in (wanted, "B" if wanted == "V" else wanted):
        what = "an inductor" if wanted == "L" else "a voltage source"
        problems.error(
            SourceError(f'{element.name}: "{held.name}" is not {what}', _at(element, held.name))
        )
    return held.name


def _at(element: Element, name: str) -> Span:
    """Return the place of a name in the card of an element, where it stands on its first line."""
    span = element.span
    at = span.text.lower().find(name.lower(), span.column)
    return replace(span, column=at + 1, length=len(name)) if at >= 0 else span


def _with(
    part: Expression, element: Element, names: dict[str, Element], problems: Problems
) -> Expression:
    """Return the expression with its currents settled; the same object where nothing changes."""
    if isinstance(part, Current):
        name = _settled(part.element, element, names, problems)
        return part if name == part.element else Current(name)
    if isinstance(part, Binary):
        left = _with(part.left, element, names, problems)
        right = _with(part.right, element, names, problems)
        same = left is part.left and right is part.right
        return part if same else Binary(part.operator, left, right)
    if isinstance(part, Call):
        inner = tuple(_with(a, element, names, problems) for a in part.arguments)
        same = all(a is b for a, b in zip(inner, part.arguments, strict=True))
        return part if same else Call(part.function, inner)
    if isinstance(part, Unary):
        operand = _with(part.operand, element, names, problems)
        return part if operand is part.operand else Unary(part.operator, operand)
    if isinstance(part, Conditional):
        test = _with(part.test, element, names, problems)
        yes = _with(part.yes, element, names, problems)
        no = _with(part.no, element, names, problems)
        same = test is part.test and yes is part.yes and no is part.no
        return part if same else Conditional(test, yes, no)
    return part

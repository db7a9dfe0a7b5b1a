"""The equipment with the chosen parts in place, so that everything can be asked again."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import sqrt

from stress.circuit.circuit import Circuit, Position
from stress.netlist.flat import Element
from stress.parts import styles
from stress.study.result import Replacement

BALANCE = "#balance"


def fitted(circuit: Circuit, replacements: Mapping[str, Replacement]) -> Circuit:
    """Return a copy of a circuit with the chosen parts.

    Every position takes the value, rating and style of its replacement and, with them, the ESR
    and insulation of a new part. The balancing resistors of a series arrangement appear as one
    resistor across it.

    Args:
        circuit: As found.
        replacements: By position name; a position without one stays as it is.

    Raises:
        KeyError: For a style that does not exist.
    """
    chosen = {name.lower(): part for name, part in replacements.items()}
    positions = tuple(_fitted(position, chosen) for position in circuit.positions)
    values = {position.name.lower(): position.value_F for position in positions}
    elements: list[Element] = []
    for element in circuit.netlist.elements:
        name = element.name.lower()
        if name not in values or element.law is not None:
            elements.append(element)
            continue
        elements.append(replace(element, value=values[name]))
        part = chosen.get(name)
        if part is not None and part.balance_ohm is not None:
            elements.append(
                Element(
                    name=f"{element.name}{BALANCE}",
                    letter="R",
                    nodes=element.nodes,
                    value=part.balance_ohm,
                    span=element.span,
                )
            )
    return replace(
        circuit,
        positions=positions,
        netlist=replace(circuit.netlist, elements=tuple(elements)),
    )


def _fitted(position: Position, chosen: Mapping[str, Replacement]) -> Position:
    part = chosen.get(position.name.lower())
    if part is None:
        return position
    return replace(
        position,
        value_F=part.value_F,
        rated_V=_peak_V(part),
        style=styles.styles()[part.style],
        style_source="fitted",
        ripple_A=None,
        esr_ohm=None,
        insulation_ohm=None,
        can="",
    )


def _peak_V(part: Replacement) -> float | None:
    """Return the rating that peaks are judged by; a line part is rated in rms volts."""
    if part.safety_class is not None and part.rated_V is not None:
        return part.rated_V * sqrt(2.0)
    return part.rated_V

"""Leakage between nodes that no capacitor joins: sections of a can, wafers in a transformer can.

Each is studied as a position that is nothing but its leakage.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

from stress.circuit.circuit import Circuit, Position, Role
from stress.engine.case import Twin
from stress.engine.twin import MOST_LEAKAGE_OHM
from stress.netlist.flat import Element
from stress.parts.styles import styles


def leaks_between(circuit: Circuit) -> tuple[Position, ...]:
    """Return what can leak between the sections of every can, and what the sheet states."""
    found = []
    for can in circuit.sheet.cans:
        sections = [circuit.position(name) for name in can.sections]
        for first, second in combinations(sections, 2):
            nodes = (_hot(first, can.common), _hot(second, can.common))
            name = f"{can.name}:{first.name}-{second.name}"
            text = f"leakage between the sections {first.name} and {second.name} of {can.name}"
            if nodes[0] != nodes[1]:
                found.append(_pseudo(first, name=name, nodes=nodes, text=text))
    like = circuit.positions[0]
    for fault in circuit.sheet.faults:
        text = f"leakage between {fault.between[0]} and {fault.between[1]}"
        style = styles().get(fault.style or "", like.style)
        found.append(
            replace(_pseudo(like, name=fault.name, nodes=fault.between, text=text), style=style)
        )
    return tuple(found)


def _hot(section: Position, common: str | None) -> str:
    """Return the node of a section that is not the common one of its can."""
    return section.nodes[1] if section.nodes[0] == common else section.nodes[0]


def _pseudo(like: Position, *, name: str, nodes: tuple[str, str], text: str) -> Position:
    return replace(
        like,
        name=name,
        nodes=nodes,
        role=Role.UNKNOWN,
        role_text=text,
        value_F=None,
        rated_V=None,
        ripple_A=None,
        plus=None,
        esr_ohm=None,
        insulation_ohm=MOST_LEAKAGE_OHM,
    )


def with_leaks_between(twin: Twin, circuit: Circuit) -> Twin:
    """Return the twin with a leakage resistor for each of `leaks_between`."""
    added = tuple(
        Element(
            name=f"{leak.name}#leak",
            letter="R",
            nodes=leak.nodes,
            value=MOST_LEAKAGE_OHM,
            span=leak.span,
        )
        for leak in leaks_between(circuit)
    )
    return replace(twin, elements=twin.elements + added) if added else twin

"""The positions: every capacitor in its place, with role, style, rating and plus side."""

from __future__ import annotations

from collections.abc import Collection, Sequence

from stress.circuit.circuit import Position, Role
from stress.circuit.component import is_parasitic
from stress.circuit.graph import Edge
from stress.circuit.roles import role_of
from stress.circuit.surroundings import Surroundings
from stress.finding import Finding, Severity
from stress.netlist.flat import Element
from stress.parts import styles
from stress.parts.sheet import CapacitorEntry, Sheet
from stress.text.figure import figure
from stress.text.span import SourceError

NO_PLUS = frozenset({Role.LINE_ACROSS, Role.LINE_CHASSIS, Role.BUFFER})


def find(
    s: Surroundings, *, sheet: Sheet, inside: Collection[str]
) -> tuple[tuple[Position, ...], tuple[SourceError, ...], tuple[Finding, ...]]:
    """Return the positions in netlist order, values that are missing, and what was odd.

    Args:
        s: The circuit.
        sheet: What the user knows.
        inside: Elements that are in devices, lower case: no positions.
    """
    cans = {name.lower(): can.name for can in sheet.cans for name in can.sections}
    edges = {e.name.lower(): e for e in s.graph.edges if e.letter == "C"}
    positions: list[Position] = []
    errors: list[SourceError] = []
    findings: list[Finding] = []
    for element in s.graph.netlist.elements:
        name = element.name.lower()
        if element.letter != "C" or name in inside or is_parasitic(name):
            continue
        entry = sheet.capacitors.get(name, CapacitorEntry())
        value = entry.value_F if entry.value_F is not None else element.value
        if value is None and element.law is None:
            errors.append(
                SourceError(
                    f"{element.name} has no value",
                    element.span,
                    f"write it on the card, or in the sheet: [capacitors.{element.name}] "
                    'value = "0.1 uF"',
                )
            )
        if value is not None and value <= 0.0:
            findings.append(_no_part(element, value))
            continue
        edge = _valued(edges[name], value)
        role, text = _stated(entry, *role_of(s, edge))
        position, odd = _position(s, element, entry, value, role, text, cans.get(name, ""))
        positions.append(position)
        findings += odd
        if entry.plus is not None and entry.plus.lower() not in element.nodes:
            errors.append(
                SourceError(
                    f"the sheet puts the plus side of {element.name} at {entry.plus!r}, "
                    "where it has no end",
                    sheet.span("capacitors", name, "plus") or element.span,
                    f"its nodes are {element.nodes[0]} and {element.nodes[1]}",
                )
            )
    return tuple(positions), tuple(errors), tuple(findings)


def _stated(entry: CapacitorEntry, role: Role, text: str) -> tuple[Role, str]:
    """Return the role that the sheet states; free words go before those of the graph."""
    if entry.role is None:
        return role, text
    stated = {known.value.lower(): known for known in Role}.get(entry.role.strip().lower())
    if stated is None:
        return role, entry.role
    return stated, text if stated is role else stated.value


def _valued(edge: Edge, value: float | None) -> Edge:
    return Edge(edge.name, edge.letter, edge.a, edge.b, value, edge.conducts)


def _no_part(element: Element, value_F: float) -> Finding:
    return Finding(
        severity=Severity.WATCH,
        where=element.name,
        text=f"its value is {figure(value_F, 'F')}: no such part can be fitted, so it is not judged",
        action="correct the value if a real part sits there",
        span=element.span,
        rule="no-part",
    )


def _position(
    s: Surroundings,
    element: Element,
    entry: CapacitorEntry,
    value: float | None,
    role: Role,
    text: str,
    can: str,
) -> tuple[Position, tuple[Finding, ...]]:
    tags = element.tags
    rated = entry.rated_V if entry.rated_V is not None else tags.rated_V
    findings: tuple[Finding, ...] = ()
    style, source = None, ""
    for stated, where in ((entry.style, "sheet"), (tags.style, "netlist tag")):
        if stated is None or style is not None:
            continue
        style, source = styles.find(stated), where
        if style is None:
            findings = (
                *findings,
                Finding(
                    severity=Severity.NOTE,
                    where=element.name,
                    text=f"the style {stated!r} ({where}) is not known; {styles.near(stated)}",
                    rule="unknown-style",
                    span=element.span,
                ),
            )
    if style is None:
        style, source = styles.assumed(
            value or 0.0,
            role=role.value,
            polar_hint=True if entry.plus is not None else None,
            rated_V=rated,
        )
    position = Position(
        name=element.name,
        nodes=(element.nodes[0], element.nodes[1]),
        role=role,
        role_text=text,
        style=style,
        style_source=source,
        value_F=value,
        rated_V=rated,
        ripple_A=entry.ripple_A if entry.ripple_A is not None else tags.ripple_A,
        plus=_plus(s, element, entry, role),
        esr_ohm=entry.esr_ohm if entry.esr_ohm is not None else tags.esr_ohm,
        insulation_ohm=entry.insulation_ohm,
        can=can,
        span=element.span,
    )
    return position, findings


def _plus(s: Surroundings, element: Element, entry: CapacitorEntry, role: Role) -> int | None:
    """Return the plus side by the sheet, else by the graph where that leaves no doubt."""
    if entry.plus is not None and entry.plus.lower() in element.nodes:
        return element.nodes.index(entry.plus.lower())
    return None if role in NO_PLUS else expected_plus(s, element.nodes)


def expected_plus(s: Surroundings, nodes: Sequence[str]) -> int | None:
    """Return which end has the higher direct voltage, as far as the graph tells."""
    a, b = s.graph.at(nodes[0]), s.graph.at(nodes[1])
    driven = s.drive.nodes
    if a == b or a in driven or b in driven:
        return None
    up = s.supply.higher(a, b)
    return None if up is None else (0 if up == a else 1)

"""What is dangerous or impossible by the circuit alone; nothing is solved."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import pairwise

import networkx as nx

from stress.circuit.circuit import Position, Role
from stress.circuit.joined import GROUND
from stress.circuit.position import expected_plus
from stress.circuit.surroundings import Surroundings
from stress.finding import Finding, Severity
from stress.parts.sheet import CapacitorEntry, Sheet

Rule = Callable[[Surroundings, Sequence[Position], Sheet], list[Finding]]
MOST_NAMES = 6


def find(s: Surroundings, *, positions: Sequence[Position], sheet: Sheet) -> tuple[Finding, ...]:
    """Return everything visible without solving, by every rule of `RULES`."""
    return tuple(finding for rule in RULES for finding in rule(s, positions, sheet))


def floating_nodes(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Nodes without a path for direct current to ground: their voltage is set by leakage."""
    net = nx.Graph()
    net.add_nodes_from(s.graph.nodes)
    net.add_edges_from((e.a, e.b) for e in s.graph.edges if e.conducts)
    found = []
    for island in nx.connected_components(net):
        if GROUND in island:
            continue
        nodes = sorted(island)
        touching = [p for p in positions if {s.graph.at(n) for n in p.nodes} & island]
        names = ", ".join(nodes[:MOST_NAMES]) + (" …" if len(nodes) > MOST_NAMES else "")
        where = touching[0].name if touching else "equipment"
        span = touching[0].span if touching else None
        many = "nodes have" if len(nodes) > 1 else "node has"
        found.append(
            Finding(
                severity=Severity.NOTE,
                where=where,
                text=f"the {many} no path for direct current to ground: {names}; "
                "only leakage sets the voltage there",
                action="add the resistor that is missing, or one of 10 Mohm or more to ground",
                rule="no-dc-path",
                span=span,
            )
        )
    return found


def source_loops(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Loops of ideal sources and windings, in which nothing limits the current."""
    loops = nx.MultiGraph()
    found = []
    for element in s.graph.netlist.elements:
        if element.letter not in "VEHL" or s.graph.is_folded(element.name):
            continue
        if element.letter == "L" and element.parameters.get("rser"):
            continue
        a, b = element.nodes[0], element.nodes[1]
        if a == b or (a in loops and b in loops and nx.has_path(loops, a, b)):
            others = [] if a == b else _on_path(loops, a, b)
            sources = any(name[0].upper() != "L" for name in (element.name, *others))
            what = "ideal sources and windings" if sources else "windings"
            around = ", ".join([*others, element.name])
            found.append(
                Finding(
                    severity=Severity.NOTE,
                    where=element.name,
                    text=f"a loop of {what} without resistance: {around}; its direct current "
                    "has no limit",
                    action="give a winding its copper resistance",
                    rule="source-loop",
                    span=element.span,
                )
            )
        loops.add_edge(a, b, name=element.name)
    return found


def _on_path(loops: nx.MultiGraph, a: str, b: str) -> list[str]:
    path = nx.shortest_path(loops, a, b)
    return [next(iter(loops.get_edge_data(x, y).values()))["name"] for x, y in pairwise(path)]


def reversed_by_sheet(
    s: Surroundings, positions: Sequence[Position], sheet: Sheet
) -> list[Finding]:
    """Polarised parts whose plus side the sheet puts where the graph shows the lower voltage."""
    found = []
    for p in positions:
        entry = sheet.capacitors.get(p.name.lower(), CapacitorEntry())
        expected = expected_plus(s, p.nodes)
        if entry.plus is None or expected is None or not p.style.polar or p.plus == expected:
            continue
        plus, right = p.nodes[p.plus or 0], p.nodes[expected]
        found.append(
            Finding(
                severity=Severity.REPLACE,
                where=p.name,
                text=f"its plus side is stated at {plus}, but {right} has the higher voltage: "
                "it is in the wrong way round",
                action="look at the part; turn it only if it is new, else replace it",
                rule="reversed",
                span=p.span,
            )
        )
    return found


def shorted(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Capacitors with both ends on one node."""
    return [
        Finding(
            severity=Severity.NOTE,
            where=p.name,
            text=f"both ends are on the node {p.nodes[0]}; it does nothing there",
            action="compare the netlist with the schematic",
            rule="both-ends-on-one-node",
            span=p.span,
        )
        for p in positions
        if p.nodes[0] == p.nodes[1]
    ]


def across_source(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Capacitors right across an ideal source: its short is limited by fuse or wiring only."""
    sources: dict[frozenset[str], str] = {}
    for e in s.graph.netlist.elements:
        if e.letter == "V" and len(e.nodes) == 2:
            sources.setdefault(frozenset(e.nodes), e.name)
    return [
        Finding(
            severity=Severity.NOTE,
            where=p.name,
            text=f"lies right across {sources[frozenset(p.nodes)]}; the netlist does not limit "
            "its short, fuse and wiring do",
            rule="across-ideal-source",
            span=p.span,
        )
        for p in positions
        if frozenset(p.nodes) in sources
    ]


def line_classes(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Line positions without a safety class: IEC 60384-14 asks for X across, Y to what can be
    touched."""
    found = []
    hot = s.touch.hot
    grounds = frozenset() if s.touch.hot_ground else frozenset({GROUND})
    safe = (s.touch.touchable | grounds) - hot
    for p in positions:
        a, b = (s.graph.at(n) for n in p.nodes)
        bridge = bool(hot) and ((a in hot and b in safe) or (b in hot and a in safe))
        if bridge or (hot and p.role is Role.LINE_CHASSIS):
            needed, why = "Y", "between a line-connected node and what can be touched"
        elif p.role is Role.LINE_ACROSS:
            needed, why = "X", "on the line all the time, often behind no fuse"
        else:
            continue
        if p.style_source == "sheet" and p.style.name.lower() in (
            "line-y",
            f"line-{needed}".lower(),
        ):
            continue
        found.append(
            Finding(
                severity=Severity.REPLACE,
                where=p.name,
                text=f"{p.role_text}: {why}; only class {needed} (IEC 60384-14) may stand there",
                action=f"fit class {needed}"
                + ("" if p.style_source == "sheet" else ", unless it is one already"),
                rule=f"class-{needed.lower()}",
                span=p.span,
            )
        )
    return found


def hot_chassis(s: Surroundings, positions: Sequence[Position], sheet: Sheet) -> list[Finding]:
    """Ground, or a node that can be touched, connected to the line."""
    poles = {n for pair in s.drive.poles for pole in pair for n in pole}
    touched = sorted((s.touch.touchable & (poles | s.touch.hot)) - {GROUND})
    if not s.touch.hot_ground and not touched:
        return []
    what = "ground (B-)" if s.touch.hot_ground else ", ".join(touched)
    open_to_touch = bool(touched) or GROUND in s.touch.touchable
    return [
        Finding(
            severity=Severity.TEST if open_to_touch else Severity.WATCH,
            where="equipment",
            text=f"{what} is connected to the line; whatever is joined to it carries line "
            "voltage, whichever way the plug is in"
            + (", and it can be touched" if open_to_touch else ""),
            action="work behind an isolation transformer only",
            rule="hot-chassis",
        )
    ]


RULES: tuple[Rule, ...] = (
    hot_chassis,
    line_classes,
    reversed_by_sheet,
    shorted,
    across_source,
    floating_nodes,
    source_loops,
)

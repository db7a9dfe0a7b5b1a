"""A picture of the circuit from its netlist: where every part stands, and what joins them.

Supplies are on top, ground at the bottom, the signal goes from left to right. Tubes and
transistors stand in the order of the stages; everything else is drawn to the middle of its
neighbours (the barycentric method; Tutte, "How to draw a graph", 1963, from memory, to be
confirmed) and then pushed apart where it would overlap.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import hypot, sqrt
from typing import Any

import networkx as nx

from stress.circuit.build import anatomy
from stress.circuit.circuit import Circuit, Kind
from stress.circuit.graph import Graph
from stress.circuit.joined import GROUND
from stress.circuit.surroundings import Surroundings
from stress.text.unit import unit

ROUNDS = 120
PUSHES = 60
LEFT, RIGHT, TOP, BOTTOM = 0.14, 0.97, 1.0, 0.0
MIDDLE = 0.5
STAGED = (Kind.TUBE, Kind.TRANSISTOR)


@dataclass(frozen=True, slots=True, kw_only=True)
class MapNode:
    """Something with a place in the picture.

    Attributes:
        name: Of the position, part, source or node of the netlist; "0" for ground.
        kind: "position", "part", "rail" (ground or a supply, across the whole width),
            "source", "element" (what is none of these), or "join" (a node where several meet).
        text: What it is, in words.
        x, y: From 0 to 1; x to the right, y upwards.
    """

    name: str
    kind: str
    text: str
    x: float = field(metadata=unit("1"))
    y: float = field(metadata=unit("1"))


@dataclass(frozen=True, slots=True)
class MapEdge:
    """A connection: indices of two nodes of the map, and the netlist node it is."""

    a: int
    b: int
    node: str


@dataclass(frozen=True, slots=True)
class CircuitMap:
    """The picture; the same circuit always gives the same one."""

    nodes: tuple[MapNode, ...]
    edges: tuple[MapEdge, ...]


def layout(circuit: Circuit) -> CircuitMap:
    """Return where everything stands."""
    s = anatomy(circuit.netlist, circuit.sheet).surroundings
    things = _things(circuit, s.graph)
    rails = _rails(s)
    net = _net(things, s.graph, rails)
    fixed = _fixed(circuit, s, rails, net)
    places = _relaxed(net, fixed)
    places = _apart(places, {key for key in fixed if key[0] != "rail"} | set(rails))
    keys = list(net.nodes)
    index = {key: number for number, key in enumerate(keys)}
    words = {("position", p.name): p.role_text for p in circuit.positions}
    words |= {("part", p.name): f"{p.kind.value} {p.type}".strip() for p in circuit.parts}
    words |= {rail: "ground" if rail[1] == GROUND else f"supply {rail[1]}" for rail in rails}
    return CircuitMap(
        nodes=tuple(
            MapNode(
                name=key[1],
                kind=key[0],
                text=words.get(key, key[1]),
                x=round(places[key][0], 4),
                y=round(places[key][1], 4),
            )
            for key in keys
        ),
        edges=tuple(MapEdge(index[a], index[b], node) for a, b, node in net.edges(data="node")),
    )


Key = tuple[str, str]
Place = tuple[float, float]


def _things(circuit: Circuit, graph: Graph) -> dict[Key, list[str]]:
    """Return everything that is drawn, with the nodes at its pins."""
    found: dict[Key, list[str]] = {}
    shown: set[str] = set()
    for position in circuit.positions:
        found["position", position.name] = [graph.at(n) for n in position.nodes]
        shown.add(position.name.lower())
    for part in circuit.parts:
        names = {name.lower() for name in part.elements}
        nodes = list(part.pins.values())
        for name in names - {part.name.lower()}:
            if part.kind is Kind.WINDING:  # its copper is drawn with it: the far ends count
                nodes += graph.elements[name].nodes
        groups = [graph.at(n) for n in nodes]
        inner = {n for n in groups if groups.count(n) > 1} if len(names) > 1 else set()
        ends = [n for n in dict.fromkeys(groups) if part.kind is not Kind.WINDING or n not in inner]
        found["part", part.name] = ends or groups
        shown |= names | {part.name.lower()}
    for element in circuit.netlist.elements:
        name = element.name.lower()
        if name in shown or graph.is_folded(name) or len(element.nodes) < 2:
            continue
        kind = "source" if element.letter in "VI" else "element"
        ends = list(dict.fromkeys(graph.at(n) for n in element.nodes))
        if len(ends) > 1:
            found[kind, element.name] = ends
    return found


def _rails(s: Surroundings) -> dict[Key, int]:
    """Return ground, the supplies and the bias supplies, with the sign of each."""
    rails: dict[Key, int] = {("rail", GROUND): 0}
    for node, feed in s.supply.feeds.items():
        if node in s.supply.outputs or s.is_held(node):
            rails["rail", node] = -1 if feed.output.sign < 0 else 1
    return rails


def _net(things: dict[Key, list[str]], graph: Graph, rails: dict[Key, int]) -> Any:
    """Return things and rails joined by the nodes of the netlist."""
    at: dict[str, list[Key]] = {}
    net = nx.Graph()
    for key, nodes in things.items():
        net.add_node(key)
        for node in nodes:
            at.setdefault(node, []).append(key)
    for node, keys in at.items():
        rail: Key = ("rail", node)
        if rail in rails:
            net.add_edges_from((key, rail, {"node": node}) for key in keys)
        elif len(keys) == 2:
            net.add_edge(*keys, node=node)
        elif len(keys) > 2:
            net.add_edges_from((key, ("join", node), {"node": node}) for key in keys)
    return net


def _fixed(circuit: Circuit, s: Surroundings, rails: dict[Key, int], net: Any) -> dict[Key, Place]:
    """Return what has its place by its role: rails, sources, rectifiers, stages."""
    fixed: dict[Key, Place] = {}
    ups = [key for key, sign in rails.items() if sign > 0 and key in net]
    for number, key in enumerate(ups):
        stage = s.supply.feeds[key[1]].stage
        fixed[key] = (LEFT + (RIGHT - LEFT) * (number + 1) / (len(ups) + 1), TOP - 0.02 * stage)
    for key, sign in rails.items():
        if key in net and sign <= 0:
            fixed[key] = (MIDDLE, BOTTOM if sign == 0 else 0.1)
    for number, name in enumerate(circuit.line.sources):
        if ("source", name) in net:
            fixed["source", name] = (0.0, 0.6 - 0.15 * number)
    staged = [p.name for p in circuit.parts if p.kind in STAGED]
    layers = _layers(s.stages, staged)
    for number, layer in enumerate(layers):
        x = LEFT + (RIGHT - LEFT) * (number + 0.5) / len(layers)
        for row, name in enumerate(layer):
            y = MIDDLE + 0.3 * ((row + 0.5) / len(layer) - 0.5)
            fixed["part", name] = (x, y)
    rectifiers = [p.name for p in circuit.parts if p.kind is Kind.RECTIFIER]
    for number, name in enumerate(rectifiers):
        fixed["part", name] = (0.1, 0.85 - 0.5 * number / max(len(rectifiers), 1))
    return {key: place for key, place in fixed.items() if key in net}


def _layers(stages: nx.DiGraph, staged: list[str]) -> list[list[str]]:
    """Return the parts by the order of the signal; loops of feedback count as one place."""
    order = nx.DiGraph()
    order.add_nodes_from(staged)
    order.add_edges_from((a, b) for a, b in stages.edges if a in order and b in order)
    whole = nx.condensation(order)
    found: list[list[str]] = []
    for layer in nx.topological_generations(whole):
        names = {name for loop in layer for name in whole.nodes[loop]["members"]}
        row = [name for name in staged if name in names]
        # Two halves of a push-pull stage stand above each other; more stand side by side.
        found += [row[i : i + 2] for i in range(0, len(row), 2)]
    return found


def _relaxed(net: Any, fixed: dict[Key, Place]) -> dict[Key, Place]:
    """Draw everything that is not fixed to the middle of its neighbours."""
    places: dict[Key, Place] = {}
    for number, key in enumerate(net.nodes):
        # apart from each other at the start, so that equal parts do not fall on one spot
        places[key] = fixed.get(key, (LEFT + (number * 0.618) % 0.8, 0.2 + (number * 0.382) % 0.6))
    for _ in range(ROUNDS):
        for key in net.nodes:
            around = [places[other] for other in net.adj[key]]
            if key not in fixed and around:
                # A rail is as wide as the picture: it pulls up or down, not to its own x.
                sides = [places[o][0] for o in net.adj[key] if o[0] != "rail"]
                sides = sides or [places[o][0] for o in net.adj[key] if o[1] != GROUND]
                x = sum(sides) / len(sides) if sides else places[key][0]
                places[key] = (x, sum(y for _, y in around) / len(around))
    return places


def _apart(places: dict[Key, Place], fixed: set[Key]) -> dict[Key, Place]:
    """Push apart what stands closer than the even share of the area."""
    moved = {key: p if key in fixed else _inside(*p) for key, p in places.items()}
    keys = [key for key in places if key[0] != "rail"]
    least = 0.75 / sqrt(max(len(keys), 1))
    for _ in range(PUSHES):
        cells: dict[tuple[int, int], list[Key]] = {}
        for key in keys:
            x, y = moved[key]
            cells.setdefault((int(x / least), int(y / least)), []).append(key)
        still = True
        for (column, row), own in cells.items():
            near = [
                other
                for dx in (-1, 0, 1)
                for dy in (-1, 0, 1)
                for other in cells.get((column + dx, row + dy), ())
            ]
            for key in own:
                for other in near:
                    if key < other and _push(moved, key, other, least, fixed):
                        still = False
        if still:
            break
    return moved


def _push(places: dict[Key, Place], one: Key, other: Key, least: float, fixed: set[Key]) -> bool:
    (x1, y1), (x2, y2) = places[one], places[other]
    dx, dy = x2 - x1, y2 - y1
    far = hypot(dx, dy)
    free = [key not in fixed for key in (one, other)]
    if far >= least * 0.999 or not any(free):
        return False
    if far < 1e-9:
        dx, dy, far = 1e-3, 7e-4, hypot(1e-3, 7e-4)
    step = (least - far) / far / sum(free)
    if free[0]:
        places[one] = _inside(x1 - dx * step, y1 - dy * step)
    if free[1]:
        places[other] = _inside(x2 + dx * step, y2 + dy * step)
    return True


def _inside(x: float, y: float) -> Place:
    return min(max(x, 0.0), 1.0), min(max(y, 0.06), 0.94)

"""Where everything stands on the circuit map: higher is more positive, the signal goes right.

Nets with many parts (ground, supplies) are rails across the map; the other nets are dots, each
with a place of its own from left to right, and so has every position at a rail. What neither a
position nor a tube touches is drawn together into one line.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import networkx as nx

from stress.circuit.circuit import Circuit, Kind, Part
from stress.circuit.graph import Graph
from stress.circuit.joined import GROUND

DEVICES = (Kind.TUBE, Kind.RECTIFIER, Kind.TRANSISTOR)
RAIL_FROM = 6  # edges at a net that make it a rail
STEP, DEVICE, MARGIN = 32.0, 68.0, 60.0
TOP, ROW = 40.0, 78.0
_ROUNDS = 60
_BELOW = -0.05  # of the largest voltage: what is lower stands below ground


@dataclass(frozen=True, slots=True)
class Link:
    """A two-terminal part, or several in a row, between two nets."""

    parts: tuple[str, ...]
    a: str
    b: str
    position: bool


@dataclass(frozen=True, slots=True)
class Layout:
    """The map in its own units.

    Attributes:
        width, height: Of the whole.
        dots: Place (x, y) of every net that is a dot.
        rails: Net to (from x, to x, y).
        devices: Part to place (x, y).
        slots: Position at a rail to the x of its line.
        links: All two-terminal parts that are drawn.
        pins: (device, net) for every pin that is drawn.
    """

    width: float
    height: float
    dots: Mapping[str, tuple[float, float]]
    rails: Mapping[str, tuple[float, float, float]]
    devices: Mapping[str, tuple[float, float]]
    slots: Mapping[str, float]
    links: tuple[Link, ...]
    pins: tuple[tuple[str, str], ...]


def layout(circuit: Circuit, *, volts: Mapping[str, float], keep: Iterable[str] = ()) -> Layout:
    """Lay out a circuit.

    Args:
        circuit: What to draw.
        volts: Mean voltage of the nets that are known.
        keep: Parts that are drawn in any case, because they can be hit.
    """
    devices = [part for part in circuit.parts if part.kind in DEVICES and part.pins]
    graph = Graph(circuit.netlist, parts=devices)
    pins = tuple(
        dict.fromkeys((part.name, graph.at(net)) for part in devices for net in part.pins.values())
    )
    links = _links(graph, circuit, devices, pins=pins, keep=frozenset(keep))
    degree: dict[str, int] = {}
    for link in links:
        for net in (link.a, link.b):
            degree[net] = degree.get(net, 0) + 1
    for _, net in pins:
        degree[net] = degree.get(net, 0) + 1
    rails = {net for net, count in degree.items() if count >= RAIL_FROM} | {GROUND}
    wishes = _wishes(graph, devices, links, pins=pins, rails=rails)
    order = sorted(wishes, key=lambda item: (wishes[item], item))
    x: dict[tuple[str, str], float] = {}
    edge = MARGIN - STEP / 2
    for item in order:
        room = DEVICE if item[0] == "device" else STEP
        x[item] = edge + room / 2
        edge += room
    rows = _rows([*degree], volts=volts, rails=rails)
    dots = {
        name: (x["net", name], rows[name] + (13.0 if i % 2 else -13.0))
        for i, (kind, name) in enumerate(order)
        if kind == "net"
    }
    place = {
        part.name: (
            x["device", part.name],
            _middle([rows[net] for name, net in pins if name == part.name and net != GROUND]),
        )
        for part in devices
    }
    slots = {name: x["slot", name] for kind, name in order if kind == "slot"}
    width = edge - STEP / 2 + MARGIN
    ends = _ends(links, pins, dots=dots, slots=slots, devices=place, rails=rails, width=width)
    return Layout(
        width=width,
        height=max([rows[net] for net in rows] + [TOP]) + 40.0,
        dots=dots,
        rails={net: (*ends[net], rows[net]) for net in rails},
        devices=place,
        slots=slots,
        links=links,
        pins=pins,
    )


def _middle(heights: Sequence[float]) -> float:
    return (min(heights) + max(heights)) / 2 if heights else TOP + ROW


def _links(
    graph: Graph,
    circuit: Circuit,
    devices: Sequence[Part],
    *,
    pins: Sequence[tuple[str, str]],
    keep: frozenset[str],
) -> tuple[Link, ...]:
    """Return the two-terminal parts, what nobody asks about drawn together or left out."""
    positions = {position.name.lower() for position in circuit.positions}
    names = {part.name for part in devices}
    links = [
        Link((edge.name,), edge.a, edge.b, edge.name.lower() in positions)
        for edge in graph.edges
        if edge.name not in names and edge.a != edge.b
    ]
    held = {net for _, net in pins} | {GROUND}
    held |= {net for link in links if link.position for net in (link.a, link.b)}
    held |= {net for link in links if keep & set(link.parts) for net in (link.a, link.b)}
    while True:
        at: dict[str, list[Link]] = {}
        for link in links:
            for net in (link.a, link.b):
                if net not in held:
                    at.setdefault(net, []).append(link)
        spare = next((net for net, found in at.items() if len(_far(net, found)) <= 2), None)
        if spare is None:
            return tuple(links)
        found = at[spare]
        links = [link for link in links if link not in found]
        ends = _far(spare, found)
        if len(ends) == 2:
            parts = tuple(part for link in found for part in link.parts)
            links.append(Link(parts, ends[0], ends[1], False))


def _far(net: str, links: Sequence[Link]) -> list[str]:
    return list(dict.fromkeys(link.b if link.a == net else link.a for link in links))


def _wishes(
    graph: Graph,
    devices: Sequence[Part],
    links: Sequence[Link],
    *,
    pins: Sequence[tuple[str, str]],
    rails: set[str],
) -> dict[tuple[str, str], float]:
    """Return how far right everything would like to stand: nets, positions at rails, devices."""
    anchors = {("device", name): 10.0 * i for i, name in enumerate(_signal_order(graph, devices))}
    near: nx.Graph = nx.Graph()
    for key in anchors:
        near.add_node(key)
    for name, net in pins:
        if net not in rails:
            near.add_edge(("device", name), ("net", net))
    for link in links:
        ends = [("net", net) for net in (link.a, link.b) if net not in rails]
        if link.position and len(ends) < 2:
            near.add_node(("slot", link.parts[0]))
            for end in ends:
                near.add_edge(("slot", link.parts[0]), end)
        elif len(ends) == 2:
            near.add_edge(*ends)
        else:
            near.add_nodes_from(ends)
    for core in {graph.windings_with(name) for name in graph.joints}:
        nets = [net for name in core for net in map(graph.at, graph.elements[name].nodes)]
        known = [("net", net) for net in dict.fromkeys(nets) if ("net", net) in near]
        near.add_edges_from(pairwise(known))
    for link in links:  # what hangs between rails only stands where its rails are fed
        if link.position and ("slot", link.parts[0]) in near:
            key = ("slot", link.parts[0])
            if near.degree(key) == 0:
                anchors[key] = -5.0
    wishes: dict[tuple[str, str], float] = {key: anchors.get(key, -10.0) for key in near}
    for _ in range(_ROUNDS):
        for key in near:
            around = [wishes[other] for other in near[key]]
            if key not in anchors and around:
                wishes[key] = sum(around) / len(around)
    return wishes


def _signal_order(graph: Graph, devices: Sequence[Part]) -> list[str]:
    """Return rectifiers first, then the others so that an output comes before what it drives."""
    flow: nx.DiGraph = nx.DiGraph()
    flow.add_nodes_from(part.name for part in devices)
    inputs: dict[str, list[str]] = {}
    for part in devices:
        for role, net in part.pins.items():
            if role.startswith(("grid", "base", "gate")):
                inputs.setdefault(graph.at(net), []).append(part.name)
    for part in devices:
        for role, net in part.pins.items():
            if not role.startswith(("plate", "collector", "drain")):
                continue
            reached = graph.reach(
                graph.at(net),
                through=lambda edge: edge.letter in "CR",
                stop=lambda net: net == GROUND or len(graph.around(net)) >= RAIL_FROM,
            )
            for there in reached:
                for driven in inputs.get(there, ()):
                    if driven != part.name:
                        flow.add_edge(part.name, driven)
    rectifiers = [part.name for part in devices if part.kind is Kind.RECTIFIER]
    loops = nx.condensation(flow)
    sorting = nx.lexicographical_topological_sort(
        loops, key=lambda n: min(map(_natural, loops.nodes[n]["members"]))
    )
    members = [sorted(loops.nodes[n]["members"], key=_natural) for n in sorting]
    return rectifiers + [name for group in members for name in group if name not in rectifiers]


def _natural(name: str) -> list[tuple[int, str]]:
    """Return a key that puts V2 before V10."""
    return [(int(run), "") if run.isdigit() else (0, run) for run in re.split(r"(\d+)", name)]


def _rows(nets: Sequence[str], *, volts: Mapping[str, float], rails: set[str]) -> dict[str, float]:
    """Return the height of every net by its mean voltage, rails between the rows."""
    known = {net: volts[net] for net in nets if net in volts}
    most = max([abs(value) for value in known.values()], default=0.0) or 1.0
    negative = any(value < _BELOW * most for value in known.values())
    ground = 5.0 if not negative else 5.5
    rows: dict[str, float] = {GROUND: TOP + ROW * ground}
    taken: list[float] = [rows[GROUND]]
    for net in nets:
        if net == GROUND:
            continue
        share = known.get(net, 0.1 * most) / most
        level = next(
            i for i, least in enumerate((0.75, 0.35, 0.08, _BELOW, -9.9)) if share >= least
        )
        rows[net] = TOP + ROW * (level + 0.6 + (1.4 if level == 4 else 0.0))
        if net in rails:
            y = TOP + ROW * level * (1.0 if level < 4 else 1.35)
            while any(abs(y - other) < 18.0 for other in taken):
                y += 18.0
            taken.append(y)
            rows[net] = y
    return rows


def _ends(
    links: Sequence[Link],
    pins: Sequence[tuple[str, str]],
    *,
    dots: Mapping[str, tuple[float, float]],
    slots: Mapping[str, float],
    devices: Mapping[str, tuple[float, float]],
    rails: set[str],
    width: float,
) -> dict[str, tuple[float, float]]:
    """Return from where to where every rail goes: as far as something hangs on it."""
    reach: dict[str, list[float]] = {net: [] for net in rails}
    reach[GROUND] += [MARGIN / 2, width - MARGIN / 2]
    for link in links:
        for net, other in ((link.a, link.b), (link.b, link.a)):
            if net in reach:
                if link.parts[0] in slots:
                    reach[net].append(slots[link.parts[0]])
                elif other in dots:
                    reach[net].append(dots[other][0])
    for name, net in pins:
        if net in reach:
            reach[net].append(devices[name][0])
    return {
        net: (min(found) - 14.0, max(found) + 14.0) if found else (MARGIN, width - MARGIN)
        for net, found in reach.items()
    }

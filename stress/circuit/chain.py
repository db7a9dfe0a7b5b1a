"""The way from a capacitor through the circuit to a part, in the words of the trade."""

from __future__ import annotations

from dataclasses import dataclass
from math import log10
from typing import Any

import networkx as nx

from stress.circuit.circuit import Circuit, Kind, Role
from stress.circuit.graph import Edge, Graph, Pin
from stress.circuit.joined import GROUND

FOLDED = frozenset({Kind.TUBE, Kind.RECTIFIER, Kind.TRANSISTOR})
SUPPLIES = {
    Role.RESERVOIR: "supply",
    Role.SMOOTHING: "supply",
    Role.OUTPUT_FILTER: "supply",
    Role.DECOUPLING: "supply",
    Role.BIAS_FILTER: "bias supply",
    Role.AVC: "AVC line",
}
CORE_COST = 6.0
SCREEN_COST = 3.0  # the plate carries most of the current
SUPPLY_COST = 4.0  # what spreads over a supply reaches everything; a direct way goes before it


@dataclass(frozen=True, slots=True)
class Step:
    """A place on the way.

    Attributes:
        kind: "position", "node" or "part".
        name: Its name in the netlist.
        text: In words: "C5", "grid of XU2", "supply b1", "winding Lop".
    """

    kind: str
    name: str
    text: str


class Chains:
    """All ways through one circuit."""

    def __init__(self, circuit: Circuit) -> None:
        """Prepare the ways: from node to node through what conducts, from grid to plate."""
        folded = [
            part
            for part in circuit.parts
            if part.kind in FOLDED or (part.kind is Kind.DIODE and len(part.elements) > 1)
        ]
        self.circuit = circuit
        self.graph = Graph(circuit.netlist, parts=folded)
        self.kinds = {part.name: part.kind for part in circuit.parts}
        self.supplies = _supplies(circuit, self.graph)
        self.ways: Any = nx.DiGraph()
        for edge in self.graph.edges:
            if edge.letter not in "XQ" and edge.conducts and edge.a != edge.b:
                self._add(edge.name, edge.a, edge.b, 1.0 + _resistance(edge))
        for part in folded:
            self._add_part(part.name)
        for name, kind in self.kinds.items():
            if kind is Kind.WINDING:
                for other in self.graph.windings_with(name):
                    own = self.graph.elements[other].name
                    if own != name:
                        self.ways.add_edge(("part", name), ("part", own), cost=CORE_COST)

    def steps(self, start: str, part: str) -> tuple[Step, ...]:
        """Return the way from a position to a part, both included.

        Args:
            start: Name of a position.
            part: Name of a part, or of another position.

        Raises:
            KeyError: There is no such position or part.
        """
        position = self.circuit.position(start)
        target = self._target(part)
        ends = [self.graph.at(n) for n in position.nodes]
        best: tuple[float, list[tuple[str, str]]] | None = None
        for end in dict.fromkeys(ends):
            if end == GROUND or ("node", end) not in self.ways or target not in self.ways:
                continue
            try:
                cost, path = nx.single_source_dijkstra(
                    self.ways, ("node", end), target, weight="cost"
                )
            except nx.NetworkXNoPath:
                continue
            if best is None or cost < best[0]:
                best = (cost, path)
        middle = [] if best is None else best[1]
        shown = [Step("position", position.name, position.name)]
        shown += [Step(kind, name, self._words(kind, name)) for kind, name in middle]
        last = Step(*target, self._words(*target))
        return tuple(shown if shown[-1] == last else [*shown, last])

    def words(self, start: str, part: str) -> tuple[str, ...]:
        """Return the way in words; nodes without a name in the trade and the copper of windings
        are left out.

        Raises:
            KeyError: There is no such position or part.
        """
        steps = self.steps(start, part)
        named = [
            s
            for s in steps[:-1]
            if (s.kind == "node" and not s.text.startswith("node "))
            or s.kind == "position"
            or (s.kind == "part" and s.name in self.kinds)
        ]
        return tuple(step.text for step in (*named, steps[-1]))

    def _target(self, part: str) -> tuple[str, str]:
        for name in self.kinds:
            if name.lower() == part.lower():
                return ("part", name)
        return ("part", self.circuit.position(part).name)

    def _add(self, name: str, a: str, b: str, cost: float) -> None:
        """Add a part between two nodes; ground is reached and never left."""
        for here, there in ((a, b), (b, a)):
            if here != GROUND:
                self.ways.add_edge(("node", here), ("part", name), cost=cost)
            if there != GROUND:
                extra = SUPPLY_COST if there in self.supplies else 0.0
                self.ways.add_edge(("part", name), ("node", there), cost=extra)

    def _add_part(self, name: str) -> None:
        """Add a tube or transistor: any pin moves its currents, which its other pins carry."""
        part = self.graph.parts[name]
        for role, node in part.pins.items():
            at, pin = self.graph.at(node), Pin(name, role)
            if at == GROUND or pin.kind == "other":
                continue
            # A grid moves everything; a plate moves little more than its own current.
            self.ways.add_edge(
                ("node", at), ("part", name), cost=1.0 if pin.kind == "input" else 3.0
            )
            if pin.kind != "input":
                extra = SUPPLY_COST if at in self.supplies else 0.5
                extra += SCREEN_COST if pin.kind == "screen" else 0.0
                self.ways.add_edge(("part", name), ("node", at), cost=extra)

    def _words(self, kind: str, name: str) -> str:
        if kind == "part":
            word = {Kind.WINDING: "winding ", Kind.FUSE: "fuse ", Kind.CONTROL: "control "}
            return word.get(self.kinds.get(name, Kind.RESISTOR), "") + name
        if name in self.supplies:
            return f"{self.supplies[name]} {name}"
        pins = sorted(self.graph.pins(name), key=lambda p: p.kind != "input")
        return pins[0].text if pins else f"node {name}"


def _supplies(circuit: Circuit, graph: Graph) -> dict[str, str]:
    """Return the nodes that feed others, and what each is called."""
    found: dict[str, str] = {}
    for p in circuit.positions:
        if p.role in SUPPLIES:
            for node in (graph.at(n) for n in p.nodes):
                if node != GROUND:
                    found.setdefault(node, SUPPLIES[p.role])
    return found


def _resistance(edge: Edge) -> float:
    return max(0.0, 0.3 * log10(max(edge.ohm, 1.0) / 1000.0))


def chain(circuit: Circuit, start: str, part: str) -> tuple[str, ...]:
    """Return the way from a position to a part in words: ("C5", "grid of XU2", "XU2").

    Nodes without a name in the trade and the copper of windings are left out. For many ways through one circuit keep a `Chains`.

    Raises:
        KeyError: There is no such position or part.
    """
    return Chains(circuit).words(start, part)

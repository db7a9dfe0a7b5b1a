"""Supply nodes and the sign of direct voltage, as far as the graph shows them.

The sign of a node: direct current through resistors, windings, tubes and transistors never
takes a node outside the span of the fixed voltages it is connected to (ground, rectifier
outputs, sources), so the set of those that it reaches without passing another bounds it.
"""

from __future__ import annotations

import heapq
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from stress.circuit.drive import Drive, held
from stress.circuit.graph import Graph
from stress.circuit.joined import GROUND
from stress.netlist.flat import Element

FEEDERS = "RLSW"
RETURN_OHM = 100e3  # more between a return and ground only ties it down


@dataclass(frozen=True, slots=True)
class Output:
    """A node that a rectifier, a source or a switched choke feeds.

    Attributes:
        node: The group.
        sign: 1 or -1 against its return; 0 where the graph does not tell.
        origin: "line", "switched" or "source".
        by: Names of the diodes, tubes, chokes or sources.
    """

    node: str
    sign: int
    origin: str
    by: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Feed:
    """How direct current gets to a node.

    Attributes:
        output: Where it starts.
        ohm: Series resistance from there.
        since_ohm: Series resistance since the last node with a large capacitor.
        choke: Whether a winding lies on that last stretch.
        before: The node with a large capacitor before, or the output.
        stage: How many such nodes lie before.
        previous: The node it is fed from, or None at the output itself.
    """

    output: Output
    ohm: float
    since_ohm: float
    choke: bool
    before: str
    stage: int
    previous: str | None


@dataclass(frozen=True, slots=True)
class Supply:
    """Outputs, feeds and bounds of all nodes.

    Attributes:
        outputs: By node.
        feeds: By node, ground and driven nodes left out.
        bounds: By node, the fixed nodes that bound it; a name "?" stands for something unknown.
    """

    outputs: Mapping[str, Output]
    feeds: Mapping[str, Feed]
    bounds: Mapping[str, frozenset[str]]

    def signs(self, node: str) -> frozenset[int]:
        """Return the signs its direct voltage may have: -1, 0, 1; all three when unknown."""
        bounds = self.bounds.get(node, frozenset("?"))
        if "?" in bounds or not bounds:
            return frozenset((-1, 0, 1))
        return frozenset(s for bound in bounds for s in self._sign(bound))

    def _sign(self, bound: str) -> tuple[int, ...]:
        if bound == GROUND:
            return (0,)
        output = self.outputs.get(bound)
        return (output.sign,) if output and output.sign else (-1, 0, 1)

    def upstream(self, node: str) -> Iterator[str]:
        """Yield the nodes its feed comes through, the nearest first."""
        feed = self.feeds.get(node)
        while feed and feed.previous is not None:
            yield feed.previous
            feed = self.feeds.get(feed.previous)

    def higher(self, a: str, b: str) -> str | None:
        """Return which of two nodes has the higher direct voltage, None when in doubt."""
        for up, down in ((a, b), (b, a)):
            over, under = self.signs(up), self.signs(down)
            if min(over) >= 0 >= max(under) and (over != {0} or under != {0}):
                return up
        for up, down in ((a, b), (b, a)):
            if up in self.upstream(down):
                signs = self.signs(down) | self.signs(up)
                if signs <= {0, 1}:
                    return up
                if signs <= {0, -1}:
                    return down
        return None


def find(graph: Graph, *, drive: Drive) -> Supply:
    """Return the supplies of a circuit."""
    outputs = _outputs(graph, drive)
    outputs = _returns(graph, drive, outputs)
    bounds = _bounds(graph, drive, outputs)
    outputs = _choke_outputs(graph, drive, outputs, bounds)
    return Supply(outputs, _feeds(graph, drive, outputs), bounds)


def constant(element: Element) -> float:
    """Return the direct voltage of a V element: its value, the offset of a periodic wave, the
    end of a wave that does not repeat."""
    wave = element.wave
    if wave is None or not wave.values:
        return element.value or 0.0
    if wave.kind == "pwl":
        return wave.values[-1]
    if wave.kind == "pulse" and (len(wave.values) < 7 or not wave.values[6]):
        return wave.values[1] if len(wave.values) > 1 else wave.values[0]
    return wave.values[0]


def _outputs(graph: Graph, drive: Drive) -> dict[str, Output]:
    driven = drive.nodes
    found: dict[str, Output] = {}

    def add(node: str, sign: int, origin: str, by: str) -> None:
        before = found.get(node)
        names = (*before.by, by) if before and by not in before.by else (by,)
        found[node] = Output(node, sign, before.origin if before else origin, names)

    clamps = {
        node: {side for j in graph.junctions for side in _clamped(j.anode, j.cathode, node)}
        for node in drive.pumped
    }
    for j in graph.junctions:
        origin = drive.origin(j.anode) or drive.origin(j.cathode) or "line"
        if j.anode in driven and j.cathode not in driven and j.cathode != GROUND:
            if "out" not in clamps.get(j.anode, set()):
                add(j.cathode, 1, origin, j.part)
        elif j.cathode in driven and j.anode not in driven and j.anode != GROUND:
            ways = clamps.get(j.cathode)
            if ways is None or ("in" not in ways and "out" in ways):
                add(j.anode, -1, origin, j.part)
    for element in graph.netlist.elements:
        if element.letter != "V" or graph.is_folded(element.name):
            continue
        plus, minus = graph.at(element.nodes[0]), graph.at(element.nodes[1])
        volts = constant(element)
        if volts and plus not in driven and GROUND in (plus, minus):
            node = plus if minus == GROUND else minus
            add(
                node, (1 if volts > 0 else -1) * (1 if node == plus else -1), "source", element.name
            )
    return found


def _clamped(anode: str, cathode: str, node: str) -> tuple[str, ...]:
    """Say how a diode between a pumped node and ground points: "in" from ground, or "out"."""
    if cathode == node and anode == GROUND:
        return ("in",)
    return ("out",) if anode == node and cathode == GROUND else ()


def _choke_outputs(
    graph: Graph, drive: Drive, outputs: dict[str, Output], bounds: Mapping[str, frozenset[str]]
) -> dict[str, Output]:
    """Add the held nodes behind a choke at a switched node; the buck converter's output."""
    found = dict(outputs)
    for edge in graph.edges:
        if edge.letter != "L" or len(graph.windings_with(edge.name)) > 1:
            continue
        for here, there in ((edge.a, edge.b), (edge.b, edge.a)):
            if here in drive.switched and there not in found and there not in drive.nodes:
                if there == GROUND or not held(graph, there):
                    continue
                signs = {outputs[b].sign for b in bounds.get(there, ()) if b in outputs}
                sign = signs.pop() if len(signs) == 1 else 0
                found[there] = Output(there, sign, "switched", (edge.name,))
    return found


def _returns(graph: Graph, drive: Drive, outputs: dict[str, Output]) -> dict[str, Output]:
    """Add the returns of rectifiers that resistance separates from ground: they are negative,
    as the bias supply with plus at the chassis, and back bias."""
    found = dict(outputs)
    for start in drive.returns - set(outputs):
        reached = graph.reach(
            start,
            through=lambda e: e.letter in "RL",
            stop=lambda n: n == GROUND or n in drive.nodes,
            limit_ohm=RETURN_OHM,
        )
        if GROUND in reached:
            found[start] = Output(start, -1, "line", ())
    return found


def _bounds(graph: Graph, drive: Drive, outputs: Mapping[str, Output]) -> dict[str, frozenset[str]]:
    """Return the fixed nodes that bound every node; see the module's docstring."""
    fixed = {GROUND} | set(outputs)
    driven = drive.nodes
    found: dict[str, frozenset[str]] = {node: frozenset((node,)) for node in fixed}
    for start in graph.nodes:
        if start in found:
            continue
        inside, bounds, queue = {start}, set(), [start]
        while queue:
            node = queue.pop()
            for edge in graph.around(node):
                there = edge.other(node)
                if not edge.conducts:
                    if edge.letter in "IGFB":
                        bounds.add("?")
                    continue
                if edge.letter in "DX" and (node in driven) != (there in driven):
                    continue
                if edge.letter in "VEHB":
                    source = graph.elements[edge.name.lower()]
                    if edge.letter != "V" or constant(source):
                        bounds.add("?")
                if there in fixed:
                    bounds.add(there)
                elif there not in inside:
                    inside.add(there)
                    queue.append(there)
        for node in inside:
            found[node] = frozenset(bounds)
    return found


def _feeds(graph: Graph, drive: Drive, outputs: Mapping[str, Output]) -> dict[str, Feed]:
    """Return the feed of least resistance of every node that an output reaches."""
    found: dict[str, Feed] = {}
    queue: list[tuple[float, int, str, Feed]] = []
    count = 0
    for node, output in outputs.items():
        queue.append((0.0, count, node, Feed(output, 0.0, 0.0, False, node, 0, None)))
        count += 1
    heapq.heapify(queue)
    while queue:
        _, _, node, feed = heapq.heappop(queue)
        if node in found:
            continue
        found[node] = feed
        stop = feed.previous is not None and held(graph, node)
        for edge in graph.around(node):
            there = edge.other(node)
            blocked = there == GROUND or there in found or there in drive.nodes
            if edge.letter not in FEEDERS or blocked:
                continue
            first = feed.previous is not None or not held(graph, node)
            here = Feed(
                output=feed.output,
                ohm=feed.ohm + edge.ohm,
                since_ohm=edge.ohm + (0.0 if stop or not first else feed.since_ohm),
                choke=edge.letter == "L" or (feed.choke and first and not stop),
                before=node if stop or not first else feed.before,
                stage=feed.stage + (1 if stop or not first else 0),
                previous=node,
            )
            heapq.heappush(queue, (here.ohm, count, there, here))
            count += 1
    return found

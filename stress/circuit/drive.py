"""Where alternating voltage of power stands: line poles, windings, switched and pumped nodes.

Nothing is solved. A node counts as driven when a line source, a winding on a core that the
line or a switch feeds, or a capacitor from such a node drives it. Signals are not power.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable
from dataclasses import dataclass

from stress.circuit.graph import Graph
from stress.circuit.joined import GROUND

SERIES_OHM = 1000.0  # surge resistors, winding resistances
POLE_OHM = 100.0
POLE_F = 5e-6  # no capacitor across the line is that large
HELD_F = 0.47e-6  # a capacitor from this size holds a node still
CHARGED_F = 0.04e-6  # from here on no detector of radio frequency
HASH_F = 0.05e-6  # up to this size a capacitor at a rectifier only quiets it


@dataclass(frozen=True, slots=True)
class Drive:
    """The driven nodes (groups of `Graph`).

    Attributes:
        poles: For each line source the two sets of nodes that are its terminals.
        line: Driven by the line: poles but ground, ends of windings on a line-fed core.
        switched: Driven by a gated switch or transistor, or on the core of one.
        pumped: Driven through a capacitor only, with a rectifier there.
        returns: Ends of a line-driven winding without a rectifier while another end has one:
            the rectified current comes back there.
        line_cores, switched_cores: Inductors of those cores, lower case.
        alternating: Whether the line is no direct voltage.
        nodes: All driven nodes.
    """

    poles: tuple[tuple[frozenset[str], frozenset[str]], ...]
    line: frozenset[str]
    switched: frozenset[str]
    pumped: frozenset[str]
    returns: frozenset[str]
    line_cores: frozenset[str]
    switched_cores: frozenset[str]
    alternating: bool
    nodes: frozenset[str]

    def origin(self, node: str) -> str:
        """Return "line", "switched" or "" for what drives a node."""
        if node in self.switched:
            return "switched"
        return "line" if node in self.line or node in self.pumped else ""


def find(
    graph: Graph, *, line: Iterable[str], gated: Collection[str], powering: Iterable[str] = ()
) -> Drive:
    """Return the driven nodes.

    Args:
        graph: The circuit.
        line: Names of the line sources.
        gated: Names of switches and transistors that a gate source works, lower case.
        powering: Names of other sources that power is drawn from, such as the square wave that
            stands for a vibrator.
    """
    sources = [graph.elements[name.lower()] for name in line if name.lower() in graph.elements]
    alternating = any(source.wave is not None for source in sources)
    poles = [_poles(graph, graph.at(e.nodes[0]), graph.at(e.nodes[1])) for e in sources]
    live = {node for pair in poles for pole in pair for node in pole} - {GROUND}
    line_cores = _cores_at(graph, live) if alternating else frozenset()
    line_nodes = _extended(graph, live | _ends(graph, line_cores)) if alternating else set()
    seeds = {graph.at(n) for name in powering for n in graph.elements[name.lower()].nodes}
    switched, switched_cores = _switched(graph, gated, line_cores, seeds=seeds - {GROUND})
    fed = {j.anode for j in graph.junctions} | {j.cathode for j in graph.junctions}
    returns = _returns(graph, line_nodes, line_cores, poles, fed)
    pumped = _pumped(graph, (line_nodes | switched) - returns)
    return Drive(
        poles=tuple(poles),
        line=frozenset(line_nodes - {GROUND}),
        switched=frozenset(switched),
        pumped=frozenset(pumped),
        returns=frozenset(returns),
        line_cores=line_cores,
        switched_cores=switched_cores,
        alternating=alternating,
        nodes=frozenset((line_nodes - {GROUND} | switched | pumped) - returns),
    )


def held(graph: Graph, node: str) -> bool:
    """Say whether a large capacitor or an ideal source keeps a node still."""
    return node == GROUND or any(
        (e.letter == "C" and (e.value or 0.0) >= HELD_F)
        or (e.letter == "V" and graph.elements[e.name.lower()].wave is None)
        for e in graph.around(node)
    )


def _poles(graph: Graph, plus: str, minus: str) -> tuple[frozenset[str], frozenset[str]]:
    """Return both terminals of a source with all that small resistors and chokes add."""
    found = ({plus}, {minus})
    for _ in range(4):
        before = (len(found[0]), len(found[1]))
        for own, other in ((found[0], found[1]), (found[1], found[0])):
            own |= (
                set(
                    graph.reach(
                        own - {GROUND},
                        through=lambda e: e.letter in "SW" or 0 < e.ohm <= POLE_OHM,
                        stop=lambda n: n == GROUND or _tied(graph, n, least_F=POLE_F),
                        limit_ohm=POLE_OHM,
                    )
                )
                - other
                - ({GROUND} - {plus, minus})
            )
        _add_chokes(graph, found)
        if before == (len(found[0]), len(found[1])):
            break
    return frozenset(found[0]), frozenset(found[1])


def _add_chokes(graph: Graph, poles: tuple[set[str], set[str]]) -> None:
    """Add what lies behind line-filter chokes: one winding alone, or a pair on one core with
    each winding in its own pole."""
    found: tuple[set[str], set[str]] = (set(), set())
    for own, other, new in zip(poles, poles[::-1], found, strict=True):
        for node in own:
            for edge in graph.windings(node):
                there = edge.other(node)
                core = graph.windings_with(edge.name)
                if there in own | other | {GROUND} or held(graph, there):
                    continue
                small = (edge.value or 0.0) < 0.05
                twin = len(core) == 2 and all(_ends_in(graph, c, poles) == 1 for c in core)
                if (len(core) == 1 and small) or twin:
                    new.add(there)
    for own, new in zip(poles, found, strict=True):
        own |= new


def _ends_in(graph: Graph, inductor: str, poles: tuple[set[str], set[str]]) -> int:
    return sum(graph.at(n) in poles[0] | poles[1] for n in graph.elements[inductor].nodes)


def _cores_at(graph: Graph, nodes: Collection[str]) -> frozenset[str]:
    """Return the inductors coupled to one that has an end among the nodes."""
    found: set[str] = set()
    for node in nodes:
        for edge in graph.windings(node):
            core = graph.windings_with(edge.name)
            if len(core) > 1:
                found |= set(core)
    return frozenset(found)


def _ends(graph: Graph, cores: Iterable[str]) -> set[str]:
    """Return the ends of windings that swing: not those that a large capacitor ties to ground,
    nor the filament winding that is the output of a rectifier."""
    ends = {graph.at(n) for c in cores for n in graph.elements[c].nodes} - {GROUND}
    outputs = {j.cathode for j in graph.junctions if j.anode in _behind_copper(graph, ends)}
    return {n for n in ends - outputs if not _tied(graph, n)}


def _behind_copper(graph: Graph, ends: set[str]) -> set[str]:
    found = set(ends)
    for node in ends:
        for edge in graph.around(node):
            if edge.letter == "R" and edge.ohm <= SERIES_OHM:
                found.add(edge.other(node))
    return found - {GROUND}


def _tied(graph: Graph, node: str, *, least_F: float = HELD_F) -> bool:
    return any(
        e.letter == "C" and (e.value or 0.0) >= least_F and e.other(node) == GROUND
        for e in graph.around(node)
    )


def _extended(graph: Graph, nodes: set[str]) -> set[str]:
    """Add what lies behind series resistors, switches and single chokes on the way to a
    rectifier."""
    fed = {j.anode for j in graph.junctions} | {j.cathode for j in graph.junctions}
    found = set(nodes)
    for node in nodes:
        for edge in graph.around(node):
            there = edge.other(node)
            if there == GROUND or there in found:
                continue
            only = all(
                e.letter in "DX" or e is edge or (e.letter == "C" and (e.value or 0) <= HASH_F)
                for e in graph.around(there)
            )
            short_way = edge.letter in "SW" or (edge.letter == "R" and edge.ohm <= SERIES_OHM)
            if edge.letter not in "RSW" or held(graph, there):
                continue
            if there in fed and (only or short_way):
                found.add(there)
    return found


def _switched(
    graph: Graph, gated: Collection[str], line_cores: Collection[str], *, seeds: set[str]
) -> tuple[set[str], frozenset[str]]:
    """Return the nodes that switches work, and the cores on them."""
    seeds = seeds | {
        node
        for edge in graph.edges
        if edge.name.lower() in gated
        for node in (edge.a, edge.b)
        if not held(graph, node)
    }
    cores = {c for c in _cores_at(graph, seeds) if c not in line_cores}
    for edge in graph.edges:
        # A core that a plate or collector drives and that has a rectifier with a large
        # capacitor behind it converts power: a blocking converter, a flyback supply.
        name = edge.name.lower()
        if edge.letter != "L" or name in line_cores or name in cores:
            continue
        core = graph.windings_with(name)
        if len(core) > 1 and _converts(graph, core):
            cores |= set(core)
    ends = {node for node in _ends(graph, cores) if not held(graph, node)}
    return _extended(graph, seeds | ends), frozenset(cores)


def _converts(graph: Graph, core: Collection[str]) -> bool:
    """Say whether a plate or collector drives a core and a rectifier on it charges a large
    capacitor to ground or to the core's other ends."""
    all_ends = {graph.at(n) for c in core for n in graph.elements[c].nodes}
    ends = {n for n in _ends(graph, core) if not held(graph, n)}
    driven = {n for n in ends if any(p.kind == "output" for p in graph.pins(n))}
    rectified = {
        (j.anode if there == j.cathode else j.cathode)
        for there in ends - driven
        for j in graph.junctions_at(there)
    } - {GROUND}
    return bool(driven) and any(
        e.letter == "C" and (e.value or 0.0) >= CHARGED_F and e.other(n) in all_ends | {GROUND}
        for n in rectified
        for e in graph.around(n)
    )


def _returns(
    graph: Graph,
    line_nodes: set[str],
    cores: Collection[str],
    poles: Iterable[tuple[frozenset[str], frozenset[str]]],
    fed: set[str],
) -> set[str]:
    """Return the ends where rectified current comes back; see `Drive.returns`."""
    found: set[str] = set()
    chains: list[set[str]] = []
    for name in cores:
        ends = {graph.at(n) for n in graph.elements[name].nodes}
        for chain in [c for c in chains if c & ends - {GROUND}]:
            ends |= chain
            chains.remove(chain)
        chains.append(ends)
    for chain in chains:
        hot = {n for n in chain if _leads_to(graph, n, fed, line_nodes)}
        if hot:
            found |= chain - hot
    for plus, minus in poles:
        for own, other in ((plus, minus), (minus, plus)):
            if GROUND not in own and (other - {GROUND}) & fed and not own & fed:
                found |= own
    return found - {GROUND}


def _leads_to(graph: Graph, node: str, fed: set[str], line_nodes: set[str]) -> bool:
    return node in fed or any(
        e.letter in "RSW" and e.other(node) in fed & line_nodes for e in graph.around(node)
    )


def _pumped(graph: Graph, driven: set[str]) -> set[str]:
    """Return the nodes that a capacitor from a driven node swings, with a diode there."""
    at: dict[str, list[tuple[str, str]]] = {}
    for j in graph.junctions:
        at.setdefault(j.cathode, []).append(("in", j.anode))
        at.setdefault(j.anode, []).append(("out", j.cathode))
    found: set[str] = set()
    while True:
        more = set()
        for edge in graph.edges:
            if edge.letter != "C":
                continue
            for here, there in ((edge.a, edge.b), (edge.b, edge.a)):
                if here not in driven | found or there in driven | found | {GROUND}:
                    continue
                ways = at.get(there, [])
                if not ways or any(other in driven for _, other in ways):
                    continue
                both = {way for way, _ in ways} == {"in", "out"}
                alone = not any(
                    e.letter == "C" and (e.value or 0) >= HELD_F and e is not edge
                    for e in graph.around(there)
                )
                if both or (alone and (edge.value or 0) < 10 * HELD_F):
                    more.add(there)
        if not more:
            return found
        found |= more

"""The circuit as a graph: nodes joined by elements, the insides of tubes folded away.

Nodes that next to no resistance or a 0 V source joins count as one (`stress.circuit.joined`);
the name of the group is ground where ground is among them, else the first in the netlist.
"""

from __future__ import annotations

import heapq
from collections.abc import Callable, Collection, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cache, cached_property

from stress.circuit.behaviour import conduction
from stress.circuit.circuit import Kind, Part
from stress.circuit.joined import groups, joints
from stress.netlist.flat import Element, Netlist

CONDUCTORS = frozenset("RLVEHDQJMZSWTX")

_KINDS = {
    "plate": "output",
    "anode": "output",
    "collector": "output",
    "drain": "output",
    "grid": "input",
    "base": "input",
    "gate": "input",
    "oscillator": "input",
    "cathode": "common",
    "filament": "common",
    "emitter": "common",
    "source": "common",
    "screen": "screen",
    "diode": "diode",
    "output": "output",
    "input": "input",
}


@dataclass(frozen=True, slots=True)
class Pin:
    """A pin of a tube or transistor at a node."""

    part: str
    role: str

    @property
    def kind(self) -> str:
        """ "output", "input", "common", "screen", "diode", or "other" (heater, suppressor)."""
        return _kind(self.role)

    @property
    def text(self) -> str:
        """The pin in words: "plate of XU1"."""
        word = self.role.rstrip("0123456789_")
        unit = self.role[len(word) :].strip("_")
        return f"{word} {unit} of {self.part}" if unit else f"{word} of {self.part}"


@cache
def _kind(role: str) -> str:
    word = role.rstrip("0123456789_")
    return _KINDS.get(word) or _KINDS.get(word.rpartition("_")[2], "other")


@dataclass(frozen=True, slots=True)
class Edge:
    """An element, or the space in a tube ("X"), between two groups of nodes.

    Attributes:
        name: Of the element or the tube.
        letter: Of the element, "X" for a tube and for what a formula makes of it.
        a, b: The groups it joins, in the order of its card.
        value: As the element's.
        conducts: Whether direct current can flow.
    """

    name: str
    letter: str
    a: str
    b: str
    value: float | None
    conducts: bool

    def other(self, node: str) -> str:
        """Return the end that is not `node`."""
        return self.b if node == self.a else self.a

    @property
    def ohm(self) -> float:
        """Resistance of an R, 0 for whatever else."""
        return abs(self.value or 0.0) if self.letter == "R" else 0.0


@dataclass(frozen=True, slots=True)
class Junction:
    """A rectifying path: a diode, or one anode of a tube without a grid there."""

    part: str
    anode: str
    cathode: str
    tube: bool


class Graph:
    """Walks over the circuit; made once, never changed."""

    def __init__(
        self,
        netlist: Netlist,
        *,
        parts: Sequence[Part],
        labels: Sequence[Part] = (),
        contacts: Collection[str] = (),
    ) -> None:
        """Fold the elements of `parts` (tubes and other folded devices) into edges.

        Args:
            netlist: Flat.
            parts: What is folded.
            labels: Devices that stay unfolded and whose pins are told by their names.
            contacts: Resistors that stand for a switch, lower case: not joined.
        """
        self.contacts = frozenset(contacts)
        self.netlist = netlist
        folded = {name.lower() for part in parts if part.pins for name in part.elements}
        self._folded = frozenset(folded)
        self.parts: Mapping[str, Part] = {part.name: part for part in parts if part.pins}
        visible = [e for e in netlist.elements if e.name.lower() not in folded and e.nodes]
        self.elements: Mapping[str, Element] = {e.name.lower(): e for e in netlist.elements}
        self._group = groups(visible, contacts=self.contacts)
        edges: list[Edge] = []
        for element in visible:
            edges += self._edges_of(element)
        pins: dict[str, list[Pin]] = {}
        self.junctions: list[Junction] = []
        for part in (*parts, *labels):
            edges += self._space(part)
            for role, node in part.pins.items():
                pins.setdefault(self.at(node), []).append(Pin(part.name, role))
        self.junctions += [
            Junction(e.name, e.a, e.b, False) for e in edges if e.letter == "D" and e.a != e.b
        ]
        self.edges: tuple[Edge, ...] = tuple(edges)
        around: dict[str, list[Edge]] = {}
        for edge in edges:
            if edge.a != edge.b:
                around.setdefault(edge.a, []).append(edge)
                around.setdefault(edge.b, []).append(edge)
        self._around = {node: tuple(found) for node, found in around.items()}
        self._windings = {
            node: windings
            for node, found in around.items()
            if (windings := tuple(e for e in found if e.letter == "L"))
        }
        self._junctions: dict[str, list[Junction]] = {}
        for junction in self.junctions:
            for node in {junction.anode, junction.cathode}:
                self._junctions.setdefault(node, []).append(junction)
        self._pins = {node: tuple(found) for node, found in pins.items()}
        self.joints = joints(netlist.elements)

    def at(self, node: str) -> str:
        """Return the group a node belongs to."""
        return self._group.get(node.lower(), node.lower())

    def knows(self, node: str) -> bool:
        """Say whether the netlist has a node of that name, in lower case."""
        return node in self._group or node in self._pins

    def members(self, groups: Iterable[str]) -> frozenset[str]:
        """Return all nodes of some groups."""
        wanted = set(groups)
        return frozenset(node for node, group in self._group.items() if group in wanted)

    def around(self, node: str) -> tuple[Edge, ...]:
        """Return the edges at a group of nodes, those within the group left out."""
        return self._around.get(node, ())

    def between(self, a: str, b: str) -> Iterator[Edge]:
        """Yield the edges from one group to another."""
        here, there = (a, b) if len(self.around(a)) <= len(self.around(b)) else (b, a)
        return (edge for edge in self.around(here) if edge.other(here) == there)

    def junctions_at(self, node: str) -> Sequence[Junction]:
        """Return the rectifying paths at a group of nodes."""
        return self._junctions.get(node, ())

    def windings(self, node: str) -> tuple[Edge, ...]:
        """Return the inductors at a group of nodes."""
        return self._windings.get(node, ())

    def pins(self, node: str) -> tuple[Pin, ...]:
        """Return the pins of tubes and transistors at a group of nodes."""
        return self._pins.get(node, ())

    @cached_property
    def nodes(self) -> tuple[str, ...]:
        """Every group of nodes, in netlist order."""
        return tuple(dict.fromkeys([*(n for e in self.edges for n in (e.a, e.b)), *self._pins]))

    def is_folded(self, element: str) -> bool:
        """Say whether an element is inside a folded device."""
        return element.lower() in self._folded

    def reach(
        self,
        start: str | Iterable[str],
        *,
        through: Callable[[Edge], bool],
        stop: Callable[[str], bool] = lambda node: False,
        limit_ohm: float = float("inf"),
    ) -> dict[str, float]:
        """Return the groups reached, with the least sum of series resistance to each.

        Args:
            start: Where to begin; always in the answer.
            through: Which edges may be walked.
            stop: Groups that are reached but not passed.
            limit_ohm: Largest sum.
        """
        starts = [start] if isinstance(start, str) else list(start)
        best = dict.fromkeys(starts, 0.0)
        queue = [(0.0, node) for node in starts]
        done: set[str] = set()
        while queue:
            ohm, node = heapq.heappop(queue)
            if node in done:
                continue
            done.add(node)
            if node not in starts and stop(node):
                continue
            for edge in self.around(node):
                if not through(edge):
                    continue
                there, sum_ohm = edge.other(node), ohm + edge.ohm
                if sum_ohm <= limit_ohm and sum_ohm < best.get(there, float("inf")):
                    best[there] = sum_ohm
                    heapq.heappush(queue, (sum_ohm, there))
        return best

    def windings_with(self, inductor: str) -> tuple[str, ...]:
        """Return the inductors coupled to one, itself among them, lower case."""
        return self.joints.get(inductor.lower(), (inductor.lower(),))

    def _edges_of(self, element: Element) -> list[Edge]:
        """Return the edges an element of the netlist makes."""
        n = [self.at(node) for node in element.nodes]
        letter = element.letter
        conducts = letter in CONDUCTORS
        if letter == "B" and element.law is not None:
            way = conduction(element)
            if way:  # a rectifier as a formula, such as Child's law
                return [Edge(element.name, "D", n[::way][0], n[::way][1], element.value, True)]
            if way == 0:
                letter = "X"
            conducts = element.law.quantity == "V" or way == 0
        pairs: list[tuple[str, str]] = []
        if letter == "T" and len(n) >= 4:
            pairs = [(n[0], n[2]), (n[1], n[3])]
        elif len(n) >= 2:
            pairs = [(n[0], n[1])]
        return [Edge(element.name, letter, a, b, element.value, conducts) for a, b in pairs]

    def _space(self, part: Part) -> list[Edge]:
        """Return the paths through a folded part, and note the rectifying ones of a tube."""
        at = {role: self.at(node) for role, node in part.pins.items()}
        if part.kind is Kind.DIODE:
            return [Edge(part.name, "D", at["anode"], at["cathode"], None, True)]
        if part.kind is Kind.TRANSISTOR:
            ends = [("collector", "emitter"), ("base", "emitter"), ("drain", "source")]
            return [
                Edge(part.name, "Q", at[a], at[b], None, True)
                for a, b in ends
                if a in at and b in at
            ]
        made = []
        grids = any(Pin(part.name, role).kind == "input" for role in part.pins)
        for role, node in part.pins.items():
            pin = Pin(part.name, role)
            if pin.kind not in ("output", "screen", "diode"):
                continue
            cathode = cathode_of(part, role)
            if cathode is None or self.at(node) == self.at(cathode):
                continue
            made.append(Edge(part.name, "X", self.at(node), self.at(cathode), None, True))
            if pin.kind == "diode" or (pin.kind == "output" and not grids):
                self.junctions.append(Junction(part.name, self.at(node), self.at(cathode), True))
        return made


def cathode_of(part: Part, role: str) -> str | None:
    """Return the node of the cathode that belongs to a pin: `cathode2` to `plate2`."""
    unit = role[len(role.rstrip("0123456789")) :]
    for name in (f"cathode{unit}", "cathode", "filament", f"emitter{unit}", f"source{unit}"):
        if name in part.pins:
            return part.pins[name]
    return None

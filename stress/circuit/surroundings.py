"""What stands around a node: the pins it reaches, whether it holds still, and its name."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from functools import cached_property
from math import pi

import networkx as nx

from stress.circuit.behaviour import conduction
from stress.circuit.circuit import Kind, Part
from stress.circuit.drive import HELD_F, Drive
from stress.circuit.graph import Edge, Graph, Pin
from stress.circuit.joined import GROUND
from stress.circuit.supply import Supply
from stress.circuit.touch import STATIC_OHM, Touch
from stress.netlist.flat import Element

STOPPER_OHM = 100e3  # series resistors at grids and plates that are no place of their own
SIGNAL_OHM = 5.1e6
SERIES_HZ = 80.0  # an RC with its corner above this is one shunt, below it a coupling
SMALL_OHM = 10.0
RADIO_F = 2.2e-9  # up to this size a capacitor tunes or filters radio frequency
POWER = ("line", "switched")


@dataclass(frozen=True, slots=True)
class Ends:
    """A capacitor with the resistor in series with it taken along.

    Attributes:
        a, b: The groups it joins, behind the series resistors.
        ohm: Sum of the series resistors.
        control: Whether one of them belongs to a control.
    """

    a: str
    b: str
    ohm: float
    control: bool


@dataclass(frozen=True, slots=True)
class Near:
    """A pin that a node reaches, and the resistance on the way."""

    pin: Pin
    ohm: float


class Surroundings:
    """The circuit seen from a node; made once from what the other modules found."""

    def __init__(
        self,
        graph: Graph,
        *,
        drive: Drive,
        supply: Supply,
        touch: Touch,
        parts: Mapping[str, Part],
        gated: Collection[str],
    ) -> None:
        """Keep what was found; `parts` are all parts by lower-case name."""
        self.graph, self.drive, self.supply, self.touch = graph, drive, supply, touch
        self.parts, self.gated = parts, frozenset(gated)
        self._near: dict[tuple[str, float], tuple[Near, ...]] = {}
        self._children: dict[str, list[str]] = {}
        for node, feed in supply.feeds.items():
            if feed.previous is not None:
                self._children.setdefault(feed.previous, []).append(node)

    def ends(self, capacitor: Edge) -> Ends:
        """Return the ends of a capacitor behind its series resistors."""
        found, ohm, control = [], 0.0, False
        for start in (capacitor.a, capacitor.b):
            node, last = start, capacitor
            for _ in range(4):
                step = self._series(node, last, (capacitor.value or 0.0), ohm)
                if step is None:
                    break
                ohm += step.ohm
                control = control or self._is_control(step)
                node, last = step.other(node), step
            found.append(node)
        return Ends(found[0], found[1], ohm, control)

    def _series(self, node: str, last: Edge, farad: float, ohm: float) -> Edge | None:
        if node == GROUND or self.graph.pins(node) or node in self.drive.nodes:
            return None
        others = [e for e in self.graph.around(node) if e.name != last.name]
        if last.letter == "C" and (stacked := self._stacked(node, last, others)):
            return stacked
        if len(others) != 1 or others[0].letter not in "RSW":
            return None
        step = others[0]
        part = self.parts.get(step.name.lower())
        if part is not None and part.kind is Kind.LOUDSPEAKER:
            return None
        total = ohm + step.ohm
        one = total <= SMALL_OHM or 2 * pi * total * farad * SERIES_HZ < 1.0
        return step if one or self._is_control(step) else None

    def _stacked(self, node: str, last: Edge, others: list[Edge]) -> Edge | None:
        """Return the second of two large capacitors in series, with at most the resistors
        that share the voltage between them."""
        seconds = [e for e in others if e.letter == "C"]
        if len(seconds) != 1 or min(last.value or 0.0, seconds[0].value or 0.0) < HELD_F:
            return None
        ends = {last.other(node), seconds[0].other(node)}
        if all(e.letter == "R" and e.other(node) in ends for e in others if e is not seconds[0]):
            return seconds[0]
        return None

    def _is_control(self, edge: Edge) -> bool:
        part = self.parts.get(edge.name.lower())
        return "tone" in edge.name.lower() or (part is not None and part.kind is Kind.CONTROL)

    def direct(self, node: str, *kinds: str) -> tuple[Pin, ...]:
        """Return the pins right at a node, of these kinds where any are named."""
        return tuple(p for p in self.graph.pins(node) if not kinds or p.kind in kinds)

    def near(self, node: str, *kinds: str, ohm: float = STOPPER_OHM) -> tuple[Near, ...]:
        """Return the pins reached through resistors, nearest first; ground, supplies and other
        nodes that hold still are not passed."""
        key = (node, ohm)
        if key not in self._near:
            reached = self.graph.reach(
                node,
                through=lambda e: e.letter in "RSW",
                stop=self.still,
                limit_ohm=ohm,
            )
            found = [
                Near(pin, far)
                for there, far in reached.items()
                if there == node or not self.still(there)
                for pin in self.graph.pins(there)
            ]
            self._near[key] = tuple(sorted(found, key=lambda n: n.ohm))
        return tuple(n for n in self._near[key] if not kinds or n.pin.kind in kinds)

    def still(self, node: str) -> bool:
        """Say whether a node stands still for signals: ground, supplies, large capacitors,
        what can be touched."""
        return (
            node == GROUND
            or node in self.touch.touchable
            or node in self.supply.outputs
            or node in self.drive.returns
            or self.is_held(node)
        )

    def is_joined(self, a: str, b: str) -> bool:
        """Say whether direct current flows between two nodes through less than a static
        discharge resistor."""
        return b in self.graph.reach(a, through=lambda e: e.conducts and e.ohm < STATIC_OHM)

    def is_held(self, node: str) -> bool:
        """Say whether a large capacitor from the node goes to ground or a supply."""
        for edge in self.graph.around(node):
            if edge.letter == "C" and (edge.value or 0.0) >= HELD_F:
                there = edge.other(node)
                if there == GROUND or there in self.supply.outputs:
                    return True
                if there in self.touch.touchable or there in self.drive.returns:
                    return True
        return False

    @cached_property
    def _loads(self) -> dict[str, frozenset[str]]:
        """The kinds of pins fed from every node, from the ends of the feeds upwards."""
        found: dict[str, frozenset[str]] = {}
        order = [n for n, f in self.supply.feeds.items() if f.previous is None]
        for node in order:  # grows while it is walked: every node after the one that feeds it
            order += self._children.get(node, ())
        for node in reversed(order):
            kinds: set[str] = set()
            for there in self._children.get(node, ()):
                kinds |= found[there]
                kinds |= {p.kind for p in self.graph.pins(there)}
            found[node] = frozenset(kinds)
        return found

    @cached_property
    def copper(self) -> Mapping[str, tuple[Element, ...]]:
        """By node of the netlist, nothing joined: the resistors, windings, switches and meters
        at it, those inside a folded part left out."""
        found: dict[str, tuple[Element, ...]] = {}
        for element in self.graph.netlist.elements:
            if element.letter in "RLSW" and not self.graph.is_folded(element.name):
                for node in element.nodes[:2]:
                    found[node] = (*found.get(node, ()), element)
        return found

    def loads(self, node: str) -> frozenset[str]:
        """Return the kinds of pins fed from a node, itself left out."""
        return self._loads.get(node, frozenset())

    def larger(self, capacitor: Edge, factor: float = 20.0) -> str | None:
        """Return a capacitor in parallel that is many times larger."""
        for edge in self.graph.between(capacitor.a, capacitor.b):
            if (
                edge.letter == "C"
                and (edge.value or 0.0) >= factor * (capacitor.value or 0.0) > 0.0
            ):
                return edge.name
        return None

    @cached_property
    def controls(self) -> frozenset[str]:
        """Nodes that work a gated switch, or that a controlled source looks at or feeds, and
        that are no supply."""
        found: set[str] = set()
        for e in self.graph.netlist.elements:
            if self.graph.is_folded(e.name):
                continue
            if e.letter == "S" and e.name.lower() in self.gated:
                found |= {self.graph.at(n) for n in e.nodes[2:4]}
            elif e.letter in "EG" or (e.letter == "B" and conduction(e) is None):
                found |= {self.graph.at(n) for n in e.nodes}
        return frozenset(found - set(self.supply.outputs) - {GROUND})

    @cached_property
    def stages(self) -> nx.DiGraph:
        """Parts whose output reaches the input of another: directly, by a capacitor, a core."""
        stages = nx.DiGraph()
        for edge in self.graph.edges:
            if edge.letter == "C" and edge.a != edge.b:
                ends = self.ends(edge)
                for here, there in ((ends.a, ends.b), (ends.b, ends.a)):
                    self._add_stage(stages, here, there, edge.name)
        for part in self.graph.parts.values():
            for role, node in part.pins.items():
                if Pin(part.name, role).kind == "output":
                    here = self.graph.at(node)
                    self._add_stage(stages, here, here, "direct")
        cores = set(self.graph.joints.values())
        for core in cores:
            nodes = {self.graph.at(n) for c in core for n in self.graph.elements[c].nodes}
            for here in nodes:
                for there in nodes - {here, GROUND}:
                    self._add_stage(stages, here, there, core[0])
        return stages

    def _add_stage(self, stages: nx.DiGraph, here: str, there: str, by: str) -> None:
        if self.still(here) or self.still(there):
            return
        outputs = self.near(here, "output", "common")
        inputs = self.near(there, "input", ohm=SIGNAL_OHM)
        for near in outputs[:1]:
            for far in inputs:
                # What is many times further belongs to another branch of the grid return.
                within = far.ohm <= max(10e3, 3.0 * inputs[0].ohm)
                if within and far.pin.part != near.pin.part:
                    stages.add_edge(near.pin.part, far.pin.part, by=by)

    def after(self, earlier: str, later: str, *, without: str) -> bool:
        """Say whether the signal goes from one part to another by some other way than the
        coupling `without`."""
        stages = self.stages
        if earlier not in stages or later not in stages:
            return False
        if stages.has_edge(later, earlier) and self._loops[earlier] != self._loops[later]:
            return False
        seen, queue = {earlier}, [earlier]
        while queue:
            here = queue.pop()
            for there in stages.successors(here):
                if stages.edges[here, there]["by"] == without:
                    continue
                if there == later:
                    return True
                if there not in seen:
                    seen.add(there)
                    queue.append(there)
        return False

    @cached_property
    def _loops(self) -> dict[str, int]:
        """The number of the loop of stages each part is in; alone in its own where in none."""
        loops = nx.strongly_connected_components(self.stages)
        return {part: number for number, loop in enumerate(loops) for part in loop}

    def winding_at(self, node: str) -> Edge | None:
        """Return a winding at a node."""
        return next(iter(self.graph.windings(node)), None)

    def words(self, node: str) -> str:
        """Return a node in words: "ground", "plate of XU1", "supply b0", "grid of XU2"."""
        if node == GROUND:
            return "ground"
        if any(node in pole for pair in self.drive.poles for pole in pair):
            return f"line ({node})" if not self.touch.secondary else f"winding ({node})"
        ranks = ("output", "input", "screen", "common", "diode")
        pins = sorted(
            (p for p in self.graph.pins(node) if p.kind in ranks), key=lambda p: ranks.index(p.kind)
        )
        rail = node in self.supply.outputs or self.is_held(node)
        if rail and node in self.supply.feeds and not any(p.kind == "common" for p in pins):
            return f"supply {node}"
        if pins:
            return pins[0].text
        if node in self.touch.touchable:
            return node
        for near in self.near(node, *ranks, ohm=SIGNAL_OHM):
            if near.pin.kind in ("input", "output", "common", "diode", "screen"):
                return near.pin.text
        winding = self.winding_at(node)
        if winding is not None:
            return f"winding {winding.name}"
        return f"node {node}"

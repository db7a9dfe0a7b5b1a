"""What the flat circuit lacks for a simulation: paths for direct current, resistance in loops."""

from __future__ import annotations

from collections.abc import Hashable, Iterable
from dataclasses import dataclass

from stress.netlist.flat import Element

# Between which of its nodes an element carries direct current, by letter; all where not named.
_PLAIN_PAIRS = frozenset("RLV")
_DEVICES = frozenset("DQJMZ")
_SWITCHES = frozenset("SW")


class Groups:
    """Nodes that are connected, by union and find."""

    def __init__(self) -> None:
        self._above: dict[Hashable, Hashable] = {}

    def of(self, node: Hashable) -> Hashable:
        """Return the one that stands for the group of a node."""
        path = []
        while (above := self._above.get(node, node)) != node:
            path.append(node)
            node = above
        for passed in path:
            self._above[passed] = node
        return node

    def join(self, first: Hashable, second: Hashable) -> bool:
        """Join two groups; False where they were one already."""
        one, other = self.of(first), self.of(second)
        if one == other:
            return False
        self._above[other] = one
        return True


class LoopOfSources(Exception):
    """Voltage sources form a loop: the circuit has no solution."""


@dataclass(frozen=True, slots=True)
class Gaps:
    """What has to be added.

    Attributes:
        floating: One node of each group without a path to ground, in order of appearance.
        stiff: Inductors that close a loop of sources and inductors without resistance.
    """

    floating: tuple[str, ...]
    stiff: tuple[str, ...]


def conducting(element: Element) -> tuple[tuple[str, str], ...]:
    """Return the pairs of nodes between which an element carries direct current."""
    nodes, letter = element.nodes, element.letter
    if letter in _PLAIN_PAIRS or letter in _SWITCHES or letter in "EH":
        return ((nodes[0], nodes[1]),)
    if letter in _DEVICES:
        return tuple((nodes[0], node) for node in nodes[1:])
    if letter == "B" and element.law is not None and element.law.quantity == "V":
        return ((nodes[0], nodes[1]),)
    if letter == "T":
        return ((nodes[0], nodes[2]), (nodes[1], nodes[3]))
    return ()


def gaps(elements: Iterable[Element]) -> Gaps:
    """Return what a circuit lacks for a simulation.

    Raises:
        LoopOfSources: Where voltage sources form a loop among themselves.
    """
    kept = tuple(elements)
    paths, loops = Groups(), Groups()
    for element in kept:
        for first, second in conducting(element):
            paths.join(first, second)
    for element in kept:
        if _fixes_voltage(element) and not loops.join(*element.nodes[:2]):
            raise LoopOfSources(f"voltage source {element.name} closes a loop of voltage sources")
    stiff = tuple(
        element.name
        for element in kept
        if element.letter == "L" and not loops.join(*element.nodes[:2])
    )
    floating: list[str] = []
    for element in kept:
        for node in element.nodes:
            if paths.join("0", node):
                floating.append(node)
    return Gaps(tuple(floating), stiff)


def _fixes_voltage(element: Element) -> bool:
    if element.letter in "VEH":
        return True
    return element.letter == "B" and element.law is not None and element.law.quantity == "V"

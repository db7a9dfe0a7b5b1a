"""Which nodes are one place, and which inductors share a core."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from itertools import pairwise

import networkx as nx

from stress.netlist.flat import Element

JOINED_OHM = 1.0  # a wire, a fuse, a meter shunt, an ESR: no separate place in the circuit
GROUND = "0"


def groups(elements: Sequence[Element], *, contacts: Collection[str]) -> dict[str, str]:
    """Join the nodes that next to nothing separates; see the module's docstring."""
    parent: dict[str, str] = {}

    def root(node: str) -> str:
        while parent.setdefault(node, node) != node:
            parent[node] = parent[parent[node]]
            node = parent[node]
        return node

    for element in elements:
        for node in element.nodes:
            root(node)
        if _joins(element) and element.name.lower() not in contacts:
            a, b = root(element.nodes[0]), root(element.nodes[1])
            if a == GROUND:
                parent[b] = a
            else:
                parent[a] = b
    groups = {node: root(node) for node in parent}
    # the first node of a group names it, but for ground
    first: dict[str, str] = {GROUND: GROUND}
    for node, top in groups.items():
        first.setdefault(top, node)
    return {node: first[top] for node, top in groups.items()}


def _joins(element: Element) -> bool:
    if len(element.nodes) != 2:
        return False
    if element.letter == "L":
        return element.name.lower().endswith("#lser")  # the leads of a capacitor
    if element.letter == "R":
        return element.value is not None and abs(element.value) <= JOINED_OHM
    return element.letter == "V" and element.wave is None and not element.value


def joints(elements: Sequence[Element]) -> dict[str, tuple[str, ...]]:
    """Return every coupled inductor with all that share its core."""
    cores = nx.Graph()
    for element in elements:
        if element.letter == "K":
            names = [name.lower() for name in element.controls]
            cores.add_edges_from(pairwise(names))
    return {name: tuple(sorted(core)) for core in nx.connected_components(cores) for name in core}

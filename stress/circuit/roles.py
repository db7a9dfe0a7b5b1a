"""What every capacitor does in its place, by rules over the graph, the surest first."""

from __future__ import annotations

from collections.abc import Callable

from stress.circuit import role_bypass, role_line, role_power, role_signal
from stress.circuit.circuit import Role
from stress.circuit.graph import Edge
from stress.circuit.role_line import Found
from stress.circuit.surroundings import Ends, Surroundings

Rule = Callable[[Surroundings, Edge, Ends], Found]


def _same_node(s: Surroundings, c: Edge, e: Ends) -> Found:
    if c.a == c.b or e.a == e.b:
        return Role.UNKNOWN, "both ends are on one node, or a part of the same resistor"
    return None


def _filter(s: Surroundings, c: Edge, e: Ends) -> Found:
    """Without pin, supply or rectifier nearby: a series or shunt element of a filter."""
    still = [n for n in (e.a, e.b) if s.still(n)]
    if not still:
        return Role.COUPLING, f"coupling, {s.words(e.a)} to {s.words(e.b)}"
    node = e.a if still[0] == e.b else e.b
    resistors = [x.name for x in s.graph.around(node) if x.letter == "R"]
    if len(still) == 1 and resistors:
        return Role.TONE, f"low-pass with {resistors[0]}, {s.words(node)} to {s.words(still[0])}"
    return None


RULES: tuple[Rule, ...] = (
    _same_node,
    role_line.at_line,
    role_line.doubler,
    role_power.snubber,
    role_power.across_winding,
    role_line.buffer,
    role_power.supply,
    role_bypass.compensation,
    role_bypass.bypass,
    role_signal.coupling,
    _filter,
)


def role_of(s: Surroundings, capacitor: Edge) -> tuple[Role, str]:
    """Return the role of a capacitor and the role in words with its neighbours."""
    ends = s.ends(capacitor)
    for rule in RULES:
        found = rule(s, capacitor, ends)
        if found is not None:
            return found
    return Role.UNKNOWN, f"{s.words(ends.a)} to {s.words(ends.b)}, role not recognised"

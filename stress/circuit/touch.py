"""What is connected to the line, and what a person can touch."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass

from stress.circuit.circuit import Line
from stress.circuit.drive import Drive
from stress.circuit.graph import Edge, Graph
from stress.circuit.joined import GROUND
from stress.circuit.sources import rms_of

STATIC_OHM = 100e3  # a resistor from here on only leads static charge away (common practice)
MAINS_V = (85.0, 265.0)  # rms; what else a line source states is taken for a winding
NAMES = ("chassis", "case", "earth", "antenna", "aerial", "ant", "pe")
GROUND_NAMES = frozenset({"chassis", "ground", "gnd", "earth", "0"})


@dataclass(frozen=True, slots=True)
class Touch:
    """Groups of nodes by what they mean for a person.

    Attributes:
        hot: Connected to the line by a path that no winding breaks.
        touchable: Can be touched.
        hot_ground: Ground itself is connected to the line.
        secondary: The line sources stand for windings, not for the mains.
        assumed: What nobody stated.
    """

    hot: frozenset[str]
    touchable: frozenset[str]
    hot_ground: bool
    secondary: bool
    assumed: tuple[str, ...] = ()


def find(
    graph: Graph, *, drive: Drive, line: Line, stated_V: float | None, named: Sequence[str]
) -> Touch:
    """Return the line-connected and the touchable nodes.

    Args:
        graph, drive: The circuit.
        line: The mains.
        stated_V: The nominal line voltage of the sheet.
        named: `touchable` of the sheet.
    """
    assumed: list[str] = []
    touchable = {graph.at(n) for n in (_node(graph, name) for name in named) if n is not None} or {
        graph.at(n) for n in graph.nodes if n in NAMES
    }
    secondary = _stands_for_winding(graph, line, stated_V)
    if secondary:
        what = "winding of the power transformer" if drive.alternating else "battery"
        assumed.append(f"{', '.join(line.sources)} taken for a {what}, not for the line itself")
    hot: set[str] = set()
    hot_ground = False
    if drive.poles and not secondary:
        poles = {n for pair in drive.poles for pole in pair for n in pole}
        hot, hot_ground = _hot(graph, poles, touchable)
        if hot_ground:
            assumed.append("ground is connected to the line")
        elif GROUND in poles:
            assumed.append(
                "the line's return is drawn to ground; only windings and what protects them "
                "hang on the line, so the chassis is taken as isolated from it"
            )
    if line.sources and not hot_ground and not named:
        touchable.add(GROUND)
        assumed.append("ground is the chassis and can be touched")
    return Touch(frozenset(hot), frozenset(touchable), hot_ground, secondary, tuple(assumed))


def _node(graph: Graph, name: str) -> str | None:
    """Return the node a sheet means: itself, or ground by one of its names."""
    low = name.lower()
    if graph.knows(low):
        return low
    return GROUND if low in GROUND_NAMES else None


def _hot(graph: Graph, poles: Collection[str], touchable: Collection[str]) -> tuple[set[str], bool]:
    """Return the hot nodes, and whether ground is among them.

    A return or an earthed neutral that is drawn to ground makes it hot only where a rectifier
    or a tube hangs on the line itself.
    """
    live = set(poles) - {GROUND}
    core = set(graph.reach(live, through=_conducts, stop=lambda n: n == GROUND or n in touchable))
    loads = any(e.letter in "DXQ" for n in core - {GROUND} for e in graph.around(n))
    grounded = GROUND in core | set(poles) and loads
    if grounded:
        start = live | {GROUND}
        core = set(graph.reach(start, through=_conducts, stop=lambda n: n in touchable))
    edge = set(touchable) - set(poles) | (set() if grounded else {GROUND})
    hot = set(graph.reach(core - edge, through=lambda e: e.conducts, stop=lambda n: n in edge))
    return hot - edge, grounded


def _conducts(edge: Edge) -> bool:
    return edge.conducts and edge.ohm < STATIC_OHM


def _stands_for_winding(graph: Graph, line: Line, stated_V: float | None) -> bool:
    """Say whether the line sources are secondaries by their voltage, or two halves of one."""
    sources = [e for name in line.sources if (e := graph.elements.get(name.lower()))]
    if not sources:
        return False
    own_V = rms_of(sources[0])
    if stated_V is not None and not 0.75 < own_V / stated_V < 1.34:
        return True
    ends = [{graph.at(n) for n in e.nodes} for e in sources]
    halves = len(ends) > 1 and bool(set.intersection(*ends))
    return halves or not MAINS_V[0] <= own_V <= MAINS_V[1]

"""What feeds the equipment and what drives it: line, gates, signals, and their common period."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import lcm, sqrt

from stress.circuit.behaviour import nodes_in
from stress.circuit.circuit import Kind, Line
from stress.circuit.graph import Edge, Graph
from stress.circuit.joined import GROUND
from stress.netlist.flat import Element, Netlist
from stress.parts.sheet import LineEntry
from stress.text.figure import figure

LINE_HZ = (40.0, 70.0)
LINE_LEAST_V = 5.0  # peak; less is a signal
STRONG_V = 40.0  # peak; no signal is so large, so that a capacitor may lie between: a doubler
HIGH_LINE = 1.10
LOW_LINE = 0.90
WINDING_H = 10e-3  # an inductance from here on is wound on iron
CHARGED_F = 0.47e-6
SERIES_OHM = 1000.0
MOST_CYCLES = 100_000  # of the fastest source in the common period


@dataclass(frozen=True, slots=True)
class Sources:
    """The sources by what they do.

    Attributes:
        line: The mains.
        signals: Muted except in the condition `driven`.
        gates: Periodic sources that work a switch, or that power is drawn from.
        gated: The switches and transistors they work, lower case.
        powering: The ones that power is drawn from.
        period_s: Common period of all periodic sources that are no signals.
        assumed: What nobody stated, in words.
    """

    line: Line
    signals: tuple[str, ...]
    gates: tuple[str, ...]
    gated: frozenset[str]
    powering: tuple[str, ...]
    period_s: float | None
    assumed: tuple[str, ...] = ()


def find(graph: Graph, *, entry: LineEntry) -> Sources:
    """Return the sources of a circuit, the sheet's `[line]` first."""
    netlist = graph.netlist
    sources = [e for e in netlist.elements if e.letter in "VI" and not graph.is_folded(e.name)]
    gates, gated = _gates(graph)
    if entry.sources:
        wanted = {name.lower() for name in entry.sources}
        feeding = [e for e in sources if e.name.lower() in wanted]
    else:
        feeding = [e for e in sources if _is_line(graph, e)]
    line = _line(feeding, entry)
    assumed: tuple[str, ...] = ()
    names = {name.lower() for name in line.sources}
    others = [e for e in sources if period_of(e) is not None and e.name.lower() not in names]
    drawn = [e for e in others if _powers(graph, e) and e.name.lower() not in gates]
    powering = {e.name.lower() for e in drawn} | gates
    signals = tuple(
        e.name for e in others if e.name.lower() not in powering and not _heats(graph, e)
    )
    if signals and not line.sources and not powering and not any(map(_is_steady, sources)):
        assumed += (f"no other source feeds the circuit, so {', '.join(signals)} is never mute",)
        signals = ()
    quiet = {name.lower() for name in signals}
    working = [e for e in sources if e.name.lower() not in quiet]
    period = entry.period_s
    if period is None:
        periods = [p for e in working if (p := period_of(e)) is not None]
        period = common_period(periods)
        if period is None and periods:
            period = max(periods)
            assumed += (
                f"the sources have no common period in sight; {figure(period, 's')} is taken "
                "(state [line] period)",
            )
    return Sources(
        line=line,
        signals=signals,
        gates=tuple(e.name for e in sources if e.name.lower() in powering),
        gated=gated,
        powering=tuple(e.name for e in drawn),
        period_s=period,
        assumed=assumed,
    )


def period_of(element: Element) -> float | None:
    """Return the period of an independent source in s; None where it does not repeat."""
    wave = element.wave
    if wave is None:
        return None
    v = wave.values
    if wave.kind == "sin":
        return 1.0 / v[2] if len(v) > 2 and v[2] > 0 and v[1] else None
    if wave.kind == "pulse":
        return v[6] if len(v) > 6 and v[6] > 0 and v[0] != v[1] else None
    if wave.kind == "pwl" and wave.repeat_from_s is not None:
        length = v[-2] - wave.repeat_from_s
        return length if length > 0 else None
    if wave.kind == "sffm":
        slow = v[4] if len(v) > 4 and v[4] > 0 else v[2] if len(v) > 2 else 0.0
        return 1.0 / slow if slow > 0 else None
    if wave.kind == "am":
        return 1.0 / v[2] if len(v) > 2 and v[2] > 0 else None
    return None


def common_period(periods: Iterable[float]) -> float | None:
    """Return the least common period in s, None where there is none in sight.

    Frequencies are taken as fractions with a denominator up to 1000 against each other; the
    common period holds at most `MOST_CYCLES` cycles of the fastest source.
    """
    wanted = sorted(set(periods))
    if not wanted:
        return None
    shortest = wanted[0]
    cycles = 1
    for period in wanted[1:]:
        ratio = Fraction(period / shortest).limit_denominator(1000)
        if abs(float(ratio) * shortest / period - 1.0) > 1e-9:
            return None
        # Of fractions in lowest terms with 1/1 among them the least common multiple is that
        # of the numerators.
        cycles = lcm(cycles, ratio.numerator)
    return shortest * cycles if cycles <= MOST_CYCLES else None


def rms_of(element: Element) -> float:
    """Return the rms of the alternating part of a sine, else the size of what it holds."""
    wave = element.wave
    if wave is not None and wave.kind == "sin" and len(wave.values) > 1:
        return abs(wave.values[1]) / sqrt(2.0)
    if wave is not None and wave.values:
        return max(abs(v) for v in (wave.values[1::2] if wave.kind == "pwl" else wave.values[:2]))
    return abs(element.value or 0.0)


def _line(feeding: Sequence[Element], entry: LineEntry) -> Line:
    """Return the mains; the netlist's own amplitude stands for the nominal voltage."""
    if not feeding:
        return Line()
    assumed: list[str] = []
    if not entry.sources:
        assumed.append("line: " + ", ".join(e.name for e in feeding) + " (by frequency and load)")
    nominal = entry.nominal_V
    if not any(rms_of(e) for e in feeding):
        names = ", ".join(e.name for e in feeding)
        return Line(assumed=(f"{names} has no voltage, so there is no line",))
    if nominal is None:
        nominal = max(rms_of(e) for e in feeding)
        assumed.append(f"nominal line {figure(nominal, 'V')}, from the netlist")
    high, low = entry.high_V, entry.low_V
    if high is None:
        high = HIGH_LINE * nominal
        assumed.append(f"high line {figure(high, 'V')}, 1.10 times nominal")
    if low is None:
        low = LOW_LINE * nominal
    return Line(
        sources=tuple(e.name for e in feeding),
        nominal_V=nominal,
        high_V=high,
        low_V=low,
        assumed=tuple(assumed),
    )


def _is_line(graph: Graph, element: Element) -> bool:
    """Say whether a source is a 40 to 70 Hz sine that feeds a winding or a rectifier; one that
    is too large for a signal may feed a capacitor or lie behind one."""
    wave = element.wave
    if element.letter != "V" or wave is None or wave.kind != "sin" or len(wave.values) < 3:
        return False
    if not LINE_HZ[0] <= wave.values[2] <= LINE_HZ[1] or abs(wave.values[1]) < LINE_LEAST_V:
        return False
    strong = abs(wave.values[1]) >= STRONG_V
    for there in _fed(graph, element, passed="RSWC" if strong else "RSW"):
        if graph.junctions_at(there):
            return True
        if any(_is_winding(graph, w) for w in graph.windings(there)):
            return True
        if strong and any(e.letter == "C" for e in graph.around(there)):
            return True
    return False


def _fed(graph: Graph, element: Element, *, passed: str) -> set[str]:
    """Return the nodes near a source: behind small resistors, switches and single coils."""
    starts = {graph.at(n) for n in element.nodes} - {GROUND}
    reached = graph.reach(
        starts,
        through=lambda e: (
            e.letter in passed or (e.letter == "L" and len(graph.windings_with(e.name)) == 1)
        ),
        stop=lambda n: n == GROUND,
        limit_ohm=SERIES_OHM,
    )
    return set(reached) - {GROUND}


def _is_winding(graph: Graph, edge: Edge) -> bool:
    return len(graph.windings_with(edge.name)) > 1 or (edge.value or 0.0) >= WINDING_H


def _powers(graph: Graph, element: Element) -> bool:
    """Say whether power is drawn from a source: a rectifier at it or at a winding that it feeds
    charges a large capacitor. A detector's capacitor is small."""
    near = _fed(graph, element, passed="RSW")
    cores = {c for n in near for w in graph.windings(n) for c in graph.windings_with(w.name)}
    swinging = near | {graph.at(n) for c in cores for n in graph.elements[c].nodes}
    charged = {
        n
        for here in swinging - {GROUND}
        for j in graph.junctions_at(here)
        for n in (j.anode, j.cathode)
    } - swinging
    return any(
        e.letter == "C" and (e.value or 0.0) >= CHARGED_F
        for n in charged - {GROUND}
        for e in graph.around(n)
    )


def _is_steady(element: Element) -> bool:
    """Say whether a source gives anything without repeating."""
    wave = element.wave
    if wave is None:
        return bool(element.value)
    return period_of(element) is None and any(wave.values)


def _heats(graph: Graph, element: Element) -> bool:
    """Say whether a line-frequency source only feeds resistors from end to end: heaters."""
    wave = element.wave
    if wave is None or wave.kind != "sin" or not LINE_HZ[0] <= wave.values[2] <= LINE_HZ[1]:
        return False
    a, b = (graph.at(n) for n in element.nodes)
    start = b if a == GROUND else a
    reached = graph.reach(start, through=lambda e: e.letter == "R", stop=lambda n: n == GROUND)
    edges = [e for n in reached if n != GROUND for e in graph.around(n)]
    return all(e.letter == "R" or e.name == element.name for e in edges) and len(edges) > 1


def _gates(graph: Graph) -> tuple[frozenset[str], frozenset[str]]:
    """Return the sources that gate, and the switches they gate, lower case."""
    gates: set[str] = set()
    gated: set[str] = set()
    for element in graph.netlist.elements:
        if graph.is_folded(element.name):
            continue
        if element.letter == "S" and len(element.nodes) >= 4:
            found = _behind(graph, element.nodes[2:4], waves=None)
        elif element.letter == "W" and element.controls:
            found = _behind(graph, (), waves=None, sensed=element.controls)
        else:
            continue
        if found:
            gates |= found
            gated.add(element.name.lower())
    for part in graph.parts.values():
        inputs = [node for role, node in part.pins.items() if role in ("base", "gate")]
        if part.kind is Kind.TRANSISTOR and inputs:
            # A sine at a base is a signal; what is switched there is no sine.
            found = _behind(graph, inputs, waves=("pulse", "pwl"))
            if found:
                gates |= found
                gated.add(part.name.lower())
    return frozenset(gates), frozenset(gated)


def _behind(
    graph: Graph,
    nodes: Iterable[str],
    *,
    waves: Collection[str] | None,
    sensed: Iterable[str] = (),
) -> set[str]:
    """Return the periodic sources behind control nodes, through resistors and controlled
    sources; `waves` bounds the kinds that count."""
    queue = [graph.at(n) for n in nodes] + [
        graph.at(n)
        for s in sensed
        if s.lower() in graph.elements
        for n in graph.elements[s.lower()].nodes
    ]
    seen: set[str] = set()
    found: set[str] = set()
    while queue:
        node = queue.pop()
        if node in seen or node == GROUND:
            continue
        seen.add(node)
        for edge in graph.around(node):
            element = graph.elements.get(edge.name.lower())
            if element is None:
                continue
            if edge.letter == "R":
                queue.append(edge.other(node))
            elif edge.letter == "V":
                wave = element.wave
                if period_of(element) is not None and wave is not None:
                    if waves is None or wave.kind in waves:
                        found.add(element.name.lower())
                else:
                    queue.append(edge.other(node))
            elif edge.letter in "EG":
                queue += [graph.at(n) for n in element.nodes[2:]]
            elif edge.letter == "B" and element.law is not None:
                queue += [graph.at(n) for n in nodes_in(element.law.expression)]
    return found


def periodic(netlist: Netlist, names: Iterable[str]) -> float | None:
    """Return the common period in s of the named sources, None without one."""
    wanted = {name.lower() for name in names}
    periods = [
        p for e in netlist.elements if e.name.lower() in wanted and (p := period_of(e)) is not None
    ]
    return common_period(periods)

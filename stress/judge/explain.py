"""The explanation of every position, in trade words and with its numbers."""

from __future__ import annotations

from collections.abc import Mapping
from math import log

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.finding import Severity
from stress.study import conditions as stock
from stress.study.failures import describe
from stress.study.result import (
    Bench,
    CurvePoint,
    Failure,
    Leakage,
    LeakageIn,
    PositionStress,
    Replacement,
    Risk,
    Working,
    Worst,
)
from stress.text.figure import figure

DO = {
    Severity.REPLACE: "replace before any power",
    Severity.TEST: "test before power",
    Severity.WATCH: "watch",
    Severity.NOTE: "no more than a note",
}


def explain(
    position: Position,
    *,
    circuit: Circuit,
    working: Working,
    worst: Worst | None,
    leakage: Leakage | None,
    failures: tuple[Failure, ...],
    replacement: Replacement | None,
    bench: Bench | None,
    risk: Risk,
) -> tuple[str, ...]:
    """Return the paragraphs about one position, what to do first."""
    paragraphs = [
        bears(position, working=working, worst=worst, replacement=replacement),
        f"{DO[risk.severity]}: {risk.reason}",
    ]
    if leakage is not None:
        paragraphs += _leak(position, circuit=circuit, working=working, leakage=leakage)
    paragraphs += [
        failure.text for failure in failures if failure.dangerous or failure.consequences
    ]
    if bench is not None and (line := bench_line(bench)):
        paragraphs.append(line)
    return tuple(paragraphs)


def bears(
    position: Position,
    *,
    working: Working,
    worst: Worst | None,
    replacement: Replacement | None,
) -> str:
    """Return what a position bears, normally and at worst, and what to fit."""
    stresses = working.positions.get(position.name, {})
    nominal = stresses.get(stock.NOMINAL)
    if nominal is None or worst is None:
        return "what it bears is not known: " + _why_not(working, stock.NOMINAL)
    text = f"bears {figure(abs(nominal.dc_V), 'V')}"
    if nominal.peak_V - abs(nominal.dc_V) > max(0.05 * abs(nominal.dc_V), 0.5):
        text += f" with peaks of {figure(nominal.peak_V, 'V')}"
    if worst.worst_V > 1.03 * nominal.peak_V:
        text += f", {figure(worst.worst_V, 'V')} {_when(worst.condition)}"
    if worst.brief_V is not None and worst.brief_V > 1.03 * worst.worst_V:
        text += f", but {figure(worst.brief_V, 'V')} {_when(worst.brief_condition or '')}"
    text += _ripple(nominal)
    return f"{text}: {_fit(replacement)}" if replacement is not None else text


def _ripple(stress: PositionStress) -> str:
    if stress.ripple_rms_A < 1e-3:
        return ""
    at = f" at {figure(stress.ripple_Hz, 'Hz')}" if stress.ripple_Hz else ""
    return f"; ripple current {figure(stress.ripple_rms_A, 'A')} rms{at}"


def _fit(replacement: Replacement) -> str:
    text = f"fit {figure(replacement.value_F, 'F')} {replacement.style}"
    if replacement.rated_V is not None:
        text += f", {figure(replacement.rated_V, 'V')}"
    if replacement.safety_class:
        text += f", class {replacement.safety_class}"
    return f"{text} ({replacement.arrangement})" if replacement.arrangement else text


def _when(condition: str) -> str:
    """Return a condition in words that stand after a voltage."""
    if condition.startswith("pulled "):
        return f"with {condition.removeprefix('pulled ')} pulled at high line"
    words = {
        stock.NOMINAL: "as it is run",
        stock.HIGH: "at high line",
        stock.COLD: "with the tubes cold at high line",
        stock.INRUSH: "for a moment at switch-on",
        stock.DRIVEN: "with its signals",
    }
    return words.get(condition, f"in the condition {condition}")


def _why_not(working: Working, condition: str) -> str:
    for one in working.unanswered:
        if one.case.startswith(condition):
            return f"{one.case}: {one.kind}, {one.text}"
    return "the condition was not solved"


def _leak(position: Position, *, circuit: Circuit, working: Working, leakage: Leakage) -> list[str]:
    if not leakage.limited:
        return [leakage.text]
    found = leakage.governing
    if found is None:
        return [leakage.text]
    paragraphs = []
    if found.critical_ohm is not None:
        chain = leak_chain(position, circuit=circuit, working=working, found=found)
        paragraphs.append(f"at {figure(found.critical_ohm, 'ohm')} of leakage: {chain}")
    elif found.assumed_critical_ohm is not None and found.assumed_victim is not None:
        victim = found.assumed_victim
        paragraphs.append(
            f"no known limit is passed; at {figure(found.assumed_critical_ohm, 'ohm')} "
            f"{describe(victim)}: state the limit in the sheet to have it judged"
        )
    else:
        paragraphs.append(f"no leak down to 1 Ω passes a known limit ({found.condition})")
    if found.functional_ohm is not None:
        paragraphs.append(
            f"from {figure(found.functional_ohm, 'ohm')} of leakage on "
            f"{found.functional_reason} by more than it may"
        )
    return paragraphs


def leak_chain(position: Position, *, circuit: Circuit, working: Working, found: LeakageIn) -> str:
    """Return the way from the leak to its victim in one sentence.

    "C5 leaks -> grid of XU2 rises by 15 V -> cathode current 116 mA, limit 100 mA".
    """
    victim, point = found.victim, nearest(found, found.critical_ohm)
    if victim is None or point is None:
        return f"{position.name} leaks"
    links = [f"{position.name} leaks {figure(point.leak_A, 'A')}"]
    healthy = {
        node: volts[found.condition]
        for node, volts in working.nodes.items()
        if found.condition in volts
    }
    part = _part(circuit, victim.part)
    if part is not None:
        links += _moved_pins(part, point, healthy)
    links.append(describe(victim))
    return " -> ".join(links)


def _part(circuit: Circuit, name: str) -> Part | None:
    try:
        return circuit.part(name)
    except KeyError:
        return None


def _moved_pins(part: Part, point: CurvePoint, healthy: Mapping[str, float]) -> list[str]:
    """Return the pins of a tube or transistor whose voltage the leak has moved."""
    if part.kind not in (Kind.TUBE, Kind.TRANSISTOR):
        return []
    links = []
    for pin in ("grid", "base", "gate", "screen", "grid2"):
        node = part.pins.get(pin)
        if node is None or node not in point.nodes or node not in healthy:
            continue
        change = point.nodes[node] - healthy[node]
        if abs(change) > 0.02 * max(abs(healthy[node]), 1.0):
            way = "rises" if change > 0 else "falls"
            links.append(f"{pin} of {part.name} {way} by {figure(abs(change), 'V')}")
    return links


def nearest(found: LeakageIn, ohm: float | None) -> CurvePoint | None:
    """Return the solved point of a curve that lies nearest to a resistance, by its logarithm."""
    solved = [point for point in found.curve if point.unanswered is None]
    if ohm is None or not solved:
        return None
    return min(solved, key=lambda point: abs(log(point.ohm / ohm)))


def bench_line(bench: Bench) -> str:
    """Return the bench limits in one line, or "" where there are none."""
    parts = []
    if bench.test_V is not None and bench.leakage_max_A is not None:
        parts.append(
            f"at {figure(bench.test_V, 'V')} and room temperature not more than "
            f"{figure(bench.leakage_max_A, 'A', digits=2)}"
        )
    if bench.esr_max_ohm is not None:
        at = f" at {figure(bench.esr_Hz, 'Hz')}" if bench.esr_Hz else ""
        parts.append(f"ESR not above {figure(bench.esr_max_ohm, 'ohm', digits=2)}{at}")
    if bench.value_min_F is not None and bench.value_max_F is not None:
        parts.append(
            f"capacitance {figure(bench.value_min_F, 'F', digits=2)} to "
            f"{figure(bench.value_max_F, 'F', digits=2)}"
        )
    if bench.in_leakage is not None:
        parts.append(bench.in_leakage)
    return f"bench: {'; '.join(parts)}" if parts else ""

"""The explanation of every position, in trade words and with its numbers."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.chain import Chains, Step
from stress.circuit.circuit import Circuit, Kind, Position
from stress.finding import Severity
from stress.judge.curve import nearest
from stress.judge.grid_reading import grid_reading
from stress.parts import styles
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
from stress.study.timing import Timing, told
from stress.study.unjudged import MOST, Unjudged, not_judged
from stress.text.figure import figure

LEAST_LEAK_A = 1e-7
NO_VOLTAGE_V = 1e-3  # less is none to a technician
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
    chains: Chains,
    working: Working,
    worst: Worst | None,
    leakage: Leakage | None,
    failures: tuple[Failure, ...],
    replacement: Replacement | None,
    bench: Bench | None,
    risk: Risk,
    timing: Timing | None = None,
) -> tuple[str, ...]:
    """Return the paragraphs about one position, what to do first."""
    paragraphs = [
        bears(position, working=working, worst=worst, replacement=replacement),
        f"{DO[risk.severity]}: {risk.reason}",
    ]
    if leakage is not None:
        paragraphs += _leak(position, chains=chains, working=working, leakage=leakage)
        if leakage.governing is not None:
            paragraphs.append(
                grid_reading(
                    position,
                    circuit=circuit,
                    chains=chains,
                    nodes=working.nodes,
                    found=leakage.governing,
                )
            )
    if timing is not None:
        paragraphs.append(told(timing, circuit=circuit))
    paragraphs += [
        failure.text for failure in failures if failure.dangerous or failure.consequences
    ]
    paragraphs.append(_missing(leakage, failures))
    if bench is not None:
        paragraphs.append(bench_line(bench))
    return tuple(paragraph for paragraph in paragraphs if paragraph)


def _missing(leakage: Leakage | None, failures: tuple[Failure, ...]) -> str:
    """Return which limits nobody knows of parts that a fault here strains, each part once."""
    found = list(leakage.governing.unjudged) if leakage and leakage.governing else []
    for failure in failures:
        found += failure.unjudged
    worst: dict[tuple[str, str], Unjudged] = {}
    for each in found:
        held = worst.get((each.part, each.quantity))
        if held is None or each.stress > held.stress:
            worst[each.part, each.quantity] = each
    return not_judged(
        tuple(sorted(worst.values(), key=lambda u: -u.stress / max(u.healthy, 1e-9))[:MOST])
    )


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
    if abs(nominal.dc_V) < NO_VOLTAGE_V:
        text = "bears no direct voltage"
    if _peaks(nominal):
        text += f" with peaks of {figure(nominal.peak_V, 'V')}"
    if worst.worst_V > 1.03 * nominal.peak_V:
        # A meter for direct voltage shows the mean; where the two differ it is said which it is.
        what = "peaks of " if _peaks(stresses.get(worst.condition, nominal)) else ""
        text += f", {what}{figure(worst.worst_V, 'V')} {stock.told(worst.condition)}"
    if worst.brief_V is not None and worst.brief_V > 1.03 * worst.worst_V:
        text += f", but {figure(worst.brief_V, 'V')} {stock.told(worst.brief_condition or '')}"
    text += _ripple(nominal)
    return f"{text}: {_fit(replacement, position)}" if replacement is not None else text


def _peaks(stress: PositionStress) -> bool:
    """Whether the peak is worth telling beside the mean."""
    return stress.peak_V - abs(stress.dc_V) > max(0.05 * abs(stress.dc_V), 0.5)


def _ripple(stress: PositionStress) -> str:
    if stress.ripple_rms_A < 1e-3:
        return ""
    at = f" at {figure(stress.ripple_Hz, 'Hz')}" if stress.ripple_Hz else ""
    return f"; ripple current {figure(stress.ripple_rms_A, 'A')} rms{at}"


def _fit(replacement: Replacement, position: Position) -> str:
    text = f"fit {figure(replacement.value_F, 'F')} {replacement.style}"
    if replacement.rated_V is not None:
        text += f", {figure(replacement.rated_V, 'V')}"
    if replacement.safety_class:
        text += f", class {replacement.safety_class}"
    turned = position.style.polar and not styles.styles()[replacement.style].polar
    if turned and not replacement.safety_class:
        text += ", which goes in either way round"
    return f"{text} ({replacement.arrangement})" if replacement.arrangement else text


def _why_not(working: Working, condition: str) -> str:
    for one in working.unanswered:
        if one.case.startswith(condition):
            return f"{one.case}: {one.kind}, {one.text}"
    return "the condition was not solved"


def _leak(position: Position, *, chains: Chains, working: Working, leakage: Leakage) -> list[str]:
    if not leakage.limited:
        return [leakage.text]
    found = leakage.governing
    if found is None:
        return [leakage.text]
    paragraphs = []
    if found.critical_ohm is not None:
        chain = leak_chain(position, chains=chains, working=working, found=found)
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
            f"from {figure(found.functional_ohm, 'ohm')} of leakage on, {found.functional_reason}"
        )
    return paragraphs


def leak_chain(position: Position, *, chains: Chains, working: Working, found: LeakageIn) -> str:
    """Return the way from the leak to its victim in one sentence.

    "C5 leaks 2.1 µA -> grid of XU2 rises by 15 V -> XU2 cathode current 48 mA to 116 mA, limit
    100 mA". What a step does is read from the solved case next to the crossing.
    """
    victim, point = found.victim, nearest(found, found.critical_ohm)
    if victim is None or point is None:
        return f"{position.name} leaks"
    healthy = {
        node: volts[found.condition]
        for node, volts in working.nodes.items()
        if found.condition in volts
    }
    steady = point.leak_A > LEAST_LEAK_A  # at the line the mean is none
    links = [f"{position.name} leaks" + (f" {figure(point.leak_A, 'A')}" if steady else "")]
    rectifiers = {n for n, kind in chains.kinds.items() if kind is Kind.RECTIFIER}
    for step in chains.steps(position.name, victim.part)[1:-1]:
        if step.kind == "node" and not step.text.startswith("node "):
            if step.text.rpartition(" ")[2] not in rectifiers:
                links.append(_node(step, point, healthy))
        elif step.kind == "part":
            links += _current(step.name, point, working, found.condition)
    if victim.quantity != "cathode_A":
        links += _current(victim.part, point, working, found.condition)
    if victim.healthy is not None and victim.quantity in ("cathode_A", "plate_W", "screen_W"):
        unit = victim.quantity.rpartition("_")[2]
        links.append(f"{describe(victim)}, healthy {figure(victim.healthy, unit)}")
    else:
        links.append(describe(victim))
    return " -> ".join(links)


def _current(tube: str, point: CurvePoint, working: Working, condition: str) -> list[str]:
    """Return how the cathode current of a tube has moved; nothing for another part."""
    was = working.parts.get(tube, {}).get(condition, {}).get("cathode_A")
    now = point.stresses.get(tube, {}).get("cathode_A")
    if was is None or now is None:
        return []
    return [f"{tube} cathode current {figure(was, 'A')} to {figure(now, 'A')}"]


def _node(step: Step, point: CurvePoint, healthy: Mapping[str, float]) -> str:
    """Return a place on the way and how its voltage has moved, where it has."""
    was, now = healthy.get(step.name), point.nodes.get(step.name)
    if was is None or now is None or abs(now - was) < 0.02 * max(abs(was), 1.0):
        return step.text
    way = "rises" if now > was else "falls"
    return f"{step.text} {way} by {figure(abs(now - was), 'V')} to {figure(now, 'V')}"


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

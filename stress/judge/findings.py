"""Results and limits to findings: one rule a function, all of them in one list."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass

from stress.circuit.chain import Chains
from stress.circuit.circuit import Circuit
from stress.finding import Finding, Severity
from stress.judge.pair import named, pair_text
from stress.judge.silicon import resistor_findings
from stress.study import conditions as stock
from stress.study.failures import describe
from stress.study.limits import limits
from stress.study.other_use import is_own, use_of
from stress.study.pairs import Pairs
from stress.study.result import (
    Condition,
    Failure,
    Leakage,
    Risk,
    Unanswered,
    Victim,
    Working,
    Worst,
)
from stress.study.silicon import SeriesResistor
from stress.text.figure import figure

SHOWN_VICTIMS = 4  # of one condition, the furthest past their limits
NAMED = 3  # cases alike that are named, the rest counted


@dataclass(frozen=True, slots=True, kw_only=True)
class Results:
    """What the rules read."""

    circuit: Circuit
    working: Working
    worst: Mapping[str, Worst]
    leakage: Mapping[str, Leakage]
    failures: Mapping[str, tuple[Failure, ...]]
    risks: tuple[Risk, ...]
    pairs: Pairs | None = None
    silicon: tuple[SeriesResistor, ...] = ()


def findings(results: Results) -> tuple[Finding, ...]:
    """Return everything the user must know, the most urgent first, equal ones in rule order."""
    found = [finding for rule in RULES for finding in rule(results)]
    return tuple(sorted(found, key=lambda finding: finding.severity.rank))


def ranked_positions(results: Results) -> Iterator[Finding]:
    """Every position that asks for something, with the reason of its rank."""
    for risk in results.risks:
        if risk.severity is not Severity.NOTE:
            yield Finding(
                severity=risk.severity, where=risk.position, text=risk.reason, rule="risk-order"
            )


def healthy_over_limit(results: Results) -> Iterator[Finding]:
    """Parts past a limit though nothing is wrong: the design, the sheet or the netlist is."""
    for condition in results.working.conditions:
        if condition.name not in (stock.NOMINAL, stock.HIGH):
            continue
        judged = limits(results.circuit, condition=condition)
        for part, by_condition in results.working.parts.items():
            for name, limit in judged.get(part, {}).items():
                stress = by_condition.get(condition.name, {}).get(name)
                if stress is None or stress <= limit.value or limit.assumed:
                    continue
                victim = Victim(part=part, quantity=name, stress=stress, limit=limit)
                yield Finding(
                    severity=Severity.WATCH,
                    where=part,
                    condition=condition.name,
                    text=f"{describe(victim)} ({limit.rating}, {limit.source}) with every "
                    "capacitor healthy",
                    action="check the sheet and the netlist against the real set",
                    rule="healthy-over-limit",
                )


def past_in_other_uses(results: Results) -> Iterator[Finding]:
    """Parts past a limit in a condition that the user asked for, and within it otherwise.

    Compared with the equipment as it is meant to be run at the same line voltage; where the
    condition takes the signal away, with the driven equipment. At the highest line voltage only
    what is not past a limit at the usual one already.
    """
    told: dict[str, set[str]] = {}
    for condition in results.working.conditions:
        if not is_own(condition, results.circuit):
            continue
        use = use_of(condition)
        found = _past_in(results, condition)
        victims = [v for v in found if v.part not in told.get(use, ())]
        told.setdefault(use, set()).update(v.part for v in found)
        if victims:
            more = len({v.part for v in victims[SHOWN_VICTIMS:]})
            rest = f"; {more} more part{'s' if more > 1 else ''}" if more else ""
            yield Finding(
                severity=Severity.WATCH,
                where=victims[0].part,
                condition=condition.name,
                text=f"{stock.told(condition.name)}: "
                f"{'; '.join(describe(v) for v in victims[:SHOWN_VICTIMS])}{rest}",
                rule="other-use",
            )


def silicon_resistor(results: Results) -> Iterator[Finding]:
    """What drops the voltage that silicon brings."""
    yield from resistor_findings(results.silicon)


def _past_in(results: Results, condition: Condition) -> list[Victim]:
    """Return what a condition takes past a known limit, the furthest past first."""
    judged = limits(results.circuit, condition=condition)
    baseline = stock.NOMINAL if condition.factor <= 1.0 or condition.usual else stock.HIGH
    if condition.muted:
        baseline = stock.DRIVEN
    found = [
        Victim(part=part, quantity=name, stress=stress, limit=limit)
        for part, by_condition in results.working.parts.items()
        for name, limit in judged.get(part, {}).items()
        if (stress := by_condition.get(condition.name, {}).get(name)) is not None
        and stress > limit.value >= by_condition.get(baseline, {}).get(name, 0.0)
        and not limit.assumed
    ]
    return sorted(found, key=lambda v: -v.stress / v.limit.value)


def leaks_between_nodes(results: Results) -> Iterator[Finding]:
    """Leakage between sections of a can or between stated nodes that passes a limit."""
    positions = {position.name for position in results.circuit.positions}
    for name, leak in results.leakage.items():
        found = leak.governing
        if name in positions or found is None or found.critical_ohm is None:
            continue
        if found.victim is not None:
            yield Finding(
                severity=Severity.TEST,
                where=name,
                condition=found.condition,
                text=f"below {figure(found.critical_ohm, 'ohm')} of leakage here "
                f"{describe(found.victim)}",
                action="One section bad, the whole can goes." if ":" in name else "",
                rule="leak-between-nodes",
            )


def two_faults(results: Results) -> Iterator[Finding]:
    """Pairs of faults that pass a limit which neither passes alone."""
    if results.pairs is None or not results.pairs.found:
        return
    chains = Chains(results.circuit)
    for pair in results.pairs.found:
        yield Finding(
            severity=Severity.WATCH,
            where=pair.victims[0].victim.part,
            condition=pair.condition,
            text=f"{named(pair)} together: {pair_text(pair, chains)}",
            rule="two-faults",
        )


def assumed_limits(results: Results) -> Iterator[Finding]:
    """Leaks and failures that would pass a limit nobody stated: name the key that settles it."""
    seen: dict[str, tuple[Victim, list[str]]] = {}
    for name, leak in results.leakage.items():
        governing = leak.governing
        if governing is not None and governing.assumed_victim is not None:
            seen.setdefault(governing.assumed_victim.part, (governing.assumed_victim, []))[
                1
            ].append(f"{name} leaky")
    for name, failures in results.failures.items():
        for failure in failures:
            for victim in failure.victims:
                if victim.limit.assumed:
                    seen.setdefault(victim.part, (victim, []))[1].append(f"{name} {failure.fault}")
    for part, (victim, causes) in seen.items():
        which = ", ".join(dict.fromkeys(causes[:4])) + (" and others" if len(causes) > 4 else "")
        yield Finding(
            severity=Severity.NOTE,
            where=part,
            text=f"with {which}: {describe(victim)}. {victim.limit.source}",
            action=f'State [resistors.{part}] rated = "…" to have it judged.',
            rule="assumed-limit",
        )


def ripple_over_rating(results: Results) -> Iterator[Finding]:
    """Positions whose ripple current passes the marked rating."""
    for position in results.circuit.positions:
        if position.ripple_A is None:
            continue
        by_condition = results.working.positions.get(position.name, {})
        for name in (stock.HIGH, stock.NOMINAL):
            stress = by_condition.get(name)
            if stress is not None and stress.ripple_rms_A > position.ripple_A:
                yield Finding(
                    severity=Severity.TEST,
                    where=position.name,
                    condition=name,
                    text=f"ripple current {figure(stress.ripple_rms_A, 'A')} rms, "
                    f"rated {figure(position.ripple_A, 'A')}",
                    rule="ripple-rating",
                )
                break


def surge_of_rectifiers(results: Results) -> Iterator[Finding]:
    """Rectifiers and diodes whose peaks at switch-on pass a repetitive limit."""
    for part in results.circuit.parts:
        peaks = results.working.inrush_parts.get(part.name, {})
        limit = part.limits.get("reverse_V")
        peak = peaks.get("reverse_V")
        if limit is not None and peak is not None and peak > limit.value:
            victim = Victim(part=part.name, quantity="reverse_V", stress=peak, limit=limit)
            yield Finding(
                severity=Severity.WATCH,
                where=part.name,
                condition=stock.INRUSH,
                text=f"at switch-on {describe(victim)}",
                rule="inrush-inverse-voltage",
            )


def without_number(results: Results) -> Iterator[Finding]:
    """Every case the engine has no number for, by position and by what it said."""
    whys = list(results.working.unanswered)
    for leak in results.leakage.values():
        whys += [why for found in leak.by_condition for why in found.unanswered]
    for failures in results.failures.values():
        whys += [f.unanswered for f in failures if f.unanswered is not None]
    if results.pairs is not None:
        whys += [why for pair in results.pairs.tried for why in pair.unanswered]
    groups: dict[tuple[str, str], list[Unanswered]] = {}
    for why in dict.fromkeys(whys):
        if why.kind == "not limited by the netlist":
            continue
        where = why.case.partition(" / ")[2].split(" ")[0] or "equipment"
        groups.setdefault((where, why.kind), []).append(why)
    for (where, kind), alike in groups.items():
        motorboats = kind == "unstable"
        first, others = alike[0], [why.case for why in alike[1:]]
        also = ", ".join(others[:NAMED])
        if len(others) > NAMED:
            also += f" and {len(others) - NAMED} more"
        yield Finding(
            severity=Severity.WATCH if motorboats else Severity.NOTE,
            where=where,
            condition=first.case,
            text=f"{first.case}: {'the equipment ' if motorboats else f'{kind}; '}{first.text}"
            + (f"; likewise {also}" if also else ""),
            rule=kind.replace(" ", "-"),
        )


def seen_without_solving(results: Results) -> Iterator[Finding]:
    """What the graph and the reader have to say, but for what is the reason of a rank already."""
    told = {(risk.position, risk.reason) for risk in results.risks}
    for finding in results.circuit.findings:
        if (finding.where, finding.text) not in told:
            yield finding
    yield from results.circuit.netlist.notices


def held_in_simulation(results: Results) -> Iterator[Finding]:
    """What was tied down, held or quieted to be solved."""
    for notice in results.working.notices:
        yield Finding(
            severity=Severity.NOTE, where="equipment", text=notice, rule="held-in-simulation"
        )


Rule = Callable[[Results], Iterator[Finding]]
RULES: tuple[Rule, ...] = (
    ranked_positions,
    healthy_over_limit,
    past_in_other_uses,
    silicon_resistor,
    ripple_over_rating,
    surge_of_rectifiers,
    leaks_between_nodes,
    two_faults,
    without_number,
    seen_without_solving,
    assumed_limits,
    held_in_simulation,
)

"""What the page shows of one position: pictures, and facts in words."""

from __future__ import annotations

from dataclasses import dataclass

from markupsafe import Markup

from stress.circuit.circuit import Position
from stress.report import words
from stress.report.ladder import ladder
from stress.report.leak_curve import WhatIf, leak_curve, what_if
from stress.report.table import PAGE, Table
from stress.report.tables import FAILURES, bears, failure_rows
from stress.report.waveform import spectrum, waveform
from stress.report.words import amount
from stress.study.result import Bench, Leakage, LeakageIn, Replacement, Review, Risk
from stress.text.figure import figure


@dataclass(frozen=True, slots=True, kw_only=True)
class Fact:
    """A name and what it is."""

    name: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """A figure under its heading; `svg` None: `instead` says why there is none."""

    heading: str
    svg: Markup | None
    instead: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Card:
    """One position, ready to be laid out."""

    position: Position
    marked: str
    risk: Risk | None
    severity: str
    explanation: tuple[str, ...]
    pictures: tuple[Picture, ...]
    bears: Table
    leakage: tuple[Fact, ...]
    leak_picture: Picture
    what_if: WhatIf | None
    replacement: tuple[Fact, ...]
    bench: tuple[Fact, ...]
    failures: Table


def cards(review: Review) -> tuple[Card, ...]:
    """Return a card for every position, in the order of work."""
    ranks = {risk.position: risk.rank for risk in review.risks}
    last = len(ranks) + 1
    ordered = sorted(review.circuit.positions, key=lambda each: ranks.get(each.name, last))
    return tuple(_card(review, each) for each in ordered)


def _card(review: Review, of: Position) -> Card:
    risk = next((each for each in review.risks if each.position == of.name), None)
    leakage = review.leakage.get(of.name)
    failures = failure_rows(review.failures.get(of.name, ()))
    return Card(
        position=of,
        marked=words.marked(of),
        risk=risk,
        severity=risk.severity.value if risk else "unranked",
        explanation=review.explanations.get(of.name, ()),
        pictures=_pictures(review, of),
        bears=bears(review, of),
        leakage=_leakage(leakage),
        leak_picture=Picture(
            heading="Leakage curve",
            svg=leak_curve(review, leakage) if leakage else None,
            instead=_no_curve(leakage),
        ),
        what_if=what_if(review, leakage) if leakage else None,
        replacement=_replacement(review.replacements.get(of.name)),
        bench=_bench(review.bench.get(of.name)),
        failures=Table("failures", FAILURES, failures).place(PAGE),
    )


def _pictures(review: Review, of: Position) -> tuple[Picture, ...]:
    traces = review.working.traces.get(of.name, ())
    trace = next((t for t in traces if t.condition == "nominal"), traces[0] if traces else None)
    nominal = review.working.positions.get(of.name, {}).get("nominal")
    return (
        Picture(
            heading="Voltage ladder",
            svg=ladder(review, of),
            instead="No voltage of it is known.",
        ),
        Picture(
            heading=f"One period, {trace.condition}" if trace else "One period",
            svg=waveform(of.name, trace) if trace else None,
            instead="No waveform was kept.",
        ),
        Picture(
            heading="Ripple spectrum",
            svg=spectrum(of.name, nominal) if nominal else None,
            instead="No ripple current flows, or none was resolved.",
        ),
    )


def _no_curve(leakage: Leakage | None) -> str:
    if leakage is None:
        return "Its leakage was not studied."
    if not leakage.limited:
        return "Across an ideal source: not limited by the netlist, fuse or wiring decides."
    if leakage.governing is None:
        return "No curve: not one condition was solved."
    return "Its leakage drives no stress that has a known limit."


def _leakage(of: Leakage | None) -> tuple[Fact, ...]:
    if of is None:
        return ()
    facts = [Fact(name="in words", text=of.text)] if of.text else []
    for each in of.by_condition:
        name = f"{each.condition}, governs" if each.governs else each.condition
        facts.append(Fact(name=name, text=_leakage_in(each)))
    return tuple(facts)


def _leakage_in(of: LeakageIn) -> str:
    text = f"damage below: {words.critical(of)}"
    if of.critical_A is not None:
        text += f" ({figure(of.critical_A, 'A')} through it)"
    if of.victim:
        text += f", {words.victim(of.victim)}"
    text += f"; works as meant above: {words.functional(of)}"
    if of.functional_ohm is not None and of.functional_reason:
        text += f", {of.functional_reason}"
    if of.assumed_critical_ohm is not None and of.assumed_victim:
        text += (
            f"; by an assumed limit below {figure(of.assumed_critical_ohm, 'ohm')}, "
            f"{words.victim(of.assumed_victim)}"
        )
    return text


def _replacement(of: Replacement | None) -> tuple[Fact, ...]:
    if of is None:
        return ()
    facts = [Fact(name="fit", text=words.fit(of)), Fact(name="because", text=of.reason)]
    if of.ripple_rms_A is not None:
        facts.append(
            Fact(name="ripple rating", text=f"at least {figure(of.ripple_rms_A, 'A')} rms")
        )
    if of.value_max_F is not None:
        facts.append(Fact(name="not more than", text=figure(of.value_max_F, "F")))
    if of.life_h is not None:
        facts.append(Fact(name="expected life", text=f"{figure(of.life_h, 'h')}"))
    facts += [Fact(name="note", text=note) for note in of.notes]
    if of.rules:
        facts.append(Fact(name="by", text="; ".join(of.rules)))
    return tuple(facts)


def _bench(of: Bench | None) -> tuple[Fact, ...]:
    if of is None:
        return ()
    leakage = esr = "no limit known"
    if of.leakage_max_A is not None:
        at = amount(of.test_V, "V", missing="a voltage not known")
        leakage = f"at most {figure(of.leakage_max_A, 'A')} at {at}"
    if of.esr_max_ohm is not None:
        esr = f"at most {figure(of.esr_max_ohm, 'ohm')}"
        esr += f" at {figure(of.esr_Hz, 'Hz')}" if of.esr_Hz is not None else ""
    return (
        Fact(name="leakage", text=_joined(leakage, of.leakage_reason, of.in_leakage)),
        Fact(name="ESR", text=_joined(esr, of.esr_reason, of.in_esr)),
        Fact(name="capacitance", text=_joined(capacitance(of), of.in_capacitance)),
        Fact(
            name="counted in",
            text=f"{of.hot_factor:.3g} times the leakage when hot, safety factor {of.safety:.3g}",
        ),
        *(Fact(name="note", text=note) for note in of.notes),
    )


def _joined(*texts: str | None) -> str:
    return "; ".join(text for text in texts if text)


def capacitance(of: Bench) -> str:
    """Return the range of capacitance in words."""
    low = amount(of.value_min_F, "F")
    high = amount(of.value_max_F, "F")
    return words.NOT_KNOWN if low == high == words.NOT_KNOWN else f"{low} to {high}"

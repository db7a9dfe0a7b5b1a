"""Bench limits and verdicts on readings, on a terminal or in a pipe."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Console

from stress.circuit.circuit import Position
from stress.judge.measured import Moved, Past
from stress.judge.verdict import Advice, Verdicts
from stress.report.change import order_changes, step_changes
from stress.report.lines import Lines
from stress.report.words import amount, marked, unit_of, victim
from stress.study.result import Bench, Review, Risk, Unanswered
from stress.text.figure import figure

INDENT = 5


def print_bench(review: Review, console: Console) -> None:
    """Print the limits of every position in the order of work, with what they rest on."""
    out = Lines(console)
    out.line(f"{review.circuit.name}: bench limits", bold=True)
    sheet = review.circuit.sheet
    out.line(
        f"on the bench at {sheet.bench_degC:.0f} °C; safety factor {sheet.safety:g} on leakage. "
        "Discharge every part before and after a test."
    )
    rank = {risk.position: risk.rank for risk in review.risks}
    last = len(rank) + 1
    for position in sorted(review.circuit.positions, key=lambda p: rank.get(p.name, last)):
        out.heading(f"{position.name:<4} {position.role_text}; {marked(position)}")
        limits = review.bench.get(position.name)
        if limits is None:
            out.line("no limits: its value or what it bears is not known", indent=INDENT)
            continue
        _limits(limits, position, out)


def _limits(limits: Bench, position: Position, out: Lines) -> None:
    if limits.test_V is not None:
        most = amount(limits.leakage_max_A, "A")
        out.line(
            f"leakage: at {figure(limits.test_V, 'V')} not more than {most}"
            f"{_where(limits.in_leakage)}: {limits.leakage_reason}",
            indent=INDENT,
        )
    if limits.esr_max_ohm is not None:
        out.line(
            f"ESR: not above {figure(limits.esr_max_ohm, 'ohm')}{_where(limits.in_esr)}: "
            f"{limits.esr_reason}",
            indent=INDENT,
        )
    if limits.value_min_F is not None and limits.value_max_F is not None:
        out.line(
            f"capacitance: {figure(limits.value_min_F, 'F')} to {figure(limits.value_max_F, 'F')}"
            f"{_where(limits.in_capacitance)}",
            indent=INDENT,
        )
    for note in limits.notes:
        out.line(note, first="   - ", indent=INDENT)


def _where(verdict: str | None) -> str:
    return f", {verdict}" if verdict is not None else ""


def print_verdicts(found: Verdicts, console: Console) -> None:
    """Print the verdict on every position that was measured, the most serious first."""
    out = Lines(console)
    out.line("Readings", bold=True)
    if not found.verdicts:
        out.line("no position was measured", indent=INDENT)
    for advice in Advice:
        for verdict in found.verdicts:
            if verdict.advice is not advice:
                continue
            out.line(str(verdict), first=f"{verdict.position:<4} ", indent=INDENT)
            for point in verdict.points:
                if point.advice is not advice:
                    out.line(f"{point.advice}: {point.reason}", first="   - ", indent=INDENT)
    if found.drifts:
        out.heading("Resistors and windings")
        for drift in found.drifts:
            out.line(str(drift), indent=INDENT)


def print_measured(
    drawn: Review,
    console: Console,
    *,
    order: Sequence[Risk],
    stressed: Sequence[Past],
    moved: Sequence[Moved],
    unanswered: Sequence[Unanswered] = (),
) -> None:
    """Print the equipment as measured beside the equipment as drawn.

    Args:
        drawn: The review of the equipment as drawn.
        console: Where.
        order: The order of work with what the readings tell.
        stressed: What is past a limit as measured, with nothing else wrong.
        moved: Voltages that are others as measured.
        unanswered: Conditions that have no number as measured.
    """
    out = Lines(console)
    out.line("The equipment as measured", bold=True)
    _order(drawn.risks, order, out)
    out.heading("Past a limit as measured, nothing else being wrong")
    if not stressed:
        out.line("nothing", indent=INDENT)
    for one in stressed:
        was = ""
        if one.victim.healthy is not None:
            was = f"; as drawn {figure(one.victim.healthy, unit_of(one.victim.quantity))}"
        known = ", past it already" if one.drawn else ""
        out.line(f"{one.condition}: {victim(one.victim)}{was}{known}", indent=INDENT)
    for case in unanswered:
        out.line(f"{case.kind}: {case.text}", first=f"{case.case} ", indent=_hang(case.case))
    if moved:
        out.heading("Voltages that moved")
    for change in moved:
        out.line(
            f"{figure(change.drawn_V, 'V')} as drawn, {figure(change.measured_V, 'V')} as "
            f"measured ({change.condition})",
            first=f"{change.position} ",
            indent=_hang(change.position),
        )


def _hang(name: str) -> int:
    return max(INDENT, len(name) + 1)


def print_change(before: Review, after: Review, console: Console, *, title: str) -> None:
    """Print how the order of work and the findings change from one review to the other.

    Args:
        before: As found.
        after: With the parts that were chosen.
        title: What the second one is.
    """
    out = Lines(console)
    out.line(title, bold=True)
    _order(before.risks, after.risks, out)
    for heading, steps in step_changes(before, after):
        out.heading(heading)
        for step in steps:
            out.line(step.text, first=f"{step.where} ", indent=_hang(step.where))


def _order(before: Sequence[Risk], after: Sequence[Risk], out: Lines) -> None:
    changes = tuple(order_changes(before, after))
    if not changes:
        out.line("the order of work stays as it was", indent=INDENT)
    for position, text in changes:
        out.line(text, first=f"{position} ", indent=_hang(position))

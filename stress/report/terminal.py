"""The review on a terminal or in a pipe: what to do first, then what it rests on."""

from __future__ import annotations

from collections.abc import Iterable

from rich.box import SIMPLE_HEAD
from rich.console import Console
from rich.table import Table as Grid

from stress.finding import Severity
from stress.report import borne, tables, words
from stress.report.lines import Lines
from stress.report.order import Step, order_of_work
from stress.report.table import NARROW, WIDE, Table
from stress.report.tables import NO_LIMIT, PAST, PAST_ASSUMED, VERDICT, WITHIN
from stress.study.conditions import INRUSH
from stress.study.result import Review
from stress.text.figure import figure

WIDE_FROM = 132  # characters; what the wide table of positions needs
_MIN_WIDTHS = {"role": 9, "fit": 13, "do": 7}  # their longest word, and a value with its unit
_HEADINGS = {
    Severity.REPLACE: "Replace before any power",
    Severity.TEST: "Test before power",
    Severity.WATCH: "Watch",
    Severity.NOTE: "Notes",
}


def print_review(review: Review, console: Console, *, verbose: bool = False) -> None:
    """Print a review: order of work, positions, explanations, parts, conditions, cautions.

    Args:
        review: What was found.
        console: Where; its width decides between the narrow and the wide tables.
        verbose: Also the method and how close each condition came to its settled state.
    """
    out = Lines(console)
    _head(review, out)
    steps = order_of_work(review)
    for severity in Severity:
        _steps([each for each in steps if each.severity is severity], severity, out)
    _positions(review, out)
    _explanations(review, out)
    _parts(review, out)
    _conditions(review, out, verbose=verbose)
    _listed("Two faults at once", review.pair_texts, out)
    _listed("Assumed, because neither netlist nor sheet tells", review.circuit.assumed, out)
    _listed("Held, tied down or quieted in the simulation", review.working.notices, out)
    _listed("Cautions", review.cautions, out)
    _run(review, out)


def _table(table: Table, out: Lines, *, groups: Iterable[str] | None = None) -> None:
    """Print a table; rows of different groups are set apart."""
    shown = table.place(WIDE if out.console.width >= WIDE_FROM else NARROW)
    grid = Grid(box=SIMPLE_HEAD, padding=0, pad_edge=False, show_edge=False)
    for column in shown.columns:
        grid.add_column(
            column.title,
            justify="right" if column.number else "left",
            overflow="fold",
            header_style="bold",
            min_width=_MIN_WIDTHS.get(column.key),
        )
    held = None
    for row, group in zip(shown.rows, groups or [""] * len(shown.rows), strict=True):
        if group != held:
            grid.add_section()
        held = group
        grid.add_row(*(out.text(cell.text) for cell in row))
    out.console.print(grid, highlight=False)


def _head(review: Review, out: Lines) -> None:
    circuit = review.circuit
    sheet = f"sheet {circuit.sheet.path}" if circuit.sheet.path else "no sheet"
    out.line(circuit.name, bold=True)
    many = len(circuit.positions)
    out.line(f"{circuit.netlist.path}, {sheet}; {many} position{'s' if many != 1 else ''}")
    if review.cautions:
        out.line("Charged capacitors and live parts kill: the cautions stand at the end.")


def _steps(steps: list[Step], severity: Severity, out: Lines) -> None:
    if not steps and severity in (Severity.WATCH, Severity.NOTE):
        return
    out.heading(_HEADINGS[severity])
    if not steps:
        out.line("nothing", indent=2)
    hang = 7 + max((len(step.where) for step in steps), default=0)
    said = ""
    for step in steps:
        # A place with several findings is named once.
        mark = "" if step.where == said else f"{step.mark:>4}  {step.where} "
        out.line(step.text, first=mark, indent=hang)
        said = step.where


def _positions(review: Review, out: Lines) -> None:
    out.heading("Positions, in the order of work")
    table = tables.positions(review)
    names = [row[1].text for row in table.rows]
    severity = {risk.position: risk.severity.value for risk in review.risks}
    _table(table, out, groups=[severity.get(name, "") for name in names])


def _explanations(review: Review, out: Lines) -> None:
    out.heading("Position by position")
    rank = {risk.position: risk.rank for risk in review.risks}
    last = len(rank) + 1
    for position in sorted(review.circuit.positions, key=lambda p: rank.get(p.name, last)):
        out.console.print()
        heading = Grid.grid(expand=True, padding=(0, 2, 0, 0), pad_edge=False)
        heading.add_column()
        heading.add_column(justify="right")
        name = f"{position.name:<4} {position.role_text}"
        heading.add_row(out.text(name, bold=True), out.text(words.marked(position)))
        out.console.print(heading, highlight=False)
        for paragraph in review.explanations.get(position.name, ("no explanation was written",)):
            out.line(paragraph, indent=5)


def _parts(review: Review, out: Lines) -> None:
    out.heading("Other parts with every capacitor healthy")
    table = tables.parts(review)
    past = tuple(row for row in table.rows if row[VERDICT].text in (PAST, PAST_ASSUMED))
    judged = [row for row in table.rows if row[VERDICT].text in (PAST, PAST_ASSUMED, WITHIN)]
    lost = [
        row for row in table.rows if row[VERDICT].text not in (PAST, PAST_ASSUMED, WITHIN, NO_LIMIT)
    ]
    if past:
        _table(Table(table.name, table.columns, past), out)
    elif judged:
        out.line("none passes a limit that is known", indent=2)
    if lost:
        told = "stress is" if len(lost) == 1 else "stresses are"
        out.line(f"{len(lost)} {told} not judged: no answer for the condition", indent=2)
    silent = [part.name for part in review.circuit.parts if not part.limits]
    if silent:
        out.line(
            f"no limit is known of {', '.join(silent)}: nothing is judged there until the "
            "sheet states one",
            indent=2,
        )


def _conditions(review: Review, out: Lines, *, verbose: bool) -> None:
    out.heading("Conditions")
    answered = {name for held in review.working.positions.values() for name in held} | {INRUSH}
    hang = 3 + max((len(each.name) for each in borne.conditions(review)), default=0)
    for condition in borne.conditions(review):
        line = "" if condition.line_V is None else f"line {figure(condition.line_V, 'V')}"
        parts = [part for part in (line, condition.text) if part]
        if condition.name not in answered:
            parts.append(words.missing_in(review, condition.name))
        out.line("; ".join(parts) or "as drawn", first=f"  {condition.name} ", indent=hang)
    for unanswered in review.working.unanswered:
        out.line(f"{unanswered.case}: {unanswered.kind}; {unanswered.text}", indent=2)
    offered = borne.on_offer(review)
    if offered:
        out.line("; ".join(offered), first="  on offer with --condition: ", indent=4)
    if verbose:
        _method(review, out)


def _method(review: Review, out: Lines) -> None:
    out.heading("Method: how each condition was settled, and how far from settled it may be")
    _table(tables.proofs(review), out)


def _listed(heading: str, items: tuple[str, ...], out: Lines) -> None:
    if items:
        out.heading(heading)
    for item in items:
        out.line(item, first="  -", indent=4)


def _run(review: Review, out: Lines) -> None:
    run = review.run
    unsolved = f"{run.unsolved} unsolved" if run.unsolved else "none unsolved"
    out.console.print()
    out.line(
        f"{run.cases} cases ({unsolved}), {run.cycles} periods simulated in "
        f"{figure(run.wall_s, 's')}; ngspice {review.versions.ngspice}, "
        f"PySpice {review.versions.pyspice}"
        + (f"; ratings chosen by {review.policy}" if review.policy else "")
    )

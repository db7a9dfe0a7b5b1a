"""Before and after: what the chosen parts, or a set as measured, change in a review."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from stress.report.order import Step, order_of_work
from stress.report.table import Cell, Column, Table, number
from stress.report.words import NOT_KNOWN, marked, plain
from stress.study.result import Review, Risk

COLUMNS = (
    Column("part", "part"),
    Column("was", "was"),
    Column("fitted", "fitted"),
    Column("worst_V", "worst then", number=True),
    Column("margin_was", "margin was", number=True),
    Column("margin_is", "margin is", number=True),
    Column("critical_ohm", "damage below", number=True),
)


def fitted_table(before: Review, after: Review) -> Table:
    """Return, position by position, what the chosen parts change."""
    rows = []
    for old in before.circuit.positions:
        if old.name not in before.replacements:
            continue
        new, worst = after.circuit.position(old.name), after.worst.get(old.name)
        rows.append(
            (
                Cell(plain(old.name)),
                Cell(plain(marked(old))),
                Cell(plain(marked(new))),
                number(worst.worst_V if worst else None, "V"),
                _margin(before, old.name, old.rated_V),
                _margin(after, old.name, new.rated_V),
                _damage(after, old.name),
            )
        )
    return Table("fitted", COLUMNS, tuple(rows))


def order_changes(before: Sequence[Risk], after: Sequence[Risk]) -> Iterator[tuple[str, str]]:
    """Yield each position whose place in the order of work is another, and how it changed."""
    places = {risk.position: (risk.rank, risk.severity) for risk in before}
    for risk in after:
        old = places.get(risk.position)
        if old == (risk.rank, risk.severity):
            continue
        was = f"was {old[0]} ({old[1]})" if old is not None else "was not ranked"
        yield risk.position, f"now {risk.rank} ({risk.severity}), {was}: {risk.reason}"


def step_changes(before: Review, after: Review) -> Iterator[tuple[str, tuple[Step, ...]]]:
    """Yield what is new among the steps, and what is gone; a step is known by place and rule."""
    old = {(step.where, step.rule): step for step in order_of_work(before)}
    new = {(step.where, step.rule): step for step in order_of_work(after)}
    for heading, steps in (
        ("New findings", [step for key, step in new.items() if key not in old]),
        ("No longer found", [step for key, step in old.items() if key not in new]),
    ):
        if steps:
            yield heading, tuple(steps)


def _margin(review: Review, name: str, rated_V: float | None) -> Cell:
    worst = review.worst.get(name)
    if worst is None or not rated_V:
        return Cell(NOT_KNOWN)
    share = (rated_V - worst.worst_V) / rated_V
    return Cell(f"{100.0 * share:.0f} %", share)


def _damage(review: Review, name: str) -> Cell:
    leak = review.leakage.get(name)
    if leak is None or leak.governing is None:
        return Cell("not studied")
    return number(leak.governing.critical_ohm, "ohm", missing="no damage")

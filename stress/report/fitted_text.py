"""Before and after: the equipment with the chosen parts in place."""

from __future__ import annotations

from rich.box import SIMPLE_HEAD
from rich.console import Console
from rich.table import Table
from rich.text import Text

from stress.report.bench_text import print_change
from stress.report.words import NOT_KNOWN, amount, marked, plain
from stress.study.result import LeakageIn, Review
from stress.text.figure import figure

TITLE = "With the chosen parts in place"


def print_fitted(before: Review, after: Review, console: Console) -> None:
    """Print, position by position, what the chosen parts change, then the order of work."""
    console.print()
    console.print(Text(TITLE, style="bold"))
    table = Table(box=SIMPLE_HEAD, padding=(0, 1, 0, 0), pad_edge=False)
    table.add_column("part")
    table.add_column("was")
    table.add_column("fitted")
    table.add_column("worst then", justify="right")
    table.add_column("margin was", justify="right")
    table.add_column("margin is", justify="right")
    table.add_column("damage below", justify="right")
    for old in before.circuit.positions:
        if old.name not in before.replacements:
            continue
        new = after.circuit.position(old.name)
        worst = after.worst.get(old.name)
        table.add_row(
            Text(plain(old.name)),
            Text(plain(marked(old))),
            Text(plain(marked(new))),
            amount(worst.worst_V if worst else None, "V"),
            _margin(before, old.name, old.rated_V),
            _margin(after, old.name, new.rated_V),
            _damage(after, old.name),
        )
    console.print(table)
    print_change(before, after, console, title="What that changes in the order of work")


def _margin(review: Review, name: str, rated_V: float | None) -> str:
    worst = review.worst.get(name)
    if worst is None or not rated_V:
        return NOT_KNOWN
    return f"{100.0 * (rated_V - worst.worst_V) / rated_V:.0f} %"


def _damage(review: Review, name: str) -> str:
    leak = review.leakage.get(name)
    found: LeakageIn | None = leak.governing if leak is not None else None
    if found is None:
        return "not studied"
    return "no damage" if found.critical_ohm is None else figure(found.critical_ohm, "ohm")

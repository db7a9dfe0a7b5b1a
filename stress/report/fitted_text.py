"""Before and after on the terminal: the equipment with the chosen parts in place."""

from __future__ import annotations

from rich.box import SIMPLE_HEAD
from rich.console import Console
from rich.table import Table
from rich.text import Text

from stress.report.bench_text import print_change
from stress.report.change import fitted_table
from stress.study.result import Review

TITLE = "With the chosen parts in place"


def print_fitted(before: Review, after: Review, console: Console) -> None:
    """Print, position by position, what the chosen parts change, then the order of work."""
    console.print()
    console.print(Text(TITLE, style="bold"))
    found = fitted_table(before, after)
    table = Table(box=SIMPLE_HEAD, padding=(0, 1, 0, 0), pad_edge=False)
    for column in found.columns:
        table.add_column(column.title, justify="right" if column.number else "left")
    for row in found.rows:
        table.add_row(*(Text(cell.text) for cell in row))
    console.print(table)
    print_change(before, after, console, title="What that changes in the order of work")

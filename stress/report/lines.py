"""Paragraphs and plain tables on a terminal or in a pipe."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from rich.box import SIMPLE_HEAD
from rich.console import Console
from rich.table import Table
from rich.text import Text

from stress.report.words import encodable, plain

LEAST_ROOM = 20


class Lines:
    """Writes without markup, without control characters, in letters that the channel has."""

    def __init__(self, console: Console) -> None:
        self.console = console

    def text(self, text: str, *, bold: bool = False) -> Text:
        """Return text as it can be shown."""
        return Text(encodable(plain(text), self.console.encoding), style="bold" if bold else "")

    def line(self, text: str = "", *, first: str = "", indent: int = 0, bold: bool = False) -> None:
        """Print a paragraph; `first` stands in the indentation of its first line."""
        room = max(self.console.width - indent, LEAST_ROOM)
        for number, line in enumerate(self.text(text, bold=bold).wrap(self.console, room)):
            line.rstrip()
            before = self.text((first if number == 0 else "").ljust(indent))
            self.console.print(before.append_text(line), highlight=False, no_wrap=True)

    def heading(self, text: str) -> None:
        """Print a heading after an empty line."""
        self.console.print()
        self.line(text, bold=True)

    def items(self, texts: Iterable[str], *, numbered: bool = False) -> None:
        """Print one paragraph an item."""
        for number, text in enumerate(texts, 1):
            self.line(text, first=f"{number:>3}." if numbered else "  -", indent=5)

    def table(self, titles: Sequence[str], rows: Iterable[Sequence[str]], *, left: int = 1) -> None:
        """Print a table whose first `left` columns are words and the others numbers."""
        grid = Table(box=SIMPLE_HEAD, padding=(0, 1, 0, 0), pad_edge=False, show_edge=False)
        for index, title in enumerate(titles):
            grid.add_column(
                title,
                justify="left" if index < left else "right",
                overflow="fold",
                header_style="bold",
            )
        for row in rows:
            grid.add_row(*(self.text(cell) for cell in row))
        self.console.print(grid, highlight=False)

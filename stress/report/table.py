"""What a table is: columns, and cells that hold both the words and the number behind them."""

from __future__ import annotations

from dataclasses import dataclass

from stress.report import words
from stress.report.words import amount

NARROW, WIDE, PAGE, FILE = "narrow", "wide", "page", "file"
SHOWN = frozenset({NARROW, WIDE, PAGE})
BROAD = frozenset({WIDE, PAGE})
EVERYWHERE = SHOWN | {FILE}
BUT_NARROW = BROAD | {FILE}


@dataclass(frozen=True, slots=True)
class Column:
    """One column: `key` heads it in CSV files, `title` elsewhere; `places` is where it shows."""

    key: str
    title: str
    number: bool = False
    places: frozenset[str] = EVERYWHERE


@dataclass(frozen=True, slots=True)
class Cell:
    """What people read, and the same as the SI number (or text) for files and sorting."""

    text: str
    value: float | str | None = None

    @property
    def written(self) -> str:
        """As it stands in a CSV file: the number unrounded, else the words."""
        return str(self.value) if isinstance(self.value, int | float) else self.text


@dataclass(frozen=True, slots=True)
class Table:
    """Rows of as many cells as there are columns."""

    name: str
    columns: tuple[Column, ...]
    rows: tuple[tuple[Cell, ...], ...]

    def __post_init__(self) -> None:
        if any(len(row) != len(self.columns) for row in self.rows):
            raise ValueError(f"a row of the table of {self.name} does not fit its columns")

    def place(self, place: str) -> Table:
        """Return the table with the columns that show in one place."""
        kept = [i for i, column in enumerate(self.columns) if place in column.places]
        return Table(
            self.name,
            tuple(self.columns[i] for i in kept),
            tuple(tuple(row[i] for i in kept) for row in self.rows),
        )


def number(value: float | None, unit: str, *, missing: str = words.NOT_KNOWN) -> Cell:
    """Return a cell for a value in its SI unit, or for the word that says why there is none."""
    return Cell(amount(value, unit, missing=missing), value)

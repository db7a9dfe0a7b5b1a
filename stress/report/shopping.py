"""The shopping list as a table."""

from __future__ import annotations

from stress.report import words
from stress.report.table import Cell, Column, Table, number
from stress.study import shopping
from stress.study.result import Review
from stress.text.figure import figure

COLUMNS = (
    Column("quantity", "how many", number=True),
    Column("value_F", "value", number=True),
    Column("rated_V", "rated", number=True),
    Column("style", "style"),
    Column("ripple_rms_A", "ripple", number=True),
    Column("ripple_Hz", "at", number=True),
    Column("positions", "for"),
    Column("remarks", "remarks"),
)


def shopping_list(review: Review) -> Table:
    """Return what to buy if every position gets its proposed part."""
    listed = shopping.rows(review.replacements, circuit=review.circuit)
    return Table("shopping", COLUMNS, tuple(_row(each) for each in listed))


def _row(of: shopping.Row) -> tuple[Cell, ...]:
    value = " + ".join(figure(farads, "F") for farads in of.value_F)
    rated = number(of.rated_V, "V")
    if of.safety_class and of.rated_V is not None:
        rated = Cell(f"{rated.text} AC", of.rated_V)
    style = of.style if of.safety_class is None else f"{of.style}, class {of.safety_class}"
    return (
        Cell(str(of.quantity), of.quantity),
        Cell(value, of.value_F[0] if len(of.value_F) == 1 else None),
        rated,
        Cell(style),
        number(of.ripple_rms_A, "A", missing="no demand"),
        number(of.ripple_Hz, "Hz", missing="no demand"),
        Cell(" ".join(words.plain(name) for name in of.designators)),
        Cell(of.remarks or "none"),
    )

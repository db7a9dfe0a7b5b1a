"""The cells of a type table: words, flags, quantities with source and rating system."""

from __future__ import annotations

import re
from typing import Any

from stress.parts.limit import Rating
from stress.parts.type import MARKS, Source
from stress.text.quantity import quantity

FAMILIES = (
    "triode",
    "double triode",
    "pentode",
    "beam tube",
    "converter",
    "diode-triode",
    "diode-pentode",
    "triode-pentode",
    "triode-converter",
    "double diode",
    "rectifier",
    "silicon rectifier",
    "selenium stack",
    "silicon diode",
    "germanium diode",
    "germanium transistor",
    "silicon transistor",
)
_MARKED = re.compile(r"(?P<text>.*?)\s*\[(?P<mark>[^\][]+)\]\s*\Z", re.DOTALL)


def marked(text: str) -> Source:
    """Split "RCA RC-19 [memory H]".

    Raises:
        ValueError: When the mark is missing or unknown.
    """
    match = _MARKED.match(text)
    if match is None or match["mark"] not in MARKS:
        raise ValueError(f'"{text}" does not end in a mark: [' + "] [".join(MARKS) + "]")
    return Source(match["text"], match["mark"])


def text(cell: Any) -> str:
    """Return a string, or what else stands there as text, which no unit reader accepts."""
    return cell if isinstance(cell, str) else repr(cell)


def family(cell: Any) -> str:
    """Return a family of `FAMILIES`.

    Raises:
        ValueError: The cell is none.
    """
    if cell not in FAMILIES:
        raise ValueError(f"{cell!r} is no family; one of: {', '.join(FAMILIES)}")
    return str(cell)


def string(cell: Any) -> str:
    """Return a text.

    Raises:
        ValueError: The cell is none.
    """
    if not isinstance(cell, str):
        raise ValueError(f"{cell!r} is no text")
    return cell


def strings(cell: Any) -> tuple[str, ...]:
    """Return a list of names.

    Raises:
        ValueError: The cell is none.
    """
    if not isinstance(cell, list) or not all(isinstance(part, str) for part in cell):
        raise ValueError(f"{cell!r} is no list of names")
    return tuple(cell)


def flag(cell: Any) -> bool:
    """Return true or false.

    Raises:
        ValueError: The cell is none.
    """
    if not isinstance(cell, bool):
        raise ValueError(f"{cell!r} is neither true nor false")
    return cell


def count(cell: Any) -> int:
    """Return 0, 1 or 2.

    Raises:
        ValueError: The cell is none.
    """
    if not isinstance(cell, int) or isinstance(cell, bool) or not 0 <= cell <= 2:
        raise ValueError(f"{cell!r} is not 0, 1 or 2")
    return cell


def ratio(cell: Any) -> float:
    """Return a positive number without unit.

    Raises:
        ValueError: The cell is none.
    """
    if not isinstance(cell, int | float) or isinstance(cell, bool) or not 0 < cell < 1e6:
        raise ValueError(f"{cell!r} is no positive number")
    return float(cell)


def source_of(cell: Any) -> Source:
    """Return a source with its mark.

    Raises:
        ValueError: The cell is none.
    """
    return marked(string(cell))


def rating_system(cell: Any) -> Rating:
    """Return a rating system.

    Raises:
        ValueError: The cell is none.
    """
    if cell not in list(Rating):
        raise ValueError(f"{cell!r} is no rating system; one of: {', '.join(Rating)}")
    return Rating(cell)


def positive(text: str, unit: str) -> float:
    """Return a quantity that is more than nothing.

    Raises:
        ValueError: When it is not.
    """
    value = quantity(text, unit)
    if value <= 0:
        raise ValueError(f'"{text}" is not more than nothing')
    return value


def conductance(text: str, unit: str) -> float:
    """Return a transconductance such as "4.1 mA/V" without waking pint up.

    Raises:
        ValueError: When it is none.
    """
    if not text.endswith("/V"):
        raise ValueError(f'"{text}" is no transconductance: write 4.1 mA/V')
    return quantity(text.removesuffix("/V"), unit)


def parts(cell: Any, default: Source | None, rating: Rating) -> tuple[str, Source, Rating]:
    """Return quantity, source and rating system of a cell: "5 V" or ["5 V", source, rating].

    Raises:
        ValueError: When it is neither, or has no source.
    """
    cells = [cell] if isinstance(cell, str) else cell
    if not isinstance(cells, list) or not 1 <= len(cells) <= 3:
        raise ValueError(f'{cell!r} is neither "5 V" nor ["5 V", "source [mark]", "rating"]')
    words = [string(part) for part in cells]
    source = marked(words[1]) if len(words) > 1 else default
    if source is None:
        raise ValueError(f'"{words[0]}" has no source, nor has its entry')
    return words[0], source, rating_system(words[2]) if len(words) > 2 else rating

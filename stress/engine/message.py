"""What ngspice prints, sorted into notes, warnings and failures.

Return codes tell nothing of most failures, and harmless progress is printed where errors are,
so every line is judged by its text; a line that no row knows counts as a warning.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from enum import StrEnum


class Weight(StrEnum):
    """How much a line matters."""

    NOTE = "note"
    WARNING = "warning"
    FAILURE = "failure"


# First match decides; failures stand before notes, so that none can hide one.
_TABLE: tuple[tuple[Weight, re.Pattern[str]], ...] = tuple(
    (weight, re.compile(pattern, re.IGNORECASE))
    for weight, pattern in (
        # Printed for one try of a step; the step is cut and tried again.
        (Weight.WARNING, r"out of range for"),
        (Weight.FAILURE, r"simulation\(s\) aborted"),
        (Weight.FAILURE, r"time ?step too small"),
        (Weight.FAILURE, r"transient op failed"),
        (Weight.FAILURE, r"circuit not parsed"),
        (Weight.FAILURE, r"no\. of data rows\s*:\s*0\b"),
        (Weight.FAILURE, r"no simulations run"),
        (Weight.FAILURE, r"no circuit loaded|there is no circuit"),
        (Weight.FAILURE, r"source stepping failed"),
        (Weight.FAILURE, r"iteration limit reached"),
        (Weight.FAILURE, r"^\s*(fatal\s+)?error\b|\berror on line\b|: error\b"),
        (Weight.FAILURE, r"unknown (subckt|device|model|parameter)|can't find model"),
        (Weight.FAILURE, r"no such (device|vector|parameter|command)"),
        (Weight.NOTE, r"^\s*$"),
        (Weight.NOTE, r"^\s*note\b|^\s*\*|^\s*-+\s*$"),
        (Weight.NOTE, r"^\s*circuit:|^\s*doing analysis at|^\s*using sparse|^\s*using klu"),
        (Weight.NOTE, r"^\s*(initial transient solution|node\s+voltage|no\. of data rows)"),
        (Weight.NOTE, r"gmin stepping|source stepping|dynamic gmin|true gmin"),
        (Weight.NOTE, r"^\s*reducing trtol|reset re-?loads|dc value used for op"),
        (Weight.WARNING, r"^\s*warning\b|singular matrix|ignored"),
    )
)


def weigh(line: str) -> Weight:
    """Return how much a line printed by ngspice matters."""
    for weight, pattern in _TABLE:
        if pattern.search(line):
            return weight
    return Weight.WARNING


def failures(lines: Iterable[str]) -> tuple[str, ...]:
    """Return the lines that tell of a failure, without repetitions, in order."""
    return tuple(dict.fromkeys(line.strip() for line in lines if weigh(line) is Weight.FAILURE))


def reason(lines: Iterable[str]) -> str:
    """Return the most telling text of what was printed, at most 300 characters; may be ""."""
    kept = [line.strip() for line in lines if line.strip()]
    grave = failures(kept)
    warnings = tuple(dict.fromkeys(line for line in kept if weigh(line) is Weight.WARNING))
    return "; ".join((*grave, *warnings))[:300]

"""What the user must know: text, place, severity, case, and the rule it rests on."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from stress.text.span import Span


class Severity(StrEnum):
    """What a finding asks for, the most urgent first."""

    REPLACE = "replace-before-power"
    TEST = "test-before-power"
    WATCH = "watch"
    NOTE = "note"

    @property
    def rank(self) -> int:
        """0 for the most urgent."""
        return list(Severity).index(self)


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One thing the user must know.

    Attributes:
        severity: What it asks for.
        where: The position or part it is about ("C5", "XU2"), or "equipment".
        text: The finding in one or two sentences, with its numbers.
        action: What to do, or "" where the text says it.
        condition: The condition or case it was seen in, or None.
        rule: Short name of the rule it rests on, stable, such as "design-centre-limit".
        span: The place in the netlist or sheet, where there is one.
    """

    severity: Severity
    where: str
    text: str
    action: str = ""
    condition: str | None = None
    rule: str = ""
    span: Span | None = None

"""The order of work: findings and ranked positions in one list."""

from __future__ import annotations

from dataclasses import dataclass

from stress.finding import Severity
from stress.report import words
from stress.study.result import Review


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One thing to do or to know.

    Attributes:
        severity: What it asks for.
        rank: Place in the order of work, or None where it is about no ranked position.
        where: Position, part or "equipment".
        text: What and why, with its numbers.
        rule: Short name of the rule it rests on, or "".
    """

    severity: Severity
    rank: int | None
    where: str
    text: str
    rule: str = ""

    @property
    def mark(self) -> str:
        """The rank as it is printed, or a dash."""
        return "-" if self.rank is None else f"{self.rank}."


def order_of_work(review: Review) -> tuple[Step, ...]:
    """Return all steps: by severity, equipment as a whole first, then by rank.

    A ranked position that no finding of its severity speaks of stands there with the reason
    of its rank, so that nothing that has to be done before power is left out.
    """
    ranks = {risk.position: risk.rank for risk in review.risks}
    steps = [
        Step(
            severity=each.severity,
            rank=ranks.get(each.where),
            where=each.where,
            text=words.joined(each.text, each.action),
            rule=each.rule,
        )
        for each in review.findings
    ]
    told = {(each.severity, each.where) for each in steps}
    steps += [
        Step(severity=risk.severity, rank=risk.rank, where=risk.position, text=risk.reason)
        for risk in review.risks
        if (risk.severity, risk.position) not in told
        and risk.severity in (Severity.REPLACE, Severity.TEST)
    ]
    return tuple(sorted(steps, key=lambda step: (step.severity.rank, step.rank or 0)))

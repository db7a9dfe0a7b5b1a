"""What readings change: the order of work, and what the equipment bears as it is."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, replace

from stress.circuit.circuit import Circuit
from stress.finding import Severity
from stress.judge.verdict import Advice, Verdict
from stress.study import conditions as stock
from stress.study.limits import limits
from stress.study.result import Risk, Victim, Working
from stress.text.unit import unit

# What a verdict makes of the likelihood of a fault (common practice): a part that was found bad
# is bad; one that was found good at its voltage is hardly ever.
BAD, SUSPECT, WATCHED, GOOD = 1.0, 0.5, 0.2, 0.05
MOVED_SHARE, MOVED_V = 0.05, 1.0  # a voltage that moved by both is worth a line


# With tubes cold or pulled more moves, which helps nobody to find what is wrong.
SHOWN = (stock.NOMINAL, stock.HIGH, stock.DRIVEN)


@dataclass(frozen=True, slots=True, kw_only=True)
class Moved:
    """A voltage of the healthy equipment that is another one as measured."""

    position: str
    condition: str
    drawn_V: float = field(metadata=unit("V"))
    measured_V: float = field(metadata=unit("V"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Past:
    """A part that is past a limit in the equipment as measured, nothing else being wrong.

    Attributes:
        victim: With `healthy` as drawn.
        drawn: Whether it was past it as drawn already.
    """

    condition: str
    victim: Victim
    drawn: bool


def order(risks: Sequence[Risk], verdicts: Iterable[Verdict]) -> tuple[Risk, ...]:
    """Return the order of work with what the readings tell.

    What a fault does stays as it was found in the equipment as drawn; how likely it is, is known
    now. A part that reads bad goes to the front where it can do harm; one that reads good goes
    back; what was not measured, or not at its voltage, stays where it was.

    Args:
        risks: Of the equipment as drawn.
        verdicts: Of the positions that were measured.
    """
    known = {verdict.position: verdict for verdict in verdicts}
    judged = [
        _judged(risk, known[risk.position]) if risk.position in known else risk for risk in risks
    ]
    ranked = sorted(
        judged,
        key=lambda risk: (risk.severity.rank, -risk.consequence * risk.likelihood, risk.rank),
    )
    return tuple(replace(risk, rank=rank) for rank, risk in enumerate(ranked, start=1))


def _judged(risk: Risk, verdict: Verdict) -> Risk:
    harmful = risk.severity.rank <= Severity.TEST.rank
    told = f"{verdict}; {risk.reason}"
    match verdict.advice:
        case Advice.REPLACE:
            severity = Severity.REPLACE if harmful else Severity.WATCH
            return replace(risk, severity=severity, reason=told, likelihood=BAD)
        case Advice.FORM:
            severity = Severity.TEST if harmful else Severity.WATCH
            return replace(risk, severity=severity, reason=told, likelihood=SUSPECT)
        case Advice.AGAIN:
            return replace(risk, reason=told)
        case Advice.WATCH:
            severity = Severity.WATCH if harmful else risk.severity
            return replace(risk, severity=severity, reason=told, likelihood=WATCHED)
        case Advice.KEEP:
            severity = Severity.NOTE if risk.severity is Severity.NOTE else Severity.WATCH
            return replace(risk, severity=severity, reason=told, likelihood=GOOD)


def moved(circuit: Circuit, *, drawn: Working, measured: Working) -> tuple[Moved, ...]:
    """Return the mean voltages of positions that are others as measured, in netlist order."""
    found = []
    for position in circuit.positions:
        for name, before in drawn.positions.get(position.name, {}).items():
            after = measured.positions.get(position.name, {}).get(name)
            if name not in SHOWN:
                continue
            if after is None:
                continue
            change = abs(after.dc_V - before.dc_V)
            if change > MOVED_V and change > MOVED_SHARE * abs(before.dc_V):
                found.append(
                    Moved(
                        position=position.name,
                        condition=name,
                        drawn_V=before.dc_V,
                        measured_V=after.dc_V,
                    )
                )
    return tuple(found)


def past(circuit: Circuit, *, drawn: Working, measured: Working) -> tuple[Past, ...]:
    """Return every part past a stated limit as measured, condition by condition.

    Args:
        circuit: As measured.
        drawn, measured: What its parts bear.
    """
    found = []
    for condition in measured.conditions:
        if condition.name not in SHOWN:
            continue
        judged = limits(circuit, condition=condition)
        for part, by_condition in measured.parts.items():
            for name, limit in judged.get(part, {}).items():
                stress = by_condition.get(condition.name, {}).get(name)
                if limit.assumed or stress is None or stress <= limit.value:
                    continue
                before = drawn.parts.get(part, {}).get(condition.name, {}).get(name)
                victim = Victim(
                    part=part, quantity=name, stress=stress, limit=limit, healthy=before
                )
                found.append(
                    Past(
                        condition=condition.name,
                        victim=victim,
                        drawn=before is not None and before > limit.value,
                    )
                )
    return tuple(found)

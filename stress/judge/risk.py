"""The order of work: consequence times likelihood, both shown.

Consequence: what the worst victim is (how hard it is to buy again) times how far it is driven
past its limit. Likelihood: the share of parts of this style and age found with the fault, times
how small a leak is enough. Both tables are common practice, an order for ranking and no
statistics; the sheet can weigh styles otherwise (`[likelihood]`).
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from math import log2, log10

from stress.circuit.circuit import Circuit, Kind, Position
from stress.finding import Severity
from stress.study.failures import NOT_LIMITED, describe
from stress.study.likelihood import likelihood
from stress.study.result import Failure, Leakage, Risk, Victim, Worst
from stress.study.unjudged import Unjudged
from stress.text.figure import figure

# How hard the victim is to replace; common practice.
WEIGHT = {
    Kind.TUBE: 5.0,
    Kind.RECTIFIER: 5.0,
    Kind.WINDING: 8.0,
    Kind.TRANSISTOR: 4.0,
    Kind.LOUDSPEAKER: 8.0,
    Kind.CONTROL: 3.0,
    Kind.DIODE: 2.0,
    Kind.RESISTOR: 1.5,
    Kind.FUSE: 0.5,
}
IRREPLACEABLE = 12.0
OTHER_POSITION = 2.0
FIRE = 6.0  # a fault that only the fuse or the wiring limits
PERSON = 20.0  # a line capacitor whose fault makes touchable metal live
ONLY_FUNCTION = 0.5
LIKELY = 0.3  # share of parts from which a leak must be taken as given
SEVERE = 10.0  # times its healthy stress, for a part whose limit is not known (common practice)
POSSIBLE = 0.02
SURE_OHM = 1e5  # a leak that needs less resistance than this is a short, not a leak
TOUCHABLE_RULE = "class-y"  # of stress.circuit.hazards


@dataclass(frozen=True, slots=True, kw_only=True)
class Threat:
    """One way a position can do harm."""

    text: str
    consequence: float
    likelihood: float
    severity: Severity

    @property
    def score(self) -> float:
        """Consequence times likelihood."""
        return self.consequence * self.likelihood


def risks(
    circuit: Circuit,
    *,
    worst: Mapping[str, Worst],
    leakage: Mapping[str, Leakage],
    failures: Mapping[str, tuple[Failure, ...]],
) -> tuple[Risk, ...]:
    """Return every position in the order of work: by severity, then by score, then by name."""
    judged = []
    for position in circuit.positions:
        threats = [
            *_seen(circuit, position),
            *_rating(position, worst.get(position.name)),
            *_leak(circuit, position, leakage.get(position.name)),
            *_failures(circuit, position, failures.get(position.name, ())),
        ]
        threats.sort(key=lambda t: (t.severity.rank, -t.score, t.text))
        judged.append((position, threats))
    judged.sort(
        key=lambda pair: (
            pair[1][0].severity.rank if pair[1] else Severity.NOTE.rank,
            -max((t.score for t in pair[1]), default=0.0),
        )
    )
    return tuple(
        _risk(position, rank, threats) for rank, (position, threats) in enumerate(judged, start=1)
    )


def _risk(position: Position, rank: int, threats: list[Threat]) -> Risk:
    if not threats:
        reason = "nothing known is harmed whatever fails here"
        return Risk(position=position.name, rank=rank, severity=Severity.NOTE, reason=reason)
    first = threats[0]
    worst = max(threats, key=lambda t: t.score)
    return Risk(
        position=position.name,
        rank=rank,
        severity=first.severity,
        reason=first.text,
        consequence=worst.consequence,
        likelihood=worst.likelihood,
    )


def _seen(circuit: Circuit, position: Position) -> Iterator[Threat]:
    """What the circuit shows without solving: a plain part at the line, one fitted backwards."""
    share = max(likelihood(circuit, position, "leaky"), likelihood(circuit, position, "short"))
    for finding in circuit.findings:
        if finding.where != position.name or finding.severity.rank > Severity.TEST.rank:
            continue
        person = finding.rule == TOUCHABLE_RULE
        yield Threat(
            text=finding.text,
            consequence=PERSON if person else FIRE,
            likelihood=share,
            severity=finding.severity,
        )


def _rating(position: Position, worst: Worst | None) -> Iterator[Threat]:
    if worst is None or position.rated_V is None:
        return
    rated = position.rated_V
    if worst.worst_V > rated:
        yield Threat(
            text=(
                f"it bears {figure(worst.worst_V, 'V')} ({worst.condition}), "
                f"rated {figure(rated, 'V')}"
            ),
            consequence=OTHER_POSITION * worst.worst_V / rated,
            likelihood=1.0,
            severity=Severity.REPLACE,
        )
    surge = position.style.surge_V(rated)
    if worst.brief_V is not None and worst.brief_V > surge and worst.worst_V <= rated:
        yield Threat(
            text=(
                f"it bears {figure(worst.brief_V, 'V')} for a while ({worst.brief_condition}), "
                f"more than the {figure(surge, 'V')} it stands briefly"
            ),
            consequence=OTHER_POSITION * worst.brief_V / surge,
            likelihood=0.5,
            severity=Severity.TEST,
        )
    reverse = position.style.reverse_V(rated)
    law = position.style.reverse
    turned = worst.reverse_V or 0.0
    if law is not None and reverse is not None and turned > reverse:
        yield Threat(
            text=(
                f"it is driven {figure(turned, 'V')} the wrong way round "
                f"({worst.reverse_condition}), it stands {figure(reverse, 'V')} ({law.source})"
            ),
            consequence=OTHER_POSITION,
            likelihood=0.5,
            severity=Severity.TEST,
        )


def _leak(circuit: Circuit, position: Position, leakage: Leakage | None) -> Iterator[Threat]:
    found = leakage.governing if leakage is not None else None
    if found is None:
        return
    share = likelihood(circuit, position, "leaky")
    if found.critical_ohm is not None and found.victim is not None:
        enough = _small_leak(found.critical_ohm)
        likely = share >= LIKELY and found.critical_ohm > SURE_OHM
        possible = share * enough >= POSSIBLE
        severity = Severity.WATCH
        if likely:
            severity = Severity.REPLACE
        elif possible:
            severity = Severity.TEST
        yield Threat(
            text=_leak_text(found.critical_ohm, found.victim, found.functional_ohm, found.always),
            consequence=consequence(circuit, found.victim),
            likelihood=share * enough,
            severity=severity,
        )
    elif found.functional_ohm is not None:
        yield Threat(
            text=(
                f"from {figure(found.functional_ohm, 'ohm')} of leakage on, "
                f"{found.functional_reason}; no known limit is passed"
            ),
            consequence=ONLY_FUNCTION,
            likelihood=share * _small_leak(found.functional_ohm),
            severity=Severity.WATCH,
        )


def _leak_text(critical: float, victim: Victim, functional: float | None, always: bool) -> str:
    if always:
        return f"as it stands its leakage already takes {describe(victim)}"
    text = f"below {figure(critical, 'ohm')} of leakage {describe(victim)}"
    if functional is not None and functional > critical:
        text += f"; the equipment is off its working point from {figure(functional, 'ohm')} on"
    return text


def _small_leak(ohm: float) -> float:
    """Return how much of the likelihood of leaking counts: 1 from 10 MΩ up, a tenth below 1 kΩ."""
    return min(max((log10(max(ohm, 1.0)) - 3.0) / 4.0, 0.1), 1.0)


def consequence(circuit: Circuit, victim: Victim) -> float:
    """Return the weight of a victim times 1 to 3 by how far it is past its limit."""
    past = 1.0 + min(max(log2(victim.stress / victim.limit.value), 0.0), 2.0)
    for part in circuit.parts:
        if part.name == victim.part:
            return past * (IRREPLACEABLE if part.irreplaceable else WEIGHT[part.kind])
    return past * OTHER_POSITION


def _severe(strain: Unjudged) -> bool:
    """Whether a stress grows so far that hardly any part would have the margin."""
    return strain.stress > SEVERE * strain.healthy


def _failures(
    circuit: Circuit, position: Position, failures: tuple[Failure, ...]
) -> Iterator[Threat]:
    for failure in failures:
        fault = failure.fault if failure.fault != "low" else "dried"
        share = likelihood(circuit, position, fault)
        known = [v for v in failure.victims if not v.limit.assumed]
        if known:
            victim = max(known, key=lambda v: consequence(circuit, v))
            yield Threat(
                text=f"{failure.fault}: {describe(victim)}",
                consequence=consequence(circuit, victim),
                likelihood=share,
                severity=Severity.TEST if share >= POSSIBLE else Severity.WATCH,
            )
        elif failure.unanswered is not None and failure.unanswered.text == NOT_LIMITED:
            yield Threat(
                text=f"{failure.fault}: {NOT_LIMITED}",
                consequence=FIRE,
                likelihood=share,
                severity=Severity.TEST if share >= POSSIBLE else Severity.WATCH,
            )
        elif failure.unjudged and _severe(failure.unjudged[0]):
            first = failure.unjudged[0]
            kinds = {part.name: part.kind for part in circuit.parts}
            yield Threat(
                text=f"{failure.fault}: {first.risen}, its limit is not known",
                consequence=WEIGHT[kinds[first.part]],
                likelihood=share,
                severity=Severity.TEST if share >= POSSIBLE else Severity.WATCH,
            )
        elif failure.consequences:
            yield Threat(
                text=f"{failure.fault}: {failure.consequences[0]}",
                consequence=ONLY_FUNCTION,
                likelihood=share,
                severity=Severity.WATCH,
            )

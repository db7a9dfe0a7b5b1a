"""At which reading the work stops: as few readings as catch every fault that shows."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from math import inf

from stress.study.power_result import Abort, Band, Probe, Ramp, RampStep, Seen, Step

SURE, LEAST = 0.5, 0.05  # beyond the band, in half widths of the band


@dataclass(frozen=True, slots=True)
class Shown:
    """How far one fault drives one reading out of its band, in half widths."""

    probe: Probe
    above: bool
    fault: str
    beyond: float


def shown(seen: Seen, step: RampStep, probes: Iterable[Probe]) -> list[Shown]:
    """Return the readings that leave their band with a fault."""
    found = []
    for probe in probes:
        band = step.band(probe.key)
        value = seen.values.get(probe.key)
        if band is None or value is None:
            continue
        width = (band.high - band.low) / 2.0 if band.high < inf else band.low
        over = max(value - band.high, band.low - value) / width
        if over > LEAST:
            found.append(Shown(probe, value > band.high, str(seen.danger.fault), over))
    return found


def aborts(step: RampStep, probes: tuple[Probe, ...]) -> tuple[Abort, ...]:
    """Return the fewest readings that catch every fault that any reading shows.

    Greedily: the reading that catches most of what is left and is easiest to take. A fault
    counts as caught where its reading is half a band beyond it; where none is, the one that goes
    furthest is taken.
    """
    by_fault = {str(s.danger.fault): shown(s, step, probes) for s in step.seen}
    by_fault = {fault: found for fault, found in by_fault.items() if found}
    good = {
        fault: [s for s in found if s.beyond >= min(SURE, max(x.beyond for x in found))]
        for fault, found in by_fault.items()
    }
    chosen: dict[tuple[str, bool], list[str]] = {}
    order = {(s.probe.key, s.above): s.probe for found in good.values() for s in found}
    left = set(good)
    while left:
        best = max(
            order,
            key=lambda key: (
                sum(any((s.probe.key, s.above) == key for s in good[f]) for f in left),
                -order[key].effort,
                sum(s.beyond for f in left for s in good[f] if (s.probe.key, s.above) == key),
            ),
        )
        caught = {f for f in left if any((s.probe.key, s.above) == best for s in good[f])}
        chosen[best] = sorted(caught)
        left -= caught
    return tuple(
        Abort(probe=key, above=above, limit=_limit(step.band(key), above), tells=tuple(tells))
        for (key, above), tells in chosen.items()
    )


def _limit(band: Band | None, above: bool) -> float:
    assert band is not None
    return (band.high if above else band.low) * band.loading


def steps(ramp: Ramp) -> tuple[Step, ...]:
    """Return the steps of the plan with their abort readings and what each cannot tell.

    A step without faults of its own, the highest line, is stopped by the readings of the one
    before it, at its own limits.
    """
    found: list[Step] = []
    caught: set[str] = set()
    everything = tuple(dict.fromkeys(str(d.fault) for d in ramp.dangers))
    for step in ramp.steps:
        if step.seen or not found:
            stops = aborts(step, ramp.probes)
        else:
            stops = tuple(
                replace(stop, limit=_limit(band, stop.above))
                for stop in found[-1].aborts
                if (band := step.band(stop.probe)) is not None
            )
        now = {fault for stop in stops for fault in stop.tells}
        damaged = {str(s.danger.fault) for s in step.seen if s.victims}
        found.append(
            Step(
                ramp=step,
                text=_first(step, found[-1].ramp if found else None),
                aborts=stops,
                cannot_tell=tuple(f for f in everything if f not in now and f not in caught),
                late=tuple(sorted((now & damaged) - caught)),
            )
        )
        caught |= now
    return tuple(found)


def _first(step: RampStep, before: RampStep | None) -> str:
    """Return what wakes up at this step."""
    was = before.emission if before is not None else {}
    waking = [n for n, e in step.emission.items() if e > 0.0 and not was.get(n)]
    full = [n for n, e in step.emission.items() if e == 1.0 and was.get(n, 0.0) < 1.0]
    partly = [name for name in waking if name not in full]
    words = []
    if partly:
        words.append(f"{', '.join(partly)} {'begins' if len(partly) == 1 else 'begin'} to conduct")
    if full:
        words.append(f"{', '.join(full)} at full emission")
    if step.share and step.emission and not any(step.emission.values()):
        words.append("no tube conducts yet")
    return "; ".join(words)

"""For a dangerous position the one or two readings that tell best whether it is healthy."""

from __future__ import annotations

from math import inf

from stress.study.power_result import Band, Danger, Probe, Ramp, RampStep, TellTale

MOST = 2
EASE = 3.0  # a reading that needs one more grade of opening must tell this many times better
CLEAR = 0.05  # beyond the band, in half widths


def tell_tales(ramp: Ramp) -> tuple[TellTale, ...]:
    """Return the best readings for the weakest dangerous fault of every position.

    The weakest, its leak just at the critical resistance, is the hardest to see. The earliest
    step with a clear reading is taken; change is measured against part spread and meter error,
    and an easy reading is preferred.
    """
    weakest: dict[str, Danger] = {}
    for danger in ramp.dangers:
        held = weakest.get(danger.fault.position)
        if held is None or (danger.fault.ohm or 0.0) > (held.fault.ohm or 0.0):
            weakest[danger.fault.position] = danger
    return tuple(_tale(ramp, danger) for danger in weakest.values())


def _tale(ramp: Ramp, danger: Danger) -> TellTale:
    for step in ramp.steps:
        found = _ranked(ramp, step, danger)
        if found:
            return TellTale(
                position=danger.fault.position,
                fault=str(danger.fault),
                readings=tuple(
                    (probe.key, band.shown, value * band.loading) for probe, band, value in found
                ),
                step=step.name,
            )
    return TellTale(
        position=danger.fault.position,
        fault=str(danger.fault),
        readings=(),
        step="",
        text="no reading with power tells it from healthy spread: test the part on the bench",
    )


def _ranked(ramp: Ramp, step: RampStep, danger: Danger) -> list[tuple[Probe, Band, float]]:
    seen = next((s for s in step.seen if s.danger == danger), None)
    if seen is None or not seen.values:
        return []
    scored = []
    for band in step.bands:
        probe, value = ramp.probe(band.probe), seen.values[band.probe]
        if band.high == inf:
            continue  # an ohmmeter finds shorts, which everything else finds as well
        beyond = max(value - band.high, band.low - value) / ((band.high - band.low) / 2.0)
        if beyond > CLEAR:
            scored.append((beyond / EASE**probe.effort, probe, band, value))
    scored.sort(key=lambda row: -row[0])
    return [(probe, band, value) for _, probe, band, value in scored[:MOST]]

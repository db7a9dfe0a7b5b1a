"""The discharge table on a terminal or in a pipe."""

from __future__ import annotations

from math import inf

from rich.console import Console

from stress.circuit.circuit import Circuit
from stress.report.lines import Lines
from stress.report.words import amount
from stress.study.discharge_advice import NO_PATH_OHM, no_bleed
from stress.study.discharge_result import (
    COLD,
    CONDUCTING,
    OFF,
    SAFE_V,
    THRESHOLDS_V,
    Charge,
    Decay,
    Discharge,
)
from stress.text.figure import figure

SHOWN_V = 50.0  # positions that never bear more are named in one line


def print_discharge(found: Discharge, circuit: Circuit, console: Console) -> None:
    """Print what every position holds after switching off, and what to do."""
    out = Lines(console)
    out.line(f"{circuit.name}: after switching off", bold=True)
    out.heading("Do this")
    out.items(found.advice, numbered=True)
    shown = [c for c in found.charges if c.start_V > SHOWN_V]
    kept = [c for c in shown if no_bleed(c)]
    out.heading("Holds its charge: no bleed path")
    out.items(_kept(kept) or ["nothing above the class ES1 voltage of its value"])
    out.heading("Stored at most, and what empties it")
    out.table(
        ["", "most", "when", "energy", "bleed path", *(f"RC to {v:.0f} V" for v in THRESHOLDS_V)],
        [_stored(charge) for charge in shown],
    )
    if any(charge.deadly for charge in shown):
        names = ", ".join(charge.position for charge in shown if charge.deadly)
        out.line(f"Energy that can kill: {names}.")
    ways = [d.how for charge in shown for d in charge.decays]
    for how in (w for w in dict.fromkeys(ways) if w in (CONDUCTING, COLD, OFF)):
        out.heading(f"Simulated, {how}: seconds until it stays below")
        _times(shown, how, out)
    _pulled(shown, out)
    out.heading("Resistor, and what comes back within ten minutes")
    out.table(
        ["", "resistor", "for", "pulse", "to 10 V in", "comes back"],
        [_empty(charge) for charge in shown],
    )
    low = [c.position for c in found.charges if c.start_V <= SHOWN_V]
    if low:
        out.line(f"Never above {figure(SHOWN_V, 'V')}: {', '.join(low)}.")
    for why in found.unanswered:
        out.line(f"{why.case}: {why.kind}; {why.text}", indent=2)
    out.heading("Cautions")
    out.items(found.cautions)


def _kept(charges: list[Charge]) -> list[str]:
    """Return who holds a charge, floating parts by themselves."""
    found = []
    for floating in (True, False):
        own = [charge for charge in charges if charge.floating is floating]
        if not own:
            continue
        each = ", ".join(
            f"{c.position} {figure(c.start_V, 'V')} {figure(c.energy_J, 'J')}" for c in own
        )
        slowest = max(own, key=lambda charge: charge.formula_s[SAFE_V])
        where = "; measure across their own terminals" if floating else ""
        found.append(
            f"{each}: nothing but leakage empties them, up to "
            f"{_time(slowest.formula_s[SAFE_V])} to {figure(SAFE_V, 'V')} by what is assumed of "
            f"their own, far longer with good parts{where}"
        )
    return found


def _stored(charge: Charge) -> list[str]:
    bleed = amount(charge.bleed_ohm, "ohm")
    if charge.bleed_ohm is not None and charge.bleed_ohm > NO_PATH_OHM:
        bleed = "nothing"
    return [
        charge.position + (" *" if charge.floating else ""),
        figure(charge.start_V, "V"),
        charge.condition,
        figure(charge.energy_J, "J"),
        bleed,
        *(_time(charge.formula_s[v]) for v in THRESHOLDS_V),
    ]


def _times(charges: list[Charge], how: str, out: Lines) -> None:
    rows = []
    for charge in charges:
        decay = next((d for d in charge.decays if d.how == how), None)
        if decay is not None:
            rows.append([charge.position, figure(decay.start_V, "V"), *_below(decay)])
    out.table(["", "from", *(f"{v:.0f} V" for v in THRESHOLDS_V)], rows)
    if any(d.extrapolated for c in charges for d in c.decays if d.how == how):
        out.line("~ by the last time constant of the simulation")


def _below(decay: Decay) -> list[str]:
    words = []
    for threshold in THRESHOLDS_V:
        mark = "~ " if threshold in decay.extrapolated else ""
        words.append(mark + _time(decay.below_s.get(threshold)))
    return words


def _pulled(charges: list[Charge], out: Lines) -> None:
    """Print for every position the pulled tube with which it takes longest."""
    rows = []
    for charge in charges:
        own = [d for d in charge.decays if d.how.endswith("pulled")]
        if not own:
            continue
        worst = max(own, key=lambda d: inf if (at := d.below_s.get(SAFE_V)) is None else at)
        rows.append([charge.position, worst.how, figure(worst.start_V, "V"), *_below(worst)])
    if rows:
        out.heading("Simulated, the worst tube pulled: seconds until it stays below")
        out.table(["", "", "from", *(f"{v:.0f} V" for v in THRESHOLDS_V)], rows, left=2)


def _empty(charge: Charge) -> list[str]:
    low, high = charge.returns_V
    back = figure(high, "V") if low == high else f"{figure(low, 'V')} to {figure(high, 'V')}"
    r = charge.resistor
    if r is None:
        return [charge.position, "-", "-", "-", "-", back]
    pieces = f" as {r.pieces} in series" if r.pieces > 1 else ""
    return [
        charge.position,
        f"{figure(r.ohm, 'ohm')} {figure(r.rated_W, 'W')}{pieces}",
        figure(r.rated_V, "V"),
        figure(r.energy_J, "J"),
        _time(r.seconds),
        back,
    ]


def _time(seconds: float | None) -> str:
    """Return a time as people say it: seconds, minutes, hours, days."""
    if seconds is None or seconds == inf:
        return "never"
    if seconds <= 0.0:
        return "at once"
    for size, word in ((86400.0, "days"), (3600.0, "h"), (60.0, "min")):
        if seconds >= 2.0 * size:
            return f"{seconds / size:.3g} {word}"
    return figure(seconds, "s", digits=2)

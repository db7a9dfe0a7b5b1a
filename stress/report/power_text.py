"""The power-up plan on a terminal or in a pipe: method, order of work, steps, what stops them."""

from __future__ import annotations

from rich.console import Console

from stress.circuit.circuit import Circuit
from stress.finding import Severity
from stress.report.lines import Lines
from stress.report.words import SEVERITIES, amount, quantity, unit_of
from stress.study.power_result import (
    Abort,
    Kind,
    Lamp,
    LampReading,
    Peak,
    PowerUp,
    Probe,
    Step,
    SwitchOn,
    TellTale,
)
from stress.text.figure import figure

SHOWN_LOAD = 0.02  # what the meter must change of a reading to be told
INDENT = 5
LEAST_PEAK_V = 30.0  # of what is shown at switch-on


def print_power_up(plan: PowerUp, circuit: Circuit, console: Console) -> None:
    """Print the plan before the first switch-on."""
    out = Lines(console)
    out.line(f"{circuit.name}: before the first switch-on", bold=True)
    out.line("High voltage kills; the cautions stand at the end and come first.")
    out.heading(f"Method: {plan.method.way.value}")
    out.line(plan.method.text)
    out.items(plan.method.reasons)
    for refused in plan.method.refused:
        out.line(refused, first="  !", indent=INDENT)
    out.heading("Order of work, all of it with the plug out")
    _work(plan, out)
    out.heading("Before the first step")
    out.items(plan.method.before, numbered=True)
    probes = {probe.key: probe for probe in plan.probes}
    _readings(plan, circuit, out)
    for step in plan.steps:
        _step(step, probes, out)
    _never(plan, out)
    if plan.lamp is not None:
        _lamp(plan.lamp, out)
    _tales(plan, probes, out)
    if plan.switch_on is not None:
        _switch_on(plan.switch_on, out)
    out.heading("Not in these numbers")
    out.items(plan.missing or ("nothing that is known of",))
    for why in plan.unanswered:
        out.line(f"{why.case}: {why.kind}; {why.text}", first="  -", indent=INDENT)
    out.heading("Cautions")
    out.items(plan.cautions)


def _work(plan: PowerUp, out: Lines) -> None:
    """Print what is done first with its reasons, the rest by name."""
    urgent = [w for w in plan.work if w.severity in (Severity.REPLACE, Severity.TEST)]
    for item in urgent:
        out.line(
            f"{SEVERITIES[item.severity]}: {item.text}",
            first=f"  {item.where} ",
            indent=4 + max(len(w.where) for w in urgent),
        )
    for severity in (Severity.WATCH, Severity.NOTE):
        names = ", ".join(w.where for w in plan.work if w.severity is severity)
        if names:
            out.line(f"{SEVERITIES[severity]}: {names}", indent=2)


def _percent(step: Step) -> str:
    return f"{100.0 * step.ramp.share:.3g} %" if step.ramp.share else "dead"


def _readings(plan: PowerUp, circuit: Circuit, out: Lines) -> None:
    """Print what healthy equipment shows on the user's meter, one column a step."""
    sheet = circuit.sheet
    meter = f"meter of {figure(sheet.meter_ohm, 'ohm')}"
    if sheet.meter_ohm_per_V is not None:
        meter = f"meter of {figure(sheet.meter_ohm_per_V, 'ohm')} per volt"
    out.heading(f"What healthy equipment shows, {meter}, against the common node")
    line = ["line"] + [amount(step.ramp.line_V, "V", missing="-") for step in plan.steps]
    rows = [line]
    for probe in plan.probes:
        if probe.forbidden or probe.kind is Kind.AC_V:
            continue
        what = f"ohms {probe.text}" if probe.kind is Kind.OHM else probe.text
        cells = []
        for step in plan.steps:
            band = step.ramp.band(probe.key)
            cells.append("-" if band is None else figure(_clean(band.shown), probe.unit))
        rows.append([what, *cells])
    out.table(["", *(_percent(step) for step in plan.steps)], rows)
    last = plan.steps[-1].ramp if plan.steps else None
    loaded = [
        f"{band.probe.split(' ')[0]} {figure(band.value, 'V')} without it, "
        f"{figure(band.shown, 'V')} with it"
        for band in (last.bands if last is not None else ())
        if abs(band.shown - band.value) > SHOWN_LOAD * abs(band.value) and abs(band.value) > 0.1
    ]
    if loaded:
        out.line(f"Your meter loads these at {_percent(plan.steps[-1])}: {'; '.join(loaded)}.")


def _clean(value: float) -> float:
    """Return a reading without the noise of the simulation."""
    return 0.0 if abs(value) < 5e-3 else value


def _step(step: Step, probes: dict[str, Probe], out: Lines) -> None:
    line = amount(step.ramp.line_V, "V", missing="its own sources")
    if not step.ramp.share:
        out.heading("Plug out, discharged, ohmmeter against the common node where none is named")
        out.line(
            "Electrolytics that stood for years read low at first: let the meter charge them.",
            indent=2,
        )
    else:
        out.heading(f"{_percent(step)}: {line}" + (f"; {step.text}" if step.text else ""))
    for stop in step.aborts:
        out.line(_abort(stop, probes[stop.probe]), first="  stop", indent=7)
    if not step.aborts:
        out.line("no reading here tells a dangerous fault from healthy equipment", indent=2)
    if step.late:
        out.line(
            f"past a limit already here, so read first and quickly: {_names(step.late)}", indent=2
        )
    if step.cannot_tell:
        out.line(f"nothing up to here tells: {_names(step.cannot_tell)}", indent=2)


def _abort(stop: Abort, probe: Probe) -> str:
    side = "above" if stop.above else "below"
    if stop.limit < 0.0:
        side = "less negative than" if stop.above else "more negative than"
    what = f"{probe.kind.value} {probe.text}" if probe.node else probe.text
    return f"{what} {side} {figure(stop.limit, probe.unit)}: {_names(stop.tells)}"


def _names(faults: tuple[str, ...]) -> str:
    """Return faults by position: "C13 leaky, short; C14 leaky"."""
    kinds: dict[str, dict[str, None]] = {}
    for fault in faults:
        position, kind = fault.split(" ")[:2]
        kinds.setdefault(position, {})[kind] = None
    return "; ".join(f"{position} {', '.join(own)}" for position, own in kinds.items())


def _never(plan: PowerUp, out: Lines) -> None:
    forbidden = {probe.node: probe for probe in plan.probes if probe.forbidden}
    if forbidden:
        out.heading("Do not measure here")
        out.items(f"{p.text}: {p.forbidden}" for p in forbidden.values())


def _lamp(lamp: Lamp, out: Lines) -> None:
    out.heading(
        f"Full line through a filament lamp of {figure(lamp.rated_W, 'W')}, "
        f"{figure(lamp.rated_V, 'V')}"
    )
    rows = [_lamp_row(r) for r in (lamp.healthy, *lamp.faulty) if r is not None]
    out.table(["with", "lamp", "equipment", "current", "B+", "it tells"], rows)
    out.line(lamp.text)


def _lamp_row(reading: LampReading) -> list[str]:
    name = reading.fault or "everything healthy"
    if reading.unanswered is not None:
        return [name, "-", "-", "-", "-", reading.unanswered.kind]
    supply = max(reading.supply_V.values(), default=0.0)
    return [
        name,
        figure(reading.lamp_V, "V"),
        figure(reading.equipment_V, "V"),
        figure(reading.current_A, "A"),
        figure(_clean(supply), "V"),
        "-" if not reading.fault else "brighter" if reading.tells else "no",
    ]


def _tales(plan: PowerUp, probes: dict[str, Probe], out: Lines) -> None:
    if not plan.tell_tales:
        return
    out.heading("Tell-tale readings, least disassembly first")
    for tale in plan.tell_tales:
        out.line(
            _tale(tale, probes),
            first=f"  {tale.position} ",
            indent=4 + max(len(t.position) for t in plan.tell_tales),
        )


def _tale(tale: TellTale, probes: dict[str, Probe]) -> str:
    if not tale.readings:
        return f"{tale.fault}: {tale.text}"
    words = []
    for key, healthy, faulty in tale.readings:
        probe = probes[key]
        what = f"{probe.kind.value} {probe.text}" if probe.node else probe.text
        words.append(
            f"{what} {figure(_clean(healthy), probe.unit)} when healthy, "
            f"{figure(_clean(faulty), probe.unit)}"
        )
    return f"{tale.fault}, step {tale.step}: " + "; ".join(words)


def _switch_on(first: SwitchOn, out: Lines) -> None:
    out.heading("Switch-on at high line, worst phase")
    rows = [
        _peak_row(peak)
        for peak in first.peaks
        if max(peak.cold or 0.0, peak.hot or 0.0) > LEAST_PEAK_V or peak.quantity == "peak_A"
    ]
    out.table(["part", "what", "cold", "hot restart", "phase"], rows, left=2)
    for why in first.unanswered:
        out.line(f"{why.case}: {why.kind}; {why.text}", indent=2)


def _peak_row(peak: Peak) -> list[str]:
    unit = unit_of(peak.quantity)
    return [
        peak.part,
        quantity(peak.quantity),
        amount(peak.cold, unit, missing="-"),
        amount(peak.hot, unit, missing="-"),
        "-" if peak.phase_deg is None else f"{peak.phase_deg:g}°",
    ]

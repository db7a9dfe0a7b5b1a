"""The power-up plan on the page and on the bench card."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

from stress.report.card import Fact
from stress.report.table import Cell, Column, Table, number
from stress.report.words import amount, quantity, unit_of
from stress.study.power_result import Abort, Band, Lamp, LampReading, PowerUp, Probe, Step, TellTale
from stress.text.figure import figure


@dataclass(frozen=True, slots=True, kw_only=True)
class RampRow:
    """One step of the ramp for the bench card."""

    share: str
    line: str
    healthy: tuple[str, ...]
    stop: tuple[str, ...]
    short_stop: tuple[str, ...]
    blind: str


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanView:
    """What the templates show of a plan."""

    of: PowerUp
    readings: Table
    ramp: tuple[RampRow, ...]
    lamp: Table | None
    lamp_text: str
    tales: tuple[Fact, ...]
    switch_on: Table
    forbidden: tuple[Fact, ...]


def plan_view(plan: PowerUp) -> PlanView:
    """Return a plan ready for the templates."""
    lamp = plan.lamp
    forbidden = {probe.text: probe.forbidden for probe in plan.probes if probe.forbidden}
    return PlanView(
        of=plan,
        readings=readings(plan),
        ramp=ramp_rows(plan),
        lamp=lamp_table(lamp) if lamp else None,
        lamp_text=f"{figure(lamp.rated_W, 'W')}, {figure(lamp.rated_V, 'V')}" if lamp else "",
        tales=tuple(Fact(name=each.position, text=tale(each, plan)) for each in plan.tell_tales),
        switch_on=switch_on_table(plan),
        forbidden=tuple(Fact(name=name, text=why) for name, why in forbidden.items()),
    )


def readings(plan: PowerUp) -> Table:
    """Return what healthy equipment shows on the user's meter, a column for every step."""
    columns = [Column("probe", "read"), Column("kind", "as")]
    columns += [
        Column(f"step{i}", f"{_share(step)}, {amount(step.ramp.line_V, 'V', missing='own source')}",
               number=True)
        for i, step in enumerate(plan.steps)
    ]  # fmt: skip
    rows = []
    for probe in plan.probes:
        cells = [Cell(probe.text), Cell(probe.kind.value)]
        for step in plan.steps:
            band = step.ramp.band(probe.key)
            if probe.forbidden:
                cells.append(Cell("do not measure"))
            elif band is None:
                cells.append(Cell("no reading"))
            else:
                cells.append(Cell(_spread(band, probe), band.shown))
        rows.append(tuple(cells))
    return Table("readings", tuple(columns), tuple(rows))


def _spread(band: Band, probe: Probe) -> str:
    low, high = sorted((band.low * band.loading, band.high * band.loading))
    if math.isinf(high):
        return f"{figure(low, probe.unit)} or more"
    if low <= probe.least:
        return f"up to {figure(high, probe.unit)}"
    return f"{figure(low, probe.unit)} to {figure(high, probe.unit)}"


def _share(step: Step) -> str:
    return f"{100.0 * step.ramp.share:.3g} %"


def ramp_rows(plan: PowerUp) -> tuple[RampRow, ...]:
    """Return the steps for people at the bench: what to look at and when to stop."""
    probes = {probe.key: probe for probe in plan.probes}
    return tuple(_ramp_row(step, probes) for step in plan.steps)


def _ramp_row(step: Step, probes: dict[str, Probe]) -> RampRow:
    healthy = []
    for stop in step.aborts:
        band = step.ramp.band(stop.probe)
        if band is not None:
            probe = probes[stop.probe]
            healthy.append(f"{probe.text} {figure(band.shown, probe.unit)}")
    at = [(stop_at(stop, probes[stop.probe]), stop.tells) for stop in step.aborts]
    stops = tuple(f"{when} ({together(tells)})" for when, tells in at)
    brief = [(when, dict.fromkeys(tell.split(" ")[0] for tell in tells)) for when, tells in at]
    nothing = ("no reading here tells a fault",)
    return RampRow(
        share=_share(step),
        line=amount(step.ramp.line_V, "V", missing="its own source"),
        healthy=tuple(dict.fromkeys(healthy)),
        stop=stops or nothing,
        short_stop=tuple(f"{when} ({', '.join(who)})" for when, who in brief) or nothing,
        blind=together(step.cannot_tell),
    )


def together(faults: Sequence[str]) -> str:
    """Return faults by position: "C5 leaky, short; C13 leaky"."""
    found: dict[str, dict[str, None]] = {}
    for fault in faults:
        position, _, what = fault.partition(" ")
        found.setdefault(position, {})[what.partition(" ")[0]] = None
    return "; ".join(f"{position} {', '.join(kinds)}" for position, kinds in found.items())


def _rounded(fault: str) -> str:
    """Return the name of a fault with three digits: "C5 leaky 3.91 MΩ"."""
    return re.sub(r"\d+\.\d+", lambda found: f"{float(found.group()):.3g}", fault)


def stop_at(stop: Abort, probe: Probe) -> str:
    """Return when to switch off: "DC volts supply b0 to ground above 120 V"."""
    side = "above" if stop.above else "below"
    kind = f"{probe.kind.value} " if probe.node else ""
    return f"{kind}{probe.text} {side} {figure(stop.limit, probe.unit)}"


def lamp_table(lamp: Lamp) -> Table:
    """Return what the lamp in series shows, healthy and with each dangerous fault."""
    columns = (
        Column("fault", "with"),
        Column("lamp_V", "lamp", number=True),
        Column("equipment_V", "equipment", number=True),
        Column("current_A", "current", number=True),
        Column("tells", "it tells"),
    )
    shown = [each for each in (lamp.healthy, *lamp.faulty) if each is not None]
    return Table("lamp", columns, tuple(_lamp_row(each) for each in shown))


def _lamp_row(of: LampReading) -> tuple[Cell, ...]:
    fault = Cell(_rounded(of.fault) or "everything healthy")
    if of.unanswered is not None:
        return (fault, *[Cell(of.unanswered.kind)] * 4)
    tells = ("brighter" if of.tells else "no") if of.fault else "this is the measure"
    return (
        fault,
        number(of.lamp_V, "V"),
        number(of.equipment_V, "V"),
        number(of.current_A, "A"),
        Cell(tells),
    )


def tale(of: TellTale, plan: PowerUp) -> str:
    """Return the readings that separate healthy from faulty best."""
    if not of.readings:
        return f"{_rounded(of.fault)}: {of.text}"
    probes = {probe.key: probe for probe in plan.probes}
    told = [
        f"{probes[key].text} {figure(healthy, probes[key].unit)} when healthy, "
        f"{figure(faulty, probes[key].unit)} with the fault"
        for key, healthy, faulty in of.readings
    ]
    return f"{_rounded(of.fault)}, at {of.step}: {'; '.join(told)}"


def switch_on_table(plan: PowerUp) -> Table:
    """Return the largest values of the first moment."""
    columns = (
        Column("part", "part"),
        Column("quantity", "what"),
        Column("cold", "cold", number=True),
        Column("hot", "hot restart", number=True),
        Column("phase", "worst phase", number=True),
    )
    peaks = plan.switch_on.peaks if plan.switch_on else ()
    rows = tuple(
        (
            Cell(peak.part),
            Cell(quantity(peak.quantity)),
            number(peak.cold, unit_of(peak.quantity), missing="not run"),
            number(peak.hot, unit_of(peak.quantity), missing="not run"),
            Cell("any" if peak.phase_deg is None else f"{peak.phase_deg:g}°", peak.phase_deg),
        )
        for peak in peaks
    )
    return Table("switch-on", columns, rows)

"""How large a reservoir may be: first-capacitor limit, rectifier's peak current, inrush.

The published largest first capacitor comes from the type table. The peak current is simulated
with every candidate in place at high line, and the surge of a switch-on from rest with the
value that is to be fitted.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

from stress.circuit.circuit import Circuit, Kind, Part, Position, Role
from stress.engine.case import Case, Ran, Settled, Transient
from stress.engine.solver import Solver
from stress.parts import types
from stress.parts.series import next_down, next_up
from stress.study.measure import part_stresses
from stress.study.plan import Plan, run
from stress.study.result import Replacement, Unanswered
from stress.study.working import unanswered
from stress.text.figure import figure
from stress.text.unit import unit

NEAR_OHM = 1000.0  # a resistor up to this between rectifier and reservoir is a surge resistor
INRUSH_PERIODS = 12


@dataclass(frozen=True, slots=True, kw_only=True)
class Tried:
    """One capacitance, simulated in place; None where the engine had no number."""

    value_F: float = field(metadata=unit("F"))
    peak_A: float | None = field(default=None, metadata=unit("A"))
    average_A: float | None = field(default=None, metadata=unit("A"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Reservoir:
    """What limits the capacitance of a reservoir.

    Attributes:
        position: Its name.
        rectifiers: Names of the parts that charge it.
        table_F: Largest first capacitor of the type table.
        table_source: Its source.
        tried: Every capacitance that was simulated, at high line.
        limit_A: Peak current of one plate or diode.
        value_max_F: The largest capacitance within both, or None where nothing is published.
        inrush_A: Largest current of a rectifier while switched on from rest.
        text: What was simulated, in words.
    """

    position: str
    rectifiers: tuple[str, ...]
    table_F: float | None = field(default=None, metadata=unit("F"))
    table_source: str = ""
    tried: tuple[Tried, ...] = ()
    limit_A: float | None = field(default=None, metadata=unit("A"))
    value_max_F: float | None = field(default=None, metadata=unit("F"))
    inrush_A: float | None = field(default=None, metadata=unit("A"))
    text: str = ""
    unanswered: tuple[Unanswered, ...] = ()


def rectifiers_of(position: Position, *, circuit: Circuit) -> tuple[Part, ...]:
    """Return the rectifiers whose output the position is on, straight or by a small resistor."""
    if position.role not in (Role.RESERVOIR, Role.FLYING):
        return ()
    near = set(position.nodes) - {"0"}
    for element in circuit.netlist.elements:
        small = element.letter == "R" and element.value and element.value <= NEAR_OHM
        if small and set(element.nodes) & near and "0" not in element.nodes:
            near |= set(element.nodes)
    pins = {Kind.RECTIFIER: ("cathode", "cathode2"), Kind.DIODE: ("minus", "plus")}
    return tuple(
        part
        for part in circuit.parts
        if any(part.pins.get(pin) in near for pin in pins.get(part.kind, ()))
    )


def table_limit(parts: Sequence[Part]) -> tuple[float | None, str]:
    """Return the largest first capacitor the type table names, with type and source."""
    found: list[tuple[float, str]] = []
    for part in parts:
        entry = types.find(part.type) if part.type else None
        if entry is not None and entry.first_capacitor_max_F is not None:
            source = entry.sources.get("first_capacitor_max_F", "")
            found.append((entry.first_capacitor_max_F, f"{entry.name}: {source}"))
    return min(found, default=(None, ""))


def plan(
    position: Position,
    *,
    circuit: Circuit,
    base: Case,
    fit_F: float,
    candidates_F: Sequence[float],
) -> Plan[Reservoir]:
    """Ask for the rectifier's stress with every candidate in place; see `stress.study.plan`.

    Args:
        position: A reservoir.
        circuit: With its rectifiers.
        base: The healthy case at high line, answered before.
        fit_F: The value that is to be fitted, for the switch-on.
        candidates_F: Rising.
    """
    parts = rectifiers_of(position, circuit=circuit)
    cases = [_with(base, position, value) for value in candidates_F]
    period_s = base.twin.period_s
    if period_s is not None:
        cases.append(
            replace(
                _with(base, position, fit_F),
                name=f"switched on / {position.name} {figure(fit_F, 'F', digits=6)}",
                parent=None,
                analysis=Transient(stop_s=INRUSH_PERIODS * period_s, phase_deg=90.0),
            )
        )
    answers = yield tuple(cases)
    tried, missing = [], []
    for value, case, answer in zip(candidates_F, cases, answers, strict=False):
        peaks, average = [], []
        if isinstance(answer, Settled):
            for part in parts:
                stresses = part_stresses(part, answer.waves, removed=case.removed)
                peaks.append(stresses.get("peak_A", 0.0))
                average.append(stresses.get("average_A", 0.0))
        elif (why := unanswered(answer, case.name)) is not None:
            missing.append(why)
        tried.append(
            Tried(
                value_F=value,
                peak_A=max(peaks, default=None),
                average_A=max(average, default=None),
            )
        )
    inrush = None
    last = answers[-1] if len(answers) > len(candidates_F) else None
    if isinstance(last, Ran):
        surges = [part_stresses(part, last.waves).get("peak_A", 0.0) for part in parts]
        inrush = max(surges, default=None)
    return judged(
        position, parts=parts, tried=tuple(tried), inrush_A=inrush, missing=tuple(missing)
    )


def _with(base: Case, position: Position, value_F: float) -> Case:
    """Return the case with another capacitance in a position."""
    return replace(
        base,
        name=f"{base.name} / {position.name} {figure(value_F, 'F', digits=6)}",
        parent=base.name,
        fault=f"{position.name} {figure(value_F, 'F')}",
        values={**base.values, position.name: value_F},
    )


def checked(
    replacements: Mapping[str, Replacement], *, circuit: Circuit, base: Case, solver: Solver
) -> Mapping[str, Replacement]:
    """Return the replacements with every reservoir tried in place at high line.

    A value at which a rectifier passes its peak current is brought down to the next of E12 at
    or below the original; the note says what was simulated.

    Args:
        replacements: By position name.
        circuit: With its rectifiers.
        base: The healthy case at high line, answered before by the same solver.
        solver: Answers a few cases for each reservoir.
    """
    tried = {
        position.name: position
        for position in circuit.positions
        if position.name in replacements and rectifiers_of(position, circuit=circuit)
    }
    plans = []
    for name, position in tried.items():
        fit_F, least_F = replacements[name].value_F, next_down(position.value_F or 0.0, "E12")
        above = next_up(fit_F * 1.01, "E6")
        candidates = sorted({least_F, fit_F, above, next_up(above * 1.01, "E6")})
        plans.append(
            plan(position, circuit=circuit, base=base, fit_F=fit_F, candidates_F=candidates)
        )
    found = run(plans, solver=solver)
    return {
        **replacements,
        **{
            name: limited(replacements[name], by=result, original_F=tried[name].value_F or 0.0)
            for name, result in zip(tried, found, strict=True)
        },
    }


def limited(chosen: Replacement, *, by: Reservoir, original_F: float) -> Replacement:
    """Return a replacement within what its rectifier bears, with a note of what was tried."""
    notes = tuple(note for note in (by.text,) if note)
    value_F, reason = chosen.value_F, chosen.reason
    peak_A = next((row.peak_A for row in by.tried if row.value_F == chosen.value_F), None)
    if peak_A is not None and by.limit_A is not None and peak_A > by.limit_A:
        value_F = min(chosen.value_F, next_down(original_F, "E12"))
        reason += (
            f"; {figure(value_F, 'F')} because the rectifier would pass {figure(peak_A, 'A')}, "
            f"limit {figure(by.limit_A, 'A')}, with {figure(chosen.value_F, 'F')}"
        )
    known = [most for most in (by.value_max_F, chosen.value_max_F) if most is not None]
    return replace(
        chosen,
        value_F=value_F,
        reason=reason,
        notes=chosen.notes + notes,
        value_max_F=min(known, default=None),
    )


def judged(
    position: Position,
    *,
    parts: Sequence[Part],
    tried: tuple[Tried, ...],
    inrush_A: float | None = None,
    missing: tuple[Unanswered, ...] = (),
) -> Reservoir:
    """Return the limit that the type table and the simulated peaks leave."""
    table_F, source = table_limit(parts)
    stated = [part.limits["peak_A"] for part in parts if "peak_A" in part.limits]
    limit_A = min((limit.value for limit in stated), default=None)
    within = [
        row.value_F
        for row in tried
        if limit_A is not None and row.peak_A is not None and row.peak_A <= limit_A
    ]
    by_peak = max(within, default=None)
    known = [value for value in (table_F, by_peak) if value is not None]
    if limit_A is not None and tried and by_peak is None and table_F is None and not missing:
        known = [position.value_F or 0.0]
    return Reservoir(
        position=position.name,
        rectifiers=tuple(part.name for part in parts),
        table_F=table_F,
        table_source=source,
        tried=tried,
        limit_A=limit_A,
        value_max_F=min(known, default=None),
        inrush_A=inrush_A,
        text=_told(tried, limit_A, inrush_A),
        unanswered=missing,
    )


def _told(
    tried: tuple[Tried, ...],
    limit_A: float | None,
    inrush_A: float | None,
) -> str:
    said = []
    peaks = [(row.value_F, row.peak_A) for row in tried if row.peak_A is not None]
    if peaks:
        listed = ", ".join(
            f"{figure(amps, 'A')} with {figure(farad, 'F')}" for farad, amps in peaks
        )
        limit = f", limit {figure(limit_A, 'A')}" if limit_A is not None else ", no limit stated"
        said.append(f"rectifier peak {listed}{limit}")
    if inrush_A is not None:
        said.append(f"{figure(inrush_A, 'A')} at a switch-on from rest at the crest")
    return "; ".join(said)

"""The first second after switching on: cold from rest, and hot with empty capacitors."""

from __future__ import annotations

from dataclasses import replace

from stress.circuit.circuit import Circuit, Kind
from stress.engine.case import Case, Ran, Transient, Waves
from stress.engine.solver import Solver
from stress.study import conditions as stock
from stress.study.measure import part_stresses
from stress.study.power_result import Peak, SwitchOn
from stress.study.result import Unanswered
from stress.study.working import Healthy, unanswered

SECONDS = 0.12  # the charging pulses; the swing of the filter is in the cold run
MOST_PERIODS = 400.0  # of a switching supply
PHASES_DEG = tuple(45.0 * k for k in range(8))
PEAKS = frozenset({Kind.RECTIFIER, Kind.DIODE})


def switch_on(circuit: Circuit, *, healthy: Healthy, solver: Solver) -> SwitchOn | None:
    """Return the peaks of the first second; None where only steady sources feed it.

    Cold: what `stress.study.inrush` found from rest with cold tubes. Hot: a short break with the
    capacitors empty and the tubes still warm, so that rectifier and load conduct at once.
    """
    if circuit.period_s is None:
        return None
    working = healthy.working
    high = next(
        c
        for c in working.conditions
        if c.name == (stock.HIGH if circuit.line.sources else stock.NOMINAL)
    )
    stop_s = min(SECONDS, MOST_PERIODS * circuit.period_s)
    waves = [e.wave for e in circuit.netlist.elements if e.name in circuit.line.sources]
    phases = PHASES_DEG if any(wave is not None for wave in waves) else PHASES_DEG[:1]
    cases = [
        replace(
            stock.case(circuit, high, twin=healthy.twin, name=f"hot restart at {phase:g}°"),
            analysis=Transient(stop_s=stop_s, phase_deg=phase),
        )
        for phase in phases
    ]
    hot: dict[tuple[str, str], tuple[float, float]] = {}
    failed: list[Unanswered] = []
    for case, answer in zip(cases, solver.solve(cases), strict=True):
        if isinstance(answer, Ran):
            _take(circuit, answer.waves, case, hot)
        elif (why := unanswered(answer, case.name)) is not None:
            failed.append(why)
    peaks = []
    for position in circuit.positions:
        surge = working.inrush.get(position.name)
        peaks.append(
            _peak(
                position.name,
                "voltage_V",
                surge.peak_V if surge else None,
                surge.phase_deg if surge else None,
                hot,
            )
        )
    for part in circuit.parts:
        if part.kind in PEAKS:
            for name in ("peak_A", "reverse_V"):
                cold = working.inrush_parts.get(part.name, {}).get(name)
                peaks.append(_peak(part.name, name, cold, None, hot))
    return SwitchOn(peaks=tuple(peaks), seconds=stop_s, unanswered=tuple(failed))


def _take(
    circuit: Circuit, waves: Waves, case: Case, hot: dict[tuple[str, str], tuple[float, float]]
) -> None:
    assert isinstance(case.analysis, Transient)
    phase = case.analysis.phase_deg

    def keep(part: str, quantity: str, value: float) -> None:
        held = hot.get((part, quantity))
        if held is None or value > held[0]:
            hot[part, quantity] = (value, phase)

    for position in circuit.positions:
        keep(position.name, "voltage_V", float(abs(waves.voltage(*position.nodes)).max()))
    for part in circuit.parts:
        if part.kind in PEAKS:
            stresses = part_stresses(part, waves, removed=case.removed)
            for name in ("peak_A", "reverse_V"):
                if name in stresses:
                    keep(part.name, name, stresses[name])


def _peak(
    part: str,
    quantity: str,
    cold: float | None,
    phase: float | None,
    hot: dict[tuple[str, str], tuple[float, float]],
) -> Peak:
    value, at = hot.get((part, quantity), (None, None))
    worse_hot = value is not None and (cold is None or value > cold)
    return Peak(
        part=part, quantity=quantity, cold=cold, hot=value, phase_deg=at if worse_hot else phase
    )

"""Switching on: from rest at high line with the tubes cold, at several phases of the line."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from math import pi, sqrt

from stress.circuit.circuit import Circuit, Kind
from stress.engine.case import Case, Ran, Transient, Waves
from stress.engine.solver import Solver
from stress.study import conditions as stock
from stress.study.measure import part_stresses
from stress.study.result import Condition, Surge, Unanswered
from stress.study.working import Healthy, unanswered

PHASES = 8
PERIODS = 24  # long enough for the ringing of a usual choke filter
MOST_PERIODS = 220  # a line supply has passed its peak by then
MOST_SWITCHED_PERIODS = 1500  # a switched one takes milliseconds of its microseconds
LATE = 0.9  # a peak in the last tenth of the run has not been passed
PEAKS = frozenset({Kind.RECTIFIER, Kind.DIODE})


def inrush(circuit: Circuit, *, healthy: Healthy, solver: Solver) -> Healthy:
    """Return the healthy equipment with its switch-on surges added.

    A run whose peak comes in its last tenth and passes what the settled cold equipment shows is
    run again three times as long. Not run where all sources are steady: then nothing tells
    how the supply comes up.
    """
    if circuit.period_s is None:
        return healthy
    cold = next(c for c in healthy.working.conditions if c.name == stock.COLD)
    stop = _first_stop(circuit)
    runs: dict[float, Ran] = {}
    failed: list[Unanswered] = []
    phases = [k * 360.0 / PHASES for k in range(PHASES)] if circuit.line.sources else [0.0]
    while phases:
        cases = [_case(circuit, cold, healthy, stop_s=stop, phase_deg=phase) for phase in phases]
        again = []
        for phase, case, answer in zip(phases, cases, solver.solve(cases), strict=True):
            if isinstance(answer, Ran):
                runs[phase] = answer
                if _still_rising(circuit, healthy, answer.waves):
                    again.append(phase)
            elif (why := unanswered(answer, case.name)) is not None:
                failed.append(why)
        stop *= 3.0
        phases = again if stop <= _most_s(circuit) else []
    gone = stock.removed(circuit, cold)
    working = replace(
        healthy.working,
        inrush=_surges(circuit, healthy, runs),
        inrush_parts=_peaks(circuit, runs, gone),
        unanswered=(*healthy.working.unanswered, *failed),
    )
    return replace(healthy, working=working)


def _first_stop(circuit: Circuit) -> float:
    """Return some periods, or one swing of the slowest filter where that is longer."""
    assert circuit.period_s is not None
    shortest = PERIODS * circuit.period_s
    farads = [p.value_F for p in circuit.positions if p.value_F]
    henries = [e.value for e in circuit.netlist.elements if e.letter == "L" and e.value]
    swing = 2.0 * pi * sqrt(max(henries, default=0.0) * max(farads, default=0.0))
    return min(max(shortest, swing), _most_s(circuit) / 3.0)


def _most_s(circuit: Circuit) -> float:
    most = MOST_PERIODS if circuit.line.sources else MOST_SWITCHED_PERIODS
    return most * (circuit.period_s or 0.0)


def _case(
    circuit: Circuit, cold: Condition, healthy: Healthy, *, stop_s: float, phase_deg: float
) -> Case:
    steady = stock.case(
        circuit,
        cold,
        twin=healthy.twin,
        name=f"{stock.INRUSH} at {phase_deg:g}°, {stop_s:.6g} s",
    )
    return replace(
        steady,
        condition=stock.INRUSH,
        analysis=Transient(stop_s=stop_s, phase_deg=phase_deg),
    )


def _still_rising(circuit: Circuit, healthy: Healthy, waves: Waves) -> bool:
    for position in circuit.positions:
        volts = abs(waves.voltage(*position.nodes))
        settled = healthy.working.positions[position.name].get(stock.COLD)
        peak = float(volts.max())
        late = waves.time_s[int(volts.argmax())] > LATE * waves.time_s[-1]
        if late and settled is not None and peak > 1.01 * settled.peak_V + 0.1:
            return True
    return False


def _surges(circuit: Circuit, healthy: Healthy, runs: Mapping[float, Ran]) -> Mapping[str, Surge]:
    found: dict[str, Surge] = {}
    for phase, ran in runs.items():
        for position in circuit.positions:
            volts = ran.waves.voltage(*position.nodes)
            peak = float(abs(volts).max())
            forward = volts if healthy.plus[position.name] == 0 else -volts
            reverse = max(0.0, -float(forward.min())) if position.style.polar else None
            held = found.get(position.name)
            if held is None or peak > held.peak_V:
                found[position.name] = Surge(
                    case=ran.case, peak_V=peak, reverse_V=reverse, phase_deg=phase
                )
    return found


def _peaks(
    circuit: Circuit, runs: Mapping[float, Ran], gone: frozenset[str]
) -> Mapping[str, Mapping[str, float]]:
    found: dict[str, dict[str, float]] = {}
    for ran in runs.values():
        for part in circuit.parts:
            if part.kind not in PEAKS:
                continue
            stresses = part_stresses(part, ran.waves, removed=gone)
            own = found.setdefault(part.name, {})
            for name in ("peak_A", "reverse_V"):
                if name in stresses:
                    own[name] = max(own.get(name, 0.0), stresses[name])
    return found

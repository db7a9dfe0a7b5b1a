"""The equipment at every step of a rising line voltage, healthy and with each dangerous fault.

A tube gives current once its heater is hot: the share of its emission follows the share of the
line that its heater gets (`stress.parts.models.emission`), unless a battery feeds it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from stress.circuit.circuit import Circuit, Kind, Part, Position
from stress.engine.case import Answer, Case, Settled
from stress.engine.solver import Solver
from stress.parts import types
from stress.parts.models import emission
from stress.study import conditions as stock
from stress.study.between import leaks_between
from stress.study.damage_time import timed
from stress.study.fault import across_ideal_source, values
from stress.study.limits import all_stresses, limits, over
from stress.study.power_probe import read
from stress.study.power_result import Band, Danger, Probe, Ramp, RampStep, Seen
from stress.study.ramp_band import bands, carried, loads, sample_cases
from stress.study.result import Condition
from stress.study.working import Healthy, unanswered

SHARES = (0.2, 0.4, 0.6, 0.8, 1.0)
HALF = 0.5  # below this emission a foreign model, which cannot be scaled, counts as cold
IDLE_V = 1.0  # a position that bears less shows nothing of its faults


@dataclass(frozen=True, slots=True, kw_only=True)
class Rung:
    """How one step is run.

    Attributes:
        condition: With the parts that give nothing yet among the pulled ones.
        share: Of the nominal line voltage.
        emission: Part to share of emission.
        values: Factors on the emission sources.
    """

    condition: Condition
    share: float
    emission: Mapping[str, float]
    values: Mapping[str, float]


def rungs(
    circuit: Circuit,
    *,
    healthy: Healthy,
    shares: Sequence[float] = SHARES,
    preheated: frozenset[str] = frozenset(),
) -> list[Rung]:
    """Return the steps in rising order, the highest line voltage last.

    The steps at the nominal and the highest line are the conditions of those names, so that
    what was solved there is not solved again. `preheated` names the parts whose filaments have
    full voltage from the first step on.
    """
    found = []
    line = circuit.line
    high = line.high_V / line.nominal_V if line.sources else 1.0
    known = {c.name: c for c in healthy.working.conditions}
    for share in sorted({*shares, high} if line.sources else {1.0}):
        warm = {
            part.name: 1.0 if part.name in preheated else emitted(circuit, part, share)
            for part in circuit.parts
            if part.kind in (Kind.TUBE, Kind.RECTIFIER)
        }
        full = all(value == 1.0 for value in warm.values())
        name = stock.NOMINAL if share == 1.0 else stock.HIGH if share == high else ""
        if full and name in known:
            condition = known[name]
        else:
            condition = Condition(
                name=f"line at {100.0 * share:g} %",
                line_V=share * line.nominal_V,
                factor=share,
                pulled=tuple(name for name, value in warm.items() if value == 0.0),
            )
        found.append(
            Rung(condition=condition, share=share, emission=warm, values=factors(circuit, warm))
        )
    return found


def emitted(circuit: Circuit, part: Part, share: float) -> float:
    """Return the share of a tube's emission at a share of the nominal line voltage."""
    entry = types.find(part.type) if part.type else None
    if circuit.heaters == "battery" or not circuit.line.sources:
        return 1.0
    if entry is None:
        return 1.0 if part.warm_up == "instant" or share >= 1.0 else float(share > 0.75)
    full = 1.0 if share >= 1.0 else emission(entry, share)
    scaled = emission_source(part) is not None
    return full if scaled else float(full >= HALF)


def emission_source(part: Part) -> str | None:
    """Return the element that scales the emission of a built-in model."""
    return next((name for name in part.elements if name.lower().endswith(".vemission")), None)


def factors(circuit: Circuit, warm: Mapping[str, float]) -> Mapping[str, float]:
    """Return the values of the emission sources of what is warm in part."""
    found = {}
    for name, value in warm.items():
        source = emission_source(circuit.part(name))
        if source is not None and 0.0 < value < 1.0:
            found[source] = value
    return found


def case(
    circuit: Circuit,
    healthy: Healthy,
    rung: Rung,
    *,
    danger: Danger | None = None,
    positions: Mapping[str, Position] | None = None,
) -> Case:
    """Return the case of one step, healthy or with a fault."""
    condition = rung.condition
    if danger is None or positions is None:
        parent = None if any(value == 0.0 for value in rung.emission.values()) else stock.NOMINAL
        if condition.name == stock.NOMINAL:
            parent = None
        return stock.case(circuit, condition, twin=healthy.twin, parent=parent, values=rung.values)
    fault = danger.fault
    changed = values(
        fault, positions[fault.position], esr_ohm=healthy.esr_ohm.get(fault.position, 0.0)
    )
    return stock.case(
        circuit,
        condition,
        twin=healthy.twin,
        name=f"{condition.name} / {fault}",
        fault=str(fault),
        parent=condition.name,
        values={**rung.values, **changed},
    )


def ramp(
    circuit: Circuit,
    *,
    healthy: Healthy,
    dangers: Sequence[Danger],
    probes: tuple[Probe, ...],
    solver: Solver,
    shares: Sequence[float] = SHARES,
    preheated: frozenset[str] = frozenset(),
) -> Ramp:
    """Return every step with its healthy bands and what each dangerous fault shows there.

    Args:
        circuit: The equipment.
        healthy: Its settled conditions.
        dangers: Faults to look for.
        probes: What is read.
        solver: Solves all cases in three waves.
        shares: Line voltages of the steps in parts of the nominal one; the highest line is
            added.
        preheated: See `rungs`.
    """
    steps = rungs(circuit, healthy=healthy, shares=shares, preheated=preheated)
    positions = {p.name: p for p in (*circuit.positions, *leaks_between(circuit))}
    tried = [d for d in dangers if not across_ideal_source(circuit, positions[d.fault.position])]
    sound = dict(
        zip(
            (rung.condition.name for rung in steps),
            _healthy(circuit, healthy, steps, solver),
            strict=True,
        )
    )
    usable = [r for r in steps if isinstance(sound[r.condition.name], Settled)]
    samples = {r.condition.name: sample_cases(circuit, case(circuit, healthy, r)) for r in usable}
    meters = loads(
        circuit,
        {r.condition.name: (case(circuit, healthy, r), sound[r.condition.name]) for r in usable},
        probes=probes,
        solver=solver,
    )
    live = {r.condition.name: _live(sound[r.condition.name], positions) for r in usable}
    faulty = {
        r.condition.name: [
            (d, case(circuit, healthy, r, danger=d, positions=positions))
            for d in tried
            if d.fault.position in live[r.condition.name] and not _like_nominal(r, usable)
        ]
        for r in usable
    }
    wave = [c for own in samples.values() for c, _ in own]
    wave += [c for own in faulty.values() for _, c in own]
    answers = dict(zip((c.name for c in wave), solver.solve(wave), strict=True))
    found: list[RampStep] = []
    for rung in steps:
        name = rung.condition.name
        answer = sound[name]
        if not isinstance(answer, Settled):
            why = unanswered(answer, name)
            found.append(replace(_step(rung), unanswered=(why,) if why is not None else ()))
            continue
        drawn = read(probes, answer.waves, circuit=circuit)
        shown = meters.get(name, {})
        if name in samples:
            taken = [(answers[c.name], line) for c, line in samples[name]]
            own = _banded(circuit, probes, drawn, taken, shown)
        else:
            held = next(step for step in found if step.name == stock.NOMINAL)
            own = carried(
                probes, held.bands, drawn=drawn, shown=shown, factor=rung.share / held.share
            )
        seen = [
            _seen(circuit, rung, d, answers[c.name], healthy=answer, case=c, probes=probes)
            for d, c in faulty[name]
        ]
        idle = [Seen(danger=d, idle=True) for d in tried if d.fault.position not in live[name]]
        found.append(
            replace(
                _step(rung),
                bands=own,
                seen=(*seen, *idle),
            )
        )
    return Ramp(probes=probes, steps=tuple(found), dangers=tuple(dangers))


def _like_nominal(rung: Rung, usable: Sequence[Rung]) -> bool:
    """Tell whether the spread of a step is that of the nominal one: the same tubes, as warm."""
    nominal = next((r for r in usable if r.condition.name == stock.NOMINAL), None)
    return (
        nominal is not None
        and rung.condition.name == stock.HIGH
        and rung.emission == nominal.emission
    )


def _healthy(
    circuit: Circuit, healthy: Healthy, steps: Sequence[Rung], solver: Solver
) -> list[Answer]:
    """Return the healthy answers, those of the stock conditions as they are held already."""
    held = healthy.settled
    cases = [case(circuit, healthy, r) for r in steps if r.condition.name not in held]
    solved = dict(zip((c.name for c in cases), solver.solve(cases), strict=True))
    return [held.get(r.condition.name) or solved[r.condition.name] for r in steps]


def _live(answer: Answer, positions: Mapping[str, Position]) -> frozenset[str]:
    """Return the positions that bear enough voltage for a fault to show."""
    assert isinstance(answer, Settled)
    return frozenset(
        name
        for name, position in positions.items()
        if float(np.abs(answer.waves.voltage(*position.nodes)).max()) > IDLE_V
    )


def _step(rung: Rung) -> RampStep:
    return RampStep(
        name=rung.condition.name,
        share=rung.share,
        line_V=rung.condition.line_V,
        emission=rung.emission,
    )


def _banded(
    circuit: Circuit,
    probes: tuple[Probe, ...],
    drawn: Mapping[str, float],
    taken: Sequence[tuple[Answer, float]],
    meters: Mapping[str, float],
) -> tuple[Band, ...]:
    rows = [
        (read(probes, answer.waves, circuit=circuit), line)
        for answer, line in taken
        if isinstance(answer, Settled)
    ]
    return bands(circuit, probes, drawn=drawn, rows=rows, shown=meters)


def _seen(
    circuit: Circuit,
    rung: Rung,
    danger: Danger,
    answer: Answer,
    *,
    healthy: Settled,
    case: Case,
    probes: tuple[Probe, ...],
) -> Seen:
    if not isinstance(answer, Settled):
        return Seen(danger=danger, unanswered=unanswered(answer, case.name))
    victims = over(
        all_stresses(circuit, answer.waves, removed=case.removed),
        limits(circuit, condition=rung.condition),
        healthy=all_stresses(circuit, healthy.waves, removed=case.removed),
        but=danger.fault.position,
        assumed=False,
    )
    return Seen(
        danger=danger,
        values=read(probes, answer.waves, circuit=circuit),
        victims=timed(victims, circuit),
    )

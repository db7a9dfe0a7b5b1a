"""The working stress of every position and part, condition by condition."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from stress.circuit.circuit import Circuit, Part
from stress.engine.case import Answer, Case, Settled, Twin, Unsolved, Wandering, Waves
from stress.engine.solver import Solver
from stress.engine.twin import build, esr_of
from stress.study import conditions as stock
from stress.study.between import with_leaks_between
from stress.study.fault import Fault, applied
from stress.study.measure import harmonics, part_stresses, position_stress
from stress.study.result import (
    Condition,
    PositionStress,
    Trace,
    Unanswered,
    Working,
)

PICTURED = (stock.NOMINAL, stock.HIGH, stock.DRIVEN)
FIRST_LOOK = f"{stock.NOMINAL}, first look"


@dataclass(frozen=True, slots=True, kw_only=True)
class Healthy:
    """The healthy equipment in every condition, and what its faults start from.

    Attributes:
        twin: With every assumed ESR taken at the position's own ripple frequency.
        plus: Position name to the index of its plus side.
        esr_ohm: Position name to what it was simulated with.
        settled: Condition name to its settled answer, where it has one.
    """

    twin: Twin
    plus: Mapping[str, int]
    esr_ohm: Mapping[str, float]
    settled: Mapping[str, Settled]
    working: Working


def work(circuit: Circuit, *, solver: Solver, also: tuple[Fault, ...] = ()) -> Healthy:
    """Solve every condition of the healthy equipment and measure it.

    "Healthy" but for the known faults in `also`, which then are in every case.

    The first look at `nominal` finds the ripple frequency of every position, at which its
    assumed ESR is then taken (IEC 60384-1: tan δ and ESR belong to a frequency).
    """
    rough = build(circuit)
    wanted = stock.conditions(circuit)
    first = stock.case(circuit, wanted[0], twin=rough, name=FIRST_LOOK)
    looked = next(iter(solver.solve([first])))
    frequencies = _ripple_Hz(circuit, looked)
    usual = 1.0 / circuit.period_s if circuit.period_s else 1000.0
    esr = {
        p.name: esr_of(p, frequency_Hz=frequencies.get(p.name, usual)) for p in circuit.positions
    }
    sound = with_leaks_between(build(circuit, frequency_Hz=frequencies), circuit)
    twin = applied(sound, also, circuit=circuit, esr_ohm=esr)
    cases = [
        stock.case(
            circuit,
            condition,
            twin=twin,
            parent=FIRST_LOOK
            if condition.name == stock.NOMINAL
            else stock.healthy_parent(condition),
        )
        for condition in wanted
    ]
    answers = {case.name: answer for case, answer in zip(cases, solver.solve(cases), strict=True)}
    settled = {name: a for name, a in answers.items() if isinstance(a, Settled)}
    nominal = settled.get(stock.NOMINAL)
    plus = {p.name: _plus(p.plus, p.nodes, nominal) for p in circuit.positions}
    return Healthy(
        twin=twin,
        plus=plus,
        esr_ohm=esr,
        settled=settled,
        working=_measure(circuit, wanted, cases, answers, plus=plus, esr=esr),
    )


def _ripple_Hz(circuit: Circuit, answer: Answer) -> Mapping[str, float]:
    if not isinstance(answer, Settled):
        return {}
    found = {}
    for position in circuit.positions:
        lines = harmonics(answer.waves.time_s, answer.waves.current(position.name))
        if lines:
            found[position.name] = max(lines, key=lambda line: line[1])[0]
    return found


def _plus(stated: int | None, nodes: tuple[str, str], nominal: Settled | None) -> int:
    """Return the index of the plus side: as stated, else where the nominal mean is positive."""
    if stated is not None or nominal is None:
        return stated or 0
    return 0 if nominal.waves.mean(nominal.waves.voltage(*nodes)) >= 0.0 else 1


def _measure(
    circuit: Circuit,
    wanted: tuple[Condition, ...],
    cases: list[Case],
    answers: Mapping[str, Answer],
    *,
    plus: Mapping[str, int],
    esr: Mapping[str, float],
) -> Working:
    positions: dict[str, dict[str, PositionStress]] = {p.name: {} for p in circuit.positions}
    parts: dict[str, dict[str, Mapping[str, float]]] = {part.name: {} for part in circuit.parts}
    nodes: dict[str, dict[str, float]] = {}
    traces: dict[str, tuple[Trace, ...]] = {p.name: () for p in circuit.positions}
    notices: list[str] = []
    for case in cases:
        answer = answers[case.name]
        if not isinstance(answer, Unsolved):
            notices += answer.notices
        if not isinstance(answer, Settled):
            continue
        waves = answer.waves
        for position in circuit.positions:
            positions[position.name][case.condition] = position_stress(
                position,
                waves,
                plus=plus[position.name],
                esr_ohm=esr[position.name],
                case=case.name,
                distance=answer.proof.distance,
            )
            if case.condition in PICTURED:
                traces[position.name] += (
                    _trace(case.condition, position.nodes, position.name, waves),
                )
        for part, stresses in stresses_of(circuit, waves, removed=case.removed).items():
            parts[part][case.condition] = stresses
        for node, volts in node_means(waves).items():
            nodes.setdefault(node, {})[case.condition] = volts
    return Working(
        conditions=wanted,
        positions=positions,
        parts=parts,
        nodes=nodes,
        traces=traces,
        proofs={name: a.proof for name, a in answers.items() if isinstance(a, Settled)},
        unanswered=tuple(
            u for case in cases if (u := unanswered(answers[case.name], case.name)) is not None
        ),
        notices=tuple(dict.fromkeys(notices)),
    )


def _trace(condition: str, nodes: tuple[str, str], name: str, waves: Waves) -> Trace:
    return Trace(
        condition=condition,
        time_s=waves.time_s,
        voltage_V=waves.voltage(*nodes),
        current_A=waves.current(name),
    )


def stresses_of(
    circuit: Circuit, waves: Waves, *, removed: frozenset[str] = frozenset()
) -> Mapping[str, Mapping[str, float]]:
    """Return the stresses of every part that is there, by part name."""
    found = {}
    for part in circuit.parts:
        stresses = part_stresses(
            part, waves, removed=removed, heater_bias_V=_heater_bias(circuit, part)
        )
        if stresses:
            found[part.name] = stresses
    return found


def _heater_bias(circuit: Circuit, part: Part) -> float:
    entry = circuit.sheet.tubes.get(part.name.lower())
    return (entry.heater_bias_V or 0.0) if entry else 0.0


def node_means(waves: Waves) -> Mapping[str, float]:
    """Return the mean voltage of every node of the netlist against ground."""
    return {
        name[2:-1]: waves.mean(waves.values[row])
        for row, name in enumerate(waves.names)
        if name.startswith("v(") and "#" not in name
    }


def unanswered(answer: Answer, case: str) -> Unanswered | None:
    """Return why a case has no number, or None where it has."""
    match answer:
        case Unsolved(reason=reason):
            return Unanswered(case=case, kind="unsolved", text=reason)
        case Wandering(unstable=True, text=text):
            return Unanswered(case=case, kind="unstable", text=text)
        case Wandering(text=text):
            return Unanswered(case=case, kind="does not settle", text=text)
        case _:
            return None

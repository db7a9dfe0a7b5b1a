"""A filament lamp in series with the line: what it leaves for the equipment, and what it tells.

The lamp is a resistance that follows its own rms voltage: its current goes with the 0.55th power
of the voltage (lamp rerating: Standard Handbook for Electrical Engineers, Fink and Beaty, 11th
edition 1978, page 22-8, as restated in an encyclopedia; the page itself was not seen), down to
the cold filament, about a twelfth of the hot one (common practice). It is settled with the
equipment by repetition: the law turns a change of resistance into less than half of it, so that
the steps close in.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from stress.circuit.circuit import Circuit, Kind, Position, Role
from stress.engine.case import Case, Settled, Twin
from stress.engine.solver import Solver
from stress.netlist.flat import Element
from stress.study import conditions as stock
from stress.study.between import leaks_between
from stress.study.fault import values
from stress.study.plan import Plan, run
from stress.study.power_probe import SUPPLY
from stress.study.power_result import Danger, Lamp, LampReading
from stress.study.ramp import emitted, factors
from stress.study.result import Condition, Unanswered
from stress.study.working import Healthy, unanswered

EXPONENT = 0.55  # of current against voltage
COLD_SHARE = 1.0 / 12.0
RATINGS_W = (15.0, 25.0, 40.0, 60.0, 100.0, 150.0, 200.0, 300.0, 500.0)
FACTOR = 1.25  # of the equipment's power: enough left to work, little enough to be safe
ROUNDS, CLOSE = 8, 0.02
GLOWS, MORE = 0.2, 1.25  # of rated voltage from which a filament shows, and what is seen as more
LAMP = "Rlamp#series"
MOST_FAULTS = 10


@dataclass(frozen=True, slots=True, kw_only=True)
class _Bench:
    """What all lamp cases have in common."""

    circuit: Circuit
    healthy: Healthy
    twin: Twin
    source: str
    rated_W: float
    positions: Mapping[str, Position]
    preheated: frozenset[str]


def resistance_ohm(volts: float, *, rated_W: float, rated_V: float) -> float:
    """Return the resistance of a filament at an rms voltage."""
    hot = rated_V * rated_V / rated_W
    share = max(abs(volts) / rated_V, 1e-9)
    return float(max(hot * share ** (1.0 - EXPONENT), hot * COLD_SHARE))


def rating_W(power_W: float) -> float:
    """Return the lamp for an equipment that takes this power."""
    return next((w for w in RATINGS_W if w >= FACTOR * power_W), RATINGS_W[-1])


def lamp(
    circuit: Circuit,
    *,
    healthy: Healthy,
    dangers: Sequence[Danger],
    power_W: float | None,
    solver: Solver,
    preheated: frozenset[str] = frozenset(),
) -> Lamp | None:
    """Return the lamp and its readings; None where it cannot be put in series in the netlist.

    Args:
        circuit: The equipment.
        healthy: Its settled conditions.
        dangers: Of each position the worst one is tried, at most ten positions.
        power_W: What the healthy equipment takes from the line.
        solver: Solves the repetitions side by side.
        preheated: Parts whose filaments have full voltage, whatever the lamp leaves.
    """
    if len(circuit.line.sources) != 1 or power_W is None:
        return None
    source = circuit.line.sources[0]
    twin = _with_lamp(healthy.twin, source)
    bench = _Bench(
        circuit=circuit,
        healthy=healthy,
        twin=twin,
        source=source,
        rated_W=rating_W(power_W),
        positions={p.name: p for p in (*circuit.positions, *leaks_between(circuit))},
        preheated=preheated,
    )
    tried = _worst(dangers, coupling=frozenset(_coupling(circuit)))
    (first,) = run([_settle(bench, None, near=None)], solver=solver)
    sound = first if first.unanswered is None else None
    rest = run([_settle(bench, danger, near=sound) for danger in tried], solver=solver)
    return Lamp(
        rated_W=bench.rated_W,
        rated_V=circuit.line.nominal_V,
        healthy=sound,
        faulty=tuple(_told(reading, sound) for reading in rest),
        text="A lamp finds shorts and heavy leaks of the supply. It does not find a leaky "
        "coupling capacitor: the tube that it ruins takes a few watts more.",
    )


def _coupling(circuit: Circuit) -> list[str]:
    return [p.name for p in circuit.positions if p.role is Role.COUPLING]


def _worst(dangers: Sequence[Danger], *, coupling: frozenset[str]) -> list[Danger]:
    """Return for each position its short, else its worst leak; of a coupling its first leak."""
    worst: dict[str, Danger] = {}
    for danger in dangers:
        name = danger.fault.position
        held = worst.get(name)
        worse = danger.fault.kind == "short" or (held is not None and held.fault.kind == "leaky")
        if held is None or (worse and name not in coupling):
            worst[name] = danger
    shorts_first = sorted(worst.values(), key=lambda d: d.fault.kind != "short")
    return shorts_first[:MOST_FAULTS]


def _with_lamp(twin: Twin, source: str) -> Twin:
    """Return the twin with the lamp between the line source and everything else."""
    line = next(e for e in twin.elements if e.name.lower() == source.lower())
    outer = f"{line.nodes[0]}#lamp"
    lamp = Element(name=LAMP, letter="R", nodes=(outer, line.nodes[0]), value=1e-3, span=line.span)
    elements = tuple(
        replace(e, nodes=(outer, *e.nodes[1:])) if e is line else e for e in twin.elements
    )
    return replace(twin, elements=(*elements, lamp))


def _settle(bench: _Bench, danger: Danger | None, *, near: LampReading | None) -> Plan[LampReading]:
    """Repeat until the lamp's resistance and the heaters fit what they get."""
    circuit, nominal_V = bench.circuit, bench.circuit.line.nominal_V
    fault = str(danger.fault) if danger is not None else ""
    lamp_V, share = 0.3 * nominal_V, 0.8
    if near is not None:
        lamp_V, share = near.lamp_V, near.equipment_V / nominal_V
    parent: str | None = stock.NOMINAL
    line = next(e for e in bench.twin.elements if e.name.lower() == bench.source.lower())
    inner = line.nodes[0].removesuffix("#lamp")
    for turn in range(ROUNDS):
        case = _case(bench, danger, lamp_V=lamp_V, share=share, turn=turn, parent=parent)
        (answer,) = yield (case,)
        if not isinstance(answer, Settled):
            why = unanswered(answer, case.name)
            return LampReading(
                fault=fault, lamp_V=0.0, equipment_V=0.0, current_A=0.0, glow=0.0, unanswered=why
            )
        waves = answer.waves
        across = waves.rms(waves.voltage(line.nodes[0], inner))
        left = waves.rms(waves.voltage(inner, line.nodes[1]))
        reading = LampReading(
            fault=fault,
            lamp_V=across,
            equipment_V=left,
            current_A=waves.rms(waves.current(bench.source)),
            glow=across / nominal_V,
            supply_V=_supply(circuit, answer),
        )
        close = CLOSE * nominal_V
        if abs(across - lamp_V) < close and abs(left - share * nominal_V) < close:
            return reading
        # The heaters follow slowly, and their tubes pull the other way: go half the way.
        parent, lamp_V, share = case.name, across, (share + left / nominal_V) / 2.0
    text = "lamp and heaters pull each other up and down: it flickers"
    return replace(
        reading, unanswered=Unanswered(case=case.name, kind="does not settle", text=text)
    )


def _case(
    bench: _Bench,
    danger: Danger | None,
    *,
    lamp_V: float,
    share: float,
    turn: int,
    parent: str | None,
) -> Case:
    circuit = bench.circuit
    warm = {
        part.name: 1.0 if part.name in bench.preheated else emitted(circuit, part, share)
        for part in circuit.parts
        if part.kind in (Kind.TUBE, Kind.RECTIFIER)
    }
    ohm = resistance_ohm(lamp_V, rated_W=bench.rated_W, rated_V=circuit.line.nominal_V)
    changed: dict[str, float] = {**factors(circuit, warm), LAMP: ohm}
    name = "lamp"
    if danger is not None:
        fault = danger.fault
        esr = bench.healthy.esr_ohm.get(fault.position, 0.0)
        changed |= values(fault, bench.positions[fault.position], esr_ohm=esr)
        name = f"lamp / {fault}"
    condition = Condition(
        name="lamp",
        line_V=circuit.line.nominal_V,
        pulled=tuple(part for part, value in warm.items() if value == 0.0),
    )
    return stock.case(
        circuit,
        condition,
        twin=bench.twin,
        name=f"{name}, round {turn + 1}",
        fault=str(danger.fault) if danger is not None else "",
        parent=parent,
        values=changed,
    )


def _supply(circuit: Circuit, answer: Settled) -> Mapping[str, float]:
    nodes = [
        node
        for position in circuit.positions
        if position.role in SUPPLY
        for node in position.nodes
        if node != "0"
    ]
    return {node: answer.waves.mean(answer.waves.voltage(node)) for node in dict.fromkeys(nodes)}


def _told(reading: LampReading, sound: LampReading | None) -> LampReading:
    if sound is None or reading.unanswered is not None:
        return reading
    brighter = reading.glow >= GLOWS and reading.glow >= MORE * max(sound.glow, GLOWS)
    return replace(reading, tells=brighter)

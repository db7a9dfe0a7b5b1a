"""The plan before the first switch-on, put together."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from stress.circuit.circuit import Circuit, Kind
from stress.engine.solver import Solver
from stress.finding import Severity
from stress.judge.abort import steps
from stress.judge.power_caution import power_cautions
from stress.judge.power_method import look, method
from stress.study import conditions as stock
from stress.study.between import leaks_between
from stress.study.fault import across_ideal_source
from stress.study.lamp import lamp
from stress.study.power_danger import dangers
from stress.study.power_ohms import ohm_probes, ohm_step
from stress.study.power_probe import probes
from stress.study.power_result import Kind as Meter
from stress.study.power_result import PowerUp, Ramp, Work
from stress.study.ramp import ramp
from stress.study.result import Failure, Leakage, Risk
from stress.study.switch_on import switch_on
from stress.study.tell_tale import tell_tales
from stress.study.working import Healthy


def power_up(
    circuit: Circuit,
    *,
    healthy: Healthy,
    leakage: Mapping[str, Leakage],
    failures: Mapping[str, tuple[Failure, ...]],
    risks: Sequence[Risk],
    solver: Solver,
    shares: Sequence[float] = (),
) -> PowerUp:
    """Return the plan of the first power-up.

    Args:
        circuit: The equipment.
        healthy: With its inrush.
        leakage, failures: Which faults do damage at full line.
        risks: The order of work.
        solver: The one that solved those, so that nothing is solved twice.
        shares: Line voltages of the steps in parts of the nominal one; empty: the method's.
    """
    nominal = healthy.settled.get(stock.NOMINAL)
    nodes = {n: v[stock.NOMINAL] for n, v in healthy.working.nodes.items() if stock.NOMINAL in v}
    way = method(circuit, nodes=nodes)
    hot = frozenset(look(circuit, nodes=nodes).mercury)
    found = dangers(leakage, failures)
    climbed = ramp(
        circuit,
        healthy=healthy,
        dangers=found,
        probes=probes(circuit, nominal=nominal),
        solver=solver,
        shares=tuple(shares) or way.shares,
        preheated=hot,
    )
    ohms = ohm_probes(circuit)
    dead = ohm_step(
        circuit,
        healthy=healthy,
        dangers=found,
        probes=ohms,
        positions={p.name: p for p in (*circuit.positions, *leaks_between(circuit))},
        solver=solver,
    )
    climbed = replace(climbed, probes=(*ohms, *climbed.probes), steps=(dead, *climbed.steps))
    bulb = None
    if way.lamp:
        bulb = lamp(
            circuit,
            healthy=healthy,
            dangers=found,
            power_W=_power_W(climbed),
            solver=solver,
            preheated=hot,
        )
    first = switch_on(circuit, healthy=healthy, solver=solver)
    return PowerUp(
        method=way,
        work=tuple(
            Work(severity=severity, where=risk.position, text=risk.reason)
            for severity in Severity
            for risk in sorted(risks, key=lambda r: r.rank)
            if risk.severity is severity
        ),
        probes=climbed.probes,
        steps=steps(climbed),
        lamp=bulb,
        tell_tales=tell_tales(climbed),
        switch_on=first,
        cautions=power_cautions(circuit, working=healthy.working),
        missing=_missing(circuit),
        unanswered=(
            *(u for step in climbed.steps for u in step.unanswered),
            *(s.unanswered for step in climbed.steps for s in step.seen if s.unanswered),
            *(first.unanswered if first else ()),
            *(r.unanswered for r in (bulb.faulty if bulb else ()) if r.unanswered),
        ),
    )


def _power_W(climbed: Ramp) -> float | None:
    step = next((s for s in climbed.steps if s.name == stock.NOMINAL), None)
    key = next((p.key for p in climbed.probes if p.kind is Meter.LINE_W), None)
    band = step.band(key) if step is not None and key is not None else None
    return band.value if band is not None else None


def _missing(circuit: Circuit) -> tuple[str, ...]:
    """Return what the line readings lack because the netlist does not hold it."""
    found = []
    windings = any(part.kind is Kind.WINDING for part in circuit.parts)
    tubes = any(part.kind in (Kind.TUBE, Kind.RECTIFIER) for part in circuit.parts)
    if circuit.line.sources and tubes:
        found.append(
            "Line current and power hold heaters, lamps and magnetising current only as far as "
            "the netlist draws them, heaters with their hot resistance; iron loss is not in it."
        )
    if circuit.line.sources and not windings:
        found.append("No transformer is drawn: its magnetising current and losses are missing.")
    across = [p.name for p in circuit.positions if across_ideal_source(circuit, p)]
    if across:
        found.append(
            f"{', '.join(across)}: right across a source that nothing in the netlist limits; a "
            "short there blows the fuse before any reading warns. Test the part first."
        )
    return tuple(found)

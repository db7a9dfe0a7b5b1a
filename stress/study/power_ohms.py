"""The ohmmeter before any power: supply nodes to the common one, plug out, everything cold.

It finds shorts and what is as good as one: a leak of more than a kilohm may show at working
voltage only, so it is not counted here although the simulated one is a plain resistor.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import inf

from stress.circuit.circuit import Circuit, Position
from stress.engine.case import Case, Settled, Steady
from stress.engine.solver import Solver
from stress.netlist.flat import Element
from stress.study.fault import values
from stress.study.in_place import QUIET_V, unplugged
from stress.study.power_probe import SUPPLY
from stress.study.power_result import Band, Danger, Kind, Probe, RampStep, Seen
from stress.study.working import Healthy

NAME = "plug out"
SHARE = 0.5  # of the healthy resistance, and the largest limit that is told (common practice)
MOST_OHM = 10e3
METER_OHM = 100.0  # in series with the test voltage
NOTHING_OHM = 20e6  # what a meter shows as open
SHORT_OHM = 1e3  # a leak up to this is a short to an ohmmeter (a convention)
_SOURCE, _SERIES = "Vohms#meter", "Rohms#meter"


def ohm_probes(circuit: Circuit) -> tuple[Probe, ...]:
    """Return the supply nodes that an ohmmeter is put on."""
    found: dict[str, Probe] = {}
    for position in circuit.positions:
        if position.role in SUPPLY:
            for node in position.nodes:
                if node != "0" and node not in found:
                    found[node] = Probe(
                        key=f"{node} {Kind.OHM.value}",
                        kind=Kind.OHM,
                        node=node,
                        text=f"at {position.name} ({node})",
                        effort=1,
                    )
    return tuple(found.values())


def shorted(danger: Danger) -> bool:
    """Tell whether a fault is a short to an ohmmeter."""
    ohm = danger.fault.ohm
    return danger.fault.kind == "short" or (ohm is not None and ohm <= SHORT_OHM)


def ohm_step(
    circuit: Circuit,
    *,
    healthy: Healthy,
    dangers: Sequence[Danger],
    probes: Sequence[Probe],
    positions: Mapping[str, Position],
    solver: Solver,
) -> RampStep:
    """Return the step with the plug out: what is read when healthy and with every short."""
    shorts = [d for d in dangers if shorted(d)]
    asked: list[tuple[Danger | None, Probe]] = [
        (danger, probe) for danger in (None, *shorts) for probe in probes
    ]
    cases = [_case(circuit, healthy, probe, danger, positions) for danger, probe in asked]
    ohms: dict[tuple[str, str], float] = {}
    for (danger, probe), answer in zip(asked, solver.solve(cases), strict=True):
        if isinstance(answer, Settled):
            amps = abs(answer.waves.mean(answer.waves.current(_SOURCE)))
            shown = QUIET_V / amps - METER_OHM if amps > 0.0 else inf
            fault = str(danger.fault) if danger is not None else ""
            ohms[fault, probe.key] = inf if shown > NOTHING_OHM else max(shown, 0.0)
    bands = tuple(
        Band(
            probe=probe.key,
            value=ohms["", probe.key],
            low=min(SHARE * ohms["", probe.key], MOST_OHM),
            high=inf,
            shown=ohms["", probe.key],
        )
        for probe in probes
        if ("", probe.key) in ohms
    )
    seen = tuple(
        Seen(
            danger=danger,
            values={
                p.key: ohms[str(danger.fault), p.key]
                for p in probes
                if (str(danger.fault), p.key) in ohms
            },
        )
        for danger in shorts
    )
    return RampStep(name=NAME, share=0.0, line_V=0.0, bands=bands, seen=seen)


def _case(
    circuit: Circuit,
    healthy: Healthy,
    probe: Probe,
    danger: Danger | None,
    positions: Mapping[str, Position],
) -> Case:
    bench = unplugged(healthy.twin, circuit=circuit)
    span = healthy.twin.elements[0].span
    meter = (
        Element(name=_SOURCE, letter="V", nodes=("ohms#meter", "0"), value=QUIET_V, span=span),
        Element(
            name=_SERIES, letter="R", nodes=("ohms#meter", probe.node), value=METER_OHM, span=span
        ),
    )
    changed: Mapping[str, float] = {}
    if danger is not None:
        esr = healthy.esr_ohm.get(danger.fault.position, 0.0)
        changed = values(danger.fault, positions[danger.fault.position], esr_ohm=esr)
    fault = str(danger.fault) if danger is not None else "healthy"
    return Case(
        name=f"{NAME}, ohms at {probe.node} / {fault}",
        twin=replace(bench, elements=(*bench.elements, *meter)),
        condition=NAME,
        fault=fault,
        values=changed,
        analysis=Steady(),
    )

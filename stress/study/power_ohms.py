"""The ohmmeter before any power: supply nodes to the common one, plug out, everything cold.

It finds shorts and what is as good as one. Which leaks that is, nobody publishes; the convention
here: up to 1 kohm in any part, up to 100 kohm in paper, film and the like, whose leaks conduct at
any voltage, while a bad electrolytic may show at working voltage only.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from math import inf

from stress.circuit.circuit import Circuit, Position, Role
from stress.engine.case import Case, Settled, Steady
from stress.engine.solver import Solver
from stress.netlist.flat import Element
from stress.study.between import leaks_between
from stress.study.fault import values
from stress.study.in_place import QUIET_V, unplugged
from stress.study.power_probe import SUPPLY
from stress.study.power_result import Band, Danger, Kind, Probe, RampStep, Seen
from stress.study.working import Healthy

NAME = "plug out"
SHARE = 0.7  # of the healthy resistance, and the largest limit that is told (common practice)
MOST_OHM = 50e3
METER_OHM = 100.0  # in series with the test voltage
NOTHING_OHM = 20e6  # what a meter shows as open
SHORT_OHM, DRY_SHORT_OHM = 1e3, 100e3  # a leak up to this shows: in any part, in a dry one
_SOURCE, _SERIES = "Vohms#meter", "Rohms#meter"


def ohm_probes(circuit: Circuit) -> tuple[Probe, ...]:
    """Return where an ohmmeter is put: plug, supply nodes, bypassed cathodes, sections of cans."""
    found: dict[str, Probe] = {}
    for a, b in _plug(circuit):
        found[f"{a} to {b}"] = _probe(a, b, f"at the plug, {a} to {b}")
    for position in circuit.positions:
        if position.role in SUPPLY or position.role is Role.CATHODE_BYPASS:
            for node in position.nodes:
                if node != "0" and node not in found:
                    found[node] = _probe(node, "0", f"at {position.name} ({node})")
    for leak in leaks_between(circuit):
        a, b = leak.nodes
        if "0" not in leak.nodes:
            found[f"{a} to {b}"] = _probe(a, b, f"between {a} and {b}")
    return tuple(found.values())


def _plug(circuit: Circuit) -> list[tuple[str, str]]:
    """Return the pairs of nodes at the plug: pole to pole, each pole to what can be touched."""
    sources = {name.lower() for name in circuit.line.sources}
    pairs = []
    for element in circuit.netlist.elements:
        if element.name.lower() in sources and element.wave is not None:
            poles = element.nodes[:2]
            pairs.append((poles[0], poles[1]))
            others = sorted({"0", *circuit.touchable} - set(poles))
            pairs += [(pole, node) for pole in poles if pole != "0" for node in others]
    return [pair for pair in pairs if pair[0] != "0"]


def _probe(node: str, against: str, text: str) -> Probe:
    key = node if against == "0" else f"{node} to {against}"
    return Probe(
        key=f"{key} {Kind.OHM.value}",
        kind=Kind.OHM,
        node=node,
        against=against,
        text=text,
        effort=1,
    )


def shorted(danger: Danger, position: Position) -> bool:
    """Tell whether a fault is a short to an ohmmeter."""
    ohm = danger.fault.ohm
    most = SHORT_OHM if position.style.polar else DRY_SHORT_OHM
    return danger.fault.kind == "short" or (ohm is not None and ohm <= most)


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
    shorts = [d for d in dangers if shorted(d, positions[d.fault.position])]
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
        Element(
            name=_SOURCE, letter="V", nodes=("ohms#meter", probe.against), value=QUIET_V, span=span
        ),
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
        name=f"{NAME}, {probe.key} / {fault}",
        twin=replace(bench, elements=(*bench.elements, *meter)),
        condition=NAME,
        fault=fault,
        values=changed,
        analysis=Steady(),
    )

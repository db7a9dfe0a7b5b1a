"""How long it stays dangerous after switching off.

Every position is followed by simulation from the settled state at high line: line sources at
0 V, windings closed, tubes conducting as when hot, or cold, or with one pulled. Beside it stands
the closed form RC·ln(V/V_safe), with the direct-current resistance across the position when the
plug is out and nothing conducts. What the line itself charges is told by the closed form only:
it is left at the peak when the plug comes out at the worst moment.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import inf

from stress.circuit.circuit import Circuit, Kind, Position
from stress.engine.case import Case, Ran, Transient, Twin
from stress.engine.solver import Solver
from stress.engine.twin import MOST_LEAKAGE_OHM, insulation_of
from stress.study import conditions as stock
from stress.study import in_place
from stress.study.discharge_advice import NO_PATH_OHM, advice, cautions, no_bleed
from stress.study.discharge_fall import decay
from stress.study.discharge_law import class_V, deadly, energy_J, fall_s, resistor
from stress.study.discharge_result import (
    COLD,
    CONDUCTING,
    OFF,
    SAFE_V,
    THRESHOLDS_V,
    Charge,
    Decay,
    Discharge,
)
from stress.study.plan import Plan, run
from stress.study.result import Condition, Unanswered
from stress.study.working import Healthy, unanswered

STOPS_S = (2.0, 40.0, 800.0, 16000.0)
STEPS = 1000  # of each run; each starts anew, so that what falls fast is seen finely
FAST_S = 1e-3  # a period below this is that of a switching supply
HOLDS_S = 300.0
SAME = 0.999  # of the highest voltage
AC_ONLY = 0.05  # share of the peak below which the mean counts as none
LEAST_V = 1.0  # positions that never bear more are left out


@dataclass(frozen=True, slots=True, kw_only=True)
class _Fall:
    """One way of switching off: the fall of every position, and what was not solved."""

    decays: Mapping[str, Decay]
    failed: tuple[Unanswered, ...]


def discharge(circuit: Circuit, *, healthy: Healthy, solver: Solver) -> Discharge:
    """Return what every position holds after switching off, the worst first.

    Args:
        circuit: The equipment.
        healthy: Its settled conditions.
        solver: The one that settled them.
    """
    starts = {p.name: _start(p.name, healthy) for p in circuit.positions if p.value_F}
    followed = [p for p in circuit.positions if p.name in starts and starts[p.name][0] > LEAST_V]
    decays: dict[str, list[Decay]] = {p.name: [] for p in followed}
    failed: list[Unanswered] = []
    simulated = [p for p in followed if not _alternating(p, healthy)]
    falls = run(
        [
            _follow(circuit, healthy, condition, simulated, how=how)
            for how, condition in _ways(circuit, healthy)
        ],
        solver=solver,
    )
    for fall in falls:
        failed += fall.failed
        for name, own in fall.decays.items():
            decays[name].append(own)
    dry = _without_leakage(healthy.twin)
    around = run(
        [in_place.plan(p, circuit=circuit, twin=dry, test_V=starts[p.name][0]) for p in followed],
        solver=solver,
    )
    earthed = grounded(circuit)
    charges = [
        _charge(
            position,
            *starts[position.name],
            bleed_ohm=past.direct_ohm,
            floating=not earthed & set(position.nodes),
            decays=tuple(decays[position.name]),
        )
        for position, past in zip(followed, around, strict=True)
    ]
    failed += [u for past in around for u in past.unanswered if "test voltage" in u.case]
    ordered = tuple(sorted(charges, key=_order))
    return Discharge(
        charges=ordered,
        advice=advice(ordered),
        cautions=cautions(circuit),
        unanswered=tuple(failed),
    )


def _order(charge: Charge) -> tuple[bool, float]:
    return not no_bleed(charge), -charge.energy_J


def _start(name: str, healthy: Healthy) -> tuple[float, str]:
    """Return the highest steady voltage of a position by size, and its condition."""
    by = healthy.working.positions.get(name, {})
    most = max((stress.peak_V for stress in by.values()), default=0.0)
    # Of conditions that are as good as equal the first, which is the plainest, is named.
    return most, next((name for name, stress in by.items() if stress.peak_V >= SAME * most), "")


def _alternating(position: Position, healthy: Healthy) -> bool:
    """Tell whether a position bears alternating voltage only.

    What it holds depends on the moment of switching off; the closed form takes the worst one.
    """
    by = healthy.working.positions.get(position.name, {})
    return all(abs(stress.dc_V) < AC_ONLY * stress.peak_V for stress in by.values())


def _without_leakage(twin: Twin, *, but: frozenset[str] = frozenset()) -> Twin:
    """Return the twin without the leakage of any part, which is no bleed path.

    Args:
        twin: The circuit.
        but: Positions whose leakage stays, lower case.
    """
    return replace(
        twin,
        elements=tuple(
            replace(e, value=MOST_LEAKAGE_OHM)
            if e.name.endswith("#leak") and e.name.lower().removesuffix("#leak") not in but
            else e
            for e in twin.elements
        ),
    )


def _stated(circuit: Circuit) -> frozenset[str]:
    """Return the positions whose insulation was measured or stated; an assumed one may be tighter."""
    return frozenset(p.name.lower() for p in circuit.positions if p.insulation_ohm is not None)


def _ways(circuit: Circuit, healthy: Healthy) -> list[tuple[str, Condition]]:
    """Return the ways of switching off that have a settled state to start from."""
    tubes = any(part.kind is Kind.TUBE for part in circuit.parts)
    found = []
    for condition in healthy.working.conditions:
        if condition.name not in healthy.settled:
            continue
        if condition.name == (stock.HIGH if circuit.line.sources else stock.NOMINAL):
            found.append((CONDUCTING if tubes else OFF, condition))
        elif condition.cold and tubes:
            found.append((COLD, condition))
        elif condition.pulled:
            found.append((f"{', '.join(condition.pulled)} pulled", condition))
    return found


def _follow(
    circuit: Circuit,
    healthy: Healthy,
    condition: Condition,
    positions: Sequence[Position],
    *,
    how: str,
) -> Plan[_Fall]:
    """Run ever longer until every position is below the lowest threshold."""
    runs: list[Ran] = []
    failed: list[Unanswered] = []
    for stop in STOPS_S:
        case = _off(circuit, healthy, condition, positions, stop_s=stop)
        (answer,) = yield (case,)
        if not isinstance(answer, Ran):
            why = unanswered(answer, case.name)
            failed += [why] if why is not None else []
            break
        runs.append(answer)
        ends = (abs(answer.waves.voltage(*p.nodes)[-1]) for p in positions)
        if max(ends, default=0.0) < min(THRESHOLDS_V):
            break
    decays = {}
    for p in positions if runs else ():
        seen = [(r.waves.time_s, abs(r.waves.voltage(*p.nodes))) for r in runs]
        decays[p.name] = decay(how, seen)
    return _Fall(decays=decays, failed=tuple(failed))


def _off(
    circuit: Circuit,
    healthy: Healthy,
    condition: Condition,
    positions: Sequence[Position],
    *,
    stop_s: float,
) -> Case:
    """Return the run from a settled state with the line at 0 V.

    A steady supply is taken away instead, for its plug is out; a switching supply no longer
    switches: its transistors and switches are taken away as well, its gates at rest.
    """
    steady = stock.case(
        circuit, condition, twin=healthy.twin, name=f"off from {condition.name}, {stop_s:g} s"
    )
    nodes = {node for p in positions for node in p.nodes if node != "0"}
    sources = {name.lower() for name in circuit.line.sources}
    named = {e.name.lower(): e for e in circuit.netlist.elements}
    direct = {name for name in sources if named[name].wave is None}
    gone = set(steady.removed) | direct
    if circuit.period_s is not None and circuit.period_s < FAST_S:
        gone |= {e.name.lower() for e in circuit.netlist.elements if e.letter in "SWQMJZ"}
        gone |= {
            name.lower()
            for part in circuit.parts
            if part.kind is Kind.TRANSISTOR
            for name in part.elements
        }
    quiet = dict.fromkeys((*(sources - direct), *circuit.signals), 0.0)
    return replace(
        steady,
        twin=_ungated(_without_leakage(steady.twin, but=_stated(circuit)), circuit),
        parent=condition.name,
        values={**steady.values, **quiet},
        removed=frozenset(gone),
        analysis=Transient(
            stop_s=stop_s,
            step_s=stop_s / STEPS,
            keep=tuple(f"v({node.lower()})" for node in sorted(nodes)),
        ),
    )


def _ungated(twin: Twin, circuit: Circuit) -> Twin:
    """Return the twin with its gate sources at rest.

    A pulse without amplitude would still hold the solver at each of its edges.
    """
    gates = {name.lower() for name in circuit.gates}
    if not gates:
        return twin
    return replace(
        twin,
        elements=tuple(
            replace(e, wave=None, value=0.0) if e.name.lower() in gates else e
            for e in twin.elements
        ),
    )


def grounded(circuit: Circuit) -> frozenset[str]:
    """Return the nodes with a way for direct current to the common node, nothing conducting."""
    pairs = [
        e.nodes[:2]
        for e in circuit.netlist.elements
        if (e.letter == "R" and (e.value or 0.0) <= NO_PATH_OHM)
        or e.letter == "L"
        or (e.letter == "V" and not e.value and e.wave is None)
    ]
    reached = {"0"}
    while True:
        more = {n for pair in pairs if reached & set(pair) for n in pair} - reached
        if not more:
            return frozenset(reached)
        reached |= more


def _charge(
    position: Position,
    start_V: float,
    condition: str,
    *,
    bleed_ohm: float | None,
    floating: bool,
    decays: tuple[Decay, ...],
) -> Charge:
    farad = position.value_F or 0.0
    first_class, second_class = class_V(farad)
    own = insulation_of(position)
    past = inf if bleed_ohm is None else bleed_ohm
    together = own if past == inf else past
    if past != inf and position.insulation_ohm is not None:
        together = own * past / (own + past)  # an assumed one may be tighter, and does not count
    formula = {v: fall_s(together, farad, start_V=start_V, end_V=v) for v in THRESHOLDS_V}
    slow = [own.below_s.get(SAFE_V) for own in decays] or [formula[SAFE_V]]
    back = position.style.absorption
    return Charge(
        position=position.name,
        value_F=farad,
        start_V=start_V,
        condition=condition,
        energy_J=energy_J(farad, start_V),
        deadly=deadly(farad, start_V),
        class_V=(first_class, second_class),
        bleed_ohm=bleed_ohm,
        insulation_ohm=own,
        floating=floating,
        formula_s=formula,
        holds=any(at is None or at > HOLDS_S for at in slow),
        decays=decays,
        resistor=resistor(farad, start_V) if start_V > first_class else None,
        returns_V=(start_V * back.low, start_V * back.high),
    )

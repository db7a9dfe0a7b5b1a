"""What a short, an open, a dried and a reversed part do to the rest of the equipment."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from stress.circuit.circuit import Circuit, Kind, Position, Role
from stress.engine.case import Answer, Case, Settled
from stress.engine.solver import Solver
from stress.parts.limit import QUANTITIES
from stress.study import conditions as stock
from stress.study.damage_time import timed
from stress.study.detune import timings
from stress.study.fault import Fault, across_ideal_source, values
from stress.study.gain import gain_losses
from stress.study.leak_reading import Scene, open_scene
from stress.study.limits import all_stresses, over
from stress.study.result import Failure, Leakage, Unanswered, Victim
from stress.study.timing import Timing, detuning
from stress.study.unjudged import Unjudged, unjudged
from stress.study.working import Healthy, unanswered
from stress.text.figure import figure

JUDGED = (stock.NOMINAL, stock.HIGH)
KINDS = ("short", "open", "dried", "low", "reversed")
AUDIBLE_V = 1e-3  # rms at a loudspeaker of a few ohm (common practice)
HUM_RATIO = 1.5  # a ripple that grows by half is heard (common practice)
NOT_LIMITED = "not limited by the netlist: fuse or wiring"


@dataclass(frozen=True, slots=True, kw_only=True)
class Try:
    """One failure in one condition, and its answer."""

    scene: Scene
    fault: Fault
    answer: Answer


def kinds_of(position: Position) -> tuple[str, ...]:
    """Return the failures that a part of this style can have."""
    wet = position.style.name.startswith("aluminium") or position.style.name == "tantalum-wet"
    asked = ["short", "open", "low"]
    if wet:
        asked.append("dried")
    if position.style.polar:
        asked.append("reversed")
    return tuple(kind for kind in KINDS if kind in asked)


def failures(
    circuit: Circuit,
    studied: Sequence[Position],
    *,
    healthy: Healthy,
    leakage: Mapping[str, Leakage],
    solver: Solver,
) -> dict[str, tuple[Failure, ...]]:
    """Return every failure of every studied position with a value, by position name.

    A short starts from the worst leak of the same position, its nearest relative.
    """
    conditions = [
        c for c in healthy.working.conditions if c.name in JUDGED and c.name in healthy.settled
    ]
    wanted: list[tuple[Scene, Fault]] = []
    for position in studied:
        if not position.value_F:
            continue
        ideal = across_ideal_source(circuit, position)
        for condition in conditions:
            scene = open_scene(circuit, healthy, position, condition)
            wanted += [
                (scene, Fault(position=position.name, kind=kind))
                for kind in kinds_of(position)
                if kind != "reversed" and not (ideal and kind == "short")
            ]
    cases = [_case(scene, fault, leakage.get(fault.position)) for scene, fault in wanted]
    tries = [
        Try(scene=scene, fault=fault, answer=answer)
        for (scene, fault), answer in zip(wanted, solver.solve(cases), strict=True)
    ]
    gains = gain_losses(circuit, studied, healthy=healthy, solver=solver)
    tuned = timings(circuit)
    results = {}
    for position in studied:
        if position.value_F:
            own = [t for t in tries if t.fault.position == position.name]
            heard = {
                kind: (
                    *_detuned(circuit, tuned.get(position.name), kind),
                    *(str(loss) for loss in gains.get(position.name, ()) if loss.fault == kind),
                )
                for kind in KINDS
            }
            results[position.name] = tuple(_failures_of(circuit, position, own, heard))
    return results


def _case(scene: Scene, fault: Fault, leakage: Leakage | None) -> Case:
    parent = scene.condition.name
    if fault.kind == "short" and leakage is not None:
        for swept in leakage.by_condition:
            if swept.condition == scene.condition.name:
                solved = [p for p in swept.curve[1:] if p.unanswered is None]
                parent = scene.name(solved[-1].ohm) if solved else parent
    esr = scene.healthy.esr_ohm[fault.position]
    return stock.case(
        scene.circuit,
        scene.condition,
        twin=scene.healthy.twin,
        name=f"{scene.condition.name} / {fault}",
        fault=str(fault),
        parent=parent,
        values=values(fault, scene.position, esr_ohm=esr),
    )


def _failures_of(
    circuit: Circuit, position: Position, tries: Sequence[Try], heard: Mapping[str, tuple[str, ...]]
) -> list[Failure]:
    found = []
    for kind in kinds_of(position):
        like = "short" if kind == "reversed" else kind
        own = [t for t in tries if t.fault.kind == like]
        if own:
            found.append(_failure(circuit, position, kind, own, heard[kind]))
        elif like == "short":
            found.append(
                Failure(
                    position=position.name,
                    fault=kind,
                    condition=stock.NOMINAL,
                    victims=(),
                    text=f"{_cause(position, kind)}: {NOT_LIMITED}",
                    dangerous=True,
                    unanswered=Unanswered(
                        case=f"{position.name} {kind}",
                        kind="not limited by the netlist",
                        text=NOT_LIMITED,
                    ),
                )
            )
    return found


def _failure(
    circuit: Circuit,
    position: Position,
    kind: str,
    tries: Sequence[Try],
    heard: tuple[str, ...],
) -> Failure:
    """Return the failure in the condition with the worst victim, nominal where none has one."""
    judged = [(t, _victims(t)) for t in tries]
    worst, victims = max(judged, key=lambda pair: _severity(pair[1]))
    why = next((u for t in tries if (u := unanswered(t.answer, _name(t))) is not None), None)
    consequences = () if kind == "reversed" else (*heard, *_consequences(circuit, worst))
    return Failure(
        position=position.name,
        fault=kind,
        condition=worst.scene.condition.name,
        victims=victims,
        text=_text(position, kind, victims, consequences, why),
        dangerous=any(not v.limit.assumed for v in victims),
        consequences=consequences,
        unjudged=_unjudged(worst),
        unanswered=why,
    )


def _detuned(circuit: Circuit, timing: Timing | None, kind: str) -> tuple[str, ...]:
    text = detuning(timing, kind, circuit=circuit) if timing is not None else ""
    return (text,) if text else ()


def _name(one: Try) -> str:
    return f"{one.scene.condition.name} / {one.fault}"


def _severity(victims: tuple[Victim, ...]) -> float:
    known = [v.stress / v.limit.value for v in victims if not v.limit.assumed]
    assumed = [v.stress / v.limit.value for v in victims if v.limit.assumed]
    return 1e6 * max(known, default=0.0) + max(assumed, default=0.0)


def _victims(one: Try) -> tuple[Victim, ...]:
    if not isinstance(one.answer, Settled):
        return ()
    scene = one.scene
    stresses = all_stresses(scene.circuit, one.answer.waves, removed=scene.removed)
    victims = over(
        stresses, scene.judged, healthy=scene.stresses, but=scene.position.name, assumed=True
    )
    return timed(victims, scene.circuit)


def _unjudged(one: Try) -> tuple[Unjudged, ...]:
    if not isinstance(one.answer, Settled):
        return ()
    stresses = all_stresses(one.scene.circuit, one.answer.waves, removed=one.scene.removed)
    return unjudged(one.scene.circuit, stresses, healthy=one.scene.stresses)


def _consequences(circuit: Circuit, one: Try) -> tuple[str, ...]:
    """Return hum and silence: what is heard though nothing burns."""
    if not isinstance(one.answer, Settled):
        return ()
    healthy = one.scene.healthy.settled[one.scene.condition.name].waves
    faulty, found = one.answer.waves, []
    for position in circuit.positions:
        if position.role not in (Role.RESERVOIR, Role.SMOOTHING, Role.DECOUPLING, Role.BIAS_FILTER):
            continue
        if position.name == one.fault.position and one.fault.kind == "short":
            continue
        was = float(healthy.voltage(*position.nodes).max() - healthy.voltage(*position.nodes).min())
        now = float(faulty.voltage(*position.nodes).max() - faulty.voltage(*position.nodes).min())
        if was > 1e-3 and now > HUM_RATIO * was:
            found.append(
                f"ripple at {position.name} {figure(was, 'V')} to {figure(now, 'V')} peak to peak"
            )
    for part in circuit.parts:
        if part.kind is Kind.LOUDSPEAKER:
            nodes = (part.pins["plus"], part.pins["minus"])
            was, now = healthy.rms(healthy.voltage(*nodes)), faulty.rms(faulty.voltage(*nodes))
            if was > 1e-6 and now > max(HUM_RATIO * was, AUDIBLE_V):
                found.append(f"hum at the loudspeaker {figure(was, 'V')} to {figure(now, 'V')} rms")
        if part.kind is Kind.TUBE:
            was = one.scene.stresses.get(part.name, {}).get("cathode_A", 0.0)
            stresses = all_stresses(circuit, faulty, removed=one.scene.removed)
            now = stresses.get(part.name, {}).get("cathode_A", 0.0)
            if was > 1e-4 and now < 0.1 * was:
                found.append(f"{part.name} is cut off")
    return tuple(found)


def _cause(position: Position, kind: str) -> str:
    words = {
        "short": "shorted",
        "open": "open",
        "dried": "dried out (a fifth of its value, ten times its ESR)",
        "low": "down to half its value",
        "reversed": "fitted the wrong way round it conducts; taken as a short",
    }
    return f"{position.name} {words[kind]}"


def _text(
    position: Position,
    kind: str,
    victims: tuple[Victim, ...],
    consequences: tuple[str, ...],
    why: Unanswered | None,
) -> str:
    parts = [_cause(position, kind)]
    if victims:
        parts.append("; ".join(describe(v) for v in victims[:4]))
        if len(victims) > 4:
            parts.append(f"{len(victims) - 4} more parts past their limits")
    if consequences:
        parts.append("; ".join(consequences[:4]))
    if why is not None:
        parts.append(f"{why.kind}: {why.text}")
    if len(parts) == 1:
        parts.append("no known limit is passed")
    return ": ".join(parts[:2]) + "".join(f"; {part}" for part in parts[2:])


def describe(victim: Victim) -> str:
    """Return a victim in words: who, what, how much, of which limit."""
    unit = victim.quantity.rsplit("_", 1)[1]
    name = QUANTITIES.get(victim.quantity, victim.quantity)
    assumed = " (assumed)" if victim.limit.assumed else ""
    return (
        f"{victim.part} {name} {figure(victim.stress, unit)}, "
        f"limit {figure(victim.limit.value, unit)}{assumed}"
    )

"""At which leakage a position damages its neighbours, and at which the equipment limps.

Swept on the logarithm of the leakage resistance from the insulation down to 1 Ω, a decade at a
time, halved where a limit may be passed in between; it ends two decades below a crossing, since
the highest one counts. The crossing with the highest resistance is then closed in on.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from itertools import pairwise
from math import exp, floor, log10, sqrt

from stress.circuit.circuit import Circuit, Position
from stress.engine.case import Settled
from stress.engine.solver import Solver
from stress.engine.twin import MOST_LEAKAGE_OHM, insulation_of
from stress.study import conditions as stock
from stress.study.between import leaks_between
from stress.study.detune import timings, with_detuning
from stress.study.fault import across_ideal_source
from stress.study.leak_reading import Reading, Scene, open_scene, read
from stress.study.limits import all_stresses
from stress.study.plan import Plan, run
from stress.study.result import Condition, CurvePoint, Leakage, LeakageIn, Victim
from stress.study.unjudged import Unjudged, unjudged
from stress.study.working import Healthy

LEAST_OHM = 1.0
CLOSE = 0.01  # of the resistance, when a crossing is taken as found
SHOWN_CHANGE = 0.02  # share by which a part must move to stand in the curve
NEAR = 0.6  # share of a limit from which it may be passed between two points
MOVES = 0.2  # change of a stress between two points that may hide more
SAME = 2e-4  # logarithm of a share that is as good as the limit itself
REFINEMENTS = 12
FAR = 100.0  # how far below a crossing the sweep goes on
SEARCHED = (stock.NOMINAL, stock.HIGH, stock.DRIVEN)


def leakage(
    circuit: Circuit, studied: Sequence[Position], *, healthy: Healthy, solver: Solver
) -> dict[str, Leakage]:
    """Return the leakage study of every studied position with a value, by name.

    Where all positions are studied, leakage between sections and nodes is studied as well.
    """
    positions = [p for p in studied if p.value_F]
    if len(studied) == len(circuit.positions):
        positions += leaks_between(circuit)
    limited = [p for p in positions if not across_ideal_source(circuit, p)]
    searched = [
        c for c in healthy.working.conditions if c.name in SEARCHED and c.name in healthy.settled
    ]
    pairs = [(p, c) for p in limited for c in searched]
    found = run([sweep(circuit, healthy, p, c) for p, c in pairs], solver=solver)
    tuned = timings(circuit)
    results = {}
    for position in positions:
        own = tuple(
            with_detuning(r, tuned.get(p.name), top_ohm=insulation_of(p))
            for (p, _), r in zip(pairs, found, strict=True)
            if p is position
        )
        results[position.name] = _governed(position, own, limited=position in limited)
    return results


def _governed(position: Position, own: tuple[LeakageIn, ...], *, limited: bool) -> Leakage:
    """Mark the condition that governs: the highest critical leakage, else functional."""
    if not limited:
        text = "a leak here is not limited by the netlist: fuse or wiring"
        return Leakage(
            position=position.name, governing=None, by_condition=(), limited=False, text=text
        )
    if not own:
        text = "no condition settled, so no leak was tried"
        return Leakage(position=position.name, governing=None, by_condition=(), text=text)
    worst = max(own, key=lambda r: (r.critical_ohm or 0.0, r.functional_ohm or 0.0))
    marked = tuple(replace(r, governs=r is worst) for r in own)
    return Leakage(
        position=position.name,
        governing=next(r for r in marked if r.governs),
        by_condition=marked,
    )


def sweep(
    circuit: Circuit, healthy: Healthy, position: Position, condition: Condition
) -> Plan[LeakageIn]:
    """Plan the leakage study of one position in one condition."""
    scene = open_scene(circuit, healthy, position, condition)
    top = insulation_of(position)
    readings = {top: read(scene, top, healthy.settled[condition.name])}
    always = yield from _always(scene, top)
    parent = condition.name
    for ohm in rungs(top):
        (answer,) = yield (scene.case(ohm, parent=parent),)
        readings[ohm] = read(scene, ohm, answer)
        if readings[ohm].point.unanswered is None:
            parent = scene.name(ohm)
        if _far_past(readings, ohm):
            break
    between = [
        (float(f"{sqrt(a * b):.6g}"), a)
        for a, b in _intervals(readings)
        if _may_hide(readings[a], readings[b])
    ]
    cases = tuple(scene.case(ohm, parent=_parent(scene, above, top)) for ohm, above in between)
    if cases:
        for (ohm, _), reply in zip(between, (yield cases), strict=True):
            readings[ohm] = read(scene, ohm, reply)
    critical = yield from close_in(scene, readings, lambda r: r.critical)
    assumed = yield from close_in(scene, readings, lambda r: r.assumed)
    functional = yield from close_in(scene, readings, lambda r: r.functional)
    return _result(
        scene,
        readings,
        critical=top if always else critical,
        always=always,
        assumed=assumed,
        functional=functional,
    )


def rungs(top: float) -> list[float]:
    """Return whole decades below the insulation down to 1 Ω."""
    first = floor(log10(top) - 0.3)
    return [10.0**k for k in range(first, -1, -1)] or [LEAST_OHM]


def _far_past(readings: dict[float, Reading], ohm: float) -> bool:
    """Tell whether both answers lie well above: nothing further down can change them."""
    solved = [(r, readings[r]) for r in _solved(readings)]
    critical = any(reading.critical > 0.0 and r >= FAR * ohm for r, reading in solved)
    return critical and any(reading.functional > 0.0 for _, reading in solved)


def _always(scene: Scene, top: float) -> Plan[Victim | None]:
    """Return who is past a limit already at the stated insulation, and would not be without it."""
    passed = [
        (part, name, limit)
        for part, own in scene.judged.items()
        for name, limit in own.items()
        if part != scene.position.name
        and not limit.assumed
        and scene.stresses.get(part, {}).get(name, 0.0) > limit.value
    ]
    if not passed or top >= MOST_LEAKAGE_OHM / 10.0:
        return None
    (answer,) = yield (scene.case(MOST_LEAKAGE_OHM, parent=scene.condition.name),)
    if not isinstance(answer, Settled):
        return None
    without = all_stresses(scene.circuit, answer.waves, removed=scene.removed)
    for part, name, limit in passed:
        stress = without.get(part, {}).get(name, 0.0)
        if stress <= limit.value:
            return Victim(
                part=part,
                quantity=name,
                stress=scene.stresses[part][name],
                limit=limit,
                healthy=stress,
            )
    return None


def _solved(readings: dict[float, Reading]) -> list[float]:
    """Return the resistances with numbers, the highest first."""
    return sorted((r for r, v in readings.items() if v.point.unanswered is None), reverse=True)


def _intervals(readings: dict[float, Reading]) -> list[tuple[float, float]]:
    return list(pairwise(_solved(readings)))


def _may_hide(above: Reading, below: Reading) -> bool:
    """Tell whether a limit may be passed between two points that both keep it.

    So where a stress comes near its limit and changes by more than a fifth.
    """
    if max(above.critical, below.critical) > 0.0:
        return False
    for key, share in below.shares.items():
        was = above.shares.get(key, share)
        if max(share, was) > NEAR and abs(share - was) > MOVES * max(share, was):
            return True
    return False


def _parent(scene: Scene, ohm: float, top: float) -> str:
    return scene.condition.name if ohm == top else scene.name(ohm)


def close_in(
    scene: Scene, readings: dict[float, Reading], measure: Callable[[Reading], float]
) -> Plan[float | None]:
    """Return the highest resistance at which a measure turns positive, or None.

    A small leak moves everything in proportion to its conductance, so the steps are secants of
    the share against conductance inside the bracket (regula falsi with the Illinois weight,
    Dowell and Jarratt 1971), halved on the logarithm where that does not close in. Every point
    that is tried joins `readings`.
    """
    bracket = next(
        (
            (a, b)
            for a, b in _intervals(readings)
            if measure(readings[a]) < 0.0 <= measure(readings[b])
        ),
        None,
    )
    if bracket is None:
        return None
    high, low = bracket
    f_high, f_low = (exp(measure(readings[ohm])) - 1.0 for ohm in bracket)
    last = same = 0
    for _ in range(REFINEMENTS):
        if high / low < 1.0 + CLOSE or f_low < SAME:
            break
        share = f_low / (f_low - f_high)
        ohm = 1.0 / (share / high + (1.0 - share) / low) if same < 2 else sqrt(high * low)
        ohm = float(f"{min(max(ohm, low * (1 + CLOSE / 3)), high / (1 + CLOSE / 3)):.6g}")
        if not low < ohm < high:
            break
        parent = _parent(scene, high, insulation_of(scene.position))
        (answer,) = yield (scene.case(ohm, parent=parent),)
        readings[ohm] = read(scene, ohm, answer)
        if readings[ohm].point.unanswered is not None:
            break
        value = exp(measure(readings[ohm])) - 1.0
        side = 1 if value >= 0.0 else -1
        same = same + 1 if side == last else 0
        if side > 0:
            low, f_low = ohm, value
            f_high = f_high / 2.0 if last == side else f_high
        else:
            high, f_high = ohm, value
            f_low = f_low / 2.0 if last == side else f_low
        last = side
    return low


def _result(
    scene: Scene,
    readings: dict[float, Reading],
    *,
    critical: float | None,
    always: Victim | None,
    assumed: float | None,
    functional: float | None,
) -> LeakageIn:
    at = readings[critical] if critical is not None else None
    assumed_at = readings[assumed] if assumed is not None else None
    victim = always or (_first(at.victims) if at else None)
    return LeakageIn(
        condition=scene.condition.name,
        critical_ohm=critical,
        critical_A=at.point.leak_A if at else None,
        victim=victim,
        always=always is not None,
        functional_ohm=functional,
        functional_reason=(
            readings[functional].functional_text if functional is not None else None
        ),
        assumed_critical_ohm=assumed,
        assumed_victim=(
            _first([v for v in assumed_at.assumed_victims if v.limit.assumed])
            if assumed_at
            else None
        ),
        unjudged=_unjudged(scene, readings),
        curve=_curve(readings),
        unanswered=tuple(
            r.point.unanswered for r in readings.values() if r.point.unanswered is not None
        ),
    )


def _unjudged(scene: Scene, readings: dict[float, Reading]) -> tuple[Unjudged, ...]:
    """Return what the largest leak does to parts without a limit."""
    solved = _solved(readings)
    if not solved:
        return ()
    return unjudged(scene.circuit, readings[solved[-1]].point.stresses, healthy=scene.stresses)


def _curve(readings: dict[float, Reading]) -> tuple[CurvePoint, ...]:
    """Return the points, the highest resistance first, with the parts and nodes that move."""
    points = [readings[ohm].point for ohm in sorted(readings, reverse=True)]
    first = points[0]

    def differs(was: float, now: float) -> bool:
        return abs(now - was) > SHOWN_CHANGE * max(abs(was), abs(now)) and abs(now - was) > 1e-6

    parts = {
        part
        for point in points
        for part, own in point.stresses.items()
        for name, value in own.items()
        if differs(first.stresses.get(part, {}).get(name, 0.0), value)
    }
    nodes = {
        node
        for point in points
        for node, volts in point.nodes.items()
        if differs(first.nodes.get(node, 0.0), volts)
    }
    return tuple(
        replace(
            point,
            stresses={part: own for part, own in point.stresses.items() if part in parts},
            nodes={node: volts for node, volts in point.nodes.items() if node in nodes},
        )
        for point in points
    )


def _first(victims: tuple[Victim, ...] | list[Victim]) -> Victim | None:
    return victims[0] if victims else None

"""Two likely faults at once: what they do together that neither does alone.

The most likely faults by the table are taken, two at a time at different positions, the likeliest
pairs first. Among equally likely ones those go first that a sum of their effects, each solved by
itself, takes nearest to a limit. Every pair is then solved; the sum only orders them.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations
from math import ceil, sqrt

from stress.circuit.circuit import Circuit, Position
from stress.engine.case import Answer, Case, Settled
from stress.engine.solver import Solver
from stress.parts.limit import Limit
from stress.study import conditions as stock
from stress.study.failures import kinds_of
from stress.study.fault import Fault, across_ideal_source, values
from stress.study.likelihood import likelihood
from stress.study.limits import Stresses, all_stresses, limits
from stress.study.result import Condition, Leakage, Unanswered, Victim
from stress.study.working import Healthy, unanswered

JUDGED = (stock.NOMINAL, stock.HIGH)
KINDS = ("leaky", "short", "open", "dried")
USUAL_LEAK_OHM = 1e6  # of an old part where no leak passes a limit (common practice)
HARMLESS = 2.0  # times the critical leakage: a leak that passes nothing by itself
CLEAR = 1.02  # times a limit: two leaks of half the critical one each come to it by themselves
MUCH = 1.5  # times as far past a limit as either alone
SAME_CAN = 0.5  # how likely a section is bad whose neighbour is (common practice)


@dataclass(frozen=True, slots=True, kw_only=True)
class PairVictim:
    """Who is past a limit with both faults, and what each alone does to it.

    Attributes:
        victim: With both; its `healthy` is without either.
        alone: The same stress with the first and with the second fault alone.
    """

    victim: Victim
    alone: tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Pair:
    """Two faults at once, in the condition in which their victims are furthest past a limit."""

    faults: tuple[Fault, Fault]
    likelihood: float
    condition: str
    victims: tuple[PairVictim, ...] = ()
    unanswered: tuple[Unanswered, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Pairs:
    """The pairs that were tried, the likeliest first.

    Attributes:
        asked: Most pairs to be tried.
        possible: Pairs that the likely faults make.
        faults: The likely faults, each taken by itself as well.
    """

    asked: int
    possible: int
    faults: tuple[Fault, ...]
    tried: tuple[Pair, ...]

    @property
    def found(self) -> tuple[Pair, ...]:
        """Those that pass a limit which neither fault passes alone, or passes so far."""
        return tuple(pair for pair in self.tried if pair.victims)

    @property
    def unsolved(self) -> tuple[Pair, ...]:
        """Those of which a case has no number."""
        return tuple(pair for pair in self.tried if pair.unanswered)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Likely:
    """A fault with its likelihood, and the stresses with it alone by condition."""

    fault: Fault
    position: Position
    share: float


def pairs(
    circuit: Circuit,
    studied: Sequence[Position],
    *,
    healthy: Healthy,
    leakage: Mapping[str, Leakage],
    count: int,
    solver: Solver,
) -> Pairs:
    """Try the likeliest pairs of faults of the studied positions.

    Args:
        circuit, studied: As elsewhere; sections of one can count as positions.
        healthy: What the faults start from.
        leakage: By position, from which a leak is chosen that passes nothing by itself.
        count: Most pairs.
        solver: Asked for every likely fault alone and for every pair, at `nominal` and `high`.
    """
    conditions = [
        c for c in healthy.working.conditions if c.name in JUDGED and c.name in healthy.settled
    ]
    likely = _likely(circuit, studied, leakage, most=_enough(count))
    singles = {
        (c.name, one.fault): _case(circuit, c, healthy, (one,), parent=c.name)
        for c in conditions
        for one in likely
    }
    alone = dict(zip(singles, solver.solve(list(singles.values())), strict=True))
    scenes = [_scene(circuit, c, healthy) for c in conditions]
    possible = [(a, b) for a, b in combinations(likely, 2) if a.position is not b.position]
    order = sorted(
        possible,
        key=lambda pair: (
            -_together(*pair),
            -max((_sum(s, pair, alone) for s in scenes), default=0.0),
        ),
    )[:count]
    cases = [
        _case(
            circuit,
            s.condition,
            healthy,
            pair,
            parent=singles[s.condition.name, pair[0].fault].name,
        )
        for pair in order
        for s in scenes
    ]
    answers = iter(tuple(solver.solve(cases)))
    tried = tuple(
        _judged(pair, [(s, next(answers)) for s in scenes], alone, singles) for pair in order
    )
    return Pairs(
        asked=count,
        possible=len(possible),
        faults=tuple(one.fault for one in likely),
        tried=tried,
    )


def _enough(count: int) -> int:
    """Return how many faults make a good deal more pairs than are wanted."""
    return ceil(2.0 * sqrt(2.0 * count)) + 1


def _likely(
    circuit: Circuit, studied: Sequence[Position], leakage: Mapping[str, Leakage], *, most: int
) -> list[_Likely]:
    """Return the likeliest faults that the table knows of, in netlist order where it has equals."""
    found = []
    for position in studied:
        if not position.value_F:
            continue
        ideal = across_ideal_source(circuit, position)
        for kind in KINDS:
            known = position.style.fault_share(kind) > 0.0
            possible = kind == "leaky" or kind in kinds_of(position)
            if not known or not possible or (ideal and kind in ("leaky", "short")):
                continue
            ohm = _leak_ohm(leakage.get(position.name)) if kind == "leaky" else None
            found.append(
                _Likely(
                    fault=Fault(position=position.name, kind=kind, ohm=ohm),
                    position=position,
                    share=likelihood(circuit, position, kind),
                )
            )
    return sorted(found, key=lambda one: -one.share)[:most]


def _leak_ohm(leakage: Leakage | None) -> float:
    """Return a leak that passes nothing by itself: half the critical current, else a usual one."""
    governing = leakage.governing if leakage is not None else None
    if governing is None or governing.critical_ohm is None or governing.always:
        return USUAL_LEAK_OHM
    return float(f"{HARMLESS * governing.critical_ohm:.3g}")


def _together(a: _Likely, b: _Likely) -> float:
    if a.position.can and a.position.can == b.position.can:
        return max(a.share * max(b.share, SAME_CAN), b.share * max(a.share, SAME_CAN))
    return a.share * b.share


def _case(
    circuit: Circuit,
    condition: Condition,
    healthy: Healthy,
    faults: tuple[_Likely, ...],
    *,
    parent: str,
) -> Case:
    changed: dict[str, float] = {}
    for one in faults:
        esr = healthy.esr_ohm[one.position.name]
        changed |= values(one.fault, one.position, esr_ohm=esr)
    label = " and ".join(str(one.fault) for one in faults)
    alone = ", alone" if len(faults) == 1 else ""
    return stock.case(
        circuit,
        condition,
        twin=healthy.twin,
        name=f"{condition.name} / {label}{alone}",
        fault=label,
        parent=parent,
        values=changed,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Scene:
    """What is judged in one condition, and the healthy stresses there."""

    circuit: Circuit
    condition: Condition
    judged: Mapping[tuple[str, str], Limit]
    healthy: Stresses
    removed: frozenset[str]

    def stresses(self, answer: Answer) -> Stresses | None:
        if not isinstance(answer, Settled):
            return None
        return all_stresses(self.circuit, answer.waves, removed=self.removed)


def _scene(circuit: Circuit, condition: Condition, healthy: Healthy) -> _Scene:
    gone = stock.removed(circuit, condition)
    waves = healthy.settled[condition.name].waves
    judged = {
        (part, name): limit
        for part, own in limits(circuit, condition=condition).items()
        for name, limit in own.items()
        if not limit.assumed and limit.value > 0.0
    }
    return _Scene(
        circuit=circuit,
        condition=condition,
        judged=judged,
        healthy=all_stresses(circuit, waves, removed=gone),
        removed=gone,
    )


Alone = Mapping[tuple[str, Fault], Answer]


def _sum(scene: _Scene, pair: tuple[_Likely, _Likely], alone: Alone) -> float:
    """Return the largest share of a limit by the sum of both effects, where both have one."""
    found = [scene.stresses(alone[scene.condition.name, one.fault]) for one in pair]
    most = 0.0
    if found[0] is None or found[1] is None:
        return most
    for (part, name), limit in scene.judged.items():
        if part in (pair[0].position.name, pair[1].position.name):
            continue
        was = scene.healthy.get(part, {}).get(name, 0.0)
        moves = [each.get(part, {}).get(name, was) - was for each in found if each is not None]
        if min(abs(move) for move in moves) > 1e-3 * limit.value:
            most = max(most, (was + sum(moves)) / limit.value)
    return most


def _judged(
    pair: tuple[_Likely, _Likely],
    answers: Sequence[tuple[_Scene, Answer]],
    alone: Alone,
    singles: Mapping[tuple[str, Fault], Case],
) -> Pair:
    """Return a pair in its worst condition, with what has no number."""
    whys: list[Unanswered] = []
    best: tuple[float, str, tuple[PairVictim, ...]] = (0.0, stock.NOMINAL, ())
    for scene, answer in answers:
        condition = scene.condition.name
        label = " and ".join(str(one.fault) for one in pair)
        own = [(singles[condition, one.fault].name, alone[condition, one.fault]) for one in pair]
        for name, each in (*own, (f"{condition} / {label}", answer)):
            if (why := unanswered(each, name)) is not None:
                whys.append(why)
        victims = _victims(scene, pair, answer, [each for _, each in own])
        past = max((v.victim.stress / v.victim.limit.value for v in victims), default=0.0)
        if past > best[0]:
            best = (past, condition, victims)
    return Pair(
        faults=(pair[0].fault, pair[1].fault),
        likelihood=_together(*pair),
        condition=best[1],
        victims=best[2],
        unanswered=tuple(whys),
    )


def _victims(
    scene: _Scene, pair: tuple[_Likely, _Likely], answer: Answer, own: Sequence[Answer]
) -> tuple[PairVictim, ...]:
    """Return who is past a limit that neither fault alone passes, or by far not so much."""
    both = scene.stresses(answer)
    first, second = (scene.stresses(each) for each in own)
    if both is None or first is None or second is None:
        return ()
    found = []
    for (part, name), limit in scene.judged.items():
        stress = both.get(part, {}).get(name)
        if stress is None or part in (pair[0].position.name, pair[1].position.name):
            continue
        was = scene.healthy.get(part, {}).get(name, 0.0)
        alone = (first.get(part, {}).get(name, 0.0), second.get(part, {}).get(name, 0.0))
        passed = max(*alone, was)
        if stress > CLEAR * limit.value and (passed <= limit.value or stress > MUCH * passed):
            victim = Victim(part=part, quantity=name, stress=stress, limit=limit, healthy=was)
            found.append(PairVictim(victim=victim, alone=alone))
    return tuple(sorted(found, key=lambda v: -v.victim.stress / v.victim.limit.value))

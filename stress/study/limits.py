"""Which limits are judged in which condition, and who is past one.

Design-centre limits of tubes already allow for the usual spread of the line: they are judged at
the nominal line voltage; design-maximum and absolute ones at the highest (EIA RS-239 terms;
common practice). Limits of other parts are judged in every condition.
"""

from __future__ import annotations

from collections.abc import Mapping
from math import log

from stress.circuit.circuit import Circuit, Kind
from stress.engine.case import Waves
from stress.parts.limit import Limit, Rating
from stress.study.result import Condition, Victim
from stress.study.working import stresses_of

Stresses = Mapping[str, Mapping[str, float]]
Limits = Mapping[str, Mapping[str, Limit]]
TUBES = frozenset({Kind.TUBE, Kind.RECTIFIER})


def limits(circuit: Circuit, *, condition: Condition) -> Limits:
    """Return every limit that is judged in a condition, by part or position and stress name."""
    judged: dict[str, Mapping[str, Limit]] = {}
    for part in circuit.parts:
        systems = _systems(circuit, condition) if part.kind in TUBES else frozenset(Rating)
        kept = {name: limit for name, limit in part.limits.items() if limit.rating in systems}
        if kept:
            judged[part.name] = kept
    for position in circuit.positions:
        own: dict[str, Limit] = {}
        if position.rated_V is not None:
            own["voltage_V"] = Limit(
                value=position.rated_V, source="rating of the position", rating=Rating.ABSOLUTE
            )
        if position.ripple_A is not None:
            own["ripple_A"] = Limit(
                value=position.ripple_A, source="ripple rating", rating=Rating.ABSOLUTE
            )
        if own:
            judged[position.name] = own
    return judged


def _systems(circuit: Circuit, condition: Condition) -> frozenset[Rating]:
    if not circuit.line.sources:
        return frozenset(Rating)
    if condition.factor > 1.0 and not condition.usual:
        return frozenset({Rating.DESIGN_MAXIMUM, Rating.ABSOLUTE})
    return frozenset({Rating.DESIGN_CENTRE})


def all_stresses(
    circuit: Circuit, waves: Waves, *, removed: frozenset[str] = frozenset()
) -> Stresses:
    """Return the stresses of parts and positions alike, as far as limits can be set on them."""
    found = dict(stresses_of(circuit, waves, removed=removed))
    for position in circuit.positions:
        volts = waves.voltage(*position.nodes)
        found[position.name] = {
            "voltage_V": float(abs(volts).max()),
            "ripple_A": waves.rms(waves.current(position.name)),
        }
    return found


def over(
    stresses: Stresses, judged: Limits, *, healthy: Stresses, but: str, assumed: bool
) -> tuple[Victim, ...]:
    """Return every part past a limit that it kept when healthy, the furthest past first.

    Args:
        stresses, healthy: With the fault and without, in the same condition.
        but: The faulty position, which is no victim of itself.
        assumed: Whether assumed limits count.
    """
    victims = []
    for (part, name), limit in counted(judged, healthy=healthy, but=but, assumed=assumed).items():
        stress = stresses.get(part, {}).get(name)
        if stress is not None and stress > limit.value:
            victims.append(
                Victim(
                    part=part,
                    quantity=name,
                    stress=stress,
                    limit=limit,
                    healthy=healthy.get(part, {}).get(name),
                )
            )
    return tuple(sorted(victims, key=lambda v: -v.stress / v.limit.value))


def counted(
    judged: Limits, *, healthy: Stresses, but: str, assumed: bool
) -> Mapping[tuple[str, str], Limit]:
    """Return the limits a fault can break: kept when healthy, positive, of another part."""
    return {
        (part, name): limit
        for part, own in judged.items()
        if part != but
        for name, limit in own.items()
        if limit.assumed <= assumed
        and limit.value > 0.0
        and healthy.get(part, {}).get(name, 0.0) <= limit.value
    }


def shares(
    stresses: Stresses, counting: Mapping[tuple[str, str], Limit]
) -> Mapping[tuple[str, str], float]:
    """Return the share of every limit that counts; 0 where the stress is not known."""
    return {
        (part, name): stresses.get(part, {}).get(name, 0.0) / limit.value
        for (part, name), limit in counting.items()
    }


def excess(of: Mapping[tuple[str, str], float]) -> float:
    """Return the logarithm of the largest share of a limit; positive where one is passed."""
    return log(max(max(of.values(), default=0.0), 1e-9))

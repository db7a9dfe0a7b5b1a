"""What one leakage resistance at one position does, measured against the healthy equipment."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import log

from stress.circuit.circuit import Circuit, Position
from stress.engine.case import Answer, Case, Settled
from stress.study import conditions as stock
from stress.study.damage_time import timed
from stress.study.fault import Fault, values
from stress.study.function import Sign, moved, signs
from stress.study.limits import (
    Limits,
    Stresses,
    all_stresses,
    counted,
    excess,
    limits,
    over,
    shares,
)
from stress.study.result import Condition, CurvePoint, Victim
from stress.study.working import Healthy, node_means, unanswered


@dataclass(frozen=True, slots=True, kw_only=True)
class Scene:
    """Where a sweep runs: one position in one condition."""

    circuit: Circuit
    healthy: Healthy
    position: Position
    condition: Condition
    judged: Limits
    stresses: Stresses
    signs: Mapping[str, Sign]
    removed: frozenset[str]

    def case(self, ohm: float, *, parent: str) -> Case:
        """Return the case of one leakage resistance."""
        fault = Fault(position=self.position.name, kind="leaky", ohm=ohm)
        return stock.case(
            self.circuit,
            self.condition,
            twin=self.healthy.twin,
            name=self.name(ohm),
            fault=str(fault),
            parent=parent,
            values=values(
                fault, self.position, esr_ohm=self.healthy.esr_ohm.get(self.position.name, 0.0)
            ),
        )

    def name(self, ohm: float) -> str:
        """Return the name of the case of one leakage resistance."""
        fault = Fault(position=self.position.name, kind="leaky", ohm=ohm)
        return f"{self.condition.name} / {fault}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Reading:
    """What one leakage resistance does.

    Attributes:
        critical, assumed, functional: Logarithm of the largest share of a known limit, of an
            assumed one, and of what may move.
        shares: Of every known limit.
    """

    point: CurvePoint
    critical: float
    assumed: float
    functional: float
    functional_text: str
    shares: Mapping[tuple[str, str], float]
    victims: tuple[Victim, ...]
    assumed_victims: tuple[Victim, ...]


def open_scene(
    circuit: Circuit, healthy: Healthy, position: Position, condition: Condition
) -> Scene:
    """Return where a position is judged: the limits, stresses and signs of the condition."""
    gone = stock.removed(circuit, condition)
    waves = healthy.settled[condition.name].waves
    return Scene(
        circuit=circuit,
        healthy=healthy,
        position=position,
        condition=condition,
        judged=limits(circuit, condition=condition),
        stresses=all_stresses(circuit, waves, removed=gone),
        signs=signs(circuit, waves, removed=gone),
        removed=gone,
    )


def read(scene: Scene, ohm: float, answer: Answer) -> Reading:
    """Measure one answer against the healthy equipment."""
    why = unanswered(answer, scene.name(ohm))
    if why is not None or not isinstance(answer, Settled):
        point = CurvePoint(ohm=ohm, leak_A=0.0, stresses={}, unanswered=why)
        nothing = log(1e-9)
        return Reading(
            point=point,
            critical=nothing,
            assumed=nothing,
            functional=nothing,
            functional_text="",
            shares={},
            victims=(),
            assumed_victims=(),
        )
    waves = answer.waves
    stresses = all_stresses(scene.circuit, waves, removed=scene.removed)
    known = counted(scene.judged, healthy=scene.stresses, but=scene.position.name, assumed=False)
    every = counted(scene.judged, healthy=scene.stresses, but=scene.position.name, assumed=True)
    known_shares = shares(stresses, known)
    functional, text = moved(signs(scene.circuit, waves, removed=scene.removed), scene.signs)
    volts = waves.mean(waves.voltage(*scene.position.nodes))
    return Reading(
        point=CurvePoint(
            ohm=ohm, leak_A=abs(volts) / ohm, stresses=stresses, nodes=node_means(waves)
        ),
        critical=excess(known_shares),
        assumed=excess(shares(stresses, {k: v for k, v in every.items() if v.assumed})),
        functional=functional,
        functional_text=text,
        shares=known_shares,
        victims=timed(
            over(
                stresses,
                scene.judged,
                healthy=scene.stresses,
                but=scene.position.name,
                assumed=False,
            ),
            scene.circuit,
        ),
        assumed_victims=over(
            stresses, scene.judged, healthy=scene.stresses, but=scene.position.name, assumed=True
        ),
    )

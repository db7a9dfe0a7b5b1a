"""How stresses and voltages run along a leakage curve: those that are worth showing, in order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from stress.circuit.circuit import Circuit
from stress.parts.limit import Limit
from stress.report import words
from stress.study.limits import Limits, limits
from stress.study.result import CurvePoint, LeakageIn, Review

MOST_STRESSES, MOST_NODES = 14, 6
_SHARE = 0.02  # of the limit or of the healthy value: less is no movement
_LEAST = {"V": 0.05, "A": 1e-6, "W": 1e-3}  # without a limit, less than this is not shown


@dataclass(frozen=True, slots=True, kw_only=True)
class Course:
    """One stress of a part, or the voltage of a node, at every point, soundest first.

    Attributes:
        part: Part, or "node g2".
        stress: Name of the stress, or "" for a node.
        limit: Where it is judged in the condition of the curve.
        values: None where the point has no number.
    """

    part: str
    stress: str
    unit: str
    limit: Limit | None
    values: tuple[float | None, ...]

    @property
    def words(self) -> str:
        """What it is, as the trade calls it."""
        return words.quantity(self.stress) if self.stress else "voltage"

    @property
    def passes(self) -> int | None:
        """Index of the first point past the limit, None where it never is or always was."""
        past = [self.limit is not None and (v or 0.0) > self.limit.value for v in self.values]
        return past.index(True) if any(past) and not past[0] else None

    @property
    def moved(self) -> float:
        """By what share of its limit, or of its healthy value, it moves."""
        known = [value for value in self.values if value is not None]
        span = max(known) - min(known)
        if self.limit is not None and self.limit.value > 0.0:
            return span / self.limit.value
        return span / max(abs(known[0]), 1e-12) if span > _LEAST.get(self.unit, 0.0) else 0.0


def points_of(of: LeakageIn | None) -> list[CurvePoint]:
    """Return the points of a curve, soundest first."""
    return sorted(of.curve, key=lambda point: -point.ohm) if of else []


def courses(review: Review, of: LeakageIn) -> tuple[Course, ...]:
    """Return the stresses that move: the first victim, what passes, what is limited, the rest."""
    points = points_of(of)
    judged = judged_in(review, of.condition)
    keys = dict.fromkeys((part, s) for point in points for part in point.stresses
                         for s in point.stresses[part])  # fmt: skip
    first = of.victim or of.assumed_victim
    found = []
    for part, stress in keys:
        limit = judged.get(part, {}).get(stress)
        values = tuple(point.stresses.get(part, {}).get(stress) for point in points)
        found.append(Course(part=part, stress=stress, unit=words.unit_of(stress), limit=limit,
                            values=values))  # fmt: skip
    hit = (first.part, first.quantity) if first else ("", "")
    kept = [each for each in found if each.moved >= _SHARE or (each.part, each.stress) == hit]
    return tuple(sorted(kept, key=lambda each: _order(each, hit, len(points))))


def _order(of: Course, hit: tuple[str, str], last: int) -> tuple[bool, int, bool, float]:
    passes = of.passes
    return (
        (of.part, of.stress) != hit,
        last if passes is None else passes,
        of.limit is None,
        -of.moved,
    )


def nodes(
    circuit: Circuit, of: LeakageIn, *, position: str, shown: Sequence[Course]
) -> tuple[Course, ...]:
    """Return the voltages that move at the position and at the pins of the parts shown."""
    points = points_of(of)
    near = list(circuit.position(position).nodes)
    for part in circuit.parts:
        if any(each.part == part.name for each in shown):
            near += part.pins.values()
    found = (
        Course(part=f"node {node}", stress="", unit="V", limit=None,
               values=tuple(point.nodes.get(node) for point in points))
        for node in dict.fromkeys(near) if any(node in point.nodes for point in points)
    )  # fmt: skip
    return tuple(each for each in found if each.moved >= _SHARE)[:MOST_NODES]


def judged_in(review: Review, condition: str) -> Limits:
    """Return the limits that are judged in a condition, by part and stress name."""
    for each in review.working.conditions:
        if each.name == condition:
            return limits(review.circuit, condition=each)
    nothing: Mapping[str, Mapping[str, Limit]] = {}
    return nothing

"""What a position or a part bears by condition, the switch-on among them."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from stress.circuit.circuit import Position
from stress.study import other_use
from stress.study.conditions import COLD, INRUSH
from stress.study.result import Condition, PositionStress, Review, Surge


def conditions(review: Review) -> tuple[Condition, ...]:
    """Return the conditions in the order they were run; the switch-on last where it was run."""
    stated = review.working.conditions
    if not (review.working.inrush or review.working.inrush_parts):
        return stated
    cold = next((each for each in stated if each.name == COLD), None)
    switch_on = Condition(
        name=INRUSH,
        line_V=cold.line_V if cold else None,
        cold=True,
        lasts=False,
        text="switched on from rest with the tubes cold, in the worst phase",
    )
    return (*stated, switch_on)


def on_offer(review: Review) -> tuple[str, ...]:
    """Return the conditions that apply and were not asked for, and what each would show."""
    return tuple(f"{use.name} ({use.tests})" for use in other_use.on_offer(review.circuit))


def position(review: Review, of: Position) -> Iterator[tuple[str, PositionStress | Surge | None]]:
    """Yield each condition's name and what the position bears; None where there is no answer."""
    held = review.working.positions.get(of.name, {})
    for condition in conditions(review):
        if condition.name == INRUSH:
            yield INRUSH, review.working.inrush.get(of.name)
        else:
            yield condition.name, held.get(condition.name)


def part(review: Review, name: str) -> Mapping[str, Mapping[str, float]]:
    """Return condition to stress name to value of a part."""
    held = dict(review.working.parts.get(name, {}))
    if name in review.working.inrush_parts:
        held[INRUSH] = review.working.inrush_parts[name]
    return held

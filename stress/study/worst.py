"""The worst a position bears: what lasts, and what is brief."""

from __future__ import annotations

from collections.abc import Mapping

from stress.circuit.circuit import Circuit
from stress.study import conditions as stock
from stress.study.result import PositionStress, Working, Worst

ALIKE = 0.999  # of the largest; the first condition that reaches it stands for all


def worst(circuit: Circuit, *, working: Working) -> Mapping[str, Worst]:
    """Return, by position name, the worst lasting and the worst brief voltage and their cases.

    A position without any settled lasting condition is left out.
    """
    lasting = {c.name for c in working.conditions if c.lasts}
    found: dict[str, Worst] = {}
    for position in circuit.positions:
        by_condition = working.positions.get(position.name, {})
        lasts = {name: s for name, s in by_condition.items() if name in lasting}
        if not lasts:
            continue
        most = max(stress.peak_V for stress in lasts.values())
        name = next(n for n, stress in lasts.items() if stress.peak_V >= ALIKE * most)
        brief = {n: s.peak_V for n, s in by_condition.items() if n not in lasting}
        surge = working.inrush.get(position.name)
        if surge is not None:
            brief[stock.INRUSH] = surge.peak_V
        briefest = max(brief, key=lambda n: brief[n], default=None)
        reverse_V, turned = most_reversed(by_condition)
        if surge is not None and surge.reverse_V is not None:
            if surge.reverse_V > (reverse_V or 0.0):
                turned = stock.INRUSH
            reverse_V = max(surge.reverse_V, reverse_V or 0.0)
        found[position.name] = Worst(
            position=position.name,
            worst_V=lasts[name].peak_V,
            condition=name,
            brief_V=brief[briefest] if briefest is not None else None,
            brief_condition=briefest,
            reverse_V=reverse_V,
            reverse_condition=turned,
        )
    return found


def most_reversed(
    by_condition: Mapping[str, PositionStress],
) -> tuple[float | None, str | None]:
    """Return the largest reverse voltage in V and the condition that makes it.

    The voltage is None for a style without polarity, the condition also where it is zero.
    """
    volts = {n: s.reverse_V for n, s in by_condition.items() if s.reverse_V is not None}
    most = max(volts.values(), default=None)
    if not most:
        return most, None
    return next((reverse, name) for name, reverse in volts.items() if reverse >= ALIKE * most)

"""One position in depth, on a terminal: its leakage, or its failures."""

from __future__ import annotations

from rich.box import SIMPLE_HEAD
from rich.console import Console
from rich.table import Table
from rich.text import Text

from stress.circuit.circuit import Position
from stress.report.plot import plot
from stress.report.words import critical, functional, marked, plain, quantity, unit_of, victim
from stress.study.result import CurvePoint, LeakageIn, Review
from stress.text.figure import figure

SHOWN = 4  # stresses beside each other


def print_leak(review: Review, name: str, console: Console) -> None:
    """Print what leakage at a position does in every condition that was tried."""
    position = review.circuit.position(name)
    _heading(position, console)
    leak = review.leakage.get(position.name)
    if leak is None or not leak.by_condition:
        console.print(Text(leak.text if leak else "no value is known: nothing was tried"))
        return
    for found in leak.by_condition:
        mark = ", governs" if found.governs else ""
        console.print()
        console.print(Text(f"{found.condition}{mark}", style="bold"))
        console.print(Text(f"  damage below: {critical(found)}", overflow="fold"))
        if found.victim is not None:
            console.print(Text(f"  {victim(found.victim)}", overflow="fold"))
        reason = f": {found.functional_reason}" if found.functional_reason else ""
        console.print(Text(f"  off its working point below: {functional(found)}{reason}"))
        _curve(review, found, console)
    _explanation(review, position, console)


def print_fail(review: Review, name: str, console: Console) -> None:
    """Print what a short, an open and the other failures of a position do."""
    position = review.circuit.position(name)
    _heading(position, console)
    for failure in review.failures.get(position.name, ()):
        console.print()
        console.print(Text(f"{failure.fault} ({failure.condition})", style="bold"))
        console.print(Text(f"  {plain(failure.text)}"))
        for one in failure.victims:
            past = f"{one.stress / one.limit.value:.1f} times its limit"
            console.print(Text(f"    {victim(one)}: {past} ({one.limit.source})"))
    _explanation(review, position, console)


def _heading(position: Position, console: Console) -> None:
    console.print(Text(plain(f"{position.name}  {position.role_text}"), style="bold"))
    console.print(Text(plain(marked(position))))


def _explanation(review: Review, position: Position, console: Console) -> None:
    console.print()
    for paragraph in review.explanations.get(position.name, ()):
        console.print(Text(plain(paragraph)))


def _curve(review: Review, found: LeakageIn, console: Console) -> None:
    """Print the solved points of a sweep and the shares of the limits against resistance."""
    columns = _columns(review, found)
    table = Table(box=SIMPLE_HEAD, padding=(0, 1, 0, 0), pad_edge=False)
    table.add_column("leakage", justify="right")
    table.add_column("leak current", justify="right")
    for part, name in columns:
        table.add_column(f"{part} {quantity(name)}", justify="right")
    for point in found.curve:
        table.add_row(
            figure(point.ohm, "ohm"),
            *([point.unanswered.kind] if point.unanswered else [figure(point.leak_A, "A")]),
            *(_cell(point, part, name) for part, name in columns),
        )
    console.print(table)
    curves = []
    for part, name in columns:
        limit = _limit(review, part, name)
        if limit is not None:
            shares = [
                (point.ohm, point.stresses[part][name] / limit)
                for point in found.curve
                if name in point.stresses.get(part, {})
            ]
            curves.append((f"{part} {quantity(name)}, share of its limit", shares))
    for line in plot(curves, width=min(console.width, 100)):
        console.print(Text(line), no_wrap=True)


def _cell(point: CurvePoint, part: str, name: str) -> str:
    value = point.stresses.get(part, {}).get(name)
    return "no number" if value is None else figure(value, unit_of(name))


def _limit(review: Review, part: str, name: str) -> float | None:
    for one in review.circuit.parts:
        if one.name == part and name in one.limits:
            return one.limits[name].value
    return None


def _columns(review: Review, found: LeakageIn) -> list[tuple[str, str]]:
    """Return the stresses that come nearest to or furthest past their limits, at most four."""
    most: dict[tuple[str, str], float] = {}
    for point in found.curve:
        for part, own in point.stresses.items():
            for name, value in own.items():
                limit = _limit(review, part, name)
                if limit:
                    most[part, name] = max(most.get((part, name), 0.0), value / limit)
    return sorted(most, key=lambda key: -most[key])[:SHOWN]

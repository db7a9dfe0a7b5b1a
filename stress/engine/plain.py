"""The plain transient: for what the cycle map does not reach, and as the judge of stability."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from stress.engine.case import Floats, Waves
from stress.engine.cycle import CycleMap
from stress.engine.deck import Deck
from stress.text.figure import figure

CHUNK = 25  # periods between two looks
MOST_PERIODS = 1000
LONG_RUNS = (40, 160, 640)  # periods, for circuits that cannot be started in the middle
SHOWN = 4  # periods of what does not settle
KICK = 1e-3  # in yardsticks
DEPARTED = 20.0  # times the kick


@dataclass(frozen=True, slots=True)
class Course:
    """How a plain transient ended.

    Attributes:
        x: Shape (n,): the state at its end.
        waves: The last period if it settled, else a longer stretch.
        distance, residual: As in `Proof`.
        settled: Whether it became periodic.
        low, high: Shape (n,): range of the states at the looks of its later half.
    """

    x: Floats
    waves: Waves
    distance: float
    residual: float
    settled: bool
    low: Floats
    high: Floats


def follow(phi: CycleMap, start: Floats, *, tolerance: float) -> Course:
    """Run period after period until the state repeats, looking every few periods.

    The distance to the end is told by how the change over a period shrinks from look to look.
    """
    x, looks, before = start, [start], None
    distance = residual = np.inf
    while phi.cycles < MOST_PERIODS:
        x = phi(x, periods=CHUNK)
        y = phi(x)
        change = float(np.max(np.abs(y - x) / phi.scale(x), initial=0.0))
        looks.append(y)
        residual = change
        if before is not None:
            distance = _remaining(change, before, periods=CHUNK + 1)
            if distance <= tolerance:
                return Course(y, phi.waves(), distance, residual, True, y, y)
        before, x = change, y
    later = np.array(looks[len(looks) // 2 :])
    phi.kept = SHOWN
    x = phi(x, periods=SHOWN)
    return Course(x, phi.stretch(), distance, residual, False, later.min(axis=0), later.max(axis=0))


def follow_from_rest(phi: CycleMap, start: Floats, *, tolerance: float) -> Course:
    """Run ever longer from rest, for circuits whose state cannot be set."""
    phi.kept = 2
    before, change, distance = None, np.inf, np.inf
    for periods in LONG_RUNS:
        x = phi(start, periods=periods)
        change = _repeats(phi.stretch(), phi.period_s)
        if before is not None:
            distance = _remaining(change, before[0], periods=periods - before[1])
            if distance <= tolerance:
                return Course(x, phi.waves(), distance, change, True, x, x)
        before = (change, periods)
    return Course(x, phi.stretch(), distance, change, False, x, x)


def departs(phi: CycleMap, at: Floats, *, along: Floats, periods: int) -> Course | None:
    """Push a settled state a little and return where it goes, or None where it comes back.

    Args:
        phi: The map.
        at: Shape (n,): the fixed point.
        along: Shape (n,): the direction of the push.
        periods: How long it is watched.
    """
    scale = phi.scale(at)
    push = KICK * along / max(float(np.max(np.abs(along) / scale)), 1e-300)
    x, looks = at + push, []
    for _ in range(max(periods // CHUNK, 1)):
        x = phi(x, periods=CHUNK)
        looks.append(x)
    gone = float(np.max(np.abs(x - at) / scale))
    if gone < DEPARTED * KICK:
        return None
    phi.kept = SHOWN
    y = phi(x, periods=SHOWN)
    seen = np.array([*looks, y])
    return Course(y, phi.stretch(), gone, gone, False, seen.min(axis=0), seen.max(axis=0))


def _remaining(change: float, before: float, *, periods: int) -> float:
    """Return the distance left, from how a change over one period shrank over some periods."""
    if change == 0.0:
        return 0.0
    if change >= before:
        # Noise of the solver does not shrink; only a change that is nothing counts as arrival.
        return change * 1e3
    rate = (change / before) ** (1.0 / periods)
    return change / (1.0 - rate) if rate < 1.0 else np.inf


def _repeats(waves: Waves, period_s: float) -> float:
    """Return how far the last period is from the one before, against 1 V or its size."""
    end = float(waves.time_s[-1])
    at = np.linspace(end - 0.98 * period_s, end, 200)
    worst = 0.0
    for name, row in zip(waves.names, waves.values, strict=True):
        if name[0] != "v":
            continue
        now, then = np.interp(at, waves.time_s, row), np.interp(at - period_s, waves.time_s, row)
        worst = max(worst, float(np.max(np.abs(now - then))) / max(1.0, float(np.max(np.abs(row)))))
    return worst


def holding(deck: Deck, waves: Waves) -> tuple[str, ...]:
    """Return the switches whose state at the start of the period is that of before."""
    rows = dict(zip(waves.names, waves.values[:, 0], strict=True))
    return tuple(
        switch.element
        for switch in deck.hysteresis
        if switch.low
        < rows.get(switch.control[0], 0.0) - rows.get(switch.control[1], 0.0)
        < switch.high
    )


def told(deck: Deck, course: Course, *, unstable: bool, cycles: int) -> str:
    """Return in words what a circuit does that does not become periodic."""
    span = (course.high - course.low) / np.maximum(
        np.maximum(np.abs(course.high), np.abs(course.low)), 1e-3
    )
    widest = int(np.argmax(span)) if span.size else 0
    where = ""
    if span.size:
        state = deck.states[widest]
        what, symbol = ("voltage", "V") if state.kind == "C" else ("current", "A")
        low, high = (figure(float(end[widest]), symbol) for end in (course.low, course.high))
        where = f"; the {what} of {state.element} was seen between {low} and {high}"
    verb = "leaves its steady state by itself (it motorboats)" if unstable else "does not settle"
    return f"{verb} within {cycles} periods{where}"

"""What the readings say: keep, form, measure again or replace, position by position."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from enum import StrEnum

from stress.circuit.circuit import Circuit, Position
from stress.judge.drift import Drift, drifts
from stress.parts.reading import Reading, Readings
from stress.study.bench import published_A
from stress.study.bench_esr import moved
from stress.study.result import Bench, Worst
from stress.text.figure import figure
from stress.text.span import SourceError
from stress.text.unit import unit

AT_VOLTAGE = 0.95  # of the test voltage; from there on a reading counts
NEAR = 0.5  # of a leakage limit from which on it is watched
NEAR_ESR = 0.7
FORMED_S = 1800.0  # after half an hour under voltage forming has done what it can
FORMABLE = frozenset({"aluminium", "aluminium-wet", "aluminium-nonpolar"})
PAPER = frozenset({"paper", "paper-oil"})
SMALL_SHARE = 0.2  # of the rating: what passes current there is unfit at high voltage
UNSOUND_SHARE = 0.01  # of a new part's insulation
HIGH_V = 60.0


class Advice(StrEnum):
    """What to do with a part, the most serious first."""

    REPLACE = "replace"
    FORM = "form and measure again"
    AGAIN = "measure again"
    WATCH = "keep and watch"
    KEEP = "keep"

    @property
    def rank(self) -> int:
        """0 for the most serious."""
        return list(Advice).index(self)


@dataclass(frozen=True, slots=True)
class Point:
    """What one quantity says."""

    advice: Advice
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """What to do with the part in one position.

    Attributes:
        position: Its name.
        advice: The most serious of its points.
        again_V: With `AGAIN` for leakage: the voltage to measure at.
        points: The most serious first, one for each quantity judged.
    """

    position: str
    advice: Advice
    again_V: float | None = field(default=None, metadata=unit("V"))
    points: tuple[Point, ...]

    def __str__(self) -> str:
        words = str(self.advice)
        if self.again_V is not None:
            words += f" at {figure(self.again_V, 'V')}"
        decisive = [point.reason for point in self.points if point.advice is self.advice]
        return f"{words}: {'; '.join(decisive)}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdicts:
    """All verdicts in netlist order, what has drifted, and the rows that were not usable."""

    verdicts: tuple[Verdict, ...]
    drifts: tuple[Drift, ...]
    used: tuple[Reading, ...]
    problems: tuple[SourceError, ...]


def verdicts(
    readings: Readings,
    *,
    circuit: Circuit,
    bench: Mapping[str, Bench],
    worst: Mapping[str, Worst],
) -> Verdicts:
    """Judge every reading against the limits of its position.

    Args:
        readings: As read; its problems are handed on.
        circuit: For positions, resistors and windings.
        bench, worst: By position name.
    """
    problems = list(readings.problems)
    rows: dict[str, list[Reading]] = {}
    used: list[Reading] = []
    names = {position.name.lower(): position for position in circuit.positions}
    others = {
        e.name.lower() for e in circuit.netlist.elements if e.letter in "RL" and "#" not in e.name
    }
    for row in readings.rows:
        position = names.get(row.part.lower())
        if position is not None:
            problem = _above_rating(row, position)
            if problem is not None:
                problems.append(problem)
                continue
            rows.setdefault(position.name, []).append(row)
        elif row.part.lower() not in others:
            known = ", ".join(position.name for position in circuit.positions[:8])
            hint = f"positions: {known} …; resistors and windings by their names as well"
            message = f'the netlist has no part "{row.part}"'
            problems.append(SourceError(message, row.spans.get("part", row.span), hint))
            continue
        used.append(row)
    return Verdicts(
        verdicts=tuple(
            verdict(
                position,
                rows[position.name],
                bench=bench[position.name],
                worst=worst.get(position.name),
                bench_degC=circuit.sheet.bench_degC,
            )
            for position in circuit.positions
            if position.name in rows and position.name in bench
        ),
        drifts=drifts(used, circuit=circuit),
        used=tuple(used),
        problems=tuple(sorted(problems, key=lambda p: (p.span.line, p.span.column))),
    )


def verdict(
    position: Position,
    rows: Sequence[Reading],
    *,
    bench: Bench,
    worst: Worst | None,
    bench_degC: float = 20.0,
) -> Verdict:
    """Return what the readings of one position say.

    Args:
        position: With style and marked rating.
        rows: Its readings, at least one.
        bench: Its limits.
        worst: What it bears, for the rating.
        bench_degC: Temperature of readings that state none.
    """
    points: list[Point] = []
    if worst is not None and position.rated_V is not None and worst.worst_V > position.rated_V:
        points.append(
            Point(
                Advice.REPLACE,
                f"it bears {figure(worst.worst_V, 'V')} and is rated "
                f"{figure(position.rated_V, 'V')}, whatever it reads",
            )
        )
    states = {row.state for row in rows if row.state}
    points += [Point(Advice.REPLACE, f"it reads as {_an(state)}") for state in sorted(states)]
    points += [p for row in rows if (p := _capacitance(row, bench)) is not None]
    points += [p for row in rows if (p := _esr(row, position, bench)) is not None]
    again_V = None
    if not states:
        leakage, again_V = _leakage(rows, position, bench, worst, bench_degC)
        points += leakage
    points.sort(key=lambda point: point.advice.rank)
    advice = points[0].advice if points else Advice.AGAIN
    return Verdict(
        position=position.name,
        advice=advice,
        again_V=again_V if advice is Advice.AGAIN else None,
        points=tuple(points) or (Point(Advice.AGAIN, "nothing that can be judged"),),
    )


def _an(state: str) -> str:
    return "an open" if state == "open" else f"a {state}"


def _capacitance(row: Reading, bench: Bench) -> Point | None:
    value, low, high = row.capacitance_F, bench.value_min_F, bench.value_max_F
    if value is None or low is None or high is None:
        return None
    window = f"{figure(low, 'F')} to {figure(high, 'F')}"
    text = f"capacitance {figure(value, 'F')}, wanted {window}"
    if value < low:
        return Point(Advice.REPLACE, f"{text}: too little is left")
    if value > high:
        return Point(Advice.REPLACE, f"{text}: so much means moisture and leakage")
    return Point(Advice.KEEP, text)


def _esr(row: Reading, position: Position, bench: Bench) -> Point | None:
    if row.esr_ohm is None or row.esr_Hz is None or bench.esr_max_ohm is None or not bench.esr_Hz:
        return None
    limit = moved(bench.esr_max_ohm, position=position, from_Hz=bench.esr_Hz, to_Hz=row.esr_Hz)
    text = (
        f"ESR {figure(row.esr_ohm, 'ohm')} at {figure(row.esr_Hz, 'Hz')}, "
        f"limit {figure(limit, 'ohm')} ({bench.esr_reason})"
    )
    if row.esr_ohm > limit:
        # The loss of a part that is no electrolytic hurts nothing by itself.
        return Point(Advice.REPLACE if position.style.electrolytic else Advice.WATCH, text)
    return Point(Advice.WATCH if row.esr_ohm > NEAR_ESR * limit else Advice.KEEP, text)


def _leakage(
    rows: Sequence[Reading],
    position: Position,
    bench: Bench,
    worst: Worst | None,
    bench_degC: float,
) -> tuple[list[Point], float | None]:
    """Return what the leakage readings say, and the voltage to measure at where they fall short."""
    if bench.test_V is None or bench.leakage_max_A is None:
        return [], None
    taken = [row for row in rows if row.leakage_A is not None and row.at_V]
    points = [
        _one_leakage(row, position, bench, worst=worst, bench_degC=bench_degC) for row in taken
    ]
    enough = any((row.at_V or 0.0) >= AT_VOLTAGE * bench.test_V for row in taken)
    if enough or any(point.advice is Advice.REPLACE for point in points):
        return points, None
    if taken:
        highest = max(row.at_V or 0.0 for row in taken)
        why = f"{figure(highest, 'V')} proves nothing about {figure(bench.test_V, 'V')}"
    else:
        why = "its leakage was not measured"
        if any(row.capacitance_F is not None for row in rows):
            why += ", and a good capacitance says nothing of it"
    return [*points, Point(Advice.AGAIN, why)], bench.test_V


def _one_leakage(
    row: Reading, position: Position, bench: Bench, *, worst: Worst | None, bench_degC: float
) -> Point:
    amps, volts = row.leakage_A or 0.0, row.at_V or 0.0
    warm = 1.0
    if row.temperature_degC is not None:
        warm = position.style.hot_factor(from_degC=bench_degC, to_degC=row.temperature_degC)
    assert bench.test_V is not None
    assert bench.leakage_max_A is not None
    limit = bench.leakage_max_A * volts / bench.test_V * warm
    text = f"leakage {figure(amps, 'A')} at {figure(volts, 'V')}, limit {figure(limit, 'A')} there"
    if position.style.name in FORMABLE:
        return _formed(row, position, text=text, over=amps > limit, warm=warm)
    if amps > limit:
        return Point(Advice.REPLACE, text)
    if _unsound(row, position, worst):
        return Point(
            Advice.REPLACE,
            f"it passes {figure(amps, 'A')} at {figure(volts, 'V')} already, a small part of its "
            "rating: unfit in a position of high voltage (common practice)",
        )
    if amps > NEAR * limit:
        return Point(Advice.WATCH, text)
    if _far_from_new(row, position):
        return Point(Advice.WATCH, f"{text}; far more than a sound part, and it only grows")
    return Point(Advice.KEEP, text)


def _far_from_new(row: Reading, position: Position) -> bool:
    """Tell whether less than a hundredth of a new part's insulation is left."""
    if not row.leakage_A or not row.at_V or not position.value_F:
        return False
    new = position.style.insulation_ohm(position.value_F, rated_V=position.rated_V)
    return row.at_V / row.leakage_A < UNSOUND_SHARE * new


def _formed(row: Reading, position: Position, *, text: str, over: bool, warm: float) -> Point:
    """Judge an electrolytic that can be formed."""
    volts, amps = row.at_V or 0.0, row.leakage_A or 0.0
    sound = published_A(position, test_V=volts, rated_V=position.rated_V or volts) * warm
    if not over and amps <= sound:
        return Point(Advice.KEEP, text)
    rested = row.after_s is not None and row.after_s >= FORMED_S
    text += f"; a sound part of this style passes {figure(sound, 'A')}"
    if over and rested:
        return Point(Advice.REPLACE, f"{text}; half an hour under voltage did not mend it")
    return Point(Advice.WATCH if rested else Advice.FORM, text)


def _unsound(row: Reading, position: Position, worst: Worst | None) -> bool:
    """Tell whether a paper part passes direct current at a small part of its rating."""
    if position.style.name not in PAPER or position.rated_V is None:
        return False
    if worst is None or worst.worst_V < HIGH_V:
        return False
    return (row.at_V or 0.0) <= SMALL_SHARE * position.rated_V and _far_from_new(row, position)


def _above_rating(row: Reading, position: Position) -> SourceError | None:
    if position.rated_V is None or row.at_V is None or row.at_V <= position.rated_V * 1.001:
        return None
    message = (
        f"{row.part}: tested at {figure(row.at_V, 'V')}, above its rating of "
        f"{figure(position.rated_V, 'V')}"
    )
    hint = "a reading above the rating says nothing of a part that may have been hurt by it"
    return SourceError(message, row.spans.get("at", row.span), hint)

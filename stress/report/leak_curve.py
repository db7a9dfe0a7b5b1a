"""The leakage of a position along its solved curve: the picture and the what-if table."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from markupsafe import Markup

from stress.parts.limit import Limit
from stress.report import words
from stress.report.drawing import Scale, axis_bottom, axis_left, line, polyline, svg, tag, text
from stress.study.result import CurvePoint, Leakage, LeakageIn, Review
from stress.text.figure import figure

_WIDTH, _PANEL, _HEAD, _FOOT = 400.0, 118.0, 26.0, 46.0
_LEFT, _RIGHT = 66.0, 388.0
PAST, WITHIN, NO_LIMIT = "past its limit", "within", "no limit known"
VERDICTS = (PAST, WITHIN, NO_LIMIT, words.NOT_KNOWN)
_MOST_PANELS = 3
_HEADROOM = 2.0  # times the limit; what goes higher leaves the picture at its top


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One stress or node voltage at every point of the curve, ready to be shown.

    Attributes:
        values: A text for each point.
        verdicts: In words for each point.
    """

    part: str
    what: str
    limit: str
    values: tuple[str, ...]
    verdicts: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class WhatIf:
    """The solved points of a curve, soundest first; every tuple is as long as `ohm`."""

    condition: str
    ohm: tuple[str, ...]
    leak: tuple[str, ...]
    x: tuple[float, ...]
    rows: tuple[Row, ...]

    @property
    def data(self) -> dict[str, object]:
        """What the page's script needs of it."""
        return {
            "ohm": self.ohm,
            "leak": self.leak,
            "x": [round(x, 1) for x in self.x],
            "rows": [
                {"values": row.values, "verdicts": [VERDICTS.index(each) for each in row.verdicts]}
                for row in self.rows
            ],
        }


def what_if(review: Review, leakage: Leakage) -> WhatIf | None:
    """Return the curve of the governing condition, or None where fewer than two points exist."""
    points = _points(leakage.governing)
    if leakage.governing is None or len(points) < 2:
        return None
    stresses = dict.fromkeys(
        (part, stress) for point in points for part in point.stresses for stress in
        point.stresses[part]
    )  # fmt: skip
    rows = []
    for part, stress in stresses:
        limit = _limits(review, part).get(stress)
        unit = words.unit_of(stress)
        held = [point.stresses.get(part, {}).get(stress) for point in points]
        rows.append(
            Row(
                part=part,
                what=words.quantity(stress),
                limit=figure(limit.value, unit) if limit else words.NOT_KNOWN,
                values=_shown(points, held, unit),
                verdicts=tuple(_verdict(value, limit) for value in held),
            )
        )
    for node in dict.fromkeys(node for point in points for node in point.nodes):
        held = [point.nodes.get(node) for point in points]
        values = _shown(points, held, "V")
        rows.append(
            Row(part=f"node {node}", what="voltage", limit="none", values=values,
                verdicts=(NO_LIMIT,) * len(points))
        )  # fmt: skip
    x = _scale(points)
    return WhatIf(
        condition=leakage.governing.condition,
        ohm=tuple(figure(point.ohm, "ohm") for point in points),
        leak=_shown(points, [point.leak_A for point in points], "A"),
        x=tuple(x.at(point.ohm) for point in points),
        rows=tuple(rows),
    )


def _points(of: LeakageIn | None) -> list[CurvePoint]:
    return sorted(of.curve, key=lambda point: -point.ohm) if of else []


def _shown(points: list[CurvePoint], held: list[float | None], unit: str) -> tuple[str, ...]:
    return tuple(
        point.unanswered.kind if point.unanswered else words.amount(value, unit)
        for point, value in zip(points, held, strict=True)
    )


def _verdict(value: float | None, limit: Limit | None) -> str:
    if limit is None:
        return NO_LIMIT
    if value is None:
        return words.NOT_KNOWN
    return PAST if value > limit.value else WITHIN


def _limits(review: Review, part: str) -> Mapping[str, Limit]:
    try:
        return review.circuit.part(part).limits
    except KeyError:  # another position
        return {}


def _scale(points: list[CurvePoint]) -> Scale:
    return Scale(points[0].ohm, points[-1].ohm, _LEFT, _RIGHT, decades=True)


def leak_curve(review: Review, leakage: Leakage) -> Markup | None:
    """Return the stresses of the first victims against leakage resistance, worse to the right.

    Limits, the critical and the functional leakage and the bench limit are drawn in.
    """
    governing = leakage.governing
    points = _points(governing)
    solved = [point for point in points if point.unanswered is None]
    if governing is None or len(solved) < 2:
        return None
    chosen = _chosen(review, governing, solved)
    if not chosen:
        return None
    x = _scale(points)
    bottom = _HEAD + _PANEL * len(chosen)
    drawn: list[Markup] = []
    for i, (part, stress) in enumerate(chosen):
        limit = _limits(review, part).get(stress)
        drawn += _panel(x, solved, part, stress, limit, top=_HEAD + _PANEL * i)
    drawn += axis_bottom(x, "ohm", y=bottom - 14, count=5)
    drawn.append(
        text(_RIGHT, bottom + 20, "leakage resistance; leakier to the right", anchor="end",
             class_="side")
    )  # fmt: skip
    drawn += _marks(review, leakage, x, bottom=bottom - 14)
    drawn += [
        text(x.at(point.ohm), _HEAD + 26, point.unanswered.kind, anchor="end", class_="tick")
        for point in points
        if point.unanswered
    ]
    drawn.append(line(x.start, _HEAD - 8, x.start, bottom - 14, "now", data_now=leakage.position))
    names = ", ".join(f"{part} {words.quantity(stress)}" for part, stress in chosen)
    title = f"{leakage.position}: {names} against leakage resistance, in {governing.condition}"
    return svg(
        *drawn, width=_WIDTH, height=bottom + _FOOT - 18, title=title, class_="leak-curve"
    )  # fmt: skip


def _chosen(
    review: Review, governing: LeakageIn, solved: list[CurvePoint]
) -> list[tuple[str, str]]:
    """Return the stresses worth a panel: the first victim, others by where they pass."""
    first = governing.victim or governing.assumed_victim
    passed: dict[tuple[str, str], float] = {}
    bounded: list[tuple[str, str]] = []
    for point in solved:
        for part, stresses in point.stresses.items():
            for stress, value in stresses.items():
                limit = _limits(review, part).get(stress)
                if limit is None:
                    continue
                bounded.append((part, stress))
                if value > limit.value:
                    passed.setdefault((part, stress), point.ohm)
    ordered = sorted(passed, key=lambda each: -passed[each])
    if first is not None and (first.part, first.quantity) in bounded:
        ordered.insert(0, (first.part, first.quantity))
    return list(dict.fromkeys([*ordered, *bounded]))[: _MOST_PANELS if ordered else 1]


def _panel(
    x: Scale, solved: list[CurvePoint], part: str, stress: str, limit: Limit | None, *, top: float
) -> list[Markup]:
    unit = words.unit_of(stress)
    held = [
        (point.ohm, point.stresses[part][stress])
        for point in solved
        if stress in point.stresses.get(part, {})
    ]
    most = max(value for _, value in held)
    if limit is not None:
        most = min(max(most, limit.value), _HEADROOM * limit.value)
    least = min(0.0, *(value for _, value in held))
    high = most * 1.12 if most > 0.0 else 1.0
    y = Scale(least, high, top + _PANEL - 14, top + 16)
    drawn = [
        *axis_left(y, unit, x=_LEFT, to=_RIGHT),
        tag("rect", x=_LEFT, y=top + 16, width=_RIGHT - _LEFT, height=_PANEL - 30, class_="frame"),
        polyline([(x.at(ohm), y.at(value)) for ohm, value in held], "trace voltage"),
        *(tag("circle", cx=x.at(ohm), cy=y.at(v), r=2, class_="solved") for ohm, v in held),
        text(_LEFT, top + 11, f"{part} {words.quantity(stress)}", class_="side"),
    ]
    if limit is not None:
        place = y.at(limit.value)
        assumed = " (assumed)" if limit.assumed else ""
        drawn.append(line(_LEFT, place, _RIGHT, place, "limit"))
        drawn.append(text(_LEFT + 4, place - 4, f"limit {figure(limit.value, unit)}{assumed}"))
    if any(value > high for _, value in held):
        drawn.append(text(_RIGHT, top + 11, "runs off the top", anchor="end", class_="tick"))
    return drawn


def _marks(review: Review, leakage: Leakage, x: Scale, *, bottom: float) -> list[Markup]:
    governing = leakage.governing
    bench = review.bench.get(leakage.position)
    marks: list[tuple[str, float, str]] = []
    if governing and governing.critical_ohm is not None:
        marks.append(("damage", governing.critical_ohm, "critical"))
    if governing and governing.functional_ohm is not None:
        marks.append(("works above", governing.functional_ohm, "functional"))
    if bench and bench.test_V and bench.leakage_max_A:
        marks.append(("bench limit", bench.test_V / bench.leakage_max_A, "bench"))
    drawn = []
    marks.sort(key=lambda mark: x.at(mark[1]))
    for i, (name, ohm, class_) in enumerate(marks):
        place = x.at(ohm)
        drawn.append(line(place, _HEAD - 6, place, bottom, f"mark {class_}"))
        # Names in a row above the panels, each beside its line, on two heights.
        anchor = "end" if place > (_LEFT + _RIGHT) / 2 else "start"
        drawn.append(
            text(place, 10.0 + 11.0 * (i % 2), name, anchor=anchor, class_=f"tick of-{class_}")
        )
    return drawn

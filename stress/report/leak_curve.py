"""The leakage of a position along its solved curve: the picture and the what-if table."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from markupsafe import Markup

from stress.parts.limit import Limit
from stress.report import words
from stress.report.course import MOST_STRESSES, Course, courses, nodes, points_of
from stress.report.drawing import Scale, axis_bottom, axis_left, line, polyline, svg, tag, text
from stress.study.result import CurvePoint, Leakage, Review
from stress.text.figure import figure

_WIDTH, _PANEL, _HEAD, _FOOT = 400.0, 118.0, 34.0, 46.0
_LEFT, _RIGHT = 66.0, 388.0
PAST, WITHIN, NO_LIMIT = "past its limit", "within", "not judged"
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
    points = points_of(leakage.governing)
    if leakage.governing is None or len(points) < 2:
        return None
    found = courses(review, leakage.governing)[:MOST_STRESSES]
    found += nodes(review.circuit, leakage.governing, position=leakage.position, shown=found)
    x = _scale(points)
    return WhatIf(
        condition=leakage.governing.condition,
        ohm=tuple(figure(point.ohm, "ohm") for point in points),
        leak=_shown(points, [point.leak_A for point in points], "A"),
        x=tuple(x.at(point.ohm) for point in points),
        rows=tuple(_row(points, each) for each in found),
    )


def _row(points: list[CurvePoint], of: Course) -> Row:
    limit = of.limit
    return Row(
        part=of.part,
        what=of.words,
        limit=words.amount(limit.value if limit else None, of.unit, missing=NO_LIMIT),
        values=_shown(points, of.values, of.unit),
        verdicts=tuple(_verdict(value, limit) for value in of.values),
    )


def _shown(points: list[CurvePoint], held: Sequence[float | None], unit: str) -> tuple[str, ...]:
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


def _scale(points: list[CurvePoint]) -> Scale:
    return Scale(points[0].ohm, points[-1].ohm, _LEFT, _RIGHT, decades=True)


def leak_curve(review: Review, leakage: Leakage) -> Markup | None:
    """Return the stresses of the first victims against leakage resistance, worse to the right.

    Limits, the critical and the functional leakage and the bench limit are drawn in.
    """
    governing = leakage.governing
    points = points_of(governing)
    solved = [point for point in points if point.unanswered is None]
    if governing is None or len(solved) < 2:
        return None
    bounded = [each for each in courses(review, governing) if each.limit is not None]
    chosen = [each for i, each in enumerate(bounded) if i == 0 or each.passes is not None]
    chosen = chosen[:_MOST_PANELS]
    if not chosen:
        return None
    x = _scale(points)
    bottom = _HEAD + _PANEL * len(chosen)
    drawn: list[Markup] = []
    for i, course in enumerate(chosen):
        drawn += _panel(x, points, course, top=_HEAD + _PANEL * i)
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
    names = ", ".join(f"{each.part} {each.words}" for each in chosen)
    title = f"{leakage.position}: {names} against leakage resistance, in {governing.condition}"
    return svg(
        *drawn, width=_WIDTH, height=bottom + _FOOT - 18, title=title, class_="leak-curve"
    )  # fmt: skip


def _panel(x: Scale, points: list[CurvePoint], course: Course, *, top: float) -> list[Markup]:
    unit, limit = course.unit, course.limit
    held = [
        (point.ohm, value)
        for point, value in zip(points, course.values, strict=True)
        if value is not None
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
        text(_LEFT, top + 11, f"{course.part} {course.words}", class_="side"),
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
        drawn.append(line(place, 10.0 + 11.0 * i, place, bottom, f"mark {class_}"))
        # Names above the panels, each beside its line, at its own height.
        anchor = "end" if place > (_LEFT + _RIGHT) / 2 else "start"
        drawn.append(text(place, 8.0 + 11.0 * i, name, anchor=anchor, class_=f"tick of-{class_}"))
    return drawn

"""What stays charged after switching off, on the page: table and curves."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log10

from markupsafe import Markup

from stress.report.drawing import Scale, axis_bottom, axis_left, line, polyline, svg, tag, text
from stress.report.table import Cell, Column, Table, number
from stress.study.discharge_result import SAFE_V, THRESHOLDS_V, Charge, Decay, Discharge
from stress.text.figure import figure

_WIDTH, _HEIGHT = 400.0, 210.0
_LEFT, _RIGHT, _TOP, _BOTTOM = 66.0, 388.0, 26.0, 168.0
_STYLES = ("solid", "dashed", "dotted")
_FIRST_s = 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class AfterView:
    """What the templates show of a discharge."""

    of: Discharge
    charges: Table
    pictures: tuple[tuple[str, Markup], ...]


def after_view(found: Discharge) -> AfterView:
    """Return a discharge ready for the templates; curves of those worth drawing."""
    drawn = ((each.position, discharge_picture(each)) for each in found.charges)
    return AfterView(
        of=found,
        charges=charges(found),
        pictures=tuple((name, picture) for name, picture in drawn if picture is not None),
    )


def charges(found: Discharge) -> Table:
    """Return what every position holds and how it loses it."""
    columns = (
        Column("position", "part"),
        Column("start_V", "at most", number=True),
        Column("condition", "in"),
        Column("energy_J", "energy", number=True),
        Column("bleed_ohm", "bleed path", number=True),
        *(Column(f"below_{v:.0f}_s", f"under {v:.0f} V", number=True) for v in THRESHOLDS_V),
        Column("how", "slowest way"),
        Column("resistor", "discharge with"),
        Column("returns_V", "comes back", number=True),
        Column("verdict", "verdict"),
    )
    return Table("charges", columns, tuple(_charge(each) for each in found.charges))


def _charge(of: Charge) -> tuple[Cell, ...]:
    slow = max(of.decays, key=_seconds, default=None)
    bleed = number(of.bleed_ohm, "ohm", missing="not solved")
    if of.bleed_ohm is not None and of.bleed_ohm == inf:
        bleed = Cell("nothing")
    verdict = ["can kill"] if of.deadly else []
    if of.holds:
        verdict.append("holds its charge")
    if of.floating:
        verdict.append("measure across its own terminals")
    if not verdict:
        safe = f"never above {figure(SAFE_V, 'V')}"
        verdict.append("measure before touching" if of.start_V > SAFE_V else safe)
    resistor = of.resistor
    return (
        Cell(of.position),
        number(of.start_V, "V"),
        Cell(of.condition),
        number(of.energy_J, "J"),
        bleed,
        *(_below(slow, volts) for volts in THRESHOLDS_V),
        Cell(slow.how if slow else "not simulated"),
        Cell(
            f"{figure(resistor.ohm, 'ohm')}, {figure(resistor.rated_W, 'W')}, "
            f"{figure(resistor.rated_V, 'V')}"
            if resistor
            else "nothing needed"
        ),
        number(of.returns_V[1], "V"),
        Cell("; ".join(verdict)),
    )


def _seconds(of: Decay) -> float:
    seconds = of.below_s.get(SAFE_V)
    return inf if seconds is None else seconds


def _below(of: Decay | None, volts: float) -> Cell:
    if of is None:
        return Cell("not simulated")
    seconds = of.below_s.get(volts)
    if seconds is None:
        return Cell("never")
    about = "about " if volts in of.extrapolated else ""
    return Cell(about + time(seconds) if seconds > 0.0 else "at once", seconds)


def time(seconds: float) -> str:
    """Return a time as people say it: seconds, minutes, hours, days."""
    for size, word in ((86400.0, "days"), (3600.0, "h"), (60.0, "min")):
        if seconds >= 2.0 * size:
            return f"{seconds / size:.3g} {word}"
    return figure(seconds, "s", digits=2)


def discharge_picture(of: Charge) -> Markup | None:
    """Return voltage against time after switching off, or None where it never is dangerous."""
    shown = [each for each in of.decays if len(each.seconds) > 1][: len(_STYLES)]
    if of.start_V <= SAFE_V or not shown:
        return None
    last = max(each.seconds[-1] for each in shown)
    x = Scale(_FIRST_s, max(last, 10.0 * _FIRST_s), _LEFT, _RIGHT, decades=True)
    top = max(max(abs(v) for v in each.volts) for each in shown)
    y = Scale(0.0, max(top, SAFE_V) * 1.08, _BOTTOM, _TOP)
    drawn = [
        *axis_left(y, "V", x=_LEFT, to=_RIGHT),
        *_times(x),
        tag("rect", x=_LEFT, y=_TOP, width=_RIGHT - _LEFT, height=_BOTTOM - _TOP, class_="frame"),
        line(_LEFT, y.at(SAFE_V), _RIGHT, y.at(SAFE_V), "limit"),
        text(_RIGHT - 4, y.at(SAFE_V) - 4, f"{SAFE_V:.0f} V", anchor="end"),
    ]
    for i, (decay, style) in enumerate(zip(shown, _STYLES, strict=False)):
        points = [
            (x.at(max(s, _FIRST_s)), y.at(abs(v)))
            for s, v in zip(decay.seconds, decay.volts, strict=True)
        ]
        drawn.append(polyline(points, f"trace voltage {style}"))
        left = 20.0 + 126.0 * i
        drawn.append(line(left, 14, left + 22, 14, f"trace voltage {style}"))
        drawn.append(text(left + 26, 18, decay.how, class_="tick"))
    told = ", ".join(f"{each.how} from {figure(each.start_V, 'V')}" for each in shown)
    title = f"{of.position}: voltage after switching off, {told}"
    return svg(*drawn, width=_WIDTH, height=_HEIGHT, title=title, class_="decay")


def _times(x: Scale) -> list[Markup]:
    if log10(x.high / x.low) < 1.0:
        return axis_bottom(x, "s", y=_BOTTOM)
    drawn = []
    for seconds in x.ticks(5):
        place = x.at(seconds)
        drawn.append(line(place, _BOTTOM, place, _BOTTOM + 4, "frame"))
        drawn.append(text(place, _BOTTOM + 16, time(seconds), anchor="middle", class_="tick"))
    return drawn

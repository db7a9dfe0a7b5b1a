"""The voltage ladder of a position: what it bears and what parts stand, on one scale."""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

from markupsafe import Markup

from stress.circuit.circuit import Position
from stress.report.drawing import Scale, line, spread, svg, tag, text
from stress.study.result import Review
from stress.text.figure import figure

_WIDTH, _HEIGHT = 420.0, 236.0
_TOP, _BOTTOM = 18.0, 222.0
_LEFT, _RIGHT = 195.0, 250.0
_GAP = 15.0


@dataclass(frozen=True, slots=True)
class Rung:
    """One voltage: `style` is the line style, `bears` tells the two sides apart."""

    words: str
    volts: float
    style: str
    bears: bool


def rungs(review: Review, position: Position) -> tuple[Rung, ...]:
    """Return the voltages of a position that are known."""
    name = position.name
    found = []
    nominal = review.working.positions.get(name, {}).get("nominal")
    if nominal:
        found.append(Rung("normal", nominal.dc_V, "normal", True))
    worst = review.worst.get(name)
    if worst:
        found.append(Rung(f"worst, {_short(worst.condition)}", worst.worst_V, "worst", True))
        if worst.brief_V is not None:
            brief = f"brief, {_short(worst.brief_condition)}" if worst.brief_condition else "brief"
            found.append(Rung(brief, worst.brief_V, "brief", True))
    if position.rated_V is not None:
        found.append(Rung("marked rating", position.rated_V, "marked", False))
        surge_V = position.style.surge_V(position.rated_V)
        if surge_V > position.rated_V:
            found.append(Rung("its surge rating", surge_V, "surge", False))
    fit = review.replacements.get(name)
    ac_V = (fit.ac_V or fit.rated_V) if fit and fit.safety_class else None
    if ac_V is not None:
        words = f"proposed {figure(ac_V, 'V')} AC, crest"
        found.append(Rung(words, ac_V * sqrt(2.0), "proposed", False))
    elif fit and fit.rated_V is not None:
        found.append(Rung("proposed rating", fit.rated_V, "proposed", False))
    return tuple(found)


def _short(condition: str) -> str:
    """Return a condition's name so that it fits beside the ladder."""
    return condition if len(condition) <= 14 else f"{condition[:13]}…"


def ladder(review: Review, position: Position) -> Markup | None:
    """Return the picture, or None where no voltage is known."""
    known = rungs(review, position)
    top = max((abs(rung.volts) for rung in known), default=0.0)
    if top == 0.0:
        return None
    scale = Scale(0.0, top * 1.06, _BOTTOM, _TOP)
    drawn = [
        line(_LEFT, _TOP - 8, _LEFT, _BOTTOM, "stile"),
        line(_RIGHT, _TOP - 8, _RIGHT, _BOTTOM, "stile"),
        line(_LEFT - 6, _BOTTOM, _RIGHT + 6, _BOTTOM, "frame"),
        text(_LEFT - 10, 10, "bears", anchor="end", class_="side"),
        text(_RIGHT + 10, 10, "parts stand", class_="side"),
    ]
    for bears in (True, False):
        side = sorted((r for r in known if r.bears is bears), key=lambda r: -abs(r.volts))
        wanted = [scale.at(abs(rung.volts)) for rung in side]
        places = spread(wanted, gap=_GAP, low=_TOP + 8, high=_BOTTOM)
        for rung, y, label_y in zip(side, wanted, places, strict=True):
            drawn += _rung(rung, y, label_y)
    told = ", ".join(f"{rung.words} {figure(rung.volts, 'V')}" for rung in known)
    title = f"Voltage ladder of {position.name}: {told}"
    return svg(*drawn, width=_WIDTH, height=_HEIGHT, title=title, class_="ladder")


def _rung(rung: Rung, y: float, label_y: float) -> list[Markup]:
    words = f"{rung.words} {figure(rung.volts, 'V')}"
    near, far = (_LEFT, _RIGHT) if rung.bears else (_RIGHT, _LEFT)
    away = -1.0 if rung.bears else 1.0
    drawn = [
        line(near + 4 * away, y, far, y, f"rung {rung.style}"),
        line(near + 4 * away, y, near + 12 * away, label_y, "leader"),
        text(
            near + 15 * away,
            label_y + 4,
            words,
            anchor="end" if rung.bears else "start",
            class_=f"label of-{rung.style}",
        ),
    ]
    if rung.style == "proposed":  # square ends tell it apart without colour
        for x in (near, far):
            drawn.append(tag("rect", x=x - 3, y=y - 3, width=6, height=6, class_="cap"))
    if rung.style == "marked":
        drawn.append(line(near + 4 * away, y + 3, far, y + 3, f"rung {rung.style}"))
    return drawn

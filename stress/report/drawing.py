"""Figures as inline SVG: elements, scales and axes. Colours are left to the style sheet."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import ceil, floor, log10

from markupsafe import Markup, escape

from stress.report.words import plain
from stress.text.figure import figure


def tag(name: str, *children: object, **attributes: object) -> Markup:
    """Return an element; children that are no markup and all attributes are escaped.

    Attribute names lose a trailing underscore, others become hyphens.
    """
    written = Markup("").join(
        Markup(' {}="{}"').format(key.rstrip("_").replace("_", "-"), _text(value))
        for key, value in attributes.items()
        if value is not None
    )
    inner = Markup("").join(each if isinstance(each, Markup) else _text(each) for each in children)
    return Markup("<{0}{1}>{2}</{0}>").format(Markup(name), written, inner)


def _text(value: object) -> Markup:
    if isinstance(value, float):
        return escape(f"{value:.1f}".removesuffix(".0"))
    return escape(plain(str(value)))


def svg(
    *children: Markup, width: float, height: float, title: str, class_: str, role: str = "img"
) -> Markup:
    """Return a whole picture; `title` says in words what it shows.

    Args:
        role: "group" where parts of it can be operated, which an image would hide.
    """
    return tag(
        "svg",
        tag("title", title),
        *children,
        viewBox=f"0 0 {width:g} {height:g}",
        width=width,
        height=height,
        role=role,
        aria_label=title if role == "group" else None,
        class_=f"picture {class_}",
    )


def line(x1: float, y1: float, x2: float, y2: float, class_: str, **more: object) -> Markup:
    """Return a straight line."""
    return tag("line", x1=x1, y1=y1, x2=x2, y2=y2, class_=class_, **more)


def text(x: float, y: float, words: str, *, anchor: str = "start", class_: str = "label") -> Markup:
    """Return a text; `anchor` is start, middle or end."""
    return tag("text", words, x=x, y=y, text_anchor=anchor, class_=class_)


def polyline(points: Iterable[tuple[float, float]], class_: str) -> Markup:
    """Return a run of straight lines."""
    joined = " ".join(f"{x:.1f},{y:.1f}" for x, y in points)
    return tag("polyline", points=joined, class_=class_)


@dataclass(frozen=True, slots=True)
class Scale:
    """From values to places in the picture, linear or by decades.

    Attributes:
        low, high: Values at `start` and `end`; they differ, and are positive by decades.
    """

    low: float
    high: float
    start: float
    end: float
    decades: bool = False

    def at(self, value: float) -> float:
        """Return the place of a value; values outside come to lie on the edge."""
        bottom, top = min(self.low, self.high), max(self.low, self.high)
        held = min(max(value, bottom), top)
        if self.decades:
            share = (log10(held) - log10(self.low)) / (log10(self.high) - log10(self.low))
        else:
            share = (held - self.low) / (self.high - self.low)
        return self.start + share * (self.end - self.start)

    def ticks(self, count: int = 4) -> list[float]:
        """Return round values between the ends: about `count`, or whole decades."""
        bottom, top = sorted((self.low, self.high))
        if self.decades:
            first, last = ceil(log10(bottom) - 1e-9), floor(log10(top) + 1e-9)
            every = max((last - first) // count, 1)
            return [10.0**power for power in range(first, last + 1, every)]
        step = _round_step((top - bottom) / count)
        first, last = ceil(bottom / step - 1e-9), floor(top / step + 1e-9)
        return [step * n for n in range(first, last + 1)]


def _round_step(rough: float) -> float:
    power = 10.0 ** floor(log10(rough))
    return next(power * step for step in (1.0, 2.0, 5.0, 10.0) if power * step >= rough * 0.999)


def axis_left(scale: Scale, unit: str, *, x: float, to: float, count: int = 3) -> list[Markup]:
    """Return ticks with their values left of `x`, and hairlines from there to `to`."""
    drawn = []
    for value in scale.ticks(count):
        y = scale.at(value)
        drawn.append(line(x, y, to, y, "hair"))
        drawn.append(text(x - 5, y + 4, figure(value, unit, digits=4), anchor="end", class_="tick"))
    return drawn


def axis_bottom(scale: Scale, unit: str, *, y: float, count: int = 4) -> list[Markup]:
    """Return ticks with their values below `y`."""
    drawn = []
    for value in scale.ticks(count):
        x = scale.at(value)
        drawn.append(line(x, y, x, y + 4, "frame"))
        drawn.append(text(x, y + 16, figure(value, unit), anchor="middle", class_="tick"))
    return drawn


def spread(places: Sequence[float], *, gap: float, low: float, high: float) -> list[float]:
    """Return places for labels, as near as they can be to the given ones and `gap` apart.

    Args:
        places: Wanted, rising.
        gap: Between two labels.
        low, high: Where the first and the last may be.
    """
    held: list[float] = []
    for place in places:
        held.append(max(place, held[-1] + gap if held else low))
    limit = high
    for i in range(len(held) - 1, -1, -1):
        held[i] = min(held[i], limit)
        limit = held[i] - gap
    return held

"""Voltage and current of a position over a period, and the spectrum of its ripple current."""

from __future__ import annotations

from markupsafe import Markup

from stress.engine.case import Floats
from stress.report.drawing import Scale, axis_bottom, axis_left, line, polyline, svg, tag, text
from stress.study.result import PositionStress, Trace
from stress.text.figure import figure

_WIDTH, _HEIGHT = 400.0, 250.0
_LEFT, _RIGHT = 66.0, 388.0
_MOST_POINTS = 200
_QUIET = 2e-3  # of the largest value: less is drawn as the straight line that it is
_NOISE = {"V": 1e-3, "A": 1e-9}  # and so is what no meter shows


def waveform(name: str, trace: Trace) -> Markup:
    """Return one period: voltage above, current below."""
    time = Scale(float(trace.time_s[0]), float(trace.time_s[-1]), _LEFT, _RIGHT)
    drawn = [
        *_panel(time, trace, trace.voltage_V, "V", top=22.0, bottom=112.0, class_="voltage"),
        *_panel(time, trace, trace.current_A, "A", top=138.0, bottom=216.0, class_="current"),
        *axis_bottom(time, "s", y=216.0),
        text(_LEFT, 14, "voltage", class_="side"),
        text(_LEFT, 131, "current", class_="side"),
    ]
    title = f"{name}: voltage and current over one period, condition {trace.condition}"
    return svg(*drawn, width=_WIDTH, height=_HEIGHT, title=title, class_="waveform")


def _panel(
    time: Scale, trace: Trace, samples: Floats, unit: str, *, top: float, bottom: float, class_: str
) -> list[Markup]:
    low, high = float(samples.min()), float(samples.max())
    least = max(_QUIET * max(abs(low), abs(high)), _NOISE[unit])
    if high - low < least:
        low, high = low - least, high + least
    room = 0.06 * (high - low)
    scale = Scale(low - room, high + room, bottom, top)
    step = max(len(samples) // _MOST_POINTS, 1)
    points = [
        (time.at(float(t)), scale.at(float(value)))
        for t, value in zip(trace.time_s[::step], samples[::step], strict=True)
    ]
    return [
        *axis_left(scale, unit, x=_LEFT, to=_RIGHT),
        tag("rect", x=_LEFT, y=top, width=_RIGHT - _LEFT, height=bottom - top, class_="frame"),
        polyline(points, f"trace {class_}"),
    ]


def spectrum(name: str, stress: PositionStress) -> Markup | None:
    """Return the components of the ripple current, or None where there are none."""
    lines = [(hertz, amps) for hertz, amps in stress.spectrum if hertz > 0.0 and amps > 0.0]
    if not lines:
        return None
    top, bottom = 24.0, 196.0
    frequency = Scale(0.0, max(hertz for hertz, _ in lines) * 1.08, _LEFT, _RIGHT)
    current = Scale(0.0, max(amps for _, amps in lines) * 1.15, bottom, top)
    drawn = [
        *axis_left(current, "A", x=_LEFT, to=_RIGHT),
        *axis_bottom(frequency, "Hz", y=bottom),
        line(_LEFT, bottom, _RIGHT, bottom, "frame"),
        text(_LEFT, 14, "ripple current, rms of each component", class_="side"),
    ]
    for hertz, amps in lines:
        x = frequency.at(hertz)
        drawn.append(line(x, bottom, x, current.at(amps), "stem"))
    hertz, amps = max(lines, key=lambda each: each[1])
    x = frequency.at(hertz)
    right = x < (_LEFT + _RIGHT) / 2
    words = f"{figure(amps, 'A')} at {figure(hertz, 'Hz')}"
    drawn.append(
        text(x + (6 if right else -6), current.at(amps) - 4, words,
             anchor="start" if right else "end")
    )  # fmt: skip
    title = f"{name}: spectrum of the ripple current, strongest {words}"
    return svg(*drawn, width=_WIDTH, height=222.0, title=title, class_="spectrum")

"""Sources as a settled state sees them: delays folded in, what does not repeat held at its end."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from stress.netlist.flat import Wave

EDGE = 1e-3  # of the period, for a rise or fall that is given as 0
WHOLE = 1e-4  # how near a number of turns in a period is to a whole one


def has_amplitude(wave: Wave) -> bool:
    """Whether a wave moves at all."""
    values = wave.values
    if wave.kind in ("sin", "sffm"):
        return len(values) > 1 and values[1] != 0.0
    if wave.kind == "am":
        return len(values) > 0 and values[0] != 0.0
    if wave.kind == "pwl":
        return len(set(values[1::2])) > 1
    return len(values) > 1 and values[0] != values[1]


def repeats(wave: Wave, period_s: float) -> bool:
    """Whether a settled wave is the same after a period."""
    values = wave.values
    if not has_amplitude(wave):
        return True
    if wave.kind == "sin":
        rates = [values[2]] if len(values) > 2 else []
    elif wave.kind == "pulse":
        rates = [1.0 / values[6]]
    elif wave.kind == "pwl":
        rates = [1.0 / (values[-2] - (wave.repeat_from_s or 0.0))]
    elif wave.kind == "sffm":
        rates = [values[2], values[4]] if len(values) > 4 else []
    else:  # am: modulating frequency, carrier frequency
        rates = list(values[2:4])
    turns = [rate * period_s for rate in rates]
    return all(math.isclose(turn, round(turn), abs_tol=WHOLE) for turn in turns)


def scaled(wave: Wave, factor: float) -> Wave:
    """Return the wave with its amplitudes times a factor; the offset of a sine stays."""
    values = list(wave.values)
    if wave.kind in ("sin", "sffm"):
        values[1:2] = [value * factor for value in values[1:2]]
    elif wave.kind == "am":
        values[:1] = [value * factor for value in values[:1]]
    elif wave.kind == "pwl":
        values[1::2] = [value * factor for value in values[1::2]]
    elif wave.kind == "pulse":
        values[:2] = [value * factor for value in values[:2]]
    else:  # exp
        values[:2] = [value * factor for value in values[:2]]
    return replace(wave, values=tuple(values))


def shifted(wave: Wave, phase_deg: float) -> Wave:
    """Return a sine that starts at another phase; other kinds are returned as they are."""
    if wave.kind != "sin" or not phase_deg:
        return wave
    values = [*wave.values, *(0.0,) * (6 - len(wave.values))]
    values[5] += phase_deg
    return replace(wave, values=tuple(values))


def settled(wave: Wave) -> tuple[Wave | float, str]:
    """Return what is left of a wave for good, and what was changed ("" if nothing).

    A plain number is the value that it holds once everything has passed.
    """
    change = {
        "sin": _sine,
        "pulse": _pulse,
        "pwl": _points,
        "exp": _exponential,
        "sffm": _modulated,
        "am": _modulated,
    }
    return change[wave.kind](wave)


def _sine(wave: Wave) -> tuple[Wave | float, str]:
    offset, amplitude, frequency, delay, damping, phase = _filled(wave.values, 6)
    if damping > 0.0:
        return offset, "its oscillation dies out, so it is held at its offset"
    if len(wave.values) < 3 or frequency == 0.0:
        return wave, ""
    if delay == 0.0:
        return wave, ""
    turned = math.fmod(phase - 360.0 * frequency * delay, 360.0)
    values = (offset, amplitude, frequency, 0.0, 0.0, turned)
    return replace(wave, values=values), "its delay is taken as a shift of phase"


def _pulse(wave: Wave) -> tuple[Wave | float, str]:
    low, high, delay, rise, fall, width, period = _filled(wave.values, 7)
    if period <= 0.0:
        final = low if width > 0.0 else high
        return final, f"its single pulse has passed, so it is held at {final:g}"
    counted = len(wave.values) > 7 and wave.values[7] > 0
    if counted:
        return low, f"its pulses are counted, so it is held at {low:g}"
    rise, fall = rise or EDGE * period, fall or EDGE * period
    width = width or max(period - rise - fall, 0.0)
    start = math.fmod(delay, period)
    plain = replace(wave, values=(low, high, 0.0, rise, fall, width, period))
    if start == 0.0:
        return plain, ""
    change = "its delay is folded into the period"
    top, down = start + rise, start + rise + width
    if down + fall <= period:
        return replace(plain, values=(low, high, start, rise, fall, width, period)), change
    if top <= period <= down:  # high at time 0: the same as a pulse downwards
        rest = period - rise - fall - width
        values = (high, low, down - period, fall, rise, rest, period)
        return replace(plain, values=values), change
    corners = [(start, low), (top, high), (down, high), (down + fall, low), (start + period, low)]
    return _turned(corners), change


def _points(wave: Wave) -> tuple[Wave | float, str]:
    times, levels = wave.values[0::2], wave.values[1::2]
    start = wave.repeat_from_s
    if start is None or times[-1] <= start:
        return levels[-1], f"its points do not repeat, so it is held at {levels[-1]:g}"
    if start == 0.0 and times[0] == 0.0:
        return wave, ""
    corners = [(start, _level(times, levels, start))]
    corners += [(t, v) for t, v in zip(times, levels, strict=True) if start < t]
    return _turned(corners), "only the part that repeats is taken"


def _turned(corners: Sequence[tuple[float, float]]) -> Wave:
    """Return the repetition of straight lines over one period, told from time 0 on.

    Args:
        corners: From the start of a period to its end, times rising.
    """
    times, levels = [t for t, _ in corners], [v for _, v in corners]
    period = times[-1] - times[0]
    turns = math.ceil(times[0] / period) if times[0] > 0.0 else 0
    zero = turns * period  # the multiple of the period that lies inside becomes time 0
    at_zero = _level(times, levels, zero)
    moved = {math.fmod(t - zero + period, period): v for t, v in corners[1:-1]}
    edge = math.fmod(times[0] - zero + period, period)
    moved.setdefault(edge, levels[-1])
    moved[0.0] = at_zero
    points = [*sorted(moved.items()), (period, at_zero)]
    return Wave("pwl", tuple(number for point in points for number in point), 0.0)


def _level(times: Sequence[float], levels: Sequence[float], at: float) -> float:
    """Return the level of straight lines between points."""
    for (t0, v0), (t1, v1) in zip(
        zip(times, levels, strict=True),
        zip(times[1:], levels[1:], strict=True),
        strict=False,
    ):
        if t0 <= at <= t1:
            return v0 if t1 == t0 else v0 + (v1 - v0) * (at - t0) / (t1 - t0)
    return levels[0] if at < times[0] else levels[-1]


def _exponential(wave: Wave) -> tuple[Wave | float, str]:
    final = wave.values[0]  # it decays to where it began
    return final, f"its rise and fall have passed, so it is held at {final:g}"


def _modulated(wave: Wave) -> tuple[Wave | float, str]:
    return wave, ""


def _filled(values: Sequence[float], size: int) -> tuple[float, ...]:
    return (*values[:size], *(0.0,) * (size - len(values)))

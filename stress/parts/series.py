"""Preferred numbers of IEC 60063, the rated voltages on sale, and the value that replaces another.

The series are from memory, to be confirmed; a test compares them with a second listing.
"""

from __future__ import annotations

from collections.abc import Mapping
from math import floor, log10

from stress.parts import styles
from stress.parts.style import Style
from stress.text.figure import figure

SERIES: Mapping[str, tuple[int, ...]] = {
    "E3": (10, 22, 47),
    "E6": (10, 15, 22, 33, 47, 68),
    "E12": (10, 12, 15, 18, 22, 27, 33, 39, 47, 56, 68, 82),
    "E24": (
        10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30,
        33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91,
    ),
}  # fmt: skip
_CLOSE = 1e-9  # two values of a series differ by far more
# How far a replacement may lie from the marked value (common practice): parts that set a
# frequency keep it closely, others had 20 % when new.
EXACT_STYLES = ("mica", "mica-transmitting", "polystyrene", "ceramic-1")
EXACT_BAND = (0.95, 1.05)
USUAL_BAND = (0.90, 1.10)


def around(value: float, series: str = "E12") -> tuple[float, float]:
    """Return the neighbours of a value in a series: at or below, at or above.

    Raises:
        ValueError: The value is not above zero.
        KeyError: There is no such series.
    """
    if not value > 0:
        raise ValueError("a value above zero is wanted")
    numbers = SERIES[series]
    decade = floor(log10(value))
    ladder = [
        float(f"{number}e{power - 1}")
        for power in (decade - 1, decade, decade + 1)
        for number in numbers
    ]
    below = max(one for one in ladder if one <= value * (1 + _CLOSE))
    above = min(one for one in ladder if one >= value * (1 - _CLOSE))
    return below, above


def next_up(value: float, series: str = "E12") -> float:
    """Return the smallest value of a series that is not below."""
    return around(value, series)[1]


def next_down(value: float, series: str = "E12") -> float:
    """Return the largest value of a series that is not above."""
    return around(value, series)[0]


def nearest(value: float, series: str = "E12") -> float:
    """Return the value of a series that is nearest by ratio; of two equally near, the larger."""
    below, above = around(value, series)
    return above if above / value <= value / below * (1 + _CLOSE) else below


def next_voltage(volts: float, style: Style | str) -> float | None:
    """Return the smallest rated voltage on sale that is not below; None beyond the last one.

    Raises:
        KeyError: There is no such style.
    """
    if isinstance(style, str):
        found = styles.find(style)
        if found is None:
            raise KeyError(style)
        style = found
    return next((step for step in style.steps.rated_V if step >= volts * (1 - _CLOSE)), None)


def standard_value(
    value_F: float,
    style: Style,
    *,
    tolerance: tuple[float, float] | None = None,
    most_F: float | None = None,
) -> tuple[float, str]:
    """Return the capacitance to buy instead of an original one, and why.

    Electrolytics: the next of E6 above, since they lose capacitance and up to half more does no
    harm behind a rectifier that allows it (common practice). Line to a part that can be
    touched: never above, since the touch current goes with it. Others: the nearest of the
    coarsest series that stays within a band around the marked value.

    Args:
        value_F: Marked capacitance.
        style: Of the part that is fitted.
        tolerance: Real value over marked value of the original, low and high, where stated; a
            closer one than the usual band is kept.
        most_F: Largest capacitance allowed, such as by the rectifier.
    """
    if style.electrolytic:
        chosen, why = next_up(value_F, "E6"), "next of E6 above, electrolytics may be larger"
    elif style.name == "line-Y":
        chosen, why = next_down(value_F, "E6"), "next of E6 below, for the touch current"
    else:
        chosen, why = _within(value_F, _band(style, tolerance))
    if most_F is not None and chosen > most_F * (1 + _CLOSE):
        chosen = next_down(min(most_F, value_F), "E12")
        why = f"next of E12 below, at most {figure(most_F, 'F')} is allowed"
    if abs(chosen / value_F - 1) < _CLOSE:
        return chosen, f"{figure(value_F, 'F')} is a preferred value"
    change = round(100 * (chosen / value_F - 1))
    made = abs(nearest(value_F, "E24") / value_F - 1) < _CLOSE
    old = figure(value_F, "F") + ("" if made else " is no preferred value")
    return chosen, f"{old}: {why}, {change:+d} %"


def _band(style: Style, tolerance: tuple[float, float] | None) -> tuple[float, float]:
    band = EXACT_BAND if style.name in EXACT_STYLES else USUAL_BAND
    if tolerance is None:
        return band
    return max(band[0], tolerance[0]), min(band[1], tolerance[1])


def _within(value_F: float, band: tuple[float, float]) -> tuple[float, str]:
    low, high = band
    for series in SERIES:
        chosen = nearest(value_F, series)
        if low - _CLOSE <= chosen / value_F <= high + _CLOSE:
            return chosen, f"nearest of {series}"
    chosen = nearest(value_F, "E24")
    return chosen, "nearest of E24, two in parallel come closer"

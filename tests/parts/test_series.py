"""Preferred numbers and voltages, and the value to buy instead of an old one."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stress.parts import series, styles

# IEC 60063 (from memory, high confidence; the usual listing of the standard's first series).
PRINTED = {
    "E3": "10 22 47",
    "E6": "10 15 22 33 47 68",
    "E12": "10 12 15 18 22 27 33 39 47 56 68 82",
    "E24": "10 11 12 13 15 16 18 20 22 24 27 30 33 36 39 43 47 51 56 62 68 75 82 91",
}


@pytest.mark.parametrize(("name", "printed"), PRINTED.items())
def test_series_are_those_of_iec_60063(name, printed):
    assert series.SERIES[name] == tuple(map(int, printed.split()))


@pytest.mark.parametrize(("name", "count"), [("E3", 3), ("E6", 6), ("E12", 12), ("E24", 24)])
def test_series_divide_a_decade_evenly(name, count):
    """A second opinion: each number is 10^(i/n) within the 6 % by which E24 was rounded."""
    for i, number in enumerate(series.SERIES[name]):
        assert number / 10 == pytest.approx(10 ** (i / count), rel=0.06)


@given(st.floats(1e-13, 1.0), st.sampled_from(sorted(PRINTED)))
def test_neighbours_enclose_the_value(value, name):
    below, above = series.around(value, name)
    assert below * (1 - 1e-8) <= value <= above * (1 + 1e-8)
    assert series.nearest(value, name) in (below, above)
    assert series.next_up(above, name) == above
    assert series.next_down(below, name) == below


def test_error_no_value_at_zero():
    with pytest.raises(ValueError, match="above zero"):
        series.nearest(0.0)


# Common practice, with the arithmetic of the series: electrolytics go up in E6, others to the
# nearest within a tenth. 0.25 is named as 0.22 or 0.27 by the trade; the nearer is taken.
REPLACED = [
    (16e-6, "aluminium", 22e-6),
    (8e-6, "aluminium", 10e-6),
    (40e-6, "aluminium", 47e-6),
    (30e-6, "aluminium", 33e-6),
    (20e-6, "aluminium", 22e-6),
    (0.05e-6, "film", 0.047e-6),
    (0.02e-6, "film", 0.022e-6),
    (0.25e-6, "film", 0.27e-6),
    (0.1e-6, "film", 0.1e-6),
    (0.005e-6, "film", 0.0047e-6),
    (0.5e-6, "film", 0.47e-6),
    (250e-12, "mica", 240e-12),
    (50e-12, "mica", 51e-12),
    (0.05e-6, "line-X", 0.047e-6),
    (0.02e-6, "line-Y", 0.015e-6),  # never above, for the touch current
]


@pytest.mark.parametrize(("old", "style", "new"), REPLACED)
def test_old_values_become_preferred_ones(old, style, new):
    chosen, reason = series.standard_value(old, styles.find(style))
    assert chosen == new
    assert reason


def test_reason_names_series_and_change():
    film, ely = styles.find("film"), styles.find("aluminium")
    assert series.standard_value(0.05e-6, film)[1] == (
        "0.05 µF is no preferred value: nearest of E3, -6 %"
    )
    assert series.standard_value(0.1e-6, film)[1] == "0.1 µF is a preferred value"
    assert series.standard_value(8e-6, ely)[1] == (
        "8 µF is no preferred value: next of E6 above, electrolytics may be larger, +25 %"
    )


def test_rectifier_caps_the_reservoir():
    chosen, reason = series.standard_value(16e-6, styles.find("aluminium"), most_F=20e-6)
    assert chosen == 15e-6
    assert reason == "16 µF: next of E12 below, at most 20 µF is allowed, -6 %"


def test_close_tolerance_is_kept():
    film = styles.find("film")
    assert series.standard_value(0.02e-6, film, tolerance=(0.98, 1.02))[0] == 0.02e-6


# Steps from catalogues (from memory): 600 V paper becomes 630 V film, 450 V stays.
VOLTAGES = [
    (600.0, "film", 630.0),
    (400.0, "film", 400.0),
    (420.0, "mylar", 630.0),
    (450.0, "aluminium", 450.0),
    (451.0, "aluminium", 500.0),
    (501.0, "aluminium", None),
    (25.0, "aluminium", 25.0),
    (1000.0, "snubber", 1000.0),
    (2501.0, "snubber", None),
    (250.0, "line-X", 275.0),
]


@pytest.mark.parametrize(("volts", "style", "rated"), VOLTAGES)
def test_next_voltage_on_sale(volts, style, rated):
    assert series.next_voltage(volts, style) == rated


def test_error_unknown_style():
    with pytest.raises(KeyError):
        series.next_voltage(100.0, "papper")

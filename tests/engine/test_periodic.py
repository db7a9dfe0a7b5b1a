"""What is left of a source once everything that passes has passed."""

import math

import pytest

from stress.engine.periodic import has_amplitude, repeats, scaled, settled, shifted
from stress.netlist.flat import Wave

# kind, values, repeat, what is left: values, or the number it is held at
SETTLING = [
    ("sin", (0.0, 165.0, 60.0), None, (0.0, 165.0, 60.0)),
    ("sin", (1.0, 2.0, 50.0, 0.005), None, (1.0, 2.0, 50.0, 0.0, 0.0, -90.0)),
    ("sin", (1.0, 2.0, 50.0, 0.0, 3.0), None, 1.0),
    ("pulse", (0.0, 5.0, 0.0, 1e-8, 1e-8, 4e-6, 1e-5), None, None),
    # Later by more than a period; under way at time 0, so that it is one downwards.
    ("pulse", (0, 5, 13.0, 1, 1, 4, 10), None, (0, 5, 3.0, 1, 1, 4, 10)),
    ("pulse", (0, 5, 6.0, 1, 2, 4, 10), None, (5, 0, 1.0, 2, 1, 3, 10)),
    ("pulse", (0.0, 5.0, 1.0), None, 5.0),
    ("pulse", (0.0, 5.0, 1.0, 0.1, 0.1, 2.0), None, 0.0),
    ("pwl", (0.0, 1.0, 2.0, 7.0), None, 7.0),
    ("pwl", (0.0, 1.0, 2.0, 7.0, 3.0, 1.0), 0.0, (0.0, 1.0, 2.0, 7.0, 3.0, 1.0)),
    ("exp", (1.0, 9.0, 0.0, 1.0, 2.0, 1.0), None, 1.0),
    ("sffm", (0.0, 1.0, 1e3, 5.0, 1e2), None, (0.0, 1.0, 1e3, 5.0, 1e2)),
]


@pytest.mark.parametrize(("kind", "values", "repeat", "left"), SETTLING)
def test_sources_settle(kind, values, repeat, left):
    wave = Wave(kind, values, repeat)
    found, change = settled(wave)

    if isinstance(left, float):
        assert found == left
        assert "held at" in change
    else:
        assert found.values == pytest.approx(values if left is None else left)
        assert (change == "") == (left in (None, values))


def test_an_edge_across_time_zero_becomes_points():
    """Rising from 9 to 11 s of a period of 10 s: halfway up at time 0."""
    found, _ = settled(Wave("pulse", (0.0, 4.0, 9.0, 2.0, 1.0, 3.0, 10.0)))

    assert found.kind == "pwl"
    assert found.values == pytest.approx((0, 2, 1, 4, 4, 4, 5, 0, 9, 0, 10, 2))


@pytest.mark.parametrize(
    ("wave", "period_s", "whole"),
    [
        (Wave("sin", (0.0, 1.0, 50.0)), 0.02, True),
        (Wave("sin", (0.0, 1.0, 71.0)), 0.02, False),
        (Wave("sin", (0.0, 0.0, 71.0)), 0.02, True),
        (Wave("pulse", (0, 1, 0, 1e-3, 1e-3, 1e-3, 0.01)), 0.02, True),
        (Wave("pulse", (0, 1, 0, 1e-3, 1e-3, 1e-3, 0.03)), 0.02, False),
        (Wave("pwl", (0.0, 0.0, 0.01, 1.0, 0.02, 0.0), 0.0), 0.02, True),
        (Wave("am", (1.0, 1.0, 50.0, 1000.0)), 0.02, True),
        (Wave("sffm", (0.0, 1.0, 1000.0, 5.0, 75.0)), 0.02, False),
    ],
)
def test_a_wave_repeats_with_the_common_period_or_not(wave, period_s, whole):
    assert repeats(wave, period_s) is whole


def test_points_that_repeat_later_are_turned_to_time_zero():
    """From 1 s on a triangle of 2 s repeats; at time 0 it is halfway down."""
    wave = Wave("pwl", (0.0, 0.0, 1.0, 0.0, 2.0, 4.0, 3.0, 0.0), 1.0)
    found, change = settled(wave)

    # f(t) for t >= 1 is 4 - 4 |((t - 1) mod 2) - 1|; carried back to t = 0 that is 4.
    assert found.values == pytest.approx((0.0, 4.0, 1.0, 0.0, 2.0, 4.0))
    assert found.repeat_from_s == 0.0
    assert "repeats" in change


@pytest.mark.parametrize(
    ("kind", "values", "expected"),
    [
        ("sin", (2.0, 10.0, 50.0), (2.0, 5.0, 50.0)),
        ("am", (4.0, 1.0, 5.0, 9.0), (2.0, 1.0, 5.0, 9.0)),
        ("pulse", (1.0, 4.0, 0.0), (0.5, 2.0, 0.0)),
        ("pwl", (0.0, 2.0, 1.0, 6.0), (0.0, 1.0, 1.0, 3.0)),
        ("exp", (1.0, 4.0, 0.0), (0.5, 2.0, 0.0)),
    ],
)
def test_a_factor_scales_amplitudes_only(kind, values, expected):
    assert scaled(Wave(kind, values), 0.5).values == expected
    assert not has_amplitude(scaled(Wave(kind, values), 0.0))
    assert has_amplitude(Wave(kind, values))


def test_only_sines_are_shifted():
    assert shifted(Wave("sin", (0.0, 1.0, 50.0)), 45.0).values[5] == 45.0
    pulse = Wave("pulse", (0.0, 1.0))
    assert shifted(pulse, 45.0) is pulse
    assert math.isclose(shifted(Wave("sin", (0.0, 1.0, 5.0, 0.0, 0.0, 10.0)), -20.0).values[5], -10)

"""Ripple multipliers, self-heating and life against what is printed."""

from math import sqrt

import pytest

from stress.parts import styles
from stress.study import life
from stress.study.result import PositionStress


def stress_of(spectrum=(), *, rms_A=0.0, hertz=None):
    return PositionStress(
        case="nominal",
        dc_V=0.0,
        peak_V=0.0,
        reverse_V=None,
        ripple_pp_V=0.0,
        ripple_rms_A=rms_A,
        esr_loss_W=0.0,
        error_V=0.0,
        ripple_Hz=hertz,
        spectrum=spectrum,
    )


def test_harmonics_add_by_squares_over_their_multipliers():
    """m of 1.026, 1.146 and 1.194 by straight lines in Vishay 056/057, doc 28340 table 4
    [read]; the root of the sum of (I/m)² worked by hand: 0.15731 A."""
    spectrum = ((120.0, 0.150), (240.0, 0.060), (360.0, 0.030))
    found = life.equivalent_A(stress_of(spectrum), style=styles.find("aluminium"), rated_V=450.0)
    assert found == pytest.approx(0.15731, rel=2e-3)
    assert sqrt(sum(a * a for _, a in spectrum)) == pytest.approx(0.16432, rel=1e-4)


def test_without_a_spectrum_the_strongest_frequency_counts():
    # 1.40 at 100 kHz above 100 V, same table.
    found = life.equivalent_A(
        stress_of(rms_A=0.7, hertz=100e3), style=styles.find("aluminium"), rated_V=450.0
    )
    assert found == pytest.approx(0.5, rel=1e-3)


@pytest.mark.parametrize(
    ("hours", "rated_degC", "ambient_degC", "expected_h"),
    [(2000, 85, 55, 16_000), (2000, 105, 65, 32_000), (1000, 85, 45, 16_000)],
)
def test_ten_kelvin_rule(hours, rated_degC, ambient_degC, expected_h):
    """Lx = L·2^((T0 - TA)/10): Wikipedia, restating IEC 60384-4 [read]; the products by hand."""
    series = life.Endurance(hours=hours, rated_degC=rated_degC, source="")
    found = life.expected(
        ambient_degC=ambient_degC, ripple_A=0.0, rated_ripple_A=1.0, endurance=series
    )
    assert found.hours == pytest.approx(expected_h, rel=1e-12)
    assert found.core_degC == ambient_degC


@pytest.mark.parametrize(("rated_degC", "rise"), [(85.0, 10.0), (105.0, 5.0), (125.0, 3.0)])
def test_core_rise_at_rated_ripple(rated_degC, rise):
    assert life.core_rise_K(rated_degC) == rise  # Wikipedia, restating IEC 60384-4 [read]


def test_ripple_shortens_life_by_the_square_of_the_current():
    # Twice the rated current heats four times as much: 20 K, a factor of four in life.
    cool = life.expected(ambient_degC=65.0, ripple_A=0.0, rated_ripple_A=0.5)
    hot = life.expected(ambient_degC=65.0, ripple_A=1.0, rated_ripple_A=0.5)
    assert hot.rise_K == pytest.approx(20.0)
    assert cool.hours / hot.hours == pytest.approx(4.0)


def test_nothing_lasts_longer_than_its_seal():
    found = life.expected(ambient_degC=20.0, ripple_A=0.0, rated_ripple_A=1.0)
    assert found.uncapped_hours > 600_000
    assert found.hours == life.LONGEST_H


def test_heat_that_a_can_gives_off():
    """Nippon Chemi-Con technical note, as recalled [memory M]; 18 × 35.5 mm, 0.3 A, 5 Ω."""
    rise = life.can_rise_K(0.3**2 * 5.0, diameter_mm=18.0, length_mm=35.5)
    assert rise == pytest.approx(10.15, abs=0.02)


@pytest.mark.parametrize(
    ("value_F", "rated_V", "catalogue_A"),
    [
        (47e-6, 450, 0.45),
        (10e-6, 450, 0.15),
        (220e-6, 400, 1.3),
        (1000e-6, 25, 1.0),
        (100e-6, 25, 0.2),
    ],
)
def test_what_one_part_carries_is_of_the_right_size(value_F, rated_V, catalogue_A):
    # From memory, to be confirmed: the law must not be off by more than a fifth where it was fitted.
    assert life.ordinary_ripple_A(value_F, rated_V=rated_V) == pytest.approx(catalogue_A, rel=0.2)

from math import log

import pytest

from stress.study.lamp import rating_W, resistance_ohm


@pytest.mark.parametrize(
    ("share", "exponent", "printed_to"),
    [
        # lamp rerating: current with the 0.55th, power with about the 1.6th power of the voltage
        # (Standard Handbook for Electrical Engineers, 11th edition 1978, as restated)
        (0.9, 0.55, 0.005),
        (0.6, 0.55, 0.005),
        (0.3, 0.55, 0.005),
    ],
)
def test_current_follows_the_published_power_of_the_voltage(share, exponent, printed_to):
    volts, watts = 120.0, 60.0
    rated = volts / resistance_ohm(volts, rated_W=watts, rated_V=volts)
    amps = share * volts / resistance_ohm(share * volts, rated_W=watts, rated_V=volts)
    assert log(amps / rated) / log(share) == pytest.approx(exponent, abs=printed_to)
    power = amps * share * volts / watts
    assert log(power) / log(share) == pytest.approx(1.6, abs=0.051)  # 1.55 is printed as 1.6


def test_rated_and_cold_resistance():
    """60 W at 120 V: 240 ohm hot (V²/P), about a twelfth of it cold (common practice)."""
    assert resistance_ohm(120.0, rated_W=60.0, rated_V=120.0) == pytest.approx(240.0)
    assert resistance_ohm(0.0, rated_W=60.0, rated_V=120.0) == pytest.approx(20.0)
    assert resistance_ohm(-120.0, rated_W=60.0, rated_V=120.0) == pytest.approx(240.0)


@pytest.mark.parametrize(("power", "lamp"), [(10.0, 15.0), (35.0, 60.0), (48.2, 100.0), (900, 500)])
def test_lamp_is_a_little_more_than_the_equipment_takes(power, lamp):
    assert rating_W(power) == lamp

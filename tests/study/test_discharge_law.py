from math import inf, log

import pytest

from stress.study.discharge_law import class_V, deadly, energy_J, fall_s, resistor


@pytest.mark.parametrize(
    ("ohm", "farad", "start_V", "end_V", "seconds", "printed_to"),
    [
        # t = RC ln(V/V_end), computed by hand to the digits shown
        pytest.param(220e3, 40e-6, 450.0, 50.0, 19.3, 0.05, id="40 µF through 220 kohm"),
        pytest.param(1e3, 40e-6, 450.0, 5.0, 0.18, 0.005, id="40 µF through 1 kohm"),
        pytest.param(100e3, 100e-6, 400.0, 60.0, 19.0, 0.05, id="100 µF in 100 kohm"),
        pytest.param(682.7e3, 40e-6, 450.0, 50.0, 60.0, 0.05, id="largest bleeder for a minute"),
    ],
)
def test_fall_follows_the_closed_form(ohm, farad, start_V, end_V, seconds, printed_to):
    assert fall_s(ohm, farad, start_V=start_V, end_V=end_V) == pytest.approx(
        seconds, abs=printed_to
    )


def test_fall_of_what_is_low_already_and_of_what_has_no_way():
    assert fall_s(1e3, 1e-6, start_V=-40.0, end_V=60.0) == 0.0
    assert fall_s(inf, 1e-6, start_V=400.0, end_V=60.0) == inf
    assert fall_s(1e3, 1e-6, start_V=-400.0, end_V=60.0) == pytest.approx(1e-3 * log(400 / 60))


@pytest.mark.parametrize(
    ("farad", "volts", "joule", "kills"),
    [
        # half of C V², by hand; thresholds of NFPA 70E article 360 as in the module
        (100e-6, 400.0, 8.0, True),
        (16e-6, 450.0, 1.62, True),
        (40e-6, 450.0, 4.05, True),
        (220e-6, 350.0, 13.475, True),
        (20e-6, 350.0, 1.225, True),
        (0.02e-6, 450.0, 0.002025, False),
        (2200e-6, 25.0, 0.6875, False),
        (1e-6, 600.0, 0.18, False),
    ],
)
def test_energy_and_whether_it_can_kill(farad, volts, joule, kills):
    assert energy_J(farad, volts) == pytest.approx(joule, rel=1e-9)
    assert deadly(farad, volts) is kills
    assert deadly(farad, -volts) is kills


@pytest.mark.parametrize(
    ("farad", "limits"),
    [
        # IEC 62368-1 table 5, rows as in the module; between rows the stricter one
        (40e-6, (60.0, 120.0)),
        (300e-9, (60.0, 120.0)),
        (200e-9, (60.0, 120.0)),
        (170e-9, (75.0, 150.0)),
        (100e-9, (75.0, 150.0)),
        (10e-9, (350.0, 700.0)),
        (250e-12, (500.0, 1000.0)),
    ],
)
def test_class_limits_by_capacitance(farad, limits):
    assert class_V(farad) == limits


@pytest.mark.parametrize(("farad", "volts"), [(40e-6, 450.0), (100e-6, -700.0), (1e-3, 30.0)])
def test_resistor_stands_what_it_is_chosen_for(farad, volts):
    chosen = resistor(farad, volts)
    assert chosen.peak_A <= 0.1
    assert 1e3 <= chosen.ohm <= 50e3
    assert chosen.rated_V == abs(volts)
    assert chosen.energy_J == pytest.approx(0.5 * farad * volts**2)
    # the pulse stays within 6.25 times the rated power for 5 s
    assert chosen.energy_J <= chosen.rated_W * 6.25 * 5.0 * (1 + 1e-9)
    assert abs(volts) / chosen.pieces <= 500.0
    after = abs(volts) * 2.718281828459045 ** (-chosen.seconds / (chosen.ohm * farad))
    assert after == pytest.approx(chosen.until_V, rel=1e-6)

"""Numbers as the trade writes them (common practice)."""

import pytest

from stress.text.figure import figure


@pytest.mark.parametrize(
    ("value", "unit", "shown"),
    [
        (22e-9, "F", "0.022 µF"),
        (1e-9, "F", "0.001 µF"),
        (470e-12, "F", "470 pF"),
        (100e-6, "F", "100 µF"),
        (3900e-6, "F", "3900 µF"),
        (3.9e6, "ohm", "3.9 MΩ"),
        (0.9999e3, "ohm", "1 kΩ"),
        (47.0, "ohm", "47 Ω"),
        (0.001, "ohm", "1 mΩ"),
        (0.05, "A", "50 mA"),
        (2.4e-6, "A", "2.4 µA"),
        (0.13, "W", "0.13 W"),
        (0.0025, "W", "2.5 mW"),
        (423.456, "V", "423 V"),
        (1234.5, "V", "1234 V"),
        (0.0, "V", "0 V"),
        (0.0, "F", "0 µF"),
        (-12.54, "V", "-12.5 V"),
        (60.0, "Hz", "60 Hz"),
        (40.0, "degC", "40 °C"),
        (0.123, "1", "0.123"),
        (float("inf"), "ohm", "∞ Ω"),
    ],
)
def test_figure(value, unit, shown):
    assert figure(value, unit) == shown

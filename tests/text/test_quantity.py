"""Quantities as people write them."""

import pickle
import subprocess
import sys
from math import isfinite

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from stress.text.quantity import QuantityError, quantity

# Exact on purpose: the plain forms are decimal arithmetic, rounded once.
PLAIN = [
    ("0.02 uF", "F", 0.02e-6),
    ("0.02uF", "F", 0.02e-6),
    ("5 µF", "F", 5e-6),  # micro sign
    ("5 μF", "F", 5e-6),  # Greek mu
    ("100n", "F", 100e-9),
    ("2n2", "F", 2.2e-9),
    ("0.05 uf", "F", 0.05e-6),
    ("0.0022 F", "F", 0.0022),
    ("117 V", "V", 117.0),
    ("-12.5 V", "V", -12.5),
    ("−12.5 V", "V", -12.5),
    ("117\u00a0V", "V", 117.0),
    ("400 WVDC", "V", 400.0),
    ("12 v", "V", 12.0),
    ("1.4 kV", "V", 1400.0),
    ("12 W", "W", 12.0),
    ("1/2 W", "W", 0.5),
    ("½ W", "W", 0.5),
    ("2 Gohm", "ohm", 2e9),
    ("1 Meg", "ohm", 1e6),
    ("4.7 kΩ", "ohm", 4700.0),
    ("4.7 k\u2126", "ohm", 4700.0),  # the ohm sign
    ("470k", "ohm", 470e3),
    ("470K", "ohm", 470e3),
    ("4k7", "ohm", 4700.0),
    ("2M2", "ohm", 2.2e6),  # IEC 60062: M is mega
    ("6R8", "ohm", 6.8),
    ("70 mA", "A", 0.07),
    ("2.4 uA", "A", 2.4e-6),
    ("40 degC", "degC", 40.0),
    ("-10 °C", "degC", -10.0),
    ("2 min", "s", 120.0),
    ("2 hours", "s", 7200.0),
    ("16.667 ms", "s", 0.016667),
    ("10 khz", "Hz", 10e3),
    ("10 H", "H", 10.0),
    ("10 K", "K", 10.0),
    ("10 %", "1", 0.1),
    ("0.1", "1", 0.1),
    ("0", "V", 0.0),
]
COMPOUND = [  # through pint, so to rounding
    ("20 kohm/V", "ohm/V", 20e3),
    ("20000 ohm/V", "ohm/V", 20e3),
    ("50 V/us", "V/s", 50e6),
    ("104 degF", "degC", 40.0),
    ("10 mV*A", "W", 0.01),
]
WRONG = [
    ("12 W", "V", '"12 W" is a power, and a voltage is wanted', 'such as "117 V"'),
    ("3 kg", "V", '"3 kg" measures something else, and a voltage is wanted', 'such as "117 V"'),
    ("5 V/us", "V", '"5 V/us" is a voltage slope, and a voltage is wanted', 'such as "117 V"'),
    ("12", "V", '"12" has no unit, and a voltage is wanted', 'such as "117 V"'),
    ("0", "degC", '"0" has no unit', 'such as "40 degC"'),
    ("abc", "V", '"abc" is no quantity', 'such as "117 V"'),
    ("", "V", '"" is no quantity', 'such as "117 V"'),
    ("5 foo", "V", '"foo" in "5 foo" is no known unit', 'such as "117 V"'),
    ("9**9**9 V", "V", '"**9**9 V" in "9**9**9 V" is no unit', 'such as "117 V"'),
    ("1e400 V", "V", '"1e400 V" is too large', 'such as "117 V"'),
    ("1/0 W", "W", '"1/0 W" divides by zero', 'such as "12 W"'),
    ("10² V", "V", '"10² V" is no quantity', 'such as "117 V"'),
    ("1½ W", "W", '"1½ W" is no quantity', 'such as "12 W"'),
    ("1" * 80 + " V", "V", '"11111111111111111111…" is too long for a quantity', 'such as "117 V"'),
    ("70 MA", "A", 'the case of "MA" in "70 MA" matters', 'write "mA"'),
    ("10 mhz", "Hz", 'the case of "mhz" in "10 mhz" matters', 'write "MHz" or "mHz"'),
    (
        "1M",
        "ohm",
        '"1M" is a million here and a thousandth in a netlist',
        'write "1 Mohm"',
    ),
    (
        "1,000 V",
        "V",
        'the comma in "1,000 V" can mean two things',
        'write a point for decimals and nothing between thousands, such as "117 V"',
    ),
]
# Old names of the farad, with what each most likely means (common practice).
OLD = [
    ("8 MFD", "8 uF"),
    ("8 mfd.", "8 uF"),
    ("8 Mfd", "8 uF"),
    ("8 MF", "8 uF"),
    ("0.05 mf", "0.05 uF"),
    ("20 mF", "20 uF"),
    ("50 MMFD", "50 pF"),
    ("50 mmF", "50 pF"),
    ("50 MMF", "50 pF"),
    ("50 uuF", "50 pF"),
    ("50 µµF", "50 pF"),
]


@pytest.mark.parametrize(("text", "unit", "value"), PLAIN)
def test_plain_forms_are_exact(text, unit, value):
    assert quantity(text, unit) == value


@pytest.mark.parametrize(("text", "unit", "value"), COMPOUND)
def test_compound_units_are_converted(text, unit, value):
    assert quantity(text, unit) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(("text", "unit", "message", "hint"), WRONG)
def test_error_says_what_is_wanted(text, unit, message, hint):
    with pytest.raises(QuantityError) as caught:
        quantity(text, unit)
    assert (caught.value.message, caught.value.hint) == (message, hint)


@pytest.mark.parametrize(("text", "likely"), OLD)
def test_error_asks_back_the_old_style(text, likely):
    with pytest.raises(QuantityError, match="old way to write a capacitance") as caught:
        quantity(text, "F")
    assert f'if it comes from an old document, write "{likely}"' in caught.value.hint
    quantity(likely, "F")  # the advice can be followed


def test_error_survives_pickling():
    error = QuantityError("said", "hinted")
    assert str(pickle.loads(pickle.dumps(error))) == str(error) == "said (hinted)"


def test_millifarad_may_be_meant():
    with pytest.raises(QuantityError) as caught:
        quantity("0.25 mF", "F")
    assert caught.value.hint.endswith('if millifarads are meant, write "250 uF"')


@settings(max_examples=400, deadline=None)
@given(st.text(max_size=30), st.sampled_from(["V", "F", "ohm", "degC", "1", "ohm/V"]))
def test_any_text_is_a_number_or_a_question(text, unit):
    try:
        value = quantity(text, unit)
    except QuantityError:
        return
    assert isfinite(value)


@settings(max_examples=300, deadline=None)
@given(
    st.decimals(-10000, 10000, places=3),
    st.sampled_from("VAWsFHK?/*^ µΩ%kmM"),
    st.text("VAWsFHKohmegC/*^ 123kmMu", max_size=8),
)
def test_any_unit_is_known_or_asked_back(number, first, rest):
    try:
        value = quantity(f"{number} {first}{rest}", "V")
    except QuantityError as error:
        value, hint = 0.0, error.hint
    else:
        hint = "none needed"
    assert isfinite(value)
    assert hint


def test_pint_is_not_loaded_for_plain_forms():
    code = (
        "import sys; from stress.text.quantity import quantity; quantity('4.7 kohm', 'ohm');"
        "sys.exit('pint' in sys.modules)"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0

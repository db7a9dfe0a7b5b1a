"""Colour dots, figures and letters on capacitors."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stress.parts import capacitor_codes, styles
from stress.parts.capacitor_codes import CodeError, ceramic, dots, forms, letters, read, tantalum_V

# Form, colours, farad, volt, tolerance, style.
DOTS = [
    # vcomp.co.uk, moulded mica page [read]
    ("mica-three", "red green black", 25e-12, 500.0, 0.20, "mica"),
    # AN 16-40BC224-2 quoted on qth.net [read]: black, green, brown, red, yellow, black
    ("mica-six", "black green brown red yellow black", 51e-12, 500.0, 0.04, "mica"),
    # US Army course OD1647, p. 111 [read]: white, brown, red, ×100; 2 % taken as red
    ("mica-six", "white brown red none red red", 1200e-12, 500.0, 0.02, "mica"),
    ("mica-six", "silver brown black red silver orange", 10e-9, None, 0.10, "paper"),
    ("mica-six", "black grey red red silver red", 8200e-12, 300.0, 0.10, "mica"),
    ("mica-five", "green black brown gold red", 500e-12, 200.0, 0.05, "mica"),
    ("mica-six-old", "red green black brown silver gold", 2500e-12, 1000.0, 0.10, "mica"),
    ("paper-five", "green black orange white yellow", 50e-9, 400.0, 0.09, "paper"),
    ("paper-six", "brown black yellow black brown blue", 100e-9, 1600.0, 0.20, "paper"),
    ("mica-three", "GRAY red gold", 8.2e-12, 500.0, 0.20, "mica"),
]


@pytest.mark.parametrize(("form", "colours", "farad", "volts", "share", "style"), DOTS)
def test_dots_and_bands(form, colours, farad, volts, share, style):
    found = dots(form, colours.split())
    assert found.value_F == farad
    assert found.rated_V == volts
    assert found.tolerance == pytest.approx((1 - share, 1 + share))
    assert found.style == style
    assert styles.find(style) is not None
    assert found.sources


# vcomp.co.uk, moulded mica page [read], the two metals from memory.
VOLTAGE_DOT = {
    "brown": 100, "red": 200, "orange": 300, "yellow": 400, "green": 500, "blue": 600,
    "violet": 700, "grey": 800, "white": 900, "gold": 1000, "silver": 2000, "none": 500,
}  # fmt: skip


@pytest.mark.parametrize(("colour", "volts"), VOLTAGE_DOT.items())
def test_voltage_dot_of_mica(colour, volts):
    assert dots("mica-five", ["red", "red", "black", "none", colour]).rated_V == volts


LETTERS = [
    ("104", 100e-9, None, None),
    ("104K", 100e-9, (0.9, 1.1), None),
    ("104k2e", 100e-9, (0.9, 1.1), 250.0),
    ("2E104K", 100e-9, (0.9, 1.1), 250.0),
    ("2G223J", 22e-9, (0.95, 1.05), 400.0),
    ("479", 4.7e-12, None, None),
    ("220D", 22e-12, (1 - 0.5 / 22, 1 + 0.5 / 22), None),
    ("503Z", 50e-9, (0.8, 1.8), None),
    ("472P", 4.7e-9, (1.0, 2.0), None),
    ("4n7", 4.7e-9, None, None),
    ("4n7J", 4.7e-9, (0.95, 1.05), None),
    ("47nK", 47e-9, (0.9, 1.1), None),
    ("2u2M", 2.2e-6, (0.8, 1.2), None),
    ("1µ0", 1e-6, None, None),
    ("1m5", 1.5e-3, None, None),
]


@pytest.mark.parametrize(("code", "farad", "tolerance", "volts"), LETTERS)
def test_figures_and_letters(code, farad, tolerance, volts):
    found = letters(code)
    assert found.value_F == pytest.approx(farad, rel=1e-12)
    assert found.tolerance == (None if tolerance is None else pytest.approx(tolerance))
    assert found.rated_V == volts


# EIA and JIS [memory high]: first figure a power of ten, the letter an R10 number, so that a
# second opinion is ten to that power times the number.
R10 = {
    "A": 1.0, "C": 1.6, "D": 2.0, "E": 2.5, "F": 3.15, "V": 3.5, "G": 4.0, "W": 4.5, "H": 5.0,
    "J": 6.3, "K": 8.0,
}  # fmt: skip


def test_voltage_codes_are_preferred_numbers():
    values = capacitor_codes._table()["voltage_code"]["values"]
    assert len(values) == 19
    for code in values:
        expected = R10[code[1]] * 10.0 ** int(code[0])
        assert letters(f"104K{code}").rated_V == pytest.approx(expected)


# EIA RS-198 [memory high].
CERAMIC = [
    ("X7R", -55.0, 125.0, 0.15, 0.15),
    ("Z5U", 10.0, 85.0, 0.56, 0.22),
    ("Y5V", -30.0, 85.0, 0.82, 0.22),
    ("X5F", -55.0, 85.0, 0.075, 0.075),
    ("x8t", -55.0, 150.0, 0.33, 0.22),
]


@pytest.mark.parametrize(("code", "low", "high", "fall", "rise"), CERAMIC)
def test_letters_of_class_2_ceramics(code, low, high, fall, rise):
    found = ceramic(code)
    assert (found.low_degC, found.high_degC) == (low, high)
    assert (found.fall, found.rise) == pytest.approx((fall, rise))


def test_every_letter_of_ceramics_is_read():
    table = capacitor_codes._table()["ceramic"]
    for low in table["low"]:
        for high in table["high"]:
            for change in table["fall"]:
                found = ceramic(low + high + change)
                assert found.low_degC < found.high_degC
                assert 0 < found.rise <= found.fall < 1


def test_tantalum_dots():
    """endprod.com [read]."""
    volts = {
        "yellow": 6.3,
        "black": 10,
        "green": 16,
        "blue": 20,
        "grey": 25,
        "white": 3,
        "pink": 35,
    }
    assert {colour: tantalum_V(colour) for colour in volts} == volts


ERRORS = [
    (lambda: dots("mica-ten", []), 'no form "mica-ten"; known: mica-three'),
    (lambda: dots("mica-three", ["red"]), "mica-three has 3 dots: digit, digit, multiplier"),
    (lambda: dots("mica-three", ["pink", "red", "red"]), '"pink" stands for no figure'),
    (lambda: dots("mica-three", ["black", "black", "red"]), "read from the wrong end"),
    (lambda: dots("mica-five", ["red", "red", "red", "red", "black"]), "no mica voltage"),
    (lambda: letters("1O4"), '"1O4" is no code such as 104K, 104K2E or 4n7J'),
    (lambda: letters("000"), "no capacitance is nothing"),
    (lambda: letters("104Q"), '"Q" is no letter tolerance'),
    (lambda: letters("104K9Z"), '"9Z" is no voltage code'),
    (lambda: ceramic("Q7R"), "no letters such as X7R"),
    (lambda: ceramic("X"), "no letters such as X7R"),
    (lambda: tantalum_V("violet"), '"violet" is no tantalum voltage'),
]


@pytest.mark.parametrize(("act", "message"), ERRORS, ids=lambda one: str(one)[:30])
def test_error_says_what_is_known(act, message):
    with pytest.raises(CodeError) as caught:
        act()
    assert message in str(caught.value)


def test_sheet_form():
    assert read("mica-six: black green brown red yellow black").value_F == 51e-12
    assert read("104K").value_F == 100e-9


@given(st.text(max_size=12))
def test_any_text_is_a_code_or_an_error(text):
    try:
        found = read(text)
    except CodeError:
        return
    assert found.value_F > 0


def test_every_form_can_be_read():
    for name, order in forms().items():
        colours = {"type": "black", "characteristic": "red", "tolerance": "silver"}
        found = dots(name, [colours.get(what, "red") for what in order])
        assert found.value_F > 0
        assert found.rated_V is None or found.rated_V >= 100

"""Strict SPICE numbers."""

import pytest

from stress.text.number import NumberError, plain_number, read_number

READ = [
    # suffixes as the ngspice manual lists them; letters behind them are the unit
    ("1", 1.0),
    ("-2.5", -2.5),
    (".5", 0.5),
    ("5.", 5.0),
    ("1e3", 1000.0),
    ("1E-3", 1e-3),
    ("1.5d2", 150.0),
    ("2t", 2e12),
    ("2G", 2e9),
    ("2Meg", 2e6),
    ("2MEGohm", 2e6),
    ("2k", 2000.0),
    ("2m", 2e-3),
    ("2u", 2e-6),
    ("2µF", 2e-6),
    ("2μ", 2e-6),
    ("2n", 2e-9),
    ("2pF", 2e-12),
    ("2f", 2e-15),
    ("1mil", 25.4e-6),
    ("5V", 5.0),
    ("60Hz", 60.0),
    ("10kohm", 1e4),
    ("2mH", 2e-3),
    ("10a", 10.0),
    ("1e3k", 1e6),
    ("4k7", 4700.0),
    ("2u2", 2.2e-6),
    ("4R7", 4.7),
    ("0R1", 0.1),
    ("2meg5", 2.5e6),
    ("1,5k", 1500.0),
]


@pytest.mark.parametrize(("text", "value"), READ)
def test_number(text, value):
    assert read_number(text).value == value


@pytest.mark.parametrize(
    ("text", "value"),
    [("0.047u", 0.047e-6), ("4.7n", 4.7e-9), ("100p", 100e-12), ("22.1k", 22.1e3)],
)
def test_scale_gives_the_nearest_float(text, value):
    """A product would give 4.7e-08 + 1 ulp and the like."""
    assert read_number(text).value == value


REFUSED = [
    ("10q", 'unknown suffix "q" in "10q"', 2, 1),
    ("1kx", 'unknown suffix "kx" in "1kx"', 1, 2),
    ("1e", 'unknown suffix "e" in "1e"', 1, 1),
    ("abc", '"abc" is not a number', 0, 3),
    ("", '"" is not a number', 0, 0),
    ("1.2.3", 'unknown suffix ".3" in "1.2.3"', 3, 2),
    ("1e400", '"1e400" is too large', 0, 5),
    ("R47", '"R47" is not a number', 0, 3),
]


@pytest.mark.parametrize(("text", "message", "start", "length"), REFUSED)
def test_error_says_which_part_is_wrong(text, message, start, length):
    with pytest.raises(NumberError) as caught:
        read_number(text)

    assert (caught.value.message, caught.value.start, caught.value.length) == (
        message,
        start,
        length,
    )


TRAPS = [
    ("1M", "R", 1e-3, 1e6),
    ("10MOHM", "R", 1e-2, 1e7),
    ("1F", "C", 1e-15, 1.0),
    ("10M", "C", 1e-2, 1e-5),
    ("1m", "R", 1e-3, None),
    ("1M", "L", 1e-3, None),
    ("1M", "", 1e-3, None),
]


@pytest.mark.parametrize(("text", "quantity", "value", "likely"), TRAPS)
def test_trap_by_the_quantity_of_the_place(text, quantity, value, likely):
    read = read_number(text, quantity=quantity)

    assert read.value == value
    assert read.likely == likely
    assert bool(read.trap) == (likely is not None)


def test_leading_letter_counts_for_resistors_only():
    assert read_number("R47", quantity="R").value == 0.47
    assert read_number("4L7", quantity="R").value == 4.7e-3
    with pytest.raises(NumberError):
        read_number("p47", quantity="C")


def test_plain_number_knows_digits_only():
    assert plain_number("1e-3") == 1e-3
    assert plain_number("1k") is None
    assert plain_number("1e999") is None

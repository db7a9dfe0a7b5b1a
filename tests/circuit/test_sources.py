"""Line, gates, signals and their common period."""

from math import sqrt

import pytest

from stress.circuit.sources import common_period, periodic


@pytest.mark.parametrize(
    ("periods", "expected"),
    [
        ([], None),
        ([0.02], 0.02),
        ([0.02, 0.02], 0.02),
        ([1 / 50, 1 / 60], 0.1),  # 5 cycles of 50 Hz are 6 of 60 Hz
        ([1 / 50, 1 / 100e3], 0.02),  # 100 kHz goes 2000 times into 50 Hz
        ([1 / 60, 1 / 100e3], 0.05),  # 3 line periods are 5000 of the switch
        ([3e-6, 2e-6], 6e-6),
        ([4e-6, 6e-6, 10e-6], 60e-6),
        ([1.0, 1 / sqrt(2)], None),  # no common period at all
        ([1 / 50, 1 / 50.001], None),  # one, but beyond anything that can be simulated
        ([1e-6, 0.5], None),  # 500,000 cycles: too many
    ],
)
def test_common_period(periods, expected):
    # the arithmetic is exact in fractions; only the last product rounds
    assert common_period(periods) == (None if expected is None else pytest.approx(expected, 1e-12))


RECTIFIER = """
D1 a b DM
C1 b 0 10u
R1 b 0 10k
"""


def test_the_line_is_found_by_frequency_size_and_load(circuit):
    found = circuit(f"Vl a 0 SIN(0 165 60)\nVs in 0 SIN(0 1 400)\nR2 in 0 1k\n{RECTIFIER}")

    assert found.line.sources == ("Vl",)
    assert found.line.nominal_V == pytest.approx(165 / sqrt(2))  # rms of a sine
    assert found.line.high_V == pytest.approx(1.10 * 165 / sqrt(2))
    assert found.signals == ("Vs",)
    assert found.period_s == pytest.approx(1 / 60)  # a mute signal has no part in it
    assert any("by frequency and load" in text for text in found.line.assumed)


@pytest.mark.parametrize(
    ("source", "why"),
    [
        ("Vl a 0 SIN(0 165 1k)", "no line frequency"),
        ("Vl a 0 SIN(0 3 60)", "too small"),
        ("Vl x 0 SIN(0 165 60)\nR9 x 0 100\nV2 a 0 10", "feeds neither winding nor rectifier"),
    ],
)
def test_what_is_no_line(circuit, source, why):
    assert circuit(source + RECTIFIER).line.sources == (), why


def test_the_sheet_goes_first(circuit):
    sheet = """
    [line]
    source = "V2"
    nominal = "110 V"
    high = "121 V"
    period = "20 ms"
    """
    found = circuit(f"V1 a 0 SIN(0 165 60)\nV2 c 0 10\nR2 c 0 1k\n{RECTIFIER}", sheet)

    assert found.line.sources == ("V2",)
    assert (found.line.nominal_V, found.line.high_V) == (110.0, 121.0)
    assert found.period_s == pytest.approx(0.02)


def test_both_halves_of_a_winding_are_the_line(circuit):
    found = circuit("V1 a 0 SIN(0 450 50)\nV2 0 c SIN(0 450 50)\nD2 c b DM\n" + RECTIFIER)

    assert found.line.sources == ("V1", "V2")
    # 318 V rms with a common end are halves of a secondary: nothing is line-connected
    assert found.line_connected == frozenset()
    assert any("winding" in text for text in found.assumed)


def test_heaters_alone_are_neither_line_nor_signal(circuit):
    found = circuit(f"Vh h 0 SIN(0 8.9 60)\nRh h 0 6.3\nVl a 0 SIN(0 165 60)\n{RECTIFIER}")

    assert found.line.sources == ("Vl",)
    assert found.signals == ()


@pytest.mark.parametrize(
    ("text", "gates"),
    [
        ("S1 a b g 0 SM\nVg g 0 PULSE(0 5 0 50n 50n 4u 10u)", ("Vg",)),
        ("S1 a b g 0 SM\nRg g h 1k\nVg h 0 PULSE(0 5 0 50n 50n 4u 10u)", ("Vg",)),
        ("S1 a b e 0 SM\nE1 e 0 g 0 2\nVg g 0 PULSE(0 5 0 50n 50n 4u 10u)", ("Vg",)),
        ("S1 a b e 0 SM\nB1 e 0 V=2*V(g)\nVg g 0 PULSE(0 5 0 50n 50n 4u 10u)", ("Vg",)),
        ("M1 a g b b NM\nVg g b PULSE(0 5 0 50n 50n 4u 10u)", ("Vg",)),
        # a switch that no periodic source works stands as it is
        ("S1 a b g 0 SM\nVg g 0 5", ()),
        # a sine at a base is a signal
        ("Q1 a g b NPN\nVg g 0 SIN(0 0.1 1k)\nRb a g 100k", ()),
    ],
)
def test_gates(circuit, text, gates):
    found = circuit(f"V1 a 0 24\nR1 b 0 10\nC1 b 0 10u\n{text}")

    assert found.gates == gates
    assert found.period_s == (pytest.approx(10e-6) if gates else None)


@pytest.mark.parametrize(
    ("text", "gates", "signals"),
    [
        # a square wave into a power transformer: a vibrator, half of a bridge
        (
            "V1 a 0 PULSE(-6 6 0 1u 1u 5m 10m)\nL1 a 0 1m\nL2 b 0 1\nK1 L1 L2 0.99\n"
            "D1 b c DM\nC1 c 0 10u\nR1 c 0 10k",
            ("V1",),
            (),
        ),
        ("V1 a 0 PULSE(-6 6 0 1u 1u 5m 10m)\nD1 a c DM\nC1 c 0 10u\nR1 c 0 10k", ("V1",), ()),
        # into a detector: a signal
        (
            "V1 a 0 SIN(0 10 455k)\nD1 a c DM\nC1 c 0 100p\nR1 c 0 100k\nV2 d 0 9\nR2 d 0 1k",
            (),
            ("V1",),
        ),
        # nothing else there: it must not be muted, or the circuit is dead
        ("V1 a 0 SIN(0 10 1k)\nR1 a b 1k\nC1 b 0 1u", (), ()),
        ("V1 a 0 SIN(0 10 1k)\nR1 a b 1k\nC1 b 0 1u\nV2 d 0 9\nR2 d b 1k", (), ("V1",)),
    ],
)
def test_what_power_is_drawn_from_is_no_signal(circuit, text, gates, signals):
    found = circuit(text)

    assert (found.gates, found.signals) == (gates, signals)
    assert (found.period_s is None) == bool(signals)


@pytest.mark.parametrize(
    "text",
    [
        "V1 a 0 SIN(0 325 50)\nC1 a b 1u\nR1 b 0 1k",  # a capacitor as the dropper
        "V1 a 0 SIN(0 325 50)\nR1 a 0 1k\nC1 a 0 0.1u",
        "V1 a 0 SIN(0 12 50)\nL1 a b 0.5\nC1 b 0 10u",  # a choke, a motor
    ],
)
def test_other_loads_of_the_line(circuit, text):
    assert circuit(text).line.sources == ("V1",)


def test_direct_voltages_only(circuit):
    found = circuit("V1 a 0 24\nR1 a b 1k\nC1 b 0 1u\nV2 c 0 PWL(0 0 1m 5)\nR2 c b 1k")

    assert found.period_s is None
    assert found.signals == ()  # a ramp that ends is a supply, held at its end
    assert found.line.sources == ()


def test_sources_without_a_common_period_are_said_so(circuit):
    found = circuit(
        "V1 a 0 SIN(0 165 50)\nS1 a b g 0 SM\nVg g 0 PULSE(0 5 0 1u 1u 1m 2.23607m)\n"
        "D1 a b DM\nR1 b 0 1k\nC1 b 0 10u"
    )

    assert found.period_s == pytest.approx(0.02)
    assert any("no common period" in text for text in found.assumed)


def test_the_period_with_the_signals(netlist):
    n = netlist("V1 a 0 SIN(0 1 400)\nV2 b 0 SIN(0 1 50)\nR1 a b 1k\nC1 a 0 1u")

    assert periodic(n, ["v1", "V2"]) == pytest.approx(0.02)
    assert periodic(n, []) is None

"""Capacitors as people write them: value, rating and style in one field, or none of it."""

from __future__ import annotations

import pytest

from stress.netlist.read import read_text

# Spellings counted in 2,127 editor exports and 4,342 lt exports (DIALECT, section 4).
WRITTEN = [
    ("100n", 100e-9, None, None),
    ("4.7u", 4.7e-6, None, None),
    ("100nF", 100e-9, None, None),
    ("10uF", 10e-6, None, None),
    ("47µ", 47e-6, None, None),
    ("47μF", 47e-6, None, None),
    ("4u7", 4.7e-6, None, None),
    ("0u1", 0.1e-6, None, None),
    ("2n2", 2.2e-9, None, None),
    ("0,1uF", 0.1e-6, None, None),
    ("100uF/450V", 100e-6, 450.0, None),
    ("4.7uF/50V", 4.7e-6, 50.0, None),
    ("100n / 400V", 100e-9, 400.0, None),
    ("100n 400V", 100e-9, 400.0, None),
    ("10uF_25V", 10e-6, 25.0, None),
    ("C_10uF_450V", 10e-6, 450.0, None),
    ("C_0.1uF", 0.1e-6, None, None),
    ("47u25V", 47e-6, 25.0, None),
    ("100nF_X7R", 100e-9, None, "ceramic-2"),
    ("470n_THT", 470e-9, None, None),
    ("22p_NP0", 22e-12, None, "ceramic-1"),
    ("0.1uF/630V/MKP", 0.1e-6, 630.0, "film"),
    ("100nF_X2_275V", 100e-9, 275.0, "line-X"),
    ("2n2_Y1", 2.2e-9, None, "line-Y"),
    ("10u/16V/tantalum", 10e-6, 16.0, "tantalum"),
    ("0.05MFD/400V", 0.05e-6, 400.0, None),
    ("1n/1.6kV", 1e-9, 1600.0, None),
    ("1e-7", 1e-7, None, None),
    ("{2*1u}", 2e-6, None, None),
]


@pytest.mark.parametrize(("text", "value", "rated", "style"), WRITTEN, ids=[r[0] for r in WRITTEN])
def test_value_field(text: str, value: float | None, rated: float | None, style: str | None):
    capacitor = read_text(f"t\nC1 a b {text}\n").elements[0]

    assert capacitor.nodes == ("a", "b")
    assert capacitor.value == pytest.approx(value, rel=1e-12)
    assert capacitor.tags.rated_V == rated
    assert capacitor.tags.style == style


@pytest.mark.parametrize("text", ["100uF/450V", "C_0.1uF", "4u7", "0,1uF", "100n / 400V", "47μF"])
def test_unusual_value_is_told(text: str):
    notices = read_text(f"t\nC1 a b {text}\n").notices

    assert [notice.where for notice in notices] == ["C1"]
    assert notices[0].rule in ("value-field", "trap")
    assert notices[0].span is not None
    assert notices[0].span.line == 2


@pytest.mark.parametrize(
    "text", ["C", "CP", "C_Small", "DNP", "CP_Radial_D10.0mm", "?", "", "C_0805", "value", "NC"]
)
def test_placeholder_concerns_its_position_only(text: str):
    netlist = read_text(f"t\nC1 a b {text}\nC2 a b 1u\nR1 a 0 1k\n")

    assert [element.value for element in netlist.elements] == [None, 1e-6, 1000.0]
    assert netlist.obstacles == ()
    assert [(notice.rule, notice.where) for notice in netlist.notices] == [
        ("placeholder-value", "C1")
    ]
    assert '[capacitors.C1] value = "0.1 uF"' in netlist.notices[0].action


TRAPS = [
    (
        "R5 a 0 1M",
        1e-3,
        'R5: "1M" is 1 milliohm in SPICE; 1Meg was probably meant',
    ),
    (
        "C5 a 0 10F",
        10e-15,
        'C5: "10F" is 10 femtofarad in SPICE; 10 farad is written 10',
    ),
    (
        "C5 a 0 1μ",
        1e-6,
        'C5: "1μ" has the Greek letter mu and is read as micro; other programs read 1',
    ),
    ("R5 a 0 1,5k", 1500.0, 'R5: "1,5k" is read as 1.5k; write the point'),
    ("R5 a 0 4k7", 4700.0, 'R5: "4k7" is read by IEC 60062 as 4.7k'),
    (
        "C5 a 0 .047",
        0.047,
        'C5: ".047" is 0.047 farad in SPICE; .047u was probably meant',
    ),
    ("C5 a 0 10M", 10e-3, 'C5: "10M" is 10 millifarad in SPICE; 10u was probably meant'),
    ("C5 a 0 10 uF", 10e-6, 'C5: "10 uF" is read as 10uF'),
    ("R5 a 0 27k/1W", 27e3, 'R5: "27k/1W" is read as 27k ohm'),
]


@pytest.mark.parametrize(("card", "value", "text"), TRAPS, ids=[row[0] for row in TRAPS])
def test_trap_is_warned_about_by_its_likely_meaning(card: str, value: float, text: str):
    netlist = read_text(f"t\n{card}\n")

    assert netlist.elements[0].value == pytest.approx(value, rel=1e-12)
    assert [notice.text for notice in netlist.notices] == [text]
    assert netlist.notices[0].rule == "trap"


def test_tags_of_the_instance():
    capacitor = read_text(
        't\nC1 a b 100µ V=450 Irms=0.8 Rser=0.3 Lser=0 mfg="A; B" pn="X" type="Al electrolytic"\n'
    ).elements[0]

    assert capacitor.value == 1e-4
    assert capacitor.tags.rated_V == 450
    assert capacitor.tags.ripple_A == 0.8
    assert capacitor.tags.esr_ohm == 0.3
    assert capacitor.tags.style == "aluminium"


def test_potentiometer_is_two_halves():
    netlist = read_text("t\nRV1 a w b 20k\nR2 a w 1k\n")

    assert [(e.name, e.nodes, e.value) for e in netlist.elements] == [
        ("RV1#1", ("a", "w"), 10e3),
        ("RV1#2", ("w", "b"), 10e3),
        ("R2", ("a", "w"), 1e3),
    ]
    assert netlist.notices[0].rule == "potentiometer"
    assert "wiper in the middle" in netlist.notices[0].text
    grounded = read_text("t\nRV1 a o 0 20k\n").elements
    assert [e.nodes for e in grounded] == [("a", "o"), ("o", "0")]

"""Every reading takes the place of its part; what was not measured stays."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Kind, Part
from stress.parts import reading, styles
from stress.study.as_measured import as_measured, leakage_row

HEADER = "part,capacitance,esr,esr_frequency,leakage,at,temperature,resistance,inductance,state"


def rows(*lines):
    return reading.read_text("\n".join((HEADER, *lines)), file="readings.csv").rows


@pytest.fixture
def circuit(circuit_of):
    made = circuit_of("C1 a 0 2e-8", "C2 b 0 2e-5", "R1 a b 1e4", "L1 b c 10")
    span = made.netlist.elements[0].span
    positions = (
        replace(made.position("C1"), style=styles.find("paper"), rated_V=400.0),
        replace(made.position("C2"), style=styles.find("aluminium"), rated_V=450.0),
    )
    parts = (
        Part(name="R1", kind=Kind.RESISTOR, value=1e4, span=span),
        Part(name="L1", kind=Kind.WINDING, value=10.0, resistance_ohm=200.0, span=span),
    )
    return replace(made, positions=positions, parts=parts)


def values(circuit):
    return {element.name: element.value for element in circuit.netlist.elements}


def test_capacitance_and_resistance(circuit):
    found = as_measured(circuit, rows("C1,0.015 uF,,,,,,,,", "R1,,,,,,,13 kohm,,"))
    assert found.position("C1").value_F == pytest.approx(15e-9)
    assert found.part("R1").value == pytest.approx(13e3)
    assert values(found) == pytest.approx({"C1": 15e-9, "C2": 2e-5, "R1": 13e3, "L1": 10.0})
    assert circuit.position("C1").value_F == 2e-8  # the circuit as found is as it was


def test_leakage_becomes_the_resistance_at_work(circuit):
    # 400 V / 1 µA = 400 MΩ at 20 °C; paper leaks 16 times as much at 60 °C: 25 MΩ.
    found = as_measured(circuit, rows("C1,,,,1 uA,400 V,,,,"))
    assert found.position("C1").insulation_ohm == pytest.approx(25e6)
    # Measured at 40 °C already: four times.
    warm = as_measured(circuit, rows("C1,,,,1 uA,400 V,40 degC,,,"))
    assert warm.position("C1").insulation_ohm == pytest.approx(100e6)


def test_of_several_voltages_the_highest_counts(circuit):
    taken = rows("C1,,,,1 nA,100 V,,,,", "C1,,,,1 uA,400 V,,,,")
    assert leakage_row(taken).at_V == 400.0
    assert as_measured(circuit, taken).position("C1").insulation_ohm == pytest.approx(25e6)


def test_esr_is_carried_to_the_ripple_frequency(circuit):
    # 10 Ω at 100 kHz are 10·(1.40/1.026)² at 120 Hz (Vishay 056/057 table 4).
    found = as_measured(circuit, rows("C2,,10 ohm,100 kHz,,,,,,"), ripple_Hz={"C2": 120.0})
    assert found.position("C2").esr_ohm == pytest.approx(10 * (1.40 / 1.026) ** 2, rel=1e-3)
    plain = as_measured(circuit, rows("C2,,10 ohm,100 kHz,,,,,,"))
    assert plain.position("C2").esr_ohm == pytest.approx(10.0)


def test_open_and_short(circuit):
    assert as_measured(circuit, rows("C1,,,,,,,,,open")).position("C1").value_F < 1e-15
    assert as_measured(circuit, rows("C1,,,,,,,,,short")).position("C1").insulation_ohm == 0.1


def test_a_winding_gets_the_copper_that_the_netlist_lacks(circuit):
    found = as_measured(circuit, rows("L1,,,,,,,260 ohm,8 H,"))
    assert values(found)["L1"] == 8.0
    extra = next(e for e in found.netlist.elements if e.name == "L1#measured")
    coil = next(e for e in found.netlist.elements if e.name == "L1")
    assert extra.value == pytest.approx(60.0)  # 200 Ω of it are in the netlist
    assert (coil.nodes, extra.nodes) == (("b", "l1#measured"), ("l1#measured", "c"))
    assert found.part("L1").resistance_ohm == pytest.approx(260.0)


def test_parts_that_do_not_exist_are_left_out(circuit):
    assert as_measured(circuit, rows("C9,1 uF,,,,,,,,")) == circuit

"""Touch current against 2πfCV, a closed form, and the plain ngspice program."""

import re
import subprocess
from dataclasses import replace
from math import pi, sqrt

import pytest

from stress.circuit.circuit import Line, Role
from stress.study import touch, touch_network
from stress.study.result import Condition, PositionStress, Working

LINE = "V1 l1 l2 sin"


@pytest.mark.parametrize(
    ("value_F", "line_V", "hertz", "printed_mA"),
    [
        (0.05e-6, 117, 60, 2.205),
        (0.047e-6, 125, 60, 2.215),
        (0.01e-6, 120, 60, 0.452),
        (4.7e-9, 120, 60, 0.213),
        (2.2e-9, 230, 50, 0.159),
    ],
)
def test_plain_current(value_F, line_V, hertz, printed_mA):
    """2πfCV, worked by hand to three places."""
    found = touch_network.plain_A(value_F, line_V=line_V, frequency_Hz=hertz)
    assert found * 1e3 == pytest.approx(printed_mA, abs=0.0006)


def closed_form(value_F, *, ohm, line_V, hertz):
    """The two networks by complex arithmetic, written out once more by hand."""
    w = 2 * pi * hertz
    admittance = 1j * w * value_F + (1 / ohm if ohm else 0)
    shunted = 1 / (1 / 1500 + 1j * w * 0.15e-6)
    ansi = abs(line_V * shunted / (shunted + 1 / admittance)) / 1500
    u1_shunted = 1 / (1 / 1500 + 1j * w * 0.22e-6)
    current = line_V / (500 + u1_shunted + 1 / admittance)
    iec = abs(current * 500 / (1 + 1j * w * 10e3 * 0.022e-6)) / 500
    return max(ansi, iec)


@pytest.mark.parametrize("ohm", [None, 220e3, 1e6])
@pytest.mark.parametrize("value_F", [4.7e-9, 0.05e-6])
def test_through_the_body_with_parallel_resistors(circuit_of, value_F, ohm):
    lines = [LINE, f"C1 l1 0 {value_F}", *([f"R1 l2 0 {ohm}"] if ohm else [])]
    circuit = circuit_of(*lines, live=("l1", "l2"), touch=("0",))
    found = touch.touch(circuit.position("C1"), circuit=circuit)
    expected = closed_form(value_F, ohm=ohm, line_V=126.0, hertz=60.0)
    assert found.reading_A == pytest.approx(expected, rel=1e-6)
    # The body's 2 kΩ are 1 % of the smallest resistor.
    assert found.others_A == pytest.approx(126.0 / (ohm or 1e15), rel=0.015, abs=1e-9)


def test_both_sides_of_the_line_add_up(circuit_of):
    circuit = circuit_of(LINE, "C1 l1 0 1e-8", "C2 l2 0 2e-8", live=("l1", "l2"), touch=("0",))
    found = touch.touch(circuit.position("C1"), circuit=circuit)
    assert found.reading_A == pytest.approx(
        closed_form(3e-8, ohm=None, line_V=126.0, hertz=60.0), rel=1e-6
    )


def test_a_part_behind_another_counts_as_the_chain_it_is(circuit_of):
    circuit = circuit_of(LINE, "C1 l1 m 2e-8", "R1 m 0 1000", live=("l1", "l2"), touch=("0",))
    found = touch.touch(circuit.position("C1"), circuit=circuit)
    chain = 1000 + 1 / (2j * pi * 60 * 2e-8)
    expected = max(
        126.0 / abs(chain + body.impedance_ohm(60)) * body.reading(60)
        for body in touch_network.BODIES
    )
    assert found.reading_A == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize(
    ("limit_mA", "line_V", "hertz", "printed_nF"),
    [(0.5, 120, 60, 11.05), (0.75, 120, 60, 16.58), (0.25, 240, 50, 3.316), (3.5, 240, 50, 46.42)],
)
def test_largest_capacitance(circuit_of, limit_mA, line_V, hertz, printed_nF):
    """C = I/(2πfV) by hand; the body takes 0.2 % of the current at 0.5 mA, 1.5 % at 3.5 mA."""
    circuit = circuit_of(LINE, "C1 l1 0 1e-8", live=("l1", "l2"), touch=("0",))
    source = circuit.netlist.elements[0]
    wave = replace(source.wave, values=(0.0, line_V * sqrt(2), hertz))
    netlist = replace(
        circuit.netlist,
        elements=(replace(source, wave=wave), *circuit.netlist.elements[1:]),
    )
    line = Line(sources=("V1",), nominal_V=line_V, high_V=line_V, low_V=line_V)
    circuit = replace(circuit, netlist=netlist, line=line)
    found = touch.touch(circuit.position("C1"), circuit=circuit, limit_A=limit_mA * 1e-3)
    assert found.value_max_F * 1e9 == pytest.approx(printed_nF, rel=0.02)
    assert touch_network.plain_A(
        found.value_max_F, line_V=line_V, frequency_Hz=hertz
    ) == pytest.approx(limit_mA * 1e-3, rel=0.02)


def test_resistors_alone_may_pass_the_limit(circuit_of):
    lines = (LINE, "C1 l1 0 1e-9", "R1 l2 0 1e5")
    circuit = circuit_of(*lines, live=("l1", "l2"), touch=("0",))
    found = touch.touch(circuit.position("C1"), circuit=circuit)
    assert found.fixed_A == pytest.approx(126.0 / 102e3, rel=2e-3)
    assert found.resistors == ("R1 (100 kΩ)",)
    # 126 V at 60 Hz: 0.5 mA are 10.5 nF, once the resistor is out of the way.
    assert found.value_max_F == pytest.approx(10.5e-9, rel=0.01)


def test_small_parts_keep_their_share(circuit_of):
    """10.5 nF in all: 2 nF stay, and what was 0.2 µF has the rest."""
    lines = (LINE, "C1 l1 0 2e-7", "C2 l1 ant 2e-9")
    circuit = circuit_of(*lines, live=("l1", "l2"), touch=("0", "ant"))
    large = touch.touch(circuit.position("C1"), circuit=circuit)
    small = touch.touch(circuit.position("C2"), circuit=circuit)
    assert large.value_max_F == pytest.approx(8.5e-9, rel=0.01)
    assert small.value_max_F > 2e-9


def test_the_earth_of_the_service_is_no_path_to_a_person(circuit_of):
    lines = (LINE, "C1 l1 0 1e-8", "Rearth l2 0 10")
    circuit = circuit_of(*lines, live=("l1", "l2"), touch=("0",))
    found = touch.touch(circuit.position("C1"), circuit=circuit)
    assert found.earths == ("Rearth",)
    assert found.reading_A == pytest.approx(
        closed_form(1e-8, ohm=None, line_V=126.0, hertz=60.0), rel=1e-6
    )


def working(position, *, dc_V, peak_V):
    stress = PositionStress(
        case="nominal",
        dc_V=dc_V,
        peak_V=peak_V,
        reverse_V=None,
        ripple_pp_V=0.0,
        ripple_rms_A=0.0,
        esr_loss_W=0.0,
        error_V=0.0,
    )
    nominal = Condition(name="nominal", line_V=117.0)
    return Working(conditions=(nominal,), positions={position: {"nominal": stress}}, parts={})


@pytest.mark.parametrize(
    ("card", "live", "reach", "role", "expected"),
    [
        ("C1 l1 0 1e-8", ("l1", "l2"), ("0",), Role.UNKNOWN, "Y"),
        ("C1 0 l1 1e-8", ("l1", "l2"), ("0",), Role.LINE_CHASSIS, "Y"),
        ("C1 l1 l2 1e-8", ("l1", "l2"), ("0",), Role.LINE_ACROSS, "X"),
        # A hot chassis: node 0 is B- and on the line; the antenna can be touched.
        ("C1 l1 0 1e-8", ("l1", "0"), ("ant",), Role.LINE_CHASSIS, "X"),
        ("C1 0 ant 1e-8", ("l1", "0"), ("ant",), Role.COUPLING, "Y"),
        ("C1 b 0 1e-8", ("l1", "0", "b"), ("ant",), Role.RESERVOIR, None),
        ("C1 b 0 1e-8", ("l1", "l2"), ("0",), Role.RESERVOIR, None),
    ],
)
def test_safety_class(circuit_of, card, live, reach, role, expected):
    circuit = circuit_of(LINE, card, live=live, touch=reach, roles={"C1": role})
    assert touch.safety_class(circuit.position("C1"), circuit=circuit) == expected


@pytest.mark.parametrize(
    ("dc_V", "peak_V", "expected"), [(0.0, 165.5, "X"), (140.0, 160.0, None), (0.0, 40.0, None)]
)
def test_what_bears_the_whole_line_is_across_it(circuit_of, dc_V, peak_V, expected):
    circuit = circuit_of(LINE, "C1 l1 l2 1e-8", live=("l1", "l2"), touch=("0",))
    found = touch.safety_class(
        circuit.position("C1"), circuit=circuit, working=working("C1", dc_V=dc_V, peak_V=peak_V)
    )
    assert found == expected


def test_a_battery_is_no_line_to_be_afraid_of(circuit_of):
    """ES1 of IEC 62368-1 ends at 42.4 V peak [memory H]."""
    line = Line(sources=("V1",), nominal_V=24.0, high_V=28.8, low_V=22.0)
    circuit = circuit_of(LINE, "C1 l1 0 1e-8", live=("l1", "l2"), touch=("0",), line=line)
    assert touch.safety_class(circuit.position("C1"), circuit=circuit) is None


def test_a_direct_line_drives_nothing_through_a_capacitor(circuit_of):
    line = Line(sources=("V1",), nominal_V=110.0, high_V=121.0, low_V=100.0)
    lines = ("V1 l1 l2 110", "C1 l1 0 1e-8")
    circuit = circuit_of(*lines, live=("l1", "l2"), touch=("0",), line=line)
    assert touch.safety_class(circuit.position("C1"), circuit=circuit) == "Y"
    assert touch.touch(circuit.position("C1"), circuit=circuit) is None


def test_what_a_smaller_one_costs_is_told(circuit_of):
    circuit = circuit_of(LINE, "C1 l1 0 5e-8", live=("l1", "l2"), touch=("0",))
    text = touch.what_is_lost(circuit.position("C1"), fitted_F=4.7e-9)
    assert "10.6 times to 34 Ω" in text  # 1/(2π·1 MHz·4.7 nF) = 33.9 Ω
    assert touch.what_is_lost(circuit.position("C1"), fitted_F=5e-8) == ""


@pytest.mark.program
def test_iec_network_against_the_ngspice_program(tmp_path):
    """The deck holds the network drawn in full, weighting filter loaded by nothing."""
    deck = """touch current
V1 line 0 AC 126
C1 line body 4.7n
R1 line body 470k
Rs body mid 1500
Cs body mid 0.22u
Rb mid 0 500
Rw mid out 10k
Cw out 0 0.022u
.ac lin 1 60 60
.print ac vm(out)
.end
"""
    path = tmp_path / "touch.cir"
    path.write_text(deck)
    ran = subprocess.run(
        ["ngspice", "-b", str(path)], capture_output=True, text=True, check=True, timeout=60
    )
    volts = float(re.search(r"^0\s+\S+\s+(\S+)", ran.stdout, re.MULTILINE).group(1))
    ohm = 1 / (2j * pi * 60 * 4.7e-9 + 1 / 470e3)
    reading = 126.0 / abs(ohm + touch_network.IEC.impedance_ohm(60)) * touch_network.IEC.reading(60)
    # 10 kΩ in series with 120 kΩ of reactance takes 500·10k/(120k)² = 3.5e-4 off the 500 Ω.
    assert reading == pytest.approx(volts / 500, rel=5e-4)

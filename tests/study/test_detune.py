"""Tuned circuits and timings against closed forms; nothing here is simulated.

Tank: f = 1/(2π sqrt(LC)) (Thomson 1853). Timing: both halves of a multivibrator in proportion to
their own RC.
"""

from math import pi, sqrt
from pathlib import Path

import pytest

from stress.circuit.build import build
from stress.netlist.read import read_text
from stress.parts import read_sheet
from stress.parts.models import subcircuit
from stress.pipeline import load, review_circuit
from stress.report.document import document
from stress.study.detune import timings, with_detuning
from stress.study.result import LeakageIn
from stress.study.timing import detuning, told

NETLISTS = Path(__file__).parents[2] / "netlists"
TRIODE = """
.subckt TRI P G K
B1 P K I=1m*pwr(max(V(G,K)+V(P,K)/20,0),1.5)
.ends
"""
STAGE = """Stage with a tuned plate
V1 b 0 DC 200
X1 p g 0 TRI
Rg g 0 1meg
Rin g in 10k
Vin in 0 0
{tank}
"""
PARALLEL = "L1 b p 1m\nC1 b p 100p\nC2 b p 20p"
COLPITTS = "L1 b p 1m\nRb b t 1meg\nC1 p t 200p\nC2 t b 200p"
PADDED = "L1 p q 1m\nRq q b 1meg\nC1 q b 400p\nC2 p b 100p"
RESISTIVE = "L1 b x 1m\nR1 x p 10\nC1 b p 120p"
ASTABLE = """Multivibrator
V1 b 0 DC 200
X1 p1 g1 {k} TRI
X2 p2 g2 {k} TRI
Rp1 b p1 47k
Rp2 b p2 47k
C1 p1 g2 1n
{back}
Rg1 g1 0 1meg
Rg2 g2 h 750k
Rh h 0 250k
{cathode}
"""


def circuit_of(text, sheet=""):
    netlist = read_text(f"{text}\n{TRIODE}\n.end\n", built_in=subcircuit)
    return build(netlist, read_sheet.read_text(sheet, path="s.toml"))


def tank(cards, sheet=""):
    return circuit_of(STAGE.format(tank=cards), sheet)


@pytest.mark.parametrize(
    ("cards", "whole_F", "half_F"),
    [
        (PARALLEL, 120e-12, 70e-12),
        (COLPITTS, 100e-12, 200e-12 / 3.0),  # 100 in series with 200
        (PADDED, 80e-12, 200e-12 / 3.0),  # the padder of 400, then of 200, in series with 100
    ],
)
def test_a_tank_goes_as_the_root_of_what_its_coil_sees(cards, whole_F, half_F):
    found = timings(tank(cards)).get("C1")
    assert found.frequency_Hz == pytest.approx(1 / (2 * pi * sqrt(1e-3 * whole_F)))
    assert found.shifts["low"] == pytest.approx(sqrt(whole_F / half_F) - 1.0)


def test_which_loss_detunes_by_one_in_a_hundred():
    """1.01² is 1.0201: the whole 120 pF may lose 2.36 pF, and C1 all of these."""
    found = timings(tank(PARALLEL))["C1"]
    assert found.loss == pytest.approx(120e-12 * (1 - 1.01**-2) / 100e-12, rel=1e-6)
    wider = timings(tank(PARALLEL, '[bench]\ndetuned = "10 %"\n'))["C1"]
    assert wider.loss == pytest.approx(120e-12 * (1 - 1.1**-2) / 100e-12, rel=1e-6)


def test_a_leak_lowers_the_quality():
    """Q = ωL/r healthy; with R across the tank 1/Q' = 1/Q + ωL/R, nine tenths at R = 9 Q ωL."""
    found = timings(tank(RESISTIVE))["C1"]
    reactance = sqrt(1e-3 / 120e-12)
    quality = reactance / 10.0
    assert found.leak_ohm == pytest.approx(9.0 * quality * reactance)
    faulty = 1.0 / (1.0 / quality + reactance / found.leak_ohm)
    assert faulty == pytest.approx(0.9 * quality)
    assert "Q of L1 falls by more than 10 %" in found.leak_reason
    assert "taken as 100" in timings(tank(PARALLEL))["C1"].leak_reason


def test_a_leak_across_a_part_of_the_tank_counts_by_the_square_of_its_voltage():
    whole = timings(tank("L1 b p 1m\nC1 b p 100p"))["C1"].leak_ohm
    part = timings(tank(COLPITTS))["C1"].leak_ohm
    assert part == pytest.approx(whole / 4.0, rel=1e-3)


@pytest.mark.parametrize(
    ("fault", "words"),
    [("low", "the tank of L1 goes from 459 kHz to 602 kHz, 31 % off"),
     ("open", "the tank of L1 goes from 459 kHz to 1.13 MHz, 145 % off")],
)  # fmt: skip
def test_faults_in_words(fault, words):
    circuit = tank(PARALLEL)
    said = detuning(timings(circuit)["C1"], fault, circuit=circuit)
    assert said == words


def test_alone_it_leaves_only_strays():
    circuit = tank("L1 b p 1m\nC1 b p 120p")
    assert "only strays" in detuning(timings(circuit)["C1"], "open", circuit=circuit)


def test_a_small_part_of_a_tank_is_within_its_share():
    circuit = tank("L1 b p 1m\nC1 b p 100n\nC2 b p 2.2n\nC3 p 0 2n")
    assert all(
        detuning(t, "low", circuit=circuit) == "" or t.shifts["low"] > 0.01
        for t in timings(circuit).values()
    )


def astable(*, k="0", back="C2 p2 g1 1n", cathode=""):
    return circuit_of(ASTABLE.format(k=k, back=back, cathode=cathode))


def test_a_multivibrator_goes_with_both_its_times():
    """Each half 1 MΩ · 1 nF, with the hold control in series: one at half leaves 1.5 of 2 ms."""
    found = timings(astable())
    assert set(found) == {"C1", "C2"}
    assert found["C1"].shifts["low"] == pytest.approx(2.0 / 1.5 - 1.0)
    assert found["C1"].what == "the multivibrator of X1 and X2"


def test_its_leak_shortens_its_own_time():
    """With a leak R the half discharges in R‖Rg: 1.01 times as fast with R = 49.5 · 1 MΩ."""
    found = timings(astable())["C1"]
    own = 1.0 / (1.0 + 1e6 / found.leak_ohm)  # of the sound half
    assert 2.0 / (1.0 + own) == pytest.approx(1.01)


def test_coupled_by_the_cathodes_one_capacitor_sets_it():
    circuit = astable(k="k", back="Cg g1 0 100p", cathode="Rk k 0 1k")
    found = timings(circuit)["C1"]
    assert found.shifts["low"] == pytest.approx(1.0)
    assert detuning(found, "low", circuit=circuit).endswith("runs 100 % too fast")


BLOCKING = """Blocking oscillator
V1 b 0 DC 200
X1 p g 0 TRI
Lp b p 50m
Ls w 0 50m
K1 Lp Ls 0.98
C1 w g 4.7n
Rg g 0 {ohm}
"""


def test_a_blocking_oscillator_goes_with_its_grid_capacitor():
    found = timings(circuit_of(BLOCKING.format(ohm="470k")))["C1"]
    assert found.what == "the blocking oscillator X1"
    assert found.shifts["low"] == pytest.approx(1.0)
    assert found.leak_ohm == pytest.approx(470e3 / 0.01)


@pytest.mark.parametrize(
    "text",
    [
        # two stages one after the other: nothing comes back
        ASTABLE.format(k="0", back="C2 p2 out 1n\nRo out 0 1meg", cathode=""),
        # a long pair is driven from outside; nothing joins its plates to its grids
        ASTABLE.format(k="k", back="C2 p2 out 1n\nRo out 0 1meg", cathode="Rk k 0 1k").replace(
            "C1 p1 g2 1n", "C1 in g2 1n\nVin in 0 0"
        ),
    ],
    ids=["cascade", "long-pair"],
)
def test_no_timing_where_nothing_swings(text):
    assert timings(circuit_of(text)) == {}


def test_a_coil_that_nobody_drew_is_asked_for():
    circuit = load(NETLISTS / "shore_receiver.cir")
    found = timings(circuit)
    assert set(found) == {"C7"}  # the oscillator's grid capacitor; its tank is 4 Ω here
    assert "not known" in told(found["C7"], circuit=circuit)
    assert "add it as L" in told(found["C7"], circuit=circuit)


@pytest.mark.parametrize("stem", ["hall_amplifier", "beacon_transmitter", "charthouse_smps"])
def test_power_and_audio_windings_are_no_tanks(stem):
    assert timings(load(NETLISTS / f"{stem}.cir")) == {}


def test_the_larger_resistance_is_the_functional_one():
    timing = timings(tank(RESISTIVE))["C1"]
    weak = LeakageIn(condition="nominal", critical_ohm=None, critical_A=None, victim=None)
    assert with_detuning(weak, timing, top_ohm=1e9).functional_ohm == timing.leak_ohm
    assert with_detuning(weak, timing, top_ohm=1e5).functional_ohm == 1e5
    assert with_detuning(weak, None, top_ohm=1e9) is weak
    strong = LeakageIn(
        condition="nominal", critical_ohm=None, critical_A=None, victim=None,
        functional_ohm=1e9, functional_reason="the bias of X1 is off by more than 10 %",
    )  # fmt: skip
    assert with_detuning(strong, timing, top_ohm=1e10) is strong


SET = """Intermediate-frequency stage on batteries
V1 b 0 DC 90
X1 p g k TRI
Rk k 0 1k
Rg g 0 1meg
L1 b x 1m
R1 x p 10
C1 b p 100p
C2 b p 20p
C3 b 0 0.1u
"""


@pytest.mark.ngspice
def test_a_review_tells_it_everywhere():
    """The same closed forms in leak, failures, explanation and document."""
    circuit = circuit_of(SET, '[capacitors.C1]\nstyle = "mica"\n')
    found = review_circuit(circuit, only=["C1"], jobs=1)
    timing = timings(circuit)["C1"]
    leak = found.leakage["C1"].governing
    assert leak.functional_ohm == pytest.approx(timing.leak_ohm)
    assert "the Q of L1 falls by more than 10 %" in leak.functional_reason
    failed = {failure.fault: failure for failure in found.failures["C1"]}
    assert "the tank of L1 goes from 459 kHz to 602 kHz, 31 % off" in failed["low"].text
    assert "the tank of L1" in failed["open"].text
    told_ = " ".join(found.explanations["C1"])
    assert "sets the tank of L1 at 459 kHz: off by 1 % once 2.4 % of its capacitance" in told_
    (c1,) = (p for p in document(found)["positions"] if p["name"] == "C1")
    assert c1["leakage"]["functional_ohm"] == pytest.approx(timing.leak_ohm)
    assert any("459 kHz" in text for text in c1["failures"]["low"]["consequences"])

"""Conditions that are asked for: how they are run, and that everything else then sees them."""

from dataclasses import replace
from math import sqrt

import pytest

from stress.circuit.build import build
from stress.circuit.circuit import Use
from stress.engine.pool import Pool
from stress.engine.twin import build as twin_of
from stress.judge.findings import Results, past_in_other_uses
from stress.judge.silicon import resistor_findings
from stress.netlist.read import read_text
from stress.parts import read_sheet
from stress.parts.models import subcircuit
from stress.study import conditions as stock
from stress.study.other_use import asked, on_offer, told
from stress.study.rewired import rewired
from stress.study.silicon import series_resistors
from stress.study.working import work
from stress.study.worst import worst

SET = """Half-wave set with an output stage
Vline l 0 SIN(0 155.6 60)
Rs l a 20
XR a b0 35Z5GT
C1 b0 0 40u
Rf b0 b1 1k
C2 b1 0 40u
Lop b1 ox 6
Rop ox p4 180
Los os 0 7.65m
K1 Lop Los 0.998
Rspk os 0 3.2
X4 p4 b1 g4 k4 50L6GT
Rk k4 0 150
Rg g4 0 470k
.end
"""
SHEET = """[equipment]
tubes_out = false
[line]
source = "Vline"
nominal = "110 V"
high = "121 V"
[loudspeakers.Rspk]
power = "4 W"
[capacitors.C1]
style = "aluminium"
rated = "150 V"
"""


@pytest.fixture(scope="module")
def equipment():
    return build(read_text(SET, built_in=subcircuit), read_sheet.read_text(SHEET, path="s.toml"))


@pytest.fixture(scope="module")
def run(equipment):
    circuit = asked(equipment, ["silicon", "primary-out", "todays-line"])
    with Pool(jobs=2) as pool:
        return circuit, work(circuit, solver=pool)


def by_name(circuit):
    return {condition.name: condition for condition in stock.conditions(circuit)}


def test_nothing_is_run_that_was_not_asked_for(equipment):
    assert {use.name for use in on_offer(equipment)} == {
        "speaker-out", "primary-out", "silicon", "todays-line",
    }  # fmt: skip
    assert not {"silicon", "primary-out"} & set(by_name(equipment))


def test_what_was_asked_for_is_no_longer_on_offer(equipment):
    circuit = asked(equipment, ["silicon"])
    assert "silicon" not in {use.name for use in on_offer(circuit)}
    assert list(by_name(circuit))[-3:] == ["silicon", "silicon high", "silicon cold"]


def test_error_what_is_not_on_offer_is_refused_with_what_is(equipment):
    with pytest.raises(ValueError, match=r"bias-lost.*primary-out"):
        asked(equipment, ["bias-lost"])


def test_silicon_makes_cold_last(equipment):
    found = by_name(asked(equipment, ["silicon"]))
    assert not found["cold"].lasts  # the 35Z5GT warms up like the others
    assert found["silicon cold"].lasts
    assert found["silicon cold"].cold


@pytest.mark.parametrize(
    ("name", "volts", "usual"),
    [("todays-line", 120.0, True), ("todays-line high", 126.0, False)],
)
def test_todays_line_replaces_the_designed_one(equipment, name, volts, usual):
    found = by_name(asked(equipment, ["todays-line"]))[name]
    assert found.line_V == volts
    assert found.factor == pytest.approx(volts / 110.0)
    assert found.usual is usual


def test_the_diodes_stand_between_the_tubes_own_nodes(equipment):
    circuit = asked(equipment, ["silicon"])
    condition = by_name(circuit)["silicon"]
    assert {"xr.bplate"} <= stock.removed(circuit, condition)
    twin = stock.case(circuit, condition, twin=twin_of(circuit)).twin
    (diode,) = [e for e in twin.elements if e.letter == "D"]
    assert diode.nodes == ("xr#plate", "xr#series")
    assert ("xr#series", "b0") in {e.nodes for e in twin.elements if e.letter == "R"}
    assert diode.model in twin.models
    assert rewired(circuit, by_name(circuit)["high"], twin=twin_of(circuit)) == twin_of(circuit)


def test_a_source_can_be_silent_in_the_sheets_own_condition():
    sheet = '[conditions.quiet]\nmuted = ["Vline"]\nline = "nominal"\n'
    circuit = build(read_text(SET, built_in=subcircuit), read_sheet.read_text(sheet, path="s.toml"))
    assert stock.sources(circuit, by_name(circuit)["quiet"])["Vline"] == 0.0


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("primary-out", "with the output primary unplugged"),
        ("silicon cold", "with silicon instead of the rectifier tube and the tubes cold at high "
         "line"),
        ("todays-line high", "on today's line at high line"),
        ("earthed", ""),
    ],
)  # fmt: skip
def test_conditions_in_words(name, words):
    assert told(name) == words


@pytest.mark.ngspice
def test_unloaded_silicon_charges_to_the_peak_of_the_line(run):
    """Closed form: nothing conducts but leakage, so the reservoir holds the peak at high line
    but for the drop of diode and Rs by the leakage of two electrolytics, under 1.2 V."""
    _, healthy = run
    cold = healthy.working.positions["C1"]["silicon cold"].dc_V
    assert cold == pytest.approx(121.0 * sqrt(2.0), abs=1.2)
    loaded = healthy.working.positions["C1"]
    assert loaded["silicon"].dc_V > loaded["nominal"].dc_V + 3.0  # the tube drops some volts


@pytest.mark.ngspice
def test_the_screen_takes_the_current_when_the_primary_is_out(run):
    """Common practice: with the plate unsupplied the screen attracts the whole cathode current."""
    circuit, healthy = run
    stresses = healthy.working.parts["X4"]
    normal, out = stresses["nominal"], stresses["primary-out"]
    assert out["screen_W"] > 3.0 * normal["screen_W"]
    assert out["plate_W"] < 0.02 * normal["plate_W"]
    assert out["cathode_A"] == pytest.approx(normal["cathode_A"], rel=0.3)
    found = _findings(circuit, healthy)
    assert any(f.where == "X4" and "screen dissipation" in f.text for f in found)
    assert all(f.condition not in ("nominal", "high") for f in found)
    conditions = [f.condition for f in found]
    assert len(set(conditions)) == len(conditions)  # one a condition, not one a part
    assert "primary-out high" not in conditions  # the same parts again


@pytest.mark.ngspice
def test_a_resistor_makes_up_for_the_tube(equipment):
    """What it says is tried in a netlist of its own that has the diode and the resistor; by
    direct current alone (voltage over current) it would be far too much."""
    circuit = asked(equipment, ["silicon"])
    with Pool(jobs=2) as pool:
        healthy = work(circuit, solver=pool)
        (found,) = series_resistors(circuit, healthy=healthy, solver=pool)
    assert found.tubes == ("XR",)
    assert found.ohm in {k * 10.0**e for k in E12 for e in (0, 1, 2)}
    assert found.with_V == pytest.approx(found.tube_V, rel=0.04)  # a step of E12 is 20 %
    amps = healthy.working.parts["XR"]["nominal"]["average_A"]
    assert found.ohm < 0.8 * (found.silicon_V - found.tube_V) / amps
    diode = f"D1 a d DS\nRser d b0 {found.ohm}\n.model DS D(IS=2e-8 N=1.9 RS=0.15)"
    text = SET.replace("XR a b0 35Z5GT", diode)
    plain = build(read_text(text, built_in=subcircuit), read_sheet.read_text(SHEET, path="s.toml"))
    with Pool(jobs=2) as pool:
        held = work(plain, solver=pool).working.nodes["b0"]["nominal"]
    assert held == pytest.approx(found.with_V, rel=2e-3)
    (note,) = resistor_findings((found,))
    assert f"{found.ohm:g} Ω in series" in note.text


E12 = (1.0, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 3.9, 4.7, 5.6, 6.8, 8.2)  # IEC 60063


def _findings(circuit, healthy):
    results = Results(
        circuit=circuit, working=healthy.working, worst={}, leakage={}, failures={}, risks=()
    )
    return list(past_in_other_uses(results))


@pytest.mark.ngspice
def test_the_worst_lasting_voltage_sees_them(run):
    circuit, healthy = run
    found = worst(circuit, working=healthy.working)["C1"]
    assert found.condition in ("todays-line high", "silicon cold")
    assert found.worst_V > healthy.working.positions["C1"]["high"].peak_V
    assert found.worst_V == max(
        s.peak_V for name, s in healthy.working.positions["C1"].items() if name != "cold"
    )


@pytest.mark.ngspice
def test_an_old_set_gains_in_proportion_to_the_line(run):
    """A rectifier supply is nearly linear in its line: 120/110 within the law of the tubes."""
    _, healthy = run
    held = healthy.working.positions["C1"]
    ratio = held["todays-line"].dc_V / held["nominal"].dc_V
    assert ratio == pytest.approx(120.0 / 110.0, rel=0.02)


def test_a_use_runs_at_both_line_voltages(equipment):
    use = Use(name="standby", text="", tests="", open=("Rf",))
    circuit = asked(_with(equipment, use), ["standby"])
    found = [c for c in stock.conditions(circuit) if c.name.startswith("standby")]
    assert [(c.line_V, c.open) for c in found] == [(110.0, ("Rf",)), (121.0, ("Rf",))]


def _with(circuit, use):
    return replace(circuit, uses=(use,))

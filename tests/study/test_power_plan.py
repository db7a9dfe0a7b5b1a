import sys
from dataclasses import dataclass
from pathlib import Path

import pytest

from stress.engine.pool import Pool
from stress.judge.power_up import power_up
from stress.pipeline import load
from stress.study.inrush import inrush
from stress.study.leakage import leakage
from stress.study.power_danger import dangers
from stress.study.power_result import Kind
from stress.study.working import work

sys.path.insert(0, str(Path(__file__).parents[1] / "bench"))
from power_trial import BEFORE, QUICK, ready, run_faults, run_healthy

AMPLIFIER = """one-tube amplifier behind a silicon rectifier
Vline lh 0 SIN(0 300 60)
Rs lh l1 47
D1 l1 b0 SI
C1 b0 0 40u
R1 b0 b1 200
C2 b1 0 20u
Rp b1 p3 220k
XV3 p3 g3 0 det 0 6SQ7
Rdet det 0 470k
Rg3 g3 0 10Meg
C13 p3 g4 0.02u
Rg4 g4 0 470k
XV4 p4 b1 g4 k4 6V6GT
Rk4 k4 0 270
Ro b1 p4 200
.model SI D(IS=1n RS=1)
.end
"""
SHEET = """
[line]
source = "Vline"
nominal = "212 V"
high = "228 V"
[resistors.R1]
rated = "2 W"
[resistors.Ro]
rated = "0.75 W"
[capacitors.C13]
style = "paper"
rated = "400 V"
"""


@dataclass(frozen=True)
class Planned:
    of: object
    plan: object
    faults: list
    alarms: list


@pytest.fixture(scope="module")
def planned(tmp_path_factory):
    path = tmp_path_factory.mktemp("amplifier") / "amplifier.cir"
    path.write_text(AMPLIFIER)
    path.with_suffix(".toml").write_text(SHEET)
    circuit = load(path)
    with Pool(jobs=2) as pool:
        healthy = inrush(circuit, healthy=work(circuit, solver=pool), solver=pool)
        studied = [circuit.position("C13"), circuit.position("C2")]
        leaks = leakage(circuit, studied, healthy=healthy, solver=pool)
        plan = power_up(circuit, healthy=healthy, leakage=leaks, failures={}, risks=(), solver=pool)
        of = ready(circuit, healthy, plan, dangers(leaks, {}))
        faults = run_faults(of, 20, pool)
        alarms = run_healthy(of, 10, pool)
    return Planned(of, plan, faults, alarms)


@pytest.mark.ngspice
def test_small_trial_stops_before_damage_without_false_alarms(planned):
    """At least nine of ten random faults are stopped in time, no healthy sample is stopped."""
    assert len(planned.faults) == 20
    in_time = [outcome for outcome in planned.faults if outcome.end in (BEFORE, QUICK)]
    assert len(in_time) >= 18
    assert planned.alarms == []


@pytest.mark.ngspice
def test_leaky_coupling_capacitor_shows_at_the_grid_before_the_tube_is_warm(planned):
    """With cold tubes the plate stands at B+, so the leak lifts the grid at the first steps."""
    first = planned.plan.steps[1]
    assert first.ramp.emission == {"XV3": 0.0, "XV4": 0.0}
    stops = [stop for stop in first.aborts if stop.probe == "g4 DC volts"]
    assert stops
    assert stops[0].above
    assert any("C13" in fault for fault in stops[0].tells)


@pytest.mark.ngspice
def test_steps_rise_to_the_highest_line_and_tubes_wake_between(planned):
    shares = [step.ramp.share for step in planned.plan.steps]
    assert shares == pytest.approx([0.0, 0.2, 0.4, 0.6, 0.8, 1.0, 228 / 212])
    by_share = {round(step.ramp.share, 2): step.ramp for step in planned.plan.steps}
    # cathode types: nothing up to 70 %, all from 85 % on (see stress.parts.models.emission)
    assert by_share[0.6].emission["XV4"] == 0.0
    assert by_share[0.8].emission["XV4"] == pytest.approx(2 / 3)
    assert by_share[1.0].emission["XV4"] == 1.0


@pytest.mark.ngspice
def test_healthy_readings_are_those_of_the_working_stress(planned):
    """At the nominal line the readings are the means of the settled state."""
    step = next(s.ramp for s in planned.plan.steps if s.ramp.name == "nominal")
    nodes = planned.of.healthy.working.nodes
    for probe in planned.plan.probes:
        if probe.kind is Kind.DC_V:
            band = step.band(probe.key)
            assert band.value == pytest.approx(nodes[probe.node]["nominal"], abs=1e-6)
            assert band.low <= band.value <= band.high
    line_W = step.band("line power")
    supplied = step.band("line current").value * 212.0
    assert 0.0 < line_W.value < supplied  # a rectifier's power factor is below one


@pytest.mark.ngspice
def test_meter_loads_a_grid_on_ten_megohm_as_a_divider(planned):
    """10 Mohm across a grid leak of 10 Mohm: the meter shows a good deal less."""
    step = next(s.ramp for s in planned.plan.steps if s.ramp.name == "nominal")
    grid = step.band("g3 DC volts")
    assert abs(grid.shown) < 0.97 * abs(grid.value)
    supply = step.band("b0 DC volts")
    assert supply.shown == pytest.approx(supply.value, rel=0.005)


@pytest.mark.ngspice
def test_lamp_and_mains_share_the_line_voltage(planned):
    lamp = planned.plan.lamp
    healthy = lamp.healthy
    assert healthy is not None
    # the rectifier bends the current, so that rms voltages add up to no less than the line
    assert healthy.lamp_V + healthy.equipment_V >= 212.0 * 0.99
    assert healthy.lamp_V < 0.5 * 212.0


@pytest.mark.ngspice
def test_switch_on_knows_cold_and_hot(planned):
    peaks = {(p.part, p.quantity): p for p in planned.plan.switch_on.peaks}
    reservoir = peaks["C1", "voltage_V"]
    # cold, nothing loads it: the peak of the highest line
    assert reservoir.cold == pytest.approx(300.0 * 228 / 212, rel=0.02)
    assert reservoir.hot is not None
    assert reservoir.hot <= reservoir.cold * 1.001
    pulse = peaks["D1", "peak_A"]
    # never more than the peak of the line over the resistance in series
    assert 0.5 < pulse.hot <= 300.0 * 228 / 212 / 47.0

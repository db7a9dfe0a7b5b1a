import subprocess
from math import log

import pytest

from stress.engine.pool import Pool
from stress.pipeline import load
from stress.study.discharge import discharge, grounded
from stress.study.discharge_advice import advice, no_bleed
from stress.study.discharge_result import Charge
from stress.study.working import work

SUPPLY = """bleeder and filter, no tubes
Vline a 0 SIN(0 170 60)
D1 a b RECT
C1 b 0 40u
Rf b c 100
C2 c 0 20u
Rbl c 0 {bleeder}
Cx a 0 0.1u
.model RECT D(IS=1n RS=5)
.end
"""
SHEET = """
[capacitors.C1]
style = "aluminium"
insulation = "1 Gohm"
[capacitors.C2]
style = "aluminium"
insulation = "1 Gohm"
[capacitors.Cx]
style = "film"
"""


@pytest.fixture
def followed(tmp_path):
    """Return a function from a netlist and a sheet to circuit, healthy state and discharge."""

    def follow(netlist, sheet=""):
        path = tmp_path / "supply.cir"
        path.write_text(netlist)
        path.with_suffix(".toml").write_text(sheet)
        circuit = load(path)
        with Pool(jobs=1) as pool:
            healthy = work(circuit, solver=pool)
            return circuit, healthy, discharge(circuit, healthy=healthy, solver=pool)

    return follow


def charge_of(found, name):
    return next(charge for charge in found.charges if charge.position == name)


@pytest.mark.ngspice
def test_fall_through_a_bleeder_is_that_of_both_capacitors_together(followed):
    """100 ohm join C1 and C2: 60 µF in 220 kohm, ln(V/V_end)."""
    _, _, found = followed(SUPPLY.format(bleeder="220k"), SHEET)
    charge = charge_of(found, "C1")
    decay = next(d for d in charge.decays if d.how == "switched off")
    for threshold, seconds in decay.below_s.items():
        # 1e9 ohm of insulation and 100 ohm between the two are below one part in a hundred
        expected = 220e3 * 60e-6 * log(decay.start_V / threshold)
        assert seconds == pytest.approx(expected, rel=0.01)
    assert decay.extrapolated == ()
    assert charge.bleed_ohm == pytest.approx(220.1e3, rel=1e-3)
    assert charge.formula_s[60.0] == pytest.approx(
        220.1e3 * 40e-6 * log(charge.start_V / 60.0), rel=2e-3
    )
    assert not no_bleed(charge)


@pytest.mark.ngspice
def test_without_a_bleeder_it_holds_and_the_end_is_extrapolated(followed):
    """Two insulations of 1 Gohm on 60 µF: 500 Mohm times 60 µF is 30,000 s."""
    netlist = SUPPLY.format(bleeder="220k").replace("Rbl", "*Rbl")
    _, _, found = followed(netlist, SHEET)
    first = found.charges[0]
    assert {c.position for c in found.charges[:2]} == {"C1", "C2"}
    assert no_bleed(first)
    assert first.holds
    decay = first.decays[0]
    assert 60.0 in decay.extrapolated
    # the diode's own leakage, 1 nA, takes part of it away: a few per cent
    expected = 30e3 * log(decay.start_V / 60.0)
    assert decay.below_s[60.0] == pytest.approx(expected, rel=0.15)
    assert any("ten minutes" in text for text in found.advice)


@pytest.mark.ngspice
def test_what_lies_across_the_line_is_told_by_the_closed_form(followed):
    _, _, found = followed(SUPPLY.format(bleeder="220k"), SHEET)
    across = charge_of(found, "Cx")
    assert across.decays == ()
    assert across.start_V == pytest.approx(170.0 * 1.1, rel=1e-3)


def test_nodes_with_a_way_to_the_common_node(circuit_of):
    """Windings and resistors lead there; capacitors, sources at work and open ends do not."""
    circuit = circuit_of(
        "Vline a 0 sin", "R1 a b 1000", "L1 b 0 1", "C1 c d 1e-6", "R2 c d 47000", "R3 e 0 1e9"
    )
    assert grounded(circuit) == {"0", "a", "b"}


def test_floating_position_is_measured_across_itself():
    charge = Charge(
        position="C9",
        value_F=1e-5,
        start_V=300.0,
        condition="high",
        energy_J=0.45,
        deadly=False,
        class_V=(60.0, 120.0),
        floating=True,
    )
    assert any("own terminals" in text and "C9" in text for text in advice([charge]))


@pytest.mark.ngspice
@pytest.mark.program
def test_fall_is_that_of_the_plain_program(followed, tmp_path):
    """The same network from the same state, run by the program in batch mode."""
    choke = SUPPLY.format(bleeder="4.7k").replace("Rf b c 100", "Lch b m 2\nRch m c 200")
    _, healthy, found = followed(choke, SHEET)
    state = healthy.settled["high"].waves
    start = {node: float(state.voltage(node)[0]) for node in ("b", "c")}
    current = float(state.current("Lch")[0])
    deck = f"""choke and two capacitors let go
C1 b 0 40u ic={start["b"]!r}
Lch b m 2 ic={current!r}
Rch m c 200
C2 c 0 20u ic={start["c"]!r}
Rbl c 0 4.7k
.tran 0.1m 2 0 0.1m uic
.meas tran t60 when v(c)=60 fall=last
.end
"""
    path = tmp_path / "plain.cir"
    path.write_text(deck)
    said = subprocess.run(
        ["ngspice", "-b", str(path)], capture_output=True, text=True, check=False, timeout=60
    ).stdout
    line = next(line for line in said.splitlines() if line.startswith("t60"))
    plain_s = float(line.split("=")[1].split()[0])
    decay = charge_of(found, "C2").decays[0]
    # the diode is blocked from the first moment on; 2 ms steps, linear in between
    assert decay.below_s[60.0] == pytest.approx(plain_s, rel=0.01)

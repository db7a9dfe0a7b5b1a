"""The chosen parts in place, simulated: what was asked for is what comes out."""

from dataclasses import replace

import pytest

from stress import pipeline
from stress.engine.pool import Pool
from stress.parts.policy import policies
from stress.study.fitted import fitted
from stress.study.replacement import replacement
from stress.study.working import work
from stress.study.worst import worst

pytestmark = pytest.mark.ngspice

NETLIST = """Lamp-room signal, half-wave supply
Vline a 0 SIN(0 165 60)
R0 a b 100
D1 b c DR
C1 c 0 8u
R1 c 0 5k
.model DR D(IS=1e-9 N=2 RS=40 CJO=10p)
.end
"""
SHEET = """[line]
source = "Vline"
nominal = "117 V"
[capacitors.C1]
style = "aluminium"
rated = "200 V"
"""


def test_a_larger_reservoir_leaves_less_ripple(tmp_path):
    """Of a ripple of V/(f R C) the part that C takes: 8 µF to 10 µF, 20 % less (Horowitz and
    Hill, ripple of a capacitor-input supply); its own voltage stays within the new rating."""
    path = tmp_path / "signal.cir"
    path.write_text(NETLIST)
    path.with_suffix(".toml").write_text(SHEET)
    circuit = pipeline.load(path)
    before = solved(circuit)
    most = worst(circuit, working=before)["C1"]
    chosen = replacement(
        circuit.position("C1"),
        working=before,
        worst=most,
        policy=policies()["common-practice"],
        circuit=circuit,
    )
    assert chosen.value_F == pytest.approx(10e-6)
    assert chosen.rated_V == 200.0
    new = fitted(circuit, {"C1": chosen})
    after = solved(new)
    ratio = swing(after) / swing(before)
    # The sawtooth rule is a bound: the diode's share of the period moves a little as well.
    assert ratio == pytest.approx(8 / 10, rel=0.06)
    assert worst(new, working=after)["C1"].worst_V <= chosen.rated_V
    assert replace(new, netlist=circuit.netlist, positions=circuit.positions) == circuit


def solved(circuit):
    with Pool(jobs=1) as pool:
        return work(circuit, solver=pool).working


def swing(working):
    return working.positions["C1"]["nominal"].ripple_pp_V

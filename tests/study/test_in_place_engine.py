"""The paths past a part, simulated, against networks that can be worked out by hand."""

from dataclasses import replace
from math import pi

import pytest

from stress.engine.pool import Pool
from stress.engine.twin import build
from stress.netlist.flat import Element, Model
from stress.study import in_place
from stress.study.plan import run

pytestmark = pytest.mark.ngspice


def with_diode(circuit, *, anode, cathode):
    span = circuit.netlist.elements[0].span
    model = Model(name="ds", kind="d", parameters={"is": 1e-9, "n": 1.8, "rs": 1.0}, span=span)
    diode = Element(name="D1", letter="D", nodes=(anode, cathode), model="ds", span=span)
    netlist = replace(
        circuit.netlist,
        elements=(*circuit.netlist.elements, diode),
        models={"ds": model},
    )
    return replace(circuit, netlist=netlist)


@pytest.fixture
def pool():
    with Pool(jobs=1) as pool:
        yield pool


def around(circuit, pool, *, test_V):
    plan = in_place.plan(
        circuit.position("C1"), circuit=circuit, twin=build(circuit), test_V=test_V
    )
    return run([plan], solver=pool)[0]


def test_resistors_and_a_capacitor_past_it(circuit_of, pool):
    circuit = circuit_of(
        "V1 s 0 sin", "R0 s a 1000", "C1 a b 1e-7", "R1 a 0 100000", "R2 b 0 220000", "C2 b 0 1e-6"
    )
    ideal = tuple(replace(p, esr_ohm=1e-3, insulation_ohm=1e11) for p in circuit.positions)
    found = around(replace(circuit, positions=ideal), pool, test_V=300.0)
    # The line is unplugged, so that R0 leads nowhere: R1 and R2 in series.
    assert found.direct_ohm == pytest.approx(320e3, rel=1e-3)
    assert found.quiet_ohm == pytest.approx(320e3, rel=1e-3)
    for hertz in (120.0, 1000.0, 100e3):
        shunted = 220e3 / (1 + 2j * pi * hertz * 220e3 * 1e-6)
        assert found.impedance_ohm[hertz] == pytest.approx(100e3 + shunted, rel=1e-4)
    assert found.unanswered == ()


def test_a_junction_conducts_at_the_test_voltage_only(circuit_of, pool):
    circuit = circuit_of("C1 a 0 1e-7", "R1 a d 47000", "R2 d 0 10000000")
    circuit = with_diode(circuit, anode="d", cathode="0")
    found = around(circuit, pool, test_V=100.0)
    assert found.direct_ohm == pytest.approx(47e3, rel=0.02)
    # 0.1 V leave the junction at IS·V/(N·VT) of leakage: hundreds of kilohms and more.
    assert found.quiet_ohm > 5e6


def test_a_part_that_nothing_bridges(circuit_of, pool):
    circuit = circuit_of("C1 a b 1e-7", "R1 a 0 1000", "C2 b 0 1e-6")
    found = around(circuit, pool, test_V=100.0)
    assert found.direct_ohm > 1e8
    assert found.unanswered == ()

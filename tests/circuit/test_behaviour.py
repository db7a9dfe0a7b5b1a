"""Behavioural currents as what they are."""

import pytest

from stress.circuit.behaviour import conduction
from stress.circuit.circuit import Role


@pytest.mark.parametrize(
    ("card", "way"),
    [
        ("B1 a b I=2e-4*pwr(max(V(a,b),0),1.5)", 1),  # Child's law
        ("B1 a 0 I=2e-4*pwr(max(V(a),0),1.5)", 1),
        ("B1 0 a I=2e-4*pwr(max(-V(a),0),1.5)", 1),
        ("B1 a b I=-2e-4*pwr(max(V(b,a),0),1.5)", -1),
        ("B1 a b I=V(a,b)/1k", 0),  # a resistor
        ("B1 a b I=V(a,b)*abs(V(a,b))/1k", 0),  # a varistor, a lamp
        ("B1 a b I=-V(a,b)/1k", None),  # drives, does not pass
        ("B1 a b I=1m", None),
        ("B1 a b I=V(c)/1k", None),  # another voltage sets it
        ("B1 a b V=V(a,b)", None),
        ("B1 a b I=1/(V(a,b)-V(a,b))", None),  # no number at all
    ],
)
def test_conduction(netlist, card, way):
    element = next(e for e in netlist(card).elements if e.name == "B1")
    assert conduction(element) == way


def test_a_rectifier_as_a_formula_feeds_a_reservoir(circuit):
    found = circuit(
        "V1 a 0 SIN(0 400 50)\nB1 a b I=2e-4*pwr(max(V(a,b),0),1.5)\nC1 b 0 8u\nR1 b 0 10k"
    )

    assert found.line.sources == ("V1",)
    assert found.position("C1").role is Role.RESERVOIR
    assert found.position("C1").plus == 0

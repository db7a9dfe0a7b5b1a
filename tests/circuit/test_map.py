"""The picture of the circuit: supplies on top, signal to the right, nothing on one spot."""

from itertools import combinations
from math import hypot, sqrt

import pytest

from stress.circuit.map import layout

SET = """
Vl l n SIN(0 165 60)
Re n 0 10
Lp l n 5
Ls a 0 40
K1 Lp Ls 0.999
D1 a b0 DM
C1 b0 0 16u
R1 b0 b1 2k
C2 b1 0 16u
Vin in 0 SIN(0 0.1 400)
C3 in g1 0.1u
Rg1 g1 0 1meg
X1 p1 g1 k1 TRI
Rp1 b1 p1 220k
Rk1 k1 0 1k
C4 p1 g2 0.02u
Rg2 g2 0 470k
X2 p2 b1 g2 k2 PEN
Rk2 k2 0 270
C5 k2 0 25u
Lop b1 x 10
Rop x p2 300
C6 p2 0 5n
"""


@pytest.fixture
def picture(circuit):
    found = layout(circuit(SET))
    return found, {n.name: n for n in found.nodes}


def test_supplies_are_on_top_and_ground_below(picture):
    found, at = picture

    assert {n.name for n in found.nodes if n.kind == "rail"} == {"0", "b0", "b1"}
    assert at["0"].y == 0.0
    others = [n.y for n in found.nodes if n.kind != "rail"]
    assert min(at["b0"].y, at["b1"].y) > max(others)
    assert at["b0"].x < at["b1"].x  # from the rectifier on
    assert min(others) > at["0"].y


def test_the_signal_goes_to_the_right(picture):
    _, at = picture

    assert at["X1"].x < at["C4"].x < at["X2"].x
    assert at["C5"].y < at["X2"].y < at["Lop"].y  # cathode below, load above


def test_everything_is_there_once_and_joined(picture, circuit):
    found, at = picture
    c = circuit(SET)

    assert len(at) == len(found.nodes)
    assert {p.name for p in (*c.positions, *c.parts)} <= set(at)
    assert "Rop" not in at  # the copper is drawn with its winding
    joined = {frozenset((found.nodes[e.a].name, found.nodes[e.b].name)) for e in found.edges}
    assert frozenset(("C1", "b0")) in joined
    assert frozenset(("C1", "0")) in joined
    assert at["C4"].text == "coupling, plate of X1 to grid of X2"


def test_nothing_lies_on_anything_else(picture):
    found, _ = picture
    drawn = [n for n in found.nodes if n.kind != "rail"]

    nearest = min(hypot(a.x - b.x, a.y - b.y) for a, b in combinations(drawn, 2))
    assert nearest > 0.3 / sqrt(len(drawn))  # a third of the even share of the area
    assert all(0 <= n.x <= 1 and 0 <= n.y <= 1 for n in found.nodes)


def test_the_same_circuit_gives_the_same_picture(circuit):
    assert layout(circuit(SET)) == layout(circuit(SET))

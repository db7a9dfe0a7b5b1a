"""The way from a fault to a victim, each by hand from the schematic."""

import pytest

from stress.circuit.chain import Chains, chain

SET = """
V1 b0 0 300
Lf b0 b1 10
Rf b1 b2 4.7k
C1 b1 0 16u
C2 b2 0 16u
X1 p1 g1 0 TRI
Rp1 b2 p1 220k
Rg1 g1 0 10meg
C3 p1 g2 0.02u
Rg2 g2 0 470k
X2 p2 b1 g2 k2 PEN
Rk2 k2 0 270
C4 k2 0 25u
Lop b1 x 10
Rop x p2 300
C5 p2 0 5n
Los s 0 6m
K1 Lop Los 0.99
Rs s 0 3.2
Vn nb 0 -40
Rb nb bias 10k
C6 bias 0 10u
Rg3 bias g3 100k
X3 p3 b1 g3 0 PEN
Rp3 b1 p3 2k
"""

CASES = [
    # a leak lifts the grid, the tube draws more
    ("C3", "X2", ("C3", "grid of X2", "X2")),
    # more cathode current through the bias resistor
    ("C3", "Rk2", ("C3", "grid of X2", "X2", "cathode of X2", "Rk2")),
    # and through the output primary; its copper is not named apart
    ("C3", "Lop", ("C3", "grid of X2", "X2", "plate of X2", "winding Lop")),
    # and on through the choke that feeds it
    (
        "C3",
        "Lf",
        ("C3", "grid of X2", "X2", "plate of X2", "winding Lop", "supply b1", "winding Lf"),
    ),
    # the other end of the same leak loads the plate resistor
    ("C3", "Rp1", ("C3", "plate of X1", "Rp1")),
    # a shorted plate bypass: B+ straight through the primary
    ("C5", "Lop", ("C5", "plate of X2", "winding Lop")),
    ("C2", "Rf", ("C2", "supply b2", "Rf")),
    ("C1", "Lf", ("C1", "supply b1", "winding Lf")),
    ("C4", "X2", ("C4", "cathode of X2", "X2")),
    # bias gone: the grid of the output tube follows
    ("C6", "X3", ("C6", "bias supply bias", "Rg3", "grid of X3", "X3")),
    # a position as the victim
    ("C2", "C1", ("C2", "C1")),
]


@pytest.fixture
def chains(circuit):
    return Chains(circuit(SET))


@pytest.mark.parametrize(("start", "victim", "words"), CASES)
def test_chain(chains, start, victim, words):
    assert chains.words(start, victim) == words


def test_every_step_is_a_place_of_the_netlist(chains):
    steps = chains.steps("C3", "Lop")

    assert [(s.kind, s.name) for s in steps] == [
        ("position", "C3"),
        ("node", "g2"),
        ("part", "X2"),
        ("node", "p2"),
        ("part", "Rop"),
        ("node", "x"),
        ("part", "Lop"),
    ]


def test_unknown_names(circuit):
    with pytest.raises(KeyError):
        chain(circuit(SET), "C99", "X1")
    with pytest.raises(KeyError):
        chain(circuit(SET), "C1", "X99")

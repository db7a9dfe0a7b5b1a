"""Recognition of tubes that come as subcircuits: pins by name and by what the model computes."""

import pytest

from stress.netlist.read import read_text
from stress.parts.model import JUNCTIONS
from stress.parts.models import modelled, subcircuit
from stress.parts.recognise import pin_roles


def recognised(cards: str, call: str):
    """Return pin_roles of the one instance of a netlist."""
    netlist = read_text(f"one tube\n{cards}\n{call}\n.end\n", built_in=subcircuit)
    assert netlist.obstacles == ()
    instance = netlist.instances[0]
    return pin_roles(instance.pins, netlist.elements, nodes=instance.nodes)


# Koren's published triode and pentode (Glass Audio 8(5), 1996) as two- and four-pole text, with
# numbers for pins: nothing but the law tells them apart.
KOREN_TRIODE = """\
.subckt T12AX 1 2 3
E1 7 0 VALUE={V(1,3)/600*LOG(1+EXP(600*(1/100+V(2,3)/SQRT(300+V(1,3)*V(1,3)))))}
G1 1 3 VALUE={(PWR(V(7),1.4)+PWRS(V(7),1.4))/1060}
RCP 1 3 1G
RE1 7 0 1G
C1 2 3 2.3P
C2 2 1 2.4P
R3 2 5 2000
D3 5 3 DX
.model DX D(IS=1N RS=1 CJO=10P TT=1N)
.ends
"""
KOREN_PENTODE = """\
.subckt TPENT 1 2 3 4
E1 7 0 VALUE={V(4,3)/48*LOG(1+EXP(48*(1/8.7+V(2,3)/V(4,3))))}
G1 1 3 VALUE={(PWR(V(7),1.35)+PWRS(V(7),1.35))/1460*ATAN(V(1,3)/12)}
G2 4 3 VALUE={(EXP(1.35*LOG(V(4,3)/8.7+V(2,3))))/4500}
RE1 7 0 1G
.ends
"""
RECTIFIER = """\
.subckt TRECT 1 2 3
B1 1 3 I=3e-4*pow(max(V(1,3),0),1.5)
B2 2 3 I=3e-4*pow(max(V(2,3),0),1.5)
.ends
"""
TURNED = """\
.subckt TURNED x y z
B1 x z I=-pow(max(V(z,x)/100+V(y,x),0),1.5)/700
.ends
"""


@pytest.mark.parametrize(
    ("cards", "call", "expected"),
    [
        (KOREN_TRIODE, "X1 a b c T12AX", {"plate": "1", "grid": "2", "cathode": "3"}),
        (KOREN_TRIODE, "X1 a b 0 T12AX", {"plate": "1", "grid": "2", "cathode": "3"}),
        (
            KOREN_PENTODE,
            "X1 a b c d TPENT",
            {"plate": "1", "grid": "2", "cathode": "3", "screen": "4"},
        ),
        (RECTIFIER, "X1 a b c TRECT", {"plate": "1", "plate2": "2", "cathode": "3"}),
        (TURNED, "X1 a b c TURNED", {"plate": "z", "grid": "y", "cathode": "x"}),
    ],
    ids=["triode", "triode on ground", "pentode", "rectifier", "cathode first"],
)
def test_pins_without_names_are_told_by_the_law(cards, call, expected):
    assert recognised(cards, call) == (expected, "what the model computes")


TUBES = [entry for entry in modelled() if entry.family not in JUNCTIONS]
LIKE_UNITS = [e for e in TUBES if e.family not in ("triode-pentode", "triode-converter")]


@pytest.mark.parametrize("entry", LIKE_UNITS, ids=lambda e: e.name)
def test_every_built_in_model_is_recognised_without_its_names(entry):
    """The law alone gives back the pins of the type table."""
    nodes = " ".join(f"n{k}" for k in range(len(entry.pins)))
    netlist = read_text(f"t\nX1 {nodes} {entry.name}\n.end\n", built_in=subcircuit)
    names = tuple(f"q{k}" for k in range(len(entry.pins)))
    roles, how = pin_roles(names, netlist.elements, nodes=netlist.instances[0].nodes)
    assert how == "what the model computes"
    assert roles == dict(zip(entry.pins, names, strict=True))


@pytest.mark.parametrize("entry", TUBES, ids=lambda e: e.name)
def test_every_built_in_model_is_recognised_by_its_names(entry):
    roles, how = pin_roles(entry.pins, ())
    assert roles == {pin: pin for pin in entry.pins}
    assert how == "pin names"


@pytest.mark.parametrize(
    ("pins", "expected"),
    [
        ("A G K", {"plate": "A", "grid": "G", "cathode": "K"}),
        ("P G C", {"plate": "P", "grid": "G", "cathode": "C"}),
        ("A S G K", {"plate": "A", "screen": "S", "grid": "G", "cathode": "K"}),
        ("A G2 G1 K", {"plate": "A", "screen": "G2", "grid": "G1", "cathode": "K"}),
        (
            "a1 g1 k1 a2 g2 k2",
            {
                "plate": "a1",
                "grid": "g1",
                "cathode": "k1",
                "plate2": "a2",
                "grid2": "g2",
                "cathode2": "k2",
            },
        ),
        ("P1 P2 F", {"plate": "P1", "plate2": "P2", "cathode": "F"}),
        (
            "P G2 G1 K G3 H1 H2",
            {
                "plate": "P",
                "screen": "G2",
                "grid": "G1",
                "cathode": "K",
                "suppressor": "G3",
                "heater": "H1",
                "heater2": "H2",
            },
        ),
        (
            "P G1 G2G4 G3 K G5",
            {
                "plate": "P",
                "oscillator": "G1",
                "screen": "G2G4",
                "grid": "G3",
                "cathode": "K",
            },
        ),
    ],
)
def test_pins_are_told_by_their_names(pins, expected):
    roles, how = pin_roles(pins.split(), ())
    assert roles == expected
    assert how.startswith("pin names")


@pytest.mark.parametrize(
    ("cards", "call"),
    [
        (".subckt NET 1 2 3\nR1 1 2 1k\nR2 2 3 1k\n.ends", "X1 a b c NET"),
        (".subckt OPA 1 2 3\nE1 3 0 VALUE={1e5*V(1,2)}\n.ends", "X1 a b c OPA"),
        (KOREN_PENTODE, "X1 a b c a TPENT"),  # strapped: two pins on one node
    ],
)
def test_what_is_no_tube_or_cannot_be_told_has_no_roles(cards, call):
    assert recognised(cards, call) == ({}, "")

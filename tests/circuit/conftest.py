"""Circuits from a few lines of netlist."""

from collections.abc import Callable

import pytest

from stress.circuit.build import Anatomy, anatomy, build
from stress.circuit.circuit import Circuit
from stress.netlist.read import read_text
from stress.parts import read_sheet
from stress.parts.models import subcircuit

# The least that a tube model computes; the values do not matter, nothing is simulated here.
MODELS = """
.subckt TRI P G K
B1 P K I=1m*pwr(max(V(G,K)+V(P,K)/20,0),1.5)
C1 G K 2p
.ends
.subckt PEN P S G K
B1 P K I=1m*pwr(max(V(G,K)+V(S,K)/9,0),1.5)*atan(V(P,K)/12)
B2 S K I=0.2m*pwr(max(V(G,K)+V(S,K)/9,0),1.5)
C1 G K 9p
.ends
.subckt DIO P K
B1 P K I=1m*pwr(max(V(P,K),0),1.5)
R1 P K 1g
.ends
.model DM D(IS=1n)
.model NPN NPN(BF=100)
.model PNP PNP(BF=100)
.model NM NMOS(VTO=3)
.model SM SW(VT=2 VH=0)
"""

Make = Callable[..., Circuit]


@pytest.fixture
def netlist():
    def make(text):
        return read_text(f"test\n{text}\n{MODELS}\n.end\n", built_in=subcircuit)

    return make


@pytest.fixture
def circuit(netlist) -> Make:
    def make(text, sheet=""):
        return build(netlist(text), read_sheet.read_text(sheet, path="test.toml"))

    return make


@pytest.fixture
def taken_apart(netlist) -> Callable[..., Anatomy]:
    def make(text, sheet=""):
        return anatomy(netlist(text), read_sheet.read_text(sheet, path="test.toml"))

    return make

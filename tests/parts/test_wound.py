"""Transformers and chokes: what is stated is what ngspice measures."""

import re
import subprocess

import pytest

from stress.parts import models, wound
from stress.parts.wound import Winding

pytestmark = pytest.mark.program


def measure(cards: str, commands: str) -> dict[str, float]:
    deck = f"* wound\n{cards}\n.control\nset numdgt=9\n{commands}\n.endc\n.end\n"
    done = subprocess.run(
        ["ngspice", "-b"], input=deck, capture_output=True, text=True, timeout=60, check=False
    )
    found = re.findall(r"^(\S+)\s+=\s+([-+\d.eE]+)", done.stdout, re.MULTILINE)
    return {name: float(value) for name, value in found}


AC = "ac lin 1 60 60\nprint vm(a) vm(b)"


def test_a_stated_secondary_gives_its_voltage_at_its_current():
    """300 V at 100 mA and 6.3 V at 3 A, both loaded, from 117 V; 0.5 % for leakage."""
    cards = "V1 l 0 ac 117\n" + wound.power_transformer(
        "T1",
        primary=Winding(nodes=("l", "0"), voltage_V=117, resistance_ohm=4),
        secondaries=[
            Winding(nodes=("a", "0"), voltage_V=300, resistance_ohm=70, rated_A=0.1),
            Winding(nodes=("b", "0"), voltage_V=6.3, resistance_ohm=0.05, rated_A=3.0),
        ],
    )
    loaded = measure(cards + "Ra a 0 3000\nRb b 0 2.1", AC)
    assert loaded["vm(a)"] == pytest.approx(300, rel=0.005)
    assert loaded["vm(b)"] == pytest.approx(6.3, rel=0.005)
    free = measure(cards + "Ra a 0 1e9\nRb b 0 1e9", AC + "\nprint mag(v1#branch)")
    # Regulation: 7 V over its own wire and 3.6 % over the primary's.
    assert free["vm(a)"] == pytest.approx((300 + 7) / (1 - 0.418 * 4 / 117), rel=0.005)
    # A tenth of the rated 0.418 A magnetises.
    assert free["mag(v1#branch)"] == pytest.approx(0.0418, rel=0.03)


def test_a_short_is_limited_by_resistance_and_leakage():
    cards = "V1 l 0 ac 117\n" + wound.power_transformer(
        "T1",
        primary=Winding(nodes=("l", "0"), voltage_V=117, resistance_ohm=4),
        secondaries=[Winding(nodes=("a", "0"), voltage_V=117, resistance_ohm=4, rated_A=1.0)],
    )
    found = measure(cards + "Ra a 0 1e-3", "ac lin 1 60 60\nprint mag(v1#branch)")
    assert found["mag(v1#branch)"] == pytest.approx(117 / 8.3, rel=0.15)


def test_the_built_in_power_transformer_with_a_centre_tap():
    cards = f"""{models.subcircuit("power_transformer_ct")}
V1 l 0 ac 117
X1 l 0 a 0 b power_transformer_ct vp=117 vs=350 rp=5 rs=60 im=0.1
Ra a 0 1e9
Rb b 0 1e9
"""
    found = measure(cards, AC + "\nprint mag(v(a)-v(b)) mag(v1#branch)")
    assert found["vm(a)"] == pytest.approx(350, rel=0.005)
    assert found["vm(b)"] == pytest.approx(350, rel=0.005)
    assert found["mag(v(a)-v(b))"] == pytest.approx(
        700, rel=0.005
    )  # the halves are in opposite phase
    assert found["mag(v1#branch)"] == pytest.approx(0.1, rel=0.02)


@pytest.mark.parametrize("load", [8.0, 16.0])
def test_an_output_transformer_reflects_the_load(load):
    """5000 ohm with 8 ohm: the primary shows 250 + 0.6 x 625 ohm of wire besides."""
    cards = f"""{models.subcircuit("output_transformer")}
I1 0 p ac 1
X1 p 0 s 0 output_transformer zp=5000 zs=8 rp=250 rs=0.6 l=1000 leak=0.0001
RL s 0 {load}
Rp p 0 1e9
"""
    found = measure(cards, "ac lin 1 1000 1000\nprint vr(p)")
    assert found["vr(p)"] == pytest.approx(250 + (0.6 + load) * 625, rel=0.01)


def test_a_push_pull_primary_is_stated_from_plate_to_plate():
    cards = f"""{models.subcircuit("output_transformer_ct")}
I1 b a ac 1
X1 a ct b s 0 output_transformer_ct zp=8000 zs=8 rp=200 rs=0.5 l=1000 leak=0.0001
RL s 0 8
Rct ct 0 1
"""
    found = measure(cards, "ac lin 1 1000 1000\nprint vr(a,b)")
    assert found["vr(a,b)"] == pytest.approx(200 + 8.5 * 1000, rel=0.01)


def test_functions_and_subcircuits_agree():
    cards = wound.output_transformer(
        "T2",
        primary=("p", "0"),
        secondary=("s", "0"),
        primary_impedance_ohm=5000,
        load_ohm=8,
        primary_ohm=250,
        secondary_ohm=0.6,
        primary_H=10,
    )
    sub = models.subcircuit("output_transformer")
    rest = "\nI1 0 p ac 1\nRL s 0 8\nRp p 0 1e9\n"
    call = "X1 p 0 s 0 output_transformer zp=5000 zs=8 rp=250 rs=0.6 l=10"
    ask = "ac lin 1 1000 1000\nprint vr(p) vi(p)"
    one, other = measure(cards + rest, ask), measure(f"{sub}\n{call}{rest}", ask)
    assert one["vr(p)"] == pytest.approx(other["vr(p)"], rel=1e-5)
    assert one["vi(p)"] == pytest.approx(other["vi(p)"], rel=1e-5)


def test_a_choke_is_its_inductance_and_resistance():
    cards = "V1 a 0 dc 10 ac 1\n" + wound.choke(
        "L1", nodes=("a", "0"), inductance_H=10, resistance_ohm=250
    )
    found = measure(cards, "op\nprint i(v1)\nac lin 1 60 60\nprint mag(v1#branch)")
    assert found["i(v1)"] == pytest.approx(-0.04)
    assert found["mag(v1#branch)"] == pytest.approx(1 / (250**2 + 3769.9**2) ** 0.5, rel=1e-3)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (
            lambda: wound.choke("L1", nodes=("a", "0"), inductance_H=0, resistance_ohm=1),
            "L1: inductance and resistance must be positive",
        ),
        (
            lambda: wound.power_transformer(
                "T1",
                primary=Winding(nodes=("a", "0"), voltage_V=117, resistance_ohm=4),
                secondaries=[],
            ),
            "T1: a power transformer needs a secondary",
        ),
        (
            lambda: wound.power_transformer(
                "T1",
                primary=Winding(nodes=("a", "0"), voltage_V=117, resistance_ohm=400),
                secondaries=[Winding(nodes=("b", "0"), voltage_V=300, resistance_ohm=9, rated_A=1)],
            ),
            "leaves nothing at that load",
        ),
    ],
)
def test_nonsense_is_refused(make, words):
    with pytest.raises(ValueError, match=words):
        make()

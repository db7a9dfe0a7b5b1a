"""Rectifier models in complete supplies, against published and recalled operation."""

import re
import subprocess
from dataclasses import dataclass

import pytest

from stress.parts import models, types
from stress.parts.model import JUNCTIONS

pytestmark = pytest.mark.program


@dataclass(frozen=True)
class Supply:
    """A full-wave supply with capacitor input, and the direct voltage somebody printed."""

    tube: str
    volts: float  # rms a plate
    ohms: float  # a plate
    farad: float
    ampere: float
    hertz: float
    printed_V: float
    within: float
    source: str


SUPPLIES = [
    Supply("5Y3GT", 350, 50, 20e-6, 0.125, 50, 360, 0.02, "JJ 5Y3S sheet, quoted [read 2nd-hand]"),
    Supply("5Y3GT", 350, 50, 20e-6, 0.0625, 60, 390, 0.03, "RCA 5Y3-GT [memory M]"),
    Supply("5U4GB", 300, 21, 40e-6, 0.300, 60, 290, 0.025, "RCA, GE 5U4-GB [memory M]"),
    Supply("5U4GB", 550, 97, 40e-6, 0.162, 60, 630, 0.025, "RCA, GE 5U4-GB [memory M]"),
    Supply("GZ34", 300, 75, 60e-6, 0.250, 50, 330, 0.05, "Philips GZ34 [memory M]"),
    Supply("GZ34", 350, 100, 60e-6, 0.250, 50, 380, 0.05, "Philips GZ34 [memory M]"),
    Supply("GZ34", 450, 150, 60e-6, 0.250, 50, 480, 0.05, "Philips GZ34 [memory M]"),
    Supply("GZ34", 550, 200, 60e-6, 0.160, 50, 640, 0.05, "Philips GZ34 [memory M]"),
    Supply("EZ80", 250, 125, 50e-6, 0.090, 50, 265, 0.05, "Philips EZ80 [memory M]"),
    Supply("EZ80", 350, 300, 50e-6, 0.090, 50, 360, 0.05, "Philips EZ80 [memory M]"),
    Supply("6X4", 325, 525, 10e-6, 0.070, 60, 306, 0.02, "Child's law, 22 V at 70 mA [computed]"),
]


def measure(row: Supply, *, turned_on: bool = False) -> dict[str, float]:
    """Return mean voltage, ripple and peak current of a plate, settled."""
    load = "" if turned_on else f"I1 k 0 pwl(0 0 0.02 0 0.05 {row.ampere})"
    deck = f"""* supply
{models.subcircuit(row.tube)}
V1 a 0 sin(0 {row.volts * 2**0.5} {row.hertz})
V2 b 0 sin(0 {-row.volts * 2**0.5} {row.hertz})
Ra a a1 {row.ohms}
Rb b b1 {row.ohms}
X1 a1 b1 k {row.tube}
C1 k 0 {row.farad} ic=0
Rl k 0 10meg
{load}
.options method=gear reltol=1e-4
.control
tran 50u 0.6 0 50u uic
meas tran mean avg v(k) from=0.5 to=0.6
meas tran pp pp v(k) from=0.5 to=0.6
let plate = (v(a)-v(a1))/{row.ohms}
meas tran peak max plate from=0.5 to=0.6
.endc
.end
"""
    done = subprocess.run(
        ["ngspice", "-b"], input=deck, capture_output=True, text=True, timeout=60, check=False
    )
    found = re.findall(r"^(mean|pp|peak)\s+=\s+(\S+)", done.stdout, re.MULTILINE)
    return {name: float(value) for name, value in found}


@pytest.mark.parametrize("row", SUPPLIES, ids=lambda r: f"{r.tube}-{r.volts}-{r.ampere}")
def test_supply_voltage_is_as_printed(row):
    assert measure(row)["mean"] == pytest.approx(row.printed_V, rel=row.within), row.source


def test_ripple_and_peak_current_of_the_first_supply():
    """Own integration of the same circuit at 60 Hz: 30.3 V p-p, 0.433 A a plate [computed]."""
    row = Supply("5Y3GT", 350, 50, 20e-6, 0.125, 60, 357.9, 0.01, "computed")
    found = measure(row)
    assert found["mean"] == pytest.approx(357.9, rel=0.01)
    assert found["pp"] == pytest.approx(30.3, rel=0.03)
    assert found["peak"] == pytest.approx(0.433, rel=0.03)


@pytest.mark.parametrize(("volts", "expected"), [(325, 459.6), (350, 495.0), (360, 509.1)])
def test_without_load_the_reservoir_takes_the_crest(volts, expected):
    """Square root of two times the plate voltage [computed].

    Child's law creeps up to it: after half a second 1.1 % are still missing.
    """
    row = Supply("5Y3GT", volts, 50, 20e-6, 0.0, 60, expected, 0.015, "computed")
    assert 0.985 * expected < measure(row, turned_on=True)["mean"] <= expected


def test_every_rectifier_drops_what_is_printed():
    """At the current printed beside it, within 10 % (they are fitted to it: within 1 %)."""
    entries = [e for e in models.modelled() if e.family == "rectifier" or e.family in JUNCTIONS]
    deck, shown = ["* drops"], []
    for number, entry in enumerate(entries):
        assert entry.drop_V is not None, entry.name
        nodes = [f"p{number}" if pin in ("plate", "anode") else "0" for pin in entry.pins]
        deck.append(models.subcircuit(entry.name))
        deck.append(f"I{number} 0 p{number} {entry.drop_A}")
        deck.append(f"X{number} {' '.join(nodes)} {entry.name.replace(' ', '_')}")
        shown.append(f"print v(p{number})")
    deck += [".control", "op", *shown, ".endc", ".end", ""]
    done = subprocess.run(
        ["ngspice", "-b"],
        input="\n".join(deck),
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )
    found = dict(re.findall(r"^v\(p(\d+)\) = (\S+)", done.stdout, re.MULTILINE))
    assert len(found) == len(entries) >= 45
    for number, entry in enumerate(entries):
        assert float(found[str(number)]) == pytest.approx(entry.drop_V, rel=0.02), entry.name


@pytest.mark.parametrize(("share", "low", "high"), [(0.1, 14.0, 15.0), (4.0, 15.0, 16.5)])
def test_a_mercury_arc_hardly_changes_its_drop(share, low, high):
    """RCA 83 7-63: about 15 V, one figure for all currents (public transcription) [read]."""
    entry = types.find("83")
    deck = f"""* arc
{models.subcircuit("83")}
I1 0 p {share * entry.drop_A}
X1 p 0 0 83
.control
op
print v(p)
.endc
.end
"""
    done = subprocess.run(
        ["ngspice", "-b"], input=deck, capture_output=True, text=True, timeout=60, check=False
    )
    found = re.search(r"^v\(p\) = (\S+)", done.stdout, re.MULTILINE)
    assert low < float(found[1]) < high


def test_a_diode_without_model_gets_a_card():
    card = models.device_model("1n4007")
    assert card.startswith(".model 1n4007 d(is=")
    assert models.device_model("6V6GT") is None
    assert models.device_model("E250C50") is None
    deck = f"* d\n{card}\nI1 0 p 1\nD1 p 0 1n4007\n.control\nop\nprint v(p)\n.endc\n.end\n"
    done = subprocess.run(
        ["ngspice", "-b"], input=deck, capture_output=True, text=True, timeout=60, check=False
    )
    found = re.search(r"^v\(p\) = (\S+)", done.stdout, re.MULTILINE)
    assert float(found[1]) == pytest.approx(0.93, rel=0.01)

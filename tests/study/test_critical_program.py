"""Critical leakage against brute-force bisection with the plain ngspice program.

A driver and a cathode-biased output stage on a direct supply, so that the program needs only
its operating point.
"""

import subprocess
from math import sqrt

import pytest

from stress.circuit.build import build
from stress.engine.pool import Pool
from stress.netlist.read import read_text
from stress.parts.models import subcircuit
from stress.parts.read_sheet import read_text as read_sheet
from stress.study.leakage import leakage
from stress.study.working import work

STAGE = """Driver and output stage on a battery
Vb b 0 265
R1 b p3 220k
XV3 p3 g3 0 0 0 6SQ7
Rg3 g3 0 10Meg
C1 p3 g4 0.02u
Rg4 g4 0 470k
Rop b p4 280
XV4 p4 b g4 k4 6V6GT
Rk4 k4 0 270
C2 k4 0 20u
"""
SHEET = """[tubes.XV4]
type = "6V6GT"
limits = {{ plate_dissipation = "{watt} W", screen_dissipation = "9 W" }}
[capacitors.C1]
style = "paper"
insulation = "10 Gohm"
[capacitors.C2]
style = "aluminium"
insulation = "10 Gohm"
"""


def plate_W(ohm, folder):
    """Return the plate dissipation of XV4 by the program, with a leak across C1."""
    text = STAGE.replace("XV4 p4 b", "Vplate p4 p4m 0\nXV4 p4m b")
    models = "\n".join(subcircuit(name) for name in ("6SQ7", "6V6GT"))
    wanted = "op\nlet watt = (v(p4)-v(k4))*i(vplate)\nprint watt\n"
    deck = f"{text}Rleak p3 g4 {ohm!r}\n{models}\n.control\n{wanted}.endc\n.end\n"
    path = folder / "stage.cir"
    path.write_text(deck, encoding="utf-8")
    done = subprocess.run(
        ["ngspice", "-b", path], cwd=folder, capture_output=True, text=True, check=False, timeout=30
    )
    line = next(line for line in done.stdout.splitlines() if line.startswith("watt ="))
    return float(line.split("=")[1])


def bisected(watt, folder):
    """Return the largest leakage resistance at which the limit is passed, to 1 %."""
    low, high = 1e5, 1e9
    assert plate_W(low, folder) > watt > plate_W(high, folder)
    while high / low > 1.01:
        middle = sqrt(low * high)
        low, high = (middle, high) if plate_W(middle, folder) > watt else (low, middle)
    return low


@pytest.mark.ngspice
@pytest.mark.program
@pytest.mark.parametrize("watt", [11.0, 11.6])
def test_critical_leakage_equals_bisection_with_the_program(watt, tmp_path):
    netlist = read_text(STAGE, path="stage.cir", built_in=subcircuit)
    circuit = build(netlist, read_sheet(SHEET.format(watt=watt), path="stage.toml"))

    with Pool(jobs=1) as pool:
        healthy = work(circuit, solver=pool)
        found = leakage(circuit, circuit.positions[:1], healthy=healthy, solver=pool)["C1"]

    assert found.governing.victim.part == "XV4"
    assert found.governing.victim.quantity == "plate_W"
    # 3 %: 1 % of each search, and what the cathode's insulation and gmin differ by.
    assert found.governing.critical_ohm == pytest.approx(bisected(watt, tmp_path), rel=0.03)

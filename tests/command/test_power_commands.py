import re

import pytest
from click.testing import CliRunner

from stress.command.discharge import discharge
from stress.command.powerup import powerup

SUPPLY = """supply of a lamp amplifier
Vline a 0 SIN(0 170 60)
Rs a s 10
D1 s b RECT
C1 b 0 40u
Rf b c 470
C2 c 0 20u
Rl c 0 10k
.model RECT D(IS=1n RS=1)
.end
"""
SHEET = """
[equipment]
name = "Supply"
[line]
source = "Vline"
nominal = "120 V"
high = "126 V"
[capacitors.C1]
style = "aluminium"
rated = "250 V"
[capacitors.C2]
style = "aluminium"
rated = "250 V"
[resistors.Rf]
rated = "2 W"
"""


@pytest.fixture
def supply(tmp_path):
    path = tmp_path / "supply.cir"
    path.write_text(SUPPLY)
    path.with_suffix(".toml").write_text(SHEET)
    return path


@pytest.mark.ngspice
def test_discharge_prints_what_is_held_and_what_to_do(supply):
    result = CliRunner().invoke(discharge, [str(supply), "--jobs", "1"])
    assert result.exit_code == 0, result.output
    words = " ".join(result.output.split())
    assert "Try the meter on a known source" in words
    assert "Measure again after ten minutes" in words
    assert "Simulated, switched off" in words
    # the peak of the line, 178 V, less what the charging pulse drops
    assert re.search(r"C1 17[0-8] V high", words)


@pytest.mark.ngspice
def test_powerup_prints_the_plan(supply, tmp_path):
    readings = tmp_path / "readings.csv"
    readings.write_text("part,capacitance,esr,leakage,at,minutes\nC2,21 uF,,,,\n")
    result = CliRunner().invoke(
        powerup, [str(supply), str(readings), "--jobs", "2", "--steps", "30,100"]
    )
    assert result.exit_code == 0, result.output
    words = " ".join(result.output.split())
    assert "Method: slow ramp" in words
    assert "D1: a dry rectifier" in words
    assert "Isolation transformer first" in words
    assert "30 %: 36 V" in words
    assert "105 %: 126 V" in words
    assert "stop" in words
    assert "Tell-tale readings" in words
    assert "High voltage kills" in words


@pytest.mark.parametrize("steps", ["0,50", "fifty", "120"])
def test_steps_that_are_none_are_asked_back(supply, steps):
    result = CliRunner().invoke(powerup, [str(supply), "--steps", steps])
    assert result.exit_code == 2
    assert "20,40,60" in result.output


@pytest.mark.parametrize("command", [discharge, powerup])
def test_missing_file_is_a_message(command, tmp_path):
    result = CliRunner().invoke(command, [str(tmp_path / "none.cir")])
    assert result.exit_code == 2
    assert "none.cir" in result.output
    assert "Traceback" not in result.output

"""`capstress bench`: form, limits, verdicts and the equipment as measured."""

import pytest
from click.testing import CliRunner

from stress.command.main import main

NETLIST = """Landing-stage bell, half-wave supply
Vline a 0 SIN(0 165 60)
R0 a b 220
D1 b c DR
C1 c 0 4u
R1 c d 10k
C2 d 0 0.05u
R2 d 0 100k
.model DR D(IS=1e-9 N=2 RS=40 CJO=10p)
.end
"""
SHEET = """[line]
source = "Vline"
nominal = "117 V"
high = "126 V"
[capacitors.C1]
style = "aluminium"
rated = "250 V"
[capacitors.C2]
style = "paper"
rated = "400 V"
[resistors.R1]
rated = "3 W"
[resistors.R2]
rated = "2 W"
"""
HEADER = (
    "part,capacitance,esr,leakage,at,minutes,temperature,esr_frequency,resistance,inductance,state"
)


@pytest.fixture
def bell(tmp_path):
    (tmp_path / "bell.cir").write_text(NETLIST)
    (tmp_path / "bell.toml").write_text(SHEET)
    return tmp_path / "bell.cir"


def run(*arguments):
    return CliRunner().invoke(main, ["bench", *map(str, arguments)])


def test_an_empty_form_needs_no_simulation(bell):
    ran = run(bell, "--form")
    assert ran.exit_code == 0
    lines = ran.stdout.splitlines()
    assert lines[0] == HEADER
    assert [line.rstrip(",") for line in lines[1:]] == ["C1", "C2", "R0", "R1", "R2"]


def test_a_form_that_is_left_empty_has_nothing_wrong(bell):
    from stress.parts.reading import read_text

    taken = read_text(run(bell, "--form").stdout, file="form.csv")
    assert (taken.rows, taken.problems) == ((), ())


@pytest.mark.ngspice
def test_limits(bell):
    ran = run(bell, "--jobs", "1")
    assert ran.exit_code == 0, ran.output
    assert "Discharge every part" in ran.stdout
    # The crest of 126 V less the drop of the diode.
    assert "leakage: at 172 V not more than" in ran.stdout
    assert "capacitance: 2.8 µF to 6 µF" in ran.stdout


@pytest.mark.ngspice
def test_readings_are_judged_and_put_in_place(bell, tmp_path):
    taken = tmp_path / "readings.csv"
    taken.write_text(
        f"{HEADER}\n"
        "C2,0.051 uF,,0.5 mA,30 V,2,,,,,\n"
        "R1,,,,,,,,13 kohm,,\n"
        "C9,1 uF,,,,,,,,,\n"
        "C1,,,1 uA,300 V,2,,,,,\n"
    )
    ran = run(bell, taken, "--jobs", "1")
    assert ran.exit_code == 2  # two rows could not be used, and the others are judged
    assert "C2   replace:" in ran.stdout
    assert "R1 reads 13 kΩ, drawn 10 kΩ (+30%)" in ran.stdout
    assert "The equipment as measured" in ran.stdout
    assert 'readings.csv:4:1: the netlist has no part "C9"' in ran.stderr
    assert "readings.csv:5:11: C1: tested at 300 V, above its rating of 250 V" in ran.stderr


def test_error_missing_readings(bell):
    ran = run(bell, bell.parent / "none.csv")
    assert ran.exit_code == 2
    assert "the readings cannot be read" in ran.stderr
    assert "Traceback" not in ran.output


def test_error_a_table_without_parts(bell, tmp_path):
    taken = tmp_path / "readings.csv"
    taken.write_text("capacitance\n1 uF\n")
    ran = run(bell, taken)
    assert ran.exit_code == 2
    assert 'there is no column "part"' in ran.stderr

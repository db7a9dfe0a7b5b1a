"""`capstress check`: what it lists, and its exit status."""

import pytest
from click.testing import CliRunner

from stress.command.check import check

SET = """Keeper's set
Vl a 0 SIN(0 165 60)
D1 a b DM
C1 b 0 10uF/450V
R1 b c 1k
C2 c 0 20u
XU1 p g k TRI
Rp c p 100k
Rg g 0 1meg
Rk k 0 1k
.model DM D(IS=1n)
.subckt TRI P G K
B1 P K I=1m*V(G,K)
.ends
.tran 1m 1
.end
"""


@pytest.fixture
def run(tmp_path):
    def go(netlist, sheet=None, *options, width=80):
        path = tmp_path / "set.cir"
        path.write_text(netlist, encoding="utf-8")
        if sheet is not None:
            path.with_suffix(".toml").write_text(sheet, encoding="utf-8")
        return CliRunner(env={"COLUMNS": str(width)}).invoke(check, [str(path), *options])

    return go


def test_a_sound_equipment(run):
    result = run(SET)

    assert result.exit_code == 0, result.output
    for words in (
        "Capacitors: 2 positions",
        "reservoir, supply b to ground, fed by D1",
        "10 µF, 450 V",
        "TRI",
        "plate p, grid g, cathode k; pins by pin names",
        "line: Vl; 117 V nominal, 128 V high",
        "period: 16.667 ms",
        "connected to the line: 0, a, b, c",
        "Resistors: 4",
        ".tran",
        "ground (B-) is connected to the line",
        "Nothing stands in the way of a simulation.",
    ):
        assert words in result.output


@pytest.mark.parametrize("width", [40, 80, 132])
def test_lines_fit_and_are_clean(run, width):
    result = run(SET, width=width)

    assert "\x1b" not in result.output
    long = [line for line in result.output.splitlines() if len(line) > width]
    assert [line for line in long if "set.cir" not in line] == []  # a path is never broken


def test_errors_of_the_sheet_are_shown_after_the_inventory(run):
    result = run(SET, "[capacitors.C9]\n[resistors.R1]\nrated = '2 kV'\n")

    assert result.exit_code == 2
    assert "Capacitors: 2 positions" in result.output
    assert "set.toml:3:" in result.output
    assert "obstacle" in result.output


def test_a_sheet_that_names_what_is_missing(run):
    result = run(SET, "[capacitors.C9]\n")

    assert result.exit_code == 2
    assert "no such capacitor" in result.output
    assert "^~~" in result.output
    assert "hint: did you mean C" in result.output


def test_inventory_where_a_model_is_missing(run):
    result = run(SET.replace(".subckt TRI", ".subckt OTHER"))

    assert result.exit_code == 2
    assert "Capacitors: 2 positions" in result.output
    assert "reservoir" in result.output
    assert "1 obstacle to a simulation:" in result.output
    assert "TRI" in result.output.partition("obstacle")[2]
    assert "^~~" in result.output


def test_five_mistakes_give_five_carets(run):
    wrong = SET.replace("R1 b c 1k", "R1 b c 1q\nR2 b\nL1 b c 3zz\nK1 L1 0.5\nS1 a b")
    result = run(wrong)

    assert result.exit_code == 2
    assert result.output.count("^") == 5
    assert "Traceback" not in result.output


def test_no_capacitors(run):
    result = run("t\nV1 a 0 1\nR1 a 0 1k\n.end\n")

    assert result.exit_code == 2
    assert "the netlist has no capacitors" in result.output


def test_a_file_that_is_not_there(tmp_path):
    result = CliRunner().invoke(check, [str(tmp_path / "none.cir")])

    assert result.exit_code == 2
    assert "none.cir" in result.output
    assert result.exception is None or isinstance(result.exception, SystemExit)


def test_control_characters_of_a_name_do_not_reach_the_terminal(run):
    result = run(SET.replace("Keeper's set", "Keeper's \x1b[31mset"))

    assert "\x1b" not in result.output

"""`capstress review` as a user meets it: exit status, files, and messages for bad input."""

import json

import pytest
from click.testing import CliRunner

from stress.command.main import main

SUPPLY = """Half-wave supply with a coupling capacitor
Vline l 0 SIN(0 165 60)
Rs l a 20
D1 a b DR
.model DR D(IS=1e-9 N=2 RS=5)
C1 b 0 40u
R1 b p 100k
C2 p g 0.02u
R2 g 0 470k
RL b 0 5k
.end
"""
SHEET = """[equipment]
name = "Bench supply"
[line]
source = "Vline"
nominal = "117 V"
high = "126 V"
[capacitors.C1]
style = "aluminium"
rated = "200 V"
[capacitors.C2]
style = "paper"
rated = "400 V"
[resistors.R2]
rated = "5 mW"
"""


@pytest.fixture
def supply(tmp_path):
    (tmp_path / "supply.cir").write_text(SUPPLY, encoding="utf-8")
    (tmp_path / "supply.toml").write_text(SHEET, encoding="utf-8")
    return tmp_path / "supply.cir"


def run(*arguments):
    return CliRunner().invoke(main, [str(argument) for argument in arguments])


@pytest.mark.ngspice
def test_a_review_says_what_to_do_and_writes_its_numbers(supply, tmp_path):
    done = run("review", supply, "--json", tmp_path / "out.json", "--csv", tmp_path / "tables")

    assert done.exit_code == 0, done.output
    assert "Bench supply" in done.output
    # 300 mW·… closed form: 5 mW in 470 kΩ is 103 µA, so the leak is what is left of B+ over that.
    found = json.loads((tmp_path / "out.json").read_text(encoding="utf-8"))
    positions = {position["name"]: position for position in found["positions"]}
    supply_V = positions["C1"]["working"]["high"]["dc_V"]
    amps = (5e-3 / 470e3) ** 0.5
    assert positions["C2"]["leakage"]["critical_ohm"] == pytest.approx(
        supply_V / amps - 570e3, rel=0.03
    )
    assert positions["C2"]["leakage"]["victim"] == "R2"
    assert positions["C2"]["risk"]["severity"] == "replace-before-power"
    assert found["run"]["unsolved"] == 0
    assert list((tmp_path / "tables").glob("*.csv"))


@pytest.mark.ngspice
def test_only_and_fail_on(supply):
    done = run("review", supply, "--only", "c2", "--fail-on", "test-before-power")

    assert done.exit_code == 1
    assert "C2" in done.output


@pytest.mark.ngspice
def test_the_json_does_not_depend_on_the_number_of_workers(supply, tmp_path):
    found = []
    for jobs in (1, 2):
        run("review", supply, "--jobs", jobs, "--json", tmp_path / f"{jobs}.json")
        text = json.loads((tmp_path / f"{jobs}.json").read_text(encoding="utf-8"))
        text["run"].pop("wall_s")
        found.append(text)

    assert found[0] == found[1]


@pytest.mark.ngspice
def test_a_known_fault_is_in_every_case(supply, tmp_path):
    done = run("review", supply, "--also", "C2 leaky 1 Meg", "--json", tmp_path / "out.json")

    assert done.exit_code == 0, done.output
    found = json.loads((tmp_path / "out.json").read_text(encoding="utf-8"))
    c2 = next(p for p in found["positions"] if p["name"] == "C2")
    b_V = next(p for p in found["positions"] if p["name"] == "C1")["working"]["nominal"]["dc_V"]
    # Divider: 1 MΩ between 100 kΩ and 470 kΩ.
    assert c2["working"]["nominal"]["dc_V"] == pytest.approx(b_V * 1.0 / 1.57, rel=1e-3)


@pytest.mark.ngspice
def test_pairs_are_counted_and_what_is_on_offer_is_named(supply, tmp_path):
    sheet = supply.with_suffix(".toml")
    text = sheet.read_text(encoding="utf-8").replace('"117 V"', '"110 V"')
    sheet.write_text(text, encoding="utf-8")
    out, page = tmp_path / "out.json", tmp_path / "out.html"
    done = run("review", supply, "--pairs", "3", "--json", out, "--html", page)

    assert done.exit_code == 0, done.output
    found = json.loads(out.read_text(encoding="utf-8"))
    assert (found["pairs"]["asked"], found["pairs"]["tried"]) == (3, 3)
    assert found["pairs"]["unsolved"] == 0
    assert [use["name"] for use in found["on_offer"]] == ["todays-line"]
    printed = " ".join(done.output.split())
    assert "3 of the" in printed
    assert "on offer with --condition: todays-line" in printed
    assert "two faults at once" in page.read_text(encoding="utf-8")
    assert "todays-line" in page.read_text(encoding="utf-8")


@pytest.mark.ngspice
def test_a_condition_is_run_when_asked_for(supply, tmp_path):
    sheet = supply.with_suffix(".toml")
    text = sheet.read_text(encoding="utf-8").replace('"117 V"', '"110 V"')
    sheet.write_text(text, encoding="utf-8")
    out = tmp_path / "out.json"
    done = run("review", supply, "--condition", "todays-line", "--only", "C1", "--json", out)

    assert done.exit_code == 0, done.output
    found = json.loads(out.read_text(encoding="utf-8"))
    lines = {each["name"]: each["line_V"] for each in found["conditions"]}
    assert (lines["todays-line"], lines["todays-line high"]) == (120.0, 126.0)
    assert found["on_offer"] == []
    assert found["positions"][0]["working"]["todays-line"]["dc_V"] > 0.0


@pytest.mark.parametrize(
    ("netlist", "sheet", "said"),
    [
        (None, None, ["does not exist"]),
        (b"\x7fELF\x00\x01\x02\x00" * 40, None, ["binary"]),
        ("prose\nand no card at all\n", None, []),
        ("no capacitors\nV1 a 0 1\nR1 a 0 1k\n.end\n", None, ["capacitor"]),
        ("bad value\nV1 a 0 10\nR1 a b 1x7q\nC1 b 0 1u\n.end\n", None, ["bad.cir:3:", "^"]),
        ("no model\nV1 a 0 10\nD1 a b DX\nC1 b 0 1u\nR1 b 0 1k\n.end\n", None, ["bad.cir:3:"]),
        (
            "no block\nV1 a 0 10\nX1 a b NOSUCH\nC1 b 0 1u\nR1 b 0 1k\n.end\n",
            None,
            ["bad.cir:3:", "NOSUCH"],
        ),
        (
            "loop\n.subckt A x\nX1 x A\n.ends\nX1 b A\nV1 b 0 1\nC1 b 0 1u\n.end\n",
            None,
            ["bad.cir:"],
        ),
        (SUPPLY, '[capacitors.C9]\nrated = "400 V"\n', ["bad.toml:1:", "C9"]),
        (SUPPLY, '[capacitors.C1]\nrated = "40 uF"\n', ["bad.toml:2:", "^"]),
        (SUPPLY, "[capacitors.C1\n", ["bad.toml:1:"]),
    ],
    ids=[
        "missing",
        "binary",
        "prose",
        "no-capacitor",
        "value",
        "model",
        "subcircuit",
        "recursion",
        "unknown-part",
        "wrong-unit",
        "broken-toml",
    ],
)
def test_error_bad_input_gets_a_message_and_status_2(tmp_path, netlist, sheet, said):
    path = tmp_path / "bad.cir"
    if netlist is not None:
        path.write_bytes(netlist if isinstance(netlist, bytes) else netlist.encode())
    if sheet is not None:
        path.with_suffix(".toml").write_text(sheet, encoding="utf-8")

    done = run("review", path)

    assert done.exit_code == 2, done.output
    assert done.output.strip()
    assert "Traceback" not in done.output
    for words in said:
        assert words.lower() in done.output.lower()


@pytest.mark.parametrize(
    "options",
    [
        ("--only", "C7"),
        ("--policy", "nobody"),
        ("--high", "many"),
        ("--also", "C2 leaky"),
        ("--condition", "silicon"),
    ],
)
def test_error_options(supply, options):
    done = run("review", supply, *options)

    assert done.exit_code == 2
    assert "Traceback" not in done.output


def test_help_answers_for_every_command():
    listed = run("--help")
    assert listed.exit_code == 0
    for command in ("review", "check", "sheet", "leak", "fail", "bench", "part", "engine"):
        assert command in listed.output
        assert run(command, "--help").exit_code == 0

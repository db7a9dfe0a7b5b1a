"""`capstress part`: entries with sources, near matches, users' own tables, exit status."""

import pytest
from click.testing import CliRunner

from stress.command.main import main
from stress.parts import types


def run(*arguments: str):
    return CliRunner().invoke(main, ["part", *arguments])


def test_an_entry_shows_its_limits_with_their_sources():
    result = run("6v6gt")
    assert result.exit_code == 0
    lines = result.output.splitlines()
    assert lines[0].startswith("6V6GT: beam tube; also 6V6, 6V6G")
    assert "limits (design-centre)" in lines
    (plate,) = [line for line in lines if line.startswith("  plate dissipation")]
    assert plate.split()[2:4] == ["12", "W"]
    assert "GE ET-T914" in plate
    assert "built-in model, pins in this order: plate screen grid cathode" in lines
    assert any("largest error against the lines above: plate current" in line for line in lines)


def test_a_rectifier_shows_what_its_supply_must_keep_to():
    output = run("80").output
    assert output.startswith("5Y3GT: rectifier")
    for words, value in (
        ("peak inverse voltage", "1400 V"),
        ("largest first capacitor", "20 µF"),
        ("smallest supply impedance", "50 Ω"),
        ("drop at 125 mA a plate", "50 V"),
    ):
        (line,) = [row for row in output.splitlines() if row.startswith(f"  {words}")]
        assert value in line


@pytest.mark.parametrize("entry", types.all_types(), ids=lambda e: e.name)
def test_every_type_answers(entry):
    result = run(entry.name)
    assert result.exit_code == 0
    assert result.output.startswith(f"{entry.name}: {entry.family}")


def test_an_unknown_type_gets_near_matches_and_status_2():
    result = run("6V7GT")
    assert result.exit_code == 2
    assert result.stderr.startswith("no type 6V7GT in the table; near it: ")
    assert "6V6GT" in result.stderr


def test_nothing_near_is_said_plainly():
    result = run("§§§")
    assert result.exit_code == 2
    assert result.stderr == "no type §§§ in the table\n"


def test_the_model_can_be_printed():
    result = run("ECC83", "--model")
    assert result.exit_code == 0
    assert result.output.startswith(".subckt ECC83 plate grid cathode emission=1\n")
    none = run("2N3055", "--model")
    assert none.exit_code == 2
    assert none.stderr == "2N3055 has no built-in model\n"


def test_a_users_own_table_is_read_and_its_faults_are_shown(tmp_path):
    own = tmp_path / "own.toml"
    own.write_text(
        '[6Q99]\nlike = "6V6GT"\nsource = "label [read]"\nplate_dissipation = "9 W"\n',
        encoding="utf-8",
    )
    result = run("6q99", "--types", str(own))
    assert result.exit_code == 0
    assert "9 W   label" in result.output
    own.write_text('[6Q99]\nfamily = "triode"\nplate_voltage = "9 kg"\n', encoding="utf-8")
    result = run("6q99", "--types", str(own))
    assert result.exit_code == 2
    assert "own.toml:3:17: " in result.stderr


def test_without_a_type_all_are_listed():
    result = run()
    assert result.exit_code == 0
    (triodes,) = [row for row in result.output.splitlines() if row.startswith("double triode: ")]
    assert "12AX7" in triodes.split(": ")[1].split(", ")


def test_a_transformer_is_told_by_its_parameters():
    result = run("power_transformer_ct")
    assert result.exit_code == 0
    call = "XT1 p1 p2 s1 ct s2 power_transformer_ct vp=117 vs=350 rp=5 rs=60 im=0.1 f=60 k=0.999"
    assert call in result.output
    assert "vs    secondary voltage, rms, unloaded; of each half" in result.output
    text = run("Choke", "--model").output
    assert text.startswith(".subckt Choke in out l=10 r=200\n")

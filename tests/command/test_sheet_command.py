"""`capstress sheet`: a part sheet on the screen or in a file."""

from click.testing import CliRunner

from stress.command.sheet import sheet
from stress.parts import read_sheet

NETLIST = "set\nV1 b 0 250\nR1 b c 1k\nC1 c 0 20u\n.end\n"


def test_it_is_printed(tmp_path):
    path = tmp_path / "set.cir"
    path.write_text(NETLIST)
    result = CliRunner().invoke(sheet, [str(path)])

    assert result.exit_code == 0, result.output
    assert read_sheet.read_text(result.output, path="x").capacitors["c1"].style == "aluminium"


def test_it_is_written_once(tmp_path):
    path, out = tmp_path / "set.cir", tmp_path / "set.toml"
    path.write_text(NETLIST)

    first = CliRunner().invoke(sheet, [str(path), "-o", str(out)])
    written = out.read_text(encoding="utf-8")
    second = CliRunner().invoke(sheet, [str(path), "-o", str(out)])

    assert (first.exit_code, second.exit_code) == (0, 2)
    assert "1 capacitors" not in first.output
    assert "is there already" in second.output
    assert out.read_text(encoding="utf-8") == written


def test_a_bad_netlist_is_told(tmp_path):
    path = tmp_path / "set.cir"
    path.write_text("set\nR1 a\n.end\n")
    result = CliRunner().invoke(sheet, [str(path)])

    assert result.exit_code == 2
    assert "set.cir:2:" in result.output

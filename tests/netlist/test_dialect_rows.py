"""Every construct of the table in stress/netlist/dialect.md does what the table says."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

import pytest

from stress.netlist.flat import Netlist
from stress.netlist.read import read
from stress.netlist.write import write

FOLDER = Path(__file__).parent
OUTCOMES = {"read", "ignored", "refused"}


@dataclass
class Row:
    number: int
    construct: str
    outcome: str
    body: list[str] = field(default_factory=list)
    files: dict[str, list[str]] = field(default_factory=dict)
    encoding: str = "utf-8"
    expected: dict[str, list[str]] = field(default_factory=dict)


def rows() -> list[Row]:
    """Read dialect_rows.txt; its form is told at its head."""
    found: list[Row] = []
    into: list[str] | None = None
    text = (FOLDER / "dialect_rows.txt").read_text(encoding="utf-8")
    for line in text.split("\n"):
        if line.startswith("== ") and line[3].isdigit():
            head, outcome = line[3:].rsplit(" | ", 1)
            number, construct = head.split(" ", 1)
            found.append(Row(int(number), construct, outcome))
            into = None
        elif not found:
            continue
        elif line.startswith("@file "):
            into = found[-1].files.setdefault(line[6:], [])
        elif line == "@":
            into = None
        elif line.startswith("@latin-1"):
            found[-1].encoding = "latin-1"
        elif into is not None:
            into.append(line)
        elif line[:2] in ("> ", "% ", "X ", "? ", "~ ", "! "):
            found[-1].expected.setdefault(line[0], []).append(line[2:])
        else:
            found[-1].body.append(line)
    return found


ROWS = rows()


def told(netlist: Netlist) -> dict[str, list[str]]:
    """What was read, in the form of the table."""
    flat = write(netlist).split("\n")[2:-2]
    models = [line for line in flat if line.startswith(".model")]
    found = {
        ">": [line for line in flat if line not in models],
        "%": models,
        "X": [
            f"{x.name} {x.subcircuit} "
            + " ".join(f"{pin}={node}" for pin, node in zip(x.pins, x.nodes, strict=True))
            for x in netlist.instances
            if x.pins
        ],
        "?": sorted({notice.rule for notice in netlist.notices}),
        "~": [ignored.what for ignored in netlist.ignored],
        "!": [obstacle.message for obstacle in netlist.obstacles],
    }
    return {kind: lines for kind, lines in found.items() if lines}


@pytest.mark.parametrize("row", ROWS, ids=lambda row: str(row.number))
def test_row(row: Row, tmp_path: Path):
    for name, lines in row.files.items():
        place = tmp_path / name
        place.parent.mkdir(exist_ok=True)
        place.write_text("\n".join(lines) + "\n", encoding="utf-8")
    netlist_file = tmp_path / "set.cir"
    netlist_file.write_bytes(("title\n" + "\n".join(row.body) + "\n").encode(row.encoding))

    netlist = read(netlist_file)

    assert told(netlist) == row.expected
    assert not (tmp_path / "executed").exists()


def test_rows_are_complete():
    """DIALECT: 136 constructs were counted; each has a row, and each row demands something."""
    assert [row.number for row in ROWS] == list(range(1, 137))
    for row in ROWS:
        assert row.outcome in OUTCOMES
        assert row.expected
        assert ("!" in row.expected) == (row.outcome == "refused"), row.number
        assert ("~" in row.expected) or row.outcome != "ignored", row.number


def test_table_names_every_row_and_its_test():
    text = (FOLDER.parents[1] / "stress/netlist/dialect.md").read_text(encoding="utf-8")
    listed = [
        [cell.strip() for cell in line.strip().strip("|").split(" | ")]
        for line in text.split("\n")
        if line.startswith("| ") and line[2].isdigit()
    ]
    assert len(listed) == len(ROWS)
    for row, cells in zip(ROWS, listed, strict=True):
        assert cells[0] == str(row.number)
        assert cells[1] == row.construct.replace("|", "\\|")
        assert cells[2] == row.outcome
        assert cells[-1] == f"`test_dialect_rows.py::test_row[{row.number}]`"
        if row.outcome == "refused":
            assert f'"{row.expected["!"][0]}"' in cells[3]

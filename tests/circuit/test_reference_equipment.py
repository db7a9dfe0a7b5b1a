"""The reference equipments: every position has a role, and the graph agrees with the sheets."""

from pathlib import Path

import pytest

from stress.circuit.build import anatomy, build
from stress.circuit.circuit import Kind, Role
from stress.circuit.hazards import expected_plus
from stress.netlist.read import read
from stress.parts import read_sheet
from stress.parts.models import subcircuit

NETLISTS = sorted((Path(__file__).parents[2] / "netlists").glob("*.cir"))


@pytest.fixture(params=NETLISTS, ids=lambda path: path.stem, scope="module")
def equipment(request):
    netlist = read(request.param, built_in=subcircuit)
    return netlist, read_sheet.read(request.param.with_suffix(".toml"))


def test_there_are_some():
    assert len(NETLISTS) >= 2


def test_every_position_has_a_role(equipment):
    circuit = build(*equipment)

    unknown = [p.name for p in circuit.positions if p.role is Role.UNKNOWN]
    assert unknown == []
    assert circuit.period_s is not None
    for part in circuit.parts:
        if part.kind in (Kind.TUBE, Kind.RECTIFIER):
            assert part.type, part.name
            assert "plate" in part.pins, part.name
            assert "cathode" in part.pins, part.name


def test_the_graph_agrees_with_the_marked_plus_sides(equipment):
    netlist, sheet = equipment
    s = anatomy(netlist, sheet).surroundings

    for position in build(netlist, sheet).positions:
        entry = sheet.capacitors.get(position.name.lower())
        expected = expected_plus(s, position.nodes)
        if entry is not None and entry.plus is not None and expected is not None:
            assert position.nodes[expected] == entry.plus.lower(), position.name

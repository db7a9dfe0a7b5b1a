"""Device or block, and which pins a device has."""

import pytest

from stress.circuit.circuit import Kind

FEED = "V1 b 0 250\nRp b p 100k\nRk k 0 1k\nRg g 0 1meg\nC9 k 0 25u\n"


@pytest.mark.parametrize(
    ("body", "device"),
    [
        ("B1 1 3 I=V(2,3)\nC1 2 3 2p", True),  # a model and its picofarads
        ("B1 1 3 I=V(2,3)\nC1 2 3 1n", False),  # 1 nF is a part
        ("G1 1 3 2 3 1m\nR1 2 3 1meg", True),
        ("D1 1 3 DM\nR1 2 3 1meg", True),
        ("R1 1 2 1k\nR2 2 3 1k\nC1 2 3 10p", False),  # no model in it
    ],
)
def test_what_a_body_holds_decides(circuit, body, device):
    found = circuit(f"{FEED}X1 p g k SOME\n.subckt SOME 1 2 3\n{body}\n.ends")

    inner = [p.name for p in found.positions if p.name.startswith("X1.")]
    assert (inner == []) is device or "C1" not in body
    assert any(text.startswith("X1 (SOME): ") for text in found.decisions)
    assert (": device" in found.decisions[0]) is device


def test_capacitors_of_a_block_are_positions(circuit):
    found = circuit(
        FEED + "X3 p g out STAGE\nR1 out 0 1k\n"
        ".subckt STAGE a b c\nX1 a b k TRI\nRk k 0 1k\nC5 k 0 25u\nC6 a c 0.1u\n.ends"
    )

    assert [p.name for p in found.positions] == ["C9", "X3.C5", "X3.C6"]
    assert found.position("x3.c5").role_text.startswith("cathode bypass, cathode of X3.X1")
    assert found.part("X3.X1").kind is Kind.TUBE


def test_a_body_with_a_known_tube_is_a_block(circuit):
    found = circuit(
        FEED + "X3 p g k STAGE\n.subckt STAGE a b c\nX1 a b c 6J5\nR1 b 0 1meg\n.ends",
    )

    assert found.part("X3.X1").type == "6J5"
    assert "X3 (STAGE): block: holds tubes" in found.decisions


def test_the_sheet_overrides(circuit):
    text = FEED + "X1 p g k TRI2\n.subckt TRI2 1 2 3\nB1 1 3 I=V(2,3)\nC1 2 3 5n\n.ends"

    assert [p.name for p in circuit(text).positions] == ["C9", "X1.C1"]
    found = circuit(text, '[devices]\nnames = ["X1"]')
    assert [p.name for p in found.positions] == ["C9"]
    assert "X1 (TRI2): device by the sheet" in found.decisions


def test_pins_by_name(circuit):
    part = circuit(FEED + "X1 p g k TRI").part("X1")

    assert part.kind is Kind.TUBE
    assert dict(part.pins) == {"plate": "p", "grid": "g", "cathode": "k"}
    assert part.pins_source == "pin names"
    assert all(name.startswith("X1.") for name in part.elements)


def test_pins_by_the_sheet(circuit):
    model = ".subckt ODD 1 2 3\nB1 1 3 I=V(2,3)\n.ends"
    sheet = "[tubes.X1]\npins = { plate = 1, grid = 2, cathode = 3 }"

    part = circuit(f"{FEED}X1 p g k ODD\n{model}", sheet).part("X1")
    assert dict(part.pins) == {"plate": "p", "grid": "g", "cathode": "k"}
    assert part.pins_source == "sheet"


def test_a_type_of_the_table_brings_its_limits(circuit):
    part = circuit("V1 b 0 250\nX1 p b g k 6V6GT\nRp b p 1k\nRk k 0 270\nRg g 0 1meg\nC1 k 0 25u")

    tube = part.part("X1")
    assert tube.type == "6V6GT"
    # 6V6GT: 12 W plate, 2 W screen, design-centre; the type table names its source
    assert tube.limits["plate_W"].value == 12.0
    assert tube.limits["plate_W"].source != "sheet"
    assert tube.pins["screen"] == "b"


def test_limits_of_the_sheet_go_before_the_table(circuit):
    text = "V1 b 0 250\nX1 p b g k 6V6GT\nRp b p 1k\nRk k 0 270\nRg g 0 1meg\nC1 k 0 25u"
    sheet = '[tubes.X1]\nlimits = { plate_dissipation = "9 W" }'

    tube = circuit(text, sheet).part("X1")
    assert (tube.limits["plate_W"].value, tube.limits["plate_W"].source) == (9.0, "sheet")
    assert "screen_W" in tube.limits


def test_a_tube_diode_is_a_rectifier_only_where_power_drives_it(circuit):
    power = circuit("Vl a 0 SIN(0 165 60)\nX1 a b DIO\nC1 b 0 10u\nR1 b 0 10k")
    signal = circuit("L1 a 0 1m\nX1 a b DIO\nC1 b 0 100p\nR1 b 0 500k")

    assert power.part("X1").kind is Kind.RECTIFIER
    assert signal.part("X1").kind is Kind.TUBE  # cold while the others are


def test_units_of_one_glass(circuit):
    text = FEED + "XV1A p g k TRI\nXV1B p2 g k TRI\nRp2 b p2 100k"

    found = circuit(text)
    assert {found.part(n).envelope for n in ("XV1A", "XV1B")} == {"XV1"}
    assert any("XV1A and XV1B share one envelope" in text for text in found.assumed)
    told = circuit(text, '[tubes.XV1A]\nenvelope = "V9"\n[tubes.XV1B]\nenvelope = "V9"')
    assert told.part("XV1B").envelope == "V9"


def test_transistors_and_diodes_as_subcircuits(circuit):
    found = circuit(
        "V1 c 0 12\nX1 c b e POWER\nR1 c b 10k\nR2 e 0 100\nC1 e 0 100u\nX2 b e CLAMP\n"
        ".subckt POWER C B E\nQ1 C B E NPN\nR1 B E 10k\n.ends\n"
        ".subckt CLAMP A K\nD1 A K DM\n.ends"
    )

    assert found.part("X1").kind is Kind.TRANSISTOR
    assert dict(found.part("X1").pins) == {"collector": "c", "base": "b", "emitter": "e"}
    assert found.part("X2").kind is Kind.DIODE
    assert dict(found.part("X2").pins) == {"anode": "b", "cathode": "e"}


def test_the_sheet_names_the_pins_of_a_model_that_is_missing(netlist):
    from stress.circuit.build import survey
    from stress.parts import read_sheet

    n = netlist(FEED + "X1 p g k NOSUCH")
    sheet = read_sheet.read_text(
        "[tubes.X1]\npins = { plate = 1, grid = 2, cathode = 3 }", path="set.toml"
    )
    found, errors = survey(n, sheet)

    assert errors == ()
    assert n.obstacles  # it cannot be simulated, but its capacitors can be listed
    assert found.position("C9").role_text == "cathode bypass, cathode of X1 to ground"

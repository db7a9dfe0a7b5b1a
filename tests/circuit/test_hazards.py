"""What is visible without solving, and what must not be seen where it is not."""

import pytest

from stress.finding import Severity


def rules(circuit):
    return {(f.rule, f.where) for f in circuit.findings}


def test_a_sound_circuit_has_no_findings(circuit):
    found = circuit(
        "V1 b 0 250\nRp b p 100k\nX1 p g k TRI\nRk k 0 1k\nRg g 0 1meg\nC1 k 0 25u\n"
        "C2 p out 0.1u\nRo out 0 1meg\n"
    )
    assert found.findings == ()


@pytest.mark.parametrize(
    ("text", "nodes"),
    [
        ("C2 b f 0.1u\nX1 b f 0 TRI", "f"),  # a grid gives no path: its leak is missing
        ("C2 b f 0.1u\nC3 f 0 0.1u", "f"),  # between two capacitors
        ("L1 f h 1\nR2 f h 1k\nC2 h 0 1u", "f, h"),  # a winding tied to nothing
    ],
)
def test_nodes_without_a_direct_path(circuit, text, nodes):
    found = circuit(f"V1 b 0 250\nR1 b 0 1k\nC1 b 0 1u\n{text}")

    finding = next(f for f in found.findings if f.rule == "no-dc-path")
    assert f"ground: {nodes};" in finding.text
    assert finding.where.startswith("C")
    assert finding.span is not None


@pytest.mark.parametrize(
    ("text", "loop"),
    [
        ("V2 a 0 10", "V1, V2"),
        ("L1 a 0 1", "V1, L1"),
        ("L1 a c 1\nL2 c 0 1", "V1, L1, L2"),
        ("L1 a c 1\nR1 c 0 1", None),
        ("E1 a 0 c 0 2\nRc c 0 1", "V1, E1"),
    ],
)
def test_loops_without_resistance(circuit, text, loop):
    found = circuit(f"V1 a 0 10\nR9 a d 1k\nC1 d 0 1u\n{text}")

    loops = [f.text for f in found.findings if f.rule == "source-loop"]
    assert len(loops) == (0 if loop is None else 1)
    if loop:
        assert set(loop.split(", ")) <= set(
            loops[0].replace(";", ",").replace(":", ",").split(", ")
        )


RECTIFIED = "Vl a 0 SIN(0 165 60)\nD1 a b DM\nC1 b 0 10u\nR1 b 0 10k\n"


def test_an_electrolytic_the_wrong_way_round(circuit):
    right = circuit(RECTIFIED, '[capacitors.C1]\nstyle = "aluminium"\nplus = "b"')
    wrong = circuit(RECTIFIED, '[capacitors.C1]\nstyle = "aluminium"\nplus = "0"')
    film = circuit(RECTIFIED, '[capacitors.C1]\nstyle = "film"\nplus = "0"')

    assert ("reversed", "C1") not in rules(right)
    assert ("reversed", "C1") in rules(wrong)
    assert ("reversed", "C1") not in rules(film)  # has no plus side that matters
    finding = next(f for f in wrong.findings if f.rule == "reversed")
    assert finding.severity is Severity.REPLACE


def test_both_ends_on_one_node(circuit):
    found = circuit(RECTIFIED + "C2 b b 1u")
    assert ("both-ends-on-one-node", "C2") in rules(found)


def test_across_an_ideal_source(circuit):
    found = circuit("V1 a 0 24\nC1 a 0 10u\nR1 a b 10\nC2 b 0 10u")
    assert ("across-ideal-source", "C1") in rules(found)
    assert ("across-ideal-source", "C2") not in rules(found)


def test_a_hot_chassis_is_told(circuit):
    found = circuit(RECTIFIED)

    assert ("hot-chassis", "equipment") in rules(found)
    assert "0" in found.line_connected


ISOLATED = """
Vl l n SIN(0 325 50)
Re n 0 10
Lp l n 10
Ls s 0 20
K1 Lp Ls 0.999
D1 s b DM
C1 b 0 10u
R1 b 0 10k
"""


def test_a_winding_isolates(circuit):
    found = circuit(ISOLATED + "C2 l 0 4.7n\nC3 l n 0.1u")

    assert ("hot-chassis", "equipment") not in rules(found)
    assert found.line_connected == {"l", "n"}
    assert "0" in found.touchable  # the chassis
    assert ("class-y", "C2") in rules(found)
    assert ("class-x", "C3") in rules(found)


def test_a_return_drawn_to_ground_is_no_hot_chassis(circuit):
    # only the primary hangs on the line: the drawing is short for an isolated primary
    found = circuit(ISOLATED.replace("l n", "l 0").replace("Re n 0 10\n", ""))

    assert ("hot-chassis", "equipment") not in rules(found)
    assert any("return is drawn to ground" in text for text in found.assumed)


def test_safety_classes_that_are_fitted_are_accepted(circuit):
    sheet = '[capacitors.C2]\nstyle = "line-Y"\n[capacitors.C3]\nstyle = "line-X"\n'
    found = circuit(ISOLATED + "C2 l 0 4.7n\nC3 l n 0.1u", sheet)
    assert not {rule for rule, _ in rules(found)} & {"class-x", "class-y"}

    swapped = circuit(ISOLATED + "C2 l 0 4.7n", '[capacitors.C2]\nstyle = "line-X"\n')
    assert ("class-y", "C2") in rules(swapped)  # X is not enough there


def test_what_bridges_a_hot_chassis_and_a_terminal_needs_class_y(circuit):
    hot = (
        RECTIFIED + "C2 0 chassis 0.1u\nR2 0 chassis 470k\nC3 ant g 1n\nR3 g 0 1meg\nR4 ant 0 1meg"
    )
    found = circuit(hot)

    assert found.touchable == {"chassis", "ant"}
    assert {("class-y", "C2"), ("class-y", "C3")} <= rules(found)
    assert "g" in found.line_connected
    assert not found.touchable & found.line_connected  # 470 kohm only leads charge away


def test_pins_that_nobody_knows(circuit):
    found = circuit(
        "V1 b 0 250\nR1 b p 1k\nC1 p 0 1u\nX1 p q AMP2\nR2 q 0 1k\n"
        ".subckt AMP2 in out\nB1 out 0 V=10*V(in)\n.ends"
    )
    assert ("pins-not-recognised", "X1") in rules(found)


def test_a_hot_chassis_that_can_be_touched_is_more_urgent(circuit):
    found = circuit(RECTIFIED, '[equipment]\ntouchable = ["0"]')

    finding = next(f for f in found.findings if f.rule == "hot-chassis")
    assert finding.severity is Severity.TEST
    assert "it can be touched" in finding.text
    # what only lies between two line-connected nodes needs no class Y
    assert ("class-y", "C1") not in rules(found)


def test_a_battery_is_no_line(circuit):
    found = circuit(
        "Vb a 0 24\nR1 a b 10\nC1 b 0 10u\nC2 0 case 2.2n\nR2 case 0 1meg",
        '[line]\nsource = "Vb"\nnominal = "24 V"\n[equipment]\ntouchable = ["case"]',
    )

    assert found.line_connected == frozenset()
    assert rules(found) == set()
    assert any("taken for a battery" in text for text in found.assumed)

"""Value, style, rating and plus side of a position, and the part sheet against the netlist."""

import pytest

from stress.circuit.build import build, survey
from stress.circuit.circuit import Kind, Role
from stress.parts import read_sheet
from stress.parts.sheet import Sheet
from stress.text.span import SourceErrors

STAGE = """
V1 b 0 250
Rp b p1 100k
X1 p1 g1 k1 TRI
Rk k1 0 1k
Rg g1 0 1meg
C1 k1 0 25u
C2 p1 g2 0.02u
Rg2 g2 0 470k
X2 p2 g2 0 TRI
Rp2 b p2 100k
"""


def test_what_the_sheet_states_is_taken(circuit):
    sheet = """
    [capacitors.c2]
    style = "film"
    rated = "630 V"
    value = "0.022 uF"
    esr = "2 ohm"
    insulation = "2 Gohm"
    [cans.K1]
    sections = ["C1", "C2"]
    """
    p = circuit(STAGE, sheet).position("C2")

    assert (p.style.name, p.style_source) == ("film", "sheet")
    assert (p.rated_V, p.value_F, p.esr_ohm, p.insulation_ohm) == (630.0, 22e-9, 2.0, 2e9)
    assert p.can == "K1"


def test_what_nobody_states_is_assumed_and_says_so(circuit):
    p = circuit(STAGE).position("C1")

    assert p.rated_V is None
    assert p.style_source.startswith("assumed: ")
    assert p.style.polar  # 25 uF at a cathode


@pytest.mark.parametrize(
    ("stated", "role", "text"),
    [
        ("feedback", Role.FEEDBACK, "feedback"),
        ("Coupling", Role.COUPLING, "coupling, plate of X1 to grid of X2"),
        ("hum cancelling", Role.COUPLING, "hum cancelling"),
    ],
)
def test_a_role_of_the_sheet(circuit, stated, role, text):
    p = circuit(STAGE, f'[capacitors.C2]\nrole = "{stated}"').position("C2")
    assert (p.role, p.role_text) == (role, text)


# Each node lies within the span of the fixed voltages that direct current connects it to.
@pytest.mark.parametrize(
    ("text", "plus"),
    [
        ("C9 p1 g2 1n", "p1"),  # plate above a grid returned to ground
        ("C9 g2 p1 1n", "p1"),
        ("C9 k1 0 25u", "k1"),
        ("C9 0 k1 25u", "k1"),
        ("C9 b p1 1n", "b"),  # the supply above what it feeds
        ("C9 p1 p2 1n", None),  # two plates: who knows
        ("V2 n 0 -30\nR9 n m 10k\nC9 m 0 10u", "0"),  # bias: plus at the chassis
        ("V2 n 0 -30\nR9 n m 10k\nC9 m g2 10u", "g2"),
        ("I1 0 q 1m\nR9 q 0 1k\nC9 q 0 1u", None),  # a current source knows no bounds
        ("C9 g1 0 1n", None),  # both at ground
    ],
)
def test_the_plus_side_where_the_graph_leaves_no_doubt(circuit, text, plus):
    p = circuit(STAGE + text).position("C9")
    assert (None if p.plus is None else p.nodes[p.plus]) == plus


def test_resistors_without_a_rating_are_assumed(circuit):
    found = circuit(STAGE, '[resistors.Rk]\nrated = "1 W"')

    stated, assumed = found.part("Rk").limits["power_W"], found.part("Rp").limits["power_W"]
    assert (stated.value, stated.assumed) == (1.0, False)
    assert (assumed.value, assumed.assumed) == (0.5, True)
    assert "common practice" in assumed.source


def test_windings_know_their_copper(circuit):
    found = circuit(
        "V1 b 0 250\nLop b x 10\nRop x p 280\nC1 p 0 5n\nRl p 0 10k\nL2 p q 1\nR7 q 0 100"
    )

    assert found.part("Lop").resistance_ohm == 280.0
    assert found.part("Lop").elements == ("Lop", "Rop")
    assert "Rop" not in [p.name for p in found.parts]
    assert found.part("L2").resistance_ohm is None  # R7 is a part of its own
    assert found.part("R7").kind is Kind.RESISTOR


def test_fuses_controls_loudspeakers(circuit):
    found = circuit(
        "V1 a 0 24\nRfuse a b 0.1\nRVR1a b w 10k\nRVR1b w 0 10k\nC1 w s 100u\nR8 s 0 8",
        '[controls.VR1]\nrated = "0.25 W"\n[loudspeakers.R8]\nrated = "3 W"',
    )

    kinds = {p.name: p.kind for p in found.parts}
    assert kinds == {
        "Rfuse": Kind.FUSE,
        "RVR1a": Kind.CONTROL,
        "RVR1b": Kind.CONTROL,
        "R8": Kind.LOUDSPEAKER,
    }
    assert found.part("RVR1a").limits["power_W"].value == 0.25


def errors_of(netlist, text, sheet=""):
    with pytest.raises(SourceErrors) as caught:
        build(netlist(text), read_sheet.read_text(sheet, path="set.toml"))
    return caught.value.errors


@pytest.mark.parametrize(
    ("sheet", "message", "hint"),
    [
        ("[capacitors.C11]\n", "no such capacitor", "did you mean C1?"),
        ("[tubes.X9]\n", "no such X card", "did you mean X"),
        ("[resistors.Rq]\n", "no such resistor", "did you mean"),
        ("[windings.Lop]\n", "no such winding (L)", "the netlist has no winding (L)"),
        ('[line]\nsource = "Vline"\n', "no such source", "the netlist has V1"),
        ('[equipment]\ntouchable = ["antena"]\n', "no such node", "the netlist has"),
        ('[conditions.standby]\nopen = ["SW2"]\n', "no such part", ""),
        ('[cans.K1]\nsections = ["C1", "C7"]\n', "[cans.K1] names C7", "did you mean"),
        ('[capacitors.C2]\nplus = "p9"\n', "where it has no end", "its nodes are p1 and g2"),
        ('[tubes.X1]\npins = { plate = "Q" }\n', "has no pin 'Q' for its plate", "P, G, K"),
        ('[faults.F1]\nbetween = ["p1", "zz"]\n', "no such node", ""),
    ],
)
def test_error_in_the_sheet(netlist, sheet, message, hint):
    (error,) = errors_of(netlist, STAGE, sheet)

    assert message in str(error)
    assert hint in error.hint


def test_error_points_into_the_sheet(netlist):
    first, second = errors_of(netlist, STAGE, "[capacitors.C1]\n[capacitors.C7]\n[tubes.X7]\n")

    assert str(first).splitlines()[:3] == [
        "set.toml:2:2: [capacitors] names c7, but the netlist has no such capacitor",
        "  2 | [capacitors.C7]",
        "    |  ^~~~~~~~~~~~~",
    ]
    assert second.span.line == 3


def test_error_names_a_capacitor_inside_a_device(netlist):
    (error,) = errors_of(netlist, STAGE, '[capacitors."X1.C1"]\n')

    assert "is inside X1, which is taken for one part" in error.message
    assert "[blocks]" in error.hint


def test_error_no_capacitors(netlist):
    (error,) = errors_of(netlist, "V1 a 0 1\nR1 a 0 1k")
    assert "no capacitors" in error.message


def test_the_sheet_supplies_a_missing_value(netlist):
    text = STAGE + "C8 p2 0 value"
    try:
        n = netlist(text)
    except SourceErrors:
        pytest.fail("a placeholder is an error for that position only")

    circuit, errors = survey(n, Sheet())
    assert [e.message for e in errors] == ["C8 has no value"]
    assert circuit.position("C8").role is Role.PLATE_BYPASS  # the inventory goes on
    known = read_sheet.read_text('[capacitors.C8]\nvalue = "250 pF"', path="set.toml")
    assert build(n, known).position("C8").value_F == 250e-12


def test_a_known_diode_brings_its_limits_and_an_unknown_model_none(circuit):
    found = circuit(
        "V1 a 0 24\nD1 a b 1N4007\nC1 b 0 10u\nR1 b 0 1k\nD2 0 b DM\n.model 1N4007 D(IS=1n)"
    )

    known, unknown = found.part("D1"), found.part("D2")
    assert known.type == "1N4007"
    assert known.limits["reverse_V"].value == 1000.0  # JEDEC registration: 1000 V, 1 A
    assert not known.limits["reverse_V"].assumed
    assert (unknown.type, dict(unknown.limits)) == ("", {})  # nothing is assumed for a diode


def test_what_a_card_says_beside_its_value_is_no_part_of_its_own(circuit):
    found = circuit(
        "Vl a 0 SIN(0 165 60)\nD1 a b DM\nC1 b 0 47u Rser=0.5 Lser=10n Cpar=1n V=450\n"
        "L1 b c 5 Rser=150 Cpar=20p\nC2 c 0 47u\nR1 c 0 5k"
    )

    assert [p.name for p in found.positions] == ["C1", "C2"]
    assert [p.name for p in found.parts] == ["R1", "L1", "D1"]
    c1 = found.position("C1")
    assert (c1.role, c1.rated_V, c1.esr_ohm) == (Role.RESERVOIR, 450.0, 0.5)
    assert found.position("C2").role is Role.SMOOTHING
    assert found.part("L1").resistance_ohm == 150.0


def test_the_windings_of_a_transformer_drawn_as_one_device(circuit):
    found = circuit(
        "Vl l n SIN(0 325 50)\nRn n 0 10\nX1 l n a 0 POWER\nD1 a b DM\nC1 b 0 10u\nR1 b 0 10k\n"
        ".subckt POWER p1 p2 s1 s2\nL1 p1 x 18\nRdc1 x p2 7\nL2 s1 s2 30\nK1 L1 L2 0.999\n.ends"
    )

    assert [p.name for p in found.parts if p.kind is Kind.WINDING] == ["X1.L1", "X1.L2"]
    assert found.part("X1.L1").resistance_ohm == 7.0
    assert found.position("C1").role is Role.RESERVOIR
    assert "b" not in found.line_connected


def test_tags_of_the_netlist(circuit):
    found = circuit("V1 a 0 24\nR1 a b 10\nC1 b 0 100uF/63V\nC2 b 0 1u V=50 Irms=0.5")

    assert (found.position("C1").value_F, found.position("C1").rated_V) == (1e-4, 63.0)
    assert (found.position("C2").rated_V, found.position("C2").ripple_A) == (50.0, 0.5)


def test_the_sheet_goes_before_the_tags(circuit):
    text = "V1 a 0 24\nR1 a b 10\nC1 b 0 100uF/63V"
    p = circuit(text, '[capacitors.C1]\nrated = "50 V"\nvalue = "82 uF"').position("C1")

    assert (p.value_F, p.rated_V) == (82e-6, 50.0)


@pytest.mark.parametrize("value", ["0", "-10u"])
def test_a_value_that_no_part_has_is_told_and_not_judged(circuit, value):
    found = circuit(STAGE + f"C9 g2 0 {value}\n")

    assert "C9" not in [position.name for position in found.positions]
    assert [f.where for f in found.findings if f.rule == "no-part"] == ["C9"]

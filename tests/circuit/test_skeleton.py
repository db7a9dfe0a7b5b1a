"""The part sheet to fill in reads back and changes nothing that was known."""

import pytest

from stress.circuit.build import build
from stress.circuit.skeleton import skeleton
from stress.parts import read_sheet

SET = """
Vl l n SIN(0 165.46 60)
Re n 0 10
Lp l n 5
Ls a 0 40
K1 Lp Ls 0.999
D1 a b0 DM
C1 b0 0 16u
Rfuse b0 b1 0.2
R1 b1 b2 10k
C2 b2 0 8u
XU1 p g k TRI
Rp b2 p 100k
Rk k 0 1k
Rg g 0 1meg
C3 k 0 25u
XU2A q p k2 6SN7GT
Rq b2 q 47k
Rk2 k2 0 1k
X3 q STAGE
C4 l 0 10n
.subckt STAGE a
C1 a b 0.1u
R1 b 0 1meg
.ends
"""


@pytest.mark.parametrize(
    "sheet",
    [
        "",
        """
        [equipment]
        name = "Keeper's \\"old\\" set"
        heaters = "series"
        ambient = "55 degC"
        [line]
        source = "Vl"
        nominal = "117 V"
        high = "126 V"
        [capacitors.C2]
        style = "aluminium"
        rated = "450 V"
        esr = "3 ohm"
        [resistors.R1]
        rated = "2 W"
        [tubes.XU1]
        type = "6J5"
        envelope = "U1"
        """,
    ],
    ids=["without a sheet", "with one"],
)
def test_it_reads_back(circuit, netlist, sheet):
    first = circuit(SET, sheet)
    text = skeleton(first)
    again = build(netlist(SET), read_sheet.read_text(text, path="skeleton.toml"))

    for position in first.positions:
        other = again.position(position.name)
        assert other.style_source == "sheet"
        for field in ("role", "role_text", "style", "value_F", "rated_V", "plus", "esr_ohm"):
            assert getattr(other, field) == getattr(position, field), (position.name, field)
    assert [(p.name, p.kind, dict(p.pins), p.type, p.envelope) for p in again.parts] == [
        (p.name, p.kind, dict(p.pins), p.type, p.envelope) for p in first.parts
    ]
    for part in first.parts:
        assert {k: v.value for k, v in again.part(part.name).limits.items()} == {
            k: v.value for k, v in part.limits.items()
        }
    assert again.name == first.name
    assert again.line.sources == first.line.sources
    # four digits are written of a voltage that is an assumption
    assert again.line.nominal_V == pytest.approx(first.line.nominal_V, rel=5e-4)
    assert (again.heaters, again.ambient_degC) == (first.heaters, first.ambient_degC)
    assert again.touchable == first.touchable


def test_it_says_what_is_assumed(circuit):
    lines = skeleton(circuit(SET)).splitlines()

    at = lines.index("[capacitors.C3]  # cathode bypass, cathode of XU1 to ground")
    assert lines[at + 1].startswith('style = "aluminium"  # assumed: ')
    assert lines[at + 2] == '# rated = "400 V"  # as marked on the part'
    assert lines[at + 3] == 'plus = "k"  # the side with the higher voltage'
    assert 'pins = { plate = "P", grid = "G", cathode = "K" }  # found by pin names' in lines
    assert '[capacitors."X3.C1"]' in [line.split("  #")[0] for line in lines]
    assert "# [resistors.Rk]  # 1 kΩ" in lines  # a wattage is only known by looking


def test_nothing_in_a_netlist_can_break_out_of_it(netlist):
    from stress.parts.sheet import Sheet

    n = netlist("V1 a 0 1\nR1 a b\\]x 1k\nC1 b\\]x 0 100u\nC2 a 0 1u")
    text = skeleton(build(n, Sheet()))
    assert build(n, read_sheet.read_text(text, path="s.toml")).position("C1").value_F == 1e-4

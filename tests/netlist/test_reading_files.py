"""Encodings, line ends, includes, sections, dialects: what surrounds the cards."""

from __future__ import annotations

import codecs
from pathlib import Path

import pytest

from stress.netlist.dialect import recognise
from stress.netlist.read import read, read_text

TEXT = "title with µ\nR1 a 0 1k\nC1 a 0 10µ\n"


@pytest.mark.parametrize(
    "content",
    [
        TEXT.encode("utf-8"),
        codecs.BOM_UTF8 + TEXT.encode("utf-8"),
        TEXT.encode("latin-1"),
        TEXT.encode("utf-16"),
        codecs.BOM_UTF16_BE + TEXT.encode("utf-16-be"),
        TEXT.replace("\n", "\r\n").encode("utf-8"),
        TEXT.replace("\n", "\r").encode("latin-1"),
        TEXT.rstrip("\n").encode("utf-8"),
        (TEXT + "\x1a").encode("utf-8"),
    ],
    ids=["utf-8", "bom", "latin-1", "utf-16", "utf-16-be", "crlf", "cr", "no end", "ctrl-z"],
)
def test_encodings_and_line_ends(content: bytes, tmp_path: Path):
    path = tmp_path / "set.cir"
    path.write_bytes(content)

    netlist = read(path)

    assert netlist.title == "title with µ"
    assert [element.value for element in netlist.elements] == [1000.0, 1e-5]


def test_first_line_is_the_title_whatever_it_is():
    netlist = read_text("R1 a 0 1k\nR2 a 0 2k\n")

    assert netlist.title == "R1 a 0 1k"
    assert [element.name for element in netlist.elements] == ["R2"]


@pytest.mark.parametrize(
    "card",
    [
        ".include parts/d.lib",
        ".INC PARTS\\D.LIB",
        '.include "parts/d.lib"',
        ".lib 'parts/d.lib'",
        ".include C:\\models\\parts\\d.lib",
        ".lib d.lib",
    ],
)
def test_include_paths_as_they_come(card: str, tmp_path: Path):
    (tmp_path / "parts").mkdir()
    (tmp_path / "parts" / "d.lib").write_text(".model dx D(IS=5n)\n", encoding="utf-8")
    (tmp_path / "set.cir").write_text(f"t\n{card}\nD1 a 0 dx\n", encoding="utf-8")

    netlist = read(tmp_path / "set.cir", libraries=[tmp_path / "parts"])

    assert netlist.models["dx"].parameters == {"is": 5e-9}
    assert netlist.obstacles == ()


def test_first_line_that_looks_like_a_card_is_told():
    notices = read_text("R1 a 0 1k\nR2 a 0 2k\n").notices

    assert [(notice.rule, notice.where) for notice in notices] == [("title", "R1")]


def test_include_is_relative_to_the_file_that_asks(tmp_path: Path):
    (tmp_path / "sub").mkdir()
    (tmp_path / "sub" / "a.inc").write_text(".include b.inc\n", encoding="utf-8")
    (tmp_path / "sub" / "b.inc").write_text("R1 a 0 7\n", encoding="utf-8")
    (tmp_path / "set.cir").write_text("t\n.include sub/a.inc\n", encoding="utf-8")

    element = read(tmp_path / "set.cir").elements[0]

    assert element.value == 7.0
    assert element.span.file == "sub/b.inc"
    assert [call.split(",")[0] for call in element.span.within] == ["sub/a.inc", "sub/b.inc"]


def test_library_may_begin_with_prose(tmp_path: Path):
    (tmp_path / "tubes.lib").write_text(
        "Tube models of a friend\n\n.model dx D(IS=1n)\n", encoding="utf-8"
    )
    (tmp_path / "set.cir").write_text("t\n.lib tubes.lib\nD1 a 0 dx\n", encoding="utf-8")

    assert read(tmp_path / "set.cir").models["dx"].parameters == {"is": 1e-9}


def test_missing_library_does_not_matter_where_nothing_is_missing():
    netlist = read_text("t\n.lib C:\\Program Files\\models\\standard.dio\n.model D D\nD1 a 0 D\n")

    assert netlist.obstacles == ()
    assert [notice.rule for notice in netlist.notices] == ["missing-library"]


def test_names_of_a_missing_include_are_no_mistakes():
    netlist = read_text("t\n.include values.inc\nR1 a 0 {int(x1)*1R}\nC1 a 0 {c1}\n")

    assert [obstacle.message for obstacle in netlist.obstacles] == [
        'the file "values.inc" is missing',
        'undefined parameter "x1"',
        'undefined parameter "c1"',
    ]
    assert [element.name for element in netlist.elements] == ["R1", "C1"]


def test_section_that_is_missing_is_named(tmp_path: Path):
    (tmp_path / "c.lib").write_text(".lib fast\n.model dx D\n.endl\n", encoding="utf-8")
    (tmp_path / "set.cir").write_text("t\n.lib c.lib fats\nD1 a 0 dx\n", encoding="utf-8")

    obstacles = read(tmp_path / "set.cir").obstacles

    assert obstacles[0].message == 'the section "fats" of "c.lib" is missing'
    assert obstacles[0].hint == "did you mean fast?"


DIALECTS = [
    ("* C:\\a\\amp.asc\nR1 a 0 1\n.backanno\n", "lt"),
    ("t\nV1 a 0 1 Rser=2\n.tran 10m\n", "lt"),
    ("t\nE1 a 0 VALUE={V(b)}\n.probe\n", "ps"),
    ("t\nX1 a s PARAMS: r=1\n.lib parts.lib\n", "ps"),
    ("t\n.options post\n.param a='1'\n", "hs"),
    ("t\n.alter\nR1 a 0 1\n", "hs"),
    ("t\nR1 a 0 1\n.tran 1u 1m\n.end\n", "default"),
    ("t\nX1 a s PARAMS: r=1\n", "default"),
]


@pytest.mark.parametrize(("text", "dialect"), DIALECTS)
def test_dialect_is_recognised_by_its_marks(text: str, dialect: str):
    assert recognise(text) == dialect
    assert read_text(text).dialect == dialect
    assert read_text(text, dialect="hs").dialect == "hs"


def test_dollar_is_part_of_a_name_in_ps():
    text = "t\nR1 a $G_vcc 1k\nX1 s\n.subckt s\nR1 $G_vcc 0 1\n.ends\n"

    assert [e.nodes for e in read_text(text, dialect="ps").elements] == [
        ("a", "$g_vcc"),
        ("$g_vcc", "0"),
    ]


def test_type_of_the_part_table_mends_a_missing_subcircuit():
    def built_in(name: str) -> str | None:
        return ".subckt T1 A G K\nB1 A K I=V(G,K)*1m\n.ends\n" if name.lower() == "6x1" else None

    netlist = read_text("t\nXV1 p g 0 6X1\nXV2 p g 0 6X2\n", built_in=built_in)

    first, second = netlist.instances
    assert (first.name, first.pins, first.built_in) == ("XV1", ("A", "G", "K"), True)
    assert first.body == frozenset("B")
    assert (second.pins, second.nodes, second.built_in) == ((), ("p", "g", "0"), False)
    assert [notice.rule for notice in netlist.notices] == ["built-in-type"]
    assert [obstacle.message for obstacle in netlist.obstacles] == [
        'the subcircuit "6X2" is missing'
    ]


def test_own_subcircuit_comes_before_the_part_table():
    netlist = read_text(
        "t\nXV1 p g 0 6x1\n.subckt 6X1 a b c\nR1 a c 1\n.ends\n",
        built_in=lambda name: ".subckt T1 A G K\nR1 A K 2\n.ends\n",
    )

    assert netlist.elements[0].value == 1.0
    assert not netlist.instances[0].built_in


@pytest.mark.parametrize(
    "content",
    [
        "* Encrypted File\n*\n* Begin:\n  50 3D 5F\n* End 1\n",
        "* maker\n$CDNENCSTART\n5f3a 88\n$CDNENCFINISH\n",
        ".prot FREELIB\n5'$K 9,,W\n.unprot\n",
    ],
    ids=["file", "marks", "prot"],
)
def test_encrypted_model_is_refused_by_its_own_message(content: str, tmp_path: Path):
    (tmp_path / "secret.lib").write_text(content, encoding="utf-8")
    (tmp_path / "set.cir").write_text("t\n.lib secret.lib\nX1 a b SECRET\n", encoding="utf-8")

    netlist = read(tmp_path / "set.cir")

    messages = [obstacle.message for obstacle in netlist.obstacles]
    assert "encrypted model" in " ".join(messages)
    assert 'the subcircuit "SECRET" is missing' in messages


EXPORT = """\
.title Amplifier (schematic export)
U1 Net-(C1-Pad1) GND VCC LM317
J1 VCC GND Conn_01x02
F1 VCC /fused 1A
BT1 a b Battery
SW1 a b SPST
K1 a b c d RELAY
LS1 a b Speaker
D1 a b BY359-1500
IC1 a b c d NE555
R2 a GND R
C1 Net-(C1-Pad1) GND 100uF/450V
C2 a GND C_Small
C3 a b 100n / 400V
"""


def test_raw_export_of_a_schematic_editor_gives_the_inventory():
    """Parts that SPICE does not have are obstacles, not mistakes; the capacitors are all there."""
    netlist = read_text(EXPORT)

    assert netlist.title == "Amplifier (schematic export)"
    assert [obstacle.span.line for obstacle in netlist.obstacles] == list(range(2, 12))
    assert all(obstacle.hint for obstacle in netlist.obstacles)
    capacitors = [element for element in netlist.elements if element.letter == "C"]
    assert [(c.name, c.value, c.tags.rated_V) for c in capacitors] == [
        ("C1", 1e-4, 450.0),
        ("C2", None, None),
        ("C3", 1e-7, 400.0),
    ]
    assert capacitors[0].nodes == ("net-(c1-pad1)", "0")
    diode = next(element for element in netlist.elements if element.name == "D1")
    assert (diode.nodes, diode.model) == (("a", "b"), "")


TUBES = """\
Old tube library
.SUBCKT PENT 1 2 3 4 ; A S G K;
X1 1 2 3 4 PentK MU= 11 EX=1.35 KG1=650
+ KP=60 KVB=24 ; the data
.ENDS
.SUBCKT PentK 1 2 3 4
E1 7 0 VALUE=
+{V(2,4)/KP*LOG(1+EXP((1/MU+V(3,4)/V(2,4))*KP))}
RE1 7 0 1G
G1 1 4 VALUE={(PWR(V(7),EX)+PWRS(V(7),EX))/KG1*ATAN(V(1,4)/KVB)}
D3 5 4 DX
R1 3 5 1k
.ENDS PentK
.SUBCKT OTHER 1 2 (diode of old)
.MODEL DX D(IS=1N RS=1)
D1 1 2 DX
.ENDS
.SUBCKT MACRO A G K
.param IP {URAMP(V(A,K)/MU+V(G,K))}
.param MU=20
G1 A K VALUE={IP*IP*1m}
.ENDS
"""


def test_tube_library_of_the_old_kind(tmp_path: Path):
    """Undeclared formals, macros with voltages, prose, remarks behind `;`, shared models."""
    (tmp_path / "tubes.lib").write_text(TUBES, encoding="utf-8")
    (tmp_path / "set.cir").write_text(
        "t\n.lib tubes.lib\nX1 p s g 0 PENT\nX2 p g 0 MACRO\nX3 p 0 OTHER\n", encoding="utf-8"
    )

    netlist = read(tmp_path / "set.cir")

    assert netlist.obstacles == ()
    assert [i.name for i in netlist.instances] == ["X1", "X1.X1", "X2", "X3"]
    assert {notice.rule for notice in netlist.notices} == {"model-elsewhere", "prose"}
    assert [e.name for e in netlist.elements if e.letter == "B"] == [
        "X1.X1.E1",
        "X1.X1.G1",
        "X2.G1",
    ]

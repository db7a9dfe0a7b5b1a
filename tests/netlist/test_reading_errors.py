"""What is wrong with a netlist is told as it is printed, caret and all, everything at once."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from stress.netlist.read import read, read_text
from stress.text.span import SourceErrors

Errors = Callable[[str], str]

ONE = [
    (
        "R1 a b 10q",
        """\
set.cir:2:10: unknown suffix "q" in "10q"
  2 | R1 a b 10q
    |          ^
  hint: suffixes are f p n u m k meg g t, then a unit if you like (10u, 10uF, 4.7k, 1Meg)""",
    ),
    (
        "R1 a",
        """\
set.cir:2:4: R1: the card ends too early
  2 | R1 a
    |    ^
  hint: the form is R1 node node value""",
    ),
    (
        "C1 a b 1u\nc1 a b 2u",
        """\
set.cir:3:1: "c1" is defined twice, first at set.cir:2
  3 | c1 a b 2u
    | ^~
  hint: names are told apart without regard to upper and lower case""",
    ),
    (
        ".modle D1N D(IS=1n)\nR1 a 0 1",
        """\
set.cir:2:1: unknown control card ".modle"
  2 | .modle D1N D(IS=1n)
    | ^~~~~~
  hint: did you mean .model?""",
    ),
    (
        ".param rload=8\nR1 a 0 {rlaod*2}",
        """\
set.cir:3:9: undefined parameter "rlaod"
  3 | R1 a 0 {rlaod*2}
    |         ^~~~~
  hint: did you mean rload?""",
    ),
    (
        "R1 a 0 {2*(3+1}",
        """\
set.cir:2:15: expected ")", the expression ends here
  2 | R1 a 0 {2*(3+1}
    |               ^""",
    ),
    (
        "R1 a 0 {2*3",
        """\
set.cir:2:8: "{" is never closed
  2 | R1 a 0 {2*3
    |        ^
  hint: add the missing "}\"""",
    ),
    (
        "V1 a 0 SIN(0",
        """\
set.cir:2:8: SIN needs at least 2 numbers
  2 | V1 a 0 SIN(0
    |        ^~~""",
    ),
    (
        "F1 a 0 Vsens 2\nVsense b 0 1",
        """\
set.cir:2:8: F1: there is no element "Vsens"
  2 | F1 a 0 Vsens 2
    |        ^~~~~
  hint: did you mean vsense?""",
    ),
    (
        "X1 a s\n.subckt s p q\nR1 p q 1\n.ends",
        """\
set.cir:2:4: X1 has 1 nodes, s takes 2: p q
  2 | X1 a s
    |    ^~~
  hint: s is defined at set.cir:3""",
    ),
    (
        "X1 a s\n.subckt s p\nR1 p 0 1\n",
        """\
set.cir:3:1: .subckt has no .ends
  3 | .subckt s p
    | ^~~~~~~
  hint: add .ends behind its last line""",
    ),
    (
        "*\nR1 a\n+ 0\n+   4,7,q",
        """\
set.cir:5:9: "q" is not expected here
  5 | +   4,7,q
    |         ^""",
    ),
    (
        "\tR1\ta\tb\t1x2",
        """\
set.cir:2:10: unknown suffix "x2" in "1x2"
  2 | \tR1\ta\tb\t1x2
    | \t  \t \t \t ^~
  hint: suffixes are f p n u m k meg g t, then a unit if you like (10u, 10uF, 4.7k, 1Meg)""",
    ),
    (
        "R1 a 0 {1/0}",
        """\
set.cir:2:9: division by zero
  2 | R1 a 0 {1/0}
    |         ^~~""",
    ),
    (
        "B1 a 0 V=V(a)+*3",
        """\
set.cir:2:15: expected a number, a name or "(", got "*"
  2 | B1 a 0 V=V(a)+*3
    |               ^""",
    ),
    (
        "K1 L1 L2 1.2\nL1 a 0 1\nL2 b 0 1",
        """\
set.cir:2:10: a coupling of 1.2 is not possible
  2 | K1 L1 L2 1.2
    |          ^~~
  hint: a coupling lies from 0 to 1""",
    ),
    (
        "%1 a b 2",
        """\
set.cir:2:1: "%1" is no element: no card begins with "%"
  2 | %1 a b 2
    | ^~
  hint: elements begin with R C L K V I E F G H B D Q J Z M S W T O U Y P or X; \
a comment begins with *""",
    ),
]


@pytest.mark.parametrize(("body", "printed"), ONE, ids=[body[:14] for body, _ in ONE])
def test_error_is_printed_with_its_place(body: str, printed: str, errors_of: Errors):
    assert errors_of(body) == printed


def test_error_inside_subcircuits_tells_the_calls(errors_of: Errors):
    printed = errors_of(
        "XU2 a outer\n.subckt outer p\nX9 p inner\n.ends\n.subckt inner p\nR1 p 0 5zz\n.ends"
    )

    assert printed == (
        'set.cir:7:9: unknown suffix "zz" in "5zz"\n'
        "  7 | R1 p 0 5zz\n"
        "    |         ^~\n"
        "  in XU2.X9, called at set.cir:4\n"
        "  in XU2, called at set.cir:2\n"
        "  hint: suffixes are f p n u m k meg g t, then a unit if you like (10u, 10uF, 4.7k, 1Meg)"
    )


def test_error_in_an_include_tells_the_include(tmp_path: Path):
    (tmp_path / "parts.inc").write_text("* parts\nR1 a 0 1zz\n", encoding="utf-8")
    netlist = tmp_path / "set.cir"
    netlist.write_text("title\n.include parts.inc\n", encoding="utf-8")

    with pytest.raises(SourceErrors) as caught:
        read(netlist)

    assert str(caught.value).startswith(
        'parts.inc:2:9: unknown suffix "zz" in "1zz"\n'
        "  2 | R1 a 0 1zz\n"
        "    |         ^~\n"
        f"  in parts.inc, included at {netlist}:2\n"
    )


def test_five_mistakes_get_five_carets_in_the_order_of_the_text(errors_of: Errors):
    printed = errors_of(
        "R1 a b 4q7\nC1 a b 10u\nC1 a b 20u\nV1 a 0 SIN(0\n.modle D1N D\nB1 a 0 V=V(a)+*3"
    )

    places = [line for line in printed.split("\n") if line.startswith("set.cir:")]
    assert [place.split(": ")[0] for place in places] == [
        "set.cir:2:9",
        "set.cir:4:1",
        "set.cir:5:8",
        "set.cir:6:1",
        "set.cir:7:15",
    ]
    assert sum(set(line) <= set(" |^~") and "^" in line for line in printed.split("\n")) == 5


def test_error_of_a_subcircuit_used_often_is_told_once(errors_of: Errors):
    calls = "\n".join(f"X{k} a s" for k in range(50))

    printed = errors_of(f"{calls}\n.subckt s p\nR1 p 0 1zz\n.ends")

    assert printed.count("unknown suffix") == 1


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "set.cir: the netlist is empty"),
        (b"\n \n", "set.cir: the netlist is empty"),
        (b"\x7fELF\0\0\0\1", "set.cir: this is not a netlist but a binary file"),
        (
            b"Shopping\n1. solder\n2. flux\n3. a new bulb\n",
            "set.cir: this does not look like a netlist: none of its cards can be read",
        ),
    ],
    ids=["empty", "blank", "binary", "letter"],
)
def test_error_what_is_no_netlist_is_said_to_be_none(
    content: bytes, message: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
):
    monkeypatch.chdir(tmp_path)
    Path("set.cir").write_bytes(content)

    with pytest.raises(SourceErrors) as caught:
        read("set.cir")

    assert str(caught.value).split("\n")[0] == message


def test_error_missing_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    monkeypatch.chdir(tmp_path)

    with pytest.raises(SourceErrors) as caught:
        read("nowhere.cir")
    assert str(caught.value) == 'nowhere.cir: the file "nowhere.cir" does not exist'

    with pytest.raises(SourceErrors) as caught:
        read(".")
    assert "is a folder" in str(caught.value)


def test_unknown_dialect_is_refused():
    with pytest.raises(ValueError, match="no dialect 'xs'"):
        read_text("title\nR1 a 0 1\n", dialect="xs")


OBSTACLES = [
    (
        "D1 a 0 BY359\n.model BY359X D",
        """\
set.cir:2:8: the model "BY359" is missing
  2 | D1 a 0 BY359
    |        ^~~~~
  hint: did you mean by359x?""",
    ),
    (
        "XV1 a b c EL84",
        """\
set.cir:2:11: the subcircuit "EL84" is missing
  2 | XV1 a b c EL84
    |           ^~~~
  hint: include the file that has it, or use a type that the part table knows""",
    ),
    (
        ".include tubes.lib",
        """\
set.cir:2:10: the file "tubes.lib" is missing
  2 | .include tubes.lib
    |          ^~~~~~~~~
  hint: put the file beside the netlist, or name its folder with --library DIR""",
    ),
    (
        "F1 a b 1A",
        """\
set.cir:2:1: F1 is no current-controlled source: the form is F1 node node Vsource gain
  2 | F1 a b 1A
    | ^~
  hint: if it is a fuse, write it as a resistor of its cold resistance""",
    ),
    (
        "B1 a 0 V=frobnicate(V(a))",
        """\
set.cir:2:10: unknown function "frobnicate"
  2 | B1 a 0 V=frobnicate(V(a))
    |          ^~~~~~~~~~""",
    ),
]


@pytest.mark.parametrize(("body", "printed"), OBSTACLES, ids=[b[:12] for b, _ in OBSTACLES])
def test_obstacle_is_named_and_the_rest_is_read(body: str, printed: str):
    netlist = read_text(f"title\n{body}\nC5 a 0 100uF/450V\nR9 a 0 1k\n", path="set.cir")

    assert [str(obstacle) for obstacle in netlist.obstacles] == [printed]
    held = {element.name: element for element in netlist.elements}
    assert held["C5"].value == 1e-4
    assert held["C5"].tags.rated_V == 450
    assert held["R9"].nodes == ("a", "0")

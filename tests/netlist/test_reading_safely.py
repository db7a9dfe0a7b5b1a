"""A netlist is a stranger's text: it is bounded, it opens nothing elsewhere, it runs nothing.

Each test fails when its guard is taken out. The limits are those of the specification: a clear
message within 5 s and 500 MB; processor time is measured, so that a busy machine does no harm.
"""

from __future__ import annotations

import os
import resource
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from stress.netlist.read import read, read_text
from stress.text.span import SourceErrors

SECONDS = 5.0
KILOBYTES = 500_000


@pytest.fixture(autouse=True)
def _bounded() -> Iterator[None]:
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    start = time.process_time()
    yield
    assert time.process_time() - start < SECONDS
    assert resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before < KILOBYTES


def refusal(text: str) -> str:
    with pytest.raises(SourceErrors) as caught:
        read_text(text, path="set.cir")
    return str(caught.value)


def file_refusal(path: Path, **options: object) -> str:
    with pytest.raises(SourceErrors) as caught:
        read(path, **options)  # type: ignore[arg-type]
    return str(caught.value)


def written(path: Path, text: str) -> Path:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(text, encoding="utf-8")
    return path


def test_subcircuits_that_multiply():
    """Ten levels of ten are 10^10 parts."""
    levels = "\n".join(
        f".subckt s{k} p\n" + "\n".join(f"X{j} p s{k + 1}" for j in range(10)) + "\n.ends"
        for k in range(10)
    )

    assert "more than 50,000 elements after expansion" in refusal(
        f"title\nX1 a s0\n{levels}\n.subckt s10 p\nR1 p 0 1\n.ends\n"
    )


def test_subcircuits_that_multiply_but_hold_nothing():
    levels = "\n".join(
        f".subckt s{k} p\n" + "\n".join(f"X{j} p s{k + 1}" for j in range(10)) + "\n.ends"
        for k in range(10)
    )

    assert "more than 20,000 subcircuits" in refusal(
        f"title\nX1 a s0\n{levels}\n.subckt s10 p\n.ends\n"
    )


def test_subcircuit_that_holds_itself():
    assert "nested deeper than 40, or one that holds itself" in refusal(
        "title\nX1 a s\n.subckt s p\nR1 p 0 1\nX1 p s\n.ends\n"
    )


def test_subcircuit_that_holds_itself_twice():
    assert "20,000 subcircuits" in refusal("title\nX1 a s\n.subckt s p\nX1 p s\nX2 p s\n.ends\n")


def test_elements_without_end():
    cards = "\n".join(f"R{k} a 0 1" for k in range(200_000))

    assert "more than 50,000 elements" in refusal(f"title\n{cards}\n")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (".param a={b} b={c} c={a}\nR1 x 0 {a}", '"a" is defined by itself'),
        (".param a={a}\nR1 x 0 {a}", '"a" is defined by itself'),
        (".func f(x) {f(x)+1}\nR1 x 0 {f(1)}", "is defined by itself"),
        (".func f(x) {g(x)}\n.func g(x) {f(x)}\nB1 x 0 V=f(V(a))", "is defined by itself"),
        (
            ".param " + " ".join(f"p{k}={{p{k + 1}}}" for k in range(5000)) + " p5000=1\nR1 x 0 p0",
            "depend on each other more than",
        ),
        ("R1 x 0 {" + "(" * 5000 + "1" + ")" * 5000 + "}", "nested deeper than"),
        ("R1 x 0 {" + "-" * 5000 + "1}", "nested deeper than"),
        ("B1 x 0 V=" + "+".join(["V(a)"] * 5000), "levels"),
        ("B1 x 0 V=" + "V(a)^" * 5000 + "V(a)", "parts"),
        (
            "\n".join(f".func f{k}(x) {{f{k + 1}(x)+f{k + 1}(x)}}" for k in range(40))
            + "\n.func f40(x) {x}\nB1 x 0 V=f0(V(a))",
            "nested deeper than 60",
        ),
        (".func f(x) {x*x*x}\nB1 x 0 V=" + "f(" * 12 + "V(a)" + ")" * 12, "20000 parts"),
        (
            "\n".join(f".param m{k} {{m{k + 1}+m{k + 1}+V(a)}}" for k in range(40))
            + "\n.param m40 {V(a)}\nB1 x 0 V=m0",
            "parts",
        ),
        ("R1 x 0 {9" + "^9" * 50 + "}", "out of range"),
        ("R1 x 0 1e999999999999", "too large"),
        ("R1 x 0 1" + "0" * 310, "1000000"),
        ("R1 x 0 " + "9" * 150_000 + "zz", "unknown suffix"),
        ("E1 a 0 POLY(999999999) b 0 1", "is not possible"),
    ],
    ids=lambda text: text[:24].replace("\n", " "),
)
def test_names_and_expressions_are_bounded(text: str, message: str):
    assert message in refusal(f"title\n{text}\n")


@pytest.mark.parametrize(
    "text",
    [
        "R1 x 0 {" + "~{" * 90_000 + "}",
        "B1 x 0 V=" + "net-" * 45_000 + "(",
        "C1 x 0 " + "9" * 90_000 + "/450V_x",
        ".ic " + "v(" * 90_000,
        "V1 a 0 PWL(" + "0 0 " * 40_000 + "x",
        ".param " + "a" * 180_000,
        "*" * 180_000,
        "R1 a 0 " + "$" * 180_000,
        'R1 a 0 1k "' + ";" * 150_000,
        "\n" * 300_000 + "R1 a",
        ".protect\n" * 100_000,
        ".subckt s p\n" * 3000,
        ".if (1)\n" * 3000,
        "X1 " + "a " * 90_000 + "nothing",
        "\n".join(f"D{k} a 0 mod{k}" for k in range(3000)),
        "\n".join(f".model m{k} D" for k in range(20_000)) + "\nD1 a 0 m2x\nD2 a 0 m3x\nD3 a 0 zz",
    ],
    ids=lambda text: text[:16].replace("\n", " "),
)
def test_no_text_takes_more_than_linear_time(text: str):
    told = "read"
    try:
        read_text(f"title\n{text}\n")
    except SourceErrors as errors:
        told = str(errors)
    assert told


def test_a_line_of_100_megabytes(tmp_path: Path):
    path = tmp_path / "long.cir"
    with open(path, "wb") as stream:
        stream.write(b"title\nR1 a 0 ")
        for _ in range(100):
            stream.write(b"1" * 1_000_000)

    assert "more than 24 MB to read" in file_refusal(path)


def test_a_card_of_20_megabytes(tmp_path: Path):
    path = tmp_path / "card.cir"
    path.write_bytes(b"title\nR1 a 0 " + b"1 " * 10_000_000)

    assert "a card of more than 200,000 characters" in file_refusal(path)


def test_lines_without_end(tmp_path: Path):
    path = tmp_path / "lines.cir"
    path.write_bytes(b"title\n" + b"\n" * 2_000_000)

    assert "more than 1,000,000 lines" in file_refusal(path)


def test_includes_that_include_each_other(tmp_path: Path):
    written(tmp_path / "a.inc", ".include b.inc\n")
    written(tmp_path / "b.inc", ".include a.inc\n")
    path = written(tmp_path / "set.cir", "title\n.include a.inc\nR1 a 0 1\n")

    assert '"a.inc" includes itself' in file_refusal(path)


def test_netlist_that_includes_itself(tmp_path: Path):
    path = written(tmp_path / "set.cir", "title\n.include SET.cir\nR1 a 0 1\n")

    assert '"set.cir" includes itself' in file_refusal(path)


def test_includes_nested_too_deep(tmp_path: Path):
    for k in range(35):
        written(tmp_path / f"i{k}.inc", f".include i{k + 1}.inc\n")
    written(tmp_path / "i35.inc", "R1 a 0 1\n")
    path = written(tmp_path / "set.cir", "title\n.include i0.inc\n")

    assert "includes nested deeper than 30" in file_refusal(path)


def test_includes_that_multiply(tmp_path: Path):
    for k in range(25):
        written(tmp_path / f"i{k}.inc", f".include i{k + 1}.inc\n.include i{k + 1}.inc\n")
    written(tmp_path / "i25.inc", "R1 a 0 1\n")
    path = written(tmp_path / "set.cir", "title\n.include i0.inc\n")

    printed = file_refusal(path)

    assert "more than 500 includes" in printed


def test_large_file_included_often(tmp_path: Path):
    written(tmp_path / "big.inc", "* remark\n" * 900_000)
    path = written(tmp_path / "set.cir", "title\n" + ".include big.inc\n" * 100)

    assert "lines are included" in file_refusal(path)


@pytest.fixture
def secret(tmp_path: Path) -> Path:
    return written(tmp_path / "elsewhere" / "secret.txt", "top-secret words that are no card\n")


@pytest.mark.parametrize(
    "named",
    ["../elsewhere/secret.txt", "{absolute}", "sub/../../elsewhere/secret.txt", "link.txt"],
)
@pytest.mark.parametrize("card", [".include {}", '.include "{}"', ".lib {} tt", ".lib '{}'"])
def test_include_outside_the_folder_is_not_read(
    card: str, named: str, tmp_path: Path, secret: Path
):
    folder = tmp_path / "set"
    (folder / "sub").mkdir(parents=True)
    os.symlink(secret, folder / "link.txt")
    named = named.format(absolute=secret)
    path = written(folder / "set.cir", f"title\n{card.format(named)}\nD1 a 0 dx\n")

    netlist = read(path)

    printed = "\n".join(str(obstacle) for obstacle in netlist.obstacles)
    assert "lies outside the folder of the netlist and is not read" in printed
    assert "top-secret" not in printed
    assert "words" not in printed


def test_message_does_not_tell_whether_a_file_outside_exists(tmp_path: Path, secret: Path):
    told = []
    for name in ("secret.txt", "nothing.txt"):
        path = written(tmp_path / "set" / "set.cir", f"title\n.include ../elsewhere/{name}\n")
        told.append(str(read(path).obstacles[0]).replace(name, "NAME"))

    assert told[0].split("\n")[0] == told[1].split("\n")[0]


def test_folder_named_as_library_opens(tmp_path: Path):
    library = written(tmp_path / "models" / "diodes.lib", ".model dx D(IS=3n)\n").parent
    path = written(tmp_path / "set" / "set.cir", "title\n.lib diodes.lib\nD1 a 0 dx\n")

    assert read(path).obstacles
    assert read(path, libraries=[library]).models["dx"].parameters == {"is": 3e-9}


@pytest.mark.parametrize("device", ["/dev/zero", "fifo"])
def test_only_plain_files_are_opened(device: str, tmp_path: Path):
    if device == "fifo":
        os.mkfifo(tmp_path / "fifo")
        device = str(tmp_path / "fifo")

    assert "is no plain file" in file_refusal(Path(device))

    folder = tmp_path / "set"
    folder.mkdir()
    os.symlink(device, folder / "parts.inc")
    path = written(folder / "set.cir", "title\n.include parts.inc\nR1 a 0 1\n")
    with pytest.raises(SourceErrors, match="is no plain file"):
        read(path, libraries=[Path("/dev"), tmp_path])


def test_nothing_is_executed(tmp_path: Path, monkeypatch: pytest.MonkeyPatch):
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.chdir(tmp_path)
    for name in (".spiceinit", "spice.rc", "spinit"):
        written(tmp_path / name, "shell touch executed\n")
    path = written(
        tmp_path / "set.cir",
        "title\n.control\nshell touch executed\nsource set.cir\n.endc\n.csparam a=1\n"
        ".exec touch executed\n.shell touch executed\n.hdl x.va\n*ng_script\n"
        "R1 a 0 {__import__('os').system('touch executed')}\n",
    )

    with pytest.raises(SourceErrors):
        read(path)

    assert sorted(p.name for p in tmp_path.iterdir()) == [
        ".spiceinit",
        "set.cir",
        "spice.rc",
        "spinit",
    ]


def test_control_blocks_and_scripts_are_listed_as_ignored():
    netlist = read_text(
        "title\n.control\nshell touch executed\n.endc\n.hdl x.va\n.exec rm\nR1 a 0 1\n"
    )

    assert [ignored.what for ignored in netlist.ignored] == [
        ".control block: nothing in it is ever run",
        ".hdl: compiled models are never loaded",
        ".exec: nothing in a netlist is ever run",
    ]

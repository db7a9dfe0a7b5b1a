"""Whatever happens to a good sheet, it is read or refused with places, never a traceback."""

import tomllib

from hypothesis import given, settings
from hypothesis import strategies as st

from stress.parts.read_sheet import read_text
from stress.parts.sheet import Sheet
from stress.parts.toml_source import parse
from stress.text.span import SourceErrors

GOOD = '''\
devices = ["XA"] # "quoted" comment
[equipment]
name = """Shore
station "receiver\\""""
ambient = '40 degC'
touchable = [
  "chassis", # [not] a table
  "antenna",
]
[line]
source = "Vline"
nominal = "117 V"
high = "126 V"
[capacitors]
C1.rated = "450 V"
C2 = { rated = "400 V", tolerance = ["-20 %", "50 %"], fitted = { value = "0.022 uF" } }
[capacitors."X3.C5"]
style = "paper"
value = "0.02 uF"
[tubes.XU2]
pins = { plate = "A", grid = 2 }
limits = { plate_dissipation = "12 W" }
[resistors.Rk2]
rated = "1/2 W"
[conditions.standby]
open = ["SW2"]
[bench]
safety = 2.0
'''
LINES = GOOD.split("\n")
PIECES = [
    "[",
    "]",
    "[[",
    "]]",
    "{",
    "}",
    "=",
    '"',
    "'",
    "#",
    ".",
    ",",
    "\n",
    "\\",
    "\t",
    "é",
    "4 V",
]


def check(content):
    """Read, and hold the errors to what they promise."""
    try:
        assert isinstance(read_text(content, path="set.toml"), Sheet)
    except SourceErrors as caught:
        errors = caught.errors
    else:
        return
    lines = content.replace("\r\n", "\n").split("\n")
    assert errors
    for error in errors:
        assert str(error).startswith("set.toml:")
        if error.span.line:
            assert error.span.text in lines[error.span.line - 1]
            assert 1 <= error.span.column <= len(error.span.text) + 1


@settings(max_examples=3000, deadline=None)
@given(st.integers(0, len(GOOD)), st.integers(0, 6), st.lists(st.sampled_from(PIECES), max_size=3))
def test_fuzz_error_of_a_change_anywhere(at, gone, pieces):
    check(GOOD[:at] + "".join(pieces) + GOOD[at + gone :])


@settings(max_examples=1500, deadline=None)
@given(st.lists(st.sampled_from(LINES), max_size=12))
def test_fuzz_error_of_lines_in_any_order(lines):
    check("\n".join(lines))


@settings(max_examples=1000, deadline=None)
@given(st.text(max_size=60))
def test_fuzz_error_of_any_text(content):
    check(content)


values = st.recursive(
    st.one_of(
        st.text(max_size=12).map(lambda text: "'" + text.replace("'", "").replace("\n", "") + "'"),
        st.integers(-5, 10**25).map(str),
        st.floats().map(str),
        st.sampled_from(["true", "1979-05-27T07:32:00Z", "07:32:00", '"400 V"', '"\\u0041 \\" V"']),
    ),
    lambda inner: st.one_of(
        st.lists(inner, max_size=3).map(lambda items: f"[{', '.join(items)}]"),
        st.dictionaries(st.sampled_from(["a", '"b.c"', "rated", "'d'"]), inner, max_size=2).map(
            lambda table: "{" + ", ".join(f"{k} = {v}" for k, v in table.items()) + "}"
        ),
    ),
    max_leaves=4,
)


@settings(max_examples=1500, deadline=None)
@given(
    st.sampled_from(
        ["equipment", "line", "capacitors.C1", "tubes.X1", "cans.K", "bench", "blocks"]
    ),
    st.sampled_from(["name", "ambient", "rated", "limits", "pins", "sections", "safety", "names"]),
    values,
)
def test_fuzz_error_of_any_value(table, key, value):
    check(f"[{table}]\n{key} = {value}\n")


def paths(value, path=()):
    """Yield the path of everything in a document."""
    inner = value.items() if isinstance(value, dict) else enumerate(value)
    for key, one in inner:
        yield (*path, key)
        if isinstance(one, dict | list):
            yield from paths(one, (*path, key))


@settings(max_examples=300, deadline=None)
@given(st.dictionaries(st.sampled_from(["a", "b", '"c d"', "'e'"]), values, max_size=4))
def test_every_value_has_a_place(table):
    content = "[[t]]\n[t.u]\n" + "\n".join(f" {k} = {v} # end" for k, v in table.items())
    try:
        expected = tomllib.loads(content)
    except tomllib.TOMLDecodeError:
        return
    document = parse(content, file="set.toml")
    for path in paths(expected):
        assert path in document.places or path in document.keys, path
        assert document.place(path).line > 0

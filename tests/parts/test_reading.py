"""Readings from the bench: usable rows, and what is asked back about the others."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from stress.parts.reading import COLUMNS, HEADER, Reading, form, read, read_text
from stress.text.span import SourceErrors

HEAD = "part,capacitance,esr,leakage,at,minutes,temperature,esr_frequency,resistance,inductance,state\n"


def one(row, head=HEAD):
    readings = read_text(head + row, file="bench.csv")
    assert readings.problems == ()
    (found,) = readings.rows
    return found


def test_a_whole_row():
    found = one("C9,0.052 uF,12 ohm,2.4 uA,300 V,2 min,22 degC,100 kHz,,,\n")
    assert (found.part, found.capacitance_F, found.leakage_A) == ("C9", 0.052e-6, 2.4e-6)
    assert (found.at_V, found.after_s, found.temperature_degC) == (300.0, 120.0, 22.0)
    assert (found.esr_ohm, found.esr_Hz) == (12.0, 100e3)
    assert (found.resistance_ohm, found.inductance_H, found.state) == (None, None, None)
    assert str(found.span) == "bench.csv:2:1"
    assert found.spans["leakage"].column == 20


ROWS = [
    ("part,state\nC5,Short\n", {"state": "short"}),
    ("State,Part\nopen,C5\n", {"state": "open"}),
    ("part,resistance\nR7,560 kohm\n", {"resistance_ohm": 560e3}),
    ("part;leakage;at\nC5;0 A;400 V\n", {"leakage_A": 0.0, "at_V": 400.0}),
    ("part\tinductance\nL1\t9 H\n", {"inductance_H": 9.0}),
    ("part,capacitance,\nC5,22u,\n", {"capacitance_F": 22e-6}),
    ('"part","capacitance"\n"C5","0.05 uF"\n', {"capacitance_F": 0.05e-6}),
    ("# museum\n\npart , capacitance\n C5 , 5 µF \n,,\n", {"capacitance_F": 5e-6}),
    (
        "part,leakage,at,minutes\nC5,1 uA,9 V,3\n",
        {"leakage_A": 1e-6, "at_V": 9.0, "after_s": 180.0},
    ),
    ("part,esr,esr frequency\nC5,0.3 ohm,100 kHz\n", {"esr_ohm": 0.3, "esr_Hz": 100e3}),
]


@pytest.mark.parametrize(("content", "fields"), ROWS)
def test_columns_in_any_order_and_spelling(content, fields):
    found = one(content, head="")
    for name in Reading.__dataclass_fields__:
        if name not in ("span", "spans", "part"):
            assert getattr(found, name) == fields.get(name), name


PROBLEMS = [
    (
        "C5,20 mF,,,,,,,,,",
        'bench.csv:2:4: C5, capacitance: "20 mF" is an old way to write a capacitance, or a rare'
        " one\n  2 | C5,20 mF,,,,,,,,,\n    |    ^~~~~\n"
        '  hint: if it comes from an old document, write "20 uF"; if millifarads are meant, write'
        ' "20000 uF"',
    ),
    (
        "C5,,,2.4 uA,,,,,,,",
        "bench.csv:2:6: C5: at which voltage was the leakage measured?\n"
        "  2 | C5,,,2.4 uA,,,,,,,\n    |      ^~~~~~\n"
        '  hint: fill in "at", such as 400 V',
    ),
]


@pytest.mark.parametrize(("row", "printed"), PROBLEMS)
def test_error_points_at_the_cell(row, printed):
    readings = read_text(HEAD + row, file="bench.csv")
    assert [str(problem) for problem in readings.problems] == [printed]
    assert readings.rows == ()


MESSAGES = [
    ("C5,3 V,,,,,,,,,", 'C5, capacitance: "3 V" is a voltage'),
    ("C5,-3 uF,,,,,,,,,", 'C5, capacitance: "-3 uF" is too small'),
    ("C5,0 uF,,,,,,,,,", 'C5, capacitance: "0 uF" is too small'),
    ("C5,,-1 ohm,,,,,1 kHz,,,", 'C5, esr: "-1 ohm" is too small'),
    ("C5,,1 ohm,,,,,,,,", "at which frequency was the series resistance measured?"),
    ("C5,,,1 uA,0 V,,,,,,", 'C5, at: "0 V" is too small'),
    ("C5,,,1,300 V,,,,,,", 'C5, leakage: "1" has no unit'),
    (",1 uF,,,,,,,,,", "this row names no part"),
    ("C5,,,,300 V,,,,,,", "C5: nothing was measured"),
    ("C5,,,,,,,,,,burnt", 'C5: "burnt" is no state'),
    ("C5,1 uF,,,,,,,,,open", "C5 is open and has a capacitance"),
    ("C5,1 uF,,,,,,,,,short", "C5 is a short and has a capacitance"),
    ("C5,,,1 uA,300 V,,,,,,open", "C5 is open and leaks"),
    ("C5,1 uF,,,,,,,,,,extra", "this row has more cells than the header"),
    ("C5,1 uF,,,,,,,,,\nc5,2 uF,,,,,,,,,", "c5 stands twice"),
    ('C5,"1 uF,,,,,,,,,', "is no quantity"),
]


@pytest.mark.parametrize(("row", "message"), MESSAGES)
def test_error_of_a_row_leaves_the_others(row, message):
    readings = read_text(f"{HEAD}C1,1 uF,,,,,,,,,\n{row}\nC2,2 uF,,,,,,,,,\n", file="bench.csv")
    assert any(message in problem.message for problem in readings.problems)
    assert {"C1", "C2"} <= {reading.part for reading in readings.rows}
    assert all(problem.span.line in (3, 4) for problem in readings.problems)


def test_a_part_may_be_read_at_several_voltages():
    content = "part,leakage,at\nC5,1 uA,100 V\nC5,3 uA,200 V\nC5,9 uA,200 V\n"
    readings = read_text(content, file="bench.csv")
    assert [reading.at_V for reading in readings.rows] == [100.0, 200.0]
    assert readings.problems[0].hint == (
        "the first reading is on line 3; several voltages may stand"
    )


def test_what_is_usable_of_a_row_stays():
    """The capacitance stands, the leakage without its voltage is asked back."""
    readings = read_text(HEAD + "C5,0.05 uF,,2 uA,,,,,,,\n", file="bench.csv")
    assert len(readings.problems) == 1
    assert readings.rows[0].capacitance_F == 0.05e-6
    assert readings.rows[0].leakage_A is None


def test_error_unknown_and_repeated_columns():
    readings = read_text("part,capacitence,esr,esr\nC5,1 uF,,\n", file="bench.csv")
    assert [problem.message for problem in readings.problems] == [
        'unknown column "capacitence"',
        'the column "esr" stands twice',
    ]
    assert readings.problems[0].hint == 'did you mean "capacitance"?'


@pytest.mark.parametrize("content", ["", "\n\n", "C5,1 uF\n", "a;b;c\n1;2;3"])
def test_error_no_header(content):
    with pytest.raises(SourceErrors, match='no column "part"'):
        read_text(content, file="bench.csv")


def test_form_is_read_back_empty():
    printed = form(["C1", "X3.C5"])
    assert printed == f"{','.join(HEADER)}\nC1,,,,,,,,,,\nX3.C5,,,,,,,,,,\n"
    readings = read_text(printed, file="form.csv")
    assert readings.rows == ()
    assert readings.problems == ()


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "latin-1"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_files_of_any_spreadsheet(tmp_path, encoding, end):
    path = tmp_path / "bench.csv"
    path.write_bytes(f"part;capacitance{end}C5;5 µF{end}".encode(encoding))
    assert read(path).rows[0].capacitance_F == 5e-6


def test_error_files(tmp_path):
    with pytest.raises(SourceErrors, match="the readings cannot be read"):
        read(tmp_path / "none.csv")
    path = tmp_path / "bench.csv"
    path.write_bytes(b"PK\x03\x04\0\0")
    with pytest.raises(SourceErrors, match="large or binary file"):
        read(path)


cells = st.one_of(
    st.just(""),
    st.sampled_from(
        ["C5", "1 uF", "open", "2 min", "300 V", '"', '"a""b"', "8 MFD", "-1 A", "1e999 V"]
    ),
    st.text(max_size=8),
)


@settings(max_examples=1000, deadline=None)
@given(
    st.permutations(HEADER),
    st.lists(st.lists(cells, max_size=13), max_size=4),
    st.sampled_from(",;\t"),
)
def test_fuzz_error_of_any_table(header, rows, separator):
    content = "\n".join(separator.join(row) for row in [header, *rows])
    readings = read_text(content, file="bench.csv")
    for problem in readings.problems:
        assert problem.span.line > 1
        assert str(problem).startswith("bench.csv:")
    for reading in readings.rows:
        values = [getattr(reading, column.field) for column in COLUMNS.values()]
        assert reading.part
        assert reading.state or any(value is not None for value in values)

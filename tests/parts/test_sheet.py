"""A part sheet into records, and the errors of a bad one."""

import pickle
from pathlib import Path

import pytest

from stress.parts.limit import Limit, Rating
from stress.parts.read_sheet import read, read_text
from stress.parts.sheet import ConditionEntry, FaultEntry, Sheet
from stress.text.span import SourceErrors

FULL = """\
devices = ["XA"]
[equipment]
name = "Shore-station receiver"
ambient = "40 degC"
heaters = "parallel"
touchable = ["chassis", "antenna"]
tubes_out = true
[line]
source = ["Va", "Vb"]
nominal = "117 V"
high = "126 V"
low = "105 V"
period = "16.667 ms"
[capacitors.C5]
style = "wax"  # an alias
plus = "p1"
rated = "400 V"
value = "0.02 uF"
esr = "2 ohm"
insulation = "2 Gohm"
ripple = "70 mA"
tolerance = ["-20 %", "50 %"]
year = 1938
metal_case = true
fitted = { value = "0.022 uF", rated = "630 V", style = "mylar" }
[capacitors.X3.C6]
tolerance = "10 %"
[capacitors."X3.X1.C7"]
style = "mica"
[tubes.XU2]
type = "6V6GT"
pins = { plate = "A", screen = "S", grid = "G", cathode = 4 }
limits = { plate_dissipation = "12 W", heater_cathode_voltage = "90 V", grid_circuit = "0.5 Mohm" }
[tubes.XV1]
type = "5Y3GT"
rectifier = true
rating = "design-maximum"
limits = { peak_current = "400 mA" }
[resistors.Rk2]
rated = "1/2 W"
voltage = "350 V"
[windings.Lop]
current = "70 mA"
irreplaceable = true
[diodes.D1]
current = "150 mA"
peak_current = "5 A"
reverse = "1400 V"
[transistors.Q1]
power = "30 W"
voltage = "32 V"
current = "3 A"
[fuses.F1]
current = "1 A"
class = "slow"
[controls.P1]
power = "0.5 W"
[loudspeakers.LS1]
rated = "5 W"
irreplaceable = true
[cans.K1]
sections = ["C1", "C2"]
common = "0"
[conditions.standby]
open = ["SW2"]
line = "nominal"
lasts = false
[faults.wax]
between = ["a", "b"]
style = "paper"
[blocks]
names = ["X3"]
[meter]
sensitivity = "20 kohm/V"
[bench]
temperature = "22 degC"
safety = 3
tester = ["50 V", "400 V"]
functional = "15 %"
[likelihood]
paper = 2
electrolytic = "50 %"
"""


def limit(value, rating):
    return Limit(value=value, source="sheet", rating=rating)


def test_every_table_is_read():
    sheet = read_text(FULL, path="set.toml")

    assert sheet.equipment.name == "Shore-station receiver"
    assert sheet.equipment.ambient_degC == 40.0
    assert sheet.equipment.touchable == ("chassis", "antenna")
    assert sheet.equipment.tubes_out
    assert sheet.line.sources == ("Va", "Vb")
    assert (sheet.line.nominal_V, sheet.line.high_V, sheet.line.low_V) == (117.0, 126.0, 105.0)
    assert sheet.line.period_s == 0.016667

    c5 = sheet.capacitors["c5"]
    assert (c5.style, c5.plus, c5.rated_V, c5.value_F) == ("paper", "p1", 400.0, 0.02e-6)
    assert (c5.esr_ohm, c5.insulation_ohm, c5.ripple_A, c5.year) == (2.0, 2e9, 0.07, 1938)
    assert c5.tolerance == (0.8, 1.5)
    assert (c5.fitted_value_F, c5.fitted_rated_V, c5.fitted_style) == (0.022e-6, 630.0, "film")
    assert c5.metal_case
    assert sheet.capacitors["x3.c6"].tolerance == (0.9, 1.1)
    assert sheet.capacitors["x3.x1.c7"].style == "mica"

    tube = sheet.tubes["xu2"]
    assert tube.pins == {"plate": "A", "screen": "S", "grid": "G", "cathode": "4"}
    assert tube.limits == {
        "plate_W": limit(12.0, Rating.DESIGN_CENTRE),
        "heater_cathode_V": limit(90.0, Rating.DESIGN_CENTRE),
    }
    assert tube.grid_circuit_ohm == 0.5e6
    assert sheet.tubes["xv1"].limits == {"peak_A": limit(0.4, Rating.DESIGN_MAXIMUM)}
    assert sheet.tubes["xv1"].rectifier is True

    part_limits = {
        name: dict(entry.limits)
        for table in (
            sheet.resistors,
            sheet.windings,
            sheet.diodes,
            sheet.transistors,
            sheet.fuses,
            sheet.controls,
            sheet.loudspeakers,
        )
        for name, entry in table.items()
    }
    assert {
        name: {stress: one.value for stress, one in limits.items()}
        for name, limits in part_limits.items()
    } == {
        "rk2": {"power_W": 0.5, "voltage_V": 350.0},
        "lop": {"current_A": 0.07},
        "d1": {"average_A": 0.15, "peak_A": 5.0, "reverse_V": 1400.0},
        "q1": {"power_W": 30.0, "voltage_V": 32.0, "current_A": 3.0},
        "f1": {"current_A": 1.0},
        "p1": {"power_W": 0.5},
        "ls1": {"power_W": 5.0},
    }
    assert {one.rating for limits in part_limits.values() for one in limits.values()} == {
        Rating.ABSOLUTE
    }
    assert sheet.windings["lop"].irreplaceable
    assert sheet.fuses["f1"].blow_class == "slow"

    assert sheet.cans[0].sections == ("C1", "C2")
    assert sheet.conditions == (
        ConditionEntry(name="standby", open=("SW2",), line="nominal", lasts=False),
    )
    assert sheet.faults == (FaultEntry(name="wax", between=("a", "b"), style="paper"),)
    assert (sheet.devices, sheet.blocks) == (("XA",), ("X3",))
    assert sheet.meter_ohm_per_V == 20e3
    assert (sheet.bench_degC, sheet.safety, sheet.functional_share) == (22.0, 3.0, 0.15)
    assert sheet.tester_V == (50.0, 400.0)
    assert sheet.likelihood == {"paper": 2.0, "aluminium": 0.5}


def test_entries_know_their_place():
    sheet = read_text(FULL, path="set.toml")
    assert str(sheet.span("capacitors", "C5")) == "set.toml:14:2"
    assert sheet.span("capacitors", "c5", "plus").text == 'plus = "p1"'
    assert sheet.span("capacitors", "C5", "role") == sheet.span("capacitors", "c5")
    assert sheet.span("capacitors", "x3.c6").text == "[capacitors.X3.C6]"
    assert sheet.span("capacitors", "c99") is None


def test_marking_fills_what_is_left_open():
    sheet = read_text(
        "[capacitors.C1]\nmarking = 'mica-three: red green black'\nrated = '300 V'\n"
        "[capacitors.C2]\nmarking = '104K2E'",
        path="set.toml",
    )
    c1, c2 = sheet.capacitors["c1"], sheet.capacitors["c2"]
    assert (c1.value_F, c1.rated_V, c1.style) == (25e-12, 300.0, "mica")
    assert (c2.value_F, c2.rated_V, c2.style) == (100e-9, 250.0, None)
    assert c2.tolerance == (0.9, 1.1)


def test_sheet_crosses_to_another_process():
    sheet = read_text(FULL, path="set.toml")
    assert pickle.loads(pickle.dumps(sheet)) == sheet


def test_everything_is_optional():
    assert read_text("", path="set.toml") == Sheet(path="set.toml")


ERRORS = [
    (
        '[capacitors.C5]\nrated = "12 W"',
        'set.toml:2:9: [capacitors.C5] rated: "12 W" is a power, and a voltage is wanted\n'
        '  2 | rated = "12 W"\n'
        "    |         ^~~~~~\n"
        '  hint: such as "117 V"',
    ),
    (
        "[capacitors.C5]\nrated = 400",
        "set.toml:2:9: [capacitors.C5] rated: a quantity needs its unit\n"
        "  2 | rated = 400\n"
        "    |         ^~~\n"
        '  hint: write it in quotes, such as "400 V"',
    ),
    (
        '[capacitors.C5]\nvalue = "20 mF"',
        'set.toml:2:9: [capacitors.C5] value: "20 mF" is an old way to write a capacitance, or a'
        " rare one\n"
        '  2 | value = "20 mF"\n'
        "    |         ^~~~~~~\n"
        '  hint: if it comes from an old document, write "20 uF"; if millifarads are meant, write'
        ' "20000 uF"',
    ),
    (
        '[capacitor.C5]\nrated = "400 V"',
        'set.toml:1:2: unknown table "capacitor"\n'
        "  1 | [capacitor.C5]\n"
        "    |  ^~~~~~~~~~~~\n"
        '  hint: did you mean "capacitors"?',
    ),
    (
        '[tubes.XU2]\nlimits = { plate_disipation = "12 W" }',
        'set.toml:2:12: unknown key "plate_disipation" in [tubes.XU2.limits]\n'
        '  2 | limits = { plate_disipation = "12 W" }\n'
        "    |            ^~~~~~~~~~~~~~~~\n"
        '  hint: did you mean "plate_dissipation"?',
    ),
    (
        '[capacitors.C5]\nstyle = "papper"',
        'set.toml:2:9: [capacitors.C5] style: "papper" is no capacitor style\n'
        '  2 | style = "papper"\n'
        "    |         ^~~~~~~~\n"
        '  hint: did you mean "paper"?',
    ),
    (
        "[capacitors.C5]\nrated = 400 V",
        "set.toml:2:13: this is no TOML: expected newline or end of document after a statement\n"
        "  2 | rated = 400 V\n"
        "    |             ^\n"
        '  hint: texts and quantities stand in quotes, such as "400 V"',
    ),
    (
        "[cans.K]\ncommon = '0'",
        'set.toml:1:2: [cans.K]: "sections" is missing\n  1 | [cans.K]\n    |  ^~~~~~',
    ),
]


@pytest.mark.parametrize(("content", "printed"), ERRORS)
def test_error_points_at_its_place(content, printed):
    with pytest.raises(SourceErrors) as caught:
        read_text(content, path="set.toml")
    assert str(caught.value) == printed


MESSAGES = [
    ('[equipment]\nheaters = "serial"', '"serial" is not known here'),
    ('[equipment]\nambient = "400 degC"', '"400 degC" is too large'),
    ("[equipment]\ndriven = 1", "true or false is wanted"),
    ("[equipment]\nname = ''", "a text in quotes is wanted"),
    ("equipment = 3", "a table is wanted here"),
    ('[line]\nnominal = "117 V"\nhigh = "110 V"', "the high line is below the nominal one"),
    ('[line]\nnominal = "117 V"\nlow = "120 V"', "the low line is above the nominal one"),
    ('[capacitors.C5]\nrated = "-4 V"', '"-4 V" is too small'),
    ('[capacitors.C5]\nrated = "0 V"', '"0 V" is too small'),
    ("[capacitors.C5]\nmarking = '1O4'", '"1O4" is no code such as'),
    ("[capacitors.C5]\nyear = 38", "a whole number from 1900 to 2100 is wanted"),
    ('[capacitors.C5]\ntolerance = ["5 %"]', "two values are wanted"),
    ('[capacitors.C5]\ntolerance = ["5 %", "-5 %"]', "the lower value comes first"),
    ("[capacitors.C5]\n[capacitors.c5]", "C5 has been described above already"),
    ('[resistors.R1]\nrated = "1 W"\npower = "2 W"', 'this says the same as "rated"'),
    ("[tubes.X1]\npins = { pinplate = 3 }", 'unknown pin "pinplate"'),
    ("[tubes.X1]\npins = { plate = 3.5 }", "a pin name in quotes or a number from 1"),
    ('[tubes.X1]\nlimts = { plate_voltage = "300 V" }', 'unknown key "limts"'),
    ("[conditions.high]\nlasts = true", "this condition is always there"),
    ('[faults.f]\nbetween = ["a"]', "2 values are wanted, not 1"),
    ('[faults.f]\nbetween = ["a", "A"]', "two different nodes are wanted"),
    ("[bench]\nsafety = 0.5", "0.5 is too small"),
    ("[likelihood]\npapper = 2", 'unknown capacitor style "papper"'),
    ("[meter]\nresistance = 1e7", "a quantity needs its unit"),
    ("a = " + "[" * 450 + "]" * 450, "nest"),
    ("a = " + "[\n" * 20_000, "nested too deep"),
    ("a" + ".a" * 300 + " = 1", '"a" nests more than 8'),
    ("a" + ".a" * 3000 + " = 1", "a line has more than 1000 characters"),
    ("#\n" * 200_000, "more than 300000 characters"),
    ("[capacitors.C5]\nrated = 1979-05-27", "a quantity in quotes is wanted"),
    ("[capacitors.C5]\nrated = inf", "a quantity needs its unit"),
    ("[bench]\nsafety = nan", "no finite number"),
]


@pytest.mark.parametrize(("content", "message"), MESSAGES, ids=lambda text: text[:40])
def test_error_says_what_is_wrong(content, message):
    with pytest.raises(SourceErrors) as caught:
        read_text(content, path="set.toml")
    assert message in caught.value.errors[0].message


def test_errors_of_a_file_come_at_once_and_in_order():
    content = '[tubes.X1]\ntype = 3\n[equipment]\nheaters = 3\n[capacitors.C1]\nrated = "x"'
    with pytest.raises(SourceErrors) as caught:
        read_text(content, path="set.toml")
    assert [error.span.line for error in caught.value.errors] == [2, 4, 6]


def test_error_missing_file(tmp_path):
    with pytest.raises(SourceErrors, match="the part sheet cannot be read"):
        read(tmp_path / "none.toml")


def test_error_binary_file(tmp_path):
    path = tmp_path / "set.toml"
    path.write_bytes(b'[equipment]\nname = "\xff\xfe"\n')
    with pytest.raises(SourceErrors) as caught:
        read(path)
    (error,) = caught.value.errors
    assert error.message == "this is no UTF-8 text"
    assert (error.span.line, error.span.column) == (2, 9)


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig"])
def test_line_ends_and_marks_do_not_matter(tmp_path: Path, encoding):
    path = tmp_path / "set.toml"
    path.write_bytes(FULL.replace("\n", "\r\n").encode(encoding))
    assert read(path).capacitors == read_text(FULL, path="").capacitors

"""The type table: nothing without a source, spot checks, names, and users' own tables."""

import re
from dataclasses import fields
from pathlib import Path

import pytest

from stress.parts import models, types
from stress.parts.limit import STRESSES, Rating
from stress.parts.recognise import plain
from stress.parts.type import MARKS, TypeEntry
from stress.parts.type_cell import FAMILIES
from stress.text.span import SourceErrors

ALL = types.all_types()
SOURCED = {
    f.name for f in fields(TypeEntry) if "unit" in f.metadata and f.name not in ("plates", "diodes")
}


def test_the_table_is_as_large_as_promised():
    tubes = [e for e in ALL if e.heater_V is not None or e.gas]
    assert len(tubes) >= 70
    assert len([e for e in models.modelled() if e.model == e.name]) >= 35
    assert {e.family for e in ALL} == set(FAMILIES)


def test_names_and_aliases_are_unique():
    seen: dict[str, str] = {}
    for entry in ALL:
        for word in (entry.name, *entry.aliases):
            assert plain(word) not in seen, f"{word}: {entry.name} and {seen[plain(word)]}"
            seen[plain(word)] = entry.name


@pytest.mark.parametrize("entry", ALL, ids=lambda e: e.name)
def test_no_number_lacks_a_source(entry):
    """Every number has a source with a mark, or words that say it is from practice or memory."""
    for name in SOURCED:
        if getattr(entry, name) is not None:
            source = entry.sources[name]
            assert source.mark in MARKS
            assert source.text or source.mark != "read"
    for stress, limit in entry.limits.items():
        assert stress in STRESSES
        assert limit.value > 0
        assert limit.source == str(entry.sources[f"limits.{stress}"])
        assert not limit.assumed
    for line in entry.operation:
        assert str(line.source)


@pytest.mark.parametrize("entry", ALL, ids=lambda e: e.name)
def test_an_entry_is_coherent(entry):
    """What follows from physics or from the rest of the entry."""
    assert (entry.heater_V is None) == (entry.heater_A is None)
    assert entry.warm_up == (
        "instant" if entry.heater_V is None else "filament" if entry.directly_heated else "cathode"
    )
    assert (entry.drop_V is None) == (entry.drop_A is None)
    for line in entry.operation:
        if "plate_V" in entry.limits and line.plate_V > entry.limits["plate_V"].value:
            assert entry.model != entry.name  # a line of the stronger type it is like
            continue
        if line.plate_A and "plate_W" in entry.limits and not line.cutoff and line.unit == 1:
            # A published line may sit at the limit or, for short tests, a little beyond it.
            assert line.plate_V * line.plate_A <= 1.5 * entry.limits["plate_W"].value
        if line.screen_A and "screen_W" in entry.limits:
            assert line.screen_V * line.screen_A <= 1.5 * entry.limits["screen_W"].value
        if line.gm_S and line.mu and line.plate_ohm and line.screen_V is None:
            # mu = gm rp by definition; printed figures are rounded and agree within 10 %.
            assert line.mu == pytest.approx(line.gm_S * line.plate_ohm, rel=0.1)
    if entry.average_A is not None and entry.peak_A is not None:
        assert entry.peak_A > entry.average_A


# A second listing of the same figure: TDSL and makers' sheets as listed by public repositories,
# tubeofile.com, r-type.org, emissionlabs.com [read]; value and tolerance as printed.
SPOT = [
    ("6V6GT", "plate_W", 12.0, "TDSL 6V6GTA 14 W design-maximum is 12 W design-centre x 1.1"),
    ("6L6G", "plate_W", 19.0, "TDSL list"),
    ("6L6G", "screen_V", 270.0, "TDSL list"),
    ("6L6GC", "plate_W", 30.0, "RCA 6L6-GC 8-60"),
    ("EL34", "cathode_A", 0.150, "Philips EL34 1-69"),
    ("EL84", "plate_W", 12.0, "Philips EL84 1-69"),
    ("EF86", "screen_W", 0.2, "Philips EF86 1-70"),
    ("6SL7GT", "plate_W", 1.0, "TDSL list"),
    ("7591", "cathode_A", 0.085, "Sylvania 7591 10-61, identical with Tung-Sol 3-61"),
    ("6SQ7", "plate_V", 300.0, "Tung-Sol 6SQ7 12-47"),
    ("12AY7", "plate_W", 1.5, "RCA 12AY7 4-53"),
    ("83", "reverse_V", 1550.0, "GE ET-T464 2-47"),
    ("5R4GY", "average_A", 0.250, "tubeofile.com page 5R4"),
    ("6X4", "reverse_V", 1250.0, "RCA RC-19"),
    ("KT66", "screen_W", 3.5, "TDSL list"),
    ("KT66", "plate_W", 25.0, "TDSL list"),
    ("EL34", "screen_W", 8.0, "TDSL list"),
    ("EL84", "cathode_A", 0.065, "TDSL list"),
    ("6SJ7", "screen_W", 0.7, "TDSL list"),
    ("6AQ5", "plate_W", 12.0, "TDSL list"),
    ("12AX7", "plate_W", 1.0, "TDSL list"),
    ("6AC7", "plate_V", 300.0, "RCA 6AC7 as listed"),
    ("6973", "screen_V", 330.0, "RCA 6973 10-60"),
]


@pytest.mark.parametrize(("name", "stress", "value", "listing"), SPOT)
def test_spot_checks_against_a_second_listing(name, stress, value, listing):
    assert types.find(name).limits[stress].value == pytest.approx(value), listing


def test_rating_systems_are_told_apart():
    """Design-maximum is about 1.1 of design-centre (tubecad.com, Dec 2000)."""
    assert types.find("6V6GT").limits["plate_W"].rating is Rating.DESIGN_CENTRE
    assert types.find("6L6GC").limits["plate_W"].rating is Rating.DESIGN_MAXIMUM
    assert types.find("807").limits["plate_W"].rating is Rating.ABSOLUTE


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("6v6", "6V6GT"),
        ("6CA7", "EL34"),
        ("ecc83", "12AX7"),
        ("X6V6GT", "6V6GT"),
        ("TRIODE_12AX7", "12AX7"),
        ("12AX7_AN", "12AX7"),
        ("6SJ7-GT", "6SJ7"),
        ("80", "5Y3GT"),
        ("5u4", "5U4GB"),
        ("1N4007RL", "1N4007"),
        ("EL84PENTODE", "EL84"),
        ("KT90", None),
        ("FILTER_80", None),
        ("opamp45", None),
        ("BC1078", None),
        ("", None),
    ],
)
def test_find_sees_through_the_usual_spellings(name, expected):
    entry = types.find(name)
    assert (entry and entry.name) == expected


def test_a_heater_variant_shares_all_but_the_heater():
    base, variant = types.find("6SK7"), types.find("12SK7")
    assert variant.heater_V == 12.6
    assert variant.heater_A == 0.15
    assert variant.limits == base.limits
    assert variant.model == base.name


def test_near_matches_of_an_unknown_type():
    assert "6V6GT" in types.near("6V7GT")
    assert types.near("§§§") == ()


def test_a_users_own_table_goes_before_the_programs(tmp_path):
    path = tmp_path / "own.toml"
    path.write_text(
        '["6V6GT"]\nfamily = "beam tube"\nsource = "my own measurement [read]"\n'
        'plate_dissipation = ["14 W", "maker\'s label [read]", "design-maximum"]\n'
        '["9X9"]\nlike = "6V6GT"\nheater_voltage = "9 V"\nheater_current = "0.3 A"\n'
        'source = "label [read]"\n',
        encoding="utf-8",
    )
    own = types.load(path)
    assert [e.name for e in own] == ["6V6GT", "9X9"]
    assert types.find("6V6", extra=own).limits["plate_W"].value == 12.0  # alias of ours
    limit = types.find("6V6GT", extra=own).limits["plate_W"]
    assert (limit.value, limit.rating) == (14.0, Rating.DESIGN_MAXIMUM)
    assert types.find("9x9", extra=own).model == "6V6GT"


BROKEN = """\
["A1"]
family = "beam tube"
plate_voltage = "300 W"
screen_voltage = ["100 V", "somewhere"]
["B2"]
family = "magic"
source = "x [read]"
["C3"]
like = "nothing"
["D4"]
family = "triode"
source = "x [read]"
plate_woltage = "300 V"
operation = [{plate="250 V", plate_current="9 V"}]
"""


def test_every_fault_of_a_table_is_reported_with_its_place(tmp_path):
    path = tmp_path / "broken.toml"
    path.write_text(BROKEN, encoding="utf-8")
    with pytest.raises(SourceErrors) as caught:
        types.load(path)
    told = [(e.span.line, e.message) for e in caught.value.errors]
    assert [line for line, _ in told] == [3, 4, 6, 9, 13, 14]
    assert "no source" in told[0][1]
    assert "does not end in a mark" in told[1][1]
    assert "'magic' is no family" in told[2][1]
    assert told[3][1] == "'nothing': no type of that name stands above"
    assert 'unknown key "plate_woltage"' in told[4][1]


GOOD = """\
[Q]
family = "pentode"
aliases = ["Q1"]
source = "x [read]"
rating = "absolute"
directly_heated = true
contact = false
diodes = 1
gas = ""
note = "n"
heater_voltage = "6.3 V"
heater_current = ["0.3 A", "y [computed]", "design-centre"]
plate_voltage = "300 V"
peak_inverse = "1 kV"
operation = [{plate = "250 V", grid = "-2 V", plate_current = "1 mA", amplification = 9.5, unit = 1, cutoff = false, transconductance = "1 mA/V", source = "z [read]"}]
"""
LEFT = [line.split(" = ")[0] for line in GOOD.splitlines() if " = " in line]
INNER = ["plate", "grid", "plate_current", "amplification", "unit", "cutoff", "transconductance"]
ODD = ["5", "-1.5", "true", '""', '"x"', "[]", "[[]]", "{}", "1979-05-27", "nan", '"1 mA"', '["a"]']


def faults_of(path):
    try:
        types.load(path)
    except SourceErrors as caught:
        return caught.errors
    return ()


@pytest.mark.parametrize("value", ODD)
def test_odd_values_are_faults_and_never_crash(tmp_path, value):
    """Any key with any value either reads or is reported with a place."""
    path = tmp_path / "odd.toml"
    path.write_text(GOOD, encoding="utf-8")
    assert len(types.load(path)) == 1
    texts = [re.sub(rf"(?m)^{key} = .*$", f"{key} = {value}", GOOD) for key in LEFT]
    texts += [re.sub(rf"\b{key} = [^,}}]+", f"{key} = {value}", GOOD) for key in INNER]
    texts += [f"Q = {value}\n", f"[Q]\nlike = {value}\n"]
    faults = 0
    for text in texts:
        path.write_text(text, encoding="utf-8")
        found = faults_of(path)
        faults += bool(found)
        assert all(error.span.line > 0 and str(error) for error in found)
    assert faults > len(texts) // 2


def test_text_that_is_no_toml_is_reported(tmp_path):
    path = tmp_path / "no.toml"
    path.write_text("a = = 1\n", encoding="utf-8")
    with pytest.raises(SourceErrors, match=r"no\.toml:1:"):
        types.load(path)
    with pytest.raises(OSError, match="missing"):
        types.load(Path("missing.toml"))

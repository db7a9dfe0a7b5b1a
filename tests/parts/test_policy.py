"""Derating policies: built-in ones against their listing, users' own, and the choice by them."""

import pytest

from stress.parts import policy, styles
from stress.parts.describe_policy import description
from stress.parts.policy import policies
from stress.text.span import SourceErrors

OWN = """\
name = "workshop"
document = "our own rules"
[sources]
us = { text = "our own rules, line 3", mark = "common practice" }
[styles.electrolytic]
voltage = [
  { share = "70 %", up_to_rated = "100 V", source = "us" },
  { share = "85 %", source = "us", clause = "above 100 V" },
]
temperature = { most = "60 degC", source = "us" }
"""


def test_default_comes_first_and_covers_every_style():
    first = next(iter(policies().values()))
    assert first.name == policy.DEFAULT
    assert set(first.rules) == set(styles.styles())
    assert all(rule.temperature is not None for rule in first.rules.values())


def test_published_policies_are_there():
    assert set(policies()) >= {
        "EEE-INST-002",
        "ECSS-Q-ST-30-11C",
        "MIL-STD-975M",
        "RADC-TR-84-254 level I",
        "RADC-TR-84-254 level II",
        "RADC-TR-84-254 level III",
        "IPC-9592B",
    }
    assert policy.find("ipc 9592b") is policies()["IPC-9592B"]
    assert policy.find("none such") is None


@pytest.mark.parametrize("name", [name for name in policies() if name != policy.DEFAULT])
def test_nothing_published_claims_to_have_been_read(name):
    """The documents themselves were not open; every number says so."""
    for rule in policies()[name].rules.values():
        assert {c.source.mark for c in rule.voltage} <= {"memory medium", "second-hand"}


def test_choice_names_share_document_and_line():
    choice = policies()["EEE-INST-002"].choose(styles.find("film"), 420.0, temperature_degC=60.0)
    assert choice.rated_V == 1000.0
    assert choice.needed_V == pytest.approx(700.0)
    assert choice.reason == (
        "60 %, EEE-INST-002, section C1, table 4 (from memory, to be confirmed): CRH, CHS"
    )


# By the common-practice share of 0.8 for film and 0.9 for aluminium, and the steps on sale.
CHOICES = [
    ("common-practice", "film", 420.0, 630.0),
    ("common-practice", "film", 504.0, 630.0),
    ("common-practice", "film", 505.0, 1000.0),
    ("common-practice", "aluminium", 405.0, 450.0),
    ("common-practice", "aluminium", 406.0, 500.0),
    ("common-practice", "aluminium", 451.0, None),
    ("IPC-9592B", "aluminium", 200.0, 250.0),
    ("IPC-9592B", "aluminium", 201.0, 315.0),  # 0.8 up to 250 V, 0.9 above
    ("IPC-9592B", "aluminium", 283.0, 315.0),
    ("IPC-9592B", "aluminium", 284.0, 350.0),
    ("EEE-INST-002", "ceramic-1", 5.0, 100.0),  # the rule for low voltages
    ("EEE-INST-002", "ceramic-1", 15.0, 50.0),
]


@pytest.mark.parametrize(("name", "style", "volts", "rated"), CHOICES)
def test_rating_follows_the_policy(name, style, volts, rated):
    choice = policies()[name].choose(styles.find(style), volts, temperature_degC=40.0)
    assert choice.rated_V == rated


def test_choice_allows_what_it_says():
    for one in policies().values():
        for name in one.rules:
            style = styles.find(name)
            for volts in (1.0, 12.0, 99.0, 250.0, 420.0):
                choice = one.choose(style, volts, temperature_degC=25.0)
                if choice.rated_V is not None:
                    clause = one.clause(style, rated_V=choice.rated_V, temperature_degC=25.0)
                    assert volts <= clause.share * choice.rated_V * (1 + 1e-6)


def test_style_not_covered_is_said():
    eee = policies()["EEE-INST-002"]
    assert eee.rule(styles.find("aluminium")) is None
    assert eee.choose(styles.find("aluminium"), 100.0, temperature_degC=25.0) is None


def test_heat_lowers_the_share_and_ends_the_policy():
    eee, wet = policies()["EEE-INST-002"], styles.find("tantalum-wet")
    shares = [eee.clause(wet, rated_V=50.0, temperature_degC=t).share for t in (25, 70, 71, 110)]
    assert shares == [0.6, 0.6, 0.4, 0.4]
    assert eee.clause(wet, rated_V=50.0, temperature_degC=111.0) is None


def test_temperature_below_the_highest():
    style = styles.find("aluminium")
    heat = policies()["RADC-TR-84-254 level III"].rule(style).temperature
    assert heat.limit_degC(style) == 65.0


LINES = [
    ("common-practice", "aluminium          voltage 90 %"),
    ("common-practice", "aluminium          temperature 20 K below its highest"),
    ("EEE-INST-002", "tantalum           voltage 30 %, to 110 °C (CSR, CWR)"),
    ("EEE-INST-002", "ceramic-1          at least 100 V below 10 V (CCR, CKR, CDR below 10 V dc)"),
    ("IPC-9592B", "aluminium          voltage 80 %, ratings to 250 V"),
    ("ECSS-Q-ST-30-11C", "tantalum-wet       reverse 0 % (no reverse voltage)"),
    ("ECSS-Q-ST-30-11C", "not covered: paper, paper-oil"),
]


@pytest.mark.parametrize(("name", "line"), LINES)
def test_policy_is_stated_number_by_number(name, line):
    printed = description(policies()[name])
    assert f"\n  {line}" in printed
    count = sum(len(rule.voltage) for rule in policies()[name].rules.values())
    assert printed.count(" voltage ") >= count


def test_users_write_their_own(tmp_path):
    path = tmp_path / "own.toml"
    path.write_text(OWN, encoding="utf-8")
    own, style = policy.load(path), styles.find("aluminium")
    assert (own.name, set(own.rules)) == ("workshop", {"aluminium"})
    assert own.choose(style, 75.0, temperature_degC=40.0).rated_V == 160.0
    assert own.choose(style, 70.0, temperature_degC=40.0).rated_V == 100.0
    assert own.rule(style).temperature.limit_degC(style) == 60.0


ERRORS = [
    ('share = "70 %"', 'share = "70 V"', '"70 V" is a voltage, and a plain number is wanted'),
    ('share = "70 %"', 'share = "170 %"', '"170 %" is too large'),
    ('source = "us" },', 'source = "them" },', "no source of this name"),
    (', source = "us" },', " },", '"source" is missing'),
    ("[styles.electrolytic]", "[styles.elektrolytik]", 'unknown capacitor style "elektrolytik"'),
    ('document = "our own rules"', "", '"document" is missing'),
    ('mark = "common practice"', 'mark = "sure"', '"sure" is not known here'),
    ("[styles.electrolytic]", "[styles.aluminium]\nvoltage = []\n[styles.electrolytic]", "values"),
]


@pytest.mark.parametrize(("old", "new", "message"), ERRORS)
def test_error_in_a_users_policy(old, new, message):
    assert old in OWN
    with pytest.raises(SourceErrors) as caught:
        policy.read_text(OWN.replace(old, new, 1), file="own.toml")
    assert any(message in error.message for error in caught.value.errors), caught.value
    assert all(error.span.file == "own.toml" for error in caught.value.errors)


def test_error_missing_policy_file(tmp_path):
    with pytest.raises(SourceErrors, match="the policy cannot be read"):
        policy.load(tmp_path / "none.toml")

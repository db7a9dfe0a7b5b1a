"""The JSON document against the keys that the contract names."""

import json
import math
from dataclasses import replace

import pytest

from stress.report.document import document, write_json

# The keys of the contract; a document may hold more, never less.
TOP = "schema equipment engine conditions positions parts power_up discharge findings run"
POSITION = (
    "name nodes role style value_F rated_V plus working worst_V worst_condition margin "
    "replacement leakage failures bench risk"
)
WORKING = "dc_V peak_V reverse_V ripple_pp_V ripple_rms_A esr_loss_W error_V"
LEAKAGE = (
    "condition critical_ohm critical_A victim quantity limit assumed_critical_ohm functional_ohm "
    "functional_reason by_condition curve"
)
INNER = {
    "equipment": "name netlist sheet",
    "engine": "ngspice pyspice",
    "conditions": "name line_V pulled open short cold",
    "parts": "name kind type stresses limits",
    "findings": "severity where condition text",
    "run": "cases unsolved cycles wall_s",
}


@pytest.fixture(scope="module")
def read(specimen, tmp_path_factory):
    path = tmp_path_factory.mktemp("json") / "review.json"
    write_json(specimen, path)
    return json.loads(path.read_text(encoding="utf-8"))


def named(document, name):
    return next(each for each in document["positions"] if each["name"] == name)


def missing(keys, record):
    return set(keys.split()) - set(record)


def test_the_file_holds_the_document(read, specimen):
    assert read == json.loads(json.dumps(document(specimen)))


def test_every_key_of_the_contract_is_there(read):
    assert missing(TOP, read) == set()
    for key, inner in INNER.items():
        records = read[key] if isinstance(read[key], list) else [read[key]]
        assert records
        for record in records:
            assert missing(inner, record) == set(), key


def test_every_position_has_every_key(read):
    assert len(read["positions"]) == 6
    for position in read["positions"]:
        assert missing(POSITION, position) == set()
        assert set(position["working"]) == {"nominal", "high", "cold", "pulled XU2", "inrush"}
        for stress in position["working"].values():
            assert stress is None or missing(WORKING, stress) == set()
        if position["leakage"] is not None:
            assert missing(LEAKAGE, position["leakage"]) == set()


def test_the_fullest_position(read):
    c5 = named(read, "C5")
    assert c5["working"]["nominal"]["dc_V"] == 98.76543  # unrounded
    assert c5["margin"] == pytest.approx((400 - 420.04) / 400)  # (limit - stress) / limit
    assert c5["nodes"] == ["p1", "g2"]
    leakage = c5["leakage"]
    assert (leakage["critical_ohm"], leakage["victim"]) == (3.9123e6, "XU2")
    assert (leakage["quantity"], leakage["limit"]) == ("plate_W", 12.0)
    assert set(leakage["by_condition"]) == {"nominal", "high"}
    assert missing(
        "critical_ohm victim quantity functional_ohm governs", leakage["by_condition"]["high"]
    ) == set()  # fmt: skip
    assert leakage["by_condition"]["nominal"]["governs"] is True
    assert leakage["by_condition"]["high"]["reason"] == "unsolved"
    assert leakage["curve"][0]["stresses"]["XU2"] == {"plate_W": 9.87654, "cathode_A": 0.0462}
    short = c5["failures"]["short"]
    assert short["victims"] == [
        {"part": "XU2", "quantity": "cathode_A", "stress": 0.1314, "limit": 0.1}
    ]
    assert set(c5["failures"]) >= {"short", "open", "dried", "reversed"}
    assert c5["failures"]["dried"] is None
    assert missing("test_V leakage_max_A esr_max_ohm value_min_F value_max_F", c5["bench"]) == set()
    assert c5["bench"]["in_circuit"] == {
        "leakage": "lift one lead", "esr": None, "capacitance": "lift one lead"
    }  # fmt: skip
    assert c5["risk"] == {
        "rank": 1, "severity": "replace-before-power", "reason": "its leak burns XU2"
    }  # fmt: skip


def test_what_has_no_answer_is_null_and_says_why(read):
    mischief = read["positions"][-1]
    for key in ("value_F", "rated_V", "worst_V", "margin", "replacement", "leakage", "risk"):
        assert mischief[key] is None, key
    across = named(read, "X3.C9")
    assert across["leakage"]["critical_ohm"] is None
    assert across["leakage"]["reason"] == "not limited by the netlist"
    assert across["failures"]["short"]["reason"] == "not limited by the netlist"
    assert named(read, "C5")["leakage"]["curve"][-1]["unanswered"] == "unsolved"
    assert read["unanswered"] == [
        {"case": "pulled XU2", "kind": "does not settle", "text": "motorboats at 3 Hz"}
    ]
    assert (read["power_up"], read["discharge"]) == (None, None)


def test_the_switch_on_has_peak_and_reverse_voltage_only(read):
    inrush = named(read, "C1")["working"]["inrush"]
    assert {key for key, value in inrush.items() if value is not None} == {"peak_V", "reverse_V"}
    assert inrush["peak_V"] == 431.5
    assert named(read, "C5")["working"]["inrush"] is None
    condition = read["conditions"][-1]
    assert (condition["name"], condition["line_V"], condition["cold"]) == ("inrush", 253.0, True)


def test_plus_is_the_node_that_is_positive_of_a_polar_part_only(read):
    assert named(read, "C1")["plus"] == "bplus"
    assert named(read, "C5")["plus"] is None


def test_parts(read):
    xu2 = next(each for each in read["parts"] if each["name"] == "XU2")
    assert xu2["stresses"]["nominal"]["plate_W"] == 9.87654
    assert xu2["stresses"]["pulled XU2"] is None
    assert xu2["limits"]["cathode_A"] == {"value": 0.1, "source": "sheet", "rating": "absolute"}


def test_a_number_that_json_cannot_hold_becomes_null(specimen):
    nominal = specimen.working.positions["C7"]["nominal"]
    spoilt = {**specimen.working.positions, "C7": {"nominal": replace(nominal, dc_V=math.nan)}}
    review = replace(specimen, working=replace(specimen.working, positions=spoilt))
    assert named(document(review), "C7")["working"]["nominal"]["dc_V"] is None

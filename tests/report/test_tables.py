"""The CSV files, and the same numbers in every form of the report."""

import csv
import io
import re
from dataclasses import replace

import pytest
from rich.console import Console

from stress.report.document import document
from stress.report.tables import VERDICT, failures, positions, write_csv
from stress.report.tables import parts as parts_table
from stress.report.terminal import print_review
from stress.text.figure import figure


@pytest.fixture(scope="module")
def read(specimen, tmp_path_factory):
    paths = write_csv(specimen, tmp_path_factory.mktemp("csv") / "tables")
    return {path.stem: list(csv.DictReader(io.StringIO(path.read_text("utf-8")))) for path in paths}


def test_four_files_are_written(read):
    assert {name: len(rows) for name, rows in read.items()} == {
        "positions": 6, "parts": 4, "failures": 3, "shopping": 3
    }  # fmt: skip


def test_no_cell_is_blank(read):
    for rows in read.values():
        for row in rows:
            assert [key for key, text in row.items() if not text] == []


def test_a_file_holds_the_numbers_of_the_document(specimen, read):
    held = {each["name"]: each for each in document(specimen)["positions"]}
    compared = 0
    for row in read["positions"]:
        position = held[row["position"]]
        nominal = position["working"]["nominal"] or {}
        leakage, bench = position["leakage"] or {}, position["bench"] or {}
        fit = position["replacement"] or {}
        for text, value in [
            (row["bears_V"], nominal.get("dc_V")),
            (row["ripple_rms_A"], nominal.get("ripple_rms_A")),
            (row["worst_V"], position["worst_V"]),
            (row["value_F"], position["value_F"]),
            (row["rated_V"], position["rated_V"]),
            (row["critical_ohm"], leakage.get("critical_ohm")),
            (row["functional_ohm"], leakage.get("functional_ohm")),
            (row["fit_value_F"], fit.get("value_F")),
            (row["fit_rated_V"], fit.get("rated_V")),
            (row["leakage_max_A"], bench.get("leakage_max_A")),
        ]:
            if value is None:
                assert re.fullmatch("[a-z ]+", text)
            else:
                assert float(text) == value
                compared += 1
    assert compared > 20


def test_the_terminal_shows_the_numbers_of_the_document_rounded(specimen):
    out = io.StringIO()
    print_review(specimen, Console(file=out, width=250))
    for position in document(specimen)["positions"]:
        row = next(
            (
                line
                for line in out.getvalue().splitlines()
                if re.match(rf" *\d+ +{re.escape(position['name'])} ", line)
            ),
            None,
        )
        if row is None:
            assert position["risk"] is None
            continue
        nominal = position["working"]["nominal"]
        for value, unit in [
            (nominal["dc_V"], "V"),
            (nominal["ripple_rms_A"], "A"),
            (position["worst_V"], "V"),
            ((position["leakage"] or {}).get("critical_ohm"), "ohm"),
            ((position["bench"] or {}).get("leakage_max_A"), "A"),
        ]:
            if value is not None:
                assert figure(value, unit) in row, position["name"]


def test_rows_stand_in_the_order_of_work(specimen):
    assert [row[1].text for row in positions(specimen).rows][:5] == [
        "C5", "X3.C9", "C1", "C2", "C7"
    ]  # fmt: skip


def test_the_shopping_list(read):
    film = next(row for row in read["shopping"] if row["style"] == "film")
    assert (film["quantity"], film["positions"]) == ("1", "C5")
    assert (float(film["value_F"]), float(film["rated_V"])) == (0.022e-6, 630.0)
    assert film["ripple_rms_A"] == "no demand"


def test_an_assumed_limit_is_told_apart(specimen):
    assumed = replace(specimen.circuit.part("Rk2").limits["power_W"], value=0.5)
    parts = tuple(
        replace(part, limits={"power_W": assumed}) if part.name == "Rk2" else part
        for part in specimen.circuit.parts
    )
    review = replace(specimen, circuit=replace(specimen.circuit, parts=parts))
    verdicts = {(row[0].text, row[2].value): row[VERDICT].text for row in parts_table(review).rows}
    assert verdicts["Rk2", "power_W"] == "past an assumed limit"
    assert verdicts["R9", "power_W"] == "PAST ITS LIMIT"
    assert verdicts["XU2", "plate_W"] == "within"


def test_a_failure_names_victim_stress_limit_and_time(specimen):
    rows = {(row[0].text, row[1].text): row for row in failures(specimen).rows}
    assert rows["C5", "short"][4].text == (
        "XU2 cathode current 131 mA, limit 100 mA, a minute or so"
    )
    assert rows["X3.C9", "short"][4].text == "not limited by the netlist"
    assert rows["C5", "open"][4].text == "nothing"
    assert rows["C5", "open"][5].text == "no signal passes. silence"


@pytest.mark.parametrize("start", ["=", "+", "-", "@"])
def test_no_text_is_a_formula(specimen, tmp_path, start):
    failure = replace(specimen.failures["C5"][0], text=f"{start}1+cmd|' /C calc'!A0")
    write_csv(replace(specimen, failures={"C5": (failure,)}), tmp_path)
    (row,) = csv.DictReader(io.StringIO((tmp_path / "failures.csv").read_text("utf-8")))
    assert row["text"].startswith("'" + start)

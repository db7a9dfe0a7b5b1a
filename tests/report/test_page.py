"""The HTML page as text: the numbers of the document, names that mean mischief, its size."""

import json
import re
from dataclasses import replace
from html.parser import HTMLParser
from urllib.parse import unquote

import pytest

from stress.report.document import document
from stress.report.page import page, write_page
from stress.text.figure import figure

MEGABYTES = 2**20


class Reader(HTMLParser):
    """Keeps the tags with their attributes, the text, and the rows of every table by class."""

    def __init__(self, text):
        super().__init__()
        self.tags, self.texts, self.tables = [], [], {}
        self._rows = self._cell = None
        self.feed(text)
        self.close()

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        if tag == "table":
            self._rows = self.tables.setdefault((dict(attrs).get("class") or "").split(" ")[0], [])
        elif tag == "tr" and self._rows is not None:
            self._rows.append([])
        elif tag in ("td", "th"):
            self._cell = []

    def handle_endtag(self, tag):
        if tag in ("td", "th"):
            self._rows[-1].append("".join(self._cell).replace("\xa0", " ").strip())
            self._cell = None

    def handle_data(self, data):
        self.texts.append(data)
        if self._cell is not None:
            self._cell.append(data)


@pytest.fixture(scope="module")
def text(specimen):
    return page(specimen)


@pytest.fixture(scope="module")
def read(text):
    return Reader(text)


def test_the_table_shows_the_numbers_of_the_document(specimen, read):
    head, *rows = read.tables["positions"]
    columns = {re.sub(r"\W+$", "", title): i for i, title in enumerate(head)}
    shown = {row[columns["part"]]: row for row in rows}
    compared = 0
    for position in document(specimen)["positions"]:
        row = shown[position["name"]]
        nominal = position["working"]["nominal"] or {}
        leakage = position["leakage"] or {}
        for title, value, unit in [
            ("bears", nominal.get("dc_V"), "V"),
            ("worst", position["worst_V"], "V"),
            ("damage below", leakage.get("critical_ohm"), "ohm"),
            ("works above", leakage.get("functional_ohm"), "ohm"),
        ]:
            if value is None:
                assert re.fullmatch("[a-z ]+", row[columns[title]])
            else:
                assert row[columns[title]] == figure(value, unit)
                compared += 1
    assert compared >= 12


def test_the_parts_are_those_of_the_document(specimen, read):
    rows = read.tables["parts"][1:]
    plate = next(row for row in rows if row[0] == "XU2" and row[2] == "plate dissipation")
    xu2 = next(part for part in document(specimen)["parts"] if part["name"] == "XU2")
    assert plate[3] == figure(xu2["stresses"]["nominal"]["plate_W"], "W")
    assert figure(xu2["limits"]["plate_W"]["value"], "W") in plate
    assert xu2["limits"]["plate_W"]["source"] in plate


def test_what_if_steps_through_the_points_of_the_document(specimen, text):
    data = json.loads(re.search(r'id="go-data">(.*?)</script>', text, re.S).group(1))
    curve = next(p for p in document(specimen)["positions"] if p["name"] == "C5")["leakage"][
        "curve"
    ]
    assert data["curves"]["C5"]["ohm"] == [figure(point["ohm"], "ohm") for point in curve]
    (plate,) = [
        row["values"]
        for row in data["curves"]["C5"]["rows"]
        if row["values"][0] == figure(9.87654, "W")
    ]
    solved = [figure(point["stresses"]["XU2"]["plate_W"], "W") for point in curve[:-1]]
    assert plate == [*solved, "unsolved"]


def test_mischief_is_inert(text, read):
    assert text.count("<script") == 2  # the data and the page's own script
    assert "alert(1)</script>" not in text
    ids = [attributes.get("id") for _, attributes in read.tags]
    assert "C\"'<script>alert(1)</script>" in ids
    assert not any(name.startswith("on") for _, attributes in read.tags for name in attributes)


def test_nothing_is_fetched_and_only_its_own_script_may_run(read):
    assert not [tag for tag, _ in read.tags if tag in ("link", "img", "iframe", "object", "base")]
    for _, attributes in read.tags:
        assert "src" not in attributes
        assert (attributes.get("href") or "#").startswith("#")
    (policy,) = [
        a["content"] for tag, a in read.tags if a.get("http-equiv") == "Content-Security-Policy"
    ]
    assert "default-src 'none'" in policy
    assert re.search(r"script-src 'sha256-[\w+/]+=*'$", policy)


def test_every_deep_link_leads_somewhere_and_no_id_is_there_twice(read):
    ids = [attributes["id"] for _, attributes in read.tags if "id" in attributes]
    assert len(ids) == len(set(ids))
    links = {unquote(a["href"][1:]) for tag, a in read.tags if tag == "a"}
    assert links <= set(ids)
    assert {"C1", "C5", "X3.C9"} <= links


def test_no_cell_is_blank_where_a_number_belongs(read):
    for name, rows in read.tables.items():
        if name:  # the bench card has blanks for the readings
            for row in rows:
                assert all(row), (name, row)


def test_forty_positions_with_long_curves_stay_small(specimen, tmp_path):
    curve = specimen.leakage["C5"].governing.curve[0]
    parts = {f"XU{n}": {"plate_W": n / 7.0, "cathode_A": n / 3e3, "screen_W": n / 9.0}
             for n in range(12)}  # fmt: skip
    points = tuple(
        replace(
            curve,
            ohm=10.0 ** (11 - n / 5.5),
            stresses=parts,
            nodes={f"n{k}": k / 3 for k in range(12)},
        )
        for n in range(60)
    )
    governing = replace(specimen.leakage["C5"].governing, curve=points)
    c5 = specimen.circuit.position("C5")
    names = [f"C{n}" for n in range(40)]
    many = replace(
        specimen,
        circuit=replace(specimen.circuit, positions=tuple(replace(c5, name=n) for n in names)),
        leakage={n: replace(specimen.leakage["C5"], position=n, governing=governing) for n in names},
        working=replace(
            specimen.working,
            positions=dict.fromkeys(names, specimen.working.positions["C1"]),
            traces=dict.fromkeys(names, specimen.working.traces["C1"]),
        ),
        risks=(),
    )  # fmt: skip
    path = tmp_path / "many.html"
    write_page(many, path)
    assert 0.3 * MEGABYTES < path.stat().st_size < 3 * MEGABYTES


def test_the_chosen_parts_stand_before_and_after(specimen):
    """A part of twice the rating: the margin is worked out by hand from the worst voltage."""
    name = next(iter(specimen.replacements))
    old = specimen.circuit.position(name)
    better = replace(old, rated_V=2.0 * specimen.worst[name].worst_V)
    positions = tuple(better if each.name == name else each for each in specimen.circuit.positions)
    after = replace(specimen, circuit=replace(specimen.circuit, positions=positions), risks=())
    read = Reader(page(specimen, fitted=after))
    rows = {row[0]: row for row in read.tables["fitted"] if row}

    assert set(rows) - {"part"} == set(specimen.replacements)
    assert rows[name][5] == "50 %"
    assert "The order of work stays as it was." in " ".join(read.texts)
    assert "fitted" not in Reader(page(specimen)).tables

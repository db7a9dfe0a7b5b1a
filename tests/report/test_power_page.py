"""The power-up plan and the discharge on the page, on the bench card and in the document."""

import json
import re
from dataclasses import replace

import pytest

from stress.finding import Severity
from stress.report.discharge_page import charges, discharge_picture, time
from stress.report.document import document, write_json
from stress.report.page import page
from stress.report.power_page import ramp_rows, readings
from stress.study.discharge_result import COLD, CONDUCTING, Charge, Decay, Discharge, Resistor
from stress.study.power_result import (
    Abort,
    Band,
    Kind,
    Lamp,
    LampReading,
    Method,
    Peak,
    PowerUp,
    Probe,
    RampStep,
    Step,
    SwitchOn,
    TellTale,
    Way,
    Work,
)
from stress.study.result import Unanswered

BPLUS = Probe(key="b DC", kind=Kind.DC_V, node="bplus", text="B+ at C1", effort=1)
GRID = Probe(key="g DC", kind=Kind.DC_V, node="g2", text="grid of XU2", effort=3)
PLATE = Probe(key="p DC", kind=Kind.DC_V, node="p9", text="plate of XU9", effort=3,
              forbidden="pulses of kilovolts")  # fmt: skip
LOST = Unanswered(case="lamp / C5 short", kind="unsolved", text="timestep too small")


def step(share, line_V, *, aborts=(), blind=()):
    bands = (
        Band(probe="b DC", value=150.0 * share, low=140.0 * share, high=160.0 * share,
             shown=147.0 * share),
        Band(probe="g DC", value=-0.2, low=-0.3, high=0.1, shown=-0.18),
    )  # fmt: skip
    ramp = RampStep(name=f"{share:g}", share=share, line_V=line_V, bands=bands)
    return Step(ramp=ramp, text="", aborts=aborts, cannot_tell=blind)


PLAN = PowerUp(
    method=Method(way=Way.RAMP, text="Bring it up slowly.", reasons=("a cathode-type rectifier",),
                  before=("Put a fuse in.",), refused=("no lamp: the heaters never get warm",)),
    work=(Work(severity=Severity.REPLACE, where="C5", text="its leak burns XU2"),),
    probes=(BPLUS, GRID, PLATE),
    steps=(
        step(0.4, 92.0, blind=("C5 leaky",)),
        step(1.0, 230.0,
             aborts=(Abort(probe="g DC", above=True, limit=0.9, tells=("C5 leaky 3.91234 MΩ", "C5 short")),)),
    ),
    lamp=Lamp(rated_W=60.0, rated_V=230.0,
              healthy=LampReading(fault="", lamp_V=55.0, equipment_V=170.0, current_A=0.15,
                                  glow=0.24),
              faulty=(LampReading(fault="C5 short", lamp_V=0.0, equipment_V=0.0, current_A=0.0,
                                  glow=0.0, unanswered=LOST),)),
    tell_tales=(TellTale(position="C5", fault="C5 leaky 3.91234 MΩ", readings=(("g DC", -0.2, 9.4),),
                         step="100 %"),),
    switch_on=SwitchOn(peaks=(Peak(part="C1", quantity="voltage_V", cold=431.0, hot=None,
                                   phase_deg=90.0),), seconds=0.4),
    cautions=("Nobody works alone.",),
    missing=("heater current",),
)  # fmt: skip
HELD = Charge(
    position="C1", value_F=8e-6, start_V=420.0, condition="cold", energy_J=0.7056, deadly=True,
    class_V=(60.0, 120.0), bleed_ohm=None, holds=True, floating=True, returns_V=(20.0, 42.0),
    resistor=Resistor(ohm=4700.0, rated_V=450.0, rated_W=5.0, peak_A=0.09, energy_J=0.7,
                      until_V=10.0, seconds=0.2),
    decays=(
        Decay(how=CONDUCTING, start_V=262.0, below_s={120.0: 0.9, 60.0: 1.8, 50.0: 2.0},
              seconds=(0.0, 1.0, 2.0), volts=(262.0, 110.0, 50.0)),
        Decay(how=COLD, start_V=420.0, below_s={120.0: 9000.0, 60.0: None, 50.0: None},
              extrapolated=(120.0,), seconds=(0.0, 100.0), volts=(420.0, 418.0)),
    ),
)  # fmt: skip
LOW = Charge(position="C2", value_F=5e-8, start_V=1.6, condition="high", energy_J=6e-8,
             deadly=False, class_V=(60.0, 120.0), bleed_ohm=1e6)  # fmt: skip
AFTER = Discharge(charges=(HELD, LOW), advice=("Pull the plug.",), cautions=("It comes back.",))


@pytest.fixture(scope="module")
def text(specimen):
    return page(replace(specimen, power_up=PLAN, discharge=AFTER)).replace("\xa0", " ")


def test_the_page_has_both_only_where_they_were_studied(specimen, text):
    assert 'id="go-power"' in text
    assert 'id="go-after"' in text
    without = page(specimen)
    assert 'id="go-power"' not in without
    assert 'href="#go-after"' not in without


def test_the_page_tells_the_plan(text):
    for words in (
        "Method: slow ramp",
        "no lamp: the heaters never get warm",
        "DC volts grid of XU2 above 900 mV (C5 leaky, short)",
        "C5 leaky 3.91 MΩ, at 100 %: grid of XU2 -200 mV when healthy, 9.4 V with the fault",
        "Through a lamp of 60 W, 230 V",
        "pulses of kilovolts",
        "heater current",
        "Nobody works alone.",
    ):
        assert words in text, words


def test_healthy_readings_are_bands_as_the_meter_shows_them():
    table = readings(PLAN)
    assert [column.title for column in table.columns[2:]] == ["40 %, 92 V", "100 %, 230 V"]
    rows = {row[0].text: [cell.text for cell in row[2:]] for row in table.rows}
    # The meter shows 147 of 150 V; the ends of the band move in the same proportion.
    assert rows["B+ at C1"] == ["54.9 V to 62.7 V", "137 V to 157 V"]
    assert rows["plate of XU9"] == ["do not measure", "do not measure"]


def test_a_step_that_tells_nothing_says_so():
    first, last = ramp_rows(PLAN)
    assert first.stop == ("no reading here tells a fault",)
    assert first.blind == "C5 leaky"
    assert last.healthy == ("grid of XU2 -180 mV",)


def test_the_bench_card_has_the_ramp(text):
    card = text[text.index('class="bench-card"') : text.index('class="cautions"')]
    assert "Ramp: slow ramp" in card
    assert "DC volts grid of XU2 above 900 mV (C5)" in card
    assert card.count('<td class="blank"></td>') == 6 * 3 + 2


def test_an_unsolved_lamp_reading_is_a_word(text):
    row = re.search(r"<td>\s*C5 short</td>.*?</tr>", text, re.S).group(0)
    assert row.count("unsolved") == 4


def test_the_slowest_way_down_counts():
    rows = {row[0].text: [cell.text for cell in row] for row in charges(AFTER).rows}
    assert rows["C1"][4:9] == ["not solved", "about 2.5 h", "never", "never", "tubes cold"]
    assert rows["C1"][9] == "4.7 kΩ, 5 W, 450 V"
    assert rows["C1"][-1] == "can kill; holds its charge; measure across its own terminals"
    assert rows["C2"][-1] == "never above 60 V"
    assert rows["C2"][5] == "not simulated"


@pytest.mark.parametrize(
    ("seconds", "words"),
    [(0.3, "300 ms"), (90.0, "90 s"), (150.0, "2.5 min"), (7200.0, "2 h"), (2.6e5, "3.01 days")],
)
def test_times_as_people_say_them(seconds, words):
    assert time(seconds) == words


def test_the_discharge_curve_is_drawn_where_it_is_dangerous():
    picture = discharge_picture(HELD)
    assert picture.count("<polyline") == 2
    assert "tubes cold from 420 V" in picture
    assert discharge_picture(LOW) is None


def test_the_document_holds_both(specimen, tmp_path):
    path = tmp_path / "whole.json"
    write_json(replace(specimen, power_up=PLAN, discharge=AFTER), path)
    read = json.loads(path.read_text(encoding="utf-8"))
    plan = read["power_up"]
    assert plan["method"]["way"] == "slow ramp"
    assert plan["steps"][1]["aborts"] == [
        {"probe": "g DC", "unit": "V", "above": True, "limit": 0.9,
         "tells": ["C5 leaky 3.91234 MΩ", "C5 short"]}
    ]  # fmt: skip
    assert {each["against"] for each in plan["probes"]} == {"0"}
    assert plan["lamp"]["faulty"][0]["current_A"] is None
    first = read["discharge"][0]
    assert (first["name"], first["energy_J"], first["bleed_ohm"]) == ("C1", 0.7056, None)
    assert first["class_V"] == {"ES1": 60.0, "ES2": 120.0}
    assert first["resistor"]["peak_A"] == 0.09
    assert first["decays"][1]["below"] == [
        {"threshold_V": 120.0, "time_s": 9000.0, "extrapolated": True},
        {"threshold_V": 60.0, "time_s": None, "extrapolated": False},
        {"threshold_V": 50.0, "time_s": None, "extrapolated": False},
    ]
    assert document(specimen)["discharge"] is None


def numbers(value, keys=(), beside=()):
    """Yield the way of keys to every number, and the record it stands in."""
    if isinstance(value, dict):
        for key, each in value.items():
            yield from numbers(each, (*keys, key), value)
    elif isinstance(value, list | tuple):
        for each in value:
            yield from numbers(each, keys, beside)
    elif isinstance(value, int | float) and not isinstance(value, bool):
        yield keys, beside


UNITS = ("_V", "_A", "_ohm", "_F", "_W", "_s", "_J", "_degC", "_Hz", "_deg")
COUNTS = {"cases", "unsolved", "cycles", "rank", "effort", "pieces", "quantity"}
RATIOS = {"margin", "share_of_nominal"}


def test_every_number_of_the_document_has_its_unit_beside_it(specimen):
    """In its key or that of a mapping it is in, else in `unit` or the named `quantity`."""
    whole = document(replace(specimen, power_up=PLAN, discharge=AFTER))
    found = list(numbers(whole))
    assert {keys[0] for keys, _ in found} > {"power_up", "discharge", "positions", "parts"}
    for keys, beside in found:
        if keys[-1] not in COUNTS | RATIOS and "unit" not in beside:
            names = [f"_{key}" for key in (*keys, beside.get("quantity"))]
            assert any(name.endswith(UNITS) for name in names), keys

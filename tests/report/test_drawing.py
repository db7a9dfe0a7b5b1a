"""Scales, labels and pictures."""

import re
from itertools import pairwise

import pytest

from stress.report.drawing import Scale, spread, tag
from stress.report.ladder import ladder, rungs
from stress.report.leak_curve import leak_curve, what_if
from stress.report.waveform import spectrum, waveform


def test_text_and_attributes_are_escaped():
    made = tag("text", '<b>"', class_='x" onload="y')
    assert made == '<text class="x&#34; onload=&#34;y">&lt;b&gt;&#34;</text>'


@pytest.mark.parametrize(
    ("scale", "ticks"),
    [
        (Scale(0.0, 100.0, 0.0, 1.0), [0.0, 50.0, 100.0]),
        (Scale(-0.115, 0.115, 0.0, 1.0), [-0.1, 0.0, 0.1]),
        (Scale(1e4, 1.0, 0.0, 1.0, decades=True), [1.0, 10.0, 100.0, 1e3, 1e4]),
    ],
)
def test_ticks_are_round_and_inside(scale, ticks):
    assert scale.ticks(4 if scale.decades else 3) == pytest.approx(ticks)


def test_a_scale_keeps_what_is_outside_on_its_edge():
    scale = Scale(0.0, 10.0, 200.0, 0.0)
    assert [scale.at(v) for v in (-5.0, 0.0, 5.0, 10.0, 99.0)] == [200.0, 200.0, 100.0, 0.0, 0.0]


@pytest.mark.parametrize(
    "places", [[50.0, 51.0, 52.0], [198.0, 199.0, 200.0], [0.0, 100.0, 200.0], []]
)
def test_labels_do_not_overlap(places):
    held = spread(places, gap=15.0, low=10.0, high=200.0)
    assert all(b - a >= 15.0 for a, b in pairwise(held))
    assert all(10.0 <= place <= 200.0 for place in held)


def heights(picture, style):
    return [float(y) for y in re.findall(rf'y1="([\d.]+)"[^>]*class="rung {style}"', picture)]


def test_the_ladder_has_all_its_rungs_in_order_of_voltage(specimen):
    c1 = specimen.circuit.position("C1")
    assert {rung.words: rung.volts for rung in rungs(specimen, c1)} == {
        "normal": 262.4567,
        "worst, high": 299.0,
        "brief, cold": 420.1,
        "marked rating": 450.0,
        "its surge rating": pytest.approx(495.0),
        "proposed rating": 450.0,
    }
    picture = ladder(specimen, c1)
    order = [heights(picture, s)[0] for s in ("surge", "marked", "brief", "worst", "normal")]
    assert order == sorted(order)  # down the picture


def test_an_ac_rating_stands_at_its_crest(specimen):
    x9 = rungs(specimen, specimen.circuit.position("X3.C9"))
    proposed = next(rung for rung in x9 if rung.style == "proposed")
    assert proposed.words == "proposed 275 V AC, crest"
    assert proposed.volts == pytest.approx(388.9, abs=0.05)  # 275 times the root of 2


def test_nothing_is_drawn_of_nothing(specimen):
    mischief = specimen.circuit.positions[-1]
    assert ladder(specimen, mischief) is None
    assert spectrum("C5", specimen.working.positions["C5"]["nominal"]) is None
    assert leak_curve(specimen, specimen.leakage["C2"]) is None
    assert what_if(specimen, specimen.leakage["X3.C9"]) is None


def test_the_waveform_and_the_spectrum_of_the_reservoir(specimen):
    picture = waveform("C1", specimen.working.traces["C1"][0])
    assert picture.count("<polyline") == 2
    assert "20 ms" in picture
    lines = spectrum("C1", specimen.working.positions["C1"]["nominal"])
    assert lines.count('class="stem"') == 8
    assert "71 mA at 100 Hz" in lines


def test_limits_and_marks_stand_in_the_leakage_curve(specimen):
    picture = leak_curve(specimen, specimen.leakage["C5"])
    for words in ("limit 12 W", "damage", "works above", "bench limit", "unsolved"):
        assert f">{words}<" in picture
    assert picture.count('class="limit"') == 2  # one a panel
    # An absolute limit is judged at high line, and this is the curve at nominal line.
    assert "cathode current" not in picture
    assert ">limit 1 W (assumed)<" in picture


def test_a_verdict_turns_where_the_limit_is_passed(specimen):
    found = what_if(specimen, specimen.leakage["C5"])
    plate = next(row for row in found.rows if row.what == "plate dissipation")
    assert plate.values[2] == plate.limit == "12 W"
    assert plate.verdicts == ("within", "within", "within", "past its limit", "past its limit",
                              "not known")  # fmt: skip

"""Verdicts on readings, each worked out from the limits by hand."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Circuit, Line, Position, Role
from stress.judge.verdict import Advice, verdict, verdicts
from stress.netlist.flat import Element, Netlist
from stress.parts import reading, styles
from stress.parts.sheet import Sheet
from stress.study.result import Bench, Worst
from stress.text.span import Span

NOWHERE = Span(file="hand.cir", line=1, column=1, length=1, text="")
HEADER = (
    "part,capacitance,esr,leakage,at,minutes,temperature,esr_frequency,resistance,inductance,state"
)


def rows(*lines):
    return reading.read_text("\n".join((HEADER, *lines)), file="readings.csv")


def position(name="C5", *, style="paper", value_F=2e-8, rated_V=400.0, role=Role.COUPLING):
    return Position(
        name=name,
        nodes=("p", "g"),
        role=role,
        role_text="",
        style=styles.find(style),
        style_source="test",
        value_F=value_F,
        rated_V=rated_V,
        span=NOWHERE,
    )


def bench(name="C5", **keys):
    limits = {
        "test_V": 400.0,
        "leakage_max_A": 0.5e-6,  # 800 MΩ
        "leakage_reason": "",
        "esr_max_ohm": None,
        "esr_Hz": None,
        "esr_reason": "by age",
        "value_min_F": 1.8e-8,
        "value_max_F": 2.7e-8,
    }
    return Bench(position=name, **{**limits, **keys})


def worst(name="C5", volts=390.0):
    return Worst(position=name, worst_V=volts, condition="cold")


def judge(*lines, of=None, limits=None, bears=390.0):
    of = of or position()
    return verdict(
        of, rows(*lines).rows, bench=limits or bench(of.name), worst=worst(of.name, bears)
    )


@pytest.mark.parametrize(
    ("line", "advice", "words"),
    [
        ("C5,0.02 uF,,0.1 uA,400 V,,,,,,", Advice.KEEP, "limit 500 nA there"),
        ("C5,0.02 uF,,0.4 uA,400 V,,,,,,", Advice.WATCH, "400 nA at 400 V"),
        ("C5,0.02 uF,,0.6 uA,400 V,,,,,,", Advice.REPLACE, "600 nA at 400 V"),
        # 95 % of the test voltage is near enough; its limit is 95 % too.
        ("C5,0.02 uF,,0.1 uA,385 V,,,,,,", Advice.KEEP, "limit 481 nA there"),
        # Good at 300 V says nothing of 400 V; bad at 300 V is bad.
        ("C5,0.02 uF,,1 nA,300 V,,,,,,", Advice.AGAIN, "300 V proves nothing about 400 V"),
        ("C5,0.02 uF,,0.5 uA,300 V,,,,,,", Advice.REPLACE, "limit 375 nA there"),
        # Fine capacitance, leakage unknown: the trap that costs output transformers.
        ("C5,0.02 uF,,,,,,,,,", Advice.AGAIN, "a good capacitance says nothing of it"),
        ("C5,0.015 uF,,0.1 uA,400 V,,,,,,", Advice.REPLACE, "too little is left"),
        ("C5,0.03 uF,,0.1 uA,400 V,,,,,,", Advice.REPLACE, "moisture"),
        ("C5,,,,,,,,,,short", Advice.REPLACE, "reads as a short"),
        ("C5,,,,,,,,,,open", Advice.REPLACE, "reads as an open"),
    ],
)
def test_a_paper_coupling_capacitor(line, advice, words):
    found = judge(line)
    assert found.advice is advice
    assert words in str(found)


def test_what_to_measure_at_is_told():
    assert str(judge("C5,0.02 uF,,,,,,,,,")).startswith("measure again at 400 V: ")


def test_a_warm_part_may_leak_more():
    # Paper doubles per 10 K: 40 °C are 20 K above the bench, four times 0.5 µA.
    assert judge("C5,,,1.5 uA,400 V,,40 degC,,,,").advice is Advice.WATCH
    assert judge("C5,,,2.1 uA,400 V,,40 degC,,,,").advice is Advice.REPLACE


def test_paper_that_passes_current_at_a_small_part_of_its_rating_is_unfit():
    """Common practice: whatever the circuit would bear, in any position of high voltage."""
    lenient = bench(leakage_max_A=5e-3)
    found = judge("C5,0.02 uF,,1 uA,30 V,,,,,,", limits=lenient)
    assert found.advice is Advice.REPLACE
    assert "unfit in a position of high voltage" in str(found)
    # At a voltage near its rating, or where nothing high stands, the limits alone decide.
    full = judge("C5,0.02 uF,,5 uA,400 V,,,,,,", limits=lenient)
    assert full.advice is Advice.WATCH
    assert "far more than a sound part" in str(full)
    assert judge("C5,0.02 uF,,1 nA,400 V,,,,,,", limits=lenient).advice is Advice.KEEP
    low = judge("C5,0.02 uF,,1 uA,30 V,,,,,,", limits=replace(lenient, test_V=30.0), bears=30.0)
    assert low.advice is Advice.WATCH


def test_no_reading_makes_a_low_rating_good():
    found = judge("C5,0.02 uF,,0.1 uA,400 V,,,,,,", bears=420.0)
    assert found.advice is Advice.REPLACE
    assert "it bears 420 V and is rated 400 V" in str(found)


ELECTROLYTIC = {"style": "aluminium", "value_F": 22e-6, "rated_V": 450.0, "role": Role.SMOOTHING}
SMOOTHING = {
    "test_V": 450.0,
    "leakage_max_A": 10e-3,
    "esr_max_ohm": 36.0,
    "esr_Hz": 120.0,
    "value_min_F": 15.4e-6,
    "value_max_F": 33e-6,
}


@pytest.mark.parametrize(
    ("line", "advice"),
    [
        # 102 µA at 450 V is the published limit (0.01·C·U + 3 µA), 10 mA what the circuit bears.
        ("C5,22 uF,12 ohm,90 uA,450 V,2 min,,120 Hz,,,", Advice.KEEP),
        ("C5,22 uF,12 ohm,2 mA,450 V,2 min,,120 Hz,,,", Advice.FORM),
        ("C5,22 uF,12 ohm,2 mA,450 V,60 min,,120 Hz,,,", Advice.WATCH),
        ("C5,22 uF,12 ohm,15 mA,450 V,2 min,,120 Hz,,,", Advice.FORM),
        ("C5,22 uF,12 ohm,15 mA,450 V,60 min,,120 Hz,,,", Advice.REPLACE),
        # Good capacitance with a high ESR is no good where the ripple is.
        ("C5,22 uF,40 ohm,90 uA,450 V,2 min,,120 Hz,,,", Advice.REPLACE),
        ("C5,22 uF,30 ohm,90 uA,450 V,2 min,,120 Hz,,,", Advice.WATCH),
        # 36 Ω at 120 Hz are 36·(1.026/1.4)² = 19.3 Ω at 100 kHz.
        ("C5,22 uF,18 ohm,90 uA,450 V,2 min,,100 kHz,,,", Advice.WATCH),
        ("C5,22 uF,20 ohm,90 uA,450 V,2 min,,100 kHz,,,", Advice.REPLACE),
    ],
)
def test_electrolytics(line, advice):
    found = judge(line, of=position(**ELECTROLYTIC), limits=bench(**SMOOTHING))
    assert found.advice is advice


@pytest.mark.parametrize("style", ["tantalum", "tantalum-wet"])
def test_tantalum_is_not_formed(style):
    of = position(style=style, value_F=22e-6, rated_V=50.0)
    limits = bench(test_V=40.0, leakage_max_A=1e-6, value_min_F=18e-6, value_max_F=30e-6)
    found = judge("C5,22 uF,,5 uA,40 V,2 min,,,,,", of=of, limits=limits, bears=40.0)
    assert found.advice is Advice.REPLACE


def circuit():
    def element(name, value):
        return Element(name=name, letter=name[0], nodes=("p", "g"), value=value, span=NOWHERE)

    elements = (element("C5", 2e-8), element("R1", 1e4), element("L1", 10.0))
    return Circuit(
        netlist=Netlist(path="hand.cir", title="", elements=elements),
        sheet=Sheet(),
        name="",
        positions=(position(),),
        parts=(),
        line=Line(),
    )


def judge_all(*lines):
    return verdicts(rows(*lines), circuit=circuit(), bench={"C5": bench()}, worst={"C5": worst()})


def test_several_voltages_of_one_part():
    found = judge_all("C5,0.02 uF,,1 nA,100 V,,,,,,", "C5,,,0.1 uA,400 V,,,,,,")
    assert [v.advice for v in found.verdicts] == [Advice.KEEP]


def test_resistors_and_windings_are_compared_with_what_is_drawn():
    found = judge_all("R1,,,,,,,,12 kohm,,", "L1,,,,,,,,310 ohm,9.5 H,")
    assert [str(drift) for drift in found.drifts] == [
        "R1 reads 12 kΩ, drawn 10 kΩ (+20%)",
        "L1 reads 310 Ω",
        "L1 reads 9.5 H, drawn 10 H (-5%)",
    ]
    assert found.verdicts == ()


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("C77,0.1 uF,,,,,,,,,", 'readings.csv:2:1: the netlist has no part "C77"'),
        (
            "C5,,,1 uA,500 V,,,,,,",
            "readings.csv:2:11: C5: tested at 500 V, above its rating of 400 V",
        ),
        ("C5,,,1 uA,,,,,,,", "C5: at which voltage was the leakage measured?"),
        ("C5,,2 ohm,,,,,,,,", "C5: at which frequency"),
        ("C5,0.1 MFD,,,,,,,,,", "readings.csv:2:4"),
        ("C5,-1 uF,,,,,,,,,", "readings.csv:2:4"),
        ("C5,3 ohm,,,,,,,,,", "readings.csv:2:4"),
    ],
)
def test_error_rows_are_told_and_the_rest_is_judged(line, message):
    found = judge_all(line, "R1,,,,,,,,10 kohm,,")
    assert any(message in str(problem) for problem in found.problems)
    assert [drift.part for drift in found.drifts] == ["R1"]

"""What readings make of the order of work, and of the stresses."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Circuit, Kind, Line, Part
from stress.finding import Severity
from stress.judge.measured import moved, order, past
from stress.judge.verdict import Advice, Point, Verdict
from stress.netlist.flat import Netlist
from stress.parts.limit import Limit
from stress.parts.sheet import Sheet
from stress.study.result import Condition, Risk, Working
from stress.text.span import Span

NOWHERE = Span(file="hand.cir", line=1, column=1, length=1, text="")


def risk(name, rank, severity, *, consequence=5.0, likelihood=0.6):
    return Risk(
        position=name,
        rank=rank,
        severity=severity,
        reason="leak: XU2 burns",
        consequence=consequence,
        likelihood=likelihood,
    )


def verdict(name, advice):
    return Verdict(position=name, advice=advice, points=(Point(advice, "as read"),))


DRAWN = (
    risk("C5", 1, Severity.REPLACE, consequence=9.0),
    risk("C6", 2, Severity.REPLACE, consequence=6.0),
    risk("C7", 3, Severity.TEST),
    risk("C8", 4, Severity.WATCH),
    risk("C9", 5, Severity.NOTE, consequence=0.0, likelihood=0.0),
)


def names(risks):
    return [each.position for each in risks]


def test_without_readings_the_order_stays():
    assert order(DRAWN, ()) == DRAWN


def test_a_part_that_reads_good_goes_back():
    found = order(DRAWN, [verdict("C5", Advice.KEEP)])
    assert names(found) == ["C6", "C7", "C8", "C5", "C9"]
    assert found[3].severity is Severity.WATCH
    assert [each.rank for each in found] == [1, 2, 3, 4, 5]
    assert "keep: as read; leak: XU2 burns" in found[3].reason


def test_a_part_that_reads_bad_goes_to_the_front_where_it_can_do_harm():
    found = order(DRAWN, [verdict("C7", Advice.REPLACE), verdict("C9", Advice.REPLACE)])
    # C7: 5.0 · 1 against 9.0 · 0.6 and 6.0 · 0.6
    assert names(found) == ["C5", "C7", "C6", "C8", "C9"]
    assert found[1].severity is Severity.REPLACE
    assert found[4].severity is Severity.WATCH  # bad, but nothing else suffers


@pytest.mark.parametrize(
    ("advice", "severity"),
    [
        (Advice.FORM, Severity.TEST),
        (Advice.AGAIN, Severity.REPLACE),
        (Advice.WATCH, Severity.WATCH),
    ],
)
def test_what_else_a_verdict_asks_for(advice, severity):
    found = order(DRAWN, [verdict("C5", advice)])
    assert next(each for each in found if each.position == "C5").severity is severity


@pytest.fixture
def circuit():
    tube = Part(
        name="R9",
        kind=Kind.RESISTOR,
        limits={"power_W": Limit(value=2.0, source="sheet")},
        span=NOWHERE,
    )
    guess = replace(
        tube, name="R8", limits={"power_W": Limit(value=1.0, source="size", assumed=True)}
    )
    return Circuit(
        netlist=Netlist(path="hand.cir", title="", elements=()),
        sheet=Sheet(),
        name="",
        positions=(),
        parts=(tube, guess),
        line=Line(),
    )


def working(**power_W):
    parts = {name: {"nominal": {"power_W": watts}} for name, watts in power_W.items()}
    return Working(conditions=(Condition(name="nominal", line_V=None),), positions={}, parts=parts)


def test_stated_limits_alone_are_judged(circuit):
    found = past(circuit, drawn=working(R9=1.5, R8=5.0), measured=working(R9=2.5, R8=5.0))
    assert [(each.victim.part, each.victim.healthy, each.drawn) for each in found] == [
        ("R9", 1.5, False)
    ]
    again = past(circuit, drawn=working(R9=2.2), measured=working(R9=2.5))
    assert again[0].drawn


def test_nothing_moves_in_what_was_not_solved(circuit):
    assert moved(circuit, drawn=working(), measured=working()) == ()

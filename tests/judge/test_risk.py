"""The order of work: what goes first and why, on hand-made results.

The weights are common practice; what is tested is the order that anyone in the trade would give.
"""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Circuit, Kind, Line, Part, Position, Role
from stress.finding import Finding, Severity
from stress.judge.risk import consequence, risks
from stress.netlist.flat import Netlist
from stress.parts.limit import Limit
from stress.parts.sheet import CapacitorEntry, Sheet
from stress.parts.styles import find
from stress.study.result import Failure, Leakage, LeakageIn, Victim, Worst
from stress.study.unjudged import Unjudged
from stress.text.span import Span

SPAN = Span("set.cir", 1, 1, 1, "")


def position(name, style, **known):
    return Position(
        name=name,
        nodes=("a", "b"),
        role=known.pop("role", Role.COUPLING),
        role_text="",
        style=find(style),
        style_source="sheet",
        value_F=20e-9,
        span=SPAN,
        **known,
    )


def circuit(*positions, findings=(), sheet=None):
    parts = (
        Part(name="XU2", kind=Kind.TUBE, type="6V6GT", span=SPAN),
        Part(name="Lop", kind=Kind.WINDING, irreplaceable=True, span=SPAN),
        Part(name="R7", kind=Kind.RESISTOR, span=SPAN),
    )
    return Circuit(
        netlist=Netlist(path="set.cir", title="", elements=()),
        sheet=sheet or Sheet(),
        name="set",
        positions=positions,
        parts=parts,
        line=Line(),
        findings=findings,
    )


def victim(part="XU2", stress=15.0):
    limit = Limit(value=12.0, source="sheet")
    return Victim(part=part, quantity="plate_W", stress=stress, limit=limit)


def leak(name, *, critical=None, functional=None, part="XU2"):
    found = LeakageIn(
        condition="nominal",
        critical_ohm=critical,
        critical_A=None,
        victim=victim(part) if critical else None,
        functional_ohm=functional,
        functional_reason="the bias of XU2 moves" if functional else None,
        governs=True,
    )
    return Leakage(position=name, governing=found, by_condition=(found,))


def short(name, *, part="XU2"):
    return Failure(
        position=name,
        fault="short",
        condition="nominal",
        victims=(victim(part),),
        text="",
        dangerous=True,
    )


def order(of, *, worst=None, leakage=None, failures=None):
    found = risks(of, worst=worst or {}, leakage=leakage or {}, failures=failures or {})
    return {risk.position: risk for risk in found}


def test_a_paper_coupling_capacitor_whose_leak_burns_goes_before_power():
    found = order(
        circuit(position("C1", "paper")), leakage={"C1": leak("C1", critical=4e6, functional=3e7)}
    )["C1"]

    assert found.severity is Severity.REPLACE
    assert found.reason == (
        "below 4 MΩ of leakage XU2 plate dissipation 15 W, limit 12 W; "
        "the equipment is off its working point from 30 MΩ on"
    )


@pytest.mark.parametrize(
    ("style", "critical", "severity"),
    [
        ("paper", 4e6, Severity.REPLACE),
        ("paper", 5e4, Severity.TEST),  # a leak that needs 50 kΩ is nearly a short
        ("film", 4e6, Severity.TEST),  # film seldom leaks, and a look costs nothing
        ("ceramic-1", 4e6, Severity.WATCH),  # a class 1 ceramic hardly ever does
    ],
)
def test_what_a_leak_asks_for_depends_on_style_and_size(style, critical, severity):
    found = order(circuit(position("C1", style)), leakage={"C1": leak("C1", critical=critical)})

    assert found["C1"].severity is severity


def test_a_leak_that_only_detunes_is_watched():
    found = order(circuit(position("C1", "paper")), leakage={"C1": leak("C1", functional=1e7)})

    assert found["C1"].severity is Severity.WATCH
    assert "no known limit is passed" in found["C1"].reason


def test_nothing_known_is_a_note():
    assert order(circuit(position("C1", "mica")))["C1"].severity is Severity.NOTE


def test_a_rating_that_is_passed_for_good_is_replaced_and_briefly_is_tested():
    lasting = Worst(position="C1", worst_V=320.0, condition="pulled XU2")
    brief = Worst(
        position="C2", worst_V=250.0, condition="high", brief_V=420.0, brief_condition="cold"
    )

    found = order(
        circuit(position("C1", "paper", rated_V=300.0), position("C2", "paper", rated_V=400.0)),
        worst={"C1": lasting, "C2": brief},
    )

    assert found["C1"].severity is Severity.REPLACE
    assert found["C1"].reason == "it bears 320 V (pulled XU2), rated 300 V"
    assert found["C2"].severity is Severity.TEST


def test_an_electrolytic_may_pass_its_rating_briefly_within_its_surge():
    # IEC 60384-4 (from memory): 1.10 times above 315 V, so 450 V stands 495 V for a moment.
    worst = Worst(
        position="C1", worst_V=400.0, condition="high", brief_V=490.0, brief_condition="cold"
    )

    found = order(
        circuit(position("C1", "aluminium", rated_V=450.0, role=Role.RESERVOIR)),
        worst={"C1": worst},
    )

    assert found["C1"].severity is Severity.NOTE


def test_what_can_kill_goes_first():
    touch = Finding(severity=Severity.REPLACE, where="C2", text="line to chassis", rule="class-y")
    of = circuit(position("C1", "paper"), position("C2", "paper"), findings=(touch,))

    found = order(of, leakage={"C1": leak("C1", critical=4e6)})

    assert (found["C2"].rank, found["C1"].rank) == (1, 2)


def test_an_irreplaceable_victim_weighs_more_than_a_tube_and_a_tube_more_than_a_resistor():
    of = circuit(position("C1", "paper"))

    weights = [consequence(of, victim(part)) for part in ("Lop", "XU2", "R7")]

    assert weights == sorted(weights, reverse=True)
    assert len(set(weights)) == 3


def test_further_past_the_limit_weighs_more_but_not_without_end():
    of = circuit(position("C1", "paper"))

    near, far, absurd = (consequence(of, victim(stress=w)) for w in (12.5, 24.0, 12e6))

    assert near < far < absurd <= 3.0 * 5.0


def test_the_sheet_weighs_styles_otherwise():
    doubtful = Sheet(likelihood={"ceramic-1": 100.0})
    of = circuit(position("C1", "ceramic-1"), sheet=doubtful)

    found = order(of, leakage={"C1": leak("C1", critical=4e6)})

    assert found["C1"].severity is not Severity.WATCH


def test_a_young_part_is_less_likely_to_leak():
    young = Sheet(capacitors={"c1": CapacitorEntry(year=2024)})
    leaks = {"C1": leak("C1", critical=4e6)}

    old = order(circuit(position("C1", "paper")), leakage=leaks)["C1"]
    new = order(circuit(position("C1", "paper"), sheet=young), leakage=leaks)["C1"]

    assert new.likelihood < old.likelihood


def test_a_dangerous_short_of_an_electrolytic_is_tested_before_power():
    of = circuit(position("C1", "aluminium", role=Role.RESERVOIR))

    found = order(of, failures={"C1": (short("C1", part="Lop"),)})

    assert found["C1"].severity is Severity.TEST
    assert found["C1"].reason == "short: Lop plate dissipation 15 W, limit 12 W"


def test_a_short_that_strains_a_part_without_a_limit_is_tested_not_called_harmless():
    """From ten times its healthy stress on; below that it may well be within a limit."""
    of = circuit(position("C1", "aluminium", role=Role.RESERVOIR))

    def shorted(stress):
        strain = Unjudged(
            part="Lop", quantity="current_A", healthy=0.035, stress=stress, key="current"
        )
        return replace(short("C1"), victims=(), dangerous=False, unjudged=(strain,))

    severe = order(of, failures={"C1": (shorted(1.58),)})["C1"]
    mild = order(of, failures={"C1": (shorted(0.2),)})["C1"]

    assert severe.severity is Severity.TEST
    assert severe.reason == "short: Lop current 35 mA to 1.58 A, its limit is not known"
    assert mild.severity is Severity.NOTE

"""The leakage study on a divider with a closed form, solved without ngspice.

300 V feeds C1 through 100 kΩ; behind C1 a grid leak of 470 kΩ to ground. With a leak R the
direct current is 300 V / (570 kΩ + R), so every crossing is known exactly.
"""

import numpy as np
import pytest

from stress.circuit.circuit import Circuit, Kind, Line, Part, Position, Role
from stress.engine.case import Proof, Settled, Unsolved, Waves
from stress.netlist.flat import Element, Netlist
from stress.parts.limit import Limit
from stress.parts.sheet import Sheet
from stress.parts.styles import find
from stress.study.failures import failures
from stress.study.leakage import leakage, rungs
from stress.study.working import work
from stress.text.span import Span

SPAN = Span("divider.cir", 1, 1, 1, "")
SUPPLY_V, FEED_OHM, GRID_OHM = 300.0, 100e3, 470e3


def divider(*, limits=None, insulation_ohm=1e10, rated_V=None):
    """The circuit; `limits` are those of the grid leak resistor."""
    elements = (
        Element(name="V1", letter="V", nodes=("b", "0"), value=SUPPLY_V, span=SPAN),
        Element(name="R1", letter="R", nodes=("b", "p"), value=FEED_OHM, span=SPAN),
        Element(name="C1", letter="C", nodes=("p", "g"), value=20e-9, span=SPAN),
        Element(name="R2", letter="R", nodes=("g", "0"), value=GRID_OHM, span=SPAN),
    )
    position = Position(
        name="C1",
        nodes=("p", "g"),
        role=Role.COUPLING,
        role_text="coupling",
        style=find("paper"),
        style_source="sheet",
        value_F=20e-9,
        rated_V=rated_V,
        insulation_ohm=insulation_ohm,
        span=SPAN,
    )
    parts = tuple(
        Part(
            name=name,
            kind=Kind.RESISTOR,
            pins={"plus": nodes[0], "minus": nodes[1]},
            elements=(name,),
            limits=own,
            value=ohm,
            span=SPAN,
        )
        for name, nodes, ohm, own in (
            ("R1", ("b", "p"), FEED_OHM, {}),
            ("R2", ("g", "0"), GRID_OHM, limits or {}),
        )
    )
    return Circuit(
        netlist=Netlist(path="divider.cir", title="", elements=elements),
        sheet=Sheet(),
        name="divider",
        positions=(position,),
        parts=parts,
        line=Line(),
    )


class Divider:
    """A solver that knows the closed form; counts its cases, and fails where it is told to."""

    def __init__(self, fails=lambda ohm: False):
        self.fails = fails
        self.names = []

    def solve(self, cases):
        for case in cases:
            assert case.parent is None or case.parent in self.names, "a parent nobody solved"
            self.names.append(case.name)
            named = {e.name: e.value for e in case.twin.elements}
            ohm = case.values.get("C1#leak", named["C1#leak"])
            if self.fails(ohm):
                yield Unsolved(case=case.name, reason="told to fail")
                continue
            amps = SUPPLY_V / (FEED_OHM + ohm + GRID_OHM)
            g, p = amps * GRID_OHM, SUPPLY_V - amps * FEED_OHM
            names = ("v(b)", "v(p)", "v(g)", "v(c1#)", "i(c1)", "i(v1)")
            rows = np.array([[x, x] for x in (SUPPLY_V, p, g, g, 0.0, -amps)])
            proof = Proof(
                distance=0.0,
                residual=0.0,
                cycles=1,
                jacobian_cycles=0,
                multiplier=None,
                points=2,
                method="operating point",
            )
            waves = Waves(time_s=np.array([0.0, 1.0]), names=names, values=rows)
            yield Settled(case=case.name, waves=waves, proof=proof)


def study(circuit, solver):
    healthy = work(circuit, solver=solver)
    return leakage(circuit, circuit.positions, healthy=healthy, solver=solver)["C1"]


# P = (300 V)² · 470 kΩ / (570 kΩ + R)²
@pytest.mark.parametrize("watt", [0.1, 0.01, 0.001])
def test_critical_leakage_is_the_closed_form(watt):
    circuit = divider(limits={"power_W": Limit(value=watt, source="sheet")})

    found = study(circuit, Divider()).governing

    expected = SUPPLY_V * (GRID_OHM / watt) ** 0.5 - FEED_OHM - GRID_OHM
    assert found.critical_ohm == pytest.approx(expected, rel=0.01)  # CLOSE in the study
    assert (found.victim.part, found.victim.quantity) == ("R2", "power_W")
    assert found.critical_A == pytest.approx(SUPPLY_V / (570e3 + expected), rel=0.01)
    assert found.victim.stress >= watt


def test_no_limit_no_critical_leakage():
    found = study(divider(), Divider()).governing

    assert found.critical_ohm is None
    assert found.victim is None


def test_an_assumed_limit_makes_no_critical_leakage():
    limit = Limit(value=0.01, source="assumed: half a watt", assumed=True)

    found = study(divider(limits={"power_W": limit}), Divider()).governing

    assert found.critical_ohm is None
    assert found.assumed_critical_ohm == pytest.approx(
        SUPPLY_V * (GRID_OHM / 0.01) ** 0.5 - 570e3, rel=0.01
    )
    assert found.assumed_victim.part == "R2"


def test_a_limit_passed_when_healthy_is_no_victim():
    circuit = divider(limits={"power_W": Limit(value=1e-9, source="sheet")}, insulation_ohm=1e9)

    found = study(circuit, Divider()).governing

    assert found.always  # without the leak of 1 GΩ the limit is kept: 300 V / 100 GΩ
    assert found.critical_ohm == 1e9
    assert found.victim.part == "R2"


def test_every_case_but_the_roots_starts_from_a_solved_one():
    solver = Divider()

    study(divider(limits={"power_W": Limit(value=0.01, source="sheet")}), solver)

    assert len(solver.names) == len(set(solver.names))  # no case is asked twice
    assert 12 <= len(solver.names) <= 40


def test_a_case_that_fails_is_shown_and_the_rest_goes_on():
    circuit = divider(limits={"power_W": Limit(value=0.01, source="sheet")})

    found = study(circuit, Divider(fails=lambda ohm: ohm < 50.0)).governing

    assert found.critical_ohm == pytest.approx(1.487e6, rel=0.01)  # the closed form
    assert {why.kind for why in found.unanswered} == {"unsolved"}
    assert [point.unanswered for point in found.curve if point.ohm < 50.0] == list(found.unanswered)


def test_failures_find_the_victim_of_a_short():
    circuit = divider(limits={"power_W": Limit(value=0.1, source="sheet")})
    solver = Divider()
    healthy = work(circuit, solver=solver)
    leaks = leakage(circuit, circuit.positions, healthy=healthy, solver=solver)

    found = failures(circuit, circuit.positions, healthy=healthy, leakage=leaks, solver=solver)[
        "C1"
    ]

    short = next(failure for failure in found if failure.fault == "short")
    assert short.dangerous
    assert short.victims[0].stress == pytest.approx(300.0**2 * 470e3 / 570e3**2, rel=1e-3)
    assert "R2 power 0.13 W, limit 0.1 W" in short.text
    assert not next(failure for failure in found if failure.fault == "open").dangerous


@pytest.mark.parametrize(
    ("top", "first", "last"), [(1e11, 1e10, 1.0), (2e9, 1e9, 1.0), (1.5e9, 1e8, 1.0), (5.0, 1, 1.0)]
)
def test_rungs_are_decades_clear_of_the_insulation(top, first, last):
    ladder = rungs(top)

    assert (ladder[0], ladder[-1]) == (first, last)
    assert all(below < top / 1.9 for below in ladder)

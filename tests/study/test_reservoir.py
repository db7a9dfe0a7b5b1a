"""The upper limit of a reservoir: type table, simulated peaks, and both missing."""

from dataclasses import replace

import numpy as np
import pytest

from stress.circuit.circuit import Kind, Part, Role
from stress.engine.case import Case, Proof, Ran, Settled, Twin, Unsolved, Waves
from stress.parts.limit import Limit
from stress.study import reservoir
from stress.study.result import Replacement

PROOF = Proof(
    distance=0.0,
    residual=0.0,
    cycles=1,
    jacobian_cycles=0,
    multiplier=None,
    points=3,
    method="cycle map",
)


@pytest.fixture
def supply(circuit_of):
    circuit = circuit_of(
        "V1 a 0 sin",
        "R1 k b 47",
        "C1 b 0 4e-5",
        "R2 b c 2200",
        "C2 c 0 2e-5",
        roles={"C1": Role.RESERVOIR, "C2": Role.SMOOTHING},
    )
    rectifier = Part(
        name="D1",
        kind=Kind.DIODE,
        pins={"plus": "a", "minus": "k"},
        limits={"peak_A": Limit(value=1.0, source="sheet")},
        span=circuit.netlist.elements[0].span,
    )
    tube = Part(
        name="XV1",
        kind=Kind.RECTIFIER,
        type="5Y3GT",
        pins={"plate": "a", "plate2": "a2", "cathode": "b"},
        span=circuit.netlist.elements[0].span,
    )
    return replace(circuit, parts=(rectifier, tube))


def test_the_rectifiers_are_found_across_a_surge_resistor(supply):
    found = reservoir.rectifiers_of(supply.position("C1"), circuit=supply)
    assert [part.name for part in found] == ["D1", "XV1"]
    assert reservoir.rectifiers_of(supply.position("C2"), circuit=supply) == ()


def test_largest_first_capacitor_of_the_table(supply):
    """5Y3GT: 20 µF (tubeofile.com [read])."""
    limit_F, source = reservoir.table_limit(supply.parts)
    assert limit_F == pytest.approx(20e-6)
    assert "5Y3GT" in source
    assert reservoir.table_limit(supply.parts[:1]) == (None, "")


def solved_by_hand(case):
    """A rectifier whose peak current is 10 kA per farad, and three times that when switched on."""
    peak_A = 1e4 * case.values["C1"]
    transient = case.analysis != Case(name="", twin=case.twin).analysis
    current = np.array([[0.0, peak_A * (3 if transient else 1), 0.0]])
    waves = Waves(
        time_s=np.array([0.0, 0.008, 1 / 60]),
        names=("i(d1)", "v(a)", "v(k)"),
        values=np.vstack([current, np.zeros((2, 3))]),
    )
    if transient:
        return Ran(case=case.name, waves=waves)
    return Settled(case=case.name, waves=waves, proof=PROOF)


def run(supply, candidates, answer):
    circuit = replace(supply, parts=supply.parts[:1])
    base = Case(
        name="high",
        condition="high",
        twin=Twin(elements=supply.netlist.elements, models={}, period_s=1 / 60),
        values={"V1": 1.08},
    )
    plan = reservoir.plan(
        circuit.position("C1"), circuit=circuit, base=base, fit_F=47e-6, candidates_F=candidates
    )
    cases = next(plan)
    with pytest.raises(StopIteration) as stop:
        plan.send(tuple(answer(case) for case in cases))
    return cases, stop.value.value


def test_every_candidate_is_simulated_in_place(supply):
    cases, found = run(supply, (47e-6, 68e-6, 100e-6, 150e-6), solved_by_hand)
    assert [case.values["C1"] for case in cases] == [47e-6, 68e-6, 100e-6, 150e-6, 47e-6]
    assert all(case.values["V1"] == 1.08 for case in cases)
    assert [case.parent for case in cases] == ["high"] * 4 + [None]
    # 10 kA/F and a limit of 1 A: 100 µF and no more
    assert found.value_max_F == 100e-6
    assert found.inrush_A == pytest.approx(1.41)
    assert "680 mA with 68 µF" in found.text
    assert "limit 1 A" in found.text


def test_what_was_not_solved_is_no_number(supply):
    _, found = run(supply, (47e-6,), lambda case: Unsolved(case=case.name, reason="gone"))
    assert found.tried[0].peak_A is None
    assert found.value_max_F is None
    assert [missing.kind for missing in found.unanswered] == ["unsolved"]


def test_no_candidate_within_the_peak_leaves_the_value_that_is_there(supply):
    tried = (reservoir.Tried(value_F=47e-6, peak_A=1.5),)
    position = supply.position("C1")
    found = reservoir.judged(position, parts=supply.parts[:1], tried=tried)
    assert found.value_max_F == position.value_F


def test_the_smaller_of_table_and_peak_counts(supply):
    tried = (reservoir.Tried(value_F=47e-6, peak_A=0.5),)
    found = reservoir.judged(supply.position("C1"), parts=supply.parts, tried=tried)
    assert found.value_max_F == pytest.approx(20e-6)


def chosen(value_F):
    return Replacement(
        position="C1",
        value_F=value_F,
        rated_V=450.0,
        style="aluminium",
        ripple_rms_A=None,
        reason="next of E6",
    )


class ByHand:
    """A solver of the rectifier of `solved_by_hand`."""

    def solve(self, cases):
        return iter([solved_by_hand(case) for case in cases])


@pytest.mark.parametrize(
    ("value_F", "fitted_F", "said"),
    [
        (47e-6, 47e-6, ""),
        # 150 µF would draw 1.5 A through a rectifier of 1 A: back to the 39 µF below 40 µF.
        (150e-6, 39e-6, "the rectifier would pass 1.5 A, limit 1 A, with 150 µF"),
    ],
)
def test_replacements_are_tried_in_place(supply, value_F, fitted_F, said):
    circuit = replace(supply, parts=supply.parts[:1])
    base = Case(
        name="high", twin=Twin(elements=supply.netlist.elements, models={}, period_s=1 / 60)
    )
    found = reservoir.checked(
        {"C1": chosen(value_F), "C2": chosen(22e-6)}, circuit=circuit, base=base, solver=ByHand()
    )
    assert found["C1"].value_F == pytest.approx(fitted_F)
    assert said in found["C1"].reason
    assert "rectifier peak" in " ".join(found["C1"].notes)
    assert found["C2"] == chosen(22e-6)  # no rectifier charges it

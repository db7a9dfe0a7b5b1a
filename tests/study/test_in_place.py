"""In place or not: what the circuit around a part does to a reading, worked by hand."""

from dataclasses import replace
from math import pi

import numpy as np
import pytest

from stress.circuit.circuit import Kind, Part, Role
from stress.engine.case import Proof, Response, Settled, SmallSignal, Twin, Unsolved, Waves
from stress.parts import styles
from stress.study import bench_in_place, in_place
from stress.study.result import Bench


def around(*, direct=1e9, quiet=1e9, ohm=1e9, test_V=400.0):
    return in_place.Around(
        position="C1",
        test_V=test_V,
        direct_ohm=direct,
        quiet_ohm=quiet,
        impedance_ohm=dict.fromkeys(in_place.FREQUENCIES_HZ, complex(ohm)),
    )


def bench(**keys):
    limits = {
        "position": "C1",
        "test_V": 400.0,
        "leakage_max_A": 1e-6,
        "leakage_reason": "",
        "esr_max_ohm": 3.0,
        "esr_Hz": 120.0,
        "esr_reason": "",
        "value_min_F": 0.9e-7,
        "value_max_F": 1.35e-7,
    }
    return Bench(**{**limits, **keys})


@pytest.fixture
def paper(circuit_of):
    circuit = circuit_of("C1 a b 1e-7", roles={"C1": Role.COUPLING})
    position = replace(circuit.position("C1"), rated_V=400.0, style=styles.find("paper"))
    return replace(circuit, positions=(position,))


@pytest.fixture
def electrolytic(circuit_of):
    circuit = circuit_of("C1 a 0 2.2e-5", roles={"C1": Role.SMOOTHING})
    position = replace(circuit.position("C1"), rated_V=450.0, style=styles.find("aluminium"))
    return replace(circuit, positions=(position,))


def placed(circuit, of, **keys):
    return bench_in_place.placed(
        bench(**keys), around=of, position=circuit.position("C1"), circuit=circuit
    )


@pytest.mark.parametrize(
    ("direct", "verdict", "note"),
    [
        (1e9, "in place", "limit reads 1.4 µA"),  # 400 V / 1 GΩ = 0.4 µA besides 1 µA
        (470e3, "lift one lead", "470 kΩ and passes 851 µA"),
    ],
)
def test_leakage(paper, direct, verdict, note):
    found = placed(paper, around(direct=direct))
    assert found.in_leakage == verdict
    assert note in " ".join(found.notes)


def test_no_test_voltage_goes_to_semiconductors(paper):
    part = Part(name="Q1", kind=Kind.TRANSISTOR, span=paper.positions[0].span)
    found = placed(replace(paper, parts=(part,)), around())
    assert found.in_leakage == "lift one lead"
    assert "semiconductors" in " ".join(found.notes)


def series_capacitance(value_F, ohm, hertz):
    """A capacitance with a resistor across it, read in series: C·(1 + 1/(ωRC)²)."""
    return value_F * (1 + 1 / (2 * pi * hertz * ohm * value_F) ** 2)


@pytest.mark.parametrize(
    ("ohm", "verdict"), [(1e6, "in place"), (10e3, "in place"), (2.2e3, "lift one lead")]
)
def test_capacitance_at_1_kHz(paper, ohm, verdict):
    found = placed(paper, around(ohm=ohm))
    assert found.in_capacitance == verdict
    expected_F = series_capacitance(1e-7, ohm, 1000.0)
    read_F = bench_in_place.seen_F(1e-7, esr_ohm=0.0, around=around(ohm=ohm), frequency_Hz=1000.0)
    assert read_F == pytest.approx(expected_F, rel=1e-9)
    assert (abs(expected_F / 1e-7 - 1) <= 0.1) == (verdict == "in place")


def test_electrolytics_are_measured_at_120_Hz(electrolytic):
    found = placed(electrolytic, around(), value_min_F=15e-6, value_max_F=33e-6)
    assert "capacitance in place at 120 Hz" in " ".join(found.notes)


def test_a_winding_across_it_does_not_read_as_a_capacitance(paper):
    of = replace(around(), impedance_ohm=dict.fromkeys(in_place.FREQUENCIES_HZ, 10 + 50j))
    found = placed(paper, of)
    assert found.in_capacitance == "lift one lead"
    assert "does not read as one" in " ".join(found.notes)


@pytest.mark.parametrize(("ohm", "verdict"), [(10e3, "in place"), (5.0, "lift one lead")])
def test_esr_at_100_kHz(electrolytic, ohm, verdict):
    # 40 Ω at 120 Hz are 40·(1.026/1.4)² = 21.5 Ω at 100 kHz; 5 Ω across it read 4 Ω.
    found = placed(electrolytic, around(ohm=ohm), esr_max_ohm=40.0)
    assert found.in_esr == verdict
    assert ("limit reads 21.4 Ω" in " ".join(found.notes)) == (verdict == "in place")


def test_indication_of_opens_and_shorts(paper):
    good = " ".join(placed(paper, around()).notes)
    assert "an open shows at 100 kHz; a short shows on an ohmmeter" in good
    # 0.1 µF is 16 Ω at 100 kHz: 20 Ω across it hide an open, and a short.
    hidden = " ".join(placed(paper, around(quiet=20.0, ohm=20.0)).notes)
    assert "an open does not show" in hidden
    assert "a short does not show on an ohmmeter, the circuit past it is 20 Ω" in hidden


def test_small_capacitors_are_tried_at_1_MHz(circuit_of):
    circuit = circuit_of("C1 a b 1e-10")
    assert bench_in_place.open_Hz(circuit.position("C1")) == 1e6


def test_what_was_not_solved_stays_open(paper):
    of = in_place.Around(position="C1", test_V=400.0)
    found = placed(paper, of)
    assert (found.in_leakage, found.in_esr, found.in_capacitance) == (None, None, None)


def solved_by_hand(case):
    """Answer as an engine would for a circuit of one 50 kΩ resistor across the position."""
    if isinstance(case.analysis, SmallSignal):
        names = ("v(a)", "v(b)")
        values = np.array([[50e3 + 0j] * 4, [0j] * 4])
        hertz = np.array(case.analysis.frequencies_Hz)
        return Response(case=case.name, frequencies_Hz=hertz, names=names, values=values)
    test = next(e for e in case.twin.elements if e.name == "Vtest#bench")
    amps = -test.value / (50e3 + 1.0)  # into the plus terminal of a source that delivers
    waves = Waves(
        time_s=np.array([0.0, 1.0]),
        names=("i(vtest#bench)",),
        values=np.array([[amps, amps]]),
    )
    proof = Proof(
        distance=0.0,
        residual=0.0,
        cycles=0,
        jacobian_cycles=0,
        multiplier=None,
        points=2,
        method="operating point",
    )
    return Settled(case=case.name, waves=waves, proof=proof)


def run(plan, answer):
    cases = next(plan)
    with pytest.raises(StopIteration) as stop:
        plan.send(tuple(answer(case) for case in cases))
    return cases, stop.value.value


def test_the_cases_and_what_is_made_of_them(paper):
    twin = Twin(elements=paper.netlist.elements, models={}, period_s=1 / 60)
    plan = in_place.plan(paper.position("C1"), circuit=paper, twin=twin, test_V=400.0)
    cases, found = run(plan, solved_by_hand)
    assert all({"c1", "c1#esr", "c1#leak"} == case.removed for case in cases)
    assert found.direct_ohm == pytest.approx(50e3, rel=1e-9)
    assert found.quiet_ohm == pytest.approx(50e3, rel=1e-9)
    assert found.impedance_ohm[120.0] == pytest.approx(50e3)


def test_an_unsolved_case_is_kept_as_one(paper):
    twin = Twin(elements=paper.netlist.elements, models={}, period_s=1 / 60)
    plan = in_place.plan(paper.position("C1"), circuit=paper, twin=twin, test_V=400.0)
    _, found = run(plan, lambda case: Unsolved(case=case.name, reason="gone"))
    assert found.direct_ohm is None
    assert found.impedance_ohm == {}
    assert [missing.kind for missing in found.unanswered] == ["unsolved"] * 3


def test_unplugged_means_no_supply_no_tube_and_no_direct_current(circuit_of):
    circuit = circuit_of("V1 l1 l2 sin", "V2 b 0 250", "V3 s 0 sin", "Vm x y 0", "RU1 b 0 1e4")
    tube = Part(
        name="XU1", kind=Kind.TUBE, elements=("RU1",), span=circuit.netlist.elements[0].span
    )
    circuit = replace(circuit, parts=(tube,), signals=("V3",))
    controlled = replace(circuit.netlist.elements[0], name="Gerr", letter="G", wave=None)
    twin = Twin(elements=(*circuit.netlist.elements, controlled), models={}, period_s=1 / 60)
    bare = in_place.unplugged(twin, circuit=circuit)
    assert {e.name: e.value for e in bare.elements} == {"V3": 0.0, "Vm": 0.0}
    assert bare.period_s is None

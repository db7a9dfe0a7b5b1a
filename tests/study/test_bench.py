"""Bench limits by the formula of their docstring, worked by hand."""

from dataclasses import replace

import pytest

from stress.circuit.circuit import Role
from stress.parts import styles
from stress.parts.limit import Limit
from stress.parts.policy import policies
from stress.parts.sheet import CapacitorEntry, Sheet
from stress.study import bench as study
from stress.study.result import (
    Condition,
    Leakage,
    LeakageIn,
    PositionStress,
    Victim,
    Working,
    Worst,
)

LIMIT = Limit(value=12.0, source="sheet")
VICTIM = Victim(part="XU2", quantity="plate_W", stress=14.0, limit=LIMIT)
COUPLING = ("V1 a 0 sin", "C5 p g 2e-8", "R9 g 0 4.7e5", "R8 p b 1e5")


def working(name="C5", *, rms_A=0.0, hertz=None, dc_V=99.0):
    stress = PositionStress(
        case="nominal",
        dc_V=dc_V,
        peak_V=dc_V,
        reverse_V=None,
        ripple_pp_V=0.0,
        ripple_rms_A=rms_A,
        esr_loss_W=0.0,
        error_V=0.0,
        ripple_Hz=hertz,
        spectrum=((hertz, rms_A),) if hertz else (),
    )
    nominal = Condition(name="nominal", line_V=117.0)
    return Working(conditions=(nominal,), positions={name: {"nominal": stress}}, parts={})


def leakage(critical_ohm, functional_ohm, name="C5"):
    case = LeakageIn(
        condition="nominal",
        critical_ohm=critical_ohm,
        critical_A=None,
        victim=VICTIM if critical_ohm else None,
        functional_ohm=functional_ohm,
        functional_reason="the bias of XU2 moves by a tenth" if functional_ohm else None,
        governs=True,
    )
    return Leakage(position=name, governing=case, by_condition=(case,))


def coupling(circuit_of, *, rated_V=400.0, **sheet):
    circuit = circuit_of(*COUPLING, roles={"C5": Role.COUPLING}, sheet=Sheet(**sheet))
    position = replace(circuit.position("C5"), rated_V=rated_V, style=styles.find("paper"))
    return replace(circuit, positions=(position,)), position


def limits(circuit, position, *, worst_V=420.0, leak=None, work=None):
    return study.bench(
        position,
        working=work or working(position.name),
        worst=Worst(position=position.name, worst_V=worst_V, condition="cold"),
        leakage=leak,
        circuit=circuit,
    )


@pytest.mark.parametrize(
    ("critical_ohm", "functional_ohm", "safety", "bench_degC", "expected_A"),
    [
        # 400 V / (24 MΩ · 16 · 2): paper leaks twice as much per 10 K, 40 K from bench to chassis
        (3.9e6, 24e6, 2.0, 20.0, 400 / (24e6 * 16 * 2)),
        (3.9e6, None, 2.0, 20.0, 400 / (3.9e6 * 16 * 2)),
        (3.9e6, 1.0e6, 2.0, 20.0, 400 / (3.9e6 * 16 * 2)),
        (3.9e6, None, 4.0, 30.0, 400 / (3.9e6 * 8 * 4)),
    ],
)
def test_leakage_by_the_formula(
    circuit_of, critical_ohm, functional_ohm, safety, bench_degC, expected_A
):
    circuit, position = coupling(circuit_of, safety=safety, bench_degC=bench_degC)
    found = limits(circuit, position, leak=leakage(critical_ohm, functional_ohm))
    assert found.test_V == 400.0
    assert found.leakage_max_A == pytest.approx(expected_A, rel=1e-9)
    assert found.safety == safety


def test_every_factor_of_the_leakage_is_shown(circuit_of):
    circuit, position = coupling(circuit_of)
    found = limits(circuit, position, leak=leakage(3.9e6, 24e6))
    assert found.hot_factor == pytest.approx(16.0)
    for shown in ("24 MΩ", "16 times", "60 °C", "20 °C", "safety factor 2", "a tenth"):
        assert shown in found.leakage_reason


@pytest.mark.parametrize(
    ("rated_V", "worst_V", "tester_V", "expected_V", "note"),
    [
        (400.0, 420.0, (), 400.0, "no reading makes it good"),
        (600.0, 420.0, (), 420.0, ""),
        (None, 420.0, (), 420.0, "do not test above"),
        (600.0, 420.0, (50.0, 250.0, 500.0), 500.0, ""),
        (450.0, 420.0, (50.0, 250.0, 500.0), 250.0, "the tester stops at 250 V"),
        (400.0, 420.0, (25.0, 100.0), 100.0, "proves nothing"),
    ],
)
def test_test_voltage(circuit_of, rated_V, worst_V, tester_V, expected_V, note):
    circuit, position = coupling(circuit_of, rated_V=rated_V, tester_V=tester_V)
    found = limits(circuit, position, worst_V=worst_V)
    assert found.test_V == expected_V
    assert note in " ".join(found.notes)


def test_without_a_victim_the_published_limit_counts_and_is_named(circuit_of):
    """0.01·C·U + 3 µA, Wikipedia restating IEC 60384-4 [read]: 22 µF, 450 V -> 102 µA."""
    circuit = circuit_of("C1 b 0 2.2e-5", roles={"C1": Role.SMOOTHING})
    position = replace(circuit.position("C1"), rated_V=450.0, style=styles.find("aluminium"))
    found = limits(
        circuit, position, worst_V=450.0, leak=leakage(None, None, "C1"), work=working("C1")
    )
    assert found.leakage_max_A == pytest.approx(102e-6, rel=1e-6)
    assert "no leakage of it damages anything" in found.leakage_reason
    assert "IEC 60384" in found.leakage_reason


def test_electrolytics_are_formed_first(circuit_of):
    circuit = circuit_of("C1 b 0 2.2e-5", roles={"C1": Role.SMOOTHING})
    position = replace(circuit.position("C1"), rated_V=450.0, style=styles.find("aluminium"))
    found = limits(
        circuit, position, worst_V=400.0, leak=leakage(10e3, None, "C1"), work=working("C1")
    )
    # 400 V / (10 kΩ · 2^(40/32) · 2): what the circuit bears is far above the published limit
    assert found.leakage_max_A == pytest.approx(400 / (10e3 * 2 ** (40 / 32) * 2), rel=1e-9)
    text = " ".join(found.notes)
    assert "plateau" in text
    assert "not for tantalum" in text
    assert "between the two, form it" in text


@pytest.mark.parametrize(
    ("role", "style", "low", "high"),
    [
        (Role.COUPLING, "paper", 0.9, 1.35),
        (Role.TUNING, "mica", 0.98, 1.02),
        (Role.SMOOTHING, "aluminium", 0.7, 1.5),
        (Role.SCREEN_BYPASS, "paper", 0.8, 1.35),
    ],
)
def test_capacitance_window(circuit_of, role, style, low, high):
    circuit = circuit_of("C1 a 0 1e-6", roles={"C1": role})
    position = replace(circuit.position("C1"), rated_V=400.0, style=styles.find(style))
    found = limits(circuit, position, work=working("C1"))
    assert found.value_min_F == pytest.approx(low * 1e-6)
    assert found.value_max_F == pytest.approx(high * 1e-6)


def test_a_tighter_tolerance_of_the_sheet_is_kept(circuit_of):
    entry = CapacitorEntry(tolerance=(0.95, 1.05))
    circuit, position = coupling(circuit_of, capacitors={"c5": entry})
    found = limits(circuit, position)
    assert (found.value_min_F, found.value_max_F) == pytest.approx((1.9e-8, 2.1e-8))


def test_a_position_of_unknown_value_has_no_limits(circuit_of):
    circuit, position = coupling(circuit_of)
    found = limits(circuit, replace(position, value_F=None))
    assert (found.leakage_max_A, found.esr_max_ohm, found.value_min_F) == (None, None, None)


def worn(circuit_of, role, *, rms_A, hertz, value_F, rated_V, resistor_ohm):
    circuit = circuit_of(f"C1 k 0 {value_F}", f"R1 k 0 {resistor_ohm}", roles={"C1": role})
    position = replace(circuit.position("C1"), rated_V=rated_V, style=styles.find("aluminium"))
    found = limits(
        circuit, position, worst_V=rated_V / 2, work=working("C1", rms_A=rms_A, hertz=hertz)
    )
    new = position.style.esr_ohm(value_F, rated_V=rated_V, frequency_Hz=hertz or 120.0)
    return found.esr_max_ohm / new


def test_a_worn_electrolytic_may_stay_as_cathode_bypass_and_must_go_from_a_switching_output(
    circuit_of,
):
    """Common practice: an ESR five times that of a new part at high frequency."""
    stays = worn(
        circuit_of,
        Role.CATHODE_BYPASS,
        rms_A=0.004,
        hertz=120.0,
        value_F=100e-6,
        rated_V=25.0,
        resistor_ohm=270.0,
    )
    goes = worn(
        circuit_of,
        Role.OUTPUT_FILTER,
        rms_A=0.5,
        hertz=100e3,
        value_F=100e-6,
        rated_V=25.0,
        resistor_ohm=3.0,
    )
    assert stays > 5.0
    assert goes <= 3.0


def test_heat_takes_over_where_the_ripple_is_large(circuit_of):
    few = worn(
        circuit_of,
        Role.RESERVOIR,
        rms_A=0.1,
        hertz=100.0,
        value_F=47e-6,
        rated_V=450.0,
        resistor_ohm=1e5,
    )
    many = worn(
        circuit_of,
        Role.RESERVOIR,
        rms_A=0.4,
        hertz=100.0,
        value_F=47e-6,
        rated_V=450.0,
        resistor_ohm=1e5,
    )
    assert few == pytest.approx(3.0)  # by age
    assert many == pytest.approx((0.45 / 0.4) ** 2, rel=0.01)  # by the heat of 0.45 A


def test_the_limit_is_told_for_the_meter_too(circuit_of):
    circuit = circuit_of("C1 b 0 4.7e-5", roles={"C1": Role.RESERVOIR})
    position = replace(circuit.position("C1"), rated_V=450.0, style=styles.find("aluminium"))
    work = working("C1", rms_A=0.1, hertz=120.0)
    found = limits(circuit, position, worst_V=400.0, work=work)
    assert found.esr_Hz == 120.0
    # The ESR goes with 1/m²: 1.026² at 120 Hz and 1.40² at 100 kHz (Vishay table 4).
    shown = found.esr_max_ohm * (1.026 / 1.40) ** 2
    assert f"on a 100 kHz meter that ESR reads {shown:.3g} Ω" in " ".join(found.notes)


def test_a_policy_may_not_like_how_it_is_loaded(circuit_of):
    # 390 V on 400 V paper: 80 % are common practice, 390/0.8 = 487.5 V.
    circuit, position = coupling(circuit_of)
    worst = Worst(position="C5", worst_V=390.0, condition="cold")
    found = study.bench(
        position,
        working=working(),
        worst=worst,
        leakage=None,
        circuit=circuit,
        policy=policies()["common-practice"],
    )
    text = " ".join(found.notes)
    assert "good readings leave it 98% loaded: common-practice asks for 488 V here" in text
    assert found.test_V == 390.0

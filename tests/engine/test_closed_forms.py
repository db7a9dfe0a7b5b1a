"""Answers that a formula gives."""

import math

import numpy as np
import pytest
from scipy.special import i0e

from stress.engine.case import Case, Ran, Response, Settled, SmallSignal, Transient, Unsolved

pytestmark = pytest.mark.ngspice


def solve(pool, case, kind=Settled):
    (answer,) = pool.solve([case])
    assert isinstance(answer, kind), answer
    return answer


def test_direct_current_is_an_operating_point(twin_of, pool):
    """A divider: 12 V times 2/3; the capacitor carries its voltage and no current."""
    twin = twin_of("V1 a 0 12\nR1 a b 1k\nR2 b 0 2k\nC1 b 0 1u")
    answer = solve(pool, Case(name="divider", twin=twin))

    assert answer.proof.method == "operating point"
    assert answer.waves.time_s.tolist() == [0.0, 1.0]
    assert answer.waves.voltage("b") == pytest.approx([8.0, 8.0], rel=1e-6)
    assert answer.waves.current("C1") == pytest.approx([0.0, 0.0], abs=1e-12)
    assert answer.waves.current("V1") == pytest.approx([-4e-3, -4e-3], rel=1e-6)


@pytest.mark.parametrize("farad", [1e-9, 1e-7, 1e-5, 1e-3])
def test_a_low_pass_on_a_sine(twin_of, pool, farad):
    """Amplitude 1/sqrt(1 + (wRC)^2) around the offset, time constants of 1 us to 1 s."""
    twin = twin_of(f"V1 a 0 SIN(5 10 50)\nR1 a b 1k\nC1 b 0 {farad!r}", period_s=0.02)
    answer = solve(pool, Case(name=f"low pass {farad}", twin=twin))
    voltage = answer.waves.voltage("b")
    gain = 1.0 / math.hypot(1.0, 2 * math.pi * 50 * 1e3 * farad)

    assert answer.waves.mean(voltage) == pytest.approx(5.0, rel=1e-4)
    assert answer.waves.rms(voltage - 5.0) == pytest.approx(10 * gain / math.sqrt(2), rel=2e-3)
    assert answer.proof.multiplier == pytest.approx(
        math.exp(-0.02 / (1e3 * farad)), rel=2e-3, abs=1e-3
    )


def test_a_lightly_damped_resonance_settles(twin_of, pool):
    """L 10 H, C 8 uF, R 20 ohm: 17.8 Hz, Q 56, multiplier exp(-RT/2L); driven far above it."""
    twin = twin_of("V1 a 0 SIN(100 50 100)\nR1 a b 20\nL1 b c 10\nC1 c 0 8u", period_s=0.01)
    answer = solve(pool, Case(name="resonance", twin=twin))
    w = 2 * math.pi * 100
    gain = 1 / abs(complex(1 - w * w * 10 * 8e-6, w * 20 * 8e-6))
    voltage = answer.waves.voltage("c")

    assert answer.waves.mean(voltage) == pytest.approx(100.0, rel=2e-4)
    assert answer.waves.rms(voltage - 100) == pytest.approx(50 * gain / math.sqrt(2), rel=5e-3)
    assert answer.proof.multiplier == pytest.approx(math.exp(-20 * 0.01 / 20), rel=1e-3)


def test_a_winding_across_a_source_has_no_offset_current(twin_of, pool):
    """Started at a zero of the voltage its current would be offset for good; settled it is not."""
    answer = solve(
        pool, Case(name="winding", twin=twin_of("V1 a 0 SIN(0 100 50)\nL1 a 0 1", period_s=0.02))
    )
    current = answer.waves.current("L1")

    assert answer.waves.rms(current) == pytest.approx(
        100 / (100 * math.pi) / math.sqrt(2), rel=2e-3
    )
    assert abs(answer.waves.mean(current)) < 1e-3 * answer.waves.rms(current)
    assert "ohm in series assumed" in answer.notices[0]


def test_sources_of_several_frequencies(twin_of, pool):
    """50, 100 and 150 Hz on one resistor repeat after 20 ms; their powers add."""
    cards = "V1 a 0 SIN(0 3 50)\nV2 b a SIN(0 4 100)\nV3 c b PULSE(-1 1 2m 1u 1u 3.3323m 6.6667m)\nR1 c 0 1k"
    answer = solve(pool, Case(name="several", twin=twin_of(cards, period_s=0.02)))

    assert answer.waves.rms(answer.waves.voltage("c")) == pytest.approx(
        math.sqrt(4.5 + 8 + 1), rel=5e-3
    )


def test_two_capacitors_in_series_share_by_their_leakage(twin_of, pool):
    """3 Gohm and 1 Gohm: with 1 s of time constant and a 20 ms period nothing is near settled."""
    cards = "V1 a 0 SIN(400 10 50)\nR0 a b 10\nC1 b m 1n\nC2 m 0 1n\nRl1 b m 3e9\nRl2 m 0 1e9"
    answer = solve(pool, Case(name="series", twin=twin_of(cards, period_s=0.02)))

    assert answer.proof.multiplier == pytest.approx(math.exp(-0.02 / 1.5), rel=1e-3)
    assert answer.waves.mean(answer.waves.voltage("m")) == pytest.approx(100.0, rel=1e-3)


UNLOADED = (
    "V1 a 0 SIN(0 100 50)\nD1 a p DM\nC1 p 0 47u\nRleak p 0 1e10\nRl p 0 10k\n"
    ".model DM D(IS=1n N=1.8)"
)


def unloaded_V(peak_V):
    """Return the voltage at which a diode passes in a period what 10 Gohm take.

    Mean of IS (e^((Vm sin - V)/nVt) - 1) over a period: IS (I0(Vm/nVt) e^(-V/nVt) - 1), with the
    modified Bessel function I0; the diode's gmin of 1 pS takes as much as 1 Tohm.
    """
    nvt, ohm, voltage = 1.8 * 1.380649e-23 * 300.15 / 1.602176634e-19, 1 / 1.01e-10, peak_V
    log_bessel = math.log(i0e(peak_V / nvt)) + peak_V / nvt
    for _ in range(200):
        voltage = nvt * (log_bessel - math.log(1.0 + voltage / ohm / 1e-9))
    return voltage


# Multipliers here are above 0.999999: a state 10 V too high loses 4 uV in a period.
@pytest.mark.parametrize("way", ["from rest", "from a loaded state", "from too high a state"])
def test_an_unloaded_supply(twin_of, pool, way):
    twin = twin_of(UNLOADED, period_s=0.02)
    unloaded = frozenset({"Rl"})
    parents = {
        "from rest": [],
        "from a loaded state": [Case(name="loaded", twin=twin)],
        "from too high a state": [
            Case(name="too high", twin=twin, values={"V1": 1.1}, removed=unloaded)
        ],
    }[way]
    parent = parents[0].name if parents else None
    asked = Case(name=f"unloaded {way}", twin=twin, parent=parent, removed=unloaded)
    *before, answer = list(pool.solve([*parents, asked]))

    assert isinstance(answer, Settled), answer
    found = answer.waves.mean(answer.waves.voltage("p"))
    # 0.3 % is asked of unloaded conditions; the grid's share is the tip of the sine, 2e-4.
    assert found == pytest.approx(unloaded_V(100.0), rel=5e-4)
    if way == "from too high a state":
        high = before[0].waves.mean(before[0].waves.voltage("p"))
        assert high == pytest.approx(unloaded_V(110.0), rel=5e-4)


def test_an_ideal_buck_converter(twin_of, pool):
    """Continuous current, duty 0.41: out = D Vin less the drops; ripple of L by (Vin-Vo)DT/L."""
    cards = (
        "V1 in 0 24\nS1 in sw g 0 SM\nVg g 0 PULSE(0 5 0 50n 50n 4.05u 10u)\nD1 0 sw DS\n"
        "L1 sw o 100u\nC1 o 0 1000u\nRl o 0 3\n.model SM SW(Ron=1m Roff=1e7 Vt=2.5 Vh=0)\n"
        ".model DS D(IS=1e-3 N=0.3)"
    )
    answer = solve(pool, Case(name="ideal buck", twin=twin_of(cards, period_s=1e-5)))
    waves = answer.waves
    out, current = waves.mean(waves.voltage("o")), waves.current("L1")
    drop = 0.3 * 0.025864 * math.log(current.mean() / 1e-3)

    assert out == pytest.approx(0.41 * 24 - 0.59 * drop, rel=3e-3)
    assert np.ptp(current) == pytest.approx((24 - out) * 0.41e-5 / 100e-6, rel=1e-2)


def test_a_capacitor_charges_and_discharges(twin_of, pool):
    """1 - e^-1 after one time constant from rest; e^-1 of a settled state after switching off."""
    twin = twin_of("V1 a 0 10\nR1 a b 1k\nC1 b 0 1u")
    asked = Transient(stop_s=5e-3, step_s=5e-6)
    settled = Case(name="charged", twin=twin)
    off = Case(name="off", twin=twin, parent="charged", values={"V1": 0.0}, analysis=asked)
    rest, _, down = list(
        pool.solve([Case(name="charging", twin=twin, analysis=asked), settled, off])
    )
    assert isinstance(rest, Ran)
    assert isinstance(down, Ran)

    def at(answer, time_s):
        return np.interp(time_s, answer.waves.time_s, answer.waves.voltage("b"))

    assert at(rest, 1e-3) == pytest.approx(10 * (1 - math.exp(-1)), rel=1e-3)
    assert at(down, 1e-3) == pytest.approx(10 * math.exp(-1), rel=1e-3)
    assert at(down, 5e-3) == pytest.approx(10 * math.exp(-5), rel=1e-2)


def test_a_phase_at_the_start(twin_of, pool):
    twin = twin_of("V1 a 0 SIN(0 10 50)\nR1 a 0 1k", period_s=0.02)
    asked = Transient(stop_s=0.02, phase_deg=90.0, keep=("v(a)",))
    answer = solve(pool, Case(name="phase", twin=twin, analysis=asked), Ran)

    assert answer.waves.names == ("v(a)",)
    assert answer.waves.values[0][0] == pytest.approx(10.0, rel=1e-3)
    assert answer.waves.values[0].min() == pytest.approx(-10.0, rel=1e-3)


def test_a_small_signal_response(twin_of, pool):
    """A low-pass of 159.15 Hz: gain and phase a decade below, at, and a decade above."""
    twin = twin_of("V1 a 0 5\nR1 a b 1k\nC1 b 0 1u")
    corner = 1 / (2 * math.pi * 1e-3)
    asked = SmallSignal(frequencies_Hz=(corner / 10, corner, corner * 10), source="V1")
    answer = solve(pool, Case(name="response", twin=twin, analysis=asked), Response)
    gains = answer.values[answer.names.index("v(b)")]
    currents = answer.values[answer.names.index("i(c1)")]

    assert gains == pytest.approx([1 / (1 + 0.1j), 1 / (1 + 1j), 1 / (1 + 10j)], rel=1e-6)
    assert currents == pytest.approx((1 - gains) / 1e3, rel=1e-6)


def test_a_switch_that_holds_its_state_takes_the_plain_way(twin_of, pool):
    """A control that stays between the thresholds at the start of the period, both ways tried."""
    cards = (
        "V1 a 0 10\nVc c 0 SIN(0 3 50)\nS1 a b c 0 SM\nR1 b 0 1k\nC1 b 0 10u\n"
        ".model SM SW(Ron=1 Roff=1e9 Vt=0 Vh=2)"
    )
    answer = solve(pool, Case(name="holding", twin=twin_of(cards, period_s=0.02)))
    # On from asin(2/3) of the sine to 180 degrees and asin(2/3) more; R C is half a period.
    off_s = 0.01
    voltage = answer.waves.voltage("b")

    assert answer.proof.method == "plain transient"
    assert "S1 keeps its state over the period" in answer.notices[-1]
    assert voltage.max() == pytest.approx(10.0, rel=5e-3)  # charged within a step of 10 us
    assert voltage.min() == pytest.approx(10.0 * math.exp(-off_s / 0.01), rel=1e-2)


def test_options_of_the_circuit_count_and_those_of_the_solver_do_not(twin_of, pool):
    """gmin of 1 mS across a junction that blocks makes a divider with 1 kohm; reltol is ours."""
    twin = twin_of(
        "V1 a 0 -10\nR1 a b 1k\nD1 b 0 DM\n.model DM D(IS=1e-15)",
        options={"gmin": 1e-3, "reltol": 0.5},
    )
    answer = solve(pool, Case(name="gmin", twin=twin))

    assert answer.waves.voltage("b")[0] == pytest.approx(-5.0, rel=1e-3)


def test_a_bridge_on_a_source_that_nothing_else_holds(twin_of, pool):
    """Its source floats on junctions alone; the peak less the two drops of the diode law.

    n VT ln(I/IS) is 0.53 V at the load's 0.65 A and 0.60 V with 0.05 ohm at some 2 A, each twice.
    I/(fC) of 0.65 A at 100 Hz on 2200 uF is 3 V of ripple at most; half of it is lost in the mean.
    """
    cards = (
        "Vline l n SIN(0 17 50)\nD1 l p DR\nD2 n p DR\nD3 0 l DR\nD4 0 n DR\n"
        ".model DR D(IS=1n RS=0.05)\nC1 p 0 2200u\nRL p 0 24"
    )
    answer = solve(pool, Case(name="bridge", twin=twin_of(cards, period_s=0.02)))
    voltage = answer.waves.voltage("p")

    assert 17.0 - 1.3 < voltage.max() < 17.0 - 1.05
    assert 1.0 < voltage.max() - voltage.min() < 3.0
    assert "10 gigohm from every node to ground" in " ".join(answer.notices)


def test_a_circuit_without_an_operating_point_is_no_number(twin_of, pool):
    """1 A + exp(V/20 mV) into 1 kohm: V/1k is below 1 A + exp(V/20 mV) for every V.

    At 0 V it is 0 against 2 A; from there on the exponential grows faster, and below 0 V the left
    side is negative. ngspice bends the exponential and returns 999.98 V.
    """
    cards = "I1 0 b 1\nB1 b 0 I=-exp(V(b)/0.02)\nR1 b 0 1k\nC1 b 0 1u"
    answer = solve(pool, Case(name="none", twin=twin_of(cards)), Unsolved)

    assert "B1" in answer.reason
    assert "exp" in answer.reason

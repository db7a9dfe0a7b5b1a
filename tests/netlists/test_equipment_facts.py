"""Facts of the trade that the reference equipments must show by themselves (common practice)."""

from collections.abc import Callable, Mapping
from dataclasses import replace

import numpy as np
import pytest

from stress.circuit.circuit import Circuit
from stress.engine import twin
from stress.engine.case import Settled, Wandering, Waves
from stress.engine.pool import Pool
from stress.study import conditions

Run = Callable[..., Waves]


@pytest.fixture(scope="module")
def run(equipment: Callable[[str], Circuit], pool: Pool) -> Run:
    """Solve an equipment in a condition, with values set for a fault; the settled waves."""
    twins = {}

    def run(stem: str, condition: str = "nominal", **values: float) -> Waves | Wandering:
        circuit = equipment(stem)
        built = twins.setdefault(stem, twin.build(circuit))
        stock = {c.name: c for c in conditions.conditions(circuit)}
        cases = []
        for name, changed in ((condition, {}), (condition, values)):
            case = conditions.case(circuit, stock[name], twin=built, values=_named(changed))
            label = f"{stem} {name} {sorted(changed.items())}"
            parent = cases[0].name if cases and cases[0].name != label else None
            cases.append(replace(case, name=label, parent=parent))
        answer = list(pool.solve(cases if values else cases[:1]))[-1]
        assert isinstance(answer, Settled | Wandering), answer
        return answer.waves if isinstance(answer, Settled) else answer

    return run


def _named(values: Mapping[str, float]) -> dict[str, float]:
    """C13_leak is the leakage of the twin's C13."""
    return {name.replace("_", "#"): value for name, value in values.items()}


def mean(waves: Waves, node: str, other: str = "0") -> float:
    return waves.mean(waves.voltage(node, other))


@pytest.mark.ngspice
def test_a_leaky_coupling_capacitor_drives_the_output_tube_up(run):
    """Positive voltage at the grid, more cathode current, lower B+."""
    sound, leaky = run("shore_receiver"), run("shore_receiver", C13_leak=2e6)

    assert mean(sound, "g4") == pytest.approx(0.0, abs=0.02)
    assert mean(leaky, "g4") > 5.0
    assert mean(leaky, "k4") > 1.2 * mean(sound, "k4")
    assert mean(leaky, "b1") < mean(sound, "b1") - 5.0


@pytest.mark.ngspice
def test_gigohms_matter_on_the_avc_line(run):
    """Through 2.2 Mohm and 10 kohm a leak of 20 Mohm divides by 20 / 22.2 (closed form)."""
    sound, leaky = run("shore_receiver"), run("shore_receiver", C3_leak=20e6)

    share = mean(leaky, "avc") / mean(sound, "avc")
    assert share == pytest.approx(20 / 22.2, rel=0.01)


@pytest.mark.ngspice
def test_the_first_capacitor_passes_its_rating_while_the_tubes_are_cold(run, equipment):
    """The filament rectifier is first; marked 450 V, its surge limit 495 V is kept."""
    reservoir = equipment("shore_receiver").position("C17")
    volts = run("shore_receiver", "cold").voltage("b0")

    assert reservoir.rated_V == 450.0
    assert 450.0 < float(volts.max()) < 495.0


@pytest.mark.ngspice
def test_a_dried_reservoir_hums(run):
    """A fifth of the capacitance: the ripple rises to some three to five times."""
    value = 40e-6
    sound, dried = run("harbour_midget"), run("harbour_midget", C3=value / 5)

    ripple = [w.rms(w.voltage("b0") - mean(w, "b0")) for w in (sound, dried)]
    assert 3.0 < ripple[1] / ripple[0] < 5.0
    assert mean(dried, "b0") < mean(sound, "b0")


@pytest.mark.ngspice
def test_a_shorted_plate_bypass_burns_the_primary(run, equipment):
    """From the plate to B- the whole supply stands across 180 ohm of copper."""
    primary = equipment("harbour_midget").part("Lop")
    sound, shorted = run("harbour_midget"), run("harbour_midget", C7_leak=0.1)

    assert sound.rms(sound.current("Lop")) < primary.limits["current_A"].value
    assert shorted.rms(shorted.current("Lop")) > 3 * primary.limits["current_A"].value


@pytest.mark.ngspice
def test_an_earthed_case_puts_the_line_across_its_capacitor(run):
    """2 pi f C V: 0.2 uF at 126 V and 60 Hz carry 9.50 mA (closed form)."""
    waves = run("harbour_midget", "earthed")

    assert waves.rms(waves.voltage("0", "chassis")) == pytest.approx(126.0, rel=2e-3)
    amps = waves.rms(waves.current("C2"))
    assert amps == pytest.approx(2 * np.pi * 60 * 0.2e-6 * 126, rel=5e-3)


@pytest.mark.ngspice
def test_a_dried_bias_filter_lets_the_output_tubes_run_away(run):
    """The mean of a rectified bias falls with its reservoir, and nothing is shorted."""
    sound, dried = run("hall_amplifier"), run("hall_amplifier", C5=2e-6)

    assert mean(sound, "g3") < -30.0
    assert mean(dried, "g3") > mean(sound, "g3") + 3.0
    assert mean(dried, "k3") > 1.3 * mean(sound, "k3")


@pytest.mark.ngspice
def test_an_unloaded_amplifier_with_feedback_is_unstable(run):
    """Its output transformer has nothing to drive: it motorboats."""
    answer = run("hall_amplifier", "loudspeaker_out")

    assert isinstance(answer, Wandering)
    assert answer.unstable


@pytest.mark.ngspice
def test_series_capacitors_share_by_their_resistors(run):
    """With 47 kohm each a leak of 470 kohm in one moves the middle by a twenty-first.

    What electrolytics leak when new adds less than 1 %.
    """
    sound, leaky = run("beacon_transmitter"), run("beacon_transmitter", C2_leak=470e3)

    assert mean(sound, "mid") / mean(sound, "b1") == pytest.approx(0.5, rel=1e-3)
    low = 1 / (1 / 47e3 + 1 / 470e3)
    share = mean(leaky, "mid") / mean(leaky, "b1")
    assert share == pytest.approx(low / (low + 47e3), rel=1e-2)


@pytest.mark.ngspice
def test_the_click_filter_bears_the_high_voltage_with_the_key_up(run):
    down, up = run("beacon_transmitter"), run("beacon_transmitter", "key_up")

    assert abs(mean(down, "fk", "cf")) < 1.0
    assert mean(up, "fk", "cf") == pytest.approx(mean(up, "bm"), rel=1e-3)
    assert mean(up, "b2") > 1.1 * mean(down, "b2")


@pytest.mark.ngspice
def test_charging_the_battery_turns_the_indicator_round(run):
    """A divider of 1 : 2.1 against 12 V: 11.4 V of 24 V, 13.7 V of 28.8 V (closed form)"""
    feeds, charged = (mean(run("charthouse_smps", c), "v12", "tap") for c in ("nominal", "high"))

    assert 0.0 < feeds < 1.0
    # The tap moves by 4.8 V / 2.1, less what its resistors drop over the indicator's 15 kohm.
    behind = 1 / (1 / 1.1e3 + 1 / 1e3)
    assert feeds - charged == pytest.approx(4.8 / 2.1 * 15e3 / (15e3 + behind), rel=0.02)


@pytest.mark.ngspice
def test_a_dried_feedback_reservoir_raises_the_outputs(run):
    """The unit holds what it reads; where it reads too little, it gives too much."""
    sound = run("charthouse_smps")
    opened = run("charthouse_smps", C10=22e-6 * 1e-9)

    assert mean(sound, "v12") == pytest.approx(12.0, rel=0.03)
    assert mean(opened, "v12") > 1.15 * mean(sound, "v12")
    assert mean(opened, "v170") > 1.15 * mean(sound, "v170")

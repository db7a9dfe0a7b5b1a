"""Roles behind a series transistor, in its loop, and across chokes."""

import pytest

from stress.circuit.circuit import Role

REGULATOR = """
Vbat bat 0 DC 24
Rbat bat bf 0.03
Q1 {collector} base bus NPN
{load}
Rbase drv base 1k
Edrv drv 0 ctl 0 20
Gerr 0 ctl ref fb 20u
Vref ref 0 DC 2.5
C1 bus 0 {first}
C2 bus 0 1u
Rl bus {far} 10
C3 o 0 100u
R1 o fb 10k
R2 fb 0 10k
C4 ctl cz 0.1u
R10 cz {end} 100k
C5 ctl 0 220p
Rer ctl 0 4.7meg
"""


def position(circuit, name, **changed):
    keys = {"collector": "bf", "load": "", "first": "1000u", "far": "o", "end": "0"} | changed
    return circuit(REGULATOR.format(**keys)).position(name)


def test_behind_a_series_transistor_it_smooths(circuit):
    """The collector lies on the battery itself: nothing is amplified, the emitter is the supply."""
    found = position(circuit, "C1")
    assert found.role is Role.SMOOTHING
    assert "regulated supply bus" in found.role_text
    small = position(circuit, "C2")
    assert small.role is Role.DECOUPLING
    assert "beside C1" in small.role_text


@pytest.mark.parametrize(
    "changed",
    [
        {"collector": "c", "load": "Rc bf c 1k"},  # a load in the collector: a stage
        {"collector": "c", "load": "Lc bf c 1m", "first": "10u"},
    ],
    ids=["resistor", "winding"],
)
def test_a_stage_keeps_its_emitter_bypass(circuit, changed):
    assert position(circuit, "C1", **changed).role is Role.CATHODE_BYPASS


def test_with_a_resistor_of_its_own_it_compensates_the_loop(circuit):
    """C4 and R10 from the error amplifier's output to ground pass nothing on."""
    found = position(circuit, "C4")
    assert found.role is Role.FEEDBACK
    assert "compensates the loop with R10" in found.role_text
    assert position(circuit, "C5").role is Role.FEEDBACK


def test_what_goes_on_behind_the_resistor_is_no_compensation(circuit):
    found = position(circuit, "C4", end="far\nRf far base 1k")
    assert "with R10" not in found.role_text


CHOKE = """
Vl l n SIN(0 325 50)
Rn n 0 5
Lp l n 18
La ha 0 30
Lb 0 hb 30
K1 Lp La 0.999
K2 Lp Lb 0.999
K3 La Lb 0.999
D1 ha b0 DM
D2 hb b0 DM
Lch b0 b1 8
{across}
C1 b1 0 16u
R1 b1 0 10k
"""


@pytest.mark.parametrize(
    ("across", "role", "words"),
    [
        ("C9 b0 b1 0.3u", Role.TUNING, "tunes the choke Lch"),
        ("C9 b0 x 0.02u\nRx x b1 2.2k", Role.SNUBBER, "damps the choke Lch, 2200 ohm"),
    ],
)
def test_a_resistor_tells_a_kick_from_a_resonance(circuit, across, role, words):
    found = circuit(CHOKE.format(across=across)).position("C9")
    assert (found.role, words in found.role_text) == (role, True), found.role_text


STARTER = """
Vbat bat 0 DC 24
Cb bat 0 100u
Lp bat sw 14u
M1 sw gate 0 0 NM
Vgate gate 0 PULSE(0 10 1u 0.4u 1.2u 6.8u 20u)
Ls 0 s 10u
K1 Lp Ls 0.98
D1 s o DM
C1 o 0 1000u
Rst {start} o 15k
R11 bat tap 1.1k
R12 tap 0 1k
Rl o 0 8
"""


@pytest.mark.parametrize(("start", "role"), [("bat", Role.RESERVOIR), ("tap", Role.OUTPUT_FILTER)])
def test_a_starter_comes_from_the_input_itself(circuit, start, role):
    """A meter from a divider's tap to an output does not start it."""
    assert circuit(STARTER.format(start=start)).position("C1").role is role

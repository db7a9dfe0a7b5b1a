import pytest

from stress.judge.power_method import look, method
from stress.pipeline import load
from stress.study.power_result import Way

LINE = """
Vline lh 0 SIN(0 325 50)
Rp lh lq 10
Lp lq 0 10
La ha 0 12
Ra ha pa 80
Lb 0 hb 12
Rb hb pb 80
K1 Lp La 0.999
K2 Lp Lb 0.999
K3 La Lb 0.999
"""
OUTPUT = """
C1 b0 0 16u
R1 b0 b1 470
C2 b1 0 16u
Rl b1 p 4.7k
XV4 p b1 g k 6V6GT
Rg g 0 470k
Rk k 0 270
Ck k 0 25u
"""
FIXED = """
C1 b0 0 16u
R1 b0 b1 470
C2 b1 0 16u
Rl b1 p 4.7k
XV4 p b1 g 0 6V6GT
Rg g nb 220k
D9 n0 hb SMALL
C8 n0 0 10u
R8 n0 nb 2.2k
C9 nb 0 10u
R9 nb 0 10k
.model SMALL D(IS=1n)
"""
CONVERTER = """
Vbat bus 0 DC 24
Lp bus sw 20u
M1 sw gate 0 0 POWER
Vgate gate 0 PULSE(0 10 0 0.1u 0.1u 8u 20u)
D1 sw o FAST
C1 o 0 100u
Rl o 0 50
.model POWER NMOS(VTO=3 KP=3)
.model FAST D(IS=1n)
"""
SHEETS = {
    "television": '[equipment]\nkind = "television"\n',
    "series": '[equipment]\nheaters = "series"\n',
    "vibrator": '[equipment]\nkind = "vibrator"\n',
    "none": "",
}


@pytest.fixture
def circuit(tmp_path):
    def make(text, sheet="none"):
        path = tmp_path / "set.cir"
        path.write_text(f"test set\n{text}\n.end\n")
        path.with_suffix(".toml").write_text(SHEETS[sheet])
        return load(path)

    return make


@pytest.mark.parametrize(
    ("text", "sheet", "way", "reason", "refused"),
    [
        (CONVERTER, "none", Way.DIRECT_CURRENT, "switching converter", "slow ramp"),
        (
            LINE + "XV1 pa b0 866A\nXV2 pb b0 866A" + OUTPUT,
            "none",
            Way.FILAMENT_FIRST,
            "mercury vapour",
            "common ramp",
        ),
        (LINE + "D1 pa b0 SI\n.model SI D(IS=1n)" + OUTPUT, "none", Way.RAMP, "dry rectifier", ""),
        (LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT, "none", Way.RAMP, "filament rectifier", ""),
        (LINE + "XV5 pa pb b0 5AR4" + OUTPUT, "none", Way.RAMP, "cathode-type rectifier", ""),
        (LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT, "series", Way.RAMP, "series string", ""),
        (LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT, "television", Way.LAMP, "deflection", "slow ramp"),
        (LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT, "vibrator", Way.BATTERY, "vibrator", "slow ramp"),
    ],
)
def test_way_by_what_the_equipment_is(circuit, text, sheet, way, reason, refused):
    found = method(circuit(text, sheet))
    assert found.way is way
    assert any(reason in text for text in found.reasons)
    assert any(refused in text for text in found.refused) if refused else not found.refused


def test_tubes_out_first_only_where_the_heaters_are_parallel(circuit):
    text = LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT
    parallel = method(circuit(text)).before
    series = method(circuit(text, "series")).before
    assert any("XV5 out" in step for step in parallel)
    assert any("leave every tube in its socket" in step for step in series)
    assert not any("XV5 out" in step for step in series)


def test_fixed_bias_is_proved_at_the_sockets(circuit):
    """The grid hangs on a filtered negative supply: -14 V there, the cathode at ground."""
    built = circuit(LINE + "XV5 pa pb b0 5Y3GT" + FIXED)
    found = method(built, nodes={"g": -14.0, "nb": -14.0, "n0": -16.0, "b0": 300.0, "b1": 290.0})
    assert any("prove it at the sockets" in step and "-14 V" in step for step in found.before)
    # with the same grid at ground there is no fixed bias to prove
    assert not look(built, nodes={"g": 0.0, "nb": 0.0}).fixed_bias


def test_bias_by_cathode_resistor_is_not_fixed_bias(circuit):
    built = circuit(LINE + "XV5 pa pb b0 5Y3GT" + OUTPUT)
    assert not look(built, nodes={"g": 0.0, "k": 12.5, "b0": 300.0}).fixed_bias


def test_bias_rectifier_is_no_rectifier_of_b_plus(circuit):
    built = circuit(LINE + "XV5 pa pb b0 5Y3GT" + FIXED)
    found = look(built, nodes={"g": -14.0, "n0": -16.0, "b0": 300.0})
    assert found.filament == ("XV5",)
    assert found.silicon == ()


def test_converter_starts_at_full_low_line_with_a_current_limit(circuit):
    found = method(circuit(CONVERTER))
    assert any("current limit" in step for step in found.before)
    assert not found.lamp
    assert min(found.shares) > 0.5
